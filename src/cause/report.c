/* cause/report.c - causes, groups and advice as sentences, in the order in which people need them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "cause_private.h"

#include <stdlib.h>
#include <string.h>

static const double named_from_z = 3.0;
/* A gain error of the flow part beyond these is cleaned or repaired, not spanned out; job practice, no source. */
static const double repair_gain = 0.03, repair_gain_since_cleaning = 0.04;

double fl_cause_tolerance(const fl_search *s) {
	double tightest = INFINITY;
	for (size_t i = 0; i < s->reading_rows; i++)
		if (s->rows[i].found && s->rows[i].found->tolerance_span > 0.0)
			tightest = fmin(tightest, s->rows[i].found->tolerance_span);
	return isfinite(tightest) ? tightest : 0.02;
}

static bool is_named(const fl_cause_group *g) {
	return g->material && g->z >= named_from_z && g->possible_count > 0;
}

/* It would do much, but the others could do as well without it. */
static bool is_open(const fl_cause_group *g) {
	return g->material && !is_named(g) && g->possible_count > 0;
}

/* ---- members ---- */

static const char *member_text(fl_search *s, const fl_cause_member *m) {
	const fl_fault_kind *kind = fl_cause_fault(m->fault);
	const char *amount = fl_cause_amount(s, fabs(m->alone), kind->unit, 2);
	const fl_instrument *i = s->instrument;
	if (m->fault == FL_FAULT_DENSITY)
		return fl_cause_text(s, "%s (%.0f instead of %.0f kg/m³)", kind->name, s->model.rho_dial * (1.0 + m->alone),
		                     s->model.rho_dial);
	if (m->fault == FL_FAULT_SPEED && i->has_geometry)
		return fl_cause_text(s, "%s (%.1f instead of %.1f r/min)", kind->name,
		                     fl_from_inside(i->capillary.pump_speed_rev_s * (1.0 + m->alone), FL_U_R_MIN),
		                     fl_from_inside(i->capillary.pump_speed_rev_s, FL_U_R_MIN));
	return fl_cause_text(s, "%s (%s%s)", kind->name, m->alone < 0.0 ? "\xe2\x88\x92" : "", amount);
}

/* The members for which `possible` holds, likeliest first: "a, b or c". */
static const char *members_text(fl_search *s, const fl_cause_group *g) {
	bool said[FL_FAULT_COUNT] = {false};
	const char *text = "";
	for (size_t n = 0; n < g->possible_count; n++) {
		size_t next = g->member_count;
		for (size_t i = 0; i < g->member_count; i++)
			if (g->members[i].possible && !said[i] &&
			    (next == g->member_count || g->members[i].penalty < g->members[next].penalty))
				next = i;
		if (next == g->member_count)
			break;
		said[next] = true;
		text = fl_cause_text(s, "%s%s%s", text,
		                     n == 0                       ? ""
		                     : n + 1 == g->possible_count ? " or "
		                                                  : ", ",
		                     member_text(s, &g->members[next]));
	}
	return text;
}

static const char *excluded_text(fl_search *s, const fl_cause_group *g) {
	const char *text = "";
	int count = 0;
	for (size_t i = 0; i < g->member_count; i++) {
		const fl_cause_member *m = &g->members[i];
		if (m->possible)
			continue;
		text = fl_cause_text(s, "%s%s%s (%s)", text, count++ ? ", " : " Not: ", fl_cause_fault(m->fault)->name,
		                     isnan(m->alone) ? "the sign forbids it" : "too large, or against a measurement");
	}
	return count ? fl_cause_text(s, "%s.", text) : "";
}

static const char *group_id(fl_search *s, const char *begin, const fl_cause_group *g) {
	const char *id = begin;
	for (size_t i = 0, n = 0; i < g->member_count; i++)
		if (g->members[i].possible)
			id = fl_cause_text(s, "%s%s%s", id, n++ ? "+" : ":", fl_cause_fault(g->members[i].fault)->word);
	return id;
}

static void give_numbers(fl_search *s, fl_finding *f, const fl_cause_group *g) {
	fl_cause_number_of(s, f, "largest effect", g->effect_span, g->u_effect_span, FL_U_PERCENT_SPAN);
	for (size_t i = 0; i < g->member_count; i++) {
		const fl_cause_member *m = &g->members[i];
		double relative = g->effect_span != 0.0 ? fabs(g->u_effect_span / g->effect_span) : NAN;
		if (m->possible)
			fl_cause_number_of(s, f, fl_cause_fault(m->fault)->name, m->alone, fabs(m->alone) * relative,
			                   fl_cause_fault(m->fault)->unit);
	}
}

/* ---- what is to be done about one fault ---- */

