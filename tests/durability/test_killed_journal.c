/* A program killed between two file calls or within a write: every committed line is there, and going on leads to the
 * same session as if nothing had happened.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "story.h"

static story told;
static char *reference; /* the journal of an undisturbed session */
static size_t reference_length;
static int lines_after[MOST_ANSWERS];
static int lines_total;

static int tell_undisturbed(void **state) {
	fl_error err = {0};
	char path[SCRATCH_SIZE];
	fl_journal journal;
	killing_io io;
	killing_start(&io, 0, -1);
	story_load(&told);
	if (scratch_make(state) != 0)
		return -1;
	assert_int_equal(story_begin(&told, &journal, &io.io, scratch_path(*state, "whole.flj", path), &err), FL_OK);
	assert_int_equal(story_feed(&told, &journal, 0, told.at, lines_after, &err), told.count);
	lines_total = journal.session.last_sequence;
	assert_true(journal.session.closed);
	fl_journal_close(&journal);
	reference = scratch_read(path, &reference_length);
	return reference ? 0 : -1;
}

static int forget(void **state) {
	free(reference);
	story_free(&told);
	return scratch_remove(state);
}

/* In a child: the whole session from its beginning, until the calls kill it. */
static bool tell_until_killed(const char *path, long kill_at, long kill_after) {
	pid_t child = fork();
	if (child == 0) {
		fl_error err = {0};
		fl_journal journal;
		killing_io io;
		killing_start(&io, kill_at, kill_after);
		if (story_begin(&told, &journal, &io.io, path, &err) < 0)
			_exit(1);
		int taken = story_feed(&told, &journal, 0, told.at, NULL, &err);
		_exit(taken == told.count ? 0 : 2);
	}
	return was_killed(child);
}

static int count_lines(const char *bytes, size_t length) {
	int lines = 0;
	for (size_t i = 0; i < length; i++)
		lines += bytes[i] == '\n';
	return lines;
}

/* Readings, settings and gates of two sessions, less their sequence numbers: those move by the line that tells of the
 * torn one. */
static void same_session(const fl_session *a, const fl_session *b) {
	assert_int_equal(a->reading_count, b->reading_count);
	for (size_t i = 0; i < a->reading_count; i++) {
		assert_string_equal(a->readings[i].typed, b->readings[i].typed);
		assert_int_equal(a->readings[i].run, b->readings[i].run);
		assert_int_equal(a->readings[i].cycle, b->readings[i].cycle);
		assert_int_equal(a->readings[i].point, b->readings[i].point);
		assert_int_equal(a->readings[i].number, b->readings[i].number);
	}
	assert_int_equal(a->setting_count, b->setting_count);
	assert_int_equal(a->gate_count, b->gate_count);
	assert_int_equal(a->adjustment_count, b->adjustment_count);
	assert_int_equal(a->remark_count, b->remark_count);
	assert_int_equal(a->decision, b->decision);
	assert_int_equal(a->closed, b->closed);
}

/* The answer to give after so many lines: behind the last one whose lines are all there. An answer that wrote none,
 * such as the first half of an adjustment, is asked for again. */
static int next_answer(int committed) {
	int next = 0;
	for (int i = 0; i < told.count && lines_after[i] <= committed; i++)
		if (i == 0 || lines_after[i] > lines_after[i - 1])
			next = i + 1;
	return next;
}

/* What was left of the session of a killed program: a beginning of the whole, and it can be brought to the same end. */
static void goes_on(const char *path, const fl_session *whole) {
	fl_error err = {0};
	fl_journal journal;
	size_t length = 0;
	char *left = scratch_read(path, &length);
	if (!left)
		return; /* killed before the file was made */
	assert_true(length <= reference_length);
	assert_memory_equal(left, reference, length);
	int committed = count_lines(left, length);
	bool torn = length > 0 && left[length - 1] != '\n';
	free(left);
	if (committed == 0) { /* not even its first line: refused with a sentence, and begun anew */
		assert_true(fl_journal_resume(&journal, fl_io_system(), path, told.at[0], &err) < 0);
		return;
	}
	if (committed < 4) /* procedure or instrument are not in it yet: no conversation had begun */
		return;
	assert_true(fl_journal_resume(&journal, fl_io_system(), path, told.at[0], &err) >= 0);
	assert_int_equal(journal.session.last_sequence, committed + torn);
	int next = next_answer(committed);
	killing_io quick;
	killing_start(&quick, 0, -1);
	journal.file.io = &quick.io;
	assert_int_equal(story_feed(&told, &journal, next, told.at, NULL, &err), told.count);
	fl_journal_close(&journal);
	fl_session again = {0}; /* from the disk, every digest checked */
	char head[FL_DIGEST_HEX_SIZE];
	assert_int_equal(fl_journal_read(fl_io_system(), path, &again, head, NULL, &err), FL_OK);
	assert_int_equal(again.last_sequence, lines_total + torn);
	same_session(&again, whole);
	fl_session_free(&again);
}

static void load_whole(void **state, fl_session *whole) {
	char path[SCRATCH_SIZE], head[FL_DIGEST_HEX_SIZE];
	bool torn;
	fl_error err = {0};
	assert_int_equal(fl_journal_read(fl_io_system(), scratch_path(*state, "whole.flj", path), whole, head, &torn, &err),
	                 FL_OK);
}

static void within_a_write(void **state) {
	fl_session whole = {0};
	load_whole(state, &whole);
	char path[SCRATCH_SIZE];
	int killed = 0;
	/* A prime step: it meets heads, fields, digests, and both sides of line ends. */
	for (long bytes = 0; bytes < (long)reference_length; bytes += 1009) {
		scratch_path(*state, "killed.flj", path);
		assert_true(tell_until_killed(path, 0, bytes));
		killed++;
		goes_on(path, &whole);
		unlink(path);
	}
	assert_true(killed > 50);
	fl_session_free(&whole);
}

static void on_each_byte_of_a_line(void **state) {
	fl_session whole = {0};
	load_whole(state, &whole);
	char path[SCRATCH_SIZE];
	long start = 0, line = 0;
	while (line < 60) /* a reading */
		line += reference[start++] == '\n';
	for (long bytes = start; bytes == start || reference[bytes - 1] != '\n'; bytes += 9) {
		assert_true(tell_until_killed(scratch_path(*state, "killed.flj", path), 0, bytes));
		goes_on(path, &whole);
		unlink(path);
		if (bytes + 9 >= start + 260)
			break;
	}
	fl_session_free(&whole);
}

static void between_two_calls(void **state) {
	fl_session whole = {0};
	load_whole(state, &whole);
	char path[SCRATCH_SIZE];
	long call = 1, killed = 0;
	/* Every call at the beginning, where file and folder are made; then every seventh. */
	for (;; call += call < 30 ? 1 : 7) {
		bool again = tell_until_killed(scratch_path(*state, "killed.flj", path), call, -1);
		killed += again;
		goes_on(path, &whole);
		unlink(path);
		if (!again)
			break;
	}
	assert_true(killed > 60);
	assert_true(call > 2L * lines_total); /* each line is at least a write and a sync */
	fl_session_free(&whole);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(within_a_write),
	    cmocka_unit_test(on_each_byte_of_a_line),
	    cmocka_unit_test(between_two_calls),
	};
	return cmocka_run_group_tests(tests, tell_undisturbed, forget);
}
