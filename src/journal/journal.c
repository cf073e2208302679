/* journal.c - the file of a session: read and verified whole, grown by one flushed line per committed entry.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Format 1. UTF-8 text; one event a line; LF ends each line; fields are separated by one TAB:
 *
 *     <sequence> <utc> <verb> [<word>=<value> ...] prev=<64 hex> self=<64 hex>
 *
 *   sequence  1, 2, 3 ... without gaps. It, not the time, gives the order.
 *   utc       clock of the machine, YYYY-MM-DDThh:mm:ssZ. May go back when somebody sets the clock.
 *   verb      a word of FL_VERB_LIST.
 *   word      a word of FL_FIELD_LIST, each at most once and in the order of that list; which ones a verb needs and
 *             may have stands in fl_verb_rules (words.c).
 *   value     any text in which backslash, TAB, LF and CR are written \\ \t \n \r.
 *   prev      `self` of the line before; 64 zeros in the first line.
 *   self      SHA-256, in lower-case hexadecimal, of the bytes of the line before "\tself=".
 *
 * A journal is valid if and only if
 *   V1. every line that ends in LF has the form above, with the right `self` and `prev`;
 *   V2. the sequence of line n is n;
 *   V3. the events, in order, are each taken by fl_session_apply (the order of work, check.c);
 *   V4. what stands behind the last LF, if anything, is the beginning of a line whose `self` was not complete with its
 *       LF: a write that a power cut stopped. It was never committed. It is ignored by reading, and cut off by
 *       resuming, which writes a `torn` line that keeps its text. Bytes behind a complete `self` are not such a
 *       beginning: FL_E_TAMPERED.
 *
 * Invariants of an open journal
 *   I1. The session is what replaying the file's complete lines gives.
 *   I2. head[] is the `self` of the last complete line; file.length is the place behind its LF.
 *   I3. An event is checked, and all memory for it is had, before its line is written; after the line is synced
 *       nothing can fail. So an event is in the session if and only if it is on the disk.
 *   I4. After a failed write nothing is written through this handle again (fl_append refuses).
 *   I5. The file is locked while it is open for writing, and is read under that lock.
 */
#include "foundleft/journal.h"
#include "line.h"
#include "session.h"

#include <stdio.h>
#include <string.h>

static void first_head(char head[FL_DIGEST_HEX_SIZE]) {
	memset(head, '0', FL_DIGEST_HEX_SIZE - 1);
	head[FL_DIGEST_HEX_SIZE - 1] = '\0';
}

/* ---- reading ---- */

/* What came of reading the bytes of a journal. */
typedef struct replayed {
	size_t good;      /* bytes up to and with the last LF */
	const char *tail; /* unfinished last line */
	size_t tail_length;
} replayed;

/* Puts file and line to an error that a line of the journal gave. */
static fl_status at_line(fl_error *err, const fl_error *inner, fl_status status, const char *path, int line) {
	fl_place place = {.file = path, .line = line};
	if (status == FL_E_STATE || status == FL_E_VALUE || status == FL_E_SYNTAX || status == FL_E_RANGE)
		status = FL_E_TAMPERED;
	return fl_fail_at(err, status, place, "%s", inner->message);
}

