/* set_sheet.c - a sheet on pages: masthead, headings, paragraphs, grids, signatures, end mark; then what every page
 * repeats, when their number is known.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define BODY 8.4
#define LEADING 11.4
#define SMALL 7.3
#define SMALL_LEADING 9.5
#define LABEL_SIZE 7.6
#define COLUMN_GAP 20.0
#define SIGN_ROOM 38.0 /* to sign by hand, or for the visible block of a signature */

typedef struct fl_style {
	fl_weight weight;
	double size, leading, grey;
} fl_style;

static const fl_style STYLE_BODY = {FL_REGULAR, BODY, LEADING, FL_BLACK};
static const fl_style STYLE_STATEMENT = {FL_BOLD, 9.4, 13.0, FL_BLACK};
static const fl_style STYLE_SMALL = {FL_REGULAR, SMALL, SMALL_LEADING, 0.2};

/* Sets text in lines from x, `width` wide, going on overleaf where a page is full; begun by words in bold, if any. */
static void set_text(fl_press *press, fl_style style, const char *lead, const char *text, double x, double width) {
	fl_line_of_text *lines;
	double indent = *lead ? fl_press_width(press, FL_BOLD, style.size, lead, strlen(lead)) + 0.4 * style.size : 0;
	size_t count = fl_press_lines(press, style.weight, style.size, text, width, fmin(indent, width / 2), &lines);
	if (count == 2 || count == 3) /* no single line left behind or alone overleaf */
		fl_press_need(press, (double)count * style.leading);
	for (size_t i = 0; i < count; i++) {
		fl_press_need(press, i == 0 && count > 3 ? 2 * style.leading : style.leading);
		if (i == 0)
			fl_ink_words(press, FL_BOLD, style.size, FL_BLACK, x, press->y - style.size, lead);
		fl_ink_text(press, style.weight, style.size, style.grey, i == 0 ? x + indent : x, press->y - style.size,
		            lines[i].start, lines[i].length);
		press->y -= style.leading;
	}
}

/* Lines at a place, without going overleaf. */
static double set_lines_at(fl_press *press, fl_style style, const char *text, double x, double y, double width) {
	fl_line_of_text *lines;
	size_t count = fl_press_lines(press, style.weight, style.size, text, width, 0, &lines);
	for (size_t i = 0; i < count; i++)
		fl_ink_text(press, style.weight, style.size, style.grey, x, y - style.size - (double)i * style.leading,
		            lines[i].start, lines[i].length);
	return (double)count * style.leading;
}

static double lines_height(fl_press *press, fl_style style, const char *text, double width) {
	fl_line_of_text *lines;
	return (double)fl_press_lines(press, style.weight, style.size, text, width, 0, &lines) * style.leading;
}

/* ---- grids ----------------------------------------------------------------- */

typedef struct fl_grid_plan {
	double column_width, label_width;
	fl_style label, value; /* smaller where three columns or more share the page */
} fl_grid_plan;

static fl_grid_plan plan_grid(fl_press *press, const fl_block *block) {
	bool narrow = block->grid_count > 2;
	double size = narrow ? 7.7 : BODY, leading = narrow ? 10.3 : LEADING;
	fl_grid_plan plan = {.label = {FL_REGULAR, narrow ? 7.3 : LABEL_SIZE, leading, FL_SOFT},
	                     .value = {FL_REGULAR, size, leading, FL_BLACK}};
	double columns = (double)block->grid_count;
	plan.column_width = (FL_MEASURE - (columns - 1) * COLUMN_GAP) / columns;
	for (size_t c = 0; c < block->grid_count; c++)
		for (size_t i = 0; i < block->grid[c].count; i++) {
			const char *label = block->grid[c].pairs[i].label;
			plan.label_width =
			    fmax(plan.label_width, fl_press_width(press, FL_REGULAR, plan.label.size, label, strlen(label)));
		}
	plan.label_width = fmin(plan.label_width + 9, 0.46 * plan.column_width);
	return plan;
}

static double pair_height(fl_press *press, const fl_grid_plan *plan, const fl_pair *pair) {
	double label = lines_height(press, plan->label, pair->label, plan->label_width - 6);
	return fmax(label, lines_height(press, plan->value, pair->value, plan->column_width - plan->label_width)) + 1.2;
}

