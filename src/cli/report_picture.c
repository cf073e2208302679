/* report_picture.c - the error curve in the terminal: error in % of span against the dial, one picture a run, with the
 * tolerance band, the guard band, the marks of both directions and their uncertainty. Readable without colour.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A row stands for a round step in % of span, so that the labels stand exactly where they say. A mark goes to the
 * nearest row, with one exception: outside the tolerance it is never drawn on or inside the line of the limit, inside
 * never beyond it; the eye then decides as the numbers do.
 */
#include "report.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report_parts.h"

const fl_marks fl_report_marks_utf8 = {
    .rising = "\u25b2",
    .falling = "\u25bc",
    .stopped_zero = "\u25cb",
    .struck = "\u00d7",
    .bar = "\u2502",
    .bar_upper = "\u2575",
    .bar_lower = "\u2577",
    .accepted = "\u2591",
    .guard = "\u00b7",
    .limit = "\u254c",
    .ideal = "\u2500",
    .axis = "\u2502",
    .tick = "\u2524",
    .corner = "\u2514",
    .floor = "\u2500",
    .floor_tick = "\u252c",
};
const fl_marks fl_report_marks_ascii = {
    .rising = "^",
    .falling = "v",
    .stopped_zero = "o",
    .struck = "x",
    .bar = "|",
    .bar_upper = "'",
    .bar_lower = ",",
    .accepted = ":",
    .guard = ".",
    .limit = "=",
    .ideal = "-",
    .axis = "|",
    .tick = "+",
    .corner = "+",
    .floor = "-",
    .floor_tick = "+",
};

#define PERCENT 100.0
#define LABEL_COLUMNS 7 /* "+2.50 " and the axis */
#define RIGHT_COLUMNS 3 /* " +T" */
#define EDGE_COLUMNS 3  /* from the axis to the lower range value, and from the upper to the end */
#define MOST_ROWS 24

/* The vertical axis, shared by both runs: row r stands for (top - r) * step, in % of span. */
typedef struct axis {
	double step;
	int top, bottom; /* in steps */
	int label_every; /* in steps */
	int label_places;
} axis;

/* Half widths at the points, between which they run straight. */
typedef struct band_knot {
	double x, tolerance, expanded; /* fraction of span; % of span */
} band_knot;

/* One picture being drawn. */
typedef struct report_panel {
	const fl_case *one;
	const fl_run_result *run;
	const fl_marks *marks;
	axis vertical;
	int width, height; /* of the field */
	const char **cells;
	bool *taken; /* a cell that holds a mark of a point */
	band_knot *knots;
	size_t knot_count;
} report_panel;

/* ---- the vertical axis --------------------------------------------------------------------------------------------
 */

typedef struct extent {
	double low, high;
} extent;

static void reach(extent *within, double value) {
	if (!isfinite(value))
		return;
	within->low = value < within->low ? value : within->low;
	within->high = value > within->high ? value : within->high;
}

static void reach_run(extent *within, const fl_run_result *run) {
	for (size_t i = 0; run->available && i < run->point_count; i++) {
		const fl_point_result *point = &run->points[i];
		double u = isfinite(point->sum.expanded) ? point->sum.expanded : 0.0;
		reach(within, (point->error_span + u) * PERCENT);
		reach(within, (point->error_span - u) * PERCENT);
		reach(within, point->tolerance_span * PERCENT);
		reach(within, -point->tolerance_span * PERCENT);
	}
}

/* The finest round step with which everything fits into MOST_ROWS, one row to spare at either end. */
static axis axis_for(const fl_result *result) {
	static const struct {
		double step;
		int label_every, places;
	} steps[] = {{1.0, 5, 1}, {2.0, 5, 0}, {2.5, 4, 0}, {5.0, 2, 0}};
	extent within = {-0.05, 0.05};
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		reach_run(&within, &result->runs[kind]);
	axis best = {.step = 1.0, .top = 1, .bottom = -1, .label_every = 1, .label_places = 0};
	for (int power = -2; power < 12; power++)
		for (int i = 0; i < 4; i++) {
			double step = steps[i].step * pow(10.0, power);
			double top = ceil(within.high / step - 0.25) + 1.0, bottom = floor(within.low / step + 0.25) - 1.0;
			if (top - bottom + 1.0 > MOST_ROWS)
				continue;
			int places = steps[i].places - power - 1;
			best = (axis){step, (int)top, (int)bottom, steps[i].label_every, places < 0 ? 0 : places};
			return best;
		}
	return best;
}

