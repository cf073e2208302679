/* history_text.c - the years of one instrument for people: sessions, drift, forecast, intervals.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "history.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report_parts.h"

#define PERCENT 100.0

static void put(fl_table *table, size_t row, int column, const char *text) {
	fl_report_fit(text, 40, fl_table_cell(table, row, column));
}

static void put_signed(fl_table *table, size_t row, int column, double fraction, int decimals) {
	fl_report_signed(PERCENT * fraction, decimals, fl_table_cell(table, row, column));
}

static void put_day(fl_table *table, size_t row, int column, fl_day day) {
	char text[FL_DAY_SIZE];
	if (day != FL_NO_DAY)
		put(table, row, column, fl_day_format(day, text));
}

/* ---- the sessions -------------------------------------------------------------------------------------------------
 */

static const fl_table_column session_columns[] = {
    {"day", "", FL_ALIGN_LEFT, true},      {"record", "", FL_ALIGN_LEFT, false},  {"run", "", FL_ALIGN_LEFT, true},
    {"worst", "at", FL_ALIGN_LEFT, false}, {"error", "%", FL_ALIGN_POINT, false}, {"U", "%", FL_ALIGN_POINT, false},
    {"verdict", "", FL_ALIGN_LEFT, false}};
static const fl_table_column line_columns[] = {
    {"day", "", FL_ALIGN_LEFT, true},           {"run", "", FL_ALIGN_LEFT, true},
    {"zero", "%", FL_ALIGN_POINT, false},       {"u", "%", FL_ALIGN_POINT, false},
    {"span", "%", FL_ALIGN_POINT, false},       {"u", "%", FL_ALIGN_POINT, false},
    {"hysteresis", "%", FL_ALIGN_POINT, false}, {"done", "", FL_ALIGN_LEFT, false}};
enum { SESSION_COLUMNS = 7, LINE_COLUMNS = 8 };

/* A run of a session, a row of either table. */
typedef struct row_of_run {
	const fl_record *record; /* NULL on the second row of a session */
	const char *name;
	const fl_kept_run *run;
	const fl_record *of;
} row_of_run;

static size_t rows_of(const fl_record *r, row_of_run rows[2]) {
	size_t count = 0;
	if (r->as_found.state == FL_KEPT_TAKEN) {
		rows[0] = (row_of_run){r, r->as_left.state == FL_KEPT_SAME ? "both" : "as-found", &r->as_found, r};
		count = 1;
	}
	if (r->as_left.state == FL_KEPT_TAKEN || count == 0) {
		rows[count] = (row_of_run){count ? NULL : r, "as-left", &r->as_left, r};
		count++;
	}
	return count;
}

static void put_session(fl_table *table, size_t row, const row_of_run *r) {
	char point[64];
	const fl_kept_point *worst = fl_history_worst(r->run);
	if (r->record) {
		put_day(table, row, 0, r->record->day);
		put(table, row, 1, r->record->number);
	}
	put(table, row, 2, r->name);
	if (worst) {
		put(table, row, 3, fl_history_point_name(worst, point));
		put_signed(table, row, 4, worst->error_span, 2);
		fl_report_fixed(PERCENT * worst->U_span, 2, fl_table_cell(table, row, 5));
	}
	put(table, row, 6, r->run->state == FL_KEPT_NONE ? "not taken" : r->run->verdict);
}

static void put_line(fl_table *table, size_t row, const row_of_run *r) {
	char done[64];
	if (r->record)
		put_day(table, row, 0, r->record->day);
	put(table, row, 1, r->name);
	put_signed(table, row, 2, r->run->zero_span, 2);
	fl_report_fixed(PERCENT * r->run->zero_u_span, 2, fl_table_cell(table, row, 3));
	put_signed(table, row, 4, r->run->span_span, 2);
	fl_report_fixed(PERCENT * r->run->span_u_span, 2, fl_table_cell(table, row, 5));
	fl_report_fixed(PERCENT * r->run->hysteresis_span, 2, fl_table_cell(table, row, 6));
	snprintf(done, sizeof done, "%s%s%s%s", r->of->work & FL_WORK_ADJUSTED ? "adjusted " : "",
	         r->of->work & FL_WORK_CLEANED ? "cleaned " : "", r->of->work & FL_WORK_REPAIRED ? "repaired " : "",
	         r->of->work ? "" : "left alone");
	size_t length = strlen(done);
	if (length > 0 && done[length - 1] == ' ')
		done[length - 1] = '\0';
	put(table, row, 7, r->record ? done : "");
}

