/* pdf_update.c - objects, table and trailer of an incremental update (ISO 32000-1, 7.5.6).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "pdf_update.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

unsigned fl_update_new(fl_pdf_update *update) {
	return update->next++;
}

void fl_update_begin(fl_pdf_update *update, unsigned number) {
	if (update->count == FL_PDF_UPDATE_OBJECTS) {
		update->bytes.failed = true;
		return;
	}
	update->objects[update->count].number = number;
	update->objects[update->count++].at = update->pdf->length + update->bytes.length;
	fl_text_printf(&update->bytes, "%u 0 obj\n", number);
}

void fl_update_end(fl_pdf_update *update) {
	fl_text_add(&update->bytes, "\nendobj\n");
}

unsigned fl_update_stream(fl_pdf_update *update, const char *entries, const void *bytes, size_t length) {
	unsigned number = fl_update_new(update);
	fl_update_begin(update, number);
	fl_text_printf(&update->bytes, "<< %s/Length %zu >>\nstream\n", entries, length);
	fl_text_append(&update->bytes, bytes, length);
	fl_text_add(&update->bytes, "\nendstream");
	fl_update_end(update);
	return number;
}

void fl_update_number(fl_text *out, double value) {
	long hundredths = lround(value * 100), size = labs(hundredths);
	fl_text_printf(out, "%s%ld", hundredths < 0 ? "-" : "", size / 100);
	if (size % 100)
		fl_text_printf(out, ".%02ld", size % 100);
	fl_text_add(out, " ");
}

static bool is_plain(const char *text) {
	for (; *text; text++)
		if (*text < 0x20 || *text > 0x7e)
			return false;
	return true;
}

void fl_update_string(fl_text *out, const char *utf8) {
	if (is_plain(utf8)) {
		fl_text_add(out, "(");
		for (; *utf8; utf8++) {
			if (*utf8 == '(' || *utf8 == ')' || *utf8 == '\\')
				fl_text_add(out, "\\");
			fl_text_append(out, utf8, 1);
		}
		fl_text_add(out, ")");
		return;
	}
	fl_text_add(out, "<FEFF");
	while (*utf8) {
		uint32_t point = fl_utf8_next(&utf8);
		if (point > 0xffff)
			fl_text_printf(out, "%04X%04X", 0xd800 + ((point - 0x10000) >> 10), 0xdc00 + ((point - 0x10000) & 0x3ff));
		else
			fl_text_printf(out, "%04X", (unsigned)point);
	}
	fl_text_add(out, ">");
}

/* ---- table and trailer ---------------------------------------------------------------------------------------- */

static void sort_objects(fl_pdf_update *update) {
	for (size_t i = 1; i < update->count; i++)
		for (size_t k = i; k > 0 && update->objects[k].number < update->objects[k - 1].number; k--) {
			unsigned number = update->objects[k].number;
			size_t at = update->objects[k].at;
			update->objects[k] = update->objects[k - 1];
			update->objects[k - 1].number = number;
			update->objects[k - 1].at = at;
		}
}

static void write_table(fl_pdf_update *update) {
	sort_objects(update);
	fl_text_add(&update->bytes, "xref\n");
	for (size_t i = 0; i < update->count;) {
		size_t run = 1;
		while (i + run < update->count && update->objects[i + run].number == update->objects[i].number + run)
			run++;
		fl_text_printf(&update->bytes, "%u %zu\n", update->objects[i].number, run);
		for (; run > 0; run--)
			fl_text_printf(&update->bytes, "%010zu 00000 n \n", update->objects[i++].at);
	}
}

static void copy_value(fl_pdf_update *update, const char *key, const fl_pdf_value *value) {
	if (!value)
		return;
	fl_text_printf(&update->bytes, "/%s ", key);
	fl_text_append(&update->bytes, (const char *)update->pdf->bytes + value->begin, value->end - value->begin);
	fl_text_add(&update->bytes, "\n");
}

/* The first half of the identity stays, the second names this state (ISO 32000-1, 14.4). */
static void write_identity(fl_pdf_update *update, const fl_pdf_value *before, const unsigned char identity[16]) {
	fl_text_add(&update->bytes, "/ID [");
	if (before && before->kind == FL_PDF_ARRAY && before->count == 2)
		fl_text_append(&update->bytes, (const char *)update->pdf->bytes + before->items[0].begin,
		               before->items[0].end - before->items[0].begin);
	for (int half = before ? 1 : 0; half < 2; half++) {
		fl_text_add(&update->bytes, "<");
		for (int i = 0; i < 16; i++)
			fl_text_printf(&update->bytes, "%02x", identity[i]);
		fl_text_add(&update->bytes, ">");
	}
	fl_text_add(&update->bytes, "]\n");
}

void fl_update_finish(fl_pdf_update *update, const unsigned char identity[16]) {
	const fl_pdf_revision *last = &update->pdf->revisions[update->pdf->revision_count - 1];
	size_t table = update->pdf->length + update->bytes.length;
	write_table(update);
	fl_text_printf(&update->bytes, "trailer\n<<\n/Size %u\n", update->next);
	copy_value(update, "Root", fl_pdf_get(&last->trailer, "Root"));
	copy_value(update, "Info", fl_pdf_get(&last->trailer, "Info"));
	write_identity(update, fl_pdf_get(&last->trailer, "ID"), identity);
	fl_text_printf(&update->bytes, "/Prev %zu\n>>\nstartxref\n%zu\n%%%%EOF\n", last->table, table);
}
