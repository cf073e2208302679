/* content_means.c - with what the work was done: equipment, reference oils, conditions, permit and safety.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>
#include <string.h>

/* ---- equipment and oils ---------------------------------------------------- */

static const char *uncertainty_of(fl_writing *w, const fl_equipment *item) {
	fl_sheet *sheet = w->sheet;
	const char *unit = item->unit == FL_U_CELSIUS ? "K" : fl_unit_text(item->unit);
	if (!(item->k > 0))
		return fl_sheet_printf(sheet, "±%s %s, half width", fl_word_plain(sheet, item->U, 6), unit);
	return fl_sheet_printf(sheet, "%s %s (k = %s)", fl_word_plain(sheet, item->U, 6), unit,
	                       fl_word_plain(sheet, item->k, 2));
}

static void write_equipment(fl_writing *w) {
	static const fl_column columns[] = {{"use", "", "", FL_ALIGN_LEFT, false},
	                                    {"equipment", "", "", FL_ALIGN_LEFT, false},
	                                    {"certificate", "", "", FL_ALIGN_LEFT, false},
	                                    {"issued by", "", "", FL_ALIGN_LEFT, true},
	                                    {"U of its certificate", "", "", FL_ALIGN_LEFT, false},
	                                    {"calibrated", "", "", FL_ALIGN_LEFT, false},
	                                    {"due", "", "", FL_ALIGN_LEFT, false},
	                                    {"on the day", "", "", FL_ALIGN_LEFT, false}};
	fl_sheet *sheet = w->sheet;
	fl_block *table = fl_sheet_add_table(sheet, columns, sizeof columns / sizeof *columns);
	for (size_t i = 0; i < w->session->equipment_count; i++) {
		const fl_session_equipment *used = &w->session->equipment[i];
		if (used->undone)
			continue;
		const fl_equipment *item = fl_stock_equipment(w->stock, used->id);
		const char *cells[8] = {fl_stock_role_text(used->role), used->id, "unknown", "", "", "", "", "not traceable"};
		if (item) {
			cells[2] = item->certificate;
			cells[3] = item->issuer;
			cells[4] = uncertainty_of(w, item);
			cells[5] = fl_word_day(sheet, item->calibrated_on);
			cells[6] = fl_word_day(sheet, item->due_on);
			cells[7] = fl_stock_equipment_in_date(item, w->session->day, NULL) == FL_OK ? "in date" : "out of date";
		}
		fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
	}
}

/* The certified point nearest to the temperature of the oils. */
static const fl_oil_point *nearest(const fl_writing *w, const fl_oil *oil, size_t *index) {
	*index = 0;
	for (size_t i = 1; i < oil->table.count; i++)
		if (fabs(oil->table.points[i].temp_c - w->procedure->bath_c) <
		    fabs(oil->table.points[*index].temp_c - w->procedure->bath_c))
			*index = i;
	return oil->table.count ? &oil->table.points[*index] : NULL;
}

/* Four significant digits, as certificates of oils give viscosities. */
static const char *four_digits(fl_sheet *sheet, double value) {
	return fl_word_number(sheet, value, value > 0 ? 3 - (int)floor(log10(value)) : 3);
}

/* One oil as certified; without its issuer where all have the same. */
static void write_oil(fl_writing *w, fl_block *table, const fl_session_point *at, bool with_issuer) {
	fl_sheet *sheet = w->sheet;
	const fl_oil *oil = fl_stock_oil(w->stock, at->lot);
	const char *cells[13] = {at->oil, at->lot, "unknown", "", "", "", "", "", "", "", "", "not traceable", ""};
	size_t i;
	const fl_oil_point *point = oil ? nearest(w, oil, &i) : NULL;
	if (point) {
		cells[2] = oil->certificate;
		cells[3] = fl_word_number(sheet, point->temp_c, 2);
		cells[4] = four_digits(sheet, point->nu_m2_s * 1e6);
		cells[5] = fl_word_number(sheet, 100 * oil->U_nu_rel[i], 2);
		cells[6] = fl_word_number(sheet, point->rho_kg_m3, 1);
		cells[7] = fl_word_number(sheet, oil->U_rho_kg_m3[i], 1);
		cells[8] = fl_word_day(sheet, oil->certified_on);
		cells[9] = fl_word_day(sheet, oil->use_before);
		cells[10] = fl_word_day(sheet, oil->opened_on);
		cells[11] = fl_stock_oil_in_date(oil, w->session->day, NULL) == FL_OK ? "in date" : "out of date";
		cells[12] = with_issuer ? oil->issuer : "";
	}
	fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
}

