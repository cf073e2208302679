/* test_session.c - whole sessions: from the first question to the last, and taken up again after every line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "talk.h"

static const struct {
	const char *const *lines;
	int count;
} parts[] = {{lines_before, COUNT(lines_before)},
             {lines_as_found, COUNT(lines_as_found)},
             {lines_after, COUNT(lines_after)},
             {lines_as_left, COUNT(lines_as_left)},
             {lines_end, COUNT(lines_end)}};

static int whole_session(const char **lines) {
	int count = 0;
	for (int p = 0; p < COUNT(parts); p++)
		for (int i = 0; i < parts[p].count; i++)
			lines[count++] = parts[p].lines[i];
	return count;
}

static void a_whole_session_from_question_to_question(void **state) {
	talk t;
	const char *lines[200];
	int count = whole_session(lines);
	talk_begin(&t, *state, SMALL_PROCEDURE);
	for (int i = 0; i < count; i++) {
		fl_text prompt = {0};
		assert_false(fl_entry_finished(t.entry));
		fl_entry_prompt(t.entry, &prompt);
		assert_true(prompt.length > 2);
		assert_string_equal(prompt.data + prompt.length - 2, "> ");
		if (getenv("FOUNDLEFT_SHOW"))
			printf("%s%s\n", prompt.data, lines[i]);
		fl_text_free(&prompt);
		talk_take(&t, lines[i]);
		if (getenv("FOUNDLEFT_SHOW"))
			printf("%s", talk_said(&t));
	}
	assert_true(fl_entry_finished(t.entry));
	const fl_session *s = &t.journal.session;
	assert_true(s->closed);
	assert_string_equal(s->closed_by, "Arvid Holm");
	assert_int_equal(s->reading_count, 24);
	assert_int_equal(s->decision, FL_DECISION_ADJUST);
	assert_int_equal(s->adjustment_count, 1);
	assert_string_equal(s->adjustments[0].before, "4.02 mA");
	assert_int_equal(s->remark_count, 1);
	assert_string_equal(fl_session_gate(s, "valves-open")->reason, "valve 3 has no handle");
	assert_string_equal(fl_session_gate(s, "fuel-cooled")->answer, "40 °C");
	assert_string_equal(s->points[0].lot, "2511B");
	assert_string_equal(s->points[1].lot, "2511E");
	assert_string_equal(s->readings[1].typed, "4,020");
	check_near("comma", 4.020, s->readings[1].output, 0.0);
	check_near("line pressure", 101000.0, s->readings[5].line_pa, 1e-6);
	assert_int_equal(s->readings[11].point, FL_POINT_ZERO);
	assert_int_equal(s->readings[11].pass, FL_PASS_FALLING);
	talk_end(&t);
}

/* The journal alone gives the session back, its procedure and its stock. */
static void the_journal_stands_alone(void **state) {
	talk t;
	const char *lines[200];
	int count = whole_session(lines);
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines, count);
	fl_session s = {0};
	char head[FL_DIGEST_HEX_SIZE];
	bool torn;
	assert_int_equal(fl_journal_read(fl_io_system(), t.path, &s, head, &torn, &t.err), FL_OK);
	fl_procedure procedure = {0};
	fl_stock stock = {0};
	assert_int_equal(fl_session_procedure(&s, &procedure, &t.err), FL_OK);
	assert_int_equal(fl_session_stock(&s, &stock, &t.err), FL_OK);
	assert_int_equal(procedure.point_count, 2);
	assert_int_equal(stock.oil_count, 2);
	assert_non_null(fl_stock_equipment(&stock, "TH-7"));
	assert_non_null(fl_stock_instrument(&stock, "VT-1"));
	assert_int_equal(fl_entry_step(&s, &procedure).kind, FL_STEP_DONE);
	fl_stock_free(&stock);
	fl_procedure_free(&procedure);
	fl_session_free(&s);
	talk_end(&t);
}

/* Killed before every line in turn: what is typed again from the last committed entry on gives the same journal, line
 * by line, as the session that was never interrupted. Only times and digests may differ, so they are left out. */
static char *without_time(char *bytes) {
	char *out = calloc(1, strlen(bytes) + 1);
	assert_non_null(out);
	for (char *line = strtok(bytes, "\n"); line; line = strtok(NULL, "\n")) {
		char *verb = strchr(strchr(line, '\t') + 1, '\t'), *prev = strstr(line, "\tprev=");
		*prev = '\0';
		strcat(strcat(out, verb), "\n");
	}
	free(bytes);
	return out;
}

