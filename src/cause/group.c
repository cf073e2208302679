/* cause/group.c - which faults the readings can tell apart, and which of them they speak for.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Two faults belong to one group when their whitened columns point the same way (|cos| > 0.98: turned by less than
 * 12 degrees), or when what the one does can be had from the other in the fit (posterior correlation of the groups'
 * effects above 0.95). Within a group a fault stays possible while it alone does nearly as well as the best one.
 */
#include "cause_private.h"

#include <string.h>

static const double same_direction = 0.98, same_effect = 0.95;
static const double possible_penalty = 9.0; /* three standard deviations */
static const double least_p = 0.01, needed_z = 1.0;

/* ---- which faults to try ---- */

static size_t running_places(const fl_search *s) {
	size_t places = 0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		bool seen = s->rows[i].at.kind == FL_ROW_STOPPED;
		for (size_t j = 0; j < i; j++)
			seen = seen || s->rows[j].point == s->rows[i].point;
		places += !seen;
	}
	return places;
}

static bool both_passes(const fl_search *s) {
	bool rising = false, falling = false;
	for (size_t i = 0; i < s->reading_rows; i++) {
		bool running = s->rows[i].at.kind != FL_ROW_STOPPED;
		rising = rising || (running && s->rows[i].pass == FL_PASS_RISING);
		falling = falling || (running && s->rows[i].pass == FL_PASS_FALLING);
	}
	return rising && falling;
}

/* With two places a bend is not to be seen, with one pass nothing that depends on the way there. */
static void choose_faults(const fl_search *s, bool use[FL_FAULT_COUNT]) {
	bool bend = running_places(s) >= 3, way = both_passes(s);
	for (fl_fault fault = 0; fault < FL_FAULT_COUNT; fault++)
		use[fault] = true;
	use[FL_FAULT_CURVATURE] = use[FL_FAULT_COUPLING] = use[FL_FAULT_LIMIT] = bend;
	use[FL_FAULT_LAG] = use[FL_FAULT_CARRY_OVER] = way;
	use[FL_FAULT_AIR] = s->noisy;
	use[FL_FAULT_KINETIC] = s->instrument->has_geometry;
	use[FL_FAULT_LINE] = true;
}

/* ---- grouping ---- */

static double cosine(const fl_fit *fit, size_t a, size_t b) {
	double ab = 0.0, aa = 0.0, bb = 0.0;
	for (size_t i = 0; i < fit->n; i++) {
		double va = fit->A[i * fit->p + a], vb = fit->A[i * fit->p + b];
		ab += va * vb;
		aa += va * va;
		bb += vb * vb;
	}
	return ab / sqrt(aa * bb);
}

static void rename_group(int *group, size_t p, int from, int to) {
	for (size_t j = 0; j < p; j++)
		if (group[j] == from)
			group[j] = to;
}

static void group_by_direction(const fl_fit *fit, int *group) {
	for (size_t j = 0; j < fit->p; j++)
		group[j] = fl_cause_fault(fit->columns[j])->healthy ? -1 : (int)j;
	for (size_t a = 0; a < fit->p; a++)
		for (size_t b = a + 1; b < fit->p; b++)
			if (group[a] >= 0 && group[b] >= 0 && fabs(cosine(fit, a, b)) > same_direction)
				rename_group(group, fit->p, group[b], group[a]);
}

/* What a group can do to a row, as a vector over the columns: zero outside the group. */
static void effect_vector(const fl_fit *fit, const int *group, int g, size_t row, double *v) {
	for (size_t j = 0; j < fit->p; j++)
		v[j] = group[j] == g ? fit->S[row * fit->p + j] : 0.0;
}

static double quadratic_form(const double *C, size_t p, const double *a, const double *b) {
	double sum = 0.0;
	for (size_t i = 0; i < p; i++)
		for (size_t j = 0; j < p; j++)
			sum += a[i] * C[i * p + j] * b[j];
	return sum;
}

/* The reading's row that a group moves most. */
static size_t strongest_row(const fl_search *s, const fl_fit *fit, const int *group, int g) {
	size_t best = 0;
	double most = -1.0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		double sum = 0.0;
		for (size_t j = 0; j < fit->p; j++)
			sum += group[j] == g ? fabs(fit->S[i * fit->p + j]) : 0.0;
		if (sum > most) {
			most = sum;
			best = i;
		}
	}
	return best;
}

