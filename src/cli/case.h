/* case.h - everything about one session, loaded from its journal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_CASE_H
#define FOUNDLEFT_CLI_CASE_H

#include "foundleft/analysis.h"
#include "foundleft/base.h"
#include "foundleft/cause.h"
#include "foundleft/journal.h"
#include "foundleft/procedure.h"
#include "foundleft/stock.h"

/* What was asked for beyond the result. */
typedef struct fl_beyond {
	fl_arena arena;
	bool budgets;              /* a table for every point */
	const char *explain;       /* the point to explain in the text; NULL for none */
	fl_explanation *explained; /* of every point, for JSON, or of the ones asked for */
	size_t explained_count, explained_capacity;
	fl_run_trials trials[FL_RUN_KINDS];
	int digits; /* asked of the trials; 0: a number of them */
} fl_beyond;

typedef struct fl_case {
	char path[512];
	char head[FL_DIGEST_HEX_SIZE]; /* the journal's digest */
	bool torn;                     /* an unfinished last line was ignored */
	fl_session session;
	fl_procedure procedure;
	fl_stock stock;
	const fl_instrument *instrument;
	const fl_stock *shelf; /* oils to choose a further point from; NULL: the session's */
	bool borrowed;         /* the session is another's */
	fl_result result;
	bool has_causes;               /* causes were looked for; without, nothing is said about why */
	fl_cause causes[FL_RUN_KINDS]; /* opinion: why each run is as it is; not available where there is nothing to say */
	fl_beyond beyond;
} fl_case;

/* Reads and verifies the journal, replays it, and computes the result. On failure nothing needs freeing. */
fl_status fl_case_load(const fl_io *io, const char *path, fl_case *out, fl_error *err) FL_MUST_USE;
/* The same of a journal in memory; `name` stands for it in errors. */
fl_status fl_case_replay(const char *bytes, size_t length, const char *name, fl_case *out, fl_error *err) FL_MUST_USE;
/* In two moves, for who may not need all: the session; then procedure, stock and result, without the causes. */
fl_status fl_case_read(const fl_io *io, const char *path, fl_case *out, fl_error *err) FL_MUST_USE;
fl_status fl_case_compute(fl_case *one, fl_error *err) FL_MUST_USE;
/* Without the causes, of the journal as it stood with its line `sequence`; *bytes are the lines up to and with it, in
 * `arena`. */
fl_status fl_case_load_to(const fl_io *io, const char *path, int sequence, fl_arena *arena, char **bytes,
                          size_t *length, fl_case *out, fl_error *err) FL_MUST_USE;
/* Of a session under way, which stays its owner's; `shelf` the oils that further points could be taken with. */
fl_status fl_case_of(const fl_session *session, const fl_stock *shelf, fl_case *out, fl_error *err) FL_MUST_USE;
/* The opinion on each run; all zero where there is nothing to look into. To be freed with fl_cause_free. */
fl_status fl_case_look_for_causes(fl_case *one, fl_error *err) FL_MUST_USE;
fl_status fl_case_causes(const fl_case *one, fl_cause causes[FL_RUN_KINDS], fl_error *err) FL_MUST_USE;
void fl_case_free(fl_case *one);

#endif
