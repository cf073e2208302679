/* failing_memory.h - memory of which the n-th request is refused. A program that uses it is linked with
 * -Wl,--wrap=malloc,--wrap=calloc,--wrap=realloc (CMake: failing_memory(<test program>)).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_FAILING_MEMORY_H
#define FOUNDLEFT_TEST_FAILING_MEMORY_H

#include <stdbool.h>

/* The n-th request from now on is refused, once; 0 refuses none. */
void failing_memory_start(long n);
/* Back to normal; true if a request was refused since the start. */
bool failing_memory_stop(void);

#endif
