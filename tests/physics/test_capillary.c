/* tests/physics/test_capillary.c - flow through the capillary.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "foundleft/physics.h"

#include <math.h>

/* The invented unit of our scenario: 2.2 mm by 400 mm, 1.5 cm³/rev at 40 r/min. */
static const fl_capillary unit = {2.2e-3, 0.4, 1.5e-6, 40.0 / 60.0, 0.005, 1.178097, 1.12};

/* Own computation for 50 mm²/s at 900 kg/m³ (no published source): 31150.9 Pa friction, 101.1 Pa ends, 69.1 Pa
 * kinetic, Re 11.5, v 0.26175 m/s, wall shear 952 1/s, entrance 1.52 mm, heating 0.0174 K. */
static void full_scale_of_the_unit(void **state) {
	(void)state;
	fl_flow flow;
	assert_int_equal(fl_physics_capillary(&unit, 0.045, 900.0, &flow, NULL), FL_OK);
	check_near("flow, cm³/s", 0.995, flow.flow_m3_s * 1e6, 1e-9);
	check_near("velocity", 0.26175, flow.velocity_m_s, 1e-5);
	check_near("Re", 11.5, flow.reynolds, 0.05);
	check_near("entrance, mm", 1.52, flow.entrance_m * 1e3, 0.005);
	check_near("friction", 31150.9, flow.dp_poiseuille_pa, 1.0);
	check_near("ends", 101.1, flow.dp_end_pa, 1.0);
	check_near("kinetic", 69.1, flow.dp_kinetic_pa, 0.1);
	check_near("total", flow.dp_poiseuille_pa + flow.dp_end_pa + flow.dp_kinetic_pa, flow.dp_total_pa, 1e-9);
	check_near("shear", 952.0, flow.wall_shear_per_s, 0.5);
	check_near("heating", 0.0174, flow.heating_k, 0.0001);
}

/* Own example after Barr's relation eta = pi R^4 dp / (8 Q (L + n R)) - m rho Q / (8 pi (L + n R)), solved for
 * viscosity: 65.78837 mPa·s with m = 1.12, n = 0.6, 65.98574 with n = 0 (no published source). */
static void corrections_solved_for_viscosity(void **state) {
	(void)state;
	fl_capillary tube = {3e-3, 0.30, 2e-6, 1.0, 0.0, 0.6, 1.12};
	fl_flow flow;
	assert_int_equal(fl_physics_capillary(&tube, 65.78837e-3, 950.0, &flow, NULL), FL_OK);
	check_near("20 kPa, ends and kinetic", 20e3, flow.dp_total_pa, 0.01);
	tube.end_coefficient = 0.0;
	assert_int_equal(fl_physics_capillary(&tube, 65.98574e-3, 950.0, &flow, NULL), FL_OK);
	check_near("20 kPa, kinetic only", 20e3, flow.dp_total_pa, 0.01);
}

static void poiseuille_inverts_the_friction(void **state) {
	(void)state;
	fl_flow flow;
	assert_int_equal(fl_physics_capillary(&unit, 0.0123, 870.0, &flow, NULL), FL_OK);
	check_close("viscosity back", 0.0123,
	            fl_physics_poiseuille_mu(unit.bore_m, flow.dp_poiseuille_pa / unit.length_m, flow.flow_m3_s), 1e-13);
}

static void kinetic_part_does_not_depend_on_viscosity(void **state) {
	(void)state;
	fl_flow thin, thick;
	assert_int_equal(fl_physics_capillary(&unit, 0.002, 900.0, &thin, NULL), FL_OK);
	assert_int_equal(fl_physics_capillary(&unit, 0.045, 900.0, &thick, NULL), FL_OK);
	check_near("kinetic", thin.dp_kinetic_pa, thick.dp_kinetic_pa, 0.0);
	assert_true(thin.reynolds > thick.reynolds);
}

static void bore_loss_and_gain(void **state) {
	(void)state;
	check_near("no gain, no loss", 0.0, fl_physics_bore_loss(0.0), 0.0);
	for (double loss = 0.001; loss < 0.2; loss += 0.001)
		check_near("loss back", loss, fl_physics_bore_loss(pow(1.0 - loss, -4.0) - 1.0), 1e-14);
	check_near("1 % of bore is 4.1 % of gain", 0.01, fl_physics_bore_loss(0.0410), 1e-4);
}

static void impossible_capillaries(void **state) {
	(void)state;
	fl_flow flow;
	fl_capillary bad = unit;
	bad.bore_m = 0.0;
	assert_int_equal(fl_physics_capillary(&bad, 0.02, 900.0, &flow, NULL), FL_E_RANGE);
	bad = unit;
	bad.length_m = NAN;
	assert_int_equal(fl_physics_capillary(&bad, 0.02, 900.0, &flow, NULL), FL_E_RANGE);
	bad = unit;
	bad.slip_fraction = 1.0;
	assert_int_equal(fl_physics_capillary(&bad, 0.02, 900.0, &flow, NULL), FL_E_RANGE);
	bad = unit;
	bad.displacement_m3_rev = -1e-6;
	bad.pump_speed_rev_s = -1.0;
	assert_int_equal(fl_physics_capillary(&bad, 0.02, 900.0, &flow, NULL), FL_E_RANGE);
	bad = unit;
	bad.kinetic_coefficient = -1.0;
	assert_int_equal(fl_physics_capillary(&bad, 0.02, 900.0, &flow, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_capillary(&unit, 0.0, 900.0, &flow, NULL), FL_E_RANGE);
	assert_int_equal(fl_physics_capillary(&unit, 0.02, INFINITY, &flow, NULL), FL_E_RANGE);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(full_scale_of_the_unit),
	    cmocka_unit_test(corrections_solved_for_viscosity),
	    cmocka_unit_test(poiseuille_inverts_the_friction),
	    cmocka_unit_test(kinetic_part_does_not_depend_on_viscosity),
	    cmocka_unit_test(bore_loss_and_gain),
	    cmocka_unit_test(impossible_capillaries),
	};
	return cmocka_run_group_tests_name("capillary", tests, NULL, NULL);
}
