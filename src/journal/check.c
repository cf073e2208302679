/* check.c - the order of work: which event the session takes in the state that it is in.
 *
 *   opened -> identified, oils, gates ... -> as-found run -> closed -> decision -> adjust -> as-left run -> closed ->
 * end
 *                                         \-> missing (with reason) --/       \-> leave, repair -----------------/
 *
 * Invariants, held here and nowhere else
 *   1. The first event opens the session, and only the first.
 *   2. A run begins only with procedure and instrument in the record, and is begun once.
 *   3. Readings go into a run that is begun and not closed; two live readings never share run, cycle, pass, point and
 *      number. No line changes a reading: strike and undo only mark it, and only while its run is open.
 *   4. No as-found reading, and no closing of the as-found run, after a decision; no decision before the as-found run
 *      is closed or declared missing; no adjustment without the decision to adjust.
 *   5. The as-left run begins after at least one adjustment, or where nothing was adjusted and as-found is missing.
 *   6. An oil or an item of equipment is named only after its text stands in the record.
 *   7. A current outside the measuring range of NAMUR NE 43 is never a reading.
 *   8. After `close` come only remarks, certificates, and the lines that the program writes about itself (torn,
 * resume).
 *   9. A certificate is issued only after `close`, each number once; every further one of the same session amends the
 *      latest, with its reason.
 *  10. An extra measurement belongs to the state that the instrument is in, and comes only after as-found is settled.
 *      A finding is answered before the decision, once; a "yes" (the readings are mixed up) rules out adjusting.
 *      A function check comes after the runs and before `close`, each once: an answer, an amount, or why it was not
 * tried.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "session.h"
#include "words.h"

#include <string.h>

static const char *field(const fl_event *event, fl_field name) {
	return event->fields[name];
}

static bool as_found_settled(const fl_session *s) {
	return s->runs[FL_RUN_AS_FOUND].closed || s->runs[FL_RUN_AS_FOUND].missing;
}

static size_t live_adjustments(const fl_session *s) {
	size_t count = 0;
	for (size_t i = 0; i < s->adjustment_count; i++)
		count += !s->adjustments[i].undone;
	return count;
}

bool fl_session_wants_as_left(const fl_session *s) {
	return s->decision == FL_DECISION_ADJUST || (s->decision == FL_DECISION_LEAVE && s->runs[FL_RUN_AS_FOUND].missing);
}

static bool any_run_begun(const fl_session *s) {
	return s->runs[FL_RUN_AS_FOUND].begun || s->runs[FL_RUN_AS_LEFT].begun;
}

static fl_status check_text(const fl_session *s, const fl_event *e, fl_error *err) {
	if (fl_session_text_body(s, field(e, FL_F_KIND), field(e, FL_F_NAME)))
		return fl_fail(err, FL_E_STATE, "the %s \"%s\" stands in this session already", field(e, FL_F_KIND),
		               field(e, FL_F_NAME));
	return FL_OK;
}

static fl_status check_set(const fl_event *e, fl_error *err) {
	if (field(e, FL_F_VALUE) && !field(e, FL_F_UNIT))
		return fl_fail(err, FL_E_VALUE, "the value of \"%s\" has no unit", field(e, FL_F_ID));
	return FL_OK;
}

static fl_status check_point(const fl_session *s, const fl_event *e, fl_error *err) {
	int point = fl_words_point(field(e, FL_F_POINT));
	if (any_run_begun(s))
		return fl_fail(err, FL_E_STATE, "the oils are fixed once a run has begun");
	if (point != (int)s->point_count)
		return fl_fail(err, FL_E_STATE, "the next test point is number %zu", s->point_count + 1);
	if (field(e, FL_F_LOT)[0] && !fl_session_text_body(s, "oil", field(e, FL_F_LOT)))
		return fl_fail(err, FL_E_STATE, "the oil lot %s is not in the record of this session", field(e, FL_F_LOT));
	return FL_OK;
}

static fl_status check_equip(const fl_session *s, const fl_event *e, fl_error *err) {
	if (!fl_session_text_body(s, "equipment", field(e, FL_F_ID)))
		return fl_fail(err, FL_E_STATE, "the equipment %s is not in the record of this session", field(e, FL_F_ID));
	return FL_OK;
}

static fl_status check_run(const fl_session *s, const fl_event *e, fl_error *err) {
	fl_run_kind run = (fl_run_kind)fl_words_index(fl_words_runs, field(e, FL_F_RUN));
	if (s->runs[run].begun)
		return fl_fail(err, FL_E_STATE, "the %s run has begun already", fl_run_word(run));
	if (s->runs[run].missing)
		return fl_fail(err, FL_E_STATE, "the %s run was declared not available", fl_run_word(run));
	if (!fl_session_text_body(s, "procedure", NULL) || !fl_session_text_body(s, "instrument", NULL))
		return fl_fail(err, FL_E_STATE, "a run needs procedure and instrument in the record");
	if (run == FL_RUN_AS_FOUND && (s->decision || s->adjustment_count > 0))
		return fl_fail(err, FL_E_STATE, "no as-found run after the decision: it would not be as found");
	if (run == FL_RUN_AS_FOUND)
		return FL_OK;
	if (!as_found_settled(s))
		return fl_fail(err, FL_E_STATE, "the as-found run has to be closed, or declared not available, before as-left");
	if (!fl_session_wants_as_left(s))
		return fl_fail(err, FL_E_STATE, "no as-left run: the decision was not to adjust");
	if (s->decision == FL_DECISION_ADJUST && live_adjustments(s) == 0)
		return fl_fail(err, FL_E_STATE, "note at least one adjustment before the as-left run");
	return FL_OK;
}

static fl_status check_missing(const fl_session *s, const fl_event *e, fl_error *err) {
	fl_run_kind run = (fl_run_kind)fl_words_index(fl_words_runs, field(e, FL_F_RUN));
	if (s->runs[run].begun || s->runs[run].missing)
		return fl_fail(err, FL_E_STATE, "the %s run %s", fl_run_word(run),
		               s->runs[run].begun ? "has begun: it is available" : "was declared not available already");
	if (run == FL_RUN_AS_LEFT && !s->decision)
		return fl_fail(err, FL_E_STATE, "nothing can be said about as-left before the decision");
	return FL_OK;
}

static bool pairs_fit(const fl_event *e) {
	return !field(e, FL_F_TEMP_TYPED) == !field(e, FL_F_TEMP_C) &&
	       !field(e, FL_F_APPLIED_TYPED) == !field(e, FL_F_APPLIED_PA) &&
	       !field(e, FL_F_APPLIED_TYPED) == !field(e, FL_F_APPLIED_UNIT) &&
	       !field(e, FL_F_LINE_TYPED) == !field(e, FL_F_LINE_PA);
}

static bool taken_fits(const char *taken) {
	fl_utc utc;
	return !taken || strcmp(taken, "unknown") == 0 || fl_utc_parse(taken, &utc, NULL) >= 0;
}

/* The reading that stands already where this one wants to stand; NULL if there is none. */
static const fl_reading *reading_in_place(const fl_session *s, const fl_event *e) {
	fl_run_kind run = (fl_run_kind)fl_words_index(fl_words_runs, field(e, FL_F_RUN));
	fl_pass pass = (fl_pass)fl_words_index(fl_words_passes, field(e, FL_F_PASS));
	int cycle = fl_words_count(field(e, FL_F_CYCLE)), point = fl_words_point(field(e, FL_F_POINT));
	int number = fl_words_count(field(e, FL_F_NUMBER));
	for (size_t i = 0; i < s->reading_count; i++) {
		const fl_reading *r = &s->readings[i];
		if (r->run == run && r->cycle == cycle && r->pass == pass && r->point == point && r->number == number &&
		    !r->undone && !r->watched)
			return r;
	}
	return NULL;
}

