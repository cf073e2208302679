/* test_report.c - what a result looks like to people and to programs.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The result is put together here, so that every number that must appear is known. Errors of both runs are the means
 * of the invented demonstration session of VT-1 (S26F, S26L), rounded; U as its budget gives them. The rest is chosen
 * so that no two numbers are alike.
 */
#include "report.h"

#include <jansson.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "check.h"
#include "report_parts.h"

#define OILS 5
#define POINTS (2 + 2 * OILS)
#define MINUS "\u2212"

/* ---- a known result ---------------------------------------------------------------------------------------------- */

typedef struct fixture {
	fl_case one;
	fl_instrument instrument;
	fl_session_point session_points[OILS];
	fl_plan_point plan[OILS];
	fl_point_result points[FL_RUN_KINDS][POINTS], combined[FL_RUN_KINDS][OILS + 1];
	double hysteresis[FL_RUN_KINDS][OILS + 1];
	fl_reading readings[2];
	fl_reading_result reading_results[2];
	fl_adjustment adjustments[1];
	fl_budget_line budget[2];
	const char *warnings[1], *not_traceable[1], *not_determined[1];
	fl_text out;
} fixture;

static const struct {
	const char *oil, *lot;
	double x, certified_mm2_s, rho_kg_m3, expanded;
	double error[FL_RUN_KINDS][2]; /* percent of span: rising, falling */
} oils[OILS] = {
    {"LK-2", "2511A", 0.0352, 2.050, 772.9, 0.039, {{0.293, 0.341}, {0.152, 0.171}}},
    {"LK-10", "2511B", 0.1842, 10.00, 828.9, 0.069, {{0.712, 0.763}, {0.201, 0.210}}},
    {"LK-20", "2511C", 0.3808, 20.40, 840.1, 0.158, {{1.152, 1.304}, {0.062, 0.101}}},
    {"LK-35", "2511D", 0.6506, 34.60, 846.2, 0.245, {{1.931, 2.047}, {-0.030, 0.101}}},
    {"LK-50", "2511E", 0.9297, 49.20, 850.3, 0.352, {{2.531, 2.540}, {0.043, -0.052}}},
};

static fl_point_result point_of(const fixture *f, int number, fl_pass pass, double error) {
	bool zero = number == FL_POINT_ZERO;
	double x = zero ? 0.0 : oils[number].x, tolerance = 0.02, expanded = zero ? 0.00021 : oils[number].expanded / 100.0;
	fl_point_result point = {.point = number, .pass = pass, .n = 9, .x = x};
	point.oil = zero ? "" : oils[number].oil;
	point.lot = zero ? "" : oils[number].lot;
	point.temp_c = zero ? (double)NAN : 40.01 + 0.001 * number;
	point.certified_m2_s = zero ? (double)NAN : oils[number].certified_mm2_s * 1e-6;
	point.rho_kg_m3 = zero ? (double)NAN : oils[number].rho_kg_m3;
	point.mu_pa_s = point.certified_m2_s * point.rho_kg_m3;
	point.applied_pa = (double)NAN;
	point.equivalent_m2_s = zero ? 0.0 : point.mu_pa_s / 900.0;
	point.dial = 50.0 * x;
	point.ideal_output = 4.0 + 16.0 * x;
	point.error_span = error / 100.0;
	point.output = point.ideal_output + 16.0 * point.error_span;
	point.error_dial = 50.0 * point.error_span;
	point.error_reading = x > 0.1 ? point.error_span / x : (double)NAN;
	point.s_span = 0.00034;
	point.range_span = 0.00087;
	point.sum = (fl_budget_sum){expanded / 2.05, 21.7, 2.05, expanded};
	point.tolerance_span = tolerance;
	point.tur = tolerance / expanded;
	point.verdict = fabs(point.error_span) <= tolerance - expanded ? FL_VERDICT_PASS : FL_VERDICT_FAIL;
	point.kinetic_span = 0.0022;
	point.has_flow = !zero;
	point.flow = (fl_flow){.reynolds = 12.3, .entrance_m = 0.0016, .dp_total_pa = 30000.0, .dp_kinetic_pa = 66.0};
	point.budget = f->budget;
	point.budget_count = 2;
	return point;
}

