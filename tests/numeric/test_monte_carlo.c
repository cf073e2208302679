/* tests/numeric/test_monte_carlo.c - propagation by trials: reproducible, right, and stopping when it should.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "foundleft/numeric.h"
#include "random.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_sort_double.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>

static void add_up(const void *context, const double *draws, size_t trials, double *outputs) {
	size_t inputs = *(const size_t *)context;
	for (size_t t = 0; t < trials; t++) {
		double sum = 0.0;
		for (size_t i = 0; i < inputs; i++)
			sum += draws[i * trials + t];
		outputs[t] = sum;
	}
}

static fl_plan plan_of(uint64_t trials) {
	return (fl_plan){.seed = 11, .trials = trials, .threads = 2, .probability = 0.95};
}

/* ---- the same record, whoever computes it ---- */

/* An awkward number of trials, so that the last block is short. */
static void threads_do_not_matter(void **state) {
	(void)state;
	const fl_input inputs[] = {{FL_SHAPE_NORMAL, 0.3, 1.1, 0.0}, {FL_SHAPE_STUDENT, 0.0, 0.5, 4.0}};
	const size_t count = 2;
	fl_model model = {.inputs = inputs, .input_count = count, .output_count = 1, .evaluate = add_up, .context = &count};
	for (int digits = 0; digits <= 2; digits += 2) {
		fl_plan plan = plan_of(1234567);
		plan.digits = digits;
		plan.threads = 1;
		fl_propagated first, again;
		fl_trials trials, same;
		fl_status status = fl_numeric_monte_carlo(&model, &plan, &first, &trials, NULL);
		assert_true(status >= 0);
		for (unsigned threads = 2; threads <= 7; threads++) {
			plan.threads = threads;
			assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &again, &same, NULL), status);
			assert_memory_equal(&first, &again, sizeof first);
			assert_true(trials.done == same.done && trials.stable == same.stable && same.seed == 11);
		}
		plan.seed++;
		assert_true(fl_numeric_monte_carlo(&model, &plan, &again, &same, NULL) >= 0);
		assert_true(again.mean != first.mean);
	}
}

/* ---- right ---- */

static void normal_is_found_again(void **state) {
	(void)state;
	const fl_input input = {FL_SHAPE_NORMAL, 5.0, 0.25, 0.0};
	const size_t count = 1;
	fl_model model = {.inputs = &input, .input_count = 1, .output_count = 1, .evaluate = add_up, .context = &count};
	fl_plan plan = plan_of(4000000);
	fl_propagated out;
	fl_trials trials;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_OK);
	/* 5 standard deviations of chance: u/sqrt(N), u/sqrt(2N), and sqrt(p(1-p)/N) by the density at the end point. */
	double n = 4e6, at_end = 5.0 * 0.25 * sqrt(0.025 * 0.975 / n) / 0.05844507, z = 1.959963984540054;
	check_near("mean", 5.0, out.mean, 5.0 * 0.25 / sqrt(n));
	check_near("u", 0.25, out.u, 5.0 * 0.25 / sqrt(2.0 * n));
	check_near("low", 5.0 - 0.25 * z, out.low, at_end);
	check_near("high", 5.0 + 0.25 * z, out.high, at_end);
	/* The shortest interval's ends wander along where its width hardly changes. */
	check_near("shortest width", 2.0 * 0.25 * z, out.shortest_high - out.shortest_low, 2.0 * at_end);
	assert_true(out.shortest_high - out.shortest_low <= out.high - out.low);
	assert_true(trials.done == 4000000 && trials.stable && out.delta == 0.005);
	assert_true(out.min < 4.0 && out.max > 6.0);
}

/* The counted intervals against those of the sorted trials themselves. */
typedef struct kept {
	double *values;
	size_t next;
} kept;

