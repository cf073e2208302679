/* report_why_json.c - findings, extra measurements and function checks as JSON.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report_why_json.h"

#include <math.h>
#include <string.h>

/* ---- cause ---- */

static void write_finding(fl_json *to, const fl_finding *f) {
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "kind", fl_cause_finding_word(f->kind));
	fl_json_string(to, "id", f->id);
	fl_json_word(to, "strength", fl_cause_strength_word(f->strength));
	fl_json_number(to, "z", f->z);
	fl_json_string(to, "sentence", f->sentence);
	fl_json_word(to, "advice", f->advice);
	fl_json_word(to, "reason", f->reason);
	fl_json_word(to, "answered", f->answered);
	fl_json_begin(to, "numbers", '[');
	for (size_t i = 0; i < f->number_count; i++) {
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "name", f->numbers[i].name);
		fl_json_number(to, "value", f->numbers[i].value);
		fl_json_number(to, "standard_uncertainty", f->numbers[i].u);
		fl_json_word(to, "unit", fl_unit_text(f->numbers[i].unit));
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
	fl_json_end(to, '}');
}

static void write_member(fl_json *to, const fl_cause_member *m) {
	const fl_fault_kind *kind = fl_cause_fault(m->fault);
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "fault", kind->word);
	fl_json_number(to, "alone", fl_from_inside(m->alone, kind->unit));
	fl_json_word(to, "unit", fl_unit_text(kind->unit));
	fl_json_number(to, "penalty", m->penalty);
	fl_json_boolean(to, "possible", m->possible);
	fl_json_end(to, '}');
}

static void write_group(fl_json *to, const fl_cause *cause, const fl_cause_group *g) {
	fl_json_begin(to, NULL, '{');
	fl_json_begin(to, "members", '[');
	for (size_t i = 0; i < g->member_count; i++)
		write_member(to, &g->members[i]);
	fl_json_end(to, ']');
	fl_json_percent(to, "effect_pct_span", g->effect_span);
	fl_json_percent(to, "standard_uncertainty_pct_span", g->u_effect_span);
	fl_json_string(to, "largest_at", g->largest_row >= 0 ? cause->rows[g->largest_row].name : NULL);
	fl_json_number(to, "z", g->z);
	fl_json_boolean(to, "several", g->several);
	fl_json_boolean(to, "material", g->material);
	fl_json_begin(to, "splits", '[');
	for (size_t i = 0; i < g->split_count; i++)
		fl_json_string(to, NULL, fl_cause_split_words(g->splits[i]));
	fl_json_end(to, ']');
	fl_json_end(to, '}');
}

/* A row of the fit is an error in % of span, or for an extra measurement of another kind a relative deviation. */
static void write_row(fl_json *to, const fl_cause_row *row) {
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "name", row->name);
	fl_json_boolean(to, "extra", row->extra);
	fl_json_percent(to, "position_pct_span", row->x);
	fl_json_percent(to, "value_pct", row->value);
	fl_json_percent(to, "healthy_pct", row->healthy);
	fl_json_percent(to, "explained_pct", row->explained);
	fl_json_percent(to, "standard_uncertainty_pct", row->u);
	fl_json_end(to, '}');
}

static const char *decision_word(fl_decision decision) {
	return decision == FL_DECISION_NONE ? "find-out-first" : fl_decision_word(decision);
}

static void write_course(fl_json *to, const fl_cause *cause, const fl_run_result *run) {
	fl_course course;
	bool has = fl_cause_course(cause, run, &course);
	if (!has) {
		fl_json_null(to, "proposal");
		return;
	}
	fl_json_begin(to, "proposal", '{');
	fl_json_string(to, "decision", decision_word(course.decision));
	fl_json_string(to, "reason", course.reason);
	fl_json_string(to, "because", course.because ? course.because->id : NULL);
	fl_json_end(to, '}');
}

static void write_trim(fl_json *to, const fl_trim *trim) {
	if (!trim->available) {
		fl_json_null(to, "trim");
		return;
	}
	fl_json_begin(to, "trim", '{');
	fl_json_percent(to, "zero_pct_span", trim->zero_span);
	fl_json_percent(to, "gain_pct", trim->gain);
	fl_json_boolean(to, "zero_asked", trim->zero_asked);
	fl_json_number(to, "lower_range_dp_pa", trim->dp_low_pa);
	fl_json_number(to, "upper_range_dp_pa", trim->dp_high_pa);
	fl_json_percent(to, "largest_after_pct_span", trim->largest_after_span);
	fl_json_percent(to, "least_possible_pct_span", trim->ideal_after_span);
	fl_json_boolean(to, "brings_in", trim->brings_in);
	fl_json_end(to, '}');
}

