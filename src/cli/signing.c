/* signing.c - who signs, in which part, whom the user trusts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "signing.h"

#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "foundleft/document.h"
#include "passphrase.h"

#define STAMP_WAIT_S 20

/* ---- keys and trust ---------------------------------------------------------------------------------------------- */

static bool exists(const char *path) {
	struct stat info;
	return stat(path, &info) == 0;
}

fl_status fl_signing_open(const fl_cli *cli, const char *id, fl_signer **out, fl_error *err) {
	char keys[FL_PATH_SIZE], question[160], path[FL_PATH_SIZE];
	fl_passphrase passphrase;
	fl_status status = fl_place_join(keys, cli->home, "keys", err);
	if (status < 0)
		return status;
	/* Before anybody is asked: a passphrase typed for nothing is one typed once too often. */
	snprintf(path, sizeof path, "%.380s/%.100s.key", keys, id);
	if (!exists(path))
		return fl_fail(err, FL_E_NOT_FOUND,
		               "there is no key %s: foundleft keys list shows what there is. A lost key cannot be made again: "
		               "put back its file from a copy, or make a new key and have it certified",
		               path);
	snprintf(question, sizeof question, "Passphrase of the key %.100s", id);
	status = fl_passphrase_get(cli, question, false, &passphrase, err);
	return status < 0 ? status : fl_signer_open(cli->io, keys, id, &passphrase.secret, out, err);
}

fl_status fl_signing_trust(const fl_cli *cli, fl_trust **out, bool *folder_missing, fl_error *err) {
	char folder[FL_PATH_SIZE];
	fl_trust *trust = NULL;
	fl_status status = fl_place_join(folder, cli->home, "trust", err);
	if (status >= 0)
		status = fl_trust_new(&trust, err);
	bool there = status >= 0 && exists(folder);
	if (there)
		status = fl_trust_add_folder(trust, cli->io, folder, NULL, err);
	if (folder_missing)
		*folder_missing = !there;
	if (status >= 0)
		*out = trust;
	else
		fl_trust_free(trust);
	return status;
}

/* ---- beginning --------------------------------------------------------------------------------------------------- */

/* HOME/seal.yaml names the authority of timestamps; without the file there is none. */
static fl_status read_server(const fl_cli *cli, fl_signing *signing, fl_error *err) {
	static const char *const KNOWN[] = {"timestamp", NULL};
	char path[FL_PATH_SIZE], *text;
	size_t length;
	const fl_node *root;
	fl_status status = fl_place_join(path, cli->home, "seal.yaml", err);
	if (status < 0 || !exists(path))
		return status;
	status = fl_file_read(cli->io, path, 1 << 16, &signing->arena, &text, &length, err);
	if (status >= 0)
		status = fl_document_parse(&signing->arena, text, path, &root, err);
	if (status >= 0)
		status = fl_node_only(root, KNOWN, err);
	if (status >= 0)
		status = fl_node_text(root, "timestamp", true, &signing->server.url, err);
	if (status < 0)
		return status;
	signing->server.proxy = getenv("http_proxy");
	signing->server.no_proxy = getenv("no_proxy");
	signing->server.timeout_s = STAMP_WAIT_S;
	status = fl_stamp_server_timestamper(&signing->server, signing->trust, &signing->stamper, err);
	signing->stamped = status >= 0;
	return status;
}

static fl_status read_part(const fl_cli *cli, fl_part otherwise, fl_part *part, fl_error *err) {
	const char *word = cli->values[FL_OPT_AS];
	*part = word ? fl_part_find(word) : otherwise;
	if (*part == FL_PARTS)
		return fl_fail(err, FL_E_USAGE, "--as takes performed, reviewed or authorised, not `%s`", word);
	return FL_OK;
}

fl_status fl_signing_begin(const fl_cli *cli, fl_part otherwise, fl_signing *out, fl_error *err) {
	*out = (fl_signing){.at = fl_cli_now()};
	fl_status status = FL_OK;
	if (!cli->values[FL_OPT_SIGNER])
		status = fl_fail(err, FL_E_USAGE, "--signer ID is missing: foundleft keys list shows what keys there are");
	if (status >= 0)
		status = read_part(cli, otherwise, &out->part, err);
	if (status >= 0)
		status = fl_signing_trust(cli, &out->trust, NULL, err);
	if (status >= 0)
		status = read_server(cli, out, err);
	if (status >= 0)
		status = fl_signing_open(cli, cli->values[FL_OPT_SIGNER], &out->signer, err);
	if (status >= 0 && !fl_signer_identity(out->signer))
		status = fl_fail(err, FL_E_STATE,
		                 "the key %s has no certificate yet: when the authority has issued it, foundleft keys take %s "
		                 "FILE",
		                 cli->values[FL_OPT_SIGNER], cli->values[FL_OPT_SIGNER]);
	if (status < 0)
		fl_signing_end(out);
	return status;
}

