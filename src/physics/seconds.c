/* physics/seconds.c - empirical seconds: Redwood No. 1 and Saybolt Universal.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Neither is proportional to viscosity, so means are taken in mm2/s and never in seconds.
 */
#include "foundleft/physics.h"

#include <float.h>
#include <math.h>

static const double m2_per_mm2 = 1e-6;
static const double rounding = 8.0 * DBL_EPSILON; /* what converting to m2/s and back may cost at a limit */

/* ---- Redwood No. 1 ---- */

/* One branch of nu = a t - b/t, mm2/s. Handbooks (Perry; Lange) print it in stokes: 0.00260 t - 1.79/t. */
typedef struct redwood_branch {
	double a, b;
} redwood_branch;
static const redwood_branch redwood_short = {0.260, 179.0}; /* 34 s to 100 s */
static const redwood_branch redwood_long = {0.247, 50.0};   /* above 100 s */
static const double redwood_lowest_s = 34.0, redwood_joint_s = 100.0;

static double redwood_nu(redwood_branch branch, double seconds) {
	return branch.a * seconds - branch.b / seconds;
}

static double redwood_seconds(redwood_branch branch, double nu_mm2_s) {
	return (nu_mm2_s + sqrt(nu_mm2_s * nu_mm2_s + 4.0 * branch.a * branch.b)) / (2.0 * branch.a);
}

fl_status fl_physics_redwood_to_nu(double seconds, double *nu_m2_s, fl_error *err) {
	if (!(seconds >= redwood_lowest_s) || !isfinite(seconds))
		return fl_fail(err, FL_E_RANGE, "%g s Redwood No. 1: the conversion begins at %g s", seconds, redwood_lowest_s);
	redwood_branch branch = seconds <= redwood_joint_s ? redwood_short : redwood_long;
	*nu_m2_s = redwood_nu(branch, seconds) * m2_per_mm2;
	return FL_OK;
}

/* At 100 s the branches overlap, 24.200 to 24.210 mm2/s: there the short branch rules. */
fl_status fl_physics_nu_to_redwood(double nu_m2_s, double *seconds, fl_error *err) {
	double nu = nu_m2_s / m2_per_mm2;
	double lowest = redwood_nu(redwood_short, redwood_lowest_s);
	if (!(nu >= lowest * (1.0 - rounding)) || !isfinite(nu))
		return fl_fail(err, FL_E_RANGE,
		               "%g mm²/s is below the Redwood No. 1 conversion, which begins at %g s, %.4f mm²/s", nu,
		               redwood_lowest_s, lowest);
	bool is_short = nu <= redwood_nu(redwood_short, redwood_joint_s) * (1.0 + rounding);
	*seconds = fmax(redwood_lowest_s, redwood_seconds(is_short ? redwood_short : redwood_long, nu));
	return FL_OK;
}

/* ---- Saybolt Universal, ASTM D2161 ---- */

/* The standard's tables begin at 1.81 mm2/s for 100 °F and 1.77 mm2/s for 210 °F. */
static const double saybolt_lowest_mm2_s = 1.77;
/* The temperature factor is linear about 100 °F; 0 to 350 °F is common practice, no source. */
static const double saybolt_coldest_f = 0.0, saybolt_hottest_f = 350.0;

static double saybolt_at_100_f(double nu) {
	double drop = 3930.2 + nu * (262.7 + nu * (23.97 + nu * 1.646));
	return 4.6324 * nu + (1.0 + 0.03264 * nu) / (drop * 1e-5);
}

static double saybolt_at_100_f_derivative(double nu) {
	double drop = 3930.2 + nu * (262.7 + nu * (23.97 + nu * 1.646));
	double ddrop = 262.7 + nu * (2.0 * 23.97 + nu * 3.0 * 1.646);
	return 4.6324 + 1e5 * (0.03264 * drop - (1.0 + 0.03264 * nu) * ddrop) / (drop * drop);
}

static fl_status saybolt_factor(double temp_c, double *factor, fl_error *err) {
	double temp_f = 32.0 + 1.8 * temp_c;
	if (!(temp_f >= saybolt_coldest_f && temp_f <= saybolt_hottest_f))
		return fl_fail(err, FL_E_RANGE, "Saybolt Universal seconds at %g °C: the temperature must be %.0f to %.0f °C",
		               temp_c, (saybolt_coldest_f - 32.0) / 1.8, (saybolt_hottest_f - 32.0) / 1.8);
	*factor = 1.0 + 0.000061 * (temp_f - 100.0);
	return FL_OK;
}

fl_status fl_physics_nu_to_saybolt(double nu_m2_s, double temp_c, double *seconds, fl_error *err) {
	double factor = 0.0, nu = nu_m2_s / m2_per_mm2;
	fl_status status = saybolt_factor(temp_c, &factor, err);
	if (status < 0)
		return status;
	if (!(nu >= saybolt_lowest_mm2_s * (1.0 - rounding)) || !isfinite(nu))
		return fl_fail(err, FL_E_RANGE, "%g mm²/s is below the Saybolt Universal conversion, which begins at %g mm²/s",
		               nu, saybolt_lowest_mm2_s);
	*seconds = factor * saybolt_at_100_f(nu);
	return FL_OK;
}

/* Newton from the straight end of the curve, where seconds are 4.6324 nu: the curve is convex and rises throughout,
 * so the iteration comes down from above without leaving the domain. */
static double nu_of_saybolt_at_100_f(double seconds) {
	double nu = seconds / 4.6324;
	for (int i = 0; i < 100; i++) {
		double step = (saybolt_at_100_f(nu) - seconds) / saybolt_at_100_f_derivative(nu);
		nu -= step;
		if (fabs(step) <= 2.0 * DBL_EPSILON * nu)
			break;
	}
	return nu;
}

fl_status fl_physics_saybolt_to_nu(double seconds, double temp_c, double *nu_m2_s, fl_error *err) {
	double factor = 0.0;
	fl_status status = saybolt_factor(temp_c, &factor, err);
	if (status < 0)
		return status;
	double lowest = factor * saybolt_at_100_f(saybolt_lowest_mm2_s);
	if (!(seconds >= lowest * (1.0 - rounding)) || !isfinite(seconds))
		return fl_fail(err, FL_E_RANGE, "%g s Saybolt Universal: the conversion begins at %.2f s, %g mm²/s", seconds,
		               lowest, saybolt_lowest_mm2_s);
	*nu_m2_s = fmax(saybolt_lowest_mm2_s, nu_of_saybolt_at_100_f(seconds / factor)) * m2_per_mm2;
	return FL_OK;
}
