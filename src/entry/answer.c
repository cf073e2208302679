/* answer.c - what a line means at each step.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

static fl_status refuse_yes_no(fl_error *err) {
	return fl_fail(err, FL_E_VALUE, "answer yes or no");
}

/* ---- identification and people ---- */

static fl_status answer_item(fl_entry *entry, const fl_step *step, const char *line, fl_error *err) {
	const fl_entry_item *item = fl_entry_item_find(step->id);
	fl_day received;
	fl_status status = fl_entry_check_text(line, FL_NAME_POINTS, item->required, "an answer", err);
	if (status >= 0 && *line && strcmp(item->id, "received-on") == 0)
		status = fl_day_parse(line, &received, err);
	return status < 0 ? status : fl_entry_set(entry, item->id, line, err);
}

/* ---- equipment and oils ---- */

static void list_equipment(const fl_entry *entry, fl_role role, char *out, size_t size) {
	const fl_stock *stock = entry->setup.stock;
	out[0] = '\0';
	for (size_t i = 0; i < stock->equipment_count; i++)
		if (stock->equipment[i].role == role) {
			size_t used = strlen(out);
			snprintf(out + used, size - used, "%s%s", used ? ", " : "", stock->equipment[i].id);
		}
	if (!*out)
		snprintf(out, size, "none; add one to equipment.yaml");
}

/* Out of date: refused for certified work, and asked whether it shall go on as indicative. */
static fl_status offer_indicative(fl_entry *entry, const char *item, const fl_error *why, fl_text *say) {
	fl_entry_form_open(entry, FL_FORM_INDICATIVE);
	snprintf(entry->form.item, sizeof entry->form.item, "%s", item);
	fl_text_printf(say, "  Not for certified work: %s\n", why->message);
	return FL_OK;
}

static bool is_indicative(const fl_entry *entry, const char *item) {
	for (size_t i = 0; i < entry->session->indicative_count; i++)
		if (strcmp(entry->session->indicative[i].item, item) == 0)
			return true;
	return false;
}

static fl_status answer_equipment(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	const fl_equipment *item = *line ? fl_stock_equipment(entry->setup.stock, line) : NULL;
	fl_error why = {0};
	char known[300];
	if (step->role == FL_ROLE_TACHOMETER && (!*line || strcasecmp(line, "none") == 0))
		return fl_entry_set(entry, "no-tachometer", "none used", err);
	if (!*line)
		item = fl_entry_propose_equipment(entry, step->role);
	if (!item || item->role != step->role) {
		list_equipment(entry, step->role, known, sizeof known);
		return fl_fail(err, FL_E_NOT_FOUND, "\"%.60s\" is no %s of the stock: known are %s", line,
		               fl_stock_role_text(step->role), known);
	}
	if (fl_stock_equipment_in_date(item, entry->session->day, &why) < 0 && !is_indicative(entry, item->id))
		return offer_indicative(entry, item->id, &why, say);
	return fl_entry_equip(entry, step->role, item->id, err);
}

/* A lot by its number, by "name lot", or by a name of which one lot is in date. */
static const fl_oil *find_oil(const fl_entry *entry, const char *line) {
	const fl_stock *stock = entry->setup.stock;
	const fl_oil *found = fl_stock_oil(stock, line);
	const char *space = strrchr(line, ' ');
	if (!found && space)
		found = fl_stock_oil(stock, space + 1);
	if (found && space && strncmp(line, found->name, strlen(found->name)) != 0)
		return NULL;
	for (size_t i = 0; !found && i < stock->oil_count; i++)
		if (strcasecmp(stock->oils[i].name, line) == 0 &&
		    fl_stock_oil_in_date(&stock->oils[i], entry->session->day, NULL) == FL_OK)
			found = &stock->oils[i];
	return found;
}

