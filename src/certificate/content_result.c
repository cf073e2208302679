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

/* ---- statements ------------------------------------------------------------ */

static void state_limits(fl_writing *w, const fl_run_result *run) {
	const char *run_name = fl_writing_run_title(run->kind);
	const fl_result *result = w->result;
	if (run->hysteresis_exceeded)
		fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "%s hysteresis of %s %% of span exceeds its limit of %s %% of span.",
		              run_name, fl_word_number(w->sheet, 100 * run->hysteresis_span, 3),
		              fl_word_limit(w->sheet, 100 * result->hysteresis_limit_span));
	if (run->linearity_exceeded)
		fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "%s linearity (%s) exceeds its limit of %s %% of span.", run_name,
		              fl_procedure_linearity_word(result->deciding_linearity),
		              fl_word_limit(w->sheet, 100 * result->linearity_limit_span));
}

static void state_run(fl_writing *w, const fl_run_result *run) {
	fl_sheet *sheet = w->sheet;
	const char *title = fl_writing_run_title(run->kind);
	const fl_point_result *point = run->worst ? run->worst : run->largest_error;
	if (run->verdict != FL_VERDICT_NONE && point) {
		fl_sheet_addf(sheet, FL_BLOCK_STATEMENT, "%s: %s", title, fl_verdict_word(run->verdict));
		fl_sheet_addf(sheet, FL_BLOCK_TEXT, "Decided by %s: error %s, tolerance ±%s %% of span.", name_of(w, point),
		              error_with_u(w, point), fl_word_limit(sheet, 100 * point->tolerance_span));
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

/* ---- characteristics ------------------------------------------------------- */

typedef struct fl_runs_table {
	fl_writing *w;
	fl_block *block;
	const fl_run_result *runs[FL_RUN_KINDS];
	size_t count;
} fl_runs_table;

/* One characteristic of one run, % of span; `spread` NAN and `where` NULL if it has none. */
typedef struct fl_characteristic {
	double value, spread;
	const char *where;
	bool is_signed;
} fl_characteristic;
typedef fl_characteristic (*fl_characterise)(const fl_writing *w, const fl_run_result *run);

static fl_characteristic signed_value(double span, double u_span) {
	return (fl_characteristic){100 * span, 100 * u_span, NULL, true};
}

static fl_characteristic size_value(double span, const char *where) {
	return (fl_characteristic){100 * span, NAN, isnan(span) ? NULL : where, false};
}

static fl_characteristic stopped_zero(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return signed_value(run->stopped_zero_span, run->stopped_zero_u_span);
}

static fl_characteristic running_zero(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return signed_value(run->running_zero_span, run->running_zero_u_span);
}

static fl_characteristic line_zero(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return run->has_line ? signed_value(run->zero_error_span, sqrt(run->line.var_intercept)) : signed_value(NAN, NAN);
}

static fl_characteristic line_span(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return run->has_line ? signed_value(run->span_error_span, sqrt(run->line.var_slope)) : signed_value(NAN, NAN);
}

static fl_characteristic between_ends(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return signed_value(run->span_between_ends_span, NAN);
}

static fl_characteristic highest_error(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return signed_value(run->error_high_span, NAN);
}

static fl_characteristic lowest_error(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return signed_value(run->error_low_span, NAN);
}

static fl_characteristic independent(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return size_value(run->has_linearity ? run->independent.max_abs : NAN, NULL);
}

static fl_characteristic terminal(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return size_value(run->has_linearity ? run->terminal.max_abs : NAN, NULL);
}

static fl_characteristic zero_based(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return size_value(run->has_linearity ? run->zero_based.max_abs : NAN, NULL);
}

static fl_characteristic hysteresis(const fl_writing *w, const fl_run_result *run) {
	return size_value(run->hysteresis_span, fl_writing_point_name(w, run->hysteresis_point));
}

static fl_characteristic hysteresis_of_cycle(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return size_value(run->hysteresis_cycle_span, NULL);
}

static fl_characteristic repeatability(const fl_writing *w, const fl_run_result *run) {
	return size_value(run->repeatability_span,
	                  fl_sheet_printf(w->sheet, "%s, %s", fl_writing_point_name(w, run->repeatability_point),
	                                  fl_pass_word(run->repeatability_pass)));
}

static fl_characteristic deviation(const fl_writing *w, const fl_run_result *run) {
	(void)w;
	return size_value(run->repeatability_s_span, NULL);
}

static const struct {
	const char *what;
	fl_characterise of;
} characteristics[] = {
    {"stopped zero, ± U", stopped_zero},
    {"running zero, ± u", running_zero},
    {"zero error, least-squares line, ± u", line_zero},
    {"span error, least-squares line, ± u", line_span},
    {"error at the top less error at the zero", between_ends},
    {"highest error of a single reading", highest_error},
    {"lowest error of a single reading", lowest_error},
    {"linearity, independent", independent},
    {"linearity, terminal-based", terminal},
    {"linearity, zero-based", zero_based},
    {"hysteresis, mean of the cycles, largest", hysteresis},
    {"hysteresis within one cycle, largest", hysteresis_of_cycle},
    {"repeatability, range in one direction, largest", repeatability},
    {"standard deviation in one direction, largest", deviation},
};

/* To three decimals at most; a spread that would vanish there is rounded up to the last place. */
static void word_characteristic(fl_writing *w, fl_characteristic c, const char **cells) {
	fl_sheet *sheet = w->sheet;
	fl_stated_u stated = fl_word_state_u(c.spread);
	bool has_spread = isfinite(c.value) && stated.value > 0;
	int decimals = has_spread && stated.decimals < 3 ? stated.decimals : 3;
	cells[0] = c.is_signed ? fl_word_signed(sheet, c.value, decimals) : fl_word_number(sheet, c.value, decimals);
	cells[1] = !has_spread           ? ""
	           : stated.decimals > 3 ? fl_word_number(sheet, ceil(stated.value * 1000 - 1e-9) / 1000, 3)
	                                 : fl_word_number(sheet, stated.value, stated.decimals);
	cells[2] = c.where ? c.where : "";
}

static void write_characteristic(fl_runs_table *table, size_t row) {
	const char *cells[1 + 3 * FL_RUN_KINDS] = {characteristics[row].what};
	for (size_t i = 0; i < table->count; i++)
		word_characteristic(table->w, characteristics[row].of(table->w, table->runs[i]), &cells[1 + 3 * i]);
	fl_sheet_row(table->w->sheet, table->block, FL_ROW_PLAIN, cells);
}

static void write_not_determined(fl_runs_table *table) {
	for (size_t i = 0; i < table->count; i++)
		for (size_t s = 0; s < table->runs[i]->not_determined_count; s++)
			fl_sheet_addf(table->w->sheet, FL_BLOCK_SMALL, "%s: %s", fl_writing_run_title(table->runs[i]->kind),
			              fl_word_sentence(table->w->sheet, table->runs[i]->not_determined[s]));
}

void fl_write_characteristics(fl_writing *w) {
	fl_runs_table table = {.w = w};
	fl_column columns[1 + 3 * FL_RUN_KINDS] = {{"% of span", "", "", FL_ALIGN_LEFT, false}};
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		const fl_run_result *run = &w->result->runs[kind];
		if (!run->available || run->same_as_found)
			continue;
		const char *group = fl_run_word(run->kind);
		fl_column *next = &columns[1 + 3 * table.count];
		next[0] = (fl_column){"value", "", group, FL_ALIGN_DECIMAL, false};
		next[1] = (fl_column){"±", "", group, FL_ALIGN_DECIMAL, false};
		next[2] = (fl_column){"at", "", group, FL_ALIGN_LEFT, false};
		table.runs[table.count++] = run;
	}
	if (table.count == 0)
		return;
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Zero, span, linearity, hysteresis, repeatability");
	table.block = fl_sheet_add_table(w->sheet, columns, 1 + 3 * table.count);
	for (size_t row = 0; row < sizeof characteristics / sizeof *characteristics; row++)
		write_characteristic(&table, row);
	write_not_determined(&table);
}

/* ---- how to read it -------------------------------------------------------- */

static const char *tolerance_words(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	fl_band band = w->result->tolerance;
	const char *words = fl_word_band(sheet, band, w->dial_unit);
	if (band.basis == FL_BAND_PERCENT_SPAN && isfinite(w->dial_span))
		words = fl_sheet_printf(sheet, "%s (±%s %s)", words, fl_word_limit(sheet, band.half_width / 100 * w->dial_span),
		                        w->dial_unit);
	return words;
}

/* Tolerances that hold on a part of the scale. */
static void explain_zones(fl_writing *w) {
	fl_text list = {0};
	for (int i = 0; i < w->result->zone_count; i++) {
		const fl_zone *zone = &w->result->zones[i];
		fl_text_printf(&list, "%sfrom %s to %s %% of span %s", i ? "; " : "",
		               fl_word_plain(w->sheet, zone->from_pct_span, 3), fl_word_plain(w->sheet, zone->to_pct_span, 3),
		               fl_word_band(w->sheet, zone->band, w->dial_unit));
	}
	if (list.length > 0)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Zones of the scale, ends included:", "%s.", list.data);
	w->sheet->failed |= list.failed;
	fl_text_free(&list);
}

static void explain_tolerance(fl_writing *w) {
	if (w->result->tolerance.basis == FL_BAND_NONE) {
		fl_sheet_add(w->sheet, FL_BLOCK_TEXT,
		             "Tolerance. None is stated, neither for the instrument nor by the procedure.");
		return;
	}
	fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Tolerance.", "%s about the ideal output, stated %s.",
	                 tolerance_words(w),
	                 w->result->tolerance_from_instrument ? "for this instrument" : "by the procedure");
	explain_zones(w);
}