/* The row of a value, not rounded; 0 is the uppermost. */
static double row_of(const report_panel *panel, double percent) {
	return (double)panel->vertical.top - percent / panel->vertical.step;
}

static int clamp(double value, int low, int high) {
	if (!(value > (double)low))
		return low;
	return value > (double)high ? high : (int)lround(value);
}

/* ---- the horizontal axis ------------------------------------------------------------------------------------------
 */

static int column_of(const report_panel *panel, double x) {
	double inner = (double)(panel->width - 1 - 2 * EDGE_COLUMNS);
	return clamp(EDGE_COLUMNS + x * inner, 0, panel->width - 1);
}

static double x_of(const report_panel *panel, int column) {
	return (double)(column - EDGE_COLUMNS) / (double)(panel->width - 1 - 2 * EDGE_COLUMNS);
}

/* Where a dial value stands on the scale: seconds are not evenly divided, so it is searched. */
static double x_of_dial(const fl_scale *scale, double dial) {
	double low = 0.0, high = 1.0;
	for (int i = 0; i < 60; i++) {
		double middle = 0.5 * (low + high), value = 0.0;
		if (fl_physics_dial_at(scale, middle, &value, NULL) < 0 || value < dial)
			low = middle;
		else
			high = middle;
	}
	return 0.5 * (low + high);
}

/* A round step that divides `range` into at most `most` parts. */
static double round_step(double range, int most) {
	static const double steps[] = {1.0, 2.0, 2.5, 5.0};
	for (int power = -6; power < 9; power++)
		for (int i = 0; i < 4; i++)
			if (range / (steps[i] * pow(10.0, power)) <= (double)most)
				return steps[i] * pow(10.0, power);
	return range;
}

/* ---- bands ----------------------------------------------------------------------------------------------------------
 */

/* One knot for each point, with the larger U of its directions. */
static void gather_knots(report_panel *panel) {
	const fl_run_result *run = panel->run;
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_point_result *point = &run->points[i];
		double expanded = isfinite(point->sum.expanded) ? point->sum.expanded * PERCENT : 0.0;
		if (!isfinite(point->tolerance_span) || !isfinite(point->x))
			continue;
		band_knot *last = panel->knot_count ? &panel->knots[panel->knot_count - 1] : NULL;
		if (last && i > 0 && run->points[i - 1].point == point->point) {
			last->expanded = expanded > last->expanded ? expanded : last->expanded;
			continue;
		}
		panel->knots[panel->knot_count++] = (band_knot){point->x, point->tolerance_span * PERCENT, expanded};
	}
}

/* Straight between knots, constant outside them. */
static band_knot between_knots(const report_panel *panel, double x) {
	const band_knot *knots = panel->knots;
	size_t last = panel->knot_count - 1;
	if (x <= knots[0].x)
		return knots[0];
	for (size_t i = 0; i < last; i++) {
		double span = knots[i + 1].x - knots[i].x;
		if (x > knots[i + 1].x || span <= 0.0)
			continue;
		double t = (x - knots[i].x) / span;
		return (band_knot){x, knots[i].tolerance + t * (knots[i + 1].tolerance - knots[i].tolerance),
		                   knots[i].expanded + t * (knots[i + 1].expanded - knots[i].expanded)};
	}
	return knots[last];
}

/* With zones the tolerance steps between the knots. */
static band_knot band_at(const report_panel *panel, double x) {
	band_knot band = between_knots(panel, x);
	const fl_result *result = &panel->one->result;
	double tolerance = fl_analysis_tolerance_at(result, &panel->one->instrument->scale, x);
	if (result->zone_count > 0 && isfinite(tolerance))
		band.tolerance = tolerance * PERCENT;
	return band;
}

