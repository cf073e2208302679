/* key.h - inside of signers, identities and trust, shared by the files of this stage.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_SEAL_KEY_H
#define FOUNDLEFT_SEAL_KEY_H

#include "foundleft/seal.h"

#include <openssl/evp.h>
#include <openssl/x509.h>

#define FL_CHAIN_MOST 8

struct fl_signer {
	EVP_PKEY *key;
	X509 *certificate;        /* NULL until there is one */
	STACK_OF(X509) * between; /* authorities between; may be NULL */
	fl_identity identity;     /* of the certificate */
};

struct fl_trust {
	X509_STORE *store;
};

/* The library's last reason as text, its queue emptied: for sentences. Returns out. */
char *fl_crypto_reason(char *out, size_t size);
/* FL_E_INTERNAL with what was tried and the library's reason. */
fl_status fl_crypto_fail(fl_error *err, const char *tried);

void fl_identity_of(X509 *certificate, fl_identity *out);
fl_utc fl_utc_of(const ASN1_TIME *time); /* INT64_MIN where it is no time */

/* Reads all certificates of PEM text into a new stack; FL_E_SYNTAX where there is none or one is damaged. */
fl_status fl_certificates_of_pem(const char *pem, size_t length, const char *file, STACK_OF(X509) * *out,
                                 fl_error *err) FL_MUST_USE;
/* FL_E_VALUE with a sentence where the certificate is not one that a person signs with. */
fl_status fl_certificate_for_signing(X509 *certificate, fl_error *err) FL_MUST_USE;
/* Gives the signer that certificate and its chain out of `offered` (both copied). */
fl_status fl_signer_adopt(fl_signer *signer, X509 *certificate, STACK_OF(X509) * offered, fl_error *err) FL_MUST_USE;

/* Chain from the certificate into the trust at `at`, with `between` to help. On FL_OK *chain (if not NULL) is a new
 * stack that begins with the certificate. Otherwise *reason is X509_V_ERR_... */
bool fl_trust_chain(const fl_trust *trust, X509 *certificate, STACK_OF(X509) * between, fl_utc at,
                    STACK_OF(X509) * *chain, int *reason);

#endif
