/* place.c - where things live: home, stock, templates, journals. Nothing is written anywhere else.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <dirent.h>
#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "cli.h"
#include "foundleft/document.h"

fl_status fl_place_join(char path[FL_PATH_SIZE], const char *folder, const char *name, fl_error *err) {
	int length = snprintf(path, FL_PATH_SIZE, "%s/%s", folder, name);
	if (length < 0 || length >= FL_PATH_SIZE)
		return fl_fail(err, FL_E_VALUE, "the path %s/%s is longer than %d characters", folder, name, FL_PATH_SIZE - 1);
	return FL_OK;
}

static bool exists(const char *path) {
	return access(path, F_OK) == 0;
}

/* --home, FOUNDLEFT_HOME, or the XDG data folder. */
static fl_status find_home(fl_cli *cli, fl_error *err) {
	const char *home = cli->values[FL_OPT_HOME];
	if (home == NULL || *home == '\0')
		home = getenv("FOUNDLEFT_HOME");
	if (home != NULL && *home != '\0') {
		if (strlen(home) >= sizeof cli->home)
			return fl_fail(err, FL_E_VALUE, "the path of --home is longer than %zu characters", sizeof cli->home - 1);
		snprintf(cli->home, sizeof cli->home, "%s", home);
		return FL_OK;
	}
	const char *xdg = getenv("XDG_DATA_HOME"), *user = getenv("HOME");
	if (xdg != NULL && *xdg == '/')
		return fl_place_join(cli->home, xdg, "foundleft", err);
	if (user == NULL || *user == '\0')
		return fl_fail(err, FL_E_USAGE, "no home folder is known: give --home DIR or set FOUNDLEFT_HOME");
	return fl_place_join(cli->home, user, ".local/share/foundleft", err);
}

/* The installed data: beside the program in a build tree, else PREFIX/share/foundleft. */
static fl_status find_data(fl_cli *cli, fl_error *err) {
	char program[FL_PATH_SIZE];
	ssize_t length = readlink("/proc/self/exe", program, sizeof program - 1);
	if (length > 0) {
		program[length] = '\0';
		char *slash = strrchr(program, '/');
		if (slash != NULL)
			*slash = '\0';
		static const char *const TRIES[] = {"share/foundleft", "../share/foundleft"};
		for (size_t i = 0; i < sizeof TRIES / sizeof TRIES[0]; i++) {
			fl_status status = fl_place_join(cli->data, program, TRIES[i], err);
			if (status < 0)
				return status;
			if (exists(cli->data))
				return FL_OK;
		}
	}
	snprintf(cli->data, sizeof cli->data, "%s", FOUNDLEFT_DATA_DIR);
	return FL_OK;
}

fl_status fl_place_find(fl_cli *cli, fl_error *err) {
	fl_status status = find_home(cli, err);
	if (status < 0)
		return status;
	status = find_data(cli, err);
	if (status < 0)
		return status;
	const char *stock = cli->values[FL_OPT_STOCK];
	if (stock == NULL)
		return fl_place_join(cli->stock, cli->home, "stock", err);
	if (strlen(stock) >= sizeof cli->stock)
		return fl_fail(err, FL_E_VALUE, "the path of --stock is longer than %zu characters", sizeof cli->stock - 1);
	snprintf(cli->stock, sizeof cli->stock, "%s", stock);
	return FL_OK;
}