static void keep(const void *context, const double *draws, size_t trials, double *outputs) {
	kept *k = *(kept *const *)context;
	for (size_t t = 0; t < trials; t++)
		k->values[k->next++] = outputs[t] = exp(draws[t]);
}

static void counting_agrees_with_sorting(void **state) {
	(void)state;
	enum { N = 200000 };
	kept store = {malloc(N * sizeof(double)), 0}, *pointer = &store;
	assert_non_null(store.values);
	static const fl_input shapes[] = {{FL_SHAPE_NORMAL, 0.0, 1.0, 0.0},
	                                  {FL_SHAPE_NORMAL, 0.0, 1e-6, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 3.0, 1.0, 0.0},
	                                  {FL_SHAPE_STUDENT, 0.0, 0.1, 2.0}};
	for (size_t i = 0; i < sizeof shapes / sizeof *shapes; i++) {
		fl_model model = {
		    .inputs = &shapes[i], .input_count = 1, .output_count = 1, .evaluate = keep, .context = &pointer};
		fl_plan plan = plan_of(N);
		plan.threads = 1; /* the store is not shared */
		fl_propagated counted, chosen;
		fl_trials trials;
		store.next = 0;
		assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &counted, &trials, NULL), FL_OK);
		assert_int_equal(store.next, N);
		assert_int_equal(fl_numeric_coverage(store.values, N, 0.95, &chosen, NULL), FL_OK);
		double width = chosen.high - chosen.low;
		check_near("low", chosen.low, counted.low, 3e-4 * width);
		check_near("high", chosen.high, counted.high, 3e-4 * width);
		check_near("shortest width", chosen.shortest_high - chosen.shortest_low,
		           counted.shortest_high - counted.shortest_low, 2e-3 * width);
		if (isfinite(chosen.u))
			check_close("u", chosen.u, counted.u, 1e-9);
		check_close("mean", chosen.mean, counted.mean, 1e-12);
		check_near("min", chosen.min, counted.min, 0.0);
		check_near("max", chosen.max, counted.max, 0.0);
	}
	free(store.values);
}

/* Selection against a full sort, at sizes and coverages that try the edges. */
static void selection_agrees_with_sorting(void **state) {
	(void)state;
	enum { N = 1001 };
	static double values[N], sorted[N];
	uint64_t seed = 99;
	for (size_t n = 2; n <= N; n += 37)
		for (double p = 0.1; p < 1.0; p += 0.2) {
			for (size_t i = 0; i < n; i++) /* many equal ones among them */
				values[i] = sorted[i] = floor(20.0 * uniform(&seed)) + (i % 3 ? uniform(&seed) : 0.0);
			gsl_sort(sorted, 1, n);
			fl_propagated out;
			size_t covered = (size_t)(p * (double)n + 0.5);
			if (covered < 1 || covered >= n) {
				assert_int_equal(fl_numeric_coverage(values, n, p, &out, NULL), FL_E_NUMERIC);
				continue;
			}
			assert_int_equal(fl_numeric_coverage(values, n, p, &out, NULL), FL_OK);
			size_t r = ((n - covered) + 1) / 2;
			check_near("low", sorted[r - 1], out.low, 0.0);
			check_near("high", sorted[r - 1 + covered], out.high, 0.0);
			double shortest = INFINITY;
			for (size_t i = 0; i + covered < n; i++)
				shortest = fmin(shortest, sorted[i + covered] - sorted[i]);
			check_near("shortest", shortest, out.shortest_high - out.shortest_low, 0.0);
		}
}

