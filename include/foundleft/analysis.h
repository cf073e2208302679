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

/* What a deviation acts on. */
typedef enum fl_effect_on {
	FL_ON_ERROR,             /* the error itself, by its sensitivity */
	FL_ON_OUTPUT,            /* the output as read */
	FL_ON_PRESSURE,          /* the injected pressure */
	FL_ON_TEMPERATURE,       /* the oil's temperature */
	FL_ON_VISCOSITY,         /* the oil's viscosity, in % of it */
	FL_ON_CERTIFIED_NU,      /* the certified viscosities of the oil, all at once */
	FL_ON_CERTIFIED_DENSITY, /* its certified densities, all at once */
	FL_ON_READINGS           /* each reading by itself */
} fl_effect_on;

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
	double share; /* of the combined variance, 0 to 1 */
	fl_effect_on on;
	double inside;      /* one `unit` in the inside unit of its quantity; 1 where it has none */
	const char *key;    /* deviations with the same key are one deviation: they do not average out over the points */
	double shared;      /* correlation of deviations with the same key at different points, 0 to 1 */
	const char *source; /* document: "certificate CAL-7 of TH-7, issued by ..." */
	const char *rule;   /* how u follows from what is stated: "a / √3, JCGM 100 4.3.7" */
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
	const fl_zone *zone;   /* the zone whose tolerance holds here; NULL: that of the rest of the scale */
	double tur;            /* tolerance / U; NAN without */
	double risk;           /* specific risk: probability that the true error is beyond the tolerance. JCGM 106 7; NAN */
	double acceptance_span; /* what passes: the tolerance, or less the guard band; NAN */
	fl_global_risk global;  /* of all such instruments measured like this; has_global: the procedure states the prior */
	bool has_global;
	double prior_u_span; /* standard deviation of the prior about zero */
	fl_verdict verdict;
	fl_flow flow; /* capillary check at this point, if the geometry is known */
	bool has_flow;
	double kinetic_span; /* kinetic term of the flow as a fraction of span; NAN without flow or full-scale pressure */
} fl_point_result;

/* The readings of one direction by themselves: their line, and whether a line is enough. */
typedef struct fl_pass_line {
	bool has;            /* three places or more */
	fl_line line;        /* through the means of this direction */
	bool has_lack;       /* repeated readings */
	fl_lack_of_fit lack; /* of the line through the readings, against their scatter at each place */
} fl_pass_line;

/* Beside the ordinary line: generalized distance regression of the output on the ideal output, both uncertain, with
 * the covariance that the points get from what they share. ISO/TS 28037:2010 clause 10. */
typedef struct fl_general_line {
	bool has;
	const char *why;    /* why it is there, or is not */
	double ratio;       /* largest over smallest standard uncertainty of the points in the line; NAN */
	fl_line line;       /* of the error: intercept and slope as in the ordinary one; sum_sq is chi-squared */
	double probability; /* of a chi-squared at least this large */
} fl_general_line;

/* The ordinary line at a place of the scale. */
typedef struct fl_line_place {
	const char *name; /* "LK-10", "set point" */
	fl_bands bands;   /* by the scatter about the line; fractions of span */
	double x;
	double u_shared; /* standard uncertainty of the line there from the budgets, what the points share included */
} fl_line_place;

/* What the true value is when the dial shows so much. */
typedef struct fl_true_value {
	const char *name;    /* "set point", "alarm low", "alarm high" */
	double shown, value; /* dial units */
	double u, U;         /* dial units */
	double coverage_factor, dof;
	double low, high; /* the interval, dial units */
	double g;         /* Fieller's g */
	bool fieller;     /* low and high are Fieller's: the slope is poor */
	bool bounded;     /* false: the readings do not determine it */
	bool outside;     /* beyond the tested points: a line drawn further than the readings reach */
} fl_true_value;

