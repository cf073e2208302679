/* cms_write.c - writes a signature of the shape that cms.h states.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * OpenSSL's own CMS writer always adds the signing time, which PAdES does not want (ETSI EN 319 142-1, 6.3), and would
 * sign twice to be rid of it. The DER is small enough to be put together here; the signature itself is OpenSSL's. */
#include "cms.h"
#include "cms_oid.h"

#include <openssl/err.h>
#include <stdio.h>
#include <string.h>

#define PARTS_MOST 8

/* ---- sets in DER order --------------------------------------------------------------------------------------- */

typedef struct fl_set {
	fl_text parts[PARTS_MOST];
	size_t count;
} fl_set;

/* Order of X.690, 11.6: by the bytes, the shorter one first where one begins the other. */
static int compare_parts(const fl_text *a, const fl_text *b) {
	size_t least = a->length < b->length ? a->length : b->length;
	int order = memcmp(a->data, b->data, least);
	return order ? order : (a->length > b->length) - (a->length < b->length);
}

/* Takes the part's memory into its place. */
static void set_insert(fl_set *set, fl_text *part) {
	size_t at = set->count++;
	for (; at > 0 && !part->failed && !set->parts[at - 1].failed && compare_parts(&set->parts[at - 1], part) > 0; at--)
		set->parts[at] = set->parts[at - 1];
	set->parts[at] = *part;
	*part = (fl_text){0};
}

/* Appends all parts under the tag and frees them. */
static void set_write(fl_set *set, unsigned tag, fl_text *out) {
	fl_text body = {0};
	for (size_t i = 0; i < set->count; i++) {
		if (set->parts[i].failed)
			out->failed = true;
		else
			fl_text_append(&body, set->parts[i].data, set->parts[i].length);
		fl_text_free(&set->parts[i]);
	}
	set->count = 0;
	fl_der_wrap(out, tag, &body);
	fl_text_free(&body);
}

/* ---- attributes ---------------------------------------------------------------------------------------------- */

/* SEQUENCE { type, SET { value } } into the set. */
static void add_attribute(fl_set *set, const char *type, size_t type_length, const fl_text *value) {
	fl_text body = {0}, attribute = {0};
	fl_text_append(&body, type, type_length);
	fl_der_add(&body, FL_DER_SET, value->data, value->length);
	fl_der_wrap(&attribute, FL_DER_SEQUENCE, &body);
	if (value->failed)
		attribute.failed = true;
	fl_text_free(&body);
	set_insert(set, &attribute);
}

/* SigningCertificateV2 { { ESSCertIDv2 { digest } } }; SHA-256 is the default and so not written. */
static void add_signing_certificate(fl_set *set, X509 *certificate) {
	unsigned char digest[EVP_MAX_MD_SIZE];
	unsigned size = 0;
	fl_text value = {0}, body = {0};
	if (X509_digest(certificate, EVP_sha256(), digest, &size) != 1 || size != FL_SHA256_SIZE)
		value.failed = true;
	fl_der_add(&value, FL_DER_OCTET_STRING, digest, size);
	for (int level = 0; level < 3; level++) {
		body = value;
		value = (fl_text){0};
		fl_der_wrap(&value, FL_DER_SEQUENCE, &body);
		fl_text_free(&body);
	}
	add_attribute(set, FL_BYTES(FL_OID_SIGNING_CERTIFICATE), &value);
	fl_text_free(&value);
}

/* RFC 5652, 11.3: UTCTime to the year 2049, GeneralizedTime after. */
static void add_time(fl_set *set, fl_utc at) {
	char iso[FL_UTC_SIZE], digits[FL_UTC_SIZE];
	size_t count = 0;
	for (const char *from = fl_utc_format(at, iso); *from; from++)
		if ((*from >= '0' && *from <= '9') || *from == 'Z')
			digits[count++] = *from;
	bool short_year = memcmp(digits, "2050", 4) < 0;
	fl_text value = {0};
	if (short_year)
		fl_der_add(&value, FL_DER_UTC_TIME, digits + 2, count - 2);
	else
		fl_der_add(&value, FL_DER_GENERAL_TIME, digits, count);
	add_attribute(set, FL_BYTES(FL_OID_SIGNING_TIME), &value);
	fl_text_free(&value);
}

static void add_element(fl_set *set, const char *type, size_t type_length, unsigned tag, const void *body,
                        size_t length) {
	fl_text value = {0};
	fl_der_add(&value, tag, body, length);
	add_attribute(set, type, type_length, &value);
	fl_text_free(&value);
}

