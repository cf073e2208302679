/* read.h - what the files of this stage share.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_STOCK_READ_H
#define FOUNDLEFT_STOCK_READ_H

#include "foundleft/document.h"
#include "foundleft/stock.h"

/* Returns from the function with the status of `call` unless it is FL_OK. */
#define TRY(call)                      \
	do {                               \
		fl_status try_status = (call); \
		if (try_status != FL_OK)       \
			return try_status;         \
	} while (0)

/* Each reads one item of its kind from a map into *out, which is zeroed; text and place are the caller's. */
fl_status fl_stock_read_oil(fl_arena *arena, const fl_node *map, fl_oil *out, fl_error *err) FL_MUST_USE;
fl_status fl_stock_read_equipment(fl_arena *arena, const fl_node *map, fl_equipment *out, fl_error *err) FL_MUST_USE;
fl_status fl_stock_read_instrument(fl_arena *arena, const fl_node *map, fl_instrument *out, fl_error *err) FL_MUST_USE;
/* Refuses a plate differential pressure that geometry, pump and dial density cannot give within 15 %, naming the field
 * whose usual slip would explain it. `map` is the instrument, `geometry` its group. */
fl_status fl_stock_check_geometry(const fl_node *map, const fl_node *geometry, const fl_instrument *instrument,
                                  fl_error *err) FL_MUST_USE;

/* The coverage factor under key: required wherever U is stated, never guessed. */
fl_status fl_stock_read_k(const fl_node *map, const char *key, double *k, fl_error *err) FL_MUST_USE;
/* Refuses the map because `key` is absent. */
fl_status fl_stock_missing(const fl_node *map, const char *key, const char *sentence, fl_error *err) FL_MUST_USE;
/* An amount that has to be above zero. */
fl_status fl_stock_read_positive(const fl_node *map, const char *key, bool required, fl_quantity quantity,
                                 double *inside, fl_error *err) FL_MUST_USE;
/* Place of map[key], or of the map where it is absent. */
fl_place fl_stock_place(const fl_node *map, const char *key);

#endif
