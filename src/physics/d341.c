/* physics/d341.c - viscosity against temperature by ASTM D341: Z of viscosity and back, the line, its slope.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Z = nu + 0.7 + C - D + E - F + G - H with nu in mm2/s; each letter is exp(p - q nu). Above about 2 mm2/s all of
 * them are below 0.002 and Z is nu + 0.7. The published closed inverse is off by up to 2e-4 mm2/s, so Z is inverted
 * by iteration.
 */
#include "foundleft/physics.h"

#include <float.h>
#include <math.h>

static const double lowest_nu_mm2_s = 0.21;
static const double m2_per_mm2 = 1e-6;

/* The low-viscosity terms C to H: sign * exp(p - q nu). */
static const struct low_term {
	double sign, p, q;
} low_terms[] = {
    {+1.0, -1.14883, 2.65868}, {-1.0, -0.0038138, 12.5645}, {+1.0, 5.46491, 37.6289},
    {-1.0, 13.0458, 74.6851},  {+1.0, 37.4619, 192.643},    {-1.0, 80.4945, 400.468},
};
enum { LOW_TERM_COUNT = sizeof low_terms / sizeof *low_terms };

/* Below this exponent a term, even times q, is under half a unit in the last place of Z and of its slope: leaving it
 * out changes no bit, and most oils are far above the viscosities where the terms count. */
static const double no_bit_below = -46.0;

static double low_term(const struct low_term *term, double nu_mm2_s) {
	double exponent = term->p - term->q * nu_mm2_s;
	return exponent < no_bit_below ? 0.0 : term->sign * exp(exponent);
}

static double z_of(double nu_mm2_s) {
	double z = nu_mm2_s + 0.7;
	for (int i = 0; i < LOW_TERM_COUNT; i++)
		z += low_term(&low_terms[i], nu_mm2_s);
	return z;
}

static double dz_of(double nu_mm2_s) {
	double dz = 1.0;
	for (int i = 0; i < LOW_TERM_COUNT; i++)
		dz -= low_terms[i].q * low_term(&low_terms[i], nu_mm2_s);
	return dz;
}

/* Both at once: Newton's iteration asks for them together, and the terms are the same. */
static double z_with_slope(double nu_mm2_s, double *dz) {
	double z = nu_mm2_s + 0.7;
	*dz = 1.0;
	for (int i = 0; i < LOW_TERM_COUNT; i++) {
		double term = low_term(&low_terms[i], nu_mm2_s);
		z += term;
		*dz -= low_terms[i].q * term;
	}
	return z;
}

fl_status fl_physics_d341_z(double nu_m2_s, double *z, fl_error *err) {
	double nu = nu_m2_s / m2_per_mm2;
	/* The conversion may cost the last digit of 0.21 itself. */
	if (!(nu >= lowest_nu_mm2_s * (1.0 - 4.0 * DBL_EPSILON)) || !isfinite(nu))
		return fl_fail(err, FL_E_RANGE, "a viscosity of %g mm²/s is outside ASTM D341, which begins at %g mm²/s", nu,
		               lowest_nu_mm2_s);
	*z = z_of(nu);
	return FL_OK;
}

double fl_physics_d341_dz(double nu_m2_s) {
	return dz_of(nu_m2_s / m2_per_mm2);
}

/* Newton's iteration kept inside a bracket: Z rises with nu everywhere from 0.21 mm2/s on, but steeply at the end. */
static double nu_of_z(double z) {
	double low = lowest_nu_mm2_s, high = z; /* Z(nu) > nu, so the root is below z */
	double nu = fmax(lowest_nu_mm2_s, z - 0.7);
	for (int i = 0; i < 200; i++) {
		double slope, excess = z_with_slope(nu, &slope) - z;
		if (excess > 0.0)
			high = nu;
		else
			low = nu;
		double next = nu - excess / slope;
		if (!(next >= low && next <= high))
			next = low + (high - low) / 2.0;
		if (fabs(next - nu) <= DBL_EPSILON * nu)
			return next;
		nu = next;
	}
	return nu;
}