/* The signed attributes as the SET that is signed. */
static void write_attributes(const fl_signer *signer, const unsigned char *digest, const fl_cms_signing *signing,
                             fl_text *out) {
	fl_set set = {0};
	fl_text data = {0};
	fl_text_append(&data, FL_BYTES(FL_OID_DATA));
	add_attribute(&set, FL_BYTES(FL_OID_CONTENT_TYPE), &data);
	fl_text_free(&data);
	add_element(&set, FL_BYTES(FL_OID_MESSAGE_DIGEST), FL_DER_OCTET_STRING, digest, FL_SHA256_SIZE);
	add_signing_certificate(&set, signer->certificate);
	if (signing->with_time)
		add_time(&set, signing->at);
	if (signing->with_time && signing->role)
		add_element(&set, FL_BYTES(FL_OID_DESCRIPTION), FL_DER_UTF8, signing->role, strlen(signing->role));
	set_write(&set, FL_DER_SET, out);
}

/* ---- signature and frame ------------------------------------------------------------------------------------- */

static fl_status raw_signature(const fl_signer *signer, const fl_text *attributes, fl_text *out, fl_error *err) {
	unsigned char signature[1024];
	size_t size = sizeof signature;
	EVP_MD_CTX *context = EVP_MD_CTX_new();
	bool done =
	    context && EVP_DigestSignInit(context, NULL, EVP_sha256(), NULL, signer->key) == 1 &&
	    EVP_DigestSign(context, signature, &size, (const unsigned char *)attributes->data, attributes->length) == 1;
	EVP_MD_CTX_free(context);
	if (!done)
		return fl_crypto_fail(err, "sign");
	fl_text_append(out, (const char *)signature, size);
	return FL_OK;
}

static void write_certificate(X509 *certificate, fl_text *out) {
	unsigned char *der = NULL;
	int length = i2d_X509(certificate, &der);
	if (length > 0)
		fl_text_append(out, (const char *)der, (size_t)length);
	else
		out->failed = true;
	OPENSSL_free(der);
}

static void write_certificates(const fl_signer *signer, fl_text *out) {
	fl_set set = {0};
	fl_text one = {0};
	write_certificate(signer->certificate, &one);
	set_insert(&set, &one);
	for (int i = 0; i < sk_X509_num(signer->between) && set.count < PARTS_MOST; i++) {
		write_certificate(sk_X509_value(signer->between, i), &one);
		set_insert(&set, &one);
	}
	set_write(&set, FL_DER_CONTEXT_0, out);
}

static void write_issuer_and_serial(X509 *certificate, fl_text *out) {
	fl_text body = {0};
	unsigned char *der = NULL;
	int length = i2d_X509_NAME(X509_get_issuer_name(certificate), &der);
	if (length > 0)
		fl_text_append(&body, (const char *)der, (size_t)length);
	OPENSSL_free(der);
	der = NULL;
	int more = i2d_ASN1_INTEGER(X509_get0_serialNumber(certificate), &der);
	if (more > 0)
		fl_text_append(&body, (const char *)der, (size_t)more);
	OPENSSL_free(der);
	body.failed = body.failed || length <= 0 || more <= 0;
	fl_der_wrap(out, FL_DER_SEQUENCE, &body);
	fl_text_free(&body);
}

static void write_signer_info(const fl_signer *signer, const fl_text *attributes, const fl_text *signature,
                              const fl_text *token, fl_text *out) {
	bool rsa = EVP_PKEY_get_base_id(signer->key) == EVP_PKEY_RSA;
	fl_text body = {0};
	fl_text_append(&body, FL_BYTES(FL_VERSION_1));
	write_issuer_and_serial(signer->certificate, &body);
	fl_text_append(&body, FL_BYTES(FL_ALGORITHM_SHA256));
	size_t at = body.length;
	fl_text_append(&body, attributes->data, attributes->length);
	if (!body.failed)
		body.data[at] = (char)FL_DER_CONTEXT_0; /* the SET that was signed is written under its implicit tag */
	if (rsa)
		fl_text_append(&body, FL_BYTES(FL_ALGORITHM_RSA));
	else
		fl_text_append(&body, FL_BYTES(FL_ALGORITHM_ECDSA));
	fl_der_add(&body, FL_DER_OCTET_STRING, signature->data, signature->length);
	if (token->length > 0) {
		fl_set set = {0};
		add_attribute(&set, FL_BYTES(FL_OID_TIMESTAMP), token);
		set_write(&set, FL_DER_CONTEXT_1, &body);
	}
	fl_der_wrap(out, FL_DER_SEQUENCE, &body);
	fl_text_free(&body);
}

