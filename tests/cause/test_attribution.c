/* tests/cause/test_attribution.c - simulated truths with noise come back, and nothing else is named.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Tolerances on amounts: four standard uncertainties as the search itself states them, so that it is held to its own
 * word. Seeds are fixed and printed on failure with everything that was found.
 */
#include "truth.h"

static bench b;

enum { SEEDS = 5 };

/* One truth over several seeds. */
typedef void (*expectation)(const fl_cause *cause, unsigned long long seed);

static void over_seeds(truth t, const fl_cause_extra *extra, expectation expect) {
	for (unsigned long long seed = 1; seed <= SEEDS; seed++) {
		t.seed = 100 + seed;
		truth_session(&b, &t);
		fl_cause cause = truth_search(&b, extra);
		expect(&cause, t.seed);
		fl_cause_free(&cause);
		bench_end(&b);
	}
}

/* The member's amount, held to the effect's own relative uncertainty. */
static void amount_is(const fl_cause *c, unsigned long long seed, fl_fault fault, double want) {
	const fl_cause_member *m = truth_member(c, fault);
	const fl_cause_group *g = truth_group(c, fault);
	truth_check(c, seed, m && m->possible);
	double u = fabs(want * g->u_effect_span / g->effect_span);
	if (!(fabs(m->alone - want) <= 4.0 * u))
		fprintf(stderr, "%s: want %g, got %g, u %g\n", fl_cause_fault(fault)->word, want, m->alone, u);
	truth_check(c, seed, fabs(m->alone - want) <= 4.0 * u);
}

static void possible_are(const fl_cause *c, unsigned long long seed, fl_fault of, const fl_fault *faults, size_t n) {
	const fl_cause_group *g = truth_group(c, of);
	truth_check(c, seed, g != NULL);
	for (size_t i = 0; i < n; i++)
		truth_check(c, seed, truth_group(c, faults[i]) == g && truth_member(c, faults[i])->possible);
}

/* ---- nothing is wrong ---- */

static void expect_nothing(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained);
	truth_check(c, seed, truth_named(c) == 0);
	truth_check(c, seed, fl_cause_finding(c, FL_FINDING_NO_CAUSE) != NULL);
	truth_check(c, seed, truth_finding(c, "two-zeros:healthy") != NULL);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_MIX_UP) && !fl_cause_finding(c, FL_FINDING_SUPPLY));
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_CARRY_OVER) && !fl_cause_finding(c, FL_FINDING_SCATTER));
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_STOP) && !fl_cause_finding(c, FL_FINDING_REPAIR_FIRST));
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_TRIM_FAILS) && !fl_cause_finding(c, FL_FINDING_SATURATED));
	truth_check(c, seed, !c->stop && !c->withheld);
}

static void healthy(void **state) {
	(void)state;
	over_seeds((truth){0}, NULL, expect_nothing);
}

static void healthy_with_one_rising_pass(void **state) {
	(void)state;
	over_seeds((truth){.cycles = 1, .rising_only = true}, NULL, expect_nothing);
}

/* ---- the gain ---- */

static void expect_deposit_group(const fl_cause *c, unsigned long long seed) {
	static const fl_fault faults[] = {FL_FAULT_DEPOSIT, FL_FAULT_SPAN, FL_FAULT_DENSITY};
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_GROUP);
	truth_check(c, seed, c->explained && truth_named(c) == 1 && f);
	truth_check(c, seed, f->strength == FL_STRENGTH_CLEAR);
	possible_are(c, seed, FL_FAULT_DEPOSIT, faults, 3);
	amount_is(c, seed, FL_FAULT_DEPOSIT, 0.01);
	amount_is(c, seed, FL_FAULT_SPAN, pow(0.99, -4.0) - 1.0);
	truth_check(c, seed, !truth_member(c, FL_FAULT_SLIP)->possible); /* the sign */
	truth_check(c, seed, truth_group(c, FL_FAULT_SPAN)->splits[0] == FL_SPLIT_INJECT);
	truth_check(c, seed, truth_finding(c, "repair-first:perhaps") != NULL); /* 4 % of reading */
}

