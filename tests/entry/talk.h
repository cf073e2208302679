/* talk.h - a conversation for tests: the sample stock, a small procedure, a clock that steps, lines fed one by one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_ENTRY_TALK_H
#define FOUNDLEFT_TEST_ENTRY_TALK_H

#include "check.h"
#include "entry_private.h"
#include "scratch.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define STOCK_FOLDER SOURCE_DIR "/sample-sessions/stock/"

/* Two oils, one cycle, two readings: short, with each kind of question. Invented for the tests. */
#define SMALL_HEAD(name, watch)                                      \
	"id: " name "\n"                                                 \
	"version: '1'\n"                                                 \
	"title: Small test procedure\n"                                  \
	"source: invented for the tests\n"                               \
	"maintenance: kept with the tests\n"                             \
	"method: two oils, one cycle\n"                                  \
	"medium: oil\n"                                                  \
	"stopped zero: yes\n"                                            \
	"bath: 40 °C\n"                                                 \
	"bath tolerance: 0.5 K\n"                                        \
	"points:\n"                                                      \
	"  - {at: 20 % of span, from: 14 % of span, to: 26 % of span}\n" \
	"  - {at: 93 % of span, from: 85 % of span, to: 98 % of span}\n" \
	"cycles: 1\n"                                                    \
	"falling: yes\n"                                                 \
	"readings: 2\n"                                                  \
	"settled:\n"                                                     \
	"  readings: 4\n"                                                \
	"  window: 90 s\n"                                               \
	"  drift: 0.05 % of span\n"                                      \
	"  temperature per minute: 0.02 K\n"                             \
	"  watch: " watch "\n"                                           \
	"  identical readings: 3\n"                                      \
	"tolerance: 2 % of span\n"                                       \
	"adjust limit: 1.5 % of span\n"                                  \
	"rule: simple acceptance\n"                                      \
	"coverage: 95.45 %\n"                                            \
	"oil interpolation: 0.05 %\n"                                    \
	"oil ageing per year: 0.1 %\n"
#define SMALL_QUESTIONS                                                                                        \
	"gates:\n"                                                                                                 \
	"  - {id: permit, ask: Number of the permit, answer: text}\n"                                              \
	"  - {id: isolated, ask: Is the supply isolated, caution: Motors start., answer: yes or no}\n"             \
	"  - {id: fuel-cooled, ask: Temperature of the fuel, answer: amount, unit: °C, possible: -10 to 60 °C, " \
	"plausible: 5 to 50 °C}\n"                                                                                \
	"conditions:\n"                                                                                            \
	"  - {id: supply-frequency, ask: Supply frequency, answer: amount, unit: Hz, possible: 45 to 65 Hz, "      \
	"plausible: 49 to 61 Hz}\n"                                                                                \
	"  - {id: motor-speed, ask: Speed of the motor, answer: amount, unit: r/min, possible: 1 to 4000 r/min, "  \
	"plausible: 1 to 3000 r/min, required: no}\n"                                                              \
	"restore:\n"                                                                                               \
	"  - {id: valves-open, ask: Are the valves open, answer: yes or no, may decline: yes}\n"
#define SMALL_PROCEDURE SMALL_HEAD("small", "no") SMALL_QUESTIONS
#define SMALL_WATCHED SMALL_HEAD("small-watched", "yes") SMALL_QUESTIONS

/* Lines that bring a fresh session of the small procedure to its first reading, and from there to its end. Outputs:
 * within 0.1 % of span of what LK-10 2511B and LK-50 2511E give at 40 °C on VT-1, from the demo's as-found readings. */
static const char *const lines_before[] = {"Quillhaven, Tallmere Yard",
                                           "Quillhaven, engine department",
                                           "2026-04-13",
                                           "",
                                           "",
                                           "Arvid Holm",
                                           "",
                                           "",
                                           "",
                                           "",
                                           "",
                                           "",
                                           "",
                                           "PTW-118",
                                           "yes",
                                           "40 °C",
                                           "60",
                                           "",
                                           "yes"};
static const char *const lines_as_found[] = {
    "4.025",        "4,020 mA",     "7.064 at 39.91", "7.059 mA 40.02", "19.263 40.03", "19.342 mA, 39.91 °C, 1.01 bar",
    "19.296 39.98", "19.252 40.04", "7.071 40.01",    "7.066",          "40.10",        "4.016",
    "4.017"};
static const char *const lines_after[] = {"close",   "adjust", "span out of the adjust limit", "zero screw", "4.02 mA",
                                          "4.00 mA", "done"};
static const char *const lines_as_left[] = {"4.001",       "4.000",       "6.99 at 40.00", "6.98 39.99",
                                            "18.86 40.00", "18.87 40.01", "18.85 40.00",   "18.86 40.02",
                                            "6.98 40.00",  "6.99 40.01",  "4.001",         "4.000"};
static const char *const lines_end[] = {"close", "no", "valve 3 has no handle", "All oils drained", "", ""};
#define COUNT(array) ((int)(sizeof(array) / sizeof(array)[0]))

typedef struct talk {
	fl_stock stock;
	fl_procedure procedure;
	const fl_instrument *instrument;
	fl_journal journal;
	fl_entry *entry;
	fl_utc now;
	int64_t pace_s; /* seconds that pass before each line */
	fl_text say;
	fl_error err;
	char path[SCRATCH_SIZE];
} talk;

