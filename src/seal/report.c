/* report.c - what a check found, line by line, and the one verdict over it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"

#include <stdarg.h>
#include <stdio.h>

void fl_report_line(fl_seal_report *report, fl_arena *arena, fl_check_mark mark, const char *what, const char *format,
                    ...) {
	fl_check_line *lines =
	    fl_arena_grow(arena, report->lines, report->line_count, &report->line_capacity, sizeof *lines);
	if (!lines) {
		report->failed = true;
		return;
	}
	report->lines = lines;
	fl_check_line *line = &lines[report->line_count++];
	*line = (fl_check_line){.mark = mark, .signature = (int)report->signature_count};
	snprintf(line->what, sizeof line->what, "%s", what);
	va_list values;
	va_start(values, format);
	vsnprintf(line->sentence, sizeof line->sentence, format, values);
	va_end(values);
}

fl_seal_signature *fl_report_signature(fl_seal_report *report, fl_arena *arena) {
	fl_seal_signature *all =
	    fl_arena_grow(arena, report->signatures, report->signature_count, &report->signature_capacity, sizeof *all);
	if (!all) {
		report->failed = true;
		return NULL;
	}
	report->signatures = all;
	all[report->signature_count] = (fl_seal_signature){0};
	return &all[report->signature_count++];
}

/* A line about trust is bad without the bytes being so: everything else that is bad means broken. */
void fl_report_finish(fl_seal_report *report) {
	bool fits = true, trusted = true;
	for (size_t i = 0; i < report->signature_count; i++) {
		fits = fits && report->signatures[i].fits;
		trusted = trusted && report->signatures[i].trusted;
	}
	for (size_t i = 0; i < report->line_count; i++)
		if (report->lines[i].mark == FL_CHECK_BAD && report->lines[i].signature == 0)
			fits = false;
	report->verdict = !fits                          ? FL_SEAL_BROKEN
	                  : report->signature_count == 0 ? FL_SEAL_NONE
	                  : !trusted                     ? FL_SEAL_UNTRUSTED
	                                                 : FL_SEAL_GOOD;
}
