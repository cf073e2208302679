/* sql.h - the database behind the book: the statements in one list, binding, stepping, errors in words.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_STORE_SQL_H
#define FOUNDLEFT_STORE_SQL_H

#include "foundleft/store.h"

#include <sqlite3.h>

#define BOOK_APPLICATION_ID 0x464c424b /* "FLBK" */

/* Where a record's columns stand in every query that lists records. */
#define RECORD_COLUMNS "e.facts, e.digest"
#define IN_FORCE "NOT EXISTS (SELECT 1 FROM session n WHERE n.replaces = s.digest)"

/* Every statement of the running work: name, text. Prepared when first used, kept until the book is closed. */
#define SQL_LIST(X)                                                                                                    \
	X(SQL_BEGIN, "BEGIN IMMEDIATE")                                                                                    \
	X(SQL_BEGIN_READ, "BEGIN")                                                                                         \
	X(SQL_COMMIT, "COMMIT")                                                                                            \
	X(SQL_ROLLBACK, "ROLLBACK")                                                                                        \
	X(SQL_ORIGINS, "SELECT id, digest, founding, own FROM origin ORDER BY own DESC, digest")                           \
	X(SQL_ORIGIN, "SELECT id, own, founding FROM origin WHERE digest = ?1")                                            \
	X(SQL_OWN, "SELECT id, digest, founding FROM origin WHERE own = 1 ORDER BY id DESC LIMIT 1")                       \
	X(SQL_ADD_ORIGIN, "INSERT INTO origin(digest, founding, own) VALUES (?1, ?2, ?3)")                                 \
	X(SQL_HEAD, "SELECT sequence, digest, facts, id FROM entry WHERE origin = ?1 ORDER BY sequence DESC LIMIT 1")      \
	X(SQL_LINK, "SELECT digest, id FROM entry WHERE origin = ?1 AND sequence = ?2")                                    \
	X(SQL_ADD_ENTRY, "INSERT INTO entry(origin, sequence, digest, facts) VALUES (?1, ?2, ?3, ?4)")                     \
	X(SQL_ADD_BYTES, "INSERT INTO bytes(entry, size, packed) VALUES (?1, ?2, ?3)")                                     \
	X(SQL_BYTES, "SELECT size, packed FROM bytes WHERE entry = ?1")                                                    \
	X(SQL_HAS_BYTES, "SELECT 1 FROM bytes WHERE entry = ?1")                                                           \
	X(SQL_INSTRUMENT, "SELECT id FROM instrument WHERE site = ?1 AND tag = ?2 AND serial = ?3")                        \
	X(SQL_ADD_INSTRUMENT, "INSERT INTO instrument(site, tag, serial) VALUES (?1, ?2, ?3)")                             \
	X(SQL_ITEM, "SELECT id FROM item WHERE kind = ?1 AND name = ?2")                                                   \
	X(SQL_ADD_ITEM, "INSERT INTO item(kind, name) VALUES (?1, ?2)")                                                    \
	X(SQL_ADD_USED, "INSERT INTO used(item, entry) VALUES (?1, ?2)")                                                   \
	X(SQL_ADD_SESSION, "INSERT INTO session(entry, origin, number, instrument, day, closed, due, digest, replaces) "   \
	                   "VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9)")                                                  \
	X(SQL_ADD_PAPER, "INSERT INTO paper(entry, record) VALUES (?1, ?2)")                                               \
	X(SQL_NUMBER_USED, "SELECT 1 FROM session WHERE origin = ?1 AND number = ?2")                                      \
	X(SQL_NUMBER_RESERVED, "SELECT 1 FROM number WHERE origin = ?1 AND text = ?2")                                     \
	X(SQL_NUMBER_LAST, "SELECT max(value) FROM number WHERE origin = ?1 AND year = ?2")                                \
	X(SQL_NUMBER_HEAD, "SELECT id, digest FROM number ORDER BY id DESC LIMIT 1")                                       \
	X(SQL_ADD_NUMBER, "INSERT INTO number(id, origin, year, value, text, at, purpose, digest) VALUES (?1, ?2, ?3, "    \
	                  "?4, ?5, ?6, ?7, ?8)")                                                                           \
	X(SQL_NUMBERS, "SELECT id, origin, year, value, text, at, purpose, digest FROM number ORDER BY id")                \
	X(SQL_UNUSED,                                                                                                      \
	  "SELECT text, purpose, at FROM number n WHERE NOT EXISTS (SELECT 1 FROM session s WHERE s.origin = n.origin "    \
	  "AND s.number = n.text) ORDER BY id")                                                                            \
	X(SQL_REPLACED, "SELECT 1 FROM session WHERE replaces = ?1")                                                       \
	X(SQL_SESSION_BY_NUMBER,                                                                                           \
	  "SELECT " RECORD_COLUMNS " FROM origin o JOIN session s ON s.origin = o.id AND s.number = ?1 "                   \
	  "JOIN entry e ON e.id = s.entry ORDER BY o.own DESC, o.digest")                                                  \
	X(SQL_SESSION_BY_DIGEST, "SELECT " RECORD_COLUMNS ", e.id FROM entry e WHERE e.digest = ?1")                       \
	X(SQL_HISTORY, "SELECT " RECORD_COLUMNS                                                                            \
	               " FROM session s JOIN entry e ON e.id = s.entry WHERE s.instrument = ?1 AND (?2 OR " IN_FORCE       \
	               ") ORDER BY s.day, s.closed, s.digest")                                                             \
	X(SQL_DUE,                                                                                                         \
	  "SELECT i.id, i.site, i.tag, i.serial, s.number, s.day, s.due FROM instrument i JOIN session s ON s.entry = "    \
	  "(SELECT s.entry FROM session s WHERE s.instrument = i.id AND " IN_FORCE                                         \
	  " ORDER BY s.day DESC, s.closed DESC, s.digest DESC LIMIT 1) "                                                   \
	  "ORDER BY s.due IS NULL, s.due, i.site, i.tag, i.serial")                                                        \
	X(SQL_INSTRUMENTS, "SELECT id, site, tag, serial FROM instrument ORDER BY site, tag, serial")                      \
	X(SQL_INSTRUMENTS_OF_TAG, "SELECT id, site, tag, serial FROM instrument WHERE tag = ?1 ORDER BY site, serial")     \
	X(SQL_FED_BY,                                                                                                      \
	  "SELECT " RECORD_COLUMNS " FROM item i JOIN used u ON u.item = i.id JOIN session s ON s.entry = u.entry "        \
	  "JOIN entry e ON e.id = s.entry WHERE i.name = ?2 AND (?1 IS NULL OR i.kind = ?1) AND s.day BETWEEN ?3 AND ?4 "  \
	  "ORDER BY s.day, s.closed, s.digest")                                                                            \
	X(SQL_PAPERS,                                                                                                      \
	  "SELECT e.facts, e.digest FROM paper p JOIN entry e ON e.id = p.entry WHERE p.record = ?1 ORDER BY p.entry")     \
	X(SQL_CHAIN,                                                                                                       \
	  "SELECT e.id, e.sequence, e.digest, e.facts, b.size, b.packed FROM entry e LEFT JOIN bytes b ON b.entry = e.id " \
	  "WHERE e.origin = ?1 ORDER BY e.sequence")                                                                       \
	X(SQL_CHAIN_FACTS,                                                                                                 \
	  "SELECT e.id, e.sequence, e.digest, e.facts FROM entry e WHERE e.origin = ?1 ORDER BY e.sequence")               \
	X(SQL_COUNT_ENTRIES, "SELECT count(*) FROM entry")                                                                 \
	X(SQL_COUNT_CHAIN, "SELECT coalesce(max(sequence), 0) FROM entry WHERE origin = ?1")                               \
	X(SQL_FOUND_LOOKUP,                                                                                                \
	  "SELECT s.origin, s.number, s.day, s.closed, s.due, s.digest, s.replaces, s.instrument FROM session s "          \
	  "WHERE s.entry = ?1")                                                                                            \
	X(SQL_FOUND_INSTRUMENT, "SELECT site, tag, serial FROM instrument WHERE id = ?1")                                  \
	X(SQL_FOUND_PAPER, "SELECT record FROM paper WHERE entry = ?1")                                                    \
	X(SQL_COUNTS,                                                                                                      \
	  "SELECT (SELECT count(*) FROM entry), (SELECT count(*) FROM session), (SELECT count(*) FROM paper), "            \
	  "(SELECT count(*) FROM bytes), (SELECT count(*) FROM instrument), (SELECT count(DISTINCT instrument) FROM "      \
	  "session), (SELECT count(*) FROM item), (SELECT count(DISTINCT item) FROM used)")                                \
	X(SQL_USED, "SELECT item, entry FROM used")                                                                        \
	X(SQL_USED_OF, "SELECT i.kind, i.name FROM used u JOIN item i ON i.id = u.item WHERE u.entry = ?1")

