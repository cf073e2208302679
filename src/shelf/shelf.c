/* shelf.c - the conversation: one question after another, each answer checked at once.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The path holds the questions that were asked, in order; an answer counts while its question is on the path. `back`
 * takes the last one off the path and keeps its answer as what is proposed again. */
#include "shelf_private.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* ---- looking at the state ---------------------------------------------------------------------------------------- */

const fl_shelf_question *fl_shelf_question_at(const fl_shelf *shelf, size_t question) {
	const fl_shelf_question *one = &shelf->form->questions[question];
	return one->key ? one : NULL;
}

bool fl_shelf_in_rows(const fl_shelf *shelf, size_t question) {
	const fl_shelf_question *one = fl_shelf_question_at(shelf, question);
	return one && *one->group && strcmp(one->group, shelf->form->rows) == 0;
}

bool fl_shelf_was_asked(const fl_shelf *shelf, size_t question, size_t row) {
	for (size_t i = 0; i < shelf->length; i++)
		if (shelf->path[i].question == question && shelf->path[i].row == row)
			return true;
	return false;
}

/* Begun rows. */
size_t fl_shelf_rows_of(const fl_shelf *shelf) {
	size_t rows = 0;
	for (size_t i = 0; i < shelf->length; i++) {
		const fl_shelf_place *at = &shelf->path[i];
		if (fl_shelf_in_rows(shelf, at->question) && shelf->answers[at->question][at->row] && at->row + 1 > rows)
			rows = at->row + 1;
	}
	return rows;
}

static const char *scalar_of(const fl_node *map, const char *key) {
	const fl_node *node = map ? fl_node_get(map, key) : NULL;
	return node && node->kind == FL_NODE_SCALAR ? node->text : NULL;
}

const char *fl_shelf_old(const fl_shelf *shelf, size_t question, size_t row) {
	const fl_shelf_question *one = fl_shelf_question_at(shelf, question);
	if (!shelf->old)
		return NULL;
	if (!*one->group)
		return scalar_of(shelf->old, one->key);
	const fl_node *group = fl_node_get(shelf->old, one->group);
	if (!fl_shelf_in_rows(shelf, question))
		return scalar_of(group, one->key);
	return group && row < group->count ? scalar_of(group->items[row], one->key) : NULL;
}

const char *fl_shelf_answer(const fl_shelf *shelf, const char *key) {
	for (size_t q = 0; fl_shelf_question_at(shelf, q); q++) {
		const fl_shelf_question *one = fl_shelf_question_at(shelf, q);
		if (strcmp(one->key, key) != 0)
			continue;
		if (fl_shelf_was_asked(shelf, q, 0))
			return shelf->answers[q][0];
		return one->when == FL_ASK_NEW ? fl_shelf_old(shelf, q, 0) : NULL;
	}
	return NULL;
}

/* The unit in "0 to 50 mm²/s"; "" without. */
static const char *unit_of_span(const char *span) {
	const char *to = span ? strstr(span, " to ") : NULL;
	if (!to)
		return "";
	to += 4;
	to += strspn(to, " +-0123456789.,");
	return to;
}

static bool dial_is_in(const fl_shelf *shelf, fl_unit unit) {
	fl_unit found;
	const char *text = unit_of_span(fl_shelf_answer(shelf, "dial"));
	return *text && fl_unit_parse(text, &found, NULL) >= 0 && found == unit;
}

static bool applies(const fl_shelf *shelf, size_t question) {
	const fl_shelf_question *one = fl_shelf_question_at(shelf, question);
	const char *role = fl_shelf_answer(shelf, "role");
	if (strcmp(one->group, "geometry") == 0 && strcmp(one->key, "bore") != 0 && !fl_shelf_answer(shelf, "bore"))
		return false;
	switch (one->when) {
	case FL_ASK_NEW:
		return !shelf->old;
	case FL_ASK_RENEWED:
		return shelf->old != NULL;
	case FL_ASK_BATH:
		return role && strcmp(role, "bath") == 0;
	case FL_ASK_NO_BATH:
		return !role || strcmp(role, "bath") != 0;
	case FL_ASK_DENSITY_DIAL:
		return !dial_is_in(shelf, FL_U_MPA_S);
	case FL_ASK_SAYBOLT:
		return dial_is_in(shelf, FL_U_SAYBOLT_S);
	case FL_ASK_ALWAYS:
		break;
	}
	return true;
}

