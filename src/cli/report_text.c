/* report_text.c - the assessment for people: what was decided first, then each run in tables, then the picture.
 * Errors and uncertainties are fractions of the span inside and percent of it here.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "report_parts.h"

#define PERCENT 100.0

/* What every part of the report needs. */
typedef struct report_page {
	const fl_case *one;
	int columns;
	fl_text *out;
} report_page;

/* ---- heading ---------------------------------------------------------------------------------------------------- */

static void fact(const report_page *page, const char *name, const char *format, ...) FL_PRINTF(3, 4);

/* "  Name           text", broken within the width. */
static void fact(const report_page *page, const char *name, const char *format, ...) {
	char text[1024], lead[FL_CELL_SIZE];
	va_list values;
	va_start(values, format);
	vsnprintf(text, sizeof text, format, values);
	va_end(values);
	int pad = 16 - fl_utf8_columns(name);
	snprintf(lead, sizeof lead, "  %s%*s", name, pad > 1 ? pad : 1, "");
	fl_report_wrap(page->out, lead, text, page->columns);
}

/* A list of sentences under a title; nothing if there are none. */
static void sentences(const report_page *page, const char *title, const char *const *list, size_t count) {
	if (count == 0)
		return;
	fl_text_printf(page->out, "%s\n", title);
	for (size_t i = 0; i < count; i++)
		fl_report_wrap(page->out, "  - ", list[i], page->columns);
	fl_text_add(page->out, "\n");
}

static void print_scale(const report_page *page) {
	const fl_scale *scale = &page->one->instrument->scale;
	const fl_signal_range *range = fl_physics_signal_range(scale->signal);
	const char *unit = fl_unit_text(fl_physics_dial_unit(scale->dial_unit));
	if (scale->dial_unit == FL_DIAL_MPA_S)
		fact(page, "Range", "%g to %g %s, signal %s", scale->low, scale->high, unit, range->text);
	else
		fact(page, "Range", "%g to %g %s at a dial density of %g kg/m\u00b3, signal %s", scale->low, scale->high, unit,
		     scale->dial_density_kg_m3, range->text);
}

static const char *source_words(fl_source source) {
	switch (source) {
	case FL_SOURCE_KEYBOARD:
		return "entered at the keyboard";
	case FL_SOURCE_REPLAY:
		return "replayed from a file of answers";
	case FL_SOURCE_IMPORT:
		return "imported from a file of readings";
	}
	return "";
}

static void print_title(const report_page *page) {
	const fl_instrument *instrument = page->one->instrument;
	char day[FL_DAY_SIZE], title[512];
	snprintf(title, sizeof title, "%s%s%s, calibrated %s", instrument->tag, instrument->serial[0] ? ", serial " : "",
	         instrument->serial, fl_day_format(page->one->session.day, day));
	fl_report_wrap(page->out, "", title, page->columns);
	fl_report_rule(page->out, page->columns);
}

/* Tolerances that hold on a part of the scale. */
static void print_zones(const report_page *page) {
	static const char *const of[] = {[FL_BAND_PERCENT_SPAN] = "% of span", [FL_BAND_PERCENT_READING] = "% of reading"};
	const fl_result *result = &page->one->result;
	const char *dial = fl_report_dial_short(page->one->instrument->scale.dial_unit);
	for (int i = 0; i < result->zone_count; i++) {
		const fl_zone *zone = &result->zones[i];
		fact(page, i == 0 ? "Zones" : "", "from %g to %g %% of span, ends included: \u00b1%g %s", zone->from_pct_span,
		     zone->to_pct_span, zone->band.half_width,
		     zone->band.basis == FL_BAND_DIAL_UNITS ? dial : of[zone->band.basis]);
	}
}

static void print_facts(const report_page *page) {
	const fl_case *one = page->one;
	const fl_instrument *instrument = one->instrument;
	if (instrument->site[0])
		fact(page, "Site", "%s%s%s", instrument->site, instrument->position[0] ? ", " : "", instrument->position);
	print_scale(page);
	fact(page, "Readings", "%s", source_words(one->session.source));
	fact(page, "Procedure", "%s (%s, version %s)", one->procedure.title, one->procedure.id, one->procedure.version);
	fact(page, "Rule", "%s", fl_procedure_rule_words(one->result.rule));
	print_zones(page);
	if (one->result.prior_words)
		fact(page, "Prior", "%s", one->result.prior_words);
	fact(page, "Journal", "digest %.16s\u2026%s", one->head,
	     one->torn             ? ", an unfinished last line was left out"
	     : one->session.closed ? ""
	                           : ", session not closed");
	fl_text_add(page->out, "\n");
}

