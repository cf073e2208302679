/* report_depth.c - what lies below the result, for people: lines and bands over the scale, the way from the dial to the
 * true value, budgets, one point explained, trials.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "report.h"
#include "report_parts.h"

#define PERCENT 100.0
#define WIDE 192

static void fact(fl_text *out, int columns, const char *name, const char *format, ...) FL_PRINTF(4, 5);

static void fact(fl_text *out, int columns, const char *name, const char *format, ...) {
	char text[1024], lead[FL_CELL_SIZE];
	va_list values;
	va_start(values, format);
	vsnprintf(text, sizeof text, format, values);
	va_end(values);
	int pad = 16 - fl_utf8_columns(name);
	snprintf(lead, sizeof lead, "  %s%*s", name, pad > 1 ? pad : 1, "");
	fl_report_wrap(out, lead, text, columns);
}

/* Up to six significant digits, U+2212 for minus. */
static char *plain(double value, char out[FL_CELL_SIZE]) {
	char text[40];
	out[0] = '\0';
	if (isnan(value))
		return out;
	snprintf(text, sizeof text, isinf(value) ? "" : "%.6g", fabs(value));
	snprintf(out, FL_CELL_SIZE, "%s%s", value < 0.0 ? "\u2212" : "", isinf(value) ? "\u221e" : text);
	return out;
}

/* "p = 0.012", "p < 0.0001". */
static char *probability_words(double p, char out[FL_CELL_SIZE]) {
	char number[FL_CELL_SIZE];
	if (p < 0.0001)
		return strcpy(out, "p\u00a0< 0.0001");
	snprintf(out, FL_CELL_SIZE, "p\u00a0=\u00a0%.40s", fl_report_two_digits(p, number));
	return out;
}

static void put(fl_table *table, size_t row, int column, const char *text, int columns) {
	fl_report_fit(text, columns, fl_table_cell(table, row, column));
}

static void put_dof(fl_table *table, size_t row, int column, double dof) {
	if (isinf(dof))
		put(table, row, column, "\u221e", 8);
	else
		fl_report_fixed(dof, 0, fl_table_cell(table, row, column));
}

/* ---- lines ------------------------------------------------------------------------------------------------------ */

static void print_shared_line(const fl_run_result *run, int columns, fl_text *out) {
	char u0[FL_CELL_SIZE], u1[FL_CELL_SIZE];
	fl_report_two_digits(sqrt(run->line_shared.var_intercept) * PERCENT, u0);
	fl_report_two_digits(sqrt(run->line_shared.var_slope) * PERCENT, u1);
	fact(out, columns, "With the budgets",
	     "u of the zero error %s, of the span error %s: what the points share included", u0, u1);
}

static void print_general(const fl_general_line *g, int columns, fl_text *out) {
	char zero[FL_CELL_SIZE], span[FL_CELL_SIZE], u0[FL_CELL_SIZE], u1[FL_CELL_SIZE], chi[FL_CELL_SIZE], p[FL_CELL_SIZE];
	if (!g->has) {
		fact(out, columns, "Generalised", "not computed: %s", g->why ? g->why : "");
		return;
	}
	fl_report_two_digits(sqrt(g->line.var_intercept) * PERCENT, u0);
	fl_report_two_digits(sqrt(g->line.var_slope) * PERCENT, u1);
	fact(
	    out, columns, "Generalised",
	    "error = %s (u\u00a0%s) + x\u00a0\u00b7\u00a0%s (u\u00a0%s), chi-squared %s with %d degrees of freedom (%s)%s; "
	    "computed because %s; it decides nothing: zero and span error are those of the least-squares line",
	    fl_report_signed(g->line.intercept * PERCENT, 3, zero), u0, fl_report_signed(g->line.slope * PERCENT, 3, span),
	    u1, fl_report_fixed(g->line.sum_sq, 1, chi), g->line.dof, probability_words(g->probability, p),
	    g->probability < 0.05 ? ": the errors miss a straight line by more than the points' own uncertainties allow; "
	                            "the kinetic term of a sound instrument can do that by itself"
	                          : "",
	    g->why ? g->why : "");
}

