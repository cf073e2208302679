/* reference/items.c - what the readings of a session are reduced with, and whether it can be.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/reference.h"

#include <math.h>

static const fl_equipment *equipment_of(const fl_session *session, const fl_stock *stock, fl_role role) {
	const char *id = fl_session_equipment_id(session, role);
	return id ? fl_stock_equipment(stock, id) : NULL;
}

static fl_status check_quantity(const fl_equipment *item, fl_quantity quantity, fl_error *err) {
	if (!item || fl_unit_quantity(item->unit) == quantity)
		return FL_OK;
	return fl_fail_at(err, FL_E_VALUE, item->place, "%s is stated in %s, which is no unit for a %s", item->id,
	                  fl_unit_text(item->unit), fl_stock_role_text(item->role));
}

/* Thermometers and baths may be stated in °C or, as a difference, in K. */
static fl_status check_thermal(const fl_equipment *item, fl_error *err) {
	if (item && fl_unit_quantity(item->unit) == FL_Q_TEMPERATURE_DIFFERENCE)
		return FL_OK;
	return check_quantity(item, FL_Q_TEMPERATURE, err);
}

static fl_status check_equipment(const fl_reference *reference, fl_error *err) {
	fl_status status = check_thermal(reference->thermometer, err);
	if (status >= 0)
		status = check_thermal(reference->bath, err);
	if (status >= 0)
		status = check_quantity(reference->standard, FL_Q_PRESSURE, err);
	if (status >= 0)
		status = check_quantity(reference->meter, fl_unit_quantity(reference->range->unit), err);
	return status;
}

double fl_reference_dp_full(const fl_instrument *instrument) {
	double dp_pa = NAN;
	if (!isnan(instrument->dp_full_pa))
		return instrument->dp_full_pa;
	if (!instrument->has_geometry || fl_stock_dp_full(instrument, &dp_pa, NULL) < 0)
		return NAN;
	return dp_pa;
}

fl_status fl_reference_of(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                          const fl_instrument *instrument, fl_reference *out, fl_error *err) {
	bool current = instrument->scale.signal == FL_SIGNAL_4_20_MA;
	fl_reference reference = {
	    .medium = procedure->medium,
	    .instrument = instrument,
	    .range = fl_physics_signal_range(instrument->scale.signal),
	    .meter = equipment_of(session, stock, current ? FL_ROLE_CURRENT_METER : FL_ROLE_PRESSURE_GAUGE),
	    .thermometer = equipment_of(session, stock, FL_ROLE_THERMOMETER),
	    .bath = equipment_of(session, stock, FL_ROLE_BATH),
	    .standard = equipment_of(session, stock, FL_ROLE_PRESSURE_STANDARD),
	    .dp_full_pa = fl_reference_dp_full(instrument),
	};
	fl_status status = fl_physics_scale_span(&instrument->scale, &reference.low_m2_s, &reference.high_m2_s, err);
	if (status >= 0)
		status = check_equipment(&reference, err);
	if (status >= 0)
		*out = reference;
	return status;
}
