/* function_check.c - function checks of a procedure: alarms, controller, valve, change-over, indicator.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include <math.h>
#include <string.h>

#include "read.h"

enum { MAX_CHECKS = 50 };

static const char *const answer_words[] = {"yes or no", "amount", "indication", NULL};
static const char *const expects_words[] = {"low alarm", "high alarm", "set point", NULL};

const char *fl_procedure_expects_word(fl_check_expects expects) {
	return expects_words[expects];
}

/* "expected: 50 %" with "limit: 5 %", or "within: at most 10 s". */
static fl_status read_amount(const fl_node *map, fl_function_check *check, fl_error *err) {
	double limit = 0.0;
	fl_unit unit = FL_U_NONE;
	TRY(fl_procedure_read_unit(map, &check->unit, err));
	const fl_node *within = fl_node_get(map, "within");
	if (within) {
		for (int i = 0; i < 2; i++)
			TRY(fl_procedure_refuse_field(map, i ? "limit" : "expected", "\"within\" gives the limits already", err));
		return fl_procedure_read_limits(map, "within", check->unit, &check->low, &check->high, err);
	}
	fl_quantity quantity = fl_unit_quantity(check->unit);
	TRY(fl_node_amount(map, "expected", true, quantity, &check->expected, &unit, err));
	if (unit != check->unit)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "expected")), "write it in %s",
		                  fl_unit_text(check->unit));
	TRY(fl_node_amount(map, "limit", true, quantity, &limit, &unit, err));
	if (unit != check->unit || !(limit > 0.0))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "limit")),
		                  "write it in %s, above 0: how far off it may be", fl_unit_text(check->unit));
	check->expected = fl_from_inside(check->expected, unit);
	limit = fl_from_inside(limit, unit) - fl_from_inside(0.0, unit);
	check->low = check->expected - limit;
	check->high = check->expected + limit;
	return FL_OK;
}

static fl_status read_indication(const fl_node *map, fl_function_check *check, fl_error *err) {
	int expects = 0;
	fl_band limit = {FL_BAND_NONE, 0.0};
	TRY(fl_node_choice(map, "expected", true, expects_words, &expects, err));
	check->expects = (fl_check_expects)expects;
	TRY(fl_procedure_band(map, "limit", true, FL_U_NONE, &limit, err));
	if (limit.basis != FL_BAND_PERCENT_SPAN)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "limit")), "write this limit in %% of span");
	check->limit_pct_span = limit.half_width;
	return fl_node_bool(map, "true viscosity", false, &check->true_viscosity, err);
}

static fl_status refuse_fields(const fl_node *map, const char *const *keys, const char *why, fl_error *err) {
	for (; *keys; keys++)
		TRY(fl_procedure_refuse_field(map, *keys, why, err));
	return FL_OK;
}

static fl_status read_kind(const fl_node *map, fl_function_check *check, fl_error *err) {
	static const char *const of_amount[] = {"unit", "within", NULL};
	static const char *const of_both[] = {"expected", "limit", NULL};
	static const char *const of_indication[] = {"true viscosity", NULL};
	int kind = 0;
	TRY(fl_node_choice(map, "answer", true, answer_words, &kind, err));
	check->kind = (fl_check_kind)kind;
	check->expected = NAN;
	if (check->kind != FL_CHECK_AMOUNT)
		TRY(refuse_fields(map, of_amount, "only an answer that is an amount has this", err));
	if (check->kind == FL_CHECK_CONFIRM)
		TRY(refuse_fields(map, of_both, "what is answered with yes or no is in order with yes", err));
	if (check->kind != FL_CHECK_INDICATION)
		TRY(refuse_fields(map, of_indication, "only an indication stands for a true viscosity", err));
	if (check->kind == FL_CHECK_AMOUNT)
		return read_amount(map, check, err);
	return check->kind == FL_CHECK_INDICATION ? read_indication(map, check, err) : FL_OK;
}

static bool id_is_free(const fl_procedure *p, const fl_function_check *checks, size_t count, const char *id) {
	const struct {
		const fl_question *items;
		int count;
	} lists[] = {{p->gates, p->gate_count}, {p->conditions, p->condition_count}, {p->restore, p->restore_count}};
	for (size_t list = 0; list < sizeof lists / sizeof lists[0]; list++)
		for (int i = 0; i < lists[list].count; i++)
			if (strcmp(lists[list].items[i].id, id) == 0)
				return false;
	for (size_t i = 0; i < count; i++)
		if (strcmp(checks[i].id, id) == 0)
			return false;
	return true;
}

static fl_status read_check(const fl_node *map, fl_function_check *check, fl_error *err) {
	static const char *const known[] = {"id",     "name",     "ask",   "caution",        "answer", "unit",
	                                    "within", "expected", "limit", "true viscosity", NULL};
	TRY(fl_node_only(map, known, err));
	TRY(fl_node_text(map, "id", true, &check->id, err));
	if (!fl_procedure_is_id(check->id))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(map, "id")),
		                  "\"%.60s\" is no name for a check: use letters, digits and hyphens", check->id);
	TRY(fl_node_text(map, "name", true, &check->name, err));
	TRY(fl_node_text(map, "ask", true, &check->ask, err));
	TRY(fl_node_text(map, "caution", false, &check->caution, err));
	return read_kind(map, check, err);
}

fl_status fl_procedure_read_checks(const fl_node *root, fl_procedure *p, fl_error *err) {
	const fl_node *list;
	TRY(fl_node_list(root, "function checks", false, &list, err));
	if (!list || list->count == 0)
		return FL_OK;
	if (list->count > MAX_CHECKS)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(list), "more than %d function checks", (int)MAX_CHECKS);
	fl_function_check *checks = fl_arena_alloc(&p->arena, list->count, sizeof *checks);
	if (!checks)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	for (size_t i = 0; i < list->count; i++) {
		TRY(read_check(list->items[i], &checks[i], err));
		if (!id_is_free(p, checks, i, checks[i].id))
			return fl_fail_at(err, FL_E_VALUE, fl_node_place(fl_node_get(list->items[i], "id")),
			                  "the id \"%.60s\" is taken: each question and check needs its own", checks[i].id);
	}
	p->checks = checks;
	p->check_count = (int)list->count;
	return FL_OK;
}
