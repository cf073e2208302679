/* cause/cause.c - the search for a cause from beginning to end, and the signatures of one instrument.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * In this order: saturated points are set aside; mix-ups are looked for before anyone fits through them; the supply's
 * ratio is recognised and taken as given; then the faults are fitted and grouped.
 */
#include "cause_private.h"

#include <string.h>

void fl_cause_extra_begin(fl_cause_extra *extra) {
	*extra = (fl_cause_extra){.injection_u_span = NAN,
	                          .pump_speed_rev_s = NAN,
	                          .u_pump_speed_rev_s = NAN,
	                          .flow_m3_s = NAN,
	                          .u_flow_m3_s = NAN,
	                          .dial_density_kg_m3 = NAN,
	                          .u_dial_density = NAN,
	                          .temp_difference_k = NAN,
	                          .u_temp_difference = NAN,
	                          .gain_since_cleaning = NAN};
}

/* ---- what the session recorded as conditions ---- */

/* Without a tachometer a count of revolutions is taken as good as this; common practice, no source. */
static const double usual_speed_u_rel = 0.005;

static double speed_u(const fl_session *session, const fl_stock *stock, double speed_rev_s) {
	const char *id = fl_session_equipment_id(session, FL_ROLE_TACHOMETER);
	double u = fl_cause_equipment_u(id ? fl_stock_equipment(stock, id) : NULL, session->day, FL_Q_ROTATION);
	return isnan(u) ? usual_speed_u_rel * speed_rev_s : fmax(u, 1e-4 * speed_rev_s);
}

static double recorded(const fl_session *session, const char *id, fl_quantity quantity) {
	const fl_setting *setting = fl_session_setting(session, id);
	if (!setting || isnan(setting->value) || fl_unit_quantity(setting->unit) != quantity)
		return NAN;
	return fl_to_inside(setting->value, setting->unit);
}

void fl_cause_extra_from_session(const fl_session *session, const fl_instrument *instrument, const fl_stock *stock,
                                 fl_cause_extra *extra) {
	double speed = recorded(session, "pump-speed", FL_Q_ROTATION);
	double hz = recorded(session, "supply-frequency", FL_Q_FREQUENCY);
	if (!isnan(extra->pump_speed_rev_s) || !instrument->has_geometry)
		return;
	if (speed > 0.0) {
		extra->pump_speed_rev_s = speed;
		extra->u_pump_speed_rev_s = speed_u(session, stock, speed);
	} else if (hz > 0.0 && instrument->supply_hz > 0.0) {
		extra->pump_speed_rev_s = instrument->capillary.pump_speed_rev_s * hz / instrument->supply_hz;
		extra->u_pump_speed_rev_s = usual_speed_u_rel * extra->pump_speed_rev_s;
	}
}

/* ---- one signature ---- */

fl_status fl_cause_signature(const fl_instrument *instrument, const fl_oil *oil, const fl_oil *before, double temp_c,
                             fl_fault fault, double amount, double *effect_span, fl_error *err) {
	fl_cause_model model;
	fl_faults faults = {{0}};
	fl_oil_state state;
	fl_ideal ideal = {0}, earlier = {0};
	double without, with;
	TRY(fl_cause_model_begin(instrument, &model, err));
	double at_rest = -model.low_m2_s / (model.high_m2_s - model.low_m2_s);
	ideal.x = earlier.x = at_rest;
	if (oil) {
		TRY(fl_physics_oil_at(&oil->table, temp_c, &state, err));
		TRY(fl_physics_ideal(&instrument->scale, state.mu_pa_s, &ideal, err));
	}
	if (before) {
		TRY(fl_physics_oil_at(&before->table, temp_c, &state, err));
		TRY(fl_physics_ideal(&instrument->scale, state.mu_pa_s, &earlier, err));
	}
	fl_setting_of_row row = {.kind = oil ? FL_ROW_OIL : FL_ROW_STOPPED, .oil = oil, .before = before, .temp_c = temp_c};
	row.line_pa = 1e6;
	row.x = ideal.x;
	row.x_before = earlier.x;
	row.from_elsewhere = oil != before;
	model.thickest = oil ? &row : NULL;
	TRY(fl_cause_predict(&model, &row, &faults, &without, err));
	faults.amount[fault] = amount;
	TRY(fl_cause_predict(&model, &row, &faults, &with, err));
	*effect_span = with - without;
	return FL_OK;
}

/* ---- the search ---- */

static const fl_instrument *instrument_of(const fl_session *session, const fl_stock *stock) {
	for (size_t i = 0; i < session->text_count; i++)
		if (strcmp(session->texts[i].kind, "instrument") == 0 && fl_stock_instrument(stock, session->texts[i].name))
			return fl_stock_instrument(stock, session->texts[i].name);
	return stock->instrument_count ? &stock->instruments[0] : NULL;
}

