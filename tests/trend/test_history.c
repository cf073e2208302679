/* test_history.c - saw-tooth, chained drift, breaks, forecast, intervals, look-back: on known truths and on the demo.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Known truths are made here and have to come out; the demo's data are invented (data/README.md).
 */
#include "history.h"

static const fl_quantity_followed top = {FL_FOLLOW_POINT, 4};

/* A drift of exactly 0.8 % of span a year, adjusted to zero every other time: the chain shows it, the as-found values
 * as they stand don't. */
static void test_recovers_a_known_drift(void **state) {
	(void)state;
	history h = {0};
	fl_saw saw;
	fl_drift drift;
	fl_error err = {0};
	fl_day start = fl_day_from_civil(2018, 3, 1);
	double error = 0.1;
	history_add(&h, start, NAN, error, FL_WORK_ADJUSTED);
	for (int i = 1; i <= 6; i++) {
		error += 0.8 * 365 / 365.25;
		bool adjusted = i % 2 == 0;
		history_add(&h, start + 365 * i, error, adjusted ? 0.1 : error, adjusted ? FL_WORK_ADJUSTED : 0u);
		error = adjusted ? 0.1 : error;
	}
	must(fl_trend_follow(h.records, h.count, top, &saw, &err));
	must(fl_trend_drift(&saw, &drift, &err));
	assert_true(drift.determined);
	assert_int_equal(drift.intervals, 6);
	assert_int_equal(saw.stretches, 1);
	check_near("slope", 0.008, drift.slope, 1e-12);
	check_near("standard error", 0.0, drift.se, 1e-12);
	assert_true(drift.naive_slope < 0.5 * drift.slope);
	assert_false(drift.accelerates);
	check_near("chain", 6 * 0.8 * 365 / 365.25 / 100.0, saw.teeth[6].chained, 1e-12);
	fl_saw_free(&saw);
}

/* Breaks: cleaned, repaired, something done between sessions, an as-found that is missing. */
static void test_breaks(void **state) {
	(void)state;
	history h = {0};
	fl_saw saw;
	fl_drift drift;
	fl_error err = {0};
	fl_day d = fl_day_from_civil(2012, 5, 5);
	history_add(&h, d, NAN, 0.0, 0);
	history_add(&h, d + 400, 0.9, 0.9, 0);
	history_add(&h, d + 800, 1.7, 0.2, FL_WORK_CLEANED); /* ends the first stretch, begins the second */
	history_add(&h, d + 1200, 0.7, 0.7, 0);
	history_add(&h, d + 1600, 0.1, 0.1, FL_WORK_BEFORE);   /* not chained to what stands before */
	history_add(&h, d + 2000, 0.5, NAN, FL_WORK_ADJUSTED); /* no as-left: the next can't be chained */
	history_add(&h, d + 2400, 0.6, 0.3, FL_WORK_REPAIRED);
	must(fl_trend_follow(h.records, h.count, top, &saw, &err));
	static const int stretch[] = {0, 0, 0, 1, 2, 2, 3};
	static const double chained[] = {NAN, 0.9, 1.7, 0.5, NAN, 0.4, NAN};
	for (size_t i = 0; i < h.count; i++) {
		assert_int_equal(saw.teeth[i].stretch, stretch[i]);
		if (isnan(chained[i]))
			assert_true(isnan(saw.teeth[i].chained));
		else
			check_near("chained", chained[i] / 100.0, saw.teeth[i].chained, 1e-12);
	}
	assert_int_equal(saw.stretches, 4);
	must(fl_trend_drift(&saw, &drift, &err));
	assert_false(drift.determined);
	assert_int_equal(drift.intervals, 0);
	assert_non_null(strstr(drift.sentence, "fewer than three"));
	fl_saw_free(&saw);
}

