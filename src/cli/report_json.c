/* report_json.c - the result as one JSON object for programs; every key stands in docs/json.md.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Written directly, in one stable order, because numbers are to be the shortest that read back as the same double.
 * What is not determined is null. The format number goes up when a key changes its meaning or goes.
 */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "report.h"
#include "report_parts.h"

#define FORMAT "foundleft-assessment-1"
#define PERCENT 100.0

/* ---- the writer ------------------------------------------------------------------------------------------------- */

typedef struct json {
	fl_text *out;
	size_t start;  /* where the object begins in the text */
	bool bad_text; /* a string was not UTF-8 */
} json;

/* A comma, unless the value is the first of its object or list, or stands behind its key. */
static void separate(json *to) {
	if (to->out->length <= to->start)
		return;
	char last = to->out->data[to->out->length - 1];
	if (last != '{' && last != '[' && last != ':')
		fl_text_add(to->out, ",");
}

static void write_string(json *to, const char *text) {
	if (!fl_utf8_valid(text, strlen(text))) {
		to->bad_text = true;
		text = "";
	}
	fl_text_add(to->out, "\"");
	for (const char *c = text; *c; c++) {
		if (*c == '"' || *c == '\\')
			fl_text_printf(to->out, "\\%c", *c);
		else if (*c == '\n')
			fl_text_add(to->out, "\\n");
		else if ((unsigned char)*c < 0x20 || *c == 0x7F)
			fl_text_printf(to->out, "\\u%04x", (unsigned)*c);
		else
			fl_text_append(to->out, c, 1);
	}
	fl_text_add(to->out, "\"");
}

/* The key of the next value; NULL within a list. */
static void key(json *to, const char *name) {
	separate(to);
	if (!name)
		return;
	write_string(to, name);
	fl_text_add(to->out, ":");
}

static void begin(json *to, const char *name, char bracket) {
	key(to, name);
	fl_text_append(to->out, &bracket, 1);
}

static void end(json *to, char bracket) {
	fl_text_append(to->out, &bracket, 1);
}

static void null(json *to, const char *name) {
	key(to, name);
	fl_text_add(to->out, "null");
}

static void boolean(json *to, const char *name, bool value) {
	key(to, name);
	fl_text_add(to->out, value ? "true" : "false");
}

/* NULL gives null; an empty text stays one. */
static void string(json *to, const char *name, const char *value) {
	if (!value) {
		null(to, name);
		return;
	}
	key(to, name);
	write_string(to, value);
}

/* An empty text means "none" and gives null. */
static void word(json *to, const char *name, const char *value) {
	string(to, name, value && value[0] ? value : NULL);
}

/* The shortest decimal that reads back as the same double; what is not finite gives null. */
static void number(json *to, const char *name, double value) {
	if (!isfinite(value)) {
		null(to, name);
		return;
	}
	char digits[40];
	for (int precision = 15; precision <= 17; precision++) {
		snprintf(digits, sizeof digits, "%.*g", precision, value == 0.0 ? 0.0 : value);
		if (strtod(digits, NULL) == value)
			break;
	}
	key(to, name);
	fl_text_add(to->out, digits);
}

static void integer(json *to, const char *name, long long value) {
	key(to, name);
	fl_text_printf(to->out, "%lld", value);
}

static void percent(json *to, const char *name, double fraction) {
	number(to, name, fraction * PERCENT);
}

static void day(json *to, const char *name, fl_day value) {
	char text[FL_DAY_SIZE];
	string(to, name, value == FL_NO_DAY ? NULL : fl_day_format(value, text));
}

static void utc(json *to, const char *name, fl_utc value) {
	char text[FL_UTC_SIZE];
	string(to, name, value == INT64_MIN ? NULL : fl_utc_format(value, text));
}

static void strings(json *to, const char *name, const char *const *list, size_t count) {
	begin(to, name, '[');
	for (size_t i = 0; i < count; i++)
		string(to, NULL, list[i]);
	end(to, ']');
}

/* ---- the instrument, the session, the procedure ------------------------------------------------------------------ */

