/* stock.c - the stock as a whole: reading its files, adding items one by one, finding them, are they in date.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The format of the files is described in docs/stock-files.md.
 */
#include <stdio.h>
#include <string.h>

#include "read.h"

/* ---- what the readers share ------------------------------------------------------------------------------------ */

fl_place fl_stock_place(const fl_node *map, const char *key) {
	const fl_node *value = fl_node_get(map, key);
	return fl_node_place(value ? value : map);
}

fl_status fl_stock_missing(const fl_node *map, const char *key, const char *sentence, fl_error *err) {
	char field[96];
	snprintf(field, sizeof field, "%s%s%s", map->path, map->path[0] ? "." : "", key);
	return fl_fail_at(err, FL_E_VALUE, (fl_place){map->file, map->line, map->column, field}, "%s", sentence);
}

fl_status fl_stock_read_k(const fl_node *map, const char *key, double *k, fl_error *err) {
	if (!fl_node_get(map, key))
		return fl_stock_missing(
		    map, key,
		    "missing: U means nothing without its coverage factor; write it as the certificate states "
		    "it, it is never guessed",
		    err);
	return fl_node_number(map, key, true, 1.0, 4.0, k, err);
}

fl_status fl_stock_read_positive(const fl_node *map, const char *key, bool required, fl_quantity quantity,
                                 double *inside, fl_error *err) {
	double value = *inside;
	fl_unit unit = FL_U_NONE;
	TRY(fl_node_amount(map, key, required, quantity, &value, &unit, err));
	if (unit == FL_U_NONE)
		return FL_OK;
	if (!(value > 0.0))
		return fl_fail_at(err, FL_E_RANGE, fl_stock_place(map, key), "%.60s is not possible: it has to be above zero",
		                  fl_node_get(map, key)->text);
	*inside = value;
	return FL_OK;
}

/* ---- adding items ------------------------------------------------------------------------------------------------ */

static fl_status out_of_memory(fl_error *err) {
	return fl_fail(err, FL_E_MEMORY, "out of memory while reading stock");
}

static fl_status doubled(const fl_node *map, const char *key, const char *what, const char *name, fl_place first,
                         fl_error *err) {
	return fl_fail_at(err, FL_E_EXISTS, fl_stock_place(map, key), "%s %s is in stock already (%s, line %d): keep one",
	                  what, name, first.file, first.line);
}

/* A further certificate of the same thing has another day and the same name or role. */
static fl_status check_oil_versions(const fl_stock *stock, const fl_node *map, const fl_oil *oil, fl_error *err) {
	for (size_t i = 0; i < stock->oil_count; i++) {
		const fl_oil *other = &stock->oils[i];
		if (strcmp(other->lot, oil->lot) != 0)
			continue;
		if (other->certified_on == oil->certified_on)
			return doubled(map, "lot", "lot", oil->lot, other->place, err);
		if (strcmp(other->name, oil->name) != 0)
			return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "name"),
			                  "lot %s is %s in its other certificate (%s, line %d): a lot is one oil", oil->lot,
			                  other->name, other->place.file, other->place.line);
	}
	return FL_OK;
}

static fl_status add_oil(fl_stock *stock, const char *source, const fl_node *map, fl_error *err) {
	fl_oil oil = {.place = fl_node_place(map), .text = fl_document_excerpt(&stock->arena, source, map)};
	TRY(fl_stock_read_oil(&stock->arena, map, &oil, err));
	TRY(check_oil_versions(stock, map, &oil, err));
	fl_oil *grown = fl_arena_grow(&stock->arena, stock->oils, stock->oil_count, &stock->oil_capacity, sizeof *grown);
	if (!grown || !oil.text)
		return out_of_memory(err);
	stock->oils = grown;
	stock->oils[stock->oil_count++] = oil;
	return FL_OK;
}

static fl_status check_equipment_versions(const fl_stock *stock, const fl_node *map, const fl_equipment *item,
                                          fl_error *err) {
	for (size_t i = 0; i < stock->equipment_count; i++) {
		const fl_equipment *other = &stock->equipment[i];
		if (strcmp(other->id, item->id) != 0)
			continue;
		if (other->calibrated_on == item->calibrated_on)
			return doubled(map, "id", "equipment", item->id, other->place, err);
		if (other->role != item->role)
			return fl_fail_at(err, FL_E_VALUE, fl_stock_place(map, "role"),
			                  "%s is a %s in its other certificate (%s, line %d): give the other one an id of its own",
			                  item->id, fl_stock_role_text(other->role), other->place.file, other->place.line);
	}
	return FL_OK;
}