static void print_traceability(const report_page *page) {
	const fl_result *result = &page->one->result;
	if (result->traceable)
		return;
	sentences(page, "INDICATIVE, NOT TRACEABLE", result->not_traceable, result->not_traceable_count);
	if (result->not_traceable_count == 0)
		fl_text_add(page->out, "INDICATIVE, NOT TRACEABLE\n\n");
}

/* ---- what was decided -------------------------------------------------------------------------------------------- */

static const char *pass_mark(fl_pass pass) {
	return pass == FL_PASS_RISING ? fl_report_marks_utf8.rising : fl_report_marks_utf8.falling;
}

/* "LK-50 rising". */
static void where_words(const fl_case *one, const fl_point_result *point, char out[FL_CELL_SIZE * 2]) {
	char name[FL_CELL_SIZE];
	fl_report_point_name(one, point->point, name);
	snprintf(out, FL_CELL_SIZE * 2, "%s %s", name, point->both ? "both ways" : fl_pass_word(point->pass));
}

static void worst_words(const fl_case *one, const fl_point_result *worst, char *out, size_t size) {
	char where[FL_CELL_SIZE * 2], error[FL_CELL_SIZE], expanded[FL_CELL_SIZE], tolerance[FL_CELL_SIZE];
	where_words(one, worst, where);
	fl_report_signed(worst->error_span * PERCENT, 2, error);
	fl_report_two_digits(worst->sum.expanded * PERCENT, expanded);
	fl_report_fixed(worst->tolerance_span * PERCENT, 2, tolerance);
	int used = snprintf(out, size, "worst at %s: %s\u00a0%% of span", where, error);
	if (used > 0 && (size_t)used < size && fl_report_has_budget(worst))
		used += snprintf(out + used, size - (size_t)used, ", U\u00a0%s (k\u00a0=\u00a0%.2f)", expanded,
		                 worst->sum.coverage_factor);
	if (used > 0 && (size_t)used < size && tolerance[0])
		snprintf(out + used, size - (size_t)used, ", tolerance\u00a0\u00b1%s", tolerance);
}

/* One run's decision in one or two sentences. */
static void print_decision(const report_page *page, const fl_run_result *run) {
	const char *title = fl_report_run_title(run->kind), *word = fl_verdict_word(run->verdict);
	char worst[512];
	if (!run->available) {
		fact(page, title, "not available: %s", run->unavailable_reason ? run->unavailable_reason : "not taken");
		return;
	}
	if (run->same_as_found) {
		fact(page, title, "left alone, so as-left is as-found%s%s", word[0] ? ": " : "", word);
		return;
	}
	worst[0] = '\0';
	if (run->worst)
		worst_words(page->one, run->worst, worst, sizeof worst);
	fact(page, title, "%s%s%s", word, word[0] && worst[0] ? "; " : "", worst);
	/* The reason of a verdict says the same numbers again; the reason for none is news. */
	if (run->verdict == FL_VERDICT_NONE && run->verdict_reason && run->verdict_reason[0])
		fact(page, "", "%s", run->verdict_reason);
}

static void print_decisions(const report_page *page) {
	const fl_session *session = &page->one->session;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		print_decision(page, &page->one->result.runs[kind]);
	if (session->decision != FL_DECISION_NONE)
		fact(page, "Decision", "%s%s%s", fl_decision_word(session->decision), session->decision_reason ? ": " : "",
		     session->decision_reason ? session->decision_reason : "");
	for (size_t i = 0; i < session->adjustment_count; i++) {
		const fl_adjustment *adjustment = &session->adjustments[i];
		if (!adjustment->undone)
			fact(page, "Adjusted", "%s, before %s, after %s", adjustment->item,
			     adjustment->before ? adjustment->before : "not noted",
			     adjustment->after ? adjustment->after : "not noted");
	}
	fl_text_add(page->out, "\n");
}

/* ---- tables of one run ------------------------------------------------------------------------------------------ */

static void put(fl_table *table, size_t row, int column, const char *text) {
	fl_report_fit(text, 24, fl_table_cell(table, row, column));
}

