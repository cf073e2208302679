/* face.c - reads the few tables of a TrueType face that setting text needs. Format: OpenType specification, chapters
 * head, hhea, hmtx, maxp, cmap (format 4), name, OS/2, loca, glyf.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "face.h"

#include "bytes.h"

#include <stdio.h>
#include <string.h>

static unsigned get16(const fl_face *face, uint32_t at) {
	return (size_t)at + 2 <= face->length ? fl_get16(face->bytes + at) : 0;
}

static int get16s(const fl_face *face, uint32_t at) {
	return (int16_t)get16(face, at);
}

static uint32_t get32(const fl_face *face, uint32_t at) {
	return (size_t)at + 4 <= face->length ? fl_get32(face->bytes + at) : 0;
}

/* The table of that tag; length 0 if it is absent or reaches beyond the file. */
static fl_table_place find_table(const fl_face *face, const char *tag) {
	unsigned count = get16(face, 4);
	for (unsigned i = 0; i < count; i++) {
		uint32_t entry = 12 + 16 * i;
		if ((size_t)entry + 16 > face->length)
			break;
		if (memcmp(face->bytes + entry, tag, 4) != 0)
			continue;
		fl_table_place place = {get32(face, entry + 8), get32(face, entry + 12)};
		if ((size_t)place.offset + place.length <= face->length)
			return place;
	}
	return (fl_table_place){0, 0};
}

/* Finds the Unicode subtable of format 4 (platform 3 encoding 1, or platform 0). */
static bool find_segments(fl_face *face) {
	unsigned count = get16(face, face->cmap.offset + 2);
	for (unsigned i = 0; i < count; i++) {
		uint32_t record = face->cmap.offset + 4 + 8 * i;
		unsigned platform = get16(face, record), encoding = get16(face, record + 2);
		uint32_t at = face->cmap.offset + get32(face, record + 4);
		if ((platform == 0 || (platform == 3 && encoding == 1)) && get16(face, at) == 4) {
			face->segments = at;
			face->segment_count = get16(face, at + 6) / 2;
			return face->segment_count > 0;
		}
	}
	return false;
}

static int per_mille(const fl_face *face, int units) {
	return (units * 1000 + (units >= 0 ? 1 : -1) * face->units_per_em / 2) / face->units_per_em;
}

static void read_metrics(fl_face *face) {
	fl_table_place os2 = find_table(face, "OS/2");
	face->ascent = per_mille(face, get16s(face, face->hhea.offset + 4));
	face->descent = per_mille(face, get16s(face, face->hhea.offset + 6));
	for (int i = 0; i < 4; i++)
		face->box[i] = per_mille(face, get16s(face, face->head.offset + 36 + 2 * (uint32_t)i));
	face->cap_height = 700;
	face->x_height = 500;
	if (os2.length >= 90) {
		face->x_height = per_mille(face, get16s(face, os2.offset + 86));
		face->cap_height = per_mille(face, get16s(face, os2.offset + 88));
	}
}

/* PostScript name (name ID 6, platform 3: UTF-16BE of ASCII), "Face" if there is none. */
static void read_name(fl_face *face) {
	snprintf(face->name, sizeof face->name, "Face");
	fl_table_place name = find_table(face, "name");
	unsigned count = name.length ? get16(face, name.offset + 2) : 0;
	for (unsigned i = 0; i < count; i++) {
		uint32_t record = name.offset + 6 + 12 * i;
		if (get16(face, record) != 3 || get16(face, record + 6) != 6)
			continue;
		unsigned length = get16(face, record + 8) / 2;
		uint32_t at = name.offset + get16(face, name.offset + 4) + get16(face, record + 10);
		if (length == 0 || length >= sizeof face->name)
			continue;
		for (unsigned c = 0; c < length; c++) {
			unsigned letter = get16(face, at + 2 * c);
			bool plain = letter > 0x20 && letter < 0x7f && !strchr("()<>[]{}/%#", (int)letter);
			face->name[c] = plain ? (char)letter : '-';
		}
		face->name[length] = '\0';
		return;
	}
}

fl_status fl_face_open(fl_face *face, const unsigned char *bytes, size_t length, const char *file, fl_error *err) {
	*face = (fl_face){.bytes = bytes, .length = length};
	fl_place place = {.file = file};
	if (length < 12 || fl_get32(bytes) != 0x00010000u)
		return fl_fail_at(err, FL_E_VALUE, place, "not a TrueType face; install the program's faces again");
	struct {
		const char *tag;
		fl_table_place *place;
		uint32_t least;
	} needed[] = {{"head", &face->head, 54}, {"hhea", &face->hhea, 36}, {"maxp", &face->maxp, 6},
	              {"hmtx", &face->hmtx, 4},  {"loca", &face->loca, 4},  {"glyf", &face->glyf, 1},
	              {"cmap", &face->cmap, 4}};
	for (size_t i = 0; i < sizeof needed / sizeof *needed; i++) {
		*needed[i].place = find_table(face, needed[i].tag);
		if (needed[i].place->length < needed[i].least)
			return fl_fail_at(err, FL_E_VALUE, place, "the face lacks its table %s; install the program's faces again",
			                  needed[i].tag);
	}
	face->units_per_em = (int)get16(face, face->head.offset + 18);
	face->long_offsets = get16(face, face->head.offset + 50) != 0;
	face->glyph_count = get16(face, face->maxp.offset + 4);
	face->advance_count = get16(face, face->hhea.offset + 34);
	uint32_t offsets = (face->glyph_count + 1) * (face->long_offsets ? 4 : 2);
	if (face->units_per_em < 16 || face->glyph_count == 0 || face->advance_count == 0 || face->loca.length < offsets ||
	    face->hmtx.length < 4 * face->advance_count || !find_segments(face))
		return fl_fail_at(err, FL_E_VALUE, place, "the face is damaged; install the program's faces again");
	read_metrics(face);
	read_name(face);
	return FL_OK;
}

unsigned fl_face_glyph(const fl_face *face, uint32_t point) {
	if (point > 0xffff)
		return 0;
	uint32_t ends = face->segments + 14, room = 2 * face->segment_count;
	for (unsigned i = 0; i < face->segment_count; i++) {
		if (get16(face, ends + 2 * i) < point)
			continue;
		unsigned start = get16(face, ends + 2 + room + 2 * i);
		if (start > point)
			return 0;
		unsigned delta = get16(face, ends + 2 + 2 * room + 2 * i);
		uint32_t range_at = ends + 2 + 3 * room + 2 * i;
		unsigned range = get16(face, range_at);
		if (range == 0)
			return (point + delta) & 0xffff;
		unsigned glyph = get16(face, range_at + range + 2 * (point - start));
		return glyph ? (glyph + delta) & 0xffff : 0;
	}
	return 0;
}

double fl_face_advance(const fl_face *face, unsigned glyph) {
	unsigned entry = glyph < face->advance_count ? glyph : face->advance_count - 1;
	return 1000.0 * get16(face, face->hmtx.offset + 4 * entry) / face->units_per_em;
}
