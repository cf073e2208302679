/* physics/oil.c - a reference oil between its certified temperatures: viscosity, density and what they inherit.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/physics.h"

#include <math.h>

/* Further than this outside the certified span the D341 line of an oil is not to be trusted. */
static const double farthest_outside_k = 5.0;

static fl_status check_table(const fl_oil_table *table, fl_error *err) {
	if (table->count < 2)
		return fl_fail(err, FL_E_VALUE, "an oil needs at least two certified temperatures, this one has %zu",
		               table->count);
	for (size_t i = 0; i < table->count; i++) {
		const fl_oil_point *p = &table->points[i];
		if (!isfinite(p->temp_c) || !(p->nu_m2_s > 0.0) || !(p->rho_kg_m3 > 0.0))
			return fl_fail(err, FL_E_VALUE, "certified point %zu: temperature, viscosity and density must be given",
			               i + 1);
		if (!(p->u_nu_rel >= 0.0) || !(p->u_rho_kg_m3 >= 0.0))
			return fl_fail(err, FL_E_VALUE, "certified point %zu: an uncertainty must be given and not negative",
			               i + 1);
		if (i > 0 && !(p->temp_c > p[-1].temp_c))
			return fl_fail(err, FL_E_VALUE, "certified temperatures must rise: %g °C follows %g °C", p->temp_c,
			               p[-1].temp_c);
		if (i > 0 && !(p->nu_m2_s < p[-1].nu_m2_s))
			return fl_fail(err, FL_E_VALUE,
			               "viscosity must fall as temperature rises: %g mm²/s at %g °C is not below %g",
			               p->nu_m2_s * 1e6, p->temp_c, p[-1].nu_m2_s * 1e6);
	}
	return FL_OK;
}

/* Index of the lower of the two certified temperatures that enclose `temp_c`, or of the nearest pair. */
static size_t lower_neighbour(const fl_oil_table *table, double temp_c) {
	size_t low = 0;
	while (low + 2 < table->count && temp_c >= table->points[low + 1].temp_c)
		low++;
	return low;
}

static double outside_span_k(const fl_oil_table *table, double temp_c) {
	double below = table->points[0].temp_c - temp_c;
	double above = temp_c - table->points[table->count - 1].temp_c;
	return fmax(0.0, fmax(below, above));
}

static fl_status check_inside(const fl_oil_table *table, double temp_c, fl_error *err) {
	if (isfinite(temp_c) && outside_span_k(table, temp_c) <= farthest_outside_k)
		return FL_OK;
	return fl_fail(err, FL_E_RANGE, "%g °C is more than %g K outside the oil's certified temperatures, %g to %g °C",
	               temp_c, farthest_outside_k, table->points[0].temp_c, table->points[table->count - 1].temp_c);
}

static fl_status line_between(const fl_oil_point *p1, const fl_oil_point *p2, fl_d341_line *line, fl_error *err) {
	return fl_physics_d341_line(p1->temp_c, p1->nu_m2_s, p2->temp_c, p2->nu_m2_s, line, err);
}

/* G = Z ln Z / (dZ/dnu), in mm2/s: how a shift of ln ln Z moves nu. */
static fl_status shift_of(double nu_m2_s, double *g, fl_error *err) {
	double z = 0.0;
	fl_status status = fl_physics_d341_z(nu_m2_s, &z, err);
	if (status < 0)
		return status;
	*g = z * log(z) / fl_physics_d341_dz(nu_m2_s);
	return FL_OK;
}

