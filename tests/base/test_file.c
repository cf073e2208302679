/* Checked files on a real disk, with calls that fail in every place.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "check.h"
#include "failing_io.h"
#include "foundleft/base.h"
#include "scratch.h"

#define COUNT(a) (sizeof(a) / sizeof(a)[0])
#define OLD "what stood there before, 17 readings\n"
#define NEW "what shall stand there from now on: 18 readings and one struck\n"

static const fl_io *sys(void) {
	return fl_io_system();
}

static void put(const char *path, const char *text) {
	FILE *file = fopen(path, "wb");
	assert_non_null(file);
	assert_int_equal(fwrite(text, 1, strlen(text), file), strlen(text));
	assert_int_equal(fclose(file), 0);
}

/* True if the file holds exactly `text`; a NULL text stands for no file. */
static bool holds(const char *path, const char *text) {
	size_t length;
	char *bytes = scratch_read(path, &length);
	bool same = bytes && text ? length == strlen(text) && memcmp(bytes, text, length) == 0 : !bytes && !text;
	free(bytes);
	return same;
}

static void reasons_become_sentences(void **state) {
	(void)state;
	static const struct {
		int number;
		fl_status status;
		const char *says;
	} cases[] = {
	    {ENOSPC, FL_E_DISK_FULL, "the disk is full"}, {EDQUOT, FL_E_DISK_FULL, "your share of the disk"},
	    {EROFS, FL_E_READ_ONLY, "read-only"},         {EACCES, FL_E_READ_ONLY, "not permitted"},
	    {EPERM, FL_E_READ_ONLY, "not permitted"},     {ENOENT, FL_E_NOT_FOUND, "no such file"},
	    {EEXIST, FL_E_EXISTS, "exists already"},      {EWOULDBLOCK, FL_E_STATE, "another program has it open"},
	    {EIO, FL_E_IO, "the disk reports an error"},  {ENODEV, FL_E_IO, "No such device"},
	    {99999, FL_E_IO, "no reason (error 99999)"},
	};
	for (size_t i = 0; i < COUNT(cases); i++) {
		fl_error err = {0};
		assert_int_equal(fl_io_fail(&err, "write", "session.foundleft", cases[i].number), cases[i].status);
		assert_non_null(strstr(err.message, "cannot write session.foundleft: "));
		assert_non_null(strstr(err.message, cases[i].says));
	}
}

static void reading(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "oils.yaml", path);
	fl_arena arena = {0};
	char *bytes = NULL;
	size_t length = 99;
	fl_error err = {0};
	assert_int_equal(fl_file_read(sys(), path, 100, &arena, &bytes, &length, &err), FL_E_NOT_FOUND);
	assert_non_null(strstr(err.message, path));
	assert_null(bytes);
	put(path, "");
	assert_int_equal(fl_file_read(sys(), path, 0, &arena, &bytes, &length, NULL), FL_OK);
	assert_int_equal(length, 0);
	assert_string_equal(bytes, "");
	put(path, OLD);
	assert_int_equal(fl_file_read(sys(), path, strlen(OLD), &arena, &bytes, &length, NULL), FL_OK);
	assert_string_equal(bytes, OLD);
	assert_int_equal(fl_file_read(sys(), path, strlen(OLD) - 1, &arena, &bytes, &length, NULL), FL_E_RANGE);
	assert_int_equal(fl_file_read(sys(), *state, 100, &arena, &bytes, &length, NULL), FL_E_IO); /* a folder */
	fl_arena_free(&arena);
}

static void a_large_file_comes_back_whole(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "large", path);
	size_t size = 300001, length;
	char *bytes = malloc(size), *read;
	assert_non_null(bytes);
	for (size_t i = 0; i < size; i++)
		bytes[i] = (char)(i * i % 251);
	fl_arena arena = {0};
	assert_int_equal(fl_file_write(sys(), path, bytes, size, false, NULL), FL_OK);
	assert_int_equal(fl_file_read(sys(), path, SIZE_MAX, &arena, &read, &length, NULL), FL_OK);
	assert_int_equal(length, size);
	assert_memory_equal(read, bytes, size);
	fl_arena_free(&arena);
	free(bytes);
}