/* Deposits that grow faster and faster are found out, and noise alone is not. */
static void test_acceleration(void **state) {
	(void)state;
	static const double noise[] = {0.011, -0.017, 0.009, 0.014, -0.012, -0.008, 0.010, 0.004};
	for (int accelerating = 0; accelerating < 2; accelerating++) {
		history h = {0};
		fl_saw saw;
		fl_drift drift;
		fl_error err = {0};
		fl_day d = fl_day_from_civil(2012, 5, 5);
		history_add(&h, d, NAN, 0.0, 0);
		for (int i = 1; i <= 8; i++) {
			double error = 0.3 * i + (accelerating ? 0.05 * i * i : 0.0) + noise[i - 1];
			history_add(&h, fl_trend_due(d, 12 * i), error, error, 0);
		}
		must(fl_trend_follow(h.records, h.count, top, &saw, &err));
		must(fl_trend_drift(&saw, &drift, &err));
		assert_true(drift.has_curvature);
		assert_int_equal(drift.accelerates, accelerating);
		assert_false(drift.slows);
		if (accelerating)
			check_near("second derivative", 0.001, drift.acceleration, 0.0001);
		fl_saw_free(&saw);
	}
}

static void test_too_few(void **state) {
	(void)state;
	history h = {0};
	fl_saw saw;
	fl_drift drift;
	fl_forecast forecast;
	fl_proposal proposal;
	fl_error err = {0};
	const fl_interval_policy policy = fl_trend_policy();
	fl_day d = fl_day_from_civil(2020, 5, 5);
	for (int n = 0; n < 3; n++) {
		history_add(&h, d + 365 * n, n ? 0.3 * n : NAN, 0.3 * n, 0);
		must(fl_trend_follow(h.records, h.count, top, &saw, &err));
		must(fl_trend_drift(&saw, &drift, &err));
		must(fl_trend_forecast(&saw, &drift, &forecast, &err));
		must(fl_trend_chart(&saw, &drift, &policy, &proposal, &err));
		assert_false(drift.determined || forecast.determined || proposal.determined);
		assert_non_null(strstr(forecast.sentence, "fewer than three"));
		fl_saw_free(&saw);
	}
	/* nothing at all */
	must(fl_trend_follow(h.records, 0, top, &saw, &err));
	must(fl_trend_drift(&saw, &drift, &err));
	must(fl_trend_hours(&saw, &policy, &proposal, &err));
	assert_false(drift.determined || proposal.determined);
	fl_saw_free(&saw);
}

/* Demo: naive slope 0.41, chained 0.81 % of span a year at LK-50. */
static void test_demo_drift_and_forecast(void **state) {
	(void)state;
	history h;
	fl_saw saw;
	fl_drift drift;
	fl_forecast f;
	fl_error err = {0};
	history_demo(&h);
	must(fl_trend_follow(h.records, h.count, top, &saw, &err));
	must(fl_trend_drift(&saw, &drift, &err));
	check_near("chained slope, % of span a year", 0.81, 100.0 * drift.slope, 0.005);
	check_near("naive slope, % of span a year", 0.41, 100.0 * drift.naive_slope, 0.005);
	/* recomputed by the script that made the data: ordinary least squares over the six chained points */
	check_near("slope", 0.814231684e-2, drift.slope, 1e-9);
	check_near("standard error", 0.0113802235e-2, drift.se, 1e-9);
	check_near("scatter", 0.0477468068e-2, drift.line.s, 1e-9);
	assert_false(drift.accelerates);
	must(fl_trend_forecast(&saw, &drift, &f, &err));
	assert_true(f.determined);
	check_near("guarded limit", 0.02 - 0.003522, f.limit, 1e-5);
	double years = (f.limit - saw.teeth[5].as_left) / drift.slope;
	assert_int_equal(f.by_mean, f.from + (fl_day)ceil(years * FL_DAYS_PER_YEAR));
	assert_true(f.by_bound < f.by_mean && f.by_bound > f.from + 365);
	/* at that day, and not the day before, the interval reaches the limit */
	double mean = 0.0, half = 0.0;
	must(fl_trend_expect(&saw, &drift, f.by_bound, &mean, &half, &err));
	assert_true(mean + half >= f.limit);
	must(fl_trend_expect(&saw, &drift, f.by_bound - 1, &mean, &half, &err));
	assert_true(mean + half < f.limit);
	/* t(0.95, 4) = 2.776: published t table, JCGM 100 G.2 gives 2.78 */
	must(fl_trend_expect(&saw, &drift, f.from, &mean, &half, &err));
	check_near("half width at once", 2.776 * drift.line.s * sqrt(2.0), half, 2e-6);
	fl_saw_free(&saw);
	/* zero: 0.037 % a year, recomputed likewise */
	must(fl_trend_follow(h.records, h.count, (fl_quantity_followed){FL_FOLLOW_POINT, -1}, &saw, &err));
	must(fl_trend_drift(&saw, &drift, &err));
	check_near("slope of the stopped zero", 0.0370895661e-2, drift.slope, 1e-9);
	fl_saw_free(&saw);
}

