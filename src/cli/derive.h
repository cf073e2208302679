/* derive.h - a certificate derived from its journal: the session as it stood when it was issued, and the bytes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_DERIVE_H
#define FOUNDLEFT_CLI_DERIVE_H

#include "case.h"
#include "cli.h"
#include "foundleft/certificate.h"

typedef struct fl_derived {
	fl_arena arena;
	fl_case one;      /* up to and with the line of the issue, or before it where it is being issued */
	fl_session whole; /* with all lines; empty where it is being issued */
	fl_issue issue;
	int sequence;  /* of that line */
	char *journal; /* bytes of the journal, up to and with that line */
	size_t journal_length;
	unsigned char *bytes; /* the unsigned certificate, malloc'ed */
	size_t length;
	fl_sign_places places;
	const char *amended_by; /* number of the certificate that replaces it, NULL if none */
} fl_derived;

/* The certificate that the line `sequence` of the journal issues. Nothing needs freeing after a failure. */
fl_status fl_derive(const fl_cli *cli, const char *journal, int sequence, fl_derived *out, fl_error *err) FL_MUST_USE;
/* Sets the certificate of out->one and out->issue on pages. */
fl_status fl_derive_pages(const fl_cli *cli, fl_derived *out, fl_error *err) FL_MUST_USE;
/* The issue as the certificate stage wants it; borrows the entry. */
fl_issue fl_derive_issue(const fl_session *session, const fl_session_issue *entry, const char *digest);
/* The content of the certificate, opinions included. */
fl_status fl_derive_sheet(const fl_case *one, const fl_issue *issue, fl_sheet **out, fl_error *err) FL_MUST_USE;
void fl_derived_free(fl_derived *derived);

/* Finds the journal of a certificate: --journal, else by the digest that it names, beside it and under HOME/sessions.
 * *sequence is the line of its issue. FL_E_NOT_FOUND says where it was looked for. */
fl_status fl_derive_find(const fl_cli *cli, const char *certificate, const unsigned char *bytes, size_t length,
                         char journal[FL_PATH_SIZE], int *sequence, fl_error *err) FL_MUST_USE;

#endif
