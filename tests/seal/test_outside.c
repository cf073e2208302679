/* test_outside.c - what independent programs say of our signatures: pdfsig, openssl cms, qpdf, PDF/A-1b validation. The
 * files are made here, outside.sh asks the programs.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "people.h"

static const char *const ann_text[] = {"Ann Marlow, Tallmere Yard (invented)", "performed, 2026-04-14 08:00 UTC",
                                       "43,7 mm²/s at 50 °C: “as-left”"};
static const char *const cato_text[] = {"Çato Rùud", "reviewed, 2026-04-14 08:00 UTC"};

/* The signature and the bytes under it, taken out by the byte range as anyone can. */
static void take_out(const char *folder, const char *name, const unsigned char *file, size_t length) {
	const unsigned char *range = NULL;
	for (size_t i = 0; i + 12 < length; i++)
		if (memcmp(file + i, "/ByteRange [", 12) == 0)
			range = file + i + 12;
	assert_non_null(range);
	size_t first, second, rest, count = 0;
	assert_int_equal(sscanf((const char *)range, "0 %zu %zu %zu", &first, &second, &rest), 3);
	fl_text signed_bytes = {0}, der = {0};
	fl_text_append(&signed_bytes, (const char *)file, first);
	fl_text_append(&signed_bytes, (const char *)file + second, rest);
	for (size_t i = first + 1; i + 1 < second; i += 2, count++) {
		unsigned value;
		assert_int_equal(sscanf((const char *)file + i, "%2x", &value), 1);
		char byte = (char)value;
		fl_text_append(&der, &byte, 1);
	}
	size_t exact = 4 + (size_t)((unsigned char)der.data[2] << 8 | (unsigned char)der.data[3]);
	char path[80];
	snprintf(path, sizeof path, "%s.bytes", name);
	write_file(folder, path, signed_bytes.data, signed_bytes.length);
	snprintf(path, sizeof path, "%s.der", name);
	write_file(folder, path, der.data, exact);
	fl_text_free(&signed_bytes);
	fl_text_free(&der);
}

static void make_files(const char *folder) {
	authority root = new_authority("Lanternmoor Root", NULL, NOW - 100 * DAY, 3650);
	authority between = new_authority("Lanternmoor Issuing", &root, NOW - 90 * DAY, 3600);
	fl_signer *ann = new_person(FL_KEY_P256, "Ann Marlow", "technician", &root, NOW - 10 * DAY, 3000);
	fl_signer *cato = new_person(FL_KEY_RSA3072, "Çato Rùud", "head", &between, NOW - 10 * DAY, 3000);
	open_face face;
	fl_text plain = sample_pdf(true), pem = {0}, seal = {0};
	unsigned char *once, *twice;
	size_t length, twice_length;
	open_a_face(&face);
	add_pem(&pem, root.certificate);
	write_file(folder, "root.pem", pem.data, pem.length);
	write_file(folder, "plain.pdf", plain.data, plain.length);
	fl_pdf_signing signing = signing_of(&face, "performed", 40, ann_text, 3);
	must(fl_pdf_sign((unsigned char *)plain.data, plain.length, ann, &signing, &once, &length, err));
	signing = signing_of(&face, "reviewed", 300, cato_text, 2);
	must(fl_pdf_sign(once, length, cato, &signing, &twice, &twice_length, err));
	write_file(folder, "once.pdf", once, length);
	write_file(folder, "twice.pdf", twice, twice_length);
	take_out(folder, "once", once, length);
	take_out(folder, "twice", twice, twice_length);
	must(fl_seal_bytes(cato, "a journal\n", 10, "performed", NOW, NULL, &seal, err));
	write_file(folder, "journal.bytes", "a journal\n", 10);
	write_file(folder, "journal.der", seal.data, seal.length);
	once[length / 2] ^= 1;
	write_file(folder, "broken.pdf", once, length);
	free(once);
	free(twice);
	free(face.bytes);
	fl_text_free(&plain);
	fl_text_free(&pem);
	fl_text_free(&seal);
	fl_signer_free(ann);
	fl_signer_free(cato);
	free_authority(&root);
	free_authority(&between);
}

static void other_programs_agree(void **state) {
	char command[1024];
	make_files(*state);
	snprintf(command, sizeof command, "sh '%s/tests/seal/outside.sh' '%s'", SOURCE_DIR, (char *)*state);
	assert_int_equal(system(command), 0);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_setup_teardown(other_programs_agree, scratch_make, scratch_remove),
	};
	return cmocka_run_group_tests_name("seal: outside", tests, NULL, NULL);
}