static void deposit(void **state) {
	(void)state;
	over_seeds((truth){.deposit = 0.01}, NULL, expect_deposit_group);
}

static void expect_slip_group(const fl_cause *c, unsigned long long seed) {
	static const fl_fault faults[] = {FL_FAULT_SLIP, FL_FAULT_SPAN, FL_FAULT_DENSITY};
	truth_check(c, seed, c->explained && truth_named(c) == 1 && fl_cause_finding(c, FL_FINDING_GROUP));
	possible_are(c, seed, FL_FAULT_SLIP, faults, 3);
	amount_is(c, seed, FL_FAULT_SLIP, 0.04);
	truth_check(c, seed, !truth_member(c, FL_FAULT_DEPOSIT)->possible);
	truth_check(c, seed, truth_group(c, FL_FAULT_SLIP)->splits[1] == FL_SPLIT_VOLUME);
}

static void slip(void **state) {
	(void)state;
	over_seeds((truth){.slip = 0.04}, NULL, expect_slip_group);
}

static void expect_density_group(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	amount_is(c, seed, FL_FAULT_DENSITY, 0.03);
}

static void dial_density(void **state) {
	(void)state;
	over_seeds((truth){.density = 0.03}, NULL, expect_density_group);
}

/* ---- extra measurements split the group ---- */

/* Two injections that show a sound transmitter, a counted speed, the papers, a second thermometer. */
static fl_cause_injection injections[3];

static fl_cause_extra sound_extra(void) {
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	for (int i = 0; i < 3; i++) {
		double x = 0.1 + 0.4 * i;
		injections[i] = (fl_cause_injection){x * 31321.0, 4.0 + 16.0 * x + 0.001 * (i - 1)};
	}
	extra.injections = injections;
	extra.injection_count = 3;
	return extra;
}

static void expect_no_span(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_group(c, FL_FAULT_SPAN) != truth_group(c, FL_FAULT_DEPOSIT));
	truth_check(c, seed, !truth_group(c, FL_FAULT_SPAN)->material);
	amount_is(c, seed, FL_FAULT_DEPOSIT, 0.01);
	truth_check(c, seed, truth_member(c, FL_FAULT_DENSITY)->possible);
}

static void injection_takes_the_transmitter_out(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra();
	over_seeds((truth){.deposit = 0.01}, &extra, expect_no_span);
}

static void expect_deposit_alone(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_CAUSE);
	truth_check(c, seed, c->explained && truth_named(c) == 1 && f);
	truth_check(c, seed, strcmp(f->id, "cause:deposit") == 0);
	truth_check(c, seed, truth_finding(c, "repair-first:sure") != NULL);
	amount_is(c, seed, FL_FAULT_DEPOSIT, 0.01);
}

static void everything_measured_singles_out_the_deposit(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra();
	extra.pump_speed_rev_s = 40.02 / 60.0;
	extra.u_pump_speed_rev_s = 0.05 / 60.0;
	extra.dial_density_kg_m3 = 900.0;
	extra.u_dial_density = 1.0;
	extra.temp_difference_k = 0.01;
	extra.u_temp_difference = 0.03;
	over_seeds((truth){.deposit = 0.01}, &extra, expect_deposit_alone);
}

static void expect_span_alone(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:transmitter-span") != NULL);
	truth_check(c, seed, !truth_group(c, FL_FAULT_DEPOSIT)->material);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_REPAIR_FIRST));
	amount_is(c, seed, FL_FAULT_SPAN, 0.035);
}

static void injection_shows_the_span(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra();
	for (int i = 0; i < 3; i++)
		injections[i].output = 4.0 + 16.0 * (0.1 + 0.4 * i) * 1.035;
	over_seeds((truth){.span = 0.035}, &extra, expect_span_alone);
}

