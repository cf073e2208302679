/* digest.c - SHA-256 over bytes.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * FIPS 180-4, by OpenSSL's functions of before its providers. OpenSSL 3 calls them deprecated and keeps them; the way
 * it recommends builds tables of every algorithm it knows before the first digest, which costs 0.9 ms and 0.5 MB in
 * each command that only looks at a journal, an eighth of `assess` (tests/bench, docs/benchmarks.md). No configuration
 * of a machine can change what they compute.
 */
#define OPENSSL_API_COMPAT 0x10101000L

#include "foundleft/seal.h"

#include <openssl/sha.h>
#include <stdlib.h>

struct fl_hasher {
	SHA256_CTX state;
};

fl_status fl_hasher_new(fl_hasher **out, fl_error *err) {
	fl_hasher *hasher = calloc(1, sizeof *hasher);
	if (!hasher)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the digest");
	*out = hasher;
	return FL_OK;
}

void fl_hasher_free(fl_hasher *hasher) {
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
	unsigned char digest[SHA256_DIGEST_LENGTH];
	if (SHA256_Init(&hasher->state) != 1 || SHA256_Update(&hasher->state, bytes, length) != 1 ||
	    SHA256_Final(digest, &hasher->state) != 1)
		return fl_fail(err, FL_E_INTERNAL, "the cryptographic library failed to compute a SHA-256");
	write_hex(digest, sizeof digest, hex);
	return FL_OK;
}
