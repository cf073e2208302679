/* analysis/readings.c - the readings of a run, each brought to its reference.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "work.h"

#include <stdio.h>

static fl_status fail_at_reading(const fl_reading *reading, const fl_error *inner, fl_error *err) {
	char step[96];
	char point[24] = "stopped zero";
	if (reading->point != FL_POINT_ZERO)
		snprintf(point, sizeof point, "point %d", reading->point + 1);
	snprintf(step, sizeof step, "%s, cycle %d, %s, %s, reading %d", fl_run_word(reading->run), reading->cycle,
	         fl_pass_word(reading->pass), point, reading->number);
	return fl_fail_at(err, inner->status, (fl_place){.field = step}, "%s", inner->message);
}

/* A struck reading that gives no number stays in the record without one. */
static fl_status take_reading(const work *w, const fl_reading *reading, fl_reading_result *out, fl_error *err) {
	fl_error inner = {0};
	const fl_oil *oil = NULL;
	fl_status found = fl_analysis_oil(w, reading->point, &oil, &inner);
	fl_status status = fl_reference_reading(&w->reference, oil, reading, out, &inner);
	if ((found < 0 || status < 0) && !reading->struck)
		return fail_at_reading(reading, &inner, err);
	return FL_OK;
}

fl_status fl_analysis_readings(const work *w, fl_run_kind kind, fl_run_result *run, fl_error *err) {
	run->readings = fl_arena_alloc(w->arena, w->session->reading_count + 1, sizeof *run->readings);
	if (!run->readings)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu readings", w->session->reading_count);
	for (size_t i = 0; i < w->session->reading_count; i++) {
		const fl_reading *reading = &w->session->readings[i];
		if (reading->run != kind || reading->watched || reading->undone)
			continue;
		fl_status status = take_reading(w, reading, &run->readings[run->reading_count], err);
		if (status < 0)
			return status;
		run->reading_count++;
		run->struck_count += reading->struck;
	}
	return FL_OK;
}

fl_status fl_analysis_oil(const work *w, int point, const fl_oil **oil, fl_error *err) {
	*oil = NULL;
	if (point == FL_POINT_ZERO || w->procedure->medium == FL_MEDIUM_PRESSURE)
		return FL_OK;
	if (point < 0 || (size_t)point >= w->session->point_count)
		return fl_fail(err, FL_E_VALUE, "point %d has no oil", point + 1);
	const char *lot = w->session->points[point].lot;
	*oil = fl_stock_oil(w->stock, lot);
	if (!*oil)
		return fl_fail(err, FL_E_NOT_FOUND, "lot %s is not among the oils of the session", lot);
	return FL_OK;
}
