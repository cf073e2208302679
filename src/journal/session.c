/* session.c - events become a session: strings kept, arrays grown, marks set.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "session.h"
#include "words.h"

#include <math.h>
#include <string.h>

/* ---- making room ----------------------------------------------------------------------------------------------------
 */

#define GROW(items, count, capacity)                                                                \
	do {                                                                                            \
		void *grown = fl_arena_grow(&s->arena, s->items, s->count, &s->capacity, sizeof *s->items); \
		if (!grown)                                                                                 \
			return false;                                                                           \
		s->items = grown;                                                                           \
	} while (0)

static bool make_room(fl_session *s, fl_verb verb) {
	switch (verb) {
	case FL_V_TEXT:
		GROW(texts, text_count, text_capacity);
		break;
	case FL_V_SET:
		GROW(settings, setting_count, setting_capacity);
		break;
	case FL_V_GATE:
		GROW(gates, gate_count, gate_capacity);
		break;
	case FL_V_POINT:
		GROW(points, point_count, point_capacity);
		break;
	case FL_V_EQUIP:
		GROW(equipment, equipment_count, equipment_capacity);
		break;
	case FL_V_INDICATIVE:
		GROW(indicative, indicative_count, indicative_capacity);
		break;
	case FL_V_WATCH:
	case FL_V_READ:
		GROW(readings, reading_count, reading_capacity);
		break;
	case FL_V_ADJUST:
		GROW(adjustments, adjustment_count, adjustment_capacity);
		break;
	case FL_V_REMARK:
		GROW(remarks, remark_count, remark_capacity);
		break;
	case FL_V_MEASURE:
		GROW(measurements, measurement_count, measurement_capacity);
		break;
	case FL_V_FINDING:
		GROW(findings, finding_count, finding_capacity);
		break;
	case FL_V_CHECK:
		GROW(checks, check_count, check_capacity);
		break;
	case FL_V_ISSUE:
		GROW(issues, issue_count, issue_capacity);
		break;
	default:
		break;
	}
	return true;
}

fl_status fl_session_prepare(fl_session *s, const fl_event *event, fl_event *kept, fl_error *err) {
	*kept = *event;
	for (int f = 0; f < FL_FIELD_COUNT; f++) {
		if (!event->fields[f])
			continue;
		kept->fields[f] = fl_arena_strdup(&s->arena, event->fields[f]);
		if (!kept->fields[f])
			return fl_fail(err, FL_E_MEMORY, "out of memory for the session");
	}
	if (!make_room(s, event->verb))
		return fl_fail(err, FL_E_MEMORY, "out of memory for the session");
	return FL_OK;
}

/* ---- taking ---- */

static fl_unit unit_of(const char *text) {
	fl_unit unit = FL_U_NONE;
	if (!text || fl_unit_parse(text, &unit, NULL) < 0)
		return FL_U_NONE;
	return unit;
}

static fl_run_kind run_of(const fl_event *e) {
	return (fl_run_kind)fl_words_index(fl_words_runs, e->fields[FL_F_RUN]);
}

static void take_open(fl_session *s, const fl_event *e) {
	s->source = (fl_source)fl_words_index(fl_words_sources, e->fields[FL_F_SOURCE]);
	s->declared_clock = strcmp(e->fields[FL_F_CLOCK], "declared") == 0;
	s->program = e->fields[FL_F_PROGRAM];
	if (fl_day_parse(e->fields[FL_F_DAY], &s->day, NULL) < 0)
		s->day = FL_NO_DAY;
	s->opened_at = e->at;
}

static void take_setting(fl_session *s, const fl_event *e) {
	s->settings[s->setting_count++] = (fl_setting){
	    .sequence = e->sequence,
	    .id = e->fields[FL_F_ID],
	    .typed = e->fields[FL_F_TYPED],
	    .unit = unit_of(e->fields[FL_F_UNIT]),
	    .value = e->fields[FL_F_VALUE] ? fl_words_real(e->fields[FL_F_VALUE]) : NAN,
	};
}

