/* geometry.c - can this capillary with this pump give the differential pressure on the plate? If not, which field
 * would have to be wrong: each one's usual slips are tried in turn.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "read.h"

/* Plates are rounded and bores worn, so 15 % is no fault; common practice, no source. */
static const double misfit_allowed = 0.15;
/* Density for the small kinetic part where a dial in mPa.s states none: hot fuel. */
static const double fuel_density_kg_m3 = 900.0;

fl_status fl_stock_dp_full(const fl_instrument *instrument, double *dp_pa, fl_error *err) {
	double low_m2_s, high_m2_s;
	const fl_scale *scale = &instrument->scale;
	if (!instrument->has_geometry)
		return fl_fail_at(err, FL_E_STATE, instrument->place, "the geometry of %s is not in stock: add it",
		                  instrument->tag);
	TRY(fl_physics_scale_span(scale, &low_m2_s, &high_m2_s, err));
	bool dynamic = scale->dial_unit == FL_DIAL_MPA_S;
	double mu_pa_s = dynamic ? fl_to_inside(scale->high, FL_U_MPA_S) : high_m2_s * scale->dial_density_kg_m3;
	double rho_kg_m3 = scale->dial_density_kg_m3 > 0.0 ? scale->dial_density_kg_m3 : fuel_density_kg_m3;
	fl_flow flow;
	TRY(fl_physics_capillary(&instrument->capillary, mu_pa_s, rho_kg_m3, &flow, err));
	*dp_pa = flow.dp_total_pa;
	return FL_OK;
}

/* ---- the usual slips ---- */

typedef enum suspect { BORE, LENGTH, PUMP, PUMP_SPEED, DIAL_DENSITY, PRESSURE, SUSPECTS } suspect;

/* Field, and the range in which it is usual (inside units): marine capillary sensors, common practice, no source. */
static const struct {
	const char *key;
	bool in_geometry;
	double usual_low, usual_high;
	fl_unit unit;
} suspects[SUSPECTS] = {
    [BORE] = {"bore", true, 1e-3, 4e-3, FL_U_MM},
    [LENGTH] = {"length", true, 0.1, 1.0, FL_U_MM},
    [PUMP] = {"pump", true, 0.3e-6, 10e-6, FL_U_CM3_REV},
    [PUMP_SPEED] = {"pump speed", true, 20.0 / 60.0, 100.0 / 60.0, FL_U_R_MIN},
    [DIAL_DENSITY] = {"dial density", false, 800.0, 1010.0, FL_U_KG_M3},
    [PRESSURE] = {"full-scale pressure", false, 20e2, 2000e2, FL_U_MBAR},
};

/* What the written value has to be multiplied by, and what was done to it. Factor 0: the gear ratio's inverse. */
static const struct {
	suspect field;
	double factor;
	const char *words;
} slips[] = {
    {BORE, 10.0, "it was written in cm"},
    {BORE, 2.0, "it is the radius"},
    {BORE, 0.5, "it is twice the bore"},
    {BORE, 0.1, "it is ten times too large"},
    {LENGTH, 10.0, "it was written in cm"},
    {LENGTH, 1000.0, "it was written in m"},
    {LENGTH, 0.1, "it is ten times too large"},
    {PUMP, 10.0, "it is ten times too small"},
    {PUMP, 0.1, "it is ten times too large"},
    {PUMP, 1e-3, "it was written in mm³/rev"},
    {PUMP_SPEED, 60.0, "it was written in revolutions per second"},
    {PUMP_SPEED, 0.0, "it is the motor's speed"},
    {PUMP_SPEED, 10.0, "it is ten times too small"},
    {PUMP_SPEED, 0.1, "it is ten times too large"},
    {DIAL_DENSITY, 1000.0, "it was written in g/cm³"},
    {DIAL_DENSITY, 10.0, "it is ten times too small"},
    {DIAL_DENSITY, 0.1, "it is ten times too large"},
    {PRESSURE, 10.0, "it was written in kPa"},
    {PRESSURE, 1000.0, "it was written in bar"},
    {PRESSURE, 68.94757293168361, "it was written in psi"},
    {PRESSURE, 0.1, "it is ten times too large"},
};
enum { SLIPS = sizeof slips / sizeof slips[0] };

static double *field_of(fl_instrument *instrument, suspect field) {
	switch (field) {
	case BORE:
		return &instrument->capillary.bore_m;
	case LENGTH:
		return &instrument->capillary.length_m;
	case PUMP:
		return &instrument->capillary.displacement_m3_rev;
	case PUMP_SPEED:
		return &instrument->capillary.pump_speed_rev_s;
	case DIAL_DENSITY:
		return &instrument->scale.dial_density_kg_m3;
	case PRESSURE:
	case SUSPECTS:
		break;
	}
	return &instrument->dp_full_pa;
}

