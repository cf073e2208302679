/* export.c - every record as CSV and as JSON.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * CSV: RFC 4180, one row for each point of each run; a record without points has one row with those cells empty.
 * Numbers stand in full (fractions of span), days and times as in the book. A cell of text that begins, spaces left
 * out, with = + - @ or their full-width forms, or with a tab or carriage return, gets an apostrophe in front: a
 * spreadsheet would run it as a formula. Numbers are never touched: "-0.012" stays a number.
 */
#include "facts.h"
#include "sql.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* The columns of the CSV, in their order. docs/book.md explains them to people. */
static const char heading[] =
    "number,amends,reason,origin,sequence,digest,site,tag,serial,position,day,closed,due,"
    "interval_months,running_hours,procedure,performed_by,work,dial_unit,scale_low,scale_high,"
    "set_point,run,run_state,run_verdict,zero_error,zero_u,span_error,span_u,hysteresis,point,"
    "oil,lot,x,error,expanded_uncertainty,k,tolerance,verdict\r\n";

typedef struct exporter {
	const fl_sink *sink;
	fl_text text;
	bool first;
} exporter;

static fl_status flush(exporter *e, fl_error *err) {
	if (e->text.failed)
		return fl_sql_memory(err);
	fl_status status = e->text.length ? e->sink->take(e->sink->self, e->text.data, e->text.length, err) : FL_OK;
	fl_text_clear(&e->text);
	return status;
}

/* ---- CSV -------------------------------------------------------------------------------------------------------- */

/* Would a spreadsheet take the text for a formula? */
static bool is_formula(const char *text) {
	static const char *const leads[] = {"=",      "+",      "-",      "@",      "\t",    "\r",
	                                    "\uff1d", "\uff0b", "\uff0d", "\uff20", "\u2212"};
	text += strspn(text, " \n");
	for (size_t i = 0; i < sizeof leads / sizeof *leads; i++)
		if (strncmp(text, leads[i], strlen(leads[i])) == 0)
			return true;
	return false;
}

static void cell(fl_text *out, const char *text) {
	bool formula = is_formula(text), quoted = strpbrk(text, ",\"\r\n") != NULL || *text == ' ';
	if (quoted)
		fl_text_add(out, "\"");
	if (formula)
		fl_text_add(out, "'");
	for (; *text; text++) {
		if (*text == '"')
			fl_text_add(out, "\"");
		fl_text_append(out, text, 1);
	}
	fl_text_add(out, quoted ? "\"," : ",");
}

static void number(fl_text *out, double value) {
	char digits[REAL_SIZE];
	if (!isnan(value))
		fl_text_add(out, fl_real_write(value, digits));
	fl_text_add(out, ",");
}

static void work_words(unsigned work, char out[48]) {
	snprintf(out, 48, "%s%s%s%s", work & FL_WORK_ADJUSTED ? "adjusted " : "", work & FL_WORK_CLEANED ? "cleaned " : "",
	         work & FL_WORK_REPAIRED ? "repaired " : "", work & FL_WORK_BEFORE ? "before " : "");
	size_t length = strlen(out);
	if (length)
		out[length - 1] = '\0';
}

static void csv_record(fl_text *out, const fl_record *r) {
	char day[FL_DAY_SIZE], due[FL_DAY_SIZE], closed[FL_UTC_SIZE], work[48];
	const char *const names[] = {r->number, r->replaces_number, r->reason};
	for (size_t i = 0; i < sizeof names / sizeof *names; i++)
		cell(out, names[i]);
	fl_text_printf(out, "%s,%lld,%s,", r->origin, (long long)r->sequence, r->digest);
	const char *const place[] = {r->site, r->tag, r->serial, r->position};
	for (size_t i = 0; i < sizeof place / sizeof *place; i++)
		cell(out, place[i]);
	fl_text_printf(out, "%s,%s,%s,%d,", fl_day_format(r->day, day), fl_utc_format(r->closed_at, closed),
	               r->due == FL_NO_DAY ? "" : fl_day_format(r->due, due), r->interval_months);
	number(out, r->running_hours);
	cell(out, r->procedure);
	cell(out, r->performed_by);
	work_words(r->work, work);
	cell(out, work);
	cell(out, r->dial_unit);
	number(out, r->scale_low);
	number(out, r->scale_high);
	number(out, r->set_point);
}

