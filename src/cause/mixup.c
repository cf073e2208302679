/* cause/mixup.c - one thing taken for another: bottles, units, passes, °F, a slipped decimal.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The line that most readings lie on is found so that a minority of wrong ones cannot pull it (least median of
 * squares; Rousseeuw and Leroy, Robust Regression and Outlier Detection, 1987). A reading far off it is tried under
 * each mistake; one that brings it back is proposed. Nothing is changed: the data stay as entered.
 */
#include "cause_private.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* Far off, and back again (fractions of span); the second is the job's practice, no source. */
static const double far_off_span = 0.015, back_span = 0.005;
/* A line with more gain than this is none. */
static const double largest_gain = 0.35;

enum { MOST_PLACES = 256, OTHERS = 64 };

/* One reading as the search sees it. */
typedef struct taken {
	const fl_reading_result *r;
	const fl_oil *oil; /* NULL: stopped zero */
	double x, e;       /* the healthy kinetic term taken off e */
} taken;

typedef struct line_of_most {
	double zero, gain, s; /* s: robust standard deviation of one reading */
} line_of_most;

typedef struct hunt {
	fl_search *s;
	taken *items;
	size_t count;
	line_of_most line;
	double far, near; /* thresholds in force */
} hunt;

/* ---- readings without their healthy part ---- */

static bool ideal_at(const fl_search *s, const fl_oil *oil, double temp_c, double *x, double *healthy) {
	fl_oil_state state;
	fl_ideal ideal;
	fl_faults none = {{0}};
	if (fl_physics_oil_at(&oil->table, temp_c, &state, NULL) < 0)
		return false;
	if (fl_physics_ideal(&s->instrument->scale, state.mu_pa_s, &ideal, NULL) < 0)
		return false;
	fl_setting_of_row row = {.kind = FL_ROW_OIL, .oil = oil, .temp_c = temp_c, .line_pa = NAN, .x = ideal.x};
	*x = ideal.x;
	return fl_cause_predict(&s->model, &row, &none, healthy, NULL) >= 0;
}

static const fl_oil *oil_of(const fl_search *s, const fl_reading *reading) {
	if (reading->point == FL_POINT_ZERO || (size_t)reading->point >= s->session->point_count)
		return NULL;
	return fl_stock_oil(s->stock, s->session->points[reading->point].lot);
}

static bool take(const fl_search *s, const fl_reading_result *r, taken *out) {
	double healthy = 0.0, x = r->ideal.x;
	*out = (taken){.r = r, .oil = oil_of(s, r->reading), .x = x, .e = r->error_span};
	if (!r->used || !isfinite(r->error_span))
		return false;
	if (!out->oil) /* a zero below its signal says nothing */
		return r->reading->point == FL_POINT_ZERO &&
		       s->range->low + x * (s->range->high - s->range->low) >= s->range->measuring_low;
	if (!ideal_at(s, out->oil, r->oil.temp_c, &x, &healthy))
		return false;
	out->e -= healthy;
	return true;
}

/* ---- the line of most ---- */

static int by_size(const void *a, const void *b) {
	double x = *(const double *)a, y = *(const double *)b;
	return (x > y) - (x < y);
}

/* Residuals by size; the one that more than half stay within, or INFINITY where it is not below `best`: counting tells
 * that long before sorting would. */
static double median_residual(const hunt *h, double zero, double gain, double best, double *room) {
	size_t below = 0;
	for (size_t i = 0; i < h->count; i++) {
		room[i] = fabs(h->items[i].e - zero - gain * h->items[i].x);
		below += room[i] < best;
	}
	if (below <= h->count / 2)
		return INFINITY;
	qsort(room, h->count, sizeof *room, by_size);
	return room[h->count / 2];
}

/* Lines through two readings each. Of many readings every k-th is tried, so that the work stays bounded. */
static bool find_line(hunt *h, double *room) {
	double best = INFINITY;
	size_t stride = 1 + h->count / 60;
	for (size_t i = 0; i < h->count; i += stride)
		for (size_t j = i + 1; j < h->count; j += stride) {
			double dx = h->items[j].x - h->items[i].x;
			if (fabs(dx) < 0.05)
				continue;
			double gain = (h->items[j].e - h->items[i].e) / dx, zero = h->items[i].e - gain * h->items[i].x;
			if (fabs(gain) > largest_gain || fabs(zero) > 0.1)
				continue;
			double median = median_residual(h, zero, gain, best, room);
			if (median >= best)
				continue;
			best = median;
			h->line = (line_of_most){zero, gain, 1.4826 * median};
		}
	h->far = fmax(far_off_span, 6.0 * h->line.s);
	h->near = fmax(back_span, 3.0 * h->line.s);
	return isfinite(best);
}

