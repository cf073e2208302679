/* parse.c - from text to a tree of nodes, each with its place: libyaml's events, minus all of YAML that a person
 * who fills in a form does not need (anchors, aliases, tags, several documents, doubled or nested keys).
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * libyaml counts characters, not bytes; the reader walks a cursor along the source to turn its marks into bytes.
 */
#include "foundleft/document.h"

#include <string.h>
#include <yaml.h>

enum { MAX_DEPTH = 32, MAX_NODES = 100000, MAX_KEYS = 1000, MAX_KEY_COLUMNS = 64, PATH_SIZE = 96 };

typedef struct reader {
	yaml_parser_t parser;
	fl_arena *arena;
	const char *file;
	const char *source;   /* behind a byte order mark */
	size_t skipped;       /* bytes of that mark */
	size_t index, offset; /* cursor: the same spot in characters and in bytes */
	size_t nodes;
	fl_error *err;
} reader;

static fl_status out_of_memory(fl_error *err) {
	return fl_fail(err, FL_E_MEMORY, "out of memory while reading a file");
}

/* ---- the text itself ----------------------------------------------------------------------------------------- */

static size_t sequence_length(unsigned char lead) {
	return lead < 0x80 ? 1 : lead < 0xe0 ? 2 : lead < 0xf0 ? 3 : 4;
}

static bool is_forbidden(uint32_t code) {
	if (code == '\t' || code == '\n' || code == '\r')
		return false;
	bool control = code < 0x20 || (code >= 0x7f && code <= 0x9f);
	bool breaks_lines = code == 0x2028 || code == 0x2029;
	bool turns_text = (code >= 0x202a && code <= 0x202e) || (code >= 0x2066 && code <= 0x2069);
	return control || breaks_lines || turns_text || code == 0xfeff || code == 0xfffe || code == 0xffff;
}

/* Refuses what is not clean UTF-8, at its line and column. */
static fl_status check_characters(const char *text, size_t length, const char *file, fl_error *err) {
	fl_place place = {file, 1, 1, NULL};
	for (size_t at = 0; at < length;) {
		size_t width = sequence_length((unsigned char)text[at]);
		if (width > length - at || !fl_utf8_valid(text + at, width))
			return fl_fail_at(err, FL_E_SYNTAX, place, "byte 0x%02X is not UTF-8; save the file as UTF-8",
			                  (unsigned)(unsigned char)text[at]);
		const char *cursor = text + at;
		uint32_t code = fl_utf8_next(&cursor);
		if (is_forbidden(code))
			return fl_fail_at(err, FL_E_SYNTAX, place, "control character U+%04X; remove it", (unsigned)code);
		at += width;
		place.column++;
		if (code == '\n') {
			place.line++;
			place.column = 1;
		}
	}
	return FL_OK;
}

/* ---- marks and events ------------------------------------------------------------------------------------------ */

static size_t byte_at(reader *r, const yaml_mark_t *mark) {
	while (r->index < mark->index && r->source[r->offset] != '\0') {
		r->offset += sequence_length((unsigned char)r->source[r->offset]);
		r->index++;
	}
	while (r->index > mark->index) {
		do
			r->offset--;
		while (((unsigned char)r->source[r->offset] & 0xc0) == 0x80);
		r->index--;
	}
	return r->skipped + r->offset;
}

static fl_place place_of(const reader *r, const yaml_mark_t *mark) {
	return (fl_place){r->file, (int)mark->line + 1, (int)mark->column + 1, NULL};
}

