/* test_wording.c - rounding and small texts of the certificate.
 * Two significant digits for U: JCGM 100:2008, 7.2.6, and ILAC-P14 (read of it: common practice, no page checked);
 * half to even, and up where more than 5 % would be lost. The cases are worked by hand.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "wording.h"

#include <math.h>
#include <string.h>

static fl_sheet *sheet;

static int make(void **state) {
	(void)state;
	sheet = fl_sheet_new();
	return sheet ? 0 : -1;
}

static int drop(void **state) {
	(void)state;
	fl_sheet_free(sheet);
	return 0;
}

static void test_u_has_two_significant_digits(void **state) {
	(void)state;
	const struct {
		double u;
		const char *shown;
	} cases[] = {{0.3522, "0.35"},    {0.0391, "0.039"},       {0.0686, "0.069"}, {0.1582, "0.16"},
	             {0.0996, "0.10"},    {0.996, "1.0"},          {1.25, "1.2"},     {1.75, "1.8"},
	             {12.5, "12"},        {123.0, "120"},          {1260, "1300"},    {9.96, "10"},
	             {0.00251, "0.0025"}, {0.0000104, "0.000010"}, {0.1049, "0.10"}};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
		assert_string_equal(cases[i].shown, fl_word_u(sheet, cases[i].u));
}

static void test_u_never_loses_more_than_a_twentieth(void **state) {
	(void)state;
	for (double u = 1e-6; u < 1e4; u *= 1.00137) {
		fl_stated_u stated = fl_word_state_u(u);
		assert_true(stated.value >= 0.95 * u);
		assert_true(stated.value <= 1.06 * u);
		double digits = stated.value * pow(10, stated.decimals);
		check_near("whole digits", rint(digits), digits, 1e-6);
		assert_true(rint(digits) >= 10 && rint(digits) <= 99);
	}
}

static void test_u_is_never_zero(void **state) {
	(void)state;
	assert_string_equal(FL_ABSENT, fl_word_u(sheet, 0));
	assert_string_equal(FL_ABSENT, fl_word_u(sheet, NAN));
	assert_string_equal(FL_ABSENT, fl_word_u(sheet, INFINITY));
	assert_string_equal(FL_ABSENT, fl_word_u(sheet, -0.1));
	assert_string_equal("0.000000000010", fl_word_u(sheet, 1.0e-11));
}

static void test_error_stands_to_the_place_of_u(void **state) {
	(void)state;
	assert_string_equal("+2.54", fl_word_error(sheet, 2.5402, 0.3522));
	assert_string_equal("\xE2\x88\x92"
	                    "0.249",
	                    fl_word_error(sheet, -0.2491, 0.0391));
	assert_string_equal("0.00", fl_word_error(sheet, -0.001, 0.35));
	assert_string_equal("+1240", fl_word_error(sheet, 1236, 120));
	assert_string_equal("+0.123", fl_word_error(sheet, 0.1234, NAN));
	assert_string_equal(FL_ABSENT, fl_word_error(sheet, NAN, 0.1));
}

static void test_limits_show_a_decimal(void **state) {
	(void)state;
	assert_string_equal("2.0", fl_word_limit(sheet, 2));
	assert_string_equal("0.75", fl_word_limit(sheet, 0.75));
	assert_string_equal("1.5", fl_word_limit(sheet, 100 * 0.015));
	assert_string_equal("±2.0 % of span", fl_word_band(sheet, (fl_band){FL_BAND_PERCENT_SPAN, 2}, "mm²/s"));
	assert_string_equal("±1.0 mm²/s", fl_word_band(sheet, (fl_band){FL_BAND_DIAL_UNITS, 1}, "mm²/s"));
	assert_string_equal("", fl_word_band(sheet, (fl_band){FL_BAND_NONE, 1}, "mm²/s"));
}

static void test_times_name_utc_and_local(void **state) {
	(void)state;
	fl_utc at = (fl_utc)fl_day_from_civil(2026, 4, 14) * 86400 + 23 * 3600 + 30 * 60;
	assert_string_equal("2026-04-14 23:30 UTC", fl_word_time(sheet, at, 0));
	assert_string_equal("2026-04-14 23:30 UTC (2026-04-15 01:30 local, UTC+02:00)", fl_word_time(sheet, at, 120));
	assert_string_equal("2026-04-14 23:30 UTC (20:00 local, UTC\xE2\x88\x92"
	                    "03:30)",
	                    fl_word_time(sheet, at, -210));
	assert_string_equal(FL_ABSENT, fl_word_time(sheet, INT64_MIN, 0));
}

static void test_sentences_begin_and_end(void **state) {
	(void)state;
	assert_string_equal("Air in the line.", fl_word_sentence(sheet, "air in the line"));
	assert_string_equal("It is so.", fl_word_sentence(sheet, "It is so."));
	assert_string_equal("Error \xE2\x88\x92"
	                    "0.3 at LK-50.",
	                    fl_word_sentence(sheet, "error -0.3 at LK-50"));
	assert_string_equal("", fl_word_sentence(sheet, ""));
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_setup_teardown(test_u_has_two_significant_digits, make, drop),
	    cmocka_unit_test_setup_teardown(test_u_never_loses_more_than_a_twentieth, make, drop),
	    cmocka_unit_test_setup_teardown(test_u_is_never_zero, make, drop),
	    cmocka_unit_test_setup_teardown(test_error_stands_to_the_place_of_u, make, drop),
	    cmocka_unit_test_setup_teardown(test_limits_show_a_decimal, make, drop),
	    cmocka_unit_test_setup_teardown(test_times_name_utc_and_local, make, drop),
	    cmocka_unit_test_setup_teardown(test_sentences_begin_and_end, make, drop),
	};
	return cmocka_run_group_tests_name("certificate/wording", tests, NULL, NULL);
}
