/* verify.c - the whole book against its digests, in one pass and flat memory.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * What holds is said at the head of store.c. The entries are read in the order in which they came into the book, which
 * within each chain is that of the chain, with what stands for looking up beside each. The facts are not parsed here:
 * their digest vouches for them, and scan() finds the few lines that the tables repeat. Which lots and equipment fed
 * which session is compared by a sum over both sides, in which the order does not matter; only when the sums differ is
 * each session looked at on its own, to name the one that does not fit.
 * A second thread (digester.c) hashes while this one reads.
 */
#include "digester.h"
#include "lines.h"
#include "link.h"
#include "number.h"
#include "pack.h"
#include "schema.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define ENTRIES_TEXT                                                                                             \
	"SELECT e.id, e.sequence, e.digest, e.facts, b.size, b.packed, s.origin, s.number, s.day, s.closed, s.due, " \
	"s.digest, s.replaces, i.site, i.tag, i.serial, p.record, n.id, e.origin FROM entry e "                      \
	"LEFT JOIN bytes b ON b.entry = e.id LEFT JOIN session s ON s.entry = e.id "                                 \
	"LEFT JOIN instrument i ON i.id = s.instrument LEFT JOIN paper p ON p.entry = e.id "                         \
	"LEFT JOIN number n ON n.origin = e.origin AND n.text = s.number ORDER BY e.id"
enum {
	C_ID,
	C_SEQUENCE,
	C_DIGEST,
	C_FACTS,
	C_SIZE,
	C_PACKED,
	C_ORIGIN,
	C_NUMBER,
	C_DAY,
	C_CLOSED,
	C_DUE,
	C_SESSION_DIGEST,
	C_REPLACES,
	C_SITE,
	C_TAG,
	C_SERIAL,
	C_RECORD,
	C_NUMBER_ROW,
	C_CHAIN
};

typedef struct piece {
	const char *at; /* NULL: the line is not there */
	size_t length;
} piece;

/* Lines of the facts that the tables repeat; borrowed from the row. */
typedef struct scanned {
	piece origin, sequence, previous, kind, carries, number, replaces, instrument, day, closed, due, record;
	uint64_t used; /* sum over kind and name of what fed the session */
} scanned;

/* How far a chain has been followed. */
typedef struct chain {
	int64_t row, sequence;
	bool own;
	char origin[FL_DIGEST_HEX_SIZE], previous[FL_DIGEST_HEX_SIZE];
	char prefix[16]; /* of its numbers */
} chain;

typedef struct verification {
	fl_store *store;
	fl_error *err;
	const fl_store_watch *watch;
	bool deep;
	uint64_t total;
	fl_verified counts;
	uint64_t used_facts; /* sum over all sessions and what fed them, by the facts */
	int64_t with_bytes;
	fl_arena arena;
	chain *chains; /* by row */
	size_t chain_count, chain_capacity;
	chain *at; /* of the entry at hand */
	fl_digester *digester;
} verification;

/* ---- finding lines ---------------------------------------------------------------------------------------------- */

static uint64_t hash_bytes(uint64_t hash, const char *bytes, size_t length) {
	for (size_t i = 0; i < length; i++)
		hash = (hash ^ (unsigned char)bytes[i]) * UINT64_C(0x100000001b3);
	return hash;
}

