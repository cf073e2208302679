/* numeric/run_trials.c - trials of a whole calibration run: every reading and every shared effect drawn, all lines and
 * the hysteresis found again in each.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * What does not change from trial to trial is worked out once: the least-squares line is a dot product with weights,
 * and each linearity is the largest of a few levelled errors (a discrete Chebyshev problem equals its dual: the best
 * line's error is the largest that any three points enforce alone, de la Vallee Poussin 1911).
 */
#include "lanes.h"
#include "trials.h"

#include <string.h>

enum {
	TRIPLES_MOST = FL_PLACES_MOST * (FL_PLACES_MOST - 1) * (FL_PLACES_MOST - 2) / 6,
	PAIRS_MOST = FL_PLACES_MOST * (FL_PLACES_MOST - 1) / 2
};

/* Error that three points i < j < k enforce: |e_i a + e_k c - e_j/2|. */
typedef struct triple {
	unsigned i, j, k;
	double a, c;
} triple;

/* Error that two points enforce on a line through the first: |(e_i - e_0) a - (e_j - e_0) c|. */
typedef struct pair {
	unsigned i, j;
	double a, c;
} pair;

/* A run made ready. */
typedef struct ready {
	const fl_run_model *model;
	size_t stops, normals;       /* readings in one direction at a place; normal draws a trial, lanes of them */
	size_t in_line, first, last; /* places in the line: how many, the lowest, the highest */
	unsigned place[FL_PLACES_MOST];
	double slope_weight[FL_PLACES_MOST], x_mean;
	double chord[FL_PLACES_MOST]; /* how far along the terminal line */
	triple triples[TRIPLES_MOST];
	pair pairs[PAIRS_MOST];
	size_t triple_count, pair_count;
} ready;

/* ---- once ---- */

static fl_status check_run(const fl_run_model *m, fl_error *err) {
	if (m->places < 3 || m->places > FL_PLACES_MOST || m->cycles < 1 || m->readings < 1 || m->cycles > 1000 ||
	    m->readings > 1000)
		return fl_fail(err, FL_E_NUMERIC,
		               "a run of %zu places, %zu cycles and %zu readings: 3 to %d places and 1 to 1000 of the others",
		               m->places, m->cycles, m->readings, FL_PLACES_MOST);
	for (size_t i = 0; i < m->places; i++) {
		if (!isfinite(m->x[i]) || !isfinite(m->up[i]) || !isfinite(m->down[i]) || !(m->s[i] >= 0.0) || isinf(m->s[i]))
			return fl_fail(err, FL_E_NUMERIC, "place %zu of the run is not all numbers", i + 1);
		if (i > 0 && !(m->x[i] > m->x[i - 1]))
			return fl_fail(err, FL_E_NUMERIC, "place %zu does not lie above the one before", i + 1);
	}
	for (size_t k = 0; k < m->effect_count; k++) {
		fl_status status = fl_numeric_check_input(&m->effects[k].input, k, err);
		for (size_t i = 0; status >= 0 && i < m->places; i++)
			if (!isfinite(m->effects[k].sensitivity[i]))
				status = fl_fail(err, FL_E_NUMERIC, "effect %zu has no sensitivity at place %zu", k + 1, i + 1);
		if (status < 0)
			return status;
	}
	return FL_OK;
}

static void prepare_lines(ready *r) {
	const fl_run_model *m = r->model;
	for (size_t i = 0; i < m->places; i++)
		if (!m->in_line || m->in_line[i])
			r->place[r->in_line++] = (unsigned)i;
	if (r->in_line == 0)
		return;
	r->first = r->place[0];
	r->last = r->place[r->in_line - 1];
	double sxx = 0.0;
	for (size_t i = 0; i < r->in_line; i++)
		r->x_mean += m->x[r->place[i]] / (double)r->in_line;
	for (size_t i = 0; i < r->in_line; i++) {
		double dx = m->x[r->place[i]] - r->x_mean;
		sxx += dx * dx;
	}
	for (size_t i = 0; i < r->in_line; i++) {
		double x = m->x[r->place[i]];
		r->slope_weight[i] = (x - r->x_mean) / sxx;
		r->chord[i] = (x - m->x[r->first]) / (m->x[r->last] - m->x[r->first]);
	}
}

