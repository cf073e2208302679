/* numeric/generator.c - the generator of the trials: xoshiro256++ in lanes, and draws from the usual distributions.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Which part of the sequence a draw comes from: the period of 2^256 - 1 is cut into stretches. Lanes begin 2^192 steps
 * apart, and the blocks of a run within each lane 2^128. So no two lanes, blocks or threads can meet, and a block's
 * draws depend on the seed and its number alone.
 */
#include "kernels.h"

#include <math.h>

/* splitmix64: turns a seed, however plain, into well-mixed words. */
static uint64_t splitmix64(uint64_t *seed) {
	uint64_t z = (*seed += 0x9e3779b97f4a7c15u);
	z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
	z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
	return z ^ (z >> 31);
}

/* The authors' polynomials: 2^128 and 2^192 steps at once. */
static const uint64_t jump_128[4] = {0x180ec6d33cfd0abau, 0xd5a61266f0c9392cu, 0xa9582618e03fc9aau,
                                     0x39abdc4529b1661cu};
static const uint64_t jump_192[4] = {0x76e15d3efefdcbbfu, 0xc5004e441c522fb3u, 0x77710069854ee241u,
                                     0x39109bb02acbe635u};

static void step(fl_generator *g) {
	for (int lane = 0; lane < FL_LANES; lane++) {
		uint64_t t = g->s[1][lane] << 17;
		g->s[2][lane] ^= g->s[0][lane];
		g->s[3][lane] ^= g->s[1][lane];
		g->s[1][lane] ^= g->s[2][lane];
		g->s[0][lane] ^= g->s[3][lane];
		g->s[2][lane] ^= t;
		g->s[3][lane] = (g->s[3][lane] << 45) | (g->s[3][lane] >> 19);
	}
}

static void jump(fl_generator *generator, const uint64_t polynomial[4]) {
	fl_generator state = *generator, sum = {0};
	for (int bit = 0; bit < 256; bit++) {
		uint64_t taken = -(polynomial[bit / 64] >> (bit % 64) & 1);
		for (int w = 0; w < 4; w++)
			for (int lane = 0; lane < FL_LANES; lane++)
				sum.s[w][lane] ^= state.s[w][lane] & taken;
		step(&state);
	}
	*generator = sum;
}

void fl_numeric_generator_jump(fl_generator *generator) {
	jump(generator, jump_128);
}

void fl_numeric_generator_seed(fl_generator *generator, uint64_t seed) {
	fl_generator next;
	for (int w = 0; w < 4; w++) {
		uint64_t word = splitmix64(&seed);
		for (int lane = 0; lane < FL_LANES; lane++)
			next.s[w][lane] = word;
	}
	for (int lane = 0; lane < FL_LANES; lane++) {
		for (int w = 0; w < 4; w++)
			generator->s[w][lane] = next.s[w][lane];
		jump(&next, jump_192);
	}
}

void fl_numeric_generator_bits(fl_generator *generator, uint64_t *out, size_t n) {
	fl_numeric_kernels()->bits(generator, out, n - n % FL_LANES);
}

double fl_numeric_input_u(const fl_input *input) {
	double p = input->parameter;
	switch (input->shape) {
	case FL_SHAPE_NORMAL:
		return input->width;
	case FL_SHAPE_RECTANGULAR:
		return input->width / sqrt(3.0);
	case FL_SHAPE_TRIANGULAR:
		return input->width / sqrt(6.0);
	case FL_SHAPE_TRAPEZOIDAL:
		return input->width * sqrt((1.0 + p * p) / 6.0);
	case FL_SHAPE_ARCSINE:
		return input->width / sqrt(2.0);
	default:
		return p > 2.0 ? input->width * sqrt(p / (p - 2.0)) : INFINITY;
	}
}

void fl_numeric_draw(fl_generator *generator, const fl_input *input, double *out, size_t n) {
	fl_numeric_kernels()->draw(generator, input, out, n - n % FL_LANES);
}
