/* reference/reading.c - one reading: corrected, its ideal output, its error.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/reference.h"

#include <math.h>

/* ---- corrected ---- */

double fl_reference_in_unit(double value, fl_unit from, fl_unit to) {
	return from == to ? value : fl_from_inside(fl_to_inside(value, from), to);
}

double fl_reference_corrected(const fl_equipment *item, double indication, fl_unit unit) {
	if (!item)
		return indication;
	double own = fl_reference_in_unit(indication, unit, item->unit);
	double right = fl_stock_corrected(item, own);
	return right == own ? indication : fl_reference_in_unit(right, item->unit, unit);
}

double fl_reference_corrected_temp_c(const fl_equipment *thermometer, double temp_c) {
	if (thermometer && thermometer->unit == FL_U_KELVIN)
		return fl_stock_corrected(thermometer, temp_c); /* a difference is added as it is */
	return fl_reference_corrected(thermometer, temp_c, FL_U_CELSIUS);
}

/* ---- pressure and scale ---- */

static double x_of_equivalent(const fl_reference *reference, double equivalent_m2_s) {
	return (equivalent_m2_s - reference->low_m2_s) / (reference->high_m2_s - reference->low_m2_s);
}

static double equivalent_of_pressure(const fl_reference *reference, double dp_pa) {
	return reference->dp_full_pa > 0.0 ? reference->high_m2_s * (dp_pa / reference->dp_full_pa) : NAN;
}

double fl_reference_x_of_pressure(const fl_reference *reference, double dp_pa) {
	return x_of_equivalent(reference, equivalent_of_pressure(reference, dp_pa));
}

double fl_reference_pressure_at(const fl_reference *reference, double x) {
	double equivalent_m2_s = reference->low_m2_s + x * (reference->high_m2_s - reference->low_m2_s);
	return reference->dp_full_pa > 0.0 ? reference->dp_full_pa * (equivalent_m2_s / reference->high_m2_s) : NAN;
}

/* The ideal output where the equivalent viscosity is known. A dial in seconds has no division near zero: NAN there. */
static fl_ideal ideal_of_equivalent(const fl_reference *reference, double equivalent_m2_s) {
	const fl_signal_range *range = reference->range;
	fl_ideal ideal = {.equivalent_m2_s = equivalent_m2_s, .dial = NAN};
	ideal.x = x_of_equivalent(reference, equivalent_m2_s);
	ideal.output = range->low + ideal.x * (range->high - range->low);
	if (fl_physics_dial_at(&reference->instrument->scale, ideal.x, &ideal.dial, NULL) < 0)
		ideal.dial = NAN;
	return ideal;
}

/* ---- the reading ---- */

static fl_reading_result unknown_result(const fl_reading *reading) {
	fl_reading_result result = {.reading = reading, .used = !reading->struck};
	result.applied_pa = result.output = result.output_x = NAN;
	result.ideal = (fl_ideal){NAN, NAN, NAN, NAN};
	result.error_span = result.error_dial = result.error_reading = NAN;
	return result;
}

static fl_status take_output(const fl_reference *reference, const fl_reading *reading, fl_reading_result *out,
                             fl_error *err) {
	const fl_signal_range *range = reference->range;
	if (fl_unit_quantity(reading->unit) != fl_unit_quantity(range->unit))
		return fl_fail(err, FL_E_VALUE, "an output in %s does not belong to a signal of %s",
		               fl_unit_text(reading->unit), range->text);
	double value = fl_reference_corrected(reference->meter, reading->output, reading->unit);
	out->output = fl_reference_in_unit(value, reading->unit, range->unit);
	out->output_x = (out->output - range->low) / (range->high - range->low);
	return FL_OK;
}

static fl_status take_pressure(const fl_reference *reference, const fl_reading *reading, fl_reading_result *out,
                               fl_error *err) {
	if (!reading->has_applied)
		return fl_fail(err, FL_E_VALUE, "the injected differential pressure is missing");
	if (!(reference->dp_full_pa > 0.0))
		return fl_fail(err, FL_E_VALUE, "the differential pressure at full scale is not known: state it for %s",
		               reference->instrument->tag);
	out->applied_pa = fl_reference_corrected(reference->standard, reading->applied_pa, FL_U_PA);
	out->ideal = ideal_of_equivalent(reference, equivalent_of_pressure(reference, out->applied_pa));
	return FL_OK;
}

static fl_status take_oil(const fl_reference *reference, const fl_oil *oil, const fl_reading *reading,
                          fl_reading_result *out, fl_error *err) {
	if (!oil)
		return fl_fail(err, FL_E_VALUE, "the oil is not known");
	if (!reading->has_temp)
		return fl_fail(err, FL_E_VALUE, "the temperature of the oil is missing");
	double temp_c = fl_reference_corrected_temp_c(reference->thermometer, reading->temp_c);
	fl_status status = fl_physics_oil_at(&oil->table, temp_c, &out->oil, err);
	if (status >= 0)
		status = fl_physics_ideal(&reference->instrument->scale, out->oil.mu_pa_s, &out->ideal, err);
	return status < 0 ? status : FL_OK; /* a little outside the certified span shows in oil.outside_k */
}

static fl_status take_reference(const fl_reference *reference, const fl_oil *oil, const fl_reading *reading,
                                fl_reading_result *out, fl_error *err) {
	if (reading->point == FL_POINT_ZERO) {
		out->ideal = ideal_of_equivalent(reference, 0.0); /* no flow, no differential pressure */
		return FL_OK;
	}
	if (reference->medium == FL_MEDIUM_PRESSURE)
		return take_pressure(reference, reading, out, err);
	return take_oil(reference, oil, reading, out, err);
}

static void take_errors(const fl_reference *reference, fl_reading_result *out) {
	double dial = NAN;
	out->error_span = out->output_x - out->ideal.x;
	if (fl_physics_dial_at(&reference->instrument->scale, out->output_x, &dial, NULL) >= 0)
		out->error_dial = dial - out->ideal.dial;
	if (out->ideal.x > FL_LOWEST_X_FOR_READING)
		out->error_reading = out->error_span / out->ideal.x;
}

fl_status fl_reference_reading(const fl_reference *reference, const fl_oil *oil, const fl_reading *reading,
                               fl_reading_result *out, fl_error *err) {
	*out = unknown_result(reading);
	fl_status status = take_output(reference, reading, out, err);
	if (status >= 0)
		status = take_reference(reference, oil, reading, out, err);
	if (status >= 0)
		take_errors(reference, out);
	return status;
}
