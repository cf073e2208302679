/* oil.c - a lot of a reference oil: its certificate's table, and the checks by which a slip in copying it shows.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "read.h"

/* mu = nu rho holds to the rounding of a certificate's last digits; 0.2 %: common practice, no source. */
static const double mu_misfit_allowed = 0.002;
/* A mineral oil keeps to the D341 line within some tenths of a percent; 1 %: common practice, no source. */
static const double line_misfit_allowed = 0.01;

static const char *const oil_fields[] = {"name",   "lot",          "certificate", "certificate lot",
                                         "issuer", "certified on", "use before",  "opened on",
                                         "k",      "k density",    "table",       NULL};
static const char *const row_fields[] = {"at", "nu", "U", "density", "U density", "mu", NULL};

/* ---- who and when ------------------------------------------------------------------------------------------------ */

static fl_status read_certificate(const fl_node *map, fl_oil *oil, fl_error *err) {
	TRY(fl_node_text(map, "name", true, &oil->name, err));
	TRY(fl_node_text(map, "lot", true, &oil->lot, err));
	TRY(fl_node_text(map, "certificate", true, &oil->certificate, err));
	TRY(fl_node_text(map, "certificate lot", true, &oil->certificate_lot, err));
	TRY(fl_node_text(map, "issuer", true, &oil->issuer, err));
	if (strcmp(oil->lot, oil->certificate_lot) != 0)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_stock_place(map, "certificate lot"),
		    "the certificate is for lot %.60s, the bottle is lot %.60s: get the certificate of this bottle",
		    oil->certificate_lot, oil->lot);
	return FL_OK;
}

static fl_status read_dates(const fl_node *map, fl_oil *oil, fl_error *err) {
	char day[FL_DAY_SIZE];
	oil->opened_on = FL_NO_DAY;
	TRY(fl_node_day(map, "certified on", true, &oil->certified_on, err));
	TRY(fl_node_day(map, "use before", true, &oil->use_before, err));
	TRY(fl_node_day(map, "opened on", false, &oil->opened_on, err));
	fl_day_format(oil->certified_on, day);
	if (oil->use_before <= oil->certified_on)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "use before"), "has to lie after the certified day, %s",
		                  day);
	if (oil->opened_on != FL_NO_DAY && oil->opened_on < oil->certified_on)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "opened on"),
		                  "a bottle is not opened before its lot was certified, %s: look at both dates", day);
	return FL_OK;
}

/* ---- one row of the table ------------------------------------------------------------------------------------------
 */

static bool has_quantity(const fl_node *map, const char *key, fl_quantity quantity) {
	const fl_node *scalar = fl_node_get(map, key);
	double value;
	fl_unit unit;
	return scalar && fl_node_measure(scalar, &value, &unit, NULL) == FL_OK && fl_unit_quantity(unit) == quantity;
}

/* The numbers stand under the other name, units and all. */
static fl_status check_units_swapped(const fl_node *row, fl_error *err) {
	if (!has_quantity(row, "nu", FL_Q_DYNAMIC_VISCOSITY) || !has_quantity(row, "mu", FL_Q_KINEMATIC_VISCOSITY))
		return FL_OK;
	return fl_fail_at(err, FL_E_VALUE, fl_stock_place(row, "nu"),
	                  "nu and mu are swapped: nu is the kinematic viscosity in mm²/s, mu the dynamic one in mPa·s");
}

/* U of the viscosity, in % of it or in mm2/s. */
static fl_status read_viscosity_u(const fl_node *row, double nu_m2_s, double *relative, fl_error *err) {
	if (has_quantity(row, "U", FL_Q_KINEMATIC_VISCOSITY)) {
		TRY(fl_stock_read_positive(row, "U", true, FL_Q_KINEMATIC_VISCOSITY, relative, err));
		*relative /= nu_m2_s;
	} else {
		TRY(fl_stock_read_positive(row, "U", true, FL_Q_RATIO, relative, err));
	}
	if (*relative > 0.05)
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(row, "U"),
		                  "%.3g %% is too much for a reference oil: at most 5 %%, usually 0.1 to 0.5 %%",
		                  *relative * 100.0);
	return FL_OK;
}

