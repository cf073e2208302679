/* report_why.c - the findings and the function checks for people.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report_parts.h"

/* ---- findings ---- */

/* "pump slip 2.1 ± 0.3 %": only numbers that have an uncertainty; it is expanded here with k = 2. */
static void add_number(const fl_cause_number *n, fl_text *out, int *count) {
	char value[FL_CELL_SIZE], U[FL_CELL_SIZE];
	if (!isfinite(n->u) || !(n->u > 0.0) || !isfinite(n->value))
		return;
	fl_report_two_digits(2.0 * n->u, U);
	const char *point = strchr(U, '.');
	fl_report_signed(n->value, point ? (int)strlen(point + 1) : 0, value);
	fl_text_printf(out, "%s%s %s\u00a0\u00b1\u00a0%s\u00a0%s", (*count)++ ? "; " : "", n->name, value, U,
	               fl_unit_text(n->unit));
}

static bool shows_numbers(const fl_finding *f) {
	return f->kind == FL_FINDING_CAUSE || f->kind == FL_FINDING_GROUP;
}

static void print_finding(const fl_finding *f, int columns, fl_text *out) {
	const char *strength = fl_cause_strength_word(f->strength);
	fl_text line = {0};
	fl_text_printf(&line, "%s%s%s%s", f->sentence, *strength ? " (" : "", strength, *strength ? ")" : "");
	fl_report_wrap(out, "  - ", line.data ? line.data : "", columns);
	if (*f->reason)
		fl_report_wrap(out, "    ", f->reason, columns);
	fl_text_clear(&line);
	int count = 0;
	for (size_t i = 0; shows_numbers(f) && i < f->number_count; i++)
		add_number(&f->numbers[i], &line, &count);
	if (count) {
		fl_text_add(&line, " (U, k\u00a0=\u00a02; each as if it were alone)");
		fl_report_wrap(out, "    ", line.data, columns);
	}
	if (*f->advice)
		fl_report_wrap(out, "    > ", f->advice, columns);
	out->failed |= line.failed;
	fl_text_free(&line);
}

static const char *proposal_word(fl_decision decision) {
	static const char *const words[] = {[FL_DECISION_NONE] = "find out first",
	                                    [FL_DECISION_ADJUST] = "adjust",
	                                    [FL_DECISION_LEAVE] = "leave",
	                                    [FL_DECISION_REPAIR] = "repair first"};
	return words[decision];
}

static void print_proposal(const fl_case *one, fl_run_kind run, int columns, fl_text *out) {
	fl_course proposal;
	fl_text line = {0};
	if (run != FL_RUN_AS_FOUND || !fl_cause_course(&one->causes[run], &one->result.runs[run], &proposal))
		return;
	fl_text_printf(&line, "Proposal: %s. %s", proposal_word(proposal.decision), proposal.reason);
	fl_report_wrap(out, "  ", line.data ? line.data : "", columns);
	out->failed |= line.failed;
	fl_text_free(&line);
}

static void print_run(const fl_case *one, fl_run_kind run, int columns, fl_text *out) {
	const fl_cause *cause = &one->causes[run];
	if (!cause->available && !cause->unavailable_reason)
		return;
	if (!cause->available) {
		fl_text_printf(out, "Why, %s\n", fl_run_word(run));
		fl_report_wrap(out, "  ", cause->unavailable_reason, columns);
		fl_text_add(out, "\n");
		return;
	}
	fl_text_printf(out, "Why, %s (opinion, no part of the result)\n", fl_run_word(run));
	for (size_t i = 0; i < cause->finding_count; i++)
		print_finding(&cause->findings[i], columns, out);
	print_proposal(one, run, columns, out);
	fl_text_add(out, "\n");
}

static bool is_all_well(const fl_case *one) {
	for (int run = 0; run < FL_RUN_KINDS; run++)
		if (one->result.runs[run].available && one->result.runs[run].verdict != FL_VERDICT_PASS)
			return false;
	return true;
}

void fl_report_why(const fl_case *one, int columns, fl_text *out) {
	if (!one->has_causes && !is_all_well(one))
		fl_report_wrap(out, "  Why             ", "foundleft assess --why says what may be the cause, and what to do",
		               columns < 60 ? 60 : columns);
	if (!one->has_causes)
		return;
	for (fl_run_kind run = FL_RUN_AS_FOUND; run < FL_RUN_KINDS; run++)
		print_run(one, run, columns < 60 ? 60 : columns, out);
}

/* ---- function checks ---- */

static const char *unit_of(const fl_case *one, const fl_function_check *check) {
	return fl_unit_text(check->kind == FL_CHECK_AMOUNT ? check->unit
	                                                   : fl_physics_dial_unit(one->instrument->scale.dial_unit));
}

static void add_limits(const fl_function_result *r, fl_text *line) {
	if (!isnan(r->expected))
		fl_text_printf(line, ", expected %.4g", r->expected);
	if (isfinite(r->low) && isfinite(r->high))
		fl_text_printf(line, ", limits %.4g to %.4g", r->low, r->high);
	else if (isfinite(r->high))
		fl_text_printf(line, ", at most %.4g", r->high);
	else if (isfinite(r->low))
		fl_text_printf(line, ", at least %.4g", r->low);
}

/* "in order: found 20.1 mm²/s, expected 20, limits 19 to 21; true viscosity 20.07 ± 0.18 mm²/s" */
static void add_outcome(const fl_case *one, const fl_function_result *r, fl_text *line) {
	const fl_check_answer *a = r->answer;
	const char *unit = unit_of(one, r->check);
	char value[FL_CELL_SIZE], U[FL_CELL_SIZE];
	fl_text_add(line, fl_function_word(r->state));
	if (a && a->reason)
		fl_text_printf(line, ": %s", a->reason);
	if (a && a->answer)
		fl_text_printf(line, ": found %s, expected yes", a->answer);
	if (!a || !a->typed)
		return;
	fl_text_printf(line, ": found %.4g %s", r->found, unit);
	add_limits(r, line);
	if (!r->has_true)
		return;
	fl_report_two_digits(r->true_U, U);
	const char *point = strchr(U, '.');
	fl_report_fixed(r->true_value, point ? (int)strlen(point + 1) : 0, value);
	fl_text_printf(line, "; true viscosity %s\u00a0\u00b1\u00a0%s\u00a0%s", value, U, unit);
}

void fl_report_functions(const fl_case *one, int columns, fl_text *out) {
	const fl_result *result = &one->result;
	fl_text line = {0};
	if (result->function_count == 0)
		return;
	fl_text_add(out, "Function checks\n");
	fl_report_rule(out, columns);
	for (size_t i = 0; i < result->function_count; i++) {
		fl_text_clear(&line);
		fl_text_printf(&line, "%s: ", result->functions[i].check->name);
		add_outcome(one, &result->functions[i], &line);
		fl_report_wrap(out, "  - ", line.data ? line.data : "", columns);
	}
	fl_text_add(out, "\n");
	out->failed |= line.failed;
	fl_text_free(&line);
}
