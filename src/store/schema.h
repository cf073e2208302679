/* schema.h - the tables of the book, and how an older book is brought up to date.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_SCHEMA_H
#define FOUNDLEFT_STORE_SCHEMA_H

#include "sql.h"

/* The format that this program writes. */
#define BOOK_FORMAT 2

/* Makes the tables in an empty file, or brings an older book up to date; in one transaction, which the caller has
 * begun. `from`: the format that the file has, 0 for none. */
fl_status fl_schema_raise(fl_store *store, int from, fl_error *err) FL_MUST_USE;
/* Are all tables, indexes and rules (triggers) there, word for word? FL_E_TAMPERED names the first that is not. */
fl_status fl_schema_check(fl_store *store, fl_error *err) FL_MUST_USE;

#endif
