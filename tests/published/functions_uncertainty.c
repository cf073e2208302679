/* tests/published/functions_uncertainty.c - more of functions.c: lines with both variables uncertain, inverse, risks,
 * trials.
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "functions.h"

#include "foundleft/numeric.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdbool.h>
#include <string.h>

/* ---- errors in both variables: columns x, weight of x, y, weight of y; a weight is 1/u^2 ---- */

static void uncertainties(const given *g, double *ux, double *uy) {
	for (size_t i = 0; i < g->rows; i++) {
		ux[i] = 1.0 / sqrt(g->columns[1][i]);
		uy[i] = 1.0 / sqrt(g->columns[3][i]);
	}
}

static bool fit_both(const given *g, fl_line *line) {
	double ux[MAX_ROWS], uy[MAX_ROWS];
	uncertainties(g, ux, uy);
	return fl_numeric_line_both(g->columns[0], g->columns[2], ux, uy, g->rows, line, NULL) == FL_OK;
}

/* The same by the general method, with a full matrix. */
static bool fit_distance(const given *g, fl_line *line) {
	enum { MOST = 16 };
	static double covariance[4 * MOST * MOST];
	double ux[MAX_ROWS], uy[MAX_ROWS];
	size_t n = g->rows;
	if (n > MOST)
		return false;
	uncertainties(g, ux, uy);
	memset(covariance, 0, sizeof covariance);
	for (size_t i = 0; i < n; i++) {
		covariance[i * 2 * n + i] = ux[i] * ux[i];
		covariance[(n + i) * 2 * n + n + i] = uy[i] * uy[i];
	}
	return fl_numeric_line_distance(g->columns[0], g->columns[2], covariance, n, line, NULL, NULL) == FL_OK;
}

#define LINE_FIELD(name, fit, expression)          \
	static double name(const given *g) {           \
		fl_line line = {0};                        \
		return fit(g, &line) ? (expression) : NAN; \
	}

LINE_FIELD(both_intercept, fit_both, line.intercept)
LINE_FIELD(both_slope, fit_both, line.slope)
LINE_FIELD(both_sum_sq, fit_both, line.sum_sq)
LINE_FIELD(both_dof, fit_both, (double)line.dof)
LINE_FIELD(distance_intercept, fit_distance, line.intercept)
LINE_FIELD(distance_slope, fit_distance, line.slope)
LINE_FIELD(distance_sum_sq, fit_distance, line.sum_sq)

/* Columns x, y, u; number: a covariance that all y share. */
static bool fit_correlated(const given *g, fl_line *line) {
	static double covariance[MAX_ROWS * MAX_ROWS];
	size_t n = g->rows;
	for (size_t i = 0; i < n; i++)
		for (size_t k = 0; k < n; k++)
			covariance[i * n + k] = g->numbers[0] + (i == k ? g->columns[2][i] * g->columns[2][i] : 0.0);
	return fl_numeric_line_correlated(g->columns[0], g->columns[1], covariance, n, line, NULL) == FL_OK;
}

LINE_FIELD(correlated_intercept, fit_correlated, line.intercept)
LINE_FIELD(correlated_slope, fit_correlated, line.slope)
LINE_FIELD(correlated_u_intercept, fit_correlated, sqrt(line.var_intercept))
LINE_FIELD(correlated_u_slope, fit_correlated, sqrt(line.var_slope))
LINE_FIELD(correlated_cov, fit_correlated, line.cov)
LINE_FIELD(correlated_sum_sq, fit_correlated, line.sum_sq)

/* Columns x, y; numbers: origin of x, and the standard uncertainty of an error that all y share, beside the scatter
 * that the points show themselves. */
static bool fit_shared(const given *g, fl_line *line) {
	static double covariance[MAX_ROWS * MAX_ROWS];
	double x[MAX_ROWS] = {0};
	size_t n = g->rows;
	for (size_t i = 0; i < n; i++)
		x[i] = g->columns[0][i] - g->numbers[0];
	if (fl_numeric_line(x, g->columns[1], n, line, NULL) != FL_OK)
		return false;
	for (size_t i = 0; i < n; i++)
		for (size_t k = 0; k < n; k++)
			covariance[i * n + k] = g->numbers[1] * g->numbers[1] + (i == k ? line->s * line->s : 0.0);
	return fl_numeric_line_correlated(x, g->columns[1], covariance, n, line, NULL) == FL_OK;
}

