/* test_bytes.c - the seal beside a journal: it holds, and no byte of journal or seal changes unnoticed; timestamps from
 * a local authority of OpenSSL; structures that are no seal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "people.h"

#include "cms.h"

#include <unistd.h>

static const char journal[] =
    "foundleft journal 1\n2026-04-14T08:00:12Z begin VT-1\n2026-04-14T08:09:40Z reading 12,04 mA\n"
    "2026-04-14T08:21:03Z close Ann Marlow\n";

typedef struct scene {
	authority root;
	fl_signer *ann;
	fl_trust *trust;
	fl_text seal;
} scene;

static int set_up(void **state) {
	scene *it = calloc(1, sizeof *it);
	it->root = new_authority("Lanternmoor Root", NULL, NOW - 100 * DAY, 3650);
	it->ann = new_person(FL_KEY_P256, "Ann Marlow", "technician", &it->root, NOW - 10 * DAY, 3000);
	it->trust = trust_in(&it->root);
	must(fl_seal_bytes(it->ann, journal, sizeof journal - 1, "performed", NOW, NULL, &it->seal, err));
	*state = it;
	return 0;
}

static int tear_down(void **state) {
	scene *it = *state;
	free_authority(&it->root);
	fl_signer_free(it->ann);
	fl_trust_free(it->trust);
	fl_text_free(&it->seal);
	free(it);
	return 0;
}

static int verdict_of(const char *bytes, size_t length, const char *seal, size_t seal_length, const fl_trust *trust,
                      fl_seal_report *report, fl_arena *arena) {
	fl_error refusal = {0};
	fl_status status = fl_seal_check(bytes, length, seal, seal_length, trust, NOW, arena, report, &refusal);
	assert_true(status == FL_OK || (status == FL_E_SYNTAX && refusal.message[0] != '\0'));
	return status == FL_OK ? (int)report->verdict : -1;
}

static void a_seal_holds_and_says_who_when_and_as_what(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	assert_int_equal(
	    verdict_of(journal, sizeof journal - 1, it->seal.data, it->seal.length, it->trust, &report, &arena),
	    FL_SEAL_GOOD);
	assert_string_equal(report.signatures[0].role, "performed");
	assert_true(report.signatures[0].signed_at == NOW);
	assert_int_equal(verdict_of(journal, sizeof journal - 1, it->seal.data, it->seal.length, NULL, &report, &arena),
	                 FL_SEAL_UNTRUSTED);
	fl_arena_free(&arena);
}

/* Every bit of every byte. Returns the number of flips that left the verdict good. */
static size_t flip(const scene *it, char *flipped, size_t flipped_length, const char *bytes, size_t length,
                   const char *seal, size_t seal_length, size_t *tried) {
	size_t unnoticed = 0;
	for (size_t i = 0; i < flipped_length; i++)
		for (int bit = 0; bit < 8; bit++) {
			fl_arena arena = {0};
			fl_seal_report report;
			flipped[i] = (char)(flipped[i] ^ 1 << bit);
			if (verdict_of(bytes, length, seal, seal_length, it->trust, &report, &arena) == FL_SEAL_GOOD) {
				print_message("byte %zu, bit %d: unnoticed\n", i, bit);
				unnoticed++;
			}
			flipped[i] = (char)(flipped[i] ^ 1 << bit);
			++*tried;
			fl_arena_free(&arena);
		}
	return unnoticed;
}

static void every_bit_of_journal_and_seal_counts(void **state) {
	scene *it = *state;
	size_t length = sizeof journal - 1, tried = 0;
	char copy[sizeof journal], *seal = malloc(it->seal.length);
	assert_non_null(seal);
	memcpy(copy, journal, sizeof copy);
	memcpy(seal, it->seal.data, it->seal.length);
	assert_int_equal(flip(it, copy, length, copy, length, seal, it->seal.length, &tried), 0);
	print_message("journal: %zu bytes, %zu flips, all caught\n", length, tried);
	tried = 0;
	assert_int_equal(flip(it, seal, it->seal.length, copy, length, seal, it->seal.length, &tried), 0);
	print_message("its seal: %zu bytes, %zu flips, all caught\n", it->seal.length, tried);
	free(seal);
}

