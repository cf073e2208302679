/* add.c - records and papers come into the book's own chain.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "lines.h"
#include "link.h"
#include "pack.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static fl_status refuse(fl_error *err, const char *number, const char *what) {
	return fl_fail_at(err, FL_E_STATE, (fl_place){.field = number}, "%s", what);
}

/* ---- what a record must be -------------------------------------------------------------------------------------- */

static fl_status check_record(const fl_record *r, fl_error *err) {
	if (!r->tag || !*r->tag || !r->number || !*r->number)
		return fl_fail(err, FL_E_VALUE, "a record needs a number and the tag of its instrument");
	if (r->day == FL_NO_DAY)
		return fl_fail(err, FL_E_VALUE, "a record needs the day of its calibration");
	if (*r->replaces && (!fl_is_digest(r->replaces) || !*r->replaces_number || !*r->reason))
		return fl_fail(err, FL_E_VALUE, "an amendment names the record that it replaces, its number, and why");
	if (!*r->replaces && (*r->replaces_number || *r->reason))
		return fl_fail(err, FL_E_VALUE, "a reason is given, but no record that is replaced");
	return FL_OK;
}

static fl_status check_number(fl_store *store, const fl_record *r, fl_error *err) {
	int64_t yes = 0;
	fl_status status = fl_sql_number(store, SQL_NUMBER_RESERVED, &yes, 0, err, "it", store->own, r->number);
	if (status < 0)
		return status;
	if (!yes)
		return refuse(err, r->number, "this number was not given out by this book: reserve one first");
	status = fl_sql_number(store, SQL_NUMBER_USED, &yes, 0, err, "it", store->own, r->number);
	if (status >= 0 && yes)
		return refuse(err, r->number, "this number belongs to another record already; numbers are never used twice");
	return status;
}

/* What the record replaces has to be there, in a chain of this book's own, and not replaced yet. */
static fl_status check_replaced(fl_store *store, const fl_record *r, fl_error *err) {
	fl_record_list found = {0};
	int64_t replaced = 0;
	bool own = false;
	if (!*r->replaces)
		return FL_OK;
	fl_status status = fl_store_get(store, r->replaces, &found, err);
	if (status >= 0 && strcmp(found.records[0].number, r->replaces_number) != 0)
		status = refuse(err, r->replaces_number, "the record to be replaced has another number");
	if (status >= 0)
		status = fl_link_is_one_book(store, store->own_digest, found.records[0].origin, &own, err);
	if (status >= 0 && !own)
		status =
		    refuse(err, r->replaces_number, "a record of another ship can't be replaced here: its own book does that");
	if (status >= 0)
		status = fl_sql_number(store, SQL_REPLACED, &replaced, 0, err, "t", r->replaces);
	if (status >= 0 && replaced)
		status = refuse(err, r->replaces_number, "this record is replaced already: amend the one that replaced it");
	fl_record_list_free(&found);
	return status;
}

/* ---- an entry of the own chain ---------------------------------------------------------------------------------- */

static fl_status write_facts(const fl_entry *entry, fl_text *facts, fl_error *err) {
	return entry->head.kind == ENTRY_SESSION ? fl_facts_write_record(&entry->head, &entry->record, facts, err)
	                                         : fl_facts_write_paper(&entry->head, &entry->paper, facts, err);
}

/* An entry that could not be read again must never come into the book. */
static fl_status check_readable(const fl_text *facts, fl_error *err) {
	fl_arena arena = {0};
	fl_entry again;
	fl_status status = fl_facts_read(facts->data, facts->length, &arena, &again, err);
	if (status >= 0)
		status = fl_facts_check_canonical(facts->data, facts->length, &again, err);
	fl_arena_free(&arena);
	return status;
}

