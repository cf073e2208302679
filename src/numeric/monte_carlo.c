/* numeric/monte_carlo.c - propagates distributions through a model by trials, in blocks, on several threads.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * What makes the result the same for any number of threads:
 *   1. a block's draws depend on the seed and the block's number alone (generator.c);
 *   2. blocks are of one size, and which blocks make a round depends on the plan alone;
 *   3. the sums of a round's blocks are joined in the blocks' order, after the round;
 *   4. counts in bins are whole numbers, which add up the same in any order.
 * The first block is done alone: it shows where the bins must lie.
 */
#include "trials.h"

#include <math.h>
#include <pthread.h>
#include <stdlib.h>

enum { ROUND = 50 /* blocks in a round at most */, THREADS_MOST = 256 };

/* What a block leaves of one output. */
typedef struct block_result {
	double mean, m2, min, max; /* m2: sum of squares about the mean */
	double low, high;          /* its own coverage interval, where digits were asked for */
} block_result;

/* A running mean and sum of squares over blocks. */
typedef struct running {
	double n, mean, m2;
} running;

/* Everything joined so far of one output. */
typedef struct joined {
	running values;                 /* all trials */
	running means, us, lows, highs; /* one value a block: their scatter tells how sure the digits are */
	double min, max;
} joined;

typedef struct engine {
	const trial_source *source;
	const fl_plan *plan;
	size_t block;        /* trials in a full block */
	uint64_t trials;     /* in all, a multiple of FL_LANES */
	tally_frame *frames; /* one an output; NULL during the first block */
	double *shifts;      /* one an output: near the mean */
	block_result *round; /* ROUND blocks of outputs */
	joined *joined;
	pthread_mutex_t lock;      /* of what follows */
	fl_generator stream;       /* where the next block begins */
	uint64_t next, end, begin; /* blocks of this round: next to take, one behind the last, the first */
	bool failed;
} engine;

/* One thread and its memory. */
typedef struct worker {
	engine *engine;
	double *scratch, *chunk;
	double *store; /* a block of every output; NULL where only sums are needed */
	uint32_t *counts;
} worker;

static uint64_t block_trials(const engine *e, uint64_t block) {
	uint64_t begin = block * e->block, left = e->trials - begin;
	return left < e->block ? left : e->block;
}

/* ---- one block ---- */

static bool take_block(engine *e, uint64_t *block, fl_generator *generator) {
	pthread_mutex_lock(&e->lock);
	bool there_is = e->next < e->end && !e->failed;
	if (there_is) {
		*block = e->next++;
		*generator = e->stream;
		fl_numeric_generator_jump(&e->stream);
	}
	pthread_mutex_unlock(&e->lock);
	return there_is;
}

static void give_up(engine *e) {
	pthread_mutex_lock(&e->lock);
	e->failed = true;
	pthread_mutex_unlock(&e->lock);
}

static void add_sums(trial_sums *sums, const trial_sums *more) {
	sums->d += more->d;
	sums->d2 += more->d2;
	sums->min = fmin(sums->min, more->min);
	sums->max = fmax(sums->max, more->max);
}

/* Takes in a chunk of trials; false if the model gave something that is no number. */
static bool take_in(worker *w, size_t chunk_trials, size_t done, trial_sums *sums) {
	engine *e = w->engine;
	for (size_t j = 0; j < e->source->outputs; j++) {
		const double *y = w->chunk + j * chunk_trials;
		trial_sums more;
		if (!fl_numeric_trial_sums(y, chunk_trials, e->shifts[j], &more))
			return false;
		add_sums(&sums[j], &more);
		if (e->frames)
			fl_numeric_tally(e->frames[j], y, chunk_trials, w->counts + j * TALLY_BINS);
		if (w->store)
			__builtin_memcpy(w->store + j * e->block + done, y, chunk_trials * sizeof *y);
	}
	return true;
}

static block_result close_block(const trial_sums *sums, double shift, double n) {
	block_result result = {.mean = shift + sums->d / n, .min = sums->min, .max = sums->max};
	result.m2 = fmax(0.0, sums->d2 - sums->d * sums->d / n);
	return result;
}

static bool find_block_interval(worker *w, size_t j, size_t n, block_result *result) {
	fl_propagated interval;
	if (fl_numeric_coverage(w->store + j * w->engine->block, n, w->engine->plan->probability, &interval, NULL) < 0)
		return false;
	result->low = interval.low;
	result->high = interval.high;
	return true;
}

