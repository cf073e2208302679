/* analysis/explain.c - every number of a point with its formula, its source and what it is made of.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * In the order of the computation. Inputs are stated at the means of the readings, as the budget is; the result itself
 * is the mean over readings each brought to its own reference, so that a number recomputed from the inputs agrees to
 * what the spread of temperatures leaves (parts in a million).
 */
#include "work.h"

#include <math.h>

enum { NUMBERS_MOST = 40, INPUTS_MOST = 8 };

typedef struct explainer {
	const work *w;
	const fl_run_result *run;
	const fl_point_result *point;
	fl_explained *numbers;
	fl_explained_input *inputs; /* of the number at work */
	size_t count;
	bool failed;
} explainer;

/* ---- writing ---- */

static void begin_number(explainer *x, const char *name, double value, const char *unit, const char *formula,
                         const char *source) {
	x->inputs = fl_arena_alloc(x->w->arena, INPUTS_MOST, sizeof *x->inputs);
	x->failed = x->failed || !x->inputs || !name || !formula || !source || x->count >= NUMBERS_MOST;
	if (x->failed)
		return;
	x->numbers[x->count++] = (fl_explained){name, value, unit, formula, source, x->inputs, 0, NULL};
}

static void made_of(explainer *x, const char *name, double value, const char *unit, double sensitivity,
                    const char *source) {
	if (x->failed)
		return;
	fl_explained *number = &x->numbers[x->count - 1];
	x->failed = number->input_count >= INPUTS_MOST || !name;
	if (!x->failed)
		x->inputs[number->input_count++] = (fl_explained_input){name, value, unit, sensitivity, source};
}

static void in_words(explainer *x, const char *words) {
	if (!x->failed)
		x->numbers[x->count - 1].words = words;
}

static const char *certificate_of(const explainer *x, const fl_equipment *item) {
	return item ? fl_arena_printf(x->w->arena, "certificate %s of %s",
	                              item->certificate ? item->certificate : "not named", item->id)
	            : "no equipment named: taken as read";
}

/* ---- the oil ---- */

static double mean_typed_temp(const explainer *x) {
	double sum = 0.0, n = 0.0;
	for (size_t i = 0; i < x->run->reading_count; i++) {
		const fl_reading_result *r = &x->run->readings[i];
		bool here =
		    r->used && r->reading->point == x->point->point && (x->point->both || r->reading->pass == x->point->pass);
		sum += here ? r->reading->temp_c : 0.0;
		n += here;
	}
	return sum / n;
}

static void explain_temperature(explainer *x) {
	double typed = mean_typed_temp(x);
	begin_number(x, "temperature of the oil", x->point->temp_c, "°C", "T = indication + correction",
	             "mean of the readings; correction by the thermometer's certificate");
	made_of(x, "indication", typed, "°C", 1.0, "readings of this session");
	double correction = round((x->point->temp_c - typed) * 1e9) / 1e9; /* without the last bits of the means */
	made_of(x, "correction", correction, "K", 1.0, certificate_of(x, x->w->reference.thermometer));
}

