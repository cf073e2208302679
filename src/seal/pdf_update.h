/* pdf_update.h - what is appended to a PDF: objects, their table, the trailer; and the visible block with its face.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_SEAL_PDF_UPDATE_H
#define FOUNDLEFT_SEAL_PDF_UPDATE_H

#include "pdf.h"

#define FL_PDF_UPDATE_OBJECTS 24

typedef struct fl_pdf_update {
	const fl_pdf *pdf; /* what it is appended to */
	fl_text bytes;
	unsigned next; /* the next free object number */
	struct {
		unsigned number;
		size_t at; /* in the whole file */
	} objects[FL_PDF_UPDATE_OBJECTS];
	size_t count;
	fl_error *err;
} fl_pdf_update;

/* A new object number, or one that is replaced, begun: "N 0 obj". */
unsigned fl_update_new(fl_pdf_update *update);
void fl_update_begin(fl_pdf_update *update, unsigned number);
void fl_update_end(fl_pdf_update *update);
/* A whole stream object; `entries` go into its dictionary beside the length. Returns its number. */
unsigned fl_update_stream(fl_pdf_update *update, const char *entries, const void *bytes, size_t length);
/* Hundredths, without the locale, one space behind. */
void fl_update_number(fl_text *out, double value);
/* A text string: literal where it is printable ASCII, else UTF-16BE in hexadecimal. */
void fl_update_string(fl_text *out, const char *utf8);
/* Table, trailer and end. */
void fl_update_finish(fl_pdf_update *update, const unsigned char identity[16]);

/* The visible block as a form object that shows the lines in that size; *number is the form. FL_E_VALUE for a
 * character that the face lacks, or a place that is too small. */
fl_status fl_update_block(fl_pdf_update *update, const fl_pdf_signing *signing, unsigned *number) FL_MUST_USE;

#endif
