/* foundleft/store.h - the record book: every closed session as it was, its papers, chained by digest, kept for years.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * How the book is built, what makes it valid and how several books become one stands at the head of
 * src/store/store.c. No type of the database shows here. One fl_store is used by one thread; several programs, and
 * several handles of one program, may have the same book open.
 *
 * Nothing here reads the clock or draws random numbers: the caller gives both.
 */
#ifndef FOUNDLEFT_STORE_H
#define FOUNDLEFT_STORE_H

#include "foundleft/base.h"
#include "foundleft/seal.h"

typedef struct fl_store fl_store;

/* ---- long work -------------------------------------------------------------------------------------------------- */

/* Asked now and then during long work. `done` of `total` in the unit of the work (entries, pages, bytes); `total` 0
 * where it is not known. Returning false stops the work without harm: the function returns FL_E_STATE with "stopped".
 */
typedef struct fl_store_watch {
	bool (*go_on)(void *self, uint64_t done, uint64_t total);
	void *self;
} fl_store_watch;

/* ---- the book --------------------------------------------------------------------------------------------------- */

#define FL_NUMBER_SIZE 40
#define FL_SALT_SIZE 16

/* How a book, and with it the chain of its own entries, begins. */
typedef struct fl_founding {
	const char *name;   /* of ship or workshop, "Quillhaven" */
	const char *prefix; /* of its numbers: 1 to 12 of A-Z and 0-9, first a letter: "QH" gives QH-2026-0001 */
	fl_utc at;
	unsigned char salt[FL_SALT_SIZE]; /* random: two books of one name and second stay apart */
} fl_founding;

typedef enum fl_store_mode {
	FL_STORE_READ, /* looks only; a book whose rules were taken out can still be looked into and verified */
	FL_STORE_WRITE
} fl_store_mode;

/* Founds a new book at `path` (mode 0600) and opens it. FL_E_EXISTS if there is one. */
fl_status fl_store_found(const char *path, const fl_founding *founding, fl_store **out, fl_error *err) FL_MUST_USE;
/* Opens a book, brings an older format up to date (FL_STORE_WRITE), and verifies the last entry of every chain.
 * `patience_ms`: how long to wait for another program that is writing. FL_E_NOT_FOUND, FL_E_TAMPERED, FL_E_STATE (a
 * format of a later program; another program writing for longer than that). */
fl_status fl_store_open(const char *path, fl_store_mode mode, int patience_ms, fl_store **out,
                        fl_error *err) FL_MUST_USE;
/* Lets go of everything; NULL is fine. */
void fl_store_close(fl_store *store);

/* One chain of entries: that of the book itself or one that was taken in. */
typedef struct fl_origin {
	char digest[FL_DIGEST_HEX_SIZE]; /* of the founding: names the chain for ever */
	const char *name, *prefix;
	fl_utc founded_at;
	bool own; /* written by this book, now or before it was restored */
	int64_t entries;
	char head[FL_DIGEST_HEX_SIZE]; /* digest of the last entry; that of the founding before the first */
} fl_origin;
/* All chains, own first, then by digest. Lives in the arena. */
fl_status fl_store_origins(fl_store *store, fl_arena *arena, fl_origin **out, size_t *count, fl_error *err) FL_MUST_USE;
/* One digest over the heads of all chains: equal for two books of equal content however they came to it. Noted down
 * elsewhere (on paper), it betrays even a book that was rewritten from end to end. */
fl_status fl_store_content(fl_store *store, char hex[FL_DIGEST_HEX_SIZE], fl_error *err) FL_MUST_USE;

/* ---- what is kept of a session ---------------------------------------------------------------------------------- */

/* What was done to the instrument, as flags. */
enum {
	FL_WORK_ADJUSTED = 1, /* zero or span turned, between as-found and as-left */
	FL_WORK_CLEANED = 2,  /* the capillary cleaned, between as-found and as-left: the drift begins anew */
	FL_WORK_REPAIRED = 4, /* a part exchanged or repaired, likewise */
	FL_WORK_BEFORE = 8    /* something was done between the session before and this as-found: no chain across it */
};

