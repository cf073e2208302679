/* procedure.c - reads a procedure's template and refuses one that cannot be carried out or would decide by accident.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The format is described in docs/procedures.md.
 */
#include "foundleft/procedure.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "read.h"

enum { MAX_POINTS = FL_MOST_POINTS, MAX_CYCLES = FL_MOST_CYCLES, MAX_READINGS = 50 };

static const char *const fields[] = {
    "id",
    "version",
    "title",
    "source",
    "maintenance",
    "method",
    "medium",
    "stopped zero",
    "points",
    "cycles",
    "falling",
    "readings",
    "bath",
    "bath tolerance",
    "settled",
    "tolerance",
    "tolerance zones",
    "instrument limits",
    "adjust limit",
    "hysteresis limit",
    "linearity limit",
    "deciding linearity",
    "rule",
    "coverage",
    "oil interpolation",
    "oil ageing per year",
    "oil certificates correlated",
    "line",
    "minimum TUR",
    "conformity below minimum TUR",
    "in-tolerance reliability",
    "budget on certificate",
    "further uncertainty",
    "gates",
    "conditions",
    "function checks",
    "restore",
    "opinions on certificate",
    "signatures",
    NULL,
};

/* ---- words ------------------------------------------------------------------------------------------------------- */

static const char *const medium_words[] = {"oil", "pressure", NULL};
static const char *const rule_words[] = {"none", "simple acceptance", "guard band", "four states", NULL};
static const char *const linearity_words[] = {"independent", "terminal-based", "zero-based", NULL};
static const char *const part_words[FL_PARTS] = {"performed", "reviewed", "authorised"};
static const char *const line_words[] = {"by uncertainty ratio", "ordinary", "generalised", NULL};
static const char *const distribution_words[] = {"normal", "rectangular", "triangular", NULL};

const char *fl_part_word(fl_part part) {
	return (unsigned)part < FL_PARTS ? part_words[part] : "?";
}

fl_part fl_part_find(const char *word) {
	unsigned part = 0;
	while (part < FL_PARTS && strcmp(part_words[part], word) != 0)
		part++;
	return (fl_part)part;
}

const char *fl_procedure_rule_words(fl_rule rule) {
	switch (rule) {
	case FL_RULE_SIMPLE:
		return "Simple acceptance (ILAC-G8:09/2019): pass where the error lies within the tolerance, fail elsewhere; "
		       "its "
		       "uncertainty is stated but does not move the limits.";
	case FL_RULE_GUARDED:
		return "Guarded acceptance (ILAC-G8:09/2019, guard band w = U): pass where the error lies within the tolerance "
		       "less its expanded uncertainty, fail elsewhere.";
	case FL_RULE_FOUR_STATES:
		return "Four states (ILAC-G8:09/2019, guard band w = U): pass within the tolerance less the expanded "
		       "uncertainty, "
		       "conditional pass within the tolerance, conditional fail within the tolerance plus the expanded "
		       "uncertainty, fail beyond.";
	case FL_RULE_NONE:
		break;
	}
	return "No decision rule was agreed: no statement of conformity is made.";
}

const char *fl_procedure_linearity_word(fl_linearity linearity) {
	return linearity >= FL_LINEARITY_INDEPENDENT && linearity <= FL_LINEARITY_ZERO_BASED ? linearity_words[linearity]
	                                                                                     : linearity_words[0];
}

/* ---- bands ------------------------------------------------------------------------------------------------------- */

static fl_status refuse_band(const fl_node *scalar, fl_unit found, fl_unit dial, fl_error *err) {
	if (found == FL_U_PERCENT)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
		                  "\"%.60s\" of what: write \"%% of span\" or \"%% of reading\"", scalar->text);
	if (dial == FL_U_NONE)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_node_place(scalar),
		    "\"%.60s\" does not fit here, because a procedure knows no dial: write it in %% of span or %% of "
		    "reading",
		    scalar->text);
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
	                  "\"%.60s\" does not fit here: write it in %% of span, %% of reading or the dial's unit, %s",
	                  scalar->text, fl_unit_text(dial));
}

