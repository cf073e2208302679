/* lookback.c - an as-found out of tolerance: since when, and what the engine got meanwhile.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Between the as-left of the session before (day t1, error e1) and this as-found (t2, e2) the error is taken to have
 * grown steadily. It passed the tolerance T at t1 + (T - e1) / (e2 - e1) (t2 - t1). With both errors shifted by their
 * expanded uncertainties outward that is the earliest day, inward the latest. A jump could have come on any day between
 * the sessions: the report says that too.
 *
 * The controller holds the indication at the set point: indication = true value + error at that place of the scale, so
 * the engine got true = set point - error x span, for a fuel of the density that the dial assumes.
 */
#include "foundleft/trend.h"
#include "words.h"

#include <math.h>

/* ---- the error along the scale ---------------------------------------------------------------------------------- */

/* Error at x: straight between the points, held beyond the outer ones. NAN without points. */
static double error_at(const fl_kept_run *run, double x) {
	const fl_kept_point *below = NULL, *above = NULL;
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_kept_point *p = &run->points[i];
		if (isnan(p->x) || isnan(p->error_span))
			continue;
		if (p->x <= x && (!below || p->x > below->x))
			below = p;
		if (p->x >= x && (!above || p->x < above->x))
			above = p;
	}
	if (!below || !above)
		return below ? below->error_span : above ? above->error_span : NAN;
	if (above->x - below->x <= 0.0)
		return below->error_span;
	return below->error_span + (above->error_span - below->error_span) * (x - below->x) / (above->x - below->x);
}

/* The place on the scale where the fuel really was while the dial stood at `x_shown`. */
static double true_place(const fl_kept_run *from, const fl_kept_run *to, double part, double x_shown, double *error) {
	double x = x_shown;
	for (int i = 0; i < 50; i++) { /* errors change slowly along the scale: this settles at once */
		*error = (1.0 - part) * error_at(from, x) + part * error_at(to, x);
		x = x_shown - *error;
	}
	return x;
}

/* ---- the dates -------------------------------------------------------------------------------------------------- */

static const fl_kept_point *same_point(const fl_kept_run *run, int point) {
	for (size_t i = 0; run->state != FL_KEPT_NONE && i < run->point_count; i++)
		if (run->points[i].point == point)
			return &run->points[i];
	return NULL;
}

/* Part of the interval at which a value that goes from a to b passes T: 0 if it began beyond, INFINITY if it never
 * does. */
static double crossing(double a, double b, double T) {
	if (a >= T)
		return 0.0;
	return b > T ? (T - a) / (b - a) : INFINITY;
}

static fl_day day_at(const fl_lookback *l, double part) {
	return l->from + (fl_day)lround(part * (l->to - l->from));
}

typedef struct crossings {
	double crossed, earliest, latest; /* parts of the interval */
	const fl_kept_point *left, *found;
} crossings;

static crossings crossings_of(const fl_kept_point *left, const fl_kept_point *found) {
	double sign = found->error_span < 0.0 ? -1.0 : 1.0, T = found->tolerance_span;
	double a = sign * left->error_span, b = sign * found->error_span;
	return (crossings){crossing(a, b, T), crossing(a + left->U_span, b + found->U_span, T),
	                   crossing(a - left->U_span, b - found->U_span, T), left, found};
}

/* Of the points that were found out of tolerance, the one that left it first. */
static bool first_to_leave(const fl_record *before, const fl_record *record, crossings *first, bool *needed) {
	bool known = false;
	*needed = false;
	for (size_t i = 0; record->as_found.state != FL_KEPT_NONE && i < record->as_found.point_count; i++) {
		const fl_kept_point *found = &record->as_found.points[i];
		if (!(fabs(found->error_span) > found->tolerance_span))
			continue;
		*needed = true;
		const fl_kept_point *left = before ? same_point(&before->as_left, found->point) : NULL;
		if (!left)
			continue;
		crossings c = crossings_of(left, found);
		if (!known || c.crossed < first->crossed)
			*first = c;
		known = true;
	}
	return known;
}