static void explain_viscosity(explainer *x, const fl_oil *oil, const fl_oil_state *s) {
	fl_arena *arena = x->w->arena;
	const fl_oil_point *low = &oil->table.points[s->low], *high = &oil->table.points[s->high];
	const char *source = fl_arena_printf(arena, "certificate %s of lot %s", oil->certificate, oil->lot);
	double nu = s->nu_m2_s * 1e6;
	begin_number(
	    x, "kinematic viscosity", nu, "mm²/s",
	    "log log Z = A − B log T through the two certified points, Z = ν + 0.7 + exp(−1.47 − 1.84 ν − 0.51 ν²), "
	    "T in K",
	    "ASTM D341, annex A1 (full form), inverted by iteration");
	made_of(x, "T", s->temp_c, "°C", -nu * s->beta_per_k, NULL);
	made_of(x, fl_arena_printf(arena, "ν₁ certified at %s °C", fl_analysis_number(arena, low->temp_c, 5)),
	        low->nu_m2_s * 1e6, "mm²/s", s->c1 * s->nu_m2_s / low->nu_m2_s, source);
	made_of(x, fl_arena_printf(arena, "ν₂ certified at %s °C", fl_analysis_number(arena, high->temp_c, 5)),
	        high->nu_m2_s * 1e6, "mm²/s", s->c2 * s->nu_m2_s / high->nu_m2_s, source);
	double part = (s->temp_c - low->temp_c) / (high->temp_c - low->temp_c);
	begin_number(x, "density", s->rho_kg_m3, "kg/m³", "ρ = ρ₁ + (ρ₂ − ρ₁)(t − t₁)/(t₂ − t₁)",
	             "straight line between the certified densities (common practice)");
	made_of(x, "T", s->temp_c, "°C", s->drho_dt, NULL);
	made_of(x, "ρ₁", low->rho_kg_m3, "kg/m³", 1.0 - part, source);
	made_of(x, "ρ₂", high->rho_kg_m3, "kg/m³", part, source);
}

static void explain_equivalent(explainer *x, const fl_oil_state *s) {
	const fl_point_result *p = x->point;
	const fl_scale *scale = &x->w->reference.instrument->scale;
	double mu = s->mu_pa_s * 1e3, nu = s->nu_m2_s * 1e6, span = x->w->reference.high_m2_s - x->w->reference.low_m2_s;
	bool dynamic = scale->dial_unit == FL_DIAL_MPA_S;
	begin_number(x, "dynamic viscosity", mu, "mPa·s", "µ = ν ρ / 1000", "definition of kinematic viscosity");
	made_of(x, "ν", nu, "mm²/s", mu / nu, NULL);
	made_of(x, "ρ", s->rho_kg_m3, "kg/m³", mu / s->rho_kg_m3, NULL);
	double rho = dynamic ? 1000.0 : scale->dial_density_kg_m3;
	begin_number(x, "equivalent viscosity", p->equivalent_m2_s * 1e6, dynamic ? "mPa·s" : "mm²/s",
	             dynamic ? "µ: the dial is divided in it" : "ν_eq = 1000 µ / ρ_dial",
	             "the capillary senses µ (Hagen and Poiseuille); the dial assumes one density");
	made_of(x, "µ", mu, "mPa·s", 1000.0 / rho, NULL);
	if (!dynamic)
		made_of(x, "ρ_dial", rho, "kg/m³", NAN, "plate of the instrument; part of the definition, without uncertainty");
	begin_number(x, "place on the scale", 100.0 * p->x, "% of span", "x = (ν_eq − low) / (high − low)",
	             "range of the instrument");
	made_of(x, "ν_eq", p->equivalent_m2_s * 1e6, "mm²/s", 100.0 / (span * 1e6), NULL);
	made_of(x, "low", x->w->reference.low_m2_s * 1e6, "mm²/s", NAN, "plate of the instrument");
	made_of(x, "high", x->w->reference.high_m2_s * 1e6, "mm²/s", NAN, "plate of the instrument");
}

static fl_status explain_oil(explainer *x, fl_error *err) {
	const fl_oil *oil = NULL;
	fl_oil_state state;
	fl_status status = fl_analysis_oil(x->w, x->point->point, &oil, err);
	if (status < 0 || !oil)
		return status;
	status = fl_physics_oil_at(&oil->table, x->point->temp_c, &state, err);
	if (status < 0)
		return status;
	explain_temperature(x);
	explain_viscosity(x, oil, &state);
	explain_equivalent(x, &state);
	return FL_OK;
}

