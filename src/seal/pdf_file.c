/* pdf_file.c - revisions, tables and objects of a PDF file. Nothing is searched for but the last "startxref": every
 * other place is stated by the file and must hold exactly what belongs there.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "pdf.h"

#include <string.h>

#define ENTRY 20
#define TAIL 64
#define PAGES_MOST 5000
#define LEVELS_MOST 16

fl_status fl_pdf_refuse(const fl_pdf *pdf, size_t at, const char *what) {
	return fl_fail(pdf->err, FL_E_SYNTAX, "the PDF %s (byte %zu)", what, at);
}

/* ---- tables --------------------------------------------------------------------------------------------------- */

/* One end of line, and the file may end without. */
static size_t skip_line_end(const fl_pdf *pdf, size_t at) {
	if (at < pdf->length && pdf->bytes[at] == '\r')
		at++;
	if (at < pdf->length && pdf->bytes[at] == '\n')
		at++;
	return at;
}

/* "0000000016 00000 n" and two bytes of line end; true where it has that form. */
static bool entry_at(const fl_pdf *pdf, size_t at, uint64_t *offset, bool *in_use) {
	uint64_t generation;
	size_t here = at;
	if (pdf->length - at < ENTRY || !fl_pdf_digits(pdf, &here, at + 10, 10, offset) || here != at + 10 ||
	    pdf->bytes[here++] != ' ' || !fl_pdf_digits(pdf, &here, at + 16, 5, &generation) || here != at + 16 ||
	    pdf->bytes[here++] != ' ')
		return false;
	*in_use = pdf->bytes[here] == 'n';
	bool line_end = (pdf->bytes[at + 18] == ' ' && (pdf->bytes[at + 19] == '\n' || pdf->bytes[at + 19] == '\r')) ||
	                (pdf->bytes[at + 18] == '\r' && pdf->bytes[at + 19] == '\n');
	return line_end && (*in_use ? generation == 0 : pdf->bytes[here] == 'f');
}

static fl_status read_section(fl_pdf *pdf, size_t *at, fl_pdf_section *out) {
	uint64_t first, count, offset;
	bool in_use;
	if (!fl_pdf_digits(pdf, at, pdf->length, 10, &first) || *at >= pdf->length || pdf->bytes[(*at)++] != ' ' ||
	    !fl_pdf_digits(pdf, at, pdf->length, 10, &count))
		return fl_pdf_refuse(pdf, *at, "has a damaged cross-reference table");
	*at = fl_pdf_skip(pdf, *at, pdf->length);
	if (first > FL_PDF_OBJECTS_MOST || count > FL_PDF_OBJECTS_MOST || first + count > FL_PDF_OBJECTS_MOST)
		return fl_pdf_refuse(pdf, *at, "claims more objects than such a file can need");
	if (count > (pdf->length - *at) / ENTRY)
		return fl_pdf_refuse(pdf, *at, "has a cross-reference table that is cut off");
	for (size_t i = 0; i < count; i++)
		if (!entry_at(pdf, *at + ENTRY * i, &offset, &in_use))
			return fl_pdf_refuse(pdf, *at + ENTRY * i, "has a damaged cross-reference table");
	*out = (fl_pdf_section){(unsigned)first, (unsigned)count, *at};
	*at += ENTRY * (size_t)count;
	return FL_OK;
}

