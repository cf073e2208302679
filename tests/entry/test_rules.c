/* test_rules.c - what the conversation asks, refuses and takes, rule by rule.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "failing_io.h"
#include "talk.h"

#include <errno.h>

static void to_thin_oil(talk *t, const char *folder, const char *procedure) {
	talk_begin(t, folder, procedure);
	talk_to_readings(t);
	talk_take(t, "4.025");
	talk_take(t, "4.020");
	assert_int_equal(talk_step(t).point, 0);
}

static char *prompt_of(talk *t) {
	fl_text prompt = {0};
	fl_entry_prompt(t->entry, &prompt);
	assert_non_null(prompt.data);
	return prompt.data;
}

/* ---- readings as people type them ---- */

static void a_line_is_taken_apart(void **state) {
	(void)state;
	static const struct {
		const char *line;
		int count;
		const char *parts[3];
	} cases[] = {
	    {"10.42 mA at 40.02", 2, {"10.42 mA", "40.02"}},
	    {"10.42 40.02", 2, {"10.42", "40.02"}},
	    {"10.42 mA, 40.02 °C, 1.0 bar", 3, {"10.42 mA", "40.02 °C", "1.0 bar"}},
	    {"10,42 mA 40,02", 2, {"10,42 mA", "40,02"}},
	    {"10,42, 40,02, 1,0", 3, {"10,42", "40,02", "1,0"}},
	    {"0.52bar@40.0", 1, {"0.52bar@40.0"}},
	    {"0.52bar @ 40.0°C", 2, {"0.52bar", "40.0°C"}},
	    {"\u22120.1 bar", 1, {"\u22120.1 bar"}},
	    {"10.42;40.02;1", 3, {"10.42", "40.02", "1"}},
	    {"nan", 1, {"nan"}},
	    {"", 0, {NULL}},
	};
	for (int i = 0; i < COUNT(cases); i++) {
		char parts[4][96];
		assert_int_equal(fl_entry_split(cases[i].line, parts, 3), cases[i].count);
		for (int p = 0; p < cases[i].count; p++)
			assert_string_equal(parts[p], cases[i].parts[p]);
	}
}

static void written_numbers_read_back_the_same(void **state) {
	(void)state;
	static const double values[] = {10.42, 0.1, 1.0 / 3.0, 101000.0, -0.0625, 1e-9, 39.91};
	for (int i = 0; i < COUNT(values); i++) {
		char text[32];
		check_near("round trip", values[i], strtod(fl_entry_number(values[i], text), NULL), 0.0);
	}
	char text[32];
	assert_string_equal(fl_entry_number(10.42, text), "10.42");
}

static void decimal_comma_unit_and_line_pressure(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "7,064 mA, 39,91 °C, 0,97 bar");
	const fl_reading *r = &t.journal.session.readings[2];
	assert_string_equal(r->typed, "7,064");
	check_near("output", 7.064, r->output, 0.0);
	check_near("temperature", 39.91, r->temp_c, 0.0);
	check_near("line pressure", 97000.0, r->line_pa, 1e-6);
	assert_int_equal(r->unit, FL_U_MA);
	talk_end(&t);
}

static void an_ambiguous_number_is_asked_never_guessed(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, 17);
	talk_asked(&t, "1,710", "can mean 1.71 or 1710"); /* both possible as r/min */
	talk_take(&t, "1710");
	check_near("motor", 1710.0, fl_session_setting(&t.journal.session, "motor-speed")->value, 0.0);
	talk_end(&t);
}

/* A pneumatic instrument, invented. */
static const char bar_instrument[] = "instruments:\n"
                                     "  - tag: VT-9\n"
                                     "    serial: FL-0999\n"
                                     "    dial: 0 to 50 mm²/s\n"
                                     "    dial density: 900 kg/m³\n"
                                     "    signal: 0.2-1.0 bar\n"
                                     "    tolerance: 2.0 % of span\n";

