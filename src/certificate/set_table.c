/* set_table.c - a table on the page: columns as wide as what they hold, numbers aligned on the decimal point, hairlines
 * instead of boxes, the head repeated where the table goes on overleaf.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <math.h>
#include <string.h>

#define LEAST_GAP 5.0
#define WIDEST_GAP 22.0
#define PAD 2.2       /* above and below the text of a head; half of it for a row */
#define GROUP_GAP 1.6 /* more room above the first row of a group */

typedef struct fl_track {
	double x, width;    /* where the column stands */
	double left, right; /* of the decimal point: widest parts */
} fl_track;

typedef struct fl_table_plan {
	fl_press *press;
	const fl_block *block;
	fl_track *tracks;
	double size, leading;
	double head_height;
	size_t head_lines;
	bool grouped, with_units;
} fl_table_plan;

static double width_of(const fl_table_plan *plan, const char *text, size_t length) {
	return fl_press_width(plan->press, FL_REGULAR, plan->size, text, length);
}

/* Where the decimal mark of a cell stands: at the point, or behind a whole number (before a sign such as "%"). */
static size_t point_of(const char *cell) {
	const char *point = strchr(cell, '.');
	return point ? (size_t)(point - cell) : strlen(cell);
}

static double head_width(const fl_table_plan *plan, const fl_column *column) {
	double widest = width_of(plan, column->unit, strlen(column->unit));
	for (const char *line = column->head; *line;) {
		size_t length = strcspn(line, "\n");
		widest = fmax(widest, fl_press_width(plan->press, FL_REGULAR, plan->size, line, length));
		line += length + (line[length] != '\0');
	}
	return widest;
}

/* Natural width of a column at the plan's size. */
static void measure_column(fl_table_plan *plan, size_t c) {
	const fl_column *column = &plan->block->columns[c];
	fl_track *track = &plan->tracks[c];
	*track = (fl_track){0};
	for (size_t r = 0; r < plan->block->row_count; r++) {
		const char *cell = plan->block->rows[r].cells[c];
		if (column->align == FL_ALIGN_DECIMAL) {
			size_t point = point_of(cell);
			track->left = fmax(track->left, width_of(plan, cell, point));
			track->right = fmax(track->right, width_of(plan, cell + point, strlen(cell + point)));
		} else {
			track->width = fmax(track->width, width_of(plan, cell, strlen(cell)));
		}
	}
	track->width = fmax(fmax(track->width, track->left + track->right), head_width(plan, column));
}

static double measure(fl_table_plan *plan, double size) {
	plan->size = size;
	plan->leading = size * 1.27;
	double total = 0;
	for (size_t c = 0; c < plan->block->column_count; c++) {
		measure_column(plan, c);
		total += plan->tracks[c].width;
	}
	return total + LEAST_GAP * (double)(plan->block->column_count - 1);
}

/* Takes `excess` away from the columns of text, always from the widest. */
static void squeeze(fl_table_plan *plan, double excess) {
	while (excess > 0.5) {
		fl_track *widest = NULL;
		for (size_t c = 0; c < plan->block->column_count; c++)
			if (plan->block->columns[c].align == FL_ALIGN_LEFT && (!widest || plan->tracks[c].width > widest->width))
				widest = &plan->tracks[c];
		if (!widest || widest->width < 26)
			return;
		double step = fmin(excess, fmax(1, widest->width / 16));
		widest->width -= step;
		excess -= step;
	}
}

static bool may_wrap(const fl_block *block) {
	for (size_t c = 0; c < block->column_count; c++)
		if (block->columns[c].wraps)
			return true;
	return false;
}

/* Chooses size, widths and places: smaller type before squeezing, what is left over goes between the columns. */
static void place_columns(fl_table_plan *plan) {
	const size_t count = plan->block->column_count;
	double total = measure(plan, 7.3);
	if (total > FL_MEASURE && !may_wrap(plan->block))
		for (double size = 7.2; size > 6.25 && total > FL_MEASURE; size -= 0.2)
			total = measure(plan, size);
	squeeze(plan, total - FL_MEASURE);
	total = LEAST_GAP * (double)(count - 1);
	for (size_t c = 0; c < count; c++)
		total += plan->tracks[c].width;
	double slack = fmax(0, FL_MEASURE - total);
	double gap = LEAST_GAP + (count > 1 ? fmin(slack / (double)(count - 1), WIDEST_GAP - LEAST_GAP) : 0);
	double x = FL_LEFT;
	for (size_t c = 0; c < count; c++) {
		plan->tracks[c].x = x;
		x += plan->tracks[c].width + gap;
	}
}