typedef enum sql_name {
#define SQL_ENUM(name, text) name,
	SQL_LIST(SQL_ENUM)
#undef SQL_ENUM
	    SQL_COUNT
} sql_name;

struct fl_store {
	sqlite3 *db;
	fl_hasher *hasher;
	bool writable;
	int64_t own;                         /* row of the chain that this book writes */
	char own_digest[FL_DIGEST_HEX_SIZE]; /* of its founding */
	char own_name[96], own_prefix[16];
	char path[512];
	sqlite3_stmt *statements[SQL_COUNT];
};

/* Makes an empty file for a database that only its owner may read; the log beside it gets the same mode. FL_E_EXISTS.
 */
fl_status fl_sql_make_file(const fl_io *io, const char *path, fl_error *err) FL_MUST_USE;
/* The statement, ready to be bound. */
fl_status fl_sql(fl_store *store, sql_name name, sqlite3_stmt **out, fl_error *err) FL_MUST_USE;
/* Binds from ?1 on: i int64_t, d fl_day (FL_NO_DAY becomes NULL), t text (NULL or as is), e text ("" becomes NULL),
 * b bytes and size_t. */
void fl_sql_bind(sqlite3_stmt *statement, const char *format, ...);
/* Takes the next row: *row tells whether there is one; at the end the statement is reset. */
fl_status fl_sql_step(fl_store *store, sqlite3_stmt *statement, bool *row, fl_error *err) FL_MUST_USE;
/* Runs a statement that gives no row; binds as fl_sql_bind. */
fl_status fl_sql_run(fl_store *store, sql_name name, fl_error *err, const char *format, ...) FL_MUST_USE;
/* Runs text that is used once. */
fl_status fl_sql_text(fl_store *store, const char *text, fl_error *err) FL_MUST_USE;
/* One whole number; `fallback` where there is no row or NULL. */
fl_status fl_sql_number(fl_store *store, sql_name name, int64_t *out, int64_t fallback, fl_error *err,
                        const char *format, ...) FL_MUST_USE;
/* Undoes an open transaction, if there is one. */
void fl_sql_rollback(fl_store *store);
/* The database's last error as status and sentence. */
fl_status fl_sql_fail(fl_store *store, fl_error *err);
fl_status fl_sql_memory(fl_error *err);

/* Column as text, "" for NULL; borrowed until the next step. */
const char *fl_sql_column(sqlite3_stmt *statement, int column);
fl_day fl_sql_day(sqlite3_stmt *statement, int column);

#endif
