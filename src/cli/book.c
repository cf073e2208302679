/* book.c - the record book of HOME, and what goes into it by itself.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "book.h"

#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/file.h>
#include <sys/random.h>
#include <unistd.h>

#define PATIENCE_MS 10000
#define PAPER_LIMIT ((size_t)64 << 20)

/* ---- where it is ------------------------------------------------------------------------------------------------- */

fl_status fl_book_path(const fl_cli *cli, char path[FL_PATH_SIZE], fl_error *err) {
	return fl_place_join(path, cli->home, "book/records.flb", err);
}

fl_status fl_book_open(const fl_cli *cli, fl_store_mode mode, fl_store **out, fl_error *err) {
	char path[FL_PATH_SIZE];
	fl_error local = {0};
	fl_status status = fl_book_path(cli, path, err);
	if (status < 0)
		return status;
	status = fl_store_open(path, mode, PATIENCE_MS, out, &local);
	if (status == FL_E_NOT_FOUND)
		return fl_fail(err, status,
		               "there is no record book in %s yet: it begins with the first session that is closed, or with "
		               "foundleft book found NAME",
		               path);
	if (status < 0 && err)
		*err = local;
	return status;
}

/* ---- founding ---------------------------------------------------------------------------------------------------- */

static char capital(char c) {
	return c >= 'a' && c <= 'z' ? (char)(c - 'a' + 'A') : c;
}

static bool is_capital(char c) {
	return c >= 'A' && c <= 'Z';
}

/* "Quillhaven (invented), Tallmere Yard" -> "Quillhaven", "QUI"; "Tallmere Yard" -> "TY". */
void fl_book_names(const char *site, char name[96], char prefix[13]) {
	size_t length = strcspn(site, "(,;"), words = 0, used = 0;
	while (length > 0 && site[length - 1] == ' ')
		length--;
	while (length > 90 || (length > 0 && ((unsigned char)site[length] & 0xC0) == 0x80))
		length--; /* whole characters */
	snprintf(name, 96, "%.*s", (int)length, length ? site : "");
	if (length == 0)
		snprintf(name, 96, "record book");
	for (const char *c = name; *c && used < 6; c++)
		if (is_capital(capital(*c)) && (c == name || c[-1] == ' ')) {
			prefix[used++] = capital(*c);
			words++;
		}
	if (words == 1)
		for (const char *c = name + 1; *c && used < 3; c++)
			if (is_capital(capital(*c)))
				prefix[used++] = capital(*c);
	prefix[used] = '\0';
	if (used == 0)
		memcpy(prefix, "FL", 3);
}

fl_status fl_book_founding(const char *name, const char *prefix, fl_founding *out, fl_error *err) {
	*out = (fl_founding){.name = name, .prefix = prefix, .at = fl_cli_now()};
	if (getrandom(out->salt, sizeof out->salt, 0) != (ssize_t)sizeof out->salt)
		return fl_fail(err, FL_E_IO, "the system gives no random bytes to found the book with");
	return FL_OK;
}

static fl_status open_or_found(const fl_cli *cli, const char *site, fl_store **out, fl_error *err) {
	char path[FL_PATH_SIZE], folder[FL_PATH_SIZE], name[96], prefix[13];
	fl_founding founding;
	fl_error local = {0};
	fl_status status = fl_book_path(cli, path, err);
	if (status < 0)
		return status;
	status = fl_store_open(path, FL_STORE_WRITE, PATIENCE_MS, out, &local);
	if (status != FL_E_NOT_FOUND) {
		if (status < 0 && err)
			*err = local;
		return status;
	}
	fl_book_names(site, name, prefix);
	status = fl_place_join(folder, cli->home, "book", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, folder, err);
	if (status >= 0)
		status = fl_book_founding(name, prefix, &founding, err);
	if (status >= 0)
		status = fl_store_found(path, &founding, out, err);
	if (status >= 0)
		fprintf(cli->out, "A record book begins: %s, for %s, numbers %s-...\n", path, name, prefix);
	return status;
}

/* ---- one program at a time puts sessions in -----------------------------------------------------------------------
 */

/* So that two programs that have the same journal at hand do not both find it missing. -1 where it can't be had. */
static fl_status take_turn(const fl_cli *cli, int *fd, fl_error *err) {
	char folder[FL_PATH_SIZE], path[FL_PATH_SIZE];
	fl_status status = fl_place_join(folder, cli->home, "book", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, folder, err);
	if (status >= 0)
		status = fl_place_join(path, folder, "turn", err);
	if (status < 0)
		return status;
	*fd = open(path, O_CREAT | O_RDWR | O_CLOEXEC, 0600);
	if (*fd < 0 || flock(*fd, LOCK_EX) != 0)
		return fl_io_fail(err, "locking", path, errno);
	return FL_OK;
}

