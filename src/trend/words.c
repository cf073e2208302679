/* words.c - numbers and days in the sentences of the trend.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "words.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

fl_trend_word fl_trend_word_percent(double fraction, int decimals) {
	fl_trend_word word;
	fl_decimal_format_signed(100.0 * fraction, decimals, false, word.text, sizeof word.text - 4);
	strcat(word.text, " %");
	return word;
}

fl_trend_word fl_trend_word_number(double value, int decimals) {
	fl_trend_word word;
	fl_decimal_format(value, decimals, word.text, sizeof word.text);
	return word;
}

fl_trend_word fl_trend_word_day(fl_day day) {
	fl_trend_word word;
	fl_day_format(day, word.text);
	return word;
}

fl_status fl_trend_say(fl_arena *arena, const char **out, fl_error *err, const char *format, ...) {
	char text[768];
	va_list list;
	va_start(list, format);
	vsnprintf(text, sizeof text, format, list);
	va_end(list);
	*out = fl_arena_strdup(arena, text);
	if (*out)
		return FL_OK;
	*out = "";
	return fl_fail(err, FL_E_MEMORY, "out of memory for the trend");
}
