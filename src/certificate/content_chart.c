/* content_chart.c - the errors of both runs over the scale, with tolerance and guard band.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

typedef struct fl_axis {
	double low, high;
	const char *label;
} fl_axis;

/* Where fraction x of span stands on the axis. */
static double axis_at(const fl_axis *axis, double x) {
	return axis->low + x * (axis->high - axis->low);
}

/* Dial units of an evenly divided dial, else equivalent viscosity. */
static fl_axis choose_axis(fl_writing *w) {
	const fl_scale *scale = &w->instrument->scale;
	fl_axis axis = {scale->low, scale->high, NULL};
	if (isfinite(w->dial_span)) {
		axis.label = fl_sheet_printf(w->sheet, "position on the dial: equivalent viscosity, %s", w->dial_unit);
		return axis;
	}
	if (fl_physics_scale_span(scale, &axis.low, &axis.high, NULL) < 0)
		return (fl_axis){0, 1, "position on the scale, fraction of span"};
	axis.low *= 1e6;
	axis.high *= 1e6;
	axis.label = "equivalent viscosity, mm²/s";
	return axis;
}

static void add_run(fl_writing *w, fl_chart *chart, const fl_axis *axis, const fl_run_result *run) {
	bool filled = run->kind == FL_RUN_AS_LEFT;
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_point_result *point = &run->points[i];
		if (!isfinite(point->error_span) || !isfinite(point->x))
			continue;
		double U = point->sum.expanded;
		fl_chart_point(w->sheet, chart,
		               (fl_plot_point){.x = axis_at(axis, point->x),
		                               .y = 100 * point->error_span,
		                               .bar = isfinite(U) ? 100 * U : 0,
		                               .mark = point->pass == FL_PASS_RISING ? FL_MARK_UP : FL_MARK_DOWN,
		                               .filled = filled});
	}
	for (size_t i = 0; i < run->reading_count; i++) {
		const fl_reading_result *reading = &run->readings[i];
		if (reading->used || !isfinite(reading->error_span) || !isfinite(reading->ideal.x))
			continue;
		fl_chart_point(w->sheet, chart,
		               (fl_plot_point){.x = axis_at(axis, reading->ideal.x),
		                               .y = 100 * reading->error_span,
		                               .mark = reading->reading->pass == FL_PASS_RISING ? FL_MARK_UP : FL_MARK_DOWN,
		                               .filled = filled,
		                               .crossed = true});
	}
}

static const fl_run_result *shown_run(const fl_writing *w, fl_run_kind kind) {
	const fl_run_result *run = &w->result->runs[kind];
	return run->available && !run->same_as_found && run->point_count > 0 ? run : NULL;
}

/* Largest U that either run has at this point: the wider guard band. */
static double largest_u(const fl_writing *w, int point) {
	double largest = 0;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		const fl_run_result *run = shown_run(w, (fl_run_kind)kind);
		for (size_t i = 0; run && i < run->combined_count; i++)
			if (run->combined[i].point == point)
				largest = fmax(largest, run->combined[i].sum.expanded);
	}
	return largest;
}

/* U at x: straight between the points, constant outside them. */
static double u_at(const fl_writing *w, const fl_run_result *run, double x) {
	double x0 = NAN, u0 = NAN;
	for (size_t i = 0; i < run->combined_count; i++) {
		const fl_point_result *point = &run->combined[i];
		double U = largest_u(w, point->point);
		if (!isfinite(point->x))
			continue;
		if (x <= point->x)
			return isnan(x0) ? U : u0 + (x - x0) / (point->x - x0) * (U - u0);
		x0 = point->x;
		u0 = U;
	}
	return u0;
}

/* A band that is one width from a to b; the edges of neighbours make a step. */
static void add_stretch(fl_writing *w, fl_chart *chart, const fl_axis *axis, const fl_run_result *run, bool guarded,
                        double a, double b) {
	enum { STEPS = 8 };
	double tolerance = fl_analysis_tolerance_at(w->result, &w->instrument->scale, (a + b) / 2);
	for (int i = 0; i <= STEPS && isfinite(tolerance); i++) {
		double x = a + (b - a) * i / STEPS;
		fl_chart_edge(w->sheet, chart,
		              (fl_plot_edge){.x = axis_at(axis, x),
		                             .outer = 100 * tolerance,
		                             .inner = guarded ? 100 * (tolerance - u_at(w, run, x)) : NAN});
	}
}

static bool is_even(const fl_writing *w) {
	bool even = w->result->tolerance.basis == FL_BAND_PERCENT_SPAN;
	for (int i = 0; i < w->result->zone_count; i++)
		even = even && w->result->zones[i].band.basis == FL_BAND_PERCENT_SPAN;
	return even;
}

