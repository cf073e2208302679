/* analysis/budget.c - the uncertainty budget of each point.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * e = output_x - x, x = (mu / dial density - low) / (high - low) for oils. So a relative change of mu moves e by
 * -g, g = equivalent viscosity / (high - low); of the oil's temperature by g (beta - (drho/dT) / rho) per K; of the
 * density by -g / rho; of the meter by 1 / (signal span). Independent terms, JCGM 100:2008 5.1.2; half widths are
 * rectangular, 4.3.7. Sensitivities are stated in % of span and without sign: each deviation has the same sign at every
 * point, which is all that the covariance of points needs (covariance.c, by the lines' keys).
 */
#include "work.h"

#include <math.h>

static const double days_per_year = 365.25;

/* The budget as it is written. Room is counted before. */
typedef struct budget {
	const work *w;
	int point;
	fl_budget_line *lines;
	size_t count;
} budget;

enum { OWN_TERMS = 16 };

static double divisor(fl_distribution distribution) {
	switch (distribution) {
	case FL_DIST_RECTANGULAR:
		return sqrt(3.0);
	case FL_DIST_TRIANGULAR:
		return sqrt(6.0);
	case FL_DIST_NORMAL:
	case FL_DIST_STUDENT:
		break;
	}
	return 1.0;
}

static const char *rule_of(fl_distribution distribution) {
	switch (distribution) {
	case FL_DIST_RECTANGULAR:
		return "u = a / √3 (JCGM 100 4.3.7)";
	case FL_DIST_TRIANGULAR:
		return "u = a / √6 (JCGM 100 4.3.9)";
	case FL_DIST_STUDENT:
		return "u = s / √n (JCGM 100 4.2.3)";
	case FL_DIST_NORMAL:
		break;
	}
	return "u = U / k (JCGM 100 4.3.3)";
}

/* `sensitivity` in % of span per `unit`. The deviation is the point's own until it is said to be shared. */
static fl_budget_line *add(budget *b, const char *name, fl_distribution distribution, double u, const char *unit,
                           double sensitivity) {
	fl_budget_line *line = &b->lines[b->count++];
	*line = (fl_budget_line){.name = name, .stated = "", .distribution = distribution, .unit = unit, .inside = 1.0};
	line->u = u;
	line->sensitivity = fabs(sensitivity);
	line->contribution_span = line->sensitivity * u / 100.0;
	line->dof = INFINITY;
	line->rule = rule_of(distribution);
	line->source = "";
	line->key = fl_arena_printf(b->w->arena, "%s, point %d", name, b->point + 1);
	return line;
}

/* One deviation at every point that has the same key. */
static void is_shared(budget *b, fl_budget_line *line, const char *by, double shared) {
	line->key = fl_arena_join(b->w->arena, line->name, ", ", by, NULL);
	line->shared = shared;
}

static fl_budget_line *add_half_width(budget *b, const char *name, double half_width, const char *unit,
                                      double sensitivity) {
	fl_budget_line *line =
	    add(b, name, FL_DIST_RECTANGULAR, half_width / divisor(FL_DIST_RECTANGULAR), unit, sensitivity);
	line->stated =
	    fl_arena_join(b->w->arena, fl_analysis_number(b->w->arena, half_width, 3), " ", unit, " half width", NULL);
	return line;
}

static fl_budget_line *add_certificate(budget *b, const char *name, double U, double k, const char *unit,
                                       double sensitivity) {
	fl_arena *arena = b->w->arena;
	fl_budget_line *line = add(b, name, FL_DIST_NORMAL, U / k, unit, sensitivity);
	line->stated = fl_arena_join(arena, fl_analysis_number(arena, U, 3), " ", unit,
	                             ", k = ", fl_analysis_number(arena, k, 3), NULL);
	return line;
}

/* U with its k, or the half width of a uniformity. */
static fl_budget_line *add_stated(budget *b, const char *name, const fl_equipment *item, const char *unit,
                                  double sensitivity) {
	return item->k > 0.0 ? add_certificate(b, name, item->U, item->k, unit, sensitivity)
	                     : add_half_width(b, name, item->U, unit, sensitivity);
}