static double grid_height(fl_press *press, const fl_grid_plan *plan, const fl_block *block) {
	double highest = 0;
	for (size_t c = 0; c < block->grid_count; c++) {
		double height = *block->grid[c].head ? LEADING + 3 : 0;
		for (size_t i = 0; i < block->grid[c].count; i++)
			height += pair_height(press, plan, &block->grid[c].pairs[i]);
		highest = fmax(highest, height);
	}
	return highest;
}

static void set_pair(fl_press *press, const fl_grid_plan *plan, const fl_pair *pair, double x, double y) {
	set_lines_at(press, plan->label, pair->label, x, y - (plan->value.size - plan->label.size), plan->label_width - 6);
	set_lines_at(press, plan->value, pair->value, x + plan->label_width, y, plan->column_width - plan->label_width);
}

static void set_grid_head(fl_press *press, const fl_grid_plan *plan, const char *head, double x, double y) {
	fl_ink_words(press, FL_BOLD, LABEL_SIZE, FL_BLACK, x, y - LABEL_SIZE, head);
	fl_ink_line(press, x, y - LABEL_SIZE - 3.4, x + plan->column_width, y - LABEL_SIZE - 3.4, 0.35, FL_RULE);
}

/* A grid that is too high for one page: its columns below one another, over as many pages as it takes. */
static void set_long_grid(fl_press *press, const fl_block *block) {
	fl_grid_plan plan = plan_grid(press, block);
	plan.column_width = FL_MEASURE;
	for (size_t c = 0; c < block->grid_count; c++) {
		if (*block->grid[c].head) {
			fl_press_need(press, 3 * LEADING);
			set_grid_head(press, &plan, block->grid[c].head, FL_LEFT, press->y);
			press->y -= LEADING + 3;
		}
		for (size_t i = 0; i < block->grid[c].count; i++) {
			const fl_pair *pair = &block->grid[c].pairs[i];
			fl_press_need(press, 2 * LEADING);
			set_lines_at(press, plan.label, pair->label, FL_LEFT, press->y - (plan.value.size - plan.label.size),
			             plan.label_width - 6);
			set_text(press, plan.value, "", pair->value, FL_LEFT + plan.label_width, FL_MEASURE - plan.label_width);
			press->y -= 1.2;
		}
	}
}

static void set_grid(fl_press *press, const fl_block *block) {
	fl_grid_plan plan = plan_grid(press, block);
	double height = grid_height(press, &plan, block);
	if (height > FL_TOP - FL_BOTTOM) {
		set_long_grid(press, block);
		return;
	}
	fl_press_need(press, height);
	for (size_t c = 0; c < block->grid_count; c++) {
		double x = FL_LEFT + (double)c * (plan.column_width + COLUMN_GAP), y = press->y;
		if (*block->grid[c].head) {
			set_grid_head(press, &plan, block->grid[c].head, x, y);
			y -= LEADING + 3;
		}
		for (size_t i = 0; i < block->grid[c].count; i++) {
			set_pair(press, &plan, &block->grid[c].pairs[i], x, y);
			y -= pair_height(press, &plan, &block->grid[c].pairs[i]);
		}
	}
	press->y -= height + 5;
}

/* ---- signatures ------------------------------------------------------------ */

static double signature_width(const fl_block *block) {
	double columns = (double)block->grid_count;
	return (FL_MEASURE - (columns - 1) * COLUMN_GAP) / columns;
}

/* Where a value stands beside the column's head; 0 where it does not fit between head and label, and goes below. */
static double beside_head(fl_press *press, const fl_pairs *pairs, const char *value, double width) {
	const char *label = pairs->count > 0 ? pairs->pairs[pairs->count - 1].label : "";
	double head = fl_press_width(press, FL_BOLD, LABEL_SIZE, pairs->head, strlen(pairs->head)) + 6;
	double taken = head + fl_press_width(press, FL_REGULAR, BODY, value, strlen(value)) + 6 +
	               fl_press_width(press, FL_REGULAR, SMALL, label, strlen(label));
	return taken <= width ? head : 0;
}

