/* cause/cause_private.h - what the parts of the search for causes share.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_CAUSE_PRIVATE_H
#define FOUNDLEFT_CAUSE_PRIVATE_H

#include "foundleft/cause.h"

#include <math.h>

#define TRY(call)                 \
	do {                          \
		fl_status tried = (call); \
		if (tried < 0)            \
			return tried;         \
	} while (0)

/* ---- model.c: the instrument with faults in it ---- */

/* What a row of the fit is a reading of. */
typedef enum fl_row_kind {
	FL_ROW_OIL,     /* an oil runs */
	FL_ROW_STOPPED, /* pump stopped, legs equalised */
	FL_ROW_INJECTED,
	FL_ROW_SPEED, /* relative deviation of the measured value from the stated one, here and below */
	FL_ROW_FLOW,
	FL_ROW_DENSITY,
	FL_ROW_TEMPERATURE
} fl_row_kind;

/* The circumstances of a row. */
typedef struct fl_setting_of_row {
	fl_row_kind kind;
	const fl_oil *oil;
	const fl_oil *before; /* the oil before it in the rig; NULL if none or the same */
	bool from_elsewhere;  /* the reading before was at another place: the output had a step to make */
	double x_before;      /* there */
	double temp_c;
	double line_pa; /* NAN where not recorded */
	double x;       /* ideal; of an injected pressure too */
} fl_setting_of_row;

typedef struct fl_faults {
	double amount[FL_FAULT_COUNT];
} fl_faults;

/* Oils at the temperatures asked for last: a search asks for the same few thousands of times. By oil and temperature,
 * exactly; what was found is what would be computed. */
enum { FL_MEMO_PLACES = 4096 };
typedef struct fl_oil_memo {
	const fl_oil *oil;
	double temp_c;
	fl_oil_state state;
} fl_oil_memo;

/* The flow's pressure last found for a row: most faults do not touch the flow, and a search asks for the same ones
 * again for each of them. By all that it depends on, exactly. */
enum { FL_FLOW_PLACES = 64, FL_FLOW_FAULTS = 8 };
typedef struct fl_flow_memo {
	const fl_oil *oil, *before;
	double temp_c;
	double amounts[FL_FLOW_FAULTS];
	double share;
} fl_flow_memo;

/* The instrument, brought to proportions of its full scale. */
typedef struct fl_cause_model {
	const fl_instrument *instrument;
	double low_m2_s, high_m2_s;
	double rho_dial;                   /* density between equivalent and dynamic viscosity */
	double rho_full;                   /* density at full scale, for its kinetic term */
	double dp_full_pa;                 /* of the sound instrument, by its geometry; 1 without geometry */
	fl_oil_memo *memo;                 /* [FL_MEMO_PLACES]; NULL for none */
	fl_flow_memo *flows;               /* [FL_FLOW_PLACES]; NULL: none */
	const fl_setting_of_row *thickest; /* the row that COUPLING and LIMIT are measured at; NULL if none */
} fl_cause_model;

fl_status fl_cause_model_begin(const fl_instrument *instrument, fl_cause_model *model, fl_error *err) FL_MUST_USE;
/* What stands in the row's `value` with these faults: an error as a fraction of span, or a relative deviation. */
fl_status fl_cause_predict(const fl_cause_model *model, const fl_setting_of_row *row, const fl_faults *faults,
                           double *value, fl_error *err) FL_MUST_USE;

/* ---- matrix.c: small dense matrices, row-major ---- */

/* Lower triangle L with L L' = A, in place (n by n, upper part left alone); false if not positive definite. */
bool fl_cause_cholesky(double *A, size_t n);
void fl_cause_forward(const double *L, size_t n, double *b); /* b := L^-1 b */
void fl_cause_back(const double *L, size_t n, double *b);    /* b := L'^-1 b */
/* A^-1 into `inverse`, A destroyed; false if not positive definite. */
bool fl_cause_invert(double *A, size_t n, double *inverse);

/* ---- rows.c: the readings as rows ---- */

enum { FL_CAUSE_ROWS = 96, FL_CAUSE_CYCLES = 16 };

/* Readings of one row before they become a mean. */
typedef struct fl_row_data {
	fl_setting_of_row at;
	int point;
	fl_pass pass;
	const fl_point_result *found; /* of the analysis; NULL for extra rows */
	double value;                 /* mean error */
	size_t n;
	double cycle_mean[FL_CAUSE_CYCLES];
	size_t cycle_n[FL_CAUSE_CYCLES];
	size_t cycles;
	double u_extra; /* of an extra row */
	const char *name;
} fl_row_data;

/* ---- fit.c: faults with bounds and priors ---- */

