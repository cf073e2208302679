/* lines.c - lines of fields between tabs.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "lines.h"

#include <errno.h>
#include <inttypes.h>
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* ---- writing ---------------------------------------------------------------------------------------------------- */

bool fl_can_put(const char *text) {
	if (!text || !fl_utf8_valid(text, strlen(text)))
		return false;
	for (const char *c = text; *c; c++)
		if (((unsigned char)*c < 0x20 && *c != '\t' && *c != '\n' && *c != '\r') || *c == 0x7f)
			return false;
	return true;
}

void fl_put_text(fl_text *out, const char *text) {
	fl_text_append(out, "\t", 1);
	for (;;) {
		size_t plain = strcspn(text, "\\\t\n\r");
		fl_text_append(out, text, plain);
		text += plain;
		if (!*text)
			return;
		fl_text_add(out, *text == '\\' ? "\\\\" : *text == '\t' ? "\\t" : *text == '\n' ? "\\n" : "\\r");
		text++;
	}
}

void fl_put_whole(fl_text *out, int64_t value) {
	fl_text_printf(out, "\t%" PRId64, value);
}

/* The decimal mark of whatever locale the program runs in becomes a point. */
static void point_as_mark(char *digits) {
	const char *mark = localeconv()->decimal_point;
	char *at = strcmp(mark, ".") == 0 ? NULL : strstr(digits, mark);
	if (!at)
		return;
	*at = '.';
	memmove(at + 1, at + strlen(mark), strlen(at + strlen(mark)) + 1);
}

char *fl_real_write(double value, char out[REAL_SIZE]) {
	if (isnan(value)) {
		memcpy(out, "-", 2);
		return out;
	}
	for (int digits = 15; digits <= 17; digits++) {
		snprintf(out, REAL_SIZE, "%.*g", digits, value);
		if (strtod(out, NULL) == value)
			break;
	}
	point_as_mark(out);
	return out;
}

void fl_put_real(fl_text *out, double value) {
	char digits[REAL_SIZE];
	fl_text_append(out, "\t", 1);
	fl_text_add(out, fl_real_write(value, digits));
}

void fl_put_day(fl_text *out, fl_day day) {
	char text[FL_DAY_SIZE];
	fl_text_append(out, "\t", 1);
	fl_text_add(out, fl_day_format(day, text));
}

void fl_put_utc(fl_text *out, fl_utc utc) {
	char text[FL_UTC_SIZE];
	fl_text_append(out, "\t", 1);
	fl_text_add(out, fl_utc_format(utc, text));
}

/* ---- reading ---------------------------------------------------------------------------------------------------- */

fl_status fl_lines_fail(fl_lines *lines, const char *what) {
	if (lines->status >= 0)
		lines->status = fl_fail_at(lines->err, FL_E_SYNTAX, (fl_place){.line = lines->line, .field = lines->word},
		                           "the entry is not well formed: %s", what);
	return lines->status;
}

void fl_lines_open(fl_lines *lines, const char *text, size_t length, fl_arena *arena, fl_error *err) {
	*lines = (fl_lines){.arena = arena, .err = err, .word = ""};
	lines->at = fl_arena_strndup(arena, text, length);
	if (!lines->at) {
		lines->status = fl_fail(err, FL_E_MEMORY, "out of memory for an entry of the book");
		return;
	}
	lines->end = lines->at + strlen(lines->at);
	if ((size_t)(lines->end - lines->at) != length || !fl_utf8_valid(text, length))
		fl_lines_fail(lines, "bytes that are not text");
}

/* Resolves the escapes of one value in place. False for an escape that is none, or a bare control character. */
static bool unescape(char *value) {
	char *to = value;
	for (const char *from = value; *from; from++) {
		char c = *from;
		if ((unsigned char)c < 0x20 || c == 0x7f)
			return false;
		if (c == '\\') {
			from++;
			c = *from == '\\' ? '\\' : *from == 't' ? '\t' : *from == 'n' ? '\n' : *from == 'r' ? '\r' : '\0';
			if (!c)
				return false;
		}
		*to++ = c;
	}
	*to = '\0';
	return true;
}

