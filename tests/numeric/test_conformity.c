/* tests/numeric/test_conformity.c - probabilities of conformity and risks of a rule, against trials and closed forms.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Published values are held in tests/published (jcgm_106, jcgm_106_risks, z540_ratio).
 */
#include "check.h"

#include "foundleft/numeric.h"

#include <math.h>
#include <stdlib.h>

static const fl_interval band = {-1.0, 1.0};

static void conformance_at_the_limits(void **state) {
	(void)state;
	const fl_interval upper = {-INFINITY, 1.0}, lower = {1.0, INFINITY}, all = {-INFINITY, INFINITY};
	check_near("at the limit, one-sided", 0.5, fl_numeric_conformance(1.0, 0.3, upper), 1e-15);
	check_near("at the limit, from above", 0.5, fl_numeric_conformance(1.0, 0.3, lower), 1e-15);
	check_near("no limit", 1.0, fl_numeric_conformance(7.0, 3.0, all), 1e-15);
	check_near("two-sided, in the middle", 2.0 * fl_numeric_normal_cdf(2.0) - 1.0,
	           fl_numeric_conformance(0.0, 0.5, band), 1e-15);
	check_near("both sides add up", 1.0,
	           fl_numeric_conformance(0.8, 0.3, upper) + fl_numeric_conformance(0.8, 0.3, lower), 1e-15);
	/* Far outside no digits are lost: Q(10) = 7.619853024160526e-24, Abramowitz and Stegun 26.2 gives 7.61985e-24. */
	check_close("far away", 7.619853024160526e-24, fl_numeric_conformance(4.0, 0.3, upper), 1e-10);
	check_close("far away on the other side", 7.619853024160526e-24, fl_numeric_conformance(-2.0, 0.3, lower), 1e-10);
}

/* A measurement without uncertainty decides for itself, and the limits belong to the tolerance. */
static void limits_are_inclusive(void **state) {
	(void)state;
	check_near("on the limit", 1.0, fl_numeric_conformance(1.0, 0.0, band), 0.0);
	check_near("on the lower limit", 1.0, fl_numeric_conformance(-1.0, 0.0, band), 0.0);
	check_near("just above", 0.0, fl_numeric_conformance(nextafter(1.0, 2.0), 0.0, band), 0.0);
	assert_true(isnan(fl_numeric_conformance(NAN, 0.1, band)));
	assert_true(isnan(fl_numeric_conformance(0.0, -0.1, band)));
	assert_true(isnan(fl_numeric_conformance(0.0, 0.1, (fl_interval){1.0, -1.0})));
}

static void prior_knowledge_counts(void **state) {
	(void)state;
	/* A prior much wider than the measurement says nothing; one as narrow draws the value halfway. */
	check_near("wide prior", fl_numeric_conformance(0.9, 0.2, band),
	           fl_numeric_conformance_with_prior(0.9, 0.2, 0.0, 1e6, band), 1e-9);
	check_near("equal widths", fl_numeric_conformance(0.45, 0.2 / sqrt(2.0), band),
	           fl_numeric_conformance_with_prior(0.9, 0.2, 0.0, 0.2, band), 1e-14);
	assert_true(isnan(fl_numeric_conformance_with_prior(0.9, 0.0, 0.0, 0.0, band)));
}

/* The integrals against 4 10^6 items drawn and measured. */
static void risks_agree_with_trials(void **state) {
	(void)state;
	enum { MANY = 1 << 22 };
	static const double cases[][5] = {/* prior mean, prior u, u, acceptance */
	                                  {0.0, 0.6, 0.25, -1.0, 1.0},
	                                  {0.3, 0.5, 0.1, -0.8, 0.8},
	                                  {-0.4, 2.0, 0.3, -1.2, 0.7},
	                                  {0.0, 0.6, 0.25, -INFINITY, 0.9}};
	double *item = malloc(MANY * sizeof *item), *error = malloc(MANY * sizeof *error);
	assert_true(item && error);
	fl_generator g;
	fl_numeric_generator_seed(&g, 106);
	for (size_t c = 0; c < sizeof cases / sizeof *cases; c++) {
		const double *k = cases[c];
		double consumer = 0, producer = 0, accepted = 0, bad = 0, chance = 5.0 * 0.5 / sqrt((double)MANY);
		fl_numeric_draw(&g, &(fl_input){FL_SHAPE_NORMAL, k[0], k[1], 0.0}, item, MANY);
		fl_numeric_draw(&g, &(fl_input){FL_SHAPE_NORMAL, 0.0, k[2], 0.0}, error, MANY);
		for (size_t i = 0; i < MANY; i++) {
			double y = item[i] + error[i];
			bool accept = k[3] <= y && y <= k[4], good = -1.0 <= item[i] && item[i] <= 1.0;
			consumer += accept && !good;
			producer += !accept && good;
			accepted += accept;
			bad += !good;
		}
		fl_global_risk risk;
		assert_int_equal(fl_numeric_global_risk(k[0], k[1], k[2], band, (fl_interval){k[3], k[4]}, &risk, NULL), FL_OK);
		check_near("consumer", risk.consumer, consumer / MANY, chance);
		check_near("producer", risk.producer, producer / MANY, chance);
		check_near("accepted", risk.accepted, accepted / MANY, chance);
		check_near("not conforming", risk.non_conforming, bad / MANY, chance);
		/* Accepted = conforming + wrongly accepted - wrongly rejected, to the digits of the integrals. */
		check_near("account", risk.accepted, 1.0 - risk.non_conforming + risk.consumer - risk.producer, 1e-10);
	}
	free(item);
	free(error);
}

