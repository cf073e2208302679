/* number.c - numbers given out: each in a transaction of its own, on disk before anybody uses it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * digest of a row = SHA-256 of "digest of the row before \t origin \t text \t time \t purpose", the first without a row
 * before. A number that was given out and never came to a record (the disk was full, the power went) stays as a gap
 * that can be explained: fl_store_unused lists it with its purpose.
 */
#include "number.h"
#include "lines.h"

#include <stdio.h>
#include <string.h>

void fl_number_text(const char *prefix, int64_t year, int64_t value, char out[FL_NUMBER_SIZE]) {
	sqlite3_snprintf(FL_NUMBER_SIZE, out, "%s-%04lld-%04lld", prefix, (long long)year, (long long)value);
}

fl_status fl_number_digest(fl_store *store, const char *previous, const fl_number_row *row,
                           char out[FL_DIGEST_HEX_SIZE], fl_error *err) {
	fl_text text = {0};
	fl_text_add(&text, previous);
	fl_put_text(&text, row->origin);
	fl_put_text(&text, row->text);
	fl_put_utc(&text, row->at);
	fl_put_text(&text, row->purpose);
	fl_status status =
	    text.failed ? fl_sql_memory(err) : fl_seal_digest(store->hasher, text.data, text.length, out, err);
	fl_text_free(&text);
	return status;
}

/* The row and the digest of the number given out last. */
static fl_status last_number(fl_store *store, int64_t *id, char digest[FL_DIGEST_HEX_SIZE], fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_NUMBER_HEAD, &statement, err);
	bool row = false;
	if (status >= 0)
		status = fl_sql_step(store, statement, &row, err);
	if (status < 0)
		return status;
	*id = row ? sqlite3_column_int64(statement, 0) : 0;
	snprintf(digest, FL_DIGEST_HEX_SIZE, "%s", row ? fl_sql_column(statement, 1) : "");
	sqlite3_reset(statement);
	return FL_OK;
}

static fl_status reserve_within(fl_store *store, fl_number_row *row, char number[FL_NUMBER_SIZE], fl_error *err) {
	int64_t id = 0;
	char previous[FL_DIGEST_HEX_SIZE], digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_sql_number(store, SQL_NUMBER_LAST, &row->value, 0, err, "ii", store->own, row->year);
	if (status >= 0)
		status = last_number(store, &id, previous, err);
	if (status < 0)
		return status;
	row->value++;
	fl_number_text(store->own_prefix, row->year, row->value, number);
	row->text = number;
	status = fl_number_digest(store, previous, row, digest, err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_ADD_NUMBER, err, "iiiititt", id + 1, store->own, row->year, row->value, number,
		                    row->at, row->purpose, digest);
	return status < 0 ? status : fl_sql_run(store, SQL_COMMIT, err, "");
}

fl_status fl_store_reserve(fl_store *store, int year, fl_utc at, const char *purpose, char number[FL_NUMBER_SIZE],
                           fl_error *err) {
	char text[FL_NUMBER_SIZE];
	if (year < 1900 || year > 2200)
		return fl_fail(err, FL_E_RANGE, "numbers are given for the years 1900 to 2200, not for %d", year);
	if (!fl_can_put(purpose))
		return fl_fail(err, FL_E_VALUE, "the purpose of a number has control characters or is not UTF-8");
	fl_number_row row = {.origin = store->own_digest, .year = year, .at = at, .purpose = purpose};
	fl_status status = fl_sql_run(store, SQL_BEGIN, err, "");
	if (status >= 0)
		status = reserve_within(store, &row, text, err);
	fl_sql_rollback(store);
	if (status >= 0)
		memcpy(number, text, sizeof text);
	return status;
}

fl_status fl_store_unused(fl_store *store, fl_arena *arena, fl_unused_number **out, size_t *count, fl_error *err) {
	size_t capacity = 0, n = 0;
	fl_unused_number *list = NULL;
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_UNUSED, &statement, err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		fl_unused_number *grown = fl_arena_grow(arena, list, n, &capacity, sizeof *list);
		if (grown) {
			list = grown;
			list[n].number = fl_arena_strdup(arena, fl_sql_column(statement, 0));
			list[n].purpose = fl_arena_strdup(arena, fl_sql_column(statement, 1));
			list[n].at = sqlite3_column_int64(statement, 2);
		}
		if (!grown || !list[n].number || !list[n].purpose)
			status = fl_sql_memory(err);
		n++;
	}
	if (statement)
		sqlite3_reset(statement);
	*out = list;
	*count = n;
	return status;
}