/* What libyaml says, and what a person can do about it. */
static const struct {
	const char *theirs, *ours;
} sentences[] = {
    {"did not find expected key", "this line does not fit: look for wrong indentation, a missing colon or quote"},
    {"did not find expected '-' indicator",
     "this line does not fit the list above it: begin it with '- ' or indent it"},
    {"could not find expected ':'", "a field needs a colon and a space behind its name: 'name: value'"},
    {"mapping values are not allowed in this context",
     "a colon is not possible here: put text that has one in quotes, or mend the indentation"},
    {"found character that cannot start any token",
     "a value cannot begin with this character (a tab, @, % or backquote): indent with spaces, put text in quotes"},
    {"found a tab character that violates indentation", "indent with spaces, not with a tab"},
    {"found unexpected end of stream", "a quote is opened and not closed"},
    {"did not find expected ',' or '}'", "a comma or the closing } is missing"},
    {"did not find expected ',' or ']'", "a comma or the closing ] is missing"},
    {"did not find expected node content", "a value is missing here"},
    {"block sequence entries are not allowed in this context",
     "a list cannot begin here: put '- ' on a line of its own"},
    {"found unknown escape character", "unknown \\ sequence: use single quotes for text with a backslash"},
    {"did not find expected <document start>", "something stands behind the end of the file's content"},
    {"found duplicate %YAML directive", "directives are not used here; remove the line with %"},
};

static const char *plain_sentence(const char *problem) {
	for (size_t i = 0; i < sizeof sentences / sizeof sentences[0]; i++)
		if (strcmp(problem, sentences[i].theirs) == 0)
			return sentences[i].ours;
	return problem;
}

static fl_status syntax_error(reader *r) {
	const yaml_parser_t *parser = &r->parser;
	if (parser->error == YAML_MEMORY_ERROR)
		return out_of_memory(r->err);
	const char *problem = parser->problem ? parser->problem : "the text is not well formed";
	return fl_fail_at(r->err, FL_E_SYNTAX, place_of(r, &parser->problem_mark), "%s", plain_sentence(problem));
}

static fl_status next_event(reader *r, yaml_event_t *event) {
	return yaml_parser_parse(&r->parser, event) ? FL_OK : syntax_error(r);
}

/* ---- nodes ------------------------------------------------------------------------------------------------------- */

static fl_status read_node(reader *r, const yaml_event_t *event, const char *path, int depth, fl_node **out);

/* Parent's path and one step, cut where an error's field would be cut anyway. */
static const char *child_path(reader *r, const char *parent, const char *key, size_t index) {
	if (strlen(parent) + (key ? strlen(key) : 12) + 2 > PATH_SIZE)
		return parent;
	if (!key)
		return fl_arena_printf(r->arena, "%s[%zu]", parent, index);
	return parent[0] ? fl_arena_printf(r->arena, "%s.%s", parent, key) : fl_arena_strdup(r->arena, key);
}

static fl_status refuse_extras(reader *r, const yaml_event_t *event) {
	fl_place place = place_of(r, &event->start_mark);
	if (event->type == YAML_ALIAS_EVENT)
		return fl_fail_at(r->err, FL_E_SYNTAX, place,
		                  "'*' would repeat a value from elsewhere, which is not used here; write the value out");
	bool scalar = event->type == YAML_SCALAR_EVENT, list = event->type == YAML_SEQUENCE_START_EVENT;
	const yaml_char_t *anchor = scalar ? event->data.scalar.anchor
	                            : list ? event->data.sequence_start.anchor
	                                   : event->data.mapping_start.anchor;
	const yaml_char_t *tag = scalar ? event->data.scalar.tag
	                         : list ? event->data.sequence_start.tag
	                                : event->data.mapping_start.tag;
	if (anchor)
		return fl_fail_at(r->err, FL_E_SYNTAX, place, "'&' would name a value, which is not used here; remove it");
	if (tag)
		return fl_fail_at(r->err, FL_E_SYNTAX, place, "'!' would give a type, which is not used here; remove it");
	return FL_OK;
}

