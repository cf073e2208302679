/* numeric/errors_in_variables.c - straight lines through points whose x and y are both uncertain, or correlated.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * All work on data moved to their means, so that an origin far away costs no digits; the line is moved back at the end.
 * Names follow ISO/TS 28037:2010: f, g, h are the columns 1, x and the residual, made equally certain and independent.
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <float.h>
#include <gsl/gsl_blas.h>
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_linalg.h>
#include <math.h>
#include <string.h>

enum { STEPS_MOST = 500, POINTS_MOST = 2000 };

/* The data about their means. */
typedef struct centred {
	size_t n;
	double *x, *y; /* from the arena */
	double x_mean, y_mean;
} centred;

static fl_status check_points(const double *x, const double *y, size_t n, fl_error *err) {
	if (n < 2 || n > POINTS_MOST)
		return fl_fail(err, FL_E_NUMERIC, "a line needs two to %d points, not %zu", POINTS_MOST, n);
	if (!fl_numeric_all_finite(x, n) || !fl_numeric_all_finite(y, n))
		return fl_fail(err, FL_E_NUMERIC, "a line through points that are not all numbers");
	if (fl_numeric_all_equal(x, n))
		return fl_fail(err, FL_E_NUMERIC, "all points stand at the same place: no line is determined");
	return FL_OK;
}

static fl_status centre(const double *x, const double *y, size_t n, fl_arena *arena, centred *out, fl_error *err) {
	*out =
	    (centred){.n = n, .x = fl_arena_alloc(arena, n, sizeof(double)), .y = fl_arena_alloc(arena, n, sizeof(double))};
	if (!out->x || !out->y)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a line through %zu points", n);
	for (size_t i = 0; i < n; i++) {
		out->x_mean += (x[i] - out->x_mean) / (double)(i + 1);
		out->y_mean += (y[i] - out->y_mean) / (double)(i + 1);
	}
	for (size_t i = 0; i < n; i++) {
		out->x[i] = x[i] - out->x_mean;
		out->y[i] = y[i] - out->y_mean;
	}
	return FL_OK;
}

/* Moves a line found about the means back to the origin. */
static fl_status move_back(const centred *c, fl_line *line, fl_error *err) {
	line->max_abs_residual = 0.0;
	for (size_t i = 0; i < c->n; i++)
		line->max_abs_residual = fmax(line->max_abs_residual, fabs(c->y[i] - line->intercept - line->slope * c->x[i]));
	line->intercept += c->y_mean - line->slope * c->x_mean;
	line->var_intercept += c->x_mean * (c->x_mean * line->var_slope - 2.0 * line->cov);
	line->cov -= c->x_mean * line->var_slope;
	line->dof = (int)c->n - 2;
	line->s = line->dof > 0 ? sqrt(line->sum_sq / line->dof) : 0.0;
	if (!isfinite(line->intercept) || !isfinite(line->slope) || !isfinite(line->var_slope))
		return fl_fail(err, FL_E_NUMERIC, "the points and their uncertainties do not determine a line");
	return FL_OK;
}

/* The solution of f a + g b = h and its covariance, from the sums over all rows. ISO/TS 28037 clause 6.3, steps 3 to 6;
 * g_mean makes the columns orthogonal. */
typedef struct step {
	double a, b, var_a, var_b, cov;
} step;

static step solve_rows(const double *f, const double *g, const double *h, size_t n) {
	double ff = 0.0, fg = 0.0, fh = 0.0, gg = 0.0, gh = 0.0;
	for (size_t i = 0; i < n; i++) {
		ff += f[i] * f[i];
		fg += f[i] * g[i];
		fh += f[i] * h[i];
	}
	double g_mean = fg / ff, h_mean = fh / ff;
	for (size_t i = 0; i < n; i++) {
		double gi = g[i] - g_mean * f[i];
		gg += gi * gi;
		gh += gi * (h[i] - h_mean * f[i]);
	}
	step s = {.b = gh / gg, .var_a = 1.0 / ff + g_mean * g_mean / gg, .var_b = 1.0 / gg, .cov = -g_mean / gg};
	s.a = h_mean - s.b * g_mean;
	return s;
}

/* A step that no longer changes what can be told apart. */
static bool is_settled(const step *s, const fl_line *line) {
	return fabs(s->a) <= 1e-12 * sqrt(s->var_a) + 4.0 * DBL_EPSILON * fabs(line->intercept) &&
	       fabs(s->b) <= 1e-12 * sqrt(s->var_b) + 4.0 * DBL_EPSILON * fabs(line->slope);
}