void fl_signing_end(fl_signing *signing) {
	fl_signer_free(signing->signer);
	fl_trust_free(signing->trust);
	fl_arena_free(&signing->arena);
	*signing = (fl_signing){0};
}

/* ---- who may ----------------------------------------------------------------------------------------------------- */

/* A machine whose clock was set back would sign at a time at which the work was not done yet. */
static fl_status refuse_early(const fl_signing *signing, const fl_session *session, fl_error *err) {
	char now[FL_UTC_SIZE], last[FL_UTC_SIZE];
	if (session->declared_clock || signing->at + 300 >= session->last_at)
		return FL_OK;
	return fl_fail(err, FL_E_STATE,
	               "this machine's clock says %s, but the journal was written to at %s: set the clock right, then sign",
	               fl_utc_format(signing->at, now), fl_utc_format(session->last_at, last));
}

/* The seal would refuse it too, but only after the certificate was issued. */
static fl_status refuse_invalid(const fl_signing *signing, fl_error *err) {
	const fl_identity *who = fl_signer_identity(signing->signer);
	char day[FL_DAY_SIZE];
	if (signing->at > who->valid_until)
		return fl_fail(err, FL_E_STATE, "the certificate of %s expired on %s; get a new one, or check the clock",
		               who->name, fl_day_format(fl_day_of(who->valid_until), day));
	if (signing->at < who->valid_from)
		return fl_fail(err, FL_E_STATE, "the certificate of %s is valid from %s only; check the clock", who->name,
		               fl_day_format(fl_day_of(who->valid_from), day));
	return FL_OK;
}

fl_status fl_signing_allowed(const fl_signing *signing, const fl_derived *derived, fl_error *err) {
	const fl_identity *who = fl_signer_identity(signing->signer);
	fl_status status = refuse_invalid(signing, err);
	if (status < 0)
		return status;
	const fl_setting *performer = fl_session_setting(&derived->one.session, "performed-by");
	const char *name = performer ? performer->typed : "";
	bool is_performer = fl_identity_is_named(who, name);
	if (signing->part == FL_PART_PERFORMED && !is_performer)
		return fl_fail(err, FL_E_STATE,
		               "the session says that %s performed it, and this key is %s's: only the performer signs as "
		               "performed",
		               *name ? name : "nobody named", who->name);
	if (signing->part != FL_PART_PERFORMED && is_performer)
		return fl_fail(err, FL_E_STATE, "%s performed it and cannot sign as %s too: that must be another person",
		               who->name, fl_part_word(signing->part));
	const char *authorised = derived->issue.authorised_by;
	if (signing->part == FL_PART_AUTHORISED && authorised && *authorised && !fl_identity_is_named(who, authorised))
		return fl_fail(err, FL_E_STATE,
		               "the certificate says that %s authorises it, and this key is %s's: certify again with --amends, "
		               "or sign as reviewed",
		               authorised, who->name);
	return refuse_early(signing, &derived->one.session, err);
}

/* ---- the certificate --------------------------------------------------------------------------------------------- */

/* Says in *done whether this person has signed in this part; refuses a part that somebody else signed in. */
static fl_status look_at_earlier(const fl_signing *signing, const unsigned char *bytes, size_t length, bool *done,
                                 fl_error *err) {
	fl_arena arena = {0};
	fl_seal_report report;
	const fl_identity *who = fl_signer_identity(signing->signer);
	fl_status status = fl_pdf_check(bytes, length, NULL, signing->at, NULL, 0, &arena, &report, err);
	for (size_t i = 0; status >= 0 && i < report.signature_count; i++) {
		const fl_seal_signature *earlier = &report.signatures[i];
		if (strcmp(earlier->role, fl_part_word(signing->part)) != 0)
			continue;
		if (fl_identity_same_person(&earlier->signer, who))
			*done = true;
		else
			status = fl_fail(err, FL_E_STATE, "%s has signed it as %s already: one signature a part",
			                 earlier->signer.name, earlier->role);
	}
	fl_arena_free(&arena);
	return status;
}

