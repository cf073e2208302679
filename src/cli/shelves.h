/* shelves.h - the stock with the files that it came from, and until when each of it may be used.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_SHELVES_H
#define FOUNDLEFT_CLI_SHELVES_H

#include "cli.h"

typedef struct fl_shelves {
	fl_arena arena;
	char **paths;
	size_t count;
	fl_stock stock;
} fl_shelves;
/* Reads all stock files of the stock folder. Nothing needs freeing after a failure. */
fl_status fl_shelves_load(const fl_cli *cli, fl_shelves *out, fl_error *err) FL_MUST_USE;
void fl_shelves_free(fl_shelves *shelves);
/* bench.yaml says who issues, and is no stock file. */
bool fl_shelves_is_bench(const char *path);

typedef struct fl_dated {
	const char *what, *name,
	    *detail; /* "oil LK-10", its lot, its certificate; "thermometer", its id, its certificate */
	fl_day last; /* on which it may be used */
} fl_dated;
/* Oils and equipment of a stock that was kept to the day (fl_stock_keep), soonest first. A lot out of date is left out,
 * and counted in *past, where a newer one of its oil is there. */
fl_status fl_shelves_dated(const fl_stock *stock, fl_day day, fl_arena *arena, fl_dated **out, size_t *count,
                           size_t *past, fl_error *err) FL_MUST_USE;

#endif
