/* test_pdf.c - setting sheets: same bytes, refusals by name, pages, alignment, failing files.
 * What other programs make of the files is read back in readback.sh.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <errno.h>

#include "failing_io.h"
#include "press.h"
#include "sample.h"

static const fl_faces faces = {FACES_FOLDER};

static fl_sheet *small_sheet(void) {
	fl_sheet *sheet = fl_sheet_new();
	assert_non_null(sheet);
	sheet->title = "Calibration certificate";
	sheet->number_label = "Certificate number";
	sheet->number = "TY-2026-0417";
	sheet->issuer = "Tallmere Yard";
	sheet->running = "Tallmere Yard, VT-1";
	sheet->program = "foundleft 0.1.0";
	sheet->fingerprint = "9c56cc51";
	sheet->made_at = 1776211200;
	return sheet;
}

static fl_status set(const fl_sheet *sheet, unsigned char **bytes, size_t *length, fl_error *err) {
	*bytes = NULL;
	return fl_certificate_pdf(sheet, fl_io_system(), &faces, bytes, length, err);
}

/* Number of times that `part` stands in the file. */
static int count(const unsigned char *bytes, size_t length, const char *part) {
	int found = 0;
	size_t size = strlen(part);
	for (const unsigned char *at = bytes; (at = memmem(at, length - (size_t)(at - bytes), part, size)); at += size)
		found++;
	return found;
}

static int pages_of(const fl_sheet *sheet) {
	unsigned char *bytes;
	size_t length;
	fl_error err = {0};
	if (set(sheet, &bytes, &length, &err) != FL_OK)
		fail_msg("%s", err.message);
	int pages = count(bytes, length, "/Type /Page\n");
	free(bytes);
	return pages;
}

static void test_same_sheet_same_bytes(void **state) {
	(void)state;
	const sample_wish wish = {.gain = 0.002, .decision = FL_DECISION_LEAVE};
	unsigned char *bytes[2];
	size_t length[2];
	for (int i = 0; i < 2; i++) {
		sample_case one;
		fl_error err = {0};
		sample_make(&one, &wish);
		sample_assess(&one);
		fl_sheet *sheet = sample_sheet(&one);
		assert_int_equal(FL_OK, set(sheet, &bytes[i], &length[i], &err));
		fl_sheet_free(sheet);
		sample_free(&one);
	}
	assert_int_equal(length[0], length[1]);
	assert_memory_equal(bytes[0], bytes[1], length[0]);
	free(bytes[0]);
	free(bytes[1]);
}

static void test_another_number_another_identity(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	unsigned char *bytes[2];
	size_t length[2];
	fl_error err = {0};
	assert_int_equal(FL_OK, set(sheet, &bytes[0], &length[0], &err));
	sheet->fingerprint = "9c56cc52";
	assert_int_equal(FL_OK, set(sheet, &bytes[1], &length[1], &err));
	const unsigned char *a = memmem(bytes[0], length[0], "/ID [", 5), *b = memmem(bytes[1], length[1], "/ID [", 5);
	assert_non_null(a);
	assert_non_null(b);
	assert_memory_not_equal(a, b, 38);
	free(bytes[0]);
	free(bytes[1]);
	fl_sheet_free(sheet);
}

static void must_refuse(const char *text, const char *first, const char *second) {
	fl_sheet *sheet = small_sheet();
	unsigned char *bytes;
	size_t length;
	fl_error err = {0};
	fl_sheet_add(sheet, FL_BLOCK_TEXT, text);
	assert_int_equal(FL_E_VALUE, set(sheet, &bytes, &length, &err));
	assert_null(bytes);
	if (!strstr(err.message, first) || !strstr(err.message, second))
		fail_msg("the refusal does not name \"%s\" and \"%s\": %s", first, second, err.message);
	fl_sheet_free(sheet);
}