static void explain_pressure(explainer *x) {
	const fl_point_result *p = x->point;
	const fl_reference *by = &x->w->reference;
	double per_pa = 100.0 * by->high_m2_s / (by->high_m2_s - by->low_m2_s) / by->dp_full_pa;
	begin_number(x, "place on the scale", 100.0 * p->x, "% of span", "x = (high dp / dp_full − low) / (high − low)",
	             "dp is proportional to the viscosity at the plate flow (Hagen and Poiseuille)");
	made_of(x, "dp", p->applied_pa, "Pa", per_pa, certificate_of(x, by->standard));
	made_of(x, "dp_full", by->dp_full_pa, "Pa", NAN, "plate of the instrument");
}

/* ---- the error ---- */

static void explain_output(explainer *x) {
	const fl_point_result *p = x->point;
	const fl_signal_range *range = x->w->reference.range;
	const char *unit = fl_unit_text(range->unit);
	double span = range->high - range->low;
	begin_number(x, "ideal output", p->ideal_output, unit, "I = I₀ + x (I₁ − I₀)",
	             range->unit == FL_U_MA ? "IEC 60381-1" : "IEC 60382 or the plate");
	made_of(x, "x", 100.0 * p->x, "% of span", span / 100.0, NULL);
	made_of(x, "I₀", range->low, unit, NAN, "signal of the instrument");
	made_of(x, "I₁", range->high, unit, NAN, "signal of the instrument");
	begin_number(x, "output found", p->output, unit, "mean of the corrected readings", "readings of this session");
	made_of(x, "readings", (double)p->n, "", NAN, certificate_of(x, x->w->reference.meter));
	begin_number(x, "error", 100.0 * p->error_span, "% of span", "e = 100 (found − ideal) / (I₁ − I₀)",
	             p->both ? "mean of the errors of both directions, which weigh the same"
	                     : "IEC 61298-2: output less ideal output");
	made_of(x, "found", p->output, unit, 100.0 / span, NULL);
	made_of(x, "ideal", p->ideal_output, unit, -100.0 / span, NULL);
}

static void explain_scatter(explainer *x) {
	const fl_point_result *p = x->point;
	if (p->n < 2 || isnan(p->s_span))
		return;
	begin_number(x, "standard deviation of one reading", 100.0 * p->s_span, "% of span",
	             p->both ? "s² = Σ (n − 1) s² / Σ (n − 1) over the two directions" : "s² = Σ (e − mean e)² / (n − 1)",
	             p->both ? "pooled within each direction: their difference is hysteresis" : "JCGM 100 4.2.2");
	made_of(x, "n", (double)p->n, "", NAN, "readings of this session");
}

static void explain_uncertainty(explainer *x) {
	const fl_point_result *p = x->point;
	if (isnan(p->sum.uc))
		return;
	begin_number(x, "combined standard uncertainty", 100.0 * p->sum.uc, "% of span", "u² = Σ (c u)² over the budget",
	             "JCGM 100 5.1.2");
	made_of(x, "contributions", (double)p->budget_count, "", NAN, "budget of this point");
	begin_number(x, "effective degrees of freedom", p->sum.dof_effective, "", "ν = u⁴ / Σ ((c u)⁴ / ν)",
	             "JCGM 100 G.4.1, Welch and Satterthwaite");
	begin_number(x, "coverage factor", p->sum.coverage_factor, "", "k = t(p, ν), ν cut to a whole number",
	             "JCGM 100 G.3 and table G.2");
	made_of(x, "p", 100.0 * x->w->result->coverage_probability, "%", NAN, "procedure, coverage");
	begin_number(x, "expanded uncertainty", 100.0 * p->sum.expanded, "% of span",
	             p->floored ? "U of the reference: k u came out smaller" : "U = k u", "JCGM 100 6.2.1");
	made_of(x, "k", p->sum.coverage_factor, "", 100.0 * p->sum.uc, NULL);
	made_of(x, "u", 100.0 * p->sum.uc, "% of span", p->sum.coverage_factor, NULL);
	fl_rounded_u stated = fl_analysis_round_u(100.0 * p->sum.expanded);
	begin_number(x, "expanded uncertainty as stated", stated.value, "% of span",
	             "two digits, half to even, up where more than 5 % would be lost", "ILAC-P14:09/2020 5.3");
	made_of(x, "U", 100.0 * p->sum.expanded, "% of span", NAN, NULL);
}

