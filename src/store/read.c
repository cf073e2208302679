/* read.c - looking up: records, papers, instruments, what is due, what a lot or thermometer fed.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "link.h"
#include "pack.h"

#include <stdio.h>
#include <string.h>

void fl_record_list_free(fl_record_list *list) {
	fl_arena_free(&list->arena);
	*list = (fl_record_list){0};
}

/* Facts and digest of a row as a record at the end of the list. A paper is passed over. */
static fl_status take_record(sqlite3_stmt *statement, fl_record_list *out, fl_error *err) {
	fl_entry entry;
	fl_status status = fl_facts_read(fl_sql_column(statement, 0), (size_t)sqlite3_column_bytes(statement, 0),
	                                 &out->arena, &entry, err);
	if (status < 0 || entry.head.kind != ENTRY_SESSION)
		return status;
	fl_record *records = fl_arena_grow(&out->arena, out->records, out->count, &out->capacity, sizeof *records);
	if (!records)
		return fl_sql_memory(err);
	out->records = records;
	snprintf(entry.record.digest, sizeof entry.record.digest, "%s", fl_sql_column(statement, 1));
	records[out->count++] = entry.record;
	return FL_OK;
}

static fl_status take_records(fl_store *store, sqlite3_stmt *statement, fl_record_list *out, fl_error *err) {
	fl_status status = FL_OK;
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		status = take_record(statement, out, err);
	}
	sqlite3_reset(statement);
	return status;
}

fl_status fl_store_find(fl_store *store, const char *number, fl_record_list *out, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_SESSION_BY_NUMBER, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "t", number);
	status = take_records(store, statement, out, err);
	if (status >= 0 && out->count == 0)
		return fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.field = number}, "the book has no record of this number");
	return status;
}

fl_status fl_store_get(fl_store *store, const char *digest, fl_record_list *out, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_SESSION_BY_DIGEST, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "t", digest);
	status = take_records(store, statement, out, err);
	if (status >= 0 && out->count == 0)
		return fl_fail(err, FL_E_NOT_FOUND, "the book has no record with the digest %.12s", digest);
	return status;
}

fl_status fl_store_history(fl_store *store, int64_t instrument, bool all, fl_record_list *out, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_HISTORY, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "ii", instrument, (int64_t)all);
	return take_records(store, statement, out, err);
}

fl_status fl_store_fed_by(fl_store *store, const char *kind, const char *name, fl_day from, fl_day to,
                          fl_record_list *out, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_FED_BY, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "ttii", kind, name, (int64_t)from, (int64_t)to);
	return take_records(store, statement, out, err);
}

/* ---- papers and bytes ------------------------------------------------------------------------------------------- */

static fl_status take_paper(sqlite3_stmt *statement, fl_arena *arena, fl_paper **list, size_t *count, size_t *capacity,
                            fl_error *err) {
	fl_entry entry;
	fl_status status =
	    fl_facts_read(fl_sql_column(statement, 0), (size_t)sqlite3_column_bytes(statement, 0), arena, &entry, err);
	if (status < 0)
		return status;
	fl_paper *grown = fl_arena_grow(arena, *list, *count, capacity, sizeof **list);
	if (!grown)
		return fl_sql_memory(err);
	*list = grown;
	snprintf(entry.paper.digest, sizeof entry.paper.digest, "%s", fl_sql_column(statement, 1));
	grown[(*count)++] = entry.paper;
	return FL_OK;
}

fl_status fl_store_papers(fl_store *store, const char *record_digest, fl_arena *arena, fl_paper **out, size_t *count,
                          fl_error *err) {
	sqlite3_stmt *statement = NULL;
	size_t capacity = 0;
	*out = NULL;
	*count = 0;
	fl_status status = fl_sql(store, SQL_PAPERS, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "t", record_digest);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		status = take_paper(statement, arena, out, count, &capacity, err);
	}
	sqlite3_reset(statement);
	return status;
}

static fl_status unpack_row(fl_store *store, int64_t entry_row, const fl_carried *carried, fl_arena *arena,
                            char **bytes, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_BYTES, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "i", entry_row);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	if (status < 0)
		return status;
	if (!row)
		return fl_fail(err, FL_E_NOT_FOUND,
		               "the journal or paper of this entry is not in this book: it stayed in the book that wrote it");
	status = fl_unpack(store->hasher, carried, sqlite3_column_blob(statement, 1),
	                   (size_t)sqlite3_column_bytes(statement, 1), arena, bytes, err);
	sqlite3_reset(statement);
	return status;
}

fl_status fl_store_bytes(fl_store *store, const char *digest, fl_arena *arena, char **bytes, size_t *length,
                         fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_SESSION_BY_DIGEST, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "t", digest);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	if (status < 0)
		return status;
	if (!row)
		return fl_fail(err, FL_E_NOT_FOUND, "the book has no entry with the digest %.12s", digest);
	fl_entry entry;
	fl_arena texts = {0};
	int64_t entry_row = sqlite3_column_int64(statement, 2);
	status =
	    fl_facts_read(fl_sql_column(statement, 0), (size_t)sqlite3_column_bytes(statement, 0), &texts, &entry, err);
	sqlite3_reset(statement);
	if (status >= 0)
		status = unpack_row(store, entry_row, &entry.head.carried, arena, bytes, err);
	if (status >= 0)
		*length = (size_t)entry.head.carried.size;
	fl_arena_free(&texts);
	return status;
}

/* ---- instruments and due dates ---------------------------------------------------------------------------------- */

