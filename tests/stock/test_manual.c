/* test_manual.c - the examples of docs/stock-files.md and docs/procedures.md load as they stand.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "foundleft/stock.h"

#include <string.h>

/* Runs `use` on every ```yaml block of a page; returns how many there were. */
static int each_example(const char *page, void (*use)(const char *text, int number)) {
	fl_arena arena = {0};
	char *text = NULL;
	size_t length = 0;
	int count = 0;
	assert_int_equal(FL_OK, fl_file_read(fl_io_system(), page, 1 << 20, &arena, &text, &length, NULL));
	for (char *at = text; (at = strstr(at, "```yaml\n")) != NULL;) {
		at += strlen("```yaml\n");
		char *end = strstr(at, "```");
		assert_non_null(end);
		char *example = fl_arena_strndup(&arena, at, (size_t)(end - at));
		use(example, ++count);
		at = end + 3;
	}
	fl_arena_free(&arena);
	return count;
}

static void check(fl_status status, const fl_error *err, int number) {
	char line[1200];
	if (status != FL_OK)
		fail_msg("example %d: %s", number, fl_error_line(err, line, sizeof line));
}

static void use_stock(const char *text, int number) {
	fl_stock stock = {0};
	fl_error err = {0};
	check(fl_stock_parse(&stock, text, "example", &err), &err, number);
	assert_true(stock.oil_count + stock.equipment_count + stock.instrument_count > 0);
	fl_stock_free(&stock);
}

static void use_procedure(const char *text, int number) {
	fl_procedure procedure = {0};
	fl_error err = {0};
	check(fl_procedure_parse(text, "example", &procedure, &err), &err, number);
	fl_procedure_free(&procedure);
}

static void stock_examples_load(void **state) {
	(void)state;
	assert_int_equal(3, each_example(SOURCE_DIR "/docs/stock-files.md", use_stock));
}

static void procedure_examples_load(void **state) {
	(void)state;
	assert_int_equal(1, each_example(SOURCE_DIR "/docs/procedures.md", use_procedure));
}

int main(void) {
	const struct CMUnitTest tests[] = {cmocka_unit_test(stock_examples_load),
	                                   cmocka_unit_test(procedure_examples_load)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
