/* command.c - the few words that are understood at every prompt.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* ---- help ---- */

static const char *step_help(const fl_step *step) {
	switch (step->kind) {
	case FL_STEP_SETTING:
		if (!step->question)
			return fl_entry_item_find(step->id)->help;
		return "A condition that belongs to the results. Decimal comma and point both work; a unit may be typed.";
	case FL_STEP_EQUIPMENT:
		return "The item as equipment.yaml names it. Its certificate goes into the record.";
	case FL_STEP_OIL:
		return "The lot as the bottle names it. It has to be in date and to lie in the window of the point.";
	case FL_STEP_GATE:
		return "A gate: no reading is taken before it is passed. Local rules and the permit rule.";
	case FL_STEP_AS_FOUND:
		return "As-found is the state before anybody touched anything. If it was touched, say no and why.";
	case FL_STEP_READING:
		return "Type output and temperature when the output has settled: 10.42 mA at 40.02, or 10,42 40,02.\n"
		       "  watch VALUE notes a value while it settles. What should come is shown only afterwards.";
	case FL_STEP_CLOSE_RUN:
		return "Look at the run with list; strike what is wrong, with its reason. Then type close: it is locked.";
	case FL_STEP_DECISION:
		return "adjust: screws or parameters are turned, and an as-left run follows. leave: inside the adjust limit,\n"
		       "  as-left = as-found. repair: what cannot or must not be adjusted away.\n"
		       "  measure tells causes apart that the readings cannot: measure alone shows what there is. why shows "
		       "the\n"
		       "  findings again.";
	case FL_STEP_ADJUSTMENT:
		return "One at a time: what it was, its value before, its value after. At least one, then done.";
	case FL_STEP_CHECK:
		return "Type what was found. An empty line leaves the check out; the reason is asked then.";
	case FL_STEP_RESTORE:
		return "The loop goes back into service step by step. What is not done stays visible on the certificate.";
	case FL_STEP_REMARKS:
		return "Anything that a reader of the certificate should know.";
	case FL_STEP_CLOSE:
		return "Closing ends the session. Afterwards nothing but remarks can be added.";
	case FL_STEP_DONE:
		break;
	}
	return "The session is closed.";
}

static fl_status help(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	(void)rest;
	(void)err;
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	fl_text_printf(say,
	               "  %s\n"
	               "  At any prompt: ? this help; undo takes the last entry back; strike N sets reading N aside; "
	               "watch VALUE (or w) notes an output that settles; remark TEXT; list shows the run; measure notes an "
	               "extra measurement once as-found is locked; stop leaves.\n",
	               step_help(&step));
	return FL_OK;
}

/* ---- undo and strike ---- */

/* Gives the form its reason, from the command line if it stands there. */
static fl_status with_reason(fl_entry *entry, fl_form_kind kind, int target, const char *reason, fl_text *say,
                             fl_error *err) {
	fl_entry_form_open(entry, kind);
	entry->form.target = target;
	return *reason ? fl_entry_form_answer(entry, reason, say, err) : FL_OK;
}

static const char *describe(const fl_session *s, int sequence, char *out, size_t size) {
	snprintf(out, size, "entry %d", sequence);
	for (size_t i = 0; i < s->reading_count; i++)
		if (s->readings[i].sequence == sequence)
			snprintf(out, size, "%s [%d]: %s %s", s->readings[i].watched ? "the watched value" : "reading", sequence,
			         s->readings[i].typed, fl_unit_text(s->readings[i].unit));
	for (size_t i = 0; i < s->setting_count; i++)
		if (s->settings[i].sequence == sequence)
			snprintf(out, size, "%s: %.80s", s->settings[i].id, s->settings[i].typed);
	for (size_t i = 0; i < s->gate_count; i++)
		if (s->gates[i].sequence == sequence)
			snprintf(out, size, "%s: %.80s", s->gates[i].id, s->gates[i].answer);
	for (size_t i = 0; i < s->point_count; i++)
		if (s->points[i].sequence == sequence)
			snprintf(out, size, "oil of point %zu: %s (%s)", i + 1, s->points[i].oil, s->points[i].lot);
	for (size_t i = 0; i < s->measurement_count; i++)
		if (s->measurements[i].sequence == sequence)
			snprintf(out, size, "the extra measurement [%d]: %s %.60s %s", sequence,
			         fl_measure_word(s->measurements[i].what), s->measurements[i].typed,
			         fl_unit_text(s->measurements[i].unit));
	for (size_t i = 0; i < s->finding_count; i++)
		if (s->findings[i].sequence == sequence)
			snprintf(out, size, "the answer to %.80s: %s", s->findings[i].id, s->findings[i].yes ? "yes" : "no");
	for (size_t i = 0; i < s->check_count; i++)
		if (s->checks[i].sequence == sequence)
			snprintf(out, size, "the function check %.80s", s->checks[i].id);
	for (size_t i = 0; i < s->equipment_count; i++)
		if (s->equipment[i].sequence == sequence)
			snprintf(out, size, "%s: %s", fl_stock_role_text(s->equipment[i].role), s->equipment[i].id);
	return out;
}

static fl_status undo(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	int target = fl_session_last_undoable(entry->session);
	char what[256];
	if (target == 0)
		return fl_fail(err, FL_E_STATE, "nothing here can be taken back; what a closed run holds is locked");
	fl_text_printf(say, "  Taking back %s\n", describe(entry->session, target, what, sizeof what));
	entry->shown_place = -1;
	return with_reason(entry, FL_FORM_UNDO, target, rest, say, err);
}