static void end_turn(int fd) {
	if (fd >= 0)
		close(fd);
}

/* ---- a session ----------------------------------------------------------------------------------------------------
 */

/* A journal and the record that it gives. */
typedef struct material {
	fl_arena arena;
	char *bytes;
	size_t length;
	fl_record record;
} material;

/* What stands behind the last line feed was never committed. */
static size_t committed(const char *bytes, size_t length) {
	while (length > 0 && bytes[length - 1] != '\n')
		length--;
	return length;
}

static fl_status read_material(const fl_cli *cli, const char *path, material *out, fl_error *err) {
	fl_recomputer *recomputer = NULL;
	*out = (material){0};
	fl_status status = fl_file_read(cli->io, path, FL_JOURNAL_LIMIT, &out->arena, &out->bytes, &out->length, err);
	if (status >= 0)
		status = fl_recomputer_new(&recomputer, err);
	if (status >= 0) {
		out->length = committed(out->bytes, out->length);
		status = fl_recomputer_record(recomputer, out->bytes, out->length, path, &out->arena, &out->record, err);
	}
	fl_recomputer_free(recomputer);
	return status;
}

/* Is the one journal the beginning of the other? Then they are of one session: every line names the one before. */
static fl_status is_of_session(fl_store *store, const material *m, const fl_record *kept, bool *yes, fl_error *err) {
	char *bytes = NULL;
	size_t length = 0;
	fl_arena arena = {0};
	*yes = false;
	if (kept->day != m->record.day || kept->closed_at != m->record.closed_at)
		return FL_OK;
	fl_error local = {0};
	fl_status status = fl_store_bytes(store, kept->digest, &arena, &bytes, &length, &local);
	if (status >= 0)
		*yes = memcmp(bytes, m->bytes, length < m->length ? length : m->length) == 0;
	else if (status != FL_E_NOT_FOUND && err)
		*err = local;
	fl_arena_free(&arena);
	return status == FL_E_NOT_FOUND ? FL_OK : status;
}

static fl_status match_history(fl_store *store, const material *m, int64_t instrument, fl_record_list *list,
                               const fl_record **out, fl_error *err) {
	fl_status status = fl_store_history(store, instrument, true, list, err);
	for (size_t i = 0; status >= 0 && i < list->count; i++) {
		bool yes;
		status = is_of_session(store, m, &list->records[i], &yes, err);
		if (status >= 0 && yes)
			*out = &list->records[i]; /* the latest: amendments come after what they replace */
	}
	return status;
}

/* The last record of this session in the book; *out NULL if there is none. It lives in the list. */
static fl_status find_session(fl_store *store, const material *m, fl_record_list *list, const fl_record **out,
                              fl_error *err) {
	fl_arena arena = {0};
	fl_known_instrument *known;
	size_t count;
	*out = NULL;
	fl_status status = fl_store_instruments(store, m->record.tag, &arena, &known, &count, err);
	for (size_t i = 0; status >= 0 && i < count && !*out; i++)
		if (strcmp(known[i].serial, m->record.serial) == 0 && strcmp(known[i].site, m->record.site) == 0)
			status = match_history(store, m, known[i].id, list, out, err);
	fl_arena_free(&arena);
	return status;
}

/* Adds it; what it replaces stands in the record already. */
static fl_status put_in(fl_store *store, material *m, fl_book_entry *out, fl_error *err) {
	int year, month, day;
	fl_day_to_civil(m->record.day, &year, &month, &day);
	fl_status status = fl_store_reserve(store, year, fl_cli_now(), m->record.tag, out->number, err);
	if (status < 0)
		return status;
	m->record.number = out->number;
	m->record.kept_at = fl_cli_now();
	m->record.program = FOUNDLEFT_VERSION;
	status = fl_store_add(store, &m->record, m->bytes, m->length, err);
	if (status >= 0) {
		out->added = true;
		snprintf(out->digest, sizeof out->digest, "%s", m->record.digest);
	}
	return status;
}

static fl_status find_or_add(const fl_cli *cli, material *m, fl_book_entry *out, fl_error *err) {
	fl_store *store = NULL;
	fl_record_list list = {0};
	const fl_record *kept = NULL;
	fl_status status = open_or_found(cli, m->record.site, &store, err);
	if (status >= 0)
		status = find_session(store, m, &list, &kept, err);
	if (status >= 0 && kept) {
		snprintf(out->number, sizeof out->number, "%s", kept->number);
		snprintf(out->digest, sizeof out->digest, "%s", kept->digest);
	} else if (status >= 0) {
		status = put_in(store, m, out, err);
	}
	fl_record_list_free(&list);
	fl_store_close(store);
	return status;
}

