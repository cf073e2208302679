/* fuzz_pdf_seal.c - the readers of signed PDF files and of seals beside files, on any bytes. Start it with a folder of
 * signed files as its corpus: nothing unsigned gets deep. Without trust nothing may ever be called good.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "foundleft/seal.h"

#include <stdlib.h>

#define NOW 1776153612 /* 2026-04-14T08:00:12Z */

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t length);

static void check(fl_status status, const fl_seal_report *report, const fl_error *err) {
	if (status == FL_OK && report->verdict == FL_SEAL_GOOD)
		abort();
	if (status != FL_OK && err->message[0] == '\0')
		abort();
}

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t length) {
	static const fl_seal_place place = {0, 40, 60, 220, 56};
	fl_arena arena = {0};
	fl_seal_report report;
	fl_error err = {0};
	check(fl_pdf_check(bytes, length, NULL, NOW, &place, 1, &arena, &report, &err), &report, &err);
	err = (fl_error){0};
	check(fl_seal_check("a journal\n", 10, bytes, length, NULL, NOW, &arena, &report, &err), &report, &err);
	fl_arena_free(&arena);
	return 0;
}