/* ---- the decision ---- */

static void explain_risks(explainer *x) {
	const fl_point_result *p = x->point;
	double T = 100.0 * p->tolerance_span;
	begin_number(x, "specific risk", 100.0 * p->risk, "%", "p = 1 − [Φ((T − e)/u) − Φ((−T − e)/u)]",
	             "JCGM 106 7.4: probability that the true error is beyond the tolerance");
	made_of(x, "T", T, "% of span", NAN, NULL);
	made_of(x, "e", 100.0 * p->error_span, "% of span", NAN, NULL);
	made_of(x, "u", 100.0 * p->sum.uc, "% of span", NAN, NULL);
	if (!p->has_global)
		return;
	begin_number(x, "global risk of a false acceptance", 100.0 * p->global.consumer, "%",
	             "integral over the prior of the probability to pass beyond the tolerance", "JCGM 106 9.5.2");
	made_of(x, "standard deviation of the prior", 100.0 * p->prior_u_span, "% of span", NAN, x->w->result->prior_words);
	made_of(x, "acceptance limit", 100.0 * p->acceptance_span, "% of span", NAN, NULL);
	begin_number(x, "global risk of a false rejection", 100.0 * p->global.producer, "%",
	             "integral over the prior of the probability to fail within the tolerance", "JCGM 106 9.5.3");
}

static void explain_decision(explainer *x) {
	const fl_point_result *p = x->point;
	const fl_result *result = x->w->result;
	if (isnan(p->tolerance_span))
		return;
	begin_number(x, "tolerance", 100.0 * p->tolerance_span, "% of span", "half width here",
	             p->zone                             ? "zone of the scale, limits included"
	             : result->tolerance_from_instrument ? "instrument"
	                                                 : "procedure");
	if (p->zone) {
		made_of(x, "zone from", p->zone->from_pct_span, "% of span", NAN, "tolerance zones");
		made_of(x, "zone to", p->zone->to_pct_span, "% of span", NAN, "tolerance zones");
	}
	begin_number(x, "test uncertainty ratio", p->tur, "", "T / U", "ANSI/NCSL Z540.3 5.3: 4 or more");
	made_of(x, "least for a statement", result->minimum_tur, "", NAN, "procedure, minimum TUR");
	if (isnan(p->risk))
		return;
	explain_risks(x);
	begin_number(x, "verdict", NAN, "", "|e| against T and U by the rule, limits included, on unrounded numbers",
	             fl_procedure_rule_words(result->rule));
	in_words(x, p->verdict == FL_VERDICT_NONE ? "none" : fl_verdict_word(p->verdict));
}

fl_status fl_analysis_explain(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                              const fl_result *result, fl_run_kind kind, const fl_point_result *point, fl_arena *arena,
                              fl_explanation *out, fl_error *err) {
	fl_result room = *result;
	work w = {.session = session, .procedure = procedure, .stock = stock, .result = &room, .arena = arena};
	fl_status status = fl_analysis_items(&w, err);
	if (status < 0)
		return status;
	explainer x = {.w = &w, .run = &result->runs[kind], .point = point};
	x.numbers = fl_arena_alloc(arena, NUMBERS_MOST, sizeof *x.numbers);
	x.failed = !x.numbers;
	if (point->point != FL_POINT_ZERO && procedure->medium == FL_MEDIUM_PRESSURE)
		explain_pressure(&x);
	else
		status = explain_oil(&x, err);
	if (status < 0)
		return status;
	explain_output(&x);
	explain_scatter(&x);
	explain_uncertainty(&x);
	explain_decision(&x);
	if (x.failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the explanation");
	*out = (fl_explanation){point, kind, x.numbers, x.count};
	return FL_OK;
}
