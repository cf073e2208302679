/* facts.h - an entry of the book as text: the bytes that its digest covers.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The form stands at the head of facts.c.
 */
#ifndef FOUNDLEFT_STORE_FACTS_H
#define FOUNDLEFT_STORE_FACTS_H

#include "foundleft/store.h"

/* No entry's facts are longer. */
#define FACTS_LIMIT ((size_t)1024 * 1024)
/* No journal or paper is longer, unpacked. */
#define CARRIED_LIMIT ((uint64_t)256 * 1024 * 1024)

/* What an entry carries. */
typedef struct fl_carried {
	uint64_t size; /* 0: nothing */
	char digest[FL_DIGEST_HEX_SIZE];
	uint64_t packed_size;
	char packed_digest[FL_DIGEST_HEX_SIZE]; /* of the bytes as they lie in the book and in bundles */
} fl_carried;

typedef enum fl_entry_kind { ENTRY_SESSION, ENTRY_PAPER } fl_entry_kind;

/* The lines that every entry begins with. Texts are borrowed. */
typedef struct fl_entry_head {
	char origin[FL_DIGEST_HEX_SIZE], previous[FL_DIGEST_HEX_SIZE];
	int64_t sequence;
	fl_utc kept_at;
	fl_entry_kind kind;
	fl_carried carried;
} fl_entry_head;

/* An entry read from its facts. */
typedef struct fl_entry {
	fl_entry_head head;
	fl_record record; /* kind ENTRY_SESSION */
	fl_paper paper;   /* kind ENTRY_PAPER */
} fl_entry;

/* Writes the facts. */
fl_status fl_facts_write_record(const fl_entry_head *head, const fl_record *record, fl_text *out,
                                fl_error *err) FL_MUST_USE;
fl_status fl_facts_write_paper(const fl_entry_head *head, const fl_paper *paper, fl_text *out,
                               fl_error *err) FL_MUST_USE;
/* Reads them again; texts live in the arena. Everything but digest is filled. FL_E_SYNTAX names the line. */
fl_status fl_facts_read(const char *facts, size_t length, fl_arena *arena, fl_entry *out, fl_error *err) FL_MUST_USE;
/* Are these bytes exactly what writing the entry gives? FL_E_SYNTAX otherwise. */
fl_status fl_facts_check_canonical(const char *facts, size_t length, const fl_entry *entry, fl_error *err) FL_MUST_USE;

/* The founding of a chain as text, and read again (texts in the arena). */
typedef struct fl_founding_text {
	const char *name, *prefix;
	fl_utc at;
	char salt[2 * FL_SALT_SIZE + 1];
	char continues[FL_DIGEST_HEX_SIZE]; /* origin of the chain that this one goes on from; "" if none */
	int64_t continues_at;               /* its last entry then known */
	char continues_head[FL_DIGEST_HEX_SIZE];
} fl_founding_text;
fl_status fl_founding_write(const fl_founding_text *founding, fl_text *out, fl_error *err) FL_MUST_USE;
fl_status fl_founding_read(const char *text, size_t length, fl_arena *arena, fl_founding_text *out,
                           fl_error *err) FL_MUST_USE;
/* Can this name and prefix found a chain? FL_E_VALUE says why not. */
fl_status fl_founding_check(const char *name, const char *prefix, fl_error *err) FL_MUST_USE;

/* Shortest decimal that gives `value` again, point as mark whatever the locale; "-" for NaN. */
#define REAL_SIZE 32
char *fl_real_write(double value, char out[REAL_SIZE]);

#endif