static inline fl_utc talk_clock(void *context) {
	return ((talk *)context)->now;
}

static inline void talk_attach(talk *t) {
	fl_entry_setup setup = {.journal = &t->journal,
	                        .procedure = &t->procedure,
	                        .instrument = t->instrument,
	                        .stock = &t->stock,
	                        .clock = talk_clock,
	                        .clock_context = t};
	assert_int_equal(fl_entry_new(&t->entry, &setup, &t->err), FL_OK);
}

static inline void talk_load(talk *t, const char *procedure, const char *tag) {
	static const char *const files[] = {"oils.yaml", "equipment.yaml", "instruments.yaml"};
	*t = (talk){.now = 1776153600, .pace_s = 30}; /* 2026-04-14T08:00:00Z */
	for (int i = 0; i < 3; i++) {
		char path[512];
		snprintf(path, sizeof path, "%s%s", STOCK_FOLDER, files[i]);
		fl_status status = fl_stock_load(&t->stock, fl_io_system(), path, &t->err);
		if (status < 0)
			print_error("%s: %s\n", files[i], t->err.message);
		assert_true(status >= 0);
	}
	if (fl_procedure_parse(procedure, "test.yaml", &t->procedure, &t->err) < 0)
		fail_msg("procedure: %d %s %s", t->err.line, t->err.field, t->err.message);
	t->instrument = fl_stock_instrument(&t->stock, tag);
	assert_non_null(t->instrument);
}

static inline void talk_begin_as(talk *t, const char *folder, const char *procedure, const char *tag,
                                 fl_source source) {
	talk_load(t, procedure, tag);
	scratch_path(folder, "session.flj", t->path);
	unlink(t->path);
	assert_int_equal(fl_entry_begin(&t->journal, fl_io_system(), t->path, source, false, fl_day_of(t->now), t->now,
	                                &t->procedure, t->instrument, "0.1.0", &t->err),
	                 FL_OK);
	talk_attach(t);
}

static inline void talk_begin(talk *t, const char *folder, const char *procedure) {
	talk_begin_as(t, folder, procedure, "VT-1", FL_SOURCE_KEYBOARD);
}

static inline void talk_end(talk *t) {
	fl_entry_free(t->entry);
	fl_journal_close(&t->journal);
	fl_stock_free(&t->stock);
	fl_procedure_free(&t->procedure);
	fl_text_free(&t->say);
}

/* Feeds a line; what was said is in t->say, what was refused in t->err. */
static inline fl_status talk_line(talk *t, const char *line) {
	t->now += t->pace_s;
	t->err = (fl_error){0};
	fl_text_clear(&t->say);
	fl_text_add(&t->say, "");
	return fl_entry_line(t->entry, line, &t->say, &t->err);
}

static inline const char *talk_said(const talk *t) {
	return t->say.data ? t->say.data : "";
}

static inline void talk_take(talk *t, const char *line) {
	fl_status status = talk_line(t, line);
	if (status != FL_OK)
		print_error("\"%s\" was refused: %s\n", line, t->err.message);
	assert_int_equal(status, FL_OK);
}

static inline void talk_take_all(talk *t, const char *const *lines, int count) {
	for (int i = 0; i < count; i++)
		talk_take(t, lines[i]);
}

/* The line is refused with these words, and nothing is committed. */
static inline void talk_refuse(talk *t, const char *line, const char *part) {
	int before = t->journal.session.last_sequence;
	fl_status status = talk_line(t, line);
	if (status >= 0 || !strstr(t->err.message, part))
		print_error("\"%.60s\": status %d, \"%s\" lacks \"%s\"; said %s\n", line, status, t->err.message, part,
		            talk_said(t));
	assert_true(status < 0);
	assert_non_null(strstr(t->err.message, part));
	assert_null(strchr(t->err.message, '\n'));
	assert_int_equal(t->journal.session.last_sequence, before);
}

/* The line leads to a question with these words; nothing is committed. */
static inline void talk_asked(talk *t, const char *line, const char *part) {
	int before = t->journal.session.last_sequence;
	talk_take(t, line);
	fl_text prompt = {0};
	fl_entry_prompt(t->entry, &prompt);
	if (!strstr(prompt.data, part) && !strstr(talk_said(t), part))
		print_error("\"%s\": asked \"%s\", said \"%s\", lacks \"%s\"\n", line, prompt.data, talk_said(t), part);
	assert_true(strstr(prompt.data, part) || strstr(talk_said(t), part));
	assert_int_equal(t->journal.session.last_sequence, before);
	fl_text_free(&prompt);
}

static inline void talk_says(const talk *t, const char *part) {
	if (!strstr(talk_said(t), part))
		print_error("\"%s\" lacks \"%s\"\n", talk_said(t), part);
	assert_non_null(strstr(talk_said(t), part));
}

static inline fl_step talk_step(const talk *t) {
	return fl_entry_step(&t->journal.session, &t->procedure);
}

/* Brings a fresh session to its first reading. */
static inline void talk_to_readings(talk *t) {
	talk_take_all(t, lines_before, COUNT(lines_before));
	assert_int_equal(talk_step(t).kind, FL_STEP_READING);
}

#define IN_SCRATCH(test) cmocka_unit_test_setup_teardown(test, scratch_make, scratch_remove)

#endif
