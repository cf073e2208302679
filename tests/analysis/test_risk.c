/* tests/analysis/test_risk.c - tolerance by zone, specific and global risk, the least ratio of tolerance to
 * uncertainty.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "bench.h"

static fl_extra_term term;

/* A transmitter that reads `excess_ma` too much at 0, 25 .. 100 % of span; U of every point as said, k = 2. */
static const fl_run_result *assess(bench *b, double excess_ma, double U_percent, fl_rule rule) {
	term = (fl_extra_term){"line pressure", U_percent, 2.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, false, NULL};
	b->procedure.extra = &term;
	b->procedure.extra_count = 1;
	b->procedure.rule = rule;
	b->session.reading_count = 0;
	for (int i = 0; i < 5; i++)
		bench_dp(b, 1, FL_PASS_RISING, i, 4.0 * (i + 1) + excess_ma, i * 2500.0);
	return bench_assess(b);
}

/* Zones 20 to 25 % (1 %) and 25 to 50 % (0.5 %) within 2 %: both ends belong to a zone, where two touch the tighter
 * rules; a hair outside it is the rest of the scale. 0.08 mA is 0.5 % of span, exactly at that limit. */
static void zones_with_their_ends(void **state) {
	(void)state;
	static bench b;
	static const fl_zone zones[] = {{20.0, 25.0, {FL_BAND_PERCENT_SPAN, 1.0}},
	                                {25.0, 50.0, {FL_BAND_PERCENT_SPAN, 0.5}}};
	bench_begin_pressure(&b);
	b.procedure.zones = zones;
	b.procedure.zone_count = 2;
	const fl_run_result *run = assess(&b, 0.08, 1e-9, FL_RULE_SIMPLE);
	const double want[5] = {0.02, 0.005, 0.005, 0.02, 0.02};
	for (int i = 0; i < 5; i++) {
		check_near("tolerance", want[i], run->points[i].tolerance_span, 1e-15);
		assert_int_equal(run->points[i].verdict, FL_VERDICT_PASS); /* at the limit is within it */
	}
	assert_ptr_equal(run->points[1].zone, &zones[1]);
	assert_null(run->points[0].zone);
	check_near("a hair beyond", 0.02, fl_analysis_tolerance_at(&b.result, &b.instrument.scale, 0.5001), 1e-15);
	bench_end(&b);
	run = assess(&b, 0.0801, 1e-9, FL_RULE_SIMPLE);
	assert_int_equal(run->verdict, FL_VERDICT_FAIL);
	assert_true(run->worst->zone == &zones[1]);
	assert_int_equal(run->points[0].verdict, FL_VERDICT_PASS);
	assert_false(run->inside_adjust_limit); /* 1.5 % of span, but beyond the zone's tolerance */
	bench_end(&b);
}

/* 0.5 mm2/s of 50 is 1 % of span; 4 % of reading at half of span is 2 %. The instrument's zones go with its tolerance.
 */
static void zones_in_other_units(void **state) {
	(void)state;
	static bench b;
	static const fl_zone zones[] = {{20.0, 30.0, {FL_BAND_DIAL_UNITS, 0.5}},
	                                {45.0, 55.0, {FL_BAND_PERCENT_READING, 4.0}}};
	static const fl_zone of_procedure[] = {{0.0, 100.0, {FL_BAND_PERCENT_SPAN, 0.1}}};
	bench_begin_pressure(&b);
	b.procedure.zones = of_procedure;
	b.procedure.zone_count = 1;
	b.instrument.tolerance = (fl_band){FL_BAND_PERCENT_SPAN, 3.0};
	b.instrument.zones = zones;
	b.instrument.zone_count = 2;
	const fl_run_result *run = assess(&b, 0.0, 1e-9, FL_RULE_SIMPLE);
	check_near("dial units", 0.01, run->points[1].tolerance_span, 1e-15);
	check_near("of reading", 0.02, run->points[2].tolerance_span, 1e-15);
	check_near("elsewhere", 0.03, run->points[3].tolerance_span, 1e-15);
	bench_end(&b);
}

/* Exactly at the limit the true error is beyond it with one half; one u inside with 15.87 % (JCGM 106:2012 7.4 with the
 * normal distribution's table). */