/* Demo: crossed about 2025-08-28. */
static void test_demo_lookback(void **state) {
	(void)state;
	history h;
	fl_lookback l;
	fl_arena arena = {0};
	fl_error err = {0};
	history_demo(&h);
	must(fl_trend_lookback(&h.records[4], &h.records[5], &arena, &l, &err));
	assert_true(l.needed && l.determined);
	assert_int_equal(l.point, 4);
	check_near("crossed about 2025-08-28", fl_day_from_civil(2025, 8, 28), l.crossed, 1.0);
	assert_int_equal(l.from, fl_day_from_civil(2025, 4, 15));
	assert_int_equal(l.to, fl_day_from_civil(2026, 4, 14));
	/* 1.686 + 0.352 is beyond 2.0 already; 1.334 to 2.183 passes it late in January */
	assert_true(l.before_from);
	assert_int_equal(l.earliest, l.from);
	check_near("latest", l.from + (2.0 - (1.686051 - 0.3522)) / (2.535229 - 1.686051) * 364.0, l.latest, 1.0);
	/* at 13 mm2/s the dial is 26 % up; the as-found there lies between LK-10 (0.755 at 0.184) and LK-20 (1.240 at
	 * 0.381) */
	double e = l.days[4].error_at_set_point;
	check_near("error at the set point",
	           0.755219e-2 + (1.239568 - 0.755219) * 1e-2 * ((13.0 - 50.0 * e) / 50.0 - 0.18418) / (0.38069 - 0.18418),
	           e, 1e-6);
	check_near("what the engine got", 13.0 - 50.0 * e, l.days[4].true_value, 1e-9);
	assert_true(l.days[4].true_value < l.days[0].true_value && l.days[0].true_value < 13.0);
	assert_non_null(strstr(l.sentence, "mm²/s"));
	assert_non_null(strstr(l.sentence, "2025-08-2"));
	/* in tolerance: nothing to look back for; nothing before: said so */
	must(fl_trend_lookback(&h.records[3], &h.records[4], &arena, &l, &err));
	assert_false(l.needed);
	must(fl_trend_lookback(NULL, &h.records[5], &arena, &l, &err));
	assert_true(l.needed && !l.determined);
	fl_arena_free(&arena);
}

/* A negative drift is looked back on as well as a positive one, and an uncertain crossing has no latest day. */
static void test_lookback_downwards(void **state) {
	(void)state;
	history h = {0};
	fl_lookback l;
	fl_arena arena = {0};
	fl_error err = {0};
	fl_day d = fl_day_from_civil(2025, 1, 1);
	history_add(&h, d, NAN, -0.21, 0);
	history_add(&h, d + 100, -2.2, 0.0, FL_WORK_ADJUSTED);
	must(fl_trend_lookback(&h.records[0], &h.records[1], &arena, &l, &err));
	assert_int_equal(l.crossed, d + 90);
	assert_int_equal(l.earliest, d + (int)lround((2.0 - 0.56) / 1.99 * 100.0));
	assert_int_equal(l.latest, FL_NO_DAY); /* 2.2 - 0.35 is within the tolerance */
	assert_true(l.days[4].true_value > 13.0);
	fl_arena_free(&arena);
}

static void test_staircase(void **state) {
	(void)state;
	static const struct {
		double found;
		int had, months;
		const char *word;
	} cases[] = {{1.2, 12, 15, "lengthened"},
	             {1.7, 12, 12, "kept"},
	             {-2.1, 12, 7, "shortened"},
	             {0.1, 20, 24, "longest"},
	             {2.3, 4, 3, "shortest"}};
	const fl_interval_policy policy = fl_trend_policy();
	fl_arena arena = {0};
	fl_error err = {0};
	fl_proposal proposal;
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		history h = {0};
		fl_day d = fl_day_from_civil(2024, 6, 30);
		history_add(&h, d, NAN, 0.0, 0)->interval_months = cases[i].had;
		history_add(&h, fl_trend_due(d, cases[i].had), cases[i].found, 0.0, 0);
		must(fl_trend_staircase(h.records, h.count, &policy, &arena, &proposal, &err));
		assert_int_equal(proposal.months, cases[i].months);
		assert_non_null(strstr(proposal.reason, cases[i].word));
		must(fl_trend_staircase(h.records, 1, &policy, &arena, &proposal, &err));
		assert_int_equal(proposal.months, policy.first_months);
	}
	fl_arena_free(&arena);
}

