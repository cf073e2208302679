/* foundleft/certificate.h - from a session and its result to the certificate: content (facts, rounding, wording), then
 * PDF/A-1b bytes.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Two halves. Content turns the record into a sheet: ordered blocks of text, tables and charts in which every number is
 * already rounded and worded. Pdf sets a sheet on pages and knows no calibration word. Same input, same bytes.
 */
#ifndef FOUNDLEFT_CERTIFICATE_H
#define FOUNDLEFT_CERTIFICATE_H

#include "foundleft/analysis.h"
#include "foundleft/base.h"
#include "foundleft/cause.h"
#include "foundleft/journal.h"
#include "foundleft/procedure.h"
#include "foundleft/seal.h"
#include "foundleft/stock.h"
#include "foundleft/trend.h"

/* What the record does not hold: said when the certificate is issued. Borrowed; "" or NULL where absent. */
typedef struct fl_issue {
	const char *number; /* unique number, on every page */
	fl_day issued_on;
	fl_utc issued_at;   /* goes into the PDF's dates */
	int utc_offset_min; /* local time beside UTC */
	const char *issuer, *issuer_address;
	const char *authorised_by;
	const char *journal_digest; /* 64 hex; NULL while it is a draft */
	const char *journal_name;
	const char *program_version;
	const fl_cause *causes;             /* [FL_RUN_KINDS], the opinion on each run; NULL for none */
	const char *amends, *amends_reason; /* number of the certificate that this one replaces, and why */
} fl_issue;

/* Opaque to all but the certificate stage: the content as blocks (src/certificate/sheet.h). */
typedef struct fl_sheet fl_sheet;

fl_status fl_certificate_content(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                                 const fl_result *result, const fl_issue *issue, fl_sheet **out,
                                 fl_error *err) FL_MUST_USE;
void fl_sheet_free(fl_sheet *sheet);
/* The content as plain text, block by block: what tests and `certify --text` read. */
void fl_sheet_text(const fl_sheet *sheet, fl_text *out);

/* Folder with the faces, their coverage and the colour profile (installed with the program). */
typedef struct fl_faces {
	const char *folder;
} fl_faces;
/* Sets the sheet on A4 pages. *bytes is malloc'ed, the caller frees. A character that the face cannot show is refused
 * by name (FL_E_VALUE: the text, the character, its code point). Nothing is written to disk here. */
fl_status fl_certificate_pdf(const fl_sheet *sheet, const fl_io *io, const fl_faces *faces, unsigned char **bytes,
                             size_t *length, fl_error *err) FL_MUST_USE;

/* Where the visible blocks of the signatures belong, by the signer's part; `width` 0 where a part has no place. */
typedef struct fl_sign_places {
	fl_seal_place of[FL_PARTS];
} fl_sign_places;
/* The same, and *places. */
fl_status fl_certificate_pdf_places(const fl_sheet *sheet, const fl_io *io, const fl_faces *faces,
                                    unsigned char **bytes, size_t *length, fl_sign_places *places,
                                    fl_error *err) FL_MUST_USE;
/* The years of one instrument. Borrowed. */
typedef struct fl_trend_report {
	const fl_record *records; /* oldest first, without those that an amendment replaced */
	size_t count;
	const fl_proposal *fleet; /* by statistical reliability; NULL if not asked */
	fl_day made_on;
	const char *issuer, *issuer_address, *program_version;
} fl_trend_report;
/* FL_E_NOT_FOUND without a record. */
fl_status fl_certificate_trend(const fl_trend_report *report, fl_sheet **out, fl_error *err) FL_MUST_USE;

/* What a survey wants to see first: every instrument, every standard, what is open. Borrowed. */
typedef struct fl_survey_instrument {
	const char *tag, *serial, *site, *position; /* "" where not known */
	const char *number;                         /* of the last certificate, "" if none */
	const char *verdict;                        /* as it was left */
	fl_day last, due;                           /* FL_NO_DAY: none */
	size_t page, trend_page;                    /* where they stand in the collection; 0: not in it */
} fl_survey_instrument;
typedef struct fl_survey_standard {
	const char *kind, *name, *certificate;
	fl_day last_day; /* on which it may still be used */
} fl_survey_standard;
typedef struct fl_survey {
	const char *ship;
	const fl_survey_instrument *instruments;
	size_t instrument_count;
	const fl_survey_standard *standards;
	size_t standard_count;
	const char *const *open; /* sentences */
	size_t open_count;
	const char *content; /* digest of the book's content */
	fl_day made_on;
	const char *issuer, *issuer_address, *program_version;
} fl_survey;
fl_status fl_certificate_survey(const fl_survey *survey, fl_sheet **out, fl_error *err) FL_MUST_USE;

/* One part of a collection. */
typedef struct fl_pack_part {
	const fl_sheet *sheet; /* NULL: only a title in the outline, over the parts of level 1 that follow */
	const char *title;     /* in the outline */
	int level;             /* 0, or 1 */
	size_t page;           /* set: its first page, from 1 */
} fl_pack_part;
/* Sets several sheets as one document with an outline, pages counted through. The first says of the whole what the
 * document says of itself. */
fl_status fl_certificate_pack_pdf(fl_pack_part *parts, size_t count, const fl_io *io, const fl_faces *faces,
                                  unsigned char **bytes, size_t *length, fl_error *err) FL_MUST_USE;
/* Says on every page of a certificate that it is a copy from the record, and in place of signatures where they stand.
 */
void fl_certificate_mark_copy(fl_sheet *sheet, const char *mark, const char *where);
/* The certificate's face for the visible blocks; all memory is the arena's. */
fl_status fl_certificate_face(const fl_io *io, const fl_faces *faces, fl_arena *arena, fl_seal_face *out,
                              fl_error *err) FL_MUST_USE;
/* The digest of the journal that a certificate of this program names in its metadata: true where there is one. It only
 * helps to find the journal, and proves nothing. */
bool fl_certificate_journal_digest(const unsigned char *bytes, size_t length, char digest[FL_DIGEST_HEX_SIZE]);

#endif
