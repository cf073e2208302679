/* reading.c - one reading from the typed line to the journal: taken apart, checked, doubted, committed, told.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const double far_pct_span = 25.0; /* further from what should come: asked about. Common practice, no source */
static const double certified_beyond_k = 5.0;

static const fl_signal_range *signal_of(const fl_entry *entry) {
	return fl_physics_signal_range(entry->setup.instrument->scale.signal);
}

static bool wants_temperature(const fl_entry *entry, int point) {
	return entry->setup.procedure->medium == FL_MEDIUM_OIL && point != FL_POINT_ZERO;
}

static bool wants_applied(const fl_entry *entry) {
	return entry->setup.procedure->medium == FL_MEDIUM_PRESSURE;
}

fl_status fl_entry_reference(const fl_entry *entry, fl_reference *out, fl_error *err) {
	return fl_reference_of(entry->session, entry->setup.procedure, &entry->used, entry->setup.instrument, out, err);
}

/* ---- the line taken apart ---- */

void fl_entry_draft_begin(fl_entry *entry, const fl_step *step, bool watched) {
	entry->draft = (fl_draft){0};
	entry->draft.reading = (fl_reading){.run = step->run,
	                                    .cycle = step->cycle,
	                                    .pass = step->pass,
	                                    .point = step->point,
	                                    .number = watched ? 0 : step->number,
	                                    .watched = watched};
}

static fl_status refuse_output_unit(const fl_signal_range *range, fl_unit unit, fl_error *err) {
	return fl_fail(err, FL_E_VALUE, "%s does not fit here: the output of this instrument is %s, typed in %s",
	               fl_unit_text(unit), range->text, fl_unit_text(range->unit));
}

fl_status fl_entry_draft_output(fl_entry *entry, const char *text, fl_error *err) {
	fl_draft *d = &entry->draft;
	const fl_signal_range *range = signal_of(entry);
	fl_wanted wanted = {"the output", range->unit, -1000.0, 1000.0};
	fl_decimal number;
	double value;
	fl_unit unit = FL_U_NONE;
	fl_error inner = {0};
	fl_status status = fl_entry_amount(text, &wanted, &number, &unit, &value, &inner);
	if (unit != FL_U_NONE && fl_unit_quantity(unit) != fl_unit_quantity(range->unit))
		return refuse_output_unit(range, unit, err);
	if (status == FL_ASK) { /* thousands are no signal at all: the mark is a decimal mark */
		status = fl_amount_parse(text, range->unit, &number, &unit, NULL, NULL);
		status = status < 0 ? status : FL_OK;
	}
	if (status < 0)
		return fl_fail(err, status, "%s", inner.message);
	d->reading.output = number.value;
	d->reading.unit = unit;
	memcpy(d->typed, number.typed, sizeof d->typed);
	d->reading.typed = d->typed;
	return FL_OK;
}

fl_status fl_entry_draft_temperature(fl_entry *entry, const char *text, fl_error *err) {
	fl_draft *d = &entry->draft;
	fl_wanted wanted = {"the temperature of the oil", FL_U_CELSIUS, -40.0, 350.0};
	fl_decimal number;
	double value;
	fl_unit unit = FL_U_CELSIUS;
	fl_status status = fl_entry_amount(text, &wanted, &number, &unit, &value, err);
	if (status != FL_OK)
		return status;
	d->fahrenheit = unit == FL_U_FAHRENHEIT;
	d->temp_as_typed = number.value;
	snprintf(d->temp_typed, sizeof d->temp_typed, "%s%s", number.typed, d->fahrenheit ? " °F" : "");
	d->reading.has_temp = true;
	d->reading.temp_typed = d->temp_typed;
	d->reading.temp_c = value;
	return FL_OK;
}

static fl_unit applied_unit(const fl_entry *entry) {
	fl_reference reference;
	bool known = fl_entry_reference(entry, &reference, NULL) >= 0 && reference.standard;
	return known ? reference.standard->unit : FL_U_MBAR;
}

