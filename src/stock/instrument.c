/* instrument.c - an instrument that the bench looks after: its plate, scale, geometry, limits.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "read.h"

static const char *const fields[] = {"tag",
                                     "since",
                                     "serial",
                                     "site",
                                     "owner",
                                     "position",
                                     "maker plate",
                                     "dial",
                                     "dial density",
                                     "dial temperature",
                                     "signal",
                                     "geometry",
                                     "full-scale pressure",
                                     "supply",
                                     "motor speed",
                                     "gear ratio",
                                     "tolerance",
                                     "tolerance zones",
                                     "adjust limit",
                                     "hysteresis limit",
                                     "set point",
                                     "set point tolerance",
                                     "alarm low",
                                     "alarm high",
                                     "calibration interval",
                                     NULL};

/* ---- plate and scale ------------------------------------------------------------------------------------------------
 */

static fl_status read_plate(const fl_node *map, fl_instrument *item, fl_error *err) {
	item->site = item->owner = item->position = item->maker_plate = "";
	TRY(fl_node_text(map, "tag", true, &item->tag, err));
	TRY(fl_node_text(map, "serial", true, &item->serial, err));
	item->since = FL_NO_DAY;
	TRY(fl_node_day(map, "since", false, &item->since, err));
	TRY(fl_node_text(map, "site", false, &item->site, err));
	TRY(fl_node_text(map, "owner", false, &item->owner, err));
	TRY(fl_node_text(map, "position", false, &item->position, err));
	return fl_node_text(map, "maker plate", false, &item->maker_plate, err);
}

static fl_status read_dial(const fl_node *map, fl_scale *scale, fl_error *err) {
	fl_unit unit = FL_U_NONE;
	TRY(fl_node_span(map, "dial", true, FL_Q_NONE, false, &scale->low, &scale->high, &unit, err));
	for (int dial = FL_DIAL_MM2_S; dial <= FL_DIAL_SAYBOLT; dial++)
		if (fl_physics_dial_unit((fl_dial_unit)dial) == unit) {
			scale->dial_unit = (fl_dial_unit)dial;
			return FL_OK;
		}
	return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "dial"),
	                  "a dial is divided in mm²/s, mPa·s, s Redwood No. 1 or s Saybolt Universal: write one of them");
}

static fl_status read_dial_density(const fl_node *map, fl_scale *scale, fl_error *err) {
	bool needed = scale->dial_unit != FL_DIAL_MPA_S;
	if (needed && !fl_node_get(map, "dial density"))
		return fl_stock_missing(
		    map, "dial density",
		    "missing: the capillary feels mPa·s, so a dial in mm²/s or seconds is right for one density "
		    "only; write it as maker or plate state it, such as 900 kg/m³",
		    err);
	TRY(fl_stock_read_positive(map, "dial density", needed, FL_Q_DENSITY, &scale->dial_density_kg_m3, err));
	bool saybolt = scale->dial_unit == FL_DIAL_SAYBOLT;
	return fl_node_amount_within(map, "dial temperature", saybolt, FL_Q_TEMPERATURE, 0.0, 200.0, &scale->saybolt_temp_c,
	                             NULL, err);
}

/* Hyphen or dash between the two numbers. */
static fl_status read_signal(const fl_node *map, fl_scale *scale, fl_error *err) {
	static const char *const words[] = {"4-20 mA", "0.2-1.0 bar", "3-15 psi"};
	const char *text = NULL;
	TRY(fl_node_text(map, "signal", true, &text, err));
	for (int signal = 0; signal < FL_SIGNAL_COUNT; signal++)
		if (strcmp(text, words[signal]) == 0 || strcmp(text, fl_physics_signal_range((fl_signal)signal)->text) == 0) {
			scale->signal = (fl_signal)signal;
			return FL_OK;
		}
	return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "signal"),
	                  "\"%.60s\" is not possible here: write %s, %s or %s", text, words[0], words[1], words[2]);
}

static fl_status read_scale(const fl_node *map, fl_scale *scale, fl_error *err) {
	double low_m2_s, high_m2_s;
	fl_error inner = {0};
	TRY(read_dial(map, scale, err));
	TRY(read_dial_density(map, scale, err));
	TRY(read_signal(map, scale, err));
	fl_status status = fl_physics_scale_span(scale, &low_m2_s, &high_m2_s, &inner);
	if (status < 0)
		return fl_fail_at(err, status, fl_stock_place(map, "dial"), "%s", inner.message);
	return FL_OK;
}

/* ---- geometry and drive -------------------------------------------------------------------------------------------
 */