static size_t lines_of(const char *text) {
	size_t lines = *text ? 1 : 0;
	for (; *text; text++)
		lines += *text == '\n';
	return lines;
}

static void measure_head(fl_table_plan *plan) {
	for (size_t c = 0; c < plan->block->column_count; c++) {
		const fl_column *column = &plan->block->columns[c];
		size_t lines = lines_of(column->head);
		plan->head_lines = lines > plan->head_lines ? lines : plan->head_lines;
		plan->grouped |= *column->group != '\0';
		plan->with_units |= *column->unit != '\0';
	}
	size_t lines = plan->head_lines + plan->with_units;
	plan->head_height = (double)lines * plan->leading + (plan->grouped ? plan->leading + 3 : 0) + 2 * PAD;
}

static bool make_plan(fl_press *press, const fl_block *block, fl_table_plan *plan) {
	*plan = (fl_table_plan){.press = press, .block = block};
	if (block->column_count == 0)
		return false;
	plan->tracks = fl_arena_alloc(&press->arena, block->column_count, sizeof *plan->tracks);
	if (!plan->tracks) {
		if (press->status == FL_OK)
			press->status = fl_fail(press->err, FL_E_MEMORY, "out of memory while setting the certificate");
		return false;
	}
	place_columns(plan);
	measure_head(plan);
	return press->status == FL_OK;
}

/* One line of a head over its column: over numbers it ends where they end. */
static void set_over(const fl_table_plan *plan, size_t c, double grey, double baseline, const char *text,
                     size_t length) {
	const fl_column *column = &plan->block->columns[c];
	const fl_track *track = &plan->tracks[c];
	double x = track->x, width = fl_press_width(plan->press, FL_REGULAR, plan->size, text, length);
	if (column->align == FL_ALIGN_DECIMAL)
		x += track->width - width;
	else if (column->align == FL_ALIGN_CENTRE)
		x += (track->width - width) / 2;
	fl_ink_text(plan->press, FL_REGULAR, plan->size, grey, x, baseline, text, length);
}

static void set_column_head(const fl_table_plan *plan, size_t c, double first) {
	const fl_column *column = &plan->block->columns[c];
	size_t lines = lines_of(column->head), at = plan->head_lines - lines;
	for (const char *line = column->head; *line; at++) {
		size_t length = strcspn(line, "\n");
		set_over(plan, c, FL_BLACK, first - (double)at * plan->leading, line, length);
		line += length + (line[length] != '\0');
	}
	set_over(plan, c, FL_SOFT, first - (double)plan->head_lines * plan->leading, column->unit, strlen(column->unit));
}

/* Heads over neighbours of one group, with a hairline as wide as the group. */
static void set_groups(const fl_table_plan *plan, double baseline) {
	const fl_block *block = plan->block;
	for (size_t c = 0; c < block->column_count;) {
		size_t last = c;
		while (last + 1 < block->column_count && strcmp(block->columns[last + 1].group, block->columns[c].group) == 0)
			last++;
		const char *group = block->columns[c].group;
		if (*group) {
			double left = plan->tracks[c].x, right = plan->tracks[last].x + plan->tracks[last].width;
			double width = width_of(plan, group, strlen(group));
			fl_ink_words(plan->press, FL_REGULAR, plan->size, FL_BLACK, (left + right - width) / 2, baseline, group);
			fl_ink_line(plan->press, left, baseline - 3.2, right, baseline - 3.2, 0.35, FL_RULE);
		}
		c = last + 1;
	}
}

static void set_head(fl_table_plan *plan) {
	fl_press *press = plan->press;
	fl_ink_line(press, FL_LEFT, press->y, FL_RIGHT, press->y, 0.6, FL_BLACK);
	double baseline = press->y - PAD - plan->size;
	if (plan->grouped) {
		set_groups(plan, baseline);
		baseline -= plan->leading + 3;
	}
	for (size_t c = 0; c < plan->block->column_count; c++)
		set_column_head(plan, c, baseline);
	press->y -= plan->head_height;
	fl_ink_line(press, FL_LEFT, press->y, FL_RIGHT, press->y, 0.35, FL_BLACK);
}

typedef struct fl_cell_lines {
	fl_line_of_text *lines;
	size_t count;
} fl_cell_lines;

static double break_row(const fl_table_plan *plan, const fl_row *row, fl_cell_lines *cells) {
	size_t most = 1;
	for (size_t c = 0; c < plan->block->column_count; c++) {
		double room = plan->block->columns[c].align == FL_ALIGN_DECIMAL ? FL_MEASURE : plan->tracks[c].width;
		cells[c].count = fl_press_lines(plan->press, FL_REGULAR, plan->size, row->cells[c], room, 0, &cells[c].lines);
		most = cells[c].count > most ? cells[c].count : most;
	}
	return (double)most * plan->leading + PAD / 2 + (row->kind == FL_ROW_FIRST ? GROUP_GAP : 0);
}

