/* test_document.c - the tree, its places, what it refuses, typed readers, excerpts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "foundleft/document.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static fl_arena arena;

static int free_arena(void **state) {
	(void)state;
	fl_arena_free(&arena);
	return 0;
}

static const fl_node *parse(const char *text) {
	const fl_node *root = NULL;
	fl_error err = {0};
	fl_status status = fl_document_parse(&arena, text, "input.yaml", &root, &err);
	if (status != FL_OK)
		fail_msg("%d:%d: %s", err.line, err.column, err.message);
	return root;
}

/* The whole line of the error that `text` gives. */
static void check_refused(const char *text, const char *line) {
	const fl_node *root = NULL;
	fl_error err = {0};
	char got[1024];
	fl_status status = fl_document_parse(&arena, text, "input.yaml", &root, &err);
	assert_int_equal(FL_E_SYNTAX, status);
	assert_null(root);
	assert_string_equal(line, fl_error_line(&err, got, sizeof got));
}

static void check_field_refused(fl_status status, const fl_error *err, const char *line) {
	char got[1024];
	assert_true(status < 0);
	assert_string_equal(line, fl_error_line(err, got, sizeof got));
}

static void knows_every_place(void **state) {
	(void)state;
	const fl_node *root = parse("# head\noils:\n  - name: LK-10\n    k: 2\n  - {name: \"Öl µ\", k: 3}\n");
	assert_int_equal(FL_NODE_MAP, root->kind);
	const fl_node *oils = fl_node_get(root, "oils");
	assert_int_equal(FL_NODE_LIST, oils->kind);
	assert_int_equal(2, oils->count);
	const fl_node *k = fl_node_get(oils->items[1], "k");
	assert_string_equal("oils[2].k", k->path);
	assert_int_equal(5, k->line);
	assert_int_equal(23, k->column); /* counted in characters: Ö and µ are one each */
	assert_int_equal(20, k->key_column);
	assert_string_equal("3", k->text);
	const fl_node *name = fl_node_get(oils->items[1], "name");
	assert_true(name->quoted);
	assert_string_equal("Öl µ", name->text);
	assert_null(fl_node_get(root, "absent"));
}

static void cuts_an_excerpt_that_parses_alone(void **state) {
	(void)state;
	const char *source =
	    "\xef\xbb\xbf"
	    "# µ before\nitems:\n  - name: Zürich µ # note\n    rows:\n      - {at: 20 °C}\n      - {at: 40 °C}\n"
	    "    text: >\n      folded\n      text\n\n# comment behind\n  - name: two\n";
	const fl_node *first = fl_node_get(parse(source), "items")->items[0];
	char *excerpt = fl_document_excerpt(&arena, source, first);
	const fl_node *again = parse(excerpt);
	assert_string_equal("Zürich µ", fl_node_get(again, "name")->text);
	assert_string_equal("folded text", fl_node_get(again, "text")->text);
	assert_string_equal("40 °C", fl_node_get(fl_node_get(again, "rows")->items[1], "at")->text);
	assert_int_equal(5, again->column);
	assert_null(strstr(excerpt, "two"));
	assert_string_equal(excerpt, fl_document_excerpt(&arena, excerpt, again));
}

static void cuts_flow_and_last_items(void **state) {
	(void)state;
	const char *source = "a: [{b: 1, c: [2,\n  3]}, x]\nd:\n- e: f\n";
	const fl_node *root = parse(source);
	assert_string_equal("    {b: 1, c: [2,\n  3]}\n",
	                    fl_document_excerpt(&arena, source, fl_node_get(root, "a")->items[0]));
	assert_string_equal("  e: f\n", fl_document_excerpt(&arena, source, fl_node_get(root, "d")->items[0]));
}

static void refuses_what_is_not_a_form(void **state) {
	(void)state;
	check_refused("", "input.yaml:1:1: the file is empty");
	check_refused("# only a comment\n", "input.yaml:1:1: the file is empty");
	check_refused("a: 1\nb: 2\na: 3\n", "input.yaml:3:1: a: \"a\" stands here twice (first on line 1); keep one");
	check_refused("a: &x 1\n", "input.yaml:1:4: '&' would name a value, which is not used here; remove it");
	check_refused(
	    "a: *x\n",
	    "input.yaml:1:4: '*' would repeat a value from elsewhere, which is not used here; write the value out");
	check_refused("a: !!str 1\n", "input.yaml:1:4: '!' would give a type, which is not used here; remove it");
	check_refused("a: 1\n---\nb: 2\n", "input.yaml:2:1: a second document begins here; keep one in a file");
	check_refused("? [a, b]\n: 1\n", "input.yaml:1:3: the name of a field is a word, not a list or a group of fields");
}