static void correlations_are_kept(void **state) {
	(void)state;
	const fl_input inputs[] = {{FL_SHAPE_NORMAL, 1.0, 2.0, 0.0},
	                           {FL_SHAPE_RECTANGULAR, 0.0, 1.0, 0.0},
	                           {FL_SHAPE_NORMAL, -1.0, 3.0, 0.0},
	                           {FL_SHAPE_NORMAL, 0.0, 1.0, 0.0}};
	/* Inputs 1 and 4 are one and the same but for scale; the third leans on both. */
	const double r[] = {1, 0, -0.6, 1, 0, 1, 0, 0, -0.6, 0, 1, -0.6, 1, 0, -0.6, 1};
	const size_t count = 4;
	fl_model model = {
	    .inputs = inputs, .input_count = 4, .correlation = r, .output_count = 1, .evaluate = add_up, .context = &count};
	fl_plan plan = plan_of(1000000);
	fl_propagated out;
	fl_trials trials;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_OK);
	double variance = 4 + 1.0 / 3 + 9 + 1 + 2 * (-0.6 * 6 + 1.0 * 2 - 0.6 * 3);
	check_near("mean", 0.0, out.mean, 5.0 * sqrt(variance / 1e6));
	check_close("u", sqrt(variance), out.u, 5.0 / sqrt(2e6));
	const double lopsided[] = {1, 0, -0.6, 1, 0, 1, 0, 0, -0.5, 0, 1, -0.6, 1, 0, -0.6, 1};
	model.correlation = lopsided;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_E_NUMERIC);
	const double impossible[] = {1, 0, 0.9, 0.9, 0, 1, 0, 0, 0.9, 0, 1, -0.9, 0.9, 0, -0.9, 1};
	model.correlation = impossible;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_E_NUMERIC);
	const double with_rectangle[] = {1, 0.5, 0, 0, 0.5, 1, 0, 0, 0, 0, 1, 0, 0, 0, 0, 1};
	model.correlation = with_rectangle;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_E_NUMERIC);
}

static void constant_stays_constant(void **state) {
	(void)state;
	const fl_input input = {FL_SHAPE_NORMAL, 20.5, 0.0, 0.0};
	const size_t count = 1;
	fl_model model = {.inputs = &input, .input_count = 1, .output_count = 1, .evaluate = add_up, .context = &count};
	fl_plan plan = plan_of(500000);
	plan.digits = 2;
	fl_propagated out;
	fl_trials trials;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_OK);
	check_near("mean", 20.5, out.mean, 0.0);
	check_near("u", 0.0, out.u, 0.0);
	check_near("low", 20.5, out.low, 0.0);
	check_near("shortest high", 20.5, out.shortest_high, 0.0);
	assert_true(trials.stable && trials.done < 500000 && out.delta == 0.0);
}

/* A hundred times the trials, and no more memory: 10^7 results alone would be 80 MB. A sanitizer keeps what was freed.
 */
static void memory_does_not_grow_with_trials(void **state) {
	(void)state;
	const fl_input input = {FL_SHAPE_NORMAL, 0.0, 1.0, 0.0};
	const size_t count = 1;
	fl_model model = {.inputs = &input, .input_count = 1, .output_count = 1, .evaluate = add_up, .context = &count};
	struct rusage before, after;
	fl_propagated out;
	fl_trials trials;
	for (int digits = 0; digits <= 2; digits += 2) {
		fl_plan few = plan_of(100000), many = plan_of(10000000);
		few.digits = many.digits = digits;
		assert_true(fl_numeric_monte_carlo(&model, &few, &out, &trials, NULL) >= 0);
		getrusage(RUSAGE_SELF, &before);
		assert_true(fl_numeric_monte_carlo(&model, &many, &out, &trials, NULL) >= 0);
		getrusage(RUSAGE_SELF, &after);
#ifndef __SANITIZE_ADDRESS__
		check_near("more memory, kB", 0.0, (double)(after.ru_maxrss - before.ru_maxrss), 1000.0);
#endif
	}
}

/* ---- stopping ---- */

