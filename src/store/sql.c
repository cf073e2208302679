/* sql.c - statements prepared once, bound and stepped; the database's errors in words.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "sql.h"

#include <errno.h>
#include <fcntl.h>
#include <stdarg.h>
#include <string.h>

static const char *const texts[SQL_COUNT] = {
#define SQL_TEXT(name, text) text,
    SQL_LIST(SQL_TEXT)
#undef SQL_TEXT
};

fl_status fl_sql_memory(fl_error *err) {
	return fl_fail(err, FL_E_MEMORY, "out of memory for the record book");
}

/* A write that failed for want of room may come as an ordinary input/output error (a quota, a limit of file size);
 * then only errno tells, which fl_sql_step cleared before. */
static bool is_full(sqlite3 *db) {
	int system = errno, code = sqlite3_errcode(db) & 0xff;
	return code == SQLITE_FULL || (code == SQLITE_IOERR && (system == ENOSPC || system == EFBIG || system == EDQUOT));
}

static fl_status fail_at(fl_store *store, fl_error *err, fl_status status, const char *message) {
	return fl_fail_at(err, status, (fl_place){.file = store->path}, "%s", message);
}

fl_status fl_sql_fail(fl_store *store, fl_error *err) {
	sqlite3 *db = store->db;
	const fl_place place = {.file = store->path};
	if (is_full(db))
		return fail_at(store, err, FL_E_DISK_FULL, "the disk is full; the book is as it was: make room and try again");
	switch (sqlite3_errcode(db) & 0xff) {
	case SQLITE_NOMEM:
		return fl_sql_memory(err);
	case SQLITE_BUSY:
	case SQLITE_LOCKED:
		return fail_at(store, err, FL_E_STATE,
		               "another program is writing to the book; wait until it has finished and try again");
	case SQLITE_READONLY:
	case SQLITE_PERM:
	case SQLITE_CANTOPEN:
		return fl_fail_at(err, FL_E_READ_ONLY, place,
		                  "the book can't be opened or written here (%s): check the permissions", sqlite3_errmsg(db));
	case SQLITE_CORRUPT:
	case SQLITE_NOTADB:
		return fl_fail_at(err, FL_E_TAMPERED, place,
		                  "the file is damaged or no record book (%s): restore it from a backup", sqlite3_errmsg(db));
	case SQLITE_CONSTRAINT:
		return fl_fail_at(err, FL_E_STATE, place, "the book refuses this: %s", sqlite3_errmsg(db));
	default:
		return fl_fail_at(err, FL_E_IO, place, "%s", sqlite3_errmsg(db));
	}
}

fl_status fl_sql(fl_store *store, sql_name name, sqlite3_stmt **out, fl_error *err) {
	sqlite3_stmt **kept = &store->statements[name];
	if (!*kept && sqlite3_prepare_v3(store->db, texts[name], -1, SQLITE_PREPARE_PERSISTENT, kept, NULL) != SQLITE_OK)
		return fl_sql_fail(store, err);
	sqlite3_reset(*kept);
	sqlite3_clear_bindings(*kept);
	*out = *kept;
	return FL_OK;
}

static void bind_text(sqlite3_stmt *statement, int i, const char *text) {
	sqlite3_bind_text(statement, i, text, -1, SQLITE_STATIC);
}

static void bind_list(sqlite3_stmt *statement, const char *format, va_list list) {
	for (int i = 1; format[i - 1]; i++) {
		switch (format[i - 1]) {
		case 'i':
			sqlite3_bind_int64(statement, i, va_arg(list, int64_t));
			break;
		case 'd': {
			fl_day day = va_arg(list, fl_day);
			if (day != FL_NO_DAY)
				sqlite3_bind_int64(statement, i, day);
			break;
		}
		case 't':
			bind_text(statement, i, va_arg(list, const char *));
			break;
		case 'e': {
			const char *text = va_arg(list, const char *);
			bind_text(statement, i, text && *text ? text : NULL);
			break;
		}
		case 'b': {
			const void *bytes = va_arg(list, const void *);
			sqlite3_bind_blob64(statement, i, bytes, va_arg(list, size_t), SQLITE_STATIC);
			break;
		}
		default:
			break;
		}
	}
}

void fl_sql_bind(sqlite3_stmt *statement, const char *format, ...) {
	va_list list;
	va_start(list, format);
	bind_list(statement, format, list);
	va_end(list);
}

fl_status fl_sql_step(fl_store *store, sqlite3_stmt *statement, bool *row, fl_error *err) {
	errno = 0;
	int code = sqlite3_step(statement);
	*row = code == SQLITE_ROW;
	if (*row)
		return FL_OK;
	fl_status status = code == SQLITE_DONE ? FL_OK : fl_sql_fail(store, err);
	sqlite3_reset(statement);
	return status;
}

fl_status fl_sql_run(fl_store *store, sql_name name, fl_error *err, const char *format, ...) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, name, &statement, err);
	if (status < 0)
		return status;
	va_list list;
	va_start(list, format);
	bind_list(statement, format, list);
	va_end(list);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	sqlite3_reset(statement);
	sqlite3_clear_bindings(statement);
	return status;
}

fl_status fl_sql_text(fl_store *store, const char *text, fl_error *err) {
	errno = 0;
	return sqlite3_exec(store->db, text, NULL, NULL, NULL) == SQLITE_OK ? FL_OK : fl_sql_fail(store, err);
}

fl_status fl_sql_number(fl_store *store, sql_name name, int64_t *out, int64_t fallback, fl_error *err,
                        const char *format, ...) {
	sqlite3_stmt *statement = NULL;
	fl_status status = fl_sql(store, name, &statement, err);
	if (status < 0)
		return status;
	va_list list;
	va_start(list, format);
	bind_list(statement, format, list);
	va_end(list);
	bool row = false;
	status = fl_sql_step(store, statement, &row, err);
	if (status >= 0)
		*out = row && sqlite3_column_type(statement, 0) != SQLITE_NULL ? sqlite3_column_int64(statement, 0) : fallback;
	sqlite3_reset(statement);
	return status;
}

void fl_sql_rollback(fl_store *store) {
	if (!sqlite3_get_autocommit(store->db))
		sqlite3_exec(store->db, "ROLLBACK", NULL, NULL, NULL);
}

const char *fl_sql_column(sqlite3_stmt *statement, int column) {
	const unsigned char *text = sqlite3_column_text(statement, column);
	return text ? (const char *)text : "";
}

fl_day fl_sql_day(sqlite3_stmt *statement, int column) {
	return sqlite3_column_type(statement, column) == SQLITE_NULL ? FL_NO_DAY
	                                                             : (fl_day)sqlite3_column_int64(statement, column);
}

/* ---- the file ---------------------------------------------------------------------------------------------------- */

fl_status fl_sql_make_file(const fl_io *io, const char *path, fl_error *err) {
	int fd = io->open(io->self, path, O_RDWR | O_CREAT | O_EXCL | O_CLOEXEC, 0600);
	if (fd < 0 && errno == EEXIST)
		return fl_fail_at(err, FL_E_EXISTS, (fl_place){.file = path}, "there is a file here already");
	if (fd < 0)
		return fl_io_fail(err, "creating", path, errno);
	return io->close(io->self, fd) == 0 ? FL_OK : fl_io_fail(err, "creating", path, errno);
}
