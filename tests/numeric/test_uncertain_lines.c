/* tests/numeric/test_uncertain_lines.c - lines with all points uncertain or correlated, lack of fit, bands, inverse.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Published values are held in tests/published (york, iso_28037, nist_pontius, massart, gum); here is what follows from
 * the theory, and what must be refused.
 */
#include "check.h"

#include "foundleft/numeric.h"
#include "random.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <string.h>

enum { N = 6 };
static const double x[N] = {0.12, 1.07, 1.93, 3.11, 4.02, 4.88};
static const double y[N] = {1.31, 2.02, 3.35, 4.26, 5.61, 6.35};

static void same_line(const fl_line *want, const fl_line *got, double relative) {
	check_close("intercept", want->intercept, got->intercept, relative);
	check_close("slope", want->slope, got->slope, relative);
	check_close("var intercept", want->var_intercept, got->var_intercept, relative);
	check_close("var slope", want->var_slope, got->var_slope, relative);
	check_close("cov", want->cov, got->cov, relative);
	check_close("sum_sq", want->sum_sq, got->sum_sq, relative);
	check_close("largest residual", want->max_abs_residual, got->max_abs_residual, relative);
	assert_int_equal(want->dof, got->dof);
}

/* With x known the methods all come down to the weighted line. */
static void known_x_gives_the_weighted_line(void **state) {
	(void)state;
	const double uy[N] = {0.11, 0.2, 0.15, 0.3, 0.12, 0.25}, ux[N] = {0};
	double covariance[N * N] = {0};
	for (int i = 0; i < N; i++)
		covariance[i * N + i] = uy[i] * uy[i];
	fl_line weighted, both, correlated;
	assert_int_equal(fl_numeric_line_weighted(x, y, uy, N, &weighted, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_both(x, y, ux, uy, N, &both, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_correlated(x, y, covariance, N, &correlated, NULL), FL_OK);
	same_line(&weighted, &both, 1e-11);
	same_line(&weighted, &correlated, 1e-11);
}

/* A line fitted to exchanged variables is the same line turned over. */
static void exchanging_x_and_y_turns_the_line_over(void **state) {
	(void)state;
	const double ux[N] = {0.1, 0.02, 0.15, 0.1, 0.2, 0.05}, uy[N] = {0.11, 0.2, 0.0, 0.3, 0.12, 0.25};
	fl_line line, turned;
	assert_int_equal(fl_numeric_line_both(x, y, ux, uy, N, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_both(y, x, uy, ux, N, &turned, NULL), FL_OK);
	check_close("slope", 1.0 / line.slope, turned.slope, 1e-10);
	check_close("intercept", -line.intercept / line.slope, turned.intercept, 1e-10);
	check_close("chi squared", line.sum_sq, turned.sum_sq, 1e-10);
}

/* Equal uncertainties in both: the line through the mean along the first principal axis (Pearson 1901), closed form. */
static void equal_uncertainties_give_the_principal_axis(void **state) {
	(void)state;
	double u[N], xm = 0, ym = 0, sxx = 0, syy = 0, sxy = 0;
	for (int i = 0; i < N; i++) {
		u[i] = 0.2;
		xm += x[i] / N;
		ym += y[i] / N;
	}
	for (int i = 0; i < N; i++) {
		sxx += (x[i] - xm) * (x[i] - xm);
		syy += (y[i] - ym) * (y[i] - ym);
		sxy += (x[i] - xm) * (y[i] - ym);
	}
	double slope = (syy - sxx + sqrt((syy - sxx) * (syy - sxx) + 4.0 * sxy * sxy)) / (2.0 * sxy);
	fl_line line;
	assert_int_equal(fl_numeric_line_both(x, y, u, u, N, &line, NULL), FL_OK);
	check_close("slope", slope, line.slope, 1e-11);
	check_close("intercept", ym - slope * xm, line.intercept, 1e-11);
}

/* A covariance as a calibration has it: own parts, an error all x share and one all y share, and x with y. */
static void full_covariance(double *u, double shared_x, double shared_y, double own_xy) {
	memset(u, 0, 4 * N * N * sizeof *u);
	for (int i = 0; i < N; i++)
		for (int k = 0; k < N; k++) {
			u[i * 2 * N + k] = shared_x * shared_x + (i == k ? 0.0025 * (1.0 + 0.1 * i) : 0.0);
			u[(N + i) * 2 * N + N + k] = shared_y * shared_y + (i == k ? 0.01 * (1.0 + 0.2 * i) : 0.0);
			if (i == k)
				u[i * 2 * N + N + k] = u[(N + k) * 2 * N + i] = own_xy;
		}
}

static void general_method_agrees_with_the_plain_one(void **state) {
	(void)state;
	double covariance[4 * N * N], ux[N], uy[N], x_best[N];
	full_covariance(covariance, 0.0, 0.0, 0.0);
	for (int i = 0; i < N; i++) {
		ux[i] = sqrt(covariance[i * 2 * N + i]);
		uy[i] = sqrt(covariance[(N + i) * 2 * N + N + i]);
	}
	fl_line both, distance;
	assert_int_equal(fl_numeric_line_both(x, y, ux, uy, N, &both, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &distance, x_best, NULL), FL_OK);
	check_close("intercept", both.intercept, distance.intercept, 1e-10);
	check_close("slope", both.slope, distance.slope, 1e-10);
	check_close("chi squared", both.sum_sq, distance.sum_sq, 1e-10);
	/* Both linearise about x*, so their covariances are the same. */
	check_close("var slope", both.var_slope, distance.var_slope, 1e-9);
	check_close("var intercept", both.var_intercept, distance.var_intercept, 1e-9);
	for (int i = 0; i < N; i++) /* x* divides the miss by the squares of the uncertainties */
		check_near("x*",
		           x[i] + both.slope * ux[i] * ux[i] * (y[i] - both.intercept - both.slope * x[i]) /
		                      (uy[i] * uy[i] + both.slope * both.slope * ux[i] * ux[i]),
		           x_best[i], 1e-9);
}

/* An error that all y share moves the intercept alone: its variance grows by the square, the slope stays as it is. One
 * that all x share does so by the slope. Systematic parts don't average down. */
static void shared_errors_do_not_average_down(void **state) {
	(void)state;
	double covariance[4 * N * N];
	fl_line own, with_y, with_x;
	full_covariance(covariance, 0.0, 0.0, 0.001);
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &own, NULL, NULL), FL_OK);
	full_covariance(covariance, 0.0, 0.5, 0.001);
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &with_y, NULL, NULL), FL_OK);
	full_covariance(covariance, 0.4, 0.0, 0.001);
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &with_x, NULL, NULL), FL_OK);
	check_close("slope", own.slope, with_y.slope, 1e-9);
	check_close("var slope", own.var_slope, with_y.var_slope, 1e-9);
	check_close("var intercept", own.var_intercept + 0.25, with_y.var_intercept, 1e-9);
	check_close("chi squared", own.sum_sq, with_y.sum_sq, 1e-9);
	check_close("var slope, x", own.var_slope, with_x.var_slope, 1e-9);
	check_close("var intercept, x", own.var_intercept + 0.16 * own.slope * own.slope, with_x.var_intercept, 1e-9);
}

