/* analysis/trial_model.c - what is drawn in a trial: every reading, and every deviation of the budgets once for all the
 * points that share it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The budgets are the one list of deviations, so that trials and JCGM 100 speak of the same ones. Shapes by JCGM
 * 101:2008 table 1; certificates without degrees of freedom are normal (6.4.7).
 */
#include "trials.h"

#include <math.h>
#include <string.h>

static fl_status no_memory(fl_error *err) {
	return fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
}

/* ---- inputs ---- */

/* Of unit variance about zero. */
static fl_input unit_input(fl_distribution distribution) {
	switch (distribution) {
	case FL_DIST_RECTANGULAR:
		return (fl_input){FL_SHAPE_RECTANGULAR, 0.0, sqrt(3.0), 0.0};
	case FL_DIST_TRIANGULAR:
		return (fl_input){FL_SHAPE_TRIANGULAR, 0.0, sqrt(6.0), 0.0};
	case FL_DIST_NORMAL:
	case FL_DIST_STUDENT:
		break;
	}
	return (fl_input){FL_SHAPE_NORMAL, 0.0, 1.0, 0.0};
}

static size_t add_input(trial_model *m, fl_distribution distribution, const char *key) {
	m->inputs[m->input_count] = unit_input(distribution);
	m->keys[m->input_count] = key;
	return m->input_count++;
}

static size_t input_with_key(trial_model *m, fl_distribution distribution, const char *key) {
	for (size_t i = 0; i < m->input_count; i++)
		if (strcmp(m->keys[i], key) == 0)
			return i;
	return add_input(m, distribution, key);
}

/* ---- deviations ---- */

/* What one unit-variance draw of the deviation moves. */
static double scale_of(const fl_budget_line *line) {
	switch (line->on) {
	case FL_ON_TEMPERATURE:
		return line->u * line->inside;
	case FL_ON_VISCOSITY:
		return line->u / 100.0;
	case FL_ON_CERTIFIED_NU:
	case FL_ON_CERTIFIED_DENSITY:
		return 1.0; /* times each certified value's own uncertainty */
	default:
		return line->contribution_span;
	}
}

static bool add_effect(const work *w, trial_model *m, trial_place *place, const fl_budget_line *line) {
	if (line->on == FL_ON_READINGS)
		return true; /* drawn one by one */
	trial_effect effect = {.on = line->on, .common = SIZE_MAX, .own = SIZE_MAX, .scale = scale_of(line)};
	effect.both_only = line->on == FL_ON_ERROR && strcmp(line->name, "half the hysteresis") == 0;
	if (line->shared > 0.0) {
		effect.common = input_with_key(m, line->distribution, line->key);
		effect.weight_common = sqrt(line->shared);
	}
	if (line->shared < 1.0) {
		const char *key = fl_arena_printf(w->arena, "%s, own of point %d", line->name, place->combined->point + 1);
		if (!key)
			return false;
		effect.own = input_with_key(m, line->distribution, key);
		effect.weight_own = sqrt(1.0 - line->shared);
	}
	place->effects[place->effect_count++] = effect;
	return true;
}

/* ---- readings ---- */

static trial_reading reading_of(trial_model *m, const trial_place *place, const fl_reading_result *r, size_t first) {
	trial_reading out = {.input = add_input(m, FL_DIST_NORMAL, ""), .x = r->ideal.x, .output_x = r->output_x};
	if (place->oil) {
		double t_k = r->oil.temp_c + FL_ZERO_CELSIUS_K;
		out.temp_c = r->oil.temp_c;
		out.ln_t = log(t_k);
		out.per_t = 1.0 / t_k;
		out.pair = r->oil.low - first;
	}
	return out;
}

static double s_of(const fl_run_result *run, int point, fl_pass pass) {
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].point == point && run->points[i].pass == pass)
			return isnan(run->points[i].s_span) ? 0.0 : run->points[i].s_span;
	return 0.0;
}

static bool belongs(const fl_reading_result *r, int point) {
	return r->used && r->reading->point == point;
}

/* With fewer than four readings Student's t has no variance (JCGM 101 6.4.9.4): these are drawn from a normal one. */
static bool take_readings(const work *w, trial_model *m, trial_place *place, const fl_run_result *run, size_t first) {
	int point = place->combined->point;
	for (fl_pass pass = FL_PASS_RISING; pass <= FL_PASS_FALLING; pass++) {
		trial_pass *out = &place->passes[pass];
		out->readings = fl_arena_alloc(w->arena, run->reading_count + 1, sizeof *out->readings);
		if (!out->readings)
			return false;
		for (size_t i = 0; i < run->reading_count; i++)
			if (belongs(&run->readings[i], point) && run->readings[i].reading->pass == pass)
				out->readings[out->count++] = reading_of(m, place, &run->readings[i], first);
		out->s = s_of(run, point, pass);
		out->studentised = out->count >= 4 && out->s > 0.0;
	}
	return true;
}

