/* foundleft/cause.h - why the instrument is off: what its readings single out, what they cannot tell apart and the one
 * extra measurement that would, and what they do not explain at all.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Pure: no clock, no file. Everything here is opinion and interpretation, never part of the calibration result.
 * Effects are fractions of the output span ("_span"), positive where the instrument shows too much. Each fault is a
 * number in the unit of its row below; its signature is what that number does to every reading, found by running the
 * physics of the instrument again with the fault in it.
 *
 * The way: faults with bounds and Gaussian priors are fitted to the mean errors of every (point, pass) with the full
 * covariance of the budgets; columns that the readings cannot separate become one cause group.
 */
#ifndef FOUNDLEFT_CAUSE_H
#define FOUNDLEFT_CAUSE_H

#include "foundleft/analysis.h"
#include "foundleft/base.h"
#include "foundleft/journal.h"
#include "foundleft/procedure.h"
#include "foundleft/stock.h"

/* Fault, stable word, name for people, unit of its amount, prior standard deviation, smallest amount, whether it sits
 * in the flow part (pump, capillary), whether a healthy instrument has it too. The priors say what a workshop meets;
 * common practice, no source. Amounts are inside units: fractions, m, K. */
#define FL_FAULT_LIST(X)                                                                                               \
	X(FL_FAULT_ZERO, "transmitter-zero", "transmitter zero", FL_U_PERCENT_SPAN, 0.02, -INFINITY, false, false)         \
	X(FL_FAULT_COLUMN, "liquid-column", "liquid column in one leg", FL_U_M, 0.1, -INFINITY, false, false)              \
	X(FL_FAULT_LINE, "line-pressure", "line pressure effect, per 10 bar", FL_U_PERCENT_SPAN, 0.002, -INFINITY, false,  \
	  false)                                                                                                           \
	X(FL_FAULT_SPAN, "transmitter-span", "transmitter span", FL_U_PERCENT, 0.03, -INFINITY, false, false)              \
	X(FL_FAULT_DEPOSIT, "deposit", "uniform deposit in the capillary, loss of bore", FL_U_PERCENT, 0.02, 0.0, true,    \
	  false)                                                                                                           \
	X(FL_FAULT_SLIP, "pump-slip", "pump slip, beyond that of a sound pump", FL_U_PERCENT, 0.05, 0.0, true, false)      \
	X(FL_FAULT_SPEED, "pump-speed", "pump speed", FL_U_PERCENT, 0.01, -INFINITY, false, false)                         \
	X(FL_FAULT_DENSITY, "dial-density", "dial density against the one stated", FL_U_PERCENT, 0.05, -INFINITY, false,   \
	  false)                                                                                                           \
	X(FL_FAULT_TEMPERATURE, "oil-temperature", "oil warmer than the thermometer says", FL_U_KELVIN, 0.3, -INFINITY,    \
	  false, false)                                                                                                    \
	X(FL_FAULT_AIR, "air", "air at the pump's suction, flow lost", FL_U_PERCENT, 0.1, 0.0, true, false)                \
	X(FL_FAULT_PARTICLE, "particle", "hard particle in the bore (length at half bore)", FL_U_MM, 2e-3, 0.0, true,      \
	  false)                                                                                                           \
	X(FL_FAULT_CURVATURE, "curvature", "curvature of the transmitter, at mid-scale", FL_U_PERCENT_SPAN, 0.01,          \
	  -INFINITY, false, false)                                                                                         \
	X(FL_FAULT_KINETIC, "kinetic-term", "kinetic term against the usual one", FL_U_PERCENT, 0.1, -INFINITY, false,     \
	  true)                                                                                                            \
	X(FL_FAULT_COUPLING, "coupling", "coupling lets go above its torque, loss at the thickest oil", FL_U_PERCENT_SPAN, \
	  0.15, 0.0, true, false)                                                                                          \
	X(FL_FAULT_LIMIT, "output-limit", "output that cannot rise further (supply, burden), loss at the thickest oil",    \
	  FL_U_PERCENT_SPAN, 0.15, 0.0, false, false)                                                                      \
	X(FL_FAULT_LAG, "lag", "reading not settled, share of the step still missing", FL_U_PERCENT, 0.02, 0.0, false,     \
	  false)                                                                                                           \
	X(FL_FAULT_CARRY_OVER, "carry-over", "carry-over, share of the oil before left in the rig", FL_U_PERCENT, 0.02,    \
	  0.0, false, false)

