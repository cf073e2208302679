/* content_run.c - the table of one run: oil, ideal and found output, error, uncertainty, verdict at each point, rising,
 * falling and both together.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

#define MOST_COLUMNS 20

typedef struct fl_run_table {
	fl_writing *w;
	const fl_run_result *run;
	fl_block *block;
	fl_column columns[MOST_COLUMNS];
	size_t column_count;
	bool oil, dial_differs, reading, dial_u, verdicts;
} fl_run_table;

static void add_column(fl_run_table *table, const char *group, const char *head, const char *unit, fl_align align) {
	table->columns[table->column_count++] = (fl_column){head, unit, group, align, false};
}

static bool has_verdicts(const fl_run_result *run) {
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].verdict != FL_VERDICT_NONE)
			return true;
	return false;
}

static void choose_columns(fl_run_table *table) {
	const fl_writing *w = table->w;
	const char *u = "expanded uncertainty", *short_unit = w->dial_unit;
	if (w->instrument->scale.dial_unit == FL_DIAL_REDWOOD || w->instrument->scale.dial_unit == FL_DIAL_SAYBOLT)
		short_unit = "s";
	if (table->oil) {
		add_column(table, "", "oil, lot", "", FL_ALIGN_LEFT);
		add_column(table, "", "direction", "", FL_ALIGN_LEFT);
		add_column(table, "reference oil", "T", "°C", FL_ALIGN_DECIMAL);
		add_column(table, "reference oil", "ν", "mm²/s", FL_ALIGN_DECIMAL);
		add_column(table, "reference oil", "ρ", "kg/m³", FL_ALIGN_DECIMAL);
	} else {
		add_column(table, "", "point", "% of span", FL_ALIGN_LEFT);
		add_column(table, "", "direction", "", FL_ALIGN_LEFT);
		add_column(table, "", "applied", "mbar", FL_ALIGN_DECIMAL);
	}
	add_column(table, table->oil ? "reference oil" : "", "equivalent",
	           w->instrument->scale.dial_unit == FL_DIAL_MPA_S ? "mPa·s" : "mm²/s", FL_ALIGN_DECIMAL);
	if (table->dial_differs)
		add_column(table, "", "dial", short_unit, FL_ALIGN_DECIMAL);
	add_column(table, "", "n", "", FL_ALIGN_DECIMAL);
	add_column(table, "output", "ideal", w->signal_unit, FL_ALIGN_DECIMAL);
	add_column(table, "output", "found", w->signal_unit, FL_ALIGN_DECIMAL);
	add_column(table, "error", "", "% of span", FL_ALIGN_DECIMAL);
	add_column(table, "error", "", short_unit, FL_ALIGN_DECIMAL);
	if (table->reading)
		add_column(table, "error", "", "% of reading", FL_ALIGN_DECIMAL);
	add_column(table, u, "U", "% of span", FL_ALIGN_DECIMAL);
	if (table->dial_u)
		add_column(table, u, "U", short_unit, FL_ALIGN_DECIMAL);
	add_column(table, u, "k", "", FL_ALIGN_DECIMAL);
	if (table->verdicts)
		add_column(table, "", "verdict", "", FL_ALIGN_LEFT);
}

/* First cell: the oil, below it its lot. */
static const char *oil_cell(const fl_run_table *table, const fl_point_result *point, size_t row_of_point) {
	const fl_writing *w = table->w;
	if (point->point == FL_POINT_ZERO)
		return row_of_point == 0 ? "zero" : row_of_point == 1 ? "stopped" : "";
	if (!table->oil)
		return row_of_point == 0 ? fl_word_number(w->sheet, 100 * point->x, 1) : "";
	return row_of_point == 0 ? point->oil : row_of_point == 1 ? point->lot : "";
}

