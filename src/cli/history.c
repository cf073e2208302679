/* history.c - gathers the years of one instrument from the book.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "history.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* ---- points ------------------------------------------------------------------------------------------------------ */

const fl_kept_point *fl_history_worst(const fl_kept_run *run) {
	const fl_kept_point *worst = NULL;
	double most = -1.0;
	for (size_t i = 0; run->state != FL_KEPT_NONE && i < run->point_count; i++) {
		const fl_kept_point *p = &run->points[i];
		double part = isnan(p->tolerance_span) ? fabs(p->error_span) : fabs(p->error_span) / p->tolerance_span;
		if (part > most) {
			most = part;
			worst = p;
		}
	}
	return worst;
}

const char *fl_history_point_name(const fl_kept_point *point, char out[64]) {
	if (point->point < 0)
		snprintf(out, 64, "zero");
	else if (*point->oil)
		snprintf(out, 64, "%.60s", point->oil);
	else
		snprintf(out, 64, "%.0f %%", 100.0 * point->x);
	return out;
}

/* The run that shows which points there are: that of the latest record which has one. */
static const fl_kept_run *pattern(const fl_record_list *list) {
	for (size_t i = list->count; i-- > 0;) {
		const fl_record *r = &list->records[i];
		if (r->as_left.state != FL_KEPT_NONE)
			return &r->as_left;
		if (r->as_found.state != FL_KEPT_NONE)
			return &r->as_found;
	}
	return NULL;
}

/* ---- what is followed ---------------------------------------------------------------------------------------------
 */

static fl_status follow(fl_history *h, fl_quantity_followed what, const char *name, double x, fl_error *err) {
	fl_followed *f = &h->followed[h->count++];
	snprintf(f->name, sizeof f->name, "%s", name);
	if (!isnan(x))
		snprintf(f->place, sizeof f->place, "%.0f %%", 100.0 * x);
	fl_status status = fl_trend_follow(h->list.records, h->list.count, what, &f->saw, err);
	if (status >= 0)
		status = fl_trend_drift(&f->saw, &f->drift, err);
	if (status >= 0)
		status = fl_trend_forecast(&f->saw, &f->drift, &f->forecast, err);
	return status;
}

