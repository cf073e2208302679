/* measure.c - extra measurements: what tells causes apart that the readings cannot.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * "injection 150 mbar 11.66 mA with DP-2": the word, one or two amounts, and what it was measured with. Checked as a
 * reading is: unit, what is possible, what is usual. A wrong one is taken back by undo.
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const struct {
	int amounts;
	fl_role role; /* of what it is measured with */
	const char *example;
} kinds[FL_MEASURE_COUNT] = {
    [FL_MEASURE_INJECTION] = {2, FL_ROLE_PRESSURE_STANDARD, "injection 150 mbar 11.66 mA"},
    [FL_MEASURE_SPEED] = {1, FL_ROLE_TACHOMETER, "speed 39.8 r/min"},
    [FL_MEASURE_VOLUME] = {2, FL_ROLE_TIMER, "volume 500 cm3 in 502 s"},
    [FL_MEASURE_DENSITY] = {1, FL_ROLE_COUNT, "density 900 kg/m3"},
    [FL_MEASURE_TEMPERATURE] = {2, FL_ROLE_THERMOMETER, "temperature 40.12 °C beside 40.02 °C"},
    [FL_MEASURE_SPANNED] = {1, FL_ROLE_COUNT, "spanned-out 2.1 %"},
};

static const char *meaning_of(fl_measure what) {
#define FL_MEASURE_MEANING(name, word, meaning) meaning,
	static const char *const meanings[] = {FL_MEASURE_LIST(FL_MEASURE_MEANING)};
#undef FL_MEASURE_MEANING
	return meanings[what];
}

static void show_kinds(fl_text *say) {
	fl_text_add(say, "  Extra measurements tell causes apart that the readings cannot. Type measure and:\n");
	for (fl_measure what = 0; what < FL_MEASURE_COUNT; what++)
		fl_text_printf(say, "  %s: %s\n", kinds[what].example, meaning_of(what));
	fl_text_add(say, "  Behind it may stand what it was measured with: with DP-2. A wrong one: undo.\n");
}

/* ---- what is possible and what is usual ---- */

static fl_wanted first_wanted(const fl_entry *entry, fl_measure what) {
	double full = fl_reference_dp_full(entry->setup.instrument);
	double most_mbar = isnan(full) ? 1e4 : fl_from_inside(2.0 * full, FL_U_MBAR);
	switch (what) {
	case FL_MEASURE_INJECTION:
		return (fl_wanted){"the pressure injected", FL_U_MBAR, -0.1 * most_mbar, most_mbar};
	case FL_MEASURE_SPEED:
		return (fl_wanted){"the speed of the pump", FL_U_R_MIN, 1.0, 1000.0};
	case FL_MEASURE_VOLUME:
		return (fl_wanted){"the volume", FL_U_CM3, 1.0, 1e5};
	case FL_MEASURE_DENSITY:
		return (fl_wanted){"the dial density", FL_U_KG_M3, 500.0, 1500.0};
	case FL_MEASURE_TEMPERATURE:
		return (fl_wanted){"the second thermometer", FL_U_CELSIUS, -40.0, 350.0};
	case FL_MEASURE_SPANNED:
	case FL_MEASURE_COUNT:
		break;
	}
	return (fl_wanted){"the sum of span corrections", FL_U_PERCENT, -50.0, 50.0};
}

static fl_wanted second_wanted(const fl_entry *entry, fl_measure what) {
	const fl_signal_range *range = fl_physics_signal_range(entry->setup.instrument->scale.signal);
	if (what == FL_MEASURE_INJECTION)
		return (fl_wanted){"the output", range->unit, range->measuring_low, range->measuring_high};
	if (what == FL_MEASURE_VOLUME)
		return (fl_wanted){"the time", FL_U_S, 1.0, 36000.0};
	return (fl_wanted){"the thermometer in use", FL_U_CELSIUS, -40.0, 350.0};
}

static double inside(const fl_measure_draft *d, int i) {
	return fl_to_inside(d->numbers[i].value, d->units[i]);
}

/* Output of an injection less what its pressure asks for, fraction of span; NAN without full-scale pressure. */
static double injection_error(const fl_entry *entry, const fl_measure_draft *d) {
	fl_reference reference;
	if (fl_entry_reference(entry, &reference, NULL) < 0)
		return NAN;
	double output = fl_reference_in_unit(d->numbers[1].value, d->units[1], reference.range->unit);
	double y = (output - reference.range->low) / (reference.range->high - reference.range->low);
	return y - fl_reference_x_of_pressure(&reference, inside(d, 0));
}

/* Measured over stated, NAN where nothing is stated. */
static double ratio_to_stated(const fl_entry *entry, const fl_measure_draft *d) {
	const fl_instrument *i = entry->setup.instrument;
	const fl_capillary *c = &i->capillary;
	if (d->what == FL_MEASURE_DENSITY)
		return inside(d, 0) / i->scale.dial_density_kg_m3;
	if (!i->has_geometry)
		return NAN;
	if (d->what == FL_MEASURE_SPEED)
		return inside(d, 0) / c->pump_speed_rev_s;
	return inside(d, 0) / inside(d, 1) / (c->displacement_m3_rev * c->pump_speed_rev_s / (1.0 + c->slip_fraction));
}

