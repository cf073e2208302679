/* derive.c - journal -> certificate, as it was issued; and certificate -> its journal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "derive.h"

#include <stdlib.h>
#include <string.h>

fl_issue fl_derive_issue(const fl_session *session, const fl_session_issue *entry, const char *digest) {
	const fl_setting *offset = fl_session_setting(session, "utc-offset");
	return (fl_issue){.number = entry->number,
	                  .issued_on = entry->day,
	                  /* Midnight of the day of issue: no clock stands in the bytes. */
	                  .issued_at = (fl_utc)entry->day * 86400,
	                  .utc_offset_min = offset ? (int)offset->value : 0,
	                  .issuer = entry->issuer,
	                  .issuer_address = entry->address,
	                  .authorised_by = entry->authorised_by,
	                  .journal_digest = digest,
	                  .journal_name = entry->journal_name,
	                  .program_version = entry->program,
	                  .amends = entry->amends,
	                  .amends_reason = entry->reason};
}

fl_status fl_derive_sheet(const fl_case *one, const fl_issue *issue, fl_sheet **out, fl_error *err) {
	fl_issue whole = *issue;
	fl_cause causes[FL_RUN_KINDS] = {0};
	fl_status status = one->procedure.opinions_on_certificate ? fl_case_causes(one, causes, err) : FL_OK;
	whole.causes = causes;
	if (status >= 0)
		status = fl_certificate_content(&one->session, &one->procedure, &one->stock, &one->result, &whole, out, err);
	for (int run = 0; run < FL_RUN_KINDS; run++)
		fl_cause_free(&causes[run]);
	return status;
}

fl_status fl_derive_pages(const fl_cli *cli, fl_derived *out, fl_error *err) {
	char folder[FL_PATH_SIZE];
	fl_sheet *sheet = NULL;
	const fl_case *one = &out->one;
	fl_status status = fl_place_join(folder, cli->data, "faces", err);
	if (status >= 0)
		status = fl_derive_sheet(one, &out->issue, &sheet, err);
	if (status >= 0)
		status = fl_certificate_pdf_places(sheet, cli->io, &(fl_faces){folder}, &out->bytes, &out->length, &out->places,
		                                   err);
	fl_sheet_free(sheet);
	return status;
}

/* All lines: later ones may amend the certificate. */
static fl_status read_whole(const fl_cli *cli, const char *journal, fl_derived *out, fl_error *err) {
	char head[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_journal_read(cli->io, journal, &out->whole, head, NULL, err);
	if (status < 0)
		return status;
	const fl_session_issue *entry = NULL;
	for (size_t i = 0; i < out->whole.issue_count; i++)
		if (out->whole.issues[i].sequence == out->sequence)
			entry = &out->whole.issues[i];
	if (!entry)
		return fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.file = journal, .line = out->sequence},
		                  "this line issues no certificate");
	const fl_session_issue *after = fl_session_amended_by(&out->whole, entry->number);
	out->amended_by = after ? after->number : NULL;
	return FL_OK;
}

fl_status fl_derive(const fl_cli *cli, const char *journal, int sequence, fl_derived *out, fl_error *err) {
	*out = (fl_derived){.sequence = sequence};
	fl_status status = read_whole(cli, journal, out, err);
	if (status >= 0)
		status = fl_case_load_to(cli->io, journal, sequence, &out->arena, &out->journal, &out->journal_length,
		                         &out->one, err);
	if (status >= 0) {
		const fl_session *session = &out->one.session;
		out->issue = fl_derive_issue(session, &session->issues[session->issue_count - 1], out->one.head);
		status = fl_derive_pages(cli, out, err);
	}
	if (status < 0)
		fl_derived_free(out);
	return status;
}

void fl_derived_free(fl_derived *derived) {
	free(derived->bytes);
	fl_case_free(&derived->one);
	fl_session_free(&derived->whole);
	fl_arena_free(&derived->arena);
	*derived = (fl_derived){0};
}

/* ---- finding the journal ----------------------------------------------------------------------------------------- */

/* Number of the line that ends in that digest; 0 if there is none. */
static int line_of_digest(const char *bytes, size_t length, const char *digest) {
	char mark[FL_DIGEST_HEX_SIZE + 8];
	int size = snprintf(mark, sizeof mark, "\tself=%s\n", digest), line = 1;
	const char *found = memmem(bytes, length, mark, (size_t)size);
	if (!found)
		return 0;
	for (const char *at = bytes; (at = memchr(at, '\n', (size_t)(found - at))); at++)
		line++;
	return line;
}

static fl_status look_into(const fl_cli *cli, const char *path, const char *digest, int *sequence, fl_error *err) {
	fl_arena arena = {0};
	char *bytes;
	size_t length;
	fl_status status = fl_file_read(cli->io, path, FL_JOURNAL_LIMIT, &arena, &bytes, &length, err);
	if (status >= 0)
		*sequence = line_of_digest(bytes, length, digest);
	fl_arena_free(&arena);
	return status;
}

