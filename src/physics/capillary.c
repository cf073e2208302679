/* physics/capillary.c - laminar flow through the capillary: Hagen-Poiseuille with end and kinetic corrections.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/physics.h"

#include <math.h>

static const double pi = 3.14159265358979323846;
static const double oil_heat_capacity_j_kg_k = 2000.0;

static bool positive(double value) {
	return value > 0.0 && isfinite(value);
}

static fl_status check_capillary(const fl_capillary *c, double mu_pa_s, double rho_kg_m3, fl_error *err) {
	if (!positive(c->bore_m) || !positive(c->length_m))
		return fl_fail(err, FL_E_RANGE, "a capillary of bore %g mm and length %g mm: both must be above zero",
		               c->bore_m * 1e3, c->length_m * 1e3);
	if (!positive(c->displacement_m3_rev * c->pump_speed_rev_s * (1.0 - c->slip_fraction)) ||
	    !positive(c->displacement_m3_rev) || !(c->slip_fraction >= 0.0))
		return fl_fail(err, FL_E_RANGE,
		               "%g cm³/rev at %g r/min with slip %g: the pump must deliver, and slip is a fraction from 0 to 1",
		               c->displacement_m3_rev * 1e6, c->pump_speed_rev_s * 60.0, c->slip_fraction);
	if (!(c->end_coefficient >= 0.0) || !(c->kinetic_coefficient >= 0.0))
		return fl_fail(err, FL_E_RANGE, "end and kinetic coefficient must not be negative");
	if (!positive(mu_pa_s) || !positive(rho_kg_m3))
		return fl_fail(err, FL_E_RANGE, "%g mPa·s and %g kg/m³: viscosity and density must be above zero",
		               mu_pa_s * 1e3, rho_kg_m3);
	return FL_OK;
}

static double fourth_power(double v) {
	return v * v * v * v;
}

/* Pressure drop of a tube per metre of length: 128 mu Q / (pi d^4). */
static double poiseuille_pa_per_m(double bore_m, double mu_pa_s, double flow_m3_s) {
	return 128.0 * mu_pa_s * flow_m3_s / (pi * fourth_power(bore_m));
}

fl_status fl_physics_capillary(const fl_capillary *capillary, double mu_pa_s, double rho_kg_m3, fl_flow *out,
                               fl_error *err) {
	fl_status status = check_capillary(capillary, mu_pa_s, rho_kg_m3, err);
	if (status < 0)
		return status;
	double d = capillary->bore_m;
	fl_flow flow = {0};
	flow.flow_m3_s = capillary->displacement_m3_rev * capillary->pump_speed_rev_s * (1.0 - capillary->slip_fraction);
	flow.velocity_m_s = 4.0 * flow.flow_m3_s / (pi * d * d);
	flow.reynolds = rho_kg_m3 * flow.velocity_m_s * d / mu_pa_s;
	flow.entrance_m = 0.06 * flow.reynolds * d;
	double per_m = poiseuille_pa_per_m(d, mu_pa_s, flow.flow_m3_s);
	flow.dp_poiseuille_pa = per_m * capillary->length_m;
	flow.dp_end_pa = per_m * capillary->end_coefficient * d / 2.0;
	flow.dp_kinetic_pa = capillary->kinetic_coefficient * rho_kg_m3 * flow.velocity_m_s * flow.velocity_m_s;
	flow.dp_total_pa = flow.dp_poiseuille_pa + flow.dp_end_pa + flow.dp_kinetic_pa;
	flow.wall_shear_per_s = 8.0 * flow.velocity_m_s / d;
	flow.heating_k = flow.dp_total_pa / (rho_kg_m3 * oil_heat_capacity_j_kg_k);
	*out = flow;
	return FL_OK;
}

double fl_physics_poiseuille_mu(double bore_m, double dp_per_m_pa, double flow_m3_s) {
	return pi * fourth_power(bore_m) * dp_per_m_pa / (128.0 * flow_m3_s);
}

double fl_physics_bore_loss(double gain) {
	return 1.0 - pow(1.0 + gain, -0.25);
}