static fl_status check_mu(const fl_node *row, const fl_oil_point *point, fl_error *err) {
	double mu_pa_s = NAN;
	TRY(fl_stock_read_positive(row, "mu", false, FL_Q_DYNAMIC_VISCOSITY, &mu_pa_s, err));
	double expected_pa_s = point->nu_m2_s * point->rho_kg_m3;
	if (isnan(mu_pa_s) || fabs(mu_pa_s / expected_pa_s - 1.0) <= mu_misfit_allowed)
		return FL_OK;
	double other_nu_mm2_s = mu_pa_s * 1e3, other_mu_mpa_s = point->nu_m2_s * 1e6;
	double swapped_mpa_s = other_nu_mm2_s * point->rho_kg_m3 * 1e-3;
	if (fabs(other_mu_mpa_s / swapped_mpa_s - 1.0) <= mu_misfit_allowed)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(row, "nu"),
		                  "nu and mu are swapped: here nu is %g mm²/s and mu is %g mPa·s", other_nu_mm2_s,
		                  other_mu_mpa_s);
	return fl_fail_at(
	    err, FL_E_VALUE, fl_stock_place(row, "mu"),
	    "%g mPa·s is %.2g %% off nu × density, %.4g mPa·s, where 0.2 %% is allowed: compare nu, density and mu "
	    "with the certificate",
	    mu_pa_s * 1e3, fabs(mu_pa_s / expected_pa_s - 1.0) * 100.0, expected_pa_s * 1e3);
}

/* U as stated, beside the standard uncertainties in *point; k is divided out by the caller. */
static fl_status read_row(const fl_node *row, fl_oil_point *point, double *U_nu_rel, double *U_rho_kg_m3,
                          fl_error *err) {
	TRY(fl_node_only(row, row_fields, err));
	TRY(check_units_swapped(row, err));
	TRY(fl_node_amount_within(row, "at", true, FL_Q_TEMPERATURE, -40.0, 200.0, &point->temp_c, NULL, err));
	TRY(fl_node_amount_within(row, "nu", true, FL_Q_KINEMATIC_VISCOSITY, 0.3e-6, 20000e-6, &point->nu_m2_s, NULL, err));
	TRY(fl_node_amount_within(row, "density", true, FL_Q_DENSITY, 600.0, 1100.0, &point->rho_kg_m3, NULL, err));
	TRY(check_mu(row, point, err));
	TRY(read_viscosity_u(row, point->nu_m2_s, U_nu_rel, err));
	TRY(fl_stock_read_positive(row, "U density", true, FL_Q_DENSITY, U_rho_kg_m3, err));
	if (*U_rho_kg_m3 > 20.0)
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(row, "U density"),
		                  "%g kg/m³ is too much for a reference oil: at most 20, usually 0.1 to 1 kg/m³", *U_rho_kg_m3);
	return FL_OK;
}

/* ---- the table ---- */

static fl_status check_falling(const fl_node *row, const fl_oil_point *above, const fl_oil_point *here, fl_error *err) {
	if (here->temp_c <= above->temp_c)
		return fl_fail_at(err, FL_E_VALUE, fl_stock_place(row, "at"),
		                  "%g °C does not lie above the row before it, %g °C: write the rows from cold to warm, each "
		                  "temperature once",
		                  here->temp_c, above->temp_c);
	if (here->nu_m2_s >= above->nu_m2_s)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_stock_place(row, "nu"),
		    "%g mm²/s at %g °C is not below the %g mm²/s at %g °C: an oil gets thinner when it gets warmer",
		    here->nu_m2_s * 1e6, here->temp_c, above->nu_m2_s * 1e6, above->temp_c);
	if (here->rho_kg_m3 >= above->rho_kg_m3)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_stock_place(row, "density"),
		    "%g kg/m³ at %g °C is not below the %g kg/m³ at %g °C: an oil gets lighter when it gets warmer",
		    here->rho_kg_m3, here->temp_c, above->rho_kg_m3, above->temp_c);
	return FL_OK;
}