static fl_status answer_oil(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	const fl_oil *oil = *line ? find_oil(entry, line) : fl_entry_propose_oil(entry, step->point);
	fl_error why = {0};
	if (!oil && !*line)
		return fl_fail(err, FL_E_NOT_FOUND, "no lot of the stock is in date and fits this point: type the lot to use");
	if (!oil)
		return fl_fail(err, FL_E_NOT_FOUND,
		               "there is no lot \"%.60s\" in the stock: type the lot that the bottle names", line);
	fl_status status = fl_entry_oil_fits(entry, step->point, oil, err);
	if (status < 0)
		return status;
	if (fl_stock_oil_in_date(oil, entry->session->day, &why) < 0 && !is_indicative(entry, oil->lot))
		return offer_indicative(entry, oil->lot, &why, say);
	return fl_entry_assign_oil(entry, step->point, oil, err);
}

/* ---- questions of the procedure ---- */

static fl_status commit_answer(fl_entry *entry, const fl_step *step, const char *typed, const char *unit,
                               const char *value, const char *reason, fl_error *err) {
	fl_event event = {0};
	char whole[FL_SLOT_SIZE + 32];
	if (step->kind == FL_STEP_SETTING) {
		event.verb = FL_V_SET;
		event.fields[FL_F_TYPED] = typed;
		event.fields[FL_F_UNIT] = unit;
		event.fields[FL_F_VALUE] = value;
	} else {
		event.verb = FL_V_GATE;
		snprintf(whole, sizeof whole, "%s%s%s", *typed ? typed : "not given", unit ? " " : "", unit ? unit : "");
		event.fields[FL_F_ANSWER] = whole;
		event.fields[FL_F_REASON] = reason;
	}
	event.fields[FL_F_ID] = step->id;
	return fl_entry_commit(entry, &event, err);
}

static fl_status answer_confirm(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	int yes = fl_entry_yes(line);
	if (yes < 0)
		return refuse_yes_no(err);
	if (yes)
		return commit_answer(entry, step, "yes", NULL, NULL, NULL, err);
	if (step->question->may_decline && step->kind != FL_STEP_SETTING) {
		fl_entry_form_open(entry, FL_FORM_DECLINE);
		return FL_OK;
	}
	fl_status status = commit_answer(entry, step, "no", NULL, NULL, NULL, err);
	if (status >= 0 && !step->question->may_decline)
		fl_text_add(say, "  The work stops here until this is yes. Answer again when it is, or type stop.\n");
	return status;
}

/* Flow, and with it the reading, follows the pump's speed: a supply that is off must not be adjusted away. */
static fl_status check_supply(const fl_entry *entry, const fl_question *question, double value, fl_error *err) {
	const fl_instrument *i = entry->setup.instrument;
	double inside = fl_to_inside(value, question->unit), wanted = NAN;
	if (question->unit == FL_U_HZ)
		wanted = i->supply_hz;
	if (question->unit == FL_U_R_MIN)
		wanted =
		    strstr(question->id, "pump") ? i->has_geometry ? i->capillary.pump_speed_rev_s : NAN : i->motor_speed_rev_s;
	if (isnan(wanted) || fabs(inside - wanted) <= 0.01 * wanted)
		return FL_OK;
	return fl_fail(
	    err, FL_E_STATE,
	    "%g %s is %+.1f %% from the %g %s of the instrument's record, and the reading follows the speed: put "
	    "that right before anything is read or adjusted, then type the new value",
	    value, fl_unit_text(question->unit), 100.0 * (inside - wanted) / wanted, fl_from_inside(wanted, question->unit),
	    fl_unit_text(question->unit));
}

static fl_status commit_amount(fl_entry *entry, const fl_step *step, fl_error *err) {
	char value[32];
	fl_entry_number(entry->form.value, value);
	return commit_answer(entry, step, entry->form.item, fl_unit_text(entry->form.unit), value, NULL, err);
}