static void take_equipment(fl_session *s, const fl_event *e) {
	fl_role role = (fl_role)fl_words_index(fl_field_rules[FL_F_ROLE].words, e->fields[FL_F_ROLE]);
	s->equipment[s->equipment_count++] =
	    (fl_session_equipment){.role = role, .id = e->fields[FL_F_ID], .sequence = e->sequence};
}

static fl_utc taken_at(const fl_event *e) {
	fl_utc utc = e->at;
	const char *taken = e->fields[FL_F_TAKEN];
	if (taken && fl_utc_parse(taken, &utc, NULL) < 0)
		return INT64_MIN;
	return utc;
}

static void take_reading(fl_session *s, const fl_event *e) {
	const char *const *f = e->fields;
	fl_reading r = {
	    .sequence = e->sequence,
	    .at = e->at,
	    .taken = taken_at(e),
	    .run = run_of(e),
	    .cycle = fl_words_count(f[FL_F_CYCLE]),
	    .pass = (fl_pass)fl_words_index(fl_words_passes, f[FL_F_PASS]),
	    .point = fl_words_point(f[FL_F_POINT]),
	    .number = f[FL_F_NUMBER] ? fl_words_count(f[FL_F_NUMBER]) : 0,
	    .watched = e->verb == FL_V_WATCH,
	    .typed = f[FL_F_TYPED],
	    .unit = unit_of(f[FL_F_UNIT]),
	    .output = fl_words_real(f[FL_F_VALUE]),
	    .has_temp = f[FL_F_TEMP_C] != NULL,
	    .temp_typed = f[FL_F_TEMP_TYPED],
	    .has_applied = f[FL_F_APPLIED_PA] != NULL,
	    .applied_typed = f[FL_F_APPLIED_TYPED],
	    .applied_unit = unit_of(f[FL_F_APPLIED_UNIT]),
	    .has_line = f[FL_F_LINE_PA] != NULL,
	    .line_typed = f[FL_F_LINE_TYPED],
	};
	r.temp_c = r.has_temp ? fl_words_real(f[FL_F_TEMP_C]) : 0.0;
	r.applied_pa = r.has_applied ? fl_words_real(f[FL_F_APPLIED_PA]) : 0.0;
	r.line_pa = r.has_line ? fl_words_real(f[FL_F_LINE_PA]) : 0.0;
	s->readings[s->reading_count++] = r;
}

static void take_strike(fl_session *s, const fl_event *e) {
	int target = fl_words_count(e->fields[FL_F_TARGET]);
	for (size_t i = 0; i < s->reading_count; i++) {
		fl_reading *r = &s->readings[i];
		if (r->sequence != target)
			continue;
		r->struck = true;
		r->struck_reason = e->fields[FL_F_REASON];
		r->struck_by = e->fields[FL_F_BY];
		r->struck_sequence = e->sequence;
	}
}

/* What is no longer used does not make the work indicative. Its lines stay in the journal. */
static void drop_indicative(fl_session *s, const char *item) {
	size_t kept = 0;
	for (size_t i = 0; i < s->indicative_count; i++)
		if (strcmp(s->indicative[i].item, item) != 0)
			s->indicative[kept++] = s->indicative[i];
	s->indicative_count = kept;
}

static bool lot_in_use(const fl_session *s, const char *lot) {
	for (size_t i = 0; i < s->point_count; i++)
		if (strcmp(s->points[i].lot, lot) == 0)
			return true;
	return false;
}

static void take_back_point(fl_session *s) {
	const char *lot = s->points[--s->point_count].lot;
	if (!lot_in_use(s, lot))
		drop_indicative(s, lot);
}

