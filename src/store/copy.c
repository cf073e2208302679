/* copy.c - backup while the book is in use, and a new book from a backup.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "link.h"
#include "schema.h"

#include <stdio.h>
#include <string.h>

enum { PAGES_AT_ONCE = 256 };

static fl_status copy_pages(fl_store *store, sqlite3 *to, const fl_store_watch *watch, fl_error *err) {
	sqlite3_backup *backup = sqlite3_backup_init(to, "main", store->db, "main");
	if (!backup)
		return fl_fail(err, FL_E_IO, "the copy can't be begun: %s", sqlite3_errmsg(to));
	int code = SQLITE_OK;
	bool stopped = false;
	while (code == SQLITE_OK || code == SQLITE_BUSY || code == SQLITE_LOCKED) {
		uint64_t total = (uint64_t)sqlite3_backup_pagecount(backup);
		uint64_t left = (uint64_t)sqlite3_backup_remaining(backup);
		stopped = watch && !watch->go_on(watch->self, total - left, total);
		if (stopped)
			break;
		code = sqlite3_backup_step(backup, PAGES_AT_ONCE);
		if (code == SQLITE_BUSY || code == SQLITE_LOCKED)
			sqlite3_sleep(20);
	}
	sqlite3_backup_finish(backup);
	if (stopped)
		return fl_fail(err, FL_E_STATE, "stopped on request; no copy was made");
	if ((code & 0xff) == SQLITE_FULL)
		return fl_fail(err, FL_E_DISK_FULL, "the disk is full; no copy was made");
	return code == SQLITE_DONE ? FL_OK : fl_fail(err, FL_E_IO, "the copy failed: %s", sqlite3_errstr(code));
}

/* One file without a log beside it, so that it can be carried about and read from a disk that can't be written. */
static fl_status copy_to(fl_store *store, const char *path, const fl_store_watch *watch, fl_error *err) {
	sqlite3 *to = NULL;
	fl_status status = FL_OK;
	if (sqlite3_open_v2(path, &to, SQLITE_OPEN_READWRITE | SQLITE_OPEN_NOMUTEX, NULL) != SQLITE_OK)
		status = fl_fail_at(err, FL_E_IO, (fl_place){.file = path}, "the copy can't be opened: %s",
		                    to ? sqlite3_errmsg(to) : "out of memory");
	if (status >= 0)
		status = copy_pages(store, to, watch, err);
	if (status >= 0 &&
	    sqlite3_exec(to, "PRAGMA synchronous = FULL; PRAGMA journal_mode = DELETE", NULL, NULL, NULL) != SQLITE_OK)
		status =
		    fl_fail_at(err, FL_E_IO, (fl_place){.file = path}, "the copy can't be finished: %s", sqlite3_errmsg(to));
	sqlite3_close(to);
	return status;
}

/* "path.part": made beside, so that the rename stays on one disk. Mode 0600 like the book. */
static fl_status make_beside(const fl_io *io, const char *path, char *beside, size_t size, fl_error *err) {
	if (snprintf(beside, size, "%s.part", path) >= (int)size)
		return fl_fail(err, FL_E_VALUE, "the path is too long");
	io->unlink(io->self, beside);
	return fl_sql_make_file(io, beside, err);
}

static fl_status refuse_existing(const fl_io *io, const char *path, fl_error *err) {
	int fd = io->open(io->self, path, 0, 0);
	if (fd < 0)
		return FL_OK;
	io->close(io->self, fd);
	return fl_fail_at(err, FL_E_EXISTS, (fl_place){.file = path}, "there is a file here already; choose another name");
}

fl_status fl_store_backup(fl_store *store, const fl_io *io, const char *path, const fl_store_watch *watch,
                          fl_error *err) {
	char beside[544];
	fl_status status = refuse_existing(io, path, err);
	if (status >= 0)
		status = make_beside(io, path, beside, sizeof beside, err);
	if (status < 0)
		return status;
	status = copy_to(store, beside, watch, err);
	if (status >= 0 && io->rename_new(io->self, beside, path) != 0)
		status = fl_fail_at(err, FL_E_IO, (fl_place){.file = path}, "the copy can't be given its name");
	if (status < 0)
		io->unlink(io->self, beside);
	return status;
}

