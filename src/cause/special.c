/* cause/special.c - what has a mark of its own: saturated points, the supply's ratio, two zeros, carry-over, scatter.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "cause_private.h"

#include <stdio.h>
#include <string.h>

/* ---- saturated points ---- */

static bool saturated_at(const fl_search *s, int point, fl_pass pass, double *output) {
	for (size_t i = 0; i < s->run->reading_count; i++) {
		const fl_reading_result *r = &s->run->readings[i];
		if (!r->used || r->reading->point != point || r->reading->pass != pass || isnan(r->output))
			continue;
		if (fl_physics_signal_state(s->instrument->scale.signal, r->output) == FL_SIGNAL_MEASURING)
			continue;
		*output = r->output;
		return true;
	}
	return false;
}

static const char *place_name(fl_search *s, const fl_point_result *point) {
	if (point->point == FL_POINT_ZERO)
		return fl_cause_text(s, "stopped zero %s", fl_pass_word(point->pass));
	if (point->oil[0])
		return fl_cause_text(s, "%s %s", point->oil, fl_pass_word(point->pass));
	return fl_cause_text(s, "%s of span %s", fl_cause_percent(s, point->x, 1), fl_pass_word(point->pass));
}

/* A scale that begins above zero viscosity stands below its signal at rest: no fault. */
static bool at_rest_below(const fl_search *s, const fl_point_result *point) {
	return point->point == FL_POINT_ZERO && point->ideal_output < s->range->measuring_low;
}

void fl_cause_saturated(fl_search *s) {
	const char *names = "";
	double output = NAN;
	int count = 0;
	for (size_t i = 0; i < s->run->point_count; i++) {
		const fl_point_result *point = &s->run->points[i];
		if (at_rest_below(s, point) || !saturated_at(s, point->point, point->pass, &output))
			continue;
		names = fl_cause_text(s, "%s%s%s", names, count ? ", " : "", place_name(s, point));
		count++;
	}
	if (!count)
		return;
	fl_finding *f =
	    fl_cause_say(s, FL_FINDING_SATURATED, "saturated",
	                 "Left out of the search for a cause: %s. The output stood outside its measuring range.", names);
	fl_cause_advise(s, f,
	                "Take a thinner oil or a warmer bath for these points, or find out why the output ends there.",
	                "The signal %s measures from %g to %g %s; %g %s was read. Beyond that it states a condition, not a "
	                "viscosity.",
	                s->range->text, s->range->measuring_low, s->range->measuring_high, fl_unit_text(s->range->unit),
	                output, fl_unit_text(s->range->unit));
	fl_cause_number_of(s, f, "places left out", count, NAN, FL_U_NONE);
}

/* ---- the supply's ratio ---- */

/* How near the ratio has to come, and how near another explanation of the gain may be. */
static const double supply_margin_span = 0.01;
/* An adjustment beyond this hides something (job practice, no source). */
static const double largest_adjustment = 0.10;

/* Largest deviation of the running rows from what this speed does, beside a zero of its own. */
static fl_status misfit_at_speed(const fl_search *s, double deviation, double *misfit, fl_error *err) {
	fl_faults faults = s->start;
	double lowest = INFINITY, highest = -INFINITY;
	faults.amount[FL_FAULT_SPEED] = deviation;
	for (size_t i = 0; i < s->reading_rows; i++) {
		double value;
		TRY(fl_cause_predict(&s->model, &s->rows[i].at, &faults, &value, err));
		lowest = fmin(lowest, s->rows[i].value - value);
		highest = fmax(highest, s->rows[i].value - value);
	}
	*misfit = (highest - lowest) / 2.0;
	return FL_OK;
}

static bool speed_contradicts(const fl_search *s, double deviation) {
	const fl_cause_extra *e = &s->extra;
	if (isnan(e->pump_speed_rev_s) || !s->instrument->has_geometry)
		return false;
	double stated = s->instrument->capillary.pump_speed_rev_s;
	return fabs(e->pump_speed_rev_s / stated - 1.0 - deviation) > 0.05;
}

