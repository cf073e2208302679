/* cause/rows.c - the readings of a run as rows of the fit: one for every point and pass, then the extra measurements.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A row with a saturated reading is left out whole: what is left of it would be the lucky half.
 */
#include "cause_private.h"

#include <string.h>

static const fl_oil *oil_of(const fl_search *s, int point) {
	if (point == FL_POINT_ZERO || s->procedure->medium == FL_MEDIUM_PRESSURE ||
	    (size_t)point >= s->session->point_count)
		return NULL;
	return fl_stock_oil(s->stock, s->session->points[point].lot);
}

static bool measuring(const fl_search *s, const fl_reading_result *reading) {
	return fl_physics_signal_state(s->instrument->scale.signal, reading->output) == FL_SIGNAL_MEASURING;
}

static bool counts(const fl_reading_result *reading) {
	return reading->used && isfinite(reading->error_span);
}

static bool belongs(const fl_reading_result *reading, int point, fl_pass pass) {
	return counts(reading) && reading->reading->point == point && reading->reading->pass == pass;
}

/* ---- what stood in the rig before ---- */

/* The last reading before the first one of this place in the latest cycle that has one: NULL for none. */
static const fl_reading_result *reading_before(const fl_search *s, int point, fl_pass pass) {
	const fl_reading_result *before = NULL, *last = NULL;
	for (size_t i = 0; i < s->run->reading_count; i++) {
		const fl_reading_result *now = &s->run->readings[i];
		if (!counts(now))
			continue;
		bool here = belongs(now, point, pass), last_here = last && belongs(last, point, pass);
		if (here && !last_here)
			before = last;
		last = now;
	}
	return before;
}

/* The oil that was in the rig before `point`: a stopped zero in between changes nothing in the rig. */
static const fl_oil *oil_before(const fl_search *s, int point, fl_pass pass) {
	const fl_reading_result *before = reading_before(s, point, pass);
	if (!before || before->reading->point == point)
		return NULL;
	if (before->reading->point != FL_POINT_ZERO)
		return oil_of(s, before->reading->point);
	int seen = FL_POINT_ZERO;
	for (const fl_reading_result *r = s->run->readings; r <= before; r++)
		if (counts(r) && r->reading->point != FL_POINT_ZERO)
			seen = r->reading->point;
	return seen == point ? NULL : oil_of(s, seen);
}

static void look_back(const fl_search *s, fl_row_data *row) {
	const fl_reading_result *before = reading_before(s, row->point, row->pass);
	if (row->at.kind != FL_ROW_OIL || !before)
		return;
	row->at.from_elsewhere = before->reading->point != row->point;
	row->at.x_before = before->ideal.x;
	row->at.before = oil_before(s, row->point, row->pass);
}

/* ---- a row ---- */

static void add_reading(fl_row_data *row, const fl_reading_result *r, size_t *with_line) {
	row->at.x += r->ideal.x;
	row->at.temp_c += r->oil.temp_c;
	row->value += r->error_span;
	row->n++;
	if (r->reading->has_line) {
		row->at.line_pa += r->reading->line_pa;
		++*with_line;
	}
	int cycle = r->reading->cycle - 1;
	if (cycle < 0 || cycle >= FL_CAUSE_CYCLES)
		return;
	row->cycle_mean[cycle] += r->error_span;
	row->cycle_n[cycle]++;
}

static void divide(fl_row_data *row, size_t with_line) {
	double n = (double)row->n;
	row->at.x /= n;
	row->at.temp_c /= n;
	row->value /= n;
	row->at.line_pa = with_line ? row->at.line_pa / (double)with_line : NAN;
	for (int c = 0; c < FL_CAUSE_CYCLES; c++) {
		if (!row->cycle_n[c])
			continue;
		row->cycle_mean[c] /= (double)row->cycle_n[c];
		row->cycles++;
	}
}

static const fl_point_result *found_point(const fl_search *s, int point, fl_pass pass) {
	for (size_t i = 0; i < s->run->point_count; i++)
		if (s->run->points[i].point == point && s->run->points[i].pass == pass)
			return &s->run->points[i];
	return NULL;
}

static const char *row_name(fl_search *s, const fl_row_data *row) {
	if (row->point == FL_POINT_ZERO)
		return fl_cause_text(s, "stopped zero %s", fl_pass_word(row->pass));
	if (row->at.oil)
		return fl_cause_text(s, "%s %s", row->at.oil->name, fl_pass_word(row->pass));
	return fl_cause_text(s, "%s of span %s", fl_cause_percent(s, row->at.x, 1), fl_pass_word(row->pass));
}

/* Where the scale begins well above zero viscosity the output at rest lies below its signal and says nothing. */
static bool zero_says_something(const fl_search *s, const fl_row_data *row) {
	double output = s->range->low + row->at.x * (s->range->high - s->range->low);
	return row->point != FL_POINT_ZERO || output >= s->range->measuring_low;
}

