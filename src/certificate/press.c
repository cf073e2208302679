/* press.c - pages under way, drawing on them, and the book of what is used of each face.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void out_of_memory(fl_press *press) {
	if (press->status == FL_OK)
		press->status = fl_fail(press->err, FL_E_MEMORY, "out of memory while setting the certificate");
}

fl_text *fl_press_page(fl_press *press) {
	return press->status == FL_OK && press->page_count > 0 ? &press->pages[press->page_count - 1] : NULL;
}

void fl_press_new_page(fl_press *press) {
	if (press->status != FL_OK)
		return;
	fl_text *grown =
	    fl_arena_grow(&press->arena, press->pages, press->page_count, &press->page_capacity, sizeof *grown);
	if (!grown) {
		out_of_memory(press);
		return;
	}
	press->pages = grown;
	press->pages[press->page_count++] = (fl_text){0};
	press->y = FL_TOP;
}

bool fl_press_need(fl_press *press, double height) {
	if (press->y - height >= FL_BOTTOM || press->y >= FL_TOP)
		return false;
	fl_press_new_page(press);
	return true;
}

/* Hundredths of a point; never through the locale. */
/* Hundredths as "12.34 ", "-0.05 ", "7 ". By hand: a page holds thousands of numbers, and printf was a tenth of setting
 * it. */
static void ink_hundredths(fl_text *page, long hundredths) {
	char digits[32];
	size_t at = sizeof digits;
	unsigned long size = (unsigned long)labs(hundredths), whole = size / 100;
	digits[--at] = ' ';
	if (size % 100 != 0) {
		digits[--at] = (char)('0' + size % 10);
		digits[--at] = (char)('0' + size / 10 % 10);
		digits[--at] = '.';
	}
	do
		digits[--at] = (char)('0' + whole % 10);
	while ((whole /= 10) > 0);
	if (hundredths < 0)
		digits[--at] = '-';
	fl_text_append(page, digits + at, sizeof digits - at);
}

void fl_ink_number(fl_press *press, double value) {
	fl_text *page = fl_press_page(press);
	if (!page)
		return;
	if (!(fabs(value) < 30000)) {
		press->status = fl_fail(press->err, FL_E_INTERNAL, "a coordinate on the page is not a number");
		return;
	}
	ink_hundredths(page, lround(value * 100));
}

void fl_ink_op(fl_press *press, const char *operator_text) {
	fl_text *page = fl_press_page(press);
	if (page) {
		fl_text_add(page, operator_text);
		fl_text_append(page, "\n", 1);
	}
}

void fl_ink_grey(fl_press *press, double grey, bool stroke) {
	fl_ink_number(press, grey);
	fl_ink_op(press, stroke ? "G" : "g");
}

void fl_ink_line(fl_press *press, double x1, double y1, double x2, double y2, double width, double grey) {
	fl_ink_grey(press, grey, true);
	fl_ink_number(press, width);
	fl_ink_op(press, "w");
	const double ends[2][2] = {{x1, y1}, {x2, y2}};
	fl_ink_path(press, ends, 2);
	fl_ink_op(press, "S");
}

void fl_ink_path(fl_press *press, const double (*points)[2], size_t count) {
	for (size_t i = 0; i < count; i++) {
		fl_ink_number(press, points[i][0]);
		fl_ink_number(press, points[i][1]);
		fl_ink_op(press, i ? "l" : "m");
	}
}

/* Refuses a character by name: the text it stands in, the character, its code point. */
static void refuse(fl_press *press, const char *text, const char *at, size_t bytes, uint32_t point) {
	if (press->status != FL_OK)
		return;
	char shown[160];
	size_t length = strlen(text), keep = length < 120 ? length : 120;
	while (keep > 0 && keep < length && ((unsigned char)text[keep] & 0xC0) == 0x80)
		keep--;
	snprintf(shown, sizeof shown, "%.*s%s", (int)keep, text, keep < length ? "…" : "");
	if (point < 0x20 || (point >= 0x7f && point < 0xa0))
		press->status = fl_fail(press->err, FL_E_VALUE, "\"%s\" holds the control character U+%04X; write it without",
		                        shown, (unsigned)point);
	else
		press->status =
		    fl_fail(press->err, FL_E_VALUE,
		            "\"%s\" holds \"%.*s\" (U+%04X), which the certificate's face cannot show; write it in Latin, "
		            "Greek or Cyrillic letters",
		            shown, (int)bytes, at, (unsigned)point);
}

