/* numeric/run_trials.c - trials of a whole calibration run: every reading and every shared effect drawn, all lines and
 * the hysteresis found again in each.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * What does not change from trial to trial is worked out once: the least-squares line is a dot product with weights,
 * and each linearity is the largest of a few levelled errors (a discrete Chebyshev problem equals its dual: the best
 * line's error is the largest that any three points enforce alone, de la Vallee Poussin 1911).
 */
#include "kernels.h"
#include "trials.h"

#include <math.h>

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

static void prepare_lines(run_ready *r) {
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

static void prepare_linearities(run_ready *r) {
	const double *x = r->model->x;
	for (size_t i = 0; i < r->in_line; i++)
		for (size_t j = i + 1; j < r->in_line; j++) {
			double xi = x[r->place[i]], xj = x[r->place[j]], x0 = x[r->first];
			if (i > 0)
				r->pairs[r->pair_count++] = (run_pair){r->place[i], r->place[j], (xj - x0) / (xi + xj - 2.0 * x0),
				                                       (xi - x0) / (xi + xj - 2.0 * x0)};
			for (size_t k = j + 1; k < r->in_line; k++) {
				double xk = x[r->place[k]];
				r->triples[r->triple_count++] = (run_triple){r->place[i], r->place[j], r->place[k],
				                                             0.5 * (xk - xj) / (xk - xi), 0.5 * (xj - xi) / (xk - xi)};
			}
		}
}

static fl_status prepare(run_ready *r, const fl_run_model *model, fl_error *err) {
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

/* ---- in every trial: kernels_in_lanes.h ---- */

static void fill_run(const void *self, fl_generator *generator, double *scratch, size_t trials, double *outputs) {
	fl_numeric_kernels()->run(self, generator, scratch, trials, outputs);
}

/* Doubles for all normal draws of FL_LANES trials: one more for an odd count, and one to find the boundary. */
static size_t scratch_of(const run_ready *r) {
	return (r->normals + 2) * FL_LANES;
}

fl_status fl_numeric_run_trials(const fl_run_model *model, const fl_plan *plan, fl_propagated *outputs,
                                fl_trials *trials, fl_error *err) {
	fl_arena arena = {0};
	run_ready *r = fl_arena_alloc(&arena, 1, sizeof *r);
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
