/* recomputer.c - journals to records, one after the other, parsing each procedure and stock item once.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The sessions of a book carry the same few procedures and the same oils and equipment again and again, and reading
 * their text takes longer than the computation. What was read is kept by its text (the text itself is compared, so
 * nothing can be mistaken), until the room is full; then all is let go of, so that memory stays flat. Instruments come
 * round too seldom in a large fleet to be worth keeping.
 */
#include "foundleft/keep.h"

#include <stdlib.h>
#include <string.h>

enum { SLOTS = 4096, MOST_ITEMS = 2048, MOST_PROCEDURES = 32 };

typedef struct item {
	struct item *next;
	char *kind, *body;
	fl_stock stock; /* with this one item */
} item;

typedef struct plan {
	char *body;
	fl_procedure procedure;
} plan;

struct fl_recomputer {
	fl_hasher *hasher;
	item *slots[SLOTS];
	size_t item_count;
	plan plans[MOST_PROCEDURES];
	int plan_count;
};

static void free_items(fl_recomputer *r) {
	for (size_t i = 0; i < SLOTS; i++) {
		for (item *one = r->slots[i], *next; one; one = next) {
			next = one->next;
			fl_stock_free(&one->stock);
			free(one->kind);
			free(one->body);
			free(one);
		}
		r->slots[i] = NULL;
	}
	r->item_count = 0;
}

static void free_plans(fl_recomputer *r) {
	for (int i = 0; i < r->plan_count; i++) {
		fl_procedure_free(&r->plans[i].procedure);
		free(r->plans[i].body);
	}
	r->plan_count = 0;
}

fl_status fl_recomputer_new(fl_recomputer **out, fl_error *err) {
	fl_recomputer *r = calloc(1, sizeof *r);
	if (!r)
		return fl_fail(err, FL_E_MEMORY, "out of memory for recomputing");
	fl_status status = fl_hasher_new(&r->hasher, err);
	if (status < 0) {
		free(r);
		return status;
	}
	*out = r;
	return FL_OK;
}

void fl_recomputer_free(fl_recomputer *r) {
	if (!r)
		return;
	free_items(r);
	free_plans(r);
	fl_hasher_free(r->hasher);
	free(r);
}

/* ---- procedures ------------------------------------------------------------------------------------------------- */

static fl_status add_plan(fl_recomputer *r, const fl_session *session, const char *body, const fl_procedure **out,
                          fl_error *err) {
	if (r->plan_count == MOST_PROCEDURES)
		free_plans(r);
	plan *one = &r->plans[r->plan_count];
	one->body = strdup(body);
	if (!one->body)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a procedure");
	fl_status status = fl_session_procedure(session, &one->procedure, err);
	if (status < 0) {
		free(one->body);
		return status;
	}
	r->plan_count++;
	*out = &one->procedure;
	return FL_OK;
}

static fl_status find_procedure(fl_recomputer *r, const fl_session *session, const fl_procedure **out, fl_error *err) {
	const char *body = fl_session_text_body(session, "procedure", NULL);
	if (!body)
		return fl_fail(err, FL_E_NOT_FOUND, "the journal holds no procedure");
	for (int i = 0; i < r->plan_count; i++)
		if (strcmp(r->plans[i].body, body) == 0) {
			*out = &r->plans[i].procedure;
			return FL_OK;
		}
	return add_plan(r, session, body, out, err);
}

/* ---- stock ------------------------------------------------------------------------------------------------------ */

/* FNV-1a, for finding only. */
static size_t slot_of(const char *body) {
	uint64_t hash = UINT64_C(14695981039346656037);
	for (; *body; body++)
		hash = (hash ^ (unsigned char)*body) * UINT64_C(1099511628211);
	return (size_t)(hash % SLOTS);
}

static fl_status parse_item(const fl_session_text *text, fl_stock *stock, fl_error *err) {
	if (strcmp(text->kind, "oil") == 0)
		return fl_stock_parse_oil(stock, text->body, text->name, err);
	return fl_stock_parse_equipment(stock, text->body, text->name, err);
}

