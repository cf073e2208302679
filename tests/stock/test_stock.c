/* test_stock.c - the sample stock, what is computed from stock, and that an excerpt says the same as its file.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "foundleft/document.h"
#include "foundleft/stock.h"

#include <math.h>
#include <string.h>

#define SAMPLE SOURCE_DIR "/sample-sessions/stock/"

static fl_stock stock;

static void load(const char *path) {
	fl_error err = {0};
	char line[1200];
	if (fl_stock_load(&stock, fl_io_system(), path, &err) != FL_OK)
		fail_msg("%s", fl_error_line(&err, line, sizeof line));
}

static int load_sample(void **state) {
	(void)state;
	load(SAMPLE "oils.yaml");
	load(SAMPLE "equipment.yaml");
	load(SAMPLE "instruments.yaml");
	return 0;
}

static int free_stock(void **state) {
	(void)state;
	fl_stock_free(&stock);
	return 0;
}

static fl_day day(int year, int month, int day_of_month) {
	return fl_day_from_civil(year, month, day_of_month);
}

static void check_line(const fl_error *err, const char *end) {
	char line[1200];
	fl_error_line(err, line, sizeof line);
	if (strlen(line) < strlen(end) || strcmp(line + strlen(line) - strlen(end), end) != 0)
		fail_msg("want the end \"%s\", got \"%s\"", end, line);
}

/* ---- the sample stock ----------------------------------------------------------------------------------------------
 */

static void loads_the_sample_stock(void **state) {
	(void)state;
	assert_int_equal(30, stock.oil_count);
	assert_int_equal(6, stock.equipment_count);
	assert_int_equal(2, stock.instrument_count);
	for (size_t i = 0; i < stock.oil_count; i++)
		assert_int_equal(5, stock.oils[i].table.count);
}

/* Figures of the invented certificate Lanternmoor-2511B. */
static void reads_an_oil(void **state) {
	(void)state;
	const fl_oil *oil = fl_stock_oil(&stock, "2511B");
	assert_non_null(oil);
	assert_string_equal("LK-10", oil->name);
	assert_string_equal("Lanternmoor-2511B", oil->certificate);
	assert_string_equal("2511B", oil->certificate_lot);
	assert_int_equal(day(2025, 11, 18), oil->certified_on);
	assert_int_equal(day(2026, 11, 18), oil->use_before);
	assert_int_equal(day(2026, 2, 2), oil->opened_on);
	check_close("nu at 60 degC", 5.745e-6, oil->table.points[2].nu_m2_s, 1e-15);
	check_close("u of nu: 0.20 % over k 2", 0.001, oil->table.points[2].u_nu_rel, 1e-15);
	check_close("U of nu as stated", 0.002, oil->U_nu_rel[2], 1e-15);
	check_close("density", 815.8, oil->table.points[2].rho_kg_m3, 1e-15);
	check_close("u of density: 0.4 over k 2", 0.2, oil->table.points[2].u_rho_kg_m3, 1e-15);
	check_near("k", 2.0, oil->k_nu, 0);
	assert_true(oil->misfit_rel > 0.0 && oil->misfit_rel < 0.001); /* the certificates are a D341 line, rounded */
	assert_null(fl_stock_oil(&stock, "2611B"));
}

static void reads_equipment(void **state) {
	(void)state;
	const fl_equipment *meter = fl_stock_equipment(&stock, "MA-3"), *bath = fl_stock_equipment(&stock, "BA-2");
	assert_non_null(meter);
	assert_non_null(bath);
	assert_int_equal(FL_ROLE_CURRENT_METER, meter->role);
	assert_int_equal(FL_U_MA, meter->unit);
	check_near("high", 24.0, meter->high, 0);
	check_close("U in mA", 0.003, meter->U, 1e-12);
	check_close("resolution in mA", 0.001, meter->resolution, 1e-12);
	check_near("k", 2.0, meter->k, 0);
	check_near("a bath has no k", 0.0, bath->k, 0);
	check_near("uniformity", 0.05, bath->U, 1e-15);
	assert_string_equal("pressure standard", fl_stock_role_text(fl_stock_equipment(&stock, "PS-1")->role));
	assert_null(fl_stock_equipment(&stock, "XX-1"));
}

