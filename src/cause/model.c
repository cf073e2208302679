/* cause/model.c - the instrument with faults in it: pump, capillary and transmitter run again for one row.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * dP = 128 mu (L + n d/2) Q / (pi d^4) + m rho v^2 by fl_physics_capillary, with the flow Q = Q0 - k dP / mu that a
 * leaking pump leaves. A hard particle of length l at bore ratio f adds 128 mu l Q / (pi d^4) (f^-4 - 1) and
 * K/2 rho v^2 f^-4 (contraction and sudden expansion, K = 1.5; White, Fluid Mechanics, ch. 6.9). The output is
 * proportional to dP over the sound instrument's dP at full scale.
 */
#include "cause_private.h"

#include <stdint.h>
#include <string.h>

static const double pi = 3.14159265358979323846;
static const double gravity_m_s2 = 9.80665;
static const double particle_bore_ratio = 0.5, particle_loss = 1.5;
/* Density for the small kinetic part where a dial in mPa.s states none: hot fuel. */
static const double fuel_density_kg_m3 = 900.0;
/* Of the oil that stands in an impulse line: a bench oil's. */
static const double leg_density_kg_m3 = 850.0;
static const double ten_bar_pa = 1e6;

static double pow4(double v) {
	return v * v * v * v;
}

/* Tube resistance 128 l / (pi d^4): dP = mu Q times this. */
static double resistance(double length_m, double bore_m) {
	return 128.0 * length_m / (pi * pow4(bore_m));
}

/* ---- what the pump delivers, and the pressure it costs ---- */

typedef struct oil_now {
	double mu_pa_s, rho_kg_m3;
} oil_now;

/* The part of dP that goes with the flow, and the part that goes with its square. */
typedef struct drop {
	double viscous_pa, kinetic_pa;
} drop;

static fl_status drop_at(const fl_capillary *capillary, double particle_m, oil_now oil, drop *out, fl_error *err) {
	fl_flow flow;
	TRY(fl_physics_capillary(capillary, oil.mu_pa_s, oil.rho_kg_m3, &flow, err));
	double bore_m = capillary->bore_m, narrowing = 1.0 / pow4(particle_bore_ratio), v_m_s = flow.velocity_m_s;
	double gain_pa = oil.mu_pa_s * flow.flow_m3_s * resistance(particle_m, bore_m) * (narrowing - 1.0);
	/* The loss at its ends is taken in proportion to its length, so that one number says how much there is of it. */
	double ends_pa = 0.5 * particle_loss * oil.rho_kg_m3 * v_m_s * v_m_s * narrowing * (particle_m / 1e-3);
	*out = (drop){flow.dp_poiseuille_pa + flow.dp_end_pa + gain_pa, flow.dp_kinetic_pa + ends_pa};
	return FL_OK;
}

/* k in Q = Q0 - k dP / mu: a sound pump loses slip_fraction to the plain tube. */
static double leak_of(const fl_cause_model *m, const fl_faults *faults) {
	const fl_capillary *c = &m->instrument->capillary;
	return (c->slip_fraction + faults->amount[FL_FAULT_SLIP]) / resistance(c->length_m, c->bore_m);
}

/* Q = Q0 - k dP(Q) / mu: with q = Q / Q0 a quadratic, r b q^2 + (1 + r a) q - 1 = 0, r = k / (mu Q0), a and b the
 * viscous and kinetic drop at Q0. */
static fl_status pressure_with_slip(const fl_cause_model *m, const fl_faults *faults, oil_now oil, double *dp_pa,
                                    fl_error *err) {
	const double *a = faults->amount;
	fl_capillary c = m->instrument->capillary;
	drop full;
	c.slip_fraction = 0.0;
	c.bore_m *= 1.0 - a[FL_FAULT_DEPOSIT];
	c.pump_speed_rev_s *= (1.0 + a[FL_FAULT_SPEED]) * (1.0 - a[FL_FAULT_AIR]);
	c.kinetic_coefficient *= fmax(0.0, 1.0 + a[FL_FAULT_KINETIC]);
	TRY(drop_at(&c, a[FL_FAULT_PARTICLE], oil, &full, err));
	double r = leak_of(m, faults) / (oil.mu_pa_s * c.displacement_m3_rev * c.pump_speed_rev_s);
	double half = 1.0 + r * full.viscous_pa;
	double q = 2.0 / (half + sqrt(half * half + 4.0 * r * full.kinetic_pa));
	*dp_pa = full.viscous_pa * q + full.kinetic_pa * q * q;
	return FL_OK;
}