static void a_pneumatic_output_takes_pressures_only(void **state) {
	talk t;
	talk_load(&t, SMALL_PROCEDURE, "VT-1");
	fl_status status = fl_stock_parse(&t.stock, bar_instrument, "bar.yaml", &t.err);
	if (status < 0)
		print_error("%s\n", t.err.message);
	assert_true(status >= 0);
	t.instrument = fl_stock_instrument(&t.stock, "VT-9");
	scratch_path(*state, "session.flj", t.path);
	assert_int_equal(fl_entry_begin(&t.journal, fl_io_system(), t.path, FL_SOURCE_KEYBOARD, false, fl_day_of(t.now),
	                                t.now, &t.procedure, t.instrument, "0.1.0", &t.err),
	                 FL_OK);
	talk_attach(&t);
	talk_to_readings(&t);
	assert_string_equal(fl_session_equipment_id(&t.journal.session, FL_ROLE_PRESSURE_GAUGE), "PG-5");
	talk_refuse(&t, "4.02 mA", "mA does not fit here");
	talk_refuse(&t, "4.02", "never a reading"); /* bar, far above 1.0: mA typed in a bar field */
	talk_take(&t, "0,2013");
	talk_take(&t, "2.92 psi"); /* 0.2013 bar */
	const fl_reading *r = &t.journal.session.readings[1];
	assert_int_equal(r->unit, FL_U_PSI);
	check_near("psi", 2.92, r->output, 0.0);
	talk_says(&t, "expected 0.2000 bar, error +0.17 % of span");
	talk_end(&t);
}

/* ---- never before it is committed ---- */

static void the_expected_output_stands_only_behind_a_committed_reading(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	char *prompt = prompt_of(&t);
	assert_null(strstr(prompt, "6.9"));
	free(prompt);
	talk_asked(&t, "12.5 at 40.00", "far from what belongs here"); /* +34.7 % of span */
	assert_null(strstr(talk_said(&t), "expected"));
	prompt = prompt_of(&t);
	assert_null(strstr(prompt, "6.9"));
	free(prompt);
	talk_take(&t, "no");
	assert_int_equal(t.journal.session.reading_count, 2);
	talk_take(&t, "7.059 at 40.00");
	/* nu 10 mm²/s, rho 828.9 kg/m³ at 40 °C: 4 + 16 (10 * 828.9 / 900) / 50 = 6.94720 mA (the demo's oil table) */
	talk_says(&t, "expected 6.947 mA, error +0.70 % of span");
	talk_take(&t, "12.5 at 40.00");
	talk_take(&t, "yes");
	assert_int_equal(t.journal.session.questions, 1);
	assert_int_equal(t.journal.session.reading_count, 4);
	talk_end(&t);
}

/* Invented: the thermometer reads 0.05 K low, the meter 0.010 mA low. */
static const char corrected_equipment[] =
    "equipment:\n"
    "  - {id: TH-8, role: thermometer, certificate: TB-1, issuer: invented, calibrated on: 2026-01-05, "
    "due on: 2027-01-05, range: 0 to 150 °C, resolution: 0.01 K, U: 0.03 K, k: 2, drift per year: 0.02 K, "
    "corrections: [{at: 0 °C, add: 0.05 K}, {at: 100 °C, add: 0.05 K}]}\n"
    "  - {id: MA-8, role: current meter, certificate: TB-2, issuer: invented, calibrated on: 2026-01-05, "
    "due on: 2027-01-05, range: 0 to 24 mA, resolution: 0.001 mA, U: 0.003 mA, k: 2, drift per year: 0.002 mA, "
    "corrections: [{at: 4 mA, add: 0.010 mA}, {at: 20 mA, add: 0.010 mA}]}\n";

static void a_correction_of_the_certificate_is_applied(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	if (fl_stock_parse(&t.stock, corrected_equipment, "corrected.yaml", &t.err) < 0)
		fail_msg("%d: %s %s", t.err.line, t.err.field, t.err.message);
	talk_take_all(&t, lines_before, 7);
	talk_take_all(&t, (const char *const[]){"TH-8", "", "MA-8"}, 3);
	talk_take_all(&t, lines_before + 10, COUNT(lines_before) - 10);
	talk_take(&t, "4.025");
	talk_says(&t, "error +0.22 % of span"); /* 4.035 mA against 4.000 mA */
	talk_take(&t, "4.020");
	talk_take(&t, "7.059 at 39.95");
	talk_says(&t, "expected 6.947 mA, error +0.76 % of span");
	talk_says(&t, "7.0690 mA at 40.000 °C");
	check_near("as read", 39.95, t.journal.session.readings[2].temp_c, 0.0);
	talk_end(&t);
}

