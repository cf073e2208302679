/* line.h - one event as one line of the journal, and back.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_JOURNAL_LINE_H
#define FOUNDLEFT_JOURNAL_LINE_H

#include "foundleft/journal.h"

/* A whole line with its newline; the digest of it goes to self. */
fl_status fl_line_write(fl_hasher *hasher, const fl_event *event, const char *prev, fl_text *out,
                        char self[FL_DIGEST_HEX_SIZE], fl_error *err) FL_MUST_USE;
/* line[length] without its newline. Checks the digest, the link to `prev` and the form; strings go to `arena`. */
fl_status fl_line_read(fl_hasher *hasher, const char *line, size_t length, const char *prev, fl_arena *arena,
                       fl_event *event, char self[FL_DIGEST_HEX_SIZE], fl_error *err) FL_MUST_USE;

#endif
