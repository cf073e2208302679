/* shelves.c - the stock with the files that it came from, and until when each of it may be used.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "shelves.h"

#include <stdlib.h>
#include <string.h>

void fl_shelves_free(fl_shelves *s) {
	fl_stock_free(&s->stock);
	fl_arena_free(&s->arena);
	*s = (fl_shelves){0};
}

bool fl_shelves_is_bench(const char *path) {
	const char *slash = strrchr(path, '/');
	return strcmp(slash ? slash + 1 : path, "bench.yaml") == 0;
}

fl_status fl_shelves_load(const fl_cli *cli, fl_shelves *s, fl_error *err) {
	size_t kept = 0;
	*s = (fl_shelves){0};
	fl_status status = fl_place_files(cli->stock, ".yaml", &s->arena, &s->paths, &s->count, err);
	for (size_t i = 0; status >= 0 && i < s->count; i++)
		if (!fl_shelves_is_bench(s->paths[i])) {
			s->paths[kept++] = s->paths[i];
			status = fl_stock_load(&s->stock, cli->io, s->paths[i], err);
		}
	s->count = kept;
	if (status < 0)
		fl_shelves_free(s);
	return status;
}

static int by_last_day(const void *a, const void *b) {
	const fl_dated *x = a, *y = b;
	if (x->last != y->last)
		return x->last < y->last ? -1 : 1;
	return strcmp(x->name, y->name);
}

static bool is_past(const fl_stock *stock, const fl_oil *oil, fl_day day) {
	for (size_t i = 0; oil->use_before <= day && i < stock->oil_count; i++)
		if (strcmp(stock->oils[i].name, oil->name) == 0 && stock->oils[i].use_before > oil->use_before)
			return true;
	return false;
}

fl_status fl_shelves_dated(const fl_stock *stock, fl_day day, fl_arena *arena, fl_dated **out, size_t *count,
                           size_t *past, fl_error *err) {
	fl_dated *items = fl_arena_alloc(arena, stock->oil_count + stock->equipment_count + 1, sizeof *items);
	*count = *past = 0;
	for (size_t i = 0; items && i < stock->oil_count; i++) {
		const fl_oil *oil = &stock->oils[i];
		const char *what = fl_arena_printf(arena, "oil %s", oil->name);
		if (!what)
			return fl_fail(err, FL_E_MEMORY, "out of memory");
		if (is_past(stock, oil, day))
			++*past;
		else
			items[(*count)++] = (fl_dated){what, oil->lot, oil->certificate, oil->use_before - 1};
	}
	for (size_t i = 0; items && i < stock->equipment_count; i++) {
		const fl_equipment *item = &stock->equipment[i];
		items[(*count)++] = (fl_dated){fl_stock_role_text(item->role), item->id, item->certificate, item->due_on};
	}
	if (!items)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	qsort(items, *count, sizeof *items, by_last_day);
	*out = items;
	return FL_OK;
}
