/* test_content.c - what a certificate must say, read as text from whole cases.
 * What must be there: ISO/IEC 17025:2017, 7.8.2.1 a to p and 7.8.4.1 a to f (in short, from a public page and memory).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "sample.h"

static char *text_of(sample_case *one) {
	fl_text text = {0};
	fl_sheet *sheet = sample_sheet(one);
	fl_sheet_text(sheet, &text);
	fl_sheet_free(sheet);
	assert_false(text.failed);
	return text.data;
}

/* The certificate of a case as text, to be freed; the case is gone. */
static char *certificate(const sample_wish *wish) {
	sample_case one;
	sample_make(&one, wish);
	sample_assess(&one);
	char *text = text_of(&one);
	sample_free(&one);
	return text;
}

static void must_say(const char *text, const char *part) {
	if (!strstr(text, part))
		fail_msg("the certificate does not say \"%s\":\n%s", part, text);
}

static void must_not_say(const char *text, const char *part) {
	if (strstr(text, part))
		fail_msg("the certificate says \"%s\":\n%s", part, text);
}

/* True if `word` stands in the text as a word of its own. */
static bool has_word(const char *text, const char *word) {
	size_t length = strlen(word);
	for (const char *at = text; (at = strstr(at, word)); at += length) {
		bool before = at == text || !((at[-1] >= 'a' && at[-1] <= 'z') || at[-1] == '-');
		bool after = !((at[length] >= 'a' && at[length] <= 'z') || at[length] == '-');
		if (before && after)
			return true;
	}
	return false;
}

static const sample_wish adjusted = {.zero_span = 0.0025,
                                     .gain = 0.0249,
                                     .left_zero_span = 0.001,
                                     .left_gain = -0.0008,
                                     .decision = FL_DECISION_ADJUST,
                                     .struck = 2,
                                     .remarks = 1};
static const sample_wish left_alone = {.zero_span = 0.0017, .gain = 0.0085, .decision = FL_DECISION_LEAVE};

static void test_all_that_a_certificate_needs(void **state) {
	(void)state;
	char *text = certificate(&adjusted);
	static const char *const parts[] = {
	    "Calibration certificate",
	    "TY-2026-0417",
	    "Tallmere Yard, instrument bench (invented)",
	    "Quay 3",
	    "Customer: Quillhaven, engine department",
	    "Place: On board Quillhaven, alongside at Tallmere Yard, Port Hesper",
	    "Order: TY-8841",
	    "Tag: VT-1",
	    "Serial no.: FL-0417",
	    "Dial: 0 to 50 mm²/s",
	    "Dial density: 900 kg/m³",
	    "Signal: 4–20 mA",
	    "Set point: 13 ± 0.6 mm²/s",
	    "Calibrated: 2026-04-14",
	    "Issued: 2026-04-15",
	    "Calibrated at: 40 °C",
	    "Procedure: workshop-calibration, version 1.0",
	    "Method. Five reference oils",
	    "equivalent viscosity: its dynamic viscosity divided by the dial density",
	    "As-found: fail",
	    "As-left: pass",
	    "Decision: adjusted. Reason: Span error out of tolerance. Decided by Ada Lindqvist.",
	    "Tolerance. ±2.0 % of span (±1.0 mm²/s) about the ideal output, stated for this instrument.",
	    "Decision rule. Four states (ILAC-G8:09/2019",
	    "zero screw of the transmitter | 4.040 mA | 4.000 mA | 09:20 UTC (11:20 local)",
	    "coverage probability of 95.45 %",
	    "thermometer | TH-7 | TB-6603 | Tallmere bench (invented) | 0.03 K (k = 2) | 2025-09-02 | 2026-09-02 | in date",
	    "bath | BA-2 | TB-6607 | Tallmere bench (invented) | ±0.05 K, half width",
	    "LK-50 | 2511E | Lanternmoor-2511E | 40.00 | 49.20 | 0.20 | 850.3 | 0.4 | 2025-11-18 | 2026-11-18 | 2026-02-02",
	    "Issued by Lanternmoor oil bench (invented).",
	    "permit: P-2291 (06:00)",
	    "Unfinished when the session was closed",
	    "No: engine stays stopped until Friday",
	    "air in the impulse line | Ada Lindqvist",
	    "Remark. The coupling of the metering pump was renewed",
	    "by keyboard, step by step",
	    "times in UTC, local time UTC+02:00",
	    "9c56cc51b374c3ba189210d5b6d4bf57790d351c96c47c02190ecf1e430635ab",
	    "results relate only to the item",
	    "copied only in full",
	    "It amends no earlier certificate.",
	    "Reynolds number at most",
	    "name: Ada Lindqvist",
	    "name: Γιώργος Αναγνώστου",
	    "linearity, independent",
	    "hysteresis, mean of the cycles, largest",
	    "End of certificate TY-2026-0417",
	};
	for (size_t i = 0; i < sizeof parts / sizeof *parts; i++)
		must_say(text, parts[i]);
	must_not_say(text, "On every page");
	must_not_say(text, "recalibrat");
	must_not_say(text, "next calibration");
	must_not_say(text, " nan");
	must_not_say(text, " inf ");
	free(text);
}