static fl_status add_equipment(fl_stock *stock, const char *source, const fl_node *map, fl_error *err) {
	fl_equipment item = {.place = fl_node_place(map), .text = fl_document_excerpt(&stock->arena, source, map)};
	TRY(fl_stock_read_equipment(&stock->arena, map, &item, err));
	TRY(check_equipment_versions(stock, map, &item, err));
	fl_equipment *grown = fl_arena_grow(&stock->arena, stock->equipment, stock->equipment_count,
	                                    &stock->equipment_capacity, sizeof *grown);
	if (!grown || !item.text)
		return out_of_memory(err);
	stock->equipment = grown;
	stock->equipment[stock->equipment_count++] = item;
	return FL_OK;
}

/* Two sister instruments may not share a tag; one serial number under two tags is a slip as well. */
static fl_status check_sisters(const fl_stock *stock, const fl_node *map, const fl_instrument *item, fl_error *err) {
	for (size_t i = 0; i < stock->instrument_count; i++) {
		const fl_instrument *other = &stock->instruments[i];
		bool same = strcmp(other->tag, item->tag) == 0;
		if (same && other->since == item->since)
			return doubled(map, "tag", "instrument", item->tag, other->place, err);
		if (!same && strcmp(other->serial, item->serial) == 0)
			return fl_fail_at(err, FL_E_EXISTS, fl_stock_place(map, "serial"),
			                  "serial %s belongs to instrument %s already: look at both maker's plates", item->serial,
			                  other->tag);
	}
	return FL_OK;
}

static fl_status add_instrument(fl_stock *stock, const char *source, const fl_node *map, fl_error *err) {
	fl_instrument item = {.place = fl_node_place(map), .text = fl_document_excerpt(&stock->arena, source, map)};
	TRY(fl_stock_read_instrument(&stock->arena, map, &item, err));
	TRY(check_sisters(stock, map, &item, err));
	fl_instrument *grown = fl_arena_grow(&stock->arena, stock->instruments, stock->instrument_count,
	                                     &stock->instrument_capacity, sizeof *grown);
	if (!grown || !item.text)
		return out_of_memory(err);
	stock->instruments = grown;
	stock->instruments[stock->instrument_count++] = item;
	return FL_OK;
}

/* ---- files and excerpts ---------------------------------------------------------------------------------------------
 */

typedef fl_status add_item(fl_stock *stock, const char *source, const fl_node *map, fl_error *err);

static const struct {
	const char *key;
	add_item *add;
} kinds[] = {{"oils", add_oil}, {"equipment", add_equipment}, {"instruments", add_instrument}};

static fl_status add_lists(fl_stock *stock, const char *text, const fl_node *root, fl_error *err) {
	static const char *const known[] = {"oils", "equipment", "instruments", NULL};
	TRY(fl_node_only(root, known, err));
	if (root->count == 0)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(root), "nothing here: write oils, equipment or instruments");
	for (size_t kind = 0; kind < sizeof kinds / sizeof kinds[0]; kind++) {
		const fl_node *list;
		TRY(fl_node_list(root, kinds[kind].key, false, &list, err));
		for (size_t i = 0; list && i < list->count; i++)
			TRY(kinds[kind].add(stock, text, list->items[i], err));
	}
	return FL_OK;
}

/* Reads `text`; after an error the stock holds what it held before. */
static fl_status parse(fl_stock *stock, const char *text, const char *file, add_item *one, fl_error *err) {
	size_t oils = stock->oil_count, equipment = stock->equipment_count, instruments = stock->instrument_count;
	const fl_node *root = NULL;
	fl_status status = fl_document_parse(&stock->arena, text, file, &root, err);
	if (status == FL_OK)
		status = one ? one(stock, text, root, err) : add_lists(stock, text, root, err);
	if (status != FL_OK) {
		stock->oil_count = oils;
		stock->equipment_count = equipment;
		stock->instrument_count = instruments;
	}
	return status;
}

fl_status fl_stock_parse(fl_stock *stock, const char *text, const char *file, fl_error *err) {
	return parse(stock, text, file, NULL, err);
}

