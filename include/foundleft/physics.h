/* foundleft/physics.h - one relation, one function: oil viscosity and density at temperature, empirical scales,
 * flow through the capillary, signals.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * SI inside; temperatures in degrees Celsius. Relations that are published in mm2/s convert inside themselves.
 * FL_E_RANGE is returned outside a relation's domain.
 */
#ifndef FOUNDLEFT_PHYSICS_H
#define FOUNDLEFT_PHYSICS_H

#include "foundleft/base.h"

#define FL_ZERO_CELSIUS_K 273.15

/* ---- ASTM D341: viscosity against temperature ---------------------------------------------------------------- */

/* Z of kinematic viscosity: full form with the low-viscosity terms C to H (ASTM D341, eq. A1.1 and following).
 * nu in m2/s, at least 0.21 mm2/s. */
fl_status fl_physics_d341_z(double nu_m2_s, double *z, fl_error *err) FL_MUST_USE;
/* dZ/dnu, nu in mm2/s on both sides of the derivative (dimensionless). */
double fl_physics_d341_dz(double nu_m2_s);
/* Inverse of fl_physics_d341_z by Newton's iteration to the last digits (round trip better than 1e-12 relative). */
fl_status fl_physics_d341_nu(double z, double *nu_m2_s, fl_error *err) FL_MUST_USE;

/* The straight line log10 log10 Z = a - b log10 (T / 1 K) through two points. */
typedef struct fl_d341_line {
	double a, b;
} fl_d341_line;
fl_status fl_physics_d341_line(double t1_c, double nu1_m2_s, double t2_c, double nu2_m2_s, fl_d341_line *out,
                               fl_error *err) FL_MUST_USE;
fl_status fl_physics_d341_at(const fl_d341_line *line, double t_c, double *nu_m2_s, fl_error *err) FL_MUST_USE;
/* beta = -(1/nu) dnu/dT = b Z ln Z / (T nu dZ/dnu), in 1/K. */
fl_status fl_physics_d341_slope(const fl_d341_line *line, double t_c, double *beta_per_k, fl_error *err) FL_MUST_USE;

/* ---- a reference oil as certified ------------------------------------------------------------------------------ */

typedef struct fl_oil_point {
	double temp_c;
	double nu_m2_s;
	double u_nu_rel; /* standard uncertainty (U / k) as a fraction of nu */
	double rho_kg_m3;
	double u_rho_kg_m3; /* standard uncertainty (U / k) */
} fl_oil_point;

/* Certified table, temperatures strictly rising, viscosities strictly falling, count >= 2. Borrowed. */
typedef struct fl_oil_table {
	const fl_oil_point *points;
	size_t count;
} fl_oil_table;

/* The oil at one temperature. */
typedef struct fl_oil_state {
	double temp_c;
	double nu_m2_s;     /* kinematic viscosity, D341 between the enclosing certified temperatures */
	double rho_kg_m3;   /* linear between them */
	double mu_pa_s;     /* nu * rho */
	double beta_per_k;  /* -(1/nu) dnu/dT */
	double drho_dt;     /* kg/m3 per K, normally negative */
	double u_nu_rel;    /* from the two certificates, fully correlated (same issuer): c1 u1 + c2 u2, fraction */
	double u_rho_kg_m3; /* likewise, linear */
	double c1, c2;      /* relative sensitivities of nu to the two certified values */
	size_t low, high;   /* indices of the two certified temperatures */
	double outside_k;   /* how far T is outside the certified span, 0 inside */
} fl_oil_state;

/* FL_E_RANGE more than 5 K outside the certified span; FL_WARNING within 5 K outside (nearest pair used;
 * `err` is left alone, out->outside_k says how far). FL_E_VALUE for a table that does not rise and fall as stated. */
fl_status fl_physics_oil_at(const fl_oil_table *table, double temp_c, fl_oil_state *out, fl_error *err) FL_MUST_USE;
/* Leave-one-out misfit of the D341 line at the certified points (needs count >= 3): largest relative misfit over the
 * inner points, each predicted from its two neighbours, and where. With two points: 0 and *at = SIZE_MAX. */
fl_status fl_physics_oil_misfit(const fl_oil_table *table, double *relative, size_t *at, fl_error *err) FL_MUST_USE;

/* Density of petroleum from its density at 15 C: rho15 exp(-a dt (1 + 0.8 a dt)), a = K0/rho15^2 + K1/rho15
 * (petroleum measurement tables form, API MPMS 11.1 / ASTM D1250). */
double fl_physics_density_from_15(double rho15_kg_m3, double k0, double k1, double temp_c);

/* ---- empirical seconds ------------------------------------------------------------------------------------------ */

/* Redwood No. 1 seconds: nu = 0.260 t - 179/t (34 <= t <= 100), 0.247 t - 50/t (t > 100), mm2/s; the lower branch
 * rules in the overlap, so that viscosity to seconds and back is exact; seconds just above 100 (to 100.04) come back
 * up to 0.04 s smaller. FL_E_RANGE below 34 s (3.575 mm2/s). */
fl_status fl_physics_redwood_to_nu(double seconds, double *nu_m2_s, fl_error *err) FL_MUST_USE;
fl_status fl_physics_nu_to_redwood(double nu_m2_s, double *seconds, fl_error *err) FL_MUST_USE;
/* Saybolt Universal seconds at temp_c, ASTM D2161 (equation of section 5 with its temperature factor).
 * From 1.77 mm2/s, the beginning of the standard's tables; -18 to 177 C. */