/* A band in percent of reading is drawn from the lowest point that has one to the highest, any other all along. */
static bool band_reaches(const report_panel *panel, double x) {
	if (panel->one->result.tolerance.basis != FL_BAND_PERCENT_READING)
		return true;
	return x >= panel->knots[0].x - 0.01 && x <= panel->knots[panel->knot_count - 1].x + 0.01;
}

static bool has_guard(const report_panel *panel) {
	fl_rule rule = panel->one->result.rule;
	return rule == FL_RULE_GUARDED || rule == FL_RULE_FOUR_STATES;
}

static const char **cell_at(const report_panel *panel, int row, int column) {
	return &panel->cells[row * panel->width + column];
}

/* Did the guard band come out wide enough to be seen? */
static bool shows_guard(const report_panel *panel) {
	for (int i = 0; i < panel->width * panel->height; i++)
		if (panel->cells[i] == panel->marks->guard)
			return true;
	return false;
}

/* The row where the limit is drawn on the side of `sign`. */
static int limit_row(const report_panel *panel, double tolerance, double sign) {
	return clamp(row_of(panel, sign * tolerance), 0, panel->height - 1);
}

static void shade(report_panel *panel) {
	for (int column = 0; column < panel->width && panel->knot_count > 0; column++) {
		double x = x_of(panel, column);
		if (!band_reaches(panel, x))
			continue;
		band_knot band = band_at(panel, x);
		int upper = limit_row(panel, band.tolerance, 1.0), lower = limit_row(panel, band.tolerance, -1.0);
		double accepted = has_guard(panel) ? band.tolerance - band.expanded : band.tolerance;
		for (int row = upper; row <= lower; row++) {
			double percent = (double)(panel->vertical.top - row) * panel->vertical.step;
			bool inside = fabs(percent) <= accepted + 1e-9;
			*cell_at(panel, row, column) = row == upper || row == lower ? panel->marks->limit
			                               : inside                     ? panel->marks->accepted
			                                                            : panel->marks->guard;
		}
	}
	for (int column = 0; column < panel->width; column++)
		*cell_at(panel, panel->vertical.top, column) = panel->marks->ideal;
}

/* ---- marks ----------------------------------------------------------------------------------------------------------
 */

/* The row of a mark: the nearest, but on its own side of the limit. */
static int mark_row(const report_panel *panel, double x, double percent, double tolerance) {
	int row = clamp(row_of(panel, percent), 0, panel->height - 1);
	if (!isfinite(tolerance) || panel->knot_count == 0)
		return row;
	double sign = percent < 0.0 ? -1.0 : 1.0;
	int limit = limit_row(panel, band_at(panel, x).tolerance, sign), outward = sign > 0.0 ? -1 : 1;
	bool outside = fabs(percent) > tolerance, drawn_outside = (row - limit) * outward > 0;
	if (outside && !drawn_outside)
		row = limit + outward;
	if (!outside && drawn_outside)
		row = limit;
	return clamp(row, 0, panel->height - 1);
}

/* Uncertainty bar, to half a row. */
static void draw_bar(report_panel *panel, int column, double low, double high) {
	double upper = row_of(panel, high) + 0.5, lower = row_of(panel, low) + 0.5; /* row r covers r to r + 1 */
	for (int row = 0; row < panel->height; row++) {
		bool first = upper < (double)row + 0.25 && lower > (double)row + 0.25;
		bool second = upper < (double)row + 0.75 && lower > (double)row + 0.75;
		if (first && second)
			*cell_at(panel, row, column) = panel->marks->bar;
		else if (first)
			*cell_at(panel, row, column) = panel->marks->bar_upper;
		else if (second)
			*cell_at(panel, row, column) = panel->marks->bar_lower;
	}
}

/* The column nearest to the wanted one that no other mark holds in that row. */
static int free_column(const report_panel *panel, int row, int wanted) {
	static const int shifts[] = {0, -1, 1, -2, 2};
	for (int i = 0; i < 5; i++) {
		int column = wanted + shifts[i];
		if (column >= 0 && column < panel->width && !panel->taken[row * panel->width + column])
			return column;
	}
	return wanted;
}

static int mark_column(const report_panel *panel, const fl_point_result *point) {
	int column = column_of(panel, point->x);
	if (point->point == FL_POINT_ZERO)
		column -= 1; /* leaves room for the lowest oil */
	column += point->pass == FL_PASS_RISING ? -1 : 1;
	return clamp(column, 0, panel->width - 1);
}

