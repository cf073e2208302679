/* test_reference.c - single readings brought to their reference, by numbers that can be followed by hand.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Oils, instruments and equipment are invented; nothing is parsed. Sources stand beside the numbers. */
#include "check.h"
#include "foundleft/reference.h"

#include <math.h>
#include <string.h>

/* An invented oil: 10 mm²/s and 828.9 kg/m³ at 40 °C, 20.71 mm²/s and 841.8 kg/m³ at 20 °C. */
static const fl_oil_point oil_points[] = {
    {20.0, 20.71e-6, 0.001, 841.8, 0.2}, {40.0, 10.0e-6, 0.001, 828.9, 0.2}, {60.0, 5.745e-6, 0.001, 815.8, 0.2}};
static const fl_oil oil = {.name = "LK-10", .lot = "B", .table = {oil_points, 3}};

enum { ITEMS = 3 };
typedef struct bench {
	fl_equipment items[ITEMS];
	fl_correction corrections[ITEMS];
	fl_stock stock;
	fl_session_equipment used[ITEMS];
	fl_session session;
	fl_procedure procedure;
	fl_instrument instrument;
	fl_reference reference;
	fl_reading_result result;
	fl_error err;
} bench;

static void bench_begin(bench *b, fl_medium medium, fl_scale scale) {
	*b = (bench){.stock = {.equipment = b->items}, .session = {.equipment = b->used}};
	b->procedure.medium = medium;
	b->instrument = (fl_instrument){.tag = "VT-1", .scale = scale, .dp_full_pa = NAN};
}

/* Equipment in use, with the same correction everywhere. */
static void bench_use(bench *b, const char *id, fl_role role, fl_unit unit, double add) {
	size_t i = b->stock.equipment_count++;
	assert_true(i < ITEMS);
	b->corrections[i] = (fl_correction){.at = 0.0, .add = add};
	b->items[i] =
	    (fl_equipment){.id = id, .role = role, .unit = unit, .corrections = &b->corrections[i], .correction_count = 1};
	b->used[b->session.equipment_count++] = (fl_session_equipment){.role = role, .id = id};
}

static fl_status bench_reduce(bench *b, const fl_oil *of, const fl_reading *reading) {
	assert_int_equal(fl_reference_of(&b->session, &b->procedure, &b->stock, &b->instrument, &b->reference, &b->err),
	                 FL_OK);
	return fl_reference_reading(&b->reference, of, reading, &b->result, &b->err);
}

static fl_scale scale_50(fl_signal signal) {
	return (fl_scale){FL_DIAL_MM2_S, 0.0, 50.0, 900.0, NAN, signal};
}

static fl_reading oil_reading(double output, fl_unit unit, double temp_c) {
	return (fl_reading){.output = output, .unit = unit, .has_temp = true, .temp_c = temp_c};
}

static fl_reading pressure_reading(double output, double applied_pa) {
	return (fl_reading){.output = output, .unit = FL_U_MA, .has_applied = true, .applied_pa = applied_pa};
}

/* ---- the oil and the density of the dial ---- */

/* By hand: equivalent viscosity 10 * 828.9 / 900 = 9.21 mm²/s, of 50 mm²/s 18.42 %, 4 + 16 * 0.1842 = 6.9472 mA; the
 * output stands at (7.1072 - 4) / 16 = 19.42 %, so the error is 1 % of span, 0.5 mm²/s, 0.01 / 0.1842 of reading. */
static void a_dial_in_mm2_s_shows_the_viscosity_at_its_own_density(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_OIL, scale_50(FL_SIGNAL_4_20_MA));
	fl_reading reading = oil_reading(7.1072, FL_U_MA, 40.0);
	assert_int_equal(bench_reduce(&b, &oil, &reading), FL_OK);
	check_near("equivalent viscosity", 9.21e-6, b.result.ideal.equivalent_m2_s, 1e-17);
	check_near("dial", 9.21, b.result.ideal.dial, 1e-10);
	check_near("ideal output", 6.9472, b.result.ideal.output, 1e-10);
	check_near("error", 0.01, b.result.error_span, 1e-12);
	check_near("error on the dial", 0.5, b.result.error_dial, 1e-10);
	check_near("error of reading", 0.01 / 0.1842, b.result.error_reading, 1e-10);
	assert_true(isnan(b.result.applied_pa) && b.result.used && b.result.reading == &reading);
}

