/* content.c - the record becomes a sheet: in which order, and what the document says of itself.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * What a calibration certificate has to hold: ISO/IEC 17025:2017, 7.8.2 and 7.8.4. Everything comes from the record and
 * from fl_issue; nothing is added by hand. */
#include "writing.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

const char *fl_writing_setting(const fl_writing *w, const char *id) {
	const fl_setting *setting = fl_session_setting(w->session, id);
	if (!setting || fl_word_is_empty(setting->typed))
		return NULL;
	const char *unit = isnan(setting->value) ? "" : fl_unit_text(setting->unit);
	if (!*unit || strstr(setting->typed, unit))
		return setting->typed;
	return fl_sheet_printf(w->sheet, "%s %s", setting->typed, unit);
}

const char *fl_writing_point_name(const fl_writing *w, int point) {
	if (point == FL_POINT_ZERO)
		return "stopped zero";
	size_t index = (size_t)point;
	if (point >= 0 && index < w->session->point_count && !fl_word_is_empty(w->session->points[index].oil))
		return fl_sheet_printf(w->sheet, "%s (%s)", w->session->points[index].oil, w->session->points[index].lot);
	if (point >= 0 && point < w->procedure->point_count)
		return fl_sheet_printf(w->sheet, "%s %% of span",
		                       fl_word_plain(w->sheet, w->procedure->points[point].position_pct_span, 1));
	return fl_sheet_printf(w->sheet, "point %d", point + 1);
}

const char *fl_writing_why_missing(const fl_writing *w, const fl_run_result *run) {
	const char *told = w->session->runs[run->kind].missing_reason;
	if (!fl_word_is_empty(told))
		return told;
	return fl_word_is_empty(run->unavailable_reason) ? "the run was not taken" : run->unavailable_reason;
}

const char *fl_writing_run_title(fl_run_kind kind) {
	return kind == FL_RUN_AS_FOUND ? "As-found" : "As-left";
}

static void write_title(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	const fl_issue *issue = w->issue;
	bool pressure = w->procedure->medium == FL_MEDIUM_PRESSURE;
	fl_sheet_issuer(sheet, issue->issuer, issue->issuer_address);
	sheet->title = "Calibration certificate";
	sheet->number_label = "Certificate number";
	sheet->number = fl_sheet_copy(sheet, issue->number);
	sheet->subtitle = fl_sheet_printf(sheet, "%s %s, serial number %s",
	                                  pressure ? "Differential-pressure transmitter of viscosity sensor"
	                                           : "Capillary viscosity sensor",
	                                  w->instrument->tag, w->instrument->serial);
	sheet->running = fl_sheet_printf(sheet, "%s  ·  %s, serial number %s  ·  %s", sheet->issuer, w->instrument->tag,
	                                 w->instrument->serial, fl_word_day(sheet, w->session->day));
	sheet->mark = w->result->traceable ? "" : "Indicative, not traceable";
	sheet->author = sheet->issuer;
	sheet->subject = sheet->subtitle;
	sheet->program = fl_sheet_printf(sheet, "foundleft %s", issue->program_version ? issue->program_version : "");
	sheet->fingerprint =
	    fl_sheet_printf(sheet, "%s %s", issue->journal_digest ? issue->journal_digest : "", issue->number);
	sheet->source = issue->journal_digest ? fl_sheet_printf(sheet, "journal-sha256:%s", issue->journal_digest) : "";
	sheet->made_at = issue->issued_at;
	sheet->utc_offset_min = issue->utc_offset_min;
}

static void write_all(fl_writing *w) {
	write_title(w);
	fl_write_head(w);
	fl_write_statements(w);
	fl_write_adjustments(w);
	fl_write_chart(w);
	fl_write_run(w, FL_RUN_AS_FOUND);
	fl_write_run(w, FL_RUN_AS_LEFT);
	fl_write_characteristics(w);
	fl_write_functions(w);
	fl_write_opinions(w);
	fl_write_meaning(w);
	fl_write_budgets(w);
	fl_write_standards(w);
	fl_write_gates(w);
	fl_write_record(w);
	fl_write_close(w);
}

#define MOST_IN_NUMBER 40

/* A certificate without these would not be one. */
static fl_status check_issue(const fl_issue *issue, const fl_stock *stock, fl_error *err) {
	fl_place number = {.field = "number"}, issued = {.field = "issued on"};
	if (fl_word_is_empty(issue->number))
		return fl_fail_at(err, FL_E_VALUE, number, "a certificate needs its unique number");
	if (fl_text_has_control(issue->number))
		return fl_fail_at(err, FL_E_VALUE, number, "the number holds a control character; write it without");
	if (!fl_utf8_valid(issue->number, strlen(issue->number)) || fl_utf8_columns(issue->number) > MOST_IN_NUMBER)
		return fl_fail_at(err, FL_E_VALUE, number,
		                  "a certificate's number has at most %d characters, so that it fits on every page",
		                  MOST_IN_NUMBER);
	if (!issue->amends != !issue->amends_reason)
		return fl_fail_at(err, FL_E_VALUE, (fl_place){.field = "amends"},
		                  "a certificate that amends another says which one and why");
	if (issue->issued_on == FL_NO_DAY)
		return fl_fail_at(err, FL_E_VALUE, issued, "a certificate needs its date of issue");
	if (stock->instrument_count == 0)
		return fl_fail(err, FL_E_VALUE, "the session names no instrument");
	return FL_OK;
}

static int signal_decimals(fl_signal signal) {
	return signal == FL_SIGNAL_02_1_BAR ? 4 : 3;
}

fl_status fl_certificate_content(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                                 const fl_result *result, const fl_issue *issue, fl_sheet **out, fl_error *err) {
	fl_status status = check_issue(issue, stock, err);
	if (status != FL_OK)
		return status;
	fl_sheet *sheet = fl_sheet_new();
	if (!sheet)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the certificate");
	const fl_instrument *instrument = &stock->instruments[0];
	const fl_scale *scale = &instrument->scale;
	bool even = scale->dial_unit == FL_DIAL_MM2_S || scale->dial_unit == FL_DIAL_MPA_S;
	fl_writing w = {.sheet = sheet,
	                .session = session,
	                .procedure = procedure,
	                .stock = stock,
	                .instrument = instrument,
	                .result = result,
	                .issue = issue,
	                .dial_unit = fl_unit_text(fl_physics_dial_unit(scale->dial_unit)),
	                .signal_unit = fl_unit_text(fl_physics_signal_range(scale->signal)->unit),
	                .signal_decimals = signal_decimals(scale->signal),
	                .dial_span = even ? scale->high - scale->low : NAN};
	write_all(&w);
	if (sheet->failed) {
		fl_sheet_free(sheet);
		return fl_fail(err, FL_E_MEMORY, "out of memory for the certificate");
	}
	*out = sheet;
	return FL_OK;
}