static double effect_correlation(const fl_search *s, const fl_fit *fit, const int *group, int a, int b) {
	double va[FL_FAULT_COUNT], vb[FL_FAULT_COUNT];
	effect_vector(fit, group, a, strongest_row(s, fit, group, a), va);
	effect_vector(fit, group, b, strongest_row(s, fit, group, b), vb);
	const double *C = fit->unbounded; /* a bound that holds now hides what could stand in for what */
	double uu = quadratic_form(C, fit->p, va, va) * quadratic_form(C, fit->p, vb, vb);
	return uu > 0.0 ? quadratic_form(C, fit->p, va, vb) / sqrt(uu) : 0.0;
}

static bool merge_correlated(const fl_search *s, const fl_fit *fit, int *group) {
	for (size_t a = 0; a < fit->p; a++)
		for (size_t b = a + 1; b < fit->p; b++) {
			bool apart = group[a] >= 0 && group[b] >= 0 && group[a] != group[b];
			if (!apart || fabs(effect_correlation(s, fit, group, group[a], group[b])) <= same_effect)
				continue;
			rename_group(group, fit->p, group[b], group[a]);
			return true;
		}
	return false;
}

/* Groups numbered 0, 1, ... in the order of their first fault. */
static int number_groups(const fl_fit *fit, int *group) {
	int number[FL_FAULT_COUNT], next = 0;
	for (size_t j = 0; j < fit->p; j++)
		number[j] = -1;
	for (size_t j = 0; j < fit->p; j++) {
		if (group[j] < 0)
			continue;
		if (number[group[j]] < 0)
			number[group[j]] = next++;
		group[j] = number[group[j]];
	}
	return next;
}

/* ---- what a group does ---- */

double fl_cause_alone(const fl_search *s, const fl_row_data *row, fl_fault fault, double effect_span) {
	const fl_fault_kind *kind = fl_cause_fault(fault);
	fl_faults at = s->start;
	double base, now, near, size = kind->prior * 1e-3, amount = 0.0;
	if (fl_cause_predict(&s->model, &row->at, &at, &base, NULL) < 0)
		return NAN;
	for (int turn = 0; turn < 40; turn++) {
		at.amount[fault] = s->start.amount[fault] + amount;
		fl_status status = fl_cause_predict(&s->model, &row->at, &at, &now, NULL);
		at.amount[fault] += size;
		if (status < 0 || fl_cause_predict(&s->model, &row->at, &at, &near, NULL) < 0)
			return NAN;
		if (near == now) { /* not yet where the fault begins to be seen */
			amount += 0.02 * kind->prior;
			continue;
		}
		double change = (base + effect_span - now) * size / (near - now);
		amount += change;
		if (fabs(change) < 1e-9 * kind->prior)
			break;
	}
	at.amount[fault] = s->start.amount[fault] + amount;
	bool reached = fl_cause_predict(&s->model, &row->at, &at, &now, NULL) >= 0 && fabs(base + effect_span - now) < 1e-6;
	return isfinite(amount) && reached && amount >= kind->least - 1e-9 ? amount : NAN;
}

/* Effect of the group's faults together, the physics run with and without them. */
static fl_status take_effect(const fl_search *s, const fl_fit *fit, const int *group, int g, fl_cause_group *out,
                             fl_error *err) {
	fl_faults without = fit->faults;
	double v[FL_FAULT_COUNT];
	for (size_t j = 0; j < fit->p; j++)
		if (group[j] == g)
			without.amount[fit->columns[j]] = s->start.amount[fit->columns[j]];
	out->largest_row = 0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		double rest;
		TRY(fl_cause_predict(&s->model, &s->rows[i].at, &without, &rest, err));
		if (fabs(fit->fitted[i] - rest) > fabs(out->effect_span)) {
			out->effect_span = fit->fitted[i] - rest;
			out->largest_row = (int)i;
		}
	}
	effect_vector(fit, group, g, (size_t)out->largest_row, v);
	out->u_effect_span = sqrt(quadratic_form(fit->covariance, fit->p, v, v));
	return FL_OK;
}

static bool of_the_way(fl_fault fault) {
	return fault == FL_FAULT_LAG || fault == FL_FAULT_CARRY_OVER;
}

/* Larger than what would be overlooked without harm: U there, a quarter of the tolerance. What depends on the way is
 * held to half the hysteresis limit, because the budget's common part falls out between the passes. */
static bool is_material(const fl_search *s, const fl_cause_group *g) {
	bool way = true;
	for (size_t i = 0; i < g->member_count; i++)
		way = way && of_the_way(g->members[i].fault);
	double limit = s->result->hysteresis_limit_span;
	if (way)
		return fabs(g->effect_span) > (isnan(limit) ? 0.0025 : limit / 2.0);
	const fl_point_result *found = s->rows[g->largest_row].found;
	double U = found && isfinite(found->sum.expanded) ? found->sum.expanded : 0.0;
	return fabs(g->effect_span) > fmax(U, fl_cause_tolerance(s) / 4.0);
}

