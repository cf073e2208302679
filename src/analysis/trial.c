/* analysis/trial.c - one trial: the run computed again from drawn readings and drawn deviations, nothing linearised.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * ln ln Z is a straight line in ln T between two certified temperatures (ASTM D341); here its ends are drawn, and each
 * reading is taken at its own drawn temperature. What budgets state in % of span acts on the error itself.
 */
#include "trials.h"

#include <math.h>

/* From here on Z - 0.7 is the viscosity in mm2/s to the last bit: the low-viscosity term is below 1e-18. */
static const double plain_z = 8.0;

/* The draws of one trial: input i is at[i * stride]. */
typedef struct one_trial {
	const double *at;
	size_t stride;
} one_trial;

/* The deviations of a place in one trial. */
typedef struct deviations {
	double temp_k;             /* of the temperature */
	double viscosity;          /* factor */
	double certified, density; /* in standard uncertainties of each certified value */
	double ideal, output;      /* fractions of span */
	double both;               /* of the mean of both directions alone */
} deviations;

static double draw(one_trial t, size_t input) {
	return t.at[input * t.stride];
}

static deviations deviate(const trial_place *place, one_trial t) {
	deviations d = {.viscosity = 1.0};
	for (size_t i = 0; i < place->effect_count; i++) {
		const trial_effect *e = &place->effects[i];
		double common = e->common == SIZE_MAX ? 0.0 : e->weight_common * draw(t, e->common);
		double own = e->own == SIZE_MAX ? 0.0 : e->weight_own * draw(t, e->own);
		double by = e->scale * (common + own);
		switch (e->on) {
		case FL_ON_TEMPERATURE:
			d.temp_k += by;
			break;
		case FL_ON_VISCOSITY:
			d.viscosity *= 1.0 + by;
			break;
		case FL_ON_CERTIFIED_NU:
			d.certified += by;
			break;
		case FL_ON_CERTIFIED_DENSITY:
			d.density += by;
			break;
		case FL_ON_PRESSURE:
			d.ideal += by;
			break;
		case FL_ON_OUTPUT:
		case FL_ON_ERROR:
		case FL_ON_READINGS:
			*(e->both_only ? &d.both : &d.output) += by;
			break;
		}
	}
	return d;
}

/* ---- the oil ---- */

/* ln ln Z and density at the certified temperatures, as drawn. NaN where a draw leaves the equation's domain. */
typedef struct drawn_oil {
	double ln_ln_z[CERTIFIED_MOST], rho_kg_m3[CERTIFIED_MOST];
} drawn_oil;

static void draw_oil(const trial_place *place, const deviations *d, drawn_oil *oil) {
	for (size_t k = 0; k < place->certified_count; k++) {
		const trial_certified *c = &place->certified[k];
		double z = NAN;
		if (fl_physics_d341_z(c->nu_m2_s * (1.0 + c->u_nu_rel * d->certified), &z, NULL) < 0)
			z = NAN;
		oil->ln_ln_z[k] = log(log(z));
		oil->rho_kg_m3[k] = c->rho_kg_m3 + c->u_rho_kg_m3 * d->density;
	}
}

static double viscosity_of(double z) {
	double nu_m2_s = NAN;
	if (z > plain_z)
		return (z - 0.7) * 1e-6;
	return fl_physics_d341_nu(z, &nu_m2_s, NULL) < 0 ? NAN : nu_m2_s;
}

/* Ideal position of a reading. ln(T + dT) by its series: dT/T is a thousandth at most, what is left out 1e-16. */
static double ideal_of(const trial_model *m, const trial_place *place, const trial_reading *r, const deviations *d,
                       const drawn_oil *oil) {
	if (!place->oil)
		return r->x + d->ideal;
	const trial_certified *low = &place->certified[r->pair], *high = low + 1;
	double part = d->temp_k * r->per_t;
	double ln_t = r->ln_t + part * (1.0 - part * (0.5 - part * (1.0 / 3.0 - part * 0.25)));
	double w = (ln_t - low->ln_t) / (high->ln_t - low->ln_t);
	double z = exp(exp((1.0 - w) * oil->ln_ln_z[r->pair] + w * oil->ln_ln_z[r->pair + 1]));
	double wt = (r->temp_c + d->temp_k - low->temp_c) / (high->temp_c - low->temp_c);
	double rho = (1.0 - wt) * oil->rho_kg_m3[r->pair] + wt * oil->rho_kg_m3[r->pair + 1];
	double equivalent_m2_s = viscosity_of(z) * d->viscosity * rho / m->dial_rho_kg_m3;
	return (equivalent_m2_s - m->low_m2_s) / m->span_m2_s;
}

/* ---- the readings ---- */

