/* numeric/conformity.c - the probability that an item conforms, and the risks of a decision rule. JCGM 106:2012.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/numeric.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_integration.h>
#include <math.h>

/* The probability of a standard normal between two places, by whichever tails lose no digits. */
static double between(double low, double high) {
	if (!(low < high))
		return 0.0;
	if (low > 0.0)
		return gsl_cdf_ugaussian_Q(low) - gsl_cdf_ugaussian_Q(high);
	if (high < 0.0)
		return gsl_cdf_ugaussian_P(high) - gsl_cdf_ugaussian_P(low);
	return 1.0 - gsl_cdf_ugaussian_P(low) - gsl_cdf_ugaussian_Q(high);
}

/* The probability of less than `low` or more than `high`. */
static double outside(double low, double high) {
	return low < high ? gsl_cdf_ugaussian_P(low) + gsl_cdf_ugaussian_Q(high) : 1.0;
}

static bool is_interval(fl_interval t) {
	return t.low < t.high && t.low < INFINITY && t.high > -INFINITY;
}

double fl_numeric_conformance(double y, double u, fl_interval tolerance) {
	if (!isfinite(y) || !(u >= 0.0) || isinf(u) || !is_interval(tolerance))
		return NAN;
	if (u == 0.0)
		return tolerance.low <= y && y <= tolerance.high ? 1.0 : 0.0;
	return between((tolerance.low - y) / u, (tolerance.high - y) / u);
}

double fl_numeric_conformance_with_prior(double y, double u, double prior_mean, double prior_u, fl_interval tolerance) {
	if (!(u >= 0.0) || !(prior_u >= 0.0) || !(u + prior_u > 0.0))
		return NAN;
	double vu = u * u, vp = prior_u * prior_u;
	double mean = (y * vp + prior_mean * vu) / (vu + vp);
	return fl_numeric_conformance(mean, u * prior_u / sqrt(vu + vp), tolerance);
}

/* ---- global risks ---- */

/* What is integrated over the prior: z standard deviations from its mean. */
typedef struct risk {
	double mean, prior_u, u;
	fl_interval acceptance;
	bool rejected; /* the probability of rejection, not of acceptance */
} risk;

static double weigh(double z, void *parameters) {
	const risk *r = parameters;
	double item = r->mean + r->prior_u * z;
	double low = (r->acceptance.low - item) / r->u, high = (r->acceptance.high - item) / r->u;
	double chance = r->rejected ? outside(low, high) : between(low, high);
	return chance * exp(-0.5 * z * z) / sqrt(2.0 * 3.14159265358979323846);
}

/* The prior's far ends hold less than 10^-300. */
static const double far_away = 37.0;

static int add_cut(double *cuts, int count, double z, double low, double high) {
	if (z > low && z < high)
		cuts[count++] = z;
	return count;
}

/* Places between low and high where the integrand changes quickly, in order, with both ends. */
static int find_cuts(const risk *r, double low, double high, double *cuts) {
	static const double steps[] = {-8.0, -3.0, 0.0, 3.0, 8.0};
	const double limits[] = {r->acceptance.low, r->acceptance.high};
	int count = 0;
	cuts[count++] = low;
	for (int limit = 0; limit < 2; limit++)
		for (int i = 0; i < 5; i++)
			count = add_cut(cuts, count, (limits[limit] + steps[i] * r->u - r->mean) / r->prior_u, low, high);
	for (int z = -8; z <= 8; z += 4)
		count = add_cut(cuts, count, z, low, high);
	cuts[count++] = high;
	for (int i = 1; i < count; i++) /* few, and nearly in order: by insertion */
		for (int k = i; k > 0 && cuts[k] < cuts[k - 1]; k--) {
			double swap = cuts[k];
			cuts[k] = cuts[k - 1];
			cuts[k - 1] = swap;
		}
	return count;
}

/* Integrates from low to high standard deviations of the prior; false if the sum does not settle. */
static bool integrate(risk r, double low, double high, gsl_integration_workspace *work, double *sum) {
	double cuts[20];
	low = fmax(low, -far_away);
	high = fmin(high, far_away);
	if (!(low < high))
		return true;
	gsl_function function = {.function = weigh, .params = &r};
	int count = find_cuts(&r, low, high, cuts);
	for (int i = 0; i + 1 < count; i++) {
		double part, error;
		if (!(cuts[i] < cuts[i + 1]))
			continue;
		int failed = gsl_integration_qag(&function, cuts[i], cuts[i + 1], 1e-14, 1e-10, 200, GSL_INTEG_GAUSS31, work,
		                                 &part, &error);
		if (failed && failed != GSL_EROUND)
			return false;
		*sum += part;
	}
	return isfinite(*sum);
}

