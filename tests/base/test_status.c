/* Status sentences and the line that a person sees of an error.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "check.h"
#include "foundleft/base.h"

static void every_status_has_its_sentence(void **state) {
	(void)state;
#define CHECK_SENTENCE(name, value, sentence) \
	assert_int_equal(name, value);            \
	assert_string_equal(fl_status_text(name), sentence);
	FL_STATUS_LIST(CHECK_SENTENCE)
#undef CHECK_SENTENCE
	assert_string_equal(fl_status_text((fl_status)-99), "an outcome that the program does not know");
}

static void the_first_error_wins(void **state) {
	(void)state;
	fl_error err = {0};
	fl_place place = {.file = "oils.yaml", .line = 12, .column = 7, .field = "oils[2].k"};
	assert_int_equal(fl_fail_at(&err, FL_E_VALUE, place, "k is %s", "missing"), FL_E_VALUE);
	assert_int_equal(fl_fail(&err, FL_E_IO, "later"), FL_E_IO);
	assert_int_equal(err.status, FL_E_VALUE);
	assert_string_equal(err.message, "k is missing");
	assert_int_equal(fl_fail(NULL, FL_E_MEMORY, "nobody listens"), FL_E_MEMORY);
}

static void the_line_leaves_out_what_is_absent(void **state) {
	(void)state;
	static const struct {
		fl_place place;
		const char *line;
	} cases[] = {
	    {{"oils.yaml", 12, 7, "oils[2].k"}, "oils.yaml:12:7: oils[2].k: wrong"},
	    {{"oils.yaml", 12, 0, NULL}, "oils.yaml:12: wrong"},
	    {{"oils.yaml", 0, 7, NULL}, "oils.yaml: wrong"},
	    {{NULL, 3, 9, NULL}, "line 3:9: wrong"},
	    {{NULL, 0, 0, "stopped zero"}, "stopped zero: wrong"},
	    {{NULL, 0, 0, NULL}, "wrong"},
	};
	for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
		fl_error err = {0};
		char line[200];
		fl_fail_at(&err, FL_E_VALUE, cases[i].place, "wrong");
		assert_string_equal(fl_error_line(&err, line, sizeof line), cases[i].line);
	}
}

static void the_line_cannot_harm_a_terminal(void **state) {
	(void)state;
	fl_error err = {0};
	char line[200];
	fl_fail_at(&err, FL_E_SYNTAX, (fl_place){.file = "a\nb", .field = "\x1b[31m"}, "x\u202Ey\xff\xC2\x85z °C");
	assert_string_equal(fl_error_line(&err, line, sizeof line), "a?b: ?[31m: x?y??z °C");
}

static void long_texts_are_cut_between_characters(void **state) {
	(void)state;
	char text[2001];
	for (size_t i = 0; i < 2000; i += 2)
		memcpy(text + i, "é", 2);
	text[2000] = '\0';
	fl_error err = {0};
	fl_fail_at(&err, FL_E_VALUE, (fl_place){.file = text, .field = text}, "%s", text);
	assert_int_equal(strlen(err.message), 510); /* of 511 bytes, the last would tear a letter */
	assert_true(fl_utf8_valid(err.message, strlen(err.message)));
	assert_true(fl_utf8_valid(err.file, strlen(err.file)));
	for (size_t size = 1; size < 900; size++) {
		char line[900];
		memset(line, 'Z', sizeof line);
		fl_error_line(&err, line, size);
		assert_true(strlen(line) < size);
		assert_true(fl_utf8_valid(line, strlen(line)));
		assert_true(size == sizeof line || line[size] == 'Z');
	}
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(every_status_has_its_sentence),         cmocka_unit_test(the_first_error_wins),
	    cmocka_unit_test(the_line_leaves_out_what_is_absent),    cmocka_unit_test(the_line_cannot_harm_a_terminal),
	    cmocka_unit_test(long_texts_are_cut_between_characters),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
