/* test_crash.c - a killed writer, a full disk, two programs at once: the book holds what was said to be in it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "book.h"

#include <fcntl.h>
#include <signal.h>
#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>

/* Adds records until it dies, telling each one through the pipe after the book said that it is on disk. */
static void write_until_killed(const char *path, int pipe_end, int first) {
	fl_store *store = NULL;
	if (fl_store_open(path, FL_STORE_WRITE, 20000, &store, NULL) < 0)
		_exit(1);
	for (int i = first;; i++) {
		char number[FL_NUMBER_SIZE];
		book_record b;
		if (fl_store_reserve(store, 2026, 1, "VT-1", number, NULL) < 0)
			_exit(2);
		book_fill(&b, "Quillhaven", "VT-1", number, 2026);
		if (fl_store_add(store, &b.record, b.journal, b.length, NULL) < 0)
			_exit(3);
		if (write(pipe_end, number, sizeof number) != sizeof number)
			_exit(4);
	}
}

static fl_verified verify_book(const char *path) {
	fl_store *store = book_open(path, FL_STORE_WRITE);
	fl_error err = {0};
	fl_verified verified;
	must(fl_store_verify(store, true, NULL, &verified, &err));
	fl_store_close(store);
	return verified;
}

/* kill -9 at thirty moments; afterwards the book verifies and has every record that was told, and no number twice. */
static void test_killed_writer(void **state) {
	char path[SCRATCH_SIZE];
	fl_store_close(book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1));
	int64_t told = 0;
	for (int round = 0; round < 30; round++) {
		int ends[2];
		assert_int_equal(pipe(ends), 0);
		pid_t child = fork();
		assert_true(child >= 0);
		if (child == 0) {
			close(ends[0]);
			write_until_killed(path, ends[1], round);
		}
		close(ends[1]);
		usleep((useconds_t)(3000 + 1700 * round));
		kill(child, SIGKILL);
		char number[FL_NUMBER_SIZE], last[FL_NUMBER_SIZE] = "";
		while (read(ends[0], number, sizeof number) == sizeof number) {
			told++;
			memcpy(last, number, sizeof last);
		}
		close(ends[0]);
		int status = 0;
		waitpid(child, &status, 0);
		assert_true(WIFSIGNALED(status));
		fl_verified verified = verify_book(path);
		assert_true(verified.records >= told);
		told = verified.records; /* one may have come in that could not be told any more */
		if (*last) {
			fl_store *store = book_open(path, FL_STORE_READ);
			fl_record_list list = {0};
			fl_error err = {0};
			must(fl_store_find(store, last, &list, &err));
			fl_record_list_free(&list);
			fl_store_close(store);
		}
	}
	assert_true(told > 10);
}

/* Two programs write at once, each forty records: all are there, in one chain, every number once. */
static void test_two_writers(void **state) {
	enum { EACH = 40 };
	char path[SCRATCH_SIZE];
	fl_store_close(book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1));
	pid_t children[2];
	for (int c = 0; c < 2; c++) {
		children[c] = fork();
		assert_true(children[c] >= 0);
		if (children[c] == 0) {
			fl_store *store = NULL;
			if (fl_store_open(path, FL_STORE_WRITE, 60000, &store, NULL) < 0)
				_exit(1);
			for (int i = 0; i < EACH; i++) {
				char number[FL_NUMBER_SIZE];
				book_record b;
				if (fl_store_reserve(store, 2026, 1, "VT", number, NULL) < 0)
					_exit(2);
				book_fill(&b, "Quillhaven", c ? "VT-1" : "VT-2", number, 2026);
				if (fl_store_add(store, &b.record, b.journal, b.length, NULL) < 0)
					_exit(3);
			}
			fl_store_close(store);
			_exit(0);
		}
	}
	for (int c = 0; c < 2; c++) {
		int status = 0;
		waitpid(children[c], &status, 0);
		assert_true(WIFEXITED(status));
		assert_int_equal(WEXITSTATUS(status), 0);
	}
	fl_verified verified = verify_book(path);
	assert_int_equal(verified.records, 2 * EACH);
	fl_store *store = book_open(path, FL_STORE_READ);
	fl_error err = {0};
	fl_record_list list = {0};
	must(fl_store_find(store, "QH-2026-0080", &list, &err));
	fl_record_list_free(&list);
	fl_store_close(store);
}

/* While another holds the writer's turn, the wait ends with a sentence; reading goes on all the time. */
static void test_busy(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE];
	fl_error err = {0};
	fl_store_close(book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1));
	sqlite3 *other = NULL;
	fl_store *store = NULL;
	must(fl_store_open(path, FL_STORE_WRITE, 50, &store, &err));
	assert_int_equal(sqlite3_open(path, &other), SQLITE_OK);
	assert_int_equal(sqlite3_exec(other, "BEGIN IMMEDIATE", NULL, NULL, NULL), SQLITE_OK);
	assert_int_equal(fl_store_reserve(store, 2026, 1, "VT-1", number, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "another program"));
	fl_verified verified;
	err = (fl_error){0};
	must(fl_store_verify(store, false, NULL, &verified, &err));
	assert_int_equal(sqlite3_exec(other, "COMMIT", NULL, NULL, NULL), SQLITE_OK);
	must(fl_store_reserve(store, 2026, 1, "VT-1", number, &err));
	assert_string_equal(number, "QH-2026-0001");
	sqlite3_close(other);
	fl_store_close(store);
}

