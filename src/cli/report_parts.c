/* report_parts.c - numbers as people read them, wrapped sentences, tables aligned on the decimal point.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report_parts.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define MINUS "\u2212"
#define ELLIPSIS "\u2026"

/* ---- numbers ---------------------------------------------------------------------------------------------------- */

/* Digits of |value|; *zero tells that nothing but zeros was left after rounding. */
static void digits_of(double value, int decimals, char digits[64], bool *zero) {
	snprintf(digits, 64, "%.*f", decimals, fabs(value));
	*zero = strpbrk(digits, "123456789") == NULL;
}

static char *with_sign(double value, int decimals, const char *plus, char out[FL_CELL_SIZE]) {
	out[0] = '\0';
	if (isnan(value))
		return out;
	if (fabs(value) >= 1e15) { /* also infinite: no column has room for its digits */
		snprintf(out, FL_CELL_SIZE, "%s%s", value < 0.0 ? MINUS : plus, isinf(value) ? "\u221e" : "> 10\u00b9\u2075");
		return out;
	}
	char digits[64];
	bool zero = false;
	digits_of(value, decimals, digits, &zero);
	snprintf(out, FL_CELL_SIZE, "%s%s", zero ? "" : value < 0.0 ? MINUS : plus, digits);
	return out;
}

char *fl_report_fixed(double value, int decimals, char out[FL_CELL_SIZE]) {
	return with_sign(value, decimals, "", out);
}

char *fl_report_signed(double value, int decimals, char out[FL_CELL_SIZE]) {
	return with_sign(value, decimals, "+", out);
}

char *fl_report_two_digits(double value, char out[FL_CELL_SIZE]) {
	if (!isfinite(value) || value == 0.0)
		return fl_report_fixed(value, 2, out);
	if (fabs(value) < 0.00005) /* nothing to be read off a scale: noise of the arithmetic */
		return strcpy(out, "< 0.0001");
	char scientific[32];
	snprintf(scientific, sizeof scientific, "%.1e", value);
	int exponent = (int)strtol(strchr(scientific, 'e') + 1, NULL, 10);
	int decimals = 1 - exponent;
	/* The value of two digits itself: 123 becomes 120. */
	return fl_report_fixed(strtod(scientific, NULL), decimals < 0 ? 0 : decimals > 9 ? 9 : decimals, out);
}

int fl_report_places(double size) {
	if (fabs(size) >= 1000.0)
		return 1;
	return fabs(size) >= 100.0 ? 2 : 3;
}

/* ---- text ------------------------------------------------------------------------------------------------------- */

/* Bytes of the first `columns` columns of text. */
static size_t bytes_within(const char *text, int columns) {
	const char *cursor = text;
	char piece[8];
	for (int used = 0; *cursor;) {
		const char *next = cursor;
		fl_utf8_next(&next);
		size_t length = (size_t)(next - cursor);
		memcpy(piece, cursor, length);
		piece[length] = '\0';
		used += fl_utf8_columns(piece);
		if (used > columns)
			break;
		cursor = next;
	}
	return (size_t)(cursor - text);
}

char *fl_report_fit(const char *text, int columns, char out[FL_CELL_SIZE]) {
	size_t length = strlen(text);
	bool cut = fl_utf8_columns(text) > columns;
	if (cut)
		length = bytes_within(text, columns - 1);
	/* Combining marks may make even few columns long: then cut by bytes, at a whole character. */
	while (length > FL_CELL_SIZE - sizeof ELLIPSIS) {
		cut = true;
		length--;
		while (length > 0 && ((unsigned char)text[length] & 0xC0) == 0x80)
			length--;
	}
	snprintf(out, FL_CELL_SIZE, "%.*s%s", (int)length, text, cut ? ELLIPSIS : "");
	return out;
}

/* Adds a word; a no-break space has done its work by then and is printed as a plain one. */
static void add_word(fl_text *out, const char *word) {
	static const char no_break[] = "\u00a0";
	for (const char *at; (at = strstr(word, no_break)) != NULL; word = at + strlen(no_break)) {
		fl_text_append(out, word, (size_t)(at - word));
		fl_text_add(out, " ");
	}
	fl_text_add(out, word);
}