static fl_status answer_amount(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	const fl_question *q = step->question;
	fl_wanted wanted = {"this answer", q->unit, q->possible_low, q->possible_high};
	fl_decimal number;
	fl_unit unit;
	double value;
	fl_error inner = {0};
	if (!*line && !q->required)
		return commit_answer(entry, step, "", NULL, NULL, NULL, err);
	fl_status status = fl_entry_amount(line, &wanted, &number, &unit, &value, &inner);
	if (status == FL_ASK) {
		fl_text_printf(say, "  %s\n", inner.message);
		return FL_OK;
	}
	if (status < 0)
		return fl_fail(err, status, "%s", inner.message);
	status = check_supply(entry, q, value, err);
	if (status < 0)
		return status;
	bool usual = value >= q->plausible_low && value <= q->plausible_high;
	fl_entry_form_open(entry, usual ? FL_FORM_NONE : FL_FORM_AMOUNT);
	snprintf(entry->form.item, sizeof entry->form.item, "%s", number.typed);
	entry->form.unit = unit;
	entry->form.value = number.value;
	snprintf(entry->form.ask, sizeof entry->form.ask,
	         "%s %s is unusual here (usual: %g to %g %s): is it right (yes or no)", number.typed, fl_unit_text(unit),
	         q->plausible_low, q->plausible_high, fl_unit_text(q->unit));
	return usual ? commit_amount(entry, step, err) : FL_OK;
}

static fl_status answer_question(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	fl_status status;
	switch (step->question->kind) {
	case FL_ASK_CONFIRM:
		return answer_confirm(entry, step, line, say, err);
	case FL_ASK_AMOUNT:
		return answer_amount(entry, step, line, say, err);
	case FL_ASK_TEXT:
		break;
	}
	status = fl_entry_check_text(line, FL_PROSE_POINTS, step->question->required, "an answer", err);
	return status < 0 ? status : commit_answer(entry, step, line, NULL, NULL, NULL, err);
}

/* ---- runs ---- */

static fl_status answer_as_found(fl_entry *entry, const char *line, fl_error *err) {
	int yes = fl_entry_yes(line);
	if (yes < 0)
		return refuse_yes_no(err);
	if (!yes) {
		fl_entry_form_open(entry, FL_FORM_MISSING);
		return FL_OK;
	}
	fl_event event = {.verb = FL_V_RUN, .fields[FL_F_RUN] = "as-found"};
	return fl_entry_commit(entry, &event, err);
}

static void tell_watch(const fl_entry *entry, const fl_step *step, fl_text *say) {
	const fl_settle *rule = &entry->setup.procedure->settle;
	fl_settling s = fl_entry_settling(entry, step, NULL);
	const char *unit = fl_unit_text(fl_physics_signal_range(entry->setup.instrument->scale.signal)->unit);
	if (s.count == 0) {
		fl_text_printf(say, "  watched %d; judged from %d values on\n", s.watched, rule->readings);
		return;
	}
	fl_text_printf(say, "  watched %d: %s, %.2f %% of span over the last %d values", s.watched,
	               s.moving ? "still moving" : "settled by the procedure's rule", fabs(s.change_pct_span), s.count);
	if (s.has_end)
		fl_text_printf(say, "; seems to end near %.2f %s (information only)", s.end, unit);
	if (s.wait_s > 0.0)
		fl_text_printf(say, ", ready in about %.0f min", fmax(1.0, round(s.wait_s / 60.0)));
	fl_text_add(say, "\n");
}

fl_status fl_entry_draft_go_on(fl_entry *entry, fl_text *say, fl_error *err) {
	const fl_procedure *p = entry->setup.procedure;
	const fl_reading *r = &entry->draft.reading;
	fl_form_kind missing = FL_FORM_NONE;
	if (p->medium == FL_MEDIUM_OIL && r->point != FL_POINT_ZERO && !r->has_temp)
		missing = FL_FORM_TEMPERATURE;
	if (p->medium == FL_MEDIUM_PRESSURE && !r->has_applied)
		missing = FL_FORM_APPLIED;
	fl_status status = fl_entry_draft_check(entry, err);
	if (status < 0)
		return status;
	if (missing != FL_FORM_NONE && !r->watched) {
		fl_entry_form_open(entry, missing);
		return FL_OK;
	}
	char ask[480];
	if (!r->watched && fl_entry_draft_doubt(entry, ask, sizeof ask)) {
		fl_entry_form_open(entry, FL_FORM_READING);
		snprintf(entry->form.ask, sizeof entry->form.ask, "%s (yes or no)", ask);
		return FL_OK;
	}
	fl_step step = fl_entry_step(entry->session, p);
	status = fl_entry_draft_commit(entry, "yes", NULL, err);
	if (status < 0)
		return status;
	if (r->watched)
		tell_watch(entry, &step, say);
	else
		fl_entry_tell_reading(entry, &entry->session->readings[entry->session->reading_count - 1], say);
	return FL_OK;
}

