/* analysis/decide.c - tolerance and verdict of each point; the worst point and with it the verdict of the run.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "work.h"

#include <math.h>

/* Limits are inclusive and judged on unrounded numbers. An error such as (20.32 mA - 20 mA) / 16 mA is 0.02 as
 * decimals and a few units of the last binary place away from it here; 2^-40 of the tolerance, far below any
 * resolution, takes that up. */
static const double rounding_of_tolerance = 0x1p-40;
/* Tolerance to uncertainty ratio below which readers are warned: ANSI/NCSL Z540.3, 5.3, asks for 4:1. */
static const double comfortable_tur = 4.0;

const char *fl_verdict_word(fl_verdict verdict) {
	static const char *const words[] = {[FL_VERDICT_NONE] = "",
	                                    [FL_VERDICT_PASS] = "pass",
	                                    [FL_VERDICT_CONDITIONAL_PASS] = "conditional pass",
	                                    [FL_VERDICT_CONDITIONAL_FAIL] = "conditional fail",
	                                    [FL_VERDICT_FAIL] = "fail"};
	return words[verdict];
}

fl_verdict fl_analysis_decide(fl_rule rule, double error, double expanded, double tolerance) {
	double size = fabs(error), slack = rounding_of_tolerance * tolerance;
	if (rule == FL_RULE_NONE || isnan(error) || isnan(expanded) || isnan(tolerance))
		return FL_VERDICT_NONE;
	bool within_guard = size <= tolerance - expanded + slack;
	bool within_tolerance = size <= tolerance + slack;
	bool within_doubt = size <= tolerance + expanded + slack;
	switch (rule) {
	case FL_RULE_SIMPLE:
		return within_tolerance ? FL_VERDICT_PASS : FL_VERDICT_FAIL;
	case FL_RULE_GUARDED:
		return within_guard ? FL_VERDICT_PASS : FL_VERDICT_FAIL;
	case FL_RULE_FOUR_STATES:
		if (within_guard)
			return FL_VERDICT_PASS;
		if (within_tolerance)
			return FL_VERDICT_CONDITIONAL_PASS;
		return within_doubt ? FL_VERDICT_CONDITIONAL_FAIL : FL_VERDICT_FAIL;
	case FL_RULE_NONE:
		break;
	}
	return FL_VERDICT_NONE;
}

/* ---- a band at a place of the scale ---- */

/* Dial units to a fraction of span there; a dial in seconds is not divided evenly. NAN where it has no division. */
static double dial_units_as_span(const fl_scale *scale, double units, double x) {
	if (scale->dial_unit == FL_DIAL_MM2_S || scale->dial_unit == FL_DIAL_MPA_S)
		return units / (scale->high - scale->low);
	const double step = 1e-5; /* of span: far below any tolerance, far above rounding */
	double low = NAN, high = NAN;
	if (fl_physics_dial_at(scale, x - step, &low, NULL) < 0 || fl_physics_dial_at(scale, x + step, &high, NULL) < 0)
		return NAN;
	return units * 2.0 * step / (high - low);
}

/* Half width of a band at x, fraction of span; NAN where it says nothing. */
static double band_at(const fl_scale *scale, const fl_band *band, double x) {
	switch (band->basis) {
	case FL_BAND_PERCENT_SPAN:
		return band->half_width / 100.0;
	case FL_BAND_PERCENT_READING:
		return x > FL_LOWEST_X_FOR_READING ? band->half_width / 100.0 * x : NAN;
	case FL_BAND_DIAL_UNITS:
		return dial_units_as_span(scale, band->half_width, x);
	case FL_BAND_NONE:
		break;
	}
	return NAN;
}

/* The zone that x lies in, ends included, by the same slack as a limit; where two touch, the one with the tighter band
 * there. NULL for none. */
static const fl_zone *zone_at(const fl_result *result, const fl_scale *scale, double x) {
	const fl_zone *found = NULL;
	const double slack = 100.0 * rounding_of_tolerance;
	for (int i = 0; i < result->zone_count; i++) {
		const fl_zone *zone = &result->zones[i];
		if (!(100.0 * x >= zone->from_pct_span - slack && 100.0 * x <= zone->to_pct_span + slack))
			continue;
		if (!found || band_at(scale, &zone->band, x) < band_at(scale, &found->band, x))
			found = zone;
	}
	return found;
}

double fl_analysis_tolerance_at(const fl_result *result, const fl_scale *scale, double x) {
	const fl_zone *zone = zone_at(result, scale, x);
	return band_at(scale, zone ? &zone->band : &result->tolerance, x);
}

/* ---- points ---- */

static bool tur_too_small(const work *w, const fl_point_result *point) {
	return point->tur < w->result->minimum_tur * (1.0 - rounding_of_tolerance);
}