fl_status fl_entry_draft_applied(fl_entry *entry, const char *text, fl_error *err) {
	fl_draft *d = &entry->draft;
	fl_unit unit = applied_unit(entry);
	double full = fl_reference_dp_full(entry->setup.instrument);
	fl_wanted wanted = {"the pressure applied", unit, 0.0, fl_from_inside(isnan(full) ? 1e6 : 2.0 * full, unit)};
	wanted.low = -0.1 * wanted.high;
	fl_decimal number;
	double value;
	fl_status status = fl_entry_amount(text, &wanted, &number, &unit, &value, err);
	if (status != FL_OK)
		return status;
	memcpy(d->applied_typed, number.typed, sizeof d->applied_typed);
	d->reading.has_applied = true;
	d->reading.applied_typed = d->applied_typed;
	d->reading.applied_unit = unit;
	d->reading.applied_pa = fl_to_inside(number.value, unit);
	return FL_OK;
}

fl_status fl_entry_draft_line_pressure(fl_entry *entry, const char *text, fl_error *err) {
	fl_draft *d = &entry->draft;
	fl_wanted wanted = {"the line pressure", FL_U_BAR, -1.0, 60.0};
	fl_decimal number;
	double value;
	fl_unit unit = FL_U_BAR;
	fl_status status = fl_entry_amount(text, &wanted, &number, &unit, &value, err);
	if (status != FL_OK)
		return status;
	snprintf(d->line_typed, sizeof d->line_typed, "%s %.4s", number.typed, fl_unit_text(unit));
	d->reading.has_line = true;
	d->reading.line_typed = d->line_typed;
	d->reading.line_pa = fl_to_inside(number.value, unit);
	return FL_OK;
}

/* What an amount behind the output is, by its unit or, without one, by what is still missing. */
static fl_status read_further(fl_entry *entry, const char *text, fl_error *err) {
	const fl_reading *r = &entry->draft.reading;
	fl_decimal number;
	fl_unit unit = FL_U_NONE;
	fl_status status = fl_amount_parse(text, FL_U_NONE, &number, &unit, NULL, err);
	if (status < 0)
		return status;
	bool temp_fits = wants_temperature(entry, r->point) && !r->has_temp;
	bool applied_fits = wants_applied(entry) && !r->has_applied;
	bool line_fits = !wants_applied(entry) && !r->has_line;
	fl_quantity quantity = fl_unit_quantity(unit);
	if (temp_fits && (quantity == FL_Q_TEMPERATURE || unit == FL_U_NONE))
		return fl_entry_draft_temperature(entry, text, err);
	if (applied_fits && (quantity == FL_Q_PRESSURE || unit == FL_U_NONE))
		return fl_entry_draft_applied(entry, text, err);
	if (line_fits && (quantity == FL_Q_PRESSURE || (unit == FL_U_NONE && r->has_temp)))
		return fl_entry_draft_line_pressure(entry, text, err);
	return fl_fail(err, FL_E_VALUE, "\"%s\" has no place here: %s", text,
	               wants_applied(entry)        ? "type the output, then the pressure applied"
	               : r->point == FL_POINT_ZERO ? "at the stopped zero type the output alone"
	                                           : "type the output, then the temperature of the oil in °C");
}

fl_status fl_entry_draft_read(fl_entry *entry, const char *line, fl_error *err) {
	enum { MOST = 3 };
	char parts[MOST + 1][96];
	int count = fl_entry_split(line, parts, MOST);
	if (count == 0)
		return fl_fail(err, FL_E_SYNTAX, "nothing was typed: a reading such as %s is needed",
		               wants_temperature(entry, entry->draft.reading.point) ? "\"10.42 mA at 40.02\"" : "\"10.42 mA\"");
	if (count > MOST)
		return fl_fail(err, FL_E_SYNTAX,
		               "too many numbers on one line: output, temperature or pressure applied, "
		               "line pressure at most");
	fl_status status = fl_entry_draft_output(entry, parts[0], err);
	for (int i = 1; i < count && status == FL_OK; i++)
		status = read_further(entry, parts[i], err);
	return status;
}

/* ---- what cannot be ---- */

static fl_status check_signal(const fl_entry *entry, fl_error *err) {
	const fl_draft *d = &entry->draft;
	fl_signal signal = entry->setup.instrument->scale.signal;
	const fl_signal_range *range = signal_of(entry);
	const char *unit = fl_unit_text(range->unit);
	double value = fl_reference_in_unit(d->reading.output, d->reading.unit, range->unit);
	switch (fl_physics_signal_state(signal, value)) {
	case FL_SIGNAL_FAILURE:
		return fl_fail(err, FL_E_RANGE,
		               "%s %s is a failure signal, never a reading (%s measures from %g to %g %s%s): look at the loop",
		               d->typed, fl_unit_text(d->reading.unit), range->text, range->measuring_low,
		               range->measuring_high, unit, range->unit == FL_U_MA ? ", NAMUR NE 43" : "");
	case FL_SIGNAL_SATURATED:
		return fl_fail(err, FL_E_RANGE, "%s %s is saturation, never a reading (%s measures from %g to %g %s%s)",
		               d->typed, fl_unit_text(d->reading.unit), range->text, range->measuring_low,
		               range->measuring_high, unit, range->unit == FL_U_MA ? ", NAMUR NE 43" : "");
	case FL_SIGNAL_MEASURING:
		break;
	}
	return FL_OK;
}