static void put_count(fl_table *table, size_t row, int column, size_t count) {
	snprintf(fl_table_cell(table, row, column), FL_CELL_SIZE, "%zu", count);
}

static void put_name(const report_page *page, fl_table *table, size_t row, int column, const fl_point_result *point) {
	fl_report_point_name(page->one, point->point, fl_table_cell(table, row, column));
}

static void put_way(fl_table *table, size_t row, int column, const fl_point_result *point) {
	if (!point->both)
		put(table, row, column, pass_mark(point->pass));
}

/* Viscosity in mm2/s (as mPa.s for a dial in mPa.s), with the places that suit the scale. */
static void put_viscosity(fl_table *table, size_t row, int column, double nu_m2_s) {
	double shown = nu_m2_s * 1e6;
	fl_report_fixed(shown, fl_report_places(shown), fl_table_cell(table, row, column));
}

/* U and k. */
static void put_expanded(fl_table *table, size_t row, int column, const fl_point_result *point) {
	if (!fl_report_has_budget(point))
		return;
	fl_report_two_digits(point->sum.expanded * PERCENT, fl_table_cell(table, row, column));
	fl_report_fixed(point->sum.coverage_factor, 2, fl_table_cell(table, row, column + 1));
}

/* Standard uncertainty, degrees of freedom, tolerance over U. */
static void put_standard(fl_table *table, size_t row, int column, const fl_point_result *point) {
	if (!fl_report_has_budget(point))
		return;
	fl_report_two_digits(point->sum.uc * PERCENT, fl_table_cell(table, row, column));
	if (point->sum.dof_effective > 9999.0)
		put(table, row, column + 1, "> 9999");
	else
		fl_report_fixed(floor(point->sum.dof_effective), 0, fl_table_cell(table, row, column + 1));
	fl_report_fixed(point->tur, 1, fl_table_cell(table, row, column + 2));
}

/* Specific and global risk; a risk too small to matter is not spelt out. */
static void put_risks(fl_table *table, size_t row, int column, const fl_point_result *point) {
	if (!fl_report_has_budget(point) || isnan(point->tolerance_span))
		return;
	if (point->risk * PERCENT < 0.001)
		put(table, row, column, "< 0.001");
	else
		fl_report_fixed(point->risk * PERCENT, 3, fl_table_cell(table, row, column));
	if (point->has_global)
		fl_report_fixed(point->global.consumer * PERCENT, 3, fl_table_cell(table, row, column + 1));
}

static int output_places(const fl_case *one) {
	return fl_physics_signal_range(one->instrument->scale.signal)->unit == FL_U_BAR ? 4 : 3;
}

/* The main table: what was found at each point in each direction. */
static void print_found(const report_page *page, const fl_run_result *run) {
	const fl_case *one = page->one;
	const char *signal = fl_unit_text(fl_physics_signal_range(one->instrument->scale.signal)->unit);
	bool oil = one->procedure.medium == FL_MEDIUM_OIL;
	const fl_table_column columns[] = {
	    {oil ? "oil" : "point", "", FL_ALIGN_LEFT, true},
	    {"", "", FL_ALIGN_LEFT, true},
	    {"n", "", FL_ALIGN_RIGHT, false},
	    {"T", "\u00b0C", FL_ALIGN_POINT, false},
	    {"dp", "mbar", FL_ALIGN_POINT, false},
	    {"equiv.", one->instrument->scale.dial_unit == FL_DIAL_MPA_S ? "mPa\u00b7s" : "mm\u00b2/s", FL_ALIGN_POINT,
	     false},
	    {"ideal", signal, FL_ALIGN_POINT, false},
	    {"found", signal, FL_ALIGN_POINT, false},
	    {"error", "% span", FL_ALIGN_POINT, false},
	    {"\u00b1U", "% span", FL_ALIGN_POINT, false},
	    {"k", "", FL_ALIGN_POINT, false},
	    {"tol.", "\u00b1%", FL_ALIGN_POINT, false},
	    {"verdict", "", FL_ALIGN_LEFT, false},
	};
	fl_table table;
	fl_table_begin(&table, columns, (int)(sizeof columns / sizeof *columns), run->point_count);
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_point_result *point = &run->points[i];
		put_name(page, &table, i, 0, point);
		put_way(&table, i, 1, point);
		put_count(&table, i, 2, point->n);
		fl_report_fixed(point->temp_c, 2, fl_table_cell(&table, i, 3));
		if (!oil && point->point != FL_POINT_ZERO)
			fl_report_fixed(point->applied_pa / 100.0, 3, fl_table_cell(&table, i, 4));
		put_viscosity(&table, i, 5, point->equivalent_m2_s);
		fl_report_fixed(point->ideal_output, output_places(one), fl_table_cell(&table, i, 6));
		fl_report_fixed(point->output, output_places(one), fl_table_cell(&table, i, 7));
		fl_report_signed(point->error_span * PERCENT, 2, fl_table_cell(&table, i, 8));
		put_expanded(&table, i, 9, point);
		fl_report_fixed(point->tolerance_span * PERCENT, 2, fl_table_cell(&table, i, 11));
		put(&table, i, 12, fl_verdict_word(point->verdict));
	}
	fl_table_end(&table, page->columns, page->out);
	fl_text_add(page->out, "\n");
}