/* The lines of the visible block: who, in which part and when, by whom certified. */
static fl_status write_block(fl_arena *arena, const fl_signing *signing, const char *lines[3], fl_error *err) {
	const fl_identity *who = fl_signer_identity(signing->signer);
	char utc[FL_UTC_SIZE];
	fl_utc_format(signing->at, utc);
	lines[0] = fl_arena_printf(arena, "%s%s%s%s%s", who->name, *who->organisation ? ", " : "", who->organisation,
	                           *who->role ? ", " : "", who->role);
	lines[1] = fl_arena_printf(arena, "signed as %s on %.10s at %.5s UTC", fl_part_word(signing->part), utc, utc + 11);
	lines[2] = who->self_signed ? fl_arena_strdup(arena, "electronic signature; certified by the signer")
	                            : fl_arena_printf(arena, "electronic signature; certified by %s", who->issuer);
	return lines[0] && lines[1] && lines[2] ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory");
}

static fl_status sign(const fl_cli *cli, const fl_signing *signing, const fl_derived *derived,
                      const unsigned char *bytes, size_t length, unsigned char **out, size_t *out_length,
                      fl_error *err) {
	fl_arena arena = {0};
	fl_seal_face face;
	char folder[FL_PATH_SIZE];
	const char *lines[3];
	fl_status status = fl_place_join(folder, cli->data, "faces", err);
	if (status >= 0)
		status = fl_certificate_face(cli->io, &(fl_faces){folder}, &arena, &face, err);
	if (status >= 0)
		status = write_block(&arena, signing, lines, err);
	if (status >= 0) {
		fl_pdf_signing how = {.role = fl_part_word(signing->part),
		                      .at = signing->at,
		                      .place = derived->places.of[signing->part],
		                      .text = lines,
		                      .text_count = 3,
		                      .face = &face,
		                      .timestamper = signing->stamped ? &signing->stamper : NULL};
		status = fl_pdf_sign(bytes, length, signing->signer, &how, out, out_length, err);
	}
	fl_arena_free(&arena);
	return status;
}

fl_status fl_signing_pdf(const fl_cli *cli, const fl_signing *signing, const fl_derived *derived,
                         const unsigned char *bytes, size_t length, unsigned char **out, size_t *out_length,
                         fl_error *err) {
	bool done = false;
	*out = NULL;
	if (!(derived->places.of[signing->part].width > 0))
		return fl_fail(err, FL_E_STATE,
		               "this certificate has no place for a signature as %s: its procedure does not ask for one",
		               fl_part_word(signing->part));
	fl_status status = look_at_earlier(signing, bytes, length, &done, err);
	if (status < 0 || done)
		return status;
	return sign(cli, signing, derived, bytes, length, out, out_length, err);
}

/* ---- the journal ------------------------------------------------------------------------------------------------- */

/* "folder/session.flj", line 401, authorised -> "folder/session.401.authorised.fls" */
static char *seal_path(fl_arena *arena, const fl_derived *derived, fl_part part) {
	const char *journal = derived->one.path;
	size_t length = strlen(journal);
	if (length > 4 && strcmp(journal + length - 4, ".flj") == 0)
		length -= 4;
	return fl_arena_printf(arena, "%.*s.%d.%s" FL_SEAL_SUFFIX, (int)length, journal, derived->sequence,
	                       fl_part_word(part));
}

static fl_status keep_seal(const fl_cli *cli, fl_signing *signing, const fl_derived *derived, const char *path,
                           fl_error *err) {
	char *bytes;
	size_t length;
	fl_seal_report report;
	fl_status status = fl_file_read(cli->io, path, 1 << 20, &signing->arena, &bytes, &length, err);
	if (status >= 0)
		status = fl_seal_check(derived->journal, derived->journal_length, bytes, length, NULL, signing->at,
		                       &signing->arena, &report, err);
	if (status < 0)
		return status;
	if (report.verdict == FL_SEAL_BROKEN ||
	    !fl_identity_same_person(&report.signatures[0].signer, fl_signer_identity(signing->signer)))
		return fl_fail(err, FL_E_EXISTS, "%s exists and is not this person's seal of this journal: see foundleft check",
		               path);
	return FL_OK;
}

fl_status fl_signing_journal(const fl_cli *cli, fl_signing *signing, const fl_derived *derived, const char **path,
                             fl_error *err) {
	fl_text seal = {0};
	*path = seal_path(&signing->arena, derived, signing->part);
	if (!*path)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	if (exists(*path))
		return keep_seal(cli, signing, derived, *path, err);
	fl_status status =
	    fl_seal_bytes(signing->signer, derived->journal, derived->journal_length, fl_part_word(signing->part),
	                  signing->at, signing->stamped ? &signing->stamper : NULL, &seal, err);
	if (status >= 0)
		status = fl_file_write(cli->io, *path, seal.data, seal.length, false, err);
	fl_text_free(&seal);
	return status;
}
