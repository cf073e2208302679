/* test_pdf.c - PDF files signed once and twice, checked, and what a check must say of every way they can be wrong.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "people.h"

#include "cms.h"

typedef struct scene {
	authority root, stranger;
	fl_signer *ann, *bea, *late;
	fl_trust *trust;
	open_face face;
	fl_text plain;
	unsigned char *once, *twice;
	size_t once_length, twice_length;
} scene;

static const char *const ann_text[] = {"Ann Marlow, Tallmere Yard (invented)", "performed, 2026-04-14 08:00 UTC",
                                       "43.7 mm²/s at 50 °C"};
static const char *const bea_text[] = {"Bea Holm, Tallmere Yard (invented)", "reviewed, 2026-04-14 08:00 UTC"};

static void sign(const scene *it, const unsigned char *bytes, size_t length, const fl_signer *who, const char *role,
                 double left, const char *const *text, size_t count, unsigned char **out, size_t *out_length) {
	fl_pdf_signing signing = signing_of(&it->face, role, left, text, count);
	must(fl_pdf_sign(bytes, length, who, &signing, out, out_length, err));
}

static int set_up(void **state) {
	scene *it = calloc(1, sizeof *it);
	it->root = new_authority("Lanternmoor Root", NULL, NOW - 100 * DAY, 3650);
	it->stranger = new_authority("Nobody's Root", NULL, NOW - 100 * DAY, 3650);
	it->ann = new_person(FL_KEY_P256, "Ann Marlow", "technician", &it->root, NOW - 10 * DAY, 100);
	it->bea = new_person(FL_KEY_RSA3072, "Bea Holm", "head of the bench", &it->root, NOW - 10 * DAY, 800);
	it->trust = trust_in(&it->root);
	open_a_face(&it->face);
	it->plain = sample_pdf(false);
	sign(it, (unsigned char *)it->plain.data, it->plain.length, it->ann, "performed", 40, ann_text, 3, &it->once,
	     &it->once_length);
	sign(it, it->once, it->once_length, it->bea, "reviewed", 300, bea_text, 2, &it->twice, &it->twice_length);
	*state = it;
	return 0;
}

static int tear_down(void **state) {
	scene *it = *state;
	free_authority(&it->root);
	free_authority(&it->stranger);
	fl_signer_free(it->ann);
	fl_signer_free(it->bea);
	fl_trust_free(it->trust);
	free(it->face.bytes);
	fl_text_free(&it->plain);
	free(it->once);
	free(it->twice);
	free(it);
	return 0;
}

/* Checks and says: the verdict, or -1 with the refusal in *err. */
static int verdict_of(const unsigned char *bytes, size_t length, const fl_trust *trust, fl_utc now, fl_arena *arena,
                      fl_seal_report *report, fl_error *err) {
	fl_status status = fl_pdf_check(bytes, length, trust, now, NULL, 0, arena, report, err);
	assert_true(status == FL_OK || status == FL_E_SYNTAX || status == FL_E_VALUE);
	return status == FL_OK ? (int)report->verdict : -1;
}

static void one_signature_holds(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	int verdict = verdict_of(it->once, it->once_length, it->trust, NOW, &arena, &report, NULL);
	if (verdict != FL_SEAL_GOOD)
		print_report(&report);
	assert_int_equal(verdict, FL_SEAL_GOOD);
	assert_int_equal(report.signature_count, 1);
	assert_int_equal(report.base_length, it->plain.length);
	assert_memory_equal(it->once, it->plain.data, it->plain.length);
	assert_string_equal(report.signatures[0].signer.name, "Ann Marlow");
	assert_string_equal(report.signatures[0].role, "performed");
	assert_true(report.signatures[0].signed_at == NOW && report.signatures[0].covers == it->once_length);
	assert_true(report.signatures[0].valid_now && !report.signatures[0].stamped);
	fl_arena_free(&arena);
}

static void two_people_both_hold(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	assert_int_equal(verdict_of(it->twice, it->twice_length, it->trust, NOW, &arena, &report, NULL), FL_SEAL_GOOD);
	assert_int_equal(report.signature_count, 2);
	assert_string_equal(report.signatures[1].signer.name, "Bea Holm");
	assert_string_equal(report.signatures[1].role, "reviewed");
	assert_true(report.signatures[0].covers == it->once_length && report.signatures[1].covers == it->twice_length);
	assert_memory_equal(it->twice, it->once, it->once_length);
	assert_true(reports(&report, FL_CHECK_GOOD, "two people", "another person"));
	fl_arena_free(&arena);
}

