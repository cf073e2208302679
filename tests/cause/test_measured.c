/* tests/cause/test_measured.c - what the session holds besides its readings: extra measurements split groups, answers
 * to mix-ups stand, and what all of it comes to.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "truth.h"

#include <string.h>

static bench b;

enum { SEEDS = 5 };

static fl_measurement measured(fl_measure what, double value, fl_unit unit) {
	return (fl_measurement){.what = what,
	                        .run = FL_RUN_AS_FOUND,
	                        .typed = "?",
	                        .value = value,
	                        .unit = unit,
	                        .applied_pa = NAN,
	                        .over_s = NAN,
	                        .temp_c = NAN};
}

/* A pressure injected into a transmitter with this span error, 313.21 mbar at full scale. */
static fl_measurement injection(double mbar, double span_error) {
	fl_measurement m = measured(FL_MEASURE_INJECTION, 4.0 + 16.0 * mbar / 313.21 * (1.0 + span_error), FL_U_MA);
	m.applied_unit = FL_U_MBAR;
	m.applied_pa = 100.0 * mbar;
	return m;
}

static const fl_cause_group *group_with(const fl_cause *c, fl_fault fault) {
	for (size_t g = 0; g < c->group_count; g++)
		for (size_t i = 0; i < c->groups[g].member_count; i++)
			if (c->groups[g].members[i].fault == fault)
				return &c->groups[g];
	return NULL;
}

static bool possible(const fl_cause *c, fl_fault fault) {
	const fl_cause_group *group = group_with(c, fault);
	for (size_t i = 0; group && i < group->member_count; i++)
		if (group->members[i].fault == fault)
			return group->members[i].possible && fabs(group->effect_span) > group->u_effect_span;
	return false;
}

static fl_cause search(const truth *t, fl_measurement *list, size_t count) {
	truth_session(&b, t);
	b.session.measurements = list;
	b.session.measurement_count = count;
	return truth_search(&b, NULL);
}

static void end(fl_cause *cause) {
	fl_cause_free(cause);
	b.session.measurements = NULL;
	b.session.measurement_count = 0;
	bench_end(&b);
}

/* Deposit and transmitter span look the same to the oils; what the transmitter alone shows tells them apart, whichever
 * it truly is. */
static void injections_split_the_group(void **state) {
	(void)state;
	for (unsigned long long seed = 1; seed <= SEEDS; seed++) {
		truth fouled = {.seed = seed, .deposit = 0.012}, spanned = {.seed = seed, .span = 0.05};
		fl_cause c = search(&fouled, NULL, 0);
		truth_check(&c, seed, possible(&c, FL_FAULT_DEPOSIT) && possible(&c, FL_FAULT_SPAN));
		truth_check(&c, seed, group_with(&c, FL_FAULT_DEPOSIT)->splits[0] == FL_SPLIT_INJECT);
		end(&c);
		fl_measurement sound[] = {injection(150.0, 0.0), injection(300.0, 0.0)};
		c = search(&fouled, sound, 2);
		truth_check(&c, seed, possible(&c, FL_FAULT_DEPOSIT) && !possible(&c, FL_FAULT_SPAN));
		end(&c);
		fl_measurement off[] = {injection(150.0, 0.05), injection(300.0, 0.05)};
		c = search(&spanned, off, 2);
		truth_check(&c, seed, possible(&c, FL_FAULT_SPAN) && !possible(&c, FL_FAULT_DEPOSIT));
		end(&c);
	}
}

/* A slipping pump turns at its speed and delivers less: the timed volume sees it, the count does not. */
static void a_timed_volume_sees_the_slip(void **state) {
	(void)state;
	for (unsigned long long seed = 1; seed <= SEEDS; seed++) {
		truth slipping = {.seed = seed, .slip = 0.05};
		const fl_capillary *c = &b.instrument.capillary;
		fl_cause without = search(&slipping, NULL, 0);
		double flow = c->displacement_m3_rev * c->pump_speed_rev_s / (1.0 + c->slip_fraction + 0.05);
		truth_check(&without, seed, possible(&without, FL_FAULT_SLIP) && possible(&without, FL_FAULT_SPAN));
		end(&without);
		fl_measurement list[] = {measured(FL_MEASURE_SPEED, 40.0, FL_U_R_MIN),
		                         measured(FL_MEASURE_VOLUME, 500.0, FL_U_CM3), injection(150.0, 0.0),
		                         injection(300.0, 0.0)};
		list[1].over_s = 500e-6 / flow;
		fl_cause with = search(&slipping, list, 4);
		truth_check(&with, seed, possible(&with, FL_FAULT_SLIP));
		truth_check(&with, seed, !possible(&with, FL_FAULT_SPAN) && !possible(&with, FL_FAULT_SPEED));
		end(&with);
	}
}