/* The same errors said otherwise, and how the readings spread. */
static void print_spread(const report_page *page, const fl_run_result *run) {
	const char *dial = fl_report_dial_short(page->one->instrument->scale.dial_unit);
	const fl_table_column columns[] = {
	    {page->one->procedure.medium == FL_MEDIUM_OIL ? "oil" : "point", "", FL_ALIGN_LEFT, true},
	    {"", "", FL_ALIGN_LEFT, true},
	    {"dial", dial, FL_ALIGN_POINT, false},
	    {"error", dial, FL_ALIGN_POINT, false},
	    {"error", "% reading", FL_ALIGN_POINT, false},
	    {"s", "% span", FL_ALIGN_POINT, false},
	    {"range", "% span", FL_ALIGN_POINT, false},
	    {"u", "% span", FL_ALIGN_POINT, false},
	    {"dof", "", FL_ALIGN_RIGHT, false},
	    {"tol./U", "", FL_ALIGN_POINT, false},
	    {"risk", "%", FL_ALIGN_POINT, false},
	    {"global", "%", FL_ALIGN_POINT, false},
	};
	fl_table table;
	fl_table_begin(&table, columns, (int)(sizeof columns / sizeof *columns), run->point_count);
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_point_result *point = &run->points[i];
		put_name(page, &table, i, 0, point);
		put_way(&table, i, 1, point);
		fl_report_fixed(point->dial, 2, fl_table_cell(&table, i, 2));
		fl_report_signed(point->error_dial, 3, fl_table_cell(&table, i, 3));
		fl_report_signed(point->error_reading * PERCENT, 2, fl_table_cell(&table, i, 4));
		if (point->n > 1) {
			fl_report_two_digits(point->s_span * PERCENT, fl_table_cell(&table, i, 5));
			fl_report_two_digits(point->range_span * PERCENT, fl_table_cell(&table, i, 6));
		}
		put_standard(&table, i, 7, point);
		put_risks(&table, i, 10, point);
	}
	fl_table_end(&table, page->columns, page->out);
	fl_text_add(page->out, "\n");
}

static bool has_falling(const fl_run_result *run) {
	for (size_t i = 0; i < run->point_count; i++)
		if (!run->points[i].both && run->points[i].pass == FL_PASS_FALLING && run->points[i].point != FL_POINT_ZERO)
			return true;
	return false;
}

/* Both directions together, with the hysteresis between them. */
static void print_combined(const report_page *page, const fl_run_result *run) {
	const fl_table_column columns[] = {
	    {"both ways", "", FL_ALIGN_LEFT, true},     {"n", "", FL_ALIGN_RIGHT, false},
	    {"error", "% span", FL_ALIGN_POINT, false}, {"\u00b1U", "% span", FL_ALIGN_POINT, false},
	    {"k", "", FL_ALIGN_POINT, false},           {"\u25bc less \u25b2", "% span", FL_ALIGN_POINT, false},
	    {"verdict", "", FL_ALIGN_LEFT, false},
	};
	if (!has_falling(run) || run->combined_count == 0)
		return;
	fl_table table;
	fl_table_begin(&table, columns, (int)(sizeof columns / sizeof *columns), run->combined_count);
	for (size_t i = 0; i < run->combined_count; i++) {
		const fl_point_result *point = &run->combined[i];
		put_name(page, &table, i, 0, point);
		put_count(&table, i, 1, point->n);
		fl_report_signed(point->error_span * PERCENT, 2, fl_table_cell(&table, i, 2));
		put_expanded(&table, i, 3, point);
		if (run->hysteresis)
			fl_report_signed(run->hysteresis[i] * PERCENT, 2, fl_table_cell(&table, i, 5));
		put(&table, i, 6, fl_verdict_word(point->verdict));
	}
	fl_table_end(&table, page->columns, page->out);
	fl_text_add(page->out, "\n");
}