static const char *remedy(fl_fault fault) {
	static const char *const words[FL_FAULT_COUNT] = {
	    [FL_FAULT_ZERO] = "Trim the zero with the pump stopped and the equaliser open.",
	    [FL_FAULT_COLUMN] = "Open the equaliser, fill and vent both legs, and read the stopped zero again.",
	    [FL_FAULT_LINE] = "Read the stopped zero at line pressure and without it; trim at the pressure of service.",
	    [FL_FAULT_SPAN] = "Trim the span of the transmitter.",
	    [FL_FAULT_DEPOSIT] = "Clean the capillary, then read again before anything is adjusted.",
	    [FL_FAULT_SLIP] = "Overhaul the pump: its clearances leak.",
	    [FL_FAULT_SPEED] = "Put the speed right: supply frequency, motor, gear.",
	    [FL_FAULT_DENSITY] = "Settle which density the dial assumes, and correct the record of the instrument.",
	    [FL_FAULT_TEMPERATURE] = "Check the thermometer and where it sits, then read again.",
	    [FL_FAULT_AIR] = "Vent the suction side and read again.",
	    [FL_FAULT_PARTICLE] = "Open and clean the capillary; leave the zero screw alone.",
	    [FL_FAULT_CURVATURE] = "Check the transmitter alone over its range: zero and span cannot straighten it.",
	    [FL_FAULT_COUPLING] = "Renew the pump's coupling: no adjustment helps.",
	    [FL_FAULT_LIMIT] = "Check supply and burden of the output.",
	    [FL_FAULT_LAG] = "Wait longer at each point; heat and clear the impulse lines.",
	    [FL_FAULT_CARRY_OVER] = "Flush a second time at each change of oil.",
	};
	return words[fault] ? words[fault] : "";
}

static fl_fault only_one(const fl_cause_group *g) {
	for (size_t i = 0; i < g->member_count; i++)
		if (g->members[i].possible)
			return g->members[i].fault;
	return FL_FAULT_COUNT;
}

static void say_cause(fl_search *s, const fl_cause_group *g) {
	fl_fault fault = only_one(g);
	fl_finding *f =
	    fl_cause_say(s, FL_FINDING_CAUSE, group_id(s, "cause", g), "The readings single out: %s.", members_text(s, g));
	fl_cause_advise(s, f, remedy(fault), "It makes %s of span at %s, with a standard uncertainty of %s.%s",
	                fl_cause_percent(s, g->effect_span, 2), s->rows[g->largest_row].name,
	                fl_cause_amount(s, g->u_effect_span, FL_U_PERCENT, 2), excluded_text(s, g));
	give_numbers(s, f, g);
	if (!f)
		return;
	f->z = g->z;
	f->strength = fl_cause_strength(g->z);
}

static const char *splits_text(fl_search *s, const fl_cause_group *g) {
	if (!g->split_count)
		return "No further measurement known to the program splits them: clean the capillary and read again.";
	const char *text = fl_cause_text(s, "To tell them apart, %s", fl_cause_split_words(g->splits[0]));
	for (size_t i = 1; i < g->split_count; i++)
		text = fl_cause_text(s, "%s; %s %s", text, i == 1 ? "if that is not enough," : "then",
		                     fl_cause_split_words(g->splits[i]));
	return fl_cause_text(s, "%s.", text);
}

static const char *group_words(const fl_cause_group *g) {
	if (!is_named(g))
		return "The readings leave open whether any of these is there at all; other faults could take their place";
	if (g->several)
		return "The readings cannot tell these apart, and none alone is enough";
	return "The readings cannot tell these apart; any of them alone, or several together, would do it";
}

static void say_group(fl_search *s, const fl_cause_group *g) {
	fl_finding *f = fl_cause_say(s, FL_FINDING_GROUP, group_id(s, is_named(g) ? "cause-group" : "cause-group-open", g),
	                             "%s: %s.", group_words(g), members_text(s, g));
	fl_cause_advise(s, f, splits_text(s, g), "Together they make %s of span at %s, standard uncertainty %s.%s",
	                fl_cause_percent(s, g->effect_span, 2), s->rows[g->largest_row].name,
	                fl_cause_amount(s, g->u_effect_span, FL_U_PERCENT, 2), excluded_text(s, g));
	give_numbers(s, f, g);
	if (!f)
		return;
	f->z = g->z;
	f->strength = is_named(g) ? fl_cause_strength(g->z) : FL_STRENGTH_NONE;
}

/* ---- nothing explains it, or nothing asks ---- */

static size_t worst_row(const fl_search *s) {
	size_t worst = 0;
	double most = -1.0;
	for (size_t i = 0; i < s->row_count; i++) {
		const fl_cause_row *row = &s->out->rows[i];
		double misfit = fabs(row->value - row->explained) / row->u;
		if (misfit > most) {
			most = misfit;
			worst = i;
		}
	}
	return worst;
}