static fl_status read_table(fl_pdf *pdf, fl_pdf_revision *revision, size_t *at) {
	size_t capacity = 0;
	unsigned next = 0;
	if (!fl_pdf_word(pdf, at, pdf->length, "xref"))
		return fl_pdf_refuse(pdf, *at, "has no cross-reference table where it says; other kinds of PDF are not read");
	for (;;) {
		*at = fl_pdf_skip(pdf, *at, pdf->length);
		if (fl_pdf_word(pdf, at, pdf->length, "trailer"))
			return FL_OK;
		fl_pdf_section section;
		fl_status status = read_section(pdf, at, &section);
		if (status != FL_OK)
			return status;
		if (revision->section_count > 0 && section.first < next)
			return fl_pdf_refuse(pdf, section.at, "lists an object twice in one cross-reference table");
		next = section.first + section.count;
		if (revision->section_count == FL_PDF_SECTIONS_MOST)
			return fl_pdf_refuse(pdf, *at, "has a cross-reference table of too many pieces");
		fl_pdf_section *grown =
		    fl_arena_grow(pdf->arena, revision->sections, revision->section_count, &capacity, sizeof *grown);
		if (!grown)
			return fl_fail(pdf->err, FL_E_MEMORY, "out of memory while reading a PDF");
		revision->sections = grown;
		revision->sections[revision->section_count++] = section;
	}
}

static fl_status check_trailer(const fl_pdf *pdf, const fl_pdf_value *trailer) {
	if (trailer->kind != FL_PDF_DICTIONARY)
		return fl_pdf_refuse(pdf, trailer->begin, "has no trailer");
	if (fl_pdf_get(trailer, "Encrypt"))
		return fl_pdf_refuse(pdf, trailer->begin, "is encrypted, which a certificate must not be");
	if (fl_pdf_get(trailer, "XRefStm"))
		return fl_pdf_refuse(pdf, trailer->begin, "has a second, hidden cross-reference table");
	return FL_OK;
}

/* From "xref" to behind "%%EOF" and its end of line. */
static fl_status read_revision(fl_pdf *pdf, size_t table, fl_pdf_revision *out) {
	size_t at = table;
	uint64_t stated;
	*out = (fl_pdf_revision){.table = table};
	fl_status status = read_table(pdf, out, &at);
	if (status == FL_OK)
		status = fl_pdf_read_value(pdf, at, pdf->length, &out->trailer, &at);
	if (status == FL_OK)
		status = check_trailer(pdf, &out->trailer);
	if (status != FL_OK)
		return status;
	at = fl_pdf_skip(pdf, at, pdf->length);
	if (!fl_pdf_word(pdf, &at, pdf->length, "startxref"))
		return fl_pdf_refuse(pdf, at, "has no \"startxref\" behind its trailer");
	at = skip_line_end(pdf, at);
	if (!fl_pdf_digits(pdf, &at, pdf->length, 12, &stated) || stated != table)
		return fl_pdf_refuse(pdf, at, "states another place of its cross-reference table than it has");
	at = skip_line_end(pdf, at);
	if (pdf->length - at < 5 || memcmp(pdf->bytes + at, "%%EOF", 5) != 0)
		return fl_pdf_refuse(pdf, at, "does not end as it must: it is cut off, or something was put in");
	out->end = skip_line_end(pdf, at + 5);
	return FL_OK;
}

/* Place of the last table, from the number behind the last "startxref". */
static fl_status last_table(const fl_pdf *pdf, size_t *table) {
	static const char word[] = "startxref";
	size_t from = pdf->length > TAIL ? pdf->length - TAIL : 0;
	for (size_t at = pdf->length; at-- > from;) {
		if (pdf->length - at < sizeof word - 1 || memcmp(pdf->bytes + at, word, sizeof word - 1) != 0)
			continue;
		uint64_t stated;
		size_t number = skip_line_end(pdf, at + sizeof word - 1);
		if (!fl_pdf_digits(pdf, &number, pdf->length, 12, &stated) || stated >= at)
			break;
		*table = (size_t)stated;
		return FL_OK;
	}
	return fl_pdf_refuse(pdf, pdf->length,
	                     "does not end as it must: it is cut off, or something was put behind its end");
}

static fl_status previous_table(const fl_pdf *pdf, const fl_pdf_revision *revision, bool *has, size_t *table) {
	const fl_pdf_value *previous = fl_pdf_get(&revision->trailer, "Prev");
	*has = previous != NULL;
	if (!previous)
		return FL_OK;
	if (previous->kind != FL_PDF_INTEGER || previous->whole < 0 || (uint64_t)previous->whole >= revision->table)
		return fl_pdf_refuse(pdf, previous->begin, "points to an earlier cross-reference table that is not earlier");
	*table = (size_t)previous->whole;
	return FL_OK;
}