static void cut_and_longer_seals_are_refused(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	for (size_t cut = 0; cut < it->seal.length; cut++)
		assert_int_equal(verdict_of(journal, sizeof journal - 1, it->seal.data, cut, it->trust, &report, &arena), -1);
	fl_text longer = {0};
	fl_text_append(&longer, it->seal.data, it->seal.length);
	fl_text_append(&longer, "\0", 1);
	assert_int_equal(verdict_of(journal, sizeof journal - 1, longer.data, longer.length, it->trust, &report, &arena),
	                 -1);
	assert_int_equal(
	    verdict_of(journal, sizeof journal - 2, it->seal.data, it->seal.length, it->trust, &report, &arena),
	    FL_SEAL_BROKEN);
	fl_text_free(&longer);
	fl_arena_free(&arena);
}

static void what_is_no_seal_is_refused(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	static const struct {
		const char *bytes;
		size_t length;
	} bad[] = {
	    {"", 0},
	    {"\x30\x80\x00\x00", 4},         /* indefinite length */
	    {"\x30\x84\xff\xff\xff\xff", 6}, /* huge length */
	    {"\x30\x89\x01\x01\x01\x01\x01\x01\x01\x01\x01", 11},
	    {"\x30\x81\x05hello", 8}, /* a length not in its shortest form */
	    {"\x3f\x81\x01\x00", 4},  /* a tag of several bytes */
	    {"-----BEGIN CMS-----\n", 20},
	};
	for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
		assert_int_equal(
		    verdict_of(journal, sizeof journal - 1, bad[i].bytes, bad[i].length, it->trust, &report, &arena), -1);
	/* sequences within sequences, as deep as 64 KiB allow */
	fl_text deep = {0};
	for (int level = 0; level < 12000; level++) {
		fl_text next = {0};
		fl_der_wrap(&next, FL_DER_SEQUENCE, &deep);
		fl_text_free(&deep);
		deep = next;
		if (level > 400)
			break;
	}
	assert_int_equal(verdict_of(journal, sizeof journal - 1, deep.data, deep.length, it->trust, &report, &arena), -1);
	fl_text_free(&deep);
	fl_arena_free(&arena);
}

/* OpenSSL's own writer gives another shape (its order, S/MIME capabilities, no bound certificate): refused, with a
 * sentence that says what is missing. */
static void what_others_write_is_refused_by_name(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	fl_cms cms;
	unsigned char digest[FL_SHA256_SIZE] = {1};
	fl_cms_signing how = {.at = NOW};
	fl_text without_time = {0};
	fl_error refusal = {0};
	must(fl_cms_sign(it->ann, digest, &how, &without_time, err));
	must(fl_cms_read((unsigned char *)without_time.data, without_time.length, &cms, err));
	assert_false(cms.has_time || cms.has_role || cms.has_timestamp || cms.rsa);
	assert_int_equal(
	    fl_seal_check(journal, 1, without_time.data, without_time.length, it->trust, NOW, &arena, &report, &refusal),
	    FL_E_SYNTAX);
	assert_non_null(strstr(refusal.message, "lacks its time"));
	fl_text_free(&without_time);
	fl_arena_free(&arena);
}

/* ---- timestamps -------------------------------------------------------------------------------------------------- */

typedef struct local_authority {
	char folder[SCRATCH_SIZE];
	const char *spoil; /* what goes wrong: "", "nonce", "garbage", "silence" */
} local_authority;