const fl_oil *fl_entry_oil(const fl_entry *entry, int point) {
	const fl_session *s = entry->session;
	return point >= 0 && point < (int)s->point_count ? fl_stock_oil(&entry->used, s->points[point].lot) : NULL;
}

static bool looks_fahrenheit(const fl_entry *entry) {
	const fl_draft *d = &entry->draft;
	const fl_procedure *p = entry->setup.procedure;
	return d->reading.has_temp && !d->fahrenheit && d->temp_as_typed >= 68.0 && d->temp_as_typed <= 302.0 &&
	       p->bath_c >= 20.0 && p->bath_c <= 150.0 && fabs(d->temp_as_typed - p->bath_c) > p->bath_tolerance_k;
}

fl_status fl_entry_draft_check_temperature(const fl_entry *entry, fl_error *err) {
	const fl_draft *d = &entry->draft;
	const fl_oil *oil = fl_entry_oil(entry, d->reading.point);
	fl_reference reference;
	if (!d->reading.has_temp || !oil)
		return FL_OK;
	fl_status status = fl_entry_reference(entry, &reference, err);
	if (status < 0)
		return status;
	double low = oil->table.points[0].temp_c, high = oil->table.points[oil->table.count - 1].temp_c;
	double temp_c = fl_reference_corrected_temp_c(reference.thermometer, d->reading.temp_c);
	if (temp_c >= low - certified_beyond_k && temp_c <= high + certified_beyond_k)
		return FL_OK;
	char hint[128] = "";
	if (looks_fahrenheit(entry))
		snprintf(hint, sizeof hint, "; if it was read in °F, type \"%s °F\"", d->temp_typed);
	return fl_fail(err, FL_E_RANGE,
	               "%s °C is more than %g K outside the temperatures at which %s is certified, %g to %g °C%s",
	               d->temp_typed, certified_beyond_k, oil->name, low, high, hint);
}

static fl_status refuse_moving(const fl_entry *entry, const fl_settling *s, fl_error *err) {
	const char *unit = fl_unit_text(signal_of(entry)->unit);
	char slope[64] = "", end[160] = "", per_min[40], value[40];
	if (s->span_s > 0.0)
		snprintf(slope, sizeof slope, "%s %s a minute, ",
		         fl_decimal_format_signed(s->slope_per_s * 60.0, 3, false, per_min, sizeof per_min), unit);
	if (s->has_end)
		snprintf(end, sizeof end, "; for information only: it seems to end near %s %s%s",
		         fl_decimal_format(s->end, 2, value, sizeof value), unit, s->wait_s > 0.0 ? ", ready in about " : "");
	if (s->has_end && s->wait_s > 0.0)
		snprintf(end + strlen(end), sizeof end - strlen(end), "%.0f min", fmax(1.0, round(s->wait_s / 60.0)));
	return fl_fail(
	    err, FL_E_STATE,
	    "still moving, not settled: %s%.2f %% of span over the last %d values where %g %% is allowed%s. Go on "
	    "with watch",
	    slope, fabs(s->change_pct_span), s->count, entry->setup.procedure->settle.drift_pct_span, end);
}

static bool has_real_time(const fl_session *s) {
	return s->source == FL_SOURCE_KEYBOARD || s->declared_clock;
}

static fl_status check_watched(const fl_entry *entry, const fl_settling *s, fl_error *err) {
	const fl_settle *rule = &entry->setup.procedure->settle;
	if (!rule->watch_required || entry->draft.reading.number != 1 || entry->session->source == FL_SOURCE_IMPORT)
		return FL_OK;
	if (s->watched < rule->readings)
		return fl_fail(
		    err, FL_E_STATE,
		    "the procedure wants the output watched before the first reading of a point: %d of %d values are "
		    "there, go on with watch VALUE",
		    s->watched, rule->readings);
	if (has_real_time(entry->session) && s->watched_span_s < rule->window_s)
		return fl_fail(
		    err, FL_E_STATE,
		    "the values watched span %.0f s and the procedure wants %.0f s: wait, and go on with watch VALUE",
		    s->watched_span_s, rule->window_s);
	return FL_OK;
}