/* A probability in per cent. */
static const char *word_risk(fl_writing *w, double risk) {
	return 100 * risk < 0.01 ? "below 0.01 %"
	                         : fl_sheet_printf(w->sheet, "%s %%", fl_word_number(w->sheet, 100 * risk, 2));
}

static const char *word_global(fl_writing *w, const fl_point_result *point) {
	if (!point->has_global)
		return "";
	return fl_sheet_printf(w->sheet, "; global risk of a false acceptance there %s, of a false rejection %s",
	                       word_risk(w, point->global.consumer), word_risk(w, point->global.producer));
}

/* "as-found 99.86 % (T/U 5.6)" of the deciding point. */
static void list_risk(fl_writing *w, const fl_run_result *run, fl_text *list) {
	const fl_point_result *point = run->worst;
	if (!run->available || run->same_as_found || !point || !isfinite(point->tolerance_span) || !isfinite(point->sum.uc))
		return;
	fl_text_printf(list, "%s%s %s (T/U %s%s)", list->length ? ", " : "", fl_run_word(run->kind),
	               word_risk(w, point->risk), fl_word_number(w->sheet, point->tur, 1), word_global(w, point));
}

/* What a verdict may be wrong by. */
static void explain_risk(fl_writing *w) {
	fl_text list = {0};
	for (int kind = 0; kind < FL_RUN_KINDS && w->result->rule != FL_RULE_NONE; kind++)
		list_risk(w, &w->result->runs[kind], &list);
	if (list.length > 0)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Risk.",
		                 "Probability of a true error beyond the tolerance T at the deciding point (JCGM 106): "
		                 "%s.%s%s",
		                 list.data, w->result->prior_words ? " " : "",
		                 w->result->prior_words ? fl_word_sentence(w->sheet, w->result->prior_words) : "");
	w->sheet->failed |= list.failed;
	fl_text_free(&list);
}