static void take_undo(fl_session *s, const fl_event *e) {
	size_t i;
	switch (fl_session_find(s, fl_words_count(e->fields[FL_F_TARGET]), &i)) {
	case FL_UNDO_SETTING:
		s->settings[i].undone = true;
		break;
	case FL_UNDO_GATE:
		s->gates[i].undone = true;
		break;
	case FL_UNDO_POINT:
		take_back_point(s);
		break;
	case FL_UNDO_EQUIPMENT:
		s->equipment[i].undone = true;
		drop_indicative(s, s->equipment[i].id);
		break;
	case FL_UNDO_READING:
		s->readings[i].undone = true;
		break;
	case FL_UNDO_ADJUSTMENT:
		s->adjustments[i].undone = true;
		break;
	case FL_UNDO_MEASUREMENT:
		s->measurements[i].undone = true;
		break;
	case FL_UNDO_FINDING:
		s->findings[i].undone = true;
		break;
	case FL_UNDO_CHECK:
		s->checks[i].undone = true;
		break;
	case FL_UNDO_MISSING:
		s->runs[i].missing = false;
		s->runs[i].missing_reason = NULL;
		break;
	case FL_UNDO_DECISION:
		s->decision = FL_DECISION_NONE;
		s->decision_reason = s->decision_by = NULL;
		break;
	case FL_NOTHING:
		break;
	}
}

static void take_run(fl_session *s, const fl_event *e) {
	fl_session_run *run = &s->runs[run_of(e)];
	switch (e->verb) {
	case FL_V_RUN:
		run->begun = true;
		run->begun_at = e->at;
		break;
	case FL_V_MISSING:
		run->missing = true;
		run->missing_sequence = e->sequence;
		run->missing_reason = e->fields[FL_F_REASON];
		break;
	default:
		run->closed = true;
		run->closed_at = e->at;
		run->closed_by = e->fields[FL_F_BY];
		break;
	}
}

static void take_decision(fl_session *s, const fl_event *e) {
	s->decision = (fl_decision)fl_words_index(fl_words_decisions, e->fields[FL_F_ANSWER]);
	s->decision_sequence = e->sequence;
	s->decision_reason = e->fields[FL_F_REASON];
	s->decision_by = e->fields[FL_F_BY];
}

static double real_or_nan(const char *text) {
	return text ? fl_words_real(text) : NAN;
}

static void take_measurement(fl_session *s, const fl_event *e) {
	const char *const *f = e->fields;
	s->measurements[s->measurement_count++] =
	    (fl_measurement){.sequence = e->sequence,
	                     .at = e->at,
	                     .what = (fl_measure)fl_words_index(fl_words_measures, f[FL_F_ID]),
	                     .run = run_of(e),
	                     .typed = f[FL_F_TYPED],
	                     .unit = unit_of(f[FL_F_UNIT]),
	                     .value = fl_words_real(f[FL_F_VALUE]),
	                     .applied_typed = f[FL_F_APPLIED_TYPED],
	                     .applied_unit = unit_of(f[FL_F_APPLIED_UNIT]),
	                     .applied_pa = real_or_nan(f[FL_F_APPLIED_PA]),
	                     .over_typed = f[FL_F_OVER_TYPED],
	                     .over_s = real_or_nan(f[FL_F_OVER_S]),
	                     .temp_typed = f[FL_F_TEMP_TYPED],
	                     .temp_c = real_or_nan(f[FL_F_TEMP_C]),
	                     .equipment = f[FL_F_ITEM]};
}

static void take_finding(fl_session *s, const fl_event *e) {
	s->findings[s->finding_count++] = (fl_finding_answer){.sequence = e->sequence,
	                                                      .id = e->fields[FL_F_ID],
	                                                      .yes = strcmp(e->fields[FL_F_ANSWER], "yes") == 0,
	                                                      .reason = e->fields[FL_F_REASON],
	                                                      .by = e->fields[FL_F_BY]};
}

