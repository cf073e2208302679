/* tests/analysis/test_session.c - dials, signs, injected truth, and what a session may lack.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "bench.h"

/* ---- dial and sign ---- */

static double output_at(double x) {
	return 4.0 + 16.0 * x;
}

/* A sound instrument follows mu. At 40 °C, where the table is certified, its error is nothing; comparing the dial with
 * the oil's own nu would condemn it by -2.7 % of span at 20.4 mm2/s. */
static void density_is_minded(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	for (int i = 0; i < BENCH_OILS; i++)
		bench_oil(&b, 1, FL_PASS_RISING, i, output_at(bench_x40(&b, i)), 40.0);
	const fl_run_result *run = bench_assess(&b);
	for (size_t i = 0; i < run->point_count; i++)
		check_near(run->points[i].oil, 0.0, run->points[i].error_span, 1e-12);
	double naive = run->points[2].x + run->points[2].error_span - bench_nu[2][1] / 50.0;
	check_near("error if density were ignored", -2.7e-2, naive, 0.03e-2);
	check_near("equivalent viscosity", 20.4 * 840.1 / 900.0 * 1e-6, run->points[2].equivalent_m2_s, 1e-17);
	check_near("certified viscosity", 20.4e-6, run->points[2].certified_m2_s, 1e-17);
	bench_end(&b);
}

static void reading_high_is_positive(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 2, output_at(bench_x40(&b, 2)) + 0.16, 40.0);
	bench_oil(&b, 1, FL_PASS_RISING, 3, output_at(bench_x40(&b, 3)) - 0.08, 40.0);
	const fl_run_result *run = bench_assess(&b);
	check_near("high, span", 1e-2, run->points[0].error_span, 1e-12);
	check_near("high, mm2/s", 0.5, run->points[0].error_dial, 1e-9);
	check_near("high, of reading", 1e-2 / bench_x40(&b, 2), run->points[0].error_reading, 1e-12);
	check_near("low, span", -0.5e-2, run->points[1].error_span, 1e-12);
	check_near("low, mm2/s", -0.25, run->points[1].error_dial, 1e-9);
	bench_end(&b);
}

static void dial_in_mpa_s(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	b.instrument.scale = (fl_scale){FL_DIAL_MPA_S, 0.0, 45.0, NAN, NAN, FL_SIGNAL_4_20_MA};
	double mu_mpa_s = 34.6 * 846.2 / 1000.0;
	bench_oil(&b, 1, FL_PASS_RISING, 3, output_at(mu_mpa_s / 45.0) + 0.08, 40.0);
	const fl_run_result *run = bench_assess(&b);
	check_near("dial, mPa·s", mu_mpa_s, run->points[0].dial, 1e-9);
	check_near("error, mPa·s", 0.005 * 45.0, run->points[0].error_dial, 1e-9);
	bench_end(&b);
}

/* Redwood No. 1: nu = 0.247 t - 50/t above 100 s, 0.260 t - 179/t below (handbook form, see physics). The signal is
 * linear in viscosity, the dial's seconds are not; 400 s is 98.675 mm2/s, 34 s is 3.5753. */
static void dial_in_redwood_seconds(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	b.instrument.scale = (fl_scale){FL_DIAL_REDWOOD, 34.0, 400.0, 900.0, NAN, FL_SIGNAL_4_20_MA};
	double low = 0.260 * 34.0 - 179.0 / 34.0, high = 0.247 * 400.0 - 50.0 / 400.0;
	double equivalent = 49.2 * 850.3 / 900.0;
	double x = (equivalent - low) / (high - low);
	bench_oil(&b, 1, FL_PASS_RISING, 4, output_at(x + 0.01), 40.0);
	bench_oil(&b, 1, FL_PASS_RISING, FL_POINT_ZERO, 3.8, NAN);
	const fl_run_result *run = bench_assess(&b);
	const fl_point_result *point = &run->points[1];
	check_near("x", x, point->x, 1e-12);
	check_near("seconds", (equivalent + sqrt(equivalent * equivalent + 4.0 * 0.247 * 50.0)) / (2.0 * 0.247),
	           point->dial, 1e-6);
	double shown = low + (x + 0.01) * (high - low);
	check_near("error in seconds", (shown + sqrt(shown * shown + 4.0 * 0.247 * 50.0)) / (2.0 * 0.247) - point->dial,
	           point->error_dial, 1e-6);
	/* at rest such an instrument is below its signal: no stopped zero can be had from it */
	assert_true(isnan(run->stopped_zero_span));
	assert_true(bench_not_determined(run, "stopped zero not determined"));
	bench_end(&b);
}

