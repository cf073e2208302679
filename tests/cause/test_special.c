/* tests/cause/test_special.c - mix-ups, the supply's ratio, saturated points, scatter, trim, next point: each where it
 * is true, and not where something else is.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "truth.h"

static bench b;

enum { SEEDS = 4 };

typedef void (*change)(bench *bench_changed);
typedef void (*expectation)(const fl_cause *cause, unsigned long long seed);

/* A truth over several seeds, its record changed before the search. */
static void over_seeds(truth t, change spoil, const fl_cause_extra *extra, expectation expect) {
	for (unsigned long long seed = 1; seed <= SEEDS; seed++) {
		t.seed = 500 + seed;
		truth_session(&b, &t);
		if (spoil)
			spoil(&b);
		fl_cause cause = truth_search(&b, extra);
		expect(&cause, t.seed);
		fl_cause_free(&cause);
		bench_end(&b);
	}
}

static bool withheld(const fl_cause *c) {
	return c->withheld && truth_named(c) == 0 && !fl_cause_finding(c, FL_FINDING_TRIM);
}

/* ---- exchanged bottles ---- */

static void expect_exchanged(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_MIX_UP);
	truth_check(c, seed, f && strcmp(f->id, "mix-up:bottles:2+4") == 0);
	truth_check(c, seed, strstr(f->sentence, "LK-10") && strstr(f->sentence, "LK-35"));
	truth_check(c, seed, strstr(f->advice, "as entered") != NULL);
	truth_check(c, seed, f->numbers[0].value > 40.0 && f->numbers[1].value < 0.5);
	truth_check(c, seed, withheld(c) && c->stop);
}

static void exchanged_bottles(void **state) {
	(void)state;
	over_seeds((truth){.oils = {0, 3, 2, 1, 4}, .oil_count = 5}, NULL, NULL, expect_exchanged);
	over_seeds((truth){.oils = {0, 3, 2, 1, 4}, .oil_count = 5, .deposit = 0.01, .zero = 0.01}, NULL, NULL,
	           expect_exchanged);
}

static void keep_three_points(bench *spoilt) {
	size_t kept = 0;
	for (size_t i = 0; i < spoilt->session.reading_count; i++)
		if (spoilt->readings[i].point < 3)
			spoilt->readings[kept++] = spoilt->readings[i];
	spoilt->session.reading_count = kept;
}

static void expect_exchanged_of_three(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, truth_finding(c, "mix-up:bottles:2+3") && withheld(c));
}

static void exchanged_bottles_of_three(void **state) {
	(void)state;
	over_seeds((truth){.oils = {0, 2, 1, 3, 4}, .oil_count = 5}, keep_three_points, NULL, expect_exchanged_of_three);
}

static void expect_wrong_bottle(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_MIX_UP);
	truth_check(c, seed, f && strcmp(f->id, "mix-up:3:bottle") == 0);
	truth_check(c, seed, strstr(f->sentence, "LK-35") && strstr(f->sentence, "18 readings"));
	truth_check(c, seed, withheld(c));
}

static void one_wrong_bottle(void **state) {
	(void)state;
	over_seeds((truth){.oils = {0, 1, 3, 3, 4}, .oil_count = 5}, NULL, NULL, expect_wrong_bottle);
}

/* ---- one reading typed wrongly ---- */

/* The second reading of LK-20, rising, in the second cycle. */
static fl_reading *victim(bench *spoilt) {
	for (size_t i = 0; i < spoilt->session.reading_count; i++) {
		fl_reading *r = &spoilt->readings[i];
		if (r->point == 2 && r->pass == FL_PASS_RISING && r->cycle == 2 && r->number == 2)
			return r;
	}
	fail();
	return NULL;
}

static void type_the_dial(bench *spoilt) {
	fl_reading *r = victim(spoilt);
	r->output = round(50.0 * (r->output - 4.0) / 16.0 * 100.0) / 100.0;
}

