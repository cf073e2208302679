/* content_opinion.c - opinions and interpretations, marked as such and only where the procedure lets them stand.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * ISO/IEC 17025:2017, 7.8.7: they are told apart from the results and say what they rest on. Only what the readings
 * single out stands here as a cause; a group is named as a group; hints towards faults that may not be there at all,
 * and advice for the bench, stay in the assessment. */
#include "writing.h"

#include <math.h>
#include <string.h>

static bool belongs(const fl_finding *f) {
	switch (f->kind) {
	case FL_FINDING_SATURATED:
	case FL_FINDING_MIX_UP:
	case FL_FINDING_SUPPLY:
	case FL_FINDING_UNEXPLAINED:
	case FL_FINDING_REPAIR_FIRST:
	case FL_FINDING_TRIM_FAILS:
	case FL_FINDING_CARRY_OVER:
		return true;
	case FL_FINDING_CAUSE:
	case FL_FINDING_GROUP:
		return f->strength != FL_STRENGTH_NONE;
	default:
		return false;
	}
}

/* Advice that was for the session under way is history when the certificate is issued. */
static bool keeps_advice(const fl_finding *f) {
	return f->kind == FL_FINDING_CAUSE || f->kind == FL_FINDING_REPAIR_FIRST || f->kind == FL_FINDING_MIX_UP;
}

static void write_finding(fl_writing *w, const fl_finding *f) {
	const char *strength = fl_cause_strength_word(f->strength);
	fl_sheet_addf(w->sheet, FL_BLOCK_ITEM, "%s%s%s%s%s%s%s", f->sentence, *strength ? " (" : "", strength,
	              *strength ? ")" : "", *f->reason ? " " : "", f->reason,
	              keeps_advice(f) && *f->advice ? fl_sheet_printf(w->sheet, " %s", f->advice) : "");
}

static size_t count_of(const fl_cause *cause) {
	size_t count = 0;
	for (size_t i = 0; cause->available && i < cause->finding_count; i++)
		count += belongs(&cause->findings[i]);
	return count;
}

void fl_write_opinions(fl_writing *w) {
	const fl_cause *causes = w->issue->causes;
	size_t count = 0;
	if (!causes || !w->procedure->opinions_on_certificate)
		return;
	for (int run = 0; run < FL_RUN_KINDS; run++)
		count += count_of(&causes[run]);
	if (count == 0)
		return;
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Opinions and interpretations");
	fl_sheet_add(
	    w->sheet, FL_BLOCK_SMALL,
	    "Opinion, not part of the calibration results (ISO/IEC 17025:2017, 7.8.7). It rests on a comparison of "
	    "the readings with what known faults would do to an instrument of this geometry.");
	for (int run = 0; run < FL_RUN_KINDS; run++) {
		if (count_of(&causes[run]) == 0)
			continue;
		fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "%s:", fl_writing_run_title((fl_run_kind)run));
		for (size_t i = 0; i < causes[run].finding_count; i++)
			if (belongs(&causes[run].findings[i]))
				write_finding(w, &causes[run].findings[i]);
	}
}
