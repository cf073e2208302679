/* lots.c - the health of an oil lot across sessions and sister instruments: oil error or drift?
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * In each run the error of the lot's point is compared with the line through the other oils of the run, weighted by
 * 1/u². A drift of zero or span moves the line with it and leaves no residual; an oil that is off leaves the same
 * residual on every instrument. Over units j with mean residuals m_j of weight w_j: m = sum w_j m_j / sum w_j, u² = 1 /
 * sum w_j, chi² = sum w_j (m_j - m)², n - 1 degrees of freedom; u is widened by the Birge ratio sqrt(chi² / (n - 1))
 * where that is above 1 (Birge, Phys. Rev. 40 (1932) 207). Sister instruments may share the shape of their scale: so
 * other lots of the same oil are looked at too. And a line through other oils is bent by any of them that is off: so a
 * lot is accused only where it explains the readings clearly better than another of the same runs. All decisions at 99
 * %: a lot is not thrown away lightly. Stated uncertainties hold common parts as well, which makes the test slower to
 * accuse, not quicker.
 */
#include "foundleft/trend.h"
#include "words.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define NORMAL_99 2.5758293035489004     /* two-sided */
#define CHI_SQUARED_99 6.634896601021213 /* one degree of freedom */
#define U_CERTIFICATE 0.0025 /* where the lot is not in stock: U = 0.5 %, k = 2; common practice, no source */
#define LEAST_LOOKS 3

/* ---- looks ------------------------------------------------------------------------------------------------------- */

static bool is_oil_point(const fl_kept_point *p) {
	return p->point >= 0 && *p->lot && isfinite(p->error_span) && isfinite(p->x) && p->U_span > 0 && p->k > 0;
}

/* How much of span a relative error of the viscosity is at this place. */
static double span_per_rel(const fl_record *record, double x) {
	return x + record->scale_low / (record->scale_high - record->scale_low);
}

/* The line through all oil points but `out`, at its place: value, variance, and how much of span a standard uncertainty
 * of 1 in every other oil's certificate makes there. False with fewer than two others. */
static bool line_of_others(const fl_record *record, const fl_kept_run *run, const fl_kept_point *out, double *value,
                           double *variance, double *per_rel) {
	double sum = 0, sx = 0, sy = 0, sxx = 0, sxy = 0;
	int n = 0;
	for (int pass = 0; pass < 2; pass++)
		for (size_t i = 0; i < run->point_count; i++) {
			const fl_kept_point *p = &run->points[i];
			if (p == out || !is_oil_point(p))
				continue;
			double w = (p->k / p->U_span) * (p->k / p->U_span);
			if (pass == 0) {
				sum += w;
				sx += w * p->x;
				sy += w * p->error_span;
				n++;
			} else {
				sxx += w * (p->x - sx / sum) * (p->x - sx / sum);
				sxy += w * (p->x - sx / sum) * (p->error_span - sy / sum);
			}
		}
	if (n < 2 || !(sxx > 0))
		return false;
	double d = out->x - sx / sum;
	*value = sy / sum + sxy / sxx * d;
	*variance = 1 / sum + d * d / sxx;
	double squares = 0;
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_kept_point *p = &run->points[i];
		if (p == out || !is_oil_point(p))
			continue;
		double w = (p->k / p->U_span) * (p->k / p->U_span);
		double part = w * (1 / sum + d * (p->x - sx / sum) / sxx) * span_per_rel(record, p->x);
		squares += part * part;
	}
	*per_rel = sqrt(squares);
	return true;
}

