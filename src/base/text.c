/* text.c - a text that grows, with one flag for all that failed on the way.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "foundleft/base.h"

/* Makes room for `more` bytes and the terminator. */
static bool reserve(fl_text *text, size_t more) {
	if (text->failed || more > SIZE_MAX / 4 || text->length > SIZE_MAX / 4) {
		text->failed = true;
		return false;
	}
	size_t need = text->length + more + 1;
	if (need <= text->capacity)
		return true;
	size_t room = text->capacity < 64 ? 64 : text->capacity * 2;
	if (room < need)
		room = need;
	char *larger = realloc(text->data, room);
	if (!larger) {
		text->failed = true;
		return false;
	}
	text->data = larger;
	text->capacity = room;
	return true;
}

void fl_text_append(fl_text *text, const char *bytes, size_t length) {
	if (!reserve(text, length))
		return;
	if (length > 0)
		memcpy(text->data + text->length, bytes, length);
	text->length += length;
	text->data[text->length] = '\0';
}

void fl_text_add(fl_text *text, const char *string) {
	fl_text_append(text, string, strlen(string));
}

void fl_text_printf(fl_text *text, const char *format, ...) {
	va_list values, again;
	va_start(values, format);
	va_copy(again, values);
	size_t room = text->failed ? 0 : text->capacity - text->length;
	int length = vsnprintf(room ? text->data + text->length : NULL, room, format, values);
	va_end(values);
	bool fitted = length >= 0 && (size_t)length < room;
	if (room > 0 && !fitted)
		text->data[text->length] = '\0';
	if (length < 0)
		text->failed = true;
	else if (!fitted && reserve(text, (size_t)length))
		fitted = vsnprintf(text->data + text->length, (size_t)length + 1, format, again) == length;
	if (fitted)
		text->length += (size_t)length;
	va_end(again);
}

void fl_text_pad_to(fl_text *text, int column) {
	const char *line = text->data ? memrchr(text->data, '\n', text->length) : NULL;
	line = line ? line + 1 : text->data;
	int here = line ? fl_utf8_columns(line) : 0;
	for (; here < column; here++)
		fl_text_append(text, " ", 1);
}

void fl_text_clear(fl_text *text) {
	text->length = 0;
	if (text->data)
		text->data[0] = '\0';
}

void fl_text_free(fl_text *text) {
	free(text->data);
	*text = (fl_text){0};
}
