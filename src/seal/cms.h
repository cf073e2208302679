/* cms.h - the one shape of a signature: detached CMS over SHA-256 with the signing certificate bound (RFC 5652, 5035,
 * 5754; ETSI EN 319 122-1). Written and read by hand, so that what is read is exactly what can be written.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * ContentInfo { signedData, [0] SignedData { 1, { sha-256 }, { data },
 *   [0] certificates: the signer's and those between, nothing else
 *   { SignerInfo { 1, issuer and serial number, sha-256,
 *       [0] signed attributes: content type, message digest, signing certificate v2, each once, in DER order;
 *           in a seal beside a file also signing time and signing description (the role), in a PDF neither
 *       ecdsa-with-SHA256 or sha256WithRSAEncryption, signature,
 *       [1] optional: one unsigned attribute, a timestamp token over the signature } } } } */
#ifndef FOUNDLEFT_SEAL_CMS_H
#define FOUNDLEFT_SEAL_CMS_H

#include "der.h"
#include "key.h"

#define FL_SHA256_SIZE 32

/* Bytes that stand in two pieces, as a PDF's do around its signature. */
typedef struct fl_pieces {
	const void *first;
	size_t first_length;
	const void *second;
	size_t second_length;
} fl_pieces;

bool fl_pieces_digest(const fl_pieces *pieces, unsigned char digest[FL_SHA256_SIZE]);

/* What goes into a signature beside the digest. */
typedef struct fl_cms_signing {
	bool with_time; /* signing time and role as attributes */
	fl_utc at;
	const char *role;
	const fl_timestamper *timestamper; /* NULL: none */
} fl_cms_signing;

/* Appends the DER of the signature over that digest. */
fl_status fl_cms_sign(const fl_signer *signer, const unsigned char digest[FL_SHA256_SIZE],
                      const fl_cms_signing *signing, fl_text *out, fl_error *err) FL_MUST_USE;
/* No signature of the signer is longer than this. */
size_t fl_cms_room(const fl_signer *signer, bool timestamped);

/* A signature taken apart; borrows the bytes. */
typedef struct fl_cms {
	fl_element certificates[FL_CHAIN_MOST];
	size_t certificate_count;
	fl_element issuer_and_serial;
	fl_element attributes;                   /* whole, with its tag [0] */
	const unsigned char *message_digest;     /* FL_SHA256_SIZE bytes */
	const unsigned char *certificate_digest; /* FL_SHA256_SIZE bytes */
	bool has_time, has_role;
	fl_utc time;
	fl_element role;
	bool rsa;
	fl_element signature;
	bool has_timestamp;
	fl_element timestamp; /* the token */
} fl_cms;

/* FL_E_SYNTAX with what is wrong where bytes[length] is not exactly one signature of that shape. */
fl_status fl_cms_read(const unsigned char *bytes, size_t length, fl_cms *out, fl_error *err) FL_MUST_USE;

/* Checks signature, certificate binding, chain, dates and timestamp over that digest; adds its lines and one signature
 * to the report. `at` is the time that stands beside the signature where it has none of its own. */
void fl_cms_check(const fl_cms *cms, const unsigned char digest[FL_SHA256_SIZE], fl_utc at, const fl_trust *trust,
                  fl_utc now, fl_arena *arena, fl_seal_report *report);

/* ---- timestamp.c */

/* Token (DER) over the SHA-256 of signature[length] from the authority. */
fl_status fl_timestamp_get(const fl_timestamper *timestamper, const void *signature, size_t length, fl_text *token,
                           fl_error *err) FL_MUST_USE;
typedef enum fl_stamp {
	FL_STAMP_GOOD,      /* over that signature, and its authority is trusted at the time it states */
	FL_STAMP_UNTRUSTED, /* over that signature, but nobody vouches for its authority */
	FL_STAMP_BROKEN     /* not readable, or over something else */
} fl_stamp;
/* Checks a token over that signature; *reason is a sentence unless it is good. */
fl_stamp fl_timestamp_check(fl_element token, fl_element signature, const fl_trust *trust, fl_utc *at,
                            char by[FL_NAME_SIZE], char *reason, size_t reason_size);

/* ---- report.c */

void fl_report_line(fl_seal_report *report, fl_arena *arena, fl_check_mark mark, const char *what, const char *format,
                    ...) FL_PRINTF(5, 6);
/* A new signature at the report's end; NULL when memory is out. Lines that follow belong to it. */
fl_seal_signature *fl_report_signature(fl_seal_report *report, fl_arena *arena);
/* Sets the verdict from the lines and signatures. */
void fl_report_finish(fl_seal_report *report);

#endif