static void keep_covariance(const step *s, fl_line *line) {
	line->var_intercept = s->var_a;
	line->var_slope = s->var_b;
	line->cov = s->cov;
}

/* ---- independent uncertainties: ISO/TS 28037 clause 7 ---- */

/* One Gauss-Newton step: each point is weighed by 1/(uy^2 + b^2 ux^2), and x* is where the line passes it nearest. */
static step step_both(const centred *c, const double *ux, const double *uy, fl_line *line, double *rows) {
	double *f = rows, *g = rows + c->n, *h = rows + 2 * c->n;
	line->sum_sq = 0.0;
	for (size_t i = 0; i < c->n; i++) {
		double vx = ux[i] * ux[i], vy = uy[i] * uy[i], v = vy + line->slope * line->slope * vx;
		double x_best = (c->x[i] * vy + line->slope * vx * (c->y[i] - line->intercept)) / v;
		f[i] = 1.0 / sqrt(v);
		g[i] = f[i] * x_best;
		h[i] = f[i] * (c->y[i] - line->intercept - line->slope * c->x[i]);
		line->sum_sq += h[i] * h[i];
	}
	return solve_rows(f, g, h, c->n);
}

static fl_status check_uncertainties(const double *ux, const double *uy, size_t n, fl_error *err) {
	for (size_t i = 0; i < n; i++)
		if (!(ux[i] >= 0.0) || !(uy[i] >= 0.0) || !isfinite(ux[i]) || !isfinite(uy[i]) || !(ux[i] + uy[i] > 0.0))
			return fl_fail(err, FL_E_NUMERIC, "point %zu has the uncertainties %g and %g: one must be above zero",
			               i + 1, ux[i], uy[i]);
	return FL_OK;
}

static fl_status iterate_both(const centred *c, const double *ux, const double *uy, fl_line *line, double *rows,
                              fl_error *err) {
	for (int i = 0; i < STEPS_MOST; i++) {
		step s = step_both(c, ux, uy, line, rows);
		if (!isfinite(s.a) || !isfinite(s.b))
			break;
		keep_covariance(&s, line);
		if (is_settled(&s, line))
			return FL_OK;
		line->intercept += s.a;
		line->slope += s.b;
	}
	return fl_fail(err, FL_E_NUMERIC, "no line settles for these points and uncertainties in %d steps", STEPS_MOST);
}

/* The ordinary line through the centred points: where the search begins. */
static fl_line begin_with(const centred *c) {
	fl_line line = {0};
	double sxx = 0.0, sxy = 0.0;
	for (size_t i = 0; i < c->n; i++) {
		sxx += c->x[i] * c->x[i];
		sxy += c->x[i] * c->y[i];
	}
	line.slope = sxy / sxx;
	return line;
}

fl_status fl_numeric_line_both(const double *x, const double *y, const double *ux, const double *uy, size_t n,
                               fl_line *out, fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status >= 0)
		status = check_uncertainties(ux, uy, n, err);
	if (status < 0)
		return status;
	fl_arena arena = {0};
	centred c;
	status = centre(x, y, n, &arena, &c, err);
	double *rows = fl_arena_alloc(&arena, 3 * n, sizeof *rows);
	if (status >= 0 && !rows)
		status = fl_fail(err, FL_E_MEMORY, "out of memory for a line through %zu points", n);
	if (status >= 0) {
		fl_line line = begin_with(&c);
		status = iterate_both(&c, ux, uy, &line, rows, err);
		if (status >= 0)
			status = move_back(&c, &line, err);
		if (status >= 0)
			*out = line;
	}
	fl_arena_free(&arena);
	return status;
}

/* ---- correlated y: ISO/TS 28037 clause 9 ---- */

/* A copy of a covariance matrix, decomposed into its lower triangle; NULL if it is none. */
static gsl_matrix *decompose(const double *covariance, size_t n, fl_error *err) {
	if (!fl_numeric_all_finite(covariance, n * n)) {
		(void)fl_fail(err, FL_E_NUMERIC, "the covariance matrix is not all numbers");
		return NULL;
	}
	for (size_t i = 0; i < n; i++)
		for (size_t k = 0; k < i; k++) {
			double a = covariance[i * n + k], b = covariance[k * n + i];
			double scale = sqrt(fabs(covariance[i * n + i] * covariance[k * n + k]));
			if (fabs(a - b) > 1e-12 * scale) {
				(void)fl_fail(err, FL_E_NUMERIC, "the covariance matrix is not symmetric: %g against %g at %zu and %zu",
				              a, b, i + 1, k + 1);
				return NULL;
			}
		}
	gsl_matrix *triangle = gsl_matrix_alloc(n, n);
	if (!triangle) {
		(void)fl_fail(err, FL_E_MEMORY, "out of memory for a covariance matrix of %zu rows", n);
		return NULL;
	}
	memcpy(triangle->data, covariance, n * n * sizeof *covariance);
	if (gsl_linalg_cholesky_decomp1(triangle) == GSL_SUCCESS)
		return triangle;
	(void)fl_fail(err, FL_E_NUMERIC, "the covariance matrix is not positive definite");
	gsl_matrix_free(triangle);
	return NULL;
}

