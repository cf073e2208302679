/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "failing_io.h"

#include <errno.h>

/* Counts a call; true if it has to fail, errno is then set. */
static bool fails(failing_io *disk, const char *what) {
	disk->calls++;
	if (disk->calls == disk->fail_at) {
		disk->failed = true;
		disk->what = what;
		errno = disk->error_number;
		return true;
	}
	errno = disk->error_number;
	return disk->failed && disk->mode == FAILING_DEAD;
}

/* True if this very call is the n-th. */
static bool is_now(const failing_io *disk) {
	return disk->calls == disk->fail_at;
}

static int failing_open(void *self, const char *path, int flags, unsigned mode) {
	return fails(self, "open") ? -1 : fl_io_system()->open(NULL, path, flags, mode);
}

static long failing_read(void *self, int fd, void *bytes, size_t size) {
	return fails(self, "read") ? -1 : fl_io_system()->read(NULL, fd, bytes, size);
}

static long failing_write(void *self, int fd, const void *bytes, size_t size) {
	failing_io *disk = self;
	bool full = disk->failed && disk->mode == FAILING_SHORT;
	bool failing = fails(disk, "write") || full;
	if (!failing) {
		size_t part = disk->write_most && size > disk->write_most ? disk->write_most : size;
		return fl_io_system()->write(NULL, fd, bytes, part);
	}
	long half = 0;
	if (is_now(disk) && disk->mode != FAILING_CLEAN && size > 1)
		half = fl_io_system()->write(NULL, fd, bytes, size / 2);
	errno = disk->error_number;
	return is_now(disk) && disk->mode == FAILING_SHORT && half > 0 ? half : -1;
}

static int failing_sync(void *self, int fd) {
	return fails(self, "sync") ? -1 : fl_io_system()->sync(NULL, fd);
}

/* A failed close has closed all the same, as on Linux; so does the end of a process. */
static int failing_close(void *self, int fd) {
	bool failing = fails(self, "close");
	int closed = fl_io_system()->close(NULL, fd);
	if (!failing)
		return closed;
	errno = ((failing_io *)self)->error_number;
	return -1;
}

static int failing_truncate(void *self, int fd, int64_t length) {
	return fails(self, "truncate") ? -1 : fl_io_system()->truncate(NULL, fd, length);
}

static int failing_rename(void *self, const char *from, const char *to) {
	return fails(self, "rename") ? -1 : fl_io_system()->rename(NULL, from, to);
}

static int failing_rename_new(void *self, const char *from, const char *to) {
	return fails(self, "rename_new") ? -1 : fl_io_system()->rename_new(NULL, from, to);
}

static int failing_unlink(void *self, const char *path) {
	return fails(self, "unlink") ? -1 : fl_io_system()->unlink(NULL, path);
}

static int failing_make_folder(void *self, const char *path, unsigned mode) {
	return fails(self, "make_folder") ? -1 : fl_io_system()->make_folder(NULL, path, mode);
}

static int failing_lock(void *self, int fd) {
	return fails(self, "lock") ? -1 : fl_io_system()->lock(NULL, fd);
}

static int64_t failing_size(void *self, int fd) {
	return fails(self, "size") ? -1 : fl_io_system()->size(NULL, fd);
}

void failing_io_start(failing_io *disk, long fail_at, int error_number, failing_mode mode) {
	*disk = (failing_io){
	    .fail_at = fail_at,
	    .error_number = error_number,
	    .mode = mode,
	    .io =
	        {
	            .open = failing_open,
	            .read = failing_read,
	            .write = failing_write,
	            .sync = failing_sync,
	            .close = failing_close,
	            .truncate = failing_truncate,
	            .rename = failing_rename,
	            .rename_new = failing_rename_new,
	            .unlink = failing_unlink,
	            .make_folder = failing_make_folder,
	            .lock = failing_lock,
	            .size = failing_size,
	            .self = disk,
	        },
	};
}
