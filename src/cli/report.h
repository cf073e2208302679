/* report.h - a result for people (tables and pictures in the terminal) and for programs (JSON).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_REPORT_H
#define FOUNDLEFT_CLI_REPORT_H

#include "case.h"

/* The whole assessment as text, at most `columns` wide (at least 60), readable without colour. Pure. */
void fl_report_text(const fl_case *one, int columns, fl_text *out);
/* The findings on why the runs are as they are, marked as opinion; nothing where there is nothing to say. */
void fl_report_why(const fl_case *one, int columns, fl_text *out);
/* The function checks; nothing where the procedure has none. */
void fl_report_functions(const fl_case *one, int columns, fl_text *out);
/* What is shown at the decision: the as-found result in short, the findings, the proposal. */
void fl_report_so_far(const fl_case *one, int columns, fl_text *out);
/* The error picture alone, as fl_report_text draws it. */
void fl_report_picture(const fl_case *one, int columns, fl_text *out);
/* Parts of it, in report_depth.c: what the line says over the scale, budgets, explanations, trials. */
void fl_report_lines(const fl_case *one, const fl_run_result *run, int columns, fl_text *out);
void fl_report_budgets(const fl_case *one, const fl_run_result *run, int columns, fl_text *out);
void fl_report_explained(const fl_case *one, int columns, fl_text *out);
void fl_report_trials(const fl_case *one, const fl_run_result *run, int columns, fl_text *out);
/* The result as one JSON object, keys in a stable order, numbers shortest round-trip; documented in docs/json.md. */
fl_status fl_report_json(const fl_case *one, fl_text *out, fl_error *err) FL_MUST_USE;

#endif