static void write_frame(const fl_signer *signer, const fl_text *attributes, const fl_text *signature,
                        const fl_text *token, fl_text *out) {
	fl_text inner = {0}, part = {0}, data = {0}, info = {0};
	fl_text_append(&data, FL_BYTES(FL_VERSION_1));
	fl_der_add(&data, FL_DER_SET, FL_BYTES(FL_ALGORITHM_SHA256));
	fl_text_append(&data, FL_BYTES(FL_DETACHED_DATA));
	write_certificates(signer, &data);
	write_signer_info(signer, attributes, signature, token, &part);
	fl_der_wrap(&data, FL_DER_SET, &part);
	fl_der_wrap(&inner, FL_DER_SEQUENCE, &data);
	fl_text_append(&info, FL_BYTES(FL_OID_SIGNED_DATA));
	fl_der_wrap(&info, FL_DER_CONTEXT_0, &inner);
	fl_der_wrap(out, FL_DER_SEQUENCE, &info);
	fl_text_free(&inner);
	fl_text_free(&part);
	fl_text_free(&data);
	fl_text_free(&info);
}

/* A seal whose certificate was not valid then would be born broken. */
static fl_status refuse_dates(const fl_signer *signer, fl_utc at, fl_error *err) {
	const fl_identity *who = &signer->identity;
	char day[FL_DAY_SIZE];
	if (!signer->certificate)
		return fl_fail(err, FL_E_STATE, "the key has no certificate yet; make one or send its request to an authority");
	if (at > who->valid_until)
		return fl_fail(err, FL_E_STATE, "the certificate of %s expired on %s; get a new one, or check the clock",
		               who->name, fl_day_format(fl_day_of(who->valid_until), day));
	if (at < who->valid_from)
		return fl_fail(err, FL_E_STATE, "the certificate of %s is valid from %s only; check the clock", who->name,
		               fl_day_format(fl_day_of(who->valid_from), day));
	return FL_OK;
}

static fl_status refuse_role(const char *role, fl_error *err) {
	if (role && (strlen(role) >= FL_NAME_SIZE || !fl_utf8_valid(role, strlen(role)) || fl_text_has_control(role)))
		return fl_fail(err, FL_E_VALUE, "the role is too long, or holds a control character");
	return FL_OK;
}

fl_status fl_cms_sign(const fl_signer *signer, const unsigned char digest[FL_SHA256_SIZE],
                      const fl_cms_signing *signing, fl_text *out, fl_error *err) {
	fl_text attributes = {0}, signature = {0}, token = {0};
	fl_status status = refuse_dates(signer, signing->at, err);
	if (status == FL_OK)
		status = refuse_role(signing->role, err);
	if (status == FL_OK) {
		write_attributes(signer, digest, signing, &attributes);
		status = attributes.failed ? fl_fail(err, FL_E_MEMORY, "out of memory for a signature")
		                           : raw_signature(signer, &attributes, &signature, err);
	}
	if (status == FL_OK && signing->timestamper)
		status = fl_timestamp_get(signing->timestamper, signature.data, signature.length, &token, err);
	if (status == FL_OK) {
		write_frame(signer, &attributes, &signature, &token, out);
		if (out->failed || signature.failed || token.failed)
			status = fl_fail(err, FL_E_MEMORY, "out of memory for a signature");
	}
	fl_text_free(&attributes);
	fl_text_free(&signature);
	fl_text_free(&token);
	return status;
}

size_t fl_cms_room(const fl_signer *signer, bool timestamped) {
	size_t room = 512 + (size_t)EVP_PKEY_get_size(signer->key);
	int length = signer->certificate ? i2d_X509(signer->certificate, NULL) : 0;
	room += 2 * (size_t)(length > 0 ? length : 0); /* its issuer's name stands in the signer's part again */
	for (int i = 0; i < sk_X509_num(signer->between); i++) {
		length = i2d_X509(sk_X509_value(signer->between, i), NULL);
		room += (size_t)(length > 0 ? length : 0);
	}
	return room + (timestamped ? 12288 : 0);
}
