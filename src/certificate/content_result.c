/* content_result.c - the outcome in sentences, what characterises each run, and how to read the numbers.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

static const char *name_of(const fl_writing *w, const fl_point_result *point) {
	const char *direction = point->both ? "rising and falling together" : fl_pass_word(point->pass);
	return fl_sheet_printf(w->sheet, "%s, %s", fl_writing_point_name(w, point->point), direction);
}

/* "+2.54 % of span, U = 0.35 % of span (k = 2.00)" */
static const char *error_with_u(const fl_writing *w, const fl_point_result *point) {
	double U = 100 * point->sum.expanded;
	return fl_sheet_printf(w->sheet, "%s %% of span, U = %s %% of span (k = %s)",
	                       fl_word_error(w->sheet, 100 * point->error_span, U), fl_word_u(w->sheet, U),
	                       fl_word_number(w->sheet, point->sum.coverage_factor, 2));
}

/* ---- statements ----------------------------------------------------------------------------------------------------
 */

static void state_limits(fl_writing *w, const fl_run_result *run) {
	const char *run_name = fl_writing_run_title(run->kind);
	const fl_result *result = w->result;
	if (run->hysteresis_exceeded)
		fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "%s hysteresis of %s %% of span exceeds its limit of %s %% of span.",
		              run_name, fl_word_number(w->sheet, 100 * run->hysteresis_span, 3),
		              fl_word_plain(w->sheet, 100 * result->hysteresis_limit_span, 3));
	if (run->linearity_exceeded)
		fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "%s linearity (%s) exceeds its limit of %s %% of span.", run_name,
		              fl_procedure_linearity_word(result->deciding_linearity),
		              fl_word_plain(w->sheet, 100 * result->linearity_limit_span, 3));
}

static void state_run(fl_writing *w, const fl_run_result *run) {
	fl_sheet *sheet = w->sheet;
	const char *title = fl_writing_run_title(run->kind);
	const fl_point_result *point = run->worst ? run->worst : run->largest_error;
	if (run->verdict != FL_VERDICT_NONE && point) {
		fl_sheet_addf(sheet, FL_BLOCK_STATEMENT, "%s: %s", title, fl_verdict_word(run->verdict));
		fl_sheet_addf(sheet, FL_BLOCK_TEXT, "Decided by %s: error %s, tolerance ±%s %% of span.", name_of(w, point),
		              error_with_u(w, point), fl_word_plain(sheet, 100 * point->tolerance_span, 3));
	} else {
		fl_sheet_addf(sheet, FL_BLOCK_STATEMENT, "%s: %s", title,
		              w->result->rule == FL_RULE_NONE ? "no statement of conformity" : "no verdict");
		if (w->result->rule != FL_RULE_NONE && run->verdict_reason)
			fl_sheet_add(sheet, FL_BLOCK_TEXT, fl_word_sentence(sheet, run->verdict_reason));
		if (run->largest_error)
			fl_sheet_addf(sheet, FL_BLOCK_TEXT, "Largest error at %s: %s.", name_of(w, run->largest_error),
			              error_with_u(w, run->largest_error));
	}
	state_limits(w, run);
}

static void state_decision(fl_writing *w) {
	const fl_session *session = w->session;
	static const char *const done[] = {[FL_DECISION_NONE] = "",
	                                   [FL_DECISION_ADJUST] = "adjusted",
	                                   [FL_DECISION_LEAVE] = "left as found",
	                                   [FL_DECISION_REPAIR] = "repair first"};
	if (session->decision == FL_DECISION_NONE)
		return;
	const char *reason = fl_word_is_empty(session->decision_reason) ? "not stated" : session->decision_reason;
	fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "Decision: %s. Reason: %s%s%s%s", done[session->decision],
	              fl_word_sentence(w->sheet, reason), fl_word_is_empty(session->decision_by) ? "" : " Decided by ",
	              session->decision_by ? session->decision_by : "", fl_word_is_empty(session->decision_by) ? "" : ".");
}

