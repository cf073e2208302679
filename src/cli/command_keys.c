/* command_keys.c - the keys that people sign with: made, certified, imported, listed, shown.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "passphrase.h"
#include "signing.h"

#define CERTIFICATE_MOST ((size_t)1 << 20)

static fl_status need(const fl_cli *cli, int count, const char *how, fl_error *err) {
	if (cli->argument_count == count)
		return FL_OK;
	return fl_fail(err, FL_E_USAGE, "keys %s: write foundleft keys %s", cli->arguments[0], how);
}

/* The folder of keys, and beside it that of trust, so that there is one to put certificates into. */
static fl_status make_folders(const fl_cli *cli, char keys[FL_PATH_SIZE], fl_error *err) {
	char trust[FL_PATH_SIZE];
	fl_status status = fl_place_join(keys, cli->home, "keys", err);
	if (status >= 0)
		status = fl_place_join(trust, cli->home, "trust", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, keys, err);
	if (status >= 0)
		status = fl_folder_make(cli->io, trust, err);
	return status;
}

static fl_status new_passphrase(const fl_cli *cli, const char *id, fl_passphrase *out, fl_error *err) {
	char question[160];
	snprintf(question, sizeof question, "Passphrase of the key %.100s", id);
	return fl_passphrase_get(cli, question, true, out, err);
}

static fl_status refuse_existing(const char *keys, const char *id, fl_error *err) {
	char path[FL_PATH_SIZE];
	struct stat info;
	int length = snprintf(path, sizeof path, "%.350s/%.100s.key", keys, id);
	if (length > 0 && stat(path, &info) == 0)
		return fl_fail(err, FL_E_EXISTS, "there is a key %s already (%s): give this one another ID", id, path);
	return FL_OK;
}

/* ---- make -------------------------------------------------------------------------------------------------------- */

static fl_status days_of(const fl_cli *cli, int *days, fl_error *err) {
	const char *text = cli->values[FL_OPT_DAYS];
	char *rest;
	long value = text ? strtol(text, &rest, 10) : 730;
	if (text && (rest == text || *rest || value < 1 || value > 3660))
		return fl_fail(err, FL_E_USAGE, "--days takes a number of days from 1 to 3660, not `%s`", text);
	*days = (int)value;
	return FL_OK;
}

/* What stands in the key's certificate, or in the request for one. */
static fl_status certify_key(const fl_cli *cli, fl_signer *signer, fl_text *request, fl_error *err) {
	fl_person person = {.name = cli->values[FL_OPT_PERSON],
	                    .organisation = cli->values[FL_OPT_ORGANISATION],
	                    .role = cli->values[FL_OPT_ROLE_TITLE]};
	int days = 0;
	fl_status status = days_of(cli, &days, err);
	if (status >= 0 && cli->values[FL_OPT_REQUEST])
		return fl_signer_request(signer, &person, request, err);
	/* From the day's beginning: a neighbour's clock may be a few minutes behind. */
	return status < 0 ? status : fl_signer_self_sign(signer, &person, fl_cli_now() / 86400 * 86400, days, err);
}

static void tell_made(const fl_cli *cli, const char *keys, const char *id, const fl_text *request) {
	if (cli->values[FL_OPT_REQUEST]) {
		fwrite(request->data, 1, request->length, cli->out);
		fprintf(cli->err, "key: %s/%s.key\nSend the request to the authority; then: foundleft keys take %s FILE\n",
		        keys, id, id);
	} else {
		fprintf(cli->out, "key: %s/%s.key\ncertificate: %s/%s.crt, certified by itself\n", keys, id, keys, id);
		fprintf(cli->out, "Whoever knows this person and compares the fingerprint (foundleft keys list) can put the\n"
		                  "certificate into the folder of trust.\n");
	}
}

