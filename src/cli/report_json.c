/* report_json.c - the result as one JSON object for programs; every key stands in docs/json.md.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Written directly, in one stable order.
 * What is not determined is null. The format number goes up when a key changes its meaning or goes.
 */
#include <math.h>

#include "json.h"
#include "report.h"
#include "report_json_depth.h"
#include "report_parts.h"
#include "report_why_json.h"

#define FORMAT "foundleft-assessment-1"
#define PERCENT FL_JSON_PERCENT

/* ---- the instrument, the session, the procedure ------------------------------------------------------------------ */

static void write_unit(fl_json *to, const fl_case *one) {
	const fl_instrument *instrument = one->instrument;
	const fl_scale *scale = &instrument->scale;
	const fl_signal_range *signal = fl_physics_signal_range(scale->signal);
	fl_json_begin(to, "unit", '{');
	fl_json_string(to, "tag", instrument->tag);
	fl_json_word(to, "serial", instrument->serial);
	fl_json_word(to, "site", instrument->site);
	fl_json_word(to, "owner", instrument->owner);
	fl_json_word(to, "position", instrument->position);
	fl_json_word(to, "maker_plate", instrument->maker_plate);
	fl_json_string(to, "dial_unit", fl_unit_text(fl_physics_dial_unit(scale->dial_unit)));
	fl_json_number(to, "dial_low", scale->low);
	fl_json_number(to, "dial_high", scale->high);
	fl_json_number(to, "dial_density_kg_m3",
	               scale->dial_unit == FL_DIAL_MPA_S ? (double)NAN : scale->dial_density_kg_m3);
	fl_json_number(to, "saybolt_temp_c", scale->dial_unit == FL_DIAL_SAYBOLT ? scale->saybolt_temp_c : (double)NAN);
	fl_json_string(to, "signal", signal->text);
	fl_json_string(to, "output_unit", fl_unit_text(signal->unit));
	fl_json_number(to, "output_low", signal->low);
	fl_json_number(to, "output_high", signal->high);
	fl_json_number(to, "full_scale_dp_pa", one->result.dp_full_pa);
	fl_json_end(to, '}');
}

static void write_session(fl_json *to, const fl_case *one) {
	const fl_session *session = &one->session;
	fl_json_begin(to, "session", '{');
	fl_json_day(to, "day", session->day);
	fl_json_string(to, "source", fl_source_word(session->source));
	fl_json_boolean(to, "declared_clock", session->declared_clock);
	fl_json_utc(to, "opened_at", session->opened_at);
	fl_json_boolean(to, "closed", session->closed);
	fl_json_word(to, "closed_by", session->closed_by);
	fl_json_string(to, "journal", one->path);
	fl_json_string(to, "journal_digest", one->head);
	fl_json_boolean(to, "journal_torn", one->torn);
	fl_json_word(to, "begun_with", session->program);
	fl_json_integer(to, "questions_confirmed", session->questions);
	fl_json_string(to, "decision", session->decision == FL_DECISION_NONE ? NULL : fl_decision_word(session->decision));
	fl_json_word(to, "decision_reason", session->decision_reason);
	fl_json_word(to, "decision_by", session->decision_by);
	fl_json_begin(to, "adjustments", '[');
	for (size_t i = 0; i < session->adjustment_count; i++) {
		const fl_adjustment *adjustment = &session->adjustments[i];
		if (adjustment->undone)
			continue;
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "item", adjustment->item);
		fl_json_string(to, "before", adjustment->before);
		fl_json_string(to, "after", adjustment->after);
		fl_json_utc(to, "at", adjustment->at);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
	fl_report_measurements_json(to, session);
	fl_json_begin(to, "remarks", '[');
	for (size_t i = 0; i < session->remark_count; i++)
		fl_json_string(to, NULL, session->remarks[i].typed);
	fl_json_end(to, ']');
	fl_json_end(to, '}');
}