static bool do_block(worker *w, uint64_t block, fl_generator *generator, trial_sums *sums) {
	engine *e = w->engine;
	size_t outputs = e->source->outputs, n = (size_t)block_trials(e, block);
	block_result *results = e->round + (block - e->begin) * outputs;
	for (size_t j = 0; j < outputs; j++)
		sums[j] = (trial_sums){.min = INFINITY, .max = -INFINITY};
	for (size_t done = 0; done < n;) {
		size_t many = n - done < TRIAL_CHUNK ? n - done : TRIAL_CHUNK;
		e->source->fill(e->source->self, generator, w->scratch, many, w->chunk);
		if (block == 0 && done == 0)
			for (size_t j = 0; j < outputs; j++)
				e->shifts[j] = isfinite(w->chunk[j * many]) ? w->chunk[j * many] : 0.0;
		if (!take_in(w, many, done, sums))
			return false;
		done += many;
	}
	for (size_t j = 0; j < outputs; j++) {
		results[j] = close_block(&sums[j], e->shifts[j], (double)n);
		if (e->plan->digits > 0 && !find_block_interval(w, j, n, &results[j]))
			return false;
	}
	return true;
}

static void *work(void *argument) {
	worker *w = argument;
	uint64_t block;
	fl_generator generator;
	/* The sums of a block stand behind its chunk. */
	trial_sums *sums = (trial_sums *)(void *)(w->chunk + w->engine->source->outputs * TRIAL_CHUNK);
	while (take_block(w->engine, &block, &generator))
		if (!do_block(w, block, &generator, sums))
			give_up(w->engine);
	return NULL;
}

/* ---- rounds ---- */

/* Joins a set of n values into a running mean (Chan, Golub and LeVeque 1983). */
static void join(running *r, double n, double mean, double m2) {
	double difference = mean - r->mean, all = r->n + n;
	r->mean += difference * (n / all);
	r->m2 += m2 + difference * difference * (r->n * (n / all));
	r->n = all;
}

static void join_round(engine *e) {
	size_t outputs = e->source->outputs;
	for (uint64_t block = e->begin; block < e->end; block++)
		for (size_t j = 0; j < outputs; j++) {
			const block_result *result = &e->round[(block - e->begin) * outputs + j];
			joined *all = &e->joined[j];
			double n = (double)block_trials(e, block);
			join(&all->values, n, result->mean, result->m2);
			join(&all->means, 1.0, result->mean, 0.0);
			join(&all->us, 1.0, sqrt(result->m2 / (n - 1.0)), 0.0);
			join(&all->lows, 1.0, result->low, 0.0);
			join(&all->highs, 1.0, result->high, 0.0);
			all->min = fmin(all->min, result->min);
			all->max = fmax(all->max, result->max);
		}
}

/* Does blocks [e->end, end) on all threads. Threads that cannot be had are done without. */
static void do_round(engine *e, worker *workers, unsigned threads, uint64_t end) {
	pthread_t others[THREADS_MOST];
	unsigned started = 0;
	e->begin = e->next = e->end;
	e->end = end;
	if (end - e->begin < threads)
		threads = (unsigned)(end - e->begin);
	while (started + 1 < threads && pthread_create(&others[started], NULL, work, &workers[started + 1]) == 0)
		started++;
	work(&workers[0]);
	for (unsigned i = 0; i < started; i++)
		pthread_join(others[i], NULL);
	if (!e->failed)
		join_round(e);
}

/* Standard deviation of the mean of the blocks' values. */
static double scatter(const running *r) {
	return sqrt(r->m2 / (r->n * (r->n - 1.0)));
}

/* JCGM 101 7.9.4: twice the standard deviation of each mean is at most the numerical tolerance. */
static bool is_stable(const engine *e) {
	for (size_t j = 0; j < e->source->outputs; j++) {
		const joined *all = &e->joined[j];
		double u = sqrt(all->values.m2 / (all->values.n - 1.0));
		double delta = fl_numeric_tolerance_of(u, e->plan->digits);
		if (all->means.n < 2.0 || 2.0 * scatter(&all->means) > delta || 2.0 * scatter(&all->us) > delta ||
		    2.0 * scatter(&all->lows) > delta || 2.0 * scatter(&all->highs) > delta)
			return false;
	}
	return true;
}

