/* trend_content.c - the years of one instrument as a report: what was followed, in which order it is told.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "years.h"

double fl_years_at(fl_day day) {
	int year, month, of_month;
	fl_day_to_civil(day, &year, &month, &of_month);
	fl_day first = fl_day_from_civil(year, 1, 1), next = fl_day_from_civil(year + 1, 1, 1);
	return year + (double)(day - first) / (double)(next - first);
}

const char *fl_years_percent(fl_years *y, double fraction, int decimals) {
	return fl_word_signed(y->sheet, 100 * fraction, decimals);
}

const fl_kept_run *fl_years_first_run(const fl_record *record) {
	if (record->as_found.state != FL_KEPT_NONE)
		return &record->as_found;
	return record->as_left.state != FL_KEPT_NONE ? &record->as_left : NULL;
}

/* ---- what is followed -------------------------------------------------------------------------------------------- */

static const char *point_name(fl_years *y, const fl_kept_point *point) {
	if (point->point < 0)
		return "stopped zero";
	const char *at = fl_word_number(y->sheet, 100 * point->x, 0);
	return *point->oil ? fl_sheet_printf(y->sheet, "%s, at %s %% of span", point->oil, at)
	                   : fl_sheet_printf(y->sheet, "point at %s %% of span", at);
}

static fl_status follow(fl_years *y, const char *name, fl_quantity_followed what, fl_error *err) {
	if (y->quantities == FL_YEARS_MOST)
		return FL_OK;
	fl_quantity_years *q = &y->of[y->quantities];
	q->name = name;
	fl_status status = fl_trend_follow(y->records, y->count, what, &q->saw, err);
	if (status < 0)
		return status;
	y->quantities++;
	status = fl_trend_drift(&q->saw, &q->drift, err);
	return status < 0 ? status : fl_trend_forecast(&q->saw, &q->drift, &q->forecast, err);
}

static fl_status follow_all(fl_years *y, fl_error *err) {
	const fl_kept_run *run = fl_years_first_run(y->last);
	fl_status status = follow(y, "zero of the line", (fl_quantity_followed){.kind = FL_FOLLOW_ZERO}, err);
	if (status >= 0)
		status = follow(y, "span of the line", (fl_quantity_followed){.kind = FL_FOLLOW_SPAN}, err);
	for (size_t i = 0; run && i < run->point_count && status >= 0; i++)
		status = follow(y, point_name(y, &run->points[i]),
		                (fl_quantity_followed){FL_FOLLOW_POINT, run->points[i].point}, err);
	return status;
}

static double share_of_tolerance(const fl_quantity_years *q) {
	const fl_tooth *last = &q->saw.teeth[q->saw.count - 1];
	double error = isnan(last->as_found) ? last->as_left : last->as_found;
	return isnan(error) || !(last->tolerance > 0) ? -1 : fabs(error) / last->tolerance;
}

/* Earlier is worse; where no date is known, the larger part of the tolerance is. */
static bool decides_before(const fl_quantity_years *a, const fl_quantity_years *b) {
	bool dated_a = a->forecast.determined && a->forecast.by_bound != FL_NO_DAY;
	bool dated_b = b->forecast.determined && b->forecast.by_bound != FL_NO_DAY;
	if (dated_a != dated_b)
		return dated_a;
	if (dated_a && a->forecast.by_bound != b->forecast.by_bound)
		return a->forecast.by_bound < b->forecast.by_bound;
	return share_of_tolerance(a) > share_of_tolerance(b);
}

static void choose_deciding(fl_years *y) {
	for (size_t i = 0; i < y->quantities; i++)
		if (y->of[i].saw.what.kind == FL_FOLLOW_POINT && (!y->decides || decides_before(&y->of[i], y->decides)))
			y->decides = &y->of[i];
}

/* ---- the head ---------------------------------------------------------------------------------------------------- */

static void write_title(fl_years *y) {
	fl_sheet *sheet = y->sheet;
	const fl_trend_report *report = y->report;
	fl_sheet_issuer(sheet, report->issuer, report->issuer_address);
	sheet->title = "Trend report";
	sheet->number_label = "Instrument and date";
	sheet->number = fl_sheet_printf(sheet, "%s, %s", y->last->tag, fl_word_day(sheet, report->made_on));
	sheet->subtitle =
	    fl_sheet_printf(sheet, "Capillary viscosity sensor %s, serial number %s", y->last->tag, y->last->serial);
	sheet->running =
	    fl_sheet_printf(sheet, "%s  ·  %s, serial number %s", sheet->issuer, y->last->tag, y->last->serial);
	sheet->author = sheet->issuer;
	sheet->subject = sheet->subtitle;
	sheet->program = fl_sheet_printf(sheet, "foundleft %s", report->program_version ? report->program_version : "");
	sheet->fingerprint = fl_sheet_printf(sheet, "trend %s %s", y->last->digest, sheet->number);
	sheet->made_at = (fl_utc)report->made_on * 86400;
}