/* ASTM D2161: 100 s Saybolt Universal at 100 °F is 20.52 mm2/s, 200 s is 42.90 (recomputed from the equation). */
static void dial_in_saybolt_seconds(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	b.instrument.scale = (fl_scale){FL_DIAL_SAYBOLT, 33.0, 300.0, 900.0, 37.77777777777778, FL_SIGNAL_4_20_MA};
	double low = 0.0, high = 0.0;
	assert_true(fl_physics_scale_span(&b.instrument.scale, &low, &high, NULL) >= 0);
	double wanted_rho = 20.52 / 20.4 * 900.0; /* an oil of 20.4 mm2/s then stands at 20.52 */
	for (int t = 0; t < BENCH_TEMPS; t++)
		b.oil_points[2][t].rho_kg_m3 = wanted_rho;
	bench_oil(&b, 1, FL_PASS_RISING, 2, output_at((20.52e-6 - low) / (high - low)), 40.0);
	const fl_run_result *run = bench_assess(&b);
	check_near("seconds", 100.0, run->points[0].dial, 0.03);
	check_near("error", 0.0, run->points[0].error_span, 1e-12);
	bench_end(&b);
}

/* 0.2 to 1.0 bar read with a gauge in psi, which is not the 3 to 15 psi signal: 7.6 psi is 0.524 bar. */
static void pneumatic_in_another_unit(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	b.instrument.scale.signal = FL_SIGNAL_02_1_BAR;
	fl_reading *r = bench_oil(&b, 1, FL_PASS_RISING, 2, 7.6, 40.0);
	r->unit = FL_U_PSI;
	const fl_run_result *run = bench_assess(&b);
	check_near("bar", 7.6 * 0.06894757293168361, run->points[0].output, 1e-12);
	assert_true(bench_untraceable(&b, "no pressure gauge is named"));
	bench_end(&b);
	r->unit = FL_U_MA; /* a current on a pneumatic instrument */
	assert_int_equal(fl_analysis_session(&b.session, &b.procedure, &b.stock, &b.result, &b.err), FL_E_VALUE);
	assert_non_null(strstr(b.err.message, "mA"));
	assert_non_null(strstr(b.err.field, "point 3"));
}

/* ---- an instrument whose truth is known ---- */

static double noise(uint64_t *seed) { /* splitmix64 (Steele, Lea & Flood 2014), sum of 12 uniforms less 6 */
	double sum = -6.0;
	for (int i = 0; i < 12; i++) {
		uint64_t z = (*seed += 0x9e3779b97f4a7c15u);
		z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
		z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
		sum += (double)((z ^ (z >> 31)) >> 11) * 0x1p-53;
	}
	return sum;
}

/* Zero +0.83 %, span -1.37 %, falling 0.24 % above rising at the running points, scatter 0.03 % of span, oils up to
 * 0.08 K off their temperature; three cycles of two readings. */
static void fill_truth(bench *b, uint64_t *seed) {
	bench_begin(b);
	for (int cycle = 1; cycle <= 3; cycle++)
		for (int pass = 0; pass < 2; pass++)
			for (int point = FL_POINT_ZERO; point < BENCH_OILS; point++)
				for (int n = 0; n < 2; n++) {
					double temp_c = 40.0 + 0.08 * noise(seed) / 6.0, x = 0.0, half = pass ? 0.12e-2 : -0.12e-2;
					fl_oil_state oil;
					if (point != FL_POINT_ZERO) {
						assert_true(fl_physics_oil_at(&b->oils[point].table, temp_c, &oil, NULL) >= 0);
						x = oil.nu_m2_s * oil.rho_kg_m3 / 900.0 / 50e-6;
					}
					double e = 0.83e-2 - 1.37e-2 * x + (point == FL_POINT_ZERO ? 0.0 : half) + 0.03e-2 * noise(seed);
					bench_oil(b, cycle, (fl_pass)pass, point, output_at(x + e), temp_c);
				}
}

