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
	fl_sheet *sheet = w->sheet;
	const fl_instrument *instrument = w->instrument;
	const fl_scale *scale = &instrument->scale;
	fl_sheet_pair(sheet, grid, 0, "Tag", instrument->tag);
	fl_sheet_pair(sheet, grid, 0, "Serial number", instrument->serial);
	fl_sheet_pair(sheet, grid, 0, "Maker's plate", instrument->maker_plate);
	fl_sheet_pair(sheet, grid, 0, "Owner", instrument->owner);
	fl_sheet_pair(sheet, grid, 0, "Site", instrument->site);
	fl_sheet_pair(sheet, grid, 0, "Position", instrument->position);
	fl_sheet_pair(sheet, grid, 0, "Dial", dial_range(w));
	if (scale->dial_unit != FL_DIAL_MPA_S)
		fl_sheet_pairf(sheet, grid, 0, "Dial density", "%s kg/m³", fl_word_plain(sheet, scale->dial_density_kg_m3, 1));
	if (scale->dial_unit == FL_DIAL_SAYBOLT)
		fl_sheet_pairf(sheet, grid, 0, "Dial divided for", "%s °C", fl_word_plain(sheet, scale->saybolt_temp_c, 2));
	fl_sheet_pair(sheet, grid, 0, "Output signal", fl_physics_signal_range(scale->signal)->text);
	if (isfinite(instrument->set_point) && isfinite(instrument->set_point_tolerance))
		fl_sheet_pairf(sheet, grid, 0, "Set point", "%s ± %s %s", fl_word_plain(sheet, instrument->set_point, 3),
		               fl_word_plain(sheet, instrument->set_point_tolerance, 3), w->dial_unit);
	else if (isfinite(instrument->set_point))
		fl_sheet_pairf(sheet, grid, 0, "Set point", "%s %s", fl_word_plain(sheet, instrument->set_point, 3),
		               w->dial_unit);
}

static void write_work(fl_writing *w, fl_block *grid) {
	fl_sheet *sheet = w->sheet;
	const char *customer = fl_writing_setting(w, "customer"), *place = fl_writing_setting(w, "place");
	fl_sheet_pair(sheet, grid, 1, "Customer", customer ? customer : "not stated");
	fl_sheet_pair(sheet, grid, 1, "Order", fl_writing_setting(w, "job"));
	fl_sheet_pair(sheet, grid, 1, "Place of work", place ? place : "not stated");
	fl_sheet_pair(sheet, grid, 1, "Received on", fl_writing_setting(w, "received-on"));
	fl_sheet_pair(sheet, grid, 1, "Condition", fl_writing_setting(w, "condition"));
	fl_sheet_pair(sheet, grid, 1, "Calibrated on", fl_word_day(sheet, w->session->day));
	fl_sheet_pair(sheet, grid, 1, "Issued on", fl_word_day(sheet, w->issue->issued_on));
	fl_sheet_pairf(sheet, grid, 1, "Procedure", "%s, version %s", w->procedure->id, w->procedure->version);
	if (isfinite(w->procedure->bath_c))
		fl_sheet_pairf(sheet, grid, 1, "Calibrated at", "%s °C, the temperature of the oils",
		               fl_word_plain(sheet, w->procedure->bath_c, 2));
	fl_sheet_pair(sheet, grid, 1, "Present", fl_writing_setting(w, "others"));
}

/* A sensor of this kind feels dynamic viscosity; the dial's density is part of what is stated. */
static void write_method(fl_writing *w) {
	fl_sheet *sheet = w->sheet;
	const fl_scale *scale = &w->instrument->scale;
	fl_sheet_addf(sheet, FL_BLOCK_TEXT, "Method. %s", fl_word_sentence(sheet, w->procedure->method));
	if (w->procedure->medium != FL_MEDIUM_OIL || scale->dial_unit == FL_DIAL_MPA_S)
		return;
	fl_sheet_addf(sheet, FL_BLOCK_TEXT,
	              "The sensor feels dynamic viscosity; its dial assumes a density of %s kg/m³. Each oil is therefore "
	              "compared by its equivalent viscosity: its dynamic viscosity divided by the dial density.",
	              fl_word_plain(sheet, scale->dial_density_kg_m3, 1));
}

void fl_write_head(fl_writing *w) {
	static const char *const heads[] = {"Item", "Work"};
	fl_block *grid = fl_sheet_add_grid(w->sheet, FL_BLOCK_GRID, heads, 2);
	write_item(w, grid);
	write_work(w, grid);
	if (!w->result->traceable) {
		fl_sheet_add(w->sheet, FL_BLOCK_STATEMENT, "These results are indicative and not traceable, because:");
		for (size_t i = 0; i < w->result->not_traceable_count; i++)
			fl_sheet_add(w->sheet, FL_BLOCK_ITEM, fl_word_sentence(w->sheet, w->result->not_traceable[i]));
	}
	write_method(w);
}