static void print_pass(const fl_run_result *run, fl_pass pass, int columns, fl_text *out) {
	const fl_pass_line *line = &run->passes[pass];
	char zero[FL_CELL_SIZE], span[FL_CELL_SIZE], f[FL_CELL_SIZE], p[FL_CELL_SIZE];
	if (!line->has)
		return;
	fl_report_signed(line->line.intercept * PERCENT, 3, zero);
	fl_report_signed(line->line.slope * PERCENT, 3, span);
	if (!line->has_lack) {
		fact(out, columns, pass == FL_PASS_RISING ? "Rising alone" : "Falling alone", "zero %s, span %s", zero, span);
		return;
	}
	fact(out, columns, pass == FL_PASS_RISING ? "Rising alone" : "Falling alone",
	     "zero %s, span %s; lack of fit against the scatter of repeated readings: F\u00a0=\u00a0%s with %d and %d "
	     "degrees "
	     "of freedom (%s): %s",
	     zero, span, fl_report_fixed(line->lack.f, 1, f), line->lack.dof_lack, line->lack.dof_pure,
	     probability_words(line->lack.probability, p),
	     line->lack.probability < 0.05 ? "more than scatter, a line is not the whole story" : "a line is enough");
}

static void print_bands(const fl_run_result *run, int columns, fl_text *out) {
	static const fl_table_column heads[] = {
	    {"line at", "", FL_ALIGN_LEFT, true},
	    {"x", "% span", FL_ALIGN_POINT, false},
	    {"error", "% span", FL_ALIGN_POINT, false},
	    {"\u00b1 line", "here", FL_ALIGN_POINT, false},
	    {"\u00b1 line", "anywhere", FL_ALIGN_POINT, false},
	    {"\u00b1 one", "reading", FL_ALIGN_POINT, false},
	    {"u by", "budgets", FL_ALIGN_POINT, false},
	};
	fl_table table;
	if (run->place_count == 0)
		return;
	fl_table_begin(&table, heads, (int)(sizeof heads / sizeof *heads), run->place_count);
	for (size_t i = 0; i < run->place_count; i++) {
		const fl_line_place *p = &run->places[i];
		put(&table, i, 0, p->name, 16);
		fl_report_fixed(p->x * PERCENT, 1, fl_table_cell(&table, i, 1));
		fl_report_signed(p->bands.y * PERCENT, 3, fl_table_cell(&table, i, 2));
		fl_report_fixed(p->bands.confidence * PERCENT, 3, fl_table_cell(&table, i, 3));
		fl_report_fixed(p->bands.simultaneous * PERCENT, 3, fl_table_cell(&table, i, 4));
		fl_report_fixed(p->bands.prediction * PERCENT, 3, fl_table_cell(&table, i, 5));
		fl_report_fixed(p->u_shared * PERCENT, 3, fl_table_cell(&table, i, 6));
	}
	fl_table_end(&table, columns, out);
	fl_text_add(out, "\n");
}

static void print_true_value(const fl_case *one, const fl_true_value *v, int columns, fl_text *out) {
	const char *unit = fl_report_dial_short(one->instrument->scale.dial_unit);
	char shown[FL_CELL_SIZE], value[FL_CELL_SIZE], U[FL_CELL_SIZE], low[FL_CELL_SIZE], high[FL_CELL_SIZE];
	char name[FL_CELL_SIZE];
	snprintf(name, sizeof name, "%c%s", v->name[0] - 'a' + 'A', v->name + 1);
	plain(v->shown, shown);
	fl_report_fixed(v->value, 2, value);
	if (!v->bounded) {
		fact(out, columns, name, "dial at %s %s: the readings do not determine the true value", shown, unit);
		return;
	}
	if (v->fieller)
		fact(out, columns, name, "dial at %s %s: true value %s, between %s and %s (Fieller: the slope is poor)%s",
		     shown, unit, value, fl_report_fixed(v->low, 2, low), fl_report_fixed(v->high, 2, high),
		     v->outside ? "; beyond the tested points" : "");
	else
		fact(out, columns, name, "dial at %s %s: true value %s, U %s (k\u00a0=\u00a0%.2f)%s", shown, unit, value,
		     fl_report_two_digits(v->U, U), v->coverage_factor, v->outside ? "; beyond the tested points" : "");
}