static fl_status check_settled(const fl_entry *entry, fl_error *err) {
	const fl_reading *r = &entry->draft.reading;
	fl_step step = {.run = r->run, .cycle = r->cycle, .pass = r->pass, .point = r->point};
	if (r->watched || r->taken == INT64_MIN)
		return FL_OK;
	fl_settling s = fl_entry_settling(entry, &step, r);
	if (s.moving)
		return refuse_moving(entry, &s, err);
	if (s.temp_moving)
		return fl_fail(err, FL_E_STATE,
		               "the temperature is still moving, %+.2f K a minute where %g is allowed: wait for the bath",
		               s.temp_k_per_min, entry->setup.procedure->settle.temp_k_per_min);
	return check_watched(entry, &s, err);
}

fl_status fl_entry_draft_check(fl_entry *entry, fl_error *err) {
	fl_reading *r = &entry->draft.reading;
	fl_status status = check_signal(entry, err);
	if (status >= 0)
		status = fl_entry_draft_check_temperature(entry, err);
	if (status < 0)
		return status;
	if (r->taken != INT64_MIN)
		r->taken = entry->setup.clock(entry->setup.clock_context);
	return check_settled(entry, err);
}

/* ---- against what should come ---- */

fl_status fl_entry_judge(const fl_entry *entry, const fl_reading *r, fl_reading_result *out, fl_error *err) {
	fl_reference reference;
	fl_status status = fl_entry_reference(entry, &reference, err);
	return status < 0 ? status : fl_reference_reading(&reference, fl_entry_oil(entry, r->point), r, out, err);
}

/* ---- what is doubted ---- */

static bool doubt_fahrenheit_unit(fl_entry *e, char *ask, size_t size) {
	if (!e->draft.reading.has_temp || !e->draft.fahrenheit)
		return false;
	snprintf(ask, size, "%s is %.2f °C: record it so", e->draft.temp_typed, e->draft.reading.temp_c);
	return true;
}

static bool doubt_fahrenheit_look(fl_entry *e, char *ask, size_t size) {
	if (!looks_fahrenheit(e))
		return false;
	snprintf(ask, size, "%s looks like °F (%.2f °C) where the bath is at %g °C: is it really %s °C",
	         e->draft.temp_typed, fl_to_inside(e->draft.temp_as_typed, FL_U_FAHRENHEIT), e->setup.procedure->bath_c,
	         e->draft.temp_typed);
	return true;
}

static bool doubt_bath(fl_entry *e, char *ask, size_t size) {
	const fl_procedure *p = e->setup.procedure;
	const fl_reading *r = &e->draft.reading;
	/* decimal values at the very limit are within it */
	if (!r->has_temp || isnan(p->bath_c) || looks_fahrenheit(e) ||
	    fabs(r->temp_c - p->bath_c) <= p->bath_tolerance_k + 1e-9)
		return false;
	snprintf(ask, size, "%s is further than %g K from the bath's %g °C: is the temperature right", e->draft.temp_typed,
	         p->bath_tolerance_k, p->bath_c);
	return true;
}

static bool doubt_applied(fl_entry *e, char *ask, size_t size) {
	const fl_reading *r = &e->draft.reading;
	fl_reference reference;
	if (!r->has_applied || r->point == FL_POINT_ZERO || fl_entry_reference(e, &reference, NULL) < 0)
		return false;
	const fl_plan_point *point = &e->setup.procedure->points[r->point];
	double pct = 100.0 * fl_reference_x_of_pressure(&reference, r->applied_pa);
	if (isnan(pct))
		return false;
	if (pct >= point->oil_low_pct_span - 1e-6 && pct <= point->oil_high_pct_span + 1e-6)
		return false;
	snprintf(ask, size, "%s %s is %.1f %% of span and the plan says %g %%: is the pressure right", r->applied_typed,
	         fl_unit_text(r->applied_unit), pct, point->position_pct_span);
	return true;
}

