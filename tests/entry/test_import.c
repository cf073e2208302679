/* test_import.c - tables of readings become sessions; the invalid corpus of tables.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "talk.h"

#include <dirent.h>

static const char head[] =
    "session,date,kind,cycle,direction,reading,oil,lot,bath_C,line_bar_g,output_mA,output_bar,indicated_mm2_s\n";
/* Rows of the invented demo's as-found of 2026 (first cycle, the readings 1 and 2 of two oils). */
static const char as_found_rows[] = "S,2026-04-14,as-found,1,up,1,ZERO,,,0.95,4.025,0.2013,0.078\n"
                                    "S,2026-04-14,as-found,1,up,2,ZERO,,,1.06,4.020,0.2010,0.062\n"
                                    "S,2026-04-14,as-found,1,up,1,LK-10,2511B,39.91,0.97,7.064,0.3532,9.575\n"
                                    "S,2026-04-14,as-found,1,up,2,LK-10,2511B,40.02,1.00,7.059,0.3530,9.559\n"
                                    "S,2026-04-14,as-found,1,up,1,LK-50,2511E,40.03,0.99,19.263,0.9632,47.697\n"
                                    "S,2026-04-14,as-found,1,up,2,LK-50,2511E,\"39,91\",1.01,\"19,342\",0.9671,47.944\n"
                                    "S,2026-04-14,as-found,1,down,1,LK-50,2511E,39.98,0.98,19.296,0.9648,47.800\r\n"
                                    "S,2026-04-14,as-found,1,down,2,LK-50,2511E,40.04,1.08,19.252,0.9626,47.663\n"
                                    "S,2026-04-14,as-found,1,down,1,LK-10,2511B,40.01,0.98,7.071,0.3536,9.597\n"
                                    "S,2026-04-14,as-found,1,down,2,LK-10,2511B,40.10,0.99,7.066,0.3533,9.581\n"
                                    "S,2026-04-14,as-found,1,down,1,ZERO,,,1.03,4.016,0.2008,0.050\n"
                                    "S,2026-04-14,as-found,1,down,2,ZERO,,,1.01,4.017,0.2009,0.053\n";

static fl_status import(talk *t, const char *csv, fl_import_options options) {
	fl_day day;
	fl_entry_setup setup = t->entry->setup;
	if (!options.performed_by)
		options.performed_by = "Arvid Holm";
	fl_text_clear(&t->say);
	t->err = (fl_error){0};
	fl_status status = fl_entry_import_day(csv, "input.csv", &options, &day, &t->err);
	if (status >= 0)
		status = fl_entry_import(&setup, csv, "input.csv", &options, &t->say, &t->err);
	return status;
}

static char *joined(const char *a, const char *b, const char *c) {
	char *out = malloc(strlen(a) + strlen(b) + strlen(c) + 1);
	assert_non_null(out);
	strcat(strcat(strcpy(out, a), b), c);
	return out;
}

/* The same rows under another kind and session. */
static char *as_left_of(const char *rows) {
	char *out = calloc(1, strlen(rows) + 1), *to = out;
	assert_non_null(out);
	for (; *rows; rows++)
		if (strncmp(rows, "as-found", 8) == 0) {
			to = stpcpy(to, "as-left");
			rows += 7;
		} else {
			*to++ = *rows;
		}
	return out;
}

static void begin(talk *t, const char *folder) {
	talk_begin_as(t, folder, SMALL_PROCEDURE, "VT-1", FL_SOURCE_IMPORT);
}

static void an_as_found_table_becomes_a_closed_session(void **state) {
	talk t;
	begin(&t, *state);
	char *csv = joined(head, as_found_rows, "");
	fl_status status = import(&t, csv, (fl_import_options){.decision_reason = "inside the adjust limit"});
	if (status < 0)
		print_error("%d %s: %s\n", t.err.line, t.err.field, t.err.message);
	assert_int_equal(status, FL_OK);
	const fl_session *s = &t.journal.session;
	assert_true(s->closed);
	assert_int_equal(s->source, FL_SOURCE_IMPORT);
	assert_int_equal(s->reading_count, 12);
	assert_int_equal(s->decision, FL_DECISION_LEAVE);
	assert_string_equal(s->decision_reason, "inside the adjust limit");
	assert_string_equal(s->readings[5].typed, "19,342");
	check_near("output", 19.342, s->readings[5].output, 0.0);
	check_near("temperature", 39.91, s->readings[5].temp_c, 0.0);
	check_near("line", 101000.0, s->readings[5].line_pa, 1e-6);
	assert_true(s->readings[5].taken == INT64_MIN);
	assert_false(s->readings[0].has_temp);
	assert_string_equal(fl_session_gate(s, "isolated")->answer, "not recorded (imported)");
	assert_int_equal(s->indicative_count, 0);
	talk_says(&t, "12 readings as-found and 0 as-left");
	free(csv);
	talk_end(&t);
}

