/* file.c - files that are read whole, written whole or grown line by line, every call checked.
 *
 * Invariants
 *   1. fl_file_write touches the path only by a rename of a synced file: a reader sees the old or the new bytes.
 *   2. fl_append.length counts only bytes that were written and synced; what stands behind it is cut off after a
 *      failure and at the next opening.
 *   3. After a failed write or sync nothing more is written through the same handle: what the disk then holds is
 *      not known until the file is read again.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>

#include "foundleft/base.h"

#define PATH_BYTES 4096
#define LEFTOVERS_MOST 16

/* ---- calls that are repeated when a signal interrupts them --------------------------------------------------- */

static int open_again(const fl_io *io, const char *path, int flags, unsigned mode) {
	int fd;
	do
		fd = io->open(io->self, path, flags | O_CLOEXEC, mode);
	while (fd < 0 && errno == EINTR);
	return fd;
}

static int sync_again(const fl_io *io, int fd) {
	int done;
	do
		done = io->sync(io->self, fd);
	while (done != 0 && errno == EINTR);
	return done;
}

/* Closing is never repeated: the descriptor is gone whatever the answer. 0 if all is well. */
static int close_once(const fl_io *io, int fd) {
	return io->close(io->self, fd) == 0 || errno == EINTR ? 0 : -1;
}

/* Closes after a failure and keeps the errno of that failure. */
static void close_quietly(const fl_io *io, int fd) {
	int reason = errno;
	io->close(io->self, fd);
	errno = reason;
}

static void unlink_quietly(const fl_io *io, const char *path) {
	int reason = errno;
	io->unlink(io->self, path);
	errno = reason;
}

/* Writes all bytes, however the system slices them. */
static int write_all(const fl_io *io, int fd, const char *bytes, size_t length) {
	while (length > 0) {
		long wrote = io->write(io->self, fd, bytes, length);
		if (wrote < 0 && errno == EINTR)
			continue;
		if (wrote == 0)
			errno = EIO; /* no progress and no reason: do not spin */
		if (wrote <= 0)
			return -1;
		bytes += wrote;
		length -= (size_t)wrote;
	}
	return 0;
}

/* Makes the entries of the folder that holds `path` durable. A network disk that cannot sync a folder is let pass. */
static int sync_folder_of(const fl_io *io, const char *path) {
	char folder[PATH_BYTES];
	const char *slash = strrchr(path, '/');
	size_t length = slash ? (size_t)(slash - path) : 0;
	if (length >= sizeof folder) {
		errno = ENAMETOOLONG;
		return -1;
	}
	memcpy(folder, path, length);
	folder[length] = '\0';
	int fd = open_again(io, length ? folder : slash ? "/" : ".", O_RDONLY | O_DIRECTORY, 0);
	if (fd < 0)
		return -1;
	if (sync_again(io, fd) != 0 && errno != EINVAL && errno != ENOTSUP) {
		close_quietly(io, fd);
		return -1;
	}
	return close_once(io, fd);
}

/* ---- whole files ---------------------------------------------------------------------------------------------- */

/* Reads to the end, but at most one byte more than the limit. */
static fl_status read_all(const fl_io *io, int fd, const char *path, size_t limit, fl_text *text, fl_error *err) {
	char chunk[16 * 1024];
	while (text->length <= limit) {
		long got = io->read(io->self, fd, chunk, sizeof chunk);
		if (got < 0 && errno == EINTR)
			continue;
		if (got < 0)
			return fl_io_fail(err, "read", path, errno);
		if (got == 0)
			return FL_OK;
		fl_text_append(text, chunk, (size_t)got);
		if (text->failed)
			return fl_fail(err, FL_E_MEMORY, "cannot read %s: out of memory", path);
	}
	return fl_fail(err, FL_E_RANGE, "%s is larger than the %zu bytes that such a file may have", path, limit);
}

