/* test_extra.c - extra measurements, the advice at the decision, function checks: what the conversation takes, refuses,
 * asks back and writes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "talk.h"

/* The small procedure with function checks of each kind. Invented for the tests. */
#define CHECKS                                                                                                    \
	"function checks:\n"                                                                                          \
	"  - {id: alarm-high, name: high alarm, ask: At which indication, answer: indication, expected: high alarm, " \
	"limit: 2 % of span, true viscosity: yes}\n"                                                                  \
	"  - {id: delay, name: delay, ask: How long, answer: amount, unit: s, within: at most 30 s}\n"                \
	"  - {id: stroke, name: stroke, ask: Position, answer: amount, unit: \"%\", expected: 50 %, limit: 5 %}\n"    \
	"  - {id: direction, name: direction, ask: Does it open, caution: Steam is hot., answer: yes or no}\n"
#define CHECKED SMALL_HEAD("checked", "no") CHECKS SMALL_QUESTIONS

static void to_the_decision(talk *t) {
	talk_to_readings(t);
	talk_take_all(t, lines_as_found, COUNT(lines_as_found));
	talk_take(t, "close");
	assert_int_equal(talk_step(t).kind, FL_STEP_DECISION);
}

static char *prompt_of(talk *t, fl_text *prompt) {
	fl_text_clear(prompt);
	fl_entry_prompt(t->entry, prompt);
	return prompt->data;
}

/* ---- extra measurements ---- */

static const fl_measurement *last(const talk *t) {
	return &t->journal.session.measurements[t->journal.session.measurement_count - 1];
}

static void what_is_measured_is_kept_as_typed(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	to_the_decision(&t);
	talk_take(&t, "measure injection 156,6 mbar 12,10 mA with PS-1");
	talk_says(&t, "% of span off what the pressure asks for");
	assert_string_equal(last(&t)->applied_typed, "156,6");
	assert_string_equal(last(&t)->typed, "12,10");
	assert_string_equal(last(&t)->equipment, "PS-1");
	assert_non_null(fl_session_text_body(&t.journal.session, "equipment", "PS-1"));
	check_near("pressure", 15660.0, last(&t)->applied_pa, 1e-9);
	talk_take(&t, "measure injection 3.1 kPa 5.6");
	check_near("kPa", 3100.0, last(&t)->applied_pa, 1e-9);
	talk_take(&t, "measure speed 39.8");
	check_near("speed", 39.8, last(&t)->value, 0.0);
	talk_says(&t, "−0.50 % off what the instrument's record states");
	talk_end(&t);
}

static void three_numbers_are_no_timed_volume(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	to_the_decision(&t);
	talk_refuse(&t, "measure volume 500 cm3 in 8 min 22", "this is typed as: measure volume 500 cm3 in 502 s");
	talk_take(&t, "measure volume 500 ml in 8.4 min");
	check_near("time", 504.0, last(&t)->over_s, 1e-9);
	check_near("volume", 500.0, last(&t)->value, 0.0);
	talk_take(&t, "measure temperature 40.12 °C beside 40,02 °C");
	check_near("in use", 40.02, last(&t)->temp_c, 1e-12);
	talk_take(&t, "measure density 900");
	talk_take(&t, "measure spanned-out 2.1 %");
	check_near("spanned out", 2.1, last(&t)->value, 0.0);
	assert_int_equal(t.journal.session.measurement_count, 4);
	talk_end(&t);
}

static void unusual_measurements_are_asked_back(void **state) {
	static const char *const lines[] = {"measure injection 150 mbar 16 mA", "measure speed 20 r/min",
	                                    "measure volume 500 cm3 in 5 s",    "measure density 700",
	                                    "measure temperature 45 40",        "measure spanned-out 30 %"};
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	to_the_decision(&t);
	for (int i = 0; i < COUNT(lines); i++) {
		talk_asked(&t, lines[i], "far from usual");
		talk_take(&t, "no");
		assert_int_equal(t.journal.session.measurement_count, 0);
	}
	int questions = t.journal.session.questions;
	talk_asked(&t, lines[1], "far from usual");
	talk_take(&t, "yes");
	assert_int_equal(t.journal.session.measurement_count, 1);
	assert_int_equal(t.journal.session.questions, questions + 1);
	talk_end(&t);
}

static void a_wrong_measurement_is_taken_back(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	to_the_decision(&t);
	talk_take(&t, "measure speed 39.8 r/min");
	talk_take(&t, "undo counted a minute short");
	assert_true(last(&t)->undone);
	assert_int_equal(talk_step(&t).kind, FL_STEP_DECISION);
	talk_take(&t, "measure");
	talk_says(&t, "injection 150 mbar 11.66 mA");
	talk_end(&t);
}

