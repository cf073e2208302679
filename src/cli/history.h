/* history.h - the years of one instrument: its records, what is followed through them, what follows from it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_HISTORY_H
#define FOUNDLEFT_CLI_HISTORY_H

#include "foundleft/store.h"
#include "foundleft/trend.h"

/* One quantity through the years. */
typedef struct fl_followed {
	char name[64];  /* "zero", "span", "stopped zero", "LK-50" */
	char place[16]; /* of a point on the scale, "93 %"; "" otherwise */
	fl_saw saw;
	fl_drift drift;
	fl_forecast forecast;
} fl_followed;

typedef struct fl_history {
	fl_arena arena;
	fl_known_instrument instrument;
	fl_record_list list; /* without those that an amendment replaced */
	fl_followed *followed;
	size_t count;
	size_t chosen; /* the one that reaches its limit first, or that was asked for */
	fl_proposal proposals[FL_INTERVAL_METHODS];
	bool has_fleet; /* the reliability of the fleet was asked for */
	size_t trials;
	fl_lookback lookback; /* of the last session */
} fl_history;

/* Gathers all of it. `what` (NULL: chosen by itself) names a quantity: zero, span, stopped zero, or an oil. `fleet`:
 * read all instruments for the reliability. */
fl_status fl_history_load(fl_store *store, const fl_known_instrument *instrument, const char *what, bool fleet,
                          fl_history *out, fl_error *err) FL_MUST_USE;
void fl_history_free(fl_history *history);

/* The point of a run that comes nearest to its tolerance or goes furthest beyond; NULL if there is none. */
const fl_kept_point *fl_history_worst(const fl_kept_run *run);
/* "LK-50", "zero", "point 3". */
const char *fl_history_point_name(const fl_kept_point *point, char out[64]);

/* Tables, picture and sentences, at most `columns` wide (at least 60). Pure. */
void fl_history_text(const fl_history *history, int columns, fl_text *out);
/* The saw-tooth of the chosen quantity. */
void fl_history_picture(const fl_followed *followed, int columns, fl_text *out);
/* One JSON object; its keys stand in docs/json.md. */
fl_status fl_history_json(const fl_history *history, fl_text *out, fl_error *err) FL_MUST_USE;

#endif
