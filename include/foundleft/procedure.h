/* foundleft/procedure.h - a procedure: what is done, at which points, how often, within which band, by which rule.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Procedures are templates: YAML files that people edit (templates/, or a bench's own). Everything in an fl_procedure
 * is borrowed from its arena. Values are in the unit that the field name says.
 */
#ifndef FOUNDLEFT_PROCEDURE_H
#define FOUNDLEFT_PROCEDURE_H

#include "foundleft/base.h"

struct fl_node; /* foundleft/document.h */

/* Bounds that a template may not pass. */
enum { FL_MOST_POINTS = 50, FL_MOST_CYCLES = 20 };

typedef enum fl_medium {
	FL_MEDIUM_OIL,     /* reference oils flow through the capillary */
	FL_MEDIUM_PRESSURE /* a differential pressure from a pressure standard is injected into the transmitter alone */
} fl_medium;

/* How a result is compared with its tolerance (ILAC-G8:09/2019). */
typedef enum fl_rule {
	FL_RULE_NONE,       /* no rule agreed: no verdict word anywhere */
	FL_RULE_SIMPLE,     /* simple acceptance: |e| <= T */
	FL_RULE_GUARDED,    /* guard band w = U: |e| <= T - U */
	FL_RULE_FOUR_STATES /* pass, conditional pass, conditional fail, fail with w = U */
} fl_rule;

typedef enum fl_band_basis {
	FL_BAND_NONE,
	FL_BAND_PERCENT_SPAN,
	FL_BAND_PERCENT_READING,
	FL_BAND_DIAL_UNITS
} fl_band_basis;

/* A symmetric band about the ideal value. */
typedef struct fl_band {
	fl_band_basis basis;
	double half_width; /* in the unit of the basis */
} fl_band;

/* A stretch of the scale with a tolerance of its own. Both ends belong to it; where two zones touch the tighter rules.
 */
typedef struct fl_zone {
	double from_pct_span, to_pct_span;
	fl_band band;
} fl_zone;

typedef enum fl_linearity { FL_LINEARITY_INDEPENDENT, FL_LINEARITY_TERMINAL, FL_LINEARITY_ZERO_BASED } fl_linearity;

/* One place on the scale where the instrument is tested. */
typedef struct fl_plan_point {
	double position_pct_span;
	double oil_low_pct_span, oil_high_pct_span; /* an oil (or an injected pressure) suits the point between these */
} fl_plan_point;

typedef enum fl_ask {
	FL_ASK_CONFIRM, /* yes or no; "no" stops the step until it is yes, unless `may_decline` */
	FL_ASK_AMOUNT,  /* a number with unit */
	FL_ASK_TEXT
} fl_ask;

/* A question of the procedure: a safety gate, a condition, a restoring step. */
typedef struct fl_question {
	const char *id;      /* unique in the procedure: letters, digits, hyphen */
	const char *ask;     /* the question, one line */
	const char *caution; /* the usual caution, NULL if none */
	fl_ask kind;
	fl_unit unit;                         /* FL_ASK_AMOUNT */
	double possible_low, possible_high;   /* outside: refused. In `unit`; -INFINITY, INFINITY if open */
	double plausible_low, plausible_high; /* outside: asked again */
	bool required;                        /* an empty answer is refused */
	bool may_decline;                     /* "no", with a reason, is recorded and printed as unfinished */
} fl_question;

/* When a reading counts as settled. */
typedef struct fl_settle {
	int readings;           /* judged over at least this many of the last ones (watch values and readings) */
	double window_s;        /* that span at least this time, where times are known */
	double drift_pct_span;  /* slope * span of time must stay within this */
	double temp_k_per_min;  /* and the temperature within this; INFINITY for pressure */
	bool watch_required;    /* the first reading of a point needs a settled watch before it */
	int identical_readings; /* so many identical to the last digit raise a question; 0: never */
} fl_settle;

typedef enum fl_distribution {
	FL_DIST_NORMAL,
	FL_DIST_RECTANGULAR,
	FL_DIST_TRIANGULAR,
	FL_DIST_STUDENT
} fl_distribution;

/* A contribution that the procedure adds to every point's budget. */
typedef struct fl_extra_term {
	const char *name;
	double value;                 /* half width, or U with k for a normal distribution */
	double coverage;              /* k for FL_DIST_NORMAL, else 0 */
	fl_distribution distribution; /* never FL_DIST_STUDENT: a template has no degrees of freedom to give */
	fl_band_basis basis;          /* FL_BAND_PERCENT_SPAN or FL_BAND_PERCENT_READING */
	bool own;                     /* another deviation at every point; else one and the same at all of them */
	const char *source;           /* where the value comes from; NULL where the template does not say */
} fl_extra_term;

/* Which line is computed beside the ordinary least-squares one. */
typedef enum fl_line_choice {
	FL_LINE_BY_RATIO, /* the generalized one where the points' uncertainties differ by more than three to one */
	FL_LINE_ORDINARY, /* none */
	FL_LINE_GENERAL   /* the generalized one always */
} fl_line_choice;

/* What a function check finds out. */
typedef enum fl_check_kind {
	FL_CHECK_CONFIRM,   /* yes or no; yes is in order */
	FL_CHECK_AMOUNT,    /* a number with unit that has to lie within limits: a delay, a stroke */
	FL_CHECK_INDICATION /* what the instrument indicates, in the unit of its dial or of its output: an alarm's trip */
} fl_check_kind;

