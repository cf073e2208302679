/* numeric/least_squares.c - general linear least squares y = X c.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * GSL's singular value decomposition, with balanced columns, gives the coefficients and (X'X)^-1. The residuals are
 * then taken in doubled precision and fitted in turn, which wins back the digits that a badly conditioned X costs.
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_multifit.h>
#include <math.h>
#include <stdlib.h>

enum { REFINEMENTS = 3 };

/* The model as given, and GSL's working memory. */
typedef struct fit {
	const double *X, *y;
	size_t n, p;
	gsl_multifit_linear_workspace *work;
	gsl_matrix *unscaled; /* (X'X)^-1 */
	gsl_vector *c, *correction, *residual, *ones;
} fit;

static void fit_free(fit *f) {
	gsl_multifit_linear_free(f->work);
	gsl_matrix_free(f->unscaled);
	gsl_vector_free(f->c);
	gsl_vector_free(f->correction);
	gsl_vector_free(f->residual);
	gsl_vector_free(f->ones);
}

static fl_status fit_new(fit *f, fl_error *err) {
	f->work = gsl_multifit_linear_alloc(f->n, f->p);
	f->unscaled = gsl_matrix_alloc(f->p, f->p);
	f->c = gsl_vector_calloc(f->p);
	f->correction = gsl_vector_calloc(f->p);
	f->residual = gsl_vector_calloc(f->n);
	f->ones = gsl_vector_alloc(f->n);
	if (!f->work || !f->unscaled || !f->c || !f->correction || !f->residual || !f->ones)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a fit of %zu points", f->n);
	gsl_vector_set_all(f->ones, 1.0);
	return FL_OK;
}

/* y - x . c with twice the working precision: every rounding error of a product or sum is caught and added at the end
 * (Ogita, Rump and Oishi, Accurate sum and dot product, 2005). */
static double exact_residual(double y, const double *x, const gsl_vector *c) {
	double sum = y, lost = 0.0;
	for (size_t j = 0; j < c->size; j++) {
		double factor = -gsl_vector_get(c, j);
		double product = x[j] * factor;
		lost += fma(x[j], factor, -product);
		double next = sum + product;
		double taken = next - sum;
		lost += (sum - (next - taken)) + (product - taken);
		sum = next;
	}
	return sum + lost;
}

/* Fills the residuals y - X c and returns their sum of squares. */
static double take_residuals(fit *f) {
	double sum = 0.0;
	for (size_t i = 0; i < f->n; i++) {
		double residual = exact_residual(f->y[i], f->X + i * f->p, f->c);
		gsl_vector_set(f->residual, i, residual);
		sum += residual * residual;
	}
	return sum;
}

/* Fits the residuals; FL_E_NUMERIC where the columns of X do not stand apart. */
static fl_status fit_residuals(fit *f, fl_error *err) {
	gsl_matrix_const_view model = gsl_matrix_const_view_array(f->X, f->n, f->p);
	size_t rank = 0;
	double sum_sq;
	int failed = gsl_multifit_wlinear_tsvd(&model.matrix, f->ones, f->residual, GSL_DBL_EPSILON, f->correction,
	                                       f->unscaled, &sum_sq, &rank, f->work);
	if (failed || rank < f->p || !fl_numeric_all_finite(f->correction->data, f->p))
		return fl_fail(err, FL_E_NUMERIC, "the %zu points do not determine %zu coefficients", f->n, f->p);
	return FL_OK;
}

static fl_status fit_coefficients(fit *f, fl_error *err) {
	for (int pass = 0; pass <= REFINEMENTS; pass++) {
		take_residuals(f);
		fl_status status = fit_residuals(f, err);
		if (status < 0)
			return status;
		gsl_vector_add(f->c, f->correction);
	}
	return FL_OK;
}

static void hand_out(fit *f, double *c, double *covariance, double *s, double *sum_sq) {
	*sum_sq = take_residuals(f);
	double variance = f->n > f->p ? *sum_sq / (double)(f->n - f->p) : 0.0;
	*s = sqrt(variance);
	for (size_t j = 0; j < f->p; j++) {
		c[j] = gsl_vector_get(f->c, j);
		for (size_t k = 0; k < f->p; k++)
			covariance[j * f->p + k] = variance * gsl_matrix_get(f->unscaled, j, k);
	}
}

static fl_status check_model(const fit *f, fl_error *err) {
	if (f->p == 0 || f->n < f->p)
		return fl_fail(err, FL_E_NUMERIC, "%zu points cannot determine %zu coefficients", f->n, f->p);
	if (f->n > SIZE_MAX / sizeof(double) / f->p)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a fit of %zu points", f->n);
	if (!fl_numeric_all_finite(f->X, f->n * f->p) || !fl_numeric_all_finite(f->y, f->n))
		return fl_fail(err, FL_E_NUMERIC, "a fit to points that are not all numbers");
	return FL_OK;
}

fl_status fl_numeric_least_squares(const double *X, const double *y, size_t n, size_t p, double *c, double *covariance,
                                   double *s, double *sum_sq, fl_error *err) {
	fit f = {.X = X, .y = y, .n = n, .p = p};
	fl_status status = check_model(&f, err);
	if (status < 0)
		return status;
	/* GSL would end the program on an error; here it is a value. The caller's handler comes back afterwards. */
	gsl_error_handler_t *handler = gsl_set_error_handler_off();
	status = fit_new(&f, err);
	if (status >= 0)
		status = fit_coefficients(&f, err);
	if (status >= 0)
		hand_out(&f, c, covariance, s, sum_sq);
	fit_free(&f);
	gsl_set_error_handler(handler);
	return status;
}
