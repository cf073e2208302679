/* wording.c - rounding by the rules of a certificate, and small texts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "wording.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define MINUS "\xE2\x88\x92"

fl_stated_u fl_word_state_u(double u) {
	fl_rounded_u rounded = fl_analysis_round_u(u);
	return (fl_stated_u){rounded.value, rounded.decimals};
}

/* To tens or hundreds where decimals is negative. */
static double to_place(double value, int decimals) {
	if (decimals >= 0)
		return value;
	double unit = pow(10, -decimals);
	return rint(value / unit) * unit;
}

static const char *with_minus(fl_sheet *sheet, const char *number) {
	return number[0] == '-' ? fl_sheet_printf(sheet, MINUS "%s", number + 1) : fl_sheet_copy(sheet, number);
}

const char *fl_word_number(fl_sheet *sheet, double value, int decimals) {
	char number[64];
	if (!isfinite(value))
		return FL_ABSENT;
	fl_decimal_format(to_place(value, decimals), decimals < 0 ? 0 : decimals, number, sizeof number);
	return with_minus(sheet, number);
}

const char *fl_word_signed(fl_sheet *sheet, double value, int decimals) {
	char number[64];
	if (!isfinite(value))
		return FL_ABSENT;
	fl_decimal_format_signed(to_place(value, decimals), decimals < 0 ? 0 : decimals, true, number, sizeof number);
	return fl_sheet_copy(sheet, number);
}

const char *fl_word_u(fl_sheet *sheet, double u) {
	fl_stated_u stated = fl_word_state_u(u);
	return stated.value > 0 ? fl_word_number(sheet, stated.value, stated.decimals) : FL_ABSENT;
}

const char *fl_word_error(fl_sheet *sheet, double value, double u) {
	fl_stated_u stated = fl_word_state_u(u);
	return fl_word_signed(sheet, value, stated.value > 0 ? stated.decimals : 3);
}

const char *fl_word_plain(fl_sheet *sheet, double value, int most) {
	char number[64];
	if (!isfinite(value))
		return FL_ABSENT;
	fl_decimal_format(value, most, number, sizeof number);
	if (strchr(number, '.')) {
		char *end = number + strlen(number) - 1;
		while (*end == '0')
			*end-- = '\0';
		if (*end == '.')
			*end = '\0';
	}
	return with_minus(sheet, number);
}

const char *fl_word_limit(fl_sheet *sheet, double value) {
	double tenths = value * 10;
	return fabs(tenths - rint(tenths)) < 1e-9 ? fl_word_number(sheet, value, 1) : fl_word_plain(sheet, value, 4);
}

const char *fl_word_clock(fl_sheet *sheet, fl_utc at, int utc_offset_min) {
	char utc[FL_UTC_SIZE], local[FL_UTC_SIZE];
	fl_utc_format(at, utc);
	fl_utc_format(at + 60 * (fl_utc)utc_offset_min, local);
	return utc_offset_min == 0 ? fl_sheet_printf(sheet, "%.5s UTC", utc + 11)
	                           : fl_sheet_printf(sheet, "%.5s UTC (%.5s local)", utc + 11, local + 11);
}

const char *fl_word_day(fl_sheet *sheet, fl_day day) {
	char text[FL_DAY_SIZE];
	return day == FL_NO_DAY ? FL_ABSENT : fl_sheet_copy(sheet, fl_day_format(day, text));
}

const char *fl_word_offset(fl_sheet *sheet, int utc_offset_min) {
	int size = abs(utc_offset_min);
	return fl_sheet_printf(sheet, "UTC%s%02d:%02d", utc_offset_min < 0 ? MINUS : "+", size / 60, size % 60);
}

const char *fl_word_time(fl_sheet *sheet, fl_utc at, int utc_offset_min) {
	char utc[FL_UTC_SIZE], local[FL_UTC_SIZE];
	if (at == INT64_MIN)
		return FL_ABSENT;
	fl_utc_format(at, utc);
	if (utc_offset_min == 0)
		return fl_sheet_printf(sheet, "%.10s %.5s UTC", utc, utc + 11);
	fl_utc_format(at + 60 * (fl_utc)utc_offset_min, local);
	bool same_day = strncmp(utc, local, 10) == 0;
	return fl_sheet_printf(sheet, "%.10s %.5s UTC (%.*s%s%.5s local, %s)", utc, utc + 11, same_day ? 0 : 10, local,
	                       same_day ? "" : " ", local + 11, fl_word_offset(sheet, utc_offset_min));
}

const char *fl_word_sentence(fl_sheet *sheet, const char *text) {
	fl_text made = {0};
	for (const char *c = text; *c; c++) {
		bool minus = c[0] == '-' && isdigit((unsigned char)c[1]) && (c == text || c[-1] == ' ' || c[-1] == '(');
		char letter = c == text && *c >= 'a' && *c <= 'z' ? (char)(*c - 'a' + 'A') : *c;
		if (minus)
			fl_text_add(&made, MINUS);
		else
			fl_text_append(&made, &letter, 1);
	}
	if (made.length > 0 && !strchr(".!?", made.data[made.length - 1]))
		fl_text_add(&made, ".");
	sheet->failed |= made.failed;
	const char *kept = fl_sheet_copy(sheet, made.data);
	fl_text_free(&made);
	return kept;
}

const char *fl_word_band(fl_sheet *sheet, fl_band band, const char *dial_unit) {
	const char *width = fl_word_limit(sheet, band.half_width);
	switch (band.basis) {
	case FL_BAND_PERCENT_SPAN:
		return fl_sheet_printf(sheet, "±%s %% of span", width);
	case FL_BAND_PERCENT_READING:
		return fl_sheet_printf(sheet, "±%s %% of reading", width);
	case FL_BAND_DIAL_UNITS:
		return fl_sheet_printf(sheet, "±%s %s", width, dial_unit);
	case FL_BAND_NONE:
		break;
	}
	return "";
}

bool fl_word_is_empty(const char *text) {
	return !text || !*text;
}
