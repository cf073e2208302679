/* wording.h - numbers, dates and sentences as the certificate shows them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CERTIFICATE_WORDING_H
#define FOUNDLEFT_CERTIFICATE_WORDING_H

#include "sheet.h"

/* What stands where a number is absent. */
#define FL_ABSENT "–"

/* An expanded uncertainty as stated: two significant digits (JCGM 100:2008, 7.2.6; ILAC-P14:09/2020, 5.3), half to even
 * unless that takes away more than 5 % of it, then up. `decimals` is the place of the last digit, negative for tens.
 * `value` is 0 and `decimals` 0 where u is not a positive number. */
typedef struct fl_stated_u {
	double value;
	int decimals;
} fl_stated_u;
fl_stated_u fl_word_state_u(double u);

/* Text in the sheet's arena. Minus is U+2212; NAN gives FL_ABSENT. Negative decimals round to tens, hundreds. */
const char *fl_word_number(fl_sheet *sheet, double value, int decimals);
const char *fl_word_signed(fl_sheet *sheet, double value, int decimals);
/* The uncertainty as stated, never "0.00": FL_ABSENT where it is not a positive number. */
const char *fl_word_u(fl_sheet *sheet, double u);
/* A value to the place of its uncertainty, with sign; three significant decimals at most where U is absent. */
const char *fl_word_error(fl_sheet *sheet, double value, double u);
/* The shortest of up to `most` decimals that says the same value: "2", "0.95". */
const char *fl_word_plain(fl_sheet *sheet, double value, int most);

/* A limit: at least one decimal, no more than it needs: "2.0", "0.75". */
const char *fl_word_limit(fl_sheet *sheet, double value);

const char *fl_word_day(fl_sheet *sheet, fl_day day);
/* "09:20 UTC (11:20 local)" */
const char *fl_word_clock(fl_sheet *sheet, fl_utc at, int utc_offset_min);
/* "2026-04-14 08:00 UTC (10:00 local, UTC+02:00)"; FL_ABSENT for an unknown time. */
const char *fl_word_time(fl_sheet *sheet, fl_utc at, int utc_offset_min);
const char *fl_word_offset(fl_sheet *sheet, int utc_offset_min); /* "UTC+02:00" */
/* A copy that begins with a capital letter and ends with a full stop; typewriter minus before a digit made a minus. */
const char *fl_word_sentence(fl_sheet *sheet, const char *text);
/* A half width with its basis: "±2.0 % of span". */
const char *fl_word_band(fl_sheet *sheet, fl_band band, const char *dial_unit);
bool fl_word_is_empty(const char *text); /* NULL or "" */

#endif