static fl_status ask_openssl(void *self, const unsigned char *request, size_t length, fl_arena *arena,
                             unsigned char **response, size_t *response_length, fl_error *err) {
	local_authority *local = self;
	char command[1200], path[SCRATCH_SIZE], *bytes;
	if (strcmp(local->spoil, "silence") == 0)
		return fl_fail(err, FL_E_IO, "the timestamp authority does not answer");
	write_file(local->folder, "query", request, length);
	/* an answer to another question is an old answer sent again */
	if (strcmp(local->spoil, "nonce") != 0) {
		snprintf(
		    command, sizeof command,
		    "cd '%s' && openssl ts -reply -queryfile query -inkey tsa.key -signer tsa.pem -config tsa.cnf -out reply "
		    ">log 2>&1",
		    local->folder);
		if (system(command) != 0)
			return fl_fail(err, FL_E_IO, "openssl ts failed");
	}
	fl_status status = fl_file_read(fl_io_system(), scratch_path(local->folder, "reply", path), 65536, arena, &bytes,
	                                response_length, err);
	*response = (unsigned char *)bytes;
	if (strcmp(local->spoil, "garbage") == 0)
		bytes[*response_length / 2] ^= 0x55;
	return status;
}

static void write_key(const char *folder, const char *name, EVP_PKEY *key) {
	char path[SCRATCH_SIZE];
	FILE *file = fopen(scratch_path(folder, name, path), "w");
	assert_non_null(file);
	PEM_write_PKCS8PrivateKey(file, key, NULL, NULL, 0, NULL, NULL);
	fclose(file);
}

static void prepare_authority(local_authority *local, const authority *root) {
	static const char configuration[] =
	    "[tsa]\ndefault_tsa = one\n[one]\nserial = serial\ncrypto_device = builtin\nsigner_digest = sha256\n"
	    "default_policy = 1.2.3.4.1\ndigests = sha256\naccuracy = secs:1\nordering = no\ntsa_name = no\n"
	    "ess_cert_id_chain = no\ness_cert_id_alg = sha256\n";
	EVP_PKEY *key = EVP_EC_gen("P-256");
	X509_NAME *name = X509_NAME_new();
	fl_text pem = {0};
	set_name(name, "Quillhaven Time", "Quillhaven Metrology (invented)");
	X509 *certificate = issue(key, name, root, root->key, false, "critical,timeStamping", NOW - 90 * DAY, 3000);
	add_pem(&pem, certificate);
	write_file(local->folder, "tsa.pem", pem.data, pem.length);
	write_file(local->folder, "tsa.cnf", configuration, sizeof configuration - 1);
	write_file(local->folder, "serial", "01\n", 3);
	write_key(local->folder, "tsa.key", key);
	fl_text_free(&pem);
	X509_free(certificate);
	X509_NAME_free(name);
	EVP_PKEY_free(key);
}

/* Flips every bit of a seal with timestamp. What stays unnoticed must lie in the token but outside of what its
 * authority signs (version numbers, spare parameters, the letter case of a name): the time vouched for stays the same.
 * Returns how many those are. */
static size_t flip_stamped(const scene *it, const fl_text *seal, fl_utc stamped_at, size_t *tried) {
	fl_cms cms;
	must(fl_cms_read((unsigned char *)seal->data, seal->length, &cms, err));
	size_t token = (size_t)(cms.timestamp.whole - (unsigned char *)seal->data), unnoticed = 0;
	char *copy = malloc(seal->length);
	assert_non_null(copy);
	memcpy(copy, seal->data, seal->length);
	for (size_t i = 0; i < seal->length; i++)
		for (int bit = 0; bit < 8; bit++, ++*tried) {
			fl_arena arena = {0};
			fl_seal_report report;
			copy[i] = (char)(copy[i] ^ 1 << bit);
			if (verdict_of(journal, sizeof journal - 1, copy, seal->length, it->trust, &report, &arena) ==
			    FL_SEAL_GOOD) {
				assert_true(i >= token && report.signatures[0].stamped &&
				            report.signatures[0].stamped_at == stamped_at);
				unnoticed++;
			}
			copy[i] = seal->data[i];
			fl_arena_free(&arena);
		}
	free(copy);
	return unnoticed;
}