static double off_line(const hunt *h, double x, double e) {
	return e - h->line.zero - h->line.gain * x;
}

static bool is_far(const hunt *h, const taken *t) {
	return fabs(off_line(h, t->x, t->e)) > h->far;
}

/* ---- mistakes of one reading ---- */

/* Would this output, oil and temperature lie on the line? */
static bool fits(const hunt *h, const fl_oil *oil, double temp_c, double output_x, double *left) {
	double x, healthy;
	if (!oil || !ideal_at(h->s, oil, temp_c, &x, &healthy))
		return false;
	*left = off_line(h, x, output_x - x - healthy);
	return fabs(*left) <= h->near;
}

typedef enum mistake { OTHER_OIL, OTHER_UNIT, FAHRENHEIT, DECIMAL_OF_OUTPUT, DECIMAL_OF_TEMPERATURE, MISTAKES } mistake;

/* One explanation that holds for a set of readings. */
typedef struct proposal {
	mistake what;
	int point;
	const fl_oil *oil;  /* OTHER_OIL */
	const char *detail; /* OTHER_UNIT: the unit; decimals: the factor in words */
	size_t readings;
	double before, after; /* largest residuals of these readings */
	const fl_reading_result *first;
} proposal;

typedef struct proposals {
	proposal items[OTHERS];
	size_t count;
} proposals;

static void propose(proposals *all, mistake what, const taken *t, const fl_oil *oil, const char *detail, double before,
                    double after) {
	proposal *p = NULL;
	for (size_t i = 0; i < all->count && !p; i++) {
		proposal *old = &all->items[i];
		bool same = old->what == what && old->point == t->r->reading->point && old->oil == oil;
		if (same && (!detail || strcmp(detail, old->detail) == 0))
			p = old;
	}
	if (!p && all->count == OTHERS)
		return;
	if (!p) {
		p = &all->items[all->count++];
		*p = (proposal){.what = what, .point = t->r->reading->point, .oil = oil, .detail = detail, .first = t->r};
	}
	p->readings++;
	p->before = fmax(p->before, fabs(before));
	p->after = fmax(p->after, fabs(after));
}

static void try_oils(const hunt *h, const taken *t, double before, proposals *all) {
	const fl_search *s = h->s;
	double left;
	bool found = false;
	for (size_t i = 0; i < s->session->point_count; i++) {
		const fl_oil *oil = fl_stock_oil(s->stock, s->session->points[i].lot);
		if (oil == t->oil || !fits(h, oil, t->r->oil.temp_c, t->r->output_x, &left))
			continue;
		propose(all, OTHER_OIL, t, oil, NULL, before, left);
		found = true;
	}
	for (size_t i = 0; !found && s->shelf && i < s->shelf->oil_count; i++) {
		const fl_oil *oil = &s->shelf->oils[i];
		if (strcmp(oil->lot, t->oil->lot) != 0 && fits(h, oil, t->r->oil.temp_c, t->r->output_x, &left)) {
			propose(all, OTHER_OIL, t, oil, NULL, before, left);
			found = true;
		}
	}
}

/* Output fraction if the number typed were in another unit: the signals', % of the scale, the dial's. */
static const struct {
	const char *unit;
	double low, high;
} unit_slips[] = {{"mA", 4.0, 20.0},  {"bar", 0.2, 1.0},         {"kPa", 20.0, 100.0},
                  {"psi", 3.0, 15.0}, {"% of span", 0.0, 100.0}, {NULL, 0, 0}};
enum { UNIT_SLIPS = sizeof unit_slips / sizeof unit_slips[0] };

static const char *slip_unit(const fl_search *s, size_t slip) {
	return unit_slips[slip].unit ? unit_slips[slip].unit
	                             : fl_unit_text(fl_physics_dial_unit(s->instrument->scale.dial_unit));
}

