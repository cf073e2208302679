/* trend_tables.c - the trend report's tables: every session, the drift of each quantity, intervals, the look-back.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "years.h"

/* ---- every session ----------------------------------------------------------------------------------------------- */

static const char *work_text(fl_years *y, const fl_record *record) {
	static const struct {
		unsigned bit;
		const char *word;
	} works[] = {{FL_WORK_BEFORE, "touched before"},
	             {FL_WORK_ADJUSTED, "adjusted"},
	             {FL_WORK_CLEANED, "cleaned"},
	             {FL_WORK_REPAIRED, "repaired"}};
	const char *text = "";
	for (size_t i = 0; i < sizeof works / sizeof *works; i++)
		if (record->work & works[i].bit)
			text = fl_sheet_printf(y->sheet, "%s%s%s", text, *text ? ", " : "", works[i].word);
	return *text ? text : "left alone";
}

static double largest_error(const fl_kept_run *run) {
	double largest = NAN;
	for (size_t i = 0; run->state != FL_KEPT_NONE && i < run->point_count; i++)
		if (isnan(largest) || fabs(run->points[i].error_span) > fabs(largest))
			largest = run->points[i].error_span;
	return largest;
}

static const char *verdict_of(const fl_kept_run *run) {
	return run->state == FL_KEPT_NONE ? FL_ABSENT : *run->verdict ? run->verdict : FL_ABSENT;
}