/* Where the expected indication stands: in the record of the instrument. */
typedef enum fl_check_expects { FL_EXPECT_ALARM_LOW, FL_EXPECT_ALARM_HIGH, FL_EXPECT_SET_POINT } fl_check_expects;
const char *fl_procedure_expects_word(fl_check_expects expects); /* "low alarm", "high alarm", "set point" */

/* A function of the loop that is tried after the runs, before the loop is restored. Each may be left out with a
 * reason. */
typedef struct fl_function_check {
	const char *id, *ask, *caution; /* as of a question; ids unique among them all */
	const char *name;               /* what it is called on the certificate: "high viscosity alarm" */
	fl_check_kind kind;
	fl_unit unit;             /* amount */
	double expected;          /* amount, in `unit`; NAN where only limits are given */
	double low, high;         /* amount: in order within, ends included; infinite where open */
	fl_check_expects expects; /* indication */
	double limit_pct_span;    /* indication: half width about the expected place */
	bool true_viscosity;      /* indication: which true viscosity it stands for is stated, with its uncertainty */
} fl_function_check;

/* In which part a person signs. */
typedef enum fl_part { FL_PART_PERFORMED, FL_PART_REVIEWED, FL_PART_AUTHORISED, FL_PARTS } fl_part;
const char *fl_part_word(fl_part part); /* "performed", "reviewed", "authorised" */
fl_part fl_part_find(const char *word); /* FL_PARTS if it is none of them */

typedef struct fl_procedure {
	fl_arena arena;
	const char *id, *version, *title;
	const char *source;      /* where the procedure comes from */
	const char *maintenance; /* who keeps it and when it is looked at again */
	const char *method;      /* the sentence for the certificate */
	fl_medium medium;
	bool stopped_zero;           /* the zero with the pump stopped is read at the start and end of each cycle */
	const fl_plan_point *points; /* rising */
	int point_count;
	int cycles;              /* rising and falling pass each; 1 with `falling` false: one traverse */
	bool falling;            /* false: rising passes only, hysteresis not determined */
	int readings;            /* at each point and pass */
	double bath_c;           /* temperature of the oils; NAN for pressure */
	double bath_tolerance_k; /* a bath temperature further off is asked about */
	fl_settle settle;
	fl_band tolerance;      /* used where the instrument states none */
	bool sets_limits_aside; /* the instrument's own tolerance and limits are for the whole sensor, not for this */
	const fl_zone *zones;   /* where it is another one; rising, not overlapping */
	int zone_count;
	fl_band adjust_limit;             /* inside: leave alone */
	double hysteresis_limit_pct_span; /* NAN if none */
	double linearity_limit_pct_span;  /* NAN if none */
	fl_linearity deciding_linearity;
	fl_rule rule;
	double coverage_probability;             /* 0.9545 usual */
	double oil_interpolation_half_width_rel; /* D341 between certified temperatures, fraction of nu, rectangular */
	double oil_ageing_per_year_rel;          /* fraction of nu a year since certified, half width, rectangular */
	double oil_own_share; /* certificates of one issuer are correlated by 1 less this; 0: fully, as if one scale were
	                         off */
	fl_line_choice line;
	double minimum_tur;        /* below: no conformity statement (verdict withheld); 0 for never; 1.5 if not stated */
	bool states_below_tur;     /* a verdict is given below it all the same, and the certificate says so */
	double reliability;        /* share of such instruments that is in tolerance, for the global risk; 0: not stated */
	bool reliability_observed; /* the share as observed by measurements; else of the true values */
	bool budget_on_certificate;
	const fl_extra_term *extra;
	int extra_count;
	const fl_question *gates; /* before the first reading */
	int gate_count;
	const fl_question *conditions;
	int condition_count;
	const fl_question *restore; /* at the end */
	int restore_count;
	const fl_function_check *checks; /* after the runs, before restoring */
	int check_count;
	bool opinions_on_certificate; /* opinions and interpretations, marked as such, stand on it; false if not stated */
	unsigned signatures;          /* bits 1 << fl_part: without these a certificate does not count as issued */
	const char *text;             /* the file's bytes as read (valid UTF-8): goes into the journal */
} fl_procedure;

/* Reads a template from memory. `file` is used in errors. On success *out is complete and to be freed. */
fl_status fl_procedure_parse(const char *text, const char *file, fl_procedure *out, fl_error *err) FL_MUST_USE;
fl_status fl_procedure_load(const fl_io *io, const char *path, fl_procedure *out, fl_error *err) FL_MUST_USE;
void fl_procedure_free(fl_procedure *procedure);

/* Reads map[key] as a band: "2.0 % of span", "5 % of reading" or, with `dial` not FL_U_NONE, "1.0 mm2/s" in that unit.
 * A bare "2.0 %" is refused: nobody can tell of what. Absent and not required: *out stays. For stage stock too. */
fl_status fl_procedure_band(const struct fl_node *map, const char *key, bool required, fl_unit dial, fl_band *out,
                            fl_error *err) FL_MUST_USE;

/* Reads map[key] as a list of {from, to, band}. `from` and `to` in % of span or, with `dial` not FL_U_NONE, in that
 * unit, which `pct_of_dial` turns into % of span. Zones that overlap are refused. Absent: *out stays. */
typedef double (*fl_zone_place)(const void *context, double dial);
fl_status fl_procedure_zones(fl_arena *arena, const struct fl_node *map, const char *key, fl_unit dial,
                             fl_zone_place pct_of_dial, const void *context, const fl_zone **out, int *count,
                             fl_error *err) FL_MUST_USE;

/* The rule in words, as the certificate states it. Never NULL. */
const char *fl_procedure_rule_words(fl_rule rule);
const char *fl_procedure_linearity_word(fl_linearity linearity);

#endif