static void refuses_characters_with_their_place(void **state) {
	(void)state;
	check_refused("a: 1\nb: \xb5m\n", "input.yaml:2:4: byte 0xB5 is not UTF-8; save the file as UTF-8");
	check_refused("a: \xe2\x82", "input.yaml:1:4: byte 0xE2 is not UTF-8; save the file as UTF-8");
	check_refused("µ: \x07\n", "input.yaml:1:4: control character U+0007; remove it");
	check_refused("a: b\u202ec\n", "input.yaml:1:5: control character U+202E; remove it");
	check_refused("a: \"b\\0c\"\n", "input.yaml:1:4: a: a zero character cannot stand in a text");
}

static void refuses_broken_syntax_in_plain_words(void **state) {
	(void)state;
	check_refused("a: b: c\n", "input.yaml:1:5: a colon is not possible here: put text that has one in quotes, or mend "
	                           "the indentation");
	check_refused("a:\n\tb: 1\n",
	              "input.yaml:2:1: a value cannot begin with this character (a tab, @, % or backquote): "
	              "indent with spaces, put text in quotes");
	check_refused("a: \"b\n", "input.yaml:2:1: a quote is opened and not closed");
	check_refused("a: {b: 1\nc: 2\n", "input.yaml:2:2: a comma or the closing } is missing");
}

/* `count` times `piece`, then `end`. */
static char *repeated(const char *piece, size_t count, const char *end) {
	char *text = malloc(strlen(piece) * count + strlen(end) + 1);
	assert_non_null(text);
	char *at = text;
	for (size_t i = 0; i < count; i++)
		at = stpcpy(at, piece);
	strcpy(at, end);
	return text;
}

static void keeps_its_limits(void **state) {
	(void)state;
	char *deep = repeated("[", 33, "\n");
	check_refused(deep, "input.yaml:1:33: nested more than 32 levels deep");
	char *many = repeated("- 1\n", 100000, "");
	check_refused(many, "input.yaml:100000:3: more than 100000 values in one file; split the file");
	char *large = repeated("# 34567\n", 524289, "");
	check_refused(large, "input.yaml: larger than 4 MiB; split the file");
	char *name = repeated("n", 65, ": 1\n");
	check_refused(name, "input.yaml:1:1: the name of a field is one line of at most 64 characters");
	free(deep);
	free(many);
	free(large);
	free(name);
}

static void reads_typed_fields(void **state) {
	(void)state;
	const fl_node *root = parse("bore: 2,2 mm\nnu: 2.968 mm²/s\nn: 3\nx: -0.5\nyes: yes\nday: 2026-04-14\n"
	                            "word: two\nrange: 0 to 150 °C\nopen: at most 60 °C\nblank:\n");
	fl_error err = {0};
	double value = 0, low = 0, high = 0;
	int integer = 0, choice = -1;
	bool yes = false;
	fl_day day = FL_NO_DAY;
	fl_unit unit = FL_U_NONE;
	const char *text = "untouched";
	static const char *const words[] = {"one", "two", NULL};
	assert_int_equal(FL_OK, fl_node_amount(root, "bore", true, FL_Q_LENGTH, &value, &unit, &err));
	check_near("bore", 0.0022, value, 1e-18);
	assert_int_equal(FL_U_MM, unit);
	assert_int_equal(FL_OK, fl_node_amount(root, "nu", true, FL_Q_KINEMATIC_VISCOSITY, &value, NULL, &err));
	check_near("a point before three digits is a decimal point", 2.968e-6, value, 1e-20);
	assert_int_equal(FL_OK, fl_node_integer(root, "n", true, 1, 9, &integer, &err));
	assert_int_equal(3, integer);
	assert_int_equal(FL_OK, fl_node_number(root, "x", true, -1, 1, &value, &err));
	check_near("x", -0.5, value, 0);
	assert_int_equal(FL_OK, fl_node_bool(root, "yes", true, &yes, &err));
	assert_true(yes);
	assert_int_equal(FL_OK, fl_node_day(root, "day", true, &day, &err));
	assert_int_equal(fl_day_from_civil(2026, 4, 14), day);
	assert_int_equal(FL_OK, fl_node_choice(root, "word", true, words, &choice, &err));
	assert_int_equal(1, choice);
	assert_int_equal(FL_OK, fl_node_span(root, "range", true, FL_Q_TEMPERATURE, false, &low, &high, &unit, &err));
	check_near("low", 0, low, 0);
	check_near("high", 150, high, 0);
	assert_int_equal(FL_OK, fl_node_span(root, "open", true, FL_Q_TEMPERATURE, true, &low, &high, &unit, &err));
	assert_true(isinf(low) && low < 0);
	check_near("at most", 60, high, 0);
	assert_int_equal(FL_OK, fl_node_text(root, "blank", false, &text, &err));
	assert_string_equal("untouched", text);
	assert_int_equal(FL_OK, err.status);
}

