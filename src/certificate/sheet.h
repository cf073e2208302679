/* sheet.h - what stands on a certificate, as ordered blocks of finished text: the border between content and pdf.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Every number in a sheet is already rounded and worded; pdf only sets it. Charts carry numbers too, but only to be
 * drawn. All strings are valid UTF-8 in the sheet's arena. The fl_sheet_add_ functions copy what they are given; after
 * memory ran out they do nothing and `failed` stays set, so that content checks once.
 */
#ifndef FOUNDLEFT_CERTIFICATE_SHEET_H
#define FOUNDLEFT_CERTIFICATE_SHEET_H

#include "foundleft/certificate.h"

typedef enum fl_align { FL_ALIGN_LEFT, FL_ALIGN_DECIMAL, FL_ALIGN_CENTRE } fl_align;

/* A column of a table. Neighbours with the same `group` get one head above theirs. */
typedef struct fl_column {
	const char *head; /* "found"; may hold a newline */
	const char *unit; /* "mA", set below the head; "" if none */
	const char *group;
	fl_align align;
	bool wraps; /* text that may take several lines and the room that is left over */
} fl_column;

typedef enum fl_row_kind {
	FL_ROW_PLAIN,
	FL_ROW_FIRST, /* begins a group of rows: a hairline above, not parted from the next row by a page */
	FL_ROW_STRUCK /* set aside: crossed through */
} fl_row_kind;

typedef struct fl_row {
	const char **cells;
	fl_row_kind kind;
} fl_row;

/* A label with its value. */
typedef struct fl_pair {
	const char *label, *value;
} fl_pair;

/* Pairs under a small head; the columns of a grid stand side by side. */
typedef struct fl_pairs {
	const char *head;
	fl_pair *pairs;
	size_t count, capacity;
} fl_pairs;

typedef enum fl_mark { FL_MARK_UP, FL_MARK_DOWN, FL_MARK_DOT } fl_mark; /* triangle up, triangle down, round */

typedef struct fl_plot_point {
	double x, y, bar; /* bar: half length of the uncertainty bar, 0 for none */
	fl_mark mark;
	bool filled;
	bool crossed; /* a struck reading */
} fl_plot_point;

/* Half width of a band about zero along x. */
typedef struct fl_plot_edge {
	double x, outer, inner; /* tolerance; acceptance limit (outer less the guard band), NAN if none */
} fl_plot_edge;

typedef enum fl_stroke {
	FL_STROKE_FULL,
	FL_STROKE_DASHED,
	FL_STROKE_FINE, /* does not widen the scale: what leaves the frame is cut off */
	FL_STROKE_EVENT /* upright through the whole frame at x1 */
} fl_stroke;

typedef struct fl_plot_line {
	double x1, y1, x2, y2;
	fl_stroke stroke;
} fl_plot_line;

typedef struct fl_legend {
	const char *text;
	enum { FL_LEGEND_POINT, FL_LEGEND_BAND, FL_LEGEND_GUARD, FL_LEGEND_BAR, FL_LEGEND_LINE } kind;
	fl_plot_point sample;
	fl_stroke stroke; /* of a line */
} fl_legend;

typedef struct fl_chart {
	const char *x_label, *y_label;
	double x_low, x_high;
	bool whole_steps; /* x is divided in whole numbers only: years */
	fl_plot_point *points;
	size_t point_count, point_capacity;
	fl_plot_edge *edges; /* rising x; none: no band */
	size_t edge_count, edge_capacity;
	fl_plot_line *lines;
	size_t line_count, line_capacity;
	fl_legend *legend;
	size_t legend_count, legend_capacity;
	const char *alternative; /* what the picture shows, in words */
} fl_chart;

