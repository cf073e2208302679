/* store.c - the record book: founding, opening, closing; what the book is.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The book
 *   A book is one SQLite file (tables: schema.c). What it holds is a set of chains. A chain begins with a founding, a
 *   few lines of text with the ship's name, the time and a random salt; the SHA-256 of that text names the chain for
 *   ever (its origin). Each entry (a session with its journal, or a paper) is a text of facts (facts.c) that holds the
 *   origin, its place in the chain, the digest of the entry before (of the founding for the first), and the digest of
 *   the bytes that it carries; its own digest is the SHA-256 of that text.
 *
 *   Valid if and only if: each founding has its origin's digest; in each chain the places are 1, 2, 3 ... without a
 *   gap, each entry's text has its digest and names the digest before it; what an entry carries has the digest that
 *   the entry says, and is there in chains of the book's own; a number stands for one record of its chain and was
 *   reserved before; the numbers' own chain fits; every row for looking up says what the facts say, none is missing
 *   and none too many; the rules of the database are all there.
 *
 * Several books, one office
 *   A book writes only into its own chain. A bundle carries a ship's whole chains as facts, and the journals and
 *   papers of the entries since a date: facts are a few kilobytes, so the links are never broken, and an office that
 *   begins late still has the history. Taking a bundle in adds what is new to that ship's chain and the bytes that
 *   were not there yet; entries known already have to be the same. So a book's content is a set that only grows, and
 *   the order in which bundles come does not matter: two ships, or two bundles of one ship, in any order, or twice,
 *   give the same chains. fl_store_content is the digest over all of them.
 *   Two different entries at one place of one chain (a fork) mean that a ship's book was copied and both copies went
 *   on, or that one was forged: the bundle is refused as a whole and both digests are named.
 *   Nobody but the ship can make a founding that has the ship's origin; but anybody can found a chain. So a chain
 *   never seen before is taken in only when the caller says so, who compares the origin with what the ship says.
 *
 * What digests cannot do
 *   Whoever can write the file can cut entries off its end, or write the whole book anew. Numbers reserved and not
 *   used show the first; the second shows only against something kept elsewhere: a bundle at the office, a
 *   certificate, or fl_store_content noted on paper.
 *
 * Restoring
 *   After a backup was made numbers may have been given out that the backup does not know. A restored book therefore
 *   never writes into its old chain again: it founds a new one that names the old one and where it was left, with a
 *   prefix of its own for its numbers. Both chains are the book's own; the history reads across them.
 *
 * Durability
 *   Write-ahead log, synchronous=FULL: a commit that returned is on disk. Writers take turns (BEGIN IMMEDIATE) and
 *   wait as long as the caller says. Don't put a book that is in use on a network drive: the log needs shared memory.
 */
#include "link.h"
#include "schema.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static fl_status configure(fl_store *store, int patience_ms, fl_error *err) {
	sqlite3 *db = store->db;
	sqlite3_extended_result_codes(db, 1);
	sqlite3_busy_timeout(db, patience_ms);
	sqlite3_db_config(db, SQLITE_DBCONFIG_DEFENSIVE, 1, NULL);
	sqlite3_db_config(db, SQLITE_DBCONFIG_TRUSTED_SCHEMA, 0, NULL);
	sqlite3_db_config(db, SQLITE_DBCONFIG_ENABLE_FKEY, 1, NULL);
	return fl_sql_text(store,
	                   "PRAGMA recursive_triggers = ON; PRAGMA cell_size_check = ON; PRAGMA synchronous = FULL; "
	                   "PRAGMA temp_store = MEMORY",
	                   err);
}

static fl_status open_file(const char *path, int flags, int patience_ms, fl_store **out, fl_error *err) {
	fl_store *store = calloc(1, sizeof *store);
	if (!store)
		return fl_sql_memory(err);
	snprintf(store->path, sizeof store->path, "%s", path);
	store->writable = (flags & SQLITE_OPEN_READWRITE) != 0;
	fl_status status = fl_hasher_new(&store->hasher, err);
	if (status >= 0 && sqlite3_open_v2(path, &store->db, flags | SQLITE_OPEN_NOMUTEX, NULL) != SQLITE_OK)
		status = store->db ? fl_sql_fail(store, err) : fl_sql_memory(err);
	if (status >= 0)
		status = configure(store, patience_ms, err);
	if (status < 0) {
		fl_store_close(store);
		return status;
	}
	*out = store;
	return FL_OK;
}

