/* command_history.c - history, due, lookback: what the book says of the years.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "book.h"
#include "history.h"
#include "json.h"
#include "lookback.h"
#include "report_parts.h"

static fl_status print_text(const fl_cli *cli, fl_text *text, fl_status status, fl_error *err) {
	if (status >= 0 && text->failed)
		status = fl_fail(err, FL_E_MEMORY, "out of memory");
	if (status >= 0)
		fwrite(text->data ? text->data : "", 1, text->length, cli->out);
	fl_text_free(text);
	return status;
}

static const char *serial_of(const fl_cli *cli) {
	return cli->argument_count > 1 ? cli->arguments[1] : NULL;
}

/* ---- history -------------------------------------------------------------------------------------------------------
 */

fl_status fl_command_history(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_arena arena = {0};
	fl_known_instrument instrument;
	fl_history history = {0};
	fl_text text = {0};
	int columns;
	fl_status status = fl_cli_width(cli, &columns, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status >= 0)
		status = fl_book_instrument(store, cli->arguments[0], serial_of(cli), &arena, &instrument, err);
	if (status >= 0)
		status = fl_history_load(store, &instrument, cli->values[FL_OPT_FOLLOW], cli->values[FL_OPT_FLEET] != NULL,
		                         &history, err);
	if (status >= 0 && cli->values[FL_OPT_JSON])
		status = fl_history_json(&history, &text, err);
	else if (status >= 0)
		fl_history_text(&history, columns, &text);
	status = print_text(cli, &text, status, err);
	fl_history_free(&history);
	fl_arena_free(&arena);
	fl_store_close(store);
	return status;
}

/* ---- due ------------------------------------------------------------------------------------------------------------
 */

static void due_json(const fl_due *due, size_t count, fl_day today, fl_text *out) {
	fl_json to = {.out = out, .start = out->length};
	fl_json_begin(&to, NULL, '{');
	fl_json_string(&to, "format", "foundleft-due-1");
	fl_json_day(&to, "day", today);
	fl_json_begin(&to, "instruments", '[');
	for (size_t i = 0; i < count; i++) {
		fl_json_begin(&to, NULL, '{');
		fl_json_string(&to, "tag", due[i].tag);
		fl_json_string(&to, "serial", due[i].serial);
		fl_json_string(&to, "site", due[i].site);
		fl_json_string(&to, "last_record", due[i].number);
		fl_json_day(&to, "last", due[i].day);
		fl_json_day(&to, "due", due[i].due);
		if (due[i].due == FL_NO_DAY)
			fl_json_null(&to, "days_left");
		else
			fl_json_integer(&to, "days_left", due[i].due - today);
		fl_json_end(&to, '}');
	}
	fl_json_end(&to, ']');
	fl_json_end(&to, '}');
	fl_text_add(out, "\n");
}

static void due_state(const fl_due *due, fl_day today, char out[FL_CELL_SIZE]) {
	long days = due->due == FL_NO_DAY ? 0 : (long)due->due - today;
	if (due->due == FL_NO_DAY)
		snprintf(out, FL_CELL_SIZE, "no interval agreed");
	else if (days < 0)
		snprintf(out, FL_CELL_SIZE, "OVERDUE %ld day%s", -days, days == -1 ? "" : "s");
	else if (days == 0)
		snprintf(out, FL_CELL_SIZE, "today");
	else
		snprintf(out, FL_CELL_SIZE, "in %ld day%s", days, days == 1 ? "" : "s");
}

static void due_text(const fl_due *due, size_t count, fl_day today, int columns, fl_text *out) {
	static const fl_table_column heads[] = {{"due", "", FL_ALIGN_LEFT, true},   {"", "", FL_ALIGN_LEFT, false},
	                                        {"tag", "", FL_ALIGN_LEFT, true},   {"serial", "", FL_ALIGN_LEFT, false},
	                                        {"site", "", FL_ALIGN_LEFT, false}, {"last", "", FL_ALIGN_LEFT, false}};
	fl_table table;
	char day[FL_DAY_SIZE];
	fl_table_begin(&table, heads, 6, count);
	for (size_t i = 0; i < count; i++) {
		fl_report_fit(fl_day_format(due[i].due, day), 10, fl_table_cell(&table, i, 0));
		due_state(&due[i], today, fl_table_cell(&table, i, 1));
		fl_report_fit(due[i].tag, 12, fl_table_cell(&table, i, 2));
		fl_report_fit(due[i].serial, 12, fl_table_cell(&table, i, 3));
		fl_report_fit(due[i].site, columns < 90 ? 14 : 30, fl_table_cell(&table, i, 4));
		fl_report_fit(fl_day_format(due[i].day, day), 10, fl_table_cell(&table, i, 5));
	}
	fl_text_printf(out, "Due, soonest first (%s)\n\n", fl_day_format(today, day));
	fl_table_end(&table, columns, out);
}

