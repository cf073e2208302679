/* content_head.c - which item, for whom, where, when, by which procedure, under which conditions.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

static const char *dial_range(fl_writing *w) {
	const fl_scale *scale = &w->instrument->scale;
	return fl_sheet_printf(w->sheet, "%s to %s %s", fl_word_plain(w->sheet, scale->low, 3),
	                       fl_word_plain(w->sheet, scale->high, 3), w->dial_unit);
}

static void write_item(fl_writing *w, fl_block *grid) {
	const fl_instrument *instrument = w->instrument;
	fl_sheet_pair(w->sheet, grid, 0, "Tag", instrument->tag);
	fl_sheet_pair(w->sheet, grid, 0, "Serial no.", instrument->serial);
	fl_sheet_pair(w->sheet, grid, 0, "Plate", instrument->maker_plate);
	fl_sheet_pair(w->sheet, grid, 0, "Owner", instrument->owner);
	fl_sheet_pair(w->sheet, grid, 0, "Site", instrument->site);
	fl_sheet_pair(w->sheet, grid, 0, "Position", instrument->position);
	fl_sheet_pair(w->sheet, grid, 0, "Received", fl_writing_setting(w, "received-on"));
	fl_sheet_pair(w->sheet, grid, 0, "Condition", fl_writing_setting(w, "condition"));
}

/* "9 to 20 mm²/s", or the one that is stated. */
static const char *alarms(fl_writing *w) {
	double low = w->instrument->alarm_low, high = w->instrument->alarm_high;
	if (isfinite(low) && isfinite(high))
		return fl_sheet_printf(w->sheet, "below %s, above %s %s", fl_word_plain(w->sheet, low, 3),
		                       fl_word_plain(w->sheet, high, 3), w->dial_unit);
	if (!isfinite(low) && !isfinite(high))
		return NULL;
	return fl_sheet_printf(w->sheet, "%s %s %s", isfinite(low) ? "below" : "above",
	                       fl_word_plain(w->sheet, isfinite(low) ? low : high, 3), w->dial_unit);
}

static void write_scale(fl_writing *w, fl_block *grid) {
	fl_sheet *sheet = w->sheet;
	const fl_instrument *instrument = w->instrument;
	const fl_scale *scale = &instrument->scale;
	fl_sheet_pair(sheet, grid, 1, "Dial", dial_range(w));
	if (scale->dial_unit != FL_DIAL_MPA_S)
		fl_sheet_pairf(sheet, grid, 1, "Dial density", "%s kg/m³", fl_word_plain(sheet, scale->dial_density_kg_m3, 1));
	if (scale->dial_unit == FL_DIAL_SAYBOLT)
		fl_sheet_pairf(sheet, grid, 1, "Divided for", "%s °C", fl_word_plain(sheet, scale->saybolt_temp_c, 2));
	fl_sheet_pair(sheet, grid, 1, "Signal", fl_physics_signal_range(scale->signal)->text);
	if (isfinite(instrument->set_point) && isfinite(instrument->set_point_tolerance))
		fl_sheet_pairf(sheet, grid, 1, "Set point", "%s ± %s %s", fl_word_plain(sheet, instrument->set_point, 3),
		               fl_word_plain(sheet, instrument->set_point_tolerance, 3), w->dial_unit);
	else if (isfinite(instrument->set_point))
		fl_sheet_pairf(sheet, grid, 1, "Set point", "%s %s", fl_word_plain(sheet, instrument->set_point, 3),
		               w->dial_unit);
	fl_sheet_pair(sheet, grid, 1, "Alarms", alarms(w));
	if (isfinite(w->result->dp_full_pa))
		fl_sheet_pairf(sheet, grid, 1, "Full scale", "%s mbar", fl_word_number(sheet, w->result->dp_full_pa / 100, 2));
	if (isfinite(w->procedure->bath_c))
		fl_sheet_pairf(sheet, grid, 1, "Calibrated at", "%s °C", fl_word_plain(sheet, w->procedure->bath_c, 2));
}

static void write_work(fl_writing *w, fl_block *grid) {
	fl_sheet *sheet = w->sheet;
	const char *customer = fl_writing_setting(w, "customer"), *place = fl_writing_setting(w, "place");
	fl_sheet_pair(sheet, grid, 2, "Customer", customer ? customer : "not stated");
	fl_sheet_pair(sheet, grid, 2, "Order", fl_writing_setting(w, "job"));
	fl_sheet_pair(sheet, grid, 2, "Place", place ? place : "not stated");
	fl_sheet_pair(sheet, grid, 2, "Calibrated", fl_word_day(sheet, w->session->day));
	fl_sheet_pair(sheet, grid, 2, "Issued", fl_word_day(sheet, w->issue->issued_on));
	fl_sheet_pair(sheet, grid, 2, "Amends", w->issue->amends);
	fl_sheet_pairf(sheet, grid, 2, "Procedure", "%s, version %s", w->procedure->id, w->procedure->version);
	fl_sheet_pair(sheet, grid, 2, "Present", fl_writing_setting(w, "others"));
}

/* A sensor of this kind feels dynamic viscosity; the dial's density is part of what is stated. */
static void write_method(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	const fl_scale *scale = &w->instrument->scale;
	fl_sheet_add_led(sheet, FL_BLOCK_SMALL, "Method.", "%s", fl_word_sentence(sheet, w->procedure->method));
	if (w->procedure->medium != FL_MEDIUM_OIL || scale->dial_unit == FL_DIAL_MPA_S)
		return;
	fl_sheet_add_led(
	    sheet, FL_BLOCK_SMALL, "What is compared.",
	    "The sensor feels dynamic viscosity; its dial assumes a density of %s kg/m³. Each oil is therefore "
	    "compared by its equivalent viscosity: its dynamic viscosity divided by the dial density.",
	    fl_word_plain(sheet, scale->dial_density_kg_m3, 1));
}

void fl_write_head(fl_writing *w) {
	static const char *const heads[] = {"Item", "Scale", "Work"};
	fl_block *grid = fl_sheet_add_grid(w->sheet, FL_BLOCK_GRID, heads, 3);
	write_item(w, grid);
	write_scale(w, grid);
	write_work(w, grid);
	if (!w->result->traceable) {
		fl_sheet_add(w->sheet, FL_BLOCK_STATEMENT, "These results are indicative and not traceable, because:");
		for (size_t i = 0; i < w->result->not_traceable_count; i++)
			fl_sheet_add(w->sheet, FL_BLOCK_ITEM, fl_word_sentence(w->sheet, w->result->not_traceable[i]));
	}
	write_method(w);
}
