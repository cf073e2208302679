/* cause/fit.c - faults fitted to the rows: Gauss-Newton, Gaussian priors, bounds by an active set.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Minimises (e - f(t))' V^-1 (e - f(t)) + sum (t_j / prior_j)^2 with t_j >= least_j. Amounts are counted in prior
 * standard deviations, so that the normal matrix is A'A + 1 and never singular. A. Tarantola, Inverse Problem Theory
 * (2005), ch. 3; bounds as in Lawson and Hanson, Solving Least Squares Problems, ch. 23.
 */
#include "cause_private.h"

#include <string.h>

enum { TURNS = 12, CHANGES_OF_BOUNDS = 64, HALVINGS = 10 };

/* A step that the physics' own rounding does not show in, in prior standard deviations. */
static const double step = 1e-3;
/* A column below this effect (fraction of span for one prior standard deviation) holds nothing of its fault. */
static const double least_effect = 1e-6;

static fl_status allocate(const fl_search *s, fl_fit *fit, fl_error *err) {
	size_t n = fit->n;
	fit->A = fl_arena_alloc(s->arena, n * FL_FAULT_COUNT + 1, sizeof(double));
	fit->S = fl_arena_alloc(s->arena, n * FL_FAULT_COUNT + 1, sizeof(double));
	fit->covariance = fl_arena_alloc(s->arena, (size_t)FL_FAULT_COUNT * FL_FAULT_COUNT, sizeof(double));
	fit->unbounded = fl_arena_alloc(s->arena, (size_t)FL_FAULT_COUNT * FL_FAULT_COUNT, sizeof(double));
	fit->fitted = fl_arena_alloc(s->arena, n + 1, sizeof(double));
	if (!fit->A || !fit->S || !fit->covariance || !fit->unbounded || !fit->fitted)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a fit of %zu rows", n);
	return FL_OK;
}

/* Effect of one prior standard deviation of a fault on every row, about `at`. */
static fl_status derive(const fl_search *s, const fl_faults *at, fl_fault fault, double *column, fl_error *err) {
	fl_faults up = *at, down = *at;
	double size = fl_cause_fault(fault)->prior * step;
	bool bounded = fl_cause_fault(fault)->least == 0.0;
	up.amount[fault] += size;
	if (!bounded || at->amount[fault] > size)
		down.amount[fault] -= size;
	double steps = (up.amount[fault] - down.amount[fault]) / fl_cause_fault(fault)->prior;
	for (size_t i = 0; i < s->row_count; i++) {
		double high, low;
		TRY(fl_cause_predict(&s->model, &s->rows[i].at, &up, &high, err));
		TRY(fl_cause_predict(&s->model, &s->rows[i].at, &down, &low, err));
		column[i] = (high - low) / steps;
	}
	return FL_OK;
}

static double largest(const double *v, size_t n) {
	double most = 0.0;
	for (size_t i = 0; i < n; i++)
		most = fmax(most, fabs(v[i]));
	return most;
}

/* Which faults the rows hold something of. */
static fl_status choose_columns(const fl_search *s, const bool use[FL_FAULT_COUNT], fl_fit *fit, fl_error *err) {
	double column[FL_CAUSE_ROWS];
	for (fl_fault fault = 0; fault < FL_FAULT_COUNT; fault++) {
		if (!use[fault])
			continue;
		TRY(derive(s, &fit->faults, fault, column, err));
		if (largest(column, s->row_count) > least_effect)
			fit->columns[fit->p++] = fault;
	}
	return FL_OK;
}

static fl_status linearise(const fl_search *s, const double *L, fl_fit *fit, fl_error *err) {
	double column[FL_CAUSE_ROWS];
	for (size_t j = 0; j < fit->p; j++) {
		TRY(derive(s, &fit->faults, fit->columns[j], column, err));
		for (size_t i = 0; i < fit->n; i++)
			fit->S[i * fit->p + j] = column[i];
		fl_cause_forward(L, fit->n, column);
		for (size_t i = 0; i < fit->n; i++)
			fit->A[i * fit->p + j] = column[i];
	}
	for (size_t i = 0; i < fit->n; i++)
		TRY(fl_cause_predict(&s->model, &s->rows[i].at, &fit->faults, &fit->fitted[i], err));
	return FL_OK;
}

