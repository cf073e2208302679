/* test_book.c - records in, records out: numbers, history, amendments, due dates, reverse trace, papers.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Invented records; what is tested is that the book gives back what it was given.
 */
#include "book.h"

static void check_same_run(const fl_kept_run *want, const fl_kept_run *got) {
	assert_int_equal(got->state, want->state);
	assert_string_equal(got->verdict, want->verdict);
	check_near("zero", want->zero_span, got->zero_span, 0.0);
	check_near("u zero", want->zero_u_span, got->zero_u_span, 0.0);
	check_near("span", want->span_span, got->span_span, 0.0);
	assert_int_equal(got->point_count, want->point_count);
	for (size_t i = 0; i < want->point_count; i++) {
		assert_int_equal(got->points[i].point, want->points[i].point);
		assert_string_equal(got->points[i].lot, want->points[i].lot);
		assert_string_equal(got->points[i].verdict, want->points[i].verdict);
		check_near("x", want->points[i].x, got->points[i].x, 0.0);
		check_near("error", want->points[i].error_span, got->points[i].error_span, 0.0);
	}
}

/* Every field and every bit of every number comes back, and the journal byte for byte. */
static void test_gives_back(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	book_record b;
	fl_record_list list = {0};
	fl_arena arena = {0};
	char *journal = NULL;
	size_t length = 0;
	must(fl_store_reserve(store, 2026, 1, "VT-1", number, &err));
	assert_string_equal(number, "QH-2026-0001");
	book_fill(&b, "Quillhaven", "VT-1", number, 2026);
	must(fl_store_add(store, &b.record, b.journal, b.length, &err));
	fl_store_close(store);
	store = book_open(path, FL_STORE_READ);
	must(fl_store_find(store, number, &list, &err));
	assert_int_equal(list.count, 1);
	const fl_record *r = &list.records[0];
	assert_string_equal(r->digest, b.record.digest);
	assert_string_equal(r->position, "booster, \"port\"\tside");
	assert_string_equal(r->dial_unit, "mm²/s");
	assert_int_equal(r->day, b.record.day);
	assert_int_equal(r->due, b.record.due);
	assert_int_equal(r->closed_at, b.record.closed_at);
	assert_int_equal(r->work, FL_WORK_ADJUSTED);
	assert_true(isnan(r->due_hours) && isnan(r->as_left.hysteresis_span));
	check_near("hours", 32400.0, r->running_hours, 0.0);
	check_same_run(&b.record.as_found, &r->as_found);
	check_same_run(&b.record.as_left, &r->as_left);
	assert_int_equal(r->item_count, BOOK_ITEMS);
	assert_string_equal(r->items[2].name, "TH-8");
	must(fl_store_bytes(store, r->digest, &arena, &journal, &length, &err));
	assert_int_equal(length, b.length);
	assert_memory_equal(journal, b.journal, length);
	fl_arena_free(&arena);
	fl_record_list_free(&list);
	fl_store_close(store);
}

