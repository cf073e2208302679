/* check.c - the item as far as it was asked, read by the reader of the files: which error concerns what was asked?
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "shelf_private.h"

/* Order in which questions are asked; rows of a table one after the other. */
static long order_of(const fl_shelf *shelf, size_t question, size_t row) {
	size_t first = question;
	if (!fl_shelf_in_rows(shelf, question))
		return (long)question * 1000000;
	while (first > 0 && fl_shelf_in_rows(shelf, first - 1))
		first--;
	return (long)first * 1000000 + (long)row * 1000 + (long)(question - first);
}

/* "oils[1].table[2].nu" -> group "table", row 1, key "nu"; "oils[1].geometry.bore"; "oils[1].lot". */
static bool find_question(const fl_shelf *shelf, const char *field, size_t *question, size_t *row) {
	char path[96], *rest, *key;
	snprintf(path, sizeof path, "%s", field);
	rest = strstr(path, "].");
	if (!rest)
		return false;
	rest += 2;
	const char *group = "";
	*row = 0;
	key = rest;
	char *bracket = strchr(rest, '['), *dot = strchr(rest, '.');
	if (bracket) {
		*row = strtoul(bracket + 1, NULL, 10) - 1;
		*bracket = '\0';
		group = rest;
		dot = strstr(bracket + 1, "].");
		key = dot ? dot + 2 : bracket + 1;
	} else if (dot) {
		*dot = '\0';
		group = rest;
		key = dot + 1;
	}
	for (size_t q = 0; fl_shelf_question_at(shelf, q); q++) {
		const fl_shelf_question *one = fl_shelf_question_at(shelf, q);
		if (strcmp(one->group, group) == 0 && strcmp(one->key, key) == 0) {
			*question = q;
			return true;
		}
	}
	return false;
}

static void write_document(const fl_shelf *shelf, bool filled, fl_text *out) {
	fl_text item = {0};
	if (filled)
		fl_shelf_write_filled(shelf, &item);
	else
		fl_shelf_write(shelf, &item);
	fl_text_printf(out, "%s:\n", shelf->form->list);
	const char *lead = "  - ";
	for (const char *line = item.data; line && *line;) {
		size_t length = strcspn(line, "\n");
		fl_text_printf(out, "%s%.*s\n", lead, (int)length, line);
		line += length + (line[length] == '\n');
		lead = "    ";
	}
	out->failed |= item.failed;
	fl_text_free(&item);
}

/* The error again, with the question's name in place of the file's. */
static fl_status tell(const fl_shelf *shelf, fl_status status, const fl_error *inner, bool known, size_t question,
                      size_t row, fl_error *err) {
	char field[96] = "";
	if (known && fl_shelf_in_rows(shelf, question))
		snprintf(field, sizeof field, "row %zu, %s", row + 1, fl_shelf_question_at(shelf, question)->key);
	else if (known)
		snprintf(field, sizeof field, "%s", fl_shelf_question_at(shelf, question)->key);
	return fl_fail_at(err, status, (fl_place){.field = *field ? field : NULL}, "%s", inner->message);
}

/* Reads the item; `first_row`: number of the row that is written as the first. */
static fl_status read_item(const fl_shelf *shelf, bool filled, size_t first_row, bool done, fl_shelf_place *concerned,
                           fl_error *err) {
	fl_text text = {0};
	fl_stock scratch = {0};
	fl_error inner = {0};
	write_document(shelf, filled, &text);
	fl_status status = text.failed || !text.data ? fl_fail(&inner, FL_E_MEMORY, "out of memory")
	                                             : fl_stock_parse(&scratch, text.data, "answers", &inner);
	fl_text_free(&text);
	fl_stock_free(&scratch);
	if (status >= 0)
		return FL_OK;
	if (status == FL_E_MEMORY)
		return fl_fail(err, status, "out of memory");
	size_t question = 0, row = 0;
	bool known = find_question(shelf, inner.field, &question, &row);
	row += known && fl_shelf_in_rows(shelf, question) ? first_row : 0;
	bool later = !known || order_of(shelf, question, row) > order_of(shelf, shelf->at.question, shelf->at.row);
	if (later && !done)
		return FL_OK;
	if (known)
		*concerned = (fl_shelf_place){question, row};
	return tell(shelf, status, &inner, known, question, row, err);
}

fl_status fl_shelf_check(const fl_shelf *shelf, bool done, fl_shelf_place *concerned, fl_error *err) {
	size_t rows = fl_shelf_rows_of(shelf);
	if (!done && shelf->kind == FL_SHELF_OIL && fl_shelf_in_rows(shelf, shelf->at.question) && rows > 0) {
		fl_status status = read_item(shelf, true, rows > 2 ? rows - 2 : 0, false, concerned, err);
		if (status < 0)
			return status;
	}
	return read_item(shelf, false, 0, done, concerned, err);
}
