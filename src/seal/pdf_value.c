/* pdf_value.c - PDF values from bytes (ISO 32000-1, 7.2 and 7.3), bounded in depth and number.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "pdf.h"

#include <string.h>

#define DEPTH_MOST 24
#define VALUES_MOST ((size_t)400000)
#define NAME_MOST 127 /* ISO 32000-1, annex C */

static bool is_space(unsigned char c) {
	return c == ' ' || c == '\n' || c == '\r' || c == '\t' || c == '\f' || c == '\0';
}

static bool is_delimiter(unsigned char c) {
	return c == '(' || c == ')' || c == '<' || c == '>' || c == '[' || c == ']' || c == '{' || c == '}' || c == '/' ||
	       c == '%';
}

static bool is_regular(unsigned char c) {
	return !is_space(c) && !is_delimiter(c);
}

static int hex_digit(unsigned char c) {
	if (c >= '0' && c <= '9')
		return c - '0';
	if (c >= 'a' && c <= 'f')
		return c - 'a' + 10;
	if (c >= 'A' && c <= 'F')
		return c - 'A' + 10;
	return -1;
}

size_t fl_pdf_skip(const fl_pdf *pdf, size_t at, size_t limit) {
	while (at < limit) {
		if (pdf->bytes[at] == '%')
			while (at < limit && pdf->bytes[at] != '\n' && pdf->bytes[at] != '\r')
				at++;
		else if (is_space(pdf->bytes[at]))
			at++;
		else
			break;
	}
	return at;
}

bool fl_pdf_word(const fl_pdf *pdf, size_t *at, size_t limit, const char *word) {
	size_t length = strlen(word);
	if (*at > limit || limit - *at < length || memcmp(pdf->bytes + *at, word, length) != 0)
		return false;
	if (*at + length < limit && is_regular(pdf->bytes[*at + length]) && is_regular((unsigned char)word[length - 1]))
		return false;
	*at += length;
	return true;
}

bool fl_pdf_digits(const fl_pdf *pdf, size_t *at, size_t limit, size_t digits, uint64_t *out) {
	size_t from = *at, here = from;
	uint64_t value = 0;
	while (here < limit && pdf->bytes[here] >= '0' && pdf->bytes[here] <= '9') {
		if (here - from == digits || digits > 18)
			return false;
		value = value * 10 + (uint64_t)(pdf->bytes[here++] - '0');
	}
	if (here == from)
		return false;
	*at = here;
	*out = value;
	return true;
}

/* ---- scalars ------------------------------------------------------------------------------------------------- */

typedef struct fl_pdf_reader {
	fl_pdf *pdf;
	size_t at, limit;
	int depth;
} fl_pdf_reader;

static fl_status refuse(const fl_pdf_reader *reader, const char *what) {
	return fl_pdf_refuse(reader->pdf, reader->at, what);
}

static int peek(const fl_pdf_reader *reader, size_t ahead) {
	return reader->limit - reader->at > ahead ? reader->pdf->bytes[reader->at + ahead] : -1;
}

static fl_status read_number(fl_pdf_reader *reader, fl_pdf_value *out) {
	bool negative = peek(reader, 0) == '-', point = false;
	double value = 0, scale = 1;
	size_t digits = 0;
	if (negative || peek(reader, 0) == '+')
		reader->at++;
	for (; peek(reader, 0) >= 0 && is_regular((unsigned char)peek(reader, 0)); reader->at++) {
		int c = peek(reader, 0);
		if (c == '.' && !point) {
			point = true;
			continue;
		}
		if (c < '0' || c > '9' || ++digits > 15)
			return refuse(reader, "holds a number that cannot be read");
		value = value * 10 + (c - '0');
		scale *= point ? 10 : 1;
	}
	if (digits == 0)
		return refuse(reader, "holds a number without digits");
	out->kind = point ? FL_PDF_REAL : FL_PDF_INTEGER;
	out->number = (negative ? -value : value) / scale;
	out->whole = point ? 0 : (int64_t)out->number;
	return FL_OK;
}