/* Without geometry only proportions are known: gain faults by their laws, no kinetic term. */
static double pressure_by_proportion(const fl_faults *faults, oil_now oil) {
	const double *a = faults->amount;
	double flow = (1.0 + a[FL_FAULT_SPEED]) * (1.0 - a[FL_FAULT_AIR]) / (1.0 + a[FL_FAULT_SLIP]);
	return oil.mu_pa_s * flow * pow(1.0 - a[FL_FAULT_DEPOSIT], -4.0);
}

static fl_status pressure(const fl_cause_model *m, const fl_faults *faults, oil_now oil, double *share, fl_error *err) {
	double dp_pa = pressure_by_proportion(faults, oil);
	if (m->instrument->has_geometry)
		TRY(pressure_with_slip(m, faults, oil, &dp_pa, err));
	*share = dp_pa / m->dp_full_pa;
	return FL_OK;
}

/* ---- the oil in the capillary ---- */

/* Two oils mixed, the share `of` of the second: ln ln Z and density by shares (Walther's function as ASTM D341 has
 * it; the blending rule of ASTM D7152). */
static fl_status mix(const fl_oil_state *a, const fl_oil_state *b, double of, oil_now *out, fl_error *err) {
	double za, zb, nu_m2_s;
	TRY(fl_physics_d341_z(a->nu_m2_s, &za, err));
	TRY(fl_physics_d341_z(b->nu_m2_s, &zb, err));
	double w = (1.0 - of) * log(log(za)) + of * log(log(zb));
	TRY(fl_physics_d341_nu(exp(exp(w)), &nu_m2_s, err));
	out->rho_kg_m3 = (1.0 - of) * a->rho_kg_m3 + of * b->rho_kg_m3;
	out->mu_pa_s = nu_m2_s * out->rho_kg_m3;
	return FL_OK;
}

static size_t place_in_memo(const fl_oil *oil, double temp_c) {
	uint64_t bits;
	memcpy(&bits, &temp_c, sizeof bits);
	bits = (bits ^ (uint64_t)(uintptr_t)oil) * UINT64_C(0x9E3779B97F4A7C15);
	return (size_t)(bits >> 32) % FL_MEMO_PLACES;
}

static fl_status oil_at(const fl_cause_model *m, const fl_oil *oil, double temp_c, fl_oil_state *out, fl_error *err) {
	fl_oil_memo *memo = m->memo ? &m->memo[place_in_memo(oil, temp_c)] : NULL;
	if (memo && memo->oil == oil && memo->temp_c == temp_c) {
		*out = memo->state;
		return FL_OK;
	}
	fl_status status = fl_physics_oil_at(&oil->table, temp_c, out, err);
	if (memo && status >= 0)
		*memo = (fl_oil_memo){oil, temp_c, *out};
	return status;
}

static fl_status oil_in_capillary(const fl_cause_model *m, const fl_setting_of_row *row, const fl_faults *faults,
                                  oil_now *out, fl_error *err) {
	fl_oil_state state, before;
	double temp_c = row->temp_c + faults->amount[FL_FAULT_TEMPERATURE];
	TRY(oil_at(m, row->oil, temp_c, &state, err));
	*out = (oil_now){state.mu_pa_s, state.rho_kg_m3};
	double share = faults->amount[FL_FAULT_CARRY_OVER];
	if (!row->before || share == 0.0)
		return FL_OK;
	if (oil_at(m, row->before, temp_c, &before, NULL) < 0)
		return FL_OK; /* the oil before is not certified there: nothing can be said of it */
	return mix(&state, &before, share, out, err);
}

/* ---- transmitter ---- */

