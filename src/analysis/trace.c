/* analysis/trace.c - what stands in the way of traceability: oils and equipment out of date or missing.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Only what the session used counts: an overdue tachometer on the shelf spoils nothing.
 */
#include "work.h"

#include <string.h>

static bool lot_was_read(const work *w, size_t point) {
	for (size_t i = 0; i < w->session->reading_count; i++) {
		const fl_reading *reading = &w->session->readings[i];
		if (!reading->watched && !reading->undone && !reading->struck && reading->point == (int)point)
			return true;
	}
	return false;
}

/* Why work went on with the item all the same, as a part of a sentence; "" where nobody said. */
static const char *excuse(const work *w, const char *item) {
	for (size_t i = 0; i < w->session->indicative_count; i++) {
		const fl_indicative *entry = &w->session->indicative[i];
		if (!entry->item || strcmp(entry->item, item) != 0)
			continue;
		const char *words =
		    fl_arena_printf(w->arena, "; work went on all the same (%s; %s)",
		                    entry->reason ? entry->reason : "no reason given", entry->by ? entry->by : "nobody named");
		return words ? words : "";
	}
	return "";
}

static void trace_oils(work *w) {
	char text[FL_DAY_SIZE];
	for (size_t i = 0; i < w->session->point_count; i++) {
		const fl_oil *oil = NULL;
		if (!lot_was_read(w, i) || fl_analysis_oil(w, (int)i, &oil, NULL) < 0 || !oil ||
		    fl_stock_oil_in_date(oil, w->session->day, NULL) >= 0)
			continue;
		bool early = w->session->day < oil->certified_on;
		fl_analysis_say(w->arena, &w->not_traceable, "%s, lot %s, %s %s%s", oil->name, oil->lot,
		                early ? "was certified only on" : "expired on",
		                fl_day_format(early ? oil->certified_on : oil->use_before, text), excuse(w, oil->lot));
	}
}

static void trace_equipment(work *w) {
	char text[FL_DAY_SIZE];
	for (size_t i = 0; i < w->session->equipment_count; i++) {
		const fl_session_equipment *used = &w->session->equipment[i];
		if (used->undone)
			continue;
		const char *role = fl_stock_role_text(used->role);
		const fl_equipment *item = fl_stock_equipment(w->stock, used->id);
		if (!item) {
			fl_analysis_say(w->arena, &w->not_traceable, "%s %s: no certificate is known for it", role, used->id);
			continue;
		}
		if (fl_stock_equipment_in_date(item, w->session->day, NULL) >= 0)
			continue;
		bool early = w->session->day < item->calibrated_on;
		fl_analysis_say(w->arena, &w->not_traceable, "%s %s %s %s%s", role, item->id,
		                early ? "was calibrated only on" : "was due on",
		                fl_day_format(early ? item->calibrated_on : item->due_on, text), excuse(w, item->id));
	}
}

/* An item said to be out of date that the stock shows in date, or that was not read in the end. */
static bool is_said_already(const work *w, const char *item) {
	for (size_t i = 0; i < w->not_traceable.count; i++)
		if (item && strstr(w->not_traceable.items[i], item))
			return true;
	return false;
}

static void trace_indicative(work *w) {
	for (size_t i = 0; i < w->session->indicative_count; i++) {
		const char *item = w->session->indicative[i].item;
		if (!is_said_already(w, item))
			fl_analysis_say(w->arena, &w->not_traceable, "%s%s", item ? item : "an item", excuse(w, item ? item : ""));
	}
}

static void trace_missing(work *w) {
	bool oils = w->procedure->medium == FL_MEDIUM_OIL;
	if (!w->reference.meter)
		fl_analysis_say(w->arena, &w->not_traceable, "no %s is named: the output is taken as read",
		                w->reference.instrument->scale.signal == FL_SIGNAL_4_20_MA ? "current meter"
		                                                                           : "pressure gauge");
	if (oils && !w->reference.thermometer)
		fl_analysis_say(w->arena, &w->not_traceable, "no thermometer is named: the temperature is taken as read");
	if (!oils && !w->reference.standard)
		fl_analysis_say(w->arena, &w->not_traceable,
		                "no pressure standard is named: the injected pressure is taken as read");
	if (oils && !w->reference.bath)
		fl_analysis_say(
		    w->arena, &w->warnings,
		    "no bath is named: the uncertainty holds no part for the difference between bath and capillary");
}

void fl_analysis_trace(work *w) {
	trace_oils(w);
	trace_equipment(w);
	trace_indicative(w);
	trace_missing(w);
}