/* Solves triangle v = v in place: makes a column's rows equally certain and independent. */
static void whiten(const gsl_matrix *triangle, double *v) {
	gsl_vector_view view = gsl_vector_view_array(v, triangle->size1);
	gsl_blas_dtrsv(CblasLower, CblasNoTrans, CblasNonUnit, triangle, &view.vector);
}

static fl_status fit_correlated(const centred *c, const double *covariance, double *rows, fl_line *line,
                                fl_error *err) {
	gsl_matrix *triangle = decompose(covariance, c->n, err);
	if (!triangle)
		return FL_E_NUMERIC;
	double *f = rows, *g = rows + c->n, *h = rows + 2 * c->n;
	for (size_t i = 0; i < c->n; i++) {
		f[i] = 1.0;
		g[i] = c->x[i];
		h[i] = c->y[i];
	}
	whiten(triangle, f);
	whiten(triangle, g);
	whiten(triangle, h);
	gsl_matrix_free(triangle);
	step s = solve_rows(f, g, h, c->n);
	*line = (fl_line){.intercept = s.a, .slope = s.b};
	keep_covariance(&s, line);
	for (size_t i = 0; i < c->n; i++) {
		double residual = h[i] - s.a * f[i] - s.b * g[i];
		line->sum_sq += residual * residual;
	}
	return FL_OK;
}

fl_status fl_numeric_line_correlated(const double *x, const double *y, const double *covariance_y, size_t n,
                                     fl_line *out, fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	/* GSL would end the program on an error; here it is a value. */
	gsl_error_handler_t *handler = gsl_set_error_handler_off();
	fl_arena arena = {0};
	centred c;
	fl_line line;
	status = centre(x, y, n, &arena, &c, err);
	double *rows = fl_arena_alloc(&arena, 3 * n, sizeof *rows);
	if (status >= 0 && !rows)
		status = fl_fail(err, FL_E_MEMORY, "out of memory for a line through %zu points", n);
	if (status >= 0)
		status = fit_correlated(&c, covariance_y, rows, &line, err);
	if (status >= 0)
		status = move_back(&c, &line, err);
	if (status >= 0)
		*out = line;
	fl_arena_free(&arena);
	gsl_set_error_handler(handler);
	return status;
}

/* ---- everything correlated: ISO/TS 28037 clause 10 ---- */

/* Unknowns: x* of every point, then intercept and slope. */
typedef struct distance_fit {
	const centred *c;
	gsl_matrix *triangle; /* of the covariance */
	gsl_matrix *jacobian; /* 2n by n + 2 */
	gsl_vector *residual, *change, *rest, *tau;
	double *x_best;
} distance_fit;

static void distance_free(distance_fit *d) {
	gsl_matrix_free(d->triangle);
	gsl_matrix_free(d->jacobian);
	gsl_vector_free(d->residual);
	gsl_vector_free(d->change);
	gsl_vector_free(d->rest);
	gsl_vector_free(d->tau);
}

static fl_status distance_new(distance_fit *d, const centred *c, const double *covariance, fl_arena *arena,
                              fl_error *err) {
	size_t n = c->n;
	*d = (distance_fit){.c = c,
	                    .triangle = decompose(covariance, 2 * n, err),
	                    .jacobian = gsl_matrix_alloc(2 * n, n + 2),
	                    .residual = gsl_vector_alloc(2 * n),
	                    .change = gsl_vector_alloc(n + 2),
	                    .rest = gsl_vector_alloc(2 * n),
	                    .tau = gsl_vector_alloc(n + 2),
	                    .x_best = fl_arena_alloc(arena, n, sizeof(double))};
	if (!d->triangle)
		return FL_E_NUMERIC;
	if (!d->jacobian || !d->residual || !d->change || !d->rest || !d->tau || !d->x_best)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a line through %zu points", n);
	memcpy(d->x_best, c->x, n * sizeof *c->x);
	return FL_OK;
}