static bool is_usual(suspect field, double value) {
	return value >= suspects[field].usual_low * 0.999 && value <= suspects[field].usual_high * 1.001;
}

static bool fits(const fl_instrument *instrument) {
	double dp_pa;
	return fl_stock_dp_full(instrument, &dp_pa, NULL) == FL_OK &&
	       fabs(dp_pa / instrument->dp_full_pa - 1.0) <= misfit_allowed;
}

/* Is the plate's pressure reached once this slip is undone, and is the value then a usual one? */
static bool explains(const fl_instrument *instrument, size_t slip, double *right) {
	double factor = slips[slip].factor != 0.0 ? slips[slip].factor : 1.0 / instrument->gear_ratio;
	fl_instrument mended = *instrument;
	double *value = field_of(&mended, slips[slip].field);
	if (!(factor > 0.0) || !(*value > 0.0))
		return false;
	*value *= factor;
	*right = *value;
	return is_usual(slips[slip].field, *value) && fits(&mended);
}

typedef struct explanation {
	size_t slip;
	double right;
	bool unusual_now; /* the value as written is unusual by itself: the better suspect */
} explanation;

/* All slips that explain it, at most one a field; only those of unusual fields if there are such. */
static size_t find_explanations(const fl_instrument *instrument, explanation found[SUSPECTS]) {
	size_t count = 0, unusual = 0;
	bool taken[SUSPECTS] = {false};
	fl_instrument written = *instrument;
	for (size_t slip = 0; slip < SLIPS; slip++) {
		suspect field = slips[slip].field;
		explanation e = {.slip = slip};
		if (taken[field] || !explains(instrument, slip, &e.right))
			continue;
		taken[field] = true;
		e.unusual_now = !is_usual(field, *field_of(&written, field));
		unusual += e.unusual_now;
		found[count++] = e;
	}
	size_t kept = 0;
	for (size_t i = 0; i < count; i++)
		if (unusual == 0 || found[i].unusual_now)
			found[kept++] = found[i];
	return kept;
}

/* ---- saying so ---- */

static fl_place place_of(const fl_node *map, const fl_node *geometry, suspect field) {
	return fl_stock_place(suspects[field].in_geometry ? geometry : map, suspects[field].key);
}

static void name_fields(const explanation *found, size_t count, char *out, size_t size) {
	out[0] = '\0';
	for (size_t i = 0; i < count; i++) {
		size_t used = strlen(out);
		suspect field = slips[found[i].slip].field;
		snprintf(out + used, size - used, "%s%s (%.4g %s)",
		         i == 0           ? ""
		         : i + 1 == count ? " or "
		                          : ", ",
		         suspects[field].key, fl_from_inside(found[i].right, suspects[field].unit),
		         fl_unit_text(suspects[field].unit));
	}
}

static fl_status say_one(const fl_node *map, const fl_node *geometry, const explanation *e, double dp_pa,
                         double plate_pa, fl_error *err) {
	suspect field = slips[e->slip].field;
	return fl_fail_at(
	    err, FL_E_VALUE, place_of(map, geometry, field),
	    "geometry, pump and dial density give %.5g mbar at full scale, the plate says %.5g mbar; this field "
	    "would have to be %.4g %s: perhaps %s",
	    dp_pa / 100.0, plate_pa / 100.0, fl_from_inside(e->right, suspects[field].unit),
	    fl_unit_text(suspects[field].unit), slips[e->slip].words);
}

fl_status fl_stock_check_geometry(const fl_node *map, const fl_node *geometry, const fl_instrument *instrument,
                                  fl_error *err) {
	double dp_pa;
	char list[256];
	fl_error inner = {0};
	fl_status status = fl_stock_dp_full(instrument, &dp_pa, &inner);
	if (status < 0)
		return fl_fail_at(err, status, fl_node_place(geometry), "%s", inner.message);
	if (fabs(dp_pa / instrument->dp_full_pa - 1.0) <= misfit_allowed)
		return FL_OK;
	explanation found[SUSPECTS];
	size_t count = find_explanations(instrument, found);
	if (count == 1)
		return say_one(map, geometry, &found[0], dp_pa, instrument->dp_full_pa, err);
	name_fields(found, count, list, sizeof list);
	return fl_fail_at(
	    err, FL_E_VALUE, fl_stock_place(map, "full-scale pressure"),
	    "geometry, pump and dial density give %.5g mbar at full scale, the plate says %.5g mbar, and 15 %% is "
	    "allowed: %s%s",
	    dp_pa / 100.0, instrument->dp_full_pa / 100.0,
	    count ? "one of these would have to be wrong: " : "compare every one of them with drawing and plate", list);
}
