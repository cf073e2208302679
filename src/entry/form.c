/* form.c - what was asked back: one table of forms with their questions, and what is done when they are answered.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <stdio.h>
#include <string.h>

static const struct {
	const char *asks[2]; /* NULL: no further question, or form.ask */
	const char *what[2]; /* for the sentence that refuses an answer; NULL: the line is not kept as text */
	bool empty_cancels;  /* an empty first answer gives the form up */
} forms[FL_FORM_COUNT] = {
    [FL_FORM_UNDO] = {{"Why is it taken back (empty: leave it)", NULL}, {"a reason", NULL}, true},
    [FL_FORM_STRIKE] = {{"Why is it struck (empty: leave it)", NULL}, {"a reason", NULL}, true},
    [FL_FORM_INDICATIVE] = {{"Go on as \"indicative, not traceable\"? Type the reason (empty: choose another)",
                             "Your name for that"},
                            {"a reason", "a name"},
                            true},
    [FL_FORM_DECLINE] = {{"Why not (it is recorded as unfinished)", NULL}, {"a reason", NULL}, false},
    [FL_FORM_MISSING] = {{"Why is as-found not available (empty: ask again)", NULL}, {"a reason", NULL}, true},
    [FL_FORM_DECISION] = {{"Reason (empty: decide again)", NULL}, {"a reason", NULL}, true},
    [FL_FORM_ADJUST] = {{"Value before", "Value after"}, {"the value before", "the value after"}, false},
    [FL_FORM_FINDING] = {{"Reason (empty: answer again)", NULL}, {"a reason", NULL}, true},
    [FL_FORM_UNTRIED] = {{"Why is it not tried (empty: answer it)", NULL}, {"a reason", NULL}, true},
    [FL_FORM_TEMPERATURE] = {{"Temperature of the oil, °C (empty: type the reading again)", NULL}, {NULL, NULL}, true},
    [FL_FORM_APPLIED] = {{"Pressure applied (empty: type the reading again)", NULL}, {NULL, NULL}, true},
};

void fl_entry_form_open(fl_entry *entry, fl_form_kind kind) {
	entry->form = (fl_form){.kind = kind};
}

const char *fl_entry_form_prompt(const fl_entry *entry) {
	if (entry->form.kind == FL_FORM_NONE)
		return NULL;
	return entry->form.ask[0] ? entry->form.ask : forms[entry->form.kind].asks[entry->form.slot];
}

/* ---- finished forms ---- */

static fl_status finish_mark(fl_entry *entry, fl_verb verb, fl_error *err) {
	char target[16];
	snprintf(target, sizeof target, "%d", entry->form.target);
	fl_event event = {.verb = verb,
	                  .fields[FL_F_TARGET] = target,
	                  .fields[FL_F_REASON] = entry->form.answers[0],
	                  .fields[FL_F_BY] = fl_entry_performer(entry)};
	return fl_entry_commit(entry, &event, err);
}

static fl_status finish_indicative(fl_entry *entry, fl_error *err) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	fl_status status =
	    fl_entry_indicative(entry, entry->form.item, entry->form.answers[0], entry->form.answers[1], err);
	if (status < 0)
		return status;
	if (step.kind == FL_STEP_EQUIPMENT)
		return fl_entry_equip(entry, step.role, entry->form.item, err);
	return fl_entry_assign_oil(entry, step.point, fl_stock_oil(entry->setup.stock, entry->form.item), err);
}

static fl_status finish_decline(fl_entry *entry, fl_error *err) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	fl_event event = {.verb = FL_V_GATE,
	                  .fields[FL_F_ID] = step.id,
	                  .fields[FL_F_ANSWER] = "no",
	                  .fields[FL_F_REASON] = entry->form.answers[0]};
	return fl_entry_commit(entry, &event, err);
}

static fl_status finish_missing(fl_entry *entry, fl_text *say, fl_error *err) {
	fl_event event = {
	    .verb = FL_V_MISSING, .fields[FL_F_RUN] = "as-found", .fields[FL_F_REASON] = entry->form.answers[0]};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		fl_text_add(say, "  Recorded: as-found not available.\n");
	return status;
}