static void fill_run(fixture *f, fl_run_kind kind) {
	fl_run_result *run = &f->one.result.runs[kind];
	double zero = kind == FL_RUN_AS_FOUND ? 0.124 : 0.081;
	*run = (fl_run_result){.kind = kind, .available = true, .points = f->points[kind], .combined = f->combined[kind]};
	for (int pass = 0; pass < 2; pass++)
		run->points[run->point_count++] = point_of(f, FL_POINT_ZERO, (fl_pass)pass, zero + 0.001 * pass);
	run->combined[run->combined_count++] = point_of(f, FL_POINT_ZERO, FL_PASS_RISING, zero);
	for (int i = 0; i < OILS; i++) {
		const double *error = oils[i].error[kind];
		for (int pass = 0; pass < 2; pass++)
			run->points[run->point_count++] = point_of(f, i, (fl_pass)pass, error[pass]);
		f->hysteresis[kind][run->combined_count] = (error[1] - error[0]) / 100.0;
		fl_point_result *both = &run->combined[run->combined_count++];
		*both = point_of(f, i, FL_PASS_RISING, 0.5 * (error[0] + error[1]));
		both->both = true;
		both->n = 18;
	}
	run->combined[0].both = true;
	f->hysteresis[kind][0] = 0.00001;
	run->hysteresis = f->hysteresis[kind];
	run->worst = &run->points[POINTS - 1];
	run->verdict = run->worst->verdict;
	run->verdict_reason = "LK-50 falling decides";
	run->stopped_zero_span = zero / 100.0;
	run->stopped_zero_u_span = 0.00037;
	run->running_zero_span = 0.00273;
	run->running_zero_u_span = 0.00043;
	run->error_low_span = 0.00091;
	run->error_high_span = 0.02613;
	run->line = (fl_line){.intercept = 0.002491,
	                      .slope = 0.024913,
	                      .var_intercept = 1.6e-7,
	                      .var_slope = 6.4e-7,
	                      .cov = -2.4e-7,
	                      .s = 0.0007,
	                      .dof = 4};
	run->has_line = true;
	run->zero_error_span = 0.00249;
	run->span_error_span = 0.02491;
	run->span_between_ends_span = 0.02411;
	run->independent.max_abs = 0.000938;
	run->terminal.max_abs = 0.001876;
	run->zero_based.max_abs = 0.001823;
	run->has_linearity = true;
	run->hysteresis_span = 0.00152;
	run->hysteresis_point = 2;
	run->hysteresis_cycle_span = 0.00177;
	run->repeatability_span = 0.00066;
	run->repeatability_of_cycles = true;
	run->repeatability_s_span = 0.00044;
	run->repeatability_point = 3;
	run->repeatability_pass = FL_PASS_FALLING;
}

static void fill_instrument(fixture *f) {
	f->instrument = (fl_instrument){.tag = "VT-1",
	                                .serial = "FL-0417",
	                                .site = "Quillhaven (invented)",
	                                .owner = "",
	                                .position = "",
	                                .maker_plate = "",
	                                .scale = {.dial_unit = FL_DIAL_MM2_S, .high = 50.0, .dial_density_kg_m3 = 900.0}};
	f->one.instrument = &f->instrument;
}

static void fill_struck(fixture *f) {
	f->readings[0] = (fl_reading){.sequence = 31,
	                              .taken = INT64_MIN,
	                              .cycle = 2,
	                              .point = 1,
	                              .number = 3,
	                              .typed = "7.99",
	                              .unit = FL_U_MA,
	                              .output = 7.99,
	                              .struck = true,
	                              .struck_reason = "air in the impulse line",
	                              .struck_by = "Ada Moor"};
	f->reading_results[0] = (fl_reading_result){.reading = &f->readings[0], .ideal = {.x = 0.5}, .error_span = 0.9};
	f->one.session.readings = f->readings;
	f->one.session.reading_count = 1;
	f->one.result.runs[0].readings = f->reading_results;
	f->one.result.runs[0].reading_count = 1;
	f->one.result.runs[0].struck_count = 1;
}

