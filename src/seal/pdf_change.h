/* pdf_change.h - what a revision of a PDF adds to the one before, and the signature in it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_SEAL_PDF_CHANGE_H
#define FOUNDLEFT_SEAL_PDF_CHANGE_H

#include "pdf.h"

/* What a revision adds when it is a signature and nothing else. */
typedef struct fl_pdf_signature {
	fl_pdf_object dictionary; /* /Type /Sig */
	fl_pdf_object widget;
	fl_seal_place place; /* of the visible block */
} fl_pdf_signature;

/* FL_OK where revision `revision` (1 or later) changes nothing of the one before but what a signature needs: a field
 * more in the form, a widget more on one page, the form known to the catalog. FL_E_TAMPERED with what else it changes;
 * FL_E_SYNTAX where it cannot be read. */
fl_status fl_pdf_change(fl_pdf *pdf, size_t revision, fl_pdf_signature *out) FL_MUST_USE;

#endif
