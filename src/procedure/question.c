/* question.c - the questions of a procedure: safety gates, conditions, restoring steps.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include <math.h>
#include <string.h>

#include "read.h"

static const char *const answer_words[] = {"yes or no", "amount", "text", NULL};

bool fl_procedure_is_id(const char *text) {
	static const char letters[] = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789-";
	size_t length = strlen(text);
	return length >= 1 && length <= 60 && strspn(text, letters) == length;
}

fl_status fl_procedure_refuse_field(const fl_node *map, const char *key, const char *why, fl_error *err) {
	const fl_node *value = fl_node_get(map, key);
	return value ? fl_fail_at(err, FL_E_VALUE, fl_node_place(value), "%s: leave this field out", why) : FL_OK;
}

fl_status fl_procedure_read_unit(const fl_node *map, fl_unit *unit, fl_error *err) {
	const char *text = NULL;
	fl_error inner = {0};
	TRY(fl_node_text(map, "unit", true, &text, err));
	fl_status status = fl_unit_parse(text, unit, &inner);
	return status == FL_OK ? FL_OK
	                       : fl_fail_at(err, status, fl_node_place(fl_node_get(map, "unit")), "%s", inner.message);
}

/* "0 to 60 °C" in the question's own unit. */
fl_status fl_procedure_read_limits(const fl_node *map, const char *key, fl_unit unit, double *low, double *high,
                                   fl_error *err) {
	fl_unit found = unit;
	*low = -INFINITY;
	*high = INFINITY;
	TRY(fl_node_span(map, key, false, FL_Q_NONE, true, low, high, &found, err));
	if (found != unit)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, key)),
		                  "its unit is not that of the question: write it in %s", fl_unit_text(unit));
	return FL_OK;
}

static fl_status read_amount(const fl_node *map, fl_question *question, fl_error *err) {
	TRY(fl_procedure_read_unit(map, &question->unit, err));
	TRY(fl_procedure_read_limits(map, "possible", question->unit, &question->possible_low, &question->possible_high,
	                             err));
	TRY(fl_procedure_read_limits(map, "plausible", question->unit, &question->plausible_low, &question->plausible_high,
	                             err));
	if (!fl_node_get(map, "plausible")) {
		question->plausible_low = question->possible_low;
		question->plausible_high = question->possible_high;
	}
	if (question->plausible_low < question->possible_low || question->plausible_high > question->possible_high)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "plausible")),
		                  "what is plausible has to lie within what is possible, \"%.60s\"",
		                  fl_node_get(map, "possible")->text);
	return FL_OK;
}

static fl_status read_kind(const fl_node *map, fl_question *question, fl_error *err) {
	int kind = 0;
	TRY(fl_node_choice(map, "answer", true, answer_words, &kind, err));
	question->kind = (fl_ask)kind;
	if (question->kind == FL_ASK_AMOUNT)
		TRY(read_amount(map, question, err));
	else
		for (int i = 0; i < 3; i++)
			TRY(fl_procedure_refuse_field(map, (const char *const[]){"unit", "possible", "plausible"}[i],
			                              "only an answer that is an amount has this", err));
	if (question->kind != FL_ASK_CONFIRM)
		TRY(fl_procedure_refuse_field(map, "may decline", "only a yes or no can be declined", err));
	return FL_OK;
}

static fl_status read_question(const fl_node *map, fl_question *question, fl_error *err) {
	static const char *const known[] = {"id",       "ask",       "caution",  "answer",      "unit",
	                                    "possible", "plausible", "required", "may decline", NULL};
	TRY(fl_node_only(map, known, err));
	TRY(fl_node_text(map, "id", true, &question->id, err));
	if (!fl_procedure_is_id(question->id))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "id")),
		                  "\"%.60s\" is no name for a question: use letters, digits and hyphens", question->id);
	TRY(fl_node_text(map, "ask", true, &question->ask, err));
	TRY(fl_node_text(map, "caution", false, &question->caution, err));
	question->required = true;
	TRY(fl_node_bool(map, "required", false, &question->required, err));
	TRY(fl_node_bool(map, "may decline", false, &question->may_decline, err));
	return read_kind(map, question, err);
}

static bool has_id(const fl_question *questions, size_t count, const char *id) {
	for (size_t i = 0; i < count; i++)
		if (strcmp(questions[i].id, id) == 0)
			return true;
	return false;
}

static fl_status check_unique(const fl_procedure *p, const fl_question *questions, size_t i, const fl_node *map,
                              fl_error *err) {
	const char *id = questions[i].id;
	if (!has_id(questions, i, id) && !has_id(p->gates, (size_t)p->gate_count, id) &&
	    !has_id(p->conditions, (size_t)p->condition_count, id))
		return FL_OK;
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "id")),
	                  "the id \"%.60s\" is taken by another question: each needs its own", id);
}

static fl_status read_list(const fl_node *root, const char *key, bool required, fl_procedure *p,
                           const fl_question **out, int *count, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(root, key, required, &list, err));
	if (!list || list->count == 0)
		return FL_OK;
	fl_question *questions = fl_arena_alloc(&p->arena, list->count, sizeof *questions);
	if (!questions)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	for (size_t i = 0; i < list->count; i++) {
		TRY(read_question(list->items[i], &questions[i], err));
		TRY(check_unique(p, questions, i, list->items[i], err));
	}
	*out = questions;
	*count = (int)list->count;
	return FL_OK;
}

fl_status fl_procedure_read_questions(const fl_node *root, fl_procedure *p, fl_error *err) {
	TRY(read_list(root, "gates", true, p, &p->gates, &p->gate_count, err));
	TRY(read_list(root, "conditions", false, p, &p->conditions, &p->condition_count, err));
	return read_list(root, "restore", true, p, &p->restore, &p->restore_count, err);
}
