/* numeric/inverse.c - from a reading back to what caused it, with an interval.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <float.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_roots.h>
#include <math.h>

static fl_status check(double y, double probability, double slope, fl_error *err) {
	if (!isfinite(y) || !(probability > 0.0 && probability < 1.0))
		return fl_fail(err, FL_E_NUMERIC, "the cause of a reading %g with probability %g", y, probability);
	if (slope == 0.0)
		return fl_fail(err, FL_E_NUMERIC, "the slope is zero: a reading tells nothing of its cause");
	return FL_OK;
}

/* Fieller's interval: all x at which y lies within t standard uncertainties of the line. With x = x0 + d and v the
 * variance of y - line(x0): slope^2 d^2 = t^2 (v + 2 d c + d^2 var_slope), c = cov + x0 var_slope. */
static void find_fieller(const fl_line *line, double t, double v, fl_inverse *found) {
	double tt = t * t, c = line->cov + found->x * line->var_slope;
	found->g = tt * line->var_slope / (line->slope * line->slope);
	found->bounded = found->g < 1.0;
	found->low = -INFINITY;
	found->high = INFINITY;
	if (!found->bounded)
		return;
	double a = line->slope * line->slope - tt * line->var_slope;
	double half = sqrt(fmax(0.0, tt * tt * c * c + a * tt * v)) / a, middle = tt * c / a;
	found->low = found->x + middle - half;
	found->high = found->x + middle + half;
}

static fl_status invert(const fl_line *line, double y, double var_y, double t, fl_inverse *out, fl_error *err) {
	fl_inverse found = {.x = (y - line->intercept) / line->slope};
	double at, u_line;
	fl_numeric_line_at(line, found.x, &at, &u_line);
	double v = var_y + u_line * u_line;
	found.u = sqrt(v) / fabs(line->slope);
	found.half = t * found.u;
	find_fieller(line, t, v, &found);
	if (!isfinite(found.x) || !isfinite(found.u))
		return fl_fail(err, FL_E_NUMERIC, "the slope %g is too small to tell the cause of %g", line->slope, y);
	*out = found;
	return FL_OK;
}

fl_status fl_numeric_inverse(const fl_line *line, double y, size_t repeats, double probability, fl_inverse *out,
                             fl_error *err) {
	fl_status status = check(y, probability, line->slope, err);
	if (status < 0)
		return status;
	if (line->dof < 1 || repeats < 1)
		return fl_fail(err, FL_E_NUMERIC, "%d degrees of freedom and %zu readings: at least one of each is needed",
		               line->dof, repeats);
	double var_y = line->s * line->s / (double)repeats;
	return invert(line, y, var_y, fl_numeric_student(probability, line->dof), out, err);
}

fl_status fl_numeric_inverse_known(const fl_line *line, double y, double u_y, double probability, fl_inverse *out,
                                   fl_error *err) {
	fl_status status = check(y, probability, line->slope, err);
	if (status < 0)
		return status;
	if (!(u_y >= 0.0) || isinf(u_y))
		return fl_fail(err, FL_E_NUMERIC, "a reading with the uncertainty %g", u_y);
	return invert(line, y, u_y * u_y, fl_numeric_student(probability, INFINITY), out, err);
}

/* ---- polynomials ---- */

/* The curve, its prediction limit `side` half-widths away (0: the curve itself), less y. */
typedef struct limit {
	const double *c, *covariance;
	size_t p;
	double var_y, t, side, y;
} limit;

static double value_at(const limit *l, double x) {
	double sum = 0.0;
	for (size_t j = l->p; j-- > 0;)
		sum = sum * x + l->c[j];
	return sum;
}

static double variance_at(const limit *l, double x) {
	double sum = 0.0, xi = 1.0;
	for (size_t i = 0; i < l->p; i++, xi *= x) {
		double row = 0.0;
		for (size_t k = l->p; k-- > 0;)
			row = row * x + l->covariance[i * l->p + k];
		sum += xi * row;
	}
	return fmax(0.0, sum);
}

