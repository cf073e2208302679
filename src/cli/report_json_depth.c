/* report_json_depth.c - what lies below the result, for programs: lines, bands, true values, explanations, trials.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report_json_depth.h"

#include <math.h>

#define PERCENT FL_JSON_PERCENT

/* ---- lines ------------------------------------------------------------------------------------------------------ */

static void write_general(fl_json *to, const fl_general_line *g, bool available) {
	fl_json_begin(to, "generalised_line", '{');
	fl_json_boolean(to, "computed", available && g->has);
	fl_json_word(to, "why", available ? g->why : NULL);
	fl_json_number(to, "uncertainty_ratio", available && g->ratio > 0.0 ? g->ratio : (double)NAN);
	if (available && g->has) {
		fl_json_percent(to, "intercept_pct_span", g->line.intercept);
		fl_json_percent(to, "slope_pct_span", g->line.slope);
		fl_json_percent(to, "u_intercept_pct_span", sqrt(g->line.var_intercept));
		fl_json_percent(to, "u_slope_pct_span", sqrt(g->line.var_slope));
		fl_json_number(to, "covariance_pct_span_squared", g->line.cov * PERCENT * PERCENT);
		fl_json_number(to, "chi_squared", g->line.sum_sq);
		fl_json_integer(to, "degrees_of_freedom", g->line.dof);
		fl_json_number(to, "probability", g->probability);
	}
	fl_json_end(to, '}');
}

static void write_pass(fl_json *to, const fl_pass_line *line, fl_pass pass) {
	if (!line->has)
		return;
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "direction", fl_pass_word(pass));
	fl_json_percent(to, "intercept_pct_span", line->line.intercept);
	fl_json_percent(to, "slope_pct_span", line->line.slope);
	if (line->has_lack) {
		fl_json_begin(to, "lack_of_fit", '{');
		fl_json_number(to, "f", line->lack.f);
		fl_json_integer(to, "degrees_of_freedom_lack", line->lack.dof_lack);
		fl_json_integer(to, "degrees_of_freedom_pure", line->lack.dof_pure);
		fl_json_number(to, "probability", line->lack.probability);
		fl_json_end(to, '}');
	} else {
		fl_json_null(to, "lack_of_fit");
	}
	fl_json_end(to, '}');
}