static void refuses_wrong_fields(void **state) {
	(void)state;
	const fl_node *root = parse("a: {bore: 2.2 cm, nu: 17.43 mPa·s, k: two, n: 2.5, day: 14.4.2026, big: 99,\n"
	                            "  none: 2.2, thousands: \"1,234\", back: 5 to 2 mm, mixed: 5 mm to 2 m}\n");
	const fl_node *a = fl_node_get(root, "a");
	double value = 7, high;
	int integer = 7;
	fl_day day;
	fl_unit unit;
	fl_error err = {0};
	check_field_refused(fl_node_amount(a, "bore", true, FL_Q_LENGTH, &value, NULL, &err), &err,
	                    "input.yaml:1:11: a.bore: \"2.2 cm\" has an unknown unit: write it with mm or m");
	err = (fl_error){0};
	check_field_refused(
	    fl_node_amount(a, "nu", true, FL_Q_KINEMATIC_VISCOSITY, &value, NULL, &err), &err,
	    "input.yaml:1:23: a.nu: \"17.43 mPa·s\" is a dynamic viscosity: a kinematic viscosity in mm²/s is needed");
	err = (fl_error){0};
	check_field_refused(
	    fl_node_number(a, "k", true, 1, 4, &value, &err), &err,
	    "input.yaml:1:39: a.k: \"two\" is not a number: write digits with one decimal mark, such as 12.5");
	err = (fl_error){0};
	check_field_refused(fl_node_integer(a, "n", true, 1, 4, &integer, &err), &err,
	                    "input.yaml:1:47: a.n: 2.5 is not a whole number: from 1 to 4 is needed");
	err = (fl_error){0};
	check_field_refused(fl_node_day(a, "day", true, &day, &err), &err,
	                    "input.yaml:1:57: a.day: \"14.4.2026\" is not a date: write year-month-day, such as "
	                    "2026-04-14; other orders are ambiguous");
	err = (fl_error){0};
	check_field_refused(fl_node_number(a, "big", true, 0, 10, &value, &err), &err,
	                    "input.yaml:1:73: a.big: 99 is not possible: from 0 to 10 would be");
	err = (fl_error){0};
	check_field_refused(fl_node_amount(a, "none", true, FL_Q_LENGTH, &value, NULL, &err), &err,
	                    "input.yaml:2:9: a.none: \"2.2\" has no unit: write it with mm or m");
	err = (fl_error){0};
	check_field_refused(fl_node_number(a, "thousands", true, 0, 1e6, &value, &err), &err,
	                    "input.yaml:2:25: a.thousands: \"1,234\" may mean thousands or decimals: write 1.234, or the "
	                    "thousands without a mark");
	err = (fl_error){0};
	check_field_refused(fl_node_span(a, "back", true, FL_Q_LENGTH, false, &value, &high, &unit, &err), &err,
	                    "input.yaml:2:40: a.back: the first number has to be below the second");
	err = (fl_error){0};
	check_field_refused(
	    fl_node_span(a, "mixed", true, FL_Q_LENGTH, false, &value, &high, &unit, &err), &err,
	    "input.yaml:2:58: a.mixed: both ends need one unit, written once at the end, such as \"0 to 50 mm²/s\"");
	err = (fl_error){0};
	check_field_refused(fl_node_number(a, "absent", true, 0, 1, &value, &err), &err,
	                    "input.yaml:1:4: a.absent: missing: a plain number is needed");
	check_near("outputs of refused fields", 7, value, 0);
	assert_int_equal(7, integer);
}

static void names_the_nearest_known_field(void **state) {
	(void)state;
	static const char *const known[] = {"certificate", "use before", "k", NULL};
	fl_error err = {0};
	check_field_refused(fl_node_only(parse("ceritficate: 1\n"), known, &err), &err,
	                    "input.yaml:1:1: ceritficate: unknown field: perhaps \"certificate\"");
	err = (fl_error){0};
	check_field_refused(fl_node_only(parse("k: 2\nuse_before: 1\n"), known, &err), &err,
	                    "input.yaml:2:1: use_before: unknown field: perhaps \"use before\"");
	err = (fl_error){0};
	check_field_refused(fl_node_only(parse("colour: red\n"), known, &err), &err,
	                    "input.yaml:1:1: colour: unknown field: here stand certificate, use before or k");
	err = (fl_error){0};
	check_field_refused(fl_node_only(parse("{k: 20,5 mm}\n"), known, &err), &err,
	                    "input.yaml:1:8: 5 mm: a decimal comma splits a value between { and }: write a decimal point");
	assert_int_equal(FL_OK, fl_node_only(parse("k: 1\n"), known, NULL));
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_teardown(knows_every_place, free_arena),
	    cmocka_unit_test_teardown(cuts_an_excerpt_that_parses_alone, free_arena),
	    cmocka_unit_test_teardown(cuts_flow_and_last_items, free_arena),
	    cmocka_unit_test_teardown(refuses_what_is_not_a_form, free_arena),
	    cmocka_unit_test_teardown(refuses_characters_with_their_place, free_arena),
	    cmocka_unit_test_teardown(refuses_broken_syntax_in_plain_words, free_arena),
	    cmocka_unit_test_teardown(keeps_its_limits, free_arena),
	    cmocka_unit_test_teardown(reads_typed_fields, free_arena),
	    cmocka_unit_test_teardown(refuses_wrong_fields, free_arena),
	    cmocka_unit_test_teardown(names_the_nearest_known_field, free_arena),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