/* The next number of a typeface for a code point; 0 when memory is out. */
static unsigned take_number(fl_press *press, fl_typeface *type, uint32_t point, unsigned glyph) {
	uint16_t *glyphs = fl_arena_grow(&press->arena, type->glyphs, type->count, &type->glyph_capacity, sizeof *glyphs);
	uint16_t *points = fl_arena_grow(&press->arena, type->points, type->count, &type->point_capacity, sizeof *points);
	if (!glyphs || !points) {
		out_of_memory(press);
		return 0;
	}
	type->glyphs = glyphs;
	type->points = points;
	glyphs[type->count] = (uint16_t)glyph;
	points[type->count] = (uint16_t)point;
	type->number_of[point] = (uint16_t)type->count;
	return (unsigned)type->count++;
}

/* Number of the character at *cursor in the face as used, which it may enter; moves *cursor; 0 after a refusal. */
static unsigned next_number(fl_press *press, fl_typeface *type, const char *whole, const char **cursor) {
	const char *at = *cursor;
	uint32_t point = fl_utf8_next(cursor);
	if (point <= 0xffff && type->number_of[point] != 0)
		return type->number_of[point];
	unsigned glyph = point < 0x20 ? 0 : fl_face_glyph(&type->face, point);
	if (glyph == 0) {
		refuse(press, whole, at, (size_t)(*cursor - at), point);
		return 0;
	}
	return take_number(press, type, point, glyph);
}

static bool refuse_bad_utf8(fl_press *press, const char *text, size_t length) {
	if (fl_utf8_valid(text, length))
		return false;
	if (press->status == FL_OK)
		press->status = fl_fail(press->err, FL_E_VALUE, "a text of the certificate is not valid UTF-8");
	return true;
}

void fl_ink_text(fl_press *press, fl_weight weight, double size, double grey, double x, double y, const char *text,
                 size_t length) {
	fl_text *page = fl_press_page(press);
	if (!page || length == 0 || refuse_bad_utf8(press, text, length))
		return;
	fl_ink_op(press, "BT");
	fl_text_printf(page, "/F%d ", (int)weight + 1);
	fl_ink_number(press, size);
	fl_ink_op(press, "Tf");
	fl_ink_grey(press, grey, false);
	fl_ink_number(press, x);
	fl_ink_number(press, y);
	fl_ink_op(press, "Td");
	fl_text_add(page, "<");
	for (const char *cursor = text; cursor < text + length && press->status == FL_OK;) {
		static const char digits[] = "0123456789ABCDEF";
		unsigned number = next_number(press, &press->faces[weight], text, &cursor);
		const char code[4] = {digits[number >> 12 & 15], digits[number >> 8 & 15], digits[number >> 4 & 15],
		                      digits[number & 15]};
		fl_text_append(page, code, sizeof code);
	}
	fl_ink_op(press, "> Tj ET");
}

void fl_ink_words(fl_press *press, fl_weight weight, double size, double grey, double x, double y, const char *text) {
	fl_ink_text(press, weight, size, grey, x, y, text, strlen(text));
}

void fl_ink_words_right(fl_press *press, fl_weight weight, double size, double grey, double x, double y,
                        const char *text) {
	double width = fl_press_width(press, weight, size, text, strlen(text));
	fl_ink_words(press, weight, size, grey, x - width, y, text);
}

double fl_press_width(fl_press *press, fl_weight weight, double size, const char *text, size_t length) {
	if (press->status != FL_OK || refuse_bad_utf8(press, text, length))
		return 0;
	fl_typeface *type = &press->faces[weight];
	double width = 0;
	for (const char *cursor = text; cursor < text + length && press->status == FL_OK;) {
		unsigned number = next_number(press, type, text, &cursor);
		width += number ? fl_face_advance(&type->face, type->glyphs[number]) : 0;
	}
	return width * size / 1000;
}
