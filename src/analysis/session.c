/* analysis/session.c - session, procedure and stock become a result: the order of the computation.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "work.h"

#include <math.h>
#include <string.h>

/* ---- the items in use ---- */

static const fl_instrument *instrument_of(const fl_session *session, const fl_stock *stock) {
	for (size_t i = 0; i < session->text_count; i++)
		if (strcmp(session->texts[i].kind, "instrument") == 0 && fl_stock_instrument(stock, session->texts[i].name))
			return fl_stock_instrument(stock, session->texts[i].name);
	return stock->instrument_count ? &stock->instruments[0] : NULL;
}

fl_status fl_analysis_items(work *w, fl_error *err) {
	const fl_instrument *instrument = instrument_of(w->session, w->stock);
	if (!instrument)
		return fl_fail(err, FL_E_NOT_FOUND, "the session names no instrument");
	return fl_reference_of(w->session, w->procedure, w->stock, instrument, &w->reference, err);
}

/* ---- what the decision rests on ---- */

static void take_terms(work *w) {
	const fl_procedure *procedure = w->procedure;
	const fl_instrument *instrument = w->reference.instrument;
	fl_result *result = w->result;
	result->rule = procedure->rule;
	bool own = !procedure->sets_limits_aside;
	result->tolerance_from_instrument = own && instrument->tolerance.basis != FL_BAND_NONE;
	result->tolerance = result->tolerance_from_instrument ? instrument->tolerance : procedure->tolerance;
	result->zones = result->tolerance_from_instrument ? instrument->zones : procedure->zones;
	result->zone_count = result->tolerance_from_instrument ? instrument->zone_count : procedure->zone_count;
	result->minimum_tur = procedure->minimum_tur;
	result->reliability = procedure->reliability;
	result->reliability_observed = procedure->reliability_observed;
	if (procedure->reliability > 0.0)
		result->prior_words = fl_arena_printf(w->arena,
		                                      "Before the calibration, errors of such instruments are taken as normal "
		                                      "about zero, with %s %% of the %s in "
		                                      "tolerance",
		                                      fl_analysis_number(w->arena, 100.0 * procedure->reliability, 4),
		                                      procedure->reliability_observed ? "values as observed" : "true values");
	double hysteresis = own ? instrument->hysteresis_limit_pct_span : NAN;
	result->hysteresis_limit_span = (isnan(hysteresis) ? procedure->hysteresis_limit_pct_span : hysteresis) / 100.0;
	result->linearity_limit_span = procedure->linearity_limit_pct_span / 100.0;
	result->deciding_linearity = procedure->deciding_linearity;
	result->coverage_probability =
	    procedure->coverage_probability > 0.0 ? procedure->coverage_probability : FL_COVERAGE_2_SIGMA;
	result->dp_full_pa = w->reference.dp_full_pa;
}

/* ---- a run ---- */

static fl_run_result empty_run(fl_run_kind kind) {
	fl_run_result run = {.kind = kind};
	run.stopped_zero_span = run.stopped_zero_u_span = run.running_zero_span = run.running_zero_u_span = NAN;
	run.error_high_span = run.error_low_span = NAN;
	run.zero_error_span = run.span_error_span = run.span_between_ends_span = NAN;
	run.hysteresis_span = run.hysteresis_cycle_span = NAN;
	run.repeatability_span = run.repeatability_s_span = NAN;
	return run;
}

static void warn_about_oils(work *w, const fl_run_result *run) {
	for (size_t i = 0; i < run->reading_count; i++) {
		const fl_reading_result *reading = &run->readings[i];
		if (!reading->used || !(reading->oil.outside_k > 0.0))
			continue;
		fl_analysis_say(w->arena, &w->warnings,
		                "%s: read outside the certified temperatures of lot %s; its viscosity is extrapolated and its "
		                "uncertainty widened",
		                w->session->points[reading->reading->point].oil,
		                w->session->points[reading->reading->point].lot);
	}
}

