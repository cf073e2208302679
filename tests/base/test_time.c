/* Dates and moments. Day numbers: `date -u -d YYYY-MM-DD +%s` divided by 86400 (GNU coreutils).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "check.h"
#include "foundleft/base.h"

static const struct {
	const char *text;
	fl_day day;
} known[] = {
    {"1900-01-01", -25567}, {"1900-02-28", -25509}, {"1900-03-01", -25508}, {"1969-12-31", -1},
    {"1970-01-01", 0},      {"1999-12-31", 10956},  {"2000-02-29", 11016},  {"2000-03-01", 11017},
    {"2024-02-29", 19782},  {"2026-04-14", 20557},  {"2100-02-28", 47540},  {"2100-03-01", 47541},
    {"2200-12-31", 84370},
};

static void known_days_go_both_ways(void **state) {
	(void)state;
	for (size_t i = 0; i < sizeof known / sizeof known[0]; i++) {
		fl_day day;
		char text[FL_DAY_SIZE];
		assert_int_equal(fl_day_parse(known[i].text, &day, NULL), FL_OK);
		assert_int_equal(day, known[i].day);
		assert_string_equal(fl_day_format(day, text), known[i].text);
	}
}

static void every_day_follows_the_one_before(void **state) {
	(void)state;
	int year, month, day, before = 0, leap_days = 0;
	for (fl_day d = fl_day_from_civil(1600, 1, 1); d <= fl_day_from_civil(2400, 12, 31); d++) {
		fl_day_to_civil(d, &year, &month, &day);
		assert_int_equal(fl_day_from_civil(year, month, day), d);
		assert_true(day == before + 1 || (day == 1 && before >= 28));
		leap_days += month == 2 && day == 29;
		before = day;
	}
	assert_int_equal(leap_days, 2 * 97 + 1); /* 97 in each 400 years, and 2400 itself */
}

static void dates_that_do_not_exist(void **state) {
	(void)state;
	static const char *const wrong[] = {"2026-02-29", "1900-02-29", "2100-02-29", "2026-04-31", "2026-13-01",
	                                    "2026-00-10", "2026-01-00", "1899-12-31", "2201-01-01", "0000-01-01"};
	for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
		fl_day day = 77;
		fl_error err = {0};
		assert_true(fl_day_parse(wrong[i], &day, &err) < 0);
		assert_int_equal(day, 77);
		assert_true(err.message[0]);
	}
	fl_error err = {0};
	fl_day day;
	assert_int_equal(fl_day_parse("2026-02-29", &day, &err), FL_E_VALUE);
	assert_string_equal(err.message, "there is no day 29 in 2026-02, which has 28 days");
}

static void other_forms_are_refused(void **state) {
	(void)state;
	static const char *const wrong[] = {"",         "-",          "14.04.2026",  "04/14/2026",  "2026-4-14",
	                                    "26-04-14", "2026/04/14", "2026-04-14x", "+2026-04-14", "2026-04-1４",
	                                    "20260414", "today"};
	for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
		fl_day day = 77;
		fl_error err = {0};
		assert_int_equal(fl_day_parse(wrong[i], &day, &err), FL_E_SYNTAX);
		assert_non_null(strstr(err.message, "2026-04-14")); /* the sentence shows the right form */
	}
	char text[201];
	memset(text, '1', 200);
	text[200] = '\0';
	fl_day day;
	assert_int_equal(fl_day_parse(text, &day, NULL), FL_E_SYNTAX);
	assert_int_equal(fl_day_parse(" 2026-04-14 ", &day, NULL), FL_OK);
}

static void no_day_and_far_days_have_a_dash(void **state) {
	(void)state;
	char text[FL_DAY_SIZE], moment[FL_UTC_SIZE];
	assert_string_equal(fl_day_format(FL_NO_DAY, text), "-");
	assert_string_equal(fl_day_format(INT32_MAX, text), "-");
	assert_string_equal(fl_utc_format(INT64_MAX, moment), "-");
	assert_string_equal(fl_utc_format(INT64_MIN, moment), "-");
}

static void moments_go_both_ways(void **state) {
	(void)state;
	static const struct {
		const char *text;
		fl_utc utc;
	} cases[] = {
	    {"1900-01-01T00:00:00Z", -2208988800}, {"1969-12-31T23:59:59Z", -1},
	    {"1970-01-01T00:00:00Z", 0},           {"2026-04-14T08:00:12Z", 1776153612},
	    {"2024-02-29T23:59:59Z", 1709251199},  {"2200-12-31T23:59:59Z", 7289654399},
	};
	for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
		fl_utc utc;
		char text[FL_UTC_SIZE], date[FL_DAY_SIZE];
		assert_int_equal(fl_utc_parse(cases[i].text, &utc, NULL), FL_OK);
		assert_true(utc == cases[i].utc);
		assert_string_equal(fl_utc_format(utc, text), cases[i].text);
		assert_memory_equal(fl_day_format(fl_day_of(utc), date), cases[i].text, 10);
	}
}

static void wrong_moments_are_refused(void **state) {
	(void)state;
	static const char *const wrong[] = {"",
	                                    "2026-04-14",
	                                    "2026-04-14T08:00:12",
	                                    "2026-04-14 08:00:12Z",
	                                    "2026-04-14T08:00:12z",
	                                    "2026-04-14T08:00:12+02:00",
	                                    "2026-04-14T24:00:00Z",
	                                    "2026-04-14T08:60:00Z",
	                                    "2016-12-31T23:59:60Z",
	                                    "2026-02-30T08:00:00Z",
	                                    "2026-04-14T08:00:12.5Z"};
	for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
		fl_utc utc = 5;
		fl_error err = {0};
		assert_true(fl_utc_parse(wrong[i], &utc, &err) < 0);
		assert_true(utc == 5);
		assert_true(err.message[0]);
	}
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(known_days_go_both_ways),         cmocka_unit_test(every_day_follows_the_one_before),
	    cmocka_unit_test(dates_that_do_not_exist),         cmocka_unit_test(other_forms_are_refused),
	    cmocka_unit_test(no_day_and_far_days_have_a_dash), cmocka_unit_test(moments_go_both_ways),
	    cmocka_unit_test(wrong_moments_are_refused),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