static void injected_truth_is_found(void **state) {
	(void)state;
	static bench b;
	uint64_t seed = 20260414;
	print_message("seed %llu\n", (unsigned long long)seed);
	fill_truth(&b, &seed);
	const fl_run_result *run = bench_assess(&b);
	/* a mean of 12 readings with s 0.03 % has 0.009 %: three of them is 0.026 % */
	check_near("stopped zero", 0.83e-2, run->stopped_zero_span, 0.026e-2);
	check_near("running zero", 0.83e-2, run->running_zero_span, 0.026e-2);
	check_near("zero error", 0.83e-2, run->zero_error_span, 0.026e-2);
	check_near("span error", -1.37e-2, run->span_error_span, 0.04e-2);
	check_near("span between the ends", -1.37e-2 * bench_x40(&b, 4), run->span_between_ends_span, 0.04e-2);
	for (size_t i = 1; i < run->combined_count; i++)
		check_near("hysteresis", 0.24e-2, run->hysteresis[i], 0.052e-2);
	check_near("largest s", 0.03e-2, run->repeatability_s_span, 0.03e-2);
	assert_true(run->independent.max_abs < 0.03e-2);
	assert_true(run->independent.max_abs <= run->zero_based.max_abs);
	assert_true(run->zero_based.max_abs <= run->terminal.max_abs);
	bench_end(&b);
}

static void an_undone_and_a_watched_reading_do_not_count(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 2, 10.0, 40.0);
	bench_oil(&b, 1, FL_PASS_RISING, 2, 17.0, 40.0)->undone = true;
	bench_oil(&b, 1, FL_PASS_RISING, 2, 18.0, 40.0)->watched = true;
	const fl_run_result *run = bench_assess(&b);
	assert_int_equal(run->reading_count, 1);
	assert_int_equal(run->points[0].n, 1);
	check_near("output", 10.0, run->points[0].output, 1e-12);
	bench_end(&b);
}

static void struck_stays_in_the_record(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 2, 10.0, 40.0);
	bench_oil(&b, 1, FL_PASS_RISING, 2, 12.0, 40.0)->struck = true;
	bench_oil(&b, 1, FL_PASS_RISING, 2, 12.0, 140.0)->struck = true; /* no reference there: no number, no failure */
	const fl_run_result *run = bench_assess(&b);
	assert_int_equal(run->struck_count, 2);
	assert_int_equal(run->points[0].n, 1);
	assert_false(run->readings[1].used);
	check_near("its error is given", (12.0 - 4.0) / 16.0 - bench_x40(&b, 2), run->readings[1].error_span, 1e-12);
	assert_true(isnan(run->readings[2].error_span));
	bench_end(&b);
}

/* ---- runs ---- */

static void left_alone(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	for (int i = 0; i < BENCH_OILS; i++)
		bench_oil(&b, 1, FL_PASS_RISING, i, output_at(bench_x40(&b, i)) + 0.05, 40.0);
	b.session.decision = FL_DECISION_LEAVE;
	const fl_run_result *found = bench_assess(&b);
	const fl_run_result *left = &b.result.runs[FL_RUN_AS_LEFT];
	assert_true(left->available && left->same_as_found);
	assert_int_equal(left->kind, FL_RUN_AS_LEFT);
	assert_ptr_equal(left->points, found->points);
	check_near("zero error", found->zero_error_span, left->zero_error_span, 0.0);
	bench_end(&b);
	b.session.decision = FL_DECISION_ADJUST;
	bench_assess(&b);
	assert_false(b.result.runs[FL_RUN_AS_LEFT].available);
	assert_non_null(strstr(b.result.runs[FL_RUN_AS_LEFT].unavailable_reason, "not taken"));
	bench_end(&b);
}

static void as_found_missing(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	b.session.runs[FL_RUN_AS_FOUND] = (fl_session_run){.missing = true, .missing_reason = "trimmed at sea"};
	fl_reading *r = bench_read(&b, FL_RUN_AS_LEFT, 1, FL_PASS_RISING, 2, 10.0);
	r->has_temp = true;
	r->temp_c = 40.0;
	const fl_run_result *found = bench_assess(&b);
	assert_false(found->available);
	assert_string_equal(found->unavailable_reason, "trimmed at sea");
	assert_true(isnan(found->zero_error_span) && isnan(found->hysteresis_span));
	assert_int_equal(found->verdict, FL_VERDICT_NONE);
	assert_true(b.result.runs[FL_RUN_AS_LEFT].available);
	bench_end(&b);
}