/* Newest first into place, then turned round. */
static fl_status read_revisions(fl_pdf *pdf) {
	size_t table = 0;
	bool more = true;
	fl_status status = last_table(pdf, &table);
	while (status == FL_OK && more) {
		if (pdf->revision_count == FL_PDF_REVISIONS_MOST)
			return fl_pdf_refuse(pdf, table, "was added to too many times");
		fl_pdf_revision *revision = &pdf->revisions[pdf->revision_count++];
		status = read_revision(pdf, table, revision);
		if (status == FL_OK)
			status = previous_table(pdf, revision, &more, &table);
	}
	for (size_t i = 0; i < pdf->revision_count / 2; i++) {
		fl_pdf_revision swap = pdf->revisions[i];
		pdf->revisions[i] = pdf->revisions[pdf->revision_count - 1 - i];
		pdf->revisions[pdf->revision_count - 1 - i] = swap;
	}
	return status;
}

fl_status fl_pdf_open(fl_pdf *pdf, const unsigned char *bytes, size_t length, fl_arena *arena, fl_error *err) {
	*pdf = (fl_pdf){.bytes = bytes, .length = length, .arena = arena, .err = err};
	if (length < 16 || length > (size_t)1 << 31 || memcmp(bytes, "%PDF-1.", 7) != 0)
		return fl_fail(err, FL_E_SYNTAX, "this is not a PDF file");
	fl_status status = read_revisions(pdf);
	if (status != FL_OK)
		return status;
	size_t end = 0;
	for (size_t i = 0; i < pdf->revision_count; i++) {
		pdf->revisions[i].begin = end;
		if (pdf->revisions[i].table < end)
			return fl_pdf_refuse(pdf, end, "has parts that overlap");
		end = pdf->revisions[i].end;
	}
	if (end != length)
		return fl_pdf_refuse(pdf, end, "has something behind its end");
	return FL_OK;
}

/* ---- objects -------------------------------------------------------------------------------------------------- */

bool fl_pdf_find(const fl_pdf *pdf, size_t revision, unsigned number, size_t *at) {
	for (size_t r = revision + 1; r-- > 0;) {
		const fl_pdf_revision *one = &pdf->revisions[r];
		for (size_t s = 0; s < one->section_count; s++) {
			const fl_pdf_section *section = &one->sections[s];
			if (number < section->first || number - section->first >= section->count)
				continue;
			uint64_t offset;
			bool in_use;
			if (!entry_at(pdf, section->at + ENTRY * (size_t)(number - section->first), &offset, &in_use) || !in_use ||
			    offset >= one->table || offset < one->begin)
				return false;
			*at = (size_t)offset;
			return true;
		}
	}
	return false;
}

bool fl_pdf_written(const fl_pdf *pdf, size_t revision, size_t index, unsigned *number, size_t *at) {
	const fl_pdf_revision *one = &pdf->revisions[revision];
	for (size_t s = 0; s < one->section_count; s++) {
		const fl_pdf_section *section = &one->sections[s];
		if (index >= section->count) {
			index -= section->count;
			continue;
		}
		*number = section->first + (unsigned)index;
		if (!fl_pdf_find(pdf, revision, *number, at))
			*at = 0;
		return true;
	}
	return false;
}

