/* depth.c - what assess computes beyond the result: explanations and trials.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "depth.h"

#include <errno.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>
#include <unistd.h>

#include "report_parts.h"

/* ---- explanations ----------------------------------------------------------------------------------------------- */

static fl_status explain(fl_case *one, fl_run_kind kind, const fl_point_result *point, fl_error *err) {
	fl_beyond *beyond = &one->beyond;
	fl_explanation *grown = fl_arena_grow(&beyond->arena, beyond->explained, beyond->explained_count,
	                                      &beyond->explained_capacity, sizeof *grown);
	if (!grown)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the explanation");
	beyond->explained = grown;
	fl_status status = fl_analysis_explain(&one->session, &one->procedure, &one->stock, &one->result, kind, point,
	                                       &beyond->arena, &beyond->explained[beyond->explained_count], err);
	if (status >= 0)
		beyond->explained_count++;
	return status;
}

static bool is_own_run(const fl_run_result *run) {
	return run->available && !run->same_as_found;
}

static fl_status explain_all(fl_case *one, fl_error *err) {
	fl_status status = FL_OK;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++) {
		const fl_run_result *run = &one->result.runs[kind];
		for (size_t i = 0; is_own_run(run) && i < run->point_count && status >= 0; i++)
			status = explain(one, (fl_run_kind)kind, &run->points[i], err);
		for (size_t i = 0; is_own_run(run) && i < run->combined_count && status >= 0; i++)
			status = explain(one, (fl_run_kind)kind, &run->combined[i], err);
	}
	return status;
}

/* What --explain names: a point and perhaps a direction behind it. */
typedef struct wanted {
	char name[FL_CELL_SIZE];
	bool any_direction, both;
	fl_pass pass;
} wanted;

static bool take_word(char *text, const char *word) {
	size_t length = strlen(text), size = strlen(word);
	if (length <= size + 1 || text[length - size - 1] != ' ' || strcasecmp(text + length - size, word) != 0)
		return false;
	text[length - size - 1] = '\0';
	return true;
}

static wanted read_wanted(const char *text) {
	wanted w = {.any_direction = true};
	snprintf(w.name, sizeof w.name, "%s", text);
	w.both = take_word(w.name, "both");
	bool rising = !w.both && take_word(w.name, "rising"), falling = !w.both && !rising && take_word(w.name, "falling");
	w.any_direction = !w.both && !rising && !falling;
	w.pass = falling ? FL_PASS_FALLING : FL_PASS_RISING;
	return w;
}

static bool is_named(const fl_case *one, const fl_point_result *point, const char *name) {
	char own[FL_CELL_SIZE], number[24];
	if (point->point == FL_POINT_ZERO)
		return strcasecmp(name, "zero") == 0 || strcasecmp(name, "stopped zero") == 0;
	snprintf(number, sizeof number, "%d", point->point + 1);
	return strcasecmp(name, point->oil) == 0 || strcasecmp(name, point->lot) == 0 || strcmp(name, number) == 0 ||
	       strcasecmp(name, fl_report_point_name(one, point->point, own)) == 0;
}

/* Without a direction: both together where there are both. */
static fl_status explain_run(fl_case *one, fl_run_kind kind, const wanted *w, fl_error *err) {
	const fl_run_result *run = &one->result.runs[kind];
	fl_status status = FL_OK;
	bool together = w->both || w->any_direction;
	size_t count = together ? run->combined_count : run->point_count;
	const fl_point_result *points = together ? run->combined : run->points;
	for (size_t i = 0; is_own_run(run) && i < count && status >= 0; i++) {
		bool direction = w->any_direction || (w->both ? points[i].both : points[i].pass == w->pass);
		if (direction && is_named(one, &points[i], w->name))
			status = explain(one, kind, &points[i], err);
	}
	return status;
}

static fl_status explain_wanted(fl_case *one, const char *text, fl_error *err) {
	wanted w = read_wanted(text);
	fl_status status = FL_OK;
	for (int kind = 0; kind < FL_RUN_KINDS && status >= 0; kind++)
		status = explain_run(one, (fl_run_kind)kind, &w, err);
	if (status >= 0 && one->beyond.explained_count == 0)
		return fl_fail(
		    err, FL_E_USAGE,
		    "--explain: no run has a point `%s`; name an oil, a lot, the number of a point or zero, and behind "
		    "it rising, falling or both if you like",
		    text);
	return status;
}