static void write_procedure(fl_json *to, const fl_procedure *procedure) {
	fl_json_begin(to, "procedure", '{');
	fl_json_string(to, "id", procedure->id);
	fl_json_string(to, "version", procedure->version);
	fl_json_string(to, "title", procedure->title);
	fl_json_string(to, "medium", procedure->medium == FL_MEDIUM_OIL ? "oil" : "pressure");
	fl_json_integer(to, "points", procedure->point_count);
	fl_json_integer(to, "cycles", procedure->cycles);
	fl_json_boolean(to, "falling", procedure->falling);
	fl_json_integer(to, "readings", procedure->readings);
	fl_json_end(to, '}');
}

static const char *rule_word(fl_rule rule) {
	switch (rule) {
	case FL_RULE_NONE:
		return NULL;
	case FL_RULE_SIMPLE:
		return "simple";
	case FL_RULE_GUARDED:
		return "guarded";
	case FL_RULE_FOUR_STATES:
		return "four-states";
	}
	return NULL;
}

static void write_band(fl_json *to, const char *name, const fl_band *band) {
	static const char *const bases[] = {[FL_BAND_PERCENT_SPAN] = "percent_span",
	                                    [FL_BAND_PERCENT_READING] = "percent_reading",
	                                    [FL_BAND_DIAL_UNITS] = "dial_units"};
	if (band->basis == FL_BAND_NONE) {
		fl_json_null(to, name);
		return;
	}
	fl_json_begin(to, name, '{');
	fl_json_string(to, "basis", bases[band->basis]);
	fl_json_number(to, "half_width", band->half_width);
	fl_json_end(to, '}');
}

