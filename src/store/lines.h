/* lines.h - lines of fields between tabs: how facts and foundings are written and read.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A line is a word and its values, a tab between, a line feed behind. In a text \\ is a backslash, \t a tab, \n a line
 * feed, \r a carriage return; other control characters are refused. Reading is strict: the first line that is not
 * what was asked for makes the reader fail, and every later call does nothing, so that the caller checks once.
 */
#ifndef FOUNDLEFT_STORE_LINES_H
#define FOUNDLEFT_STORE_LINES_H

#include "facts.h"

enum { LINE_VALUES = 12 };

typedef struct fl_lines {
	char *at, *end; /* copy that is split in place */
	int line;
	const char *word;
	char *values[LINE_VALUES];
	int count;
	fl_arena *arena;
	fl_status status;
	fl_error *err;
} fl_lines;

/* Copies the text into the arena and stands before its first line. */
void fl_lines_open(fl_lines *lines, const char *text, size_t length, fl_arena *arena, fl_error *err);
/* Takes the next line; it must have this word and this many values. False when it failed, now or before. */
bool fl_lines_take(fl_lines *lines, const char *word, int count);
/* Does the next line begin with this word? Takes nothing. */
bool fl_lines_next_is(const fl_lines *lines, const char *word);
/* Nothing may follow. Returns the status of it all. */
fl_status fl_lines_close(fl_lines *lines);
fl_status fl_lines_fail(fl_lines *lines, const char *what);

/* Values of the line taken last. */
const char *fl_lines_text(fl_lines *lines, int i);
int64_t fl_lines_whole(fl_lines *lines, int i);
double fl_lines_real(fl_lines *lines, int i);
fl_day fl_lines_day(fl_lines *lines, int i); /* "-" is FL_NO_DAY */
fl_utc fl_lines_utc(fl_lines *lines, int i);
void fl_lines_digest(fl_lines *lines, int i, char out[FL_DIGEST_HEX_SIZE]);

/* Writing: a tab and the value. */
void fl_put_text(fl_text *out, const char *text);
void fl_put_whole(fl_text *out, int64_t value);
void fl_put_real(fl_text *out, double value);
void fl_put_day(fl_text *out, fl_day day);
void fl_put_utc(fl_text *out, fl_utc utc);
/* Can the text stand in a line: UTF-8 without control characters other than tab, line feed, carriage return? */
bool fl_can_put(const char *text);

bool fl_is_digest(const char *text);

#endif
