/* digest.c - SHA-256 over bytes, with the algorithm fetched once and its context used again.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * FIPS 180-4. OpenSSL 3 looks an algorithm up by name in its providers; that costs more than hashing a journal line,
 * so the hasher keeps what the look-up found. It looks in a library context of its own, which reads no configuration
 * file: reading it is a third of the look-up, and no setting of a machine should decide whether a journal is good.
 */
#include "foundleft/seal.h"

#include <openssl/evp.h>
#include <stdlib.h>

struct fl_hasher {
	OSSL_LIB_CTX *library;
	EVP_MD *algorithm;
	EVP_MD_CTX *context;
};

fl_status fl_hasher_new(fl_hasher **out, fl_error *err) {
	fl_hasher *hasher = calloc(1, sizeof *hasher);
	if (!hasher)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the digest");
	hasher->library = OSSL_LIB_CTX_new();
	hasher->algorithm = hasher->library ? EVP_MD_fetch(hasher->library, "SHA2-256", NULL) : NULL;
	hasher->context = EVP_MD_CTX_new();
	if (!hasher->algorithm || !hasher->context) {
		fl_hasher_free(hasher);
		return fl_fail(err, FL_E_INTERNAL, "the cryptographic library offers no SHA-256: check its configuration");
	}
	*out = hasher;
	return FL_OK;
}

void fl_hasher_free(fl_hasher *hasher) {
	if (!hasher)
		return;
	EVP_MD_CTX_free(hasher->context);
	EVP_MD_free(hasher->algorithm);
	OSSL_LIB_CTX_free(hasher->library);
	free(hasher);
}

static void write_hex(const unsigned char *digest, unsigned length, char *hex) {
	static const char digits[] = "0123456789abcdef";
	for (unsigned i = 0; i < length; i++) {
		hex[2 * i] = digits[digest[i] >> 4];
		hex[2 * i + 1] = digits[digest[i] & 15];
	}
	hex[2 * length] = '\0';
}

fl_status fl_seal_digest(fl_hasher *hasher, const void *bytes, size_t length, char hex[FL_DIGEST_HEX_SIZE],
                         fl_error *err) {
	unsigned char digest[EVP_MAX_MD_SIZE];
	unsigned size = 0;
	if (EVP_DigestInit_ex2(hasher->context, hasher->algorithm, NULL) != 1 ||
	    EVP_DigestUpdate(hasher->context, bytes, length) != 1 ||
	    EVP_DigestFinal_ex(hasher->context, digest, &size) != 1 || size * 2 + 1 != FL_DIGEST_HEX_SIZE)
		return fl_fail(err, FL_E_INTERNAL, "the cryptographic library failed to compute a SHA-256");
	write_hex(digest, size, hex);
	return FL_OK;
}
