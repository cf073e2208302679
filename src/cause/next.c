/* cause/next.c - the oil and temperature that would tell most: less uncertainty of what was found, or a split of its
 * group.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A further reading with signature s and uncertainty u takes C to C - C s s'C / (u^2 + s'C s), whatever it will read
 * (G. Box and H. Lucas, Design of experiments in non-linear situations, Biometrika 46, 1959).
 */
#include "cause_private.h"

#include <string.h>

static const double temp_step_k = 5.0, coldest_c = 20.0, hottest_c = 100.0;
static const double lowest_x = 0.02, highest_x = 1.0;
/* A point splits a group when it halves what is not known of the difference. */
static const double split_share = 0.5;

typedef struct question {
	size_t p;
	double C[FL_FAULT_COUNT * FL_FAULT_COUNT];
	double effect[FL_FAULT_COUNT];     /* the group's effect at its largest row */
	double difference[FL_FAULT_COUNT]; /* of its two likeliest members there */
	bool has_difference;
} question;

static double form(const question *q, const double *a, const double *b) {
	double sum = 0.0;
	for (size_t i = 0; i < q->p; i++)
		for (size_t j = 0; j < q->p; j++)
			sum += a[i] * q->C[i * q->p + j] * b[j];
	return sum;
}

/* Variance of v once a reading with signature `s` is there. */
static double variance_after(const question *q, const double *v, const double *s, double u) {
	double vs = form(q, v, s);
	return form(q, v, v) - vs * vs / (u * u + form(q, s, s));
}

/* Index of the group that matters: material, and the least certain. */
static int group_of_interest(const fl_cause *out) {
	int best = -1;
	for (size_t g = 0; g < out->group_count; g++) {
		const fl_cause_group *group = &out->groups[g];
		if (group->material && group->possible_count &&
		    (best < 0 || group->u_effect_span > out->groups[best].u_effect_span))
			best = (int)g;
	}
	return best;
}

static void likeliest(const fl_cause_group *g, fl_fault *first, fl_fault *second) {
	double best = INFINITY, next = INFINITY;
	*first = *second = FL_FAULT_COUNT;
	for (size_t i = 0; i < g->member_count; i++) {
		const fl_cause_member *m = &g->members[i];
		if (!m->possible)
			continue;
		if (m->penalty < best) {
			next = best;
			*second = *first;
			best = m->penalty;
			*first = m->fault;
		} else if (m->penalty < next) {
			next = m->penalty;
			*second = m->fault;
		}
	}
}

static bool ask(const fl_search *s, int g, question *q) {
	const fl_fit *fit = &s->fit;
	const fl_cause_group *group = &s->out->groups[g];
	double H[FL_FAULT_COUNT * FL_FAULT_COUNT];
	fl_fault first, second;
	memset(q, 0, sizeof *q);
	q->p = fit->p;
	likeliest(group, &first, &second);
	q->has_difference = second != FL_FAULT_COUNT;
	for (size_t j = 0; j < q->p; j++) {
		double at_row = fit->S[(size_t)group->largest_row * q->p + j];
		q->effect[j] = s->group[j] == g ? at_row : 0.0;
		q->difference[j] = fit->columns[j] == first ? at_row : fit->columns[j] == second ? -at_row : 0.0;
		for (size_t k = 0; k < q->p; k++) {
			H[j * q->p + k] = j == k ? 1.0 : 0.0;
			for (size_t i = 0; i < fit->n; i++)
				H[j * q->p + k] += fit->A[i * q->p + j] * fit->A[i * q->p + k];
		}
	}
	return fl_cause_invert(H, q->p, q->C);
}

/* What a new row there would be uncertain by: as the nearest row that was read. */
static double u_near(const fl_search *s, double x) {
	double nearest = INFINITY, u = NAN;
	for (size_t i = 0; i < s->reading_rows; i++) {
		double distance = fabs(s->rows[i].at.x - x);
		if (s->rows[i].at.kind != FL_ROW_OIL || distance >= nearest)
			continue;
		nearest = distance;
		u = sqrt(s->V[i * s->row_count + i]);
	}
	return u;
}

static bool signature_at(const fl_search *s, const fl_setting_of_row *row, double *column) {
	for (size_t j = 0; j < s->fit.p; j++) {
		fl_fault fault = s->fit.columns[j];
		fl_faults up = s->fit.faults;
		double low, high, size = fl_cause_fault(fault)->prior * 1e-3;
		up.amount[fault] += size;
		if (fl_cause_predict(&s->model, row, &s->fit.faults, &low, NULL) < 0 ||
		    fl_cause_predict(&s->model, row, &up, &high, NULL) < 0)
			return false;
		column[j] = (high - low) / 1e-3;
	}
	return true;
}

static void weigh(const fl_search *s, const question *q, const fl_oil *oil, double temp_c, fl_next_point *best) {
	fl_oil_state state;
	fl_ideal ideal;
	double column[FL_FAULT_COUNT];
	if (fl_physics_oil_at(&oil->table, temp_c, &state, NULL) != FL_OK ||
	    fl_physics_ideal(&s->instrument->scale, state.mu_pa_s, &ideal, NULL) < 0)
		return;
	fl_setting_of_row row = {.kind = FL_ROW_OIL, .oil = oil, .temp_c = temp_c, .line_pa = NAN, .x = ideal.x};
	if (ideal.x < lowest_x || ideal.x > highest_x || !signature_at(s, &row, column))
		return;
	double u = u_near(s, ideal.x);
	double effect = sqrt(fmax(0.0, variance_after(q, q->effect, column, u)));
	double split = q->has_difference ? sqrt(fmax(0.0, variance_after(q, q->difference, column, u))) : NAN;
	bool splits = q->has_difference && split < split_share * best->split_before;
	bool better = splits ? !best->splits || split < best->split_after : !best->splits && effect < best->u_after;
	if (!better)
		return;
	best->oil = oil->name;
	best->lot = oil->lot;
	best->temp_c = temp_c;
	best->x = ideal.x;
	best->u_after = effect;
	best->split_after = split;
	best->splits = splits;
	best->available = true;
}

static void weigh_shelf(const fl_search *s, const question *q, fl_next_point *best) {
	const fl_stock *shelf = s->shelf ? s->shelf : s->stock;
	for (size_t i = 0; i < shelf->oil_count; i++) {
		const fl_oil *oil = &shelf->oils[i];
		if (fl_stock_oil_in_date(oil, s->session->day, NULL) < 0)
			continue;
		for (double temp_c = coldest_c; temp_c <= hottest_c; temp_c += temp_step_k)
			weigh(s, q, oil, temp_c, best);
	}
}

fl_status fl_cause_next(fl_search *s, fl_error *err) {
	question q;
	(void)err;
	int g = group_of_interest(s->out);
	if (g < 0 || s->procedure->medium == FL_MEDIUM_PRESSURE || !ask(s, g, &q))
		return FL_OK;
	fl_next_point best = {.oil = "", .lot = ""};
	best.u_before = sqrt(form(&q, q.effect, q.effect));
	best.u_after = best.u_before;
	best.split_before = best.split_after = q.has_difference ? sqrt(form(&q, q.difference, q.difference)) : NAN;
	weigh_shelf(s, &q, &best);
	s->out->next = best;
	return FL_OK;
}