/* Residuals x - x*, y - a - b x*, and how the model moves with the unknowns, both whitened. */
static void linearise(distance_fit *d, fl_line *line) {
	size_t n = d->c->n;
	gsl_matrix_set_zero(d->jacobian);
	for (size_t i = 0; i < n; i++) {
		gsl_vector_set(d->residual, i, d->c->x[i] - d->x_best[i]);
		gsl_vector_set(d->residual, n + i, d->c->y[i] - line->intercept - line->slope * d->x_best[i]);
		gsl_matrix_set(d->jacobian, i, i, 1.0);
		gsl_matrix_set(d->jacobian, n + i, i, line->slope);
		gsl_matrix_set(d->jacobian, n + i, n, 1.0);
		gsl_matrix_set(d->jacobian, n + i, n + 1, d->x_best[i]);
	}
	gsl_blas_dtrsv(CblasLower, CblasNoTrans, CblasNonUnit, d->triangle, d->residual);
	gsl_blas_dtrsm(CblasLeft, CblasLower, CblasNoTrans, CblasNonUnit, 1.0, d->triangle, d->jacobian);
	double norm = gsl_blas_dnrm2(d->residual);
	line->sum_sq = norm * norm;
}

/* The covariance of intercept and slope from the last corner of R: (R'R)^-1 there, since R is upper triangular. */
static step corner_covariance(const distance_fit *d) {
	size_t n = d->c->n;
	double r = gsl_matrix_get(d->jacobian, n, n), q = gsl_matrix_get(d->jacobian, n, n + 1);
	double t = gsl_matrix_get(d->jacobian, n + 1, n + 1);
	double var_b = 1.0 / (t * t);
	return (step){.a = gsl_vector_get(d->change, n),
	              .b = gsl_vector_get(d->change, n + 1),
	              .var_a = (1.0 + q * q * var_b) / (r * r),
	              .var_b = var_b,
	              .cov = -q / r * var_b};
}

static fl_status iterate_distance(distance_fit *d, fl_line *line, fl_error *err) {
	size_t n = d->c->n;
	for (int i = 0; i < STEPS_MOST; i++) {
		linearise(d, line);
		if (gsl_linalg_QR_decomp(d->jacobian, d->tau) != GSL_SUCCESS ||
		    gsl_linalg_QR_lssolve(d->jacobian, d->tau, d->residual, d->change, d->rest) != GSL_SUCCESS)
			break;
		step s = corner_covariance(d);
		if (!isfinite(s.a) || !isfinite(s.b))
			break;
		keep_covariance(&s, line);
		for (size_t k = 0; k < n; k++)
			d->x_best[k] += gsl_vector_get(d->change, k);
		line->intercept += s.a;
		line->slope += s.b;
		if (is_settled(&s, line))
			return FL_OK;
	}
	return fl_fail(err, FL_E_NUMERIC, "no line settles for these points and covariances in %d steps", STEPS_MOST);
}

static fl_status fit_distance(const centred *c, const double *covariance, fl_arena *arena, fl_line *line,
                              double *x_best, fl_error *err) {
	distance_fit d;
	*line = begin_with(c);
	fl_status status = distance_new(&d, c, covariance, arena, err);
	if (status >= 0)
		status = iterate_distance(&d, line, err);
	for (size_t i = 0; status >= 0 && x_best && i < c->n; i++)
		x_best[i] = d.x_best[i] + c->x_mean;
	distance_free(&d);
	return status;
}

fl_status fl_numeric_line_distance(const double *x, const double *y, const double *covariance, size_t n, fl_line *out,
                                   double *x_best, fl_error *err) {
	fl_status status = check_points(x, y, n, err);
	if (status < 0)
		return status;
	gsl_error_handler_t *handler = gsl_set_error_handler_off();
	fl_arena arena = {0};
	centred c;
	fl_line line;
	status = centre(x, y, n, &arena, &c, err);
	if (status >= 0)
		status = fit_distance(&c, covariance, &arena, &line, x_best, err);
	if (status >= 0)
		status = move_back(&c, &line, err);
	if (status >= 0)
		*out = line;
	fl_arena_free(&arena);
	gsl_set_error_handler(handler);
	return status;
}

double fl_numeric_chi_squared_tail(double chi_squared, double dof) {
	if (!(dof >= 1.0) || !(chi_squared >= 0.0))
		return NAN;
	return gsl_cdf_chisq_Q(chi_squared, dof);
}
