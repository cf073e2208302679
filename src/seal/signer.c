/* signer.c - a person's key: made, certified by itself or by an authority.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "key.h"

#include <openssl/bio.h>
#include <openssl/crypto.h>
#include <openssl/err.h>
#include <openssl/pem.h>
#include <openssl/rand.h>
#include <openssl/rsa.h>
#include <openssl/x509v3.h>
#include <stdlib.h>
#include <string.h>

#define NAME_CHARACTERS 64 /* ub-common-name and its likes, RFC 5280 appendix A */
#define DAYS_MOST 3660

void fl_secret_wipe(fl_secret *secret) {
	if (secret && secret->bytes)
		OPENSSL_cleanse(secret->bytes, secret->length);
	if (secret)
		secret->length = 0;
}

void fl_signer_free(fl_signer *signer) {
	if (!signer)
		return;
	EVP_PKEY_free(signer->key); /* wipes the private part */
	X509_free(signer->certificate);
	sk_X509_pop_free(signer->between, X509_free);
	free(signer);
}

const fl_identity *fl_signer_identity(const fl_signer *signer) {
	return signer->certificate ? &signer->identity : NULL;
}

fl_status fl_signer_new(fl_key_kind kind, fl_signer **out, fl_error *err) {
	fl_signer *signer = calloc(1, sizeof *signer);
	if (!signer)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a key");
	signer->key = kind == FL_KEY_RSA3072 ? EVP_RSA_gen((size_t)3072) : EVP_EC_gen("P-256");
	if (!signer->key) {
		fl_signer_free(signer);
		return fl_crypto_fail(err, "make a key");
	}
	*out = signer;
	return FL_OK;
}

/* ---- names --------------------------------------------------------------------------------------------------- */

static fl_status check_name_part(const char *what, const char *text, fl_error *err) {
	if (!fl_utf8_valid(text, strlen(text)) || fl_text_has_control(text))
		return fl_fail(err, FL_E_VALUE, "the %s holds a control character or is not UTF-8; write it plainly", what);
	size_t characters = 0;
	for (const char *at = text; *at; (void)fl_utf8_next(&at))
		characters++;
	if (characters > NAME_CHARACTERS)
		return fl_fail(err, FL_E_VALUE, "the %s is longer than the %d characters that a certificate allows", what,
		               NAME_CHARACTERS);
	return FL_OK;
}

static fl_status add_name_part(X509_NAME *name, int nid, const char *what, const char *text, fl_error *err) {
	if (!text || text[0] == '\0')
		return FL_OK;
	fl_status status = check_name_part(what, text, err);
	if (status == FL_OK &&
	    X509_NAME_add_entry_by_NID(name, nid, MBSTRING_UTF8, (const unsigned char *)text, -1, -1, 0) != 1)
		status = fl_crypto_fail(err, "write a name into a certificate");
	return status;
}

static fl_status new_name(const fl_person *person, X509_NAME **out, fl_error *err) {
	if (!person->name || person->name[0] == '\0')
		return fl_fail(err, FL_E_VALUE, "a certificate needs the person's name");
	X509_NAME *name = X509_NAME_new();
	if (!name)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a certificate");
	fl_status status = add_name_part(name, NID_organizationName, "organisation", person->organisation, err);
	if (status == FL_OK)
		status = add_name_part(name, NID_organizationalUnitName, "role", person->role, err);
	if (status == FL_OK)
		status = add_name_part(name, NID_commonName, "name", person->name, err);
	if (status == FL_OK)
		*out = name;
	else
		X509_NAME_free(name);
	return status;
}

/* ---- extensions ---------------------------------------------------------------------------------------------- */

static const struct {
	int nid;
	const char *value;
	bool needs_certificate; /* speaks of the certificate's own key */
} extensions[] = {
    {NID_basic_constraints, "critical,CA:FALSE", false},
    {NID_key_usage, "critical,digitalSignature,nonRepudiation", false},
    {NID_subject_key_identifier, "hash", true},
    {NID_authority_key_identifier, "keyid:always", true},
};