/* The contribution of that rank, largest first; NULL if there are not so many. */
static const fl_budget_line *contribution(const fl_point_result *point, size_t rank) {
	for (size_t i = 0; i < point->budget_count; i++) {
		size_t larger = 0;
		for (size_t j = 0; j < point->budget_count; j++)
			larger += point->budget[j].contribution_span > point->budget[i].contribution_span ||
			          (point->budget[j].contribution_span == point->budget[i].contribution_span && j < i);
		if (larger == rank)
			return &point->budget[i];
	}
	return NULL;
}

/* What weighs most at the point that decides. */
static void explain_budget(fl_writing *w) {
	const fl_result *result = w->result;
	const fl_run_result *run =
	    &result->runs[result->runs[FL_RUN_AS_FOUND].available ? FL_RUN_AS_FOUND : FL_RUN_AS_LEFT];
	const fl_point_result *point = run->worst ? run->worst : run->largest_error;
	fl_text list = {0};
	for (size_t rank = 0; point && rank < 4; rank++) {
		const fl_budget_line *line = contribution(point, rank);
		if (line && line->contribution_span > 0)
			fl_text_printf(&list, "%s%s %s", rank ? ", " : "", line->name,
			               fl_word_u(w->sheet, 100 * line->contribution_span));
	}
	if (list.length > 0)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Budget.",
		                 "%zu contributions; the largest at %s %s, as standard uncertainties in %% of span: %s.",
		                 point->budget_count, fl_run_word(run->kind), name_of(w, point), list.data);
	w->sheet->failed |= list.failed;
	fl_text_free(&list);
}

/* What does not average out, and what it does to zero and span error. */
static void explain_shared(fl_writing *w) {
	fl_text list = {0};
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		const fl_run_result *run = &w->result->runs[kind];
		if (!run->available || run->same_as_found || !run->has_line || !(run->line_shared.var_slope > 0))
			continue;
		fl_text_printf(&list, "%s%s %s and %s", list.length ? ", " : "", fl_run_word(run->kind),
		               fl_word_u(w->sheet, 100 * sqrt(run->line_shared.var_intercept)),
		               fl_word_u(w->sheet, 100 * sqrt(run->line_shared.var_slope)));
	}
	if (list.length > 0 && w->result->correlation_words)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Shared by the points.",
		                 "Deviations of equipment%s do not average out; with them u of zero and span error, in %% of "
		                 "span: %s.",
		                 w->procedure->medium == FL_MEDIUM_OIL ? ", D341 and the oils' issuer" : "", list.data);
	w->sheet->failed |= list.failed;
	fl_text_free(&list);
}

