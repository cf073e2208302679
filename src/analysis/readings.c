/* analysis/readings.c - each reading brought to its reference: corrected, its ideal output, its error.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Error = output minus ideal output, over the output span; positive when the instrument shows too much.
 */
#include "work.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static fl_reading_result unknown_result(const fl_reading *reading) {
	fl_reading_result result = {.reading = reading, .used = !reading->struck};
	result.applied_pa = result.output = result.output_x = NAN;
	result.ideal = (fl_ideal){NAN, NAN, NAN, NAN};
	result.error_span = result.error_dial = result.error_reading = NAN;
	return result;
}

/* The value in another unit of the same quantity; untouched where the units are one, so that no digit is lost. */
static double in_unit(double value, fl_unit from, fl_unit to) {
	return from == to ? value : fl_from_inside(fl_to_inside(value, from), to);
}

/* Indication plus the certificate's correction, in `unit`; as it is where no equipment is named. */
static double corrected(const fl_equipment *equipment, double indication, fl_unit unit) {
	if (!equipment)
		return indication;
	double own = in_unit(indication, unit, equipment->unit);
	return in_unit(fl_stock_corrected(equipment, own), equipment->unit, unit);
}

/* A thermometer's items are in °C or, where only differences matter, in K: then a correction is added as it is. */
static double corrected_temp_c(const fl_equipment *thermometer, double temp_c) {
	if (thermometer && thermometer->unit == FL_U_KELVIN)
		return fl_stock_corrected(thermometer, temp_c);
	return corrected(thermometer, temp_c, FL_U_CELSIUS);
}

static fl_status take_output(const work *w, const fl_reading *reading, fl_reading_result *out, fl_error *err) {
	if (fl_unit_quantity(reading->unit) != fl_unit_quantity(w->range->unit))
		return fl_fail(err, FL_E_VALUE, "an output in %s does not belong to a signal of %s",
		               fl_unit_text(reading->unit), w->range->text);
	double value = in_unit(corrected(w->meter, reading->output, reading->unit), reading->unit, w->range->unit);
	out->output = value;
	out->output_x = (value - w->range->low) / (w->range->high - w->range->low);
	return FL_OK;
}

/* The ideal output where the equivalent viscosity is known. A dial in seconds has no division near zero: NAN there. */
static fl_ideal ideal_of_equivalent(const work *w, double equivalent_m2_s) {
	fl_ideal ideal = {.equivalent_m2_s = equivalent_m2_s, .dial = NAN};
	ideal.x = (equivalent_m2_s - w->low_m2_s) / (w->high_m2_s - w->low_m2_s);
	ideal.output = w->range->low + ideal.x * (w->range->high - w->range->low);
	if (fl_physics_dial_at(&w->instrument->scale, ideal.x, &ideal.dial, NULL) < 0)
		ideal.dial = NAN;
	return ideal;
}

/* A differential pressure stands for the equivalent viscosity that would give it: proportional, dp_full at the upper
 * range value (Hagen-Poiseuille at the plate flow). */
static fl_status take_pressure(const work *w, const fl_reading *reading, fl_reading_result *out, fl_error *err) {
	if (!reading->has_applied)
		return fl_fail(err, FL_E_VALUE, "the injected differential pressure is missing");
	if (!(w->result->dp_full_pa > 0.0))
		return fl_fail(err, FL_E_VALUE, "the differential pressure at full scale is not known: state it for %s",
		               w->instrument->tag);
	out->applied_pa = corrected(w->standard, reading->applied_pa, FL_U_PA);
	out->ideal = ideal_of_equivalent(w, w->high_m2_s * (out->applied_pa / w->result->dp_full_pa));
	return FL_OK;
}