/* How far the readings' own scatter is stretched: with s of the draws brought to the s found, their mean deviates as s
 * / sqrt(n) times Student's t with n - 1 degrees of freedom. JCGM 101:2008 6.4.9.2. */
static double stretch(const trial_pass *pass, one_trial t) {
	if (!pass->studentised)
		return pass->s;
	double sum = 0.0, squares = 0.0, n = (double)pass->count;
	for (size_t i = 0; i < pass->count; i++) {
		double z = draw(t, pass->readings[i].input);
		sum += z;
		squares += z * z;
	}
	return pass->s / sqrt((squares - sum * sum / n) / (n - 1.0));
}

typedef struct mean_of_pass {
	double x, error;
} mean_of_pass;

static mean_of_pass try_pass(const trial_model *m, const trial_place *place, const trial_pass *pass,
                             const deviations *d, const drawn_oil *oil, one_trial t) {
	mean_of_pass mean = {0};
	double s = stretch(pass, t), n = (double)pass->count;
	for (size_t i = 0; i < pass->count; i++) {
		const trial_reading *r = &pass->readings[i];
		double x = ideal_of(m, place, r, d, oil);
		mean.x += x / n;
		mean.error += (r->output_x + d->output + s * draw(t, r->input) - x) / n;
	}
	return mean;
}

/* ---- lines and hysteresis ---- */

typedef struct tried_run {
	double x[PLACES_MOST], e[PLACES_MOST];
	size_t n;
	double hysteresis;
} tried_run;

static void find_figures(const trial_model *m, const tried_run *run, double figures[FIGURES]) {
	fl_line line;
	fl_reference_line independent, terminal, zero_based;
	for (int i = 0; i < FIGURES; i++)
		figures[i] = 0.0;
	if (m->lines) {
		bool found = fl_numeric_line(run->x, run->e, run->n, &line, NULL) >= 0;
		figures[FIGURE_ZERO] = found ? line.intercept : NAN;
		figures[FIGURE_SPAN] = found ? line.slope : NAN;
		figures[FIGURE_RESIDUAL] = found ? line.max_abs_residual : NAN;
	}
	if (m->linearity) {
		bool found = fl_numeric_line_independent(run->x, run->e, run->n, &independent, NULL) >= 0 &&
		             fl_numeric_line_terminal(run->x, run->e, run->n, &terminal, NULL) >= 0 &&
		             fl_numeric_line_zero_based(run->x, run->e, run->n, &zero_based, NULL) >= 0;
		figures[FIGURE_INDEPENDENT] = found ? independent.max_abs : NAN;
		figures[FIGURE_TERMINAL] = found ? terminal.max_abs : NAN;
		figures[FIGURE_ZERO_BASED] = found ? zero_based.max_abs : NAN;
	}
	if (m->hysteresis)
		figures[FIGURE_HYSTERESIS] = run->hysteresis;
}

/* One place: its outputs per direction (`next` counts them), its mean of both, its part in line and hysteresis. */
static void try_place(const trial_model *m, size_t index, one_trial t, double *outputs, size_t trials, size_t *next,
                      tried_run *run) {
	const trial_place *place = &m->places[index];
	deviations d = deviate(place, t);
	drawn_oil oil;
	draw_oil(place, &d, &oil);
	mean_of_pass mean[2];
	double sum = 0.0, x = NAN;
	int passes = 0;
	for (int pass = 0; pass < 2; pass++) {
		if (place->passes[pass].count == 0)
			continue;
		mean[pass] = try_pass(m, place, &place->passes[pass], &d, &oil, t);
		outputs[(*next)++ * trials] = mean[pass].error;
		x = passes == 0 ? mean[pass].x : x; /* where the rising pass stood, as in lines.c */
		sum += mean[pass].error;
		passes++;
	}
	double combined = sum / passes + d.both;
	if (passes == 2)
		run->hysteresis = fmax(run->hysteresis, fabs(mean[1].error - mean[0].error));
	if (place->in_line) {
		run->x[run->n] = x;
		run->e[run->n++] = combined;
	}
	outputs[(m->point_outputs + index) * trials] = combined;
}

void fl_analysis_try(const void *model, const double *draws, size_t trials, double *outputs) {
	const trial_model *m = model;
	double figures[FIGURES];
	for (size_t t = 0; t < trials; t++) {
		one_trial now = {draws + t, trials};
		tried_run run;
		run.n = 0;
		run.hysteresis = 0.0;
		size_t next = 0;
		for (size_t i = 0; i < m->place_count; i++)
			try_place(m, i, now, outputs + t, trials, &next, &run);
		find_figures(m, &run, figures);
		for (int i = 0; i < FIGURES; i++)
			outputs[(m->point_outputs + m->place_count + (size_t)i) * trials + t] = figures[i];
	}
}
