/* test_invalid.c - the stock files that have to be refused, each with its whole line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "corpus.h"
#include "foundleft/stock.h"

static fl_status read_stock(const char *text, fl_error *err) {
	fl_stock stock = {0};
	fl_status status = fl_stock_parse(&stock, text, "input.yaml", err);
	if (status != FL_OK) {
		assert_int_equal(0, stock.oil_count);
		assert_int_equal(0, stock.equipment_count);
		assert_int_equal(0, stock.instrument_count);
	}
	fl_stock_free(&stock);
	return status;
}

static void refuses_every_case(void **state) {
	(void)state;
	corpus_run(SOURCE_DIR "/tests/invalid/stock", 30, read_stock);
}

int main(void) {
	const struct CMUnitTest tests[] = {cmocka_unit_test(refuses_every_case)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
