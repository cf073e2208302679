/* files.c - an item goes into a stock file: behind the last of its list, everything else as it was.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The place is found by parsing the file, the item is put in as text, and the result is parsed again: it has to hold
 * one item more and the same ones before it, or it is not written. */
#include "foundleft/shelf.h"

#include <stdio.h>
#include <string.h>

#define TRY(call)                      \
	do {                               \
		fl_status try_status = (call); \
		if (try_status != FL_OK)       \
			return try_status;         \
	} while (0)

#define FILE_HEAD \
	"# Kept by foundleft stock; the format is described in docs/stock-files.md. Edit it with any text editor.\n"

/* ---- the text ---------------------------------------------------------------------------------------------------- */

/* Lines of `block` behind a dash in column `indent`. */
static void put_block(fl_text *out, const char *block, size_t indent) {
	bool first = true;
	while (*block) {
		size_t length = strcspn(block, "\n");
		for (size_t i = 0; i < indent; i++)
			fl_text_add(out, " ");
		fl_text_add(out, first ? "- " : "  ");
		fl_text_append(out, block, length);
		fl_text_add(out, "\n");
		block += length + (block[length] == '\n');
		first = false;
	}
}

/* End of the last scalar in a node: what follows may be comments that belong to nothing. */
static size_t last_end(const fl_node *node) {
	size_t end = node->kind == FL_NODE_SCALAR || node->count == 0 ? node->end : 0;
	for (size_t i = 0; node->kind != FL_NODE_SCALAR && i < node->count; i++) {
		size_t inner = last_end(node->items[i]);
		end = inner > end ? inner : end;
	}
	return end;
}

/* Column of the dash before the first item, counted from 0; false where the list is not written with dashes. */
static bool dash_column(const char *text, const fl_node *item, size_t *column) {
	size_t line = item->start;
	while (line > 0 && text[line - 1] != '\n')
		line--;
	*column = strspn(text + line, " ");
	return text[line + *column] == '-' && line + *column < item->start;
}

static fl_status insert_behind(const char *text, const fl_node *list, const char *file, const char *block, fl_text *out,
                               fl_error *err) {
	size_t column = 0, end;
	if (list->kind != FL_NODE_LIST || list->count == 0 || !dash_column(text, list->items[0], &column))
		return fl_fail_at(err, FL_E_STATE, (fl_place){file, list->line, list->column, NULL},
		                  "this list is not written with a dash for each item: put the item in by hand, or write the "
		                  "list so");
	end = last_end(list->items[list->count - 1]);
	end += strcspn(text + end, "\n");
	fl_text_append(out, text, end);
	fl_text_add(out, "\n\n");
	put_block(out, block, column);
	fl_text_add(out, text[end] == '\n' ? text + end + 1 : text + end);
	return FL_OK;
}

