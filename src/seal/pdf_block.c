/* pdf_block.c - the visible block: lines of text in a frame, in a face that is embedded with it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The page's own fonts hold only the characters that the page used, so the block brings its own: a Type 0 font whose
 * codes are the numbers of the subset's glyphs, with ToUnicode, CIDSet and widths as ISO 19005-1:2005, 6.3 wants. */
#include "pdf_update.h"

#include <stdio.h>
#include <string.h>

#define GLYPHS_MOST 256
#define SIZE_MOST 8.5 /* points */
#define SIZE_LEAST 4.0
#define LEADING 1.3
#define MARGIN 5.0

typedef struct fl_block_face {
	const fl_seal_face *face;
	uint16_t glyphs[GLYPHS_MOST];
	uint32_t points[GLYPHS_MOST];
	size_t count; /* number 0 is the glyph "no such character" */
} fl_block_face;

/* Number of a character in the subset, which it may enter; 0 where that is not possible. */
static unsigned number_of(fl_block_face *used, uint32_t point) {
	for (size_t i = 1; i < used->count; i++)
		if (used->points[i] == point)
			return (unsigned)i;
	unsigned glyph = point <= 0xffff ? used->face->glyph(used->face->self, point) : 0;
	if (glyph == 0 || glyph > 0xffff || used->count == GLYPHS_MOST)
		return 0;
	used->glyphs[used->count] = (uint16_t)glyph;
	used->points[used->count] = point;
	return (unsigned)used->count++;
}

/* ---- lines ----------------------------------------------------------------------------------------------------- */

static fl_status refuse_text(const fl_pdf_signing *signing, fl_error *err) {
	if (signing->text_count < 1 || signing->text_count > FL_SEAL_TEXT_LINES)
		return fl_fail(err, FL_E_VALUE, "the visible block takes 1 to %d lines", FL_SEAL_TEXT_LINES);
	for (size_t i = 0; i < signing->text_count; i++)
		if (!fl_utf8_valid(signing->text[i], strlen(signing->text[i])) || fl_text_has_control(signing->text[i]))
			return fl_fail(err, FL_E_VALUE, "line %zu of the visible block holds a control character or is not UTF-8",
			               i + 1);
	return FL_OK;
}

/* Width of a line in thousandths of its size; enters its characters. */
static fl_status measure(fl_block_face *used, const char *text, double *width, fl_error *err) {
	*width = 0;
	for (const char *at = text; *at;) {
		const char *from = at;
		uint32_t point = fl_utf8_next(&at);
		unsigned number = number_of(used, point);
		if (number == 0)
			return fl_fail(err, FL_E_VALUE,
			               "\"%.100s\" holds \"%.*s\" (U+%04X), which the certificate's face cannot show", text,
			               (int)(at - from), from, (unsigned)point);
		*width += used->face->advance(used->face->self, used->glyphs[number]);
	}
	return FL_OK;
}

static void write_line(fl_block_face *used, const char *text, double size, double x, double y, fl_text *out) {
	fl_text_add(out, "BT /F1 ");
	fl_update_number(out, size);
	fl_text_add(out, "Tf ");
	fl_update_number(out, x);
	fl_update_number(out, y);
	fl_text_add(out, "Td <");
	while (*text)
		fl_text_printf(out, "%04X", number_of(used, fl_utf8_next(&text)));
	fl_text_add(out, "> Tj ET\n");
}

static void write_frame(const fl_seal_place *place, fl_text *out) {
	fl_text_add(out, "q 0.6 w 0.35 G 0.3 0.3 ");
	fl_update_number(out, place->width - 0.6);
	fl_update_number(out, place->height - 0.6);
	fl_text_add(out, "re S Q\n0 g\n");
}

/* All lines in one size, the largest that fits; content of the form. */
static fl_status write_lines(fl_block_face *used, const fl_pdf_signing *signing, fl_text *out, fl_error *err) {
	const fl_seal_place *place = &signing->place;
	double lines = (double)signing->text_count, room = place->height - 2 * MARGIN;
	double size = room / (lines * LEADING) < SIZE_MOST ? room / (lines * LEADING) : SIZE_MOST;
	for (size_t i = 0; i < signing->text_count; i++) {
		double width, fits;
		fl_status status = measure(used, signing->text[i], &width, err);
		if (status != FL_OK)
			return status;
		fits = width > 0 ? 1000 * (place->width - 2 * MARGIN) / width : size;
		size = fits < size ? fits : size;
	}
	if (!(size >= SIZE_LEAST))
		return fl_fail(err, FL_E_VALUE,
		               "the lines do not fit the place of the visible block in a size that can be read");
	write_frame(place, out);
	double top = place->height / 2 + lines * LEADING * size / 2;
	for (size_t i = 0; i < signing->text_count; i++)
		write_line(used, signing->text[i], size, MARGIN, top - ((double)i + 1) * LEADING * size + 0.35 * size, out);
	return FL_OK;
}

/* ---- face ------------------------------------------------------------------------------------------------------ */

static unsigned write_to_unicode(fl_pdf_update *update, const fl_block_face *used) {
	fl_text map = {0};
	fl_text_add(&map, "/CIDInit /ProcSet findresource begin\n12 dict begin\nbegincmap\n"
	                  "/CIDSystemInfo << /Registry (Adobe) /Ordering (UCS) /Supplement 0 >> def\n"
	                  "/CMapName /Adobe-Identity-UCS def\n/CMapType 2 def\n"
	                  "1 begincodespacerange\n<0000> <FFFF>\nendcodespacerange\n");
	for (size_t from = 1; from < used->count; from += 100) { /* at most 100 entries a section */
		size_t to = from + 100 < used->count ? from + 100 : used->count;
		fl_text_printf(&map, "%zu beginbfchar\n", to - from);
		for (size_t i = from; i < to; i++)
			fl_text_printf(&map, "<%04X> <%04X>\n", (unsigned)i, (unsigned)used->points[i]);
		fl_text_add(&map, "endbfchar\n");
	}
	fl_text_add(&map, "endcmap\nCMapName currentdict /CMap defineresource pop\nend\nend");
	if (map.failed)
		update->bytes.failed = true;
	unsigned number = fl_update_stream(update, "", map.data, map.length);
	fl_text_free(&map);
	return number;
}

