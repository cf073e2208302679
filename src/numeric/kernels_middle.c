/* numeric/kernels_middle.c - the inner loops of the trials for x86-64 processors with vectors of 32 bytes.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#if defined(__x86_64__) && defined(__GNUC__) && !defined(__clang__)
#pragma GCC target("arch=x86-64-v3")
#endif
#include "kernels.h"

#ifdef KERNELS_BY_PROCESSOR
#define LANE_WIDTH 4
#define KERNELS fl_numeric_kernels_middle
#include "kernels_in_lanes.h"
#endif