static char *read_journal(const char *path) {
	size_t length;
	char *bytes = scratch_read(path, &length);
	assert_non_null(bytes);
	return bytes;
}

static void resuming_after_every_line_gives_the_same_session(void **state) {
	talk t;
	const char *lines[200];
	int count = whole_session(lines);
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines, count);
	char *straight = without_time(read_journal(t.path));
	talk_end(&t);
	for (int cut = 1; cut < count; cut++) {
		talk_begin(&t, *state, SMALL_PROCEDURE);
		int complete = 0; /* lines up to which nothing is half asked */
		for (int i = 0; i < cut; i++) {
			talk_take(&t, lines[i]);
			if (t.entry->form.kind == FL_FORM_NONE)
				complete = i + 1;
		}
		fl_entry_free(t.entry);
		fl_journal_close(&t.journal);
		assert_int_equal(fl_journal_resume(&t.journal, fl_io_system(), t.path, t.now, &t.err), FL_OK);
		talk_attach(&t);
		talk_take_all(&t, lines + complete, count - complete);
		assert_true(fl_entry_finished(t.entry));
		char *resumed = without_time(read_journal(t.path));
		assert_string_equal(resumed, straight);
		free(resumed);
		talk_end(&t);
	}
	free(straight);
}

static void left_alone_goes_straight_to_restoring(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, COUNT(lines_before));
	talk_take_all(&t, lines_as_found, COUNT(lines_as_found));
	talk_take(&t, "close");
	talk_take(&t, "leave");
	talk_take(&t, "inside the adjust limit");
	talk_says(&t, "as-left = as-found");
	assert_int_equal(talk_step(&t).kind, FL_STEP_RESTORE);
	talk_take_all(&t, lines_end + 1, COUNT(lines_end) - 1);
	assert_true(t.journal.session.closed);
	assert_false(t.journal.session.runs[FL_RUN_AS_LEFT].begun);
	talk_end(&t);
}

static void touched_before_means_as_found_not_available(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, COUNT(lines_before) - 1);
	talk_asked(&t, "no", "Why is as-found not available");
	talk_take(&t, "the watch turned the zero screw");
	talk_says(&t, "as-found not available");
	assert_true(t.journal.session.runs[FL_RUN_AS_FOUND].missing);
	assert_int_equal(talk_step(&t).kind, FL_STEP_DECISION);
	talk_take_all(&t, lines_after + 1, COUNT(lines_after) - 1);
	talk_take_all(&t, lines_as_left, COUNT(lines_as_left));
	talk_take_all(&t, lines_end, COUNT(lines_end));
	assert_true(t.journal.session.closed);
	talk_end(&t);
}

static void repair_ends_without_as_left(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take_all(&t, lines_before, COUNT(lines_before));
	talk_take_all(&t, lines_as_found, COUNT(lines_as_found));
	talk_take_all(&t, (const char *const[]){"close", "repair", "the coupling slips"}, 3);
	talk_says(&t, "session of its own");
	assert_int_equal(talk_step(&t).kind, FL_STEP_RESTORE);
	talk_end(&t);
}

static void stop_keeps_everything(void **state) {
	talk t;
	talk_begin(&t, *state, SMALL_PROCEDURE);
	talk_take(&t, "Quillhaven");
	talk_take(&t, "stop");
	talk_says(&t, "foundleft resume");
	assert_true(fl_entry_finished(t.entry));
	assert_false(t.journal.session.closed);
	talk_end(&t);
}

static const char transmitter[] =
    "id: transmitter\nversion: '1'\ntitle: Transmitter alone\nsource: invented for the tests\n"
    "maintenance: kept with the tests\nmethod: pressure injected\nmedium: pressure\nstopped zero: no\n"
    "points:\n  - {at: 0 % of span}\n  - {at: 50 % of span}\n  - {at: 100 % of span}\n"
    "cycles: 1\nfalling: no\nreadings: 1\nsettled: {readings: 3, window: 10 s, drift: 0.05 % of span}\n"
    "rule: none\ncoverage: 95.45 %\n"
    "gates: [{id: permit, ask: Number of the permit, answer: text}]\n"
    "restore: [{id: valves, ask: Are the valves open, answer: yes or no}]\n";