static void nothing_read_at_all(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	const fl_run_result *found = bench_assess(&b);
	assert_false(found->available);
	assert_non_null(found->unavailable_reason);
	assert_non_null(found->verdict_reason);
	bench_end(&b);
}

static void what_one_traverse_cannot_say(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 1, 7.0, 40.0);
	bench_oil(&b, 1, FL_PASS_RISING, 4, 19.0, 40.0);
	const fl_run_result *run = bench_assess(&b);
	assert_true(isnan(run->hysteresis_span) && isnan(run->repeatability_span) && isnan(run->stopped_zero_span));
	assert_false(run->has_linearity);
	assert_true(run->has_line);
	assert_true(bench_not_determined(run, "hysteresis not determined: one traverse"));
	assert_true(bench_not_determined(run, "repeatability not determined: one reading"));
	assert_true(bench_not_determined(run, "linearity not determined: fewer than 3 points"));
	assert_true(bench_not_determined(run, "stopped zero not determined"));
	bench_end(&b);
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 1, 7.0, 40.0);
	run = bench_assess(&b);
	assert_true(bench_not_determined(run, "zero and span error not determined"));
	assert_true(bench_not_determined(run, "running zero not determined"));
	assert_true(isnan(run->zero_error_span));
	bench_end(&b);
}

/* Nothing in the budget is not the same as no uncertainty. */
static void no_verdict_without_a_budget(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	b.session.equipment_count = 0;
	bench_read(&b, FL_RUN_AS_FOUND, 1, FL_PASS_RISING, FL_POINT_ZERO, 4.0);
	bench_oil(&b, 1, FL_PASS_RISING, 4, 19.0, 40.0);
	const fl_run_result *run = bench_assess(&b);
	assert_int_equal(run->points[0].budget_count, 0);
	assert_true(isnan(run->points[0].sum.expanded) && isnan(run->points[0].sum.coverage_factor));
	assert_int_equal(run->points[0].verdict, FL_VERDICT_NONE);
	assert_int_equal(run->verdict, FL_VERDICT_NONE);
	assert_non_null(strstr(run->verdict_reason, "nothing is known of the uncertainty at"));
	bench_end(&b);
}

static void readings_stand_in_for_cycles(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	const double readings[] = {10.00, 10.05, 10.02};
	for (int i = 0; i < 3; i++)
		bench_oil(&b, 1, FL_PASS_RISING, 2, readings[i], 40.0);
	const fl_run_result *run = bench_assess(&b);
	assert_false(run->repeatability_of_cycles);
	check_near("range of readings", 0.05 / 16.0, run->repeatability_span, 1e-12);
	bench_end(&b);
	for (int i = 0; i < 3; i++) /* second cycle, mean 0.01 mA above the first */
		bench_oil(&b, 2, FL_PASS_RISING, 2, readings[i] + 0.01, 40.0);
	run = bench_assess(&b);
	assert_true(run->repeatability_of_cycles);
	check_near("range of cycle means", 0.01 / 16.0, run->repeatability_span, 1e-12);
	bench_end(&b);
}

/* ---- temperatures, flow, dates ---- */

static void outside_the_certificate(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 4, 4.9, 103.0);
	const fl_run_result *run = bench_assess(&b);
	assert_true(bench_warns(&b, "outside the certified temperatures"));
	check_near("widened by 3 K", 4.0 * 0.05 / sqrt(3.0), run->points[0].budget[1].u, 1e-9);
	bench_end(&b);
	b.readings[0].temp_c = 105.5;
	assert_int_equal(fl_analysis_session(&b.session, &b.procedure, &b.stock, &b.result, &b.err), FL_E_RANGE);
	assert_non_null(strstr(b.err.field, "as-found, cycle 1, rising, point 5, reading 1"));
}

/* The invented geometry: Re 288 at 2 mm2/s, kinetic term 69 Pa of 31321 (comparison only). A wider bore and a faster
 * pump leave laminar flow. */