void fl_report_cause_json(fl_json *to, const fl_case *one, fl_run_kind run) {
	const fl_cause *cause = &one->causes[run];
	if (!cause->available) {
		fl_json_null(to, "cause");
		return;
	}
	fl_json_begin(to, "cause", '{');
	fl_json_string(to, "statement", cause->statement);
	fl_json_boolean(to, "withheld", cause->withheld);
	fl_json_boolean(to, "stop", cause->stop);
	write_course(to, cause, &one->result.runs[run]);
	fl_json_begin(to, "findings", '[');
	for (size_t i = 0; i < cause->finding_count; i++)
		write_finding(to, &cause->findings[i]);
	fl_json_end(to, ']');
	fl_json_begin(to, "groups", '[');
	for (size_t i = 0; i < cause->group_count; i++)
		write_group(to, cause, &cause->groups[i]);
	fl_json_end(to, ']');
	fl_json_begin(to, "rows", '[');
	for (size_t i = 0; i < cause->row_count; i++)
		write_row(to, &cause->rows[i]);
	fl_json_end(to, ']');
	fl_json_number(to, "chi_squared", cause->chi_squared);
	fl_json_number(to, "degrees_of_freedom", cause->dof);
	fl_json_number(to, "probability", cause->p);
	fl_json_boolean(to, "explained", cause->explained);
	write_trim(to, &cause->trim);
	fl_json_end(to, '}');
}

/* ---- what was measured besides ---- */

static void write_measurement(fl_json *to, const fl_measurement *m) {
	fl_json_begin(to, NULL, '{');
	fl_json_integer(to, "sequence", m->sequence);
	fl_json_string(to, "what", fl_measure_word(m->what));
	fl_json_string(to, "run", fl_run_word(m->run));
	fl_json_string(to, "typed", m->typed);
	fl_json_string(to, "typed_unit", fl_unit_text(m->unit));
	fl_json_number(to, "applied_pa", m->applied_pa);
	fl_json_number(to, "over_s", m->over_s);
	fl_json_number(to, "in_use_temp_c", m->temp_c);
	fl_json_string(to, "equipment", m->equipment);
	fl_json_end(to, '}');
}

void fl_report_measurements_json(fl_json *to, const fl_session *session) {
	fl_json_begin(to, "measurements", '[');
	for (size_t i = 0; i < session->measurement_count; i++)
		if (!session->measurements[i].undone)
			write_measurement(to, &session->measurements[i]);
	fl_json_end(to, ']');
}

/* ---- function checks ---- */

static const char *check_unit(const fl_case *one, const fl_function_check *check) {
	if (check->kind == FL_CHECK_CONFIRM)
		return NULL;
	return fl_unit_text(check->kind == FL_CHECK_AMOUNT ? check->unit
	                                                   : fl_physics_dial_unit(one->instrument->scale.dial_unit));
}

static void write_function(fl_json *to, const fl_case *one, const fl_function_result *r) {
	const fl_check_answer *a = r->answer;
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "id", r->check->id);
	fl_json_string(to, "name", r->check->name);
	fl_json_string(to, "outcome", fl_function_word(r->state));
	fl_json_string(to, "unit", check_unit(one, r->check));
	fl_json_number(to, "expected", r->expected);
	fl_json_number(to, "limit_low", r->low);
	fl_json_number(to, "limit_high", r->high);
	fl_json_string(to, "answer", a ? a->answer : NULL);
	fl_json_string(to, "typed", a ? a->typed : NULL);
	fl_json_string(to, "typed_unit", a && a->typed ? fl_unit_text(a->unit) : NULL);
	fl_json_number(to, "found", r->found);
	fl_json_number(to, "true_value", r->true_value);
	fl_json_number(to, "true_expanded_uncertainty", r->true_U);
	fl_json_number(to, "true_low", r->true_low);
	fl_json_number(to, "true_high", r->true_high);
	fl_json_string(to, "not_tried_reason", a ? a->reason : NULL);
	fl_json_end(to, '}');
}

void fl_report_functions_json(fl_json *to, const fl_case *one) {
	fl_json_begin(to, "function_checks", '[');
	for (size_t i = 0; i < one->result.function_count; i++)
		write_function(to, one, &one->result.functions[i]);
	fl_json_end(to, ']');
}