static void what_does_not_count_is_left_out(void **state) {
	(void)state;
	truth t = {.seed = 1};
	fl_measurement list[] = {injection(150.0, 0.0), injection(300.0, 0.0), measured(FL_MEASURE_SPEED, 38.0, FL_U_R_MIN),
	                         measured(FL_MEASURE_DENSITY, 905.0, FL_U_KG_M3),
	                         measured(FL_MEASURE_SPANNED, 2.1, FL_U_PERCENT)};
	fl_arena arena = {0};
	fl_cause_extra extra;
	fl_error err = {0};
	truth_session(&b, &t);
	list[1].undone = true;
	list[2].run = list[3].run = FL_RUN_AS_LEFT; /* the density is the same in either state, the speed is not */
	b.session.measurements = list;
	b.session.measurement_count = 5;
	fl_cause_extra_begin(&extra);
	assert_int_equal(
	    fl_cause_extra_measured(&b.session, &b.instrument, &b.stock, FL_RUN_AS_FOUND, &arena, &extra, &err), FL_OK);
	assert_int_equal(extra.injection_count, 1);
	check_close("pressure", 15000.0, extra.injections[0].dp_pa, 1e-9);
	check_close("usual uncertainty of an injection", 0.0005, extra.injection_u_span, 1e-12);
	assert_true(isnan(extra.pump_speed_rev_s));
	check_close("density", 905.0, extra.dial_density_kg_m3, 1e-9);
	check_close("spanned out", 0.021, extra.gain_since_cleaning, 1e-12);
	fl_arena_free(&arena);
	b.session.measurements = NULL;
	b.session.measurement_count = 0;
	bench_end(&b);
}

/* ---- answers to mix-ups ---- */

static void answers_to_mix_ups_stand(void **state) {
	(void)state;
	fl_finding_answer answer = {.id = "mix-up:bottles:2+4", .reason = "looked", .by = "A. Holm"};
	for (unsigned long long seed = 1; seed <= SEEDS; seed++)
		for (int yes = 0; yes < 2; yes++) {
			truth t = {.seed = seed, .oils = {0, 3, 2, 1, 4}, .oil_count = 5};
			fl_course course;
			truth_session(&b, &t);
			answer.yes = yes;
			b.session.findings = &answer;
			b.session.finding_count = 1;
			fl_cause c = truth_search(&b, NULL);
			const fl_finding *f = fl_cause_finding(&c, FL_FINDING_MIX_UP);
			truth_check(&c, seed, f->asks && strcmp(f->answered, yes ? "yes" : "no") == 0);
			truth_check(&c, seed, c.withheld == (yes == 1) && strstr(f->advice, "looked"));
			truth_check(&c, seed, fl_cause_course(&c, &b.result.runs[FL_RUN_AS_FOUND], &course));
			truth_check(&c, seed, course.decision != FL_DECISION_ADJUST && (course.because == f) == (yes == 1));
			fl_cause_free(&c);
			b.session.findings = NULL;
			b.session.finding_count = 0;
			bench_end(&b);
		}
}

/* ---- what it comes to ---- */

static void expect_course(truth t, fl_decision decision, bool rules_out) {
	for (t.seed = 1; t.seed <= SEEDS; t.seed++) {
		fl_course course;
		fl_cause c = search(&t, NULL, 0);
		truth_check(&c, t.seed, fl_cause_course(&c, &b.result.runs[FL_RUN_AS_FOUND], &course));
		truth_check(&c, t.seed, course.decision == decision && course.rules_out_adjusting == rules_out);
		truth_check(&c, t.seed, course.reason[0] != '\0');
		end(&c);
	}
}

static void the_course_follows_from_the_findings(void **state) {
	(void)state;
	expect_course((truth){.seed = 0}, FL_DECISION_LEAVE, false);
	expect_course((truth){.zero = 0.024}, FL_DECISION_ADJUST, false);
	expect_course((truth){.speed = -1.0 / 6.0}, FL_DECISION_REPAIR, true);
	expect_course((truth){.deposit = 0.05}, FL_DECISION_REPAIR, true); /* a gain of 23 % */
	expect_course((truth){.deposit = 0.015}, FL_DECISION_NONE, false); /* 6 %: a group with the flow part in it */
	expect_course((truth){.curvature = 0.05}, FL_DECISION_REPAIR, false);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(injections_split_the_group),           cmocka_unit_test(a_timed_volume_sees_the_slip),
	    cmocka_unit_test(what_does_not_count_is_left_out),      cmocka_unit_test(answers_to_mix_ups_stand),
	    cmocka_unit_test(the_course_follows_from_the_findings),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
