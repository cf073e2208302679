/* analysis/general.c - beside the ordinary line: its uncertainty with what the points share, the generalized line, each
 * direction by itself with its lack of fit, the bands over the scale, and the way back from the dial to the true value.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The ordinary line through the combined points stays what is stated as zero and span error. The generalized one
 * decides nothing; it is there for whoever wants the line that the uncertainties make most likely.
 */
#include "work.h"

#include <math.h>
#include <string.h>

/* Points whose standard uncertainties differ by more call for weights (common practice, no source). */
static const double largest_ordinary_ratio = 3.0;
/* Fieller's g from which the symmetric interval is no longer good enough (Draper & Smith 3.2). */
static const double poor_slope = 0.05;
/* What a certificate can leave of an uncertainty at the least: keeps the matrix regular at the stopped zero, which has
 * an exact reference. A hundred thousandth of a percent of span, below every resolution. */
static const double least_u_span = 1e-7;

/* The combined points of the line, as collect in lines.c takes them. */
typedef struct line_points {
	const fl_point_result **points;
	double *x, *e;
	size_t n;
} line_points;

static bool collect(const work *w, const fl_run_result *run, line_points *out) {
	*out = (line_points){0};
	out->points = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof(fl_point_result *));
	out->x = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof *out->x);
	out->e = fl_arena_alloc(w->arena, run->combined_count + 1, sizeof *out->e);
	if (!out->points || !out->x || !out->e)
		return false;
	for (size_t i = 0; i < run->combined_count; i++) {
		if (!fl_analysis_in_line(w, &run->combined[i]))
			continue;
		out->points[out->n] = &run->combined[i];
		out->x[out->n] = fl_analysis_line_position(run, &run->combined[i]);
		out->e[out->n++] = run->combined[i].error_span;
	}
	return true;
}

/* ---- the ordinary line with what the points share ---- */

/* Intercept and slope are sums of the errors with these weights. */
static void line_weights(const line_points *l, size_t i, double *of_intercept, double *of_slope) {
	double mean = 0.0, sxx = 0.0, n = (double)l->n;
	for (size_t k = 0; k < l->n; k++)
		mean += l->x[k] / n;
	for (size_t k = 0; k < l->n; k++)
		sxx += (l->x[k] - mean) * (l->x[k] - mean);
	*of_slope = (l->x[i] - mean) / sxx;
	*of_intercept = 1.0 / n - mean * *of_slope;
}

/* A deviation of the ideal output moves the point along the line too: by 1 + slope in all. */
static void take_shared(fl_run_result *run, const line_points *l) {
	double along = 1.0 + run->line.slope;
	run->line_shared = (fl_line){.intercept = run->line.intercept, .slope = run->line.slope, .dof = run->line.dof};
	for (size_t i = 0; i < l->n; i++)
		for (size_t k = 0; k < l->n; k++) {
			double z1, g1, z2, g2;
			double c = along * along * fl_analysis_covariance(l->points[i], l->points[k], SIDE_IDEAL) +
			           fl_analysis_covariance(l->points[i], l->points[k], SIDE_OUTPUT);
			line_weights(l, i, &z1, &g1);
			line_weights(l, k, &z2, &g2);
			run->line_shared.var_intercept += z1 * z2 * c;
			run->line_shared.var_slope += g1 * g2 * c;
			run->line_shared.cov += z1 * g2 * c;
		}
}

/* ---- the generalized line ---- */

static double uncertainty_ratio(const line_points *l) {
	double least = INFINITY, most = 0.0;
	for (size_t i = 0; i < l->n; i++) {
		double u = l->points[i]->sum.uc;
		least = fmin(least, u);
		most = fmax(most, u);
	}
	return least > 0.0 ? most / least : NAN;
}

