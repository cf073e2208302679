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

void fl_report_why(const fl_case *one, int columns, fl_text *out) {
	for (fl_run_kind run = FL_RUN_AS_FOUND; run < FL_RUN_KINDS; run++)
		print_run(one, run, columns < 60 ? 60 : columns, out);
}

/* ---- function checks ---- */

static void put_amount(fl_table *table, size_t row, int column, double value) {
	fl_report_fixed(value, fl_report_places(value) - 1, fl_table_cell(table, row, column));
}

static void put_found(fl_table *table, size_t row, int column, const fl_function_result *r) {
	char *cell = fl_table_cell(table, row, column);
	if (r->answer && r->answer->answer)
		fl_report_fit(r->answer->answer, 10, cell);
	else if (!isnan(r->found))
		put_amount(table, row, column, r->found);
}

static void put_limits(fl_table *table, size_t row, int column, const fl_function_result *r) {
	char low[FL_CELL_SIZE], high[FL_CELL_SIZE];
	char *cell = fl_table_cell(table, row, column);
	fl_report_fixed(r->low, 1, low);
	fl_report_fixed(r->high, 1, high);
	if (isfinite(r->low) && isfinite(r->high))
		snprintf(cell, FL_CELL_SIZE, "%.40s to %.40s", low, high);
	else if (isfinite(r->high))
		snprintf(cell, FL_CELL_SIZE, "\u2264 %.40s", high);
	else if (isfinite(r->low))
		snprintf(cell, FL_CELL_SIZE, "\u2265 %.40s", low);
}

static void put_function(const fl_case *one, fl_table *table, size_t row, const fl_function_result *r) {
	const fl_function_check *check = r->check;
	fl_unit dial = fl_physics_dial_unit(one->instrument->scale.dial_unit);
	const char *unit =
	    check->kind == FL_CHECK_CONFIRM ? "" : fl_unit_text(check->kind == FL_CHECK_AMOUNT ? check->unit : dial);
	fl_report_fit(check->name, 28, fl_table_cell(table, row, 0));
	fl_report_fit(unit, 10, fl_table_cell(table, row, 1));
	if (check->kind == FL_CHECK_CONFIRM)
		snprintf(fl_table_cell(table, row, 2), FL_CELL_SIZE, "yes");
	else if (!isnan(r->expected))
		put_amount(table, row, 2, r->expected);
	put_limits(table, row, 3, r);
	put_found(table, row, 4, r);
	if (r->has_true) {
		fl_report_fixed(r->true_value, 2, fl_table_cell(table, row, 5));
		fl_report_two_digits(r->true_U, fl_table_cell(table, row, 6));
	}
	snprintf(fl_table_cell(table, row, 7), FL_CELL_SIZE, "%s", fl_function_word(r->state));
}

void fl_report_functions(const fl_case *one, int columns, fl_text *out) {
	static const fl_table_column heads[] = {
	    {"function", "", FL_ALIGN_LEFT, true},   {"", "", FL_ALIGN_LEFT, false},
	    {"expected", "", FL_ALIGN_RIGHT, false}, {"limits", "", FL_ALIGN_LEFT, false},
	    {"found", "", FL_ALIGN_RIGHT, false},    {"true", "viscosity", FL_ALIGN_POINT, false},
	    {"\u00b1U", "", FL_ALIGN_POINT, false},  {"outcome", "", FL_ALIGN_LEFT, false},
	};
	const fl_result *result = &one->result;
	fl_table table;
	if (result->function_count == 0)
		return;
	fl_text_add(out, "Function checks\n");
	fl_report_rule(out, columns);
	fl_table_begin(&table, heads, (int)(sizeof heads / sizeof heads[0]), result->function_count);
	for (size_t i = 0; i < result->function_count; i++)
		put_function(one, &table, i, &result->functions[i]);
	fl_table_end(&table, columns, out);
	for (size_t i = 0; i < result->function_count; i++) {
		const fl_function_result *r = &result->functions[i];
		char line[1024];
		if (!r->answer || !r->answer->reason)
			continue;
		snprintf(line, sizeof line, "%s not tried: %s", r->check->name, r->answer->reason);
		fl_report_wrap(out, "  ", line, columns);
	}
	fl_text_add(out, "\n");
}
