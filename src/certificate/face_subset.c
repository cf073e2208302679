/* face_subset.c - the part of a face that a document uses, as a face of its own.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Written are head, hhea, maxp, hmtx, loca (long) and glyf: all that a CIDFontType2 with an identity map needs
 * (PDF Reference 1.4, 5.6.3 and 5.8). Glyphs are renumbered; parts of composed glyphs are appended and their numbers
 * inside the composed glyph rewritten. */
#include "face.h"

#include "bytes.h"

#include <string.h>

typedef struct fl_subset {
	const fl_face *face;
	fl_arena *arena;
	uint16_t *old; /* old number of each new glyph */
	size_t count, capacity;
	unsigned char *glyf;
	uint32_t *offsets;
	size_t glyf_length;
} fl_subset;

/* Bytes of an old glyph; NULL and 0 for an empty one. */
static const unsigned char *glyph_bytes(const fl_face *face, unsigned glyph, uint32_t *length) {
	*length = 0;
	if (glyph >= face->glyph_count)
		return NULL;
	const unsigned char *loca = face->bytes + face->loca.offset;
	uint32_t start = face->long_offsets ? fl_get32(loca + 4 * glyph) : 2 * fl_get16(loca + 2 * glyph);
	uint32_t end = face->long_offsets ? fl_get32(loca + 4 * glyph + 4) : 2 * fl_get16(loca + 2 * glyph + 2);
	if (end <= start || end > face->glyf.length)
		return NULL;
	*length = end - start;
	return face->bytes + face->glyf.offset + start;
}

/* New number of an old glyph, which is appended if it is not there yet; 0 when memory is out. */
static unsigned renumber(fl_subset *subset, unsigned old) {
	for (size_t i = 0; i < subset->count; i++)
		if (subset->old[i] == old)
			return (unsigned)i;
	uint16_t *grown = fl_arena_grow(subset->arena, subset->old, subset->count, &subset->capacity, sizeof *grown);
	if (!grown)
		return 0;
	subset->old = grown;
	subset->old[subset->count] = (uint16_t)old;
	return (unsigned)subset->count++;
}

/* Rewrites the part numbers of a composed glyph in its copy. Flags: OpenType glyf, "composite glyph description". */
static void renumber_parts(fl_subset *subset, unsigned char *glyph, uint32_t length) {
	enum { WORDS = 0x0001, SCALE = 0x0008, MORE = 0x0020, XY_SCALE = 0x0040, TWO_BY_TWO = 0x0080 };
	uint32_t at = 10;
	unsigned flags = MORE;
	while ((flags & MORE) && at + 4 <= length) {
		flags = fl_get16(glyph + at);
		fl_put16(glyph + at + 2, renumber(subset, fl_get16(glyph + at + 2)));
		at += 4 + (flags & WORDS ? 4u : 2u);
		at += flags & SCALE ? 2u : flags & XY_SCALE ? 4u : flags & TWO_BY_TWO ? 8u : 0u;
	}
}

/* The outlines in their new order; grows while composed glyphs bring in parts. False when memory is out. */
static bool gather(fl_subset *subset) {
	subset->glyf = fl_arena_alloc(subset->arena, 2 * (size_t)subset->face->glyf.length + 4, 1);
	subset->offsets = fl_arena_alloc(subset->arena, 2 * (size_t)subset->face->glyph_count + subset->count + 2, 4);
	if (!subset->glyf || !subset->offsets)
		return false;
	size_t room = 2 * (size_t)subset->face->glyf.length;
	for (size_t i = 0; i < subset->count; i++) {
		uint32_t length;
		const unsigned char *bytes = glyph_bytes(subset->face, subset->old[i], &length);
		subset->offsets[i] = (uint32_t)subset->glyf_length;
		if (!bytes || subset->glyf_length + length > room)
			continue;
		unsigned char *copy = subset->glyf + subset->glyf_length;
		memcpy(copy, bytes, length);
		if (length > 10 && (int16_t)fl_get16(copy) < 0)
			renumber_parts(subset, copy, length);
		subset->glyf_length += (length + 3u) & ~3u;
	}
	subset->offsets[subset->count] = (uint32_t)subset->glyf_length;
	return true;
}

static uint32_t checksum(const unsigned char *bytes, size_t length) {
	uint32_t sum = 0;
	for (size_t i = 0; i + 4 <= length; i += 4)
		sum += fl_get32(bytes + i);
	return sum;
}

typedef struct fl_writer {
	unsigned char *file;
	size_t length; /* of what is written so far, a multiple of 4 */
	unsigned tables;
} fl_writer;

