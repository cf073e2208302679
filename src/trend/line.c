/* line.c - a weighted straight line and what it says about a further point.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Draper & Smith, Applied Regression Analysis, 3rd ed.: slope, residual variance and prediction in chapters 1 and 3,
 * weights in section 9.2. With x0 the weighted mean of x,
 *   b = sum w (x - x0) y / Sxx,  s^2 = sum w r^2 / (n - 2),  se(b) = s / sqrt(Sxx),
 *   a further point at x: a + b (x - x0) +- t(n - 2) s sqrt(1 + 1 / sum w + (x - x0)^2 / Sxx).
 * The weights are relative: the scatter decides how wide everything is, as NIST does for the check standard that the
 * tests hold this to.
 */
#include "foundleft/trend.h"

#include <math.h>

static double weight(const double *w, size_t i) {
	return w ? w[i] : 1.0;
}

static void centre(const double *x, const double *y, const double *w, size_t n, fl_drift_line *line, double *mean_y) {
	double sum_x = 0.0, sum_y = 0.0;
	for (size_t i = 0; i < n; i++) {
		line->sum_w += weight(w, i);
		sum_x += weight(w, i) * x[i];
		sum_y += weight(w, i) * y[i];
	}
	line->x0 = sum_x / line->sum_w;
	*mean_y = sum_y / line->sum_w;
}

fl_status fl_trend_line(const double *x, const double *y, const double *w, size_t n, fl_drift_line *out,
                        fl_error *err) {
	fl_drift_line line = {.n = n, .dof = (int)n - 2};
	double sxy = 0.0, squares = 0.0;
	if (n < 3)
		return fl_fail(err, FL_E_NUMERIC, "a line with an uncertainty needs at least three points, there are %zu", n);
	centre(x, y, w, n, &line, &line.intercept);
	for (size_t i = 0; i < n; i++) {
		line.sxx += weight(w, i) * (x[i] - line.x0) * (x[i] - line.x0);
		sxy += weight(w, i) * (x[i] - line.x0) * (y[i] - line.intercept);
	}
	if (!(line.sxx > 0.0) || !isfinite(line.sxx) || !isfinite(sxy))
		return fl_fail(err, FL_E_NUMERIC, "all points of the line have the same time, or one is no number");
	line.slope = sxy / line.sxx;
	for (size_t i = 0; i < n; i++) {
		double residual = y[i] - line.intercept - line.slope * (x[i] - line.x0);
		squares += weight(w, i) * residual * residual;
	}
	line.s = sqrt(squares / line.dof);
	line.se_slope = line.s / sqrt(line.sxx);
	*out = line;
	return FL_OK;
}

void fl_trend_predict(const fl_drift_line *line, double x, double probability, double *y, double *half_width) {
	double d = x - line->x0;
	*y = line->intercept + line->slope * d;
	*half_width =
	    fl_numeric_student(probability, line->dof) * line->s * sqrt(1.0 + 1.0 / line->sum_w + d * d / line->sxx);
}