static double miss(double x, void *parameters) {
	const limit *l = parameters;
	double half = l->side != 0.0 ? l->side * l->t * sqrt(l->var_y + variance_at(l, x)) : 0.0;
	return value_at(l, x) + half - l->y;
}

/* Where a limit meets y within [from, to]; NAN if it does not. */
static double meet(limit l, double side, double from, double to) {
	l.side = side;
	double at_from = miss(from, &l), at_to = miss(to, &l);
	if (!(at_from * at_to <= 0.0))
		return NAN;
	gsl_function function = {.function = miss, .params = &l};
	gsl_root_fsolver *solver = gsl_root_fsolver_alloc(gsl_root_fsolver_brent);
	if (!solver || gsl_root_fsolver_set(solver, &function, from, to) != GSL_SUCCESS) {
		gsl_root_fsolver_free(solver);
		return NAN;
	}
	double low = from, high = to, tolerance = 4.0 * DBL_EPSILON * (fabs(from) + fabs(to));
	for (int i = 0; i < 200 && high - low > tolerance; i++) {
		if (gsl_root_fsolver_iterate(solver) != GSL_SUCCESS)
			break;
		low = gsl_root_fsolver_x_lower(solver);
		high = gsl_root_fsolver_x_upper(solver);
	}
	double root = gsl_root_fsolver_root(solver);
	gsl_root_fsolver_free(solver);
	return root;
}

static double slope_at(const limit *l, double x) {
	double sum = 0.0;
	for (size_t j = l->p; j-- > 1;)
		sum = sum * x + (double)j * l->c[j];
	return sum;
}

static fl_status invert_curve(const limit *l, double from, double to, fl_inverse *out, fl_error *err) {
	fl_inverse found = {.x = meet(*l, 0.0, from, to)};
	if (isnan(found.x))
		return fl_fail(err, FL_E_NUMERIC, "the curve does not reach %g between %g and %g", l->y, from, to);
	double slope = slope_at(l, found.x), rising = slope > 0.0 ? 1.0 : -1.0;
	if (slope == 0.0)
		return fl_fail(err, FL_E_NUMERIC, "the curve is level at %g: a reading tells nothing of its cause", found.x);
	found.u = sqrt(l->var_y + variance_at(l, found.x)) / fabs(slope);
	found.low = meet(*l, rising, from, to);
	found.high = meet(*l, -rising, from, to);
	found.bounded = !isnan(found.low) && !isnan(found.high);
	if (isnan(found.low))
		found.low = -INFINITY;
	if (isnan(found.high))
		found.high = INFINITY;
	*out = found;
	return FL_OK;
}

fl_status fl_numeric_inverse_curve(const double *c, const double *covariance, size_t p, double s, double dof, double y,
                                   size_t repeats, double probability, double from, double to, fl_inverse *out,
                                   fl_error *err) {
	fl_status status = check(y, probability, p > 1 ? 1.0 : 0.0, err);
	if (status < 0)
		return status;
	if (!fl_numeric_all_finite(c, p) || !fl_numeric_all_finite(covariance, p * p) || !(s >= 0.0) || isinf(s))
		return fl_fail(err, FL_E_NUMERIC, "a curve that is not all numbers");
	if (!(dof >= 1.0) || repeats < 1 || !(from < to) || isinf(from) || isinf(to))
		return fl_fail(err, FL_E_NUMERIC, "%g degrees of freedom, %zu readings, from %g to %g make no sense", dof,
		               repeats, from, to);
	limit l = {.c = c, .covariance = covariance, .p = p, .var_y = s * s / (double)repeats, .y = y};
	l.t = fl_numeric_student(probability, dof);
	gsl_error_handler_t *handler = gsl_set_error_handler_off();
	status = invert_curve(&l, from, to, out, err);
	gsl_set_error_handler(handler);
	return status;
}
