/* test_order.c - the order of work as the session holds it: every refusal, and that a refusal changes nothing.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "bench.h"

#include <math.h>

static fl_status give(fl_session *s, fl_event event, fl_error *err) {
	event.sequence = s->last_sequence + 1;
	return fl_session_apply(s, &event, err);
}

static void take(fl_session *s, fl_event event) {
	fl_error err = {0};
	fl_status status = give(s, event, &err);
	if (status != FL_OK)
		print_error("%s: %s\n", fl_verb_word(event.verb), err.message);
	assert_int_equal(status, FL_OK);
}

static void refuse(fl_session *s, fl_status expected, const char *part, fl_event event) {
	fl_error err = {0};
	int sequence = s->last_sequence;
	size_t readings = s->reading_count, adjustments = s->adjustment_count, texts = s->text_count;
	fl_status status = give(s, event, &err);
	if (status != expected || !strstr(err.message, part))
		print_error("%s: status %d, \"%s\" lacks \"%s\"\n", fl_verb_word(event.verb), status, err.message, part);
	assert_int_equal(status, expected);
	assert_non_null(strstr(err.message, part));
	assert_int_equal(s->last_sequence, sequence);
	assert_int_equal(s->reading_count, readings);
	assert_int_equal(s->adjustment_count, adjustments);
	assert_int_equal(s->text_count, texts);
}

#define E(v, ...) ((fl_event){.verb = FL_V_##v, .fields = {__VA_ARGS__}})
#define RUN(kind) E(RUN, [FL_F_RUN] = kind)
#define CLOSE_RUN(kind) E(CLOSE_RUN, [FL_F_RUN] = kind, [FL_F_BY] = "A. Holm")
#define MISSING(kind) E(MISSING, [FL_F_RUN] = kind, [FL_F_REASON] = "touched by the watch")
#define DECIDE(word) E(DECIDE, [FL_F_ANSWER] = word, [FL_F_REASON] = "as agreed", [FL_F_BY] = "A. Holm")
#define ADJUST E(ADJUST, [FL_F_ITEM] = "zero", [FL_F_BEFORE] = "4.02 mA", [FL_F_AFTER] = "4.00 mA")
#define CLOSE E(CLOSE, [FL_F_BY] = "A. Holm")
#define UNDO(n) E(UNDO, [FL_F_TARGET] = n, [FL_F_REASON] = "typed wrongly", [FL_F_BY] = "A. Holm")
#define STRIKE(n) E(STRIKE, [FL_F_TARGET] = n, [FL_F_REASON] = "air bubble", [FL_F_BY] = "A. Holm")
#define READ(kind, n, ma)                                                                                         \
	E(READ, [FL_F_RUN] = kind, [FL_F_CYCLE] = "1", [FL_F_PASS] = "rising", [FL_F_POINT] = "1", [FL_F_NUMBER] = n, \
	  [FL_F_TYPED] = ma, [FL_F_UNIT] = "mA", [FL_F_VALUE] = ma)

/* Opened, with texts and one point: ready for a run. */
static void prepare(fl_session *s) {
	*s = (fl_session){0};
	for (int i = 0; i < 9; i++)
		take(s, small_session[i]);
}

static void to_closed_as_found(fl_session *s) {
	prepare(s);
	take(s, RUN("as-found"));
	take(s, READ("as-found", "1", "7.06"));
	take(s, CLOSE_RUN("as-found"));
}

static void opening_comes_first_and_once(void **state) {
	(void)state;
	fl_session s = {0};
	refuse(&s, FL_E_STATE, "begins with an entry \"open\"", RUN("as-found"));
	fl_event other = small_session[0];
	other.fields[FL_F_FORMAT] = "2";
	refuse(&s, FL_E_VALUE, "this program reads 1", other);
	take(&s, small_session[0]);
	refuse(&s, FL_E_STATE, "open already", small_session[0]);
	refuse(&s, FL_E_STATE, "procedure and instrument", RUN("as-found"));
	fl_session_free(&s);
}

