/* trust.c - the folder of authorities that the user controls, and chains that lead into it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "key.h"

#include <dirent.h>
#include <errno.h>
#include <openssl/err.h>
#include <openssl/x509_vfy.h>
#include <openssl/x509v3.h>
#include <stdlib.h>
#include <string.h>

#define PEM_MOST ((size_t)4 * 1024 * 1024)

fl_status fl_trust_new(fl_trust **out, fl_error *err) {
	fl_trust *trust = calloc(1, sizeof *trust);
	if (trust)
		trust->store = X509_STORE_new();
	if (!trust || !trust->store) {
		fl_trust_free(trust);
		return fl_fail(err, FL_E_MEMORY, "out of memory for the authorities");
	}
	*out = trust;
	return FL_OK;
}

void fl_trust_free(fl_trust *trust) {
	if (!trust)
		return;
	X509_STORE_free(trust->store);
	free(trust);
}

fl_status fl_trust_add(fl_trust *trust, const char *pem, size_t length, const char *file, size_t *added,
                       fl_error *err) {
	STACK_OF(X509) * found;
	fl_status status = fl_certificates_of_pem(pem, length, file, &found, err);
	if (status != FL_OK)
		return status;
	for (int i = 0; i < sk_X509_num(found) && status == FL_OK; i++)
		if (X509_STORE_add_cert(trust->store, sk_X509_value(found, i)) != 1)
			status = fl_crypto_fail(err, "keep an authority's certificate");
	if (added)
		*added += (size_t)sk_X509_num(found);
	sk_X509_pop_free(found, X509_free);
	return status;
}

static bool is_certificate_name(const char *name) {
	const char *dot = strrchr(name, '.');
	return name[0] != '.' && dot && (strcmp(dot, ".pem") == 0 || strcmp(dot, ".crt") == 0 || strcmp(dot, ".cer") == 0);
}

static fl_status add_file(fl_trust *trust, const fl_io *io, const char *folder, const char *name, size_t *added,
                          fl_error *err) {
	fl_arena arena = {0};
	char *bytes, *path = fl_arena_printf(&arena, "%s/%s", folder, name);
	size_t length;
	fl_status status = path ? fl_file_read(io, path, PEM_MOST, &arena, &bytes, &length, err)
	                        : fl_fail(err, FL_E_MEMORY, "out of memory while reading the authorities");
	if (status == FL_OK)
		status = fl_trust_add(trust, bytes, length, path, added, err);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_trust_add_folder(fl_trust *trust, const fl_io *io, const char *folder, size_t *added, fl_error *err) {
	DIR *open = opendir(folder);
	if (!open)
		return fl_io_fail(err, "open the folder of trusted authorities", folder, errno);
	fl_status status = FL_OK;
	const struct dirent *entry;
	while (status == FL_OK && (entry = readdir(open)))
		if (is_certificate_name(entry->d_name))
			status = add_file(trust, io, folder, entry->d_name, added, err);
	closedir(open);
	return status;
}

/* Any certificate of the folder ends a chain: a company may trust the class society's issuing authority alone. */
static bool prepare(X509_STORE_CTX *context, const fl_trust *trust, X509 *certificate, STACK_OF(X509) * between,
                    fl_utc at) {
	if (X509_STORE_CTX_init(context, trust->store, certificate, between) != 1)
		return false;
	X509_VERIFY_PARAM *how = X509_STORE_CTX_get0_param(context);
	X509_VERIFY_PARAM_set_time(how, (time_t)at);
	X509_VERIFY_PARAM_set_depth(how, FL_CHAIN_MOST);
	return X509_VERIFY_PARAM_set_flags(how, X509_V_FLAG_PARTIAL_CHAIN) == 1;
}

bool fl_trust_chain(const fl_trust *trust, X509 *certificate, STACK_OF(X509) * between, fl_utc at,
                    STACK_OF(X509) * *chain, int *reason) {
	*reason = X509_V_ERR_UNSPECIFIED;
	X509_STORE_CTX *context = trust ? X509_STORE_CTX_new() : NULL;
	bool good = context && prepare(context, trust, certificate, between, at) && X509_verify_cert(context) == 1;
	if (!trust)
		*reason = X509_V_ERR_UNABLE_TO_GET_ISSUER_CERT_LOCALLY;
	else if (context)
		*reason = X509_STORE_CTX_get_error(context);
	if (good && chain)
		*chain = X509_STORE_CTX_get1_chain(context);
	X509_STORE_CTX_free(context);
	ERR_clear_error();
	return good && (!chain || *chain);
}