static const char *mark_of(const report_panel *panel, const fl_point_result *point) {
	if (point->point == FL_POINT_ZERO)
		return panel->marks->stopped_zero;
	return point->pass == FL_PASS_RISING ? panel->marks->rising : panel->marks->falling;
}

static void draw_points(report_panel *panel) {
	for (int bars = 1; bars >= 0; bars--)
		for (size_t i = 0; i < panel->run->point_count; i++) {
			const fl_point_result *point = &panel->run->points[i];
			if (!isfinite(point->error_span) || !isfinite(point->x))
				continue;
			double error = point->error_span * PERCENT, expanded = point->sum.expanded * PERCENT;
			int column = mark_column(panel, point);
			if (bars && isfinite(expanded))
				draw_bar(panel, column, error - expanded, error + expanded);
			if (bars)
				continue;
			int row = mark_row(panel, point->x, error, point->tolerance_span * PERCENT);
			column = free_column(panel, row, column);
			*cell_at(panel, row, column) = mark_of(panel, point);
			panel->taken[row * panel->width + column] = true;
		}
}

/* Struck readings stay in the picture; one far off stands at the edge. Returns how many were drawn. */
static int draw_struck(report_panel *panel) {
	int count = 0;
	for (size_t i = 0; i < panel->run->reading_count; i++) {
		const fl_reading_result *reading = &panel->run->readings[i];
		if (reading->used || !isfinite(reading->error_span) || !isfinite(reading->ideal.x))
			continue;
		int row = clamp(row_of(panel, reading->error_span * PERCENT), 0, panel->height - 1);
		*cell_at(panel, row, column_of(panel, reading->ideal.x)) = panel->marks->struck;
		count++;
	}
	return count;
}

/* ---- a panel as lines ---- */

static fl_arena panel_open(report_panel *panel, const fl_case *one, const fl_run_result *run, int width,
                           const fl_marks *marks) {
	fl_arena arena = {0};
	panel->one = one;
	panel->run = run;
	panel->marks = marks;
	panel->vertical = axis_for(&one->result);
	panel->width = width - LABEL_COLUMNS - RIGHT_COLUMNS;
	panel->height = panel->vertical.top - panel->vertical.bottom + 1;
	size_t cells = (size_t)panel->width * (size_t)panel->height;
	panel->cells = fl_arena_alloc(&arena, cells, sizeof *panel->cells);
	panel->taken = fl_arena_alloc(&arena, cells, sizeof *panel->taken);
	panel->knots = fl_arena_alloc(&arena, run->point_count + 1, sizeof *panel->knots);
	return arena;
}

static void draw(report_panel *panel) {
	for (int i = 0; i < panel->width * panel->height; i++)
		panel->cells[i] = " ";
	gather_knots(panel);
	shade(panel);
	draw_struck(panel);
	draw_points(panel);
}

/* "+T" beside the limit where it is the same all along. */
static const char *limit_label(const report_panel *panel, int row) {
	if (panel->knot_count == 0)
		return "";
	double tolerance = panel->knots[panel->knot_count - 1].tolerance;
	if (row == limit_row(panel, tolerance, 1.0))
		return " +T";
	return row == limit_row(panel, tolerance, -1.0) ? " \u2212T" : "";
}

/* One line of the field, from column `left` of the text on. */
static void add_row(const report_panel *panel, int row, int left, fl_text *out) {
	int steps = panel->vertical.top - row;
	bool labelled = steps % panel->vertical.label_every == 0;
	char label[FL_CELL_SIZE];
	fl_report_signed((double)steps * panel->vertical.step, panel->vertical.label_places, label);
	if (steps == 0)
		snprintf(label, sizeof label, "0");
	fl_text_pad_to(out, left);
	if (labelled) {
		fl_text_pad_to(out, left + LABEL_COLUMNS - 2 - fl_utf8_columns(label));
		fl_text_add(out, label);
	}
	fl_text_pad_to(out, left + LABEL_COLUMNS - 1);
	fl_text_add(out, labelled ? panel->marks->tick : panel->marks->axis);
	const char *limit = limit_label(panel, row);
	int end = panel->width;
	while (limit[0] == '\0' && end > 0 && strcmp(*cell_at(panel, row, end - 1), " ") == 0)
		end--;
	for (int column = 0; column < end; column++)
		fl_text_add(out, *cell_at(panel, row, column));
	fl_text_add(out, limit[0] && panel->marks == &fl_report_marks_ascii && row > panel->vertical.top ? " -T" : limit);
}

