/* shelf_private.h - the questions, and what was answered so far.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_SHELF_PRIVATE_H
#define FOUNDLEFT_SHELF_PRIVATE_H

#include "foundleft/shelf.h"

#define TRY(call)                      \
	do {                               \
		fl_status try_status = (call); \
		if (try_status != FL_OK)       \
			return try_status;         \
	} while (0)

enum {
	FL_SHELF_QUESTIONS = 32, /* of one kind, at most */
	FL_SHELF_ROWS = 40,      /* of a table, at most */
	FL_SHELF_LINE = 1024
};

/* When a question is asked. */
typedef enum fl_shelf_when {
	FL_ASK_ALWAYS,
	FL_ASK_NEW,     /* of a new item only: on renewal it is known */
	FL_ASK_RENEWED, /* on renewal only */
	FL_ASK_BATH,
	FL_ASK_NO_BATH,
	FL_ASK_DENSITY_DIAL, /* the dial is not in mPa·s */
	FL_ASK_SAYBOLT
} fl_shelf_when;

typedef struct fl_shelf_question {
	const char *group; /* "" item, "geometry" its map, "table" or "corrections" rows */
	const char *key;   /* in the file */
	const char *ask;
	const char *help;
	const char *unit; /* put behind a bare number; "" for none; "@dial": that of the dial, "@scale": of the range,
	                     "@range": likewise, K for °C */
	bool required;    /* in a group that is begun */
	bool fresh;       /* on renewal not proposed: it is another one */
	bool carried;     /* in rows: what the row above says is proposed */
	fl_shelf_when when;
} fl_shelf_question;

typedef struct fl_shelf_form {
	const char *word, *list, *name_key, *day_key;
	const char *rows; /* group of its rows, "" if none */
	size_t least_rows;
	const fl_shelf_question *questions; /* ends with a key of NULL */
} fl_shelf_form;
extern const fl_shelf_form fl_shelf_forms[FL_SHELF_KINDS];

/* A question that was asked: which, of which row. */
typedef struct fl_shelf_place {
	size_t question, row;
} fl_shelf_place;

struct fl_shelf {
	fl_arena arena;
	fl_shelf_kind kind;
	const fl_shelf_form *form;
	const fl_stock *stock;
	const fl_node *old; /* the item that is renewed; NULL for a new one */
	fl_day old_day;
	/* Every answer ever given or known: by question, and by row in rows. NULL: none. What counts is what stands in
	 * `path`. */
	const char *answers[FL_SHELF_QUESTIONS][FL_SHELF_ROWS];
	fl_shelf_place path[FL_SHELF_QUESTIONS + FL_SHELF_ROWS * 8];
	size_t length; /* of the path: what was asked and answered */
	fl_shelf_place at;
	bool confirming, finished, agreed, shown;
	fl_text block;
};

/* write.c: the item as YAML, from the answers on the path and, renewed, what no question asks. */
void fl_shelf_write(const fl_shelf *shelf, fl_text *out);
/* The same for a check of the row that is being asked: only it and the one before, what is not asked yet filled with
 * values that fit, so that an answer in the row is judged at once. */
void fl_shelf_write_filled(const fl_shelf *shelf, fl_text *out);
/* A scalar so that it reads back as the same text. */
void fl_shelf_scalar(const char *text, bool in_braces, fl_text *out);
const fl_shelf_question *fl_shelf_question_at(const fl_shelf *shelf, size_t question);
bool fl_shelf_in_rows(const fl_shelf *shelf, size_t question);
/* The answer that counts, NULL if none: asked, or known from the item that is renewed. */
const char *fl_shelf_answer(const fl_shelf *shelf, const char *key);
bool fl_shelf_was_asked(const fl_shelf *shelf, size_t question, size_t row);
/* The old item's text of this question, NULL without. */
const char *fl_shelf_old(const fl_shelf *shelf, size_t question, size_t row);
size_t fl_shelf_rows_of(const fl_shelf *shelf);

/* check.c: is the item as far as it was asked fine? `done`: as a whole. The error's field names the question, which is
 * *concerned (unchanged where that is not known). */
fl_status fl_shelf_check(const fl_shelf *shelf, bool done, fl_shelf_place *concerned, fl_error *err) FL_MUST_USE;

#endif
