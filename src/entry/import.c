/* import.c - a table of readings becomes a session, through the same checks as the keyboard.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * What a table does not hold is recorded as not recorded: gates, conditions, what was adjusted. Times of readings are
 * not known, so that settling cannot be judged. What would have been asked is recorded as a question that was
 * answered "imported". Oils and equipment that are not shown to be in date on the day make the work indicative.
 */
#include "csv.h"
#include "entry_private.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char not_recorded[] = "not recorded (imported)";

typedef enum column {
	COL_SESSION,
	COL_DATE,
	COL_KIND,
	COL_CYCLE,
	COL_DIRECTION,
	COL_READING,
	COL_OIL,
	COL_LOT,
	COL_BATH,
	COL_OUTPUT,
	COL_LINE,
	COL_COUNT
} column;

static const char *const required_names[] = {"session", "date", "kind", "cycle", "direction",
                                             "reading", "oil",  "lot",  "bath_C"};

typedef struct table {
	fl_arena arena;
	fl_csv csv;
	size_t at[COL_COUNT]; /* SIZE_MAX where a column is absent */
	const fl_import_options *options;
} table;

static const char *cell(const table *t, const fl_csv_row *row, column which) {
	return t->at[which] == SIZE_MAX ? "" : row->cells[t->at[which]];
}

/* Refuses a cell: file, line, column by name. */
static fl_status at_cell(const table *t, const fl_csv_row *row, column which, fl_status status, const char *message,
                         fl_error *err) {
	fl_place place = {.file = t->csv.file, .line = row->line, .column = (int)t->at[which] + 1};
	place.field = t->at[which] == SIZE_MAX ? NULL : t->csv.names[t->at[which]];
	return fl_fail_at(err, status, place, "%s", message);
}

/* ---- the table ---- */

static fl_status need_column(table *t, column which, const char *name, fl_error *err) {
	t->at[which] = fl_csv_column(&t->csv, name);
	if (t->at[which] != SIZE_MAX)
		return FL_OK;
	return fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = t->csv.file, .line = 1},
	                  "the column \"%s\" is missing from the header", name);
}

/* `unit` NULL: the output is not needed (finding the day). */
static fl_status open_table(table *t, const char *csv, const char *file, const fl_import_options *options,
                            const char *unit, fl_error *err) {
	*t = (table){.options = options};
	fl_status status = fl_csv_parse(&t->arena, csv, file, &t->csv, err);
	for (int i = 0; i < (int)(sizeof required_names / sizeof required_names[0]) && status >= 0; i++)
		status = need_column(t, (column)i, required_names[i], err);
	char output[32];
	snprintf(output, sizeof output, "output_%s", unit ? unit : "");
	t->at[COL_OUTPUT] = SIZE_MAX;
	if (status >= 0 && unit)
		status = need_column(t, COL_OUTPUT, output, err);
	if (status >= 0)
		t->at[COL_LINE] = fl_csv_column(&t->csv, "line_bar_g");
	return status;
}

static bool belongs(const table *t, const fl_csv_row *row, fl_run_kind run) {
	const char *session = run == FL_RUN_AS_FOUND ? t->options->as_found : t->options->as_left;
	if (!t->options->as_found && !t->options->as_left)
		return strcmp(cell(t, row, COL_KIND), fl_run_word(run)) == 0;
	return session && strcmp(cell(t, row, COL_SESSION), session) == 0;
}

static const fl_csv_row *first_row(const table *t, fl_run_kind run) {
	for (size_t i = 0; i < t->csv.row_count; i++)
		if (belongs(t, &t->csv.rows[i], run))
			return &t->csv.rows[i];
	return NULL;
}