static int make(void **state) {
	fixture *f = calloc(1, sizeof *f);
	if (!f)
		return -1;
	fill_instrument(f);
	fl_case *one = &f->one;
	strcpy(one->path, "visit.flj");
	memset(one->head, 'a', sizeof one->head - 1);
	for (int i = 0; i < OILS; i++) {
		f->session_points[i].oil = oils[i].oil;
		f->session_points[i].lot = oils[i].lot;
	}
	one->session.points = f->session_points;
	one->session.point_count = OILS;
	one->session.day = fl_day_from_civil(2026, 4, 14);
	one->session.decision = FL_DECISION_ADJUST;
	one->session.decision_reason = "beyond the adjust limit";
	f->adjustments[0] = (fl_adjustment){.item = "span", .before = "101.2", .after = "98.7"};
	one->session.adjustments = f->adjustments;
	one->session.adjustment_count = 1;
	one->procedure = (fl_procedure){.id = "workshop",
	                                .version = "3",
	                                .title = "Workshop calibration",
	                                .points = f->plan,
	                                .point_count = OILS,
	                                .cycles = 3,
	                                .falling = true,
	                                .readings = 3};
	f->budget[0] = (fl_budget_line){.name = "oil certificate",
	                                .stated = "0.20 %, k = 2",
	                                .distribution = FL_DIST_NORMAL,
	                                .u = 0.1,
	                                .unit = "%",
	                                .sensitivity = 0.93,
	                                .contribution_span = 0.00093,
	                                .dof = INFINITY};
	f->budget[1] = (fl_budget_line){.name = "repeatability",
	                                .stated = "s = 0.034, n = 9",
	                                .distribution = FL_DIST_STUDENT,
	                                .u = 0.011,
	                                .unit = "% of span",
	                                .sensitivity = 1,
	                                .contribution_span = 0.00011,
	                                .dof = 8};
	one->result.rule = FL_RULE_GUARDED;
	one->result.tolerance = (fl_band){FL_BAND_PERCENT_SPAN, 2.0};
	one->result.hysteresis_limit_span = 0.005;
	one->result.linearity_limit_span = (double)NAN;
	one->result.coverage_probability = 0.9545;
	one->result.traceable = true;
	one->result.dp_full_pa = 31321.0;
	fill_run(f, FL_RUN_AS_FOUND);
	fill_run(f, FL_RUN_AS_LEFT);
	*state = f;
	return 0;
}

static int drop(void **state) {
	fixture *f = *state;
	fl_text_free(&f->out);
	free(f);
	return 0;
}

/* ---- text -------------------------------------------------------------------------------------------------------- */

/* Is `wanted` there, whether or not a line was broken within it? */
static bool reads(const char *text, const char *wanted) {
	for (const char *start = text; *start; start++) {
		const char *at = start, *want = wanted;
		while (*want && *at == (*want == ' ' && *at == '\n' ? '\n' : *want)) {
			at += *at == '\n' && *want == ' ' ? 1 + strspn(at + 1, " ") : 1;
			want++;
		}
		if (!*want)
			return true;
	}
	return false;
}

static void contains(const char *text, const char *wanted) {
	if (!reads(text, wanted))
		fail_msg("\"%s\" is not in:\n%s", wanted, text);
}

static void lacks(const char *text, const char *unwanted) {
	if (strstr(text, unwanted))
		fail_msg("\"%s\" is in:\n%s", unwanted, text);
}

static void within(const char *text, int columns) {
	char line[2048];
	for (const char *at = text; *at;) {
		size_t length = strcspn(at, "\n");
		assert_true(length < sizeof line);
		memcpy(line, at, length);
		line[length] = '\0';
		if (fl_utf8_columns(line) > columns)
			fail_msg("%d columns: %s", fl_utf8_columns(line), line);
		at += length + (at[length] == '\n');
	}
}

static void lines_stay_within_the_width(void **state) {
	fixture *f = *state;
	fill_struck(f);
	f->not_traceable[0] =
	    "oil LK-10 lot 2411B expired on 2025-11-18, before the day of the calibration, and work went on";
	f->one.result.not_traceable = f->not_traceable;
	f->one.result.not_traceable_count = 1;
	f->one.result.traceable = false;
	for (int i = 0; i < POINTS; i++)
		f->points[0][i].verdict = FL_VERDICT_CONDITIONAL_FAIL; /* the widest word */
	static const int widths[] = {60, 72, 80, 100, 120, 160};
	for (size_t i = 0; i < sizeof widths / sizeof *widths; i++) {
		fl_text_clear(&f->out);
		fl_report_text(&f->one, widths[i], &f->out);
		assert_false(f->out.failed);
		within(f->out.data, widths[i]);
	}
}

static void long_names_are_cut_or_broken(void **state) {
	fixture *f = *state;
	char site[300];
	memset(site, 'w', sizeof site - 1);
	site[sizeof site - 1] = '\0';
	f->instrument.site = site;
	f->instrument.tag = "\u0395\u03bb\u03bb\u03b7\u03bd\u03b9\u03ba\u03cc \u041a\u0438\u0440\u0438\u043b\u043b";
	f->session_points[4].oil = "an oil with a name that is far too long for a table";
	fl_report_text(&f->one, 80, &f->out);
	within(f->out.data, 80);
	contains(f->out.data, "\u2026");
	contains(f->out.data, "\u0395\u03bb\u03bb\u03b7\u03bd\u03b9\u03ba\u03cc");
}