static void say_supply(fl_search *s, double ratio, const char *fraction, const char *id, double misfit) {
	double hz = s->instrument->supply_hz;
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_SUPPLY, id,
	    "All running readings are %s times what they should be, the ratio of a %s Hz unit on a %s Hz supply.", fraction,
	    ratio < 1.0 ? "60" : "50", ratio < 1.0 ? "50" : "60");
	fl_cause_advise(s, f, "Measure the supply frequency and count the pump's revolutions before anybody adjusts.",
	                "With the pump at %s of its speed every point fits within %s of span%s.", fraction,
	                fl_cause_amount(s, misfit, FL_U_PERCENT, 2),
	                !(hz > 0.0) ? "" : fl_cause_text(s, "; the instrument is made for %g Hz", hz));
	fl_cause_number_of(s, f, "ratio", ratio, NAN, FL_U_NONE);
	fl_cause_number_of(s, f, "largest misfit", misfit, NAN, FL_U_PERCENT_SPAN);
	if (f) {
		f->strength = isnan(s->extra.pump_speed_rev_s) ? FL_STRENGTH_LIKELY : FL_STRENGTH_CLEAR;
		s->out->stop = true;
	}
}

/* Slope of the running rows: the gain by plain least squares; NAN where there are too few. */
static double running_gain(const fl_search *s) {
	double x[FL_CAUSE_ROWS], e[FL_CAUSE_ROWS];
	size_t n = 0;
	fl_line line;
	for (size_t i = 0; i < s->reading_rows; i++) {
		if (s->rows[i].at.kind == FL_ROW_STOPPED)
			continue;
		x[n] = s->rows[i].at.x;
		e[n++] = s->rows[i].value;
	}
	return n >= 2 && fl_numeric_line(x, e, n, &line, NULL) >= 0 ? line.slope : NAN;
}

static void stop_large_adjustment(fl_search *s, double gain) {
	if (!(fabs(gain) > largest_adjustment))
		return;
	fl_finding *f = fl_cause_say(s, FL_FINDING_STOP, "stop-adjustment",
	                             "No adjustment now: the readings are off by %s of reading, and more than 10 %% is "
	                             "never a matter of adjustment.",
	                             fl_cause_percent(s, gain, 1));
	fl_cause_advise(s, f, "Find the cause first: supply and speed, then capillary and pump, then the dial's density.",
	                "A zero and span adjustment over %g %% would hide a fault that goes on growing.",
	                100.0 * largest_adjustment);
	fl_cause_number_of(s, f, "gain error", gain, NAN, FL_U_PERCENT);
	s->out->stop = true;
}

fl_status fl_cause_supply(fl_search *s, fl_error *err) {
	static const struct {
		double ratio;
		const char *fraction, *id;
	} ratios[] = {{5.0 / 6.0, "5/6", "supply:5/6"}, {6.0 / 5.0, "6/5", "supply:6/5"}};
	double gain = running_gain(s), misfit;
	if (s->procedure->medium == FL_MEDIUM_PRESSURE || isnan(gain))
		return FL_OK;
	for (size_t i = 0; i < 2; i++) {
		double deviation = ratios[i].ratio - 1.0;
		if (speed_contradicts(s, deviation) || fabs(gain - deviation) > 2.0 * supply_margin_span)
			continue;
		TRY(misfit_at_speed(s, deviation, &misfit, err));
		if (misfit > supply_margin_span)
			continue;
		say_supply(s, ratios[i].ratio, ratios[i].fraction, ratios[i].id, misfit);
		s->start.amount[FL_FAULT_SPEED] = deviation;
	}
	stop_large_adjustment(s, gain);
	return FL_OK;
}

/* ---- two zeros ---- */

/* The running zero with its correlated parts left out: those move both zeros or the gain. */
static double running_zero_u(const fl_search *s) {
	double u = s->run->running_zero_u_span;
	return isnan(u) ? fmax(s->scatter_u, 1e-4) : fmax(u, s->scatter_u / 2.0);
}

