/* tests/published/test_published.c - runs the published checks: one text file a source document.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The format of tests/published/NAME.txt. An empty line or one that begins with # is for people. A line
 *
 *     source: TITLE, EDITION, HOW IT WAS HAD
 *
 * names the document, once. Every other line is one case of eight fields between bars:
 *
 *     name | function | given | expect | tolerance | unit | certainty | place
 *
 *   function   one of functions.c
 *   given      numbers, or a data file beside this one (NAME.csv, first line the column names) followed by the names
 *              of the columns to take, then numbers; an empty cell is "not measured"
 *   expect     a number, or "refused": the function must say no
 *   tolerance  absolute, in the unit; or with " rel" behind it a fraction of the expected value
 *   unit       of expect and tolerance, "1" for a pure number
 *   certainty  read        the printed value was read
 *              recomputed  the printed value is remembered, or there is none, and an independent computation from the
 *                          inputs gives this one
 *              memory      remembered only: a difference is shown, but is never the reason to fail
 *   place      table, clause or page in the source
 *
 * A failure prints what was wanted, what came and the tolerance, and the run goes on. The run fails if any case fails,
 * a line can't be read, a function is unknown, or a file has no source or no case that can fail.
 */
#include "functions.h"

#include <dirent.h>
#include <errno.h>
#include <math.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { FIELDS = 8, LINE_SIZE = 1024, PATH_SIZE = 512 };
static const char folder[] = SOURCE_DIR "/tests/published";

typedef struct tally {
	const char *file;
	int line, cases, failures, memory_cases, memory_differences;
	bool has_source;
} tally;

__attribute__((format(printf, 2, 3))) static void complain(tally *t, const char *format, ...) {
	va_list args;
	va_start(args, format);
	fprintf(stderr, "%s:%d: ", t->file, t->line);
	vfprintf(stderr, format, args);
	fputc('\n', stderr);
	va_end(args);
	t->failures++;
}

static char *trim(char *text) {
	text += strspn(text, " \t\r\n");
	size_t length = strlen(text);
	while (length > 0 && strchr(" \t\r\n", text[length - 1]))
		text[--length] = '\0';
	return text;
}

static bool read_number(const char *text, double *value) {
	char *end;
	*value = strtod(text, &end);
	return end != text && *end == '\0' && !isnan(*value);
}

/* The next field of `*rest` up to `mark`, trimmed; empty fields count. NULL at the end. */
static char *next_field(char **rest, char mark) {
	if (!*rest)
		return NULL;
	char *field = *rest, *end = strchr(field, mark);
	if (end)
		*end = '\0';
	*rest = end ? end + 1 : NULL;
	return trim(field);
}

/* ---- data files ---- */

/* Index of the field of a header line that is called `name`; -1 if none. */
static int column_index(const char *header, const char *name) {
	char copy[LINE_SIZE], *rest = copy, *field;
	snprintf(copy, sizeof copy, "%s", header);
	for (int i = 0; (field = next_field(&rest, ',')); i++)
		if (strcmp(field, name) == 0)
			return i;
	return -1;
}

static bool take_row(tally *t, char *line, const int *wanted, given *g) {
	if (g->rows == MAX_ROWS)
		return complain(t, "the data file has more than %d rows", MAX_ROWS), false;
	for (size_t c = 0; c < g->column_count; c++)
		g->columns[c][g->rows] = NAN;
	char *rest = line, *field;
	for (int i = 0; (field = next_field(&rest, ',')); i++)
		for (size_t c = 0; c < g->column_count; c++)
			if (wanted[c] == i && *field && !read_number(field, &g->columns[c][g->rows]))
				return complain(t, "data row %zu: \"%s\" is no number", g->rows + 1, field), false;
	g->rows++;
	return true;
}

static bool load_columns(tally *t, const char *file, char names[][64], given *g) {
	char path[PATH_SIZE], line[LINE_SIZE];
	int wanted[MAX_COLUMNS];
	snprintf(path, sizeof path, "%s/%s", folder, file);
	FILE *in = fopen(path, "r");
	if (!in || !fgets(line, sizeof line, in)) {
		complain(t, "%s: %s", path, strerror(errno));
		if (in)
			fclose(in);
		return false;
	}
	bool fine = true;
	for (size_t c = 0; c < g->column_count; c++)
		if ((wanted[c] = column_index(line, names[c])) < 0) {
			complain(t, "%s has no column \"%s\"", file, names[c]);
			fine = false;
		}
	while (fine && fgets(line, sizeof line, in))
		if (*trim(line))
			fine = take_row(t, line, wanted, g);
	fclose(in);
	return fine;
}

/* ---- one case ---- */

static bool read_given(tally *t, char *text, given *g) {
	char names[MAX_COLUMNS][64], *file = NULL;
	g->number_count = g->column_count = g->rows = 0;
	for (char *token = strtok(text, " \t"); token; token = strtok(NULL, " \t")) {
		double value;
		if (strstr(token, ".csv"))
			file = token;
		else if (read_number(token, &value) && g->number_count < MAX_NUMBERS)
			g->numbers[g->number_count++] = value;
		else if (file && g->column_count < MAX_COLUMNS)
			snprintf(names[g->column_count++], sizeof *names, "%s", token);
		else
			return complain(t, "given: \"%s\" is neither a number nor a column of a data file", token), false;
	}
	return !file || load_columns(t, file, names, g);
}

