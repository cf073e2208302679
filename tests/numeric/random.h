/* tests/numeric/random.h - a small seeded generator, so that a failing case can be run again (splitmix64).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_RANDOM_H
#define FOUNDLEFT_TEST_RANDOM_H

#include <stdint.h>

static inline double uniform(uint64_t *seed) {
	uint64_t z = (*seed += 0x9e3779b97f4a7c15u);
	z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
	z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
	return (double)((z ^ (z >> 31)) >> 11) * 0x1p-53;
}

/* Near enough to a normal deviate for a test: the sum of twelve uniforms less six. */
static inline double roughly_normal(uint64_t *seed) {
	double sum = -6.0;
	for (int i = 0; i < 12; i++)
		sum += uniform(seed);
	return sum;
}

#endif
