/* content_record.c - adjustments, struck readings, departures, remarks, the record itself, statements, signatures.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

void fl_write_adjustments(fl_writing *w) {
	static const fl_column columns[] = {{"adjustment", "", "", FL_ALIGN_LEFT, true},
	                                    {"before", "", "", FL_ALIGN_LEFT, true},
	                                    {"after", "", "", FL_ALIGN_LEFT, true},
	                                    {"time", "", "", FL_ALIGN_LEFT, false}};
	fl_sheet *sheet = w->sheet;
	size_t live = 0;
	for (size_t i = 0; i < w->session->adjustment_count; i++)
		live += !w->session->adjustments[i].undone;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "Adjustments");
	if (live == 0) {
		fl_sheet_add(sheet, FL_BLOCK_TEXT, "None: nothing was adjusted.");
		return;
	}
	fl_block *table = fl_sheet_add_table(sheet, columns, 4);
	for (size_t i = 0; i < w->session->adjustment_count; i++) {
		const fl_adjustment *made = &w->session->adjustments[i];
		if (made->undone)
			continue;
		const char *cells[] = {made->item, made->before, made->after,
		                       fl_word_clock(sheet, made->at, w->issue->utc_offset_min)};
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
}

/* ---- struck readings ------------------------------------------------------- */

/* "cycle 2, LK-10 (2511B), rising, reading 3" */
static const char *place_of(const fl_writing *w, const fl_reading *reading) {
	return fl_sheet_printf(w->sheet, "cycle %d, %s, %s, reading %d", reading->cycle,
	                       fl_writing_point_name(w, reading->point), fl_pass_word(reading->pass), reading->number);
}

static double error_of(const fl_writing *w, const fl_reading *reading) {
	const fl_run_result *run = &w->result->runs[reading->run];
	for (size_t i = 0; i < run->reading_count; i++)
		if (run->readings[i].reading->sequence == reading->sequence)
			return 100 * run->readings[i].error_span;
	return NAN;
}

static void write_struck(fl_writing *w, bool departures) {
	static const fl_column columns[] = {{"run", "", "", FL_ALIGN_LEFT, false},
	                                    {"place", "", "", FL_ALIGN_LEFT, true},
	                                    {"output as typed", "", "", FL_ALIGN_LEFT, false},
	                                    {"error, % of span", "", "", FL_ALIGN_DECIMAL, false},
	                                    {"reason", "", "", FL_ALIGN_LEFT, true},
	                                    {"struck by", "", "", FL_ALIGN_LEFT, false}};
	fl_sheet *sheet = w->sheet;
	fl_block *table = NULL;
	size_t taken_back = 0;
	for (size_t i = 0; i < w->session->reading_count; i++) {
		const fl_reading *reading = &w->session->readings[i];
		taken_back += reading->undone && !reading->watched;
		if (!reading->struck || reading->undone || reading->watched)
			continue;
		if (!table)
			table = fl_sheet_add_table(sheet, columns, 6);
		const char *unit = fl_unit_text(reading->unit);
		const char *cells[] = {fl_run_word(reading->run),
		                       place_of(w, reading),
		                       strstr(reading->typed, unit) ? reading->typed
		                                                    : fl_sheet_printf(sheet, "%s %s", reading->typed, unit),
		                       fl_word_signed(sheet, error_of(w, reading), 3),
		                       reading->struck_reason,
		                       reading->struck_by};
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
	fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Struck readings.", "%s%s",
	                 table ? "They stay in the record and are left out of the means." : "None.",
	                 departures ? "" : " No departures from the procedure are recorded.");
	if (taken_back > 0)
		fl_sheet_addf(sheet, FL_BLOCK_SMALL, "%zu mistyped %s taken back by a later line of the record, before use.",
		              taken_back, taken_back == 1 ? "reading was" : "readings were");
}

/* ---- departures and remarks ------------------------------------------------ */

static bool has_departures(const fl_session *session) {
	return session->indicative_count > 0 || session->source == FL_SOURCE_IMPORT ||
	       session->runs[FL_RUN_AS_FOUND].missing || session->runs[FL_RUN_AS_LEFT].missing;
}

static void write_departures(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	const fl_session *session = w->session;
	for (int kind = 0; kind < FL_RUN_KINDS; kind++)
		if (session->runs[kind].missing) {
			const char *reason = session->runs[kind].missing_reason;
			fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Departure.", "No %s run: %s", fl_run_word((fl_run_kind)kind),
			                 fl_word_sentence(sheet, reason ? reason : "no reason given"));
		}
	for (size_t i = 0; i < session->indicative_count; i++) {
		const fl_indicative *entry = &session->indicative[i];
		fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Departure.", "%s was used although it was out of date (%s): %s",
		                 entry->item ? entry->item : "An item", entry->by ? entry->by : "nobody named",
		                 fl_word_sentence(sheet, entry->reason ? entry->reason : "no reason given"));
	}
	if (session->source == FL_SOURCE_IMPORT)
		fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Departure.",
		                 "The readings were imported from a file: settling, the order of work and the safety questions "
		                 "were not followed by the program.");
}

static void write_remarks(fl_writing *w) {
	for (size_t i = 0; i < w->session->remark_count; i++)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, "Remark.", "%s", w->session->remarks[i].typed);
}

/* ---- the record ------------------------------------------------------------ */

static const char *source_words(fl_source source) {
	switch (source) {
	case FL_SOURCE_KEYBOARD:
		return "by keyboard, step by step";
	case FL_SOURCE_REPLAY:
		return "replay of a file of answers";
	case FL_SOURCE_IMPORT:
		return "import of a file of readings";
	}
	return "unknown";
}

