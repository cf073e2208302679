/* test_keep.c - sessions to records, and records of a book recomputed from their journals.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The sessions are the invented ones of tests/analysis/data, imported here with the sample stock.
 */
#include "check.h"
#include "foundleft/entry.h"
#include "foundleft/keep.h"
#include "scratch.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define must(call) must_at((call), &err, __LINE__)
static void must_at(fl_status status, const fl_error *err, int line) {
	if (status < 0)
		print_error("line %d: %s\n", line, err->message);
	assert_true(status >= 0);
}

static fl_utc some_time(void *context) {
	(void)context;
	return INT64_C(1776153600); /* 2026-04-14T08:00:00Z */
}

static char *source(const char *name, char out[512]) {
	snprintf(out, 512, "%s/%s", SOURCE_DIR, name);
	return out;
}

/* The journal of a session of history.csv, at `path`. */
static void import(const char *path, const char *as_found, const char *as_left) {
	static const char *const files[] = {"oils", "equipment", "instruments"};
	fl_error err = {0};
	fl_stock stock = {0};
	fl_procedure procedure;
	fl_journal journal;
	fl_text say = {0};
	char file[512], name[96];
	size_t length;
	for (int i = 0; i < 3; i++) {
		snprintf(name, sizeof name, "sample-sessions/stock/%s.yaml", files[i]);
		must(fl_stock_load(&stock, fl_io_system(), source(name, file), &err));
	}
	must(fl_procedure_load(fl_io_system(), source("templates/single-cycle.yaml", file), &procedure, &err));
	char *csv = scratch_read(source("tests/analysis/data/history.csv", file), &length);
	assert_non_null(csv);
	fl_import_options options = {.as_found = as_found, .as_left = as_left, .performed_by = "Ida Fenwick"};
	fl_day day;
	must(fl_entry_import_day(csv, "history.csv", &options, &day, &err));
	const fl_instrument *instrument = fl_stock_instrument(&stock, "VT-1");
	must(fl_entry_begin(&journal, fl_io_system(), path, FL_SOURCE_IMPORT, false, day, some_time(NULL), &procedure,
	                    instrument, "0.1.0", &err));
	fl_entry_setup setup = {
	    .journal = &journal, .procedure = &procedure, .instrument = instrument, .stock = &stock, .clock = some_time};
	must(fl_entry_import(&setup, csv, "history.csv", &options, &say, &err));
	fl_journal_close(&journal);
	fl_procedure_free(&procedure);
	fl_stock_free(&stock);
	fl_text_free(&say);
	free(csv);
}

typedef struct kept {
	fl_arena arena;
	char *journal;
	size_t length;
	fl_record record;
} kept;

static kept make(const char *folder, const char *as_found, const char *as_left) {
	char path[SCRATCH_SIZE];
	kept k = {0};
	fl_error err = {0};
	fl_recomputer *recomputer = NULL;
	import(scratch_path(folder, as_found ? as_found : as_left, path), as_found, as_left);
	k.journal = scratch_read(path, &k.length);
	must(fl_recomputer_new(&recomputer, &err));
	must(fl_recomputer_record(recomputer, k.journal, k.length, "test", &k.arena, &k.record, &err));
	fl_recomputer_free(recomputer);
	return k;
}

static void kept_free(kept *k) {
	free(k->journal);
	fl_arena_free(&k->arena);
}

/* ---- one record ------------------------------------------------------------------------------------------------- */

