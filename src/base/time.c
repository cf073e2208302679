/* time.c - dates and moments as text and as numbers; proleptic Gregorian calendar, UTC, ISO 8601 forms only.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "foundleft/base.h"

#define SECONDS_PER_DAY 86400
#define YEAR_FIRST 1900
#define YEAR_LAST 2200

static bool is_leap(int year) {
	return year % 4 == 0 && (year % 100 != 0 || year % 400 == 0);
}

static int days_in_month(int year, int month) {
	static const int days[] = {31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
	return days[month - 1] + (month == 2 && is_leap(year));
}

/* Rounds towards minus infinity, so that days before 1970 come out right. */
static int64_t floor_divide(int64_t a, int64_t b) {
	return a / b - (a % b < 0);
}

/* Counting from 1 March puts the leap day at the end of the year: month m then starts on day (153 m + 2) / 5. */
fl_day fl_day_from_civil(int year, int month, int day_of_month) {
	int64_t y = month <= 2 ? (int64_t)year - 1 : year;
	int64_t era = floor_divide(y, 400);
	int64_t year_of_era = y - era * 400;
	int64_t day_of_year = (153 * (month + (month > 2 ? -3 : 9)) + 2) / 5 + day_of_month - 1;
	int64_t day_of_era = year_of_era * 365 + year_of_era / 4 - year_of_era / 100 + day_of_year;
	return (fl_day)(era * 146097 + day_of_era - 719468);
}

void fl_day_to_civil(fl_day day, int *year, int *month, int *day_of_month) {
	int64_t shifted = (int64_t)day + 719468;
	int64_t era = floor_divide(shifted, 146097);
	int64_t day_of_era = shifted - era * 146097;
	int64_t year_of_era = (day_of_era - day_of_era / 1460 + day_of_era / 36524 - day_of_era / 146096) / 365;
	int64_t day_of_year = day_of_era - (365 * year_of_era + year_of_era / 4 - year_of_era / 100);
	int64_t m = (5 * day_of_year + 2) / 153;
	*day_of_month = (int)(day_of_year - (153 * m + 2) / 5 + 1);
	*month = (int)(m < 10 ? m + 3 : m - 9);
	*year = (int)(year_of_era + era * 400 + (*month <= 2));
}

fl_day fl_day_of(fl_utc utc) {
	return (fl_day)floor_divide(utc, SECONDS_PER_DAY);
}

/* True if the year has four digits, as the text forms need. */
static bool has_text_form(int64_t day) {
	return day >= fl_day_from_civil(0, 1, 1) && day <= fl_day_from_civil(9999, 12, 31);
}

char *fl_day_format(fl_day day, char out[FL_DAY_SIZE]) {
	if (day == FL_NO_DAY || !has_text_form(day)) {
		memcpy(out, "-", 2);
		return out;
	}
	int year, month, day_of_month;
	fl_day_to_civil(day, &year, &month, &day_of_month);
	snprintf(out, FL_DAY_SIZE, "%04u-%02u-%02u", (unsigned)year % 10000u, (unsigned)month % 100u,
	         (unsigned)day_of_month % 100u);
	return out;
}

char *fl_utc_format(fl_utc utc, char out[FL_UTC_SIZE]) {
	int64_t day = floor_divide(utc, SECONDS_PER_DAY);
	if (!has_text_form(day)) {
		memcpy(out, "-", 2);
		return out;
	}
	char date[FL_DAY_SIZE];
	unsigned second = (unsigned)(utc - day * SECONDS_PER_DAY);
	snprintf(out, FL_UTC_SIZE, "%sT%02u:%02u:%02uZ", fl_day_format((fl_day)day, date), second / 3600 % 24,
	         second / 60 % 60, second % 60);
	return out;
}

/* True if text has exactly the shape of `pattern`: a digit where it has 0, the same byte elsewhere. */
static bool has_shape(const char *text, const char *pattern) {
	for (; *pattern; text++, pattern++) {
		bool digit = *text >= '0' && *text <= '9';
		if (*pattern == '0' ? !digit : *text != *pattern)
			return false;
	}
	return *text == '\0';
}

static int digits(const char *text, int count) {
	int value = 0;
	while (count-- > 0)
		value = value * 10 + (*text++ - '0');
	return value;
}

/* The date at the head of text, which has the shape 0000-00-00. */
static fl_status civil_parse(const char *text, fl_day *out, fl_error *err) {
	int year = digits(text, 4), month = digits(text + 5, 2), day = digits(text + 8, 2);
	if (year < YEAR_FIRST || year > YEAR_LAST)
		return fl_fail(err, FL_E_RANGE, "the year %04d is outside %d to %d", year, YEAR_FIRST, YEAR_LAST);
	if (month < 1 || month > 12)
		return fl_fail(err, FL_E_VALUE, "there is no month %02d: dates are year-month-day, such as 2026-04-14", month);
	if (day < 1 || day > days_in_month(year, month))
		return fl_fail(err, FL_E_VALUE, "there is no day %02d in %04d-%02d, which has %d days", day, year, month,
		               days_in_month(year, month));
	*out = fl_day_from_civil(year, month, day);
	return FL_OK;
}

fl_status fl_day_parse(const char *text, fl_day *out, fl_error *err) {
	char trimmed[64];
	if (!fl_text_trim(text, trimmed, sizeof trimmed))
		return fl_fail(err, FL_E_SYNTAX, "too long for a date: write year-month-day, such as 2026-04-14");
	if (trimmed[0] == '\0')
		return fl_fail(err, FL_E_SYNTAX, "the date is empty: write year-month-day, such as 2026-04-14");
	if (!has_shape(trimmed, "0000-00-00"))
		return fl_fail(err, FL_E_SYNTAX,
		               "\"%s\" is not a date: write year-month-day, such as 2026-04-14; other orders are ambiguous",
		               trimmed);
	return civil_parse(trimmed, out, err);
}

fl_status fl_utc_parse(const char *text, fl_utc *out, fl_error *err) {
	char trimmed[64];
	if (!fl_text_trim(text, trimmed, sizeof trimmed) || !has_shape(trimmed, "0000-00-00T00:00:00Z"))
		return fl_fail(err, FL_E_SYNTAX, "not a time: write it in UTC, such as 2026-04-14T08:00:12Z");
	fl_day day;
	fl_status status = civil_parse(trimmed, &day, err);
	if (status < 0)
		return status;
	int hour = digits(trimmed + 11, 2), minute = digits(trimmed + 14, 2), second = digits(trimmed + 17, 2);
	if (hour > 23 || minute > 59 || second > 59)
		return fl_fail(err, FL_E_VALUE, "there is no time %02d:%02d:%02d: hours go to 23, minutes and seconds to 59",
		               hour, minute, second);
	*out = (int64_t)day * SECONDS_PER_DAY + hour * 3600 + minute * 60 + second;
	return FL_OK;
}
