/* story.h - a sample session as a list of answers, each with its moment, and file calls that kill the program.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_DURABILITY_STORY_H
#define FOUNDLEFT_TEST_DURABILITY_STORY_H

#include "check.h"
#include "foundleft/entry.h"
#include "scratch.h"

#include <errno.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#define SAMPLES SOURCE_DIR "/sample-sessions/"
enum { MOST_ANSWERS = 512 };

/* sample-sessions/adjusted: what is typed, and when by its own directions (!clock, !pace, !wait). */
typedef struct story {
	fl_arena arena;
	const char *answers[MOST_ANSWERS];
	fl_utc at[MOST_ANSWERS];
	int count;
	fl_procedure procedure;
	fl_stock stock;
	const fl_instrument *instrument;
	void (*after)(const fl_journal *journal); /* called after each answer that was taken; NULL: none */
} story;

static inline void story_take(story *s, char *line, fl_utc *now, long *pace) {
	if (strncmp(line, "!clock ", 7) == 0)
		assert_int_equal(fl_utc_parse(line + 7, now, NULL), FL_OK);
	else if (strncmp(line, "!pace ", 6) == 0)
		*pace = atol(line + 6);
	else if (strncmp(line, "!wait ", 6) == 0)
		*now += atol(line + 6);
	bool answer = line[0] != '!' && line[0] != '#' && line[0] != '\0';
	if (!answer && strcmp(line, "!empty") != 0)
		return;
	assert_true(s->count < MOST_ANSWERS);
	s->answers[s->count] = answer ? line : "";
	s->at[s->count++] = *now;
	*now += *pace;
}

static inline void story_load(story *s) {
	fl_error err = {0};
	char *text;
	size_t length;
	*s = (story){0};
	assert_int_equal(fl_file_read(fl_io_system(), SAMPLES "adjusted/answers", 1 << 20, &s->arena, &text, &length, &err),
	                 FL_OK);
	fl_utc now = 0;
	long pace = 0;
	for (char *line = text, *next; line; line = next) {
		next = strchr(line, '\n');
		if (next)
			*next++ = '\0';
		story_take(s, line, &now, &pace);
	}
	assert_true(s->count > 200);
	static const char *const files[] = {"oils", "equipment", "instruments"};
	for (int i = 0; i < 3; i++) {
		char path[SCRATCH_SIZE];
		snprintf(path, sizeof path, SAMPLES "stock/%s.yaml", files[i]);
		assert_true(fl_stock_load(&s->stock, fl_io_system(), path, &err) >= 0);
	}
	assert_true(
	    fl_procedure_load(fl_io_system(), SOURCE_DIR "/templates/workshop-calibration.yaml", &s->procedure, &err) >= 0);
	s->instrument = fl_stock_instrument(&s->stock, "VT-1");
	assert_non_null(s->instrument);
}

static inline void story_free(story *s) {
	fl_procedure_free(&s->procedure);
	fl_stock_free(&s->stock);
	fl_arena_free(&s->arena);
}

static inline fl_utc story_clock(void *context) {
	return *(const fl_utc *)context;
}

/* Feeds the answers from number `from` on into an open journal. `lines_after` (NULL if not wanted) gets the journal's
 * length in lines after each. Returns the number of the answer that was refused, `count` if all were taken. */
static inline int story_feed(const story *s, fl_journal *journal, int from, const fl_utc *at, int *lines_after,
                             fl_error *err) {
	fl_utc now = at[from < s->count ? from : 0];
	fl_entry *entry = NULL;
	const fl_entry_setup setup = {.journal = journal,
	                              .procedure = &s->procedure,
	                              .instrument = s->instrument,
	                              .stock = &s->stock,
	                              .clock = story_clock,
	                              .clock_context = &now};
	fl_text say = {0};
	fl_status status = fl_entry_new(&entry, &setup, err);
	int i = from;
	for (; i < s->count && status >= 0; i++) {
		now = at[i];
		status = fl_entry_line(entry, s->answers[i], &say, err);
		if (status < 0)
			break;
		if (lines_after)
			lines_after[i] = journal->session.last_sequence;
		if (s->after)
			s->after(journal);
		fl_text_clear(&say);
	}
	fl_text_free(&say);
	fl_entry_free(entry);
	return i;
}

/* Begins the journal as the program does. */
static inline fl_status story_begin(const story *s, fl_journal *journal, const fl_io *io, const char *path,
                                    fl_error *err) {
	return fl_entry_begin(journal, io, path, FL_SOURCE_REPLAY, true, fl_day_of(s->at[0]), s->at[0], &s->procedure,
	                      s->instrument, "0.1.0", err);
}

/* ---- file calls that kill ---- */

/* Calls of the system; the process kills itself (SIGKILL: no clean-up runs) before its `kill_at`-th call, or within the
 * write that reaches `kill_after` bytes: those are written, no more. Syncs cost nothing: a killed program loses nothing
 * that the kernel has. */
typedef struct killing_io {
	fl_io io;
	long calls, kill_at;    /* 0: none */
	long bytes, kill_after; /* -1: none */
} killing_io;

static inline void count_call(void *self) {
	killing_io *k = self;
	if (++k->calls == k->kill_at)
		raise(SIGKILL);
}

static inline int killing_open(void *self, const char *path, int flags, unsigned mode) {
	count_call(self);
	return fl_io_system()->open(NULL, path, flags, mode);
}

static inline long killing_write(void *self, int fd, const void *bytes, size_t size) {
	killing_io *k = self;
	count_call(self);
	if (k->kill_after >= 0 && k->bytes + (long)size > k->kill_after) {
		size_t part = (size_t)(k->kill_after - k->bytes);
		if (part > 0 && write(fd, bytes, part) != (ssize_t)part)
			_exit(3);
		raise(SIGKILL);
	}
	k->bytes += (long)size;
	return fl_io_system()->write(NULL, fd, bytes, size);
}

static inline int killing_sync(void *self, int fd) {
	(void)fd;
	count_call(self);
	return 0;
}

static inline int killing_close(void *self, int fd) {
	count_call(self);
	return fl_io_system()->close(NULL, fd);
}

static inline int killing_rename_new(void *self, const char *from, const char *to) {
	count_call(self);
	return fl_io_system()->rename_new(NULL, from, to);
}

static inline void killing_start(killing_io *k, long kill_at, long kill_after) {
	*k = (killing_io){.io = *fl_io_system(), .kill_at = kill_at, .kill_after = kill_after};
	k->io.open = killing_open;
	k->io.write = killing_write;
	k->io.sync = killing_sync;
	k->io.close = killing_close;
	k->io.rename_new = killing_rename_new;
	k->io.self = k;
}

/* Waits for a child; true if it was killed as planned, false if it came to its end with 0. Anything else fails. */
static inline bool was_killed(pid_t child) {
	int status;
	assert_true(child > 0);
	assert_int_equal(waitpid(child, &status, 0), child);
	if (WIFSIGNALED(status)) {
		assert_int_equal(WTERMSIG(status), SIGKILL);
		return true;
	}
	assert_true(WIFEXITED(status));
	assert_int_equal(WEXITSTATUS(status), 0);
	return false;
}

#endif
