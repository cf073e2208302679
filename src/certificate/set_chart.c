/* set_chart.c - a chart on the page: shaded band, hatched guard band, uncertainty bars, marks that differ in shape and
 * in filling, so that it reads in black and white; a legend that explains each.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define HEIGHT 172.0
#define LEAST_HEIGHT 122.0 /* it gives way to this, rather than leave its page with a gap */
#define INSET 9.0          /* so that marks at the ends of the scale stand clear of the numbers */
#define LABELS 22.0        /* room left of the frame for the numbers of the y axis */
#define SIZE 7.2
#define MARK 2.9
#define ASIDE 2.4 /* rising and falling marks stand this much left and right of their place */

typedef struct fl_frame {
	fl_press *press;
	const fl_chart *chart;
	double left, right, bottom, top; /* on the page */
	double y_low, y_high;            /* in the chart's units */
	double x_step, y_step;
} fl_frame;

static double page_x(const fl_frame *frame, double x) {
	double share = (x - frame->chart->x_low) / (frame->chart->x_high - frame->chart->x_low);
	return frame->left + INSET + share * (frame->right - frame->left - 2 * INSET);
}

static double page_y(const fl_frame *frame, double y) {
	double share = (y - frame->y_low) / (frame->y_high - frame->y_low);
	return frame->bottom + share * (frame->top - frame->bottom);
}

/* A step of 1, 2 or 5 times a power of ten that divides `range` into at most `most` parts. */
static double round_step(double range, int most) {
	double rough = range / most, power = pow(10, floor(log10(rough)));
	const double steps[] = {1, 2, 5, 10};
	for (int i = 0; i < 4; i++)
		if (steps[i] * power >= rough * (1 - 1e-9))
			return steps[i] * power;
	return 10 * power;
}

/* The scale of y: all points with their bars, the band, and zero; whole steps. */
static void choose_scale(fl_frame *frame) {
	const fl_chart *chart = frame->chart;
	double low = 0, high = 0;
	for (size_t i = 0; i < chart->point_count; i++) {
		low = fmin(low, chart->points[i].y - chart->points[i].bar);
		high = fmax(high, chart->points[i].y + chart->points[i].bar);
	}
	for (size_t i = 0; i < chart->line_count; i++) {
		const fl_plot_line *line = &chart->lines[i];
		if (line->stroke == FL_STROKE_FINE || line->stroke == FL_STROKE_EVENT)
			continue;
		low = fmin(low, fmin(line->y1, line->y2));
		high = fmax(high, fmax(line->y1, line->y2));
	}
	double nearest = fmax(high, -low);
	for (size_t i = 0; i < chart->edge_count; i++) {
		double outer = chart->edges[i].outer;
		if (outer > 8 * nearest && nearest > 0) /* a band far outside would flatten the points */
			outer = 8 * nearest;
		low = fmin(low, -outer);
		high = fmax(high, outer);
	}
	if (!(high - low > 0))
		high = 1, low = -1;
	double margin = 0.06 * (high - low);
	frame->y_step = round_step(high - low, 7);
	frame->y_low = floor((low - margin) / (frame->y_step / 2)) * (frame->y_step / 2);
	frame->y_high = ceil((high + margin) / (frame->y_step / 2)) * (frame->y_step / 2);
	frame->x_step = round_step(chart->x_high - chart->x_low, 10);
	if (chart->whole_steps)
		frame->x_step = fmax(1.0, frame->x_step);
}

static double clipped_y(const fl_frame *frame, double y) {
	return page_y(frame, fmin(fmax(y, frame->y_low), frame->y_high));
}

