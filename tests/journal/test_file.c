/* test_file.c - the journal on disk: chain, tampering, torn ends, failing calls.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "bench.h"

#include <errno.h>

static fl_status read_back(const char *path, int *events, bool *torn, fl_error *err) {
	fl_session session = {0};
	char head[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_journal_read(fl_io_system(), path, &session, head, torn, err);
	*events = session.last_sequence;
	fl_session_free(&session);
	return status;
}

static void what_is_written_is_read_back(void **state) {
	char path[SCRATCH_SIZE], head[FL_DIGEST_HEX_SIZE];
	scratch_path(*state, "a.flj", path);
	fl_error err = {0};
	assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, &err), SMALL_COUNT);
	fl_session s = {0};
	bool torn = true;
	assert_int_equal(fl_journal_read(fl_io_system(), path, &s, head, &torn, &err), FL_OK);
	assert_false(torn);
	assert_int_equal(s.last_sequence, SMALL_COUNT);
	assert_string_equal(fl_session_text_body(&s, "procedure", NULL),
	                    "id: p\n\tback\\slash\r\n# \u03bd = \u03bc/\u03c1\n");
	assert_string_equal(fl_session_setting(&s, "performed-by")->typed, "Ingr\u00edd \u0416arova");
	assert_string_equal(fl_session_setting(&s, "others")->typed, "");
	check_near("ambient", 22.5, fl_session_setting(&s, "ambient")->value, 0.0);
	assert_int_equal(fl_session_setting(&s, "ambient")->unit, FL_U_CELSIUS);
	assert_int_equal(s.reading_count, 2);
	assert_string_equal(s.readings[0].typed, "7,064");
	check_near("output", 7.064, s.readings[0].output, 0.0);
	check_near("temperature", 39.91, s.readings[0].temp_c, 0.0);
	assert_int_equal(s.readings[0].point, 0);
	assert_int_equal(s.readings[1].point, FL_POINT_ZERO);
	assert_int_equal(s.readings[1].pass, FL_PASS_FALLING);
	assert_true(s.runs[FL_RUN_AS_FOUND].closed);
	assert_int_equal(s.readings[0].taken, small_time(10));
	fl_session_free(&s);
}

/* The journal as it stood with each of its lines: the digest foreseen for a line is the one that it gets. */
static void a_journal_is_read_as_it_stood(void **state) {
	char path[SCRATCH_SIZE], head[FL_DIGEST_HEX_SIZE], foreseen[FL_DIGEST_HEX_SIZE], *bytes;
	size_t length = 0, whole = 0;
	scratch_path(*state, "a.flj", path);
	assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, NULL), SMALL_COUNT);
	fl_journal journal;
	fl_error err = {0};
	fl_event remark = {.at = small_time(99), .verb = FL_V_REMARK, .fields[FL_F_TYPED] = "one more"};
	assert_int_equal(fl_journal_resume(&journal, fl_io_system(), path, small_time(98), &err), FL_OK);
	assert_int_equal(fl_journal_foresee(&journal, &remark, foreseen, &err), FL_OK);
	assert_int_equal(journal.session.last_sequence, SMALL_COUNT);
	assert_int_equal(fl_journal_commit(&journal, &remark, &err), FL_OK);
	assert_string_equal(journal.head, foreseen);
	fl_journal_close(&journal);
	char *all = scratch_read(path, &whole);
	for (int line = 1; line <= SMALL_COUNT + 1; line++) {
		fl_arena arena = {0};
		fl_session s = {0};
		size_t before = length;
		assert_int_equal(fl_journal_read_to(fl_io_system(), path, line, &s, head, &arena, &bytes, &length, &err),
		                 FL_OK);
		assert_int_equal(s.last_sequence, line);
		assert_true(length > before && bytes[length - 1] == '\n');
		assert_memory_equal(bytes, all, length);
		assert_memory_equal(bytes + length - FL_DIGEST_HEX_SIZE, head, FL_DIGEST_HEX_SIZE - 1);
		fl_session_free(&s);
		fl_arena_free(&arena);
	}
	assert_int_equal(length, whole);
	assert_string_equal(head, foreseen);
	fl_arena arena = {0};
	fl_session s = {0};
	assert_int_equal(fl_journal_read_to(fl_io_system(), path, SMALL_COUNT + 2, &s, head, &arena, &bytes, &length, &err),
	                 FL_E_NOT_FOUND);
	/* What stands behind the line counts too. */
	all[whole - 70] ^= 1;
	write_bytes(path, all, whole);
	assert_int_equal(fl_journal_read_to(fl_io_system(), path, 1, &s, head, &arena, &bytes, &length, NULL),
	                 FL_E_TAMPERED);
	fl_arena_free(&arena);
	free(all);
}