static bool add_extensions(X509 *certificate, STACK_OF(X509_EXTENSION) * *for_request) {
	X509V3_CTX context;
	X509V3_set_ctx(&context, certificate, certificate, NULL, NULL, 0);
	for (size_t i = 0; i < sizeof extensions / sizeof *extensions; i++) {
		if (!certificate && extensions[i].needs_certificate)
			continue;
		X509_EXTENSION *one = X509V3_EXT_conf_nid(NULL, &context, extensions[i].nid, extensions[i].value);
		bool added = one && (certificate ? X509_add_ext(certificate, one, -1) == 1
		                                 : X509v3_add_ext(for_request, one, -1) != NULL);
		X509_EXTENSION_free(one);
		if (!added)
			return false;
	}
	return true;
}

/* ---- request and own certificate ----------------------------------------------------------------------------- */

static bool fill_request(X509_REQ *request, const fl_signer *signer, X509_NAME *name) {
	STACK_OF(X509_EXTENSION) *wanted = NULL;
	bool done = add_extensions(NULL, &wanted) && X509_REQ_set_version(request, 0) == 1 &&
	            X509_REQ_set_subject_name(request, name) == 1 && X509_REQ_set_pubkey(request, signer->key) == 1 &&
	            X509_REQ_add_extensions(request, wanted) == 1 && X509_REQ_sign(request, signer->key, EVP_sha256()) > 0;
	sk_X509_EXTENSION_pop_free(wanted, X509_EXTENSION_free);
	return done;
}

/* Moves what a memory BIO holds to the end of the text. */
static void take_bio(BIO *bio, fl_text *out) {
	char *data;
	long length = BIO_get_mem_data(bio, &data);
	if (length > 0)
		fl_text_append(out, data, (size_t)length);
}

fl_status fl_signer_request(const fl_signer *signer, const fl_person *person, fl_text *pem, fl_error *err) {
	X509_NAME *name = NULL;
	fl_status status = new_name(person, &name, err);
	if (status != FL_OK)
		return status;
	X509_REQ *request = X509_REQ_new();
	BIO *bio = BIO_new(BIO_s_mem());
	if (!request || !bio || !fill_request(request, signer, name) || PEM_write_bio_X509_REQ(bio, request) != 1)
		status = fl_crypto_fail(err, "write a certificate request");
	else
		take_bio(bio, pem);
	BIO_free(bio);
	X509_REQ_free(request);
	X509_NAME_free(name);
	return status;
}

/* 127 random bits, never zero, as RFC 5280, 4.1.2.2 wants of a serial number. */
static bool set_serial(X509 *certificate) {
	unsigned char random[16];
	if (RAND_bytes(random, sizeof random) != 1)
		return false;
	random[0] = (unsigned char)((random[0] & 0x7f) | 0x40);
	BIGNUM *number = BN_bin2bn(random, sizeof random, NULL);
	bool set = number && BN_to_ASN1_INTEGER(number, X509_get_serialNumber(certificate));
	BN_free(number);
	return set;
}

static bool fill_certificate(X509 *certificate, EVP_PKEY *key, X509_NAME *name, fl_utc from, int days) {
	return X509_set_version(certificate, X509_VERSION_3) == 1 && set_serial(certificate) &&
	       ASN1_TIME_adj(X509_getm_notBefore(certificate), (time_t)from, 0, 0) &&
	       ASN1_TIME_adj(X509_getm_notAfter(certificate), (time_t)from, days, 0) &&
	       X509_set_subject_name(certificate, name) == 1 && X509_set_issuer_name(certificate, name) == 1 &&
	       X509_set_pubkey(certificate, key) == 1 && add_extensions(certificate, NULL) &&
	       X509_sign(certificate, key, EVP_sha256()) > 0;
}