static void numbers_stand_in_the_text(void **state) {
	fixture *f = *state;
	fl_report_text(&f->one, 80, &f->out);
	const char *text = f->out.data;
	static const char *const wanted[] = {"VT-1, serial FL-0417",
	                                     "0 to 50 mm\u00b2/s at a dial density of 900 kg/m\u00b3",
	                                     "calibrated 2026-04-14",
	                                     "Workshop calibration (workshop, version 3)",
	                                     "aaaaaaaaaaaaaaaa\u2026",
	                                     "fail; worst at LK-50 falling: +2.54 % of span, U 0.35 (k = 2.05), tolerance",
	                                     "+0.29",
	                                     "0.039",
	                                     "2.05",
	                                     "\u00b1%",
	                                     "+0.12, U 0.037",
	                                     "+0.27, u 0.043",
	                                     "+0.249 (u 0.040)",
	                                     "+2.491 (u 0.080)",
	                                     "correlation " MINUS "0.75",
	                                     "+2.41",
	                                     "independent 0.09 (decides)",
	                                     "terminal-based 0.19",
	                                     "zero-based 0.18",
	                                     "0.15 at LK-20",
	                                     "in a single cycle 0.18; limit 0.50",
	                                     "0.07 at LK-35 falling",
	                                     "2511E",
	                                     "850.3",
	                                     "49.200",
	                                     "12.3",
	                                     MINUS "0.05",
	                                     "span, before 101.2, after 98.7",
	                                     "from +0.09 to +2.61"};
	for (size_t i = 0; i < sizeof wanted / sizeof *wanted; i++)
		contains(text, wanted[i]);
	lacks(text, "nan");
	lacks(text, "-0.");
}

static void numbers_of_a_column_share_their_decimal_point(void **state) {
	fixture *f = *state;
	fl_report_text(&f->one, 80, &f->out);
	/* U of the first and of the last row of the table of the as-found run: 0.021 and 0.35. */
	char *row = strstr(f->out.data, "zero"), *last = NULL;
	assert_non_null(row);
	for (char *at = strstr(f->out.data, "LK-50  \u25bc"); at && !last; at = strstr(at + 1, "LK-50"))
		last = at;
	assert_non_null(last);
	*strchr(last, '\n') = '\0';
	*strchr(row, '\n') = '\0';
	char *small = strstr(row, "0.021"), *large = strstr(last, "0.35");
	assert_non_null(small);
	assert_non_null(large);
	*small = '\0';
	*large = '\0';
	assert_int_equal(fl_utf8_columns(row), fl_utf8_columns(last));
}

static void no_rule_no_verdict_word(void **state) {
	fixture *f = *state;
	f->one.result.rule = FL_RULE_NONE;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		fl_run_result *run = &f->one.result.runs[kind];
		run->verdict = FL_VERDICT_NONE;
		run->verdict_reason = "no verdict: no decision rule is agreed";
		for (size_t i = 0; i < run->point_count; i++)
			run->points[i].verdict = FL_VERDICT_NONE;
		for (size_t i = 0; i < run->combined_count; i++)
			run->combined[i].verdict = FL_VERDICT_NONE;
	}
	fl_report_text(&f->one, 80, &f->out);
	lacks(f->out.data, "pass");
	lacks(f->out.data, "fail");
	contains(f->out.data, "no decision rule is agreed");
	contains(f->out.data, "+2.54");
	lacks(f->out.data, "guard band");
}

static void what_is_missing_is_said(void **state) {
	fixture *f = *state;
	fl_run_result *found = &f->one.result.runs[FL_RUN_AS_FOUND], *left = &f->one.result.runs[FL_RUN_AS_LEFT];
	*found = (fl_run_result){.kind = FL_RUN_AS_FOUND, .unavailable_reason = "the screw had been turned before"};
	f->not_determined[0] = "hysteresis not determined: one traverse";
	left->not_determined = f->not_determined;
	left->not_determined_count = 1;
	left->hysteresis_span = (double)NAN;
	fl_report_text(&f->one, 80, &f->out);
	contains(f->out.data, "not available: the screw had been turned before");
	contains(f->out.data, "hysteresis not determined: one traverse");
	lacks(f->out.data, "Hysteresis");
}

static void indicative_and_struck_are_said(void **state) {
	fixture *f = *state;
	fill_struck(f);
	f->one.result.traceable = false;
	f->not_traceable[0] = "oil LK-10 lot 2411B expired on 2025-11-18";
	f->one.result.not_traceable = f->not_traceable;
	f->one.result.not_traceable_count = 1;
	f->warnings[0] = "Reynolds number 1800 at LK-2";
	f->one.result.warnings = f->warnings;
	f->one.result.warning_count = 1;
	fl_report_text(&f->one, 80, &f->out);
	contains(f->out.data, "INDICATIVE, NOT TRACEABLE");
	contains(f->out.data, "lot 2411B expired on 2025-11-18");
	contains(f->out.data, "Reynolds number 1800 at LK-2");
	contains(f->out.data, "cycle 2 rising, LK-10, reading 3: 7.99 mA");
	contains(f->out.data, "air in the impulse line");
	contains(f->out.data, "Ada Moor");
}

