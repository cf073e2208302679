/* tests/analysis/test_demo.c - the invented scenario against one independent computation of it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Invented data, comparison only (data/README.md). Summary to the printed digits, budgets to 0.01 % of span.
 */
#include "demo.h"

/* Half a unit of the third decimal, and a hair for a tie in printing. */
static void check_printed(const char *session, const char *what, const char *printed, double span) {
	char name[64];
	snprintf(name, sizeof name, "%s, %s, %% of span", session, what);
	check_near(name, atof(printed), 100.0 * span, 0.0005 + 1e-9);
}

/* session,worst_mean,worst_oil,worst_dir,zero,span,ls_max,independent,terminal,zero_based,hysteresis,at */
static void check_summary(const row *r) {
	static bench b;
	const char *session = r->cell[0];
	load(&b, file_of(session), session);
	const fl_run_result *run = bench_assess(&b);
	check_printed(session, "largest error", r->cell[1], run->largest_error->error_span);
	assert_int_equal(run->largest_error->point, point_of(r->cell[2]));
	assert_int_equal(run->largest_error->pass, strcmp(r->cell[3], "up") == 0 ? FL_PASS_RISING : FL_PASS_FALLING);
	check_printed(session, "zero error", r->cell[4], run->zero_error_span);
	check_printed(session, "span error", r->cell[5], run->span_error_span);
	check_printed(session, "largest residual", r->cell[6], run->line.max_abs_residual);
	check_printed(session, "independent linearity", r->cell[7], run->independent.max_abs);
	check_printed(session, "terminal-based linearity", r->cell[8], run->terminal.max_abs);
	check_printed(session, "zero-based linearity", r->cell[9], run->zero_based.max_abs);
	check_printed(session, "hysteresis", r->cell[10], run->hysteresis_span);
	assert_int_equal(run->hysteresis_point, point_of(r->cell[11]));
	bench_end(&b);
}

static void summary(void **state) {
	(void)state;
	FILE *file = open_data("expected_summary.csv");
	row r;
	int sessions = 0;
	for (; next_row(file, &r); sessions++)
		check_summary(&r);
	fclose(file);
	assert_int_equal(sessions, 8);
}

/* Which line of the expected budget is which of ours. */
static const struct {
	const char *theirs, *ours;
} pairs[] = {{"oil certificate", "oil certificate"},
             {"D341", "viscosity between certified temperatures"},
             {"oil ageing", "oil ageing since its certificate"},
             {"thermometer certificate", "thermometer certificate"},
             {"thermometer drift", "thermometer drift since its calibration"},
             {"bath to capillary", "bath to capillary temperature"},
             {"oil density", "oil density"},
             {"current meter certificate", "current meter certificate"},
             {"current meter drift", "current meter drift since its calibration"},
             {"resolution", "current meter resolution"},
             {"repeatability", "repeatability of the mean"},
             {"half hysteresis", "half the hysteresis"}};

static const fl_budget_line *find_line(const fl_point_result *point, const char *theirs) {
	for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++)
		if (strncmp(theirs, pairs[i].theirs, strlen(pairs[i].theirs)) == 0)
			for (size_t j = 0; j < point->budget_count; j++)
				if (strcmp(point->budget[j].name, pairs[i].ours) == 0)
					return &point->budget[j];
	return NULL;
}

static void check_budget_row(const fl_point_result *point, const row *r) {
	char name[160];
	snprintf(name, sizeof name, "%s, %s, %% of span", r->cell[0], r->cell[1]);
	double want = atof(r->cell[6]);
	if (strcmp(r->cell[1], "COMBINED") == 0) {
		check_near(name, want, 100.0 * point->sum.uc, 0.01);
	} else if (strcmp(r->cell[1], "EXPANDED k=2") == 0) {
		check_near(name, want, 100.0 * point->sum.expanded, 0.01);
		check_near("coverage factor", 2.0, point->sum.coverage_factor, 0.01);
	} else {
		const fl_budget_line *line = find_line(point, r->cell[1]);
		if (!line)
			print_error("no line for %s\n", r->cell[1]);
		assert_non_null(line);
		check_near(name, want, 100.0 * line->contribution_span, 0.0025);
	}
}

/* oil,contribution,stated,distribution,std_uncertainty,sensitivity,contribution,dof */
static void budgets(void **state) {
	(void)state;
	static bench b;
	load(&b, "asfound_2026.csv", "S26F");
	const fl_run_result *run = bench_assess(&b);
	FILE *file = open_data("expected_budget.csv");
	row r;
	int rows = 0;
	for (; next_row(file, &r); rows++) {
		const fl_point_result *point = &run->combined[point_of(r.cell[0]) + 1];
		assert_true(point->both);
		assert_string_equal(point->oil, r.cell[0]);
		check_budget_row(point, &r);
	}
	fclose(file);
	assert_int_equal(rows, 70);
	bench_end(&b);
}

static void as_found_is_out_and_as_left_is_in(void **state) {
	(void)state;
	static bench b;
	load(&b, "asfound_2026.csv", "S26F");
	const fl_run_result *found = bench_assess(&b);
	assert_int_equal(found->verdict, FL_VERDICT_FAIL);
	assert_string_equal(found->worst->oil, "LK-50");
	assert_int_equal(found->worst->pass, FL_PASS_FALLING);
	assert_non_null(strstr(found->verdict_reason, "LK-50 falling"));
	assert_false(found->inside_adjust_limit);
	bench_end(&b);
	load(&b, "asleft_2026.csv", "S26L");
	const fl_run_result *left = bench_assess(&b);
	assert_int_equal(left->verdict, FL_VERDICT_PASS);
	assert_true(left->inside_adjust_limit);
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(summary),
	    cmocka_unit_test(budgets),
	    cmocka_unit_test(as_found_is_out_and_as_left_is_in),
	};
	return cmocka_run_group_tests_name("invented scenario", tests, NULL, NULL);
}
