/* cause/course.c - leave, adjust or repair first: what the findings come to.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "cause_private.h"

#include <string.h>

static const fl_finding *open_mix_up(const fl_cause *cause) {
	for (size_t i = 0; cause->withheld && i < cause->finding_count; i++)
		if (cause->findings[i].kind == FL_FINDING_MIX_UP && strcmp(cause->findings[i].answered, "no") != 0)
			return &cause->findings[i];
	return NULL;
}

/* The finding for which the search said stop; NULL where it did not. */
static const fl_finding *stopping(const fl_cause *cause) {
	static const fl_finding_kind kinds[] = {FL_FINDING_SCATTER, FL_FINDING_CARRY_OVER, FL_FINDING_SATURATED};
	for (size_t i = 0; cause->stop && i < sizeof kinds / sizeof kinds[0]; i++)
		if (fl_cause_finding(cause, kinds[i]))
			return fl_cause_finding(cause, kinds[i]);
	return NULL;
}

static bool propose(fl_course *out, fl_decision decision, const fl_finding *because) {
	out->decision = decision;
	out->because = because;
	out->reason = because->sentence;
	return true;
}

/* More than any adjustment may take out, or the supply's own ratio. */
static const fl_finding *ruling_out(const fl_cause *cause) {
	const fl_finding *supply = fl_cause_finding(cause, FL_FINDING_SUPPLY);
	return supply ? supply : fl_cause_finding(cause, FL_FINDING_STOP);
}

bool fl_cause_course(const fl_cause *cause, const fl_run_result *run, fl_course *out) {
	*out = (fl_course){.decision = FL_DECISION_NONE, .reason = ""};
	const fl_finding *f;
	if (!cause->available)
		return false;
	if ((f = open_mix_up(cause)))
		return propose(out, FL_DECISION_NONE, f);
	if ((f = ruling_out(cause))) {
		out->rules_out_adjusting = true;
		return propose(out, FL_DECISION_REPAIR, f);
	}
	if ((f = fl_cause_finding(cause, FL_FINDING_REPAIR_FIRST)))
		return propose(out, strcmp(f->id, "repair-first:sure") == 0 ? FL_DECISION_REPAIR : FL_DECISION_NONE, f);
	if ((f = stopping(cause)))
		return propose(out, FL_DECISION_NONE, f);
	if (run->inside_adjust_limit) {
		out->decision = FL_DECISION_LEAVE;
		out->reason = "Every point lies inside the adjust limit: an adjustment would add noise and break the trend.";
		return true;
	}
	if ((f = fl_cause_finding(cause, FL_FINDING_TRIM_FAILS)))
		return propose(out, FL_DECISION_REPAIR, f);
	f = fl_cause_finding(cause, FL_FINDING_TRIM);
	return f && propose(out, FL_DECISION_ADJUST, f);
}