static void put_flow(fl_table *table, size_t row, int column, const fl_point_result *point) {
	if (!point->has_flow)
		return;
	const fl_flow *flow = &point->flow;
	fl_report_fixed(flow->reynolds, 1, fl_table_cell(table, row, column));
	fl_report_two_digits(flow->entrance_m * 1e3, fl_table_cell(table, row, column + 1));
	fl_report_two_digits(point->kinetic_span * PERCENT, fl_table_cell(table, row, column + 2));
}

/* The oils as they were in the bath, and what the capillary makes of them. */
static void print_oils(const report_page *page, const fl_run_result *run) {
	const fl_table_column columns[] = {
	    {"oil", "", FL_ALIGN_LEFT, true},
	    {"lot", "", FL_ALIGN_LEFT, false},
	    {"T", "\u00b0C", FL_ALIGN_POINT, false},
	    {"certified", "mm\u00b2/s", FL_ALIGN_POINT, false},
	    {"density", "kg/m\u00b3", FL_ALIGN_POINT, false},
	    {"dynamic", "mPa\u00b7s", FL_ALIGN_POINT, false},
	    {"Reynolds", "", FL_ALIGN_POINT, false},
	    {"entrance", "mm", FL_ALIGN_POINT, false},
	    {"kinetic", "% span", FL_ALIGN_POINT, false},
	};
	size_t rows = 0;
	for (size_t i = 0; i < run->combined_count; i++)
		rows += isnan(run->combined[i].certified_m2_s) ? 0 : 1;
	if (rows == 0)
		return;
	fl_table table;
	fl_table_begin(&table, columns, (int)(sizeof columns / sizeof *columns), rows);
	for (size_t i = 0, row = 0; i < run->combined_count; i++) {
		const fl_point_result *point = &run->combined[i];
		if (isnan(point->certified_m2_s))
			continue;
		put_name(page, &table, row, 0, point);
		put(&table, row, 1, point->lot);
		fl_report_fixed(point->temp_c, 2, fl_table_cell(&table, row, 2));
		put_viscosity(&table, row, 3, point->certified_m2_s);
		fl_report_fixed(point->rho_kg_m3, 1, fl_table_cell(&table, row, 4));
		put_viscosity(&table, row, 5, point->mu_pa_s * 1e-3);
		put_flow(&table, row, 6, point);
		row++;
	}
	fl_table_end(&table, page->columns, page->out);
	fl_text_add(page->out, "\n");
}

/* ---- zeroes, line, linearity, hysteresis, repeatability ------------------------------------------------------------
 */

static void print_zeroes(const report_page *page, const fl_run_result *run) {
	char value[FL_CELL_SIZE], u[FL_CELL_SIZE], second[FL_CELL_SIZE];
	if (!isnan(run->stopped_zero_span))
		fact(page, "Stopped zero", "%s, U %s", fl_report_signed(run->stopped_zero_span * PERCENT, 2, value),
		     fl_report_two_digits(run->stopped_zero_u_span * PERCENT, u));
	if (!isnan(run->running_zero_span))
		fact(page, "Running zero", "%s, u %s", fl_report_signed(run->running_zero_span * PERCENT, 2, value),
		     fl_report_two_digits(run->running_zero_u_span * PERCENT, u));
	if (!run->has_line)
		return;
	fact(page, "Zero error", "%s", fl_report_signed(run->zero_error_span * PERCENT, 2, value));
	fact(page, "Span error", "%s (between the ends as read %s)",
	     fl_report_signed(run->span_error_span * PERCENT, 2, value),
	     fl_report_signed(run->span_between_ends_span * PERCENT, 2, second));
}