static void as_found_and_as_left_mean_adjusted(void **state) {
	talk t;
	begin(&t, *state);
	char *left = as_left_of(as_found_rows), *csv = joined(head, as_found_rows, left);
	assert_int_equal(import(&t, csv, (fl_import_options){0}), FL_OK);
	const fl_session *s = &t.journal.session;
	assert_int_equal(s->decision, FL_DECISION_ADJUST);
	assert_int_equal(s->reading_count, 24);
	assert_true(s->runs[FL_RUN_AS_LEFT].closed);
	assert_string_equal(s->adjustments[0].item, "not recorded (imported)");
	free(left);
	free(csv);
	talk_end(&t);
}

static void an_as_left_alone_says_as_found_is_missing(void **state) {
	talk t;
	begin(&t, *state);
	char *left = as_left_of(as_found_rows), *csv = joined(head, left, "");
	assert_int_equal(import(&t, csv, (fl_import_options){.as_left = "S"}), FL_OK);
	assert_true(t.journal.session.runs[FL_RUN_AS_FOUND].missing);
	assert_true(t.journal.session.closed);
	free(left);
	free(csv);
	talk_end(&t);
}

/* The day decides what is in date: equipment certified in 2025 does not vouch for 2021. */
static void what_is_not_in_date_makes_it_indicative(void **state) {
	talk t;
	begin(&t, *state);
	char *csv = joined(head, as_found_rows, "");
	t.journal.session.day =
	    fl_day_from_civil(2027, 3, 1); /* after the lots expired; the table's own day is shown only */
	assert_int_equal(import(&t, csv, (fl_import_options){0}), FL_OK);
	assert_int_equal(t.journal.session.indicative_count, 5); /* three items and two lots */
	talk_says(&t, "indicative, not traceable");
	free(csv);
	talk_end(&t);
}

static void doubts_are_recorded_as_imported(void **state) {
	talk t;
	begin(&t, *state);
	char *csv = joined(head, as_found_rows, ""), *at = strstr(csv, "40.02");
	memcpy(at, "41.02", 5); /* further than 0.5 K from the bath */
	assert_int_equal(import(&t, csv, (fl_import_options){0}), FL_OK);
	assert_int_equal(t.journal.session.questions, 1);
	size_t length;
	char *journal = scratch_read(t.path, &length);
	assert_non_null(strstr(journal, "answer=imported"));
	free(journal);
	free(csv);
	talk_end(&t);
}

/* ---- tests/invalid/import/<what>/{input.csv,error}: a new case needs no code ---- */

static char *slurp(const char *folder, const char *what, const char *name) {
	char path[600];
	snprintf(path, sizeof path, "%s/%s/%s", folder, what, name);
	size_t length;
	char *text = scratch_read(path, &length);
	if (!text)
		print_error("%s is missing\n", path);
	assert_non_null(text);
	return text;
}

static void each_invalid_table_is_refused_in_its_words(void **state) {
	const char *folder = SOURCE_DIR "/tests/invalid/import";
	DIR *cases = opendir(folder);
	assert_non_null(cases);
	int count = 0, wrong = 0;
	for (struct dirent *one; (one = readdir(cases)) != NULL;) {
		if (one->d_name[0] == '.')
			continue;
		char *csv = slurp(folder, one->d_name, "input.csv"), *error = slurp(folder, one->d_name, "error");
		error[strcspn(error, "\n")] = '\0';
		talk t;
		char line[1400];
		begin(&t, *state);
		fl_status status = import(&t, csv, (fl_import_options){0});
		fl_error_line(&t.err, line, sizeof line);
		if (status >= 0 || strcmp(line, error) != 0) {
			print_error("%s:\n  want %s\n  got  %s\n", one->d_name, error, line);
			wrong++;
		}
		talk_end(&t);
		free(csv);
		free(error);
		count++;
	}
	closedir(cases);
	assert_true(count >= 15);
	assert_int_equal(wrong, 0);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    IN_SCRATCH(an_as_found_table_becomes_a_closed_session),
	    IN_SCRATCH(as_found_and_as_left_mean_adjusted),
	    IN_SCRATCH(an_as_left_alone_says_as_found_is_missing),
	    IN_SCRATCH(what_is_not_in_date_makes_it_indicative),
	    IN_SCRATCH(doubts_are_recorded_as_imported),
	    IN_SCRATCH(each_invalid_table_is_refused_in_its_words),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