/* What an empty line takes; NULL for nothing. */
static const char *proposed(const fl_shelf *shelf) {
	size_t question = shelf->at.question, row = shelf->at.row;
	const fl_shelf_question *one = fl_shelf_question_at(shelf, question);
	if (shelf->answers[question][row])
		return shelf->answers[question][row];
	if (one->carried && row > 0)
		return shelf->answers[question][row - 1];
	return one->fresh ? NULL : fl_shelf_old(shelf, question, row);
}

/* ---- going on and back ------------------------------------------------------------------------------------------- */

static size_t behind_rows(const fl_shelf *shelf, size_t question) {
	while (fl_shelf_in_rows(shelf, question))
		question++;
	return question;
}

static bool begins_row(const fl_shelf *shelf, size_t question) {
	return fl_shelf_in_rows(shelf, question) && (question == 0 || !fl_shelf_in_rows(shelf, question - 1));
}

static void go_to(fl_shelf *shelf, size_t question, size_t row) {
	while (fl_shelf_question_at(shelf, question) && !applies(shelf, question))
		question++;
	shelf->at = (fl_shelf_place){question, fl_shelf_in_rows(shelf, question) ? row : 0};
	shelf->confirming = fl_shelf_question_at(shelf, question) == NULL;
}

/* From the question that was answered to the next. `ended`: the table is. */
static void go_on(fl_shelf *shelf, bool ended) {
	size_t question = shelf->at.question, row = shelf->at.row, next = question + 1;
	if (!fl_shelf_in_rows(shelf, question)) {
		go_to(shelf, next, 0);
	} else if (ended) {
		go_to(shelf, behind_rows(shelf, question), 0);
	} else if (fl_shelf_in_rows(shelf, next)) {
		go_to(shelf, next, row);
	} else {
		while (!begins_row(shelf, question))
			question--;
		if (row + 1 < FL_SHELF_ROWS)
			go_to(shelf, question, row + 1);
		else
			go_to(shelf, next, 0);
	}
}

static fl_status go_back(fl_shelf *shelf, const char *name, fl_error *err) {
	if (shelf->length == 0)
		return fl_fail(err, FL_E_STATE, "this is the first question: there is nothing to go back to");
	if (*name) {
		size_t i = shelf->length;
		while (i > 0 && strcmp(fl_shelf_question_at(shelf, shelf->path[i - 1].question)->key, name) != 0)
			i--;
		if (i == 0)
			return fl_fail(err, FL_E_VALUE, "\"%.60s\" was not asked yet: name a field as show writes it", name);
		shelf->length = i;
	}
	shelf->at = shelf->path[--shelf->length];
	shelf->confirming = false;
	return FL_OK;
}

/* ---- an answer --------------------------------------------------------------------------------------------------- */

/* Digits and marks only: the unit is still missing. */
static bool is_bare(const char *text) {
	return *text && text[strspn(text, "+-0123456789.,")] == '\0';
}

/* A decimal comma becomes a point, unless it could mean thousands: then the reader asks. */
static void point_for_comma(char *text) {
	char *comma = strchr(text, ',');
	if (!comma || strchr(text, '.') || strchr(comma + 1, ','))
		return;
	size_t digits = strspn(comma + 1, "0123456789");
	if (comma > text && comma[-1] >= '0' && comma[-1] <= '9' && digits > 0 && digits != 3)
		*comma = '.';
}

static const char *unit_for(const fl_shelf *shelf, const fl_shelf_question *one) {
	if (one->unit[0] != '@')
		return one->unit;
	bool dial = strcmp(one->unit, "@dial") == 0;
	const char *unit = unit_of_span(fl_shelf_answer(shelf, dial ? "dial" : "range"));
	fl_unit parsed;
	bool thermal = fl_unit_parse(unit, &parsed, NULL) >= 0 && parsed == FL_U_CELSIUS;
	return thermal && strcmp(one->unit, "@range") == 0 ? "K" : unit;
}

/* The answer as it goes into the file. */
static const char *as_written(fl_shelf *shelf, const fl_shelf_question *one, const char *line) {
	char text[FL_SHELF_LINE];
	bool number = *one->unit || strcmp(one->key, "k") == 0 || strcmp(one->key, "gear ratio") == 0;
	snprintf(text, sizeof text, "%s", line);
	if (!number)
		return fl_arena_strdup(&shelf->arena, text);
	point_for_comma(text);
	const char *unit = unit_for(shelf, one);
	return is_bare(text) && *unit ? fl_arena_printf(&shelf->arena, "%s %s", text, unit)
	                              : fl_arena_strdup(&shelf->arena, text);
}

