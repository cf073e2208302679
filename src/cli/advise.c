/* advise.c - the result so far and the findings, for the conversation to show when the as-found run is locked.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "advise.h"

#include <string.h>

#include "case.h"
#include "report.h"

static fl_status out_of_memory(fl_error *err) {
	return fl_fail(err, FL_E_MEMORY, "out of memory for the findings");
}

/* Mix-ups are decided by a person. */
static fl_status take_questions(const fl_cause *cause, fl_advice *out, fl_error *err) {
	fl_advice_question *questions = fl_arena_alloc(&out->arena, cause->finding_count + 1, sizeof *questions);
	if (!questions)
		return out_of_memory(err);
	for (size_t i = 0; i < cause->finding_count; i++) {
		const fl_finding *f = &cause->findings[i];
		if (!f->asks)
			continue;
		fl_advice_question *q = &questions[out->question_count];
		q->id = fl_arena_strdup(&out->arena, f->id);
		q->ask = fl_arena_printf(&out->arena, "%s Is it so (yes: the readings are mixed up; no: they stand as entered)",
		                         f->sentence);
		if (!q->id || !q->ask)
			return out_of_memory(err);
		out->question_count++;
	}
	out->questions = questions;
	return FL_OK;
}

static fl_status take_proposal(const fl_case *one, fl_advice *out, fl_error *err) {
	fl_course proposal;
	if (!fl_cause_course(&one->causes[FL_RUN_AS_FOUND], &one->result.runs[FL_RUN_AS_FOUND], &proposal) ||
	    proposal.decision == FL_DECISION_ADJUST)
		return FL_OK;
	const char *advice = proposal.because ? proposal.because->advice : "";
	const char *words = fl_arena_printf(&out->arena, "%s%s%s", proposal.reason, *advice ? " " : "", advice);
	if (!words)
		return out_of_memory(err);
	if (proposal.rules_out_adjusting)
		out->refuses_adjust = words;
	else
		out->against_adjust = words;
	return FL_OK;
}

fl_status fl_cli_advise(void *context, const fl_session *session, fl_advice *out, fl_error *err) {
	const fl_adviser_context *with = context;
	fl_case one;
	fl_text text = {0};
	*out = (fl_advice){0};
	fl_status status = fl_case_of(session, with->shelf, &one, err);
	if (status < 0)
		return status;
	fl_report_so_far(&one, with->columns, &text);
	out->text = text.failed || !text.data ? NULL : fl_arena_strdup(&out->arena, text.data);
	if (text.failed || !out->text)
		status = out_of_memory(err);
	if (status >= 0 && one.causes[FL_RUN_AS_FOUND].available)
		status = take_questions(&one.causes[FL_RUN_AS_FOUND], out, err);
	if (status >= 0)
		status = take_proposal(&one, out, err);
	fl_text_free(&text);
	fl_case_free(&one);
	return status;
}