static fl_status read_geometry(const fl_node *geometry, fl_capillary *c, fl_error *err) {
	static const char *const known[] = {
	    "bore", "length", "pump", "pump speed", "slip", "end coefficient", "kinetic coefficient", NULL};
	TRY(fl_node_only(geometry, known, err));
	TRY(fl_stock_read_positive(geometry, "bore", true, FL_Q_LENGTH, &c->bore_m, err));
	TRY(fl_stock_read_positive(geometry, "length", true, FL_Q_LENGTH, &c->length_m, err));
	TRY(fl_stock_read_positive(geometry, "pump", true, FL_Q_VOLUME_PER_REV, &c->displacement_m3_rev, err));
	TRY(fl_stock_read_positive(geometry, "pump speed", true, FL_Q_ROTATION, &c->pump_speed_rev_s, err));
	c->slip_fraction = 0.005;
	c->end_coefficient = 1.1780972450961724; /* 3 pi / 8 */
	c->kinetic_coefficient = 1.12;
	TRY(fl_node_amount_within(geometry, "slip", false, FL_Q_RATIO, 0.0, 0.5, &c->slip_fraction, NULL, err));
	TRY(fl_node_number(geometry, "end coefficient", false, 0.0, 3.0, &c->end_coefficient, err));
	return fl_node_number(geometry, "kinetic coefficient", false, 0.0, 3.0, &c->kinetic_coefficient, err);
}

/* Beyond these no marine sensor is built; common practice, no source. Read after the plausibility of the whole, which
 * names the slip better than a range can. */
static fl_status check_possible(const fl_node *map, const fl_node *geometry, fl_error *err) {
	double ignored;
	TRY(fl_node_amount_within(map, "dial density", false, FL_Q_DENSITY, 600.0, 1100.0, &ignored, NULL, err));
	if (!geometry)
		return FL_OK;
	TRY(fl_node_amount_within(geometry, "bore", true, FL_Q_LENGTH, 0.3e-3, 15e-3, &ignored, NULL, err));
	TRY(fl_node_amount_within(geometry, "length", true, FL_Q_LENGTH, 20e-3, 5.0, &ignored, NULL, err));
	TRY(fl_node_amount_within(geometry, "pump", true, FL_Q_VOLUME_PER_REV, 0.05e-6, 100e-6, &ignored, NULL, err));
	return fl_node_amount_within(geometry, "pump speed", true, FL_Q_ROTATION, 5.0 / 60.0, 600.0 / 60.0, &ignored, NULL,
	                             err);
}

static fl_status check_gear(const fl_node *geometry, const fl_instrument *item, fl_error *err) {
	if (!geometry || isnan(item->gear_ratio) || isnan(item->motor_speed_rev_s))
		return FL_OK;
	double geared_rev_s = item->motor_speed_rev_s / item->gear_ratio;
	if (fabs(geared_rev_s / item->capillary.pump_speed_rev_s - 1.0) <= 0.01)
		return FL_OK;
	return fl_fail_at(
	    err, FL_E_VALUE, fl_stock_place(geometry, "pump speed"),
	    "motor %.5g r/min over gear %.5g gives %.4g r/min at the pump, not %.4g r/min: compare the three with "
	    "the plates",
	    item->motor_speed_rev_s * 60.0, item->gear_ratio, geared_rev_s * 60.0, item->capillary.pump_speed_rev_s * 60.0);
}

static fl_status read_drive(const fl_node *map, fl_instrument *item, fl_error *err) {
	item->supply_hz = item->motor_speed_rev_s = item->gear_ratio = NAN;
	TRY(fl_node_amount_within(map, "supply", false, FL_Q_FREQUENCY, 45.0, 65.0, &item->supply_hz, NULL, err));
	TRY(fl_node_amount_within(map, "motor speed", false, FL_Q_ROTATION, 1.0, 100.0, &item->motor_speed_rev_s, NULL,
	                          err));
	return fl_node_number(map, "gear ratio", false, 0.1, 1000.0, &item->gear_ratio, err);
}

static fl_status read_hydraulics(const fl_node *map, fl_instrument *item, fl_error *err) {
	const fl_node *geometry = fl_node_get(map, "geometry");
	TRY(read_drive(map, item, err));
	item->dp_full_pa = NAN;
	TRY(fl_stock_read_positive(map, "full-scale pressure", false, FL_Q_PRESSURE, &item->dp_full_pa, err));
	if (geometry)
		TRY(read_geometry(geometry, &item->capillary, err));
	item->has_geometry = geometry != NULL;
	if (geometry && !isnan(item->dp_full_pa))
		TRY(fl_stock_check_geometry(map, geometry, item, err));
	TRY(check_possible(map, geometry, err));
	return check_gear(geometry, item, err);
}

/* ---- limits and the plant -------------------------------------------------------------------------------------------
 */