/* ---- trials ----------------------------------------------------------------------------------------------------- */

static volatile sig_atomic_t interrupted;

static void note_interrupt(int signal_number) {
	(void)signal_number;
	interrupted = 1;
}

static bool show_progress(void *context, uint64_t done, uint64_t most) {
	const fl_cli *cli = context;
	if (isatty(fileno(cli->err)))
		fprintf(cli->err, "\r%llu of at most %llu trials ", (unsigned long long)done, (unsigned long long)most);
	return !interrupted;
}

static fl_status whole_number(const char *option, const char *text, uint64_t least, uint64_t most, uint64_t *out,
                              fl_error *err) {
	char *rest = NULL;
	errno = 0;
	unsigned long long value = strtoull(text, &rest, 10);
	if (rest == text || *rest || text[0] == '-' || errno || value < least || value > most)
		return fl_fail(err, FL_E_USAGE, "--%s takes a whole number from %llu to %llu, not `%s`", option,
		               (unsigned long long)least, (unsigned long long)most, text);
	*out = value;
	return FL_OK;
}

/* Without --seed the beginning of the journal's digest: the same record gives the same trials. */
static uint64_t seed_of(const fl_case *one) {
	char first[9];
	snprintf(first, sizeof first, "%.8s", one->head);
	return strtoull(first, NULL, 16);
}

static const uint64_t most_when_adaptive = 20000000;

static fl_status plan_of(fl_cli *cli, fl_case *one, fl_plan *plan, fl_error *err) {
	const char *trials = cli->values[FL_OPT_TRIALS], *seed = cli->values[FL_OPT_SEED];
	const char *threads = cli->values[FL_OPT_THREADS];
	long cores = sysconf(_SC_NPROCESSORS_ONLN);
	uint64_t count = cores > 0 && cores < 256 ? (uint64_t)cores : 1;
	bool adaptive = strcmp(trials, "auto") == 0;
	*plan = (fl_plan){.seed = seed_of(one), .trials = most_when_adaptive, .digits = adaptive ? 2 : 0};
	plan->probability = one->result.coverage_probability;
	plan->progress = show_progress;
	plan->progress_context = cli;
	fl_status status = adaptive ? FL_OK : whole_number("trials", trials, 1000, UINT32_MAX, &plan->trials, err);
	if (status >= 0 && seed)
		status = whole_number("seed", seed, 0, (UINT64_C(1) << 53) - 1, &plan->seed, err);
	if (status >= 0 && threads)
		status = whole_number("threads", threads, 1, 256, &count, err);
	plan->threads = (unsigned)count;
	one->beyond.digits = plan->digits;
	return status;
}

static fl_status try_runs(fl_cli *cli, fl_case *one, fl_error *err) {
	fl_plan plan;
	fl_status status = plan_of(cli, one, &plan, err);
	struct sigaction old, act = {.sa_handler = note_interrupt};
	if (status < 0)
		return status;
	interrupted = 0;
	sigaction(SIGINT, &act, &old);
	for (int kind = 0; kind < FL_RUN_KINDS && status >= 0; kind++)
		if (is_own_run(&one->result.runs[kind]))
			status = fl_analysis_trials(&one->session, &one->procedure, &one->stock, &one->result, (fl_run_kind)kind,
			                            &plan, &one->beyond.arena, &one->beyond.trials[kind], err);
	sigaction(SIGINT, &old, NULL);
	if (isatty(fileno(cli->err)))
		fprintf(cli->err, "\r%*s\r", 60, "");
	return status;
}

fl_status fl_depth(fl_cli *cli, fl_case *one, fl_error *err) {
	fl_status status = FL_OK;
	one->beyond.budgets = cli->values[FL_OPT_BUDGET] != NULL;
	one->beyond.explain = cli->values[FL_OPT_EXPLAIN];
	if (!cli->values[FL_OPT_TRIALS] && (cli->values[FL_OPT_SEED] || cli->values[FL_OPT_THREADS]))
		return fl_fail(err, FL_E_USAGE, "--seed and --threads are for trials: add --trials auto or a number of them");
	if (cli->values[FL_OPT_JSON])
		status = explain_all(one, err);
	else if (one->beyond.explain)
		status = explain_wanted(one, one->beyond.explain, err);
	if (status >= 0 && cli->values[FL_OPT_TRIALS])
		status = try_runs(cli, one, err);
	return status;
}
