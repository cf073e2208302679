/* write.c - the answers as an item of a stock file.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "shelf_private.h"

/* ---- scalars ----------------------------------------------------------------------------------------------------- */

/* May the text stand without quotes? Those who can't be sure quote. */
static bool is_plain(const char *text, bool in_braces) {
	size_t length = strlen(text);
	if (length == 0 || strchr(" -?:,[]{}#&*!|>'\"%@`~", text[0]) || text[length - 1] == ':' || text[length - 1] == ' ')
		return text[0] == '-' && text[1] >= '0' && text[1] <= '9' && !strpbrk(text, ",:#[]{}"); /* a number */
	return !strstr(text, ": ") && !strstr(text, " #") && !(in_braces && strpbrk(text, ",[]{}"));
}

void fl_shelf_scalar(const char *text, bool in_braces, fl_text *out) {
	if (is_plain(text, in_braces)) {
		fl_text_add(out, text);
		return;
	}
	fl_text_add(out, "\"");
	for (const char *c = text; *c; c++) {
		if (*c == '"' || *c == '\\')
			fl_text_add(out, "\\");
		fl_text_append(out, c, 1);
	}
	fl_text_add(out, "\"");
}

/* Whatever stood in the old item, in one line. */
static void write_node(const fl_node *node, fl_text *out) {
	if (node->kind == FL_NODE_SCALAR) {
		fl_shelf_scalar(node->text, true, out);
		return;
	}
	bool map = node->kind == FL_NODE_MAP;
	fl_text_add(out, map ? "{" : "[");
	for (size_t i = 0; i < node->count; i++) {
		fl_text_add(out, i ? ", " : "");
		if (map)
			fl_text_printf(out, "%s: ", node->keys[i]);
		write_node(node->items[i], out);
	}
	fl_text_add(out, map ? "}" : "]");
}

/* ---- groups ------------------------------------------------------------------------------------------------------ */

/* What counts for this question and row: the answer on the path, or what a renewed item is known by. */
static const char *counts(const fl_shelf *shelf, size_t question, size_t row) {
	if (fl_shelf_was_asked(shelf, question, row))
		return shelf->answers[question][row];
	return shelf->old && fl_shelf_question_at(shelf, question)->when == FL_ASK_NEW ? fl_shelf_old(shelf, question, 0)
	                                                                               : NULL;
}

/* Thinner, lighter and hotter than any reference oil: it fits behind every row. */
#define FILLING_ROW "  - {at: 199.9 °C, nu: 0.31 mm²/s, U: 0.1 %, density: 600.1 kg/m³, U density: 0.1 kg/m³}\n"

static const char *filling(const char *key) {
	static const char *const values[][2] = {
	    {"nu", "0.31 mm²/s"}, {"U", "0.1 %"}, {"density", "600.1 kg/m³"}, {"U density", "0.1 kg/m³"}};
	for (size_t i = 0; i < sizeof values / sizeof *values; i++)
		if (strcmp(values[i][0], key) == 0)
			return values[i][1];
	return NULL;
}

static void write_row(const fl_shelf *shelf, size_t first, size_t row, bool filled, fl_text *out) {
	bool begun = false;
	for (size_t q = first; fl_shelf_question_at(shelf, q) && fl_shelf_in_rows(shelf, q); q++) {
		const char *answer = counts(shelf, q, row);
		if (!answer && filled)
			answer = filling(fl_shelf_question_at(shelf, q)->key);
		if (!answer)
			continue;
		fl_text_printf(out, "%s%s: ", begun ? ", " : "  - {", fl_shelf_question_at(shelf, q)->key);
		fl_shelf_scalar(answer, true, out);
		begun = true;
	}
	if (begun)
		fl_text_add(out, "}\n");
}

static void write_rows(const fl_shelf *shelf, size_t first, bool filled, fl_text *out) {
	size_t rows = fl_shelf_rows_of(shelf);
	if (rows > 0)
		fl_text_printf(out, "%s:\n", shelf->form->rows);
	for (size_t row = filled && rows > 2 ? rows - 2 : 0; row < rows; row++)
		write_row(shelf, first, row, filled, out);
	if (filled && rows == 1)
		fl_text_add(out, FILLING_ROW);
}

static bool is_asked_for(const fl_shelf *shelf, const char *group, const char *key) {
	for (size_t q = 0; fl_shelf_question_at(shelf, q); q++) {
		const fl_shelf_question *one = fl_shelf_question_at(shelf, q);
		if (strcmp(one->group, group) == 0 && strcmp(one->key, key) == 0)
			return true;
		if (!*group && *one->group && strcmp(one->group, key) == 0)
			return true;
	}
	return false;
}

/* Fields of the old item that no question asks: they stay as they were. */
static void write_carried(const fl_shelf *shelf, const char *group, const char *indent, fl_text *out) {
	const fl_node *map = !shelf->old ? NULL : *group ? fl_node_get(shelf->old, group) : shelf->old;
	for (size_t i = 0; map && map->kind == FL_NODE_MAP && i < map->count; i++) {
		if (is_asked_for(shelf, group, map->keys[i]))
			continue;
		fl_text_printf(out, "%s%s: ", indent, map->keys[i]);
		write_node(map->items[i], out);
		fl_text_add(out, "\n");
	}
}

static void write_item(const fl_shelf *shelf, bool filled, fl_text *out) {
	const char *group = "";
	for (size_t q = 0; fl_shelf_question_at(shelf, q); q++) {
		const fl_shelf_question *one = fl_shelf_question_at(shelf, q);
		bool begins = strcmp(group, one->group) != 0;
		if (fl_shelf_in_rows(shelf, q)) {
			if (begins)
				write_rows(shelf, q, filled, out);
			group = one->group;
			continue;
		}
		const char *answer = counts(shelf, q, 0);
		if (!answer)
			continue;
		if (begins && *one->group) {
			fl_text_printf(out, "%s:\n", one->group);
			write_carried(shelf, one->group, "  ", out);
		}
		group = one->group;
		fl_text_printf(out, "%s%s: ", *group ? "  " : "", one->key);
		fl_shelf_scalar(answer, false, out);
		fl_text_add(out, "\n");
	}
	write_carried(shelf, "", "", out);
}

void fl_shelf_write(const fl_shelf *shelf, fl_text *out) {
	write_item(shelf, false, out);
}

void fl_shelf_write_filled(const fl_shelf *shelf, fl_text *out) {
	write_item(shelf, true, out);
}
