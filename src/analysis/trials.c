/* analysis/trials.c - a run by trials, beside what JCGM 100 says of it.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "trials.h"

#include <math.h>

/* ---- comparison, JCGM 101:2008 clause 8 ---- */

/* To how many digits of u the two coverage intervals agree. */
static void compare(fl_tried *tried) {
	fl_validation one;
	tried->digits = -1;
	if (isnan(tried->u) || isnan(tried->expanded))
		return;
	fl_numeric_validate(tried->value, tried->u, tried->expanded, &tried->by_trials, 2, &tried->validation);
	fl_numeric_validate(tried->value, tried->u, tried->expanded, &tried->by_trials, 1, &one);
	tried->digits = tried->validation.valid ? 2 : one.valid ? 1 : 0;
}

static fl_tried tried_point(const fl_point_result *point, const fl_propagated *by_trials) {
	fl_tried tried = {.point = point, .by_trials = *by_trials, .value = point->error_span};
	tried.u = point->sum.uc;
	tried.expanded = point->sum.expanded;
	compare(&tried);
	return tried;
}

static fl_tried tried_figure(const fl_run_result *run, trial_figure which, const fl_propagated *by_trials,
                             double probability) {
	static const char *const names[FIGURES] = {
	    "zero error",         "span error",           "largest residual", "independent linearity",
	    "terminal linearity", "zero-based linearity", "hysteresis"};
	const double values[FIGURES] = {run->line.intercept,      run->line.slope,       run->line.max_abs_residual,
	                                run->independent.max_abs, run->terminal.max_abs, run->zero_based.max_abs,
	                                run->hysteresis_span};
	fl_tried tried = {.name = names[which], .by_trials = *by_trials, .value = values[which]};
	tried.u = tried.expanded = NAN;
	if (which == FIGURE_ZERO)
		tried.u = sqrt(run->line_shared.var_intercept);
	if (which == FIGURE_SPAN)
		tried.u = sqrt(run->line_shared.var_slope);
	tried.expanded = fl_numeric_student(probability, INFINITY) * tried.u;
	compare(&tried);
	return tried;
}

static bool is_determined(const trial_model *m, trial_figure which) {
	if (which == FIGURE_HYSTERESIS)
		return m->hysteresis;
	return which <= FIGURE_RESIDUAL ? m->lines : m->linearity;
}

/* ---- words ---- */

static const char *worst_digits_words(const work *w, const fl_run_trials *t) {
	const fl_tried *worst = NULL;
	for (size_t i = 0; i < t->point_count; i++)
		if (t->points[i].digits >= 0 && (!worst || t->points[i].digits < worst->digits))
			worst = &t->points[i];
	if (!worst)
		return "nothing to compare: no point has a budget";
	if (worst->digits == 2)
		return "JCGM 101 clause 8: U by JCGM 100 holds at every point to two digits of u";
	double far = fmax(worst->validation.d_low, worst->validation.d_high);
	double half = (worst->by_trials.high - worst->by_trials.low) / 2.0;
	return fl_arena_printf(
	    w->arena,
	    "JCGM 101 clause 8: U by JCGM 100 does not hold to two digits of u at every point%s; at %s the ends differ "
	    "by %s of span, and the interval by trials is the %s one",
	    worst->digits == 1 ? " (to one digit it does)" : "", fl_analysis_point_name(w, worst->point),
	    fl_analysis_percent(w->arena, far, 4), half < worst->expanded ? "narrower" : "wider");
}

static const char *normal_words(const trial_model *m) {
	for (size_t i = 0; i < m->place_count; i++)
		for (int pass = 0; pass < 2; pass++) {
			const trial_pass *p = &m->places[i].passes[pass];
			if (p->count > 1 && p->count < 4)
				return "With fewer than four readings in a direction Student's t has no variance: their scatter is "
				       "drawn "
				       "from a normal distribution, and the trials know less of it than k does";
		}
	return NULL;
}

/* ---- the run ---- */

static fl_status hand_out(const work *w, const trial_model *m, const fl_run_result *run, const fl_propagated *by_trials,
                          double probability, fl_run_trials *out, fl_error *err) {
	out->points = fl_arena_alloc(w->arena, m->point_outputs + m->place_count + 1, sizeof *out->points);
	out->figures = fl_arena_alloc(w->arena, FIGURES, sizeof *out->figures);
	if (!out->points || !out->figures)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
	for (size_t i = 0; i < run->point_count; i++)
		out->points[out->point_count++] = tried_point(&run->points[i], &by_trials[i]);
	for (size_t i = 0; i < run->combined_count; i++)
		if (run->combined[i].both)
			out->points[out->point_count++] = tried_point(&run->combined[i], &by_trials[m->point_outputs + i]);
	for (int i = 0; i < FIGURES; i++)
		if (is_determined(m, (trial_figure)i))
			out->figures[out->figure_count++] = tried_figure(
			    run, (trial_figure)i, &by_trials[m->point_outputs + m->place_count + (size_t)i], probability);
	out->words = worst_digits_words(w, out);
	out->normal_words = normal_words(m);
	out->has = true;
	return out->words ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
}

static fl_status try_run(const work *w, const fl_run_result *run, const fl_plan *plan, fl_run_trials *out,
                         fl_error *err) {
	trial_model m;
	fl_status status = fl_analysis_trial_model(w, run, &m, err);
	if (status < 0)
		return status;
	size_t outputs = m.point_outputs + m.place_count + FIGURES;
	fl_propagated *by_trials = fl_arena_alloc(w->arena, outputs, sizeof *by_trials);
	if (!by_trials)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trials");
	fl_model model = {.inputs = m.inputs,
	                  .input_count = m.input_count,
	                  .output_count = outputs,
	                  .evaluate = fl_analysis_try,
	                  .context = &m};
	fl_status ran = fl_numeric_monte_carlo(&model, plan, by_trials, &out->trials, err);
	if (ran < 0)
		return ran;
	status = hand_out(w, &m, run, by_trials, plan->probability, out, err);
	return status < 0 ? status : ran;
}

fl_status fl_analysis_trials(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                             const fl_result *result, fl_run_kind kind, const fl_plan *plan, fl_arena *arena,
                             fl_run_trials *out, fl_error *err) {
	const fl_run_result *run = &result->runs[kind];
	*out = (fl_run_trials){0};
	if (!run->available || run->same_as_found)
		return fl_fail(err, FL_E_STATE, "the %s run was not taken: there is nothing to try", fl_run_word(kind));
	fl_result room = *result; /* only its figures are read */
	work w = {.session = session, .procedure = procedure, .stock = stock, .result = &room, .arena = arena};
	fl_status status = fl_analysis_items(&w, err);
	return status < 0 ? status : try_run(&w, run, plan, out, err);
}
