/* trend_chart.c - the deciding point through the years as it was found and left, and its drift chained.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "years.h"

#define FORETOLD 4.0 /* years after the last session that are shown at most */

static void add_mark(fl_years *y, fl_chart *chart, fl_day day, double error, double u, bool filled) {
	if (isnan(error))
		return;
	fl_chart_point(y->sheet, chart,
	               (fl_plot_point){.x = fl_years_at(day),
	                               .y = 100 * error,
	                               .bar = isfinite(u) ? 200 * u : 0,
	                               .mark = FL_MARK_DOT,
	                               .filled = filled});
}

/* Where something was done that the drift does not run across. */
static void add_breaks(fl_years *y, fl_chart *chart, const fl_saw *saw) {
	bool any = false;
	for (size_t i = 0; i < saw->count; i++)
		if (saw->teeth[i].breaks) {
			double x = fl_years_at(saw->teeth[i].day);
			fl_chart_line(y->sheet, chart, (fl_plot_line){x, 0, x, 0, FL_STROKE_EVENT});
			any = true;
		}
	if (any)
		fl_chart_legend(y->sheet, chart,
		                (fl_legend){.text = "cleaned, repaired or touched: the drift begins anew",
		                            .kind = FL_LEGEND_LINE,
		                            .stroke = FL_STROKE_EVENT});
}

static void say_line(fl_years *y, fl_chart *chart, const char *text, fl_stroke stroke) {
	fl_chart_legend(y->sheet, chart, (fl_legend){.text = text, .kind = FL_LEGEND_LINE, .stroke = stroke});
}

static void say_mark(fl_years *y, fl_chart *chart, const char *text, bool filled) {
	fl_chart_legend(
	    y->sheet, chart,
	    (fl_legend){.text = text, .kind = FL_LEGEND_POINT, .sample = {.mark = FL_MARK_DOT, .filled = filled}});
}

/* Whole years around the sessions and what is foretold. */
static fl_chart frame_of(const fl_years *y, double until) {
	fl_chart frame = {.x_label = "year", .whole_steps = true};
	frame.x_low = floor(fl_years_at(y->records[0].day));
	frame.x_high = ceil(fmax(until, fl_years_at(y->last->day)) + 0.05);
	return frame;
}

/* ---- as found and as left ---------------------------------------------------------------------------------------- */

static void add_saw(fl_years *y, fl_chart *chart, const fl_saw *saw) {
	for (size_t i = 1; i < saw->count; i++) {
		const fl_tooth *before = &saw->teeth[i - 1], *tooth = &saw->teeth[i];
		if (isnan(tooth->chained) || isnan(before->as_left) || isnan(tooth->as_found))
			continue;
		fl_chart_line(y->sheet, chart,
		              (fl_plot_line){fl_years_at(before->day), 100 * before->as_left, fl_years_at(tooth->day),
		                             100 * tooth->as_found, FL_STROKE_FULL});
	}
	for (size_t i = 0; i < saw->count; i++) {
		const fl_tooth *tooth = &saw->teeth[i];
		add_mark(y, chart, tooth->day, tooth->as_found, tooth->u_found, false);
		if (!(tooth->as_left == tooth->as_found))
			add_mark(y, chart, tooth->day, tooth->as_left, tooth->u_left, true);
	}
}

/* The mean and the bounds from the last as-left on. */
static void add_forecast(fl_years *y, fl_chart *chart, const fl_quantity_years *q, fl_day until) {
	double mean_before = 0, half_before = 0;
	fl_day from = q->forecast.from;
	enum { STEPS = 24 };
	for (int i = 0; i <= STEPS; i++) {
		fl_day day = from + (fl_day)((double)(until - from) * i / STEPS);
		double mean, half;
		if (fl_trend_expect(&q->saw, &q->drift, day, &mean, &half, NULL) < 0)
			return;
		if (i > 0) {
			double x1 = fl_years_at(from + (fl_day)((double)(until - from) * (i - 1) / STEPS)), x2 = fl_years_at(day);
			for (double side = 1; side >= -1; side -= 2)
				fl_chart_line(y->sheet, chart,
				              (fl_plot_line){x1, 100 * (mean_before + side * half_before), x2,
				                             100 * (mean + side * half), FL_STROKE_FINE});
		}
		mean_before = mean;
		half_before = half;
	}
	fl_chart_line(y->sheet, chart,
	              (fl_plot_line){fl_years_at(from), 100 * q->forecast.start, fl_years_at(until), 100 * mean_before,
	                             FL_STROKE_DASHED});
	say_line(y, chart, "mean expected", FL_STROKE_DASHED);
	say_line(y, chart, "95 % prediction interval", FL_STROKE_FINE);
}

