/* tests/analysis/test_budget.c - uncertainty: published arithmetic, and every sensitivity against a change of its
 * input.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "bench.h"

/* JCGM 100:2008, G.4.1, example: relative u 0.25, 0.57, 0.82 %, n = 10, 5, 15; uc 1.03 %, dof 19.0, t95 2.09, U95
 * 2.2 %. (Published digits from memory, recomputed.) */
static void welch_satterthwaite(void **state) {
	(void)state;
	const fl_budget_term terms[] = {{0.25, 1.0, 9.0}, {0.57, 1.0, 4.0}, {0.82, 1.0, 14.0}};
	fl_budget_sum sum;
	assert_true(fl_numeric_budget(terms, 3, 0.95, &sum, NULL) >= 0);
	check_near("uc", 1.03, sum.uc, 0.005);
	check_near("effective degrees of freedom", 19.0, sum.dof_effective, 0.05);
}

static void fill_demo_point(bench *b) {
	bench_begin(b);
	for (int i = 0; i < BENCH_OILS; i++)
		for (int n = 0; n < 3; n++)
			bench_oil(b, 1, FL_PASS_RISING, i, 4.0 + 16.0 * bench_x40(b, i) + 0.01 * n, 43.7);
}

static const fl_budget_line *find(const fl_point_result *point, const char *name) {
	for (size_t i = 0; i < point->budget_count; i++)
		if (strcmp(point->budget[i].name, name) == 0)
			return &point->budget[i];
	print_error("no budget line %s\n", name);
	return NULL;
}

static double error_of_last(bench *b) {
	const fl_run_result *run = bench_assess(b);
	double error = run->points[run->point_count - 1].error_span;
	bench_end(b);
	return error;
}

static double sensitivity_of_last(bench *b, const char *name) {
	const fl_run_result *run = bench_assess(b);
	const fl_budget_line *line = find(&run->points[run->point_count - 1], name);
	double sensitivity = line ? line->sensitivity : NAN;
	bench_end(b);
	return sensitivity;
}

/* The thickest oil at 43.7 °C, between certified temperatures: what a change of each input really does to the error
 * must be what its sensitivity says. A dropped or swapped term shows here. */
static void sensitivity_to_temperature(void **state) {
	(void)state;
	static bench b;
	const double step_k = 1e-3;
	double errors[2];
	for (int side = 0; side < 2; side++) {
		fill_demo_point(&b);
		for (size_t i = 0; i < b.session.reading_count; i++)
			b.readings[i].temp_c += side ? step_k : -step_k;
		errors[side] = error_of_last(&b);
	}
	fill_demo_point(&b);
	double moved = 100.0 * (errors[1] - errors[0]) / (2.0 * step_k);
	assert_true(moved > 0.0); /* warmer oil is thinner: the same output is then too much */
	check_close("thermometer", moved, sensitivity_of_last(&b, "thermometer certificate"), 1e-5);
	check_close("bath", moved, sensitivity_of_last(&b, "bath to capillary temperature"), 1e-5);
}

static void sensitivity_to_viscosity_and_density(void **state) {
	(void)state;
	static bench b;
	double base, thicker, heavier;
	fill_demo_point(&b);
	base = error_of_last(&b);
	fill_demo_point(&b);
	for (int t = 0; t < BENCH_TEMPS; t++)
		b.oil_points[4][t].rho_kg_m3 += 0.1;
	heavier = error_of_last(&b);
	fill_demo_point(&b);
	check_close("density", 100.0 * (base - heavier) / 0.1, sensitivity_of_last(&b, "oil density"), 1e-6);
	fill_demo_point(&b);
	const fl_run_result *run = bench_assess(&b);
	const fl_oil_state oil = run->readings[run->reading_count - 1].oil;
	bench_end(&b);
	fill_demo_point(&b);
	b.oil_points[4][oil.low].nu_m2_s *= 1.0 + 1e-4 / oil.c1; /* one certificate off so that nu is off by 1e-4 */
	thicker = error_of_last(&b);
	fill_demo_point(&b);
	check_close("viscosity", 100.0 * (base - thicker) / 1e-2, sensitivity_of_last(&b, "oil certificate"), 2e-4);
}

static void sensitivity_to_the_meter(void **state) {
	(void)state;
	static bench b;
	fill_demo_point(&b);
	double base = error_of_last(&b);
	const fl_correction shift = {4.0, 0.013};
	fill_demo_point(&b);
	b.equipment[1].corrections = &shift;
	b.equipment[1].correction_count = 1;
	double moved = 100.0 * (error_of_last(&b) - base) / 0.013;
	fill_demo_point(&b);
	check_close("current meter", moved, sensitivity_of_last(&b, "current meter certificate"), 1e-9);
	check_near("6.25 % of span per mA", 6.25, moved, 1e-9);
}