/* The share of full-scale pressure as an output: 0 at the lower range value. */
static double output_of(const fl_cause_model *m, double share) {
	return (m->high_m2_s * share - m->low_m2_s) / (m->high_m2_s - m->low_m2_s);
}

static double transmit(const fl_cause_model *m, const fl_setting_of_row *row, const fl_faults *faults, double y,
                       double x) {
	const double *a = faults->amount;
	double zero = a[FL_FAULT_ZERO];
	double dp_full_pa = m->instrument->has_geometry ? m->dp_full_pa : m->instrument->dp_full_pa;
	double span_share = m->high_m2_s / (m->high_m2_s - m->low_m2_s);
	if (row->kind != FL_ROW_INJECTED && dp_full_pa > 0.0)
		zero += a[FL_FAULT_COLUMN] * leg_density_kg_m3 * gravity_m_s2 / dp_full_pa * span_share;
	if (row->kind != FL_ROW_INJECTED && !isnan(row->line_pa))
		zero += a[FL_FAULT_LINE] * row->line_pa / ten_bar_pa;
	return zero + (1.0 + a[FL_FAULT_SPAN]) * y + a[FL_FAULT_CURVATURE] * 4.0 * x * (1.0 - x);
}

/* A wrong dial density changes what the dial ought to say: x goes with the ratio of the densities, the kinetic part
 * stays as it is. */
static double dial_shift(const fl_cause_model *m, const fl_faults *faults, double x) {
	double equivalent = m->low_m2_s / (m->high_m2_s - m->low_m2_s) + x;
	return equivalent * (1.0 / (1.0 + faults->amount[FL_FAULT_DENSITY]) - 1.0);
}

/* The share of full-scale pressure that the row's oil gives with these faults. */
static fl_status flow_share(const fl_cause_model *m, const fl_setting_of_row *row, const fl_faults *faults,
                            double *share, fl_error *err) {
	static const fl_fault touching[FL_FLOW_FAULTS] = {FL_FAULT_DEPOSIT,     FL_FAULT_SLIP,      FL_FAULT_SPEED,
	                                                  FL_FAULT_AIR,         FL_FAULT_PARTICLE,  FL_FAULT_KINETIC,
	                                                  FL_FAULT_TEMPERATURE, FL_FAULT_CARRY_OVER};
	fl_flow_memo now = {.oil = row->oil, .before = row->before, .temp_c = row->temp_c};
	for (int i = 0; i < FL_FLOW_FAULTS; i++)
		now.amounts[i] = faults->amount[touching[i]];
	fl_flow_memo *memo = m->flows ? &m->flows[place_in_memo(row->oil, row->temp_c) % FL_FLOW_PLACES] : NULL;
	if (memo && memo->oil == now.oil && memo->before == now.before && memo->temp_c == now.temp_c &&
	    memcmp(memo->amounts, now.amounts, sizeof now.amounts) == 0) {
		*share = memo->share;
		return FL_OK;
	}
	oil_now oil;
	TRY(oil_in_capillary(m, row, faults, &oil, err));
	TRY(pressure(m, faults, oil, share, err));
	now.share = *share;
	if (memo)
		*memo = now;
	return FL_OK;
}

static fl_status flowing_output(const fl_cause_model *m, const fl_setting_of_row *row, const fl_faults *faults,
                                double *y, fl_error *err) {
	double share;
	TRY(flow_share(m, row, faults, &share, err));
	double out = output_of(m, share) + dial_shift(m, faults, row->x);
	if (row->from_elsewhere)
		out -= faults->amount[FL_FAULT_LAG] * (row->x - row->x_before);
	*y = transmit(m, row, faults, out, row->x);
	return FL_OK;
}

static fl_faults settled_and_clean(const fl_faults *faults) {
	fl_faults settled = *faults;
	settled.amount[FL_FAULT_LAG] = settled.amount[FL_FAULT_CARRY_OVER] = 0.0;
	return settled;
}

/* From such a loss on an end of the output is taken for one. A pressure injected beyond the thickest oil's would meet
 * it at once, however small the loss: the ramp keeps the model free of a jump. */