static double output_in(const fl_search *s, size_t slip, double typed) {
	const fl_scale *scale = &s->instrument->scale;
	double low = unit_slips[slip].unit ? unit_slips[slip].low : scale->low;
	double high = unit_slips[slip].unit ? unit_slips[slip].high : scale->high;
	return (typed - low) / (high - low);
}

static void try_units(const hunt *h, const taken *t, double before, proposals *all) {
	double left;
	for (size_t slip = 0; slip < UNIT_SLIPS; slip++) {
		const char *unit = slip_unit(h->s, slip);
		if (strcmp(unit, fl_unit_text(t->r->reading->unit)) == 0)
			continue;
		if (fits(h, t->oil, t->r->oil.temp_c, output_in(h->s, slip, t->r->reading->output), &left))
			propose(all, OTHER_UNIT, t, NULL, unit, before, left);
	}
}

static void try_temperatures(const hunt *h, const taken *t, double before, proposals *all) {
	static const struct {
		double factor;
		const char *words;
	} slips[] = {{10.0, "ten times higher"}, {0.1, "ten times lower"}};
	double left, read_c = t->r->oil.temp_c;
	if (fits(h, t->oil, fl_to_inside(read_c, FL_U_FAHRENHEIT), t->r->output_x, &left))
		propose(all, FAHRENHEIT, t, NULL, NULL, before, left);
	for (size_t i = 0; i < 2; i++)
		if (fits(h, t->oil, read_c * slips[i].factor, t->r->output_x, &left))
			propose(all, DECIMAL_OF_TEMPERATURE, t, NULL, slips[i].words, before, left);
}

static void try_decimals(const hunt *h, const taken *t, double before, proposals *all) {
	static const struct {
		double factor;
		const char *words;
	} slips[] = {{10.0, "ten times higher"},
	             {0.1, "ten times lower"},
	             {100.0, "a hundred times higher"},
	             {0.01, "a hundred times lower"}};
	const fl_signal_range *range = h->s->range;
	double left;
	for (size_t i = 0; i < sizeof slips / sizeof slips[0]; i++) {
		double x = (t->r->output * slips[i].factor - range->low) / (range->high - range->low);
		if (fits(h, t->oil, t->r->oil.temp_c, x, &left))
			propose(all, DECIMAL_OF_OUTPUT, t, NULL, slips[i].words, before, left);
	}
}

static void try_reading(const hunt *h, const taken *t, proposals *all) {
	double before = off_line(h, t->x, t->e);
	if (!t->oil)
		return;
	try_oils(h, t, before, all);
	try_units(h, t, before, all);
	try_temperatures(h, t, before, all);
	try_decimals(h, t, before, all);
}

/* ---- saying it ---- */

static const char *point_name(const hunt *h, int point) {
	return h->s->session->points[point].oil;
}

static void say_mix_up(hunt *h, const char *id, double before, double after, const char *sentence) {
	fl_search *s = h->s;
	fl_finding *f = fl_cause_say(s, FL_FINDING_MIX_UP, id, "%s", sentence);
	fl_cause_advise(
	    s, f,
	    "Look at bottle, meter and notes. The data stay as entered: say whether it is so, with a reason. If it is, "
	    "nothing is adjusted, and the readings are taken again in a new session.",
	    "As entered these readings lie up to %s of span off the line of the others; so they would lie within "
	    "%s.",
	    fl_cause_amount(s, before, FL_U_PERCENT, 2), fl_cause_amount(s, after, FL_U_PERCENT, 2));
	fl_cause_number_of(s, f, "off the line as entered", before, NAN, FL_U_PERCENT_SPAN);
	fl_cause_number_of(s, f, "off the line as proposed", after, NAN, FL_U_PERCENT_SPAN);
	if (f)
		f->strength = FL_STRENGTH_LIKELY;
	s->out->withheld = s->out->stop = true;
}

/* Two bottles that each fit the other's place. */
static proposal *counterpart(proposals *all, const hunt *h, const proposal *p) {
	for (size_t i = 0; i < all->count; i++) {
		proposal *q = &all->items[i];
		if (q == p || q->what != OTHER_OIL || p->what != OTHER_OIL || q->readings == 0)
			continue;
		if (strcmp(q->oil->lot, h->s->session->points[p->point].lot) == 0 &&
		    strcmp(p->oil->lot, h->s->session->points[q->point].lot) == 0)
			return q;
	}
	return NULL;
}