static fl_status check_value(const fl_event *e, fl_error *err) {
	fl_unit unit = FL_U_NONE;
	fl_status status = fl_unit_parse(field(e, FL_F_UNIT), &unit, err);
	if (status < 0)
		return status;
	double value = fl_words_real(field(e, FL_F_VALUE));
	if (unit == FL_U_MA && fl_physics_signal_state(FL_SIGNAL_4_20_MA, value) != FL_SIGNAL_MEASURING)
		return fl_fail(err, FL_E_RANGE, "%s mA is a failure signal or saturation, not a reading (NAMUR NE 43)",
		               field(e, FL_F_VALUE));
	return FL_OK;
}

static fl_status check_reading(const fl_session *s, const fl_event *e, fl_error *err) {
	fl_run_kind run = (fl_run_kind)fl_words_index(fl_words_runs, field(e, FL_F_RUN));
	int point = fl_words_point(field(e, FL_F_POINT));
	if (!s->runs[run].begun)
		return fl_fail(err, FL_E_STATE, "the %s run has not begun", fl_run_word(run));
	if (s->runs[run].closed)
		return fl_fail(err, FL_E_STATE, "the %s run is closed: no reading can be added", fl_run_word(run));
	if (point >= (int)s->point_count)
		return fl_fail(err, FL_E_VALUE, "there is no test point %d", point + 1);
	if (!pairs_fit(e) || !taken_fits(field(e, FL_F_TAKEN)))
		return fl_fail(err, FL_E_VALUE, "a temperature or pressure of the reading lacks its typed text or its value");
	const fl_reading *there = e->verb == FL_V_READ ? reading_in_place(s, e) : NULL;
	if (there)
		return fl_fail(err, FL_E_STATE, "this reading stands in the record already, as entry %d", there->sequence);
	return check_value(e, err);
}