static void reads_an_instrument(void **state) {
	(void)state;
	const fl_instrument *vt2 = fl_stock_instrument(&stock, "VT-2");
	assert_non_null(vt2);
	assert_string_equal("FL-0418", vt2->serial);
	assert_int_equal(FL_DIAL_MM2_S, vt2->scale.dial_unit);
	assert_int_equal(FL_SIGNAL_4_20_MA, vt2->scale.signal);
	check_near("dial density", 900.0, vt2->scale.dial_density_kg_m3, 0);
	check_near("upper range value", 50.0, vt2->scale.high, 0);
	check_close("bore", 2.2e-3, vt2->capillary.bore_m, 1e-15);
	check_close("pump", 1.5e-6, vt2->capillary.displacement_m3_rev, 1e-15);
	check_close("pump speed", 40.0 / 60.0, vt2->capillary.pump_speed_rev_s, 1e-15);
	check_close("slip", 0.005, vt2->capillary.slip_fraction, 1e-15);
	assert_int_equal(FL_BAND_PERCENT_SPAN, vt2->tolerance.basis);
	check_near("tolerance", 2.0, vt2->tolerance.half_width, 0);
	check_near("hysteresis limit", 0.5, vt2->hysteresis_limit_pct_span, 0);
	check_near("set point", 13.0, vt2->set_point, 1e-12);
	check_near("high alarm", 20.0, vt2->alarm_high, 1e-12);
	assert_string_equal("VT-1", fl_stock_instrument(&stock, "VT-1")->tag);
	assert_null(fl_stock_instrument(&stock, "VT-3"));
}

/* Hagen-Poiseuille by hand for mu 45 mPa.s, Q 0.995 cm3/s, d 2.2 mm, L 400 mm: 128 mu (L + 3 pi/8 d/2) Q / (pi d^4)
 * = 31 252.0 Pa, and 1.12 rho v^2 = 69.1 Pa: together the 313.21 mbar of the invented plate. */
static void computes_the_full_scale_pressure(void **state) {
	(void)state;
	double dp_pa = 0.0;
	fl_instrument bare = *fl_stock_instrument(&stock, "VT-1");
	assert_int_equal(FL_OK, fl_stock_dp_full(&bare, &dp_pa, NULL));
	check_close("full scale", 31321.0, dp_pa, 1e-4);
	bare.has_geometry = false;
	assert_int_equal(FL_E_STATE, fl_stock_dp_full(&bare, &dp_pa, NULL));
}

/* Position = nu rho / 900 / 50: 49.2 * 850.3 / 45000 at a certified temperature, where nothing is interpolated. */
static void places_oils_on_the_scale(void **state) {
	(void)state;
	const fl_instrument *vt1 = fl_stock_instrument(&stock, "VT-1");
	double pct = 0.0;
	assert_int_equal(FL_OK, fl_stock_oil_position(fl_stock_oil(&stock, "2511E"), vt1, 40.0, &pct, NULL));
	check_close("LK-50 at 40 degC", 100.0 * 49.2 * 850.3 / 45000.0, pct, 1e-12);
	assert_int_equal(FL_OK, fl_stock_oil_position(fl_stock_oil(&stock, "2511A"), vt1, 40.0, &pct, NULL));
	check_close("LK-2 at 40 degC", 100.0 * 2.05 * 772.9 / 45000.0, pct, 1e-12);
	assert_int_equal(FL_WARNING, fl_stock_oil_position(fl_stock_oil(&stock, "2511E"), vt1, 18.0, &pct, NULL));
	assert_int_equal(FL_E_RANGE, fl_stock_oil_position(fl_stock_oil(&stock, "2511E"), vt1, 14.0, &pct, NULL));
}

