/* tests/numeric/test_lines.c - straight lines and general least squares.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "random.h"

#include "foundleft/numeric.h"

#include <math.h>
#include <stdio.h>

static void a_true_line_comes_back(void **state) {
	(void)state;
	const double x[] = {0.0, 2.0, 10.0, 20.0, 35.0, 50.0};
	double y[6], u[6];
	for (int i = 0; i < 6; i++) {
		y[i] = 0.25 - 0.0125 * x[i];
		u[i] = 0.01 + 0.01 * i;
	}
	fl_line line;
	assert_int_equal(fl_numeric_line(x, y, 6, &line, NULL), FL_OK);
	check_near("intercept", 0.25, line.intercept, 1e-15);
	check_near("slope", -0.0125, line.slope, 1e-16);
	check_near("s", 0.0, line.s, 1e-15);
	assert_int_equal(line.dof, 4);
	assert_int_equal(fl_numeric_line_weighted(x, y, u, 6, &line, NULL), FL_OK);
	check_near("weighted intercept", 0.25, line.intercept, 1e-15);
	check_near("weighted slope", -0.0125, line.slope, 1e-16);
	check_near("largest residual", 0.0, line.max_abs_residual, 1e-15);
}

static void equal_weights_change_nothing_but_the_scale(void **state) {
	(void)state;
	const double x[] = {1, 2, 3, 4, 5}, y[] = {1.1, 1.9, 3.2, 3.9, 5.1}, u[] = {2, 2, 2, 2, 2};
	fl_line plain, weighted;
	assert_int_equal(fl_numeric_line(x, y, 5, &plain, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_weighted(x, y, u, 5, &weighted, NULL), FL_OK);
	check_close("slope", plain.slope, weighted.slope, 1e-14);
	check_close("intercept", plain.intercept, weighted.intercept, 1e-12);
	check_close("sum of squares", plain.sum_sq / 4.0, weighted.sum_sq, 1e-12);
	double to_u = 4.0 / (plain.s * plain.s);
	check_close("var slope", plain.var_slope * to_u, weighted.var_slope, 1e-12);
	check_close("var intercept", plain.var_intercept * to_u, weighted.var_intercept, 1e-12);
	check_close("cov", plain.cov * to_u, weighted.cov, 1e-12);
}

static void two_points_have_no_scatter(void **state) {
	(void)state;
	const double x[] = {1, 3}, y[] = {2, 8};
	fl_line line;
	assert_int_equal(fl_numeric_line(x, y, 2, &line, NULL), FL_OK);
	check_near("slope", 3.0, line.slope, 1e-15);
	check_near("intercept", -1.0, line.intercept, 1e-15);
	check_near("s", 0.0, line.s, 0.0);
	check_near("var", 0.0, line.var_slope, 0.0);
	assert_int_equal(line.dof, 0);
}

static void line_at_a_place(void **state) {
	(void)state;
	const fl_line line = {.intercept = 1.0, .slope = 2.0, .var_intercept = 0.04, .var_slope = 0.01, .cov = -0.01};
	double y, u;
	fl_numeric_line_at(&line, 3.0, &y, &u);
	check_near("value", 7.0, y, 1e-15);
	check_near("uncertainty", sqrt(0.04 - 0.06 + 0.09), u, 1e-15);
}

static void lines_that_are_not_determined(void **state) {
	(void)state;
	const double same[] = {2, 2, 2}, y[] = {1, 2, 3}, hole[] = {1, NAN, 3}, zero[] = {1, 0, 1};
	fl_line line = {.slope = 7.0};
	fl_error err = {0};
	assert_int_equal(fl_numeric_line(y, y, 1, &line, &err), FL_E_NUMERIC);
	assert_true(err.message[0] != '\0');
	assert_int_equal(fl_numeric_line(same, y, 3, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line(y, hole, 3, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_weighted(y, y, zero, 3, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_weighted(same, y, y, 3, &line, NULL), FL_E_NUMERIC);
	check_near("untouched after a refusal", 7.0, line.slope, 0.0);
}

/* The general fit with columns 1 and x is the straight line, covariance and all. */
static void general_fit_agrees_with_the_line(void **state) {
	(void)state;
	uint64_t seed = 20260414u;
	printf("seed %llu\n", (unsigned long long)seed);
	double x[30], y[30], X[60], c[2], covariance[4], s, sum_sq;
	for (int i = 0; i < 30; i++) {
		x[i] = 50.0 * uniform(&seed);
		y[i] = 0.3 + 0.02 * x[i] + 0.05 * roughly_normal(&seed);
		X[2 * i] = 1.0;
		X[2 * i + 1] = x[i];
	}
	fl_line line;
	assert_int_equal(fl_numeric_line(x, y, 30, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_least_squares(X, y, 30, 2, c, covariance, &s, &sum_sq, NULL), FL_OK);
	check_close("intercept", line.intercept, c[0], 1e-12);
	check_close("slope", line.slope, c[1], 1e-12);
	check_close("var intercept", line.var_intercept, covariance[0], 1e-11);
	check_close("cov", line.cov, covariance[1], 1e-11);
	check_close("cov, mirrored", line.cov, covariance[2], 1e-11);
	check_close("var slope", line.var_slope, covariance[3], 1e-11);
	check_close("s", line.s, s, 1e-12);
	check_close("sum of squares", line.sum_sq, sum_sq, 1e-12);
}

static void as_many_points_as_coefficients(void **state) {
	(void)state;
	const double X[] = {1, 1, 1, 1, 2, 4, 1, 3, 9}, y[] = {6, 11, 18};
	double c[3], covariance[9], s, sum_sq;
	assert_int_equal(fl_numeric_least_squares(X, y, 3, 3, c, covariance, &s, &sum_sq, NULL), FL_OK);
	check_near("constant", 3.0, c[0], 1e-12);
	check_near("linear", 2.0, c[1], 1e-12);
	check_near("quadratic", 1.0, c[2], 1e-12);
	check_near("s", 0.0, s, 0.0);
	check_near("covariance", 0.0, covariance[4], 0.0);
}

static void fits_that_are_not_determined(void **state) {
	(void)state;
	const double twins[] = {1, 2, 1, 2, 1, 2, 1, 2}, y[] = {1, 2, 3, 4}, hole[] = {1, 2, 3, INFINITY};
	double c[4], covariance[16], s, sum_sq;
	assert_int_equal(fl_numeric_least_squares(twins, y, 4, 2, c, covariance, &s, &sum_sq, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_least_squares(twins, y, 2, 4, c, covariance, &s, &sum_sq, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_least_squares(twins, y, 4, 0, c, covariance, &s, &sum_sq, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_least_squares(y, hole, 4, 1, c, covariance, &s, &sum_sq, NULL), FL_E_NUMERIC);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(a_true_line_comes_back),         cmocka_unit_test(equal_weights_change_nothing_but_the_scale),
	    cmocka_unit_test(two_points_have_no_scatter),     cmocka_unit_test(line_at_a_place),
	    cmocka_unit_test(lines_that_are_not_determined),  cmocka_unit_test(general_fit_agrees_with_the_line),
	    cmocka_unit_test(as_many_points_as_coefficients), cmocka_unit_test(fits_that_are_not_determined),
	};
	return cmocka_run_group_tests_name("lines", tests, NULL, NULL);
}