static fl_status new_node(reader *r, const yaml_event_t *event, const char *path, fl_node_kind kind, fl_node **out) {
	fl_node *node = fl_arena_alloc(r->arena, 1, sizeof *node);
	if (!node || !path)
		return out_of_memory(r->err);
	if (++r->nodes > MAX_NODES)
		return fl_fail_at(r->err, FL_E_SYNTAX, place_of(r, &event->start_mark),
		                  "more than %d values in one file; split the file", (int)MAX_NODES);
	node->kind = kind;
	node->path = path;
	node->file = r->file;
	node->line = (int)event->start_mark.line + 1;
	node->column = (int)event->start_mark.column + 1;
	node->start = byte_at(r, &event->start_mark);
	node->end = byte_at(r, &event->end_mark);
	*out = node;
	return FL_OK;
}

/* A block's end mark stands behind the blank lines and comments that follow; its content ends with its last item. */
static void close_node(reader *r, fl_node *node, const yaml_event_t *event, bool flow) {
	if (flow)
		node->end = byte_at(r, &event->end_mark);
	else if (node->count > 0)
		node->end = node->items[node->count - 1]->end;
}

static fl_status add_item(reader *r, fl_node *node, size_t *capacity, const char *key, const fl_node *item) {
	size_t keys_capacity = *capacity;
	const fl_node **items = fl_arena_grow(r->arena, (void *)node->items, node->count, capacity, sizeof *items);
	if (!items)
		return out_of_memory(r->err);
	node->items = items;
	if (node->kind == FL_NODE_MAP) {
		const char **keys = fl_arena_grow(r->arena, (void *)node->keys, node->count, &keys_capacity, sizeof *keys);
		if (!keys)
			return out_of_memory(r->err);
		node->keys = keys;
		node->keys[node->count] = key;
	}
	node->items[node->count++] = item;
	return FL_OK;
}

static fl_status read_list(reader *r, fl_node *node, bool flow, int depth) {
	size_t capacity = 0;
	for (;;) {
		yaml_event_t event;
		fl_status status = next_event(r, &event);
		if (status != FL_OK)
			return status;
		bool ended = event.type == YAML_SEQUENCE_END_EVENT;
		fl_node *item = NULL;
		if (ended)
			close_node(r, node, &event, flow);
		else
			status = read_node(r, &event, child_path(r, node->path, NULL, node->count + 1), depth + 1, &item);
		yaml_event_delete(&event);
		if (ended || status != FL_OK)
			return status;
		status = add_item(r, node, &capacity, NULL, item);
		if (status != FL_OK)
			return status;
	}
}

static fl_status check_key(reader *r, const fl_node *map, const yaml_event_t *event, const char *key) {
	fl_place place = place_of(r, &event->start_mark);
	if (strlen(key) != event->data.scalar.length || fl_text_has_control(key) || fl_utf8_columns(key) > MAX_KEY_COLUMNS)
		return fl_fail_at(r->err, FL_E_SYNTAX, place, "the name of a field is one line of at most %d characters",
		                  (int)MAX_KEY_COLUMNS);
	if (map->count >= MAX_KEYS)
		return fl_fail_at(r->err, FL_E_SYNTAX, place, "more than %d fields in one place", (int)MAX_KEYS);
	const fl_node *first = fl_node_get(map, key);
	if (!first)
		return FL_OK;
	place.field = first->path;
	return fl_fail_at(r->err, FL_E_SYNTAX, place, "\"%s\" stands here twice (first on line %d); keep one", key,
	                  first->key_line);
}

static fl_status read_key(reader *r, const fl_node *map, const yaml_event_t *event, const char **key) {
	if (event->type != YAML_SCALAR_EVENT && event->type != YAML_ALIAS_EVENT)
		return fl_fail_at(r->err, FL_E_SYNTAX, place_of(r, &event->start_mark),
		                  "the name of a field is a word, not a list or a group of fields");
	fl_status status = refuse_extras(r, event);
	if (status != FL_OK)
		return status;
	*key = fl_arena_strdup(r->arena, (const char *)event->data.scalar.value);
	return *key ? check_key(r, map, event, *key) : out_of_memory(r->err);
}

