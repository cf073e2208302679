/* compare.c - is a record what its journal gives, fact by fact?
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/keep.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* The comparison as it goes on: the first fact that differs is kept. */
typedef struct comparison {
	char *where;
	bool differs;
	char part[64]; /* "as-found, point 3, " */
} comparison;

static void real(comparison *c, const char *what, double kept, double computed) {
	bool same = memcmp(&kept, &computed, sizeof kept) == 0 || (isnan(kept) && isnan(computed));
	if (c->differs || same)
		return;
	c->differs = true;
	snprintf(c->where, FL_KEEP_WHERE_SIZE, "%s%s: kept %.17g, computed %.17g", c->part, what, kept, computed);
}

static void whole(comparison *c, const char *what, int64_t kept, int64_t computed) {
	if (c->differs || kept == computed)
		return;
	c->differs = true;
	snprintf(c->where, FL_KEEP_WHERE_SIZE, "%s%s: kept %lld, computed %lld", c->part, what, (long long)kept,
	         (long long)computed);
}

static void text(comparison *c, const char *what, const char *kept, const char *computed) {
	if (c->differs || strcmp(kept, computed) == 0)
		return;
	c->differs = true;
	snprintf(c->where, FL_KEEP_WHERE_SIZE, "%s%s: kept \"%.40s\", computed \"%.40s\"", c->part, what, kept, computed);
}

static void compare_point(comparison *c, const fl_kept_point *a, const fl_kept_point *b) {
	whole(c, "place in the plan", a->point, b->point);
	text(c, "oil", a->oil, b->oil);
	text(c, "lot", a->lot, b->lot);
	real(c, "place on the scale", a->x, b->x);
	real(c, "error", a->error_span, b->error_span);
	real(c, "expanded uncertainty", a->U_span, b->U_span);
	real(c, "coverage factor", a->k, b->k);
	real(c, "tolerance", a->tolerance_span, b->tolerance_span);
	text(c, "verdict", a->verdict, b->verdict);
}

static void compare_run(comparison *c, const char *name, const fl_kept_run *a, const fl_kept_run *b) {
	snprintf(c->part, sizeof c->part, "%s, ", name);
	whole(c, "state", a->state, b->state);
	real(c, "zero error", a->zero_span, b->zero_span);
	real(c, "its uncertainty", a->zero_u_span, b->zero_u_span);
	real(c, "span error", a->span_span, b->span_span);
	real(c, "its uncertainty", a->span_u_span, b->span_u_span);
	real(c, "hysteresis", a->hysteresis_span, b->hysteresis_span);
	text(c, "verdict", a->verdict, b->verdict);
	whole(c, "number of points", (int64_t)a->point_count, (int64_t)b->point_count);
	for (size_t i = 0; !c->differs && i < a->point_count; i++) {
		snprintf(c->part, sizeof c->part, "%s, point %zu, ", name, i + 1);
		compare_point(c, &a->points[i], &b->points[i]);
	}
	c->part[0] = '\0';
}

static void compare_items(comparison *c, const fl_record *a, const fl_record *b) {
	whole(c, "number of lots and equipment", (int64_t)a->item_count, (int64_t)b->item_count);
	for (size_t i = 0; !c->differs && i < a->item_count; i++) {
		text(c, "kind of equipment", a->items[i].kind, b->items[i].kind);
		text(c, "lot or equipment", a->items[i].name, b->items[i].name);
		text(c, "its certificate", a->items[i].detail, b->items[i].detail);
	}
}

static void compare_instrument(comparison *c, const fl_record *a, const fl_record *b) {
	text(c, "site", a->site, b->site);
	text(c, "tag", a->tag, b->tag);
	text(c, "serial", a->serial, b->serial);
	text(c, "position", a->position, b->position);
	text(c, "owner", a->owner, b->owner);
	real(c, "lower range value", a->scale_low, b->scale_low);
	real(c, "upper range value", a->scale_high, b->scale_high);
	text(c, "dial unit", a->dial_unit, b->dial_unit);
	real(c, "set point", a->set_point, b->set_point);
	real(c, "adjust limit", a->adjust_limit_span, b->adjust_limit_span);
}

static void compare_session(comparison *c, const fl_record *a, const fl_record *b) {
	whole(c, "day", a->day, b->day);
	whole(c, "time of closing", a->closed_at, b->closed_at);
	whole(c, "next day", a->due, b->due);
	whole(c, "interval", a->interval_months, b->interval_months);
	real(c, "running hours", a->running_hours, b->running_hours);
	real(c, "next running hours", a->due_hours, b->due_hours);
	text(c, "procedure", a->procedure, b->procedure);
	text(c, "who performed it", a->performed_by, b->performed_by);
	whole(c, "what was done", (int64_t)a->work, (int64_t)b->work);
}

bool fl_keep_same(const fl_record *kept, const fl_record *computed, char where[FL_KEEP_WHERE_SIZE]) {
	comparison c = {.where = where};
	where[0] = '\0';
	compare_instrument(&c, kept, computed);
	compare_session(&c, kept, computed);
	compare_run(&c, "as-found", &kept->as_found, &computed->as_found);
	compare_run(&c, "as-left", &kept->as_left, &computed->as_left);
	compare_items(&c, kept, computed);
	return !c.differs;
}