static const char *procedure_words(const budget *b, const char *field) {
	const fl_procedure *procedure = b->w->procedure;
	return fl_arena_join(b->w->arena, "procedure ", procedure->id ? procedure->id : "",
	                     procedure->version ? " version " : "", procedure->version ? procedure->version : "", ", ",
	                     field, NULL);
}

/* ---- measuring equipment ---- */

static double years_between(fl_day from, fl_day to) {
	return from == FL_NO_DAY || to <= from ? 0.0 : (to - from) / days_per_year;
}

/* Size of one `unit` in the inside unit: differences only, so that °F and °C come out right. */
static double scale_of(fl_unit unit) {
	return fl_to_inside(1.0, unit) - fl_to_inside(0.0, unit);
}

static const char *difference_unit(fl_unit unit) {
	return unit == FL_U_CELSIUS ? fl_unit_text(FL_U_KELVIN) : fl_unit_text(unit);
}

static const char *certificate_words(const budget *b, const fl_equipment *item) {
	return fl_arena_join(b->w->arena, "certificate ", item->certificate ? item->certificate : "not named", " of ",
	                     item->id, item->issuer && *item->issuer ? ", issued by " : "",
	                     item->issuer ? item->issuer : "", NULL);
}

/* The parts of an item that are one deviation in all its readings. */
static void finish_equipment(budget *b, fl_budget_line *line, const fl_equipment *item, fl_effect_on on) {
	line->on = on;
	line->inside = scale_of(item->unit);
	line->source = certificate_words(b, item);
	is_shared(b, line, item->id, 1.0);
}

static void add_resolution(budget *b, const fl_equipment *item, double half_width, const char *unit, double sensitivity,
                           fl_effect_on on) {
	fl_arena *arena = b->w->arena;
	fl_budget_line *line = add_half_width(b, fl_arena_join(arena, fl_stock_role_text(item->role), " resolution", NULL),
	                                      half_width, unit, sensitivity);
	line->on = on;
	line->inside = scale_of(item->unit);
	line->source = fl_arena_join(arena, "last digit of ", item->id, " (JCGM 100 F.2.2.1)", NULL);
}

/* Certificate, drift since, resolution. `per_inside`: % of span for one inside unit of the item's quantity. */
static void add_equipment(budget *b, const fl_equipment *item, double per_inside, fl_effect_on on) {
	if (!item)
		return;
	fl_arena *arena = b->w->arena;
	const char *role = fl_stock_role_text(item->role), *unit = difference_unit(item->unit);
	double sensitivity = per_inside * scale_of(item->unit);
	fl_equipment_u parts = fl_stock_equipment_u(item, b->w->session->day);
	finish_equipment(b, add_stated(b, fl_arena_join(arena, role, " certificate", NULL), item, unit, sensitivity), item,
	                 on);
	if (item->drift_per_year > 0.0)
		finish_equipment(b,
		                 add_half_width(b, fl_arena_join(arena, role, " drift since its calibration", NULL),
		                                parts.drift_half_width, unit, sensitivity),
		                 item, on);
	if (item->resolution > 0.0)
		add_resolution(b, item, parts.resolution_half_width, unit, sensitivity, on);
}

static double meter_per_inside(const work *w) {
	const fl_signal_range *range = w->reference.range;
	return 100.0 / ((range->high - range->low) * scale_of(range->unit));
}

/* ---- the oil and its temperature ---- */

/* Half width of the viscosity line between the certified temperatures, fraction. Outside them it grows by its own
 * size for every kelvin (common practice, no source). */
static double interpolation_half_width(const work *w, const fl_oil *oil, const fl_oil_state *state) {
	double half_width = fmax(w->procedure->oil_interpolation_half_width_rel, oil->misfit_rel);
	return half_width * (1.0 + state->outside_k);
}

