/* io.c - the system's calls behind fl_io, and a failed call as a sentence.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include "foundleft/base.h"

static int system_open(void *self, const char *path, int flags, unsigned mode) {
	(void)self;
	return open(path, flags, (mode_t)mode);
}

static long system_read(void *self, int fd, void *bytes, size_t size) {
	(void)self;
	return read(fd, bytes, size);
}

static long system_write(void *self, int fd, const void *bytes, size_t size) {
	(void)self;
	return write(fd, bytes, size);
}

/* Data and length are enough for a file; a folder's entries need the full call. */
static int system_sync(void *self, int fd) {
	(void)self;
	struct stat info;
	if (fstat(fd, &info) != 0)
		return -1;
	return S_ISDIR(info.st_mode) ? fsync(fd) : fdatasync(fd);
}

static int system_close(void *self, int fd) {
	(void)self;
	return close(fd);
}

static int system_truncate(void *self, int fd, int64_t length) {
	(void)self;
	return ftruncate(fd, (off_t)length);
}

static int system_rename(void *self, const char *from, const char *to) {
	(void)self;
	return rename(from, to);
}

static int system_rename_new(void *self, const char *from, const char *to) {
	(void)self;
	if (renameat2(AT_FDCWD, from, AT_FDCWD, to, RENAME_NOREPLACE) == 0)
		return 0;
	if (errno != EINVAL && errno != ENOSYS)
		return -1;
	/* A file system without that flag: a second name never replaces one either. */
	return link(from, to) == 0 ? unlink(from) : -1;
}

static int system_unlink(void *self, const char *path) {
	(void)self;
	return unlink(path);
}

static int system_make_folder(void *self, const char *path, unsigned mode) {
	(void)self;
	return mkdir(path, (mode_t)mode);
}

static int system_lock(void *self, int fd) {
	(void)self;
	return flock(fd, LOCK_EX | LOCK_NB);
}

static int64_t system_size(void *self, int fd) {
	(void)self;
	struct stat info;
	return fstat(fd, &info) == 0 ? (int64_t)info.st_size : -1;
}

const fl_io *fl_io_system(void) {
	static const fl_io calls = {
	    .open = system_open,
	    .read = system_read,
	    .write = system_write,
	    .sync = system_sync,
	    .close = system_close,
	    .truncate = system_truncate,
	    .rename = system_rename,
	    .rename_new = system_rename_new,
	    .unlink = system_unlink,
	    .make_folder = system_make_folder,
	    .lock = system_lock,
	    .size = system_size,
	    .self = NULL,
	};
	return &calls;
}

/* What the numbers of the system mean for the person at the bench. */
static const struct {
	int number;
	fl_status status;
	const char *sentence;
} reasons[] = {
    {ENOSPC, FL_E_DISK_FULL, "the disk is full; free some space and try again"},
    {EDQUOT, FL_E_DISK_FULL, "your share of the disk is used up; free some space and try again"},
    {EROFS, FL_E_READ_ONLY, "the place is read-only; choose another folder"},
    {EACCES, FL_E_READ_ONLY, "not permitted; check the rights of the file and its folder"},
    {EPERM, FL_E_READ_ONLY, "not permitted; check the rights of the file and its folder"},
    {ENOENT, FL_E_NOT_FOUND, "there is no such file or folder; check the name"},
    {ENOTDIR, FL_E_NOT_FOUND, "a part of the path is a file, not a folder; check the name"},
    {EEXIST, FL_E_EXISTS, "it exists already and is not overwritten; choose another name"},
    {EISDIR, FL_E_IO, "it is a folder, not a file; check the name"},
    {EWOULDBLOCK, FL_E_STATE, "another program has it open; close it there first"},
    {ENAMETOOLONG, FL_E_IO, "the name is too long for this disk; choose a shorter one"},
    {ENOMEM, FL_E_MEMORY, "out of memory"},
    {EFBIG, FL_E_IO, "it has become too large for this disk"},
    {EIO, FL_E_IO, "the disk reports an error; check it before you go on"},
};

fl_status fl_io_fail(fl_error *err, const char *doing, const char *path, int error_number) {
	for (size_t i = 0; i < sizeof reasons / sizeof reasons[0]; i++)
		if (reasons[i].number == error_number)
			return fl_fail(err, reasons[i].status, "cannot %s %s: %s", doing, path, reasons[i].sentence);
	const char *description = strerrordesc_np(error_number); /* not translated, unlike strerror */
	return fl_fail(err, FL_E_IO, "cannot %s %s: %s (error %d)", doing, path,
	               description ? description : "the system gives no reason", error_number);
}
