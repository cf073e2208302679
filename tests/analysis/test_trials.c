/* tests/analysis/test_trials.c - the whole model by trials: reproducible whatever the number of threads, and beside
 * JCGM 100 where the model is linear and normal.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "demo.h"

static fl_run_trials try_as_found(bench *b, fl_arena *arena, uint64_t trials, int digits, unsigned threads,
                                  uint64_t seed) {
	fl_run_trials out;
	fl_plan plan = {.seed = seed, .trials = trials, .digits = digits, .threads = threads};
	plan.probability = b->result.coverage_probability;
	fl_status status = fl_analysis_trials(&b->session, &b->procedure, &b->stock, &b->result, FL_RUN_AS_FOUND, &plan,
	                                      arena, &out, &b->err);
	if (status < 0)
		print_error("%s\n", b->err.message);
	assert_true(status >= 0);
	assert_true(out.has);
	return out;
}

static const fl_tried *find_both(const fl_run_trials *t, const char *oil) {
	for (size_t i = 0; i < t->point_count; i++)
		if (t->points[i].point->both && strcmp(t->points[i].point->oil, oil) == 0)
			return &t->points[i];
	return NULL;
}

static const fl_tried *figure(const fl_run_trials *t, const char *name) {
	for (size_t i = 0; i < t->figure_count; i++)
		if (strcmp(t->figures[i].name, name) == 0)
			return &t->figures[i];
	return NULL;
}

/* One independent computation of the invented scenario gives for LK-50 mean 2.535, standard deviation 0.176, 95 %
 * half-width 0.338, all % of span. Comparison only: it takes the density as constant over the oil's temperature
 * (its temperature sensitivity is 1.6 % smaller) and leaves the thermometer's resolution out, so ours come out one part
 * in eighty larger; the tolerances hold that difference. */
static void the_invented_scenario(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	load(&b, "asfound_2026.csv", "S26F");
	b.procedure.coverage_probability = 0.95;
	bench_assess(&b);
	fl_run_trials t = try_as_found(&b, &arena, 400000, 0, 2, 1);
	const fl_tried *lk50 = find_both(&t, "LK-50");
	assert_non_null(lk50);
	const fl_propagated *p = &lk50->by_trials;
	check_near("mean", 2.535, 100.0 * p->mean, 0.0025);
	check_near("standard deviation", 0.176, 100.0 * p->u, 0.003);
	check_near("half-width", 0.338, 100.0 * (p->high - p->low) / 2.0, 0.006);
	check_near("mean, without trials", 100.0 * lk50->value, 100.0 * p->mean, 0.002);
	fl_arena_free(&arena);
	bench_end(&b);
}

static void same_propagated(const fl_propagated *a, const fl_propagated *b) {
	assert_memory_equal(a, b, sizeof *a);
}

/* Bit for bit, adaptive and fixed, on one, two, three and eight threads. Another seed gives something else. */
static void threads_change_nothing(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	load(&b, "asfound_2026.csv", "S26F");
	bench_assess(&b);
	for (int digits = 0; digits <= 2; digits += 2) {
		fl_run_trials one = try_as_found(&b, &arena, 60000, digits, 1, 20260414);
		for (unsigned threads = 2; threads <= 8; threads = threads == 3 ? 8 : threads + 1) {
			fl_run_trials more = try_as_found(&b, &arena, 60000, digits, threads, 20260414);
			assert_int_equal(one.trials.done, more.trials.done);
			for (size_t i = 0; i < one.point_count; i++)
				same_propagated(&one.points[i].by_trials, &more.points[i].by_trials);
			for (size_t i = 0; i < one.figure_count; i++)
				same_propagated(&one.figures[i].by_trials, &more.figures[i].by_trials);
		}
		fl_run_trials other = try_as_found(&b, &arena, 60000, digits, 2, 20260415);
		assert_true(one.points[3].by_trials.mean != other.points[3].by_trials.mean);
	}
	fl_arena_free(&arena);
	bench_end(&b);
}

