/* foundleft/journal.h - the journal: one flushed line per committed entry, chained by digest; and the session that
 * replaying it gives.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The format and its validity rule stand at the head of src/journal/journal.c, and in docs/journal.md for people.
 * A session is a pure function of its journal: the same fl_event sequence gives the same fl_session, whether the events
 * come from the keyboard or from a file, because both go through fl_session_apply.
 */
#ifndef FOUNDLEFT_JOURNAL_H
#define FOUNDLEFT_JOURNAL_H

#include "foundleft/base.h"
#include "foundleft/procedure.h"
#include "foundleft/seal.h"
#include "foundleft/stock.h"

/* The format that this program writes and reads; stands in the `open` line. */
#define FL_JOURNAL_FORMAT "1"
/* A journal longer than this is refused. */
#define FL_JOURNAL_LIMIT ((size_t)64 * 1024 * 1024)

/* ---- events -------------------------------------------------------------------------------------------------- */

/* What can stand in a journal. Word in the file, meaning, fields required (others are optional). */
#define FL_VERB_LIST(X)                                                                                  \
	X(FL_V_OPEN, "open", "a session begins: format, program, day, source, clock")                        \
	X(FL_V_TEXT, "text", "procedure or stock item as used, verbatim: kind, name, body")                  \
	X(FL_V_SET, "set", "identification, person or condition: id, typed; value, unit for amounts")        \
	X(FL_V_GATE, "gate", "a safety gate or restoring step answered: id, answer; reason")                 \
	X(FL_V_POINT, "point", "a test point gets its oil: point, oil, lot")                                 \
	X(FL_V_EQUIP, "equip", "measuring equipment in use: role, id")                                       \
	X(FL_V_INDICATIVE, "indicative", "work goes on with something out of date: item, reason, by")        \
	X(FL_V_RUN, "run", "a run begins: run")                                                              \
	X(FL_V_MISSING, "missing", "a run can't be had: run, reason")                                        \
	X(FL_V_WATCH, "watch", "an output seen while settling: run, cycle, pass, point, typed, unit, value") \
	X(FL_V_READ, "read",                                                                                 \
	  "a reading: run, cycle, pass, point, number, typed, unit, value, and its temperature or "          \
	  "pressure")                                                                                        \
	X(FL_V_STRIKE, "strike", "a reading is set aside: target, reason, by")                               \
	X(FL_V_UNDO, "undo", "an entry is taken back by a new line: target, reason, by")                     \
	X(FL_V_QUESTION, "question", "the program asked and the person confirmed: about, answer")            \
	X(FL_V_CLOSE_RUN, "close-run", "a run is complete and locked: run, by")                              \
	X(FL_V_DECIDE, "decide", "adjust, leave or repair: answer, reason, by")                              \
	X(FL_V_ADJUST, "adjust", "one adjustment: item, before, after")                                      \
	X(FL_V_REMARK, "remark", "a remark: typed")                                                          \
	X(FL_V_TORN, "torn", "an unfinished line was found behind the last good one and cut off: body")      \
	X(FL_V_RESUME, "resume", "the session was taken up again: program, source")                          \
	X(FL_V_MEASURE, "measure",                                                                           \
	  "an extra measurement: run (whose state it was made in), id (what), typed, unit, value; with it "  \
	  "the pressure applied, the time or the thermometer in use; item (measuring equipment)")            \
	X(FL_V_FINDING, "finding", "what the program found is answered: id, answer, reason, by")             \
	X(FL_V_CHECK, "check", "a function check: id; answer, or typed with unit and value, or reason")      \
	X(FL_V_CLOSE, "close", "the session is closed: by")                                                  \
	X(FL_V_ISSUE, "issue",                                                                               \
	  "a certificate is issued: id (its number), day, program, item (the journal's name); name and "     \
	  "body (issuer and address), about and reason (number it amends, and why), by (who authorises it)")

typedef enum fl_verb {
#define FL_VERB_ENUM(name, word, meaning) name,
	FL_VERB_LIST(FL_VERB_ENUM)
#undef FL_VERB_ENUM
	    FL_VERB_COUNT
} fl_verb;