static fl_status look_at_run(fl_lot_looks *looks, const fl_record *record, const fl_kept_run *run, fl_error *err) {
	const char *unit = fl_arena_printf(&looks->arena, "%s %s", record->tag, record->serial);
	const char *number = fl_arena_strdup(&looks->arena, record->number);
	for (size_t i = 0; i < run->point_count; i++) {
		const fl_kept_point *p = &run->points[i];
		double value, variance, others;
		if (!is_oil_point(p) || !line_of_others(record, run, p, &value, &variance, &others))
			continue;
		fl_lot_look *grown = fl_arena_grow(&looks->arena, looks->looks, looks->count, &looks->capacity, sizeof *grown);
		const char *lot = fl_arena_strdup(&looks->arena, p->lot), *oil = fl_arena_strdup(&looks->arena, p->oil);
		if (!grown || !lot || !oil || !unit || !number)
			return fl_fail(err, FL_E_MEMORY, "out of memory for the looks at an oil");
		looks->looks = grown;
		double u = p->U_span / p->k;
		looks->looks[looks->count++] = (fl_lot_look){.lot = lot,
		                                             .oil = oil,
		                                             .unit = unit,
		                                             .number = number,
		                                             .run = looks->runs,
		                                             .day = record->day,
		                                             .residual = p->error_span - value,
		                                             .u = sqrt(u * u + variance),
		                                             .span_per_rel = span_per_rel(record, p->x),
		                                             .others_per_rel = others};
	}
	looks->runs++;
	return FL_OK;
}

fl_status fl_trend_look(fl_lot_looks *looks, const fl_record *record, fl_error *err) {
	fl_status status = FL_OK;
	if (!(record->scale_high > record->scale_low))
		return FL_OK;
	if (record->as_found.state == FL_KEPT_TAKEN)
		status = look_at_run(looks, record, &record->as_found, err);
	if (status >= 0 && record->as_left.state == FL_KEPT_TAKEN)
		status = look_at_run(looks, record, &record->as_left, err);
	return status;
}

void fl_lot_looks_free(fl_lot_looks *looks) {
	fl_arena_free(&looks->arena);
	*looks = (fl_lot_looks){0};
}

/* ---- mean over units --------------------------------------------------------------------------------------------- */

typedef struct fl_lot_mean {
	size_t looks, units;
	double mean, u;
	double place, others; /* means of span_per_rel and others_per_rel */
	double chi_squared;
	const char *worst; /* unit that is farthest from the mean */
} fl_lot_mean;

/* A lot, or (`others`) all other lots of the same oil. */
static bool is_of(const fl_lot_look *look, const char *lot, const char *oil, bool others) {
	bool same = strcmp(look->lot, lot) == 0;
	return others ? !same && strcmp(look->oil, oil) == 0 : same;
}

static void mean_of_unit(const fl_lot_looks *looks, size_t first, const char *lot, const char *oil, bool others,
                         double *mean, double *weight) {
	double sum = 0;
	*weight = 0;
	for (size_t i = first; i < looks->count; i++) {
		const fl_lot_look *look = &looks->looks[i];
		if (!is_of(look, lot, oil, others) || strcmp(look->unit, looks->looks[first].unit) != 0)
			continue;
		*weight += 1 / (look->u * look->u);
		sum += look->residual / (look->u * look->u);
	}
	*mean = sum / *weight;
}

/* Is this the first look of its unit at the lot? */
static bool is_first(const fl_lot_looks *looks, size_t at, const char *lot, const char *oil, bool others) {
	for (size_t i = 0; i < at; i++)
		if (is_of(&looks->looks[i], lot, oil, others) && strcmp(looks->looks[i].unit, looks->looks[at].unit) == 0)
			return false;
	return is_of(&looks->looks[at], lot, oil, others);
}

