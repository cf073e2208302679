/* lookback.c - the report on an instrument that was found out of tolerance, to be signed with a disposition.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "lookback.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "history.h"
#include "json.h"
#include "report_parts.h"

static const char *const moments[FL_LOOKBACK_DAYS] = {"calibrated before", "crossed at the earliest",
                                                      "crossed by the values", "crossed at the latest",
                                                      "found out of tolerance"};

/* ---- the text ------------------------------------------------------------------------------------------------------
 */

static void add_head(const fl_lookback_report *r, int columns, fl_text *out) {
	char text[500], day[FL_DAY_SIZE], point[64] = "", error[FL_CELL_SIZE], limit[FL_CELL_SIZE];
	const fl_kept_point *worst = fl_history_worst(&r->record->as_found);
	fl_text_add(out, "LOOK-BACK REPORT\n\n");
	snprintf(text, sizeof text, "%.60s, serial %.60s, %.150s, %.100s", r->instrument.tag, r->instrument.serial,
	         r->instrument.site, r->record->position);
	fl_report_wrap(out, "Instrument  ", text, columns);
	if (worst)
		snprintf(text, sizeof text, "%s by record %s: %s %% of span at %s, tolerance \u00b1%s %%",
		         fl_day_format(r->record->day, day), r->record->number,
		         fl_report_signed(100.0 * worst->error_span, 2, error), fl_history_point_name(worst, point),
		         fl_report_fixed(100.0 * worst->tolerance_span, 2, limit));
	fl_report_wrap(out, "Found       ", text, columns);
	fl_text_add(out, "\n");
	fl_report_wrap(out, "", r->result.sentence, columns);
	fl_text_add(out, "\n");
}

static void add_days(const fl_lookback_report *r, int columns, fl_text *out) {
	static const fl_table_column heads[] = {{"day", "", FL_ALIGN_LEFT, true},
	                                        {"", "", FL_ALIGN_LEFT, false},
	                                        {"error at set point", "% of span", FL_ALIGN_POINT, false},
	                                        {"controller held", "", FL_ALIGN_POINT, false},
	                                        {"engine got", "", FL_ALIGN_POINT, false}};
	fl_table table;
	char text[200];
	if (!r->result.determined)
		return;
	fl_table_begin(&table, heads, 5, FL_LOOKBACK_DAYS);
	for (size_t i = 0; i < FL_LOOKBACK_DAYS; i++) {
		const fl_lookback_day *d = &r->result.days[i];
		fl_day_format(d->day, fl_table_cell(&table, i, 0));
		bool open = i == 3 && r->result.latest == FL_NO_DAY;
		snprintf(fl_table_cell(&table, i, 1), FL_CELL_SIZE, "%s", open ? "(crossing not certain)" : moments[i]);
		fl_report_signed(100.0 * d->error_at_set_point, 2, fl_table_cell(&table, i, 2));
		if (!r->result.has_set_point)
			continue;
		fl_report_fixed(r->result.set_point, 1, fl_table_cell(&table, i, 3));
		fl_report_fixed(d->true_value, 2, fl_table_cell(&table, i, 4));
	}
	fl_table_end(&table, columns, out);
	snprintf(text, sizeof text,
	         "In %s, for a fuel of the density that the dial assumes. Too low a true viscosity means fuel heated more "
	         "than meant, too high a one fuel heated less.",
	         r->record->dial_unit);
	fl_report_wrap(out, "", text, columns);
	fl_text_add(out, "\n");
}