/* 50 % of 313.21 mbar is 156.605 mbar; the output is 12 mA there. */
static void a_transmitter_alone_takes_pressures(void **state) {
	talk t;
	talk_begin(&t, *state, transmitter);
	talk_take_all(
	    &t, (const char *const[]){"Tallmere Yard", "Quillhaven", "", "", "", "Arvid Holm", "", "", "", "PTW-7", "yes"},
	    11);
	assert_int_equal(t.journal.session.point_count, 3);
	talk_take(&t, "4.003 mA 0.00 mbar");
	talk_asked(&t, "12.02 mA", "Pressure applied");
	talk_take(&t, "156.60");
	talk_says(&t, "expected 12.0");
	talk_asked(&t, "19.98 150 mbar", "is the pressure right");
	talk_take(&t, "no");
	talk_take(&t, "19.98 at 0.31321 bar");
	check_near("applied", 31321.0, t.journal.session.readings[2].applied_pa, 1e-6);
	assert_int_equal(talk_step(&t).kind, FL_STEP_CLOSE_RUN);
	talk_end(&t);
}

/* A scale from 10 to 50 mm²/s that takes 300 mbar at 50 mm²/s, invented. Pressure is proportional to viscosity: 60 mbar
 * at the lower range value, 180 mbar (30 mm²/s) at half of span, 240 mbar the span. The standard's corrections there,
 * +0.008 and +0.0125 mbar, are 0.0005 and 0.0008 mA. */
static const char raised_instrument[] =
    "instruments:\n"
    "  - {tag: VT-8, serial: FL-0998, dial: 10 to 50 mm²/s, dial density: 900 kg/m³, signal: 4-20 mA, "
    "full-scale pressure: 300 mbar, tolerance: 2.0 % of span}\n";

static void prompt_says(talk *t, const char *part) {
	fl_text prompt = {0};
	fl_entry_prompt(t->entry, &prompt);
	if (!strstr(prompt.data, part))
		print_error("\"%s\" lacks \"%s\"\n", prompt.data, part);
	assert_non_null(strstr(prompt.data, part));
	fl_text_free(&prompt);
}

static void a_scale_above_zero_takes_pressure_at_its_lower_end(void **state) {
	talk t;
	talk_load(&t, transmitter, "VT-1");
	if (fl_stock_parse(&t.stock, raised_instrument, "raised.yaml", &t.err) < 0)
		fail_msg("%d: %s %s", t.err.line, t.err.field, t.err.message);
	t.instrument = fl_stock_instrument(&t.stock, "VT-8");
	scratch_path(*state, "session.flj", t.path);
	assert_int_equal(fl_entry_begin(&t.journal, fl_io_system(), t.path, FL_SOURCE_KEYBOARD, false, fl_day_of(t.now),
	                                t.now, &t.procedure, t.instrument, "0.1.0", &t.err),
	                 FL_OK);
	talk_attach(&t);
	talk_take_all(
	    &t, (const char *const[]){"Tallmere Yard", "Quillhaven", "", "", "", "Arvid Holm", "", "", "", "PTW-7", "yes"},
	    11);
	prompt_says(&t, "apply 60.00 mbar");
	talk_take(&t, "4.16 mA 60 mbar");
	talk_says(&t, "expected 4.001 mA, error +1.00 % of span");
	prompt_says(&t, "apply 180.00 mbar");
	talk_asked(&t, "12.00 150 mbar", "150 mbar is 37.5 % of span and the plan says 50 %");
	talk_take(&t, "no");
	talk_take(&t, "12.16 180 mbar");
	talk_says(&t, "expected 12.001 mA, error +0.99 % of span");
	talk_end(&t);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    IN_SCRATCH(a_whole_session_from_question_to_question),
	    IN_SCRATCH(the_journal_stands_alone),
	    IN_SCRATCH(resuming_after_every_line_gives_the_same_session),
	    IN_SCRATCH(left_alone_goes_straight_to_restoring),
	    IN_SCRATCH(touched_before_means_as_found_not_available),
	    IN_SCRATCH(repair_ends_without_as_left),
	    IN_SCRATCH(stop_keeps_everything),
	    IN_SCRATCH(a_transmitter_alone_takes_pressures),
	    IN_SCRATCH(a_scale_above_zero_takes_pressure_at_its_lower_end),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