static fl_status append_within(fl_store *store, fl_entry *entry, const void *packed, fl_text *facts,
                               char digest[FL_DIGEST_HEX_SIZE], fl_error *err) {
	fl_head head;
	int64_t row = 0;
	fl_status status = fl_link_head(store, store->own, store->own_digest, &head, err);
	if (status < 0)
		return status;
	entry->head.sequence = head.sequence + 1;
	memcpy(entry->head.previous, head.digest, sizeof head.digest);
	memcpy(entry->head.origin, store->own_digest, sizeof store->own_digest);
	status = write_facts(entry, facts, err);
	if (status >= 0)
		status = check_readable(facts, err);
	if (status >= 0)
		status = fl_seal_digest(store->hasher, facts->data, facts->length, digest, err);
	if (status >= 0)
		status = fl_link_append(store, store->own, entry, digest, facts, packed, &row, err);
	return status < 0 ? status : fl_sql_run(store, SQL_COMMIT, err, "");
}

typedef fl_status check_entry(fl_store *store, const fl_entry *entry, fl_error *err);

/* Packs, takes the writer's turn, checks, appends, commits. */
static fl_status append(fl_store *store, fl_entry *entry, const void *bytes, size_t length, check_entry *check,
                        char digest[FL_DIGEST_HEX_SIZE], fl_error *err) {
	void *packed = NULL;
	fl_text facts = {0};
	fl_status status = fl_pack(store->hasher, bytes, length, &entry->head.carried, &packed, err);
	if (status >= 0)
		status = fl_sql_run(store, SQL_BEGIN, err, "");
	if (status >= 0)
		status = check(store, entry, err);
	if (status >= 0)
		status = append_within(store, entry, packed, &facts, digest, err);
	fl_sql_rollback(store);
	fl_text_free(&facts);
	free(packed);
	return status;
}

static fl_status check_session(fl_store *store, const fl_entry *entry, fl_error *err) {
	fl_status status = check_number(store, &entry->record, err);
	return status < 0 ? status : check_replaced(store, &entry->record, err);
}

fl_status fl_store_add(fl_store *store, fl_record *record, const char *journal, size_t length, fl_error *err) {
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = check_record(record, err);
	if (status < 0)
		return status;
	fl_entry entry = {.head = {.kind = ENTRY_SESSION, .kept_at = record->kept_at}, .record = *record};
	status = append(store, &entry, journal, length, check_session, digest, err);
	if (status < 0)
		return status;
	memcpy(record->origin, entry.head.origin, sizeof record->origin);
	memcpy(record->previous, entry.head.previous, sizeof record->previous);
	memcpy(record->digest, digest, sizeof record->digest);
	memcpy(record->journal_digest, entry.head.carried.digest, sizeof record->journal_digest);
	record->sequence = entry.head.sequence;
	record->journal_size = length;
	return FL_OK;
}

/* A paper belongs to a record of this book's own, and bears its number. */
static fl_status check_paper(fl_store *store, const fl_entry *entry, fl_error *err) {
	fl_record_list found = {0};
	bool own = false;
	fl_status status = fl_store_get(store, entry->paper.record, &found, err);
	if (status >= 0 && strcmp(found.records[0].number, entry->paper.number) != 0)
		status = refuse(err, entry->paper.number, "the record of this paper has another number");
	if (status >= 0)
		status = fl_link_is_one_book(store, store->own_digest, found.records[0].origin, &own, err);
	if (status >= 0 && !own)
		status = refuse(err, entry->paper.number, "a paper for a record of another ship belongs in that ship's book");
	fl_record_list_free(&found);
	return status;
}

fl_status fl_store_add_paper(fl_store *store, fl_paper *paper, const void *bytes, size_t length, fl_error *err) {
	char digest[FL_DIGEST_HEX_SIZE];
	if (!paper->record || !fl_is_digest(paper->record))
		return fl_fail(err, FL_E_VALUE, "a paper needs the digest of its record");
	fl_entry entry = {.head = {.kind = ENTRY_PAPER, .kept_at = paper->kept_at}, .paper = *paper};
	fl_status status = append(store, &entry, bytes, length, check_paper, digest, err);
	if (status < 0)
		return status;
	memcpy(paper->origin, entry.head.origin, sizeof paper->origin);
	memcpy(paper->digest, digest, sizeof paper->digest);
	memcpy(paper->paper_digest, entry.head.carried.digest, sizeof paper->paper_digest);
	paper->sequence = entry.head.sequence;
	paper->size = length;
	return FL_OK;
}