/* "12 0 R" where an integer stands: true, and passed, if it is a reference. */
static bool read_reference(fl_pdf_reader *reader, fl_pdf_value *out) {
	size_t at = reader->at;
	uint64_t number, generation;
	if (!fl_pdf_digits(reader->pdf, &at, reader->limit, 10, &number) || at >= reader->limit ||
	    !is_space(reader->pdf->bytes[at]))
		return false;
	at = fl_pdf_skip(reader->pdf, at, reader->limit);
	if (!fl_pdf_digits(reader->pdf, &at, reader->limit, 5, &generation) || at >= reader->limit ||
	    !is_space(reader->pdf->bytes[at]))
		return false;
	at = fl_pdf_skip(reader->pdf, at, reader->limit);
	if (!fl_pdf_word(reader->pdf, &at, reader->limit, "R") || number > FL_PDF_OBJECTS_MOST || generation != 0)
		return false;
	reader->at = at;
	out->kind = FL_PDF_REFERENCE;
	out->whole = (int64_t)number;
	return true;
}

static fl_status read_name(fl_pdf_reader *reader, fl_pdf_value *out) {
	char name[NAME_MOST + 1];
	size_t length = 0;
	for (reader->at++; peek(reader, 0) >= 0 && is_regular((unsigned char)peek(reader, 0)); reader->at++) {
		int c = peek(reader, 0);
		if (c == '#') {
			int high = peek(reader, 1) < 0 ? -1 : hex_digit((unsigned char)peek(reader, 1));
			int low = peek(reader, 2) < 0 ? -1 : hex_digit((unsigned char)peek(reader, 2));
			if (high < 0 || low < 0 || (high == 0 && low == 0))
				return refuse(reader, "holds a name that cannot be read");
			c = high * 16 + low;
			reader->at += 2;
		}
		if (length == NAME_MOST)
			return refuse(reader, "holds a name that is too long");
		name[length++] = (char)c;
	}
	out->kind = FL_PDF_NAME;
	out->text = fl_arena_strndup(reader->pdf->arena, name, length);
	out->length = length;
	return out->text ? FL_OK : fl_fail(reader->pdf->err, FL_E_MEMORY, "out of memory while reading a PDF");
}

static fl_status keep_string(fl_pdf_reader *reader, const char *bytes, size_t length, fl_pdf_value *out) {
	char *copy = fl_arena_alloc(reader->pdf->arena, length + 1, 1);
	if (!copy)
		return fl_fail(reader->pdf->err, FL_E_MEMORY, "out of memory while reading a PDF");
	if (length > 0)
		memcpy(copy, bytes, length);
	out->kind = FL_PDF_STRING;
	out->text = copy;
	out->length = length;
	return FL_OK;
}

/* Where the parenthesis closes; the limit if it does not. */
static size_t string_end(const fl_pdf_reader *reader) {
	int open = 0;
	for (size_t at = reader->at; at < reader->limit; at++) {
		unsigned char c = reader->pdf->bytes[at];
		if (c == '\\')
			at++;
		else if (c == '(')
			open++;
		else if (c == ')' && --open == 0)
			return at;
	}
	return reader->limit;
}

/* The character behind a backslash; passes further octal digits. */
static int unescape(const unsigned char *bytes, size_t *at, size_t end) {
	static const char from[] = "nrtbf", to[] = "\n\r\t\b\f";
	unsigned char c = bytes[*at];
	const char *letter = c ? strchr(from, c) : NULL;
	if (letter)
		return to[letter - from];
	if (c < '0' || c > '7')
		return c;
	int value = c - '0';
	for (int i = 0; i < 2 && *at + 1 < end && bytes[*at + 1] >= '0' && bytes[*at + 1] <= '7'; i++)
		value = value * 8 + (bytes[++*at] - '0');
	return value & 255;
}

