/* analysis/function.c - function checks: held against what is expected, and the true viscosity that an indication
 * stands for, by the line of the instrument as it is left.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "work.h"

#include <math.h>

/* An alarm trips by what the instrument shows; the engine gets the true viscosity. */
static void take_true_value(const work *w, fl_function_result *out) {
	const fl_run_result *run = &w->result->runs[w->result->functions_after];
	fl_true_value value = {0};
	if (!out->check->true_viscosity || isnan(out->found_x) || !run->available || !run->has_line)
		return;
	if (!fl_analysis_true_value(w, run, out->found_x, &value) || !value.bounded)
		return;
	out->has_true = true;
	out->true_value = value.value;
	out->true_u = value.u;
	out->true_U = value.U;
	out->true_low = value.low;
	out->true_high = value.high;
}

fl_status fl_analysis_functions(const work *w, fl_error *err) {
	fl_result *result = w->result;
	const fl_procedure *procedure = w->procedure;
	size_t count = (size_t)procedure->check_count;
	bool left = result->runs[FL_RUN_AS_LEFT].available;
	result->functions_after = left ? FL_RUN_AS_LEFT : FL_RUN_AS_FOUND;
	if (count == 0)
		return FL_OK;
	result->functions = fl_arena_alloc(w->arena, count, sizeof *result->functions);
	if (!result->functions)
		return fl_fail(err, FL_E_MEMORY, "out of memory for %zu function checks", count);
	for (size_t i = 0; i < count; i++) {
		const fl_function_check *check = &procedure->checks[i];
		fl_reference_function(w->reference.instrument, check, fl_session_check_answer(w->session, check->id),
		                      &result->functions[i]);
		take_true_value(w, &result->functions[i]);
	}
	result->function_count = count;
	return FL_OK;
}
