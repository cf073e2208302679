/* tests/cause/truth.h - simulated sessions with a known truth: pump, capillary and transmitter computed here by hand,
 * apart from the code under test, with noise from a fixed seed.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The bench (oils, equipment, instrument) is the invented one of tests/analysis/bench.h.
 */
#ifndef FOUNDLEFT_TEST_TRUTH_H
#define FOUNDLEFT_TEST_TRUTH_H

#include "../analysis/bench.h"
#include "foundleft/cause.h"

#include <stdlib.h>

/* What is wrong. All zero: a healthy instrument. */
typedef struct truth {
	unsigned long long seed;
	double zero, span, curvature;     /* fractions of span; curvature at mid-scale */
	double deposit, slip, speed;      /* fractions; slip: extra k R */
	double particle_mm;               /* at half bore */
	double density;                   /* the dial is divided for so much more than stated, fraction */
	double warmer_k;                  /* oil warmer than the thermometer says */
	double column_m;                  /* of 850 kg/m3 */
	double clip;                      /* output can't pass this fraction of span while running; 0: no clip */
	double lag, carry;                /* share of the step missing; share of the oil before */
	double friction;                  /* output stays behind by so much, rising and falling */
	double reading_noise, stop_noise; /* fraction of span; 0: 0.0003 and 0.0002 */
	double line_pa, line_per_10_bar;
	int cycles; /* 0: 3 */
	bool rising_only;
	int oils[BENCH_OILS], oil_count; /* which oils are truly in the bottles; count 0: as labelled */
} truth;

static unsigned long long truth_state;

static inline double truth_uniform(void) {
	truth_state ^= truth_state << 13;
	truth_state ^= truth_state >> 7;
	truth_state ^= truth_state << 17;
	return (double)(truth_state >> 11) / 9007199254740992.0;
}

static inline double truth_normal(double s) {
	double u = truth_uniform() + 1e-300, v = truth_uniform();
	return s * sqrt(-2.0 * log(u)) * cos(6.283185307179586 * v);
}

/* Pressure of the capillary: 128 mu (L + n d/2) Q / (pi d^4) + m rho v^2, flow by the leaking pump. */
static inline double truth_dp(const truth *t, double mu, double rho) {
	const double pi = 3.14159265358979323846, L = 0.4, n = 1.178, m = 1.12, d0 = 2.2e-3;
	double d = d0 * (1.0 - t->deposit), q0 = 1e-6 * (1.0 + t->speed), q = q0, dp = 0.0;
	double leak = (0.005 + t->slip) / (128.0 * L / (pi * pow(d0, 4)));
	double l = t->particle_mm * 1e-3, narrowing = 16.0;
	for (int turn = 0; turn < 60; turn++) {
		double v = 4.0 * q / (pi * d * d), per_m = 128.0 * mu * q / (pi * pow(d, 4));
		dp = per_m * (L + n * d / 2.0) + m * rho * v * v;
		dp += per_m * l * (narrowing - 1.0) + 0.5 * 1.5 * rho * v * v * narrowing * t->particle_mm;
		q = q0 - leak * dp / mu;
	}
	return dp;
}

/* Viscosity of an oil with a share of another in it: Walther's function, both above 0.7 mm2/s by far. */
static inline double truth_mix(double nu_a, double nu_b, double share) {
	double wa = log(log(nu_a * 1e6 + 0.7)), wb = log(log(nu_b * 1e6 + 0.7));
	return (exp(exp((1.0 - share) * wa + share * wb)) - 0.7) * 1e-6;
}

static inline int truth_oil(const truth *t, int point) {
	return t->oil_count ? t->oils[point] : point;
}

static inline fl_oil_state truth_state_of(const bench *b, int oil, double temp_c) {
	fl_oil_state state;
	fl_error err = {0};
	assert_true(fl_physics_oil_at(&b->oils[oil].table, temp_c, &state, &err) >= 0);
	return state;
}

