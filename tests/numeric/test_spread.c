/* tests/numeric/test_spread.c - repeated values, quantiles, budget, trend.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "foundleft/numeric.h"

#include <math.h>

static void spread_of_readings(void **state) {
	(void)state;
	const double v[] = {10.42, 10.44, 10.40, 10.43};
	fl_spread spread;
	assert_int_equal(fl_numeric_spread(v, 4, &spread, NULL), FL_OK);
	check_near("mean", 10.4225, spread.mean, 1e-14);
	check_near("s", sqrt(8.75e-4 / 3.0), spread.s, 1e-14);
	check_near("min", 10.40, spread.min, 0.0);
	check_near("max", 10.44, spread.max, 0.0);
	assert_int_equal(spread.n, 4);
	assert_int_equal(fl_numeric_spread(v, 1, &spread, NULL), FL_OK);
	check_near("one reading has no scatter", 0.0, spread.s, 0.0);
	const double equal[] = {0.1, 0.1, 0.1};
	assert_int_equal(fl_numeric_spread(equal, 3, &spread, NULL), FL_OK);
	check_near("equal readings have none, to the last digit", 0.0, spread.s, 0.0);
	assert_int_equal(fl_numeric_spread(v, 0, &spread, NULL), FL_E_NUMERIC);
	const double hole[] = {1.0, NAN};
	assert_int_equal(fl_numeric_spread(hole, 2, &spread, NULL), FL_E_NUMERIC);
}

/* A large mean under a small scatter: the digits that a sum of squares would lose. */
static void spread_keeps_small_scatter(void **state) {
	(void)state;
	const double v[] = {1e9 + 0.25, 1e9 + 0.5, 1e9 + 0.75};
	fl_spread spread;
	assert_int_equal(fl_numeric_spread(v, 3, &spread, NULL), FL_OK);
	check_near("s", 0.25, spread.s, 1e-9);
}