static bool doubt_far(fl_entry *e, char *ask, size_t size) {
	fl_reading_result result;
	if (fl_entry_judge(e, &e->draft.reading, &result, NULL) < 0 || 100.0 * fabs(result.error_span) <= far_pct_span)
		return false;
	snprintf(ask, size, "%s %s lies far from what belongs here: are oil, unit and digits right", e->draft.typed,
	         fl_unit_text(e->draft.reading.unit));
	return true;
}

static bool doubt_identical(fl_entry *e, char *ask, size_t size) {
	const fl_reading *r = &e->draft.reading;
	fl_step step = {.run = r->run, .cycle = r->cycle, .pass = r->pass, .point = r->point};
	int same = 1, wanted = e->setup.procedure->settle.identical_readings;
	for (size_t i = e->session->reading_count; wanted > 0 && i-- > 0;) {
		const fl_reading *before = &e->session->readings[i];
		if (!fl_entry_at_place(before, &step) || before->struck)
			continue;
		if (strcmp(before->typed, r->typed) != 0 || before->unit != r->unit)
			break;
		same++;
	}
	if (wanted <= 0 || same < wanted)
		return false;
	snprintf(ask, size, "%d times %s to the last digit: is the output really live", same, r->typed);
	return true;
}

static bool (*const doubts[FL_DOUBT_COUNT])(fl_entry *, char *, size_t) = {
    [FL_DOUBT_FAHRENHEIT_UNIT] = doubt_fahrenheit_unit,
    [FL_DOUBT_FAHRENHEIT_LOOK] = doubt_fahrenheit_look,
    [FL_DOUBT_BATH] = doubt_bath,
    [FL_DOUBT_APPLIED] = doubt_applied,
    [FL_DOUBT_FAR] = doubt_far,
    [FL_DOUBT_IDENTICAL] = doubt_identical,
};

static const char *const doubt_words[FL_DOUBT_COUNT] = {
    [FL_DOUBT_FAHRENHEIT_UNIT] = "temperature typed in °F",
    [FL_DOUBT_FAHRENHEIT_LOOK] = "temperature that looks like °F",
    [FL_DOUBT_BATH] = "temperature away from the bath's",
    [FL_DOUBT_APPLIED] = "pressure away from the plan's",
    [FL_DOUBT_FAR] = "output far from what belongs here",
    [FL_DOUBT_IDENTICAL] = "identical values",
};

bool fl_entry_draft_doubt(fl_entry *entry, char *ask, size_t size) {
	for (int i = 0; i < FL_DOUBT_COUNT; i++)
		if (!(entry->draft.confirmed & (1u << i)) && doubts[i](entry, ask, size)) {
			entry->draft.doubt = (fl_doubt)i;
			return true;
		}
	return false;
}

/* ---- into the journal ---- */

static fl_status begin_run(fl_entry *entry, fl_run_kind run, fl_error *err) {
	if (entry->session->runs[run].begun)
		return FL_OK;
	fl_event event = {.verb = FL_V_RUN, .fields[FL_F_RUN] = fl_run_word(run)};
	return fl_entry_commit(entry, &event, err);
}

static fl_status commit_questions(fl_entry *entry, const char *answer, fl_error *err) {
	fl_status status = FL_OK;
	for (int i = 0; i < FL_DOUBT_COUNT && status >= 0; i++) {
		if (!(entry->draft.confirmed & (1u << i)))
			continue;
		char about[160];
		snprintf(about, sizeof about, "%s: %s%s%s", doubt_words[i], entry->draft.typed,
		         entry->draft.reading.has_temp ? " at " : "", entry->draft.temp_typed);
		fl_event event = {.verb = FL_V_QUESTION, .fields[FL_F_ABOUT] = about, .fields[FL_F_ANSWER] = answer};
		status = fl_entry_commit(entry, &event, err);
	}
	return status;
}

typedef struct numbers {
	char cycle[16], point[16], number[16], value[32], temp[32], applied[32], line[32];
} numbers;