/* One bit a glyph of the embedded face. */
static unsigned write_cid_set(fl_pdf_update *update, size_t glyph_count) {
	unsigned char bits[1024] = {0};
	if (glyph_count > sizeof bits * 8)
		update->bytes.failed = true;
	for (size_t i = 0; i < glyph_count && i < sizeof bits * 8; i++)
		bits[i / 8] = (unsigned char)(bits[i / 8] | 0x80 >> i % 8);
	return fl_update_stream(update, "", bits, (glyph_count + 7) / 8);
}

static unsigned write_descriptor(fl_pdf_update *update, const fl_seal_face *face, const char *name, unsigned file,
                                 unsigned cid_set) {
	unsigned number = fl_update_new(update);
	fl_update_begin(update, number);
	fl_text_printf(&update->bytes,
	               "<< /Type /FontDescriptor /FontName /%s /Flags 4 /FontBBox [%d %d %d %d] /ItalicAngle 0 /Ascent %d "
	               "/Descent %d /CapHeight %d /XHeight %d /StemV 80 /FontFile2 %u 0 R /CIDSet %u 0 R >>",
	               name, face->box[0], face->box[1], face->box[2], face->box[3], face->ascent, face->descent,
	               face->cap_height, face->x_height, file, cid_set);
	fl_update_end(update);
	return number;
}

static unsigned write_descendant(fl_pdf_update *update, const fl_block_face *used, const char *name,
                                 unsigned descriptor) {
	unsigned number = fl_update_new(update);
	fl_update_begin(update, number);
	fl_text_printf(&update->bytes,
	               "<< /Type /Font /Subtype /CIDFontType2 /BaseFont /%s /CIDSystemInfo << /Registry (Adobe) /Ordering "
	               "(Identity) /Supplement 0 >> /FontDescriptor %u 0 R /CIDToGIDMap /Identity /W [0 [",
	               name, descriptor);
	for (size_t i = 0; i < used->count; i++)
		fl_update_number(&update->bytes, used->face->advance(used->face->self, used->glyphs[i]));
	fl_text_add(&update->bytes, "]] >>");
	fl_update_end(update);
	return number;
}

/* "ABCDEF+Name": six letters from what is used (ISO 32000-1, 9.6.4). */
static void subset_name(const fl_block_face *used, char *out, size_t size) {
	uint64_t sum = 14695981039346656037u;
	for (size_t i = 0; i < used->count; i++)
		sum = (sum ^ used->points[i]) * 1099511628211u;
	char tag[7] = "";
	for (int i = 0; i < 6; i++, sum /= 26)
		tag[i] = (char)('A' + sum % 26);
	snprintf(out, size, "%s+%.63s", tag, used->face->name);
}

static fl_status write_font(fl_pdf_update *update, const fl_block_face *used, unsigned *number) {
	fl_arena arena = {0};
	unsigned char *bytes;
	size_t length, glyph_count;
	char name[80], entries[48];
	const fl_seal_face *face = used->face;
	fl_status status =
	    face->subset(face->self, used->glyphs, used->count, &arena, &bytes, &length, &glyph_count, update->err);
	if (status == FL_OK) {
		subset_name(used, name, sizeof name);
		snprintf(entries, sizeof entries, "/Length1 %zu ", length);
		unsigned file = fl_update_stream(update, entries, bytes, length);
		unsigned set = write_cid_set(update, glyph_count), map = write_to_unicode(update, used);
		unsigned descendant = write_descendant(update, used, name, write_descriptor(update, face, name, file, set));
		*number = fl_update_new(update);
		fl_update_begin(update, *number);
		fl_text_printf(&update->bytes,
		               "<< /Type /Font /Subtype /Type0 /BaseFont /%s /Encoding /Identity-H /DescendantFonts [%u 0 R] "
		               "/ToUnicode %u 0 R >>",
		               name, descendant, map);
		fl_update_end(update);
	}
	fl_arena_free(&arena);
	return status;
}

fl_status fl_update_block(fl_pdf_update *update, const fl_pdf_signing *signing, unsigned *number) {
	fl_block_face used = {.face = signing->face, .count = 1};
	fl_text content = {0}, entries = {0};
	unsigned font = 0;
	fl_status status = refuse_text(signing, update->err);
	if (status == FL_OK)
		status = write_lines(&used, signing, &content, update->err);
	if (status == FL_OK)
		status = write_font(update, &used, &font);
	if (status == FL_OK) {
		fl_text_add(&entries, "/Type /XObject /Subtype /Form /BBox [0 0 ");
		fl_update_number(&entries, signing->place.width);
		fl_update_number(&entries, signing->place.height);
		fl_text_printf(&entries, "] /Resources << /Font << /F1 %u 0 R >> >> ", font);
		if (content.failed || entries.failed)
			status = fl_fail(update->err, FL_E_MEMORY, "out of memory while signing");
		else
			*number = fl_update_stream(update, entries.data, content.data, content.length);
	}
	fl_text_free(&content);
	fl_text_free(&entries);
	return status;
}