/* The fields that a line may carry, each at most once, in this order. */
#define FL_FIELD_LIST(X)                 \
	X(FL_F_FORMAT, "format")             \
	X(FL_F_PROGRAM, "program")           \
	X(FL_F_DAY, "day")                   \
	X(FL_F_SOURCE, "source")             \
	X(FL_F_CLOCK, "clock")               \
	X(FL_F_KIND, "kind")                 \
	X(FL_F_NAME, "name")                 \
	X(FL_F_BODY, "body")                 \
	X(FL_F_ID, "id")                     \
	X(FL_F_ROLE, "role")                 \
	X(FL_F_ITEM, "item")                 \
	X(FL_F_RUN, "run")                   \
	X(FL_F_CYCLE, "cycle")               \
	X(FL_F_PASS, "pass")                 \
	X(FL_F_POINT, "point")               \
	X(FL_F_OIL, "oil")                   \
	X(FL_F_LOT, "lot")                   \
	X(FL_F_NUMBER, "number")             \
	X(FL_F_TYPED, "typed")               \
	X(FL_F_UNIT, "unit")                 \
	X(FL_F_VALUE, "value")               \
	X(FL_F_TEMP_TYPED, "temp")           \
	X(FL_F_TEMP_C, "temp-c")             \
	X(FL_F_APPLIED_TYPED, "applied")     \
	X(FL_F_APPLIED_UNIT, "applied-unit") \
	X(FL_F_APPLIED_PA, "applied-pa")     \
	X(FL_F_LINE_TYPED, "line")           \
	X(FL_F_LINE_PA, "line-pa")           \
	X(FL_F_OVER_TYPED, "over")           \
	X(FL_F_OVER_S, "over-s")             \
	X(FL_F_TAKEN, "taken")               \
	X(FL_F_TARGET, "target")             \
	X(FL_F_ABOUT, "about")               \
	X(FL_F_ANSWER, "answer")             \
	X(FL_F_BEFORE, "before")             \
	X(FL_F_AFTER, "after")               \
	X(FL_F_REASON, "reason")             \
	X(FL_F_BY, "by")

typedef enum fl_field {
#define FL_FIELD_ENUM(name, word) name,
	FL_FIELD_LIST(FL_FIELD_ENUM)
#undef FL_FIELD_ENUM
	    FL_FIELD_COUNT
} fl_field;

/* One line of the journal in memory. Strings are borrowed; NULL where a field is absent. */
typedef struct fl_event {
	int sequence; /* from 1 */
	fl_utc at;    /* clock of the machine when it was written; may go back, sequence never does */
	fl_verb verb;
	const char *fields[FL_FIELD_COUNT];
} fl_event;

const char *fl_verb_word(fl_verb verb);
const char *fl_field_word(fl_field field);

/* ---- the session ----------------------------------------------------------------------------------------------- */

typedef enum fl_source { FL_SOURCE_KEYBOARD, FL_SOURCE_REPLAY, FL_SOURCE_IMPORT } fl_source;
typedef enum fl_run_kind { FL_RUN_AS_FOUND, FL_RUN_AS_LEFT, FL_RUN_KINDS } fl_run_kind;
typedef enum fl_pass { FL_PASS_RISING, FL_PASS_FALLING } fl_pass;
typedef enum fl_decision { FL_DECISION_NONE, FL_DECISION_ADJUST, FL_DECISION_LEAVE, FL_DECISION_REPAIR } fl_decision;
const char *fl_run_word(fl_run_kind run);     /* "as-found", "as-left" */
const char *fl_pass_word(fl_pass pass);       /* "rising", "falling" */
const char *fl_source_word(fl_source source); /* "keyboard", "replay", "import" */
const char *fl_decision_word(fl_decision decision);

#define FL_POINT_ZERO (-1) /* the stopped zero */