/* A simulated truth, many times: the covariance stated is the scatter found, and chi-squared has its mean. */
static void stated_covariance_is_what_happens(void **state) {
	(void)state;
	enum { TIMES = 4000 };
	uint64_t seed = 17;
	double covariance[4 * N * N], sum_a = 0, sum_b = 0, aa = 0, bb = 0, ab = 0, chi = 0;
	full_covariance(covariance, 0.05, 0.08, 0.0);
	fl_line line = {0};
	for (int t = 0; t < TIMES; t++) {
		double noisy_x[N], noisy_y[N];
		double all_x = 0.05 * roughly_normal(&seed), all_y = 0.08 * roughly_normal(&seed);
		for (int i = 0; i < N; i++) {
			noisy_x[i] = i + all_x + sqrt(0.0025 * (1.0 + 0.1 * i)) * roughly_normal(&seed);
			noisy_y[i] = 2.0 + 1.5 * i + all_y + sqrt(0.01 * (1.0 + 0.2 * i)) * roughly_normal(&seed);
		}
		assert_int_equal(fl_numeric_line_distance(noisy_x, noisy_y, covariance, N, &line, NULL, NULL), FL_OK);
		double a = line.intercept - 2.0, b = line.slope - 1.5;
		sum_a += a / TIMES;
		sum_b += b / TIMES;
		aa += a * a / TIMES;
		bb += b * b / TIMES;
		ab += a * b / TIMES;
		chi += line.sum_sq / TIMES;
	}
	/* 5 standard deviations of chance, and the bias of second order in the noise. */
	double k = 5.0 * sqrt(2.0 / TIMES);
	check_near("intercept", 0.0, sum_a, 5.0 * sqrt(line.var_intercept / TIMES) + 0.005);
	check_near("slope", 0.0, sum_b, 5.0 * sqrt(line.var_slope / TIMES) + 0.002);
	check_close("var intercept", line.var_intercept, aa, k);
	check_close("var slope", line.var_slope, bb, k);
	check_near("cov", line.cov, ab, k * sqrt(line.var_intercept * line.var_slope));
	check_close("chi squared", 4.0, chi, 5.0 * sqrt(8.0 / TIMES) / 4.0 + 0.01);
}