static fl_status read_field(reader *r, fl_node *map, size_t *capacity, const yaml_event_t *key_event, int depth) {
	const char *key = NULL;
	fl_status status = read_key(r, map, key_event, &key);
	if (status != FL_OK)
		return status;
	yaml_event_t event;
	status = next_event(r, &event);
	if (status != FL_OK)
		return status;
	fl_node *value = NULL;
	status = read_node(r, &event, child_path(r, map->path, key, 0), depth + 1, &value);
	yaml_event_delete(&event);
	if (status != FL_OK)
		return status;
	value->key_line = (int)key_event->start_mark.line + 1;
	value->key_column = (int)key_event->start_mark.column + 1;
	return add_item(r, map, capacity, key, value);
}

static fl_status read_map(reader *r, fl_node *node, bool flow, int depth) {
	size_t capacity = 0;
	for (;;) {
		yaml_event_t event;
		fl_status status = next_event(r, &event);
		if (status != FL_OK)
			return status;
		bool ended = event.type == YAML_MAPPING_END_EVENT;
		if (ended)
			close_node(r, node, &event, flow);
		else
			status = read_field(r, node, &capacity, &event, depth);
		yaml_event_delete(&event);
		if (ended || status != FL_OK)
			return status;
	}
}

/* A block of text ends with a line feed that nobody means. */
static size_t meant_length(const yaml_event_t *event) {
	size_t length = event->data.scalar.length;
	yaml_scalar_style_t style = event->data.scalar.style;
	if (style == YAML_LITERAL_SCALAR_STYLE || style == YAML_FOLDED_SCALAR_STYLE)
		while (length > 0 && event->data.scalar.value[length - 1] == '\n')
			length--;
	return length;
}

static fl_status read_scalar(reader *r, fl_node *node, const yaml_event_t *event) {
	size_t length = meant_length(event);
	node->text = fl_arena_strndup(r->arena, (const char *)event->data.scalar.value, length);
	node->quoted = event->data.scalar.style != YAML_PLAIN_SCALAR_STYLE;
	if (!node->text)
		return out_of_memory(r->err);
	if (strlen(node->text) != length)
		return fl_fail_at(r->err, FL_E_SYNTAX, fl_node_place(node), "a zero character cannot stand in a text");
	return FL_OK;
}

static fl_status read_node(reader *r, const yaml_event_t *event, const char *path, int depth, fl_node **out) {
	fl_status status = refuse_extras(r, event);
	if (status != FL_OK)
		return status;
	if (depth > MAX_DEPTH)
		return fl_fail_at(r->err, FL_E_SYNTAX, place_of(r, &event->start_mark), "nested more than %d levels deep",
		                  (int)MAX_DEPTH);
	fl_node_kind kind = event->type == YAML_SCALAR_EVENT           ? FL_NODE_SCALAR
	                    : event->type == YAML_SEQUENCE_START_EVENT ? FL_NODE_LIST
	                                                               : FL_NODE_MAP;
	status = new_node(r, event, path, kind, out);
	if (status != FL_OK)
		return status;
	switch (kind) {
	case FL_NODE_SCALAR:
		return read_scalar(r, *out, event);
	case FL_NODE_LIST:
		return read_list(r, *out, event->data.sequence_start.style == YAML_FLOW_SEQUENCE_STYLE, depth);
	case FL_NODE_MAP:
		return read_map(r, *out, event->data.mapping_start.style == YAML_FLOW_MAPPING_STYLE, depth);
	}
	return fl_fail(r->err, FL_E_INTERNAL, "a node of no kind");
}

/* ---- the document ------------------------------------------------------------------------------------------------ */

static fl_status expect_end(reader *r) {
	yaml_event_t event;
	for (;;) {
		fl_status status = next_event(r, &event);
		if (status != FL_OK)
			return status;
		yaml_event_type_t type = event.type;
		yaml_mark_t mark = event.start_mark;
		yaml_event_delete(&event);
		if (type == YAML_STREAM_END_EVENT)
			return FL_OK;
		if (type != YAML_DOCUMENT_END_EVENT)
			return fl_fail_at(r->err, FL_E_SYNTAX, place_of(r, &mark),
			                  "a second document begins here; keep one in a file");
	}
}