static void a_stopped_zero_far_off_points_at_the_equalising_valve(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_to_readings(&t);
	talk_take(&t, "4.16");
	assert_null(strstr(talk_said(&t), "equalising valve"));
	talk_take(&t, "4.17");
	talk_says(&t, "equalising valve");
	talk_end(&t);
}

/* What the journal carries counts, not what the stock file says today. */
static void a_changed_stock_file_does_not_change_a_session(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	fl_entry_free(t.entry);
	fl_journal_close(&t.journal);
	assert_int_equal(fl_journal_resume(&t.journal, fl_io_system(), t.path, t.now, &t.err), FL_OK);
	fl_stock_free(&t.stock); /* the bench has lost its files; the instrument comes from the journal too */
	fl_stock own = {0};
	assert_int_equal(fl_session_stock(&t.journal.session, &own, &t.err), FL_OK);
	t.instrument = fl_stock_instrument(&own, "VT-1");
	talk_attach(&t);
	talk_take(&t, "7.059 at 40.00");
	talk_says(&t, "expected 6.947 mA");
	talk_end(&t);
	fl_stock_free(&own);
}

/* ---- temperatures ---- */

static void fahrenheit_is_asked_and_never_converted_silently(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_asked(&t, "7.06 at 104", "looks like °F (40.00 °C)");
	talk_take(&t, "no");
	assert_int_equal(t.journal.session.reading_count, 2);
	talk_asked(&t, "7.06 at 104 °F", "104 °F is 40.00 °C");
	talk_take(&t, "yes");
	const fl_reading *r = &t.journal.session.readings[2];
	check_near("converted when confirmed", 40.0, r->temp_c, 1e-9);
	assert_string_equal(r->temp_typed, "104 °F");
	talk_refuse(&t, "7.06 at 140", "type \"140 °F\"");
	talk_end(&t);
}

static void a_temperature_away_from_the_bath_is_asked(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "7.06 at 40.50"); /* the tolerance itself is within */
	talk_asked(&t, "7.06 at 40.51", "further than 0.5 K from the bath");
	talk_refuse(&t, "perhaps", "yes or no");
	talk_take(&t, "yes");
	assert_int_equal(t.journal.session.questions, 1);
	talk_end(&t);
}

static void a_temperature_may_follow_on_its_own_line(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_asked(&t, "7.06", "Temperature of the oil");
	talk_take(&t, "");
	assert_int_equal(t.entry->form.kind, FL_FORM_NONE);
	talk_asked(&t, "7.06", "Temperature of the oil");
	talk_take(&t, "40,02");
	check_near("temperature", 40.02, t.journal.session.readings[2].temp_c, 0.0);
	talk_end(&t);
}

/* ---- settling ---- */

/* The sequence of the job description: 30 s apart, refused, end value about 10.09 mA, ready in about 3 min. */
static void a_value_still_moving_is_refused_as_settled(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, (const char *const[]){"w 9.84", "watch 9.94", "w 10.001", "w 10.037"}, 4);
	talk_says(&t, "still moving");
	talk_refuse(&t, "10.060 at 40.00", "still moving, not settled");
	assert_non_null(strstr(t.err.message, "near 10.09 mA"));
	assert_non_null(strstr(t.err.message, "about 3 min"));
	assert_non_null(strstr(t.err.message, "information only"));
	fl_step step = talk_step(&t);
	fl_reading candidate = {.output = 10.060, .unit = FL_U_MA, .taken = t.now};
	fl_settling s = fl_entry_settling(t.entry, &step, &candidate);
	assert_true(s.moving);
	check_near("end value, mA", 10.09, s.end, 0.01);
	check_near("wait, min", 3.0, s.wait_s / 60.0, 0.5);
	check_near("watched", 4, s.watched, 0);
	talk_end(&t);
}

static void a_value_at_rest_is_taken(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	/* rising throughout, but by 0.04 % of span over the window of 90 s: within the limit of 0.05 % */
	talk_take_all(&t, (const char *const[]){"w 7.060", "w 7.062", "w 7.064"}, 3);
	talk_take(&t, "7.066 at 40.00");
	/* more than the limit, but up and down: noise, no trend */
	talk_take_all(&t, (const char *const[]){"w 7.040", "w 7.080", "w 7.050"}, 3);
	talk_take(&t, "7.090 at 40.00");
	assert_int_equal(t.journal.session.reading_count, 2 + 8);
	talk_end(&t);
}

