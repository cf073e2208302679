/* csv.h - tables as text, RFC 4180.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_ENTRY_CSV_H
#define FOUNDLEFT_ENTRY_CSV_H

#include "foundleft/base.h"

typedef struct fl_csv_row {
	int line; /* of the file, where the row begins */
	const char **cells;
	size_t count;
} fl_csv_row;

typedef struct fl_csv {
	const char *file;
	const char **names; /* of the columns */
	size_t column_count;
	fl_csv_row *rows; /* without the header */
	size_t row_count;
} fl_csv;

/* Splits `text` into rows of as many cells as the header has. LF and CRLF; cells in quotes may hold commas, quotes
 * (doubled) and line ends; empty lines are passed over. All in `arena`. */
fl_status fl_csv_parse(fl_arena *arena, const char *text, const char *file, fl_csv *out, fl_error *err) FL_MUST_USE;
/* Index of the column, or SIZE_MAX. */
size_t fl_csv_column(const fl_csv *csv, const char *name);

#endif