/* LK-50 as-found 1.5962834573 and as-left 0.0274127347 % of span: tests/trend/data. */
static void test_what_a_record_holds(void **state) {
	kept k = make(*state, "H2", "H2L");
	const fl_record *r = &k.record;
	assert_string_equal(r->tag, "VT-1");
	assert_string_equal(r->serial, "FL-0417");
	assert_string_equal(r->procedure, "single-cycle 1.0");
	assert_string_equal(r->performed_by, "Ida Fenwick");
	assert_int_equal(r->day, fl_day_from_civil(2023, 3, 28));
	assert_int_equal(r->due, fl_day_from_civil(2024, 3, 28));
	assert_int_equal(r->interval_months, 12);
	assert_int_equal(r->closed_at, some_time(NULL));
	assert_int_equal(r->work, FL_WORK_ADJUSTED);
	assert_true(isnan(r->running_hours) && isnan(r->due_hours));
	check_near("set point", 13.0, r->set_point, 0.0);
	check_near("adjust limit", 0.015, r->adjust_limit_span, 1e-15);
	assert_string_equal(r->dial_unit, "mm²/s");
	assert_int_equal(r->as_found.state, FL_KEPT_TAKEN);
	assert_int_equal(r->as_left.state, FL_KEPT_TAKEN);
	assert_int_equal(r->as_found.point_count, 6);
	assert_int_equal(r->as_found.points[0].point, FL_POINT_ZERO);
	assert_string_equal(r->as_found.points[5].oil, "LK-50");
	check_near("as-found at LK-50", 1.5962834573e-2, r->as_found.points[5].error_span, 1e-12);
	check_near("as-left at LK-50", 0.0274127347e-2, r->as_left.points[5].error_span, 1e-12);
	check_near("tolerance", 0.02, r->as_found.points[5].tolerance_span, 1e-15);
	assert_string_equal(r->as_found.points[5].verdict, "pass");
	size_t oils = 0, thermometers = 0;
	for (size_t i = 0; i < r->item_count; i++) {
		oils += strcmp(r->items[i].kind, "oil") == 0;
		thermometers += strcmp(r->items[i].kind, "thermometer") == 0 && strcmp(r->items[i].name, "TH-7") == 0;
	}
	assert_int_equal(oils, 5);
	assert_int_equal(thermometers, 1);
	kept_free(&k);
}

static void test_left_alone_and_missing(void **state) {
	kept alone = make(*state, "H1", NULL), first = make(*state, NULL, "H0");
	assert_int_equal(alone.record.as_left.state, FL_KEPT_SAME);
	assert_int_equal(alone.record.work, 0);
	check_near("as-left is as-found", alone.record.as_found.points[5].error_span,
	           alone.record.as_left.points[5].error_span, 0.0);
	assert_int_equal(first.record.as_found.state, FL_KEPT_NONE);
	assert_int_equal(first.record.as_left.state, FL_KEPT_TAKEN);
	kept_free(&alone);
	kept_free(&first);
}

static void test_open_sessions_and_damage_are_refused(void **state) {
	kept k = make(*state, "H1", NULL);
	fl_recomputer *recomputer = NULL;
	fl_arena arena = {0};
	fl_record record;
	fl_error err = {0}, inner = {0};
	must(fl_recomputer_new(&recomputer, &err));
	size_t open = k.length - 1;
	while (k.journal[open - 1] != '\n')
		open--; /* without its last line, which closes it */
	assert_int_equal(fl_recomputer_record(recomputer, k.journal, open, "x", &arena, &record, &inner), FL_E_STATE);
	k.journal[k.length / 2] ^= 1;
	inner = (fl_error){0};
	assert_int_equal(fl_recomputer_record(recomputer, k.journal, k.length, "x", &arena, &record, &inner),
	                 FL_E_TAMPERED);
	fl_recomputer_free(recomputer);
	fl_arena_free(&arena);
	kept_free(&k);
}

/* ---- comparing ----------------------------------------------------------------------------------------------------
 */

/* The least change of any kind of fact is seen and named. */
static void test_every_difference_is_named(void **state) {
	kept a = make(*state, "H2", "H2L");
	char where[FL_KEEP_WHERE_SIZE];
	assert_true(fl_keep_same(&a.record, &a.record, where));
	fl_kept_point *p = &a.record.as_found.points[3];
	double *const numbers[] = {&p->error_span, &p->U_span, &p->x, &p->k, &p->tolerance_span};
	for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++) {
		fl_record b = a.record;
		fl_kept_point points[6];
		memcpy(points, a.record.as_found.points, sizeof points);
		b.as_found.points = points;
		double *changed = (double *)((char *)&points[3] + ((char *)numbers[i] - (char *)p));
		*changed = nextafter(*changed, 1.0);
		assert_false(fl_keep_same(&a.record, &b, where));
		assert_non_null(strstr(where, "as-found, point 4"));
	}
	static const struct {
		const char *word;
	} words[] = {{"tag"}, {"day"}, {"what was done"}, {"as-left, hysteresis"}, {"number of lots"}, {"set point"}};
	for (size_t i = 0; i < sizeof words / sizeof *words; i++) {
		fl_record b = a.record;
		b.tag = i == 0 ? "VT-2" : b.tag;
		b.day += i == 1;
		b.work |= i == 2 ? FL_WORK_CLEANED : 0u;
		b.as_left.hysteresis_span = i == 3 ? NAN : b.as_left.hysteresis_span;
		b.item_count -= i == 4;
		b.set_point = i == 5 ? -b.set_point : b.set_point;
		assert_false(fl_keep_same(&a.record, &b, where));
		assert_non_null(strstr(where, words[i].word));
	}
	kept_free(&a);
}