static void fields_are_held_to_their_table(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	refuse(&s, FL_E_VALUE, "needs the field \"reason\"", E(MISSING, [FL_F_RUN] = "as-found"));
	refuse(&s, FL_E_VALUE, "has no field \"by\"", E(RUN, [FL_F_RUN] = "as-found", [FL_F_BY] = "A"));
	refuse(&s, FL_E_VALUE, "cannot be \"third\"", RUN("third"));
	refuse(&s, FL_E_VALUE, "cannot be \"\"", E(MISSING, [FL_F_RUN] = "as-found", [FL_F_REASON] = ""));
	refuse(&s, FL_E_VALUE, "not UTF-8", E(REMARK, [FL_F_TYPED] = "\xff"));
	refuse(&s, FL_E_VALUE, "no unit", E(SET, [FL_F_ID] = "x", [FL_F_TYPED] = "1", [FL_F_VALUE] = "1"));
	refuse(&s, FL_E_VALUE, "cannot be \"nan\"",
	       E(SET, [FL_F_ID] = "x", [FL_F_TYPED] = "1", [FL_F_UNIT] = "bar", [FL_F_VALUE] = "nan"));
	refuse(&s, FL_E_STATE, "not in the record", E(EQUIP, [FL_F_ROLE] = "bath", [FL_F_ID] = "BA-2"));
	refuse(&s, FL_E_STATE, "stands in this session already", small_session[2]);
	refuse(&s, FL_E_STATE, "number 2", small_session[7]);
	fl_session_free(&s);
}

static void as_found_is_locked_before_any_adjustment(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	refuse(&s, FL_E_STATE, "as-found comes first", ADJUST);
	refuse(&s, FL_E_STATE, "has to be closed", DECIDE("adjust"));
	refuse(&s, FL_E_STATE, "before as-left", RUN("as-left"));
	refuse(&s, FL_E_STATE, "has not begun", READ("as-found", "1", "7.06"));
	take(&s, RUN("as-found"));
	refuse(&s, FL_E_STATE, "begun already", RUN("as-found"));
	refuse(&s, FL_E_STATE, "it is available", MISSING("as-found"));
	refuse(&s, FL_E_STATE, "no reading", CLOSE_RUN("as-found"));
	take(&s, READ("as-found", "1", "7.06"));
	refuse(&s, FL_E_STATE, "as-found comes first", ADJUST);
	refuse(&s, FL_E_STATE, "in the record already", READ("as-found", "1", "7.07"));
	take(&s, CLOSE_RUN("as-found"));
	refuse(&s, FL_E_STATE, "is closed", READ("as-found", "2", "7.06"));
	refuse(&s, FL_E_STATE, "locked", STRIKE("11"));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("11"));
	refuse(&s, FL_E_STATE, "without the decision", ADJUST);
	refuse(&s, FL_E_STATE, "before the decision", CLOSE);
	take(&s, DECIDE("adjust"));
	refuse(&s, FL_E_STATE, "at least one adjustment", RUN("as-left"));
	take(&s, ADJUST);
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("13")); /* the decision was acted on */
	take(&s, RUN("as-left"));
	refuse(&s, FL_E_STATE, "would spoil it", ADJUST);
	refuse(&s, FL_E_STATE, "before the as-left run", CLOSE);
	take(&s, READ("as-left", "1", "7.00"));
	take(&s, CLOSE_RUN("as-left"));
	take(&s, CLOSE);
	refuse(&s, FL_E_STATE, "only a remark", E(SET, [FL_F_ID] = "place", [FL_F_TYPED] = "elsewhere"));
	take(&s, E(REMARK, [FL_F_TYPED] = "seen later"));
	assert_int_equal(fl_session_last_undoable(&s), 0);
	fl_session_free(&s);
}

static void a_missing_as_found_is_told_and_stays_missing(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	take(&s, MISSING("as-found"));
	refuse(&s, FL_E_STATE, "declared not available", RUN("as-found"));
	assert_string_equal(s.runs[FL_RUN_AS_FOUND].missing_reason, "touched by the watch");
	take(&s, DECIDE("leave"));
	assert_true(fl_session_wants_as_left(&s));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("10"));
	take(&s, RUN("as-left"));
	take(&s, READ("as-left", "1", "7.00"));
	take(&s, CLOSE_RUN("as-left"));
	take(&s, CLOSE);
	fl_session_free(&s);
}

static void left_alone_needs_no_as_left(void **state) {
	(void)state;
	fl_session s;
	to_closed_as_found(&s);
	take(&s, DECIDE("leave"));
	assert_false(fl_session_wants_as_left(&s));
	refuse(&s, FL_E_STATE, "was not to adjust", RUN("as-left"));
	refuse(&s, FL_E_STATE, "without the decision", ADJUST);
	take(&s, CLOSE);
	fl_session_free(&s);
}

