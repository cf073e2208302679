/* test_hostile.c - PDF files that are built to confuse: each is refused with a sentence, none is called good.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "people.h"

typedef struct scene {
	authority root;
	fl_signer *ann;
	fl_trust *trust;
	open_face face;
	fl_text plain;
	unsigned char *once;
	size_t length;
} scene;

static const char *const text[] = {"Ann Marlow", "performed"};

static int set_up(void **state) {
	scene *it = calloc(1, sizeof *it);
	it->root = new_authority("Lanternmoor Root", NULL, NOW - 100 * DAY, 3650);
	it->ann = new_person(FL_KEY_P256, "Ann Marlow", NULL, &it->root, NOW - 10 * DAY, 100);
	it->trust = trust_in(&it->root);
	open_a_face(&it->face);
	it->plain = sample_pdf(false);
	fl_pdf_signing signing = signing_of(&it->face, "performed", 40, text, 2);
	must(
	    fl_pdf_sign((unsigned char *)it->plain.data, it->plain.length, it->ann, &signing, &it->once, &it->length, err));
	*state = it;
	return 0;
}

static int tear_down(void **state) {
	scene *it = *state;
	free_authority(&it->root);
	fl_signer_free(it->ann);
	fl_trust_free(it->trust);
	free(it->face.bytes);
	fl_text_free(&it->plain);
	free(it->once);
	free(it);
	return 0;
}

/* Checking and signing both refuse, or the check says broken. */
static void refused(const scene *it, const char *name, const void *bytes, size_t length) {
	fl_arena arena = {0};
	fl_seal_report report;
	fl_error refusal = {0};
	fl_status status = fl_pdf_check(bytes, length, it->trust, NOW, NULL, 0, &arena, &report, &refusal);
	bool said = status != FL_OK ? status == FL_E_SYNTAX && refusal.message[0] : report.verdict == FL_SEAL_BROKEN;
	if (!said) {
		print_message("%s: status %d, verdict %d\n", name, (int)status, status == FL_OK ? (int)report.verdict : -1);
		if (status == FL_OK)
			print_report(&report);
	}
	assert_true(said);
	fl_arena_free(&arena);
}

/* The signed file with a text replaced once by another of the same length, from the `nth` place on. */
static void with_replaced(const scene *it, const char *name, const char *from, const char *to) {
	size_t length = strlen(from);
	assert_int_equal(length, strlen(to));
	unsigned char *copy = malloc(it->length), *at;
	assert_non_null(copy);
	memcpy(copy, it->once, it->length);
	size_t skip = it->plain.length; /* what signing added */
	at = memmem(copy + skip, it->length - skip, from, length);
	if (!at)
		at = memmem(copy, it->length, from, length);
	if (!at)
		print_message("%s: \"%s\" is not in the file\n", name, from);
	assert_non_null(at);
	memcpy(at, to, length);
	refused(it, name, copy, it->length);
	free(copy);
}

static void every_part_of_the_signature_is_demanded(void **state) {
	const scene *it = *state;
	with_replaced(it, "first number", "/ByteRange [0 ", "/ByteRange [1 ");
	with_replaced(it, "no range", "/ByteRange", "/BytesRang");
	with_replaced(it, "a second range", "/Type /Sig /Filter", "/ByteRange[] /Filt");
	with_replaced(it, "another format", "/ETSI.CAdES.detached", "/adbe.pkcs7.detached");
	with_replaced(it, "no contents", "/Contents <", "/Contenta <");
	with_replaced(it, "no time", " /M (D:", " /N (D:");
	with_replaced(it, "another time", "(D:2026", "(D:2025");
	with_replaced(it, "another name", "/Name (Ann", "/Name (Bea");
	with_replaced(it, "another role", "(performed)", "(authorise)");
	with_replaced(it, "padding", "00>\n>>", "01>\n>>");
	with_replaced(it, "space in hex", "00>\n>>", " 0>\n>>");
	with_replaced(it, "hidden block", "/F 132", "/F 134");
	with_replaced(it, "no table", "/Prev", "/Prex");
}