fl_status fl_physics_nu_to_saybolt(double nu_m2_s, double temp_c, double *seconds, fl_error *err) FL_MUST_USE;
fl_status fl_physics_saybolt_to_nu(double seconds, double temp_c, double *nu_m2_s, fl_error *err) FL_MUST_USE;

/* ---- the scale and its signal ------------------------------------------------------------------------------------ */

typedef enum fl_signal { FL_SIGNAL_4_20_MA, FL_SIGNAL_02_1_BAR, FL_SIGNAL_3_15_PSI, FL_SIGNAL_COUNT } fl_signal;

typedef struct fl_signal_range {
	const char *text;                     /* "4–20 mA" */
	fl_unit unit;                         /* mA, bar, psi */
	double low, high;                     /* in that unit: IEC 60381-1, IEC 60382, and 3 to 15 psi of the trade */
	double measuring_low, measuring_high; /* outside: saturated (NAMUR NE 43 for the current; 2.5 % beyond else) */
	double failure_low, failure_high;     /* beyond: a failure signal, never data */
} fl_signal_range;
const fl_signal_range *fl_physics_signal_range(fl_signal signal);

typedef enum fl_signal_state { FL_SIGNAL_MEASURING, FL_SIGNAL_SATURATED, FL_SIGNAL_FAILURE } fl_signal_state;
/* `value` in the range's unit. Current: failure below 3.6 or above 21.0 mA, saturated outside 3.8 to 20.5 (limits
 * themselves inclusive on the good side, as NAMUR NE 43 states them). */
fl_signal_state fl_physics_signal_state(fl_signal signal, double value);

typedef enum fl_dial_unit { FL_DIAL_MM2_S, FL_DIAL_MPA_S, FL_DIAL_REDWOOD, FL_DIAL_SAYBOLT } fl_dial_unit;

/* What the dial says and the signal that goes with it. */
typedef struct fl_scale {
	fl_dial_unit dial_unit;
	double low, high;          /* in dial units (mm2/s, mPa.s, s) */
	double dial_density_kg_m3; /* density that a dial in mm2/s or seconds assumes; unused for mPa.s */
	double saybolt_temp_c;     /* temperature for which a Saybolt dial is divided */
	fl_signal signal;
} fl_scale;
fl_unit fl_physics_dial_unit(fl_dial_unit unit);

/* What a correct instrument shows for an oil of dynamic viscosity mu. */
typedef struct fl_ideal {
	double equivalent_m2_s; /* mu / dial density: the equivalent viscosity; for a dial in mPa.s mu / 1000 kg/m3 */
	double dial;            /* in dial units; FL_E_RANGE where a dial in seconds has no division for it */
	double x;               /* fraction of the measuring span, 0 at low, 1 at high: linear in equivalent viscosity
	                           (in mu for mPa.s), because the capillary is; the dial's seconds are only its divisions */
	double output;          /* in the signal's unit */
} fl_ideal;
fl_status fl_physics_ideal(const fl_scale *scale, double mu_pa_s, fl_ideal *out, fl_error *err) FL_MUST_USE;
/* Lower and upper range value as equivalent viscosity, m2/s (mPa.s dial: mu/1000). */
fl_status fl_physics_scale_span(const fl_scale *scale, double *low_m2_s, double *high_m2_s, fl_error *err) FL_MUST_USE;
/* What the dial shows at output fraction x, in dial units. */
fl_status fl_physics_dial_at(const fl_scale *scale, double x, double *dial, fl_error *err) FL_MUST_USE;

/* ---- the capillary ------------------------------------------------------------------------------------------------
 */

typedef struct fl_capillary {
	double bore_m, length_m;
	double displacement_m3_rev;
	double pump_speed_rev_s;
	double slip_fraction;       /* lost flow as a fraction, 0.005 for a sound pump */
	double end_coefficient;     /* n in L + n d/2: 3 pi / 8 = 1.178 (creeping flow into a hole; Sampson, Roscoe) */
	double kinetic_coefficient; /* m in m rho v^2: 1.12 (Boussinesq) */
} fl_capillary;

typedef struct fl_flow {
	double flow_m3_s, velocity_m_s;
	double reynolds;
	double entrance_m; /* 0.06 Re d (White, Fluid Mechanics, ch. 6) */
	double dp_poiseuille_pa, dp_end_pa, dp_kinetic_pa, dp_total_pa;
	double wall_shear_per_s; /* 8 v / d */
	double heating_k;        /* dP / (rho c), c = 2000 J/(kg K) */
} fl_flow;
/* Hagen-Poiseuille with end and kinetic corrections: dP = 128 mu (L + n d/2) Q / (pi d^4) + m rho v^2.
 * Positive bore, length, flow, rho, mu; else FL_E_RANGE. */
fl_status fl_physics_capillary(const fl_capillary *capillary, double mu_pa_s, double rho_kg_m3, fl_flow *out,
                               fl_error *err) FL_MUST_USE;
/* Flow that the plain Hagen-Poiseuille relation gives for viscosity: mu = pi d^4 (dp/L) / (128 Q). */
double fl_physics_poiseuille_mu(double bore_m, double dp_per_m_pa, double flow_m3_s);
/* Bore loss fraction that explains a gain g (fraction): 1 - (1 + g)^(-1/4). */
double fl_physics_bore_loss(double gain);

#endif