/* A chosen session that the table has not, or a kind that mixes sessions. */
static fl_status check_choice(const table *t, fl_run_kind run, fl_error *err) {
	const char *wanted = run == FL_RUN_AS_FOUND ? t->options->as_found : t->options->as_left;
	const fl_csv_row *first = first_row(t, run);
	if (!first && wanted)
		return fl_fail_at(err, FL_E_NOT_FOUND, (fl_place){.file = t->csv.file, .field = "session"},
		                  "no row has the session %s that was chosen as %s", wanted, fl_run_word(run));
	for (size_t i = 0; first && i < t->csv.row_count; i++) {
		const fl_csv_row *row = &t->csv.rows[i];
		char message[200];
		snprintf(message, sizeof message,
		         "%s rows of more than one session, %.40s and %.40s: choose which one is meant", fl_run_word(run),
		         cell(t, first, COL_SESSION), cell(t, row, COL_SESSION));
		if (belongs(t, row, run) && strcmp(cell(t, row, COL_SESSION), cell(t, first, COL_SESSION)) != 0)
			return at_cell(t, row, COL_SESSION, FL_E_VALUE, message, err);
	}
	return FL_OK;
}

static fl_status check_table(const table *t, fl_error *err) {
	fl_status status = check_choice(t, FL_RUN_AS_FOUND, err);
	if (status >= 0)
		status = check_choice(t, FL_RUN_AS_LEFT, err);
	if (status >= 0 && !first_row(t, FL_RUN_AS_FOUND) && !first_row(t, FL_RUN_AS_LEFT))
		status = fl_fail_at(err, FL_E_VALUE, (fl_place){.file = t->csv.file, .field = "kind"},
		                    "no row is of the kind as-found or as-left");
	return status;
}

static fl_status row_day(const table *t, const fl_csv_row *row, fl_day *day, fl_error *err) {
	fl_error inner = {0};
	fl_status status = fl_day_parse(cell(t, row, COL_DATE), day, &inner);
	return status < 0 ? at_cell(t, row, COL_DATE, status, inner.message, err) : FL_OK;
}

fl_status fl_entry_import_day(const char *csv, const char *file, const fl_import_options *options, fl_day *day,
                              fl_error *err) {
	table t;
	fl_status status = open_table(&t, csv, file, options, NULL, err);
	if (status >= 0)
		status = check_table(&t, err);
	if (status >= 0) {
		const fl_csv_row *row = first_row(&t, FL_RUN_AS_FOUND);
		status = row_day(&t, row ? row : first_row(&t, FL_RUN_AS_LEFT), day, err);
	}
	fl_arena_free(&t.arena);
	return status;
}

/* ---- where a row stands on the plan ---- */

static bool is_zero(const table *t, const fl_csv_row *row) {
	return strcmp(cell(t, row, COL_OIL), "ZERO") == 0;
}

static fl_status row_count(const table *t, const fl_csv_row *row, column which, int *out, fl_error *err) {
	const char *text = cell(t, row, which);
	char *end;
	long value = strtol(text, &end, 10);
	if (*text < '0' || *text > '9' || *end || value < 1 || value > 1000)
		return at_cell(t, row, which, FL_E_VALUE, "a whole number from 1 is needed", err);
	*out = (int)value;
	return FL_OK;
}

static fl_status row_pass(const table *t, const fl_csv_row *row, fl_pass *out, fl_error *err) {
	const char *text = cell(t, row, COL_DIRECTION);
	bool rising = strcmp(text, "up") == 0 || strcmp(text, "rising") == 0;
	if (!rising && strcmp(text, "down") != 0 && strcmp(text, "falling") != 0)
		return at_cell(t, row, COL_DIRECTION, FL_E_VALUE, "up or down is needed", err);
	*out = rising ? FL_PASS_RISING : FL_PASS_FALLING;
	return FL_OK;
}