void fl_years_history(fl_years *y) {
	static const fl_column columns[] = {{"day", "", "", FL_ALIGN_LEFT, false},
	                                    {"record", "", "", FL_ALIGN_LEFT, false},
	                                    {"hours", "h", "", FL_ALIGN_DECIMAL, false},
	                                    {"zero", "%", "as-found", FL_ALIGN_DECIMAL, false},
	                                    {"span", "%", "as-found", FL_ALIGN_DECIMAL, false},
	                                    {"largest\nerror", "%", "as-found", FL_ALIGN_DECIMAL, false},
	                                    {"verdict", "", "as-found", FL_ALIGN_LEFT, true},
	                                    {"work", "", "", FL_ALIGN_LEFT, true},
	                                    {"zero", "%", "as-left", FL_ALIGN_DECIMAL, false},
	                                    {"span", "%", "as-left", FL_ALIGN_DECIMAL, false},
	                                    {"largest\nerror", "%", "as-left", FL_ALIGN_DECIMAL, false},
	                                    {"verdict", "", "as-left", FL_ALIGN_LEFT, true}};
	fl_sheet *sheet = y->sheet;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Every session, errors in % of span");
	fl_block *table = fl_sheet_add_table(sheet, columns, sizeof columns / sizeof *columns);
	for (size_t i = 0; i < y->count; i++) {
		const fl_record *r = &y->records[i];
		const fl_kept_run *found = &r->as_found, *left = &r->as_left;
		const char *cells[] = {fl_word_day(sheet, r->day),
		                       r->number,
		                       fl_word_number(sheet, r->running_hours, 0),
		                       fl_years_percent(y, found->zero_span, 2),
		                       fl_years_percent(y, found->span_span, 2),
		                       fl_years_percent(y, largest_error(found), 2),
		                       verdict_of(found),
		                       work_text(y, r),
		                       fl_years_percent(y, left->zero_span, 2),
		                       fl_years_percent(y, left->span_span, 2),
		                       fl_years_percent(y, largest_error(left), 2),
		                       verdict_of(left)};
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
}

/* ---- each quantity ----------------------------------------------------------------------------------------------- */

static const char *limit_day(fl_years *y, const fl_forecast *f, fl_day day) {
	if (!f->determined)
		return FL_ABSENT;
	if (day == FL_NO_DAY)
		return fl_sheet_printf(y->sheet, "beyond %d years", FL_FORECAST_YEARS);
	return day <= f->from ? "now" : fl_word_day(y->sheet, day);
}

static const char *curvature(fl_years *y, const fl_drift *drift) {
	if (!drift->determined)
		return fl_sheet_printf(y->sheet, "%d interval%s: no line", drift->intervals, drift->intervals == 1 ? "" : "s");
	if (!drift->has_curvature)
		return "too few to tell";
	return drift->accelerates ? "accelerates" : drift->slows ? "slows" : "steady";
}

void fl_years_drift(fl_years *y) {
	static const fl_column columns[] = {{"quantity", "", "", FL_ALIGN_LEFT, true},
	                                    {"intervals", "", "", FL_ALIGN_DECIMAL, false},
	                                    {"drift", "% a year", "", FL_ALIGN_DECIMAL, false},
	                                    {"standard\nuncertainty", "% a year", "", FL_ALIGN_DECIMAL, false},
	                                    {"course", "", "", FL_ALIGN_LEFT, false},
	                                    {"limit", "%", "guarded limit reached", FL_ALIGN_DECIMAL, false},
	                                    {"by the mean", "", "guarded limit reached", FL_ALIGN_LEFT, false},
	                                    {"by the 95 % bound", "", "guarded limit reached", FL_ALIGN_LEFT, false}};
	fl_sheet *sheet = y->sheet;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Drift of each quantity since it last began anew");
	fl_block *table = fl_sheet_add_table(sheet, columns, sizeof columns / sizeof *columns);
	for (size_t i = 0; i < y->quantities; i++) {
		const fl_quantity_years *q = &y->of[i];
		bool has = q->drift.determined;
		const fl_tooth *tooth = &q->saw.teeth[q->saw.count - 1];
		if (isnan(tooth->as_found) && isnan(tooth->as_left))
			continue; /* not determined in the last session */
		const char *cells[] = {q->name,
		                       fl_sheet_printf(sheet, "%d", q->drift.intervals),
		                       has ? fl_years_percent(y, q->drift.slope, 3) : FL_ABSENT,
		                       has ? fl_word_number(sheet, 100 * q->drift.se, 3) : FL_ABSENT,
		                       curvature(y, &q->drift),
		                       q->forecast.determined ? fl_word_number(sheet, 100 * q->forecast.limit, 2) : FL_ABSENT,
		                       limit_day(y, &q->forecast, q->forecast.by_mean),
		                       limit_day(y, &q->forecast, q->forecast.by_bound)};
		fl_sheet_row(sheet, table, i == 2 ? FL_ROW_FIRST : FL_ROW_PLAIN, cells);
	}
}

/* ---- intervals --------------------------------------------------------------------------------------------------- */

static void add_proposal(fl_years *y, fl_block *table, const fl_proposal *p) {
	fl_sheet *sheet = y->sheet;
	const char *months = p->determined ? fl_sheet_printf(sheet, "%d", p->months) : FL_ABSENT;
	const char *due = p->determined ? fl_word_day(sheet, fl_trend_due(y->last->day, p->months)) : FL_ABSENT;
	const char *cells[] = {fl_interval_method_name(p->method), months, due, fl_word_sentence(sheet, p->reason)};
	fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
}

void fl_years_interval(fl_years *y) {
	static const fl_column columns[] = {{"method", "", "", FL_ALIGN_LEFT, true},
	                                    {"months", "", "", FL_ALIGN_DECIMAL, false},
	                                    {"due", "", "", FL_ALIGN_LEFT, false},
	                                    {"reason", "", "", FL_ALIGN_LEFT, true}};
	fl_interval_policy policy = fl_trend_policy();
	fl_sheet *sheet = y->sheet;
	fl_proposal p;
	if (!y->decides)
		return;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Proposed intervals (methods of ILAC-G24 / OIML D 10)");
	fl_block *table = fl_sheet_add_table(sheet, columns, sizeof columns / sizeof *columns);
	fl_quantity_years *q = y->decides; /* texts go to its saw's arena, which lives as long as the writing does */
	if (fl_trend_staircase(y->records, y->count, &policy, &sheet->arena, &p, NULL) >= 0)
		add_proposal(y, table, &p);
	if (fl_trend_chart(&q->saw, &q->drift, &policy, &p, NULL) >= 0)
		add_proposal(y, table, &p);
	if (fl_trend_hours(&q->saw, &policy, &p, NULL) >= 0)
		add_proposal(y, table, &p);
	if (y->report->fleet)
		add_proposal(y, table, y->report->fleet);
	fl_sheet_add(
	    sheet, FL_BLOCK_SMALL,
	    "Proposals, not decisions: whoever answers for the instrument agrees the interval. Due dates count from the "
	    "calibration's day.");
}

/* ---- look-back --------------------------------------------------------------------------------------------------- */

static const char *day_meaning(const fl_lookback *l, int i) {
	static const char *const meanings[FL_LOOKBACK_DAYS] = {"calibrated and left", "not before, by the uncertainties",
	                                                       "by the values", "not after, by the uncertainties",
	                                                       "found out of tolerance"};
	if (i == 0 && l->before_from)
		return "calibrated and left; within the uncertainties beyond it already";
	return i == 3 && l->latest == FL_NO_DAY ? "the crossing itself is not certain" : meanings[i];
}

static void lookback_days(fl_years *y, const fl_lookback *l) {
	const fl_column columns[] = {{"day", "", "", FL_ALIGN_LEFT, false},
	                             {"what", "", "", FL_ALIGN_LEFT, true},
	                             {"error at the\nset point", "% of span", "", FL_ALIGN_DECIMAL, false},
	                             {"true value at the\nset point", y->last->dial_unit, "", FL_ALIGN_DECIMAL, false}};
	if (!l->has_set_point)
		return;
	fl_block *table = fl_sheet_add_table(y->sheet, columns, 4);
	for (int i = 0; i < FL_LOOKBACK_DAYS; i++) {
		if (i == 1 && l->earliest <= l->from)
			continue; /* the first row says it */
		const char *cells[] = {fl_word_day(y->sheet, l->days[i].day), day_meaning(l, i),
		                       fl_years_percent(y, l->days[i].error_at_set_point, 2),
		                       fl_word_number(y->sheet, l->days[i].true_value, 2)};
		fl_sheet_row(y->sheet, table, FL_ROW_PLAIN, cells);
	}
}

/* Whoever answers for the plant says what follows from it, and signs. */
static void disposition(fl_years *y) {
	static const char *const heads[] = {"Disposition", "Engine department", "Superintendent"};
	fl_block *block = fl_sheet_add_grid(y->sheet, FL_BLOCK_SIGNATURES, heads, 3);
	if (!block)
		return;
	for (int i = 0; i < 3; i++)
		block->parts[i] = -1;
	fl_sheet_pairf(y->sheet, block, 0, "what is done about it", "%s", "");
	fl_sheet_pairf(y->sheet, block, 1, "name, date", "%s", "");
	fl_sheet_pairf(y->sheet, block, 2, "name, date", "%s", "");
}

void fl_years_lookback(fl_years *y) {
	bool wants = false;
	for (size_t i = 0; i < y->count; i++) {
		fl_lookback l;
		bool last = i + 1 == y->count;
		if (fl_trend_lookback(i ? &y->records[i - 1] : NULL, &y->records[i], &y->sheet->arena, &l, NULL) < 0 ||
		    !l.needed)
			continue;
		if (!wants)
			fl_sheet_add(y->sheet, FL_BLOCK_HEADING, "Look-back: found out of tolerance");
		wants = true;
		fl_sheet_add_led(
		    y->sheet, FL_BLOCK_ITEM,
		    fl_sheet_printf(y->sheet, "%s, %s.", fl_word_day(y->sheet, y->records[i].day), y->records[i].number), "%s",
		    fl_word_sentence(y->sheet, l.sentence));
		if (last) {
			lookback_days(y, &l);
			disposition(y);
		}
	}
}