static void specific_risk(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	const fl_run_result *run = assess(&b, 0.32, 0.2, FL_RULE_SIMPLE);
	check_near("at the limit", 0.5, run->points[2].risk, 1e-6);
	bench_end(&b);
	run = assess(&b, 0.32 - 0.016, 0.2, FL_RULE_SIMPLE);
	check_near("one u inside", 0.158655, run->points[2].risk, 1e-5);
	bench_end(&b);
	run = assess(&b, 0.0, 0.2, FL_RULE_SIMPLE);
	check_near("in the middle", 0.0, run->points[2].risk, 1e-12);
	bench_end(&b);
}

/* T = 2 % of span, u = 0.176 %, prior 90 % of the true values in tolerance: one independent computation gives 0.0103 by
 * simple acceptance and 0.00023 guarded with w = U (invented scenario, comparison only). */
static void global_risk(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	b.procedure.reliability = 0.90;
	const fl_run_result *run = assess(&b, 0.0, 0.352, FL_RULE_SIMPLE);
	assert_true(run->points[2].has_global);
	check_near("prior", 0.02 / 1.644854, run->points[2].prior_u_span, 1e-7);
	check_near("simple", 0.0103, run->points[2].global.consumer, 0.00005);
	check_near("out of tolerance before", 0.10, run->points[2].global.non_conforming, 1e-9);
	assert_non_null(strstr(b.result.prior_words, "90 % of the true values"));
	bench_end(&b);
	run = assess(&b, 0.0, 0.352, FL_RULE_GUARDED);
	check_near("guarded", 0.00023, run->points[2].global.consumer, 0.000005);
	check_near("acceptance limit", 0.02 - 0.00352, run->points[2].acceptance_span, 1e-12);
	bench_end(&b);
	b.procedure.reliability_observed = true; /* the same share as observed means a narrower prior */
	run = assess(&b, 0.0, 0.352, FL_RULE_SIMPLE);
	double s = 0.02 / 1.644854;
	check_near("prior of observed values", sqrt(s * s - 0.00176 * 0.00176), run->points[2].prior_u_span, 1e-7);
	assert_non_null(strstr(b.result.prior_words, "as observed"));
	bench_end(&b);
	b.procedure.reliability = 0.0;
	run = assess(&b, 0.0, 0.352, FL_RULE_SIMPLE);
	assert_false(run->points[2].has_global);
	assert_null(b.result.prior_words);
	bench_end(&b);
}

/* Below 4 a warning; below the procedure's least no verdict, unless it says so: then a verdict and the sentence. At the
 * least itself there is a verdict. */
static void least_ratio(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	b.procedure.minimum_tur = 1.5;
	const fl_run_result *run = assess(&b, 0.0, 1.0, FL_RULE_SIMPLE);
	assert_int_equal(run->verdict, FL_VERDICT_PASS);
	assert_true(bench_warns(&b, "only 2 times"));
	assert_null(b.result.below_tur);
	bench_end(&b);
	run = assess(&b, 0.0, 2.0 / 1.5, FL_RULE_SIMPLE);
	assert_int_equal(run->verdict, FL_VERDICT_PASS);
	bench_end(&b);
	run = assess(&b, 0.0, 1.6, FL_RULE_SIMPLE);
	assert_int_equal(run->verdict, FL_VERDICT_NONE);
	assert_non_null(strstr(run->verdict_reason, "1.25 times the expanded uncertainty"));
	assert_null(b.result.below_tur);
	bench_end(&b);
	b.procedure.states_below_tur = true;
	run = assess(&b, 0.0, 1.6, FL_RULE_SIMPLE);
	assert_int_equal(run->verdict, FL_VERDICT_PASS);
	assert_non_null(b.result.below_tur);
	assert_non_null(strstr(b.result.below_tur, "the procedure says so"));
	assert_non_null(strstr(b.result.below_tur, "1.25 times"));
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(zones_with_their_ends), cmocka_unit_test(zones_in_other_units),
	    cmocka_unit_test(specific_risk),         cmocka_unit_test(global_risk),
	    cmocka_unit_test(least_ratio),
	};
	return cmocka_run_group_tests_name("zones and risks", tests, NULL, NULL);
}