static void take_check(fl_session *s, const fl_event *e) {
	const char *const *f = e->fields;
	s->checks[s->check_count++] = (fl_check_answer){.sequence = e->sequence,
	                                                .at = e->at,
	                                                .id = f[FL_F_ID],
	                                                .answer = f[FL_F_ANSWER],
	                                                .typed = f[FL_F_TYPED],
	                                                .unit = unit_of(f[FL_F_UNIT]),
	                                                .value = real_or_nan(f[FL_F_VALUE]),
	                                                .reason = f[FL_F_REASON]};
}

static void take_issue(fl_session *s, const fl_event *e) {
	const char *const *f = e->fields;
	fl_session_issue *issue = &s->issues[s->issue_count++];
	*issue = (fl_session_issue){.sequence = e->sequence,
	                            .at = e->at,
	                            .number = f[FL_F_ID],
	                            .day = FL_NO_DAY,
	                            .program = f[FL_F_PROGRAM],
	                            .journal_name = f[FL_F_ITEM],
	                            .issuer = f[FL_F_NAME],
	                            .address = f[FL_F_BODY],
	                            .amends = f[FL_F_ABOUT],
	                            .reason = f[FL_F_REASON],
	                            .authorised_by = f[FL_F_BY]};
	if (fl_day_parse(f[FL_F_DAY], &issue->day, NULL) < 0)
		issue->day = FL_NO_DAY;
}

void fl_session_take(fl_session *s, const fl_event *e) {
	const char *const *f = e->fields;
	switch (e->verb) {
	case FL_V_OPEN:
		take_open(s, e);
		break;
	case FL_V_TEXT:
		s->texts[s->text_count++] = (fl_session_text){f[FL_F_KIND], f[FL_F_NAME], f[FL_F_BODY]};
		break;
	case FL_V_SET:
		take_setting(s, e);
		break;
	case FL_V_GATE:
		s->gates[s->gate_count++] =
		    (fl_gate_answer){e->sequence, e->at, f[FL_F_ID], f[FL_F_ANSWER], f[FL_F_REASON], false};
		break;
	case FL_V_POINT:
		s->points[s->point_count++] = (fl_session_point){e->sequence, f[FL_F_OIL], f[FL_F_LOT]};
		break;
	case FL_V_EQUIP:
		take_equipment(s, e);
		break;
	case FL_V_INDICATIVE:
		s->indicative[s->indicative_count++] = (fl_indicative){e->sequence, f[FL_F_ITEM], f[FL_F_REASON], f[FL_F_BY]};
		break;
	case FL_V_RUN:
	case FL_V_MISSING:
	case FL_V_CLOSE_RUN:
		take_run(s, e);
		break;
	case FL_V_WATCH:
	case FL_V_READ:
		take_reading(s, e);
		break;
	case FL_V_STRIKE:
		take_strike(s, e);
		break;
	case FL_V_UNDO:
		take_undo(s, e);
		break;
	case FL_V_QUESTION:
		s->questions++;
		break;
	case FL_V_DECIDE:
		take_decision(s, e);
		break;
	case FL_V_ADJUST:
		s->adjustments[s->adjustment_count++] =
		    (fl_adjustment){e->sequence, e->at, f[FL_F_ITEM], f[FL_F_BEFORE], f[FL_F_AFTER], false};
		break;
	case FL_V_REMARK:
		s->remarks[s->remark_count++] = (fl_remark){e->sequence, e->at, f[FL_F_TYPED]};
		break;
	case FL_V_MEASURE:
		take_measurement(s, e);
		break;
	case FL_V_FINDING:
		take_finding(s, e);
		break;
	case FL_V_CHECK:
		take_check(s, e);
		break;
	case FL_V_CLOSE:
		s->closed = true;
		s->closed_by = f[FL_F_BY];
		s->closed_at = e->at;
		break;
	case FL_V_ISSUE:
		take_issue(s, e);
		break;
	case FL_V_TORN:
	case FL_V_RESUME:
	case FL_VERB_COUNT:
		break;
	}
	s->last_sequence = e->sequence;
	s->last_at = e->at;
}

