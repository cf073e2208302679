/* corpus.h - runs a folder of inputs that have to be refused: <folder>/<what-is-wrong>/{input.yaml,error}, where
 * `error` holds the whole line. A new case needs no code.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_CORPUS_H
#define FOUNDLEFT_TEST_CORPUS_H

#include "check.h"
#include "foundleft/base.h"

#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* Reads `text` as the stage does; the file is called input.yaml in its errors. */
typedef fl_status corpus_read(const char *text, fl_error *err);

static bool corpus_file(fl_arena *arena, const char *folder, const char *name, const char *file, char **text) {
	char path[1024];
	size_t length;
	snprintf(path, sizeof path, "%s/%s/%s", folder, name, file);
	return fl_file_read(fl_io_system(), path, 8u << 20, arena, text, &length, NULL) == FL_OK;
}

/* True if the case is refused with exactly its line; else says what came instead. */
static bool corpus_case(const char *folder, const char *name, corpus_read *read) {
	fl_arena arena = {0};
	fl_error err = {0};
	char *input, *want, got[1200] = "";
	bool fine =
	    corpus_file(&arena, folder, name, "input.yaml", &input) && corpus_file(&arena, folder, name, "error", &want);
	if (!fine) {
		fprintf(stderr, "%s: input.yaml or error cannot be read\n", name);
	} else {
		want[strcspn(want, "\n")] = '\0';
		fl_status status = read(input, &err);
		fl_error_line(&err, got, sizeof got);
		fine = status < 0 && status == err.status && strcmp(got, want) == 0;
		if (!fine)
			fprintf(stderr, "%s:\n  want %s\n  got  %s (status %d)\n", name, want, got, (int)status);
	}
	fl_arena_free(&arena);
	return fine;
}

/* Runs all cases of the folder and fails at the end if one failed or fewer than `at_least` were found. */
static void corpus_run(const char *folder, int at_least, corpus_read *read) {
	struct dirent **entries;
	int found = scandir(folder, &entries, NULL, alphasort), cases = 0, failed = 0;
	assert_true(found >= 0);
	for (int i = 0; i < found; i++) {
		if (entries[i]->d_name[0] != '.') {
			cases++;
			failed += !corpus_case(folder, entries[i]->d_name, read);
		}
		free(entries[i]);
	}
	free(entries);
	print_message("%d cases in %s\n", cases, folder);
	assert_true(cases >= at_least);
	assert_int_equal(0, failed);
}

#endif
