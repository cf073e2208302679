/* numeric/lanes.h - random deviates in several lanes at once, by the compiler's portable vectors.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Each lane is a generator xoshiro256++ of its own (Blackman and Vigna, Scrambled linear pseudorandom number
 * generators, ACM TOMS 47, 2021). LANE_WIDTH lanes stand in one vector; all FL_LANES are gone through in groups of
 * that many, as wide as suits the processor. Every operation is exact or rounded as IEEE 754 says and products are not
 * fused with sums, so the same seed gives the same bits on any processor and at any width.
 */
#ifndef FOUNDLEFT_NUMERIC_LANES_H
#define FOUNDLEFT_NUMERIC_LANES_H

#include "foundleft/numeric.h"

#include <math.h>
#include <stdint.h>

#ifndef LANE_WIDTH
#error "LANE_WIDTH says how many lanes stand in a vector"
#endif

#define LANE_INLINE static inline __attribute__((always_inline))

typedef double lanes __attribute__((vector_size(LANE_WIDTH * sizeof(double))));
typedef uint64_t lane_bits __attribute__((vector_size(LANE_WIDTH * sizeof(uint64_t))));

/* The state of a group of lanes, word by word. */
typedef struct lane_state {
	lane_bits s[4];
} lane_state;

/* The lanes from `first` on. */
LANE_INLINE lane_state lanes_load(const fl_generator *g, int first) {
	lane_state state;
	for (int w = 0; w < 4; w++)
		__builtin_memcpy(&state.s[w], &g->s[w][first], sizeof state.s[w]);
	return state;
}

LANE_INLINE void lanes_store(const lane_state *state, fl_generator *g, int first) {
	for (int w = 0; w < 4; w++)
		__builtin_memcpy(&g->s[w][first], &state->s[w], sizeof state->s[w]);
}

/* xoshiro256++: 64 fresh bits for each lane. */
LANE_INLINE lane_bits lanes_next(lane_state *state) {
	lane_bits *s = state->s;
	lane_bits sum = s[0] + s[3], bits = ((sum << 23) | (sum >> 41)) + s[0], t = s[1] << 17;
	s[2] ^= s[0];
	s[3] ^= s[1];
	s[1] ^= s[2];
	s[0] ^= s[3];
	s[2] ^= t;
	s[3] = (s[3] << 45) | (s[3] >> 19);
	return bits;
}

/* A number from [1, 2) made of the upper 52 bits. */
LANE_INLINE lanes lanes_one_to_two(lane_bits bits) {
	return (lanes)((bits >> 12) | 0x3ff0000000000000u);
}

/* Uniform on [-1/2, 1/2), in steps of 2^-52, at the middle of each step: symmetric about 0. */
LANE_INLINE lanes lanes_centred(lane_state *state) {
	return lanes_one_to_two(lanes_next(state)) - (1.5 - 0x1p-53);
}

LANE_INLINE lanes lanes_sqrt(lanes v) {
	for (int i = 0; i < LANE_WIDTH; i++)
		v[i] = sqrt(v[i]);
	return v;
}

LANE_INLINE lanes lanes_abs(lanes v) {
	return (lanes)((lane_bits)v & 0x7fffffffffffffffu);
}

/* Lane by lane the larger, without a branch. */
LANE_INLINE lanes lanes_max(lanes a, lanes b) {
	lane_bits chosen = (lane_bits)(a > b);
	return (lanes)(((lane_bits)a & chosen) | ((lane_bits)b & ~chosen));
}

/* The natural logarithm of v in (0, 2), v normal. v = 2^k m with m within [sqrt(1/2), sqrt(2)), s = (m-1)/(m+1),
 * ln m = 2 s (1 + s^2/3 + s^4/5 + ...). */
LANE_INLINE lanes lanes_log(lanes v) {
	const uint64_t root_half = 0x3fe6a09e667f3bcdu, one = 0x3ff0000000000000u;
	lane_bits shifted = (lane_bits)v + (one - root_half);
	/* The exponent as a number: 2^52 + k, then 2^52 + 1023 taken away. */
	lanes k = (lanes)((shifted >> 52) | 0x4330000000000000u) - (0x1p52 + 1023.0);
	lanes m = (lanes)((shifted & 0x000fffffffffffffu) + root_half);
	lanes f = m - 1.0, s = f / (m + 1.0), z = s * s;
	lanes series = 1.0 / 17.0 + z * (1.0 / 19.0);
	series = 1.0 / 15.0 + z * series;
	series = 1.0 / 13.0 + z * series;
	series = 1.0 / 11.0 + z * series;
	series = 1.0 / 9.0 + z * series;
	series = 1.0 / 7.0 + z * series;
	series = 1.0 / 5.0 + z * series;
	series = 1.0 / 3.0 + z * series;
	return k * 0.69314718055994530942 + 2.0 * (s + s * z * series);
}