/* Relative sensitivities of nu to the two certified viscosities, at fraction w of the way in ln T. */
static fl_status share_certificates(const fl_oil_point *p1, const fl_oil_point *p2, fl_oil_state *state,
                                    fl_error *err) {
	double g = 0.0, g1 = 0.0, g2 = 0.0;
	fl_status status = shift_of(state->nu_m2_s, &g, err);
	if (status >= 0)
		status = shift_of(p1->nu_m2_s, &g1, err);
	if (status >= 0)
		status = shift_of(p2->nu_m2_s, &g2, err);
	if (status < 0)
		return status;
	double t = state->temp_c + FL_ZERO_CELSIUS_K;
	double t1 = p1->temp_c + FL_ZERO_CELSIUS_K, t2 = p2->temp_c + FL_ZERO_CELSIUS_K;
	double w = log(t / t1) / log(t2 / t1);
	state->c1 = (1.0 - w) * g * p1->nu_m2_s / (g1 * state->nu_m2_s);
	state->c2 = w * g * p2->nu_m2_s / (g2 * state->nu_m2_s);
	state->u_nu_rel = fabs(state->c1 * p1->u_nu_rel + state->c2 * p2->u_nu_rel);
	return FL_OK;
}

static void density_between(const fl_oil_point *p1, const fl_oil_point *p2, fl_oil_state *state) {
	double w = (state->temp_c - p1->temp_c) / (p2->temp_c - p1->temp_c);
	state->rho_kg_m3 = (1.0 - w) * p1->rho_kg_m3 + w * p2->rho_kg_m3;
	state->drho_dt = (p2->rho_kg_m3 - p1->rho_kg_m3) / (p2->temp_c - p1->temp_c);
	state->u_rho_kg_m3 = fabs((1.0 - w) * p1->u_rho_kg_m3 + w * p2->u_rho_kg_m3);
}

static fl_status viscosity_between(const fl_oil_point *p1, const fl_oil_point *p2, fl_oil_state *state, fl_error *err) {
	fl_d341_line line;
	fl_status status = line_between(p1, p2, &line, err);
	if (status >= 0)
		status = fl_physics_d341_at(&line, state->temp_c, &state->nu_m2_s, err);
	if (status >= 0)
		status = fl_physics_d341_slope(&line, state->temp_c, &state->beta_per_k, err);
	if (status >= 0)
		status = share_certificates(p1, p2, state, err);
	return status;
}

fl_status fl_physics_oil_at(const fl_oil_table *table, double temp_c, fl_oil_state *out, fl_error *err) {
	fl_status status = check_table(table, err);
	if (status >= 0)
		status = check_inside(table, temp_c, err);
	if (status < 0)
		return status;
	size_t low = lower_neighbour(table, temp_c);
	const fl_oil_point *p1 = &table->points[low], *p2 = p1 + 1;
	fl_oil_state state = {.temp_c = temp_c, .low = low, .high = low + 1, .outside_k = outside_span_k(table, temp_c)};
	status = viscosity_between(p1, p2, &state, err);
	if (status < 0)
		return status;
	density_between(p1, p2, &state);
	state.mu_pa_s = state.nu_m2_s * state.rho_kg_m3;
	*out = state;
	return state.outside_k > 0.0 ? FL_WARNING : FL_OK;
}

fl_status fl_physics_oil_misfit(const fl_oil_table *table, double *relative, size_t *at, fl_error *err) {
	fl_status status = check_table(table, err);
	if (status < 0)
		return status;
	double worst = 0.0;
	size_t where = SIZE_MAX;
	for (size_t i = 1; i + 1 < table->count; i++) {
		const fl_oil_point *p = &table->points[i];
		fl_d341_line line;
		double predicted_m2_s = 0.0;
		status = line_between(p - 1, p + 1, &line, err);
		if (status >= 0)
			status = fl_physics_d341_at(&line, p->temp_c, &predicted_m2_s, err);
		if (status < 0)
			return status;
		double misfit = fabs(predicted_m2_s / p->nu_m2_s - 1.0);
		if (where == SIZE_MAX || misfit > worst) {
			worst = misfit;
			where = i;
		}
	}
	*relative = worst;
	*at = where;
	return FL_OK;
}

double fl_physics_density_from_15(double rho15_kg_m3, double k0, double k1, double temp_c) {
	double alpha_per_k = k0 / (rho15_kg_m3 * rho15_kg_m3) + k1 / rho15_kg_m3;
	double dt = temp_c - 15.0;
	return rho15_kg_m3 * exp(-alpha_per_k * dt * (1.0 + 0.8 * alpha_per_k * dt));
}
