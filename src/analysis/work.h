/* analysis/work.h - what the parts of the analysis share: the items in use and the sentences as they gather.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_ANALYSIS_WORK_H
#define FOUNDLEFT_ANALYSIS_WORK_H

#include "foundleft/analysis.h"

/* Sentences without doubles. After memory ran out `failed` stays set, so that a caller checks once. */
typedef struct sentences {
	const char **items;
	size_t count, capacity;
	bool failed;
} sentences;
void fl_analysis_say(fl_arena *arena, sentences *list, const char *format, ...) FL_PRINTF(3, 4);
/* `value` with at most `significant` digits and no trailing zeros, point as decimal mark. "?" when memory is out. */
const char *fl_analysis_number(fl_arena *arena, double value, int significant);
/* A fraction of span as "+2.54 %" and "0.35 %". */
const char *fl_analysis_percent_signed(fl_arena *arena, double span, int decimals);
const char *fl_analysis_percent(fl_arena *arena, double span, int decimals);

/* Everything that one session is computed from, and where it goes. */
typedef struct work {
	const fl_session *session;
	const fl_procedure *procedure;
	const fl_stock *stock;
	fl_reference reference; /* instrument, scale and equipment in use */
	fl_result *result;
	fl_arena *arena; /* the result's */
	sentences warnings, not_traceable;
	sentences not_determined; /* of the run at work */
} work;

/* "LK-50 rising", "stopped zero falling", "40 % of span rising and falling". */
const char *fl_analysis_point_name(const work *w, const fl_point_result *point);

/* session.c: finds instrument and equipment. */
fl_status fl_analysis_items(work *w, fl_error *err) FL_MUST_USE;

/* readings.c: every reading of a run brought to its reference. */
fl_status fl_analysis_readings(const work *w, fl_run_kind kind, fl_run_result *run, fl_error *err) FL_MUST_USE;
/* The oil of a point; NULL for the stopped zero and for a pressure point. */
fl_status fl_analysis_oil(const work *w, int point, const fl_oil **oil, fl_error *err) FL_MUST_USE;

/* points.c: means per point and direction, and of both directions. */
fl_status fl_analysis_points(const work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* spread.c: hysteresis and repeatability. After fl_analysis_points, before the budgets. */
fl_status fl_analysis_spread(work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* budget.c: the uncertainty of each point. */
fl_status fl_analysis_budgets(const work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* lines.c: zeros, lines and linearity. */
fl_status fl_analysis_lines(work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* Whether a point takes part in the lines: where the scale begins well above zero viscosity, the output at rest is
 * below the signal's measuring range and says nothing about the instrument. And where on the scale it stands there. */
bool fl_analysis_in_line(const work *w, const fl_point_result *point);
double fl_analysis_line_position(const fl_run_result *run, const fl_point_result *combined);

/* covariance.c: what acts on the ideal output, on the output found, or on either. */
typedef enum budget_side { SIDE_BOTH, SIDE_IDEAL, SIDE_OUTPUT } budget_side;
bool fl_analysis_acts_on_ideal(const fl_budget_line *line);
/* Of the errors of two points of one run (of one with itself: its variance), fraction of span squared. */
double fl_analysis_covariance(const fl_point_result *a, const fl_point_result *b, budget_side side);
fl_status fl_analysis_covariances(const work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;
void fl_analysis_say_correlation(work *w);

/* general.c: after fl_analysis_lines and the budgets. */
fl_status fl_analysis_general(work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* decide.c: tolerance and verdict of each point, then of the run. */
fl_status fl_analysis_verdicts(work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* flow.c: the capillary at each point, and its warnings. */
fl_status fl_analysis_flows(work *w, fl_run_result *run, fl_error *err) FL_MUST_USE;

/* general.c: the true value when the dial shows the place shown_x; false where the run's line does not give it. */
bool fl_analysis_true_value(const work *w, const fl_run_result *run, double shown_x, fl_true_value *out);

/* function.c: the function checks. After the runs. */
fl_status fl_analysis_functions(const work *w, fl_error *err) FL_MUST_USE;

/* trace.c: what stands in the way of traceability. */
void fl_analysis_trace(work *w);

#endif
