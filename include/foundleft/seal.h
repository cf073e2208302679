/* foundleft/seal.h - digests, keys and certificates of people, trust, signatures over bytes and in PDF files, and the
 * reader that checks them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Two kinds of seal, one shape of signature (detached CMS, RFC 5652, SHA-256, signing-certificate-v2 of RFC 5035):
 *   - over any bytes (a journal, a record): a file of its own beside them (FL_SEAL_SUFFIX) that holds the DER and
 *     nothing else, with the signing time and the signer's part in it
 *   - in a PDF: PAdES baseline B-B (ETSI EN 319 142-1), or B-T with a timestamp of RFC 3161, as an incremental update,
 *     with a visible block on the page. A second person can sign after the first.
 * The reader accepts exactly the shape that is written here, so that no byte of a sealed file is left that could be
 * changed unnoticed. OpenSSL does all arithmetic of keys, ciphers and chains. Nothing here reads the clock.
 */
#ifndef FOUNDLEFT_SEAL_H
#define FOUNDLEFT_SEAL_H

#include "foundleft/base.h"

#define FL_DIGEST_HEX_SIZE 65

/* A SHA-256 hasher that is used many times (FIPS 180-4, by OpenSSL). */
typedef struct fl_hasher fl_hasher;
fl_status fl_hasher_new(fl_hasher **out, fl_error *err) FL_MUST_USE;
void fl_hasher_free(fl_hasher *hasher);
/* Lower-case hexadecimal SHA-256 of bytes[length], terminated. */
fl_status fl_seal_digest(fl_hasher *hasher, const void *bytes, size_t length, char hex[FL_DIGEST_HEX_SIZE],
                         fl_error *err) FL_MUST_USE;

/* ---- secrets ------------------------------------------------------------------------------------------------- */

/* A passphrase. The caller owns the memory; every function that takes one wipes it before it returns, whatever the
 * outcome, and sets the length to 0. */
typedef struct fl_secret {
	unsigned char *bytes;
	size_t length;
} fl_secret;
void fl_secret_wipe(fl_secret *secret);
/* The shortest passphrase that a new key is stored with. */
#define FL_PASSPHRASE_LEAST 8

/* ---- people, keys and certificates ---------------------------------------------------------------------------- */

#define FL_NAME_SIZE 260 /* 64 characters of UTF-8 (the bound of X.520), terminated */

typedef enum fl_key_kind {
	FL_KEY_P256,   /* ECDSA on NIST P-256: small and fast, the default */
	FL_KEY_RSA3072 /* for authorities that issue only RSA; the same bytes give the same signature */
} fl_key_kind;

/* Who a certificate is asked or made for. Borrowed UTF-8; organisation and role may be NULL. At most 64 characters
 * each, no control characters. The role stands as organisational unit. */
typedef struct fl_person {
	const char *name;
	const char *organisation;
	const char *role;
} fl_person;

/* What a certificate says of its holder, as text for people. */
typedef struct fl_identity {
	char name[FL_NAME_SIZE];
	char organisation[FL_NAME_SIZE]; /* "" if none */
	char role[FL_NAME_SIZE];         /* "" if none */
	char issuer[FL_NAME_SIZE];       /* the authority's name, or the holder's own if self-signed */
	char serial[64];                 /* hexadecimal; longer ones are cut */
	char fingerprint[FL_DIGEST_HEX_SIZE];
	char key_digest[FL_DIGEST_HEX_SIZE]; /* SHA-256 of the public key */
	char key[24];                        /* "EC 256 bit", "RSA 3072 bit" */
	fl_utc valid_from, valid_until;
	bool self_signed;
} fl_identity;

/* Reads the first certificate of PEM text. `file` names its source in errors. */
fl_status fl_identity_of_pem(const char *pem, size_t length, const char *file, fl_identity *out,
                             fl_error *err) FL_MUST_USE;
/* True if both certificates are of one person as far as they can tell: the same key, or the same name in the same
 * organisation (letter case and repeated spaces aside). */
bool fl_identity_same_person(const fl_identity *a, const fl_identity *b);
/* True if the certificate is of somebody of that name: the same words in any order, letter case (of ASCII), commas and
 * repeated spaces aside, as authorities write names their own way. */
bool fl_identity_is_named(const fl_identity *who, const char *name);

/* A private key and, once there is one, its certificate with those of the authorities between. */
typedef struct fl_signer fl_signer;
void fl_signer_free(fl_signer *signer);
/* A new key without certificate. */
fl_status fl_signer_new(fl_key_kind kind, fl_signer **out, fl_error *err) FL_MUST_USE;
/* PKCS#10 request for an authority, as PEM, appended to `pem`. */
fl_status fl_signer_request(const fl_signer *signer, const fl_person *person, fl_text *pem, fl_error *err) FL_MUST_USE;
/* Gives the key a certificate signed by itself: key usage digitalSignature and nonRepudiation, no authority. */
fl_status fl_signer_self_sign(fl_signer *signer, const fl_person *person, fl_utc from, int days,
                              fl_error *err) FL_MUST_USE;