/* By hand: 10 mm²/s * 828.9 kg/m³ = 8.289 mPa·s; the density that the scale carries beside is not looked at. */
static void a_dial_in_mpa_s_needs_no_density(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_OIL, (fl_scale){FL_DIAL_MPA_S, 0.0, 50.0, 900.0, NAN, FL_SIGNAL_4_20_MA});
	fl_reading reading = oil_reading(4.0 + 16.0 * 8.289 / 50.0, FL_U_MA, 40.0);
	assert_int_equal(bench_reduce(&b, &oil, &reading), FL_OK);
	check_near("dial", 8.289, b.result.ideal.dial, 1e-10);
	check_near("error", 0.0, b.result.error_span, 1e-12);
}

/* ---- what the certificates correct ---- */

/* By hand: 39.95 + 0.05 °C meets the certified 40 °C, 7.0972 + 0.010 mA the output of the first test. The thermometer
 * is stated once in °C and once in K: a correction is a difference and stays the same. */
static void meter_and_thermometer_are_corrected(void **state) {
	static const fl_unit units[] = {FL_U_CELSIUS, FL_U_KELVIN};
	(void)state;
	for (size_t i = 0; i < 2; i++) {
		bench b;
		bench_begin(&b, FL_MEDIUM_OIL, scale_50(FL_SIGNAL_4_20_MA));
		bench_use(&b, "TH-8", FL_ROLE_THERMOMETER, units[i], 0.05);
		bench_use(&b, "MA-8", FL_ROLE_CURRENT_METER, FL_U_MA, 0.010);
		fl_reading reading = oil_reading(7.0972, FL_U_MA, 39.95);
		assert_int_equal(bench_reduce(&b, &oil, &reading), FL_OK);
		check_near("temperature", 40.0, b.result.oil.temp_c, 1e-12);
		check_near("output", 7.1072, b.result.output, 1e-12);
		check_near("error", 0.01, b.result.error_span, 1e-12);
	}
}

/* A gauge in bar, +0.002 bar, and an output typed in psi. 1 psi = 6894.757 Pa (NIST SP 811, appendix B.8), so
 * 7.25 psi = 0.4998699 bar, with the correction 0.5018699 bar, (0.5018699 - 0.2) / 0.8 = 0.3773374 of span. */
static void psi_is_typed_where_the_signal_is_bar(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_OIL, scale_50(FL_SIGNAL_02_1_BAR));
	bench_use(&b, "PG-5", FL_ROLE_PRESSURE_GAUGE, FL_U_BAR, 0.002);
	fl_reading reading = oil_reading(7.25, FL_U_PSI, 40.0);
	assert_int_equal(bench_reduce(&b, &oil, &reading), FL_OK);
	check_near("output", 0.5018699, b.result.output, 1e-7);
	check_near("fraction of span", 0.3773374, b.result.output_x, 2e-7);
	check_near("ideal output", 0.2 + 0.8 * 0.1842, b.result.ideal.output, 1e-12);
}

/* 0.1 psi has no exact way to bar and back: without a correction it must not pass through. */
static void a_correction_of_nothing_leaves_every_digit(void **state) {
	const fl_correction none[] = {{0.0, 0.0}, {1.0, 0.0}};
	const fl_equipment gauge = {.id = "PG-5", .unit = FL_U_BAR, .corrections = none, .correction_count = 2};
	(void)state;
	for (int i = 1; i < 200; i++)
		check_near("as typed", i / 10.0, fl_reference_corrected(&gauge, i / 10.0, FL_U_PSI), 0.0);
	check_near("no equipment", 12.345, fl_reference_corrected(NULL, 12.345, FL_U_MA), 0.0);
	check_near("one unit", 0.1, fl_reference_in_unit(0.1, FL_U_PSI, FL_U_PSI), 0.0);
}

