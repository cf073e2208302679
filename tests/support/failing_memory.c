/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "failing_memory.h"

#include <stddef.h>

/* Names that the linker gives to the wrapped calls. */
void *__real_malloc(size_t size);
void *__real_calloc(size_t count, size_t size);
void *__real_realloc(void *old, size_t size);
void *__wrap_malloc(size_t size);
void *__wrap_calloc(size_t count, size_t size);
void *__wrap_realloc(void *old, size_t size);

static long left;    /* requests until the one that is refused; 0 while none is to be */
static bool refused; /* since the last start */

void failing_memory_start(long n) {
	left = n;
	refused = false;
}

bool failing_memory_stop(void) {
	left = 0;
	return refused;
}

static bool refuse(void) {
	if (left == 0 || --left > 0)
		return false;
	refused = true;
	return true;
}

void *__wrap_malloc(size_t size) {
	return refuse() ? NULL : __real_malloc(size);
}

void *__wrap_calloc(size_t count, size_t size) {
	return refuse() ? NULL : __real_calloc(count, size);
}

void *__wrap_realloc(void *old, size_t size) {
	return refuse() ? NULL : __real_realloc(old, size);
}