static fl_status row_point(const fl_entry *entry, const table *t, const fl_csv_row *row, int *out, fl_error *err) {
	const fl_session *s = entry->session;
	*out = FL_POINT_ZERO;
	if (is_zero(t, row))
		return FL_OK;
	for (size_t i = 0; i < s->point_count; i++)
		if (strcmp(s->points[i].oil, cell(t, row, COL_OIL)) == 0 &&
		    strcmp(s->points[i].lot, cell(t, row, COL_LOT)) == 0) {
			*out = (int)i;
			return FL_OK;
		}
	return at_cell(t, row, COL_LOT, FL_E_VALUE, "this oil and lot is none of those of the first rising pass", err);
}

static fl_status wrong_place(const fl_entry *entry, const table *t, const fl_csv_row *row, const fl_step *step,
                             fl_error *err) {
	char message[400], name[160];
	const fl_procedure *p = entry->setup.procedure;
	if (step->kind != FL_STEP_READING)
		snprintf(message, sizeof message,
		         "one reading more than the procedure %.60s takes (cycles: %d, readings at a point: %d)", p->id,
		         p->cycles, p->readings);
	else
		snprintf(message, sizeof message,
		         "the procedure %.60s (cycles: %d, readings at a point: %d) wants cycle %d, %s, %s, reading %d here",
		         p->id, p->cycles, p->readings, step->cycle, fl_pass_word(step->pass),
		         fl_entry_point_name(entry, step->point, name, sizeof name), step->number);
	return at_cell(t, row, COL_READING, FL_E_STATE, message, err);
}

/* The row has to be the one that the plan wants next. */
static fl_status check_place(const fl_entry *entry, const table *t, const fl_csv_row *row, const fl_step *step,
                             fl_error *err) {
	fl_step here = {0};
	fl_status status = row_count(t, row, COL_CYCLE, &here.cycle, err);
	if (status >= 0)
		status = row_count(t, row, COL_READING, &here.number, err);
	if (status >= 0)
		status = row_pass(t, row, &here.pass, err);
	if (status >= 0)
		status = row_point(entry, t, row, &here.point, err);
	if (status < 0)
		return status;
	if (step->kind != FL_STEP_READING || here.cycle != step->cycle || here.pass != step->pass ||
	    here.point != step->point || here.number != step->number)
		return wrong_place(entry, t, row, step, err);
	return FL_OK;
}

/* ---- readings ---- */

static fl_status fill_draft(fl_entry *entry, const table *t, const fl_csv_row *row, fl_error *err) {
	static const struct {
		column which;
		fl_status (*read)(fl_entry *, const char *, fl_error *);
		bool needed;
	} columns[] = {{COL_OUTPUT, fl_entry_draft_output, true},
	               {COL_BATH, fl_entry_draft_temperature, true},
	               {COL_LINE, fl_entry_draft_line_pressure, false}};
	for (size_t i = 0; i < sizeof columns / sizeof columns[0]; i++) {
		fl_error inner = {0};
		const char *text = cell(t, row, columns[i].which);
		bool zero = columns[i].which == COL_BATH && is_zero(t, row);
		if (!*text && (zero || !columns[i].needed))
			continue;
		fl_status status = columns[i].read(entry, text, &inner);
		if (status != FL_OK)
			return at_cell(t, row, columns[i].which, status < 0 ? status : FL_E_VALUE, inner.message, err);
	}
	return FL_OK;
}

static fl_status import_row(fl_entry *entry, const table *t, const fl_csv_row *row, fl_error *err) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	char ask[512];
	fl_error inner = {0};
	fl_status status = check_place(entry, t, row, &step, err);
	if (status < 0)
		return status;
	fl_entry_draft_begin(entry, &step, false);
	entry->draft.reading.taken = INT64_MIN;
	status = fill_draft(entry, t, row, err);
	if (status < 0)
		return status;
	status = fl_entry_draft_check_temperature(entry, &inner);
	if (status < 0)
		return at_cell(t, row, COL_BATH, status, inner.message, err);
	status = fl_entry_draft_check(entry, &inner);
	while (status >= 0 && fl_entry_draft_doubt(entry, ask, sizeof ask))
		entry->draft.confirmed |= 1u << entry->draft.doubt;
	if (status >= 0)
		status = fl_entry_draft_commit(entry, "imported", "unknown", &inner);
	return status < 0 ? at_cell(t, row, COL_OUTPUT, status, inner.message, err) : FL_OK;
}

