/* test_years.c - trend report, survey page and collection: what they say, and that the same book gives the same bytes.
 * `test_certificate_years FOLDER` leaves trend.pdf and pack.pdf there, for the eye and for readback.sh.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "../trend/history.h"
#include "failing_memory.h"
#include "foundleft/certificate.h"
#include "scratch.h"
#include "sheet.h"

static const char *folder_to_fill;

static const char *const numbers[] = {"TY-2021-0101", "TY-2022-0118", "TY-2023-0127",
                                      "TY-2024-0140", "TY-2025-0152", "TY-2026-0417"};

/* The demo's history (invented, tests/trend/data) with what a record has besides. */
static void demo(history *h) {
	history_demo(h);
	for (size_t i = 0; i < h->count; i++) {
		fl_record *r = &h->records[i];
		snprintf(r->digest, sizeof r->digest, "%064zx", i + 0x9c4d);
		r->number = numbers[i];
		r->site = "Quillhaven (invented)";
		r->owner = "Quillhaven, engine department (invented)";
		r->serial = "FL-0417";
		r->position = "main engine booster unit, sensor 1";
		r->running_hours = 5400.0 * (double)i + 21000.0;
		r->interval_months = 12;
		r->due = fl_trend_due(r->day, 12);
		bool failed = false;
		for (size_t p = 0; p < r->as_found.point_count; p++)
			failed = failed || fabs(r->as_found.points[p].error_span) > r->as_found.points[p].tolerance_span;
		r->as_found.verdict = failed ? "fail" : "pass";
		r->as_left.verdict = "pass";
	}
}

static fl_trend_report report_of(const history *h) {
	return (fl_trend_report){.records = h->records,
	                         .count = h->count,
	                         .made_on = fl_day_from_civil(2026, 4, 20),
	                         .issuer = "Tallmere Yard bench (invented)",
	                         .issuer_address = "Port Hesper; Quay 4",
	                         .program_version = "0.1.0"};
}

static fl_sheet *trend_sheet(const history *h) {
	fl_error err = {0};
	fl_sheet *sheet = NULL;
	fl_trend_report report = report_of(h);
	must(fl_certificate_trend(&report, &sheet, &err));
	return sheet;
}

static fl_sheet *survey_sheet(size_t page, size_t trend_page) {
	const fl_survey_instrument instruments[] = {
	    {"VT-1", "FL-0417", "Quillhaven", "main engine booster unit, sensor 1", "TY-2026-0417", "pass",
	     fl_day_from_civil(2026, 4, 14), fl_day_from_civil(2027, 4, 14), page, trend_page},
	    {"VT-2", "FL-0418", "Quillhaven", "main engine booster unit, sensor 2", "TY-2025-0031", "conditional fail",
	     fl_day_from_civil(2025, 3, 2), fl_day_from_civil(2026, 3, 2), 0, 0},
	    {"VT-3", "FL-0419", "Quillhaven", "", "", "", FL_NO_DAY, FL_NO_DAY, 0, 0}};
	const fl_survey_standard standards[] = {
	    {"oil LK-10", "2511B", "Lanternmoor-2511B", fl_day_from_civil(2026, 11, 17)},
	    {"thermometer", "TH-8", "TB-6001", fl_day_from_civil(2026, 1, 9)}};
	const char *const open[] = {"VT-2 is overdue since 2026-03-02", "thermometer TH-8 is out of date since 2026-01-10"};
	const fl_survey survey = {.ship = "Quillhaven (invented)",
	                          .instruments = instruments,
	                          .instrument_count = 3,
	                          .standards = standards,
	                          .standard_count = 2,
	                          .open = open,
	                          .open_count = 2,
	                          .content = "2b1c9c0f6d3f8e5a7b4c1d2e3f405162738495a6b7c8d9eafb0c1d2e3f405162",
	                          .made_on = fl_day_from_civil(2026, 4, 20),
	                          .issuer = "Tallmere Yard bench (invented)",
	                          .program_version = "0.1.0"};
	fl_error err = {0};
	fl_sheet *sheet = NULL;
	must(fl_certificate_survey(&survey, &sheet, &err));
	return sheet;
}

static void says(const fl_sheet *sheet, const char *const *texts, size_t count) {
	fl_text text = {0};
	fl_sheet_text(sheet, &text);
	for (size_t i = 0; i < count; i++) {
		if (!strstr(text.data, texts[i]))
			print_error("lacks \"%s\" in\n%s\n", texts[i], text.data);
		assert_non_null(strstr(text.data, texts[i]));
	}
	fl_text_free(&text);
}
#define SAYS(sheet, ...)                                  \
	do {                                                  \
		const char *const texts[] = {__VA_ARGS__};        \
		says(sheet, texts, sizeof texts / sizeof *texts); \
	} while (0)

static void keep(const char *name, const unsigned char *bytes, size_t length) {
	char path[600];
	if (!folder_to_fill)
		return;
	snprintf(path, sizeof path, "%s/%s", folder_to_fill, name);
	fl_error err = {0};
	must(fl_file_write(fl_io_system(), path, bytes, length, true, &err));
}