static double unit_of(const fl_fit *fit, size_t j) {
	return fl_cause_fault(fit->columns[j])->prior;
}

/* ---- the quadratic problem of one turn: min t'Ht/2 - b't with t_j >= least_j ---- */

typedef struct quadratic {
	size_t p;
	double H[FL_FAULT_COUNT * FL_FAULT_COUNT], b[FL_FAULT_COUNT], least[FL_FAULT_COUNT];
	double t[FL_FAULT_COUNT];
	bool held[FL_FAULT_COUNT];
} quadratic;

/* Solves for the free ones with the held ones at their bounds. */
static bool solve_free(const quadratic *q, double *t) {
	double H[FL_FAULT_COUNT * FL_FAULT_COUNT], b[FL_FAULT_COUNT];
	size_t free_of[FL_FAULT_COUNT], m = 0;
	for (size_t j = 0; j < q->p; j++) {
		t[j] = q->held[j] ? q->least[j] : 0.0;
		if (!q->held[j])
			free_of[m++] = j;
	}
	for (size_t i = 0; i < m; i++) {
		b[i] = q->b[free_of[i]];
		for (size_t j = 0; j < q->p; j++)
			b[i] -= q->held[j] ? q->H[free_of[i] * q->p + j] * t[j] : 0.0;
		for (size_t j = 0; j < m; j++)
			H[i * m + j] = q->H[free_of[i] * q->p + free_of[j]];
	}
	if (!fl_cause_cholesky(H, m))
		return false;
	fl_cause_forward(H, m, b);
	fl_cause_back(H, m, b);
	for (size_t i = 0; i < m; i++)
		t[free_of[i]] = b[i];
	return true;
}

/* The held one that pulls hardest away from its bound; p if none does. */
static size_t pulling(const quadratic *q) {
	size_t worst = q->p;
	double most = 0.0;
	for (size_t j = 0; j < q->p; j++) {
		double pull = q->b[j], size = fabs(q->b[j]);
		for (size_t k = 0; k < q->p; k++) {
			pull -= q->H[j * q->p + k] * q->t[k];
			size = fmax(size, fabs(q->H[j * q->p + k] * q->t[k]));
		}
		if (q->held[j] && pull > most && pull > 1e-9 * fmax(size, 1.0)) {
			most = pull;
			worst = j;
		}
	}
	return worst;
}

/* Goes from q->t towards `wanted` as far as the bounds let it, and holds what met its bound; true if it went all the
 * way. */
static bool approach(quadratic *q, const double *wanted) {
	double share = 1.0;
	for (size_t j = 0; j < q->p; j++)
		if (!q->held[j] && wanted[j] < q->least[j])
			share = fmin(share, (q->t[j] - q->least[j]) / (q->t[j] - wanted[j]));
	for (size_t j = 0; j < q->p; j++) {
		if (q->held[j])
			continue;
		bool meets = wanted[j] < q->least[j] && (q->t[j] - q->least[j]) <= share * (q->t[j] - wanted[j]);
		q->t[j] = meets ? q->least[j] : q->t[j] + share * (wanted[j] - q->t[j]);
		q->held[j] = meets;
	}
	return share >= 1.0;
}

/* Active set from a feasible point: every step lowers the sum, so no set of bounds comes twice (Lawson & Hanson,
 * Solving Least Squares Problems, 1974, ch. 23). */
static bool solve_bounded(quadratic *q) {
	double wanted[FL_FAULT_COUNT];
	for (int change = 0; change < CHANGES_OF_BOUNDS; change++) {
		if (!solve_free(q, wanted))
			return false;
		if (!approach(q, wanted))
			continue;
		size_t next = pulling(q);
		if (next == q->p)
			return true;
		q->held[next] = false;
	}
	return true; /* feasible, and as low as so many changes bring it */
}