void fl_report_lines(const fl_case *one, const fl_run_result *run, int columns, fl_text *out) {
	if (!run->has_line || run->place_count == 0)
		return;
	fl_text_printf(out, "Lines and bands, in %% of span\n");
	print_shared_line(run, columns, out);
	print_general(&run->general, columns, out);
	print_pass(run, FL_PASS_RISING, columns, out);
	print_pass(run, FL_PASS_FALLING, columns, out);
	fl_text_add(out, "\n");
	print_bands(run, columns, out);
	if (run->true_value_count > 0)
		fl_text_add(out, "What the dial means, by the line\n");
	for (size_t i = 0; i < run->true_value_count; i++)
		print_true_value(one, &run->true_values[i], columns, out);
	if (run->true_value_count > 0)
		fl_text_add(out, "\n");
}

/* ---- budgets ---------------------------------------------------------------------------------------------------- */

static const char *distribution_short(fl_distribution distribution) {
	switch (distribution) {
	case FL_DIST_NORMAL:
		return "normal";
	case FL_DIST_RECTANGULAR:
		return "rect.";
	case FL_DIST_TRIANGULAR:
		return "triang.";
	case FL_DIST_STUDENT:
		return "t";
	}
	return "";
}

/* "0.05 K half width" as "±0.05 K": a table has little room. */
static void put_stated(fl_table *table, size_t row, const char *stated) {
	static const char half[] = " half width";
	char text[FL_CELL_SIZE];
	const char *at = strstr(stated, half);
	if (at)
		snprintf(text, sizeof text, "\u00b1%.*s%s", (int)(at - stated), stated, at + sizeof half - 1);
	else
		snprintf(text, sizeof text, "%s", stated);
	put(table, row, 1, text, 24);
}

static void put_line(fl_table *table, size_t row, const fl_budget_line *line) {
	put(table, row, 0, line->name, 30);
	put_stated(table, row, line->stated ? line->stated : "");
	put(table, row, 2, distribution_short(line->distribution), 8);
	fl_report_two_digits(line->u, fl_table_cell(table, row, 3));
	plain(round(line->sensitivity * 1e4) / 1e4, fl_table_cell(table, row, 4));
	fl_report_fixed(line->contribution_span * PERCENT, 4, fl_table_cell(table, row, 5));
	fl_report_fixed(line->share * PERCENT, 1, fl_table_cell(table, row, 6));
	put_dof(table, row, 7, line->dof);
}

static void put_sum(fl_table *table, size_t row, const fl_point_result *point) {
	char text[FL_CELL_SIZE], U[FL_CELL_SIZE];
	put(table, row, 0, "combined", 40);
	snprintf(text, sizeof text, "k = %.2f, U = %s%s", point->sum.coverage_factor,
	         fl_report_two_digits(point->sum.expanded * PERCENT, U), point->floored ? " (reference)" : "");
	put(table, row, 1, text, 40);
	fl_report_fixed(point->sum.uc * PERCENT, 4, fl_table_cell(table, row, 5));
	fl_report_fixed(100.0, 1, fl_table_cell(table, row, 6));
	if (point->sum.dof_effective > 9999.0)
		put(table, row, 7, "> 9999", 8);
	else
		put_dof(table, row, 7, floor(point->sum.dof_effective));
}

