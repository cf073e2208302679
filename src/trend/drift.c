/* drift.c - slope of the chained drift, its curvature, and when the guarded limit comes.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The chained points are fitted by least squares with weights 1/u^2, u the standard uncertainty of the as-found (of
 * the as-left at the start); the width comes from their scatter about the line. A run that ends one interval and, left
 * alone, begins the next cancels in the sum, so neighbouring points are independent; where the instrument was adjusted
 * its as-left enters all later points. The line neglects that small common part.
 *
 * From the last as-left L on, a reading after tau years is expected at L + b tau, within
 * t(n - 2) s sqrt(1 + 1 + tau^2 / Sxx): the scatter of the reading, that of L, and the uncertainty of the slope.
 */
#include "drift.h"
#include "words.h"

#include <math.h>

/* ---- the points ------------------------------------------------------------------------------------------------- */

/* The tooth whose as-left begins the last stretch. */
static size_t first_of_stretch(const fl_saw *saw) {
	for (size_t i = saw->count; i-- > 1;)
		if (saw->teeth[i].breaks)
			return i;
	return 0;
}

/* Weights that add up to n; all 1 where an uncertainty is missing. */
static void weigh(const fl_saw *saw, fl_stretch *stretch) {
	double sum = 0.0;
	bool known = true;
	for (size_t i = 0; i < stretch->n; i++) {
		const fl_tooth *tooth = &saw->teeth[stretch->first + i];
		double u = i ? tooth->u_found : tooth->u_left;
		known = known && u > 0.0 && isfinite(u);
		stretch->w[i] = 1.0 / (u * u);
		sum += stretch->w[i];
	}
	for (size_t i = 0; i < stretch->n; i++)
		stretch->w[i] = known ? stretch->w[i] * (double)stretch->n / sum : 1.0;
}

fl_status fl_drift_stretch(fl_saw *saw, bool hours, fl_stretch *out, fl_error *err) {
	fl_stretch stretch = {.first = first_of_stretch(saw)};
	size_t room = saw->count - stretch.first + 1;
	stretch.x = fl_arena_alloc(&saw->arena, 3 * room, sizeof *stretch.x);
	if (!stretch.x)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trend");
	stretch.y = stretch.x + room;
	stretch.w = stretch.y + room;
	bool counted = true;
	for (size_t i = stretch.first; i < saw->count; i++, stretch.n++) {
		const fl_tooth *tooth = &saw->teeth[i], *start = &saw->teeth[stretch.first];
		stretch.y[stretch.n] = stretch.n ? tooth->chained : 0.0;
		stretch.x[stretch.n] = hours ? tooth->hours - start->hours : (tooth->day - start->day) / FL_DAYS_PER_YEAR;
		counted = counted && (stretch.n == 0 ? !isnan(tooth->hours) : stretch.x[stretch.n] > stretch.x[stretch.n - 1]);
	}
	if (hours && !counted && stretch.n > 1)
		stretch.n = 1;
	weigh(saw, &stretch);
	*out = stretch;
	return FL_OK;
}

/* ---- slope and curvature ---------------------------------------------------------------------------------------- */

/* The slope that comes out when nobody thinks of the adjustments. */
static double naive_slope(const fl_saw *saw, const fl_stretch *stretch) {
	double sx = 0.0, sy = 0.0, sxx = 0.0, sxy = 0.0, n = (double)stretch->n;
	for (size_t i = 0; i < stretch->n; i++) {
		const fl_tooth *tooth = &saw->teeth[stretch->first + i];
		double y = i ? tooth->as_found : tooth->as_left;
		sx += stretch->x[i];
		sy += y;
		sxx += stretch->x[i] * stretch->x[i];
		sxy += stretch->x[i] * y;
	}
	return (sxy - sx * sy / n) / (sxx - sx * sx / n);
}