/* The issuer that all oils have; NULL if they differ or there is none. */
static const char *common_issuer(const fl_writing *w) {
	const char *issuer = NULL;
	for (size_t i = 0; i < w->session->point_count; i++) {
		const fl_oil *oil = fl_stock_oil(w->stock, w->session->points[i].lot);
		if (!oil || fl_word_is_empty(oil->issuer) || (issuer && strcmp(issuer, oil->issuer) != 0))
			return NULL;
		issuer = oil->issuer;
	}
	return issuer;
}

/* Issuer and coverage factors of the oils' certificates in one sentence, where they are all alike; else each. */
static void write_oil_factors(fl_writing *w, const char *issuer) {
	const fl_oil *first = NULL;
	bool alike = true;
	for (size_t i = 0; i < w->session->point_count; i++) {
		const fl_oil *oil = fl_stock_oil(w->stock, w->session->points[i].lot);
		if (!oil)
			continue;
		first = first ? first : oil;
		alike = alike && oil->k_nu == first->k_nu && oil->k_rho == first->k_rho;
	}
	const char *by = issuer ? fl_sheet_printf(w->sheet, "Issued by %s. ", issuer) : "";
	fl_sheet_add_led(
	    w->sheet, FL_BLOCK_SMALL, "Certificates of the oils.",
	    "%sBetween certified temperatures the viscosity follows ASTM D341 and the density a straight line.%s", by,
	    !first || !alike
	        ? ""
	        : fl_sheet_printf(w->sheet, " U is stated with k = %s for the viscosity, k = %s for the density.",
	                          fl_word_plain(w->sheet, first->k_nu, 2), fl_word_plain(w->sheet, first->k_rho, 2)));
	for (size_t i = 0; !alike && i < w->session->point_count; i++) {
		const fl_oil *oil = fl_stock_oil(w->stock, w->session->points[i].lot);
		if (oil)
			fl_sheet_addf(w->sheet, FL_BLOCK_SMALL, "%s (%s): k = %s for the viscosity, k = %s for the density.",
			              oil->name, oil->lot, fl_word_plain(w->sheet, oil->k_nu, 2),
			              fl_word_plain(w->sheet, oil->k_rho, 2));
	}
}

static void write_oils(fl_writing *w) {
	static const char *const at = "as certified nearest to the bath";
	const fl_column columns[] = {
	    {"oil", "", "", FL_ALIGN_LEFT, false},         {"lot", "", "", FL_ALIGN_LEFT, false},
	    {"certificate", "", "", FL_ALIGN_LEFT, false}, {"T", "°C", at, FL_ALIGN_DECIMAL, false},
	    {"ν", "mm²/s", at, FL_ALIGN_DECIMAL, false},   {"U", "%", at, FL_ALIGN_DECIMAL, false},
	    {"ρ", "kg/m³", at, FL_ALIGN_DECIMAL, false},   {"U", "kg/m³", at, FL_ALIGN_DECIMAL, false},
	    {"certified", "", "", FL_ALIGN_LEFT, false},   {"use before", "", "", FL_ALIGN_LEFT, false},
	    {"opened", "", "", FL_ALIGN_LEFT, false},      {"on the day", "", "", FL_ALIGN_LEFT, false},
	    {"issued by", "", "", FL_ALIGN_LEFT, true}};
	const char *issuer = common_issuer(w);
	fl_block *table = fl_sheet_add_table(w->sheet, columns, issuer ? 12 : 13);
	for (size_t i = 0; i < w->session->point_count; i++)
		if (!fl_word_is_empty(w->session->points[i].lot))
			write_oil(w, table, &w->session->points[i], !issuer);
	write_oil_factors(w, issuer);
}