fl_status fl_store_instruments(fl_store *store, const char *tag, fl_arena *arena, fl_known_instrument **out,
                               size_t *count, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	size_t capacity = 0, n = 0;
	fl_known_instrument *list = NULL;
	fl_status status = fl_sql(store, tag ? SQL_INSTRUMENTS_OF_TAG : SQL_INSTRUMENTS, &statement, err);
	if (status >= 0 && tag)
		fl_sql_bind(statement, "t", tag);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		fl_known_instrument *grown = fl_arena_grow(arena, list, n, &capacity, sizeof *list);
		if (grown) {
			list = grown;
			list[n] = (fl_known_instrument){sqlite3_column_int64(statement, 0),
			                                fl_arena_strdup(arena, fl_sql_column(statement, 1)),
			                                fl_arena_strdup(arena, fl_sql_column(statement, 2)),
			                                fl_arena_strdup(arena, fl_sql_column(statement, 3))};
		}
		if (!grown || !list[n].site || !list[n].tag || !list[n].serial)
			status = fl_sql_memory(err);
		n++;
	}
	if (statement)
		sqlite3_reset(statement);
	*out = list;
	*count = n;
	return status;
}

static bool due_of_row(sqlite3_stmt *statement, fl_arena *arena, fl_due *out) {
	out->instrument = sqlite3_column_int64(statement, 0);
	out->site = fl_arena_strdup(arena, fl_sql_column(statement, 1));
	out->tag = fl_arena_strdup(arena, fl_sql_column(statement, 2));
	out->serial = fl_arena_strdup(arena, fl_sql_column(statement, 3));
	out->number = fl_arena_strdup(arena, fl_sql_column(statement, 4));
	out->day = fl_sql_day(statement, 5);
	out->due = fl_sql_day(statement, 6);
	return out->site && out->tag && out->serial && out->number;
}

fl_status fl_store_due(fl_store *store, fl_arena *arena, fl_due **out, size_t *count, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	size_t capacity = 0, n = 0;
	fl_due *list = NULL;
	fl_status status = fl_sql(store, SQL_DUE, &statement, err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		fl_due *grown = fl_arena_grow(arena, list, n, &capacity, sizeof *list);
		if (!grown || !due_of_row(statement, arena, &(list = grown)[n]))
			status = fl_sql_memory(err);
		n += grown != NULL;
	}
	if (statement)
		sqlite3_reset(statement);
	*out = list;
	*count = n;
	return status;
}

/* ---- every record ----------------------------------------------------------------------------------------------- */

/* One entry of a chain, as SQL_CHAIN lists it, given to the visitor in memory of its own. */
static fl_status visit_row(fl_store *store, sqlite3_stmt *statement, bool with_journal, fl_record_visit *visit,
                           void *self, fl_error *err) {
	fl_arena arena = {0};
	fl_entry entry;
	char *journal = NULL;
	fl_status status =
	    fl_facts_read(fl_sql_column(statement, 3), (size_t)sqlite3_column_bytes(statement, 3), &arena, &entry, err);
	if (status >= 0 && entry.head.kind == ENTRY_SESSION) {
		snprintf(entry.record.digest, sizeof entry.record.digest, "%s", fl_sql_column(statement, 2));
		if (with_journal && sqlite3_column_type(statement, 5) != SQLITE_NULL)
			status = fl_unpack(store->hasher, &entry.head.carried, sqlite3_column_blob(statement, 5),
			                   (size_t)sqlite3_column_bytes(statement, 5), &arena, &journal, err);
		if (status >= 0)
			status = visit(self, &entry.record, journal, journal ? (size_t)entry.head.carried.size : 0, err);
	}
	fl_arena_free(&arena);
	return status;
}

typedef struct progress {
	const fl_store_watch *watch;
	uint64_t done, total;
	fl_store_part *part;
} progress;

/* Is the entry after those done one of this share? */
static bool is_mine(progress *p) {
	p->part->place = p->done + 1;
	return p->done % (uint64_t)p->part->parts == (uint64_t)p->part->index;
}

static fl_status go_on(progress *p, fl_error *err) {
	p->done++;
	if (p->watch && p->done % 256 == 0 && !p->watch->go_on(p->watch->self, p->done, p->total))
		return fl_fail(err, FL_E_STATE, "stopped on request; nothing was changed");
	return FL_OK;
}

static fl_status visit_chain(fl_store *store, int64_t origin_row, bool with_journal, fl_record_visit *visit, void *self,
                             progress *p, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, with_journal ? SQL_CHAIN : SQL_CHAIN_FACTS, &statement, err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "i", origin_row);
	for (bool row = true; status == FL_OK;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		if (is_mine(p))
			status = visit_row(store, statement, with_journal, visit, self, err);
		if (status == FL_OK)
			status = go_on(p, err);
	}
	sqlite3_reset(statement);
	return status;
}

fl_status fl_store_each_of(fl_store *store, fl_store_part *part, bool with_journal, fl_record_visit *visit, void *self,
                           const fl_store_watch *watch, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	int64_t total = 0;
	fl_status status = fl_sql_number(store, SQL_COUNT_ENTRIES, &total, 0, err, "");
	if (status >= 0)
		status = fl_sql(store, SQL_ORIGINS, &statement, err);
	progress p = {watch, 0, (uint64_t)total, part};
	for (bool row = true; status == FL_OK;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		status = visit_chain(store, sqlite3_column_int64(statement, 0), with_journal, visit, self, &p, err);
	}
	if (statement)
		sqlite3_reset(statement);
	return status;
}

fl_status fl_store_each(fl_store *store, bool with_journal, fl_record_visit *visit, void *self,
                        const fl_store_watch *watch, fl_error *err) {
	fl_store_part all = {.index = 0, .parts = 1};
	return fl_store_each_of(store, &all, with_journal, visit, self, watch, err);
}
