/* numeric/select.c - coverage intervals of a sample by selection: only its tails are ever put in order.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <gsl/gsl_sort_double.h>
#include <gsl/gsl_statistics_double.h>
#include <math.h>

/* Parts values[n] so that the `count` smallest come first, in order. */
static void order_lowest(double *values, size_t n, size_t count) {
	if (count < n)
		gsl_stats_select(values, 1, n, count);
	gsl_sort(values, 1, count);
}

/* The shortest interval from one of the lowest `tail` + 1 values up by `covered` ranks. JCGM 101 7.7.4. */
static void find_shortest(const double *lowest, const double *highest, size_t tail, fl_propagated *out) {
	out->shortest_low = lowest[0];
	out->shortest_high = highest[0];
	for (size_t r = 1; r <= tail; r++)
		if (highest[r] - lowest[r] < out->shortest_high - out->shortest_low) {
			out->shortest_low = lowest[r];
			out->shortest_high = highest[r];
		}
}

fl_status fl_numeric_coverage(double *values, size_t n, double probability, fl_propagated *out, fl_error *err) {
	if (!(probability > 0.0 && probability < 1.0))
		return fl_fail(err, FL_E_NUMERIC, "a coverage probability of %g: it must lie between 0 and 1", probability);
	size_t covered = (size_t)(probability * (double)n + 0.5);
	if (covered < 1 || covered >= n)
		return fl_fail(err, FL_E_NUMERIC, "%zu values are too few for a coverage of %g", n, probability);
	if (!fl_numeric_all_finite(values, n))
		return fl_fail(err, FL_E_NUMERIC, "a coverage interval of values that are not all numbers");
	*out = (fl_propagated){.mean = gsl_stats_mean(values, 1, n)};
	out->u = gsl_stats_sd_m(values, 1, n, out->mean);
	gsl_stats_minmax(&out->min, &out->max, values, 1, n);
	size_t tail = n - covered - 1; /* ranks that either end may move by */
	order_lowest(values, n, tail + 1);
	/* The highest tail + 1: the rest is parted again, behind the lowest unless the two overlap. */
	size_t high_begin = covered;
	if (high_begin > tail + 1)
		gsl_stats_select(values + tail + 1, 1, n - tail - 1, high_begin - tail - 1);
	if (high_begin <= tail)
		gsl_sort(values, 1, n);
	else
		gsl_sort(values + high_begin, 1, n - high_begin);
	size_t r = (n - covered) % 2 ? (n - covered + 1) / 2 : (n - covered) / 2; /* rank of the lower end, 7.7.2 */
	r = r > 0 ? r - 1 : 0;
	out->low = values[r];
	out->high = values[r + covered];
	find_shortest(values, values + covered, tail, out);
	return FL_OK;
}

double fl_numeric_tolerance_of(double u, int digits) {
	if (!(u > 0.0) || !isfinite(u) || digits < 1)
		return 0.0;
	double power = floor(log10(u)) - (digits - 1);
	/* 0.0996 to one digit is 0.1: the rounded value decides on which place its last digit stands. */
	double rounded = rint(u / pow(10.0, power)) * pow(10.0, power);
	if (rounded >= pow(10.0, power + digits) * (1.0 - 1e-12))
		power += 1.0;
	return 0.5 * pow(10.0, power);
}

void fl_numeric_validate(double y, double u, double expanded, const fl_propagated *trials, int digits,
                         fl_validation *out) {
	out->delta = fl_numeric_tolerance_of(u, digits);
	out->d_low = fabs(y - expanded - trials->low);
	out->d_high = fabs(y + expanded - trials->high);
	out->valid = out->d_low <= out->delta && out->d_high <= out->delta;
}