static fl_status check_strike(const fl_session *s, const fl_event *e, fl_error *err) {
	int target = fl_words_count(field(e, FL_F_TARGET));
	for (size_t i = 0; i < s->reading_count; i++) {
		const fl_reading *r = &s->readings[i];
		if (r->sequence != target || r->watched)
			continue;
		if (r->struck || r->undone)
			return fl_fail(err, FL_E_STATE, "reading %d is %s already", target, r->struck ? "struck" : "taken back");
		if (s->runs[r->run].closed)
			return fl_fail(err, FL_E_STATE, "reading %d belongs to the closed %s run, which is locked", target,
			               fl_run_word(r->run));
		return FL_OK;
	}
	return fl_fail(err, FL_E_VALUE, "there is no reading with the number %d", target);
}

static fl_status check_undo(const fl_session *s, const fl_event *e, fl_error *err) {
	size_t index;
	int target = fl_words_count(field(e, FL_F_TARGET));
	if (fl_session_find(s, target, &index) == FL_NOTHING)
		return fl_fail(err, FL_E_STATE, "entry %d cannot be taken back", target);
	return FL_OK;
}

static fl_status check_close_run(const fl_session *s, const fl_event *e, fl_error *err) {
	fl_run_kind run = (fl_run_kind)fl_words_index(fl_words_runs, field(e, FL_F_RUN));
	if (!s->runs[run].begun || s->runs[run].closed)
		return fl_fail(err, FL_E_STATE, "the %s run %s", fl_run_word(run),
		               s->runs[run].closed ? "is closed already" : "has not begun");
	for (size_t i = 0; i < s->reading_count; i++)
		if (s->readings[i].run == run && !s->readings[i].watched && !s->readings[i].undone && !s->readings[i].struck)
			return FL_OK;
	return fl_fail(err, FL_E_STATE, "the %s run has no reading", fl_run_word(run));
}