static fl_status import_run(fl_entry *entry, const table *t, fl_run_kind run, fl_error *err) {
	const fl_csv_row *last = NULL;
	fl_status status = FL_OK;
	for (size_t i = 0; i < t->csv.row_count && status >= 0; i++)
		if (belongs(t, &t->csv.rows[i], run)) {
			last = &t->csv.rows[i];
			status = import_row(entry, t, last, err);
		}
	if (status < 0)
		return status;
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	if (step.kind != FL_STEP_CLOSE_RUN) {
		char message[300];
		snprintf(message, sizeof message,
		         "the %s run ends here after %d readings: the procedure %.60s wants %d (cycles: %d, readings at a "
		         "point: %d)",
		         fl_run_word(run), step.done, entry->setup.procedure->id, step.total, entry->setup.procedure->cycles,
		         entry->setup.procedure->readings);
		return at_cell(t, last, COL_READING, FL_E_STATE, message, err);
	}
	fl_event event = {
	    .verb = FL_V_CLOSE_RUN, .fields[FL_F_RUN] = fl_run_word(run), .fields[FL_F_BY] = fl_entry_performer(entry)};
	return fl_entry_commit(entry, &event, err);
}

/* ---- what stands around the readings ---- */

static fl_status mark_indicative(fl_entry *entry, const char *item, const fl_error *why, fl_error *err) {
	char reason[300];
	snprintf(reason, sizeof reason, "imported: %.280s", why->message);
	return fl_entry_indicative(entry, item, reason, fl_entry_performer(entry), err);
}

static fl_status import_equipment(fl_entry *entry, const fl_step *step, fl_error *err) {
	const fl_stock *stock = entry->setup.stock;
	const fl_equipment *item = fl_entry_propose_equipment(entry, step->role);
	if (step->role == FL_ROLE_TACHOMETER)
		return fl_entry_set(entry, "no-tachometer", not_recorded, err);
	for (size_t i = 0; !item && i < stock->equipment_count; i++)
		if (stock->equipment[i].role == step->role)
			item = &stock->equipment[i];
	if (!item)
		return fl_fail(err, FL_E_NOT_FOUND, "the stock has no %s, and the readings need one",
		               fl_stock_role_text(step->role));
	fl_error why = {0};
	fl_status status = FL_OK;
	if (fl_stock_equipment_in_date(item, entry->session->day, &why) < 0)
		status = mark_indicative(entry, item->id, &why, err);
	return status < 0 ? status : fl_entry_equip(entry, step->role, item->id, err);
}

/* The row that first names the oil of `point`: the distinct oils of the first rising pass, in their order. */
static const fl_csv_row *oil_row(const fl_entry *entry, const table *t, int point) {
	const fl_session *s = entry->session;
	fl_run_kind run = first_row(t, FL_RUN_AS_FOUND) ? FL_RUN_AS_FOUND : FL_RUN_AS_LEFT;
	for (size_t i = 0; i < t->csv.row_count; i++) {
		const fl_csv_row *row = &t->csv.rows[i];
		bool known = !belongs(t, row, run) || is_zero(t, row);
		for (int p = 0; !known && p < point; p++)
			known = strcmp(s->points[p].lot, cell(t, row, COL_LOT)) == 0;
		if (!known)
			return row;
	}
	return NULL;
}