static void ranges_that_overflow_are_refused(void **state) {
	const scene *it = *state;
	static const char *const ranges[] = {
	    "0 -1 2 3",        "0 1 2",   "0 1 2 3 4", "0 1.5 2 3", "0 99999999999999 1 1", "0 1 2 9223372036854775807",
	    "(a) (b) (c) (d)", "0 0 0 0",
	};
	for (size_t i = 0; i < sizeof ranges / sizeof *ranges; i++) {
		unsigned char *copy = malloc(it->length);
		assert_non_null(copy);
		memcpy(copy, it->once, it->length);
		unsigned char *at = memmem(copy, it->length, "/ByteRange [", 12);
		assert_non_null(at);
		memset(at + 12, ' ', 42);
		memcpy(at + 12, ranges[i], strlen(ranges[i]));
		refused(it, ranges[i], copy, it->length);
		free(copy);
	}
}

/* A whole file around one catalog or page, to be refused or called unsigned but never followed into the ground. */
static void never_good(const scene *it, const char *name, fl_text *file) {
	fl_arena arena = {0};
	fl_seal_report report;
	fl_error refusal = {0};
	fl_pdf_signing signing = signing_of(&it->face, "performed", 40, text, 2);
	unsigned char *out = NULL;
	size_t length;
	fl_status status =
	    fl_pdf_check((unsigned char *)file->data, file->length, it->trust, NOW, NULL, 0, &arena, &report, &refusal);
	assert_true(status == FL_OK ? report.verdict == FL_SEAL_NONE : refusal.message[0] != '\0');
	status = fl_pdf_sign((unsigned char *)file->data, file->length, it->ann, &signing, &out, &length, NULL);
	if (status == FL_OK)
		print_message("%s: was signed\n", name);
	assert_int_not_equal(status, FL_OK);
	fl_arena_free(&arena);
	fl_text_free(file);
}

static fl_text file_of(const char *catalog, const char *pages, const char *page) {
	sample it = {0};
	fl_text_add(&it.bytes, "%PDF-1.4\n");
	sample_object(&it, catalog);
	sample_object(&it, pages);
	sample_object(&it, page);
	sample_end(&it);
	return it.bytes;
}

#define CATALOG "<< /Type /Catalog /Pages 2 0 R >>"
#define PAGES "<< /Type /Pages /Kids [3 0 R] /Count 1 >>"
#define PAGE "<< /Type /Page /Parent 2 0 R /MediaBox [0 0 595 842] >>"

static void circles_and_depths_are_refused(void **state) {
	const scene *it = *state;
	fl_text deep = {0};
	for (int i = 0; i < 5000; i++)
		fl_text_add(&deep, "[");
	const char *const cases[][3] = {
	    {CATALOG, "<< /Type /Pages /Kids [2 0 R] >>", PAGE},
	    {CATALOG, "<< /Type /Pages /Kids 2 0 R >>", PAGE},
	    {CATALOG, "<< /Type /Pages /Kids [3 0 R 2 0 R] >>", "<< /Type /Pages /Kids [2 0 R 2 0 R] >>"},
	    {"<< /Type /Catalog /Pages 1 0 R >>", PAGES, PAGE},
	    {"<< /Type /Catalog /Pages 9 0 R >>", PAGES, PAGE},
	    {"<< /Type /Catalog /Type /Catalog /Pages 2 0 R >>", PAGES, PAGE},
	    {"<< /Type /Catalog /Pages 2 0 R /#50ages 2 0 R >>", PAGES, PAGE},
	    {"<< /Type /Catalog /Pages 2 0 R /AcroForm << /Fields [] >> >>", PAGES, PAGE},
	    {"<< /Type /Catalog /Pages 2 0 R /AcroForm 1 0 R >>", PAGES, PAGE},
	    {CATALOG, PAGES, "<< /Type /Page /Annots 3 0 R >>"},
	    {CATALOG, PAGES, "<< /Type /Page /Annots [ >>"},
	    {CATALOG, PAGES, "<< /Length 99999999999 >> stream"},
	    {CATALOG, PAGES, "<< /Length 3 0 R >> stream\n"},
	    {CATALOG, PAGES, "<< /A (((((( >>"},
	    {CATALOG, PAGES, "<< /A <0g> >>"},
	    {CATALOG, PAGES, deep.data},
	};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		fl_text file = file_of(cases[i][0], cases[i][1], cases[i][2]);
		char name[24];
		snprintf(name, sizeof name, "case %zu", i);
		never_good(it, name, &file);
	}
	fl_text_free(&deep);
}