/* Output fraction with `oil` in the rig; before: the oil before, -1 for none. */
static inline double truth_output(const bench *b, const truth *t, int oil, int before, double temp_c) {
	truth sound = {0};
	fl_oil_state state = truth_state_of(b, oil, temp_c);
	double nu = state.nu_m2_s, rho = state.rho_kg_m3;
	if (before >= 0 && before != oil && t->carry > 0.0) {
		fl_oil_state other = truth_state_of(b, before, temp_c);
		nu = truth_mix(nu, other.nu_m2_s, t->carry);
		rho += t->carry * (other.rho_kg_m3 - rho);
	}
	double full = truth_dp(&sound, 50e-6 * 900.0, 900.0);
	double y = truth_dp(t, nu * rho, rho) / full;
	double x = state.mu_pa_s / 900.0 / 50e-6;
	y += x * (1.0 / (1.0 + t->density) - 1.0);
	y = t->zero + (1.0 + t->span) * y + 4.0 * t->curvature * x * (1.0 - x);
	y += t->column_m * 850.0 * 9.80665 / full + t->line_per_10_bar * t->line_pa / 1e6;
	return t->clip > 0.0 ? fmin(y, t->clip) : y;
}

static inline double truth_stopped(const truth *t) {
	truth sound = {0};
	double full = truth_dp(&sound, 50e-6 * 900.0, 900.0);
	return t->zero + t->column_m * 850.0 * 9.80665 / full + t->line_per_10_bar * t->line_pa / 1e6;
}

static inline void truth_stop(bench *b, const truth *t, int cycle, fl_pass pass, int point, double y) {
	double stop = truth_normal(t->stop_noise > 0.0 ? t->stop_noise : 2e-4);
	double rn = t->reading_noise > 0.0 ? t->reading_noise : 3e-4;
	int oil = point >= 0 ? truth_oil(t, point) : -1;
	for (int i = 0; i < 3; i++) {
		double temp_c = 40.0 + truth_normal(0.03), drift = 0.0;
		if (oil >= 0)
			drift = truth_output(b, t, oil, -1, temp_c + t->warmer_k) - truth_output(b, t, oil, -1, 40.0 + t->warmer_k);
		double noise = point >= 0 ? truth_normal(rn) + stop : truth_normal(1e-4);
		double out = 4.0 + 16.0 * (y + drift + noise);
		fl_reading *r = bench_oil(b, cycle, pass, point, round(out * 1e3) / 1e3, round(temp_c * 100.0) / 100.0);
		r->has_line = t->line_pa > 0.0;
		r->line_pa = t->line_pa;
	}
}

static inline void truth_pass(bench *b, const truth *t, int cycle, fl_pass pass, double *y_before, int *oil_before) {
	for (int k = 0; k < (int)b->session.point_count; k++) {
		int point = pass == FL_PASS_RISING ? k : (int)b->session.point_count - 1 - k;
		int oil = truth_oil(t, point);
		double y = truth_output(b, t, oil, *oil_before, 40.0 + t->warmer_k);
		double shown = y - t->lag * (y - *y_before);
		shown += pass == FL_PASS_RISING ? -t->friction : t->friction;
		if (pass == FL_PASS_FALLING && k == 0)
			shown = y + (t->friction > 0.0 ? -t->friction : 0.0); /* stayed where it was */
		truth_stop(b, t, cycle, pass, point, shown);
		*y_before = y;
		*oil_before = oil;
	}
}