/* Sine and cosine of an angle within [-pi/4, pi/4] by their Taylor series, broken off below the last bit. */
LANE_INLINE void lanes_sin_cos(lanes angle, lanes *sine, lanes *cosine) {
	lanes z = angle * angle;
	lanes odd = 1.0 / 6227020800.0 + z * (-1.0 / 1307674368000.0);
	odd = -1.0 / 39916800.0 + z * odd;
	odd = 1.0 / 362880.0 + z * odd;
	odd = -1.0 / 5040.0 + z * odd;
	odd = 1.0 / 120.0 + z * odd;
	odd = -1.0 / 6.0 + z * odd;
	lanes even = 1.0 / 479001600.0 + z * (-1.0 / 87178291200.0);
	even = -1.0 / 3628800.0 + z * even;
	even = 1.0 / 40320.0 + z * even;
	even = -1.0 / 720.0 + z * even;
	even = 1.0 / 24.0 + z * even;
	*sine = angle + angle * z * odd;
	*cosine = 1.0 - 0.5 * z + z * z * even;
}

/* A point on the unit circle, uniform in its angle. An eighth turn to either side of the axis comes from 52 bits, the
 * half plane and the exchange of the axes from two others. */
LANE_INLINE void lanes_direction(lane_state *state, lanes *x, lanes *y) {
	lane_bits bits = lanes_next(state);
	lanes sine, cosine;
	lanes_sin_cos((lanes_one_to_two(bits) - (1.5 - 0x1p-53)) * 1.57079632679489661923, &sine, &cosine);
	cosine = (lanes)((lane_bits)cosine ^ ((bits & 1) << 63));
	lane_bits exchange = -((bits >> 1) & 1);
	lane_bits differ = ((lane_bits)sine ^ (lane_bits)cosine) & exchange;
	*x = (lanes)((lane_bits)cosine ^ differ);
	*y = (lanes)((lane_bits)sine ^ differ);
}

/* Two independent standard normal deviates for each lane (Box and Muller 1958). They reach to
 * sqrt(2 ln 2^53) = 8.57, beyond which a normal deviate falls once in 10^17. */
LANE_INLINE void lanes_normal(lane_state *state, lanes *a, lanes *b) {
	lanes u = 2.0 - lanes_one_to_two(lanes_next(state)) - 0x1p-53;
	lanes radius = lanes_sqrt(-2.0 * lanes_log(u)), x, y;
	lanes_direction(state, &x, &y);
	*a = radius * x;
	*b = radius * y;
}

/* One draw for each lane, of centre 0 and width 1; for the shapes that need no call. */
LANE_INLINE lanes lanes_standard(lane_state *state, fl_shape shape, double parameter) {
	lanes a, b;
	switch (shape) {
	case FL_SHAPE_NORMAL:
		lanes_normal(state, &a, &b);
		return a;
	case FL_SHAPE_RECTANGULAR:
		return 2.0 * lanes_centred(state);
	case FL_SHAPE_TRIANGULAR:
		a = lanes_centred(state);
		return a + lanes_centred(state);
	case FL_SHAPE_TRAPEZOIDAL:
		a = lanes_centred(state);
		return (1.0 + parameter) * a + (1.0 - parameter) * lanes_centred(state);
	default:
		lanes_direction(state, &a, &b);
		return b;
	}
}

/* Student's t by Bailey's polar method (Math. Comp. 62, 1994, 779): sqrt(dof (u^(-2/dof) - 1)) cos(2 pi v). */
LANE_INLINE lanes lanes_student(lane_state *state, double dof) {
	lanes u = 2.0 - lanes_one_to_two(lanes_next(state)) - 0x1p-53, x, y;
	lanes exponent = lanes_log(u) * (-2.0 / dof);
	for (int i = 0; i < LANE_WIDTH; i++)
		exponent[i] = expm1(exponent[i]);
	lanes_direction(state, &x, &y);
	return lanes_sqrt(dof * exponent) * x;
}

/* One draw of an input for each lane. */
LANE_INLINE lanes lanes_draw(lane_state *state, const fl_input *input) {
	lanes standard = input->shape == FL_SHAPE_STUDENT ? lanes_student(state, input->parameter)
	                                                  : lanes_standard(state, input->shape, input->parameter);
	return input->centre + input->width * standard;
}

#endif