static void tables_that_lie_are_refused(void **state) {
	const scene *it = *state;
	static const struct {
		const char *from, *to;
	} lies[] = {
	    {"xref\n0 5\n", "xref\n0 6\n"},
	    {"xref\n0 5\n", "xref\n0 99999999\n"},
	    {"xref\n0 5\n", "xref\n4 5\n"},
	    {"xref\n0 5\n", "xref\n-1 5\n"},
	    {"0000000000 65535 f \n", "0000000000 65535 f\n"},
	    {"startxref\n", "startxref\n9"},
	    {"trailer\n", "trailer\n<< >>\n"},
	    {"/Root 1 0 R", "/Root 1 1 R"},
	    {"/Root 1 0 R", "/Root 3 0 R"},
	    {"/Root 1 0 R", "/Encrypt 1 0 R /Root 1 0 R"},
	    {"/Root 1 0 R", "/XRefStm 9 /Root 1 0 R"},
	    {"/Root 1 0 R", "/Prev 999999 /Root 1 0 R"},
	    {"%PDF-1.4", "%PDX-1.4"},
	    {"%%EOF", "%%EOG"},
	};
	for (size_t i = 0; i < sizeof lies / sizeof *lies; i++) {
		fl_text file = {0};
		size_t from = strlen(lies[i].from);
		char *at = memmem(it->plain.data, it->plain.length, lies[i].from, from);
		if (!at)
			print_message("lie %zu: \"%s\" is not in the file\n", i, lies[i].from);
		assert_non_null(at);
		fl_text_append(&file, it->plain.data, (size_t)(at - it->plain.data));
		fl_text_add(&file, lies[i].to);
		fl_text_append(&file, at + from, it->plain.length - (size_t)(at - it->plain.data) - from);
		never_good(it, lies[i].to, &file);
	}
}

/* A file whose revisions point at themselves or at each other. */
static void revisions_in_a_circle_are_refused(void **state) {
	const scene *it = *state;
	unsigned char *copy = malloc(it->length), *at;
	char number[24];
	assert_non_null(copy);
	memcpy(copy, it->once, it->length);
	at = memmem(copy + it->plain.length, it->length - it->plain.length, "/Prev ", 6);
	assert_non_null(at);
	unsigned long place =
	    strtoul((char *)memmem(at, it->length - (size_t)(at - copy), "startxref\n", 10) + 10, NULL, 10);
	snprintf(number, sizeof number, "%lu", place);
	memcpy(at + 6, number, 3); /* as many digits as stand there */
	refused(it, "circle", copy, it->length);
	free(copy);
}

static void empty_and_tiny_files_are_refused(void **state) {
	const scene *it = *state;
	refused(it, "empty", "", 0);
	refused(it, "head", "%PDF-1.4\n", 9);
	refused(it, "tail", "%PDF-1.4\nstartxref\n0\n%%EOF\n", 27);
	refused(it, "itself", "%PDF-1.4\nstartxref\n9\n%%EOF\n", 27);
	refused(it, "big number", "%PDF-1.4\nstartxref\n99999999999999999999\n%%EOF\n", 46);
	refused(it, "table at the end", "%PDF-1.4\nxref\n0 0\ntrailer<<>>startxref\n9\n%%EOF\n", 47);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(every_part_of_the_signature_is_demanded), cmocka_unit_test(ranges_that_overflow_are_refused),
	    cmocka_unit_test(circles_and_depths_are_refused),          cmocka_unit_test(tables_that_lie_are_refused),
	    cmocka_unit_test(revisions_in_a_circle_are_refused),       cmocka_unit_test(empty_and_tiny_files_are_refused),
	};
	return cmocka_run_group_tests_name("seal: hostile files", tests, set_up, tear_down);
}