/* A digit copied wrongly bends the straight line of log log Z against log T. */
static fl_status check_line(const fl_node *list, fl_oil *oil, fl_error *err) {
	size_t at = SIZE_MAX;
	fl_error inner = {0};
	fl_status status = fl_physics_oil_misfit(&oil->table, &oil->misfit_rel, &at, &inner);
	if (status < 0)
		return fl_fail_at(err, status, fl_node_place(list), "%s", inner.message);
	if (oil->misfit_rel <= line_misfit_allowed || at == SIZE_MAX)
		return FL_OK;
	return fl_fail_at(err, FL_E_VALUE, fl_stock_place(list->items[at], "nu"),
	                  "%g mm²/s at %g °C is %.1f %% off the ASTM D341 line through the rows beside it, where 1 %% is "
	                  "allowed: compare these three rows with the certificate",
	                  oil->table.points[at].nu_m2_s * 1e6, oil->table.points[at].temp_c, oil->misfit_rel * 100.0);
}

static fl_status read_rows(const fl_node *list, const fl_oil *oil, fl_oil_point *points, double *U_nu_rel,
                           double *U_rho_kg_m3, fl_error *err) {
	for (size_t i = 0; i < list->count; i++) {
		TRY(read_row(list->items[i], &points[i], &U_nu_rel[i], &U_rho_kg_m3[i], err));
		points[i].u_nu_rel = U_nu_rel[i] / oil->k_nu;
		points[i].u_rho_kg_m3 = U_rho_kg_m3[i] / oil->k_rho;
		if (i > 0)
			TRY(check_falling(list->items[i], &points[i - 1], &points[i], err));
	}
	return FL_OK;
}

static fl_status read_table(fl_arena *arena, const fl_node *map, fl_oil *oil, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(map, "table", true, &list, err));
	if (list->count < 2)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list),
		                  "one certified temperature gives no line to the bath's: at least two rows are needed");
	fl_oil_point *points = fl_arena_alloc(arena, list->count, sizeof *points);
	double *U_nu_rel = fl_arena_alloc(arena, list->count, sizeof *U_nu_rel);
	double *U_rho_kg_m3 = fl_arena_alloc(arena, list->count, sizeof *U_rho_kg_m3);
	if (!points || !U_nu_rel || !U_rho_kg_m3)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	TRY(read_rows(list, oil, points, U_nu_rel, U_rho_kg_m3, err));
	oil->table = (fl_oil_table){points, list->count};
	oil->U_nu_rel = U_nu_rel;
	oil->U_rho_kg_m3 = U_rho_kg_m3;
	return check_line(list, oil, err);
}

fl_status fl_stock_read_oil(fl_arena *arena, const fl_node *map, fl_oil *out, fl_error *err) {
	TRY(fl_node_only(map, oil_fields, err));
	TRY(read_certificate(map, out, err));
	TRY(read_dates(map, out, err));
	TRY(fl_stock_read_k(map, "k", &out->k_nu, err));
	out->k_rho = out->k_nu;
	TRY(fl_node_number(map, "k density", false, 1.0, 4.0, &out->k_rho, err));
	return read_table(arena, map, out, err);
}

/* ---- in use ---- */

fl_status fl_stock_oil_in_date(const fl_oil *oil, fl_day day, fl_error *err) {
	char asked[FL_DAY_SIZE], limit[FL_DAY_SIZE];
	fl_day_format(day, asked);
	if (day < oil->certified_on)
		return fl_fail_at(err, FL_E_VALUE, oil->place,
		                  "%s lot %s was certified on %s, after %s: use a lot that was certified by then", oil->name,
		                  oil->lot, fl_day_format(oil->certified_on, limit), asked);
	if (day >= oil->use_before)
		return fl_fail_at(err, FL_E_VALUE, oil->place,
		                  "%s lot %s has expired: to be used before %s, asked for %s; take a lot in date", oil->name,
		                  oil->lot, fl_day_format(oil->use_before, limit), asked);
	return FL_OK;
}

fl_status fl_stock_oil_position(const fl_oil *oil, const fl_instrument *instrument, double temp_c, double *pct_span,
                                fl_error *err) {
	fl_oil_state state;
	fl_ideal ideal;
	fl_status oil_status = fl_physics_oil_at(&oil->table, temp_c, &state, err);
	if (oil_status < 0)
		return oil_status;
	fl_status status = fl_physics_ideal(&instrument->scale, state.mu_pa_s, &ideal, err);
	if (status < 0)
		return status;
	*pct_span = ideal.x * 100.0;
	return oil_status != FL_OK ? oil_status : status;
}
