/* numeric/lack_of_fit.c - does the model fit, judged by the scatter of repeated readings?
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <gsl/gsl_cdf.h>
#include <math.h>

/* The readings at the x of reading `first`, which must be the first of them. */
typedef struct place {
	size_t count;
	double mean;   /* of y */
	double fitted; /* mean of the model's values, which are equal but for rounding */
	double sum_sq; /* about the mean */
} place;

static bool is_first(const double *x, size_t i) {
	for (size_t k = 0; k < i; k++)
		if (x[k] == x[i])
			return false;
	return true;
}

static place gather(const double *x, const double *y, const double *fitted, size_t n, size_t first) {
	place p = {0};
	for (size_t i = first; i < n; i++)
		if (x[i] == x[first]) {
			double before = y[i] - p.mean;
			p.count++;
			p.mean += before / (double)p.count;
			p.sum_sq += before * (y[i] - p.mean);
			p.fitted += (fitted[i] - p.fitted) / (double)p.count;
		}
	return p;
}

static void judge(fl_lack_of_fit *found) {
	double lack = found->sum_sq_lack / found->dof_lack, pure = found->sum_sq_pure / found->dof_pure;
	if (pure > 0.0)
		found->f = lack / pure;
	else
		found->f = lack > 0.0 ? INFINITY : 0.0;
	found->probability = isinf(found->f) ? 0.0 : gsl_cdf_fdist_Q(found->f, found->dof_lack, found->dof_pure);
}

fl_status fl_numeric_lack_of_fit(const double *x, const double *y, const double *fitted, size_t n, size_t p,
                                 fl_lack_of_fit *out, fl_error *err) {
	if (!fl_numeric_all_finite(x, n) || !fl_numeric_all_finite(y, n) || !fl_numeric_all_finite(fitted, n))
		return fl_fail(err, FL_E_NUMERIC, "lack of fit of points that are not all numbers");
	fl_lack_of_fit found = {0};
	size_t places = 0;
	for (size_t i = 0; i < n; i++)
		if (is_first(x, i)) {
			place here = gather(x, y, fitted, n, i);
			double miss = here.mean - here.fitted;
			places++;
			found.sum_sq_pure += here.sum_sq;
			found.sum_sq_lack += (double)here.count * miss * miss;
		}
	if (places <= p || n == places)
		return fl_fail(
		    err, FL_E_NUMERIC,
		    "%zu readings at %zu places cannot judge a model of %zu coefficients: more places than those and "
		    "repeated readings are needed",
		    n, places, p);
	found.dof_lack = (int)(places - p);
	found.dof_pure = (int)(n - places);
	judge(&found);
	*out = found;
	return FL_OK;
}
