/* numeric/trend.c - where a settling series is going: slope, direction, exponential end value.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <math.h>

static const double equal_spacing = 1e-6; /* of the interval: steps that differ less are equal */
static const double longest_time_constant =
    10.0; /* times the series' length: a longer one cannot be told from a line */

static bool strictly_one_way(const double *v, size_t n) {
	bool rising = true, falling = true;
	for (size_t i = 1; i < n; i++) {
		rising = rising && v[i] > v[i - 1];
		falling = falling && v[i] < v[i - 1];
	}
	return rising || falling;
}

static bool equally_spaced(const double *t_s, size_t n) {
	double step_s = (t_s[n - 1] - t_s[0]) / (double)(n - 1);
	for (size_t i = 1; i < n; i++)
		if (fabs(t_s[i] - t_s[i - 1] - step_s) > equal_spacing * step_s)
			return false;
	return true;
}

static void keep_end(fl_trend *trend, double end_value, double time_constant_s, double length_s) {
	if (!isfinite(end_value) || !(time_constant_s > 0.0) || time_constant_s > longest_time_constant * length_s)
		return;
	trend->has_end_value = true;
	trend->end_value = end_value;
	trend->time_constant_s = time_constant_s;
}

/* Aitken's delta-squared on three values as far apart as the series allows: the last, one `stride` before, two. */
static void aitken_end(const double *t_s, const double *v, size_t n, fl_trend *trend) {
	size_t stride = (n - 1) / 2, last = n - 1;
	double first_step = v[last - stride] - v[last - 2 * stride];
	double second_step = v[last] - v[last - stride];
	double ratio = second_step / first_step;
	if (!(ratio > 0.0 && ratio < 1.0))
		return;
	double end_value = v[last] + second_step * ratio / (1.0 - ratio);
	double time_constant_s = (t_s[last - stride] - t_s[last]) / log(ratio);
	keep_end(trend, end_value, time_constant_s, t_s[last] - t_s[0]);
}

/* Least-squares approach v = end + amplitude exp(-(t - t0) / tau) for one tau: its sum of squares and end value. */
static double approach_misfit(const double *t_s, const double *v, size_t n, double tau_s, double *end_value) {
	double e_mean = 0.0, v_mean = 0.0, see = 0.0, sev = 0.0, sum = 0.0;
	for (size_t i = 0; i < n; i++) {
		e_mean += exp(-(t_s[i] - t_s[0]) / tau_s) / (double)n;
		v_mean += v[i] / (double)n;
	}
	for (size_t i = 0; i < n; i++) {
		double e = exp(-(t_s[i] - t_s[0]) / tau_s) - e_mean;
		see += e * e;
		sev += e * (v[i] - v_mean);
	}
	double amplitude = sev / see;
	*end_value = v_mean - amplitude * e_mean;
	for (size_t i = 0; i < n; i++) {
		double residual = v[i] - *end_value - amplitude * exp(-(t_s[i] - t_s[0]) / tau_s);
		sum += residual * residual;
	}
	return sum;
}

/* Golden section in log tau between two bounds that enclose the minimum. */
static double best_log_tau(const double *t_s, const double *v, size_t n, double low, double high) {
	const double golden = 0.6180339887498949;
	double end_value;
	double a = high - golden * (high - low), b = low + golden * (high - low);
	double misfit_a = approach_misfit(t_s, v, n, exp(a), &end_value);
	double misfit_b = approach_misfit(t_s, v, n, exp(b), &end_value);
	for (int i = 0; i < 60; i++) {
		if (misfit_a < misfit_b) {
			high = b;
			b = a;
			misfit_b = misfit_a;
			a = high - golden * (high - low);
			misfit_a = approach_misfit(t_s, v, n, exp(a), &end_value);
		} else {
			low = a;
			a = b;
			misfit_a = misfit_b;
			b = low + golden * (high - low);
			misfit_b = approach_misfit(t_s, v, n, exp(b), &end_value);
		}
	}
	return (low + high) / 2.0;
}

/* Searches the time constant from a fifth of the mean step to the longest that can be told. A minimum at either end
 * of the search is none. */
static void least_squares_end(const double *t_s, const double *v, size_t n, fl_trend *trend) {
	enum { GRID = 40 };
	double length_s = t_s[n - 1] - t_s[0], end_value;
	double low = log(length_s / (5.0 * (double)(n - 1))), high = log(longest_time_constant * length_s);
	int best = 0;
	double smallest = INFINITY;
	for (int i = 0; i <= GRID; i++) {
		double misfit = approach_misfit(t_s, v, n, exp(low + (high - low) * i / GRID), &end_value);
		if (misfit < smallest) {
			smallest = misfit;
			best = i;
		}
	}
	if (best == 0 || best == GRID)
		return;
	double step = (high - low) / GRID;
	double tau_s = exp(best_log_tau(t_s, v, n, low + step * (best - 1), low + step * (best + 1)));
	approach_misfit(t_s, v, n, tau_s, &end_value);
	keep_end(trend, end_value, tau_s, length_s);
}

static fl_status check_series(const double *t_s, const double *v, size_t n, fl_error *err) {
	if (n < 2)
		return fl_fail(err, FL_E_NUMERIC, "a trend needs at least two readings, not %zu", n);
	if (!fl_numeric_all_finite(t_s, n) || !fl_numeric_all_finite(v, n))
		return fl_fail(err, FL_E_NUMERIC, "a trend of readings that are not all numbers");
	for (size_t i = 1; i < n; i++)
		if (!(t_s[i] > t_s[i - 1]))
			return fl_fail(err, FL_E_NUMERIC, "reading %zu is not later than the one before", i + 1);
	return FL_OK;
}

fl_status fl_numeric_trend(const double *t_s, const double *v, size_t n, fl_trend *out, fl_error *err) {
	fl_line line = {0};
	fl_status status = check_series(t_s, v, n, err);
	if (status >= 0)
		status = fl_numeric_line(t_s, v, n, &line, err);
	if (status < 0)
		return status;
	fl_trend trend = {.slope = line.slope, .change = line.slope * (t_s[n - 1] - t_s[0])};
	trend.monotone = strictly_one_way(v, n);
	if (n >= 4 && !fl_numeric_all_equal(v, n)) {
		if (equally_spaced(t_s, n))
			aitken_end(t_s, v, n, &trend);
		else
			least_squares_end(t_s, v, n, &trend);
	}
	*out = trend;
	return FL_OK;
}