fl_status fl_book_add(const fl_cli *cli, const char *journal, fl_book_entry *out, fl_error *err) {
	material m;
	int turn = -1;
	*out = (fl_book_entry){0};
	fl_status status = read_material(cli, journal, &m, err);
	if (status >= 0)
		status = take_turn(cli, &turn, err);
	if (status >= 0)
		status = find_or_add(cli, &m, out, err);
	end_turn(turn);
	fl_arena_free(&m.arena);
	return status;
}

/* ---- by itself -----------------------------------------------------------------------------------------------------
 */

/* Does the journal lie in HOME/sessions? */
static bool is_at_home(const fl_cli *cli, const char *journal) {
	char folder[FL_PATH_SIZE], parent[FL_PATH_SIZE];
	const char *slash = strrchr(journal, '/');
	if (fl_place_join(folder, cli->home, "sessions", NULL) < 0)
		return false;
	snprintf(parent, sizeof parent, "%.*s", slash ? (int)(slash - journal) : 1, slash ? journal : ".");
	char *a = realpath(folder, NULL), *b = realpath(parent, NULL);
	bool same = a && b && strcmp(a, b) == 0;
	free(a);
	free(b);
	return same;
}

static void tell_failure(const fl_cli *cli, const char *what, const char *journal, const fl_error *err) {
	char line[1400];
	fflush(cli->out);
	fprintf(cli->err,
	        "foundleft: %s is safe, but the record book has not got it: %s\nfoundleft: put it in later with: foundleft "
	        "book add %s\n",
	        what, fl_error_line(err, line, sizeof line), journal);
}

void fl_book_after_close(const fl_cli *cli, const char *journal) {
	fl_book_entry entry;
	fl_error err = {0};
	if (!is_at_home(cli, journal))
		return;
	if (fl_book_add(cli, journal, &entry, &err) < 0)
		tell_failure(cli, "the session", journal, &err);
	else
		fprintf(cli->out, "In the record book as %s%s\n", entry.number, entry.added ? "" : " already");
}

/* ---- certificates ---------------------------------------------------------------------------------------------------
 */

/* The certificate's own line in the journal. */
typedef struct issue_seen {
	bool amends;
	char reason[1000];
} issue_seen;

static fl_status see_issue(const fl_cli *cli, const char *journal, const char *number, issue_seen *out, fl_error *err) {
	fl_session session = {0};
	char head[FL_DIGEST_HEX_SIZE];
	bool torn;
	*out = (issue_seen){0};
	fl_status status = fl_journal_read(cli->io, journal, &session, head, &torn, err);
	if (status < 0)
		return status;
	const fl_session_issue *issue = fl_session_issue_of(&session, number);
	if (issue && issue->amends) {
		out->amends = true;
		snprintf(out->reason, sizeof out->reason, "certificate %.100s replaces %.100s: %.700s", issue->number,
		         issue->amends, issue->reason ? issue->reason : "");
	}
	fl_session_free(&session);
	return FL_OK;
}

/* The record of the session that this certificate goes with, *out->digest; "" where the session is not kept here. */
static fl_status record_for(const fl_cli *cli, fl_store *store, material *m, const issue_seen *issue, bool is_new,
                            const char *journal, fl_book_entry *out, fl_error *err) {
	fl_record_list list = {0};
	const fl_record *kept = NULL;
	fl_status status = find_session(store, m, &list, &kept, err);
	if (status >= 0 && kept && issue->amends && is_new) {
		m->record.replaces = kept->digest;
		m->record.replaces_number = kept->number;
		m->record.reason = issue->reason;
		status = put_in(store, m, out, err);
	} else if (status >= 0 && kept) {
		snprintf(out->number, sizeof out->number, "%s", kept->number);
		snprintf(out->digest, sizeof out->digest, "%s", kept->digest);
	} else if (status >= 0 && is_at_home(cli, journal)) {
		status = put_in(store, m, out, err);
	}
	fl_record_list_free(&list);
	return status;
}