static void the_same_person_cannot_countersign(void **state) {
	scene *it = *state;
	fl_pdf_signing signing = signing_of(&it->face, "reviewed", 300, ann_text, 2);
	unsigned char *out = NULL;
	size_t length = 0;
	fl_error refusal = {0};
	assert_int_equal(fl_pdf_sign(it->once, it->once_length, it->ann, &signing, &out, &length, &refusal), FL_E_STATE);
	assert_non_null(strstr(refusal.message, "another person's"));
	/* nor with a new key under the same name */
	fl_signer *again = new_person(FL_KEY_P256, "Ann  Marlow", "manager", &it->root, NOW - DAY, 100);
	assert_int_equal(fl_pdf_sign(it->once, it->once_length, again, &signing, &out, &length, NULL), FL_E_STATE);
	assert_int_equal(fl_pdf_sign(it->twice, it->twice_length, again, &signing, &out, &length, NULL), FL_E_STATE);
	assert_null(out);
	fl_signer_free(again);
}

static void rsa_signs_the_same_bytes_twice(void **state) {
	scene *it = *state;
	unsigned char *first, *second;
	size_t length, other;
	sign(it, (unsigned char *)it->plain.data, it->plain.length, it->bea, "performed", 40, bea_text, 2, &first, &length);
	sign(it, (unsigned char *)it->plain.data, it->plain.length, it->bea, "performed", 40, bea_text, 2, &second, &other);
	assert_int_equal(length, other);
	assert_memory_equal(first, second, length);
	free(first);
	free(second);
}

static void strangers_and_the_expired_are_told_apart_from_forgers(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	assert_int_equal(verdict_of(it->once, it->once_length, NULL, NOW, &arena, &report, NULL), FL_SEAL_UNTRUSTED);
	fl_trust *other = trust_in(&it->stranger);
	assert_int_equal(verdict_of(it->once, it->once_length, other, NOW, &arena, &report, NULL), FL_SEAL_UNTRUSTED);
	assert_true(reports(&report, FL_CHECK_BAD, "authority", "nobody in your folder of trust"));
	fl_trust_free(other);
	/* years later: still good, with a note */
	assert_int_equal(verdict_of(it->once, it->once_length, it->trust, NOW + 1000 * DAY, &arena, &report, NULL),
	                 FL_SEAL_GOOD);
	assert_false(report.signatures[0].valid_now);
	assert_true(reports(&report, FL_CHECK_NOTE, "valid now", "no longer"));
	/* a clock that is far behind */
	assert_int_equal(verdict_of(it->once, it->once_length, it->trust, NOW - 30 * DAY, &arena, &report, NULL),
	                 FL_SEAL_GOOD);
	assert_true(reports(&report, FL_CHECK_NOTE, "time", "future"));
	fl_arena_free(&arena);
}

static void nobody_signs_with_an_expired_certificate(void **state) {
	scene *it = *state;
	unsigned char *out = NULL;
	size_t length;
	fl_error refusal = {0};
	fl_pdf_signing signing = signing_of(&it->face, "performed", 40, ann_text, 3);
	signing.at = NOW + 400 * DAY;
	assert_int_equal(
	    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, it->ann, &signing, &out, &length, &refusal),
	    FL_E_STATE);
	assert_non_null(strstr(refusal.message, "expired on"));
	signing.at = NOW - 400 * DAY;
	refusal = (fl_error){0};
	assert_int_equal(
	    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, it->ann, &signing, &out, &length, &refusal),
	    FL_E_STATE);
	assert_non_null(strstr(refusal.message, "check the clock"));
	/* one who set the clock back: the authority's certificate did not exist then */
	fl_signer *self = NULL;
	fl_person person = {.name = "Dov Lind"};
	must(fl_signer_new(FL_KEY_P256, &self, err));
	assert_int_equal(
	    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, self, &signing, &out, &length, NULL),
	    FL_E_STATE); /* no certificate yet */
	must(fl_signer_self_sign(self, &person, NOW, 10, err));
	fl_signer_free(self);
}

