/* Decimals as typed and as printed.
 * Printed values: Python 3 decimal.Decimal(value).quantize(..., ROUND_HALF_EVEN), which takes the exact binary value.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <float.h>
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "check.h"
#include "foundleft/base.h"
#include "scratch.h"

#define COUNT(a) (sizeof(a) / sizeof(a)[0])

static void plain_numbers(void **state) {
	(void)state;
	static const struct {
		const char *text, *typed;
		double value;
		int decimals;
	} cases[] = {
	    {"0", "0", 0, 0},
	    {"12.5", "12.5", 12.5, 1},
	    {"12,5", "12,5", 12.5, 1},
	    {" 10,42 ", "10,42", 10.42, 2},
	    {"\u00A010.4200\u00A0", "10.4200", 10.42, 4},
	    {"+3.60", "+3.60", 3.6, 2},
	    {"-17.25", "-17.25", -17.25, 2},
	    {"\u221217,25", "\u221217,25", -17.25, 2},
	    {".5", ".5", 0.5, 1},
	    {"-,75", "-,75", -0.75, 2},
	    {"0.123", "0.123", 0.123, 3},
	    {"012.345", "012.345", 12.345, 3},
	    {"1234.567", "1234.567", 1234.567, 3},
	    {"1.2345", "1.2345", 1.2345, 4},
	    {"1.23", "1.23", 1.23, 2},
	    {"1.234,5", "1.234,5", 1234.5, 1},
	    {"1,234.5", "1,234.5", 1234.5, 1},
	    {"-1.234.567,891", "-1.234.567,891", -1234567.891, 3},
	    {"12,345,678.9", "12,345,678.9", 12345678.9, 1},
	    {"1,234.567", "1,234.567", 1234.567, 3},
	    {"1e3", "1e3", 1000, 0},
	    {"1.5E-3", "1.5E-3", 0.0015, 4},
	    {"2,5e+2", "2,5e+2", 250, 0},
	    {"2.5e\u22123", "2.5e\u22123", 0.0025, 4},
	    {"1.234e0", "1.234e0", 1.234, 3},
	    {"1.7976931348623157e308", "1.7976931348623157e308", DBL_MAX, 0},
	    {"0.1000000000000000055511151231257827021181583", "0.1000000000000000055511151231257827021181583", 0.1, 43},
	    {"0e999999999999", "0e999999999999", 0, 0},
	};
	for (size_t i = 0; i < COUNT(cases); i++) {
		fl_decimal number;
		double thousands = -1;
		fl_error err = {0};
		assert_int_equal(fl_decimal_parse(cases[i].text, &number, &thousands, &err), FL_OK);
		assert_string_equal(number.typed, cases[i].typed);
		check_near(cases[i].text, cases[i].value, number.value, 0.0);
		assert_int_equal(number.decimals, cases[i].decimals);
		check_near("thousands untouched", -1, thousands, 0.0);
		assert_int_equal(err.status, FL_OK);
	}
}

static void minus_zero_is_zero(void **state) {
	(void)state;
	fl_decimal number;
	assert_int_equal(fl_decimal_parse("-0.00", &number, NULL, NULL), FL_OK);
	assert_false(signbit(number.value));
	assert_string_equal(number.typed, "-0.00");
}

static void three_digits_behind_one_mark_are_asked(void **state) {
	(void)state;
	static const struct {
		const char *text;
		double decimal, thousands;
	} cases[] = {
	    {"1.234", 1.234, 1234},        {"1,234", 1.234, 1234},        {"12.385", 12.385, 12385},
	    {"-983,500", -983.5, -983500}, {"\u22127.250", -7.25, -7250}, {"+200.000", 200, 200000},
	};
	for (size_t i = 0; i < COUNT(cases); i++) {
		fl_decimal number;
		double thousands = 0;
		assert_int_equal(fl_decimal_parse(cases[i].text, &number, &thousands, NULL), FL_ASK);
		check_near(cases[i].text, cases[i].decimal, number.value, 0.0);
		check_near(cases[i].text, cases[i].thousands, thousands, 0.0);
		assert_int_equal(number.decimals, 3);
		assert_int_equal(fl_decimal_parse(cases[i].text, &number, NULL, NULL), FL_ASK);
	}
}

static void refused_texts(void **state) {
	(void)state;
	static const struct {
		const char *text;
		fl_status status;
		const char *says;
	} cases[] = {
	    {"", FL_E_SYNTAX, "nothing was entered"},
	    {" \u00A0 ", FL_E_SYNTAX, "nothing was entered"},
	    {"nan", FL_E_SYNTAX, "not a measured value"},
	    {"-NaN", FL_E_SYNTAX, "not a measured value"},
	    {"inf", FL_E_SYNTAX, "not a measured value"},
	    {"\u2212Infinity", FL_E_SYNTAX, "not a measured value"},
	    {"0x1F", FL_E_SYNTAX, "hexadecimal"},
	    {"-0X1p3", FL_E_SYNTAX, "hexadecimal"},
	    {"1e400", FL_E_RANGE, "too large"},
	    {"-1e99999999999999999999", FL_E_RANGE, "too large"},
	    {"1e-400", FL_E_RANGE, "too close to zero"},
	    {"1e-320", FL_E_RANGE, "too close to zero"},
	    {"1.2.3", FL_E_SYNTAX, "decimal marks"},
	    {"1.234.567", FL_E_SYNTAX, "decimal marks"},
	    {"1,2,3", FL_E_SYNTAX, "decimal marks"},
	    {"1.23,4", FL_E_SYNTAX, "decimal marks"},
	    {"1234.567,8", FL_E_SYNTAX, "decimal marks"},
	    {".234,5", FL_E_SYNTAX, "decimal marks"},
	    {"1,234.567,8", FL_E_SYNTAX, "decimal marks"},
	    {"1.234,", FL_E_SYNTAX, "decimal marks"},
	    {"12.", FL_E_SYNTAX, "decimal marks"},
	    {".", FL_E_SYNTAX, "decimal marks"},
	    {"1 234", FL_E_SYNTAX, "without spaces"},
	    {"1\u00A0234,5", FL_E_SYNTAX, "without spaces"},
	    {"1'234", FL_E_SYNTAX, "without spaces"},
	    {"-", FL_E_SYNTAX, "not a number"},
	    {"--5", FL_E_SYNTAX, "not a number"},
	    {"- 5", FL_E_SYNTAX, "not a number"},
	    {"\u20135", FL_E_SYNTAX, "not a number"},
	    {"1e", FL_E_SYNTAX, "not a number"},
	    {"e5", FL_E_SYNTAX, "not a number"},
	    {"1e5.5", FL_E_SYNTAX, "not a number"},
	    {"l2.5", FL_E_SYNTAX, "not a number"},
	    {"12.5O", FL_E_SYNTAX, "not a number"},
	    {"\u0661\u0662", FL_E_SYNTAX, "not a number"},
	    {"12\x1b[2J", FL_E_SYNTAX, "no text"},
	    {"12\xff", FL_E_SYNTAX, "no text"},
	    {"123456789012345678901234567890123456789012345678", FL_E_SYNTAX, "too long"},
	};
	for (size_t i = 0; i < COUNT(cases); i++) {
		fl_decimal number = {.value = 42};
		double thousands = 43;
		fl_error err = {0};
		fl_status status = fl_decimal_parse(cases[i].text, &number, &thousands, &err);
		if (status != cases[i].status || !strstr(err.message, cases[i].says))
			fail_msg("\"%s\": status %d, \"%s\"", cases[i].text, (int)status, err.message);
		check_near("untouched", 42, number.value, 0.0);
		check_near("untouched", 43, thousands, 0.0);
	}
}

static void two_hundred_characters(void **state) {
	(void)state;
	char text[201];
	memset(text, '7', 200);
	text[200] = '\0';
	fl_decimal number;
	fl_error err = {0};
	assert_int_equal(fl_decimal_parse(text, &number, NULL, &err), FL_E_SYNTAX);
	assert_string_equal(err.message, "too long for a number: at most 47 characters");
	text[47] = '\0'; /* the longest that is kept */
	assert_int_equal(fl_decimal_parse(text, &number, NULL, NULL), FL_OK);
	assert_string_equal(number.typed, text);
}