fl_status fl_session_apply(fl_session *session, const fl_event *event, fl_error *err) {
	fl_event kept;
	fl_status status = fl_session_check(session, event, err);
	if (status >= 0)
		status = fl_session_prepare(session, event, &kept, err);
	if (status >= 0)
		fl_session_take(session, &kept);
	return status;
}

void fl_session_free(fl_session *session) {
	fl_arena_free(&session->arena);
	*session = (fl_session){0};
}

/* ---- asking the session ---- */

const fl_setting *fl_session_setting(const fl_session *s, const char *id) {
	for (size_t i = s->setting_count; i-- > 0;)
		if (!s->settings[i].undone && strcmp(s->settings[i].id, id) == 0)
			return &s->settings[i];
	return NULL;
}

const fl_gate_answer *fl_session_gate(const fl_session *s, const char *id) {
	for (size_t i = s->gate_count; i-- > 0;)
		if (!s->gates[i].undone && strcmp(s->gates[i].id, id) == 0)
			return &s->gates[i];
	return NULL;
}

const fl_finding_answer *fl_session_finding(const fl_session *s, const char *id) {
	for (size_t i = s->finding_count; i-- > 0;)
		if (!s->findings[i].undone && strcmp(s->findings[i].id, id) == 0)
			return &s->findings[i];
	return NULL;
}

const fl_check_answer *fl_session_check_answer(const fl_session *s, const char *id) {
	for (size_t i = s->check_count; i-- > 0;)
		if (!s->checks[i].undone && strcmp(s->checks[i].id, id) == 0)
			return &s->checks[i];
	return NULL;
}

const char *fl_session_equipment_id(const fl_session *s, fl_role role) {
	for (size_t i = s->equipment_count; i-- > 0;)
		if (!s->equipment[i].undone && s->equipment[i].role == role)
			return s->equipment[i].id;
	return NULL;
}

const char *fl_session_text_body(const fl_session *s, const char *kind, const char *name) {
	for (size_t i = 0; i < s->text_count; i++)
		if (strcmp(s->texts[i].kind, kind) == 0 && (!name || strcmp(s->texts[i].name, name) == 0))
			return s->texts[i].body;
	return NULL;
}

const fl_session_issue *fl_session_issue_of(const fl_session *s, const char *number) {
	for (size_t i = 0; i < s->issue_count; i++)
		if (strcmp(s->issues[i].number, number) == 0)
			return &s->issues[i];
	return NULL;
}

const fl_session_issue *fl_session_amended_by(const fl_session *s, const char *number) {
	for (size_t i = 0; i < s->issue_count; i++)
		if (s->issues[i].amends && strcmp(s->issues[i].amends, number) == 0)
			return &s->issues[i];
	return NULL;
}

fl_status fl_session_procedure(const fl_session *s, fl_procedure *out, fl_error *err) {
	for (size_t i = 0; i < s->text_count; i++)
		if (strcmp(s->texts[i].kind, "procedure") == 0)
			return fl_procedure_parse(s->texts[i].body, s->texts[i].name, out, err);
	return fl_fail(err, FL_E_NOT_FOUND, "the journal holds no procedure");
}

static fl_status parse_item(fl_stock *stock, const fl_session_text *text, fl_error *err) {
	if (strcmp(text->kind, "oil") == 0)
		return fl_stock_parse_oil(stock, text->body, text->name, err);
	if (strcmp(text->kind, "equipment") == 0)
		return fl_stock_parse_equipment(stock, text->body, text->name, err);
	if (strcmp(text->kind, "instrument") == 0)
		return fl_stock_parse_instrument(stock, text->body, text->name, err);
	return FL_OK;
}

fl_status fl_session_stock(const fl_session *s, fl_stock *out, fl_error *err) {
	fl_stock stock = {0};
	for (size_t i = 0; i < s->text_count; i++) {
		fl_status status = parse_item(&stock, &s->texts[i], err);
		if (status < 0) {
			fl_stock_free(&stock);
			return status;
		}
	}
	*out = stock;
	return FL_OK;
}