fl_status fl_procedure_band(const fl_node *map, const char *key, bool required, fl_unit dial, fl_band *out,
                            fl_error *err) {
	const char *text = NULL;
	TRY(fl_node_text(map, key, required, &text, err));
	if (!text)
		return FL_OK;
	const fl_node *scalar = fl_node_get(map, key);
	double value = 0.0;
	fl_unit unit = FL_U_NONE;
	TRY(fl_node_measure(scalar, &value, &unit, err));
	fl_band_basis basis = unit == FL_U_PERCENT_SPAN           ? FL_BAND_PERCENT_SPAN
	                      : unit == FL_U_PERCENT_READING      ? FL_BAND_PERCENT_READING
	                      : dial != FL_U_NONE && unit == dial ? FL_BAND_DIAL_UNITS
	                                                          : FL_BAND_NONE;
	if (basis == FL_BAND_NONE)
		return refuse_band(scalar, unit, dial, err);
	bool percent = basis != FL_BAND_DIAL_UNITS;
	if (value <= 0.0 || (percent && value > 50.0))
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(scalar), "%.60s is not possible: above 0%s would be",
		                  scalar->text, percent ? " and up to 50 %" : "");
	*out = (fl_band){basis, value};
	return FL_OK;
}

/* ---- zones ------------------------------------------------------------------------------------------------------- */

/* What the zones of one list are read with. */
typedef struct zone_reader {
	fl_unit dial;
	fl_zone_place pct_of_dial;
	const void *context;
} zone_reader;

static fl_status read_zone_end(const fl_node *map, const char *key, const zone_reader *by, double *pct, fl_error *err) {
	const char *text = NULL;
	double value = 0.0;
	fl_unit unit = FL_U_NONE;
	TRY(fl_node_text(map, key, true, &text, err));
	const fl_node *scalar = fl_node_get(map, key);
	TRY(fl_node_measure(scalar, &value, &unit, err));
	bool percent = unit == FL_U_PERCENT_SPAN || unit == FL_U_PERCENT,
	     on_dial = by->dial != FL_U_NONE && unit == by->dial;
	if (!percent && !on_dial)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
		                  "\"%.60s\" does not fit here: write it in %% of span%s%s", text,
		                  by->dial != FL_U_NONE ? " or " : "", by->dial != FL_U_NONE ? fl_unit_text(by->dial) : "");
	*pct = on_dial ? by->pct_of_dial(by->context, value) : value;
	if (!(*pct >= -5.0 && *pct <= 110.0))
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(scalar),
		                  "%.60s is not on the scale: from -5 to 110 %% of span would be", text);
	return FL_OK;
}

static fl_status read_zone(const fl_node *map, const zone_reader *by, fl_zone *zone, fl_error *err) {
	static const char *const known[] = {"from", "to", "band", NULL};
	TRY(fl_node_only(map, known, err));
	TRY(read_zone_end(map, "from", by, &zone->from_pct_span, err));
	TRY(read_zone_end(map, "to", by, &zone->to_pct_span, err));
	TRY(fl_procedure_band(map, "band", true, by->dial, &zone->band, err));
	if (zone->from_pct_span >= zone->to_pct_span)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(map),
		                  "the zone ends at %g %% of span, where it begins: from %g %%", zone->to_pct_span,
		                  zone->from_pct_span);
	return FL_OK;
}

fl_status fl_procedure_zones(fl_arena *arena, const fl_node *map, const char *key, fl_unit dial,
                             fl_zone_place pct_of_dial, const void *context, const fl_zone **out, int *count,
                             fl_error *err) {
	const fl_node *list;
	const zone_reader by = {dial, pct_of_dial, context};
	TRY(fl_node_list(map, key, false, &list, err));
	if (!list || list->count == 0)
		return FL_OK;
	if (!fl_node_get(map, "tolerance"))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list),
		                  "zones are exceptions: write under tolerance what holds elsewhere on the scale");
	if (list->count > MAX_POINTS)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list), "more than %d zones", (int)MAX_POINTS);
	fl_zone *zones = fl_arena_alloc(arena, list->count, sizeof *zones);
	if (!zones)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	for (size_t i = 0; i < list->count; i++) {
		TRY(read_zone(list->items[i], &by, &zones[i], err));
		if (i > 0 && zones[i].from_pct_span < zones[i - 1].to_pct_span)
			return fl_fail_at(
			    err, FL_E_VALUE, fl_node_place(list->items[i]),
			    "it begins at %g %% of span, before the zone above it ends, at %g %%: write zones from low "
			    "to high and apart",
			    zones[i].from_pct_span, zones[i - 1].to_pct_span);
	}
	*out = zones;
	*count = (int)list->count;
	return FL_OK;
}