/* Fills, or makes the clipping path of, the strip between two edges; sides: +1 above zero, -1 below. */
static void strip(const fl_frame *frame, bool inner_to_outer, double side, const char *operator_text) {
	const fl_chart *chart = frame->chart;
	for (size_t i = 0; i < chart->edge_count; i++) {
		double point[1][2] = {{page_x(frame, chart->edges[i].x), clipped_y(frame, side * chart->edges[i].outer)}};
		fl_ink_number(frame->press, point[0][0]);
		fl_ink_number(frame->press, point[0][1]);
		fl_ink_op(frame->press, i ? "l" : "m");
	}
	for (size_t i = chart->edge_count; i-- > 0;) {
		double inner = inner_to_outer ? chart->edges[i].inner : 0;
		fl_ink_number(frame->press, page_x(frame, chart->edges[i].x));
		fl_ink_number(frame->press, clipped_y(frame, side * fmax(inner, 0)));
		fl_ink_op(frame->press, "l");
	}
	fl_ink_op(frame->press, operator_text);
}

static void hatch(const fl_frame *frame, double left, double bottom, double right, double top) {
	fl_press *press = frame->press;
	fl_ink_grey(press, FL_RULE, true);
	fl_ink_number(press, 0.3);
	fl_ink_op(press, "w");
	for (double x = left - (top - bottom); x < right; x += 3.2) {
		const double ends[2][2] = {{x, bottom}, {x + (top - bottom), top}};
		fl_ink_path(press, ends, 2);
	}
	fl_ink_op(press, "S");
}

static bool has_guard(const fl_chart *chart) {
	for (size_t i = 0; i < chart->edge_count; i++)
		if (isnan(chart->edges[i].inner))
			return false;
	return chart->edge_count > 0;
}

static void draw_band(const fl_frame *frame) {
	fl_press *press = frame->press;
	if (frame->chart->edge_count < 2)
		return;
	fl_ink_grey(press, 0.925, false);
	strip(frame, false, 1, "f");
	strip(frame, false, -1, "f");
	if (!has_guard(frame->chart))
		return;
	for (double side = 1; side >= -1; side -= 2) {
		fl_ink_op(press, "q");
		strip(frame, true, side, "W n");
		hatch(frame, frame->left, frame->bottom, frame->right, frame->top);
		fl_ink_op(press, "Q");
	}
}

static int decimals_of(double step) {
	int decimals = (int)ceil(-log10(step) - 1e-9);
	return decimals < 0 ? 0 : decimals;
}

static void draw_axes(const fl_frame *frame) {
	fl_press *press = frame->press;
	char number[32];
	long first = lround(ceil(frame->y_low / frame->y_step - 1e-9));
	for (long i = first; (double)i * frame->y_step <= frame->y_high + 1e-9 * frame->y_step; i++) {
		double y = page_y(frame, (double)i * frame->y_step);
		fl_ink_line(press, frame->left, y, frame->right, y, i == 0 ? 0.6 : 0.25, i == 0 ? FL_BLACK : 0.75);
		fl_decimal_format_signed((double)i * frame->y_step, decimals_of(frame->y_step), true, number, sizeof number);
		fl_ink_words_right(press, FL_REGULAR, SIZE, FL_BLACK, frame->left - 5, y - 2.5, i == 0 ? "0" : number);
	}
	first = lround(ceil(frame->chart->x_low / frame->x_step - 1e-9));
	for (long i = first; (double)i * frame->x_step <= frame->chart->x_high * (1 + 1e-9); i++) {
		double x = page_x(frame, (double)i * frame->x_step);
		fl_ink_line(press, x, frame->bottom, x, frame->bottom - 3, 0.4, FL_BLACK);
		fl_decimal_format((double)i * frame->x_step, decimals_of(frame->x_step), number, sizeof number);
		double width = fl_press_width(press, FL_REGULAR, SIZE, number, strlen(number));
		fl_ink_words(press, FL_REGULAR, SIZE, FL_BLACK, x - width / 2, frame->bottom - 11, number);
	}
	fl_ink_line(press, frame->left, frame->bottom, frame->right, frame->bottom, 0.4, FL_BLACK);
	fl_ink_words(press, FL_REGULAR, SIZE, FL_SOFT, FL_LEFT, frame->top + 9, frame->chart->y_label);
	fl_ink_words_right(press, FL_REGULAR, SIZE, FL_SOFT, frame->right, frame->bottom - 21, frame->chart->x_label);
}