static fl_status read_string(fl_pdf_reader *reader, fl_pdf_value *out) {
	size_t end = string_end(reader);
	if (end == reader->limit)
		return refuse(reader, "holds a text that does not end");
	char *text = fl_arena_alloc(reader->pdf->arena, end - reader->at, 1);
	if (!text)
		return fl_fail(reader->pdf->err, FL_E_MEMORY, "out of memory while reading a PDF");
	size_t length = 0;
	for (size_t at = reader->at + 1; at < end; at++) {
		int c = reader->pdf->bytes[at];
		if (c == '\\' && ++at < end) {
			if (reader->pdf->bytes[at] == '\n')
				continue;
			c = unescape(reader->pdf->bytes, &at, end);
		}
		text[length++] = (char)c;
	}
	reader->at = end + 1;
	return keep_string(reader, text, length, out);
}

static fl_status read_hex(fl_pdf_reader *reader, fl_pdf_value *out) {
	const unsigned char *from = reader->pdf->bytes + reader->at + 1;
	const unsigned char *close = memchr(from, '>', reader->limit - reader->at - 1);
	if (!close)
		return refuse(reader, "holds a hexadecimal text that does not end");
	char *text = fl_arena_alloc(reader->pdf->arena, (size_t)(close - from) / 2 + 1, 1);
	if (!text)
		return fl_fail(reader->pdf->err, FL_E_MEMORY, "out of memory while reading a PDF");
	size_t digits = 0;
	for (const unsigned char *at = from; at < close; at++) {
		int digit = hex_digit(*at);
		if (digit < 0 && !is_space(*at))
			return refuse(reader, "holds a hexadecimal text with something else in it");
		if (digit < 0)
			continue;
		text[digits / 2] = (char)(digits % 2 ? (unsigned char)text[digits / 2] | digit : digit << 4);
		digits++;
	}
	reader->at = (size_t)(close - reader->pdf->bytes) + 1;
	out->hex = true;
	return keep_string(reader, text, (digits + 1) / 2, out);
}

/* ---- containers ---------------------------------------------------------------------------------------------- */

static fl_status read_value(fl_pdf_reader *reader, fl_pdf_value *out);

/* Values up to the closing word into out->items. */
static fl_status read_items(fl_pdf_reader *reader, const char *close, fl_pdf_value *out) {
	size_t capacity = 0;
	if (++reader->depth > DEPTH_MOST)
		return refuse(reader, "nests its values too deeply");
	for (;;) {
		reader->at = fl_pdf_skip(reader->pdf, reader->at, reader->limit);
		if (fl_pdf_word(reader->pdf, &reader->at, reader->limit, close))
			break;
		fl_pdf_value *items = fl_arena_grow(reader->pdf->arena, out->items, out->count, &capacity, sizeof *items);
		if (!items)
			return fl_fail(reader->pdf->err, FL_E_MEMORY, "out of memory while reading a PDF");
		out->items = items;
		fl_status status = read_value(reader, &items[out->count]);
		if (status != FL_OK)
			return status;
		out->count++;
	}
	reader->depth--;
	return FL_OK;
}

/* Keys are names, each once: where two readers could take different values for one key, nobody knows what is signed. */
static fl_status check_keys(const fl_pdf_reader *reader, const fl_pdf_value *dictionary) {
	if (dictionary->count % 2 != 0 || dictionary->count > 512)
		return refuse(reader, "holds a dictionary with a key but no value, or with too many");
	for (size_t i = 0; i < dictionary->count; i += 2) {
		const fl_pdf_value *key = &dictionary->items[i];
		if (key->kind != FL_PDF_NAME)
			return refuse(reader, "holds a dictionary whose key is no name");
		for (size_t k = 0; k < i; k += 2)
			if (key->length == dictionary->items[k].length &&
			    memcmp(key->text, dictionary->items[k].text, key->length) == 0)
				return refuse(reader, "holds a dictionary with the same key twice");
	}
	return FL_OK;
}

