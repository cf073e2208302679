/* scratch.h - a folder of its own for each test that writes files.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_SCRATCH_H
#define FOUNDLEFT_TEST_SCRATCH_H

#include <stddef.h>

#define SCRATCH_SIZE 256

/* cmocka set-up and tear-down: *state becomes the path of a new empty folder; it is removed with all in it. */
int scratch_make(void **state);
int scratch_remove(void **state);
/* "folder/name" into out[SCRATCH_SIZE]; returns out. */
char *scratch_path(const char *folder, const char *name, char out[SCRATCH_SIZE]);
/* Number of entries of the folder. */
int scratch_entries(const char *folder);
/* Content of a file, ended with a zero byte, in memory to be freed; NULL if there is no such file. */
char *scratch_read(const char *path, size_t *length);

#endif
