/* tests/analysis/test_general.c - what the points share, the generalised line, each direction's lack of fit, bands, and
 * the way from the dial to the true value, as the analysis of a session gives them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "demo.h"

/* ISO/TS 28037:2010, 6.3 example: x 1 to 6, y with u(y) = 0.5 each: a = 1.867, b = 1.757, u(a) = 0.465, u(b) = 0.120,
 * cov(a, b) = -0.050, chi-squared 1.665 (as in tests/published). Here x stands for tenths of full-scale pressure and y
 * for twentieths of the output span. */
static void the_first_example_of_iso_28037(void **state) {
	(void)state;
	static bench b;
	static const double y[6] = {3.3, 5.6, 7.1, 9.3, 10.7, 12.1};
	static const fl_extra_term u_y = {"u of y", 0.5 / 20.0 * 100.0, 1.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, true,
	                                  NULL};
	bench_begin_pressure(&b);
	b.procedure.extra = &u_y;
	b.procedure.extra_count = 1;
	b.procedure.line = FL_LINE_GENERAL;
	for (int i = 0; i < 6; i++)
		bench_dp(&b, 1, FL_PASS_RISING, i, 4.0 + 16.0 * y[i] / 20.0, 1000.0 * (i + 1));
	const fl_general_line *g = &bench_assess(&b)->general;
	assert_true(g->has);
	check_near("a", 1.867, 20.0 * g->line.intercept, 0.0005);
	check_near("b", 1.757, 2.0 * (1.0 + g->line.slope), 0.0005);
	check_near("u(a)", 0.465, 20.0 * sqrt(g->line.var_intercept), 0.0005);
	check_near("u(b)", 0.120, 2.0 * sqrt(g->line.var_slope), 0.0005);
	check_near("cov(a, b)", -0.050, 40.0 * g->line.cov, 0.0005);
	check_near("chi-squared", 1.665, g->line.sum_sq, 0.0005);
	assert_int_equal(g->line.dof, 4);
	assert_non_null(strstr(g->why, "the procedure asks"));
	bench_end(&b);
}

static void fill_line(bench *b, double zero, double gain) {
	bench_begin_pressure(b);
	for (int i = 0; i < 5; i++)
		bench_dp(b, 1, FL_PASS_RISING, i, 4.0 + 16.0 * (zero + (1.0 + gain) * 0.25 * i), 2500.0 * i);
}

/* U = 0.3 % of span with k = 2 at every point. The same deviation everywhere: the zero error has all of it, the span
 * error none. Another one at each point: u / sqrt(Sxx) and u sqrt(1/n + mean^2 / Sxx), Sxx = 0.625 (Draper &
 * Smith 1.4). */
static void shared_parts_do_not_average_out(void **state) {
	(void)state;
	static bench b;
	static fl_extra_term term = {"line pressure", 0.3, 2.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, false, NULL};
	for (int own = 0; own <= 1; own++) {
		fill_line(&b, 0.0, 0.0);
		term.own = own == 1;
		b.procedure.extra = &term;
		b.procedure.extra_count = 1;
		const fl_run_result *run = bench_assess(&b);
		double u0 = sqrt(run->line_shared.var_intercept), u1 = sqrt(fmax(0.0, run->line_shared.var_slope));
		check_near("u of the zero error", own ? 0.15e-2 * sqrt(1.0 / 5.0 + 0.25 / 0.625) : 0.15e-2, u0, 1e-9);
		check_near("u of the span error", own ? 0.15e-2 / sqrt(0.625) : 0.0, u1, 1e-9);
		check_near("covariance", own ? 0.0 : 0.15e-2 * 0.15e-2, run->covariance[1], 1e-15);
		check_near("variance", 0.15e-2 * 0.15e-2, run->covariance[0], 1e-15);
		bench_end(&b);
	}
}

