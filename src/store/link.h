/* link.h - one link of a chain, and opening and closing transactions around links.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_LINK_H
#define FOUNDLEFT_STORE_LINK_H

#include "facts.h"
#include "sql.h"

/* The end of a chain. */
typedef struct fl_head {
	int64_t sequence; /* 0 before the first entry */
	char digest[FL_DIGEST_HEX_SIZE];
} fl_head;
/* The end of the chain in row `origin_row`, whose founding has this digest. */
fl_status fl_link_head(fl_store *store, int64_t origin_row, const char *origin_digest, fl_head *out,
                       fl_error *err) FL_MUST_USE;
/* Appends an entry: facts[length] with this digest, and packed bytes (NULL: none here), with its rows for looking up.
 * Within a transaction. *entry_row becomes its row. */
fl_status fl_link_append(fl_store *store, int64_t origin_row, const fl_entry *entry, const char *digest,
                         const fl_text *facts, const void *packed, int64_t *entry_row, fl_error *err) FL_MUST_USE;
/* Adds a chain's founding. */
fl_status fl_link_found(fl_store *store, const fl_founding_text *founding, bool own, fl_error *err) FL_MUST_USE;
/* Does what the row says fit the last entry of its chain: digest of the founding, of the facts, of the bytes? */
fl_status fl_link_check_head(fl_store *store, int64_t origin_row, const char *origin_digest, const char *founding,
                             fl_error *err) FL_MUST_USE;
/* Reads which chain the book writes. FL_E_TAMPERED where it has none. */
fl_status fl_link_load_own(fl_store *store, fl_error *err) FL_MUST_USE;
/* May a record of the chain `origin` replace one of the chain `target`: the same, or one that it goes on from? */
fl_status fl_link_is_one_book(fl_store *store, const char *origin, const char *target, bool *yes,
                              fl_error *err) FL_MUST_USE;
/* "entry 12 of Quillhaven" for messages. */
char *fl_link_name(fl_store *store, const char *origin_digest, int64_t sequence, char out[160]);

#endif
