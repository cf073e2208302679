/* tests/analysis/test_explain.c - every number of a point explained: recomputed here from the inputs that it names.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "demo.h"

static fl_explanation explain(bench *b, const fl_point_result *point, fl_arena *arena) {
	fl_explanation e;
	assert_true(fl_analysis_explain(&b->session, &b->procedure, &b->stock, &b->result, FL_RUN_AS_FOUND, point, arena,
	                                &e, &b->err) >= 0);
	for (size_t i = 0; i < e.count; i++) {
		assert_true(e.numbers[i].formula[0] != '\0');
		assert_true(e.numbers[i].source[0] != '\0');
	}
	return e;
}

static const fl_explained *number(const fl_explanation *e, const char *name) {
	for (size_t i = 0; i < e->count; i++)
		if (strcmp(e->numbers[i].name, name) == 0)
			return &e->numbers[i];
	print_error("no number %s\n", name);
	assert_true(false);
	return NULL;
}

static double input(const fl_explained *n, const char *name) {
	for (size_t i = 0; i < n->input_count; i++)
		if (strncmp(n->inputs[i].name, name, strlen(name)) == 0)
			return n->inputs[i].value;
	print_error("%s has no input %s\n", n->name, name);
	assert_true(false);
	return NAN;
}

static void the_chain_of_an_oil(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	load(&b, "asfound_2026.csv", "S26F");
	const fl_run_result *run = bench_assess(&b);
	const fl_point_result *point = &run->combined[5];
	fl_explanation e = explain(&b, point, &arena);
	const fl_explained *mu = number(&e, "dynamic viscosity"), *eq = number(&e, "equivalent viscosity");
	const fl_explained *x = number(&e, "place on the scale"), *ideal = number(&e, "ideal output");
	const fl_explained *error = number(&e, "error"), *U = number(&e, "expanded uncertainty");
	check_close("mu", input(mu, "ν") * input(mu, "ρ") / 1000.0, mu->value, 1e-12);
	check_close("equivalent", 1000.0 * input(eq, "µ") / input(eq, "ρ_dial"), eq->value, 1e-5);
	check_close("x", 100.0 * (input(x, "ν_eq") - input(x, "low")) / (input(x, "high") - input(x, "low")), x->value,
	            1e-9);
	check_close("ideal", input(ideal, "I₀") + input(ideal, "x") / 100.0 * 16.0, ideal->value, 1e-9);
	check_close("error", 100.0 * (input(error, "found") - input(error, "ideal")) / 16.0, error->value, 1e-9);
	check_close("U", input(U, "k") * input(U, "u"), U->value, 1e-12);
	check_near("as the result", 100.0 * point->error_span, error->value, 1e-12);
	check_near("as the result", 100.0 * point->sum.expanded, U->value, 1e-12);
	assert_string_equal(number(&e, "verdict")->words, "fail");
	assert_non_null(strstr(number(&e, "kinematic viscosity")->source, "ASTM D341"));
	fl_arena_free(&arena);
	bench_end(&b);
}

/* The sensitivities of the viscosity, by moving one certified value and the temperature. */
static void sensitivities_are_slopes(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	double nu[4], c[3] = {0};
	for (int moved = 0; moved < 4; moved++) {
		bench_begin(&b);
		b.oil_points[4][1].nu_m2_s *= moved == 1 ? 1.0 + 1e-5 : 1.0;
		b.oil_points[4][2].nu_m2_s *= moved == 2 ? 1.0 + 1e-5 : 1.0;
		bench_oil(&b, 1, FL_PASS_RISING, 4, 18.0, moved == 3 ? 43.701 : 43.7);
		const fl_run_result *run = bench_assess(&b);
		fl_explanation e = explain(&b, &run->points[0], &arena);
		const fl_explained *n = number(&e, "kinematic viscosity");
		nu[moved] = n->value;
		for (int i = 0; moved == 0 && i < 3; i++)
			c[i] = n->inputs[i].sensitivity;
		bench_end(&b);
	}
	check_close("ν₁", (nu[1] - nu[0]) / (49.2e-5), c[1], 1e-4);
	check_close("ν₂", (nu[2] - nu[0]) / (21.9e-5), c[2], 1e-4);
	check_close("T", (nu[3] - nu[0]) / 0.001, c[0], 1e-4);
	fl_arena_free(&arena);
}

static void zero_and_pressure(void **state) {
	(void)state;
	static bench b;
	fl_arena arena = {0};
	load(&b, "asfound_2026.csv", "S26F");
	const fl_run_result *run = bench_assess(&b);
	fl_explanation e = explain(&b, &run->points[0], &arena);
	check_near("ideal at the zero", 4.0, number(&e, "ideal output")->value, 0.0);
	bench_end(&b);
	bench_begin_pressure(&b);
	bench_dp(&b, 1, FL_PASS_RISING, 0, 8.0, 2500.0);
	run = bench_assess(&b);
	e = explain(&b, &run->points[0], &arena);
	check_near("x", 25.0, number(&e, "place on the scale")->value, 1e-12);
	fl_arena_free(&arena);
	bench_end(&b);
}

/* Two significant digits, half to even; 0.0996 does not become 0.100; what is stated is never 5 % smaller than U
 * (ILAC-P14:09/2020 5.3, JCGM 100:2008 7.2.6). */
static void rounding(void **state) {
	(void)state;
	static const struct {
		double u, value;
		int decimals;
	} cases[] = {{0.3579, 0.36, 2}, {0.0996, 0.10, 2},  {0.105, 0.10, 2},
	             {0.115, 0.12, 2},  {123.4, 120.0, -1}, {28.05, 28.0, 0}};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		fl_rounded_u r = fl_analysis_round_u(cases[i].u);
		check_near("value", cases[i].value, r.value, 1e-9);
		assert_true(r.value >= 0.95 * cases[i].u);
	}
	check_near("none", 0.0, fl_analysis_round_u(NAN).value, 0.0);
}

/* Every contribution says what it is: source, rule, key; the shares add up to one. */
static void budgets_are_complete(void **state) {
	(void)state;
	static bench b;
	load(&b, "asfound_2026.csv", "S26F");
	const fl_run_result *run = bench_assess(&b);
	for (size_t p = 0; p < run->combined_count; p++) {
		double share = 0.0;
		for (size_t i = 0; i < run->combined[p].budget_count; i++) {
			const fl_budget_line *line = &run->combined[p].budget[i];
			assert_true(line->source[0] && line->rule[0] && line->key[0] && line->stated[0]);
			share += line->share;
		}
		check_near("shares", 1.0, share, 1e-12);
	}
	bench_end(&b);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(the_chain_of_an_oil),  cmocka_unit_test(sensitivities_are_slopes),
	    cmocka_unit_test(zero_and_pressure),    cmocka_unit_test(rounding),
	    cmocka_unit_test(budgets_are_complete),
	};
	return cmocka_run_group_tests_name("explanations", tests, NULL, NULL);
}
