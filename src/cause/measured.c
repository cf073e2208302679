/* cause/measured.c - the extra measurements of a session, corrected, with their uncertainties.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "cause_private.h"

#include <string.h>

/* Where nothing is named that it was measured with; common practice, no source. */
static const double usual_rel = 0.005, usual_density_kg_m3 = 1.0, usual_temp_k = 0.05, usual_start_stop_s = 0.3;
/* An injection is never better than this: where the pressure stands in the line is not known better. */
static const double least_injection_u_span = 0.0002;

double fl_cause_equipment_u(const fl_equipment *item, fl_day day, fl_quantity quantity) {
	if (!item || !(item->k > 0.0) || fl_unit_quantity(item->unit) != quantity)
		return NAN;
	fl_equipment_u parts = fl_stock_equipment_u(item, day);
	double u = sqrt(parts.certificate * parts.certificate + parts.drift_half_width * parts.drift_half_width / 3.0 +
	                parts.resolution_half_width * parts.resolution_half_width / 3.0);
	return fl_to_inside(u, item->unit) - fl_to_inside(0.0, item->unit);
}

static const fl_equipment *named(const fl_measurement *m, const fl_stock *stock) {
	return m->equipment ? fl_stock_equipment(stock, m->equipment) : NULL;
}

static const fl_equipment *in_use(const fl_session *session, const fl_stock *stock, fl_role role) {
	const char *id = fl_session_equipment_id(session, role);
	return id ? fl_stock_equipment(stock, id) : NULL;
}

/* Value with the correction of the item, inside unit. */
static double corrected(const fl_equipment *item, double value, fl_unit unit) {
	bool fits = item && fl_unit_quantity(item->unit) == fl_unit_quantity(unit);
	return fl_to_inside(fits ? fl_reference_corrected(item, value, unit) : value, unit);
}

/* ---- injections ---- */

static double injection_u(const fl_session *session, const fl_instrument *instrument, const fl_equipment *standard,
                          const fl_equipment *meter, const fl_signal_range *range) {
	double u_dp = fl_cause_equipment_u(standard, session->day, FL_Q_PRESSURE);
	double u_out = fl_cause_equipment_u(meter, session->day, fl_unit_quantity(range->unit));
	double span = fl_to_inside(range->high, range->unit) - fl_to_inside(range->low, range->unit);
	double full = fl_reference_dp_full(instrument);
	if (isnan(u_dp) || isnan(u_out) || !(full > 0.0))
		return NAN;
	return fmax(sqrt(u_dp * u_dp / (full * full) + u_out * u_out / (span * span)), least_injection_u_span);
}

static bool counts(const fl_measurement *m, fl_measure what, fl_run_kind run) {
	bool of_both = what == FL_MEASURE_DENSITY || what == FL_MEASURE_SPANNED;
	return !m->undone && m->what == what && (of_both || m->run == run);
}

static fl_status take_injections(const fl_session *session, const fl_instrument *instrument, const fl_stock *stock,
                                 fl_run_kind run, fl_arena *arena, fl_cause_extra *extra, fl_error *err) {
	const fl_signal_range *range = fl_physics_signal_range(instrument->scale.signal);
	const fl_equipment *meter =
	    in_use(session, stock, range->unit == FL_U_MA ? FL_ROLE_CURRENT_METER : FL_ROLE_PRESSURE_GAUGE);
	fl_cause_injection *list = fl_arena_alloc(arena, session->measurement_count + 1, sizeof *list);
	size_t count = 0;
	if (!list)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the injected pressures");
	for (size_t i = 0; i < session->measurement_count; i++) {
		const fl_measurement *m = &session->measurements[i];
		if (!counts(m, FL_MEASURE_INJECTION, run))
			continue;
		const fl_equipment *standard = named(m, stock);
		double output = fl_from_inside(corrected(meter, m->value, m->unit), range->unit);
		double u = injection_u(session, instrument, standard, meter, range);
		list[count++] = (fl_cause_injection){
		    .dp_pa = corrected(standard, fl_from_inside(m->applied_pa, m->applied_unit), m->applied_unit),
		    .output = output};
		/* The one that is known least speaks for all. */
		extra->injection_u_span =
		    isnan(u) ? 0.0005 : fmax(u, isnan(extra->injection_u_span) ? 0.0 : extra->injection_u_span);
	}
	if (count) {
		extra->injections = list;
		extra->injection_count = count;
	}
	return FL_OK;
}