static void reading_fails_at_each_call(void **state) {
	char path[SCRATCH_SIZE];
	put(scratch_path(*state, "oils.yaml", path), OLD);
	long n = 1;
	for (;; n++) {
		failing_io disk;
		failing_io_start(&disk, n, EIO, FAILING_CLEAN);
		fl_arena arena = {0};
		char *bytes = NULL;
		size_t length;
		fl_status status = fl_file_read(&disk.io, path, 1000, &arena, &bytes, &length, NULL);
		bool harmless = disk.failed && strcmp(disk.what, "close") == 0; /* all was read by then */
		assert_int_equal(status, disk.failed && !harmless ? FL_E_IO : FL_OK);
		if (status == FL_OK)
			assert_string_equal(bytes, OLD);
		else
			assert_null(bytes);
		fl_arena_free(&arena);
		if (!disk.failed)
			break;
	}
	assert_true(n > 4); /* open, read, read, close */
}

static void writing_replaces_or_refuses(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "sheet.pdf", path);
	fl_error err = {0};
	assert_int_equal(fl_file_write(sys(), path, OLD, strlen(OLD), false, NULL), FL_OK);
	assert_int_equal(fl_file_write(sys(), path, NEW, strlen(NEW), false, &err), FL_E_EXISTS);
	assert_non_null(strstr(err.message, "exists already"));
	assert_true(holds(path, OLD));
	assert_int_equal(fl_file_write(sys(), path, NEW, strlen(NEW), true, NULL), FL_OK);
	assert_true(holds(path, NEW));
	assert_int_equal(fl_file_write(sys(), path, "", 0, true, NULL), FL_OK);
	assert_true(holds(path, ""));
	assert_int_equal(scratch_entries(*state), 1); /* nothing is left beside it */
}

static void a_leftover_of_a_killed_writer_is_stepped_over(void **state) {
	char path[SCRATCH_SIZE], leftover[SCRATCH_SIZE];
	scratch_path(*state, "sheet.pdf", path);
	put(scratch_path(*state, "sheet.pdf.part1", leftover), "half");
	assert_int_equal(fl_file_write(sys(), path, NEW, strlen(NEW), false, NULL), FL_OK);
	assert_true(holds(path, NEW));
	assert_true(holds(leftover, "half"));
}

static void one_failing_write(const char *folder, const char *before, long n, failing_mode mode, bool *failed) {
	char path[SCRATCH_SIZE];
	scratch_path(folder, "sheet.pdf", path);
	unlink(path);
	if (before)
		put(path, before);
	failing_io disk;
	fl_error err = {0};
	failing_io_start(&disk, n, ENOSPC, mode);
	fl_status status = fl_file_write(&disk.io, path, NEW, strlen(NEW), before != NULL, &err);
	*failed = disk.failed;
	assert_int_equal(status, disk.failed ? FL_E_DISK_FULL : FL_OK);
	if (!disk.failed || !holds(path, before))
		assert_true(holds(path, NEW)); /* old or new, never anything between */
	if (disk.failed)
		assert_non_null(strstr(err.message, "the disk is full"));
	if (mode != FAILING_DEAD)
		assert_int_equal(scratch_entries(folder), holds(path, NEW) || before ? 1 : 0);
}

static void writing_fails_at_each_call(void **state) {
	static const char *const before[] = {OLD, NULL};
	for (size_t b = 0; b < COUNT(before); b++)
		for (failing_mode mode = FAILING_CLEAN; mode <= FAILING_SHORT; mode++) {
			bool failed = true;
			long n = 0;
			while (failed)
				one_failing_write(*state, before[b], ++n, mode, &failed);
			assert_true(n > 8); /* open, write, sync, close, rename, and the folder: open, sync, close */
		}
}

