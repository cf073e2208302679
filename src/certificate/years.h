/* years.h - what the parts of the trend report share: the records of one instrument, each quantity through the years,
 * the sheet under way.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CERTIFICATE_YEARS_H
#define FOUNDLEFT_CERTIFICATE_YEARS_H

#include "wording.h"

enum { FL_YEARS_MOST = 24 }; /* quantities followed: zero, span, and the points */

typedef struct fl_quantity_years {
	const char *name; /* "span", "LK-50 at 93 % of span" */
	fl_saw saw;
	fl_drift drift;
	fl_forecast forecast;
} fl_quantity_years;

typedef struct fl_years {
	fl_sheet *sheet;
	const fl_trend_report *report;
	const fl_record *records, *last;
	size_t count;
	fl_quantity_years of[FL_YEARS_MOST];
	size_t quantities;
	fl_quantity_years *decides; /* the point that reaches its limit first; NULL without a point */
} fl_years;

/* Date as a number of years: 2026-07-02 is about 2026.5. */
double fl_years_at(fl_day day);
const char *fl_years_percent(fl_years *y, double fraction, int decimals); /* with sign, without "%" */
/* The as-found run that shows the instrument as it came, else the as-left one. NULL where neither was taken. */
const fl_kept_run *fl_years_first_run(const fl_record *record);

void fl_years_charts(fl_years *y);   /* trend_chart.c */
void fl_years_drift(fl_years *y);    /* trend_tables.c: each quantity's drift and forecast */
void fl_years_history(fl_years *y);  /* trend_tables.c */
void fl_years_interval(fl_years *y); /* trend_tables.c: proposals by the named methods */
void fl_years_lookback(fl_years *y); /* trend_tables.c */

#endif