static void stops_when_digits_are_stable(void **state) {
	(void)state;
	const fl_input inputs[] = {{FL_SHAPE_RECTANGULAR, 0.0, 8.0, 0.0}, {FL_SHAPE_NORMAL, 0.0, 8.0, 0.0}};
	const size_t count = 2;
	fl_model model = {.inputs = inputs, .input_count = 2, .output_count = 1, .evaluate = add_up, .context = &count};
	fl_plan plan = plan_of(100000000);
	fl_propagated one, two;
	fl_trials few, many;
	plan.digits = 1;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &one, &few, NULL), FL_OK);
	plan.digits = 2;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &two, &many, NULL), FL_OK);
	assert_true(few.stable && many.stable && few.done >= 100000 && few.done < many.done && many.done < 5000000);
	check_near("to one digit", 0.5, one.delta, 0.0);
	check_near("to two digits", 0.05, two.delta, 0.0);
	check_near("u, 9.24", 8.0 * sqrt(4.0 / 3.0), two.u, two.delta);
	/* The exact end point: P(X + Z > y) with X rectangular on [-1, 1] is the mean of Q(y - x); 8.0 is the scale. */
	double y = two.high / 8.0, tail = 0.0;
	for (int i = 0; i < 2000; i++)
		tail += gsl_cdf_ugaussian_Q(y - (-1.0 + (i + 0.5) / 1000.0)) / 2000.0;
	double density = 0.5 * (gsl_cdf_ugaussian_P(y + 1.0) - gsl_cdf_ugaussian_P(y - 1.0));
	check_near("upper end", 0.0, 8.0 * (tail - 0.025) / density, two.delta);
	plan.trials = 120000;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &two, &many, NULL), FL_WARNING);
	assert_true(!many.stable && many.done == 120000);
}

typedef struct watch {
	uint64_t seen, stop_at;
	int calls;
} watch;

static bool look(void *context, uint64_t done, uint64_t most) {
	watch *w = context;
	assert_true(done > w->seen && done <= most);
	w->seen = done;
	w->calls++;
	return w->seen < w->stop_at;
}

static void tells_how_far_it_is(void **state) {
	(void)state;
	const fl_input input = {FL_SHAPE_NORMAL, 0.0, 1.0, 0.0};
	const size_t count = 1;
	fl_model model = {.inputs = &input, .input_count = 1, .output_count = 1, .evaluate = add_up, .context = &count};
	watch w = {.stop_at = UINT64_MAX};
	fl_plan plan = plan_of(3000000);
	plan.progress = look;
	plan.progress_context = &w;
	fl_propagated out;
	fl_trials trials;
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_OK);
	assert_true(w.calls >= 5 && w.seen == 3000000);
	w = (watch){.stop_at = 1000000};
	fl_error err = {0};
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, &err), FL_E_STATE);
	assert_non_null(strstr(err.message, "stopped after"));
}

/* JCGM 101 7.9.2: u = 0.00035 is 35 10^-5, delta 0.5 10^-5; to one digit 3 or 4 10^-4 by rounding, delta 0.5 10^-4. */
static void numerical_tolerance(void **state) {
	(void)state;
	check_close("0.00035, two digits", 0.5e-5, fl_numeric_tolerance_of(0.00035, 2), 1e-12);
	check_close("0.00035, one digit", 0.5e-4, fl_numeric_tolerance_of(0.00035, 1), 1e-12);
	check_close("2.03, one digit", 0.5, fl_numeric_tolerance_of(2.03, 1), 1e-12);
	check_close("10.149, two digits", 0.5, fl_numeric_tolerance_of(10.149, 2), 1e-12);
	check_close("0.0996, two digits, is 0.10", 0.5e-2, fl_numeric_tolerance_of(0.0996, 2), 1e-12);
	check_close("0.0994, two digits, is 0.099", 0.5e-3, fl_numeric_tolerance_of(0.0994, 2), 1e-12);
	check_near("nothing", 0.0, fl_numeric_tolerance_of(0.0, 2), 0.0);
}

/* ---- refusing ---- */