static void print_line(const report_page *page, const fl_line *line) {
	char zero[FL_CELL_SIZE], span[FL_CELL_SIZE], u_zero[FL_CELL_SIZE], u_span[FL_CELL_SIZE], r[FL_CELL_SIZE];
	double u0 = sqrt(line->var_intercept), u1 = sqrt(line->var_slope);
	double correlation = u0 > 0.0 && u1 > 0.0 ? line->cov / (u0 * u1) : (double)NAN;
	fl_report_signed(correlation, 2, r);
	fact(page, "Least squares", "error = %s (u\u00a0%s) + x\u00a0\u00b7\u00a0%s (u\u00a0%s)%s%s, %d degrees of freedom",
	     fl_report_signed(line->intercept * PERCENT, 3, zero), fl_report_two_digits(u0 * PERCENT, u_zero),
	     fl_report_signed(line->slope * PERCENT, 3, span), fl_report_two_digits(u1 * PERCENT, u_span),
	     r[0] ? ", correlation " : "", r, line->dof);
}

static void print_linearity(const report_page *page, const fl_run_result *run) {
	const fl_result *result = &page->one->result;
	const fl_reference_line *lines[] = {&run->independent, &run->terminal, &run->zero_based};
	char text[512] = "", value[FL_CELL_SIZE];
	for (int i = 0; i < 3; i++) {
		size_t used = strlen(text);
		snprintf(text + used, sizeof text - used, "%s%s %s%s", i ? ", " : "",
		         fl_procedure_linearity_word((fl_linearity)i), fl_report_fixed(lines[i]->max_abs * PERCENT, 2, value),
		         result->deciding_linearity == (fl_linearity)i ? " (decides)" : "");
	}
	if (!isnan(result->linearity_limit_span)) {
		size_t used = strlen(text);
		snprintf(text + used, sizeof text - used, "; limit %s%s",
		         fl_report_fixed(result->linearity_limit_span * PERCENT, 2, value),
		         run->linearity_exceeded ? ", EXCEEDED" : "");
	}
	fact(page, "Linearity", "%s", text);
}

static void print_spreads(const report_page *page, const fl_run_result *run) {
	const fl_result *result = &page->one->result;
	char value[FL_CELL_SIZE], name[FL_CELL_SIZE], limit[FL_CELL_SIZE], s[FL_CELL_SIZE];
	if (!isnan(run->hysteresis_span)) {
		fl_report_fixed(result->hysteresis_limit_span * PERCENT, 2, limit);
		fl_report_fixed(run->hysteresis_cycle_span * PERCENT, 2, s);
		fact(page, "Hysteresis", "%s at %s%s%s%s%s%s", fl_report_fixed(run->hysteresis_span * PERCENT, 2, value),
		     fl_report_point_name(page->one, run->hysteresis_point, name), s[0] ? ", in a single cycle " : "", s,
		     limit[0] ? "; limit " : "", limit, run->hysteresis_exceeded ? ", EXCEEDED" : "");
	}
	if (!isnan(run->repeatability_span)) {
		fl_report_two_digits(run->repeatability_s_span * PERCENT, s);
		fact(page, "Repeatability", "%s at %s %s, range of %s%s%s",
		     fl_report_fixed(run->repeatability_span * PERCENT, 2, value),
		     fl_report_point_name(page->one, run->repeatability_point, name), fl_pass_word(run->repeatability_pass),
		     run->repeatability_of_cycles ? "the cycles' means" : "single readings",
		     s[0] ? "; largest standard deviation " : "", s);
	}
	if (!isnan(run->error_low_span) && !isnan(run->error_high_span))
		fact(page, "Single readings", "from %s to %s", fl_report_signed(run->error_low_span * PERCENT, 2, value),
		     fl_report_signed(run->error_high_span * PERCENT, 2, s));
}

static void print_figures(const report_page *page, const fl_run_result *run) {
	fl_text_printf(page->out, "The run as a whole, in %% of span\n");
	print_zeroes(page, run);
	if (run->has_line)
		print_line(page, &run->line);
	if (run->has_linearity)
		print_linearity(page, run);
	print_spreads(page, run);
	for (size_t i = 0; i < run->not_determined_count; i++)
		fl_report_wrap(page->out, i == 0 ? "  Not determined  " : "                  ", run->not_determined[i],
		               page->columns);
	fl_text_add(page->out, "\n");
}

/* ---- readings set aside -------------------------------------------------------------------------------------------
 */

