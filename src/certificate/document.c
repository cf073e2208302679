/* document.c - set pages become a PDF/A-1b file: libharu keeps objects, compresses and writes.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * libharu's own PDF/A mode and its Unicode fonts do not validate (no CIDSet, no CapHeight, its XMP is not escaped, the
 * identity holds the time), and its glyph search runs over 65536 codes for each face. So fonts, metadata, output intent
 * and identity are made here from its dictionaries, as ISO 19005-1:2005 6.2.2, 6.3, 6.7 want them:
 *   - a Type 0 font with Identity-H, whose codes are the numbers of the subset's glyphs, each code one code point
 *   - ToUnicode from the code points themselves, so that text copied out is the text put in
 *   - XMP that says the same as the information dictionary; an sRGB output intent; /ID from the sheet's fingerprint
 * Errors of libharu stick in its document and are looked at once, at the end. Where it runs out of memory it goes on
 * with what it has already freed; so its memory comes from an arena, which gives nothing back before the end. */
#include "press.h"

#include <hpdf.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* Both hashes have one use: names that differ when the content does. FNV-1a, 64 bit. */
static uint64_t hash(uint64_t state, const void *bytes, size_t length) {
	const unsigned char *at = bytes;
	for (size_t i = 0; i < length; i++)
		state = (state ^ at[i]) * 1099511628211u;
	return state;
}
#define HASH_BEGIN 14695981039346656037u

static HPDF_Dict add_stream(HPDF_Doc pdf, const void *bytes, size_t length, bool compressed) {
	HPDF_Dict dict = HPDF_DictStream_New(pdf->mmgr, pdf->xref);
	if (!dict)
		return NULL;
	dict->filter = compressed ? HPDF_STREAM_FILTER_FLATE_DECODE : HPDF_STREAM_FILTER_NONE;
	const unsigned char *at = bytes;
	for (size_t done = 0; done < length;) { /* its lengths are 32 bit */
		HPDF_UINT part = length - done > 65536 ? 65536u : (HPDF_UINT)(length - done);
		if (HPDF_Stream_Write(dict->stream, (HPDF_BYTE *)(uintptr_t)(at + done), part) != HPDF_OK)
			return NULL;
		done += part;
	}
	return dict;
}

/* A dictionary of its own in the file. */
static HPDF_Dict add_dict(HPDF_Doc pdf, const char *type) {
	HPDF_Dict dict = HPDF_Dict_New(pdf->mmgr);
	if (!dict || HPDF_Xref_Add(pdf->xref, dict) != HPDF_OK)
		return NULL;
	HPDF_Dict_AddName(dict, "Type", type);
	return dict;
}

static HPDF_Array add_array(HPDF_Doc pdf, HPDF_Dict owner, const char *key) {
	HPDF_Array array = HPDF_Array_New(pdf->mmgr);
	return array && HPDF_Dict_Add(owner, key, array) == HPDF_OK ? array : NULL; /* what can't be added is freed */
}

/* ---- fonts ----------------------------------------------------------------- */

/* "ABCDEF+OpenSans": six letters from what is used, as ISO 32000-1, 9.6.4 wants for a subset. */
static void subset_name(const fl_typeface *type, char *out, size_t size) {
	uint64_t sum = hash(HASH_BEGIN, type->points, type->count * sizeof *type->points);
	char tag[7] = "";
	for (int i = 0; i < 6; i++, sum /= 26)
		tag[i] = (char)('A' + sum % 26);
	snprintf(out, size, "%s+%s", tag, type->face.name);
}

static void write_ranges(const fl_typeface *type, fl_text *out) {
	for (size_t from = 1; from < type->count; from += 100) { /* at most 100 entries a section */
		size_t to = from + 100 < type->count ? from + 100 : type->count;
		fl_text_printf(out, "%zu beginbfchar\n", to - from);
		for (size_t i = from; i < to; i++)
			fl_text_printf(out, "<%04X> <%04X>\n", (unsigned)i, (unsigned)type->points[i]);
		fl_text_add(out, "endbfchar\n");
	}
}

static HPDF_Dict add_to_unicode(HPDF_Doc pdf, const fl_typeface *type) {
	fl_text map = {0};
	fl_text_add(&map, "/CIDInit /ProcSet findresource begin\n12 dict begin\nbegincmap\n"
	                  "/CIDSystemInfo << /Registry (Adobe) /Ordering (UCS) /Supplement 0 >> def\n"
	                  "/CMapName /Adobe-Identity-UCS def\n/CMapType 2 def\n"
	                  "1 begincodespacerange\n<0000> <FFFF>\nendcodespacerange\n");
	write_ranges(type, &map);
	fl_text_add(&map, "endcmap\nCMapName currentdict /CMap defineresource pop\nend\nend\n");
	HPDF_Dict stream = map.failed ? NULL : add_stream(pdf, map.data, map.length, true);
	fl_text_free(&map);
	return stream;
}