/* After an adjustment it belongs to the as-left state. */
static void a_measurement_belongs_to_the_state(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	to_the_decision(&t);
	talk_take(&t, "measure speed 39.8 r/min");
	assert_int_equal(last(&t)->run, FL_RUN_AS_FOUND);
	talk_take_all(&t, lines_after + 1, COUNT(lines_after) - 1);
	talk_take(&t, "measure speed 39.9 r/min");
	assert_int_equal(last(&t)->run, FL_RUN_AS_LEFT);
	talk_end(&t);
}

/* ---- the advice ---- */

/* An adviser of the tests: counts its calls, asks one question, and stands against adjusting as it is told to. */
typedef struct adviser {
	int calls;
	bool asks, refuses, against, fails;
} adviser;

static fl_status advise(void *context, const fl_session *session, fl_advice *out, fl_error *err) {
	static const fl_advice_question question = {"mix-up:bottles:1+2", "Bottles 1 and 2 seem to be exchanged. Is it so"};
	adviser *a = context;
	a->calls++;
	if (a->fails)
		return fl_fail(err, FL_E_NUMERIC, "the fit did not settle");
	out->text = fl_arena_printf(&out->arena, "  FINDINGS after %zu measurements\n", session->measurement_count);
	out->questions = &question;
	out->question_count = a->asks;
	out->refuses_adjust = a->refuses ? "the supply has the wrong frequency" : NULL;
	out->against_adjust = a->against ? "the capillary may be fouled" : NULL;
	return FL_OK;
}

static void begin_advised(talk *t, const char *folder, adviser *a) {
	talk_load(t, SMALL_PROCEDURE, "VT-1");
	scratch_path(folder, "advised.flj", t->path);
	unlink(t->path);
	assert_int_equal(fl_entry_begin(&t->journal, fl_io_system(), t->path, FL_SOURCE_KEYBOARD, false, fl_day_of(t->now),
	                                t->now, &t->procedure, t->instrument, "0.1.0", &t->err),
	                 FL_OK);
	fl_entry_setup setup = {.journal = &t->journal,
	                        .procedure = &t->procedure,
	                        .instrument = t->instrument,
	                        .stock = &t->stock,
	                        .clock = talk_clock,
	                        .clock_context = t,
	                        .advise = advise,
	                        .advise_context = a};
	assert_int_equal(fl_entry_new(&t->entry, &setup, &t->err), FL_OK);
}

static void nothing_is_shown_before_the_run_is_locked(void **state) {
	talk t;
	adviser a = {0};
	fl_text prompt = {0};
	begin_advised(&t, *state, &a);
	talk_to_readings(&t);
	for (int i = 0; i < COUNT(lines_as_found); i++) {
		assert_null(strstr(prompt_of(&t, &prompt), "FINDINGS"));
		talk_take(&t, lines_as_found[i]);
		assert_null(strstr(talk_said(&t), "FINDINGS"));
	}
	talk_refuse(&t, "why", "at the decision");
	assert_int_equal(a.calls, 0);
	talk_take(&t, "close");
	assert_non_null(strstr(prompt_of(&t, &prompt), "FINDINGS after 0"));
	assert_null(strstr(prompt_of(&t, &prompt), "FINDINGS")); /* once */
	assert_int_equal(a.calls, 1);
	talk_take(&t, "why");
	talk_says(&t, "FINDINGS after 0");
	talk_take(&t, "measure speed 39.8 r/min");
	assert_non_null(strstr(prompt_of(&t, &prompt), "FINDINGS after 1"));
	assert_int_equal(a.calls, 2);
	fl_text_free(&prompt);
	talk_end(&t);
}

static void a_mix_up_is_decided_before_anything_else(void **state) {
	talk t;
	adviser a = {.asks = true};
	fl_text prompt = {0};
	begin_advised(&t, *state, &a);
	to_the_decision(&t);
	assert_non_null(strstr(prompt_of(&t, &prompt), "Is it so> "));
	talk_refuse(&t, "adjust", "answer yes (the readings are mixed up) or no");
	talk_asked(&t, "yes", "Reason");
	talk_take(&t, "the labels were read wrongly");
	assert_true(fl_session_finding(&t.journal.session, "mix-up:bottles:1+2")->yes);
	talk_refuse(&t, "adjust", "no adjustment on mixed-up readings");
	talk_take(&t, "undo looked at the wrong shelf");
	talk_take(&t, "no");
	talk_take(&t, "each bottle stood in its place");
	assert_false(fl_session_finding(&t.journal.session, "mix-up:bottles:1+2")->yes);
	talk_take(&t, "adjust");
	talk_take(&t, "span out");
	assert_int_equal(t.journal.session.decision, FL_DECISION_ADJUST);
	fl_text_free(&prompt);
	talk_end(&t);
}

