/* sheet_text.c - a sheet as plain text, block by block.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "sheet.h"

static void write_grid(const fl_block *block, fl_text *out) {
	for (size_t c = 0; c < block->grid_count; c++) {
		const fl_pairs *pairs = &block->grid[c];
		if (*pairs->head)
			fl_text_printf(out, "%s\n", pairs->head);
		for (size_t i = 0; i < pairs->count; i++)
			fl_text_printf(out, "  %s: %s\n", pairs->pairs[i].label, pairs->pairs[i].value);
	}
}

/* Head of a column in one line: "error rising, % of span". */
static void write_head(const fl_column *column, fl_text *out) {
	if (*column->group)
		fl_text_printf(out, "%s ", column->group);
	for (const char *c = column->head; *c; c++)
		fl_text_append(out, *c == '\n' ? " " : c, 1);
	if (*column->unit)
		fl_text_printf(out, ", %s", column->unit);
}

static void write_table(const fl_block *block, fl_text *out) {
	for (size_t c = 0; c < block->column_count; c++) {
		fl_text_add(out, c ? " | " : "  ");
		write_head(&block->columns[c], out);
	}
	fl_text_add(out, "\n");
	for (size_t r = 0; r < block->row_count; r++) {
		for (size_t c = 0; c < block->column_count; c++)
			fl_text_printf(out, "%s%s", c ? " | " : "  ", block->rows[r].cells[c]);
		fl_text_add(out, block->rows[r].kind == FL_ROW_STRUCK ? " (struck)\n" : "\n");
	}
}

static void write_chart(const fl_chart *chart, fl_text *out) {
	fl_text_printf(out, "  [chart: %s; %s against %s]\n", chart->alternative, chart->y_label, chart->x_label);
	for (size_t i = 0; i < chart->legend_count; i++)
		fl_text_printf(out, "  %s\n", chart->legend[i].text);
}

static void write_block(const fl_block *block, fl_text *out) {
	switch (block->kind) {
	case FL_BLOCK_HEADING:
		fl_text_printf(out, "\n%s\n", block->text);
		break;
	case FL_BLOCK_ITEM:
		fl_text_printf(out, "  – %s%s%s\n", block->lead, *block->lead ? " " : "", block->text);
		break;
	case FL_BLOCK_GRID:
	case FL_BLOCK_SIGNATURES:
		write_grid(block, out);
		break;
	case FL_BLOCK_TABLE:
		write_table(block, out);
		break;
	case FL_BLOCK_CHART:
		write_chart(block->chart, out);
		break;
	case FL_BLOCK_STATEMENT:
	case FL_BLOCK_TEXT:
	case FL_BLOCK_SMALL:
	case FL_BLOCK_END:
		fl_text_printf(out, "%s%s%s\n", block->lead, *block->lead ? " " : "", block->text);
		break;
	}
}

void fl_sheet_text(const fl_sheet *sheet, fl_text *out) {
	fl_text_printf(out, "%s\n", sheet->title);
	if (*sheet->subtitle)
		fl_text_printf(out, "%s\n", sheet->subtitle);
	fl_text_printf(out, "%s %s\n%s\n", sheet->number_label, sheet->number, sheet->issuer);
	for (size_t i = 0; i < sheet->issuer_line_count; i++)
		fl_text_printf(out, "%s\n", sheet->issuer_lines[i]);
	if (*sheet->mark)
		fl_text_printf(out, "On every page: %s\n", sheet->mark);
	for (size_t i = 0; i < sheet->block_count; i++)
		write_block(&sheet->blocks[i], out);
}
