/* numeric/kernels_in_lanes.h - the inner loops of the trials, LANE_WIDTH lanes at a time, into a table KERNELS.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Included once by each of kernels_wide.c, kernels_middle.c and kernels_plain.c. Groups of lanes are gone through one
 * after the other; they know nothing of each other.
 */
#include "kernels.h"
#include "lanes.h"

#include <string.h>

/* ---- draws ---- */

static void lanes_bits(fl_generator *generator, uint64_t *out, size_t n) {
	for (int first = 0; first < FL_LANES; first += LANE_WIDTH) {
		lane_state state = lanes_load(generator, first);
		for (size_t i = (size_t)first; i < n; i += FL_LANES) {
			lane_bits bits = lanes_next(&state);
			memcpy(out + i, &bits, sizeof bits);
		}
		lanes_store(&state, generator, first);
	}
}

/* Normal deviates come in pairs: both are used, but for the last of an odd count. */
static void lanes_fill_normals(lane_state *state, const fl_input *input, double *out, size_t n) {
	for (size_t i = 0; i < n; i += 2 * FL_LANES) {
		lanes a, b;
		lanes_normal(state, &a, &b);
		a = input->centre + input->width * a;
		b = input->centre + input->width * b;
		memcpy(out + i, &a, sizeof a);
		if (i + FL_LANES < n)
			memcpy(out + i + FL_LANES, &b, sizeof b);
	}
}

static void lanes_fill(lane_state *state, const fl_input *input, double *out, size_t n) {
	for (size_t i = 0; i < n; i += FL_LANES) {
		lanes v = lanes_draw(state, input);
		memcpy(out + i, &v, sizeof v);
	}
}

static void lanes_draw_many(fl_generator *generator, const fl_input *input, double *out, size_t n) {
	for (int first = 0; first < FL_LANES; first += LANE_WIDTH) {
		lane_state state = lanes_load(generator, first);
		if (input->shape == FL_SHAPE_NORMAL)
			lanes_fill_normals(&state, input, out + first, n);
		else
			lanes_fill(&state, input, out + first, n);
		lanes_store(&state, generator, first);
	}
}

/* ---- a run: one trial in every lane ---- */

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
LANE_INLINE const lanes *scatter_readings(const run_ready *r, const lanes *deviates, lanes *up, lanes *down) {
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
LANE_INLINE void add_effects(const run_ready *r, lane_state *state, const lanes *deviates, lanes *error) {
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

LANE_INLINE void find_least_squares(const run_ready *r, const lanes *error, lanes *found) {
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

LANE_INLINE void find_linearities(const run_ready *r, const lanes *error, lanes *found) {
	lanes independent = {0}, terminal = {0}, zero_based = {0};
	for (size_t t = 0; t < r->triple_count; t++) {
		const run_triple *p = &r->triples[t];
		independent = lanes_max(lanes_abs(error[p->i] * p->a + error[p->k] * p->c - 0.5 * error[p->j]), independent);
	}
	lanes first = error[r->first], rise = error[r->last] - first;
	for (size_t i = 1; i + 1 < r->in_line; i++)
		terminal = lanes_max(lanes_abs(error[r->place[i]] - first - r->chord[i] * rise), terminal);
	for (size_t t = 0; t < r->pair_count; t++) {
		const run_pair *p = &r->pairs[t];
		zero_based = lanes_max(lanes_abs((error[p->i] - first) * p->a - (error[p->j] - first) * p->c), zero_based);
	}
	found[FL_RUN_INDEPENDENT] = independent;
	found[FL_RUN_TERMINAL] = terminal;
	found[FL_RUN_ZERO_BASED] = zero_based;
}

/* One trial in every lane. `deviates` has room for all normal draws. */
LANE_INLINE void try_run(const run_ready *r, lane_state *state, lanes *deviates, lanes *error, lanes *found) {
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

static void lanes_run(const run_ready *r, fl_generator *generator, double *scratch, size_t trials, double *outputs) {
	lanes error[FL_PLACES_MOST], found[FL_RUN_OUTPUTS], *deviates = aligned(scratch);
	for (int first = 0; first < FL_LANES; first += LANE_WIDTH) {
		lane_state state = lanes_load(generator, first);
		for (size_t t = (size_t)first; t < trials; t += FL_LANES) {
			try_run(r, &state, deviates, error, found);
			for (size_t i = 0; i < r->model->places; i++)
				memcpy(outputs + i * trials + t, &error[i], sizeof *error);
			for (size_t i = 0; i < FL_RUN_OUTPUTS; i++)
				memcpy(outputs + (r->model->places + i) * trials + t, &found[i], sizeof *found);
		}
		lanes_store(&state, generator, first);
	}
}

/* ---- what becomes of the results ---- */

static void lanes_tally(tally_frame frame, const double *y, size_t n, uint32_t *counts) {
	int32_t bin[TRIAL_CHUNK];
	const double per = 1.0 / frame.scale, half = TALLY_BINS / 2;
	for (size_t begin = 0; begin < n; begin += TRIAL_CHUNK) {
		size_t many = n - begin < TRIAL_CHUNK ? n - begin : TRIAL_CHUNK;
		for (size_t i = 0; i < many; i++) {
			double z = (y[begin + i] - frame.centre) * per;
			/* A far outlier is held to the outermost bins. */
			z = z > 1e9 ? 1e9 : z < -1e9 ? -1e9 : z;
			double place = half + half * (z / (1.0 + fabs(z)));
			bin[i] = (int32_t)(place < TALLY_BINS - 1 ? place : TALLY_BINS - 1);
		}
		for (size_t i = 0; i < many; i++)
			counts[bin[i]]++;
	}
}

/* The sums of one group of lanes, added to *sums lane by lane; what is no number shows in *wrong. */
LANE_INLINE void add_group(const double *y, size_t n, double shift, trial_sums *sums, double *wrong) {
	lanes d = {0}, d2 = {0}, least = d + (double)INFINITY, most = -least, odd = {0};
	for (size_t i = 0; i < n; i += FL_LANES) {
		lanes v;
		memcpy(&v, y + i, sizeof v);
		odd += v - v; /* 0, or NaN from then on */
		most = lanes_max(v, most);
		least = -lanes_max(-v, -least);
		v -= shift;
		d += v;
		d2 += v * v;
	}
	for (int lane = 0; lane < LANE_WIDTH; lane++) {
		sums->d += d[lane];
		sums->d2 += d2[lane];
		sums->min = fmin(sums->min, least[lane]);
		sums->max = fmax(sums->max, most[lane]);
		*wrong += odd[lane];
	}
}

static bool lanes_sums(const double *y, size_t n, double shift, trial_sums *sums) {
	double wrong = 0.0;
	*sums = (trial_sums){.min = INFINITY, .max = -INFINITY};
	for (int first = 0; first < FL_LANES; first += LANE_WIDTH)
		add_group(y + first, n, shift, sums, &wrong);
	return wrong == 0.0 && isfinite(sums->d2);
}

const trial_kernels KERNELS = {lanes_bits, lanes_draw_many, lanes_run, lanes_tally, lanes_sums};