static void adjusting_is_refused_or_asked_back(void **state) {
	talk t;
	adviser refusing = {.refuses = true}, against = {.against = true};
	begin_advised(&t, *state, &refusing);
	to_the_decision(&t);
	talk_refuse(&t, "adjust", "the supply has the wrong frequency");
	talk_take(&t, "repair");
	talk_take(&t, "the supply first");
	assert_int_equal(t.journal.session.decision, FL_DECISION_REPAIR);
	talk_end(&t);
	begin_advised(&t, *state, &against);
	to_the_decision(&t);
	talk_asked(&t, "adjust", "Adjust all the same");
	talk_says(&t, "the capillary may be fouled");
	talk_take(&t, "no");
	assert_int_equal(t.journal.session.decision, FL_DECISION_NONE);
	talk_asked(&t, "adjust", "Adjust all the same");
	talk_take(&t, "yes");
	talk_take(&t, "the ship sails tonight");
	assert_int_equal(t.journal.session.decision, FL_DECISION_ADJUST);
	assert_int_equal(t.journal.session.questions, 1);
	talk_end(&t);
}

static void an_adviser_that_fails_holds_nothing_up(void **state) {
	talk t;
	adviser a = {.fails = true};
	fl_text prompt = {0};
	begin_advised(&t, *state, &a);
	to_the_decision(&t);
	assert_non_null(strstr(prompt_of(&t, &prompt), "No findings can be shown: the fit did not settle"));
	talk_take(&t, "leave");
	talk_take(&t, "inside the limit");
	assert_int_equal(t.journal.session.decision, FL_DECISION_LEAVE);
	fl_text_free(&prompt);
	talk_end(&t);
}

/* ---- function checks ---- */

static void to_the_checks(talk *t) {
	to_the_decision(t);
	talk_take(t, "leave");
	talk_take(t, "inside the adjust limit");
	assert_int_equal(talk_step(t).kind, FL_STEP_CHECK);
}

static void functions_are_tried_before_restoring(void **state) {
	talk t;
	fl_text prompt = {0};
	talk_begin(&t, *state, CHECKED);
	to_the_checks(&t);
	/* The high alarm of VT-1 is 20 mm²/s, 2 % of its span 1 mm²/s. */
	assert_non_null(strstr(prompt_of(&t, &prompt), "(mm²/s or mA; expected 20, from 19 to 21; empty: not tried)> "));
	talk_refuse(&t, "200", "not possible for the indication");
	talk_refuse(&t, "20 bar", "bar does not fit here");
	talk_take(&t, "10,72 mA"); /* 21 mm²/s: on the limit, which is inclusive */
	talk_says(&t, "high alarm: in order");
	talk_take(&t, "undo read the wrong meter");
	talk_take(&t, "10.73 mA");
	talk_says(&t, "high alarm: not in order");
	talk_asked(&t, "400 s", "far from what is expected");
	talk_take(&t, "no");
	talk_take(&t, "30 s");
	talk_says(&t, "delay: in order");
	talk_asked(&t, "", "Why is it not tried");
	talk_take(&t, "the valve is lagged");
	talk_says(&t, "stroke: not tried");
	assert_non_null(strstr(prompt_of(&t, &prompt), "Caution: Steam is hot."));
	talk_refuse(&t, "maybe", "answer yes or no");
	talk_take(&t, "no");
	talk_says(&t, "direction: not in order");
	assert_int_equal(talk_step(&t).kind, FL_STEP_RESTORE);
	assert_int_equal(t.journal.session.check_count, 5);
	fl_text_free(&prompt);
	talk_end(&t);
}

/* Repair comes first: the functions are tried when the instrument is back. */
static void a_repair_skips_the_checks(void **state) {
	talk t;
	talk_begin(&t, *state, CHECKED);
	to_the_decision(&t);
	talk_take(&t, "repair");
	talk_take(&t, "the coupling slips");
	assert_int_equal(talk_step(&t).kind, FL_STEP_RESTORE);
	talk_end(&t);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    IN_SCRATCH(what_is_measured_is_kept_as_typed),
	    IN_SCRATCH(three_numbers_are_no_timed_volume),
	    IN_SCRATCH(unusual_measurements_are_asked_back),
	    IN_SCRATCH(a_wrong_measurement_is_taken_back),
	    IN_SCRATCH(a_measurement_belongs_to_the_state),
	    IN_SCRATCH(nothing_is_shown_before_the_run_is_locked),
	    IN_SCRATCH(a_mix_up_is_decided_before_anything_else),
	    IN_SCRATCH(adjusting_is_refused_or_asked_back),
	    IN_SCRATCH(an_adviser_that_fails_holds_nothing_up),
	    IN_SCRATCH(functions_are_tried_before_restoring),
	    IN_SCRATCH(a_repair_skips_the_checks),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
