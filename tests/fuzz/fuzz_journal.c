/* fuzz_journal.c - the reader of journals against any bytes: a status always, a crash never.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The digests would stop nearly every input at its first line. So the first byte chooses: odd, the bytes are the file
 * as it is; even, each line is taken as the body of a line and gets its right prev and self, so that what lies behind
 * the chain is reached: fields, escapes, numbers, the order of work.
 */
#include "foundleft/journal.h"

#include <errno.h>
#include <string.h>

/* A file in memory: just the calls that reading makes. */
typedef struct memory_file {
	const char *bytes;
	size_t length, at;
} memory_file;

static int memory_open(void *self, const char *path, int flags, unsigned mode) {
	(void)path;
	(void)flags;
	(void)mode;
	((memory_file *)self)->at = 0;
	return 3;
}

static long memory_read(void *self, int fd, void *bytes, size_t size) {
	memory_file *file = self;
	(void)fd;
	size_t rest = file->length - file->at, part = size < rest ? size : rest;
	memcpy(bytes, file->bytes + file->at, part);
	file->at += part;
	return (long)part;
}

static int memory_close(void *self, int fd) {
	(void)self;
	(void)fd;
	return 0;
}

/* Adds body[length] with its digests to the journal. */
static void add_sealed(fl_hasher *hasher, const char *body, size_t length, fl_text *journal,
                       char head[FL_DIGEST_HEX_SIZE]) {
	size_t start = journal->length;
	fl_text_append(journal, body, length);
	fl_text_printf(journal, "\tprev=%s", head);
	if (journal->failed || fl_seal_digest(hasher, journal->data + start, journal->length - start, head, NULL) < 0)
		return;
	fl_text_printf(journal, "\tself=%s\n", head);
}

static void seal_lines(const char *bytes, size_t length, fl_text *journal) {
	fl_hasher *hasher = NULL;
	char head[FL_DIGEST_HEX_SIZE] = "0000000000000000000000000000000000000000000000000000000000000000";
	if (fl_hasher_new(&hasher, NULL) < 0)
		return;
	while (length > 0) {
		const char *newline = memchr(bytes, '\n', length);
		size_t line = newline ? (size_t)(newline - bytes) : length;
		add_sealed(hasher, bytes, line, journal, head);
		line += newline != NULL;
		bytes += line;
		length -= line;
	}
	fl_hasher_free(hasher);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
	fl_text journal = {0};
	if (size == 0)
		return 0;
	if (data[0] & 1)
		fl_text_append(&journal, (const char *)data + 1, size - 1);
	else
		seal_lines((const char *)data + 1, size - 1, &journal);
	memory_file file = {.bytes = journal.data ? journal.data : "", .length = journal.length};
	fl_io io = {.open = memory_open, .read = memory_read, .close = memory_close, .self = &file};
	fl_session session = {0};
	char head[FL_DIGEST_HEX_SIZE];
	bool torn;
	fl_error err = {0};
	if (fl_journal_read(&io, "fuzz.flj", &session, head, &torn, &err) >= 0)
		fl_session_free(&session);
	fl_text_free(&journal);
	return 0;
}