static fl_status check_risk(double prior_mean, double prior_u, double u, fl_interval tolerance, fl_interval acceptance,
                            fl_error *err) {
	if (!isfinite(prior_mean) || !(prior_u > 0.0) || !(u > 0.0) || isinf(prior_u) || isinf(u))
		return fl_fail(err, FL_E_NUMERIC, "a prior of %g with %g and a measurement with %g make no sense", prior_mean,
		               prior_u, u);
	if (!is_interval(tolerance))
		return fl_fail(err, FL_E_NUMERIC, "a tolerance from %g to %g", tolerance.low, tolerance.high);
	if (!is_interval(acceptance))
		return fl_fail(err, FL_E_NUMERIC, "an acceptance interval from %g to %g: the guard band leaves nothing",
		               acceptance.low, acceptance.high);
	return FL_OK;
}

fl_status fl_numeric_global_risk(double prior_mean, double prior_u, double u, fl_interval tolerance,
                                 fl_interval acceptance, fl_global_risk *out, fl_error *err) {
	fl_status status = check_risk(prior_mean, prior_u, u, tolerance, acceptance, err);
	if (status < 0)
		return status;
	gsl_error_handler_t *handler = gsl_set_error_handler_off();
	gsl_integration_workspace *work = gsl_integration_workspace_alloc(200);
	double low = (tolerance.low - prior_mean) / prior_u, high = (tolerance.high - prior_mean) / prior_u;
	double spread = hypot(prior_u, u);
	fl_global_risk found = {
	    .non_conforming = outside(low, high),
	    .accepted = between((acceptance.low - prior_mean) / spread, (acceptance.high - prior_mean) / spread)};
	risk r = {.mean = prior_mean, .prior_u = prior_u, .u = u, .acceptance = acceptance};
	bool fine = work && integrate(r, -INFINITY, low, work, &found.consumer) &&
	            integrate(r, high, INFINITY, work, &found.consumer);
	r.rejected = true;
	fine = fine && integrate(r, low, high, work, &found.producer);
	gsl_integration_workspace_free(work);
	gsl_set_error_handler(handler);
	if (!fine)
		return fl_fail(err, FL_E_NUMERIC, "the risks of this rule could not be integrated");
	*out = found;
	return FL_OK;
}

double fl_numeric_prior_u(double half, double reliability, double u, fl_reliability kind) {
	if (!(half > 0.0) || isinf(half) || !(reliability > 0.0 && reliability < 1.0) || !(u >= 0.0))
		return NAN;
	double spread = half / gsl_cdf_ugaussian_Qinv((1.0 - reliability) / 2.0);
	if (kind == FL_RELIABILITY_TRUE)
		return spread;
	return spread > u ? sqrt((spread - u) * (spread + u)) : NAN;
}

/* The risk with half a tolerance of 1, so that U = 1/ratio. */
static fl_status unit_risk(double ratio, double prior_u, double r, fl_global_risk *out, fl_error *err) {
	double expanded = 1.0 / ratio, limit = 1.0 - r * expanded;
	return fl_numeric_global_risk(0.0, prior_u, expanded / 2.0, (fl_interval){-1.0, 1.0}, (fl_interval){-limit, limit},
	                              out, err);
}

static fl_status check_ratio(double ratio, double r, fl_error *err) {
	if (!(ratio > 0.0) || isinf(ratio) || !isfinite(r))
		return fl_fail(err, FL_E_NUMERIC, "a test uncertainty ratio of %g with a guard band of %g U", ratio, r);
	return FL_OK;
}

fl_status fl_numeric_ratio_risk(double ratio, double reliability, fl_reliability kind, double r, fl_global_risk *out,
                                fl_error *err) {
	fl_status status = check_ratio(ratio, r, err);
	if (status < 0)
		return status;
	double prior_u = fl_numeric_prior_u(1.0, reliability, 0.5 / ratio, kind);
	if (isnan(prior_u))
		return fl_fail(err, FL_E_NUMERIC, "no spread of items gives %g in tolerance at a ratio of %g", reliability,
		               ratio);
	return unit_risk(ratio, prior_u, r, out, err);
}

/* The consumer's risk rises with the spread of the items and falls again: a coarse look, then thirds of what is left.
 */
fl_status fl_numeric_ratio_worst(double ratio, double r, double *consumer, fl_error *err) {
	fl_global_risk risk_low, risk_high;
	fl_status status = check_ratio(ratio, r, err);
	double best = 1.0, most = -1.0;
	for (double spread = 0.05; status >= 0 && spread < 20.0; spread *= 1.1) {
		status = unit_risk(ratio, spread, r, &risk_low, err);
		if (status >= 0 && risk_low.consumer > most) {
			most = risk_low.consumer;
			best = spread;
		}
	}
	double low = best / 1.1, high = best * 1.1;
	for (int i = 0; status >= 0 && i < 60; i++) {
		double third = (high - low) / 3.0;
		status = unit_risk(ratio, low + third, r, &risk_low, err);
		if (status >= 0)
			status = unit_risk(ratio, high - third, r, &risk_high, err);
		if (status < 0)
			break;
		most = fmax(most, fmax(risk_low.consumer, risk_high.consumer));
		if (risk_low.consumer < risk_high.consumer)
			low += third;
		else
			high -= third;
	}
	if (status >= 0)
		*consumer = most;
	return status;
}
