/* tests/analysis/demo.h - the invented scenario's readings, from their CSV into the bench of bench.h.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Invented data, comparison only (data/README.md).
 */
#ifndef FOUNDLEFT_TEST_DEMO_H
#define FOUNDLEFT_TEST_DEMO_H

#include "bench.h"

#include <stdlib.h>

enum { COLUMNS = 16, LINE = 512 };

typedef struct row {
	char text[LINE];
	const char *cell[COLUMNS];
	int count;
} row;

/* Splits at commas, not within double quotes, which are dropped. */
static inline void split(row *r) {
	char *to = r->text;
	bool quoted = false;
	r->count = 1;
	r->cell[0] = to;
	for (const char *from = r->text; *from && *from != '\n' && *from != '\r'; from++) {
		if (*from == '"') {
			quoted = !quoted;
		} else if (*from == ',' && !quoted) {
			*to++ = '\0';
			assert_true(r->count < COLUMNS);
			r->cell[r->count++] = to;
		} else {
			*to++ = *from;
		}
	}
	*to = '\0';
}

static inline FILE *open_data(const char *name) {
	char path[512];
	snprintf(path, sizeof path, "%s/tests/analysis/data/%s", SOURCE_DIR, name);
	FILE *file = fopen(path, "r");
	if (!file)
		print_error("%s cannot be read\n", path);
	assert_non_null(file);
	row heading;
	assert_non_null(fgets(heading.text, LINE, file));
	return file;
}

static inline bool next_row(FILE *file, row *r) {
	if (!fgets(r->text, LINE, file))
		return false;
	split(r);
	return true;
}

static inline int point_of(const char *oil) {
	for (int i = 0; i < BENCH_OILS; i++)
		if (strcmp(bench_names[i], oil) == 0)
			return i;
	assert_string_equal(oil, "ZERO");
	return FL_POINT_ZERO;
}

/* session,date,kind,cycle,direction,reading,oil,lot,bath_C,line_bar_g,output_mA,... as an as-found run */
static inline void load(bench *b, const char *name, const char *session) {
	FILE *file = open_data(name);
	row r;
	bench_begin(b);
	while (next_row(file, &r)) {
		if (strcmp(r.cell[0], session) != 0)
			continue;
		assert_true(fl_day_parse(r.cell[1], &b->session.day, &b->err) >= 0);
		fl_pass pass = strcmp(r.cell[4], "up") == 0 ? FL_PASS_RISING : FL_PASS_FALLING;
		bench_oil(b, atoi(r.cell[3]), pass, point_of(r.cell[6]), atof(r.cell[10]), atof(r.cell[8]));
	}
	fclose(file);
	assert_true(b->session.reading_count > 0);
}

static inline const char *file_of(const char *session) {
	if (strcmp(session, "S26F") == 0)
		return "asfound_2026.csv";
	return strcmp(session, "S26L") == 0 ? "asleft_2026.csv" : "history.csv";
}

#endif