static void every_changed_byte_is_caught(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "a.flj", path);
	assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, NULL), SMALL_COUNT);
	size_t length;
	char *bytes = scratch_read(path, &length);
	assert_non_null(bytes);
	static const char masks[] = {0x01, 0x20, (char)0x80};
	for (size_t i = 0; i < length; i++)
		for (size_t m = 0; m < sizeof masks; m++) {
			bytes[i] = (char)(bytes[i] ^ masks[m]);
			write_bytes(path, bytes, length);
			int events;
			bool torn = false;
			fl_error err = {0};
			fl_status status = read_back(path, &events, &torn, &err);
			if (status != FL_E_TAMPERED)
				print_error("byte %zu of %zu, mask %d: status %d\n", i, length, masks[m], status);
			assert_int_equal(status, FL_E_TAMPERED);
			assert_true(err.line >= 1);
			bytes[i] = (char)(bytes[i] ^ masks[m]);
		}
	free(bytes);
}

static void removed_doubled_and_swapped_lines_are_caught(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "a.flj", path);
	assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, NULL), SMALL_COUNT);
	size_t length;
	char *bytes = scratch_read(path, &length), *second = strchr(bytes, '\n') + 1, *third = strchr(second, '\n') + 1;
	char *other = malloc(2 * length);
	assert_non_null(other);
	size_t first_length = (size_t)(second - bytes), second_length = (size_t)(third - second),
	       rest = length - (size_t)(third - bytes);
	memcpy(other, bytes, first_length);
	memcpy(other + first_length, third, rest);
	write_bytes(path, other, first_length + rest);
	int events;
	fl_error err = {0};
	assert_int_equal(read_back(path, &events, NULL, &err), FL_E_TAMPERED);
	assert_int_equal(err.line, 2);
	memcpy(other, bytes, (size_t)(third - bytes));
	memcpy(other + (third - bytes), second, second_length + rest);
	write_bytes(path, other, (size_t)(third - bytes) + second_length + rest);
	err = (fl_error){0};
	assert_int_equal(read_back(path, &events, NULL, &err), FL_E_TAMPERED);
	assert_int_equal(err.line, 3);
	free(other);
	free(bytes);
}

/* Cut at every length: what was committed before the cut is there, the session goes on, and the file is valid again. */
static void a_torn_end_of_any_length_resumes(void **state) {
	char whole[SCRATCH_SIZE], path[SCRATCH_SIZE];
	scratch_path(*state, "whole.flj", whole);
	scratch_path(*state, "torn.flj", path);
	assert_int_equal(write_small(fl_io_system(), whole, SMALL_COUNT, NULL), SMALL_COUNT);
	size_t length;
	char *bytes = scratch_read(whole, &length);
	size_t first = (size_t)(strchr(bytes, '\n') - bytes) + 1;
	int lines = 0;
	for (size_t cut = 0; cut <= length; cut++) {
		lines += cut > 0 && bytes[cut - 1] == '\n';
		bool clean = cut > 0 && bytes[cut - 1] == '\n';
		write_bytes(path, bytes, cut);
		int events;
		bool torn = false;
		fl_error err = {0};
		fl_journal journal;
		if (cut < first) {
			assert_int_equal(read_back(path, &events, &torn, &err), FL_E_SYNTAX);
			continue;
		}
		assert_int_equal(read_back(path, &events, &torn, &err), FL_OK);
		assert_int_equal(events, lines);
		assert_int_equal(torn, !clean);
		assert_int_equal(fl_journal_resume(&journal, fl_io_system(), path, small_time(99), &err), FL_OK);
		assert_int_equal(journal.session.last_sequence, lines + !clean);
		fl_event remark = {.at = small_time(100), .verb = FL_V_REMARK, .fields[FL_F_TYPED] = "resumed"};
		assert_int_equal(fl_journal_commit(&journal, &remark, &err), FL_OK);
		fl_journal_close(&journal);
		assert_int_equal(read_back(path, &events, &torn, &err), FL_OK);
		assert_int_equal(events, lines + !clean + 1);
		assert_false(torn);
	}
	free(bytes);
}

/* Each call fails once, in each manner: what was said to be committed is on the disk, and nothing else but perhaps the
 * one line whose fate was not known. */