static fl_status add_to_slot(fl_recomputer *r, const fl_session_text *text, size_t slot, const fl_stock **out,
                             fl_error *err) {
	item *one = calloc(1, sizeof *one);
	if (!one)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a stock item");
	one->kind = strdup(text->kind);
	one->body = strdup(text->body);
	fl_status status = one->kind && one->body ? parse_item(text, &one->stock, err)
	                                          : fl_fail(err, FL_E_MEMORY, "out of memory for a stock item");
	if (status < 0) {
		fl_stock_free(&one->stock);
		free(one->kind);
		free(one->body);
		free(one);
		return status;
	}
	one->next = r->slots[slot];
	r->slots[slot] = one;
	r->item_count++;
	*out = &one->stock;
	return FL_OK;
}

static fl_status find_item(fl_recomputer *r, const fl_session_text *text, const fl_stock **out, fl_error *err) {
	size_t slot = slot_of(text->body);
	for (const item *one = r->slots[slot]; one; one = one->next)
		if (strcmp(one->body, text->body) == 0 && strcmp(one->kind, text->kind) == 0) {
			*out = &one->stock;
			return FL_OK;
		}
	return add_to_slot(r, text, slot, out, err);
}

/* Adds the items of `one` to `all`, which borrows their texts. */
static bool append_stock(fl_stock *all, const fl_stock *one) {
	fl_oil *oils = fl_arena_grow(&all->arena, all->oils, all->oil_count, &all->oil_capacity, sizeof *oils);
	fl_equipment *equipment =
	    fl_arena_grow(&all->arena, all->equipment, all->equipment_count, &all->equipment_capacity, sizeof *equipment);
	if (!oils || !equipment)
		return false;
	all->oils = oils;
	all->equipment = equipment;
	if (one->oil_count)
		oils[all->oil_count++] = one->oils[0];
	if (one->equipment_count)
		equipment[all->equipment_count++] = one->equipment[0];
	return true;
}

static bool is_shared(const char *kind) {
	return strcmp(kind, "oil") == 0 || strcmp(kind, "equipment") == 0;
}

static fl_status gather_stock(fl_recomputer *r, const fl_session *session, fl_stock *out, fl_error *err) {
	fl_status status = FL_OK;
	if (r->item_count > MOST_ITEMS)
		free_items(r);
	for (size_t i = 0; status >= 0 && i < session->text_count; i++) {
		const fl_session_text *text = &session->texts[i];
		const fl_stock *one = NULL;
		if (strcmp(text->kind, "instrument") == 0)
			status = fl_stock_parse_instrument(out, text->body, text->name, err);
		else if (is_shared(text->kind))
			status = find_item(r, text, &one, err);
		if (status >= 0 && one && !append_stock(out, one))
			status = fl_fail(err, FL_E_MEMORY, "out of memory for the stock");
	}
	return status;
}

/* ---- the record -------------------------------------------------------------------------------------------------- */

static fl_status compute(fl_recomputer *r, const fl_session *session, fl_arena *arena, fl_record *out, fl_error *err) {
	const fl_procedure *procedure = NULL;
	fl_stock stock = {0};
	fl_result result = {0};
	fl_status status = find_procedure(r, session, &procedure, err);
	if (status >= 0)
		status = gather_stock(r, session, &stock, err);
	if (status >= 0)
		status = fl_analysis_session(session, procedure, &stock, &result, err);
	if (status >= 0)
		status = fl_keep_record(session, procedure, &stock, &result, arena, out, err);
	fl_result_free(&result);
	fl_stock_free(&stock);
	return status;
}

fl_status fl_recomputer_record(fl_recomputer *r, const char *journal, size_t length, const char *name, fl_arena *arena,
                               fl_record *out, fl_error *err) {
	fl_session session = {0};
	char head[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_journal_replay(journal, length, name, r->hasher, &session, head, err);
	if (status < 0)
		return status;
	status = compute(r, &session, arena, out, err);
	fl_session_free(&session);
	return status;
}
