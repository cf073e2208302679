/* test_procedure.c - the templates that come with the program, and what the reader makes of one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"
#include "foundleft/document.h"
#include "foundleft/procedure.h"

#include <dirent.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static fl_procedure procedure;

static void load(const char *path) {
	fl_error err = {0};
	char line[1200];
	if (fl_procedure_load(fl_io_system(), path, &procedure, &err) != FL_OK)
		fail_msg("%s", fl_error_line(&err, line, sizeof line));
}

static int free_procedure(void **state) {
	(void)state;
	fl_procedure_free(&procedure);
	return 0;
}

static const fl_question *question(const fl_question *list, int count, const char *id) {
	for (int i = 0; i < count; i++)
		if (strcmp(list[i].id, id) == 0)
			return &list[i];
	fail_msg("no question %s", id);
	return NULL;
}

/* Every file in templates/ loads, is named after its id, and stops nobody from seeing the usual cautions. */
static void every_template_loads(void **state) {
	(void)state;
	struct dirent **entries;
	int found = scandir(SOURCE_DIR "/templates", &entries, NULL, alphasort), loaded = 0;
	assert_true(found > 0);
	for (int i = 0; i < found; i++) {
		const char *name = entries[i]->d_name;
		if (strlen(name) > 5 && strcmp(name + strlen(name) - 5, ".yaml") == 0) {
			char path[1024];
			snprintf(path, sizeof path, SOURCE_DIR "/templates/%s", name);
			load(path);
			assert_int_equal(0, strncmp(name, procedure.id, strlen(procedure.id)));
			assert_non_null(strstr(question(procedure.gates, procedure.gate_count, "permit")->caution,
			                       "Local rules and licensed practice decide"));
			assert_true(procedure.restore_count >= 3);
			fl_procedure_free(&procedure);
			loaded++;
		}
		free(entries[i]);
	}
	free(entries);
	assert_true(loaded >= 3);
}

static void reads_the_workshop_calibration(void **state) {
	(void)state;
	load(SOURCE_DIR "/templates/workshop-calibration.yaml");
	assert_string_equal("workshop-calibration", procedure.id);
	assert_string_equal("1.0", procedure.version);
	assert_int_equal(FL_MEDIUM_OIL, procedure.medium);
	assert_true(procedure.stopped_zero && procedure.falling);
	assert_int_equal(5, procedure.point_count);
	assert_int_equal(3, procedure.cycles);
	assert_int_equal(3, procedure.readings);
	check_near("bath", 40.0, procedure.bath_c, 0);
	check_near("drift", 0.10, procedure.settle.drift_pct_span, 1e-12);
	check_near("window", 90.0, procedure.settle.window_s, 0);
	assert_int_equal(FL_RULE_FOUR_STATES, procedure.rule);
	assert_int_equal(FL_BAND_PERCENT_SPAN, procedure.tolerance.basis);
	check_near("tolerance", 2.0, procedure.tolerance.half_width, 0);
	check_near("adjust limit", 1.5, procedure.adjust_limit.half_width, 0);
	check_near("hysteresis limit", 0.5, procedure.hysteresis_limit_pct_span, 0);
	assert_true(isnan(procedure.linearity_limit_pct_span));
	check_near("coverage", 0.9545, procedure.coverage_probability, 1e-12);
	check_near("interpolation", 0.0005, procedure.oil_interpolation_half_width_rel, 1e-15);
	check_near("ageing", 0.001, procedure.oil_ageing_per_year_rel, 1e-15);
	check_near("TUR", 1.5, procedure.minimum_tur, 0);
	assert_int_equal(0, procedure.extra_count);
	assert_int_equal(1 << FL_PART_PERFORMED | 1 << FL_PART_AUTHORISED, procedure.signatures);
}

static void reads_gates_and_conditions(void **state) {
	(void)state;
	load(SOURCE_DIR "/templates/workshop-calibration.yaml");
	const fl_question *cooled = question(procedure.gates, procedure.gate_count, "fuel-cooled");
	assert_int_equal(FL_ASK_AMOUNT, cooled->kind);
	assert_int_equal(FL_U_CELSIUS, cooled->unit);
	check_near("opened at most at", 60.0, cooled->possible_high, 0);
	const fl_question *released = question(procedure.gates, procedure.gate_count, "line-pressure-released");
	assert_true(isinf(released->possible_low) && released->possible_low < 0);
	check_near("bar", 0.2, released->possible_high, 1e-12);
	const fl_question *frequency = question(procedure.conditions, procedure.condition_count, "supply-frequency");
	assert_true(frequency->required);
	check_near("plausible", 61.0, frequency->plausible_high, 0);
	assert_false(question(procedure.conditions, procedure.condition_count, "ambient-humidity")->required);
	for (int i = 0; i < procedure.gate_count; i++)
		assert_false(procedure.gates[i].may_decline);
	for (int i = 0; i < procedure.restore_count; i++)
		assert_true(procedure.restore[i].kind == FL_ASK_CONFIRM && procedure.restore[i].may_decline);
}