static void write_journal(fl_writing *w) {
	static const char *const heads[] = {"", "", ""};
	fl_sheet *sheet = w->sheet;
	const fl_session *session = w->session;
	const fl_issue *issue = w->issue;
	fl_sheet_add(sheet, FL_BLOCK_HEADING, "The record behind this certificate");
	fl_block *grid = fl_sheet_add_grid(sheet, FL_BLOCK_GRID, heads, 3);
	fl_sheet_pair(sheet, grid, 0, "Journal", issue->journal_name);
	fl_sheet_pair(sheet, grid, 0, "Begun", fl_word_time(sheet, session->opened_at, issue->utc_offset_min));
	fl_sheet_pair(sheet, grid, 1, "Entries", source_words(session->source));
	if (session->questions > 0)
		fl_sheet_pairf(sheet, grid, 1, "Asked back", "%d %s, and confirmed", session->questions,
		               session->questions == 1 ? "time" : "times");
	fl_sheet_pairf(sheet, grid, 1, "Programs", "foundleft %s, certificate %s",
	               session->program ? session->program : "?", issue->program_version ? issue->program_version : "?");
	fl_sheet_pairf(sheet, grid, 2, "Clock", "%s; times in UTC, local time %s",
	               session->declared_clock ? "as the file states it, not a machine's"
	                                       : "of the machine it was written on",
	               issue->utc_offset_min == 0 ? "the same" : fl_word_offset(sheet, issue->utc_offset_min));
	fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Digest of the journal (SHA-256):", "%s",
	                 issue->journal_digest ? issue->journal_digest
	                                       : "stated when the certificate is issued; this is a draft");
	fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Source of the procedure:", "%s, version %s: %s", w->procedure->id,
	                 w->procedure->version, fl_word_sentence(sheet, w->procedure->source));
}

void fl_write_record(fl_writing *w) {
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Struck readings, departures, remarks");
	write_struck(w, has_departures(w->session));
	write_departures(w);
	write_remarks(w);
	write_journal(w);
}

/* ---- end ------------------------------------------------------------------- */

/* What it replaces is said where nobody can overlook it: before the signatures, and larger. */
static void write_amends(fl_writing *w) {
	const fl_session_issue *before = fl_session_issue_of(w->session, w->issue->amends);
	const char *issued = before ? fl_sheet_printf(w->sheet, ", issued on %s,", fl_word_day(w->sheet, before->day)) : "";
	fl_sheet_addf(w->sheet, FL_BLOCK_STATEMENT, "This certificate amends certificate %s%s and replaces it.",
	              w->issue->amends, issued);
	fl_sheet_add_led(w->sheet, FL_BLOCK_TEXT, "Reason of the amendment:", "%s",
	                 fl_word_sentence(w->sheet, w->issue->amends_reason));
}

/* "performed and authorised" */
static const char *parts_in_words(fl_writing *w, unsigned parts) {
	const char *words = "";
	for (fl_part part = 0; part < FL_PARTS; part++)
		if (parts >> part & 1)
			words = fl_sheet_printf(w->sheet, "%s%s%s", words,
			                        !*words               ? ""
			                        : parts >> (part + 1) ? ", "
			                                              : " and ",
			                        fl_part_word(part));
	return words;
}

/* " It counts as issued only with ..."; "" where its procedure wants no signature. */
static const char *signing_words(fl_writing *w) {
	unsigned wanted = w->procedure->signatures;
	bool several = (wanted & (wanted - 1)) != 0;
	if (wanted == 0)
		return "";
	return fl_sheet_printf(w->sheet, " It counts as issued only with the electronic %s of who %s it%s.",
	                       several ? "signatures" : "signature", parts_in_words(w, wanted),
	                       several ? ", each another person" : "");
}

static void write_signatures(fl_writing *w) {
	static const char *const heads[FL_PARTS] = {"Performed by", "Reviewed by", "Authorised by"};
	const char *names[FL_PARTS] = {fl_writing_setting(w, "performed-by"), NULL, w->issue->authorised_by};
	const char *shown[FL_PARTS];
	int parts[FL_PARTS];
	size_t count = 0;
	for (fl_part part = 0; part < FL_PARTS; part++)
		if (part != FL_PART_REVIEWED || w->procedure->signatures >> part & 1) {
			shown[count] = heads[part];
			parts[count++] = (int)part;
		}
	fl_block *block = fl_sheet_add_grid(w->sheet, FL_BLOCK_SIGNATURES, shown, count);
	for (size_t i = 0; i < count; i++) {
		const char *name = names[parts[i]];
		if (block)
			block->parts[i] = parts[i];
		fl_sheet_pair(w->sheet, block, i, "name", name);
		fl_sheet_pairf(w->sheet, block, i, fl_word_is_empty(name) ? "name, date and signature" : "date and signature",
		               "%s", "");
	}
}

void fl_write_close(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	if (w->issue->amends)
		write_amends(w);
	fl_sheet_add_led(
	    sheet, FL_BLOCK_SMALL, "Validity.",
	    "The results relate only to the item named on the first page, as it was on the day of the calibration and "
	    "under the conditions stated. This certificate may be copied only in full, unless the issuer agrees in "
	    "writing.%s%s",
	    w->issue->amends ? "" : " It amends no earlier certificate.", signing_words(w));
	write_signatures(w);
	fl_sheet_addf(sheet, FL_BLOCK_END, "End of certificate %s", w->issue->number);
}
