/* lookup.c - the tables for looking up, filled from the facts of entries.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "lookup.h"

#include <string.h>

/* The row of a name, added where it is not known yet. */
static fl_status item_row(fl_store *store, const fl_kept_item *item, int64_t *row, fl_error *err) {
	fl_status status = fl_sql_number(store, SQL_ITEM, row, 0, err, "tt", item->kind, item->name);
	if (status < 0 || *row)
		return status;
	status = fl_sql_run(store, SQL_ADD_ITEM, err, "tt", item->kind, item->name);
	*row = sqlite3_last_insert_rowid(store->db);
	return status;
}

static fl_status instrument_row(fl_store *store, const fl_record *r, int64_t *row, fl_error *err) {
	fl_status status = fl_sql_number(store, SQL_INSTRUMENT, row, 0, err, "ttt", r->site, r->tag, r->serial);
	if (status < 0 || *row)
		return status;
	status = fl_sql_run(store, SQL_ADD_INSTRUMENT, err, "ttt", r->site, r->tag, r->serial);
	*row = sqlite3_last_insert_rowid(store->db);
	return status;
}

/* Two points of one lot make one row. */
static bool seen_before(const fl_record *r, size_t i) {
	for (size_t j = 0; j < i; j++)
		if (strcmp(r->items[j].kind, r->items[i].kind) == 0 && strcmp(r->items[j].name, r->items[i].name) == 0)
			return true;
	return false;
}

static fl_status add_used(fl_store *store, int64_t entry_row, const fl_record *r, fl_error *err) {
	fl_status status = FL_OK;
	for (size_t i = 0; status >= 0 && i < r->item_count; i++) {
		int64_t item = 0;
		if (seen_before(r, i))
			continue;
		status = item_row(store, &r->items[i], &item, err);
		if (status >= 0)
			status = fl_sql_run(store, SQL_ADD_USED, err, "ii", item, entry_row);
	}
	return status;
}

static fl_status add_session(fl_store *store, int64_t entry_row, int64_t origin_row, const char *digest,
                             const fl_record *r, fl_error *err) {
	int64_t instrument = 0;
	fl_status status = instrument_row(store, r, &instrument, err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_ADD_SESSION, err, "iitiiidte", entry_row, origin_row, r->number, instrument,
		                    (int64_t)r->day, r->closed_at, r->due, digest, r->replaces);
	return status < 0 ? status : add_used(store, entry_row, r, err);
}

fl_status fl_lookup_add(fl_store *store, int64_t entry_row, int64_t origin_row, const char *digest,
                        const fl_entry *entry, fl_error *err) {
	if (entry->head.kind == ENTRY_SESSION)
		return add_session(store, entry_row, origin_row, digest, &entry->record, err);
	return fl_sql_run(store, SQL_ADD_PAPER, err, "it", entry_row, entry->paper.record);
}

static fl_status fill_of_row(fl_store *store, sqlite3_stmt *statement, fl_arena *arena, fl_error *err) {
	fl_entry entry;
	fl_status status =
	    fl_facts_read(fl_sql_column(statement, 1), (size_t)sqlite3_column_bytes(statement, 1), arena, &entry, err);
	if (status < 0 || entry.head.kind != ENTRY_SESSION)
		return status;
	return add_used(store, sqlite3_column_int64(statement, 0), &entry.record, err);
}

fl_status fl_lookup_fill_used(fl_store *store, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	if (sqlite3_prepare_v2(store->db, "SELECT id, facts FROM entry ORDER BY id", -1, &statement, NULL) != SQLITE_OK)
		return fl_sql_fail(store, err);
	fl_status status = FL_OK;
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		fl_arena arena = {0};
		status = fill_of_row(store, statement, &arena, err);
		fl_arena_free(&arena);
	}
	sqlite3_finalize(statement);
	return status;
}