static const char *words_of(hunt *h, const proposal *p) {
	fl_search *s = h->s;
	switch (p->what) {
	case OTHER_OIL:
		return fl_cause_text(s, "were taken with %s, lot %s", p->oil->name, p->oil->lot);
	case OTHER_UNIT:
		return fl_cause_text(s, "were typed in %s", p->detail);
	case FAHRENHEIT:
		return "have their temperature in °F";
	case DECIMAL_OF_OUTPUT:
		return fl_cause_text(s, "have a slipped decimal mark: the output %s", p->detail);
	case DECIMAL_OF_TEMPERATURE:
		return fl_cause_text(s, "have a slipped decimal mark: the temperature %s", p->detail);
	case MISTAKES:
		break;
	}
	return "";
}

static const char *const mistake_words[MISTAKES] = {"bottle", "unit", "fahrenheit", "decimal", "decimal-temperature"};

static void say_exchange(hunt *h, proposal *p, proposal *q) {
	fl_search *s = h->s;
	say_mix_up(h, fl_cause_text(s, "mix-up:bottles:%d+%d", p->point + 1, q->point + 1), fmax(p->before, q->before),
	           fmax(p->after, q->after),
	           fl_cause_text(s,
	                         "The bottles of %s and %s seem to be exchanged: %zu and %zu readings fit the other oil's "
	                         "viscosity.",
	                         point_name(h, p->point), point_name(h, q->point), p->readings, q->readings));
	p->readings = q->readings = 0;
}

/* All explanations of one point together: where several fit, none is singled out. */
static void say_point(hunt *h, proposals *all, int point) {
	fl_search *s = h->s;
	const char *words = "", *id = fl_cause_text(s, "mix-up:%d", point + 1);
	size_t count = 0, readings = 0;
	double before = 0.0, after = 0.0;
	for (size_t i = 0; i < all->count; i++) {
		proposal *p = &all->items[i];
		if (p->point != point || p->readings == 0)
			continue;
		words = fl_cause_text(s, "%s%s%s", words, count ? ", or " : "", words_of(h, p));
		id = fl_cause_text(s, "%s:%s", id, mistake_words[p->what]);
		readings = p->readings > readings ? p->readings : readings;
		before = fmax(before, p->before);
		after = fmax(after, p->after);
		p->readings = 0;
		count++;
	}
	if (count)
		say_mix_up(h, id, before, after,
		           fl_cause_text(s, "%zu reading%s at %s would fit if %s %s.", readings, readings == 1 ? "" : "s",
		                         point_name(h, point), readings == 1 ? "it" : "they", words));
}

static void say_proposals(hunt *h, proposals *all) {
	for (size_t i = 0; i < all->count; i++) {
		proposal *q = all->items[i].readings ? counterpart(all, h, &all->items[i]) : NULL;
		if (q)
			say_exchange(h, &all->items[i], q);
	}
	for (size_t point = 0; point < h->s->session->point_count; point++)
		say_point(h, all, (int)point);
}

/* ---- the whole run in another unit ---- */

static bool run_fits_unit(const hunt *h, size_t slip, double *largest) {
	*largest = 0.0;
	for (size_t i = 0; i < h->count; i++) {
		const taken *t = &h->items[i];
		double healthy_e = t->e - t->r->output_x; /* what has to be added to an output for its error */
		double e = output_in(h->s, slip, t->r->reading->output) + healthy_e;
		*largest = fmax(*largest, fabs(e));
	}
	return *largest < 0.05;
}

static bool run_in_another_unit(hunt *h) {
	double before = 0.0, after;
	for (size_t i = 0; i < h->count; i++)
		before = fmax(before, fabs(h->items[i].e));
	for (size_t slip = 0; slip < UNIT_SLIPS && before > 0.10; slip++) {
		const char *unit = slip_unit(h->s, slip);
		if (strcmp(unit, fl_unit_text(h->items[0].r->reading->unit)) == 0 || !run_fits_unit(h, slip, &after))
			continue;
		say_mix_up(h, fl_cause_text(h->s, "mix-up:unit:%s", unit), before, after,
		           fl_cause_text(h->s, "All outputs of this run would fit if they had been typed in %s.", unit));
		return true;
	}
	return false;
}