void fl_report_wrap(fl_text *out, const char *lead, const char *text, int columns) {
	int indent = fl_utf8_columns(lead), used = indent;
	bool first = true;
	fl_text_add(out, lead);
	while (*text) {
		size_t word = strcspn(text, " ");
		char copy[512];
		if (word >= sizeof copy)
			word = bytes_within(text, columns - indent);
		snprintf(copy, sizeof copy, "%.*s", (int)word, text);
		int wide = fl_utf8_columns(copy);
		if (indent + wide > columns) { /* a word wider than the line is broken */
			word = bytes_within(copy, columns - indent);
			copy[word] = '\0';
			wide = fl_utf8_columns(copy);
		}
		if (!first && used + 1 + wide > columns) {
			fl_text_add(out, "\n");
			fl_text_pad_to(out, indent);
			used = indent;
			first = true;
		}
		fl_text_add(out, first ? "" : " ");
		add_word(out, copy);
		used += wide + (first ? 0 : 1);
		first = false;
		text += word;
		text += strspn(text, " ");
	}
	fl_text_add(out, "\n");
}

void fl_report_rule(fl_text *out, int columns) {
	for (int i = 0; i < columns; i++)
		fl_text_add(out, "\u2500");
	fl_text_add(out, "\n");
}

/* ---- tables ----------------------------------------------------------------------------------------------------- */

void fl_table_begin(fl_table *table, const fl_table_column *columns, int column_count, size_t row_count) {
	*table = (fl_table){.columns = columns, .column_count = column_count, .row_count = row_count};
	/* One cell more: the scratch cell is never needed while memory lasts, but an empty table has none. */
	table->cells = fl_arena_alloc(&table->arena, row_count * (size_t)column_count + 1, sizeof *table->cells);
}

char *fl_table_cell(fl_table *table, size_t row, int column) {
	return table->cells ? table->cells[row * (size_t)table->column_count + (size_t)column] : table->scratch;
}

/* How wide one column is: its whole width, and the part before the decimal point. */
typedef struct width {
	int whole, before;
	bool empty;
} width;

/* Columns before the decimal point. */
static int before_point(const char *cell) {
	char copy[FL_CELL_SIZE];
	snprintf(copy, sizeof copy, "%.*s", (int)strcspn(cell, "."), cell);
	return fl_utf8_columns(copy);
}

static width measure(fl_table *table, int column) {
	const fl_table_column *head = &table->columns[column];
	width result = {.empty = true};
	int after = 0;
	for (size_t row = 0; row < table->row_count; row++) {
		const char *cell = fl_table_cell(table, row, column);
		int wide = fl_utf8_columns(cell), before = head->align == FL_ALIGN_POINT ? before_point(cell) : wide;
		result.empty = result.empty && wide == 0;
		result.before = before > result.before ? before : result.before;
		after = wide - before > after ? wide - before : after;
	}
	result.whole = result.before + after;
	int heads[] = {fl_utf8_columns(head->head), fl_utf8_columns(head->unit)};
	for (int i = 0; i < 2; i++)
		if (heads[i] > result.whole) {
			result.before += heads[i] - result.whole; /* numbers stand to the right under a wide head */
			result.whole = heads[i];
		}
	return result;
}

/* One cell at the place where the line now ends. */
static void print_cell(fl_text *out, int start, fl_align align, const width *wide, const char *cell) {
	int shift = 0;
	if (align == FL_ALIGN_RIGHT)
		shift = wide->whole - fl_utf8_columns(cell);
	if (align == FL_ALIGN_POINT)
		shift = wide->before - before_point(cell);
	if (cell[0] == '\0')
		return;
	fl_text_pad_to(out, start + shift);
	fl_text_add(out, cell);
}

static fl_align head_align(fl_align align) {
	return align == FL_ALIGN_LEFT ? FL_ALIGN_LEFT : FL_ALIGN_RIGHT;
}

