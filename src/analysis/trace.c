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

static void trace_oils(work *w) {
	for (size_t i = 0; i < w->session->point_count; i++) {
		const fl_oil *oil = NULL;
		fl_error found = {0};
		if (!lot_was_read(w, i) || fl_analysis_oil(w, (int)i, &oil, NULL) < 0 || !oil)
			continue;
		if (fl_stock_oil_in_date(oil, w->session->day, &found) < 0)
			fl_analysis_say(w->arena, &w->not_traceable, "%s", found.message);
	}
}

static void trace_equipment(work *w) {
	for (size_t i = 0; i < w->session->equipment_count; i++) {
		const fl_session_equipment *used = &w->session->equipment[i];
		if (used->undone)
			continue;
		const fl_equipment *item = fl_stock_equipment(w->stock, used->id);
		fl_error found = {0};
		if (!item)
			fl_analysis_say(w->arena, &w->not_traceable, "%s %s: no certificate is known for it",
			                fl_stock_role_text(used->role), used->id);
		else if (fl_stock_equipment_in_date(item, w->session->day, &found) < 0)
			fl_analysis_say(w->arena, &w->not_traceable, "%s", found.message);
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
	for (size_t i = 0; i < w->session->indicative_count; i++) {
		const fl_indicative *entry = &w->session->indicative[i];
		fl_analysis_say(w->arena, &w->not_traceable, "%s: work went on all the same (%s; %s)",
		                entry->item ? entry->item : "an item", entry->reason ? entry->reason : "no reason given",
		                entry->by ? entry->by : "nobody named");
	}
	trace_oils(w);
	trace_equipment(w);
	trace_missing(w);
}