fl_status fl_file_read(const fl_io *io, const char *path, size_t limit, fl_arena *arena, char **bytes, size_t *length,
                       fl_error *err) {
	int fd = open_again(io, path, O_RDONLY, 0);
	if (fd < 0)
		return fl_io_fail(err, "open", path, errno);
	fl_text text = {0};
	fl_status status = read_all(io, fd, path, limit, &text, err);
	close_quietly(io, fd);
	char *copy = status < 0 ? NULL : fl_arena_alloc(arena, text.length + 1, 1);
	if (status >= 0 && !copy)
		status = fl_fail(err, FL_E_MEMORY, "cannot read %s: out of memory", path);
	if (status >= 0) {
		if (text.length > 0)
			memcpy(copy, text.data, text.length);
		*bytes = copy;
		*length = text.length;
	}
	fl_text_free(&text);
	return status;
}

/* Opens a new file beside `path`; its name goes to beside[size]. A leftover of a killed program is stepped over,
 * never shared, because its writer might still be alive. */
static int open_beside(const fl_io *io, const char *path, char *beside, size_t size) {
	for (int i = 1; i <= LEFTOVERS_MOST; i++) {
		int length = snprintf(beside, size, "%s.part%d", path, i);
		if (length < 0 || (size_t)length >= size) {
			errno = ENAMETOOLONG;
			return -1;
		}
		int fd = open_again(io, beside, O_WRONLY | O_CREAT | O_EXCL | O_NOFOLLOW, 0644);
		if (fd >= 0 || errno != EEXIST)
			return fd;
	}
	return -1;
}

/* Fills the new file and makes its bytes durable; closes it in any case. */
static int fill(const fl_io *io, int fd, const void *bytes, size_t length) {
	if (write_all(io, fd, bytes, length) != 0 || sync_again(io, fd) != 0) {
		close_quietly(io, fd);
		return -1;
	}
	return close_once(io, fd);
}

fl_status fl_file_write(const fl_io *io, const char *path, const void *bytes, size_t length, bool replace,
                        fl_error *err) {
	char beside[PATH_BYTES];
	int fd = open_beside(io, path, beside, sizeof beside);
	if (fd < 0 && errno == EEXIST)
		return fl_fail(err, FL_E_EXISTS, "cannot write %s: too many unfinished files beside it; remove %s.part1 and on",
		               path, path);
	if (fd < 0)
		return fl_io_fail(err, "write", path, errno);
	if (fill(io, fd, bytes, length) != 0 || (replace ? io->rename : io->rename_new)(io->self, beside, path) != 0) {
		unlink_quietly(io, beside);
		return fl_io_fail(err, "write", path, errno);
	}
	if (sync_folder_of(io, path) != 0)
		return fl_io_fail(err, "make durable", path, errno);
	return FL_OK;
}

/* ---- folders ---------------------------------------------------------------------------------------------------- */

static fl_status existing_folder(const fl_io *io, const char *path, fl_error *err) {
	int fd = open_again(io, path, O_RDONLY | O_DIRECTORY, 0);
	if (fd < 0 && errno == ENOTDIR)
		return fl_fail(err, FL_E_EXISTS, "cannot make the folder %s: there is a file of that name", path);
	if (fd < 0)
		return fl_io_fail(err, "open the folder", path, errno);
	close_quietly(io, fd);
	return FL_OK;
}

/* Makes path[length] after those above it. The path has no slash at its end. */
static fl_status make_folders(const fl_io *io, char *path, fl_error *err) {
	if (io->make_folder(io->self, path, 0700) == 0)
		return sync_folder_of(io, path) == 0 ? FL_OK : fl_io_fail(err, "make durable", path, errno);
	if (errno == EEXIST)
		return existing_folder(io, path, err);
	char *slash = strrchr(path, '/');
	if (errno != ENOENT || !slash || slash == path)
		return fl_io_fail(err, "make the folder", path, errno);
	*slash = '\0';
	fl_status status = make_folders(io, path, err);
	*slash = '/';
	if (status < 0)
		return status;
	if (io->make_folder(io->self, path, 0700) != 0 && errno != EEXIST)
		return fl_io_fail(err, "make the folder", path, errno);
	return sync_folder_of(io, path) == 0 ? FL_OK : fl_io_fail(err, "make durable", path, errno);
}

