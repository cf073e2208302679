/* talk.h - lines from a person: edited on a terminal, plain otherwise.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_TALK_H
#define FOUNDLEFT_CLI_TALK_H

#include "cli.h"

typedef struct fl_talk fl_talk;

fl_status fl_talk_new(fl_talk **out, fl_cli *cli, fl_error *err) FL_MUST_USE;
void fl_talk_free(fl_talk *talk);
/* Adds `text` with every line folded between words at `columns`. */
void fl_talk_fold(fl_text *out, const char *text, int columns);
/* Shows `prompt` (its last line is the prompt proper) and reads one line without its newline into *line, borrowed
 * until the next call. False at the end of input. */
bool fl_talk_line(fl_talk *talk, const char *prompt, const char **line);

#endif