static fl_status check_decide(const fl_session *s, const fl_event *e, fl_error *err) {
	int answer = fl_words_index(fl_words_decisions, field(e, FL_F_ANSWER));
	if (answer <= FL_DECISION_NONE)
		return fl_fail(err, FL_E_VALUE, "the decision is adjust, leave or repair, not \"%.40s\"",
		               field(e, FL_F_ANSWER));
	if (!as_found_settled(s))
		return fl_fail(err, FL_E_STATE, "the as-found run has to be closed before anything is decided");
	if (s->decision)
		return fl_fail(err, FL_E_STATE, "it was decided already: %s", fl_decision_word(s->decision));
	for (size_t i = 0; i < s->finding_count && answer == FL_DECISION_ADJUST; i++)
		if (s->findings[i].yes && !s->findings[i].undone)
			return fl_fail(
			    err, FL_E_STATE,
			    "no adjustment on mixed-up readings (%s): decide leave or repair, and take them again in a new "
			    "session",
			    s->findings[i].id);
	return FL_OK;
}

/* ---- extra measurements, findings, function checks ----------------------------------------------------------------
 */

fl_run_kind fl_session_state(const fl_session *s) {
	bool changed = live_adjustments(s) > 0 || s->runs[FL_RUN_AS_LEFT].begun || s->runs[FL_RUN_AS_FOUND].missing;
	return changed ? FL_RUN_AS_LEFT : FL_RUN_AS_FOUND;
}

bool fl_session_runs_done(const fl_session *s) {
	const fl_session_run *as_left = &s->runs[FL_RUN_AS_LEFT];
	return s->decision && (!fl_session_wants_as_left(s) || as_left->closed || as_left->missing);
}

/* What an extra measurement consists of. */
static const struct {
	fl_quantity quantity, or_quantity;
	bool applied, over, temp;
} measure_parts[FL_MEASURE_COUNT] = {
    [FL_MEASURE_INJECTION] = {FL_Q_CURRENT, FL_Q_PRESSURE, true, false, false},
    [FL_MEASURE_SPEED] = {FL_Q_ROTATION, FL_Q_ROTATION, false, false, false},
    [FL_MEASURE_VOLUME] = {FL_Q_VOLUME, FL_Q_VOLUME, false, true, false},
    [FL_MEASURE_DENSITY] = {FL_Q_DENSITY, FL_Q_DENSITY, false, false, false},
    [FL_MEASURE_TEMPERATURE] = {FL_Q_TEMPERATURE, FL_Q_TEMPERATURE, false, false, true},
    [FL_MEASURE_SPANNED] = {FL_Q_RATIO, FL_Q_RATIO, false, false, false},
};

/* Both fields where they are wanted, none elsewhere. */
static bool pair_stands(const fl_event *e, fl_field typed, fl_field value, bool wanted) {
	return wanted == (field(e, typed) != NULL) && wanted == (field(e, value) != NULL);
}

static fl_status check_measure(const fl_session *s, const fl_event *e, fl_error *err) {
	int what = fl_words_index(fl_words_measures, field(e, FL_F_ID));
	fl_run_kind run = (fl_run_kind)fl_words_index(fl_words_runs, field(e, FL_F_RUN)), state = fl_session_state(s);
	fl_unit unit = FL_U_NONE;
	if (what < 0)
		return fl_fail(err, FL_E_VALUE, "\"%.40s\" is nothing that is measured besides the readings",
		               field(e, FL_F_ID));
	if (!as_found_settled(s))
		return fl_fail(err, FL_E_STATE, "extra measurements come after the as-found run is closed");
	if (run != state)
		return fl_fail(err, FL_E_STATE, "the instrument is in its %s state now, not %s", fl_run_word(state),
		               fl_run_word(run));
	if (!pair_stands(e, FL_F_APPLIED_TYPED, FL_F_APPLIED_PA, measure_parts[what].applied) ||
	    !pair_stands(e, FL_F_APPLIED_TYPED, FL_F_APPLIED_UNIT, measure_parts[what].applied) ||
	    !pair_stands(e, FL_F_OVER_TYPED, FL_F_OVER_S, measure_parts[what].over) ||
	    !pair_stands(e, FL_F_TEMP_TYPED, FL_F_TEMP_C, measure_parts[what].temp))
		return fl_fail(err, FL_E_VALUE, "the measurement \"%s\" lacks a part, or has one too many", field(e, FL_F_ID));
	if (measure_parts[what].over && !(fl_words_real(field(e, FL_F_OVER_S)) > 0.0))
		return fl_fail(err, FL_E_VALUE, "the time of a timed volume has to be above 0");
	fl_status status = fl_unit_parse(field(e, FL_F_UNIT), &unit, err);
	if (status < 0)
		return status;
	fl_quantity quantity = fl_unit_quantity(unit);
	if (quantity != measure_parts[what].quantity && quantity != measure_parts[what].or_quantity)
		return fl_fail(err, FL_E_VALUE, "\"%s\" is not measured in %s", field(e, FL_F_ID), fl_unit_text(unit));
	if (field(e, FL_F_ITEM) && !fl_session_text_body(s, "equipment", field(e, FL_F_ITEM)))
		return fl_fail(err, FL_E_STATE, "the equipment %s is not in the record of this session", field(e, FL_F_ITEM));
	return FL_OK;
}