/* ---- visible block --------------------------------------------------------------------------------------------- */

static void the_block_must_stand_in_its_place(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	const fl_seal_place both[] = {{0, 40, 60, 220, 56}, {1, 300, 60, 220, 56}};
	must(fl_pdf_check(it->twice, it->twice_length, it->trust, NOW, both, 2, &arena, &report, err));
	assert_int_equal(report.verdict, FL_SEAL_GOOD);
	must(fl_pdf_check(it->twice, it->twice_length, it->trust, NOW, both, 1, &arena, &report, err));
	assert_int_equal(report.verdict, FL_SEAL_BROKEN);
	assert_true(reports(&report, FL_CHECK_BAD, "visible block", "may cover"));
	fl_arena_free(&arena);
}

static void text_that_cannot_be_shown_is_refused(void **state) {
	scene *it = *state;
	unsigned char *out = NULL;
	size_t length;
	const char *const bad[][2] = {{"\xe6\xbc\xa2", "U+6F22"}, {"a\nb", "control"}, {"\xff", "UTF-8"}};
	for (size_t i = 0; i < 3; i++) {
		fl_error refusal = {0};
		fl_pdf_signing signing = signing_of(&it->face, "performed", 40, &bad[i][0], 1);
		assert_int_equal(
		    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, it->ann, &signing, &out, &length, &refusal),
		    FL_E_VALUE);
		assert_non_null(strstr(refusal.message, bad[i][1]));
	}
	char wide[400];
	memset(wide, 'W', sizeof wide - 1);
	wide[sizeof wide - 1] = '\0';
	const char *const too_wide[] = {wide};
	fl_pdf_signing signing = signing_of(&it->face, "performed", 40, too_wide, 1);
	assert_int_equal(
	    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, it->ann, &signing, &out, &length, NULL),
	    FL_E_VALUE);
	signing = signing_of(&it->face, "performed", 40, ann_text, 3);
	signing.place.page = 7;
	assert_int_equal(
	    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, it->ann, &signing, &out, &length, NULL),
	    FL_E_VALUE);
}

/* ---- what was added or changed ----------------------------------------------------------------------------------- */

/* The file with a revision more, made of those objects ("N 0 obj...endobj" each in one text). */
static fl_text with_revision(const unsigned char *bytes, size_t length, const unsigned *numbers,
                             const char *const *bodies, size_t count, const char *trailer) {
	fl_text out = {0};
	size_t at[8], before = 0;
	for (size_t i = length - 9; i-- > 0 && before == 0;)
		if (memcmp(bytes + i, "startxref", 9) == 0)
			before = (size_t)strtoul((const char *)bytes + i + 9, NULL, 10);
	fl_text_append(&out, (const char *)bytes, length);
	for (size_t i = 0; i < count; i++) {
		at[i] = out.length;
		fl_text_printf(&out, "%u 0 obj\n%s\nendobj\n", numbers[i], bodies[i]);
	}
	size_t table = out.length;
	fl_text_add(&out, "xref\n");
	for (size_t i = 0; i < count; i++)
		fl_text_printf(&out, "%u 1\n%010zu 00000 n \n", numbers[i], at[i]);
	fl_text_printf(&out, "trailer\n<< /Size 90 %s /Prev %zu >>\nstartxref\n%zu\n%%%%EOF\n",
	               trailer ? trailer : "/Root 1 0 R", before, table);
	return out;
}

