/* analysis/covariance.c - what the combined points of a run have in common: thermometer, meter, issuer of the oils.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Lines of two budgets with the same key are one deviation. All act with the same sign at every point, so the
 * covariance of two points is the sum of the products of their contributions (JCGM 100:2008 F.1.2.3). Such parts do not
 * average out over the points.
 */
#include "work.h"

#include <math.h>
#include <string.h>

bool fl_analysis_acts_on_ideal(const fl_budget_line *line) {
	return line->on == FL_ON_PRESSURE || line->on == FL_ON_TEMPERATURE || line->on == FL_ON_VISCOSITY ||
	       line->on == FL_ON_CERTIFIED_NU || line->on == FL_ON_CERTIFIED_DENSITY;
}

static bool belongs(const fl_budget_line *line, budget_side side) {
	return side == SIDE_BOTH || (side == SIDE_IDEAL) == fl_analysis_acts_on_ideal(line);
}

static double variance(const fl_point_result *point, budget_side side) {
	double sum = 0.0;
	for (size_t i = 0; i < point->budget_count; i++)
		if (belongs(&point->budget[i], side))
			sum += point->budget[i].contribution_span * point->budget[i].contribution_span;
	return sum;
}

static double in_common(const fl_point_result *a, const fl_point_result *b, budget_side side) {
	double sum = 0.0;
	for (size_t i = 0; i < a->budget_count; i++)
		for (size_t k = 0; k < b->budget_count; k++) {
			const fl_budget_line *of_a = &a->budget[i], *of_b = &b->budget[k];
			if (of_a->shared > 0.0 && belongs(of_a, side) && strcmp(of_a->key, of_b->key) == 0)
				sum += of_a->shared * of_a->contribution_span * of_b->contribution_span;
		}
	return sum;
}

double fl_analysis_covariance(const fl_point_result *a, const fl_point_result *b, budget_side side) {
	return a == b ? variance(a, side) : in_common(a, b, side);
}

fl_status fl_analysis_covariances(const work *w, fl_run_result *run, fl_error *err) {
	size_t n = run->combined_count;
	run->covariance = fl_arena_alloc(w->arena, n * n + 1, sizeof *run->covariance);
	if (!run->covariance)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the covariance of %zu points", n);
	for (size_t i = 0; i < n; i++)
		for (size_t k = 0; k < n; k++)
			run->covariance[i * n + k] = fl_analysis_covariance(&run->combined[i], &run->combined[k], SIDE_BOTH);
	return FL_OK;
}

/* The issuers of the oils read, once each: "Lanternmoor". NULL where no two oils share one. */
static const char *shared_issuer(const work *w) {
	for (size_t i = 0; i < w->session->point_count; i++)
		for (size_t k = 0; k < i; k++) {
			const fl_oil *a = NULL, *b = NULL;
			if (fl_analysis_oil(w, (int)i, &a, NULL) < 0 || fl_analysis_oil(w, (int)k, &b, NULL) < 0 || !a || !b)
				continue;
			if (a->issuer && *a->issuer && b->issuer && strcmp(a->issuer, b->issuer) == 0)
				return a->issuer;
		}
	return NULL;
}

void fl_analysis_say_correlation(work *w) {
	const char *issuer = shared_issuer(w);
	double r = 1.0 - w->procedure->oil_own_share;
	const char *oils = issuer ? fl_arena_printf(w->arena, " and the oils' issuer, %s (correlation %s)", issuer,
	                                            fl_analysis_number(w->arena, r, 3))
	                          : "";
	w->result->correlation_words =
	    fl_arena_printf(w->arena,
	                    "What comes from %s%s is one deviation at all points and does not average out in zero and "
	                    "span error",
	                    w->procedure->medium == FL_MEDIUM_OIL ? "thermometer, meter, bath, viscosity equation"
	                                                          : "pressure standard and meter",
	                    oils ? oils : "");
}
