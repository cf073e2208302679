/* number.h - numbers given out, and the chain that they make.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_NUMBER_H
#define FOUNDLEFT_STORE_NUMBER_H

#include "sql.h"

/* A number as its row says. Borrowed texts. */
typedef struct fl_number_row {
	const char *origin; /* digest of the chain */
	int64_t year, value;
	const char *text, *purpose;
	fl_utc at;
} fl_number_row;

/* "QH-2026-0007". */
void fl_number_text(const char *prefix, int64_t year, int64_t value, char out[FL_NUMBER_SIZE]);
/* Digest of a number's row, given the digest of the row before ("" for the first). */
fl_status fl_number_digest(fl_store *store, const char *previous, const fl_number_row *row,
                           char out[FL_DIGEST_HEX_SIZE], fl_error *err) FL_MUST_USE;

#endif