typedef struct fl_fit {
	size_t n, p;
	fl_fault columns[FL_FAULT_COUNT];
	fl_faults faults;
	bool at_bound[FL_FAULT_COUNT]; /* by column */
	double *A;                     /* [n * p] whitened columns by one prior standard deviation */
	double *S;                     /* [n * p] the same, not whitened */
	double *covariance; /* [p * p], of the amounts in prior standard deviations; 0 for those held at a bound */
	double *unbounded;  /* [p * p], the same as if no bound held */
	double *fitted;     /* [n] */
	double chi_data, chi_total, dof;
} fl_fit;

/* Everything one search is made from, and where it goes. */
typedef struct fl_search {
	const fl_session *session;
	const fl_procedure *procedure;
	const fl_stock *stock, *shelf;
	const fl_result *result;
	const fl_run_result *run;
	const fl_instrument *instrument;
	const fl_signal_range *range;
	fl_cause_extra extra;
	fl_cause_model model;
	fl_oil_memo memo[FL_MEMO_PLACES];
	fl_flow_memo flows[FL_FLOW_PLACES];
	fl_row_data rows[FL_CAUSE_ROWS];
	size_t row_count, reading_rows;      /* extra rows stand behind those of the readings */
	double *V;                           /* covariance of the rows' values, row_count squared */
	fl_faults start;                     /* faults taken as given: the supply's speed */
	double scatter_u, stopped_scatter_u; /* standard deviation of a cycle's mean, pooled: while running, at rest */
	bool noisy;                          /* the running readings scatter as with air in the suction */
	fl_fit fit;                          /* of the attribution */
	int group[FL_FAULT_COUNT];           /* of its columns */
	fl_cause *out;
	fl_arena *arena;
	bool memory_failed;
} fl_search;

/* measured.c: standard uncertainty of an item, inside unit; NAN without item, k, or for another quantity. */
double fl_cause_equipment_u(const fl_equipment *item, fl_day day, fl_quantity quantity);

fl_status fl_cause_take_rows(fl_search *s, fl_error *err) FL_MUST_USE;
fl_status fl_cause_take_extra(fl_search *s, fl_error *err) FL_MUST_USE;
/* noise.c: V. After the rows. */
fl_status fl_cause_take_noise(fl_search *s, fl_error *err) FL_MUST_USE;

/* Fits the faults for which use[fault] is set and which move some row; the others stay at s->start. */
fl_status fl_cause_fit(const fl_search *s, const bool use[FL_FAULT_COUNT], fl_fit *fit, fl_error *err) FL_MUST_USE;

/* ---- group.c ---- */

/* The whole attribution: estimates, groups, chi-squared. */
fl_status fl_cause_attribute(fl_search *s, fl_error *err) FL_MUST_USE;
/* What the row of largest effect would need of one fault alone; NAN where no amount gives it. */
double fl_cause_alone(const fl_search *s, const fl_row_data *row, fl_fault fault, double effect_span);

/* ---- special.c, mixup.c, trim.c, next.c, report.c ---- */

void fl_cause_saturated(fl_search *s);
void fl_cause_mix_ups(fl_search *s);
fl_status fl_cause_supply(fl_search *s, fl_error *err) FL_MUST_USE;
void fl_cause_two_zeros(fl_search *s);
fl_status fl_cause_carry_over(fl_search *s, fl_error *err) FL_MUST_USE;
void fl_cause_scatter(fl_search *s);
fl_status fl_cause_trim(fl_search *s, fl_error *err) FL_MUST_USE;
fl_status fl_cause_next(fl_search *s, fl_error *err) FL_MUST_USE;
void fl_cause_report(fl_search *s);

/* ---- say.c ---- */

/* A finding with its sentence; NULL (and memory_failed) when memory is out. */
fl_finding *fl_cause_say(fl_search *s, fl_finding_kind kind, const char *id, const char *format, ...) FL_PRINTF(4, 5);
void fl_cause_advise(fl_search *s, fl_finding *finding, const char *advice, const char *format, ...) FL_PRINTF(4, 5);
void fl_cause_number_of(fl_search *s, fl_finding *finding, const char *name, double inside, double u, fl_unit unit);
/* Fraction of span as "+2.54 %"; amount of a fault as "0.65 %". "?" when memory is out. */
const char *fl_cause_percent(fl_search *s, double fraction, int decimals);
const char *fl_cause_amount(fl_search *s, double inside, fl_unit unit, int significant);
const char *fl_cause_text(fl_search *s, const char *format, ...) FL_PRINTF(2, 3);
fl_strength fl_cause_strength(double z);

/* Half width of the tolerance at x = 1 as a fraction of span, where a point states none: 0.02. */
double fl_cause_tolerance(const fl_search *s);

#endif
