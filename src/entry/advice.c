/* advice.c - the decision: what was found is shown, what has to be answered first is asked, then adjust, leave or
 * repair.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <stdio.h>
#include <strings.h>

/* Grows with every line that the advice could follow from, once the run is locked. */
static long age_of(const fl_session *s) {
	long age = (long)(s->measurement_count + s->finding_count);
	for (size_t i = 0; i < s->measurement_count; i++)
		age += s->measurements[i].undone;
	for (size_t i = 0; i < s->finding_count; i++)
		age += s->findings[i].undone;
	return age;
}

/* An opinion that cannot be had does not hold the work up: it says so, and the decision is asked for. */
const fl_advice *fl_entry_advice(fl_entry *entry) {
	long age = age_of(entry->session);
	if (!entry->setup.advise)
		return NULL;
	if (entry->advised && entry->advice_age == age)
		return &entry->advice;
	fl_error why = {0};
	fl_advice advice = {0};
	if (entry->setup.advise(entry->setup.advise_context, entry->session, &advice, &why) < 0) {
		fl_arena_free(&advice.arena);
		advice = (fl_advice){0};
		advice.text = fl_arena_printf(&advice.arena, "  No findings can be shown: %s\n", why.message);
	}
	fl_arena_free(&entry->advice.arena);
	entry->advice = advice;
	entry->advised = true;
	entry->advice_shown = false;
	entry->advice_age = age;
	return &entry->advice;
}

const fl_advice_question *fl_entry_open_question(fl_entry *entry) {
	const fl_advice *advice = fl_entry_advice(entry);
	for (size_t i = 0; advice && i < advice->question_count; i++)
		if (!fl_session_finding(entry->session, advice->questions[i].id))
			return &advice->questions[i];
	return NULL;
}

void fl_entry_show_advice(fl_entry *entry, fl_text *out) {
	const fl_advice *advice = fl_entry_advice(entry);
	if (!advice || entry->advice_shown)
		return;
	if (advice->text)
		fl_text_printf(out, "%s\n", advice->text);
	entry->advice_shown = true;
}

fl_status fl_entry_why(fl_entry *entry, fl_text *say, fl_error *err) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	if (step.kind != FL_STEP_DECISION)
		return fl_fail(err, FL_E_STATE, "findings are shown at the decision; assess shows them all afterwards");
	const fl_advice *advice = fl_entry_advice(entry);
	fl_text_add(say, advice && advice->text ? advice->text : "  Nothing was found.\n");
	return FL_OK;
}

/* ---- answers ---- */

static fl_status answer_question(fl_entry *entry, const fl_advice_question *question, const char *line, fl_error *err) {
	int yes = fl_entry_yes(line);
	if (yes < 0)
		return fl_fail(err, FL_E_VALUE, "answer yes (the readings are mixed up) or no (they stand as entered)");
	fl_entry_form_open(entry, FL_FORM_FINDING);
	snprintf(entry->form.item, sizeof entry->form.item, "%s", question->id);
	entry->form.target = yes;
	return FL_OK;
}

static const fl_finding_answer *mixed_up(const fl_session *s) {
	for (size_t i = 0; i < s->finding_count; i++)
		if (s->findings[i].yes && !s->findings[i].undone)
			return &s->findings[i];
	return NULL;
}

/* What cannot be is refused here already, before a reason is asked for. */
static fl_status take_word(fl_entry *entry, fl_decision decision, fl_text *say, fl_error *err) {
	const fl_advice *advice = fl_entry_advice(entry);
	bool adjust = decision == FL_DECISION_ADJUST;
	if (adjust && mixed_up(entry->session))
		return fl_fail(
		    err, FL_E_STATE,
		    "no adjustment on mixed-up readings: decide leave or repair, and take them again in a new session");
	if (adjust && advice && advice->refuses_adjust)
		return fl_fail(err, FL_E_STATE, "%s", advice->refuses_adjust);
	bool against = adjust && advice && advice->against_adjust;
	if (against)
		fl_text_printf(say, "  Advised against: %s\n", advice->against_adjust);
	fl_entry_form_open(entry, against ? FL_FORM_AGAINST : FL_FORM_DECISION);
	entry->form.decision = decision;
	if (against)
		snprintf(entry->form.ask, sizeof entry->form.ask, "Adjust all the same (yes or no)");
	return FL_OK;
}

fl_status fl_entry_decide(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	static const struct {
		const char *word;
		fl_decision decision;
	} words[] = {{"adjust", FL_DECISION_ADJUST}, {"leave", FL_DECISION_LEAVE}, {"repair", FL_DECISION_REPAIR}};
	const fl_advice_question *open = fl_entry_open_question(entry);
	if (open)
		return answer_question(entry, open, line, err);
	for (size_t i = 0; i < sizeof words / sizeof words[0]; i++)
		if (strcasecmp(line, words[i].word) == 0)
			return take_word(entry, words[i].decision, say, err);
	return fl_fail(err, FL_E_VALUE, "answer adjust, leave or repair");
}
