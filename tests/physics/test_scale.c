/* tests/physics/test_scale.c - empirical seconds, dials, signals.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "foundleft/physics.h"

#include <math.h>

static void redwood_there_and_back(void **state) {
	(void)state;
	double nu, seconds;
	for (double t = 34.0; t < 7000.0; t += t < 110.0 ? 0.01 : 7.0) {
		assert_int_equal(fl_physics_redwood_to_nu(t, &nu, NULL), FL_OK);
		assert_int_equal(fl_physics_nu_to_redwood(nu, &seconds, NULL), FL_OK);
		bool in_overlap = t > 100.0 && t < 100.05;
		check_near("seconds back", t, seconds, in_overlap ? 0.045 : 1e-11 * t);
	}
	for (double start = 3.576e-6; start < 2e-3; start *= 1.0001) { /* steps of 0.0024 in the overlap */
		assert_int_equal(fl_physics_nu_to_redwood(start, &seconds, NULL), FL_OK);
		assert_int_equal(fl_physics_redwood_to_nu(seconds, &nu, NULL), FL_OK);
		check_close("viscosity back", start, nu, 1e-12);
	}
}

static void redwood_domain(void **state) {
	(void)state;
	double value;
	assert_int_equal(fl_physics_redwood_to_nu(33.99, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_redwood_to_nu(NAN, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_nu_to_redwood(3.57e-6, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_nu_to_redwood(INFINITY, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_redwood_to_nu(34.0, &value, NULL), FL_OK);
	assert_int_equal(fl_physics_nu_to_redwood(value, &value, NULL), FL_OK);
	check_near("the lowest second comes back", 34.0, value, 1e-12);
}

static void saybolt_there_and_back(void **state) {
	(void)state;
	static const double temps_c[] = {0.0, 37.78, 50.0, 98.89, 150.0};
	for (int i = 0; i < 5; i++)
		for (double nu = 1.77e-6; nu < 1e-2; nu *= 1.01) {
			double seconds, back;
			assert_int_equal(fl_physics_nu_to_saybolt(nu, temps_c[i], &seconds, NULL), FL_OK);
			assert_int_equal(fl_physics_saybolt_to_nu(seconds, temps_c[i], &back, NULL), FL_OK);
			check_close("viscosity back", nu, back, 1e-12);
		}
}

static void saybolt_domain(void **state) {
	(void)state;
	double value;
	assert_int_equal(fl_physics_nu_to_saybolt(1.76e-6, 37.78, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_nu_to_saybolt(10e-6, 200.0, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_nu_to_saybolt(10e-6, NAN, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_nu_to_saybolt(NAN, 37.78, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_saybolt_to_nu(31.0, 37.78, &value, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_saybolt_to_nu(INFINITY, 37.78, &value, NULL), FL_E_RANGE);
}

static void signal_states(void **state) {
	(void)state;
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_4_20_MA, NAN), FL_SIGNAL_FAILURE);
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_02_1_BAR, 0.0), FL_SIGNAL_FAILURE);
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_02_1_BAR, 0.15), FL_SIGNAL_SATURATED);
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_02_1_BAR, 0.6), FL_SIGNAL_MEASURING);
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_02_1_BAR, 1.4), FL_SIGNAL_FAILURE);
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_3_15_PSI, 15.2), FL_SIGNAL_MEASURING);
	assert_int_equal(fl_physics_signal_state(FL_SIGNAL_3_15_PSI, 15.4), FL_SIGNAL_SATURATED);
	for (fl_signal s = 0; s < FL_SIGNAL_COUNT; s++) {
		const fl_signal_range *r = fl_physics_signal_range(s);
		assert_true(r->failure_low < r->measuring_low && r->measuring_low < r->low && r->low < r->high);
		assert_true(r->high < r->measuring_high && r->measuring_high < r->failure_high);
	}
}

/* A dial in mm²/s for 900 kg/m³ shows an oil of 850 kg/m³ too low by 850/900, and that is right. */
static void a_dial_shows_equivalent_viscosity(void **state) {
	(void)state;
	fl_scale scale = {FL_DIAL_MM2_S, 0.0, 50.0, 900.0, 0.0, FL_SIGNAL_4_20_MA};
	fl_ideal ideal;
	assert_int_equal(fl_physics_ideal(&scale, 20e-6 * 850.0, &ideal, NULL), FL_OK);
	check_close("equivalent", 20e-6 * 850.0 / 900.0, ideal.equivalent_m2_s, 1e-15);
	check_close("dial, mm²/s", 20.0 * 850.0 / 900.0, ideal.dial, 1e-14);
	check_close("x", 0.4 * 850.0 / 900.0, ideal.x, 1e-14);
	check_close("mA", 4.0 + 16.0 * 0.4 * 850.0 / 900.0, ideal.output, 1e-14);
	scale.signal = FL_SIGNAL_02_1_BAR;
	assert_int_equal(fl_physics_ideal(&scale, 0.0, &ideal, NULL), FL_OK);
	check_near("stopped, bar", 0.2, ideal.output, 1e-15);
}

