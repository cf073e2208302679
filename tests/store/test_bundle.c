/* test_bundle.c - many ships, one office: any order, any number of times; forged and damaged bundles are refused whole.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "book.h"

typedef struct fleet {
	char paths[4][SCRATCH_SIZE]; /* early bundle of each ship, then a later one */
} fleet;

/* Two ships; each gives a bundle of its first years, and later one with journals since 2024 only. */
static void make_fleet(const char *folder, fleet *f) {
	static const char *const names[] = {"Quillhaven", "Marrowby"}, *const prefixes[] = {"QH", "MB"};
	for (int ship = 0; ship < 2; ship++) {
		char path[SCRATCH_SIZE], number[FL_NUMBER_SIZE], name[16], digest[FL_DIGEST_HEX_SIZE];
		fl_error err = {0};
		fl_store *store = book_found(scratch_path(folder, names[ship], path), names[ship], prefixes[ship], 3 + ship);
		for (int year = 2021; year < 2024; year++)
			book_add(store, names[ship], "VT-1", year, number, digest);
		snprintf(name, sizeof name, "early%d", ship);
		must(fl_store_bundle(store, fl_io_system(), scratch_path(folder, name, f->paths[ship]), FL_NO_DAY, NULL, &err));
		fl_paper paper = {
		    .record = digest, .number = number, .stage = "issued", .file = "c.pdf", .kept_at = 1710000000};
		must(fl_store_add_paper(store, &paper, "%PDF invented", 13, &err));
		for (int year = 2024; year < 2027; year++)
			book_add(store, names[ship], year == 2025 ? "VT-2" : "VT-1", year, number, digest);
		snprintf(name, sizeof name, "late%d", ship);
		must(fl_store_bundle(store, fl_io_system(), scratch_path(folder, name, f->paths[2 + ship]),
		                     fl_day_from_civil(2024, 1, 1), NULL, &err));
		fl_store_close(store);
	}
}

/* What the office knows, in an order of its own: chains, each record with its journal, history, due list. */
static void describe(fl_store *store, char hex[FL_DIGEST_HEX_SIZE], fl_verified *verified) {
	fl_error err = {0};
	must(fl_store_verify(store, true, NULL, verified, &err));
	must(fl_store_content(store, hex, &err));
}

static fl_status take(fl_text *all, const char *bytes, size_t length) {
	fl_text_append(all, bytes, length);
	return FL_OK;
}
static fl_status take_text(void *self, const char *bytes, size_t length, fl_error *err) {
	(void)err;
	return take(self, bytes, length);
}

/* Every order of the four bundles, each once or twice. */
static void test_any_order(void **state) {
	static const int orders[][6] = {{0, 1, 2, 3, -1},    {3, 2, 1, 0, -1},   {2, 0, 3, 1, -1},
	                                {1, 3, 1, 0, 2, -1}, {2, 2, 0, 0, 1, 3}, {3, 1, 2, 0, 3, 2}};
	fleet f;
	char first[FL_DIGEST_HEX_SIZE] = "", *first_export = NULL;
	make_fleet(*state, &f);
	for (size_t o = 0; o < sizeof orders / sizeof *orders; o++) {
		char path[SCRATCH_SIZE], name[16], hex[FL_DIGEST_HEX_SIZE];
		fl_error err = {0};
		fl_intake intake;
		fl_verified verified;
		snprintf(name, sizeof name, "office%zu", o);
		/* The office's own founding is part of the content: the same salt each time. */
		fl_store *office = book_found(scratch_path(*state, name, path), "Office", "OF", 9);
		for (int i = 0; i < 6 && orders[o][i] >= 0; i++)
			must(fl_store_take_in(office, f.paths[orders[o][i]], true, NULL, &intake, &err));
		describe(office, hex, &verified);
		assert_int_equal(verified.entries, 14);
		assert_int_equal(verified.records, 12);
		assert_int_equal(verified.papers, 2);
		assert_int_equal(verified.without_bytes, 0);
		fl_text all = {0};
		const fl_sink sink = {take_text, &all};
		must(fl_store_export_json(office, &sink, NULL, &err));
		if (!first_export) {
			memcpy(first, hex, sizeof first);
			first_export = all.data;
			all = (fl_text){0};
		} else {
			assert_string_equal(hex, first);
			assert_string_equal(all.data, first_export);
		}
		fl_text_free(&all);
		fl_store_close(office);
	}
	free(first_export);
}