/* How far off is unusual, in the terms of `off`; common practice, no source. */
static bool is_unusual(const fl_entry *entry, const fl_measure_draft *d) {
	switch (d->what) {
	case FL_MEASURE_INJECTION:
		return fabs(injection_error(entry, d)) > 0.15;
	case FL_MEASURE_SPEED:
		return fabs(ratio_to_stated(entry, d) - 1.0) > 0.25;
	case FL_MEASURE_VOLUME:
		return fabs(ratio_to_stated(entry, d) - 1.0) > 0.5;
	case FL_MEASURE_DENSITY:
		return fabs(ratio_to_stated(entry, d) - 1.0) > 0.15;
	case FL_MEASURE_TEMPERATURE:
		return fabs(inside(d, 0) - inside(d, 1)) > 2.0;
	case FL_MEASURE_SPANNED:
	case FL_MEASURE_COUNT:
		break;
	}
	return fabs(inside(d, 0)) > 0.2;
}

/* ---- reading the line ---- */

/* Cuts " with DP-2" off the line and finds it in the stock. */
static fl_status take_equipment(fl_entry *entry, char *line, fl_measure_draft *d, const fl_equipment **item,
                                fl_error *err) {
	char *with = strstr(line, " with ");
	fl_error why = {0};
	*item = NULL;
	d->equipment[0] = '\0';
	if (!with)
		return FL_OK;
	*with = '\0';
	const char *id = with + 6;
	*item = fl_stock_equipment(entry->setup.stock, id);
	if (!*item || (*item)->role != kinds[d->what].role)
		return fl_fail(err, FL_E_NOT_FOUND, "\"%.60s\" is nothing in the stock that measures this", id);
	if (fl_stock_equipment_in_date(*item, entry->session->day, &why) < 0)
		return fl_fail(err, FL_E_VALUE, "%s, or name none: a usual uncertainty is then taken", why.message);
	snprintf(d->equipment, sizeof d->equipment, "%s", id);
	return FL_OK;
}

static fl_status read_amount(const fl_wanted *wanted, const char *text, fl_measure_draft *d, int i, fl_error *err) {
	double value;
	return fl_entry_amount(text, wanted, &d->numbers[i], &d->units[i], &value, err);
}

static fl_status read_amounts(const fl_entry *entry, char *line, fl_measure_draft *d, fl_error *err) {
	enum { MOST = 2 };
	char parts[MOST + 1][96];
	fl_wanted first = first_wanted(entry, d->what), second = second_wanted(entry, d->what);
	int count = fl_entry_split(line, parts, MOST);
	if (count != kinds[d->what].amounts)
		return fl_fail(err, FL_E_SYNTAX, "this is typed as: measure %s", kinds[d->what].example);
	fl_status status = read_amount(&first, parts[0], d, 0, err);
	if (status == FL_OK && count == 2)
		status = read_amount(&second, parts[1], d, 1, err);
	return status;
}

/* The words between two amounts say nothing that their units do not. */
static void drop_filler(char *line, const char *word) {
	char *at = strstr(line, word);
	if (at)
		memset(at + 1, ' ', strlen(word) - 2);
}

static fl_status find_kind(const char *line, fl_measure *what, const char **rest, fl_error *err) {
	size_t length = strcspn(line, " ");
	for (fl_measure i = 0; i < FL_MEASURE_COUNT; i++)
		if (strlen(fl_measure_word(i)) == length && strncmp(line, fl_measure_word(i), length) == 0) {
			*what = i;
			*rest = line + length;
			return FL_OK;
		}
	return fl_fail(
	    err, FL_E_VALUE,
	    "measure what: injection, speed, volume, density, temperature or spanned-out; measure alone explains "
	    "them");
}

static fl_status check_state(const fl_entry *entry, const fl_measure_draft *d, fl_error *err) {
	const fl_session_run *as_found = &entry->session->runs[FL_RUN_AS_FOUND];
	if (!as_found->closed && !as_found->missing)
		return fl_fail(err, FL_E_STATE, "extra measurements come after the as-found run is closed");
	const fl_instrument *i = entry->setup.instrument;
	if ((d->what == FL_MEASURE_SPEED || d->what == FL_MEASURE_VOLUME) && !i->has_geometry)
		return fl_fail(err, FL_E_STATE,
		               "the instrument's record has no pump and capillary to hold this against: state them in "
		               "instruments.yaml");
	if (d->what == FL_MEASURE_DENSITY && i->scale.dial_unit == FL_DIAL_MPA_S)
		return fl_fail(err, FL_E_STATE, "a dial in mPa·s assumes no density");
	if (d->what == FL_MEASURE_INJECTION && isnan(fl_reference_dp_full(entry->setup.instrument)))
		return fl_fail(
		    err, FL_E_STATE,
		    "the differential pressure at full scale is not known, so an injection says nothing: state it in "
		    "instruments.yaml");
	return FL_OK;
}