static void reads_the_other_templates(void **state) {
	(void)state;
	load(SOURCE_DIR "/templates/shipboard-check.yaml");
	assert_int_equal(3, procedure.point_count);
	assert_int_equal(1, procedure.cycles);
	assert_int_equal(FL_RULE_SIMPLE, procedure.rule);
	assert_int_equal(1, procedure.extra_count);
	assert_int_equal(FL_DIST_NORMAL, procedure.extra[0].distribution);
	check_near("k", 2.0, procedure.extra[0].coverage, 0);
	check_near("value", 0.10, procedure.extra[0].value, 0);
	fl_procedure_free(&procedure);
	load(SOURCE_DIR "/templates/transmitter-alone.yaml");
	assert_int_equal(FL_MEDIUM_PRESSURE, procedure.medium);
	assert_false(procedure.stopped_zero);
	assert_true(isnan(procedure.bath_c) && isinf(procedure.settle.temp_k_per_min));
	for (int i = 0; i < procedure.point_count; i++)
		check_near("position", 25.0 * i, procedure.points[i].position_pct_span, 0);
	assert_int_equal(FL_RULE_GUARDED, procedure.rule);
	assert_int_equal(FL_LINEARITY_TERMINAL, procedure.deciding_linearity);
}

/* The shipboard check with `more` at its top: fields in any order. */
static fl_status load_with(const char *more, fl_error *err) {
	static char text[32768];
	fl_procedure plain = {0};
	assert_int_equal(FL_OK,
	                 fl_procedure_load(fl_io_system(), SOURCE_DIR "/templates/shipboard-check.yaml", &plain, err));
	const char *least = strstr(plain.text, "minimum TUR: 1.5");
	assert_non_null(least);
	snprintf(text, sizeof text, "%s%.*s%s", more, (int)(least - plain.text), plain.text,
	         least + strlen("minimum TUR: 1.5"));
	fl_procedure_free(&plain);
	return fl_procedure_parse(text, "input.yaml", &procedure, err);
}

static void reads_zones_risks_and_lines(void **state) {
	(void)state;
	fl_error err = {0};
	assert_int_equal(FL_OK, load_with("", &err));
	check_near("least ratio where none is stated", 1.5, procedure.minimum_tur, 0);
	assert_false(procedure.states_below_tur || procedure.budget_on_certificate || procedure.reliability_observed);
	check_near("no prior", 0.0, procedure.reliability, 0);
	check_near("fully correlated", 0.0, procedure.oil_own_share, 0);
	assert_int_equal(FL_LINE_BY_RATIO, procedure.line);
	assert_int_equal(0, procedure.zone_count);
	assert_true(procedure.extra[0].own);
	fl_procedure_free(&procedure);
	assert_int_equal(FL_OK, load_with("tolerance zones:\n"
	                                  "  - {from: 20 % of span, to: 36 %, band: 1.0 % of span}\n"
	                                  "  - {from: 36 % of span, to: 50 % of span, band: 3 % of reading}\n"
	                                  "minimum TUR: 2\nconformity below minimum TUR: state\n"
	                                  "in-tolerance reliability: {share: 95 %, of: observed values}\n"
	                                  "line: generalised\noil certificates correlated: 0.8\n"
	                                  "budget on certificate: yes\n",
	                                  &err));
	assert_int_equal(2, procedure.zone_count);
	check_near("from", 20.0, procedure.zones[0].from_pct_span, 0);
	check_near("to", 36.0, procedure.zones[0].to_pct_span, 0);
	check_near("band", 1.0, procedure.zones[0].band.half_width, 0);
	assert_int_equal(FL_BAND_PERCENT_READING, procedure.zones[1].band.basis);
	check_near("least ratio", 2.0, procedure.minimum_tur, 0);
	assert_true(procedure.states_below_tur && procedure.budget_on_certificate && procedure.reliability_observed);
	check_near("prior", 0.95, procedure.reliability, 1e-12);
	check_near("own share", 0.2, procedure.oil_own_share, 1e-12);
	assert_int_equal(FL_LINE_GENERAL, procedure.line);
}