/* Mixes so well that sums over many of them do not cancel by chance. */
static uint64_t mix(uint64_t x) {
	x = (x ^ (x >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
	x = (x ^ (x >> 27)) * UINT64_C(0x94d049bb133111eb);
	return x ^ (x >> 31);
}

static uint64_t hash_item(const char *kind, size_t kind_length, const char *name, size_t name_length) {
	uint64_t hash = hash_bytes(UINT64_C(0xcbf29ce484222325), kind, kind_length);
	return mix(hash_bytes(hash_bytes(hash, "\t", 1), name, name_length));
}

/* "kind \t name \t detail": the hash of kind and name. */
static uint64_t hash_used(const char *at, size_t length) {
	const char *tab = memchr(at, '\t', length);
	if (!tab)
		return 0;
	size_t kind = (size_t)(tab - at);
	const char *name = tab + 1, *end = memchr(name, '\t', length - kind - 1);
	return end ? hash_item(at, kind, name, (size_t)(end - name)) : 0;
}

static void take_line(scanned *s, const char *word, size_t word_length, piece value, int64_t entry_row, uint64_t *seen,
                      size_t *seen_count) {
	const struct {
		const char *word;
		size_t length;
		piece *to;
	} table[] = {{"origin", 6, &s->origin},     {"sequence", 8, &s->sequence}, {"previous", 8, &s->previous},
	             {"kind", 4, &s->kind},         {"carries", 7, &s->carries},   {"number", 6, &s->number},
	             {"replaces", 8, &s->replaces}, {"day", 3, &s->day},           {"instrument", 10, &s->instrument},
	             {"closed", 6, &s->closed},     {"due", 3, &s->due},           {"record", 6, &s->record}};
	if (word_length == 4 && memcmp(word, "used", 4) == 0) {
		uint64_t hash = hash_used(value.at, value.length);
		for (size_t i = 0; i < *seen_count; i++)
			if (seen[i] == hash)
				return; /* two points of one lot make one row */
		if (*seen_count < 64)
			seen[(*seen_count)++] = hash;
		s->used += mix(hash ^ ((uint64_t)entry_row * UINT64_C(0x9e3779b97f4a7c15)));
		return;
	}
	for (size_t i = 0; i < sizeof table / sizeof *table; i++)
		if (word_length == table[i].length && memcmp(word, table[i].word, word_length) == 0)
			*table[i].to = value;
}

/* Points are most of the lines, and nothing of them is repeated elsewhere. */
static bool of_no_interest(const char *line) {
	return line[0] == 'p' && line[1] == 'o';
}

static void scan(const char *facts, size_t length, int64_t entry_row, scanned *s) {
	uint64_t seen[64];
	size_t seen_count = 0;
	*s = (scanned){0};
	for (const char *at = facts, *end = facts + length; at < end;) {
		const char *line_end = memchr(at, '\n', (size_t)(end - at));
		if (!line_end)
			return;
		const char *tab = of_no_interest(at) ? NULL : memchr(at, '\t', (size_t)(line_end - at));
		if (tab)
			take_line(s, at, (size_t)(tab - at), (piece){tab + 1, (size_t)(line_end - tab - 1)}, entry_row, seen,
			          &seen_count);
		at = line_end + 1;
	}
}

static bool piece_is(piece p, const char *text) {
	return p.at && strlen(text) == p.length && memcmp(p.at, text, p.length) == 0;
}

/* Value number `index` between tabs. */
static piece value_of(piece line, int index) {
	if (!line.at)
		return line;
	const char *at = line.at, *end = line.at + line.length;
	for (; index > 0; index--) {
		const char *tab = memchr(at, '\t', (size_t)(end - at));
		if (!tab)
			return (piece){0};
		at = tab + 1;
	}
	const char *tab = memchr(at, '\t', (size_t)(end - at));
	return (piece){at, (size_t)((tab ? tab : end) - at)};
}

/* Does the value, written with escapes in the facts, say this text? */
static bool says(piece value, const char *text) {
	if (!strpbrk(text, "\\\t\n\r"))
		return piece_is(value, text);
	fl_text escaped = {0};
	fl_put_text(&escaped, text);
	bool same = !escaped.failed && piece_is(value, escaped.data + 1);
	fl_text_free(&escaped);
	return same;
}

static void two_digits(char *out, int value) {
	out[0] = (char)('0' + value / 10);
	out[1] = (char)('0' + value % 10);
}

/* "2026-04-14" without the detour over printf: this runs three times an entry. */
static void write_day(fl_day day, char out[10]) {
	int year = 0, month = 0, day_of_month = 0;
	fl_day_to_civil(day, &year, &month, &day_of_month);
	two_digits(out, year / 100 % 100);
	two_digits(out + 2, year % 100);
	out[4] = out[7] = '-';
	two_digits(out + 5, month);
	two_digits(out + 8, day_of_month);
}

static bool says_day(piece value, fl_day day) {
	char text[10];
	if (day == FL_NO_DAY)
		return piece_is(value, "-");
	write_day(day, text);
	return value.at && value.length == sizeof text && memcmp(value.at, text, sizeof text) == 0;
}

/* "2026-04-14T08:00:12Z" */
static bool says_utc(piece value, fl_utc utc) {
	char text[20];
	fl_day day = fl_day_of(utc);
	int second = (int)(utc - (fl_utc)day * 86400);
	write_day(day, text);
	text[10] = 'T';
	two_digits(text + 11, second / 3600);
	text[13] = text[16] = ':';
	two_digits(text + 14, second / 60 % 60);
	two_digits(text + 17, second % 60);
	text[19] = 'Z';
	return value.at && value.length == sizeof text && memcmp(value.at, text, sizeof text) == 0;
}

static int64_t whole_of(piece value) {
	char digits[24] = "";
	if (!value.at || value.length >= sizeof digits)
		return -1;
	memcpy(digits, value.at, value.length);
	return strtoll(digits, NULL, 10);
}

/* ---- misfits ---------------------------------------------------------------------------------------------------- */

static fl_status misfit(verification *v, int64_t sequence, const char *what) {
	char name[160];
	return fl_fail_at(v->err, FL_E_TAMPERED, (fl_place){.file = v->store->path}, "%s: %s",
	                  fl_link_name(v->store, v->at ? v->at->origin : "", sequence, name), what);
}

static fl_status misfit_of_number(verification *v, int64_t sequence, piece number, const char *what) {
	char text[200];
	snprintf(text, sizeof text, "%s%.*s%s%s", number.at ? "record " : "", number.at ? (int)number.length : 0,
	         number.at ? number.at : "", number.at ? ", " : "", what);
	return misfit(v, sequence, text);
}

/* ---- one entry -------------------------------------------------------------------------------------------------- */

/* Gives bytes to the other thread, which finds out whether the digest is theirs. */
static fl_status put_digest(verification *v, sqlite3_stmt *row, const scanned *s, int column, piece digest,
                            const char *what) {
	fl_digested job = {.sequence = sqlite3_column_int64(row, C_SEQUENCE), .what = what};
	const void *bytes = sqlite3_column_blob(row, column);
	size_t length = (size_t)sqlite3_column_bytes(row, column);
	memcpy(job.origin, v->at->origin, sizeof job.origin);
	if (s->number.at && s->number.length < sizeof job.number)
		memcpy(job.number, s->number.at, s->number.length);
	v->counts.bytes += length;
	return fl_digester_put(v->digester, bytes, length, digest.at, digest.length, &job, v->err);
}

static fl_status check_place(verification *v, sqlite3_stmt *row, const scanned *s) {
	const chain *c = v->at;
	int64_t sequence = sqlite3_column_int64(row, C_SEQUENCE);
	if (sequence != c->sequence + 1)
		return misfit(v, c->sequence + 1, "it is missing, or does not stand where it came into the book");
	if (!piece_is(s->origin, c->origin) || whole_of(s->sequence) != sequence)
		return misfit_of_number(v, sequence, s->number, "it stands in another place than where it was kept");
	if (!piece_is(s->previous, c->previous))
		return misfit_of_number(v, sequence, s->number,
		                        "the entry before is not the one that it was chained to: one of the two was exchanged");
	return FL_OK;
}

static fl_status check_facts(verification *v, sqlite3_stmt *row, const scanned *s) {
	const char *digest = fl_sql_column(row, C_DIGEST);
	return put_digest(v, row, s, C_FACTS, (piece){digest, strlen(digest)},
	                  "its facts or its digest were changed: they do not fit one another");
}

static fl_status check_unpacked(verification *v, sqlite3_stmt *row, const scanned *s) {
	fl_arena arena = {0};
	fl_entry entry;
	char *bytes = NULL;
	fl_error why = {0};
	const char *facts = fl_sql_column(row, C_FACTS);
	size_t length = (size_t)sqlite3_column_bytes(row, C_FACTS);
	fl_status status = fl_facts_read(facts, length, &arena, &entry, &why);
	if (status >= 0)
		status = fl_facts_check_canonical(facts, length, &entry, &why);
	if (status >= 0)
		status = fl_unpack(v->store->hasher, &entry.head.carried, sqlite3_column_blob(row, C_PACKED),
		                   (size_t)sqlite3_column_bytes(row, C_PACKED), &arena, &bytes, &why);
	fl_arena_free(&arena);
	return status < 0 ? misfit_of_number(v, sqlite3_column_int64(row, C_SEQUENCE), s->number, why.message) : FL_OK;
}

static fl_status check_carried(verification *v, sqlite3_stmt *row, const scanned *s) {
	static const char not_kept[] = "its journal or paper is not the one that was kept";
	int64_t sequence = sqlite3_column_int64(row, C_SEQUENCE);
	if (sqlite3_column_type(row, C_PACKED) == SQLITE_NULL) {
		v->counts.without_bytes++;
		return v->at->own ? misfit_of_number(v, sequence, s->number, "its journal or paper is missing") : FL_OK;
	}
	v->with_bytes++;
	fl_status status = put_digest(v, row, s, C_PACKED, value_of(s->carries, 3), not_kept);
	if (status < 0)
		return status;
	if (whole_of(value_of(s->carries, 2)) != sqlite3_column_bytes(row, C_PACKED))
		return misfit_of_number(v, sequence, s->number, not_kept);
	if (whole_of(value_of(s->carries, 0)) != sqlite3_column_int64(row, C_SIZE))
		return misfit_of_number(v, sequence, s->number, "the size of its journal or paper was changed");
	return v->deep ? check_unpacked(v, row, s) : FL_OK;
}

/* Does the row for looking up say what the facts say? The word of what does not; NULL if all fits. */
static const char *wrong_column(verification *v, sqlite3_stmt *row, const scanned *s) {
	if (sqlite3_column_int64(row, C_ORIGIN) != v->at->row)
		return "chain";
	if (!says(s->number, fl_sql_column(row, C_NUMBER)))
		return "number";
	if (!says_day(s->day, fl_sql_day(row, C_DAY)))
		return "day";
	if (!says_utc(s->closed, sqlite3_column_int64(row, C_CLOSED)))
		return "time of closing";
	if (!says_day(value_of(s->due, 0), fl_sql_day(row, C_DUE)))
		return "due date";
	if (strcmp(fl_sql_column(row, C_SESSION_DIGEST), fl_sql_column(row, C_DIGEST)) != 0)
		return "digest";
	const char *replaces = fl_sql_column(row, C_REPLACES);
	if (*replaces ? !says(value_of(s->replaces, 0), replaces) : s->replaces.at != NULL)
		return "amendment";
	if (!says(value_of(s->instrument, 0), fl_sql_column(row, C_SITE)) ||
	    !says(value_of(s->instrument, 1), fl_sql_column(row, C_TAG)) ||
	    !says(value_of(s->instrument, 2), fl_sql_column(row, C_SERIAL)))
		return "instrument";
	return NULL;
}

static fl_status check_session(verification *v, sqlite3_stmt *row, const scanned *s) {
	int64_t sequence = sqlite3_column_int64(row, C_SEQUENCE);
	if (sqlite3_column_type(row, C_ORIGIN) == SQLITE_NULL)
		return misfit_of_number(v, sequence, s->number, "its row for looking up is missing");
	const char *wrong = wrong_column(v, row, s);
	if (wrong) {
		char text[96];
		snprintf(text, sizeof text, "its %s was changed in the table for looking up", wrong);
		return misfit_of_number(v, sequence, s->number, text);
	}
	if (v->at->own && sqlite3_column_type(row, C_NUMBER_ROW) == SQLITE_NULL)
		return misfit_of_number(v, sequence, s->number, "its number is missing among those given out");
	v->used_facts += s->used;
	v->counts.records++;
	return FL_OK;
}

static fl_status check_paper(verification *v, sqlite3_stmt *row, const scanned *s) {
	int64_t sequence = sqlite3_column_int64(row, C_SEQUENCE);
	if (sqlite3_column_type(row, C_RECORD) == SQLITE_NULL)
		return misfit_of_number(v, sequence, s->number, "its row for looking up is missing");
	if (!says(s->record, fl_sql_column(row, C_RECORD)))
		return misfit_of_number(v, sequence, s->number,
		                        "the record of its paper was changed in the table for looking up");
	v->counts.papers++;
	return FL_OK;
}

static int by_row(const void *a, const void *b) {
	int64_t x = ((const chain *)a)->row, y = ((const chain *)b)->row;
	return x < y ? -1 : x > y;
}

static chain *chain_of(verification *v, int64_t row) {
	const chain key = {.row = row};
	if (v->at && v->at->row == row)
		return v->at;
	return v->chain_count ? bsearch(&key, v->chains, v->chain_count, sizeof key, by_row) : NULL;
}

static fl_status ask_watch(verification *v) {
	if (!v->watch || v->counts.entries % 64 || v->watch->go_on(v->watch->self, (uint64_t)v->counts.entries, v->total))
		return FL_OK;
	return fl_fail(v->err, FL_E_STATE, "stopped on request after %" PRId64 " entries; all of them fit",
	               v->counts.entries);
}

static fl_status check_entry(verification *v, sqlite3_stmt *row) {
	scanned s;
	int64_t entry_row = sqlite3_column_int64(row, C_ID);
	v->at = chain_of(v, sqlite3_column_int64(row, C_CHAIN));
	scan(fl_sql_column(row, C_FACTS), (size_t)sqlite3_column_bytes(row, C_FACTS), entry_row, &s);
	if (!v->at)
		return misfit_of_number(v, sqlite3_column_int64(row, C_SEQUENCE), s.number, "it belongs to none of the chains");
	fl_status status = check_facts(v, row, &s);
	if (status >= 0)
		status = check_place(v, row, &s);
	if (status >= 0)
		status = check_carried(v, row, &s);
	if (status >= 0)
		status = piece_is(s.kind, "session") ? check_session(v, row, &s) : check_paper(v, row, &s);
	if (status < 0)
		return status;
	v->at->sequence++;
	memcpy(v->at->previous, fl_sql_column(row, C_DIGEST), sizeof v->at->previous);
	v->counts.entries++;
	return ask_watch(v);
}

/* ---- chains ----------------------------------------------------------------------------------------------------- */

static fl_status check_founding(verification *v, const char *founding, size_t length) {
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_seal_digest(v->store->hasher, founding, length, digest, v->err);
	return status >= 0 && strcmp(digest, v->at->origin) != 0 ? misfit(v, 0, "the founding of the chain was changed")
	                                                         : status;
}

/* Each chain of the book's own but the first goes on from another. */
static fl_status check_own(verification *v, const char *text, size_t length, int64_t *first) {
	fl_arena arena = {0};
	fl_founding_text founding;
	fl_status status = fl_founding_read(text, length, &arena, &founding, v->err);
	if (status >= 0)
		snprintf(v->at->prefix, sizeof v->at->prefix, "%s", founding.prefix);
	if (status >= 0 && v->at->own && !*founding.continues && ++*first > 1)
		status = misfit(v, 0, "a chain that was taken in was made the book's own");
	fl_arena_free(&arena);
	return status;
}

static fl_status take_chain(verification *v, sqlite3_stmt *origins, int64_t *first) {
	chain *grown = fl_arena_grow(&v->arena, v->chains, v->chain_count, &v->chain_capacity, sizeof *grown);
	const char *founding = fl_sql_column(origins, 2);
	size_t length = (size_t)sqlite3_column_bytes(origins, 2);
	if (!grown)
		return fl_sql_memory(v->err);
	v->chains = grown;
	v->at = &grown[v->chain_count++];
	*v->at = (chain){.row = sqlite3_column_int64(origins, 0), .own = sqlite3_column_int(origins, 3) != 0};
	snprintf(v->at->origin, sizeof v->at->origin, "%s", fl_sql_column(origins, 1));
	memcpy(v->at->previous, v->at->origin, sizeof v->at->previous);
	v->counts.origins++;
	fl_status status = check_founding(v, founding, length);
	return status < 0 ? status : check_own(v, founding, length, first);
}

static fl_status take_chains(verification *v) {
	sqlite3_stmt *origins = NULL;
	int64_t first = 0;
	fl_status status = fl_sql(v->store, SQL_ORIGINS, &origins, v->err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(v->store, origins, &row, v->err);
		if (status < 0 || !row)
			break;
		status = take_chain(v, origins, &first);
	}
	if (v->chain_count)
		qsort(v->chains, v->chain_count, sizeof *v->chains, by_row);
	v->at = NULL;
	return status;
}

static fl_status check_entries(verification *v) {
	sqlite3_stmt *entries = NULL;
	fl_status status = FL_OK;
	if (sqlite3_prepare_v2(v->store->db, ENTRIES_TEXT, -1, &entries, NULL) != SQLITE_OK)
		return fl_sql_fail(v->store, v->err);
	for (bool row = true; status >= 0 && !fl_digester_failed(v->digester);) {
		status = fl_sql_step(v->store, entries, &row, v->err);
		if (status < 0 || !row)
			break;
		status = check_entry(v, entries);
	}
	sqlite3_finalize(entries);
	return status;
}

/* What the other thread found stands before whatever was found here, or at the same entry: it gets the word. */
static fl_status check_chains(verification *v) {
	fl_digested wrong;
	chain place = {0};
	fl_status status = take_chains(v);
	if (status >= 0)
		status = fl_digester_new(&v->digester, v->err);
	if (status < 0)
		return status;
	status = check_entries(v);
	if (!fl_digester_finish(v->digester, &wrong))
		return status;
	if (v->err)
		*v->err = (fl_error){0};
	v->at = &place;
	memcpy(place.origin, wrong.origin, sizeof place.origin);
	piece number = {*wrong.number ? wrong.number : NULL, strlen(wrong.number)};
	status = misfit_of_number(v, wrong.sequence, number, wrong.what);
	v->at = NULL;
	return status;
}

/* ---- numbers ---------------------------------------------------------------------------------------------------- */

static fl_status check_number(verification *v, sqlite3_stmt *row, int64_t expected, char previous[FL_DIGEST_HEX_SIZE]) {
	const fl_place place = {.file = v->store->path, .field = fl_sql_column(row, 4)};
	const chain *c = v->at = chain_of(v, sqlite3_column_int64(row, 1));
	fl_number_row number = {.origin = c ? c->origin : "",
	                        .year = sqlite3_column_int64(row, 2),
	                        .value = sqlite3_column_int64(row, 3),
	                        .text = fl_sql_column(row, 4),
	                        .at = sqlite3_column_int64(row, 5),
	                        .purpose = fl_sql_column(row, 6)};
	char digest[FL_DIGEST_HEX_SIZE], text[FL_NUMBER_SIZE];
	fl_number_text(c ? c->prefix : "", number.year, number.value, text);
	fl_status status = fl_number_digest(v->store, previous, &number, digest, v->err);
	if (status < 0)
		return status;
	bool same = strcmp(digest, fl_sql_column(row, 7)) == 0 && strcmp(text, number.text) == 0;
	if (!same || !c || !c->own || sqlite3_column_int64(row, 0) != expected)
		return fl_fail_at(v->err, FL_E_TAMPERED, place, "a number that was given out was changed or taken out");
	memcpy(previous, digest, sizeof digest);
	return FL_OK;
}

static fl_status check_numbers(verification *v) {
	sqlite3_stmt *statement = NULL;
	char previous[FL_DIGEST_HEX_SIZE] = "";
	int64_t expected = 0;
	fl_status status = fl_sql(v->store, SQL_NUMBERS, &statement, v->err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(v->store, statement, &row, v->err);
		if (status < 0 || !row)
			break;
		status = check_number(v, statement, ++expected, previous);
	}
	if (statement)
		sqlite3_reset(statement);
	return status;
}

/* ---- tables for looking up -------------------------------------------------------------------------------------- */

static fl_status misfit_of_table(verification *v, const char *what) {
	return fl_fail_at(v->err, FL_E_TAMPERED, (fl_place){.file = v->store->path}, "%s", what);
}

static fl_status check_counts(verification *v) {
	sqlite3_stmt *row = NULL;
	bool found = false;
	fl_status status = fl_sql(v->store, SQL_COUNTS, &row, v->err);
	if (status >= 0)
		status = fl_sql_step(v->store, row, &found, v->err);
	if (status < 0)
		return status;
	int64_t n[8];
	for (int i = 0; i < 8; i++)
		n[i] = sqlite3_column_int64(row, i);
	sqlite3_reset(row);
	if (n[0] != v->counts.entries)
		return misfit_of_table(v, "the book has entries that belong to none of its chains");
	if (n[1] != v->counts.records || n[2] != v->counts.papers)
		return misfit_of_table(v, "a table for looking up has rows that belong to no entry");
	if (n[3] != v->with_bytes)
		return misfit_of_table(v, "the book holds a journal or paper that belongs to no entry");
	if (n[4] != n[5] || n[6] != n[7])
		return misfit_of_table(v, "an instrument, lot or equipment is listed that no record names");
	return FL_OK;
}

/* Hash of each item by its row. */
static fl_status load_items(fl_store *store, fl_arena *arena, uint64_t **hashes, int64_t *count, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	if (sqlite3_prepare_v2(store->db, "SELECT max(id) FROM item", -1, &statement, NULL) != SQLITE_OK)
		return fl_sql_fail(store, err);
	bool row = false;
	fl_status status = fl_sql_step(store, statement, &row, err);
	*count = row ? sqlite3_column_int64(statement, 0) + 1 : 1;
	sqlite3_finalize(statement);
	if (status < 0)
		return status;
	*hashes = *count > 0 && *count < INT32_MAX ? fl_arena_alloc(arena, (size_t)*count, sizeof **hashes) : NULL;
	if (!*hashes)
		return fl_sql_memory(err);
	if (sqlite3_prepare_v2(store->db, "SELECT id, kind, name FROM item WHERE id > 0", -1, &statement, NULL) !=
	    SQLITE_OK)
		return fl_sql_fail(store, err);
	while (status >= 0) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		fl_text kind = {0}, name = {0};
		fl_put_text(&kind, fl_sql_column(statement, 1));
		fl_put_text(&name, fl_sql_column(statement, 2));
		if (kind.failed || name.failed)
			status = fl_sql_memory(err);
		else
			(*hashes)[sqlite3_column_int64(statement, 0)] =
			    hash_item(kind.data + 1, kind.length - 1, name.data + 1, name.length - 1);
		fl_text_free(&kind);
		fl_text_free(&name);
	}
	sqlite3_finalize(statement);
	return status;
}

static fl_status sum_used(fl_store *store, const uint64_t *hashes, int64_t count, uint64_t *sum, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, SQL_USED, &statement, err);
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(store, statement, &row, err);
		if (status < 0 || !row)
			break;
		int64_t item = sqlite3_column_int64(statement, 0);
		uint64_t entry = (uint64_t)sqlite3_column_int64(statement, 1);
		uint64_t hash = item > 0 && item < count ? hashes[item] : 0;
		*sum += mix(hash ^ (entry * UINT64_C(0x9e3779b97f4a7c15)));
	}
	if (statement)
		sqlite3_reset(statement);
	return status;
}