fl_status fl_physics_d341_nu(double z, double *nu_m2_s, fl_error *err) {
	double lowest_z = z_of(lowest_nu_mm2_s);
	if (!(z >= lowest_z * (1.0 - 4.0 * DBL_EPSILON)) || !isfinite(z))
		return fl_fail(err, FL_E_RANGE, "Z = %g is outside ASTM D341, which begins at %.4f (%g mm²/s)", z, lowest_z,
		               lowest_nu_mm2_s);
	*nu_m2_s = nu_of_z(z) * m2_per_mm2;
	return FL_OK;
}

static bool above_absolute_zero(double t_c) {
	return isfinite(t_c) && t_c > -FL_ZERO_CELSIUS_K;
}

/* W = log10 log10 Z */
static fl_status double_log_z(double nu_m2_s, double *w, fl_error *err) {
	double z = 0.0;
	fl_status status = fl_physics_d341_z(nu_m2_s, &z, err);
	if (status < 0)
		return status;
	*w = log10(log10(z));
	return FL_OK;
}

fl_status fl_physics_d341_line(double t1_c, double nu1_m2_s, double t2_c, double nu2_m2_s, fl_d341_line *out,
                               fl_error *err) {
	if (!above_absolute_zero(t1_c) || !above_absolute_zero(t2_c))
		return fl_fail(err, FL_E_RANGE, "%g °C and %g °C: both temperatures must be above absolute zero", t1_c, t2_c);
	if (t1_c == t2_c)
		return fl_fail(err, FL_E_RANGE, "both temperatures are %g °C: a viscosity line needs two different ones", t1_c);
	double w1 = 0.0, w2 = 0.0;
	fl_status status = double_log_z(nu1_m2_s, &w1, err);
	if (status >= 0)
		status = double_log_z(nu2_m2_s, &w2, err);
	if (status < 0)
		return status;
	double log_t1 = log10(t1_c + FL_ZERO_CELSIUS_K), log_t2 = log10(t2_c + FL_ZERO_CELSIUS_K);
	double b = (w1 - w2) / (log_t2 - log_t1);
	if (!(b > 0.0) || !isfinite(b))
		return fl_fail(err, FL_E_RANGE,
		               "%g mm²/s at %g °C and %g mm²/s at %g °C: viscosity must fall as temperature rises",
		               nu1_m2_s / m2_per_mm2, t1_c, nu2_m2_s / m2_per_mm2, t2_c);
	*out = (fl_d341_line){.a = w1 + b * log_t1, .b = b};
	return FL_OK;
}

static fl_status z_at(const fl_d341_line *line, double t_c, double *z, fl_error *err) {
	if (!above_absolute_zero(t_c))
		return fl_fail(err, FL_E_RANGE, "%g °C is no temperature: absolute zero is -273.15 °C", t_c);
	*z = pow(10.0, pow(10.0, line->a - line->b * log10(t_c + FL_ZERO_CELSIUS_K)));
	return FL_OK;
}

fl_status fl_physics_d341_at(const fl_d341_line *line, double t_c, double *nu_m2_s, fl_error *err) {
	double z = 0.0;
	fl_status status = z_at(line, t_c, &z, err);
	if (status < 0)
		return status;
	return fl_physics_d341_nu(z, nu_m2_s, err);
}

fl_status fl_physics_d341_slope(const fl_d341_line *line, double t_c, double *beta_per_k, fl_error *err) {
	double z = 0.0, nu_m2_s = 0.0;
	fl_status status = z_at(line, t_c, &z, err);
	if (status >= 0)
		status = fl_physics_d341_nu(z, &nu_m2_s, err);
	if (status < 0)
		return status;
	double nu = nu_m2_s / m2_per_mm2;
	*beta_per_k = line->b * z * log(z) / ((t_c + FL_ZERO_CELSIUS_K) * nu * dz_of(nu));
	return FL_OK;
}
