/* saw.c - one quantity through the years: the teeth of the saw, and their chain.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * An adjusted instrument starts each interval near zero, so that its as-found values as they stand show less drift than
 * there is: half of it, when it is adjusted every other time. What drifted in interval n is as-found(n) minus as-left
 * (n-1); added up, c(t) is what the instrument would show had nobody turned its screws.
 */
#include "foundleft/trend.h"

#include <math.h>

/* Two procedures may number their points differently: a point is the same only where it stands at the same place. */
#define SAME_PLACE 0.05

static const fl_kept_point *point_of(const fl_kept_run *run, int point, double x) {
	for (size_t i = 0; run->state != FL_KEPT_NONE && i < run->point_count; i++)
		if (run->points[i].point == point && (isnan(x) || fabs(run->points[i].x - x) <= SAME_PLACE))
			return &run->points[i];
	return NULL;
}

static void value_of_run(const fl_kept_run *run, fl_quantity_followed what, double x, double *value, double *u) {
	const fl_kept_point *point = what.kind == FL_FOLLOW_POINT ? point_of(run, what.point, x) : NULL;
	*value = *u = NAN;
	if (run->state == FL_KEPT_NONE)
		return;
	if (what.kind == FL_FOLLOW_ZERO) {
		*value = run->zero_span;
		*u = run->zero_u_span;
	} else if (what.kind == FL_FOLLOW_SPAN) {
		*value = run->span_span;
		*u = run->span_u_span;
	} else if (point) {
		*value = point->error_span;
		*u = point->U_span / point->k;
	}
}

/* Where the point stands in the latest record that has it; NAN if none has. */
static double place_of_point(const fl_record *records, size_t count, int point) {
	for (size_t i = count; i-- > 0;) {
		const fl_kept_point *found = point_of(&records[i].as_found, point, NAN);
		const fl_kept_point *left = point_of(&records[i].as_left, point, NAN);
		if (left || found)
			return left ? left->x : found->x;
	}
	return NAN;
}

static fl_tooth tooth_of(const fl_record *record, fl_quantity_followed what, double x) {
	fl_tooth tooth = {.day = record->day, .number = record->number, .work = record->work, .chained = NAN};
	tooth.hours = record->running_hours;
	tooth.tolerance = tooth.U = NAN;
	value_of_run(&record->as_found, what, x, &tooth.as_found, &tooth.u_found);
	value_of_run(&record->as_left, what, x, &tooth.as_left, &tooth.u_left);
	if (what.kind != FL_FOLLOW_POINT)
		return tooth;
	const fl_kept_point *point = point_of(&record->as_found, what.point, x);
	if (!point)
		point = point_of(&record->as_left, what.point, x);
	if (point) {
		tooth.tolerance = point->tolerance_span;
		tooth.U = point->U_span;
	}
	return tooth;
}

/* Can this as-found be chained to the as-left before it? */
static bool is_chained(const fl_tooth *before, const fl_tooth *tooth) {
	return !(tooth->work & FL_WORK_BEFORE) && !isnan(before->as_left) && !isnan(tooth->as_found);
}

static void chain(fl_saw *saw) {
	double at = 0.0; /* c at the as-left before */
	int stretch = 0;
	for (size_t i = 0; i < saw->count; i++) {
		fl_tooth *tooth = &saw->teeth[i];
		if (i > 0 && is_chained(&saw->teeth[i - 1], tooth)) {
			tooth->chained = at = tooth->as_found - saw->teeth[i - 1].as_left + at;
			tooth->stretch = stretch;
			tooth->breaks = (tooth->work & (FL_WORK_CLEANED | FL_WORK_REPAIRED)) != 0;
		} else {
			tooth->stretch = i > 0 ? ++stretch : 0;
			tooth->breaks = i > 0;
			at = 0.0;
			continue;
		}
		if (tooth->breaks && i + 1 < saw->count) {
			stretch++;
			at = 0.0;
		}
	}
	saw->stretches = stretch + 1;
}

fl_status fl_trend_follow(const fl_record *records, size_t count, fl_quantity_followed what, fl_saw *out,
                          fl_error *err) {
	fl_arena arena = {0};
	fl_tooth *teeth = fl_arena_alloc(&arena, count + 1, sizeof *teeth);
	if (!teeth)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the trend");
	double x = what.kind == FL_FOLLOW_POINT ? place_of_point(records, count, what.point) : NAN;
	for (size_t i = 0; i < count; i++) {
		if (i > 0 && records[i].day < records[i - 1].day) {
			fl_arena_free(&arena);
			return fl_fail(err, FL_E_INTERNAL, "the records of a trend do not stand in the order of their days");
		}
		teeth[i] = tooth_of(&records[i], what, x);
	}
	*out = (fl_saw){.arena = arena, .teeth = teeth, .count = count, .what = what};
	chain(out);
	return FL_OK;
}

void fl_saw_free(fl_saw *saw) {
	fl_arena_free(&saw->arena);
	*saw = (fl_saw){0};
}
