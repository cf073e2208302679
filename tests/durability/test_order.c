/* The order of calls on which durability rests: bytes are synced before an entry counts as committed, a new file's
 * folder is synced, a certificate is synced before it gets its name. And clocks, which may go where they want.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli.h"
#include "foundleft/analysis.h"
#include "story.h"

/* ---- calls that are written down ---- */

static fl_text calls; /* one word a call: "open write sync ..." */
static int written_unsynced[1024];

static void note(const char *what) {
	fl_text_printf(&calls, "%s ", what);
}

static int noted_open(void *self, const char *path, int flags, unsigned mode) {
	(void)self;
	note(flags & O_DIRECTORY ? "open-folder" : flags & (O_WRONLY | O_RDWR) ? "open" : "look");
	return fl_io_system()->open(NULL, path, flags, mode);
}

static long noted_write(void *self, int fd, const void *bytes, size_t size) {
	(void)self;
	note("write");
	written_unsynced[fd]++;
	return fl_io_system()->write(NULL, fd, bytes, size);
}

static int noted_sync(void *self, int fd) {
	(void)self;
	note("sync");
	written_unsynced[fd] = 0;
	return 0;
}

static int noted_close(void *self, int fd) {
	(void)self;
	note("close");
	return fl_io_system()->close(NULL, fd);
}

static int noted_rename_new(void *self, const char *from, const char *to) {
	(void)self;
	note("name");
	return fl_io_system()->rename_new(NULL, from, to);
}

static fl_io noted_io(void) {
	fl_io io = *fl_io_system();
	io.open = noted_open;
	io.write = noted_write;
	io.sync = noted_sync;
	io.close = noted_close;
	io.rename_new = noted_rename_new;
	return io;
}

/* ---- */

static int lines_before;

/* Nothing else was called, and in this order, line by line; nothing is left unsynced when the answer counts. */
static void check_order(const fl_journal *journal) {
	char want[256] = "";
	assert_true(journal->session.last_sequence - lines_before <= 4);
	for (; lines_before < journal->session.last_sequence; lines_before++)
		strcat(want, "write sync ");
	assert_string_equal(calls.data, want);
	assert_int_equal(written_unsynced[journal->file.fd], 0);
	fl_text_clear(&calls);
}

static void an_entry_is_synced_before_it_counts(void **state) {
	story told;
	fl_error err = {0};
	fl_journal journal;
	fl_io io = noted_io();
	char path[SCRATCH_SIZE];
	story_load(&told);
	assert_int_equal(story_begin(&told, &journal, &io, scratch_path(*state, "j.flj", path), &err), FL_OK);
	assert_non_null(strstr(calls.data, "open open-folder sync close write sync ")); /* the new name first */
	assert_int_equal(written_unsynced[journal.file.fd], 0);
	fl_text_clear(&calls);
	lines_before = journal.session.last_sequence;
	told.after = check_order;
	assert_int_equal(story_feed(&told, &journal, 0, told.at, NULL, &err), told.count);
	assert_true(lines_before > 250);
	fl_journal_close(&journal);
	fl_text_free(&calls);
	story_free(&told);
}

static void run_certify(const fl_io *io, const char *journal, const char *out, fl_status want) {
	fl_cli cli = {.io = io, .out = fopen("/dev/null", "w"), .err = stderr};
	fl_exit code = FL_EXIT_FINE;
	fl_error err = {0};
	char *arguments[] = {(char *)(uintptr_t)journal};
	cli.values[FL_OPT_OUT] = out;
	cli.values[FL_OPT_NUMBER] = "D-1";
	cli.values[FL_OPT_DATE] = "2026-04-15";
	cli.values[FL_OPT_STOCK] = SAMPLES "stock";
	cli.values[FL_OPT_HOME] = "/nonexistent";
	cli.arguments = arguments;
	cli.argument_count = 1;
	assert_int_equal(fl_place_find(&cli, &err), FL_OK);
	fl_status got = fl_command_certify(&cli, &code, &err);
	if (got != want)
		print_message("certify: %s\n", err.message);
	assert_int_equal(got, want);
	fclose(cli.out);
}

