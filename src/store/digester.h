/* digester.h - hashes in a thread of its own what another thread reads, in order.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_DIGESTER_H
#define FOUNDLEFT_STORE_DIGESTER_H

#include "foundleft/store.h"

typedef struct fl_digester fl_digester;

/* What was hashed, for the sentence when it does not fit. */
typedef struct fl_digested {
	char origin[FL_DIGEST_HEX_SIZE];
	int64_t sequence;
	char number[FL_NUMBER_SIZE]; /* "" if not known */
	const char *what;            /* sentence, constant */
} fl_digested;

fl_status fl_digester_new(fl_digester **out, fl_error *err) FL_MUST_USE;
/* Copies the bytes and has them hashed; waits while too much is waiting. After the first digest that did not fit
 * nothing more is hashed. FL_E_MEMORY. */
fl_status fl_digester_put(fl_digester *digester, const void *bytes, size_t length, const char *digest,
                          size_t digest_length, const fl_digested *what, fl_error *err) FL_MUST_USE;
/* Has one failed up to now? Costs nothing to ask. */
bool fl_digester_failed(const fl_digester *digester);
/* Waits until all is hashed and frees everything. True, with `out` filled, where one did not fit: the first of those
 * put. */
bool fl_digester_finish(fl_digester *digester, fl_digested *out);

#endif