/* What the healthy kinetic term alone leaves between running and stopped zero: intercept of its line. */
static double healthy_offset(const fl_search *s) {
	double x[FL_CAUSE_ROWS], e[FL_CAUSE_ROWS];
	size_t n = 0;
	fl_line line;
	for (size_t i = 0; i < s->reading_rows; i++) {
		if (s->rows[i].at.kind != FL_ROW_OIL)
			continue;
		x[n] = s->rows[i].at.x;
		e[n++] = s->out->rows[i].healthy;
	}
	return n >= 2 && fl_numeric_line(x, e, n, &line, NULL) >= 0 ? line.intercept : NAN;
}

typedef enum zeros { ZEROS_HEALTHY, ZEROS_STOPPED, ZEROS_RUNNING, ZEROS_UNCLEAR } zeros;

/* Advice and reason: what to do about the zero screw. */
static void advise_zeros(fl_search *s, fl_finding *f, zeros what) {
	const char *stopped = fl_cause_percent(s, s->out->stopped_zero_span, 2);
	const char *healthy = fl_cause_percent(s, s->out->healthy_offset_span, 2);
	switch (what) {
	case ZEROS_HEALTHY:
		fl_cause_advise(s, f, "Leave the zero screw alone.",
		                "The stopped zero does not ask for it, and the difference is the kinetic term.");
		break;
	case ZEROS_STOPPED:
		fl_cause_advise(
		    s, f, "Prove the zero with the equaliser open and both legs full, then trim it.",
		    "The stopped zero is off by %s of span, and the running zero by as much beside the kinetic term.", stopped);
		break;
	case ZEROS_RUNNING:
		fl_cause_advise(
		    s, f,
		    s->out->trim.zero_asked ? "Trim the zero only by the stopped zero; look for the excess in the capillary."
		                            : "Leave the zero screw alone: open the capillary and look for an obstacle.",
		    "An offset that is there only while the pump runs belongs to the flow; the kinetic term explains "
		    "%s of span.",
		    healthy);
		break;
	case ZEROS_UNCLEAR:
		fl_cause_advise(s, f, "Judge the zero screw by the stopped zero alone.",
		                "The running points do not lie on a straight line, so their zero is none.");
		break;
	}
}

static void say_zeros(fl_search *s, double excess, double u, zeros what) {
	static const char *const ids[] = {"two-zeros:healthy", "two-zeros:stopped", "two-zeros:running",
	                                  "two-zeros:unclear"};
	fl_cause *out = s->out;
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_TWO_ZEROS, ids[what],
	    "Stopped zero %s of span, running zero %s; a sound capillary lies %s above the stopped zero while it runs%s.",
	    fl_cause_percent(s, out->stopped_zero_span, 2), fl_cause_percent(s, out->running_zero_span, 2),
	    fl_cause_percent(s, out->healthy_offset_span, 2),
	    what == ZEROS_RUNNING ? fl_cause_text(s, ", so %s is in excess", fl_cause_percent(s, excess, 2)) : "");
	advise_zeros(s, f, what);
	fl_cause_number_of(s, f, "stopped zero", out->stopped_zero_span, s->run->stopped_zero_u_span / 2.0,
	                   FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "running zero", out->running_zero_span, u, FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "healthy difference", out->healthy_offset_span, NAN, FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "excess of the running zero", excess, u, FL_U_PERCENT_SPAN);
	if (!f)
		return;
	f->z = fabs(excess) / u;
	f->strength = what == ZEROS_RUNNING ? fl_cause_strength(f->z) : FL_STRENGTH_NONE;
}

/* Beyond these a zero asks for attention: job practice, no source. */
static const double zero_asks_span = 0.0025, jump_span = 0.005;

/* A bend or a clipped top pulls the running zero too: where the faults were fitted, they must speak for the flow. */
static bool particle_speaks(const fl_search *s) {
	const fl_cause_estimate *particle = &s->out->estimates[FL_FAULT_PARTICLE];
	if (s->out->withheld || !s->out->explained || !particle->fitted)
		return true;
	return particle->group >= 0 && s->out->groups[particle->group].z >= 3.0;
}

