/* drift.h - the points of a stretch, and when a limit is reached from the last as-left.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_TREND_DRIFT_H
#define FOUNDLEFT_TREND_DRIFT_H

#include "foundleft/trend.h"

#define PROBABILITY 0.95
#define LEAST_INTERVALS 3

/* Points of the last stretch: its start at (0, 0), then the chained drift. x in years, or in running hours. */
typedef struct fl_stretch {
	double *x, *y, *w;
	size_t n;     /* intervals + 1; 1 if the stretch only begins */
	size_t first; /* tooth whose as-left begins it */
} fl_stretch;
/* `hours`: over running hours; n is then 1 where one tooth has no counter, or one that goes back. In the saw's arena.
 */
fl_status fl_drift_stretch(fl_saw *saw, bool hours, fl_stretch *out, fl_error *err) FL_MUST_USE;

/* Half width of the two-sided 95 % interval of a reading at x behind the last as-left, by the line. The as-left that is
 * counted from and the reading that is foretold both scatter by s, and the slope is known to se. */
double fl_drift_half_width(const fl_drift_line *line, double x);
/* Smallest x >= 0 at which the interval about start + slope x touches the limit on either side; INFINITY if not up to
 * `most`. */
double fl_drift_touch(const fl_drift_line *line, double start, double limit, double most);
/* The limit that counts: T - U of the last session; NAN where the quantity has none. */
double fl_drift_limit(const fl_saw *saw);

#endif