/* A guard band buys the consumer's safety from the producer; the extremes are known. */
static void guard_band_trades_one_risk_for_the_other(void **state) {
	(void)state;
	fl_global_risk last, next;
	assert_int_equal(fl_numeric_ratio_risk(3.0, 0.9, FL_RELIABILITY_TRUE, 0.0, &last, NULL), FL_OK);
	for (double r = 0.25; r <= 1.0; r += 0.25) {
		assert_int_equal(fl_numeric_ratio_risk(3.0, 0.9, FL_RELIABILITY_TRUE, r, &next, NULL), FL_OK);
		assert_true(next.consumer < last.consumer && next.producer > last.producer);
		last = next;
	}
	fl_global_risk sharp;
	assert_int_equal(fl_numeric_ratio_risk(1e6, 0.9, FL_RELIABILITY_TRUE, 0.0, &sharp, NULL), FL_OK);
	check_near("a perfect measurement", 0.0, sharp.consumer + sharp.producer, 1e-6);
	check_near("prior", 0.1, sharp.non_conforming, 1e-12);
}

/* Tolerance 2 % of span, u 0.176 %, as of a dial's uppermost point; prior from 90 % in tolerance: T/1.645. Recomputed
 * apart: 0.0103 and 0.00023. */
static void risk_of_a_calibration_point(void **state) {
	(void)state;
	double half = 2.0, u = 0.176, prior = fl_numeric_prior_u(half, 0.90, u, FL_RELIABILITY_TRUE);
	check_close("prior", half / 1.6448536269514722, prior, 1e-12);
	fl_global_risk simple, guarded;
	const fl_interval tolerance = {-half, half}, inner = {-half + 2 * u, half - 2 * u};
	assert_int_equal(fl_numeric_global_risk(0.0, prior, u, tolerance, tolerance, &simple, NULL), FL_OK);
	assert_int_equal(fl_numeric_global_risk(0.0, prior, u, tolerance, inner, &guarded, NULL), FL_OK);
	check_near("simple", 0.0103, simple.consumer, 5e-5);
	check_near("guarded", 0.00023, guarded.consumer, 5e-6);
}

static void prior_from_reliability(void **state) {
	(void)state;
	double truly = fl_numeric_prior_u(1.0, 0.95, 0.125, FL_RELIABILITY_TRUE);
	double seen = fl_numeric_prior_u(1.0, 0.95, 0.125, FL_RELIABILITY_OBSERVED);
	check_close("observed and true differ by the measurement", truly, hypot(seen, 0.125), 1e-13);
	assert_true(isnan(fl_numeric_prior_u(1.0, 0.95, 0.6, FL_RELIABILITY_OBSERVED)));
	assert_true(isnan(fl_numeric_prior_u(1.0, 1.0, 0.1, FL_RELIABILITY_TRUE)));
	assert_true(isnan(fl_numeric_prior_u(0.0, 0.9, 0.1, FL_RELIABILITY_TRUE)));
}

static void worst_case_is_the_worst(void **state) {
	(void)state;
	double worst;
	assert_int_equal(fl_numeric_ratio_worst(2.5, 0.2, &worst, NULL), FL_OK);
	for (double reliability = 0.02; reliability < 0.999; reliability += 0.02) {
		fl_global_risk risk;
		assert_int_equal(fl_numeric_ratio_risk(2.5, reliability, FL_RELIABILITY_TRUE, 0.2, &risk, NULL), FL_OK);
		assert_true(risk.consumer <= worst + 1e-9);
	}
}

static void refuses_rules_that_make_no_sense(void **state) {
	(void)state;
	fl_global_risk risk;
	double worst;
	const fl_interval nothing = {0.5, -0.5};
	assert_int_equal(fl_numeric_global_risk(0.0, 0.0, 0.1, band, band, &risk, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_global_risk(0.0, 1.0, 0.0, band, band, &risk, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_global_risk(0.0, 1.0, 0.1, band, nothing, &risk, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_global_risk(0.0, 1.0, 0.1, nothing, band, &risk, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_ratio_risk(0.0, 0.9, FL_RELIABILITY_TRUE, 0.0, &risk, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_ratio_risk(0.9, 0.9, FL_RELIABILITY_TRUE, 1.0, &risk, NULL), FL_E_NUMERIC);
	assert_int_equal(fl_numeric_ratio_worst(-1.0, 0.0, &worst, NULL), FL_E_NUMERIC);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(conformance_at_the_limits),
	    cmocka_unit_test(limits_are_inclusive),
	    cmocka_unit_test(prior_knowledge_counts),
	    cmocka_unit_test(risks_agree_with_trials),
	    cmocka_unit_test(guard_band_trades_one_risk_for_the_other),
	    cmocka_unit_test(risk_of_a_calibration_point),
	    cmocka_unit_test(prior_from_reliability),
	    cmocka_unit_test(worst_case_is_the_worst),
	    cmocka_unit_test(refuses_rules_that_make_no_sense),
	};
	return cmocka_run_group_tests_name("numeric conformity", tests, NULL, NULL);
}