/* At 40 degC each of the year's five oils lies in one window of the workshop calibration, in order. */
static void the_sample_oils_suit_the_workshop_points(void **state) {
	(void)state;
	static const char *const lots[] = {"2511A", "2511B", "2511C", "2511D", "2511E"};
	fl_procedure workshop = {0};
	const char *path = SOURCE_DIR "/templates/workshop-calibration.yaml";
	assert_int_equal(FL_OK, fl_procedure_load(fl_io_system(), path, &workshop, NULL));
	assert_int_equal(5, workshop.point_count);
	for (int i = 0; i < workshop.point_count; i++) {
		double pct = 0.0;
		const fl_oil *oil = fl_stock_oil(&stock, lots[i]);
		assert_int_equal(FL_OK, fl_stock_oil_position(oil, &stock.instruments[0], workshop.bath_c, &pct, NULL));
		check_near("oil's place in the window", workshop.points[i].position_pct_span, pct,
		           0.5 * (workshop.points[i].oil_high_pct_span - workshop.points[i].oil_low_pct_span));
		assert_true(pct > workshop.points[i].oil_low_pct_span && pct < workshop.points[i].oil_high_pct_span);
	}
	fl_procedure_free(&workshop);
}

/* ---- in date -------------------------------------------------------------------------------------------------------
 */

static void knows_what_is_in_date(void **state) {
	(void)state;
	const fl_oil *oil = fl_stock_oil(&stock, "2511B");
	fl_error err = {0};
	assert_int_equal(FL_OK, fl_stock_oil_in_date(oil, day(2026, 4, 14), &err));
	assert_int_equal(FL_OK, fl_stock_oil_in_date(oil, day(2025, 11, 18), &err));
	assert_int_equal(FL_OK, fl_stock_oil_in_date(oil, day(2026, 11, 17), &err));
	assert_int_equal(FL_E_VALUE, fl_stock_oil_in_date(oil, day(2026, 11, 18), &err));
	check_line(&err,
	           "oils[27]: LK-10 lot 2511B has expired: to be used before 2026-11-18, asked for 2026-11-18; take a "
	           "lot in date");
	err = (fl_error){0};
	assert_int_equal(FL_E_VALUE, fl_stock_oil_in_date(oil, day(2025, 11, 17), &err));
	check_line(&err,
	           "LK-10 lot 2511B was certified on 2025-11-18, after 2025-11-17: use a lot that was certified by then");
}

static void knows_overdue_equipment(void **state) {
	(void)state;
	const fl_equipment *tachometer = fl_stock_equipment(&stock, "TC-1");
	fl_error err = {0};
	assert_int_equal(FL_OK, fl_stock_equipment_in_date(tachometer, day(2026, 3, 1), &err));
	assert_int_equal(FL_E_VALUE, fl_stock_equipment_in_date(tachometer, day(2026, 4, 14), &err));
	check_line(&err, "tachometer TC-1 is overdue: due on 2026-03-01, asked for 2026-04-14; take one in date");
	assert_true(err.line > 0);
	assert_string_equal("equipment[5]", err.field);
	assert_int_equal(FL_E_VALUE, fl_stock_equipment_in_date(tachometer, day(2024, 2, 29), NULL));
	assert_int_equal(FL_OK, fl_stock_equipment_in_date(fl_stock_equipment(&stock, "MA-3"), day(2026, 4, 14), NULL));
}

/* ---- corrections and uncertainty ---- */

/* PS-1: corrections 0, +0.02, -0.03, -0.06 mbar at 0, 150, 350, 700 mbar. */
static void applies_corrections(void **state) {
	(void)state;
	const fl_equipment *standard = fl_stock_equipment(&stock, "PS-1");
	assert_int_equal(4, standard->correction_count);
	check_near("at a point", 150.02, fl_stock_corrected(standard, 150.0), 1e-10);
	check_near("halfway", 250.0 - 0.005, fl_stock_corrected(standard, 250.0), 1e-10);
	check_near("below the first", -3.0, fl_stock_corrected(standard, -3.0), 1e-10);
	check_near("above the last", 710.0 - 0.06, fl_stock_corrected(standard, 710.0), 1e-10);
	check_near("none", 12.345, fl_stock_corrected(fl_stock_equipment(&stock, "MA-3"), 12.345), 0);
}