static bool fits(const published_function *f, const given *g) {
	return g->number_count >= f->numbers_min && g->number_count <= f->numbers_max &&
	       g->column_count >= f->columns_min && g->column_count <= f->columns_max &&
	       (g->column_count == 0 || g->rows > 0);
}

/* "0.005" or "1e-9 rel". */
static bool read_tolerance(char *text, double expect, double *tolerance) {
	char *relative = strstr(text, " rel");
	if (relative)
		*relative = '\0';
	if (!read_number(trim(text), tolerance) || *tolerance < 0.0 || isinf(*tolerance))
		return false;
	if (relative)
		*tolerance *= fabs(expect);
	return true;
}

static void judge(tally *t, const char *name, const char *unit, bool from_memory, double want, double got,
                  double tolerance) {
	if (fabs(got - want) <= tolerance || got == want)
		return;
	fprintf(stderr, "%s:%d: %s: want %.15g %s, got %.15g, difference %.3g, tolerance %.3g%s\n", t->file, t->line, name,
	        want, unit, got, got - want, tolerance, from_memory ? " (from memory: no failure)" : "");
	if (from_memory)
		t->memory_differences++;
	else
		t->failures++;
}

static void judge_refusal(tally *t, const char *name, double got) {
	if (!isnan(got))
		complain(t, "%s: want a refusal, got %.15g", name, got);
}

static bool is_certainty(const char *word) {
	return strcmp(word, "read") == 0 || strcmp(word, "recomputed") == 0 || strcmp(word, "memory") == 0;
}

static void run_case(tally *t, char *fields[FIELDS]) {
	static given g;
	double expect = 0.0, tolerance = 0.0;
	const published_function *function = find_function(fields[1]);
	bool refusal = strcmp(fields[3], "refused") == 0;
	bool from_memory = strcmp(fields[6], "memory") == 0;
	t->cases++;
	t->memory_cases += from_memory;
	if (!function) {
		complain(t, "%s: no function \"%s\"", fields[0], fields[1]);
		return;
	}
	if (!read_given(t, fields[2], &g))
		return;
	if (!fits(function, &g))
		complain(t, "%s: %s cannot take %zu numbers and %zu columns", fields[0], fields[1], g.number_count,
		         g.column_count);
	else if (!is_certainty(fields[6]) || !*fields[5] || !*fields[7])
		complain(t, "%s: unit, certainty (read, recomputed, memory) and place must be given", fields[0]);
	else if (refusal)
		judge_refusal(t, fields[0], function->call(&g));
	else if (!read_number(fields[3], &expect) || !read_tolerance(fields[4], expect, &tolerance))
		complain(t, "%s: \"%s\" within \"%s\" cannot be read", fields[0], fields[3], fields[4]);
	else
		judge(t, fields[0], fields[5], from_memory, expect, function->call(&g), tolerance);
}

/* ---- files ---- */

static void run_line(tally *t, char *line) {
	char *fields[FIELDS], *rest = line;
	if (strncmp(line, "source:", 7) == 0) {
		t->has_source = *trim(line + 7) != '\0';
		return;
	}
	int count = 0;
	for (char *field; (field = next_field(&rest, '|')); count++)
		if (count < FIELDS)
			fields[count] = field;
	if (count != FIELDS)
		complain(t, "a case has %d fields between bars, this line has %d", FIELDS, count);
	else
		run_case(t, fields);
}

static bool run_file(const char *file) {
	char path[PATH_SIZE], line[LINE_SIZE];
	tally t = {.file = file};
	snprintf(path, sizeof path, "%s/%s", folder, file);
	FILE *in = fopen(path, "r");
	if (!in) {
		fprintf(stderr, "%s: %s\n", path, strerror(errno));
		return false;
	}
	while (fgets(line, sizeof line, in)) {
		t.line++;
		char *text = trim(line);
		if (*text && *text != '#')
			run_line(&t, text);
	}
	fclose(in);
	if (!t.has_source)
		complain(&t, "no line \"source: ...\"");
	if (t.cases == t.memory_cases)
		complain(&t, "no case that can fail");
	printf("%-36s %4d cases, %d failed; %d from memory, %d of them differ\n", file, t.cases, t.failures, t.memory_cases,
	       t.memory_differences);
	return t.failures == 0;
}

static int is_text_file(const struct dirent *entry) {
	const char *dot = strrchr(entry->d_name, '.');
	return dot && strcmp(dot, ".txt") == 0;
}

int main(void) {
	struct dirent **entries;
	int count = scandir(folder, &entries, is_text_file, alphasort), failed = count <= 0;
	if (count <= 0)
		fprintf(stderr, "no published checks in %s\n", folder);
	for (int i = 0; i < count; i++) {
		failed += !run_file(entries[i]->d_name);
		free(entries[i]);
	}
	if (count >= 0)
		free(entries);
	printf("%d files, %d with failures\n", count < 0 ? 0 : count, failed);
	return failed > 0;
}