/* What the budget gives, with the scatter of 9 readings in each direction as Student's t has it: dof / (dof - 2) times
 * the variance (JCGM 101:2008 6.4.9.4). */
static double u_with_student(const fl_point_result *point) {
	double sum = point->sum.uc * point->sum.uc;
	for (size_t i = 0; i < point->budget_count; i++)
		if (point->budget[i].on == FL_ON_READINGS)
			sum += point->budget[i].contribution_span * point->budget[i].contribution_span * (8.0 / 6.0 - 1.0);
	return sqrt(sum);
}

/* Trials and budgets speak of the same deviations: u of every point of the scenario agrees to 1 % (the curvature of
 * D341 is far below that), and so do zero and span, whose covariance comes from what the points share. */
static void budgets_and_trials_agree(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	load(&b, "asfound_2026.csv", "S26F");
	bench_assess(&b);
	fl_run_trials t = try_as_found(&b, &arena, 200000, 0, 2, 7);
	for (size_t i = 0; i < t.point_count; i++) {
		if (t.points[i].point->n % 9 == 0) /* the zero has fewer readings */
			check_close("u", u_with_student(t.points[i].point), t.points[i].by_trials.u, 0.01);
	}
	const fl_tried *zero = figure(&t, "zero error"), *span = figure(&t, "span error");
	assert_non_null(zero);
	assert_non_null(span);
	check_close("u of the zero error", zero->u, zero->by_trials.u, 0.03);
	check_close("u of the span error", span->u, span->by_trials.u, 0.02);
	/* Were the points independent, the span error's u would be far smaller. */
	assert_true(b.result.runs[FL_RUN_AS_FOUND].line_shared.var_slope > 0.0);
	fl_arena_free(&arena);
	bench_end(&b);
}

/* With 9 readings, s and no other deviation, the mean follows Student's t with 8 degrees of freedom: u is s/3 times
 * sqrt(8/6) (JCGM 101:2008 6.4.9.4), and the 95.45 % interval is t(8) = 2.37 (JCGM 100 table G.2) times s/3. */
static void scatter_follows_student(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	static const double ma[9] = {12.00, 12.02, 11.97, 12.01, 12.03, 11.99, 11.98, 12.04, 11.96};
	bench_begin_pressure(&b);
	for (int i = 0; i < 9; i++)
		bench_dp(&b, 1, FL_PASS_RISING, 0, ma[i], 5000.0);
	const fl_run_result *run = bench_assess(&b);
	double u = run->points[0].s_span / 3.0;
	fl_run_trials t = try_as_found(&b, &arena, 400000, 0, 2, 3);
	check_close("u by trials", u * sqrt(8.0 / 6.0), t.points[0].by_trials.u, 0.01);
	check_close("half-width", 2.37 * u, (t.points[0].by_trials.high - t.points[0].by_trials.low) / 2.0, 0.01);
	assert_int_equal(t.points[0].digits, 2); /* both intervals are Student's */
	fl_arena_free(&arena);
	bench_end(&b);
}

/* One rectangular deviation of half width a and nothing else: U by JCGM 100 is 2 a / sqrt(3) = 1.155 a, wider than all
 * there is; the trials say 0.9545 a, and clause 8 does not hold. JCGM 101 table 1. */
static void a_rectangular_term_does_not_hold(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	static const fl_extra_term term = {"line pressure",      0.3,   0.0, FL_DIST_RECTANGULAR,
	                                   FL_BAND_PERCENT_SPAN, false, NULL};
	bench_begin_pressure(&b);
	b.procedure.extra = &term;
	b.procedure.extra_count = 1;
	bench_dp(&b, 1, FL_PASS_RISING, 0, 12.0, 5000.0);
	bench_assess(&b);
	fl_run_trials t = try_as_found(&b, &arena, 200000, 0, 2, 5);
	const fl_tried *p = &t.points[0];
	check_near("half-width", 0.3 * 0.9545, 100.0 * (p->by_trials.high - p->by_trials.low) / 2.0, 0.002);
	check_near("U by JCGM 100", 0.3 * 2.0 / sqrt(3.0), 100.0 * p->expanded, 1e-6);
	assert_false(p->validation.valid);
	assert_non_null(strstr(t.words, "does not hold to two digits"));
	assert_non_null(strstr(t.words, "narrower"));
	fl_arena_free(&arena);
	bench_end(&b);
}

