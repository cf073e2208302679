/* report_why_json.h - the parts of the JSON report that say why, and what was tried besides the readings.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_REPORT_WHY_JSON_H
#define FOUNDLEFT_CLI_REPORT_WHY_JSON_H

#include "case.h"
#include "json.h"

/* "cause": null where there is none. */
void fl_report_cause_json(fl_json *to, const fl_case *one, fl_run_kind run);
void fl_report_measurements_json(fl_json *to, const fl_session *session); /* "measurements": [...] */
void fl_report_functions_json(fl_json *to, const fl_case *one);           /* "function_checks": [...] */

#endif
