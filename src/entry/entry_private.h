/* entry_private.h - the state of the conversation and what its parts share.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The state beside the journal is small: a form (what was asked back, slot by slot), and the draft of a reading that
 * waits for its temperature, its pressure or a confirmation. Losing both in a power cut loses nothing that was
 * committed, and the step follows from the session alone.
 */
#ifndef FOUNDLEFT_ENTRY_PRIVATE_H
#define FOUNDLEFT_ENTRY_PRIVATE_H

#include "foundleft/entry.h"
#include "foundleft/reference.h"

enum {
	FL_LINE_SIZE = 4096,   /* longest line that is looked at, bytes */
	FL_NAME_POINTS = 120,  /* longest name, code points */
	FL_PROSE_POINTS = 400, /* longest reason or remark */
	FL_SLOT_SIZE = 4 * FL_PROSE_POINTS + 1
};

/* What was asked back and waits for its answer. */
typedef enum fl_form_kind {
	FL_FORM_NONE,
	FL_FORM_UNDO,        /* reason */
	FL_FORM_STRIKE,      /* reason */
	FL_FORM_INDICATIVE,  /* reason, name */
	FL_FORM_DECLINE,     /* reason for a "no" that may be */
	FL_FORM_MISSING,     /* why there is no as-found run */
	FL_FORM_DECISION,    /* reason */
	FL_FORM_ADJUST,      /* before, after */
	FL_FORM_AMOUNT,      /* an implausible amount: yes or no */
	FL_FORM_TEMPERATURE, /* of the draft */
	FL_FORM_APPLIED,     /* pressure of the draft */
	FL_FORM_READING,     /* a question about the draft: yes or no */
	FL_FORM_MEASURE,     /* an unusual extra measurement: yes or no */
	FL_FORM_AGAINST,     /* adjusting is advised against: yes or no */
	FL_FORM_FINDING,     /* reason of the answer to a finding */
	FL_FORM_UNTRIED,     /* why a function check was not tried */
	FL_FORM_CHECK,       /* an unusual amount of a function check: yes or no */
	FL_FORM_COUNT
} fl_form_kind;

typedef struct fl_form {
	fl_form_kind kind;
	int slot; /* which answer comes next */
	char answers[2][FL_SLOT_SIZE];
	char item[FL_SLOT_SIZE]; /* what it is about: id, lot, text of an adjustment, amount as typed */
	int target;              /* sequence number, for undo and strike */
	fl_decision decision;
	fl_unit unit; /* of an amount */
	double value;
	char ask[512]; /* the question, where it is not fixed */
} fl_form;

/* Questions that a reading can raise. Each is asked once. */
typedef enum fl_doubt {
	FL_DOUBT_FAHRENHEIT_UNIT,
	FL_DOUBT_FAHRENHEIT_LOOK,
	FL_DOUBT_BATH,
	FL_DOUBT_APPLIED,
	FL_DOUBT_FAR,
	FL_DOUBT_IDENTICAL,
	FL_DOUBT_COUNT
} fl_doubt;

typedef struct fl_draft {
	fl_reading reading; /* strings point into the buffers below */
	char typed[FL_TYPED_SIZE], temp_typed[FL_TYPED_SIZE + 8], applied_typed[FL_TYPED_SIZE],
	    line_typed[FL_TYPED_SIZE + 8];
	double temp_as_typed;
	bool fahrenheit;
	unsigned confirmed; /* bits by fl_doubt */
	fl_doubt doubt;     /* the one that is being asked */
} fl_draft;

/* An extra measurement under way. */
typedef struct fl_measure_draft {
	fl_measure what;
	fl_decimal numbers[2]; /* the main one, then what goes with it */
	fl_unit units[2];
	char equipment[64]; /* id; "" for none named */
} fl_measure_draft;

struct fl_entry {
	fl_entry_setup setup;
	fl_journal *journal;
	const fl_session *session;
	fl_stock used; /* oils and equipment as the journal carries them: what the session is judged by */
	bool stopped;
	int shown_part;   /* the part whose heading stands on the screen; -1 none */
	long shown_place; /* the place on the plan likewise */
	fl_form form;
	fl_draft draft;
	fl_measure_draft measure;
	fl_advice advice; /* as last computed */
	bool advised, advice_shown;
	long advice_age; /* what it was computed from: grows with each measurement and each answer */
};

/* ---- step.c ---- */