/* A limit in % of span; stays NAN where it is absent. */
static fl_status read_span_limit(const fl_node *root, const char *key, double *out, fl_error *err) {
	fl_band band = {FL_BAND_NONE, 0.0};
	TRY(fl_procedure_band(root, key, false, FL_U_NONE, &band, err));
	if (band.basis == FL_BAND_PERCENT_READING)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(root, key)), "write this limit in %% of span");
	if (band.basis == FL_BAND_PERCENT_SPAN)
		*out = band.half_width;
	return FL_OK;
}

/* ---- the parts of a template ---------------------------------------------------------------------------------------
 */

static fl_status read_identity(const fl_node *root, fl_procedure *p, fl_error *err) {
	TRY(fl_node_text(root, "id", true, &p->id, err));
	if (!fl_procedure_is_id(p->id))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(root, "id")),
		                  "\"%.60s\" is no name for a procedure: use letters, digits and hyphens", p->id);
	TRY(fl_node_text(root, "version", true, &p->version, err));
	TRY(fl_node_text(root, "title", true, &p->title, err));
	TRY(fl_node_text(root, "source", true, &p->source, err));
	TRY(fl_node_text(root, "maintenance", true, &p->maintenance, err));
	return fl_node_text(root, "method", true, &p->method, err);
}

static fl_status read_medium(const fl_node *root, fl_procedure *p, fl_error *err) {
	int medium = 0;
	TRY(fl_node_choice(root, "medium", true, medium_words, &medium, err));
	p->medium = (fl_medium)medium;
	bool oil = p->medium == FL_MEDIUM_OIL;
	TRY(fl_node_bool(root, "stopped zero", oil, &p->stopped_zero, err));
	if (!oil && p->stopped_zero)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(root, "stopped zero")),
		                  "a transmitter alone has no pump to stop: write no, and take 0 %% as a point");
	p->bath_c = NAN;
	for (int i = 0; !oil && i < 2; i++) {
		const fl_node *bath = fl_node_get(root, i ? "bath tolerance" : "bath");
		if (bath)
			return fl_fail_at(err, FL_E_VALUE, fl_node_place(bath),
			                  "no bath is needed where a pressure is injected: leave this field out");
	}
	TRY(fl_node_amount_within(root, "bath", oil, FL_Q_TEMPERATURE, 5.0, 150.0, &p->bath_c, NULL, err));
	return fl_node_amount_within(root, "bath tolerance", oil, FL_Q_TEMPERATURE_DIFFERENCE, 0.001, 10.0,
	                             &p->bath_tolerance_k, NULL, err);
}

/* "40 % of span", also "40 %": there is nothing else that a place on the scale could be part of. */
static fl_status read_percent_span(const fl_node *map, const char *key, bool required, double *pct, fl_error *err) {
	const char *text = NULL;
	double value = 0.0;
	fl_unit unit = FL_U_NONE;
	TRY(fl_node_text(map, key, required, &text, err));
	if (!text)
		return FL_OK;
	const fl_node *scalar = fl_node_get(map, key);
	TRY(fl_node_measure(scalar, &value, &unit, err));
	if (unit != FL_U_PERCENT_SPAN && unit != FL_U_PERCENT)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" does not fit here: write it in %% of span",
		                  text);
	if (value < -5.0 || value > 110.0)
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(scalar), "%.60s is not possible: from -5 to 110 %% would be",
		                  text);
	*pct = value;
	return FL_OK;
}

static fl_status read_point(const fl_node *map, fl_medium medium, fl_plan_point *point, fl_error *err) {
	static const char *const known[] = {"at", "from", "to", NULL};
	bool oil = medium == FL_MEDIUM_OIL;
	TRY(fl_node_only(map, known, err));
	TRY(read_percent_span(map, "at", true, &point->position_pct_span, err));
	point->oil_low_pct_span = point->position_pct_span - 1.0;
	point->oil_high_pct_span = point->position_pct_span + 1.0;
	TRY(read_percent_span(map, "from", oil, &point->oil_low_pct_span, err));
	TRY(read_percent_span(map, "to", oil, &point->oil_high_pct_span, err));
	if (point->position_pct_span < 0.0 || point->position_pct_span > 100.0)
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(fl_node_get(map, "at")),
		                  "a point lies from 0 to 100 %% of span");
	if (point->oil_low_pct_span > point->position_pct_span || point->oil_high_pct_span < point->position_pct_span)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(map),
		                  "the point at %g %% lies outside its own window, %g to %g %%", point->position_pct_span,
		                  point->oil_low_pct_span, point->oil_high_pct_span);
	return FL_OK;
}