static void power_lost_at_each_call(void **state) {
	bool failed = true;
	char leftover[SCRATCH_SIZE];
	scratch_path(*state, "sheet.pdf.part1", leftover);
	for (long n = 1; failed; n++) {
		one_failing_write(*state, OLD, n, FAILING_DEAD, &failed);
		unlink(leftover);
	}
}

static void small_slices_and_signals_are_no_failure(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "sheet.pdf", path);
	failing_io disk;
	failing_io_start(&disk, 0, 0, FAILING_CLEAN);
	disk.write_most = 1;
	assert_int_equal(fl_file_write(&disk.io, path, NEW, strlen(NEW), true, NULL), FL_OK);
	assert_true(holds(path, NEW));
	assert_true(disk.calls > (long)strlen(NEW));
	failing_io_start(&disk, 2, EINTR, FAILING_CLEAN); /* the write */
	assert_int_equal(fl_file_write(&disk.io, path, OLD, strlen(OLD), true, NULL), FL_OK);
	assert_string_equal(disk.what, "write");
	assert_true(holds(path, OLD));
}

static void a_read_only_folder(void **state) {
	uid_t user = geteuid();
	char path[SCRATCH_SIZE];
	scratch_path(*state, "sheet.pdf", path);
	chmod(*state, 0555);
	if (user == 0) /* root may write anywhere, so somebody else tries */
		assert_int_equal(seteuid(65534), 0);
	fl_error err = {0};
	fl_status status = fl_file_write(sys(), path, NEW, strlen(NEW), true, &err);
	assert_int_equal(seteuid(user), 0);
	chmod(*state, 0700);
	assert_int_equal(status, FL_E_READ_ONLY);
	assert_non_null(strstr(err.message, "check the rights"));
	assert_true(holds(path, NULL));
}

static void a_read_only_disk(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "sheet.pdf", path);
	failing_io disk;
	fl_error err = {0};
	failing_io_start(&disk, 1, EROFS, FAILING_CLEAN);
	assert_int_equal(fl_file_write(&disk.io, path, NEW, strlen(NEW), true, &err), FL_E_READ_ONLY);
	assert_non_null(strstr(err.message, "the place is read-only"));
	fl_append append;
	failing_io_start(&disk, 1, EROFS, FAILING_CLEAN);
	assert_int_equal(fl_append_open(&append, &disk.io, path, true, 0, NULL), FL_E_READ_ONLY);
	failing_io_start(&disk, 1, EROFS, FAILING_CLEAN);
	assert_int_equal(fl_folder_make(&disk.io, path, NULL), FL_E_READ_ONLY);
	assert_int_equal(scratch_entries(*state), 0);
}

static void a_full_device(void **state) {
	(void)state;
	int fd = open("/dev/full", O_WRONLY | O_CLOEXEC);
	if (fd < 0)
		skip();
	fl_append append = {.io = sys(), .fd = fd, .path = "/dev/full"};
	fl_error err = {0};
	assert_int_equal(fl_append_bytes(&append, NEW, strlen(NEW), &err), FL_E_DISK_FULL);
	assert_true(append.broken);
	fl_append_close(&append);
}

static void folders(void **state) {
	char deep[SCRATCH_SIZE], file[SCRATCH_SIZE];
	struct stat info;
	scratch_path(*state, "a/b/c//", deep);
	assert_int_equal(fl_folder_make(sys(), deep, NULL), FL_OK);
	assert_int_equal(fl_folder_make(sys(), deep, NULL), FL_OK); /* there already */
	assert_int_equal(stat(deep, &info), 0);
	assert_int_equal(info.st_mode & 0777, 0700);
	put(scratch_path(*state, "a/file", file), OLD);
	fl_error err = {0};
	assert_int_equal(fl_folder_make(sys(), file, &err), FL_E_EXISTS);
	assert_non_null(strstr(err.message, "there is a file of that name"));
	assert_true(fl_folder_make(sys(), scratch_path(*state, "a/file/below", deep), NULL) < 0);
	assert_int_equal(fl_folder_make(sys(), "", NULL), FL_E_VALUE);
	assert_int_equal(fl_folder_make(sys(), "/", NULL), FL_OK);
}