static void write_unit(json *to, const fl_case *one) {
	const fl_instrument *instrument = one->instrument;
	const fl_scale *scale = &instrument->scale;
	const fl_signal_range *signal = fl_physics_signal_range(scale->signal);
	begin(to, "unit", '{');
	string(to, "tag", instrument->tag);
	word(to, "serial", instrument->serial);
	word(to, "site", instrument->site);
	word(to, "owner", instrument->owner);
	word(to, "position", instrument->position);
	word(to, "maker_plate", instrument->maker_plate);
	string(to, "dial_unit", fl_unit_text(fl_physics_dial_unit(scale->dial_unit)));
	number(to, "dial_low", scale->low);
	number(to, "dial_high", scale->high);
	number(to, "dial_density_kg_m3", scale->dial_unit == FL_DIAL_MPA_S ? (double)NAN : scale->dial_density_kg_m3);
	number(to, "saybolt_temp_c", scale->dial_unit == FL_DIAL_SAYBOLT ? scale->saybolt_temp_c : (double)NAN);
	string(to, "signal", signal->text);
	string(to, "output_unit", fl_unit_text(signal->unit));
	number(to, "output_low", signal->low);
	number(to, "output_high", signal->high);
	number(to, "full_scale_dp_pa", one->result.dp_full_pa);
	end(to, '}');
}

static void write_session(json *to, const fl_case *one) {
	const fl_session *session = &one->session;
	begin(to, "session", '{');
	day(to, "day", session->day);
	string(to, "source", fl_source_word(session->source));
	boolean(to, "declared_clock", session->declared_clock);
	utc(to, "opened_at", session->opened_at);
	boolean(to, "closed", session->closed);
	word(to, "closed_by", session->closed_by);
	string(to, "journal", one->path);
	string(to, "journal_digest", one->head);
	boolean(to, "journal_torn", one->torn);
	word(to, "begun_with", session->program);
	integer(to, "questions_confirmed", session->questions);
	string(to, "decision", session->decision == FL_DECISION_NONE ? NULL : fl_decision_word(session->decision));
	word(to, "decision_reason", session->decision_reason);
	word(to, "decision_by", session->decision_by);
	begin(to, "adjustments", '[');
	for (size_t i = 0; i < session->adjustment_count; i++) {
		const fl_adjustment *adjustment = &session->adjustments[i];
		if (adjustment->undone)
			continue;
		begin(to, NULL, '{');
		string(to, "item", adjustment->item);
		string(to, "before", adjustment->before);
		string(to, "after", adjustment->after);
		utc(to, "at", adjustment->at);
		end(to, '}');
	}
	end(to, ']');
	begin(to, "remarks", '[');
	for (size_t i = 0; i < session->remark_count; i++)
		string(to, NULL, session->remarks[i].typed);
	end(to, ']');
	end(to, '}');
}

