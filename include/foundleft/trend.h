/* foundleft/trend.h - many records of one instrument: drift chained over the years, when the limit comes, when to
 * calibrate next, and since when an instrument that was found out of tolerance may have misled.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Pure: records in, numbers and sentences out; no clock, no file. Errors are fractions of the output span, as in the
 * records; times are days, rates are per year of 365.25 days. The relations and their sources stand beside the code.
 */
#ifndef FOUNDLEFT_TREND_H
#define FOUNDLEFT_TREND_H

#include "foundleft/base.h"
#include "foundleft/numeric.h"
#include "foundleft/store.h"

#define FL_DAYS_PER_YEAR 365.25

/* ---- dates ------------------------------------------------------------------------------------------------------ */

/* The same day of the month so many months later; the month's last day where it has no such day (31 January and one
 * month: 28 or 29 February). Due dates count from the day of the calibration, not of the certificate. */
fl_day fl_trend_due(fl_day calibrated_on, int months);

/* ---- one quantity over the years -------------------------------------------------------------------------------- */

/* What is followed: the zero and the span of the line through the points, or the error at one point. */
typedef enum fl_follow { FL_FOLLOW_ZERO, FL_FOLLOW_SPAN, FL_FOLLOW_POINT } fl_follow;
typedef struct fl_quantity_followed {
	fl_follow kind;
	int point; /* FL_FOLLOW_POINT: -1 for the stopped zero, else the point's index */
} fl_quantity_followed;

/* A session as this quantity sees it. */
typedef struct fl_tooth {
	fl_day day;
	const char *number;       /* of the record, borrowed */
	double as_found, as_left; /* fractions of span; NAN where there is none. Left alone: as_left == as_found */
	double u_found, u_left;   /* standard uncertainties */
	double tolerance, U;      /* half width and expanded uncertainty of the as-found (as-left without one) at the
	                             point; NAN for zero and span */
	unsigned work;            /* FL_WORK_... */
	int stretch;              /* from 0; grows at each break */
	bool breaks;              /* the drift begins anew with this session's as-left, or with its as-found
	                             (FL_WORK_BEFORE) */
	double chained;           /* c(t) at the as-found; 0 at the start of a stretch; NAN without */
	double hours;             /* running hours, NAN */
} fl_tooth;

typedef struct fl_saw {
	fl_arena arena;
	fl_tooth *teeth; /* oldest first */
	size_t count;
	int stretches;
	fl_quantity_followed what;
} fl_saw;

/* Follows one quantity through records that stand oldest first (fl_store_history without the replaced ones), borrowed.
 * c(t_n) = as-found_n - as-left_{n-1} + c(t_{n-1}). A stretch ends at a repair or cleaning, where something was done
 * before a session, and where an as-found is missing. */
fl_status fl_trend_follow(const fl_record *records, size_t count, fl_quantity_followed what, fl_saw *out,
                          fl_error *err) FL_MUST_USE;
void fl_saw_free(fl_saw *saw);

/* ---- the line through it ---------------------------------------------------------------------------------------- */

/* A straight line through points of known relative weight, and what it says about a further one. */
typedef struct fl_drift_line {
	size_t n;
	int dof;          /* n - 2 */
	double intercept; /* at x0 */
	double x0;        /* weighted mean of x: intercept and slope are then independent */
	double slope, se_slope;
	double s;     /* residual standard deviation for a point of weight 1 */
	double sum_w; /* sum of the weights */
	double sxx;   /* weighted sum of squares of x about x0 */
} fl_drift_line;
/* Least squares with weights w[n] > 0 (NULL: all 1), n >= 3. Draper & Smith, Applied Regression Analysis, 3rd ed.,
 * sections 1.4, 3.1 and 9.2. */
fl_status fl_trend_line(const double *x, const double *y, const double *w, size_t n, fl_drift_line *out,
                        fl_error *err) FL_MUST_USE;
/* Value of the line at x and half the width of the two-sided prediction interval for one further point of weight 1. */
void fl_trend_predict(const fl_drift_line *line, double x, double probability, double *y, double *half_width);

typedef struct fl_drift {
	bool determined;                /* false: `sentence` says why there is no line */
	int intervals;                  /* calibration intervals in the last stretch */
	fl_drift_line line;             /* y: chained drift, fraction of span; x: years since the stretch began */
	double slope, se;               /* per year */
	double naive_slope;             /* per year: through the as-found as they stand (the first as-left in front); NAN */
	bool has_curvature;             /* four intervals or more */
	double acceleration;            /* per year^2: second derivative */
	double t_curvature, t_critical; /* of the quadratic term, two-sided 95 % */
	bool accelerates, slows;        /* significant at 95 %, against the sign of the slope */
	const char *sentence;           /* in the saw's arena */
} fl_drift;
/* The drift of the last stretch. Fewer than three intervals: no line, and a sentence that says so. */
fl_status fl_trend_drift(fl_saw *saw, fl_drift *out, fl_error *err) FL_MUST_USE;

