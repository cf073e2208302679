/* pdf.h - a PDF file of the plain kind, read strictly: classic cross-reference tables, each revision from its table to
 * its end, objects as values that know their bytes. ISO 32000-1, 7.2 to 7.5.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A revision is what one writer appended: objects, "xref" and its table, "trailer" and its dictionary, "startxref", the
 * table's offset, "%%EOF" and an end of line. Revisions follow each other without a gap, the last ends the file.
 * Cross-reference streams, object streams, encryption and repair are not read but refused. */
#ifndef FOUNDLEFT_SEAL_PDF_H
#define FOUNDLEFT_SEAL_PDF_H

#include "foundleft/seal.h"

typedef enum fl_pdf_kind {
	FL_PDF_NULL,
	FL_PDF_BOOLEAN,
	FL_PDF_INTEGER,
	FL_PDF_REAL,
	FL_PDF_NAME,
	FL_PDF_STRING,
	FL_PDF_ARRAY,
	FL_PDF_DICTIONARY,
	FL_PDF_REFERENCE
} fl_pdf_kind;

typedef struct fl_pdf_value fl_pdf_value;
struct fl_pdf_value {
	fl_pdf_kind kind;
	size_t begin, end;   /* where it stands in the file */
	int64_t whole;       /* INTEGER, BOOLEAN; REFERENCE: object number (generation is always 0) */
	double number;       /* INTEGER, REAL */
	const char *text;    /* NAME, STRING: decoded bytes, terminated */
	size_t length;       /* of text */
	bool hex;            /* STRING: written in hexadecimal */
	fl_pdf_value *items; /* ARRAY: elements; DICTIONARY: key, value, key, value, each key once */
	size_t count;        /* of items */
};

#define FL_PDF_REVISIONS_MOST 16
#define FL_PDF_SECTIONS_MOST 512
#define FL_PDF_OBJECTS_MOST 100000

/* A run of entries of one table: objects first..first+count-1, 20 bytes each from `at`. */
typedef struct fl_pdf_section {
	unsigned first, count;
	size_t at;
} fl_pdf_section;

typedef struct fl_pdf_revision {
	size_t begin, table, end; /* of its bytes; where "xref" stands */
	fl_pdf_section *sections; /* rising, not overlapping */
	size_t section_count;
	fl_pdf_value trailer;
} fl_pdf_revision;

typedef struct fl_pdf {
	const unsigned char *bytes;
	size_t length;
	fl_arena *arena;
	fl_error *err;
	fl_pdf_revision revisions[FL_PDF_REVISIONS_MOST]; /* oldest first */
	size_t revision_count;
	size_t value_count; /* read so far, bounded */
} fl_pdf;

/* Reads tables and trailers. The fl_pdf borrows bytes, arena and err. */
fl_status fl_pdf_open(fl_pdf *pdf, const unsigned char *bytes, size_t length, fl_arena *arena,
                      fl_error *err) FL_MUST_USE;
/* FL_E_SYNTAX "the PDF ... near byte N". */
fl_status fl_pdf_refuse(const fl_pdf *pdf, size_t at, const char *what) FL_MUST_USE;

/* Where object `number` stands as of a revision; false if it has no such object or it is free. */
bool fl_pdf_find(const fl_pdf *pdf, size_t revision, unsigned number, size_t *at);
/* Number of the n-th object that the revision writes, with its place; false behind the last. Free ones have place 0. */
bool fl_pdf_written(const fl_pdf *pdf, size_t revision, size_t index, unsigned *number, size_t *at);

/* An indirect object. `body` is its value (a stream's dictionary); `end` stands behind "endobj". */
typedef struct fl_pdf_object {
	unsigned number;
	size_t begin, end;
	fl_pdf_value body;
	bool is_stream;
	size_t stream_begin, stream_length;
} fl_pdf_object;

fl_status fl_pdf_object_at(fl_pdf *pdf, size_t revision, unsigned number, size_t at, fl_pdf_object *out) FL_MUST_USE;
/* Object `number` as of a revision; FL_E_SYNTAX if there is none. */
fl_status fl_pdf_object_of(fl_pdf *pdf, size_t revision, unsigned number, fl_pdf_object *out) FL_MUST_USE;
/* The value itself, or what a reference points to (one step), as of a revision. */
fl_status fl_pdf_resolve(fl_pdf *pdf, size_t revision, const fl_pdf_value *value, fl_pdf_value *out) FL_MUST_USE;

/* Value of a key, NULL if the value is no dictionary or lacks it. */
const fl_pdf_value *fl_pdf_get(const fl_pdf_value *dictionary, const char *key);
bool fl_pdf_is_name(const fl_pdf_value *value, const char *name);
/* Deep equality of what is written, spacing aside. */
bool fl_pdf_equal(const fl_pdf_value *a, const fl_pdf_value *b);

/* The document's catalog as of a revision. */
fl_status fl_pdf_catalog(fl_pdf *pdf, size_t revision, fl_pdf_object *out) FL_MUST_USE;
/* Page `page` (from 1; 0 is the last); *page_out (if not NULL) is its number. */
fl_status fl_pdf_page(fl_pdf *pdf, size_t revision, int page, fl_pdf_object *out, int *page_out) FL_MUST_USE;
/* True if the object is one of the pages as of a revision; *page counts from 1. */
bool fl_pdf_page_of(fl_pdf *pdf, size_t revision, unsigned number, int *page);

/* ---- pdf_value.c */

/* One value from `at`; *after stands behind it. Not above `limit`. */
fl_status fl_pdf_read_value(fl_pdf *pdf, size_t at, size_t limit, fl_pdf_value *out, size_t *after) FL_MUST_USE;
/* Behind white space and comments. */
size_t fl_pdf_skip(const fl_pdf *pdf, size_t at, size_t limit);
/* Passes exactly that word; false (at stays) if something else stands there. */
bool fl_pdf_word(const fl_pdf *pdf, size_t *at, size_t limit, const char *word);
/* Plain decimal digits, at most `digits` of them. */
bool fl_pdf_digits(const fl_pdf *pdf, size_t *at, size_t limit, size_t digits, uint64_t *out);

#endif
