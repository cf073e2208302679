/* sample.h - a whole case for the tests of the certificate: the sample stock, a real procedure, a session with readings
 * made from the physics of a sensor whose faults are chosen here, and the result that the analysis gives.
 * Ship, yard, oils and people are invented. SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_CERTIFICATE_SAMPLE_H
#define FOUNDLEFT_TEST_CERTIFICATE_SAMPLE_H

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "foundleft/certificate.h"

/* What the case shall be like. */
typedef struct sample_wish {
	const char *template_name; /* NULL: workshop-calibration */
	double zero_span, gain;    /* faults of the as-found run: fraction of span; of the reading */
	double left_zero_span, left_gain;
	fl_decision decision;
	bool missing_as_found;
	int struck; /* so many readings of the as-found run are struck */
	fl_day day; /* 0: 2026-04-14 */
	fl_source source;
	const char *customer, *performer;
	size_t remarks;
	bool tachometer; /* the one that is overdue */
} sample_wish;

typedef struct sample_case {
	fl_procedure procedure;
	fl_stock stock;
	fl_session session;
	fl_result result;
	fl_issue issue;
} sample_case;

static inline void sample_must(fl_status status, const fl_error *err, const char *what) {
	char line[1024];
	if (status >= 0)
		return;
	fprintf(stderr, "%s: %s\n", what, fl_error_line(err, line, sizeof line));
	abort();
}

static inline void sample_set(fl_session *s, const char *id, const char *typed, fl_unit unit, double value) {
	s->settings = fl_arena_grow(&s->arena, s->settings, s->setting_count, &s->setting_capacity, sizeof *s->settings);
	s->settings[s->setting_count++] =
	    (fl_setting){.sequence = ++s->last_sequence, .id = id, .typed = typed, .unit = unit, .value = value};
}

static inline void sample_gate(fl_session *s, const char *id, const char *answer, const char *reason, fl_utc at) {
	s->gates = fl_arena_grow(&s->arena, s->gates, s->gate_count, &s->gate_capacity, sizeof *s->gates);
	s->gates[s->gate_count++] =
	    (fl_gate_answer){.sequence = ++s->last_sequence, .at = at, .id = id, .answer = answer, .reason = reason};
}

static inline void sample_equip(fl_session *s, fl_role role, const char *id) {
	s->equipment =
	    fl_arena_grow(&s->arena, s->equipment, s->equipment_count, &s->equipment_capacity, sizeof *s->equipment);
	s->equipment[s->equipment_count++] = (fl_session_equipment){.role = role, .id = id, .sequence = ++s->last_sequence};
}

/* Noise that is the same every time: -1 to 1. */
static inline double sample_noise(int a, int b, int c, int d) {
	unsigned n =
	    (unsigned)a * 73856093u ^ (unsigned)b * 19349663u ^ (unsigned)c * 83492791u ^ (unsigned)(d + 7) * 2654435761u;
	n = (n ^ n >> 13) * 1274126177u;
	return (double)((n ^ n >> 16) & 0xffff) / 32767.5 - 1;
}

static inline void sample_reading(sample_case *c, fl_run_kind run, int cycle, fl_pass pass, int point, int number,
                                  double zero_span, double gain) {
	fl_session *s = &c->session;
	const fl_scale *scale = &c->stock.instruments[0].scale;
	const fl_signal_range *range = fl_physics_signal_range(scale->signal);
	double noise = sample_noise(cycle, pass, point, number), x = 0,
	       temp = 40 + 0.03 * sample_noise(point, number, cycle, 5);
	fl_reading r = {.sequence = ++s->last_sequence,
	                .run = run,
	                .cycle = cycle,
	                .pass = pass,
	                .point = point,
	                .number = number,
	                .unit = range->unit};
	r.at = r.taken = s->opened_at + 40 * s->last_sequence;
	if (point >= 0 && c->procedure.medium == FL_MEDIUM_OIL) {
		fl_oil_state oil;
		fl_ideal ideal;
		fl_error err = {0};
		temp = round(temp * 100) / 100;
		sample_must(fl_physics_oil_at(&fl_stock_oil(&c->stock, s->points[point].lot)->table, temp, &oil, &err), &err,
		            "oil");
		sample_must(fl_physics_ideal(scale, oil.mu_pa_s, &ideal, &err), &err, "ideal");
		x = ideal.x;
		r.has_temp = true;
		r.temp_c = temp;
		r.temp_typed = fl_arena_printf(&s->arena, "%.2f °C", temp);
	} else if (point >= 0) {
		x = c->procedure.points[point].position_pct_span / 100;
		r.has_applied = true;
		r.applied_unit = FL_U_MBAR;
		r.applied_pa = x * c->stock.instruments[0].dp_full_pa;
		r.applied_typed = fl_arena_printf(&s->arena, "%.2f", r.applied_pa / 100);
	}
	double lag = point < 0 ? 0 : pass == FL_PASS_RISING ? -0.0003 : 0.0004;
	double out = range->low + (range->high - range->low) * (x * (1 + gain) + zero_span + lag + 0.0003 * noise);
	r.output = round(out * 1000) / 1000;
	r.typed = fl_arena_printf(&s->arena, "%.3f", r.output);
	s->readings = fl_arena_grow(&s->arena, s->readings, s->reading_count, &s->reading_capacity, sizeof *s->readings);
	s->readings[s->reading_count++] = r;
}