/* Takes what an authority issued (PEM: the person's certificate and any between it and the authority, in any order).
 * FL_E_VALUE where none fits the key, or where it is not meant for signing. */
fl_status fl_signer_take(fl_signer *signer, const char *pem, size_t length, const char *file,
                         fl_error *err) FL_MUST_USE;
/* Key and certificates of a PKCS#12 file. FL_E_STATE for a wrong passphrase. */
fl_status fl_signer_import(const unsigned char *bytes, size_t length, const char *file, fl_secret *passphrase,
                           fl_signer **out, fl_error *err) FL_MUST_USE;
/* Writes folder/NAME.key (PKCS#8, AES-256 under scrypt, mode 0600) and, if there is one, folder/NAME.crt (PEM). Never
 * replaces an existing key; `fl_signer_save_certificate` writes the certificate alone and may replace it. */
fl_status fl_signer_save(const fl_signer *signer, const fl_io *io, const char *folder, const char *name,
                         fl_secret *passphrase, fl_error *err) FL_MUST_USE;
fl_status fl_signer_save_certificate(const fl_signer *signer, const fl_io *io, const char *folder, const char *name,
                                     fl_error *err) FL_MUST_USE;
/* Opens folder/NAME.key and NAME.crt (absent: a signer that can only make requests). FL_E_STATE for a wrong
 * passphrase; FL_E_READ_ONLY where others than the owner may read the key file. */
fl_status fl_signer_open(const fl_io *io, const char *folder, const char *name, fl_secret *passphrase, fl_signer **out,
                         fl_error *err) FL_MUST_USE;
/* The signer's certificate in words; NULL while it has none. Lives as long as the signer. */
const fl_identity *fl_signer_identity(const fl_signer *signer);
/* The certificate, then those between, as PEM appended to `pem`: to hand on, or to put into a folder of trust. */
fl_status fl_signer_pem(const fl_signer *signer, fl_text *pem, fl_error *err) FL_MUST_USE;

/* ---- trust ------------------------------------------------------------------------------------------------------ */

/* Certificates of authorities (and of people who certified themselves) that the user decided to trust. */
typedef struct fl_trust fl_trust;
fl_status fl_trust_new(fl_trust **out, fl_error *err) FL_MUST_USE;
void fl_trust_free(fl_trust *trust);
/* Adds all certificates of PEM text; *added (if not NULL) counts them. */
fl_status fl_trust_add(fl_trust *trust, const char *pem, size_t length, const char *file, size_t *added,
                       fl_error *err) FL_MUST_USE;
/* Adds all files of the folder that end in .pem, .crt or .cer. A damaged one is an error that names it. */
fl_status fl_trust_add_folder(fl_trust *trust, const fl_io *io, const char *folder, size_t *added,
                              fl_error *err) FL_MUST_USE;

/* ---- timestamps ------------------------------------------------------------------------------------------------- */

/* Carries a request of RFC 3161 to the authority and brings its response (arena memory). How is the caller's matter. */
typedef struct fl_timestamper {
	void *self;
	fl_status (*ask)(void *self, const unsigned char *request, size_t length, fl_arena *arena, unsigned char **response,
	                 size_t *response_length, fl_error *err);
	const fl_trust *trust; /* the authority of timestamps must be in it */
} fl_timestamper;

/* An authority that is asked by HTTP. Its token is signed, so that the way to it need not be: https is not for this. */
typedef struct fl_stamp_server {
	const char *url;              /* "http://host:port/path" */
	const char *proxy, *no_proxy; /* as in the variables http_proxy and no_proxy; NULL: none */
	int timeout_s;
} fl_stamp_server;
/* A timestamper that asks the server; borrows both. FL_E_VALUE where the URL is not one. */
fl_status fl_stamp_server_timestamper(fl_stamp_server *server, const fl_trust *trust, fl_timestamper *out,
                                      fl_error *err) FL_MUST_USE;

/* ---- sealing bytes ---------------------------------------------------------------------------------------------- */

#define FL_SEAL_SUFFIX ".fls"

/* Seals bytes[length]: appends the DER of the seal to `seal`. `role` is the signer's part (performed, reviewed,
 * authorised), kept in the seal; `timestamper` may be NULL. FL_E_STATE while the signer has no certificate, or where it
 * is not valid at `at`. */
fl_status fl_seal_bytes(const fl_signer *signer, const void *bytes, size_t length, const char *role, fl_utc at,
                        const fl_timestamper *timestamper, fl_text *seal, fl_error *err) FL_MUST_USE;

/* ---- what a check found ------------------------------------------------------------------------------------------ */

typedef enum fl_check_mark {
	FL_CHECK_GOOD,
	FL_CHECK_NOTE, /* worth knowing, no fault: expired since, trusted by nobody asked */
	FL_CHECK_BAD
} fl_check_mark;

