/* intake.c - a bundle taken into the book, whole or not at all.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * One pass in one transaction: parts are checked and added as they come, the seal at the end decides. Whatever is
 * wrong anywhere undoes all of it.
 */
#include "bundle.h"
#include "lines.h"
#include "link.h"
#include "pack.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { BUFFER = 64 * 1024 };

typedef struct reader {
	int fd;
	char buffer[BUFFER];
	size_t at, filled;
	uint64_t done, total;
} reader;

typedef struct intake {
	fl_store *store;
	reader file;
	const char *path;
	fl_seal_so_far seal;
	bool accept_new;
	const fl_store_watch *watch;
	fl_intake *out;
	fl_error *err;
	/* the chain at hand */
	int64_t origin_row; /* 0 before the first */
	bool current;       /* the chain that this book writes itself */
	int64_t known;      /* entries of it that the book had before */
	int64_t sequence;   /* of the last entry read */
	char origin[FL_DIGEST_HEX_SIZE], previous[FL_DIGEST_HEX_SIZE];
	char name[96], prefix[16];
	/* the entry at hand */
	int64_t entry_row; /* 0: none, or its bytes came already */
	fl_carried carried;
} intake;

static fl_status refuse(intake *in, fl_status status, const char *what) {
	return fl_fail_at(in->err, status, (fl_place){.file = in->path},
	                  "the bundle is refused, nothing was taken in: part %" PRId64 ": %s", in->seal.parts, what);
}

/* ---- reading ---------------------------------------------------------------------------------------------------- */

static fl_status fill(intake *in) {
	reader *r = &in->file;
	const fl_io *io = fl_io_system();
	long got = io->read(io->self, r->fd, r->buffer, sizeof r->buffer);
	if (got < 0)
		return fl_fail_at(in->err, FL_E_IO, (fl_place){.file = in->path}, "the bundle can't be read");
	if (got == 0)
		return refuse(in, FL_E_TAMPERED, "the file ends too early");
	r->at = 0;
	r->filled = (size_t)got;
	r->done += (uint64_t)got;
	if (in->watch && !in->watch->go_on(in->watch->self, r->done, r->total))
		return fl_fail(in->err, FL_E_STATE, "stopped on request; nothing was taken in");
	return FL_OK;
}

static fl_status read_bytes(intake *in, char *out, size_t length) {
	reader *r = &in->file;
	while (length > 0) {
		if (r->at == r->filled) {
			fl_status status = fill(in);
			if (status < 0)
				return status;
		}
		size_t take = r->filled - r->at < length ? r->filled - r->at : length;
		memcpy(out, r->buffer + r->at, take);
		r->at += take;
		out += take;
		length -= take;
	}
	return FL_OK;
}

static fl_status read_line(intake *in, char line[BUNDLE_LINE]) {
	for (size_t i = 0; i < BUNDLE_LINE; i++) {
		fl_status status = read_bytes(in, line + i, 1);
		if (status < 0)
			return status;
		if (line[i] == '\n') {
			line[i] = '\0';
			return FL_OK;
		}
	}
	return refuse(in, FL_E_TAMPERED, "a line is too long: this is no bundle, or a damaged one");
}

static bool at_end(intake *in) {
	reader *r = &in->file;
	char more;
	return r->at == r->filled && fl_io_system()->read(NULL, r->fd, &more, 1) == 0;
}

/* ---- chains ----------------------------------------------------------------------------------------------------- */

static fl_status know_origin(intake *in, const fl_founding_text *founding, bool *known) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(in->store, SQL_ORIGIN, &statement, in->err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "t", in->origin);
	status = fl_sql_step(in->store, statement, known, in->err);
	in->origin_row = *known ? sqlite3_column_int64(statement, 0) : 0;
	in->current = *known && in->origin_row == in->store->own;
	sqlite3_reset(statement);
	snprintf(in->name, sizeof in->name, "%s", founding->name);
	snprintf(in->prefix, sizeof in->prefix, "%s", founding->prefix);
	return status;
}