/* One reading, or a value watched while settling. */
typedef struct fl_reading {
	int sequence;
	fl_utc at;    /* when it was written */
	fl_utc taken; /* when it was taken, INT64_MIN where only the day is known (import) */
	fl_run_kind run;
	int cycle; /* from 1 */
	fl_pass pass;
	int point;  /* index into the session's points, FL_POINT_ZERO for the stopped zero */
	int number; /* from 1 within run, cycle, pass and point; 0 for a watched value */
	bool watched;
	const char *typed; /* the output as typed */
	fl_unit unit;
	double output; /* in `unit`, not corrected */
	bool has_temp;
	const char *temp_typed;
	double temp_c;    /* as read, not corrected */
	bool has_applied; /* differential pressure injected */
	const char *applied_typed;
	fl_unit applied_unit;
	double applied_pa;
	bool has_line;
	const char *line_typed;
	double line_pa; /* line pressure, gauge */
	bool struck;    /* set aside: stays in the record */
	const char *struck_reason, *struck_by;
	int struck_sequence;
	bool undone; /* taken back by the person who typed it, by a later line */
} fl_reading;

typedef struct fl_setting {
	int sequence;
	const char *id, *typed;
	fl_unit unit;
	double value; /* in `unit`; NAN for text */
	bool undone;  /* corrected later: the last one that is not undone counts */
} fl_setting;

typedef struct fl_gate_answer {
	int sequence;
	fl_utc at;
	const char *id, *answer, *reason; /* answer "yes", "no" or the amount as typed; reason NULL if none */
	bool undone;
} fl_gate_answer;

typedef struct fl_session_point {
	int sequence;
	const char *oil, *lot; /* "" for a pressure point */
} fl_session_point;

typedef struct fl_session_text {
	const char *kind; /* procedure, instrument, oil, equipment */
	const char *name, *body;
} fl_session_text;

typedef struct fl_session_equipment {
	fl_role role;
	const char *id;
	bool undone;
	int sequence;
} fl_session_equipment;

typedef struct fl_indicative {
	int sequence;
	const char *item, *reason, *by;
} fl_indicative;

typedef struct fl_session_run {
	bool begun, closed, missing;
	int missing_sequence;
	const char *missing_reason;
	fl_utc begun_at, closed_at;
	const char *closed_by;
} fl_session_run;

typedef struct fl_adjustment {
	int sequence;
	fl_utc at;
	const char *item, *before, *after;
	bool undone;
} fl_adjustment;

typedef struct fl_remark {
	int sequence;
	fl_utc at;
	const char *typed;
} fl_remark;

/* What can be measured besides the readings, to tell causes apart. Word, what is measured. */
#define FL_MEASURE_LIST(X)                                                                              \
	X(FL_MEASURE_INJECTION, "injection", "a differential pressure injected into the transmitter alone") \
	X(FL_MEASURE_SPEED, "speed", "revolutions counted at the pump shaft")                               \
	X(FL_MEASURE_VOLUME, "volume", "a volume through the capillary, timed")                             \
	X(FL_MEASURE_DENSITY, "density", "the density that the dial assumes, from plate or papers")         \
	X(FL_MEASURE_TEMPERATURE, "temperature", "a second thermometer in the oil, beside the one in use")  \
	X(FL_MEASURE_SPANNED, "spanned-out", "sum of the span corrections since the capillary was cleaned")

typedef enum fl_measure {
#define FL_MEASURE_ENUM(name, word, meaning) name,
	FL_MEASURE_LIST(FL_MEASURE_ENUM)
#undef FL_MEASURE_ENUM
	    FL_MEASURE_COUNT
} fl_measure;
const char *fl_measure_word(fl_measure what);

typedef struct fl_measurement {
	int sequence;
	fl_utc at;
	fl_measure what;
	fl_run_kind run; /* the instrument was in the state of this run */
	const char *typed;
	fl_unit unit;
	double value;              /* in `unit`: output, speed, volume, density, temperature, ratio */
	const char *applied_typed; /* injection; else NULL */
	fl_unit applied_unit;
	double applied_pa;
	const char *over_typed; /* volume: the time; else NULL */
	double over_s;
	const char *temp_typed; /* temperature: what the thermometer in use showed; else NULL */
	double temp_c;
	const char *equipment; /* id of what it was measured with; NULL if none was named */
	bool undone;
} fl_measurement;