static void print_budget(const fl_case *one, const fl_point_result *point, int columns, fl_text *out) {
	static const fl_table_column heads[] = {
	    {"contribution", "", FL_ALIGN_LEFT, true}, {"stated", "", FL_ALIGN_LEFT, false},
	    {"distrib.", "", FL_ALIGN_LEFT, false},    {"u", "", FL_ALIGN_POINT, false},
	    {"c", "%/unit", FL_ALIGN_POINT, false},    {"c u", "%", FL_ALIGN_POINT, false},
	    {"share", "%", FL_ALIGN_POINT, false},     {"dof", "", FL_ALIGN_RIGHT, false},
	};
	char name[FL_CELL_SIZE];
	fl_report_point_name(one, point->point, name);
	fl_text_printf(out, "Budget of %s, %s\n", name,
	               point->both ? "rising and falling together" : fl_pass_word(point->pass));
	if (!fl_report_has_budget(point)) {
		fl_text_add(out, "  nothing stands in it: the uncertainty is not known\n\n");
		return;
	}
	fl_table table;
	fl_table_begin(&table, heads, (int)(sizeof heads / sizeof *heads), point->budget_count + 1);
	for (size_t i = 0; i < point->budget_count; i++)
		put_line(&table, i, &point->budget[i]);
	put_sum(&table, point->budget_count, point);
	fl_table_end(&table, columns, out);
	fl_text_add(out, "\n");
}

void fl_report_budgets(const fl_case *one, const fl_run_result *run, int columns, fl_text *out) {
	fl_report_wrap(out, "",
	               "Budgets: u is in the unit stated, c in % of span for one such unit, c u in % of span; share of the "
	               "combined variance.",
	               columns);
	for (size_t i = 0; i < run->combined_count; i++)
		print_budget(one, &run->combined[i], columns, out);
	if (one->result.correlation_words)
		fl_report_wrap(out, "", one->result.correlation_words, columns);
	fl_text_add(out, "\n");
}

/* ---- one point explained ---------------------------------------------------------------------------------------- */

static void print_input(const fl_explained_input *input, int columns, fl_text *out) {
	char value[FL_CELL_SIZE], sensitivity[FL_CELL_SIZE], text[512];
	int used = snprintf(text, sizeof text, "%s = %s%s%s", input->name, plain(input->value, value),
	                    input->unit[0] ? "\u00a0" : "", input->unit);
	if (used > 0 && (size_t)used < sizeof text && !isnan(input->sensitivity))
		used += snprintf(text + used, sizeof text - (size_t)used, ", sensitivity %s",
		                 plain(input->sensitivity, sensitivity));
	if (used > 0 && (size_t)used < sizeof text && input->source)
		snprintf(text + used, sizeof text - (size_t)used, " (%s)", input->source);
	fl_report_wrap(out, "      ", text, columns);
}

static void print_number(const fl_explained *number, int columns, fl_text *out) {
	char value[FL_CELL_SIZE];
	fl_text_printf(out, "  %s: %s%s%s\n", number->name, number->words ? number->words : plain(number->value, value),
	               number->unit[0] ? " " : "", number->unit);
	fl_report_wrap(out, "    by ", number->formula, columns);
	fl_report_wrap(out, "    source ", number->source, columns);
	for (size_t i = 0; i < number->input_count; i++)
		print_input(&number->inputs[i], columns, out);
}

static void print_line_sources(const fl_point_result *point, int columns, fl_text *out) {
	char text[512];
	fl_text_add(out, "Where the contributions come from\n");
	for (size_t i = 0; i < point->budget_count; i++) {
		const fl_budget_line *line = &point->budget[i];
		snprintf(text, sizeof text, "%s: %s; %s%s", line->name, line->source ? line->source : "",
		         line->rule ? line->rule : "", line->shared > 0.0 ? "; shared by the points" : "");
		fl_report_wrap(out, "  - ", text, columns);
	}
	fl_text_add(out, "\n");
}

static void print_explanation(const fl_case *one, const fl_explanation *e, int columns, fl_text *out) {
	char name[FL_CELL_SIZE];
	fl_report_point_name(one, e->point->point, name);
	fl_text_printf(out, "%s, %s, %s: every number\n", fl_report_run_title(e->run), name,
	               e->point->both ? "rising and falling together" : fl_pass_word(e->point->pass));
	fl_report_rule(out, columns);
	for (size_t i = 0; i < e->count; i++)
		print_number(&e->numbers[i], columns, out);
	fl_text_add(out, "\n");
	print_budget(one, e->point, columns, out);
	print_line_sources(e->point, columns, out);
}