static bool is_yes_or_no(const char *answer) {
	return strcmp(answer, "yes") == 0 || strcmp(answer, "no") == 0;
}

static fl_status check_finding(const fl_session *s, const fl_event *e, fl_error *err) {
	if (!is_yes_or_no(field(e, FL_F_ANSWER)))
		return fl_fail(err, FL_E_VALUE, "a finding is answered yes or no");
	if (!as_found_settled(s))
		return fl_fail(err, FL_E_STATE, "nothing is found before the as-found run is closed");
	if (s->decision)
		return fl_fail(err, FL_E_STATE, "a finding is answered before the decision");
	if (fl_session_finding(s, field(e, FL_F_ID)))
		return fl_fail(err, FL_E_STATE, "the finding %s is answered already", field(e, FL_F_ID));
	return FL_OK;
}

static fl_status check_function(const fl_session *s, const fl_event *e, fl_error *err) {
	const char *answer = field(e, FL_F_ANSWER), *typed = field(e, FL_F_TYPED);
	int parts = (answer != NULL) + (typed != NULL) + (field(e, FL_F_REASON) != NULL);
	if (!fl_session_runs_done(s))
		return fl_fail(err, FL_E_STATE, "functions are checked after the runs, before the loop is restored");
	if (parts != 1 || !typed != !field(e, FL_F_VALUE) || !typed != !field(e, FL_F_UNIT))
		return fl_fail(err, FL_E_VALUE,
		               "a function check holds one of these: an answer, an amount with its unit, why it was not tried");
	if (answer && !is_yes_or_no(answer))
		return fl_fail(err, FL_E_VALUE, "a function check is answered yes or no");
	if (fl_session_check_answer(s, field(e, FL_F_ID)))
		return fl_fail(err, FL_E_STATE, "the function check %s stands in the record already", field(e, FL_F_ID));
	return FL_OK;
}

static fl_status check_adjust(const fl_session *s, fl_error *err) {
	if (!as_found_settled(s))
		return fl_fail(err, FL_E_STATE,
		               "as-found comes first: no adjustment before that run is closed or declared not available");
	if (s->decision != FL_DECISION_ADJUST)
		return fl_fail(err, FL_E_STATE, "no adjustment without the decision to adjust");
	if (s->runs[FL_RUN_AS_LEFT].begun)
		return fl_fail(err, FL_E_STATE, "the as-left run has begun: an adjustment now would spoil it");
	return FL_OK;
}

static fl_status check_close(const fl_session *s, fl_error *err) {
	if (!as_found_settled(s) || !s->decision)
		return fl_fail(err, FL_E_STATE, "the session cannot be closed before the decision");
	const fl_session_run *as_left = &s->runs[FL_RUN_AS_LEFT];
	if (fl_session_wants_as_left(s) && !as_left->closed && !as_left->missing)
		return fl_fail(err, FL_E_STATE, "the session cannot be closed before the as-left run is");
	return FL_OK;
}