/* The answer to a finding that wanted one before anything is decided. */
typedef struct fl_finding_answer {
	int sequence;
	const char *id;
	bool yes; /* it is so */
	const char *reason, *by;
	bool undone;
} fl_finding_answer;

/* What a function check found, before the loop is restored. */
typedef struct fl_check_answer {
	int sequence;
	fl_utc at;
	const char *id;
	const char *answer; /* "yes", "no"; NULL for an amount or where it was not tried */
	const char *typed;  /* amount as typed; NULL where there is none */
	fl_unit unit;
	double value;       /* in `unit`; NAN without */
	const char *reason; /* why it was not tried; NULL if it was */
	bool undone;
} fl_check_answer;

/* A certificate as issued: all that the session itself does not say. NULL where absent. */
typedef struct fl_session_issue {
	int sequence;
	fl_utc at;
	const char *number;
	fl_day day;
	const char *program;      /* version that made it */
	const char *journal_name; /* as it stands on the certificate */
	const char *issuer, *address;
	const char *amends, *reason; /* number of the certificate that this one replaces, and why */
	const char *authorised_by;
} fl_session_issue;

/* What was read, in the order of the journal. No behaviour; built only by fl_session_apply. */
typedef struct fl_session {
	fl_arena arena;
	fl_source source;
	bool declared_clock; /* times come from the replayed file, not from the machine */
	const char *program; /* version that began it */
	fl_day day;          /* day of the calibration */
	fl_utc opened_at;
	fl_session_text *texts;
	size_t text_count, text_capacity;
	fl_setting *settings;
	size_t setting_count, setting_capacity;
	fl_gate_answer *gates;
	size_t gate_count, gate_capacity;
	fl_session_point *points; /* indexed by point */
	size_t point_count, point_capacity;
	fl_session_equipment *equipment;
	size_t equipment_count, equipment_capacity;
	fl_indicative *indicative;
	size_t indicative_count, indicative_capacity;
	fl_session_run runs[FL_RUN_KINDS];
	fl_reading *readings; /* readings and watched values */
	size_t reading_count, reading_capacity;
	fl_decision decision;
	int decision_sequence;
	const char *decision_reason, *decision_by;
	fl_adjustment *adjustments;
	size_t adjustment_count, adjustment_capacity;
	fl_remark *remarks;
	size_t remark_count, remark_capacity;
	fl_measurement *measurements;
	size_t measurement_count, measurement_capacity;
	fl_finding_answer *findings;
	size_t finding_count, finding_capacity;
	fl_check_answer *checks;
	size_t check_count, check_capacity;
	int questions; /* times the program asked back and was confirmed */
	bool closed;
	const char *closed_by;
	fl_utc closed_at;
	fl_session_issue *issues; /* certificates, in the order of their issue */
	size_t issue_count, issue_capacity;
	int last_sequence;
	fl_utc last_at;
} fl_session;

/* Takes one event into the session. FL_E_STATE where the order of work forbids it (a reading in a closed run, an
 * adjustment before the as-found run is closed or declared missing, an as-found reading after an adjustment, an
 * as-left run before the decision, anything but a remark or a certificate after close), FL_E_VALUE where a field makes
 * no sense. On failure the session is unchanged. */
fl_status fl_session_apply(fl_session *session, const fl_event *event, fl_error *err) FL_MUST_USE;
void fl_session_free(fl_session *session);
/* The setting that counts, NULL if none. */
const fl_setting *fl_session_setting(const fl_session *session, const char *id);
const fl_gate_answer *fl_session_gate(const fl_session *session, const char *id);
const char *fl_session_equipment_id(const fl_session *session, fl_role role); /* NULL if none */
/* The answers that count; NULL if none. */
const fl_finding_answer *fl_session_finding(const fl_session *session, const char *id);
const fl_check_answer *fl_session_check_answer(const fl_session *session, const char *id);
/* Which run shows the instrument as it is now: as-left from the first adjustment on, or where there is no as-found. */
fl_run_kind fl_session_state(const fl_session *session);
/* Is the work with the oils done, so that functions can be checked? */
bool fl_session_runs_done(const fl_session *session);
/* The body of the text of `kind` and `name` (NULL: the first of that kind); NULL if none. */
const char *fl_session_text_body(const fl_session *session, const char *kind, const char *name);
/* The certificate of that number, NULL if none was issued. */
const fl_session_issue *fl_session_issue_of(const fl_session *session, const char *number);
/* The certificate that amends that one, NULL if none does. */
const fl_session_issue *fl_session_amended_by(const fl_session *session, const char *number);

