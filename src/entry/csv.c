/* csv.c - tables as text, RFC 4180.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "csv.h"

#include <string.h>

typedef struct reader {
	fl_arena *arena;
	const char *at, *file;
	int line;
	fl_error *err;
} reader;

static fl_status fail_here(reader *r, fl_status status, const char *message) {
	return fl_fail_at(r->err, status, (fl_place){.file = r->file, .line = r->line}, "%s", message);
}

static bool ends_cell(const char *at) {
	return *at == ',' || *at == '\n' || *at == '\0' || (*at == '\r' && (at[1] == '\n' || at[1] == '\0'));
}

/* A cell in quotes; r->at is behind the opening one. */
static fl_status quoted_cell(reader *r, char *to) {
	for (int opened = r->line;; r->at++) {
		if (*r->at == '\0') {
			r->line = opened;
			return fail_here(r, FL_E_SYNTAX, "a quote is opened and not closed");
		}
		if (*r->at == '"' && *++r->at != '"')
			break;
		r->line += *r->at == '\n';
		*to++ = *r->at;
	}
	return ends_cell(r->at) ? FL_OK : fail_here(r, FL_E_SYNTAX, "text stands behind a closing quote");
}

/* Bytes up to the quote that closes the cell: enough for its text. */
static size_t quoted_length(const char *at) {
	size_t length = 1;
	while (at[length] && (at[length] != '"' || at[length + 1] == '"'))
		length += at[length] == '"' ? 2 : 1;
	return length;
}

static fl_status read_cell(reader *r, const char **cell) {
	bool quoted = *r->at == '"';
	size_t most = quoted ? quoted_length(r->at) : strcspn(r->at, ",\r\n");
	char *copy = fl_arena_alloc(r->arena, most + 1, 1);
	if (!copy)
		return fl_fail(r->err, FL_E_MEMORY, "out of memory for %s", r->file);
	*cell = copy;
	if (quoted) {
		r->at++;
		return quoted_cell(r, copy);
	}
	memcpy(copy, r->at, most);
	if (memchr(copy, '"', most))
		return fail_here(r, FL_E_SYNTAX, "a quote inside a cell that does not begin with one");
	r->at += most;
	return ends_cell(r->at) ? FL_OK : fail_here(r, FL_E_SYNTAX, "a carriage return inside a cell");
}

static fl_status read_row(reader *r, fl_csv_row *row) {
	size_t capacity = 0;
	*row = (fl_csv_row){.line = r->line};
	for (;;) {
		const char **grown = fl_arena_grow(r->arena, row->cells, row->count, &capacity, sizeof *row->cells);
		if (!grown)
			return fl_fail(r->err, FL_E_MEMORY, "out of memory for %s", r->file);
		row->cells = grown;
		fl_status status = read_cell(r, &row->cells[row->count]);
		if (status < 0)
			return status;
		row->count++;
		if (*r->at != ',')
			break;
		r->at++;
	}
	r->at += *r->at == '\r';
	r->line += *r->at == '\n';
	r->at += *r->at == '\n';
	return FL_OK;
}

static fl_status check_row(const fl_csv *csv, const fl_csv_row *row, fl_error *err) {
	if (row->count == csv->column_count)
		return FL_OK;
	return fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = csv->file, .line = row->line},
	                  "the row has %zu cells and the header names %zu columns", row->count, csv->column_count);
}

static fl_status check_header(const fl_csv *csv, fl_error *err) {
	for (size_t i = 0; i < csv->column_count; i++)
		for (size_t j = 0; j < i; j++)
			if (strcmp(csv->names[i], csv->names[j]) == 0)
				return fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = csv->file, .line = 1},
				                  "the column \"%.60s\" stands twice in the header", csv->names[i]);
	return FL_OK;
}

fl_status fl_csv_parse(fl_arena *arena, const char *text, const char *file, fl_csv *out, fl_error *err) {
	reader r = {.arena = arena, .at = text, .file = file, .line = 1, .err = err};
	size_t capacity = 0;
	fl_csv_row row;
	*out = (fl_csv){.file = file};
	if (!fl_utf8_valid(text, strlen(text)))
		return fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = file}, "the file is not UTF-8 text");
	if (strncmp(r.at, "\xef\xbb\xbf", 3) == 0)
		r.at += 3;
	fl_status status = FL_OK;
	while (status >= 0 && *r.at) {
		status = read_row(&r, &row);
		if (status < 0 || (row.count == 1 && row.cells[0][0] == '\0'))
			continue;
		if (!out->names) {
			out->names = row.cells;
			out->column_count = row.count;
			status = check_header(out, err);
			continue;
		}
		status = check_row(out, &row, err);
		fl_csv_row *grown = fl_arena_grow(arena, out->rows, out->row_count, &capacity, sizeof row);
		if (!grown)
			return fl_fail(err, FL_E_MEMORY, "out of memory for %s", file);
		out->rows = grown;
		out->rows[out->row_count++] = row;
	}
	if (status >= 0 && out->row_count == 0)
		return fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = file}, "the file has no row of readings below a header");
	return status;
}

size_t fl_csv_column(const fl_csv *csv, const char *name) {
	for (size_t i = 0; i < csv->column_count; i++)
		if (strcmp(csv->names[i], name) == 0)
			return i;
	return SIZE_MAX;
}