/* A number of another journal may be amended by the first certificate of this one: the work was done again. */
static fl_status check_amends(const fl_session *s, const fl_event *e, fl_error *err) {
	const char *amends = field(e, FL_F_ABOUT);
	if (!amends != !field(e, FL_F_REASON))
		return fl_fail(err, FL_E_VALUE, "a certificate that amends another says which one and why");
	if (s->issue_count == 0)
		return FL_OK;
	const fl_session_issue *latest = &s->issues[s->issue_count - 1];
	if (!amends)
		return fl_fail(err, FL_E_STATE, "certificate %s was issued of this session: another one must amend it",
		               latest->number);
	if (strcmp(amends, latest->number) != 0)
		return fl_fail(err, FL_E_STATE, "the latest certificate of this session is %s: amend that one", latest->number);
	return FL_OK;
}

static fl_status check_issue(const fl_session *s, const fl_event *e, fl_error *err) {
	fl_day day = FL_NO_DAY;
	if (!s->closed)
		return fl_fail(err, FL_E_STATE, "the session is still open: a certificate is issued of a closed one");
	if (fl_session_issue_of(s, field(e, FL_F_ID)))
		return fl_fail(err, FL_E_STATE, "certificate %s was issued already", field(e, FL_F_ID));
	if (field(e, FL_F_ABOUT) && strcmp(field(e, FL_F_ABOUT), field(e, FL_F_ID)) == 0)
		return fl_fail(err, FL_E_VALUE, "a certificate cannot amend itself: give it a number of its own");
	fl_status status = fl_day_parse(field(e, FL_F_DAY), &day, err);
	if (status >= 0 && day < s->day)
		return fl_fail(err, FL_E_VALUE, "the day of issue lies before the day of the calibration");
	return status < 0 ? status : check_amends(s, e, err);
}

static fl_status check_frame(const fl_session *s, const fl_event *e, fl_error *err) {
	if (e->sequence != s->last_sequence + 1)
		return fl_fail(err, FL_E_VALUE, "entry %d cannot follow entry %d", e->sequence, s->last_sequence);
	if ((e->verb == FL_V_OPEN) != (s->last_sequence == 0))
		return fl_fail(err, FL_E_STATE,
		               s->last_sequence == 0 ? "a journal begins with an entry \"open\""
		                                     : "the session is open already");
	if (s->closed && e->verb != FL_V_REMARK && e->verb != FL_V_TORN && e->verb != FL_V_RESUME && e->verb != FL_V_ISSUE)
		return fl_fail(err, FL_E_STATE, "the session is closed: only a remark can be added");
	return FL_OK;
}

fl_status fl_session_check(const fl_session *s, const fl_event *e, fl_error *err) {
	fl_status status = fl_words_check(e, err);
	if (status >= 0)
		status = check_frame(s, e, err);
	if (status < 0)
		return status;
	switch (e->verb) {
	case FL_V_OPEN:
		if (strcmp(field(e, FL_F_FORMAT), FL_JOURNAL_FORMAT) != 0)
			return fl_fail(err, FL_E_VALUE, "journal format \"%.40s\": this program reads %s", field(e, FL_F_FORMAT),
			               FL_JOURNAL_FORMAT);
		return FL_OK;
	case FL_V_TEXT:
		return check_text(s, e, err);
	case FL_V_SET:
		return check_set(e, err);
	case FL_V_POINT:
		return check_point(s, e, err);
	case FL_V_EQUIP:
		return check_equip(s, e, err);
	case FL_V_RUN:
		return check_run(s, e, err);
	case FL_V_MISSING:
		return check_missing(s, e, err);
	case FL_V_WATCH:
	case FL_V_READ:
		return check_reading(s, e, err);
	case FL_V_STRIKE:
		return check_strike(s, e, err);
	case FL_V_UNDO:
		return check_undo(s, e, err);
	case FL_V_CLOSE_RUN:
		return check_close_run(s, e, err);
	case FL_V_DECIDE:
		return check_decide(s, e, err);
	case FL_V_ADJUST:
		return check_adjust(s, err);
	case FL_V_MEASURE:
		return check_measure(s, e, err);
	case FL_V_FINDING:
		return check_finding(s, e, err);
	case FL_V_CHECK:
		return check_function(s, e, err);
	case FL_V_CLOSE:
		return check_close(s, err);
	case FL_V_ISSUE:
		return check_issue(s, e, err);
	case FL_V_GATE:
	case FL_V_INDICATIVE:
	case FL_V_QUESTION:
	case FL_V_REMARK:
	case FL_V_TORN:
	case FL_V_RESUME:
	case FL_VERB_COUNT:
		break;
	}
	return FL_OK;
}