static fl_status give_rows(fl_search *s, fl_error *err) {
	fl_cause *out = s->out;
	fl_faults none = {{0}};
	out->rows = fl_arena_alloc(s->arena, s->row_count + 1, sizeof *out->rows);
	if (!out->rows)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu rows", s->row_count);
	for (size_t i = 0; i < s->row_count; i++) {
		const fl_row_data *from = &s->rows[i];
		fl_cause_row *row = &out->rows[out->row_count++];
		*row = (fl_cause_row){.name = from->name, .extra = i >= s->reading_rows, .point = from->point};
		row->pass = from->pass;
		row->x = from->at.x;
		row->value = from->value;
		row->explained = NAN;
		row->u = sqrt(s->V[i * s->row_count + i]);
		TRY(fl_cause_predict(&s->model, &from->at, &none, &row->healthy, err));
	}
	return FL_OK;
}

static fl_status search(fl_search *s, fl_error *err) {
	TRY(fl_cause_model_begin(s->instrument, &s->model, err));
	s->model.memo = s->memo;
	s->model.flows = s->flows;
	fl_cause_saturated(s);
	TRY(fl_cause_take_rows(s, err));
	if (s->reading_rows < 2) {
		s->out->available = false;
		s->out->unavailable_reason = "fewer than two places with readings that can be used";
		return FL_OK;
	}
	TRY(fl_cause_take_extra(s, err));
	TRY(fl_cause_take_noise(s, err));
	TRY(give_rows(s, err));
	fl_cause_mix_ups(s);
	fl_cause_scatter(s);
	TRY(fl_cause_supply(s, err));
	if (!s->out->withheld)
		TRY(fl_cause_attribute(s, err));
	fl_cause_two_zeros(s);
	TRY(fl_cause_carry_over(s, err));
	TRY(fl_cause_trim(s, err));
	if (!s->out->withheld)
		TRY(fl_cause_next(s, err));
	fl_cause_report(s);
	return FL_OK;
}

static void begin(fl_cause *out, fl_run_kind run) {
	*out = (fl_cause){.run = run, .available = true, .unavailable_reason = ""};
	out->statement = "Opinion and interpretation, not part of the calibration result: the readings are compared with "
	                 "what known faults would do to this instrument.";
	out->chi_squared = out->dof = out->p = out->condition = NAN;
	out->stopped_zero_span = out->running_zero_span = out->healthy_offset_span = NAN;
	out->carry_over = out->u_carry_over = out->scatter_ratio = NAN;
	for (fl_fault fault = 0; fault < FL_FAULT_COUNT; fault++)
		out->estimates[fault] = (fl_cause_estimate){.fault = fault, .amount = NAN, .u = NAN, .group = -1};
}

static fl_status find(fl_search *s, fl_error *err) {
	s->instrument = instrument_of(s->session, s->stock);
	if (!s->instrument)
		return fl_fail(err, FL_E_NOT_FOUND, "the session names no instrument");
	s->range = fl_physics_signal_range(s->instrument->scale.signal);
	TRY(fl_cause_extra_measured(s->session, s->instrument, s->stock, s->out->run, s->arena, &s->extra, err));
	fl_cause_extra_from_session(s->session, s->instrument, s->stock, &s->extra);
	if (!s->run->available) {
		s->out->available = false;
		s->out->unavailable_reason = s->run->unavailable_reason ? s->run->unavailable_reason : "there are no readings";
		return FL_OK;
	}
	TRY(search(s, err));
	if (s->memory_failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the findings");
	return FL_OK;
}

fl_status fl_cause_find(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                        const fl_result *result, fl_run_kind run, const fl_cause_extra *extra, const fl_stock *shelf,
                        fl_cause *out, fl_error *err) {
	fl_cause cause;
	begin(&cause, run);
	fl_arena scratch = {0};
	fl_search *s = fl_arena_alloc(&scratch, 1, sizeof *s);
	if (!s)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the search for a cause");
	s->session = session;
	s->procedure = procedure;
	s->stock = stock;
	s->shelf = shelf;
	s->result = result;
	s->run = &result->runs[run];
	s->out = &cause;
	s->arena = &cause.arena;
	if (extra)
		s->extra = *extra;
	else
		fl_cause_extra_begin(&s->extra);
	fl_status status = find(s, err);
	fl_arena_free(&scratch);
	if (status < 0) {
		fl_arena_free(&cause.arena);
		return status;
	}
	*out = cause;
	return FL_OK;
}

void fl_cause_free(fl_cause *cause) {
	fl_arena_free(&cause->arena);
	*cause = (fl_cause){0};
}

const fl_finding *fl_cause_finding(const fl_cause *cause, fl_finding_kind kind) {
	for (size_t i = 0; i < cause->finding_count; i++)
		if (cause->findings[i].kind == kind)
			return &cause->findings[i];
	return NULL;
}