static fl_status add_origin(intake *in, const fl_founding_text *founding) {
	if (!in->accept_new)
		return fl_fail_at(
		    in->err, FL_ASK, (fl_place){.file = in->path},
		    "the chain of %s, %.16s, is new to this book; nothing was taken in: compare these digits with "
		    "what the ship says, then accept it",
		    founding->name, in->origin);
	fl_status status = fl_link_found(in->store, founding, false, in->err);
	in->origin_row = sqlite3_last_insert_rowid(in->store->db);
	in->out->origins_new++;
	return status;
}

static fl_status check_founding_form(intake *in, const char *bytes, size_t length, const fl_founding_text *founding) {
	fl_text again = {0};
	fl_status status = fl_founding_write(founding, &again, in->err);
	bool same = status >= 0 && again.length == length && memcmp(again.data, bytes, length) == 0;
	fl_text_free(&again);
	return same || status < 0 ? status
	                          : refuse(in, FL_E_TAMPERED, "a founding is not written as this program writes it");
}

static fl_status take_origin(intake *in, const char *bytes, size_t length, const char *digest) {
	fl_arena arena = {0};
	fl_founding_text founding;
	bool known = false;
	fl_head head = {0};
	snprintf(in->origin, sizeof in->origin, "%s", digest);
	fl_status status = fl_founding_read(bytes, length, &arena, &founding, in->err);
	if (status >= 0)
		status = check_founding_form(in, bytes, length, &founding);
	if (status >= 0)
		status = know_origin(in, &founding, &known);
	if (status >= 0 && !*in->out->name) {
		snprintf(in->out->name, sizeof in->out->name, "%s", founding.name);
		snprintf(in->out->origin, sizeof in->out->origin, "%s", digest);
	}
	if (status >= 0 && !known)
		status = add_origin(in, &founding);
	if (status == FL_OK)
		status = fl_link_head(in->store, in->origin_row, in->origin, &head, in->err);
	in->known = head.sequence;
	in->sequence = 0;
	in->entry_row = 0;
	snprintf(in->previous, sizeof in->previous, "%s", digest);
	fl_arena_free(&arena);
	return status;
}

/* ---- entries ---------------------------------------------------------------------------------------------------- */

static fl_status check_amended(intake *in, const fl_record *r) {
	fl_record_list found = {0};
	bool one = false;
	if (!*r->replaces)
		return FL_OK;
	fl_status status = fl_store_get(in->store, r->replaces, &found, NULL);
	if (status >= 0)
		status = fl_link_is_one_book(in->store, in->origin, found.records[0].origin, &one, in->err);
	if (status == FL_E_NOT_FOUND || (status >= 0 && !one))
		status = refuse(in, FL_E_TAMPERED, "an amendment names a record that is not in its own ship's book before it");
	fl_record_list_free(&found);
	return status;
}

/* What a book would never have let in. */
static fl_status check_new(intake *in, const fl_entry *entry) {
	size_t prefix = strlen(in->prefix);
	const char *number = entry->head.kind == ENTRY_SESSION ? entry->record.number : entry->paper.number;
	if (in->current)
		return refuse(in, FL_E_STATE,
		              "it knows more of this book's own chain than the book does: the book was put back from an older "
		              "copy without saying so; restore it as a restored book");
	if (entry->head.kind == ENTRY_PAPER) {
		fl_record_list found = {0};
		fl_status status = fl_store_get(in->store, entry->paper.record, &found, NULL);
		fl_record_list_free(&found);
		return status < 0 ? refuse(in, FL_E_TAMPERED, "a paper belongs to a record that is not there") : FL_OK;
	}
	if (strncmp(number, in->prefix, prefix) != 0 || number[prefix] != '-' || entry->record.day == FL_NO_DAY ||
	    !*entry->record.tag)
		return refuse(in, FL_E_TAMPERED,
		              "a record's number, day or tag can't be from the book that it says it is from");
	int64_t used = 0;
	fl_status status = fl_sql_number(in->store, SQL_NUMBER_USED, &used, 0, in->err, "it", in->origin_row, number);
	if (status >= 0 && used)
		return refuse(in, FL_E_TAMPERED, "a number is used twice");
	if (status >= 0 && *entry->record.replaces)
		status = fl_sql_number(in->store, SQL_REPLACED, &used, 0, in->err, "t", entry->record.replaces);
	if (status >= 0 && used)
		return refuse(in, FL_E_TAMPERED, "a record is replaced twice");
	return status < 0 ? status : check_amended(in, &entry->record);
}