/* When the guarded limit T - U comes, counted from the last session's as-left. */
typedef struct fl_forecast {
	bool determined;
	fl_day from;     /* day of the last as-left */
	double start;    /* the error then */
	double limit;    /* T - U; U of the last session at this point */
	fl_day by_mean;  /* FL_NO_DAY: not within FL_FORECAST_YEARS */
	fl_day by_bound; /* first day on which the two-sided 95 % prediction interval touches it */
	const char *sentence;
} fl_forecast;
#define FL_FORECAST_YEARS 20
/* The error expected on `day` and the half width of its 95 % prediction interval. Fails without a determined drift. */
fl_status fl_trend_expect(const fl_saw *saw, const fl_drift *drift, fl_day day, double *mean, double *half_width,
                          fl_error *err) FL_MUST_USE;
fl_status fl_trend_forecast(fl_saw *saw, const fl_drift *drift, fl_forecast *out, fl_error *err) FL_MUST_USE;

/* ---- intervals -------------------------------------------------------------------------------------------------- */

/* What a bench has agreed: common practice, no source; the standard leaves the figures to the laboratory. */
typedef struct fl_interval_policy {
	int first_months;                    /* where nothing is known: 12 */
	int shortest_months, longest_months; /* 3, 24 */
	double inside;                       /* staircase: extended when found within this part of the tolerance: 0.8 */
	double lengthen, shorten;            /* 1.25, 0.6 */
	double target_reliability;           /* in tolerance at the end of the interval: 0.9 */
	double confidence;                   /* of the Wilson interval: 0.95 */
} fl_interval_policy;
fl_interval_policy fl_trend_policy(void);

typedef enum fl_interval_method {
	FL_INTERVAL_STAIRCASE,   /* ILAC-G24 / OIML D 10, method 1: automatic adjustment, calendar time */
	FL_INTERVAL_CHART,       /* method 2: control chart, calendar time */
	FL_INTERVAL_HOURS,       /* method 3: time in use */
	FL_INTERVAL_RELIABILITY, /* method 5: statistics over a fleet */
	FL_INTERVAL_METHODS
} fl_interval_method;
const char *fl_interval_method_name(fl_interval_method method);

typedef struct fl_proposal {
	fl_interval_method method;
	bool determined;
	int months;         /* 0 if not determined */
	double hours;       /* FL_INTERVAL_HOURS; NAN otherwise */
	const char *reason; /* one sentence, with the numbers that led to it, or what is missing */
} fl_proposal;

/* Staircase: from the last as-found at the worst point and the interval that led to it. Texts go to the arena. */
fl_status fl_trend_staircase(const fl_record *records, size_t count, const fl_interval_policy *policy, fl_arena *arena,
                             fl_proposal *out, fl_error *err) FL_MUST_USE;
/* Control chart: whole months until the 95 % bound of the drift reaches the guarded limit. */
fl_status fl_trend_chart(fl_saw *saw, const fl_drift *drift, const fl_interval_policy *policy, fl_proposal *out,
                         fl_error *err) FL_MUST_USE;
/* Time in use: the same line over running hours, and the months that they take at the pace of the last interval. */
fl_status fl_trend_hours(fl_saw *saw, const fl_interval_policy *policy, fl_proposal *out, fl_error *err) FL_MUST_USE;

/* One calibration interval of one instrument of the fleet and whether it was in tolerance at its end. */
typedef struct fl_trial {
	double years;
	bool in_tolerance;
} fl_trial;
/* Confidence limits of a proportion. Wilson, E. B., J. Am. Stat. Assoc. 22 (1927) 209-212. n >= 1. */
void fl_trend_wilson(size_t in, size_t n, double confidence, double *low, double *high);
/* Reliability R(t) = exp(-rate t), the rate by maximum likelihood over trials of any length; 0 where none failed.
 * FL_E_NUMERIC where all failed or there is none. */
fl_status fl_trend_failure_rate(const fl_trial *trials, size_t n, double *per_year, fl_error *err) FL_MUST_USE;
fl_status fl_trend_reliability(const fl_trial *trials, size_t n, const fl_interval_policy *policy, fl_arena *arena,
                               fl_proposal *out, fl_error *err) FL_MUST_USE;
