/* arena.c - memory with one owner: blocks in a list, freed together.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "foundleft/base.h"

#define BLOCK_BYTES ((size_t)16 * 1024)
#define FIRST_CAPACITY ((size_t)8)

struct fl_arena_block {
	struct fl_arena_block *next;
	size_t used;
	size_t size;
	max_align_t bytes[];
};

static struct fl_arena_block *new_block(fl_arena *arena, size_t size) {
	struct fl_arena_block *block = malloc(sizeof *block + size);
	if (!block)
		return NULL;
	*block = (struct fl_arena_block){.size = size};
	/* A block made to measure goes behind the current one, which may still have room. */
	if (arena->head && size > BLOCK_BYTES) {
		block->next = arena->head->next;
		arena->head->next = block;
	} else {
		block->next = arena->head;
		arena->head = block;
	}
	return block;
}

void *fl_arena_alloc(fl_arena *arena, size_t count, size_t size) {
	size_t total;
	const size_t unit = sizeof(max_align_t);
	if (__builtin_mul_overflow(count, size, &total) || total > SIZE_MAX / 2)
		return NULL;
	total = (total / unit + (total % unit != 0 || total == 0)) * unit;
	struct fl_arena_block *block = arena->head;
	if (!block || block->size - block->used < total)
		block = new_block(arena, total > BLOCK_BYTES ? total : BLOCK_BYTES);
	if (!block)
		return NULL;
	void *place = (char *)block->bytes + block->used;
	block->used += total;
	return memset(place, 0, total); /* only what is handed out: most arenas use little of their block */
}

char *fl_arena_strndup(fl_arena *arena, const char *text, size_t length) {
	length = strnlen(text, length);
	char *copy = fl_arena_alloc(arena, length + 1, 1);
	if (copy)
		memcpy(copy, text, length);
	return copy;
}

char *fl_arena_strdup(fl_arena *arena, const char *text) {
	return fl_arena_strndup(arena, text, strlen(text));
}

static size_t copy_all(char *to, va_list texts) {
	size_t length = 0;
	for (const char *text; (text = va_arg(texts, const char *)) != NULL;) {
		size_t size = strlen(text);
		if (to)
			memcpy(to + length, text, size);
		length += size;
	}
	return length;
}

char *fl_arena_join(fl_arena *arena, ...) {
	va_list texts, again;
	va_start(texts, arena);
	va_copy(again, texts);
	char *joined = fl_arena_alloc(arena, copy_all(NULL, texts) + 1, 1);
	if (joined)
		copy_all(joined, again);
	va_end(again);
	va_end(texts);
	return joined;
}

char *fl_arena_printf(fl_arena *arena, const char *format, ...) {
	char most[256]; /* nearly every text is shorter, and then it is formatted once */
	va_list values, again;
	va_start(values, format);
	va_copy(again, values);
	int length = vsnprintf(most, sizeof most, format, values);
	va_end(values);
	char *text = length < 0 ? NULL : fl_arena_alloc(arena, (size_t)length + 1, 1);
	if (text && (size_t)length < sizeof most)
		memcpy(text, most, (size_t)length + 1);
	else if (text)
		vsnprintf(text, (size_t)length + 1, format, again);
	va_end(again);
	return text;
}

void *fl_arena_grow(fl_arena *arena, void *items, size_t count, size_t *capacity, size_t size) {
	if (items && count < *capacity)
		return items;
	if (count > SIZE_MAX / 4)
		return NULL;
	size_t room = count < FIRST_CAPACITY ? FIRST_CAPACITY : 2 * count;
	void *larger = fl_arena_alloc(arena, room, size);
	if (!larger)
		return NULL;
	if (items && count > 0)
		memcpy(larger, items, count * size);
	*capacity = room;
	return larger;
}

void fl_arena_reset(fl_arena *arena) {
	struct fl_arena_block *kept = arena->head;
	if (!kept || kept->size > BLOCK_BYTES) {
		fl_arena_free(arena);
		return;
	}
	arena->head = kept->next;
	fl_arena_free(arena);
	kept->next = NULL;
	kept->used = 0;
	arena->head = kept;
}

void fl_arena_free(fl_arena *arena) {
	while (arena->head) {
		struct fl_arena_block *next = arena->head->next;
		free(arena->head);
		arena->head = next;
	}
}