/* A whole as-found run by this truth. */
static inline void truth_session(bench *b, const truth *t) {
	double y = 0.0;
	int oil = -1, cycles = t->cycles ? t->cycles : 3;
	bench_begin(b);
	truth_state = t->seed * 2654435761ull + 88172645463325252ull;
	for (int i = 0; i < 20; i++)
		(void)truth_uniform();
	for (int cycle = 1; cycle <= cycles; cycle++) {
		truth_stop(b, t, cycle, FL_PASS_RISING, FL_POINT_ZERO, truth_stopped(t));
		y = truth_stopped(t);
		truth_pass(b, t, cycle, FL_PASS_RISING, &y, &oil);
		if (!t->rising_only) {
			truth_pass(b, t, cycle, FL_PASS_FALLING, &y, &oil);
			truth_stop(b, t, cycle, FL_PASS_FALLING, FL_POINT_ZERO, truth_stopped(t));
		}
	}
}

/* The search over the session as it stands; extra may be NULL. To be freed with fl_cause_free. */
static inline fl_cause truth_search(bench *b, const fl_cause_extra *extra) {
	fl_cause cause;
	bench_assess(b);
	fl_status status =
	    fl_cause_find(&b->session, &b->procedure, &b->stock, &b->result, FL_RUN_AS_FOUND, extra, NULL, &cause, &b->err);
	if (status < 0)
		print_error("%s: %s\n", b->err.field, b->err.message);
	assert_true(status >= 0);
	return cause;
}

static inline void truth_print(const fl_cause *c, unsigned long long seed) {
	fprintf(stderr, "seed %llu: chi-squared %.2f, %.2f degrees of freedom, p %.3g, condition %.3g\n", seed,
	        c->chi_squared, c->dof, c->p, c->condition);
	for (size_t i = 0; i < c->finding_count; i++) {
		const fl_finding *f = &c->findings[i];
		fprintf(stderr, "  %s [%s, z %.1f]\n    %s\n    %s\n    %s\n", f->id, fl_cause_strength_word(f->strength), f->z,
		        f->sentence, f->advice, f->reason);
	}
	for (size_t g = 0; g < c->group_count; g++) {
		const fl_cause_group *group = &c->groups[g];
		fprintf(stderr, "  group %zu: effect %+.3f %% +- %.3f z %.1f%s:", g, 100.0 * group->effect_span,
		        100.0 * group->u_effect_span, group->z, group->material ? " material" : "");
		for (size_t i = 0; i < group->member_count; i++)
			fprintf(stderr, " %s(%.4g, +%.1f%s)", fl_cause_fault(group->members[i].fault)->word,
			        group->members[i].alone, group->members[i].penalty, group->members[i].possible ? "" : ", no");
		fprintf(stderr, "\n");
	}
}

/* Fails with everything that was found and the seed. */
#define truth_check(cause, seed, condition)                                         \
	do {                                                                            \
		if (!(condition)) {                                                         \
			truth_print(cause, seed);                                               \
			fprintf(stderr, "%s:%d: not so: %s\n", __FILE__, __LINE__, #condition); \
			_fail(__FILE__, __LINE__);                                              \
		}                                                                           \
	} while (0)

static inline const fl_finding *truth_finding(const fl_cause *c, const char *id) {
	for (size_t i = 0; i < c->finding_count; i++)
		if (strncmp(c->findings[i].id, id, strlen(id)) == 0)
			return &c->findings[i];
	return NULL;
}

/* The group that holds this fault; NULL if it was not fitted. */
static inline const fl_cause_group *truth_group(const fl_cause *c, fl_fault fault) {
	int g = c->estimates[fault].group;
	return g < 0 ? NULL : &c->groups[g];
}

static inline const fl_cause_member *truth_member(const fl_cause *c, fl_fault fault) {
	const fl_cause_group *g = truth_group(c, fault);
	for (size_t i = 0; g && i < g->member_count; i++)
		if (g->members[i].fault == fault)
			return &g->members[i];
	return NULL;
}

/* Is any cause, group or instruction named? */
static inline size_t truth_named(const fl_cause *c) {
	size_t n = 0;
	for (size_t i = 0; i < c->finding_count; i++)
		n += c->findings[i].kind == FL_FINDING_CAUSE || c->findings[i].kind == FL_FINDING_GROUP;
	return n;
}

#endif