/* ---- the others ---- */

static const fl_measurement *last_of(const fl_session *session, fl_measure what, fl_run_kind run) {
	for (size_t i = session->measurement_count; i-- > 0;)
		if (counts(&session->measurements[i], what, run))
			return &session->measurements[i];
	return NULL;
}

static void take_speed(const fl_session *session, const fl_stock *stock, const fl_measurement *m,
                       fl_cause_extra *extra) {
	double u = fl_cause_equipment_u(named(m, stock), session->day, FL_Q_ROTATION);
	extra->pump_speed_rev_s = corrected(named(m, stock), m->value, m->unit);
	extra->u_pump_speed_rev_s =
	    isnan(u) ? usual_rel * extra->pump_speed_rev_s : fmax(u, 1e-4 * extra->pump_speed_rev_s);
}

/* The volume is read off a vessel; starting and stopping the watch takes its share. */
static void take_flow(const fl_measurement *m, fl_cause_extra *extra) {
	double time_rel = usual_start_stop_s / m->over_s;
	extra->flow_m3_s = fl_to_inside(m->value, m->unit) / m->over_s;
	extra->u_flow_m3_s = extra->flow_m3_s * sqrt(usual_rel * usual_rel + time_rel * time_rel);
}

static void take_temperature(const fl_session *session, const fl_stock *stock, const fl_measurement *m,
                             fl_cause_extra *extra) {
	const fl_equipment *second = named(m, stock), *first = in_use(session, stock, FL_ROLE_THERMOMETER);
	double second_c = fl_to_inside(m->value, m->unit);
	double u1 = fl_cause_equipment_u(first, session->day, FL_Q_TEMPERATURE);
	double u2 = fl_cause_equipment_u(second, session->day, FL_Q_TEMPERATURE);
	extra->temp_difference_k =
	    fl_reference_corrected_temp_c(second, second_c) - fl_reference_corrected_temp_c(first, m->temp_c);
	extra->u_temp_difference = isnan(u1) || isnan(u2) ? usual_temp_k : fmax(sqrt(u1 * u1 + u2 * u2), 0.005);
}

fl_status fl_cause_extra_measured(const fl_session *session, const fl_instrument *instrument, const fl_stock *stock,
                                  fl_run_kind run, fl_arena *arena, fl_cause_extra *extra, fl_error *err) {
	const fl_measurement *speed = last_of(session, FL_MEASURE_SPEED, run);
	const fl_measurement *volume = last_of(session, FL_MEASURE_VOLUME, run);
	const fl_measurement *density = last_of(session, FL_MEASURE_DENSITY, run);
	const fl_measurement *temperature = last_of(session, FL_MEASURE_TEMPERATURE, run);
	const fl_measurement *spanned = last_of(session, FL_MEASURE_SPANNED, run);
	if (extra->injection_count == 0 && session->measurement_count > 0)
		TRY(take_injections(session, instrument, stock, run, arena, extra, err));
	if (speed && isnan(extra->pump_speed_rev_s) && instrument->has_geometry)
		take_speed(session, stock, speed, extra);
	if (volume && isnan(extra->flow_m3_s) && instrument->has_geometry)
		take_flow(volume, extra);
	if (density && isnan(extra->dial_density_kg_m3)) {
		extra->dial_density_kg_m3 = fl_to_inside(density->value, density->unit);
		extra->u_dial_density = usual_density_kg_m3;
	}
	if (temperature && isnan(extra->temp_difference_k))
		take_temperature(session, stock, temperature, extra);
	if (spanned && isnan(extra->gain_since_cleaning))
		extra->gain_since_cleaning = fl_to_inside(spanned->value, spanned->unit);
	return FL_OK;
}
