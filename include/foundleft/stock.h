/* foundleft/stock.h - what the bench owns: reference oils, measuring equipment, the instruments it looks after.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Stock files are YAML (oils.yaml, equipment.yaml, instruments.yaml; format in the manual). All strings are borrowed
 * from the stock's arena. Each item keeps `text`, its own excerpt of the file, which goes into the journal so that a
 * session stands alone.
 */
#ifndef FOUNDLEFT_STOCK_H
#define FOUNDLEFT_STOCK_H

#include "foundleft/base.h"
#include "foundleft/physics.h"
#include "foundleft/procedure.h"

/* One lot of a reference oil with its certificate. */
typedef struct fl_oil {
	const char *name; /* "LK-10" */
	const char *lot;  /* "2511B" */
	const char *certificate;
	const char *certificate_lot; /* the lot that the certificate names; must equal lot */
	const char *issuer;
	fl_day certified_on, use_before, opened_on; /* opened_on: FL_NO_DAY if still closed */
	fl_oil_table table;                         /* standard uncertainties, from U and k */
	double k_nu, k_rho;                         /* as stated */
	const double *U_nu_rel;                     /* [table.count] as stated, fraction */
	const double *U_rho_kg_m3;
	double misfit_rel; /* leave-one-out misfit of the D341 line */
	fl_place place;
	const char *text;
} fl_oil;

typedef enum fl_role {
	FL_ROLE_THERMOMETER,
	FL_ROLE_CURRENT_METER,
	FL_ROLE_PRESSURE_GAUGE, /* reads the pneumatic output */
	FL_ROLE_BATH,           /* U is the half width of its uniformity */
	FL_ROLE_TACHOMETER,
	FL_ROLE_PRESSURE_STANDARD, /* injects the differential pressure */
	FL_ROLE_TIMER,
	FL_ROLE_COUNT
} fl_role;
const char *fl_stock_role_text(fl_role role); /* "thermometer" */

/* Correction to be added to the indication, at one point. */
typedef struct fl_correction {
	double at, add; /* in the item's unit */
} fl_correction;

typedef struct fl_equipment {
	const char *id; /* "TH-7" */
	fl_role role;
	const char *certificate, *issuer;
	fl_day calibrated_on, due_on;
	fl_unit unit;     /* of everything below */
	double low, high; /* range */
	double resolution;
	double U, k;           /* k 0 where U is a half width of a rectangular distribution (a bath's uniformity) */
	double drift_per_year; /* half width, rectangular */
	const fl_correction *corrections; /* at rising points; linear between, constant outside */
	int correction_count;
	fl_place place;
	const char *text;
} fl_equipment;

typedef struct fl_instrument {
	fl_day since; /* this description holds from this day on; FL_NO_DAY: from the first */
	const char *tag, *serial, *site, *owner, *position, *maker_plate; /* "" where not given */
	fl_scale scale;
	bool has_geometry;
	fl_capillary capillary;
	double dp_full_pa;                               /* plate differential pressure at full scale; NAN if not stated */
	double supply_hz, motor_speed_rev_s, gear_ratio; /* NAN where not stated */
	fl_band tolerance;                               /* FL_BAND_NONE: the procedure's */
	const fl_zone *zones;                            /* where the tolerance is another one */
	int zone_count;
	fl_band adjust_limit;
	double hysteresis_limit_pct_span;                             /* NAN: the procedure's */
	double set_point, set_point_tolerance, alarm_low, alarm_high; /* dial units; NAN where not stated */
	int interval_months;                                          /* agreed between calibrations; 0 if none */
	fl_place place;
	const char *text;
} fl_instrument;

typedef struct fl_stock {
	fl_arena arena;
	fl_oil *oils;
	size_t oil_count, oil_capacity;
	fl_equipment *equipment;
	size_t equipment_count, equipment_capacity;
	fl_instrument *instruments;
	size_t instrument_count, instrument_capacity;
} fl_stock;

/* Reads the text of a stock file (top key `oils`, `equipment` or `instruments`; several may stand in one file) and
 * adds its items. Checks each item and refuses with place and field: no k, swapped viscosity columns (mu = nu rho),
 * viscosity not falling with temperature, a lot that is not the certificate's, geometry that cannot give the stated
 * full-scale pressure within 15 %, unknown unit, a dial in mm2/s without dial density, doubled items. A lot, an id or a
 * tag may stand several times, each with another day (certified on, calibrated on, since): its certificates over time.
 */
fl_status fl_stock_parse(fl_stock *stock, const char *text, const char *file, fl_error *err) FL_MUST_USE;
fl_status fl_stock_load(fl_stock *stock, const fl_io *io, const char *path, fl_error *err) FL_MUST_USE;
/* Adds one item from its excerpt, as the journal keeps it. */
fl_status fl_stock_parse_oil(fl_stock *stock, const char *excerpt, const char *name, fl_error *err) FL_MUST_USE;
fl_status fl_stock_parse_equipment(fl_stock *stock, const char *excerpt, const char *name, fl_error *err) FL_MUST_USE;
fl_status fl_stock_parse_instrument(fl_stock *stock, const char *excerpt, const char *name, fl_error *err) FL_MUST_USE;
void fl_stock_free(fl_stock *stock);

/* The newest of that name. NULL if there is none. Borrowed until the next item of that kind is added. */
const fl_oil *fl_stock_oil(const fl_stock *stock, const char *lot);
const fl_equipment *fl_stock_equipment(const fl_stock *stock, const char *id);
const fl_instrument *fl_stock_instrument(const fl_stock *stock, const char *tag);

/* Keeps of each lot, id and tag only what counts on `day`: the newest that had begun by then, or the oldest where none
 * had, so that its being too new is told. Pointers to items are void then. */
void fl_stock_keep(fl_stock *stock, fl_day day);

/* Is it in date on `day`? An expired oil or overdue equipment gives FL_E_VALUE with a sentence that names item,
 * date and place; a day before it was certified likewise. */
fl_status fl_stock_oil_in_date(const fl_oil *oil, fl_day day, fl_error *err) FL_MUST_USE;
fl_status fl_stock_equipment_in_date(const fl_equipment *equipment, fl_day day, fl_error *err) FL_MUST_USE;

/* Indication plus the certificate's correction there. In the item's unit. */
double fl_stock_corrected(const fl_equipment *equipment, double indication);
/* Standard uncertainty parts on `day`, in the item's unit: certificate, drift since calibrated, resolution. */
typedef struct fl_equipment_u {
	double certificate, drift_half_width, resolution_half_width;
} fl_equipment_u;
fl_equipment_u fl_stock_equipment_u(const fl_equipment *equipment, fl_day day);

/* Position of an oil on an instrument's scale at temp_c, percent of span. */
fl_status fl_stock_oil_position(const fl_oil *oil, const fl_instrument *instrument, double temp_c, double *pct_span,
                                fl_error *err) FL_MUST_USE;
/* Differential pressure at full scale that geometry, pump and dial density give, Pa (needs has_geometry). */
fl_status fl_stock_dp_full(const fl_instrument *instrument, double *dp_pa, fl_error *err) FL_MUST_USE;

#endif