/* Blocks in the next round: all that fit; looking for stable digits, at first nine and then half as many again. */
static uint64_t round_end(const engine *e, uint64_t blocks) {
	uint64_t many = ROUND;
	if (e->plan->digits > 0)
		many = e->end < 10 ? 9 : e->end / 2;
	if (many > ROUND)
		many = ROUND;
	return many < blocks - e->end ? e->end + many : blocks;
}

/* The first block, alone; then the bins are laid and its values counted. */
static bool do_first_block(engine *e, worker *w, tally_frame *frames) {
	do_round(e, w, 1, 1);
	if (e->failed)
		return false;
	size_t n = (size_t)block_trials(e, 0);
	for (size_t j = 0; j < e->source->outputs; j++) {
		double *values = w->store + j * e->block;
		frames[j] = fl_numeric_tally_frame(values, n);
		e->shifts[j] = e->joined[j].values.mean;
		fl_numeric_tally(frames[j], values, n, w->counts + j * TALLY_BINS);
	}
	e->frames = frames;
	if (e->plan->digits == 0)
		w->store = NULL; /* the memory belongs to the arena */
	return true;
}

static fl_status do_rounds(engine *e, worker *workers, tally_frame *frames, fl_trials *trials, fl_error *err) {
	const fl_plan *plan = e->plan;
	uint64_t blocks = (e->trials + e->block - 1) / e->block;
	bool fine = do_first_block(e, workers, frames);
	trials->stable = plan->digits == 0;
	while (fine && e->end < blocks && !(plan->digits > 0 && trials->stable)) {
		do_round(e, workers, plan->threads, round_end(e, blocks));
		fine = !e->failed;
		trials->done = e->end * e->block < e->trials ? e->end * e->block : e->trials;
		if (plan->digits > 0)
			trials->stable = fine && is_stable(e);
		if (fine && plan->progress && !plan->progress(plan->progress_context, trials->done, e->trials))
			return fl_fail(err, FL_E_STATE, "stopped after %llu trials", (unsigned long long)trials->done);
	}
	trials->done = e->end * e->block < e->trials ? e->end * e->block : e->trials;
	if (!fine)
		return fl_fail(err, FL_E_NUMERIC, "a trial gave a result that is no finite number");
	return FL_OK;
}

/* ---- what comes out ---- */

static void hand_out(const engine *e, const worker *workers, uint64_t *counts, fl_propagated *outputs) {
	const fl_plan *plan = e->plan;
	for (size_t j = 0; j < e->source->outputs; j++) {
		const joined *all = &e->joined[j];
		fl_propagated *out = &outputs[j];
		*out = (fl_propagated){.mean = all->values.mean, .min = all->min, .max = all->max};
		out->u = sqrt(all->values.m2 / (all->values.n - 1.0));
		out->delta = fl_numeric_tolerance_of(out->u, plan->digits > 0 ? plan->digits : 2);
		for (size_t bin = 0; bin < TALLY_BINS; bin++) {
			counts[bin] = 0;
			for (unsigned i = 0; i < plan->threads; i++)
				counts[bin] += workers[i].counts[j * TALLY_BINS + bin];
		}
		fl_numeric_tally_intervals(e->frames[j], counts, plan->probability, out);
	}
}

static fl_status check_plan(const fl_plan *plan, fl_error *err) {
	if (!(plan->probability > 0.0 && plan->probability <= 0.9999))
		return fl_fail(err, FL_E_NUMERIC, "a coverage probability of %g: it must lie between 0 and 0.9999",
		               plan->probability);
	if (plan->trials < 1000 || plan->trials > UINT32_MAX)
		return fl_fail(err, FL_E_NUMERIC, "%llu trials: at least 1000 and at most 4294967295 are possible",
		               (unsigned long long)plan->trials);
	if (plan->threads < 1 || plan->threads > THREADS_MOST || plan->digits < 0 || plan->digits > 2)
		return fl_fail(err, FL_E_NUMERIC, "%u threads and %d digits: 1 to %d threads and 0 to 2 digits are possible",
		               plan->threads, plan->digits, THREADS_MOST);
	return FL_OK;
}

/* JCGM 101 7.9.4 b: at least 10^4, and 100 beyond the coverage interval. */
static size_t block_size(const fl_plan *plan) {
	double least = fmax(1e4, ceil(100.0 / (1.0 - plan->probability)));
	size_t block = ((size_t)least + FL_LANES - 1) / FL_LANES * FL_LANES;
	size_t trials = ((size_t)plan->trials + FL_LANES - 1) / FL_LANES * FL_LANES;
	return block < trials ? block : trials;
}