/* One bit a glyph that the embedded face holds, from the highest bit of the first byte. */
static HPDF_Dict add_cid_set(HPDF_Doc pdf, size_t count) {
	unsigned char bits[8192];
	if (count > sizeof bits * 8)
		return NULL;
	memset(bits, 0, sizeof bits);
	for (size_t i = 0; i < count; i++)
		bits[i / 8] = (unsigned char)(bits[i / 8] | 0x80 >> i % 8);
	return add_stream(pdf, bits, (count + 7) / 8, true);
}

static HPDF_Dict add_descriptor(HPDF_Doc pdf, const fl_face *face, const char *name, const unsigned char *bytes,
                                size_t length, size_t glyph_count) {
	HPDF_Dict descriptor = add_dict(pdf, "FontDescriptor");
	HPDF_Dict file = add_stream(pdf, bytes, length, true);
	HPDF_Dict set = add_cid_set(pdf, glyph_count);
	if (!descriptor || !file || !set)
		return NULL;
	HPDF_Dict_AddNumber(file, "Length1", (HPDF_INT32)length);
	HPDF_Dict_AddName(descriptor, "FontName", name);
	HPDF_Dict_AddNumber(descriptor, "Flags", 4); /* symbolic: it has its own codes */
	HPDF_Array box = add_array(pdf, descriptor, "FontBBox");
	for (int i = 0; box && i < 4; i++)
		HPDF_Array_AddNumber(box, face->box[i]);
	HPDF_Dict_AddNumber(descriptor, "ItalicAngle", 0);
	HPDF_Dict_AddNumber(descriptor, "Ascent", face->ascent);
	HPDF_Dict_AddNumber(descriptor, "Descent", face->descent);
	HPDF_Dict_AddNumber(descriptor, "CapHeight", face->cap_height);
	HPDF_Dict_AddNumber(descriptor, "XHeight", face->x_height);
	HPDF_Dict_AddNumber(descriptor, "StemV", 80);
	HPDF_Dict_Add(descriptor, "FontFile2", file);
	HPDF_Dict_Add(descriptor, "CIDSet", set);
	return descriptor;
}

static HPDF_Dict new_system_info(HPDF_Doc pdf) {
	HPDF_Dict info = HPDF_Dict_New(pdf->mmgr);
	if (!info)
		return NULL;
	HPDF_Dict_Add(info, "Registry", HPDF_String_New(pdf->mmgr, "Adobe", NULL));
	HPDF_Dict_Add(info, "Ordering", HPDF_String_New(pdf->mmgr, "Identity", NULL));
	HPDF_Dict_AddNumber(info, "Supplement", 0);
	return info;
}

/* Widths of all numbers in one run, rounded to thousandths of the em as the embedded face has them. */
static void add_widths(HPDF_Doc pdf, HPDF_Dict font, const fl_typeface *type) {
	HPDF_Array outer = add_array(pdf, font, "W");
	HPDF_Array inner = HPDF_Array_New(pdf->mmgr);
	if (!outer || !inner)
		return;
	HPDF_Array_AddNumber(outer, 0);
	if (HPDF_Array_Add(outer, inner) != HPDF_OK)
		return;
	for (size_t i = 0; i < type->count; i++)
		HPDF_Array_AddReal(inner, (HPDF_REAL)fl_face_advance(&type->face, type->glyphs[i]));
}

static HPDF_Dict add_descendant(HPDF_Doc pdf, const fl_typeface *type, const char *name, HPDF_Dict descriptor) {
	HPDF_Dict font = add_dict(pdf, "Font");
	if (!font)
		return NULL;
	HPDF_Dict_AddName(font, "Subtype", "CIDFontType2");
	HPDF_Dict_AddName(font, "BaseFont", name);
	HPDF_Dict_Add(font, "CIDSystemInfo", new_system_info(pdf));
	HPDF_Dict_Add(font, "FontDescriptor", descriptor);
	HPDF_Dict_AddName(font, "CIDToGIDMap", "Identity");
	add_widths(pdf, font, type);
	return font;
}

