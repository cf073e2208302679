/* timestamp.c - tokens of RFC 3161 over a signature: asked for through the caller, checked by OpenSSL.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"

#include <openssl/err.h>
#include <openssl/pkcs7.h>
#include <openssl/rand.h>
#include <openssl/ts.h>
#include <stdio.h>
#include <string.h>

#define TOKEN_MOST ((size_t)12000) /* fits the room that fl_cms_room leaves */

/* ---- asking ---------------------------------------------------------------------------------------------------- */

static bool set_imprint(TS_REQ *request, const unsigned char digest[FL_SHA256_SIZE]) {
	unsigned char copy[FL_SHA256_SIZE];
	memcpy(copy, digest, sizeof copy);
	TS_MSG_IMPRINT *imprint = TS_MSG_IMPRINT_new();
	X509_ALGOR *algorithm = X509_ALGOR_new();
	bool set = imprint && algorithm;
	if (set) {
		X509_ALGOR_set_md(algorithm, EVP_sha256());
		set = TS_MSG_IMPRINT_set_algo(imprint, algorithm) == 1 &&
		      TS_MSG_IMPRINT_set_msg(imprint, copy, sizeof copy) == 1 && TS_REQ_set_msg_imprint(request, imprint) == 1;
	}
	X509_ALGOR_free(algorithm);
	TS_MSG_IMPRINT_free(imprint);
	return set;
}

static bool set_nonce(TS_REQ *request) {
	unsigned char random[8];
	uint64_t number = 0;
	if (RAND_bytes(random, sizeof random) != 1)
		return false;
	for (size_t i = 0; i < sizeof random; i++)
		number = number << 8 | random[i];
	ASN1_INTEGER *nonce = ASN1_INTEGER_new();
	bool set = nonce && ASN1_INTEGER_set_uint64(nonce, number >> 1) == 1 && TS_REQ_set_nonce(request, nonce) == 1;
	ASN1_INTEGER_free(nonce);
	return set;
}

static TS_REQ *new_request(const void *signature, size_t length) {
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces whole = {signature, length, "", 0};
	TS_REQ *request = TS_REQ_new();
	if (request && fl_pieces_digest(&whole, digest) && TS_REQ_set_version(request, 1) == 1 &&
	    set_imprint(request, digest) && set_nonce(request) && TS_REQ_set_cert_req(request, 1) == 1)
		return request;
	TS_REQ_free(request);
	return NULL;
}

static fl_status carry(const fl_timestamper *timestamper, TS_REQ *request, fl_arena *arena, unsigned char **response,
                       size_t *length, fl_error *err) {
	unsigned char *der = NULL;
	int size = i2d_TS_REQ(request, &der);
	if (size <= 0)
		return fl_crypto_fail(err, "write a request for a timestamp");
	fl_status status = timestamper->ask(timestamper->self, der, (size_t)size, arena, response, length, err);
	OPENSSL_free(der);
	return status;
}

/* The response answers this very request: status, version, imprint and nonce. */
static fl_status check_response(TS_RESP *response, TS_REQ *request, fl_error *err) {
	char reason[120];
	TS_VERIFY_CTX *context = TS_REQ_to_TS_VERIFY_CTX(request, NULL);
	if (!context)
		return fl_crypto_fail(err, "check a timestamp");
	TS_VERIFY_CTX_set_flags(context, TS_VFY_VERSION | TS_VFY_IMPRINT | TS_VFY_NONCE);
	int fits = TS_RESP_verify_response(context, response);
	TS_VERIFY_CTX_free(context);
	if (fits == 1)
		return FL_OK;
	return fl_fail(err, FL_E_VALUE, "the timestamp authority gave no timestamp for this request: %s",
	               fl_crypto_reason(reason, sizeof reason));
}

static fl_status take_token(TS_RESP *response, fl_text *token, fl_error *err) {
	unsigned char *der = NULL;
	int size = i2d_PKCS7(TS_RESP_get_token(response), &der);
	if (size <= 0)
		return fl_crypto_fail(err, "take a timestamp");
	fl_status status = FL_OK;
	if ((size_t)size > TOKEN_MOST)
		status = fl_fail(err, FL_E_RANGE, "the timestamp of %d bytes is larger than the room for it", size);
	else
		fl_text_append(token, (const char *)der, (size_t)size);
	OPENSSL_free(der);
	return status;
}