static fl_status fork(intake *in, const char *here, const char *there) {
	return fl_fail_at(in->err, FL_E_TAMPERED, (fl_place){.file = in->path},
	                  "the bundle is refused, nothing was taken in: entry %" PRId64
	                  " of %s is %.16s here and %.16s in the bundle: one was forged, or the ship's book was copied and "
	                  "both copies went on",
	                  in->sequence, in->name, here, there);
}

static fl_status meet_known(intake *in, const char *digest) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(in->store, SQL_LINK, &statement, in->err);
	if (status < 0)
		return status;
	fl_sql_bind(statement, "ii", in->origin_row, in->sequence);
	bool row = false;
	status = fl_sql_step(in->store, statement, &row, in->err);
	if (status < 0)
		return status;
	const char *here = row ? fl_sql_column(statement, 0) : "missing";
	if (strcmp(here, digest) != 0)
		status = fork(in, here, digest);
	in->entry_row = row ? sqlite3_column_int64(statement, 1) : 0;
	in->out->entries_known++;
	sqlite3_reset(statement);
	return status;
}

static fl_status add_new(intake *in, const fl_entry *entry, const char *bytes, size_t length, const char *digest) {
	fl_text facts = {0};
	fl_status status = check_new(in, entry);
	fl_text_append(&facts, bytes, length);
	if (status >= 0 && facts.failed)
		status = fl_sql_memory(in->err);
	if (status >= 0)
		status = fl_link_append(in->store, in->origin_row, entry, digest, &facts, NULL, &in->entry_row, in->err);
	fl_text_free(&facts);
	in->out->entries_new++;
	return status;
}

static fl_status take_entry(intake *in, const char *bytes, size_t length, const char *digest) {
	fl_arena arena = {0};
	fl_entry entry;
	if (!in->origin_row)
		return refuse(in, FL_E_TAMPERED, "an entry stands before the founding of a chain");
	fl_status status = fl_facts_read(bytes, length, &arena, &entry, in->err);
	if (status >= 0)
		status = fl_facts_check_canonical(bytes, length, &entry, in->err);
	in->sequence++;
	in->entry_row = 0;
	if (status >= 0 && (strcmp(entry.head.origin, in->origin) != 0 || entry.head.sequence != in->sequence ||
	                    strcmp(entry.head.previous, in->previous) != 0))
		status = refuse(in, FL_E_TAMPERED, "an entry is not chained to the one before it");
	if (status >= 0)
		status = in->sequence <= in->known ? meet_known(in, digest) : add_new(in, &entry, bytes, length, digest);
	in->carried = entry.head.carried;
	snprintf(in->previous, sizeof in->previous, "%s", digest);
	fl_arena_free(&arena);
	return status;
}

static fl_status take_bytes(intake *in, const char *bytes, size_t length) {
	fl_arena arena = {0};
	char *unpacked = NULL;
	int64_t have = 0;
	if (!in->entry_row)
		return refuse(in, FL_E_TAMPERED, "a journal or paper stands where no entry carries it");
	fl_status status = fl_unpack(in->store->hasher, &in->carried, bytes, length, &arena, &unpacked, in->err);
	fl_arena_free(&arena);
	if (status >= 0)
		status = fl_sql_number(in->store, SQL_HAS_BYTES, &have, 0, in->err, "i", in->entry_row);
	if (status >= 0 && !have) {
		status = fl_sql_run(in->store, SQL_ADD_BYTES, in->err, "iib", in->entry_row, (int64_t)in->carried.size, bytes,
		                    length);
		in->out->bytes_new++;
	}
	in->entry_row = 0;
	return status;
}

/* ---- parts ------------------------------------------------------------------------------------------------------ */

/* "part \t kind \t length \t digest" */
static bool split_part(const char *line, char kind[8], size_t *length, char digest[FL_DIGEST_HEX_SIZE]) {
	unsigned long long size = 0;
	int end = 0;
	if (sscanf(line, "part\t%7[a-z]\t%12llu\t%64[0-9a-f]%n", kind, &size, digest, &end) != 3 || line[end] != '\0' ||
	    !fl_is_digest(digest))
		return false;
	*length = (size_t)size;
	return size > 0 && size <= CARRIED_LIMIT;
}

