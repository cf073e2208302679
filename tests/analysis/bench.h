/* tests/analysis/bench.h - an invented bench in memory: five oils, an instrument, equipment, a procedure; sessions are
 * filled reading by reading. Nothing is parsed, so that a test sees only the analysis.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_TEST_BENCH_H
#define FOUNDLEFT_TEST_BENCH_H

#include "check.h"
#include "foundleft/analysis.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { BENCH_OILS = 5, BENCH_TEMPS = 5, BENCH_POINTS = 16, BENCH_READINGS = 256, BENCH_EQUIPMENT = 6 };

/* Invented oils (comparison only): mm2/s and kg/m3 at 20, 40, 60, 80, 100 °C. */
static const double bench_nu[BENCH_OILS][BENCH_TEMPS] = {{2.968, 2.05, 1.522, 1.188, 0.96},
                                                         {20.71, 10, 5.745, 3.719, 2.62},
                                                         {50.08, 20.4, 10.38, 6.147, 4.05},
                                                         {93.92, 34.6, 16.32, 9.123, 5.75},
                                                         {144.4, 49.2, 21.9, 11.72, 7.15}};
static const double bench_rho[BENCH_OILS][BENCH_TEMPS] = {{786.6, 772.9, 759.1, 745.2, 731.2},
                                                          {841.8, 828.9, 815.8, 802.7, 789.5},
                                                          {852.8, 840.1, 827.2, 814.3, 801.3},
                                                          {858.9, 846.2, 833.4, 820.6, 807.6},
                                                          {862.9, 850.3, 837.7, 825.0, 812.2}};
static const double bench_U_percent[BENCH_TEMPS] = {0.20, 0.20, 0.20, 0.30, 0.30};
static const char *const bench_names[BENCH_OILS] = {"LK-2", "LK-10", "LK-20", "LK-35", "LK-50"};
static const char *const bench_lots[BENCH_OILS] = {"A", "B", "C", "D", "E"};

typedef struct bench {
	fl_oil_point oil_points[BENCH_OILS][BENCH_TEMPS];
	double U_nu[BENCH_OILS][BENCH_TEMPS], U_rho[BENCH_OILS][BENCH_TEMPS];
	fl_oil oils[BENCH_OILS];
	fl_equipment equipment[BENCH_EQUIPMENT];
	fl_instrument instrument;
	fl_stock stock;
	fl_plan_point plan[BENCH_POINTS];
	fl_procedure procedure;
	fl_session_point points[BENCH_POINTS];
	fl_session_equipment used[BENCH_EQUIPMENT];
	fl_session_text text;
	fl_reading readings[BENCH_READINGS];
	fl_session session;
	fl_result result;
	fl_error err;
} bench;

static inline void bench_oils(bench *b, fl_day certified_on) {
	for (int i = 0; i < BENCH_OILS; i++) {
		for (int t = 0; t < BENCH_TEMPS; t++) {
			b->U_nu[i][t] = bench_U_percent[t] / 100.0;
			b->U_rho[i][t] = 0.4;
			b->oil_points[i][t] = (fl_oil_point){20.0 + 20.0 * t, bench_nu[i][t] * 1e-6, b->U_nu[i][t] / 2.0,
			                                     bench_rho[i][t], b->U_rho[i][t] / 2.0};
		}
		b->oils[i] = (fl_oil){.name = bench_names[i],
		                      .lot = bench_lots[i],
		                      .certificate = bench_lots[i],
		                      .certificate_lot = bench_lots[i],
		                      .issuer = "Lanternmoor",
		                      .certified_on = certified_on,
		                      .use_before = certified_on + 365,
		                      .opened_on = FL_NO_DAY,
		                      .table = {b->oil_points[i], BENCH_TEMPS},
		                      .k_nu = 2.0,
		                      .k_rho = 2.0,
		                      .U_nu_rel = b->U_nu[i],
		                      .U_rho_kg_m3 = b->U_rho[i]};
		b->points[i] = (fl_session_point){.oil = bench_names[i], .lot = bench_lots[i]};
	}
}