static void a_wait_lets_a_moving_value_come_to_rest(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, (const char *const[]){"w 6.90", "w 7.00", "w 7.03"}, 3);
	talk_refuse(&t, "7.05 at 40.00", "still moving");
	t.now += 180;
	talk_take_all(&t, (const char *const[]){"w 7.061", "w 7.062", "w 7.062"}, 3);
	talk_says(&t, "settled by the procedure's rule");
	talk_take(&t, "7.063 at 40.00");
	talk_end(&t);
}

static void temperature_is_taken_out_of_the_trend(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	/* the bath drifts 0.08 K to and fro, LK-10 loses about 2.8 % of reading's viscosity a kelvin: the output follows it
	 * (expected 6.953, 6.947, 6.942, 6.936 mA); against what the oil should give nothing moves */
	talk_take_all(&t, (const char *const[]){"w 7.059 39.93", "w 7.053 40.00", "w 7.048 40.06"}, 3);
	fl_step step = talk_step(&t);
	fl_reading r = {
	    .point = 0, .output = 7.042, .unit = FL_U_MA, .has_temp = true, .temp_c = 40.13, .taken = t.now + 30};
	fl_settling s = fl_entry_settling(t.entry, &step, &r);
	assert_false(s.moving);
	assert_true(s.temp_moving); /* 0.13 K a minute */
	talk_refuse(&t, "7.042 at 40.13", "temperature is still moving");
	talk_end(&t);
}

static void a_watch_can_be_demanded(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_WATCHED);
	talk_to_readings(&t);
	talk_refuse(&t, "4.025", "wants the output watched");
	talk_take_all(&t, (const char *const[]){"w 4.024", "w 4.026", "w 4.025", "w 4.024"}, 4);
	talk_take(&t, "4.025");
	talk_take(&t, "4.020");
	talk_end(&t);
}

static void identical_values_raise_a_question(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "w 7.060");
	talk_take(&t, "w 7.060");
	talk_asked(&t, "7.060 at 40.00", "3 times 7.060 to the last digit");
	talk_take(&t, "yes");
	assert_int_equal(t.journal.session.questions, 1);
	talk_end(&t);
}

/* ---- gates and conditions ---- */

static void a_gate_that_is_no_stops_the_work(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, 14);
	talk_take(&t, "no");
	talk_says(&t, "stops here");
	assert_string_equal(talk_step(&t).id, "isolated");
	talk_take(&t, "yes");
	assert_string_equal(talk_step(&t).id, "fuel-cooled");
	assert_int_equal(t.journal.session.gate_count, 3);
	talk_end(&t);
}

static void what_is_implausible_is_asked_and_what_is_impossible_refused(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, 15);
	talk_refuse(&t, "75", "not possible");
	talk_refuse(&t, "150 °F", "not possible");
	talk_asked(&t, "55", "unusual here (usual: 5 to 50 °C)");
	talk_take(&t, "no");
	assert_string_equal(talk_step(&t).id, "fuel-cooled");
	talk_asked(&t, "55,0 °C", "unusual here");
	talk_take(&t, "yes");
	assert_string_equal(fl_session_gate(&t.journal.session, "fuel-cooled")->answer, "55,0 °C");
	assert_int_equal(t.journal.session.questions, 1);
	talk_end(&t);
}

static void a_wrong_supply_stops_before_anybody_adjusts(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, 16);
	talk_refuse(&t, "50 Hz", "-16.7 % from the 60 Hz");
	talk_refuse(&t, "60.7", "from the 60 Hz");
	talk_take(&t, "60.5");
	talk_refuse(&t, "1425", "from the 1710 r/min");
	talk_take(&t, "1705");
	assert_int_equal(talk_step(&t).kind, FL_STEP_AS_FOUND);
	talk_end(&t);
}

/* ---- what is out of date ---- */

