/* session.h - taking an event in three moves, so that nothing can fail once the line is on disk.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_JOURNAL_SESSION_H
#define FOUNDLEFT_JOURNAL_SESSION_H

#include "foundleft/journal.h"

/* 1. Would the event be taken? Changes nothing. */
fl_status fl_session_check(const fl_session *session, const fl_event *event, fl_error *err) FL_MUST_USE;
/* 2. Copies the strings and makes room: all the memory that taking it needs. What the session says is unchanged. */
fl_status fl_session_prepare(fl_session *session, const fl_event *event, fl_event *kept, fl_error *err) FL_MUST_USE;
/* 3. Takes the kept copy. Cannot fail. */
void fl_session_take(fl_session *session, const fl_event *kept);

/* Sequence numbers that an undo line may name: what was undone, NULL-like FL_NOTHING otherwise. */
typedef enum fl_undoable {
	FL_NOTHING,
	FL_UNDO_SETTING,
	FL_UNDO_GATE,
	FL_UNDO_POINT,
	FL_UNDO_EQUIPMENT,
	FL_UNDO_READING,
	FL_UNDO_MISSING,
	FL_UNDO_DECISION,
	FL_UNDO_ADJUSTMENT,
	FL_UNDO_MEASUREMENT,
	FL_UNDO_FINDING,
	FL_UNDO_CHECK
} fl_undoable;
/* What stands under `sequence` that may be taken back now, and its index in its array. */
fl_undoable fl_session_find(const fl_session *session, int sequence, size_t *index);

#endif
