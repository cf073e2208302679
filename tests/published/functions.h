/* tests/published/functions.h - what a published case may call: production functions under short names.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_PUBLISHED_FUNCTIONS_H
#define FOUNDLEFT_TEST_PUBLISHED_FUNCTIONS_H

#include <stddef.h>

enum { MAX_NUMBERS = 32, MAX_COLUMNS = 8, MAX_ROWS = 256 };

/* What a case gives: numbers, and columns of a data file (an empty cell is NAN). */
typedef struct given {
	double numbers[MAX_NUMBERS];
	size_t number_count;
	double columns[MAX_COLUMNS][MAX_ROWS];
	size_t column_count, rows;
} given;

typedef struct published_function {
	const char *name;
	double (*call)(const given *g); /* NAN where the production function refuses */
	size_t numbers_min, numbers_max, columns_min, columns_max;
} published_function;

/* NULL if there is none of that name. */
const published_function *find_function(const char *name);
/* Those of functions_uncertainty.c. */
const published_function *find_uncertainty_function(const char *name);

#endif