typedef enum fl_block_kind {
	FL_BLOCK_HEADING,
	FL_BLOCK_STATEMENT, /* a sentence that matters: larger */
	FL_BLOCK_TEXT,      /* a paragraph */
	FL_BLOCK_ITEM,      /* one item of a list */
	FL_BLOCK_SMALL,     /* a note in small type */
	FL_BLOCK_GRID,
	FL_BLOCK_TABLE,
	FL_BLOCK_CHART,
	FL_BLOCK_SIGNATURES, /* a pair with a value is set; one without is room to sign, by the block's `parts` */
	FL_BLOCK_END
} fl_block_kind;

typedef struct fl_block {
	fl_block_kind kind;
	const char *lead; /* words in bold that begin the text, "" if none */
	const char *text; /* all but grid, table and signatures */
	fl_pairs *grid;   /* grid, signatures: the columns */
	size_t grid_count;
	int parts[3]; /* signatures: which place each column is; known to whoever asks for the places */
	fl_column *columns;
	size_t column_count;
	fl_row *rows;
	size_t row_count, row_capacity;
	fl_chart *chart;
} fl_block;

struct fl_sheet {
	fl_arena arena;
	bool failed;
	const char *title, *subtitle;
	const char *number_label, *number;
	const char *issuer;
	const char **issuer_lines;
	size_t issuer_line_count;
	const char *running; /* at the head of every page but the first */
	const char *mark;    /* on every page, "" if none */
	const char *author, *subject, *program;
	const char *fingerprint; /* the document's identity, from what it was made of */
	const char *source;      /* in the metadata: what it was made of, for whoever looks for it; "" if none */
	fl_utc made_at;
	int utc_offset_min;
	fl_block *blocks;
	size_t block_count, block_capacity;
};

fl_sheet *fl_sheet_new(void) FL_MUST_USE;

/* A copy in the sheet's arena; "" when memory is out (and `failed`). */
const char *fl_sheet_copy(fl_sheet *sheet, const char *text);
const char *fl_sheet_printf(fl_sheet *sheet, const char *format, ...) FL_PRINTF(2, 3);

/* Who issues; address lines part at newlines and at "; ". Both may be NULL. */
void fl_sheet_issuer(fl_sheet *sheet, const char *issuer, const char *address);

/* Adds a block with text only (heading, statement, text, item, small, end). */
void fl_sheet_add(fl_sheet *sheet, fl_block_kind kind, const char *text);
void fl_sheet_addf(fl_sheet *sheet, fl_block_kind kind, const char *format, ...) FL_PRINTF(3, 4);
/* The same, begun by words in bold. */
void fl_sheet_add_led(fl_sheet *sheet, fl_block_kind kind, const char *lead, const char *format, ...) FL_PRINTF(4, 5);
/* Adds a block with `columns` columns of pairs; fl_sheet_pair fills them. NULL when memory is out. */
fl_block *fl_sheet_add_grid(fl_sheet *sheet, fl_block_kind kind, const char *const *heads, size_t columns);
/* Left out if `value` is NULL or "". `block` may be NULL (memory out). */
void fl_sheet_pair(fl_sheet *sheet, fl_block *block, size_t column, const char *label, const char *value);
void fl_sheet_pairf(fl_sheet *sheet, fl_block *block, size_t column, const char *label, const char *format, ...)
    FL_PRINTF(5, 6);
fl_block *fl_sheet_add_table(fl_sheet *sheet, const fl_column *columns, size_t count);
/* `cells` has one text a column; NULL is an empty cell. */
void fl_sheet_row(fl_sheet *sheet, fl_block *table, fl_row_kind kind, const char *const *cells);
fl_chart *fl_sheet_add_chart(fl_sheet *sheet, const fl_chart *frame);
void fl_chart_point(fl_sheet *sheet, fl_chart *chart, fl_plot_point point);
void fl_chart_edge(fl_sheet *sheet, fl_chart *chart, fl_plot_edge edge);
void fl_chart_line(fl_sheet *sheet, fl_chart *chart, fl_plot_line line);
void fl_chart_legend(fl_sheet *sheet, fl_chart *chart, fl_legend entry);

#endif