static void add_floor(const report_panel *panel, double step, int left, fl_text *out) {
	const fl_scale *scale = &panel->one->instrument->scale;
	int next = EDGE_COLUMNS;
	fl_text_pad_to(out, left + LABEL_COLUMNS - 1);
	fl_text_add(out, panel->marks->corner);
	double dial = scale->low;
	for (int column = 0; column < panel->width; column++) {
		bool tick = column == next;
		fl_text_add(out, tick ? panel->marks->floor_tick : panel->marks->floor);
		while (next <= column && dial < scale->high) {
			dial = (floor(dial / step + 1e-9) + 1.0) * step;
			next = dial > scale->high * (1.0 + 1e-9) ? panel->width : column_of(panel, x_of_dial(scale, dial));
		}
	}
}

/* Dial values under their ticks. */
static void add_dial(const report_panel *panel, double step, int left, fl_text *out) {
	const fl_scale *scale = &panel->one->instrument->scale;
	int free_from = left;
	for (double dial = scale->low; dial <= scale->high * (1.0 + 1e-9);
	     dial = (floor(dial / step + 1e-9) + 1.0) * step) {
		char label[32];
		snprintf(label, sizeof label, "%g", dial);
		int wide = (int)strlen(label),
		    column = dial > scale->low ? column_of(panel, x_of_dial(scale, dial)) : EDGE_COLUMNS;
		int start = left + LABEL_COLUMNS + column - wide / 2;
		if (start < free_from)
			continue;
		fl_text_pad_to(out, start);
		fl_text_add(out, label);
		free_from = start + wide + 1;
	}
}

/* Names of the oils under the places where they were measured; one that has no room is left out. */
static void add_oils(const report_panel *panel, int left, fl_text *out) {
	int free_from = left + LABEL_COLUMNS, last = FL_POINT_ZERO;
	for (size_t i = 0; i < panel->run->point_count; i++) {
		const fl_point_result *point = &panel->run->points[i];
		if (point->point == last || point->point == FL_POINT_ZERO || !point->oil || !point->oil[0] ||
		    !isfinite(point->x))
			continue;
		last = point->point;
		char label[FL_CELL_SIZE];
		fl_report_fit(point->oil, 10, label);
		int wide = fl_utf8_columns(label), start = left + LABEL_COLUMNS + column_of(panel, point->x) - wide / 2;
		if (start < free_from)
			start = free_from;
		if (start > left + LABEL_COLUMNS + column_of(panel, point->x) ||
		    start + wide > left + LABEL_COLUMNS + panel->width + RIGHT_COLUMNS)
			continue;
		fl_text_pad_to(out, start);
		fl_text_add(out, label);
		free_from = start + wide + 1;
	}
}

static void add_title(const report_panel *panel, int left, fl_text *out) {
	const char *word = fl_verdict_word(panel->run->verdict);
	fl_text_pad_to(out, left);
	fl_text_printf(out, "%s%s%s", fl_report_run_title(panel->run->kind), word[0] ? ": " : "", word);
}

/* Panels beside one another, line by line. */
static void add_panels(const report_panel *panels, int count, int stride, fl_text *out) {
	const fl_scale *scale = &panels[0].one->instrument->scale;
	double step = round_step(scale->high - scale->low, panels[0].width / 10);
	for (int i = 0; i < count; i++)
		add_title(&panels[i], i * stride, out);
	fl_text_add(out, "\n");
	for (int row = 0; row < panels[0].height; row++) {
		for (int i = 0; i < count; i++)
			add_row(&panels[i], row, i * stride, out);
		fl_text_add(out, "\n");
	}
	for (int i = 0; i < count; i++)
		add_floor(&panels[i], step, i * stride, out);
	fl_text_add(out, "\n");
	for (int i = 0; i < count; i++)
		add_dial(&panels[i], step, i * stride, out);
	fl_text_add(out, "\n");
	size_t before = out->length;
	for (int i = 0; i < count; i++)
		add_oils(&panels[i], i * stride, out);
	fl_text_add(out, out->length > before ? "\n\n" : "\n");
}

