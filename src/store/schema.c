/* schema.c - the tables of the book and its rules, as steps from one format to the next.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *   origin      one chain of entries: the founding text and its digest; own: written by this book
 *   entry       one link: its facts (src/store/facts.c), and the digest of those bytes
 *   bytes       what an entry carries, packed by zlib: the journal of a session, a paper
 *   number      a number given out, chained by a digest of its own
 *   instrument, session, paper            for looking up; everything in them is read out of the entries' facts
 *   item, used  (format 2) which lots and equipment fed which session; likewise
 *
 * Every table refuses update, delete and replace by a trigger of its own. Whoever has the file can take the triggers
 * out; the digests are what tells then.
 */
#include "schema.h"
#include "lookup.h"

#include <string.h>

#define KEEP(table, key)                                                                                       \
	{"trigger", table "_update",                                                                               \
	 "CREATE TRIGGER " table "_update BEFORE UPDATE ON " table                                                 \
	 " BEGIN SELECT raise(ABORT, 'the book only grows: nothing in it is changed'); END"},                      \
	    {"trigger", table "_delete",                                                                           \
	     "CREATE TRIGGER " table "_delete BEFORE DELETE ON " table                                             \
	     " BEGIN SELECT raise(ABORT, 'the book only grows: nothing in it is removed'); END"},                  \
	{                                                                                                          \
		"trigger", table "_replace",                                                                           \
		    "CREATE TRIGGER " table "_replace BEFORE INSERT ON " table " WHEN EXISTS (SELECT 1 FROM " table    \
		    " WHERE " key ") BEGIN SELECT raise(ABORT, 'the book only grows: nothing in it is replaced'); END" \
	}

typedef struct part {
	const char *type, *name, *sql;
} part;

static const part format_1[] = {
    {"table", "origin",
     "CREATE TABLE origin(id INTEGER PRIMARY KEY, digest TEXT NOT NULL UNIQUE, founding TEXT NOT NULL, "
     "own INTEGER NOT NULL CHECK(own IN (0, 1))) STRICT"},
    {"table", "entry",
     "CREATE TABLE entry(id INTEGER PRIMARY KEY, origin INTEGER NOT NULL REFERENCES origin(id), "
     "sequence INTEGER NOT NULL, digest TEXT NOT NULL, facts TEXT NOT NULL, UNIQUE(origin, sequence)) STRICT"},
    {"index", "entry_digest", "CREATE UNIQUE INDEX entry_digest ON entry(digest)"},
    {"table", "bytes",
     "CREATE TABLE bytes(entry INTEGER PRIMARY KEY REFERENCES entry(id), size INTEGER NOT NULL, packed BLOB NOT NULL) "
     "STRICT"},
    {"table", "number",
     "CREATE TABLE number(id INTEGER PRIMARY KEY, origin INTEGER NOT NULL REFERENCES origin(id), "
     "year INTEGER NOT NULL, value INTEGER NOT NULL, text TEXT NOT NULL, at INTEGER NOT NULL, purpose TEXT NOT NULL, "
     "digest TEXT NOT NULL, UNIQUE(origin, year, value), UNIQUE(origin, text)) STRICT"},
    {"table", "instrument",
     "CREATE TABLE instrument(id INTEGER PRIMARY KEY, site TEXT NOT NULL, tag TEXT NOT NULL, serial TEXT NOT NULL, "
     "UNIQUE(tag, site, serial)) STRICT"},
    {"table", "session",
     "CREATE TABLE session(entry INTEGER PRIMARY KEY REFERENCES entry(id), "
     "origin INTEGER NOT NULL REFERENCES origin(id), number TEXT NOT NULL, "
     "instrument INTEGER NOT NULL REFERENCES instrument(id), day INTEGER NOT NULL, closed INTEGER NOT NULL, "
     "due INTEGER, digest TEXT NOT NULL, replaces TEXT, UNIQUE(origin, number)) STRICT"},
    {"index", "session_of_instrument",
     "CREATE INDEX session_of_instrument ON session(instrument, day, closed, digest)"},
    {"index", "session_replaces",
     "CREATE UNIQUE INDEX session_replaces ON session(replaces) WHERE replaces IS NOT NULL"},
    {"table", "paper",
     "CREATE TABLE paper(entry INTEGER PRIMARY KEY REFERENCES entry(id), record TEXT NOT NULL) STRICT"},
    {"index", "paper_of_record", "CREATE INDEX paper_of_record ON paper(record)"},
    KEEP("origin", "id = NEW.id OR digest = NEW.digest"),
    KEEP("entry", "id = NEW.id OR digest = NEW.digest OR (origin = NEW.origin AND sequence = NEW.sequence)"),
    KEEP("bytes", "entry = NEW.entry"),
    KEEP("number", "id = NEW.id OR (origin = NEW.origin AND text = NEW.text) OR "
                   "(origin = NEW.origin AND year = NEW.year AND value = NEW.value)"),
    KEEP("instrument", "id = NEW.id OR (tag = NEW.tag AND site = NEW.site AND serial = NEW.serial)"),
    KEEP("session", "entry = NEW.entry OR (origin = NEW.origin AND number = NEW.number) OR "
                    "(NEW.replaces IS NOT NULL AND replaces = NEW.replaces)"),
    KEEP("paper", "entry = NEW.entry"),
};