static void fill_event(const fl_reading *r, numbers *n, fl_event *e) {
	const char **f = e->fields;
	snprintf(n->cycle, sizeof n->cycle, "%d", r->cycle);
	snprintf(n->number, sizeof n->number, "%d", r->number);
	if (r->point == FL_POINT_ZERO)
		snprintf(n->point, sizeof n->point, "zero");
	else
		snprintf(n->point, sizeof n->point, "%d", r->point + 1);
	f[FL_F_RUN] = fl_run_word(r->run);
	f[FL_F_CYCLE] = n->cycle;
	f[FL_F_PASS] = fl_pass_word(r->pass);
	f[FL_F_POINT] = n->point;
	f[FL_F_NUMBER] = r->watched ? NULL : n->number;
	f[FL_F_TYPED] = r->typed;
	f[FL_F_UNIT] = fl_unit_text(r->unit);
	f[FL_F_VALUE] = fl_entry_number(r->output, n->value);
	f[FL_F_TEMP_TYPED] = r->has_temp ? r->temp_typed : NULL;
	f[FL_F_TEMP_C] = r->has_temp ? fl_entry_number(r->temp_c, n->temp) : NULL;
	f[FL_F_APPLIED_TYPED] = r->has_applied ? r->applied_typed : NULL;
	f[FL_F_APPLIED_UNIT] = r->has_applied ? fl_unit_text(r->applied_unit) : NULL;
	f[FL_F_APPLIED_PA] = r->has_applied ? fl_entry_number(r->applied_pa, n->applied) : NULL;
	f[FL_F_LINE_TYPED] = r->has_line ? r->line_typed : NULL;
	f[FL_F_LINE_PA] = r->has_line ? fl_entry_number(r->line_pa, n->line) : NULL;
}

fl_status fl_entry_draft_commit(fl_entry *entry, const char *answer, const char *taken, fl_error *err) {
	const fl_reading *r = &entry->draft.reading;
	fl_status status = begin_run(entry, r->run, err);
	if (status >= 0)
		status = commit_questions(entry, answer, err);
	if (status < 0)
		return status;
	numbers n;
	fl_event event = {.verb = r->watched ? FL_V_WATCH : FL_V_READ};
	fill_event(r, &n, &event);
	event.fields[FL_F_TAKEN] = taken;
	return fl_entry_commit(entry, &event, err);
}

/* ---- told afterwards ---- */

static int places_of(fl_unit unit) {
	return unit == FL_U_BAR ? 4 : 3;
}

/* More than this at the stopped zero is more often a shut equalising valve or an empty leg than the zero screw. */
static const double zero_hint_pct_span = 1.0;

/* Nothing is told where the certificates correct nothing. */
static void tell_corrections(const fl_entry *entry, const fl_reading_result *result, fl_text *say) {
	char value[40];
	const fl_signal_range *range = signal_of(entry);
	const fl_reading *r = result->reading;
	bool of_oil = result->oil.mu_pa_s > 0.0; /* neither zero nor pressure */
	if (result->output == fl_reference_in_unit(r->output, r->unit, range->unit) &&
	    (!of_oil || result->oil.temp_c == r->temp_c))
		return;
	fl_text_printf(say, "       corrected by the certificates: %s %s",
	               fl_decimal_format(result->output, places_of(range->unit) + 1, value, sizeof value),
	               fl_unit_text(range->unit));
	if (of_oil)
		fl_text_printf(say, " at %.3f °C", result->oil.temp_c);
	fl_text_add(say, "\n");
}

static void tell_error(const fl_reading_result *result, const fl_signal_range *range, fl_text *say) {
	char expected[40], error[40];
	fl_text_printf(say, ": expected %s %s, error %s %% of span\n",
	               fl_decimal_format(result->ideal.output, places_of(range->unit), expected, sizeof expected),
	               fl_unit_text(range->unit),
	               fl_decimal_format_signed(100.0 * result->error_span, 2, true, error, sizeof error));
}

void fl_entry_tell_reading(const fl_entry *entry, const fl_reading *r, fl_text *say) {
	fl_reading_result result;
	fl_text_printf(say, "  [%d] %s %s", r->sequence, r->typed, fl_unit_text(r->unit));
	if (r->has_temp)
		fl_text_printf(say, " at %s%s", r->temp_typed, strstr(r->temp_typed, "°F") ? "" : " °C");
	if (r->has_applied)
		fl_text_printf(say, " at %s %s", r->applied_typed, fl_unit_text(r->applied_unit));
	if (fl_entry_judge(entry, r, &result, NULL) < 0) {
		fl_text_add(say, "\n");
		return;
	}
	tell_error(&result, signal_of(entry), say);
	tell_corrections(entry, &result, say);
	if (r->point == FL_POINT_ZERO && 100.0 * fabs(result.error_span) > zero_hint_pct_span + 1e-9)
		fl_text_printf(say,
		               "       More than %g %% off: look at the equalising valve and at both legs, full and free of\n"
		               "       air, before anybody thinks of the zero screw.\n",
		               zero_hint_pct_span);
}