static double signatures_height(fl_press *press, const fl_block *block, double width) {
	double highest = 0;
	for (size_t c = 0; c < block->grid_count; c++) {
		double height = LEADING + 4;
		for (size_t i = 0; i < block->grid[c].count; i++) {
			const char *value = block->grid[c].pairs[i].value;
			if (!*value)
				height += SIGN_ROOM;
			else if (beside_head(press, &block->grid[c], value, width) == 0)
				height += lines_height(press, STYLE_BODY, value, width) + 2;
		}
		highest = fmax(highest, height);
	}
	return highest + 6;
}

/* The room above the line, as the place for a visible block. */
static void keep_place(fl_press *press, int part, double x, double line, double width) {
	if (part >= 0 && part < FL_PARTS)
		press->places.of[part] = (fl_seal_place){(int)press->page_count, x, line + 1, width, SIGN_ROOM - 2};
}

/* A pair with a value is set; one without is a line to sign on, with its label at the column's head. */
static void set_signature(fl_press *press, const fl_pairs *pairs, int part, double x, double width) {
	double y = press->y, head = y - LABEL_SIZE;
	fl_ink_words(press, FL_BOLD, LABEL_SIZE, FL_BLACK, x, head, pairs->head);
	y -= LEADING + 4;
	for (size_t i = 0; i < pairs->count; i++) {
		const fl_pair *pair = &pairs->pairs[i];
		double beside = *pair->value ? beside_head(press, pairs, pair->value, width) : 0;
		if (beside > 0) {
			fl_ink_words(press, FL_REGULAR, BODY, FL_BLACK, x + beside, head, pair->value);
		} else if (*pair->value) {
			y -= set_lines_at(press, STYLE_BODY, pair->value, x, y, width) + 2;
		} else {
			y -= SIGN_ROOM;
			keep_place(press, part, x, y, width);
			fl_ink_line(press, x, y, x + width, y, 0.5, FL_BLACK);
			fl_ink_words_right(press, FL_REGULAR, SMALL, FL_SOFT, x + width, head, pair->label);
		}
	}
}

static void set_signatures(fl_press *press, const fl_block *block) {
	double width = signature_width(block), height = signatures_height(press, block, width);
	fl_press_need(press, height);
	press->y -= 4;
	for (size_t c = 0; c < block->grid_count; c++)
		set_signature(press, &block->grid[c], block->parts[c], FL_LEFT + (double)c * (width + COLUMN_GAP), width);
	press->y -= height - 4;
}

/* ---- the rest -------------------------------------------------------------- */

/* What of a block must stand on the page of the heading above it. */
static double least_height(fl_press *press, const fl_block *block) {
	fl_grid_plan plan;
	switch (block->kind) {
	case FL_BLOCK_TABLE:
		return fl_table_least(press, block);
	case FL_BLOCK_CHART:
		return fl_chart_least(press, block->chart);
	case FL_BLOCK_GRID:
		plan = plan_grid(press, block);
		return fmin(grid_height(press, &plan, block), (FL_TOP - FL_BOTTOM) / 2);
	case FL_BLOCK_SIGNATURES:
		return signatures_height(press, block, signature_width(block));
	default:
		return fmin(lines_height(press, STYLE_BODY, block->text, FL_MEASURE), 3 * LEADING);
	}
}

static void set_heading(fl_press *press, const fl_block *block, const fl_block *next) {
	double after = next ? least_height(press, next) : 0;
	if (!fl_press_need(press, 26 + after) && press->y < FL_TOP)
		press->y -= 5;
	fl_ink_words(press, FL_BOLD, 10.2, FL_BLACK, FL_LEFT, press->y - 10.2, block->text);
	press->y -= 16.5;
}

static void set_item(fl_press *press, const fl_block *block, bool last) {
	fl_press_need(press, LEADING);
	fl_ink_words(press, FL_REGULAR, BODY, FL_BLACK, FL_LEFT, press->y - BODY, "–");
	set_text(press, STYLE_BODY, block->lead, block->text, FL_LEFT + 10, FL_MEASURE - 10);
	press->y -= last ? 5 : 1;
}