/* Half width of what passes by the rule: for four states, what passes without condition. */
static double acceptance_of(fl_rule rule, double tolerance, double expanded) {
	bool guarded = rule == FL_RULE_GUARDED || rule == FL_RULE_FOUR_STATES;
	return rule == FL_RULE_NONE ? NAN : guarded ? tolerance - expanded : tolerance;
}

/* JCGM 106:2012 7.4 and, with the prior that the procedure states, 9.5. */
static void take_risks(const work *w, fl_point_result *point) {
	const fl_result *result = w->result;
	double T = point->tolerance_span, A = acceptance_of(result->rule, T, point->sum.expanded), uc = point->sum.uc;
	point->acceptance_span = A;
	if (isnan(T) || isnan(uc))
		return;
	point->risk = 1.0 - fl_numeric_conformance(point->error_span, uc, (fl_interval){-T, T});
	if (!(result->reliability > 0.0) || !(A > 0.0))
		return;
	fl_reliability kind = result->reliability_observed ? FL_RELIABILITY_OBSERVED : FL_RELIABILITY_TRUE;
	point->prior_u_span = fl_numeric_prior_u(T, result->reliability, uc, kind);
	point->has_global =
	    point->prior_u_span > 0.0 && fl_numeric_global_risk(0.0, point->prior_u_span, uc, (fl_interval){-T, T},
	                                                        (fl_interval){-A, A}, &point->global, NULL) >= 0;
}

static void decide_point(const work *w, fl_point_result *point) {
	const fl_scale *scale = &w->reference.instrument->scale;
	point->zone = zone_at(w->result, scale, point->x);
	point->tolerance_span = fl_analysis_tolerance_at(w->result, scale, point->x);
	point->tur = point->tolerance_span / point->sum.expanded;
	point->risk = point->acceptance_span = point->prior_u_span = NAN;
	take_risks(w, point);
	point->verdict = fl_analysis_decide(w->result->rule, point->error_span, point->sum.expanded, point->tolerance_span);
	if (tur_too_small(w, point) && !w->procedure->states_below_tur)
		point->verdict = FL_VERDICT_NONE;
}

static const fl_point_result *smaller_tur(const fl_point_result *points, size_t count, const fl_point_result *found) {
	for (size_t i = 0; i < count; i++)
		if (!isnan(points[i].tur) && (!found || points[i].tur < found->tur))
			found = &points[i];
	return found;
}

/* The weakest point of a run, directions first; NULL where no point has a tolerance. */
static const fl_point_result *weakest_point(const fl_run_result *run) {
	const fl_point_result *found = smaller_tur(run->points, run->point_count, NULL);
	return smaller_tur(run->combined, run->combined_count, found);
}

static void warn_about_points(work *w, const fl_run_result *run) {
	const fl_point_result *weakest = weakest_point(run);
	if (weakest && weakest->tur < comfortable_tur)
		fl_analysis_say(w->arena, &w->warnings, "%s run: at %s the tolerance is only %s times the expanded uncertainty",
		                fl_run_word(run->kind), fl_analysis_point_name(w, weakest),
		                fl_analysis_number(w->arena, weakest->tur, 2));
	for (size_t i = 0; i < run->combined_count && w->result->tolerance.basis != FL_BAND_NONE; i++)
		if (isnan(run->combined[i].tolerance_span))
			fl_analysis_say(w->arena, &w->warnings,
			                "%s: the tolerance says nothing at this place of the scale: no verdict",
			                fl_analysis_point_name(w, &run->combined[i]));
}

/* ---- the run ---- */

/* |error| + U against the tolerance; against nothing where there is none. */
static double burden(const fl_point_result *point) {
	double reach = fabs(point->error_span) + point->sum.expanded;
	return isnan(point->tolerance_span) ? reach : reach / point->tolerance_span;
}

static bool is_worse(const fl_point_result *point, const fl_point_result *than) {
	if (!than)
		return true;
	bool judged = !isnan(point->tolerance_span), than_judged = !isnan(than->tolerance_span);
	if (judged != than_judged)
		return judged;
	if (point->verdict != than->verdict)
		return point->verdict > than->verdict;
	return burden(point) > burden(than);
}

static const fl_point_result *find_worst(const fl_run_result *run) {
	const fl_point_result *worst = NULL;
	for (size_t i = 0; i < run->point_count; i++)
		if (is_worse(&run->points[i], worst))
			worst = &run->points[i];
	for (size_t i = 0; i < run->combined_count; i++)
		if (run->combined[i].both && is_worse(&run->combined[i], worst))
			worst = &run->combined[i];
	return worst;
}

/* The rule's name within a sentence; fl_procedure_rule_words explains it. */
static const char *rule_name(fl_rule rule) {
	switch (rule) {
	case FL_RULE_SIMPLE:
		return "simple acceptance";
	case FL_RULE_GUARDED:
		return "guarded acceptance with w = U";
	case FL_RULE_FOUR_STATES:
		return "four states with w = U";
	case FL_RULE_NONE:
		break;
	}
	return "no rule";
}

