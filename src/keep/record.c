/* record.c - a closed session and its result as a record for the book.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/keep.h"
#include "foundleft/trend.h"

#include <math.h>
#include <string.h>

/* What all steps share. After memory ran out `failed` stays set, so that it is asked once. */
typedef struct keeping {
	const fl_session *session;
	const fl_procedure *procedure;
	const fl_stock *stock;
	fl_arena *arena;
	bool failed;
} keeping;

/* The book keeps texts of one line. */
static const char *one_line(keeping *k, const char *text) {
	char *copy = fl_arena_strdup(k->arena, text ? text : "");
	if (!copy) {
		k->failed = true;
		return "";
	}
	for (char *c = copy; *c; c++)
		if ((unsigned char)*c < 0x20 || *c == 0x7f)
			*c = ' ';
	return copy;
}

/* ---- runs ------------------------------------------------------------------------------------------------------- */

static fl_kept_point kept_point(keeping *k, const fl_point_result *p) {
	return (fl_kept_point){.point = p->point,
	                       .oil = one_line(k, p->oil),
	                       .lot = one_line(k, p->lot),
	                       .x = p->x,
	                       .error_span = p->error_span,
	                       .U_span = p->sum.expanded,
	                       .k = p->sum.coverage_factor,
	                       .tolerance_span = p->tolerance_span,
	                       .verdict = fl_verdict_word(p->verdict)};
}

static fl_kept_run no_run(void) {
	return (fl_kept_run){FL_KEPT_NONE, NAN, NAN, NAN, NAN, NAN, "", NULL, 0};
}

static fl_kept_run kept_run(keeping *k, const fl_run_result *run) {
	fl_kept_run kept = no_run();
	if (!run->available)
		return kept;
	kept.state = run->same_as_found ? FL_KEPT_SAME : FL_KEPT_TAKEN;
	kept.zero_span = run->zero_error_span;
	kept.span_span = run->span_error_span;
	kept.zero_u_span = run->has_line ? sqrt(run->line.var_intercept) : NAN;
	kept.span_u_span = run->has_line ? sqrt(run->line.var_slope) : NAN;
	kept.hysteresis_span = run->hysteresis_span;
	kept.verdict = fl_verdict_word(run->verdict);
	kept.points = fl_arena_alloc(k->arena, run->combined_count, sizeof *kept.points);
	if (!kept.points && run->combined_count) {
		k->failed = true;
		return kept;
	}
	for (size_t i = 0; i < run->combined_count; i++)
		kept.points[i] = kept_point(k, &run->combined[i]);
	kept.point_count = run->combined_count;
	return kept;
}

/* ---- what it was done with -------------------------------------------------------------------------------------- */

static void add_item(keeping *k, fl_record *r, size_t *capacity, const char *kind, const char *name,
                     const char *detail) {
	for (size_t i = 0; i < r->item_count; i++)
		if (strcmp(r->items[i].kind, kind) == 0 && strcmp(r->items[i].name, name) == 0)
			return;
	fl_kept_item *grown = fl_arena_grow(k->arena, r->items, r->item_count, capacity, sizeof *grown);
	if (!grown) {
		k->failed = true;
		return;
	}
	r->items = grown;
	grown[r->item_count++] = (fl_kept_item){kind, one_line(k, name), one_line(k, detail)};
}

static void keep_items(keeping *k, fl_record *r) {
	const fl_session *s = k->session;
	size_t capacity = 0;
	for (size_t i = 0; i < s->point_count; i++)
		if (s->points[i].lot && *s->points[i].lot)
			add_item(k, r, &capacity, "oil", s->points[i].lot, s->points[i].oil);
	for (fl_role role = 0; role < FL_ROLE_COUNT; role++) {
		const char *id = fl_session_equipment_id(s, role);
		const fl_equipment *item = id ? fl_stock_equipment(k->stock, id) : NULL;
		if (item)
			add_item(k, r, &capacity, fl_stock_role_text(role), item->id, item->certificate);
	}
}

