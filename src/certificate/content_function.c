/* content_function.c - function checks: what was expected, what was found, within which limits.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

static const char *unit_of(const fl_writing *w, const fl_function_result *r) {
	return r->check->kind == FL_CHECK_INDICATION ? w->dial_unit : fl_unit_text(r->check->unit);
}

static const char *number(const fl_writing *w, double value) {
	return fl_word_plain(w->sheet, value, 2);
}

static const char *expected(const fl_writing *w, const fl_function_result *r) {
	if (r->check->kind == FL_CHECK_CONFIRM)
		return "yes";
	if (isnan(r->expected))
		return r->check->kind == FL_CHECK_INDICATION ? "not stated" : "";
	return fl_sheet_printf(w->sheet, "%s %s", number(w, r->expected), unit_of(w, r));
}

static const char *limits(const fl_writing *w, const fl_function_result *r) {
	bool low = isfinite(r->low), high = isfinite(r->high);
	if (low && high)
		return fl_sheet_printf(w->sheet, "%s to %s %s", number(w, r->low), number(w, r->high), unit_of(w, r));
	if (high)
		return fl_sheet_printf(w->sheet, "at most %s %s", number(w, r->high), unit_of(w, r));
	return low ? fl_sheet_printf(w->sheet, "at least %s %s", number(w, r->low), unit_of(w, r)) : "";
}

static const char *found(const fl_writing *w, const fl_function_result *r) {
	const fl_check_answer *a = r->answer;
	if (!a || a->reason)
		return "";
	if (a->answer)
		return a->answer;
	const char *typed = fl_sheet_printf(w->sheet, "%s %s", a->typed, fl_unit_text(a->unit));
	if (r->check->kind != FL_CHECK_INDICATION || strcmp(fl_unit_text(a->unit), w->dial_unit) == 0)
		return typed;
	return fl_sheet_printf(w->sheet, "%s (%s %s)", typed, number(w, r->found), w->dial_unit);
}

/* "17.9 ± 0.2 mm²/s", rounded by its uncertainty. */
static const char *true_value(const fl_writing *w, const fl_function_result *r) {
	if (!r->has_true)
		return "";
	fl_stated_u u = fl_word_state_u(r->true_U);
	return fl_sheet_printf(w->sheet, "%s ± %s %s", fl_word_number(w->sheet, r->true_value, u.decimals),
	                       fl_word_u(w->sheet, r->true_U), w->dial_unit);
}

static bool any_true(const fl_result *result) {
	for (size_t i = 0; i < result->function_count; i++)
		if (result->functions[i].has_true)
			return true;
	return false;
}

static const char *outcome(const fl_writing *w, const fl_function_result *r) {
	const char *word = fl_function_word(r->state);
	if (r->state != FL_FUNCTION_NOT_TRIED)
		return word;
	const char *reason = r->answer && r->answer->reason               ? r->answer->reason
	                     : w->session->decision == FL_DECISION_REPAIR ? "repair comes first"
	                                                                  : "not recorded";
	return fl_sheet_printf(w->sheet, "%s: %s", word, reason);
}

void fl_write_functions(fl_writing *w) {
	const fl_result *result = w->result;
	bool with_true = any_true(result);
	const fl_column columns[] = {
	    {"function", "", "", FL_ALIGN_LEFT, true}, {"expected", "", "", FL_ALIGN_LEFT, false},
	    {"limits", "", "", FL_ALIGN_LEFT, false},  {"found", "", "", FL_ALIGN_LEFT, false},
	    {"outcome", "", "", FL_ALIGN_LEFT, true},  {"true viscosity", "", "", FL_ALIGN_LEFT, false}};
	if (result->function_count == 0)
		return;
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Function checks");
	fl_block *table = fl_sheet_add_table(w->sheet, columns, with_true ? 6 : 5);
	for (size_t i = 0; i < result->function_count; i++) {
		const fl_function_result *r = &result->functions[i];
		const char *cells[] = {r->check->name, expected(w, r), limits(w, r),
		                       found(w, r),    outcome(w, r),  true_value(w, r)};
		fl_sheet_row(w->sheet, table, FL_ROW_PLAIN, cells);
	}
	if (with_true)
		fl_sheet_addf(w->sheet, FL_BLOCK_SMALL,
		              "True viscosity: the equivalent viscosity for which the instrument shows the value found, by the "
		              "straight line through its %s errors, with its expanded uncertainty.",
		              fl_run_word(result->functions_after));
}