LINE_FIELD(shared_intercept, fit_shared, line.intercept)
LINE_FIELD(shared_u_intercept, fit_shared, sqrt(line.var_intercept))
LINE_FIELD(shared_u_slope, fit_shared, sqrt(line.var_slope))

/* ---- polynomials: columns x, y; first number the degree ---- */

typedef struct curve {
	double c[4], covariance[16], s, sum_sq;
	size_t p;
} curve;

static bool fit_curve(const given *g, curve *fit) {
	static double X[MAX_ROWS * 4];
	fit->p = (size_t)g->numbers[0] + 1;
	if (fit->p > 4)
		return false;
	for (size_t i = 0; i < g->rows; i++)
		for (size_t j = 0; j < fit->p; j++)
			X[i * fit->p + j] = pow(g->columns[0][i], (double)j);
	return fl_numeric_least_squares(X, g->columns[1], g->rows, fit->p, fit->c, fit->covariance, &fit->s, &fit->sum_sq,
	                                NULL) == FL_OK;
}

static bool find_lack(const given *g, fl_lack_of_fit *lack) {
	curve fit;
	double fitted[MAX_ROWS];
	if (!fit_curve(g, &fit))
		return false;
	for (size_t i = 0; i < g->rows; i++) {
		fitted[i] = 0.0;
		for (size_t j = fit.p; j-- > 0;)
			fitted[i] = fitted[i] * g->columns[0][i] + fit.c[j];
	}
	return fl_numeric_lack_of_fit(g->columns[0], g->columns[1], fitted, g->rows, fit.p, lack, NULL) == FL_OK;
}

static double lack_f(const given *g) {
	fl_lack_of_fit lack;
	return find_lack(g, &lack) ? lack.f : NAN;
}

static double lack_dof(const given *g) {
	fl_lack_of_fit lack;
	return find_lack(g, &lack) ? (double)lack.dof_lack : NAN;
}

static double lack_dof_pure(const given *g) {
	fl_lack_of_fit lack;
	return find_lack(g, &lack) ? (double)lack.dof_pure : NAN;
}

static double lack_s_pure(const given *g) {
	fl_lack_of_fit lack;
	return find_lack(g, &lack) ? sqrt(lack.sum_sq_pure / lack.dof_pure) : NAN;
}

/* The F that chance passes with the probability of the second number. */
static double lack_critical(const given *g) {
	fl_lack_of_fit lack;
	return find_lack(g, &lack) ? gsl_cdf_fdist_Qinv(g->numbers[1], lack.dof_lack, lack.dof_pure) : NAN;
}

/* Numbers: degree, y, repeats, probability, from, to. */
static bool invert_curve(const given *g, fl_inverse *inverse) {
	curve fit;
	return fit_curve(g, &fit) &&
	       fl_numeric_inverse_curve(fit.c, fit.covariance, fit.p, fit.s, (double)(g->rows - fit.p), g->numbers[1],
	                                (size_t)g->numbers[2], g->numbers[3], g->numbers[4], g->numbers[5], inverse,
	                                NULL) == FL_OK;
}

/* Columns x, y; numbers: y, repeats, probability. */
static bool invert_line(const given *g, fl_inverse *inverse) {
	fl_line line;
	return fl_numeric_line(g->columns[0], g->columns[1], g->rows, &line, NULL) == FL_OK &&
	       fl_numeric_inverse(&line, g->numbers[0], (size_t)g->numbers[1], g->numbers[2], inverse, NULL) == FL_OK;
}

#define INVERSE_FIELD(name, invert, field)                \
	static double name(const given *g) {                  \
		fl_inverse inverse;                               \
		return invert(g, &inverse) ? inverse.field : NAN; \
	}

INVERSE_FIELD(curve_x, invert_curve, x)
INVERSE_FIELD(curve_low, invert_curve, low)
INVERSE_FIELD(curve_high, invert_curve, high)
INVERSE_FIELD(inverse_x, invert_line, x)
INVERSE_FIELD(inverse_u, invert_line, u)
INVERSE_FIELD(inverse_half, invert_line, half)

