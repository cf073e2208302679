/* words.h - numbers and days in the sentences of the trend.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_TREND_WORDS_H
#define FOUNDLEFT_TREND_WORDS_H

#include "foundleft/base.h"

typedef struct fl_trend_word {
	char text[48];
} fl_trend_word;

/* A fraction of span in percent, with its sign: "+2.54 %". */
fl_trend_word fl_trend_word_percent(double fraction, int decimals);
/* Without a sign. */
fl_trend_word fl_trend_word_number(double value, int decimals);
fl_trend_word fl_trend_word_day(fl_day day);
/* A sentence in the arena; FL_E_MEMORY if it is out. */
fl_status fl_trend_say(fl_arena *arena, const char **out, fl_error *err, const char *format, ...)
    FL_PRINTF(4, 5) FL_MUST_USE;

#endif
