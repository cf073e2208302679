/* identity.c - certificates in words, and whether two are of one person.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "key.h"

#include <openssl/asn1.h>
#include <openssl/bio.h>
#include <openssl/err.h>
#include <openssl/pem.h>
#include <openssl/rsa.h>
#include <openssl/x509v3.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>
#include <time.h>

char *fl_crypto_reason(char *out, size_t size) {
	unsigned long code = ERR_peek_last_error();
	const char *reason = code ? ERR_reason_error_string(code) : NULL;
	snprintf(out, size, "%s", reason ? reason : "it gives no reason");
	ERR_clear_error();
	return out;
}

fl_status fl_crypto_fail(fl_error *err, const char *tried) {
	char reason[120];
	return fl_fail(err, FL_E_INTERNAL, "the cryptographic library failed to %s: %s", tried,
	               fl_crypto_reason(reason, sizeof reason));
}

fl_utc fl_utc_of(const ASN1_TIME *time) {
	struct tm civil;
	if (!time || ASN1_TIME_to_tm(time, &civil) != 1)
		return INT64_MIN;
	fl_day day = fl_day_from_civil(civil.tm_year + 1900, civil.tm_mon + 1, civil.tm_mday);
	return (fl_utc)day * 86400 + civil.tm_hour * 3600 + civil.tm_min * 60 + civil.tm_sec;
}

/* Copies valid UTF-8 without control characters; others become "?". Cut at whole characters. */
static void copy_text(const char *text, size_t length, char out[FL_NAME_SIZE]) {
	size_t used = 0;
	if (!fl_utf8_valid(text, length)) {
		snprintf(out, FL_NAME_SIZE, "(unreadable)");
		return;
	}
	for (const char *at = text; at < text + length;) {
		const char *from = at;
		char one[8] = "";
		(void)fl_utf8_next(&at);
		size_t size = (size_t)(at - from);
		memcpy(one, from, size);
		if (*from == '\0' || fl_text_has_control(one)) {
			one[0] = '?';
			size = 1;
		}
		if (used + size >= FL_NAME_SIZE)
			break;
		memcpy(out + used, one, size);
		used += size;
	}
	out[used] = '\0';
}

static void name_entry(const X509_NAME *name, int nid, char out[FL_NAME_SIZE]) {
	out[0] = '\0';
	int at = X509_NAME_get_index_by_NID(name, nid, -1);
	if (at < 0)
		return;
	unsigned char *utf8 = NULL;
	int length = ASN1_STRING_to_UTF8(&utf8, X509_NAME_ENTRY_get_data(X509_NAME_get_entry(name, at)));
	if (length >= 0)
		copy_text((const char *)utf8, (size_t)length, out);
	OPENSSL_free(utf8);
}

static void write_hex(const unsigned char *bytes, size_t count, char *out) {
	for (size_t i = 0; i < count; i++)
		snprintf(out + 2 * i, 3, "%02x", bytes[i]);
}

static void describe_key(EVP_PKEY *key, char *out, size_t size) {
	int type = key ? EVP_PKEY_get_base_id(key) : EVP_PKEY_NONE;
	const char *name = type == EVP_PKEY_EC ? "EC" : type == EVP_PKEY_RSA ? "RSA" : "other";
	snprintf(out, size, "%s %d bit", name, key ? EVP_PKEY_get_bits(key) : 0);
}

void fl_identity_of(X509 *certificate, fl_identity *out) {
	*out = (fl_identity){0};
	const X509_NAME *subject = X509_get_subject_name(certificate), *issuer = X509_get_issuer_name(certificate);
	name_entry(subject, NID_commonName, out->name);
	name_entry(subject, NID_organizationName, out->organisation);
	name_entry(subject, NID_organizationalUnitName, out->role);
	name_entry(issuer, NID_commonName, out->issuer);
	if (out->issuer[0] == '\0')
		name_entry(issuer, NID_organizationName, out->issuer);
	const ASN1_INTEGER *serial = X509_get0_serialNumber(certificate);
	size_t length = (size_t)ASN1_STRING_length(serial), most = sizeof out->serial / 2 - 1;
	write_hex(ASN1_STRING_get0_data(serial), length < most ? length : most, out->serial);
	unsigned char digest[EVP_MAX_MD_SIZE];
	unsigned size = 0;
	if (X509_digest(certificate, EVP_sha256(), digest, &size) == 1 && size == 32)
		write_hex(digest, size, out->fingerprint);
	unsigned char *public_key = NULL;
	int public_length = i2d_X509_PUBKEY(X509_get_X509_PUBKEY(certificate), &public_key);
	if (public_length > 0 && EVP_Digest(public_key, (size_t)public_length, digest, &size, EVP_sha256(), NULL) == 1)
		write_hex(digest, size, out->key_digest);
	OPENSSL_free(public_key);
	describe_key(X509_get0_pubkey(certificate), out->key, sizeof out->key);
	out->valid_from = fl_utc_of(X509_get0_notBefore(certificate));
	out->valid_until = fl_utc_of(X509_get0_notAfter(certificate));
	out->self_signed = X509_NAME_cmp(subject, issuer) == 0;
	ERR_clear_error();
}