/* The thermometer's lines of the demo's independent budget (invented data): u 0.015 K from U 0.03 K and k 2; drift half
 * width 0.0123 K after 0.61 years at 0.02 K a year; the bath's 0.05 K half width gives 0.0288675 K. */
static void splits_equipment_uncertainty(void **state) {
	(void)state;
	fl_equipment_u u = fl_stock_equipment_u(fl_stock_equipment(&stock, "TH-7"), day(2026, 4, 14));
	check_near("certificate", 0.015, u.certificate, 1e-12);
	check_near("drift", 0.0123, u.drift_half_width, 0.00005); /* printed to four places */
	check_near("resolution", 0.005, u.resolution_half_width, 1e-12);
	u = fl_stock_equipment_u(fl_stock_equipment(&stock, "BA-2"), day(2026, 4, 14));
	check_near("uniformity", 0.0288675, u.certificate, 5e-8);
	check_near("no drift", 0.0, u.drift_half_width, 0);
	u = fl_stock_equipment_u(fl_stock_equipment(&stock, "TH-7"), day(2025, 1, 1));
	check_near("no drift before the calibration", 0.0, u.drift_half_width, 0);
}

/* ---- excerpts: what the journal keeps says the same ---- */

static void check_same_oil(const fl_oil *a, const fl_oil *b) {
	assert_string_equal(a->name, b->name);
	assert_string_equal(a->lot, b->lot);
	assert_string_equal(a->certificate, b->certificate);
	assert_string_equal(a->certificate_lot, b->certificate_lot);
	assert_string_equal(a->issuer, b->issuer);
	assert_int_equal(a->certified_on, b->certified_on);
	assert_int_equal(a->use_before, b->use_before);
	assert_int_equal(a->opened_on, b->opened_on);
	assert_int_equal(a->table.count, b->table.count);
	assert_memory_equal(a->table.points, b->table.points, a->table.count * sizeof a->table.points[0]);
	assert_memory_equal(a->U_nu_rel, b->U_nu_rel, a->table.count * sizeof a->U_nu_rel[0]);
	assert_memory_equal(a->U_rho_kg_m3, b->U_rho_kg_m3, a->table.count * sizeof a->U_rho_kg_m3[0]);
	check_near("k", a->k_nu, b->k_nu, 0);
	check_near("k of density", a->k_rho, b->k_rho, 0);
	check_near("misfit", a->misfit_rel, b->misfit_rel, 0);
	assert_string_equal(a->text, b->text);
}

static void check_same_equipment(const fl_equipment *a, const fl_equipment *b) {
	assert_string_equal(a->id, b->id);
	assert_int_equal(a->role, b->role);
	assert_string_equal(a->certificate, b->certificate);
	assert_string_equal(a->issuer, b->issuer);
	assert_int_equal(a->calibrated_on, b->calibrated_on);
	assert_int_equal(a->due_on, b->due_on);
	assert_int_equal(a->unit, b->unit);
	const double pairs[][2] = {{a->low, b->low}, {a->high, b->high}, {a->resolution, b->resolution},
	                           {a->U, b->U},     {a->k, b->k},       {a->drift_per_year, b->drift_per_year}};
	for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++)
		check_near("number of equipment", pairs[i][0], pairs[i][1], 0);
	assert_int_equal(a->correction_count, b->correction_count);
	if (a->correction_count > 0)
		assert_memory_equal(a->corrections, b->corrections, (size_t)a->correction_count * sizeof a->corrections[0]);
	assert_string_equal(a->text, b->text);
}

