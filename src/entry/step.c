/* step.c - where the conversation stands: a pure function of the session and the procedure.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The order of work: identification, people, equipment, oils, permit and safety, conditions, is as-found possible,
 * the as-found run, its closing, the decision, adjustments, the as-left run, its closing, function checks, restoring,
 * remarks, end.
 * A run follows the plan: each cycle rises from the stopped zero through the points and falls back to it.
 */
#include "entry_private.h"

#include <string.h>

const fl_entry_item fl_entry_items[] = {
    {"place", "Where is the work done (ship or plant, and port or shop)", "The place goes on the certificate.", true,
     0},
    {"customer", "Who asked for it", "The customer, as the certificate shall say it.", true, 0},
    {"received-on", "Day it was received, as 2026-04-14 (empty if it stayed in its place)",
     "Where the instrument came to the bench: the day it arrived.", false, 0},
    {"condition", "Its condition as received (empty if nothing is to be noted)",
     "Damage, leaks, dirt, broken seals: what a reader of the certificate should know.", false, 0},
    {"job", "Job or order number (empty if there is none)", "Your own number for this job.", false, 0},
    {"performed-by", "Your name: who performs the work", "The performer. Another person countersigns later.", true, 1},
    {"others", "Others present (empty if none)", "Names of witnesses or helpers.", false, 1},
    {NULL, NULL, NULL, false, 0},
};

const fl_entry_item *fl_entry_item_find(const char *id) {
	for (const fl_entry_item *item = fl_entry_items; item->id; item++)
		if (strcmp(item->id, id) == 0)
			return item;
	return NULL;
}

fl_role fl_entry_meter_role(const fl_session *session) {
	const fl_setting *signal = fl_session_setting(session, "signal");
	return !signal || signal->unit == FL_U_MA ? FL_ROLE_CURRENT_METER : FL_ROLE_PRESSURE_GAUGE;
}

bool fl_entry_at_place(const fl_reading *r, const fl_step *step) {
	return !r->undone && r->run == step->run && r->cycle == step->cycle && r->pass == step->pass &&
	       r->point == step->point;
}

/* ---- parts before the runs ---- */

static bool settings_step(const fl_session *s, fl_step *step) {
	for (const fl_entry_item *item = fl_entry_items; item->id; item++)
		if (!fl_session_setting(s, item->id)) {
			*step = (fl_step){.kind = FL_STEP_SETTING, .id = item->id};
			return true;
		}
	return false;
}

static bool equipment_step(const fl_session *s, const fl_procedure *p, fl_step *step) {
	bool oil = p->medium == FL_MEDIUM_OIL;
	const struct {
		bool wanted;
		fl_role role;
	} roles[] = {{oil, FL_ROLE_THERMOMETER},
	             {oil, FL_ROLE_BATH},
	             {true, fl_entry_meter_role(s)},
	             {!oil, FL_ROLE_PRESSURE_STANDARD},
	             {oil && !fl_session_setting(s, "no-tachometer"), FL_ROLE_TACHOMETER}};
	for (size_t i = 0; i < sizeof roles / sizeof roles[0]; i++)
		if (roles[i].wanted && !fl_session_equipment_id(s, roles[i].role)) {
			*step = (fl_step){.kind = FL_STEP_EQUIPMENT, .role = roles[i].role};
			return true;
		}
	return false;
}

static bool oil_step(const fl_session *s, const fl_procedure *p, fl_step *step) {
	if (p->medium != FL_MEDIUM_OIL || (int)s->point_count >= p->point_count)
		return false;
	*step = (fl_step){.kind = FL_STEP_OIL, .point = (int)s->point_count};
	return true;
}

/* A "no" holds the work up, unless it may be and was given its reason. */
static bool is_answered(const fl_question *question, const char *answer, const char *reason) {
	if (!answer)
		return false;
	if (question->kind == FL_ASK_CONFIRM && strcmp(answer, "no") == 0)
		return question->may_decline && reason;
	return true;
}

static bool question_step(const fl_session *s, const fl_question *questions, int count, fl_step_kind kind,
                          fl_step *step) {
	for (int i = 0; i < count; i++) {
		const fl_gate_answer *given = fl_session_gate(s, questions[i].id);
		if (is_answered(&questions[i], given ? given->answer : NULL, given ? given->reason : NULL))
			continue;
		*step = (fl_step){.kind = kind, .id = questions[i].id, .question = &questions[i]};
		return true;
	}
	return false;
}

static bool condition_step(const fl_session *s, const fl_procedure *p, fl_step *step) {
	for (int i = 0; i < p->condition_count; i++) {
		const fl_setting *given = fl_session_setting(s, p->conditions[i].id);
		if (is_answered(&p->conditions[i], given ? given->typed : NULL, "-"))
			continue;
		*step = (fl_step){.kind = FL_STEP_SETTING, .id = p->conditions[i].id, .question = &p->conditions[i]};
		return true;
	}
	return false;
}