/* A shared deviation is one draw: it moves zero and not span, and hysteresis not at all. */
static void shared_deviations_move_all_points_alike(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	static fl_extra_term term = {"line pressure", 0.3, 2.0, FL_DIST_NORMAL, FL_BAND_PERCENT_SPAN, false, NULL};
	bench_begin_pressure(&b);
	b.procedure.extra = &term;
	b.procedure.extra_count = 1;
	for (int i = 0; i < 5; i++) {
		bench_dp(&b, 1, FL_PASS_RISING, i, 4.0 + 4.0 * i, 2500.0 * i);
	}
	bench_assess(&b);
	fl_run_trials t = try_as_found(&b, &arena, 50000, 0, 2, 11);
	check_close("u of the zero error", 0.15e-2, figure(&t, "zero error")->by_trials.u, 0.02);
	check_near("u of the span error", 0.0, figure(&t, "span error")->by_trials.u, 1e-12);
	assert_null(figure(&t, "hysteresis")); /* one traverse */
	fl_arena_free(&arena);
	bench_end(&b);
	term.own = true; /* another one at every point: now the span moves too */
	bench_assess(&b);
	t = try_as_found(&b, &arena, 50000, 0, 2, 11);
	/* u of a slope over x = 0, 1/4 .. 1: u / sqrt(Sxx), Sxx = 0.625 */
	check_close("u of the span error", 0.15e-2 / sqrt(0.625), figure(&t, "span error")->by_trials.u, 0.02);
	fl_arena_free(&arena);
	bench_end(&b);
	for (int i = 0; i < 5; i++)
		bench_dp(&b, 1, FL_PASS_FALLING, i, 4.016 + 4.0 * i, 2500.0 * i);
	bench_assess(&b);
	t = try_as_found(&b, &arena, 50000, 0, 2, 11);
	check_near("hysteresis", 0.1e-2, figure(&t, "hysteresis")->by_trials.mean, 1e-12);
	fl_arena_free(&arena);
	bench_end(&b);
}

static bool stop_at_once(void *context, uint64_t done, uint64_t most) {
	(void)most;
	*(uint64_t *)context = done;
	return false;
}

static void can_be_stopped(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	fl_run_trials out;
	uint64_t done = 0;
	load(&b, "asfound_2026.csv", "S26F");
	bench_assess(&b);
	fl_plan plan = {.seed = 1, .trials = 1000000, .threads = 2, .probability = 0.95};
	plan.progress = stop_at_once;
	plan.progress_context = &done;
	assert_int_equal(FL_E_STATE, fl_analysis_trials(&b.session, &b.procedure, &b.stock, &b.result, FL_RUN_AS_FOUND,
	                                                &plan, &arena, &out, &b.err));
	assert_true(done > 0 && done < 1000000);
	assert_false(out.has);
	assert_int_equal(FL_E_STATE, fl_analysis_trials(&b.session, &b.procedure, &b.stock, &b.result, FL_RUN_AS_LEFT,
	                                                &plan, &arena, &out, &b.err));
	fl_arena_free(&arena);
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(the_invented_scenario),
	    cmocka_unit_test(threads_change_nothing),
	    cmocka_unit_test(budgets_and_trials_agree),
	    cmocka_unit_test(scatter_follows_student),
	    cmocka_unit_test(a_rectangular_term_does_not_hold),
	    cmocka_unit_test(shared_deviations_move_all_points_alike),
	    cmocka_unit_test(can_be_stopped),
	};
	return cmocka_run_group_tests_name("trials", tests, NULL, NULL);
}
