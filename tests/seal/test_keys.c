/* test_keys.c - keys and certificates: made, stored, opened, imported, refused.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "people.h"

#include <openssl/pkcs12.h>
#include <sys/stat.h>

static fl_secret secret(char *text) {
	return (fl_secret){(unsigned char *)text, strlen(text)};
}

static bool is_wiped(const char *text, size_t length) {
	for (size_t i = 0; i < length; i++)
		if (text[i] != 0)
			return false;
	return true;
}

static void a_key_is_stored_for_its_owner_only_and_opens_again(void **state) {
	static const fl_key_kind kinds[] = {FL_KEY_P256, FL_KEY_RSA3072};
	for (size_t i = 0; i < 2; i++) {
		fl_person person = {.name = "Åse Fjeldvik", .organisation = "Tallmere Yard (invented)", .role = "technician"};
		fl_signer *signer = NULL, *opened = NULL;
		char first[] = "a lamp in the fog", again[] = "a lamp in the fog", path[SCRATCH_SIZE];
		const char *name = i ? "rsa" : "ec";
		fl_secret one = secret(first), two = secret(again);
		struct stat info;
		size_t length;
		must(fl_signer_new(kinds[i], &signer, err));
		must(fl_signer_self_sign(signer, &person, NOW, 365, err));
		must(fl_signer_save(signer, fl_io_system(), *state, name, &one, err));
		assert_true(is_wiped(first, sizeof first) && one.length == 0);
		snprintf(path, sizeof path, "%s/%s.key", (char *)*state, name);
		assert_int_equal(stat(path, &info), 0);
		assert_int_equal(info.st_mode & 0777, 0600);
		char *pem = scratch_read(path, &length);
		assert_non_null(strstr(pem, "BEGIN ENCRYPTED PRIVATE KEY"));
		free(pem);
		must(fl_signer_open(fl_io_system(), *state, name, &two, &opened, err));
		assert_true(is_wiped(again, sizeof again));
		const fl_identity *who = fl_signer_identity(opened);
		assert_non_null(who);
		assert_string_equal(who->name, "Åse Fjeldvik");
		assert_string_equal(who->organisation, "Tallmere Yard (invented)");
		assert_string_equal(who->role, "technician");
		assert_string_equal(who->key, i ? "RSA 3072 bit" : "EC 256 bit");
		assert_true(who->self_signed && who->valid_from == NOW && who->valid_until == NOW + 365 * DAY);
		assert_string_equal(who->fingerprint, fl_signer_identity(signer)->fingerprint);
		fl_signer_free(signer);
		fl_signer_free(opened);
	}
}

static fl_status open_with(const char *folder, const char *name, const char *passphrase, fl_error *err) {
	char text[80];
	fl_signer *signer = NULL;
	snprintf(text, sizeof text, "%s", passphrase);
	fl_secret one = secret(text);
	fl_status status = fl_signer_open(fl_io_system(), folder, name, &one, &signer, err);
	assert_true(is_wiped(text, strlen(passphrase)));
	fl_signer_free(signer);
	return status;
}

static void store(const char *folder, const char *name, const char *passphrase) {
	char text[80];
	fl_signer *signer = NULL;
	snprintf(text, sizeof text, "%s", passphrase);
	fl_secret one = secret(text);
	must(fl_signer_new(FL_KEY_P256, &signer, err));
	must(fl_signer_save(signer, fl_io_system(), folder, name, &one, err));
	fl_signer_free(signer);
}

static void a_wrong_passphrase_is_said_so(void **state) {
	fl_error refusal = {0};
	store(*state, "ann", "right horse");
	assert_int_equal(open_with(*state, "ann", "wrong horse", &refusal), FL_E_STATE);
	assert_non_null(strstr(refusal.message, "the passphrase does not open"));
	assert_int_equal(open_with(*state, "ann", "", NULL), FL_E_STATE);
	assert_int_equal(open_with(*state, "ann", "right horse", NULL), FL_OK);
}

static void what_must_not_be_is_refused(void **state) {
	char path[SCRATCH_SIZE];
	fl_error refusal = {0};
	store(*state, "ann", "right horse");
	/* a key that others may read */
	chmod(scratch_path(*state, "ann.key", path), 0640);
	assert_int_equal(open_with(*state, "ann", "right horse", &refusal), FL_E_READ_ONLY);
	assert_non_null(strstr(refusal.message, "chmod 600"));
	/* a key in the clear */
	EVP_PKEY *key = EVP_EC_gen("P-256");
	FILE *file = fopen(scratch_path(*state, "clear.key", path), "w");
	PEM_write_PKCS8PrivateKey(file, key, NULL, NULL, 0, NULL, NULL);
	fclose(file);
	chmod(path, 0600);
	EVP_PKEY_free(key);
	refusal = (fl_error){0};
	assert_int_equal(open_with(*state, "clear", "right horse", &refusal), FL_E_SYNTAX);
	/* no key, a bad name, a short passphrase, a second key of the name */
	assert_int_equal(open_with(*state, "nobody", "right horse", NULL), FL_E_NOT_FOUND);
	assert_int_equal(open_with(*state, "../ann", "right horse", NULL), FL_E_VALUE);
	fl_signer *signer = NULL;
	must(fl_signer_new(FL_KEY_P256, &signer, err));
	char brief[] = "short", long_enough[] = "long enough";
	fl_secret one = secret(brief), two = secret(long_enough);
	assert_int_equal(fl_signer_save(signer, fl_io_system(), *state, "bea", &one, NULL), FL_E_VALUE);
	assert_int_equal(fl_signer_save(signer, fl_io_system(), *state, "ann", &two, NULL), FL_E_EXISTS);
	assert_true(is_wiped(brief, 5) && is_wiped(long_enough, 11));
	/* names that no certificate holds */
	fl_person bad[] = {{.name = ""}, {.name = "a\nb"}, {.name = "\xff\xfe"}, {.name = NULL}};
	for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
		assert_int_equal(fl_signer_self_sign(signer, &bad[i], NOW, 100, NULL), FL_E_VALUE);
	fl_person fine = {.name = "Bea Holm"};
	assert_int_equal(fl_signer_self_sign(signer, &fine, NOW, 0, NULL), FL_E_RANGE);
	fl_signer_free(signer);
}

