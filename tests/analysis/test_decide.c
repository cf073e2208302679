/* tests/analysis/test_decide.c - decisions at and beside their limits, for one number and for a whole run.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Rules: ILAC-G8:09/2019, 4.2.1 simple acceptance, 4.2.2 binary with guard band (everything above TL - w is a fail),
 * 4.2.3 four states, w = U.
 */
#include "bench.h"

#define check_verdict(want, got) assert_string_equal(fl_verdict_word(want), fl_verdict_word(got))

/* T 2.385, U 0.371: the limits are 2.014, 2.385 and 2.756. */
static void four_states_one_number(void **state) {
	(void)state;
	static const struct {
		double error;
		fl_verdict four, guarded, simple;
	} cases[] = {
	    {0.0, FL_VERDICT_PASS, FL_VERDICT_PASS, FL_VERDICT_PASS},
	    {2.013, FL_VERDICT_PASS, FL_VERDICT_PASS, FL_VERDICT_PASS},
	    {2.014, FL_VERDICT_PASS, FL_VERDICT_PASS, FL_VERDICT_PASS},
	    {2.01400001, FL_VERDICT_CONDITIONAL_PASS, FL_VERDICT_FAIL, FL_VERDICT_PASS},
	    {2.385, FL_VERDICT_CONDITIONAL_PASS, FL_VERDICT_FAIL, FL_VERDICT_PASS},
	    {2.38500001, FL_VERDICT_CONDITIONAL_FAIL, FL_VERDICT_FAIL, FL_VERDICT_FAIL},
	    {2.756, FL_VERDICT_CONDITIONAL_FAIL, FL_VERDICT_FAIL, FL_VERDICT_FAIL},
	    {2.75600001, FL_VERDICT_FAIL, FL_VERDICT_FAIL, FL_VERDICT_FAIL},
	};
	for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++)
		for (int sign = -1; sign <= 1; sign += 2) {
			double error = sign * cases[i].error;
			check_verdict(cases[i].four, fl_analysis_decide(FL_RULE_FOUR_STATES, error, 0.371, 2.385));
			check_verdict(cases[i].guarded, fl_analysis_decide(FL_RULE_GUARDED, error, 0.371, 2.385));
			check_verdict(cases[i].simple, fl_analysis_decide(FL_RULE_SIMPLE, error, 0.371, 2.385));
			check_verdict(FL_VERDICT_NONE, fl_analysis_decide(FL_RULE_NONE, error, 0.371, 2.385));
		}
}

static void no_number_no_verdict(void **state) {
	(void)state;
	check_verdict(FL_VERDICT_NONE, fl_analysis_decide(FL_RULE_SIMPLE, NAN, 0.1, 2.0));
	check_verdict(FL_VERDICT_NONE, fl_analysis_decide(FL_RULE_SIMPLE, 0.1, NAN, 2.0));
	check_verdict(FL_VERDICT_NONE, fl_analysis_decide(FL_RULE_SIMPLE, 0.1, 0.1, NAN));
}

static void uncertainty_above_tolerance(void **state) {
	(void)state;
	check_verdict(FL_VERDICT_FAIL, fl_analysis_decide(FL_RULE_GUARDED, 0.0, 2.1, 2.0));
	check_verdict(FL_VERDICT_CONDITIONAL_PASS, fl_analysis_decide(FL_RULE_FOUR_STATES, 0.0, 2.1, 2.0));
	check_verdict(FL_VERDICT_CONDITIONAL_FAIL, fl_analysis_decide(FL_RULE_FOUR_STATES, 3.0, 2.1, 2.0));
}

/* A transmitter that reads `excess_ma` too much at five places; no equipment, so U is next to
 * nothing unless another term is put in its place. */
static void fill(bench *b, double excess_ma) {
	static const fl_extra_term next_to_nothing = {"next to nothing",    1e-9,  2.0, FL_DIST_NORMAL,
	                                              FL_BAND_PERCENT_SPAN, false, NULL};
	bench_begin_pressure(b);
	b->procedure.extra = &next_to_nothing;
	b->procedure.extra_count = 1;
	b->procedure.rule = FL_RULE_SIMPLE;
	for (int i = 0; i < 5; i++)
		bench_dp(b, 1, FL_PASS_RISING, i, 4.0 * (i + 1) + excess_ma, i * 2500.0);
}