static void give_nan(const void *context, const double *draws, size_t trials, double *outputs) {
	(void)context;
	for (size_t t = 0; t < trials; t++)
		outputs[t] = draws[t] < 4.5 ? draws[t] : NAN; /* once in 3 10^5 */
}

static void refuses_what_makes_no_sense(void **state) {
	(void)state;
	fl_input input = {FL_SHAPE_NORMAL, 0.0, 1.0, 0.0};
	const size_t count = 1;
	fl_model model = {.inputs = &input, .input_count = 1, .output_count = 1, .evaluate = give_nan, .context = &count};
	fl_plan plan = plan_of(4000000);
	fl_propagated out;
	fl_trials trials;
	fl_error err = {0};
	assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, &err), FL_E_NUMERIC);
	assert_non_null(strstr(err.message, "no finite number"));
	model.evaluate = add_up;
	fl_plan wrong[] = {plan, plan, plan, plan, plan};
	wrong[0].trials = 10;
	wrong[1].threads = 0;
	wrong[2].probability = 1.0;
	wrong[3].digits = 3;
	wrong[4].trials = (uint64_t)1 << 40;
	for (size_t i = 0; i < 5; i++)
		assert_int_equal(fl_numeric_monte_carlo(&model, &wrong[i], &out, &trials, NULL), FL_E_NUMERIC);
	const fl_input inputs[] = {{FL_SHAPE_NORMAL, NAN, 1.0, 0.0},
	                           {FL_SHAPE_NORMAL, 0.0, -1.0, 0.0},
	                           {FL_SHAPE_STUDENT, 0.0, 1.0, 0.5},
	                           {FL_SHAPE_TRAPEZOIDAL, 0.0, 1.0, 1.5}};
	for (size_t i = 0; i < 4; i++) {
		model.inputs = &inputs[i];
		assert_int_equal(fl_numeric_monte_carlo(&model, &plan, &out, &trials, NULL), FL_E_NUMERIC);
	}
}

/* ---- a whole run ---- */

enum { PLACES = 6 };
static const double places_x[PLACES] = {0.0, 0.037, 0.186, 0.382, 0.651, 0.930};
static const double places_up[PLACES] = {0.12, 0.31, 0.86, 1.03, 1.95, 2.52};
static const double places_down[PLACES] = {0.12, 0.32, 0.88, 1.16, 1.97, 2.54};
static const bool in_line[PLACES] = {false, true, true, true, true, true};