static void type_fahrenheit(bench *spoilt) {
	for (size_t i = 0; i < spoilt->session.reading_count; i++) {
		fl_reading *r = &spoilt->readings[i];
		if (r->point == 2 && r->pass == FL_PASS_RISING && r->cycle == 2)
			r->temp_c = r->temp_c * 1.8 + 32.0;
	}
}

static void slip_the_decimal(bench *spoilt) {
	fl_reading *r = victim(spoilt);
	r->output /= 10.0;
}

static void expect_unit(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = truth_finding(c, "mix-up:3:");
	truth_check(c, seed, f && strstr(f->id, "unit") && strstr(f->sentence, "mm²/s") && withheld(c));
}

static void expect_fahrenheit(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = truth_finding(c, "mix-up:3:");
	truth_check(c, seed, f && strstr(f->id, "fahrenheit") && strstr(f->sentence, "3 readings") && withheld(c));
}

static void expect_decimal(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = truth_finding(c, "mix-up:3:");
	truth_check(c, seed, f && strstr(f->id, "decimal") && strstr(f->sentence, "ten times higher") && withheld(c));
}

static void typed_wrongly(void **state) {
	(void)state;
	over_seeds((truth){.zero = 0.004}, type_the_dial, NULL, expect_unit);
	over_seeds((truth){.deposit = 0.005}, type_fahrenheit, NULL, expect_fahrenheit);
	over_seeds((truth){.span = -0.02}, slip_the_decimal, NULL, expect_decimal);
}

static void all_on_the_dial(bench *spoilt) {
	for (size_t i = 0; i < spoilt->session.reading_count; i++)
		spoilt->readings[i].output = 50.0 * (spoilt->readings[i].output - 4.0) / 16.0;
}

static void expect_whole_run(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, truth_finding(c, "mix-up:unit:mm²/s") && withheld(c));
}

static void whole_run_in_another_unit(void **state) {
	(void)state;
	over_seeds((truth){.zero = 0.003}, all_on_the_dial, NULL, expect_whole_run);
}

/* ---- rising and falling ---- */

static void exchange_passes_of(bench *spoilt, int cycle) {
	for (size_t i = 0; i < spoilt->session.reading_count; i++) {
		fl_reading *r = &spoilt->readings[i];
		if (cycle == 0 || r->cycle == cycle)
			r->pass = r->pass == FL_PASS_RISING ? FL_PASS_FALLING : FL_PASS_RISING;
	}
}

static void exchange_second_cycle(bench *spoilt) {
	exchange_passes_of(spoilt, 2);
}

static void exchange_all(bench *spoilt) {
	exchange_passes_of(spoilt, 0);
}

static void expect_passes_of_second(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, truth_finding(c, "mix-up:passes:2") && withheld(c));
}

static void expect_passes(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = truth_finding(c, "mix-up:passes");
	truth_check(c, seed, f && f->strength == FL_STRENGTH_HINT);
}

static void expect_no_mix_up(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_MIX_UP) && !c->withheld);
}

static void rising_and_falling(void **state) {
	(void)state;
	over_seeds((truth){.carry = 0.008}, exchange_second_cycle, NULL, expect_passes_of_second);
	over_seeds((truth){.carry = 0.008}, exchange_all, NULL, expect_passes);
	over_seeds((truth){.carry = 0.008}, NULL, NULL, expect_no_mix_up);
	over_seeds((truth){.lag = 0.01}, NULL, NULL, expect_no_mix_up);
}

/* Real faults, however large, are no mix-up. */
static void faults_are_no_mix_up(void **state) {
	(void)state;
	over_seeds((truth){.clip = 0.78}, NULL, NULL, expect_no_mix_up);
	over_seeds((truth){.particle_mm = 2.0}, NULL, NULL, expect_no_mix_up);
	over_seeds((truth){.speed = -1.0 / 6.0}, NULL, NULL, expect_no_mix_up);
	over_seeds((truth){.deposit = 0.04}, NULL, NULL, expect_no_mix_up);
	over_seeds((truth){.curvature = 0.03}, NULL, NULL, expect_no_mix_up);
	over_seeds((truth){.reading_noise = 3e-3}, NULL, NULL, expect_no_mix_up);
}