/* ---- what was done, and when ------------------------------------------------------------------------------------ */

static bool is_cleaning(const char *item) {
	return strstr(item, "clean") || strstr(item, "Clean");
}

static unsigned work_of(const fl_session *s) {
	unsigned work = 0;
	for (size_t i = 0; i < s->adjustment_count; i++)
		if (!s->adjustments[i].undone)
			work |= is_cleaning(s->adjustments[i].item) ? FL_WORK_CLEANED : FL_WORK_ADJUSTED;
	if (s->decision == FL_DECISION_ADJUST && work == 0)
		work |= FL_WORK_ADJUSTED;
	if (s->decision == FL_DECISION_REPAIR)
		work |= FL_WORK_REPAIRED;
	return work;
}

static double running_hours(const fl_session *s) {
	const fl_setting *hours = fl_session_setting(s, FL_KEEP_HOURS_SETTING);
	if (!hours || isnan(hours->value))
		return NAN;
	return hours->unit == FL_U_NONE ? hours->value : fl_to_inside(hours->value, hours->unit) / 3600.0;
}

/* As a part of the span; NAN where it is no constant part of it. */
static double adjust_limit(const keeping *k, const fl_instrument *instrument) {
	const fl_band *own = &instrument->adjust_limit;
	bool aside = k->procedure->sets_limits_aside || own->basis == FL_BAND_NONE;
	const fl_band *limit = aside ? &k->procedure->adjust_limit : own;
	return limit->basis == FL_BAND_PERCENT_SPAN ? limit->half_width / 100.0 : NAN;
}

static void keep_instrument(keeping *k, const fl_instrument *instrument, fl_record *r) {
	r->site = one_line(k, instrument->site);
	r->tag = one_line(k, instrument->tag);
	r->serial = one_line(k, instrument->serial);
	r->position = one_line(k, instrument->position);
	r->owner = one_line(k, instrument->owner);
	r->scale_low = instrument->scale.low;
	r->scale_high = instrument->scale.high;
	r->dial_unit = fl_unit_text(fl_physics_dial_unit(instrument->scale.dial_unit));
	r->set_point = instrument->set_point;
	r->adjust_limit_span = adjust_limit(k, instrument);
	r->interval_months = instrument->interval_months;
	r->due = r->interval_months ? fl_trend_due(r->day, r->interval_months) : FL_NO_DAY;
}

static void keep_session(keeping *k, fl_record *r) {
	const fl_session *s = k->session;
	const fl_setting *performer = fl_session_setting(s, "performed-by");
	char *procedure = fl_arena_printf(k->arena, "%s %s", k->procedure->id, k->procedure->version);
	k->failed = k->failed || !procedure;
	r->procedure = procedure ? one_line(k, procedure) : "";
	r->performed_by = one_line(k, performer ? performer->typed : s->closed_by);
	r->day = s->day;
	r->closed_at = s->closed_at;
	r->running_hours = running_hours(s);
	r->due_hours = NAN;
	r->work = work_of(s);
}

/* The instrument as the session carries it: a stock of the session holds one. */
fl_status fl_keep_record(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                         const fl_result *result, fl_arena *arena, fl_record *out, fl_error *err) {
	keeping k = {session, procedure, stock, arena, false};
	if (!session->closed)
		return fl_fail(err, FL_E_STATE, "the session is still open: only closed sessions go into the book");
	if (stock->instrument_count == 0)
		return fl_fail(err, FL_E_VALUE, "the journal names no instrument");
	fl_record r = {.number = "", .replaces = "", .replaces_number = "", .reason = "", .program = ""};
	keep_session(&k, &r);
	keep_instrument(&k, &stock->instruments[0], &r);
	r.as_found = kept_run(&k, &result->runs[FL_RUN_AS_FOUND]);
	r.as_left = kept_run(&k, &result->runs[FL_RUN_AS_LEFT]);
	keep_items(&k, &r);
	if (k.failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the record");
	*out = r;
	return FL_OK;
}
