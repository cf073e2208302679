/* bytes.h - big-endian numbers, as TrueType has them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CERTIFICATE_BYTES_H
#define FOUNDLEFT_CERTIFICATE_BYTES_H

#include <stdint.h>

static inline unsigned fl_get16(const unsigned char *at) {
	return (unsigned)at[0] << 8 | at[1];
}

static inline uint32_t fl_get32(const unsigned char *at) {
	return (uint32_t)fl_get16(at) << 16 | fl_get16(at + 2);
}

static inline void fl_put16(unsigned char *at, unsigned value) {
	at[0] = (unsigned char)(value >> 8);
	at[1] = (unsigned char)value;
}

static inline void fl_put32(unsigned char *at, uint32_t value) {
	fl_put16(at, value >> 16);
	fl_put16(at + 2, value & 0xffff);
}

#endif