/* ---- supply ---- */

static void expect_slow_supply(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_SUPPLY);
	truth_check(c, seed, f && strcmp(f->id, "supply:5/6") == 0);
	truth_check(c, seed, c->stop && fl_cause_finding(c, FL_FINDING_STOP));
	truth_check(c, seed, truth_named(c) == 0 && c->explained);
	truth_check(c, seed, strstr(fl_cause_finding(c, FL_FINDING_TRIM)->advice, "Not before") != NULL);
}

static void expect_slow_supply_and_zero(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, truth_finding(c, "supply:5/6") && c->stop && c->explained);
	truth_check(c, seed, truth_named(c) == 1 && truth_finding(c, "cause-group:transmitter-zero"));
}

static void expect_fast_supply(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, truth_finding(c, "supply:6/5") && c->stop && truth_named(c) == 0);
}

static void expect_stop_without_supply(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_SUPPLY));
	truth_check(c, seed, fl_cause_finding(c, FL_FINDING_STOP) && c->stop);
}

static void supply(void **state) {
	(void)state;
	over_seeds((truth){.speed = -1.0 / 6.0}, NULL, NULL, expect_slow_supply);
	over_seeds((truth){.speed = -1.0 / 6.0, .zero = 0.008}, NULL, NULL, expect_slow_supply_and_zero);
	over_seeds((truth){.oils = {0, 1, 2, 3}, .oil_count = 4, .speed = 0.2}, keep_three_points, NULL,
	           expect_fast_supply);
	/* 12 % is not a sixth, and a counted speed that is right speaks against the supply. */
	over_seeds((truth){.slip = 0.14}, NULL, NULL, expect_stop_without_supply);
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	extra.pump_speed_rev_s = 40.0 / 60.0;
	extra.u_pump_speed_rev_s = 0.05 / 60.0;
	over_seeds((truth){.slip = 0.2}, NULL, &extra, expect_stop_without_supply);
}

/* ---- saturated ---- */

static void expect_saturated(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_SATURATED);
	truth_check(c, seed, f && strstr(f->sentence, "LK-50 rising") && strstr(f->sentence, "LK-50 falling"));
	for (size_t i = 0; i < c->row_count; i++)
		truth_check(c, seed, c->rows[i].point != 4);
	truth_check(c, seed, truth_member(c, FL_FAULT_DEPOSIT)->possible);
	check_near("bore loss from the points that are left", 0.035, truth_member(c, FL_FAULT_DEPOSIT)->alone, 0.003);
}

static void clip_at_the_end_of_the_signal(bench *spoilt) {
	for (size_t i = 0; i < spoilt->session.reading_count; i++)
		spoilt->readings[i].output = fmin(20.8, spoilt->readings[i].output);
}

static void saturated_points_are_left_out(void **state) {
	(void)state;
	over_seeds((truth){.deposit = 0.035}, clip_at_the_end_of_the_signal, NULL, expect_saturated);
}

/* ---- scatter ---- */

static void expect_air(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, fl_cause_finding(c, FL_FINDING_SCATTER) && c->stop);
	const fl_cause_member *m = truth_member(c, FL_FAULT_AIR);
	truth_check(c, seed, m != NULL);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_CAUSE));
}

static void expect_no_air(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_SCATTER) && !truth_member(c, FL_FAULT_AIR));
}

static void scatter(void **state) {
	(void)state;
	over_seeds((truth){.speed = -0.05, .reading_noise = 3e-3, .stop_noise = 5e-4}, NULL, NULL, expect_air);
	over_seeds((truth){.slip = 0.05}, NULL, NULL, expect_no_air);
}