static void an_authority_answers_a_request(void **state) {
	(void)state;
	authority root = new_authority("Lanternmoor Root", NULL, NOW - DAY, 3650);
	authority between = new_authority("Lanternmoor Issuing", &root, NOW - DAY, 2000);
	fl_signer *ann = new_person(FL_KEY_P256, "Ann Marlow", "technician", &between, NOW, 700), *other = NULL;
	const fl_identity *who = fl_signer_identity(ann);
	assert_string_equal(who->issuer, "Lanternmoor Issuing");
	assert_false(who->self_signed);
	fl_text pem = {0};
	must(fl_signer_pem(ann, &pem, err));
	/* the person's and the one between, not the root */
	assert_non_null(strstr(strstr(pem.data, "BEGIN CERT") + 1, "BEGIN CERT"));
	/* another key cannot take it */
	must(fl_signer_new(FL_KEY_P256, &other, err));
	assert_int_equal(fl_signer_take(other, pem.data, pem.length, "x.pem", NULL), FL_E_VALUE);
	assert_int_equal(fl_signer_take(other, "nothing", 7, "x.pem", NULL), FL_E_SYNTAX);
	assert_int_equal(fl_signer_take(other, pem.data, pem.length / 3, "x.pem", NULL), FL_E_SYNTAX);
	fl_text_free(&pem);
	fl_signer_free(ann);
	fl_signer_free(other);
	free_authority(&root);
	free_authority(&between);
}

