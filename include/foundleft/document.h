/* foundleft/document.h - files that people edit: a YAML tree in which every node knows its line and column, and
 * typed readers whose errors say place, field and what would be right.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Read with libyaml. Refused with their place: duplicate keys, aliases and anchors, tags, several documents,
 * text that is not UTF-8, control characters, more than 32 levels, files over 4 MiB.
 */
#ifndef FOUNDLEFT_DOCUMENT_H
#define FOUNDLEFT_DOCUMENT_H

#include "foundleft/base.h"

typedef enum fl_node_kind { FL_NODE_SCALAR, FL_NODE_LIST, FL_NODE_MAP } fl_node_kind;

typedef struct fl_node {
	fl_node_kind kind;
	const char *text;             /* scalar: its text; else NULL */
	bool quoted;                  /* scalar written in quotes or as a block */
	const struct fl_node **items; /* list: elements; map: values */
	const char **keys;            /* map: keys, else NULL */
	size_t count;
	const char *path; /* field path: "oils[2].k" */
	const char *file;
	int line, column;  /* 1-based */
	size_t start, end; /* byte range in the source */
} fl_node;

/* Parses `text`; everything is allocated in `arena` (the source text is copied there too). */
fl_status fl_document_parse(fl_arena *arena, const char *text, const char *file, const fl_node **root,
                            fl_error *err) FL_MUST_USE;
/* The source of one node as a document of its own: first line padded so that it parses alone. */
char *fl_document_excerpt(fl_arena *arena, const char *source, const fl_node *node) FL_MUST_USE;

fl_place fl_node_place(const fl_node *node);
/* The value under key, NULL if absent. */
const fl_node *fl_node_get(const fl_node *map, const char *key);
/* FL_E_VALUE unless `map` is a map whose keys are all in known[] (NULL-terminated); names the nearest known key. */
fl_status fl_node_only(const fl_node *map, const char *const *known, fl_error *err) FL_MUST_USE;

/* Typed readers of map[key]. A missing key is an error at the map's place (`required`) or leaves *out as it is. */
fl_status fl_node_text(const fl_node *map, const char *key, bool required, const char **out, fl_error *err) FL_MUST_USE;
fl_status fl_node_number(const fl_node *map, const char *key, bool required, double low, double high, double *out,
                         fl_error *err) FL_MUST_USE;
fl_status fl_node_integer(const fl_node *map, const char *key, bool required, int low, int high, int *out,
                          fl_error *err) FL_MUST_USE;
fl_status fl_node_bool(const fl_node *map, const char *key, bool required, bool *out, fl_error *err) FL_MUST_USE;
fl_status fl_node_day(const fl_node *map, const char *key, bool required, fl_day *out, fl_error *err) FL_MUST_USE;
/* "2.2 mm": a number with a unit of `quantity`; *inside in the inside unit, *unit as written. */
fl_status fl_node_amount(const fl_node *map, const char *key, bool required, fl_quantity quantity, double *inside,
                         fl_unit *unit, fl_error *err) FL_MUST_USE;
/* One of words[] (NULL-terminated): its index. */
fl_status fl_node_choice(const fl_node *map, const char *key, bool required, const char *const *words, int *out,
                         fl_error *err) FL_MUST_USE;
/* A list under key (possibly of one); missing: *list = NULL. */
fl_status fl_node_list(const fl_node *map, const char *key, bool required, const fl_node **list,
                       fl_error *err) FL_MUST_USE;

#endif