static fl_status check_order(const fl_node *list, const fl_plan_point *points, size_t i, fl_error *err) {
	if (i == 0)
		return FL_OK;
	const fl_plan_point *below = &points[i - 1], *here = &points[i];
	if (here->position_pct_span <= below->position_pct_span)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list->items[i]),
		                  "%g %% does not lie above the point before it, %g %%: write the points from low to high",
		                  here->position_pct_span, below->position_pct_span);
	if (here->oil_low_pct_span <= below->oil_high_pct_span)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list->items[i]),
		                  "its window begins at %g %%, inside the window of the point before it, which ends at %g %%",
		                  here->oil_low_pct_span, below->oil_high_pct_span);
	return FL_OK;
}

static fl_status read_points(const fl_node *root, fl_procedure *p, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(root, "points", true, &list, err));
	if (list->count > MAX_POINTS)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list), "more than %d points", (int)MAX_POINTS);
	fl_plan_point *points = fl_arena_alloc(&p->arena, list->count, sizeof *points);
	if (!points)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	for (size_t i = 0; i < list->count; i++) {
		TRY(read_point(list->items[i], p->medium, &points[i], err));
		TRY(check_order(list, points, i, err));
	}
	p->points = points;
	p->point_count = (int)list->count;
	return FL_OK;
}

static fl_status read_plan(const fl_node *root, fl_procedure *p, fl_error *err) {
	TRY(read_points(root, p, err));
	TRY(fl_node_integer(root, "cycles", true, 1, MAX_CYCLES, &p->cycles, err));
	TRY(fl_node_bool(root, "falling", true, &p->falling, err));
	return fl_node_integer(root, "readings", true, 1, MAX_READINGS, &p->readings, err);
}

static fl_status read_settled(const fl_node *root, fl_procedure *p, fl_error *err) {
	static const char *const known[] = {"readings",           "window", "drift", "temperature per minute", "watch",
	                                    "identical readings", NULL};
	const fl_node *map = fl_node_get(root, "settled");
	fl_settle *settle = &p->settle;
	if (!map)
		return fl_fail_at(err, FL_E_VALUE, (fl_place){root->file, root->line, root->column, "settled"},
		                  "missing: readings, window and drift by which a reading counts as settled");
	TRY(fl_node_only(map, known, err));
	TRY(fl_node_integer(map, "readings", true, 2, MAX_READINGS, &settle->readings, err));
	TRY(fl_node_amount_within(map, "window", true, FL_Q_TIME, 0.0, 7200.0, &settle->window_s, NULL, err));
	TRY(read_percent_span(map, "drift", true, &settle->drift_pct_span, err));
	if (settle->drift_pct_span <= 0.0)
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(fl_node_get(map, "drift")),
		                  "no reading stands that still: above 0 %% of span is needed");
	settle->temp_k_per_min = INFINITY;
	TRY(fl_node_amount_within(map, "temperature per minute", p->medium == FL_MEDIUM_OIL, FL_Q_TEMPERATURE_DIFFERENCE,
	                          0.0001, 10.0, &settle->temp_k_per_min, NULL, err));
	TRY(fl_node_bool(map, "watch", false, &settle->watch_required, err));
	return fl_node_integer(map, "identical readings", false, 2, 1000, &settle->identical_readings, err);
}

/* ---- limits and the rule ---- */

static fl_status check_limits(const fl_node *root, const fl_procedure *p, fl_error *err) {
	const fl_band *tolerance = &p->tolerance, *adjust = &p->adjust_limit;
	if (tolerance->basis == adjust->basis && adjust->half_width > tolerance->half_width)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_node_place(fl_node_get(root, "adjust limit")),
		    "%g %% is wider than the tolerance, %g %%: an instrument would be left alone out of tolerance",
		    adjust->half_width, tolerance->half_width);
	if (tolerance->basis == FL_BAND_PERCENT_SPAN && p->settle.drift_pct_span >= tolerance->half_width)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(fl_node_get(root, "settled"), "drift")),
		                  "%g %% of span is not below the tolerance, %g %%: a moving reading would count as settled",
		                  p->settle.drift_pct_span, tolerance->half_width);
	if (!isnan(p->hysteresis_limit_pct_span) && !p->falling)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_node_place(fl_node_get(root, "hysteresis limit")),
		    "without falling passes hysteresis is not determined: leave the limit out or write falling: yes");
	if (!isnan(p->linearity_limit_pct_span) && p->point_count < 3)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(root, "linearity limit")),
		                  "fewer than three points determine no linearity: leave the limit out or add points");
	return FL_OK;
}