static fl_status replay_line(fl_hasher *hasher, const char *line, size_t length, fl_session *session,
                             char head[FL_DIGEST_HEX_SIZE], fl_arena *scratch, fl_error *err) {
	fl_event event;
	char self[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_line_read(hasher, line, length, head, scratch, &event, self, err);
	if (status >= 0)
		status = fl_session_apply(session, &event, err);
	if (status >= 0)
		memcpy(head, self, FL_DIGEST_HEX_SIZE);
	fl_arena_reset(scratch);
	return status;
}

/* V4: may these bytes be a line whose writing was cut short? */
static bool is_unfinished(const char *tail, size_t length) {
	static const char mark[] = "\tself=";
	const char *self = memmem(tail, length, mark, sizeof mark - 1);
	return !self || (size_t)(tail + length - self) <= sizeof mark - 1 + FL_DIGEST_HEX_SIZE - 1;
}

/* Takes line after line up to the last LF; *at ends up behind it. */
static fl_status replay_lines(fl_hasher *hasher, const char **at, const char *end, const char *path,
                              fl_session *session, char head[FL_DIGEST_HEX_SIZE], fl_error *err) {
	fl_arena scratch = {0};
	fl_error inner = {0};
	fl_status status = FL_OK;
	int number = 0;
	while (status >= 0 && *at < end) {
		const char *newline = memchr(*at, '\n', (size_t)(end - *at));
		if (!newline)
			break;
		number++;
		status = replay_line(hasher, *at, (size_t)(newline - *at), session, head, &scratch, &inner);
		*at = newline + 1;
	}
	fl_arena_free(&scratch);
	return status < 0 ? at_line(err, &inner, status, path, number) : FL_OK;
}

static fl_status replay(fl_hasher *hasher, const char *bytes, size_t length, const char *path, fl_session *session,
                        char head[FL_DIGEST_HEX_SIZE], replayed *out, fl_error *err) {
	const char *at = bytes, *end = bytes + length;
	first_head(head);
	fl_status status = replay_lines(hasher, &at, end, path, session, head, err);
	if (status < 0)
		return status;
	*out = (replayed){.good = (size_t)(at - bytes), .tail = at, .tail_length = (size_t)(end - at)};
	if (!is_unfinished(out->tail, out->tail_length))
		return fl_fail_at(err, FL_E_TAMPERED, (fl_place){.file = path, .line = session->last_sequence + 1},
		                  "there are bytes behind the digest of the last line");
	return FL_OK;
}

/* Reads the file at `path` into a fresh session. */
static fl_status read_all(const fl_io *io, const char *path, fl_hasher *hasher, fl_arena *arena, fl_session *session,
                          char head[FL_DIGEST_HEX_SIZE], replayed *out, fl_error *err) {
	char *bytes = NULL;
	size_t length = 0;
	fl_status status = fl_file_read(io, path, FL_JOURNAL_LIMIT, arena, &bytes, &length, err);
	if (status >= 0)
		status = replay(hasher, bytes, length, path, session, head, out, err);
	if (status >= 0 && session->last_sequence == 0)
		status = fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = path},
		                    "the journal has no complete line: nothing was committed, begin a new session");
	return status;
}

fl_status fl_journal_read(const fl_io *io, const char *path, fl_session *session, char head[FL_DIGEST_HEX_SIZE],
                          bool *torn, fl_error *err) {
	fl_hasher *hasher = NULL;
	fl_arena arena = {0};
	fl_session fresh = {0};
	replayed what = {0};
	char digest[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_hasher_new(&hasher, err);
	if (status >= 0)
		status = read_all(io, path, hasher, &arena, &fresh, digest, &what, err);
	if (status >= 0) {
		*session = fresh;
		memcpy(head, digest, FL_DIGEST_HEX_SIZE);
		if (torn)
			*torn = what.tail_length > 0;
	} else {
		fl_session_free(&fresh);
	}
	fl_arena_free(&arena);
	fl_hasher_free(hasher);
	return status;
}

fl_status fl_journal_replay(const char *bytes, size_t length, const char *name, fl_hasher *hasher, fl_session *session,
                            char head[FL_DIGEST_HEX_SIZE], fl_error *err) {
	fl_session fresh = {0};
	replayed what = {0};
	fl_status status = replay(hasher, bytes, length, name, &fresh, head, &what, err);
	if (status >= 0)
		*session = fresh;
	else
		fl_session_free(&fresh);
	return status;
}

/* The line of that number, with its LF; NULL where there are not so many. */
static const char *end_of_line(const char *bytes, size_t length, int number) {
	const char *at = bytes;
	for (int i = 0; i < number; i++) {
		const char *newline = memchr(at, '\n', (size_t)(bytes + length - at));
		if (!newline)
			return NULL;
		at = newline + 1;
	}
	return at;
}

/* Whole first, so that nothing behind the line is damaged either; then again up to the line, if there is more. */
static fl_status replay_to(const char *bytes, size_t length, const char *path, int sequence, fl_session *session,
                           char head[FL_DIGEST_HEX_SIZE], size_t *part, fl_error *err) {
	fl_hasher *hasher = NULL;
	replayed what = {0};
	fl_status status = fl_hasher_new(&hasher, err);
	if (status >= 0)
		status = replay(hasher, bytes, length, path, session, head, &what, err);
	const char *end = status >= 0 && sequence > 0 ? end_of_line(bytes, what.good, sequence) : NULL;
	if (status >= 0 && !end)
		status = fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.file = path}, "the journal has no line %d", sequence);
	*part = end ? (size_t)(end - bytes) : 0;
	if (status >= 0 && *part < what.good) {
		fl_session_free(session);
		status = replay(hasher, bytes, *part, path, session, head, &what, err);
	}
	fl_hasher_free(hasher);
	return status;
}

fl_status fl_journal_read_to(const fl_io *io, const char *path, int sequence, fl_session *session,
                             char head[FL_DIGEST_HEX_SIZE], fl_arena *arena, char **bytes, size_t *length,
                             fl_error *err) {
	fl_session fresh = {0};
	size_t whole = 0;
	fl_status status = fl_file_read(io, path, FL_JOURNAL_LIMIT, arena, bytes, &whole, err);
	if (status >= 0)
		status = replay_to(*bytes, whole, path, sequence, &fresh, head, length, err);
	if (status >= 0)
		*session = fresh;
	else
		fl_session_free(&fresh);
	return status;
}