/* A journal in the folder that has a line with that digest; *sequence 0 if none has. */
static fl_status look_in_folder(const fl_cli *cli, const char *folder, const char *digest, char journal[FL_PATH_SIZE],
                                int *sequence, fl_error *err) {
	fl_arena arena = {0};
	char **paths;
	size_t count;
	fl_status status = fl_place_files(folder, ".flj", &arena, &paths, &count, err);
	for (size_t i = 0; status >= 0 && *sequence == 0 && i < count; i++) {
		fl_error passed_over = {0}; /* another journal that cannot be read is not the matter here */
		if (strlen(paths[i]) < FL_PATH_SIZE && look_into(cli, paths[i], digest, sequence, &passed_over) >= 0 &&
		    *sequence > 0)
			snprintf(journal, FL_PATH_SIZE, "%s", strncmp(paths[i], "./", 2) == 0 ? paths[i] + 2 : paths[i]);
	}
	fl_arena_free(&arena);
	return status;
}

/* The journal of the certificate's own name: among copies beside one another it is the one that is meant. */
static fl_status look_at_namesake(const fl_cli *cli, const char *certificate, const char *digest,
                                  char journal[FL_PATH_SIZE], int *sequence, fl_error *err) {
	size_t length = strlen(certificate);
	if (length > 4 && strcmp(certificate + length - 4, ".pdf") == 0)
		length -= 4;
	if (snprintf(journal, FL_PATH_SIZE, "%.*s.flj", (int)length, certificate) >= FL_PATH_SIZE)
		return fl_fail(err, FL_E_VALUE, "the path is longer than %d characters", FL_PATH_SIZE - 1);
	fl_error passed_over = {0};
	if (look_into(cli, journal, digest, sequence, &passed_over) < 0)
		*sequence = 0;
	return FL_OK;
}

static fl_status folder_of(const char *path, char out[FL_PATH_SIZE], fl_error *err) {
	const char *slash = strrchr(path, '/');
	if (strlen(path) >= FL_PATH_SIZE)
		return fl_fail(err, FL_E_VALUE, "the path is longer than %d characters", FL_PATH_SIZE - 1);
	snprintf(out, FL_PATH_SIZE, "%.*s", slash ? (int)(slash - path) : 1, slash ? path : ".");
	if (slash == path)
		snprintf(out, FL_PATH_SIZE, "/");
	return FL_OK;
}

/* The journal that the user names: by the digest if that is one of its lines, else its latest certificate. */
static fl_status take_named(const fl_cli *cli, const char *digest, char journal[FL_PATH_SIZE], int *sequence,
                            fl_error *err) {
	fl_session session;
	char head[FL_DIGEST_HEX_SIZE];
	fl_status status = fl_place_journal(cli, cli->values[FL_OPT_JOURNAL], journal, err);
	if (status >= 0 && digest)
		status = look_into(cli, journal, digest, sequence, err);
	if (status < 0 || *sequence > 0)
		return status;
	status = fl_journal_read(cli->io, journal, &session, head, NULL, err);
	if (status < 0)
		return status;
	if (session.issue_count > 0)
		*sequence = session.issues[session.issue_count - 1].sequence;
	else
		status =
		    fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.file = journal}, "no certificate was issued of this session");
	fl_session_free(&session);
	return status;
}

fl_status fl_derive_find(const fl_cli *cli, const char *certificate, const unsigned char *bytes, size_t length,
                         char journal[FL_PATH_SIZE], int *sequence, fl_error *err) {
	char digest[FL_DIGEST_HEX_SIZE], beside[FL_PATH_SIZE], sessions[FL_PATH_SIZE];
	bool named = fl_certificate_journal_digest(bytes, length, digest);
	*sequence = 0;
	if (cli->values[FL_OPT_JOURNAL])
		return take_named(cli, named ? digest : NULL, journal, sequence, err);
	if (!named)
		return fl_fail(err, FL_E_NOT_FOUND, "it names no journal: give the right one with --journal FILE");
	fl_status status = folder_of(certificate, beside, err);
	if (status >= 0)
		status = look_at_namesake(cli, certificate, digest, journal, sequence, err);
	if (status >= 0 && *sequence == 0)
		status = look_in_folder(cli, beside, digest, journal, sequence, err);
	if (status >= 0)
		status = fl_place_join(sessions, cli->home, "sessions", err);
	if (status >= 0 && *sequence == 0)
		status = look_in_folder(cli, sessions, digest, journal, sequence, err);
	if (status >= 0 && *sequence == 0)
		return fl_fail(err, FL_E_NOT_FOUND,
		               "its journal, with a line of digest %.12s…, is neither beside it nor in %s: give it with "
		               "--journal FILE",
		               digest, sessions);
	return status;
}
