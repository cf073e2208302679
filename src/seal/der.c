/* der.c - strict DER elements (ITU-T X.690, 8.1 and 10.1). Tags above 30 do not occur in a signature and are refused.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "der.h"

#include <string.h>

/* Length octets from at[left]: how many there are, 0 where they are not in the shortest form. */
static size_t read_length(const unsigned char *at, size_t left, size_t *length) {
	if (left == 0)
		return 0;
	if (at[0] < 0x80) {
		*length = at[0];
		return 1;
	}
	size_t count = at[0] & 0x7f;
	if (count == 0 || count > 4 || count >= left || at[1] == 0)
		return 0;
	*length = 0;
	for (size_t i = 1; i <= count; i++)
		*length = *length << 8 | at[i];
	return *length < 0x80 ? 0 : count + 1;
}

bool fl_der_next(fl_der *der, fl_element *out) {
	size_t length;
	if (der->left < 2 || (der->at[0] & 0x1f) == 0x1f)
		return false;
	size_t octets = read_length(der->at + 1, der->left - 1, &length);
	if (octets == 0 || length > der->left - 1 - octets)
		return false;
	*out = (fl_element){.tag = der->at[0],
	                    .whole = der->at,
	                    .whole_length = 1 + octets + length,
	                    .body = der->at + 1 + octets,
	                    .length = length};
	der->at += out->whole_length;
	der->left -= out->whole_length;
	return true;
}

bool fl_der_take(fl_der *der, unsigned tag, fl_element *out) {
	return der->left > 0 && der->at[0] == tag && fl_der_next(der, out);
}

bool fl_der_skip(fl_der *der, const void *bytes, size_t length) {
	if (der->left < length || memcmp(der->at, bytes, length) != 0)
		return false;
	der->at += length;
	der->left -= length;
	return true;
}

fl_der fl_der_inside(fl_element element) {
	return (fl_der){element.body, element.length};
}

bool fl_element_is(fl_element element, const void *bytes, size_t length) {
	return element.whole_length == length && memcmp(element.whole, bytes, length) == 0;
}

void fl_der_add(fl_text *out, unsigned tag, const void *body, size_t length) {
	unsigned char head[2 + sizeof length];
	size_t used = 0;
	head[used++] = (unsigned char)tag;
	if (length < 0x80) {
		head[used++] = (unsigned char)length;
	} else {
		unsigned count = 0;
		for (size_t rest = length; rest; rest >>= 8)
			count++;
		head[used++] = (unsigned char)(0x80 | count);
		while (count--)
			head[used++] = (unsigned char)(length >> 8 * count);
	}
	fl_text_append(out, (const char *)head, used);
	if (length)
		fl_text_append(out, body, length);
}

void fl_der_wrap(fl_text *out, unsigned tag, fl_text *body) {
	if (body->failed)
		out->failed = true;
	fl_der_add(out, tag, body->data, body->length);
	fl_text_clear(body);
}
