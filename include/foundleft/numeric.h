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

/* ==== Errors in both variables, lack of fit, bands, inverse ================================================= */

/* Generalized distance regression: the line with x and y all uncertain. ISO/TS 28037:2010 clauses 7, 8, 10.
 * `covariance` is that of (x[0..n-1], y[0..n-1]), row-major 2n by 2n, symmetric and positive definite: points that
 * share an oil, a thermometer or a meter carry it there. Gauss-Newton on x*, intercept and slope, with Cholesky's
 * decomposition. The line's var and cov are those of the known covariance, not scaled by s; sum_sq is chi-squared.
 * `x_best`[n], if not NULL, gets the adjusted x. FL_E_NUMERIC if the covariance is not positive definite, the slope is
 * not determined, or the iteration does not settle. */
fl_status fl_numeric_line_distance(const double *x, const double *y, const double *covariance, size_t n, fl_line *out,
                                   double *x_best, fl_error *err) FL_MUST_USE;
/* The same with independent uncertainties ux[n] >= 0 and uy[n] >= 0, of each point one above 0. */
fl_status fl_numeric_line_both(const double *x, const double *y, const double *ux, const double *uy, size_t n,
                               fl_line *out, fl_error *err) FL_MUST_USE;
/* The y all uncertain and correlated, x known: covariance_y[n*n]. Gauss-Markov, ISO/TS 28037:2010 clause 9. */
fl_status fl_numeric_line_correlated(const double *x, const double *y, const double *covariance_y, size_t n,
                                     fl_line *out, fl_error *err) FL_MUST_USE;
/* The probability of a chi-squared of at least `chi_squared` if the stated uncertainties are right. NAN for dof < 1. */
double fl_numeric_chi_squared_tail(double chi_squared, double dof);

/* Lack of fit judged by the scatter of repeated readings at equal x ("pure error"). */
typedef struct fl_lack_of_fit {
	double sum_sq_lack, sum_sq_pure;
	int dof_lack, dof_pure; /* places - p, readings - places */
	double f;               /* INFINITY where repeated readings agree exactly and the fit misses them */
	double probability;     /* of an F at least this large if the model is right */
} fl_lack_of_fit;
/* x[n], y[n], fitted[n] = the model's value at each reading, p its number of coefficients. Readings with the same x are
 * repeats. Needs more places than p and at least one repeat. NIST/SEMATECH e-Handbook 4.4.4.6. */
fl_status fl_numeric_lack_of_fit(const double *x, const double *y, const double *fitted, size_t n, size_t p,
                                 fl_lack_of_fit *out, fl_error *err) FL_MUST_USE;

/* Half-widths of the bands about an ordinary line at x. Two-sided, by the line's own s and degrees of freedom. */
typedef struct fl_bands {
	double y;
	double confidence;   /* the line at this x alone */
	double simultaneous; /* the line anywhere: Working and Hotelling 1929 */
	double prediction;   /* the mean of `repeats` new readings at this x */
} fl_bands;
/* dof >= 1, repeats >= 1. Draper & Smith, Applied Regression Analysis, 3rd ed., ch. 3. */
fl_status fl_numeric_bands(const fl_line *line, double x, double probability, size_t repeats, fl_bands *out,
                           fl_error *err) FL_MUST_USE;

/* Which x gave the mean y of `repeats` new readings. */
typedef struct fl_inverse {
	double x;
	double u;         /* standard uncertainty, first order: JCGM 100 5.1.2 with the line's full covariance */
	double half;      /* Student's factor times u: the interval x +- half, symmetric */
	double low, high; /* Fieller's interval, exact; infinite where the slope may be nothing at all */
	double g;         /* Fieller's g = (t u(slope)/slope)^2: below 0.05 the two intervals are practically the same */
	bool bounded;     /* false for g >= 1: the readings do not determine x */
} fl_inverse;
/* By an ordinary line (new readings scatter by its s). dof >= 1, repeats >= 1. Fieller 1954; Draper & Smith 3.2. */
fl_status fl_numeric_inverse(const fl_line *line, double y, size_t repeats, double probability, fl_inverse *out,
                             fl_error *err) FL_MUST_USE;
/* By a line with known covariance and a y with standard uncertainty u_y, k = the normal factor. ISO/TS 28037 11.2. */
fl_status fl_numeric_inverse_known(const fl_line *line, double y, double u_y, double probability, fl_inverse *out,
                                   fl_error *err) FL_MUST_USE;

/* By a polynomial c[0] + c[1] x + ... of p coefficients with its covariance (as fl_numeric_least_squares gives them),
 * rising or falling throughout [from, to]. low and high invert the prediction limits; half and g are left 0. bounded is
 * false where a limit is not met within [from, to]: that end is then infinite. */