/* ---- which member ---- */

static fl_status chi_with(const fl_search *s, const bool use[FL_FAULT_COUNT], const fl_cause_group *g, size_t keep,
                          double *chi, fl_error *err) {
	bool some[FL_FAULT_COUNT];
	fl_fit fit;
	memcpy(some, use, sizeof some);
	for (size_t i = 0; i < g->member_count; i++)
		some[g->members[i].fault] = i == keep;
	TRY(fl_cause_fit(s, some, &fit, err));
	*chi = fit.chi_total;
	return FL_OK;
}

static fl_status judge_members(const fl_search *s, const bool use[FL_FAULT_COUNT], double chi_all, fl_cause_group *g,
                               fl_error *err) {
	double best = INFINITY, without;
	for (size_t i = 0; i < g->member_count; i++) {
		fl_cause_member *m = &g->members[i];
		TRY(chi_with(s, use, g, i, &m->penalty, err));
		m->alone = fl_cause_alone(s, &s->rows[g->largest_row], m->fault, g->effect_span);
		if (!isnan(m->alone))
			best = fmin(best, m->penalty);
	}
	g->several = isfinite(best) && best - chi_all > possible_penalty;
	for (size_t i = 0; i < g->member_count; i++) {
		fl_cause_member *m = &g->members[i];
		m->penalty = isnan(m->alone) || !isfinite(best) ? INFINITY : m->penalty - best;
		m->possible = m->penalty <= possible_penalty || (g->several && isfinite(m->penalty));
		g->possible_count += m->possible;
	}
	TRY(chi_with(s, use, g, g->member_count, &without, err));
	g->z = sqrt(fmax(0.0, without - chi_all));
	return FL_OK;
}

/* ---- what would split it ---- */

static bool has_possible(const fl_cause_group *g, fl_fault fault) {
	for (size_t i = 0; i < g->member_count; i++)
		if (g->members[i].fault == fault)
			return g->members[i].possible;
	return false;
}

/* How many of the group's possible faults each measurement sees. */
static size_t seen_by(const fl_cause_group *g, fl_split split) {
	switch (split) {
	case FL_SPLIT_INJECT:
		return (size_t)has_possible(g, FL_FAULT_ZERO) + has_possible(g, FL_FAULT_SPAN) +
		       has_possible(g, FL_FAULT_CURVATURE) + has_possible(g, FL_FAULT_LIMIT);
	case FL_SPLIT_SPEED:
		return has_possible(g, FL_FAULT_SPEED);
	case FL_SPLIT_VOLUME:
		return (size_t)has_possible(g, FL_FAULT_SLIP) + has_possible(g, FL_FAULT_SPEED) + has_possible(g, FL_FAULT_AIR);
	case FL_SPLIT_FLUSH:
		return has_possible(g, FL_FAULT_CARRY_OVER);
	case FL_SPLIT_THERMOMETER:
		return has_possible(g, FL_FAULT_TEMPERATURE);
	case FL_SPLIT_PAPERS:
		return has_possible(g, FL_FAULT_DENSITY);
	case FL_SPLIT_COUNT:
		break;
	}
	return 0;
}

static bool is_made(const fl_search *s, fl_split split) {
	const fl_cause_extra *e = &s->extra;
	return (split == FL_SPLIT_INJECT && e->injection_count >= 2) ||
	       (split == FL_SPLIT_SPEED && !isnan(e->pump_speed_rev_s)) ||
	       (split == FL_SPLIT_VOLUME && !isnan(e->flow_m3_s)) ||
	       (split == FL_SPLIT_THERMOMETER && !isnan(e->temp_difference_k)) ||
	       (split == FL_SPLIT_PAPERS && !isnan(e->dial_density_kg_m3));
}

static void find_splits(const fl_search *s, fl_cause_group *g) {
	for (fl_split split = 0; split < FL_SPLIT_COUNT; split++) {
		size_t seen = seen_by(g, split);
		if (seen > 0 && seen < g->possible_count && !is_made(s, split))
			g->splits[g->split_count++] = split;
	}
}

/* ---- handing out ---- */

static void give_rows(fl_search *s, const fl_fit *fit) {
	for (size_t i = 0; i < s->row_count; i++) {
		fl_cause_row *row = &s->out->rows[i];
		row->explained = fit->fitted[i];
		for (size_t j = 0; j < fit->p; j++)
			row->signature[fit->columns[j]] = fit->S[i * fit->p + j];
	}
}