/* The trials that an instrument's records give, appended; as-found verdicts "pass" and "conditional pass" are in
 * tolerance. */
fl_status fl_trend_trials(const fl_record *records, size_t count, fl_arena *arena, fl_trial **trials, size_t *n,
                          size_t *capacity, fl_error *err) FL_MUST_USE;

/* ---- look-back -------------------------------------------------------------------------------------------------- */

/* One day of the time in question: what the controller held, and what the engine got. */
typedef struct fl_lookback_day {
	fl_day day;
	double error_at_set_point; /* fraction of span */
	double true_value;         /* dial units, for a fuel of the dial's density */
} fl_lookback_day;
enum { FL_LOOKBACK_DAYS = 5 };

typedef struct fl_lookback {
	bool needed;             /* the as-found was out of tolerance somewhere */
	bool determined;         /* false: `sentence` says why there is no date */
	int point;               /* the point that decides: the first to leave */
	fl_day from, to;         /* the session before, and this one: nothing is known better than between these without a
	                            steady drift */
	fl_day crossed;          /* by the values themselves */
	fl_day earliest, latest; /* by the values with their uncertainties against and for; FL_NO_DAY for latest: the
	                            crossing itself is not certain */
	bool before_from;        /* the limit may have been passed at `from` already */
	bool has_set_point;
	double set_point;
	fl_lookback_day days[FL_LOOKBACK_DAYS]; /* from, earliest, crossed, latest (or to), to */
	const char *sentence;
} fl_lookback;
/* From the record before (its as-left) and the record whose as-found failed; borrowed texts, sentences in the arena. */
fl_status fl_trend_lookback(const fl_record *before, const fl_record *record, fl_arena *arena, fl_lookback *out,
                            fl_error *err) FL_MUST_USE;

/* ---- the oils: is a lot what its certificate says? --------------------------------------------------------------- */

/* One reading of a lot: its point in a run against the straight line through the other oils of that run. Zero and span,
 * and with them the drift of the instrument, are in the line; what is left is the oil, the shape of the scale, scatter.
 */
typedef struct fl_lot_look {
	const char *lot, *oil;
	const char *unit;   /* "VT-1 FL-0417": tag and serial number */
	const char *number; /* of the record */
	size_t run;         /* looks of one run have the same */
	fl_day day;
	double residual, u;    /* fractions of span; standard uncertainty, that of the line included */
	double others_per_rel; /* the same of the certificates of the other oils, through the line */
	double span_per_rel;   /* how much of span a relative error of the viscosity is, at this place */
} fl_lot_look;
typedef struct fl_lot_looks {
	fl_arena arena;
	fl_lot_look *looks;
	size_t count, capacity, runs;
} fl_lot_looks;
/* Adds the looks that a record gives: nothing where a run has fewer than three oils. */
fl_status fl_trend_look(fl_lot_looks *looks, const fl_record *record, fl_error *err) FL_MUST_USE;
void fl_lot_looks_free(fl_lot_looks *looks);

typedef enum fl_lot_state {
	FL_LOT_TOO_FEW,   /* fewer than three looks, or one unit only: oil and instrument cannot be told apart */
	FL_LOT_SOUND,     /* agrees with its certificate */
	FL_LOT_UNIT,      /* the units disagree about it: one of them, not the oil */
	FL_LOT_SHAPE,     /* other lots of this oil show the same: the shape of the scale, not this lot */
	FL_LOT_UNDECIDED, /* off, but another lot of the same runs explains the readings as well */
	FL_LOT_OTHER,     /* off only because another lot of the same runs is */
	FL_LOT_SUSPECT    /* off on all units alike: the oil is not what its certificate says */
} fl_lot_state;
typedef struct fl_lot_health {
	fl_lot_state state;
	size_t looks, units;
	double mean, u_mean; /* of the residuals, fractions of span; widened where the units scatter more than they say */
	double rel, u_rel;  /* the same as a relative error of the viscosity, the certificate's uncertainty included in u */
	double chi_squared; /* of the units' means about it */
	int dof;
	const char *other; /* unit or lot that it names; "" if none */
	const char *sentence;
} fl_lot_health;
/* `u_certificate`: relative standard uncertainty of the lot's viscosity; NAN where not known: 0.25 % is taken. Texts in
 * `arena`. FL_E_NOT_FOUND where no look is of this lot. */
fl_status fl_trend_lot_health(const fl_lot_looks *looks, const char *lot, double u_certificate, fl_arena *arena,
                              fl_lot_health *out, fl_error *err) FL_MUST_USE;

#endif