static const struct {
	double value;
	int decimals;
	const char *text;
} printed[] = {
    {0.5, 0, "0"},
    {1.5, 0, "2"},
    {2.5, 0, "2"},
    {-2.5, 0, "-2"},
    {0.125, 2, "0.12"},
    {0.375, 2, "0.38"},
    {-0.125, 2, "-0.12"},
    {2.675, 2, "2.67"},
    {1.005, 2, "1.00"},
    {0.045, 2, "0.04"},
    {1234.5, 0, "1234"},
    {99.995, 2, "100.00"},
    {9.9999, 3, "10.000"},
    {1e+22, 0, "10000000000000000000000"},
    {5e-324, 3, "0.000"},
    {0.1, 20, "0.10000000000000000555"},
    {-0.004, 2, "0.00"},
    {-0.005, 2, "-0.01"},
    {0.0, 3, "0.000"},
    {-0.0, 2, "0.00"},
    {12.385, 0, "12"},
    {6894.757293168361, 6, "6894.757293"},
    {1326.0854169793065, 6, "1326.085417"},
    {1309.790365585065, 2, "1309.79"},
    {-47.33954429065557, 7, "-47.3395443"},
    {-1763.0891269843985, 8, "-1763.08912698"},
    {-9.58220003433712, 4, "-9.5822"},
    {-182.24768120439262, 1, "-182.2"},
    {-72.3385391936913, 6, "-72.338539"},
    {1073.8333085131258, 2, "1073.83"},
    {-1598.1415844043208, 4, "-1598.1416"},
    {-1864.1283529503246, 5, "-1864.12835"},
    {89.23225341660873, 8, "89.23225342"},
    {-134.70489394937158, 6, "-134.704894"},
    {1629.75729927978, 1, "1629.8"},
    {-775.4305048821398, 2, "-775.43"},
};