static void capillary_is_checked(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 0, 4.6, 40.0);
	const fl_run_result *run = bench_assess(&b);
	assert_true(run->points[0].has_flow);
	check_near("Re", 4.0 * 0.995e-6 / (M_PI * 2.2e-3) / 2.05e-6, run->points[0].flow.reynolds, 0.5);
	double v = 4.0 * 0.995e-6 / (M_PI * 2.2e-3 * 2.2e-3);
	check_close("kinetic term", 1.12 * 772.9 * v * v / 31321.0, run->points[0].kinetic_span, 1e-3);
	assert_int_equal(b.result.warning_count, 0);
	bench_end(&b);
	b.instrument.capillary.pump_speed_rev_s *= 5.4;
	bench_assess(&b);
	assert_true(bench_warns(&b, "near the end of laminar flow"));
	assert_true(bench_warns(&b, "entrance length"));
	bench_end(&b);
	b.instrument.capillary.pump_speed_rev_s *= 1.4;
	bench_assess(&b);
	assert_true(bench_warns(&b, "not laminar"));
	bench_end(&b);
}

static void only_what_was_used_must_be_in_date(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 1, 7.0, 40.0);
	b.oils[3].use_before = b.session.day - 30; /* expired, but not read */
	bench_assess(&b);
	assert_true(b.result.traceable); /* the overdue tachometer stayed on its shelf */
	bench_end(&b);
	bench_use(&b, "TC-1");
	bench_assess(&b);
	assert_false(b.result.traceable);
	assert_true(bench_untraceable(&b, "TC-1"));
	bench_end(&b);
	b.session.equipment_count--;
	bench_oil(&b, 1, FL_PASS_RISING, 3, 14.0, 40.0);
	bench_assess(&b);
	assert_false(b.result.traceable);
	assert_true(bench_untraceable(&b, "LK-35"));
	bench_end(&b);
}

static void indicative_work_is_named(void **state) {
	(void)state;
	static bench b;
	fl_indicative entry = {.item = "LK-10 lot B", .reason = "no other at hand", .by = "A. Person"};
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 1, 7.0, 40.0);
	b.session.indicative = &entry;
	b.session.indicative_count = 1;
	bench_assess(&b);
	assert_false(b.result.traceable);
	assert_true(bench_untraceable(&b, "no other at hand"));
	bench_end(&b);
}

static void unknown_lot_and_missing_temperature(void **state) {
	(void)state;
	static bench b;
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 1, 7.0, 40.0)->has_temp = false;
	assert_int_equal(fl_analysis_session(&b.session, &b.procedure, &b.stock, &b.result, &b.err), FL_E_VALUE);
	assert_non_null(strstr(b.err.message, "temperature"));
	bench_begin(&b);
	bench_oil(&b, 1, FL_PASS_RISING, 1, 7.0, 40.0);
	b.points[1].lot = "no such";
	assert_int_equal(fl_analysis_session(&b.session, &b.procedure, &b.stock, &b.result, &b.err), FL_E_NOT_FOUND);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(density_is_minded),
	    cmocka_unit_test(reading_high_is_positive),
	    cmocka_unit_test(dial_in_mpa_s),
	    cmocka_unit_test(dial_in_redwood_seconds),
	    cmocka_unit_test(dial_in_saybolt_seconds),
	    cmocka_unit_test(pneumatic_in_another_unit),
	    cmocka_unit_test(injected_truth_is_found),
	    cmocka_unit_test(an_undone_and_a_watched_reading_do_not_count),
	    cmocka_unit_test(struck_stays_in_the_record),
	    cmocka_unit_test(left_alone),
	    cmocka_unit_test(as_found_missing),
	    cmocka_unit_test(nothing_read_at_all),
	    cmocka_unit_test(what_one_traverse_cannot_say),
	    cmocka_unit_test(no_verdict_without_a_budget),
	    cmocka_unit_test(readings_stand_in_for_cycles),
	    cmocka_unit_test(outside_the_certificate),
	    cmocka_unit_test(capillary_is_checked),
	    cmocka_unit_test(only_what_was_used_must_be_in_date),
	    cmocka_unit_test(indicative_work_is_named),
	    cmocka_unit_test(unknown_lot_and_missing_temperature),
	};
	return cmocka_run_group_tests_name("sessions", tests, NULL, NULL);
}