static void check_same_instrument(const fl_instrument *a, const fl_instrument *b) {
	const char *const texts[][2] = {{a->tag, b->tag},     {a->serial, b->serial},     {a->site, b->site},
	                                {a->owner, b->owner}, {a->position, b->position}, {a->maker_plate, b->maker_plate},
	                                {a->text, b->text}};
	for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
		assert_string_equal(texts[i][0], texts[i][1]);
	assert_int_equal(a->scale.dial_unit, b->scale.dial_unit);
	assert_int_equal(a->scale.signal, b->scale.signal);
	assert_memory_equal(&a->capillary, &b->capillary, sizeof a->capillary);
	const double pairs[][2] = {{a->scale.low, b->scale.low},
	                           {a->scale.high, b->scale.high},
	                           {a->scale.dial_density_kg_m3, b->scale.dial_density_kg_m3},
	                           {a->dp_full_pa, b->dp_full_pa},
	                           {a->supply_hz, b->supply_hz},
	                           {a->motor_speed_rev_s, b->motor_speed_rev_s},
	                           {a->gear_ratio, b->gear_ratio},
	                           {a->tolerance.half_width, b->tolerance.half_width},
	                           {a->adjust_limit.half_width, b->adjust_limit.half_width},
	                           {a->hysteresis_limit_pct_span, b->hysteresis_limit_pct_span},
	                           {a->set_point, b->set_point},
	                           {a->set_point_tolerance, b->set_point_tolerance},
	                           {a->alarm_low, b->alarm_low},
	                           {a->alarm_high, b->alarm_high}};
	for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++)
		check_near("number of an instrument", pairs[i][0], pairs[i][1], 0);
}

static void excerpts_say_the_same(void **state) {
	(void)state;
	fl_stock again = {0};
	fl_error err = {0};
	for (size_t i = 0; i < stock.oil_count; i++) {
		assert_int_equal(FL_OK, fl_stock_parse_oil(&again, stock.oils[i].text, "journal", &err));
		check_same_oil(&stock.oils[i], &again.oils[i]);
	}
	for (size_t i = 0; i < stock.equipment_count; i++) {
		assert_int_equal(FL_OK, fl_stock_parse_equipment(&again, stock.equipment[i].text, "journal", &err));
		check_same_equipment(&stock.equipment[i], &again.equipment[i]);
	}
	for (size_t i = 0; i < stock.instrument_count; i++) {
		assert_int_equal(FL_OK, fl_stock_parse_instrument(&again, stock.instruments[i].text, "journal", &err));
		check_same_instrument(&stock.instruments[i], &again.instruments[i]);
	}
	fl_stock_free(&again);
}

/* ---- other ways of writing ---- */

static void reads_other_dials_and_units(void **state) {
	(void)state;
	const char *text = "instruments:\n"
	                   "- tag: RW-1\n  serial: \"1\"\n  dial: 40 to 200 s Redwood No. 1\n  dial density: 940 kg/m³\n"
	                   "  signal: 3–15 psi\n  tolerance: 5 % of reading\n"
	                   "- {tag: MU-1, serial: \"2\", dial: 0 to 40 mPa·s, signal: 0.2-1.0 bar, tolerance: 0.8 mPa·s}\n"
	                   "- {tag: SU-1, serial: \"3\", dial: 40 to 200 s Saybolt Universal, dial density: 940 kg/m³,\n"
	                   "   dial temperature: 100 °F, signal: 4-20 mA}\n"
	                   "equipment:\n"
	                   "- {id: G, role: pressure gauge, certificate: C, issuer: I, calibrated on: 2025-01-01,\n"
	                   "   due on: 2026-01-01, range: 0 to 30 psi, resolution: 0.01 psi, U: 1 kPa, k: 2.1,\n"
	                   "   drift per year: 0 psi}\n";
	fl_error err = {0};
	assert_int_equal(FL_OK, fl_stock_parse(&stock, text, "input.yaml", &err));
	const fl_instrument *rw = &stock.instruments[0], *mu = &stock.instruments[1], *su = &stock.instruments[2];
	assert_int_equal(FL_DIAL_REDWOOD, rw->scale.dial_unit);
	assert_int_equal(FL_SIGNAL_3_15_PSI, rw->scale.signal);
	assert_int_equal(FL_BAND_PERCENT_READING, rw->tolerance.basis);
	assert_true(isnan(rw->set_point) && isnan(rw->dp_full_pa) && isnan(rw->hysteresis_limit_pct_span));
	assert_false(rw->has_geometry);
	assert_int_equal(FL_DIAL_MPA_S, mu->scale.dial_unit);
	assert_int_equal(FL_BAND_DIAL_UNITS, mu->tolerance.basis);
	check_near("tolerance in dial units", 0.8, mu->tolerance.half_width, 0);
	check_near("100 degF", 37.77777777777778, su->scale.saybolt_temp_c, 1e-12);
	check_close("1 kPa in psi (NIST SP 811: 1 psi = 6.894757 kPa)", 1.0 / 6.894757, stock.equipment[0].U, 1e-7);
}

