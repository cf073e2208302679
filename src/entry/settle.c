/* settle.c - has the output stopped moving?
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The rule. The series at a place (run, cycle, pass, point) is its live watched values and readings, oldest first, the
 * new one last. Judged are its last `readings` values (of the procedure's `settled`), and older ones too as long as
 * they span less than the procedure's window. Where every judged value has its temperature, what is judged is output
 * minus what the oil should give at that temperature; else the output itself.
 *
 *     The output is still moving if and only if the judged values rise throughout or fall throughout, and the
 *     least-squares slope times the time that they span (the window, where they span more) exceeds the drift limit.
 *
 * A span shorter than the window is not scaled up: what moved more than the limit in less time is moving all the more,
 * and scaling would make noise of quickly typed values a trend. Values without a known time, or in the same second, are
 * taken as equally spaced. The temperature is moving if it rises or falls throughout, the values span the window, and
 * its slope exceeds the procedure's limit. Fewer values than `readings` are not judged.
 *
 * The end value of an exponential approach is fitted over the whole series, for information only.
 */
#include "entry_private.h"

#include "foundleft/numeric.h"

#include <math.h>

enum { MOST = 64 }; /* values looked at: the latest */

typedef struct series {
	double t_s[MOST], v[MOST], temp_c[MOST];
	int count;
	bool has_times, has_temps;
	double expected_last; /* to turn an error back into an output */
} series;

static void add_value(const fl_entry *entry, const fl_reading *r, series *out) {
	fl_unit unit = fl_physics_signal_range(entry->setup.instrument->scale.signal)->unit;
	if (out->count == MOST) {
		for (int i = 1; i < MOST; i++) {
			out->t_s[i - 1] = out->t_s[i];
			out->v[i - 1] = out->v[i];
			out->temp_c[i - 1] = out->temp_c[i];
		}
		out->count--;
	}
	int i = out->count++;
	out->v[i] = fl_reference_in_unit(r->output, r->unit, unit);
	out->temp_c[i] = r->has_temp ? r->temp_c : NAN;
	out->t_s[i] = r->taken == INT64_MIN ? NAN : (double)r->taken;
	out->has_times = out->has_times && isfinite(out->t_s[i]) && (i == 0 || out->t_s[i] > out->t_s[i - 1]);
}

static void collect(const fl_entry *entry, const fl_step *step, const fl_reading *candidate, series *out,
                    fl_settling *settling) {
	const fl_session *s = entry->session;
	double first = NAN, last = NAN;
	*out = (series){.has_times = true};
	for (size_t i = 0; i < s->reading_count; i++) {
		const fl_reading *r = &s->readings[i];
		if (!fl_entry_at_place(r, step) || r->struck)
			continue;
		add_value(entry, r, out);
		if (!r->watched)
			continue;
		settling->watched++;
		last = (double)r->taken;
		first = isnan(first) ? last : first;
	}
	settling->watched_span_s = settling->watched > 1 ? last - first : 0.0;
	if (candidate)
		add_value(entry, candidate, out);
	if (!out->has_times)
		for (int i = 0; i < out->count; i++)
			out->t_s[i] = i;
}

/* First index of the values that are judged. */
static int judged_from(const series *all, const fl_settle *rule) {
	int from = all->count - rule->readings;
	while (all->has_times && from > 0 && all->t_s[all->count - 1] - all->t_s[from] < rule->window_s)
		from--;
	return from;
}

/* Replaces outputs by errors where every judged value has its temperature. */
static void remove_temperature(const fl_entry *entry, const fl_step *step, series *all, int from) {
	double expected[MOST];
	for (int i = from; i < all->count; i++) {
		fl_reading r = {.point = step->point, .has_temp = true, .temp_c = all->temp_c[i]};
		fl_reading_result result;
		if (step->point == FL_POINT_ZERO || isnan(all->temp_c[i]))
			return;
		r.unit = fl_physics_signal_range(entry->setup.instrument->scale.signal)->unit;
		r.output = all->v[i];
		if (fl_entry_judge(entry, &r, &result, NULL) < 0)
			return;
		expected[i] = result.ideal.output;
	}
	for (int i = from; i < all->count; i++)
		all->v[i] -= expected[i];
	all->expected_last = expected[all->count - 1];
	all->has_temps = true;
}

/* How long until the change over the window, A (e^(w/tau) - 1) e^(-t/tau), is down to the limit. */
static double wait_time(double remaining, double window_s, double tau_s, double limit) {
	double now = fabs(remaining) * expm1(window_s / tau_s);
	return now > limit ? tau_s * log(now / limit) : 0.0;
}

static void fit_end(const series *all, int from, double window_s, double limit, fl_settling *out) {
	fl_trend whole;
	int start = all->has_temps ? from : 0;
	int count = all->count - start;
	if (!all->has_times || count < 4 ||
	    fl_numeric_trend(all->t_s + start, all->v + start, (size_t)count, &whole, NULL) < 0 || !whole.has_end_value)
		return;
	out->has_end = true;
	out->end = whole.end_value + all->expected_last;
	out->wait_s = wait_time(all->v[all->count - 1] - whole.end_value, window_s, whole.time_constant_s, limit);
}

static void judge_temperature(const series *all, int from, const fl_settle *rule, fl_settling *out) {
	fl_trend trend;
	size_t count = (size_t)(all->count - from);
	if (!all->has_times || out->span_s < rule->window_s || out->span_s <= 0.0)
		return;
	for (int i = from; i < all->count; i++)
		if (isnan(all->temp_c[i]))
			return;
	if (fl_numeric_trend(all->t_s + from, all->temp_c + from, count, &trend, NULL) < 0)
		return;
	out->temp_k_per_min = trend.slope * 60.0;
	out->temp_moving = trend.monotone && fabs(out->temp_k_per_min) > rule->temp_k_per_min;
}

fl_settling fl_entry_settling(const fl_entry *entry, const fl_step *step, const fl_reading *candidate) {
	const fl_settle *rule = &entry->setup.procedure->settle;
	const fl_signal_range *range = fl_physics_signal_range(entry->setup.instrument->scale.signal);
	fl_settling out = {0};
	series all;
	fl_trend trend;
	collect(entry, step, candidate, &all, &out);
	if (rule->readings < 2 || all.count < rule->readings)
		return out;
	int from = judged_from(&all, rule);
	remove_temperature(entry, step, &all, from);
	size_t count = (size_t)(all.count - from);
	if (fl_numeric_trend(all.t_s + from, all.v + from, count, &trend, NULL) < 0)
		return out;
	double span = all.t_s[all.count - 1] - all.t_s[from],
	       limit = rule->drift_pct_span / 100.0 * (range->high - range->low);
	double over = all.has_times && rule->window_s > 0.0 && span > rule->window_s ? rule->window_s : span;
	out.count = (int)count;
	out.span_s = all.has_times ? span : 0.0;
	out.slope_per_s = all.has_times ? trend.slope : 0.0;
	out.change_pct_span = 100.0 * trend.slope * over / (range->high - range->low);
	out.moving = trend.monotone && fabs(trend.slope * over) > limit;
	if (out.moving)
		fit_end(&all, from, rule->window_s > 0.0 ? rule->window_s : span, limit, &out);
	judge_temperature(&all, from, rule, &out);
	return out;
}