static void left_alone_is_said_once(void **state) {
	fixture *f = *state;
	f->one.result.runs[FL_RUN_AS_LEFT].same_as_found = true;
	fl_report_text(&f->one, 80, &f->out);
	contains(f->out.data, "left alone, so as-left is as-found");
	contains(f->out.data, "As-found: fail\n");
	lacks(f->out.data, "As-left: ");
}

/* ---- numbers -------------------------------------------------------------------------------------------------------
 */

static void numbers_are_rounded_for_people(void **state) {
	(void)state;
	static const struct {
		double value;
		const char *text;
	} two[] = {{0.0392, "0.039"}, {0.0996, "0.10"}, {0.3522, "0.35"},     {2.349, "2.3"},
	           {12.3, "12"},      {0.0, "0.00"},    {1.8e-14, "< 0.0001"}};
	char out[FL_CELL_SIZE];
	for (size_t i = 0; i < sizeof two / sizeof *two; i++)
		assert_string_equal(two[i].text, fl_report_two_digits(two[i].value, out));
	assert_string_equal("+0.25", fl_report_signed(0.2491, 2, out));
	assert_string_equal(MINUS "0.25", fl_report_signed(-0.2491, 2, out));
	assert_string_equal("0.00", fl_report_signed(-0.0049, 2, out));
	assert_string_equal("", fl_report_signed((double)NAN, 2, out));
}

/* ---- picture -------------------------------------------------------------------------------------------------------
 */

/* The lines of one run's picture: from its title on. */
static const char *line_at(const char *text, int number) {
	for (int i = 0; i < number; i++) {
		text = strchr(text, '\n');
		assert_non_null(text);
		text++;
	}
	return text;
}

/* Line (from the top) and column of the first `mark` in the ASCII picture below `title`, -1 if there is none. */
static void find_mark(const char *title, char mark, int nth, int *line, int *column) {
	*line = *column = -1;
	for (int i = 1; i < 40; i++) {
		const char *at = line_at(title, i);
		size_t length = strcspn(at, "\n");
		const char *axis = memchr(at, '+', length);
		if (length > 8 && strncmp(at + 6, "+-----", 6) == 0)
			return; /* the floor */
		(void)axis;
		for (size_t c = 7; c < length; c++)
			if (at[c] == mark && nth-- == 0) {
				*line = i;
				*column = (int)c;
				return;
			}
	}
}

/* The line that carries `label` on its axis. */
static int line_of_label(const char *title, const char *label) {
	for (int i = 1; i < 40; i++) {
		const char *at = line_at(title, i);
		at += strspn(at, " ");
		if (strncmp(at, label, strlen(label)) == 0 && strchr(" ", at[strlen(label)]))
			return i;
	}
	fail_msg("no line is labelled %s", label);
	return -1;
}

static void marks_stand_where_the_result_puts_them(void **state) {
	fixture *f = *state;
	fl_report_draw(&f->one, 80, &fl_report_marks_ascii, &f->out);
	const char *found = strstr(f->out.data, "As-found: fail\n");
	assert_non_null(found);
	int one = line_of_label(found, "+1"), zero = line_of_label(found, "0"), line, column, falling_column;
	double rows = (double)(zero - one);       /* rows a percent of span */
	find_mark(found, '^', 0, &line, &column); /* the uppermost: LK-50 rising, +2.531 % */
	check_near("line of LK-50", zero - 2.531 * rows, line, 0.51);
	find_mark(found, 'v', 0, &line, &falling_column);
	check_near("line of LK-50 falling", zero - 2.540 * rows, line, 0.51);
	assert_int_equal(falling_column, column + 2);
	/* The field begins at column 7 and ends 3 before the edge, with 3 columns spare at either end of the scale. */
	check_near("column of LK-50", 7 + 3 + 0.9297 * (80 - 7 - 3 - 1 - 6), column + 1, 0.51);
	find_mark(found, 'o', 0, &line, &column);
	check_near("line of the stopped zero", zero - 0.124 * rows, line, 0.51);
	check_near("column of the stopped zero", 10, column, 2);
}

static void a_mark_outside_the_tolerance_is_drawn_outside(void **state) {
	fixture *f = *state;
	f->points[0][POINTS - 1].error_span = 0.02001; /* nearest row is the limit's own */
	f->points[0][POINTS - 2].error_span = 0.01999;
	fl_report_draw(&f->one, 80, &fl_report_marks_ascii, &f->out);
	const char *found = strstr(f->out.data, "As-found");
	int limit, above, inside, column;
	find_mark(found, '=', 0, &limit, &column);
	find_mark(found, 'v', 0, &above, &column);
	find_mark(found, '^', 0, &inside, &column);
	assert_true(limit > 0 && above > 0 && inside > 0);
	assert_true(above < limit);
	assert_true(inside >= limit);
}

