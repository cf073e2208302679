/* choose.c - equipment and oils: what is proposed, what is refused, what goes on as indicative.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static bool is_oil(const char *kind) {
	return strcmp(kind, "oil") == 0;
}

static bool in_use(const fl_entry *entry, const char *kind, const char *name) {
	return is_oil(kind) ? fl_stock_oil(&entry->used, name) != NULL : fl_stock_equipment(&entry->used, name) != NULL;
}

/* The item goes into the journal once, and is used as it stands there: a later change of the stock file does not change
 * a session that has begun. */
static fl_status keep_text(fl_entry *entry, const char *kind, const char *name, const char *body, fl_error *err) {
	fl_status (*parse)(fl_stock *, const char *, const char *, fl_error *) =
	    is_oil(kind) ? fl_stock_parse_oil : fl_stock_parse_equipment;
	fl_status status = in_use(entry, kind, name) ? FL_OK : parse(&entry->used, body, name, err);
	if (status < 0)
		return status;
	if (fl_session_text_body(entry->session, kind, name))
		return FL_OK;
	fl_event event = {
	    .verb = FL_V_TEXT, .fields[FL_F_KIND] = kind, .fields[FL_F_NAME] = name, .fields[FL_F_BODY] = body};
	return fl_entry_commit(entry, &event, err);
}

fl_status fl_entry_keep_equipment(fl_entry *entry, const fl_equipment *item, fl_error *err) {
	return keep_text(entry, "equipment", item->id, item->text, err);
}

/* Before the item is named, so that no power cut can leave an item out of date unmarked. */
fl_status fl_entry_indicative(fl_entry *entry, const char *item, const char *reason, const char *by, fl_error *err) {
	for (size_t i = 0; i < entry->session->indicative_count; i++)
		if (strcmp(entry->session->indicative[i].item, item) == 0)
			return FL_OK;
	fl_event event = {
	    .verb = FL_V_INDICATIVE, .fields[FL_F_ITEM] = item, .fields[FL_F_REASON] = reason, .fields[FL_F_BY] = by};
	return fl_entry_commit(entry, &event, err);
}

/* ---- equipment ---- */

const fl_equipment *fl_entry_propose_equipment(const fl_entry *entry, fl_role role) {
	const fl_stock *stock = entry->setup.stock;
	for (size_t i = 0; i < stock->equipment_count; i++)
		if (stock->equipment[i].role == role &&
		    fl_stock_equipment_in_date(&stock->equipment[i], entry->session->day, NULL) == FL_OK)
			return &stock->equipment[i];
	return NULL;
}

/* The word of the journal for a role. */
static const char *role_word(fl_role role) {
	static const char *const words[FL_ROLE_COUNT] = {[FL_ROLE_THERMOMETER] = "thermometer",
	                                                 [FL_ROLE_CURRENT_METER] = "current-meter",
	                                                 [FL_ROLE_PRESSURE_GAUGE] = "pressure-gauge",
	                                                 [FL_ROLE_BATH] = "bath",
	                                                 [FL_ROLE_TACHOMETER] = "tachometer",
	                                                 [FL_ROLE_PRESSURE_STANDARD] = "pressure-standard",
	                                                 [FL_ROLE_TIMER] = "timer"};
	return words[role];
}

fl_status fl_entry_equip(fl_entry *entry, fl_role role, const char *id, fl_error *err) {
	const fl_equipment *item = fl_stock_equipment(entry->setup.stock, id);
	if (!item)
		return fl_fail(err, FL_E_NOT_FOUND, "there is no equipment %s in the stock", id);
	fl_status status = keep_text(entry, "equipment", item->id, item->text, err);
	if (status < 0)
		return status;
	fl_event event = {.verb = FL_V_EQUIP, .fields[FL_F_ROLE] = role_word(role), .fields[FL_F_ID] = item->id};
	return fl_entry_commit(entry, &event, err);
}

/* ---- oils ---- */

static bool fits_point(const fl_entry *entry, const fl_oil *oil, int point, double *pct) {
	const fl_plan_point *plan = &entry->setup.procedure->points[point];
	double bath_c = entry->setup.procedure->bath_c;
	return fl_stock_oil_position(oil, entry->setup.instrument, bath_c, pct, NULL) >= 0 &&
	       *pct >= plan->oil_low_pct_span && *pct <= plan->oil_high_pct_span;
}

/* Among the lots in date that fit, the one nearest to the point's place; of several such the one certified last. */
const fl_oil *fl_entry_propose_oil(const fl_entry *entry, int point) {
	const fl_stock *stock = entry->setup.stock;
	const fl_oil *best = NULL;
	double pct, nearest = INFINITY;
	const double same_pct = 0.5; /* two lots of one oil differ by less */
	for (size_t i = 0; i < stock->oil_count; i++) {
		const fl_oil *oil = &stock->oils[i];
		if (fl_stock_oil_in_date(oil, entry->session->day, NULL) != FL_OK || !fits_point(entry, oil, point, &pct))
			continue;
		double away = fabs(pct - entry->setup.procedure->points[point].position_pct_span);
		if (away < nearest - same_pct || (away < nearest + same_pct && oil->certified_on > best->certified_on)) {
			nearest = away;
			best = oil;
		}
	}
	return best;
}

fl_status fl_entry_oil_fits(const fl_entry *entry, int point, const fl_oil *oil, fl_error *err) {
	const fl_plan_point *plan = &entry->setup.procedure->points[point];
	double pct = 0.0;
	if (!fits_point(entry, oil, point, &pct))
		return fl_fail(err, FL_E_VALUE,
		               "%s (%s) lies at %.1f %% of span on this instrument: point %d takes %g to %g %%", oil->name,
		               oil->lot, pct, point + 1, plan->oil_low_pct_span, plan->oil_high_pct_span);
	return FL_OK;
}

fl_status fl_entry_assign_oil(fl_entry *entry, int point, const fl_oil *oil, fl_error *err) {
	char number[16];
	fl_status status = fl_entry_oil_fits(entry, point, oil, err);
	if (status >= 0)
		status = keep_text(entry, "oil", oil->lot, oil->text, err);
	if (status < 0)
		return status;
	snprintf(number, sizeof number, "%d", point + 1);
	fl_event event = {
	    .verb = FL_V_POINT, .fields[FL_F_POINT] = number, .fields[FL_F_OIL] = oil->name, .fields[FL_F_LOT] = oil->lot};
	return fl_entry_commit(entry, &event, err);
}

fl_status fl_entry_plain_points(fl_entry *entry, fl_error *err) {
	const fl_procedure *p = entry->setup.procedure;
	fl_status status = FL_OK;
	while (status >= 0 && p->medium == FL_MEDIUM_PRESSURE && (int)entry->session->point_count < p->point_count) {
		char number[16];
		snprintf(number, sizeof number, "%zu", entry->session->point_count + 1);
		fl_event event = {
		    .verb = FL_V_POINT, .fields[FL_F_POINT] = number, .fields[FL_F_OIL] = "", .fields[FL_F_LOT] = ""};
		status = fl_entry_commit(entry, &event, err);
	}
	return status;
}
