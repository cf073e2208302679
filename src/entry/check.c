/* check.c - function checks: asking, reading, saying at once whether the function is in order.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static fl_unit unit_of(const fl_entry *entry, const fl_function_check *check) {
	return check->kind == FL_CHECK_AMOUNT ? check->unit
	                                      : fl_physics_dial_unit(entry->setup.instrument->scale.dial_unit);
}

/* " (mm²/s or mA; expected 18, from 17 to 19; empty: not tried)" */
void fl_entry_ask_check(const fl_entry *entry, const fl_function_check *check, fl_text *out) {
	fl_function_result expected;
	fl_reference_function(entry->setup.instrument, check, NULL, &expected);
	if (check->caution)
		fl_text_printf(out, "  Caution: %s\n", check->caution);
	fl_text_printf(out, "%s (", check->ask);
	if (check->kind == FL_CHECK_CONFIRM)
		fl_text_add(out, "yes or no");
	else
		fl_text_add(out, fl_unit_text(unit_of(entry, check)));
	if (check->kind == FL_CHECK_INDICATION)
		fl_text_printf(out, " or %s",
		               fl_unit_text(fl_physics_signal_range(entry->setup.instrument->scale.signal)->unit));
	if (!isnan(expected.expected))
		fl_text_printf(out, "; expected %.4g", expected.expected);
	if (isfinite(expected.low) && isfinite(expected.high))
		fl_text_printf(out, ", from %.4g to %.4g", expected.low, expected.high);
	else if (isfinite(expected.high))
		fl_text_printf(out, "; at most %.4g", expected.high);
	else if (isfinite(expected.low))
		fl_text_printf(out, "; at least %.4g", expected.low);
	fl_text_add(out, "; empty: not tried)> ");
}

static void tell(const fl_entry *entry, const fl_function_check *check, fl_text *say) {
	fl_function_result result;
	fl_reference_function(entry->setup.instrument, check, fl_session_check_answer(entry->session, check->id), &result);
	fl_text_printf(say, "  %s: %s\n", check->name, fl_function_word(result.state));
}

static const fl_function_check *check_of(const fl_entry *entry) {
	fl_step step = fl_entry_step(entry->session, entry->setup.procedure);
	return step.kind == FL_STEP_CHECK ? step.check : NULL;
}

fl_status fl_entry_check_untried(fl_entry *entry, fl_text *say, fl_error *err) {
	const fl_function_check *check = check_of(entry);
	if (!check)
		return fl_fail(err, FL_E_INTERNAL, "no function check is open");
	fl_event event = {.verb = FL_V_CHECK, .fields[FL_F_ID] = check->id, .fields[FL_F_REASON] = entry->form.answers[0]};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		tell(entry, check, say);
	return status;
}

fl_status fl_entry_check_amount(fl_entry *entry, fl_text *say, fl_error *err) {
	const fl_function_check *check = check_of(entry);
	char value[32];
	if (!check)
		return fl_fail(err, FL_E_INTERNAL, "no function check is open");
	fl_event event = {.verb = FL_V_CHECK,
	                  .fields[FL_F_ID] = check->id,
	                  .fields[FL_F_TYPED] = entry->form.item,
	                  .fields[FL_F_UNIT] = fl_unit_text(entry->form.unit),
	                  .fields[FL_F_VALUE] = fl_entry_number(entry->form.value, value)};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		tell(entry, check, say);
	return status;
}

static fl_status answer_confirm(fl_entry *entry, const fl_function_check *check, const char *line, fl_text *say,
                                fl_error *err) {
	int yes = fl_entry_yes(line);
	if (yes < 0)
		return fl_fail(err, FL_E_VALUE, "answer yes or no, or nothing if it is not tried");
	fl_event event = {.verb = FL_V_CHECK, .fields[FL_F_ID] = check->id, .fields[FL_F_ANSWER] = yes ? "yes" : "no"};
	fl_status status = fl_entry_commit(entry, &event, err);
	if (status >= 0)
		tell(entry, check, say);
	return status;
}

/* What the amount can be at all. */
static fl_wanted wanted_of(const fl_entry *entry, const fl_function_check *check, fl_unit typed) {
	const fl_scale *scale = &entry->setup.instrument->scale;
	const fl_signal_range *range = fl_physics_signal_range(scale->signal);
	fl_wanted wanted = {"this check", unit_of(entry, check), -1e6, 1e6};
	double span = scale->high - scale->low;
	if (check->kind != FL_CHECK_INDICATION)
		return wanted;
	wanted.what = "the indication";
	wanted.low = scale->low - 0.25 * span;
	wanted.high = scale->high + 0.25 * span;
	if (fl_unit_quantity(typed) != fl_unit_quantity(range->unit))
		return wanted;
	wanted.unit = range->unit;
	wanted.low = range->low - 0.25 * (range->high - range->low);
	wanted.high = range->high + 0.25 * (range->high - range->low);
	return wanted;
}

/* The function of an amount that lies far from everything expected is more likely mistyped. */
static bool is_unusual(const fl_function_result *r) {
	double width = r->high - r->low, off = fmax(r->low - r->found, r->found - r->high);
	if (isfinite(width))
		return off > 10.0 * width;
	double limit = isfinite(r->high) ? r->high : r->low;
	return isfinite(limit) && fabs(r->found) > 10.0 * fmax(fabs(limit), 1e-12);
}

fl_status fl_entry_answer_check(fl_entry *entry, const fl_step *step, const char *line, fl_text *say, fl_error *err) {
	const fl_function_check *check = step->check;
	fl_decimal number;
	fl_unit unit = FL_U_NONE;
	double value;
	fl_error ignored = {0};
	fl_function_result result;
	if (!*line) {
		fl_entry_form_open(entry, FL_FORM_UNTRIED);
		return FL_OK;
	}
	if (check->kind == FL_CHECK_CONFIRM)
		return answer_confirm(entry, check, line, say, err);
	if (fl_amount_parse(line, unit_of(entry, check), &number, &unit, NULL, &ignored) < 0)
		unit = FL_U_NONE; /* told below */
	fl_wanted wanted = wanted_of(entry, check, unit);
	fl_status status = fl_entry_amount(line, &wanted, &number, &unit, &value, err);
	if (status != FL_OK)
		return status;
	fl_check_answer answer = {.typed = number.typed, .unit = unit, .value = number.value};
	fl_reference_function(entry->setup.instrument, check, &answer, &result);
	bool unusual = is_unusual(&result);
	fl_entry_form_open(entry, unusual ? FL_FORM_CHECK : FL_FORM_NONE);
	snprintf(entry->form.item, sizeof entry->form.item, "%s", number.typed);
	entry->form.unit = unit;
	entry->form.value = number.value;
	if (!unusual)
		return fl_entry_check_amount(entry, say, err);
	snprintf(entry->form.answers[1], sizeof entry->form.answers[1], "%s: %s %s", check->id, number.typed,
	         fl_unit_text(unit));
	snprintf(entry->form.ask, sizeof entry->form.ask, "%s %s is far from what is expected: is it right (yes or no)",
	         number.typed, fl_unit_text(unit));
	return FL_OK;
}