static void draw_shape(fl_press *press, fl_mark mark, bool filled, double x, double y) {
	fl_ink_grey(press, FL_BLACK, true);
	fl_ink_grey(press, filled ? FL_BLACK : 1, false);
	fl_ink_number(press, 0.6);
	fl_ink_op(press, "w");
	if (mark == FL_MARK_DOT) { /* an eight-sided round: the eye sees a disc at this size */
		double ring[8][2];
		for (int i = 0; i < 8; i++) {
			ring[i][0] = x + 0.82 * MARK * cos((i + 0.5) * 0.78539816339744831);
			ring[i][1] = y + 0.82 * MARK * sin((i + 0.5) * 0.78539816339744831);
		}
		fl_ink_path(press, (const double(*)[2])ring, 8);
	} else {
		double up = mark == FL_MARK_UP ? 1 : -1;
		const double corners[3][2] = {
		    {x - MARK, y - up * MARK * 0.62}, {x + MARK, y - up * MARK * 0.62}, {x, y + up * MARK * 1.14}};
		fl_ink_path(press, corners, 3);
	}
	fl_ink_op(press, "b");
}

static void draw_cross(fl_press *press, double x, double y) {
	double arm = MARK * 1.35;
	fl_ink_line(press, x - arm, y - arm, x + arm, y + arm, 0.7, FL_BLACK);
	fl_ink_line(press, x - arm, y + arm, x + arm, y - arm, 0.7, FL_BLACK);
}

static double aside(fl_mark mark) {
	return mark == FL_MARK_UP ? -ASIDE : mark == FL_MARK_DOWN ? ASIDE : 0;
}

static void draw_bar(fl_press *press, double x, double low, double high) {
	fl_ink_line(press, x, low, x, high, 0.5, 0.25);
	fl_ink_line(press, x - 1.6, low, x + 1.6, low, 0.5, 0.25);
	fl_ink_line(press, x - 1.6, high, x + 1.6, high, 0.5, 0.25);
}

static void set_stroke(fl_press *press, fl_stroke stroke) {
	static const double widths[] = {0.8, 0.8, 0.45, 0.5}, greys[] = {FL_BLACK, FL_BLACK, FL_SOFT, FL_SOFT};
	static const char *const dashes[] = {"[] 0 d", "[4 2.4] 0 d", "[] 0 d", "[1 1.8] 0 d"};
	fl_ink_grey(press, greys[stroke], true);
	fl_ink_number(press, widths[stroke]);
	fl_ink_op(press, "w");
	fl_ink_op(press, dashes[stroke]);
}

static void draw_lines(const fl_frame *frame) {
	fl_press *press = frame->press;
	if (frame->chart->line_count == 0)
		return;
	const double box[4][2] = {{frame->left, frame->bottom},
	                          {frame->right, frame->bottom},
	                          {frame->right, frame->top},
	                          {frame->left, frame->top}};
	fl_ink_op(press, "q");
	fl_ink_path(press, box, 4);
	fl_ink_op(press, "h W n");
	for (size_t i = 0; i < frame->chart->line_count; i++) {
		const fl_plot_line *line = &frame->chart->lines[i];
		bool upright = line->stroke == FL_STROKE_EVENT;
		const double ends[2][2] = {
		    {page_x(frame, line->x1), upright ? frame->bottom : page_y(frame, line->y1)},
		    {page_x(frame, upright ? line->x1 : line->x2), upright ? frame->top : page_y(frame, line->y2)}};
		set_stroke(press, line->stroke);
		fl_ink_path(press, ends, 2);
		fl_ink_op(press, "S");
	}
	fl_ink_op(press, "Q");
}

static void draw_points(const fl_frame *frame) {
	for (size_t i = 0; i < frame->chart->point_count; i++) {
		const fl_plot_point *point = &frame->chart->points[i];
		double x = page_x(frame, point->x) + aside(point->mark);
		if (point->bar > 0)
			draw_bar(frame->press, x, page_y(frame, point->y - point->bar), page_y(frame, point->y + point->bar));
	}
	for (int crossed = 1; crossed >= 0; crossed--) /* what counts stands over what was struck */
		for (size_t i = 0; i < frame->chart->point_count; i++) {
			const fl_plot_point *point = &frame->chart->points[i];
			double x = page_x(frame, point->x) + aside(point->mark), y = page_y(frame, point->y);
			if (point->crossed != crossed)
				continue;
			draw_shape(frame->press, point->mark, point->filled, x, y);
			if (crossed)
				draw_cross(frame->press, x, y);
		}
}