/* What the files' reader can't see in one item: that the name is new, the day later, the serial nobody else's. */
static fl_status check_beside_others(const fl_shelf *shelf, const fl_shelf_question *one, const char *text,
                                     fl_error *err) {
	char day_text[FL_DAY_SIZE];
	fl_day day;
	fl_place place = {.field = one->key};
	const fl_stock *stock = shelf->stock;
	bool known = (shelf->kind == FL_SHELF_OIL && fl_stock_oil(stock, text)) ||
	             (shelf->kind == FL_SHELF_EQUIPMENT && fl_stock_equipment(stock, text)) ||
	             (shelf->kind == FL_SHELF_INSTRUMENT && fl_stock_instrument(stock, text));
	if (strcmp(one->key, shelf->form->name_key) == 0 && known)
		return fl_fail_at(err, FL_E_EXISTS, place, "%.60s is in stock already: foundleft stock renew %.60s", text,
		                  text);
	if (strcmp(one->key, "serial") == 0)
		for (size_t i = 0; i < stock->instrument_count; i++) {
			const char *tag = fl_shelf_name(shelf);
			if (strcmp(stock->instruments[i].serial, text) == 0 && strcmp(stock->instruments[i].tag, tag) != 0)
				return fl_fail_at(err, FL_E_EXISTS, place,
				                  "serial %.60s belongs to instrument %s already: look at both maker's plates", text,
				                  stock->instruments[i].tag);
		}
	if (shelf->old && strcmp(one->key, shelf->form->day_key) == 0 && fl_day_parse(text, &day, NULL) >= 0 &&
	    shelf->old_day != FL_NO_DAY && day <= shelf->old_day)
		return fl_fail_at(err, FL_E_VALUE, place, "what is in stock is of %s already: the new one has to be later",
		                  fl_day_format(shelf->old_day, day_text));
	return FL_OK;
}

static bool same_place(fl_shelf_place a, fl_shelf_place b) {
	return a.question == b.question && a.row == b.row;
}

/* Goes back to the question that an error concerns; what was answered since is proposed again. */
static void go_to_concerned(fl_shelf *shelf, fl_shelf_place concerned) {
	for (size_t i = 0; i < shelf->length; i++)
		if (same_place(shelf->path[i], concerned)) {
			shelf->length = i;
			shelf->at = concerned;
			shelf->confirming = false;
			return;
		}
}

/* Takes `text` (NULL: left out) at the question that is asked, if the item is fine with it as far as it goes. */
static fl_status take(fl_shelf *shelf, const char *text, bool ended, fl_error *err) {
	const char **slot = &shelf->answers[shelf->at.question][shelf->at.row], *before = *slot;
	fl_shelf_place at = shelf->at, concerned = at;
	if (shelf->length == sizeof shelf->path / sizeof shelf->path[0])
		return fl_fail(err, FL_E_RANGE, "more rows are not possible");
	*slot = text;
	shelf->path[shelf->length++] = at;
	fl_status status = fl_shelf_check(shelf, false, &concerned, err);
	if (status >= 0) {
		go_on(shelf, ended);
		if (!shelf->confirming)
			return status;
		shelf->at = at;
		status = fl_shelf_check(shelf, true, &concerned, err);
		go_on(shelf, ended);
	}
	if (status >= 0)
		return status;
	shelf->at = at;
	shelf->confirming = false;
	shelf->length--;
	if (same_place(concerned, at))
		*slot = before;
	else
		go_to_concerned(shelf, concerned);
	return status;
}

static fl_status answer(fl_shelf *shelf, const char *line, fl_error *err) {
	const fl_shelf_question *one = fl_shelf_question_at(shelf, shelf->at.question);
	bool none = strcmp(line, "-") == 0;
	const char *taken = *line || none ? line : proposed(shelf);
	fl_place place = {.field = one->key};
	if (none || !taken) {
		if (begins_row(shelf, shelf->at.question)) {
			if (shelf->at.row < shelf->form->least_rows)
				return fl_fail_at(err, FL_E_VALUE, place,
				                  "one certified temperature gives no line to the bath's: at least %zu rows are needed",
				                  shelf->form->least_rows);
			return take(shelf, NULL, true, err);
		}
		return one->required ? fl_fail_at(err, FL_E_VALUE, place, "this is needed: ? says what is meant")
		                     : take(shelf, NULL, false, err);
	}
	const char *text = as_written(shelf, one, taken);
	if (!text)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	fl_status status = check_beside_others(shelf, one, text, err);
	return status < 0 ? status : take(shelf, text, false, err);
}

