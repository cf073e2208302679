/* analysis/lines.c - zeros, the least-squares line, the three linearities.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Lines go through the combined points, the stopped zero among them. Linearity is judged on the mean error of rising
 * and falling (ANSI/ISA-51.1; IEC 61298-2).
 */
#include "work.h"

#include <math.h>

/* The points of a line in rising order of their number. */
typedef struct places {
	double *x, *e;
	size_t n;
} places;

/* A combined point stands on the line where its rising pass stood: each oil was approached there first, and the two
 * passes differ by hundredths of a kelvin, which moves no error. */
double fl_analysis_line_position(const fl_run_result *run, const fl_point_result *combined) {
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].point == combined->point && run->points[i].pass == FL_PASS_RISING)
			return run->points[i].x;
	return combined->x;
}

bool fl_analysis_in_line(const work *w, const fl_point_result *point) {
	return point->point != FL_POINT_ZERO || point->ideal_output >= w->reference.range->measuring_low;
}

static fl_status collect(const work *w, const fl_run_result *run, bool with_zero, places *out, fl_error *err) {
	out->x = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof *out->x);
	out->e = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof *out->e);
	out->n = 0;
	if (!out->x || !out->e)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu points", run->combined_count);
	for (size_t i = 0; i < run->combined_count; i++) {
		const fl_point_result *point = &run->combined[i];
		if (!fl_analysis_in_line(w, point) || (!with_zero && point->point == FL_POINT_ZERO))
			continue;
		out->x[out->n] = fl_analysis_line_position(run, point);
		out->e[out->n++] = point->error_span;
	}
	return FL_OK;
}

static void take_stopped_zero(work *w, fl_run_result *run) {
	const fl_point_result *zero = run->combined_count ? &run->combined[0] : NULL;
	if (!zero || zero->point != FL_POINT_ZERO) {
		fl_analysis_say(w->arena, &w->not_determined, "stopped zero not determined: it was not read");
	} else if (!fl_analysis_in_line(w, zero)) {
		fl_analysis_say(w->arena, &w->not_determined,
		                "stopped zero not determined: the scale begins above zero viscosity, and the output at rest "
		                "lies below its signal");
	} else {
		run->stopped_zero_span = zero->error_span;
		run->stopped_zero_u_span = zero->sum.expanded;
	}
}

static fl_status take_running_zero(work *w, fl_run_result *run, fl_error *err) {
	places running;
	fl_line line;
	fl_status status = collect(w, run, false, &running, err);
	if (status < 0)
		return status;
	if (running.n < 2 || fl_numeric_line(running.x, running.e, running.n, &line, NULL) < 0) {
		fl_analysis_say(w->arena, &w->not_determined, "running zero not determined: fewer than 2 running points");
		return FL_OK;
	}
	run->running_zero_span = line.intercept;
	run->running_zero_u_span = line.dof > 0 ? sqrt(line.var_intercept) : NAN;
	return FL_OK;
}

static void take_line(work *w, fl_run_result *run, const places *all) {
	if (all->n < 2 || fl_numeric_line(all->x, all->e, all->n, &run->line, NULL) < 0) {
		fl_analysis_say(w->arena, &w->not_determined, "zero and span error not determined: fewer than 2 points");
		return;
	}
	size_t lowest = 0, highest = 0;
	for (size_t i = 1; i < all->n; i++) {
		lowest = all->x[i] < all->x[lowest] ? i : lowest;
		highest = all->x[i] > all->x[highest] ? i : highest;
	}
	run->has_line = true;
	run->zero_error_span = run->line.intercept;
	run->span_error_span = run->line.slope;
	run->span_between_ends_span = all->e[highest] - all->e[lowest];
}

static void take_linearity(work *w, fl_run_result *run, const places *all) {
	run->has_linearity = all->n >= 3 &&
	                     fl_numeric_line_independent(all->x, all->e, all->n, &run->independent, NULL) >= 0 &&
	                     fl_numeric_line_terminal(all->x, all->e, all->n, &run->terminal, NULL) >= 0 &&
	                     fl_numeric_line_zero_based(all->x, all->e, all->n, &run->zero_based, NULL) >= 0;
	if (!run->has_linearity)
		fl_analysis_say(w->arena, &w->not_determined, "linearity not determined: fewer than 3 points");
}

static void hold_to_limits(const fl_result *result, fl_run_result *run) {
	const double linearity[] = {[FL_LINEARITY_INDEPENDENT] = run->independent.max_abs,
	                            [FL_LINEARITY_TERMINAL] = run->terminal.max_abs,
	                            [FL_LINEARITY_ZERO_BASED] = run->zero_based.max_abs};
	double found = run->has_linearity ? linearity[result->deciding_linearity] : NAN;
	run->linearity_exceeded =
	    fl_analysis_decide(FL_RULE_SIMPLE, found, 0.0, result->linearity_limit_span) == FL_VERDICT_FAIL;
	run->hysteresis_exceeded =
	    fl_analysis_decide(FL_RULE_SIMPLE, run->hysteresis_span, 0.0, result->hysteresis_limit_span) == FL_VERDICT_FAIL;
}

fl_status fl_analysis_lines(work *w, fl_run_result *run, fl_error *err) {
	places all;
	take_stopped_zero(w, run);
	fl_status status = take_running_zero(w, run, err);
	if (status >= 0)
		status = collect(w, run, true, &all, err);
	if (status < 0)
		return status;
	take_line(w, run, &all);
	take_linearity(w, run, &all);
	hold_to_limits(w->result, run);
	return FL_OK;
}