static void expect_speed_alone(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:pump-speed") != NULL);
	amount_is(c, seed, FL_FAULT_SPEED, -0.03);
}

static void counted_revolutions_show_the_speed(void **state) {
	(void)state;
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	extra.pump_speed_rev_s = 38.8 / 60.0;
	extra.u_pump_speed_rev_s = 0.04 / 60.0;
	over_seeds((truth){.speed = -0.03}, &extra, expect_speed_alone);
}

static void expect_slip_alone(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:pump-slip") != NULL);
	truth_check(c, seed, truth_finding(c, "repair-first:sure") != NULL);
}

static void timed_volume_shows_the_slip(void **state) {
	(void)state;
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	extra.pump_speed_rev_s = 40.0 / 60.0;
	extra.u_pump_speed_rev_s = 0.02 / 60.0;
	extra.flow_m3_s = 1e-6 / 1.045;
	extra.u_flow_m3_s = 0.002e-6;
	over_seeds((truth){.slip = 0.04}, &extra, expect_slip_alone);
}

static void expect_density_alone(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:dial-density") != NULL);
	truth_check(c, seed, strstr(fl_cause_finding(c, FL_FINDING_CAUSE)->sentence, "instead of 900 kg/m³") != NULL);
	amount_is(c, seed, FL_FAULT_DENSITY, 991.0 / 900.0 - 1.0);
}

static void papers_show_the_dial_density(void **state) {
	(void)state;
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	extra.dial_density_kg_m3 = 991.0;
	extra.u_dial_density = 0.5;
	over_seeds((truth){.density = 991.0 / 900.0 - 1.0}, &extra, expect_density_alone);
}

static void expect_temperature_alone(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:oil-temperature") != NULL);
	amount_is(c, seed, FL_FAULT_TEMPERATURE, 0.6);
}

static void a_second_thermometer_shows_the_first(void **state) {
	(void)state;
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	extra.temp_difference_k = 0.59;
	extra.u_temp_difference = 0.02;
	over_seeds((truth){.warmer_k = 0.6}, &extra, expect_temperature_alone);
}

/* ---- zero, particle, curvature, clip ---- */

static void expect_zero_group(const fl_cause *c, unsigned long long seed) {
	static const fl_fault faults[] = {FL_FAULT_ZERO, FL_FAULT_COLUMN};
	truth_check(c, seed, c->explained && truth_named(c) == 1 && fl_cause_finding(c, FL_FINDING_GROUP));
	possible_are(c, seed, FL_FAULT_ZERO, faults, 2);
	amount_is(c, seed, FL_FAULT_ZERO, 0.012);
	truth_check(c, seed, truth_finding(c, "two-zeros:stopped") != NULL);
	truth_check(c, seed, truth_group(c, FL_FAULT_ZERO)->splits[0] == FL_SPLIT_INJECT);
	truth_check(c, seed, c->trim.zero_asked);
}

static void zero(void **state) {
	(void)state;
	over_seeds((truth){.zero = 0.012}, NULL, expect_zero_group);
}

static void expect_column(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:liquid-column") != NULL);
	amount_is(c, seed, FL_FAULT_COLUMN, 0.05);
}

static void a_good_transmitter_leaves_the_column(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra();
	over_seeds((truth){.column_m = 0.05}, &extra, expect_column);
}

static void expect_particle(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:particle") != NULL);
	truth_check(c, seed, truth_finding(c, "two-zeros:running") != NULL);
	truth_check(c, seed, truth_finding(c, "repair-first:sure") != NULL);
	truth_check(c, seed, !c->trim.zero_asked);
	check_near("mm at half bore", 1.0, 1e3 * truth_member(c, FL_FAULT_PARTICLE)->alone, 0.2);
}

static void particle(void **state) {
	(void)state;
	over_seeds((truth){.particle_mm = 1.0}, NULL, expect_particle);
}

static void expect_curvature(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:curvature") != NULL);
	amount_is(c, seed, FL_FAULT_CURVATURE, 0.015);
}

