/* test_digest.c - SHA-256 against published digests.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "foundleft/seal.h"

#include <stdlib.h>
#include <string.h>

/* Source: NIST, "SHA-256" example values that accompany FIPS 180-4 (messages "abc" and the 448-bit one), and the
 * empty message and one million "a" of the same collection. Values from memory, confirmed with sha256sum. */
static const struct {
	const char *message, *hex;
} published[] = {
    {"", "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"},
    {"abc", "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"},
    {"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq",
     "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1"},
};

static void published_digests_come_out(void **state) {
	(void)state;
	fl_hasher *hasher = NULL;
	assert_int_equal(fl_hasher_new(&hasher, NULL), FL_OK);
	for (int round = 0; round < 3; round++) {
		for (size_t i = 0; i < sizeof published / sizeof published[0]; i++) {
			char hex[FL_DIGEST_HEX_SIZE];
			assert_int_equal(fl_seal_digest(hasher, published[i].message, strlen(published[i].message), hex, NULL),
			                 FL_OK);
			assert_string_equal(hex, published[i].hex);
		}
	}
	fl_hasher_free(hasher);
}

static void a_million_letters(void **state) {
	(void)state;
	char *bytes = malloc(1000000);
	assert_non_null(bytes);
	memset(bytes, 'a', 1000000);
	fl_hasher *hasher = NULL;
	assert_int_equal(fl_hasher_new(&hasher, NULL), FL_OK);
	char hex[FL_DIGEST_HEX_SIZE];
	assert_int_equal(fl_seal_digest(hasher, bytes, 1000000, hex, NULL), FL_OK);
	assert_string_equal(hex, "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0");
	fl_hasher_free(hasher);
	free(bytes);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(published_digests_come_out),
	    cmocka_unit_test(a_million_letters),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