static void write_journal(const char *path) {
	story told;
	fl_journal journal;
	fl_error err = {0};
	killing_io quick;
	killing_start(&quick, 0, -1);
	story_load(&told);
	assert_int_equal(story_begin(&told, &journal, &quick.io, path, &err), FL_OK);
	assert_int_equal(story_feed(&told, &journal, 0, told.at, NULL, &err), told.count);
	fl_journal_close(&journal);
	story_free(&told);
}

static void a_certificate_is_synced_before_it_gets_its_name(void **state) {
	char journal[SCRATCH_SIZE], out[SCRATCH_SIZE];
	write_journal(scratch_path(*state, "j.flj", journal));
	fl_io io = noted_io();
	fl_text_clear(&calls);
	run_certify(&io, journal, scratch_path(*state, "c.pdf", out), FL_OK);
	char *tail = strstr(calls.data, "open write");
	assert_non_null(tail);
	while (strncmp(tail + 5, "write write ", 12) == 0) /* however the bytes are sliced */
		memmove(tail + 5, tail + 11, strlen(tail + 11) + 1);
	assert_string_equal(tail, "open write sync close name open-folder sync close ");
	fl_text_free(&calls);
}

/* Copies the journal as it was before anything was issued. */
static void copy_journal(const char *from, const char *to) {
	size_t length;
	fl_error err = {0};
	char *bytes = scratch_read(from, &length);
	assert_non_null(bytes);
	assert_int_equal(fl_file_write(fl_io_system(), to, bytes, length, true, &err), FL_OK);
	free(bytes);
}

static void remove_leftovers(const char *out) {
	for (int part = 1; part <= 16; part++) {
		char name[SCRATCH_SIZE + 16];
		snprintf(name, sizeof name, "%s.part%d", out, part);
		unlink(name);
	}
}

static size_t count_issues(const char *journal) {
	fl_session session;
	char head[FL_DIGEST_HEX_SIZE];
	fl_error err = {0};
	assert_int_equal(fl_journal_read(fl_io_system(), journal, &session, head, NULL, &err), FL_OK);
	size_t count = session.issue_count;
	fl_session_free(&session);
	return count;
}

/* Killed before any of its calls while it issues: the certificate is issued once or not at all, and done again gives a
 * whole one without a second issue. */
static void a_killed_issue_is_issued_once(void **state) {
	char fresh[SCRATCH_SIZE], journal[SCRATCH_SIZE], out[SCRATCH_SIZE];
	write_journal(scratch_path(*state, "fresh.flj", fresh));
	scratch_path(*state, "j.flj", journal);
	scratch_path(*state, "c.pdf", out);
	bool ended = false;
	size_t unissued = 0, issued = 0;
	for (long n = 1; !ended; n++) {
		copy_journal(fresh, journal);
		killing_io io;
		killing_start(&io, n, -1);
		pid_t child = fork();
		if (child == 0) {
			run_certify(&io.io, journal, out, FL_OK);
			_exit(0);
		}
		ended = !was_killed(child);
		size_t count = count_issues(journal), length;
		unissued += count == 0;
		issued += count == 1;
		char *bytes = scratch_read(out, &length);
		assert_true(bytes == NULL || count == 1); /* no certificate that its journal does not know */
		free(bytes);
		run_certify(fl_io_system(), journal, out, FL_OK);
		assert_int_equal(count_issues(journal), 1);
		unlink(out);
		remove_leftovers(out);
	}
	assert_true(unissued > 3 && issued > 3);
}

/* Killed before any of its calls, within its bytes, and at the end: there is no certificate or the whole one. */
static void a_killed_certify_leaves_no_half_certificate(void **state) {
	char journal[SCRATCH_SIZE], good[SCRATCH_SIZE], out[SCRATCH_SIZE];
	size_t length = 0, got = 0;
	write_journal(scratch_path(*state, "j.flj", journal));
	run_certify(fl_io_system(), journal, scratch_path(*state, "good.pdf", good), FL_OK);
	char *want = scratch_read(good, &length);
	assert_true(length > 10000);
	scratch_path(*state, "c.pdf", out);
	bool ended = false;
	int killed = 0;
	for (long n = 1; !ended; n++) {
		for (int within = 0; within < 2; within++) {
			killing_io io;
			killing_start(&io, within ? 0 : n, within ? (n - 1) * 4001 : -1);
			if (within && io.kill_after >= (long)length)
				continue;
			pid_t child = fork();
			if (child == 0) {
				run_certify(&io.io, journal, out, FL_OK);
				_exit(0);
			}
			bool dead = was_killed(child);
			killed += dead;
			ended = ended || (!within && !dead);
			char *bytes = scratch_read(out, &got);
			if (bytes) {
				assert_int_equal(got, length);
				assert_memory_equal(bytes, want, length);
			} else {
				assert_true(dead);
			}
			free(bytes);
			run_certify(fl_io_system(), journal, out, FL_OK); /* the leftover is in nobody's way */
			bytes = scratch_read(out, &got);
			assert_int_equal(got, length);
			assert_memory_equal(bytes, want, length);
			free(bytes);
			unlink(out);
			remove_leftovers(out);
		}
	}
	assert_true(killed > 15);
	free(want);
}

