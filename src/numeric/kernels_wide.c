/* numeric/kernels_wide.c - the inner loops of the trials for x86-64 processors with vectors of 64 bytes.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#if defined(__x86_64__) && defined(__GNUC__) && !defined(__clang__)
#pragma GCC target("arch=x86-64-v4")
#endif
#include "kernels.h"

#ifdef KERNELS_BY_PROCESSOR
#define LANE_WIDTH 8
#define KERNELS fl_numeric_kernels_wide
#include "kernels_in_lanes.h"
#endif
