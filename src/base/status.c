/* status.c - outcomes, and an error with its place turned into one line for people.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "foundleft/base.h"
#include "utf8.h"

const char *fl_status_text(fl_status status) {
	switch (status) {
#define FL_STATUS_CASE(name, value, sentence) \
	case name:                                \
		return sentence;
		FL_STATUS_LIST(FL_STATUS_CASE)
#undef FL_STATUS_CASE
	}
	return "an outcome that the program does not know";
}

static void copy_cut(char *out, size_t size, const char *text) {
	snprintf(out, size, "%s", text ? text : "");
	fl_utf8_drop_torn_end(out);
}

static void record(fl_error *err, fl_status status, const fl_place *place, const char *format, va_list values)
    FL_PRINTF(4, 0);

static void record(fl_error *err, fl_status status, const fl_place *place, const char *format, va_list values) {
	if (!err || err->status != FL_OK)
		return;
	err->status = status;
	copy_cut(err->file, sizeof err->file, place->file);
	err->line = place->line;
	err->column = place->column;
	copy_cut(err->field, sizeof err->field, place->field);
	vsnprintf(err->message, sizeof err->message, format, values);
	fl_utf8_drop_torn_end(err->message);
}

fl_status fl_fail(fl_error *err, fl_status status, const char *format, ...) {
	va_list values;
	va_start(values, format);
	record(err, status, &(fl_place){0}, format, values);
	va_end(values);
	return status;
}

fl_status fl_fail_at(fl_error *err, fl_status status, fl_place place, const char *format, ...) {
	va_list values;
	va_start(values, format);
	record(err, status, &place, format, values);
	va_end(values);
	return status;
}

/* Copies text so that it cannot move the cursor, colour the terminal or turn the reading direction. */
static void add_harmless(char *out, size_t size, const char *text) {
	size_t used = strlen(out);
	for (const char *at = text; *at;) {
		const char *start = at;
		uint32_t code = fl_utf8_next(&at);
		size_t length = (size_t)(at - start);
		if (fl_utf8_is_control(code) || !fl_utf8_valid(start, length)) {
			start = "?";
			length = 1;
		}
		if (used + length >= size)
			break;
		memcpy(out + used, start, length);
		used += length;
	}
	out[used] = '\0';
}

char *fl_error_line(const fl_error *err, char *out, size_t size) {
	if (size == 0)
		return out;
	out[0] = '\0';
	add_harmless(out, size, err->file);
	char number[16];
	if (err->line > 0) {
		snprintf(number, sizeof number, "%s%d", err->file[0] ? ":" : "line ", err->line);
		add_harmless(out, size, number);
	}
	if (err->line > 0 && err->column > 0) {
		snprintf(number, sizeof number, ":%d", err->column);
		add_harmless(out, size, number);
	}
	if (err->file[0] || err->line > 0)
		add_harmless(out, size, ": ");
	if (err->field[0]) {
		add_harmless(out, size, err->field);
		add_harmless(out, size, ": ");
	}
	add_harmless(out, size, err->message[0] ? err->message : fl_status_text(err->status));
	return out;
}
