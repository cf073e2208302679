/* numeric/bands.c - confidence, prediction and simultaneous bands about an ordinary line.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/numeric.h"

#include <gsl/gsl_cdf.h>
#include <math.h>

fl_status fl_numeric_bands(const fl_line *line, double x, double probability, size_t repeats, fl_bands *out,
                           fl_error *err) {
	if (line->dof < 1)
		return fl_fail(err, FL_E_NUMERIC, "a line through two points has no band: nothing tells its scatter");
	if (!(probability > 0.0 && probability < 1.0) || repeats < 1 || !isfinite(x))
		return fl_fail(err, FL_E_NUMERIC, "a band of probability %g for %zu readings at %g", probability, repeats, x);
	fl_bands bands;
	double u, t = fl_numeric_student(probability, line->dof);
	fl_numeric_line_at(line, x, &bands.y, &u);
	bands.confidence = t * u;
	bands.simultaneous = sqrt(2.0 * gsl_cdf_fdist_Pinv(probability, 2.0, line->dof)) * u;
	bands.prediction = t * hypot(u, line->s / sqrt((double)repeats));
	*out = bands;
	return FL_OK;
}