/* H = A'A + 1, b = A'r with r = L^-1 (e - f) + A t_now. */
static void set_up(const fl_search *s, const double *L, const fl_fit *fit, quadratic *q) {
	double r[FL_CAUSE_ROWS];
	size_t p = fit->p;
	*q = (quadratic){.p = p};
	for (size_t i = 0; i < fit->n; i++)
		r[i] = s->rows[i].value - fit->fitted[i];
	fl_cause_forward(L, fit->n, r);
	for (size_t i = 0; i < fit->n; i++)
		for (size_t j = 0; j < p; j++) {
			fl_fault fault = fit->columns[j];
			r[i] += fit->A[i * p + j] * (fit->faults.amount[fault] - s->start.amount[fault]) / unit_of(fit, j);
		}
	for (size_t j = 0; j < p; j++) {
		q->least[j] = fl_cause_fault(fit->columns[j])->least / unit_of(fit, j);
		q->held[j] = fit->at_bound[j];
		fl_fault fault = fit->columns[j];
		double now = (fit->faults.amount[fault] - s->start.amount[fault]) / unit_of(fit, j);
		q->t[j] = q->held[j] ? q->least[j] : fmax(now, q->least[j]);
		for (size_t i = 0; i < fit->n; i++)
			q->b[j] += fit->A[i * p + j] * r[i];
		for (size_t k = 0; k < p; k++) {
			double sum = j == k ? 1.0 : 0.0;
			for (size_t i = 0; i < fit->n; i++)
				sum += fit->A[i * p + j] * fit->A[i * p + k];
			q->H[j * p + k] = sum;
		}
	}
}

/* A step back into what the physics can bear: no deposit that closes the bore, no pump that stands. */
static double bearable(fl_fault fault, double amount) {
	double limit = fault == FL_FAULT_TEMPERATURE ? 3.0 : fault == FL_FAULT_COLUMN ? 2.0 : 0.6;
	return fmax(-limit, fmin(limit, amount));
}

static double take_step(const fl_search *s, const quadratic *q, fl_fit *fit) {
	double moved = 0.0;
	for (size_t j = 0; j < fit->p; j++) {
		fl_fault fault = fit->columns[j];
		double next = bearable(fault, s->start.amount[fault] + q->t[j] * unit_of(fit, j));
		moved = fmax(moved, fabs(next - fit->faults.amount[fault]) / unit_of(fit, j));
		fit->faults.amount[fault] = next;
		fit->at_bound[j] = q->held[j];
	}
	return moved;
}

/* ---- what is left over ---- */

/* Covariance of the free ones, and the degrees of freedom that the priors leave: rows minus sum (1 - c_jj). */
static bool take_covariance(const quadratic *q, fl_fit *fit) {
	double H[FL_FAULT_COUNT * FL_FAULT_COUNT], inverse[FL_FAULT_COUNT * FL_FAULT_COUNT];
	size_t free_of[FL_FAULT_COUNT], m = 0, p = fit->p;
	for (size_t j = 0; j < p; j++)
		if (!fit->at_bound[j])
			free_of[m++] = j;
	for (size_t i = 0; i < m; i++)
		for (size_t j = 0; j < m; j++)
			H[i * m + j] = q->H[free_of[i] * p + free_of[j]];
	if (!fl_cause_invert(H, m, inverse))
		return false;
	memcpy(H, q->H, p * p * sizeof(double));
	if (!fl_cause_invert(H, p, fit->unbounded))
		return false;
	memset(fit->covariance, 0, p * p * sizeof(double));
	fit->dof = (double)fit->n;
	for (size_t i = 0; i < m; i++) {
		fit->dof -= 1.0 - inverse[i * m + i];
		for (size_t j = 0; j < m; j++)
			fit->covariance[free_of[i] * p + free_of[j]] = inverse[i * m + j];
	}
	return true;
}

