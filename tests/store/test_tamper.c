/* test_tamper.c - whatever is changed in the book past its rules is found, and named.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Every column of every table is changed in every row; every row is taken out; rows are added. The walk asks the
 * database for its tables and columns, so that a new column is tested without a change here.
 */
#include "book.h"

static void copy_file(const char *from, const char *to) {
	size_t length = 0;
	char *bytes = scratch_read(from, &length);
	assert_non_null(bytes);
	assert_true(fl_file_write(fl_io_system(), to, bytes, length, true, NULL) >= 0);
	free(bytes);
}

/* A book of two chains (one taken in), amendments, papers, an unused number; closed and in one file. */
static void make_book(const char *folder, char path[SCRATCH_SIZE]) {
	char ship[SCRATCH_SIZE], bundle[SCRATCH_SIZE], number[FL_NUMBER_SIZE], digest[FL_DIGEST_HEX_SIZE];
	fl_error err = {0};
	fl_intake intake;
	fl_store *other = book_found(scratch_path(folder, "ship", ship), "Marrowby", "MB", 2);
	book_add(other, "Marrowby", "VT-9", 2024, number, NULL);
	must(fl_store_bundle(other, fl_io_system(), scratch_path(folder, "bundle", bundle), FL_NO_DAY, NULL, &err));
	fl_store_close(other);
	fl_store *store = book_found(scratch_path(folder, "book", path), "Quillhaven", "QH", 1);
	for (int year = 2022; year < 2025; year++)
		book_add(store, "Quillhaven", year == 2023 ? "VT-2" : "VT-1", year, number, digest);
	fl_paper paper = {.record = digest, .number = number, .stage = "issued", .file = "c.pdf", .kept_at = 5};
	must(fl_store_add_paper(store, &paper, "%PDF invented paper", 19, &err));
	book_record b;
	char next[FL_NUMBER_SIZE];
	must(fl_store_reserve(store, 2024, 1, "VT-1", next, &err));
	book_fill(&b, "Quillhaven", "VT-1", next, 2024);
	b.record.replaces = digest;
	b.record.replaces_number = number;
	b.record.reason = "typing error";
	b.record.due = FL_NO_DAY;
	must(fl_store_add(store, &b.record, b.journal, b.length, &err));
	must(fl_store_reserve(store, 2024, 1, "left over", next, &err));
	must(fl_store_take_in(store, bundle, true, NULL, &intake, &err));
	fl_store_close(store);
	book_force(path, "PRAGMA journal_mode = DELETE");
}

/* Opening or verifying must refuse, with FL_E_TAMPERED; the message goes to `said`. */
static bool is_caught(const char *path, char said[512]) {
	fl_store *store = NULL;
	fl_error err = {0};
	fl_verified verified;
	fl_status status = fl_store_open(path, FL_STORE_READ, 100, &store, &err);
	if (status >= 0)
		status = fl_store_verify(store, false, NULL, &verified, &err);
	fl_store_close(store);
	snprintf(said, 512, "%s", err.message);
	return status == FL_E_TAMPERED;
}

static const char *const tables[] = {"origin",  "entry", "bytes", "number", "instrument",
                                     "session", "paper", "item",  "used"};
enum { TABLES = sizeof tables / sizeof *tables };

/* What to do to a column so that it stays of its type: whole numbers by one, text in its last letter or digit, bytes
 * in the middle, NULL to something. */
static char *change(const char *table, const char *column, int row) {
	return sqlite3_mprintf(
	    "PRAGMA foreign_keys = OFF; PRAGMA ignore_check_constraints = ON; UPDATE %s SET %s = CASE typeof(%s) "
	    "WHEN 'integer' THEN %s + CASE WHEN '%s' = 'own' THEN 1 - 2 * %s ELSE 1000 END "
	    "WHEN 'text' THEN CASE WHEN length(%s) > 0 THEN substr(%s, 1, length(%s) / 2 - 1) || "
	    "CASE substr(%s, length(%s) / 2, 1) WHEN 'a' THEN 'b' ELSE 'a' END || substr(%s, length(%s) / 2 + 1) ELSE 'x' "
	    "END "
	    "WHEN 'blob' THEN CAST(substr(%s, 1, length(%s) / 2) || x'00' || substr(%s, length(%s) / 2 + 2) AS BLOB) "
	    "ELSE CASE WHEN '%s' = 'due' THEN 1 ELSE 'x' END END WHERE (%s) IN (SELECT %s FROM %s LIMIT 1 OFFSET %d)",
	    table, column, column, column, column, column, column, column, column, column, column, column, column, column,
	    column, column, column, column, strcmp(table, "used") == 0 ? "item, entry" : "rowid",
	    strcmp(table, "used") == 0 ? "item, entry" : "rowid", table, row);
}

static int rows_of(sqlite3 *db, const char *table) {
	sqlite3_stmt *statement = NULL;
	char *sql = sqlite3_mprintf("SELECT count(*) FROM %s", table);
	assert_int_equal(sqlite3_prepare_v2(db, sql, -1, &statement, NULL), SQLITE_OK);
	assert_int_equal(sqlite3_step(statement), SQLITE_ROW);
	int rows = sqlite3_column_int(statement, 0);
	sqlite3_finalize(statement);
	sqlite3_free(sql);
	return rows;
}