typedef enum fl_fault {
#define FL_FAULT_ENUM(name, word, text, unit, prior, least, flow, healthy) name,
	FL_FAULT_LIST(FL_FAULT_ENUM)
#undef FL_FAULT_ENUM
	    FL_FAULT_COUNT
} fl_fault;

typedef struct fl_fault_kind {
	const char *word; /* "deposit": stable, for machines */
	const char *name; /* for people */
	fl_unit unit;     /* its amount is shown in */
	double prior;     /* standard deviation of the amount before anything was read */
	double least;     /* 0 where it can only be positive, -INFINITY else */
	bool flow_part;   /* to be cleaned or repaired, never spanned out */
	bool healthy;     /* a property that sound instruments have too: fitted, never named */
} fl_fault_kind;
const fl_fault_kind *fl_cause_fault(fl_fault fault);

/* What one fault does: e(amount) - e(0) with one oil at temp_c running, or at the stopped zero (oil NULL). LAG and
 * CARRY_OVER need `before`, the oil before this one (NULL: the stopped zero), the others ignore it. Line pressure is
 * taken as 10 bar. COUPLING and LIMIT act on this oil as the thickest.
 * Hagen-Poiseuille with end and kinetic corrections run again; without geometry in stock only its proportions. */
fl_status fl_cause_signature(const fl_instrument *instrument, const fl_oil *oil, const fl_oil *before, double temp_c,
                             fl_fault fault, double amount, double *effect_span, fl_error *err) FL_MUST_USE;

/* ---- the extra measurements that split a group ------------------------------------------------------------------ */

/* A differential pressure injected into the transmitter alone, and its output. */
typedef struct fl_cause_injection {
	double dp_pa;
	double output; /* in the signal's unit */
} fl_cause_injection;

/* What was measured besides the readings. NAN (count 0) where it was not. u: standard uncertainties. */
typedef struct fl_cause_extra {
	const fl_cause_injection *injections;
	size_t injection_count;
	double injection_u_span; /* NAN: 0.05 % of span */
	double pump_speed_rev_s, u_pump_speed_rev_s;
	double flow_m3_s, u_flow_m3_s;               /* timed volume through the capillary */
	double dial_density_kg_m3, u_dial_density;   /* confirmed from drawing or maker's papers */
	double temp_difference_k, u_temp_difference; /* second thermometer in the oil minus the one in use */
	double gain_since_cleaning;                  /* sum of span corrections since the capillary was cleaned, fraction */
} fl_cause_extra;
void fl_cause_extra_begin(fl_cause_extra *extra); /* nothing measured */
/* Takes what the session holds as extra measurements of that run's state (of dial density and of what was spanned out
 * those of either state), corrected and with the uncertainty of the equipment that was named. Without: 0.05 % of span
 * for an injection, 0.5 % for speed and volume, 1 kg/m³, 0.05 K; common practice, no source. The last one counts, of
 * injections each. `arena` holds them. Leaves fields that are set already. FL_E_MEMORY. */
fl_status fl_cause_extra_measured(const fl_session *session, const fl_instrument *instrument, const fl_stock *stock,
                                  fl_run_kind run, fl_arena *arena, fl_cause_extra *extra, fl_error *err) FL_MUST_USE;
/* Takes what the session recorded as conditions: "pump-speed" (u from the tachometer in use, else 0.5 %), and from
 * "supply-frequency" the speed, where no pump speed was recorded (u 0.5 %). Leaves fields that are set already. */
void fl_cause_extra_from_session(const fl_session *session, const fl_instrument *instrument, const fl_stock *stock,
                                 fl_cause_extra *extra);

/* ---- what was found --------------------------------------------------------------------------------------------- */

/* How strongly the readings speak: the square root of the rise of chi-squared without it, from 3, 5, 10 on. */
typedef enum fl_strength { FL_STRENGTH_NONE, FL_STRENGTH_HINT, FL_STRENGTH_LIKELY, FL_STRENGTH_CLEAR } fl_strength;
const char *fl_cause_strength_word(fl_strength strength); /* "", "a hint", "likely", "clear" */