void fl_store_close(fl_store *store) {
	if (!store)
		return;
	for (int i = 0; i < SQL_COUNT; i++)
		sqlite3_finalize(store->statements[i]);
	sqlite3_close(store->db);
	fl_hasher_free(store->hasher);
	free(store);
}

static fl_status pragma(fl_store *store, const char *text, int64_t *out, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	if (sqlite3_prepare_v2(store->db, text, -1, &statement, NULL) != SQLITE_OK)
		return fl_sql_fail(store, err);
	bool row = false;
	fl_status status = fl_sql_step(store, statement, &row, err);
	*out = row ? sqlite3_column_int64(statement, 0) : 0;
	sqlite3_finalize(statement);
	return status;
}

/* ---- founding --------------------------------------------------------------------------------------------------- */

static fl_founding_text as_text(const fl_founding *founding) {
	static const char digits[] = "0123456789abcdef";
	fl_founding_text text = {.name = founding->name, .prefix = founding->prefix, .at = founding->at};
	for (size_t i = 0; i < FL_SALT_SIZE; i++) {
		text.salt[2 * i] = digits[founding->salt[i] >> 4];
		text.salt[2 * i + 1] = digits[founding->salt[i] & 15];
	}
	return text;
}

static fl_status refuse_tables(fl_store *store, fl_error *err) {
	int64_t tables = 0;
	fl_status status = pragma(store, "SELECT count(*) FROM sqlite_schema", &tables, err);
	if (status >= 0 && tables > 0)
		return fl_fail_at(err, FL_E_EXISTS, (fl_place){.file = store->path}, "there is a book here already");
	return status;
}

/* The tables and the founding, in one transaction: a book is there as a whole or not at all. Looked at again within it:
 * another program may have founded one meanwhile. */
static fl_status found_within(fl_store *store, const fl_founding_text *founding, fl_error *err) {
	fl_status status = refuse_tables(store, err);
	if (status >= 0)
		status = fl_schema_raise(store, 0, err);
	if (status >= 0)
		status = fl_link_found(store, founding, true, err);
	return status < 0 ? status : fl_sql_run(store, SQL_COMMIT, err, "");
}

fl_status fl_store_found(const char *path, const fl_founding *founding, fl_store **out, fl_error *err) {
	fl_store *store = NULL;
	fl_founding_text text = as_text(founding);
	fl_status status = fl_founding_check(founding->name, founding->prefix, err);
	if (status < 0)
		return status;
	/* The file is made first, so that nobody else may read it: the database takes its mode for the log too. */
	const fl_io *io = fl_io_system();
	status = fl_sql_make_file(io, path, err);
	if (status < 0 && status != FL_E_EXISTS)
		return status;
	if (err && status == FL_E_EXISTS)
		*err = (fl_error){0};
	status = open_file(path, SQLITE_OPEN_READWRITE, 5000, &store, err);
	if (status < 0)
		return status;
	status = refuse_tables(store, err);
	if (status >= 0)
		status = fl_sql_text(store, "PRAGMA page_size = 8192; PRAGMA journal_mode = WAL", err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_BEGIN, err, "");
	if (status >= 0)
		status = found_within(store, &text, err);
	if (status >= 0)
		status = fl_link_load_own(store, err);
	if (status < 0) {
		fl_sql_rollback(store);
		fl_store_close(store);
		return status;
	}
	*out = store;
	return FL_OK;
}

/* ---- opening ---------------------------------------------------------------------------------------------------- */

static fl_status check_format(fl_store *store, int64_t *format, fl_error *err) {
	int64_t application = 0;
	fl_status status = pragma(store, "PRAGMA application_id", &application, err);
	if (status >= 0)
		status = pragma(store, "PRAGMA user_version", format, err);
	if (status < 0)
		return status;
	const fl_place place = {.file = store->path};
	if (application != BOOK_APPLICATION_ID)
		return fl_fail_at(err, FL_E_VALUE, place, "this file is no record book");
	if (*format > BOOK_FORMAT)
		return fl_fail_at(err, FL_E_STATE, place,
		                  "the book has format %d, this program knows up to %d: update the program", (int)*format,
		                  BOOK_FORMAT);
	return FL_OK;
}

/* Brings an older book up to date; another program may have done it while this one waited. */
static fl_status raise_format(fl_store *store, fl_error *err) {
	int64_t format = 0;
	fl_status status = fl_sql_run(store, SQL_BEGIN, err, "");
	if (status >= 0)
		status = pragma(store, "PRAGMA user_version", &format, err);
	if (status >= 0 && format < BOOK_FORMAT)
		status = fl_schema_raise(store, (int)format, err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_COMMIT, err, "");
	fl_sql_rollback(store);
	return status;
}

