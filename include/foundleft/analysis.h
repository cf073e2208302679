/* foundleft/analysis.h - session + procedure + stock -> result: errors, lines, hysteresis, uncertainty, decision.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Pure: no clock, no file. Errors and uncertainties are fractions of the output span ("_span": 0.01 is 1 % of span);
 * x is the ideal position on the scale as a fraction of span. Printing in percent is for the edges.
 */
#ifndef FOUNDLEFT_ANALYSIS_H
#define FOUNDLEFT_ANALYSIS_H

#include "foundleft/base.h"
#include "foundleft/journal.h"
#include "foundleft/numeric.h"
#include "foundleft/physics.h"
#include "foundleft/procedure.h"
#include "foundleft/reference.h"
#include "foundleft/stock.h"

typedef enum fl_verdict {
	FL_VERDICT_NONE, /* no rule agreed, or withheld: see the reason */
	FL_VERDICT_PASS,
	FL_VERDICT_CONDITIONAL_PASS,
	FL_VERDICT_CONDITIONAL_FAIL,
	FL_VERDICT_FAIL
} fl_verdict;
/* "pass", "conditional pass", "conditional fail", "fail"; "" for FL_VERDICT_NONE. */
const char *fl_verdict_word(fl_verdict verdict);
/* Compares |error| with the tolerance by the rule. `expanded` is U; all in one unit. Limits are inclusive, judged on
 * unrounded numbers: 2^-40 of the tolerance (9e-13 of it) is allowed for the rounding of binary arithmetic, so that a
 * decimal input that lies exactly on the limit passes. NaN, or no rule, gives FL_VERDICT_NONE.
 * ILAC-G8:09/2019, 4.2.1 to 4.2.3, w = U; by the guarded rule everything beyond T - U is a fail. */
fl_verdict fl_analysis_decide(fl_rule rule, double error, double expanded, double tolerance);

/* One line of an uncertainty budget. */
typedef struct fl_budget_line {
	const char *name;   /* "thermometer certificate" */
	const char *stated; /* "0.03 K, k = 2" */
	fl_distribution distribution;
	double u;                 /* standard uncertainty in `unit` */
	const char *unit;         /* "K", "%", "kg/m³", "mA" */
	double sensitivity;       /* % of span per `unit` */
	double contribution_span; /* |sensitivity| u, fraction of span */
	double dof;
} fl_budget_line;

/* Readings of one point in one direction, or in both. */
typedef struct fl_point_result {
	int point; /* FL_POINT_ZERO for the stopped zero */
	bool both; /* rising and falling together; `pass` is then meaningless */
	fl_pass pass;
	const char *oil, *lot; /* "" for zero and pressure */
	size_t n;              /* readings used */
	double temp_c;         /* mean of the corrected temperatures; NAN without */
	double certified_m2_s; /* viscosity of the oil at temp_c, from its certificate; NAN without */
	double rho_kg_m3, mu_pa_s;
	double applied_pa;
	double equivalent_m2_s;      /* mean */
	double dial;                 /* mean ideal in dial units */
	double x;                    /* mean */
	double ideal_output, output; /* mean, in the signal's unit */
	double error_span, error_dial, error_reading;
	double s_span;     /* standard deviation of the errors, n - 1, same direction */
	double range_span; /* of the cycle means, or of the readings: see repeatability_of_cycles; NAN */
	const fl_budget_line *budget;
	size_t budget_count;
	fl_budget_sum sum;     /* uc, dof, k, U: fractions of span; U never below the reference's own */
	bool floored;          /* U was raised to the reference's own */
	double tolerance_span; /* half width here; NAN without a tolerance */
	double tur;            /* tolerance / U; NAN without */
	fl_verdict verdict;
	fl_flow flow; /* capillary check at this point, if the geometry is known */
	bool has_flow;
	double kinetic_span; /* kinetic term of the flow as a fraction of span; NAN without flow or full-scale pressure */
} fl_point_result;

/* What one run gives. NAN and false where not determined; the sentence stands in `not_determined`. */
typedef struct fl_run_result {
	fl_run_kind kind;
	bool available; /* false: missing, or as-left not taken */
	const char *unavailable_reason;
	bool same_as_found; /* left alone: as-left = as-found, this is a view of the as-found run */
	fl_reading_result *readings;
	size_t reading_count;
	fl_point_result *points; /* per direction: zero first, then rising order of points, rising before falling */
	size_t point_count;
	fl_point_result *combined; /* both directions together, zero first */
	size_t combined_count;
	double stopped_zero_span;               /* mean of the stopped zero */
	double stopped_zero_u_span;             /* U of it */
	double running_zero_span;               /* intercept of the least-squares line through the running points */
	double running_zero_u_span;             /* standard uncertainty from the residuals */
	double error_high_span, error_low_span; /* highest and lowest error of a single reading (inaccuracy) */
	const fl_point_result *largest_error;   /* largest |error| among the points per direction; NULL if none */
	/* e = zero + span x through the combined points, the stopped zero included. A combined point stands at the x of
	 * its rising pass (of the falling one where there is no other): the two passes differ by hundredths of a kelvin. */
	fl_line line;
	bool has_line;
	double zero_error_span, span_error_span;             /* of that line */
	double span_between_ends_span;                       /* e(top) - e(zero), as read */
	fl_reference_line independent, terminal, zero_based; /* max_abs is the linearity, fraction of span */
	bool has_linearity;
	double hysteresis_span; /* largest |falling - rising|; NAN if not determined */
	int hysteresis_point;
	double *hysteresis;           /* [combined_count] falling minus rising, signed; NAN where not both */
	double hysteresis_cycle_span; /* largest within a single cycle (ANSI/ISA-51.1 states this one); NAN */
	double repeatability_span;    /* largest range of same-direction values over consecutive traverses; NAN */
	bool repeatability_of_cycles; /* the range is of cycle means (two cycles or more); else of single readings */
	double repeatability_s_span;  /* largest s */
	int repeatability_point;
	fl_pass repeatability_pass;
	fl_verdict verdict;           /* of the worst point */
	const fl_point_result *worst; /* decides the verdict; largest |error| + U against its tolerance */
	const char *verdict_reason;   /* names the point, the number, the rule; or why there is no verdict word */
	bool hysteresis_exceeded, linearity_exceeded; /* against the procedure's or instrument's limit */
	bool inside_adjust_limit;
	const char **not_determined; /* sentences */
	size_t not_determined_count;
	size_t struck_count;
} fl_run_result;

typedef struct fl_result {
	fl_arena arena;
	fl_run_result runs[FL_RUN_KINDS];
	fl_rule rule;
	fl_band tolerance;
	bool tolerance_from_instrument;
	double hysteresis_limit_span, linearity_limit_span; /* NAN if none */
	fl_linearity deciding_linearity;
	double coverage_probability;
	bool traceable;             /* false: something expired, overdue or missing was used */
	const char **not_traceable; /* sentences */
	size_t not_traceable_count;
	const char **warnings; /* capillary outside its limits, oil outside its certified span, low TUR ... */
	size_t warning_count;
	double dp_full_pa; /* full-scale differential pressure used; NAN if unknown */
} fl_result;

/* The whole computation. `stock` holds the items that the session names (fl_session_stock). */
fl_status fl_analysis_session(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                              fl_result *out, fl_error *err) FL_MUST_USE;
void fl_result_free(fl_result *result);

#endif