/* Columns x, y; numbers: x, probability, repeats, 0 confidence, 1 simultaneous, 2 prediction. */
static double band(const given *g) {
	fl_line line;
	fl_bands bands;
	if (fl_numeric_line(g->columns[0], g->columns[1], g->rows, &line, NULL) != FL_OK ||
	    fl_numeric_bands(&line, g->numbers[0], g->numbers[1], (size_t)g->numbers[2], &bands, NULL) != FL_OK)
		return NAN;
	return g->numbers[3] == 0.0 ? bands.confidence : g->numbers[3] == 1.0 ? bands.simultaneous : bands.prediction;
}

/* ---- conformity ---- */

/* y, u, low, high. */
static double conformance(const given *g) {
	return fl_numeric_conformance(g->numbers[0], g->numbers[1], (fl_interval){g->numbers[2], g->numbers[3]});
}

/* The true limit, the relative uncertainty and the probability of being above it: the least reading. */
static double reading_above(const given *g) {
	double low = g->numbers[0], high = 2.0 * low;
	for (int i = 0; i < 100; i++) {
		double y = 0.5 * (low + high);
		if (fl_numeric_conformance(y, g->numbers[1] * y, (fl_interval){g->numbers[0], INFINITY}) < g->numbers[2])
			low = y;
		else
			high = y;
	}
	return high;
}

/* prior mean, prior u, u, tolerance, acceptance. */
static bool find_risk(const given *g, fl_global_risk *risk) {
	const double *n = g->numbers;
	return fl_numeric_global_risk(n[0], n[1], n[2], (fl_interval){n[3], n[4]}, (fl_interval){n[5], n[6]}, risk, NULL) ==
	       FL_OK;
}

/* ratio, reliability, 0 true or 1 observed, guard band in U. */
static bool find_ratio_risk(const given *g, fl_global_risk *risk) {
	const double *n = g->numbers;
	fl_reliability kind = n[2] == 0.0 ? FL_RELIABILITY_TRUE : FL_RELIABILITY_OBSERVED;
	return fl_numeric_ratio_risk(n[0], n[1], kind, n[3], risk, NULL) == FL_OK;
}

#define RISK_FIELD(name, find, field)             \
	static double name(const given *g) {          \
		fl_global_risk risk;                      \
		return find(g, &risk) ? risk.field : NAN; \
	}

RISK_FIELD(risk_consumer, find_risk, consumer)
RISK_FIELD(risk_producer, find_risk, producer)
RISK_FIELD(risk_non_conforming, find_risk, non_conforming)
RISK_FIELD(ratio_consumer, find_ratio_risk, consumer)
RISK_FIELD(ratio_producer, find_ratio_risk, producer)

static double ratio_worst(const given *g) {
	double consumer;
	return fl_numeric_ratio_worst(g->numbers[0], g->numbers[1], &consumer, NULL) == FL_OK ? consumer : NAN;
}

/* ---- trials: 10^7, seed 1; first number what is asked for ---- */

enum asked { MEAN, U, LOW, HIGH, SHORTEST_LOW, SHORTEST_HIGH, MIDDLE_HALF_WIDTH };

static double pick(const fl_propagated *p, double asked) {
	switch ((enum asked)asked) {
	case MEAN:
		return p->mean;
	case U:
		return p->u;
	case LOW:
		return p->low;
	case HIGH:
		return p->high;
	case SHORTEST_LOW:
		return p->shortest_low;
	case SHORTEST_HIGH:
		return p->shortest_high;
	default:
		return 0.5 * (p->high - p->low);
	}
}

/* Runs a model, or takes the last result where the numbers after the first are the same. */
static bool propagate(const given *g, const fl_model *model, double probability, fl_propagated *out) {
	static fl_propagated last;
	static double last_numbers[MAX_NUMBERS];
	static size_t last_count;
	static void (*last_model)(const void *, const double *, size_t, double *);
	size_t size = (g->number_count - 1) * sizeof(double);
	fl_plan plan = {.seed = 1, .trials = 10000000, .threads = 2, .probability = probability};
	fl_trials trials;
	if (last_model != model->evaluate || last_count != g->number_count ||
	    memcmp(last_numbers, g->numbers + 1, size) != 0) {
		if (fl_numeric_monte_carlo(model, &plan, &last, &trials, NULL) != FL_OK)
			return false;
		last_model = model->evaluate;
		last_count = g->number_count;
		memcpy(last_numbers, g->numbers + 1, size);
	}
	*out = last;
	return true;
}

