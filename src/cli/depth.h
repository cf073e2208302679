/* depth.h - what assess computes beyond the result: explanations and trials.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_DEPTH_H
#define FOUNDLEFT_CLI_DEPTH_H

#include "case.h"
#include "cli.h"

/* By --budget, --explain, --trials, --seed and --threads; with --json every point is explained. */
fl_status fl_depth(fl_cli *cli, fl_case *one, fl_error *err) FL_MUST_USE;

#endif