static void draw_sample(const fl_frame *frame, const fl_legend *entry, double x, double y) {
	fl_press *press = frame->press;
	double left = x - 5, bottom = y - 3;
	const double box[4][2] = {{left, bottom}, {left + 10, bottom}, {left + 10, bottom + 6}, {left, bottom + 6}};
	switch (entry->kind) {
	case FL_LEGEND_POINT:
		draw_shape(press, entry->sample.mark, entry->sample.filled, x, y);
		if (entry->sample.crossed)
			draw_cross(press, x, y);
		break;
	case FL_LEGEND_BAR:
		draw_bar(press, x, y - 4, y + 4);
		break;
	case FL_LEGEND_LINE: {
		bool upright = entry->stroke == FL_STROKE_EVENT;
		const double ends[2][2] = {{upright ? x : x - 5, upright ? y - 5 : y},
		                           {upright ? x : x + 6, upright ? y + 5 : y}};
		fl_ink_op(press, "q");
		set_stroke(press, entry->stroke);
		fl_ink_path(press, ends, 2);
		fl_ink_op(press, "S");
		fl_ink_op(press, "Q");
		break;
	}
	case FL_LEGEND_BAND:
	case FL_LEGEND_GUARD:
		fl_ink_grey(press, 0.925, false);
		fl_ink_path(press, box, 4);
		fl_ink_op(press, "f");
		if (entry->kind == FL_LEGEND_BAND)
			break;
		fl_ink_op(press, "q");
		fl_ink_path(press, box, 4);
		fl_ink_op(press, "W n");
		hatch(frame, left, bottom, left + 10, bottom + 6);
		fl_ink_op(press, "Q");
		break;
	}
}

/* Legend entries in lines below the chart; only measured unless `draw`. Returns the height. */
static double set_legend(const fl_frame *frame, double top, bool draw) {
	double x = FL_LEFT, y = top;
	for (size_t i = 0; i < frame->chart->legend_count; i++) {
		const fl_legend *entry = &frame->chart->legend[i];
		double width = 16 + fl_press_width(frame->press, FL_REGULAR, SIZE, entry->text, strlen(entry->text));
		if (x > FL_LEFT && x + width > FL_RIGHT) {
			x = FL_LEFT;
			y -= 12;
		}
		if (draw) {
			draw_sample(frame, entry, x + 5, y - 5);
			fl_ink_words(frame->press, FL_REGULAR, SIZE, FL_BLACK, x + 14, y - 7.6, entry->text);
		}
		x += width + 9;
	}
	return top - y + 14;
}

double fl_chart_least(fl_press *press, const fl_chart *chart) {
	fl_frame frame = {.press = press, .chart = chart};
	return LEAST_HEIGHT + set_legend(&frame, 0, false) + 12;
}

void fl_set_chart(fl_press *press, const fl_chart *chart) {
	double spare = press->y - FL_BOTTOM - fl_chart_least(press, chart);
	double height = LEAST_HEIGHT + fmax(0, fmin(spare, HEIGHT - LEAST_HEIGHT));
	fl_frame frame = {.press = press,
	                  .chart = chart,
	                  .left = FL_LEFT + LABELS,
	                  .right = FL_RIGHT - 4,
	                  .top = press->y - 19,
	                  .bottom = press->y - height + 28};
	if (!(chart->x_high > chart->x_low)) {
		press->status = fl_fail(press->err, FL_E_INTERNAL, "the chart's scale is empty");
		return;
	}
	choose_scale(&frame);
	draw_band(&frame);
	draw_axes(&frame);
	draw_lines(&frame);
	draw_points(&frame);
	press->y -= height;
	press->y -= set_legend(&frame, press->y, true) + 12;
}
