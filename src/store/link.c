/* link.c - one link of a chain: appended, and checked at the end of its chain.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "link.h"
#include "lookup.h"

#include <inttypes.h>
#include <stdio.h>
#include <string.h>

static void copy_digest(char out[FL_DIGEST_HEX_SIZE], const char *digest) {
	snprintf(out, FL_DIGEST_HEX_SIZE, "%s", digest);
}

fl_status fl_link_head(fl_store *store, int64_t origin_row, const char *origin_digest, fl_head *out, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_HEAD, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "i", origin_row);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	if (status < 0)
		return status;
	out->sequence = row ? sqlite3_column_int64(statement, 0) : 0;
	copy_digest(out->digest, row ? fl_sql_column(statement, 1) : origin_digest);
	sqlite3_reset(statement);
	return FL_OK;
}

static fl_status add_entry(fl_store *store, int64_t origin_row, int64_t sequence, const char *digest,
                           const fl_text *facts, fl_error *err) {
	return fl_sql_run(store, SQL_ADD_ENTRY, err, "iitt", origin_row, sequence, digest, facts->data);
}

fl_status fl_link_append(fl_store *store, int64_t origin_row, const fl_entry *entry, const char *digest,
                         const fl_text *facts, const void *packed, int64_t *entry_row, fl_error *err) {
	fl_status status = add_entry(store, origin_row, entry->head.sequence, digest, facts, err);
	if (status < 0)
		return status;
	int64_t row = *entry_row = sqlite3_last_insert_rowid(store->db);
	if (packed)
		status = fl_sql_run(store, SQL_ADD_BYTES, err, "iib", row, (int64_t)entry->head.carried.size, packed,
		                    (size_t)entry->head.carried.packed_size);
	return status < 0 ? status : fl_lookup_add(store, row, origin_row, digest, entry, err);
}

fl_status fl_link_found(fl_store *store, const fl_founding_text *founding, bool own, fl_error *err) {
	fl_text text = {0};
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_founding_write(founding, &text, err);
	if (status >= 0)
		status = fl_seal_digest(store->hasher, text.data, text.length, digest, err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_ADD_ORIGIN, err, "tti", digest, text.data, (int64_t)own);
	fl_text_free(&text);
	return status;
}

char *fl_link_name(fl_store *store, const char *origin_digest, int64_t sequence, char out[160]) {
	sqlite3_stmt *statement = NULL;
	bool row = false;
	fl_arena arena = {0};
	fl_founding_text founding = {.name = ""};
	if (fl_sql(store, SQL_ORIGIN, &statement, NULL) >= 0) {
		fl_sql_bind(statement, "t", origin_digest);
		if (fl_sql_step(store, statement, &row, NULL) >= 0 && row &&
		    fl_founding_read(fl_sql_column(statement, 2), (size_t)sqlite3_column_bytes(statement, 2), &arena, &founding,
		                     NULL) < 0)
			founding.name = "";
		sqlite3_reset(statement);
	}
	if (*founding.name)
		snprintf(out, 160, "entry %" PRId64 " of %s", sequence, founding.name);
	else
		snprintf(out, 160, "entry %" PRId64 " of the chain %.12s", sequence, origin_digest);
	fl_arena_free(&arena);
	return out;
}

static fl_status misfit(fl_store *store, const char *origin, int64_t sequence, const char *what, fl_error *err) {
	char name[160];
	return fl_fail_at(err, FL_E_TAMPERED, (fl_place){.file = store->path}, "%s: %s",
	                  fl_link_name(store, origin, sequence, name), what);
}

static fl_status check_bytes(fl_store *store, int64_t entry_row, const fl_carried *carried, const char *origin,
                             int64_t sequence, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_BYTES, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "i", entry_row);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	if (status < 0 || !row)
		return status;
	char digest[FL_DIGEST_HEX_SIZE];
	status = fl_seal_digest(store->hasher, sqlite3_column_blob(statement, 1),
	                        (size_t)sqlite3_column_bytes(statement, 1), digest, err);
	sqlite3_reset(statement);
	if (status >= 0 && strcmp(digest, carried->packed_digest) != 0)
		return misfit(store, origin, sequence, "its journal or paper is not the one that was kept", err);
	return status;
}

static fl_status check_last_entry(fl_store *store, sqlite3_stmt *statement, const char *origin, fl_error *err) {
	const char *facts = fl_sql_column(statement, 2);
	size_t length = (size_t)sqlite3_column_bytes(statement, 2);
	int64_t sequence = sqlite3_column_int64(statement, 0), entry_row = sqlite3_column_int64(statement, 3);
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_seal_digest(store->hasher, facts, length, digest, err);
	if (status < 0)
		return status;
	if (strcmp(digest, fl_sql_column(statement, 1)) != 0)
		return misfit(store, origin, sequence, "its facts are not those that were kept", err);
	fl_arena arena = {0};
	fl_entry entry;
	status = fl_facts_read(facts, length, &arena, &entry, err);
	if (status >= 0 && (strcmp(entry.head.origin, origin) != 0 || entry.head.sequence != sequence))
		status = misfit(store, origin, sequence, "it stands in another place than where it was kept", err);
	if (status >= 0)
		status = check_bytes(store, entry_row, &entry.head.carried, origin, sequence, err);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_link_check_head(fl_store *store, int64_t origin_row, const char *origin_digest, const char *founding,
                             fl_error *err) {
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_seal_digest(store->hasher, founding, strlen(founding), digest, err);
	if (status < 0)
		return status;
	if (strcmp(digest, origin_digest) != 0)
		return misfit(store, origin_digest, 0, "the founding of the chain was changed", err);
	sqlite3_stmt *statement = NULL;
	status = fl_sql(store, SQL_HEAD, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "i", origin_row);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	if (status < 0 || !row)
		return status;
	status = check_last_entry(store, statement, origin_digest, err);
	sqlite3_reset(statement);
	return status;
}

fl_status fl_link_load_own(fl_store *store, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_OWN, &statement, err);
	bool row = false;
	if (status >= 0)
		status = fl_sql_step(store, statement, &row, err);
	if (status < 0)
		return status;
	if (!row)
		return fl_fail_at(err, FL_E_TAMPERED, (fl_place){.file = store->path},
		                  "the book has no chain of its own: it was changed, or its founding was cut short");
	fl_arena arena = {0};
	fl_founding_text founding;
	store->own = sqlite3_column_int64(statement, 0);
	copy_digest(store->own_digest, fl_sql_column(statement, 1));
	status = fl_founding_read(fl_sql_column(statement, 2), (size_t)sqlite3_column_bytes(statement, 2), &arena,
	                          &founding, err);
	if (status >= 0) {
		snprintf(store->own_name, sizeof store->own_name, "%s", founding.name);
		snprintf(store->own_prefix, sizeof store->own_prefix, "%s", founding.prefix);
	}
	sqlite3_reset(statement);
	fl_arena_free(&arena);
	return status;
}

/* The chain that `origin` goes on from, "" if none. */
static fl_status continues(fl_store *store, const char *origin, char out[FL_DIGEST_HEX_SIZE], fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_ORIGIN, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "t", origin);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	fl_arena arena = {0};
	fl_founding_text founding = {0};
	if (status >= 0 && row)
		status = fl_founding_read(fl_sql_column(statement, 2), (size_t)sqlite3_column_bytes(statement, 2), &arena,
		                          &founding, err);
	copy_digest(out, founding.continues);
	sqlite3_reset(statement);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_link_is_one_book(fl_store *store, const char *origin, const char *target, bool *yes, fl_error *err) {
	char at[FL_DIGEST_HEX_SIZE];
	copy_digest(at, origin);
	/* A founding names an earlier one by its digest, so this ends; the bound is for a forged one. */
	for (int step = 0; step < 1000 && *at; step++) {
		if (strcmp(at, target) == 0) {
			*yes = true;
			return FL_OK;
		}
		char next[FL_DIGEST_HEX_SIZE];
		fl_status status = continues(store, at, next, err);
		if (status < 0)
			return status;
		copy_digest(at, next);
	}
	*yes = false;
	return FL_OK;
}
