/* physics/scale.c - what the dial says and the signal that goes with it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A capillary senses dynamic viscosity. A dial in mm2/s or in seconds therefore assumes a density: what it shows for
 * an oil is the equivalent viscosity mu / dial density, not the oil's own kinematic viscosity.
 */
#include "foundleft/physics.h"

#include <math.h>

/* Current: IEC 60381-1, NAMUR NE 43. Pneumatic: IEC 60382 and the trade's 3 to 15 psi, which are not the same signal
 * (0.2 bar is 2.9008 psi). Their measuring limits are 2.5 % of span beyond; their failure limits, half the live zero
 * (air lost) and a quarter of span above full scale (nozzle shut), are common practice, no source. */
static const fl_signal_range ranges[FL_SIGNAL_COUNT] = {
    [FL_SIGNAL_4_20_MA] = {"4–20 mA", FL_U_MA, 4.0, 20.0, 3.8, 20.5, 3.6, 21.0},
    [FL_SIGNAL_02_1_BAR] = {"0.2–1.0 bar", FL_U_BAR, 0.2, 1.0, 0.18, 1.02, 0.1, 1.2},
    [FL_SIGNAL_3_15_PSI] = {"3–15 psi", FL_U_PSI, 3.0, 15.0, 2.7, 15.3, 1.5, 18.0},
};

const fl_signal_range *fl_physics_signal_range(fl_signal signal) {
	return &ranges[signal];
}

fl_signal_state fl_physics_signal_state(fl_signal signal, double value) {
	const fl_signal_range *range = fl_physics_signal_range(signal);
	if (value >= range->measuring_low && value <= range->measuring_high)
		return FL_SIGNAL_MEASURING;
	if (value >= range->failure_low && value <= range->failure_high)
		return FL_SIGNAL_SATURATED;
	return FL_SIGNAL_FAILURE;
}

fl_unit fl_physics_dial_unit(fl_dial_unit unit) {
	switch (unit) {
	case FL_DIAL_MM2_S:
		return FL_U_MM2_S;
	case FL_DIAL_MPA_S:
		return FL_U_MPA_S;
	case FL_DIAL_REDWOOD:
		return FL_U_REDWOOD_S;
	case FL_DIAL_SAYBOLT:
		return FL_U_SAYBOLT_S;
	}
	return FL_U_NONE;
}

/* Density between equivalent and dynamic viscosity. A dial in mPa.s needs none: 1000 kg/m3 makes mPa.s and mm2/s the
 * same number. */
static fl_status dial_density(const fl_scale *scale, double *rho_kg_m3, fl_error *err) {
	if (scale->dial_unit == FL_DIAL_MPA_S) {
		*rho_kg_m3 = 1000.0;
		return FL_OK;
	}
	if (!(scale->dial_density_kg_m3 > 0.0) || !isfinite(scale->dial_density_kg_m3))
		return fl_fail(err, FL_E_RANGE, "a dial in %s assumes a density, and it must be given in kg/m³",
		               fl_unit_text(fl_physics_dial_unit(scale->dial_unit)));
	*rho_kg_m3 = scale->dial_density_kg_m3;
	return FL_OK;
}

static fl_status dial_to_equivalent(const fl_scale *scale, double dial, double *equivalent_m2_s, fl_error *err) {
	switch (scale->dial_unit) {
	case FL_DIAL_REDWOOD:
		return fl_physics_redwood_to_nu(dial, equivalent_m2_s, err);
	case FL_DIAL_SAYBOLT:
		return fl_physics_saybolt_to_nu(dial, scale->saybolt_temp_c, equivalent_m2_s, err);
	case FL_DIAL_MM2_S:
	case FL_DIAL_MPA_S:
		break;
	}
	*equivalent_m2_s = dial * 1e-6;
	return FL_OK;
}

static fl_status equivalent_to_dial(const fl_scale *scale, double equivalent_m2_s, double *dial, fl_error *err) {
	switch (scale->dial_unit) {
	case FL_DIAL_REDWOOD:
		return fl_physics_nu_to_redwood(equivalent_m2_s, dial, err);
	case FL_DIAL_SAYBOLT:
		return fl_physics_nu_to_saybolt(equivalent_m2_s, scale->saybolt_temp_c, dial, err);
	case FL_DIAL_MM2_S:
	case FL_DIAL_MPA_S:
		break;
	}
	*dial = equivalent_m2_s / 1e-6;
	return FL_OK;
}

fl_status fl_physics_scale_span(const fl_scale *scale, double *low_m2_s, double *high_m2_s, fl_error *err) {
	double low = 0.0, high = 0.0;
	if (!(scale->low >= 0.0) || !(scale->high > scale->low) || !isfinite(scale->high))
		return fl_fail(err, FL_E_RANGE, "a scale from %g to %g %s: the upper range value must be above the lower",
		               scale->low, scale->high, fl_unit_text(fl_physics_dial_unit(scale->dial_unit)));
	fl_status status = dial_to_equivalent(scale, scale->low, &low, err);
	if (status >= 0)
		status = dial_to_equivalent(scale, scale->high, &high, err);
	if (status < 0)
		return status;
	*low_m2_s = low;
	*high_m2_s = high;
	return FL_OK;
}

fl_status fl_physics_ideal(const fl_scale *scale, double mu_pa_s, fl_ideal *out, fl_error *err) {
	double low_m2_s = 0.0, high_m2_s = 0.0, rho_kg_m3 = 0.0;
	if (!(mu_pa_s >= 0.0) || !isfinite(mu_pa_s))
		return fl_fail(err, FL_E_RANGE, "a dynamic viscosity of %g mPa·s is not possible", mu_pa_s * 1e3);
	fl_status status = fl_physics_scale_span(scale, &low_m2_s, &high_m2_s, err);
	if (status >= 0)
		status = dial_density(scale, &rho_kg_m3, err);
	if (status < 0)
		return status;
	const fl_signal_range *range = fl_physics_signal_range(scale->signal);
	fl_ideal ideal = {.equivalent_m2_s = mu_pa_s / rho_kg_m3};
	ideal.x = (ideal.equivalent_m2_s - low_m2_s) / (high_m2_s - low_m2_s);
	ideal.output = range->low + ideal.x * (range->high - range->low);
	status = equivalent_to_dial(scale, ideal.equivalent_m2_s, &ideal.dial, err);
	if (status >= 0)
		*out = ideal;
	return status;
}

fl_status fl_physics_dial_at(const fl_scale *scale, double x, double *dial, fl_error *err) {
	double low_m2_s = 0.0, high_m2_s = 0.0;
	fl_status status = fl_physics_scale_span(scale, &low_m2_s, &high_m2_s, err);
	if (status < 0)
		return status;
	if (!isfinite(x))
		return fl_fail(err, FL_E_RANGE, "the output fraction must be a number");
	return equivalent_to_dial(scale, low_m2_s + x * (high_m2_s - low_m2_s), dial, err);
}
