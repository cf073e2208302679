/* history_picture.c - the saw-tooth of one quantity in the terminal: error in % of span upright, years along.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * As-found and as-left have marks of their own and the fall between them is drawn, so that the teeth show; the chain
 * runs above them from the first as-left of each stretch; limits are lines; a break is a column of its own. Readable
 * without colour.
 */
#include "history.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report_parts.h"

enum { LABELS = 8, MOST_ROWS = 22, MOST_COLUMNS = 100 };

static const char found_mark[] = "\u25b2", left_mark[] = "\u25cf", same_mark[] = "\u25c6", chain_mark[] = "\u00d7",
                  line_mark[] = "\u00b7", fall_mark[] = "\u2502", limit_mark[] = "\u254c", guard_mark[] = "\u2508",
                  break_mark[] = "\u2551", ideal_mark[] = "\u2500";

typedef struct canvas {
	const fl_followed *f;
	int width, rows;
	double top, step; /* % of span of the first row, and between rows */
	double from, days;
	const char *cells[MOST_ROWS][MOST_COLUMNS];
} canvas;

/* ---- scales ---- */

typedef struct reach_of {
	double low, high;
} reach_of;

static void reach(reach_of *r, double fraction) {
	if (isnan(fraction))
		return;
	r->low = fmin(r->low, 100.0 * fraction);
	r->high = fmax(r->high, 100.0 * fraction);
}

/* The tooth whose as-left (or, unchained, whose as-found and as-left) the stretch of tooth `i` begins with. */
static size_t beginning(const fl_saw *saw, size_t i) {
	if (isnan(saw->teeth[i].chained))
		return i;
	while (i > 0 && !saw->teeth[i - 1].breaks)
		i--;
	return i > 0 ? i - 1 : 0;
}

/* The error that the instrument would show had nobody turned its screws since the stretch began. */
static double chain_at(const fl_saw *saw, size_t i) {
	return saw->teeth[beginning(saw, i)].as_left + saw->teeth[i].chained;
}

static void scale_upright(canvas *c) {
	static const double steps[] = {0.01, 0.02, 0.05, 0.1, 0.2, 0.25, 0.5, 1.0, 2.0, 2.5, 5.0, 10.0, 20.0, 50.0};
	reach_of r = {-0.05, 0.05};
	const fl_saw *saw = &c->f->saw;
	for (size_t i = 0; i < saw->count; i++) {
		const fl_tooth *t = &saw->teeth[i];
		reach(&r, t->as_found);
		reach(&r, t->as_left);
		reach(&r, chain_at(saw, i));
		reach(&r, t->tolerance);
		reach(&r, -t->tolerance);
	}
	c->step = 100.0;
	for (size_t i = 0; i < sizeof steps / sizeof *steps; i++)
		if (ceil(r.high / steps[i]) - floor(r.low / steps[i]) + 3.0 <= MOST_ROWS) {
			c->step = steps[i];
			break;
		}
	c->top = c->step * (ceil(r.high / c->step) + 1.0);
	c->rows = (int)lround(c->top / c->step - floor(r.low / c->step)) + 2;
	c->rows = c->rows > MOST_ROWS ? MOST_ROWS : c->rows;
}

static void scale_along(canvas *c, int columns) {
	const fl_saw *saw = &c->f->saw;
	c->width = columns - LABELS - 2;
	c->width = c->width > MOST_COLUMNS ? MOST_COLUMNS : c->width;
	c->from = saw->teeth[0].day;
	c->days = saw->teeth[saw->count - 1].day - c->from;
	c->days = c->days < 1.0 ? 1.0 : c->days;
}

static int row_of(const canvas *c, double fraction) {
	double row = (c->top - 100.0 * fraction) / c->step;
	return row < 0.0 ? 0 : row > c->rows - 1 ? c->rows - 1 : (int)lround(row);
}

static int column_of(const canvas *c, double day) {
	double column = 1.0 + (c->width - 3.0) * (day - c->from) / c->days;
	return column < 0.0 ? 0 : column > c->width - 1 ? c->width - 1 : (int)lround(column);
}

/* ---- drawing ---- */

static void mark(canvas *c, double day, double fraction, const char *what) {
	if (!isnan(fraction))
		c->cells[row_of(c, fraction)][column_of(c, day)] = what;
}

static void across(canvas *c, double fraction, const char *what) {
	if (isnan(fraction) || fabs(100.0 * fraction) > c->top + c->step)
		return;
	for (int x = 0; x < c->width; x++)
		c->cells[row_of(c, fraction)][x] = what;
}

static void draw_limits(canvas *c) {
	const fl_tooth *last = &c->f->saw.teeth[c->f->saw.count - 1];
	across(c, 0.0, ideal_mark);
	across(c, last->tolerance - last->U, guard_mark);
	across(c, last->U - last->tolerance, guard_mark);
	across(c, last->tolerance, limit_mark);
	across(c, -last->tolerance, limit_mark);
}

