/* numeric/spread.c - repeated values: mean, scatter, range, largest gap.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "finite.h"
#include "foundleft/numeric.h"

#include <gsl/gsl_statistics_double.h>
#include <math.h>

bool fl_numeric_all_finite(const double *v, size_t n) {
	for (size_t i = 0; i < n; i++)
		if (!isfinite(v[i]))
			return false;
	return true;
}

bool fl_numeric_all_equal(const double *v, size_t n) {
	for (size_t i = 1; i < n; i++)
		if (v[i] != v[0])
			return false;
	return true;
}

fl_status fl_numeric_spread(const double *v, size_t n, fl_spread *out, fl_error *err) {
	if (n == 0)
		return fl_fail(err, FL_E_NUMERIC, "no values: nothing to take a mean of");
	if (!fl_numeric_all_finite(v, n))
		return fl_fail(err, FL_E_NUMERIC, "a mean of values that are not all numbers");
	fl_spread spread = {.n = n};
	gsl_stats_minmax(&spread.min, &spread.max, v, 1, n);
	spread.mean = gsl_stats_mean(v, 1, n);
	spread.s = n > 1 && spread.max > spread.min ? gsl_stats_sd_m(v, 1, n, spread.mean) : 0.0;
	*out = spread;
	return FL_OK;
}

fl_status fl_numeric_largest_gap(const double *a, const double *b, size_t n, double *gap, size_t *at, fl_error *err) {
	bool found = false;
	for (size_t i = 0; i < n; i++) {
		double here = fabs(a[i] - b[i]);
		if (isnan(here) || (found && here <= *gap))
			continue;
		*gap = here;
		*at = i;
		found = true;
	}
	if (!found)
		return fl_fail(err, FL_E_NUMERIC, "no place has a value on both sides: no gap is determined");
	return FL_OK;
}
