/* numeric/budget.c - quantiles and the arithmetic of an uncertainty budget.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/numeric.h"

#include <float.h>
#include <gsl/gsl_cdf.h>
#include <math.h>

double fl_numeric_student(double probability, double dof) {
	if (!(probability > 0.0 && probability < 1.0) || !(dof >= 1.0))
		return NAN;
	double one_tail = (1.0 - probability) / 2.0;
	return isinf(dof) ? gsl_cdf_ugaussian_Qinv(one_tail) : gsl_cdf_tdist_Qinv(one_tail, dof);
}

double fl_numeric_normal_cdf(double z) {
	return gsl_cdf_ugaussian_P(z);
}

double fl_numeric_normal_quantile(double p) {
	if (!(p > 0.0 && p < 1.0))
		return NAN;
	return gsl_cdf_ugaussian_Pinv(p);
}

static fl_status check_term(const fl_budget_term *term, size_t i, fl_error *err) {
	if (!(term->u >= 0.0) || !isfinite(term->u) || !isfinite(term->sensitivity))
		return fl_fail(err, FL_E_NUMERIC, "budget term %zu: standard uncertainty %g, sensitivity %g make no sense",
		               i + 1, term->u, term->sensitivity);
	if (!(term->dof >= 1.0))
		return fl_fail(err, FL_E_NUMERIC, "budget term %zu: %g degrees of freedom, at least 1 are needed", i + 1,
		               term->dof);
	return FL_OK;
}

/* Welch-Satterthwaite: uc^4 / sum(u_i^4 / dof_i). Each share is taken relative to uc, so that nothing underflows. */
static double effective_dof(const fl_budget_term *terms, size_t n, double uc) {
	double sum = 0.0;
	for (size_t i = 0; i < n && uc > 0.0; i++) {
		double share = terms[i].sensitivity * terms[i].u / uc;
		sum += share * share * share * share / terms[i].dof;
	}
	return sum > 0.0 ? 1.0 / sum : INFINITY;
}

/* JCGM 100 G.4.1: the next lower integer. A hair of slack, so that rounding does not make 5 out of 6. */
static double truncated_dof(double dof) {
	return fmax(1.0, floor(dof * (1.0 + 16.0 * DBL_EPSILON)));
}

fl_status fl_numeric_budget(const fl_budget_term *terms, size_t n, double probability, fl_budget_sum *out,
                            fl_error *err) {
	if (n == 0)
		return fl_fail(err, FL_E_NUMERIC, "a budget without terms has no result");
	if (!(probability > 0.0 && probability < 1.0))
		return fl_fail(err, FL_E_NUMERIC, "a coverage probability of %g: it must lie between 0 and 1", probability);
	double uc = 0.0;
	for (size_t i = 0; i < n; i++) {
		fl_status status = check_term(&terms[i], i, err);
		if (status < 0)
			return status;
		uc = hypot(uc, terms[i].sensitivity * terms[i].u);
	}
	fl_budget_sum sum = {.uc = uc, .dof_effective = effective_dof(terms, n, uc)};
	sum.coverage_factor = fl_numeric_student(probability, truncated_dof(sum.dof_effective));
	sum.expanded = sum.coverage_factor * uc;
	if (!isfinite(sum.expanded))
		return fl_fail(err, FL_E_NUMERIC, "the budget's terms are too large to add");
	*out = sum;
	return FL_OK;
}