static void readings_are_marked_never_changed(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	take(&s, RUN("as-found"));
	take(&s, READ("as-found", "1", "7.06"));
	take(&s, READ("as-found", "2", "9.99"));
	take(&s, STRIKE("12"));
	refuse(&s, FL_E_STATE, "struck already", STRIKE("12"));
	refuse(&s, FL_E_VALUE, "no reading with the number 3", STRIKE("3"));
	assert_true(s.readings[1].struck);
	check_near("struck value stays", 9.99, s.readings[1].output, 0.0);
	assert_string_equal(s.readings[1].struck_reason, "air bubble");
	assert_string_equal(s.readings[1].struck_by, "A. Holm");
	assert_int_equal(fl_session_last_undoable(&s), 11);
	take(&s, UNDO("11"));
	assert_true(s.readings[0].undone);
	check_near("value taken back stays", 7.06, s.readings[0].output, 0.0);
	take(&s, READ("as-found", "1", "7.07"));
	assert_int_equal(s.reading_count, 3);
	fl_session_free(&s);
}

static void failure_signals_are_no_data(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	take(&s, RUN("as-found"));
	/* NAMUR NE 43: measuring 3.8 to 20.5 mA, failure below 3.6 and above 21 mA. */
	static const char *const bad[] = {"3.5", "3.7", "20.6", "21.5", "0"};
	for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++)
		refuse(&s, FL_E_RANGE, "NE 43", READ("as-found", "1", bad[i]));
	take(&s, READ("as-found", "1", "3.8"));
	take(&s, READ("as-found", "2", "20.5"));
	fl_session_free(&s);
}

static void taking_a_point_back_drops_what_made_it_indicative(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	take(&s, E(INDICATIVE, [FL_F_ITEM] = "2511B", [FL_F_REASON] = "no other", [FL_F_BY] = "A. Holm"));
	take(&s, UNDO("8"));
	assert_int_equal(s.point_count, 0);
	assert_int_equal(s.indicative_count, 0);
	fl_event point = small_session[7];
	take(&s, point);
	take(&s, RUN("as-found"));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("12"));
	fl_session_free(&s);
}

/* ---- extra measurements, findings, function checks ---- */

#define INJECTION(run)                                                                                \
	E(MEASURE, [FL_F_RUN] = run, [FL_F_ID] = "injection", [FL_F_TYPED] = "11.66", [FL_F_UNIT] = "mA", \
	  [FL_F_VALUE] = "11.66", [FL_F_APPLIED_TYPED] = "150", [FL_F_APPLIED_UNIT] = "mbar", [FL_F_APPLIED_PA] = "15000")
#define MEASURE(what, unit, value, ...)                                                             \
	E(MEASURE, [FL_F_RUN] = "as-found", [FL_F_ID] = what, [FL_F_TYPED] = value, [FL_F_UNIT] = unit, \
	  [FL_F_VALUE] = value, __VA_ARGS__)
#define VOLUME(seconds) MEASURE("volume", "cm³", "500", [FL_F_OVER_TYPED] = seconds " s", [FL_F_OVER_S] = seconds)

static void extra_measurements_belong_to_the_state(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	refuse(&s, FL_E_STATE, "after the as-found run is closed", INJECTION("as-found"));
	take(&s, RUN("as-found"));
	take(&s, READ("as-found", "1", "7.06"));
	refuse(&s, FL_E_STATE, "after the as-found run is closed", INJECTION("as-found"));
	take(&s, CLOSE_RUN("as-found"));
	refuse(&s, FL_E_STATE, "in its as-found state now, not as-left", INJECTION("as-left"));
	take(&s, INJECTION("as-found"));
	take(&s, VOLUME("502"));
	assert_int_equal(s.measurement_count, 2);
	assert_int_equal(s.measurements[0].what, FL_MEASURE_INJECTION);
	check_near("applied", 15000.0, s.measurements[0].applied_pa, 0.0);
	check_near("time", 502.0, s.measurements[1].over_s, 0.0);
	assert_true(isnan(s.measurements[1].temp_c));
	take(&s, DECIDE("adjust"));
	take(&s, ADJUST);
	refuse(&s, FL_E_STATE, "in its as-left state now, not as-found", INJECTION("as-found"));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("13"));
	take(&s, INJECTION("as-left"));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("16")); /* the adjustment that it was made after */
	take(&s, UNDO("17"));
	assert_true(s.measurements[2].undone);
	take(&s, UNDO("16"));
	fl_session_free(&s);
}