/* The sums differ: which session is it? */
static fl_status name_used(verification *v) {
	sqlite3_stmt *entries = NULL;
	static const char *const text =
	    "SELECT e.id, e.sequence, e.facts, e.origin, (SELECT group_concat(i.kind || char(9) "
	    "|| i.name, char(10)) FROM used u JOIN item i ON i.id = u.item WHERE u.entry = e.id) "
	    "FROM entry e ORDER BY e.id";
	if (sqlite3_prepare_v2(v->store->db, text, -1, &entries, NULL) != SQLITE_OK)
		return fl_sql_fail(v->store, v->err);
	fl_status status = FL_OK;
	for (bool row = true; status >= 0;) {
		status = fl_sql_step(v->store, entries, &row, v->err);
		if (status < 0 || !row)
			break;
		scanned s;
		uint64_t sum = 0, entry_row = (uint64_t)sqlite3_column_int64(entries, 0);
		scan(fl_sql_column(entries, 2), (size_t)sqlite3_column_bytes(entries, 2), (int64_t)entry_row, &s);
		const char *at = fl_sql_column(entries, 4);
		while (*at) {
			size_t length = strcspn(at, "\n"), kind = strcspn(at, "\t");
			sum +=
			    mix(hash_item(at, kind, at + kind + 1, length - kind - 1) ^ (entry_row * UINT64_C(0x9e3779b97f4a7c15)));
			at += length + (at[length] == '\n');
		}
		v->at = chain_of(v, sqlite3_column_int64(entries, 3));
		if (sum != s.used)
			status = misfit_of_number(v, sqlite3_column_int64(entries, 1), s.number,
			                          "what fed it was changed in the table for looking up");
	}
	sqlite3_finalize(entries);
	return status < 0 ? status : misfit_of_table(v, "the table of what fed which record has rows that belong to none");
}