static void bands_and_bars_are_drawn(void **state) {
	fixture *f = *state;
	fill_struck(f);
	fl_report_picture(&f->one, 80, &f->out);
	static const char *const wanted[] = {"\u25b2", "\u25bc", "\u25cb", "\u00d7",    "\u2502",
	                                     "\u2591", "\u00b7", "\u254c", " +T\n",     " " MINUS "T\n",
	                                     "LK-10",  "LK-50",  "50\n",   "mm\u00b2/s"};
	for (size_t i = 0; i < sizeof wanted / sizeof *wanted; i++)
		contains(f->out.data, wanted[i]);
	fl_text_clear(&f->out);
	f->one.result.rule = FL_RULE_SIMPLE;
	fl_report_picture(&f->one, 80, &f->out);
	lacks(f->out.data, "guard band");
}

static void no_tolerance_no_band(void **state) {
	fixture *f = *state;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		for (int i = 0; i < POINTS; i++)
			f->points[kind][i].tolerance_span = (double)NAN;
	fl_report_picture(&f->one, 80, &f->out);
	contains(f->out.data, "\u25b2");
	lacks(f->out.data, "\u2591");
	lacks(f->out.data, "+T");
}

static void a_huge_error_still_gives_a_picture(void **state) {
	fixture *f = *state;
	f->points[0][3].error_span = -0.98;
	f->points[1][4].error_span = (double)NAN;
	fl_report_picture(&f->one, 80, &f->out);
	within(f->out.data, 80);
	contains(f->out.data, MINUS "100");
}

static void the_picture_alone_ends_the_text(void **state) {
	fixture *f = *state;
	fl_text alone = {0};
	fl_report_text(&f->one, 80, &f->out);
	fl_report_picture(&f->one, 80, &alone);
	assert_string_equal(f->out.data + f->out.length - alone.length, alone.data);
	fl_text_free(&alone);
}

/* ---- JSON ----------------------------------------------------------------------------------------------------------
 */

static json_t *read_json(fixture *f) {
	fl_error err = {0};
	json_error_t problem;
	fl_text_clear(&f->out);
	assert_int_equal(FL_OK, fl_report_json(&f->one, &f->out, &err));
	json_t *root = json_loads(f->out.data, JSON_REJECT_DUPLICATES, &problem);
	if (!root)
		fail_msg("%s at %d: %s", problem.text, problem.position, f->out.data);
	return root;
}

static json_t *run_of(json_t *root, size_t kind) {
	return json_array_get(json_object_get(root, "runs"), kind);
}

static void has_keys(json_t *object, const char *const *keys) {
	for (; *keys; keys++)
		if (!json_object_get(object, *keys))
			fail_msg("key %s is missing", *keys);
}

static void json_has_the_keys_asked_for(void **state) {
	static const char *const root_keys[] = {"unit",      "runs",      "session",       "procedure", "rule",
	                                        "tolerance", "traceable", "not_traceable", "warnings",  NULL};
	static const char *const run_keys[] = {"kind",
	                                       "verdict",
	                                       "zero_error_pct_span",
	                                       "span_error_pct_span",
	                                       "independent_linearity_pct_span",
	                                       "terminal_linearity_pct_span",
	                                       "zero_based_linearity_pct_span",
	                                       "hysteresis_pct_span",
	                                       "repeatability_pct_span",
	                                       "points",
	                                       "combined",
	                                       "not_determined",
	                                       NULL};
	static const char *const point_keys[] = {"oil",
	                                         "lot",
	                                         "direction",
	                                         "n",
	                                         "temp_c",
	                                         "certified_mm2_s",
	                                         "equivalent_mm2_s",
	                                         "ideal_ma",
	                                         "error_pct_span",
	                                         "expanded_uncertainty_pct_span",
	                                         "coverage_factor",
	                                         "verdict",
	                                         "budget",
	                                         NULL};
	json_t *root = read_json(*state);
	has_keys(root, root_keys);
	assert_int_equal(2, json_array_size(json_object_get(root, "runs")));
	has_keys(run_of(root, 0), run_keys);
	json_t *points = json_object_get(run_of(root, 0), "points");
	assert_int_equal(POINTS, json_array_size(points));
	for (size_t i = 0; i < POINTS; i++)
		has_keys(json_array_get(points, i), point_keys);
	json_decref(root);
}

