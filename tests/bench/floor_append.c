/* floor_append.c - the floor of `foundleft replay`: only appends and syncs the lines of a journal.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *	floor_append JOURNAL OUT
 *
 * Reads the lines that a replay wrote, then does with each what any program must that promises that a committed entry
 * outlives a power cut: one write, one fdatasync. The new file's folder is synced once, as for any new file. No answer
 * is read, checked or answered, no digest computed.
 */
#include <fcntl.h>
#include <libgen.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

static void stop(const char *what) {
	perror(what);
	exit(1);
}

static char *read_whole(const char *path, size_t *length) {
	int fd = open(path, O_RDONLY);
	struct stat info;
	if (fd < 0 || fstat(fd, &info) != 0)
		stop(path);
	char *bytes = malloc((size_t)info.st_size + 1);
	if (!bytes || read(fd, bytes, (size_t)info.st_size) != info.st_size)
		stop(path);
	close(fd);
	*length = (size_t)info.st_size;
	return bytes;
}

static void sync_folder(char *path) {
	int fd = open(dirname(path), O_RDONLY | O_DIRECTORY);
	if (fd < 0 || fsync(fd) != 0)
		stop(path);
	close(fd);
}

int main(int argc, char **argv) {
	if (argc != 3)
		return 2;
	size_t length;
	char *bytes = read_whole(argv[1], &length);
	int fd = open(argv[2], O_WRONLY | O_CREAT | O_EXCL | O_APPEND, 0644);
	if (fd < 0)
		stop(argv[2]);
	sync_folder(argv[2]);
	for (char *at = bytes, *end = bytes + length; at < end;) {
		char *newline = memchr(at, '\n', (size_t)(end - at));
		size_t line = newline ? (size_t)(newline + 1 - at) : (size_t)(end - at);
		if (write(fd, at, line) != (ssize_t)line || fdatasync(fd) != 0)
			stop("write");
		at += line;
	}
	free(bytes);
	return close(fd) == 0 ? 0 : 1;
}
