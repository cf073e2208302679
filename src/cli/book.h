/* book.h - the record book of HOME: where it is, how it begins, what goes into it by itself.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_BOOK_H
#define FOUNDLEFT_CLI_BOOK_H

#include "cli.h"
#include "foundleft/keep.h"
#include "foundleft/store.h"

/* HOME/book/records.flb */
fl_status fl_book_path(const fl_cli *cli, char path[FL_PATH_SIZE], fl_error *err) FL_MUST_USE;
/* Opens it. FL_E_NOT_FOUND says how a book begins. */
fl_status fl_book_open(const fl_cli *cli, fl_store_mode mode, fl_store **out, fl_error *err) FL_MUST_USE;
/* Name and prefix that a book gets which nobody founded: from the site of its first instrument. */
void fl_book_names(const char *site, char name[96], char prefix[13]);
/* A founding at this moment with a random salt; borrows name and prefix. */
fl_status fl_book_founding(const char *name, const char *prefix, fl_founding *out, fl_error *err) FL_MUST_USE;

/* What became of a session that was to go into the book. */
typedef struct fl_book_entry {
	bool added; /* false: the book had it already */
	char number[FL_NUMBER_SIZE];
	char digest[FL_DIGEST_HEX_SIZE]; /* of the record */
} fl_book_entry;
/* Puts the closed session of a journal into the book, unless it is there; begins the book if there is none. */
fl_status fl_book_add(const fl_cli *cli, const char *journal, fl_book_entry *out, fl_error *err) FL_MUST_USE;

/* When a session closes: puts it in if its journal is under HOME/sessions, and says so. Whatever goes wrong with the
 * book is told on standard error and nothing else: the session is safe in its journal. */
void fl_book_after_close(const fl_cli *cli, const char *journal);
/* When a certificate was issued or signed: puts its bytes in beside the record of its session. A certificate that
 * amends another one first gets a record of its own, which names the one that it replaces. Sessions that are not in the
 * book and not under HOME/sessions are left alone. Errors as above. */
void fl_book_after_certificate(const fl_cli *cli, const char *journal, const char *number, const char *stage,
                               const char *pdf);

/* The only instrument of this tag (and, unless NULL, this serial). FL_E_NOT_FOUND; FL_E_USAGE names them if several. */
fl_status fl_book_instrument(fl_store *store, const char *tag, const char *serial, fl_arena *arena,
                             fl_known_instrument *out, fl_error *err) FL_MUST_USE;

/* ---- long work: progress on a terminal, and a clean end on an interrupt ---------------------------------------- */

typedef struct fl_progress {
	const fl_cli *cli;
	const char *doing; /* "verifying" */
	int shown;         /* percent last shown; -1 none */
	fl_store_watch watch;
} fl_progress;
/* From here on an interrupt (SIGINT, SIGTERM) only asks the work to stop. */
void fl_progress_begin(fl_progress *progress, const fl_cli *cli, const char *doing);
/* Clears the line; interrupts work as before. */
void fl_progress_end(fl_progress *progress);
bool fl_progress_stopped(void);

/* Verifies the book, or the bundle, at `path`, recomputes every record, and says what was found. */
fl_status fl_book_check(const fl_cli *cli, const char *path, fl_exit *code, fl_error *err) FL_MUST_USE;
fl_status fl_bundle_check(const fl_cli *cli, const char *path, fl_exit *code, fl_error *err) FL_MUST_USE;
/* Do these first bytes of a file begin a book, a bundle? */
bool fl_book_is_book(const char *head, size_t length);
bool fl_book_is_bundle(const char *head, size_t length);

#endif