static fl_status take_oil(const work *w, const fl_reading *reading, fl_reading_result *out, fl_error *err) {
	const fl_oil *oil = NULL;
	fl_status status = fl_analysis_oil(w, reading->point, &oil, err);
	if (status < 0)
		return status;
	if (!reading->has_temp)
		return fl_fail(err, FL_E_VALUE, "the temperature of the oil is missing");
	status = fl_physics_oil_at(&oil->table, corrected_temp_c(w->thermometer, reading->temp_c), &out->oil, err);
	if (status >= 0)
		status = fl_physics_ideal(&w->instrument->scale, out->oil.mu_pa_s, &out->ideal, err);
	return status < 0 ? status : FL_OK;
}

static fl_status take_reference(const work *w, const fl_reading *reading, fl_reading_result *out, fl_error *err) {
	if (reading->point == FL_POINT_ZERO) {
		out->ideal = ideal_of_equivalent(w, 0.0); /* no flow, no differential pressure */
		return FL_OK;
	}
	if (w->procedure->medium == FL_MEDIUM_PRESSURE)
		return take_pressure(w, reading, out, err);
	return take_oil(w, reading, out, err);
}

static void take_errors(const work *w, fl_reading_result *out) {
	double dial = NAN;
	out->error_span = out->output_x - out->ideal.x;
	if (fl_physics_dial_at(&w->instrument->scale, out->output_x, &dial, NULL) >= 0)
		out->error_dial = dial - out->ideal.dial;
	if (out->ideal.x > FL_LOWEST_X_FOR_READING)
		out->error_reading = out->error_span / out->ideal.x;
}

static fl_status fail_at_reading(const fl_reading *reading, const fl_error *inner, fl_error *err) {
	char step[96];
	char point[24] = "stopped zero";
	if (reading->point != FL_POINT_ZERO)
		snprintf(point, sizeof point, "point %d", reading->point + 1);
	snprintf(step, sizeof step, "%s, cycle %d, %s, %s, reading %d", fl_run_word(reading->run), reading->cycle,
	         fl_pass_word(reading->pass), point, reading->number);
	return fl_fail_at(err, inner->status, (fl_place){.field = step}, "%s", inner->message);
}

/* A struck reading that gives no number stays in the record without one. */
static fl_status take_reading(const work *w, const fl_reading *reading, fl_reading_result *out, fl_error *err) {
	fl_error inner = {0};
	fl_reading_result result = unknown_result(reading);
	fl_status status = take_output(w, reading, &result, &inner);
	if (status >= 0)
		status = take_reference(w, reading, &result, &inner);
	if (status < 0 && !reading->struck)
		return fail_at_reading(reading, &inner, err);
	if (status >= 0)
		take_errors(w, &result);
	*out = result;
	return FL_OK;
}

fl_status fl_analysis_readings(const work *w, fl_run_kind kind, fl_run_result *run, fl_error *err) {
	run->readings = fl_arena_alloc(w->arena, w->session->reading_count + 1, sizeof *run->readings);
	if (!run->readings)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu readings", w->session->reading_count);
	for (size_t i = 0; i < w->session->reading_count; i++) {
		const fl_reading *reading = &w->session->readings[i];
		if (reading->run != kind || reading->watched || reading->undone)
			continue;
		fl_status status = take_reading(w, reading, &run->readings[run->reading_count], err);
		if (status < 0)
			return status;
		run->reading_count++;
		run->struck_count += reading->struck;
	}
	return FL_OK;
}

fl_status fl_analysis_oil(const work *w, int point, const fl_oil **oil, fl_error *err) {
	*oil = NULL;
	if (point == FL_POINT_ZERO || w->procedure->medium == FL_MEDIUM_PRESSURE)
		return FL_OK;
	if (point < 0 || (size_t)point >= w->session->point_count)
		return fl_fail(err, FL_E_VALUE, "point %d has no oil", point + 1);
	const char *lot = w->session->points[point].lot;
	*oil = fl_stock_oil(w->stock, lot);
	if (!*oil)
		return fl_fail(err, FL_E_NOT_FOUND, "lot %s is not among the oils of the session", lot);
	return FL_OK;
}
