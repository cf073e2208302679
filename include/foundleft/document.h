/* foundleft/document.h - files that people edit: a YAML tree in which every node knows its line and column, and
 * typed readers whose errors say place, field and what would be right.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Read with libyaml. Refused with their place: duplicate keys, aliases and anchors, tags, several documents,
 * text that is not UTF-8, control characters, more than 32 levels, 1000 fields in one map or 100 000 values, field
 * names over 64 characters, files over 4 MiB.
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
	const char *path; /* field path, lists counted from 1: "oils[2].k" */
	const char *file;
	int line, column;         /* 1-based; columns count characters */
	int key_line, key_column; /* value of a map: where its key stands; else 0 */
	size_t start, end;        /* byte range in the source */
} fl_node;

#define FL_DOCUMENT_MAX ((size_t)4 * 1024 * 1024)

/* Parses `text`; everything is allocated in `arena` (the source text is copied there too). */
fl_status fl_document_parse(fl_arena *arena, const char *text, const char *file, const fl_node **root,
                            fl_error *err) FL_MUST_USE;
/* Reads a file of at most FL_DOCUMENT_MAX bytes into the arena; refuses one with a zero byte. */
fl_status fl_document_load(fl_arena *arena, const fl_io *io, const char *path, const char **text,
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
/* The same, refused (FL_E_RANGE) outside low to high, which are in the inside unit. */
fl_status fl_node_amount_within(const fl_node *map, const char *key, bool required, fl_quantity quantity, double low,
                                double high, double *inside, fl_unit *unit, fl_error *err) FL_MUST_USE;
/* One scalar as a number with unit, both as written; a number alone gives FL_U_NONE. Any quantity. A point is the
 * decimal mark of a file; a comma is taken too, unless it could mean thousands ("1,234": refused). */
fl_status fl_node_measure(const fl_node *scalar, double *value, fl_unit *unit, fl_error *err) FL_MUST_USE;
/* "0 to 50 mm2/s": two numbers, low < high, one unit (of `quantity`, or any if FL_Q_NONE); values in *unit. Where
 * `open` is true "at least 5 bar" and "at most 60 degC" are taken too; the open end is then infinite. */
fl_status fl_node_span(const fl_node *map, const char *key, bool required, fl_quantity quantity, bool open, double *low,
                       double *high, fl_unit *unit, fl_error *err) FL_MUST_USE;
/* The units of a quantity as a sentence part: "mm or m". Returns out. */
char *fl_document_units(fl_quantity quantity, char *out, size_t size);
/* One of words[] (NULL-terminated): its index. */
fl_status fl_node_choice(const fl_node *map, const char *key, bool required, const char *const *words, int *out,
                         fl_error *err) FL_MUST_USE;
/* A list under key (possibly of one); missing: *list = NULL. */
fl_status fl_node_list(const fl_node *map, const char *key, bool required, const fl_node **list,
                       fl_error *err) FL_MUST_USE;

#endif