static void prepare_linearities(ready *r) {
	const double *x = r->model->x;
	for (size_t i = 0; i < r->in_line; i++)
		for (size_t j = i + 1; j < r->in_line; j++) {
			double xi = x[r->place[i]], xj = x[r->place[j]], x0 = x[r->first];
			if (i > 0)
				r->pairs[r->pair_count++] = (pair){r->place[i], r->place[j], (xj - x0) / (xi + xj - 2.0 * x0),
				                                   (xi - x0) / (xi + xj - 2.0 * x0)};
			for (size_t k = j + 1; k < r->in_line; k++) {
				double xk = x[r->place[k]];
				r->triples[r->triple_count++] = (triple){r->place[i], r->place[j], r->place[k],
				                                         0.5 * (xk - xj) / (xk - xi), 0.5 * (xj - xi) / (xk - xi)};
			}
		}
}

static fl_status prepare(ready *r, const fl_run_model *model, fl_error *err) {
	fl_status status = check_run(model, err);
	if (status < 0)
		return status;
	r->model = model;
	r->stops = model->cycles * model->readings;
	r->normals = 2 * model->places * r->stops;
	for (size_t k = 0; k < model->effect_count; k++)
		r->normals += model->effects[k].input.shape == FL_SHAPE_NORMAL;
	prepare_lines(r);
	if (r->in_line < 3)
		return fl_fail(err, FL_E_NUMERIC, "%zu places take part in the lines: at least three are needed", r->in_line);
	prepare_linearities(r);
	return FL_OK;
}

/* ---- in every trial, FL_LANES at once ---- */

/* Standard normal deviates into deviates[count], rounded up to pairs. */
LANE_INLINE void draw_normals(lane_state *state, lanes *deviates, size_t count) {
	for (size_t i = 0; i < count; i += 2)
		lanes_normal(state, &deviates[i], &deviates[i + 1]);
}

/* Mean of the readings in one direction at a place, as deviates. */
LANE_INLINE lanes mean_deviate(const lanes *deviates, size_t n) {
	lanes sum = deviates[0];
	for (size_t i = 1; i < n; i++)
		sum += deviates[i];
	return sum * (1.0 / (double)n);
}

/* Errors at each place, by direction, with the readings' scatter alone. Returns the deviates not yet used. */
LANE_INLINE const lanes *scatter_readings(const ready *r, const lanes *deviates, lanes *up, lanes *down) {
	const fl_run_model *m = r->model;
	for (size_t i = 0; i < m->places; i++) {
		up[i] = m->up[i] + m->s[i] * mean_deviate(deviates, r->stops);
		deviates += r->stops;
		down[i] = m->down[i] + m->s[i] * mean_deviate(deviates, r->stops);
		deviates += r->stops;
	}
	return deviates;
}

/* Adds the shared effects to the mean errors. */
LANE_INLINE void add_effects(const ready *r, lane_state *state, const lanes *deviates, lanes *error) {
	const fl_run_model *m = r->model;
	for (size_t k = 0; k < m->effect_count; k++) {
		const fl_effect *effect = &m->effects[k];
		lanes drawn;
		if (effect->input.shape == FL_SHAPE_NORMAL)
			drawn = effect->input.centre + effect->input.width * *deviates++;
		else
			drawn = lanes_draw(state, &effect->input);
		for (size_t i = 0; i < m->places; i++)
			error[i] += effect->sensitivity[i] * drawn;
	}
}

LANE_INLINE void find_least_squares(const ready *r, const lanes *error, lanes *found) {
	lanes mean = {0}, slope = {0}, largest = {0};
	for (size_t i = 0; i < r->in_line; i++) {
		mean += error[r->place[i]];
		slope += r->slope_weight[i] * error[r->place[i]];
	}
	lanes intercept = mean * (1.0 / (double)r->in_line) - slope * r->x_mean;
	for (size_t i = 0; i < r->in_line; i++)
		largest = lanes_max(lanes_abs(error[r->place[i]] - intercept - slope * r->model->x[r->place[i]]), largest);
	found[FL_RUN_INTERCEPT] = intercept;
	found[FL_RUN_SLOPE] = slope;
	found[FL_RUN_LARGEST_RESIDUAL] = largest;
}