static fl_status answer_reading(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	fl_error inner = {0};
	if (strcasecmp(line, "close") == 0)
		return fl_fail(err, FL_E_STATE, "the run cannot be closed yet: %d of %d readings are there", step->done,
		               step->total);
	fl_entry_draft_begin(entry, step, false);
	fl_status status = fl_entry_draft_read(entry, line, &inner);
	if (status == FL_ASK) {
		fl_text_printf(say, "  %s\n", inner.message);
		return FL_OK;
	}
	if (status < 0)
		return fl_fail(err, status, "%s", inner.message);
	return fl_entry_draft_go_on(entry, say, err);
}

static fl_status answer_close_run(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	if (strcasecmp(line, "close") != 0 && fl_entry_yes(line) != 1)
		return fl_fail(err, FL_E_VALUE, "type close to lock the run; list shows it, strike sets a reading aside");
	fl_event event = {.verb = FL_V_CLOSE_RUN,
	                  .fields[FL_F_RUN] = fl_run_word(step->run),
	                  .fields[FL_F_BY] = fl_entry_performer(entry)};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		fl_text_printf(say, "  The %s run is locked.\n", fl_run_word(step->run));
	return status;
}

/* ---- decision, adjustment, end ---- */

static fl_status answer_adjustment(fl_entry *entry, const char *line, fl_error *err) {
	if (strcasecmp(line, "done") == 0) {
		fl_event event = {.verb = FL_V_RUN, .fields[FL_F_RUN] = "as-left"};
		return fl_entry_commit(entry, &event, err);
	}
	fl_status status = fl_entry_check_text(line, FL_NAME_POINTS, true, "what was adjusted", err);
	if (status < 0)
		return status;
	fl_entry_form_open(entry, FL_FORM_ADJUST);
	snprintf(entry->form.item, sizeof entry->form.item, "%s", line);
	return FL_OK;
}

static fl_status answer_remark(fl_entry *entry, const char *line, fl_error *err) {
	if (!*line)
		return fl_entry_set(entry, "remarks-complete", "yes", err);
	fl_status status = fl_entry_check_text(line, FL_PROSE_POINTS, true, "a remark", err);
	fl_event event = {.verb = FL_V_REMARK, .fields[FL_F_TYPED] = line};
	return status < 0 ? status : fl_entry_commit(entry, &event, err);
}

static fl_status answer_close(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	const char *name = *line ? line : fl_entry_performer(entry);
	fl_status status = fl_entry_check_text(name, FL_NAME_POINTS, true, "a name", err);
	fl_event event = {.verb = FL_V_CLOSE, .fields[FL_F_BY] = name};
	if (status >= 0)
		status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		fl_text_add(say, "  The session is closed. Its journal is complete.\n");
	return status;
}

fl_status fl_entry_answer(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	switch (step.kind) {
	case FL_STEP_SETTING:
		return step.question ? answer_question(entry, &step, line, say, err) : answer_item(entry, &step, line, err);
	case FL_STEP_EQUIPMENT:
		return answer_equipment(entry, &step, line, say, err);
	case FL_STEP_OIL:
		return answer_oil(entry, &step, line, say, err);
	case FL_STEP_GATE:
	case FL_STEP_RESTORE:
		return answer_question(entry, &step, line, say, err);
	case FL_STEP_AS_FOUND:
		return answer_as_found(entry, line, err);
	case FL_STEP_READING:
		return answer_reading(entry, &step, line, say, err);
	case FL_STEP_CLOSE_RUN:
		return answer_close_run(entry, &step, line, say, err);
	case FL_STEP_DECISION:
		return fl_entry_decide(entry, line, say, err);
	case FL_STEP_CHECK:
		return fl_entry_answer_check(entry, &step, line, say, err);
	case FL_STEP_ADJUSTMENT:
		return answer_adjustment(entry, line, err);
	case FL_STEP_REMARKS:
		return answer_remark(entry, line, err);
	case FL_STEP_CLOSE:
		return answer_close(entry, line, say, err);
	case FL_STEP_DONE:
		break;
	}
	return fl_fail(err, FL_E_STATE, "the session is closed");
}