static void test_what_the_face_lacks_is_refused_by_name(void **state) {
	(void)state;
	must_refuse("Zoe \xF0\x9F\x98\x80 of the engine room", "\xF0\x9F\x98\x80", "U+1F600");
	must_refuse("\xE6\xB8\xAF maru", "\xE6\xB8\xAF", "U+6E2F");
	must_refuse("\xE6\xB8\xAF maru", "maru", "cannot show");
	must_refuse("bell \x07 rings", "U+0007", "control character");
	must_refuse("tab\tbed", "U+0009", "control character");
	must_refuse("half \xC3", "valid UTF-8", "");
	must_refuse("over \xED\xA0\x80 there", "valid UTF-8", "");
}

static void test_refused_in_cells_and_labels_too(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	unsigned char *bytes;
	size_t length;
	fl_error err = {0};
	const fl_column column = {"oil", "", "", FL_ALIGN_LEFT, false};
	const char *cell = "LK-10 \xE2\x9C\x93";
	fl_block *table = fl_sheet_add_table(sheet, &column, 1);
	fl_sheet_row(sheet, table, FL_ROW_PLAIN, &cell);
	assert_int_equal(FL_E_VALUE, set(sheet, &bytes, &length, &err));
	assert_non_null(strstr(err.message, "U+2713"));
	fl_sheet_free(sheet);
}

static void test_latin_greek_cyrillic_and_signs_are_shown(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	fl_sheet_add(sheet, FL_BLOCK_TEXT, "Łukasz Żółć, Søren Åstrøm, Țîrcă, Ğül, Ähäm, Gráinne Ó Súilleabháin");
	fl_sheet_add(sheet, FL_BLOCK_TEXT, "Γιώργος Αναγνώστου, Ρωξάνη Ώρου; Юлия Щербакова, Ђорђе, Їжак, Ғалым");
	fl_sheet_add(sheet, FL_BLOCK_TEXT, "≤ ≥ ± ² ³ · µ μ ν ρ σ Δ − – — … ° × § € № ’ “ ” ≈");
	assert_int_equal(1, pages_of(sheet));
	fl_sheet_free(sheet);
}

static void add_long_table(fl_sheet *sheet, int rows) {
	const fl_column columns[] = {{"oil", "", "", FL_ALIGN_LEFT, false},
	                             {"error", "% of span", "both", FL_ALIGN_DECIMAL, false},
	                             {"U", "% of span", "both", FL_ALIGN_DECIMAL, false},
	                             {"remark", "", "", FL_ALIGN_LEFT, true}};
	fl_block *table = fl_sheet_add_table(sheet, columns, 4);
	for (int i = 0; i < rows; i++) {
		const char *cells[] = {fl_sheet_printf(sheet, "LK-%d", i), fl_sheet_printf(sheet, "+%d.%02d", i % 13, i),
		                       "0.36",
		                       i % 7 == 0 ? "a remark that is a good deal longer than what a line of it takes, and "
		                                    "so has to be set in two lines or even three of them"
		                                  : ""};
		fl_sheet_row(sheet, table, i % 3 == 0 ? FL_ROW_FIRST : FL_ROW_PLAIN, cells);
	}
}

static void test_tables_go_on_overleaf(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Results");
	add_long_table(sheet, 40);
	assert_int_equal(1, pages_of(sheet));
	add_long_table(sheet, 40);
	assert_int_equal(2, pages_of(sheet));
	add_long_table(sheet, 400);
	assert_true(pages_of(sheet) > 6);
	fl_sheet_free(sheet);
}

static void test_long_names_are_broken_not_lost(void **state) {
	(void)state;
	static char name[4001];
	memset(name, 'W', 4000);
	fl_sheet *sheet = small_sheet();
	const char *heads[] = {"Item", "Work"};
	fl_block *grid = fl_sheet_add_grid(sheet, FL_BLOCK_GRID, heads, 2);
	fl_sheet_pair(sheet, grid, 0, "Customer", name);
	fl_sheet_add(sheet, FL_BLOCK_TEXT, name);
	fl_sheet_add(sheet, FL_BLOCK_ITEM, name);
	assert_true(pages_of(sheet) >= 3);
	fl_sheet_free(sheet);
}