static void take_row(fl_search *s, int point, fl_pass pass) {
	size_t with_line = 0;
	bool saturated = false;
	fl_row_data row = {.point = point, .pass = pass, .at = {.kind = FL_ROW_OIL}};
	for (size_t i = 0; i < s->run->reading_count; i++) {
		const fl_reading_result *r = &s->run->readings[i];
		if (!belongs(r, point, pass))
			continue;
		saturated = saturated || !measuring(s, r);
		add_reading(&row, r, &with_line);
	}
	if (row.n == 0)
		return;
	divide(&row, with_line);
	row.at.oil = oil_of(s, point);
	if (!row.at.oil)
		row.at.kind = point == FL_POINT_ZERO ? FL_ROW_STOPPED : FL_ROW_INJECTED;
	if (saturated || !zero_says_something(s, &row) || s->row_count >= FL_CAUSE_ROWS)
		return;
	row.found = found_point(s, point, pass);
	look_back(s, &row);
	row.name = row_name(s, &row);
	s->rows[s->row_count++] = row;
}

static void find_thickest(fl_search *s) {
	for (size_t i = 0; i < s->row_count; i++) {
		const fl_setting_of_row *at = &s->rows[i].at;
		if (at->kind == FL_ROW_OIL && (!s->model.thickest || at->x > s->model.thickest->x))
			s->model.thickest = at;
	}
}

fl_status fl_cause_take_rows(fl_search *s, fl_error *err) {
	int last = FL_POINT_ZERO;
	for (size_t i = 0; i < s->run->reading_count; i++)
		if (counts(&s->run->readings[i]) && s->run->readings[i].reading->point > last)
			last = s->run->readings[i].reading->point;
	for (int point = FL_POINT_ZERO; point <= last; point++) {
		take_row(s, point, FL_PASS_RISING);
		take_row(s, point, FL_PASS_FALLING);
	}
	s->reading_rows = s->row_count;
	find_thickest(s);
	if (s->memory_failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the names of %zu rows", s->row_count);
	return FL_OK;
}

/* ---- extra measurements ---- */

/* Uncertainty of an injected pressure with the output it gives, where none is stated; common practice, no source. */
static const double usual_injection_u_span = 0.0005;

static void add_extra(fl_search *s, fl_row_kind kind, double x, double value, double u, const char *name) {
	if (s->row_count >= FL_CAUSE_ROWS)
		return;
	fl_row_data row = {.at = {.kind = kind, .x = x, .line_pa = NAN, .temp_c = NAN}, .point = INT32_MAX};
	row.value = value;
	row.u_extra = u;
	row.n = 1;
	row.name = name;
	s->rows[s->row_count++] = row;
}

static fl_status take_injections(fl_search *s, fl_error *err) {
	double dp_full_pa = s->result->dp_full_pa;
	if (s->extra.injection_count && !(dp_full_pa > 0.0))
		return fl_fail(err, FL_E_VALUE,
		               "pressures were injected, but the differential pressure at full scale is not known: state it "
		               "for %s",
		               s->instrument->tag);
	const fl_cause_model *m = &s->model;
	double u = isnan(s->extra.injection_u_span) ? usual_injection_u_span : s->extra.injection_u_span;
	for (size_t i = 0; i < s->extra.injection_count; i++) {
		const fl_cause_injection *in = &s->extra.injections[i];
		double x = (m->high_m2_s * in->dp_pa / dp_full_pa - m->low_m2_s) / (m->high_m2_s - m->low_m2_s);
		double y = (in->output - s->range->low) / (s->range->high - s->range->low);
		add_extra(s, FL_ROW_INJECTED, x, y - x, u,
		          fl_cause_text(s, "injected %s", fl_cause_amount(s, in->dp_pa, FL_U_MBAR, 4)));
	}
	return FL_OK;
}

static fl_status take_ratio(fl_search *s, fl_row_kind kind, double measured, double stated, double u, const char *name,
                            fl_error *err) {
	if (isnan(measured))
		return FL_OK;
	if (!(stated > 0.0) || !(measured > 0.0) || !(u > 0.0))
		return fl_fail(err, FL_E_VALUE, "%s: the measured value %g with u = %g cannot be held to the stated one %g",
		               name, measured, u, stated);
	add_extra(s, kind, NAN, measured / stated - 1.0, u / stated, name);
	return FL_OK;
}

fl_status fl_cause_take_extra(fl_search *s, fl_error *err) {
	const fl_cause_extra *extra = &s->extra;
	const fl_capillary *c = &s->instrument->capillary;
	bool geometry = s->instrument->has_geometry;
	double speed = geometry ? c->pump_speed_rev_s : NAN;
	double flow = geometry ? c->displacement_m3_rev * speed / (1.0 + c->slip_fraction) : NAN;
	TRY(take_injections(s, err));
	TRY(take_ratio(s, FL_ROW_SPEED, extra->pump_speed_rev_s, speed, extra->u_pump_speed_rev_s, "pump speed", err));
	TRY(take_ratio(s, FL_ROW_FLOW, extra->flow_m3_s, flow, extra->u_flow_m3_s, "timed volume", err));
	TRY(take_ratio(s, FL_ROW_DENSITY, extra->dial_density_kg_m3, s->model.rho_dial, extra->u_dial_density,
	               "dial density", err));
	if (!isnan(extra->temp_difference_k)) {
		if (!(extra->u_temp_difference > 0.0))
			return fl_fail(err, FL_E_VALUE, "second thermometer: its difference needs a standard uncertainty above 0");
		add_extra(s, FL_ROW_TEMPERATURE, NAN, extra->temp_difference_k, extra->u_temp_difference, "second thermometer");
	}
	if (s->memory_failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the extra measurements");
	return FL_OK;
}
