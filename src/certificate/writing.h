/* writing.h - what the parts of the content share: the record, and the sheet under way.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CERTIFICATE_WRITING_H
#define FOUNDLEFT_CERTIFICATE_WRITING_H

#include "wording.h"

typedef struct fl_writing {
	fl_sheet *sheet;
	const fl_session *session;
	const fl_procedure *procedure;
	const fl_stock *stock;
	const fl_instrument *instrument;
	const fl_result *result;
	const fl_issue *issue;
	const char *dial_unit, *signal_unit;
	int signal_decimals;
	double dial_span; /* of an evenly divided dial; NAN for one in seconds */
} fl_writing;

/* Text of a setting as typed, with its unit; NULL if there is none. */
const char *fl_writing_setting(const fl_writing *w, const char *id);
/* "LK-10 (2511B)", "stopped zero", "point 3 (40 % of span)". */
const char *fl_writing_point_name(const fl_writing *w, int point);
/* Why a run is not there: never empty. */
const char *fl_writing_why_missing(const fl_writing *w, const fl_run_result *run);
/* "as-found", "as-left": with a capital letter. */
const char *fl_writing_run_title(fl_run_kind kind);

void fl_write_head(fl_writing *w);                  /* content_head.c: item, work, conditions in brief */
void fl_write_statements(fl_writing *w);            /* content_result.c: the outcome in sentences */
void fl_write_chart(fl_writing *w);                 /* content_chart.c */
void fl_write_run(fl_writing *w, fl_run_kind kind); /* content_run.c: the table of one run */
void fl_write_characteristics(fl_writing *w);       /* content_result.c: zero, span, linearity, hysteresis ... */
void fl_write_functions(fl_writing *w);             /* content_function.c: alarms, controller, valve ... */
void fl_write_opinions(fl_writing *w);              /* content_opinion.c: why, marked as opinion */
void fl_write_adjustments(fl_writing *w);           /* content_record.c */
void fl_write_standards(fl_writing *w);             /* content_means.c: equipment and oils */
void fl_write_gates(fl_writing *w);                 /* content_means.c: conditions, permit and safety */
void fl_write_record(fl_writing *w);  /* content_record.c: struck, departures, remarks, the record itself */
void fl_write_meaning(fl_writing *w); /* content_result.c: how to read the numbers, the rule, the coverage */
void fl_write_budgets(fl_writing *w); /* content_budget.c: where the procedure asks for them */
void fl_write_close(fl_writing *w);   /* content_record.c: statements, signatures, end */

#endif
