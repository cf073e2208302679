/* tests/numeric/test_linearity.c - the three reference lines, against brute force on random data.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "random.h"

#include "foundleft/numeric.h"

#include <math.h>
#include <stdio.h>

static const uint64_t first_seed = 4711u;

static double largest_deviation(const double *x, const double *y, size_t n, double intercept, double slope) {
	double largest = 0.0;
	for (size_t i = 0; i < n; i++)
		largest = fmax(largest, fabs(y[i] - intercept - slope * x[i]));
	return largest;
}

/* Half the height of the band about a slope: the best that any intercept can do with it. */
static double half_band(const double *x, const double *y, size_t n, double slope) {
	double low = INFINITY, high = -INFINITY;
	for (size_t i = 0; i < n; i++) {
		low = fmin(low, y[i] - slope * x[i]);
		high = fmax(high, y[i] - slope * x[i]);
	}
	return (high - low) / 2.0;
}

static double about_low_end(const double *x, const double *y, size_t n, double slope) {
	return largest_deviation(x, y, n, y[0] - slope * x[0], slope);
}

/* The smallest value of a convex function of the slope, by thirds. */
static double smallest(double (*f)(const double *, const double *, size_t, double), const double *x, const double *y,
                       size_t n) {
	double low = -1e3, high = 1e3;
	for (int i = 0; i < 300; i++) {
		double a = low + (high - low) / 3.0, b = high - (high - low) / 3.0;
		if (f(x, y, n, a) < f(x, y, n, b))
			high = b;
		else
			low = a;
	}
	return f(x, y, n, (low + high) / 2.0);
}

static void check_line(const char *name, const fl_reference_line *line, const double *x, const double *y, size_t n) {
	check_near(name, largest_deviation(x, y, n, line->intercept, line->slope), line->max_abs, 1e-12);
	assert_in_range(line->at, 0, n - 1);
	check_near(name, line->max_abs, fabs(y[line->at] - line->intercept - line->slope * x[line->at]), 1e-12);
}

static void check_all_three(const double *x, const double *y, size_t n) {
	fl_reference_line independent, terminal, zero_based;
	assert_int_equal(fl_numeric_line_independent(x, y, n, &independent, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_terminal(x, y, n, &terminal, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_zero_based(x, y, n, &zero_based, NULL), FL_OK);
	check_line("independent", &independent, x, y, n);
	check_line("terminal", &terminal, x, y, n);
	check_line("zero-based", &zero_based, x, y, n);
	check_near("independent against thirds", smallest(half_band, x, y, n), independent.max_abs, 1e-9);
	check_near("zero-based against thirds", smallest(about_low_end, x, y, n), zero_based.max_abs, 1e-9);
	assert_true(independent.max_abs <= zero_based.max_abs + 1e-12);
	assert_true(zero_based.max_abs <= terminal.max_abs + 1e-12);
}

static void random_errors(void **state) {
	(void)state;
	uint64_t seed = first_seed;
	printf("seed %llu\n", (unsigned long long)seed);
	for (int round = 0; round < 400; round++) {
		size_t n = 2 + (size_t)(10.0 * uniform(&seed));
		double x[12], y[12], at = 0.0;
		for (size_t i = 0; i < n; i++) {
			x[i] = at;
			at += 0.05 + uniform(&seed);
			y[i] = 0.2 * roughly_normal(&seed) + 0.3 * x[i];
		}
		check_all_three(x, y, n);
	}
}

/* Steps of one tenth give many equal deviations, and up and down readings stand at the same place. */
static void ties_and_repeated_places(void **state) {
	(void)state;
	uint64_t seed = first_seed + 1;
	printf("seed %llu\n", (unsigned long long)seed);
	for (int round = 0; round < 400; round++) {
		size_t n = 3 + (size_t)(9.0 * uniform(&seed));
		double x[12], y[12];
		for (size_t i = 0; i < n; i++) {
			x[i] = i == 0 ? 0.0 : 1.0 + floor((double)(i - 1) / 2.0); /* one at the low end, then pairs */
			y[i] = floor(10.0 * uniform(&seed)) / 10.0;
		}
		check_all_three(x, y, n);
	}
}

static void a_line_has_no_deviation(void **state) {
	(void)state;
	const double x[] = {0, 1, 2, 5}, y[] = {1, 3, 5, 11};
	fl_reference_line line;
	assert_int_equal(fl_numeric_line_independent(x, y, 4, &line, NULL), FL_OK);
	check_near("slope", 2.0, line.slope, 1e-15);
	check_near("intercept", 1.0, line.intercept, 1e-15);
	check_near("deviation", 0.0, line.max_abs, 1e-15);
	assert_int_equal(fl_numeric_line_zero_based(x, y, 4, &line, NULL), FL_OK);
	check_near("zero-based slope", 2.0, line.slope, 1e-15);
}

static void three_points_by_hand(void **state) {
	(void)state;
	const double x[] = {2, 0, 1}, y[] = {0, 0, 1}; /* order does not matter */
	fl_reference_line line;
	assert_int_equal(fl_numeric_line_independent(x, y, 3, &line, NULL), FL_OK);
	check_near("independent: halfway", 0.5, line.max_abs, 1e-15);
	check_near("independent: level", 0.0, line.slope, 1e-15);
	assert_int_equal(fl_numeric_line_terminal(x, y, 3, &line, NULL), FL_OK);
	check_near("terminal", 1.0, line.max_abs, 1e-15);
	assert_int_equal(line.at, 2);
	assert_int_equal(fl_numeric_line_zero_based(x, y, 3, &line, NULL), FL_OK);
	check_near("zero-based: slope 1/3 leaves 2/3 and -2/3", 2.0 / 3.0, line.max_abs, 1e-15);
}

static void several_readings_at_the_ends(void **state) {
	(void)state;
	const double x[] = {0, 0, 1, 2, 2}, y[] = {-1, 1, 0, 3, 5};
	fl_reference_line line;
	assert_int_equal(fl_numeric_line_terminal(x, y, 5, &line, NULL), FL_OK);
	check_near("through the mean of the low end", 0.0, line.intercept, 1e-15);
	check_near("through the mean of the high end", 2.0, line.slope, 1e-15);
	check_near("deviation", 2.0, line.max_abs, 1e-15);
}

static void linearity_that_is_not_determined(void **state) {
	(void)state;
	const double same[] = {1, 1, 1}, y[] = {1, 2, 3}, hole[] = {1, NAN, 2};
	fl_reference_line line = {.slope = 7.0};
	assert_int_equal(fl_numeric_line_independent(y, y, 1, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_independent(same, y, 3, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_terminal(same, y, 3, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_zero_based(y, hole, 3, &line, NULL), FL_E_NUMERIC);
	check_near("untouched after a refusal", 7.0, line.slope, 0.0);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(random_errors),
	    cmocka_unit_test(ties_and_repeated_places),
	    cmocka_unit_test(a_line_has_no_deviation),
	    cmocka_unit_test(three_points_by_hand),
	    cmocka_unit_test(several_readings_at_the_ends),
	    cmocka_unit_test(linearity_that_is_not_determined),
	};
	return cmocka_run_group_tests_name("linearity", tests, NULL, NULL);
}