static void set_end(fl_press *press, const char *text) {
	fl_press_need(press, 24);
	double width = fl_press_width(press, FL_BOLD, BODY, text, strlen(text));
	double middle = (FL_LEFT + FL_RIGHT) / 2, y = press->y - 14;
	fl_ink_words(press, FL_BOLD, BODY, FL_BLACK, middle - width / 2, y, text);
	if (width + 24 < FL_MEASURE) {
		fl_ink_line(press, FL_LEFT, y + 2.8, middle - width / 2 - 10, y + 2.8, 0.5, FL_BLACK);
		fl_ink_line(press, middle + width / 2 + 10, y + 2.8, FL_RIGHT, y + 2.8, 0.5, FL_BLACK);
	}
	press->y -= 24;
}

static void set_block(fl_press *press, const fl_block *block, const fl_block *next) {
	switch (block->kind) {
	case FL_BLOCK_HEADING:
		set_heading(press, block, next);
		break;
	case FL_BLOCK_STATEMENT:
		press->y -= 2;
		set_text(press, STYLE_STATEMENT, block->lead, block->text, FL_LEFT, FL_MEASURE);
		press->y -= 2;
		break;
	case FL_BLOCK_TEXT:
		set_text(press, STYLE_BODY, block->lead, block->text, FL_LEFT, FL_MEASURE);
		press->y -= 4;
		break;
	case FL_BLOCK_SMALL:
		if (next && next->kind == FL_BLOCK_SIGNATURES)
			fl_press_need(press, lines_height(press, STYLE_SMALL, block->text, FL_MEASURE) +
			                         signatures_height(press, next, signature_width(next)) + 27);
		else if (next && next->kind == FL_BLOCK_END) /* the end mark is not left alone overleaf */
			fl_press_need(press, lines_height(press, STYLE_SMALL, block->text, FL_MEASURE) + 27);
		set_text(press, STYLE_SMALL, block->lead, block->text, FL_LEFT, FL_MEASURE);
		press->y -= 2.5;
		break;
	case FL_BLOCK_ITEM:
		set_item(press, block, !next || next->kind != FL_BLOCK_ITEM);
		break;
	case FL_BLOCK_GRID:
		set_grid(press, block);
		break;
	case FL_BLOCK_TABLE:
		fl_press_need(press, fl_table_least(press, block));
		fl_set_table(press, block);
		break;
	case FL_BLOCK_CHART:
		fl_press_need(press, fl_chart_least(press, block->chart));
		fl_set_chart(press, block->chart);
		break;
	case FL_BLOCK_SIGNATURES:
		set_signatures(press, block);
		break;
	case FL_BLOCK_END:
		set_end(press, block->text);
		break;
	}
}

/* Issuer on the left, number on the right, then the title. */
static void set_masthead(fl_press *press) {
	const fl_sheet *sheet = press->sheet;
	static const fl_style issuer = {FL_BOLD, 9.4, 12.4, FL_BLACK}, address = {FL_REGULAR, 7.8, 10.4, FL_SOFT};
	double y = FL_PAGE_HEIGHT - 43, width = 0.58 * FL_MEASURE;
	double right = y;
	y -= set_lines_at(press, issuer, sheet->issuer, FL_LEFT, y, width);
	for (size_t i = 0; i < sheet->issuer_line_count; i++)
		y -= set_lines_at(press, address, sheet->issuer_lines[i], FL_LEFT, y, width);
	fl_ink_words_right(press, FL_REGULAR, LABEL_SIZE, FL_SOFT, FL_RIGHT, right - 9.4, sheet->number_label);
	double number = fl_press_width(press, FL_BOLD, 11.5, sheet->number, strlen(sheet->number));
	double size = fmin(11.5, floor(1150 * 0.4 * FL_MEASURE / fmax(number, 1)) / 100); /* as the page will state it */
	fl_ink_words_right(press, FL_BOLD, size, FL_BLACK, FL_RIGHT, right - 23.5, sheet->number);
	y = fmin(y, right - 26) - 12;
	fl_ink_words(press, FL_BOLD, 21, FL_BLACK, FL_LEFT, y - 21, sheet->title);
	y -= 28;
	if (*sheet->subtitle) {
		static const fl_style subtitle = {FL_REGULAR, 10, 13, FL_BLACK};
		y -= set_lines_at(press, subtitle, sheet->subtitle, FL_LEFT, y - 3, FL_MEASURE) + 3;
	}
	fl_ink_line(press, FL_LEFT, y - 5, FL_RIGHT, y - 5, 1.2, FL_BLACK);
	press->y = y - 17;
}