static void take_chi(const fl_search *s, const double *L, fl_fit *fit) {
	double r[FL_CAUSE_ROWS];
	for (size_t i = 0; i < fit->n; i++)
		r[i] = s->rows[i].value - fit->fitted[i];
	fl_cause_forward(L, fit->n, r);
	fit->chi_data = 0.0;
	for (size_t i = 0; i < fit->n; i++)
		fit->chi_data += r[i] * r[i];
	fit->chi_total = fit->chi_data;
	for (size_t j = 0; j < fit->p; j++) {
		fl_fault fault = fit->columns[j];
		double t = (fit->faults.amount[fault] - s->start.amount[fault]) / unit_of(fit, j);
		fit->chi_total += t * t;
	}
}

static fl_status predict_rows(const fl_search *s, fl_fit *fit, fl_error *err) {
	for (size_t i = 0; i < fit->n; i++)
		TRY(fl_cause_predict(&s->model, &s->rows[i].at, &fit->faults, &fit->fitted[i], err));
	return FL_OK;
}

/* The straightened problem's answer, or as much of the way to it as makes things better. */
static fl_status step_down(const fl_search *s, const double *L, const quadratic *q, fl_fit *fit, double *moved,
                           fl_error *err) {
	fl_faults before = fit->faults;
	take_chi(s, L, fit);
	double now = fit->chi_total;
	*moved = take_step(s, q, fit);
	fl_faults whole = fit->faults;
	for (int halving = 0;; halving++) {
		TRY(predict_rows(s, fit, err));
		take_chi(s, L, fit);
		if (fit->chi_total <= now + 1e-9 * fmax(now, 1.0) || halving == HALVINGS)
			return FL_OK;
		*moved /= 2.0;
		for (size_t j = 0; j < fit->p; j++) {
			fl_fault fault = fit->columns[j];
			double share = ldexp(1.0, -(halving + 1));
			fit->faults.amount[fault] = before.amount[fault] + share * (whole.amount[fault] - before.amount[fault]);
			fit->at_bound[j] = fit->at_bound[j] && fit->faults.amount[fault] == q->least[j] * unit_of(fit, j);
		}
	}
}

static fl_status iterate(const fl_search *s, const double *L, fl_fit *fit, fl_error *err) {
	quadratic q;
	double moved = INFINITY;
	for (int turn = 0; turn < TURNS && moved > 1e-5; turn++) {
		TRY(linearise(s, L, fit, err));
		set_up(s, L, fit, &q);
		if (!solve_bounded(&q))
			return fl_fail(err, FL_E_NUMERIC, "the faults could not be fitted: a signature is not a number");
		TRY(step_down(s, L, &q, fit, &moved, err));
	}
	TRY(linearise(s, L, fit, err));
	set_up(s, L, fit, &q);
	if (!take_covariance(&q, fit))
		return fl_fail(err, FL_E_NUMERIC, "the faults could not be fitted: a signature is not a number");
	take_chi(s, L, fit);
	return FL_OK;
}

fl_status fl_cause_fit(const fl_search *s, const bool use[FL_FAULT_COUNT], fl_fit *out, fl_error *err) {
	fl_fit fit = {.n = s->row_count, .faults = s->start};
	double *L = fl_arena_alloc(s->arena, fit.n * fit.n + 1, sizeof *L);
	if (!L)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a fit of %zu rows", fit.n);
	memcpy(L, s->V, fit.n * fit.n * sizeof *L);
	if (!fl_cause_cholesky(L, fit.n))
		return fl_fail(err, FL_E_NUMERIC, "the uncertainties of the points do not form a covariance");
	TRY(allocate(s, &fit, err));
	TRY(choose_columns(s, use, &fit, err));
	TRY(iterate(s, L, &fit, err));
	*out = fit;
	return FL_OK;
}