/* ---- legend ---------------------------------------------------------------------------------------------------------
 */

static bool any_struck(const fl_result *result) {
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		for (size_t i = 0; i < result->runs[kind].reading_count; i++)
			if (!result->runs[kind].readings[i].used)
				return true;
	return false;
}

static void add_legend(const fl_case *one, const fl_marks *marks, bool band, bool guard, int columns, fl_text *out) {
	char text[512];
	snprintf(text, sizeof text, "%s rising, %s falling, %s stopped zero, %s the mark's U%s%s%s, %s ideal.",
	         marks->rising, marks->falling, marks->stopped_zero, marks->bar, any_struck(&one->result) ? ", " : "",
	         any_struck(&one->result) ? marks->struck : "",
	         any_struck(&one->result) ? " struck reading (at the edge if it lies beyond)" : "", marks->ideal);
	fl_report_wrap(out, "", text, columns);
	if (!band)
		return;
	if (guard)
		snprintf(text, sizeof text,
		         "%s the tolerance T, %s inside it by more than U, %s the guard band: inside it by less than U.",
		         marks->limit, marks->accepted, marks->guard);
	else
		snprintf(text, sizeof text, "%s the tolerance T, %s inside it.", marks->limit, marks->accepted);
	fl_report_wrap(out, "", text, columns);
}

/* ---- the whole ------------------------------------------------------------------------------------------------------
 */

#define SIDE_BY_SIDE_COLUMNS 120
#define BETWEEN_COLUMNS 2

static void add_heading(const fl_case *one, int columns, fl_text *out) {
	char text[256];
	snprintf(text, sizeof text, "Error in %% of span (upright) against the dial in %s (along)",
	         fl_unit_text(fl_physics_dial_unit(one->instrument->scale.dial_unit)));
	fl_report_wrap(out, "", text, columns);
	fl_text_add(out, "\n");
}

static int shown_runs(const fl_result *result, const fl_run_result *shown[FL_RUN_KINDS]) {
	int count = 0;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		const fl_run_result *run = &result->runs[kind];
		if (run->available && !run->same_as_found && run->point_count > 0)
			shown[count++] = run;
	}
	return count;
}

void fl_report_draw(const fl_case *one, int columns, const fl_marks *marks, fl_text *out) {
	const fl_run_result *shown[FL_RUN_KINDS];
	int count = shown_runs(&one->result, shown), limit = columns < 60 ? 60 : columns;
	bool beside = count > 1 && limit >= SIDE_BY_SIDE_COLUMNS;
	int width = beside ? (limit - BETWEEN_COLUMNS) / 2 : limit;
	if (count == 0)
		return;
	if (width > 100)
		width = 100; /* wider shows nothing more */
	report_panel panels[FL_RUN_KINDS] = {{0}};
	fl_arena arenas[FL_RUN_KINDS] = {{0}};
	bool ready = true, band = false, guard = false;
	for (int i = 0; i < count; i++) {
		arenas[i] = panel_open(&panels[i], one, shown[i], width, marks);
		if (!panels[i].cells || !panels[i].taken || !panels[i].knots) {
			ready = false;
			continue;
		}
		draw(&panels[i]);
		band = band || panels[i].knot_count > 0;
		guard = guard || shows_guard(&panels[i]);
	}
	if (ready) {
		add_heading(one, limit, out);
		for (int i = 0; i < count; i += beside ? count : 1)
			add_panels(&panels[i], beside ? count : 1, width + BETWEEN_COLUMNS, out);
		add_legend(one, marks, band, guard, limit, out);
	} else
		out->failed = true;
	for (int i = 0; i < count; i++)
		fl_arena_free(&arenas[i]);
}

void fl_report_picture(const fl_case *one, int columns, fl_text *out) {
	fl_report_draw(one, columns, &fl_report_marks_utf8, out);
}
