/* utf8.h - what base needs of UTF-8 beyond the public calls.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FL_BASE_UTF8_H
#define FL_BASE_UTF8_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/* True for C0, DEL, C1, line and paragraph separators, bidirectional embeddings, overrides and isolates. */
bool fl_utf8_is_control(uint32_t code);
/* Removes a sequence that a cut left unfinished at the end of a terminated text. */
void fl_utf8_drop_torn_end(char *text);
/* Bytes of the white space that `text` starts with (one character, U+00A0 and the narrow U+202F too); 0 if none. */
size_t fl_utf8_space_length(const char *text);

#endif