static fl_lot_mean mean_of(const fl_lot_looks *looks, const char *lot, const char *oil, bool others) {
	fl_lot_mean m = {.worst = ""};
	double weights = 0, sum = 0, farthest = 0, mean, weight;
	for (size_t i = 0; i < looks->count; i++) {
		const fl_lot_look *look = &looks->looks[i];
		if (!is_of(look, lot, oil, others))
			continue;
		double w = 1 / (look->u * look->u);
		m.looks++;
		weights += w;
		sum += w * look->residual;
		m.place += look->span_per_rel;
		m.others += look->others_per_rel;
	}
	if (m.looks == 0)
		return m;
	m.mean = sum / weights;
	m.place /= (double)m.looks;
	m.others /= (double)m.looks;
	m.u = 1 / sqrt(weights);
	for (size_t i = 0; i < looks->count; i++) {
		if (!is_first(looks, i, lot, oil, others))
			continue;
		mean_of_unit(looks, i, lot, oil, others, &mean, &weight);
		double part = weight * (mean - m.mean) * (mean - m.mean);
		m.units++;
		m.chi_squared += part;
		if (part > farthest) {
			farthest = part;
			m.worst = looks->looks[i].unit;
		}
	}
	if (m.units > 1)
		m.u *= sqrt(fmax(1.0, m.chi_squared / (double)(m.units - 1)));
	return m;
}

/* ---- other lots of the same runs --------------------------------------------------------------------------------- */

static bool share_a_run(const fl_lot_looks *looks, const char *a, const char *b) {
	for (size_t i = 0; i < looks->count; i++)
		for (size_t j = i; j-- > 0 && looks->looks[j].run == looks->looks[i].run;)
			if ((strcmp(looks->looks[i].lot, a) == 0 && strcmp(looks->looks[j].lot, b) == 0) ||
			    (strcmp(looks->looks[i].lot, b) == 0 && strcmp(looks->looks[j].lot, a) == 0))
				return true;
	return false;
}

/* Standard uncertainty that the certificates leave: its own and those of the oils beside it. */
static double certificates_u(const fl_lot_mean *m, double u_rel) {
	return u_rel * hypot(m->place, m->others);
}

/* How much better the readings fit when this lot is taken to be off. */
static double explains(const fl_lot_mean *m, double u_rel) {
	double u_lots = certificates_u(m, u_rel);
	return m->looks ? m->mean * m->mean / (m->u * m->u + u_lots * u_lots) : 0;
}

/* The lot of the same runs that explains the readings best besides this one. */
static const char *best_other(const fl_lot_looks *looks, const char *lot, double u_rel, double *how_well) {
	const char *best = "";
	*how_well = 0;
	for (size_t i = 0; i < looks->count; i++) {
		const fl_lot_look *look = &looks->looks[i];
		if (strcmp(look->lot, lot) == 0 || !is_first(looks, i, look->lot, look->oil, false) ||
		    !share_a_run(looks, lot, look->lot))
			continue;
		fl_lot_mean other = mean_of(looks, look->lot, look->oil, false);
		if (explains(&other, u_rel) > *how_well) {
			*how_well = explains(&other, u_rel);
			best = look->lot;
		}
	}
	return best;
}

/* ---- the finding ------------------------------------------------------------------------------------------------- */

static fl_lot_state judge(const fl_lot_looks *looks, const char *lot, const char *oil, const fl_lot_mean *m,
                          double u_rel, const char **other) {
	double rival_explains, u_lots = certificates_u(m, u_rel);
	if (m->looks < LEAST_LOOKS || m->units < 2)
		return FL_LOT_TOO_FEW;
	if (fl_numeric_chi_squared_tail(m->chi_squared, (double)m->units - 1) < 0.01) {
		*other = m->worst;
		return FL_LOT_UNIT;
	}
	if (fabs(m->mean) <= NORMAL_99 * sqrt(m->u * m->u + u_lots * u_lots))
		return FL_LOT_SOUND;
	fl_lot_mean before = mean_of(looks, lot, oil, true);
	double u_both = sqrt(m->u * m->u + before.u * before.u + 2 * u_lots * u_lots);
	if (before.looks >= LEAST_LOOKS && fabs(m->mean - before.mean) <= NORMAL_99 * u_both)
		return FL_LOT_SHAPE;
	const char *rival = best_other(looks, lot, u_rel, &rival_explains);
	double own = explains(m, u_rel);
	if (rival_explains <= own - CHI_SQUARED_99)
		return FL_LOT_SUSPECT;
	*other = rival;
	return rival_explains > own + CHI_SQUARED_99 ? FL_LOT_OTHER : FL_LOT_UNDECIDED;
}

