/* analysis/points.c - means of the readings per point and direction, and of both directions.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Rising and falling weigh the same in a combined point, however many readings each has. Means are taken in
 * equivalent viscosity and output, never in the seconds of a dial.
 */
#include "work.h"

#include <math.h>

static bool belongs(const fl_reading_result *reading, int point, fl_pass pass) {
	return reading->used && reading->reading->point == point && reading->reading->pass == pass;
}

static void add_reading(fl_point_result *sum, const fl_reading_result *reading) {
	sum->temp_c += reading->oil.temp_c;
	sum->applied_pa += reading->applied_pa;
	sum->equivalent_m2_s += reading->ideal.equivalent_m2_s;
	sum->x += reading->ideal.x;
	sum->ideal_output += reading->ideal.output;
	sum->output += reading->output;
	sum->error_span += reading->error_span;
	sum->n++;
}

static void divide(fl_point_result *sum, double n) {
	sum->temp_c /= n;
	sum->applied_pa /= n;
	sum->equivalent_m2_s /= n;
	sum->x /= n;
	sum->ideal_output /= n;
	sum->output /= n;
	sum->error_span /= n;
}

static double error_in_dial_units(const work *w, const fl_point_result *point) {
	double shown = NAN;
	if (fl_physics_dial_at(&w->reference.instrument->scale, point->x + point->error_span, &shown, NULL) < 0)
		return NAN;
	return shown - point->dial;
}

/* What follows from the means: dial, oil at the mean temperature, error in dial units and of reading. */
static fl_status complete(const work *w, fl_point_result *point, fl_error *err) {
	const fl_oil *oil = NULL;
	point->certified_m2_s = point->rho_kg_m3 = point->mu_pa_s = NAN;
	point->oil = point->lot = "";
	fl_status status = fl_analysis_oil(w, point->point, &oil, err);
	if (status < 0)
		return status;
	if (oil) {
		fl_oil_state state;
		status = fl_physics_oil_at(&oil->table, point->temp_c, &state, err);
		if (status < 0)
			return status;
		point->oil = oil->name;
		point->lot = oil->lot;
		point->certified_m2_s = state.nu_m2_s;
		point->rho_kg_m3 = state.rho_kg_m3;
		point->mu_pa_s = state.mu_pa_s;
	} else {
		point->temp_c = NAN;
	}
	if (fl_physics_dial_at(&w->reference.instrument->scale, point->x, &point->dial, NULL) < 0)
		point->dial = NAN;
	point->error_dial = error_in_dial_units(w, point);
	point->error_reading = point->x > FL_LOWEST_X_FOR_READING ? point->error_span / point->x : NAN;
	return FL_OK;
}

static fl_point_result empty_point(int point, fl_pass pass) {
	fl_point_result empty = {.point = point, .pass = pass};
	empty.range_span = empty.tolerance_span = empty.tur = empty.kinetic_span = NAN;
	return empty;
}

/* Sample standard deviation of the errors, about the mean of this direction. */
static double scatter(const fl_run_result *run, const fl_point_result *point) {
	double sum_sq = 0.0;
	for (size_t i = 0; i < run->reading_count; i++) {
		if (!belongs(&run->readings[i], point->point, point->pass))
			continue;
		double deviation = run->readings[i].error_span - point->error_span;
		sum_sq += deviation * deviation;
	}
	return point->n > 1 ? sqrt(sum_sq / (double)(point->n - 1)) : NAN;
}

static fl_status take_direction(const work *w, fl_run_result *run, int number, fl_pass pass, fl_error *err) {
	fl_point_result point = empty_point(number, pass);
	for (size_t i = 0; i < run->reading_count; i++)
		if (belongs(&run->readings[i], number, pass))
			add_reading(&point, &run->readings[i]);
	if (point.n == 0)
		return FL_OK;
	divide(&point, (double)point.n);
	point.s_span = scatter(run, &point);
	fl_status status = complete(w, &point, err);
	if (status >= 0)
		run->points[run->point_count++] = point;
	return status;
}

/* Standard deviation within a direction, pooled over both; a difference between the directions is hysteresis and
 * must not widen it. */
static double pooled_within(const fl_point_result *rising, const fl_point_result *falling) {
	double dof_rising = (double)rising->n - 1.0, dof_falling = (double)falling->n - 1.0;
	if (dof_rising + dof_falling < 1.0)
		return NAN;
	double sum_sq = 0.0;
	if (dof_rising > 0.0)
		sum_sq += dof_rising * rising->s_span * rising->s_span;
	if (dof_falling > 0.0)
		sum_sq += dof_falling * falling->s_span * falling->s_span;
	return sqrt(sum_sq / (dof_rising + dof_falling));
}

static fl_point_result mean_of_both(const fl_point_result *rising, const fl_point_result *falling) {
	fl_point_result both = empty_point(rising->point, FL_PASS_RISING);
	both.both = true;
	both.n = rising->n + falling->n;
	both.temp_c = rising->temp_c + falling->temp_c;
	both.applied_pa = rising->applied_pa + falling->applied_pa;
	both.equivalent_m2_s = rising->equivalent_m2_s + falling->equivalent_m2_s;
	both.x = rising->x + falling->x;
	both.ideal_output = rising->ideal_output + falling->ideal_output;
	both.output = rising->output + falling->output;
	both.error_span = rising->error_span + falling->error_span;
	divide(&both, 2.0);
	both.s_span = pooled_within(rising, falling);
	return both;
}

static fl_status combine(const work *w, fl_run_result *run, fl_error *err) {
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_point_result *point = &run->points[i];
		bool paired = i + 1 < run->point_count && point[1].point == point->point;
		fl_point_result combined = paired ? mean_of_both(point, point + 1) : *point;
		fl_status status = complete(w, &combined, err);
		if (status < 0)
			return status;
		run->combined[run->combined_count++] = combined;
		i += paired;
	}
	return FL_OK;
}

fl_status fl_analysis_points(const work *w, fl_run_result *run, fl_error *err) {
	int last = FL_POINT_ZERO;
	for (size_t i = 0; i < run->reading_count; i++)
		if (run->readings[i].reading->point > last)
			last = run->readings[i].reading->point;
	size_t places = (size_t)(last + 2);
	run->points = fl_arena_alloc(w->arena, 2 * places, sizeof *run->points);
	run->combined = fl_arena_alloc(w->arena, places, sizeof *run->combined);
	if (!run->points || !run->combined)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu points", places);
	for (int number = FL_POINT_ZERO; number <= last; number++) {
		fl_status status = take_direction(w, run, number, FL_PASS_RISING, err);
		if (status >= 0)
			status = take_direction(w, run, number, FL_PASS_FALLING, err);
		if (status < 0)
			return status;
	}
	return combine(w, run, err);
}