void fl_write_statements(fl_writing *w) {
	const fl_run_result *found = &w->result->runs[FL_RUN_AS_FOUND], *left = &w->result->runs[FL_RUN_AS_LEFT];
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Outcome");
	if (found->available)
		state_run(w, found);
	else
		fl_sheet_add(w->sheet, FL_BLOCK_STATEMENT, "As-found: not available");
	state_decision(w);
	if (left->same_as_found)
		fl_sheet_add(w->sheet, FL_BLOCK_STATEMENT, "As-left = as-found");
	else if (left->available)
		state_run(w, left);
}

/* ---- characteristics
 * ------------------------------------------------------------------------------------------------- */

typedef struct fl_runs_table {
	fl_writing *w;
	fl_block *block;
	const fl_run_result *runs[FL_RUN_KINDS];
	size_t count;
} fl_runs_table;

static void add_row(fl_runs_table *table, const char *what, const char *const *values, const char *unit) {
	const char *cells[2 + FL_RUN_KINDS] = {what};
	for (size_t i = 0; i < table->count; i++)
		cells[1 + i] = values[i];
	cells[1 + table->count] = unit;
	fl_sheet_row(table->w->sheet, table->block, FL_ROW_PLAIN, cells);
}

/* A row of signed values in % of span, each with its uncertainty if it has one. */
static void add_signed(fl_runs_table *table, const char *what, const double *spans, const double *us) {
	const char *values[FL_RUN_KINDS];
	fl_sheet *sheet = table->w->sheet;
	for (size_t i = 0; i < table->count; i++)
		values[i] = us && isfinite(us[i]) && us[i] > 0
		                ? fl_sheet_printf(sheet, "%s ± %s", fl_word_error(sheet, 100 * spans[i], 100 * us[i]),
		                                  fl_word_u(sheet, 100 * us[i]))
		                : fl_word_signed(sheet, 100 * spans[i], 3);
	add_row(table, what, values, "% of span");
}

static void add_sizes(fl_runs_table *table, const char *what, const double *spans, const char *const *where) {
	const char *values[FL_RUN_KINDS];
	fl_sheet *sheet = table->w->sheet;
	for (size_t i = 0; i < table->count; i++)
		values[i] = where && *where[i]
		                ? fl_sheet_printf(sheet, "%s at %s", fl_word_number(sheet, 100 * spans[i], 3), where[i])
		                : fl_word_number(sheet, 100 * spans[i], 3);
	add_row(table, what, values, "% of span");
}

static void write_zeros(fl_runs_table *table) {
	double a[FL_RUN_KINDS], b[FL_RUN_KINDS];
#define EACH(what, value, u)                           \
	do {                                               \
		for (size_t i = 0; i < table->count; i++) {    \
			const fl_run_result *run = table->runs[i]; \
			a[i] = (value);                            \
			b[i] = (u);                                \
		}                                              \
		add_signed(table, what, a, b);                 \
	} while (0)
	EACH("stopped zero ± U", run->stopped_zero_span, run->stopped_zero_u_span);
	EACH("running zero ± u", run->running_zero_span, run->running_zero_u_span);
	EACH("zero error of the least-squares line ± u", run->has_line ? run->zero_error_span : NAN,
	     sqrt(run->line.var_intercept));
	EACH("span error of the least-squares line ± u", run->has_line ? run->span_error_span : NAN,
	     sqrt(run->line.var_slope));
	EACH("error at the top less error at the zero", run->span_between_ends_span, NAN);
	EACH("highest error of a single reading", run->error_high_span, NAN);
	EACH("lowest error of a single reading", run->error_low_span, NAN);
#undef EACH
}