/* The certificate's U at this temperature, as a fraction: both temperatures share the issuer, so they add. */
static double certified_U_rel(const fl_oil *oil, const fl_oil_state *state) {
	return fabs(state->c1 * oil->U_nu_rel[state->low] + state->c2 * oil->U_nu_rel[state->high]);
}

static const char *oil_words(const budget *b, const fl_oil *oil) {
	return fl_arena_join(b->w->arena, "certificate ", oil->certificate, " of lot ", oil->lot,
	                     oil->issuer && *oil->issuer ? ", issued by " : "", oil->issuer ? oil->issuer : "", NULL);
}

/* Who certifies an oil has one scale of viscosity; an oil without a named issuer shares with no other. */
static const char *issuer_of(const fl_oil *oil) {
	return oil->issuer && *oil->issuer ? oil->issuer : oil->lot;
}

static void add_ageing(budget *b, const fl_oil *oil, double percent_sensitivity) {
	double per_year = b->w->procedure->oil_ageing_per_year_rel;
	if (!(per_year > 0.0))
		return;
	fl_arena *arena = b->w->arena;
	double years = years_between(oil->certified_on, b->w->session->day);
	fl_budget_line *line = add(b, "oil ageing since its certificate", FL_DIST_RECTANGULAR,
	                           100.0 * per_year * years / divisor(FL_DIST_RECTANGULAR), "%", percent_sensitivity);
	line->stated = fl_arena_printf(arena, "%s %% a year half width, %s years",
	                               fl_analysis_number(arena, 100.0 * per_year, 3), fl_analysis_number(arena, years, 2));
	line->on = FL_ON_VISCOSITY;
	line->source = procedure_words(b, "oil ageing per year");
	is_shared(b, line, oil->lot, 1.0);
}

/* That the oils follow D341 only nearly is a property of the equation: it misses like oils alike. */
static void add_interpolation(budget *b, const fl_oil *oil, const fl_oil_state *state, double percent) {
	fl_budget_line *line = add_half_width(b, "viscosity between certified temperatures",
	                                      100.0 * interpolation_half_width(b->w, oil, state), "%", percent);
	line->on = FL_ON_VISCOSITY;
	line->source = oil->misfit_rel > b->w->procedure->oil_interpolation_half_width_rel
	                   ? "ASTM D341: misfit of the oil's own certified points"
	                   : procedure_words(b, "oil interpolation (ASTM D341)");
	is_shared(b, line, "ASTM D341", 1.0);
}

static void add_oil(budget *b, const fl_oil *oil, const fl_oil_state *state, double g) {
	double percent = g; /* one % of mu is g % of span */
	double U_percent = 100.0 * certified_U_rel(oil, state);
	fl_budget_line *line = add(b, "oil certificate", FL_DIST_NORMAL, 100.0 * state->u_nu_rel, "%", percent);
	line->stated = fl_arena_printf(b->w->arena, "%s %%, k = %s", fl_analysis_number(b->w->arena, U_percent, 3),
	                               fl_analysis_number(b->w->arena, oil->k_nu, 3));
	line->on = FL_ON_CERTIFIED_NU;
	line->source = oil_words(b, oil);
	is_shared(b, line, issuer_of(oil), 1.0 - b->w->procedure->oil_own_share);
	add_interpolation(b, oil, state, percent);
	add_ageing(b, oil, percent);
}

static void add_density(budget *b, const fl_oil *oil, const fl_oil_state *state, double g) {
	fl_arena *arena = b->w->arena;
	fl_budget_line *line =
	    add(b, "oil density", FL_DIST_NORMAL, state->u_rho_kg_m3, "kg/m³", 100.0 * g / state->rho_kg_m3);
	line->stated =
	    fl_arena_printf(arena, "%s kg/m³, k = %s", fl_analysis_number(arena, state->u_rho_kg_m3 * oil->k_rho, 3),
	                    fl_analysis_number(arena, oil->k_rho, 3));
	line->on = FL_ON_CERTIFIED_DENSITY;
	line->source = oil_words(b, oil);
	is_shared(b, line, issuer_of(oil), 1.0 - b->w->procedure->oil_own_share);
}

