/* numeric/reference_line.c - reference lines for linearity: independent, terminal-based, zero-based.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * All three judge by the largest absolute deviation. Where several points stand at the lowest (highest) x, the end of
 * the line is their mean.
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <math.h>

static fl_status check_points(const double *x, const double *y, size_t n, fl_error *err) {
	if (n < 2)
		return fl_fail(err, FL_E_NUMERIC, "linearity needs at least two points, not %zu", n);
	if (!fl_numeric_all_finite(x, n) || !fl_numeric_all_finite(y, n))
		return fl_fail(err, FL_E_NUMERIC, "linearity of points that are not all numbers");
	if (fl_numeric_all_equal(x, n))
		return fl_fail(err, FL_E_NUMERIC, "all points stand at the same place: no linearity is determined");
	return FL_OK;
}

/* Fills max_abs and at of a line; gives up once `limit` is passed, since a better line is known already. */
static bool judge(fl_reference_line *line, const double *x, const double *y, size_t n, double limit) {
	line->max_abs = -1.0;
	for (size_t i = 0; i < n; i++) {
		double deviation = fabs(y[i] - line->intercept - line->slope * x[i]);
		if (!(deviation > line->max_abs))
			continue;
		line->max_abs = deviation;
		line->at = i;
		if (deviation >= limit)
			return false;
	}
	return line->max_abs >= 0.0;
}

static void keep_better(fl_reference_line *best, fl_reference_line candidate, const double *x, const double *y,
                        size_t n) {
	if (judge(&candidate, x, y, n, best->max_abs))
		*best = candidate;
}

/* The line that leaves the same deviation at three points with signs +, -, +: the one parallel to the chord of the
 * outer two, halfway to the middle one. */
static fl_reference_line alternating(const double *x, const double *y, size_t low, size_t middle, size_t high) {
	fl_reference_line line = {.slope = (y[high] - y[low]) / (x[high] - x[low])};
	double chord = y[low] + line.slope * (x[middle] - x[low]);
	line.intercept = y[low] - line.slope * x[low] + (y[middle] - chord) / 2.0;
	return line;
}

/* Some best line alternates on three points (de la Vallee Poussin), so trying all triples finds it. Points at the
 * same x are tried in both orders. */
static void try_triples(const double *x, const double *y, size_t n, fl_reference_line *best) {
	for (size_t low = 0; low < n; low++)
		for (size_t high = 0; high < n; high++) {
			if (!(x[low] < x[high]))
				continue;
			for (size_t middle = 0; middle < n; middle++)
				if (middle != low && middle != high && x[low] <= x[middle] && x[middle] <= x[high])
					keep_better(best, alternating(x, y, low, middle, high), x, y, n);
		}
}

static fl_reference_line between_ends(const double *x, const double *y, size_t n);

fl_status fl_numeric_line_independent(const double *x, const double *y, size_t n, fl_reference_line *out,
                                      fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	fl_reference_line best = between_ends(x, y, n);
	judge(&best, x, y, n, INFINITY);
	try_triples(x, y, n, &best);
	*out = best;
	return FL_OK;
}

/* The mean of the points at the place of extreme x: lowest for sign -1, highest for +1. */
static void end_point(const double *x, const double *y, size_t n, double sign, double *end_x, double *end_y) {
	*end_x = x[0];
	for (size_t i = 1; i < n; i++)
		if (sign * x[i] > sign * *end_x)
			*end_x = x[i];
	double sum = 0.0, count = 0.0;
	for (size_t i = 0; i < n; i++)
		if (x[i] == *end_x) {
			sum += y[i];
			count += 1.0;
		}
	*end_y = sum / count;
}

static fl_reference_line between_ends(const double *x, const double *y, size_t n) {
	double low_x, low_y, high_x, high_y;
	end_point(x, y, n, -1.0, &low_x, &low_y);
	end_point(x, y, n, +1.0, &high_x, &high_y);
	fl_reference_line line = {.slope = (high_y - low_y) / (high_x - low_x)};
	line.intercept = low_y - line.slope * low_x;
	return line;
}

fl_status fl_numeric_line_terminal(const double *x, const double *y, size_t n, fl_reference_line *out, fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	fl_reference_line line = between_ends(x, y, n);
	judge(&line, x, y, n, INFINITY);
	*out = line;
	return FL_OK;
}

/* Through the low end the best slope leaves deviations of equal size and opposite sign at two points: all pairs. */
fl_status fl_numeric_line_zero_based(const double *x, const double *y, size_t n, fl_reference_line *out,
                                     fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	double low_x, low_y;
	end_point(x, y, n, -1.0, &low_x, &low_y);
	fl_reference_line best = between_ends(x, y, n);
	judge(&best, x, y, n, INFINITY);
	for (size_t i = 0; i < n; i++)
		for (size_t j = i; j < n; j++) {
			double run = (x[i] - low_x) + (x[j] - low_x);
			if (!(run > 0.0))
				continue;
			fl_reference_line candidate = {.slope = ((y[i] - low_y) + (y[j] - low_y)) / run};
			candidate.intercept = low_y - candidate.slope * low_x;
			keep_better(&best, candidate, x, y, n);
		}
	*out = best;
	return FL_OK;
}
