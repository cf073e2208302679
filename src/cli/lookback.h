/* lookback.h - the report on an instrument that was found out of tolerance: since when, and what it did.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_LOOKBACK_H
#define FOUNDLEFT_CLI_LOOKBACK_H

#include "foundleft/store.h"
#include "foundleft/trend.h"

typedef struct fl_lookback_report {
	fl_known_instrument instrument;
	const fl_record *record, *before; /* NULL: nothing was out of tolerance; there is none before it */
	fl_lookback result;
	fl_paper *papers; /* of `before` */
	size_t paper_count;
} fl_lookback_report;

/* The report to be signed, at most `columns` wide. Pure. */
void fl_lookback_text(const fl_lookback_report *report, int columns, fl_text *out);
/* One JSON object; its keys stand in docs/json.md. */
fl_status fl_lookback_json(const fl_lookback_report *report, fl_text *out, fl_error *err) FL_MUST_USE;

#endif
