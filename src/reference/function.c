/* reference/function.c - function checks held against what is expected of them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The conversation says at once whether a function is in order, and the analysis says the same later: both ask here.
 */
#include "foundleft/reference.h"

#include <math.h>
#include <string.h>

const char *fl_function_word(fl_function_state state) {
	static const char *const words[] = {"not tried", "in order", "not in order", "not judged"};
	return words[state];
}

double fl_reference_x_of_dial(const fl_scale *scale, double dial) {
	double low_m2_s, high_m2_s, at_m2_s = dial * 1e-6;
	fl_status status = fl_physics_scale_span(scale, &low_m2_s, &high_m2_s, NULL);
	if (status >= 0 && scale->dial_unit == FL_DIAL_REDWOOD)
		status = fl_physics_redwood_to_nu(dial, &at_m2_s, NULL);
	if (status >= 0 && scale->dial_unit == FL_DIAL_SAYBOLT)
		status = fl_physics_saybolt_to_nu(dial, scale->saybolt_temp_c, &at_m2_s, NULL);
	return status < 0 ? NAN : (at_m2_s - low_m2_s) / (high_m2_s - low_m2_s);
}

double fl_reference_dial_of(const fl_scale *scale, double value, fl_unit unit) {
	const fl_signal_range *range = fl_physics_signal_range(scale->signal);
	fl_unit dial_unit = fl_physics_dial_unit(scale->dial_unit);
	double dial;
	if (fl_unit_quantity(unit) == fl_unit_quantity(dial_unit))
		return fl_reference_in_unit(value, unit, dial_unit);
	if (fl_unit_quantity(unit) != fl_unit_quantity(range->unit))
		return NAN;
	double x = (fl_reference_in_unit(value, unit, range->unit) - range->low) / (range->high - range->low);
	return fl_physics_dial_at(scale, x, &dial, NULL) < 0 ? NAN : dial;
}

static double expected_dial(const fl_instrument *instrument, fl_check_expects expects) {
	switch (expects) {
	case FL_EXPECT_ALARM_LOW:
		return instrument->alarm_low;
	case FL_EXPECT_ALARM_HIGH:
		return instrument->alarm_high;
	case FL_EXPECT_SET_POINT:
		break;
	}
	return instrument->set_point;
}

static fl_function_state judge(bool known, bool good) {
	if (!known)
		return FL_FUNCTION_NOT_JUDGED;
	return good ? FL_FUNCTION_IN_ORDER : FL_FUNCTION_NOT_IN_ORDER;
}

static double dial_at(const fl_scale *scale, double x) {
	double dial;
	return isnan(x) || fl_physics_dial_at(scale, x, &dial, NULL) < 0 ? NAN : dial;
}

/* A typed limit is a decimal: what lies on it to 2^-40 of the span lies within. */
static const double rounding_span = 0x1p-40;

static void judge_indication(const fl_instrument *instrument, fl_function_result *out) {
	const fl_scale *scale = &instrument->scale;
	double half = out->check->limit_pct_span / 100.0;
	out->expected = expected_dial(instrument, out->check->expects);
	out->expected_x = fl_reference_x_of_dial(scale, out->expected);
	out->low = dial_at(scale, out->expected_x - half);
	out->high = dial_at(scale, out->expected_x + half);
	if (!out->answer || !out->answer->typed)
		return;
	out->found = fl_reference_dial_of(scale, out->answer->value, out->answer->unit);
	out->found_x = fl_reference_x_of_dial(scale, out->found);
	double off = fabs(out->found_x - out->expected_x);
	out->state = judge(!isnan(off), off <= half + rounding_span);
}

static void judge_amount(fl_function_result *out) {
	const fl_function_check *check = out->check;
	out->expected = check->expected;
	out->low = check->low;
	out->high = check->high;
	if (!out->answer || !out->answer->typed)
		return;
	out->found = fl_reference_in_unit(out->answer->value, out->answer->unit, check->unit);
	double room = 0x1p-40 * fmax(fabs(out->found), 1.0);
	out->state = judge(true, out->found >= check->low - room && out->found <= check->high + room);
}

void fl_reference_function(const fl_instrument *instrument, const fl_function_check *check,
                           const fl_check_answer *answer, fl_function_result *out) {
	*out = (fl_function_result){.check = check, .answer = answer, .state = FL_FUNCTION_NOT_TRIED};
	out->found = out->expected = out->low = out->high = out->found_x = out->expected_x = NAN;
	out->true_value = out->true_u = out->true_U = out->true_low = out->true_high = NAN;
	if (check->kind == FL_CHECK_INDICATION)
		judge_indication(instrument, out);
	else if (check->kind == FL_CHECK_AMOUNT)
		judge_amount(out);
	else if (answer && answer->answer)
		out->state = judge(true, strcmp(answer->answer, "yes") == 0);
}