/* Control chart and time in use agree where the hours run evenly. */
static void test_chart_and_hours(void **state) {
	(void)state;
	history h;
	fl_saw saw;
	fl_drift drift;
	fl_forecast forecast;
	fl_proposal chart, hours;
	fl_error err = {0};
	const fl_interval_policy policy = fl_trend_policy();
	history_demo(&h);
	for (size_t i = 0; i < h.count; i++)
		h.records[i].running_hours = 800.0 + (h.records[i].day - h.records[0].day) * 15.5;
	must(fl_trend_follow(h.records, h.count, top, &saw, &err));
	must(fl_trend_drift(&saw, &drift, &err));
	must(fl_trend_forecast(&saw, &drift, &forecast, &err));
	must(fl_trend_chart(&saw, &drift, &policy, &chart, &err));
	must(fl_trend_hours(&saw, &policy, &hours, &err));
	assert_true(chart.determined && hours.determined);
	/* the last whole month that ends before the bound */
	assert_true(fl_trend_due(forecast.from, chart.months) < forecast.by_bound);
	assert_true(fl_trend_due(forecast.from, chart.months + 1) >= forecast.by_bound);
	check_near("hours", (forecast.by_bound - forecast.from) * 15.5, hours.hours, 40.0);
	assert_int_equal(hours.months, chart.months);
	fl_saw_free(&saw);
	/* a counter that was exchanged: said so */
	h.records[3].running_hours = 12.0;
	must(fl_trend_follow(h.records, h.count, top, &saw, &err));
	must(fl_trend_hours(&saw, &policy, &hours, &err));
	assert_false(hours.determined);
	fl_saw_free(&saw);
}

static void test_fleet(void **state) {
	(void)state;
	fl_trial trials[60];
	fl_arena arena = {0};
	fl_error err = {0};
	fl_proposal proposal;
	const fl_interval_policy policy = fl_trend_policy();
	for (int i = 0; i < 60; i++)
		trials[i] = (fl_trial){1.0, i >= 12}; /* 80 % after a year: 90 % after 0.472 years */
	must(fl_trend_reliability(trials, 60, &policy, &arena, &proposal, &err));
	assert_int_equal(proposal.months, (int)floor(12.0 * log(0.9) / log(0.8)));
	assert_non_null(strstr(proposal.reason, "48 of 60"));
	/* nine of ten is the target, but ten are too few to lengthen on */
	for (int i = 0; i < 10; i++)
		trials[i].in_tolerance = true;
	must(fl_trend_reliability(trials, 10, &policy, &arena, &proposal, &err));
	assert_true(proposal.months <= 12);
	must(fl_trend_reliability(trials, 0, &policy, &arena, &proposal, &err));
	assert_false(proposal.determined);
	/* trials from records: the verdicts of the as-found */
	history h;
	fl_trial *found = NULL;
	size_t n = 0, capacity = 0;
	history_demo(&h);
	for (size_t i = 0; i < h.count; i++)
		h.records[i].as_found.verdict = i == 0 ? "" : i == 5 ? "fail" : i == 4 ? "conditional pass" : "pass";
	must(fl_trend_trials(h.records, h.count, &arena, &found, &n, &capacity, &err));
	assert_int_equal(n, 5);
	assert_true(found[3].in_tolerance && !found[4].in_tolerance);
	check_near("years", 364.0 / 365.25, found[4].years, 1e-12);
	fl_arena_free(&arena);
}

int main(void) {
	const struct CMUnitTest tests[] = {cmocka_unit_test(test_recovers_a_known_drift),
	                                   cmocka_unit_test(test_breaks),
	                                   cmocka_unit_test(test_acceleration),
	                                   cmocka_unit_test(test_too_few),
	                                   cmocka_unit_test(test_demo_drift_and_forecast),
	                                   cmocka_unit_test(test_demo_lookback),
	                                   cmocka_unit_test(test_lookback_downwards),
	                                   cmocka_unit_test(test_staircase),
	                                   cmocka_unit_test(test_chart_and_hours),
	                                   cmocka_unit_test(test_fleet)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
