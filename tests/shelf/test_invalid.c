/* test_invalid.c - tests/invalid/stock-entry/<what>/{input,error}: a new case needs no code.
 *
 * The first line of `input` is "add KIND from N" or "renew NAME from N": the lines of answers.h for that kind (none for
 * renewing) are taken up to the N-th. Then the lines of `input` are fed; all but the last have to be taken, the last
 * has to be refused with the line in `error`, and the item stays as it was.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "answers.h"

#include <dirent.h>

static char *slurp(const char *what, const char *name) {
	char path[600];
	size_t length;
	snprintf(path, sizeof path, "%s/tests/invalid/stock-entry/%s/%s", SOURCE_DIR, what, name);
	char *text = scratch_read(path, &length);
	if (!text)
		print_error("%s is missing\n", path);
	assert_non_null(text);
	return text;
}

static void bring_to(fl_shelf *shelf, bool adding, int count) {
	static const struct {
		const char *const *lines;
		int count;
	} scripts[FL_SHELF_KINDS] = {{oil_lines, COUNT(oil_lines)},
	                             {thermometer_lines, COUNT(thermometer_lines)},
	                             {instrument_lines, COUNT(instrument_lines)}};
	for (int i = 0; adding && i < count && i < scripts[fl_shelf_kind_of(shelf)].count; i++)
		shelf_take(shelf, scripts[fl_shelf_kind_of(shelf)].lines[i]);
}

static bool is_refused(fl_shelf *shelf, const char *what, const char *line, const char *error) {
	fl_text say = {0};
	fl_error err = {0};
	char got[1400];
	fl_status status = fl_shelf_line(shelf, line, &say, &err);
	fl_error_line(&err, got, sizeof got);
	bool good = status < 0 && strcmp(got, error) == 0 && !fl_shelf_finished(shelf);
	if (!good)
		print_error("%s:\n  want %s\n  got  %s\n", what, error, got);
	fl_text_free(&say);
	return good;
}

static bool run_case(const char *what) {
	char *input = slurp(what, "input"), *error = slurp(what, "error"), *rest = NULL;
	error[strcspn(error, "\n")] = '\0';
	char *first = strtok_r(input, "\n", &rest), *from = strstr(first, " from ");
	assert_non_null(from);
	*from = '\0';
	fl_stock stock;
	sample_stock(&stock);
	fl_shelf *shelf = shelf_begin(first, &stock);
	bring_to(shelf, strncmp(first, "add ", 4) == 0, atoi(from + 6));
	char *line = strsep(&rest, "\n");
	for (char *next; rest && (next = strsep(&rest, "\n")) && (rest || *next); line = next)
		shelf_take(shelf, line);
	bool good = is_refused(shelf, what, line, error);
	fl_shelf_free(shelf);
	fl_stock_free(&stock);
	free(input);
	free(error);
	return good;
}

static void each_invalid_answer_is_refused_in_its_words(void **state) {
	(void)state;
	DIR *cases = opendir(SOURCE_DIR "/tests/invalid/stock-entry");
	assert_non_null(cases);
	int count = 0, wrong = 0;
	for (struct dirent *one; (one = readdir(cases)) != NULL;) {
		if (one->d_name[0] == '.')
			continue;
		wrong += !run_case(one->d_name);
		count++;
	}
	closedir(cases);
	assert_true(count >= 20);
	assert_int_equal(wrong, 0);
}

int main(void) {
	const struct CMUnitTest tests[] = {cmocka_unit_test(each_invalid_answer_is_refused_in_its_words)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