static fl_status import_oil(fl_entry *entry, const table *t, int point, fl_error *err) {
	const fl_csv_row *row = oil_row(entry, t, point);
	char message[300];
	if (!row)
		return fl_fail_at(err, FL_E_STATE, (fl_place){.file = t->csv.file, .field = "oil"},
		                  "the rows name %d oils: the procedure %s wants %d", point, entry->setup.procedure->id,
		                  entry->setup.procedure->point_count);
	const fl_oil *oil = fl_stock_oil(entry->setup.stock, cell(t, row, COL_LOT));
	if (!oil) {
		snprintf(message, sizeof message, "the lot \"%.60s\" is not in the stock", cell(t, row, COL_LOT));
		return at_cell(t, row, COL_LOT, FL_E_NOT_FOUND, message, err);
	}
	if (strcmp(oil->name, cell(t, row, COL_OIL)) != 0) {
		snprintf(message, sizeof message, "the lot %.60s is of %.60s, not of %.60s", oil->lot, oil->name,
		         cell(t, row, COL_OIL));
		return at_cell(t, row, COL_OIL, FL_E_VALUE, message, err);
	}
	fl_error why = {0}, inner = {0};
	fl_status status = fl_entry_oil_fits(entry, point, oil, &inner);
	if (status >= 0 && fl_stock_oil_in_date(oil, entry->session->day, &why) < 0)
		status = mark_indicative(entry, oil->lot, &why, &inner);
	if (status >= 0)
		status = fl_entry_assign_oil(entry, point, oil, &inner);
	return status < 0 ? at_cell(t, row, COL_OIL, status, inner.message, err) : FL_OK;
}

static fl_status import_gate(fl_entry *entry, const fl_step *step, fl_error *err) {
	fl_event event = {.verb = FL_V_GATE, .fields[FL_F_ID] = step->id, .fields[FL_F_ANSWER] = not_recorded};
	return fl_entry_commit(entry, &event, err);
}

static fl_status import_check(fl_entry *entry, const fl_step *step, fl_error *err) {
	fl_event event = {.verb = FL_V_CHECK, .fields[FL_F_ID] = step->id, .fields[FL_F_REASON] = not_recorded};
	return fl_entry_commit(entry, &event, err);
}

static fl_status import_as_found(fl_entry *entry, const table *t, fl_error *err) {
	if (first_row(t, FL_RUN_AS_FOUND)) {
		fl_event event = {.verb = FL_V_RUN, .fields[FL_F_RUN] = "as-found"};
		return fl_entry_commit(entry, &event, err);
	}
	fl_event event = {.verb = FL_V_MISSING, .fields[FL_F_RUN] = "as-found", .fields[FL_F_REASON] = not_recorded};
	return fl_entry_commit(entry, &event, err);
}

static fl_status import_decision(fl_entry *entry, const table *t, fl_error *err) {
	const char *reason = t->options->decision_reason;
	fl_event event = {.verb = FL_V_DECIDE,
	                  .fields[FL_F_ANSWER] = first_row(t, FL_RUN_AS_LEFT) ? "adjust" : "leave",
	                  .fields[FL_F_REASON] = reason && *reason ? reason : not_recorded,
	                  .fields[FL_F_BY] = fl_entry_performer(entry)};
	return fl_entry_commit(entry, &event, err);
}

static fl_status import_adjustment(fl_entry *entry, fl_error *err) {
	fl_event event = {.verb = FL_V_ADJUST,
	                  .fields[FL_F_ITEM] = not_recorded,
	                  .fields[FL_F_BEFORE] = "not recorded",
	                  .fields[FL_F_AFTER] = "not recorded"};
	fl_status status = fl_entry_commit(entry, &event, err);
	fl_event begin = {.verb = FL_V_RUN, .fields[FL_F_RUN] = "as-left"};
	return status < 0 ? status : fl_entry_commit(entry, &begin, err);
}

static fl_status import_end(fl_entry *entry, const table *t, fl_error *err) {
	char text[300];
	const char *slash = strrchr(t->csv.file, '/');
	snprintf(text, sizeof text, "Readings imported from %.200s; times of readings and gates were not recorded.",
	         slash ? slash + 1 : t->csv.file);
	fl_event remark = {.verb = FL_V_REMARK, .fields[FL_F_TYPED] = text};
	fl_status status = fl_entry_commit(entry, &remark, err);
	return status < 0 ? status : fl_entry_set(entry, "remarks-complete", "yes", err);
}