/* Dates and rates of the demo's history: those of tests/trend/test_history.c. */
static void the_trend_says_history_drift_forecast_and_look_back(void **state) {
	(void)state;
	history h;
	demo(&h);
	fl_sheet *sheet = trend_sheet(&h);
	SAYS(sheet, "Trend report", "Look-back: found out of tolerance", "2025-08-28", "Every session", "TY-2023-0127",
	     "Chained drift", "Proposed intervals", "staircase", "by the values", "prediction interval", "Disposition");
	fl_sheet_free(sheet);
}

static void two_sessions_give_no_line_and_say_so(void **state) {
	(void)state;
	history h;
	demo(&h);
	h.count = 2;
	fl_sheet *sheet = trend_sheet(&h);
	SAYS(sheet, "no line is drawn through fewer than three", "1 interval: no line");
	fl_sheet_free(sheet);
}

static void one_session_is_reported_too(void **state) {
	(void)state;
	history h;
	demo(&h);
	h.count = 1;
	fl_sheet *sheet = trend_sheet(&h);
	SAYS(sheet, "TY-2021-0101", "0 intervals: no line");
	fl_sheet_free(sheet);
	fl_trend_report none = report_of(&h);
	none.count = 0;
	assert_int_equal(fl_certificate_trend(&none, &sheet, NULL), FL_E_NOT_FOUND);
}

static void the_survey_names_what_is_not_in_date(void **state) {
	(void)state;
	fl_sheet *sheet = survey_sheet(2, 3);
	SAYS(sheet, "1 of 3 instruments and 1 of 2 standards are in date on 2026-04-20.", "OVERDUE", "never calibrated",
	     "OUT OF DATE", "Thermometer TH-8 is out of date since 2026-01-10.");
	fl_sheet_free(sheet);
}

static void the_same_book_gives_the_same_bytes(void **state) {
	(void)state;
	unsigned char *bytes[2];
	size_t length[2], pages[2];
	fl_error err = {0};
	history h;
	demo(&h);
	for (int i = 0; i < 2; i++) {
		fl_sheet *trend = trend_sheet(&h), *survey = survey_sheet(0, 2);
		fl_certificate_mark_copy(trend, "Copy", "on the original");
		fl_pack_part parts[] = {
		    {survey, "Status", 0, 0}, {NULL, "VT-1 – Ä", 0, 0}, {trend, "Trend", 1, 0}, {trend, "Trend again", 1, 0}};
		must(fl_certificate_pack_pdf(parts, 4, fl_io_system(), &(fl_faces){FACES_FOLDER}, &bytes[i], &length[i], &err));
		pages[i] = parts[2].page;
		assert_int_equal(parts[0].page, 1);
		assert_int_equal(parts[1].page, parts[2].page);
		assert_true(parts[3].page > parts[2].page);
		fl_sheet_free(trend);
		fl_sheet_free(survey);
	}
	assert_int_equal(pages[0], 2);
	assert_int_equal(length[0], length[1]);
	assert_memory_equal(bytes[0], bytes[1], length[0]);
	keep("pack.pdf", bytes[0], length[0]);
	free(bytes[0]);
	free(bytes[1]);
	fl_sheet *trend = trend_sheet(&h);
	must(fl_certificate_pdf(trend, fl_io_system(), &(fl_faces){FACES_FOLDER}, &bytes[0], &length[0], &err));
	keep("trend.pdf", bytes[0], length[0]);
	free(bytes[0]);
	fl_sheet_free(trend);
}

/* Every request for memory is refused once: a status, no leak, nothing left behind. */
static void without_memory_it_says_so(void **state) {
	(void)state;
	history h;
	demo(&h);
	fl_trend_report report = report_of(&h);
	for (long n = 1;; n++) {
		fl_sheet *sheet = NULL;
		failing_memory_start(n);
		fl_status status = fl_certificate_trend(&report, &sheet, NULL);
		if (!failing_memory_stop()) {
			assert_int_equal(status, FL_OK);
			fl_sheet_free(sheet);
			break;
		}
		assert_int_equal(status, FL_E_MEMORY);
		assert_null(sheet);
	}
	fl_sheet *trend = trend_sheet(&h), *survey = survey_sheet(0, 2);
	for (long n = 1;; n++) {
		unsigned char *bytes = NULL;
		size_t length = 0;
		fl_pack_part parts[] = {{survey, "Status", 0, 0}, {NULL, "VT-1", 0, 0}, {trend, "Trend", 1, 0}};
		failing_memory_start(n);
		fl_status status =
		    fl_certificate_pack_pdf(parts, 3, fl_io_system(), &(fl_faces){FACES_FOLDER}, &bytes, &length, NULL);
		if (!failing_memory_stop()) {
			assert_int_equal(status, FL_OK);
			free(bytes);
			break;
		}
		if (status == FL_OK)
			fail_msg("request %ld was refused and nothing was said", n);
		assert_null(bytes);
	}
	fl_sheet_free(trend);
	fl_sheet_free(survey);
}

int main(int argc, char **argv) {
	folder_to_fill = argc > 1 ? argv[1] : NULL;
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(the_trend_says_history_drift_forecast_and_look_back),
	    cmocka_unit_test(two_sessions_give_no_line_and_say_so),
	    cmocka_unit_test(one_session_is_reported_too),
	    cmocka_unit_test(the_survey_names_what_is_not_in_date),
	    cmocka_unit_test(the_same_book_gives_the_same_bytes),
	    cmocka_unit_test(without_memory_it_says_so),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