fl_status fl_signer_self_sign(fl_signer *signer, const fl_person *person, fl_utc from, int days, fl_error *err) {
	if (days < 1 || days > DAYS_MOST)
		return fl_fail(err, FL_E_RANGE, "a certificate is made for 1 to %d days, not %d", DAYS_MOST, days);
	X509_NAME *name = NULL;
	fl_status status = new_name(person, &name, err);
	if (status != FL_OK)
		return status;
	X509 *certificate = X509_new();
	if (!certificate || !fill_certificate(certificate, signer->key, name, from, days))
		status = fl_crypto_fail(err, "make a certificate");
	else
		status = fl_signer_adopt(signer, certificate, NULL, err);
	X509_free(certificate);
	X509_NAME_free(name);
	return status;
}

/* ---- certificates of an authority ---------------------------------------------------------------------------- */

static X509 *issuer_among(X509 *certificate, STACK_OF(X509) * offered) {
	for (int i = 0; i < sk_X509_num(offered); i++)
		if (X509_check_issued(sk_X509_value(offered, i), certificate) == X509_V_OK)
			return sk_X509_value(offered, i);
	return NULL;
}

/* The authorities between: from the issuer upward, without the one that signed itself. */
static bool collect_between(X509 *certificate, STACK_OF(X509) * offered, STACK_OF(X509) * between) {
	for (int i = 0; i < FL_CHAIN_MOST && X509_check_issued(certificate, certificate) != X509_V_OK; i++) {
		X509 *issuer = issuer_among(certificate, offered);
		if (!issuer || X509_check_issued(issuer, issuer) == X509_V_OK)
			break;
		if (X509_up_ref(issuer) != 1 || sk_X509_push(between, issuer) <= 0)
			return false;
		certificate = issuer;
	}
	return true;
}

fl_status fl_signer_adopt(fl_signer *signer, X509 *certificate, STACK_OF(X509) * offered, fl_error *err) {
	fl_status status = fl_certificate_for_signing(certificate, err);
	if (status != FL_OK)
		return status;
	STACK_OF(X509) *between = sk_X509_new_null();
	if (!between || !collect_between(certificate, offered, between) || X509_up_ref(certificate) != 1) {
		sk_X509_pop_free(between, X509_free);
		return fl_fail(err, FL_E_MEMORY, "out of memory for a certificate");
	}
	X509_free(signer->certificate);
	sk_X509_pop_free(signer->between, X509_free);
	signer->certificate = certificate;
	signer->between = between;
	fl_identity_of(certificate, &signer->identity);
	ERR_clear_error();
	return FL_OK;
}

static X509 *certificate_of_key(STACK_OF(X509) * found, EVP_PKEY *key) {
	for (int i = 0; i < sk_X509_num(found); i++)
		if (EVP_PKEY_eq(X509_get0_pubkey(sk_X509_value(found, i)), key) == 1)
			return sk_X509_value(found, i);
	return NULL;
}

fl_status fl_signer_take(fl_signer *signer, const char *pem, size_t length, const char *file, fl_error *err) {
	STACK_OF(X509) * found;
	fl_status status = fl_certificates_of_pem(pem, length, file, &found, err);
	if (status != FL_OK)
		return status;
	X509 *own = certificate_of_key(found, signer->key);
	ERR_clear_error();
	if (own)
		status = fl_signer_adopt(signer, own, found, err);
	else
		status = fl_fail_at(err, FL_E_VALUE, (fl_place){.file = file},
		                    "no certificate in it belongs to this key; give the one that was issued for its request");
	sk_X509_pop_free(found, X509_free);
	return status;
}

fl_status fl_signer_pem(const fl_signer *signer, fl_text *pem, fl_error *err) {
	if (!signer->certificate)
		return fl_fail(err, FL_E_STATE, "the key has no certificate yet; make one or send its request to an authority");
	BIO *bio = BIO_new(BIO_s_mem());
	bool written = bio && PEM_write_bio_X509(bio, signer->certificate) == 1;
	for (int i = 0; written && i < sk_X509_num(signer->between); i++)
		written = PEM_write_bio_X509(bio, sk_X509_value(signer->between, i)) == 1;
	if (written)
		take_bio(bio, pem);
	BIO_free(bio);
	return written && !pem->failed ? FL_OK : fl_crypto_fail(err, "write certificates");
}