static fl_status confirm(fl_shelf *shelf, const char *line, fl_text *say, fl_error *err) {
	if (strcmp(line, "yes") == 0) {
		shelf->finished = shelf->agreed = true;
	} else if (strcmp(line, "no") == 0) {
		fl_text_add(say, "  Nothing is written. back goes to the last question, back NAME to another; stop leaves.\n");
	} else {
		return fl_fail(err, FL_E_VALUE, "type yes or no");
	}
	return FL_OK;
}

/* ---- commands ---------------------------------------------------------------------------------------------------- */

static void show(fl_shelf *shelf, fl_text *say) {
	const char *block = fl_shelf_block(shelf);
	fl_text_add(say, *block ? "" : "  Nothing yet.\n");
	for (const char *line = block; *line;) {
		size_t length = strcspn(line, "\n");
		fl_text_printf(say, "    %.*s\n", (int)length, line);
		line += length + (line[length] == '\n');
	}
}

static void help(const fl_shelf *shelf, fl_text *say) {
	const fl_shelf_question *one = fl_shelf_question_at(shelf, shelf->at.question);
	if (one && *one->help)
		fl_text_printf(say, "  %s\n", one->help);
	if (one && !one->required)
		fl_text_add(say, "  May be left out: an empty line, or - where something stands in brackets.\n");
	fl_text_add(say, "  back: the question before; back NAME: that one; show: what stands so far; stop: leave, write "
	                 "nothing.\n");
}

static bool command(fl_shelf *shelf, const char *line, fl_text *say, fl_status *status, fl_error *err) {
	*status = FL_OK;
	if (strcmp(line, "?") == 0)
		help(shelf, say);
	else if (strcmp(line, "show") == 0)
		show(shelf, say);
	else if (strcmp(line, "stop") == 0)
		shelf->finished = true;
	else if (strcmp(line, "back") == 0 || strncmp(line, "back ", 5) == 0)
		*status = go_back(shelf, line[4] ? line + 5 : "", err);
	else
		return false;
	return true;
}

static fl_status tidy(const char *line, char *out, size_t size, fl_error *err) {
	if (strlen(line) >= size)
		return fl_fail(err, FL_E_RANGE, "the line has %zu bytes: at most %zu are read", strlen(line), size - 1);
	if (!fl_utf8_valid(line, strlen(line)))
		return fl_fail(err, FL_E_SYNTAX, "the line is not UTF-8 text: type it again");
	char spaced[FL_SHELF_LINE];
	snprintf(spaced, sizeof spaced, "%s", line);
	for (char *at = spaced; (at = strpbrk(at, "\t\r")) != NULL;)
		*at = ' ';
	if (fl_text_has_control(spaced))
		return fl_fail(err, FL_E_SYNTAX, "the line has control characters in it: type it again");
	return fl_text_trim(spaced, out, size) ? FL_OK : fl_fail(err, FL_E_RANGE, "the line is too long");
}

fl_status fl_shelf_line(fl_shelf *shelf, const char *line, fl_text *say, fl_error *err) {
	char clean[FL_SHELF_LINE];
	fl_status status = tidy(line, clean, sizeof clean, err);
	if (status < 0)
		return status;
	if (!command(shelf, clean, say, &status, err))
		status = shelf->confirming ? confirm(shelf, clean, say, err) : answer(shelf, clean, err);
	return say->failed ? fl_fail(err, FL_E_MEMORY, "out of memory for the answer") : status;
}

/* ---- the prompt -------------------------------------------------------------------------------------------------- */

static void heading(const fl_shelf *shelf, fl_text *out) {
	static const char *const titles[FL_SHELF_KINDS][2] = {
	    {"A new lot of reference oil", "A new certificate of lot"},
	    {"A new measuring equipment", "A new certificate of"},
	    {"A new instrument", "A new description of"},
	};
	fl_text_printf(out, "%s", titles[shelf->kind][shelf->old != NULL]);
	if (shelf->old)
		fl_text_printf(out, " %s", fl_shelf_name(shelf));
	fl_text_add(out,
	            ". Copy from the certificate or the plate. An empty line takes what stands in [brackets]; ? helps, "
	            "back goes back, stop leaves without writing.\n");
}