void fl_cause_two_zeros(fl_search *s) {
	fl_cause *out = s->out;
	out->stopped_zero_span = s->run->stopped_zero_span;
	out->running_zero_span = s->run->running_zero_span;
	out->healthy_offset_span = healthy_offset(s);
	double U = s->run->stopped_zero_u_span;
	out->trim.zero_asked = fabs(out->stopped_zero_span) > fmax(zero_asks_span, isnan(U) ? 0.0 : U);
	if (isnan(out->stopped_zero_span) || isnan(out->running_zero_span) || isnan(out->healthy_offset_span))
		return;
	double excess = out->running_zero_span - out->stopped_zero_span - out->healthy_offset_span;
	double u = running_zero_u(s);
	bool jump = excess > fmax(jump_span, 4.0 * u) && particle_speaks(s);
	bool apart = fabs(excess) > jump_span;
	say_zeros(s, excess, u,
	          jump                   ? ZEROS_RUNNING
	          : apart                ? ZEROS_UNCLEAR
	          : out->trim.zero_asked ? ZEROS_STOPPED
	                                 : ZEROS_HEALTHY);
}

/* ---- carry-over ---- */

/* Derivative of a row by the share of the oil before. */
static fl_status carry_effect(const fl_search *s, const fl_row_data *row, double *per_share, fl_error *err) {
	fl_faults faults = s->start;
	double none, some, share = 1e-3;
	TRY(fl_cause_predict(&s->model, &row->at, &faults, &none, err));
	faults.amount[FL_FAULT_CARRY_OVER] = share;
	TRY(fl_cause_predict(&s->model, &row->at, &faults, &some, err));
	*per_share = (some - none) / share;
	return FL_OK;
}

typedef struct carry_fit {
	double sum_cd, sum_cc, sum_dd, largest; /* d: falling minus rising, c: the same by one whole share */
	size_t n;
	double variance; /* of one d */
} carry_fit;

static fl_status collect_carry(const fl_search *s, carry_fit *fit, fl_error *err) {
	for (size_t i = 0; i + 1 < s->reading_rows; i++) {
		const fl_row_data *up = &s->rows[i], *down = up + 1;
		double c_up, c_down;
		if (up->at.kind != FL_ROW_OIL || up->point != down->point)
			continue;
		TRY(carry_effect(s, up, &c_up, err));
		TRY(carry_effect(s, down, &c_down, err));
		double c = c_down - c_up, d = down->value - up->value;
		fit->sum_cd += c * d;
		fit->sum_cc += c * c;
		fit->sum_dd += d * d;
		fit->largest = fmax(fit->largest, fabs(d));
		double stops = up->cycles ? (double)up->cycles : 1.0;
		double drift = s->procedure->settle.drift_pct_span / 100.0 / 2.0 / sqrt(3.0);
		fit->variance = 2.0 * (s->scatter_u * s->scatter_u + (isfinite(drift) ? drift * drift : 0.0)) / stops;
		fit->n++;
	}
	return FL_OK;
}

static void say_carry_over(fl_search *s, const carry_fit *fit, double explained, double limit) {
	bool exceeded = fit->largest > limit;
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_CARRY_OVER, exceeded ? "carry-over:flush-again" : "carry-over",
	    "%s of the oil before, left in the rig, would explain %.0f %% of the difference between rising and falling%s.",
	    fl_cause_amount(s, s->out->carry_over, FL_U_PERCENT, 2), 100.0 * explained,
	    explained < 0.9 ? "; the rest has another cause" : "");
	fl_cause_advise(
	    s, f,
	    exceeded ? "Flush a second time and read again before hysteresis fails the instrument."
	             : "Flush a second time at the next change of oil.",
	    "The largest difference is %s of span%s; falling readings lie above rising ones, as remains of the oil "
	    "before make them.",
	    fl_cause_amount(s, fit->largest, FL_U_PERCENT, 2),
	    exceeded ? fl_cause_text(s, ", the limit %s", fl_cause_amount(s, limit, FL_U_PERCENT, 2)) : "");
	fl_cause_number_of(s, f, "share of the oil before", s->out->carry_over, s->out->u_carry_over, FL_U_PERCENT);
	fl_cause_number_of(s, f, "explained share of squares", explained, NAN, FL_U_PERCENT);
	fl_cause_number_of(s, f, "largest hysteresis", fit->largest, NAN, FL_U_PERCENT_SPAN);
	if (f) {
		f->z = s->out->carry_over / s->out->u_carry_over;
		f->strength = fl_cause_strength(f->z);
		s->out->stop = s->out->stop || exceeded;
	}
}

