/* cms_check.c - whether a signature holds: its bytes, its certificate, the chain, the dates, the timestamp.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"

#include <openssl/err.h>
#include <openssl/x509_vfy.h>
#include <stdio.h>
#include <string.h>

bool fl_pieces_digest(const fl_pieces *pieces, unsigned char digest[FL_SHA256_SIZE]) {
	unsigned size = 0;
	EVP_MD_CTX *context = EVP_MD_CTX_new();
	bool done = context && EVP_DigestInit_ex2(context, EVP_sha256(), NULL) == 1 &&
	            EVP_DigestUpdate(context, pieces->first, pieces->first_length) == 1 &&
	            EVP_DigestUpdate(context, pieces->second, pieces->second_length) == 1 &&
	            EVP_DigestFinal_ex(context, digest, &size) == 1 && size == FL_SHA256_SIZE;
	EVP_MD_CTX_free(context);
	return done;
}

/* One signature under check. */
typedef struct fl_checking {
	const fl_cms *cms;
	const fl_trust *trust;
	fl_utc now;
	fl_arena *arena;
	fl_seal_report *report;
	fl_seal_signature *signature;
	X509 *signer;
	STACK_OF(X509) * all;
} fl_checking;

static void bad(fl_checking *checking, const char *what, const char *sentence) {
	fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, what, "%s", sentence);
}

static void good(fl_checking *checking, const char *what, const char *sentence) {
	fl_report_line(checking->report, checking->arena, FL_CHECK_GOOD, what, "%s", sentence);
}

/* ---- certificates --------------------------------------------------------------------------------------------- */

/* All certificates of the signature; false where one is damaged. The signer's is the one that is bound. */
static bool read_certificates(fl_checking *checking) {
	checking->all = sk_X509_new_null();
	for (size_t i = 0; checking->all && i < checking->cms->certificate_count; i++) {
		fl_element element = checking->cms->certificates[i];
		const unsigned char *at = element.whole;
		unsigned char digest[FL_SHA256_SIZE];
		X509 *one = d2i_X509(NULL, &at, (long)element.whole_length);
		if (!one || at != element.whole + element.whole_length || sk_X509_push(checking->all, one) <= 0) {
			X509_free(one);
			return false;
		}
		fl_pieces whole = {element.whole, element.whole_length, "", 0};
		if (fl_pieces_digest(&whole, digest) && memcmp(digest, checking->cms->certificate_digest, sizeof digest) == 0)
			checking->signer = one;
	}
	return checking->all != NULL;
}

/* Issuer and serial number in the signature are byte for byte those of the certificate. */
static bool names_signer(const fl_checking *checking) {
	fl_element named = checking->cms->issuer_and_serial;
	unsigned char *issuer = NULL, *serial = NULL;
	int issuer_length = i2d_X509_NAME(X509_get_issuer_name(checking->signer), &issuer);
	int serial_length = i2d_ASN1_INTEGER(X509_get0_serialNumber(checking->signer), &serial);
	bool same = issuer_length > 0 && serial_length > 0 && named.length == (size_t)(issuer_length + serial_length) &&
	            memcmp(named.body, issuer, (size_t)issuer_length) == 0 &&
	            memcmp(named.body + issuer_length, serial, (size_t)serial_length) == 0;
	OPENSSL_free(issuer);
	OPENSSL_free(serial);
	return same;
}

static bool check_certificate(fl_checking *checking) {
	if (!read_certificates(checking)) {
		bad(checking, "certificate", "a certificate in the signature is damaged");
		return false;
	}
	if (!checking->signer || !names_signer(checking)) {
		bad(checking, "certificate",
		    "the certificate in the signature is not the one that is bound to it: it was changed");
		return false;
	}
	fl_identity_of(checking->signer, &checking->signature->signer);
	fl_error why = {0};
	if (fl_certificate_for_signing(checking->signer, &why) != FL_OK) {
		bad(checking, "certificate", why.message);
		return false;
	}
	fl_report_line(checking->report, checking->arena, FL_CHECK_GOOD, "certificate",
	               "bound to the signature: %s%s%s, certified by %s", checking->signature->signer.name,
	               checking->signature->signer.organisation[0] ? ", " : "", checking->signature->signer.organisation,
	               checking->signature->signer.self_signed ? "themselves" : checking->signature->signer.issuer);
	return true;
}