enum { FL_TRUE_VALUES = 3 };

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
	double zero_error_span, span_error_span; /* of that line */
	double *covariance;  /* [combined_count squared] of the combined errors, fraction of span squared */
	fl_line line_shared; /* that line with its covariance from the points' own, what they share included; s is 0 */
	fl_general_line general;
	fl_pass_line passes[2]; /* by fl_pass */
	fl_line_place *places;
	size_t place_count;
	fl_true_value true_values[FL_TRUE_VALUES];
	size_t true_value_count;
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
	const fl_zone *zones; /* where the tolerance is another one */
	int zone_count;
	bool tolerance_from_instrument;
	double minimum_tur;
	const char *below_tur; /* a verdict is given although the ratio is below it: the sentence for the certificate */
	double reliability;    /* prior of the global risk; 0: not stated */
	bool reliability_observed;
	const char *prior_words;                            /* the prior in a sentence; NULL without */
	const char *correlation_words;                      /* what the points share, in a sentence; NULL where nothing */
	double hysteresis_limit_span, linearity_limit_span; /* NAN if none */
	fl_linearity deciding_linearity;
	double coverage_probability;
	fl_function_result *functions; /* the procedure's function checks, in its order */
	size_t function_count;
	fl_run_kind functions_after; /* the run whose line gives their true viscosities */
	bool traceable;              /* false: something expired, overdue or missing was used */
	const char **not_traceable;  /* sentences */
	size_t not_traceable_count;
	const char **warnings; /* capillary outside its limits, oil outside its certified span, low TUR ... */
	size_t warning_count;
	double dp_full_pa; /* full-scale differential pressure used; NAN if unknown */
} fl_result;

/* The whole computation. `stock` holds the items that the session names (fl_session_stock). */
fl_status fl_analysis_session(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                              fl_result *out, fl_error *err) FL_MUST_USE;
void fl_result_free(fl_result *result);
/* The tolerance at x, half width as a fraction of span, zones included; NAN where it says nothing. */
double fl_analysis_tolerance_at(const fl_result *result, const fl_scale *scale, double x);

/* ---- trials: the whole model again and again, JCGM 101 ---- */

/* One number of a run by trials, beside what JCGM 100 says of it. Fractions of span. */
typedef struct fl_tried {
	const char *name;             /* of a figure of the run; NULL for a point */
	const fl_point_result *point; /* NULL for a figure */
	fl_propagated by_trials;
	double value, u, expanded; /* as computed without trials; u and expanded NAN where there is none */
	int digits;                /* of u to which the two agree: 2, 1 or 0; -1 where there is nothing to compare */
	fl_validation validation;  /* at two digits */
} fl_tried;

typedef struct fl_run_trials {
	bool has;
	fl_trials trials;
	fl_tried *points; /* per direction, then both directions together */
	size_t point_count;
	fl_tried *figures; /* zero and span error, linearities, hysteresis */
	size_t figure_count;
	const char *words;        /* whether JCGM 100 holds, in a sentence */
	const char *normal_words; /* where few readings were drawn from a normal distribution; NULL */
} fl_run_trials;

/* Draws every reading and every deviation of the budgets and computes the run again: viscosity by D341 from drawn
 * certificates at drawn temperatures, lines and hysteresis anew. `result` is that of the same session. The outcome
 * depends on plan->seed and the number of trials, not on plan->threads. All memory is the arena's.
 * FL_WARNING where the digits asked for did not become stable; FL_E_STATE where the progress function stopped it. */
fl_status fl_analysis_trials(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                             const fl_result *result, fl_run_kind kind, const fl_plan *plan, fl_arena *arena,
                             fl_run_trials *out, fl_error *err) FL_MUST_USE;

/* ---- one point explained ---- */

/* Something that a number is made of. */
typedef struct fl_explained_input {
	const char *name;
	double value;
	const char *unit;
	double sensitivity; /* d number / d input; NAN where it is not asked for */
	const char *source; /* NULL where it is a number explained before */
} fl_explained_input;

/* A number with everything that it follows from. */
typedef struct fl_explained {
	const char *name;
	double value;
	const char *unit;
	const char *formula;
	const char *source; /* document and clause */
	const fl_explained_input *inputs;
	size_t input_count;
	const char *words; /* instead of a value: a verdict; NULL */
} fl_explained;

typedef struct fl_explanation {
	const fl_point_result *point;
	fl_run_kind run;
	const fl_explained *numbers; /* in the order of the computation; the budget stands in `point` */
	size_t count;
} fl_explanation;

/* Every number of a point of a run, `point` being one of result->runs[kind]. All memory is the arena's. */
fl_status fl_analysis_explain(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                              const fl_result *result, fl_run_kind kind, const fl_point_result *point, fl_arena *arena,
                              fl_explanation *out, fl_error *err) FL_MUST_USE;

/* An expanded uncertainty as stated: two significant digits, half to even unless that takes away more than 5 % of it,
 * then up (JCGM 100:2008 7.2.6, ILAC-P14:09/2020 5.3). `decimals` is the place of the last digit, negative for tens.
 * `value` is 0 and `decimals` 0 where u is not a positive number. */
typedef struct fl_rounded_u {
	double value;
	int decimals;
} fl_rounded_u;
fl_rounded_u fl_analysis_round_u(double u);

#endif