/* Each number of the deciding point, from the result, at the place of its U. */
static void test_row_of_the_deciding_point(void **state) {
	(void)state;
	sample_case one;
	sample_make(&one, &adjusted);
	sample_assess(&one);
	const fl_run_result *found = &one.result.runs[FL_RUN_AS_FOUND];
	const fl_point_result *worst = found->worst;
	assert_non_null(worst);
	assert_int_equal(FL_VERDICT_FAIL, worst->verdict);
	char row[256];
	snprintf(row, sizeof row,
	         "%.2f | %.3f | %.1f | %.3f | %zu | %.3f | %.3f | +%.2f | +%.2f | %.2f | %.2f | %.2f | fail", worst->temp_c,
	         worst->certified_m2_s * 1e6, worst->rho_kg_m3, worst->equivalent_m2_s * 1e6, worst->n, worst->ideal_output,
	         worst->output, 100 * worst->error_span, worst->error_dial, 100 * worst->sum.expanded,
	         50 * worst->sum.expanded, worst->sum.coverage_factor);
	char *text = text_of(&one);
	must_say(text, row);
	free(text);
	sample_free(&one);
}

static void test_left_alone_is_not_typed_again(void **state) {
	(void)state;
	char *text = certificate(&left_alone);
	must_say(text, "As-left = as-found");
	must_say(text, "Decision: left as found");
	must_say(text, "None: nothing was adjusted.");
	must_say(text, "Struck readings. None. No departures from the procedure are recorded.");
	must_not_say(text, "as-left, rising");
	free(text);
}

static void test_missing_as_found_is_said_with_its_reason(void **state) {
	(void)state;
	const sample_wish wish = {.missing_as_found = true, .left_gain = 0.001, .decision = FL_DECISION_ADJUST};
	char *text = certificate(&wish);
	must_say(text, "As-found: not available");
	must_say(text, "Reason: The span was turned before anybody read it.");
	must_say(text, "Departure. No as-found run: The span was turned before anybody read it.");
	must_not_say(text, "As-found: pass");
	free(text);
}

static void test_no_rule_no_verdict_word(void **state) {
	(void)state;
	sample_case one;
	sample_make(&one, &adjusted);
	one.procedure.rule = FL_RULE_NONE;
	sample_assess(&one);
	char *text = text_of(&one);
	must_say(text, "No decision rule was agreed: no statement of conformity is made.");
	must_say(text, "As-found: no statement of conformity");
	assert_false(has_word(text, "pass"));
	assert_false(has_word(text, "fail"));
	assert_false(has_word(text, "conditional"));
	assert_false(has_word(text, "verdict"));
	free(text);
	sample_free(&one);
}

static void test_overdue_equipment_is_indicative_on_every_page(void **state) {
	(void)state;
	sample_wish wish = left_alone;
	wish.tachometer = true;
	char *text = certificate(&wish);
	must_say(text, "On every page: Indicative, not traceable");
	must_say(text, "indicative and not traceable, because:");
	must_say(text, "TC-1");
	must_say(text, "2026-03-01 | out of date");
	must_not_say(text, "all in date on the day");
	free(text);
}

static void test_expired_oil_is_indicative(void **state) {
	(void)state;
	sample_wish wish = left_alone;
	wish.day = fl_day_from_civil(2026, 12, 1); /* the oils are to be used before 2026-11-18 */
	char *text = certificate(&wish);
	must_say(text, "On every page: Indicative, not traceable");
	must_say(text, "2026-11-18 | 2026-02-02 | out of date");
	free(text);
}

static void test_import_is_said(void **state) {
	(void)state;
	sample_wish wish = left_alone;
	wish.source = FL_SOURCE_IMPORT;
	char *text = certificate(&wish);
	must_say(text, "Departure. The readings were imported from a file");
	must_say(text, "import of a file of readings");
	must_not_say(text, "No departures from the procedure");
	free(text);
}