/* As far as the mean needs to the limit, within what can be shown. */
static fl_day foretold_until(const fl_years *y, const fl_quantity_years *q) {
	fl_day most = y->last->day + (fl_day)(FORETOLD * FL_DAYS_PER_YEAR);
	fl_day least = y->last->day + (fl_day)FL_DAYS_PER_YEAR, day = q->forecast.by_mean;
	return !q->forecast.determined ? y->last->day : day == FL_NO_DAY || day > most ? most : day < least ? least : day;
}

static void chart_errors(fl_years *y, const fl_quantity_years *q) {
	const fl_tooth *last = &q->saw.teeth[q->saw.count - 1];
	fl_day until = foretold_until(y, q);
	fl_chart frame = frame_of(y, fl_years_at(until));
	frame.y_label = "error, % of span";
	frame.alternative =
	    fl_sheet_printf(y->sheet, "%s as found and as left in each session, and what is expected", q->name);
	fl_sheet_addf(y->sheet, FL_BLOCK_HEADING, "As found and as left: %s", q->name);
	fl_chart *chart = fl_sheet_add_chart(y->sheet, &frame);
	if (isfinite(last->tolerance)) {
		fl_plot_edge edge = {frame.x_low, 100 * last->tolerance, 100 * (last->tolerance - last->U)};
		fl_chart_edge(y->sheet, chart, edge);
		edge.x = frame.x_high;
		fl_chart_edge(y->sheet, chart, edge);
	}
	say_mark(y, chart, "as-found", false);
	say_mark(y, chart, "as-left, where it differs", true);
	fl_chart_legend(y->sheet, chart, (fl_legend){.text = "expanded uncertainty", .kind = FL_LEGEND_BAR});
	say_line(y, chart, "between two sessions", FL_STROKE_FULL);
	if (q->forecast.determined)
		add_forecast(y, chart, q, until);
	add_saw(y, chart, &q->saw);
	add_breaks(y, chart, &q->saw);
	if (isfinite(last->tolerance)) {
		fl_chart_legend(y->sheet, chart, (fl_legend){.text = "tolerance", .kind = FL_LEGEND_BAND});
		fl_chart_legend(y->sheet, chart, (fl_legend){.text = "guard band", .kind = FL_LEGEND_GUARD});
	}
}

/* ---- chained ----------------------------------------------------------------------------------------------------- */

static size_t stretch_begins(const fl_saw *saw) {
	for (size_t i = saw->count; i-- > 1;)
		if (saw->teeth[i].breaks)
			return i;
	return 0;
}

static void add_line(fl_years *y, fl_chart *chart, const fl_quantity_years *q, fl_day began) {
	enum { STEPS = 24 };
	double most = (y->last->day - began) / FL_DAYS_PER_YEAR, x0 = fl_years_at(began);
	double at_before = 0, half_before = 0;
	for (int i = 0; i <= STEPS; i++) {
		double years = most * i / STEPS, step = most / STEPS, at, half;
		fl_trend_predict(&q->drift.line, years, 0.95, &at, &half);
		double x1 = x0 + years - step, x2 = x0 + years;
		for (double side = 1; i > 0 && side >= -1; side -= 2)
			fl_chart_line(y->sheet, chart,
			              (fl_plot_line){x1, 100 * (at_before + side * half_before), x2, 100 * (at + side * half),
			                             FL_STROKE_FINE});
		if (i > 0)
			fl_chart_line(y->sheet, chart, (fl_plot_line){x1, 100 * at_before, x2, 100 * at, FL_STROKE_FULL});
		at_before = at;
		half_before = half;
	}
	say_line(y, chart, "straight line of the last stretch", FL_STROKE_FULL);
	say_line(y, chart, "95 % prediction interval", FL_STROKE_FINE);
}

static void chart_chained(fl_years *y, const fl_quantity_years *q) {
	fl_chart frame = frame_of(y, 0);
	const fl_saw *saw = &q->saw;
	size_t begins = stretch_begins(saw);
	frame.y_label = "chained drift, % of span";
	frame.alternative = fl_sheet_printf(y->sheet, "chained drift of %s", q->name);
	fl_sheet_addf(y->sheet, FL_BLOCK_HEADING, "Chained drift: %s", q->name);
	fl_chart *chart = fl_sheet_add_chart(y->sheet, &frame);
	say_mark(y, chart, "as-found, chained", false);
	say_mark(y, chart, "a stretch begins", true);
	if (q->drift.determined)
		add_line(y, chart, q, saw->teeth[begins].day);
	for (size_t i = 0; i < saw->count; i++) {
		add_mark(y, chart, saw->teeth[i].day, saw->teeth[i].chained, saw->teeth[i].u_found, false);
		if (i == 0 || saw->teeth[i].breaks)
			add_mark(y, chart, saw->teeth[i].day, 0, NAN, true);
	}
	add_breaks(y, chart, saw);
}

void fl_years_charts(fl_years *y) {
	if (!y->decides)
		return;
	chart_errors(y, y->decides);
	if (y->count > 1)
		chart_chained(y, y->decides);
}