static fl_status read_document(reader *r, const fl_node **root) {
	for (;;) {
		yaml_event_t event;
		fl_status status = next_event(r, &event);
		if (status != FL_OK)
			return status;
		if (event.type == YAML_STREAM_START_EVENT || event.type == YAML_DOCUMENT_START_EVENT) {
			yaml_event_delete(&event);
			continue;
		}
		fl_node *node = NULL;
		if (event.type == YAML_STREAM_END_EVENT)
			status = fl_fail_at(r->err, FL_E_SYNTAX, (fl_place){r->file, 1, 1, NULL}, "the file is empty");
		else
			status = read_node(r, &event, "", 1, &node);
		yaml_event_delete(&event);
		if (status == FL_OK)
			status = expect_end(r);
		if (status == FL_OK)
			*root = node;
		return status;
	}
}

static fl_status check_text(const char *text, size_t length, const char *file, fl_error *err) {
	if (length > FL_DOCUMENT_MAX)
		return fl_fail_at(err, FL_E_SYNTAX, (fl_place){file, 0, 0, NULL}, "larger than %d MiB; split the file",
		                  (int)(FL_DOCUMENT_MAX / 1024 / 1024));
	return check_characters(text, length, file, err);
}

fl_status fl_document_parse(fl_arena *arena, const char *text, const char *file, const fl_node **root, fl_error *err) {
	size_t skipped = strncmp(text, "\xef\xbb\xbf", 3) == 0 ? 3 : 0;
	size_t length = strlen(text) - skipped;
	reader r = {.arena = arena, .skipped = skipped, .err = err};
	r.file = fl_arena_strdup(arena, file);
	r.source = fl_arena_strdup(arena, text + skipped);
	if (!r.file || !r.source)
		return out_of_memory(err);
	fl_status status = check_text(r.source, length, r.file, err);
	if (status != FL_OK)
		return status;
	if (!yaml_parser_initialize(&r.parser))
		return out_of_memory(err);
	yaml_parser_set_encoding(&r.parser, YAML_UTF8_ENCODING);
	yaml_parser_set_input_string(&r.parser, (const unsigned char *)r.source, length);
	status = read_document(&r, root);
	yaml_parser_delete(&r.parser);
	return status;
}

fl_status fl_document_load(fl_arena *arena, const fl_io *io, const char *path, const char **text, fl_error *err) {
	char *bytes = NULL;
	size_t length = 0;
	fl_status status = fl_file_read(io, path, FL_DOCUMENT_MAX, arena, &bytes, &length, err);
	if (status != FL_OK)
		return status;
	if (memchr(bytes, '\0', length))
		return fl_fail_at(err, FL_E_SYNTAX, (fl_place){path, 0, 0, NULL},
		                  "the file has a zero byte: it is no text; save it as UTF-8");
	*text = bytes;
	return FL_OK;
}

char *fl_document_excerpt(fl_arena *arena, const char *source, const fl_node *node) {
	fl_text text = {0};
	fl_text_printf(&text, "%*s", node->column - 1, "");
	fl_text_append(&text, source + node->start, node->end - node->start);
	if (text.length == 0 || text.data[text.length - 1] != '\n')
		fl_text_add(&text, "\n");
	char *copy = text.failed ? NULL : fl_arena_strdup(arena, text.data);
	fl_text_free(&text);
	return copy;
}

fl_place fl_node_place(const fl_node *node) {
	return (fl_place){node->file, node->line, node->column, node->path};
}

const fl_node *fl_node_get(const fl_node *map, const char *key) {
	if (map->kind != FL_NODE_MAP)
		return NULL;
	for (size_t i = 0; i < map->count; i++)
		if (strcmp(map->keys[i], key) == 0)
			return map->items[i];
	return NULL;
}
