/* equipment.c - measuring equipment: certificate, uncertainty, corrections.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include <math.h>
#include <string.h>

#include "read.h"

static const double days_per_year = 365.25;

static const char *const fields[] = {
    "id",         "role", "certificate", "issuer",         "calibrated on", "due on",      "range",
    "resolution", "U",    "k",           "drift per year", "uniformity",    "corrections", NULL};

static const char *const role_words[FL_ROLE_COUNT + 1] = {
    [FL_ROLE_THERMOMETER] = "thermometer",
    [FL_ROLE_CURRENT_METER] = "current meter",
    [FL_ROLE_PRESSURE_GAUGE] = "pressure gauge",
    [FL_ROLE_BATH] = "bath",
    [FL_ROLE_TACHOMETER] = "tachometer",
    [FL_ROLE_PRESSURE_STANDARD] = "pressure standard",
    [FL_ROLE_TIMER] = "timer",
};

static const fl_quantity role_quantity[FL_ROLE_COUNT] = {
    [FL_ROLE_THERMOMETER] = FL_Q_TEMPERATURE,
    [FL_ROLE_CURRENT_METER] = FL_Q_CURRENT,
    [FL_ROLE_PRESSURE_GAUGE] = FL_Q_PRESSURE,
    [FL_ROLE_BATH] = FL_Q_TEMPERATURE,
    [FL_ROLE_TACHOMETER] = FL_Q_ROTATION,
    [FL_ROLE_PRESSURE_STANDARD] = FL_Q_PRESSURE,
    [FL_ROLE_TIMER] = FL_Q_TIME,
};

const char *fl_stock_role_text(fl_role role) {
	return role >= FL_ROLE_THERMOMETER && role < FL_ROLE_COUNT ? role_words[role] : "equipment";
}

static fl_status read_identity(const fl_node *map, fl_equipment *item, fl_error *err) {
	int role = 0;
	char day[FL_DAY_SIZE];
	TRY(fl_node_text(map, "id", true, &item->id, err));
	TRY(fl_node_choice(map, "role", true, role_words, &role, err));
	item->role = (fl_role)role;
	TRY(fl_node_text(map, "certificate", true, &item->certificate, err));
	TRY(fl_node_text(map, "issuer", true, &item->issuer, err));
	TRY(fl_node_day(map, "calibrated on", true, &item->calibrated_on, err));
	TRY(fl_node_day(map, "due on", true, &item->due_on, err));
	if (item->due_on <= item->calibrated_on)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "due on"), "has to lie after the calibration, %s",
		                  fl_day_format(item->calibrated_on, day));
	return FL_OK;
}

static fl_status read_range(const fl_node *map, fl_equipment *item, fl_error *err) {
	TRY(fl_node_span(map, "range", true, role_quantity[item->role], false, &item->low, &item->high, &item->unit, err));
	if (item->unit == FL_U_FAHRENHEIT)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "range"), "write temperatures of equipment in °C");
	return FL_OK;
}

/* A small amount in the item's unit: an uncertainty, a drift, a correction. Temperatures differ in K. */
static fl_status read_difference(const fl_node *map, const char *key, bool required, const fl_equipment *item,
                                 double *out, fl_error *err) {
	bool thermal = item->unit == FL_U_CELSIUS;
	double inside = NAN;
	TRY(fl_node_amount(map, key, required, thermal ? FL_Q_TEMPERATURE_DIFFERENCE : fl_unit_quantity(item->unit),
	                   &inside, NULL, err));
	if (isnan(inside))
		return FL_OK;
	double value = thermal ? inside : fl_from_inside(inside, item->unit);
	if (fabs(value) > 0.1 * (item->high - item->low))
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(map, key),
		                  "%.60s is more than a tenth of the range, %g to %g %s: look at number and unit",
		                  fl_node_get(map, key)->text, item->low, item->high, fl_unit_text(item->unit));
	*out = value;
	return FL_OK;
}

static fl_status read_magnitude(const fl_node *map, const char *key, bool required, bool zero_allowed,
                                const fl_equipment *item, double *out, fl_error *err) {
	double value = *out;
	TRY(read_difference(map, key, required, item, &value, err));
	if (fl_node_get(map, key) && (value < 0.0 || (value == 0.0 && !zero_allowed)))
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(map, key), "%.60s is not possible: it has to be %s",
		                  fl_node_get(map, key)->text, zero_allowed ? "zero or above" : "above zero");
	*out = value;
	return FL_OK;
}

static fl_status refuse_field(const fl_node *map, const char *key, const char *why, fl_error *err) {
	return fl_node_get(map, key) ? fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, key), "%s", why) : FL_OK;
}