static void add_temperature(budget *b, const fl_oil_state *state, double g) {
	double per_kelvin = 100.0 * g * (state->beta_per_k - state->drho_dt / state->rho_kg_m3);
	add_equipment(b, b->w->reference.thermometer, per_kelvin, FL_ON_TEMPERATURE);
	const fl_equipment *bath = b->w->reference.bath;
	if (bath)
		finish_equipment(b,
		                 add_stated(b, "bath to capillary temperature", bath, difference_unit(bath->unit),
		                            per_kelvin * scale_of(bath->unit)),
		                 bath, FL_ON_TEMPERATURE);
}

/* ---- the readings ---- */

/* Standard deviation of the mean of a direction, or of the mean of two directions that weigh the same. */
static double mean_scatter(const fl_run_result *run, const fl_point_result *point, double *dof) {
	*dof = (double)point->n - 1.0;
	if (!point->both)
		return point->s_span / sqrt((double)point->n);
	*dof = (double)point->n - 2.0;
	double sum = 0.0;
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].point == point->point)
			sum += 1.0 / (double)run->points[i].n;
	return 0.5 * point->s_span * sqrt(sum);
}

static void add_repeatability(budget *b, const fl_run_result *run, const fl_point_result *point) {
	double dof = 0.0;
	double u = mean_scatter(run, point, &dof);
	if (isnan(u) || dof < 1.0)
		return; /* said among what is not determined */
	fl_budget_line *line = add(b, "repeatability of the mean", FL_DIST_STUDENT, 100.0 * u, "% of span", 1.0);
	line->dof = dof;
	line->on = FL_ON_READINGS;
	line->source =
	    point->both ? "readings of this session, s pooled within each direction" : "readings of this session";
	line->stated =
	    fl_arena_printf(b->w->arena, "s = %s, n = %zu", fl_analysis_percent(b->w->arena, point->s_span, 4), point->n);
}

/* A mean of both directions stands for neither: half their difference is its half width. */
static void add_half_hysteresis(budget *b, double hysteresis_span) {
	fl_budget_line *line =
	    add_half_width(b, "half the hysteresis", 100.0 * fabs(hysteresis_span) / 2.0, "% of span", 1.0);
	line->source = "difference of falling and rising at this point";
}

static void add_extra(budget *b, const fl_extra_term *extra, double x) {
	fl_arena *arena = b->w->arena;
	bool of_reading = extra->basis == FL_BAND_PERCENT_READING;
	double u = extra->value / (extra->coverage > 0.0 ? extra->coverage : divisor(extra->distribution));
	fl_budget_line *line = add(b, extra->name, extra->distribution, u, of_reading ? "% of reading" : "% of span",
	                           of_reading ? fmax(0.0, x) : 1.0);
	line->source = extra->source ? extra->source : procedure_words(b, "further uncertainty");
	if (!extra->own)
		is_shared(b, line, "further uncertainty", 1.0);
	const char *value = fl_analysis_number(arena, extra->value, 3);
	if (extra->coverage > 0.0)
		line->stated =
		    fl_arena_printf(arena, "%s %s, k = %s", value, line->unit, fl_analysis_number(arena, extra->coverage, 3));
	else
		line->stated = fl_arena_printf(arena, "%s %s half width", value, line->unit);
}

/* ---- one point ---- */