static void write_point(fl_run_table *table, const fl_point_result *point, size_t row_of_point) {
	fl_writing *w = table->w;
	fl_sheet *sheet = w->sheet;
	const char *cells[MOST_COLUMNS];
	size_t c = 0;
	double U = point->sum.expanded;
	bool zero = point->point == FL_POINT_ZERO;
	cells[c++] = oil_cell(table, point, row_of_point);
	cells[c++] = point->both ? "both" : fl_pass_word(point->pass);
	if (table->oil) {
		cells[c++] = zero ? "" : fl_word_number(sheet, point->temp_c, 2);
		cells[c++] = zero ? "" : fl_word_number(sheet, point->certified_m2_s * 1e6, 3);
		cells[c++] = zero ? "" : fl_word_number(sheet, point->rho_kg_m3, 1);
	} else {
		cells[c++] = zero ? "" : fl_word_number(sheet, point->applied_pa / 100, 2);
	}
	cells[c++] = zero && table->oil ? "" : fl_word_number(sheet, point->equivalent_m2_s * 1e6, 3);
	if (table->dial_differs)
		cells[c++] = zero && table->oil ? "" : fl_word_number(sheet, point->dial, 2);
	cells[c++] = fl_sheet_printf(sheet, "%zu", point->n);
	cells[c++] = fl_word_number(sheet, point->ideal_output, w->signal_decimals);
	cells[c++] = fl_word_number(sheet, point->output, w->signal_decimals);
	cells[c++] = fl_word_error(sheet, 100 * point->error_span, 100 * U);
	cells[c++] = fl_word_error(sheet, point->error_dial, table->dial_u ? U * w->dial_span : NAN);
	if (table->reading)
		cells[c++] = fl_word_error(sheet, 100 * point->error_reading, 100 * U / point->x);
	cells[c++] = fl_word_u(sheet, 100 * U);
	if (table->dial_u)
		cells[c++] = fl_word_u(sheet, U * w->dial_span);
	cells[c++] = fl_word_number(sheet, point->sum.coverage_factor, 2);
	if (table->verdicts)
		cells[c++] = fl_verdict_word(point->verdict);
	fl_sheet_row(sheet, table->block, row_of_point == 0 ? FL_ROW_FIRST : FL_ROW_PLAIN, cells);
}

static void write_rows(fl_run_table *table) {
	const fl_run_result *run = table->run;
	for (size_t i = 0; i < run->combined_count; i++) {
		size_t row = 0;
		for (size_t p = 0; p < run->point_count; p++)
			if (run->points[p].point == run->combined[i].point)
				write_point(table, &run->points[p], row++);
		if (run->combined[i].both)
			write_point(table, &run->combined[i], row);
	}
}

static void write_floored(fl_run_table *table) {
	for (size_t i = 0; i < table->run->point_count; i++)
		if (table->run->points[i].floored) {
			fl_sheet_add(table->w->sheet, FL_BLOCK_SMALL,
			             "Where the combined uncertainty came out smaller than the reference's own, the reference's is "
			             "stated.");
			return;
		}
}

static void write_table(fl_writing *w, const fl_run_result *run) {
	const fl_dial_unit dial = w->instrument->scale.dial_unit;
	fl_run_table table = {.w = w,
	                      .run = run,
	                      .oil = w->procedure->medium == FL_MEDIUM_OIL,
	                      .dial_differs = dial == FL_DIAL_REDWOOD || dial == FL_DIAL_SAYBOLT,
	                      .reading = w->result->tolerance.basis == FL_BAND_PERCENT_READING,
	                      .dial_u = isfinite(w->dial_span),
	                      .verdicts = has_verdicts(run)};
	choose_columns(&table);
	table.block = fl_sheet_add_table(w->sheet, table.columns, table.column_count);
	write_rows(&table);
	write_floored(&table);
}

void fl_write_run(fl_writing *w, fl_run_kind kind) {
	const fl_run_result *run = &w->result->runs[kind];
	const char *title = fl_writing_run_title(kind);
	fl_sheet *sheet = w->sheet;
	if (run->same_as_found) {
		fl_sheet_addf(sheet, FL_BLOCK_HEADING, "%s results", title);
		fl_sheet_add(sheet, FL_BLOCK_TEXT,
		             "As-left = as-found: the instrument was left as it was found, and no as-left run was taken.");
		return;
	}
	if (!run->available) {
		fl_sheet_addf(sheet, FL_BLOCK_HEADING, "%s results", title);
		fl_sheet_addf(sheet, FL_BLOCK_TEXT, "%s results are not available. Reason: %s", title,
		              fl_word_sentence(sheet, fl_writing_why_missing(w, run)));
		return;
	}
	fl_sheet_addf(sheet, FL_BLOCK_HEADING, "%s results, %s adjustment", title,
	              kind == FL_RUN_AS_FOUND ? "before any" : "after");
	write_table(w, run);
}