typedef struct fl_entry_item {
	const char *id, *ask, *help;
	bool required;
	int part;
} fl_entry_item;
/* Identification and people; ends with an id of NULL. */
extern const fl_entry_item fl_entry_items[];
const fl_entry_item *fl_entry_item_find(const char *id);
/* The role that reads the output of this session's instrument. */
fl_role fl_entry_meter_role(const fl_session *session);
/* True if the reading stands at the step's run, cycle, pass and point and was not taken back. */
bool fl_entry_at_place(const fl_reading *reading, const fl_step *step);

/* ---- amount.c ---- */

/* What an amount may be. */
typedef struct fl_wanted {
	const char *what; /* "the output" */
	fl_unit unit;     /* default, and the unit of low and high */
	double low, high; /* possible */
} fl_wanted;
/* Reads one amount. *value is in wanted->unit, number as typed, *unit as typed or the default. FL_ASK where the mark
 * may be a thousands mark and both values are possible; err says what to type then. */
fl_status fl_entry_amount(const char *text, const fl_wanted *wanted, fl_decimal *number, fl_unit *unit, double *value,
                          fl_error *err) FL_MUST_USE;
/* Splits a line into at most `most` amounts: "10,42 mA at 40,02 °C, 1 bar". Returns the count, most + 1 if too many. */
int fl_entry_split(const char *line, char parts[][96], int most);
/* The shortest text that reads back as the same double. */
char *fl_entry_number(double value, char out[32]);

/* ---- say.c ---- */

fl_status fl_entry_check_text(const char *text, int most_points, bool required, const char *what,
                              fl_error *err) FL_MUST_USE;
const char *fl_entry_performer(const fl_entry *entry);
/* Stamps the event with the clock and commits it. */
fl_status fl_entry_commit(fl_entry *entry, fl_event *event, fl_error *err) FL_MUST_USE;
/* yes 1, no 0, neither -1. */
int fl_entry_yes(const char *text);

/* ---- reading.c ---- */

/* Places a draft at the step; `watched` values have no number. */
void fl_entry_draft_begin(fl_entry *entry, const fl_step *step, bool watched);
/* Fills the draft from a line. */
fl_status fl_entry_draft_read(fl_entry *entry, const char *line, fl_error *err) FL_MUST_USE;
fl_status fl_entry_draft_output(fl_entry *entry, const char *text, fl_error *err) FL_MUST_USE;
fl_status fl_entry_draft_line_pressure(fl_entry *entry, const char *text, fl_error *err) FL_MUST_USE;
fl_status fl_entry_draft_temperature(fl_entry *entry, const char *text, fl_error *err) FL_MUST_USE;
fl_status fl_entry_draft_applied(fl_entry *entry, const char *text, fl_error *err) FL_MUST_USE;
fl_status fl_entry_draft_check_temperature(const fl_entry *entry, fl_error *err) FL_MUST_USE;
/* Refuses what cannot be: signal, oil's range, still moving. */
fl_status fl_entry_draft_check(fl_entry *entry, fl_error *err) FL_MUST_USE;
/* The next doubt that is not confirmed yet; false if none. The question goes to ask[size]. */
bool fl_entry_draft_doubt(fl_entry *entry, char *ask, size_t size);
/* Begins the run if need be, writes the questions that were confirmed (with `answer`), then the reading. */
fl_status fl_entry_draft_commit(fl_entry *entry, const char *answer, const char *taken, fl_error *err) FL_MUST_USE;
/* What stands beside a committed reading: expected, error, corrections. */
void fl_entry_tell_reading(const fl_entry *entry, const fl_reading *reading, fl_text *say);

/* What the readings are reduced with, as the journal carries it. */
fl_status fl_entry_reference(const fl_entry *entry, fl_reference *out, fl_error *err) FL_MUST_USE;
/* A reading against what the instrument should show. */
fl_status fl_entry_judge(const fl_entry *entry, const fl_reading *reading, fl_reading_result *out,
                         fl_error *err) FL_MUST_USE;
/* The oil of a point, as the journal carries it; NULL if there is none. */
const fl_oil *fl_entry_oil(const fl_entry *entry, int point);

/* ---- settle.c ---- */