/* One thing checked. */
typedef struct fl_check_line {
	fl_check_mark mark;
	int signature;      /* 1-based, 0 for the file as a whole */
	char what[40];      /* "byte range", "authority" */
	char sentence[300]; /* what was found, and what to do where it is bad */
} fl_check_line;

typedef enum fl_seal_verdict {
	FL_SEAL_NONE,      /* nobody has sealed it */
	FL_SEAL_GOOD,      /* every byte fits and every signer is vouched for */
	FL_SEAL_UNTRUSTED, /* every byte fits, but a signer is not vouched for, or was not valid when signing */
	FL_SEAL_BROKEN     /* something was changed, added, or is not as a seal must be */
} fl_seal_verdict;

typedef struct fl_seal_signature {
	fl_identity signer;
	char role[FL_NAME_SIZE];
	fl_utc signed_at; /* as the signer's clock said */
	bool has_time;
	bool fits;    /* the bytes are those that were signed, and the seal has the right shape */
	bool trusted; /* the chain leads into the trust, at the time of signing */
	bool valid_now;
	bool stamped; /* a timestamp vouches for the time */
	fl_utc stamped_at;
	char stamped_by[FL_NAME_SIZE];
	size_t covers; /* bytes from the file's beginning */
} fl_seal_signature;

/* The outcome of a check; all memory is the arena's. */
typedef struct fl_seal_report {
	fl_seal_verdict verdict;
	fl_check_line *lines;
	size_t line_count, line_capacity;
	fl_seal_signature *signatures;
	size_t signature_count, signature_capacity;
	size_t base_length; /* PDF: length of the file before the first signature, as the certificate stage made it */
	bool failed;        /* memory ran out: the report is not to be used */
} fl_seal_report;

/* Checks a seal of fl_seal_bytes. `trust` may be NULL: then nobody is trusted. FL_E_SYNTAX with the reason where the
 * seal is no seal of that shape; otherwise FL_OK, and the report tells. */
fl_status fl_seal_check(const void *bytes, size_t length, const void *seal, size_t seal_length, const fl_trust *trust,
                        fl_utc now, fl_arena *arena, fl_seal_report *report, fl_error *err) FL_MUST_USE;

/* ---- PDF -----------------------------------------------------------------------------------------------------------
 */

/* A face for the visible block: what it looks up and how it is cut down to the glyphs in use. Glyph 0 is "no such
 * character"; lengths in thousandths of the em. `subset` gives a TrueType file that holds glyphs[0..count-1] under the
 * numbers 0 to count-1 (parts of composed glyphs behind them), as arena memory. */
typedef struct fl_seal_face {
	const void *self;
	const char *name; /* PostScript name */
	int ascent, descent, cap_height, x_height;
	int box[4];
	unsigned (*glyph)(const void *self, uint32_t point);
	double (*advance)(const void *self, unsigned glyph);
	fl_status (*subset)(const void *self, const uint16_t *glyphs, size_t count, fl_arena *arena, unsigned char **out,
	                    size_t *length, size_t *glyph_count, fl_error *err);
} fl_seal_face;

/* A rectangle on a page, in points from the lower left corner. `page` counts from 1; 0 is the last page. */
typedef struct fl_seal_place {
	int page;
	double left, bottom, width, height;
} fl_seal_place;

#define FL_SEAL_TEXT_LINES 6

typedef struct fl_pdf_signing {
	const char *role; /* the signer's part; the PDF's reason */
	fl_utc at;
	fl_seal_place place;
	const char *const *text; /* lines of the visible block: who, when, which role */
	size_t text_count;       /* 1 to FL_SEAL_TEXT_LINES */
	const fl_seal_face *face;
	const fl_timestamper *timestamper; /* NULL: none */
} fl_pdf_signing;

/* Signs a PDF as an incremental update: bytes[length] stay as they are, *out (malloc'ed, the caller frees) holds them
 * and the signature. The file is a plain one as src/certificate makes (classic cross-reference table), unsigned or
 * signed by this function before. A file that fits PDF/A-1b before fits it after.
 * FL_E_STATE: no certificate, not valid at that time, or the person has signed the file already.
 * FL_E_TAMPERED: an earlier signature does not hold. FL_E_SYNTAX: not a PDF of that kind. */
fl_status fl_pdf_sign(const unsigned char *bytes, size_t length, const fl_signer *signer, const fl_pdf_signing *signing,
                      unsigned char **out, size_t *out_length, fl_error *err) FL_MUST_USE;

/* Checks every signature of a PDF. `trust` may be NULL. `places` (if place_count is not 0) are where visible blocks may
 * stand: one outside of them counts as changed content. FL_E_SYNTAX with the reason where the file cannot be read as a
 * PDF of the kind that fl_pdf_sign makes; otherwise FL_OK, and the report tells. */
fl_status fl_pdf_check(const unsigned char *bytes, size_t length, const fl_trust *trust, fl_utc now,
                       const fl_seal_place *places, size_t place_count, fl_arena *arena, fl_seal_report *report,
                       fl_error *err) FL_MUST_USE;

#endif