/* ---- injected pressure ---- */

/* A scale from 10 to 50 mm²/s that takes 300 mbar at 50 mm²/s. By hand: pressure is proportional to viscosity, so
 * 10 mm²/s gives 60 mbar (0 % of span), 30 mm²/s gives 180 mbar (50 %), and no pressure stands at -25 %. */
static void a_scale_above_zero_wants_pressure_at_its_lower_end(void **state) {
	static const double mbar[] = {60.0, 180.0, 300.0, 0.0}, x[] = {0.0, 0.5, 1.0, -0.25}, ma[] = {4.0, 12.0, 20.0, 0.0};
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_PRESSURE, (fl_scale){FL_DIAL_MM2_S, 10.0, 50.0, 900.0, NAN, FL_SIGNAL_4_20_MA});
	b.instrument.dp_full_pa = 30000.0;
	for (size_t i = 0; i < 4; i++) {
		fl_reading reading = pressure_reading(ma[i] + 0.16, mbar[i] * 100.0);
		assert_int_equal(bench_reduce(&b, NULL, &reading), FL_OK);
		check_near("x", x[i], b.result.ideal.x, 1e-12);
		check_near("ideal output", ma[i], b.result.ideal.output, 1e-11);
		check_near("error", 0.01, b.result.error_span, 1e-12);
		check_near("x of pressure", x[i], fl_reference_x_of_pressure(&b.reference, mbar[i] * 100.0), 1e-12);
		check_near("pressure at x", mbar[i] * 100.0, fl_reference_pressure_at(&b.reference, x[i]), 1e-8);
	}
}

/* By hand: the standard reads 1 mbar low, so 179 mbar are 18 000 Pa: the middle of the scale above. */
static void the_pressure_standard_is_corrected(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_PRESSURE, (fl_scale){FL_DIAL_MM2_S, 10.0, 50.0, 900.0, NAN, FL_SIGNAL_4_20_MA});
	b.instrument.dp_full_pa = 30000.0;
	bench_use(&b, "DP-1", FL_ROLE_PRESSURE_STANDARD, FL_U_MBAR, 1.0);
	fl_reading reading = pressure_reading(12.0, 17900.0);
	assert_int_equal(bench_reduce(&b, NULL, &reading), FL_OK);
	check_near("applied", 18000.0, b.result.applied_pa, 1e-8);
	check_near("error", 0.0, b.result.error_span, 1e-12);
}

/* Hagen-Poiseuille with end and kinetic corrections as physics.h states it, 128 mu (L + 1.178 d / 2) Q / (pi d^4) +
 * 1.12 rho v²: 50 mm²/s at 900 kg/m³, bore 2.2 mm, length 400 mm, 1.5 cm³/rev at 40 r/min less 0.5 % give 31 251 Pa
 * and 69 Pa (own computation). What the plate states goes before. */
static void full_scale_pressure_is_the_plates_else_the_geometrys(void **state) {
	fl_instrument instrument = {.tag = "VT-1", .scale = scale_50(FL_SIGNAL_4_20_MA), .dp_full_pa = NAN};
	(void)state;
	assert_true(isnan(fl_reference_dp_full(&instrument)));
	instrument.has_geometry = true;
	instrument.capillary = (fl_capillary){2.2e-3, 0.4, 1.5e-6, 40.0 / 60.0, 0.005, 1.178, 1.12};
	check_near("by geometry", 31320.0, fl_reference_dp_full(&instrument), 2.0);
	instrument.dp_full_pa = 30000.0;
	check_near("by the plate", 30000.0, fl_reference_dp_full(&instrument), 0.0);
}

/* ---- the stopped zero ---- */

/* Redwood No. 1 begins at 34 s: no viscosity at all has no division, so neither has the zero's ideal value. Scale 40 to
 * 200 s: nu = 0.260 * 40 - 179 / 40 = 5.925 and 0.247 * 200 - 50 / 200 = 49.15 mm²/s (formula read on a public page,
 * see tests/published/redwood.txt). Zero stands at -5.925 / (49.15 - 5.925) of span. */