static void a_dial_in_mpa_s_needs_no_density(void **state) {
	(void)state;
	const fl_scale scale = {FL_DIAL_MPA_S, 5.0, 45.0, 0.0, 0.0, FL_SIGNAL_3_15_PSI};
	fl_ideal ideal;
	assert_int_equal(fl_physics_ideal(&scale, 0.025, &ideal, NULL), FL_OK);
	check_close("dial, mPa·s", 25.0, ideal.dial, 1e-14);
	check_close("x", 0.5, ideal.x, 1e-14);
	check_close("psi", 9.0, ideal.output, 1e-14);
}

/* The output is linear in viscosity, so half the span is not the middle of the seconds. */
static void a_dial_in_seconds_is_divided_unevenly(void **state) {
	(void)state;
	static const fl_scale scales[] = {{FL_DIAL_REDWOOD, 40.0, 400.0, 950.0, 0.0, FL_SIGNAL_4_20_MA},
	                                  {FL_DIAL_SAYBOLT, 40.0, 400.0, 950.0, 50.0, FL_SIGNAL_4_20_MA}};
	for (int i = 0; i < 2; i++) {
		double low, high, dial;
		fl_ideal ideal;
		assert_int_equal(fl_physics_scale_span(&scales[i], &low, &high, NULL), FL_OK);
		assert_int_equal(fl_physics_dial_at(&scales[i], 0.0, &dial, NULL), FL_OK);
		check_near("low end, s", 40.0, dial, 1e-10);
		assert_int_equal(fl_physics_dial_at(&scales[i], 1.0, &dial, NULL), FL_OK);
		check_near("high end, s", 400.0, dial, 1e-9);
		assert_int_equal(fl_physics_dial_at(&scales[i], 0.5, &dial, NULL), FL_OK);
		assert_true(fabs(dial - 220.0) > 1.0);
		assert_int_equal(fl_physics_ideal(&scales[i], 950.0 * (low + high) / 2.0, &ideal, NULL), FL_OK);
		check_close("x of the middle", 0.5, ideal.x, 1e-12);
		check_close("the dial agrees", dial, ideal.dial, 1e-12);
		assert_int_equal(fl_physics_ideal(&scales[i], 1e-3, &ideal, NULL),
		                 FL_E_RANGE); /* thinner than the seconds go */
	}
}

static void scales_that_make_no_sense(void **state) {
	(void)state;
	fl_ideal ideal;
	double low, high;
	fl_scale scale = {FL_DIAL_MM2_S, 0.0, 50.0, 0.0, 0.0, FL_SIGNAL_4_20_MA};
	assert_int_equal(fl_physics_ideal(&scale, 0.02, &ideal, NULL), FL_E_RANGE); /* no dial density */
	scale.dial_density_kg_m3 = 900.0;
	assert_int_equal(fl_physics_ideal(&scale, -0.02, &ideal, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_ideal(&scale, NAN, &ideal, NULL), FL_E_RANGE);
	scale.high = 0.0;
	assert_int_equal(fl_physics_scale_span(&scale, &low, &high, NULL), FL_E_RANGE);
	scale = (fl_scale){FL_DIAL_REDWOOD, 0.0, 400.0, 950.0, 0.0, FL_SIGNAL_4_20_MA};
	assert_int_equal(fl_physics_scale_span(&scale, &low, &high, NULL), FL_E_RANGE);
}

static void units_of_dials(void **state) {
	(void)state;
	assert_int_equal(fl_physics_dial_unit(FL_DIAL_MM2_S), FL_U_MM2_S);
	assert_int_equal(fl_physics_dial_unit(FL_DIAL_MPA_S), FL_U_MPA_S);
	assert_int_equal(fl_physics_dial_unit(FL_DIAL_REDWOOD), FL_U_REDWOOD_S);
	assert_int_equal(fl_physics_dial_unit(FL_DIAL_SAYBOLT), FL_U_SAYBOLT_S);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(redwood_there_and_back),
	    cmocka_unit_test(redwood_domain),
	    cmocka_unit_test(saybolt_there_and_back),
	    cmocka_unit_test(saybolt_domain),
	    cmocka_unit_test(signal_states),
	    cmocka_unit_test(a_dial_shows_equivalent_viscosity),
	    cmocka_unit_test(a_dial_in_mpa_s_needs_no_density),
	    cmocka_unit_test(a_dial_in_seconds_is_divided_unevenly),
	    cmocka_unit_test(scales_that_make_no_sense),
	    cmocka_unit_test(units_of_dials),
	};
	return cmocka_run_group_tests_name("scale", tests, NULL, NULL);
}