static void say_unexplained(fl_search *s) {
	const fl_cause *out = s->out;
	const fl_cause_row *row = &out->rows[worst_row(s)];
	fl_finding *f =
	    fl_cause_say(s, FL_FINDING_UNEXPLAINED, "unexplained",
	                 "None of the known faults explains these errors. The largest misfit is at %s.", row->name);
	fl_cause_advise(s, f, "Read this place again, and look for what is not in the list of faults.",
	                "With every known fault fitted, %s of span is left at %s; chi-squared is %.1f for %.1f degrees of "
	                "freedom, which chance gives with a probability of %.2g (below 0.01).",
	                fl_cause_percent(s, row->value - row->explained, 2), row->name, out->chi_squared, out->dof, out->p);
	fl_cause_number_of(s, f, "chi-squared", out->chi_squared, NAN, FL_U_NONE);
	fl_cause_number_of(s, f, "degrees of freedom", out->dof, NAN, FL_U_NONE);
	fl_cause_number_of(s, f, "probability", out->p, NAN, FL_U_NONE);
}

static void say_no_cause(fl_search *s) {
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_NO_CAUSE, "no-cause",
	    "Nothing here asks for a cause: beside the kinetic term, no fault does more than the uncertainty allows for.");
	fl_cause_number_of(s, f, "chi-squared", s->out->chi_squared, NAN, FL_U_NONE);
	fl_cause_number_of(s, f, "degrees of freedom", s->out->dof, NAN, FL_U_NONE);
}

static void say_causes(fl_search *s) {
	const fl_cause *out = s->out;
	size_t named = 0;
	if (out->withheld || !out->group_count)
		return;
	if (!out->explained) {
		say_unexplained(s);
		return;
	}
	for (size_t g = 0; g < out->group_count; g++) {
		if (!is_named(&out->groups[g]) && !is_open(&out->groups[g]))
			continue;
		named++;
		if (is_named(&out->groups[g]) && out->groups[g].possible_count == 1 && !out->groups[g].several)
			say_cause(s, &out->groups[g]);
		else
			say_group(s, &out->groups[g]);
	}
	if (!named && !fl_cause_finding(out, FL_FINDING_SUPPLY))
		say_no_cause(s);
}

/* ---- clean or repair first ---- */

static bool flow_part_possible(const fl_cause_group *g, const char **name, bool *only) {
	bool found = false;
	*only = true;
	for (size_t i = 0; i < g->member_count; i++) {
		const fl_cause_member *m = &g->members[i];
		if (!m->possible)
			continue;
		if (!fl_cause_fault(m->fault)->flow_part)
			*only = false;
		else if (!found) {
			found = true;
			*name = fl_cause_fault(m->fault)->name;
		}
	}
	return found;
}

static void say_repair(fl_search *s, const fl_cause_group *g) {
	const char *name = "";
	bool only;
	double x = s->rows[g->largest_row].at.x, gain = x > 0.05 ? g->effect_span / x : NAN;
	double since = isnan(s->extra.gain_since_cleaning) ? 0.0 : s->extra.gain_since_cleaning;
	if (!flow_part_possible(g, &name, &only) || isnan(gain))
		return;
	bool large = fabs(gain) > repair_gain;
	if (!large && !(fabs(gain + since) > repair_gain_since_cleaning))
		return;
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_REPAIR_FIRST, fl_cause_text(s, "repair-first:%s", only ? "sure" : "perhaps"), "%s: %s.",
	    only ? "Clean or repair first, then calibrate again" : "Find out first whether to clean or repair", name);
	fl_cause_advise(
	    s, f,
	    only ? "Do not span this out."
	         : "Split the cause group before the span is touched: a fault of the flow "
	           "part is cleaned or repaired, not spanned out.",
	    large ? "%s of reading at %s is more than the 3 %% that an adjustment may hide of a fault in the flow part."
	          : "%s of reading at %s, with what was spanned out since the last cleaning, is more than 4 %%.",
	    fl_cause_percent(s, gain, 1), s->rows[g->largest_row].name);
	fl_cause_number_of(s, f, "gain error", gain, fabs(g->u_effect_span / x), FL_U_PERCENT);
	fl_cause_number_of(s, f, "spanned out since cleaning", s->extra.gain_since_cleaning, NAN, FL_U_PERCENT);
	if (f)
		f->strength = fl_cause_strength(g->z);
	s->out->stop = true;
}

static void say_repairs(fl_search *s) {
	for (size_t g = 0; g < s->out->group_count && !s->out->withheld && s->out->explained; g++)
		if (is_named(&s->out->groups[g]))
			say_repair(s, &s->out->groups[g]);
}

