/* cause/noise.c - how far the rows may stray together and each for itself.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * From the budgets of the analysis: what shares a thermometer or a meter moves together; half of an oil certificate's
 * variance is its issuer's and moves all oils, half is the lot's own; bath and interpolation belong to the oil, in both
 * passes alike (common practice, no source). Scatter comes from the means of the cycles, pooled over all rows, because
 * the readings of one stop share its oil and its filling. A stop may be as far from rest as the procedure lets it.
 */
#include "cause_private.h"

#include <string.h>

typedef enum sharing { OF_ALL, OF_OILS, HALF_OF_OILS, OF_THE_OIL, OF_NONE, COUNTED_ELSEWHERE } sharing;

/* Budget lines by the beginning of their name; unknown ones (the procedure's own) are shared by all. */
static const struct {
	const char *begins;
	sharing how;
} lines[] = {
    {"repeatability", COUNTED_ELSEWHERE},
    {"half the hysteresis", COUNTED_ELSEWHERE},
    {"oil ", HALF_OF_OILS},
    {"viscosity between", OF_THE_OIL},
    {"bath", OF_THE_OIL},
    {"thermometer", OF_OILS},
};

static sharing sharing_of(const fl_budget_line *line) {
	if (strstr(line->name, "resolution"))
		return OF_NONE;
	for (size_t i = 0; i < sizeof lines / sizeof lines[0]; i++)
		if (strncmp(line->name, lines[i].begins, strlen(lines[i].begins)) == 0)
			return lines[i].how;
	return OF_ALL;
}

static const fl_budget_line *same_line(const fl_row_data *row, const fl_budget_line *line) {
	for (size_t i = 0; row->found && i < row->found->budget_count; i++)
		if (strcmp(row->found->budget[i].name, line->name) == 0)
			return &row->found->budget[i];
	return NULL;
}

/* The share of both rows' variance in one line that is common to them. */
static double common_share(const fl_row_data *a, const fl_row_data *b, sharing how) {
	bool one_oil = a->point == b->point;
	switch (how) {
	case OF_ALL:
	case OF_OILS:
		return 1.0;
	case HALF_OF_OILS:
		return one_oil ? 1.0 : a->at.oil && b->at.oil && strcmp(a->at.oil->issuer, b->at.oil->issuer) == 0 ? 0.5 : 0.0;
	case OF_THE_OIL:
		return one_oil ? 1.0 : 0.0;
	case OF_NONE:
	case COUNTED_ELSEWHERE:
		break;
	}
	return 0.0;
}

static double systematic(const fl_row_data *a, const fl_row_data *b) {
	double sum = 0.0;
	for (size_t i = 0; a->found && i < a->found->budget_count; i++) {
		const fl_budget_line *line = &a->found->budget[i];
		const fl_budget_line *other = same_line(b, line);
		sharing how = sharing_of(line);
		if (!other || how == COUNTED_ELSEWHERE)
			continue;
		double share = a == b ? 1.0 : common_share(a, b, how);
		sum += share * line->contribution_span * other->contribution_span;
	}
	return sum;
}

/* ---- scatter ---- */

/* Without any scatter known a reading is taken as good as the display of a usual meter; common practice, no source. */
static const double least_scatter_span = 1e-4;

static double pool_cycles(const fl_search *s, bool stopped) {
	double sum_sq = 0.0, dof = 0.0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		const fl_row_data *row = &s->rows[i];
		double mean = 0.0;
		if ((row->at.kind == FL_ROW_STOPPED) != stopped)
			continue;
		for (int c = 0; c < FL_CAUSE_CYCLES; c++)
			mean += row->cycle_n[c] ? row->cycle_mean[c] / (double)row->cycles : 0.0;
		for (int c = 0; c < FL_CAUSE_CYCLES; c++)
			if (row->cycle_n[c])
				sum_sq += (row->cycle_mean[c] - mean) * (row->cycle_mean[c] - mean);
		dof += row->cycles ? (double)row->cycles - 1.0 : 0.0;
	}
	return dof > 0.0 ? sqrt(sum_sq / dof) : NAN;
}

/* One cycle only: the scatter of single readings must do. */
static double pool_readings(const fl_search *s, bool stopped) {
	double sum_sq = 0.0, dof = 0.0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		const fl_point_result *found = s->rows[i].found;
		bool other = (s->rows[i].at.kind == FL_ROW_STOPPED) != stopped;
		if (other || !found || found->n < 2 || isnan(found->s_span))
			continue;
		sum_sq += ((double)found->n - 1.0) * found->s_span * found->s_span;
		dof += (double)found->n - 1.0;
	}
	return dof > 0.0 ? sqrt(sum_sq / dof) : 0.0;
}

static double pooled(const fl_search *s, bool stopped) {
	double of_cycles = pool_cycles(s, stopped);
	return fmax(isnan(of_cycles) ? pool_readings(s, stopped) : of_cycles, least_scatter_span);
}

static double own_variance(const fl_search *s, const fl_row_data *row) {
	double scatter = row->at.kind == FL_ROW_STOPPED ? s->stopped_scatter_u : s->scatter_u;
	double drift = s->procedure->settle.drift_pct_span / 100.0;
	double unsettled = isfinite(drift) && row->at.kind == FL_ROW_OIL ? drift / 2.0 / sqrt(3.0) : 0.0;
	double stops = row->cycles ? (double)row->cycles : 1.0;
	return (scatter * scatter + unsettled * unsettled) / stops;
}

fl_status fl_cause_take_noise(fl_search *s, fl_error *err) {
	size_t n = s->row_count;
	s->scatter_u = pooled(s, false);
	s->stopped_scatter_u = pooled(s, true);
	s->V = fl_arena_alloc(s->arena, n * n + 1, sizeof *s->V);
	if (!s->V)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the covariance of %zu rows", n);
	for (size_t i = 0; i < n; i++)
		for (size_t j = 0; j < n; j++) {
			const fl_row_data *a = &s->rows[i], *b = &s->rows[j];
			bool extra = i >= s->reading_rows || j >= s->reading_rows;
			double v = extra ? 0.0 : systematic(a, b);
			if (i == j)
				v += extra ? a->u_extra * a->u_extra : own_variance(s, a);
			s->V[i * n + j] = v;
		}
	return FL_OK;
}