/* One step of the same order of work that the keyboard follows. */
static fl_status import_step(fl_entry *entry, const table *t, const fl_step *step, fl_error *err) {
	fl_event close = {.verb = FL_V_CLOSE, .fields[FL_F_BY] = fl_entry_performer(entry)};
	switch (step->kind) {
	case FL_STEP_SETTING:
		return fl_entry_set(entry, step->id,
		                    strcmp(step->id, "performed-by") == 0 ? t->options->performed_by : not_recorded, err);
	case FL_STEP_EQUIPMENT:
		return import_equipment(entry, step, err);
	case FL_STEP_OIL:
		return import_oil(entry, t, step->point, err);
	case FL_STEP_GATE:
	case FL_STEP_RESTORE:
		return import_gate(entry, step, err);
	case FL_STEP_CHECK:
		return import_check(entry, step, err);
	case FL_STEP_AS_FOUND:
		return import_as_found(entry, t, err);
	case FL_STEP_READING:
		return import_run(entry, t, step->run, err);
	case FL_STEP_DECISION:
		return import_decision(entry, t, err);
	case FL_STEP_ADJUSTMENT:
		return import_adjustment(entry, err);
	case FL_STEP_REMARKS:
		return import_end(entry, t, err);
	case FL_STEP_CLOSE:
		return fl_entry_commit(entry, &close, err);
	case FL_STEP_CLOSE_RUN:
	case FL_STEP_DONE:
		break;
	}
	return fl_fail(err, FL_E_INTERNAL, "the import came to a step that it does not know");
}

static fl_status check_options(const fl_entry_setup *setup, const fl_import_options *options, fl_error *err) {
	if (setup->procedure->medium != FL_MEDIUM_OIL)
		return fl_fail(err, FL_E_USAGE,
		               "the table has no column for an injected pressure: import takes oil procedures only");
	if (!options->performed_by)
		return fl_fail(err, FL_E_USAGE, "the import needs the name of who performed the work");
	return fl_entry_check_text(options->performed_by, FL_NAME_POINTS, true, "the performer's name", err);
}

static void tell(const fl_session *s, fl_text *say) {
	int counts[FL_RUN_KINDS] = {0};
	for (size_t i = 0; i < s->reading_count; i++)
		counts[s->readings[i].run]++;
	fl_text_printf(say, "  %d readings as-found and %d as-left imported", counts[FL_RUN_AS_FOUND],
	               counts[FL_RUN_AS_LEFT]);
	if (s->questions)
		fl_text_printf(say, ", %d of them doubtful (the journal names them)", s->questions);
	if (s->indicative_count)
		fl_text_printf(say, "; indicative, not traceable: %zu items are not shown to be in date", s->indicative_count);
	fl_text_add(say, "\n");
}

fl_status fl_entry_import(const fl_entry_setup *setup, const char *csv, const char *file,
                          const fl_import_options *options, fl_text *say, fl_error *err) {
	table t = {0};
	fl_entry *entry = NULL;
	const fl_signal_range *range = fl_physics_signal_range(setup->instrument->scale.signal);
	fl_status status = check_options(setup, options, err);
	if (status >= 0)
		status = open_table(&t, csv, file, options, fl_unit_text(range->unit), err);
	if (status >= 0)
		status = check_table(&t, err);
	if (status >= 0)
		status = fl_entry_new(&entry, setup, err);
	while (status >= 0 && !entry->session->closed) {
		fl_step step = fl_entry_step(entry->session, setup->procedure);
		status = import_step(entry, &t, &step, err);
	}
	if (status >= 0)
		tell(entry->session, say);
	fl_entry_free(entry);
	fl_arena_free(&t.arena);
	return status;
}