static fl_status read_dictionary(fl_pdf_reader *reader, fl_pdf_value *out) {
	reader->at += 2;
	out->kind = FL_PDF_DICTIONARY;
	fl_status status = read_items(reader, ">>", out);
	return status == FL_OK ? check_keys(reader, out) : status;
}

static fl_status read_array(fl_pdf_reader *reader, fl_pdf_value *out) {
	reader->at++;
	out->kind = FL_PDF_ARRAY;
	return read_items(reader, "]", out);
}

static fl_status read_keyword(fl_pdf_reader *reader, fl_pdf_value *out) {
	out->kind = FL_PDF_BOOLEAN;
	out->whole = 1;
	if (fl_pdf_word(reader->pdf, &reader->at, reader->limit, "true"))
		return FL_OK;
	out->whole = 0;
	if (fl_pdf_word(reader->pdf, &reader->at, reader->limit, "false"))
		return FL_OK;
	out->kind = FL_PDF_NULL;
	if (fl_pdf_word(reader->pdf, &reader->at, reader->limit, "null"))
		return FL_OK;
	return refuse(reader, "holds something that is no value");
}

static fl_status read_by_first(fl_pdf_reader *reader, fl_pdf_value *out) {
	int c = peek(reader, 0);
	if (c == '/')
		return read_name(reader, out);
	if (c == '(')
		return read_string(reader, out);
	if (c == '<')
		return peek(reader, 1) == '<' ? read_dictionary(reader, out) : read_hex(reader, out);
	if (c == '[')
		return read_array(reader, out);
	if (c >= '0' && c <= '9' && read_reference(reader, out))
		return FL_OK;
	if ((c >= '0' && c <= '9') || c == '-' || c == '+' || c == '.')
		return read_number(reader, out);
	return read_keyword(reader, out);
}

static fl_status read_value(fl_pdf_reader *reader, fl_pdf_value *out) {
	*out = (fl_pdf_value){0};
	reader->at = fl_pdf_skip(reader->pdf, reader->at, reader->limit);
	if (++reader->pdf->value_count > VALUES_MOST)
		return refuse(reader, "holds more values than such a file can need");
	out->begin = reader->at;
	fl_status status = read_by_first(reader, out);
	out->end = reader->at;
	return status;
}

fl_status fl_pdf_read_value(fl_pdf *pdf, size_t at, size_t limit, fl_pdf_value *out, size_t *after) {
	fl_pdf_reader reader = {.pdf = pdf, .at = at, .limit = limit};
	fl_status status = read_value(&reader, out);
	*after = reader.at;
	return status;
}

/* ---- looking at values --------------------------------------------------------------------------------------- */

const fl_pdf_value *fl_pdf_get(const fl_pdf_value *dictionary, const char *key) {
	if (!dictionary || dictionary->kind != FL_PDF_DICTIONARY)
		return NULL;
	for (size_t i = 0; i < dictionary->count; i += 2)
		if (fl_pdf_is_name(&dictionary->items[i], key))
			return &dictionary->items[i + 1];
	return NULL;
}

bool fl_pdf_is_name(const fl_pdf_value *value, const char *name) {
	return value && value->kind == FL_PDF_NAME && value->length == strlen(name) &&
	       memcmp(value->text, name, value->length) == 0;
}

bool fl_pdf_equal(const fl_pdf_value *a, const fl_pdf_value *b) {
	if (a->kind != b->kind || a->whole != b->whole || a->number < b->number || a->number > b->number ||
	    a->length != b->length || a->count != b->count)
		return false;
	if (a->length > 0 && memcmp(a->text, b->text, a->length) != 0)
		return false;
	for (size_t i = 0; i < a->count; i++)
		if (!fl_pdf_equal(&a->items[i], &b->items[i]))
			return false;
	return true;
}