static void write_procedure(json *to, const fl_procedure *procedure) {
	begin(to, "procedure", '{');
	string(to, "id", procedure->id);
	string(to, "version", procedure->version);
	string(to, "title", procedure->title);
	string(to, "medium", procedure->medium == FL_MEDIUM_OIL ? "oil" : "pressure");
	integer(to, "points", procedure->point_count);
	integer(to, "cycles", procedure->cycles);
	boolean(to, "falling", procedure->falling);
	integer(to, "readings", procedure->readings);
	end(to, '}');
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

static void write_band(json *to, const char *name, const fl_band *band) {
	static const char *const bases[] = {[FL_BAND_PERCENT_SPAN] = "percent_span",
	                                    [FL_BAND_PERCENT_READING] = "percent_reading",
	                                    [FL_BAND_DIAL_UNITS] = "dial_units"};
	if (band->basis == FL_BAND_NONE) {
		null(to, name);
		return;
	}
	begin(to, name, '{');
	string(to, "basis", bases[band->basis]);
	number(to, "half_width", band->half_width);
	end(to, '}');
}

static void write_terms(json *to, const fl_result *result) {
	string(to, "rule", rule_word(result->rule));
	string(to, "rule_words", fl_procedure_rule_words(result->rule));
	write_band(to, "tolerance", &result->tolerance);
	string(to, "tolerance_from",
	       result->tolerance.basis == FL_BAND_NONE ? NULL
	       : result->tolerance_from_instrument     ? "instrument"
	                                               : "procedure");
	percent(to, "hysteresis_limit_pct_span", result->hysteresis_limit_span);
	percent(to, "linearity_limit_pct_span", result->linearity_limit_span);
	string(to, "deciding_linearity", fl_procedure_linearity_word(result->deciding_linearity));
	number(to, "coverage_probability", result->coverage_probability);
	boolean(to, "traceable", result->traceable);
	strings(to, "not_traceable", result->not_traceable, result->not_traceable_count);
	strings(to, "warnings", result->warnings, result->warning_count);
}

/* Number of a point from 1, null where `determined` is false or it is the stopped zero. */
static void point_number(json *to, const char *name, bool determined, int point) {
	if (!determined || point == FL_POINT_ZERO)
		null(to, name);
	else
		integer(to, name, point + 1);
}

static void write_place(json *to, int point) {
	boolean(to, "stopped_zero", point == FL_POINT_ZERO);
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

static void write_budget(json *to, const fl_point_result *point) {
	begin(to, "budget", '[');
	for (size_t i = 0; i < point->budget_count; i++) {
		const fl_budget_line *line = &point->budget[i];
		begin(to, NULL, '{');
		string(to, "name", line->name);
		string(to, "stated", line->stated);
		string(to, "distribution", distribution_word(line->distribution));
		number(to, "standard_uncertainty", line->u);
		string(to, "unit", line->unit);
		number(to, "sensitivity_pct_span_per_unit", line->sensitivity);
		percent(to, "contribution_pct_span", line->contribution_span);
		number(to, "degrees_of_freedom", line->dof);
		end(to, '}');
	}
	end(to, ']');
}

static void write_flow(json *to, const fl_point_result *point) {
	if (!point->has_flow) {
		null(to, "flow");
		return;
	}
	const fl_flow *flow = &point->flow;
	begin(to, "flow", '{');
	number(to, "reynolds", flow->reynolds);
	number(to, "entrance_m", flow->entrance_m);
	number(to, "velocity_m_s", flow->velocity_m_s);
	number(to, "flow_m3_s", flow->flow_m3_s);
	number(to, "dp_total_pa", flow->dp_total_pa);
	number(to, "dp_end_pa", flow->dp_end_pa);
	number(to, "dp_kinetic_pa", flow->dp_kinetic_pa);
	percent(to, "kinetic_pct_span", point->kinetic_span);
	number(to, "wall_shear_per_s", flow->wall_shear_per_s);
	number(to, "heating_k", flow->heating_k);
	end(to, '}');
}

/* What was applied and what the instrument made of it. */
static void write_point_values(json *to, const fl_case *one, const fl_point_result *point) {
	const fl_signal_range *signal = fl_physics_signal_range(one->instrument->scale.signal);
	integer(to, "n", (long long)point->n);
	number(to, "temp_c", point->temp_c);
	number(to, "certified_mm2_s", point->certified_m2_s * 1e6);
	number(to, "density_kg_m3", point->rho_kg_m3);
	number(to, "dynamic_mpa_s", point->mu_pa_s * 1e3);
	number(to, "applied_pa", point->applied_pa);
	number(to, "equivalent_mm2_s", point->equivalent_m2_s * 1e6);
	number(to, "ideal_dial", point->dial);
	percent(to, "position_pct_span", point->x);
	number(to, "ideal_ma", signal->unit == FL_U_MA ? point->ideal_output : (double)NAN);
	number(to, "ideal_output", point->ideal_output);
	number(to, "found_output", point->output);
	string(to, "output_unit", fl_unit_text(signal->unit));
}

static void write_point_errors(json *to, const fl_point_result *point) {
	bool several = point->n > 1;
	percent(to, "error_pct_span", point->error_span);
	number(to, "error_dial", point->error_dial);
	percent(to, "error_pct_reading", point->error_reading);
	percent(to, "standard_deviation_pct_span", several ? point->s_span : (double)NAN);
	percent(to, "range_pct_span", several ? point->range_span : (double)NAN);
	/* Without a budget these are not zero but unknown. */
	double known = fl_report_has_budget(point) ? 1.0 : (double)NAN;
	percent(to, "standard_uncertainty_pct_span", known * point->sum.uc);
	percent(to, "expanded_uncertainty_pct_span", known * point->sum.expanded);
	number(to, "coverage_factor", known * point->sum.coverage_factor);
	number(to, "effective_degrees_of_freedom", known * point->sum.dof_effective);
	boolean(to, "raised_to_reference", point->floored);
	percent(to, "tolerance_pct_span", point->tolerance_span);
	number(to, "tolerance_to_uncertainty", known * point->tur);
	word(to, "verdict", fl_verdict_word(point->verdict));
	write_budget(to, point);
}

static void write_point(json *to, const fl_case *one, const fl_point_result *point, double hysteresis) {
	begin(to, NULL, '{');
	word(to, "oil", point->oil);
	word(to, "lot", point->lot);
	string(to, "direction", point->both ? NULL : fl_pass_word(point->pass));
	write_place(to, point->point);
	write_point_values(to, one, point);
	write_point_errors(to, point);
	if (point->both)
		percent(to, "hysteresis_pct_span", hysteresis);
	write_flow(to, point);
	end(to, '}');
}

/* Every reading as typed and as computed; struck ones too. */
static void write_reading(json *to, const fl_case *one, const fl_reading_result *result) {
	const fl_reading *reading = result->reading;
	bool zero = reading->point == FL_POINT_ZERO;
	const fl_session *session = &one->session;
	bool known = !zero && reading->point >= 0 && (size_t)reading->point < session->point_count;
	begin(to, NULL, '{');
	integer(to, "sequence", reading->sequence);
	utc(to, "taken_at", reading->taken);
	word(to, "oil", known ? session->points[reading->point].oil : NULL);
	write_place(to, reading->point);
	integer(to, "cycle", reading->cycle);
	string(to, "direction", fl_pass_word(reading->pass));
	integer(to, "number", reading->number);
	string(to, "typed", reading->typed);
	string(to, "typed_unit", fl_unit_text(reading->unit));
	string(to, "temp_typed", reading->has_temp ? reading->temp_typed : NULL);
	number(to, "temp_c", reading->has_temp && !zero ? result->oil.temp_c : (double)NAN);
	number(to, "applied_pa", reading->has_applied ? result->applied_pa : (double)NAN);
	number(to, "line_pa", reading->has_line ? reading->line_pa : (double)NAN);
	number(to, "equivalent_mm2_s", result->ideal.equivalent_m2_s * 1e6);
	number(to, "ideal_output", result->ideal.output);
	number(to, "output", result->output);
	percent(to, "error_pct_span", result->error_span);
	boolean(to, "struck", reading->struck);
	string(to, "struck_reason", reading->struck ? reading->struck_reason : NULL);
	string(to, "struck_by", reading->struck ? reading->struck_by : NULL);
	end(to, '}');
}

/* ---- a run ---------------------------------------------------------------------------------------------------------
 */

static void write_line(json *to, const fl_run_result *run) {
	if (!run->available || !run->has_line) {
		null(to, "least_squares");
		return;
	}
	const fl_line *line = &run->line;
	begin(to, "least_squares", '{');
	percent(to, "intercept_pct_span", line->intercept);
	percent(to, "slope_pct_span", line->slope);
	percent(to, "u_intercept_pct_span", sqrt(line->var_intercept));
	percent(to, "u_slope_pct_span", sqrt(line->var_slope));
	number(to, "covariance_pct_span_squared", line->cov * PERCENT * PERCENT);
	percent(to, "residual_standard_deviation_pct_span", line->s);
	percent(to, "largest_residual_pct_span", line->max_abs_residual);
	integer(to, "degrees_of_freedom", line->dof);
	end(to, '}');
}

/* A number of a run, null unless the run is available and the number was determined. */
static void figure(json *to, const char *name, bool determined, double fraction) {
	percent(to, name, determined ? fraction : (double)NAN);
}

static void point_name(json *to, const char *name, const fl_case *one, bool determined, int point) {
	const fl_session *session = &one->session;
	bool known = determined && point >= 0 && (size_t)point < session->point_count;
	word(to, name, known ? session->points[point].oil : NULL);
}

static void write_figures(json *to, const fl_case *one, const fl_run_result *run) {
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
	boolean(to, "linearity_exceeded", here && run->linearity_exceeded);
	figure(to, "hysteresis_pct_span", hysteresis, run->hysteresis_span);
	point_name(to, "hysteresis_oil", one, hysteresis, run->hysteresis_point);
	point_number(to, "hysteresis_point", hysteresis, run->hysteresis_point);
	figure(to, "hysteresis_single_cycle_pct_span", hysteresis, run->hysteresis_cycle_span);
	boolean(to, "hysteresis_exceeded", here && run->hysteresis_exceeded);
	figure(to, "repeatability_pct_span", repeat, run->repeatability_span);
	string(to, "repeatability_of", !repeat ? NULL : run->repeatability_of_cycles ? "cycles" : "readings");
	figure(to, "repeatability_standard_deviation_pct_span", repeat, run->repeatability_s_span);
	point_name(to, "repeatability_oil", one, repeat, run->repeatability_point);
	point_number(to, "repeatability_point", repeat, run->repeatability_point);
	string(to, "repeatability_direction", repeat ? fl_pass_word(run->repeatability_pass) : NULL);
}

static void write_points(json *to, const fl_case *one, const fl_run_result *run) {
	size_t points = run->available ? run->point_count : 0, combined = run->available ? run->combined_count : 0;
	size_t readings = run->available ? run->reading_count : 0;
	begin(to, "points", '[');
	for (size_t i = 0; i < points; i++)
		write_point(to, one, &run->points[i], (double)NAN);
	end(to, ']');
	begin(to, "combined", '[');
	for (size_t i = 0; i < combined; i++)
		write_point(to, one, &run->combined[i], run->hysteresis ? run->hysteresis[i] : (double)NAN);
	end(to, ']');
	begin(to, "readings", '[');
	for (size_t i = 0; i < readings; i++)
		write_reading(to, one, &run->readings[i]);
	end(to, ']');
}

static void write_worst(json *to, const fl_run_result *run) {
	const fl_point_result *worst = run->available ? run->worst : NULL;
	if (!worst) {
		null(to, "worst");
		return;
	}
	begin(to, "worst", '{');
	word(to, "oil", worst->oil);
	string(to, "direction", worst->both ? NULL : fl_pass_word(worst->pass));
	write_place(to, worst->point);
	percent(to, "error_pct_span", worst->error_span);
	percent(to, "expanded_uncertainty_pct_span", fl_report_has_budget(worst) ? worst->sum.expanded : (double)NAN);
	percent(to, "tolerance_pct_span", worst->tolerance_span);
	end(to, '}');
}

static void write_run(json *to, const fl_case *one, const fl_run_result *run, fl_run_kind kind) {
	begin(to, NULL, '{');
	string(to, "kind", fl_run_word(kind));
	boolean(to, "available", run->available);
	string(to, "unavailable_reason", run->available ? NULL : run->unavailable_reason);
	boolean(to, "same_as_found", run->same_as_found);
	word(to, "verdict", run->available ? fl_verdict_word(run->verdict) : NULL);
	word(to, "verdict_reason", run->verdict_reason);
	write_worst(to, run);
	boolean(to, "inside_adjust_limit", run->available && run->inside_adjust_limit);
	write_figures(to, one, run);
	strings(to, "not_determined", run->not_determined, run->not_determined_count);
	integer(to, "struck_count", (long long)run->struck_count);
	write_points(to, one, run);
	end(to, '}');
}

fl_status fl_report_json(const fl_case *one, fl_text *out, fl_error *err) {
	json to = {.out = out, .start = out->length};
	begin(&to, NULL, '{');
	string(&to, "format", FORMAT);
	string(&to, "program", FOUNDLEFT_VERSION);
	write_unit(&to, one);
	write_session(&to, one);
	write_procedure(&to, &one->procedure);
	write_terms(&to, &one->result);
	begin(&to, "runs", '[');
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		write_run(&to, one, &one->result.runs[kind], (fl_run_kind)kind);
	end(&to, ']');
	end(&to, '}');
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