static fl_status check_heads(fl_store *store, fl_error *err) {
	fl_arena arena = {0};
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_ORIGINS, &statement, err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		status = fl_link_check_head(store, sqlite3_column_int64(statement, 0), fl_sql_column(statement, 1),
		                            fl_sql_column(statement, 2), err);
	}
	if (statement)
		sqlite3_reset(statement);
	fl_arena_free(&arena);
	return status;
}

static fl_status make_ready(fl_store *store, fl_error *err) {
	int64_t format = 0;
	fl_status status = check_format(store, &format, err);
	if (status >= 0 && format < BOOK_FORMAT)
		status = store->writable ? raise_format(store, err)
		                         : fl_fail_at(err, FL_E_STATE, (fl_place){.file = store->path},
		                                      "the book has an older format: open it for writing once to bring it up "
		                                      "to date");
	if (status >= 0 && store->writable)
		status = fl_sql_text(store, "PRAGMA journal_mode = WAL", err);
	if (status >= 0 && store->writable)
		status = fl_schema_check(store, err);
	if (status >= 0)
		status = check_heads(store, err);
	return status < 0 ? status : fl_link_load_own(store, err);
}

fl_status fl_store_open(const char *path, fl_store_mode mode, int patience_ms, fl_store **out, fl_error *err) {
	fl_store *store = NULL;
	int fd = fl_io_system()->open(NULL, path, 0, 0); /* read only: is it there at all? */
	if (fd < 0)
		return fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.file = path}, "there is no record book here");
	fl_io_system()->close(NULL, fd);
	fl_status status = open_file(path, mode == FL_STORE_WRITE ? SQLITE_OPEN_READWRITE : SQLITE_OPEN_READONLY,
	                             patience_ms, &store, err);
	if (status < 0)
		return status;
	status = make_ready(store, err);
	if (status < 0) {
		fl_store_close(store);
		return status;
	}
	*out = store;
	return FL_OK;
}

/* ---- chains ----------------------------------------------------------------------------------------------------- */

static fl_status origin_of_row(fl_store *store, sqlite3_stmt *statement, fl_arena *arena, fl_origin *out,
                               fl_error *err) {
	fl_founding_text founding;
	fl_status status = fl_founding_read(fl_sql_column(statement, 2), (size_t)sqlite3_column_bytes(statement, 2), arena,
	                                    &founding, err);
	if (status < 0)
		return status;
	snprintf(out->digest, sizeof out->digest, "%s", fl_sql_column(statement, 1));
	out->name = founding.name;
	out->prefix = founding.prefix;
	out->founded_at = founding.at;
	out->own = sqlite3_column_int(statement, 3) != 0;
	fl_head head;
	status = fl_link_head(store, sqlite3_column_int64(statement, 0), out->digest, &head, err);
	out->entries = head.sequence;
	memcpy(out->head, head.digest, sizeof out->head);
	return status;
}

fl_status fl_store_origins(fl_store *store, fl_arena *arena, fl_origin **out, size_t *count, fl_error *err) {
	size_t capacity = 0, n = 0;
	fl_origin *origins = NULL;
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_ORIGINS, &statement, err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		fl_origin *grown = fl_arena_grow(arena, origins, n, &capacity, sizeof *origins);
		if (!grown)
			status = fl_sql_memory(err);
		else
			status = origin_of_row(store, statement, arena, &(origins = grown)[n], err);
		n += status >= 0;
	}
	if (statement)
		sqlite3_reset(statement);
	*out = origins;
	*count = n;
	return status;
}

static int by_digest(const void *a, const void *b) {
	return strcmp(((const fl_origin *)a)->digest, ((const fl_origin *)b)->digest);
}

fl_status fl_store_content(fl_store *store, char hex[FL_DIGEST_HEX_SIZE], fl_error *err) {
	fl_arena arena = {0};
	fl_text text = {0};
	fl_origin *origins = NULL;
	size_t count = 0;
	fl_status status = fl_store_origins(store, &arena, &origins, &count, err);
	if (status >= 0 && count)
		qsort(origins, count, sizeof *origins, by_digest);
	for (size_t i = 0; status >= 0 && i < count; i++)
		fl_text_printf(&text, "%s\t%lld\t%s\n", origins[i].digest, (long long)origins[i].entries, origins[i].head);
	if (status >= 0)
		status = text.failed ? fl_sql_memory(err)
		                     : fl_seal_digest(store->hasher, text.data ? text.data : "", text.length, hex, err);
	fl_text_free(&text);
	fl_arena_free(&arena);
	return status;
}