/* ---- a book --------------------------------------------------------------------------------------------------------
 */

enum { RECORDS = 20 };

/* A book with the same session so many times, those at `wrong` (from 1; 0 for none) with another error than it gives.
 */
static void make_book(const char *path, const kept *k, int wrong, int also_wrong) {
	fl_store *store = NULL;
	fl_error err = {0};
	fl_founding founding = {.name = "Quillhaven", .prefix = "QH", .at = 1};
	must(fl_store_found(path, &founding, &store, &err));
	for (int i = 1; i <= RECORDS; i++) {
		char number[FL_NUMBER_SIZE];
		fl_record r = k->record;
		fl_kept_point points[6];
		memcpy(points, r.as_found.points, sizeof points);
		r.as_found.points = points;
		if (i == wrong || i == also_wrong)
			points[2].error_span = nextafter(points[2].error_span, 1.0);
		must(fl_store_reserve(store, 2023, 1, "VT-1", number, &err));
		r.number = number;
		r.program = "0.1.0";
		must(fl_store_add(store, &r, k->journal, k->length, &err));
	}
	fl_store_close(store);
}

static void test_a_book_is_recomputed(void **state) {
	char path[SCRATCH_SIZE];
	kept k = make(*state, "H2", "H2L");
	make_book(scratch_path(*state, "good", path), &k, 0, 0);
	for (int threads = 1; threads <= 5; threads += 2) {
		fl_recomputed sum;
		fl_error err = {0};
		must(fl_keep_recompute(path, threads, NULL, &sum, &err));
		assert_int_equal(sum.records, RECORDS);
		assert_int_equal(sum.without_journal, 0);
	}
	kept_free(&k);
}

/* The first is named, however many threads there are and whichever of them finds the later one sooner. */
static void test_the_first_misfit_is_named(void **state) {
	char path[SCRATCH_SIZE];
	kept k = make(*state, "H2", "H2L");
	make_book(scratch_path(*state, "bad", path), &k, 7, 12);
	for (int threads = 1; threads <= 6; threads++) {
		fl_recomputed sum;
		fl_error err = {0};
		assert_int_equal(fl_keep_recompute(path, threads, NULL, &sum, &err), FL_E_TAMPERED);
		assert_string_equal(err.field, "QH-2023-0007");
		assert_non_null(strstr(err.message, "entry 7"));
		assert_non_null(strstr(err.message, "as-found, point 3, error"));
	}
	kept_free(&k);
}

static bool never(void *self, uint64_t done, uint64_t total) {
	(void)self;
	(void)done;
	(void)total;
	return false;
}

static void test_stopping(void **state) {
	char path[SCRATCH_SIZE];
	kept k = make(*state, "H1", NULL);
	make_book(scratch_path(*state, "stop", path), &k, 0, 0);
	const fl_store_watch watch = {never, NULL};
	fl_recomputed sum;
	fl_error err = {0};
	/* The watch is asked now and then only: a book this small may be done before. */
	fl_status status = fl_keep_recompute(path, 2, &watch, &sum, &err);
	assert_true(status == FL_OK || status == FL_E_STATE);
	char absent[SCRATCH_SIZE];
	assert_int_equal(fl_keep_recompute(scratch_path(*state, "absent", absent), 2, NULL, &sum, &err), FL_E_NOT_FOUND);
	kept_free(&k);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_setup_teardown(test_what_a_record_holds, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(test_left_alone_and_missing, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(test_open_sessions_and_damage_are_refused, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(test_every_difference_is_named, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(test_a_book_is_recomputed, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(test_the_first_misfit_is_named, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(test_stopping, scratch_make, scratch_remove),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
