/* test_why.c - opinions on the certificate: marked, only where the procedure lets them stand, never a cause that the
 * readings do not single out; and the function checks.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "sample.h"

/* `cause` is the opinion on the as-found run; it may be NULL. */
static char *certificate(const sample_wish *wish, const fl_cause *cause, bool opinions, fl_check_answer *checks,
                         size_t count) {
	sample_case c;
	fl_text text = {0};
	fl_cause causes[FL_RUN_KINDS] = {0};
	sample_make(&c, wish);
	c.procedure.opinions_on_certificate = opinions;
	c.session.checks = checks;
	c.session.check_count = count;
	sample_assess(&c);
	if (cause)
		causes[FL_RUN_AS_FOUND] = *cause;
	c.issue.causes = causes;
	fl_sheet *sheet = sample_sheet(&c);
	fl_sheet_text(sheet, &text);
	fl_sheet_free(sheet);
	sample_free(&c);
	return text.data;
}

static void must_say(const char *text, const char *part) {
	if (!strstr(text, part))
		print_error("the certificate does not say \"%s\":\n%s\n", part, text);
	assert_non_null(strstr(text, part));
}

static void must_not_say(const char *text, const char *part) {
	if (strstr(text, part))
		print_error("the certificate says \"%s\"\n", part);
	assert_null(strstr(text, part));
}

static fl_finding finding(fl_finding_kind kind, fl_strength strength, const char *sentence) {
	return (fl_finding){.kind = kind,
	                    .id = sentence,
	                    .sentence = sentence,
	                    .advice = "ADVICE.",
	                    .reason = "REASON.",
	                    .strength = strength,
	                    .z = NAN,
	                    .answered = ""};
}

static const sample_wish as_it_is = {.decision = FL_DECISION_LEAVE};

/* What the readings single out, and groups that they speak for, stand there; open groups, hints for the bench and what
 * a trim would do don't. */
static void opinions_are_marked_and_chosen(void **state) {
	(void)state;
	fl_finding findings[] = {
	    finding(FL_FINDING_TWO_ZEROS, FL_STRENGTH_NONE, "Two zeros."),
	    finding(FL_FINDING_CAUSE, FL_STRENGTH_CLEAR, "The readings single out: the particle."),
	    finding(FL_FINDING_GROUP, FL_STRENGTH_LIKELY, "Cannot be told apart: span or deposit."),
	    finding(FL_FINDING_GROUP, FL_STRENGTH_NONE, "Leave open whether: column or air."),
	    finding(FL_FINDING_REPAIR_FIRST, FL_STRENGTH_CLEAR, "Clean first."),
	    finding(FL_FINDING_TRIM, FL_STRENGTH_NONE, "A trim would do."),
	    finding(FL_FINDING_NEXT_POINT, FL_STRENGTH_NONE, "Another oil would tell most."),
	};
	fl_cause cause = {.available = true, .findings = findings, .finding_count = sizeof findings / sizeof findings[0]};
	char *text = certificate(&as_it_is, &cause, true, NULL, 0);
	must_say(text, "Opinions and interpretations");
	must_say(text, "not part of the calibration results (ISO/IEC 17025:2017, 7.8.7)");
	must_say(text, "The readings single out: the particle. (clear) REASON. ADVICE.");
	must_say(text, "Cannot be told apart: span or deposit. (likely) REASON.");
	must_say(text, "Clean first.");
	must_not_say(text, "Leave open whether");
	must_not_say(text, "Two zeros.");
	must_not_say(text, "A trim would do.");
	must_not_say(text, "Another oil");
	free(text);
	text = certificate(&as_it_is, &cause, false, NULL, 0);
	must_not_say(text, "Opinions and interpretations");
	must_not_say(text, "single out");
	free(text);
}

static void nothing_to_say_leaves_no_heading(void **state) {
	(void)state;
	fl_finding nothing = finding(FL_FINDING_NO_CAUSE, FL_STRENGTH_NONE, "Nothing here asks for a cause.");
	fl_cause cause = {.available = true, .findings = &nothing, .finding_count = 1};
	char *text = certificate(&as_it_is, &cause, true, NULL, 0);
	must_not_say(text, "Opinions and interpretations");
	free(text);
	text = certificate(&as_it_is, NULL, true, NULL, 0);
	must_not_say(text, "Opinions and interpretations");
	free(text);
}

/* The line of this instrument: 2 % too much over the whole scale. The high alarm trips at an indication of 20.4 mm²/s:
 * the true viscosity is 20.4 / 1.02 = 20.00 mm²/s; the low one at 10 mm²/s: 9.80 mm²/s. The noise of the readings is a
 * thousandth of a mm²/s. */
static void function_checks_stand_on_it(void **state) {
	(void)state;
	const sample_wish two_percent = {.gain = 0.02, .decision = FL_DECISION_LEAVE};
	fl_check_answer checks[] = {{.id = "alarm-high", .typed = "20.4", .value = 20.4, .unit = FL_U_MM2_S},
	                            {.id = "alarm-low", .typed = "7.2", .value = 7.2, .unit = FL_U_MA},
	                            {.id = "alarm-failure", .answer = "yes", .value = NAN},
	                            {.id = "controller-direction", .answer = "no", .value = NAN},
	                            {.id = "valve-stroke", .reason = "the heater is needed in port", .value = NAN}};
	char *text = certificate(&two_percent, NULL, true, checks, 5);
	must_say(text, "Function checks");
	must_say(text, "high viscosity alarm | 20 mm²/s | 19 to 21 mm²/s | 20.4 mm²/s | in order | 19.999 ± 0.0");
	must_say(text, "low viscosity alarm | 9 mm²/s | 8 to 10 mm²/s | 7.2 mA (10 mm²/s) | in order | 9.80");
	must_say(text, "signal-failure alarm | yes |  | yes | in order");
	must_say(text, "controller direction | yes |  | no | not in order");
	must_say(text, "not tried: the heater is needed in port");
	must_say(text, "change-over to temperature control | yes |  |  | not tried: not recorded");
	must_say(text, "the straight line through its as-left errors");
	free(text);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(opinions_are_marked_and_chosen),
	    cmocka_unit_test(nothing_to_say_leaves_no_heading),
	    cmocka_unit_test(function_checks_stand_on_it),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