bool fl_lines_next_is(const fl_lines *lines, const char *word) {
	size_t length = strlen(word);
	return lines->status >= 0 && (size_t)(lines->end - lines->at) > length && memcmp(lines->at, word, length) == 0 &&
	       (lines->at[length] == '\t' || lines->at[length] == '\n');
}

/* Splits "\ta\tb" into values; false where there are too many or an escape is wrong. */
static bool split(fl_lines *lines, char *at) {
	lines->count = 0;
	while (at) {
		if (*at != '\t' || lines->count == LINE_VALUES)
			return false;
		*at++ = '\0';
		lines->values[lines->count++] = at;
		at = strchr(at, '\t');
	}
	for (int i = 0; i < lines->count; i++)
		if (!unescape(lines->values[i]))
			return false;
	return true;
}

bool fl_lines_take(fl_lines *lines, const char *word, int count) {
	if (lines->status < 0)
		return false;
	lines->line++;
	lines->word = word;
	char *end = memchr(lines->at, '\n', (size_t)(lines->end - lines->at));
	if (!end || !fl_lines_next_is(lines, word)) {
		fl_lines_fail(lines, "this line is missing");
		return false;
	}
	*end = '\0';
	char *values = lines->at + strlen(word);
	lines->at = end + 1;
	if (!split(lines, *values ? values : NULL) || lines->count != count) {
		fl_lines_fail(lines, "wrong values");
		return false;
	}
	return true;
}

fl_status fl_lines_close(fl_lines *lines) {
	if (lines->status >= 0 && lines->at != lines->end)
		return fl_lines_fail(lines, "more lines than there should be");
	return lines->status;
}

const char *fl_lines_text(fl_lines *lines, int i) {
	return lines->status < 0 ? "" : lines->values[i];
}

int64_t fl_lines_whole(fl_lines *lines, int i) {
	if (lines->status < 0)
		return 0;
	char *end = NULL;
	errno = 0;
	long long value = strtoll(lines->values[i], &end, 10);
	if (end == lines->values[i] || *end || errno)
		fl_lines_fail(lines, "a whole number is expected");
	return value;
}

/* With a point as mark whatever the locale: the base stage reads decimals so. */
double fl_lines_real(fl_lines *lines, int i) {
	if (lines->status < 0 || strcmp(lines->values[i], "-") == 0)
		return NAN;
	fl_decimal decimal;
	if (fl_decimal_parse(lines->values[i], &decimal, NULL, NULL) < 0)
		fl_lines_fail(lines, "a number is expected");
	return lines->status < 0 ? NAN : decimal.value;
}

fl_day fl_lines_day(fl_lines *lines, int i) {
	fl_day day = FL_NO_DAY;
	if (lines->status < 0 || strcmp(lines->values[i], "-") == 0)
		return FL_NO_DAY;
	if (fl_day_parse(lines->values[i], &day, NULL) < 0)
		fl_lines_fail(lines, "a day is expected, such as 2026-04-14");
	return day;
}

fl_utc fl_lines_utc(fl_lines *lines, int i) {
	fl_utc utc = 0;
	if (lines->status >= 0 && fl_utc_parse(lines->values[i], &utc, NULL) < 0)
		fl_lines_fail(lines, "a time is expected, such as 2026-04-14T08:00:12Z");
	return utc;
}

bool fl_is_digest(const char *text) {
	return strlen(text) == FL_DIGEST_HEX_SIZE - 1 && strspn(text, "0123456789abcdef") == FL_DIGEST_HEX_SIZE - 1;
}

void fl_lines_digest(fl_lines *lines, int i, char out[FL_DIGEST_HEX_SIZE]) {
	out[0] = '\0';
	if (lines->status < 0)
		return;
	if (fl_is_digest(lines->values[i]))
		memcpy(out, lines->values[i], FL_DIGEST_HEX_SIZE);
	else
		fl_lines_fail(lines, "a digest of 64 hexadecimal digits is expected");
}
