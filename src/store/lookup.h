/* lookup.h - the tables for looking up, filled from the facts of entries.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_LOOKUP_H
#define FOUNDLEFT_STORE_LOOKUP_H

#include "facts.h"
#include "sql.h"

/* Adds the rows of an entry that stands in row `entry_row` of chain `origin_row`. */
fl_status fl_lookup_add(fl_store *store, int64_t entry_row, int64_t origin_row, const char *digest,
                        const fl_entry *entry, fl_error *err) FL_MUST_USE;
/* Format 2: fills item and used from every session of the book. */
fl_status fl_lookup_fill_used(fl_store *store, fl_error *err) FL_MUST_USE;

#endif