/* Has a certificate of this file name been put beside one of the session's records? *same: with the same bytes. */
static fl_status seen_before(fl_store *store, const material *m, const char *file, const char *digest, bool *named,
                             bool *same, fl_error *err) {
	fl_record_list list = {0};
	fl_arena arena = {0};
	const fl_record *kept = NULL;
	*named = *same = false;
	fl_status status = find_session(store, m, &list, &kept, err);
	for (size_t i = 0; status >= 0 && kept && i < list.count; i++) {
		fl_paper *papers;
		size_t count;
		status = fl_store_papers(store, list.records[i].digest, &arena, &papers, &count, err);
		for (size_t p = 0; status >= 0 && p < count; p++) {
			*named = *named || strcmp(papers[p].file, file) == 0;
			*same = *same || strcmp(papers[p].paper_digest, digest) == 0;
		}
	}
	fl_arena_free(&arena);
	fl_record_list_free(&list);
	return status;
}

static fl_status put_paper(fl_store *store, const fl_book_entry *record, const char *file, const char *stage,
                           const char *bytes, size_t length, fl_error *err) {
	fl_paper paper = {
	    .record = record->digest, .number = record->number, .stage = stage, .file = file, .kept_at = fl_cli_now()};
	return fl_store_add_paper(store, &paper, bytes, length, err);
}

static fl_status keep_certificate(const fl_cli *cli, const char *journal, const char *number, const char *stage,
                                  const char *bytes, size_t length, fl_book_entry *out, fl_error *err) {
	material m;
	issue_seen issue;
	fl_store *store = NULL;
	fl_hasher *hasher = NULL;
	char digest[FL_DIGEST_HEX_SIZE], file[200];
	bool named = false, same = false;
	snprintf(file, sizeof file, "%.190s.pdf", number);
	fl_status status = read_material(cli, journal, &m, err);
	if (status >= 0)
		status = see_issue(cli, journal, number, &issue, err);
	if (status >= 0)
		status = fl_hasher_new(&hasher, err);
	if (status >= 0)
		status = fl_seal_digest(hasher, bytes, length, digest, err);
	if (status >= 0)
		status = is_at_home(cli, journal) ? open_or_found(cli, m.record.site, &store, err)
		                                  : fl_book_open(cli, FL_STORE_WRITE, &store, err);
	if (status >= 0)
		status = seen_before(store, &m, file, digest, &named, &same, err);
	if (status >= 0 && !same)
		status = record_for(cli, store, &m, &issue, !named, journal, out, err);
	if (status >= 0 && !same && *out->digest)
		status = put_paper(store, out, file, stage, bytes, length, err);
	fl_hasher_free(hasher);
	fl_store_close(store);
	fl_arena_free(&m.arena);
	return status;
}

void fl_book_after_certificate(const fl_cli *cli, const char *journal, const char *number, const char *stage,
                               const char *pdf) {
	fl_arena arena = {0};
	fl_error err = {0};
	fl_book_entry entry = {0};
	char *bytes, book[FL_PATH_SIZE];
	size_t length;
	int turn = -1;
	if (!is_at_home(cli, journal) && (fl_book_path(cli, book, NULL) < 0 || access(book, F_OK) != 0))
		return;
	fl_status status = fl_file_read(cli->io, pdf, PAPER_LIMIT, &arena, &bytes, &length, &err);
	if (status >= 0)
		status = take_turn(cli, &turn, &err);
	if (status >= 0)
		status = keep_certificate(cli, journal, number, stage, bytes, length, &entry, &err);
	end_turn(turn);
	fl_arena_free(&arena);
	if (status < 0)
		tell_failure(cli, "the certificate", journal, &err);
	else if (*entry.digest)
		fprintf(cli->out, "in the record book with %s\n", entry.number);
}

/* ---- finding an instrument ------------------------------------------------------------------------------------------
 */

fl_status fl_book_instrument(fl_store *store, const char *tag, const char *serial, fl_arena *arena,
                             fl_known_instrument *out, fl_error *err) {
	fl_known_instrument *known;
	size_t count, found = 0;
	fl_text names = {0};
	fl_status status = fl_store_instruments(store, tag, arena, &known, &count, err);
	for (size_t i = 0; status >= 0 && i < count; i++) {
		if (serial && strcmp(known[i].serial, serial) != 0)
			continue;
		*out = known[i];
		fl_text_printf(&names, "%s%s (%.40s)", found++ ? ", " : "", known[i].serial, known[i].site);
	}
	if (status >= 0 && found == 0)
		status = fl_fail(err, FL_E_NOT_FOUND, "the record book has no instrument `%s`%s%s; foundleft due lists all",
		                 tag, serial ? " with serial " : "", serial ? serial : "");
	if (status >= 0 && found > 1)
		status = fl_fail(err, FL_E_USAGE, "several instruments go by %s: put the serial behind the tag: %.300s", tag,
		                 names.data ? names.data : "");
	fl_text_free(&names);
	return status;
}
