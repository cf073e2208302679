/* survey_content.c - the first page of a survey pack: every instrument with its last and next calibration, every
 * standard, and what is open.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "wording.h"

static void write_title(fl_sheet *sheet, const fl_survey *s) {
	fl_sheet_issuer(sheet, s->issuer, s->issuer_address);
	sheet->title = "Survey pack";
	sheet->number_label = "State of the book on";
	sheet->number = fl_word_day(sheet, s->made_on);
	sheet->subtitle = fl_sheet_printf(sheet, "Viscosity sensors of %s", s->ship);
	sheet->running = fl_sheet_printf(sheet, "%s  ·  survey pack  ·  %s", sheet->issuer, s->ship);
	sheet->author = sheet->issuer;
	sheet->subject = sheet->subtitle;
	sheet->program = fl_sheet_printf(sheet, "foundleft %s", s->program_version ? s->program_version : "");
	sheet->fingerprint = fl_sheet_printf(sheet, "survey %s %s %s", s->ship, s->content, sheet->number);
	sheet->made_at = (fl_utc)s->made_on * 86400;
}

/* A word beside every date: colour alone would say nothing in black and white. */
static const char *state_of(const fl_survey *s, const fl_survey_instrument *i) {
	if (i->last == FL_NO_DAY)
		return "never calibrated";
	if (i->due == FL_NO_DAY)
		return "no date agreed";
	return i->due < s->made_on ? "OVERDUE" : "in date";
}

static const char *page_text(fl_sheet *sheet, size_t page) {
	return page ? fl_sheet_printf(sheet, "%zu", page) : FL_ABSENT;
}

static void write_instruments(fl_sheet *sheet, const fl_survey *s) {
	static const fl_column columns[] = {{"tag", "", "", FL_ALIGN_LEFT, false},
	                                    {"serial no.", "", "", FL_ALIGN_LEFT, false},
	                                    {"position", "", "", FL_ALIGN_LEFT, true},
	                                    {"last", "", "calibration", FL_ALIGN_LEFT, false},
	                                    {"left with\nverdict", "", "calibration", FL_ALIGN_LEFT, true},
	                                    {"certificate", "", "calibration", FL_ALIGN_LEFT, false},
	                                    {"next", "", "calibration", FL_ALIGN_LEFT, false},
	                                    {"state", "", "calibration", FL_ALIGN_LEFT, false},
	                                    {"copy", "", "on page", FL_ALIGN_DECIMAL, false},
	                                    {"trend", "", "on page", FL_ALIGN_DECIMAL, false}};
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Instruments");
	fl_block *table = fl_sheet_add_table(sheet, columns, sizeof columns / sizeof *columns);
	for (size_t i = 0; i < s->instrument_count; i++) {
		const fl_survey_instrument *one = &s->instruments[i];
		const char *where = *one->position ? one->position : one->site;
		const char *cells[] = {one->tag,
		                       one->serial,
		                       *where ? where : FL_ABSENT,
		                       fl_word_day(sheet, one->last),
		                       *one->verdict ? one->verdict : FL_ABSENT,
		                       *one->number ? one->number : FL_ABSENT,
		                       fl_word_day(sheet, one->due),
		                       state_of(s, one),
		                       page_text(sheet, one->page),
		                       page_text(sheet, one->trend_page)};
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
}

static void write_standards(fl_sheet *sheet, const fl_survey *s) {
	static const fl_column columns[] = {{"kind", "", "", FL_ALIGN_LEFT, false},
	                                    {"lot or id", "", "", FL_ALIGN_LEFT, false},
	                                    {"certificate", "", "", FL_ALIGN_LEFT, true},
	                                    {"last day of use", "", "", FL_ALIGN_LEFT, false},
	                                    {"state", "", "", FL_ALIGN_LEFT, false}};
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Standards: reference oils and measuring equipment");
	if (s->standard_count == 0) {
		fl_sheet_add(sheet, FL_BLOCK_TEXT, "None is in stock here.");
		return;
	}
	fl_block *table = fl_sheet_add_table(sheet, columns, sizeof columns / sizeof *columns);
	for (size_t i = 0; i < s->standard_count; i++) {
		const fl_survey_standard *one = &s->standards[i];
		const char *cells[] = {one->kind, one->name, one->certificate, fl_word_day(sheet, one->last_day),
		                       one->last_day < s->made_on ? "OUT OF DATE" : "in date"};
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
}

static void write_summary(fl_sheet *sheet, const fl_survey *s) {
	size_t instruments = 0, standards = 0;
	for (size_t i = 0; i < s->instrument_count; i++)
		instruments += strcmp(state_of(s, &s->instruments[i]), "in date") == 0;
	for (size_t i = 0; i < s->standard_count; i++)
		standards += s->standards[i].last_day >= s->made_on;
	fl_sheet_addf(sheet, FL_BLOCK_STATEMENT, "%zu of %zu instruments and %zu of %zu standards are in date on %s.",
	              instruments, s->instrument_count, standards, s->standard_count, fl_word_day(sheet, s->made_on));
}

static void write_open(fl_sheet *sheet, const fl_survey *s) {
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Open points");
	if (s->open_count == 0)
		fl_sheet_add(sheet, FL_BLOCK_TEXT, "None.");
	for (size_t i = 0; i < s->open_count; i++)
		fl_sheet_add(sheet, FL_BLOCK_ITEM, fl_word_sentence(sheet, s->open[i]));
}

static void write_source(fl_sheet *sheet, const fl_survey *s) {
	fl_sheet_add_led(
	    sheet, FL_BLOCK_SMALL, "Certificates.",
	    "The certificates that follow are set again from the record book, page by page as they were issued "
	    "but without signatures. Where a signed original is kept, it rules; each copy names it and its "
	    "digest.");
	fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Book.", "Digest of the book's content (SHA-256): %s.", s->content);
}

fl_status fl_certificate_survey(const fl_survey *survey, fl_sheet **out, fl_error *err) {
	fl_sheet *sheet = fl_sheet_new();
	if (!sheet)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the survey pack");
	write_title(sheet, survey);
	write_summary(sheet, survey);
	write_instruments(sheet, survey);
	write_open(sheet, survey);
	write_standards(sheet, survey);
	write_source(sheet, survey);
	if (sheet->failed) {
		fl_sheet_free(sheet);
		return fl_fail(err, FL_E_MEMORY, "out of memory for the survey pack");
	}
	*out = sheet;
	return FL_OK;
}

void fl_certificate_mark_copy(fl_sheet *sheet, const char *mark, const char *where) {
	sheet->mark = *sheet->mark ? fl_sheet_printf(sheet, "%s · %s", sheet->mark, mark) : fl_sheet_copy(sheet, mark);
	for (size_t i = 0; i < sheet->block_count; i++) {
		fl_block *block = &sheet->blocks[i];
		if (block->kind != FL_BLOCK_SIGNATURES)
			continue;
		*block = (fl_block){
		    .kind = FL_BLOCK_TEXT, .lead = fl_sheet_copy(sheet, "Signatures."), .text = fl_sheet_copy(sheet, where)};
	}
}