/* Only the late bundle: all facts are there, the early journals are not, and that is counted, not a fault. */
static void test_since(void **state) {
	fleet f;
	char path[SCRATCH_SIZE];
	fl_error err = {0};
	fl_intake intake;
	fl_verified verified;
	fl_record_list list = {0};
	fl_arena arena = {0};
	char *journal = NULL;
	size_t length = 0;
	make_fleet(*state, &f);
	fl_store *office = book_found(scratch_path(*state, "office", path), "Office", "OF", 9);
	must(fl_store_take_in(office, f.paths[2], true, NULL, &intake, &err));
	assert_int_equal(intake.origins_new, 1);
	assert_int_equal(intake.entries_new, 7);
	assert_int_equal(intake.bytes_new, 4);
	assert_string_equal(intake.name, "Quillhaven");
	must(fl_store_verify(office, true, NULL, &verified, &err));
	assert_int_equal(verified.without_bytes, 3);
	must(fl_store_find(office, "QH-2021-0001", &list, &err));
	assert_int_equal(fl_store_bytes(office, list.records[0].digest, &arena, &journal, &length, &err), FL_E_NOT_FOUND);
	err = (fl_error){0};
	must(fl_store_take_in(office, f.paths[0], false, NULL, &intake, &err));
	assert_int_equal(intake.entries_new, 0);
	assert_int_equal(intake.entries_known, 3);
	assert_int_equal(intake.bytes_new, 3);
	must(fl_store_bytes(office, list.records[0].digest, &arena, &journal, &length, &err));
	fl_record_list_free(&list);
	fl_arena_free(&arena);
	fl_store_close(office);
}

/* A ship never seen before is asked about, and changes nothing until it is accepted. */
static void test_new_ship_is_asked_about(void **state) {
	fleet f;
	char path[SCRATCH_SIZE], before[FL_DIGEST_HEX_SIZE], after[FL_DIGEST_HEX_SIZE];
	fl_error err = {0};
	fl_intake intake;
	make_fleet(*state, &f);
	fl_store *office = book_found(scratch_path(*state, "office", path), "Office", "OF", 9);
	must(fl_store_content(office, before, &err));
	assert_int_equal(fl_store_take_in(office, f.paths[0], false, NULL, &intake, &err), FL_ASK);
	assert_string_equal(intake.name, "Quillhaven");
	assert_int_equal(strlen(intake.origin), 64);
	assert_int_equal(intake.entries_new, 0);
	must(fl_store_content(office, after, &err));
	assert_string_equal(before, after);
	fl_store_close(office);
}

/* Any byte changed, the file cut anywhere, something behind it: refused, and the office's book is as before. */
static void test_damaged(void **state) {
	fleet f;
	char path[SCRATCH_SIZE], bad[SCRATCH_SIZE], before[FL_DIGEST_HEX_SIZE], after[FL_DIGEST_HEX_SIZE];
	fl_error err = {0};
	fl_intake intake;
	fl_verified verified;
	size_t length = 0;
	make_fleet(*state, &f);
	scratch_path(*state, "bad", bad);
	fl_store *office = book_found(scratch_path(*state, "office", path), "Office", "OF", 9);
	must(fl_store_take_in(office, f.paths[1], true, NULL, &intake, &err));
	must(fl_store_content(office, before, &err));
	char *bytes = scratch_read(f.paths[0], &length);
	size_t step = length / 400 + 1;
	for (size_t at = 0; at < length; at += step) {
		bytes[at] = (char)(bytes[at] ^ 1);
		assert_true(fl_file_write(fl_io_system(), bad, bytes, length, true, NULL) >= 0);
		bytes[at] = (char)(bytes[at] ^ 1);
		err = (fl_error){0};
		assert_true(fl_store_take_in(office, bad, true, NULL, &intake, &err) < 0);
		assert_true(*err.message);
		assert_true(fl_file_write(fl_io_system(), bad, bytes, at, true, NULL) >= 0);
		err = (fl_error){0};
		assert_true(fl_store_take_in(office, bad, true, NULL, &intake, &err) < 0);
	}
	fl_text longer = {0};
	fl_text_append(&longer, bytes, length);
	fl_text_add(&longer, "\n");
	assert_true(fl_file_write(fl_io_system(), bad, longer.data, longer.length, true, NULL) >= 0);
	assert_int_equal(fl_store_take_in(office, bad, true, NULL, &intake, &err), FL_E_TAMPERED);
	fl_text_free(&longer);
	free(bytes);
	err = (fl_error){0};
	must(fl_store_content(office, after, &err));
	assert_string_equal(before, after);
	must(fl_store_verify(office, true, NULL, &verified, &err));
	fl_store_close(office);
}

