/* pack.c - packing and unpacking what entries carry.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "pack.h"

#include <stdlib.h>
#include <string.h>
#include <zlib.h>

/* Journals shrink to about a fifth at this level; higher ones cost more time than they save room. */
enum { LEVEL = 6 };

fl_status fl_pack(fl_hasher *hasher, const void *bytes, size_t length, fl_carried *out, void **packed, fl_error *err) {
	if (length == 0 || length > CARRIED_LIMIT)
		return fl_fail(err, FL_E_RANGE, "a journal or paper of %zu bytes can't be kept: 1 byte to 256 MiB", length);
	uLongf size = compressBound((uLong)length);
	Bytef *room = malloc(size);
	if (!room || compress2(room, &size, bytes, (uLong)length, LEVEL) != Z_OK) {
		free(room);
		return fl_fail(err, FL_E_MEMORY, "out of memory for packing %zu bytes", length);
	}
	out->size = length;
	out->packed_size = size;
	fl_status status = fl_seal_digest(hasher, bytes, length, out->digest, err);
	if (status >= 0)
		status = fl_seal_digest(hasher, room, size, out->packed_digest, err);
	if (status < 0) {
		free(room);
		return status;
	}
	*packed = room;
	return FL_OK;
}

static fl_status misfit(fl_error *err, const char *what) {
	return fl_fail(err, FL_E_TAMPERED, "%s", what);
}

fl_status fl_unpack(fl_hasher *hasher, const fl_carried *carried, const void *packed, size_t length, fl_arena *arena,
                    char **bytes, fl_error *err) {
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_seal_digest(hasher, packed, length, digest, err);
	if (status < 0)
		return status;
	if (length != carried->packed_size || strcmp(digest, carried->packed_digest) != 0)
		return misfit(err, "the bytes that the entry carries are not those that were kept");
	if (carried->size > CARRIED_LIMIT)
		return misfit(err, "the bytes that the entry carries are said to be larger than the book takes");
	char *room = fl_arena_alloc(arena, (size_t)carried->size + 1, 1);
	if (!room)
		return fl_fail(err, FL_E_MEMORY, "out of memory for unpacking");
	uLongf size = (uLongf)carried->size;
	if (uncompress((Bytef *)room, &size, packed, (uLong)length) != Z_OK || size != carried->size)
		return misfit(err, "the bytes that the entry carries do not unpack to what the entry says");
	status = fl_seal_digest(hasher, room, size, digest, err);
	if (status >= 0 && strcmp(digest, carried->digest) != 0)
		return misfit(err, "the bytes that the entry carries unpack to something else than what was kept");
	*bytes = room;
	return status;
}
