/* numeric/kernels_plain.c - the inner loops of the trials for any processor: the compiler makes of the vectors what it
 * can.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#define LANE_WIDTH 8
#define KERNELS fl_numeric_kernels_plain
#include "kernels_in_lanes.h"