/* Of (ideal position, output position), 2n by 2n: what acts on the one does not act on the other. */
static double *joint_covariance(const work *w, const line_points *l) {
	size_t n = l->n, m = 2 * n;
	double *v = fl_arena_alloc(w->arena, m * m, sizeof *v);
	for (size_t i = 0; v && i < n; i++)
		for (size_t k = 0; k < n; k++) {
			double floor = i == k ? least_u_span * least_u_span : 0.0;
			v[i * m + k] = floor + fl_analysis_covariance(l->points[i], l->points[k], SIDE_IDEAL);
			v[(n + i) * m + n + k] = floor + fl_analysis_covariance(l->points[i], l->points[k], SIDE_OUTPUT);
		}
	return v;
}

static const char *why_general(const work *w, double ratio) {
	if (w->procedure->line == FL_LINE_GENERAL)
		return "the procedure asks for it";
	return fl_arena_printf(w->arena, "the standard uncertainties of the points differ by %s to 1, more than %s to 1",
	                       fl_analysis_number(w->arena, ratio, 2),
	                       fl_analysis_number(w->arena, largest_ordinary_ratio, 2));
}

static fl_status fit_general(const work *w, fl_general_line *g, const line_points *l, fl_error *err) {
	double *v = joint_covariance(w, l), *y = fl_arena_alloc(w->arena, l->n, sizeof *y);
	if (!v || !y)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the generalized line");
	for (size_t i = 0; i < l->n; i++)
		y[i] = l->x[i] + l->e[i];
	if (fl_numeric_line_distance(l->x, y, v, l->n, &g->line, NULL, NULL) < 0) {
		g->why = "the budgets do not determine it";
		return FL_OK;
	}
	g->line.slope -= 1.0; /* of the error instead of the output */
	g->has = true;
	g->why = why_general(w, g->ratio);
	g->probability = fl_numeric_chi_squared_tail(g->line.sum_sq, g->line.dof);
	return FL_OK;
}

static fl_status take_general(work *w, fl_run_result *run, const line_points *l, fl_error *err) {
	fl_general_line *g = &run->general;
	g->ratio = uncertainty_ratio(l);
	fl_line_choice choice = w->procedure->line;
	if (choice == FL_LINE_ORDINARY)
		g->why = "the procedure asks for the ordinary line only";
	else if (l->n < 3)
		g->why = "fewer than 3 points";
	else if (choice == FL_LINE_BY_RATIO && !(g->ratio > largest_ordinary_ratio))
		g->why = "the points are about equally sure: the ordinary line says the same";
	else
		return fit_general(w, g, l, err);
	return FL_OK;
}

/* ---- each direction by itself ---- */

typedef struct pass_points {
	double *x, *e;
	size_t n;
} pass_points;

static double place_of(const fl_run_result *run, int point, fl_pass pass) {
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].point == point && run->points[i].pass == pass)
			return run->points[i].x;
	return NAN;
}

static fl_status take_lack(const work *w, const fl_run_result *run, fl_pass pass, fl_pass_line *out, fl_error *err) {
	size_t room = run->reading_count + 1, n = 0;
	double *x = fl_arena_alloc(w->arena, 3 * room, sizeof *x), *e = x + room, *fitted = e + room;
	fl_line line;
	if (!x)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the lack of fit");
	for (size_t i = 0; i < run->reading_count; i++) {
		const fl_reading_result *r = &run->readings[i];
		double at = r->used && r->reading->pass == pass ? place_of(run, r->reading->point, pass) : NAN;
		bool zero = r->reading->point == FL_POINT_ZERO, outside = r->ideal.output < w->reference.range->measuring_low;
		if (isnan(at) || (zero && outside))
			continue;
		x[n] = at;
		e[n++] = r->error_span;
	}
	if (n < 3 || fl_numeric_line(x, e, n, &line, NULL) < 0)
		return FL_OK;
	for (size_t i = 0; i < n; i++)
		fitted[i] = line.intercept + line.slope * x[i];
	out->has_lack = fl_numeric_lack_of_fit(x, e, fitted, n, 2, &out->lack, NULL) >= 0;
	return FL_OK;
}

