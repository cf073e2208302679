/* content_budget.c - the uncertainty budget of every point, where the procedure asks for it on the certificate.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "writing.h"

#include <math.h>

static const char *distribution_word(fl_distribution distribution) {
	switch (distribution) {
	case FL_DIST_NORMAL:
		return "normal";
	case FL_DIST_RECTANGULAR:
		return "rectangular";
	case FL_DIST_TRIANGULAR:
		return "triangular";
	case FL_DIST_STUDENT:
		return "Student's t";
	}
	return "";
}

static const char *word_dof(fl_sheet *sheet, double dof) {
	return isinf(dof) || dof > 9999 ? "∞" : fl_word_number(sheet, floor(dof), 0);
}

static void write_line(fl_writing *w, fl_block *table, const fl_point_result *point, size_t i) {
	fl_sheet *sheet = w->sheet;
	const fl_budget_line *line = &point->budget[i];
	const char *name = point->point == FL_POINT_ZERO ? "zero" : fl_writing_point_name(w, point->point);
	const char *cells[9] = {i == 0 ? name : "",
	                        line->name,
	                        line->stated,
	                        distribution_word(line->distribution),
	                        fl_word_u(sheet, line->u),
	                        fl_word_plain(sheet, line->sensitivity, 3),
	                        fl_word_number(sheet, 100 * line->contribution_span, 4),
	                        fl_word_number(sheet, 100 * line->share, 1),
	                        word_dof(sheet, line->dof)};
	fl_sheet_row(sheet, table, i == 0 ? FL_ROW_FIRST : FL_ROW_PLAIN, cells);
}

static void write_sum(fl_writing *w, fl_block *table, const fl_point_result *point) {
	fl_sheet *sheet = w->sheet;
	double U = 100 * point->sum.expanded;
	const char *cells[9] = {"",
	                        "combined",
	                        fl_sheet_printf(sheet, "U = %s %% of span, k = %s", fl_word_u(sheet, U),
	                                        fl_word_number(sheet, point->sum.coverage_factor, 2)),
	                        "",
	                        "",
	                        "",
	                        fl_word_number(sheet, 100 * point->sum.uc, 4),
	                        fl_word_number(sheet, 100, 1),
	                        word_dof(sheet, point->sum.dof_effective)};
	fl_sheet_row(sheet, table, FL_ROW_PLAIN, cells);
}

void fl_write_budgets(fl_writing *w) {
	static const fl_column columns[] = {
	    {"point", "", "", FL_ALIGN_LEFT, false},           {"contribution", "", "", FL_ALIGN_LEFT, true},
	    {"stated", "", "", FL_ALIGN_LEFT, true},           {"distribution", "", "", FL_ALIGN_LEFT, false},
	    {"u", "as stated", "", FL_ALIGN_DECIMAL, false},   {"c", "%/unit", "", FL_ALIGN_DECIMAL, false},
	    {"c·u", "% of span", "", FL_ALIGN_DECIMAL, false}, {"share", "%", "", FL_ALIGN_DECIMAL, false},
	    {"dof", "", "", FL_ALIGN_DECIMAL, false}};
	const fl_run_result *left = &w->result->runs[FL_RUN_AS_LEFT];
	const fl_run_result *run = left->available ? left : &w->result->runs[FL_RUN_AS_FOUND];
	if (!w->procedure->budget_on_certificate || !run->available)
		return;
	fl_sheet_addf(w->sheet, FL_BLOCK_HEADING, "Uncertainty budgets, %s, both directions together",
	              fl_run_word(run->kind));
	fl_block *table = fl_sheet_add_table(w->sheet, columns, sizeof columns / sizeof *columns);
	for (size_t i = 0; i < run->combined_count; i++) {
		for (size_t k = 0; k < run->combined[i].budget_count; k++)
			write_line(w, table, &run->combined[i], k);
		if (run->combined[i].budget_count > 0)
			write_sum(w, table, &run->combined[i]);
	}
	fl_sheet_add(
	    w->sheet, FL_BLOCK_SMALL,
	    "u is the standard uncertainty in the unit stated, c the sensitivity of the error to it, share the part of "
	    "the combined variance, dof the degrees of freedom.");
}