static void test_transmitter_alone_speaks_of_no_oil(void **state) {
	(void)state;
	const sample_wish wish = {.template_name = "transmitter-alone", .gain = 0.004, .decision = FL_DECISION_LEAVE};
	char *text = certificate(&wish);
	must_say(text, "Differential-pressure transmitter of viscosity sensor VT-1");
	must_say(text, "applied, mbar");
	must_say(text, "pressure standard | PS-1");
	must_not_say(text, "reference oil ");
	must_not_say(text, "Certificates of the oils");
	must_not_say(text, "pump stopped and the legs");
	free(text);
}

static void test_not_determined_is_said(void **state) {
	(void)state;
	const sample_wish wish = {.template_name = "shipboard-check", .gain = 0.002, .decision = FL_DECISION_LEAVE};
	char *text = certificate(&wish);
	must_say(text, "not determined");
	free(text);
}

static void test_issue_without_number_is_refused(void **state) {
	(void)state;
	sample_case one;
	fl_error err = {0};
	fl_sheet *sheet = NULL;
	sample_make(&one, &left_alone);
	sample_assess(&one);
	one.issue.number = "12345678901234567890123456789012345678901";
	assert_int_equal(FL_E_VALUE, fl_certificate_content(&one.session, &one.procedure, &one.stock, &one.result,
	                                                    &one.issue, &sheet, NULL));
	one.issue.number = "";
	assert_int_equal(FL_E_VALUE, fl_certificate_content(&one.session, &one.procedure, &one.stock, &one.result,
	                                                    &one.issue, &sheet, &err));
	assert_non_null(strstr(err.message, "number"));
	assert_null(sheet);
	sample_free(&one);
}

static void test_hostile_words_stay_words(void **state) {
	(void)state;
	sample_wish wish = left_alone;
	wish.customer = "100 % %s %n <b>&amp;</b> (a\\b) | x";
	char *text = certificate(&wish);
	must_say(text, "Customer: 100 % %s %n <b>&amp;</b> (a\\b) | x");
	free(text);
}

/* Zones, risks with their prior, a verdict below the least ratio in writing, budgets where the procedure asks. */
static void test_zones_risks_and_budgets(void **state) {
	(void)state;
	static const fl_zone zones[] = {{20.0, 36.0, {FL_BAND_PERCENT_SPAN, 1.0}}};
	sample_case one;
	sample_make(&one, &left_alone);
	sample_assess(&one);
	char *text = text_of(&one);
	must_say(text, "Limits are inclusive.");
	must_say(text, "Probability of a true error beyond the tolerance");
	must_say(text, "What the dial means.");
	must_not_say(text, "Uncertainty budgets");
	must_not_say(text, "global risk");
	must_not_say(text, "conformity is stated although");
	free(text);
	fl_result_free(&one.result);
	fl_instrument *instrument = &one.stock.instruments[0];
	instrument->zones = zones;
	instrument->zone_count = 1;
	one.procedure.reliability = 0.9;
	one.procedure.minimum_tur = 20.0;
	one.procedure.states_below_tur = true;
	one.procedure.budget_on_certificate = true;
	sample_assess(&one);
	text = text_of(&one);
	must_say(text, "from 20 to 36 % of span ±1.0 % of span");
	must_say(text, "global risk of a false acceptance");
	must_say(text, "90 % of the true values in tolerance");
	must_say(text, "onformity is stated although the tolerance at");
	must_say(text, "Uncertainty budgets, as-left, both directions together");
	must_say(text, "viscosity between certified temperatures");
	must_say(text, "Student's t");
	free(text);
	instrument->zones = NULL;
	instrument->zone_count = 0;
	sample_free(&one);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(test_all_that_a_certificate_needs),
	    cmocka_unit_test(test_row_of_the_deciding_point),
	    cmocka_unit_test(test_left_alone_is_not_typed_again),
	    cmocka_unit_test(test_missing_as_found_is_said_with_its_reason),
	    cmocka_unit_test(test_no_rule_no_verdict_word),
	    cmocka_unit_test(test_overdue_equipment_is_indicative_on_every_page),
	    cmocka_unit_test(test_expired_oil_is_indicative),
	    cmocka_unit_test(test_import_is_said),
	    cmocka_unit_test(test_transmitter_alone_speaks_of_no_oil),
	    cmocka_unit_test(test_not_determined_is_said),
	    cmocka_unit_test(test_issue_without_number_is_refused),
	    cmocka_unit_test(test_zones_risks_and_budgets),
	    cmocka_unit_test(test_hostile_words_stay_words),
	};
	return cmocka_run_group_tests_name("certificate/content", tests, NULL, NULL);
}
