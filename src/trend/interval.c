/* interval.c - how long until the next calibration: by staircase, control chart and time in use.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * ILAC-G24:2022 / OIML D 10:2022 names the methods and leaves the figures to the laboratory; the figures of the policy
 * are common practice, no source; the four fifths of the staircase are the example of the standard, from memory.
 */
#include "drift.h"
#include "words.h"

#include <math.h>
#include <string.h>

fl_interval_policy fl_trend_policy(void) {
	return (fl_interval_policy){.first_months = 12,
	                            .shortest_months = 3,
	                            .longest_months = 24,
	                            .inside = 0.8,
	                            .lengthen = 1.25,
	                            .shorten = 0.6,
	                            .target_reliability = 0.9,
	                            .confidence = 0.95};
}

const char *fl_interval_method_name(fl_interval_method method) {
	static const char *const names[FL_INTERVAL_METHODS] = {"staircase", "control chart", "time in use",
	                                                       "reliability of the fleet"};
	return (unsigned)method < FL_INTERVAL_METHODS ? names[method] : "";
}

/* Whole months within the policy; *note tells where it was held. */
static int hold(double months, const fl_interval_policy *policy, const char **note) {
	*note = "";
	if (months < policy->shortest_months) {
		*note = ", held at the shortest interval";
		return policy->shortest_months;
	}
	if (months > policy->longest_months) {
		*note = ", held at the longest interval";
		return policy->longest_months;
	}
	return (int)floor(months + 1e-9);
}

/* ---- staircase -------------------------------------------------------------------------------------------------- */

/* The as-found point that comes nearest to its tolerance, or goes furthest beyond. */
static const fl_kept_point *worst_of(const fl_kept_run *run) {
	const fl_kept_point *worst = NULL;
	double most = -1.0;
	for (size_t i = 0; run->state != FL_KEPT_NONE && i < run->point_count; i++) {
		double part = fabs(run->points[i].error_span) / run->points[i].tolerance_span;
		if (part > most) {
			most = part;
			worst = &run->points[i];
		}
	}
	return worst;
}

/* The months that led to the last calibration: as agreed before, or as they were. */
static int months_before(const fl_record *before, const fl_record *last) {
	if (before->interval_months > 0)
		return before->interval_months;
	int months = (int)lround((last->day - before->day) / FL_DAYS_PER_YEAR * 12.0);
	return months > 0 ? months : 1;
}

fl_status fl_trend_staircase(const fl_record *records, size_t count, const fl_interval_policy *policy, fl_arena *arena,
                             fl_proposal *out, fl_error *err) {
	*out = (fl_proposal){.method = FL_INTERVAL_STAIRCASE, .hours = NAN};
	const fl_kept_point *worst = count >= 2 ? worst_of(&records[count - 1].as_found) : NULL;
	if (!worst) {
		out->determined = true;
		out->months = policy->first_months;
		return fl_trend_say(arena, &out->reason, err, "no interval has been completed yet: %d months to begin with",
		                    policy->first_months);
	}
	int had = months_before(&records[count - 2], &records[count - 1]);
	double part = fabs(worst->error_span) / worst->tolerance_span;
	double factor = part > 1.0 ? policy->shorten : part <= policy->inside ? policy->lengthen : 1.0;
	const char *note = "", *step = part > 1.0 ? "shortened" : part <= policy->inside ? "lengthened" : "kept";
	out->determined = true;
	out->months = hold(had * factor, policy, &note);
	return fl_trend_say(arena, &out->reason, err,
	                    "found at %s of span, %s %% of the tolerance, after %d months: %s to %d months%s",
	                    fl_trend_word_percent(worst->error_span, 2).text, fl_trend_word_number(100.0 * part, 0).text,
	                    had, step, out->months, note);
}

/* ---- control chart ---------------------------------------------------------------------------------------------- */

/* Whole months behind `from` that end before `day`. */
static int months_until(fl_day from, fl_day day, int most) {
	int months = 0;
	while (months < most && fl_trend_due(from, months + 1) < day)
		months++;
	return months;
}

fl_status fl_trend_chart(fl_saw *saw, const fl_drift *drift, const fl_interval_policy *policy, fl_proposal *out,
                         fl_error *err) {
	fl_forecast forecast;
	const char *note = "";
	*out = (fl_proposal){.method = FL_INTERVAL_CHART, .hours = NAN};
	fl_status status = fl_trend_forecast(saw, drift, &forecast, err);
	if (status < 0)
		return status;
	if (!forecast.determined) {
		out->reason = forecast.sentence;
		return FL_OK;
	}
	int most = policy->longest_months + 1;
	int months = forecast.by_bound == FL_NO_DAY ? most : months_until(forecast.from, forecast.by_bound, most);
	out->determined = true;
	out->months = hold(months, policy, &note);
	return fl_trend_say(&saw->arena, &out->reason, err, "%s: %d months%s", forecast.sentence, out->months, note);
}

/* ---- time in use ------------------------------------------------------------------------------------------------ */

/* Hours a year between the last two sessions. */
static double pace_of(const fl_saw *saw) {
	const fl_tooth *last = &saw->teeth[saw->count - 1], *before = last - 1;
	return (last->hours - before->hours) / ((last->day - before->day) / FL_DAYS_PER_YEAR);
}

static fl_status propose_hours(fl_saw *saw, const fl_drift_line *line, const fl_interval_policy *policy,
                               fl_proposal *out, fl_error *err) {
	const char *note = "";
	double pace = pace_of(saw), most = pace * FL_FORECAST_YEARS;
	double hours = fl_drift_touch(line, saw->teeth[saw->count - 1].as_left, fl_drift_limit(saw), most);
	double months = hours / pace * 12.0;
	out->determined = true;
	out->months = hold(months, policy, &note);
	out->hours = isinf(hours) || months > policy->longest_months ? policy->longest_months / 12.0 * pace : hours;
	return fl_trend_say(
	    &saw->arena, &out->reason, err,
	    "%s of span in 1000 h, standard uncertainty %s %%; the 95 %% bound reaches the guarded limit after %s "
	    "h; at %s h a year %d months%s",
	    fl_trend_word_percent(1000.0 * line->slope, 3).text, fl_trend_word_number(100000.0 * line->se_slope, 3).text,
	    isinf(hours) ? "more than 20 years of" : fl_trend_word_number(hours, 0).text,
	    fl_trend_word_number(pace, 0).text, out->months, note);
}

fl_status fl_trend_hours(fl_saw *saw, const fl_interval_policy *policy, fl_proposal *out, fl_error *err) {
	fl_stretch stretch = {0};
	fl_drift_line line;
	*out = (fl_proposal){.method = FL_INTERVAL_HOURS, .hours = NAN};
	fl_status status = saw->count ? fl_drift_stretch(saw, true, &stretch, err) : FL_OK;
	if (status < 0)
		return status;
	if (stretch.n < LEAST_INTERVALS + 1)
		return fl_trend_say(&saw->arena, &out->reason, err,
		                    "fewer than three intervals with a reading of the hour counter at both ends");
	if (isnan(fl_drift_limit(saw)) || isnan(saw->teeth[saw->count - 1].as_left))
		return fl_trend_say(&saw->arena, &out->reason, err,
		                    "there is no tolerance for this, or no as-left to count from");
	status = fl_trend_line(stretch.x, stretch.y, stretch.w, stretch.n, &line, err);
	return status < 0 ? status : propose_hours(saw, &line, policy, out, err);
}