typedef struct place {
	char table[32], column[32];
	int rows;
} place;

static int list_columns(const char *path, place *out) {
	sqlite3 *db = NULL;
	int count = 0;
	assert_int_equal(sqlite3_open_v2(path, &db, SQLITE_OPEN_READONLY, NULL), SQLITE_OK);
	for (int t = 0; t < TABLES; t++) {
		sqlite3_stmt *statement = NULL;
		char *sql = sqlite3_mprintf("SELECT name FROM pragma_table_info('%s')", tables[t]);
		assert_int_equal(sqlite3_prepare_v2(db, sql, -1, &statement, NULL), SQLITE_OK);
		while (sqlite3_step(statement) == SQLITE_ROW) {
			snprintf(out[count].table, 32, "%s", tables[t]);
			snprintf(out[count].column, 32, "%s", (const char *)sqlite3_column_text(statement, 0));
			out[count++].rows = rows_of(db, tables[t]);
		}
		sqlite3_finalize(statement);
		sqlite3_free(sql);
	}
	sqlite3_close(db);
	return count;
}

static void test_untouched_book_fits(void **state) {
	char path[SCRATCH_SIZE];
	make_book(*state, path);
	fl_store *store = book_open(path, FL_STORE_READ);
	fl_error err = {0};
	fl_verified verified;
	must(fl_store_verify(store, true, NULL, &verified, &err));
	assert_int_equal(verified.origins, 2);
	assert_int_equal(verified.entries, 6);
	assert_int_equal(verified.records, 5);
	assert_int_equal(verified.papers, 1);
	assert_int_equal(verified.without_bytes, 0);
	fl_store_close(store);
}

static void test_every_column(void **state) {
	char path[SCRATCH_SIZE], copy[SCRATCH_SIZE], said[512];
	place places[64];
	int tried = 0;
	make_book(*state, path);
	scratch_path(*state, "copy", copy);
	int count = list_columns(path, places);
	assert_true(count > 30);
	for (int i = 0; i < count; i++) {
		for (int row = 0; row < places[i].rows; row++, tried++) {
			copy_file(path, copy);
			char *sql = change(places[i].table, places[i].column, row);
			book_force(copy, sql);
			sqlite3_free(sql);
			if (!is_caught(copy, said)) {
				print_error("%s.%s, row %d: not caught (%s)\n", places[i].table, places[i].column, row, said);
				fail();
			}
			/* what belongs to an entry names it */
			if (strcmp(places[i].column, "packed") == 0 || strcmp(places[i].column, "facts") == 0)
				assert_non_null(strstr(said, "entry "));
		}
	}
	assert_true(tried > 100);
}

static void test_every_row_taken_out(void **state) {
	char path[SCRATCH_SIZE], copy[SCRATCH_SIZE], said[512];
	place places[64];
	make_book(*state, path);
	scratch_path(*state, "copy", copy);
	int count = list_columns(path, places);
	for (int i = 0; i < count; i++) {
		if (i && strcmp(places[i].table, places[i - 1].table) == 0)
			continue;
		const char *key = strcmp(places[i].table, "used") == 0 ? "item, entry" : "rowid";
		for (int row = 0; row < places[i].rows; row++) {
			/* A chain that was taken in may lack its journals: they stay on the ship. It is counted, not refused. */
			if (strcmp(places[i].table, "bytes") == 0 && row == places[i].rows - 1)
				continue;
			/* The last number is the one nobody used: taking the end off a chain shows only from outside. */
			if (strcmp(places[i].table, "number") == 0 && row == places[i].rows - 1)
				continue;
			copy_file(path, copy);
			char *sql =
			    sqlite3_mprintf("PRAGMA foreign_keys = OFF; DELETE FROM %s WHERE (%s) IN (SELECT %s FROM %s LIMIT 1 "
			                    "OFFSET %d)",
			                    places[i].table, key, key, places[i].table, row);
			book_force(copy, sql);
			sqlite3_free(sql);
			if (!is_caught(copy, said)) {
				print_error("%s, row %d taken out: not caught\n", places[i].table, row);
				fail();
			}
		}
	}
}

static void test_rows_and_rules_added(void **state) {
	static const char *const additions[] = {
	    "INSERT INTO item(kind, name) VALUES ('oil', 'none')",
	    "INSERT INTO instrument(site, tag, serial) VALUES ('a', 'b', 'c')",
	    "INSERT INTO used(item, entry) VALUES (3, 2)",
	    "INSERT INTO used(item, entry) VALUES (1, 4)",
	    "PRAGMA foreign_keys = OFF; INSERT INTO bytes(entry, size, packed) VALUES (77, 1, x'00')",
	    "PRAGMA foreign_keys = OFF; INSERT INTO paper(entry, record) VALUES (77, 'x')",
	    "CREATE TRIGGER quiet AFTER INSERT ON item BEGIN SELECT 1; END",
	    "CREATE TABLE more(a)",
	    "INSERT INTO number(origin, year, value, text, at, purpose, digest) VALUES (1, 2024, 9, 'QH-2024-0009', 1, '', "
	    "'')"};
	char path[SCRATCH_SIZE], copy[SCRATCH_SIZE], said[512];
	make_book(*state, path);
	scratch_path(*state, "copy", copy);
	for (size_t i = 0; i < sizeof additions / sizeof *additions; i++) {
		copy_file(path, copy);
		book_force(copy, additions[i]);
		if (!is_caught(copy, said)) {
			print_error("%s: not caught\n", additions[i]);
			fail();
		}
	}
}