/* The bytes of a stream whose dictionary has been read; `at` stands behind "stream". */
static fl_status read_stream(fl_pdf *pdf, size_t revision, size_t *at, size_t limit, fl_pdf_object *out) {
	fl_pdf_value length;
	const fl_pdf_value *stated = fl_pdf_get(&out->body, "Length");
	if (!stated)
		return fl_pdf_refuse(pdf, *at, "has a stream without length");
	fl_status status = fl_pdf_resolve(pdf, revision, stated, &length);
	if (status != FL_OK)
		return status;
	*at = skip_line_end(pdf, *at);
	if (length.kind != FL_PDF_INTEGER || length.whole < 0 || *at > limit || (uint64_t)length.whole > limit - *at)
		return fl_pdf_refuse(pdf, *at, "has a stream of impossible length");
	out->is_stream = true;
	out->stream_begin = *at;
	out->stream_length = (size_t)length.whole;
	*at = skip_line_end(pdf, *at + out->stream_length);
	if (*at > limit || !fl_pdf_word(pdf, at, limit, "endstream"))
		return fl_pdf_refuse(pdf, *at, "has a stream that does not end where it says");
	return FL_OK;
}

fl_status fl_pdf_object_at(fl_pdf *pdf, size_t revision, unsigned number, size_t at, fl_pdf_object *out) {
	uint64_t stated, generation;
	size_t limit = pdf->length;
	for (size_t i = 0; i < pdf->revision_count; i++)
		if (at < pdf->revisions[i].table && at >= pdf->revisions[i].begin)
			limit = pdf->revisions[i].table;
	*out = (fl_pdf_object){.number = number, .begin = at};
	if (!fl_pdf_digits(pdf, &at, limit, 10, &stated) || stated != number || at >= limit || pdf->bytes[at++] != ' ' ||
	    !fl_pdf_digits(pdf, &at, limit, 5, &generation) || generation != 0 || at >= limit || pdf->bytes[at++] != ' ' ||
	    !fl_pdf_word(pdf, &at, limit, "obj"))
		return fl_pdf_refuse(pdf, at, "has no object where its table says");
	fl_status status = fl_pdf_read_value(pdf, at, limit, &out->body, &at);
	if (status != FL_OK)
		return status;
	at = fl_pdf_skip(pdf, at, limit);
	if (out->body.kind == FL_PDF_DICTIONARY && fl_pdf_word(pdf, &at, limit, "stream")) {
		status = read_stream(pdf, revision, &at, limit, out);
		if (status != FL_OK)
			return status;
	}
	at = fl_pdf_skip(pdf, at, limit);
	if (!fl_pdf_word(pdf, &at, limit, "endobj"))
		return fl_pdf_refuse(pdf, at, "has an object that does not end");
	out->end = at;
	return FL_OK;
}

fl_status fl_pdf_object_of(fl_pdf *pdf, size_t revision, unsigned number, fl_pdf_object *out) {
	size_t at;
	if (!fl_pdf_find(pdf, revision, number, &at))
		return fl_fail(pdf->err, FL_E_SYNTAX, "the PDF lacks its object %u", number);
	return fl_pdf_object_at(pdf, revision, number, at, out);
}

fl_status fl_pdf_resolve(fl_pdf *pdf, size_t revision, const fl_pdf_value *value, fl_pdf_value *out) {
	if (value->kind != FL_PDF_REFERENCE) {
		*out = *value;
		return FL_OK;
	}
	/* An object that is itself a stream with a referenced length could lead in a circle: only plain values here. */
	size_t at, after;
	uint64_t number, generation;
	if (!fl_pdf_find(pdf, revision, (unsigned)value->whole, &at))
		return fl_pdf_refuse(pdf, value->begin, "refers to an object that it lacks");
	if (!fl_pdf_digits(pdf, &at, pdf->length, 10, &number) || (int64_t)number != value->whole || at >= pdf->length ||
	    pdf->bytes[at++] != ' ' || !fl_pdf_digits(pdf, &at, pdf->length, 5, &generation) || at >= pdf->length ||
	    pdf->bytes[at++] != ' ' || !fl_pdf_word(pdf, &at, pdf->length, "obj"))
		return fl_pdf_refuse(pdf, at, "has no object where its table says");
	return fl_pdf_read_value(pdf, at, pdf->length, out, &after);
}

