/* UTF-8: what is well-formed, what is refused in names, columns, trimming.
 * Malformed cases after The Unicode Standard 15.0, table 3-7 (value from memory).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "check.h"
#include "foundleft/base.h"

static void well_formed_texts(void **state) {
	(void)state;
	static const char *const good[] = {
	    "",      "Quillhaven", "Æøå ß", "Ελλάδα", "Ёлкина", "\u07FF\u0800\uD7FF\uE000\uFFFF", "\U00010000\U0010FFFF",
	    "\u2212"};
	for (size_t i = 0; i < sizeof good / sizeof good[0]; i++)
		assert_true(fl_utf8_valid(good[i], strlen(good[i])));
	assert_true(fl_utf8_valid("a\0b", 3));
}

static void malformed_texts(void **state) {
	(void)state;
	static const char *const bad[] = {
	    "\x80",
	    "\xC0\x80",
	    "\xC1\xBF",
	    "\xC3",
	    "\xC3(",
	    "\xE0\x9F\xBF",
	    "\xE2\x82",
	    "\xED\xA0\x80",
	    "\xED\xBF\xBF",
	    "\xEF\xBF",
	    "\xF0\x8F\xBF\xBF",
	    "\xF4\x90\x80\x80",
	    "\xF5\x80\x80\x80",
	    "\xFE",
	    "\xFF",
	    "\xE2\x28\xA1",
	    "\xF0\x90\x80",
	    "a\xA0",
	};
	for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
		assert_false(fl_utf8_valid(bad[i], strlen(bad[i])));
		const char *at = bad[i]; /* walking it all the same stays inside and ends */
		while (*at)
			fl_utf8_next(&at);
		assert_ptr_equal(at, bad[i] + strlen(bad[i]));
	}
	assert_false(fl_utf8_valid("°", 1));
}

static void code_points(void **state) {
	(void)state;
	const char *at = "A°\u2212\U0001F6E2";
	assert_int_equal(fl_utf8_next(&at), 'A');
	assert_int_equal(fl_utf8_next(&at), 0xB0);
	assert_int_equal(fl_utf8_next(&at), 0x2212);
	assert_int_equal(fl_utf8_next(&at), 0x1F6E2);
	assert_int_equal(*at, 0);
}

static void columns(void **state) {
	(void)state;
	assert_int_equal(fl_utf8_columns(""), 0);
	assert_int_equal(fl_utf8_columns("mm²/s"), 5);
	assert_int_equal(fl_utf8_columns("e\u0301\u036F"), 1);
	assert_int_equal(fl_utf8_columns("\u02FF\u0370"), 2);
}

static void controls_are_found(void **state) {
	(void)state;
	static const char *const refused[] = {"a\tb",    "\n",      "\x1b[2J", "\x7f",   "\xC2\x80", "\xC2\x9F", "\u202A",
	                                      "x\u202E", "\u2066y", "\u2069",  "\u2028", "\u2029z",  "\x01"};
	for (size_t i = 0; i < sizeof refused / sizeof refused[0]; i++)
		assert_true(fl_text_has_control(refused[i]));
	static const char *const fine[] = {"", "I. Vossgaard", "Αντωνίου", "Ёлкина", "a\u00A0b", "\u2065", "\u202F", "~"};
	for (size_t i = 0; i < sizeof fine / sizeof fine[0]; i++)
		assert_false(fl_text_has_control(fine[i]));
}

static void trimming(void **state) {
	(void)state;
	char out[8];
	assert_true(fl_text_trim(" \t\u00A0\u202Fa b\r\n\u00A0", out, sizeof out));
	assert_string_equal(out, "a b");
	assert_true(fl_text_trim(" \u00A0 ", out, sizeof out));
	assert_string_equal(out, "");
	assert_true(fl_text_trim("  1234567  ", out, sizeof out));
	assert_string_equal(out, "1234567");
	assert_false(fl_text_trim("12345678", out, sizeof out));
	assert_true(fl_text_trim("2 à", out, sizeof out)); /* à ends in the byte A0 and is no space */
	assert_string_equal(out, "2 à");
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(well_formed_texts), cmocka_unit_test(malformed_texts),    cmocka_unit_test(code_points),
	    cmocka_unit_test(columns),           cmocka_unit_test(controls_are_found), cmocka_unit_test(trimming),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