LANE_INLINE void find_linearities(const ready *r, const lanes *error, lanes *found) {
	lanes independent = {0}, terminal = {0}, zero_based = {0};
	for (size_t t = 0; t < r->triple_count; t++) {
		const triple *p = &r->triples[t];
		independent = lanes_max(lanes_abs(error[p->i] * p->a + error[p->k] * p->c - 0.5 * error[p->j]), independent);
	}
	lanes first = error[r->first], rise = error[r->last] - first;
	for (size_t i = 1; i + 1 < r->in_line; i++)
		terminal = lanes_max(lanes_abs(error[r->place[i]] - first - r->chord[i] * rise), terminal);
	for (size_t t = 0; t < r->pair_count; t++) {
		const pair *p = &r->pairs[t];
		zero_based = lanes_max(lanes_abs((error[p->i] - first) * p->a - (error[p->j] - first) * p->c), zero_based);
	}
	found[FL_RUN_INDEPENDENT] = independent;
	found[FL_RUN_TERMINAL] = terminal;
	found[FL_RUN_ZERO_BASED] = zero_based;
}

/* One trial in every lane. `deviates` has room for all normal draws. */
LANE_INLINE void try_run(const ready *r, lane_state *state, lanes *deviates, lanes *error, lanes *found) {
	lanes up[FL_PLACES_MOST], down[FL_PLACES_MOST], hysteresis = {0};
	draw_normals(state, deviates, r->normals);
	const lanes *left = scatter_readings(r, deviates, up, down);
	for (size_t i = 0; i < r->model->places; i++) {
		error[i] = 0.5 * (up[i] + down[i]);
		hysteresis = lanes_max(lanes_abs(down[i] - up[i]), hysteresis);
	}
	add_effects(r, state, left, error);
	find_least_squares(r, error, found);
	find_linearities(r, error, found);
	found[FL_RUN_HYSTERESIS] = hysteresis;
}

/* Lane memory must lie on its own boundary. */
static lanes *aligned(double *scratch) {
	uintptr_t address = (uintptr_t)scratch, size = sizeof(lanes);
	return (lanes *)((address + size - 1) / size * size);
}

LANE_CLONES static void fill_run(const void *self, fl_generator *generator, double *scratch, size_t trials,
                                 double *outputs) {
	const ready *r = self;
	lanes error[FL_PLACES_MOST], found[FL_RUN_OUTPUTS], *deviates = aligned(scratch);
	lane_state state = lanes_load(generator);
	for (size_t t = 0; t + FL_LANES <= trials; t += FL_LANES) {
		try_run(r, &state, deviates, error, found);
		for (size_t i = 0; i < r->model->places; i++)
			memcpy(outputs + i * trials + t, &error[i], sizeof *error);
		for (size_t i = 0; i < FL_RUN_OUTPUTS; i++)
			memcpy(outputs + (r->model->places + i) * trials + t, &found[i], sizeof *found);
	}
	lanes_store(&state, generator);
}

/* Doubles for all normal draws of FL_LANES trials: one more for an odd count, and one to find the boundary. */
static size_t scratch_of(const ready *r) {
	return (r->normals + 2) * FL_LANES;
}

fl_status fl_numeric_run_trials(const fl_run_model *model, const fl_plan *plan, fl_propagated *outputs,
                                fl_trials *trials, fl_error *err) {
	fl_arena arena = {0};
	ready *r = fl_arena_alloc(&arena, 1, sizeof *r);
	if (!r)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
	fl_status status = prepare(r, model, err);
	trial_source source = {.self = r, .outputs = model->places + FL_RUN_OUTPUTS, .fill = fill_run};
	if (status >= 0) {
		source.scratch = scratch_of(r);
		status = fl_numeric_try(&source, plan, outputs, trials, err);
	}
	fl_arena_free(&arena);
	return status;
}