/* ---- signature ------------------------------------------------------------------------------------------------ */

/* The attributes are signed as a SET though they are written under [0] (RFC 5652, 5.4). */
static bool signature_holds(const fl_checking *checking) {
	static const unsigned char set_tag = FL_DER_SET;
	const fl_cms *cms = checking->cms;
	EVP_PKEY *key = X509_get0_pubkey(checking->signer);
	if (!key || (EVP_PKEY_get_base_id(key) == EVP_PKEY_RSA) != cms->rsa)
		return false;
	EVP_MD_CTX *context = EVP_MD_CTX_new();
	bool holds = context && EVP_DigestVerifyInit(context, NULL, EVP_sha256(), NULL, key) == 1 &&
	             EVP_DigestVerifyUpdate(context, &set_tag, 1) == 1 &&
	             EVP_DigestVerifyUpdate(context, cms->attributes.whole + 1, cms->attributes.whole_length - 1) == 1 &&
	             EVP_DigestVerifyFinal(context, cms->signature.body, cms->signature.length) == 1;
	EVP_MD_CTX_free(context);
	ERR_clear_error();
	return holds;
}

static bool check_bytes(fl_checking *checking, const unsigned char *digest) {
	if (memcmp(digest, checking->cms->message_digest, FL_SHA256_SIZE) != 0) {
		bad(checking, "content", "what was signed has been changed: its SHA-256 is not the one in the signature");
		return false;
	}
	if (!signature_holds(checking)) {
		bad(checking, "signature", "the signature does not fit its certificate's key: one of the two was changed");
		return false;
	}
	good(checking, "content", "every byte that was signed is as it was");
	good(checking, "signature", "made with the key of that certificate");
	return true;
}

/* ---- timestamp ------------------------------------------------------------------------------------------------ */

/* The one part that the signature does not cover: a timestamp over something else breaks the seal, one that nobody
 * vouches for leaves it without trust. */
static fl_stamp check_timestamp(fl_checking *checking) {
	fl_seal_signature *signature = checking->signature;
	char reason[160], when[FL_UTC_SIZE];
	if (!checking->cms->has_timestamp)
		return FL_STAMP_GOOD;
	fl_stamp stamp = fl_timestamp_check(checking->cms->timestamp, checking->cms->signature, checking->trust,
	                                    &signature->stamped_at, signature->stamped_by, reason, sizeof reason);
	signature->stamped = stamp == FL_STAMP_GOOD;
	if (stamp == FL_STAMP_GOOD)
		fl_report_line(checking->report, checking->arena, FL_CHECK_GOOD, "timestamp",
		               "%s vouches that it existed at %s", signature->stamped_by,
		               fl_utc_format(signature->stamped_at, when));
	else if (stamp == FL_STAMP_UNTRUSTED)
		fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, "timestamp",
		               "nobody in your folder of trust vouches for the timestamp of %s (%s)", signature->stamped_by,
		               reason);
	else
		fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, "timestamp",
		               "the timestamp does not belong to this signature, or was changed: %s", reason);
	return stamp;
}

/* ---- trust ---------------------------------------------------------------------------------------------------- */

static bool is_among(STACK_OF(X509) * chain, X509 *certificate) {
	unsigned char one[EVP_MAX_MD_SIZE], other[EVP_MAX_MD_SIZE];
	unsigned size = 0;
	X509_digest(certificate, EVP_sha256(), one, &size);
	for (int i = 0; i < sk_X509_num(chain); i++)
		if (X509_digest(sk_X509_value(chain, i), EVP_sha256(), other, &size) == 1 && memcmp(one, other, size) == 0)
			return true;
	return false;
}

/* A certificate that no chain needs is covered by nothing: it could be changed unnoticed. */
static bool all_used(const fl_checking *checking, STACK_OF(X509) * chain) {
	for (int i = 0; i < sk_X509_num(checking->all); i++)
		if (!is_among(chain, sk_X509_value(checking->all, i)))
			return false;
	return true;
}

