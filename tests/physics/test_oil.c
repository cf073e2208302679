/* tests/physics/test_oil.c - ASTM D341 and a reference oil between its certified temperatures.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "foundleft/physics.h"

#include <math.h>
#include <string.h>

/* The invented oil LK-50 of our scenario. */
static const fl_oil_point lk50_points[] = {
    {20.0, 144.4e-6, 0.0010, 862.9, 0.2}, {40.0, 49.2e-6, 0.0010, 850.3, 0.2},  {60.0, 21.9e-6, 0.0010, 837.7, 0.2},
    {80.0, 11.72e-6, 0.0010, 825.0, 0.2}, {100.0, 7.15e-6, 0.0010, 812.2, 0.2},
};
static const fl_oil_table lk50 = {lk50_points, 5};

static void z_and_back_keep_twelve_digits(void **state) {
	(void)state;
	for (double nu = 0.21e-6; nu < 2e-2; nu *= 1.01) {
		double z, back;
		assert_int_equal(fl_physics_d341_z(nu, &z, NULL), FL_OK);
		assert_int_equal(fl_physics_d341_nu(z, &back, NULL), FL_OK);
		check_close("viscosity back from Z", nu, back, 1e-12);
	}
}

static void z_rises_and_its_derivative_is_the_slope(void **state) {
	(void)state;
	for (double nu = 0.22e-6; nu < 1e-3; nu *= 1.02) {
		double step = nu * 1e-5, low, high;
		assert_int_equal(fl_physics_d341_z(nu - step, &low, NULL), FL_OK);
		assert_int_equal(fl_physics_d341_z(nu + step, &high, NULL), FL_OK);
		double dz = fl_physics_d341_dz(nu);
		assert_true(dz > 0.0);
		check_close("dZ/dnu", (high - low) / (2e6 * step), dz, 1e-6);
	}
}

static void line_goes_through_its_points(void **state) {
	(void)state;
	fl_d341_line line;
	double nu;
	assert_int_equal(fl_physics_d341_line(20.0, 2.968e-6, 40.0, 2.05e-6, &line, NULL), FL_OK);
	assert_int_equal(fl_physics_d341_at(&line, 20.0, &nu, NULL), FL_OK);
	check_close("at the first point", 2.968e-6, nu, 1e-12);
	assert_int_equal(fl_physics_d341_at(&line, 40.0, &nu, NULL), FL_OK);
	check_close("at the second point", 2.05e-6, nu, 1e-12);
}

static void slope_is_the_derivative(void **state) {
	(void)state;
	fl_d341_line line;
	double low, high, middle, beta;
	assert_int_equal(fl_physics_d341_line(60.0, 1.522e-6, 100.0, 0.96e-6, &line, NULL), FL_OK);
	for (double t_c = 55.0; t_c < 105.0; t_c += 2.5) {
		assert_int_equal(fl_physics_d341_at(&line, t_c - 0.01, &low, NULL), FL_OK);
		assert_int_equal(fl_physics_d341_at(&line, t_c + 0.01, &high, NULL), FL_OK);
		assert_int_equal(fl_physics_d341_at(&line, t_c, &middle, NULL), FL_OK);
		assert_int_equal(fl_physics_d341_slope(&line, t_c, &beta, NULL), FL_OK);
		check_close("beta", (low - high) / (0.02 * middle), beta, 1e-6);
	}
}