void fl_shelf_prompt(fl_shelf *shelf, fl_text *out) {
	if (!shelf->shown)
		heading(shelf, out);
	shelf->shown = true;
	if (shelf->confirming) {
		show(shelf, out);
		fl_text_add(out, "Put this into stock, yes or no > ");
		return;
	}
	const fl_shelf_question *one = fl_shelf_question_at(shelf, shelf->at.question);
	const char *unit = unit_for(shelf, one), *offer = proposed(shelf);
	if (fl_shelf_in_rows(shelf, shelf->at.question))
		fl_text_printf(out, "Row %zu: ", shelf->at.row + 1);
	fl_text_add(out, one->ask);
	if (*unit && !strstr(one->ask, " with unit"))
		fl_text_printf(out, " (%s)", unit);
	if (offer)
		fl_text_printf(out, " [%s]", offer);
	else if (begins_row(shelf, shelf->at.question) && shelf->at.row >= shelf->form->least_rows)
		fl_text_add(out, " [no more]");
	fl_text_add(out, " > ");
}

/* ---- beginning and end ------------------------------------------------------------------------------------------- */

static fl_status begin(fl_shelf **out, fl_shelf_kind kind, const fl_stock *stock, fl_error *err) {
	fl_shelf *shelf = calloc(1, sizeof *shelf);
	if (!shelf)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the conversation");
	shelf->kind = kind;
	shelf->form = &fl_shelf_forms[kind];
	shelf->stock = stock;
	shelf->old_day = FL_NO_DAY;
	*out = shelf;
	return FL_OK;
}

fl_status fl_shelf_add(fl_shelf **out, fl_shelf_kind kind, const fl_stock *stock, fl_error *err) {
	fl_status status = begin(out, kind, stock, err);
	if (status >= 0)
		go_to(*out, 0, 0);
	return status;
}

/* The newest item of that name: its text and day. */
static bool find(const fl_stock *stock, const char *name, fl_shelf_kind kind, const char **text, fl_day *day) {
	const fl_oil *oil = kind == FL_SHELF_OIL ? fl_stock_oil(stock, name) : NULL;
	const fl_equipment *item = kind == FL_SHELF_EQUIPMENT ? fl_stock_equipment(stock, name) : NULL;
	const fl_instrument *instrument = kind == FL_SHELF_INSTRUMENT ? fl_stock_instrument(stock, name) : NULL;
	*text = oil ? oil->text : item ? item->text : instrument ? instrument->text : NULL;
	*day = oil ? oil->certified_on : item ? item->calibrated_on : instrument ? instrument->since : FL_NO_DAY;
	return *text != NULL;
}

fl_status fl_shelf_renew(fl_shelf **out, const char *name, const fl_stock *stock, fl_error *err) {
	const char *text = NULL, *found_text = NULL;
	fl_shelf_kind found = FL_SHELF_KINDS;
	fl_day day, found_day = FL_NO_DAY;
	for (int kind = 0; kind < FL_SHELF_KINDS; kind++)
		if (find(stock, name, (fl_shelf_kind)kind, &text, &day)) {
			if (found != FL_SHELF_KINDS)
				return fl_fail(err, FL_E_VALUE, "%.60s is the name of an %s and of an %s: rename one", name,
				               fl_shelf_kind_word(found), fl_shelf_kind_word((fl_shelf_kind)kind));
			found = (fl_shelf_kind)kind;
			found_text = text;
			found_day = day;
		}
	if (found == FL_SHELF_KINDS)
		return fl_fail(err, FL_E_NOT_FOUND,
		               "there is no lot, equipment or instrument `%.60s` in stock: foundleft stock "
		               "list shows what there is",
		               name);
	fl_status status = begin(out, found, stock, err);
	if (status < 0)
		return status;
	status = fl_document_parse(&(*out)->arena, found_text, name, &(*out)->old, err);
	if (status < 0) {
		fl_shelf_free(*out);
		return status;
	}
	(*out)->old_day = found_day;
	go_to(*out, 0, 0);
	return FL_OK;
}

void fl_shelf_free(fl_shelf *shelf) {
	if (!shelf)
		return;
	fl_text_free(&shelf->block);
	fl_arena_free(&shelf->arena);
	free(shelf);
}

fl_shelf_kind fl_shelf_kind_of(const fl_shelf *shelf) {
	return shelf->kind;
}

bool fl_shelf_finished(const fl_shelf *shelf) {
	return shelf->finished;
}

bool fl_shelf_agreed(const fl_shelf *shelf) {
	return shelf->agreed;
}

const char *fl_shelf_name(const fl_shelf *shelf) {
	const char *name = fl_shelf_answer(shelf, shelf->form->name_key);
	return name ? name : "";
}

const char *fl_shelf_block(fl_shelf *shelf) {
	fl_text_clear(&shelf->block);
	fl_shelf_write(shelf, &shelf->block);
	return shelf->block.data && shelf->block.length ? shelf->block.data : "";
}