fl_status fl_place_journal(const fl_cli *cli, const char *name, char path[FL_PATH_SIZE], fl_error *err) {
	if (strlen(name) >= FL_PATH_SIZE)
		return fl_fail(err, FL_E_VALUE, "the path of the journal is longer than %d characters", FL_PATH_SIZE - 1);
	snprintf(path, FL_PATH_SIZE, "%s", name);
	if (exists(path) || strchr(name, '/') != NULL)
		return FL_OK;
	char file[FL_PATH_SIZE], folder[FL_PATH_SIZE];
	const char *suffix = strstr(name, ".flj") ? "" : ".flj";
	snprintf(file, sizeof file, "sessions/%.400s%s", name, suffix);
	fl_status status = fl_place_join(folder, cli->home, file, err);
	if (status < 0)
		return status;
	if (!exists(folder))
		return fl_fail(err, FL_E_NOT_FOUND, "there is no journal `%s` here, nor a session of that name in %s/sessions",
		               name, cli->home);
	memcpy(path, folder, sizeof folder);
	return FL_OK;
}

fl_status fl_place_procedure(const fl_cli *cli, const char *id, char path[FL_PATH_SIZE], fl_error *err) {
	if (strchr(id, '/') != NULL || strstr(id, ".yaml") != NULL) {
		if (strlen(id) >= FL_PATH_SIZE)
			return fl_fail(err, FL_E_VALUE, "the path of the template is longer than %d characters", FL_PATH_SIZE - 1);
		snprintf(path, FL_PATH_SIZE, "%s", id);
		return FL_OK;
	}
	char file[FL_PATH_SIZE];
	snprintf(file, sizeof file, "templates/%.400s.yaml", id);
	const char *folders[] = {cli->home, cli->data};
	for (size_t i = 0; i < 2; i++) {
		fl_status status = fl_place_join(path, folders[i], file, err);
		if (status < 0)
			return status;
		if (exists(path))
			return FL_OK;
	}
	return fl_fail(err, FL_E_NOT_FOUND, "there is no procedure `%s`; foundleft list procedures shows what there is",
	               id);
}

/* A tag may hold anything; a file name should not. */
static void plain_name(const char *tag, char out[64]) {
	size_t length = 0;
	for (const char *c = tag; *c && length < 63; c++) {
		bool plain = (*c >= '0' && *c <= '9') || (*c >= 'A' && *c <= 'Z') || (*c >= 'a' && *c <= 'z') || *c == '-';
		out[length++] = plain ? *c : '_';
	}
	out[length] = '\0';
}

fl_status fl_place_new_journal(const fl_cli *cli, fl_day day, const char *tag, char path[FL_PATH_SIZE], fl_error *err) {
	const char *wanted = cli->values[FL_OPT_JOURNAL];
	if (wanted != NULL) {
		if (strlen(wanted) >= FL_PATH_SIZE)
			return fl_fail(err, FL_E_VALUE, "the path of --journal is longer than %d characters", FL_PATH_SIZE - 1);
		snprintf(path, FL_PATH_SIZE, "%s", wanted);
		return FL_OK;
	}
	char folder[FL_PATH_SIZE], name[64], file[128], date[FL_DAY_SIZE];
	fl_status status = fl_place_join(folder, cli->home, "sessions", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, folder, err);
	plain_name(tag, name);
	for (int n = 1; status >= 0 && n < 1000; n++) {
		if (n == 1)
			snprintf(file, sizeof file, "%s-%s.flj", fl_day_format(day, date), name);
		else
			snprintf(file, sizeof file, "%s-%s-%d.flj", fl_day_format(day, date), name, n);
		status = fl_place_join(path, folder, file, err);
		if (status >= 0 && !exists(path))
			return FL_OK;
	}
	return status < 0 ? status : fl_fail(err, FL_E_EXISTS, "there are 999 sessions of %s on %s already", tag, date);
}

static int by_name(const void *a, const void *b) {
	return strcmp(*(char *const *)a, *(char *const *)b);
}

