/* sheet.c - building a sheet block by block.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "sheet.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

fl_sheet *fl_sheet_new(void) {
	fl_sheet *sheet = calloc(1, sizeof *sheet);
	if (!sheet)
		return NULL;
	const char **texts[] = {&sheet->title,   &sheet->subtitle, &sheet->number_label, &sheet->number,
	                        &sheet->issuer,  &sheet->running,  &sheet->mark,         &sheet->author,
	                        &sheet->subject, &sheet->program,  &sheet->fingerprint,  &sheet->source};
	for (size_t i = 0; i < sizeof texts / sizeof *texts; i++)
		*texts[i] = "";
	return sheet;
}

void fl_sheet_free(fl_sheet *sheet) {
	if (!sheet)
		return;
	fl_arena_free(&sheet->arena);
	free(sheet);
}

const char *fl_sheet_copy(fl_sheet *sheet, const char *text) {
	const char *copy = fl_arena_strdup(&sheet->arena, text ? text : "");
	if (!copy)
		sheet->failed = true;
	return copy ? copy : "";
}

static const char *vprint(fl_sheet *sheet, const char *format, va_list values) {
	va_list again;
	va_copy(again, values);
	int length = vsnprintf(NULL, 0, format, again);
	va_end(again);
	char *text = length < 0 ? NULL : fl_arena_alloc(&sheet->arena, (size_t)length + 1, 1);
	if (!text) {
		sheet->failed = true;
		return "";
	}
	vsnprintf(text, (size_t)length + 1, format, values);
	return text;
}

const char *fl_sheet_printf(fl_sheet *sheet, const char *format, ...) {
	va_list values;
	va_start(values, format);
	const char *text = vprint(sheet, format, values);
	va_end(values);
	return text;
}

void fl_sheet_issuer(fl_sheet *sheet, const char *issuer, const char *address) {
	size_t most = 1;
	address = address ? address : "";
	for (const char *c = address; *c; c++)
		most += *c == '\n' || *c == ';';
	sheet->issuer = fl_sheet_copy(sheet, issuer && *issuer ? issuer : "Issuer not stated");
	sheet->issuer_lines = fl_arena_alloc(&sheet->arena, most, sizeof *sheet->issuer_lines);
	if (!sheet->issuer_lines) {
		sheet->failed = true;
		return;
	}
	while (*address) {
		size_t length = strcspn(address, "\n;");
		sheet->issuer_lines[sheet->issuer_line_count++] = fl_sheet_printf(sheet, "%.*s", (int)length, address);
		address += length;
		address += strspn(address, "\n; ");
	}
}

/* Room for one more element; NULL (and `failed`) when memory is out. */
static void *grow(fl_sheet *sheet, void *items, size_t count, size_t *capacity, size_t size) {
	void *grown = fl_arena_grow(&sheet->arena, items, count, capacity, size);
	if (!grown)
		sheet->failed = true;
	return grown;
}

static void *alloc(fl_sheet *sheet, size_t count, size_t size) {
	void *memory = fl_arena_alloc(&sheet->arena, count ? count : 1, size);
	if (!memory)
		sheet->failed = true;
	return memory;
}

static fl_block *add_block(fl_sheet *sheet, fl_block_kind kind) {
	fl_block *grown = grow(sheet, sheet->blocks, sheet->block_count, &sheet->block_capacity, sizeof *grown);
	if (!grown)
		return NULL;
	sheet->blocks = grown;
	fl_block *block = &sheet->blocks[sheet->block_count++];
	*block = (fl_block){.kind = kind, .lead = "", .text = ""};
	return block;
}

void fl_sheet_add(fl_sheet *sheet, fl_block_kind kind, const char *text) {
	const char *copy = fl_sheet_copy(sheet, text);
	fl_block *block = add_block(sheet, kind);
	if (block)
		block->text = copy;
}

void fl_sheet_addf(fl_sheet *sheet, fl_block_kind kind, const char *format, ...) {
	va_list values;
	va_start(values, format);
	const char *text = vprint(sheet, format, values);
	va_end(values);
	fl_block *block = add_block(sheet, kind);
	if (block)
		block->text = text;
}

void fl_sheet_add_led(fl_sheet *sheet, fl_block_kind kind, const char *lead, const char *format, ...) {
	va_list values;
	va_start(values, format);
	const char *text = vprint(sheet, format, values);
	va_end(values);
	const char *copy = fl_sheet_copy(sheet, lead);
	fl_block *block = add_block(sheet, kind);
	if (block) {
		block->lead = copy;
		block->text = text;
	}
}

fl_block *fl_sheet_add_grid(fl_sheet *sheet, fl_block_kind kind, const char *const *heads, size_t columns) {
	fl_pairs *grid = alloc(sheet, columns, sizeof *grid);
	fl_block *block = grid ? add_block(sheet, kind) : NULL;
	if (!block)
		return NULL;
	for (size_t i = 0; i < columns; i++)
		grid[i].head = fl_sheet_copy(sheet, heads[i]);
	block->grid = grid;
	block->grid_count = columns;
	return block;
}