static void a_timestamp_vouches_for_the_time(void **state) {
	scene *it = *state;
	void *folder;
	assert_int_equal(scratch_make(&folder), 0);
	local_authority local = {.spoil = ""};
	snprintf(local.folder, sizeof local.folder, "%s", (char *)folder);
	prepare_authority(&local, &it->root);
	fl_timestamper timestamper = {&local, ask_openssl, it->trust};
	fl_text seal = {0};
	fl_arena arena = {0};
	fl_seal_report report;
	must(fl_seal_bytes(it->ann, journal, sizeof journal - 1, "performed", NOW, &timestamper, &seal, err));
	assert_int_equal(verdict_of(journal, sizeof journal - 1, seal.data, seal.length, it->trust, &report, &arena),
	                 FL_SEAL_GOOD);
	assert_true(report.signatures[0].stamped);
	assert_string_equal(report.signatures[0].stamped_by, "Quillhaven Time");
	assert_int_equal(verdict_of(journal, sizeof journal - 1, seal.data, seal.length, NULL, &report, &arena),
	                 FL_SEAL_UNTRUSTED);
	size_t tried = 0, outside = flip_stamped(it, &seal, report.signatures[0].stamped_at, &tried);
	print_message(
	    "seal with timestamp: %zu bytes, %zu flips, %zu unnoticed, all in the token's own frame, which neither "
	    "the signer nor the timestamp authority signs\n",
	    seal.length, tried, outside);
	assert_true(outside < tried / 50);
	/* answers that must not be taken */
	static const char *const spoils[] = {"nonce", "garbage", "silence"};
	for (size_t i = 0; i < 3; i++) {
		fl_text none = {0};
		local.spoil = spoils[i];
		assert_int_not_equal(
		    fl_seal_bytes(it->ann, journal, sizeof journal - 1, "performed", NOW, &timestamper, &none, NULL), FL_OK);
		assert_int_equal(none.length, 0);
		fl_text_free(&none);
	}
	fl_text_free(&seal);
	fl_arena_free(&arena);
	scratch_remove(&folder);
}

static void a_pdf_carries_a_timestamp(void **state) {
	scene *it = *state;
	void *folder;
	assert_int_equal(scratch_make(&folder), 0);
	local_authority local = {.spoil = ""};
	snprintf(local.folder, sizeof local.folder, "%s", (char *)folder);
	prepare_authority(&local, &it->root);
	fl_timestamper timestamper = {&local, ask_openssl, it->trust};
	static const char *const text[] = {"Ann Marlow", "performed"};
	open_face face;
	open_a_face(&face);
	fl_text plain = sample_pdf(false);
	fl_pdf_signing signing = signing_of(&face, "performed", 40, text, 2);
	signing.timestamper = &timestamper;
	unsigned char *out;
	size_t length;
	fl_arena arena = {0};
	fl_seal_report report;
	must(fl_pdf_sign((unsigned char *)plain.data, plain.length, it->ann, &signing, &out, &length, err));
	must(fl_pdf_check(out, length, it->trust, NOW, NULL, 0, &arena, &report, err));
	assert_int_equal(report.verdict, FL_SEAL_GOOD);
	assert_true(report.signatures[0].stamped);
	free(out);
	free(face.bytes);
	fl_text_free(&plain);
	fl_arena_free(&arena);
	scratch_remove(&folder);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(a_seal_holds_and_says_who_when_and_as_what),
	    cmocka_unit_test(every_bit_of_journal_and_seal_counts),
	    cmocka_unit_test(cut_and_longer_seals_are_refused),
	    cmocka_unit_test(what_is_no_seal_is_refused),
	    cmocka_unit_test(what_others_write_is_refused_by_name),
	    cmocka_unit_test(a_timestamp_vouches_for_the_time),
	    cmocka_unit_test(a_pdf_carries_a_timestamp),
	};
	return cmocka_run_group_tests_name("seal: bytes", tests, set_up, tear_down);
}
