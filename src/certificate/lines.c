/* lines.c - breaking a text into lines: between words, and inside a word only where it is wider than the line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <string.h>

typedef struct fl_breaker {
	fl_press *press;
	fl_weight weight;
	double size, width, indent;
	fl_line_of_text *lines;
	size_t count, capacity;
} fl_breaker;

static void add_line(fl_breaker *breaker, const char *start, const char *end) {
	fl_line_of_text *grown =
	    fl_arena_grow(&breaker->press->arena, breaker->lines, breaker->count, &breaker->capacity, sizeof *grown);
	if (!grown) {
		if (breaker->press->status == FL_OK)
			breaker->press->status =
			    fl_fail(breaker->press->err, FL_E_MEMORY, "out of memory while setting the certificate");
		return;
	}
	breaker->lines = grown;
	breaker->lines[breaker->count++] = (fl_line_of_text){start, (size_t)(end - start)};
}

static double width_of(const fl_breaker *breaker, const char *start, const char *end) {
	return fl_press_width(breaker->press, breaker->weight, breaker->size, start, (size_t)(end - start));
}

static bool has_room(const fl_breaker *breaker, double width) {
	double room = breaker->width - (breaker->count == 0 ? breaker->indent : 0);
	return width <= room + 0.01;
}

/* End of the longest beginning of a word that fits; at least one character. */
static const char *split_word(const fl_breaker *breaker, const char *start, const char *end) {
	const char *last = start;
	fl_utf8_next(&last);
	for (const char *next = last; next < end;) {
		fl_utf8_next(&next);
		if (!has_room(breaker, width_of(breaker, start, next)))
			break;
		last = next;
	}
	return last;
}

/* Breaks one paragraph, start to end, without newlines. */
static void break_paragraph(fl_breaker *breaker, const char *start, const char *end) {
	const char *line = start, *good = start;
	double set = 0; /* width from line to good: a word is measured once, not with all before it */
	while (good < end && breaker->press->status == FL_OK) {
		const char *word = good;
		while (word < end && *word == ' ')
			word++;
		const char *stop = word;
		while (stop < end && *stop != ' ')
			stop++;
		double more = width_of(breaker, good, stop);
		if (has_room(breaker, set + more)) {
			good = stop;
			set += more;
			continue;
		}
		set = 0;
		if (good > line) { /* the word goes to the next line */
			add_line(breaker, line, good);
			line = good = word;
			continue;
		}
		const char *cut = split_word(breaker, line, stop);
		add_line(breaker, line, cut);
		line = good = cut;
	}
	if (line < end || breaker->count == 0)
		add_line(breaker, line, end);
}

size_t fl_press_lines(fl_press *press, fl_weight weight, double size, const char *text, double width, double indent,
                      fl_line_of_text **lines) {
	*lines = NULL;
	if (press->status != FL_OK)
		return 0;
	if (!fl_utf8_valid(text, strlen(text))) {
		press->status = fl_fail(press->err, FL_E_VALUE, "a text of the certificate is not valid UTF-8");
		return 0;
	}
	fl_breaker breaker = {.press = press, .weight = weight, .size = size, .width = width, .indent = indent};
	for (const char *start = text;; start++) {
		const char *end = strchr(start, '\n');
		break_paragraph(&breaker, start, end ? end : start + strlen(start));
		if (!end)
			break;
		start = end;
	}
	*lines = breaker.lines;
	return press->status == FL_OK ? breaker.count : 0;
}