static const char *state_word(fl_kept_state state) {
	return state == FL_KEPT_NONE ? "none" : state == FL_KEPT_TAKEN ? "taken" : "same";
}

static void csv_run(fl_text *out, const char *name, const fl_kept_run *run) {
	fl_text_printf(out, "%s,%s,", name, state_word(run->state));
	cell(out, run->verdict);
	const double numbers[] = {run->zero_span, run->zero_u_span, run->span_span, run->span_u_span, run->hysteresis_span};
	for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
		number(out, numbers[i]);
}

static void csv_point(fl_text *out, const fl_kept_point *p) {
	fl_text_printf(out, "%d,", p->point);
	cell(out, p->oil);
	cell(out, p->lot);
	const double numbers[] = {p->x, p->error_span, p->U_span, p->k, p->tolerance_span};
	for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
		number(out, numbers[i]);
	cell(out, p->verdict);
}

/* The comma behind the last cell becomes the end of the row. */
static void end_row(fl_text *out) {
	if (!out->failed && out->length)
		out->length--;
	fl_text_add(out, "\r\n");
}

static void csv_rows(fl_text *out, const fl_record *r, const char *name, const fl_kept_run *run) {
	size_t rows = run->point_count ? run->point_count : 1;
	for (size_t i = 0; i < rows; i++) {
		csv_record(out, r);
		csv_run(out, name, run);
		if (run->point_count)
			csv_point(out, &run->points[i]);
		else
			fl_text_add(out, ",,,,,,,,,");
		end_row(out);
	}
}

static fl_status csv_visit(void *self, const fl_record *r, const char *journal, size_t length, fl_error *err) {
	exporter *e = self;
	(void)journal;
	(void)length;
	csv_rows(&e->text, r, "as-found", &r->as_found);
	csv_rows(&e->text, r, "as-left", &r->as_left);
	return flush(e, err);
}

fl_status fl_store_export_csv(fl_store *store, const fl_sink *sink, const fl_store_watch *watch, fl_error *err) {
	exporter e = {.sink = sink};
	fl_text_add(&e.text, heading);
	fl_status status = flush(&e, err);
	if (status >= 0)
		status = fl_store_each(store, false, csv_visit, &e, watch, err);
	fl_text_free(&e.text);
	return status;
}

/* ---- JSON (RFC 8259) -------------------------------------------------------------------------------------------- */

static void json_string(fl_text *out, const char *text) {
	fl_text_add(out, "\"");
	for (; *text; text++) {
		if (*text == '"' || *text == '\\')
			fl_text_printf(out, "\\%c", *text);
		else if ((unsigned char)*text < 0x20)
			fl_text_printf(out, "\\u%04x", (unsigned)*text);
		else
			fl_text_append(out, text, 1);
	}
	fl_text_add(out, "\"");
}

static void json_text(fl_text *out, const char *key, const char *value) {
	fl_text_printf(out, "\"%s\":", key);
	json_string(out, value);
	fl_text_add(out, ",");
}

static void json_number(fl_text *out, const char *key, double value) {
	char digits[REAL_SIZE];
	fl_text_printf(out, "\"%s\":%s,", key, isnan(value) ? "null" : fl_real_write(value, digits));
}

/* The comma behind the last member gives way to the closing mark. */
static void json_close(fl_text *out, const char *mark) {
	if (!out->failed && out->length && out->data[out->length - 1] == ',')
		out->length--;
	fl_text_add(out, mark);
}

static void json_point(fl_text *out, const fl_kept_point *p) {
	fl_text_printf(out, "{\"point\":%d,", p->point);
	json_text(out, "oil", p->oil);
	json_text(out, "lot", p->lot);
	json_number(out, "x", p->x);
	json_number(out, "error", p->error_span);
	json_number(out, "expanded_uncertainty", p->U_span);
	json_number(out, "k", p->k);
	json_number(out, "tolerance", p->tolerance_span);
	json_text(out, "verdict", p->verdict);
	json_close(out, "},");
}