void fl_write_standards(fl_writing *w) {
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Traceability");
	if (w->result->traceable)
		fl_sheet_add(w->sheet, FL_BLOCK_SMALL,
		             "The results rest on the certificates below, all in date on the day of the calibration.");
	else
		fl_sheet_add(
		    w->sheet, FL_BLOCK_TEXT,
		    "The results rest on the certificates below. They are indicative and not traceable, for the reasons "
		    "given on the first page.");
	write_equipment(w);
	if (w->procedure->medium == FL_MEDIUM_OIL)
		write_oils(w);
}

/* ---- conditions, permit and safety, return to service ----------------- */

/* "supply-frequency" -> "supply frequency": the id of a question is its short name. */
static void add_short_name(fl_text *list, const char *id) {
	for (const char *c = id; *c; c++)
		fl_text_append(list, *c == '-' || *c == '_' ? " " : c, 1);
}

/* A run-in list under words in bold; nothing if it is empty. */
static void write_list(fl_writing *w, const char *lead, fl_text *list) {
	w->sheet->failed |= list->failed;
	if (list->length > 0)
		fl_sheet_add_led(w->sheet, FL_BLOCK_SMALL, lead, "%s.", list->data);
	fl_text_free(list);
}

static void write_conditions(fl_writing *w) {
	fl_text list = {0};
	for (int i = 0; i < w->procedure->condition_count; i++) {
		const fl_question *question = &w->procedure->conditions[i];
		const char *value = fl_writing_setting(w, question->id);
		if (!value && !question->required)
			continue;
		fl_text_add(&list, list.length ? "; " : "");
		add_short_name(&list, question->id);
		fl_text_printf(&list, " %s", value ? value : "not recorded");
	}
	write_list(w, "Conditions:", &list);
}

static bool is_done(const fl_gate_answer *given) {
	return given && strcmp(given->answer, "no") != 0;
}

/* "steam in manual: yes (06:01)" */
static void add_answer(fl_text *list, const fl_question *question, const fl_gate_answer *given) {
	char utc[FL_UTC_SIZE];
	fl_text_add(list, list->length ? "; " : "");
	add_short_name(list, question->id);
	if (!given) {
		fl_text_add(list, ": not answered");
		return;
	}
	const char *unit = question->kind == FL_ASK_AMOUNT ? fl_unit_text(question->unit) : "";
	if (strstr(given->answer, unit))
		unit = "";
	fl_utc_format(given->at, utc);
	fl_text_printf(list, ": %s%s%s (%.5s)", given->answer, *unit ? " " : "", unit, utc + 11);
}

static void write_answers(fl_writing *w, const char *lead, const fl_question *questions, int count) {
	fl_text list = {0};
	for (int i = 0; i < count; i++)
		add_answer(&list, &questions[i], fl_session_gate(w->session, questions[i].id));
	write_list(w, lead, &list);
}

static void list_unfinished(fl_writing *w, const fl_question *questions, int count, bool *headed) {
	for (int i = 0; i < count; i++) {
		const fl_gate_answer *given = fl_session_gate(w->session, questions[i].id);
		if (is_done(given))
			continue;
		if (!*headed)
			fl_sheet_add(w->sheet, FL_BLOCK_STATEMENT, "Unfinished when the session was closed");
		*headed = true;
		const char *why = !given ? "not answered" : fl_word_is_empty(given->reason) ? "no reason given" : given->reason;
		fl_sheet_addf(w->sheet, FL_BLOCK_ITEM, "%s %s: %s", questions[i].ask, given ? "No" : "Open", why);
	}
}

void fl_write_gates(fl_writing *w) {
	const fl_procedure *procedure = w->procedure;
	bool headed = false;
	if (procedure->condition_count + procedure->gate_count + procedure->restore_count == 0)
		return;
	fl_sheet_add(w->sheet, FL_BLOCK_HEADING, "Conditions, safety, return to service");
	write_conditions(w);
	write_answers(w, "Permit and safety, with the time in UTC:", procedure->gates, procedure->gate_count);
	write_answers(w, "Return to service:", procedure->restore, procedure->restore_count);
	list_unfinished(w, procedure->gates, procedure->gate_count, &headed);
	list_unfinished(w, procedure->restore, procedure->restore_count, &headed);
}