/* ---- writing ---- */

fl_status fl_journal_commit(fl_journal *journal, fl_event *event, fl_error *err) {
	event->sequence = journal->session.last_sequence + 1;
	fl_event kept;
	fl_status status = fl_session_check(&journal->session, event, err);
	if (status >= 0)
		status = fl_session_prepare(&journal->session, event, &kept, err);
	if (status < 0)
		return status;
	fl_text line = {0};
	char self[FL_DIGEST_HEX_SIZE];
	status = fl_line_write(journal->hasher, event, journal->head, &line, self, err);
	if (status >= 0 && (size_t)journal->file.length + line.length > FL_JOURNAL_LIMIT)
		status = fl_fail(err, FL_E_RANGE, "the journal would grow beyond %zu MiB", FL_JOURNAL_LIMIT >> 20);
	if (status >= 0)
		status = fl_append_bytes(&journal->file, line.data, line.length, err);
	fl_text_free(&line);
	if (status < 0)
		return status;
	fl_session_take(&journal->session, &kept);
	memcpy(journal->head, self, FL_DIGEST_HEX_SIZE);
	return FL_OK;
}

fl_status fl_journal_foresee(const fl_journal *journal, fl_event *event, char head[FL_DIGEST_HEX_SIZE], fl_error *err) {
	event->sequence = journal->session.last_sequence + 1;
	fl_text line = {0};
	fl_status status = fl_session_check(&journal->session, event, err);
	if (status >= 0)
		status = fl_line_write(journal->hasher, event, journal->head, &line, head, err);
	fl_text_free(&line);
	return status;
}

fl_status fl_journal_create(fl_journal *journal, const fl_io *io, const char *path, const fl_event *open,
                            fl_error *err) {
	fl_journal fresh = {.file.fd = -1};
	first_head(fresh.head);
	fl_event event = *open;
	event.verb = FL_V_OPEN;
	fl_status status = fl_hasher_new(&fresh.hasher, err);
	if (status >= 0)
		status = fl_append_open(&fresh.file, io, path, true, 0, err);
	bool made = status >= 0;
	if (made)
		status = fl_journal_commit(&fresh, &event, err);
	if (status < 0) {
		fl_journal_close(&fresh);
		if (made)
			io->unlink(io->self, path); /* nothing was committed: a journal without a line is of no use */
		return status;
	}
	*journal = fresh;
	return FL_OK;
}

/* The bytes of a torn line as text: what is no printable ASCII becomes "?", and no more than can matter is kept. */
static void tail_text(const replayed *what, char *out, size_t size) {
	size_t length = what->tail_length < size - 1 ? what->tail_length : size - 1;
	for (size_t i = 0; i < length; i++) {
		unsigned char byte = (unsigned char)what->tail[i];
		out[i] = byte == '\t' || (byte >= 0x20 && byte < 0x7f) ? (char)byte : '?';
	}
	out[length] = '\0';
}

/* Cuts the unfinished line off and tells of it. */
static fl_status mend(fl_journal *journal, const replayed *what, fl_utc now, fl_error *err) {
	if (what->tail_length == 0)
		return FL_OK;
	char body[2048];
	tail_text(what, body, sizeof body);
	fl_status status = fl_append_cut(&journal->file, (int64_t)what->good, err);
	fl_event event = {.at = now, .verb = FL_V_TORN, .fields[FL_F_BODY] = body};
	return status < 0 ? status : fl_journal_commit(journal, &event, err);
}

fl_status fl_journal_resume(fl_journal *journal, const fl_io *io, const char *path, fl_utc now, fl_error *err) {
	fl_journal opened = {.file.fd = -1};
	fl_arena arena = {0};
	replayed what = {0};
	fl_status status = fl_hasher_new(&opened.hasher, err);
	if (status >= 0)
		status = fl_append_open(&opened.file, io, path, false, -1, err);
	if (status >= 0)
		status = read_all(io, path, opened.hasher, &arena, &opened.session, opened.head, &what, err);
	if (status >= 0)
		status = mend(&opened, &what, now, err);
	fl_arena_free(&arena);
	if (status < 0) {
		fl_journal_close(&opened);
		return status;
	}
	*journal = opened;
	return FL_OK;
}

void fl_journal_close(fl_journal *journal) {
	if (journal->file.io)
		fl_append_close(&journal->file);
	fl_hasher_free(journal->hasher);
	fl_session_free(&journal->session);
	*journal = (fl_journal){.file.fd = -1};
}