/* A bath has no certificate of what it reads: it states how far its liquid may differ from place to place. */
static fl_status read_uniformity(const fl_node *map, fl_equipment *item, fl_error *err) {
	static const char why[] = "a bath states its uniformity, a half width in K, instead of U and k";
	TRY(refuse_field(map, "U", why, err));
	TRY(refuse_field(map, "k", why, err));
	item->k = 0.0;
	return read_magnitude(map, "uniformity", true, false, item, &item->U, err);
}

static fl_status read_uncertainty(const fl_node *map, fl_equipment *item, fl_error *err) {
	TRY(read_magnitude(map, "resolution", true, false, item, &item->resolution, err));
	TRY(read_magnitude(map, "drift per year", item->role != FL_ROLE_BATH, true, item, &item->drift_per_year, err));
	if (item->role == FL_ROLE_BATH)
		return read_uniformity(map, item, err);
	TRY(refuse_field(map, "uniformity", "only a bath has a uniformity: write U and k", err));
	TRY(read_magnitude(map, "U", true, false, item, &item->U, err));
	return fl_stock_read_k(map, "k", &item->k, err);
}

static fl_status read_correction(const fl_node *map, const fl_equipment *item, fl_correction *out, fl_error *err) {
	static const char *const known[] = {"at", "add", NULL};
	double at = 0.0;
	TRY(fl_node_only(map, known, err));
	TRY(fl_node_amount(map, "at", true, fl_unit_quantity(item->unit), &at, NULL, err));
	out->at = fl_from_inside(at, item->unit);
	if (out->at < item->low || out->at > item->high)
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(map, "at"), "%.60s lies outside the range, %g to %g %s",
		                  fl_node_get(map, "at")->text, item->low, item->high, fl_unit_text(item->unit));
	return read_difference(map, "add", true, item, &out->add, err);
}

static fl_status read_corrections(fl_arena *arena, const fl_node *map, fl_equipment *item, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(map, "corrections", false, &list, err));
	if (!list || list->count == 0)
		return FL_OK;
	fl_correction *corrections = fl_arena_alloc(arena, list->count, sizeof *corrections);
	if (!corrections)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	for (size_t i = 0; i < list->count; i++) {
		TRY(read_correction(list->items[i], item, &corrections[i], err));
		if (i > 0 && corrections[i].at <= corrections[i - 1].at)
			return fl_fail_at(err, FL_E_VALUE, fl_stock_place(list->items[i], "at"),
			                  "does not lie above the point before it: write the corrections from low to high");
	}
	item->corrections = corrections;
	item->correction_count = (int)list->count;
	return FL_OK;
}

fl_status fl_stock_read_equipment(fl_arena *arena, const fl_node *map, fl_equipment *out, fl_error *err) {
	TRY(fl_node_only(map, fields, err));
	TRY(read_identity(map, out, err));
	TRY(read_range(map, out, err));
	TRY(read_uncertainty(map, out, err));
	return read_corrections(arena, map, out, err);
}

/* ---- in use -------------------------------------------------------------------------------------------------------
 */

fl_status fl_stock_equipment_in_date(const fl_equipment *equipment, fl_day day, fl_error *err) {
	char asked[FL_DAY_SIZE], limit[FL_DAY_SIZE];
	const char *role = fl_stock_role_text(equipment->role);
	fl_day_format(day, asked);
	if (day < equipment->calibrated_on)
		return fl_fail_at(err, FL_E_VALUE, equipment->place,
		                  "%s %s was calibrated on %s, after %s: use one that was calibrated by then", role,
		                  equipment->id, fl_day_format(equipment->calibrated_on, limit), asked);
	if (day > equipment->due_on)
		return fl_fail_at(err, FL_E_VALUE, equipment->place,
		                  "%s %s is overdue: due on %s, asked for %s; take one in date", role, equipment->id,
		                  fl_day_format(equipment->due_on, limit), asked);
	return FL_OK;
}

double fl_stock_corrected(const fl_equipment *equipment, double indication) {
	const fl_correction *points = equipment->corrections;
	int count = equipment->correction_count;
	if (count == 0)
		return indication;
	if (indication <= points[0].at)
		return indication + points[0].add;
	for (int i = 1; i < count; i++)
		if (indication <= points[i].at) {
			double part = (indication - points[i - 1].at) / (points[i].at - points[i - 1].at);
			return indication + points[i - 1].add + part * (points[i].add - points[i - 1].add);
		}
	return indication + points[count - 1].add;
}

fl_equipment_u fl_stock_equipment_u(const fl_equipment *equipment, fl_day day) {
	double years = day > equipment->calibrated_on ? (day - equipment->calibrated_on) / days_per_year : 0.0;
	return (fl_equipment_u){
	    .certificate = equipment->U / (equipment->k > 0.0 ? equipment->k : sqrt(3.0)),
	    .drift_half_width = equipment->drift_per_year * years,
	    .resolution_half_width = equipment->resolution / 2.0,
	};
}