static const double sure_of_the_end = 0.01;

/* Where torque or output end: the thickest oil loses `loss`, a thinner one what it has above that. What lag and remains
 * of the oil before do to a reading stays on top: a coupling that slips does not hold the pressure dead. */
static fl_status take_loss(const fl_cause_model *m, const fl_setting_of_row *row, const fl_faults *faults, double loss,
                           double *y, fl_error *err) {
	double top, own = *y;
	fl_faults settled = settled_and_clean(faults);
	if (loss == 0.0 || !m->thickest)
		return FL_OK;
	if (row->oil == m->thickest->oil) {
		*y -= loss;
		return FL_OK;
	}
	TRY(flowing_output(m, m->thickest, &settled, &top, err));
	if (row->oil)
		TRY(flowing_output(m, row, &settled, &own, err));
	double beyond = fmax(0.0, own - top), sure = fmin(1.0, loss / sure_of_the_end);
	*y -= fmin(loss, fmax(0.0, own - (top - loss))) + sure * beyond;
	return FL_OK;
}

/* ---- one row ---- */

static fl_status predict_flow(const fl_cause_model *m, const fl_faults *faults, double *value) {
	const double *a = faults->amount;
	double sound = m->instrument->has_geometry ? m->instrument->capillary.slip_fraction : 0.0;
	*value =
	    (1.0 + a[FL_FAULT_SPEED]) * (1.0 - a[FL_FAULT_AIR]) * (1.0 + sound) / (1.0 + sound + a[FL_FAULT_SLIP]) - 1.0;
	return FL_OK;
}

fl_status fl_cause_predict(const fl_cause_model *m, const fl_setting_of_row *row, const fl_faults *faults,
                           double *value, fl_error *err) {
	const double *a = faults->amount;
	double y = 0.0;
	switch (row->kind) {
	case FL_ROW_SPEED:
		*value = a[FL_FAULT_SPEED];
		return FL_OK;
	case FL_ROW_FLOW:
		return predict_flow(m, faults, value);
	case FL_ROW_DENSITY:
		*value = a[FL_FAULT_DENSITY];
		return FL_OK;
	case FL_ROW_TEMPERATURE:
		*value = a[FL_FAULT_TEMPERATURE];
		return FL_OK;
	case FL_ROW_OIL: /* torque and output ends look alike here: their losses add */
		TRY(flowing_output(m, row, faults, &y, err));
		TRY(take_loss(m, row, faults, a[FL_FAULT_COUPLING] + a[FL_FAULT_LIMIT], &y, err));
		break;
	case FL_ROW_STOPPED:
	case FL_ROW_INJECTED:
		y = transmit(m, row, faults, row->x, row->kind == FL_ROW_INJECTED ? row->x : 0.0);
		TRY(take_loss(m, row, faults, a[FL_FAULT_LIMIT], &y, err));
		break;
	}
	*value = y - row->x;
	return FL_OK;
}

/* ---- beginning ---- */

fl_status fl_cause_model_begin(const fl_instrument *instrument, fl_cause_model *model, fl_error *err) {
	fl_cause_model m = {.instrument = instrument, .dp_full_pa = 1.0};
	const fl_scale *scale = &instrument->scale;
	TRY(fl_physics_scale_span(scale, &m.low_m2_s, &m.high_m2_s, err));
	bool dynamic = scale->dial_unit == FL_DIAL_MPA_S;
	m.rho_dial = dynamic ? 1000.0 : scale->dial_density_kg_m3;
	m.rho_full = scale->dial_density_kg_m3 > 0.0 ? scale->dial_density_kg_m3 : fuel_density_kg_m3;
	if (!(m.rho_dial > 0.0))
		return fl_fail(err, FL_E_VALUE, "the dial density of %s is not known: no signature can be computed",
		               instrument->tag);
	fl_faults none = {{0}};
	oil_now full = {m.high_m2_s * m.rho_dial, m.rho_full};
	double share;
	TRY(pressure(&m, &none, full, &share, err));
	m.dp_full_pa = share;
	*model = m;
	return FL_OK;
}