static fl_status today_of(const fl_cli *cli, fl_day *out, fl_error *err) {
	*out = fl_day_of(fl_cli_now() + 60 * fl_cli_utc_offset_min(fl_cli_now()));
	return cli->values[FL_OPT_ON] ? fl_day_parse(cli->values[FL_OPT_ON], out, err) : FL_OK;
}

fl_status fl_command_due(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_arena arena = {0};
	fl_due *due = NULL;
	fl_text text = {0};
	fl_day today = FL_NO_DAY;
	size_t count = 0;
	int columns;
	fl_status status = fl_cli_width(cli, &columns, err);
	if (status >= 0)
		status = today_of(cli, &today, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status >= 0)
		status = fl_store_due(store, &arena, &due, &count, err);
	if (status >= 0 && cli->values[FL_OPT_JSON])
		due_json(due, count, today, &text);
	else if (status >= 0)
		due_text(due, count, today, columns, &text);
	status = print_text(cli, &text, status, err);
	fl_arena_free(&arena);
	fl_store_close(store);
	return status;
}

/* ---- look-back ---- */

/* The record asked for, or the latest whose as-found was out of tolerance; *found past the end where there is none. */
static fl_status pick(const fl_cli *cli, const fl_record_list *list, fl_arena *arena, size_t *found, fl_error *err) {
	const char *number = cli->values[FL_OPT_RECORD];
	fl_lookback tried;
	fl_status status = FL_OK;
	*found = list->count;
	for (size_t i = list->count; status >= 0 && *found == list->count && i-- > 0;) {
		if (number && strcmp(list->records[i].number, number) != 0)
			continue;
		status = fl_trend_lookback(i > 0 ? &list->records[i - 1] : NULL, &list->records[i], arena, &tried, err);
		if (status >= 0 && (number || tried.needed))
			*found = i;
	}
	if (status >= 0 && number && *found == list->count)
		return fl_fail(err, FL_E_NOT_FOUND, "the instrument has no record %s", number);
	return status;
}

static fl_status load_lookback(const fl_cli *cli, fl_store *store, fl_lookback_report *report, fl_record_list *list,
                               fl_arena *arena, fl_error *err) {
	size_t i = 0;
	fl_status status = fl_book_instrument(store, cli->arguments[0], serial_of(cli), arena, &report->instrument, err);
	if (status >= 0)
		status = fl_store_history(store, report->instrument.id, false, list, err);
	if (status >= 0)
		status = pick(cli, list, arena, &i, err);
	if (status < 0 || i == list->count)
		return status;
	report->record = &list->records[i];
	report->before = i > 0 ? &list->records[i - 1] : NULL;
	status = fl_trend_lookback(report->before, report->record, arena, &report->result, err);
	if (status >= 0 && report->before)
		status = fl_store_papers(store, report->before->digest, arena, &report->papers, &report->paper_count, err);
	return status;
}

fl_status fl_command_lookback(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_arena arena = {0};
	fl_record_list list = {0};
	fl_lookback_report report = {0};
	fl_text text = {0};
	int columns;
	fl_status status = fl_cli_width(cli, &columns, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status >= 0)
		status = load_lookback(cli, store, &report, &list, &arena, err);
	if (status >= 0 && cli->values[FL_OPT_JSON])
		status = fl_lookback_json(&report, &text, err);
	else if (status >= 0)
		fl_lookback_text(&report, columns, &text);
	status = print_text(cli, &text, status, err);
	fl_record_list_free(&list);
	fl_arena_free(&arena);
	fl_store_close(store);
	return status;
}