static HPDF_Dict add_font(HPDF_Doc pdf, fl_press *press, const fl_typeface *type, fl_error *err) {
	unsigned char *bytes;
	size_t length, glyph_count;
	char name[96];
	if (fl_face_subset(&type->face, type->glyphs, type->count, &press->arena, &bytes, &length, &glyph_count, err) !=
	    FL_OK)
		return NULL;
	subset_name(type, name, sizeof name);
	HPDF_Dict descriptor = add_descriptor(pdf, &type->face, name, bytes, length, glyph_count);
	HPDF_Dict descendant = descriptor ? add_descendant(pdf, type, name, descriptor) : NULL;
	HPDF_Dict map = add_to_unicode(pdf, type);
	HPDF_Dict font = descendant && map ? add_dict(pdf, "Font") : NULL;
	if (!font)
		return NULL;
	HPDF_Dict_AddName(font, "Subtype", "Type0");
	HPDF_Dict_AddName(font, "BaseFont", name);
	HPDF_Dict_AddName(font, "Encoding", "Identity-H");
	HPDF_Array descendants = add_array(pdf, font, "DescendantFonts");
	if (descendants)
		HPDF_Array_Add(descendants, descendant);
	HPDF_Dict_Add(font, "ToUnicode", map);
	return font;
}

/* ---- pages ----------------------------------------------------------------- */

static HPDF_Page add_page(HPDF_Doc pdf, const fl_text *content, HPDF_Dict fonts[FL_WEIGHTS]) {
	HPDF_Page page = HPDF_AddPage(pdf);
	if (!page)
		return NULL;
	HPDF_Page_SetWidth(page, (HPDF_REAL)FL_PAGE_WIDTH);
	HPDF_Page_SetHeight(page, (HPDF_REAL)FL_PAGE_HEIGHT);
	HPDF_Dict resources = HPDF_Page_GetInheritableItem(page, "Resources", HPDF_OCLASS_DICT);
	HPDF_Dict used = HPDF_Dict_New(pdf->mmgr);
	if (!resources || !used || HPDF_Dict_Add(resources, "Font", used) != HPDF_OK)
		return NULL;
	for (int i = 0; i < FL_WEIGHTS; i++) {
		char key[16];
		snprintf(key, sizeof key, "F%d", i + 1);
		HPDF_Dict_Add(used, key, fonts[i]);
	}
	HPDF_PageAttr attr = page->attr;
	HPDF_Stream_Write(attr->stream, (HPDF_BYTE *)content->data, (HPDF_UINT)content->length);
	return page;
}

/* ---- what the document says of itself -------------------------------------- */

static void escape(fl_text *out, const char *text) {
	for (; *text; text++) {
		if (*text == '&')
			fl_text_add(out, "&amp;");
		else if (*text == '<')
			fl_text_add(out, "&lt;");
		else if (*text == '>')
			fl_text_add(out, "&gt;");
		else
			fl_text_append(out, text, 1);
	}
}

static void xmp_property(fl_text *out, const char *before, const char *text, const char *after) {
	fl_text_add(out, before);
	escape(out, text);
	fl_text_add(out, after);
}

/* "2026-04-15T10:30:00+02:00" */
static void xmp_time(const fl_sheet *sheet, char out[40]) {
	char utc[FL_UTC_SIZE];
	int offset = abs(sheet->utc_offset_min);
	fl_utc_format(sheet->made_at + 60 * (fl_utc)sheet->utc_offset_min, utc);
	snprintf(out, 40, "%.19s%c%02d:%02d", utc, sheet->utc_offset_min < 0 ? '-' : '+', offset / 60, offset % 60);
}

/* "D:20260415103000+02'00'" */
static void pdf_time(const fl_sheet *sheet, char out[40]) {
	char t[40];
	xmp_time(sheet, t);
	snprintf(out, 40, "D:%.4s%.2s%.2s%.2s%.2s%.2s%.3s'%.2s'", t, t + 5, t + 8, t + 11, t + 14, t + 17, t + 19, t + 23);
}

