/* sign_face.c - the certificate's face as a signature's visible block wants it; and the way from a certificate to its
 * journal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <string.h>

#define FACE_MAX ((size_t)16 * 1024 * 1024)

static unsigned glyph_of(const void *self, uint32_t point) {
	return fl_face_glyph(self, point);
}

static double advance_of(const void *self, unsigned glyph) {
	return fl_face_advance(self, glyph);
}

static fl_status subset_of(const void *self, const uint16_t *glyphs, size_t count, fl_arena *arena, unsigned char **out,
                           size_t *length, size_t *glyph_count, fl_error *err) {
	return fl_face_subset(self, glyphs, count, arena, out, length, glyph_count, err);
}

fl_status fl_certificate_face(const fl_io *io, const fl_faces *faces, fl_arena *arena, fl_seal_face *out,
                              fl_error *err) {
	char *path = fl_arena_printf(arena, "%s/regular.ttf", faces->folder), *bytes;
	fl_face *face = fl_arena_alloc(arena, 1, sizeof *face);
	size_t length;
	if (!path || !face)
		return fl_fail(err, FL_E_MEMORY, "out of memory while loading the certificate's faces");
	fl_status status = fl_file_read(io, path, FACE_MAX, arena, &bytes, &length, err);
	if (status == FL_OK)
		status = fl_face_open(face, (unsigned char *)bytes, length, "regular.ttf", err);
	if (status != FL_OK)
		return status;
	*out = (fl_seal_face){.self = face,
	                      .name = face->name,
	                      .ascent = face->ascent,
	                      .descent = face->descent,
	                      .cap_height = face->cap_height,
	                      .x_height = face->x_height,
	                      .glyph = glyph_of,
	                      .advance = advance_of,
	                      .subset = subset_of};
	memcpy(out->box, face->box, sizeof out->box);
	return FL_OK;
}

bool fl_certificate_journal_digest(const unsigned char *bytes, size_t length, char digest[FL_DIGEST_HEX_SIZE]) {
	static const char mark[] = FL_SOURCE_MARK "journal-sha256:";
	const char *found = memmem(bytes, length, mark, sizeof mark - 1);
	const size_t hex = FL_DIGEST_HEX_SIZE - 1;
	if (!found || (size_t)(bytes + length - (const unsigned char *)found) < sizeof mark - 1 + hex)
		return false;
	memcpy(digest, found + sizeof mark - 1, hex);
	digest[hex] = '\0';
	return strspn(digest, "0123456789abcdef") == hex;
}