typedef enum fl_kept_state {
	FL_KEPT_NONE,  /* not taken, or missing */
	FL_KEPT_TAKEN, /* a run of its own */
	FL_KEPT_SAME   /* left alone: as-left is as-found; points and lines repeat those of the as-found run */
} fl_kept_state;

/* One point of one run, rising and falling together. Fractions of span; NAN where not determined. */
typedef struct fl_kept_point {
	int point;             /* FL_POINT_ZERO (-1) for the stopped zero, else index into the procedure's points */
	const char *oil, *lot; /* "" for zero and pressure */
	double x;              /* ideal position */
	double error_span;
	double U_span, k;      /* expanded uncertainty and its factor */
	double tolerance_span; /* half width */
	const char *verdict;   /* "pass", "conditional pass", "conditional fail", "fail", "" */
} fl_kept_point;

typedef struct fl_kept_run {
	fl_kept_state state;
	double zero_span, zero_u_span; /* zero error of the line through the points, standard uncertainty */
	double span_span, span_u_span; /* span error, likewise */
	double hysteresis_span;
	const char *verdict; /* of the worst point */
	fl_kept_point *points;
	size_t point_count;
} fl_kept_run;

typedef struct fl_kept_item {
	const char *kind;   /* "oil", or the role of the equipment: "thermometer" */
	const char *name;   /* lot, or id of the equipment */
	const char *detail; /* name of the oil, or certificate of the equipment */
} fl_kept_item;

/* A record: a closed session as kept, with what history and due dates need of its result. Strings are never NULL. */
typedef struct fl_record {
	/* set by the store */
	char origin[FL_DIGEST_HEX_SIZE];
	int64_t sequence; /* of the entry in its chain, from 1 */
	char previous[FL_DIGEST_HEX_SIZE];
	char digest[FL_DIGEST_HEX_SIZE];
	char journal_digest[FL_DIGEST_HEX_SIZE]; /* SHA-256 of the journal's bytes as they were */
	uint64_t journal_size;
	/* given by the caller */
	fl_utc kept_at;
	const char *number;                   /* reserved before */
	const char *replaces;                 /* digest of the record that this one amends, "" if none */
	const char *replaces_number, *reason; /* both "" if none */
	const char *site, *tag, *serial;      /* together they name the instrument */
	fl_day day;                           /* of the calibration */
	fl_utc closed_at;
	fl_day due;           /* next calibration, FL_NO_DAY if none was agreed */
	int interval_months;  /* that led to it; 0 if none */
	double running_hours; /* counter at the calibration; NAN */
	double due_hours;     /* counter at which it is due; NAN */
	const char *position, *owner;
	const char *procedure; /* "id version" */
	const char *program;   /* version that computed the result */
	const char *performed_by;
	unsigned work;                           /* FL_WORK_... */
	double scale_low, scale_high, set_point; /* dial units; set_point NAN if not stated */
	const char *dial_unit;
	double adjust_limit_span; /* NAN if none */
	fl_kept_run as_found, as_left;
	fl_kept_item *items; /* oils and equipment used */
	size_t item_count;
} fl_record;

/* The next number of the year, "QH-2026-0007", reserved for ever in a transaction of its own that is on disk when
 * this returns: whatever fails afterwards, no other record gets it. `purpose`, such as the tag, is kept with it. */
fl_status fl_store_reserve(fl_store *store, int year, fl_utc at, const char *purpose, char number[FL_NUMBER_SIZE],
                           fl_error *err) FL_MUST_USE;
/* Numbers that were reserved and never used, oldest first. */
typedef struct fl_unused_number {
	const char *number, *purpose;
	fl_utc at;
} fl_unused_number;
fl_status fl_store_unused(fl_store *store, fl_arena *arena, fl_unused_number **out, size_t *count,
                          fl_error *err) FL_MUST_USE;