static void write_xmp(const fl_sheet *sheet, const char *title, fl_text *out) {
	char time[40];
	xmp_time(sheet, time);
	fl_text_add(out, "<?xpacket begin=\"\xEF\xBB\xBF\" id=\"W5M0MpCehiHzreSzNTczkc9d\"?>\n"
	                 "<x:xmpmeta xmlns:x=\"adobe:ns:meta/\">\n"
	                 "<rdf:RDF xmlns:rdf=\"http://www.w3.org/1999/02/22-rdf-syntax-ns#\">\n"
	                 "<rdf:Description rdf:about=\"\" xmlns:pdfaid=\"http://www.aiim.org/pdfa/ns/id/\">\n"
	                 "<pdfaid:part>1</pdfaid:part>\n<pdfaid:conformance>B</pdfaid:conformance>\n"
	                 "</rdf:Description>\n"
	                 "<rdf:Description rdf:about=\"\" xmlns:dc=\"http://purl.org/dc/elements/1.1/\">\n"
	                 "<dc:format>application/pdf</dc:format>\n");
	if (*sheet->source)
		xmp_property(out, FL_SOURCE_MARK, sheet->source, "</dc:identifier>\n");
	xmp_property(out, "<dc:title><rdf:Alt><rdf:li xml:lang=\"x-default\">", title, "</rdf:li></rdf:Alt></dc:title>\n");
	xmp_property(out, "<dc:creator><rdf:Seq><rdf:li>", sheet->author, "</rdf:li></rdf:Seq></dc:creator>\n");
	xmp_property(out, "<dc:description><rdf:Alt><rdf:li xml:lang=\"x-default\">", sheet->subject,
	             "</rdf:li></rdf:Alt></dc:description>\n</rdf:Description>\n");
	xmp_property(out, "<rdf:Description rdf:about=\"\" xmlns:pdf=\"http://ns.adobe.com/pdf/1.3/\">\n<pdf:Producer>",
	             sheet->program, "</pdf:Producer>\n</rdf:Description>\n");
	xmp_property(out, "<rdf:Description rdf:about=\"\" xmlns:xmp=\"http://ns.adobe.com/xap/1.0/\">\n<xmp:CreatorTool>",
	             sheet->program, "</xmp:CreatorTool>\n");
	fl_text_printf(out, "<xmp:CreateDate>%s</xmp:CreateDate>\n<xmp:ModifyDate>%s</xmp:ModifyDate>\n", time, time);
	fl_text_add(out, "</rdf:Description>\n</rdf:RDF>\n</x:xmpmeta>\n<?xpacket end=\"w\"?>\n");
}

/* UTF-16BE with its mark, as a dictionary holds text that is read. False when memory is out. */
static bool put_text(HPDF_Doc pdf, fl_press *press, HPDF_Dict into, const char *key, const char *text) {
	size_t length = strlen(text);
	unsigned char *wide = fl_arena_alloc(&press->arena, 2 * length + 4, 1);
	if (!wide)
		return false;
	HPDF_UINT at = 0;
	wide[at++] = 0xFE;
	wide[at++] = 0xFF;
	for (const char *cursor = text; *cursor;) {
		uint32_t point = fl_utf8_next(&cursor);
		if (point > 0xffff) {
			unsigned high = 0xD800 + ((point - 0x10000) >> 10);
			wide[at++] = (unsigned char)(high >> 8);
			wide[at++] = (unsigned char)high;
			point = 0xDC00 + ((point - 0x10000) & 0x3ff);
		}
		wide[at++] = (unsigned char)(point >> 8);
		wide[at++] = (unsigned char)point;
	}
	return HPDF_Dict_Add(into, key, HPDF_Binary_New(pdf->mmgr, wide, at)) == HPDF_OK;
}

/* The information dictionary and the XMP that says the same. False when memory is out. */
static bool add_information(HPDF_Doc pdf, fl_press *press, const char *title) {
	const fl_sheet *sheet = press->sheet;
	char time[40];
	pdf_time(sheet, time);
	HPDF_Dict info = pdf->info;
	if (!put_text(pdf, press, info, "Title", title) || !put_text(pdf, press, info, "Author", sheet->author) ||
	    !put_text(pdf, press, info, "Subject", sheet->subject) ||
	    !put_text(pdf, press, info, "Creator", sheet->program) ||
	    !put_text(pdf, press, info, "Producer", sheet->program))
		return false;
	HPDF_Dict_Add(pdf->info, "CreationDate", HPDF_String_New(pdf->mmgr, time, NULL));
	HPDF_Dict_Add(pdf->info, "ModDate", HPDF_String_New(pdf->mmgr, time, NULL));
	fl_text xmp = {0};
	write_xmp(sheet, title, &xmp);
	HPDF_Dict metadata = xmp.failed ? NULL : add_stream(pdf, xmp.data, xmp.length, false);
	fl_text_free(&xmp);
	if (!metadata)
		return false;
	HPDF_Dict_AddName(metadata, "Type", "Metadata");
	HPDF_Dict_AddName(metadata, "Subtype", "XML");
	HPDF_Dict_Add(pdf->catalog, "Metadata", metadata);
	HPDF_Dict_Add(pdf->catalog, "Lang", HPDF_String_New(pdf->mmgr, "en-GB", NULL));
	return true;
}