/* The fitted line of the last stretch. */
static void draw_line(canvas *c) {
	const fl_drift *drift = &c->f->drift;
	const fl_saw *saw = &c->f->saw;
	size_t first = beginning(saw, saw->count - 1);
	double base = saw->teeth[first].as_left, begin = saw->teeth[first].day, end = saw->teeth[saw->count - 1].day;
	if (!drift->determined || isnan(base))
		return;
	for (int x = 0; x < c->width; x++) {
		double day = c->from + (x - 1.0) * c->days / (c->width - 3.0), years = (day - begin) / FL_DAYS_PER_YEAR;
		if (day >= begin && day <= end)
			mark(c, day, base + drift->line.intercept + drift->line.slope * (years - drift->line.x0), line_mark);
	}
}

static void draw_fall(canvas *c, const fl_tooth *t) {
	if (isnan(t->as_found) || isnan(t->as_left))
		return;
	int from = row_of(c, fmax(t->as_found, t->as_left)), to = row_of(c, fmin(t->as_found, t->as_left));
	for (int row = from + 1; row < to; row++)
		c->cells[row][column_of(c, t->day)] = fall_mark;
}

static void draw_break(canvas *c, const fl_tooth *t) {
	for (int row = 0; t->breaks && row < c->rows; row++)
		c->cells[row][column_of(c, t->day)] = break_mark;
}

static void draw_teeth(canvas *c) {
	const fl_saw *saw = &c->f->saw;
	for (size_t i = 0; i < saw->count; i++) {
		const fl_tooth *t = &saw->teeth[i];
		draw_break(c, t);
		draw_fall(c, t);
		if (!isnan(t->chained) && t->chained != 0.0)
			mark(c, t->day, chain_at(saw, i), chain_mark);
		bool same = !isnan(t->as_found) && t->as_found == t->as_left;
		mark(c, t->day, t->as_left, same ? same_mark : left_mark);
		if (!same)
			mark(c, t->day, t->as_found, found_mark);
	}
}

/* ---- printing ---- */

static void print_row(const canvas *c, int row, fl_text *out) {
	char label[FL_CELL_SIZE];
	double value = c->top - row * c->step;
	int every = c->rows > 12 ? 2 : 1;
	bool labelled = (long)lround(value / c->step) % every == 0;
	int last = c->width;
	fl_report_signed(value, c->step < 0.095 ? 2 : 1, label);
	if (labelled)
		fl_text_printf(out, " %s%s", value > 0.5 * c->step || value < -0.5 * c->step ? "" : " ", label);
	fl_text_pad_to(out, LABELS - 1);
	fl_text_add(out, labelled ? "\u2524" : "\u2502");
	while (last > 0 && !c->cells[row][last - 1])
		last--;
	for (int x = 0; x < last; x++)
		fl_text_add(out, c->cells[row][x] ? c->cells[row][x] : " ");
	fl_text_add(out, "\n");
}

static void print_years(const canvas *c, fl_text *out) {
	int first, last, month, day, at = 0;
	fl_day_to_civil((fl_day)c->from, &first, &month, &day);
	fl_day_to_civil((fl_day)(c->from + c->days), &last, &month, &day);
	fl_text_pad_to(out, LABELS - 1);
	fl_text_add(out, "\u2514");
	for (int x = 0; x < c->width; x++)
		fl_text_add(out, "\u2500");
	fl_text_add(out, "\n");
	for (int year = first + 1; year <= last; year++) {
		int column = column_of(c, fl_day_from_civil(year, 1, 1));
		if (column < at || column + 4 > c->width)
			continue;
		fl_text_pad_to(out, LABELS + column);
		fl_text_printf(out, "%d", year);
		at = column + 6;
	}
	fl_text_add(out, "\n");
}

static void print_legend(const canvas *c, int columns, fl_text *out) {
	const fl_tooth *last = &c->f->saw.teeth[c->f->saw.count - 1];
	bool breaks = false;
	char text[500];
	for (size_t i = 0; i < c->f->saw.count; i++)
		breaks = breaks || c->f->saw.teeth[i].breaks;
	snprintf(text, sizeof text,
	         "%s as-found, %s as-left, %s left alone, %s chained: as if never adjusted%s%s%s%s%s%s%s.", found_mark,
	         left_mark, same_mark, chain_mark, c->f->drift.determined ? ", " : "",
	         c->f->drift.determined ? line_mark : "", c->f->drift.determined ? " its line" : "",
	         isnan(last->tolerance) ? "" : ", \u254c tolerance T, \u2508 guarded limit T \u2212 U", breaks ? ", " : "",
	         breaks ? break_mark : "", breaks ? " break: cleaned, repaired or not followed" : "");
	fl_report_wrap(out, "", text, columns);
	fl_text_add(out, "\n");
}

void fl_history_picture(const fl_followed *f, int columns, fl_text *out) {
	canvas c = {.f = f};
	if (f->saw.count < 2)
		return;
	scale_upright(&c);
	scale_along(&c, columns);
	draw_limits(&c);
	draw_line(&c);
	draw_teeth(&c);
	fl_text_printf(out, "%s: error in %% of span (upright) against the day (along)\n", f->name);
	for (int row = 0; row < c.rows; row++)
		print_row(&c, row, out);
	print_years(&c, out);
	print_legend(&c, columns, out);
}