/* Each with a part of the line that it must get. */
static void refuses_zones_and_risks_that_make_no_sense(void **state) {
	(void)state;
	static const char *const cases[][2] = {
	    {"tolerance zones: [{from: 20 % of span, to: 36 % of span, band: 1 % of span}, {from: 30 % of span, to: 40 % "
	     "of "
	     "span, band: 1 % of span}]\n",
	     "before the zone above it ends"},
	    {"tolerance zones: [{from: 36 % of span, to: 20 % of span, band: 1 % of span}]\n", "where it begins"},
	    {"tolerance zones: [{from: 20 mm2/s, to: 36 % of span, band: 1 % of span}]\n", "write it in % of span"},
	    {"tolerance zones: [{from: 20 % of span, to: 36 % of span, band: 1 %}]\n", "of what"},
	    {"tolerance zones: [{from: 20 % of span, to: 360 % of span, band: 1 % of span}]\n", "not on the scale"},
	    {"in-tolerance reliability: {share: 95 %}\n", "of"},
	    {"in-tolerance reliability: {share: 195 %, of: true values}\n", "share"},
	    {"conformity below minimum TUR: perhaps\n", "conformity below minimum TUR"},
	    {"oil certificates correlated: 2\n", "oil certificates correlated"},
	    {"line: best\n", "line"},
	};
	for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
		fl_error err = {0};
		char line[1400];
		assert_true(load_with(cases[i][0], &err) < 0);
		fl_error_line(&err, line, sizeof line);
		if (!strstr(line, cases[i][1]) || !strstr(line, "input.yaml:1:"))
			fail_msg("\"%s\" does not say \"%s\" at line 1", line, cases[i][1]);
	}
}

static void its_text_reads_the_same_again(void **state) {
	(void)state;
	load(SOURCE_DIR "/templates/workshop-calibration.yaml");
	fl_procedure again = {0};
	assert_int_equal(FL_OK, fl_procedure_parse(procedure.text, "journal", &again, NULL));
	assert_string_equal(procedure.text, again.text);
	assert_string_equal(procedure.method, again.method);
	assert_int_equal(procedure.point_count, again.point_count);
	assert_memory_equal(procedure.points, again.points, (size_t)again.point_count * sizeof again.points[0]);
	assert_int_equal(procedure.condition_count, again.condition_count);
	check_near("drift", procedure.settle.drift_pct_span, again.settle.drift_pct_span, 0);
	fl_procedure_free(&again);
}

static void has_words_for_rules_and_linearities(void **state) {
	(void)state;
	assert_non_null(strstr(fl_procedure_rule_words(FL_RULE_NONE), "No decision rule was agreed"));
	for (int rule = FL_RULE_SIMPLE; rule <= FL_RULE_FOUR_STATES; rule++)
		assert_non_null(strstr(fl_procedure_rule_words((fl_rule)rule), "ILAC-G8:09/2019"));
	assert_string_equal("terminal-based", fl_procedure_linearity_word(FL_LINEARITY_TERMINAL));
}

static void refuses_a_file_that_is_not_there(void **state) {
	(void)state;
	fl_error err = {0};
	assert_int_equal(FL_E_NOT_FOUND, fl_procedure_load(fl_io_system(), "/nonexistent/p.yaml", &procedure, &err));
	assert_null(procedure.id);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test_teardown(every_template_loads, free_procedure),
	    cmocka_unit_test_teardown(reads_the_workshop_calibration, free_procedure),
	    cmocka_unit_test_teardown(reads_gates_and_conditions, free_procedure),
	    cmocka_unit_test_teardown(reads_the_other_templates, free_procedure),
	    cmocka_unit_test_teardown(reads_zones_risks_and_lines, free_procedure),
	    cmocka_unit_test(refuses_zones_and_risks_that_make_no_sense),
	    cmocka_unit_test_teardown(its_text_reads_the_same_again, free_procedure),
	    cmocka_unit_test_teardown(has_words_for_rules_and_linearities, free_procedure),
	    cmocka_unit_test_teardown(refuses_a_file_that_is_not_there, free_procedure),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
