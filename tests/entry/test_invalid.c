/* test_invalid.c - tests/invalid/entry/<what>/{input,error}: a new case needs no code.
 *
 * The first line of `input` is "at STATE", a word of the table below: the small session of talk.h is brought there.
 * Then its lines are fed. All but the last have to be taken; the last has to be refused with the line in `error`, and
 * must leave the journal as it was.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "talk.h"

#include <dirent.h>

/* How many lines of the script stand before the state. */
static const struct {
	const char *word;
	int lines;
} states[] = {{"place", 0},         {"customer", 1},
              {"received", 2},      {"condition", 3},
              {"performer", 5},     {"others", 6},
              {"thermometer", 7},   {"bath", 8},
              {"meter", 9},         {"tachometer", 10},
              {"oil-1", 11},        {"oil-2", 12},
              {"permit", 13},       {"isolated", 14},
              {"fuel-cooled", 15},  {"frequency", 16},
              {"motor-speed", 17},  {"as-found", 18},
              {"zero", 19},         {"thin-oil", 21},
              {"thick-oil", 23},    {"close-run", 32},
              {"decision", 33},     {"adjustment", 35},
              {"value-before", 36}, {"second-adjustment", 38},
              {"as-left", 39},      {"restore", 52},
              {"remark", 54},       {"end", 56}};

static const char *script(int i) {
	static const struct {
		const char *const *lines;
		int count;
	} parts[] = {{lines_before, COUNT(lines_before)},
	             {lines_as_found, COUNT(lines_as_found)},
	             {lines_after, COUNT(lines_after)},
	             {lines_as_left, COUNT(lines_as_left)},
	             {lines_end, COUNT(lines_end)}};
	for (int p = 0; p < COUNT(parts); p++) {
		if (i < parts[p].count)
			return parts[p].lines[i];
		i -= parts[p].count;
	}
	fail_msg("the script has no line %d", i);
	return "";
}

static void bring_to(talk *t, const char *state) {
	for (int i = 0; i < COUNT(states); i++)
		if (strcmp(states[i].word, state) == 0) {
			for (int line = 0; line < states[i].lines; line++)
				talk_take(t, script(line));
			return;
		}
	fail_msg("unknown state \"%s\"", state);
}

static char *slurp(const char *what, const char *name) {
	char path[600];
	size_t length;
	snprintf(path, sizeof path, "%s/tests/invalid/entry/%s/%s", SOURCE_DIR, what, name);
	char *text = scratch_read(path, &length);
	if (!text)
		print_error("%s is missing\n", path);
	assert_non_null(text);
	return text;
}

/* Feeds the case; true if its last line is refused in the words of `error`. */
static bool run_case(const char *folder, const char *what) {
	char *input = slurp(what, "input"), *error = slurp(what, "error"), *rest = NULL, got[1400];
	error[strcspn(error, "\n")] = '\0';
	talk t;
	talk_begin(&t, folder, SMALL_PROCEDURE);
	char *state = strtok_r(input, "\n", &rest);
	assert_int_equal(strncmp(state, "at ", 3), 0);
	bring_to(&t, state + 3);
	char *line = strsep(&rest, "\n");
	for (char *next; rest && (next = strsep(&rest, "\n")) && (rest || *next); line = next)
		talk_take(&t, line);
	int before = t.journal.session.last_sequence;
	fl_status status = talk_line(&t, line);
	fl_error_line(&t.err, got, sizeof got);
	bool good = status < 0 && strcmp(got, error) == 0 && t.journal.session.last_sequence == before;
	if (!good)
		print_error("%s:\n  want %s\n  got  %s\n  said %s\n", what, error, got, talk_said(&t));
	talk_end(&t);
	free(input);
	free(error);
	return good;
}

static void each_invalid_line_is_refused_in_its_words(void **state) {
	DIR *cases = opendir(SOURCE_DIR "/tests/invalid/entry");
	assert_non_null(cases);
	int count = 0, wrong = 0;
	for (struct dirent *one; (one = readdir(cases)) != NULL;) {
		if (one->d_name[0] == '.')
			continue;
		wrong += !run_case(*state, one->d_name);
		count++;
	}
	closedir(cases);
	assert_true(count >= 30);
	assert_int_equal(wrong, 0);
}

int main(void) {
	const struct CMUnitTest tests[] = {IN_SCRATCH(each_invalid_line_is_refused_in_its_words)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