static void add_output_intent(HPDF_Doc pdf, const fl_press *press) {
	HPDF_Dict profile = add_stream(pdf, press->profile, press->profile_length, true);
	HPDF_Dict intent = add_dict(pdf, "OutputIntent");
	HPDF_Array intents = add_array(pdf, pdf->catalog, "OutputIntents");
	if (!profile || !intent || !intents)
		return;
	HPDF_Dict_AddNumber(profile, "N", 3);
	HPDF_Dict_AddName(intent, "S", "GTS_PDFA1");
	HPDF_Dict_Add(intent, "OutputConditionIdentifier", HPDF_String_New(pdf->mmgr, "sRGB IEC61966-2.1", NULL));
	HPDF_Dict_Add(intent, "Info", HPDF_String_New(pdf->mmgr, "sRGB IEC61966-2.1", NULL));
	HPDF_Dict_Add(intent, "DestOutputProfile", profile);
	HPDF_Array_Add(intents, intent);
}

/* /ID twice the same 16 bytes: what the document was made of, and the pages that came of it. */
static void add_identity(HPDF_Doc pdf, const fl_press *press) {
	const char *print = press->sheet->fingerprint;
	uint64_t sums[2] = {hash(HASH_BEGIN, print, strlen(print)), HASH_BEGIN};
	for (size_t i = 0; i < press->page_count; i++)
		sums[1] = hash(sums[1], press->pages[i].data, press->pages[i].length);
	HPDF_BYTE identity[16];
	for (int i = 0; i < 16; i++)
		identity[i] = (HPDF_BYTE)(sums[i / 8] >> 8 * (i % 8));
	HPDF_Array ids = add_array(pdf, pdf->trailer, "ID");
	for (int i = 0; ids && i < 2; i++)
		HPDF_Array_Add(ids, HPDF_Binary_New(pdf->mmgr, identity, sizeof identity));
}

/* ---- the outline ------------------------------------------------------------ */

/* ISO 32000-1, 12.3.3: entries linked both ways and to the one above; each goes to the top of its page by a GoTo
 * action, which ISO 19005-1, 6.6.1 allows. */
static bool fill_bookmark(HPDF_Doc pdf, fl_press *press, HPDF_Dict entry, const fl_bookmark *mark, HPDF_Page page) {
	HPDF_Dict action = HPDF_Dict_New(pdf->mmgr);
	if (!action || HPDF_Dict_Add(entry, "A", action) != HPDF_OK)
		return false;
	HPDF_Dict_AddName(action, "S", "GoTo");
	HPDF_Array place = add_array(pdf, action, "D");
	if (!place || !page)
		return false;
	HPDF_Array_Add(place, page);
	HPDF_Array_AddName(place, "Fit");
	return put_text(pdf, press, entry, "Title", mark->title);
}

/* Links the bookmarks of one level that belong to `above`, from `from` up to `to`. */
static void link_level(HPDF_Dict above, HPDF_Dict *entries, const fl_bookmark *marks, size_t from, size_t to,
                       int level) {
	HPDF_Dict last = NULL;
	HPDF_INT32 count = 0;
	for (size_t i = from; i < to; i++) {
		if (marks[i].level != level)
			continue;
		HPDF_Dict_Add(entries[i], "Parent", above);
		if (last) {
			HPDF_Dict_Add(entries[i], "Prev", last);
			HPDF_Dict_Add(last, "Next", entries[i]);
		} else {
			HPDF_Dict_Add(above, "First", entries[i]);
		}
		last = entries[i];
		count++;
		size_t end = i + 1;
		while (level == 0 && end < to && marks[end].level > 0)
			end++;
		if (end > i + 1)
			link_level(entries[i], entries, marks, i + 1, end, 1);
	}
	if (last)
		HPDF_Dict_Add(above, "Last", last);
	HPDF_Dict_AddNumber(above, "Count", count);
}