/* The largest file that the process may write, as a disk that is full. */
static void allow(rlim_t bytes) {
	struct rlimit limit;
	assert_int_equal(getrlimit(RLIMIT_FSIZE, &limit), 0);
	limit.rlim_cur = bytes < limit.rlim_max ? bytes : limit.rlim_max;
	assert_int_equal(setrlimit(RLIMIT_FSIZE, &limit), 0);
}

/* The disk fills at every size between nothing and enough: each time the answer is "the disk is full", nothing of the
 * record is there, the number stays reserved, and with room again the next number is another one. */
static void test_full_disk(void **state) {
	char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE], before[FL_NUMBER_SIZE] = "";
	int full = 0, reserved_full = 0;
	signal(SIGXFSZ, SIG_IGN);
	for (int i = 0; i < 24; i++) {
		char name[16];
		snprintf(name, sizeof name, "book%d", i);
		fl_store *store = book_found(scratch_path(*state, name, path), "Quillhaven", "QH", 1);
		fl_error err = {0};
		book_record b;
		fl_verified verified;
		must(fl_store_reserve(store, 2026, 1, "VT-1", before, &err));
		book_fill(&b, "Quillhaven", "VT-1", before, 2026);
		char wal[SCRATCH_SIZE + 8];
		size_t length = 0;
		snprintf(wal, sizeof wal, "%s-wal", path);
		free(scratch_read(wal, &length));
		allow(length + 8192 * (rlim_t)i);
		fl_status status = fl_store_add(store, &b.record, b.journal, b.length, &err);
		if (status < 0) {
			assert_int_equal(status, FL_E_DISK_FULL);
			assert_non_null(strstr(err.message, "the disk is full"));
			full++;
			/* a number that could not be reserved is not given out */
			err = (fl_error){0};
			if (fl_store_reserve(store, 2026, 1, "VT-1", number, &err) < 0) {
				assert_int_equal(err.status, FL_E_DISK_FULL);
				reserved_full++;
			} else {
				assert_string_not_equal(number, before);
			}
		}
		allow(RLIM_INFINITY);
		err = (fl_error){0};
		must(fl_store_reserve(store, 2026, 1, "VT-1", number, &err));
		assert_string_not_equal(number, before);
		if (status < 0) { /* the same record, with the number that was reserved for it, once there is room */
			book_fill(&b, "Quillhaven", "VT-1", before, 2026);
			must(fl_store_add(store, &b.record, b.journal, b.length, &err));
		}
		must(fl_store_verify(store, true, NULL, &verified, &err));
		assert_int_equal(verified.records, 1);
		fl_store_close(store);
	}
	assert_true(full > 3 && full < 24);
	assert_true(reserved_full > 0);
	signal(SIGXFSZ, SIG_DFL);
}

/* Work that is stopped leaves everything as it was. */
static bool stop_at_once(void *self, uint64_t done, uint64_t total) {
	(void)done;
	(void)total;
	++*(int *)self;
	return false;
}

static void test_stopped(void **state) {
	char path[SCRATCH_SIZE], bundle[SCRATCH_SIZE], copy[SCRATCH_SIZE], number[FL_NUMBER_SIZE];
	fl_store *store = book_found(scratch_path(*state, "book", path), "Quillhaven", "QH", 1);
	fl_error err = {0};
	int asked = 0;
	const fl_store_watch watch = {stop_at_once, &asked};
	for (int i = 0; i < 70; i++)
		book_add(store, "Quillhaven", "VT-1", 1950 + i, number, NULL);
	fl_verified verified;
	assert_int_equal(fl_store_verify(store, false, &watch, &verified, &err), FL_E_STATE);
	assert_int_equal(asked, 1);
	err = (fl_error){0};
	assert_int_equal(
	    fl_store_bundle(store, fl_io_system(), scratch_path(*state, "bundle", bundle), FL_NO_DAY, &watch, &err),
	    FL_E_STATE);
	err = (fl_error){0};
	assert_int_equal(fl_store_backup(store, fl_io_system(), scratch_path(*state, "copy", copy), &watch, &err),
	                 FL_E_STATE);
	assert_int_equal(scratch_entries(*state), 3); /* the book, its log, the log's index: nothing else is left */
	err = (fl_error){0};
	must(fl_store_verify(store, true, NULL, &verified, &err));
	fl_store_close(store);
}

int main(void) {
#define TEST(f) cmocka_unit_test_setup_teardown(f, scratch_make, scratch_remove)
	const struct CMUnitTest tests[] = {TEST(test_killed_writer), TEST(test_two_writers), TEST(test_busy),
	                                   TEST(test_full_disk), TEST(test_stopped)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