/* ---- few points: two bottles exchanged among three, where no majority is left ---- */

/* Largest residual of all readings about their own least-squares line, two points' oils exchanged (a == b: as it is).
 */
static double misfit_exchanged(const hunt *h, int a, int b, double *gain) {
	double x[MOST_PLACES], e[MOST_PLACES];
	size_t n = 0;
	fl_line line;
	for (size_t i = 0; i < h->count && n < MOST_PLACES; i++) {
		const taken *t = &h->items[i];
		int point = t->r->reading->point, as = point == a ? b : point == b ? a : point;
		double healthy = 0.0;
		x[n] = t->x;
		e[n] = t->e;
		if (as != point) {
			const fl_oil *oil = fl_stock_oil(h->s->stock, h->s->session->points[as].lot);
			if (!oil || !ideal_at(h->s, oil, t->r->oil.temp_c, &x[n], &healthy))
				return INFINITY;
			e[n] = t->r->output_x - x[n] - healthy;
		}
		n++;
	}
	if (n < 3 || fl_numeric_line(x, e, n, &line, NULL) < 0)
		return INFINITY;
	*gain = line.slope;
	return line.max_abs_residual;
}

static bool exchanged_among_few(hunt *h) {
	double gain = 0.0, best = INFINITY, best_gain = 0.0, as_is = misfit_exchanged(h, 0, 0, &gain);
	int points = (int)h->s->session->point_count, best_a = 0, best_b = 0;
	if (as_is < 2.0 * far_off_span)
		return false;
	for (int a = 0; a < points; a++)
		for (int b = a + 1; b < points; b++) {
			double misfit = misfit_exchanged(h, a, b, &gain);
			if (misfit >= best)
				continue;
			best = misfit;
			best_gain = gain;
			best_a = a;
			best_b = b;
		}
	if (best > h->near || fabs(best_gain) > 0.10)
		return false;
	say_mix_up(h, fl_cause_text(h->s, "mix-up:bottles:%d+%d", best_a + 1, best_b + 1), as_is, best,
	           fl_cause_text(h->s, "The bottles of %s and %s seem to be exchanged: so all readings fit one line.",
	                         point_name(h, best_a), point_name(h, best_b)));
	return true;
}

/* ---- rising and falling ---- */

/* Mean of falling minus rising over the running points of one cycle, and its standard uncertainty by the scatter. */
static bool cycle_gap(const fl_search *s, int cycle, double *gap, double *u) {
	size_t n = 0;
	*gap = 0.0;
	for (size_t i = 0; i + 1 < s->reading_rows; i++) {
		const fl_row_data *up = &s->rows[i], *down = up + 1;
		if (up->at.kind != FL_ROW_OIL || up->point != down->point || !up->cycle_n[cycle] || !down->cycle_n[cycle])
			continue;
		*gap += down->cycle_mean[cycle] - up->cycle_mean[cycle];
		n++;
	}
	if (n < 2)
		return false;
	*gap /= (double)n;
	*u = s->scatter_u * sqrt(2.0 / (double)n);
	return true;
}

/* A common scatter would hide one cycle that runs the other way: it is judged by the scatter of single readings. */
static double reading_scatter(const fl_search *s) {
	double sum_sq = 0.0, dof = 0.0;
	for (size_t i = 0; i < s->run->reading_count; i++) {
		const fl_reading_result *r = &s->run->readings[i];
		int cycle = r->reading->cycle - 1;
		for (size_t k = 0; k < s->reading_rows && r->used && cycle >= 0 && cycle < FL_CAUSE_CYCLES; k++) {
			const fl_row_data *row = &s->rows[k];
			if (row->point != r->reading->point || row->pass != r->reading->pass || row->cycle_n[cycle] < 2)
				continue;
			double d = r->error_span - row->cycle_mean[cycle];
			sum_sq += d * d;
			dof += 1.0 - 1.0 / (double)row->cycle_n[cycle];
		}
	}
	return dof > 3.0 ? sqrt(sum_sq / dof) : 4e-4;
}