/* The thermometer's correction is applied before the oil is looked up. */
static void thermometer_is_corrected(void **state) {
	(void)state;
	static bench b;
	const fl_correction shift = {40.0, -0.17};
	fill_demo_point(&b);
	b.equipment[0].corrections = &shift;
	b.equipment[0].correction_count = 1;
	const fl_run_result *run = bench_assess(&b);
	check_near("temperature", 43.53, run->points[0].temp_c, 1e-9);
	bench_end(&b);
}

static void one_term_of_scatter(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	bench_dp(&b, 1, FL_PASS_RISING, 0, 12.016, 5000.0);
	bench_dp(&b, 1, FL_PASS_RISING, 0, 11.984, 5000.0);
	const fl_run_result *run = bench_assess(&b);
	const fl_point_result *point = &run->points[0];
	check_near("s", 0.1e-2 * sqrt(2.0), point->s_span, 1e-12);
	check_near("u of the mean", 0.1e-2, point->sum.uc, 1e-12);
	check_near("degrees of freedom", 1.0, point->sum.dof_effective, 1e-9);
	/* JCGM 100 Table G.2: t for 1 degree of freedom and 95.45 % is 13.97 */
	check_near("k", 13.97, point->sum.coverage_factor, 0.005);
	bench_end(&b);
}

/* 3 rising and 2 falling readings with known scatter: pooled within, dof 2 + 1, and u of a mean of two means. */
static void scatter_is_pooled_within_directions(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	const double rising[] = {12.00, 12.03, 12.09}, falling[] = {12.50, 12.58};
	for (int i = 0; i < 3; i++)
		bench_dp(&b, 1, FL_PASS_RISING, 0, rising[i], 5000.0);
	for (int i = 0; i < 2; i++)
		bench_dp(&b, 1, FL_PASS_FALLING, 0, falling[i], 5000.0);
	const fl_run_result *run = bench_assess(&b);
	const fl_point_result *both = &run->combined[0];
	/* sums of squares about the means 12.04 and 12.54: 0.0042 and 0.0032 mA² */
	double s = sqrt((0.0042 + 0.0032) / 3.0) / 16.0;
	check_near("pooled s", s, both->s_span, 1e-12);
	const fl_budget_line *line = find(both, "repeatability of the mean");
	assert_non_null(line);
	check_near("u of the mean", 0.5 * s * sqrt(1.0 / 3.0 + 1.0 / 2.0), line->contribution_span, 1e-12);
	check_near("degrees of freedom", 3.0, line->dof, 1e-12);
	check_near("mean of the two means", (0.04 + 0.54) / 2.0 / 16.0, both->error_span, 1e-12);
	line = find(both, "half the hysteresis");
	assert_non_null(line);
	check_near("half hysteresis, rectangular", 0.5 / 16.0 / 2.0 / sqrt(3.0), line->contribution_span, 1e-12);
	bench_end(&b);
}

/* At 60 % coverage k is below 1, and k uc of this oil alone below the 2u of its certificate. */
static void never_below_the_reference(void **state) {
	(void)state;
	static bench b;
	fill_demo_point(&b);
	b.procedure.coverage_probability = 0.30;
	for (size_t i = 0; i < b.session.reading_count; i++)
		b.readings[i].temp_c = 40.0;
	b.equipment[2].U = 0.001;
	const fl_run_result *run = bench_assess(&b);
	const fl_point_result *point = &run->points[4];
	assert_true(point->floored);
	check_near("U of the certificate", 0.0020 * bench_x40(&b, 4), point->sum.expanded, 1e-9);
	bench_end(&b);
	fill_demo_point(&b);
	assert_false(bench_assess(&b)->points[4].floored);
	bench_end(&b);
}

static void zero_has_meter_and_scatter_only(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	for (int n = 0; n < 4; n++)
		bench_oil(&b, 1, FL_PASS_RISING, FL_POINT_ZERO, 4.001 + 0.001 * n, NAN);
	const fl_run_result *run = bench_assess(&b);
	assert_int_equal(run->points[0].budget_count, 4);
	assert_non_null(find(&run->points[0], "current meter certificate"));
	assert_non_null(find(&run->points[0], "current meter drift since its calibration"));
	assert_non_null(find(&run->points[0], "current meter resolution"));
	assert_non_null(find(&run->points[0], "repeatability of the mean"));
	check_near("stopped zero", 0.0025 / 16.0, run->stopped_zero_span, 1e-12);
	check_near("U of the stopped zero", run->points[0].sum.expanded, run->stopped_zero_u_span, 0.0);
	bench_end(&b);
	for (int n = 0; n < 4; n++)
		bench_oil(&b, 1, FL_PASS_FALLING, FL_POINT_ZERO, 4.011 + 0.001 * n, NAN);
	run = bench_assess(&b);
	assert_true(run->combined[0].both);
	assert_int_equal(run->combined[0].budget_count, 4); /* no half hysteresis either */
	bench_end(&b);
}

