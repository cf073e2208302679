/* test_published.c - the arithmetic of the trend against published and recomputed figures.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "history.h"

/* NIST/SEMATECH e-Handbook of Statistical Methods, MASS.DAT: 217 values of a mass check standard, 1975.9 to 1988.4, the
 * handbook's example of drift. Expected values: recomputed from the data file by an independent program (ordinary least
 * squares in multiple precision); NIST's own printed ones were not read. */
static void test_mass_check_standard(void **state) {
	(void)state;
	enum { N = 217 };
	static double x[N], y[N];
	char path[512], line[128];
	int n = 0;
	snprintf(path, sizeof path, "%s/tests/published/nist_mass.csv", SOURCE_DIR);
	FILE *file = fopen(path, "r");
	assert_non_null(file);
	while (fgets(line, sizeof line, file))
		if (n < N && sscanf(line, "%lf,%lf", &x[n], &y[n]) == 2)
			n++;
	fclose(file);
	assert_int_equal(n, N);
	fl_drift_line fit;
	fl_error err = {0};
	must(fl_trend_line(x, y, NULL, N, &fit, &err));
	check_close("slope, mg/year", 0.00324988625, fit.slope, 3e-9);
	check_close("standard error of the slope", 0.000696845550, fit.se_slope, 3e-9);
	check_close("residual standard deviation", 0.0342442934, fit.s, 3e-9);
	check_close("intercept at year 0", -19.7383841797, fit.intercept - fit.slope * fit.x0, 1e-11);
	check_near("t of the slope", 4.6637, fit.slope / fit.se_slope, 5e-5);
	assert_int_equal(fit.dof, 215);
	double mean = 0.0, half = 0.0;
	fl_trend_predict(&fit, 90.0, 0.95, &mean, &half);
	check_near("prediction at 1990.0", -19.445894, mean, 5e-7);
	check_near("half width of the 95 % prediction interval", 0.068109, half, 5e-7);
	/* weights that are all the same change nothing; a point of weight two counts as two equal points */
	static double w[N];
	for (int i = 0; i < N; i++)
		w[i] = 1.0;
	fl_drift_line again;
	must(fl_trend_line(x, y, w, N, &again, &err));
	check_close("slope", fit.slope, again.slope, 1e-14);
}

static void test_weights(void **state) {
	(void)state;
	const double x[] = {0.31, 1.27, 2.06, 3.9}, y[] = {0.117, 0.352, 0.601, 1.083}, w[] = {1, 2, 1, 1};
	const double xx[] = {0.31, 1.27, 1.27, 2.06, 3.9}, yy[] = {0.117, 0.352, 0.352, 0.601, 1.083};
	fl_drift_line one, two;
	fl_error err = {0};
	must(fl_trend_line(x, y, w, 4, &one, &err));
	must(fl_trend_line(xx, yy, NULL, 5, &two, &err));
	check_close("slope", two.slope, one.slope, 1e-13);
	check_close("sum of squares", two.s * two.s * 3.0, one.s * one.s * 2.0, 1e-10);
	assert_int_equal(fl_trend_line(x, y, w, 2, &one, &err), FL_E_NUMERIC);
}

/* Newcombe, R. G., "Two-sided confidence intervals for the single proportion: comparison of seven methods", Statistics
 * in Medicine 17 (1998) 857-872, table I, score method without continuity correction. Values from memory; the formula
 * is Wilson's. */
static void test_wilson(void **state) {
	(void)state;
	static const struct {
		size_t in, n;
		double low, high;
	} cases[] = {{81, 263, 0.2553, 0.3662}, {15, 148, 0.0624, 0.1605}, {0, 20, 0.0, 0.1611}, {1, 29, 0.0061, 0.1718}};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		double low = -1, high = -1;
		fl_trend_wilson(cases[i].in, cases[i].n, 0.95, &low, &high);
		check_near("lower limit", cases[i].low, low, 5e-5);
		check_near("upper limit", cases[i].high, high, 5e-5);
		/* those that failed, seen the other way round */
		fl_trend_wilson(cases[i].n - cases[i].in, cases[i].n, 0.95, &low, &high);
		check_near("lower limit of the rest", 1.0 - cases[i].high, low, 5e-5);
		check_near("upper limit of the rest", 1.0 - cases[i].low, high, 5e-5);
	}
}

/* Month-end rule: common practice, no source; 31 January and one month is the example everybody gives. */
static void test_due_dates(void **state) {
	(void)state;
	static const struct {
		const char *from;
		int months;
		const char *due;
	} cases[] = {{"2026-01-31", 1, "2026-02-28"},  {"2024-01-31", 1, "2024-02-29"},  {"2024-02-29", 12, "2025-02-28"},
	             {"2024-02-29", 48, "2028-02-29"}, {"2025-08-31", 6, "2026-02-28"},  {"2026-04-14", 12, "2027-04-14"},
	             {"2026-03-31", 1, "2026-04-30"},  {"2026-12-31", 2, "2027-02-28"},  {"2025-11-30", 3, "2026-02-28"},
	             {"2026-10-15", 3, "2027-01-15"},  {"2026-12-05", 12, "2027-12-05"}, {"2099-12-31", 2, "2100-02-28"}};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		fl_day from = 0;
		char text[FL_DAY_SIZE];
		assert_true(fl_day_parse(cases[i].from, &from, NULL) >= 0);
		assert_string_equal(fl_day_format(fl_trend_due(from, cases[i].months), text), cases[i].due);
	}
	assert_int_equal(fl_trend_due(FL_NO_DAY, 12), FL_NO_DAY);
}

/* Reliability with all intervals of one length: the likelihood is greatest where R(t) is the share found in tolerance
 * (any textbook on reliability; derived). With two lengths: the root of the score, recomputed by hand below. */
static void test_failure_rate(void **state) {
	(void)state;
	fl_trial trials[20];
	double rate = -1.0;
	fl_error err = {0};
	for (int i = 0; i < 20; i++)
		trials[i] = (fl_trial){1.25, i >= 3};
	must(fl_trend_failure_rate(trials, 20, &rate, &err));
	check_close("rate", -log(17.0 / 20.0) / 1.25, rate, 1e-12);
	for (int i = 0; i < 20; i++)
		trials[i] = (fl_trial){i % 2 ? 0.5 : 2.0, i != 4 && i != 7 && i != 10};
	must(fl_trend_failure_rate(trials, 20, &rate, &err));
	/* 8 trials of 2 years and 9 of 0.5 years in tolerance, 2 failures after 2 years and 1 after 0.5 */
	double score = 4.0 / expm1(2.0 * rate) + 0.5 / expm1(0.5 * rate) - (8 * 2.0 + 9 * 0.5);
	check_near("score at the estimate", 0.0, score, 1e-9);
	for (int i = 0; i < 20; i++)
		trials[i].in_tolerance = true;
	must(fl_trend_failure_rate(trials, 20, &rate, &err));
	check_near("none failed", 0.0, rate, 0.0);
	for (int i = 0; i < 20; i++)
		trials[i].in_tolerance = false;
	assert_int_equal(fl_trend_failure_rate(trials, 20, &rate, &err), FL_E_NUMERIC);
}

int main(void) {
	const struct CMUnitTest tests[] = {cmocka_unit_test(test_mass_check_standard), cmocka_unit_test(test_weights),
	                                   cmocka_unit_test(test_wilson), cmocka_unit_test(test_due_dates),
	                                   cmocka_unit_test(test_failure_rate)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