static inline void sample_run(sample_case *c, fl_run_kind run, double zero_span, double gain) {
	fl_session_run *state = &c->session.runs[run];
	*state = (fl_session_run){.begun = true,
	                          .closed = true,
	                          .begun_at = c->session.opened_at + 3600,
	                          .closed_at = c->session.opened_at + 9000,
	                          .closed_by = "Ada Lindqvist"};
	for (int cycle = 1; cycle <= c->procedure.cycles; cycle++)
		for (int pass = 0; pass <= (c->procedure.falling ? 1 : 0); pass++)
			for (int i = -1; i < c->procedure.point_count; i++) {
				int point = pass == 0 ? i : c->procedure.point_count - 1 - (i + 1);
				if (point < 0 && !c->procedure.stopped_zero)
					continue;
				for (int n = 1; n <= c->procedure.readings; n++)
					sample_reading(c, run, cycle, (fl_pass)pass, point, n, zero_span, gain);
			}
}

static inline void sample_points(sample_case *c) {
	static const char *const oils[] = {"LK-2", "LK-10", "LK-20", "LK-35", "LK-50"};
	static const char *const lots[] = {"2511A", "2511B", "2511C", "2511D", "2511E"};
	fl_session *s = &c->session;
	for (int i = 0; i < c->procedure.point_count; i++) {
		int oil = c->procedure.point_count == 3 ? 2 * i : i;
		s->points = fl_arena_grow(&s->arena, s->points, s->point_count, &s->point_capacity, sizeof *s->points);
		bool pressure = c->procedure.medium == FL_MEDIUM_PRESSURE;
		s->points[s->point_count++] =
		    (fl_session_point){.oil = pressure ? "" : oils[oil], .lot = pressure ? "" : lots[oil]};
	}
}

static inline void sample_answers(sample_case *c) {
	fl_session *s = &c->session;
	for (int i = 0; i < c->procedure.gate_count; i++) {
		const fl_question *q = &c->procedure.gates[i];
		sample_gate(s, q->id,
		            q->kind == FL_ASK_CONFIRM  ? "yes"
		            : q->kind == FL_ASK_AMOUNT ? "0.1"
		                                       : "P-2291",
		            NULL, s->opened_at + 60 * i);
	}
	for (int i = 0; i < c->procedure.restore_count; i++) {
		bool declined = strcmp(c->procedure.restore[i].id, "alarms-live") == 0;
		sample_gate(s, c->procedure.restore[i].id, declined ? "no" : "yes",
		            declined ? "engine stays stopped until Friday" : NULL, s->opened_at + 20000 + 60 * i);
	}
	for (int i = 0; i < c->procedure.condition_count; i++)
		if (c->procedure.conditions[i].required)
			sample_set(s, c->procedure.conditions[i].id, "21.5", c->procedure.conditions[i].unit, 21.5);
}

static inline void sample_people(sample_case *c, const sample_wish *wish) {
	fl_session *s = &c->session;
	sample_set(s, "place", "On board Quillhaven, alongside at Tallmere Yard, Port Hesper", FL_U_NONE, NAN);
	sample_set(s, "customer", wish->customer ? wish->customer : "Quillhaven, engine department", FL_U_NONE, NAN);
	sample_set(s, "job", "TY-8841", FL_U_NONE, NAN);
	sample_set(s, "performed-by", wish->performer ? wish->performer : "Ada Lindqvist", FL_U_NONE, NAN);
	sample_equip(s, FL_ROLE_CURRENT_METER, "MA-3");
	if (c->procedure.medium == FL_MEDIUM_OIL) {
		sample_equip(s, FL_ROLE_THERMOMETER, "TH-7");
		sample_equip(s, FL_ROLE_BATH, "BA-2");
	} else {
		sample_equip(s, FL_ROLE_PRESSURE_STANDARD, "PS-1");
	}
	if (wish->tachometer)
		sample_equip(s, FL_ROLE_TACHOMETER, "TC-1");
}

