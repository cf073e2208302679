/* report_json_depth.h - parts of the JSON report that lie below the result.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_REPORT_JSON_DEPTH_H
#define FOUNDLEFT_CLI_REPORT_JSON_DEPTH_H

#include "case.h"
#include "json.h"

/* Keys of a run. */
void fl_json_lines(fl_json *to, const fl_run_result *run);
void fl_json_trials(fl_json *to, const fl_case *one, const fl_run_result *run);
/* Keys of a point. */
void fl_json_risks(fl_json *to, const fl_point_result *point);
void fl_json_explained(fl_json *to, const fl_case *one, const fl_point_result *point);

#endif