static void overdue_equipment_goes_on_only_as_indicative(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, 10);
	talk_asked(&t, "TC-1", "Not for certified work");
	talk_take(&t, "");
	assert_int_equal(talk_step(&t).role, FL_ROLE_TACHOMETER);
	assert_int_equal(t.journal.session.indicative_count, 0);
	talk_take(&t, "TC-1");
	talk_asked(&t, "no other on board", "Your name");
	talk_take(&t, "Arvid Holm");
	assert_int_equal(t.journal.session.indicative_count, 1);
	assert_string_equal(t.journal.session.indicative[0].item, "TC-1");
	assert_string_equal(t.journal.session.indicative[0].reason, "no other on board");
	assert_int_equal(talk_step(&t).kind, FL_STEP_OIL);
	talk_take(&t, "undo typed by mistake");
	assert_int_equal(t.journal.session.indicative_count, 0);
	assert_int_equal(talk_step(&t).role, FL_ROLE_TACHOMETER);
	talk_end(&t);
}

static void an_expired_lot_goes_on_only_as_indicative(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, 11);
	talk_asked(&t, "2411B", "has expired");
	talk_take_all(&t, (const char *const[]){"the new lots are not on board", "Arvid Holm"}, 2);
	assert_string_equal(t.journal.session.points[0].lot, "2411B");
	assert_string_equal(t.journal.session.indicative[0].item, "2411B");
	talk_take(&t, "LK-50"); /* by its name: the lot in date */
	assert_string_equal(t.journal.session.points[1].lot, "2511E");
	talk_end(&t);
}

/* ---- commands ---- */

static void undo_takes_back_by_a_new_line(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "7.06 at 40.00");
	int sequence = t.journal.session.last_sequence;
	talk_asked(&t, "undo", "Why is it taken back");
	talk_take(&t, "");
	assert_false(t.journal.session.readings[2].undone);
	talk_take(&t, "undo");
	talk_take(&t, "wrong bottle");
	assert_true(t.journal.session.readings[2].undone);
	assert_int_equal(t.journal.session.last_sequence, sequence + 1);
	assert_int_equal(talk_step(&t).number, 1);
	talk_take(&t, "undo twice");
	assert_int_equal(talk_step(&t).point, FL_POINT_ZERO);
	talk_take(&t, "4.021");
	talk_take(&t, "7.061 at 40.00");
	assert_int_equal(t.journal.session.reading_count, 5);
	talk_end(&t);
}

static void strike_keeps_reason_and_name_and_asks_for_another_reading(void **state) {
	talk t;
	char line[64];
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "7.06 at 40.00");
	int sequence = t.journal.session.last_sequence;
	talk_take(&t, "7.07 at 40.00");
	assert_int_equal(talk_step(&t).point, 1);
	snprintf(line, sizeof line, "strike %d air in the line", sequence);
	talk_take(&t, line);
	const fl_reading *r = &t.journal.session.readings[2];
	assert_true(r->struck);
	assert_string_equal(r->struck_reason, "air in the line");
	assert_string_equal(r->struck_by, "Arvid Holm");
	assert_int_equal(talk_step(&t).point, 0);
	assert_int_equal(talk_step(&t).number, 3);
	talk_take(&t, "7.062 at 40.00");
	assert_int_equal(talk_step(&t).point, 1);
	snprintf(line, sizeof line, "strike %d", sequence + 1);
	talk_asked(&t, line, "Why is it struck");
	talk_take(&t, "another bubble");
	talk_take(&t, "list");
	talk_says(&t, "struck");
	talk_says(&t, "LK-10 (2511B)");
	talk_end(&t);
}

static void help_remark_and_stop_work_while_something_is_asked(void **state) {
	talk t;
	to_thin_oil(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "remark rain on deck");
	assert_string_equal(t.journal.session.remarks[0].typed, "rain on deck");
	talk_take(&t, "7.06");
	talk_take(&t, "?");
	talk_says(&t, "strike N");
	assert_int_equal(t.entry->form.kind, FL_FORM_TEMPERATURE);
	talk_take(&t, "stop");
	assert_true(fl_entry_finished(t.entry));
	talk_end(&t);
}