/* What the dial means in the plant. */
static void explain_true_values(fl_writing *w) {
	const fl_run_result *left = &w->result->runs[FL_RUN_AS_LEFT];
	const fl_run_result *run = left->available ? left : &w->result->runs[FL_RUN_AS_FOUND];
	fl_text list = {0};
	for (size_t i = 0; run->available && i < run->true_value_count; i++) {
		const fl_true_value *v = &run->true_values[i];
		fl_text_printf(&list, "%s%s: dial %s, ", i ? "; " : "", v->name, fl_word_plain(w->sheet, v->shown, 3));
		if (!v->bounded)
			fl_text_add(&list, "true value not determined");
		else if (v->fieller)
			fl_text_printf(&list, "true value %s to %s (Fieller)", fl_word_number(w->sheet, v->low, 2),
			               fl_word_number(w->sheet, v->high, 2));
		else
			fl_text_printf(&list, "true value %s, U = %s (k = %s)",
			               fl_word_number(w->sheet, v->value, fl_word_state_u(v->U).decimals),
			               fl_word_u(w->sheet, v->U), fl_word_number(w->sheet, v->coverage_factor, 2));
	}
	if (list.length > 0)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "What the dial means.", "By the %s least-squares line, in %s: %s.",
		                 fl_run_word(run->kind), w->dial_unit, list.data);
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
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Capillary, from geometry and pump speed.",
		                 "Reynolds number at most %s; entrance length at most %s mm "
		                 "of %s mm; kinetic term at most %s %% of span; heating at most %s K.",
		                 fl_word_number(w->sheet, reynolds, 0), fl_word_number(w->sheet, entrance * 1e3, 1),
		                 fl_word_plain(w->sheet, w->instrument->capillary.length_m * 1e3, 1),
		                 fl_word_number(w->sheet, 100 * kinetic, 2), fl_word_number(w->sheet, heating, 3));
}

/* Stands with the outcome: what the verdict words mean here. */
static void explain_rule(fl_writing *w) {
	explain_tolerance(w);
	fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Decision rule.", "%s%s", fl_procedure_rule_words(w->result->rule),
	                 w->result->rule == FL_RULE_NONE
	                     ? ""
	                     : " It is applied to the error at every point of the tables; the run "
	                       "has the verdict of its worst point. Limits are inclusive.");
	if (w->result->below_tur)
		fl_sheet_add_led(w->sheet, FL_BLOCK_TEXT, "To be noted.", "%s",
		                 fl_word_sentence(w->sheet, w->result->below_tur));
}

void fl_write_meaning(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	const fl_result *result = w->result;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "What the numbers mean");
	fl_sheet_add_led(
	    sheet, FL_BLOCK_SMALL, "Error.",
	    "Output found less ideal output, over the output span of %s; positive where the instrument shows too "
	    "much. n is the number of readings in a mean.%s",
	    fl_physics_signal_range(w->instrument->scale.signal)->text,
	    w->procedure->medium == FL_MEDIUM_OIL && w->procedure->stopped_zero
	        ? " The zero is read with the pump stopped and the legs equalised."
	        : "");
	fl_sheet_add_led(
	    sheet, FL_BLOCK_SMALL, "Uncertainty.",
	    "U is the combined standard uncertainty u (JCGM 100) times the coverage factor k beside it, for a "
	    "coverage probability of %s %%. U is given to two significant digits and the error to the same place; "
	    "decisions are taken on unrounded numbers.",
	    fl_word_plain(sheet, 100 * result->coverage_probability, 2));
	explain_risk(w);
	explain_budget(w);
	explain_shared(w);
	explain_true_values(w);
	explain_capillary(w);
	for (size_t i = 0; i < result->warning_count; i++)
		fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "To be noted.", "%s", fl_word_sentence(sheet, result->warnings[i]));
}

/* No as-found is a gap, with its reason; never a number made up afterwards. */
static void state_missing(fl_writing *w, const fl_run_result *run) {
	fl_sheet_addf(w->sheet, FL_BLOCK_STATEMENT, "%s: not available", fl_writing_run_title(run->kind));
	fl_sheet_addf(w->sheet, FL_BLOCK_TEXT, "Reason: %s", fl_word_sentence(w->sheet, fl_writing_why_missing(w, run)));
}

void fl_write_statements(fl_writing *w) {
	const fl_run_result *found = &w->result->runs[FL_RUN_AS_FOUND], *left = &w->result->runs[FL_RUN_AS_LEFT];
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Outcome");
	if (found->available)
		state_run(w, found);
	else
		state_missing(w, found);
	state_decision(w);
	if (left->same_as_found)
		fl_sheet_add(w->sheet, FL_BLOCK_STATEMENT, "As-left = as-found");
	else if (left->available)
		state_run(w, left);
	explain_rule(w);
}
