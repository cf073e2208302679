/* bench.h - a small session, event by event, for the journal's tests.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_JOURNAL_BENCH_H
#define FOUNDLEFT_TEST_JOURNAL_BENCH_H

#include "check.h"
#include "failing_io.h"
#include "foundleft/journal.h"
#include "scratch.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

/* Invented. Values with tabs, line ends, backslashes and other scripts on purpose. */
static const fl_event small_session[] = {
    {.verb = FL_V_OPEN,
     .fields = {[FL_F_FORMAT] = FL_JOURNAL_FORMAT,
                [FL_F_PROGRAM] = "0.1.0",
                [FL_F_DAY] = "2026-04-14",
                [FL_F_SOURCE] = "keyboard",
                [FL_F_CLOCK] = "machine"}},
    {.verb = FL_V_TEXT,
     .fields = {[FL_F_KIND] = "procedure",
                [FL_F_NAME] = "p",
                [FL_F_BODY] = "id: p\n\tback\\slash\r\n# \u03bd = \u03bc/\u03c1\n"}},
    {.verb = FL_V_TEXT, .fields = {[FL_F_KIND] = "instrument", [FL_F_NAME] = "VT-1", [FL_F_BODY] = "tag: VT-1\n"}},
    {.verb = FL_V_TEXT, .fields = {[FL_F_KIND] = "oil", [FL_F_NAME] = "2511B", [FL_F_BODY] = "lot: 2511B\n"}},
    {.verb = FL_V_SET, .fields = {[FL_F_ID] = "performed-by", [FL_F_TYPED] = "Ingr\u00edd \u0416arova"}},
    {.verb = FL_V_SET, .fields = {[FL_F_ID] = "others", [FL_F_TYPED] = ""}},
    {.verb = FL_V_SET,
     .fields = {[FL_F_ID] = "ambient", [FL_F_TYPED] = "22,5", [FL_F_UNIT] = "°C", [FL_F_VALUE] = "22.5"}},
    {.verb = FL_V_POINT, .fields = {[FL_F_POINT] = "1", [FL_F_OIL] = "LK-10", [FL_F_LOT] = "2511B"}},
    {.verb = FL_V_GATE, .fields = {[FL_F_ID] = "permit", [FL_F_ANSWER] = "yes"}},
    {.verb = FL_V_RUN, .fields = {[FL_F_RUN] = "as-found"}},
    {.verb = FL_V_READ,
     .fields = {[FL_F_RUN] = "as-found",
                [FL_F_CYCLE] = "1",
                [FL_F_PASS] = "rising",
                [FL_F_POINT] = "1",
                [FL_F_NUMBER] = "1",
                [FL_F_TYPED] = "7,064",
                [FL_F_UNIT] = "mA",
                [FL_F_VALUE] = "7.064",
                [FL_F_TEMP_TYPED] = "39,91",
                [FL_F_TEMP_C] = "39.91"}},
    {.verb = FL_V_READ,
     .fields = {[FL_F_RUN] = "as-found",
                [FL_F_CYCLE] = "1",
                [FL_F_PASS] = "falling",
                [FL_F_POINT] = "zero",
                [FL_F_NUMBER] = "1",
                [FL_F_TYPED] = "4.021",
                [FL_F_UNIT] = "mA",
                [FL_F_VALUE] = "4.021"}},
    {.verb = FL_V_CLOSE_RUN, .fields = {[FL_F_RUN] = "as-found", [FL_F_BY] = "Ingr\u00edd \u0416arova"}},
};
enum { SMALL_COUNT = sizeof small_session / sizeof small_session[0] };

/* 2026-04-14T08:00:00Z and on, ten seconds apart; the clock is set back once, which must do no harm. */
static inline fl_utc small_time(int i) {
	return 1776153600 + 10 * i - (i > 6 ? 3600 : 0);
}

/* Writes the first `count` events; returns how many were committed. */
static inline int write_small(const fl_io *io, const char *path, int count, fl_error *err) {
	fl_journal journal;
	fl_event open = small_session[0];
	open.at = small_time(0);
	if (fl_journal_create(&journal, io, path, &open, err) < 0)
		return 0;
	int done = 1;
	for (; done < count; done++) {
		fl_event event = small_session[done];
		event.at = small_time(done);
		if (fl_journal_commit(&journal, &event, err) < 0)
			break;
	}
	fl_journal_close(&journal);
	return done;
}

static inline void write_bytes(const char *path, const char *bytes, size_t length) {
	FILE *file = fopen(path, "wb");
	assert_non_null(file);
	assert_int_equal(fwrite(bytes, 1, length, file), length);
	assert_int_equal(fclose(file), 0);
}

#endif