/* {share: 90 %, of: true values} or {share: 90 %, of: observed values}: the two are not the same. */
static fl_status read_reliability(const fl_node *root, fl_procedure *p, fl_error *err) {
	static const char *const known[] = {"share", "of", NULL}, *const of[] = {"true values", "observed values", NULL};
	const fl_node *map = fl_node_get(root, "in-tolerance reliability");
	int whose = 0;
	if (!map)
		return FL_OK;
	TRY(fl_node_only(map, known, err));
	TRY(fl_node_amount_within(map, "share", true, FL_Q_RATIO, 0.01, 0.9999, &p->reliability, NULL, err));
	TRY(fl_node_choice(map, "of", true, of, &whose, err));
	p->reliability_observed = whose == 1;
	return FL_OK;
}

static fl_status read_risks(const fl_node *root, fl_procedure *p, fl_error *err) {
	static const char *const below[] = {"withhold", "state", NULL};
	int what = 0;
	p->minimum_tur = 1.5;
	TRY(fl_node_number(root, "minimum TUR", false, 0.0, 20.0, &p->minimum_tur, err));
	TRY(fl_node_choice(root, "conformity below minimum TUR", false, below, &what, err));
	p->states_below_tur = what == 1;
	return read_reliability(root, p, err);
}

static fl_status read_decision(const fl_node *root, fl_procedure *p, fl_error *err) {
	int rule = 0, linearity = 0;
	TRY(fl_procedure_band(root, "tolerance", false, FL_U_NONE, &p->tolerance, err));
	TRY(fl_procedure_zones(&p->arena, root, "tolerance zones", FL_U_NONE, NULL, NULL, &p->zones, &p->zone_count, err));
	static const char *const limits[] = {"apply", "set aside", NULL};
	int whose = 0;
	TRY(fl_node_choice(root, "instrument limits", false, limits, &whose, err));
	p->sets_limits_aside = whose == 1;
	TRY(fl_procedure_band(root, "adjust limit", false, FL_U_NONE, &p->adjust_limit, err));
	p->hysteresis_limit_pct_span = p->linearity_limit_pct_span = NAN;
	TRY(read_span_limit(root, "hysteresis limit", &p->hysteresis_limit_pct_span, err));
	TRY(read_span_limit(root, "linearity limit", &p->linearity_limit_pct_span, err));
	TRY(fl_node_choice(root, "deciding linearity", false, linearity_words, &linearity, err));
	TRY(fl_node_choice(root, "rule", true, rule_words, &rule, err));
	p->deciding_linearity = (fl_linearity)linearity;
	p->rule = (fl_rule)rule;
	TRY(fl_node_amount_within(root, "coverage", true, FL_Q_RATIO, 0.5, 0.9999, &p->coverage_probability, NULL, err));
	TRY(read_risks(root, p, err));
	return check_limits(root, p, err);
}

/* ---- uncertainty that the procedure adds ---- */

static fl_status read_oil_terms(const fl_node *root, fl_procedure *p, fl_error *err) {
	bool oil = p->medium == FL_MEDIUM_OIL;
	TRY(fl_node_amount_within(root, "oil interpolation", oil, FL_Q_RATIO, 0.0, 0.05,
	                          &p->oil_interpolation_half_width_rel, NULL, err));
	TRY(fl_node_amount_within(root, "oil ageing per year", oil, FL_Q_RATIO, 0.0, 0.05, &p->oil_ageing_per_year_rel,
	                          NULL, err));
	double correlated = 1.0;
	TRY(fl_node_number(root, "oil certificates correlated", false, 0.0, 1.0, &correlated, err));
	p->oil_own_share = 1.0 - correlated;
	return FL_OK;
}

/* Which line, and what goes on the certificate. */
static fl_status read_statement(const fl_node *root, fl_procedure *p, fl_error *err) {
	int line = 0;
	TRY(fl_node_choice(root, "line", false, line_words, &line, err));
	p->line = (fl_line_choice)line;
	return fl_node_bool(root, "budget on certificate", false, &p->budget_on_certificate, err);
}

static fl_status read_coverage_factor(const fl_node *map, fl_extra_term *term, fl_error *err) {
	if (term->distribution == FL_DIST_NORMAL) {
		if (!fl_node_get(map, "k"))
			return fl_fail_at(err, FL_E_VALUE, fl_node_place(map),
			                  "an expanded uncertainty without its coverage factor: write k as its source states it");
		return fl_node_number(map, "k", true, 1.0, 4.0, &term->coverage, err);
	}
	const fl_node *k = fl_node_get(map, "k");
	if (k)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(k), "the value of a %s term is its half width and has no k",
		                  distribution_words[term->distribution]);
	return FL_OK;
}

