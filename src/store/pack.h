/* pack.h - packing and unpacking what entries carry (zlib, RFC 1950).
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_PACK_H
#define FOUNDLEFT_STORE_PACK_H

#include "facts.h"

/* Packs bytes[length] into new memory (*packed, to be freed) and fills sizes and digests. */
fl_status fl_pack(fl_hasher *hasher, const void *bytes, size_t length, fl_carried *out, void **packed,
                  fl_error *err) FL_MUST_USE;
/* Unpacks into arena memory, a zero byte behind, and holds size and digests to what the entry says. FL_E_TAMPERED. */
fl_status fl_unpack(fl_hasher *hasher, const fl_carried *carried, const void *packed, size_t length, fl_arena *arena,
                    char **bytes, fl_error *err) FL_MUST_USE;

#endif