static void print_struck_one(const report_page *page, const fl_reading *reading) {
	char name[FL_CELL_SIZE], text[512];
	fl_report_point_name(page->one, reading->point, name);
	int used = snprintf(text, sizeof text, "cycle %d %s, %s, reading %d: %s", reading->cycle,
	                    fl_pass_word(reading->pass), name, reading->number, reading->typed ? reading->typed : "");
	if (used > 0 && (size_t)used < sizeof text)
		snprintf(text + used, sizeof text - (size_t)used, " %s%s%s, struck by %s: %s", fl_unit_text(reading->unit),
		         reading->has_temp ? " at " : "", reading->has_temp && reading->temp_typed ? reading->temp_typed : "",
		         reading->struck_by ? reading->struck_by : "-", reading->struck_reason ? reading->struck_reason : "-");
	fl_report_wrap(page->out, "  \u00d7 ", text, page->columns);
}

static void print_struck(const report_page *page, fl_run_kind kind) {
	const fl_session *session = &page->one->session;
	bool any = false;
	for (size_t i = 0; i < session->reading_count; i++) {
		const fl_reading *reading = &session->readings[i];
		if (reading->run != kind || !reading->struck || reading->undone || reading->watched)
			continue;
		if (!any)
			fl_text_add(page->out, "Struck readings\n");
		any = true;
		print_struck_one(page, reading);
	}
	if (any)
		fl_text_add(page->out, "\n");
}

/* ---- the whole ----------------------------------------------------------------------------------------------------
 */

static bool any_floored(const fl_run_result *run) {
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].floored)
			return true;
	return false;
}

static void print_run(const report_page *page, const fl_run_result *run) {
	if (!run->available || run->same_as_found)
		return;
	fl_text_printf(page->out, "%s%s%s\n", fl_report_run_title(run->kind), run->verdict == FL_VERDICT_NONE ? "" : ": ",
	               fl_verdict_word(run->verdict));
	fl_report_rule(page->out, page->columns);
	print_found(page, run);
	print_combined(page, run);
	print_figures(page, run);
	print_spread(page, run);
	print_oils(page, run);
	fl_report_lines(page->one, run, page->columns, page->out);
	if (page->one->beyond.budgets)
		fl_report_budgets(page->one, run, page->columns, page->out);
	fl_report_trials(page->one, run, page->columns, page->out);
	if (any_floored(run)) {
		fl_report_wrap(page->out, "", "Where U was smaller than the reference's own, the reference's own stands.",
		               page->columns);
		fl_text_add(page->out, "\n");
	}
	print_struck(page, run->kind);
}

static void print_legend(const report_page *page) {
	fl_report_wrap(
	    page->out, "",
	    "\u25b2 rising, \u25bc falling. Errors are output less ideal output. U is the expanded uncertainty in "
	    "% of span, k its coverage factor; u a standard uncertainty; s the standard deviation of n readings; "
	    "dof the effective degrees of freedom of u; x the place on the scale, 0 to 1; risk the probability "
	    "that the true error is beyond the tolerance, global that an instrument is accepted beyond it. equiv. is the "
	    "equivalent viscosity, which a correct dial shows for the oil.",
	    page->columns);
	fl_text_add(page->out, "\n");
}

void fl_report_so_far(const fl_case *one, int columns, fl_text *out) {
	const report_page page = {one, columns < 60 ? 60 : columns, out};
	print_decision(&page, &one->result.runs[FL_RUN_AS_FOUND]);
	fl_text_add(out, "\n");
	fl_report_why(one, page.columns, out);
}

void fl_report_text(const fl_case *one, int columns, fl_text *out) {
	const report_page page = {one, columns < 60 ? 60 : columns, out};
	const fl_result *result = &one->result;
	print_title(&page);
	if (one->beyond.explain) {
		fl_report_explained(one, page.columns, out);
		return;
	}
	print_traceability(&page);
	print_decisions(&page);
	fl_report_why(one, page.columns, out);
	print_facts(&page);
	sentences(&page, "Warnings", result->warnings, result->warning_count);
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		print_run(&page, &result->runs[kind]);
	fl_report_functions(one, page.columns, out);
	if (result->runs[FL_RUN_AS_FOUND].available || result->runs[FL_RUN_AS_LEFT].available)
		print_legend(&page);
	fl_report_picture(one, page.columns, out);
}
