/* utf8.c - checking and walking UTF-8 text, and what in it is refused in names.
 * Well-formedness: The Unicode Standard 15.0, table 3-7.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "utf8.h"

#include <string.h>

#include "foundleft/base.h"

#define REPLACEMENT 0xFFFDu

/* Length that a lead byte announces; 0 for a byte that cannot lead. */
static size_t announced_length(unsigned char lead) {
	if (lead < 0x80)
		return 1;
	if (lead >= 0xC2 && lead <= 0xDF)
		return 2;
	if (lead >= 0xE0 && lead <= 0xEF)
		return 3;
	if (lead >= 0xF0 && lead <= 0xF4)
		return 4;
	return 0;
}

/* The second byte carries the limits against overlong forms, surrogates and values above U+10FFFF. */
static bool second_fits(unsigned char lead, unsigned char second) {
	unsigned char low = lead == 0xE0 ? 0xA0 : lead == 0xF0 ? 0x90 : 0x80;
	unsigned char high = lead == 0xED ? 0x9F : lead == 0xF4 ? 0x8F : 0xBF;
	return second >= low && second <= high;
}

/* Length of the well-formed sequence at bytes (at most `available`); 0 if there is none. */
static size_t sequence_length(const unsigned char *bytes, size_t available) {
	size_t length = available ? announced_length(bytes[0]) : 0;
	if (length == 0 || length > available)
		return 0;
	if (length > 1 && !second_fits(bytes[0], bytes[1]))
		return 0;
	for (size_t i = 2; i < length; i++)
		if ((bytes[i] & 0xC0) != 0x80)
			return 0;
	return length;
}

/* How many bytes from here on are surely ASCII, eight at a time: nearly all text is. */
static size_t ascii_length(const unsigned char *bytes, size_t length) {
	size_t at = 0;
	for (uint64_t eight; at + sizeof eight <= length; at += sizeof eight) {
		memcpy(&eight, bytes + at, sizeof eight);
		if (eight & UINT64_C(0x8080808080808080))
			break;
	}
	return at;
}

bool fl_utf8_valid(const char *bytes, size_t length) {
	const unsigned char *at = (const unsigned char *)bytes;
	while (length > 0) {
		size_t plain = ascii_length(at, length), step = plain > 0 ? plain : sequence_length(at, length);
		if (step == 0)
			return false;
		at += step;
		length -= step;
	}
	return true;
}

uint32_t fl_utf8_next(const char **cursor) {
	const unsigned char *at = (const unsigned char *)*cursor;
	size_t length = sequence_length(at, strnlen(*cursor, 4));
	if (length == 0) { /* a zero byte, or text that is not UTF-8 after all: one byte on, never past the end */
		*cursor += 1;
		return at[0] ? REPLACEMENT : 0;
	}
	*cursor += length;
	uint32_t code = length == 1 ? at[0] : at[0] & (0x7Fu >> length);
	for (size_t i = 1; i < length; i++)
		code = code << 6 | (at[i] & 0x3Fu);
	return code;
}

/* Counted on the bytes, as tables ask this of every cell again and again: each code point has one byte that does not
 * continue another, and U+0300..U+036F are CC 80..BF and CD 80..AF. */
int fl_utf8_columns(const char *text) {
	int columns = 0;
	for (const unsigned char *byte = (const unsigned char *)text; *byte; byte++) {
		bool combines = *byte == 0xCC || (*byte == 0xCD && byte[1] <= 0xAF);
		columns += (*byte & 0xC0) != 0x80 && !combines;
	}
	return columns;
}

bool fl_utf8_is_control(uint32_t code) {
	return code < 0x20 || (code >= 0x7F && code <= 0x9F) || (code >= 0x2028 && code <= 0x202E) ||
	       (code >= 0x2066 && code <= 0x2069);
}

bool fl_text_has_control(const char *text) {
	while (*text)
		if (fl_utf8_is_control(fl_utf8_next(&text)))
			return true;
	return false;
}

void fl_utf8_drop_torn_end(char *text) {
	size_t length = strlen(text);
	size_t tail = 0; /* bytes from the last lead byte to the end */
	while (tail < length && tail < 4) {
		tail++;
		if (((unsigned char)text[length - tail] & 0xC0) != 0x80)
			break;
	}
	if (tail > 0 && announced_length((unsigned char)text[length - tail]) > tail)
		text[length - tail] = '\0';
}

size_t fl_utf8_space_length(const char *text) {
	if (*text && strchr(" \t\n\r\v\f", *text))
		return 1;
	if (strncmp(text, "\u00A0", 2) == 0)
		return 2;
	return strncmp(text, "\u202F", 3) == 0 ? 3 : 0;
}

bool fl_text_trim(const char *text, char *out, size_t size) {
	size_t space;
	while ((space = fl_utf8_space_length(text)) > 0)
		text += space;
	size_t length = 0; /* up to the last character that is not white space */
	for (const char *at = text; *at;) {
		space = fl_utf8_space_length(at);
		at += space ? space : 1;
		if (!space)
			length = (size_t)(at - text);
	}
	if (length >= size)
		return false;
	memcpy(out, text, length);
	out[length] = '\0';
	return true;
}