/* Kind of a finding and its stable word. They are reported in this order. */
#define FL_FINDING_LIST(X)                                                                                           \
	X(FL_FINDING_SATURATED, "saturated", "points left out because the output stood at the end of its range")         \
	X(FL_FINDING_MIX_UP, "mix-up", "readings that fit when one thing is taken to be mixed up: decide with a reason") \
	X(FL_FINDING_SUPPLY, "supply", "the ratio of 5/6 or 6/5: the wrong supply frequency")                            \
	X(FL_FINDING_TWO_ZEROS, "two-zeros", "stopped against running zero")                                             \
	X(FL_FINDING_CAUSE, "cause", "one cause that the readings single out")                                           \
	X(FL_FINDING_GROUP, "cause-group", "causes that the readings cannot tell apart")                                 \
	X(FL_FINDING_UNEXPLAINED, "unexplained", "none of the known faults explains the errors")                         \
	X(FL_FINDING_NO_CAUSE, "no-cause", "nothing that asks for a cause")                                              \
	X(FL_FINDING_CARRY_OVER, "carry-over", "the share of the oil before that explains the apparent hysteresis")      \
	X(FL_FINDING_SCATTER, "scatter", "readings scatter while the pump runs")                                         \
	X(FL_FINDING_STOP, "stop-adjustment", "no adjustment before the finding is cleared up")                          \
	X(FL_FINDING_REPAIR_FIRST, "repair-first", "clean or repair before any adjustment")                              \
	X(FL_FINDING_TRIM, "trim", "what zero and span adjustment would leave")                                          \
	X(FL_FINDING_TRIM_FAILS, "trim-fails", "zero and span adjustment can't bring this in")                           \
	X(FL_FINDING_NEXT_POINT, "next-point", "the oil and temperature that would tell most")

typedef enum fl_finding_kind {
#define FL_FINDING_ENUM(name, word, meaning) name,
	FL_FINDING_LIST(FL_FINDING_ENUM)
#undef FL_FINDING_ENUM
	    FL_FINDING_KINDS
} fl_finding_kind;
const char *fl_cause_finding_word(fl_finding_kind kind);

typedef struct fl_cause_number {
	const char *name; /* "loss of bore" */
	double value, u;  /* in `unit`; u NAN where there is none */
	fl_unit unit;
} fl_cause_number;

typedef struct fl_finding {
	fl_finding_kind kind;
	const char *id;       /* stable within one result: "cause-group:transmitter-span+deposit", "mix-up:bottles:2+4" */
	const char *sentence; /* for people */
	const char *advice;   /* what to do; "" for none */
	const char *reason;   /* why, with the numbers; "" for none */
	fl_strength strength;
	double z;             /* see fl_strength; NAN where the finding has none */
	bool asks;            /* a mix-up: to be answered with a reason before anything is decided */
	const char *answered; /* "yes" (it is so), "no" (the readings stand), "" where no answer stands in the session */
	const fl_cause_number *numbers;
	size_t number_count;
} fl_finding;

/* ---- the working, for who wants to see it ------------------------------------------------------------------------ */

/* One row of the fit: a (point, pass), then the extra measurements. */
typedef struct fl_cause_row {
	const char *name; /* "LK-50 rising", "injected 156.6 mbar", "pump speed" */
	bool extra;
	int point;
	fl_pass pass;
	double x;                         /* ideal position; NAN for speed, flow, density, temperature */
	double value;                     /* the error read, or the relative deviation measured */
	double healthy;                   /* what a healthy instrument has there: its kinetic term */
	double u;                         /* standard uncertainty, square root of the covariance's diagonal */
	double explained;                 /* by the fit, healthy part included */
	double signature[FL_FAULT_COUNT]; /* change of value by each fault's prior standard deviation, at the estimate */
} fl_cause_row;

typedef struct fl_cause_estimate {
	fl_fault fault;
	bool fitted;      /* false: this session's readings hold nothing of it */
	bool at_bound;    /* its bound holds it */
	double amount, u; /* posterior; inside unit of the fault */
	int group;        /* index of its group; -1 if not fitted */
} fl_cause_estimate;

/* One fault of a group, as if it alone did all that the group does. */
typedef struct fl_cause_member {
	fl_fault fault;
	double alone;   /* amount that gives the group's largest effect; NAN where none does */
	double penalty; /* rise of chi-squared, its prior included, against the member that fits best */
	bool possible;  /* penalty at most 9 */
} fl_cause_member;