static void pkcs12_is_imported(void **state) {
	(void)state;
	authority root = new_authority("Lanternmoor Root", NULL, NOW - DAY, 3650);
	EVP_PKEY *key = EVP_EC_gen("P-256");
	X509_NAME *name = X509_NAME_new();
	set_name(name, "Cato Ruud", "Tallmere Yard (invented)");
	X509 *own = issue(key, name, &root, root.key, false, NULL, NOW - DAY, 100);
	STACK_OF(X509) *others = sk_X509_new_null();
	sk_X509_push(others, root.certificate);
	PKCS12 *made = PKCS12_create("tin of nails", "cato", key, own, others, 0, 0, 0, 0, 0);
	unsigned char *der = NULL;
	int length = i2d_PKCS12(made, &der);
	fl_signer *signer = NULL;
	char right[] = "tin of nails", wrong[] = "tin of snails", none[] = "";
	fl_secret one = secret(right), two = secret(wrong), three = secret(none);
	fl_error err_wrong = {0};
	assert_int_equal(fl_signer_import(der, (size_t)length, "cato.p12", &two, &signer, &err_wrong), FL_E_STATE);
	assert_true(is_wiped(wrong, sizeof wrong));
	assert_int_equal(fl_signer_import(der, (size_t)length, "cato.p12", &three, &signer, NULL), FL_E_STATE);
	must(fl_signer_import(der, (size_t)length, "cato.p12", &one, &signer, err));
	assert_true(is_wiped(right, sizeof right));
	assert_string_equal(fl_signer_identity(signer)->name, "Cato Ruud");
	for (int cut = 0; cut < length; cut += 7) {
		char text[] = "tin of nails";
		fl_secret each = secret(text);
		fl_signer *never = NULL;
		assert_int_not_equal(fl_signer_import(der, (size_t)cut, "cato.p12", &each, &never, NULL), FL_OK);
	}
	fl_signer_free(signer);
	OPENSSL_free(der);
	PKCS12_free(made);
	sk_X509_free(others);
	X509_free(own);
	X509_NAME_free(name);
	EVP_PKEY_free(key);
	free_authority(&root);
}

static void an_authority_or_a_tls_key_does_not_sign(void **state) {
	(void)state;
	authority root = new_authority("Lanternmoor Root", NULL, NOW - DAY, 3650);
	BIO *bio = BIO_new(BIO_s_mem());
	fl_text pem = {0};
	add_pem(&pem, root.certificate);
	PKCS12 *made = PKCS12_create("tin of nails", "root", root.key, root.certificate, NULL, 0, 0, 0, 0, 0);
	unsigned char *der = NULL;
	int length = i2d_PKCS12(made, &der);
	char right[] = "tin of nails";
	fl_secret one = secret(right);
	fl_signer *never = NULL;
	fl_error refusal = {0};
	assert_int_equal(fl_signer_import(der, (size_t)length, "root.p12", &one, &never, &refusal), FL_E_VALUE);
	assert_non_null(strstr(refusal.message, "authority's"));
	OPENSSL_free(der);
	PKCS12_free(made);
	fl_text_free(&pem);
	BIO_free(bio);
	free_authority(&root);
}

static void two_people_are_told_apart(void **state) {
	(void)state;
	fl_identity a = {.name = "Ann Marlow", .organisation = "Tallmere Yard", .fingerprint = "1", .key_digest = "1"};
	fl_identity b = {.name = "ann  marlow ", .organisation = " TALLMERE yard", .fingerprint = "2", .key_digest = "2"};
	fl_identity c = {.name = "Bea Holm", .organisation = "Tallmere Yard", .fingerprint = "3", .key_digest = "1"};
	fl_identity d = {.name = "Bea Holm", .organisation = "Tallmere Yard", .fingerprint = "4", .key_digest = "4"};
	assert_true(fl_identity_same_person(&a, &b));  /* the same name, spaced and capitalised otherwise */
	assert_true(fl_identity_same_person(&a, &c));  /* the same key under another name */
	assert_false(fl_identity_same_person(&a, &d)); /* two people */
	assert_true(fl_identity_is_named(&a, "MARLOW,  Ann"));
	assert_false(fl_identity_is_named(&a, "Ann"));
	assert_false(fl_identity_is_named(&a, "Ann Marlow-Holm"));
	assert_false(fl_identity_is_named(&a, ""));
	assert_false(fl_identity_is_named(&(fl_identity){.name = " "}, " "));
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_setup_teardown(a_key_is_stored_for_its_owner_only_and_opens_again, scratch_make,
	                                    scratch_remove),
	    cmocka_unit_test_setup_teardown(a_wrong_passphrase_is_said_so, scratch_make, scratch_remove),
	    cmocka_unit_test_setup_teardown(what_must_not_be_is_refused, scratch_make, scratch_remove),
	    cmocka_unit_test(an_authority_answers_a_request),
	    cmocka_unit_test(pkcs12_is_imported),
	    cmocka_unit_test(an_authority_or_a_tls_key_does_not_sign),
	    cmocka_unit_test(two_people_are_told_apart),
	};
	return cmocka_run_group_tests_name("seal: keys", tests, NULL, NULL);
}
