/* cause/trim.c - what a zero and span adjustment would leave, before anybody turns a screw.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * output = zero + (1 + gain) ideal + rest; after the trim (output - zero) / (1 + gain), so the rest stays, divided by
 * 1 + gain. The zero is taken from the pump at rest and only where that asks for it; the gain then makes the largest
 * rest smallest. Beside it the line with both free: what no adjustment can better.
 */
#include "cause_private.h"

typedef struct points {
	double x[FL_CAUSE_ROWS], e[FL_CAUSE_ROWS];
	size_t n;
} points;

static void collect(const fl_search *s, points *p) {
	p->n = 0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		p->x[p->n] = s->rows[i].at.x;
		p->e[p->n++] = s->rows[i].value;
	}
}

static double largest_rest(const points *p, double zero, double gain) {
	double most = 0.0;
	for (size_t i = 0; i < p->n; i++)
		most = fmax(most, fabs(p->e[i] - zero - gain * p->x[i]) / (1.0 + gain));
	return most;
}

/* The gain with the smallest largest rest for a given zero: the function is convex, so thirds close in on it. */
static double best_gain(const points *p, double zero) {
	double low = -0.5, high = 0.5;
	for (int turn = 0; turn < 120; turn++) {
		double a = low + (high - low) / 3.0, b = high - (high - low) / 3.0;
		if (largest_rest(p, zero, a) < largest_rest(p, zero, b))
			high = b;
		else
			low = a;
	}
	return (low + high) / 2.0;
}

/* Without a stopped zero the zero comes from the readings alone. */
static double zero_to_take_out(const fl_search *s, const fl_reference_line *ideal, bool *asked) {
	if (isnan(s->out->stopped_zero_span)) {
		*asked = fabs(ideal->intercept) > 0.0025;
		return ideal->intercept;
	}
	return *asked ? s->out->stopped_zero_span : 0.0;
}

static bool brings_in(const fl_search *s, const fl_trim_point *at, const fl_row_data *row) {
	const fl_point_result *found = row->found;
	double tolerance = found && !isnan(found->tolerance_span) ? found->tolerance_span : fl_cause_tolerance(s);
	double U = found && isfinite(found->sum.expanded) ? found->sum.expanded : 0.0;
	fl_rule rule = s->result->rule == FL_RULE_NONE ? FL_RULE_SIMPLE : s->result->rule;
	fl_verdict verdict = fl_analysis_decide(rule, at->after_span, U, tolerance);
	return verdict == FL_VERDICT_PASS || verdict == FL_VERDICT_CONDITIONAL_PASS;
}

static void take_points(const fl_search *s, fl_trim *trim) {
	trim->brings_in = true;
	for (size_t i = 0; i < s->reading_rows; i++) {
		const fl_row_data *row = &s->rows[i];
		fl_trim_point *to = &trim->points[trim->point_count++];
		*to = (fl_trim_point){row->point, row->pass, row->value, 0.0};
		to->after_span = (row->value - trim->zero_span - trim->gain * row->at.x) / (1.0 + trim->gain);
		trim->brings_in = trim->brings_in && brings_in(s, to, row);
		if (fabs(to->after_span) < trim->largest_after_span)
			continue;
		trim->largest_after_span = fabs(to->after_span);
		trim->largest_after = i;
	}
}

/* The transmitter spans dp_low to dp_high now; afterwards what gives `zero` now is to be the lower range value, and
 * what gives 1 + gain + zero now the upper one. */
static void take_pressures(const fl_search *s, fl_trim *trim) {
	double full_pa = s->result->dp_full_pa;
	double low_pa = full_pa * s->model.low_m2_s / s->model.high_m2_s;
	trim->dp_low_pa = low_pa + trim->zero_span * (full_pa - low_pa);
	trim->dp_high_pa = low_pa + (trim->zero_span + 1.0 + trim->gain) * (full_pa - low_pa);
}

fl_status fl_cause_trim(fl_search *s, fl_error *err) {
	points p;
	fl_reference_line ideal;
	fl_trim *trim = &s->out->trim;
	collect(s, &p);
	trim->dp_low_pa = trim->dp_high_pa = NAN;
	if (p.n < 2 || fl_numeric_line_independent(p.x, p.e, p.n, &ideal, NULL) < 0)
		return FL_OK;
	trim->points = fl_arena_alloc(s->arena, p.n, sizeof *trim->points);
	if (!trim->points)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu points", p.n);
	trim->zero_span = zero_to_take_out(s, &ideal, &trim->zero_asked);
	trim->gain = best_gain(&p, trim->zero_span);
	trim->ideal_after_span = ideal.max_abs / (1.0 + ideal.slope);
	take_points(s, trim);
	take_pressures(s, trim);
	trim->available = true;
	return FL_OK;
}