static void no_failing_call_loses_a_committed_line(void **state) {
	char path[SCRATCH_SIZE];
	static const int reasons[] = {ENOSPC, EIO, EROFS};
	for (int mode = FAILING_CLEAN; mode <= FAILING_DEAD; mode++)
		for (long n = 1;; n++) {
			scratch_path(*state, "a.flj", path);
			unlink(path);
			failing_io disk;
			fl_error err = {0};
			failing_io_start(&disk, n, reasons[n % 3], (failing_mode)mode);
			int committed = write_small(&disk.io, path, SMALL_COUNT, &err);
			if (!disk.failed) {
				assert_int_equal(committed, SMALL_COUNT);
				break;
			}
			if (committed < SMALL_COUNT)
				assert_true(err.message[0] != '\0');
			int events = 0;
			bool torn;
			fl_error back = {0};
			fl_status status = read_back(path, &events, &torn, &back);
			assert_true(status == FL_OK || (committed == 0 && (status == FL_E_NOT_FOUND || status == FL_E_SYNTAX)));
			assert_true(events == committed || events == committed + 1);
		}
}

static void resuming_survives_failing_calls(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "a.flj", path);
	for (int mode = FAILING_CLEAN; mode <= FAILING_DEAD; mode++)
		for (long n = 1;; n++) {
			unlink(path);
			assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, NULL), SMALL_COUNT);
			FILE *file = fopen(path, "ab");
			fputs("14\t2026-04-14T09", file);
			fclose(file);
			failing_io disk;
			failing_io_start(&disk, n, EIO, (failing_mode)mode);
			fl_journal journal;
			fl_status status = fl_journal_resume(&journal, &disk.io, path, small_time(50), NULL);
			if (status == FL_OK)
				fl_journal_close(&journal);
			int events;
			bool torn;
			assert_int_equal(read_back(path, &events, &torn, NULL), FL_OK);
			assert_true(events == SMALL_COUNT || events == SMALL_COUNT + 1);
			if (!disk.failed) {
				assert_int_equal(events, SMALL_COUNT + 1);
				break;
			}
		}
}

static void a_second_program_is_refused(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "a.flj", path);
	assert_int_equal(write_small(fl_io_system(), path, 5, NULL), 5);
	fl_journal one, two;
	fl_error err = {0};
	assert_int_equal(fl_journal_resume(&one, fl_io_system(), path, 0, &err), FL_OK);
	assert_true(fl_journal_resume(&two, fl_io_system(), path, 0, &err) < 0);
	assert_true(err.message[0] != '\0');
	fl_journal_close(&one);
	fl_event open = small_session[0];
	err = (fl_error){0};
	assert_int_equal(fl_journal_create(&one, fl_io_system(), path, &open, &err), FL_E_EXISTS);
}

static void a_refused_event_leaves_no_trace(void **state) {
	char path[SCRATCH_SIZE];
	scratch_path(*state, "a.flj", path);
	assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, NULL), SMALL_COUNT);
	fl_journal journal;
	assert_int_equal(fl_journal_resume(&journal, fl_io_system(), path, 0, NULL), FL_OK);
	int64_t length = journal.file.length;
	fl_event event = small_session[10]; /* a reading into the closed run */
	assert_int_equal(fl_journal_commit(&journal, &event, NULL), FL_E_STATE);
	assert_int_equal(journal.file.length, length);
	assert_int_equal(journal.session.last_sequence, SMALL_COUNT);
	fl_journal_close(&journal);
}

/* The check of docs/journal.md, taken from there, agrees with the program. */
static void the_check_for_people_works(void **state) {
	char path[SCRATCH_SIZE], command[1200];
	scratch_path(*state, "a.flj", path);
	assert_int_equal(write_small(fl_io_system(), path, SMALL_COUNT, NULL), SMALL_COUNT);
	snprintf(command, sizeof command,
	         "sed -n '/^```sh/,/^```/p' '%s/docs/journal.md' | grep -v '^```' >'%s/check.sh' && sh '%s/check.sh' '%s' "
	         ">/dev/null",
	         SOURCE_DIR, (char *)*state, (char *)*state, path);
	assert_int_equal(system(command), 0);
	size_t length;
	char *bytes = scratch_read(path, &length);
	bytes[length / 2] ^= 1;
	write_bytes(path, bytes, length);
	free(bytes);
	assert_int_not_equal(system(command), 0);
}

#define IN_SCRATCH(test) cmocka_unit_test_setup_teardown(test, scratch_make, scratch_remove)

int main(void) {
	const struct CMUnitTest tests[] = {
	    IN_SCRATCH(what_is_written_is_read_back),     IN_SCRATCH(a_journal_is_read_as_it_stood),
	    IN_SCRATCH(every_changed_byte_is_caught),     IN_SCRATCH(removed_doubled_and_swapped_lines_are_caught),
	    IN_SCRATCH(a_torn_end_of_any_length_resumes), IN_SCRATCH(no_failing_call_loses_a_committed_line),
	    IN_SCRATCH(resuming_survives_failing_calls),  IN_SCRATCH(a_second_program_is_refused),
	    IN_SCRATCH(a_refused_event_leaves_no_trace),  IN_SCRATCH(the_check_for_people_works),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
