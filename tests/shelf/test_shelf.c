/* test_shelf.c - items asked for line by line, renewed, put into files that stay as they were otherwise.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "answers.h"

#include "failing_io.h"

#include <errno.h>
#include <unistd.h>

static fl_shelf *talk(const fl_stock *stock, const char *what, const char *const *lines, int count) {
	fl_shelf *shelf = shelf_begin(what, stock);
	for (int i = 0; i < count; i++)
		shelf_take(shelf, lines[i]);
	return shelf;
}

/* The item of a finished conversation, read by the reader of the files. */
static void read_item(fl_shelf *shelf, fl_stock *into) {
	fl_error err = {0};
	fl_text text = {0};
	must(fl_shelf_insert("", "new.yaml", fl_shelf_kind_of(shelf), fl_shelf_block(shelf), &text, &err));
	*into = (fl_stock){0};
	must(fl_stock_parse(into, text.data, "new.yaml", &err));
	fl_text_free(&text);
}

static void an_oil_is_asked_for_and_reads_back(void **state) {
	(void)state;
	fl_stock stock, got;
	sample_stock(&stock);
	fl_shelf *shelf = talk(&stock, "add oil", oil_lines, COUNT(oil_lines));
	assert_true(fl_shelf_finished(shelf) && fl_shelf_agreed(shelf));
	assert_string_equal(fl_shelf_name(shelf), "2602B");
	read_item(shelf, &got);
	const fl_oil *oil = fl_stock_oil(&got, "2602B");
	assert_non_null(oil);
	assert_int_equal(oil->table.count, 3);
	check_near("nu at 40 °C", 10.00e-6, oil->table.points[1].nu_m2_s, 1e-18);
	check_near("density with a comma", 828.9, oil->table.points[1].rho_kg_m3, 1e-9);
	check_near("U carried to the next row", 0.0020, oil->U_nu_rel[2], 1e-15);
	assert_int_equal(oil->opened_on, FL_NO_DAY);
	fl_stock_free(&got);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

static void an_equipment_with_corrections_reads_back(void **state) {
	(void)state;
	fl_stock stock, got;
	sample_stock(&stock);
	fl_shelf *shelf = talk(&stock, "add equipment", thermometer_lines, COUNT(thermometer_lines));
	read_item(shelf, &got);
	const fl_equipment *item = fl_stock_equipment(&got, "TH-9");
	assert_non_null(item);
	check_near("resolution, bare, in K", 0.01, item->resolution, 1e-15);
	assert_int_equal(item->correction_count, 2);
	check_near("correction at 60", 59.98, fl_stock_corrected(item, 60.0), 1e-12);
	fl_stock_free(&got);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

static void an_instrument_reads_back(void **state) {
	(void)state;
	fl_stock stock, got;
	sample_stock(&stock);
	fl_shelf *shelf = talk(&stock, "add instrument", instrument_lines, COUNT(instrument_lines));
	read_item(shelf, &got);
	const fl_instrument *item = fl_stock_instrument(&got, "VT-7");
	assert_non_null(item);
	assert_true(item->has_geometry);
	check_near("bore", 2.2e-3, item->capillary.bore_m, 1e-15);
	check_near("full scale", 31321.0, item->dp_full_pa, 1e-6);
	check_near("set point", 13.0, item->set_point, 1e-12);
	assert_int_equal(item->interval_months, 12);
	fl_stock_free(&got);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

static void a_bath_is_asked_for_its_uniformity_only(void **state) {
	(void)state;
	static const char *const lines[] = {"BA-9",       "bath",       "TB-7002",      "Tallmere bench (invented)",
	                                    "2026-03-02", "2027-03-02", "20 to 120 °C", "0.01",
	                                    "0.05",       "",           "yes"};
	fl_stock stock, got;
	sample_stock(&stock);
	fl_shelf *shelf = talk(&stock, "add equipment", lines, COUNT(lines));
	read_item(shelf, &got);
	assert_int_equal(fl_stock_equipment(&got, "BA-9")->role, FL_ROLE_BATH);
	check_near("uniformity", 0.05, fl_stock_equipment(&got, "BA-9")->U, 1e-15);
	fl_stock_free(&got);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

/* TH-7 of the sample stock: what is likely the same is taken by empty lines, the certificate's own is typed. */
static void renewing_keeps_what_is_the_same(void **state) {
	(void)state;
	static const char *const lines[] = {"TB-7700", "", "2026-08-30", "2027-08-30", "", "", "", "0.03", "2", "", "yes"};
	fl_stock stock, got;
	sample_stock(&stock);
	fl_shelf *shelf = talk(&stock, "renew TH-7", lines, COUNT(lines));
	assert_true(fl_shelf_agreed(shelf));
	read_item(shelf, &got);
	const fl_equipment *item = fl_stock_equipment(&got, "TH-7");
	assert_int_equal(item->role, FL_ROLE_THERMOMETER);
	assert_string_equal(item->certificate, "TB-7700");
	check_near("drift kept", 0.02, item->drift_per_year, 1e-15);
	check_near("range kept", 150.0, item->high, 1e-12);
	fl_stock_free(&got);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

/* Fields that no question asks stay with a renewed instrument. */
static void renewing_keeps_what_is_not_asked(void **state) {
	(void)state;
	static const char text[] = "instruments:\n"
	                           "  - tag: VT-5\n"
	                           "    serial: A-1\n"
	                           "    dial: 0 to 50 mm²/s\n"
	                           "    dial density: 900 kg/m³\n"
	                           "    signal: 4-20 mA\n"
	                           "    geometry:\n"
	                           "      bore: 2.200 mm\n"
	                           "      length: 400 mm\n"
	                           "      pump: 1.500 cm³/rev\n"
	                           "      pump speed: 40.0 r/min\n"
	                           "      kinetic coefficient: 1.08\n"
	                           "    tolerance: 2 % of span\n"
	                           "    tolerance zones:\n"
	                           "      - {from: 0 % of span, to: 30 % of span, band: 1 % of span}\n";
	fl_stock stock = {0}, got;
	fl_error err = {0};
	if (fl_stock_parse(&stock, text, "own.yaml", &err) < 0) {
		print_error("%s %s\n", err.field, err.message);
		fail();
	}
	fl_shelf *shelf = shelf_begin("renew VT-5", &stock);
	shelf_take(shelf, "A-2");
	shelf_take(shelf, "2026-05-01");
	for (int i = 0; i < 40 && !fl_shelf_finished(shelf); i++) {
		fl_text prompt = {0};
		fl_shelf_prompt(shelf, &prompt);
		shelf_take(shelf, strstr(prompt.data, "yes or no") ? "yes" : "");
		fl_text_free(&prompt);
	}
	read_item(shelf, &got);
	const fl_instrument *item = fl_stock_instrument(&got, "VT-5");
	assert_string_equal(item->serial, "A-2");
	assert_int_equal(item->since, fl_day_from_civil(2026, 5, 1));
	check_near("kinetic coefficient", 1.08, item->capillary.kinetic_coefficient, 1e-15);
	assert_int_equal(item->zone_count, 1);
	fl_stock_free(&got);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

static void back_changes_an_answer(void **state) {
	(void)state;
	fl_stock stock;
	sample_stock(&stock);
	fl_shelf *shelf = shelf_begin("add oil", &stock);
	for (int i = 0; i < 15; i++)
		shelf_take(shelf, oil_lines[i]);
	shelf_take(shelf, "back certificate");
	shelf_take(shelf, "Lanternmoor-2602B-1");
	for (int i = 0; i < 12; i++)
		shelf_take(shelf, ""); /* what was typed is proposed again */
	for (int i = 15; i < COUNT(oil_lines); i++)
		shelf_take(shelf, oil_lines[i]);
	assert_true(fl_shelf_agreed(shelf));
	assert_non_null(strstr(fl_shelf_block(shelf), "certificate: Lanternmoor-2602B-1\n"));
	assert_non_null(strstr(fl_shelf_block(shelf), "{at: 20 °C, nu: 20.71 mm²/s, U: 0.20 %"));
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

static void stop_leaves_without_agreeing(void **state) {
	(void)state;
	fl_stock stock;
	sample_stock(&stock);
	fl_shelf *shelf = talk(&stock, "add oil", oil_lines, COUNT(oil_lines) - 1);
	shelf_take(shelf, "no");
	assert_false(fl_shelf_finished(shelf));
	shelf_take(shelf, "stop");
	assert_true(fl_shelf_finished(shelf));
	assert_false(fl_shelf_agreed(shelf));
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
}

/* Words that YAML would take for something else come back as they were typed. */
static void text_reads_back_as_it_was_typed(void **state) {
	(void)state;
	static const char *const names[] = {"a: b",   "% of it", "x #1", "\"quoted\" \\ text", "- dash", "'tick'", "[list]",
	                                    "{map}",  "yes",     "12",   "2026-01-01",         "*star",  "&and",   "| bar",
	                                    "colon:", "Å °C · …"};
	for (size_t i = 0; i < sizeof names / sizeof *names; i++) {
		fl_stock stock, got;
		sample_stock(&stock);
		fl_shelf *shelf = shelf_begin("add instrument", &stock);
		for (int line = 0; line < COUNT(instrument_lines); line++)
			shelf_take(shelf, line == 4 ? names[i] : instrument_lines[line]);
		read_item(shelf, &got);
		assert_string_equal(fl_stock_instrument(&got, "VT-7")->position, names[i]);
		fl_stock_free(&got);
		fl_shelf_free(shelf);
		fl_stock_free(&stock);
	}
}

/* Lines of any kind in any order: each is taken or refused, and what agrees is an item that the files' reader takes. */
static void nonsense_does_no_harm(void **state) {
	(void)state;
	static const char *const words[] = {
	    "",           "",      "-",     "?",           "back",        "back nu",
	    "back k",     "show",  "yes",   "no",          "12",          "0",
	    "2",          "20 °C", "40",    "1e999",       "nan",         "2026-01-01",
	    "2027-01-01", "LK-1",  "bath",  "thermometer", "0 to 150 °C", "0 to 50 mm²/s",
	    "4-20 mA",    "900",   "0.2 %", "10.5",        "5.1",         "800",
	    "0.4",        "a: b",  "{",     "\"",          "stop it",     "0 to 5 s Saybolt Universal"};
	fl_stock stock;
	sample_stock(&stock);
	uint64_t seed = UINT64_C(0x2545F4914F6CDD1D);
	int agreed = 0;
	for (int run = 0; run < 300; run++) {
		static const char *const whats[] = {"add oil",    "add equipment", "add instrument",
		                                    "renew TH-7", "renew VT-1",    "renew 2511B"};
		fl_shelf *shelf = shelf_begin(whats[run % 6], &stock);
		for (int i = 0; i < 150 && !fl_shelf_finished(shelf); i++) {
			fl_text say = {0}, prompt = {0};
			fl_error err = {0};
			seed ^= seed << 13, seed ^= seed >> 7, seed ^= seed << 17;
			fl_shelf_prompt(shelf, &prompt);
			fl_status status = fl_shelf_line(shelf, words[seed % (sizeof words / sizeof *words)], &say, &err);
			assert_true(status >= 0 || err.message[0]);
			fl_text_free(&say);
			fl_text_free(&prompt);
		}
		if (fl_shelf_agreed(shelf)) {
			fl_stock got;
			read_item(shelf, &got);
			fl_stock_free(&got);
			agreed++;
		}
		fl_shelf_free(shelf);
	}
	print_message("%d of 300 came to an item\n", agreed);
	fl_stock_free(&stock);
}

/* ---- files ------------------------------------------------------------------------------------------------------- */

static char *read_all(const char *path) {
	size_t length;
	char *text = scratch_read(path, &length);
	assert_non_null(text);
	return text;
}

static void a_file_keeps_all_but_the_new_item(void **state) {
	(void)state;
	static const char before[] = "# ours\n"
	                             "oils: # as bought\n"
	                             "- name: LK-10\n"
	                             "  lot: X1 # the first\n"
	                             "\n"
	                             "# about the rest\n"
	                             "equipment: []\n";
	static const char after[] = "# ours\n"
	                            "oils: # as bought\n"
	                            "- name: LK-10\n"
	                            "  lot: X1 # the first\n"
	                            "\n"
	                            "- name: LK-20\n"
	                            "  lot: X2\n"
	                            "\n"
	                            "# about the rest\n"
	                            "equipment: []\n";
	fl_text out = {0};
	fl_error err = {0};
	must(fl_shelf_insert(before, "f.yaml", FL_SHELF_OIL, "name: LK-20\nlot: X2\n", &out, &err));
	assert_string_equal(out.data, after);
	fl_text_free(&out);
}

static void a_list_in_brackets_is_refused(void **state) {
	(void)state;
	fl_text out = {0};
	assert_int_equal(
	    fl_shelf_insert("oils: [{name: a, lot: b}]\n", "f.yaml", FL_SHELF_OIL, "name: c\nlot: d\n", &out, NULL),
	    FL_E_STATE);
	fl_text_free(&out);
}

static void a_text_without_newline_at_its_end_is_taken(void **state) {
	(void)state;
	fl_text out = {0};
	fl_error err = {0};
	must(fl_shelf_insert("oils:\n  - name: a", "f.yaml", FL_SHELF_OIL, "name: c\n", &out, &err));
	assert_string_equal(out.data, "oils:\n  - name: a\n\n  - name: c\n");
	fl_text_clear(&out);
	must(fl_shelf_insert("oils:\n  - name: a", "f.yaml", FL_SHELF_EQUIPMENT, "id: c\n", &out, &err));
	assert_string_equal(out.data, "oils:\n  - name: a\n\nequipment:\n  - id: c\n");
	fl_text_free(&out);
}

static void each_kind_goes_to_its_file(void **state) {
	const char *folder = *state;
	fl_stock none = {0};
	fl_error err = {0};
	char path[512], stock_folder[512], again[512];
	snprintf(stock_folder, sizeof stock_folder, "%s/stock", folder);
	fl_shelf *shelf = talk(&none, "add equipment", thermometer_lines, COUNT(thermometer_lines));
	must(fl_shelf_store(fl_io_system(), stock_folder, NULL, 0, FL_SHELF_EQUIPMENT, fl_shelf_block(shelf), path, &err));
	assert_non_null(strstr(path, "/stock/equipment.yaml"));
	char *paths[] = {path};
	/* the same once more is in stock already, and the file stays */
	char *before = read_all(path);
	assert_int_equal(
	    fl_shelf_store(fl_io_system(), stock_folder, paths, 1, FL_SHELF_EQUIPMENT, fl_shelf_block(shelf), again, NULL),
	    FL_E_EXISTS);
	char *after = read_all(path);
	assert_string_equal(before, after);
	free(before);
	free(after);
	fl_shelf_free(shelf);
	/* its next certificate goes behind it, and each counts on its day */
	fl_stock stock = {0};
	must(fl_stock_load(&stock, fl_io_system(), path, &err));
	static const char *const lines[] = {"TB-8001", "", "2027-02-20", "2028-02-20", "", "", "", "0.02", "2", "", "yes"};
	shelf = talk(&stock, "renew TH-9", lines, COUNT(lines));
	must(
	    fl_shelf_store(fl_io_system(), stock_folder, paths, 1, FL_SHELF_EQUIPMENT, fl_shelf_block(shelf), again, &err));
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
	must(fl_stock_load(&stock, fl_io_system(), path, &err));
	assert_int_equal(stock.equipment_count, 2);
	assert_string_equal(fl_stock_equipment(&stock, "TH-9")->certificate, "TB-8001");
	fl_stock_keep(&stock, fl_day_from_civil(2026, 6, 1));
	assert_int_equal(stock.equipment_count, 1);
	assert_string_equal(fl_stock_equipment(&stock, "TH-9")->certificate, "TB-7001");
	fl_stock_free(&stock);
}

/* What a dead machine left beside a file; the writer names it when there is too much of it. */
static void remove_unfinished(const char *path) {
	char part[600];
	for (int i = 0; i < 10; i++) {
		snprintf(part, sizeof part, "%s.part%d", path, i);
		unlink(part);
	}
}

/* A full disk or a power cut at any call: the file holds all of the old or all of the new, and the next try works. */
static void a_failing_disk_leaves_old_or_new(void **state) {
	const char *folder = *state;
	static const failing_mode modes[] = {FAILING_CLEAN, FAILING_TORN, FAILING_SHORT, FAILING_DEAD};
	fl_stock none = {0};
	fl_error err = {0};
	char path[512], got[512];
	fl_shelf *shelf = talk(&none, "add equipment", thermometer_lines, COUNT(thermometer_lines));
	fl_text first = {0}, second = {0};
	must(fl_shelf_insert("", "f.yaml", FL_SHELF_EQUIPMENT,
	                     "id: A-1\nrole: timer\ncertificate: a\nissuer: b\n"
	                     "calibrated on: 2026-01-01\ndue on: 2027-01-01\nrange: 0 to 100 s\nresolution: 0.01 s\n"
	                     "drift per year: 0 s\nU: 0.1 s\nk: 2\n",
	                     &first, &err));
	must(fl_shelf_insert(first.data, "f.yaml", FL_SHELF_EQUIPMENT, fl_shelf_block(shelf), &second, &err));
	snprintf(path, sizeof path, "%s/equipment.yaml", folder);
	char *paths[] = {path};
	for (size_t mode = 0; mode < 4; mode++)
		for (long n = 1;; n++) {
			failing_io disk;
			must(fl_file_write(fl_io_system(), path, first.data, first.length, true, &err));
			failing_io_start(&disk, n, ENOSPC, modes[mode]);
			fl_status status =
			    fl_shelf_store(&disk.io, folder, paths, 1, FL_SHELF_EQUIPMENT, fl_shelf_block(shelf), got, NULL);
			char *holds = read_all(path);
			bool is_old = strcmp(holds, first.data) == 0, is_new = strcmp(holds, second.data) == 0;
			if (!is_old && !is_new)
				print_error("mode %zu, call %ld (%s):\n%s\n", mode, n, disk.what, holds);
			assert_true(is_old || is_new);
			assert_true(status < 0 || is_new);
			free(holds);
			remove_unfinished(path);
			if (!disk.failed)
				break;
			if (is_old)
				must(fl_shelf_store(fl_io_system(), folder, paths, 1, FL_SHELF_EQUIPMENT, fl_shelf_block(shelf), got,
				                    &err));
		}
	fl_text_free(&first);
	fl_text_free(&second);
	fl_shelf_free(shelf);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(an_oil_is_asked_for_and_reads_back),
	    cmocka_unit_test(an_equipment_with_corrections_reads_back),
	    cmocka_unit_test(an_instrument_reads_back),
	    cmocka_unit_test(a_bath_is_asked_for_its_uniformity_only),
	    cmocka_unit_test(renewing_keeps_what_is_the_same),
	    cmocka_unit_test(renewing_keeps_what_is_not_asked),
	    cmocka_unit_test(back_changes_an_answer),
	    cmocka_unit_test(stop_leaves_without_agreeing),
	    cmocka_unit_test(text_reads_back_as_it_was_typed),
	    cmocka_unit_test(nonsense_does_no_harm),
	    cmocka_unit_test(a_file_keeps_all_but_the_new_item),
	    cmocka_unit_test(a_list_in_brackets_is_refused),
	    cmocka_unit_test(a_text_without_newline_at_its_end_is_taken),
	    IN_SCRATCH(each_kind_goes_to_its_file),
	    IN_SCRATCH(a_failing_disk_leaves_old_or_new),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