/* Quadratic term and its t: y = c0 + c1 x + c2 x^2. */
static fl_status test_curvature(fl_saw *saw, const fl_stretch *stretch, fl_drift *drift, fl_error *err) {
	double c[3], covariance[9], s = 0.0, squares = 0.0;
	double *rows = fl_arena_alloc(&saw->arena, 4 * stretch->n, sizeof *rows);
	if (!rows)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trend");
	double *y = rows + 3 * stretch->n;
	for (size_t i = 0; i < stretch->n; i++) {
		double root = sqrt(stretch->w[i]), x = stretch->x[i];
		rows[3 * i] = root;
		rows[3 * i + 1] = root * x;
		rows[3 * i + 2] = root * x * x;
		y[i] = root * stretch->y[i];
	}
	fl_status status = fl_numeric_least_squares(rows, y, stretch->n, 3, c, covariance, &s, &squares, err);
	if (status < 0)
		return status;
	drift->acceleration = 2.0 * c[2];
	drift->t_critical = fl_numeric_student(PROBABILITY, (double)stretch->n - 3.0);
	double se = sqrt(covariance[8]);
	drift->t_curvature = se > 0.0 ? c[2] / se : 0.0;
	drift->has_curvature = true;
	bool significant = fabs(drift->t_curvature) > drift->t_critical;
	drift->accelerates = significant && drift->acceleration * drift->slope > 0.0;
	drift->slows = significant && drift->acceleration * drift->slope < 0.0;
	return FL_OK;
}

static fl_status say_drift(fl_saw *saw, fl_drift *d, fl_error *err) {
	const char *more = d->accelerates ? "; it accelerates" : d->slows ? "; it slows down" : "";
	return fl_trend_say(
	    &saw->arena, &d->sentence, err,
	    "chained drift %s of span a year, standard uncertainty %s %%, over %d intervals%s (as-found values as "
	    "they stand would say %s)",
	    fl_trend_word_percent(d->slope, 2).text, fl_trend_word_number(100.0 * d->se, 2).text, d->intervals, more,
	    fl_trend_word_percent(d->naive_slope, 2).text);
}

fl_status fl_trend_drift(fl_saw *saw, fl_drift *out, fl_error *err) {
	fl_drift drift = {.slope = NAN, .se = NAN, .naive_slope = NAN};
	fl_stretch stretch = {0};
	fl_status status = saw->count ? fl_drift_stretch(saw, false, &stretch, err) : FL_OK;
	if (status < 0)
		return status;
	drift.intervals = stretch.n ? (int)stretch.n - 1 : 0;
	*out = drift;
	if (drift.intervals < LEAST_INTERVALS)
		return fl_trend_say(
		    &saw->arena, &out->sentence, err,
		    "%d calibration interval%s since the drift last began anew: no line is drawn through fewer than "
		    "three",
		    drift.intervals, drift.intervals == 1 ? "" : "s");
	status = fl_trend_line(stretch.x, stretch.y, stretch.w, stretch.n, &drift.line, err);
	if (status < 0)
		return status;
	drift.determined = true;
	drift.slope = drift.line.slope;
	drift.se = drift.line.se_slope;
	drift.naive_slope = naive_slope(saw, &stretch);
	if (drift.intervals > LEAST_INTERVALS)
		status = test_curvature(saw, &stretch, &drift, err);
	if (status >= 0)
		status = say_drift(saw, &drift, err);
	if (status >= 0)
		*out = drift;
	return status;
}

/* ---- forecast --------------------------------------------------------------------------------------------------- */

static double half_width(const fl_drift_line *line, double t, double x) {
	return t * line->s * sqrt(2.0 + x * x / line->sxx);
}

double fl_drift_half_width(const fl_drift_line *line, double x) {
	return half_width(line, fl_numeric_student(PROBABILITY, line->dof), x);
}

double fl_drift_touch(const fl_drift_line *line, double start, double limit, double most) {
	enum { STEPS = 4096, HALVINGS = 40 };
	double t = fl_numeric_student(PROBABILITY, line->dof), below = 0.0, touches = INFINITY;
	for (int i = 0; i <= STEPS && isinf(touches); i++) {
		double x = most * i / STEPS;
		if (fabs(start + line->slope * x) + half_width(line, t, x) >= limit)
			touches = x;
		else
			below = x;
	}
	for (int i = 0; i < HALVINGS && touches > 0.0 && !isinf(touches); i++) {
		double x = 0.5 * (below + touches);
		*(fabs(start + line->slope * x) + half_width(line, t, x) >= limit ? &touches : &below) = x;
	}
	return touches;
}