/* The measurements that split a group, cheapest first; the papers come last because they prove least. */
typedef enum fl_split {
	FL_SPLIT_INJECT,      /* pressure injected into the transmitter alone */
	FL_SPLIT_SPEED,       /* revolutions counted at the pump shaft */
	FL_SPLIT_VOLUME,      /* a timed volume */
	FL_SPLIT_FLUSH,       /* a second flush, then a longer wait */
	FL_SPLIT_THERMOMETER, /* a second thermometer in the oil */
	FL_SPLIT_PAPERS,      /* dial density read from plate and maker's papers */
	FL_SPLIT_COUNT
} fl_split;
const char *fl_cause_split_words(fl_split split); /* "inject a differential pressure ..." */

typedef struct fl_cause_group {
	fl_cause_member members[FL_FAULT_COUNT];
	size_t member_count, possible_count;
	double effect_span; /* where it is largest */
	double u_effect_span;
	int largest_row; /* there */
	double z;        /* square root of the rise of chi-squared without the group */
	bool several;    /* no member alone does nearly as well as all together (chi-squared 9 more at best) */
	bool material;   /* larger than U there and than a quarter of the tolerance */
	fl_split splits[FL_SPLIT_COUNT]; /* cheapest first; only those not made yet that do split it */
	size_t split_count;
} fl_cause_group;

/* One position that a trim leaves. */
typedef struct fl_trim_point {
	int point;
	fl_pass pass;
	double before_span, after_span;
} fl_trim_point;

typedef struct fl_trim {
	bool available;
	double zero_span, gain;       /* output = (1 + gain) ideal + zero: what the trim takes out */
	bool zero_asked;              /* the stopped zero asks for the zero screw */
	double dp_low_pa, dp_high_pa; /* differential pressures for lower and upper range value; NAN if dp_full unknown */
	double largest_after_span;
	size_t largest_after;    /* index in points */
	double ideal_after_span; /* with zero and span both free, minimax: no adjustment does better */
	bool brings_in;          /* by the decision rule */
	fl_trim_point *points;
	size_t point_count;
} fl_trim;

typedef struct fl_next_point {
	bool available;
	const char *oil, *lot;
	double temp_c, x;
	double u_before, u_after;         /* of the largest group's effect at its largest row, fraction of span */
	double split_before, split_after; /* of the difference between its two likeliest members, as effect */
	bool splits;                      /* the new point would tell them apart (halves that) */
} fl_next_point;

typedef struct fl_cause {
	fl_arena arena;
	fl_run_kind run;
	bool available; /* false: no reading to explain; see unavailable_reason */
	const char *unavailable_reason;
	const char *statement; /* "Opinion and interpretation, not part of the calibration result ..." */
	fl_finding *findings;
	size_t finding_count, finding_capacity;
	bool withheld; /* a mix-up stands open or is answered with yes: no cause is named */
	bool stop;     /* no adjustment now */
	fl_cause_row *rows;
	size_t row_count;
	fl_cause_estimate estimates[FL_FAULT_COUNT];
	fl_cause_group *groups;
	size_t group_count;
	double chi_squared, dof, p; /* of the residuals; p NAN where nothing is left over */
	bool explained;             /* p >= 0.01 */
	double condition;           /* of the whitened columns, with their priors as units */
	double stopped_zero_span, running_zero_span, healthy_offset_span; /* NAN where not read */
	double carry_over, u_carry_over;                                  /* fraction; NAN where there is no falling pass */
	double scatter_ratio;                                             /* running against expected scatter */
	fl_trim trim;
	fl_next_point next;
} fl_cause;

/* The whole search, over one run of a session. `extra` may be NULL; what the session holds is taken besides. `stock` is
 * the session's (fl_session_stock); `shelf` the oils to choose the next point from, NULL for the same. */
fl_status fl_cause_find(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                        const fl_result *result, fl_run_kind run, const fl_cause_extra *extra, const fl_stock *shelf,
                        fl_cause *out, fl_error *err) FL_MUST_USE;
/* What the opinion proposes to decide, and why; everything is borrowed from `cause`. */
typedef struct fl_course {
	fl_decision decision;      /* FL_DECISION_NONE: something is to be found out, or answered, first */
	const fl_finding *because; /* NULL where it rests on the adjust limit alone */
	const char *reason;        /* a sentence */
	bool rules_out_adjusting;  /* an adjustment now would hide a fault that is none of its own */
} fl_course;
/* `run` is the run of the search. False where there is nothing to propose from. */
bool fl_cause_course(const fl_cause *cause, const fl_run_result *run, fl_course *out);
void fl_cause_free(fl_cause *cause);
const fl_finding *fl_cause_finding(const fl_cause *cause, fl_finding_kind kind); /* the first; NULL if none */

#endif