static void write_item(fl_years *y, fl_block *grid) {
	fl_sheet *sheet = y->sheet;
	const fl_record *last = y->last;
	fl_sheet_pair(sheet, grid, 0, "Tag", last->tag);
	fl_sheet_pair(sheet, grid, 0, "Serial no.", last->serial);
	fl_sheet_pair(sheet, grid, 0, "Owner", last->owner);
	fl_sheet_pair(sheet, grid, 0, "Site", last->site);
	fl_sheet_pair(sheet, grid, 0, "Position", last->position);
	fl_sheet_pairf(sheet, grid, 0, "Dial", "%s to %s %s", fl_word_plain(sheet, last->scale_low, 3),
	               fl_word_plain(sheet, last->scale_high, 3), last->dial_unit);
	if (isfinite(last->set_point))
		fl_sheet_pairf(sheet, grid, 0, "Set point", "%s %s", fl_word_plain(sheet, last->set_point, 3), last->dial_unit);
}

static const char *due_text(fl_years *y) {
	const fl_record *last = y->last;
	if (last->due == FL_NO_DAY)
		return "not agreed";
	const char *day = fl_word_day(y->sheet, last->due);
	if (last->due < y->report->made_on)
		return fl_sheet_printf(y->sheet, "%s: overdue", day);
	return last->interval_months > 0 ? fl_sheet_printf(y->sheet, "%s (%d months)", day, last->interval_months) : day;
}

static void write_state(fl_years *y, fl_block *grid) {
	fl_sheet *sheet = y->sheet;
	const fl_record *last = y->last;
	const fl_kept_run *left = last->as_left.state != FL_KEPT_NONE ? &last->as_left : &last->as_found;
	fl_sheet_pairf(sheet, grid, 1, "Sessions", "%zu, from %s to %s", y->count, fl_word_day(sheet, y->records[0].day),
	               fl_word_day(sheet, last->day));
	fl_sheet_pair(sheet, grid, 1, "Last record", last->number);
	fl_sheet_pair(sheet, grid, 1, "Left with verdict", left->verdict);
	fl_sheet_pair(sheet, grid, 1, "Next due", due_text(y));
	if (isfinite(last->running_hours))
		fl_sheet_pairf(sheet, grid, 1, "Running hours", "%s h", fl_word_number(sheet, last->running_hours, 0));
	if (y->decides)
		fl_sheet_pair(sheet, grid, 1, "Decides", y->decides->name);
	fl_sheet_pairf(sheet, grid, 1, "Last entry", "%.16s…", last->digest);
}

static void write_head(fl_years *y) {
	static const char *const heads[] = {"Item", "Record"};
	fl_block *grid = fl_sheet_add_grid(y->sheet, FL_BLOCK_GRID, heads, 2);
	write_item(y, grid);
	write_state(y, grid);
}

static void write_statements(fl_years *y) {
	const fl_quantity_years *q = y->decides;
	if (!q) {
		fl_sheet_add(y->sheet, FL_BLOCK_STATEMENT, "No point was read in the last session: nothing can be followed.");
		return;
	}
	fl_sheet_add(y->sheet, FL_BLOCK_STATEMENT,
	             fl_word_sentence(y->sheet, fl_sheet_printf(y->sheet, "%s: %s", q->name, q->forecast.sentence)));
	if (q->drift.determined)
		fl_sheet_add(y->sheet, FL_BLOCK_TEXT, fl_word_sentence(y->sheet, q->drift.sentence));
	if (q->drift.accelerates)
		fl_sheet_add(y->sheet, FL_BLOCK_STATEMENT,
		             "The drift grows faster: the forecast by a straight line is too late.");
}

static void write_meaning(fl_years *y) {
	fl_sheet_add(y->sheet, FL_BLOCK_HEADING, "How to read this");
	fl_sheet_add_led(y->sheet, FL_BLOCK_SMALL, "Chained drift.",
	                 "As-found of a session minus as-left of the one before, added up: what the instrument would show "
	                 "had nobody turned its screws. It begins anew where the capillary was cleaned, a part was "
	                 "exchanged, or something was done between two sessions.");
	fl_sheet_add_led(
	    y->sheet, FL_BLOCK_SMALL, "Guarded limit.",
	    "Tolerance less the expanded uncertainty of the last session. By the mean: where the straight line "
	    "from the last as-left reaches it; by the 95 %% bound: where the prediction interval of one further "
	    "reading does. Fewer than three intervals give no line. The certificates of the records rule.");
}

/* ---- all of it --------------------------------------------------------------------------------------------------- */

static void write_all(fl_years *y) {
	write_title(y);
	write_head(y);
	write_statements(y);
	fl_years_lookback(y);
	fl_years_charts(y);
	fl_years_history(y);
	fl_years_drift(y);
	fl_years_interval(y);
	write_meaning(y);
	fl_sheet_addf(y->sheet, FL_BLOCK_END, "End of trend report %s", y->sheet->number);
}

fl_status fl_certificate_trend(const fl_trend_report *report, fl_sheet **out, fl_error *err) {
	fl_years y = {.report = report, .records = report->records, .count = report->count};
	if (report->count == 0)
		return fl_fail(err, FL_E_NOT_FOUND, "there is no record to report on");
	y.last = &report->records[report->count - 1];
	y.sheet = fl_sheet_new();
	if (!y.sheet)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trend report");
	fl_status status = follow_all(&y, err);
	if (status >= 0) {
		choose_deciding(&y);
		write_all(&y);
	}
	for (size_t i = 0; i < y.quantities; i++)
		fl_saw_free(&y.of[i].saw);
	if (status >= 0 && y.sheet->failed)
		status = fl_fail(err, FL_E_MEMORY, "out of memory for the trend report");
	if (status < 0)
		fl_sheet_free(y.sheet);
	else
		*out = y.sheet;
	return status < 0 ? status : FL_OK;
}