static void a_dial_in_seconds_has_no_division_at_the_stopped_zero(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_OIL, (fl_scale){FL_DIAL_REDWOOD, 40.0, 200.0, 900.0, NAN, FL_SIGNAL_4_20_MA});
	fl_reading reading = {.point = FL_POINT_ZERO, .output = 3.9, .unit = FL_U_MA};
	double x = -5.925 / 43.225;
	assert_int_equal(bench_reduce(&b, NULL, &reading), FL_OK);
	check_near("x", x, b.result.ideal.x, 1e-12);
	check_near("ideal output", 4.0 + 16.0 * x, b.result.ideal.output, 1e-11);
	check_near("error", -0.1 / 16.0 - x, b.result.error_span, 1e-12);
	assert_true(isnan(b.result.ideal.dial) && isnan(b.result.error_dial) && isnan(b.result.error_reading));
}

/* ---- what cannot be reduced ---- */

static void refused(bench *b, const fl_oil *of, const fl_reading *reading, const char *part) {
	b->err = (fl_error){0};
	assert_int_equal(bench_reduce(b, of, reading), FL_E_VALUE);
	assert_non_null(strstr(b->err.message, part));
	assert_true(isnan(b->result.error_span) && isnan(b->result.ideal.output));
}

static void what_is_missing_is_said(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_OIL, scale_50(FL_SIGNAL_4_20_MA));
	fl_reading reading = oil_reading(7.1, FL_U_MA, 40.0);
	refused(&b, NULL, &reading, "the oil is not known");
	reading.struck = true;
	refused(&b, NULL, &reading, "the oil is not known");
	check_near("what is known stays", 7.1, b.result.output, 0.0);
	assert_false(b.result.used);
	reading.has_temp = false;
	refused(&b, &oil, &reading, "temperature of the oil is missing");
	reading.unit = FL_U_BAR;
	refused(&b, &oil, &reading, "an output in bar does not belong to a signal of 4–20 mA");
	bench_begin(&b, FL_MEDIUM_PRESSURE, scale_50(FL_SIGNAL_4_20_MA));
	reading = pressure_reading(12.0, 15000.0);
	refused(&b, NULL, &reading, "pressure at full scale is not known: state it for VT-1");
	assert_true(isnan(fl_reference_x_of_pressure(&b.reference, 1.0)) &&
	            isnan(fl_reference_pressure_at(&b.reference, 0.5)));
	reading.has_applied = false;
	refused(&b, NULL, &reading, "injected differential pressure is missing");
}

static void equipment_in_a_foreign_unit_is_refused(void **state) {
	bench b;
	(void)state;
	bench_begin(&b, FL_MEDIUM_OIL, scale_50(FL_SIGNAL_02_1_BAR));
	bench_use(&b, "PG-5", FL_ROLE_PRESSURE_GAUGE, FL_U_MA, 0.0);
	assert_int_equal(fl_reference_of(&b.session, &b.procedure, &b.stock, &b.instrument, &b.reference, &b.err),
	                 FL_E_VALUE);
	assert_string_equal(b.err.message, "PG-5 is stated in mA, which is no unit for a pressure gauge");
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(a_dial_in_mm2_s_shows_the_viscosity_at_its_own_density),
	    cmocka_unit_test(a_dial_in_mpa_s_needs_no_density),
	    cmocka_unit_test(meter_and_thermometer_are_corrected),
	    cmocka_unit_test(psi_is_typed_where_the_signal_is_bar),
	    cmocka_unit_test(a_correction_of_nothing_leaves_every_digit),
	    cmocka_unit_test(a_scale_above_zero_wants_pressure_at_its_lower_end),
	    cmocka_unit_test(the_pressure_standard_is_corrected),
	    cmocka_unit_test(full_scale_pressure_is_the_plates_else_the_geometrys),
	    cmocka_unit_test(a_dial_in_seconds_has_no_division_at_the_stopped_zero),
	    cmocka_unit_test(what_is_missing_is_said),
	    cmocka_unit_test(equipment_in_a_foreign_unit_is_refused),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