/* ---- what may be taken back ---------------------------------------------------------------------------------------
 */

static bool point_is_free(const fl_session *s, size_t index) {
	return index + 1 == s->point_count && !any_run_begun(s);
}

/* What was measured in the changed state holds the change fast. */
static bool adjustment_is_free(const fl_session *s) {
	for (size_t i = 0; i < s->measurement_count; i++)
		if (!s->measurements[i].undone && s->measurements[i].run == FL_RUN_AS_LEFT)
			return false;
	return !s->runs[FL_RUN_AS_LEFT].begun;
}

/* What the program itself wrote at the beginning. */
static bool is_own_setting(const char *id) {
	return strcmp(id, "signal") == 0 || strcmp(id, "utc-offset") == 0;
}

static bool decision_is_free(const fl_session *s) {
	for (size_t i = 0; i < s->check_count; i++)
		if (!s->checks[i].undone)
			return false;
	return s->decision && live_adjustments(s) == 0 && !s->runs[FL_RUN_AS_LEFT].begun &&
	       !s->runs[FL_RUN_AS_LEFT].missing;
}

#define FIND(array, count, live, what)           \
	for (size_t i = 0; i < (count); i++)         \
		if ((array)[i].sequence == sequence) {   \
			*index = i;                          \
			return (live) ? (what) : FL_NOTHING; \
		}

fl_undoable fl_session_find(const fl_session *s, int sequence, size_t *index) {
	*index = 0;
	if (s->closed || sequence <= 0)
		return FL_NOTHING;
	FIND(s->settings, s->setting_count, !s->settings[i].undone && !is_own_setting(s->settings[i].id), FL_UNDO_SETTING)
	FIND(s->gates, s->gate_count, !s->gates[i].undone, FL_UNDO_GATE)
	FIND(s->points, s->point_count, point_is_free(s, i), FL_UNDO_POINT)
	FIND(s->equipment, s->equipment_count, !s->equipment[i].undone, FL_UNDO_EQUIPMENT)
	FIND(s->readings, s->reading_count,
	     !s->readings[i].undone && !s->readings[i].struck && !s->runs[s->readings[i].run].closed, FL_UNDO_READING)
	FIND(s->adjustments, s->adjustment_count, !s->adjustments[i].undone && adjustment_is_free(s), FL_UNDO_ADJUSTMENT)
	FIND(s->measurements, s->measurement_count,
	     !s->measurements[i].undone && s->measurements[i].run == fl_session_state(s), FL_UNDO_MEASUREMENT)
	FIND(s->findings, s->finding_count, !s->findings[i].undone && !s->decision, FL_UNDO_FINDING)
	FIND(s->checks, s->check_count, !s->checks[i].undone, FL_UNDO_CHECK)
	for (size_t run = 0; run < FL_RUN_KINDS; run++)
		if (s->runs[run].missing && s->runs[run].missing_sequence == sequence) {
			*index = run;
			return run == FL_RUN_AS_LEFT || (!s->decision && adjustment_is_free(s)) ? FL_UNDO_MISSING : FL_NOTHING;
		}
	if (s->decision_sequence == sequence && decision_is_free(s))
		return FL_UNDO_DECISION;
	return FL_NOTHING;
}

int fl_session_last_undoable(const fl_session *s) {
	size_t index;
	for (int sequence = s->last_sequence; sequence > 0; sequence--)
		if (fl_session_find(s, sequence, &index) != FL_NOTHING)
			return sequence;
	return 0;
}