/* Certificates of one issuer: fully correlated unless the procedure says otherwise. */
static void oils_of_one_issuer(void **state) {
	(void)state;
	static bench b;
	double covariance[2];
	for (int half = 0; half <= 1; half++) {
		load(&b, "asfound_2026.csv", "S26F");
		b.procedure.oil_own_share = half ? 0.5 : 0.0;
		const fl_run_result *run = bench_assess(&b);
		covariance[half] = run->covariance[4 * run->combined_count + 5]; /* LK-35 and LK-50 */
		assert_true(run->covariance[0 * run->combined_count + 5] <
		            covariance[half] / 10.0); /* the zero shares the meter */
		if (half == 0)
			assert_non_null(strstr(b.result.correlation_words, "Lanternmoor"));
		bench_end(&b);
	}
	assert_true(covariance[1] < covariance[0]);
	/* half of U(oil) 0.2 % and U(density) 0.4 kg/m3 (k = 2) over x = 0.6506 and 0.9297, all in fractions of span */
	double oil = 0.001 * 0.6506 * 0.001 * 0.9297, density = 0.2 / 846.2 * 0.6506 * 0.2 / 850.3 * 0.9297;
	check_close("what the issuer gives", 0.5 * (oil + density), covariance[0] - covariance[1], 0.01);
	bench_end(&b);
}

/* By the ratio of uncertainties, or as the procedure asks; the printed zero and span stay those of the ordinary line.
 */
static void which_line_is_computed(void **state) {
	(void)state;
	static bench b;
	double zero = 0.0, span = 0.0;
	for (fl_line_choice choice = FL_LINE_BY_RATIO; choice <= FL_LINE_GENERAL; choice++) {
		load(&b, "asfound_2026.csv", "S26F");
		b.procedure.line = choice;
		const fl_run_result *run = bench_assess(&b);
		assert_true(run->general.has == (choice != FL_LINE_ORDINARY));
		assert_true(run->general.ratio > 3.0);
		if (choice == FL_LINE_BY_RATIO)
			assert_non_null(strstr(run->general.why, "differ by"));
		assert_true(choice == FL_LINE_BY_RATIO || (run->zero_error_span == zero && run->span_error_span == span));
		zero = run->zero_error_span;
		span = run->span_error_span;
		bench_end(&b);
	}
	static const fl_extra_term even = {"even", 0.3, 2.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, true, NULL};
	fill_line(&b, 0.0, 0.01);
	b.procedure.extra = &even;
	b.procedure.extra_count = 1;
	assert_false(bench_assess(&b)->general.has); /* equally sure: the ordinary line says the same */
	bench_end(&b);
}

/* Three readings a place, off by -1, 0 and +1 thousandth of span: a straight line fits, one bowed by 1 % does not. */
static void lack_of_fit_against_the_readings(void **state) {
	(void)state;
	static bench b;
	for (int bowed = 0; bowed <= 1; bowed++) {
		bench_begin_pressure(&b);
		for (int i = 0; i < 5; i++)
			for (int r = -1; r <= 1; r++) {
				double x = 0.25 * i, bow = bowed ? 0.04 * x * (1.0 - x) : 0.0;
				bench_dp(&b, 1, FL_PASS_RISING, i, 4.0 + 16.0 * (1.01 * x + bow + 0.001 * r), 2500.0 * i);
			}
		const fl_pass_line *line = &bench_assess(&b)->passes[FL_PASS_RISING];
		assert_true(line->has && line->has_lack);
		assert_false(b.result.runs[FL_RUN_AS_FOUND].passes[FL_PASS_FALLING].has);
		assert_int_equal(line->lack.dof_lack, 3);
		assert_int_equal(line->lack.dof_pure, 10);
		check_near("pure error", 5.0 * 2e-6, line->lack.sum_sq_pure, 1e-15); /* 5 places of (-1, 0, 1) thousandths */
		if (bowed)
			assert_true(line->lack.probability < 1e-6);
		else
			check_near("a line is enough", 1.0, line->lack.probability, 1e-6);
		bench_end(&b);
	}
}

/* Bands about a line with known residuals: s, n and Sxx by hand. Draper & Smith, 3rd ed., 3.1; Working and Hotelling.
 */
