/* test_copy.c - backup in use, restoring, an older format brought up to date, export.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "book.h"

static void test_backup_and_restore(void **state) {
	char path[SCRATCH_SIZE], copy[SCRATCH_SIZE], again[SCRATCH_SIZE], number[FL_NUMBER_SIZE],
	    digest[FL_DIGEST_HEX_SIZE];
	char want[FL_DIGEST_HEX_SIZE], got[FL_DIGEST_HEX_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1), *restored = NULL;
	fl_error err = {0};
	fl_verified verified;
	for (int year = 2021; year < 2026; year++)
		book_add(store, "Quillhaven", "VT-1", year, number, digest);
	must(fl_store_content(store, want, &err));
	must(fl_store_backup(store, fl_io_system(), scratch_path(*state, "copy", copy), NULL, &err)); /* while it is open */
	assert_int_equal(fl_store_backup(store, fl_io_system(), copy, NULL, &err), FL_E_EXISTS);
	err = (fl_error){0};
	book_add(store, "Quillhaven", "VT-1", 2026, number, NULL); /* a number that the backup does not know */
	assert_string_equal(number, "QH-2026-0001");
	fl_store *look = book_open(copy, FL_STORE_READ);
	must(fl_store_content(look, got, &err));
	assert_string_equal(got, want);
	fl_store_close(look);
	/* Restored, it goes on in a chain of its own, so that QH-2026-0001 is never given twice. */
	fl_founding founding = book_founding("Quillhaven", "QH", 5);
	assert_int_equal(
	    fl_store_restore(copy, fl_io_system(), scratch_path(*state, "again", again), &founding, NULL, &restored, &err),
	    FL_E_VALUE);
	assert_non_null(strstr(err.message, "QHB"));
	err = (fl_error){0};
	founding.prefix = "QHB";
	must(fl_store_restore(copy, fl_io_system(), again, &founding, NULL, &restored, &err));
	must(fl_store_reserve(restored, 2026, 1, "VT-1", number, &err));
	assert_string_equal(number, "QHB-2026-0001");
	/* the history reads across both chains, and the old chain's records can still be amended */
	book_record b;
	book_fill(&b, "Quillhaven", "VT-1", number, 2025);
	b.record.replaces = digest;
	b.record.replaces_number = "QH-2025-0001";
	b.record.reason = "typing error";
	must(fl_store_add(restored, &b.record, b.journal, b.length, &err));
	fl_record_list list = {0};
	must(fl_store_history(restored, 1, false, &list, &err));
	assert_int_equal(list.count, 5);
	assert_string_equal(list.records[4].number, "QHB-2026-0001");
	fl_record_list_free(&list);
	must(fl_store_verify(restored, true, NULL, &verified, &err));
	assert_int_equal(verified.origins, 2);
	/* an office that had the old chain takes the new one in, both ways round */
	char office_path[SCRATCH_SIZE], bundle[SCRATCH_SIZE], old[SCRATCH_SIZE];
	fl_intake intake;
	must(fl_store_bundle(restored, fl_io_system(), scratch_path(*state, "bundle", bundle), FL_NO_DAY, NULL, &err));
	must(fl_store_bundle(store, fl_io_system(), scratch_path(*state, "old", old), FL_NO_DAY, NULL, &err));
	for (int turn = 0; turn < 2; turn++) {
		fl_store *office = book_found(scratch_path(*state, turn ? "o1" : "o2", office_path), "Office", "OF", 9);
		must(fl_store_take_in(office, turn ? bundle : old, true, NULL, &intake, &err));
		must(fl_store_take_in(office, turn ? old : bundle, true, NULL, &intake, &err));
		must(fl_store_verify(office, true, NULL, &verified, &err));
		assert_int_equal(verified.records, 7);
		must(fl_store_content(office, turn ? got : want, &err));
		fl_store_close(office);
	}
	assert_string_equal(got, want);
	fl_store_close(restored);
	fl_store_close(store);
}

/* A damaged backup never becomes a book. */
static void test_damaged_backup(void **state) {
	char path[SCRATCH_SIZE], copy[SCRATCH_SIZE], again[SCRATCH_SIZE], number[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1), *restored = NULL;
	fl_error err = {0};
	book_add(store, "Quillhaven", "VT-1", 2024, number, NULL);
	book_add(store, "Quillhaven", "VT-1", 2025, number, NULL);
	must(fl_store_backup(store, fl_io_system(), scratch_path(*state, "copy", copy), NULL, &err));
	fl_store_close(store);
	book_force(copy, "UPDATE session SET due = due + 365 WHERE entry = 1");
	fl_founding founding = book_founding("Quillhaven", "QHB", 5);
	int before = scratch_entries(*state);
	assert_int_equal(
	    fl_store_restore(copy, fl_io_system(), scratch_path(*state, "again", again), &founding, NULL, &restored, &err),
	    FL_E_TAMPERED);
	assert_non_null(strstr(err.message, "due date"));
	assert_int_equal(scratch_entries(*state), before);
}

/* A book of format 1 (no table of what fed which record) is raised when it is opened for writing; reading alone says
 * so and changes nothing. */
static void make_format_1(const char *path) {
	book_force(path, "SELECT 1");
	sqlite3 *db = NULL;
	assert_int_equal(sqlite3_open(path, &db), SQLITE_OK);
	assert_int_equal(sqlite3_exec(db, "DROP TABLE used; DROP TABLE item; PRAGMA user_version = 1", NULL, NULL, NULL),
	                 SQLITE_OK);
	sqlite3_close(db);
}