fl_status fl_place_files(const char *folder, const char *suffix, fl_arena *arena, char ***paths, size_t *count,
                         fl_error *err) {
	size_t capacity = 0;
	*paths = NULL;
	*count = 0;
	DIR *dir = opendir(folder);
	if (dir == NULL)
		return errno == ENOENT ? FL_OK : fl_io_fail(err, "reading the folder", folder, errno);
	fl_status status = FL_OK;
	for (struct dirent *entry; status >= 0 && (entry = readdir(dir)) != NULL;) {
		size_t length = strlen(entry->d_name), tail = strlen(suffix);
		if (length <= tail || strcmp(entry->d_name + length - tail, suffix) != 0)
			continue;
		char **grown = fl_arena_grow(arena, *paths, *count, &capacity, sizeof **paths);
		char *path = fl_arena_printf(arena, "%s/%s", folder, entry->d_name);
		if (grown == NULL || path == NULL) {
			status = fl_fail(err, FL_E_MEMORY, "out of memory");
			break;
		}
		*paths = grown;
		grown[(*count)++] = path;
	}
	closedir(dir);
	if (*count > 1)
		qsort(*paths, *count, sizeof **paths, by_name);
	return status;
}

static fl_status visit_procedure(const fl_cli *cli, const char *path, fl_procedure_visitor visit, void *context,
                                 fl_error *err) {
	fl_procedure procedure;
	fl_error local = {0};
	fl_status status = fl_procedure_load(cli->io, path, &procedure, &local);
	if (status == FL_E_MEMORY)
		return fl_fail(err, status, "%s", local.message);
	if (status < 0) {
		fl_cli_left_out(cli, &local);
		return FL_OK;
	}
	status = visit(context, &procedure, err);
	fl_procedure_free(&procedure);
	return status;
}

fl_status fl_place_each_procedure(const fl_cli *cli, fl_procedure_visitor visit, void *context, fl_error *err) {
	const char *folders[] = {cli->home, cli->data};
	fl_status status = FL_OK;
	for (size_t f = 0; status >= 0 && f < 2; f++) {
		fl_arena arena = {0};
		char folder[FL_PATH_SIZE], **paths;
		size_t count = 0;
		status = fl_place_join(folder, folders[f], "templates", err);
		if (status >= 0)
			status = fl_place_files(folder, ".yaml", &arena, &paths, &count, err);
		for (size_t i = 0; status >= 0 && i < count; i++)
			status = visit_procedure(cli, paths[i], visit, context, err);
		fl_arena_free(&arena);
	}
	return status;
}

fl_status fl_place_stock(const fl_cli *cli, fl_stock *stock, fl_error *err) {
	fl_arena arena = {0};
	char **paths;
	size_t count;
	fl_status status = fl_place_files(cli->stock, ".yaml", &arena, &paths, &count, err);
	for (size_t i = 0; status >= 0 && i < count; i++)
		if (strcmp(strrchr(paths[i], '/') + 1, "bench.yaml") != 0)
			status = fl_stock_load(stock, cli->io, paths[i], err);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_place_issuer(const fl_cli *cli, fl_arena *arena, bool required, const char **issuer, const char **address,
                          fl_error *err) {
	static const char *const KNOWN[] = {"issuer", "address", NULL};
	char path[FL_PATH_SIZE], *text;
	size_t length;
	const fl_node *root;
	fl_error local = {0};
	*issuer = cli->values[FL_OPT_ISSUER];
	*address = cli->values[FL_OPT_ISSUER_ADDRESS];
	fl_status status = fl_place_join(path, cli->stock, "bench.yaml", err);
	if (status < 0)
		return status;
	status = fl_file_read(cli->io, path, 1 << 20, arena, &text, &length, &local);
	if (status == FL_E_NOT_FOUND)
		return FL_OK;
	if (status < 0)
		return fl_fail(err, status, "%s", local.message);
	status = fl_document_parse(arena, text, path, &root, err);
	if (status >= 0)
		status = fl_node_only(root, KNOWN, err);
	if (status >= 0 && *issuer == NULL)
		status = fl_node_text(root, "issuer", required, issuer, err);
	if (status >= 0 && *address == NULL)
		status = fl_node_text(root, "address", required, address, err);
	return status;
}
