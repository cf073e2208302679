/* bundle.c - a ship's own chains written to one file.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "bundle.h"
#include "link.h"

#include <stdio.h>
#include <string.h>

enum { WRITE_AT_ONCE = 1024 * 1024 };

fl_status fl_bundle_begin(fl_hasher *hasher, fl_seal_so_far *seal, fl_error *err) {
	seal->parts = 0;
	return fl_seal_digest(hasher, BUNDLE_FIRST, strlen(BUNDLE_FIRST), seal->seal, err);
}

fl_status fl_bundle_take(fl_hasher *hasher, fl_seal_so_far *seal, const char *line, fl_error *err) {
	char both[FL_DIGEST_HEX_SIZE + BUNDLE_LINE];
	int length = snprintf(both, sizeof both, "%s%s", seal->seal, line);
	seal->parts++;
	return fl_seal_digest(hasher, both, (size_t)length, seal->seal, err);
}

typedef struct bundler {
	fl_store *store;
	fl_append file;
	fl_text text; /* waiting to be written */
	fl_seal_so_far seal;
	fl_day since;
	const fl_store_watch *watch;
	uint64_t done, total;
	fl_error *err;
} bundler;

static fl_status write_out(bundler *b) {
	if (b->text.failed)
		return fl_sql_memory(b->err);
	fl_status status = b->text.length ? fl_append_bytes(&b->file, b->text.data, b->text.length, b->err) : FL_OK;
	fl_text_clear(&b->text);
	return status;
}

static fl_status put_part(bundler *b, const char *kind, const void *bytes, size_t length) {
	char digest[FL_DIGEST_HEX_SIZE], line[BUNDLE_LINE];
	fl_status status = fl_seal_digest(b->store->hasher, bytes, length, digest, b->err);
	if (status < 0)
		return status;
	snprintf(line, sizeof line, "part\t%s\t%zu\t%s", kind, length, digest);
	status = fl_bundle_take(b->store->hasher, &b->seal, line, b->err);
	fl_text_add(&b->text, line);
	fl_text_add(&b->text, "\n");
	fl_text_append(&b->text, bytes, length);
	fl_text_add(&b->text, "\n");
	return status >= 0 && (b->text.length > WRITE_AT_ONCE || b->text.failed) ? write_out(b) : status;
}

/* Was the entry kept on the day or later? The line says "kept \t 2026-04-14T...". */
static bool is_since(const char *facts, fl_day since) {
	char text[FL_DAY_SIZE], day[FL_DAY_SIZE] = "";
	const char *kept = strstr(facts, "\nkept\t");
	if (since == FL_NO_DAY || !kept)
		return true;
	snprintf(day, 11, "%s", kept + 6);
	return strcmp(day, fl_day_format(since, text)) >= 0;
}

static fl_status put_entry(bundler *b, sqlite3_stmt *row) {
	const char *facts = fl_sql_column(row, 3);
	fl_status status = put_part(b, "entry", facts, (size_t)sqlite3_column_bytes(row, 3));
	if (status >= 0 && sqlite3_column_type(row, 5) != SQLITE_NULL && is_since(facts, b->since))
		status = put_part(b, "bytes", sqlite3_column_blob(row, 5), (size_t)sqlite3_column_bytes(row, 5));
	b->done++;
	if (status >= 0 && b->watch && b->done % 64 == 0 && !b->watch->go_on(b->watch->self, b->done, b->total))
		return fl_fail(b->err, FL_E_STATE, "stopped on request; no bundle was made");
	return status;
}

static fl_status put_chain(bundler *b, int64_t origin_row) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(b->store, SQL_CHAIN, &statement, b->err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "i", origin_row);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(b->store, statement, &row, b->err);
		if (status < 0 || !row)
			break;
		status = put_entry(b, statement);
	}
	sqlite3_reset(statement);
	return status;
}

/* The chains of the book's own, oldest first: a later one may amend what stands in an earlier one. */
static fl_status put_chains(bundler *b) {
	sqlite3_stmt *origins = NULL;
	int64_t total = 0;
	fl_status status = fl_sql_number(b->store, SQL_COUNT_ENTRIES, &total, 0, b->err, "");
	b->total = (uint64_t)total;
	static const char *const text = "SELECT id, founding FROM origin WHERE own = 1 ORDER BY id";
	if (status >= 0 && sqlite3_prepare_v2(b->store->db, text, -1, &origins, NULL) != SQLITE_OK)
		status = fl_sql_fail(b->store, b->err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(b->store, origins, &row, b->err);
		if (status < 0 || !row)
			break;
		status = put_part(b, "origin", fl_sql_column(origins, 1), (size_t)sqlite3_column_bytes(origins, 1));
		if (status >= 0)
			status = put_chain(b, sqlite3_column_int64(origins, 0));
	}
	sqlite3_finalize(origins);
	return status;
}

static fl_status write_bundle(bundler *b) {
	fl_status status = fl_bundle_begin(b->store->hasher, &b->seal, b->err);
	fl_text_add(&b->text, BUNDLE_FIRST "\n");
	if (status >= 0)
		status = fl_sql_run(b->store, SQL_BEGIN_READ, b->err, "");
	if (status >= 0)
		status = put_chains(b);
	fl_sql_rollback(b->store);
	fl_text_printf(&b->text, "end\t%lld\t%s\n", (long long)b->seal.parts, b->seal.seal);
	return status < 0 ? status : write_out(b);
}

fl_status fl_store_bundle(fl_store *store, const fl_io *io, const char *path, fl_day since, const fl_store_watch *watch,
                          fl_error *err) {
	char beside[544];
	bundler b = {.store = store, .since = since, .watch = watch, .err = err};
	if (snprintf(beside, sizeof beside, "%s.part", path) >= (int)sizeof b.file.path)
		return fl_fail(err, FL_E_VALUE, "the path is too long");
	io->unlink(io->self, beside);
	fl_status status = fl_append_open(&b.file, io, beside, true, 0, err);
	if (status < 0)
		return status;
	status = write_bundle(&b);
	fl_append_close(&b.file);
	fl_text_free(&b.text);
	if (status >= 0 && io->rename_new(io->self, beside, path) != 0)
		status = fl_fail_at(err, FL_E_EXISTS, (fl_place){.file = path},
		                    "the bundle can't be given this name: there may be a file of that name already");
	if (status < 0)
		io->unlink(io->self, beside);
	return status;
}