/* Letter case (of ASCII) and repeated spaces aside. */
static bool same_words(const char *a, const char *b) {
	for (;;) {
		while (a[0] == ' ' && (a[1] == ' ' || a[1] == '\0'))
			a++;
		while (b[0] == ' ' && (b[1] == ' ' || b[1] == '\0'))
			b++;
		int one = *a >= 'A' && *a <= 'Z' ? *a + 32 : *a, other = *b >= 'A' && *b <= 'Z' ? *b + 32 : *b;
		if (one != other)
			return false;
		if (*a == '\0')
			return true;
		a++;
		b++;
	}
}

static const char *skip_spaces(const char *text) {
	while (*text == ' ')
		text++;
	return text;
}

bool fl_identity_same_person(const fl_identity *a, const fl_identity *b) {
	if (strcmp(a->fingerprint, b->fingerprint) == 0 || strcmp(a->key_digest, b->key_digest) == 0)
		return true;
	return same_words(skip_spaces(a->name), skip_spaces(b->name)) &&
	       same_words(skip_spaces(a->organisation), skip_spaces(b->organisation));
}

/* The next word of a name; false at its end. */
static bool next_word(const char **at, const char **word, size_t *length) {
	*word = *at + strspn(*at, " ,");
	*length = strcspn(*word, " ,");
	*at = *word + *length;
	return *length > 0;
}

static bool all_words_in(const char *some, const char *name) {
	const char *word, *other;
	size_t length, size;
	while (next_word(&some, &word, &length)) {
		bool found = false;
		for (const char *at = name; !found && next_word(&at, &other, &size);)
			found = size == length && strncasecmp(word, other, length) == 0;
		if (!found)
			return false;
	}
	return true;
}

bool fl_identity_is_named(const fl_identity *who, const char *name) {
	return who->name[strspn(who->name, " ,")] != '\0' && all_words_in(who->name, name) && all_words_in(name, who->name);
}

fl_status fl_certificates_of_pem(const char *pem, size_t length, const char *file, STACK_OF(X509) * *out,
                                 fl_error *err) {
	fl_place place = {.file = file};
	STACK_OF(X509) *found = sk_X509_new_null();
	BIO *bio = length <= INT32_MAX ? BIO_new_mem_buf(pem, (int)length) : NULL;
	if (!found || !bio) {
		sk_X509_free(found);
		BIO_free(bio);
		return fl_fail_at(err, FL_E_MEMORY, place, "out of memory while reading certificates");
	}
	X509 *one;
	bool kept = true;
	while (kept && (one = PEM_read_bio_X509(bio, NULL, NULL, NULL)))
		kept = sk_X509_push(found, one) > 0;
	unsigned long code = ERR_peek_last_error();
	bool at_end = ERR_GET_LIB(code) == ERR_LIB_PEM && ERR_GET_REASON(code) == PEM_R_NO_START_LINE;
	BIO_free(bio);
	if (at_end && sk_X509_num(found) > 0) {
		ERR_clear_error();
		*out = found;
		return FL_OK;
	}
	char reason[120];
	fl_crypto_reason(reason, sizeof reason);
	int count = sk_X509_num(found);
	sk_X509_pop_free(found, X509_free);
	if (at_end)
		return fl_fail_at(err, FL_E_SYNTAX, place, "holds no certificate; PEM text with BEGIN CERTIFICATE is needed");
	return fl_fail_at(err, FL_E_SYNTAX, place, "certificate %d in it is damaged (%s); get the file again", count + 1,
	                  reason);
}

fl_status fl_identity_of_pem(const char *pem, size_t length, const char *file, fl_identity *out, fl_error *err) {
	STACK_OF(X509) * found;
	fl_status status = fl_certificates_of_pem(pem, length, file, &found, err);
	if (status != FL_OK)
		return status;
	fl_identity_of(sk_X509_value(found, 0), out);
	sk_X509_pop_free(found, X509_free);
	return FL_OK;
}

fl_status fl_certificate_for_signing(X509 *certificate, fl_error *err) {
	EVP_PKEY *key = X509_get0_pubkey(certificate);
	int type = key ? EVP_PKEY_get_base_id(key) : EVP_PKEY_NONE, bits = key ? EVP_PKEY_get_bits(key) : 0;
	if (!(type == EVP_PKEY_EC && bits >= 256) && !(type == EVP_PKEY_RSA && bits >= 2048))
		return fl_fail(err, FL_E_VALUE,
		               "the key is neither an elliptic one of at least 256 bits nor RSA of at least 2048: ask for "
		               "a certificate over such a key");
	uint32_t flags = X509_get_extension_flags(certificate), usage = X509_get_key_usage(certificate);
	if (flags & EXFLAG_INVALID)
		return fl_fail(err, FL_E_VALUE, "the certificate has damaged extensions; ask for a new one");
	if (flags & EXFLAG_CA)
		return fl_fail(err, FL_E_VALUE, "the certificate is an authority's, not a person's; sign with your own");
	if ((flags & EXFLAG_KUSAGE) && !(usage & (X509v3_KU_DIGITAL_SIGNATURE | X509v3_KU_NON_REPUDIATION)))
		return fl_fail(err, FL_E_VALUE,
		               "the certificate is not meant for signatures; ask for one with key usage "
		               "digitalSignature and nonRepudiation");
	return FL_OK;
}