static void extra_measurements_are_whole(void **state) {
	(void)state;
	fl_session s;
	to_closed_as_found(&s);
	refuse(&s, FL_E_VALUE, "nothing that is measured", MEASURE("colour", "mA", "1", [FL_F_TARGET] = NULL));
	refuse(&s, FL_E_VALUE, "lacks a part", MEASURE("volume", "cm³", "500", [FL_F_TARGET] = NULL));
	refuse(
	    &s, FL_E_VALUE, "lacks a part",
	    MEASURE("volume", "cm³",
	            "500", [FL_F_OVER_TYPED] = "1 s", [FL_F_OVER_S] = "1", [FL_F_TEMP_TYPED] = "40", [FL_F_TEMP_C] = "40"));
	refuse(&s, FL_E_VALUE, "above 0", VOLUME("0"));
	refuse(&s, FL_E_VALUE, "not measured in bar", MEASURE("speed", "bar", "40", [FL_F_TARGET] = NULL));
	refuse(&s, FL_E_STATE, "not in the record", MEASURE("speed", "r/min", "40", [FL_F_ITEM] = "TA-2"));
	take(&s, MEASURE("speed", "r/min", "40", [FL_F_TARGET] = NULL));
	take(&s, MEASURE("temperature", "°C", "40.1", [FL_F_TEMP_TYPED] = "40", [FL_F_TEMP_C] = "40"));
	take(&s, MEASURE("density", "kg/m³", "900", [FL_F_TARGET] = NULL));
	take(&s, MEASURE("spanned-out", "%", "2.1", [FL_F_TARGET] = NULL));
	fl_session_free(&s);
}

#define FINDING(answer) \
	E(FINDING, [FL_F_ID] = "mix-up:1:bottle", [FL_F_ANSWER] = answer, [FL_F_REASON] = "looked", [FL_F_BY] = "A. Holm")

static void findings_are_answered_before_the_decision(void **state) {
	(void)state;
	fl_session s;
	prepare(&s);
	refuse(&s, FL_E_STATE, "before the as-found run is closed", FINDING("no"));
	fl_session_free(&s);
	to_closed_as_found(&s);
	refuse(&s, FL_E_VALUE, "yes or no", FINDING("perhaps"));
	take(&s, FINDING("yes"));
	refuse(&s, FL_E_STATE, "answered already", FINDING("no"));
	refuse(&s, FL_E_STATE, "no adjustment on mixed-up readings (mix-up:1:bottle)", DECIDE("adjust"));
	assert_int_equal(fl_session_last_undoable(&s), 13);
	take(&s, UNDO("13"));
	assert_null(fl_session_finding(&s, "mix-up:1:bottle"));
	take(&s, FINDING("no"));
	assert_false(fl_session_finding(&s, "mix-up:1:bottle")->yes);
	take(&s, DECIDE("adjust"));
	refuse(&s, FL_E_STATE, "before the decision",
	       E(FINDING, [FL_F_ID] = "other", [FL_F_ANSWER] = "no", [FL_F_REASON] = "late", [FL_F_BY] = "A"));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("15")); /* decided on it */
	fl_session_free(&s);
}

#define CHECKED(...) E(CHECK, [FL_F_ID] = "alarm-high", __VA_ARGS__)

static void functions_are_checked_after_the_runs(void **state) {
	(void)state;
	fl_session s;
	to_closed_as_found(&s);
	refuse(&s, FL_E_STATE, "after the runs", CHECKED([FL_F_ANSWER] = "yes"));
	take(&s, DECIDE("leave"));
	refuse(&s, FL_E_VALUE, "one of these", CHECKED([FL_F_TARGET] = NULL));
	refuse(&s, FL_E_VALUE, "one of these", CHECKED([FL_F_ANSWER] = "yes", [FL_F_REASON] = "no air"));
	refuse(&s, FL_E_VALUE, "one of these", CHECKED([FL_F_TYPED] = "18", [FL_F_VALUE] = "18"));
	refuse(&s, FL_E_VALUE, "yes or no", CHECKED([FL_F_ANSWER] = "maybe"));
	take(&s, CHECKED([FL_F_TYPED] = "18,2", [FL_F_VALUE] = "18.2", [FL_F_UNIT] = "mm²/s"));
	refuse(&s, FL_E_STATE, "stands in the record already", CHECKED([FL_F_ANSWER] = "yes"));
	refuse(&s, FL_E_STATE, "cannot be taken back", UNDO("13")); /* the decision */
	take(&s, UNDO("14"));
	take(&s, CHECKED([FL_F_REASON] = "the alarm panel is out of order"));
	assert_string_equal(fl_session_check_answer(&s, "alarm-high")->reason, "the alarm panel is out of order");
	take(&s, CLOSE);
	refuse(&s, FL_E_STATE, "closed", E(CHECK, [FL_F_ID] = "other", [FL_F_ANSWER] = "yes"));
	fl_session_free(&s);
}