static void oil_u_may_stand_in_mm2_s_and_k_differ(void **state) {
	(void)state;
	const char *text = "oils:\n- name: LK-10\n  lot: A1\n  certificate: C\n  certificate lot: A1\n  issuer: I\n"
	                   "  certified on: 2025-11-18\n  use before: 2026-11-18\n  k: 2.13\n  k density: 1.96\n  table:\n"
	                   "  - {at: 40 °C, nu: 10 cSt, U: 0.02 cSt, density: 828.9 kg/m³, U density: 0.4 kg/m³}\n"
	                   "  - {at: 60 °C, nu: 5.745 cSt, U: 0.2 %, density: 815.8 kg/m³, U density: 0.4 kg/m³}\n";
	fl_error err = {0};
	assert_int_equal(FL_OK, fl_stock_parse(&stock, text, "input.yaml", &err));
	const fl_oil *oil = fl_stock_oil(&stock, "A1");
	assert_int_equal(FL_NO_DAY, oil->opened_on);
	check_close("0.02 of 10", 0.002, oil->U_nu_rel[0], 1e-12);
	check_close("over k", 0.002 / 2.13, oil->table.points[0].u_nu_rel, 1e-12);
	check_close("density over its own k", 0.4 / 1.96, oil->table.points[0].u_rho_kg_m3, 1e-12);
}

static void a_refused_file_leaves_the_stock_as_it_was(void **state) {
	(void)state;
	fl_error err = {0};
	const char *text = "equipment:\n- {id: NEW, role: timer, certificate: C, issuer: I, calibrated on: 2025-01-01,\n"
	                   "   due on: 2026-01-01, range: 0 to 9999 s, resolution: 0.01 s, U: 0.1 s, k: 2,\n"
	                   "   drift per year: 0 s}\n- {id: BAD}\n";
	assert_int_equal(FL_E_VALUE, fl_stock_parse(&stock, text, "input.yaml", &err));
	assert_int_equal(6, stock.equipment_count);
	assert_null(fl_stock_equipment(&stock, "NEW"));
	assert_int_equal(FL_E_NOT_FOUND, fl_stock_load(&stock, fl_io_system(), "/nonexistent/oils.yaml", NULL));
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_setup_teardown(loads_the_sample_stock, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(reads_an_oil, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(reads_equipment, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(reads_an_instrument, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(computes_the_full_scale_pressure, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(places_oils_on_the_scale, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(the_sample_oils_suit_the_workshop_points, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(knows_what_is_in_date, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(knows_overdue_equipment, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(applies_corrections, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(splits_equipment_uncertainty, load_sample, free_stock),
	    cmocka_unit_test_setup_teardown(excerpts_say_the_same, load_sample, free_stock),
	    cmocka_unit_test_teardown(reads_other_dials_and_units, free_stock),
	    cmocka_unit_test_teardown(oil_u_may_stand_in_mm2_s_and_k_differ, free_stock),
	    cmocka_unit_test_setup_teardown(a_refused_file_leaves_the_stock_as_it_was, load_sample, free_stock),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
