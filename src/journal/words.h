/* words.h - what each verb of the journal must and may carry, and what each field can hold.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_JOURNAL_WORDS_H
#define FOUNDLEFT_JOURNAL_WORDS_H

#include "foundleft/journal.h"

typedef enum fl_content {
	FL_C_TEXT, /* any text; empty is fine */
	FL_C_NAME, /* text that must not be empty */
	FL_C_DAY,
	FL_C_UTC,
	FL_C_COUNT, /* integer from 1 */
	FL_C_POINT, /* integer from 1, or "zero" */
	FL_C_REAL,
	FL_C_UNIT,
	FL_C_WORD /* one of a list */
} fl_content;

typedef struct fl_field_rule {
	fl_content content;
	const char *const *words; /* FL_C_WORD, NULL-terminated */
} fl_field_rule;

typedef struct fl_verb_rule {
	uint64_t required, allowed; /* bits by fl_field; allowed includes required */
} fl_verb_rule;

extern const fl_field_rule fl_field_rules[FL_FIELD_COUNT];
extern const fl_verb_rule fl_verb_rules[FL_VERB_COUNT];

/* The verb or field of a word of `length` bytes; the COUNT of its list if there is none. */
fl_verb fl_verb_find(const char *word, size_t length);
/* Fields stand in the order of their list: those after `after` (-1: all) are tried first. */
fl_field fl_field_find(int after, const char *word, size_t length);

/* Are the fields there that the verb needs, no others, each holding what it may hold? */
fl_status fl_words_check(const fl_event *event, fl_error *err) FL_MUST_USE;

/* Field values that were checked before. */
int fl_words_count(const char *text);
int fl_words_point(const char *text); /* index, or FL_POINT_ZERO */
double fl_words_real(const char *text);
int fl_words_index(const char *const *words, const char *text); /* -1 if none */
extern const char *const fl_words_runs[],
    *const fl_words_passes[], *const fl_words_sources[], *const fl_words_decisions[], *const fl_words_measures[];

#endif