static void what_was_added_after_signing_is_found(void **state) {
	scene *it = *state;
	static const unsigned content[] = {4}, page[] = {3}, root[] = {80}, fresh[] = {81};
	static const char *const bodies[] = {
	    "<< /Length 24 >>\nstream\n0.1 g 40 760 500 30 re f\nendstream",
	    "<< /Type /Page /Parent 2 0 R /MediaBox [0 0 595 842] /Contents 4 0 R /Resources << >> /Rotate 180 >>",
	    "<< /Type /Catalog /Pages 2 0 R >>", "(nothing)"};
	const struct {
		const unsigned *number;
		const char *body, *trailer, *words;
	} cases[] = {{content, bodies[0], NULL, "brings no signature"},
	             {page, bodies[1], NULL, "brings no signature"},
	             {root, bodies[2], "/Root 80 0 R", "catalog or its information was exchanged"},
	             {fresh, bodies[3], NULL, "brings no signature"}};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		fl_text changed =
		    with_revision(it->once, it->once_length, cases[i].number, &cases[i].body, 1, cases[i].trailer);
		fl_arena arena = {0};
		fl_seal_report report;
		fl_error refusal = {0};
		int verdict =
		    verdict_of((unsigned char *)changed.data, changed.length, it->trust, NOW, &arena, &report, &refusal);
		assert_int_equal(verdict, FL_SEAL_BROKEN);
		assert_true(reports(&report, FL_CHECK_BAD, "added content", cases[i].words));
		assert_false(report.signatures[0].fits);
		/* and nobody can countersign it */
		fl_pdf_signing signing = signing_of(&it->face, "reviewed", 300, bea_text, 2);
		unsigned char *out = NULL;
		size_t length;
		assert_int_equal(
		    fl_pdf_sign((unsigned char *)changed.data, changed.length, it->bea, &signing, &out, &length, NULL),
		    FL_E_TAMPERED);
		fl_arena_free(&arena);
		fl_text_free(&changed);
	}
}

/* Where the last of these words stands. */
static size_t last_of(const fl_text *text, const char *word) {
	size_t found = SIZE_MAX, length = strlen(word);
	for (size_t i = 0; i + length <= text->length; i++)
		if (memcmp(text->data + i, word, length) == 0)
			found = i;
	assert_true(found != SIZE_MAX);
	return found;
}

/* Makes the last signature anew over the file as it is, but for `gap` bytes behind the signature: what a signer can do
 * who wants to deceive. */
static void sign_anew(fl_text *file, const fl_signer *signer, size_t gap, bool with_time) {
	size_t open = last_of(file, "/Contents <") + 10, range = last_of(file, "/ByteRange [") + 12, close = open;
	while (file->data[close] != '>')
		close++;
	close++;
	char numbers[44];
	int used = snprintf(numbers, sizeof numbers, "0 %zu %zu %zu", open, close + gap, file->length - close - gap);
	memset(file->data + range, ' ', 42);
	memcpy(file->data + range, numbers, (size_t)used);
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces pieces = {file->data, open, file->data + close + gap, file->length - close - gap};
	fl_cms_signing how = {.at = NOW, .with_time = with_time};
	fl_text cms = {0};
	assert_true(fl_pieces_digest(&pieces, digest));
	must(fl_cms_sign(signer, digest, &how, &cms, err));
	assert_true(2 * cms.length + 2 <= close - open);
	memset(file->data + open + 1, '0', close - open - 2);
	for (size_t i = 0; i < cms.length; i++) {
		char two[3];
		snprintf(two, sizeof two, "%02x", (unsigned char)cms.data[i]);
		memcpy(file->data + open + 1 + 2 * i, two, 2);
	}
	fl_text_free(&cms);
}

/* The file signed twice with an object more in the second signer's revision, whose table begins with "3 1". */
static fl_text smuggled(const scene *it, const char *header, const char *object) {
	fl_text out = {0}, whole = {.data = (char *)it->twice, .length = it->twice_length};
	size_t table = last_of(&whole, "xref\n3 1\n"), trailer = last_of(&whole, "trailer");
	size_t start = last_of(&whole, "startxref");
	fl_text_append(&out, whole.data, table);
	size_t at = out.length;
	fl_text_add(&out, object);
	size_t moved = out.length;
	fl_text_printf(&out, header, whole.data + table + 9, at);
	fl_text_append(&out, whole.data + table + 29, trailer - table - 29);
	if (object[0] == '9')
		fl_text_printf(&out, "99 1\n%010zu 00000 n \n", at);
	fl_text_append(&out, whole.data + trailer, start - trailer);
	fl_text_printf(&out, "startxref\n%zu\n%%%%EOF\n", moved);
	sign_anew(&out, it->bea, 0, false);
	return out;
}

/* The second signer replaces the page's content under the first signature, in a revision that she signs validly:
 * common readers go on to call the first signature valid. An object that nothing shows does no harm. */
