/* prompt.c - what stands before the next line: the heading of a new part, then one question.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* ---- parts of the work ---- */

typedef enum part {
	PART_IDENTITY,
	PART_PEOPLE,
	PART_EQUIPMENT,
	PART_OILS,
	PART_SAFETY,
	PART_CONDITIONS,
	PART_AS_FOUND,
	PART_DECISION,
	PART_ADJUSTMENT,
	PART_AS_LEFT,
	PART_CHECKS,
	PART_RESTORE,
	PART_END,
	PART_COUNT
} part;

static const char *const part_titles[PART_COUNT] = {
    "Identification",  "People",   "Measuring equipment", "Reference oils", "Permit and safety", "Conditions",
    "As-found run",    "Decision", "Adjustment",          "As-left run",    "Function checks",   "Restoring the loop",
    "Remarks and end",
};

static part part_of(const fl_step *step) {
	switch (step->kind) {
	case FL_STEP_SETTING:
		return step->question ? PART_CONDITIONS : (part)fl_entry_item_find(step->id)->part;
	case FL_STEP_EQUIPMENT:
		return PART_EQUIPMENT;
	case FL_STEP_OIL:
		return PART_OILS;
	case FL_STEP_GATE:
		return PART_SAFETY;
	case FL_STEP_AS_FOUND:
		return PART_AS_FOUND;
	case FL_STEP_READING:
	case FL_STEP_CLOSE_RUN:
		return step->run == FL_RUN_AS_FOUND ? PART_AS_FOUND : PART_AS_LEFT;
	case FL_STEP_DECISION:
		return PART_DECISION;
	case FL_STEP_ADJUSTMENT:
		return PART_ADJUSTMENT;
	case FL_STEP_CHECK:
		return PART_CHECKS;
	case FL_STEP_RESTORE:
		return PART_RESTORE;
	case FL_STEP_REMARKS:
	case FL_STEP_CLOSE:
	case FL_STEP_DONE:
		break;
	}
	return PART_END;
}

static bool has_part(const fl_procedure *p, part which) {
	return !((which == PART_OILS && p->medium != FL_MEDIUM_OIL) || (which == PART_SAFETY && p->gate_count == 0) ||
	         (which == PART_CONDITIONS && p->condition_count == 0) || (which == PART_CHECKS && p->check_count == 0) ||
	         (which == PART_RESTORE && p->restore_count == 0));
}

static void show_instrument(const fl_entry *entry, fl_text *out) {
	const fl_instrument *i = entry->setup.instrument;
	fl_text_printf(out, "  %s, serial %s\n", i->tag, *i->serial ? i->serial : "not stated");
	if (*i->site)
		fl_text_printf(out, "  %s\n", i->site);
	fl_text_printf(out, "  Scale %g to %g %s, signal %s", i->scale.low, i->scale.high,
	               fl_unit_text(fl_physics_dial_unit(i->scale.dial_unit)),
	               fl_physics_signal_range(i->scale.signal)->text);
	if (i->scale.dial_unit != FL_DIAL_MPA_S)
		fl_text_printf(out, ", dial density %g kg/m³", i->scale.dial_density_kg_m3);
	fl_text_printf(out, "\n  Procedure: %s\n  Compare this with the plate before going on.\n",
	               entry->setup.procedure->title);
}

static void show_part_note(const fl_entry *entry, part which, fl_text *out) {
	if (which == PART_IDENTITY)
		show_instrument(entry, out);
	if (which == PART_SAFETY)
		fl_text_add(
		    out, "  Hot fuel, pressure, rotating parts and electricity can injure or kill. Local rules and the permit "
		         "rule over anything said here.\n");
	if (which == PART_AS_FOUND)
		fl_text_add(out, "  Nothing is touched or adjusted before this run is closed.\n");
	if (which == PART_ADJUSTMENT)
		fl_text_add(out, "  Note every screw and parameter with its value before and after.\n");
	if (which == PART_CHECKS)
		fl_text_add(out,
		            "  Alarms can trip the engine or the heater: tell the watch before each. What is not tried stays "
		            "visible, with its reason.\n");
	if (which == PART_AS_LEFT)
		fl_text_add(out, "  The same plan again, with the instrument as it is left.\n");
}

static void show_heading(fl_entry *entry, part which, fl_text *out) {
	int number = 0, count = 0;
	for (int i = 0; i < PART_COUNT; i++) {
		count += has_part(entry->setup.procedure, (part)i);
		if (i == (int)which)
			number = count;
	}
	fl_text_printf(out, "\nPart %d of %d: %s\n", number, count, part_titles[which]);
	show_part_note(entry, which, out);
	entry->shown_part = (int)which;
	entry->shown_place = -1;
}

/* ---- questions ---- */

static void ask_question(const fl_question *question, fl_text *out) {
	if (question->caution)
		fl_text_printf(out, "  Caution: %s\n", question->caution);
	fl_text_add(out, question->ask);
	if (question->kind == FL_ASK_CONFIRM)
		fl_text_add(out, " (yes or no)");
	if (question->kind == FL_ASK_AMOUNT)
		fl_text_printf(out, " (%s)", fl_unit_text(question->unit));
	fl_text_add(out, "> ");
}

