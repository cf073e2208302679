/* json.h - writes JSON value by value into a text.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_JSON_H
#define FOUNDLEFT_CLI_JSON_H

#include "foundleft/base.h"

#define FL_JSON_PERCENT 100.0

typedef struct fl_json {
	fl_text *out;
	size_t start;  /* where the object begins in the text */
	bool bad_text; /* a string was not UTF-8 */
} fl_json;

/* Each writes a value under its key; the key is NULL within a list. */
void fl_json_key(fl_json *to, const char *name);
void fl_json_begin(fl_json *to, const char *name, char bracket);
void fl_json_end(fl_json *to, char bracket);
void fl_json_null(fl_json *to, const char *name);
void fl_json_boolean(fl_json *to, const char *name, bool value);
/* NULL gives null; an empty text stays one. */
void fl_json_string(fl_json *to, const char *name, const char *value);
/* An empty text means "none" and gives null. */
void fl_json_word(fl_json *to, const char *name, const char *value);
/* The shortest decimal that reads back as the same double; what is not finite gives null. */
void fl_json_number(fl_json *to, const char *name, double value);
void fl_json_integer(fl_json *to, const char *name, long long value);
void fl_json_percent(fl_json *to, const char *name, double fraction);
void fl_json_day(fl_json *to, const char *name, fl_day value);
void fl_json_utc(fl_json *to, const char *name, fl_utc value);
void fl_json_strings(fl_json *to, const char *name, const char *const *list, size_t count);

#endif