static void add_rows(const fl_history *h, const fl_table_column *heads, int head_count,
                     void (*put_row)(fl_table *, size_t, const row_of_run *), int columns, fl_text *out) {
	fl_table table;
	row_of_run two[2];
	size_t rows = 0, row = 0;
	for (size_t i = 0; i < h->list.count; i++)
		rows += rows_of(&h->list.records[i], two);
	fl_table_begin(&table, heads, head_count, rows);
	for (size_t i = 0; i < h->list.count; i++) {
		size_t count = rows_of(&h->list.records[i], two);
		for (size_t k = 0; k < count; k++)
			put_row(&table, row++, &two[k]);
	}
	fl_table_end(&table, columns, out);
}

static void add_sessions(const fl_history *h, int columns, fl_text *out) {
	fl_text_add(out, "Sessions (errors in % of span; both: left alone, as-left is as-found)\n\n");
	add_rows(h, session_columns, SESSION_COLUMNS, put_session, columns, out);
	fl_text_add(out, "\nThe line through the points: zero error, span error, standard uncertainties\n\n");
	add_rows(h, line_columns, LINE_COLUMNS, put_line, columns, out);
	fl_text_add(out, "\n");
}

static void add_breaks(const fl_history *h, int columns, fl_text *out) {
	for (size_t i = 0; i < h->list.count; i++) {
		const fl_record *r = &h->list.records[i];
		char day[FL_DAY_SIZE], text[200];
		if (!(r->work & (FL_WORK_CLEANED | FL_WORK_REPAIRED | FL_WORK_BEFORE)))
			continue;
		snprintf(text, sizeof text, "%s%s%s%s: the drift is not chained across it.", fl_day_format(r->day, day),
		         r->work & FL_WORK_CLEANED ? " cleaned" : "", r->work & FL_WORK_REPAIRED ? " repaired" : "",
		         r->work & FL_WORK_BEFORE ? " something done before it" : "");
		fl_report_wrap(out, "break: ", text, columns);
	}
}

/* ---- the drift ------------------------------------------------------------------------------------------------------
 */

static const fl_table_column drift_columns[] = {
    {"followed", "", FL_ALIGN_LEFT, true},        {"at", "", FL_ALIGN_RIGHT, false},
    {"slope", "% a year", FL_ALIGN_POINT, false}, {"u", "% a year", FL_ALIGN_POINT, false},
    {"naive", "% a year", FL_ALIGN_POINT, false}, {"limit", "by mean", FL_ALIGN_LEFT, false},
    {"limit", "by 95 %", FL_ALIGN_LEFT, false}};
enum { DRIFT_COLUMNS = 7 };

static void put_drift(fl_table *table, size_t row, const fl_followed *f) {
	put(table, row, 0, f->name);
	put(table, row, 1, f->place);
	if (!f->drift.determined)
		return;
	put_signed(table, row, 2, f->drift.slope, 3);
	fl_report_fixed(PERCENT * f->drift.se, 3, fl_table_cell(table, row, 3));
	put_signed(table, row, 4, f->drift.naive_slope, 3);
	if (!f->forecast.determined)
		return;
	put_day(table, row, 5, f->forecast.by_mean);
	put_day(table, row, 6, f->forecast.by_bound);
	if (f->forecast.by_mean == FL_NO_DAY)
		put(table, row, 5, "> 20 years");
	if (f->forecast.by_bound == FL_NO_DAY)
		put(table, row, 6, "> 20 years");
}

static bool any_drift(const fl_history *h) {
	for (size_t i = 0; i < h->count; i++)
		if (h->followed[i].drift.determined)
			return true;
	return false;
}

static void say_acceleration(const fl_followed *f, int columns, fl_text *out) {
	char text[300], a[FL_CELL_SIZE], t[FL_CELL_SIZE], limit[FL_CELL_SIZE];
	if (!f->drift.has_curvature)
		snprintf(text, sizeof text, "not tested: that takes four intervals or more.");
	else
		snprintf(text, sizeof text, "%s (%s %% of span a year, each year; t = %s, significant beyond %s).",
		         f->drift.accelerates ? "the drift accelerates"
		         : f->drift.slows     ? "the drift slows down"
		                              : "not significant",
		         fl_report_signed(PERCENT * f->drift.acceleration, 3, a), fl_report_fixed(f->drift.t_curvature, 2, t),
		         fl_report_fixed(f->drift.t_critical, 2, limit));
	fl_report_wrap(out, "  acceleration: ", text, columns);
}

