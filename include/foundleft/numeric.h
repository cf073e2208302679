/* foundleft/numeric.h - straight lines, general least squares, spreads, quantiles, the arithmetic of a budget.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Pure: arrays of double in, results out, no unit, no file, no printing. Built on GSL.
 * FL_E_NUMERIC is returned where the data do not determine the result (too few points, all x equal, NaN).
 */
#ifndef FOUNDLEFT_NUMERIC_H
#define FOUNDLEFT_NUMERIC_H

#include "foundleft/base.h"

/* y = intercept + slope x with its covariance. */
typedef struct fl_line {
	double intercept, slope;
	double var_intercept, var_slope, cov; /* scaled by s^2 for an ordinary fit, not scaled for a weighted one */
	double s;                             /* residual standard deviation, n - 2 degrees of freedom; 0 if n == 2 */
	double sum_sq;                        /* sum of squared (weighted) residuals */
	double max_abs_residual;
	int dof; /* n - 2 */
} fl_line;

/* Ordinary least squares. x[n], y[n], n >= 2, not all x equal. Draper & Smith, Applied Regression Analysis, ch. 1. */
fl_status fl_numeric_line(const double *x, const double *y, size_t n, fl_line *out, fl_error *err) FL_MUST_USE;
/* Weighted least squares with known standard deviations u[n] > 0. */
fl_status fl_numeric_line_weighted(const double *x, const double *y, const double *u, size_t n, fl_line *out,
                                   fl_error *err) FL_MUST_USE;
/* The line's value at x and that value's standard uncertainty, from the full covariance. JCGM 100 H.3.4. */
void fl_numeric_line_at(const fl_line *line, double x, double *y, double *u);

/* General linear least squares y = X c. X is row-major n by p. Fills c[p], covariance[p*p] scaled by s^2, *s.
 * Columns are scaled before the QR/SVD decomposition, so that high powers of a large x keep their digits.
 * n >= p; with n == p nothing is left to judge the scatter by: *s and covariance are 0. */
fl_status fl_numeric_least_squares(const double *X, const double *y, size_t n, size_t p, double *c, double *covariance,
                                   double *s, double *sum_sq, fl_error *err) FL_MUST_USE;

/* A reference line for linearity and the largest deviation of the points from it. */
typedef struct fl_reference_line {
	double intercept, slope;
	double max_abs; /* the linearity, in the unit of y */
	size_t at;      /* index of a point where it is reached */
} fl_reference_line;

/* Independent (best straight line): minimises the largest absolute deviation. Exact, over all alternating triples.
 * IEC 61298-2, ANSI/ISA-51.1. n >= 2. */
fl_status fl_numeric_line_independent(const double *x, const double *y, size_t n, fl_reference_line *out,
                                      fl_error *err) FL_MUST_USE;
/* Terminal-based: through the points of lowest and highest x (the mean of several at the same x). */
fl_status fl_numeric_line_terminal(const double *x, const double *y, size_t n, fl_reference_line *out,
                                   fl_error *err) FL_MUST_USE;
/* Zero-based: through the point of lowest x, slope that minimises the largest absolute deviation. */
fl_status fl_numeric_line_zero_based(const double *x, const double *y, size_t n, fl_reference_line *out,
                                     fl_error *err) FL_MUST_USE;

/* Mean, sample standard deviation (n - 1; 0 for n == 1), smallest, largest. n >= 1. */
typedef struct fl_spread {
	double mean, s, min, max;
	size_t n;
} fl_spread;
fl_status fl_numeric_spread(const double *v, size_t n, fl_spread *out, fl_error *err) FL_MUST_USE;

/* The largest |a[i] - b[i]| and where: hysteresis of two traverses over the same places. NAN marks a place that one
 * of them lacks; FL_E_NUMERIC if no place has both. */
fl_status fl_numeric_largest_gap(const double *a, const double *b, size_t n, double *gap, size_t *at,
                                 fl_error *err) FL_MUST_USE;

/* Two-sided Student factor: t with P(|T| <= t) = probability. dof may be fractional or INFINITY. dof >= 1.
 * NAN outside: probability and p strictly between 0 and 1. */
double fl_numeric_student(double probability, double dof);
double fl_numeric_normal_cdf(double z);
double fl_numeric_normal_quantile(double p);
/* The probability content of k = 2 for a normal distribution: 0.954499736103642. */
#define FL_COVERAGE_2_SIGMA 0.95449973610364158

/* One contribution to a budget: standard uncertainty and sensitivity, result in the unit of the output. */
typedef struct fl_budget_term {
	double u;           /* standard uncertainty of the input, in the input's unit */
	double sensitivity; /* d output / d input */
	double dof;         /* INFINITY where nothing better is known */
} fl_budget_term;

typedef struct fl_budget_sum {
	double uc;            /* combined standard uncertainty */
	double dof_effective; /* Welch-Satterthwaite, JCGM 100 G.4.1; INFINITY if all are */
	double
	    coverage_factor; /* Student's t at `probability` and dof_effective, truncated to an integer (JCGM 100 G.4.1) */
	double expanded;     /* coverage_factor * uc */
} fl_budget_sum;

/* Combines independent terms. JCGM 100:2008 5.1.2 and G.4. */
fl_status fl_numeric_budget(const fl_budget_term *terms, size_t n, double probability, fl_budget_sum *out,
                            fl_error *err) FL_MUST_USE;

/* The trend of a short series: least-squares slope against time and what follows from it. */
typedef struct fl_trend {
	double slope;       /* per second */
	double change;      /* slope * (last - first time) */
	bool monotone;      /* strictly rising or strictly falling throughout */
	bool has_end_value; /* an exponential approach could be fitted */
	double end_value;   /* where the approach ends: information only */
	double time_constant_s;
} fl_trend;
/* t_s[n] rising, v[n], n >= 2; the end value needs n >= 4 (Aitken's delta-squared on equally spaced, least squares
 * over the time constant otherwise), and a series that slows down noticeably: a time constant of at most ten times its
 * length. */
fl_status fl_numeric_trend(const double *t_s, const double *v, size_t n, fl_trend *out, fl_error *err) FL_MUST_USE;

#endif
