/* foundleft/entry.h - the conversation: a state fed with lines, which asks, checks, and writes only through the
 * journal.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The step at which the conversation stands is a function of the session and the procedure (fl_entry_step), so resuming
 * after a power cut needs nothing but the journal. The entry holds beside it only what was asked back and not yet
 * confirmed. A thin loop (src/cli) shows fl_entry_prompt, reads a line, feeds it, shows what was said.
 */
#ifndef FOUNDLEFT_ENTRY_H
#define FOUNDLEFT_ENTRY_H

#include "foundleft/base.h"
#include "foundleft/journal.h"
#include "foundleft/physics.h"
#include "foundleft/procedure.h"
#include "foundleft/stock.h"

/* Settings that the conversation writes besides the procedure's conditions (which go by their own ids):
 *   signal            typed the signal in words, unit that of the output; written by fl_entry_begin
 *   place, customer, job, performed-by, others   identification and people; job and others may be empty
 *   no-tachometer     none is used
 *   remarks-complete  the remarks are finished
 * Gates and restoring steps go by the ids of the procedure; "not recorded (imported)" where a table has none. */

/* What the next line is about. */
typedef enum fl_step_kind {
	FL_STEP_SETTING,    /* identification, people, conditions */
	FL_STEP_EQUIPMENT,  /* which item fills a role */
	FL_STEP_OIL,        /* which lot serves a point */
	FL_STEP_GATE,       /* permit and safety */
	FL_STEP_AS_FOUND,   /* is an as-found run possible, or was it touched before */
	FL_STEP_READING,    /* stopped zero or a point: the output (with its temperature or pressure) */
	FL_STEP_CLOSE_RUN,  /* lock the run */
	FL_STEP_DECISION,   /* adjust, leave, repair */
	FL_STEP_ADJUSTMENT, /* values before and after */
	FL_STEP_CHECK,      /* a function check */
	FL_STEP_RESTORE,    /* restoring the loop */
	FL_STEP_REMARKS,
	FL_STEP_CLOSE,
	FL_STEP_DONE
} fl_step_kind;

typedef struct fl_step {
	fl_step_kind kind;
	const char *id;              /* setting, gate or restoring step */
	const fl_question *question; /* where the procedure asks; else NULL */
	const fl_function_check *check;
	fl_role role;
	fl_run_kind run;
	int cycle;
	fl_pass pass;
	int point;       /* FL_POINT_ZERO for the stopped zero */
	int number;      /* reading number */
	int done, total; /* readings of this run: progress */
} fl_step;

/* The step that follows from what is in the journal. Pure. */
fl_step fl_entry_step(const fl_session *session, const fl_procedure *procedure);

typedef fl_utc (*fl_clock)(void *context);

/* What is said at the decision, when the as-found run is locked. The conversation knows nothing of causes: who drives
 * it computes the result and the opinion, so that nothing can be shown before its time, and the words are the same as
 * in the assessment. */
typedef struct fl_advice_question {
	const char *id; /* of the finding: the answer stands under it in the journal */
	const char *ask;
} fl_advice_question;

typedef struct fl_advice {
	fl_arena arena;                      /* holds it all; freed by the conversation */
	const char *text;                    /* shown before the decision is asked for */
	const fl_advice_question *questions; /* answered yes or no with a reason before anything is decided */
	size_t question_count;
	const char *refuses_adjust; /* why there is no adjustment now; NULL */
	const char *against_adjust; /* why it is advised against: asked back; NULL */
} fl_advice;
typedef fl_status (*fl_adviser)(void *context, const fl_session *session, fl_advice *out, fl_error *err);

typedef struct fl_entry fl_entry;

/* Who drives the conversation and with what. Everything is borrowed and must outlive the entry. */
typedef struct fl_entry_setup {
	fl_journal *journal; /* open; its session carries procedure and instrument */
	const fl_procedure *procedure;
	const fl_instrument *instrument;
	const fl_stock *stock; /* oils and equipment that may be chosen */
	fl_clock clock;
	void *clock_context;
	int utc_offset_min; /* for times shown to people */
	fl_adviser advise;  /* NULL: nothing is shown before the decision */
	void *advise_context;
} fl_entry_setup;

fl_status fl_entry_new(fl_entry **out, const fl_entry_setup *setup, fl_error *err) FL_MUST_USE;
void fl_entry_free(fl_entry *entry);

/* What stands before the next line: a heading when a new part of the work begins (part k of n, cautions), then the
 * question in one line, ending in "> ". Never shows the expected output of a reading that is not committed. */
void fl_entry_prompt(fl_entry *entry, fl_text *out);
/* Feeds one line (without newline). What the program answers is appended to `say`. FL_OK: taken, or asked back, or a
 * command (?, undo, strike, watch, remark, list, measure, why, stop). A refused line gives the status and `err` and
 * changes nothing; the conversation goes on. Only FL_E_IO, FL_E_DISK_FULL, FL_E_READ_ONLY and FL_E_MEMORY end it. */
fl_status fl_entry_line(fl_entry *entry, const char *line, fl_text *say, fl_error *err) FL_MUST_USE;
/* True when the session is closed, or the person said `stop`. */
bool fl_entry_finished(const fl_entry *entry);

/* Begins a journal for a new session: open line, procedure and instrument as used. `path` must not exist. */
fl_status fl_entry_begin(fl_journal *journal, const fl_io *io, const char *path, fl_source source, bool declared_clock,
                         fl_day day, fl_utc now, const fl_procedure *procedure, const fl_instrument *instrument,
                         const char *program, fl_error *err) FL_MUST_USE;

/* A CSV of readings (columns in the manual) becomes a session through the same checks as the keyboard. */
typedef struct fl_import_options {
	/* Values of the `session` column for the two runs. Both NULL: by the `kind` column, of which then each kind has
	 * rows of one session only. One of them NULL: the file has no such run. */
	const char *as_found, *as_left;
	const char *performed_by;
	const char *decision_reason; /* why adjusted or left; NULL: "not recorded" */
} fl_import_options;
/* `csv` is the file's text, `file` its name for errors. */
fl_status fl_entry_import(const fl_entry_setup *setup, const char *csv, const char *file,
                          const fl_import_options *options, fl_text *say, fl_error *err) FL_MUST_USE;
/* Columns, found by name in the first row, RFC 4180: session, date, kind (as-found, as-left), cycle, direction (up,
 * down, rising, falling), reading, oil (ZERO: the stopped zero), lot, bath_C, and by the instrument's signal output_mA,
 * output_bar or output_psi; line_bar_g if it is there. Others are passed over. Rows stand in the order of the plan. */
/* First day that the `date` column names (with as_found/as_left chosen): the day of the calibration. */
fl_status fl_entry_import_day(const char *csv, const char *file, const fl_import_options *options, fl_day *day,
                              fl_error *err) FL_MUST_USE;

#endif