void fl_report_explained(const fl_case *one, int columns, fl_text *out) {
	for (size_t i = 0; i < one->beyond.explained_count; i++)
		print_explanation(one, &one->beyond.explained[i], columns, out);
	if (one->result.correlation_words)
		fl_report_wrap(out, "", one->result.correlation_words, columns);
}

/* ---- trials ----------------------------------------------------------------------------------------------------- */

static void put_tried(const fl_case *one, fl_table *table, size_t row, const fl_tried *tried) {
	const fl_propagated *p = &tried->by_trials;
	if (tried->point) {
		fl_report_point_name(one, tried->point->point, fl_table_cell(table, row, 0));
		put(table, row, 1, tried->point->both ? "both" : fl_pass_word(tried->point->pass), 8);
	} else {
		put(table, row, 0, tried->name, 24);
	}
	fl_report_signed(p->mean * PERCENT, 4, fl_table_cell(table, row, 2));
	fl_report_fixed(p->u * PERCENT, 4, fl_table_cell(table, row, 3));
	fl_report_signed(p->low * PERCENT, 4, fl_table_cell(table, row, 4));
	fl_report_signed(p->high * PERCENT, 4, fl_table_cell(table, row, 5));
	fl_report_fixed((p->high - p->low) / 2.0 * PERCENT, 4, fl_table_cell(table, row, 6));
	fl_report_fixed(tried->expanded * PERCENT, 4, fl_table_cell(table, row, 7));
	if (tried->digits >= 0)
		put(table, row, 8, tried->digits == 2 ? "2" : tried->digits == 1 ? "1" : "no", 8);
}

void fl_report_trials(const fl_case *one, const fl_run_result *run, int columns, fl_text *out) {
	static const fl_table_column heads[] = {
	    {"by trials", "", FL_ALIGN_LEFT, true},    {"", "", FL_ALIGN_LEFT, true},
	    {"mean", "% span", FL_ALIGN_POINT, false}, {"u", "% span", FL_ALIGN_POINT, false},
	    {"from", "% span", FL_ALIGN_POINT, false}, {"to", "% span", FL_ALIGN_POINT, false},
	    {"half", "% span", FL_ALIGN_POINT, false}, {"U GUM", "% span", FL_ALIGN_POINT, false},
	    {"holds", "digits", FL_ALIGN_LEFT, false},
	};
	const fl_run_trials *t = &one->beyond.trials[run->kind];
	char words[WIDE * 2];
	if (!t->has)
		return;
	snprintf(words, sizeof words,
	         "%s by Monte Carlo (JCGM 101): %llu trials of the whole model, seed %llu, coverage %.4g %%%s",
	         fl_report_run_title(run->kind), (unsigned long long)t->trials.done, (unsigned long long)t->trials.seed,
	         one->result.coverage_probability * PERCENT,
	         one->beyond.digits == 0 ? ""
	         : t->trials.stable      ? "; two digits of every u are stable"
	                                 : "; TWO DIGITS DID NOT BECOME STABLE");
	fl_report_wrap(out, "", words, columns);
	fl_table table;
	fl_table_begin(&table, heads, (int)(sizeof heads / sizeof *heads), t->point_count + t->figure_count);
	for (size_t i = 0; i < t->point_count; i++)
		put_tried(one, &table, i, &t->points[i]);
	for (size_t i = 0; i < t->figure_count; i++)
		put_tried(one, &table, t->point_count + i, &t->figures[i]);
	fl_table_end(&table, columns, out);
	fl_report_wrap(out, "", t->words ? t->words : "", columns);
	if (t->normal_words)
		fl_report_wrap(out, "", t->normal_words, columns);
	fl_text_add(out, "\n");
}