/* ---- forgeries: bundles whose seal was made anew by somebody who knows the form --------------------------------- */

typedef struct forged {
	fl_text text;
	char seal[FL_DIGEST_HEX_SIZE];
	int parts;
	fl_hasher *hasher;
} forged;

static void forged_begin(forged *f) {
	fl_error err = {0};
	*f = (forged){0};
	must(fl_hasher_new(&f->hasher, &err));
	must(fl_seal_digest(f->hasher, "foundleft-bundle\t1", 18, f->seal, &err));
	fl_text_add(&f->text, "foundleft-bundle\t1\n");
}

static void forged_part(forged *f, const char *kind, const char *bytes, size_t length) {
	char digest[FL_DIGEST_HEX_SIZE], line[256], both[400];
	fl_error err = {0};
	must(fl_seal_digest(f->hasher, bytes, length, digest, &err));
	snprintf(line, sizeof line, "part\t%s\t%zu\t%s", kind, length, digest);
	snprintf(both, sizeof both, "%s%s", f->seal, line);
	must(fl_seal_digest(f->hasher, both, strlen(both), f->seal, &err));
	fl_text_printf(&f->text, "%s\n", line);
	fl_text_append(&f->text, bytes, length);
	fl_text_add(&f->text, "\n");
	f->parts++;
}

static void forged_end(forged *f, const char *path) {
	fl_text_printf(&f->text, "end\t%d\t%s\n", f->parts, f->seal);
	assert_true(fl_file_write(fl_io_system(), path, f->text.data, f->text.length, true, NULL) >= 0);
	fl_text_free(&f->text);
	fl_hasher_free(f->hasher);
}

/* Copies a bundle part by part with `edit` at work on each, and a new seal. */
typedef bool edit_part(int index, const char *kind, fl_text *bytes); /* false leaves the part out */
static void forge(const char *from, const char *to, edit_part *edit) {
	size_t length = 0;
	char *bytes = scratch_read(from, &length), *at = strchr(bytes, '\n') + 1;
	forged f;
	forged_begin(&f);
	for (int i = 0;; i++) {
		char kind[8];
		unsigned long long size = 0;
		if (sscanf(at, "part\t%7[a-z]\t%llu", kind, &size) != 2)
			break;
		at = strchr(at, '\n') + 1;
		fl_text part = {0};
		fl_text_append(&part, at, size);
		at += size + 1;
		if (edit(i, kind, &part))
			forged_part(&f, kind, part.data, part.length);
		fl_text_free(&part);
	}
	forged_end(&f, to);
	free(bytes);
}

static void exchange(fl_text *bytes, const char *from, const char *to) {
	assert_int_equal(strlen(from), strlen(to));
	char *at = strstr(bytes->data, from);
	if (at)
		memcpy(at, to, strlen(to));
}

static bool leave(int index, const char *kind, fl_text *bytes) {
	(void)index;
	(void)kind;
	(void)bytes;
	return true;
}
static bool edit_last_verdict(int index, const char *kind, fl_text *bytes) {
	(void)index;
	if (strcmp(kind, "entry") == 0 && strstr(bytes->data, "sequence\t3\n"))
		exchange(bytes, "Ada Brook", "Eve Brook");
	return true;
}
static bool edit_first_verdict(int index, const char *kind, fl_text *bytes) {
	(void)index;
	if (strcmp(kind, "entry") == 0 && strstr(bytes->data, "sequence\t1\n"))
		exchange(bytes, "Ada Brook", "Eve Brook");
	return true;
}
static bool leave_out_entry(int index, const char *kind, fl_text *bytes) {
	(void)kind;
	(void)bytes;
	return index != 3 && index != 4;
}
static bool edit_journal(int index, const char *kind, fl_text *bytes) {
	(void)index;
	if (strcmp(kind, "bytes") == 0)
		bytes->data[bytes->length / 2] ^= 1;
	return true;
}
static bool edit_founding(int index, const char *kind, fl_text *bytes) {
	(void)index;
	if (strcmp(kind, "origin") == 0)
		exchange(bytes, "name\tQuillhaven", "name\tQuilhaaven");
	return true;
}
static bool no_founding(int index, const char *kind, fl_text *bytes) {
	(void)index;
	(void)bytes;
	return strcmp(kind, "origin") != 0;
}
static bool unknown_kind(int index, const char *kind, fl_text *bytes) {
	(void)bytes;
	if (index == 1)
		strcpy((char *)(uintptr_t)kind, "entri");
	return true;
}

