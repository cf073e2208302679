/* foundleft/keep.h - from a closed session to the record that the book keeps of it, and back again: whether a record
 * is what its journal gives.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A record's facts are of two kinds. What the session says (errors, uncertainties, verdicts, lots, dates) follows from
 * its journal by one pure function; the rest (number, time of keeping, what it replaces, program) was given when it was
 * kept. Checking recomputes the first kind and compares it bit for bit.
 */
#ifndef FOUNDLEFT_KEEP_H
#define FOUNDLEFT_KEEP_H

#include "foundleft/analysis.h"
#include "foundleft/base.h"
#include "foundleft/journal.h"
#include "foundleft/procedure.h"
#include "foundleft/stock.h"
#include "foundleft/store.h"

/* The condition that a procedure asks to have the hour counter kept. */
#define FL_KEEP_HOURS_SETTING "running-hours"

/* What a session gives of its record; texts live in the arena, what the caller gives is left empty. The next date is
 * the calibration's day and the interval that the instrument's stock states. FL_E_STATE where it is not closed. */
fl_status fl_keep_record(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                         const fl_result *result, fl_arena *arena, fl_record *out, fl_error *err) FL_MUST_USE;

#define FL_KEEP_WHERE_SIZE 320
/* Do both say the same of their session, every number to the last bit? If not, `where` names the first fact that
 * differs, with both values. */
bool fl_keep_same(const fl_record *kept, const fl_record *computed, char where[FL_KEEP_WHERE_SIZE]);

/* Recomputes records one after the other. Procedures and stock items that it met before are not parsed again. Used by
 * one thread. */
typedef struct fl_recomputer fl_recomputer;
fl_status fl_recomputer_new(fl_recomputer **out, fl_error *err) FL_MUST_USE;
void fl_recomputer_free(fl_recomputer *recomputer);
/* The record that a journal gives, as fl_keep_record; `name` stands for the journal in errors. */
fl_status fl_recomputer_record(fl_recomputer *recomputer, const char *journal, size_t length, const char *name,
                               fl_arena *arena, fl_record *out, fl_error *err) FL_MUST_USE;

typedef struct fl_recomputed {
	uint64_t records;         /* recomputed, each as it was kept */
	uint64_t without_journal; /* taken in from bundles whose journals stayed on the ship */
} fl_recomputed;
/* Recomputes every record of the book at `path` from its journal in so many threads. FL_E_TAMPERED names the first, in
 * the order of the chains, that does not come out as it was kept. Memory does not grow with the book. */
fl_status fl_keep_recompute(const char *path, int threads, const fl_store_watch *watch, fl_recomputed *out,
                            fl_error *err) FL_MUST_USE;

#endif