/* ---- what stands on a page: every text of a press's first page, decoded ---- */

typedef struct set_text {
	double x, y, right;
	char text[128];
} set_text;

static void load_press(fl_press *press, fl_sheet *sheet, fl_error *err) {
	*press = (fl_press){.sheet = sheet, .err = err};
	static const char *const names[] = {"regular.ttf", "bold.ttf"};
	for (int i = 0; i < FL_WEIGHTS; i++) {
		char path[512], *bytes;
		size_t length;
		fl_typeface *type = &press->faces[i];
		snprintf(path, sizeof path, "%s/%s", FACES_FOLDER, names[i]);
		assert_int_equal(FL_OK, fl_file_read(fl_io_system(), path, 1 << 24, &press->arena, &bytes, &length, err));
		assert_int_equal(FL_OK, fl_face_open(&type->face, (unsigned char *)bytes, length, path, err));
		type->number_of = fl_arena_alloc(&press->arena, 65536, sizeof *type->number_of);
		type->glyphs = fl_arena_grow(&press->arena, NULL, 0, &type->glyph_capacity, sizeof *type->glyphs);
		type->points = fl_arena_grow(&press->arena, NULL, 0, &type->point_capacity, sizeof *type->points);
		type->count = 1;
	}
	fl_press_new_page(press);
}

static size_t read_page(const fl_press *press, const char *page, set_text *out, size_t most) {
	size_t n = 0;
	int font = 1;
	double size = 0;
	for (const char *line = page; *line && n < most; line = strchr(line, '\n') + 1) {
		sscanf(line, "/F%d %lf Tf", &font, &size);
		double x, y;
		if (sscanf(line, "%lf %lf Td", &x, &y) == 2 && strncmp(strchr(line, '\n') - 2, "Td", 2) == 0) {
			out[n].x = x;
			out[n].y = y;
		}
		if (line[0] != '<')
			continue;
		size_t length = 0;
		out[n].right = out[n].x;
		for (const char *code = line + 1; *code != '>' && length + 1 < sizeof out[n].text; code += 4) {
			unsigned number;
			assert_int_equal(1, sscanf(code, "%4x", &number));
			const fl_typeface *type = &press->faces[font - 1];
			unsigned point = type->points[number];
			out[n].right += fl_face_advance(&type->face, type->glyphs[number]) * size / 1000;
			out[n].text[length++] = point < 0x80 ? (char)point : '~'; /* '~' for anything else: columns only */
		}
		out[n++].text[length] = '\0';
	}
	return n;
}