static void add_drift(const fl_history *h, int columns, fl_text *out) {
	const fl_followed *chosen = &h->followed[h->chosen];
	fl_text_add(out, "Drift, chained: as-found minus the as-left before, added up\n\n");
	if (any_drift(h)) {
		fl_table table;
		fl_table_begin(&table, drift_columns, DRIFT_COLUMNS, h->count);
		for (size_t i = 0; i < h->count; i++)
			put_drift(&table, i, &h->followed[i]);
		fl_table_end(&table, columns, out);
		fl_report_wrap(out, "",
		               "u: standard uncertainty of the slope. naive: what the as-found values as they stand would "
		               "give; adjusting hides drift. limit: when the guarded limit T \u2212 U is reached, counted from "
		               "the last as-left.",
		               columns);
		fl_text_add(out, "\n");
	}
	fl_text_printf(out, "%s%s%s\n", chosen->name, *chosen->place ? " at " : "", chosen->place);
	fl_report_wrap(out, "  drift: ", chosen->drift.sentence, columns);
	if (chosen->drift.determined) {
		say_acceleration(chosen, columns, out);
		fl_report_wrap(out, "  forecast: ", chosen->forecast.sentence, columns);
	}
	fl_text_add(out, "\n");
}

/* ---- intervals and what is to be done ---- */

static void add_proposal(const fl_proposal *p, int columns, fl_text *out) {
	char lead[80];
	if (p->determined && p->months > 0)
		snprintf(lead, sizeof lead, "  %s: %d months: ", fl_interval_method_name(p->method), p->months);
	else
		snprintf(lead, sizeof lead, "  %s: ", fl_interval_method_name(p->method));
	fl_report_wrap(out, lead, p->reason, columns);
}

static void add_intervals(const fl_history *h, int columns, fl_text *out) {
	fl_report_wrap(out, "", "Interval proposals (methods of ILAC-G24 / OIML D 10; the customer agrees the interval)",
	               columns);
	for (int method = 0; method < FL_INTERVAL_METHODS; method++)
		if (method != FL_INTERVAL_RELIABILITY || h->has_fleet)
			add_proposal(&h->proposals[method], columns, out);
	if (!h->has_fleet)
		fl_report_wrap(out, "  ", "reliability of the fleet: read from all instruments with --fleet", columns);
	fl_text_add(out, "\n");
}

static void add_next(const fl_history *h, int columns, fl_text *out) {
	const fl_record *last = &h->list.records[h->list.count - 1];
	char day[FL_DAY_SIZE], text[200];
	if (last->due == FL_NO_DAY)
		snprintf(text, sizeof text, "no interval is agreed (calibration interval in instruments.yaml).");
	else
		snprintf(text, sizeof text, "%s, %d months from the day of the calibration.", fl_day_format(last->due, day),
		         last->interval_months);
	fl_report_wrap(out, "Next: ", text, columns);
	if (!h->lookback.needed)
		return;
	fl_report_wrap(out, "Look-back: ", h->lookback.sentence, columns);
	snprintf(text, sizeof text, "foundleft lookback %.100s writes the report to be signed.", h->instrument.tag);
	fl_report_wrap(out, "  ", text, columns);
}

void fl_history_text(const fl_history *h, int columns, fl_text *out) {
	char first[FL_DAY_SIZE], last[FL_DAY_SIZE], text[400];
	snprintf(text, sizeof text, "%.60s, serial %.60s, %.150s: %zu session%s, %s to %s", h->instrument.tag,
	         h->instrument.serial, h->instrument.site, h->list.count, h->list.count == 1 ? "" : "s",
	         fl_day_format(h->list.records[0].day, first), fl_day_format(h->list.records[h->list.count - 1].day, last));
	fl_report_wrap(out, "", text, columns);
	fl_text_add(out, "\n");
	add_sessions(h, columns, out);
	add_breaks(h, columns, out);
	add_drift(h, columns, out);
	fl_history_picture(&h->followed[h->chosen], columns, out);
	add_intervals(h, columns, out);
	add_next(h, columns, out);
}
