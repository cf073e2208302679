/* What base does when memory is refused, request after request.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "check.h"
#include "failing_memory.h"
#include "foundleft/base.h"
#include "scratch.h"

static void a_text_keeps_what_it_had(void **state) {
	(void)state;
	bool refused = true;
	long n = 0;
	while (refused) {
		failing_memory_start(++n);
		fl_text text = {0};
		for (int i = 0; i < 2000; i++)
			fl_text_printf(&text, "%04d", i);
		refused = failing_memory_stop();
		assert_int_equal(text.failed, refused);
		assert_int_equal(text.length % 4, 0);
		assert_true(refused ? text.length < 8000 : text.length == 8000);
		if (text.data)
			assert_int_equal(strlen(text.data), text.length);
		fl_text_free(&text);
	}
	assert_true(n > 5);
}

static void an_arena_says_so_and_goes_on(void **state) {
	(void)state;
	bool refused = true;
	for (long n = 1; refused; n++) {
		failing_memory_start(n);
		fl_arena arena = {0};
		int *items = NULL, missed = 0;
		size_t capacity = 0, count = 0;
		for (int i = 0; i < 20000; i++) {
			int *larger = fl_arena_grow(&arena, items, count, &capacity, sizeof *items);
			missed += !larger;
			if (!larger)
				continue;
			items = larger;
			items[count] = 3 * (int)count + 4;
			count++;
		}
		refused = failing_memory_stop();
		assert_int_equal(missed, refused ? 1 : 0);
		for (size_t i = 0; i < count; i++)
			assert_int_equal(items[i], 3 * (int)i + 4);
		assert_true(count + (size_t)missed == 20000);
		fl_arena_free(&arena);
	}
}

static void a_file_is_read_or_not(void **state) {
	char path[SCRATCH_SIZE];
	static char content[50000];
	memset(content, 'q', sizeof content);
	scratch_path(*state, "oils.yaml", path);
	assert_int_equal(fl_file_write(fl_io_system(), path, content, sizeof content, false, NULL), FL_OK);
	bool refused = true;
	for (long n = 1; refused; n++) {
		fl_arena arena = {0};
		char *bytes = NULL;
		size_t length = 0;
		fl_error err = {0};
		failing_memory_start(n);
		fl_status status = fl_file_read(fl_io_system(), path, 1000000, &arena, &bytes, &length, &err);
		refused = failing_memory_stop();
		assert_int_equal(status, refused ? FL_E_MEMORY : FL_OK);
		assert_int_equal(length, refused ? 0 : sizeof content);
		assert_true(refused ? bytes == NULL && err.message[0] : memcmp(bytes, content, length) == 0);
		fl_arena_free(&arena);
	}
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(a_text_keeps_what_it_had),
	    cmocka_unit_test(an_arena_says_so_and_goes_on),
	    cmocka_unit_test_setup_teardown(a_file_is_read_or_not, scratch_make, scratch_remove),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
