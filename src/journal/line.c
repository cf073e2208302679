/* line.c - one event as one line: fields between tabs, escapes, the two digests. The format stands in journal.c.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "line.h"
#include "words.h"

#include <string.h>

static const char prev_mark[] = "\tprev=", self_mark[] = "\tself=";
#define HEX (FL_DIGEST_HEX_SIZE - 1)

/* ---- writing ---- */

static void add_escaped(fl_text *out, const char *value) {
	for (;;) {
		size_t plain = strcspn(value, "\\\t\n\r");
		fl_text_append(out, value, plain);
		value += plain;
		if (!*value)
			return;
		fl_text_add(out, *value == '\\' ? "\\\\" : *value == '\t' ? "\\t" : *value == '\n' ? "\\n" : "\\r");
		value++;
	}
}

fl_status fl_line_write(fl_hasher *hasher, const fl_event *event, const char *prev, fl_text *out,
                        char self[FL_DIGEST_HEX_SIZE], fl_error *err) {
	char utc[FL_UTC_SIZE];
	size_t start = out->length;
	fl_text_printf(out, "%d\t%s\t%s", event->sequence, fl_utc_format(event->at, utc), fl_verb_word(event->verb));
	for (int f = 0; f < FL_FIELD_COUNT; f++) {
		if (!event->fields[f])
			continue;
		fl_text_printf(out, "\t%s=", fl_field_word((fl_field)f));
		add_escaped(out, event->fields[f]);
	}
	fl_text_printf(out, "%s%s", prev_mark, prev);
	if (out->failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a line of the journal");
	fl_status status = fl_seal_digest(hasher, out->data + start, out->length - start, self, err);
	if (status < 0)
		return status;
	fl_text_printf(out, "%s%s\n", self_mark, self);
	return out->failed ? fl_fail(err, FL_E_MEMORY, "out of memory for a line of the journal") : FL_OK;
}

/* ---- reading ---- */

/* Is tail[] the mark and then HEX digits of lower case? */
static bool is_digest(const char *tail, const char *mark) {
	size_t length = strlen(mark);
	return memcmp(tail, mark, length) == 0 && strspn(tail + length, "0123456789abcdef") >= HEX;
}

static fl_status check_chain(fl_hasher *hasher, const char *line, size_t length, const char *prev,
                             char self[FL_DIGEST_HEX_SIZE], fl_error *err) {
	const size_t tail = sizeof self_mark - 1 + HEX;
	if (length < 2 * tail || !is_digest(line + length - tail, self_mark) ||
	    !is_digest(line + length - 2 * tail, prev_mark))
		return fl_fail(err, FL_E_TAMPERED, "the line does not end in its two digests");
	fl_status status = fl_seal_digest(hasher, line, length - tail, self, err);
	if (status < 0)
		return status;
	if (memcmp(line + length - HEX, self, HEX) != 0)
		return fl_fail(err, FL_E_TAMPERED, "the line is not the one that was written: its digest does not fit");
	if (memcmp(line + length - tail - HEX, prev, HEX) != 0)
		return fl_fail(err, FL_E_TAMPERED, "the line does not follow the one before it: a line was removed or moved");
	return FL_OK;
}

/* Copies value[length] without its escapes; NULL if an escape is wrong or memory is out. */
static char *unescape(fl_arena *arena, const char *value, size_t length) {
	char *copy = fl_arena_alloc(arena, length + 1, 1), *to = copy;
	for (size_t i = 0; copy && i < length; i++) {
		if (value[i] != '\\') {
			*to++ = value[i];
			continue;
		}
		const char *known = "\\tnr", *found = ++i < length && value[i] ? strchr(known, value[i]) : NULL;
		if (!found)
			return NULL;
		*to++ = "\\\t\n\r"[found - known];
	}
	return copy;
}

/* The next part up to a tab or the end; moves *at behind the tab. */
static size_t next_part(const char **at, const char *end, const char **part) {
	const char *tab = memchr(*at, '\t', (size_t)(end - *at));
	*part = *at;
	*at = tab ? tab + 1 : end;
	return (size_t)((tab ? tab : end) - *part);
}

static fl_status read_field(const char *part, size_t length, fl_arena *arena, fl_event *event, int *last,
                            fl_error *err) {
	const char *equals = memchr(part, '=', length);
	size_t word = equals ? (size_t)(equals - part) : 0;
	fl_field f = equals ? fl_field_find(*last, part, word) : FL_FIELD_COUNT;
	if (f == FL_FIELD_COUNT)
		return fl_fail(err, FL_E_SYNTAX, "unknown field \"%.*s\"", (int)(length > 40 ? 40 : length), part);
	if ((int)f <= *last)
		return fl_fail(err, FL_E_SYNTAX, "the field \"%s\" stands twice or out of order", fl_field_word(f));
	*last = (int)f;
	event->fields[f] = unescape(arena, equals + 1, length - word - 1);
	if (!event->fields[f])
		return fl_fail(err, FL_E_SYNTAX, "a wrong escape in the field \"%s\"", fl_field_word(f));
	return FL_OK;
}

static fl_status read_head(const char **at, const char *end, fl_event *event, fl_error *err) {
	const char *part;
	char text[FL_UTC_SIZE];
	size_t length = next_part(at, end, &part);
	if (length >= sizeof text)
		return fl_fail(err, FL_E_SYNTAX, "the sequence number is too long");
	memcpy(text, part, length);
	text[length] = '\0';
	event->sequence = fl_words_count(text);
	if (event->sequence == 0)
		return fl_fail(err, FL_E_SYNTAX, "the line does not begin with its sequence number");
	length = next_part(at, end, &part);
	if (length >= sizeof text)
		return fl_fail(err, FL_E_SYNTAX, "the time is too long");
	memcpy(text, part, length);
	text[length] = '\0';
	fl_status status = fl_utc_parse(text, &event->at, err);
	if (status < 0)
		return status;
	length = next_part(at, end, &part);
	event->verb = fl_verb_find(part, length);
	if (event->verb == FL_VERB_COUNT)
		return fl_fail(err, FL_E_SYNTAX, "unknown kind of entry \"%.*s\"", (int)(length > 40 ? 40 : length), part);
	return FL_OK;
}

fl_status fl_line_read(fl_hasher *hasher, const char *line, size_t length, const char *prev, fl_arena *arena,
                       fl_event *event, char self[FL_DIGEST_HEX_SIZE], fl_error *err) {
	fl_status status = check_chain(hasher, line, length, prev, self, err);
	if (status < 0)
		return status;
	if (memchr(line, '\0', length) || !fl_utf8_valid(line, length))
		return fl_fail(err, FL_E_SYNTAX, "the line is not UTF-8 text");
	*event = (fl_event){0};
	const char *at = line, *end = line + length - 2 * (sizeof self_mark - 1 + HEX);
	status = read_head(&at, end, event, err);
	int last = -1;
	while (status >= 0 && at < end) {
		const char *part;
		size_t size = next_part(&at, end, &part);
		status = read_field(part, size, arena, event, &last, err);
	}
	return status;
}