static fl_status check_used(verification *v) {
	fl_arena arena = {0};
	uint64_t *hashes = NULL, sum = 0;
	int64_t count = 0;
	fl_status status = load_items(v->store, &arena, &hashes, &count, v->err);
	if (status >= 0)
		status = sum_used(v->store, hashes, count, &sum, v->err);
	fl_arena_free(&arena);
	return status >= 0 && sum != v->used_facts ? name_used(v) : status;
}

/* The database's own look at its file: pages, indexes, types. */
static fl_status check_structure(verification *v) {
	sqlite3_stmt *statement = NULL;
	if (sqlite3_prepare_v2(v->store->db, "PRAGMA integrity_check(1)", -1, &statement, NULL) != SQLITE_OK)
		return fl_sql_fail(v->store, v->err);
	bool row = false;
	fl_status status = fl_sql_step(v->store, statement, &row, v->err);
	if (status >= 0 && row && strcmp(fl_sql_column(statement, 0), "ok") != 0)
		status = fl_fail_at(v->err, FL_E_TAMPERED, (fl_place){.file = v->store->path}, "the file is damaged: %s",
		                    fl_sql_column(statement, 0));
	sqlite3_finalize(statement);
	return status;
}

static fl_status verify_within(verification *v) {
	int64_t total = 0;
	fl_status status = fl_sql_number(v->store, SQL_COUNT_ENTRIES, &total, 0, v->err, "");
	v->total = (uint64_t)total;
	if (status >= 0)
		status = fl_schema_check(v->store, v->err);
	if (status >= 0)
		status = check_chains(v);
	if (status >= 0)
		status = check_numbers(v);
	if (status >= 0)
		status = check_counts(v);
	if (status >= 0)
		status = check_used(v);
	return status >= 0 && v->deep ? check_structure(v) : status;
}

fl_status fl_store_verify(fl_store *store, bool deep, const fl_store_watch *watch, fl_verified *out, fl_error *err) {
	verification v = {.store = store, .err = err, .watch = watch, .deep = deep};
	fl_status status = fl_sql_run(store, SQL_BEGIN_READ, err, "");
	if (status >= 0)
		status = verify_within(&v);
	fl_sql_rollback(store);
	fl_arena_free(&v.arena);
	*out = v.counts;
	return status;
}