static void functions_wait_for_the_as_left_run(void **state) {
	(void)state;
	fl_session s;
	to_closed_as_found(&s);
	take(&s, DECIDE("adjust"));
	take(&s, ADJUST);
	refuse(&s, FL_E_STATE, "after the runs", CHECKED([FL_F_ANSWER] = "yes"));
	take(&s, RUN("as-left"));
	take(&s, READ("as-left", "1", "7.02"));
	refuse(&s, FL_E_STATE, "after the runs", CHECKED([FL_F_ANSWER] = "yes"));
	take(&s, CLOSE_RUN("as-left"));
	take(&s, CHECKED([FL_F_ANSWER] = "yes"));
	fl_session_free(&s);
}

#define ISSUE(number, ...)                                                                                   \
	E(ISSUE, [FL_F_ID] = number, [FL_F_DAY] = "2026-04-20", [FL_F_PROGRAM] = "0.1.0", [FL_F_ITEM] = "j.flj", \
	  __VA_ARGS__)
#define AMENDS(number) [FL_F_ABOUT] = number, [FL_F_REASON] = "the customer was misspelt"

static void a_certificate_is_issued_once_and_amended_in_turn(void **state) {
	(void)state;
	fl_session s;
	to_closed_as_found(&s);
	take(&s, DECIDE("leave"));
	refuse(&s, FL_E_STATE, "still open", ISSUE("N-1", [FL_F_BY] = "M. Oduya"));
	take(&s, CLOSE);
	refuse(&s, FL_E_VALUE, "which one and why", ISSUE("N-1", [FL_F_ABOUT] = "N-0"));
	refuse(&s, FL_E_VALUE, "cannot amend itself", ISSUE("N-1", AMENDS("N-1")));
	fl_event early = ISSUE("N-1", [FL_F_BY] = "M. Oduya");
	early.fields[FL_F_DAY] = "2026-04-13";
	refuse(&s, FL_E_VALUE, "before the day", early);
	take(&s, ISSUE("N-1", [FL_F_BY] = "M. Oduya"));
	refuse(&s, FL_E_STATE, "was issued already", ISSUE("N-1", [FL_F_BY] = "M. Oduya"));
	refuse(&s, FL_E_STATE, "must amend it", ISSUE("N-2", [FL_F_BY] = "M. Oduya"));
	refuse(&s, FL_E_STATE, "amend that one", ISSUE("N-2", AMENDS("N-0")));
	take(&s, ISSUE("N-2", AMENDS("N-1")));
	refuse(&s, FL_E_STATE, "the latest certificate of this session is N-2", ISSUE("N-3", AMENDS("N-1")));
	take(&s, E(REMARK, [FL_F_TYPED] = "sent to the ship"));
	take(&s, ISSUE("N-3", AMENDS("N-2")));
	assert_int_equal(s.issue_count, 3);
	assert_string_equal(fl_session_amended_by(&s, "N-1")->number, "N-2");
	assert_null(fl_session_amended_by(&s, "N-3"));
	assert_string_equal(fl_session_issue_of(&s, "N-1")->authorised_by, "M. Oduya");
	fl_session_free(&s);
	/* The work was done again: the first certificate of a session may amend one of another. */
	to_closed_as_found(&s);
	take(&s, DECIDE("leave"));
	take(&s, CLOSE);
	take(&s, ISSUE("N-9", AMENDS("N-1")));
	fl_session_free(&s);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(opening_comes_first_and_once),
	    cmocka_unit_test(fields_are_held_to_their_table),
	    cmocka_unit_test(as_found_is_locked_before_any_adjustment),
	    cmocka_unit_test(a_missing_as_found_is_told_and_stays_missing),
	    cmocka_unit_test(left_alone_needs_no_as_left),
	    cmocka_unit_test(readings_are_marked_never_changed),
	    cmocka_unit_test(failure_signals_are_no_data),
	    cmocka_unit_test(taking_a_point_back_drops_what_made_it_indicative),
	    cmocka_unit_test(extra_measurements_belong_to_the_state),
	    cmocka_unit_test(extra_measurements_are_whole),
	    cmocka_unit_test(findings_are_answered_before_the_decision),
	    cmocka_unit_test(functions_are_checked_after_the_runs),
	    cmocka_unit_test(functions_wait_for_the_as_left_run),
	    cmocka_unit_test(a_certificate_is_issued_once_and_amended_in_turn),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
