/* analysis/trials.h - the model of a run as it is tried: what is drawn, and what is computed from the draws.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_ANALYSIS_TRIALS_H
#define FOUNDLEFT_ANALYSIS_TRIALS_H

#include "work.h"

/* A deviation of a place: u times the sum of the weighted draws, all of unit variance. */
typedef struct trial_effect {
	fl_effect_on on;
	size_t common, own; /* inputs; SIZE_MAX for none */
	double weight_common, weight_own;
	double scale;   /* what one unit-variance draw moves: kelvins, a fraction of viscosity, a fraction of span */
	bool both_only; /* of the mean of both directions alone: half the hysteresis */
} trial_effect;

/* One reading. */
typedef struct trial_reading {
	size_t input;
	double ln_t, per_t; /* of its own temperature: ln(T / K) and 1/T; 0 without oil */
	double temp_c;
	size_t pair;     /* lower of its two certified temperatures, counted from the place's first */
	double x;        /* ideal position where no oil gives it */
	double output_x; /* as read */
} trial_reading;

/* The readings of one direction. */
typedef struct trial_pass {
	trial_reading *readings;
	size_t count;
	double s;         /* standard deviation of one; 0 where there is none */
	bool studentised; /* four readings or more: their mean follows Student's t */
} trial_pass;

enum { CERTIFIED_MOST = 32, PLACES_MOST = 64, READINGS_MOST = 1024 };

/* A certified temperature of an oil. */
typedef struct trial_certified {
	double temp_c, ln_t, nu_m2_s, u_nu_rel, rho_kg_m3, u_rho_kg_m3;
} trial_certified;

typedef struct trial_place {
	bool oil, in_line;
	const fl_point_result *combined;
	trial_certified certified[CERTIFIED_MOST];
	size_t certified_count;
	trial_effect *effects;
	size_t effect_count;
	trial_pass passes[2];
} trial_place;

typedef enum trial_figure {
	FIGURE_ZERO,
	FIGURE_SPAN,
	FIGURE_RESIDUAL,
	FIGURE_INDEPENDENT,
	FIGURE_TERMINAL,
	FIGURE_ZERO_BASED,
	FIGURE_HYSTERESIS,
	FIGURES
} trial_figure;

typedef struct trial_model {
	trial_place *places;
	size_t place_count;
	size_t point_outputs; /* per direction */
	bool lines, linearity, hysteresis;
	double low_m2_s, span_m2_s, dial_rho_kg_m3;
	fl_input *inputs;
	const char **keys; /* of the inputs; "" for a reading */
	size_t input_count;
} trial_model;

/* trial_model.c: what is drawn. */
fl_status fl_analysis_trial_model(const work *w, const fl_run_result *run, trial_model *out, fl_error *err) FL_MUST_USE;
/* trial.c: outputs are the errors per direction, then of both together, then the figures. */
void fl_analysis_try(const void *model, const double *draws, size_t trials, double *outputs);

#endif
