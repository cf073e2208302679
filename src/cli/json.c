/* json.c - values as JSON: commas, quotes, and the shortest number that reads back as the same double.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "json.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* A comma, unless the value is the first of its object or list, or stands behind its key. */
static void separate(fl_json *to) {
	if (to->out->length <= to->start)
		return;
	char last = to->out->data[to->out->length - 1];
	if (last != '{' && last != '[' && last != ':')
		fl_text_add(to->out, ",");
}

static void write_string(fl_json *to, const char *text) {
	if (!fl_utf8_valid(text, strlen(text))) {
		to->bad_text = true;
		text = "";
	}
	fl_text_add(to->out, "\"");
	for (const char *c = text; *c; c++) {
		if (*c == '"' || *c == '\\')
			fl_text_printf(to->out, "\\%c", *c);
		else if (*c == '\n')
			fl_text_add(to->out, "\\n");
		else if ((unsigned char)*c < 0x20 || *c == 0x7F)
			fl_text_printf(to->out, "\\u%04x", (unsigned)*c);
		else
			fl_text_append(to->out, c, 1);
	}
	fl_text_add(to->out, "\"");
}

/* The key of the next value; NULL within a list. */
void fl_json_key(fl_json *to, const char *name) {
	separate(to);
	if (!name)
		return;
	write_string(to, name);
	fl_text_add(to->out, ":");
}

void fl_json_begin(fl_json *to, const char *name, char bracket) {
	fl_json_key(to, name);
	fl_text_append(to->out, &bracket, 1);
}

void fl_json_end(fl_json *to, char bracket) {
	fl_text_append(to->out, &bracket, 1);
}

void fl_json_null(fl_json *to, const char *name) {
	fl_json_key(to, name);
	fl_text_add(to->out, "null");
}

void fl_json_boolean(fl_json *to, const char *name, bool value) {
	fl_json_key(to, name);
	fl_text_add(to->out, value ? "true" : "false");
}

/* NULL gives null; an empty text stays one. */
void fl_json_string(fl_json *to, const char *name, const char *value) {
	if (!value) {
		fl_json_null(to, name);
		return;
	}
	fl_json_key(to, name);
	write_string(to, value);
}

/* An empty text means "none" and gives null. */
void fl_json_word(fl_json *to, const char *name, const char *value) {
	fl_json_string(to, name, value && value[0] ? value : NULL);
}

/* The shortest decimal that reads back as the same double; what is not finite gives null. */
void fl_json_number(fl_json *to, const char *name, double value) {
	if (!isfinite(value)) {
		fl_json_null(to, name);
		return;
	}
	char digits[40];
	for (int precision = 15; precision <= 17; precision++) {
		snprintf(digits, sizeof digits, "%.*g", precision, value == 0.0 ? 0.0 : value);
		if (strtod(digits, NULL) == value)
			break;
	}
	fl_json_key(to, name);
	fl_text_add(to->out, digits);
}

void fl_json_integer(fl_json *to, const char *name, long long value) {
	fl_json_key(to, name);
	fl_text_printf(to->out, "%lld", value);
}

void fl_json_percent(fl_json *to, const char *name, double fraction) {
	fl_json_number(to, name, fraction * FL_JSON_PERCENT);
}

void fl_json_day(fl_json *to, const char *name, fl_day value) {
	char text[FL_DAY_SIZE];
	fl_json_string(to, name, value == FL_NO_DAY ? NULL : fl_day_format(value, text));
}

void fl_json_utc(fl_json *to, const char *name, fl_utc value) {
	char text[FL_UTC_SIZE];
	fl_json_string(to, name, value == INT64_MIN ? NULL : fl_utc_format(value, text));
}

void fl_json_strings(fl_json *to, const char *name, const char *const *list, size_t count) {
	fl_json_begin(to, name, '[');
	for (size_t i = 0; i < count; i++)
		fl_json_string(to, NULL, list[i]);
	fl_json_end(to, ']');
}