/* Place of a dial value on the scale, % of span; NAN where the dial has none. */
static double pct_of_dial(const void *context, double dial) {
	const fl_scale *scale = context;
	double low_m2_s, high_m2_s, at_m2_s = dial * 1e-6;
	fl_status status = fl_physics_scale_span(scale, &low_m2_s, &high_m2_s, NULL);
	if (status >= 0 && scale->dial_unit == FL_DIAL_REDWOOD)
		status = fl_physics_redwood_to_nu(dial, &at_m2_s, NULL);
	if (status >= 0 && scale->dial_unit == FL_DIAL_SAYBOLT)
		status = fl_physics_saybolt_to_nu(dial, scale->saybolt_temp_c, &at_m2_s, NULL);
	return status < 0 ? NAN : 100.0 * (at_m2_s - low_m2_s) / (high_m2_s - low_m2_s);
}

static fl_status read_limits(fl_arena *arena, const fl_node *map, fl_instrument *item, fl_error *err) {
	fl_unit dial = fl_physics_dial_unit(item->scale.dial_unit);
	fl_band hysteresis = {FL_BAND_NONE, 0.0};
	TRY(fl_procedure_band(map, "tolerance", false, dial, &item->tolerance, err));
	TRY(fl_procedure_zones(arena, map, "tolerance zones", dial, pct_of_dial, &item->scale, &item->zones,
	                       &item->zone_count, err));
	TRY(fl_procedure_band(map, "adjust limit", false, dial, &item->adjust_limit, err));
	TRY(fl_procedure_band(map, "hysteresis limit", false, dial, &hysteresis, err));
	item->hysteresis_limit_pct_span = hysteresis.basis == FL_BAND_PERCENT_SPAN ? hysteresis.half_width : NAN;
	if (hysteresis.basis != FL_BAND_NONE && hysteresis.basis != FL_BAND_PERCENT_SPAN)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "hysteresis limit"), "write this limit in %% of span");
	if (item->adjust_limit.basis == item->tolerance.basis && item->adjust_limit.half_width > item->tolerance.half_width)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "adjust limit"),
		                  "%g is wider than the tolerance, %g: the instrument would be left alone out of tolerance",
		                  item->adjust_limit.half_width, item->tolerance.half_width);
	return FL_OK;
}

/* A value on the dial, in its unit. */
static fl_status read_dial_value(const fl_node *map, const char *key, const fl_instrument *item, bool on_scale,
                                 double *out, fl_error *err) {
	fl_unit dial = fl_physics_dial_unit(item->scale.dial_unit);
	double inside = NAN;
	*out = NAN;
	TRY(fl_node_amount(map, key, false, fl_unit_quantity(dial), &inside, NULL, err));
	if (isnan(inside))
		return FL_OK;
	*out = fl_from_inside(inside, dial);
	if (on_scale && (*out < item->scale.low || *out > item->scale.high))
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(map, key), "%.60s is not on the dial, %g to %g %s",
		                  fl_node_get(map, key)->text, item->scale.low, item->scale.high, fl_unit_text(dial));
	return FL_OK;
}

static fl_status read_plant(const fl_node *map, fl_instrument *item, fl_error *err) {
	TRY(read_dial_value(map, "set point", item, true, &item->set_point, err));
	TRY(read_dial_value(map, "set point tolerance", item, false, &item->set_point_tolerance, err));
	TRY(read_dial_value(map, "alarm low", item, true, &item->alarm_low, err));
	TRY(read_dial_value(map, "alarm high", item, true, &item->alarm_high, err));
	if (item->alarm_low >= item->set_point || item->alarm_low >= item->alarm_high)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "alarm low"),
		                  "%g has to lie below set point and high alarm: look at all three", item->alarm_low);
	if (item->alarm_high <= item->set_point)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "alarm high"), "%g has to lie above the set point, %g",
		                  item->alarm_high, item->set_point);
	return FL_OK;
}

/* "12 months", "2 years"; a bare number would leave open of what. */
static fl_status read_interval(const fl_node *map, fl_instrument *item, fl_error *err) {
	const fl_node *node = fl_node_get(map, "calibration interval");
	int count = 0, end = 0;
	item->interval_months = 0;
	if (!node)
		return FL_OK;
	const char *text = node->kind == FL_NODE_SCALAR ? node->text : "";
	if (sscanf(text, "%3d month%n", &count, &end) == 1 && end > 0)
		item->interval_months = count;
	else if (sscanf(text, "%2d year%n", &count, &end) == 1 && end > 0)
		item->interval_months = 12 * count;
	end += end > 0 && text[end] == 's';
	if (end == 0 || text[end] || item->interval_months < 1 || item->interval_months > 120)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "calibration interval"),
		                  "write it in months or years, \"12 months\", from 1 month to 10 years");
	return FL_OK;
}

fl_status fl_stock_read_instrument(fl_arena *arena, const fl_node *map, fl_instrument *out, fl_error *err) {
	TRY(fl_node_only(map, fields, err));
	TRY(read_plate(map, out, err));
	TRY(read_scale(map, &out->scale, err));
	TRY(read_hydraulics(map, out, err));
	TRY(read_limits(arena, map, out, err));
	TRY(read_interval(map, out, err));
	return read_plant(map, out, err);
}
