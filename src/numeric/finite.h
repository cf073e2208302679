/* numeric/finite.h - what every fit asks of its data first.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_NUMERIC_FINITE_H
#define FOUNDLEFT_NUMERIC_FINITE_H

#include <stdbool.h>
#include <stddef.h>

/* True if none of v[n] is NaN or infinite. */
bool fl_numeric_all_finite(const double *v, size_t n);
/* True if all of v[n] are the same number. */
bool fl_numeric_all_equal(const double *v, size_t n);

#endif