/* ---- trim ---- */

static void say_trim(fl_search *s) {
	const fl_trim *t = &s->out->trim;
	if (!t->available || s->out->withheld)
		return;
	const char *place = s->rows[t->largest_after].name;
	fl_finding *f = fl_cause_say(
	    s, t->brings_in ? FL_FINDING_TRIM : FL_FINDING_TRIM_FAILS, t->brings_in ? "trim" : "trim-fails",
	    t->brings_in
	        ? "An adjustment (zero %s of span%s, span %s) would leave at most %s of span, at %s."
	        : "Adjustment can't bring this in: zero %s of span%s and span %s would still leave %s of span at %s.",
	    fl_cause_percent(s, -t->zero_span, 2), t->zero_asked ? "" : ", not asked for",
	    fl_cause_percent(s, 1.0 / (1.0 + t->gain) - 1.0, 2), fl_cause_amount(s, t->largest_after_span, FL_U_PERCENT, 2),
	    place);
	const char *pressures =
	    t->dp_high_pa > 0.0
	        ? fl_cause_text(s, "Lower range value at %.2f mbar, upper range value at %.2f mbar.",
	                        fl_from_inside(t->dp_low_pa, FL_U_MBAR), fl_from_inside(t->dp_high_pa, FL_U_MBAR))
	        : "";
	const char *advice = !t->brings_in                 ? "Repair, do not adjust."
	                     : s->out->stop                ? "Not before the findings above are cleared up."
	                     : s->run->inside_adjust_limit ? "Inside the adjust limit: leave it alone."
	                                                   : "Adjust, then read all points again as as-left.";
	fl_cause_advise(s, f, advice, "%s%sNo zero and span whatever would leave less than %s of span.",
	                t->brings_in ? pressures : "", t->brings_in && pressures[0] ? " " : "",
	                fl_cause_amount(s, t->ideal_after_span, FL_U_PERCENT, 2));
	fl_cause_number_of(s, f, "zero to take out", t->zero_span, NAN, FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "gain to take out", t->gain, NAN, FL_U_PERCENT);
	fl_cause_number_of(s, f, "lower range value", t->dp_low_pa, NAN, FL_U_MBAR);
	fl_cause_number_of(s, f, "upper range value", t->dp_high_pa, NAN, FL_U_MBAR);
	fl_cause_number_of(s, f, "largest error after", t->largest_after_span, NAN, FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "least possible", t->ideal_after_span, NAN, FL_U_PERCENT_SPAN);
}

/* ---- next point ---- */

/* A point that takes less than a tenth off the uncertainty is not worth an oil. */
static const double worth_an_oil = 0.9;

static void say_next(fl_search *s) {
	const fl_next_point *n = &s->out->next;
	if (!n->available || s->out->withheld || !s->out->explained)
		return;
	if (!n->splits && n->u_after > worth_an_oil * n->u_before)
		return;
	fl_finding *f = fl_cause_say(s, FL_FINDING_NEXT_POINT, "next-point",
	                             "%s at %g °C (%.0f %% of span) would tell most: it takes the standard "
	                             "uncertainty of the effect from %s to %s of span%s.",
	                             n->oil, n->temp_c, 100.0 * n->x, fl_cause_amount(s, n->u_before, FL_U_PERCENT, 2),
	                             fl_cause_amount(s, n->u_after, FL_U_PERCENT, 2),
	                             n->splits               ? " and splits the group"
	                             : isnan(n->split_after) ? ""
	                                                     : "; it does not split the group, no oil does");
	fl_cause_advise(s, f,
	                n->splits || isnan(n->split_after) ? "Add this point."
	                                                   : "Rather make the measurement that splits the group.",
	                "Computed from the signatures at all temperatures of the oils in date, before anything is read.");
	fl_cause_number_of(s, f, "uncertainty before", n->u_before, NAN, FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "uncertainty after", n->u_after, NAN, FL_U_PERCENT_SPAN);
}

static int by_kind(const void *a, const void *b) {
	const fl_finding *x = a, *y = b;
	if (x->kind != y->kind)
		return x->kind < y->kind ? -1 : 1;
	double zx = isnan(x->z) ? 0.0 : x->z, zy = isnan(y->z) ? 0.0 : y->z;
	if (zx != zy)
		return zx > zy ? -1 : 1;
	return strcmp(x->id, y->id);
}

void fl_cause_report(fl_search *s) {
	say_causes(s);
	say_repairs(s);
	say_trim(s);
	say_next(s);
	if (s->out->finding_count)
		qsort(s->out->findings, s->out->finding_count, sizeof *s->out->findings, by_kind);
}