static double real(json_t *object, const char *name) {
	json_t *value = json_object_get(object, name);
	if (!json_is_number(value))
		fail_msg("%s is no number", name);
	return json_number_value(value);
}

static void json_holds_the_numbers(void **state) {
	json_t *root = read_json(*state), *found = run_of(root, 0);
	json_t *last = json_array_get(json_object_get(found, "points"), POINTS - 1);
	assert_string_equal("as-found", json_string_value(json_object_get(found, "kind")));
	assert_string_equal("fail", json_string_value(json_object_get(found, "verdict")));
	check_near("zero error", 0.249, real(found, "zero_error_pct_span"), 1e-12);
	check_near("span error", 2.491, real(found, "span_error_pct_span"), 1e-12);
	check_near("independent", 0.0938, real(found, "independent_linearity_pct_span"), 1e-12);
	check_near("terminal", 0.1876, real(found, "terminal_linearity_pct_span"), 1e-12);
	check_near("zero based", 0.1823, real(found, "zero_based_linearity_pct_span"), 1e-12);
	check_near("hysteresis", 0.152, real(found, "hysteresis_pct_span"), 1e-12);
	check_near("repeatability", 0.066, real(found, "repeatability_pct_span"), 1e-12);
	check_near("covariance", -2.4e-3, real(json_object_get(found, "least_squares"), "covariance_pct_span_squared"),
	           1e-12);
	assert_string_equal("LK-50", json_string_value(json_object_get(last, "oil")));
	assert_string_equal("2511E", json_string_value(json_object_get(last, "lot")));
	assert_string_equal("falling", json_string_value(json_object_get(last, "direction")));
	assert_int_equal(9, json_integer_value(json_object_get(last, "n")));
	check_near("T", 40.014, real(last, "temp_c"), 1e-12);
	check_near("certified", 49.2, real(last, "certified_mm2_s"), 1e-12);
	check_near("equivalent", 49.2 * 850.3 / 900.0, real(last, "equivalent_mm2_s"), 1e-9);
	check_near("ideal", 4.0 + 16.0 * 0.9297, real(last, "ideal_ma"), 1e-12);
	check_near("error", 2.54, real(last, "error_pct_span"), 1e-12);
	check_near("U", 0.352, real(last, "expanded_uncertainty_pct_span"), 1e-12);
	check_near("k", 2.05, real(last, "coverage_factor"), 0.0); /* to the last digit */
	assert_int_equal(2, json_array_size(json_object_get(last, "budget")));
	json_decref(root);
}

static void json_numbers_are_short_and_exact(void **state) {
	fixture *f = *state;
	f->points[0][4].sum.coverage_factor = 0.1;
	f->points[0][5].sum.coverage_factor = 1.0 / 3.0;
	json_t *root = read_json(f);
	contains(f->out.data, "\"coverage_factor\":0.1,");
	json_t *points = json_object_get(run_of(root, 0), "points");
	check_near("a third", 1.0 / 3.0, real(json_array_get(points, 5), "coverage_factor"), 0.0);
	json_decref(root);
}

static void is_null(json_t *object, const char *name) {
	if (!json_is_null(json_object_get(object, name)))
		fail_msg("%s is not null", name);
}

static void json_is_null_where_not_determined(void **state) {
	fixture *f = *state;
	fl_run_result *left = &f->one.result.runs[FL_RUN_AS_LEFT];
	*left = (fl_run_result){.kind = FL_RUN_AS_LEFT, .unavailable_reason = "not taken yet"};
	f->one.result.runs[0].hysteresis_span = (double)NAN;
	f->one.result.runs[0].has_linearity = false;
	f->points[0][3].verdict = FL_VERDICT_NONE;
	json_t *root = read_json(f), *found = run_of(root, 0), *second = run_of(root, 1);
	static const char *const nothing[] = {"verdict",
	                                      "zero_error_pct_span",
	                                      "span_error_pct_span",
	                                      "independent_linearity_pct_span",
	                                      "hysteresis_pct_span",
	                                      "repeatability_pct_span",
	                                      "least_squares",
	                                      "stopped_zero_pct_span",
	                                      "worst"};
	for (size_t i = 0; i < sizeof nothing / sizeof *nothing; i++)
		is_null(second, nothing[i]);
	assert_string_equal("not taken yet", json_string_value(json_object_get(second, "unavailable_reason")));
	assert_int_equal(0, json_array_size(json_object_get(second, "points")));
	is_null(found, "hysteresis_pct_span");
	is_null(found, "terminal_linearity_pct_span");
	is_null(root, "linearity_limit_pct_span");
	json_t *zero = json_array_get(json_object_get(found, "points"), 0);
	assert_true(json_is_true(json_object_get(zero, "stopped_zero")));
	is_null(zero, "oil");
	is_null(zero, "certified_mm2_s");
	is_null(zero, "temp_c");
	is_null(json_array_get(json_object_get(found, "points"), 3), "verdict");
	json_decref(root);
}