fl_status fl_numeric_inverse_curve(const double *c, const double *covariance, size_t p, double s, double dof, double y,
                                   size_t repeats, double probability, double from, double to, fl_inverse *out,
                                   fl_error *err) FL_MUST_USE;

/* ==== Conformity: the risks of a decision, JCGM 106:2012 ==================================================== */

/* A tolerance; -INFINITY or INFINITY for a side without limit. */
typedef struct fl_interval {
	double low, high;
} fl_interval;

/* The probability that the true value conforms, given the measured one: normal about y with standard uncertainty u.
 * JCGM 106 7.2 to 7.4. u == 0: 1 or 0, limits inclusive. The specific risk is 1 minus this for an accepted item.
 * NAN where the tolerance or u makes no sense. */
double fl_numeric_conformance(double y, double u, fl_interval tolerance);
/* The same with what was known before: prior N(prior_mean, prior_u), JCGM 106 7.2.2. */
double fl_numeric_conformance_with_prior(double y, double u, double prior_mean, double prior_u, fl_interval tolerance);

/* Global risks of accepting what measures within `acceptance`, over items N(prior_mean, prior_u). JCGM 106 9.5. */
typedef struct fl_global_risk {
	double consumer;       /* accepted and not conforming */
	double producer;       /* rejected and conforming */
	double non_conforming; /* of the prior alone */
	double accepted;       /* probability of acceptance */
} fl_global_risk;
fl_status fl_numeric_global_risk(double prior_mean, double prior_u, double u, fl_interval tolerance,
                                 fl_interval acceptance, fl_global_risk *out, fl_error *err) FL_MUST_USE;
/* What a share of items in tolerance means: of the true values, or as observed by measurements with u. */
typedef enum fl_reliability { FL_RELIABILITY_TRUE, FL_RELIABILITY_OBSERVED } fl_reliability;
/* The prior's standard deviation about the middle of a symmetric tolerance +-half for which `reliability` of the
 * items are in tolerance. NAN where no prior fits: reliability not within (0, 1), or more observed than u allows. */
double fl_numeric_prior_u(double half, double reliability, double u, fl_reliability kind);
/* Global risks for a symmetric tolerance at the test uncertainty ratio T/U, U = 2 u, with the guard band w = r U. */
fl_status fl_numeric_ratio_risk(double ratio, double reliability, fl_reliability kind, double r, fl_global_risk *out,
                                fl_error *err) FL_MUST_USE;
/* The largest consumer's risk at that ratio over all priors. */
fl_status fl_numeric_ratio_worst(double ratio, double r, double *consumer, fl_error *err) FL_MUST_USE;

/* ==== Random deviates ======================================================================================= */

#define FL_LANES 8 /* generators drawn side by side, on any processor */

/* xoshiro256++ 1.0 (Blackman and Vigna 2021) in FL_LANES lanes: word w of lane l is s[w][l]. */
typedef struct fl_generator {
	uint64_t s[4][FL_LANES];
} fl_generator;

/* Lane 0 by splitmix64 from the seed, as its authors advise; each further lane 2^192 steps behind the one before. */
void fl_numeric_generator_seed(fl_generator *generator, uint64_t seed);
/* Every lane 2^128 steps on: a stretch that nothing else draws from. */
void fl_numeric_generator_jump(fl_generator *generator);
/* The next 64 bits of every lane, again and again: out[i] is of lane i % FL_LANES. n a multiple of FL_LANES;
 * what is over is left alone. */
void fl_numeric_generator_bits(fl_generator *generator, uint64_t *out, size_t n);

typedef enum fl_shape {
	FL_SHAPE_NORMAL,      /* width: standard deviation */
	FL_SHAPE_RECTANGULAR, /* width: half-width, as for all but the last */
	FL_SHAPE_TRIANGULAR,
	FL_SHAPE_TRAPEZOIDAL, /* parameter: top width by base width, 0 to 1 */
	FL_SHAPE_ARCSINE,     /* U-shaped: of a quantity that swings */
	FL_SHAPE_STUDENT      /* width: scale, s/sqrt(n) for a mean; parameter: degrees of freedom >= 1 */
} fl_shape;

/* One input quantity of a measurement model. JCGM 101:2008 table 1. */
typedef struct fl_input {
	fl_shape shape;
	double centre, width, parameter;
} fl_input;

/* Its standard deviation; INFINITY for Student's t with at most 2 degrees of freedom. */
double fl_numeric_input_u(const fl_input *input);
/* Draws from it: out[n], n a multiple of FL_LANES; what is over is left alone. */
void fl_numeric_draw(fl_generator *generator, const fl_input *input, double *out, size_t n);