static void say_passes(hunt *h, const char *id, const char *which, double found, double others) {
	fl_search *s = h->s;
	fl_finding *f = fl_cause_say(
	    s, FL_FINDING_MIX_UP, id,
	    "Rising and falling seem to be exchanged %s: falling readings lie %s of span below the rising ones.", which,
	    fl_cause_amount(s, -found, FL_U_PERCENT, 2));
	fl_cause_advise(s, f, "Compare the order in which the oils were poured in. The data stay as entered.",
	                isnan(others)
	                    ? "Remains of the oil before and unsettled readings both make falling readings higher%s."
	                    : "In the other cycles they lie %s above.",
	                isnan(others) ? "" : fl_cause_amount(s, others, FL_U_PERCENT, 2));
	fl_cause_number_of(s, f, "falling minus rising", found, NAN, FL_U_PERCENT_SPAN);
	if (f)
		f->strength = isnan(others) ? FL_STRENGTH_HINT : FL_STRENGTH_LIKELY;
	s->out->withheld = true;
}

static void passes_exchanged(hunt *h) {
	const fl_search *s = h->s;
	double scatter = reading_scatter(s), least = 5e-4;
	double up_sum = 0.0, down_sum = 0.0, gap, u;
	int up = 0, down = 0, cycle_down = 0;
	for (int cycle = 0; cycle < FL_CAUSE_CYCLES; cycle++) {
		if (!cycle_gap(s, cycle, &gap, &u))
			continue;
		double limit = fmax(least, 4.0 * u * fmin(1.0, scatter / fmax(s->scatter_u, 1e-9)));
		if (gap > limit) {
			up_sum += gap;
			up++;
		} else if (gap < -limit) {
			down_sum += gap;
			down++;
			cycle_down = cycle;
		}
	}
	if (down == 1 && up >= 1)
		say_passes(h, fl_cause_text(h->s, "mix-up:passes:%d", cycle_down + 1),
		           fl_cause_text(h->s, "in cycle %d", cycle_down + 1), down_sum, up_sum / up);
	else if (down >= 1 && up == 0 && down_sum / down < -2.0 * least)
		say_passes(h, "mix-up:passes", "throughout", down_sum / down, NAN);
}

/* ---- all of it ---- */

static void hunt_by_reading(hunt *h) {
	proposals all = {.count = 0};
	size_t far = 0;
	for (size_t i = 0; i < h->count; i++)
		far += is_far(h, &h->items[i]);
	if (far * 2 >= h->count)
		return;
	for (size_t i = 0; i < h->count; i++)
		if (is_far(h, &h->items[i]))
			try_reading(h, &h->items[i], &all);
	say_proposals(h, &all);
}

/* What a person has answered stands. With every one answered by "no" the readings stand as they are. */
static void take_answers(fl_search *s) {
	fl_cause *out = s->out;
	size_t asked = 0, denied = 0;
	for (size_t i = 0; i < out->finding_count; i++) {
		fl_finding *f = &out->findings[i];
		if (f->kind != FL_FINDING_MIX_UP)
			continue;
		const fl_finding_answer *answer = fl_session_finding(s->session, f->id);
		f->asks = true;
		f->answered = !answer ? "" : answer->yes ? "yes" : "no";
		asked++;
		denied += answer && !answer->yes;
		if (answer)
			f->advice = fl_cause_text(s, "Answered by %s: %s, %s.", answer->by,
			                          answer->yes ? "it is so" : "the readings stand as entered", answer->reason);
	}
	if (asked && denied == asked)
		out->withheld = out->stop = false;
}

static void hunt_mix_ups(fl_search *s) {
	hunt h = {.s = s};
	if (s->procedure->medium == FL_MEDIUM_PRESSURE)
		return;
	h.items = fl_arena_alloc(s->arena, s->run->reading_count + 1, sizeof *h.items);
	double *room = fl_arena_alloc(s->arena, s->run->reading_count + 1, sizeof *room);
	if (!h.items || !room) {
		s->memory_failed = true;
		return;
	}
	for (size_t i = 0; i < s->run->reading_count; i++)
		h.count += take(s, &s->run->readings[i], &h.items[h.count]);
	if (h.count < 4)
		return;
	if (run_in_another_unit(&h))
		return;
	if (find_line(&h, room))
		hunt_by_reading(&h);
	if (!s->out->withheld)
		exchanged_among_few(&h);
	passes_exchanged(&h);
}

void fl_cause_mix_ups(fl_search *s) {
	hunt_mix_ups(s);
	take_answers(s);
}
