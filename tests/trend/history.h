/* history.h - records in memory for the tests of the trend: invented ones, and those of the demo.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#ifndef FOUNDLEFT_TEST_HISTORY_H
#define FOUNDLEFT_TEST_HISTORY_H

#include "check.h"
#include "foundleft/trend.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define must(call) must_at((call), &err, __LINE__)
static inline void must_at(fl_status status, const fl_error *err, int line) {
	if (status < 0)
		print_error("line %d: %s\n", line, err->message);
	assert_true(status >= 0);
}

enum { HISTORY_MOST = 24, HISTORY_POINTS = 6 };
typedef struct history {
	fl_record records[HISTORY_MOST];
	fl_kept_point found[HISTORY_MOST][HISTORY_POINTS], left[HISTORY_MOST][HISTORY_POINTS];
	size_t count;
} history;

static inline fl_record *history_record(history *h, fl_day day) {
	fl_record *r = &h->records[h->count];
	*r = (fl_record){.number = "X-1",
	                 .tag = "VT-1",
	                 .day = day,
	                 .due = FL_NO_DAY,
	                 .running_hours = NAN,
	                 .due_hours = NAN,
	                 .scale_low = 0.0,
	                 .scale_high = 50.0,
	                 .set_point = 13.0,
	                 .dial_unit = "mm²/s",
	                 .adjust_limit_span = NAN};
	r->as_found = (fl_kept_run){FL_KEPT_NONE, NAN, NAN, NAN, NAN, NAN, "", h->found[h->count], 0};
	r->as_left = (fl_kept_run){FL_KEPT_NONE, NAN, NAN, NAN, NAN, NAN, "", h->left[h->count], 0};
	h->count++;
	return r;
}

static inline void history_point(fl_kept_run *run, int point, double x, double error, double U, double tolerance) {
	run->state = FL_KEPT_TAKEN;
	run->points[run->point_count++] = (fl_kept_point){point, "", "", x, error, U, 2.0, tolerance, ""};
}

/* One point at 0.93 of the scale; NAN where a run is missing. In percent of span. */
static inline fl_record *history_add(history *h, fl_day day, double found_pct, double left_pct, unsigned work) {
	fl_record *r = history_record(h, day);
	r->work = work;
	if (!isnan(found_pct))
		history_point(&r->as_found, 4, 0.93, found_pct / 100.0, 0.0035, 0.02);
	if (!isnan(left_pct))
		history_point(&r->as_left, 4, 0.93, left_pct / 100.0, 0.0035, 0.02);
	return r;
}

static inline void copy_run(fl_kept_run *to, const fl_kept_run *from) {
	memcpy(to->points, from->points, from->point_count * sizeof *to->points);
	to->point_count = from->point_count;
	to->state = FL_KEPT_SAME;
}

/* tests/trend/data/demo_history.csv: a session of one day makes one record; left alone, its as-left is its as-found. */
static inline void history_demo(history *h) {
	char path[512], line[256];
	snprintf(path, sizeof path, "%s/tests/trend/data/demo_history.csv", SOURCE_DIR);
	FILE *file = fopen(path, "r");
	assert_non_null(file);
	assert_non_null(fgets(line, sizeof line, file));
	memset(h, 0, sizeof *h);
	while (fgets(line, sizeof line, file)) {
		char session[16], date[16], kind[16], oil[16];
		int point = 0;
		double x = 0, error = 0, U = 0;
		fl_day day = 0;
		assert_int_equal(sscanf(line, "%15[^,],%15[^,],%15[^,],%d,%15[^,],%lf,%lf,%lf", session, date, kind, &point,
		                        oil, &x, &error, &U),
		                 8);
		assert_true(fl_day_parse(date, &day, NULL) >= 0);
		fl_record *r =
		    h->count && h->records[h->count - 1].day == day ? &h->records[h->count - 1] : history_record(h, day);
		bool left = strcmp(kind, "as-left") == 0;
		if (left && r->as_found.point_count)
			r->work = FL_WORK_ADJUSTED;
		history_point(left ? &r->as_left : &r->as_found, point, x, error / 100.0, U / 100.0, 0.02);
	}
	fclose(file);
	for (size_t i = 0; i < h->count; i++)
		if (h->records[i].as_left.state == FL_KEPT_NONE)
			copy_run(&h->records[i].as_left, &h->records[i].as_found);
	assert_int_equal(h->count, 6);
}

#endif
