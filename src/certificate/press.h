/* press.h - what setting a sheet works with: faces, pages under way, drawing in points from the lower left corner.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The first failure stays in `status`; drawing after it does nothing, so that setting checks once at the end.
 */
#ifndef FOUNDLEFT_CERTIFICATE_PRESS_H
#define FOUNDLEFT_CERTIFICATE_PRESS_H

#include "face.h"
#include "sheet.h"

/* A4, and the grid of the page, in points (1/72 inch). */
#define FL_PAGE_WIDTH 595.276
#define FL_PAGE_HEIGHT 841.890
#define FL_LEFT 51.0
#define FL_RIGHT (FL_PAGE_WIDTH - 51.0)
#define FL_MEASURE (FL_RIGHT - FL_LEFT)
#define FL_TOP (FL_PAGE_HEIGHT - 57.0)
#define FL_BOTTOM 55.0

/* Greys: 0 black to 1 white. */
#define FL_BLACK 0.08
#define FL_SOFT 0.38
#define FL_RULE 0.62
#define FL_FAINT 0.86

/* What stands before a document's source in its metadata. */
#define FL_SOURCE_MARK "<dc:identifier>"

typedef enum fl_weight { FL_REGULAR, FL_BOLD, FL_WEIGHTS } fl_weight;

/* A face with what has been used of it: each code point used gets the next number, 1, 2, 3 ... */
typedef struct fl_typeface {
	fl_face face;
	uint16_t *number_of; /* [65536], 0 while unused */
	uint16_t *glyphs;    /* by number: glyph of the face */
	uint16_t *points;    /* by number: code point */
	size_t count, glyph_capacity, point_capacity;
} fl_typeface;

/* An entry of the outline. */
typedef struct fl_bookmark {
	const char *title;
	int level;   /* 0, or 1 under the one of level 0 before it */
	size_t page; /* from 1 */
} fl_bookmark;

typedef struct fl_press {
	const fl_sheet *sheet; /* the one being set; the first of several when the document is written */
	const fl_bookmark *bookmarks;
	size_t bookmark_count;
	fl_arena arena;
	fl_typeface faces[FL_WEIGHTS];
	unsigned char *profile; /* colour profile */
	size_t profile_length;
	fl_text *pages;
	size_t page_count, page_capacity;
	double y; /* the next line's top on the last page */
	fl_sign_places places;
	fl_status status;
	fl_error *err;
} fl_press;

/* A piece of a text: one set line. */
typedef struct fl_line_of_text {
	const char *start;
	size_t length;
} fl_line_of_text;

/* ---- press.c: pages and drawing */
fl_text *fl_press_page(fl_press *press); /* the page under way; NULL after a failure */
void fl_press_new_page(fl_press *press);
/* Goes to a new page unless `height` is left on this one; true if it did. */
bool fl_press_need(fl_press *press, double height);
/* Says on the page's stream: number, operator. */
void fl_ink_number(fl_press *press, double value);
void fl_ink_op(fl_press *press, const char *operator_text);
void fl_ink_grey(fl_press *press, double grey, bool stroke);
void fl_ink_line(fl_press *press, double x1, double y1, double x2, double y2, double width, double grey);
void fl_ink_path(fl_press *press, const double (*points)[2], size_t count);
/* Sets text[length] with its baseline at y. A character the face lacks is refused by name. */
void fl_ink_text(fl_press *press, fl_weight weight, double size, double grey, double x, double y, const char *text,
                 size_t length);
void fl_ink_words(fl_press *press, fl_weight weight, double size, double grey, double x, double y, const char *text);
void fl_ink_words_right(fl_press *press, fl_weight weight, double size, double grey, double x, double y,
                        const char *text);
double fl_press_width(fl_press *press, fl_weight weight, double size, const char *text, size_t length);

/* ---- lines.c: breaking text into lines no wider than `width`, the first shorter by `indent`; *lines in the press's
 * arena, 0 when memory is out */
size_t fl_press_lines(fl_press *press, fl_weight weight, double size, const char *text, double width, double indent,
                      fl_line_of_text **lines);

/* ---- set_*.c: blocks */
void fl_set_sheet(fl_press *press);
/* The same of several one after another, pages counted through; says in `page` where each begins. */
void fl_set_parts(fl_press *press, fl_pack_part *parts, size_t count);
void fl_set_table(fl_press *press, const fl_block *block);
double fl_table_least(fl_press *press, const fl_block *block); /* head and first rows: what must stay together */
void fl_set_chart(fl_press *press, const fl_chart *chart);
double fl_chart_least(fl_press *press, const fl_chart *chart);

/* ---- document.c: pages to bytes by libharu */
fl_status fl_press_bytes(fl_press *press, unsigned char **bytes, size_t *length, fl_error *err) FL_MUST_USE;

#endif