/* Does this session need an as-left run: after an adjustment, or where there is no as-found run to stand for it. */
bool fl_session_wants_as_left(const fl_session *session);
/* Sequence of the latest entry that an undo line may take back; 0 if there is none. Whatever a closed run, a decision
 * that was acted on or a chosen oil already read holds fast cannot be taken back. */
int fl_session_last_undoable(const fl_session *session);

/* Parses the procedure and the stock items that the session carries. */
fl_status fl_session_procedure(const fl_session *session, fl_procedure *out, fl_error *err) FL_MUST_USE;
fl_status fl_session_stock(const fl_session *session, fl_stock *out, fl_error *err) FL_MUST_USE;

/* ---- the file ---------------------------------------------------------------------------------------------------- */

/* An open journal: file, chain and session together. */
typedef struct fl_journal {
	fl_append file;
	fl_hasher *hasher;
	char head[FL_DIGEST_HEX_SIZE]; /* digest of the last line; 64 zeros before the first */
	fl_session session;
} fl_journal;

/* Creates the file and writes the `open` line. The path must not exist. */
fl_status fl_journal_create(fl_journal *journal, const fl_io *io, const char *path, const fl_event *open,
                            fl_error *err) FL_MUST_USE;
/* Opens for going on: reads, verifies the whole chain, replays; an unfinished last line is cut off and told by a
 * `torn` line at `now`. FL_E_TAMPERED names the first line that does not fit. */
fl_status fl_journal_resume(fl_journal *journal, const fl_io *io, const char *path, fl_utc now,
                            fl_error *err) FL_MUST_USE;
/* The same from memory: bytes[length] as they stood in the file; `name` stands for it in errors. `hasher` is used for
 * the digests and may serve the next journal. */
fl_status fl_journal_replay(const char *bytes, size_t length, const char *name, fl_hasher *hasher, fl_session *session,
                            char head[FL_DIGEST_HEX_SIZE], fl_error *err) FL_MUST_USE;
/* Reads only: verifies and replays, ignores an unfinished last line (*torn tells). head[] gets the digest. */
fl_status fl_journal_read(const fl_io *io, const char *path, fl_session *session, char head[FL_DIGEST_HEX_SIZE],
                          bool *torn, fl_error *err) FL_MUST_USE;
/* The journal as it stood when that line was written: session and head of its first lines, up to and with `sequence`.
 * The file is verified whole. *bytes (arena memory) are those lines, *length of them. FL_E_NOT_FOUND where there is no
 * such line. */
fl_status fl_journal_read_to(const fl_io *io, const char *path, int sequence, fl_session *session,
                             char head[FL_DIGEST_HEX_SIZE], fl_arena *arena, char **bytes, size_t *length,
                             fl_error *err) FL_MUST_USE;
/* The digest that the line of this event would have if it were committed next; writes nothing. */
fl_status fl_journal_foresee(const fl_journal *journal, fl_event *event, char head[FL_DIGEST_HEX_SIZE],
                             fl_error *err) FL_MUST_USE;
/* Checks the event against the session, writes it, flushes it to disk, then takes it into the session. The event's
 * sequence is set here. When it returns FL_OK the entry is committed; otherwise nothing changed. */
fl_status fl_journal_commit(fl_journal *journal, fl_event *event, fl_error *err) FL_MUST_USE;
void fl_journal_close(fl_journal *journal);

#endif