/* ---- clocks ---- */

static void results_of(const char *path, fl_result *result, fl_session *session, fl_procedure *procedure,
                       fl_stock *stock) {
	fl_error err = {0};
	char head[FL_DIGEST_HEX_SIZE];
	bool torn;
	assert_int_equal(fl_journal_read(fl_io_system(), path, session, head, &torn, &err), FL_OK);
	assert_int_equal(fl_session_procedure(session, procedure, &err), FL_OK);
	assert_true(fl_session_stock(session, stock, &err) >= 0);
	assert_true(fl_analysis_session(session, procedure, stock, result, &err) >= 0);
}

static void same_results(const char *a, const char *b) {
	fl_session session[2] = {0};
	fl_procedure procedure[2] = {0};
	fl_stock stock[2] = {0};
	fl_result result[2] = {0};
	const char *paths[2] = {a, b};
	for (int i = 0; i < 2; i++)
		results_of(paths[i], &result[i], &session[i], &procedure[i], &stock[i]);
	for (int run = 0; run < FL_RUN_KINDS; run++) {
		const fl_run_result *x = &result[0].runs[run], *y = &result[1].runs[run];
		assert_int_equal(x->verdict, y->verdict);
		assert_int_equal(x->point_count, y->point_count);
		assert_true(x->point_count > 10);
		for (size_t i = 0; i < x->point_count; i++) {
			assert_memory_equal(&x->points[i].error_span, &y->points[i].error_span, sizeof(double));
			assert_memory_equal(&x->points[i].sum.expanded, &y->points[i].sum.expanded, sizeof(double));
		}
	}
	for (int i = 0; i < 2; i++) {
		fl_result_free(&result[i]);
		fl_stock_free(&stock[i]);
		fl_procedure_free(&procedure[i]);
		fl_session_free(&session[i]);
	}
}

/* Set back by an hour, by years to 1970, and forward: the order is the sequence's, and the results are the same. */
static void a_clock_that_jumps_does_no_harm(void **state) {
	static const fl_utc jumps[] = {0, -3600, -86400 * 40, 0, 86400 * 9, -1700000000, 5};
	story told;
	fl_journal journal;
	fl_error err = {0};
	fl_utc at[MOST_ANSWERS];
	char steady[SCRATCH_SIZE], jumping[SCRATCH_SIZE];
	killing_io quick;
	killing_start(&quick, 0, -1);
	story_load(&told);
	write_journal(scratch_path(*state, "steady.flj", steady));
	for (int i = 0; i < told.count; i++)
		at[i] = told.at[i] + jumps[i * 7 / told.count];
	assert_int_equal(story_begin(&told, &journal, &quick.io, scratch_path(*state, "jumping.flj", jumping), &err),
	                 FL_OK);
	int half = told.count / 2, taken;
	story first = told;
	first.count = half;
	taken = story_feed(&first, &journal, 0, at, NULL, &err);
	assert_int_equal(taken, half);
	fl_journal_close(&journal);
	/* Taken up again at a time before it began. */
	assert_true(fl_journal_resume(&journal, &quick.io, jumping, told.at[0] - 86400, &err) >= 0);
	assert_int_equal(story_feed(&told, &journal, half, at, NULL, &err), told.count);
	assert_true(journal.session.closed);
	fl_journal_close(&journal);
	same_results(steady, jumping);
	story_free(&told);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_setup_teardown(an_entry_is_synced_before_it_counts, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(a_certificate_is_synced_before_it_gets_its_name, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(a_killed_issue_is_issued_once, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(a_killed_certify_leaves_no_half_certificate, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(a_clock_that_jumps_does_no_harm, scratch_make, scratch_remove),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