static void write_zones(fl_json *to, const fl_result *result) {
	fl_json_begin(to, "tolerance_zones", '[');
	for (int i = 0; i < result->zone_count; i++) {
		fl_json_begin(to, NULL, '{');
		fl_json_number(to, "from_pct_span", result->zones[i].from_pct_span);
		fl_json_number(to, "to_pct_span", result->zones[i].to_pct_span);
		write_band(to, "band", &result->zones[i].band);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

static void write_terms(fl_json *to, const fl_result *result) {
	fl_json_string(to, "rule", rule_word(result->rule));
	fl_json_string(to, "rule_words", fl_procedure_rule_words(result->rule));
	write_band(to, "tolerance", &result->tolerance);
	fl_json_string(to, "tolerance_from",
	               result->tolerance.basis == FL_BAND_NONE ? NULL
	               : result->tolerance_from_instrument     ? "instrument"
	                                                       : "procedure");
	write_zones(to, result);
	fl_json_number(to, "minimum_tolerance_to_uncertainty", result->minimum_tur);
	fl_json_word(to, "conformity_below_minimum", result->below_tur);
	fl_json_number(to, "in_tolerance_reliability", result->reliability > 0.0 ? result->reliability : (double)NAN);
	fl_json_word(to, "in_tolerance_reliability_of",
	             !(result->reliability > 0.0)   ? NULL
	             : result->reliability_observed ? "observed values"
	                                            : "true values");
	fl_json_word(to, "correlation_words", result->correlation_words);
	fl_json_percent(to, "hysteresis_limit_pct_span", result->hysteresis_limit_span);
	fl_json_percent(to, "linearity_limit_pct_span", result->linearity_limit_span);
	fl_json_string(to, "deciding_linearity", fl_procedure_linearity_word(result->deciding_linearity));
	fl_json_number(to, "coverage_probability", result->coverage_probability);
	fl_json_boolean(to, "traceable", result->traceable);
	fl_json_strings(to, "not_traceable", result->not_traceable, result->not_traceable_count);
	fl_json_strings(to, "warnings", result->warnings, result->warning_count);
}

/* Number of a point from 1, null where `determined` is false or it is the stopped zero. */
static void point_number(fl_json *to, const char *name, bool determined, int point) {
	if (!determined || point == FL_POINT_ZERO)
		fl_json_null(to, name);
	else
		fl_json_integer(to, name, point + 1);
}

static void write_place(fl_json *to, int point) {
	fl_json_boolean(to, "stopped_zero", point == FL_POINT_ZERO);
	point_number(to, "point", true, point);
}

/* ---- points --------------------------------------------------------------------------------------------------------
 */

static const char *distribution_word(fl_distribution distribution) {
	switch (distribution) {
	case FL_DIST_NORMAL:
		return "normal";
	case FL_DIST_RECTANGULAR:
		return "rectangular";
	case FL_DIST_TRIANGULAR:
		return "triangular";
	case FL_DIST_STUDENT:
		return "student";
	}
	return NULL;
}

static void write_budget(fl_json *to, const fl_point_result *point) {
	fl_json_begin(to, "budget", '[');
	for (size_t i = 0; i < point->budget_count; i++) {
		const fl_budget_line *line = &point->budget[i];
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "name", line->name);
		fl_json_string(to, "stated", line->stated);
		fl_json_string(to, "distribution", distribution_word(line->distribution));
		fl_json_number(to, "standard_uncertainty", line->u);
		fl_json_string(to, "unit", line->unit);
		fl_json_number(to, "sensitivity_pct_span_per_unit", line->sensitivity);
		fl_json_percent(to, "contribution_pct_span", line->contribution_span);
		fl_json_number(to, "degrees_of_freedom", line->dof);
		fl_json_number(to, "share", line->share);
		fl_json_word(to, "source", line->source);
		fl_json_word(to, "rule", line->rule);
		fl_json_word(to, "shared_as", line->shared > 0.0 ? line->key : NULL);
		fl_json_number(to, "correlation", line->shared);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

static void write_flow(fl_json *to, const fl_point_result *point) {
	if (!point->has_flow) {
		fl_json_null(to, "flow");
		return;
	}
	const fl_flow *flow = &point->flow;
	fl_json_begin(to, "flow", '{');
	fl_json_number(to, "reynolds", flow->reynolds);
	fl_json_number(to, "entrance_m", flow->entrance_m);
	fl_json_number(to, "velocity_m_s", flow->velocity_m_s);
	fl_json_number(to, "flow_m3_s", flow->flow_m3_s);
	fl_json_number(to, "dp_total_pa", flow->dp_total_pa);
	fl_json_number(to, "dp_end_pa", flow->dp_end_pa);
	fl_json_number(to, "dp_kinetic_pa", flow->dp_kinetic_pa);
	fl_json_percent(to, "kinetic_pct_span", point->kinetic_span);
	fl_json_number(to, "wall_shear_per_s", flow->wall_shear_per_s);
	fl_json_number(to, "heating_k", flow->heating_k);
	fl_json_end(to, '}');
}

/* What was applied and what the instrument made of it. */
static void write_point_values(fl_json *to, const fl_case *one, const fl_point_result *point) {
	const fl_signal_range *signal = fl_physics_signal_range(one->instrument->scale.signal);
	fl_json_integer(to, "n", (long long)point->n);
	fl_json_number(to, "temp_c", point->temp_c);
	fl_json_number(to, "certified_mm2_s", point->certified_m2_s * 1e6);
	fl_json_number(to, "density_kg_m3", point->rho_kg_m3);
	fl_json_number(to, "dynamic_mpa_s", point->mu_pa_s * 1e3);
	fl_json_number(to, "applied_pa", point->applied_pa);
	fl_json_number(to, "equivalent_mm2_s", point->equivalent_m2_s * 1e6);
	fl_json_number(to, "ideal_dial", point->dial);
	fl_json_percent(to, "position_pct_span", point->x);
	fl_json_number(to, "ideal_ma", signal->unit == FL_U_MA ? point->ideal_output : (double)NAN);
	fl_json_number(to, "ideal_output", point->ideal_output);
	fl_json_number(to, "found_output", point->output);
	fl_json_string(to, "output_unit", fl_unit_text(signal->unit));
}

static void write_point_errors(fl_json *to, const fl_point_result *point) {
	bool several = point->n > 1;
	fl_json_percent(to, "error_pct_span", point->error_span);
	fl_json_number(to, "error_dial", point->error_dial);
	fl_json_percent(to, "error_pct_reading", point->error_reading);
	fl_json_percent(to, "standard_deviation_pct_span", several ? point->s_span : (double)NAN);
	fl_json_percent(to, "range_pct_span", several ? point->range_span : (double)NAN);
	/* Without a budget these are not zero but unknown. */
	double known = fl_report_has_budget(point) ? 1.0 : (double)NAN;
	fl_json_percent(to, "standard_uncertainty_pct_span", known * point->sum.uc);
	fl_json_percent(to, "expanded_uncertainty_pct_span", known * point->sum.expanded);
	fl_json_number(to, "coverage_factor", known * point->sum.coverage_factor);
	fl_json_number(to, "effective_degrees_of_freedom", known * point->sum.dof_effective);
	fl_json_boolean(to, "raised_to_reference", point->floored);
	fl_json_percent(to, "tolerance_pct_span", point->tolerance_span);
	fl_json_number(to, "tolerance_to_uncertainty", known * point->tur);
	fl_json_word(to, "verdict", fl_verdict_word(point->verdict));
	fl_json_risks(to, point);
	write_budget(to, point);
}

static void write_point(fl_json *to, const fl_case *one, const fl_point_result *point, double hysteresis) {
	fl_json_begin(to, NULL, '{');
	fl_json_word(to, "oil", point->oil);
	fl_json_word(to, "lot", point->lot);
	fl_json_string(to, "direction", point->both ? NULL : fl_pass_word(point->pass));
	write_place(to, point->point);
	write_point_values(to, one, point);
	write_point_errors(to, point);
	if (point->both)
		fl_json_percent(to, "hysteresis_pct_span", hysteresis);
	write_flow(to, point);
	fl_json_explained(to, one, point);
	fl_json_end(to, '}');
}

/* Every reading as typed and as computed; struck ones too. */
static void write_reading(fl_json *to, const fl_case *one, const fl_reading_result *result) {
	const fl_reading *reading = result->reading;
	bool zero = reading->point == FL_POINT_ZERO;
	const fl_session *session = &one->session;
	bool known = !zero && reading->point >= 0 && (size_t)reading->point < session->point_count;
	fl_json_begin(to, NULL, '{');
	fl_json_integer(to, "sequence", reading->sequence);
	fl_json_utc(to, "taken_at", reading->taken);
	fl_json_word(to, "oil", known ? session->points[reading->point].oil : NULL);
	write_place(to, reading->point);
	fl_json_integer(to, "cycle", reading->cycle);
	fl_json_string(to, "direction", fl_pass_word(reading->pass));
	fl_json_integer(to, "number", reading->number);
	fl_json_string(to, "typed", reading->typed);
	fl_json_string(to, "typed_unit", fl_unit_text(reading->unit));
	fl_json_string(to, "temp_typed", reading->has_temp ? reading->temp_typed : NULL);
	fl_json_number(to, "temp_c", reading->has_temp && !zero ? result->oil.temp_c : (double)NAN);
	fl_json_number(to, "applied_pa", reading->has_applied ? result->applied_pa : (double)NAN);
	fl_json_number(to, "line_pa", reading->has_line ? reading->line_pa : (double)NAN);
	fl_json_number(to, "equivalent_mm2_s", result->ideal.equivalent_m2_s * 1e6);
	fl_json_number(to, "ideal_output", result->ideal.output);
	fl_json_number(to, "output", result->output);
	fl_json_percent(to, "error_pct_span", result->error_span);
	fl_json_boolean(to, "struck", reading->struck);
	fl_json_string(to, "struck_reason", reading->struck ? reading->struck_reason : NULL);
	fl_json_string(to, "struck_by", reading->struck ? reading->struck_by : NULL);
	fl_json_end(to, '}');
}

/* ---- a run ---------------------------------------------------------------------------------------------------------
 */

static void write_line(fl_json *to, const fl_run_result *run) {
	if (!run->available || !run->has_line) {
		fl_json_null(to, "least_squares");
		return;
	}
	const fl_line *line = &run->line;
	fl_json_begin(to, "least_squares", '{');
	fl_json_percent(to, "intercept_pct_span", line->intercept);
	fl_json_percent(to, "slope_pct_span", line->slope);
	fl_json_percent(to, "u_intercept_pct_span", sqrt(line->var_intercept));
	fl_json_percent(to, "u_slope_pct_span", sqrt(line->var_slope));
	fl_json_number(to, "covariance_pct_span_squared", line->cov * PERCENT * PERCENT);
	fl_json_percent(to, "residual_standard_deviation_pct_span", line->s);
	fl_json_percent(to, "largest_residual_pct_span", line->max_abs_residual);
	fl_json_integer(to, "degrees_of_freedom", line->dof);
	fl_json_end(to, '}');
}

/* A number of a run, null unless the run is available and the number was determined. */
static void figure(fl_json *to, const char *name, bool determined, double fraction) {
	fl_json_percent(to, name, determined ? fraction : (double)NAN);
}

static void point_name(fl_json *to, const char *name, const fl_case *one, bool determined, int point) {
	const fl_session *session = &one->session;
	bool known = determined && point >= 0 && (size_t)point < session->point_count;
	fl_json_word(to, name, known ? session->points[point].oil : NULL);
}

static void write_figures(fl_json *to, const fl_case *one, const fl_run_result *run) {
	bool here = run->available, line = here && run->has_line, straight = here && run->has_linearity;
	bool hysteresis = here && isfinite(run->hysteresis_span), repeat = here && isfinite(run->repeatability_span);
	figure(to, "zero_error_pct_span", line, run->zero_error_span);
	figure(to, "span_error_pct_span", line, run->span_error_span);
	figure(to, "span_between_ends_pct_span", here, run->span_between_ends_span);
	figure(to, "stopped_zero_pct_span", here, run->stopped_zero_span);
	figure(to, "stopped_zero_expanded_uncertainty_pct_span", here, run->stopped_zero_u_span);
	figure(to, "running_zero_pct_span", here, run->running_zero_span);
	figure(to, "running_zero_standard_uncertainty_pct_span", here, run->running_zero_u_span);
	figure(to, "reading_error_low_pct_span", here, run->error_low_span);
	figure(to, "reading_error_high_pct_span", here, run->error_high_span);
	write_line(to, run);
	figure(to, "independent_linearity_pct_span", straight, run->independent.max_abs);
	figure(to, "terminal_linearity_pct_span", straight, run->terminal.max_abs);
	figure(to, "zero_based_linearity_pct_span", straight, run->zero_based.max_abs);
	fl_json_boolean(to, "linearity_exceeded", here && run->linearity_exceeded);
	figure(to, "hysteresis_pct_span", hysteresis, run->hysteresis_span);
	point_name(to, "hysteresis_oil", one, hysteresis, run->hysteresis_point);
	point_number(to, "hysteresis_point", hysteresis, run->hysteresis_point);
	figure(to, "hysteresis_single_cycle_pct_span", hysteresis, run->hysteresis_cycle_span);
	fl_json_boolean(to, "hysteresis_exceeded", here && run->hysteresis_exceeded);
	figure(to, "repeatability_pct_span", repeat, run->repeatability_span);
	fl_json_string(to, "repeatability_of", !repeat ? NULL : run->repeatability_of_cycles ? "cycles" : "readings");
	figure(to, "repeatability_standard_deviation_pct_span", repeat, run->repeatability_s_span);
	point_name(to, "repeatability_oil", one, repeat, run->repeatability_point);
	point_number(to, "repeatability_point", repeat, run->repeatability_point);
	fl_json_string(to, "repeatability_direction", repeat ? fl_pass_word(run->repeatability_pass) : NULL);
}

static void write_points(fl_json *to, const fl_case *one, const fl_run_result *run) {
	size_t points = run->available ? run->point_count : 0, combined = run->available ? run->combined_count : 0;
	size_t readings = run->available ? run->reading_count : 0;
	fl_json_begin(to, "points", '[');
	for (size_t i = 0; i < points; i++)
		write_point(to, one, &run->points[i], (double)NAN);
	fl_json_end(to, ']');
	fl_json_begin(to, "combined", '[');
	for (size_t i = 0; i < combined; i++)
		write_point(to, one, &run->combined[i], run->hysteresis ? run->hysteresis[i] : (double)NAN);
	fl_json_end(to, ']');
	fl_json_begin(to, "readings", '[');
	for (size_t i = 0; i < readings; i++)
		write_reading(to, one, &run->readings[i]);
	fl_json_end(to, ']');
}

static void write_worst(fl_json *to, const fl_run_result *run) {
	const fl_point_result *worst = run->available ? run->worst : NULL;
	if (!worst) {
		fl_json_null(to, "worst");
		return;
	}
	fl_json_begin(to, "worst", '{');
	fl_json_word(to, "oil", worst->oil);
	fl_json_string(to, "direction", worst->both ? NULL : fl_pass_word(worst->pass));
	write_place(to, worst->point);
	fl_json_percent(to, "error_pct_span", worst->error_span);
	fl_json_percent(to, "expanded_uncertainty_pct_span",
	                fl_report_has_budget(worst) ? worst->sum.expanded : (double)NAN);
	fl_json_percent(to, "tolerance_pct_span", worst->tolerance_span);
	fl_json_end(to, '}');
}

static void write_run(fl_json *to, const fl_case *one, const fl_run_result *run, fl_run_kind kind) {
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "kind", fl_run_word(kind));
	fl_json_boolean(to, "available", run->available);
	fl_json_string(to, "unavailable_reason", run->available ? NULL : run->unavailable_reason);
	fl_json_boolean(to, "same_as_found", run->same_as_found);
	fl_json_word(to, "verdict", run->available ? fl_verdict_word(run->verdict) : NULL);
	fl_json_word(to, "verdict_reason", run->verdict_reason);
	write_worst(to, run);
	fl_json_boolean(to, "inside_adjust_limit", run->available && run->inside_adjust_limit);
	write_figures(to, one, run);
	fl_json_lines(to, run);
	fl_json_trials(to, one, run);
	fl_json_strings(to, "not_determined", run->not_determined, run->not_determined_count);
	fl_report_cause_json(to, one, kind);
	fl_json_integer(to, "struck_count", (long long)run->struck_count);
	write_points(to, one, run);
	fl_json_end(to, '}');
}

fl_status fl_report_json(const fl_case *one, fl_text *out, fl_error *err) {
	fl_json to = {.out = out, .start = out->length};
	fl_json_begin(&to, NULL, '{');
	fl_json_string(&to, "format", FORMAT);
	fl_json_string(&to, "program", FOUNDLEFT_VERSION);
	write_unit(&to, one);
	write_session(&to, one);
	write_procedure(&to, &one->procedure);
	write_terms(&to, &one->result);
	fl_json_begin(&to, "runs", '[');
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		write_run(&to, one, &one->result.runs[kind], (fl_run_kind)kind);
	fl_json_end(&to, ']');
	fl_report_functions_json(&to, one);
	fl_json_end(&to, '}');
	fl_text_add(out, "\n");
	if (out->failed)
		return fl_fail(err, FL_E_MEMORY, "no memory for the JSON text");
	if (to.bad_text) {
		out->length = to.start;
		out->data[to.start] = '\0';
		return fl_fail(err, FL_E_VALUE, "a name in the session is not valid UTF-8, so that JSON cannot hold it");
	}
	return FL_OK;
}