static void names_of_any_script_up_to_120_characters(void **state) {
	talk t;
	char name[241] = "";
	talk_begin(&t, *state, SMALL_PROCEDURE);
	for (int i = 0; i < 120; i++)
		strcat(name, "Ж");
	talk_take(&t, name);
	assert_string_equal(fl_session_setting(&t.journal.session, "place")->typed, name);
	talk_take(&t, "  \u039d\u03b9\u03ba\u03cc\u03bb\u03b1\u03bf\u03c2, J\u00f6rg \U0001d11e\t");
	assert_string_equal(fl_session_setting(&t.journal.session, "customer")->typed,
	                    "\u039d\u03b9\u03ba\u03cc\u03bb\u03b1\u03bf\u03c2, J\u00f6rg \U0001d11e");
	talk_end(&t);
}

/* ---- the disk ---- */

static void a_full_disk_ends_the_talk_and_loses_nothing(void **state) {
	talk t;
	failing_io disk;
	talk_load(&t, SMALL_PROCEDURE, "VT-1");
	scratch_path(*state, "session.flj", t.path);
	failing_io_start(&disk, 0, ENOSPC, FAILING_SHORT);
	assert_int_equal(fl_entry_begin(&t.journal, &disk.io, t.path, FL_SOURCE_KEYBOARD, false, fl_day_of(t.now), t.now,
	                                &t.procedure, t.instrument, "0.1.0", &t.err),
	                 FL_OK);
	talk_attach(&t);
	talk_to_readings(&t);
	talk_take(&t, "4.025");
	int committed = t.journal.session.last_sequence;
	disk.fail_at = disk.calls + 1;
	assert_int_equal(talk_line(&t, "4.020"), FL_E_DISK_FULL);
	assert_int_equal(t.journal.session.last_sequence, committed);
	assert_true(talk_line(&t, "4.020") < 0);
	fl_entry_free(t.entry);
	fl_journal_close(&t.journal);
	assert_int_equal(fl_journal_resume(&t.journal, fl_io_system(), t.path, t.now, &t.err), FL_OK);
	assert_true(t.journal.session.last_sequence >= committed);
	assert_int_equal(t.journal.session.reading_count, 1);
	talk_attach(&t);
	talk_take(&t, "4.020");
	assert_int_equal(talk_step(&t).point, 0);
	talk_end(&t);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(a_line_is_taken_apart),
	    cmocka_unit_test(written_numbers_read_back_the_same),
	    IN_SCRATCH(decimal_comma_unit_and_line_pressure),
	    IN_SCRATCH(an_ambiguous_number_is_asked_never_guessed),
	    IN_SCRATCH(a_pneumatic_output_takes_pressures_only),
	    IN_SCRATCH(the_expected_output_stands_only_behind_a_committed_reading),
	    IN_SCRATCH(a_correction_of_the_certificate_is_applied),
	    IN_SCRATCH(a_stopped_zero_far_off_points_at_the_equalising_valve),
	    IN_SCRATCH(a_changed_stock_file_does_not_change_a_session),
	    IN_SCRATCH(fahrenheit_is_asked_and_never_converted_silently),
	    IN_SCRATCH(a_temperature_away_from_the_bath_is_asked),
	    IN_SCRATCH(a_temperature_may_follow_on_its_own_line),
	    IN_SCRATCH(a_value_still_moving_is_refused_as_settled),
	    IN_SCRATCH(a_value_at_rest_is_taken),
	    IN_SCRATCH(a_wait_lets_a_moving_value_come_to_rest),
	    IN_SCRATCH(temperature_is_taken_out_of_the_trend),
	    IN_SCRATCH(a_watch_can_be_demanded),
	    IN_SCRATCH(identical_values_raise_a_question),
	    IN_SCRATCH(a_gate_that_is_no_stops_the_work),
	    IN_SCRATCH(what_is_implausible_is_asked_and_what_is_impossible_refused),
	    IN_SCRATCH(a_wrong_supply_stops_before_anybody_adjusts),
	    IN_SCRATCH(overdue_equipment_goes_on_only_as_indicative),
	    IN_SCRATCH(an_expired_lot_goes_on_only_as_indicative),
	    IN_SCRATCH(undo_takes_back_by_a_new_line),
	    IN_SCRATCH(strike_keeps_reason_and_name_and_asks_for_another_reading),
	    IN_SCRATCH(help_remark_and_stop_work_while_something_is_asked),
	    IN_SCRATCH(names_of_any_script_up_to_120_characters),
	    IN_SCRATCH(a_full_disk_ends_the_talk_and_loses_nothing),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