static void add_pair(fl_sheet *sheet, fl_block *block, size_t column, const char *label, const char *value) {
	fl_pairs *pairs = &block->grid[column];
	fl_pair *grown = grow(sheet, pairs->pairs, pairs->count, &pairs->capacity, sizeof *grown);
	if (!grown)
		return;
	pairs->pairs = grown;
	pairs->pairs[pairs->count++] = (fl_pair){fl_sheet_copy(sheet, label), value};
}

void fl_sheet_pair(fl_sheet *sheet, fl_block *block, size_t column, const char *label, const char *value) {
	if (block && value && *value)
		add_pair(sheet, block, column, label, fl_sheet_copy(sheet, value));
}

void fl_sheet_pairf(fl_sheet *sheet, fl_block *block, size_t column, const char *label, const char *format, ...) {
	if (!block)
		return;
	va_list values;
	va_start(values, format);
	add_pair(sheet, block, column, label, vprint(sheet, format, values));
	va_end(values);
}

fl_block *fl_sheet_add_table(fl_sheet *sheet, const fl_column *columns, size_t count) {
	fl_column *copy = alloc(sheet, count, sizeof *copy);
	fl_block *block = copy ? add_block(sheet, FL_BLOCK_TABLE) : NULL;
	if (!block)
		return NULL;
	for (size_t i = 0; i < count; i++) {
		copy[i] = columns[i];
		copy[i].head = fl_sheet_copy(sheet, columns[i].head);
		copy[i].unit = fl_sheet_copy(sheet, columns[i].unit);
		copy[i].group = fl_sheet_copy(sheet, columns[i].group);
	}
	block->columns = copy;
	block->column_count = count;
	return block;
}

void fl_sheet_row(fl_sheet *sheet, fl_block *table, fl_row_kind kind, const char *const *cells) {
	if (!table)
		return;
	fl_row *grown = grow(sheet, table->rows, table->row_count, &table->row_capacity, sizeof *grown);
	const char **copy = alloc(sheet, table->column_count, sizeof *copy);
	if (!grown || !copy)
		return;
	for (size_t i = 0; i < table->column_count; i++)
		copy[i] = fl_sheet_copy(sheet, cells[i]);
	table->rows = grown;
	table->rows[table->row_count++] = (fl_row){copy, kind};
}

fl_chart *fl_sheet_add_chart(fl_sheet *sheet, const fl_chart *frame) {
	fl_chart *chart = alloc(sheet, 1, sizeof *chart);
	fl_block *block = chart ? add_block(sheet, FL_BLOCK_CHART) : NULL;
	if (!block)
		return NULL;
	*chart = (fl_chart){.x_label = fl_sheet_copy(sheet, frame->x_label),
	                    .y_label = fl_sheet_copy(sheet, frame->y_label),
	                    .alternative = fl_sheet_copy(sheet, frame->alternative),
	                    .x_low = frame->x_low,
	                    .x_high = frame->x_high,
	                    .whole_steps = frame->whole_steps};
	block->chart = chart;
	return chart;
}

void fl_chart_point(fl_sheet *sheet, fl_chart *chart, fl_plot_point point) {
	if (!chart)
		return;
	fl_plot_point *grown = grow(sheet, chart->points, chart->point_count, &chart->point_capacity, sizeof *grown);
	if (!grown)
		return;
	chart->points = grown;
	chart->points[chart->point_count++] = point;
}

void fl_chart_edge(fl_sheet *sheet, fl_chart *chart, fl_plot_edge edge) {
	if (!chart)
		return;
	fl_plot_edge *grown = grow(sheet, chart->edges, chart->edge_count, &chart->edge_capacity, sizeof *grown);
	if (!grown)
		return;
	chart->edges = grown;
	chart->edges[chart->edge_count++] = edge;
}

void fl_chart_line(fl_sheet *sheet, fl_chart *chart, fl_plot_line line) {
	if (!chart)
		return;
	fl_plot_line *grown = grow(sheet, chart->lines, chart->line_count, &chart->line_capacity, sizeof *grown);
	if (!grown)
		return;
	chart->lines = grown;
	chart->lines[chart->line_count++] = line;
}

void fl_chart_legend(fl_sheet *sheet, fl_chart *chart, fl_legend entry) {
	if (!chart)
		return;
	fl_legend *grown = grow(sheet, chart->legend, chart->legend_count, &chart->legend_capacity, sizeof *grown);
	if (!grown)
		return;
	chart->legend = grown;
	entry.text = fl_sheet_copy(sheet, entry.text);
	chart->legend[chart->legend_count++] = entry;
}