static bool furnish(engine *e, worker *workers, fl_arena *arena) {
	size_t outputs = e->source->outputs;
	e->shifts = fl_arena_alloc(arena, outputs, sizeof *e->shifts);
	e->round = fl_arena_alloc(arena, outputs * ROUND, sizeof *e->round);
	e->joined = fl_arena_alloc(arena, outputs, sizeof *e->joined);
	bool fine = e->shifts && e->round && e->joined;
	for (size_t j = 0; fine && j < outputs; j++)
		e->joined[j] = (joined){.min = INFINITY, .max = -INFINITY};
	for (unsigned i = 0; fine && i < e->plan->threads; i++) {
		worker *w = &workers[i];
		*w = (worker){.engine = e};
		w->scratch = fl_arena_alloc(arena, e->source->scratch + 1, sizeof *w->scratch);
		w->chunk =
		    fl_arena_alloc(arena, outputs * (TRIAL_CHUNK + sizeof(trial_sums) / sizeof(double)), sizeof *w->chunk);
		w->counts = fl_arena_alloc(arena, outputs * TALLY_BINS, sizeof *w->counts);
		bool stores = i == 0 || e->plan->digits > 0;
		w->store = stores ? fl_arena_alloc(arena, outputs * e->block, sizeof *w->store) : NULL;
		fine = w->scratch && w->chunk && w->counts && (w->store || !stores);
	}
	return fine;
}

static fl_status try_with(engine *e, fl_arena *arena, fl_propagated *outputs, fl_trials *trials, fl_error *err) {
	worker *workers = fl_arena_alloc(arena, e->plan->threads, sizeof *workers);
	tally_frame *frames = fl_arena_alloc(arena, e->source->outputs, sizeof *frames);
	uint64_t *counts = fl_arena_alloc(arena, TALLY_BINS, sizeof *counts);
	if (!workers || !frames || !counts || !furnish(e, workers, arena))
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
	fl_trials found = {.seed = e->plan->seed};
	fl_status status = do_rounds(e, workers, frames, &found, err);
	if (status < 0)
		return status;
	hand_out(e, workers, counts, outputs);
	*trials = found;
	return found.stable ? FL_OK : FL_WARNING;
}

fl_status fl_numeric_try(const trial_source *source, const fl_plan *plan, fl_propagated *outputs, fl_trials *trials,
                         fl_error *err) {
	fl_status status = check_plan(plan, err);
	if (status < 0)
		return status;
	engine e = {.source = source, .plan = plan, .block = block_size(plan)};
	e.trials = (plan->trials + FL_LANES - 1) / FL_LANES * FL_LANES;
	fl_numeric_generator_seed(&e.stream, plan->seed);
	if (pthread_mutex_init(&e.lock, NULL) != 0)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
	fl_arena arena = {0};
	status = try_with(&e, &arena, outputs, trials, err);
	fl_arena_free(&arena);
	pthread_mutex_destroy(&e.lock);
	return status;
}

/* ---- a model with inputs ---- */

fl_status fl_numeric_check_input(const fl_input *input, size_t i, fl_error *err) {
	if (!isfinite(input->centre) || !isfinite(input->width) || input->width < 0.0)
		return fl_fail(err, FL_E_NUMERIC, "input %zu: centre %g and width %g make no sense", i + 1, input->centre,
		               input->width);
	if (input->shape == FL_SHAPE_TRAPEZOIDAL && !(input->parameter >= 0.0 && input->parameter <= 1.0))
		return fl_fail(err, FL_E_NUMERIC, "input %zu: a trapezoid's top is 0 to 1 of its base, not %g", i + 1,
		               input->parameter);
	if (input->shape == FL_SHAPE_STUDENT && !(input->parameter >= 1.0 && isfinite(input->parameter)))
		return fl_fail(err, FL_E_NUMERIC, "input %zu: %g degrees of freedom, at least 1 are needed", i + 1,
		               input->parameter);
	return FL_OK;
}

/* A model, and the triangle that makes its normal draws correlated. */
typedef struct modelled {
	const fl_model *model;
	const double *triangle; /* NULL for none */
} modelled;

/* Cholesky's decomposition of a correlation matrix that may be singular (a correlation of 1): what depends wholly on
 * the inputs before it adds nothing of its own. */