/* ---- catalog and pages ---------------------------------------------------------------------------------------- */

fl_status fl_pdf_catalog(fl_pdf *pdf, size_t revision, fl_pdf_object *out) {
	const fl_pdf_value *root = fl_pdf_get(&pdf->revisions[revision].trailer, "Root");
	if (!root || root->kind != FL_PDF_REFERENCE)
		return fl_pdf_refuse(pdf, pdf->revisions[revision].table, "has no catalog");
	fl_status status = fl_pdf_object_of(pdf, revision, (unsigned)root->whole, out);
	if (status == FL_OK && !fl_pdf_is_name(fl_pdf_get(&out->body, "Type"), "Catalog"))
		status = fl_pdf_refuse(pdf, out->begin, "has no catalog");
	return status;
}

/* A walk over the page tree that stops at page `wanted` (0: never) or at object `number` (0: never). */
typedef struct fl_page_walk {
	fl_pdf *pdf;
	size_t revision;
	int wanted;
	unsigned number;
	int count;
	fl_pdf_object last;
	bool found;
} fl_page_walk;

static fl_status walk_pages(fl_page_walk *walk, unsigned number, int level) {
	fl_pdf_object node;
	fl_status status = fl_pdf_object_of(walk->pdf, walk->revision, number, &node);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *kids = fl_pdf_get(&node.body, "Kids");
	if (fl_pdf_is_name(fl_pdf_get(&node.body, "Type"), "Page")) {
		if (++walk->count > PAGES_MOST)
			return fl_pdf_refuse(walk->pdf, node.begin, "has too many pages");
		walk->last = node;
		walk->found = walk->count == walk->wanted || number == walk->number;
		return FL_OK;
	}
	fl_pdf_value list;
	if (!kids || level == LEVELS_MOST || !fl_pdf_is_name(fl_pdf_get(&node.body, "Type"), "Pages"))
		return fl_pdf_refuse(walk->pdf, node.begin, "has a damaged tree of pages");
	status = fl_pdf_resolve(walk->pdf, walk->revision, kids, &list);
	if (status == FL_OK && list.kind != FL_PDF_ARRAY)
		status = fl_pdf_refuse(walk->pdf, node.begin, "has a damaged tree of pages");
	for (size_t i = 0; status == FL_OK && !walk->found && i < list.count; i++)
		status = list.items[i].kind == FL_PDF_REFERENCE
		             ? walk_pages(walk, (unsigned)list.items[i].whole, level + 1)
		             : fl_pdf_refuse(walk->pdf, node.begin, "has a damaged tree of pages");
	return status;
}

static fl_status walk_all(fl_page_walk *walk) {
	fl_pdf_object catalog;
	fl_status status = fl_pdf_catalog(walk->pdf, walk->revision, &catalog);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *pages = fl_pdf_get(&catalog.body, "Pages");
	if (!pages || pages->kind != FL_PDF_REFERENCE)
		return fl_pdf_refuse(walk->pdf, catalog.begin, "has no pages");
	return walk_pages(walk, (unsigned)pages->whole, 0);
}

fl_status fl_pdf_page(fl_pdf *pdf, size_t revision, int page, fl_pdf_object *out, int *page_out) {
	fl_page_walk walk = {.pdf = pdf, .revision = revision, .wanted = page};
	fl_status status = walk_all(&walk);
	if (status != FL_OK)
		return status;
	if (walk.count == 0 || (page > 0 && !walk.found))
		return fl_fail(pdf->err, FL_E_VALUE, "the PDF has no page %d", page);
	*out = walk.last;
	if (page_out)
		*page_out = walk.count;
	return FL_OK;
}

bool fl_pdf_page_of(fl_pdf *pdf, size_t revision, unsigned number, int *page) {
	fl_page_walk walk = {.pdf = pdf, .revision = revision, .number = number};
	if (number == 0 || walk_all(&walk) != FL_OK || !walk.found)
		return false;
	*page = walk.count;
	return true;
}