/* Puts a record and its journal into the book; on FL_OK it is on disk, and origin, sequence, previous, digest and the
 * journal's digest and size are set. FL_E_STATE: the number was not reserved or is used already, what it replaces is
 * replaced already or belongs to another ship. FL_E_VALUE: a field that can't be kept. */
fl_status fl_store_add(fl_store *store, fl_record *record, const char *journal, size_t length,
                       fl_error *err) FL_MUST_USE;

/* A paper: a certificate as issued, signed or countersigned for a record. */
typedef struct fl_paper {
	char origin[FL_DIGEST_HEX_SIZE];
	int64_t sequence;
	char digest[FL_DIGEST_HEX_SIZE];       /* of the entry */
	char paper_digest[FL_DIGEST_HEX_SIZE]; /* SHA-256 of the bytes */
	uint64_t size;
	fl_utc kept_at;
	const char *record; /* digest of the record */
	const char *number; /* of the record */
	const char *stage;  /* "issued", "countersigned" ... */
	const char *file;   /* name it goes by, "QH-2026-0007.pdf" */
} fl_paper;
/* Puts a paper for a record of the book's own chains into it. */
fl_status fl_store_add_paper(fl_store *store, fl_paper *paper, const void *bytes, size_t length,
                             fl_error *err) FL_MUST_USE;
/* The papers of a record in the order they came. */
fl_status fl_store_papers(fl_store *store, const char *record_digest, fl_arena *arena, fl_paper **out, size_t *count,
                          fl_error *err) FL_MUST_USE;

/* ---- looking up ------------------------------------------------------------------------------------------------- */

typedef struct fl_record_list {
	fl_arena arena;
	fl_record *records;
	size_t count, capacity;
} fl_record_list;
void fl_record_list_free(fl_record_list *list);

/* The records of a number, one from each chain that has it (numbers are unique within a chain). */
fl_status fl_store_find(fl_store *store, const char *number, fl_record_list *out, fl_error *err) FL_MUST_USE;
/* The record of a digest. FL_E_NOT_FOUND. */
fl_status fl_store_get(fl_store *store, const char *digest, fl_record_list *out, fl_error *err) FL_MUST_USE;
/* The bytes of the journal, or of a paper, that the entry of this digest carries, as they came, checked against their
 * digest. FL_E_NOT_FOUND where a bundle brought the entry without them. */
fl_status fl_store_bytes(fl_store *store, const char *digest, fl_arena *arena, char **bytes, size_t *length,
                         fl_error *err) FL_MUST_USE;

typedef struct fl_known_instrument {
	int64_t id; /* in this book only */
	const char *site, *tag, *serial;
} fl_known_instrument;
/* Instruments with this tag (NULL: all), by site, tag, serial. */
fl_status fl_store_instruments(fl_store *store, const char *tag, fl_arena *arena, fl_known_instrument **out,
                               size_t *count, fl_error *err) FL_MUST_USE;
/* The records of an instrument, oldest first. `all` false leaves out those that an amendment replaced. */
fl_status fl_store_history(fl_store *store, int64_t instrument, bool all, fl_record_list *out,
                           fl_error *err) FL_MUST_USE;

/* The last valid record of an instrument and when it is due again. */
typedef struct fl_due {
	int64_t instrument;
	const char *site, *tag, *serial, *number;
	fl_day day, due; /* due FL_NO_DAY where none was agreed: listed last */
} fl_due;
/* For every instrument of the book, soonest first. */
fl_status fl_store_due(fl_store *store, fl_arena *arena, fl_due **out, size_t *count, fl_error *err) FL_MUST_USE;

/* Reverse trace: the records that a lot (kind "oil") or a piece of equipment (its role, or NULL for any) fed, with a
 * calibration day from `from` to `to`, by day. */
fl_status fl_store_fed_by(fl_store *store, const char *kind, const char *name, fl_day from, fl_day to,
                          fl_record_list *out, fl_error *err) FL_MUST_USE;

/* Visits every record in the order of its chain, with its journal (NULL where the book has not got it). What the
 * visitor returns other than FL_OK ends the visit and is returned. */