/* 2 % of 16 mA is 0.32 mA: as decimals exactly at the limit at every place, in binary not quite at any. */
static void exactly_at_the_limit(void **state) {
	(void)state;
	static bench b;
	fill(&b, 0.32);
	const double typed[] = {4.32, 8.32, 12.32, 16.32, 20.32};
	for (int i = 0; i < 5; i++)
		b.readings[i].output = typed[i];
	const fl_run_result *run = bench_assess(&b);
	for (int i = 0; i < 5; i++)
		check_verdict(FL_VERDICT_PASS, run->points[i].verdict);
	check_verdict(FL_VERDICT_PASS, run->verdict);
	bench_end(&b);
	fill(&b, 0.32 + 1e-6);
	check_verdict(FL_VERDICT_FAIL, bench_assess(&b)->verdict);
	bench_end(&b);
	fill(&b, -0.32 - 1e-6);
	check_verdict(FL_VERDICT_FAIL, bench_assess(&b)->verdict);
	bench_end(&b);
}

/* One term of u = 0.2 % makes U 0.4 % (k = 2): states change at 1.6, 2.0 and 2.4 %. */
static void add_u(bench *b, fl_extra_term *term) {
	*term = (fl_extra_term){"line pressure", 0.4, 2.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, false, NULL};
	b->procedure.extra = term;
	b->procedure.extra_count = 1;
	b->procedure.rule = FL_RULE_FOUR_STATES;
}

static void four_states_of_a_run(void **state) {
	(void)state;
	static bench b;
	fl_extra_term term;
	static const struct {
		double excess_ma;
		fl_verdict want;
	} cases[] = {{0.255, FL_VERDICT_PASS},
	             {0.257, FL_VERDICT_CONDITIONAL_PASS},
	             {0.3201, FL_VERDICT_CONDITIONAL_FAIL},
	             {0.385, FL_VERDICT_FAIL}};
	for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
		fill(&b, cases[i].excess_ma);
		add_u(&b, &term);
		const fl_run_result *run = bench_assess(&b);
		check_near("U", 0.004, run->points[2].sum.expanded, 1e-9);
		check_near("TUR", 5.0, run->points[2].tur, 1e-6);
		check_verdict(cases[i].want, run->verdict);
		bench_end(&b);
	}
}

static void worst_point_decides_and_is_named(void **state) {
	(void)state;
	static bench b;
	fl_extra_term term;
	fill(&b, 0.01);
	add_u(&b, &term);
	b.readings[3].output -= 0.50;
	const fl_run_result *run = bench_assess(&b);
	check_verdict(FL_VERDICT_FAIL, run->verdict);
	assert_int_equal(run->worst->point, 3);
	assert_non_null(strstr(run->verdict_reason, "75.0 % of span rising"));
	assert_non_null(strstr(run->verdict_reason, "error -3.06"));
	bench_end(&b);
}

static void low_ratio_withholds_the_verdict(void **state) {
	(void)state;
	static bench b;
	fl_extra_term term;
	fill(&b, 0.01);
	add_u(&b, &term);
	b.procedure.minimum_tur = 5.1;
	const fl_run_result *run = bench_assess(&b);
	check_verdict(FL_VERDICT_NONE, run->verdict);
	check_verdict(FL_VERDICT_NONE, run->points[0].verdict);
	assert_non_null(strstr(run->verdict_reason, "5 times the expanded uncertainty"));
	bench_end(&b);
	fill(&b, 0.01);
	add_u(&b, &term);
	b.procedure.minimum_tur = 5.0 - 1e-6;
	check_verdict(FL_VERDICT_PASS, bench_assess(&b)->verdict);
	assert_false(bench_warns(&b, "times the expanded uncertainty"));
	bench_end(&b);
	fill(&b, 0.01);
	add_u(&b, &term);
	term.value = 1.2; /* tolerance 2 % over U 1.2 %: a warning, no more */
	check_verdict(FL_VERDICT_PASS, bench_assess(&b)->verdict);
	assert_true(bench_warns(&b, "only 1.7 times the expanded uncertainty"));
	bench_end(&b);
}

static void no_rule_no_word(void **state) {
	(void)state;
	static bench b;
	fill(&b, 0.9);
	b.procedure.rule = FL_RULE_NONE;
	const fl_run_result *run = bench_assess(&b);
	assert_string_equal(fl_verdict_word(run->verdict), "");
	assert_string_equal(fl_verdict_word(run->points[4].verdict), "");
	assert_non_null(strstr(run->verdict_reason, "no decision rule"));
	bench_end(&b);
	fill(&b, 0.9);
	b.procedure.tolerance.basis = FL_BAND_NONE;
	assert_non_null(strstr(bench_assess(&b)->verdict_reason, "no tolerance"));
	assert_true(isnan(b.result.runs[FL_RUN_AS_FOUND].points[0].tolerance_span));
	bench_end(&b);
}