/* Without any scatter every trial is the run itself, and every line must be the one found directly. */
static void run_without_scatter_is_the_run(void **state) {
	(void)state;
	const double s[PLACES] = {0};
	fl_run_model model = {PLACES, 3, 3, places_x, places_up, places_down, s, in_line, NULL, 0};
	fl_plan plan = plan_of(2000);
	fl_propagated out[PLACES + FL_RUN_OUTPUTS];
	fl_trials trials;
	assert_int_equal(fl_numeric_run_trials(&model, &plan, out, &trials, NULL), FL_OK);
	double error[PLACES];
	for (int i = 0; i < PLACES; i++) {
		error[i] = 0.5 * (places_up[i] + places_down[i]);
		check_near("error", error[i], out[i].mean, 1e-15);
	}
	fl_line line;
	fl_reference_line independent, terminal, zero_based;
	assert_int_equal(fl_numeric_line(places_x + 1, error + 1, PLACES - 1, &line, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_independent(places_x + 1, error + 1, PLACES - 1, &independent, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_terminal(places_x + 1, error + 1, PLACES - 1, &terminal, NULL), FL_OK);
	assert_int_equal(fl_numeric_line_zero_based(places_x + 1, error + 1, PLACES - 1, &zero_based, NULL), FL_OK);
	const double want[FL_RUN_OUTPUTS] = {
	    line.intercept,     line.slope, line.max_abs_residual, independent.max_abs, terminal.max_abs,
	    zero_based.max_abs, 0.13};
	for (int k = 0; k < FL_RUN_OUTPUTS; k++) {
		check_near("output", want[k], out[PLACES + k].mean, 1e-14);
		check_near("no scatter", 0.0, out[PLACES + k].u, 1e-14);
	}
}

/* The linearities over many random runs against the search for each line: the dual finds what the search does. */
static void linearities_agree_with_the_search(void **state) {
	(void)state;
	uint64_t seed = 5;
	const double s[FL_PLACES_MOST] = {0};
	for (int run = 0; run < 300; run++) {
		size_t n = 3 + (size_t)(uniform(&seed) * 9.0);
		double x[FL_PLACES_MOST], y[FL_PLACES_MOST];
		for (size_t i = 0; i < n; i++) {
			x[i] = (double)i + 0.9 * uniform(&seed);
			y[i] = roughly_normal(&seed);
		}
		fl_run_model model = {n, 1, 1, x, y, y, s, NULL, NULL, 0};
		fl_plan plan = plan_of(1000);
		fl_propagated out[FL_PLACES_MOST + FL_RUN_OUTPUTS];
		fl_trials trials;
		fl_reference_line independent, terminal, zero_based;
		assert_int_equal(fl_numeric_run_trials(&model, &plan, out, &trials, NULL), FL_OK);
		assert_int_equal(fl_numeric_line_independent(x, y, n, &independent, NULL), FL_OK);
		assert_int_equal(fl_numeric_line_terminal(x, y, n, &terminal, NULL), FL_OK);
		assert_int_equal(fl_numeric_line_zero_based(x, y, n, &zero_based, NULL), FL_OK);
		check_near("independent", independent.max_abs, out[n + FL_RUN_INDEPENDENT].mean, 1e-12);
		check_near("terminal", terminal.max_abs, out[n + FL_RUN_TERMINAL].mean, 1e-12);
		check_near("zero-based", zero_based.max_abs, out[n + FL_RUN_ZERO_BASED].mean, 1e-12);
	}
}

/* Where all is linear the trials must give what the law of propagation gives. */
static void run_agrees_with_propagation(void **state) {
	(void)state;
	const double s[PLACES] = {0.03, 0.05, 0.04, 0.03, 0.06, 0.03};
	const double gain[PLACES] = {0, 0.037, 0.186, 0.382, 0.651, 0.93}, shift[PLACES] = {1, 1, 1, 1, 1, 1};
	const double single[PLACES] = {0, 0, 0, 2.0, 0, 0};
	const fl_effect effects[] = {{{FL_SHAPE_NORMAL, 0.0, 0.10, 0.0}, gain},
	                             {{FL_SHAPE_RECTANGULAR, 0.02, 0.05, 0.0}, shift},
	                             {{FL_SHAPE_STUDENT, 0.0, 0.02, 6.0}, single},
	                             {{FL_SHAPE_NORMAL, 0.0, 0.02, 0.0}, shift}};
	fl_run_model model = {PLACES, 3, 3, places_x, places_up, places_down, s, in_line, effects, 4};
	fl_plan plan = plan_of(1000000);
	fl_propagated out[PLACES + FL_RUN_OUTPUTS];
	fl_trials trials;
	assert_int_equal(fl_numeric_run_trials(&model, &plan, out, &trials, NULL), FL_OK);
	double x_mean = 0.0, sxx = 0.0, var_slope = 0.0, weight_3 = 0.0, gain_slope = 0.0;
	for (int i = 1; i < PLACES; i++)
		x_mean += places_x[i] / 5.0;
	for (int i = 1; i < PLACES; i++)
		sxx += (places_x[i] - x_mean) * (places_x[i] - x_mean);
	for (int i = 1; i < PLACES; i++) {
		double w = (places_x[i] - x_mean) / sxx;
		var_slope += w * w * s[i] * s[i] / 18.0;
		gain_slope += w * gain[i];
		if (i == 3)
			weight_3 = w;
	}
	var_slope += pow(0.10 * gain_slope, 2) + pow(weight_3 * 2.0 * 0.02, 2) * 1.5;
	for (int i = 0; i < PLACES; i++) {
		double variance = s[i] * s[i] / 18.0 + pow(0.10 * gain[i], 2) + 0.05 * 0.05 / 3.0 + 0.02 * 0.02 +
		                  pow(single[i] * 0.02, 2) * 1.5;
		check_near("error", 0.5 * (places_up[i] + places_down[i]) + 0.02, out[i].mean, 5e-3 * sqrt(variance));
		check_close("u", sqrt(variance), out[i].u, 5e-3);
	}
	check_close("u of the slope", sqrt(var_slope), out[PLACES + FL_RUN_SLOPE].u, 5e-3);
	/* At place 4 the gap of 0.13 stands far above the rest, so its scatter is that of one difference. */
	check_close("u of the hysteresis", s[3] * sqrt(2.0 / 9.0), out[PLACES + FL_RUN_HYSTERESIS].u, 5e-3);
	plan.threads = 5;
	fl_propagated again[PLACES + FL_RUN_OUTPUTS];
	assert_int_equal(fl_numeric_run_trials(&model, &plan, again, &trials, NULL), FL_OK);
	assert_memory_equal(out, again, sizeof out);
}

static void run_refuses_what_makes_no_sense(void **state) {
	(void)state;
	const double s[PLACES] = {0}, falling[PLACES] = {0, 1, 2, 2, 4, 5}, hole[PLACES] = {0, NAN, 0, 0, 0, 0};
	const bool few[PLACES] = {false, false, true, true, false, false};
	const fl_effect effect = {{FL_SHAPE_NORMAL, 0.0, 1.0, 0.0}, hole};
	const fl_run_model wrong[] = {{2, 3, 3, places_x, places_up, places_down, s, NULL, NULL, 0},
	                              {PLACES, 0, 3, places_x, places_up, places_down, s, NULL, NULL, 0},
	                              {PLACES, 3, 3, falling, places_up, places_down, s, NULL, NULL, 0},
	                              {PLACES, 3, 3, places_x, hole, places_down, s, NULL, NULL, 0},
	                              {PLACES, 3, 3, places_x, places_up, places_down, hole, NULL, NULL, 0},
	                              {PLACES, 3, 3, places_x, places_up, places_down, s, few, NULL, 0},
	                              {PLACES, 3, 3, places_x, places_up, places_down, s, NULL, &effect, 1}};
	fl_plan plan = plan_of(1000);
	fl_propagated out[PLACES + FL_RUN_OUTPUTS];
	fl_trials trials;
	for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++)
		assert_int_equal(fl_numeric_run_trials(&wrong[i], &plan, out, &trials, NULL), FL_E_NUMERIC);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(threads_do_not_matter),
	    cmocka_unit_test(normal_is_found_again),
	    cmocka_unit_test(counting_agrees_with_sorting),
	    cmocka_unit_test(selection_agrees_with_sorting),
	    cmocka_unit_test(correlations_are_kept),
	    cmocka_unit_test(constant_stays_constant),
	    cmocka_unit_test(memory_does_not_grow_with_trials),
	    cmocka_unit_test(stops_when_digits_are_stable),
	    cmocka_unit_test(tells_how_far_it_is),
	    cmocka_unit_test(numerical_tolerance),
	    cmocka_unit_test(refuses_what_makes_no_sense),
	    cmocka_unit_test(run_without_scatter_is_the_run),
	    cmocka_unit_test(linearities_agree_with_the_search),
	    cmocka_unit_test(run_agrees_with_propagation),
	    cmocka_unit_test(run_refuses_what_makes_no_sense),
	};
	return cmocka_run_group_tests_name("numeric trials", tests, NULL, NULL);
}