static fl_status finish_decision(fl_entry *entry, fl_text *say, fl_error *err) {
	fl_event event = {.verb = FL_V_DECIDE,
	                  .fields[FL_F_ANSWER] = fl_decision_word(entry->form.decision),
	                  .fields[FL_F_REASON] = entry->form.answers[0],
	                  .fields[FL_F_BY] = fl_entry_performer(entry)};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status < 0)
		return status;
	if (entry->session->decision == FL_DECISION_LEAVE && !fl_session_wants_as_left(entry->session))
		fl_text_add(say, "  Left alone: as-left = as-found, nothing is typed again.\n");
	if (entry->session->decision == FL_DECISION_REPAIR)
		fl_text_add(say, "  No as-left run here: after the repair comes a session of its own.\n");
	return FL_OK;
}

static fl_status finish_finding(fl_entry *entry, fl_text *say, fl_error *err) {
	bool yes = entry->form.target == 1;
	fl_event event = {.verb = FL_V_FINDING,
	                  .fields[FL_F_ID] = entry->form.item,
	                  .fields[FL_F_ANSWER] = yes ? "yes" : "no",
	                  .fields[FL_F_REASON] = entry->form.answers[0],
	                  .fields[FL_F_BY] = fl_entry_performer(entry)};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		fl_text_add(say, yes ? "  Noted. The data stay as entered, and nothing is adjusted on them.\n"
		                     : "  Noted. The data stand as entered.\n");
	return status;
}

static fl_status finish_adjust(fl_entry *entry, fl_error *err) {
	fl_event event = {.verb = FL_V_ADJUST,
	                  .fields[FL_F_ITEM] = entry->form.item,
	                  .fields[FL_F_BEFORE] = entry->form.answers[0],
	                  .fields[FL_F_AFTER] = entry->form.answers[1]};
	return fl_entry_commit(entry, &event, err);
}

static fl_status finish(fl_entry *entry, fl_text *say, fl_error *err) {
	switch (entry->form.kind) {
	case FL_FORM_UNDO:
		return finish_mark(entry, FL_V_UNDO, err);
	case FL_FORM_STRIKE:
		return finish_mark(entry, FL_V_STRIKE, err);
	case FL_FORM_INDICATIVE:
		return finish_indicative(entry, err);
	case FL_FORM_DECLINE:
		return finish_decline(entry, err);
	case FL_FORM_MISSING:
		return finish_missing(entry, say, err);
	case FL_FORM_DECISION:
		return finish_decision(entry, say, err);
	case FL_FORM_ADJUST:
		return finish_adjust(entry, err);
	case FL_FORM_FINDING:
		return finish_finding(entry, say, err);
	case FL_FORM_UNTRIED:
		return fl_entry_check_untried(entry, say, err);
	default:
		return fl_fail(err, FL_E_INTERNAL, "a form without an end");
	}
}

/* ---- answers ---- */

static fl_status answer_doubt(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	int yes = fl_entry_yes(line);
	bool about_reading = entry->form.kind == FL_FORM_READING;
	if (yes < 0)
		return fl_fail(err, FL_E_VALUE, "answer yes or no");
	if (!yes) {
		fl_entry_form_open(entry, FL_FORM_NONE);
		fl_text_add(say, "  Not recorded. Type it again.\n");
		return FL_OK;
	}
	if (about_reading) {
		entry->draft.confirmed |= 1u << entry->draft.doubt;
		fl_entry_form_open(entry, FL_FORM_NONE);
		return fl_entry_draft_go_on(entry, say, err);
	}
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	char about[160], value[32], whole[FL_SLOT_SIZE + 32];
	const char *unit = fl_unit_text(entry->form.unit);
	snprintf(about, sizeof about, "%s: %.40s %s", step.id, entry->form.item, unit);
	fl_event question = {.verb = FL_V_QUESTION, .fields[FL_F_ABOUT] = about, .fields[FL_F_ANSWER] = "yes"};
	fl_status status = fl_entry_commit(entry, &question, err);
	fl_event event = {.verb = step.kind == FL_STEP_SETTING ? FL_V_SET : FL_V_GATE, .fields[FL_F_ID] = step.id};
	snprintf(whole, sizeof whole, "%s %s", entry->form.item, unit);
	if (event.verb == FL_V_SET) {
		event.fields[FL_F_TYPED] = entry->form.item;
		event.fields[FL_F_UNIT] = unit;
		event.fields[FL_F_VALUE] = fl_entry_number(entry->form.value, value);
	} else {
		event.fields[FL_F_ANSWER] = whole;
	}
	if (status >= 0)
		status = fl_entry_commit(entry, &event, err);
	fl_entry_form_open(entry, FL_FORM_NONE);
	return status;
}