static void add_up(const void *context, const double *draws, size_t trials, double *outputs) {
	size_t inputs = *(const size_t *)context;
	for (size_t t = 0; t < trials; t++) {
		outputs[t] = 0.0;
		for (size_t i = 0; i < inputs; i++)
			outputs[t] += draws[i * trials + t];
	}
}

/* asked, probability, then for each input its shape (0 normal, 1 rectangular, ... as fl_shape), width, parameter. */
static bool propagate_sum(const given *g, fl_propagated *out, double *squares) {
	fl_input inputs[MAX_NUMBERS];
	size_t count = (g->number_count - 2) / 3;
	*squares = 0.0;
	for (size_t i = 0; i < count; i++) {
		const double *n = g->numbers + 2 + 3 * i;
		inputs[i] = (fl_input){(fl_shape)(int)n[0], 0.0, n[1], n[2]};
		*squares += fl_numeric_input_u(&inputs[i]) * fl_numeric_input_u(&inputs[i]);
	}
	fl_model model = {.inputs = inputs, .input_count = count, .output_count = 1, .evaluate = add_up, .context = &count};
	return propagate(g, &model, g->numbers[1], out);
}

static double trials_sum(const given *g) {
	fl_propagated out;
	double squares;
	return propagate_sum(g, &out, &squares) ? pick(&out, g->numbers[0]) : NAN;
}

/* The factor that makes the coverage interval of the standard uncertainty. */
static double trials_sum_k(const given *g) {
	fl_propagated out;
	double squares;
	return propagate_sum(g, &out, &squares) ? 0.5 * (out.high - out.low) / sqrt(squares) : NAN;
}

/* Whether y +- k u by the law of propagation stands up to the trials, to so many digits (the first number). */
static double trials_sum_validates(const given *g) {
	fl_propagated out;
	fl_validation found;
	double squares;
	if (!propagate_sum(g, &out, &squares))
		return NAN;
	double u = sqrt(squares), k = fl_numeric_student(g->numbers[1], INFINITY);
	fl_numeric_validate(0.0, u, k * u, &out, (int)g->numbers[0], &found);
	return found.valid ? 1.0 : 0.0;
}

/* Deviation of a mass from 100 g by substitution in air, mg. JCGM 101 9.3. */
static void weigh(const void *context, const double *draws, size_t trials, double *outputs) {
	(void)context;
	const double *reference = draws, *added = draws + trials, *air = draws + 2 * trials;
	const double *unknown = draws + 3 * trials, *of_reference = draws + 4 * trials;
	for (size_t t = 0; t < trials; t++)
		outputs[t] =
		    (reference[t] + added[t]) * (1.0 + (air[t] - 1.2) * (1.0 / unknown[t] - 1.0 / of_reference[t])) - 100000.0;
}

static bool propagate_mass(const given *g, fl_propagated *out) {
	static const fl_input inputs[] = {{FL_SHAPE_NORMAL, 100000.0, 0.050, 0.0},
	                                  {FL_SHAPE_NORMAL, 1.234, 0.020, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 1.20, 0.10, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 8000.0, 1000.0, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 8000.0, 50.0, 0.0}};
	fl_model model = {.inputs = inputs, .input_count = 5, .output_count = 1, .evaluate = weigh};
	return propagate(g, &model, 0.95, out);
}

static double trials_mass(const given *g) {
	fl_propagated out;
	return propagate_mass(g, &out) ? pick(&out, g->numbers[0]) : NAN;
}

/* Whether the first-order result y +- U, the second and third number, stands up to the trials at one digit. */
static double trials_mass_validates(const given *g) {
	fl_propagated out;
	fl_validation found;
	given plain = *g;
	plain.number_count = 1;
	if (!propagate_mass(&plain, &out))
		return NAN;
	fl_numeric_validate(1.234, g->numbers[1], g->numbers[2], &out, (int)g->numbers[0], &found);
	return found.valid ? 1.0 : 0.0;
}