static fl_status strike(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	char *end;
	long target = strtol(rest, &end, 10);
	if (end == rest || (*end && *end != ' ') || target <= 0)
		return fl_fail(err, FL_E_VALUE, "strike what: type strike and the number in brackets before the reading");
	while (*end == ' ')
		end++;
	/* Asked of the journal before the reason is, so that a wrong number is told at once. */
	for (size_t i = 0; i < entry->session->reading_count; i++) {
		const fl_reading *r = &entry->session->readings[i];
		if (r->sequence == target && !r->watched && !r->struck && !r->undone && !entry->session->runs[r->run].closed)
			return with_reason(entry, FL_FORM_STRIKE, (int)target, end, say, err);
	}
	return fl_fail(err, FL_E_VALUE, "entry %ld is no reading that can be struck: list shows those of this run", target);
}

/* ---- the others ---- */

static fl_status watch(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	if (step.kind != FL_STEP_READING)
		return fl_fail(err, FL_E_STATE, "there is nothing to watch at this step");
	fl_entry_draft_begin(entry, &step, true);
	fl_status status = fl_entry_draft_read(entry, rest, err);
	return status == FL_OK ? fl_entry_draft_go_on(entry, say, err) : status;
}

static fl_status remark(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	fl_status status = fl_entry_check_text(rest, FL_PROSE_POINTS, true, "the text behind remark", err);
	fl_event event = {.verb = FL_V_REMARK, .fields[FL_F_TYPED] = rest};
	if (status >= 0)
		status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		fl_text_add(say, "  Noted.\n");
	return status;
}

static fl_run_kind current_run(const fl_session *s) {
	return s->runs[FL_RUN_AS_LEFT].begun ? FL_RUN_AS_LEFT : FL_RUN_AS_FOUND;
}

static void list_row(const fl_entry *entry, const fl_reading *r, fl_text *say) {
	char name[160], error[40] = "-";
	fl_reading_result result;
	if (!r->watched && fl_entry_judge(entry, r, &result, NULL) >= 0)
		fl_decimal_format_signed(100.0 * result.error_span, 2, true, error, sizeof error);
	fl_text_printf(say, "  [%d]", r->sequence);
	fl_text_pad_to(say, 9);
	fl_text_printf(say, "%d %s", r->cycle, fl_pass_word(r->pass));
	fl_text_pad_to(say, 20);
	fl_text_add(say, fl_entry_point_name(entry, r->point, name, sizeof name));
	fl_text_pad_to(say, 38);
	fl_text_printf(say, "%s %s", r->typed, fl_unit_text(r->unit));
	fl_text_pad_to(say, 50);
	fl_text_add(say, r->has_temp ? r->temp_typed : r->has_applied ? r->applied_typed : "");
	fl_text_pad_to(say, 59);
	fl_text_add(say, error);
	fl_text_pad_to(say, 67);
	fl_text_printf(say, "%s\n", r->struck ? "struck" : r->undone ? "taken back" : r->watched ? "watched" : "");
}

static fl_status list(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	(void)rest;
	(void)err;
	const fl_session *s = entry->session;
	fl_run_kind run = current_run(s);
	int rows = 0;
	for (size_t i = 0; i < s->reading_count; i++) {
		if (s->readings[i].run != run)
			continue;
		if (rows++ == 0)
			fl_text_printf(say, "  %s run\n  No.    Cycle      Point             Output      Temp.    Error %%\n",
			               fl_run_word(run));
		list_row(entry, &s->readings[i], say);
	}
	if (rows == 0)
		fl_text_printf(say, "  No reading in the %s run yet.\n", fl_run_word(run));
	return FL_OK;
}

static fl_status measure(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	return fl_entry_measure(entry, rest, say, err);
}

static fl_status why(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	(void)rest;
	return fl_entry_why(entry, say, err);
}

static fl_status stop(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	(void)rest;
	(void)err;
	entry->stopped = true;
	fl_text_printf(say, "  Stopped. Everything entered is kept; go on with: foundleft resume %s\n",
	               entry->journal->file.path);
	return FL_OK;
}

/* One line a command. */
static const struct {
	const char *word;
	enum { ALONE, WITH_TEXT } takes; /* ALONE: a longer line is an ordinary answer */
	bool in_forms;                   /* understood also while something is asked back */
	fl_status (*run)(fl_entry *, const char *, fl_text *, fl_error *);
} commands[] = {
    {"?", ALONE, true, help},         {"stop", ALONE, true, stop},          {"list", ALONE, true, list},
    {"undo", WITH_TEXT, false, undo}, {"strike", WITH_TEXT, false, strike}, {"watch", WITH_TEXT, false, watch},
    {"w", WITH_TEXT, false, watch},   {"remark", WITH_TEXT, false, remark}, {"measure", WITH_TEXT, false, measure},
    {"why", ALONE, false, why},
};

bool fl_entry_command(fl_entry *entry, const char *line, fl_text *say, fl_status *status, fl_error *err) {
	size_t length = strcspn(line, " ");
	const char *rest = line + length + strspn(line + length, " ");
	for (size_t i = 0; i < sizeof commands / sizeof commands[0]; i++) {
		if (strlen(commands[i].word) != length || strncmp(line, commands[i].word, length) != 0)
			continue;
		if ((commands[i].takes == ALONE && *rest) || (!commands[i].in_forms && entry->form.kind != FL_FORM_NONE))
			return false;
		*status = commands[i].run(entry, rest, say, err);
		return true;
	}
	return false;
}