static const char *reason_of_worst(const work *w, const fl_point_result *worst) {
	return fl_arena_printf(w->arena, "%s: error %s of span, U %s, tolerance ±%s: %s (%s)",
	                       fl_analysis_point_name(w, worst), fl_analysis_percent_signed(w->arena, worst->error_span, 3),
	                       fl_analysis_percent(w->arena, worst->sum.expanded, 3),
	                       fl_analysis_percent(w->arena, worst->tolerance_span, 3), fl_verdict_word(worst->verdict),
	                       rule_name(w->result->rule));
}

/* In writing, because a reader would otherwise take the verdict for more than it is. */
static void state_below_tur(work *w, const fl_run_result *run, const fl_point_result *point) {
	const char *words = fl_arena_printf(
	    w->arena,
	    "%s run: conformity is stated although the tolerance at %s is only %s times the expanded uncertainty and %s is "
	    "the least otherwise: the procedure says so. The risk of a wrong decision is accordingly larger",
	    fl_run_word(run->kind), fl_analysis_point_name(w, point), fl_analysis_number(w->arena, point->tur, 3),
	    fl_analysis_number(w->arena, w->result->minimum_tur, 3));
	if (!w->result->below_tur)
		w->result->below_tur = words;
	fl_analysis_say(w->arena, &w->warnings, "%s", words ? words : "?");
}

static void withhold(const work *w, fl_run_result *run, const fl_point_result *point) {
	run->verdict = FL_VERDICT_NONE;
	run->verdict_reason = fl_arena_printf(
	    w->arena, "no verdict: at %s the tolerance is %s times the expanded uncertainty, and the procedure asks for %s",
	    fl_analysis_point_name(w, point), fl_analysis_number(w->arena, point->tur, 3),
	    fl_analysis_number(w->arena, w->result->minimum_tur, 3));
}

/* A point of which nothing is known about the uncertainty; NULL if there is none. */
static const fl_point_result *point_without_uncertainty(const fl_run_result *run) {
	for (size_t i = 0; i < run->point_count; i++)
		if (isnan(run->points[i].sum.expanded))
			return &run->points[i];
	return NULL;
}

static void decide_run(work *w, fl_run_result *run) {
	run->worst = find_worst(run);
	const fl_point_result *weakest = weakest_point(run), *unknown = point_without_uncertainty(run);
	if (w->result->rule == FL_RULE_NONE) {
		run->verdict_reason = "no verdict: no decision rule is agreed";
	} else if (w->result->tolerance.basis == FL_BAND_NONE) {
		run->verdict_reason = "no verdict: no tolerance is stated";
	} else if (unknown) {
		run->verdict_reason = fl_arena_printf(w->arena, "no verdict: nothing is known of the uncertainty at %s",
		                                      fl_analysis_point_name(w, unknown));
	} else if (weakest && tur_too_small(w, weakest) && !w->procedure->states_below_tur) {
		withhold(w, run, weakest);
	} else if (!run->worst || run->worst->verdict == FL_VERDICT_NONE) {
		run->verdict_reason = "no verdict: the tolerance says nothing at any of the points";
	} else {
		run->verdict = run->worst->verdict;
		run->verdict_reason = reason_of_worst(w, run->worst);
		if (weakest && tur_too_small(w, weakest))
			state_below_tur(w, run, weakest);
	}
}

/* True if every point lies inside the adjust limit, and inside a zone's tolerance where that is tighter; false where no
 * limit is stated. */
static bool inside_adjust_limit(const work *w, const fl_run_result *run) {
	const fl_band *own = &w->reference.instrument->adjust_limit;
	bool aside = w->procedure->sets_limits_aside || own->basis == FL_BAND_NONE;
	const fl_band *limit = aside ? &w->procedure->adjust_limit : own;
	bool any = false;
	for (size_t i = 0; i < run->point_count; i++) {
		double half_width = band_at(&w->reference.instrument->scale, limit, run->points[i].x);
		if (isnan(half_width))
			continue;
		any = true;
		if (run->points[i].zone)
			half_width = fmin(half_width, run->points[i].tolerance_span);
		if (fl_analysis_decide(FL_RULE_SIMPLE, run->points[i].error_span, 0.0, half_width) == FL_VERDICT_FAIL)
			return false;
	}
	return any;
}

fl_status fl_analysis_verdicts(work *w, fl_run_result *run, fl_error *err) {
	for (size_t i = 0; i < run->point_count; i++)
		decide_point(w, &run->points[i]);
	for (size_t i = 0; i < run->combined_count; i++)
		decide_point(w, &run->combined[i]);
	warn_about_points(w, run);
	decide_run(w, run);
	run->inside_adjust_limit = inside_adjust_limit(w, run);
	return run->verdict_reason ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory for the verdict");
}