static void add_affected(const fl_lookback_report *r, int columns, fl_text *out) {
	char text[300], from[FL_DAY_SIZE], to[FL_DAY_SIZE];
	fl_text_add(out, "Records affected\n");
	if (r->before) {
		snprintf(text, sizeof text, "record %s of %s stays true for its day; what was relied on after it is in doubt",
		         r->before->number, fl_day_format(r->before->day, from));
		fl_report_wrap(out, "  ", text, columns);
	}
	for (size_t i = 0; i < r->paper_count; i++) {
		snprintf(text, sizeof text, "certificate %.100s (%.40s)", r->papers[i].file, r->papers[i].stage);
		fl_report_wrap(out, "    ", text, columns);
	}
	fl_day begin = r->result.determined ? r->result.earliest : r->before ? r->before->day : FL_NO_DAY;
	snprintf(text, sizeof text,
	         "viscosity, fuel temperature and alarm records of the engine from %s to %s, and what was decided by them",
	         begin == FL_NO_DAY ? "the last good result" : fl_day_format(begin, from),
	         fl_day_format(r->record->day, to));
	fl_report_wrap(out, "  ", text, columns);
	fl_text_add(out, "\n");
}

static void add_disposition(int columns, fl_text *out) {
	fl_text_add(out, "Disposition (mark one, give the reason)\n"
	                 "  [ ] no effect on the plant      [ ] effect, accepted as it is\n"
	                 "  [ ] effect, followed up by:\n\n"
	                 "  reason:\n\n  name:                              date:              signature:\n\n");
	fl_report_wrap(out, "",
	               "Computed from the records by a steady drift; what the plant did in that time is for those who know "
	               "it. Local rules and the engine maker's limits decide.",
	               columns);
}

void fl_lookback_text(const fl_lookback_report *r, int columns, fl_text *out) {
	if (!r->record || !r->result.needed) {
		fl_text_printf(out, "%s was not found out of tolerance%s: there is nothing to look back on.\n",
		               r->instrument.tag, r->record ? " by this record" : "");
		return;
	}
	add_head(r, columns, out);
	add_days(r, columns, out);
	add_affected(r, columns, out);
	add_disposition(columns, out);
}

/* ---- JSON ---- */

static void write_days(fl_json *to, const fl_lookback *l) {
	fl_json_begin(to, "days", '[');
	for (int i = 0; l->determined && i < FL_LOOKBACK_DAYS; i++) {
		fl_json_begin(to, NULL, '{');
		fl_json_day(to, "day", l->days[i].day);
		fl_json_string(to, "moment", moments[i]);
		fl_json_percent(to, "error_at_set_point_pct_span", l->days[i].error_at_set_point);
		fl_json_number(to, "true_value", l->has_set_point ? l->days[i].true_value : (double)NAN);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

fl_status fl_lookback_json(const fl_lookback_report *r, fl_text *out, fl_error *err) {
	fl_json to = {.out = out, .start = out->length};
	const fl_lookback *l = &r->result;
	fl_json_begin(&to, NULL, '{');
	fl_json_string(&to, "format", "foundleft-lookback-1");
	fl_json_string(&to, "tag", r->instrument.tag);
	fl_json_string(&to, "serial", r->instrument.serial);
	fl_json_string(&to, "site", r->instrument.site);
	fl_json_boolean(&to, "needed", r->record && l->needed);
	if (r->record && l->needed) {
		fl_json_string(&to, "record", r->record->number);
		fl_json_string(&to, "record_before", r->before ? r->before->number : NULL);
		fl_json_boolean(&to, "determined", l->determined);
		fl_json_day(&to, "from", l->from);
		fl_json_day(&to, "to", l->to);
		fl_json_day(&to, "crossed", l->crossed);
		fl_json_day(&to, "earliest", l->earliest);
		fl_json_day(&to, "latest", l->latest);
		fl_json_boolean(&to, "earliest_is_before_from", l->before_from);
		fl_json_number(&to, "set_point", l->has_set_point ? l->set_point : (double)NAN);
		fl_json_string(&to, "dial_unit", r->record->dial_unit);
		write_days(&to, l);
		fl_json_string(&to, "sentence", l->sentence);
	}
	fl_json_end(&to, '}');
	fl_text_add(out, "\n");
	return to.bad_text ? fl_fail(err, FL_E_SYNTAX, "a text of the book is not UTF-8") : FL_OK;
}