static void content_replaced_by_the_second_signer_is_found(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	fl_text harmless = smuggled(it, "xref\n3 1\n%.20s", "99 0 obj\n(nobody looks at this)\nendobj\n");
	assert_int_equal(verdict_of((unsigned char *)harmless.data, harmless.length, it->trust, NOW, &arena, &report, NULL),
	                 FL_SEAL_GOOD); /* so the signature made anew is a valid one */
	fl_text forged = smuggled(it, "xref\n3 2\n%.20s%010zu 00000 n \n",
	                          "4 0 obj\n<< /Length 24 >>\nstream\n0.1 g 40 760 500 30 re f\nendstream\nendobj\n");
	assert_int_equal(verdict_of((unsigned char *)forged.data, forged.length, it->trust, NOW, &arena, &report, NULL),
	                 FL_SEAL_BROKEN);
	assert_true(reports(&report, FL_CHECK_BAD, "added content", "object 4 was replaced"));
	assert_false(report.signatures[0].fits);
	fl_text_free(&harmless);
	fl_text_free(&forged);
	fl_arena_free(&arena);
}

/* Signatures that are valid over what they say they cover, but not of the shape that leaves nothing uncovered. */
static void valid_signatures_of_another_shape_are_found(void **state) {
	scene *it = *state;
	const struct {
		size_t gap;
		bool with_time;
		const char *what, *words;
	} cases[] = {{0, false, NULL, NULL},
	             {3, false, "byte range", "leaves bytes out"},
	             {0, true, "contents", "a time of its own"}};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		fl_arena arena = {0};
		fl_seal_report report;
		fl_text file = {0};
		fl_text_append(&file, (const char *)it->twice, it->twice_length);
		sign_anew(&file, it->bea, cases[i].gap, cases[i].with_time);
		int verdict = verdict_of((unsigned char *)file.data, file.length, it->trust, NOW, &arena, &report, NULL);
		assert_int_equal(verdict, cases[i].what ? FL_SEAL_BROKEN : FL_SEAL_GOOD);
		if (cases[i].what)
			assert_true(reports(&report, FL_CHECK_BAD, cases[i].what, cases[i].words));
		fl_text_free(&file);
		fl_arena_free(&arena);
	}
}

/* The second signature made anew by the first signer: valid, but worth nothing. */
static void one_person_twice_is_found(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	fl_text file = {0};
	fl_text_append(&file, (const char *)it->twice, it->twice_length);
	char *name = memmem(file.data + it->once_length, file.length - it->once_length, "/Name (Bea Holm) ", 17);
	assert_non_null(name);
	memcpy(name, "/Name(Ann Marlow)", 17);
	sign_anew(&file, it->ann, 0, false);
	assert_int_equal(verdict_of((unsigned char *)file.data, file.length, it->trust, NOW, &arena, &report, NULL),
	                 FL_SEAL_UNTRUSTED);
	assert_true(reports(&report, FL_CHECK_BAD, "two people", "same person"));
	fl_text_free(&file);
	fl_arena_free(&arena);
}

static void an_authority_that_had_expired_vouches_for_nobody(void **state) {
	scene *it = *state;
	fl_arena arena = {0};
	fl_seal_report report;
	authority old = new_authority("Old Root", NULL, NOW - 100 * DAY, 50);
	fl_signer *eve = new_person(FL_KEY_P256, "Eve Strand", NULL, &old, NOW - 60 * DAY, 300);
	fl_trust *trust = trust_in(&old);
	unsigned char *out;
	size_t length;
	sign(it, (unsigned char *)it->plain.data, it->plain.length, eve, "performed", 40, ann_text, 1, &out, &length);
	assert_int_equal(verdict_of(out, length, trust, NOW, &arena, &report, NULL), FL_SEAL_UNTRUSTED);
	assert_true(reports(&report, FL_CHECK_BAD, "authority", "not valid at the time of signing"));
	free(out);
	fl_trust_free(trust);
	fl_signer_free(eve);
	free_authority(&old);
	fl_arena_free(&arena);
}

