/* der.h - strict DER (X.690): a reader that takes only definite lengths in their shortest form, and a writer.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_SEAL_DER_H
#define FOUNDLEFT_SEAL_DER_H

#include "foundleft/base.h"

/* Tags of one byte. */
enum {
	FL_DER_INTEGER = 0x02,
	FL_DER_BIT_STRING = 0x03,
	FL_DER_OCTET_STRING = 0x04,
	FL_DER_OID = 0x06,
	FL_DER_UTF8 = 0x0c,
	FL_DER_UTC_TIME = 0x17,
	FL_DER_GENERAL_TIME = 0x18,
	FL_DER_SEQUENCE = 0x30,
	FL_DER_SET = 0x31,
	FL_DER_CONTEXT_0 = 0xa0,
	FL_DER_CONTEXT_1 = 0xa1
};

/* What is left to read. */
typedef struct fl_der {
	const unsigned char *at;
	size_t left;
} fl_der;

/* One element: all of it, and its content. Borrowed. */
typedef struct fl_element {
	unsigned tag;
	const unsigned char *whole;
	size_t whole_length;
	const unsigned char *body;
	size_t length;
} fl_element;

/* Reads the next element; false where nothing is left or it is not strict DER. */
bool fl_der_next(fl_der *der, fl_element *out);
/* The same, and false where its tag is another; the cursor then stays. */
bool fl_der_take(fl_der *der, unsigned tag, fl_element *out);
/* True if the next element is exactly these bytes, which are then passed. */
bool fl_der_skip(fl_der *der, const void *bytes, size_t length);
fl_der fl_der_inside(fl_element element);
/* True if the element is whole[length] exactly. */
bool fl_element_is(fl_element element, const void *bytes, size_t length);

/* Appends an element with that content. */
void fl_der_add(fl_text *out, unsigned tag, const void *body, size_t length);
/* The same with the content of another text, which is emptied. */
void fl_der_wrap(fl_text *out, unsigned tag, fl_text *body);

#endif
