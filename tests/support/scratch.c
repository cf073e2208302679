/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "scratch.h"

#include <dirent.h>
#include <ftw.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

int scratch_make(void **state) {
	const char *above = getenv("TMPDIR");
	char *folder = NULL;
	if (asprintf(&folder, "%s/foundleft-XXXXXX", above ? above : P_tmpdir) < 0)
		return -1;
	*state = mkdtemp(folder);
	return *state ? 0 : -1;
}

static int remove_one(const char *path, const struct stat *info, int kind, struct FTW *walk) {
	(void)info;
	(void)kind;
	(void)walk;
	return remove(path);
}

int scratch_remove(void **state) {
	char *folder = *state;
	chmod(folder, 0700);
	int removed = nftw(folder, remove_one, 16, FTW_DEPTH | FTW_PHYS);
	free(folder);
	return removed;
}

char *scratch_path(const char *folder, const char *name, char out[SCRATCH_SIZE]) {
	int length = snprintf(out, SCRATCH_SIZE, "%s/%s", folder, name);
	if (length < 0 || length >= SCRATCH_SIZE)
		abort();
	return out;
}

int scratch_entries(const char *folder) {
	DIR *open = opendir(folder);
	int count = 0;
	struct dirent *entry;
	while (open && (entry = readdir(open)))
		count += strcmp(entry->d_name, ".") != 0 && strcmp(entry->d_name, "..") != 0;
	if (open)
		closedir(open);
	return open ? count : -1;
}

char *scratch_read(const char *path, size_t *length) {
	FILE *file = fopen(path, "rb");
	if (!file)
		return NULL;
	size_t room = (size_t)1 << 20;
	char *bytes = malloc(room + 1);
	*length = bytes ? fread(bytes, 1, room, file) : 0;
	if (bytes)
		bytes[*length] = '\0';
	fclose(file);
	return bytes;
}