static const part format_2[] = {
    {"table", "item",
     "CREATE TABLE item(id INTEGER PRIMARY KEY, kind TEXT NOT NULL, name TEXT NOT NULL, UNIQUE(name, kind)) STRICT"},
    {"table", "used",
     "CREATE TABLE used(item INTEGER NOT NULL REFERENCES item(id), entry INTEGER NOT NULL REFERENCES entry(id), "
     "PRIMARY KEY(item, entry)) STRICT, WITHOUT ROWID"},
    KEEP("item", "id = NEW.id OR (name = NEW.name AND kind = NEW.kind)"),
    KEEP("used", "item = NEW.item AND entry = NEW.entry"),
};

static fl_status fill_nothing(fl_store *store, fl_error *err) {
	(void)store;
	(void)err;
	return FL_OK;
}

/* One step: what it adds, and how it fills that from what the book holds. */
static const struct step {
	const part *parts;
	size_t count;
	fl_status (*fill)(fl_store *store, fl_error *err);
} steps[BOOK_FORMAT] = {
    {format_1, sizeof format_1 / sizeof *format_1, fill_nothing},
    {format_2, sizeof format_2 / sizeof *format_2, fl_lookup_fill_used},
};

fl_status fl_schema_raise(fl_store *store, int from, fl_error *err) {
	fl_status status = FL_OK;
	for (int format = from; status >= 0 && format < BOOK_FORMAT; format++) {
		const struct step *step = &steps[format];
		for (size_t i = 0; status >= 0 && i < step->count; i++)
			status = fl_sql_text(store, step->parts[i].sql, err);
		if (status >= 0)
			status = step->fill(store, err);
	}
	char text[96];
	sqlite3_snprintf(sizeof text, text, "PRAGMA application_id = %d; PRAGMA user_version = %d", BOOK_APPLICATION_ID,
	                 BOOK_FORMAT);
	return status < 0 ? status : fl_sql_text(store, text, err);
}

static fl_status check_part(fl_store *store, sqlite3_stmt *statement, const part *p, fl_error *err) {
	sqlite3_reset(statement);
	fl_sql_bind(statement, "tt", p->type, p->name);
	bool row = false;
	fl_status status = fl_sql_step(store, statement, &row, err);
	if (status < 0)
		return status;
	const fl_place place = {.file = store->path};
	if (!row)
		return fl_fail_at(err, FL_E_TAMPERED, place, "the %s %s is missing: someone took it out of the book",
		                  strcmp(p->type, "trigger") == 0 ? "rule" : p->type, p->name);
	if (strcmp(fl_sql_column(statement, 0), p->sql) != 0)
		return fl_fail_at(err, FL_E_TAMPERED, place, "the %s %s is not the book's own: someone changed it",
		                  strcmp(p->type, "trigger") == 0 ? "rule" : p->type, p->name);
	return FL_OK;
}

/* Anything more than the parts (but for what the database makes by itself) could change what a query gives. */
static fl_status check_count(fl_store *store, int64_t expected, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	static const char *const text = "SELECT count(*) FROM sqlite_schema WHERE name NOT LIKE 'sqlite\\_%' ESCAPE '\\'";
	if (sqlite3_prepare_v2(store->db, text, -1, &statement, NULL) != SQLITE_OK)
		return fl_sql_fail(store, err);
	bool row = false;
	fl_status status = fl_sql_step(store, statement, &row, err);
	int64_t found = row ? sqlite3_column_int64(statement, 0) : 0;
	sqlite3_finalize(statement);
	if (status >= 0 && found != expected)
		return fl_fail_at(err, FL_E_TAMPERED, (fl_place){.file = store->path},
		                  "the book has tables or rules that are not its own: someone added them");
	return status;
}

fl_status fl_schema_check(fl_store *store, fl_error *err) {
	sqlite3_stmt *statement = NULL;
	if (sqlite3_prepare_v2(store->db, "SELECT sql FROM sqlite_schema WHERE type = ?1 AND name = ?2", -1, &statement,
	                       NULL) != SQLITE_OK)
		return fl_sql_fail(store, err);
	fl_status status = FL_OK;
	int64_t expected = 0;
	for (int format = 0; format < BOOK_FORMAT; format++)
		for (size_t i = 0; status >= 0 && i < steps[format].count; i++, expected++)
			status = check_part(store, statement, &steps[format].parts[i], err);
	sqlite3_finalize(statement);
	return status < 0 ? status : check_count(store, expected, err);
}