/* ---- the oil ---- */

/* The certified temperatures that the readings of this point lie between. */
static void certified_range(const fl_run_result *run, int point, size_t *first, size_t *last) {
	*first = SIZE_MAX;
	*last = 0;
	for (size_t i = 0; i < run->reading_count; i++) {
		if (!belongs(&run->readings[i], point))
			continue;
		const fl_oil_state *oil = &run->readings[i].oil;
		*first = oil->low < *first ? oil->low : *first;
		*last = oil->high > *last ? oil->high : *last;
	}
}

static bool take_oil(trial_place *place, const fl_oil *oil, size_t first, size_t last) {
	place->certified_count = last - first + 1;
	if (place->certified_count > CERTIFIED_MOST)
		return false;
	for (size_t k = 0; k < place->certified_count; k++) {
		const fl_oil_point *p = &oil->table.points[first + k];
		place->certified[k] = (trial_certified){
		    p->temp_c, log(p->temp_c + FL_ZERO_CELSIUS_K), p->nu_m2_s, p->u_nu_rel, p->rho_kg_m3, p->u_rho_kg_m3};
	}
	return true;
}

/* ---- the whole ---- */

static fl_status take_place(const work *w, trial_model *m, const fl_run_result *run, const fl_point_result *point,
                            fl_error *err) {
	trial_place *place = &m->places[m->place_count++];
	const fl_oil *oil = NULL;
	size_t first = 0, last = 0;
	fl_status status = fl_analysis_oil(w, point->point, &oil, err);
	if (status < 0)
		return status;
	*place = (trial_place){.oil = oil != NULL, .combined = point, .in_line = fl_analysis_in_line(w, point)};
	if (oil) {
		certified_range(run, point->point, &first, &last);
		if (!take_oil(place, oil, first, last))
			return fl_fail(err, FL_E_RANGE, "%s was read over more than %d certified temperatures", point->oil,
			               (int)CERTIFIED_MOST);
	}
	place->effects = fl_arena_alloc(w->arena, point->budget_count + 1, sizeof *place->effects);
	if (!place->effects || !take_readings(w, m, place, run, first))
		return no_memory(err);
	for (size_t i = 0; i < point->budget_count; i++)
		if (!add_effect(w, m, place, &point->budget[i]))
			return no_memory(err);
	return FL_OK;
}

static size_t room_for_inputs(const fl_run_result *run) {
	size_t room = run->reading_count + 1;
	for (size_t i = 0; i < run->combined_count; i++)
		room += 2 * run->combined[i].budget_count;
	return room;
}

static double dial_density(const fl_scale *scale) {
	return scale->dial_unit == FL_DIAL_MPA_S ? 1000.0 : scale->dial_density_kg_m3;
}

fl_status fl_analysis_trial_model(const work *w, const fl_run_result *run, trial_model *out, fl_error *err) {
	if (run->combined_count > PLACES_MOST || run->reading_count > READINGS_MOST)
		return fl_fail(err, FL_E_RANGE, "trials take up to %d points and %d readings", (int)PLACES_MOST,
		               (int)READINGS_MOST);
	*out = (trial_model){.low_m2_s = w->reference.low_m2_s,
	                     .span_m2_s = w->reference.high_m2_s - w->reference.low_m2_s,
	                     .dial_rho_kg_m3 = dial_density(&w->reference.instrument->scale),
	                     .point_outputs = run->point_count,
	                     .lines = run->has_line,
	                     .linearity = run->has_linearity,
	                     .hysteresis = !isnan(run->hysteresis_span)};
	size_t room = room_for_inputs(run);
	out->places = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof *out->places);
	out->inputs = fl_arena_alloc(w->arena, room, sizeof *out->inputs);
	out->keys = fl_arena_alloc(w->arena, room, sizeof *out->keys);
	if (!out->places || !out->inputs || !out->keys)
		return no_memory(err);
	for (size_t i = 0; i < run->combined_count; i++) {
		fl_status status = take_place(w, out, run, &run->combined[i], err);
		if (status < 0)
			return status;
	}
	return FL_OK;
}
