/* report_parts.h - what the reports share: numbers as people read them, wrapped sentences, tables, names of points.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_REPORT_PARTS_H
#define FOUNDLEFT_CLI_REPORT_PARTS_H

#include "case.h"

#define FL_CELL_SIZE 96 /* bytes of one cell or one number, terminator included */

/* ---- numbers: "" for NaN, so that what is not determined leaves a gap ------------------------------------------ */

/* Rounded to `decimals` places, U+2212 for minus, never a negative zero. Returns out. */
char *fl_report_fixed(double value, int decimals, char out[FL_CELL_SIZE]);
/* The same with a sign always, except for zero. */
char *fl_report_signed(double value, int decimals, char out[FL_CELL_SIZE]);
/* An uncertainty to two significant digits, without an exponent. */
char *fl_report_two_digits(double value, char out[FL_CELL_SIZE]);
/* Places that show a value of this size to about one part in ten thousand: 3 below 100, 2 below 1000, else 1. */
int fl_report_places(double size);

/* ---- text ------------------------------------------------------------------------------------------------------- */

/* Copies at most `columns` columns of text; what is cut ends in U+2026. Returns out. */
char *fl_report_fit(const char *text, int columns, char out[FL_CELL_SIZE]);
/* Adds `text` after `lead`, broken between words (not at U+00A0) so that no line is wider than `columns`; the lines
 * that follow are indented as far as the lead is wide. Ends with a newline. */
void fl_report_wrap(fl_text *out, const char *lead, const char *text, int columns);
void fl_report_rule(fl_text *out, int columns);

/* ---- tables ----------------------------------------------------------------------------------------------------- */

typedef enum fl_align { FL_ALIGN_LEFT, FL_ALIGN_RIGHT, FL_ALIGN_POINT } fl_align;

typedef struct fl_table_column {
	const char *head, *unit; /* two lines above the column */
	fl_align align;          /* FL_ALIGN_POINT: on the decimal point */
	bool key;                /* repeated when the table has to be broken into two */
} fl_table_column;

typedef struct fl_table {
	fl_arena arena;
	const fl_table_column *columns; /* borrowed */
	int column_count;
	size_t row_count;
	char (*cells)[FL_CELL_SIZE]; /* NULL when memory ran out: printing then marks the text as failed */
	char scratch[FL_CELL_SIZE];  /* takes the cells then */
} fl_table;

#define FL_TABLE_COLUMNS 16 /* at most */

void fl_table_begin(fl_table *table, const fl_table_column *columns, int column_count, size_t row_count);
/* The cell to be written, FL_CELL_SIZE bytes, empty at first; a scratch cell when memory ran out. */
char *fl_table_cell(fl_table *table, size_t row, int column);
/* Prints within `width` columns, leaves out columns that are empty throughout, breaks the table where it is too wide,
 * and frees it. */
void fl_table_end(fl_table *table, int width, fl_text *out);

/* ---- points: values and names ---- */

/* False where nothing stands in the budget, so that U, k and what follows from them are not determined. */
bool fl_report_has_budget(const fl_point_result *point);
/* "zero", the oil, or the place on the scale where there is no oil ("40 % of span"). Returns out. */
char *fl_report_point_name(const fl_case *one, int point, char out[FL_CELL_SIZE]);
/* "as-found" with a capital. */
const char *fl_report_run_title(fl_run_kind kind);
/* The dial's unit, short enough for the head of a column. */
const char *fl_report_dial_short(fl_dial_unit unit);

/* ---- the picture ------------------------------------------------------------------------------------------------ */

/* The marks that a picture is drawn with. */
typedef struct fl_marks {
	const char *rising, *falling, *stopped_zero, *struck;
	const char *bar, *bar_upper, *bar_lower; /* a whole cell, its upper half, its lower half */
	const char *accepted, *guard, *limit;    /* inside T less the guard band, the guard band, the limit itself */
	const char *ideal, *axis, *tick, *corner, *floor, *floor_tick;
} fl_marks;
extern const fl_marks fl_report_marks_utf8, fl_report_marks_ascii;
/* fl_report_picture with a choice of marks. */
void fl_report_draw(const fl_case *one, int columns, const fl_marks *marks, fl_text *out);

#endif