static void give_estimates(fl_search *s, const fl_fit *fit, const int *group) {
	for (fl_fault fault = 0; fault < FL_FAULT_COUNT; fault++)
		s->out->estimates[fault] = (fl_cause_estimate){.fault = fault, .amount = NAN, .u = NAN, .group = -1};
	for (size_t j = 0; j < fit->p; j++) {
		fl_cause_estimate *e = &s->out->estimates[fit->columns[j]];
		e->fitted = true;
		e->at_bound = fit->at_bound[j];
		e->amount = fit->faults.amount[fit->columns[j]];
		e->u = sqrt(fit->covariance[j * fit->p + j]) * fl_cause_fault(fit->columns[j])->prior;
		e->group = group[j];
	}
}

/* The largest eigenvalue of a positive definite matrix, by power iteration. */
static double largest_eigenvalue(const double *M, size_t p) {
	double v[FL_FAULT_COUNT], next[FL_FAULT_COUNT], norm = 1.0;
	for (size_t j = 0; j < p; j++)
		v[j] = 1.0 + 0.01 * (double)j;
	for (int turn = 0; turn < 200; turn++) {
		norm = 0.0;
		for (size_t j = 0; j < p; j++) {
			next[j] = 0.0;
			for (size_t k = 0; k < p; k++)
				next[j] += M[j * p + k] * v[k];
			norm += next[j] * next[j];
		}
		norm = sqrt(norm);
		for (size_t j = 0; j < p; j++)
			v[j] = next[j] / norm;
	}
	return norm;
}

/* Square root of the ratio of the extreme eigenvalues of A'A + 1; its inverse is at hand. */
static double condition_of(const fl_fit *fit) {
	size_t p = fit->p;
	double H[FL_FAULT_COUNT * FL_FAULT_COUNT] = {0};
	if (p == 0)
		return NAN;
	for (size_t j = 0; j < p; j++)
		for (size_t k = 0; k < p; k++) {
			H[j * p + k] = j == k ? 1.0 : 0.0;
			for (size_t i = 0; i < fit->n; i++)
				H[j * p + k] += fit->A[i * p + j] * fit->A[i * p + k];
		}
	return sqrt(largest_eigenvalue(H, p) * largest_eigenvalue(fit->unbounded, p));
}

static fl_status give_groups(fl_search *s, const bool use[FL_FAULT_COUNT], const fl_fit *fit, const int *group,
                             int count, fl_error *err) {
	fl_cause *out = s->out;
	out->group_count = 0;
	out->groups = fl_arena_alloc(s->arena, (size_t)count + 1, sizeof *out->groups);
	if (!out->groups)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %d groups", count);
	for (int g = 0; g < count; g++) {
		fl_cause_group *to = &out->groups[out->group_count++];
		for (size_t j = 0; j < fit->p; j++)
			if (group[j] == g)
				to->members[to->member_count++].fault = fit->columns[j];
		TRY(take_effect(s, fit, group, g, to, err));
		to->material = is_material(s, to);
		TRY(judge_members(s, use, fit->chi_total, to, err));
		find_splits(s, to);
	}
	return FL_OK;
}

/* A group that takes a share of the errors without being needed for it: the others do as well without. */
static bool leave_out_idle(const fl_cause *out, bool use[FL_FAULT_COUNT]) {
	bool any = false;
	for (size_t g = 0; g < out->group_count; g++) {
		const fl_cause_group *group = &out->groups[g];
		if (!group->material || group->z >= needed_z)
			continue;
		any = true;
		for (size_t i = 0; i < group->member_count; i++)
			use[group->members[i].fault] = false;
	}
	return any;
}

static fl_status attribute_to(fl_search *s, const bool use[FL_FAULT_COUNT], fl_error *err) {
	fl_fit *fit = &s->fit;
	fl_cause *out = s->out;
	TRY(fl_cause_fit(s, use, fit, err));
	group_by_direction(fit, s->group);
	while (merge_correlated(s, fit, s->group))
		continue;
	int count = number_groups(fit, s->group);
	give_rows(s, fit);
	give_estimates(s, fit, s->group);
	out->chi_squared = fit->chi_data;
	out->dof = fit->dof;
	out->p = fl_numeric_chi_squared_tail(fit->chi_data, fit->dof);
	out->explained = !(out->p < least_p);
	out->condition = condition_of(fit);
	return give_groups(s, use, fit, s->group, count, err);
}

fl_status fl_cause_attribute(fl_search *s, fl_error *err) {
	bool use[FL_FAULT_COUNT];
	choose_faults(s, use);
	TRY(attribute_to(s, use, err));
	for (int turn = 0; turn < 3 && s->out->explained && leave_out_idle(s->out, use); turn++)
		TRY(attribute_to(s, use, err));
	return FL_OK;
}