fl_status fl_cause_carry_over(fl_search *s, fl_error *err) {
	carry_fit fit = {0};
	s->out->carry_over = s->out->u_carry_over = NAN;
	TRY(collect_carry(s, &fit, err));
	if (fit.n < 2 || !(fit.sum_cc > 0.0))
		return FL_OK;
	s->out->carry_over = fit.sum_cd / fit.sum_cc;
	s->out->u_carry_over = sqrt(fit.variance / fit.sum_cc);
	double explained = fit.sum_cd * fit.sum_cd / fit.sum_cc / fit.sum_dd;
	double limit = isnan(s->result->hysteresis_limit_span) ? 0.005 : s->result->hysteresis_limit_span;
	bool significant = s->out->carry_over > 3.0 * s->out->u_carry_over;
	if (significant && explained > 0.5 && fit.largest > limit / 2.0)
		say_carry_over(s, &fit, explained, limit);
	return FL_OK;
}

/* ---- scatter ---- */

/* Scatter of readings that a sound rig has while it runs (fraction of span), and how many times that is a sign. */
static const double usual_scatter_span = 4e-4, scatter_sign = 4.0;

static double pooled_scatter(const fl_search *s, bool running, double *dof) {
	double sum_sq = 0.0;
	*dof = 0.0;
	for (size_t i = 0; i < s->reading_rows; i++) {
		const fl_point_result *found = s->rows[i].found;
		bool runs = s->rows[i].at.kind != FL_ROW_STOPPED;
		if (runs != running || !found || found->n < 2 || isnan(found->s_span))
			continue;
		sum_sq += ((double)found->n - 1.0) * found->s_span * found->s_span;
		*dof += (double)found->n - 1.0;
	}
	return *dof > 0.0 ? sqrt(sum_sq / *dof) : NAN;
}

void fl_cause_scatter(fl_search *s) {
	double dof_running, dof_stopped;
	double running = pooled_scatter(s, true, &dof_running), stopped = pooled_scatter(s, false, &dof_stopped);
	s->out->scatter_ratio = NAN;
	if (s->procedure->medium == FL_MEDIUM_PRESSURE || !(dof_running >= 4.0))
		return;
	double reference = fmax(isnan(stopped) ? 0.0 : stopped, usual_scatter_span);
	s->out->scatter_ratio = running / reference;
	s->noisy = s->out->scatter_ratio >= scatter_sign;
	if (!s->noisy)
		return;
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_SCATTER, "scatter",
	    "The readings scatter by %s of span while the pump runs, %.1f times as much as %s: air at the suction, or a "
	    "damping element plugged or missing; the readings alone do not tell which.",
	    fl_cause_amount(s, running, FL_U_PERCENT, 2), s->out->scatter_ratio,
	    isnan(stopped) ? "usual" : "usual or with the pump stopped");
	fl_cause_advise(s, f,
	                "Vent the suction side and all high points and read again; then read the pressure at the pump's "
	                "outlet.",
	                "Standard deviation of one reading %s of span from %.0f degrees of freedom, against %s.",
	                fl_cause_amount(s, running, FL_U_PERCENT, 2), dof_running,
	                fl_cause_amount(s, reference, FL_U_PERCENT, 2));
	fl_cause_number_of(s, f, "scatter while running", running, running / sqrt(2.0 * dof_running), FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "scatter expected", reference, NAN, FL_U_PERCENT_SPAN);
	if (f)
		f->strength = FL_STRENGTH_LIKELY;
	s->out->stop = true;
}
