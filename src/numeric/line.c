/* numeric/line.c - straight lines y = intercept + slope x by least squares, ordinary and weighted.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <gsl/gsl_fit.h>
#include <math.h>

static double largest_residual(const double *x, const double *y, size_t n, double intercept, double slope) {
	double largest = 0.0;
	for (size_t i = 0; i < n; i++)
		largest = fmax(largest, fabs(y[i] - intercept - slope * x[i]));
	return largest;
}

static fl_status check_points(const double *x, const double *y, size_t n, fl_error *err) {
	if (n < 2)
		return fl_fail(err, FL_E_NUMERIC, "a line needs at least two points, not %zu", n);
	if (!fl_numeric_all_finite(x, n) || !fl_numeric_all_finite(y, n))
		return fl_fail(err, FL_E_NUMERIC, "a line through points that are not all numbers");
	if (fl_numeric_all_equal(x, n))
		return fl_fail(err, FL_E_NUMERIC, "all points stand at the same place: no line is determined");
	return FL_OK;
}

fl_status fl_numeric_line(const double *x, const double *y, size_t n, fl_line *out, fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	fl_line line = {.dof = (int)n - 2};
	gsl_fit_linear(x, 1, y, 1, n, &line.intercept, &line.slope, &line.var_intercept, &line.cov, &line.var_slope,
	               &line.sum_sq);
	if (line.dof == 0) /* the line goes through both points: nothing is left to judge its scatter by */
		line.var_intercept = line.var_slope = line.cov = line.sum_sq = 0.0;
	else
		line.s = sqrt(line.sum_sq / line.dof);
	line.max_abs_residual = largest_residual(x, y, n, line.intercept, line.slope);
	if (!isfinite(line.slope) || !isfinite(line.intercept))
		return fl_fail(err, FL_E_NUMERIC, "the points are too large or too close together for a line");
	*out = line;
	return FL_OK;
}

/* Weighted sums about the weighted mean. GSL's gsl_fit_wlinear takes weights in an array, which would need memory;
 * and its covariance is the same. */
typedef struct weighted_sums {
	double w, x_mean, y_mean, sxx, sxy;
} weighted_sums;

static weighted_sums weigh(const double *x, const double *y, const double *u, size_t n) {
	weighted_sums sums = {0};
	for (size_t i = 0; i < n; i++) {
		double w = 1.0 / (u[i] * u[i]);
		sums.w += w;
		sums.x_mean += (x[i] - sums.x_mean) * (w / sums.w);
		sums.y_mean += (y[i] - sums.y_mean) * (w / sums.w);
	}
	for (size_t i = 0; i < n; i++) {
		double w = 1.0 / (u[i] * u[i]), dx = x[i] - sums.x_mean;
		sums.sxx += w * dx * dx;
		sums.sxy += w * dx * (y[i] - sums.y_mean);
	}
	return sums;
}

static double weighted_sum_sq(const double *x, const double *y, const double *u, size_t n, const fl_line *line) {
	double sum = 0.0;
	for (size_t i = 0; i < n; i++) {
		double residual = (y[i] - line->intercept - line->slope * x[i]) / u[i];
		sum += residual * residual;
	}
	return sum;
}

fl_status fl_numeric_line_weighted(const double *x, const double *y, const double *u, size_t n, fl_line *out,
                                   fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	for (size_t i = 0; i < n; i++)
		if (!(u[i] > 0.0) || !isfinite(u[i]))
			return fl_fail(err, FL_E_NUMERIC, "point %zu has the uncertainty %g: a weighted line needs one above zero",
			               i + 1, u[i]);
	weighted_sums sums = weigh(x, y, u, n);
	fl_line line = {.dof = (int)n - 2, .slope = sums.sxy / sums.sxx};
	line.intercept = sums.y_mean - line.slope * sums.x_mean;
	line.var_slope = 1.0 / sums.sxx;
	line.var_intercept = 1.0 / sums.w + sums.x_mean * sums.x_mean / sums.sxx;
	line.cov = -sums.x_mean / sums.sxx;
	line.sum_sq = weighted_sum_sq(x, y, u, n, &line);
	line.s = line.dof > 0 ? sqrt(line.sum_sq / line.dof) : 0.0;
	line.max_abs_residual = largest_residual(x, y, n, line.intercept, line.slope);
	if (!isfinite(line.slope) || !isfinite(line.intercept) || !isfinite(line.var_slope))
		return fl_fail(err, FL_E_NUMERIC, "the points are too close together for their weights");
	*out = line;
	return FL_OK;
}

void fl_numeric_line_at(const fl_line *line, double x, double *y, double *u) {
	double variance = line->var_intercept + 2.0 * x * line->cov + x * x * line->var_slope;
	*y = line->intercept + line->slope * x;
	*u = sqrt(fmax(0.0, variance));
}