static fl_status say(const char *lot, fl_lot_health *h, fl_arena *arena, fl_error *err) {
	char seen[256];
	snprintf(seen, sizeof seen,
	         "%zu readings on %zu instrument%s: its viscosity appears %s off the certificate's, standard "
	         "uncertainty %s %%",
	         h->looks, h->units, h->units == 1 ? "" : "s", fl_trend_word_percent(h->rel, 2).text,
	         fl_trend_word_number(100 * h->u_rel, 2).text);
	switch (h->state) {
	case FL_LOT_TOO_FEW:
		return fl_trend_say(arena, &h->sentence, err,
		                    "lot %s, %zu readings on %zu instrument%s: an error of the oil can't be told from the "
		                    "instrument's own; it takes three readings on two instruments",
		                    lot, h->looks, h->units, h->units == 1 ? "" : "s");
	case FL_LOT_SOUND:
		return fl_trend_say(arena, &h->sentence, err, "lot %s agrees with its certificate; %s", lot, seen);
	case FL_LOT_UNIT:
		return fl_trend_say(arena, &h->sentence, err,
		                    "the instruments disagree about lot %s (chi-squared %s, %d degrees of freedom), %s most of "
		                    "all: look at that instrument, not at the oil",
		                    lot, fl_trend_word_number(h->chi_squared, 1).text, h->dof, h->other);
	case FL_LOT_SHAPE:
		return fl_trend_say(
		    arena, &h->sentence, err,
		    "other lots of this oil show the same at this place of the scale: its shape, not lot %s; %s", lot, seen);
	case FL_LOT_UNDECIDED:
		return fl_trend_say(arena, &h->sentence, err,
		                    "lot %s or lot %s is off, the readings do not say which; %s; read one of them beside a lot "
		                    "that was bought anew",
		                    lot, h->other, seen);
	case FL_LOT_OTHER:
		return fl_trend_say(
		    arena, &h->sentence, err,
		    "lot %s appears off only beside lot %s, which explains the readings better: look at that one", lot,
		    h->other);
	case FL_LOT_SUSPECT:
		break;
	}
	return fl_trend_say(
	    arena, &h->sentence, err,
	    "lot %s is not what its certificate says, on all instruments alike; %s: set the bottle aside, use "
	    "another lot, and look at the certificates that it fed",
	    lot, seen);
}

fl_status fl_trend_lot_health(const fl_lot_looks *looks, const char *lot, double u_certificate, fl_arena *arena,
                              fl_lot_health *out, fl_error *err) {
	const char *oil = NULL;
	for (size_t i = 0; i < looks->count && !oil; i++)
		if (strcmp(looks->looks[i].lot, lot) == 0)
			oil = looks->looks[i].oil;
	if (!oil)
		return fl_fail(err, FL_E_NOT_FOUND,
		               "no run in the book has lot %.60s beside two other oils: there is nothing to judge it by", lot);
	fl_lot_mean m = mean_of(looks, lot, oil, false);
	double u_rel = isnan(u_certificate) ? U_CERTIFICATE : u_certificate;
	*out = (fl_lot_health){.looks = m.looks,
	                       .units = m.units,
	                       .mean = m.mean,
	                       .u_mean = m.u,
	                       .rel = m.mean / m.place,
	                       .u_rel = hypot(m.u, certificates_u(&m, u_rel)) / m.place,
	                       .chi_squared = m.chi_squared,
	                       .dof = (int)m.units - 1,
	                       .other = ""};
	out->state = judge(looks, lot, oil, &m, u_rel, &out->other);
	return say(lot, out, arena, err);
}