static void printed_values(void **state) {
	(void)state;
	for (size_t i = 0; i < COUNT(printed); i++) {
		char text[64];
		assert_string_equal(fl_decimal_format(printed[i].value, printed[i].decimals, text, sizeof text),
		                    printed[i].text);
	}
}

static void signs(void **state) {
	(void)state;
	char text[32];
	assert_string_equal(fl_decimal_format_signed(0.25, 2, false, text, sizeof text), "+0.25");
	assert_string_equal(fl_decimal_format_signed(-0.25, 2, false, text, sizeof text), "-0.25");
	assert_string_equal(fl_decimal_format_signed(-0.25, 2, true, text, sizeof text), "\u22120.25");
	assert_string_equal(fl_decimal_format_signed(0.25, 2, true, text, sizeof text), "+0.25");
	assert_string_equal(fl_decimal_format_signed(-0.004, 2, true, text, sizeof text), "0.00");
	assert_string_equal(fl_decimal_format_signed(0.004, 2, false, text, sizeof text), "0.00");
}

static void what_cannot_be_shown(void **state) {
	(void)state;
	char text[8];
	assert_string_equal(fl_decimal_format(123456.7, 1, text, sizeof text), "#"); /* eight digits and the end */
	assert_string_equal(fl_decimal_format(12345.67, 1, text, sizeof text), "12345.7");
	assert_string_equal(fl_decimal_format(NAN, 2, text, sizeof text), "nan");
	assert_string_equal(fl_decimal_format(-INFINITY, 2, text, sizeof text), "-inf");
	assert_string_equal(fl_decimal_format(2.385, -3, text, sizeof text), "2");
	char wide[500];
	assert_int_equal(strlen(fl_decimal_format(-DBL_MAX, 1000, wide, sizeof wide)), 1 + 309 + 1 + 60);
	text[0] = 'x';
	fl_decimal_format(1.0, 1, text, 0);
	assert_int_equal(text[0], 'x');
}

static void what_was_typed_is_shown_again(void **state) {
	(void)state;
	static const char *const texts[] = {"10.42", "-0.5", "4.000000", "1234.5", "0.00012", "17"};
	for (size_t i = 0; i < COUNT(texts); i++) {
		fl_decimal number;
		char again[32];
		assert_int_equal(fl_decimal_parse(texts[i], &number, NULL, NULL), FL_OK);
		assert_string_equal(fl_decimal_format(number.value, number.decimals, again, sizeof again), texts[i]);
	}
}

/* Takes on a locale with a decimal comma: an installed one, or one made in `folder` by localedef. */
static bool take_comma_locale(const char *folder) {
	static const char *const names[] = {"de_DE.UTF-8", "de_DE.utf8", "fr_FR.UTF-8", "nb_NO.UTF-8", "comma.UTF-8"};
	char command[2 * SCRATCH_SIZE];
	snprintf(command, sizeof command, "localedef -i de_DE -f UTF-8 '%s/comma.UTF-8' >/dev/null 2>&1", folder);
	for (size_t i = 0; i < COUNT(names); i++) {
		if (i + 1 == COUNT(names) && (system(command) == -1 || setenv("LOCPATH", folder, 1) != 0))
			return false;
		if (setlocale(LC_ALL, names[i]) && strcmp(localeconv()->decimal_point, ",") == 0)
			return true;
	}
	return false;
}

static void the_locale_changes_nothing(void **state) {
	if (!take_comma_locale(*state)) {
		print_message("no locale with a decimal comma, and localedef cannot make one\n");
		skip();
	}
	char plain[32];
	snprintf(plain, sizeof plain, "%.1f", 0.5);
	assert_string_equal(plain, "0,5"); /* the locale is at work */
	plain_numbers(state);
	three_digits_behind_one_mark_are_asked(state);
	refused_texts(state);
	printed_values(state);
	signs(state);
	setlocale(LC_ALL, "C");
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(plain_numbers),
	    cmocka_unit_test(minus_zero_is_zero),
	    cmocka_unit_test(three_digits_behind_one_mark_are_asked),
	    cmocka_unit_test(refused_texts),
	    cmocka_unit_test(two_hundred_characters),
	    cmocka_unit_test(printed_values),
	    cmocka_unit_test(signs),
	    cmocka_unit_test(what_cannot_be_shown),
	    cmocka_unit_test(what_was_typed_is_shown_again),
	    cmocka_unit_test_setup_teardown(the_locale_changes_nothing, scratch_make, scratch_remove),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