static void an_empty_budget_gives_no_uncertainty(void **state) {
	fixture *f = *state;
	f->points[0][7].sum = (fl_budget_sum){0};
	f->points[0][7].tur = INFINITY;
	json_t *root = read_json(f), *point = json_array_get(json_object_get(run_of(root, 0), "points"), 7);
	is_null(point, "expanded_uncertainty_pct_span");
	is_null(point, "coverage_factor");
	is_null(point, "tolerance_to_uncertainty");
	json_decref(root);
	fl_text_clear(&f->out);
	fl_report_text(&f->one, 80, &f->out);
	lacks(f->out.data, "\u221e");
}

static void json_gives_no_current_for_a_pneumatic_signal(void **state) {
	fixture *f = *state;
	f->instrument.scale.signal = FL_SIGNAL_02_1_BAR;
	json_t *root = read_json(f), *point = json_array_get(json_object_get(run_of(root, 0), "points"), 3);
	is_null(point, "ideal_ma");
	assert_string_equal("bar", json_string_value(json_object_get(point, "output_unit")));
	assert_true(json_is_number(json_object_get(point, "ideal_output")));
	json_decref(root);
}

static void json_keeps_struck_readings_and_odd_names(void **state) {
	fixture *f = *state;
	fill_struck(f);
	f->readings[0].struck_reason = "quote \" backslash \\ line\nend \u03a9";
	json_t *root = read_json(f);
	json_t *reading = json_array_get(json_object_get(run_of(root, 0), "readings"), 0);
	assert_true(json_is_true(json_object_get(reading, "struck")));
	assert_string_equal(f->readings[0].struck_reason, json_string_value(json_object_get(reading, "struck_reason")));
	json_decref(root);
	f->instrument.tag = "\xff";
	fl_error err = {0};
	fl_text_clear(&f->out);
	assert_int_equal(FL_E_VALUE, fl_report_json(&f->one, &f->out, &err));
	assert_int_equal(0, f->out.length);
}

/* Every key that is printed stands in the document. */
static void document_of_keys(json_t *value, const char *document) {
	const char *name;
	json_t *child;
	size_t i;
	if (json_is_array(value)) {
		json_array_foreach(value, i, child) document_of_keys(child, document);
		return;
	}
	json_object_foreach(value, name, child) {
		char wanted[128];
		snprintf(wanted, sizeof wanted, "`%s`", name);
		if (!strstr(document, wanted))
			fail_msg("docs/json.md does not explain the key %s", name);
		document_of_keys(child, document);
	}
}

static void every_key_is_documented(void **state) {
	fixture *f = *state;
	fl_arena arena = {0};
	char *document = NULL;
	size_t length = 0;
	fl_error err = {0};
	fill_struck(f);
	f->one.result.runs[0].points[3].has_flow = true;
	assert_int_equal(
	    FL_OK, fl_file_read(fl_io_system(), SOURCE_DIR "/docs/json.md", 1 << 20, &arena, &document, &length, &err));
	json_t *root = read_json(f);
	document_of_keys(root, document);
	json_decref(root);
	fl_arena_free(&arena);
}

#define TEST(name) cmocka_unit_test_setup_teardown(name, make, drop)

int main(void) {
	const struct CMUnitTest tests[] = {
	    TEST(lines_stay_within_the_width),
	    TEST(long_names_are_cut_or_broken),
	    TEST(numbers_stand_in_the_text),
	    TEST(numbers_of_a_column_share_their_decimal_point),
	    TEST(no_rule_no_verdict_word),
	    TEST(what_is_missing_is_said),
	    TEST(indicative_and_struck_are_said),
	    TEST(left_alone_is_said_once),
	    TEST(numbers_are_rounded_for_people),
	    TEST(marks_stand_where_the_result_puts_them),
	    TEST(a_mark_outside_the_tolerance_is_drawn_outside),
	    TEST(bands_and_bars_are_drawn),
	    TEST(no_tolerance_no_band),
	    TEST(a_huge_error_still_gives_a_picture),
	    TEST(the_picture_alone_ends_the_text),
	    TEST(json_has_the_keys_asked_for),
	    TEST(json_holds_the_numbers),
	    TEST(json_numbers_are_short_and_exact),
	    TEST(json_is_null_where_not_determined),
	    TEST(an_empty_budget_gives_no_uncertainty),
	    TEST(json_gives_no_current_for_a_pneumatic_signal),
	    TEST(json_keeps_struck_readings_and_odd_names),
	    TEST(every_key_is_documented),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