/* ==== Monte Carlo propagation, JCGM 101:2008 ================================================================ */

/* A measurement model. Called from several threads at once, so it must not change what it looks at. */
typedef struct fl_model {
	const fl_input *inputs;
	size_t input_count;
	const double *correlation; /* input_count squared; only normal inputs may be correlated; NULL for none */
	size_t output_count;
	/* draws[i * trials + t] is input i of trial t; fills outputs[j * trials + t]. trials is a multiple of FL_LANES. */
	void (*evaluate)(const void *context, const double *draws, size_t trials, double *outputs);
	const void *context;
} fl_model;

/* Told after each round; false stops the run with FL_E_STATE. */
typedef bool (*fl_trials_progress)(void *context, uint64_t done, uint64_t most);

typedef struct fl_plan {
	uint64_t seed;
	uint64_t trials;    /* to do, or at most; rounded up to full lanes */
	int digits;         /* 0: exactly `trials`; 1 or 2: until so many significant digits of every u are stable, 7.9 */
	unsigned threads;   /* at least 1. The result does not depend on it, to the last bit */
	double probability; /* of the coverage intervals */
	fl_trials_progress progress; /* or NULL */
	void *progress_context;
} fl_plan;

/* One output quantity. */
typedef struct fl_propagated {
	double mean, u;
	double low, high;                   /* probabilistically symmetric coverage interval */
	double shortest_low, shortest_high; /* the shortest one */
	double min, max;                    /* of all trials */
	double delta;                       /* numerical tolerance of u at the plan's digits (2 if 0), 7.9.2; 0 if u is 0 */
} fl_propagated;

typedef struct fl_trials {
	uint64_t seed, done;
	bool stable; /* the digits asked for are stable; true where none were asked for */
} fl_trials;

/* Propagates; outputs[output_count]. Memory does not grow with the number of trials. FL_WARNING where `trials` were
 * too few for the digits asked for. FL_E_NUMERIC where the model gives no finite number. */
fl_status fl_numeric_monte_carlo(const fl_model *model, const fl_plan *plan, fl_propagated *outputs, fl_trials *trials,
                                 fl_error *err) FL_MUST_USE;

/* Half a unit of the last of `digits` significant digits of u. JCGM 101 7.9.2. */
double fl_numeric_tolerance_of(double u, int digits);

/* Whether y +- U by JCGM 100 stands up to the trials. JCGM 101 clause 8. */
typedef struct fl_validation {
	double delta;         /* of the GUM's u at so many digits */
	double d_low, d_high; /* differences of the end points */
	bool valid;
} fl_validation;
void fl_numeric_validate(double y, double u, double expanded, const fl_propagated *trials, int digits,
                         fl_validation *out);

/* The coverage intervals of values[n] (their order is changed): by selection. JCGM 101 7.7. n >= 2. */
fl_status fl_numeric_coverage(double *values, size_t n, double probability, fl_propagated *out,
                              fl_error *err) FL_MUST_USE;

/* ==== Trials of a whole calibration ========================================================================= */

/* An effect shared by all readings of a run: one draw a trial. */
typedef struct fl_effect {
	fl_input input;            /* centre is added too */
	const double *sensitivity; /* of the error at each place, places of them */
} fl_effect;

#define FL_PLACES_MOST 16

/* Places of rising x, each gone to up and down in every cycle, with several readings at every stop. */
typedef struct fl_run_model {
	size_t places, cycles, readings; /* readings at each stop */
	const double *x;                 /* rising */
	const double *up, *down;         /* mean error found at each place, by direction */
	const double *s;                 /* standard deviation of one reading at each place */
	const bool *in_line;             /* false for a place that takes no part in the lines; NULL: all take part */
	const fl_effect *effects;
	size_t effect_count;
} fl_run_model;

/* Outputs of a run: the error at each place (mean of up and down), then these. */
typedef enum fl_run_output {
	FL_RUN_INTERCEPT,
	FL_RUN_SLOPE,
	FL_RUN_LARGEST_RESIDUAL, /* from the least-squares line */
	FL_RUN_INDEPENDENT,      /* linearities */
	FL_RUN_TERMINAL,
	FL_RUN_ZERO_BASED,
	FL_RUN_HYSTERESIS, /* largest |mean down - mean up| over the places */
	FL_RUN_OUTPUTS
} fl_run_output;

/* Draws every reading and every effect, and finds all lines and the hysteresis again: outputs[places +
 * FL_RUN_OUTPUTS]. As fl_numeric_monte_carlo. At least three places in the line. */
fl_status fl_numeric_run_trials(const fl_run_model *model, const fl_plan *plan, fl_propagated *outputs,
                                fl_trials *trials, fl_error *err) FL_MUST_USE;

#endif
