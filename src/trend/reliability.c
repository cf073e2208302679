/* reliability.c - intervals from how many instruments of a fleet were found in tolerance.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Model: R(t) = exp(-rate t), the simplest of those in use; a trial that was in tolerance after t years adds -rate t to
 * the logarithm of the likelihood, one that was not adds ln(1 - exp(-rate t)).
 */
#include "foundleft/trend.h"
#include "words.h"

#include <math.h>
#include <string.h>

void fl_trend_wilson(size_t in, size_t n, double confidence, double *low, double *high) {
	double z = fl_numeric_normal_quantile(0.5 + confidence / 2.0), count = (double)n, p = (double)in / count;
	double centre = p + z * z / (2.0 * count), scale = 1.0 + z * z / count;
	double half = z * sqrt(p * (1.0 - p) / count + z * z / (4.0 * count * count));
	*low = in == 0 ? 0.0 : (centre - half) / scale;
	*high = in == n ? 1.0 : (centre + half) / scale;
}

/* d ln L / d rate: sum over failures of t / (exp(rate t) - 1) minus the time of those in tolerance. Falls with rate. */
static double score(const fl_trial *trials, size_t n, double rate) {
	double sum = 0.0;
	for (size_t i = 0; i < n; i++)
		sum += trials[i].in_tolerance ? -trials[i].years : trials[i].years / expm1(rate * trials[i].years);
	return sum;
}

fl_status fl_trend_failure_rate(const fl_trial *trials, size_t n, double *per_year, fl_error *err) {
	size_t in = 0;
	for (size_t i = 0; i < n; i++) {
		if (!(trials[i].years > 0.0))
			return fl_fail(err, FL_E_NUMERIC, "an interval of the fleet has no length");
		in += trials[i].in_tolerance;
	}
	if (in == 0)
		return fl_fail(err, FL_E_NUMERIC,
		               n ? "all were out of tolerance: no rate can be stated" : "there are no intervals");
	*per_year = 0.0;
	if (in == n)
		return FL_OK;
	double low = 0.0, high = 1.0;
	while (score(trials, n, high) > 0.0)
		high *= 2.0;
	for (int i = 0; i < 200; i++) {
		double middle = 0.5 * (low + high);
		*(score(trials, n, middle) > 0.0 ? &low : &high) = middle;
	}
	*per_year = 0.5 * (low + high);
	return FL_OK;
}

static size_t count_in(const fl_trial *trials, size_t n, double *mean_years) {
	size_t in = 0;
	*mean_years = 0.0;
	for (size_t i = 0; i < n; i++) {
		in += trials[i].in_tolerance;
		*mean_years += trials[i].years / (double)n;
	}
	return in;
}

static int clamp_months(double months, const fl_interval_policy *policy) {
	double held = fmin(fmax(months, policy->shortest_months), policy->longest_months);
	return (int)floor(held + 1e-9);
}

fl_status fl_trend_reliability(const fl_trial *trials, size_t n, const fl_interval_policy *policy, fl_arena *arena,
                               fl_proposal *out, fl_error *err) {
	double mean_years = 0.0, low = 0.0, high = 0.0, rate = 0.0;
	*out = (fl_proposal){.method = FL_INTERVAL_RELIABILITY, .hours = NAN};
	size_t in = count_in(trials, n, &mean_years);
	if (in == 0)
		return fl_trend_say(arena, &out->reason, err,
		                    n ? "all %zu intervals ended out of tolerance: look at the instruments first"
		                      : "%zu intervals of the fleet are known",
		                    n);
	fl_status status = fl_trend_failure_rate(trials, n, &rate, err);
	if (status < 0)
		return status;
	fl_trend_wilson(in, n, policy->confidence, &low, &high);
	/* Where none failed the rate is that of the lower confidence limit: the data can't say that it is nought. */
	double used = rate > 0.0 ? rate : -log(low) / mean_years;
	double months = -log(policy->target_reliability) / used * 12.0;
	bool held_back = low < policy->target_reliability && months > mean_years * 12.0;
	out->determined = true;
	out->months = clamp_months(held_back ? mean_years * 12.0 : months, policy);
	return fl_trend_say(
	    arena, &out->reason, err,
	    "%zu of %zu in tolerance after %s months on average (%s %% to %s %% at %s %% confidence); %s %% would stay "
	    "in tolerance for %s months%s: %d months",
	    in, n, fl_trend_word_number(mean_years * 12.0, 1).text, fl_trend_word_number(100.0 * low, 0).text,
	    fl_trend_word_number(100.0 * high, 0).text, fl_trend_word_number(100.0 * policy->confidence, 0).text,
	    fl_trend_word_number(100.0 * policy->target_reliability, 0).text, fl_trend_word_number(months, 1).text,
	    held_back ? "; too few to lengthen the interval on" : "", out->months);
}

static bool is_word(const char *verdict, const char *a, const char *b) {
	return strcmp(verdict, a) == 0 || strcmp(verdict, b) == 0;
}

fl_status fl_trend_trials(const fl_record *records, size_t count, fl_arena *arena, fl_trial **trials, size_t *n,
                          size_t *capacity, fl_error *err) {
	for (size_t i = 1; i < count; i++) {
		const char *verdict = records[i].as_found.verdict;
		bool in = is_word(verdict, "pass", "conditional pass"), out = is_word(verdict, "fail", "conditional fail");
		if ((!in && !out) || records[i].day <= records[i - 1].day || (records[i].work & FL_WORK_BEFORE))
			continue;
		fl_trial *grown = fl_arena_grow(arena, *trials, *n, capacity, sizeof **trials);
		if (!grown)
			return fl_fail(err, FL_E_MEMORY, "out of memory for the trend");
		*trials = grown;
		grown[(*n)++] = (fl_trial){(records[i].day - records[i - 1].day) / FL_DAYS_PER_YEAR, in};
	}
	return FL_OK;
}