static bool decompose(const double *r, size_t n, double *triangle) {
	for (size_t i = 0; i < n; i++)
		for (size_t k = 0; k <= i; k++) {
			double left = r[i * n + k];
			for (size_t m = 0; m < k; m++)
				left -= triangle[i * n + m] * triangle[k * n + m];
			double pivot = triangle[k * n + k];
			if (i == k && left < -1e-10)
				return false;
			if (i == k)
				triangle[i * n + k] = left > 1e-12 ? sqrt(left) : 0.0;
			else if (pivot > 0.0)
				triangle[i * n + k] = left / pivot;
			else if (fabs(left) > 1e-6)
				return false;
		}
	return true;
}

static fl_status check_correlation(const fl_model *model, fl_error *err) {
	size_t n = model->input_count;
	for (size_t i = 0; i < n; i++)
		for (size_t k = 0; k < n; k++) {
			double r = model->correlation[i * n + k];
			bool normal = model->inputs[i].shape == FL_SHAPE_NORMAL && model->inputs[k].shape == FL_SHAPE_NORMAL;
			if (!(fabs(r) <= 1.0) || r != model->correlation[k * n + i] || (i == k && r != 1.0))
				return fl_fail(err, FL_E_NUMERIC, "the correlation %g of inputs %zu and %zu makes no sense", r, i + 1,
				               k + 1);
			if (i != k && r != 0.0 && !normal)
				return fl_fail(err, FL_E_NUMERIC, "inputs %zu and %zu are correlated, but not both are normal", i + 1,
				               k + 1);
		}
	return FL_OK;
}

/* Independent standard draws into correlated ones of the right centre and width; from the last row up, in place. */
static void correlate(const modelled *m, size_t trials, double *draws) {
	size_t n = m->model->input_count;
	for (size_t i = n; i-- > 0;) {
		const fl_input *input = &m->model->inputs[i];
		double *row = draws + i * trials;
		if (input->shape != FL_SHAPE_NORMAL)
			continue;
		for (size_t t = 0; t < trials; t++) {
			double sum = 0.0;
			for (size_t k = 0; k <= i; k++)
				if (m->triangle[i * n + k] != 0.0)
					sum += m->triangle[i * n + k] * draws[k * trials + t];
			row[t] = input->centre + input->width * sum;
		}
	}
}

static void fill_model(const void *self, fl_generator *generator, double *scratch, size_t trials, double *outputs) {
	const modelled *m = self;
	const fl_model *model = m->model;
	for (size_t i = 0; i < model->input_count; i++) {
		fl_input input = model->inputs[i];
		if (m->triangle && input.shape == FL_SHAPE_NORMAL)
			input = (fl_input){.shape = FL_SHAPE_NORMAL, .width = 1.0};
		fl_numeric_draw(generator, &input, scratch + i * trials, trials);
	}
	if (m->triangle)
		correlate(m, trials, scratch);
	model->evaluate(model->context, scratch, trials, outputs);
}

static fl_status prepare_correlation(modelled *m, fl_arena *arena, fl_error *err) {
	size_t n = m->model->input_count;
	fl_status status = check_correlation(m->model, err);
	if (status < 0)
		return status;
	double *triangle = fl_arena_alloc(arena, n * n, sizeof *triangle);
	if (!triangle)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the correlations");
	if (!decompose(m->model->correlation, n, triangle))
		return fl_fail(err, FL_E_NUMERIC, "the correlations contradict each other: no quantities can have them");
	m->triangle = triangle;
	return FL_OK;
}

fl_status fl_numeric_monte_carlo(const fl_model *model, const fl_plan *plan, fl_propagated *outputs, fl_trials *trials,
                                 fl_error *err) {
	if (model->input_count == 0 || model->output_count == 0 || model->input_count > 10000 ||
	    model->output_count > 10000)
		return fl_fail(err, FL_E_NUMERIC, "a model of %zu inputs and %zu outputs", model->input_count,
		               model->output_count);
	for (size_t i = 0; i < model->input_count; i++) {
		fl_status status = fl_numeric_check_input(&model->inputs[i], i, err);
		if (status < 0)
			return status;
	}
	fl_arena arena = {0};
	modelled m = {.model = model};
	fl_status status = model->correlation ? prepare_correlation(&m, &arena, err) : FL_OK;
	trial_source source = {
	    .self = &m, .outputs = model->output_count, .scratch = model->input_count * TRIAL_CHUNK, .fill = fill_model};
	if (status >= 0)
		status = fl_numeric_try(&source, plan, outputs, trials, err);
	fl_arena_free(&arena);
	return status;
}