/* ---- restoring -------------------------------------------------------------------------------------------------- */

static fl_status check_prefix(fl_store *store, const fl_founding *founding, fl_error *err) {
	fl_arena arena = {0};
	fl_origin *origins = NULL;
	size_t count = 0;
	fl_status status = fl_store_origins(store, &arena, &origins, &count, err);
	for (size_t i = 0; status >= 0 && i < count; i++)
		if (origins[i].own && strcmp(origins[i].prefix, founding->prefix) == 0)
			status = fl_fail(err, FL_E_VALUE,
			                 "the prefix %s was used by this book already: numbers given out after the backup could be "
			                 "given again; choose another, such as %.11sB",
			                 founding->prefix, founding->prefix);
	fl_arena_free(&arena);
	return status;
}

static fl_status go_on_anew(fl_store *store, const fl_founding *founding, fl_error *err) {
	static const char digits[] = "0123456789abcdef";
	fl_founding_text text = {.name = founding->name, .prefix = founding->prefix, .at = founding->at};
	for (size_t i = 0; i < FL_SALT_SIZE; i++) {
		text.salt[2 * i] = digits[founding->salt[i] >> 4];
		text.salt[2 * i + 1] = digits[founding->salt[i] & 15];
	}
	fl_head head;
	fl_status status = fl_link_head(store, store->own, store->own_digest, &head, err);
	if (status < 0)
		return status;
	memcpy(text.continues, store->own_digest, sizeof text.continues);
	memcpy(text.continues_head, head.digest, sizeof head.digest);
	text.continues_at = head.sequence;
	status = fl_sql_run(store, SQL_BEGIN, err, "");
	if (status >= 0)
		status = fl_link_found(store, &text, true, err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_COMMIT, err, "");
	fl_sql_rollback(store);
	return status < 0 ? status : fl_link_load_own(store, err);
}

/* The copy under its name beside is verified, raised and founded anew, and only then becomes the book. */
static fl_status renew(const char *path, const fl_founding *founding, const fl_store_watch *watch, fl_error *err) {
	fl_store *store = NULL;
	fl_verified verified;
	fl_status status = fl_store_open(path, FL_STORE_WRITE, 1000, &store, err);
	if (status >= 0)
		status = fl_store_verify(store, true, watch, &verified, err);
	if (status >= 0)
		status = check_prefix(store, founding, err);
	if (status >= 0)
		status = go_on_anew(store, founding, err);
	if (status >= 0) /* all of it into the one file that is renamed */
		status = fl_sql_text(store, "PRAGMA wal_checkpoint(TRUNCATE); PRAGMA journal_mode = DELETE", err);
	fl_store_close(store);
	return status;
}

fl_status fl_store_restore(const char *backup, const fl_io *io, const char *path, const fl_founding *founding,
                           const fl_store_watch *watch, fl_store **out, fl_error *err) {
	char beside[544];
	fl_store *from = NULL;
	fl_status status = fl_founding_check(founding->name, founding->prefix, err);
	if (status >= 0)
		status = refuse_existing(io, path, err);
	if (status >= 0)
		status = fl_store_open(backup, FL_STORE_READ, 1000, &from, err);
	if (status >= 0)
		status = make_beside(io, path, beside, sizeof beside, err);
	if (status < 0) {
		fl_store_close(from);
		return status;
	}
	status = copy_to(from, beside, watch, err);
	fl_store_close(from);
	if (status >= 0)
		status = renew(beside, founding, watch, err);
	if (status >= 0 && io->rename_new(io->self, beside, path) != 0)
		status = fl_fail_at(err, FL_E_IO, (fl_place){.file = path}, "the restored book can't be given its name");
	if (status < 0)
		io->unlink(io->self, beside);
	return status < 0 ? status : fl_store_open(path, FL_STORE_WRITE, 5000, out, err);
}