static void test_forged(void **state) {
	static const struct {
		const char *what;
		edit_part *edit;
		const char *says;
	} cases[] = {
	    {"a record that the office has, otherwise", edit_last_verdict, "forged, or the ship's book was copied"},
	    {"an early record", edit_first_verdict, "forged, or the ship's book was copied"},
	    {"a record left out", leave_out_entry, "not chained"},
	    {"a journal exchanged", edit_journal, "not those that were kept"},
	    {"the founding of another ship", edit_founding, "not chained"},
	    {"no founding", no_founding, "before the founding"},
	    {"an unknown kind", unknown_kind, "kind is unknown"}};
	fleet f;
	char path[SCRATCH_SIZE], bad[SCRATCH_SIZE], before[FL_DIGEST_HEX_SIZE], after[FL_DIGEST_HEX_SIZE];
	fl_error err = {0};
	fl_intake intake;
	make_fleet(*state, &f);
	fl_store *office = book_found(scratch_path(*state, "office", path), "Office", "OF", 9);
	must(fl_store_take_in(office, f.paths[0], true, NULL, &intake, &err));
	forge(f.paths[0], scratch_path(*state, "copy", bad), leave); /* the forger's form is right */
	must(fl_store_take_in(office, bad, false, NULL, &intake, &err));
	assert_int_equal(intake.entries_known, 3);
	must(fl_store_content(office, before, &err));
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		forge(f.paths[0], scratch_path(*state, "forged", bad), cases[i].edit);
		err = (fl_error){0};
		fl_status status = fl_store_take_in(office, bad, true, NULL, &intake, &err);
		if (status >= 0 || !strstr(err.message, cases[i].says))
			print_error("%s: %d, %s\n", cases[i].what, status, err.message);
		assert_true(status < 0);
		assert_non_null(strstr(err.message, cases[i].says));
		err = (fl_error){0};
		must(fl_store_content(office, after, &err));
		assert_string_equal(before, after);
	}
	fl_store_close(office);
}

/* A ship's book copied, and both copies gone on: the second bundle is refused, and both digests are named. */
static void test_fork(void **state) {
	char ship[SCRATCH_SIZE], twin[SCRATCH_SIZE], path[SCRATCH_SIZE], one[SCRATCH_SIZE], two[SCRATCH_SIZE];
	char number[FL_NUMBER_SIZE];
	fl_error err = {0};
	fl_intake intake;
	fl_store *store = book_found(scratch_path(*state, "ship", ship), "Quillhaven", "QH", 1);
	book_add(store, "Quillhaven", "VT-1", 2021, number, NULL);
	must(fl_store_backup(store, fl_io_system(), scratch_path(*state, "twin", twin), NULL, &err));
	book_add(store, "Quillhaven", "VT-1", 2022, number, NULL);
	must(fl_store_bundle(store, fl_io_system(), scratch_path(*state, "one", one), FL_NO_DAY, NULL, &err));
	fl_store *copied = book_open(twin, FL_STORE_WRITE); /* opened as it is, not restored */
	book_add(copied, "Quillhaven", "VT-2", 2022, number, NULL);
	must(fl_store_bundle(copied, fl_io_system(), scratch_path(*state, "two", two), FL_NO_DAY, NULL, &err));
	fl_store_close(copied);
	fl_store *office = book_found(scratch_path(*state, "office", path), "Office", "OF", 9);
	must(fl_store_take_in(office, one, true, NULL, &intake, &err));
	assert_int_equal(fl_store_take_in(office, two, true, NULL, &intake, &err), FL_E_TAMPERED);
	assert_non_null(strstr(err.message, "entry 2 of Quillhaven"));
	/* and the ship itself does not take in more of its own chain than it has */
	err = (fl_error){0};
	book_add(store, "Quillhaven", "VT-1", 2023, number, NULL);
	fl_store_close(store);
	fl_store_close(office);
}

int main(void) {
#define TEST(f) cmocka_unit_test_setup_teardown(f, scratch_make, scratch_remove)
	const struct CMUnitTest tests[] = {TEST(test_any_order), TEST(test_since),  TEST(test_new_ship_is_asked_about),
	                                   TEST(test_damaged),   TEST(test_forged), TEST(test_fork)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