static fl_status take_pass(const work *w, fl_run_result *run, fl_pass pass, fl_error *err) {
	fl_pass_line *out = &run->passes[pass];
	double *x = fl_arena_alloc(w->arena, 2 * (run->point_count + 1), sizeof *x), *e = x + run->point_count + 1;
	size_t n = 0;
	if (!x)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the line of a direction");
	for (size_t i = 0; i < run->point_count; i++)
		if (run->points[i].pass == pass && fl_analysis_in_line(w, &run->points[i])) {
			x[n] = run->points[i].x;
			e[n++] = run->points[i].error_span;
		}
	out->has = n >= 3 && fl_numeric_line(x, e, n, &out->line, NULL) >= 0;
	return out->has ? take_lack(w, run, pass, out, err) : FL_OK;
}

/* ---- bands over the scale ---- */

static double dial_to_x(const work *w, double dial) {
	const fl_scale *scale = &w->reference.instrument->scale;
	double at_m2_s = dial * 1e-6;
	fl_status status = FL_OK;
	if (scale->dial_unit == FL_DIAL_REDWOOD)
		status = fl_physics_redwood_to_nu(dial, &at_m2_s, NULL);
	if (scale->dial_unit == FL_DIAL_SAYBOLT)
		status = fl_physics_saybolt_to_nu(dial, scale->saybolt_temp_c, &at_m2_s, NULL);
	double low = w->reference.low_m2_s, high = w->reference.high_m2_s;
	return status < 0 ? NAN : (at_m2_s - low) / (high - low);
}

static void add_place(const work *w, fl_run_result *run, const char *name, double x) {
	fl_line_place place = {.name = name, .x = x};
	double ignored;
	if (isnan(x) || fl_numeric_bands(&run->line, x, w->result->coverage_probability, 1, &place.bands, NULL) < 0)
		return;
	fl_numeric_line_at(&run->line_shared, x, &ignored, &place.u_shared);
	run->places[run->place_count++] = place;
}

/* Values of the dial that the plant lives by; NAN where the stock states none. A test's instrument holds zeroes. */
typedef struct dial_mark {
	const char *name;
	double dial;
} dial_mark;

static void dial_marks(const work *w, dial_mark marks[FL_TRUE_VALUES]) {
	const fl_instrument *i = w->reference.instrument;
	marks[0] = (dial_mark){"set point", i->set_point > 0.0 ? i->set_point : NAN};
	marks[1] = (dial_mark){"alarm low", i->alarm_low > 0.0 ? i->alarm_low : NAN};
	marks[2] = (dial_mark){"alarm high", i->alarm_high > 0.0 ? i->alarm_high : NAN};
}

static fl_status take_places(const work *w, fl_run_result *run, const line_points *l, fl_error *err) {
	dial_mark marks[FL_TRUE_VALUES];
	run->places = fl_arena_alloc(w->arena, l->n + FL_TRUE_VALUES, sizeof *run->places);
	if (!run->places)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the bands");
	for (size_t i = 0; i < l->n; i++) {
		const fl_point_result *p = l->points[i];
		const char *name = p->point == FL_POINT_ZERO ? "stopped zero"
		                   : p->oil[0]
		                       ? p->oil
		                       : fl_arena_printf(w->arena, "%s of span", fl_analysis_percent(w->arena, p->x, 0));
		add_place(w, run, name ? name : "", l->x[i]);
	}
	dial_marks(w, marks);
	for (int i = 0; i < FL_TRUE_VALUES; i++)
		add_place(w, run, marks[i].name, dial_to_x(w, marks[i].dial));
	return FL_OK;
}

/* ---- from the dial to the true value ---- */

static double dial_at(const work *w, double x) {
	double dial = NAN;
	if (isinf(x))
		return x;
	return fl_physics_dial_at(&w->reference.instrument->scale, x, &dial, NULL) < 0 ? NAN : dial;
}