/* Flips bits of single bytes; returns how many flips stay unnoticed. */
static size_t flip_all(const unsigned char *bytes, size_t length, const fl_trust *trust, size_t step, size_t *tried) {
	unsigned char *copy = malloc(length);
	size_t unnoticed = 0;
	assert_non_null(copy);
	memcpy(copy, bytes, length);
	for (size_t i = 0; i < length; i += step) {
		static const unsigned char masks[] = {0x01, 0x20, 0x80};
		for (size_t m = 0; m < 3; m++) {
			fl_arena arena = {0};
			fl_seal_report report;
			fl_error refusal = {0};
			copy[i] ^= masks[m];
			fl_status status = fl_pdf_check(copy, length, trust, NOW, NULL, 0, &arena, &report, &refusal);
			if (status == FL_OK && report.verdict == FL_SEAL_GOOD) {
				unnoticed++;
				print_message("byte %zu of %zu, flip %02x: unnoticed\n", i, length, masks[m]);
			} else if (status != FL_OK) {
				assert_true(refusal.message[0] != '\0');
			}
			++*tried;
			copy[i] = bytes[i];
			fl_arena_free(&arena);
		}
	}
	free(copy);
	return unnoticed;
}

static void every_byte_counts(void **state) {
	scene *it = *state;
	size_t tried = 0;
	assert_int_equal(flip_all(it->once, it->once_length, it->trust, 1, &tried), 0);
	print_message("signed once: %zu bytes, %zu flips, all caught\n", it->once_length, tried);
	tried = 0;
	assert_int_equal(flip_all(it->twice, it->twice_length, it->trust, 7, &tried), 0);
	print_message("signed twice: every 7th of %zu bytes, %zu flips, all caught\n", it->twice_length, tried);
}

static void every_cut_is_caught(void **state) {
	scene *it = *state;
	for (size_t cut = 0; cut < it->twice_length;
	     cut += cut < it->once_length - 40 || cut > it->once_length + 40 ? 13 : 1) {
		fl_arena arena = {0};
		fl_seal_report report;
		fl_error refusal = {0};
		if (verdict_of(it->twice, cut, it->trust, NOW, &arena, &report, &refusal) == FL_SEAL_GOOD) {
			assert_int_equal(cut, it->once_length); /* the once-signed file is the only beginning that holds */
		}
		fl_arena_free(&arena);
	}
}

static void bytes_behind_the_end_are_caught(void **state) {
	scene *it = *state;
	const char *const tails[] = {"\n", "x", "%%EOF\n", " ", "startxref\n9\n%%EOF\n"};
	for (size_t i = 0; i < sizeof tails / sizeof *tails; i++) {
		fl_text longer = {0};
		fl_arena arena = {0};
		fl_seal_report report;
		fl_error refusal = {0};
		fl_text_append(&longer, (char *)it->once, it->once_length);
		fl_text_add(&longer, tails[i]);
		int verdict =
		    verdict_of((unsigned char *)longer.data, longer.length, it->trust, NOW, &arena, &report, &refusal);
		assert_true(verdict == -1 || verdict == FL_SEAL_BROKEN);
		fl_text_free(&longer);
		fl_arena_free(&arena);
	}
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(one_signature_holds),
	    cmocka_unit_test(two_people_both_hold),
	    cmocka_unit_test(the_same_person_cannot_countersign),
	    cmocka_unit_test(rsa_signs_the_same_bytes_twice),
	    cmocka_unit_test(strangers_and_the_expired_are_told_apart_from_forgers),
	    cmocka_unit_test(nobody_signs_with_an_expired_certificate),
	    cmocka_unit_test(the_block_must_stand_in_its_place),
	    cmocka_unit_test(text_that_cannot_be_shown_is_refused),
	    cmocka_unit_test(what_was_added_after_signing_is_found),
	    cmocka_unit_test(content_replaced_by_the_second_signer_is_found),
	    cmocka_unit_test(valid_signatures_of_another_shape_are_found),
	    cmocka_unit_test(one_person_twice_is_found),
	    cmocka_unit_test(an_authority_that_had_expired_vouches_for_nobody),
	    cmocka_unit_test(every_byte_counts),
	    cmocka_unit_test(every_cut_is_caught),
	    cmocka_unit_test(bytes_behind_the_end_are_caught),
	};
	return cmocka_run_group_tests_name("seal: PDF", tests, set_up, tear_down);
}
