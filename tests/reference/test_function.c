/* test_function.c - function checks held against what is expected, by numbers that can be followed by hand.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "foundleft/reference.h"

#include <math.h>
#include <string.h>

static const fl_instrument instrument = {.tag = "VT-1",
                                         .scale = {FL_DIAL_MM2_S, 0.0, 50.0, 900.0, NAN, FL_SIGNAL_4_20_MA},
                                         .dp_full_pa = NAN,
                                         .set_point = 13.0,
                                         .alarm_low = 9.0,
                                         .alarm_high = 20.0};

static fl_function_state tried(const fl_function_check *check, double value, fl_unit unit) {
	fl_check_answer answer = {.typed = "?", .value = value, .unit = unit};
	fl_function_result result;
	fl_reference_function(&instrument, check, &answer, &result);
	return result.state;
}

/* 2 % of 50 mm²/s is 1 mm²/s; 19 and 21 mm²/s are 10.08 and 10.72 mA. The limits themselves are in order. */
static void indications_are_held_to_the_record(void **state) {
	(void)state;
	fl_function_check check = {.kind = FL_CHECK_INDICATION, .expects = FL_EXPECT_ALARM_HIGH, .limit_pct_span = 2.0};
	fl_function_result result;
	fl_reference_function(&instrument, &check, NULL, &result);
	assert_int_equal(result.state, FL_FUNCTION_NOT_TRIED);
	check_close("low", 19.0, result.low, 1e-12);
	check_close("high", 21.0, result.high, 1e-12);
	assert_int_equal(tried(&check, 21.0, FL_U_MM2_S), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&check, 19.0, FL_U_MM2_S), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&check, 10.72, FL_U_MA), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&check, 10.08, FL_U_MA), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&check, 21.0001, FL_U_MM2_S), FL_FUNCTION_NOT_IN_ORDER);
	assert_int_equal(tried(&check, 10.0799, FL_U_MA), FL_FUNCTION_NOT_IN_ORDER);
	check.expects = FL_EXPECT_ALARM_LOW;
	assert_int_equal(tried(&check, 20.0, FL_U_MM2_S), FL_FUNCTION_NOT_IN_ORDER);
	assert_int_equal(tried(&check, 9.4, FL_U_MM2_S), FL_FUNCTION_IN_ORDER);
	check.expects = FL_EXPECT_SET_POINT;
	assert_int_equal(tried(&check, 12.1, FL_U_MM2_S), FL_FUNCTION_IN_ORDER);
}

static void without_a_record_nothing_is_judged(void **state) {
	(void)state;
	fl_instrument bare = instrument;
	fl_function_check check = {.kind = FL_CHECK_INDICATION, .expects = FL_EXPECT_ALARM_HIGH, .limit_pct_span = 2.0};
	fl_check_answer answer = {.typed = "20", .value = 20.0, .unit = FL_U_MM2_S};
	fl_function_result result;
	bare.alarm_high = NAN;
	fl_reference_function(&bare, &check, &answer, &result);
	assert_int_equal(result.state, FL_FUNCTION_NOT_JUDGED);
	check_close("found", 20.0, result.found, 0.0);
}

static void amounts_and_answers(void **state) {
	(void)state;
	fl_function_check delay = {
	    .kind = FL_CHECK_AMOUNT, .unit = FL_U_S, .expected = NAN, .low = -INFINITY, .high = 30.0};
	fl_function_check stroke = {
	    .kind = FL_CHECK_AMOUNT, .unit = FL_U_PERCENT, .expected = 50.0, .low = 45.0, .high = 55.0};
	fl_function_check direction = {.kind = FL_CHECK_CONFIRM};
	fl_check_answer yes = {.answer = "yes"}, no = {.answer = "no"}, untried = {.reason = "no air"};
	fl_function_result result;
	assert_int_equal(tried(&delay, 30.0, FL_U_S), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&delay, 0.5, FL_U_MIN), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&delay, 30.1, FL_U_S), FL_FUNCTION_NOT_IN_ORDER);
	assert_int_equal(tried(&stroke, 45.0, FL_U_PERCENT), FL_FUNCTION_IN_ORDER);
	assert_int_equal(tried(&stroke, 44.9, FL_U_PERCENT), FL_FUNCTION_NOT_IN_ORDER);
	fl_reference_function(&instrument, &direction, &yes, &result);
	assert_int_equal(result.state, FL_FUNCTION_IN_ORDER);
	fl_reference_function(&instrument, &direction, &no, &result);
	assert_int_equal(result.state, FL_FUNCTION_NOT_IN_ORDER);
	fl_reference_function(&instrument, &direction, &untried, &result);
	assert_int_equal(result.state, FL_FUNCTION_NOT_TRIED);
	assert_string_equal(fl_function_word(result.state), "not tried");
}

/* A dial in Redwood seconds: its divisions are not even, so the place goes through viscosity.
 * The relations are those of physics.h, worked out here by hand. */
static void a_dial_in_seconds_goes_through_viscosity(void **state) {
	(void)state;
	fl_scale scale = {FL_DIAL_REDWOOD, 40.0, 200.0, 900.0, NAN, FL_SIGNAL_4_20_MA};
	double low = 0.260 * 40.0 - 179.0 / 40.0, high = 0.247 * 200.0 - 50.0 / 200.0, at = 0.247 * 150.0 - 50.0 / 150.0;
	double x = fl_reference_x_of_dial(&scale, 150.0);
	check_close("place of 150 s", (at - low) / (high - low), x, 1e-9);
	check_close("back from the output", 150.0, fl_reference_dial_of(&scale, 4.0 + 16.0 * x, FL_U_MA), 1e-9);
	assert_true(isnan(fl_reference_dial_of(&scale, 1.0, FL_U_BAR)));
	assert_true(isnan(fl_reference_x_of_dial(&scale, 10.0)));
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(indications_are_held_to_the_record),
	    cmocka_unit_test(without_a_record_nothing_is_judged),
	    cmocka_unit_test(amounts_and_answers),
	    cmocka_unit_test(a_dial_in_seconds_goes_through_viscosity),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