/* Adds the terms of the reference; *reference_U is the reference's own expanded uncertainty, fraction of span. */
static fl_status add_reference(budget *b, const fl_point_result *point, double *reference_U, fl_error *err) {
	const work *w = b->w;
	const fl_reference *by = &w->reference;
	const fl_equipment *meter = by->meter, *standard = by->standard;
	const fl_oil *oil = NULL;
	*reference_U = meter && meter->k > 0.0 ? meter->U * scale_of(meter->unit) * meter_per_inside(w) / 100.0 : 0.0;
	if (point->point == FL_POINT_ZERO)
		return FL_OK;
	if (by->medium == FL_MEDIUM_PRESSURE) {
		double per_pa = 100.0 * by->high_m2_s / (by->high_m2_s - by->low_m2_s) / by->dp_full_pa;
		add_equipment(b, standard, per_pa, FL_ON_PRESSURE);
		*reference_U = standard ? standard->U * scale_of(standard->unit) * per_pa / 100.0 : 0.0;
		return FL_OK;
	}
	fl_status status = fl_analysis_oil(w, point->point, &oil, err);
	fl_oil_state state;
	if (status >= 0)
		status = fl_physics_oil_at(&oil->table, point->temp_c, &state, err);
	if (status < 0)
		return status;
	double g = point->equivalent_m2_s / (by->high_m2_s - by->low_m2_s);
	add_oil(b, oil, &state, g);
	add_temperature(b, &state, g);
	add_density(b, oil, &state, g);
	*reference_U = g * certified_U_rel(oil, &state);
	return FL_OK;
}

static fl_status sum_up(budget *b, fl_point_result *point, double reference_U, fl_error *err) {
	fl_budget_term *terms = fl_arena_alloc(b->w->arena, b->count + 1, sizeof *terms);
	if (!terms)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a budget of %zu lines", b->count);
	for (size_t i = 0; i < b->count; i++) {
		const fl_budget_line *line = &b->lines[i];
		if (!line->stated || !line->name || !line->key || !line->source)
			return fl_fail(err, FL_E_MEMORY, "out of memory for a budget of %zu lines", b->count);
		terms[i] = (fl_budget_term){.u = line->u, .sensitivity = line->sensitivity / 100.0, .dof = line->dof};
	}
	point->budget = b->lines;
	point->budget_count = b->count;
	if (b->count == 0) { /* nothing is known of the uncertainty: that is not the same as none */
		point->sum = (fl_budget_sum){.uc = NAN, .dof_effective = NAN, .coverage_factor = NAN, .expanded = NAN};
		return FL_OK;
	}
	fl_status status = fl_numeric_budget(terms, b->count, b->w->result->coverage_probability, &point->sum, err);
	if (status < 0)
		return status;
	for (size_t i = 0; i < b->count; i++) {
		double part = b->lines[i].contribution_span / point->sum.uc;
		b->lines[i].share = point->sum.uc > 0.0 ? part * part : 0.0;
	}
	point->floored = point->sum.expanded < reference_U;
	if (point->floored)
		point->sum.expanded = reference_U;
	return FL_OK;
}

static fl_status take_budget(const work *w, const fl_run_result *run, fl_point_result *point, double hysteresis_span,
                             fl_error *err) {
	size_t room = (size_t)OWN_TERMS + (size_t)w->procedure->extra_count;
	budget b = {.w = w, .point = point->point, .lines = fl_arena_alloc(w->arena, room, sizeof *b.lines)};
	double reference_U = 0.0;
	if (!b.lines)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a budget of %zu lines", room);
	fl_status status = add_reference(&b, point, &reference_U, err);
	if (status < 0)
		return status;
	add_equipment(&b, w->reference.meter, meter_per_inside(w), FL_ON_OUTPUT);
	add_repeatability(&b, run, point);
	if (point->both && point->point != FL_POINT_ZERO)
		add_half_hysteresis(&b, hysteresis_span);
	for (int i = 0; i < w->procedure->extra_count; i++)
		add_extra(&b, &w->procedure->extra[i], point->x);
	return sum_up(&b, point, reference_U, err);
}

fl_status fl_analysis_budgets(const work *w, fl_run_result *run, fl_error *err) {
	fl_status status = FL_OK;
	for (size_t i = 0; i < run->point_count && status >= 0; i++)
		status = take_budget(w, run, &run->points[i], NAN, err);
	for (size_t i = 0; i < run->combined_count && status >= 0; i++)
		status = take_budget(w, run, &run->combined[i], run->hysteresis[i], err);
	return status < 0 ? status : FL_OK;
}