typedef fl_status fl_record_visit(void *self, const fl_record *record, const char *journal, size_t length,
                                  fl_error *err);
fl_status fl_store_each(fl_store *store, bool with_journal, fl_record_visit *visit, void *self,
                        const fl_store_watch *watch, fl_error *err) FL_MUST_USE;
/* A share of the entries, so that several handles of one book divide the work: every `parts`-th, from `index`. */
typedef struct fl_store_part {
	int index, parts;
	uint64_t place; /* set before each visit: place of the entry among all, from 1 */
} fl_store_part;
fl_status fl_store_each_of(fl_store *store, fl_store_part *part, bool with_journal, fl_record_visit *visit, void *self,
                           const fl_store_watch *watch, fl_error *err) FL_MUST_USE;

/* ---- verifying -------------------------------------------------------------------------------------------------- */

typedef struct fl_verified {
	int64_t origins, entries, records, papers;
	int64_t without_bytes; /* entries taken in from bundles whose journal or paper stayed on the ship */
	uint64_t bytes;        /* hashed */
} fl_verified;
/* Reads everything once, in flat memory: each digest, each link of each chain, each journal and paper against the
 * digest that its entry carries, each table for looking up against the entries, the numbers, and the rules of the
 * database itself. FL_E_TAMPERED names the first thing that does not fit. `deep` also unpacks every journal and paper
 * and has the database check the file's own structure. */
fl_status fl_store_verify(fl_store *store, bool deep, const fl_store_watch *watch, fl_verified *out,
                          fl_error *err) FL_MUST_USE;

/* ---- copies ----------------------------------------------------------------------------------------------------- */

/* Copies the book to one new file while it is in use. The copy appears under its name only when it is complete. */
fl_status fl_store_backup(fl_store *store, const fl_io *io, const char *path, const fl_store_watch *watch,
                          fl_error *err) FL_MUST_USE;
/* Makes a new book at `path` from a backup, verified throughout, and opens it. Numbers may have been given out after
 * the backup was made, so the book goes on with a new chain of its own: `founding` needs a prefix that the book has not
 * used. */
fl_status fl_store_restore(const char *backup, const fl_io *io, const char *path, const fl_founding *founding,
                           const fl_store_watch *watch, fl_store **out, fl_error *err) FL_MUST_USE;

/* Takes text piece by piece. */
typedef struct fl_sink {
	fl_status (*take)(void *self, const char *bytes, size_t length, fl_error *err);
	void *self;
} fl_sink;
/* Every record, one row for each point of each run; columns in docs/book.md. CSV by RFC 4180, UTF-8, with a heading.
 * A cell of text that a spreadsheet would take for a formula gets an apostrophe in front. */
fl_status fl_store_export_csv(fl_store *store, const fl_sink *sink, const fl_store_watch *watch,
                              fl_error *err) FL_MUST_USE;
/* The same as a JSON array of records. */
fl_status fl_store_export_json(fl_store *store, const fl_sink *sink, const fl_store_watch *watch,
                               fl_error *err) FL_MUST_USE;

/* Writes the book's own chains to one new file for an office: every entry, and the journals and papers of those kept
 * on `since` or later (FL_NO_DAY: all). */
fl_status fl_store_bundle(fl_store *store, const fl_io *io, const char *path, fl_day since, const fl_store_watch *watch,
                          fl_error *err) FL_MUST_USE;
typedef struct fl_intake {
	int64_t origins_new, entries_new, entries_known, bytes_new;
	char name[96]; /* of the first chain in the bundle */
	char origin[FL_DIGEST_HEX_SIZE];
} fl_intake;
/* Takes a bundle in, whole or not at all. `accept_new` false refuses a chain that this book has not seen before with
 * FL_ASK, names it in `out`, and changes nothing: whoever asks compares the digest with the ship's. */
fl_status fl_store_take_in(fl_store *store, const char *path, bool accept_new, const fl_store_watch *watch,
                           fl_intake *out, fl_error *err) FL_MUST_USE;

#endif