static void add_squares(const void *context, const double *draws, size_t trials, double *outputs) {
	(void)context;
	for (size_t t = 0; t < trials; t++)
		outputs[t] = draws[t] * draws[t] + draws[trials + t] * draws[trials + t];
}

/* asked, x1, x2, u, r. */
static double trials_squares(const given *g) {
	const double *n = g->numbers, r[] = {1.0, n[4], n[4], 1.0};
	const fl_input inputs[] = {{FL_SHAPE_NORMAL, n[1], n[3], 0.0}, {FL_SHAPE_NORMAL, n[2], n[3], 0.0}};
	fl_model model = {.inputs = inputs, .input_count = 2, .correlation = r, .output_count = 1, .evaluate = add_squares};
	fl_propagated out;
	return propagate(g, &model, 0.95, &out) ? pick(&out, n[0]) : NAN;
}

/* ---- the table ---- */

static const published_function functions[] = {
    {"both.intercept", both_intercept, 0, 0, 4, 4},
    {"both.slope", both_slope, 0, 0, 4, 4},
    {"both.sum_sq", both_sum_sq, 0, 0, 4, 4},
    {"both.dof", both_dof, 0, 0, 4, 4},
    {"distance.intercept", distance_intercept, 0, 0, 4, 4},
    {"distance.slope", distance_slope, 0, 0, 4, 4},
    {"distance.sum_sq", distance_sum_sq, 0, 0, 4, 4},
    {"correlated.intercept", correlated_intercept, 1, 1, 3, 3},
    {"correlated.slope", correlated_slope, 1, 1, 3, 3},
    {"correlated.u_intercept", correlated_u_intercept, 1, 1, 3, 3},
    {"correlated.u_slope", correlated_u_slope, 1, 1, 3, 3},
    {"correlated.cov", correlated_cov, 1, 1, 3, 3},
    {"correlated.sum_sq", correlated_sum_sq, 1, 1, 3, 3},
    {"shared.intercept", shared_intercept, 2, 2, 2, 2},
    {"shared.u_intercept", shared_u_intercept, 2, 2, 2, 2},
    {"shared.u_slope", shared_u_slope, 2, 2, 2, 2},
    {"lack.f", lack_f, 1, 1, 2, 2},
    {"lack.dof", lack_dof, 1, 1, 2, 2},
    {"lack.dof_pure", lack_dof_pure, 1, 1, 2, 2},
    {"lack.s_pure", lack_s_pure, 1, 1, 2, 2},
    {"lack.critical", lack_critical, 2, 2, 2, 2},
    {"curve.x", curve_x, 6, 6, 2, 2},
    {"curve.low", curve_low, 6, 6, 2, 2},
    {"curve.high", curve_high, 6, 6, 2, 2},
    {"inverse.x", inverse_x, 3, 3, 2, 2},
    {"inverse.u", inverse_u, 3, 3, 2, 2},
    {"inverse.half", inverse_half, 3, 3, 2, 2},
    {"band", band, 4, 4, 2, 2},
    {"conformance", conformance, 4, 4, 0, 0},
    {"conformance.reading_above", reading_above, 3, 3, 0, 0},
    {"risk.consumer", risk_consumer, 7, 7, 0, 0},
    {"risk.producer", risk_producer, 7, 7, 0, 0},
    {"risk.non_conforming", risk_non_conforming, 7, 7, 0, 0},
    {"ratio.consumer", ratio_consumer, 4, 4, 0, 0},
    {"ratio.producer", ratio_producer, 4, 4, 0, 0},
    {"ratio.worst", ratio_worst, 2, 2, 0, 0},
    {"trials.sum", trials_sum, 5, 29, 0, 0},
    {"trials.sum_k", trials_sum_k, 5, 29, 0, 0},
    {"trials.sum_validates", trials_sum_validates, 5, 29, 0, 0},
    {"trials.mass", trials_mass, 1, 1, 0, 0},
    {"trials.mass_validates", trials_mass_validates, 3, 3, 0, 0},
    {"trials.squares", trials_squares, 5, 5, 0, 0},
};

const published_function *find_uncertainty_function(const char *name) {
	for (size_t i = 0; i < sizeof functions / sizeof *functions; i++)
		if (strcmp(functions[i].name, name) == 0)
			return &functions[i];
	return NULL;
}