/* Two journals exchanged, each with its own good bytes: both entries' digests say so. */
static void test_exchanged_journals(void **state) {
	char path[SCRATCH_SIZE], said[512];
	make_book(*state, path);
	book_force(path, "UPDATE bytes SET entry = 99 WHERE entry = 1; UPDATE bytes SET entry = 1 WHERE entry = 2; "
	                 "UPDATE bytes SET entry = 2 WHERE entry = 99");
	assert_true(is_caught(path, said));
	assert_non_null(strstr(said, "entry 1 of Quillhaven"));
	assert_non_null(strstr(said, "QH-2022-0001"));
}

/* The rules themselves: code that forgets them, and REPLACE, which slips past a rule against deleting. */
static void test_rules_hold(void **state) {
	static const char *const tries[] = {"UPDATE entry SET digest = 'x'",
	                                    "DELETE FROM session",
	                                    "INSERT OR REPLACE INTO bytes(entry, size, packed) VALUES (1, 1, x'00')",
	                                    "INSERT OR REPLACE INTO session SELECT * FROM session LIMIT 1",
	                                    "INSERT OR REPLACE INTO number SELECT * FROM number LIMIT 1",
	                                    "INSERT OR REPLACE INTO origin SELECT * FROM origin LIMIT 1",
	                                    "INSERT OR REPLACE INTO used SELECT * FROM used LIMIT 1",
	                                    "REPLACE INTO entry SELECT * FROM entry LIMIT 1",
	                                    "UPDATE OR REPLACE paper SET record = 'x'"};
	char path[SCRATCH_SIZE], said[512];
	sqlite3 *db = NULL;
	make_book(*state, path);
	assert_int_equal(sqlite3_open(path, &db), SQLITE_OK);
	for (size_t i = 0; i < sizeof tries / sizeof *tries; i++)
		assert_int_equal(sqlite3_exec(db, tries[i], NULL, NULL, NULL), SQLITE_CONSTRAINT);
	/* with a rule taken out the book is not written any more */
	assert_int_equal(sqlite3_exec(db, "DROP TRIGGER entry_delete", NULL, NULL, NULL), SQLITE_OK);
	sqlite3_close(db);
	fl_store *store = NULL;
	fl_error err = {0};
	assert_int_equal(fl_store_open(path, FL_STORE_WRITE, 0, &store, &err), FL_E_TAMPERED);
	assert_non_null(strstr(err.message, "entry_delete"));
	assert_true(is_caught(path, said));
}

/* Any byte of the file itself: found, or without meaning (free room in a page, a counter of the database). */
static void test_bytes_of_the_file(void **state) {
	char path[SCRATCH_SIZE], copy[SCRATCH_SIZE];
	size_t length = 0;
	make_book(*state, path);
	scratch_path(*state, "copy", copy);
	char *bytes = scratch_read(path, &length);
	char want[FL_DIGEST_HEX_SIZE], got[FL_DIGEST_HEX_SIZE];
	fl_error err = {0};
	fl_store *store = book_open(path, FL_STORE_READ);
	must(fl_store_content(store, want, &err));
	fl_store_close(store);
	uint32_t random = 20260414; /* fixed */
	int caught = 0, enough = 300;
	for (int i = 0; i < enough; i++) {
		random = random * 1664525u + 1013904223u;
		size_t at = random % length;
		bytes[at] = (char)(bytes[at] ^ 0x10);
		assert_true(fl_file_write(fl_io_system(), copy, bytes, length, true, NULL) >= 0);
		bytes[at] = (char)(bytes[at] ^ 0x10);
		fl_verified verified;
		store = NULL;
		err = (fl_error){0};
		fl_status status = fl_store_open(copy, FL_STORE_READ, 100, &store, &err);
		if (status >= 0)
			status = fl_store_verify(store, true, NULL, &verified, &err);
		if (status >= 0) { /* then everything that the book says is the same */
			must(fl_store_content(store, got, &err));
			assert_string_equal(got, want);
			assert_int_equal(verified.entries, 6);
		}
		caught += status < 0;
		fl_store_close(store);
	}
	assert_true(caught > 20);
	free(bytes);
}

int main(void) {
#define TEST(f) cmocka_unit_test_setup_teardown(f, scratch_make, scratch_remove)
	const struct CMUnitTest tests[] = {TEST(test_untouched_book_fits), TEST(test_every_column),
	                                   TEST(test_every_row_taken_out), TEST(test_rows_and_rules_added),
	                                   TEST(test_exchanged_journals),  TEST(test_rules_hold),
	                                   TEST(test_bytes_of_the_file)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