static void test_older_format(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE], want[FL_DIGEST_HEX_SIZE], got[FL_DIGEST_HEX_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	fl_verified verified;
	fl_record_list list = {0};
	for (int year = 2021; year < 2026; year++)
		book_add(store, "Quillhaven", "VT-1", year, number, NULL);
	must(fl_store_content(store, want, &err));
	fl_store_close(store);
	make_format_1(path);
	assert_int_equal(fl_store_open(path, FL_STORE_READ, 0, &store, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "older format"));
	store = book_open(path, FL_STORE_WRITE);
	err = (fl_error){0};
	must(fl_store_verify(store, true, NULL, &verified, &err));
	must(fl_store_content(store, got, &err));
	assert_string_equal(got, want);
	must(fl_store_fed_by(store, "thermometer", "TH-7", 0, INT32_MAX, &list, &err));
	assert_int_equal(list.count, 3);
	fl_record_list_free(&list);
	fl_store_close(store);
	/* and a format of the future is left alone */
	sqlite3 *db = NULL;
	assert_int_equal(sqlite3_open(path, &db), SQLITE_OK);
	assert_int_equal(sqlite3_exec(db, "PRAGMA user_version = 99", NULL, NULL, NULL), SQLITE_OK);
	sqlite3_close(db);
	assert_int_equal(fl_store_open(path, FL_STORE_WRITE, 0, &store, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "update the program"));
}

/* ---- export ----------------------------------------------------------------------------------------------------- */

static fl_status take(void *self, const char *bytes, size_t length, fl_error *err) {
	(void)err;
	fl_text_append(self, bytes, length);
	return FL_OK;
}

/* RFC 4180, read again: cells of one row. Returns the start of the next row. */
static const char *read_row(const char *at, char cells[64][160], int *count) {
	*count = 0;
	for (;;) {
		char *to = cells[(*count)++];
		bool quoted = *at == '"';
		at += quoted;
		while (quoted ? *at != '"' || at[1] == '"' : *at != ',' && *at != '\r') {
			at += quoted && *at == '"';
			*to++ = *at++;
		}
		*to = '\0';
		at += quoted;
		if (*at == '\r')
			return at + 2;
		at++;
	}
}

static void test_export(void **state) {
	static const char *const texts[] = {
	    "=1+1", "+1", "-1", "@a", "\tx", "  =HYPERLINK(\"x\")", "plain, \"quoted\"", "\uff1dSUM(A1)"};
	static const bool harmful[] = {true, true, true, true, true, true, false, true};
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE], cells[64][160];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	fl_text csv = {0}, json = {0};
	const fl_sink to_csv = {take, &csv}, to_json = {take, &json};
	int count = 0, columns = 0;
	for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
		book_record b;
		must(fl_store_reserve(store, 2026, 1, "VT", number, &err));
		book_fill(&b, "Quillhaven", "VT-1", number, 2026);
		b.record.position = texts[i];
		b.record.closed_at += (int64_t)i;
		b.found[2].error_span = -0.012;
		must(fl_store_add(store, &b.record, b.journal, b.length, &err));
	}
	must(fl_store_export_csv(store, &to_csv, NULL, &err));
	const char *at = read_row(csv.data, cells, &columns);
	assert_string_equal(cells[9], "position");
	assert_string_equal(cells[34], "error");
	for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
		for (int row = 0; row < 2 * BOOK_POINTS; row++) {
			at = read_row(at, cells, &count);
			assert_int_equal(count, columns);
			assert_string_equal(cells[9] + harmful[i], texts[i]);
			if (harmful[i])
				assert_int_equal(cells[9][0], '\'');
			if (row == 2)
				assert_string_equal(cells[34], "-0.012"); /* a number stays a number */
		}
	}
	assert_int_equal(*at, '\0');
	must(fl_store_export_json(store, &to_json, NULL, &err));
	assert_non_null(strstr(json.data, "\"position\":\"\\u0009x\""));
	assert_non_null(strstr(json.data, "\"error\":-0.012,"));
	assert_non_null(strstr(json.data, "\"hysteresis\":null"));
	/* another reader of JSON takes it */
	sqlite3 *db = NULL;
	sqlite3_stmt *statement = NULL;
	assert_int_equal(sqlite3_open(":memory:", &db), SQLITE_OK);
	assert_int_equal(sqlite3_prepare_v2(db,
	                                    "SELECT json_array_length(?1), json_extract(?1, '$[6].position'), "
	                                    "json_extract(?1, '$[0].as_found.points[2].error')",
	                                    -1, &statement, NULL),
	                 SQLITE_OK);
	sqlite3_bind_text(statement, 1, json.data, -1, SQLITE_STATIC);
	assert_int_equal(sqlite3_step(statement), SQLITE_ROW);
	assert_int_equal(sqlite3_column_int(statement, 0), 8);
	assert_string_equal((const char *)sqlite3_column_text(statement, 1), "plain, \"quoted\"");
	check_near("error", -0.012, sqlite3_column_double(statement, 2), 0.0);
	sqlite3_finalize(statement);
	sqlite3_close(db);
	fl_text_free(&csv);
	fl_text_free(&json);
	fl_store_close(store);
}

int main(void) {
#define TEST(f) cmocka_unit_test_setup_teardown(f, scratch_make, scratch_remove)
	const struct CMUnitTest tests[] = {TEST(test_backup_and_restore), TEST(test_damaged_backup),
	                                   TEST(test_older_format), TEST(test_export)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
