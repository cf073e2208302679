/* history_json.c - the years of one instrument as one JSON object for programs; every key stands in docs/json.md.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "history.h"

#include <math.h>
#include <string.h>

#include "json.h"

#define FORMAT "foundleft-history-1"

static void write_point(fl_json *to, const fl_kept_point *p) {
	fl_json_begin(to, NULL, '{');
	fl_json_integer(to, "point", p->point);
	fl_json_word(to, "oil", p->oil);
	fl_json_word(to, "lot", p->lot);
	fl_json_percent(to, "ideal_pct_span", p->x);
	fl_json_percent(to, "error_pct_span", p->error_span);
	fl_json_percent(to, "expanded_uncertainty_pct_span", p->U_span);
	fl_json_number(to, "coverage_factor", p->k);
	fl_json_percent(to, "tolerance_pct_span", p->tolerance_span);
	fl_json_word(to, "verdict", p->verdict);
	fl_json_end(to, '}');
}

static void write_run(fl_json *to, const char *name, const fl_kept_run *run) {
	static const char *const states[] = {"none", "taken", "same"};
	fl_json_begin(to, name, '{');
	fl_json_string(to, "state", states[run->state]);
	fl_json_percent(to, "zero_error_pct_span", run->zero_span);
	fl_json_percent(to, "zero_error_u_pct_span", run->zero_u_span);
	fl_json_percent(to, "span_error_pct_span", run->span_span);
	fl_json_percent(to, "span_error_u_pct_span", run->span_u_span);
	fl_json_percent(to, "hysteresis_pct_span", run->hysteresis_span);
	fl_json_word(to, "verdict", run->verdict);
	fl_json_begin(to, "points", '[');
	for (size_t i = 0; i < run->point_count; i++)
		write_point(to, &run->points[i]);
	fl_json_end(to, ']');
	fl_json_end(to, '}');
}

static void write_work(fl_json *to, unsigned work) {
	fl_json_begin(to, "work", '[');
	if (work & FL_WORK_ADJUSTED)
		fl_json_string(to, NULL, "adjusted");
	if (work & FL_WORK_CLEANED)
		fl_json_string(to, NULL, "cleaned");
	if (work & FL_WORK_REPAIRED)
		fl_json_string(to, NULL, "repaired");
	if (work & FL_WORK_BEFORE)
		fl_json_string(to, NULL, "before");
	fl_json_end(to, ']');
}

static void write_record(fl_json *to, const fl_record *r) {
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "number", r->number);
	fl_json_string(to, "digest", r->digest);
	fl_json_word(to, "amends", r->replaces_number);
	fl_json_day(to, "day", r->day);
	fl_json_day(to, "due", r->due);
	fl_json_number(to, "running_hours", r->running_hours);
	fl_json_word(to, "performed_by", r->performed_by);
	write_work(to, r->work);
	write_run(to, "as_found", &r->as_found);
	write_run(to, "as_left", &r->as_left);
	fl_json_end(to, '}');
}

static void write_tooth(fl_json *to, const fl_tooth *t) {
	fl_json_begin(to, NULL, '{');
	fl_json_day(to, "day", t->day);
	fl_json_string(to, "number", t->number);
	fl_json_percent(to, "as_found_pct_span", t->as_found);
	fl_json_percent(to, "as_left_pct_span", t->as_left);
	fl_json_percent(to, "chained_pct_span", t->chained);
	fl_json_percent(to, "tolerance_pct_span", t->tolerance);
	fl_json_percent(to, "expanded_uncertainty_pct_span", t->U);
	fl_json_integer(to, "stretch", t->stretch);
	fl_json_boolean(to, "breaks", t->breaks);
	fl_json_end(to, '}');
}

static void write_drift(fl_json *to, const fl_drift *d) {
	fl_json_begin(to, "drift", '{');
	fl_json_boolean(to, "determined", d->determined);
	fl_json_integer(to, "intervals", d->intervals);
	fl_json_percent(to, "slope_pct_span_per_year", d->slope);
	fl_json_percent(to, "slope_u_pct_span_per_year", d->se);
	fl_json_percent(to, "naive_slope_pct_span_per_year", d->naive_slope);
	fl_json_percent(to, "acceleration_pct_span_per_year2", d->has_curvature ? d->acceleration : (double)NAN);
	fl_json_number(to, "t_acceleration", d->has_curvature ? d->t_curvature : (double)NAN);
	fl_json_number(to, "t_critical", d->has_curvature ? d->t_critical : (double)NAN);
	fl_json_boolean(to, "accelerates", d->accelerates);
	fl_json_boolean(to, "slows", d->slows);
	fl_json_string(to, "sentence", d->sentence);
	fl_json_end(to, '}');
}

static void write_forecast(fl_json *to, const fl_forecast *f) {
	fl_json_begin(to, "forecast", '{');
	fl_json_boolean(to, "determined", f->determined);
	fl_json_day(to, "from", f->from);
	fl_json_percent(to, "start_pct_span", f->start);
	fl_json_percent(to, "guarded_limit_pct_span", f->limit);
	fl_json_day(to, "limit_by_mean", f->by_mean);
	fl_json_day(to, "limit_by_95_percent_bound", f->by_bound);
	fl_json_string(to, "sentence", f->sentence);
	fl_json_end(to, '}');
}

static void write_followed(fl_json *to, const fl_followed *f, bool chosen) {
	fl_json_begin(to, NULL, '{');
	fl_json_string(to, "name", f->name);
	fl_json_boolean(to, "chosen", chosen);
	fl_json_begin(to, "teeth", '[');
	for (size_t i = 0; i < f->saw.count; i++)
		write_tooth(to, &f->saw.teeth[i]);
	fl_json_end(to, ']');
	write_drift(to, &f->drift);
	write_forecast(to, &f->forecast);
	fl_json_end(to, '}');
}

static void write_proposals(fl_json *to, const fl_history *h) {
	fl_json_begin(to, "intervals", '[');
	for (int method = 0; method < FL_INTERVAL_METHODS; method++) {
		const fl_proposal *p = &h->proposals[method];
		if (method == FL_INTERVAL_RELIABILITY && !h->has_fleet)
			continue;
		fl_json_begin(to, NULL, '{');
		fl_json_string(to, "method", fl_interval_method_name(p->method));
		fl_json_boolean(to, "determined", p->determined);
		if (p->determined && p->months > 0)
			fl_json_integer(to, "months", p->months);
		else
			fl_json_null(to, "months");
		fl_json_number(to, "hours", p->method == FL_INTERVAL_HOURS ? p->hours : (double)NAN);
		fl_json_string(to, "reason", p->reason);
		fl_json_end(to, '}');
	}
	fl_json_end(to, ']');
}

fl_status fl_history_json(const fl_history *h, fl_text *out, fl_error *err) {
	fl_json to = {.out = out, .start = out->length};
	fl_json_begin(&to, NULL, '{');
	fl_json_string(&to, "format", FORMAT);
	fl_json_string(&to, "tag", h->instrument.tag);
	fl_json_string(&to, "serial", h->instrument.serial);
	fl_json_string(&to, "site", h->instrument.site);
	fl_json_day(&to, "due", h->list.records[h->list.count - 1].due);
	fl_json_begin(&to, "records", '[');
	for (size_t i = 0; i < h->list.count; i++)
		write_record(&to, &h->list.records[i]);
	fl_json_end(&to, ']');
	fl_json_begin(&to, "followed", '[');
	for (size_t i = 0; i < h->count; i++)
		write_followed(&to, &h->followed[i], i == h->chosen);
	fl_json_end(&to, ']');
	write_proposals(&to, h);
	fl_json_boolean(&to, "lookback_needed", h->lookback.needed);
	fl_json_string(&to, "lookback", h->lookback.sentence);
	fl_json_end(&to, '}');
	fl_text_add(out, "\n");
	return to.bad_text ? fl_fail(err, FL_E_SYNTAX, "a text of the book is not UTF-8") : FL_OK;
}