/* ---- trim ---- */

/* zero z and gain g by hand: what the trim takes out, and the pressures where the new range begins and ends. */
static void expect_trim(const fl_cause *c, unsigned long long seed) {
	const fl_trim *t = &c->trim;
	truth_check(c, seed, t->available && t->brings_in && t->zero_asked && fl_cause_finding(c, FL_FINDING_TRIM));
	check_near("zero", 0.012, t->zero_span, 0.0003);
	check_near("gain", 0.025, t->gain, 0.003);
	check_near("lower range value, Pa", t->zero_span * 31321.0, t->dp_low_pa, 1e-6);
	check_near("upper range value, Pa", (1.0 + t->gain + t->zero_span) * 31321.0, t->dp_high_pa, 1e-6);
	for (size_t i = 0; i < t->point_count; i++) {
		double after = (c->rows[i].value + c->rows[i].x - t->zero_span) / (1.0 + t->gain) - c->rows[i].x;
		check_near("error after the trim", after, t->points[i].after_span, 1e-12);
		truth_check(c, seed, fabs(after) <= t->largest_after_span + 1e-15);
	}
	truth_check(c, seed, t->ideal_after_span <= t->largest_after_span + 1e-12);
}

static void expect_trim_fails(const fl_cause *c, unsigned long long seed) {
	const fl_finding *f = fl_cause_finding(c, FL_FINDING_TRIM_FAILS);
	truth_check(c, seed, f && strstr(f->sentence, "can't bring this in") && !c->trim.brings_in);
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_TRIM));
}

static void trim(void **state) {
	(void)state;
	over_seeds((truth){.zero = 0.012, .span = 0.025}, NULL, NULL, expect_trim);
	over_seeds((truth){.clip = 0.75}, NULL, NULL, expect_trim_fails);
}

/* A clean 2.5 % gain asks for no repair; with what was spanned out since the last cleaning it does. */
static void expect_no_repair(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, !fl_cause_finding(c, FL_FINDING_REPAIR_FIRST));
}

static void expect_repair(const fl_cause *c, unsigned long long seed) {
	truth_check(c, seed, truth_finding(c, "repair-first:perhaps") && c->stop);
}

static void what_was_spanned_out_since_cleaning_counts(void **state) {
	(void)state;
	fl_cause_extra extra;
	fl_cause_extra_begin(&extra);
	over_seeds((truth){.deposit = 0.006}, NULL, &extra, expect_no_repair);
	extra.gain_since_cleaning = 0.025;
	over_seeds((truth){.deposit = 0.006}, NULL, &extra, expect_repair);
}

/* ---- next point ---- */

static void expect_next(const fl_cause *c, unsigned long long seed) {
	const fl_next_point *n = &c->next;
	truth_check(c, seed, n->available && n->u_after < n->u_before && n->x > 0.02 && n->x <= 1.0);
	/* Deposit and transmitter span do the same to every oil at every temperature. */
	truth_check(c, seed, !n->splits && n->split_after > 0.5 * n->split_before);
	truth_check(c, seed, strstr(fl_cause_finding(c, FL_FINDING_NEXT_POINT)->sentence, "no oil does") != NULL);
}

static void next_point(void **state) {
	(void)state;
	over_seeds((truth){.deposit = 0.01, .cycles = 1, .rising_only = true}, NULL, NULL, expect_next);
}

/* ---- what the session recorded ---- */