static fl_status read_extra_term(const fl_node *map, fl_extra_term *term, fl_error *err) {
	static const char *const known[] = {"name", "value", "distribution", "k", "at each point", "source", NULL};
	static const char *const deviation[] = {"the same", "its own", NULL};
	int distribution = 0, whose = 0;
	fl_band band = {FL_BAND_NONE, 0.0};
	TRY(fl_node_only(map, known, err));
	TRY(fl_node_text(map, "name", true, &term->name, err));
	TRY(fl_procedure_band(map, "value", true, FL_U_NONE, &band, err));
	TRY(fl_node_choice(map, "distribution", true, distribution_words, &distribution, err));
	term->basis = band.basis;
	term->value = band.half_width;
	term->distribution = (fl_distribution)distribution;
	TRY(fl_node_choice(map, "at each point", false, deviation, &whose, err));
	term->own = whose == 1;
	TRY(fl_node_text(map, "source", false, &term->source, err));
	return read_coverage_factor(map, term, err);
}

static fl_status read_extra_terms(const fl_node *root, fl_procedure *p, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(root, "further uncertainty", false, &list, err));
	if (!list || list->count == 0)
		return FL_OK;
	fl_extra_term *terms = fl_arena_alloc(&p->arena, list->count, sizeof *terms);
	if (!terms)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	for (size_t i = 0; i < list->count; i++)
		TRY(read_extra_term(list->items[i], &terms[i], err));
	p->extra = terms;
	p->extra_count = (int)list->count;
	return FL_OK;
}

/* ---- who signs ---------------------------------------------------------------------------------------------------
 */

static fl_status read_signatures(const fl_node *root, fl_procedure *p, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(root, "signatures", false, &list, err));
	for (size_t i = 0; list && i < list->count; i++) {
		const fl_node *item = list->items[i];
		fl_part part = item->kind == FL_NODE_SCALAR ? fl_part_find(item->text) : FL_PARTS;
		if (part == FL_PARTS)
			return fl_fail_at(
			    err, FL_E_VALUE, fl_node_place(item),
			    "a certificate is signed by who performed, reviewed or authorised it: write one of these");
		if (p->signatures >> part & 1)
			return fl_fail_at(err, FL_E_VALUE, fl_node_place(item), "\"%s\" stands twice", item->text);
		p->signatures |= 1U << part;
	}
	return FL_OK;
}

/* ---- the whole ---- */

static fl_status read_procedure(const fl_node *root, fl_procedure *p, fl_error *err) {
	TRY(fl_node_only(root, fields, err));
	TRY(read_identity(root, p, err));
	TRY(read_medium(root, p, err));
	TRY(read_plan(root, p, err));
	TRY(read_settled(root, p, err));
	TRY(read_decision(root, p, err));
	TRY(read_oil_terms(root, p, err));
	TRY(read_extra_terms(root, p, err));
	TRY(read_statement(root, p, err));
	TRY(read_signatures(root, p, err));
	p->opinions_on_certificate = false;
	TRY(fl_node_bool(root, "opinions on certificate", false, &p->opinions_on_certificate, err));
	TRY(fl_procedure_read_questions(root, p, err));
	return fl_procedure_read_checks(root, p, err);
}

fl_status fl_procedure_parse(const char *text, const char *file, fl_procedure *out, fl_error *err) {
	fl_procedure p = {0};
	const fl_node *root = NULL;
	p.text = fl_arena_strdup(&p.arena, text);
	fl_status status = p.text ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory");
	if (status == FL_OK)
		status = fl_document_parse(&p.arena, text, file, &root, err);
	if (status == FL_OK)
		status = read_procedure(root, &p, err);
	if (status != FL_OK) {
		fl_arena_free(&p.arena);
		return status;
	}
	*out = p;
	return FL_OK;
}

fl_status fl_procedure_load(const fl_io *io, const char *path, fl_procedure *out, fl_error *err) {
	fl_arena arena = {0};
	const char *text = NULL;
	fl_status status = fl_document_load(&arena, io, path, &text, err);
	if (status == FL_OK)
		status = fl_procedure_parse(text, path, out, err);
	fl_arena_free(&arena);
	return status;
}

void fl_procedure_free(fl_procedure *procedure) {
	fl_arena_free(&procedure->arena);
	*procedure = (fl_procedure){0};
}