/* The ordinary line of the output with both its scatter and what the budgets say. */
static fl_line output_line(const fl_run_result *run) {
	fl_line line = run->line;
	line.slope += 1.0;
	line.var_intercept += run->line_shared.var_intercept;
	line.var_slope += run->line_shared.var_slope;
	line.cov += run->line_shared.cov;
	return line;
}

/* Scatter about the line with its n - 2 degrees of freedom, and the budgets: JCGM 100 G.4. */
static bool sum_of_inverse(const work *w, const fl_inverse *scatter, const fl_line *shared, double slope,
                           fl_budget_sum *sum) {
	double ignored, u_line;
	fl_numeric_line_at(shared, scatter->x, &ignored, &u_line);
	fl_budget_term terms[2] = {{scatter->u, 1.0, (double)shared->dof}, {u_line / fabs(slope), 1.0, INFINITY}};
	return fl_numeric_budget(terms, 2, w->result->coverage_probability, sum, NULL) >= 0;
}

bool fl_analysis_true_value(const work *w, const fl_run_result *run, double shown_x, fl_true_value *out) {
	fl_line ordinary = run->line, both = output_line(run);
	ordinary.slope += 1.0;
	fl_inverse scatter, all;
	fl_budget_sum sum;
	double probability = w->result->coverage_probability;
	if (fl_numeric_inverse(&ordinary, shown_x, 1, probability, &scatter, NULL) < 0 ||
	    fl_numeric_inverse_known(&both, shown_x, ordinary.s, probability, &all, NULL) < 0 ||
	    !sum_of_inverse(w, &scatter, &run->line_shared, ordinary.slope, &sum))
		return false;
	out->value = dial_at(w, scatter.x);
	out->g = fmax(scatter.g, all.g);
	out->fieller = out->g >= poor_slope;
	out->bounded = scatter.bounded && all.bounded;
	double low = scatter.x - sum.expanded, high = scatter.x + sum.expanded;
	if (out->fieller) {
		low = fmin(low, fmin(scatter.low, all.low));
		high = fmax(high, fmax(scatter.high, all.high));
	}
	out->low = dial_at(w, low);
	out->high = dial_at(w, high);
	out->u = (dial_at(w, scatter.x + sum.uc) - dial_at(w, scatter.x - sum.uc)) / 2.0;
	out->coverage_factor = sum.coverage_factor;
	out->dof = sum.dof_effective;
	out->U = sum.coverage_factor * out->u;
	return isfinite(out->value);
}

static void take_true_values(const work *w, fl_run_result *run, const line_points *l) {
	dial_mark marks[FL_TRUE_VALUES];
	dial_marks(w, marks);
	for (int i = 0; i < FL_TRUE_VALUES; i++) {
		fl_true_value value = {.name = marks[i].name, .shown = marks[i].dial};
		double x = dial_to_x(w, marks[i].dial);
		if (isnan(x) || !fl_analysis_true_value(w, run, x, &value))
			continue;
		value.outside = x < l->x[0] || x > l->x[l->n - 1];
		run->true_values[run->true_value_count++] = value;
	}
}

/* ---- the whole ---- */

fl_status fl_analysis_general(work *w, fl_run_result *run, fl_error *err) {
	line_points l;
	fl_status status = fl_analysis_covariances(w, run, err);
	run->general.ratio = NAN;
	run->general.why = "no line is determined";
	if (status < 0 || !run->has_line)
		return status;
	if (!collect(w, run, &l))
		return fl_fail(err, FL_E_MEMORY, "out of memory for the line");
	take_shared(run, &l);
	status = take_general(w, run, &l, err);
	for (fl_pass pass = FL_PASS_RISING; pass <= FL_PASS_FALLING && status >= 0; pass++)
		status = take_pass(w, run, pass, err);
	if (status < 0 || l.n < 3)
		return status;
	status = take_places(w, run, &l, err);
	if (status >= 0)
		take_true_values(w, run, &l);
	return status;
}