static void write_bands(fl_json *to, const fl_run_result *run, bool available) {
	fl_json_begin(to, "bands", '[');
	for (size_t i = 0; available && i < run->place_count; i++) {
		const fl_line_place *p = &run->places[i];
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "at", p->name);
		fl_json_percent(to, "position_pct_span", p->x);
		fl_json_percent(to, "error_pct_span", p->bands.y);
		fl_json_percent(to, "confidence_pct_span", p->bands.confidence);
		fl_json_percent(to, "simultaneous_pct_span", p->bands.simultaneous);
		fl_json_percent(to, "prediction_pct_span", p->bands.prediction);
		fl_json_percent(to, "standard_uncertainty_pct_span", p->u_shared);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

static void write_true_values(fl_json *to, const fl_run_result *run, bool available) {
	fl_json_begin(to, "true_values", '[');
	for (size_t i = 0; available && i < run->true_value_count; i++) {
		const fl_true_value *v = &run->true_values[i];
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "at", v->name);
		fl_json_number(to, "dial", v->shown);
		fl_json_number(to, "true_dial", v->value);
		fl_json_number(to, "standard_uncertainty_dial", v->u);
		fl_json_number(to, "expanded_uncertainty_dial", v->U);
		fl_json_number(to, "coverage_factor", v->coverage_factor);
		fl_json_number(to, "effective_degrees_of_freedom", v->dof);
		fl_json_number(to, "low_dial", v->low);
		fl_json_number(to, "high_dial", v->high);
		fl_json_number(to, "fieller_g", v->g);
		fl_json_boolean(to, "fieller", v->fieller);
		fl_json_boolean(to, "bounded", v->bounded);
		fl_json_boolean(to, "beyond_the_points", v->outside);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

static void write_covariance(fl_json *to, const fl_run_result *run, bool available) {
	size_t n = available && run->covariance ? run->combined_count : 0;
	fl_json_begin(to, "covariance_of_combined_pct_span_squared", '[');
	for (size_t i = 0; i < n; i++) {
		fl_json_begin(to, NULL, '[');
		for (size_t k = 0; k < n; k++)
			fl_json_number(to, NULL, run->covariance[i * n + k] * PERCENT * PERCENT);
		fl_json_end(to, ']');
	}
	fl_json_end(to, ']');
}

void fl_json_lines(fl_json *to, const fl_run_result *run) {
	bool available = run->available, line = available && run->has_line;
	fl_json_percent(to, "u_zero_error_with_budgets_pct_span",
	                line ? sqrt(run->line_shared.var_intercept) : (double)NAN);
	fl_json_percent(to, "u_span_error_with_budgets_pct_span", line ? sqrt(run->line_shared.var_slope) : (double)NAN);
	write_covariance(to, run, available);
	write_general(to, &run->general, available);
	fl_json_begin(to, "lines_by_direction", '[');
	for (fl_pass pass = FL_PASS_RISING; available && pass <= FL_PASS_FALLING; pass++)
		write_pass(to, &run->passes[pass], pass);
	fl_json_end(to, ']');
	write_bands(to, run, available);
	write_true_values(to, run, available);
}

/* ---- a point ---------------------------------------------------------------------------------------------------- */

static void write_zone(fl_json *to, const fl_zone *zone) {
	if (!zone) {
		fl_json_null(to, "tolerance_zone");
		return;
	}
	fl_json_begin(to, "tolerance_zone", '{');
	fl_json_number(to, "from_pct_span", zone->from_pct_span);
	fl_json_number(to, "to_pct_span", zone->to_pct_span);
	fl_json_end(to, '}');
}

void fl_json_risks(fl_json *to, const fl_point_result *point) {
	bool judged = !isnan(point->tolerance_span) && point->budget_count > 0;
	write_zone(to, point->zone);
	fl_json_number(to, "specific_risk", judged ? point->risk : (double)NAN);
	fl_json_percent(to, "acceptance_limit_pct_span", judged ? point->acceptance_span : (double)NAN);
	if (!point->has_global) {
		fl_json_null(to, "global_risk");
		return;
	}
	fl_json_begin(to, "global_risk", '{');
	fl_json_number(to, "false_acceptance", point->global.consumer);
	fl_json_number(to, "false_rejection", point->global.producer);
	fl_json_number(to, "out_of_tolerance_before", point->global.non_conforming);
	fl_json_number(to, "accepted", point->global.accepted);
	fl_json_percent(to, "prior_standard_deviation_pct_span", point->prior_u_span);
	fl_json_end(to, '}');
}

static void write_inputs(fl_json *to, const fl_explained *number) {
	fl_json_begin(to, "inputs", '[');
	for (size_t i = 0; i < number->input_count; i++) {
		const fl_explained_input *input = &number->inputs[i];
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "name", input->name);
		fl_json_number(to, "value", input->value);
		fl_json_word(to, "unit", input->unit);
		fl_json_number(to, "sensitivity", input->sensitivity);
		fl_json_word(to, "source", input->source);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

void fl_json_explained(fl_json *to, const fl_case *one, const fl_point_result *point) {
	const fl_explanation *found = NULL;
	for (size_t i = 0; i < one->beyond.explained_count; i++)
		if (one->beyond.explained[i].point == point)
			found = &one->beyond.explained[i];
	fl_json_begin(to, "explained", '[');
	for (size_t i = 0; found && i < found->count; i++) {
		const fl_explained *number = &found->numbers[i];
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "name", number->name);
		if (number->words)
			fl_json_string(to, "value", number->words);
		else
			fl_json_number(to, "value", number->value);
		fl_json_word(to, "unit", number->unit);
		fl_json_string(to, "formula", number->formula);
		fl_json_string(to, "source", number->source);
		write_inputs(to, number);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

/* ---- trials ----------------------------------------------------------------------------------------------------- */

static void write_tried(fl_json *to, const fl_tried *tried) {
	const fl_propagated *p = &tried->by_trials;
	fl_json_begin(to, NULL, '{');
	fl_json_word(to, "figure", tried->name);
	fl_json_word(to, "oil", tried->point ? tried->point->oil : NULL);
	fl_json_boolean(to, "stopped_zero", tried->point && tried->point->point == FL_POINT_ZERO);
	if (tried->point && tried->point->point != FL_POINT_ZERO)
		fl_json_integer(to, "point", tried->point->point + 1);
	else
		fl_json_null(to, "point");
	fl_json_string(to, "direction", tried->point && !tried->point->both ? fl_pass_word(tried->point->pass) : NULL);
	fl_json_percent(to, "mean_pct_span", p->mean);
	fl_json_percent(to, "standard_uncertainty_pct_span", p->u);
	fl_json_percent(to, "low_pct_span", p->low);
	fl_json_percent(to, "high_pct_span", p->high);
	fl_json_percent(to, "shortest_low_pct_span", p->shortest_low);
	fl_json_percent(to, "shortest_high_pct_span", p->shortest_high);
	fl_json_percent(to, "gum_value_pct_span", tried->value);
	fl_json_percent(to, "gum_expanded_uncertainty_pct_span", tried->expanded);
	if (tried->digits < 0)
		fl_json_null(to, "gum_holds_to_digits");
	else
		fl_json_integer(to, "gum_holds_to_digits", tried->digits);
	fl_json_end(to, '}');
}

void fl_json_trials(fl_json *to, const fl_case *one, const fl_run_result *run) {
	const fl_run_trials *t = &one->beyond.trials[run->kind];
	if (!t->has) {
		fl_json_null(to, "trials");
		return;
	}
	fl_json_begin(to, "trials", '{');
	fl_json_integer(to, "seed", (long long)t->trials.seed);
	fl_json_integer(to, "done", (long long)t->trials.done);
	fl_json_integer(to, "digits_asked", one->beyond.digits);
	fl_json_boolean(to, "stable", t->trials.stable);
	fl_json_string(to, "words", t->words);
	fl_json_string(to, "few_readings", t->normal_words);
	fl_json_begin(to, "values", '[');
	for (size_t i = 0; i < t->point_count; i++)
		write_tried(to, &t->points[i]);
	for (size_t i = 0; i < t->figure_count; i++)
		write_tried(to, &t->figures[i]);
	fl_json_end(to, ']');
	fl_json_end(to, '}');
}