/* The heads of the chosen columns, or their units; a line that would be empty is left out. */
static void print_head(const fl_table *table, const width *wide, const int *chosen, const int *starts, int count,
                       bool units, fl_text *out) {
	bool any = false;
	for (int i = 0; i < count; i++) {
		const fl_table_column *column = &table->columns[chosen[i]];
		const char *text = units ? column->unit : column->head;
		any = any || text[0];
		print_cell(out, starts[i], head_align(column->align), &wide[chosen[i]], text);
	}
	fl_text_add(out, any ? "\n" : "");
}

/* Prints the chosen columns, `gap` apart. */
static void print_block(fl_table *table, const width *wide, const int *chosen, int count, int gap, fl_text *out) {
	int starts[FL_TABLE_COLUMNS], total = 0;
	for (int i = 0; i < count; i++) {
		starts[i] = total;
		total += wide[chosen[i]].whole + gap;
	}
	total -= gap;
	print_head(table, wide, chosen, starts, count, false, out);
	print_head(table, wide, chosen, starts, count, true, out);
	fl_report_rule(out, total);
	for (size_t row = 0; row < table->row_count; row++) {
		for (int i = 0; i < count; i++)
			print_cell(out, starts[i], table->columns[chosen[i]].align, &wide[chosen[i]],
			           fl_table_cell(table, row, chosen[i]));
		fl_text_add(out, "\n");
	}
}

/* Takes the key columns and as many of the others from *next on as fit; returns how many columns were chosen. */
static int choose(const fl_table *table, const width *wide, int limit, int *next, int *chosen, int *used) {
	int count = 0, taken = 0;
	*used = 0;
	for (int c = 0; c < table->column_count; c++)
		if (table->columns[c].key && !wide[c].empty) {
			chosen[count++] = c;
			*used += wide[c].whole;
		}
	for (; *next < table->column_count; (*next)++) {
		if (table->columns[*next].key || wide[*next].empty)
			continue;
		if (taken > 0 && *used + wide[*next].whole + count > limit) /* `count` gaps of one */
			break;
		chosen[count++] = *next;
		*used += wide[*next].whole;
		taken++;
	}
	return taken > 0 ? count : 0;
}

void fl_table_end(fl_table *table, int limit, fl_text *out) {
	width wide[FL_TABLE_COLUMNS];
	if (!table->cells)
		out->failed = true;
	for (int c = 0; c < table->column_count && table->cells; c++)
		wide[c] = measure(table, c);
	int next = 0, chosen[FL_TABLE_COLUMNS], used = 0, blocks = 0;
	while (table->cells && next < table->column_count) {
		int count = choose(table, wide, limit, &next, chosen, &used);
		if (count == 0)
			break;
		int gap = count > 1 ? (limit - used) / (count - 1) : 1;
		if (blocks++ > 0)
			fl_text_add(out, "\n");
		print_block(table, wide, chosen, count, gap > 3 ? 3 : gap < 1 ? 1 : gap, out);
	}
	fl_arena_free(&table->arena);
	*table = (fl_table){0};
}

/* ---- points: values and names ---- */

bool fl_report_has_budget(const fl_point_result *point) {
	return point->sum.coverage_factor > 0.0;
}

char *fl_report_point_name(const fl_case *one, int point, char out[FL_CELL_SIZE]) {
	const fl_session *session = &one->session;
	snprintf(out, FL_CELL_SIZE, "zero");
	if (point == FL_POINT_ZERO)
		return out;
	if (point >= 0 && (size_t)point < session->point_count && session->points[point].oil &&
	    session->points[point].oil[0])
		return fl_report_fit(session->points[point].oil, 16, out);
	if (point >= 0 && point < one->procedure.point_count)
		snprintf(out, FL_CELL_SIZE, "%g %% of span", one->procedure.points[point].position_pct_span);
	else
		snprintf(out, FL_CELL_SIZE, "point %d", point + 1);
	return out;
}

const char *fl_report_run_title(fl_run_kind kind) {
	return kind == FL_RUN_AS_FOUND ? "As-found" : "As-left";
}

const char *fl_report_dial_short(fl_dial_unit unit) {
	switch (unit) {
	case FL_DIAL_MM2_S:
		return "mm\u00b2/s";
	case FL_DIAL_MPA_S:
		return "mPa\u00b7s";
	case FL_DIAL_REDWOOD:
	case FL_DIAL_SAYBOLT:
		return "s";
	}
	return "";
}
