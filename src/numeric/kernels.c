/* numeric/kernels.c - which inner loops suit this processor.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "kernels.h"

const trial_kernels *fl_numeric_kernels(void) {
#ifdef KERNELS_BY_PROCESSOR
	if (__builtin_cpu_supports("x86-64-v4"))
		return &fl_numeric_kernels_wide;
	if (__builtin_cpu_supports("x86-64-v3"))
		return &fl_numeric_kernels_middle;
#endif
	return &fl_numeric_kernels_plain;
}