static void bands_over_the_scale(void **state) {
	(void)state;
	static bench b;
	static const double off[5] = {0.001, -0.002, 0.002, -0.002, 0.001}; /* no zero, no slope: sums 0, sum x off 0 */
	bench_begin_pressure(&b);
	b.procedure.coverage_probability = 0.95;
	for (int i = 0; i < 5; i++)
		bench_dp(&b, 1, FL_PASS_RISING, i, 4.0 + 16.0 * (0.25 * i + off[i]), 2500.0 * i);
	const fl_run_result *run = bench_assess(&b);
	double s = sqrt((1 + 4 + 4 + 4 + 1) * 1e-6 / 3.0), t3 = 3.182446, f23 = 9.552094; /* t and F tables, 95 % */
	assert_int_equal(run->place_count, 5);
	double here = s * sqrt(1.0 / 5.0 + 0.25 / 0.625); /* at the ends, (x - mean)^2 = 0.25 */
	check_close("line here", t3 * here, run->places[4].bands.confidence, 1e-5);
	check_close("line anywhere", sqrt(2.0 * f23) * here, run->places[4].bands.simultaneous, 1e-5);
	check_close("one reading", t3 * sqrt(s * s + here * here), run->places[4].bands.prediction, 1e-5);
	bench_end(&b);
}

/* Dial 0 to 50 mm2/s, output z + (1 + g) x: at 13 mm2/s the true value is (0.26 - z) / (1 + g) of span. */
static void the_dial_at_the_set_point(void **state) {
	(void)state;
	static bench b;
	static const fl_extra_term term = {"line pressure", 0.4, 2.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, false, NULL};
	fill_line(&b, 0.004, 0.025);
	b.procedure.extra = &term;
	b.procedure.extra_count = 1;
	b.instrument.set_point = 13.0;
	b.instrument.alarm_low = 9.0;
	b.instrument.alarm_high = NAN;
	const fl_run_result *run = bench_assess(&b);
	assert_int_equal(run->true_value_count, 2);
	const fl_true_value *v = &run->true_values[0];
	assert_string_equal(v->name, "set point");
	check_near("true value", 50.0 * (0.26 - 0.004) / 1.025, v->value, 1e-9);
	check_near("u: the shared part alone, through the slope", 50.0 * 0.2e-2 / 1.025, v->u, 1e-6);
	check_near("low", v->value - v->U, v->low, 1e-6);
	assert_true(v->bounded && !v->fieller && !v->outside);
	bench_end(&b);
}

/* An instrument that hardly moves: the slope is within its own scatter, and nothing can be said of the true value. */
static void a_poor_slope_is_said(void **state) {
	(void)state;
	static bench b;
	static const double off[5] = {0.02, -0.03, 0.02, -0.02, 0.01};
	bench_begin_pressure(&b);
	b.instrument.set_point = 13.0;
	for (int i = 0; i < 5; i++)
		bench_dp(&b, 1, FL_PASS_RISING, i, 4.0 + 16.0 * (0.25 + 0.01 * i + off[i]), 2500.0 * i);
	const fl_run_result *run = bench_assess(&b);
	if (run->true_value_count > 0) {
		assert_true(run->true_values[0].fieller);
		assert_false(run->true_values[0].bounded);
		assert_true(isinf(run->true_values[0].low));
	}
	assert_int_equal(run->true_value_count, 1);
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(the_first_example_of_iso_28037),
	    cmocka_unit_test(shared_parts_do_not_average_out),
	    cmocka_unit_test(oils_of_one_issuer),
	    cmocka_unit_test(which_line_is_computed),
	    cmocka_unit_test(lack_of_fit_against_the_readings),
	    cmocka_unit_test(bands_over_the_scale),
	    cmocka_unit_test(the_dial_at_the_set_point),
	    cmocka_unit_test(a_poor_slope_is_said),
	};
	return cmocka_run_group_tests_name("lines of a session", tests, NULL, NULL);
}