static void write_linearity(fl_runs_table *table) {
	static const char *const names[] = {"linearity, independent", "linearity, terminal-based", "linearity, zero-based"};
	for (int line = 0; line < 3; line++) {
		double sizes[FL_RUN_KINDS];
		for (size_t i = 0; i < table->count; i++) {
			const fl_run_result *run = table->runs[i];
			const fl_reference_line *lines[] = {&run->independent, &run->terminal, &run->zero_based};
			sizes[i] = run->has_linearity ? lines[line]->max_abs : NAN;
		}
		add_sizes(table, names[line], sizes, NULL);
	}
}

static void write_hysteresis(fl_runs_table *table) {
	double sizes[FL_RUN_KINDS], cycles[FL_RUN_KINDS], ranges[FL_RUN_KINDS], deviations[FL_RUN_KINDS];
	const char *where[FL_RUN_KINDS], *range_where[FL_RUN_KINDS];
	bool of_cycles = true;
	for (size_t i = 0; i < table->count; i++) {
		const fl_run_result *run = table->runs[i];
		sizes[i] = run->hysteresis_span;
		where[i] = isnan(sizes[i]) ? "" : fl_writing_point_name(table->w, run->hysteresis_point);
		cycles[i] = run->hysteresis_cycle_span;
		ranges[i] = run->repeatability_span;
		deviations[i] = run->repeatability_s_span;
		range_where[i] = isnan(ranges[i]) ? ""
		                                  : fl_sheet_printf(table->w->sheet, "%s, %s",
		                                                    fl_writing_point_name(table->w, run->repeatability_point),
		                                                    fl_pass_word(run->repeatability_pass));
		of_cycles = of_cycles && run->repeatability_of_cycles;
	}
	add_sizes(table, "hysteresis, mean over the cycles, largest", sizes, where);
	add_sizes(table, "hysteresis within one cycle, largest", cycles, NULL);
	add_sizes(table,
	          of_cycles ? "repeatability, range of the cycles in one direction, largest"
	                    : "repeatability, range of the readings in one direction, largest",
	          ranges, range_where);
	add_sizes(table, "standard deviation in one direction, largest", deviations, NULL);
}

static void write_not_determined(fl_runs_table *table) {
	for (size_t i = 0; i < table->count; i++)
		for (size_t s = 0; s < table->runs[i]->not_determined_count; s++)
			fl_sheet_addf(table->w->sheet, FL_BLOCK_SMALL, "%s: %s", fl_writing_run_title(table->runs[i]->kind),
			              fl_word_sentence(table->w->sheet, table->runs[i]->not_determined[s]));
}

void fl_write_characteristics(fl_writing *w) {
	fl_runs_table table = {.w = w};
	fl_column columns[2 + FL_RUN_KINDS] = {{"", "", "", FL_ALIGN_LEFT, false}};
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		const fl_run_result *run = &w->result->runs[kind];
		if (!run->available || run->same_as_found)
			continue;
		table.runs[table.count++] = run;
		columns[table.count] = (fl_column){fl_run_word(run->kind), "", "", FL_ALIGN_DECIMAL, false};
	}
	if (table.count == 0)
		return;
	columns[table.count + 1] = (fl_column){"unit", "", "", FL_ALIGN_LEFT, false};
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Zero, span, linearity, hysteresis, repeatability");
	table.block = fl_sheet_add_table(w->sheet, columns, table.count + 2);
	write_zeros(&table);
	write_linearity(&table);
	write_hysteresis(&table);
	write_not_determined(&table);
}

/* ---- how to read it
 * ---------------------------------------------------------------------------------------------------- */

static const char *tolerance_words(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	fl_band band = w->result->tolerance;
	const char *words = fl_word_band(sheet, band, w->dial_unit);
	if (band.basis == FL_BAND_PERCENT_SPAN && isfinite(w->dial_span))
		words = fl_sheet_printf(sheet, "%s (±%s %s)", words,
		                        fl_word_plain(sheet, band.half_width / 100 * w->dial_span, 4), w->dial_unit);
	return words;
}