static void test_numbers_stand_on_their_decimal_point(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	fl_error err = {0};
	fl_press press;
	load_press(&press, sheet, &err);
	const fl_column columns[] = {{"name", "", "", FL_ALIGN_LEFT, false}, {"value", "mA", "", FL_ALIGN_DECIMAL, false}};
	static const char *const values[] = {"4.000", "+12.25", "1234.5", "0.000012", "7"};
	fl_block *table = fl_sheet_add_table(sheet, columns, 2);
	for (size_t i = 0; i < 5; i++) {
		const char *cells[] = {"x", values[i]};
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
	fl_set_table(&press, table);
	assert_int_equal(FL_OK, press.status);
	set_text texts[64];
	size_t n = read_page(&press, press.pages[0].data, texts, 64);
	double point_at = NAN;
	int seen = 0;
	for (size_t i = 0; i < n; i++)
		for (size_t v = 0; v < 5; v++) {
			if (strcmp(texts[i].text, values[v]) != 0)
				continue;
			double at = texts[i].x + fl_press_width(&press, FL_REGULAR, 7.3, values[v], strcspn(values[v], "."));
			if (isnan(point_at))
				point_at = at;
			check_near(values[v], point_at, at, 0.02);
			seen++;
		}
	assert_int_equal(5, seen);
	fl_text_free(&press.pages[0]);
	fl_arena_free(&press.arena);
	fl_sheet_free(sheet);
}

static void test_heads_stand_again_overleaf(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	fl_error err = {0};
	fl_press press;
	load_press(&press, sheet, &err);
	add_long_table(sheet, 150);
	fl_set_table(&press, &sheet->blocks[0]);
	assert_true(press.page_count >= 2);
	int rows = 0;
	for (size_t page = 0; page < press.page_count; page++) {
		static set_text texts[2000];
		size_t n = read_page(&press, press.pages[page].data, texts, 2000);
		int heads = 0;
		for (size_t i = 0; i < n; i++) {
			heads += strcmp(texts[i].text, "remark") == 0;
			rows += strncmp(texts[i].text, "LK-", 3) == 0;
			assert_true(texts[i].y >= FL_BOTTOM - 1 && texts[i].y <= FL_TOP);
		}
		assert_int_equal(1, heads);
		fl_text_free(&press.pages[page]);
	}
	assert_int_equal(150, rows);
	fl_arena_free(&press.arena);
	fl_sheet_free(sheet);
}

/* Whatever the names, nothing leaves the margins. */
static void test_all_stays_within_the_margins(void **state) {
	(void)state;
	static char name[361];
	for (int i = 0; i < 360; i += 12)
		memcpy(name + i, i % 36 == 0 ? "Quillhavener" : "unbrokenword", 12);
	const sample_wish wish = {
	    .gain = 0.03, .decision = FL_DECISION_ADJUST, .struck = 9, .remarks = 3, .customer = name, .performer = name};
	sample_case one;
	fl_error err = {0};
	fl_press press;
	sample_make(&one, &wish);
	sample_assess(&one);
	one.issue.issuer = one.issue.issuer_address = name;
	one.issue.authorised_by = name;
	one.issue.journal_name = name;
	one.issue.number = "WWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWWW";
	one.session.adjustments[0].item = name;
	fl_sheet *sheet = sample_sheet(&one);
	load_press(&press, sheet, &err);
	press.page_count = 0;
	fl_set_sheet(&press);
	assert_int_equal(FL_OK, press.status);
	for (size_t page = 0; page < press.page_count; page++) {
		static set_text texts[3000];
		size_t n = read_page(&press, press.pages[page].data, texts, 3000);
		for (size_t i = 0; i < n; i++)
			if (texts[i].x < FL_LEFT - 0.1 || texts[i].right > FL_RIGHT + 0.1 || texts[i].y < 30 ||
			    texts[i].y > FL_PAGE_HEIGHT - 20)
				fail_msg("page %zu: \"%s\" stands at %.1f to %.1f, %.1f", page + 1, texts[i].text, texts[i].x,
				         texts[i].right, texts[i].y);
		fl_text_free(&press.pages[page]);
	}
	fl_arena_free(&press.arena);
	fl_sheet_free(sheet);
	sample_free(&one);
}

static void test_tabular_figures(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	fl_error err = {0};
	fl_press press;
	load_press(&press, sheet, &err);
	for (int weight = 0; weight < FL_WEIGHTS; weight++) {
		double zero = fl_press_width(&press, (fl_weight)weight, 10, "0", 1);
		for (const char *digit = "123456789"; *digit; digit++)
			check_near("width of a figure", zero, fl_press_width(&press, (fl_weight)weight, 10, digit, 1), 1e-9);
		check_near("width of +", zero, fl_press_width(&press, (fl_weight)weight, 10, "+", 1), 1e-9);
		check_near("width of the minus", zero, fl_press_width(&press, (fl_weight)weight, 10, "\xE2\x88\x92", 3), 1e-9);
	}
	fl_text_free(&press.pages[0]);
	fl_arena_free(&press.arena);
	fl_sheet_free(sheet);
}

/* ---- what can go wrong outside ---- */

static void test_every_failing_file_call_is_told(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	for (long n = 1;; n++) {
		failing_io disk;
		unsigned char *bytes = NULL;
		size_t length;
		fl_error err = {0};
		failing_io_start(&disk, n, EIO, FAILING_CLEAN);
		fl_status status = fl_certificate_pdf(sheet, &disk.io, &faces, &bytes, &length, &err);
		if (!disk.failed) {
			assert_int_equal(FL_OK, status);
			free(bytes);
			break;
		}
		if (status == FL_OK) { /* a failing close after reading does no harm */
			assert_string_equal("close", disk.what);
			free(bytes);
			continue;
		}
		assert_null(bytes);
		assert_true(err.message[0] != '\0');
	}
	fl_sheet_free(sheet);
}

static void test_missing_faces_are_told(void **state) {
	(void)state;
	fl_sheet *sheet = small_sheet();
	unsigned char *bytes = NULL;
	size_t length;
	fl_error err = {0};
	fl_status status = fl_certificate_pdf(sheet, fl_io_system(), &(fl_faces){"/nowhere/at/all"}, &bytes, &length, &err);
	assert_int_equal(FL_E_NOT_FOUND, status);
	fl_sheet_free(sheet);
}

/* Any damage to a face is refused or set, but never reads outside it (the sanitizer watches). */
static void test_damaged_faces(void **state) {
	(void)state;
	fl_arena arena = {0};
	fl_error err = {0};
	char *bytes;
	size_t length;
	assert_int_equal(FL_OK,
	                 fl_file_read(fl_io_system(), FACES_FOLDER "/regular.ttf", 1 << 24, &arena, &bytes, &length, &err));
	unsigned char *copy = malloc(length);
	for (size_t cut = 0; cut < length; cut += 97) {
		fl_face face;
		memcpy(copy, bytes, length);
		if (fl_face_open(&face, copy, cut, "cut", NULL) == FL_OK)
			fl_face_glyph(&face, 'A');
		copy[cut] = (unsigned char)~copy[cut];
		if (fl_face_open(&face, copy, length, "bent", NULL) != FL_OK)
			continue;
		fl_arena scratch = {0};
		uint16_t glyphs[] = {0, (uint16_t)fl_face_glyph(&face, 'A'), (uint16_t)fl_face_glyph(&face, 0xC5)};
		unsigned char *out;
		size_t out_length, out_count;
		if (cut % (97 * 8) == 0 &&
		    fl_face_subset(&face, glyphs, 3, &scratch, &out, &out_length, &out_count, NULL) == FL_OK)
			assert_true(out_length > 0);
		fl_arena_free(&scratch);
	}
	free(copy);
	fl_arena_free(&arena);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(test_same_sheet_same_bytes),
	    cmocka_unit_test(test_another_number_another_identity),
	    cmocka_unit_test(test_what_the_face_lacks_is_refused_by_name),
	    cmocka_unit_test(test_refused_in_cells_and_labels_too),
	    cmocka_unit_test(test_latin_greek_cyrillic_and_signs_are_shown),
	    cmocka_unit_test(test_tables_go_on_overleaf),
	    cmocka_unit_test(test_long_names_are_broken_not_lost),
	    cmocka_unit_test(test_numbers_stand_on_their_decimal_point),
	    cmocka_unit_test(test_heads_stand_again_overleaf),
	    cmocka_unit_test(test_all_stays_within_the_margins),
	    cmocka_unit_test(test_tabular_figures),
	    cmocka_unit_test(test_every_failing_file_call_is_told),
	    cmocka_unit_test(test_missing_faces_are_told),
	    cmocka_unit_test(test_damaged_faces),
	};
	return cmocka_run_group_tests_name("certificate/pdf", tests, NULL, NULL);
}