/* Adjusting against the advice goes on to its reason, and the record says that it was asked. */
static fl_status confirm_against(fl_entry *entry, fl_error *err) {
	fl_event question = {.verb = FL_V_QUESTION,
	                     .fields[FL_F_ABOUT] = "adjusting although it was advised against",
	                     .fields[FL_F_ANSWER] = "yes"};
	fl_status status = fl_entry_commit(entry, &question, err);
	fl_entry_form_open(entry, FL_FORM_DECISION);
	entry->form.decision = FL_DECISION_ADJUST;
	return status;
}

static fl_status answer_unusual(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	int yes = fl_entry_yes(line);
	fl_form_kind kind = entry->form.kind;
	if (yes < 0)
		return fl_fail(err, FL_E_VALUE, "answer yes or no");
	if (!yes) {
		fl_entry_form_open(entry, FL_FORM_NONE);
		fl_text_add(say, "  Not recorded.\n");
		return FL_OK;
	}
	if (kind == FL_FORM_AGAINST)
		return confirm_against(entry, err);
	fl_event question = {
	    .verb = FL_V_QUESTION, .fields[FL_F_ABOUT] = entry->form.answers[1], .fields[FL_F_ANSWER] = "yes"};
	fl_status status = fl_entry_commit(entry, &question, err);
	if (status >= 0)
		status =
		    kind == FL_FORM_MEASURE ? fl_entry_measure_commit(entry, say, err) : fl_entry_check_amount(entry, say, err);
	fl_entry_form_open(entry, FL_FORM_NONE);
	return status;
}

static fl_status answer_draft(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	fl_error inner = {0};
	fl_status status = entry->form.kind == FL_FORM_TEMPERATURE ? fl_entry_draft_temperature(entry, line, &inner)
	                                                           : fl_entry_draft_applied(entry, line, &inner);
	if (status == FL_ASK) {
		fl_text_printf(say, "  %s\n", inner.message);
		return FL_OK;
	}
	if (status < 0)
		return fl_fail(err, status, "%s", inner.message);
	fl_entry_form_open(entry, FL_FORM_NONE);
	return fl_entry_draft_go_on(entry, say, err);
}

fl_status fl_entry_form_answer(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	fl_form *form = &entry->form;
	if (!*line && form->slot == 0 && forms[form->kind].empty_cancels) {
		fl_entry_form_open(entry, FL_FORM_NONE);
		fl_text_add(say, "  Nothing was changed.\n");
		return FL_OK;
	}
	if (form->kind == FL_FORM_READING || form->kind == FL_FORM_AMOUNT)
		return answer_doubt(entry, line, say, err);
	if (form->kind == FL_FORM_MEASURE || form->kind == FL_FORM_AGAINST || form->kind == FL_FORM_CHECK)
		return answer_unusual(entry, line, say, err);
	if (form->kind == FL_FORM_TEMPERATURE || form->kind == FL_FORM_APPLIED)
		return answer_draft(entry, line, say, err);
	fl_status status = fl_entry_check_text(line, FL_PROSE_POINTS, true, forms[form->kind].what[form->slot], err);
	if (status < 0)
		return status;
	snprintf(form->answers[form->slot], sizeof form->answers[0], "%s", line);
	if (form->slot == 0 && forms[form->kind].asks[1]) {
		form->slot = 1;
		return FL_OK;
	}
	status = finish(entry, say, err);
	fl_entry_form_open(entry, FL_FORM_NONE);
	return status;
}