static void curvature(void **state) {
	(void)state;
	over_seeds((truth){.curvature = 0.015}, NULL, expect_curvature);
}

static void expect_clip(const fl_cause *c, unsigned long long seed) {
	static const fl_fault faults[] = {FL_FAULT_COUPLING, FL_FAULT_LIMIT};
	truth_check(c, seed, c->explained && truth_named(c) == 1 && fl_cause_finding(c, FL_FINDING_GROUP));
	possible_are(c, seed, FL_FAULT_COUPLING, faults, 2);
	truth_check(c, seed, truth_group(c, FL_FAULT_COUPLING)->splits[0] == FL_SPLIT_INJECT);
	truth_check(c, seed, fl_cause_finding(c, FL_FINDING_TRIM_FAILS) != NULL);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_MIX_UP));
}

static void clip(void **state) {
	(void)state;
	over_seeds((truth){.clip = 0.80}, NULL, expect_clip);
}

static void expect_coupling(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:coupling") != NULL);
	truth_check(c, seed, truth_finding(c, "repair-first:sure") != NULL);
}

static void an_output_that_rises_leaves_the_coupling(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra();
	over_seeds((truth){.clip = 0.80}, &extra, expect_coupling);
}

static void expect_limit(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_finding(c, "cause:output-limit") != NULL);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_REPAIR_FIRST)); /* nothing to clean */
}

static void an_output_that_stays_down_is_the_limit(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra();
	injections[2].output = 4.0 + 16.0 * 0.80;
	over_seeds((truth){.clip = 0.80}, &extra, expect_limit);
}

/* 0.9 % of span per 10 bar, read at 8 bar: stopped and running alike, so a member of the zero group. */
static void expect_line(const fl_cause *c, unsigned long long seed) {
	static const fl_fault faults[] = {FL_FAULT_ZERO, FL_FAULT_LINE};
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	possible_are(c, seed, FL_FAULT_ZERO, faults, 1);
	truth_check(c, seed, truth_group(c, FL_FAULT_LINE) == truth_group(c, FL_FAULT_ZERO));
	check_near("per 10 bar", 0.009, truth_member(c, FL_FAULT_LINE)->alone, 0.0005);
}

static void expect_line_alone(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_member(c, FL_FAULT_LINE) && !truth_member(c, FL_FAULT_ZERO)->possible);
}

static void line_pressure(void **state) {
	(void)state;
	fl_cause_extra extra = sound_extra(); /* injected without line pressure: the transmitter itself is sound */
	over_seeds((truth){.line_pa = 8e5, .line_per_10_bar = 0.009}, NULL, expect_line);
	over_seeds((truth){.line_pa = 8e5, .line_per_10_bar = 0.009}, &extra, expect_line_alone);
}

/* ---- the way there ---- */

static void expect_lag(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_member(c, FL_FAULT_LAG)->possible);
	amount_is(c, seed, FL_FAULT_LAG, 0.015);
}

static void lag(void **state) {
	(void)state;
	over_seeds((truth){.lag = 0.015}, NULL, expect_lag);
}

static void expect_carry_over(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 1);
	truth_check(c, seed, truth_member(c, FL_FAULT_CARRY_OVER)->possible);
	amount_is(c, seed, FL_FAULT_CARRY_OVER, 0.015);
	const fl_finding *f = truth_finding(c, "carry-over:flush-again");
	truth_check(c, seed, f && strstr(f->advice, "second time"));
	truth_check(c, seed, fabs(c->carry_over - 0.015) < 4.0 * c->u_carry_over + 0.0003);
}

static void carry_over(void **state) {
	(void)state;
	over_seeds((truth){.carry = 0.015}, NULL, expect_carry_over);
}

/* ---- two at once, and something that is not in the list ---- */

static void expect_two(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, c->explained && truth_named(c) == 2);
	amount_is(c, seed, FL_FAULT_ZERO, 0.015);
	amount_is(c, seed, FL_FAULT_DEPOSIT, 0.012);
}