static inline void bench_equipment(bench *b) {
	fl_day september = fl_day_from_civil(2025, 9, 2), october = fl_day_from_civil(2025, 10, 11);
	fl_equipment thermometer = {.id = "TH-7", .role = FL_ROLE_THERMOMETER, .calibrated_on = september};
	thermometer.due_on = september + 365;
	thermometer.unit = FL_U_CELSIUS;
	thermometer.low = 0.0;
	thermometer.high = 150.0;
	thermometer.resolution = 0.01;
	thermometer.U = 0.03;
	thermometer.k = 2.0;
	thermometer.drift_per_year = 0.02;
	fl_equipment meter = thermometer;
	meter.id = "MA-3";
	meter.role = FL_ROLE_CURRENT_METER;
	meter.calibrated_on = october;
	meter.due_on = october + 365;
	meter.unit = FL_U_MA;
	meter.high = 24.0;
	meter.resolution = 0.001;
	meter.U = 0.003;
	meter.drift_per_year = 0.002;
	fl_equipment bath = thermometer;
	bath.id = "BA-2";
	bath.role = FL_ROLE_BATH;
	bath.U = 0.05;
	bath.k = 0.0;
	bath.drift_per_year = 0.0;
	fl_equipment tachometer = thermometer; /* overdue since March */
	tachometer.id = "TC-1";
	tachometer.role = FL_ROLE_TACHOMETER;
	tachometer.unit = FL_U_R_MIN;
	tachometer.calibrated_on = fl_day_from_civil(2024, 3, 1);
	tachometer.due_on = fl_day_from_civil(2026, 3, 1);
	fl_equipment standard = thermometer;
	standard.id = "DP-1";
	standard.role = FL_ROLE_PRESSURE_STANDARD;
	standard.unit = FL_U_MBAR;
	standard.U = 0.05;
	standard.resolution = 0.01;
	standard.drift_per_year = 0.0;
	b->equipment[0] = thermometer;
	b->equipment[1] = meter;
	b->equipment[2] = bath;
	b->equipment[3] = tachometer;
	b->equipment[4] = standard;
}

static inline void bench_use(bench *b, const char *id) {
	for (size_t i = 0; i < b->stock.equipment_count; i++)
		if (strcmp(b->equipment[i].id, id) == 0)
			b->used[b->session.equipment_count++] =
			    (fl_session_equipment){.role = b->equipment[i].role, .id = b->equipment[i].id};
}

static inline void bench_instrument(bench *b) {
	b->instrument = (fl_instrument){.tag = "VT-1", .serial = "FL-0417"};
	b->instrument.scale = (fl_scale){FL_DIAL_MM2_S, 0.0, 50.0, 900.0, NAN, FL_SIGNAL_4_20_MA};
	b->instrument.has_geometry = true;
	b->instrument.capillary = (fl_capillary){2.2e-3, 0.4, 1.5e-6, 40.0 / 60.0, 0.005, 1.178, 1.12};
	b->instrument.dp_full_pa = 31321.0;
	b->instrument.hysteresis_limit_pct_span = NAN;
}

static inline void bench_procedure(bench *b) {
	b->procedure = (fl_procedure){.medium = FL_MEDIUM_OIL, .stopped_zero = true, .points = b->plan, .point_count = 5};
	b->procedure.cycles = 3;
	b->procedure.falling = true;
	b->procedure.readings = 3;
	b->procedure.tolerance = (fl_band){FL_BAND_PERCENT_SPAN, 2.0};
	b->procedure.adjust_limit = (fl_band){FL_BAND_PERCENT_SPAN, 1.5};
	b->procedure.hysteresis_limit_pct_span = 0.5;
	b->procedure.linearity_limit_pct_span = 0.5;
	b->procedure.rule = FL_RULE_FOUR_STATES;
	b->procedure.coverage_probability = FL_COVERAGE_2_SIGMA;
	b->procedure.oil_interpolation_half_width_rel = 0.0005;
	b->procedure.oil_ageing_per_year_rel = 0.001;
}