static void largest_gap_between_traverses(void **state) {
	(void)state;
	const double up[] = {NAN, 0.1, 0.3, 0.2}, down[] = {0.0, 0.2, 0.1, NAN};
	double gap;
	size_t at;
	assert_int_equal(fl_numeric_largest_gap(up, down, 4, &gap, &at, NULL), FL_OK);
	check_near("gap", 0.2, gap, 1e-15);
	assert_int_equal(at, 2);
	const double none[] = {NAN, NAN};
	assert_int_equal(fl_numeric_largest_gap(none, down, 2, &gap, &at, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_largest_gap(up, down, 0, &gap, &at, NULL), FL_E_NUMERIC);
}

static void student_and_normal(void **state) {
	(void)state;
	check_near("k = 2", 2.0, fl_numeric_student(FL_COVERAGE_2_SIGMA, INFINITY), 1e-12);
	check_near("one degree: tan(0.475 pi)", tan(0.475 * 3.14159265358979323846), fl_numeric_student(0.95, 1.0), 1e-9);
	double between = fl_numeric_student(0.95, 4.5);
	assert_true(between < fl_numeric_student(0.95, 4.0) && between > fl_numeric_student(0.95, 5.0));
	check_near("many degrees", 1.959963984540054, fl_numeric_student(0.95, 1e9), 1e-7);
	check_near("there and back", 0.975, fl_numeric_normal_cdf(fl_numeric_normal_quantile(0.975)), 1e-15);
	check_near("2 sigma", FL_COVERAGE_2_SIGMA, 1.0 - 2.0 * fl_numeric_normal_cdf(-2.0), 1e-15);
	assert_true(isnan(fl_numeric_student(0.95, 0.5)));
	assert_true(isnan(fl_numeric_student(1.0, 5.0)));
	assert_true(isnan(fl_numeric_student(NAN, 5.0)));
	assert_true(isnan(fl_numeric_normal_quantile(0.0)));
}

static void budget_adds_in_squares(void **state) {
	(void)state;
	const fl_budget_term terms[] = {{0.3, -1.0, INFINITY}, {0.2, 2.0, INFINITY}, {0.0, 5.0, 3.0}};
	fl_budget_sum sum;
	assert_int_equal(fl_numeric_budget(terms, 3, FL_COVERAGE_2_SIGMA, &sum, NULL), FL_OK);
	check_near("uc", 0.5, sum.uc, 1e-15);
	assert_true(isinf(sum.dof_effective));
	check_near("k", 2.0, sum.coverage_factor, 1e-12);
	check_near("U", 1.0, sum.expanded, 1e-12);
}

static void budget_of_one_term_keeps_its_degrees(void **state) {
	(void)state;
	for (int dof = 1; dof <= 60; dof++) {
		const fl_budget_term term = {0.037, 1.7, dof};
		fl_budget_sum sum;
		assert_int_equal(fl_numeric_budget(&term, 1, 0.95, &sum, NULL), FL_OK);
		check_close("effective degrees", dof, sum.dof_effective, 1e-13);
		check_close("k is that of the whole number", fl_numeric_student(0.95, dof), sum.coverage_factor, 1e-15);
	}
}

static void budgets_that_make_no_sense(void **state) {
	(void)state;
	fl_budget_sum sum;
	fl_budget_term term = {0.1, 1.0, INFINITY};
	assert_int_equal(fl_numeric_budget(&term, 0, 0.95, &sum, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_budget(&term, 1, 1.0, &sum, NULL), FL_E_NUMERIC);
	term.u = -0.1;
	assert_int_equal(fl_numeric_budget(&term, 1, 0.95, &sum, NULL), FL_E_NUMERIC);
	term = (fl_budget_term){0.1, NAN, INFINITY};
	assert_int_equal(fl_numeric_budget(&term, 1, 0.95, &sum, NULL), FL_E_NUMERIC);
	term = (fl_budget_term){0.1, 1.0, 0.0};
	assert_int_equal(fl_numeric_budget(&term, 1, 0.95, &sum, NULL), FL_E_NUMERIC);
	term = (fl_budget_term){0.0, 1.0, 4.0};
	assert_int_equal(fl_numeric_budget(&term, 1, 0.95, &sum, NULL), FL_OK);
	check_near("nothing uncertain", 0.0, sum.expanded, 0.0);
}

static double approach(double t_s) {
	return 10.4 + 0.9 * exp(-t_s / 25.0);
}

static void a_known_approach_is_found(void **state) {
	(void)state;
	static const double even[] = {0, 10, 20, 30, 40, 50}, uneven[] = {0, 8, 21, 30, 45, 52};
	for (int kind = 0; kind < 2; kind++)
		for (size_t n = 4; n <= 6; n++) {
			const double *t_s = kind ? uneven : even;
			double v[6];
			for (size_t i = 0; i < n; i++)
				v[i] = approach(t_s[i]);
			fl_trend trend;
			assert_int_equal(fl_numeric_trend(t_s, v, n, &trend, NULL), FL_OK);
			assert_true(trend.monotone && trend.has_end_value && trend.slope < 0.0);
			check_near("end value", 10.4, trend.end_value, kind ? 1e-5 : 1e-11);
			check_near("time constant", 25.0, trend.time_constant_s, kind ? 1e-3 : 1e-9);
			check_near("change", trend.slope * (t_s[n - 1] - t_s[0]), trend.change, 1e-15);
		}
}

static void a_ramp_has_no_end_value(void **state) {
	(void)state;
	static const double even[] = {0, 10, 20, 30}, uneven[] = {0, 8, 21, 30};
	for (int kind = 0; kind < 2; kind++) {
		const double *t_s = kind ? uneven : even;
		double v[4], away[4];
		for (int i = 0; i < 4; i++) {
			v[i] = 5.0 + 0.01 * t_s[i];
			away[i] = exp(t_s[i] / 10.0);
		}
		fl_trend trend;
		assert_int_equal(fl_numeric_trend(t_s, v, 4, &trend, NULL), FL_OK);
		assert_true(trend.monotone && !trend.has_end_value);
		check_near("slope", 0.01, trend.slope, 1e-15);
		assert_int_equal(fl_numeric_trend(t_s, away, 4, &trend, NULL), FL_OK);
		assert_true(trend.monotone && !trend.has_end_value);
	}
}

static void steady_readings(void **state) {
	(void)state;
	const double t_s[] = {0, 10, 20, 30}, same[] = {7, 7, 7, 7}, shaky[] = {7, 7.01, 7, 7.01};
	fl_trend trend;
	assert_int_equal(fl_numeric_trend(t_s, same, 4, &trend, NULL), FL_OK);
	assert_true(!trend.monotone && !trend.has_end_value);
	check_near("slope", 0.0, trend.slope, 0.0);
	assert_int_equal(fl_numeric_trend(t_s, shaky, 4, &trend, NULL), FL_OK);
	assert_false(trend.monotone);
	assert_int_equal(fl_numeric_trend(t_s, shaky, 2, &trend, NULL), FL_OK);
	assert_true(trend.monotone && !trend.has_end_value);
}

static void trends_that_are_not_determined(void **state) {
	(void)state;
	const double t_s[] = {0, 10, 10}, v[] = {1, 2, 3}, hole[] = {1, NAN, 2}, up[] = {0, 1, 2};
	fl_trend trend;
	assert_int_equal(fl_numeric_trend(t_s, v, 1, &trend, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_trend(t_s, v, 3, &trend, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_trend(up, hole, 3, &trend, NULL), FL_E_NUMERIC);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(spread_of_readings),
	    cmocka_unit_test(spread_keeps_small_scatter),
	    cmocka_unit_test(largest_gap_between_traverses),
	    cmocka_unit_test(student_and_normal),
	    cmocka_unit_test(budget_adds_in_squares),
	    cmocka_unit_test(budget_of_one_term_keeps_its_degrees),
	    cmocka_unit_test(budgets_that_make_no_sense),
	    cmocka_unit_test(a_known_approach_is_found),
	    cmocka_unit_test(a_ramp_has_no_end_value),
	    cmocka_unit_test(steady_readings),
	    cmocka_unit_test(trends_that_are_not_determined),
	};
	return cmocka_run_group_tests_name("spread", tests, NULL, NULL);
}