static void set_cell(const fl_table_plan *plan, size_t c, const fl_row *row, const fl_cell_lines *cell,
                     double baseline) {
	const fl_track *track = &plan->tracks[c];
	fl_align align = plan->block->columns[c].align;
	double grey = row->kind == FL_ROW_STRUCK ? FL_SOFT : FL_BLACK;
	for (size_t i = 0; i < cell->count; i++) {
		const char *start = cell->lines[i].start;
		size_t length = cell->lines[i].length;
		double x = track->x;
		if (align == FL_ALIGN_DECIMAL)
			x += track->width - track->right - width_of(plan, start, point_of(start));
		else if (align == FL_ALIGN_CENTRE)
			x += (track->width - width_of(plan, start, length)) / 2;
		fl_ink_text(plan->press, FL_REGULAR, plan->size, grey, x, baseline - (double)i * plan->leading, start, length);
	}
}

static void set_row(fl_table_plan *plan, const fl_row *row, const fl_cell_lines *cells, double height, bool ruled) {
	fl_press *press = plan->press;
	if (ruled)
		fl_ink_line(press, FL_LEFT, press->y, FL_RIGHT, press->y, 0.25, FL_FAINT);
	double above = PAD / 4 + (row->kind == FL_ROW_FIRST ? GROUP_GAP : 0);
	double baseline = press->y - above - plan->size * 1.08;
	for (size_t c = 0; c < plan->block->column_count; c++)
		set_cell(plan, c, row, &cells[c], baseline);
	if (row->kind == FL_ROW_STRUCK) {
		double middle = baseline + plan->size * 0.3;
		fl_ink_line(press, FL_LEFT, middle, FL_RIGHT, middle, 0.4, FL_SOFT);
	}
	press->y -= height;
}

/* Height that must stay together with row r: it and those that belong to its group, at most three. */
static double group_height(const fl_table_plan *plan, size_t r, double height) {
	const fl_block *block = plan->block;
	if (block->rows[r].kind != FL_ROW_FIRST)
		return height;
	for (size_t next = r + 1; next < block->row_count && next < r + 3; next++) {
		if (block->rows[next].kind == FL_ROW_FIRST)
			break;
		height += plan->leading + PAD / 2;
	}
	return height;
}

/* A short table is not parted; of a longer one two fifths of the rows at least stand under its heading. */
static size_t rows_together(size_t rows) {
	return rows <= 8 ? rows : rows < 40 ? rows * 2 / 5 : 16;
}

double fl_table_least(fl_press *press, const fl_block *block) {
	fl_table_plan plan;
	if (!make_plan(press, block, &plan))
		return 0;
	fl_cell_lines *cells = fl_arena_alloc(&press->arena, block->column_count, sizeof *cells);
	double height = plan.head_height + PAD, most = 0.6 * (FL_TOP - FL_BOTTOM);
	for (size_t r = 0; cells && r < rows_together(block->row_count) && height < most; r++)
		height += break_row(&plan, &block->rows[r], cells);
	return fmin(height, most);
}

void fl_set_table(fl_press *press, const fl_block *block) {
	fl_table_plan plan;
	if (!make_plan(press, block, &plan))
		return;
	fl_cell_lines *cells = fl_arena_alloc(&press->arena, block->column_count, sizeof *cells);
	if (!cells) {
		press->status = fl_fail(press->err, FL_E_MEMORY, "out of memory while setting the certificate");
		return;
	}
	set_head(&plan);
	bool first_on_page = true;
	for (size_t r = 0; r < block->row_count && press->status == FL_OK; r++) {
		double height = break_row(&plan, &block->rows[r], cells);
		if (!first_on_page && press->y - group_height(&plan, r, height) < FL_BOTTOM) {
			fl_ink_line(press, FL_LEFT, press->y, FL_RIGHT, press->y, 0.35, FL_BLACK);
			fl_press_new_page(press);
			set_head(&plan);
			first_on_page = true;
		}
		set_row(&plan, &block->rows[r], cells, height, block->rows[r].kind == FL_ROW_FIRST && !first_on_page);
		first_on_page = false;
	}
	press->y -= PAD / 2;
	fl_ink_line(press, FL_LEFT, press->y, FL_RIGHT, press->y, 0.6, FL_BLACK);
	press->y -= 9;
}