/* Begins a table: its entry in the directory, its place at the end of the file. Tables come in the order of tags. */
static unsigned char *begin_table(fl_writer *writer, const char *tag, size_t length) {
	unsigned char *entry = writer->file + 12 + 16 * writer->tables++;
	memcpy(entry, tag, 4);
	fl_put32(entry + 8, (uint32_t)writer->length);
	fl_put32(entry + 12, (uint32_t)length);
	unsigned char *place = writer->file + writer->length;
	writer->length += (length + 3) & ~(size_t)3;
	return place;
}

static void copy_table(fl_writer *writer, const fl_face *face, const char *tag, fl_table_place table) {
	memcpy(begin_table(writer, tag, table.length), face->bytes + table.offset, table.length);
}

static void write_advances(fl_writer *writer, const fl_subset *subset) {
	const fl_face *face = subset->face;
	unsigned char *at = begin_table(writer, "hmtx", 4 * subset->count);
	for (size_t i = 0; i < subset->count; i++) {
		unsigned old = subset->old[i], entry = old < face->advance_count ? old : face->advance_count - 1;
		const unsigned char *from = face->bytes + face->hmtx.offset + 4 * entry;
		uint32_t length;
		const unsigned char *outline = glyph_bytes(face, old, &length);
		fl_put16(at + 4 * i, fl_get16(from));
		/* left side bearing: the outline's own left edge, as the face has it */
		fl_put16(at + 4 * i + 2, outline && length >= 4 ? fl_get16(outline + 2) : 0);
	}
}

/* Directory entries' checksums, then the whole file's into head (OpenType, "checkSumAdjustment"). */
static void write_checksums(fl_writer *writer, unsigned char *head) {
	for (unsigned i = 0; i < writer->tables; i++) {
		unsigned char *entry = writer->file + 12 + 16 * i;
		fl_put32(entry + 4, checksum(writer->file + fl_get32(entry + 8), (fl_get32(entry + 12) + 3u) & ~3u));
	}
	fl_put32(head + 8, 0xB1B0AFBAu - checksum(writer->file, writer->length));
}

static void write_face(const fl_subset *subset, unsigned char *file, size_t *length) {
	enum { TABLES = 6 };
	const fl_face *face = subset->face;
	fl_writer writer = {.file = file, .length = 12 + 16 * TABLES};
	fl_put32(file, 0x00010000u);
	fl_put16(file + 4, TABLES);
	fl_put16(file + 6, 64); /* search range, entry selector, range shift for 6 tables */
	fl_put16(file + 8, 2);
	fl_put16(file + 10, 16 * TABLES - 64);
	memcpy(begin_table(&writer, "glyf", subset->glyf_length), subset->glyf, subset->glyf_length);
	size_t head_at = writer.length, hhea_at;
	copy_table(&writer, face, "head", face->head);
	hhea_at = writer.length;
	copy_table(&writer, face, "hhea", face->hhea);
	write_advances(&writer, subset);
	unsigned char *loca = begin_table(&writer, "loca", 4 * (subset->count + 1));
	for (size_t i = 0; i <= subset->count; i++)
		fl_put32(loca + 4 * i, subset->offsets[i]);
	size_t maxp_at = writer.length;
	copy_table(&writer, face, "maxp", face->maxp);
	fl_put16(file + head_at + 50, 1); /* long offsets */
	fl_put32(file + head_at + 8, 0);
	fl_put16(file + hhea_at + 34, (unsigned)subset->count);
	fl_put16(file + maxp_at + 4, (unsigned)subset->count);
	write_checksums(&writer, file + head_at);
	*length = writer.length;
}

fl_status fl_face_subset(const fl_face *face, const uint16_t *glyphs, size_t count, fl_arena *arena,
                         unsigned char **out, size_t *length, size_t *glyph_count, fl_error *err) {
	fl_subset subset = {.face = face, .arena = arena, .count = count};
	/* Code points may share a glyph: each keeps its own number, so that text copied comes out as it went in. */
	while (subset.capacity < count + 1)
		subset.capacity = subset.capacity ? 2 * subset.capacity : 64;
	subset.old = fl_arena_alloc(arena, subset.capacity, sizeof *subset.old);
	if (!subset.old)
		return fl_fail(err, FL_E_MEMORY, "out of memory while cutting a face");
	memcpy(subset.old, glyphs, count * sizeof *glyphs);
	if (!gather(&subset))
		return fl_fail(err, FL_E_MEMORY, "out of memory while cutting a face");
	size_t room = 12 + 16 * 6 + subset.glyf_length + 8 * (subset.count + 1) + face->head.length + face->hhea.length +
	              face->maxp.length + 32;
	unsigned char *file = fl_arena_alloc(arena, room, 1);
	if (!file)
		return fl_fail(err, FL_E_MEMORY, "out of memory while cutting a face");
	write_face(&subset, file, length);
	*out = file;
	*glyph_count = subset.count;
	return FL_OK;
}
