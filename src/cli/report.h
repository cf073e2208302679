/* report.h - a result for people (tables and pictures in the terminal) and for programs (JSON).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_REPORT_H
#define FOUNDLEFT_CLI_REPORT_H

#include "case.h"

/* The whole assessment as text, at most `columns` wide (at least 60), readable without colour. Pure. */
void fl_report_text(const fl_case *one, int columns, fl_text *out);
/* One point explained is for a later issue; the error picture alone, as fl_report_text draws it. */
void fl_report_picture(const fl_case *one, int columns, fl_text *out);
/* The result as one JSON object, keys in a stable order, numbers shortest round-trip; documented in docs/json.md. */
fl_status fl_report_json(const fl_case *one, fl_text *out, fl_error *err) FL_MUST_USE;

#endif