fl_status fl_stock_parse_oil(fl_stock *stock, const char *excerpt, const char *name, fl_error *err) {
	return parse(stock, excerpt, name, add_oil, err);
}

fl_status fl_stock_parse_equipment(fl_stock *stock, const char *excerpt, const char *name, fl_error *err) {
	return parse(stock, excerpt, name, add_equipment, err);
}

fl_status fl_stock_parse_instrument(fl_stock *stock, const char *excerpt, const char *name, fl_error *err) {
	return parse(stock, excerpt, name, add_instrument, err);
}

fl_status fl_stock_load(fl_stock *stock, const fl_io *io, const char *path, fl_error *err) {
	const char *text = NULL;
	TRY(fl_document_load(&stock->arena, io, path, &text, err));
	return fl_stock_parse(stock, text, path, err);
}

void fl_stock_free(fl_stock *stock) {
	fl_arena_free(&stock->arena);
	*stock = (fl_stock){0};
}

/* ---- finding ---- */

const fl_oil *fl_stock_oil(const fl_stock *stock, const char *lot) {
	const fl_oil *newest = NULL;
	for (size_t i = 0; i < stock->oil_count; i++)
		if (strcmp(stock->oils[i].lot, lot) == 0 && (!newest || stock->oils[i].certified_on > newest->certified_on))
			newest = &stock->oils[i];
	return newest;
}

const fl_equipment *fl_stock_equipment(const fl_stock *stock, const char *id) {
	const fl_equipment *newest = NULL;
	for (size_t i = 0; i < stock->equipment_count; i++)
		if (strcmp(stock->equipment[i].id, id) == 0 &&
		    (!newest || stock->equipment[i].calibrated_on > newest->calibrated_on))
			newest = &stock->equipment[i];
	return newest;
}

const fl_instrument *fl_stock_instrument(const fl_stock *stock, const char *tag) {
	const fl_instrument *newest = NULL;
	for (size_t i = 0; i < stock->instrument_count; i++)
		if (strcmp(stock->instruments[i].tag, tag) == 0 && (!newest || stock->instruments[i].since > newest->since))
			newest = &stock->instruments[i];
	return newest;
}

/* ---- certificates over time -------------------------------------------------------------------------------------- */

/* Does version `a` count before `b` on the day? Of those begun the newest, else the oldest. */
static bool counts_before(fl_day a, fl_day b, fl_day day) {
	if ((a <= day) != (b <= day))
		return a <= day;
	return a <= day ? a > b : a < b;
}

static bool oil_counts(const fl_stock *stock, const fl_oil *oil, fl_day day) {
	for (size_t i = 0; i < stock->oil_count; i++)
		if (strcmp(stock->oils[i].lot, oil->lot) == 0 &&
		    counts_before(stock->oils[i].certified_on, oil->certified_on, day))
			return false;
	return true;
}

static bool equipment_counts(const fl_stock *stock, const fl_equipment *item, fl_day day) {
	for (size_t i = 0; i < stock->equipment_count; i++)
		if (strcmp(stock->equipment[i].id, item->id) == 0 &&
		    counts_before(stock->equipment[i].calibrated_on, item->calibrated_on, day))
			return false;
	return true;
}

static bool instrument_counts(const fl_stock *stock, const fl_instrument *item, fl_day day) {
	for (size_t i = 0; i < stock->instrument_count; i++)
		if (strcmp(stock->instruments[i].tag, item->tag) == 0 &&
		    counts_before(stock->instruments[i].since, item->since, day))
			return false;
	return true;
}

/* Drops the items of one kind that do not count, keeping the order of the rest. An item is judged among those not yet
 * dropped: whichever goes first, the one that counts stays. */
#define KEEP(items, count, counts)                                            \
	for (size_t i = 0; i < (count);) {                                        \
		if (counts(stock, &(items)[i], day)) {                                \
			i++;                                                              \
			continue;                                                         \
		}                                                                     \
		(count)--;                                                            \
		memmove(&(items)[i], &(items)[i + 1], ((count)-i) * sizeof *(items)); \
	}

void fl_stock_keep(fl_stock *stock, fl_day day) {
	KEEP(stock->oils, stock->oil_count, oil_counts)
	KEEP(stock->equipment, stock->equipment_count, equipment_counts)
	KEEP(stock->instruments, stock->instrument_count, instrument_counts)
}