static void say_untrusted(fl_checking *checking, int reason) {
	const char *who =
	    checking->signature->signer.self_signed ? checking->signature->signer.name : checking->signature->signer.issuer;
	switch (reason) {
	case X509_V_ERR_CERT_HAS_EXPIRED:
	case X509_V_ERR_CERT_NOT_YET_VALID:
		bad(checking, "authority",
		    "a certificate was not valid at the time of signing: it was expired or not yet in force, or the signer's "
		    "clock "
		    "was off; ask the signer");
		break;
	case X509_V_ERR_CERT_SIGNATURE_FAILURE:
		bad(checking, "authority", "a certificate was changed: its authority's signature does not fit");
		break;
	case X509_V_ERR_UNABLE_TO_GET_ISSUER_CERT_LOCALLY:
	case X509_V_ERR_UNABLE_TO_GET_ISSUER_CERT:
	case X509_V_ERR_UNABLE_TO_VERIFY_LEAF_SIGNATURE:
	case X509_V_ERR_SELF_SIGNED_CERT_IN_CHAIN:
	case X509_V_ERR_DEPTH_ZERO_SELF_SIGNED_CERT:
		fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, "authority",
		               "nobody in your folder of trust vouches for the signer: if you know %s otherwise, put that "
		               "certificate there (compare its fingerprint with its owner first)",
		               who);
		break;
	default:
		fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, "authority",
		               "the certificate does not hold: %s", X509_verify_cert_error_string(reason));
	}
}

static void check_chain(fl_checking *checking, fl_utc at) {
	STACK_OF(X509) *chain = NULL;
	int reason;
	if (!fl_trust_chain(checking->trust, checking->signer, checking->all, at, &chain, &reason)) {
		say_untrusted(checking, reason);
		return;
	}
	if (all_used(checking, chain)) {
		checking->signature->trusted = true;
		good(checking, "authority", "the certificate leads to one in your folder of trust and was valid then");
	} else {
		bad(checking, "authority", "the signature carries a certificate that does not belong to its chain");
		checking->signature->fits = false;
	}
	sk_X509_pop_free(chain, X509_free);
}

static void check_now(fl_checking *checking) {
	int reason;
	char day[FL_DAY_SIZE];
	if (!checking->signature->trusted)
		return;
	checking->signature->valid_now =
	    fl_trust_chain(checking->trust, checking->signer, checking->all, checking->now, NULL, &reason);
	if (checking->signature->valid_now)
		fl_report_line(checking->report, checking->arena, FL_CHECK_GOOD, "valid now", "until %s",
		               fl_day_format(fl_day_of(checking->signature->signer.valid_until), day));
	else
		fl_report_line(checking->report, checking->arena, FL_CHECK_NOTE, "valid now",
		               "no longer (%s); the seal stands if it was made before, which %s",
		               X509_verify_cert_error_string(reason),
		               checking->signature->stamped ? "its timestamp shows" : "only the signer's own clock says");
}

/* Five minutes are let pass as the difference of two clocks. */
static void check_time(fl_checking *checking, fl_utc at) {
	char when[FL_UTC_SIZE];
	checking->signature->signed_at = at;
	checking->signature->has_time = true;
	if (at > checking->now + 300) {
		fl_report_line(checking->report, checking->arena, FL_CHECK_NOTE, "time",
		               "signed at %s, which lies in the future: this clock or the signer's is off",
		               fl_utc_format(at, when));
		return;
	}
	fl_report_line(checking->report, checking->arena, FL_CHECK_GOOD, "time", "signed at %s by the signer's clock",
	               fl_utc_format(at, when));
}

void fl_cms_check(const fl_cms *cms, const unsigned char digest[FL_SHA256_SIZE], fl_utc at, const fl_trust *trust,
                  fl_utc now, fl_arena *arena, fl_seal_report *report) {
	fl_checking checking = {.cms = cms, .trust = trust, .now = now, .arena = arena, .report = report};
	checking.signature = &report->signatures[report->signature_count - 1];
	if (cms->has_role) {
		memcpy(checking.signature->role, cms->role.body, cms->role.length);
		checking.signature->role[cms->role.length] = '\0';
	}
	fl_utc then = cms->has_time ? cms->time : at;
	bool fits = check_certificate(&checking) && check_bytes(&checking, digest);
	if (fits) {
		check_time(&checking, then);
		fl_stamp stamp = check_timestamp(&checking);
		checking.signature->fits = stamp != FL_STAMP_BROKEN;
		check_chain(&checking, checking.signature->stamped ? checking.signature->stamped_at : then);
		check_now(&checking);
		checking.signature->trusted = checking.signature->trusted && stamp == FL_STAMP_GOOD;
	}
	sk_X509_pop_free(checking.all, X509_free);
	ERR_clear_error();
}