/* A far origin must cost no digits. */
static void far_origin_costs_nothing(void **state) {
	(void)state;
	double covariance[4 * N * N], far_x[N], far_y[N], ux[N], uy[N];
	full_covariance(covariance, 0.1, 0.1, 0.0);
	for (int i = 0; i < N; i++) {
		far_x[i] = x[i] + 1048576.0;
		far_y[i] = y[i] - 1048576.0;
		ux[i] = uy[i] = 0.1;
	}
	fl_line near_line, far_line;
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &near_line, NULL, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_distance(far_x, far_y, covariance, N, &far_line, NULL, NULL), FL_OK);
	check_close("slope", near_line.slope, far_line.slope, 1e-8);
	check_close("var slope", near_line.var_slope, far_line.var_slope, 1e-8);
	assert_int_equal(fl_numeric_line_both(x, y, ux, uy, N, &near_line, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_both(far_x, far_y, ux, uy, N, &far_line, NULL), FL_OK);
	check_close("slope, both", near_line.slope, far_line.slope, 1e-8);
}

static void refuses_what_determines_no_line(void **state) {
	(void)state;
	const double good[N] = {0.1, 0.1, 0.1, 0.1, 0.1, 0.1}, none[N] = {0}, negative[N] = {0.1, -0.1, 0, 0, 0, 0};
	const double same[N] = {2, 2, 2, 2, 2, 2}, hole[N] = {0, 1, NAN, 3, 4, 5};
	double covariance[4 * N * N];
	fl_line line;
	fl_error err = {0};
	assert_int_equal(fl_numeric_line_both(x, y, none, none, N, &line, &err), FL_E_NUMERIC);
	assert_non_null(strstr(err.message, "point 1"));
	assert_int_equal(fl_numeric_line_both(x, y, negative, good, N, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_both(same, y, good, good, N, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_both(hole, y, good, good, N, &line, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_line_both(x, y, good, good, 1, &line, NULL), FL_E_NUMERIC);
	full_covariance(covariance, 0.0, 0.0, 0.5); /* more covariance than variance */
	err = (fl_error){0};
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &line, NULL, &err), FL_E_NUMERIC);
	assert_non_null(strstr(err.message, "positive definite"));
	full_covariance(covariance, 0.0, 0.0, 0.0);
	covariance[1] = 0.001;
	err = (fl_error){0};
	assert_int_equal(fl_numeric_line_distance(x, y, covariance, N, &line, NULL, &err), FL_E_NUMERIC);
	assert_non_null(strstr(err.message, "symmetric"));
	assert_int_equal(fl_numeric_line_correlated(x, y, none, 2, &line, NULL), FL_E_NUMERIC);
}

static void chi_squared_tail(void **state) {
	(void)state;
	check_close("2 degrees: exp(-x/2)", exp(-1.7), fl_numeric_chi_squared_tail(3.4, 2.0), 1e-13);
	check_close("1 degree: two-sided normal", 0.05,
	            fl_numeric_chi_squared_tail(1.959963984540054 * 1.959963984540054, 1.0), 1e-12);
	assert_true(isnan(fl_numeric_chi_squared_tail(1.0, 0.0)));
}

/* ---- lack of fit ---- */

/* By hand: places 1, 2, 3 with two readings each; pure sum 0.02 + 0.08 + 0.02 = 0.12 on 3 degrees. The means 1.1, 2.4,
 * 3.1 miss the line 0.2 + x by -0.1, 0.2, -0.1: lack 2 (0.01 + 0.04 + 0.01) = 0.12 on 1 degree. */
static void lack_of_fit_by_hand(void **state) {
	(void)state;
	const double at[] = {2, 1, 3, 1, 2, 3}, read[] = {2.6, 1.0, 3.2, 1.2, 2.2, 3.0};
	double fitted[6];
	for (int i = 0; i < 6; i++)
		fitted[i] = 0.2 + at[i];
	fl_lack_of_fit lack;
	assert_int_equal(fl_numeric_lack_of_fit(at, read, fitted, 6, 2, &lack, NULL), FL_OK);
	check_near("pure", 0.12, lack.sum_sq_pure, 1e-15);
	check_near("lack", 0.12, lack.sum_sq_lack, 1e-15);
	assert_true(lack.dof_lack == 1 && lack.dof_pure == 3);
	check_near("F", 3.0, lack.f, 1e-13);
	check_near("probability: that of t = sqrt(3)", 2.0 * gsl_cdf_tdist_Q(sqrt(3.0), 3.0), lack.probability, 1e-12);
	assert_int_equal(fl_numeric_lack_of_fit(at, read, fitted, 6, 3, &lack, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_lack_of_fit(at, read, fitted, 3, 2, &lack, NULL), FL_E_NUMERIC);
	const double equal[] = {2, 1, 3, 1, 2, 3};
	assert_int_equal(fl_numeric_lack_of_fit(at, equal, fitted, 6, 2, &lack, NULL), FL_OK);
	assert_true(isinf(lack.f) && lack.probability == 0.0);
}

/* F has the distribution it is judged by: of 2000 straight truths about 5 % pass the 5 % limit, of bent ones most do.
 */
static void lack_of_fit_fires_when_it_should(void **state) {
	(void)state;
	enum { TIMES = 2000 };
	uint64_t seed = 23;
	int fired[2] = {0};
	for (int bent = 0; bent < 2; bent++)
		for (int t = 0; t < TIMES; t++) {
			double at[18], read[18], fitted[18];
			for (int i = 0; i < 18; i++) {
				at[i] = i % 6;
				read[i] = 1.0 + 2.0 * at[i] + bent * 0.1 * at[i] * at[i] + 0.3 * roughly_normal(&seed);
			}
			fl_line line;
			fl_lack_of_fit lack;
			assert_int_equal(fl_numeric_line(at, read, 18, &line, NULL), FL_OK);
			for (int i = 0; i < 18; i++)
				fitted[i] = line.intercept + line.slope * at[i];
			assert_int_equal(fl_numeric_lack_of_fit(at, read, fitted, 18, 2, &lack, NULL), FL_OK);
			fired[bent] += lack.probability < 0.05;
		}
	check_near("false alarms", 0.05 * TIMES, fired[0], 5.0 * sqrt(0.05 * 0.95 * TIMES));
	assert_true(fired[1] > TIMES / 2);
}

/* ---- bands ---- */

static void bands_by_hand(void **state) {
	(void)state;
	fl_line line;
	fl_bands bands;
	assert_int_equal(fl_numeric_line(x, y, N, &line, NULL), FL_OK);
	double xm = 0.0, sxx = 0.0, t = fl_numeric_student(0.95, 4.0);
	for (int i = 0; i < N; i++)
		xm += x[i] / N;
	for (int i = 0; i < N; i++)
		sxx += (x[i] - xm) * (x[i] - xm);
	double at = 7.3, lever = 1.0 / N + (at - xm) * (at - xm) / sxx;
	assert_int_equal(fl_numeric_bands(&line, at, 0.95, 3, &bands, NULL), FL_OK);
	check_close("y", line.intercept + line.slope * at, bands.y, 1e-13);
	check_close("confidence", t * line.s * sqrt(lever), bands.confidence, 1e-11);
	check_close("prediction of a mean of three", t * line.s * sqrt(1.0 / 3.0 + lever), bands.prediction, 1e-11);
	/* F(0.95; 2, 4) = 6.94427190999916, closed form: (1 - p)^(-2/4) = 1 + 2 F/4. */
	double f = 2.0 * (1.0 / sqrt(0.05) - 1.0);
	check_close("simultaneous", sqrt(2.0 * f) * line.s * sqrt(lever), bands.simultaneous, 1e-11);
	fl_line two;
	assert_int_equal(fl_numeric_line(x, y, 2, &two, NULL), FL_OK);
	assert_int_equal(fl_numeric_bands(&two, at, 0.95, 1, &bands, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_bands(&line, at, 1.0, 1, &bands, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_bands(&line, at, 0.95, 0, &bands, NULL), FL_E_NUMERIC);
}

/* The simultaneous band holds the true line everywhere in 95 of 100 cases, the other only at each place. */
static void bands_cover_as_often_as_stated(void **state) {
	(void)state;
	enum { TIMES = 4000 };
	uint64_t seed = 31;
	int everywhere = 0, here = 0, next = 0;
	for (int t = 0; t < TIMES; t++) {
		double read[N];
		fl_line line;
		fl_bands bands;
		bool all = true;
		for (int i = 0; i < N; i++)
			read[i] = 2.0 - 0.5 * x[i] + 0.1 * roughly_normal(&seed);
		assert_int_equal(fl_numeric_line(x, read, N, &line, NULL), FL_OK);
		for (double at = -40.0; at <= 40.0; at += 0.25) {
			assert_int_equal(fl_numeric_bands(&line, at, 0.95, 1, &bands, NULL), FL_OK);
			all = all && fabs(bands.y - (2.0 - 0.5 * at)) <= bands.simultaneous;
		}
		everywhere += all;
		assert_int_equal(fl_numeric_bands(&line, 3.0, 0.95, 1, &bands, NULL), FL_OK);
		here += fabs(bands.y - 0.5) <= bands.confidence;
		next += fabs(bands.y - (0.5 + 0.1 * roughly_normal(&seed))) <= bands.prediction;
	}
	double chance = 5.0 * sqrt(0.05 * 0.95 * TIMES);
	check_near("everywhere", 0.95 * TIMES, everywhere, chance);
	check_near("at one place", 0.95 * TIMES, here, chance);
	check_near("the next reading", 0.95 * TIMES, next, chance);
}

/* ---- inverse ---- */

/* At Fieller's ends the prediction limits pass through y: that is how they are defined. */
static void fieller_inverts_the_prediction_limits(void **state) {
	(void)state;
	fl_line line;
	fl_inverse inverse;
	fl_bands bands;
	assert_int_equal(fl_numeric_line(x, y, N, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_inverse(&line, 5.0, 2, 0.9, &inverse, NULL), FL_OK);
	assert_true(inverse.bounded && inverse.low < inverse.x && inverse.x < inverse.high);
	assert_int_equal(fl_numeric_bands(&line, inverse.low, 0.9, 2, &bands, NULL), FL_OK);
	check_close("low", 5.0, bands.y + bands.prediction, 1e-12);
	assert_int_equal(fl_numeric_bands(&line, inverse.high, 0.9, 2, &bands, NULL), FL_OK);
	check_close("high", 5.0, bands.y - bands.prediction, 1e-12);
	/* With a steep slope both intervals are nearly the same. */
	assert_true(inverse.g < 0.05);
	check_close("half", (inverse.high - inverse.low) / 2.0, inverse.half, 0.02);
}

/* A falling line: the interval still runs from low to high. A polynomial of degree 1 gives the same. */
static void falling_lines_and_polynomials_agree(void **state) {
	(void)state;
	double down[N], X[2 * N], c[2], covariance[4], s, sum_sq;
	for (int i = 0; i < N; i++) {
		down[i] = -y[i];
		X[2 * i] = 1.0;
		X[2 * i + 1] = x[i];
	}
	fl_line line;
	fl_inverse straight, curve;
	assert_int_equal(fl_numeric_line(x, down, N, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_inverse(&line, -3.7, 1, 0.95, &straight, NULL), FL_OK);
	assert_int_equal(fl_numeric_least_squares(X, down, N, 2, c, covariance, &s, &sum_sq, NULL), FL_OK);
	assert_int_equal(fl_numeric_inverse_curve(c, covariance, 2, s, 4.0, -3.7, 1, 0.95, -5.0, 10.0, &curve, NULL),
	                 FL_OK);
	check_close("x", straight.x, curve.x, 1e-12);
	check_close("u", straight.u, curve.u, 1e-11);
	check_close("low", straight.low, curve.low, 1e-11);
	check_close("high", straight.high, curve.high, 1e-11);
	assert_true(straight.low < straight.x && straight.x < straight.high && curve.bounded);
	/* Limits that lie outside the range are said to be unknown. */
	assert_int_equal(
	    fl_numeric_inverse_curve(c, covariance, 2, s, 4.0, -3.7, 1, 0.95, straight.x - 0.01, 10.0, &curve, NULL),
	    FL_OK);
	assert_true(!curve.bounded && isinf(curve.low) && curve.high > curve.x);
	assert_int_equal(fl_numeric_inverse_curve(c, covariance, 2, s, 4.0, 99.0, 1, 0.95, 0.0, 5.0, &curve, NULL),
	                 FL_E_NUMERIC);
}

static void poor_slope_is_unbounded(void **state) {
	(void)state;
	const double noise[N] = {1.0, -0.8, 0.9, -1.1, 1.2, -0.7};
	fl_line line;
	fl_inverse inverse;
	assert_int_equal(fl_numeric_line(x, noise, N, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_inverse(&line, 0.3, 1, 0.95, &inverse, NULL), FL_OK);
	assert_true(!inverse.bounded && inverse.g >= 1.0 && isinf(inverse.low) && isinf(inverse.high));
	const double level[N] = {2, 2, 2, 2, 2, 2};
	assert_int_equal(fl_numeric_line(x, level, N, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_inverse(&line, 2.0, 1, 0.95, &inverse, NULL), FL_E_NUMERIC);
}

/* Known covariance: by the law of propagation, and y without uncertainty leaves the line's own. */
static void inverse_with_known_covariance(void **state) {
	(void)state;
	const fl_line line = {
	    .intercept = 0.2, .slope = 1.6, .var_intercept = 0.04, .var_slope = 0.0025, .cov = -0.006, .dof = 4};
	fl_inverse inverse;
	assert_int_equal(fl_numeric_inverse_known(&line, 5.0, 0.3, FL_COVERAGE_2_SIGMA, &inverse, NULL), FL_OK);
	double x0 = 3.0, variance = 0.09 + 0.04 + 2.0 * x0 * -0.006 + x0 * x0 * 0.0025;
	check_close("x", x0, inverse.x, 1e-13);
	check_close("u", sqrt(variance) / 1.6, inverse.u, 1e-13);
	check_close("half", 2.0 * inverse.u, inverse.half, 1e-12);
	assert_int_equal(fl_numeric_inverse_known(&line, 5.0, 0.0, 0.95, &inverse, NULL), FL_OK);
	check_close("u of the line alone", sqrt(variance - 0.09) / 1.6, inverse.u, 1e-12);
	assert_int_equal(fl_numeric_inverse_known(&line, 5.0, -1.0, 0.95, &inverse, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_inverse_known(&line, NAN, 0.1, 0.95, &inverse, NULL), FL_E_NUMERIC);
}

/* Fieller's interval covers the true x as often as stated, also where the slope is poor and the plain one fails. */
static void fieller_covers_as_often_as_stated(void **state) {
	(void)state;
	enum { TIMES = 4000 };
	uint64_t seed = 41;
	int covered = 0, unbounded = 0;
	for (int t = 0; t < TIMES; t++) {
		double read[N];
		fl_line line;
		fl_inverse inverse;
		for (int i = 0; i < N; i++)
			read[i] = 1.0 + 0.5 * x[i] + 0.4 * roughly_normal(&seed);
		assert_int_equal(fl_numeric_line(x, read, N, &line, NULL), FL_OK);
		double new_reading = 1.0 + 0.5 * 4.0 + 0.4 * roughly_normal(&seed);
		assert_int_equal(fl_numeric_inverse(&line, new_reading, 1, 0.95, &inverse, NULL), FL_OK);
		covered += inverse.low <= 4.0 && 4.0 <= inverse.high;
		unbounded += !inverse.bounded;
	}
	/* Where it is unbounded the whole line is given, which covers a little too often: up to that share. */
	assert_true(covered > 0.95 * TIMES - 5.0 * sqrt(0.05 * 0.95 * TIMES));
	assert_true(covered < 0.95 * TIMES + 5.0 * sqrt(0.05 * 0.95 * TIMES) + 0.05 * unbounded + 1);
	assert_true(unbounded > 0);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(known_x_gives_the_weighted_line),
	    cmocka_unit_test(exchanging_x_and_y_turns_the_line_over),
	    cmocka_unit_test(equal_uncertainties_give_the_principal_axis),
	    cmocka_unit_test(general_method_agrees_with_the_plain_one),
	    cmocka_unit_test(shared_errors_do_not_average_down),
	    cmocka_unit_test(stated_covariance_is_what_happens),
	    cmocka_unit_test(far_origin_costs_nothing),
	    cmocka_unit_test(refuses_what_determines_no_line),
	    cmocka_unit_test(chi_squared_tail),
	    cmocka_unit_test(lack_of_fit_by_hand),
	    cmocka_unit_test(lack_of_fit_fires_when_it_should),
	    cmocka_unit_test(bands_by_hand),
	    cmocka_unit_test(bands_cover_as_often_as_stated),
	    cmocka_unit_test(fieller_inverts_the_prediction_limits),
	    cmocka_unit_test(falling_lines_and_polynomials_agree),
	    cmocka_unit_test(poor_slope_is_unbounded),
	    cmocka_unit_test(inverse_with_known_covariance),
	    cmocka_unit_test(fieller_covers_as_often_as_stated),
	};
	return cmocka_run_group_tests_name("numeric uncertain lines", tests, NULL, NULL);
}