static fl_status make(const fl_cli *cli, fl_error *err) {
	char keys[FL_PATH_SIZE];
	fl_signer *signer = NULL;
	fl_text request = {0};
	fl_passphrase passphrase;
	const char *id = cli->argument_count > 1 ? cli->arguments[1] : "";
	fl_status status = need(cli, 2, "make ID --person NAME, and --request or --self-signed", err);
	if (status >= 0 &&
	    (!cli->values[FL_OPT_PERSON] || !cli->values[FL_OPT_REQUEST] == !cli->values[FL_OPT_SELF_SIGNED]))
		status = fl_fail(err, FL_E_USAGE, "keys make needs --person NAME, and either --request or --self-signed");
	if (status >= 0)
		status = make_folders(cli, keys, err);
	if (status >= 0)
		status = refuse_existing(keys, id, err);
	if (status >= 0)
		status = fl_signer_new(cli->values[FL_OPT_RSA] ? FL_KEY_RSA3072 : FL_KEY_P256, &signer, err);
	if (status >= 0)
		status = certify_key(cli, signer, &request, err);
	if (status >= 0)
		status = new_passphrase(cli, id, &passphrase, err);
	if (status >= 0)
		status = fl_signer_save(signer, cli->io, keys, id, &passphrase.secret, err);
	if (status >= 0)
		tell_made(cli, keys, id, &request);
	fl_text_free(&request);
	fl_signer_free(signer);
	return status;
}

/* ---- take and import --------------------------------------------------------------------------------------------- */

static fl_status take(const fl_cli *cli, fl_error *err) {
	char keys[FL_PATH_SIZE], *pem;
	size_t length;
	fl_arena arena = {0};
	fl_signer *signer = NULL;
	fl_status status = need(cli, 3, "take ID FILE, with the certificate that the authority issued", err);
	if (status >= 0)
		status = fl_place_join(keys, cli->home, "keys", err);
	if (status >= 0)
		status = fl_file_read(cli->io, cli->arguments[2], CERTIFICATE_MOST, &arena, &pem, &length, err);
	if (status >= 0)
		status = fl_signing_open(cli, cli->arguments[1], &signer, err);
	if (status >= 0)
		status = fl_signer_take(signer, pem, length, cli->arguments[2], err);
	if (status >= 0)
		status = fl_signer_save_certificate(signer, cli->io, keys, cli->arguments[1], err);
	if (status >= 0)
		fprintf(cli->out, "certificate: %s/%s.crt, issued by %s\n", keys, cli->arguments[1],
		        fl_signer_identity(signer)->issuer);
	fl_signer_free(signer);
	fl_arena_free(&arena);
	return status;
}

static fl_status import(const fl_cli *cli, fl_error *err) {
	char keys[FL_PATH_SIZE], *bytes;
	size_t length;
	fl_arena arena = {0};
	fl_signer *signer = NULL;
	fl_passphrase passphrase;
	fl_status status = need(cli, 3, "import ID FILE, with a PKCS#12 file (.p12, .pfx)", err);
	if (status >= 0)
		status = make_folders(cli, keys, err);
	if (status >= 0)
		status = refuse_existing(keys, cli->arguments[1], err);
	if (status >= 0)
		status = fl_file_read(cli->io, cli->arguments[2], CERTIFICATE_MOST, &arena, &bytes, &length, err);
	if (status >= 0)
		status = fl_passphrase_get(cli, "Passphrase of the file", false, &passphrase, err);
	if (status >= 0)
		status = fl_signer_import((unsigned char *)bytes, length, cli->arguments[2], &passphrase.secret, &signer, err);
	if (status >= 0)
		status = new_passphrase(cli, cli->arguments[1], &passphrase, err);
	if (status >= 0)
		status = fl_signer_save(signer, cli->io, keys, cli->arguments[1], &passphrase.secret, err);
	if (status >= 0)
		fprintf(cli->out, "key: %s/%s.key\ncertificate: %s/%s.crt, of %s, issued by %s\n", keys, cli->arguments[1],
		        keys, cli->arguments[1], fl_signer_identity(signer)->name, fl_signer_identity(signer)->issuer);
	fl_signer_free(signer);
	fl_arena_free(&arena);
	return status;
}

/* ---- list and show ----------------------------------------------------------------------------------------------- */