double fl_drift_limit(const fl_saw *saw) {
	const fl_tooth *last = &saw->teeth[saw->count - 1];
	return last->tolerance - last->U;
}

/* Years until start + slope x reaches the limit on the side that it drifts to; INFINITY if never. */
static double mean_touch(double start, double slope, double limit) {
	if (fabs(start) >= limit)
		return 0.0;
	if (slope == 0.0)
		return INFINITY;
	return (slope > 0.0 ? limit - start : -limit - start) / slope;
}

static fl_day day_after(fl_day from, double years) {
	return years > FL_FORECAST_YEARS ? FL_NO_DAY : from + (fl_day)ceil(years * FL_DAYS_PER_YEAR - 1e-9);
}

fl_status fl_trend_expect(const fl_saw *saw, const fl_drift *drift, fl_day day, double *mean, double *half,
                          fl_error *err) {
	if (!drift->determined || isnan(saw->teeth[saw->count - 1].as_left))
		return fl_fail(err, FL_E_NUMERIC, "nothing can be foretold: %s",
		               drift->determined ? "the last session has no as-left" : drift->sentence);
	const fl_tooth *last = &saw->teeth[saw->count - 1];
	double years = (day - last->day) / FL_DAYS_PER_YEAR;
	*mean = last->as_left + drift->slope * years;
	*half = fl_drift_half_width(&drift->line, years);
	return FL_OK;
}

static fl_status say_forecast(fl_saw *saw, fl_forecast *f, fl_error *err) {
	const char *mean =
	    f->by_mean == FL_NO_DAY ? "not within 20 years" : fl_day_format(f->by_mean, (char[FL_DAY_SIZE]){0});
	const char *bound =
	    f->by_bound == FL_NO_DAY ? "not within 20 years" : fl_day_format(f->by_bound, (char[FL_DAY_SIZE]){0});
	if (!(f->limit > 0.0))
		return fl_trend_say(&saw->arena, &f->sentence, err,
		                    "the uncertainty is as large as the tolerance: there is no guarded limit to stay within");
	if (f->by_bound == f->from)
		return fl_trend_say(
		    &saw->arena, &f->sentence, err,
		    "the 95 %% bound lies beyond the guarded limit of %s of span from the start: the years do not "
		    "agree well enough, or the instrument was left near its limit",
		    fl_trend_word_percent(f->limit, 2).text);
	return fl_trend_say(&saw->arena, &f->sentence, err,
	                    "guarded limit %s of span: by the mean %s, by the 95 %% bound %s",
	                    fl_trend_word_percent(f->limit, 2).text, mean, bound);
}

fl_status fl_trend_forecast(fl_saw *saw, const fl_drift *drift, fl_forecast *out, fl_error *err) {
	fl_forecast f = {.from = FL_NO_DAY, .by_mean = FL_NO_DAY, .by_bound = FL_NO_DAY, .start = NAN, .limit = NAN};
	*out = f;
	if (!drift->determined)
		return fl_trend_say(&saw->arena, &out->sentence, err, "no forecast: %s", drift->sentence);
	const fl_tooth *last = &saw->teeth[saw->count - 1];
	f.from = last->day;
	f.start = last->as_left;
	f.limit = fl_drift_limit(saw);
	if (isnan(f.start) || isnan(f.limit))
		return fl_trend_say(&saw->arena, &out->sentence, err, "no forecast: %s",
		                    isnan(f.start) ? "the last session has no as-left" : "there is no tolerance for this");
	f.determined = true;
	f.by_mean = day_after(f.from, mean_touch(f.start, drift->slope, f.limit));
	f.by_bound = day_after(f.from, fl_drift_touch(&drift->line, f.start, f.limit, FL_FORECAST_YEARS));
	fl_status status = say_forecast(saw, &f, err);
	*out = f;
	return status;
}