static void line_refuses_what_is_no_oil(void **state) {
	(void)state;
	fl_d341_line line = {7.0, 8.0};
	assert_int_equal(fl_physics_d341_line(40.0, 2e-6, 40.0, 1e-6, &line, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_line(40.0, 2e-6, 60.0, 3e-6, &line, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_line(40.0, 0.5e-6, 60.0, 0.2e-6, &line, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_line(-300.0, 2e-6, 60.0, 1e-6, &line, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_line(40.0, NAN, 60.0, 1e-6, &line, NULL), FL_E_RANGE);
	check_near("untouched after a refusal", 7.0, line.a, 0.0);
	double value;
	assert_int_equal(fl_physics_d341_z(0.2e-6, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_z(INFINITY, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_nu(0.5, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_nu(NAN, &value, NULL), FL_E_RANGE);
	line = (fl_d341_line){9.5, 3.75};
	assert_int_equal(fl_physics_d341_at(&line, -273.15, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_d341_at(&line, 2000.0, &value, NULL), FL_E_RANGE); /* thinner than 0.21 mm²/s */
}

/* Own computation (our scenario, no published source): 41.636 mm²/s at 43.70 °C, sensitivities 0.778 and 0.225, and
 * 0.100 % from two certificates of 0.10 % of the same issuer. */
static void oil_between_its_certified_temperatures(void **state) {
	(void)state;
	fl_oil_state oil;
	assert_int_equal(fl_physics_oil_at(&lk50, 43.70, &oil, NULL), FL_OK);
	check_near("nu, mm²/s", 41.636, oil.nu_m2_s * 1e6, 0.001);
	check_near("c1", 0.778, oil.c1, 0.0005);
	check_near("c2", 0.225, oil.c2, 0.0005);
	check_near("u(nu), %", 0.1003, oil.u_nu_rel * 100.0, 0.0001);
	check_near("rho, kg/m³", 850.3 - 12.6 * 3.7 / 20.0, oil.rho_kg_m3, 1e-9);
	check_near("drho/dT", -0.63, oil.drho_dt, 1e-12);
	check_near("u(rho)", 0.2, oil.u_rho_kg_m3, 1e-12);
	check_close("mu", oil.nu_m2_s * oil.rho_kg_m3, oil.mu_pa_s, 1e-15);
	assert_int_equal(oil.low, 1);
	assert_int_equal(oil.high, 2);
	check_near("outside", 0.0, oil.outside_k, 0.0);
}

/* Sensitivities against what shifting each certified value by a little does. */
static void sensitivities_are_the_derivatives(void **state) {
	(void)state;
	for (double t_c = 16.0; t_c <= 104.0; t_c += 4.0) {
		fl_oil_state oil, moved;
		assert_true(fl_physics_oil_at(&lk50, t_c, &oil, NULL) >= 0);
		for (int end = 0; end < 2; end++) {
			fl_oil_point points[5];
			memcpy(points, lk50_points, sizeof points);
			points[end ? oil.high : oil.low].nu_m2_s *= 1.0 + 1e-6;
			fl_oil_table table = {points, 5};
			assert_true(fl_physics_oil_at(&table, t_c, &moved, NULL) >= 0);
			check_near("relative sensitivity", (moved.nu_m2_s / oil.nu_m2_s - 1.0) * 1e6, end ? oil.c2 : oil.c1, 1e-5);
		}
	}
}

/* beta at 40 °C in %/K: own computation for the five invented oils (no published source). Taken in the pair above. */
static void beta_of_the_five_oils(void **state) {
	(void)state;
	static const double nu[5][3] = {
	    {2.968, 2.05, 1.522}, {20.71, 10.0, 5.745}, {50.08, 20.4, 10.38}, {93.92, 34.6, 16.32}, {144.4, 49.2, 21.9}};
	static const double want[5] = {1.65, 3.15, 3.86, 4.30, 4.63};
	for (int i = 0; i < 5; i++) {
		fl_d341_line line;
		double beta;
		assert_int_equal(fl_physics_d341_line(20.0, nu[i][0] * 1e-6, 60.0, nu[i][2] * 1e-6, &line, NULL), FL_OK);
		assert_int_equal(fl_physics_d341_slope(&line, 40.0, &beta, NULL), FL_OK);
		check_near("beta at 40 °C, %/K", want[i], beta * 100.0, 0.02);
	}
}

static void outside_the_certified_span(void **state) {
	(void)state;
	fl_oil_state oil;
	fl_error err = {0};
	assert_int_equal(fl_physics_oil_at(&lk50, 15.0, &oil, &err), FL_WARNING);
	check_near("below", 5.0, oil.outside_k, 1e-12);
	assert_int_equal(oil.low, 0);
	assert_true(oil.nu_m2_s > 144.4e-6);
	assert_int_equal(fl_physics_oil_at(&lk50, 103.0, &oil, &err), FL_WARNING);
	check_near("above", 3.0, oil.outside_k, 1e-12);
	assert_int_equal(oil.low, 3);
	assert_true(oil.nu_m2_s < 7.15e-6);
	assert_int_equal(err.status, FL_OK);
	assert_int_equal(fl_physics_oil_at(&lk50, 14.99, &oil, &err), FL_E_RANGE);
	assert_non_null(strstr(err.message, "14.99"));
	assert_int_equal(fl_physics_oil_at(&lk50, 105.01, &oil, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_oil_at(&lk50, NAN, &oil, NULL), FL_E_RANGE);
}

static void at_a_certified_temperature_the_certificate_rules(void **state) {
	(void)state;
	for (size_t i = 0; i < lk50.count; i++) {
		fl_oil_state oil;
		assert_int_equal(fl_physics_oil_at(&lk50, lk50_points[i].temp_c, &oil, NULL), FL_OK);
		check_close("certified viscosity", lk50_points[i].nu_m2_s, oil.nu_m2_s, 1e-12);
		check_close("certified density", lk50_points[i].rho_kg_m3, oil.rho_kg_m3, 1e-14);
		check_close("certified uncertainty", lk50_points[i].u_nu_rel, oil.u_nu_rel, 1e-12);
	}
}

static void a_table_that_makes_no_sense_is_refused(void **state) {
	(void)state;
	fl_oil_state oil;
	fl_oil_point points[5];
	const fl_oil_table table = {points, 5};
	memcpy(points, lk50_points, sizeof points);
	points[2].nu_m2_s = 60e-6;
	assert_int_equal(fl_physics_oil_at(&table, 40.0, &oil, NULL), FL_E_VALUE);
	memcpy(points, lk50_points, sizeof points);
	points[2].temp_c = 40.0;
	assert_int_equal(fl_physics_oil_at(&table, 40.0, &oil, NULL), FL_E_VALUE);
	memcpy(points, lk50_points, sizeof points);
	points[3].u_nu_rel = NAN;
	assert_int_equal(fl_physics_oil_at(&table, 40.0, &oil, NULL), FL_E_VALUE);
	memcpy(points, lk50_points, sizeof points);
	points[0].rho_kg_m3 = 0.0;
	assert_int_equal(fl_physics_oil_at(&table, 40.0, &oil, NULL), FL_E_VALUE);
	const fl_oil_table single = {lk50_points, 1};
	assert_int_equal(fl_physics_oil_at(&single, 20.0, &oil, NULL), FL_E_VALUE);
}

static void misfit_of_the_line_at_inner_points(void **state) {
	(void)state;
	double misfit;
	size_t at;
	assert_int_equal(fl_physics_oil_misfit(&lk50, &misfit, &at, NULL), FL_OK);
	assert_true(misfit < 0.001); /* the invented oil follows D341 */
	assert_in_range(at, 1, 3);
	fl_oil_point points[5];
	memcpy(points, lk50_points, sizeof points);
	points[3].nu_m2_s *= 1.02; /* a wrong digit at 80 °C shows there, 2 % */
	const fl_oil_table wrong = {points, 5};
	assert_int_equal(fl_physics_oil_misfit(&wrong, &misfit, &at, NULL), FL_OK);
	assert_int_equal(at, 3);
	check_near("misfit", 0.0196, misfit, 0.001);
	const fl_oil_table pair = {lk50_points, 2};
	assert_int_equal(fl_physics_oil_misfit(&pair, &misfit, &at, NULL), FL_OK);
	check_near("two points have none", 0.0, misfit, 0.0);
	assert_true(at == SIZE_MAX);
}

static void density_from_15(void **state) {
	(void)state;
	/* Fuel oils, K0 = 103.8720, K1 = 0.2701 (petroleum measurement tables; value from memory), 991 kg/m³ at 15 °C:
	 * alpha = 0.000378 /K; own computation. */
	check_near("at 15 °C itself", 991.0, fl_physics_density_from_15(991.0, 103.8720, 0.2701, 15.0), 0.0);
	double alpha = 103.8720 / (991.0 * 991.0) + 0.2701 / 991.0;
	double want = 991.0 * exp(-alpha * 35.0 - 0.8 * alpha * alpha * 35.0 * 35.0);
	check_near("at 50 °C", want, fl_physics_density_from_15(991.0, 103.8720, 0.2701, 50.0), 1e-9);
	check_near("about 13.2 kg/m³ lighter", 977.8, want, 0.1);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(z_and_back_keep_twelve_digits),
	    cmocka_unit_test(z_rises_and_its_derivative_is_the_slope),
	    cmocka_unit_test(line_goes_through_its_points),
	    cmocka_unit_test(slope_is_the_derivative),
	    cmocka_unit_test(line_refuses_what_is_no_oil),
	    cmocka_unit_test(oil_between_its_certified_temperatures),
	    cmocka_unit_test(sensitivities_are_the_derivatives),
	    cmocka_unit_test(beta_of_the_five_oils),
	    cmocka_unit_test(outside_the_certified_span),
	    cmocka_unit_test(at_a_certified_temperature_the_certificate_rules),
	    cmocka_unit_test(a_table_that_makes_no_sense_is_refused),
	    cmocka_unit_test(misfit_of_the_line_at_inner_points),
	    cmocka_unit_test(density_from_15),
	};
	return cmocka_run_group_tests_name("oil", tests, NULL, NULL);
}