/* ---- what the engine got ---------------------------------------------------------------------------------------- */

static void fill_days(const fl_record *before, const fl_record *record, fl_lookback *l) {
	double span = record->scale_high - record->scale_low, length = (double)(l->to - l->from);
	double x_shown = (record->set_point - record->scale_low) / span;
	const fl_day days[FL_LOOKBACK_DAYS] = {l->from, l->earliest, l->crossed, l->latest == FL_NO_DAY ? l->to : l->latest,
	                                       l->to};
	l->has_set_point = span > 0.0 && !isnan(record->set_point);
	l->set_point = record->set_point;
	for (int i = 0; i < FL_LOOKBACK_DAYS; i++) {
		double error = NAN, part = length > 0.0 ? (days[i] - l->from) / length : 1.0;
		double x = true_place(&before->as_left, &record->as_found, part, x_shown, &error);
		l->days[i] = (fl_lookback_day){days[i], error, record->scale_low + x * span};
	}
}

static fl_status say_lookback(const fl_record *record, const crossings *c, fl_lookback *l, fl_arena *arena,
                              fl_error *err) {
	const char *engine = "";
	if (l->has_set_point) {
		fl_status status =
		    fl_trend_say(arena, &engine, err,
		                 "; while the controller held %s %s the engine got %s on the day it was crossed and %s at "
		                 "the end",
		                 fl_trend_word_number(l->set_point, 1).text, record->dial_unit,
		                 fl_trend_word_number(l->days[2].true_value, 2).text,
		                 fl_trend_word_number(l->days[FL_LOOKBACK_DAYS - 1].true_value, 2).text);
		if (status < 0)
			return status;
	}
	return fl_trend_say(
	    arena, &l->sentence, err,
	    "found at %s of span with a tolerance of %s %%: by a steady drift the limit was passed about %s (not "
	    "before %s%s, %s%s)%s; a jump could have come on any day from %s to %s",
	    fl_trend_word_percent(c->found->error_span, 2).text,
	    fl_trend_word_number(100.0 * c->found->tolerance_span, 2).text, fl_trend_word_day(l->crossed).text,
	    fl_trend_word_day(l->earliest).text, l->before_from ? ", when it may have been passed already" : "",
	    l->latest == FL_NO_DAY ? "perhaps not at all within the uncertainty" : "at the latest ",
	    l->latest == FL_NO_DAY ? "" : fl_trend_word_day(l->latest).text, engine, fl_trend_word_day(l->from).text,
	    fl_trend_word_day(l->to).text);
}

fl_status fl_trend_lookback(const fl_record *before, const fl_record *record, fl_arena *arena, fl_lookback *out,
                            fl_error *err) {
	fl_lookback l = {.from = before ? before->day : FL_NO_DAY, .to = record->day, .crossed = FL_NO_DAY};
	crossings c = {0};
	l.earliest = l.latest = FL_NO_DAY;
	bool known = first_to_leave(before, record, &c, &l.needed);
	*out = l;
	if (!l.needed)
		return fl_trend_say(arena, &out->sentence, err, "nothing was found out of tolerance");
	if (!known || (record->work & FL_WORK_BEFORE))
		return fl_trend_say(
		    arena, &out->sentence, err,
		    "found out of tolerance, and no as-left before it to tell since when: every day since the last good "
		    "result is in doubt");
	l.determined = true;
	l.point = c.found->point;
	l.crossed = day_at(&l, c.crossed);
	l.earliest = day_at(&l, c.earliest);
	l.latest = isinf(c.latest) ? FL_NO_DAY : day_at(&l, c.latest);
	l.before_from = c.earliest == 0.0;
	fill_days(before, record, &l);
	fl_status status = say_lookback(record, &c, &l, arena, err);
	*out = l;
	return status;
}