static inline void sample_adjust(fl_session *s, const char *item, const char *before, const char *after) {
	s->adjustments =
	    fl_arena_grow(&s->arena, s->adjustments, s->adjustment_count, &s->adjustment_capacity, sizeof *s->adjustments);
	s->adjustments[s->adjustment_count++] = (fl_adjustment){
	    .sequence = ++s->last_sequence, .at = s->opened_at + 12000, .item = item, .before = before, .after = after};
}

static inline void sample_session(sample_case *c, const sample_wish *wish) {
	fl_session *s = &c->session;
	s->source = wish->source;
	s->program = "0.1.0";
	s->day = wish->day ? wish->day : fl_day_from_civil(2026, 4, 14);
	s->opened_at = (fl_utc)s->day * 86400 + 6 * 3600;
	sample_people(c, wish);
	sample_points(c);
	sample_answers(c);
	if (wish->missing_as_found) {
		s->runs[FL_RUN_AS_FOUND] =
		    (fl_session_run){.missing = true, .missing_reason = "the span was turned before anybody read it"};
	} else {
		sample_run(c, FL_RUN_AS_FOUND, wish->zero_span, wish->gain);
	}
	for (size_t i = 0; i < s->reading_count && (int)i < wish->struck; i++) {
		fl_reading *r = &s->readings[3 + 5 * i];
		r->struck = true;
		r->struck_reason = "air in the impulse line";
		r->struck_by = "Ada Lindqvist";
	}
	s->decision = wish->decision;
	s->decision_reason =
	    wish->decision == FL_DECISION_LEAVE ? "inside the adjust limit" : "span error out of tolerance";
	s->decision_by = "Ada Lindqvist";
	if (wish->decision == FL_DECISION_ADJUST || wish->missing_as_found) {
		sample_adjust(s, "zero screw of the transmitter", "4.040 mA", "4.000 mA");
		sample_adjust(s, "span: pressure at 20 mA", "305.62 mbar", "313.21 mbar");
		sample_run(c, FL_RUN_AS_LEFT, wish->left_zero_span, wish->left_gain);
	}
	for (size_t i = 0; i < wish->remarks; i++) {
		s->remarks = fl_arena_grow(&s->arena, s->remarks, s->remark_count, &s->remark_capacity, sizeof *s->remarks);
		s->remarks[s->remark_count++] =
		    (fl_remark){++s->last_sequence, s->opened_at,
		                "The coupling of the metering pump was renewed; the old one kept on board."};
	}
	s->closed = true;
	s->closed_by = "Ada Lindqvist";
}

static inline void sample_make(sample_case *c, const sample_wish *wish) {
	fl_error err = {0};
	char path[512];
	*c = (sample_case){0};
	snprintf(path, sizeof path, SOURCE_DIR "/templates/%s.yaml",
	         wish->template_name ? wish->template_name : "workshop-calibration");
	sample_must(fl_procedure_load(fl_io_system(), path, &c->procedure, &err), &err, "procedure");
	static const char *const files[] = {"oils", "equipment", "instruments"};
	for (int i = 0; i < 3; i++) {
		snprintf(path, sizeof path, SOURCE_DIR "/sample-sessions/stock/%s.yaml", files[i]);
		sample_must(fl_stock_load(&c->stock, fl_io_system(), path, &err), &err, "stock");
	}
	sample_session(c, wish);
	c->issue = (fl_issue){.number = "TY-2026-0417",
	                      .issued_on = c->session.day + 1,
	                      .issued_at = (fl_utc)(c->session.day + 1) * 86400,
	                      .utc_offset_min = 120,
	                      .issuer = "Tallmere Yard, instrument bench (invented)",
	                      .issuer_address = "Quay 3; Port Hesper",
	                      .authorised_by = "Γιώργος Αναγνώστου",
	                      .journal_digest = "9c56cc51b374c3ba189210d5b6d4bf57790d351c96c47c02190ecf1e430635ab",
	                      .journal_name = "2026-04-14-VT-1.flj",
	                      .program_version = "0.1.0"};
}

static inline void sample_assess(sample_case *c) {
	fl_error err = {0};
	sample_must(fl_analysis_session(&c->session, &c->procedure, &c->stock, &c->result, &err), &err, "analysis");
}

static inline fl_sheet *sample_sheet(sample_case *c) {
	fl_error err = {0};
	fl_sheet *sheet = NULL;
	sample_must(fl_certificate_content(&c->session, &c->procedure, &c->stock, &c->result, &c->issue, &sheet, &err),
	            &err, "content");
	return sheet;
}

static inline void sample_free(sample_case *c) {
	fl_result_free(&c->result);
	fl_stock_free(&c->stock);
	fl_procedure_free(&c->procedure);
	fl_session_free(&c->session);
}

#endif