/* The invented bench on 2026-04-14, with no reading yet. */
static inline void bench_begin(bench *b) {
	*b = (bench){0};
	bench_oils(b, fl_day_from_civil(2025, 11, 18));
	bench_equipment(b);
	bench_instrument(b);
	bench_procedure(b);
	b->stock = (fl_stock){.oils = b->oils, .oil_count = BENCH_OILS, .equipment = b->equipment, .equipment_count = 5};
	b->stock.instruments = &b->instrument;
	b->stock.instrument_count = 1;
	b->text = (fl_session_text){"instrument", "VT-1", ""};
	b->session = (fl_session){.day = fl_day_from_civil(2026, 4, 14), .texts = &b->text, .text_count = 1};
	b->session.points = b->points;
	b->session.point_count = BENCH_OILS;
	b->session.equipment = b->used;
	b->session.readings = b->readings;
	bench_use(b, "TH-7");
	bench_use(b, "MA-3");
	bench_use(b, "BA-2");
}

/* Same bench, the transmitter alone: full scale at 10 kPa, no equipment named, so that nothing stands in a budget
 * but what the test puts there. */
static inline void bench_begin_pressure(bench *b) {
	bench_begin(b);
	b->procedure.medium = FL_MEDIUM_PRESSURE;
	b->procedure.stopped_zero = false;
	b->instrument.dp_full_pa = 10000.0;
	b->session.equipment_count = 0;
	for (int i = 0; i < BENCH_POINTS; i++)
		b->points[i] = (fl_session_point){.oil = "", .lot = ""};
	b->session.point_count = BENCH_POINTS;
}

static inline fl_reading *bench_read(bench *b, fl_run_kind run, int cycle, fl_pass pass, int point, double output) {
	assert_true(b->session.reading_count < BENCH_READINGS);
	fl_reading *r = &b->readings[b->session.reading_count++];
	*r = (fl_reading){.run = run, .cycle = cycle, .pass = pass, .point = point, .typed = "", .unit = FL_U_MA};
	r->output = output;
	r->sequence = (int)b->session.reading_count;
	r->number = 1;
	for (size_t i = 0; i + 1 < b->session.reading_count; i++)
		if (b->readings[i].run == run && b->readings[i].cycle == cycle && b->readings[i].pass == pass &&
		    b->readings[i].point == point)
			r->number++;
	return r;
}

static inline fl_reading *bench_oil(bench *b, int cycle, fl_pass pass, int point, double output, double temp_c) {
	fl_reading *r = bench_read(b, FL_RUN_AS_FOUND, cycle, pass, point, output);
	r->has_temp = point != FL_POINT_ZERO;
	r->temp_c = temp_c;
	return r;
}

static inline fl_reading *bench_dp(bench *b, int cycle, fl_pass pass, int point, double output, double applied_pa) {
	fl_reading *r = bench_read(b, FL_RUN_AS_FOUND, cycle, pass, point, output);
	r->has_applied = true;
	r->applied_pa = applied_pa;
	return r;
}

/* Position of an oil at 40 °C, which is certified: nu rho / dial density / span, from the table alone. */
static inline double bench_x40(const bench *b, int oil) {
	const fl_scale *scale = &b->instrument.scale;
	return bench_nu[oil][1] * bench_rho[oil][1] / scale->dial_density_kg_m3 / scale->high;
}

static inline fl_run_result *bench_assess(bench *b) {
	fl_status status = fl_analysis_session(&b->session, &b->procedure, &b->stock, &b->result, &b->err);
	if (status < 0)
		print_error("%s: %s\n", b->err.field, b->err.message);
	assert_true(status >= 0);
	return &b->result.runs[FL_RUN_AS_FOUND];
}

static inline void bench_end(bench *b) {
	fl_result_free(&b->result);
}

static inline bool bench_says(const char *const *sentences, size_t count, const char *part) {
	for (size_t i = 0; i < count; i++)
		if (strstr(sentences[i], part))
			return true;
	return false;
}
#define bench_not_determined(run, part) \
	bench_says((const char *const *)(run)->not_determined, (run)->not_determined_count, part)
#define bench_warns(b, part) bench_says((const char *const *)(b)->result.warnings, (b)->result.warning_count, part)
#define bench_untraceable(b, part) \
	bench_says((const char *const *)(b)->result.not_traceable, (b)->result.not_traceable_count, part)

#endif
