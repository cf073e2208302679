/* Arenas and growing texts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdalign.h>
#include <stdio.h>
#include <string.h>

#include "check.h"
#include "foundleft/base.h"

static void pieces_are_zeroed_aligned_and_apart(void **state) {
	(void)state;
	fl_arena arena = {0};
	unsigned char *pieces[3000];
	for (size_t i = 0; i < 3000; i++) {
		size_t size = i % 97 + (i % 500 == 499 ? 40000 : 0);
		pieces[i] = fl_arena_alloc(&arena, 1, size);
		assert_non_null(pieces[i]);
		assert_int_equal((uintptr_t)pieces[i] % alignof(max_align_t), 0);
		for (size_t k = 0; k < size; k++)
			assert_int_equal(pieces[i][k], 0);
		memset(pieces[i], (int)(i % 251), size);
	}
	for (size_t i = 0; i < 3000; i++)
		for (size_t k = 0; k < i % 97; k++)
			assert_int_equal(pieces[i][k], i % 251);
	fl_arena_free(&arena);
	assert_null(arena.head);
	assert_non_null(fl_arena_alloc(&arena, 0, 8)); /* usable again, and nothing is not out of memory */
	fl_arena_free(&arena);
}

static void impossible_sizes_are_refused(void **state) {
	(void)state;
	fl_arena arena = {0};
	assert_null(fl_arena_alloc(&arena, SIZE_MAX / 2, 3));
	assert_null(fl_arena_alloc(&arena, SIZE_MAX, 1));
	assert_null(fl_arena_alloc(&arena, SIZE_MAX - 7, 1));
	size_t capacity = 4;
	int items[4] = {2, 3, 5, 7};
	assert_null(fl_arena_grow(&arena, items, SIZE_MAX / 4, &capacity, sizeof items[0]));
	assert_int_equal(capacity, 4);
	fl_arena_free(&arena);
}

static void texts_are_copied(void **state) {
	(void)state;
	fl_arena arena = {0};
	assert_string_equal(fl_arena_strdup(&arena, "Lanternmoor"), "Lanternmoor");
	assert_string_equal(fl_arena_strndup(&arena, "Lanternmoor", 7), "Lantern");
	assert_string_equal(fl_arena_strndup(&arena, "moor", 70), "moor");
	assert_string_equal(fl_arena_printf(&arena, "%s-%03d", "LK", 14), "LK-014");
	char *wide = fl_arena_printf(&arena, "%50000d", 7);
	assert_int_equal(strlen(wide), 50000);
	fl_arena_free(&arena);
}

static void arrays_grow_and_keep_what_they_hold(void **state) {
	(void)state;
	fl_arena arena = {0};
	int *items = NULL;
	size_t capacity = 0;
	for (size_t count = 0; count < 5000; count++) {
		items = fl_arena_grow(&arena, items, count, &capacity, sizeof *items);
		assert_non_null(items);
		assert_true(capacity > count);
		items[count] = (int)(count * 7 + 3);
	}
	for (size_t i = 0; i < 5000; i++)
		assert_int_equal(items[i], i * 7 + 3);
	fl_arena_free(&arena);
}

static void a_text_grows_and_is_terminated(void **state) {
	(void)state;
	fl_text text = {0};
	fl_text_append(&text, "", 0);
	assert_string_equal(text.data, "");
	for (int i = 0; i < 1000; i++)
		fl_text_printf(&text, "%d,", i);
	fl_text_add(&text, "end");
	fl_text_append(&text, "a\0b", 3);
	assert_int_equal(text.length, 2 * 10 + 3 * 90 + 4 * 900 + 3 + 3);
	assert_false(text.failed);
	assert_memory_equal(text.data, "0,1,2,", 6);
	assert_memory_equal(text.data + text.length - 6, "enda\0b", 7);
	fl_text_clear(&text);
	assert_string_equal(text.data, "");
	assert_int_equal(text.length, 0);
	fl_text_free(&text);
	assert_null(text.data);
}

static void padding_counts_columns_of_the_last_line(void **state) {
	(void)state;
	fl_text text = {0};
	fl_text_pad_to(&text, 2);
	fl_text_add(&text, "x\n12 mm²/s");
	fl_text_pad_to(&text, 12);
	fl_text_add(&text, "|");
	fl_text_pad_to(&text, 5); /* already behind it */
	assert_string_equal(text.data, "  x\n12 mm²/s    |");
	fl_text_free(&text);
}

static void a_failed_text_stays_failed(void **state) {
	(void)state;
	fl_text text = {0};
	fl_text_add(&text, "kept");
	fl_text_append(&text, "x", SIZE_MAX / 2); /* refused before a byte is read */
	assert_true(text.failed);
	fl_text_add(&text, "more");
	fl_text_printf(&text, "%d", 1);
	assert_string_equal(text.data, "kept");
	assert_true(text.failed);
	fl_text_free(&text);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(pieces_are_zeroed_aligned_and_apart),
	    cmocka_unit_test(impossible_sizes_are_refused),
	    cmocka_unit_test(texts_are_copied),
	    cmocka_unit_test(arrays_grow_and_keep_what_they_hold),
	    cmocka_unit_test(a_text_grows_and_is_terminated),
	    cmocka_unit_test(padding_counts_columns_of_the_last_line),
	    cmocka_unit_test(a_failed_text_stays_failed),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