fl_status fl_folder_make(const fl_io *io, const char *path, fl_error *err) {
	char copy[PATH_BYTES];
	size_t length = strlen(path);
	if (length == 0)
		return fl_fail(err, FL_E_VALUE, "the name of the folder is empty");
	if (length >= sizeof copy)
		return fl_io_fail(err, "make the folder", path, ENAMETOOLONG);
	memcpy(copy, path, length + 1);
	while (length > 1 && copy[length - 1] == '/')
		copy[--length] = '\0';
	return make_folders(io, copy, err);
}

/* ---- a file that only grows -------------------------------------------------------------------------------------- */

/* Lock and length of a file just opened; on failure says so and leaves the descriptor to the caller. */
static fl_status take(fl_append *append, bool created, int64_t keep, fl_error *err) {
	const fl_io *io = append->io;
	if (io->lock(io->self, append->fd) != 0)
		return fl_io_fail(err, "open", append->path, errno);
	if (created)
		return sync_folder_of(io, append->path) == 0 ? FL_OK : fl_io_fail(err, "make durable", append->path, errno);
	append->length = io->size(io->self, append->fd);
	if (append->length < 0)
		return fl_io_fail(err, "open", append->path, errno);
	return keep < 0 ? FL_OK : fl_append_cut(append, keep, err);
}

fl_status fl_append_open(fl_append *append, const fl_io *io, const char *path, bool create, int64_t keep,
                         fl_error *err) {
	fl_append opened = {.io = io, .fd = -1};
	if (strlen(path) >= sizeof opened.path)
		return fl_io_fail(err, "open", path, ENAMETOOLONG);
	memcpy(opened.path, path, strlen(path) + 1);
	opened.fd = open_again(io, path, O_RDWR | O_APPEND | (create ? O_CREAT | O_EXCL : 0), 0644);
	if (opened.fd < 0)
		return fl_io_fail(err, create ? "create" : "open", path, errno);
	fl_status status = take(&opened, create, keep, err);
	if (status < 0) {
		close_quietly(io, opened.fd);
		if (create && status != FL_E_STATE) /* locked by another program already: then it is theirs now */
			unlink_quietly(io, path);
		return status;
	}
	*append = opened;
	return FL_OK;
}

static fl_status refuse_broken(const fl_append *append, fl_error *err) {
	return fl_fail(err, FL_E_STATE, "%s: an earlier write failed, so nothing more is written; open it again",
	               append->path);
}

fl_status fl_append_cut(fl_append *append, int64_t length, fl_error *err) {
	const fl_io *io = append->io;
	if (append->broken)
		return refuse_broken(append, err);
	if (length < 0 || length > append->length)
		return fl_fail(err, FL_E_STATE,
		               "%s is shorter than when it was read: another program changed it; read it again", append->path);
	if (length == append->length)
		return FL_OK;
	if (io->truncate(io->self, append->fd, length) != 0 || sync_again(io, append->fd) != 0) {
		append->broken = true;
		return fl_io_fail(err, "cut the unfinished end off", append->path, errno);
	}
	append->length = length;
	return FL_OK;
}

/* After a failure: the torn bytes go, as far as the disk still obeys, and the handle stays shut. */
static void give_up(fl_append *append) {
	int reason = errno;
	append->broken = true;
	if (append->io->truncate(append->io->self, append->fd, append->length) == 0)
		append->io->sync(append->io->self, append->fd);
	errno = reason;
}

fl_status fl_append_bytes(fl_append *append, const char *bytes, size_t length, fl_error *err) {
	if (append->broken)
		return refuse_broken(append, err);
	if (write_all(append->io, append->fd, bytes, length) != 0 || sync_again(append->io, append->fd) != 0) {
		give_up(append);
		return fl_io_fail(err, "write", append->path, errno);
	}
	append->length += (int64_t)length;
	return FL_OK;
}

void fl_append_close(fl_append *append) {
	if (append->io && append->fd >= 0)
		append->io->close(append->io->self, append->fd);
	*append = (fl_append){.fd = -1};
}
