/* analysis/sentence.c - the sentences of a result, and the numbers and names in them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "work.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

enum { SENTENCE_SIZE = 512 };

static bool said_before(const sentences *list, const char *text) {
	for (size_t i = 0; i < list->count; i++)
		if (strcmp(list->items[i], text) == 0)
			return true;
	return false;
}

void fl_analysis_say(fl_arena *arena, sentences *list, const char *format, ...) {
	char text[SENTENCE_SIZE];
	va_list args;
	va_start(args, format);
	vsnprintf(text, sizeof text, format, args);
	va_end(args);
	if (list->failed || said_before(list, text))
		return;
	const char *kept = fl_arena_strdup(arena, text);
	const char **items = fl_arena_grow(arena, (void *)list->items, list->count, &list->capacity, sizeof *items);
	if (!kept || !items) {
		list->failed = true;
		return;
	}
	list->items = items;
	list->items[list->count++] = kept;
}

static void drop_trailing_zeros(char *text) {
	if (!strchr(text, '.'))
		return;
	char *end = text + strlen(text) - 1;
	while (*end == '0')
		*end-- = '\0';
	if (*end == '.')
		*end = '\0';
}

const char *fl_analysis_number(fl_arena *arena, double value, int significant) {
	char text[64];
	int decimals = significant - 1;
	if (value != 0.0 && isfinite(value))
		decimals -= (int)floor(log10(fabs(value)));
	fl_decimal_format(value, decimals < 0 ? 0 : decimals > 15 ? 15 : decimals, text, sizeof text);
	drop_trailing_zeros(text);
	const char *kept = fl_arena_strdup(arena, text);
	return kept ? kept : "?";
}

const char *fl_analysis_percent(fl_arena *arena, double span, int decimals) {
	char number[48];
	const char *kept =
	    fl_arena_printf(arena, "%s %%", fl_decimal_format(100.0 * span, decimals, number, sizeof number));
	return kept ? kept : "?";
}

const char *fl_analysis_percent_signed(fl_arena *arena, double span, int decimals) {
	char number[48];
	fl_decimal_format_signed(100.0 * span, decimals, false, number, sizeof number);
	const char *kept = fl_arena_printf(arena, "%s %%", number);
	return kept ? kept : "?";
}

const char *fl_analysis_point_name(const work *w, const fl_point_result *point) {
	const char *pass = point->both ? "rising and falling" : fl_pass_word(point->pass);
	const char *kept;
	if (point->point == FL_POINT_ZERO)
		kept = fl_arena_printf(w->arena, "the stopped zero, %s", pass);
	else if (point->oil[0])
		kept = fl_arena_printf(w->arena, "%s %s", point->oil, pass);
	else
		kept = fl_arena_printf(w->arena, "%s of span %s", fl_analysis_percent(w->arena, point->x, 1), pass);
	return kept ? kept : "?";
}
