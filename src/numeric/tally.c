/* numeric/tally.c - counts a stream of results into bins that reach over the whole line, and reads intervals off them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "kernels.h"
#include "trials.h"

#include <gsl/gsl_statistics_double.h>
#include <math.h>

tally_frame fl_numeric_tally_frame(double *sample, size_t n) {
	double min, max;
	gsl_stats_minmax(&min, &max, sample, 1, n);
	/* A thousand show well enough where the middle half lies. */
	size_t few = n < 1000 ? n : 1000;
	tally_frame frame = {.centre = gsl_stats_select(sample, 1, few, few / 2)};
	double lower = gsl_stats_select(sample, 1, few, few / 4);
	double upper = gsl_stats_select(sample, 1, few, few - 1 - few / 4);
	frame.scale = 1.5 * (upper - lower);
	if (!(frame.scale > 0.0)) /* more than half of the sample at one place */
		frame.scale = max > min ? (max - min) / 4.0 : 1.0;
	return frame;
}

void fl_numeric_tally(tally_frame frame, const double *y, size_t n, uint32_t *counts) {
	fl_numeric_kernels()->tally(frame, y, n, counts);
}

bool fl_numeric_trial_sums(const double *y, size_t n, double shift, trial_sums *sums) {
	return fl_numeric_kernels()->sums(y, n, shift, sums);
}

/* The lower edge of a bin, within what was met. */
static double edge_of(tally_frame frame, size_t bin, const fl_propagated *met) {
	double t = (double)bin / (TALLY_BINS / 2) - 1.0;
	double edge = frame.centre + frame.scale * (t / (1.0 - fabs(t))); /* infinite at both ends */
	return fmin(met->max, fmax(met->min, edge));
}

/* Where the counts reach `want`, searched upward from *bin; *below is what lies below that bin. */
static double reach(tally_frame frame, const uint64_t *counts, double want, size_t *bin, uint64_t *below,
                    const fl_propagated *met) {
	while (*bin + 1 < TALLY_BINS && (double)(*below + counts[*bin]) < want)
		*below += counts[(*bin)++];
	double low = edge_of(frame, *bin, met), high = edge_of(frame, *bin + 1, met);
	if (counts[*bin] == 0)
		return low;
	return low + (high - low) * fmin(1.0, (want - (double)*below) / (double)counts[*bin]);
}

static uint64_t total(const uint64_t *counts) {
	uint64_t sum = 0;
	for (size_t bin = 0; bin < TALLY_BINS; bin++)
		sum += counts[bin];
	return sum;
}

/* Every edge is tried as the lower end; the upper end moves along with it. */
static void find_shortest(tally_frame frame, const uint64_t *counts, double covered, double all, fl_propagated *out) {
	size_t upper = 0;
	uint64_t below_upper = 0, below = 0;
	out->shortest_low = out->low;
	out->shortest_high = out->high;
	for (size_t bin = 0; bin < TALLY_BINS && (double)below + covered <= all; below += counts[bin++]) {
		if (counts[bin] == 0)
			continue;
		double low = edge_of(frame, bin, out);
		double high = reach(frame, counts, (double)below + covered, &upper, &below_upper, out);
		if (high - low < out->shortest_high - out->shortest_low) {
			out->shortest_low = low;
			out->shortest_high = high;
		}
	}
}

void fl_numeric_tally_intervals(tally_frame frame, const uint64_t *counts, double probability, fl_propagated *out) {
	double all = (double)total(counts), tail = (1.0 - probability) / 2.0 * all;
	size_t bin = 0;
	uint64_t below = 0;
	out->low = reach(frame, counts, tail, &bin, &below, out);
	out->high = reach(frame, counts, all - tail, &bin, &below, out);
	find_shortest(frame, counts, probability * all, all, out);
}