static bool add_outline(HPDF_Doc pdf, fl_press *press, HPDF_Page *pages) {
	size_t count = press->bookmark_count;
	if (count == 0)
		return true;
	HPDF_Dict outline = add_dict(pdf, "Outlines");
	HPDF_Dict *entries = fl_arena_alloc(&press->arena, count, sizeof *entries);
	if (!outline || !entries || HPDF_Dict_Add(pdf->catalog, "Outlines", outline) != HPDF_OK)
		return false;
	for (size_t i = 0; i < count; i++) {
		size_t page = press->bookmarks[i].page;
		entries[i] = HPDF_Dict_New(pdf->mmgr);
		if (!entries[i] || HPDF_Xref_Add(pdf->xref, entries[i]) != HPDF_OK || page < 1 || page > press->page_count ||
		    !fill_bookmark(pdf, press, entries[i], &press->bookmarks[i], pages[page - 1]))
			return false;
	}
	link_level(outline, entries, press->bookmarks, 0, count, 0);
	HPDF_Dict_AddName(pdf->catalog, "PageMode", "UseOutlines");
	return true;
}

/* ---- all of it ------------------------------------------------------------- */

static fl_status build(HPDF_Doc pdf, fl_press *press, fl_error *err) {
	HPDF_Dict fonts[FL_WEIGHTS];
	pdf->pdf_version = HPDF_VER_14;
	HPDF_SetCompressionMode(pdf, HPDF_COMP_ALL);
	for (int i = 0; i < FL_WEIGHTS; i++) {
		fonts[i] = add_font(pdf, press, &press->faces[i], err);
		if (!fonts[i])
			return fl_fail(err, FL_E_MEMORY, "out of memory while writing the certificate's faces");
	}
	HPDF_Page *pages = fl_arena_alloc(&press->arena, press->page_count, sizeof *pages);
	for (size_t i = 0; pages && i < press->page_count; i++)
		pages[i] = add_page(pdf, &press->pages[i], fonts);
	const fl_sheet *sheet = press->sheet;
	char *title = fl_arena_printf(&press->arena, "%s %s", sheet->title, sheet->number);
	if (!pages || !title || !add_information(pdf, press, title) || !add_outline(pdf, press, pages))
		return fl_fail(err, FL_E_MEMORY, "out of memory while writing the certificate");
	add_output_intent(pdf, press);
	add_identity(pdf, press);
	HPDF_SaveToStream(pdf);
	HPDF_STATUS code = HPDF_GetError(pdf);
	if (code == HPDF_FAILD_TO_ALLOC_MEM)
		return fl_fail(err, FL_E_MEMORY, "out of memory while writing the certificate");
	if (code != HPDF_OK)
		return fl_fail(err, FL_E_INTERNAL, "the PDF could not be put together (libharu says 0x%04lX)",
		               (unsigned long)code);
	return FL_OK;
}

static fl_status take_bytes(HPDF_Doc pdf, unsigned char **bytes, size_t *length, fl_error *err) {
	HPDF_UINT32 size = HPDF_GetStreamSize(pdf);
	unsigned char *taken = size > 0 ? malloc(size) : NULL;
	if (!taken)
		return fl_fail(err, FL_E_MEMORY, "out of memory while writing the certificate");
	HPDF_ResetStream(pdf);
	for (HPDF_UINT32 done = 0; done < size;) {
		HPDF_UINT32 part = size - done;
		HPDF_STATUS code = HPDF_ReadFromStream(pdf, taken + done, &part);
		done += part;
		if (code == HPDF_STREAM_EOF || part == 0) {
			if (done == size)
				break;
			free(taken);
			return fl_fail(err, FL_E_INTERNAL, "the PDF ended before its length");
		}
	}
	*bytes = taken;
	*length = size;
	return FL_OK;
}

/* The arena of the document that this thread is writing: libharu hands its callbacks nothing by which to find it. Set
 * only inside fl_press_bytes. */
static _Thread_local fl_arena *document_memory;

static void *get_memory(HPDF_UINT size) {
	return fl_arena_alloc(document_memory, 1, size);
}

static void give_back(void *memory) {
	(void)memory; /* with the arena, at the end */
}

fl_status fl_press_bytes(fl_press *press, unsigned char **bytes, size_t *length, fl_error *err) {
	fl_arena memory = {0};
	document_memory = &memory;
	HPDF_Doc pdf = HPDF_NewEx(NULL, get_memory, give_back, 0, NULL);
	fl_status status =
	    pdf ? build(pdf, press, err) : fl_fail(err, FL_E_MEMORY, "out of memory while writing the certificate");
	if (status == FL_OK)
		status = take_bytes(pdf, bytes, length, err);
	fl_arena_free(&memory); /* the document too: nothing in it is held elsewhere */
	document_memory = NULL;
	return status;
}