static void zero_and_deposit_together(void **state) {
	(void)state;
	over_seeds((truth){.zero = 0.015, .deposit = 0.012}, NULL, expect_two);
}

/* The output at rest is below its range, so there is no stopped zero: a zero and an obstacle in the bore together
 * could stand in for the gain. It is told as open, without strength, and never as a single cause. */
static void expect_open_gain(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, fl_cause_finding(c, FL_FINDING_SATURATED) != NULL);
	truth_check(c, seed, c->explained && !fl_cause_finding(c, FL_FINDING_CAUSE));
	const fl_finding *f = truth_finding(c, "cause-group-open:");
	truth_check(c, seed, f && f->strength == FL_STRENGTH_NONE && strstr(f->id, "deposit"));
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_REPAIR_FIRST));
}

static void without_a_stopped_zero_the_gain_stays_open(void **state) {
	(void)state;
	over_seeds((truth){.zero = -0.015, .deposit = 0.012}, NULL, expect_open_gain);
}

static void expect_unexplained(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, !c->explained && c->p < 0.01);
	truth_check(c, seed, truth_named(c) == 0);
	truth_check(c, seed, fl_cause_finding(c, FL_FINDING_UNEXPLAINED) != NULL);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_NO_CAUSE) && !fl_cause_finding(c, FL_FINDING_NEXT_POINT));
}

/* Friction in the indicator: rising and falling apart by as much everywhere. Not among the known faults. */
static void friction_is_not_explained(void **state) {
	(void)state;
	over_seeds((truth){.friction = 0.006}, NULL, expect_unexplained);
}

/* The residuals of a true model are spread as chi-squared says: over many seeds neither always good nor always bad. */
static void chi_squared_of_healthy_sessions(void **state) {
	(void)state;
	int below_tenth = 0;
	for (unsigned long long seed = 1; seed <= 30; seed++) {
		truth t = {.seed = 1000 + seed};
		truth_session(&b, &t);
		fl_cause cause = truth_search(&b, NULL);
		below_tenth += cause.p < 0.1;
		truth_check(&cause, t.seed, cause.p >= 0.01);
		fl_cause_free(&cause);
		bench_end(&b);
	}
	/* The budgets hold parts that this noise lacks (settling, lots), so fewer than a tenth. */
	assert_true(below_tenth <= 7);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(healthy),
	    cmocka_unit_test(healthy_with_one_rising_pass),
	    cmocka_unit_test(deposit),
	    cmocka_unit_test(slip),
	    cmocka_unit_test(dial_density),
	    cmocka_unit_test(injection_takes_the_transmitter_out),
	    cmocka_unit_test(everything_measured_singles_out_the_deposit),
	    cmocka_unit_test(injection_shows_the_span),
	    cmocka_unit_test(counted_revolutions_show_the_speed),
	    cmocka_unit_test(timed_volume_shows_the_slip),
	    cmocka_unit_test(papers_show_the_dial_density),
	    cmocka_unit_test(a_second_thermometer_shows_the_first),
	    cmocka_unit_test(zero),
	    cmocka_unit_test(a_good_transmitter_leaves_the_column),
	    cmocka_unit_test(particle),
	    cmocka_unit_test(curvature),
	    cmocka_unit_test(clip),
	    cmocka_unit_test(an_output_that_rises_leaves_the_coupling),
	    cmocka_unit_test(an_output_that_stays_down_is_the_limit),
	    cmocka_unit_test(line_pressure),
	    cmocka_unit_test(lag),
	    cmocka_unit_test(carry_over),
	    cmocka_unit_test(zero_and_deposit_together),
	    cmocka_unit_test(without_a_stopped_zero_the_gain_stays_open),
	    cmocka_unit_test(friction_is_not_explained),
	    cmocka_unit_test(chi_squared_of_healthy_sessions),
	};
	return cmocka_run_group_tests_name("attribution", tests, NULL, NULL);
}
