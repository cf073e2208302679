/* numeric/trials.h - what the Monte Carlo engine asks of anything that can be tried, and the tally it keeps.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_NUMERIC_TRIALS_H
#define FOUNDLEFT_NUMERIC_TRIALS_H

#include "foundleft/numeric.h"

enum { TRIAL_CHUNK = 128 /* trials handed over at once: their draws stay in the nearest memory */ };

/* Something that can be tried. */
typedef struct trial_source {
	const void *self;
	size_t outputs;
	size_t scratch; /* doubles it needs to work in, for TRIAL_CHUNK trials */
	/* Fills outputs[j * trials + t]; trials is a multiple of FL_LANES and at most TRIAL_CHUNK. */
	void (*fill)(const void *self, fl_generator *generator, double *scratch, size_t trials, double *outputs);
} trial_source;

/* Tries it as the plan says. */
fl_status fl_numeric_try(const trial_source *source, const fl_plan *plan, fl_propagated *outputs, fl_trials *trials,
                         fl_error *err) FL_MUST_USE;

/* Refuses an input that makes no sense; `i` counts from 0. */
fl_status fl_numeric_check_input(const fl_input *input, size_t i, fl_error *err) FL_MUST_USE;

/* ---- the distribution of one output, in memory that does not grow ---- */

/* Bins over the whole line: y goes to z = (y - centre)/scale and that to z/(1 + |z|), which is cut evenly. With the
 * scale at 1.5 interquartile ranges a bin is 0.001 u to 0.003 u wide where a coverage interval ends, a hundredth of
 * what chance does to the end points of 10^5 trials; between the edges of a bin the tally interpolates. */
enum { TALLY_BINS = 8192 };

typedef struct tally_frame {
	double centre, scale;
} tally_frame;

/* The frame that suits a first sample; its order is changed. */
tally_frame fl_numeric_tally_frame(double *sample, size_t n);
/* Counts y[n], all finite. */
void fl_numeric_tally(tally_frame frame, const double *y, size_t n, uint32_t *counts);
/* Fills the coverage intervals from the counts summed over all threads; min, max of `out` must be known. */
void fl_numeric_tally_intervals(tally_frame frame, const uint64_t *counts, double probability, fl_propagated *out);

/* Sums about `shift` for the moments: d and d^2, lane by lane. False if one of y[n] is not finite. */
typedef struct trial_sums {
	double d, d2, min, max;
} trial_sums;
bool fl_numeric_trial_sums(const double *y, size_t n, double shift, trial_sums *sums);

#endif
