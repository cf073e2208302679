/* face.h - a TrueType face: which characters it has, how wide they are, and the part of it that a document uses.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CERTIFICATE_FACE_H
#define FOUNDLEFT_CERTIFICATE_FACE_H

#include "foundleft/base.h"

typedef struct fl_table_place {
	uint32_t offset, length; /* inside the file, checked */
} fl_table_place;

/* A face in memory. `bytes` is borrowed. */
typedef struct fl_face {
	const unsigned char *bytes;
	size_t length;
	fl_table_place head, hhea, maxp, hmtx, loca, glyf, cmap;
	uint32_t segments; /* offset of the format 4 subtable */
	unsigned segment_count;
	int units_per_em;
	int ascent, descent, cap_height, x_height; /* thousandths of the em */
	int box[4];                                /* left, bottom, right, top; thousandths of the em */
	unsigned glyph_count, advance_count;
	bool long_offsets;
	char name[64]; /* PostScript name */
} fl_face;

/* Reads the tables; FL_E_VALUE where the bytes are not a TrueType face that can be used. */
fl_status fl_face_open(fl_face *face, const unsigned char *bytes, size_t length, const char *file,
                       fl_error *err) FL_MUST_USE;
/* Glyph of a code point, 0 where the face has none. */
unsigned fl_face_glyph(const fl_face *face, uint32_t point);
/* Advance of a glyph in thousandths of the em. */
double fl_face_advance(const fl_face *face, unsigned glyph);

/* A face that holds only glyphs[0..count-1], numbered by their place here (glyphs[0] must be 0), with the parts of
 * composed glyphs behind them: *glyph_count in all. *out is arena memory. */
fl_status fl_face_subset(const fl_face *face, const uint16_t *glyphs, size_t count, fl_arena *arena,
                         unsigned char **out, size_t *length, size_t *glyph_count, fl_error *err) FL_MUST_USE;

#endif