/* One item more, those before it unchanged. */
static fl_status verify(const fl_node *before, const fl_text *out, const char *file, const char *key, fl_arena *arena,
                        fl_error *err) {
	const fl_node *root;
	if (out->failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	TRY(fl_document_parse(arena, out->data, file, &root, err));
	const fl_node *list = fl_node_get(root, key);
	size_t had = before && fl_node_get(before, key) ? fl_node_get(before, key)->count : 0;
	if (!list || list->count != had + 1 || root->count < (before ? before->count : 0))
		return fl_fail_at(err, FL_E_STATE, (fl_place){.file = file},
		                  "the item could not be added behind the list's last one: put it in by hand");
	return FL_OK;
}

fl_status fl_shelf_insert(const char *text, const char *file, fl_shelf_kind kind, const char *block, fl_text *out,
                          fl_error *err) {
	const char *key = fl_shelf_kind_list(kind);
	fl_arena arena = {0};
	const fl_node *root = NULL;
	fl_status status = FL_OK;
	if (*text)
		status = fl_document_parse(&arena, text, file, &root, err);
	const fl_node *list = status >= 0 && root ? fl_node_get(root, key) : NULL;
	if (status >= 0 && list) {
		status = insert_behind(text, list, file, block, out, err);
	} else if (status >= 0) {
		fl_text_add(out, *text ? text : FILE_HEAD);
		if (*text && text[strlen(text) - 1] != '\n')
			fl_text_add(out, "\n");
		fl_text_printf(out, "%s%s:\n", *text ? "\n" : "", key);
		put_block(out, block, 2);
	}
	if (status >= 0)
		status = verify(root, out, file, key, &arena, err);
	fl_arena_free(&arena);
	return status;
}

/* ---- the files --------------------------------------------------------------------------------------------------- */

static bool holds_list(fl_arena *arena, const char *text, const char *path, const char *key) {
	const fl_node *root = NULL;
	return fl_document_parse(arena, text, path, &root, NULL) >= 0 && fl_node_get(root, key);
}

/* The file that takes the item, and its text; "" for a new one. */
static fl_status choose_file(const fl_io *io, const char *folder, char *const *paths, size_t count, const char *key,
                             fl_arena *arena, char path[512], const char **text, fl_error *err) {
	for (size_t i = 0; i < count; i++) {
		TRY(fl_document_load(arena, io, paths[i], text, err));
		if (holds_list(arena, *text, paths[i], key)) {
			snprintf(path, 512, "%s", paths[i]);
			return FL_OK;
		}
	}
	*text = "";
	if (snprintf(path, 512, "%s/%s.yaml", folder, key) >= 512)
		return fl_fail(err, FL_E_VALUE, "the path of the stock folder is too long");
	for (size_t i = 0; i < count; i++)
		if (strcmp(paths[i], path) == 0)
			return fl_document_load(arena, io, path, text, err);
	return FL_OK;
}

/* The whole stock as it will be. */
static fl_status read_again(const fl_io *io, char *const *paths, size_t count, const char *path, const char *text,
                            fl_error *err) {
	fl_stock stock = {0};
	fl_status status = FL_OK;
	for (size_t i = 0; i < count && status >= 0; i++)
		if (strcmp(paths[i], path) != 0)
			status = fl_stock_load(&stock, io, paths[i], err);
	if (status >= 0)
		status = fl_stock_parse(&stock, text, path, err);
	fl_stock_free(&stock);
	return status;
}

/* Held while a file of the folder is changed, so that two programs do not take turns in losing each other's item. */
static fl_status lock_folder(const fl_io *io, const char *folder, int *fd, fl_error *err) {
	char path[512];
	if (snprintf(path, sizeof path, "%s/.lock", folder) >= (int)sizeof path)
		return fl_fail(err, FL_E_VALUE, "the path of the stock folder is too long");
	fl_append lock = {0};
	fl_status status = fl_append_open(&lock, io, path, false, -1, NULL);
	if (status == FL_E_NOT_FOUND)
		status = fl_append_open(&lock, io, path, true, 0, NULL);
	if (status < 0)
		return fl_fail(err, status == FL_E_EXISTS ? FL_E_STATE : status,
		               "%s can't be changed now: another program is changing it, or writing there is not permitted",
		               folder);
	*fd = lock.fd;
	return FL_OK;
}

static fl_status change(const fl_io *io, const char *folder, char *const *paths, size_t count, fl_shelf_kind kind,
                        const char *block, char path[512], fl_error *err) {
	fl_arena arena = {0};
	fl_text changed = {0};
	const char *text = "";
	fl_status status = choose_file(io, folder, paths, count, fl_shelf_kind_list(kind), &arena, path, &text, err);
	if (status >= 0)
		status = fl_shelf_insert(text, path, kind, block, &changed, err);
	if (status >= 0)
		status = read_again(io, paths, count, path, changed.data, err);
	if (status >= 0)
		status = fl_file_write(io, path, changed.data, changed.length, *text != '\0', err);
	fl_text_free(&changed);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_shelf_store(const fl_io *io, const char *folder, char *const *paths, size_t count, fl_shelf_kind kind,
                         const char *block, char path[512], fl_error *err) {
	int fd = -1;
	fl_status status = fl_folder_make(io, folder, err);
	if (status >= 0)
		status = lock_folder(io, folder, &fd, err);
	if (status < 0)
		return status;
	status = change(io, folder, paths, count, kind, block, path, err);
	io->close(io->self, fd);
	return status;
}