static void making_folders_fails_at_each_call(void **state) {
	bool failed = true;
	for (long n = 1; failed; n++) {
		char name[32], path[SCRATCH_SIZE];
		snprintf(name, sizeof name, "x%ld/y", n);
		failing_io disk;
		failing_io_start(&disk, n, EACCES, FAILING_CLEAN);
		fl_status status = fl_folder_make(&disk.io, scratch_path(*state, name, path), NULL);
		failed = disk.failed;
		assert_int_equal(status, failed ? FL_E_READ_ONLY : FL_OK);
		assert_int_equal(fl_folder_make(sys(), path, NULL), FL_OK); /* and the second try goes on from there */
	}
}

static void appending(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "session", path);
	fl_append append = {0};
	assert_int_equal(fl_append_open(&append, sys(), path, false, 0, NULL), FL_E_NOT_FOUND);
	assert_int_equal(fl_append_open(&append, sys(), path, true, 0, NULL), FL_OK);
	assert_int_equal(fl_append_bytes(&append, "one\n", 4, NULL), FL_OK);
	assert_int_equal(fl_append_bytes(&append, "", 0, NULL), FL_OK);
	assert_int_equal(append.length, 4);
	assert_true(holds(path, "one\n"));
	fl_append second = {0};
	fl_error err = {0};
	assert_int_equal(fl_append_open(&second, sys(), path, false, 4, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "another program has it open"));
	fl_append_close(&append);
	fl_append_close(&append);
	fl_append_close(&second);
	assert_int_equal(fl_append_open(&append, sys(), path, true, 0, NULL), FL_E_EXISTS);
	assert_true(holds(path, "one\n"));
	assert_int_equal(fl_append_open(&append, sys(), path, false, 4, NULL), FL_OK);
	assert_int_equal(fl_append_bytes(&append, "two\n", 4, NULL), FL_OK);
	fl_append_close(&append);
	assert_true(holds(path, "one\ntwo\n"));
}

static void a_torn_end_is_cut_off(void **state) {
	char path[SCRATCH_SIZE];
	put(scratch_path(*state, "session", path), "one\ntwo\nthr");
	fl_append append;
	assert_int_equal(fl_append_open(&append, sys(), path, false, 12, NULL), FL_E_STATE); /* shorter than that */
	assert_true(holds(path, "one\ntwo\nthr"));
	assert_int_equal(fl_append_open(&append, sys(), path, false, -1, NULL), FL_OK);
	assert_int_equal(append.length, 11);
	assert_int_equal(fl_append_cut(&append, -1, NULL), FL_E_STATE);
	assert_int_equal(fl_append_cut(&append, 8, NULL), FL_OK);
	assert_int_equal(fl_append_bytes(&append, "three\n", 6, NULL), FL_OK);
	fl_append_close(&append);
	assert_true(holds(path, "one\ntwo\nthree\n"));
	assert_int_equal(fl_append_open(&append, sys(), path, false, 4, NULL), FL_OK);
	fl_append_close(&append);
	assert_true(holds(path, "one\n"));
}

static const char *const lines[] = {"one\n", "two, a longer one\n", "three\n"};

/* Writes the lines until one fails; returns how many were said to be safe. */
static size_t append_lines(failing_io *disk, const char *path) {
	fl_append append = {0};
	size_t safe = 0;
	if (fl_append_open(&append, &disk->io, path, true, 0, NULL) != FL_OK)
		return 0;
	while (safe < COUNT(lines)) {
		fl_error err = {0};
		if (fl_append_bytes(&append, lines[safe], strlen(lines[safe]), &err) != FL_OK) {
			assert_int_equal(err.status, FL_E_DISK_FULL);
			assert_true(append.broken);
			assert_int_equal(fl_append_bytes(&append, "x", 1, NULL), FL_E_STATE);
			assert_int_equal(fl_append_cut(&append, 0, NULL), FL_E_STATE);
			break;
		}
		safe++;
	}
	fl_append_close(&append);
	return safe;
}