/* A procedure for a part of the sensor sets the sensor's own limits aside: 0.3 % of span passes 2 %, not 0.2 %. */
static void limits_of_a_part(void **state) {
	(void)state;
	static bench b;
	fill(&b, 0.048);
	b.instrument.tolerance = (fl_band){FL_BAND_PERCENT_SPAN, 2.0};
	b.procedure.tolerance = (fl_band){FL_BAND_PERCENT_SPAN, 0.2};
	check_verdict(FL_VERDICT_PASS, bench_assess(&b)->verdict);
	assert_true(b.result.tolerance_from_instrument);
	bench_end(&b);
	b.procedure.sets_limits_aside = true;
	check_verdict(FL_VERDICT_FAIL, bench_assess(&b)->verdict);
	assert_false(b.result.tolerance_from_instrument);
	bench_end(&b);
}

/* 4 % of reading at 50 % of span is 2 % of span; at the lower end it says nothing. 0.73 mm2/s of 50 are 1.46 %. */
static void tolerance_in_other_units(void **state) {
	(void)state;
	static bench b;
	fill(&b, 0.01);
	b.procedure.tolerance = (fl_band){FL_BAND_PERCENT_READING, 4.0};
	const fl_run_result *run = bench_assess(&b);
	assert_true(isnan(run->points[0].tolerance_span));
	check_verdict(FL_VERDICT_NONE, run->points[0].verdict);
	check_near("of reading", 0.02, run->points[2].tolerance_span, 1e-12);
	check_verdict(FL_VERDICT_PASS, run->verdict);
	assert_true(bench_warns(&b, "says nothing at this place"));
	bench_end(&b);
	fill(&b, 0.01);
	b.instrument.tolerance = (fl_band){FL_BAND_DIAL_UNITS, 0.73}; /* the instrument's own goes first */
	run = bench_assess(&b);
	assert_true(b.result.tolerance_from_instrument);
	check_near("dial units", 0.0146, run->points[2].tolerance_span, 1e-12);
	bench_end(&b);
}

static void limits_of_hysteresis_and_linearity(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	for (int i = 0; i < 5; i++) {
		double bow_ma = i == 2 ? 0.16 : 0.0; /* 1 % at mid-scale: independent linearity 0.5 % */
		bench_dp(&b, 1, FL_PASS_RISING, i, 4.0 + 4.0 * i + bow_ma - 0.04, i * 2500.0);
		bench_dp(&b, 1, FL_PASS_FALLING, i, 4.0 + 4.0 * i + bow_ma + 0.04, i * 2500.0);
	}
	const fl_run_result *run = bench_assess(&b);
	check_near("independent linearity", 0.005, run->independent.max_abs, 1e-12);
	check_near("hysteresis", 0.005, run->hysteresis_span, 1e-12);
	assert_false(run->linearity_exceeded); /* both exactly at 0.5 % */
	assert_false(run->hysteresis_exceeded);
	bench_end(&b);
	b.procedure.deciding_linearity = FL_LINEARITY_TERMINAL; /* 1 % */
	b.instrument.hysteresis_limit_pct_span = 0.4;
	run = bench_assess(&b);
	assert_true(run->linearity_exceeded);
	assert_true(run->hysteresis_exceeded);
	bench_end(&b);
}

static void adjust_limit(void **state) {
	(void)state;
	static bench b;
	fill(&b, 0.24); /* 1.5 % of span, the limit */
	assert_true(bench_assess(&b)->inside_adjust_limit);
	bench_end(&b);
	fill(&b, 0.2401);
	assert_false(bench_assess(&b)->inside_adjust_limit);
	bench_end(&b);
	fill(&b, 0.0);
	b.procedure.adjust_limit.basis = FL_BAND_NONE;
	assert_false(bench_assess(&b)->inside_adjust_limit);
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(four_states_one_number),
	    cmocka_unit_test(no_number_no_verdict),
	    cmocka_unit_test(uncertainty_above_tolerance),
	    cmocka_unit_test(exactly_at_the_limit),
	    cmocka_unit_test(four_states_of_a_run),
	    cmocka_unit_test(worst_point_decides_and_is_named),
	    cmocka_unit_test(low_ratio_withholds_the_verdict),
	    cmocka_unit_test(no_rule_no_word),
	    cmocka_unit_test(limits_of_a_part),
	    cmocka_unit_test(tolerance_in_other_units),
	    cmocka_unit_test(limits_of_hysteresis_and_linearity),
	    cmocka_unit_test(adjust_limit),
	};
	return cmocka_run_group_tests_name("decisions", tests, NULL, NULL);
}