/* A pressure standard in mbar, U 0.05 mbar, k = 2, over 100 mbar of full scale: 0.05 % of span at every point. */
static void pressure_standard_instead_of_oil(void **state) {
	(void)state;
	static bench b;
	bench_begin_pressure(&b);
	bench_use(&b, "DP-1");
	for (int n = 0; n < 3; n++)
		bench_dp(&b, 1, FL_PASS_RISING, 0, 8.0, 2500.0);
	const fl_run_result *run = bench_assess(&b);
	const fl_budget_line *line = find(&run->points[0], "pressure standard certificate");
	assert_non_null(line);
	assert_string_equal(line->unit, "mbar");
	check_near("sensitivity", 1.0, line->sensitivity, 1e-9);
	check_near("contribution", 0.025e-2, line->contribution_span, 1e-12);
	for (size_t i = 0; i < run->points[0].budget_count; i++)
		assert_null(strstr(run->points[0].budget[i].name, "oil"));
	bench_end(&b);
}

/* Ageing: 0.1 % a year, half width, 147 days of 365.25 since the certificate. */
static void ageing_counts_from_the_certificate(void **state) {
	(void)state;
	static bench b;
	fill_demo_point(&b);
	const fl_run_result *run = bench_assess(&b);
	const fl_budget_line *line = find(&run->points[1], "oil ageing since its certificate");
	assert_non_null(line);
	check_near("ageing, %", 0.1 * 147.0 / 365.25 / sqrt(3.0), line->u, 1e-12);
	bench_end(&b);
}

/* A line that misses its own certified points by more than the procedure allows for takes its own misfit. */
static void misfit_of_the_oil_rules_if_larger(void **state) {
	(void)state;
	static bench b;
	fill_demo_point(&b);
	b.oils[1].misfit_rel = 0.0031;
	const fl_run_result *run = bench_assess(&b);
	const fl_budget_line *own = find(&run->points[1], "viscosity between certified temperatures");
	const fl_budget_line *procedure = find(&run->points[2], "viscosity between certified temperatures");
	check_near("misfit, %", 0.31 / sqrt(3.0), own->u, 1e-12);
	check_near("procedure, %", 0.05 / sqrt(3.0), procedure->u, 1e-12);
	bench_end(&b);
}

static void extra_terms(void **state) {
	(void)state;
	static bench b;
	static const fl_extra_term terms[] = {
	    {"ambient temperature", 0.12, 0.0, FL_DIST_RECTANGULAR, FL_BAND_PERCENT_SPAN, false, NULL},
	    {"pump speed", 0.3, 0.0, FL_DIST_TRIANGULAR, FL_BAND_PERCENT_READING, false, NULL}};
	bench_begin_pressure(&b);
	b.procedure.extra = terms;
	b.procedure.extra_count = 2;
	bench_dp(&b, 1, FL_PASS_RISING, 0, 8.0, 2500.0);
	const fl_run_result *run = bench_assess(&b);
	double want = hypot(0.12e-2 / sqrt(3.0), 0.3e-2 * 0.25 / sqrt(6.0));
	check_near("uc", want, run->points[0].sum.uc, 1e-12);
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(welch_satterthwaite),
	    cmocka_unit_test(sensitivity_to_temperature),
	    cmocka_unit_test(sensitivity_to_viscosity_and_density),
	    cmocka_unit_test(sensitivity_to_the_meter),
	    cmocka_unit_test(thermometer_is_corrected),
	    cmocka_unit_test(one_term_of_scatter),
	    cmocka_unit_test(scatter_is_pooled_within_directions),
	    cmocka_unit_test(never_below_the_reference),
	    cmocka_unit_test(zero_has_meter_and_scatter_only),
	    cmocka_unit_test(pressure_standard_instead_of_oil),
	    cmocka_unit_test(ageing_counts_from_the_certificate),
	    cmocka_unit_test(misfit_of_the_oil_rules_if_larger),
	    cmocka_unit_test(extra_terms),
	};
	return cmocka_run_group_tests_name("budgets", tests, NULL, NULL);
}
