/* foundleft/seal.h - digests over bytes (signatures and keys follow in a later issue).
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_SEAL_H
#define FOUNDLEFT_SEAL_H

#include "foundleft/base.h"

#define FL_DIGEST_HEX_SIZE 65

/* A SHA-256 hasher that is used many times (FIPS 180-4, by OpenSSL). */
typedef struct fl_hasher fl_hasher;
fl_status fl_hasher_new(fl_hasher **out, fl_error *err) FL_MUST_USE;
void fl_hasher_free(fl_hasher *hasher);
/* Lower-case hexadecimal SHA-256 of bytes[length], terminated. */
fl_status fl_seal_digest(fl_hasher *hasher, const void *bytes, size_t length, char hex[FL_DIGEST_HEX_SIZE],
                         fl_error *err) FL_MUST_USE;

#endif
