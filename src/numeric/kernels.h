/* numeric/kernels.h - the inner loops of the trials, once for each kind of processor.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * kernels_in_lanes.h holds the loops; kernels_wide.c, kernels_middle.c and kernels_plain.c compile them for vectors of
 * 64, 32 and whatever bytes. All give the same bits. The processor is asked at every call: it costs next to nothing,
 * and nothing has to be remembered.
 */
#ifndef FOUNDLEFT_NUMERIC_KERNELS_H
#define FOUNDLEFT_NUMERIC_KERNELS_H

#include "foundleft/numeric.h"
#include "trials.h"

enum {
	TRIPLES_MOST = FL_PLACES_MOST * (FL_PLACES_MOST - 1) * (FL_PLACES_MOST - 2) / 6,
	PAIRS_MOST = FL_PLACES_MOST * (FL_PLACES_MOST - 1) / 2
};

/* Error that three points i < j < k enforce: |e_i a + e_k c - e_j/2|. */
typedef struct run_triple {
	unsigned i, j, k;
	double a, c;
} run_triple;

/* Error that two points enforce on a line through the first: |(e_i - e_0) a - (e_j - e_0) c|. */
typedef struct run_pair {
	unsigned i, j;
	double a, c;
} run_pair;

/* A run made ready. */
typedef struct run_ready {
	const fl_run_model *model;
	size_t stops, normals;       /* readings in one direction at a place; normal draws a trial, lanes of them */
	size_t in_line, first, last; /* places in the line: how many, the lowest, the highest */
	unsigned place[FL_PLACES_MOST];
	double slope_weight[FL_PLACES_MOST], x_mean;
	double chord[FL_PLACES_MOST]; /* how far along the terminal line */
	run_triple triples[TRIPLES_MOST];
	run_pair pairs[PAIRS_MOST];
	size_t triple_count, pair_count;
} run_ready;

typedef struct trial_kernels {
	/* n a multiple of FL_LANES everywhere */
	void (*bits)(fl_generator *generator, uint64_t *out, size_t n);
	void (*draw)(fl_generator *generator, const fl_input *input, double *out, size_t n);
	void (*run)(const run_ready *r, fl_generator *generator, double *scratch, size_t trials, double *outputs);
	void (*tally)(tally_frame frame, const double *y, size_t n, uint32_t *counts);
	bool (*sums)(const double *y, size_t n, double shift, trial_sums *sums);
} trial_kernels;

#if defined(__x86_64__) && defined(__GNUC__) && !defined(__clang__)
#define KERNELS_BY_PROCESSOR
extern const trial_kernels fl_numeric_kernels_wide, fl_numeric_kernels_middle;
#endif
extern const trial_kernels fl_numeric_kernels_plain;

/* Those that suit this processor. */
const trial_kernels *fl_numeric_kernels(void);

#endif
