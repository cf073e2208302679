/* test_invalid.c - the templates that have to be refused, each with its whole line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "corpus.h"
#include "foundleft/procedure.h"

static fl_status read_procedure(const char *text, fl_error *err) {
	fl_procedure procedure = {0};
	fl_status status = fl_procedure_parse(text, "input.yaml", &procedure, err);
	assert_true(status == FL_OK || procedure.arena.head == NULL);
	fl_procedure_free(&procedure);
	return status;
}

static void refuses_every_case(void **state) {
	(void)state;
	corpus_run(SOURCE_DIR "/tests/invalid/procedure", 20, read_procedure);
}

int main(void) {
	const struct CMUnitTest tests[] = {cmocka_unit_test(refuses_every_case)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