static void recorded_speed_is_taken(void **state) {
	(void)state;
	bench_begin(&b);
	fl_setting settings[2] = {{.id = "supply-frequency", .typed = "50", .unit = FL_U_HZ, .value = 50.0},
	                          {.id = "pump-speed", .typed = "38.8", .unit = FL_U_R_MIN, .value = 38.8}};
	fl_cause_extra extra;
	b.instrument.supply_hz = 60.0;
	b.session.settings = settings;
	b.session.setting_count = 1;
	fl_cause_extra_begin(&extra);
	fl_cause_extra_from_session(&b.session, &b.instrument, &b.stock, &extra);
	check_close("speed by the frequency", 40.0 / 60.0 * 50.0 / 60.0, extra.pump_speed_rev_s, 1e-12);
	b.session.setting_count = 2;
	fl_cause_extra_begin(&extra);
	fl_cause_extra_from_session(&b.session, &b.instrument, &b.stock, &extra);
	check_close("speed counted", 38.8 / 60.0, extra.pump_speed_rev_s, 1e-12);
	check_close("its uncertainty without a tachometer", 0.005 * 38.8 / 60.0, extra.u_pump_speed_rev_s, 1e-12);
}

static void wrong_extra_is_refused(void **state) {
	(void)state;
	truth t = {.seed = 1};
	fl_cause cause;
	fl_cause_extra extra;
	truth_session(&b, &t);
	bench_assess(&b);
	fl_cause_extra_begin(&extra);
	extra.pump_speed_rev_s = 0.6;
	extra.u_pump_speed_rev_s = 0.0;
	assert_int_equal(
	    fl_cause_find(&b.session, &b.procedure, &b.stock, &b.result, FL_RUN_AS_FOUND, &extra, NULL, &cause, &b.err),
	    FL_E_VALUE);
	assert_non_null(strstr(b.err.message, "pump speed"));
	bench_end(&b);
}

static void a_run_that_is_missing_has_no_cause(void **state) {
	(void)state;
	truth t = {.seed = 1};
	fl_cause cause;
	truth_session(&b, &t);
	bench_assess(&b);
	assert_true(
	    fl_cause_find(&b.session, &b.procedure, &b.stock, &b.result, FL_RUN_AS_LEFT, NULL, NULL, &cause, &b.err) >= 0);
	assert_false(cause.available);
	assert_true(strlen(cause.unavailable_reason) > 0);
	fl_cause_free(&cause);
	bench_end(&b);
}

/* The same session gives the same search, to the last bit. */
static void the_search_is_a_function_of_the_session(void **state) {
	(void)state;
	truth t = {.seed = 77, .deposit = 0.01};
	truth_session(&b, &t);
	fl_cause one = truth_search(&b, NULL);
	fl_result_free(&b.result);
	fl_cause two = truth_search(&b, NULL);
	assert_int_equal(one.finding_count, two.finding_count);
	assert_true(one.chi_squared == two.chi_squared);
	for (size_t i = 0; i < one.finding_count; i++) {
		assert_string_equal(one.findings[i].sentence, two.findings[i].sentence);
		assert_string_equal(one.findings[i].id, two.findings[i].id);
	}
	assert_non_null(strstr(one.statement, "Opinion"));
	fl_cause_free(&one);
	fl_cause_free(&two);
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(exchanged_bottles),
	    cmocka_unit_test(exchanged_bottles_of_three),
	    cmocka_unit_test(one_wrong_bottle),
	    cmocka_unit_test(typed_wrongly),
	    cmocka_unit_test(whole_run_in_another_unit),
	    cmocka_unit_test(rising_and_falling),
	    cmocka_unit_test(faults_are_no_mix_up),
	    cmocka_unit_test(supply),
	    cmocka_unit_test(saturated_points_are_left_out),
	    cmocka_unit_test(scatter),
	    cmocka_unit_test(trim),
	    cmocka_unit_test(what_was_spanned_out_since_cleaning_counts),
	    cmocka_unit_test(next_point),
	    cmocka_unit_test(recorded_speed_is_taken),
	    cmocka_unit_test(wrong_extra_is_refused),
	    cmocka_unit_test(a_run_that_is_missing_has_no_cause),
	    cmocka_unit_test(the_search_is_a_function_of_the_session),
	};
	return cmocka_run_group_tests_name("special findings", tests, NULL, NULL);
}