static void json_run(fl_text *out, const char *key, const fl_kept_run *run) {
	fl_text_printf(out, "\"%s\":{", key);
	json_text(out, "state", state_word(run->state));
	json_text(out, "verdict", run->verdict);
	json_number(out, "zero_error", run->zero_span);
	json_number(out, "zero_u", run->zero_u_span);
	json_number(out, "span_error", run->span_span);
	json_number(out, "span_u", run->span_u_span);
	json_number(out, "hysteresis", run->hysteresis_span);
	fl_text_add(out, "\"points\":[");
	for (size_t i = 0; i < run->point_count; i++)
		json_point(out, &run->points[i]);
	json_close(out, "]},");
}

static void json_day(fl_text *out, const char *key, fl_day day) {
	char text[FL_DAY_SIZE];
	if (day == FL_NO_DAY)
		fl_text_printf(out, "\"%s\":null,", key);
	else
		json_text(out, key, fl_day_format(day, text));
}

static void json_names(fl_text *out, const fl_record *r) {
	json_text(out, "number", r->number);
	json_text(out, "amends", r->replaces_number);
	json_text(out, "reason", r->reason);
	json_text(out, "origin", r->origin);
	fl_text_printf(out, "\"sequence\":%lld,", (long long)r->sequence);
	json_text(out, "digest", r->digest);
	json_text(out, "previous", r->previous);
	json_text(out, "journal_digest", r->journal_digest);
	json_text(out, "site", r->site);
	json_text(out, "tag", r->tag);
	json_text(out, "serial", r->serial);
	json_text(out, "position", r->position);
	json_text(out, "owner", r->owner);
}

static void json_items(fl_text *out, const fl_record *r) {
	fl_text_add(out, "\"used\":[");
	for (size_t i = 0; i < r->item_count; i++) {
		fl_text_add(out, "{");
		json_text(out, "kind", r->items[i].kind);
		json_text(out, "name", r->items[i].name);
		json_text(out, "detail", r->items[i].detail);
		json_close(out, "},");
	}
	json_close(out, "],");
}

static void json_record(fl_text *out, const fl_record *r) {
	char utc[FL_UTC_SIZE], work[48];
	fl_text_add(out, "{");
	json_names(out, r);
	json_day(out, "day", r->day);
	json_text(out, "closed", fl_utc_format(r->closed_at, utc));
	json_text(out, "kept", fl_utc_format(r->kept_at, utc));
	json_day(out, "due", r->due);
	fl_text_printf(out, "\"interval_months\":%d,", r->interval_months);
	json_number(out, "due_hours", r->due_hours);
	json_number(out, "running_hours", r->running_hours);
	json_text(out, "procedure", r->procedure);
	json_text(out, "program", r->program);
	json_text(out, "performed_by", r->performed_by);
	work_words(r->work, work);
	json_text(out, "work", work);
	json_text(out, "dial_unit", r->dial_unit);
	json_number(out, "scale_low", r->scale_low);
	json_number(out, "scale_high", r->scale_high);
	json_number(out, "set_point", r->set_point);
	json_number(out, "adjust_limit", r->adjust_limit_span);
	json_run(out, "as_found", &r->as_found);
	json_run(out, "as_left", &r->as_left);
	json_items(out, r);
	json_close(out, "}");
}

static fl_status json_visit(void *self, const fl_record *r, const char *journal, size_t length, fl_error *err) {
	exporter *e = self;
	(void)journal;
	(void)length;
	fl_text_add(&e->text, e->first ? "\n" : ",\n");
	e->first = false;
	json_record(&e->text, r);
	return flush(e, err);
}

fl_status fl_store_export_json(fl_store *store, const fl_sink *sink, const fl_store_watch *watch, fl_error *err) {
	exporter e = {.sink = sink, .first = true};
	fl_text_add(&e.text, "[");
	fl_status status = fl_store_each(store, false, json_visit, &e, watch, err);
	fl_text_add(&e.text, "\n]\n");
	if (status >= 0)
		status = flush(&e, err);
	fl_text_free(&e.text);
	return status;
}