static fl_status check_own(const fl_timestamper *timestamper, const fl_text *token, const void *signature,
                           size_t length, fl_error *err) {
	fl_element stamp = {.whole = (const unsigned char *)token->data, .whole_length = token->length};
	fl_element over = {.body = signature, .length = length};
	char by[FL_NAME_SIZE], reason[160];
	fl_utc at;
	if (token->failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a timestamp");
	if (fl_timestamp_check(stamp, over, timestamper->trust, &at, by, reason, sizeof reason) != FL_STAMP_GOOD)
		return fl_fail(err, FL_E_VALUE, "the timestamp that came does not hold: %s", reason);
	return FL_OK;
}

fl_status fl_timestamp_get(const fl_timestamper *timestamper, const void *signature, size_t length, fl_text *token,
                           fl_error *err) {
	fl_arena arena = {0};
	unsigned char *bytes = NULL;
	size_t size = 0;
	TS_REQ *request = new_request(signature, length);
	TS_RESP *response = NULL;
	fl_status status = request ? carry(timestamper, request, &arena, &bytes, &size, err)
	                           : fl_crypto_fail(err, "write a request for a timestamp");
	if (status == FL_OK) {
		const unsigned char *at = bytes;
		response = size < INT32_MAX ? d2i_TS_RESP(NULL, &at, (long)size) : NULL;
		status = response ? check_response(response, request, err)
		                  : fl_fail(err, FL_E_SYNTAX, "what the timestamp authority sent is no response of RFC 3161");
	}
	if (status == FL_OK)
		status = take_token(response, token, err);
	if (status == FL_OK)
		status = check_own(timestamper, token, signature, length, err);
	TS_RESP_free(response);
	TS_REQ_free(request);
	fl_arena_free(&arena);
	ERR_clear_error();
	return status;
}

/* ---- checking -------------------------------------------------------------------------------------------------- */

/* The token when it is DER to the last byte. */
static PKCS7 *read_token(fl_element token) {
	const unsigned char *at = token.whole;
	PKCS7 *read = d2i_PKCS7(NULL, &at, (long)token.whole_length);
	unsigned char *again = NULL;
	int size = read ? i2d_PKCS7(read, &again) : 0;
	bool same = size > 0 && (size_t)size == token.whole_length && memcmp(again, token.whole, token.whole_length) == 0;
	OPENSSL_free(again);
	if (same && PKCS7_type_is_signed(read))
		return read;
	PKCS7_free(read);
	return NULL;
}

static void name_authority(PKCS7 *token, char by[FL_NAME_SIZE]) {
	STACK_OF(X509) *signers = PKCS7_get0_signers(token, NULL, 0);
	fl_identity who = {0};
	if (sk_X509_num(signers) > 0)
		fl_identity_of(sk_X509_value(signers, 0), &who);
	snprintf(by, FL_NAME_SIZE, "%s", who.name[0] ? who.name : "a timestamp authority");
	sk_X509_free(signers);
}

/* A context that wants this imprint, and what `flags` says beside; NULL when memory is out. */
static TS_VERIFY_CTX *new_context(fl_element signature, unsigned flags) {
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces whole = {signature.body, signature.length, "", 0};
	TS_VERIFY_CTX *context = TS_VERIFY_CTX_new();
	unsigned char *imprint = OPENSSL_malloc(sizeof digest);
	if (!context || !imprint || !fl_pieces_digest(&whole, digest)) {
		OPENSSL_free(imprint);
		TS_VERIFY_CTX_free(context);
		return NULL;
	}
	memcpy(imprint, digest, sizeof digest);
	TS_VERIFY_CTX_set_flags(context, (int)(TS_VFY_VERSION | TS_VFY_IMPRINT | flags));
	TS_VERIFY_CTX_set_imprint(context, imprint, sizeof digest);
	return context;
}

static bool is_over(PKCS7 *token, fl_element signature) {
	TS_VERIFY_CTX *context = new_context(signature, 0);
	bool holds = context && TS_RESP_verify_token(context, token) == 1;
	TS_VERIFY_CTX_free(context);
	return holds;
}

/* Judges at the token's own time: the authority must have been valid then. */
static bool is_vouched_for(PKCS7 *token, fl_element signature, const fl_trust *trust, fl_utc at) {
	TS_VERIFY_CTX *context = new_context(signature, TS_VFY_SIGNATURE);
	if (!context || X509_STORE_up_ref(trust->store) != 1) {
		TS_VERIFY_CTX_free(context);
		return false;
	}
	X509_VERIFY_PARAM *how = X509_STORE_get0_param(trust->store);
	X509_VERIFY_PARAM_set_time(how, (time_t)at);
	X509_VERIFY_PARAM_set_flags(how, X509_V_FLAG_PARTIAL_CHAIN);
	TS_VERIFY_CTX_set_store(context, trust->store);
	bool holds = TS_RESP_verify_token(context, token) == 1;
	X509_VERIFY_PARAM_clear_flags(how, X509_V_FLAG_USE_CHECK_TIME | X509_V_FLAG_PARTIAL_CHAIN);
	TS_VERIFY_CTX_free(context); /* and its hold on the store */
	return holds;
}

static fl_stamp judge(PKCS7 *token, fl_element signature, const fl_trust *trust, fl_utc at, char *reason,
                      size_t reason_size) {
	if (!is_over(token, signature)) {
		fl_crypto_reason(reason, reason_size);
		return FL_STAMP_BROKEN;
	}
	if (trust && is_vouched_for(token, signature, trust, at))
		return FL_STAMP_GOOD;
	fl_crypto_reason(reason, reason_size);
	return FL_STAMP_UNTRUSTED;
}

fl_stamp fl_timestamp_check(fl_element token, fl_element signature, const fl_trust *trust, fl_utc *at,
                            char by[FL_NAME_SIZE], char *reason, size_t reason_size) {
	fl_stamp stamp = FL_STAMP_BROKEN;
	PKCS7 *read = read_token(token);
	TS_TST_INFO *info = read ? PKCS7_to_TS_TST_INFO(read) : NULL;
	*at = info ? fl_utc_of(TS_TST_INFO_get_time(info)) : INT64_MIN;
	ERR_clear_error();
	if (!info || *at == INT64_MIN) {
		snprintf(reason, reason_size, "it cannot be read");
	} else {
		name_authority(read, by);
		stamp = judge(read, signature, trust, *at, reason, reason_size);
	}
	TS_TST_INFO_free(info);
	PKCS7_free(read);
	ERR_clear_error();
	return stamp;
}
