/* answers.h - a conversation about stock for the tests: the sample stock, lines fed one by one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_SHELF_ANSWERS_H
#define FOUNDLEFT_TEST_SHELF_ANSWERS_H

#include "check.h"
#include "foundleft/shelf.h"
#include "scratch.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define must(call) must_at((call), &err, __LINE__)
static inline void must_at(fl_status status, const fl_error *err, int line) {
	if (status < 0)
		print_error("line %d: %s: %s\n", line, err->field, err->message);
	assert_true(status >= 0);
}

static inline void sample_stock(fl_stock *stock) {
	static const char *const names[] = {"equipment", "instruments", "oils"};
	fl_error err = {0};
	*stock = (fl_stock){0};
	for (int i = 0; i < 3; i++) {
		char path[600];
		snprintf(path, sizeof path, "%s/sample-sessions/stock/%s.yaml", SOURCE_DIR, names[i]);
		must(fl_stock_load(stock, fl_io_system(), path, &err));
	}
}

/* "add oil", "renew TH-7" */
static inline fl_shelf *shelf_begin(const char *what, const fl_stock *stock) {
	fl_error err = {0};
	fl_shelf *shelf = NULL;
	if (strncmp(what, "renew ", 6) == 0) {
		must(fl_shelf_renew(&shelf, what + 6, stock, &err));
		return shelf;
	}
	for (int kind = 0; kind < FL_SHELF_KINDS; kind++)
		if (strcmp(what + 4, fl_shelf_kind_word((fl_shelf_kind)kind)) == 0)
			must(fl_shelf_add(&shelf, (fl_shelf_kind)kind, stock, &err));
	assert_non_null(shelf);
	return shelf;
}

static inline void shelf_take(fl_shelf *shelf, const char *line) {
	fl_text say = {0}, prompt = {0};
	fl_error err = {0};
	fl_shelf_prompt(shelf, &prompt);
	fl_status status = fl_shelf_line(shelf, line, &say, &err);
	if (status < 0)
		print_error("%s%s\n  %s: %s\n", prompt.data, line, err.field, err.message);
	assert_true(status >= 0);
	fl_text_free(&say);
	fl_text_free(&prompt);
}

/* Numbers of a lot as in the sample stock's LK-10, with another name. Invented. */
static const char *const oil_lines[] = {"LK-10",
                                        "2602B",
                                        "Lanternmoor-2602B",
                                        "Lanternmoor oil bench (invented)",
                                        "2602B",
                                        "2026-02-10",
                                        "2027-02-10",
                                        "",
                                        "2",
                                        "20",
                                        "20.71",
                                        "0.20",
                                        "841.8",
                                        "0.4",
                                        "17.43",
                                        "40",
                                        "10.00",
                                        "",
                                        "828,9",
                                        "",
                                        "8.289",
                                        "60",
                                        "5.745",
                                        "",
                                        "815.8",
                                        "",
                                        "4.687",
                                        "",
                                        "yes"};
static const char *const thermometer_lines[] = {"TH-9",       "thermometer", "TB-7001",     "Tallmere bench (invented)",
                                                "2026-03-02", "2027-03-02",  "0 to 150 °C", "0,01",
                                                "0.02",       "0.03 K",      "2",           "20",
                                                "0.01",       "60 °C",       "-0.02",       "",
                                                "yes"};
static const char *const instrument_lines[] = {"VT-7",
                                               "FL-0777",
                                               "Quillhaven (invented)",
                                               "",
                                               "auxiliary engines, sensor 1",
                                               "",
                                               "0 to 50 mm2/s",
                                               "900",
                                               "4-20 mA",
                                               "60",
                                               "1710",
                                               "42.75",
                                               "313.21",
                                               "2.200",
                                               "400",
                                               "1.500",
                                               "40.0",
                                               "",
                                               "2.0",
                                               "1.5",
                                               "",
                                               "12",
                                               "13",
                                               "0.6",
                                               "9",
                                               "20",
                                               "yes"};
#define COUNT(array) ((int)(sizeof(array) / sizeof(array)[0]))
#define IN_SCRATCH(test) cmocka_unit_test_setup_teardown(test, scratch_make, scratch_remove)

#endif