static fl_status take_part(intake *in, const char *line) {
	char kind[8], digest[FL_DIGEST_HEX_SIZE], found[FL_DIGEST_HEX_SIZE], feed = 0;
	size_t length = 0;
	if (!split_part(line, kind, &length, digest))
		return refuse(in, FL_E_TAMPERED, "its line is damaged");
	bool carried = strcmp(kind, "bytes") == 0;
	if (!carried && length > FACTS_LIMIT)
		return refuse(in, FL_E_TAMPERED, "it is larger than an entry can be");
	char *bytes = malloc(length + 1);
	if (!bytes)
		return fl_sql_memory(in->err);
	bytes[length] = '\0';
	fl_status status = read_bytes(in, bytes, length);
	if (status >= 0)
		status = read_bytes(in, &feed, 1);
	if (status >= 0)
		status = fl_seal_digest(in->store->hasher, bytes, length, found, in->err);
	if (status >= 0 && (feed != '\n' || strcmp(found, digest) != 0))
		status = refuse(in, FL_E_TAMPERED, "its bytes do not fit its digest: the file is damaged or was changed");
	if (status >= 0)
		status = carried                      ? take_bytes(in, bytes, length)
		         : strcmp(kind, "entry") == 0 ? take_entry(in, bytes, length, digest)
		         : strcmp(kind, "origin") == 0
		             ? take_origin(in, bytes, length, digest)
		             : refuse(in, FL_E_TAMPERED, "its kind is unknown: written by a later program, or changed");
	free(bytes);
	return status;
}

static fl_status check_end(intake *in, const char *line) {
	char expected[BUNDLE_LINE];
	snprintf(expected, sizeof expected, "end\t%" PRId64 "\t%s", in->seal.parts, in->seal.seal);
	if (strcmp(line, expected) != 0)
		return refuse(in, FL_E_TAMPERED, "the seal at the end does not fit: parts were taken out, added or exchanged");
	return at_end(in) ? FL_OK : refuse(in, FL_E_TAMPERED, "something stands behind the end");
}

static fl_status take_parts(intake *in) {
	char line[BUNDLE_LINE];
	fl_status status = read_line(in, line);
	if (status >= 0 && strcmp(line, BUNDLE_FIRST) != 0)
		return refuse(in, FL_E_VALUE, "this file is no bundle, or one of a later program");
	if (status >= 0)
		status = fl_bundle_begin(in->store->hasher, &in->seal, in->err);
	while (status == FL_OK) {
		status = read_line(in, line);
		if (status < 0)
			break;
		if (strncmp(line, "end\t", 4) == 0)
			return check_end(in, line);
		status = fl_bundle_take(in->store->hasher, &in->seal, line, in->err);
		if (status >= 0)
			status = take_part(in, line);
	}
	return status;
}

fl_status fl_store_take_in(fl_store *store, const char *path, bool accept_new, const fl_store_watch *watch,
                           fl_intake *out, fl_error *err) {
	const fl_io *io = fl_io_system();
	intake *in = calloc(1, sizeof *in);
	*out = (fl_intake){0};
	if (!in)
		return fl_sql_memory(err);
	*in = (intake){.store = store, .path = path, .accept_new = accept_new, .watch = watch, .out = out, .err = err};
	in->file.fd = io->open(io->self, path, 0, 0);
	fl_status status = in->file.fd < 0
	                       ? fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.file = path}, "the bundle can't be opened")
	                       : fl_sql_run(store, SQL_BEGIN, err, "");
	if (in->file.fd >= 0 && status >= 0) {
		in->file.total = (uint64_t)io->size(io->self, in->file.fd);
		status = take_parts(in);
		if (status == FL_OK)
			status = fl_sql_run(store, SQL_COMMIT, err, "");
	}
	fl_sql_rollback(store);
	if (in->file.fd >= 0)
		io->close(io->self, in->file.fd);
	if (status != FL_OK)
		out->origins_new = out->entries_new = out->entries_known = out->bytes_new = 0;
	free(in);
	return status;
}