static void explain_tolerance(fl_writing *w) {
	if (w->result->tolerance.basis == FL_BAND_NONE) {
		fl_sheet_add(w->sheet, FL_BLOCK_TEXT,
		             "Tolerance. None is stated, neither for the instrument nor by the procedure.");
		return;
	}
	fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "Tolerance. %s about the ideal output, stated %s.", tolerance_words(w),
	              w->result->tolerance_from_instrument ? "for this instrument" : "by the procedure");
}

/* The contributions that the budget of the deciding point holds, once each. */
static void explain_budget(fl_writing *w) {
	const fl_run_result *run =
	    &w->result->runs[w->result->runs[FL_RUN_AS_FOUND].available ? FL_RUN_AS_FOUND : FL_RUN_AS_LEFT];
	const fl_point_result *point = run->worst ? run->worst : run->largest_error;
	if (!point || point->budget_count == 0)
		return;
	fl_text list = {0};
	for (size_t i = 0; i < point->budget_count; i++)
		fl_text_printf(&list, "%s%s", i ? "; " : "", point->budget[i].name);
	fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "Uncertainty budget (at %s): %s.", name_of(w, point),
	              list.data ? list.data : "");
	w->sheet->failed |= list.failed;
	fl_text_free(&list);
}

static void explain_capillary(fl_writing *w) {
	double reynolds = 0, entrance = 0, kinetic = 0, heating = 0;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		for (size_t i = 0; i < w->result->runs[kind].point_count; i++) {
			const fl_point_result *point = &w->result->runs[kind].points[i];
			if (!point->has_flow)
				continue;
			reynolds = fmax(reynolds, point->flow.reynolds);
			entrance = fmax(entrance, point->flow.entrance_m);
			kinetic = fmax(kinetic, point->kinetic_span);
			heating = fmax(heating, point->flow.heating_k);
		}
	if (reynolds > 0)
		fl_sheet_addf(
		    w->sheet, FL_BLOCK_TEXT,
		    "Capillary, from geometry and pump speed. Reynolds number at most %s; entrance length at most %s mm "
		    "of %s mm; kinetic term at most %s %% of span; heating at most %s K.",
		    fl_word_number(w->sheet, reynolds, 0), fl_word_number(w->sheet, entrance * 1e3, 1),
		    fl_word_plain(w->sheet, w->instrument->capillary.length_m * 1e3, 1),
		    fl_word_number(w->sheet, 100 * kinetic, 2), fl_word_number(w->sheet, heating, 3));
}

void fl_write_meaning(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	const fl_result *result = w->result;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "What the numbers mean");
	fl_sheet_addf(
	    sheet, FL_BLOCK_TEXT,
	    "Error. Output found less ideal output, over the output span of %s; positive where the instrument shows "
	    "too much. n is the number of readings in a mean. The zero is read with the pump stopped and the legs "
	    "equalised.",
	    fl_physics_signal_range(w->instrument->scale.signal)->text);
	fl_sheet_addf(
	    sheet, FL_BLOCK_TEXT,
	    "Uncertainty. U is the combined standard uncertainty u (JCGM 100) times the coverage factor k beside it, "
	    "for a coverage probability of %s %%. U is given to two significant digits and the error to the same "
	    "place; decisions are taken on unrounded numbers.",
	    fl_word_plain(sheet, 100 * result->coverage_probability, 2));
	explain_budget(w);
	explain_tolerance(w);
	fl_sheet_addf(
	    sheet, FL_BLOCK_TEXT, "Decision rule. %s%s", fl_procedure_rule_words(result->rule),
	    result->rule == FL_RULE_NONE
	        ? ""
	        : " It is applied to the error at every point of the tables; the run has the verdict of its worst.");
	explain_capillary(w);
	for (size_t i = 0; i < result->warning_count; i++)
		fl_sheet_addf(sheet, FL_BLOCK_ITEM, "To be noted: %s", fl_word_sentence(sheet, result->warnings[i]));
}