static fl_status compute_run(work *w, fl_run_result *run, fl_error *err) {
	fl_status status = fl_analysis_points(w, run, err);
	if (status >= 0)
		status = fl_analysis_spread(w, run, err);
	if (status >= 0)
		status = fl_analysis_budgets(w, run, err);
	if (status >= 0)
		status = fl_analysis_lines(w, run, err);
	if (status >= 0)
		status = fl_analysis_general(w, run, err);
	if (status >= 0)
		status = fl_analysis_verdicts(w, run, err);
	if (status >= 0)
		status = fl_analysis_flows(w, run, err);
	if (status >= 0)
		warn_about_oils(w, run);
	return status;
}

static const char *why_unavailable(const work *w, const fl_run_result *run) {
	const fl_session_run *declared = &w->session->runs[run->kind];
	if (declared->missing)
		return declared->missing_reason ? declared->missing_reason : "declared missing without a reason";
	if (run->reading_count > 0)
		return "all its readings are struck";
	return run->kind == FL_RUN_AS_LEFT ? "the as-left run was not taken" : "the as-found run was not taken";
}

static fl_status take_run(work *w, fl_run_kind kind, fl_error *err) {
	fl_run_result *run = &w->result->runs[kind];
	*run = empty_run(kind);
	w->not_determined = (sentences){0};
	fl_status status = fl_analysis_readings(w, kind, run, err);
	if (status < 0)
		return status;
	run->available = run->reading_count > run->struck_count && !w->session->runs[kind].missing;
	if (!run->available) {
		run->unavailable_reason = why_unavailable(w, run);
		run->verdict_reason = "no verdict: there are no readings";
		return FL_OK;
	}
	if (w->procedure->medium == FL_MEDIUM_PRESSURE)
		fl_analysis_say(w->arena, &w->not_determined,
		                "error of pump and capillary not determined: the pressure was injected into the transmitter");
	status = compute_run(w, run, err);
	run->not_determined = w->not_determined.items;
	run->not_determined_count = w->not_determined.count;
	if (status >= 0 && w->not_determined.failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for what is not determined");
	return status;
}

/* Left alone: as-left is as-found. */
static void carry_over(work *w) {
	fl_run_result *found = &w->result->runs[FL_RUN_AS_FOUND], *left = &w->result->runs[FL_RUN_AS_LEFT];
	if (w->session->decision != FL_DECISION_LEAVE || left->available || !found->available)
		return;
	*left = *found;
	left->kind = FL_RUN_AS_LEFT;
	left->same_as_found = true;
}

static fl_status hand_out(work *w, fl_error *err) {
	fl_result *result = w->result;
	if (w->warnings.failed || w->not_traceable.failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the warnings");
	result->warnings = w->warnings.items;
	result->warning_count = w->warnings.count;
	result->not_traceable = w->not_traceable.items;
	result->not_traceable_count = w->not_traceable.count;
	result->traceable = w->not_traceable.count == 0;
	return FL_OK;
}

static fl_status compute(work *w, fl_error *err) {
	fl_status status = fl_analysis_items(w, err);
	if (status < 0)
		return status;
	take_terms(w);
	for (fl_run_kind kind = FL_RUN_AS_FOUND; kind < FL_RUN_KINDS; kind++) {
		status = take_run(w, kind, err);
		if (status < 0)
			return status;
	}
	carry_over(w);
	status = fl_analysis_functions(w, err);
	if (status < 0)
		return status;
	fl_analysis_say_correlation(w);
	fl_analysis_trace(w);
	return hand_out(w, err);
}

fl_status fl_analysis_session(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                              fl_result *out, fl_error *err) {
	fl_result result = {0};
	work w = {.session = session, .procedure = procedure, .stock = stock, .result = &result, .arena = &result.arena};
	fl_status status = compute(&w, err);
	if (status < 0) {
		fl_arena_free(&result.arena);
		return status;
	}
	*out = result;
	return FL_OK;
}

void fl_result_free(fl_result *result) {
	fl_arena_free(&result->arena);
	*result = (fl_result){0};
}