static void appending_fails_at_each_call(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "session", path);
	for (failing_mode mode = FAILING_CLEAN; mode <= FAILING_DEAD; mode++) {
		bool failed = true;
		long n = 0;
		while (failed) {
			unlink(path);
			failing_io disk;
			failing_io_start(&disk, ++n, ENOSPC, mode);
			size_t safe = append_lines(&disk, path);
			failed = disk.failed;
			char want[64] = "";
			for (size_t i = 0; i < safe; i++)
				strcat(want, lines[i]);
			size_t length = 0;
			char *bytes = scratch_read(path, &length);
			assert_true(safe == 0 || bytes);
			assert_true(length >= strlen(want)); /* nothing that was said to be safe is lost */
			assert_memory_equal(bytes ? bytes : "", want, strlen(want));
			if (mode != FAILING_DEAD) /* and nothing torn is left, as long as the disk obeys */
				assert_int_equal(length, strlen(want));
			free(bytes);
			assert_true(failed || safe == COUNT(lines));
		}
		assert_true(n > 12); /* open, lock, folder (3), three times write and sync, close */
	}
}

static void cutting_fails_at_each_call(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "session", path);
	bool failed = true;
	for (long n = 1; failed; n++) {
		put(path, "one\ntwo\nthr");
		failing_io disk;
		failing_io_start(&disk, n, EIO, FAILING_CLEAN);
		fl_append append = {0};
		fl_status status = fl_append_open(&append, &disk.io, path, false, 8, NULL);
		fl_append_close(&append);
		failed = disk.failed;
		bool after = failed && strcmp(disk.what, "close") == 0;
		assert_int_equal(status, failed && !after ? FL_E_IO : FL_OK);
		if (!holds(path, "one\ntwo\nthr"))
			assert_true(holds(path, "one\ntwo\n"));
	}
}

static void paths_that_are_too_long(void **state) {
	(void)state;
	char path[5000];
	memset(path, 'p', sizeof path - 1);
	path[sizeof path - 1] = '\0';
	fl_append append;
	fl_arena arena = {0};
	char *bytes;
	size_t length;
	assert_int_equal(fl_append_open(&append, sys(), path, true, 0, NULL), FL_E_IO);
	assert_int_equal(fl_file_write(sys(), path, "x", 1, true, NULL), FL_E_IO);
	assert_int_equal(fl_file_read(sys(), path, 10, &arena, &bytes, &length, NULL), FL_E_IO);
	assert_int_equal(fl_folder_make(sys(), path, NULL), FL_E_IO);
	fl_arena_free(&arena);
}

int main(void) {
#define IN_SCRATCH(test) cmocka_unit_test_setup_teardown(test, scratch_make, scratch_remove)
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(reasons_become_sentences),
	    IN_SCRATCH(reading),
	    IN_SCRATCH(a_large_file_comes_back_whole),
	    IN_SCRATCH(reading_fails_at_each_call),
	    IN_SCRATCH(writing_replaces_or_refuses),
	    IN_SCRATCH(a_leftover_of_a_killed_writer_is_stepped_over),
	    IN_SCRATCH(writing_fails_at_each_call),
	    IN_SCRATCH(power_lost_at_each_call),
	    IN_SCRATCH(small_slices_and_signals_are_no_failure),
	    IN_SCRATCH(a_read_only_folder),
	    IN_SCRATCH(a_read_only_disk),
	    cmocka_unit_test(a_full_device),
	    IN_SCRATCH(folders),
	    IN_SCRATCH(making_folders_fails_at_each_call),
	    IN_SCRATCH(appending),
	    IN_SCRATCH(a_torn_end_is_cut_off),
	    IN_SCRATCH(appending_fails_at_each_call),
	    IN_SCRATCH(cutting_fails_at_each_call),
	    cmocka_unit_test(paths_that_are_too_long),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
