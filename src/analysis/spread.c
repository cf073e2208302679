/* analysis/spread.c - hysteresis and repeatability of a run.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Hysteresis at a point: mean of the falling readings minus mean of the rising ones (IEC 61298-2: averages over the
 * cycles); any dead band is in it. Repeatability: the range of values of one direction. With two cycles or more the
 * values are the means of each traverse at the point, else the single readings. Up and down are never pooled.
 */
#include "work.h"

#include <math.h>

typedef struct range {
	double low, high;
	int count;
} range;

static void widen(range *r, double value) {
	r->low = r->count ? fmin(r->low, value) : value;
	r->high = r->count ? fmax(r->high, value) : value;
	r->count++;
}

static bool same_place(const fl_reading_result *reading, int point, fl_pass pass) {
	return reading->used && reading->reading->point == point && reading->reading->pass == pass;
}

static int last_cycle(const fl_run_result *run) {
	int last = 0;
	for (size_t i = 0; i < run->reading_count; i++)
		if (run->readings[i].used && run->readings[i].reading->cycle > last)
			last = run->readings[i].reading->cycle;
	return last;
}

/* Mean error of one traverse at a point; NAN where it was not read. */
static double cycle_mean(const fl_run_result *run, int point, fl_pass pass, int cycle) {
	double sum = 0.0;
	int n = 0;
	for (size_t i = 0; i < run->reading_count; i++) {
		if (!same_place(&run->readings[i], point, pass) || run->readings[i].reading->cycle != cycle)
			continue;
		sum += run->readings[i].error_span;
		n++;
	}
	return n ? sum / n : NAN;
}

/* ---- hysteresis ---- */

static void hysteresis_in_cycles(fl_run_result *run, int point, int cycles) {
	for (int cycle = 1; cycle <= cycles; cycle++) {
		double within =
		    fabs(cycle_mean(run, point, FL_PASS_FALLING, cycle) - cycle_mean(run, point, FL_PASS_RISING, cycle));
		run->hysteresis_cycle_span = fmax(run->hysteresis_cycle_span, within); /* fmax passes NaN over */
	}
}

static void take_hysteresis(fl_run_result *run, int cycles) {
	size_t c = 0;
	bool running = false;
	for (size_t i = 0; i < run->point_count; i++, c++) {
		run->hysteresis[c] = NAN;
		if (!run->combined[c].both)
			continue;
		run->hysteresis[c] = run->points[i + 1].error_span - run->points[i].error_span;
		running = running || run->points[i].point != FL_POINT_ZERO;
		if (!(fabs(run->hysteresis[c]) <= run->hysteresis_span)) {
			run->hysteresis_span = fabs(run->hysteresis[c]);
			run->hysteresis_point = run->points[i].point;
		}
		hysteresis_in_cycles(run, run->points[i].point, cycles);
		i++;
	}
	if (!running) /* the stopped zero alone says nothing about rising and falling viscosity */
		run->hysteresis_span = run->hysteresis_cycle_span = NAN;
}

/* ---- repeatability ---- */

static range range_of_cycles(const fl_run_result *run, const fl_point_result *point, int cycles) {
	range r = {0};
	for (int cycle = 1; cycle <= cycles; cycle++) {
		double mean = cycle_mean(run, point->point, point->pass, cycle);
		if (!isnan(mean))
			widen(&r, mean);
	}
	return r;
}

static range range_of_readings(const fl_run_result *run, const fl_point_result *point) {
	range r = {0};
	for (size_t i = 0; i < run->reading_count; i++)
		if (same_place(&run->readings[i], point->point, point->pass))
			widen(&r, run->readings[i].error_span);
	return r;
}

static void take_repeatability(fl_run_result *run, int cycles) {
	run->repeatability_of_cycles = cycles >= 2;
	for (size_t i = 0; i < run->point_count; i++) {
		fl_point_result *point = &run->points[i];
		range r = cycles >= 2 ? range_of_cycles(run, point, cycles) : range_of_readings(run, point);
		if (!isnan(point->s_span))
			run->repeatability_s_span = fmax(run->repeatability_s_span, point->s_span);
		if (r.count < 2)
			continue;
		point->range_span = r.high - r.low;
		if (!(point->range_span <= run->repeatability_span)) {
			run->repeatability_span = point->range_span;
			run->repeatability_point = point->point;
			run->repeatability_pass = point->pass;
		}
	}
}

/* ---- highest and lowest error of a single reading ---- */

static void take_inaccuracy(fl_run_result *run) {
	range r = {0};
	for (size_t i = 0; i < run->reading_count; i++)
		if (run->readings[i].used)
			widen(&r, run->readings[i].error_span);
	run->error_low_span = r.count ? r.low : NAN;
	run->error_high_span = r.count ? r.high : NAN;
	for (size_t i = 0; i < run->point_count; i++)
		if (!run->largest_error || fabs(run->points[i].error_span) > fabs(run->largest_error->error_span))
			run->largest_error = &run->points[i];
}

static void say_what_is_missing(work *w, const fl_run_result *run) {
	if (isnan(run->hysteresis_span))
		fl_analysis_say(w->arena, &w->not_determined, "hysteresis not determined: one traverse");
	if (isnan(run->repeatability_span))
		fl_analysis_say(w->arena, &w->not_determined,
		                "repeatability not determined: one reading at each point in each direction; "
		                "the uncertainty holds no part for it");
}

fl_status fl_analysis_spread(work *w, fl_run_result *run, fl_error *err) {
	int cycles = last_cycle(run);
	run->hysteresis = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof *run->hysteresis);
	if (!run->hysteresis)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu points", run->combined_count);
	take_hysteresis(run, cycles);
	take_repeatability(run, cycles);
	take_inaccuracy(run);
	say_what_is_missing(w, run);
	return FL_OK;
}