static void test_numbers(void **state) {
	char path[SCRATCH_SIZE], first[FL_NUMBER_SIZE], second[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	book_record b;
	book_add(store, "Quillhaven", "VT-1", 2026, first, NULL);
	/* used already */
	book_fill(&b, "Quillhaven", "VT-2", first, 2026);
	assert_int_equal(fl_store_add(store, &b.record, b.journal, b.length, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "never used twice"));
	/* never given out */
	err = (fl_error){0};
	book_fill(&b, "Quillhaven", "VT-2", "QH-2026-0099", 2026);
	assert_int_equal(fl_store_add(store, &b.record, b.journal, b.length, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "reserve"));
	/* given out, not used: listed, and never given again, also not after closing */
	err = (fl_error){0};
	must(fl_store_reserve(store, 2026, 7, "VT-2, disk full", second, &err));
	assert_string_equal(second, "QH-2026-0002");
	fl_store_close(store);
	store = book_open(path, FL_STORE_WRITE);
	must(fl_store_reserve(store, 2026, 8, "VT-2", second, &err));
	assert_string_equal(second, "QH-2026-0003");
	must(fl_store_reserve(store, 2027, 9, "VT-2", second, &err));
	assert_string_equal(second, "QH-2027-0001");
	fl_arena arena = {0};
	fl_unused_number *unused = NULL;
	size_t count = 0;
	must(fl_store_unused(store, &arena, &unused, &count, &err));
	assert_int_equal(count, 3);
	assert_string_equal(unused[0].number, "QH-2026-0002");
	assert_string_equal(unused[0].purpose, "VT-2, disk full");
	fl_arena_free(&arena);
	fl_store_close(store);
}

static void test_amendment(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE], digest[FL_DIGEST_HEX_SIZE], next[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	book_record b;
	fl_record_list list = {0};
	fl_verified verified;
	book_add(store, "Quillhaven", "VT-1", 2025, number, digest);
	must(fl_store_reserve(store, 2025, 1, "VT-1", next, &err));
	book_fill(&b, "Quillhaven", "VT-1", next, 2025);
	b.record.replaces = digest;
	b.record.replaces_number = number;
	b.record.reason = "lot of LK-10 was noted wrongly";
	must(fl_store_add(store, &b.record, b.journal, b.length, &err));
	must(fl_store_history(store, 1, false, &list, &err));
	assert_int_equal(list.count, 1);
	assert_string_equal(list.records[0].number, next);
	assert_string_equal(list.records[0].replaces_number, number);
	assert_string_equal(list.records[0].reason, "lot of LK-10 was noted wrongly");
	fl_record_list_free(&list);
	must(fl_store_history(store, 1, true, &list, &err));
	assert_int_equal(list.count, 2);
	fl_record_list_free(&list);
	/* only the last one may be amended, and with its own number */
	must(fl_store_reserve(store, 2025, 1, "VT-1", next, &err));
	b.record.number = next;
	assert_int_equal(fl_store_add(store, &b.record, b.journal, b.length, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "replaced already"));
	err = (fl_error){0};
	b.record.reason = "";
	assert_int_equal(fl_store_add(store, &b.record, b.journal, b.length, &err), FL_E_VALUE);
	err = (fl_error){0};
	must(fl_store_verify(store, true, NULL, &verified, &err));
	assert_int_equal(verified.records, 2);
	fl_store_close(store);
}

static void test_history_due_and_trace(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	fl_record_list list = {0};
	fl_arena arena = {0};
	fl_due *due = NULL;
	size_t count = 0;
	for (int year = 2024; year >= 2021; year--) /* later entered first: the history goes by the day */
		book_add(store, "Quillhaven", "VT-1", year, number, NULL);
	book_add(store, "Quillhaven", "VT-2", 2022, number, NULL);
	fl_known_instrument *known = NULL;
	must(fl_store_instruments(store, "VT-1", &arena, &known, &count, &err));
	assert_int_equal(count, 1);
	must(fl_store_history(store, known[0].id, false, &list, &err));
	assert_int_equal(list.count, 4);
	for (size_t i = 0; i < 4; i++)
		assert_int_equal(list.records[i].day, fl_day_from_civil(2021 + (int)i, 4, 14));
	fl_record_list_free(&list);
	must(fl_store_due(store, &arena, &due, &count, &err));
	assert_int_equal(count, 2);
	assert_string_equal(due[0].tag, "VT-2");
	assert_int_equal(due[0].due, fl_day_from_civil(2023, 4, 14));
	assert_string_equal(due[1].tag, "VT-1");
	assert_int_equal(due[1].due, fl_day_from_civil(2025, 4, 14));
	/* the thermometer of the odd years, from 2022 on */
	must(fl_store_fed_by(store, "thermometer", "TH-7", fl_day_from_civil(2022, 1, 1), fl_day_from_civil(2030, 1, 1),
	                     &list, &err));
	assert_int_equal(list.count, 1);
	assert_int_equal(list.records[0].day, fl_day_from_civil(2023, 4, 14));
	fl_record_list_free(&list);
	must(fl_store_fed_by(store, NULL, "2511E", 0, INT32_MAX, &list, &err));
	assert_int_equal(list.count, 5);
	fl_record_list_free(&list);
	must(fl_store_fed_by(store, "oil", "TH-7", 0, INT32_MAX, &list, &err));
	assert_int_equal(list.count, 0);
	fl_arena_free(&arena);
	fl_store_close(store);
}

static void test_papers(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE], digest[FL_DIGEST_HEX_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	fl_arena arena = {0};
	fl_paper *papers = NULL;
	size_t count = 0, length = 0;
	char *bytes = NULL;
	static const char pdf[] = "%PDF-1.4 invented\0with a zero byte";
	book_add(store, "Quillhaven", "VT-1", 2026, number, digest);
	fl_paper paper = {.record = digest, .number = number, .stage = "issued", .file = "a.pdf", .kept_at = 5};
	must(fl_store_add_paper(store, &paper, pdf, sizeof pdf, &err));
	paper.stage = "countersigned";
	must(fl_store_add_paper(store, &paper, pdf, sizeof pdf - 3, &err));
	paper.number = "QH-2026-0099";
	assert_int_equal(fl_store_add_paper(store, &paper, pdf, sizeof pdf, &err), FL_E_STATE);
	err = (fl_error){0};
	must(fl_store_papers(store, digest, &arena, &papers, &count, &err));
	assert_int_equal(count, 2);
	assert_string_equal(papers[1].stage, "countersigned");
	must(fl_store_bytes(store, papers[0].digest, &arena, &bytes, &length, &err));
	assert_int_equal(length, sizeof pdf);
	assert_memory_equal(bytes, pdf, sizeof pdf);
	fl_arena_free(&arena);
	fl_store_close(store);
}

static void test_refuses(void **state) {
	char path[SCRATCH_SIZE], other[SCRATCH_SIZE], number[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1), *second = NULL;
	fl_error err = {0};
	book_record b;
	fl_founding founding = book_founding("Quillhaven", "QH", 1);
	assert_int_equal(fl_store_found(path, &founding, &second, &err), FL_E_EXISTS);
	founding.prefix = "q-h";
	err = (fl_error){0};
	assert_int_equal(fl_store_found(scratch_path(*state, "b2", other), &founding, &second, &err), FL_E_VALUE);
	err = (fl_error){0};
	assert_int_equal(fl_store_open(scratch_path(*state, "none", other), FL_STORE_WRITE, 0, &second, &err),
	                 FL_E_NOT_FOUND);
	must_at(fl_file_write(fl_io_system(), other, "not a book at all, but long enough to look at", 45, false, NULL),
	        &err, __LINE__);
	err = (fl_error){0};
	assert_true(fl_store_open(other, FL_STORE_WRITE, 0, &second, &err) < 0);
	err = (fl_error){0};
	must(fl_store_reserve(store, 2026, 1, "VT-1", number, &err));
	book_fill(&b, "Quillhaven", "VT-1", number, 2026);
	b.record.performed_by = "Ada\x01";
	assert_int_equal(fl_store_add(store, &b.record, b.journal, b.length, &err), FL_E_VALUE);
	err = (fl_error){0};
	b.record.performed_by = "Ada";
	b.record.set_point = INFINITY; /* can't be read again */
	assert_true(fl_store_add(store, &b.record, b.journal, b.length, &err) < 0);
	err = (fl_error){0};
	b.record.set_point = 13.0;
	assert_int_equal(fl_store_add(store, &b.record, b.journal, 0, &err), FL_E_RANGE);
	err = (fl_error){0};
	must(fl_store_add(store, &b.record, b.journal, b.length, &err)); /* nothing of all that was left behind */
	fl_store_close(store);
}

int main(void) {
#define TEST(f) cmocka_unit_test_setup_teardown(f, scratch_make, scratch_remove)
	const struct CMUnitTest tests[] = {TEST(test_gives_back), TEST(test_numbers),
	                                   TEST(test_amendment),  TEST(test_history_due_and_trace),
	                                   TEST(test_papers),     TEST(test_refuses)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