/* One line of small type, cut short with an ellipsis where it is too long: it repeats what page 1 says in full. */
static void set_running(fl_press *press, const char *text, double y) {
	fl_line_of_text *lines;
	size_t count = fl_press_lines(press, FL_REGULAR, SMALL, text, FL_MEASURE - 10, 0, &lines);
	if (count == 0)
		return;
	fl_ink_text(press, FL_REGULAR, SMALL, FL_SOFT, FL_LEFT, y, lines[0].start, lines[0].length);
	if (count > 1)
		fl_ink_words(press, FL_REGULAR, SMALL, FL_SOFT,
		             FL_LEFT + fl_press_width(press, FL_REGULAR, SMALL, lines[0].start, lines[0].length), y, "…");
}

/* Mark, running head and foot of the page under way, which is page `page` of `count`; `first` of its sheet. */
static void set_margins(fl_press *press, size_t page, bool first, size_t count) {
	const fl_sheet *sheet = press->sheet;
	char place[48];
	snprintf(place, sizeof place, "page %zu of %zu", page, count);
	double head = FL_PAGE_HEIGHT - 38, foot = 34;
	if (!first) {
		set_running(press, sheet->running, head);
		fl_ink_line(press, FL_LEFT, head - 5, FL_RIGHT, head - 5, 0.35, FL_RULE);
	}
	if (*sheet->mark) {
		double width = fl_press_width(press, FL_BOLD, 9, sheet->mark, strlen(sheet->mark));
		double left = (FL_PAGE_WIDTH - width) / 2, y = FL_PAGE_HEIGHT - 25;
		const double box[4][2] = {
		    {left - 12, y - 5}, {left + width + 12, y - 5}, {left + width + 12, y + 10.5}, {left - 12, y + 10.5}};
		fl_ink_grey(press, FL_BLACK, true);
		fl_ink_number(press, 0.9);
		fl_ink_op(press, "w");
		fl_ink_path(press, box, 4);
		fl_ink_op(press, "s");
		fl_ink_words(press, FL_BOLD, 9, FL_BLACK, left, y, sheet->mark);
	}
	fl_ink_line(press, FL_LEFT, foot + 11, FL_RIGHT, foot + 11, 0.35, FL_RULE);
	fl_ink_words(press, FL_REGULAR, SMALL, FL_SOFT, FL_LEFT, foot, sheet->title);
	double width = fl_press_width(press, FL_BOLD, SMALL, sheet->number, strlen(sheet->number));
	fl_ink_words(press, FL_BOLD, SMALL, FL_BLACK, (FL_PAGE_WIDTH - width) / 2, foot, sheet->number);
	fl_ink_words_right(press, FL_REGULAR, SMALL, FL_BLACK, FL_RIGHT, foot, place);
}

/* Masthead and blocks from the top of a new page. */
static void set_blocks(fl_press *press) {
	const fl_sheet *sheet = press->sheet;
	fl_press_new_page(press);
	set_masthead(press);
	for (size_t i = 0; i < sheet->block_count && press->status == FL_OK; i++)
		set_block(press, &sheet->blocks[i], i + 1 < sheet->block_count ? &sheet->blocks[i + 1] : NULL);
}

void fl_set_parts(fl_press *press, fl_pack_part *parts, size_t count) {
	for (size_t i = 0; i < count && press->status == FL_OK; i++) {
		parts[i].page = press->page_count + 1;
		press->sheet = parts[i].sheet;
		if (press->sheet)
			set_blocks(press);
	}
	size_t pages = press->page_count;
	for (size_t i = count, last = pages; i-- > 0 && press->status == FL_OK;) {
		press->sheet = parts[i].sheet;
		for (size_t page = parts[i].page; page <= last && press->status == FL_OK; page++) {
			press->page_count = page; /* drawing goes to the last page counted */
			set_margins(press, page, page == parts[i].page, pages);
		}
		last = parts[i].page - 1;
	}
	press->page_count = pages;
	press->sheet = parts[0].sheet;
}

void fl_set_sheet(fl_press *press) {
	fl_pack_part one = {.sheet = press->sheet};
	fl_set_parts(press, &one, 1);
}
