/* bundle.h - the form of a bundle: a ship's chains in one file.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Lines and bytes:
 *   foundleft-bundle \t 1
 *   part \t origin|entry|bytes \t length \t digest      then so many bytes, then a line feed; any number of times
 *   end \t number of parts \t seal
 *
 *   origin  the founding of a chain; the entries up to the next origin belong to it
 *   entry   the facts of the chain's next entry, from the first on without a gap
 *   bytes   packed: what the entry just before carries
 *
 * The digest is the SHA-256 of the part's bytes. The seal begins as the SHA-256 of the first line and becomes, with
 * each part, the SHA-256 of the seal so far followed by the part's line (both without line feed). So it covers every
 * byte.
 *
 * Valid if and only if: every digest and the seal fit, nothing stands behind the end, every founding and every entry
 * is written as this program writes it, every chain is linked from its founding on, and every `bytes` unpacks to what
 * its entry says.
 */
#ifndef FOUNDLEFT_STORE_BUNDLE_H
#define FOUNDLEFT_STORE_BUNDLE_H

#include "facts.h"

#define BUNDLE_FIRST "foundleft-bundle\t1"
enum { BUNDLE_LINE = 160 };

typedef struct fl_seal_so_far {
	char seal[FL_DIGEST_HEX_SIZE];
	int64_t parts;
} fl_seal_so_far;

fl_status fl_bundle_begin(fl_hasher *hasher, fl_seal_so_far *seal, fl_error *err) FL_MUST_USE;
/* Takes the line of a part into the seal. */
fl_status fl_bundle_take(fl_hasher *hasher, fl_seal_so_far *seal, const char *line, fl_error *err) FL_MUST_USE;

#endif
