/* analysis/flow.c - the capillary at each point: Reynolds number, entrance length, kinetic term, heating.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "work.h"

#include <math.h>

/* Laminar flow holds below 2000; from 1500 on a pulsating pump may leave it (common practice, no source). */
static const double laminar_reynolds = 2000.0, near_reynolds = 1500.0;
/* The developing flow at the entrance is to stay within a quarter of the length (common practice, no source). */
static const double entrance_share = 0.25;
static const double noticeable_heating_k = 0.1;

static void warn_about_flow(work *w, const fl_point_result *point, const fl_flow *flow) {
	const char *name = fl_analysis_point_name(w, point);
	const char *reynolds = fl_analysis_number(w->arena, round(flow->reynolds / 10.0) * 10.0, 4);
	if (flow->reynolds >= laminar_reynolds)
		fl_analysis_say(w->arena, &w->warnings,
		                "%s: Reynolds number %s, the flow is not laminar (below 2000): the reading does not follow "
		                "the viscosity",
		                name, reynolds);
	else if (flow->reynolds >= near_reynolds)
		fl_analysis_say(w->arena, &w->warnings, "%s: Reynolds number %s, near the end of laminar flow (2000)", name,
		                reynolds);
	if (flow->entrance_m > entrance_share * w->reference.instrument->capillary.length_m)
		fl_analysis_say(w->arena, &w->warnings, "%s: entrance length %s mm, more than a quarter of the capillary", name,
		                fl_analysis_number(w->arena, round(flow->entrance_m * 1e3), 3));
	if (flow->heating_k > noticeable_heating_k)
		fl_analysis_say(w->arena, &w->warnings, "%s: viscous heating %s K in the capillary", name,
		                fl_analysis_number(w->arena, flow->heating_k, 2));
}

static fl_status take_flow(work *w, fl_point_result *point, fl_error *err) {
	if (isnan(point->mu_pa_s))
		return FL_OK;
	fl_status status =
	    fl_physics_capillary(&w->reference.instrument->capillary, point->mu_pa_s, point->rho_kg_m3, &point->flow, err);
	if (status < 0)
		return status;
	point->has_flow = true;
	if (w->reference.dp_full_pa > 0.0)
		point->kinetic_span = point->flow.dp_kinetic_pa / w->reference.dp_full_pa;
	return FL_OK;
}

/* The oils are the same in both directions: only the combined points warn, without naming a direction twice. */
fl_status fl_analysis_flows(work *w, fl_run_result *run, fl_error *err) {
	fl_status status = FL_OK;
	if (!w->reference.instrument->has_geometry || w->procedure->medium == FL_MEDIUM_PRESSURE)
		return FL_OK;
	for (size_t i = 0; i < run->point_count && status >= 0; i++)
		status = take_flow(w, &run->points[i], err);
	for (size_t i = 0; i < run->combined_count && status >= 0; i++) {
		status = take_flow(w, &run->combined[i], err);
		if (status >= 0 && run->combined[i].has_flow)
			warn_about_flow(w, &run->combined[i], &run->combined[i].flow);
	}
	return status < 0 ? status : FL_OK;
}