typedef struct fl_settling {
	int count;     /* values judged; 0: too few to judge */
	double span_s; /* time that they span */
	bool moving;
	bool temp_moving;
	double slope_per_s; /* in the signal's unit */
	double change_pct_span;
	double temp_k_per_min;
	bool has_end;
	double end;    /* of the output, information only */
	double wait_s; /* until the rule would be met; 0 unknown */
	int watched;   /* values watched here so far */
	double watched_span_s;
} fl_settling;
/* Judges the series at the step with `candidate` (NULL: none) as its last value. */
fl_settling fl_entry_settling(const fl_entry *entry, const fl_step *step, const fl_reading *candidate);

/* ---- answer.c, command.c ---- */

fl_status fl_entry_answer(fl_entry *entry, const char *line, fl_text *say, fl_error *err) FL_MUST_USE;
/* Answers the form that is open. */
fl_status fl_entry_form_answer(fl_entry *entry, const char *line, fl_text *say, fl_error *err) FL_MUST_USE;
void fl_entry_form_open(fl_entry *entry, fl_form_kind kind);
const char *fl_entry_form_prompt(const fl_entry *entry);
/* Takes a draft on: asks for what is missing, asks what is doubtful, or commits. */
fl_status fl_entry_draft_go_on(fl_entry *entry, fl_text *say, fl_error *err) FL_MUST_USE;
fl_status fl_entry_equip(fl_entry *entry, fl_role role, const char *id, fl_error *err) FL_MUST_USE;
/* Does the oil lie in the window of the point? */
fl_status fl_entry_oil_fits(const fl_entry *entry, int point, const fl_oil *oil, fl_error *err) FL_MUST_USE;
fl_status fl_entry_assign_oil(fl_entry *entry, int point, const fl_oil *oil, fl_error *err) FL_MUST_USE;
fl_status fl_entry_indicative(fl_entry *entry, const char *item, const char *reason, const char *by,
                              fl_error *err) FL_MUST_USE;
fl_status fl_entry_set(fl_entry *entry, const char *id, const char *typed, fl_error *err) FL_MUST_USE;
/* Keeps the text of measuring equipment in the journal, so that it may be named. */
fl_status fl_entry_keep_equipment(fl_entry *entry, const fl_equipment *item, fl_error *err) FL_MUST_USE;
/* For a pressure procedure: points without oil. */
fl_status fl_entry_plain_points(fl_entry *entry, fl_error *err) FL_MUST_USE;
/* The lot that is proposed for a point; NULL if none fits. */
const fl_oil *fl_entry_propose_oil(const fl_entry *entry, int point);
const fl_equipment *fl_entry_propose_equipment(const fl_entry *entry, fl_role role);
/* ---- measure.c, advice.c, check.c ------------------------------------------------------------------------------- */

/* "injection 150 mbar 11.66 mA with DP-2": reads it, asks back what is unusual, commits. */
fl_status fl_entry_measure(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) FL_MUST_USE;
fl_status fl_entry_measure_commit(fl_entry *entry, fl_text *say, fl_error *err) FL_MUST_USE;
/* The advice as it stands, computed if need be; NULL where there is nobody to give it, or it failed. */
const fl_advice *fl_entry_advice(fl_entry *entry);
/* The first question of the advice that is not answered yet; NULL if none. */
const fl_advice_question *fl_entry_open_question(fl_entry *entry);
/* Shows the advice at the decision, once for each time that it changed. */
void fl_entry_show_advice(fl_entry *entry, fl_text *out);
/* The command that shows it again. */
fl_status fl_entry_why(fl_entry *entry, fl_text *say, fl_error *err) FL_MUST_USE;
fl_status fl_entry_decide(fl_entry *entry, const char *line, fl_text *say, fl_error *err) FL_MUST_USE;
void fl_entry_ask_check(const fl_entry *entry, const fl_function_check *check, fl_text *out);
fl_status fl_entry_answer_check(fl_entry *entry, const fl_step *step, const char *line, fl_text *say,
                                fl_error *err) FL_MUST_USE;
/* Commits what the form holds: the amount that was asked back, or the reason for not trying. */
fl_status fl_entry_check_amount(fl_entry *entry, fl_text *say, fl_error *err) FL_MUST_USE;
fl_status fl_entry_check_untried(fl_entry *entry, fl_text *say, fl_error *err) FL_MUST_USE;

/* True if the line was a command; *status says how it went. */
bool fl_entry_command(fl_entry *entry, const char *line, fl_text *say, fl_status *status, fl_error *err);
/* The name of a point: "LK-10 (2511B)", "20 % of span", "stopped zero". */
char *fl_entry_point_name(const fl_entry *entry, int point, char *out, size_t size);

#endif
