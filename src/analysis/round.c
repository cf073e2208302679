/* analysis/round.c - an expanded uncertainty as it is stated.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/analysis.h"

#include <math.h>

fl_rounded_u fl_analysis_round_u(double u) {
	if (!(u > 0.0) || !isfinite(u))
		return (fl_rounded_u){0.0, 0};
	int decimals = 1 - (int)floor(log10(u));
	double unit = pow(10.0, -decimals), digits = rint(u / unit);
	if (digits * unit < 0.95 * u)
		digits = ceil(u / unit);
	if (digits >= 100.0) { /* 0.0996 is 0.10, not 0.100 */
		decimals -= 1;
		digits = rint(digits / 10.0);
		unit *= 10.0;
	}
	return (fl_rounded_u){digits * unit, decimals};
}