/* ---- the runs ---- */

/* Place number `index` of one cycle, rising from the stopped zero and falling back to it; false behind the last. */
static bool place_of(const fl_procedure *p, int index, fl_pass *pass, int *point) {
	int zero = p->stopped_zero ? 1 : 0, rising = zero + p->point_count;
	if (index < rising) {
		*pass = FL_PASS_RISING;
		*point = index < zero ? FL_POINT_ZERO : index - zero;
		return true;
	}
	if (!p->falling || index >= 2 * rising)
		return false;
	*pass = FL_PASS_FALLING;
	index -= rising;
	*point = index < p->point_count ? p->point_count - 1 - index : FL_POINT_ZERO;
	return true;
}

/* What each place of a run has, taken from the readings in one pass. */
typedef struct place_counts {
	short live[FL_MOST_CYCLES][2][FL_MOST_POINTS + 1]; /* readings that are neither struck nor undone */
	short last[FL_MOST_CYCLES][2][FL_MOST_POINTS + 1]; /* highest number given */
} place_counts;

static void count_places(const fl_session *s, fl_run_kind run, place_counts *counts) {
	*counts = (place_counts){0};
	for (size_t i = 0; i < s->reading_count; i++) {
		const fl_reading *r = &s->readings[i];
		bool on_plan = r->cycle >= 1 && r->cycle <= FL_MOST_CYCLES && r->point >= -1 && r->point < FL_MOST_POINTS;
		if (r->watched || r->undone || r->run != run || !on_plan)
			continue;
		short *last = &counts->last[r->cycle - 1][r->pass][r->point + 1];
		counts->live[r->cycle - 1][r->pass][r->point + 1] += !r->struck;
		if (r->number > *last)
			*last = (short)r->number;
	}
}

static bool reading_step(const fl_session *s, const fl_procedure *p, fl_run_kind run, fl_step *step) {
	fl_step found = {.kind = FL_STEP_READING, .run = run}, at = found;
	place_counts counts;
	bool open = false;
	int total = 0, done = 0;
	count_places(s, run, &counts);
	for (int cycle = 1; cycle <= p->cycles; cycle++)
		for (int index = 0; place_of(p, index, &at.pass, &at.point); index++) {
			at.cycle = cycle;
			int live = counts.live[cycle - 1][at.pass][at.point + 1];
			total += p->readings;
			done += live < p->readings ? live : p->readings;
			if (!open && live < p->readings) {
				at.number = counts.last[cycle - 1][at.pass][at.point + 1] + 1;
				found = at;
				open = true;
			}
		}
	*step = found;
	step->done = done;
	step->total = total;
	return open;
}

static bool run_step(const fl_session *s, const fl_procedure *p, fl_run_kind run, fl_step *step) {
	if (s->runs[run].closed || s->runs[run].missing)
		return false;
	if (!reading_step(s, p, run, step))
		step->kind = FL_STEP_CLOSE_RUN;
	return true;
}

/* Where repair comes first the functions are tried when the instrument is back. */
static bool check_step(const fl_session *s, const fl_procedure *p, fl_step *step) {
	for (int i = 0; i < p->check_count && s->decision != FL_DECISION_REPAIR; i++)
		if (!fl_session_check_answer(s, p->checks[i].id)) {
			*step = (fl_step){.kind = FL_STEP_CHECK, .id = p->checks[i].id, .check = &p->checks[i]};
			return true;
		}
	return false;
}

fl_step fl_entry_step(const fl_session *s, const fl_procedure *p) {
	fl_step step = {.kind = FL_STEP_DONE};
	const fl_session_run *as_found = &s->runs[FL_RUN_AS_FOUND], *as_left = &s->runs[FL_RUN_AS_LEFT];
	if (s->closed)
		return step;
	if (settings_step(s, &step) || equipment_step(s, p, &step) || oil_step(s, p, &step) ||
	    question_step(s, p->gates, p->gate_count, FL_STEP_GATE, &step) || condition_step(s, p, &step))
		return step;
	if (!as_found->begun && !as_found->missing)
		return (fl_step){.kind = FL_STEP_AS_FOUND};
	if (run_step(s, p, FL_RUN_AS_FOUND, &step))
		return step;
	if (!s->decision)
		return (fl_step){.kind = FL_STEP_DECISION};
	if (s->decision == FL_DECISION_ADJUST && !as_left->begun && !as_left->missing)
		return (fl_step){.kind = FL_STEP_ADJUSTMENT};
	if (fl_session_wants_as_left(s) && run_step(s, p, FL_RUN_AS_LEFT, &step))
		return step;
	if (check_step(s, p, &step))
		return step;
	if (question_step(s, p->restore, p->restore_count, FL_STEP_RESTORE, &step))
		return step;
	if (!fl_session_setting(s, "remarks-complete"))
		return (fl_step){.kind = FL_STEP_REMARKS};
	return (fl_step){.kind = FL_STEP_CLOSE};
}
