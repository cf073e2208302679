/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <math.h>
#include <stdio.h>

void check_near_at(const char *name, double want, double got, double tolerance, const char *file, int line) {
	if (fabs(got - want) <= tolerance)
		return;
	fprintf(stderr, "%s: want %.17g, got %.17g, difference %.3g, tolerance %.3g\n", name, want, got, got - want,
	        tolerance);
	_fail(file, line);
}