static fl_status read_certificate(const fl_cli *cli, const char *id, fl_arena *arena, char **pem, size_t *length,
                                  fl_error *err) {
	char keys[FL_PATH_SIZE];
	fl_status status = fl_place_join(keys, cli->home, "keys", err);
	char *path = status >= 0 ? fl_arena_printf(arena, "%s/%s.crt", keys, id) : NULL;
	if (status >= 0 && !path)
		status = fl_fail(err, FL_E_MEMORY, "out of memory");
	return status < 0 ? status : fl_file_read(cli->io, path, CERTIFICATE_MOST, arena, pem, length, err);
}

static fl_status show(const fl_cli *cli, fl_error *err) {
	fl_arena arena = {0};
	char *pem;
	size_t length;
	fl_status status = need(cli, 2, "show ID", err);
	if (status >= 0)
		status = read_certificate(cli, cli->arguments[1], &arena, &pem, &length, err);
	if (status == FL_E_NOT_FOUND)
		status = fl_fail(err, status, "the key %s has no certificate, or there is no such key: see foundleft keys list",
		                 cli->arguments[1]);
	if (status >= 0)
		fwrite(pem, 1, length, cli->out);
	fl_arena_free(&arena);
	return status;
}

static const char *state_of(const fl_identity *who) {
	fl_utc now = fl_cli_now();
	return now > who->valid_until ? "EXPIRED" : now < who->valid_from ? "not yet valid" : "valid";
}

static void list_one(const fl_cli *cli, const char *id) {
	fl_arena arena = {0};
	char *pem, from[FL_DAY_SIZE], until[FL_DAY_SIZE];
	size_t length;
	fl_identity who;
	fl_error why = {0};
	fl_status status = read_certificate(cli, id, &arena, &pem, &length, &why);
	if (status >= 0)
		status = fl_identity_of_pem(pem, length, id, &who, &why);
	if (status == FL_E_NOT_FOUND)
		fprintf(cli->out, "%s\n  no certificate yet: send its request to an authority, then foundleft keys take\n", id);
	else if (status < 0)
		fprintf(cli->out, "%s\n  the certificate cannot be read: %s\n", id, why.message);
	else
		fprintf(cli->out, "%s\n  %s%s%s%s%s\n  %s, %s, %s to %s, certified by %s\n  fingerprint (SHA-256) %s\n", id,
		        who.name, *who.organisation ? ", " : "", who.organisation, *who.role ? ", " : "", who.role, who.key,
		        state_of(&who), fl_day_format(fl_day_of(who.valid_from), from),
		        fl_day_format(fl_day_of(who.valid_until), until), who.self_signed ? "itself" : who.issuer,
		        who.fingerprint);
	fl_arena_free(&arena);
}

static fl_status list(const fl_cli *cli, fl_error *err) {
	char keys[FL_PATH_SIZE], **paths;
	size_t count;
	fl_arena arena = {0};
	fl_status status = need(cli, 1, "list", err);
	if (status >= 0)
		status = fl_place_join(keys, cli->home, "keys", err);
	if (status >= 0)
		status = fl_place_files(keys, ".key", &arena, &paths, &count, err);
	if (status >= 0 && count == 0)
		fprintf(cli->out, "no keys in %s: foundleft keys make ID --person NAME\n", keys);
	for (size_t i = 0; status >= 0 && i < count; i++) {
		char *name = strrchr(paths[i], '/') + 1;
		name[strlen(name) - strlen(".key")] = '\0';
		list_one(cli, name);
	}
	fl_arena_free(&arena);
	return status;
}

fl_status fl_command_keys(fl_cli *cli, fl_exit *code, fl_error *err) {
	static const struct {
		const char *word;
		fl_status (*run)(const fl_cli *cli, fl_error *err);
	} WORDS[] = {{"make", make}, {"take", take}, {"import", import}, {"list", list}, {"show", show}};
	(void)code;
	for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
		if (strcmp(WORDS[i].word, cli->arguments[0]) == 0)
			return WORDS[i].run(cli, err);
	return fl_fail(err, FL_E_USAGE, "keys: `%s` is none of make, take, import, list, show", cli->arguments[0]);
}