/* The tolerance in stretches: elsewhere, zone, elsewhere, ... */
static void add_zones(fl_writing *w, fl_chart *chart, const fl_axis *axis, const fl_run_result *run, bool guarded) {
	double at = 0;
	for (int i = 0; i < w->result->zone_count; i++) {
		double from = fmax(0, w->result->zones[i].from_pct_span / 100);
		double to = fmin(1, w->result->zones[i].to_pct_span / 100);
		if (from > at)
			add_stretch(w, chart, axis, run, guarded, at, from);
		if (to > from)
			add_stretch(w, chart, axis, run, guarded, from, to);
		at = fmax(at, to);
	}
	if (at < 1)
		add_stretch(w, chart, axis, run, guarded, at, 1);
}

static void add_band(fl_writing *w, fl_chart *chart, const fl_axis *axis, const fl_run_result *run) {
	bool guarded = w->result->rule == FL_RULE_GUARDED || w->result->rule == FL_RULE_FOUR_STATES;
	bool even = w->result->tolerance.basis == FL_BAND_PERCENT_SPAN; /* the same over the whole scale */
	if (w->result->zone_count > 0 && is_even(w)) {
		add_zones(w, chart, axis, run, guarded);
		return;
	}
	fl_plot_edge edge = {0}, first = {.x = NAN};
	for (size_t i = 0; i < run->combined_count; i++) {
		const fl_point_result *point = &run->combined[i];
		if (!isfinite(point->tolerance_span) || !isfinite(point->x))
			continue;
		double U = largest_u(w, point->point);
		edge = (fl_plot_edge){.x = axis_at(axis, point->x),
		                      .outer = 100 * point->tolerance_span,
		                      .inner = guarded ? 100 * (point->tolerance_span - U) : NAN};
		if (isnan(first.x)) {
			first = edge;
			if (even && edge.x > axis->low)
				fl_chart_edge(w->sheet, chart, (fl_plot_edge){axis->low, edge.outer, edge.inner});
		}
		fl_chart_edge(w->sheet, chart, edge);
	}
	if (even && isfinite(first.x) && edge.x < axis->high)
		fl_chart_edge(w->sheet, chart, (fl_plot_edge){axis->high, edge.outer, edge.inner});
}

static bool any_struck(const fl_run_result *run) {
	for (size_t i = 0; run && i < run->reading_count; i++)
		if (!run->readings[i].used)
			return true;
	return false;
}

static void explain_run(fl_writing *w, fl_chart *chart, const fl_run_result *run, bool falling) {
	bool filled = run->kind == FL_RUN_AS_LEFT;
	const char *name = fl_run_word(run->kind);
	fl_chart_legend(w->sheet, chart,
	                (fl_legend){.text = fl_sheet_printf(w->sheet, "%s, rising", name),
	                            .kind = FL_LEGEND_POINT,
	                            .sample = {.mark = FL_MARK_UP, .filled = filled}});
	if (falling)
		fl_chart_legend(w->sheet, chart,
		                (fl_legend){.text = fl_sheet_printf(w->sheet, "%s, falling", name),
		                            .kind = FL_LEGEND_POINT,
		                            .sample = {.mark = FL_MARK_DOWN, .filled = filled}});
}

static void explain(fl_writing *w, fl_chart *chart, const fl_run_result *found, const fl_run_result *left) {
	if (found)
		explain_run(w, chart, found, w->procedure->falling);
	if (left)
		explain_run(w, chart, left, w->procedure->falling);
	fl_chart_legend(w->sheet, chart, (fl_legend){.text = "expanded uncertainty", .kind = FL_LEGEND_BAR});
	if (chart->edge_count > 1) {
		fl_chart_legend(w->sheet, chart, (fl_legend){.text = "tolerance", .kind = FL_LEGEND_BAND});
		if (!isnan(chart->edges[0].inner))
			fl_chart_legend(w->sheet, chart, (fl_legend){.text = "guard band", .kind = FL_LEGEND_GUARD});
	}
	if (any_struck(found) || any_struck(left))
		fl_chart_legend(w->sheet, chart,
		                (fl_legend){.text = "single reading, struck",
		                            .kind = FL_LEGEND_POINT,
		                            .sample = {.mark = FL_MARK_UP, .filled = false, .crossed = true}});
}

void fl_write_chart(fl_writing *w) {
	const fl_run_result *found = shown_run(w, FL_RUN_AS_FOUND), *left = shown_run(w, FL_RUN_AS_LEFT);
	if (!found && !left)
		return;
	fl_axis axis = choose_axis(w);
	fl_chart frame = {.x_label = axis.label,
	                  .y_label = "mean error, % of span",
	                  .x_low = axis.low,
	                  .x_high = axis.high,
	                  .alternative = found && left ? "errors of the as-found and the as-left run over the scale"
	                                 : found       ? "errors of the as-found run over the scale"
	                                               : "errors of the as-left run over the scale"};
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Errors over the scale");
	fl_chart *chart = fl_sheet_add_chart(w->sheet, &frame);
	if (!chart)
		return;
	add_band(w, chart, &axis, found ? found : left);
	if (found)
		add_run(w, chart, &axis, found);
	if (left)
		add_run(w, chart, &axis, left);
	explain(w, chart, found, left);
}
