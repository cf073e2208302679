/* test_memory.c - every request for memory that content and pdf make is refused once: a status, no leak, no bytes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "failing_memory.h"
#include "sample.h"

static void test_content_without_memory(void **state) {
	(void)state;
	const sample_wish wish = {.gain = 0.03, .decision = FL_DECISION_ADJUST, .struck = 1, .remarks = 1};
	sample_case one;
	sample_make(&one, &wish);
	sample_assess(&one);
	for (long n = 1;; n++) {
		fl_sheet *sheet = NULL;
		fl_error err = {0};
		failing_memory_start(n);
		fl_status status =
		    fl_certificate_content(&one.session, &one.procedure, &one.stock, &one.result, &one.issue, &sheet, &err);
		bool refused = failing_memory_stop();
		if (!refused) {
			assert_int_equal(FL_OK, status);
			fl_sheet_free(sheet);
			break;
		}
		assert_int_equal(FL_E_MEMORY, status);
		assert_null(sheet);
	}
	sample_free(&one);
}

/* Those of libharu included: it asks through the same calls. */
static void test_pdf_without_memory(void **state) {
	(void)state;
	const sample_wish wish = {.template_name = "transmitter-alone", .gain = 0.004, .decision = FL_DECISION_LEAVE};
	sample_case one;
	sample_make(&one, &wish);
	sample_assess(&one);
	fl_sheet *sheet = sample_sheet(&one);
	for (long n = 1;; n++) {
		unsigned char *bytes = NULL;
		size_t length = 0;
		fl_error err = {0};
		failing_memory_start(n);
		fl_status status = fl_certificate_pdf(sheet, fl_io_system(), &(fl_faces){FACES_FOLDER}, &bytes, &length, &err);
		bool refused = failing_memory_stop();
		if (!refused) {
			assert_int_equal(FL_OK, status);
			free(bytes);
			break;
		}
		if (status == FL_OK)
			fail_msg("request %ld was refused and nothing was said", n);
		assert_null(bytes);
	}
	fl_sheet_free(sheet);
	sample_free(&one);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(test_content_without_memory),
	    cmocka_unit_test(test_pdf_without_memory),
	};
	return cmocka_run_group_tests_name("certificate/memory", tests, NULL, NULL);
}