static void ask_equipment(const fl_entry *entry, const fl_step *step, fl_text *out) {
	const fl_equipment *item = fl_entry_propose_equipment(entry, step->role);
	fl_text_printf(out, "Which %s", fl_stock_role_text(step->role));
	if (step->role == FL_ROLE_TACHOMETER)
		fl_text_printf(out, " (%s%sempty for none)", item ? item->id : "", item ? " is in date; " : "");
	else if (item)
		fl_text_printf(out, " (empty for %s)", item->id);
	fl_text_add(out, "> ");
}

static void ask_oil(const fl_entry *entry, const fl_step *step, fl_text *out) {
	const fl_plan_point *point = &entry->setup.procedure->points[step->point];
	const fl_oil *oil = fl_entry_propose_oil(entry, step->point);
	fl_text_printf(out, "Lot for point %d, %g %% of span", step->point + 1, point->position_pct_span);
	if (oil)
		fl_text_printf(out, " (empty for %s, lot %s)", oil->name, oil->lot);
	fl_text_add(out, "> ");
}

/* The pressure to inject at a point, NAN if it is not known. */
static double pressure_at(const fl_entry *entry, int point) {
	fl_reference reference;
	if (fl_entry_reference(entry, &reference, NULL) < 0)
		return NAN;
	return fl_reference_pressure_at(&reference, entry->setup.procedure->points[point].position_pct_span / 100.0);
}

/* Heading of a place on the plan: shown once, when it is reached. */
static void show_place(fl_entry *entry, const fl_step *step, fl_text *out) {
	long place = (((long)step->run * 1000 + step->cycle) * 2 + (long)step->pass) * 1000 + step->point + 1;
	const fl_procedure *p = entry->setup.procedure;
	char name[160];
	if (place == entry->shown_place)
		return;
	entry->shown_place = place;
	fl_text_printf(out, "\n  Cycle %d of %d, %s: %s", step->cycle, p->cycles, fl_pass_word(step->pass),
	               fl_entry_point_name(entry, step->point, name, sizeof name));
	double dp_pa = p->medium == FL_MEDIUM_PRESSURE ? pressure_at(entry, step->point) : NAN;
	if (!isnan(dp_pa))
		fl_text_printf(out, ": apply %.2f mbar, coming from %s", dp_pa / 100.0,
		               step->pass == FL_PASS_RISING ? "below" : "above");
	else if (step->point == FL_POINT_ZERO)
		fl_text_add(out, ": pump stopped, legs equalised and full");
	else
		fl_text_printf(out, ": flush, then bath at %g °C", p->bath_c);
	fl_text_add(out, "\n");
}

static void ask_reading(fl_entry *entry, const fl_step *step, fl_text *out) {
	const fl_procedure *p = entry->setup.procedure;
	const char *unit = fl_unit_text(fl_physics_signal_range(entry->setup.instrument->scale.signal)->unit);
	show_place(entry, step, out);
	fl_text_printf(out, "Reading %d of %d, %s", step->number, step->number > p->readings ? step->number : p->readings,
	               unit);
	if (p->medium == FL_MEDIUM_PRESSURE)
		fl_text_add(out, " and pressure applied");
	else if (step->point != FL_POINT_ZERO)
		fl_text_add(out, " and °C");
	fl_text_printf(out, " (%d of %d done)> ", step->done, step->total);
}

static void ask_decision(fl_entry *entry, fl_text *out) {
	fl_entry_show_advice(entry, out);
	const fl_advice_question *open = fl_entry_open_question(entry);
	fl_text_printf(out, "%s> ", open ? open->ask : "Decision: adjust, leave or repair");
}

static void ask_step(fl_entry *entry, const fl_step *step, fl_text *out) {
	switch (step->kind) {
	case FL_STEP_SETTING:
		if (step->question)
			ask_question(step->question, out);
		else
			fl_text_printf(out, "%s> ", fl_entry_item_find(step->id)->ask);
		break;
	case FL_STEP_GATE:
	case FL_STEP_RESTORE:
		ask_question(step->question, out);
		break;
	case FL_STEP_EQUIPMENT:
		ask_equipment(entry, step, out);
		break;
	case FL_STEP_OIL:
		ask_oil(entry, step, out);
		break;
	case FL_STEP_AS_FOUND:
		fl_text_add(out, "Is the instrument untouched, so that an as-found run is possible (yes or no)> ");
		break;
	case FL_STEP_READING:
		ask_reading(entry, step, out);
		break;
	case FL_STEP_CLOSE_RUN:
		fl_text_printf(out, "All %d readings are there. Type close to lock the %s run> ", step->total,
		               fl_run_word(step->run));
		break;
	case FL_STEP_DECISION:
		ask_decision(entry, out);
		break;
	case FL_STEP_CHECK:
		fl_entry_ask_check(entry, step->check, out);
		break;
	case FL_STEP_ADJUSTMENT:
		fl_text_add(out, "What was adjusted (done when that was all)> ");
		break;
	case FL_STEP_REMARKS:
		fl_text_add(out, "Remark (empty when there is no more)> ");
		break;
	case FL_STEP_CLOSE:
		fl_text_printf(out, "Your name closes the session (empty for %s)> ", fl_entry_performer(entry));
		break;
	case FL_STEP_DONE:
		fl_text_add(out, "The session is closed> ");
		break;
	}
}

void fl_entry_prompt(fl_entry *entry, fl_text *out) {
	const char *form = fl_entry_form_prompt(entry);
	if (form) {
		fl_text_printf(out, "  %s> ", form);
		return;
	}
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	part which = part_of(&step);
	if ((int)which != entry->shown_part)
		show_heading(entry, which, out);
	ask_step(entry, &step, out);
}
