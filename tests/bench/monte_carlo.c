/* tests/bench/monte_carlo.c - how long 10^6 trials of a run of five oils and three cycles take.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *     bench_monte_carlo TRIALS THREADS [REPEATS]
 *
 * Prints a line "trials SECONDS" and a line "drawing SECONDS" (the same numbers on one thread, and nothing done with
 * them), each the best of REPEATS, then the results, so that monte_carlo.py can show that both found the same. The run
 * is written here and in monte_carlo.py alike.
 */
#include "foundleft/numeric.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/resource.h>
#include <time.h>

/* Pump stopped, then five oils; three cycles, up and down, three readings at every stop: 108 readings. */
enum { PLACES = 6, CYCLES = 3, READINGS = 3, EFFECTS = 24 };
static const double x[PLACES] = {0.0, 0.037, 0.186, 0.382, 0.651, 0.930};
static const double up[PLACES] = {0.12, 0.31, 0.86, 1.33, 1.95, 2.52};
static const double down[PLACES] = {0.12, 0.32, 0.88, 1.36, 1.97, 2.54};
static const double s[PLACES] = {0.03, 0.03, 0.03, 0.03, 0.03, 0.03};
static const bool in_line[PLACES] = {false, true, true, true, true, true};
static double sensitivity[EFFECTS][PLACES];
static fl_effect effects[EFFECTS];

/* Shared by all oils: issuer, thermometer certificate and drift, meter certificate, drift and resolution, line
 * pressure, ambient, zero of the bath. Of one oil: interpolation, ageing, bath to capillary. */
static void fill_effects(void) {
	static const fl_input common[] = {{FL_SHAPE_NORMAL, 0.0, 0.10, 0.0},       {FL_SHAPE_NORMAL, 0.0, 0.015, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 0.0, 0.012, 0.0}, {FL_SHAPE_NORMAL, 0.0, 0.0015, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 0.0, 0.001, 0.0}, {FL_SHAPE_RECTANGULAR, 0.0, 0.0005, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 0.0, 0.05, 0.0},  {FL_SHAPE_TRIANGULAR, 0.0, 0.04, 0.0},
	                                  {FL_SHAPE_NORMAL, 0.0, 0.2, 0.0}};
	static const double gain[] = {1.0, 4.3, 4.3, 6.25, 6.25, 6.25, 1.0, 1.0, 0.109};
	static const fl_input single[] = {{FL_SHAPE_RECTANGULAR, 0.0, 0.05, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 0.0, 0.04, 0.0},
	                                  {FL_SHAPE_RECTANGULAR, 0.0, 0.05, 0.0}};
	static const double single_gain[] = {1.0, 1.0, 4.3};
	for (int k = 0; k < EFFECTS; k++) {
		int oil = (k - 9) / 3 + 1, kind = (k - 9) % 3;
		effects[k] = (fl_effect){k < 9 ? common[k] : single[kind], sensitivity[k]};
		for (int i = 0; i < PLACES; i++) {
			if (k < 9)
				sensitivity[k][i] = gain[k] * (k >= 3 && k <= 7 ? 1.0 : x[i]);
			else
				sensitivity[k][i] = i == oil ? single_gain[kind] * x[i] : 0.0;
		}
	}
}

static double now(void) {
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

/* The numbers of all trials by the same generator, CHUNK trials at a time, and nothing done with them. */
static double draw_only(uint64_t trials) {
	enum { CHUNK = 128, NORMALS = 2 * PLACES * CYCLES * READINGS };
	static double normals[NORMALS * 8], other[CHUNK];
	const fl_input standard = {FL_SHAPE_NORMAL, 0.0, 1.0, 0.0};
	fl_generator generator;
	fl_numeric_generator_seed(&generator, 1);
	double sum = 0.0;
	for (uint64_t t = 0; t < trials; t += CHUNK) {
		for (int part = 0; part < CHUNK / 8; part++) {
			fl_numeric_draw(&generator, &standard, normals, NORMALS * 8);
			sum += normals[part];
		}
		for (int k = 0; k < EFFECTS; k++) {
			fl_numeric_draw(&generator, &effects[k].input, other, CHUNK);
			sum += other[k];
		}
	}
	return sum;
}

int main(int argc, char **argv) {
	uint64_t trials = argc > 1 ? strtoull(argv[1], NULL, 10) : 1000000;
	unsigned threads = argc > 2 ? (unsigned)atoi(argv[2]) : 1;
	int repeats = argc > 3 ? atoi(argv[3]) : 5;
	fill_effects();
	fl_run_model model = {PLACES, CYCLES, READINGS, x, up, down, s, in_line, effects, EFFECTS};
	fl_plan plan = {.seed = 20260414, .trials = trials, .threads = threads, .probability = FL_COVERAGE_2_SIGMA};
	fl_propagated found[PLACES + FL_RUN_OUTPUTS];
	fl_trials done;
	fl_error err = {0};
	double best = INFINITY, drawing = INFINITY, sum = 0.0;
	for (int r = 0; r < repeats; r++) {
		double begin = now();
		if (fl_numeric_run_trials(&model, &plan, found, &done, &err) < 0) {
			fprintf(stderr, "bench_monte_carlo: %s\n", err.message);
			return 1;
		}
		best = fmin(best, now() - begin);
		begin = now();
		sum += draw_only(trials);
		drawing = fmin(drawing, now() - begin);
	}
	struct rusage usage;
	getrusage(RUSAGE_SELF, &usage);
	printf("trials %.6f\ndrawing %.6f\nmemory_kb %ld\nchecksum %.17g\n", best, drawing, usage.ru_maxrss, sum);
	for (size_t j = 0; j < PLACES + FL_RUN_OUTPUTS; j++)
		printf("output %zu %.9f %.9f %.9f %.9f\n", j, found[j].mean, found[j].u, found[j].low, found[j].high);
	return 0;
}