static fl_status follow_all(fl_history *h, fl_error *err) {
	const fl_kept_run *run = pattern(&h->list);
	size_t points = run ? run->point_count : 0;
	h->followed = fl_arena_alloc(&h->arena, points + 2, sizeof *h->followed);
	if (!h->followed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the history");
	fl_status status = follow(h, (fl_quantity_followed){FL_FOLLOW_ZERO, 0}, "zero of the line", NAN, err);
	if (status >= 0)
		status = follow(h, (fl_quantity_followed){FL_FOLLOW_SPAN, 0}, "span of the line", NAN, err);
	for (size_t i = 0; status >= 0 && i < points; i++) {
		const fl_kept_point *p = &run->points[i];
		char name[64];
		fl_history_point_name(p, name);
		status = follow(h, (fl_quantity_followed){FL_FOLLOW_POINT, p->point}, p->point < 0 ? "stopped zero" : name,
		                p->point < 0 ? (double)NAN : p->x, err);
	}
	return status;
}

/* How urgent: the day of the bound; without a forecast, how much of the tolerance the last error takes. */
static bool is_more_urgent(const fl_followed *a, const fl_followed *b) {
	fl_day da = a->forecast.determined ? a->forecast.by_bound : FL_NO_DAY;
	fl_day db = b->forecast.determined ? b->forecast.by_bound : FL_NO_DAY;
	if (da != db)
		return da != FL_NO_DAY && (db == FL_NO_DAY || da < db);
	const fl_tooth *ta = &a->saw.teeth[a->saw.count - 1], *tb = &b->saw.teeth[b->saw.count - 1];
	double ea = fabs(isnan(ta->as_found) ? ta->as_left : ta->as_found);
	double eb = fabs(isnan(tb->as_found) ? tb->as_left : tb->as_found);
	return ea > eb;
}

static fl_status choose(fl_history *h, const char *what, fl_error *err) {
	bool found = false;
	for (size_t i = 0; i < h->count; i++) {
		const fl_followed *f = &h->followed[i];
		if (what) {
			size_t length = strlen(what);
			if (strcmp(f->name, what) == 0 || (length >= 4 && strncmp(f->name, what, length) == 0)) {
				h->chosen = i;
				return FL_OK;
			}
		} else if (f->saw.what.kind == FL_FOLLOW_POINT && f->saw.count > 0 &&
		           (!found || is_more_urgent(f, &h->followed[h->chosen]))) {
			h->chosen = i;
			found = true;
		}
	}
	if (!what)
		return FL_OK;
	return fl_fail(err, FL_E_USAGE,
	               "--follow takes zero, span, stopped zero, or an oil or place of the last session, not `%s`", what);
}

/* ---- what follows from it ------------------------------------------------------------------------------------------
 */

static fl_status fleet_trials(fl_store *store, fl_history *h, fl_trial **trials, size_t *n, fl_error *err) {
	fl_arena names = {0};
	fl_known_instrument *known;
	size_t count, capacity = 0;
	fl_status status = fl_store_instruments(store, NULL, &names, &known, &count, err);
	for (size_t i = 0; status >= 0 && i < count; i++) {
		fl_record_list list = {0};
		status = fl_store_history(store, known[i].id, false, &list, err);
		if (status >= 0)
			status = fl_trend_trials(list.records, list.count, &h->arena, trials, n, &capacity, err);
		fl_record_list_free(&list);
	}
	fl_arena_free(&names);
	return status;
}

static fl_status propose(fl_store *store, fl_history *h, bool fleet, fl_error *err) {
	const fl_interval_policy policy = fl_trend_policy();
	fl_followed *chosen = &h->followed[h->chosen];
	fl_trial *trials = NULL;
	fl_status status = fl_trend_staircase(h->list.records, h->list.count, &policy, &h->arena,
	                                      &h->proposals[FL_INTERVAL_STAIRCASE], err);
	if (status >= 0)
		status = fl_trend_chart(&chosen->saw, &chosen->drift, &policy, &h->proposals[FL_INTERVAL_CHART], err);
	if (status >= 0)
		status = fl_trend_hours(&chosen->saw, &policy, &h->proposals[FL_INTERVAL_HOURS], err);
	h->has_fleet = fleet;
	if (status >= 0 && fleet)
		status = fleet_trials(store, h, &trials, &h->trials, err);
	if (status >= 0 && fleet)
		status =
		    fl_trend_reliability(trials, h->trials, &policy, &h->arena, &h->proposals[FL_INTERVAL_RELIABILITY], err);
	return status;
}

static fl_status look_back(fl_history *h, fl_error *err) {
	size_t n = h->list.count;
	return fl_trend_lookback(n > 1 ? &h->list.records[n - 2] : NULL, &h->list.records[n - 1], &h->arena, &h->lookback,
	                         err);
}

fl_status fl_history_load(fl_store *store, const fl_known_instrument *instrument, const char *what, bool fleet,
                          fl_history *out, fl_error *err) {
	*out = (fl_history){.instrument = *instrument};
	fl_status status = fl_store_history(store, instrument->id, false, &out->list, err);
	if (status >= 0 && out->list.count == 0)
		status = fl_fail(err, FL_E_NOT_FOUND, "the book has no record of %s", instrument->tag);
	if (status >= 0)
		status = follow_all(out, err);
	if (status >= 0)
		status = choose(out, what, err);
	if (status >= 0)
		status = propose(store, out, fleet, err);
	return status >= 0 ? look_back(out, err) : status;
}

void fl_history_free(fl_history *h) {
	for (size_t i = 0; i < h->count; i++)
		fl_saw_free(&h->followed[i].saw);
	fl_record_list_free(&h->list);
	fl_arena_free(&h->arena);
}