/* ---- committing ---- */

static void tell(const fl_entry *entry, const fl_measure_draft *d, fl_text *say) {
	char off[48];
	double value = NAN;
	const char *of = "";
	if (d->what == FL_MEASURE_INJECTION) {
		value = 100.0 * injection_error(entry, d);
		of = "of span off what the pressure asks for";
	} else if (d->what == FL_MEASURE_SPEED || d->what == FL_MEASURE_VOLUME || d->what == FL_MEASURE_DENSITY) {
		value = 100.0 * (ratio_to_stated(entry, d) - 1.0);
		of = "off what the instrument's record states";
	}
	fl_text_printf(say, "  Noted [%d]", entry->session->last_sequence);
	if (!isnan(value))
		fl_text_printf(say, ": %s %% %s", fl_decimal_format_signed(value, 2, true, off, sizeof off), of);
	fl_text_add(say, "\n");
}

fl_status fl_entry_measure_commit(fl_entry *entry, fl_text *say, fl_error *err) {
	fl_measure_draft *d = &entry->measure;
	char value[32], other[32], typed[FL_TYPED_SIZE + 16];
	int main = d->what == FL_MEASURE_INJECTION ? 1 : 0, second = 1 - main;
	snprintf(typed, sizeof typed, "%s %.12s", d->numbers[second].typed, fl_unit_text(d->units[second]));
	fl_event event = {.verb = FL_V_MEASURE,
	                  .fields[FL_F_RUN] = fl_run_word(fl_session_state(entry->session)),
	                  .fields[FL_F_ID] = fl_measure_word(d->what),
	                  .fields[FL_F_TYPED] = d->numbers[main].typed,
	                  .fields[FL_F_UNIT] = fl_unit_text(d->units[main]),
	                  .fields[FL_F_VALUE] = fl_entry_number(d->numbers[main].value, value),
	                  .fields[FL_F_ITEM] = d->equipment[0] ? d->equipment : NULL};
	if (kinds[d->what].amounts == 2)
		fl_entry_number(inside(d, second), other);
	if (d->what == FL_MEASURE_INJECTION) {
		event.fields[FL_F_APPLIED_TYPED] = d->numbers[0].typed;
		event.fields[FL_F_APPLIED_UNIT] = fl_unit_text(d->units[0]);
		event.fields[FL_F_APPLIED_PA] = other;
	} else if (d->what == FL_MEASURE_VOLUME) {
		event.fields[FL_F_OVER_TYPED] = typed;
		event.fields[FL_F_OVER_S] = other;
	} else if (d->what == FL_MEASURE_TEMPERATURE) {
		event.fields[FL_F_TEMP_TYPED] = typed;
		event.fields[FL_F_TEMP_C] = other;
	}
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		tell(entry, d, say);
	return status;
}

static void ask_back(fl_entry *entry) {
	const fl_measure_draft *d = &entry->measure;
	char what[160];
	fl_entry_form_open(entry, FL_FORM_MEASURE);
	snprintf(what, sizeof what, "%s %s %s", fl_measure_word(d->what), d->numbers[0].typed, fl_unit_text(d->units[0]));
	if (kinds[d->what].amounts == 2) {
		size_t used = strlen(what);
		snprintf(what + used, sizeof what - used, ", %s %s", d->numbers[1].typed, fl_unit_text(d->units[1]));
	}
	snprintf(entry->form.answers[1], sizeof entry->form.answers[1], "measure %s", what);
	snprintf(entry->form.ask, sizeof entry->form.ask, "%s is far from usual: is it right (yes or no)", what);
}

fl_status fl_entry_measure(fl_entry *entry, const char *rest, fl_text *say, fl_error *err) {
	char line[FL_LINE_SIZE];
	fl_measure_draft *d = &entry->measure;
	const fl_equipment *item = NULL;
	const char *amounts = "";
	if (!*rest) {
		show_kinds(say);
		return FL_OK;
	}
	fl_status status = find_kind(rest, &d->what, &amounts, err);
	if (status < 0)
		return status;
	snprintf(line, sizeof line, "%s", amounts);
	status = check_state(entry, d, err);
	if (status >= 0)
		status = take_equipment(entry, line, d, &item, err);
	drop_filler(line, " in ");
	drop_filler(line, " beside ");
	if (status >= 0)
		status = read_amounts(entry, line, d, err);
	if (status != FL_OK)
		return status;
	if (item)
		status = fl_entry_keep_equipment(entry, item, err);
	if (status < 0)
		return status;
	if (!is_unusual(entry, d))
		return fl_entry_measure_commit(entry, say, err);
	ask_back(entry);
	return FL_OK;
}
