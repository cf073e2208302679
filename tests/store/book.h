/* book.h - books of invented records for the tests of the store.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_TEST_BOOK_H
#define FOUNDLEFT_TEST_BOOK_H

#include "check.h"
#include "foundleft/store.h"
#include "scratch.h"

#include <math.h>
#include <sqlite3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define must(call) must_at((call), &err, __LINE__)
static inline void must_at(fl_status status, const fl_error *err, int line) {
	if (status < 0)
		print_error("line %d: %s\n", line, err->message);
	assert_true(status >= 0);
}

static inline fl_founding book_founding(const char *name, const char *prefix, int salt) {
	fl_founding founding = {.name = name, .prefix = prefix, .at = INT64_C(1618214400)}; /* 2021-04-12T08:00:00Z */
	memset(founding.salt, salt, sizeof founding.salt);
	return founding;
}

static inline fl_store *book_found(const char *path, const char *name, const char *prefix, int salt) {
	fl_store *store = NULL;
	fl_error err = {0};
	fl_founding founding = book_founding(name, prefix, salt);
	must(fl_store_found(path, &founding, &store, &err));
	return store;
}

static inline fl_store *book_open(const char *path, fl_store_mode mode) {
	fl_store *store = NULL;
	fl_error err = {0};
	must(fl_store_open(path, mode, 2000, &store, &err));
	return store;
}

enum { BOOK_POINTS = 3, BOOK_ITEMS = 3 };
typedef struct book_record {
	fl_record record;
	fl_kept_point found[BOOK_POINTS], left[BOOK_POINTS];
	fl_kept_item items[BOOK_ITEMS];
	char journal[4096];
	size_t length;
} book_record;

/* Invented numbers, different in every digit from record to record. */
static inline void book_points(fl_kept_point *points, double seed) {
	static const char *const oils[BOOK_POINTS] = {"", "LK-10", "LK-50"}, *const lots[BOOK_POINTS] = {"", "2511B",
	                                                                                                 "2511E"};
	for (int i = 0; i < BOOK_POINTS; i++)
		points[i] = (fl_kept_point){.point = i - 1,
		                            .oil = oils[i],
		                            .lot = lots[i],
		                            .x = 0.46485 * i,
		                            .error_span = 0.001217 * seed + 0.0003391 * i,
		                            .U_span = 0.00352,
		                            .k = 2.0,
		                            .tolerance_span = 0.02,
		                            .verdict = i == 2 ? "conditional pass" : "pass"};
}

/* A record of VT-1 of the ship, year by year; `number` must live as long. */
static inline void book_fill(book_record *b, const char *site, const char *tag, const char *number, int year) {
	*b = (book_record){0};
	book_points(b->found, year % 17 + 1.0);
	book_points(b->left, 0.37);
	b->items[0] = (fl_kept_item){"oil", "2511B", "LK-10"};
	b->items[1] = (fl_kept_item){"oil", "2511E", "LK-50"};
	b->items[2] = (fl_kept_item){"thermometer", year % 2 ? "TH-7" : "TH-8", "Tallmere 77/25"};
	b->record =
	    (fl_record){.kept_at = INT64_C(1618214400) + (int64_t)(year - 2021) * 365 * 86400,
	                .number = number,
	                .replaces = "",
	                .replaces_number = "",
	                .reason = "",
	                .site = site,
	                .tag = tag,
	                .serial = "FL-0417",
	                .day = fl_day_from_civil(year, 4, 14),
	                .closed_at = INT64_C(1618214400) + (int64_t)(year - 2021) * 365 * 86400,
	                .due = fl_day_from_civil(year + 1, 4, 14),
	                .interval_months = 12,
	                .running_hours = 5400.0 * (year - 2020),
	                .due_hours = NAN,
	                .position = "booster, \"port\"\tside",
	                .owner = "",
	                .procedure = "shipboard 1",
	                .program = "0.1.0",
	                .performed_by = "Ada Brook",
	                .work = FL_WORK_ADJUSTED,
	                .scale_low = 0.0,
	                .scale_high = 50.0,
	                .set_point = 13.0,
	                .dial_unit = "mm²/s",
	                .adjust_limit_span = 0.015,
	                .as_found = {FL_KEPT_TAKEN, 0.00249, 0.0004, 0.02491, 0.0009, 0.00152, "conditional fail", b->found,
	                             BOOK_POINTS},
	                .as_left = {FL_KEPT_TAKEN, 0.00123, 0.0004, -0.00082, 0.0009, NAN, "pass", b->left, BOOK_POINTS},
	                .items = b->items,
	                .item_count = BOOK_ITEMS};
	b->length = (size_t)snprintf(b->journal, sizeof b->journal, "1\topen\tday=%d\ttag=%s\n", year, tag);
	for (int i = 0; i < 60; i++)
		b->length += (size_t)snprintf(b->journal + b->length, sizeof b->journal - b->length,
		                              "%d\tread\ttyped=%d.%03d\n", i + 2, 4 + i % 16, (i * 7919 + year) % 1000);
}

/* Adds a record of that year and returns its number in `number`. */
static inline void book_add(fl_store *store, const char *site, const char *tag, int year, char number[FL_NUMBER_SIZE],
                            char digest[FL_DIGEST_HEX_SIZE]) {
	book_record b;
	fl_error err = {0};
	must(fl_store_reserve(store, year, INT64_C(1618214400), tag, number, &err));
	book_fill(&b, site, tag, number, year);
	must(fl_store_add(store, &b.record, b.journal, b.length, &err));
	if (digest)
		memcpy(digest, b.record.digest, FL_DIGEST_HEX_SIZE);
}

/* Runs SQL past the book, with its rules taken out before and put back behind, as somebody with the file could. */
static inline void book_force(const char *path, const char *sql) {
	sqlite3 *db = NULL;
	sqlite3_stmt *statement = NULL;
	char *rules[64], *why = NULL;
	int count = 0;
	assert_int_equal(sqlite3_open(path, &db), SQLITE_OK);
	assert_int_equal(
	    sqlite3_prepare_v2(db, "SELECT name, sql FROM sqlite_schema WHERE type = 'trigger'", -1, &statement, NULL),
	    SQLITE_OK);
	char names[64][64];
	while (sqlite3_step(statement) == SQLITE_ROW) {
		snprintf(names[count], 64, "%s", (const char *)sqlite3_column_text(statement, 0));
		rules[count++] = sqlite3_mprintf("%s", sqlite3_column_text(statement, 1));
	}
	sqlite3_finalize(statement);
	for (int i = 0; i < count; i++) {
		char *drop = sqlite3_mprintf("DROP TRIGGER %s", names[i]);
		assert_int_equal(sqlite3_exec(db, drop, NULL, NULL, NULL), SQLITE_OK);
		sqlite3_free(drop);
	}
	if (sqlite3_exec(db, sql, NULL, NULL, &why) != SQLITE_OK)
		print_error("%s: %s\n", sql, why);
	assert_null(why);
	for (int i = 0; i < count; i++) {
		assert_int_equal(sqlite3_exec(db, rules[i], NULL, NULL, NULL), SQLITE_OK);
		sqlite3_free(rules[i]);
	}
	assert_int_equal(sqlite3_exec(db, "PRAGMA wal_checkpoint(TRUNCATE)", NULL, NULL, NULL), SQLITE_OK);
	assert_int_equal(sqlite3_close(db), SQLITE_OK);
}

#endif
