/* read.h - what the two files of this stage share.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_PROCEDURE_READ_H
#define FOUNDLEFT_PROCEDURE_READ_H

#include "foundleft/document.h"
#include "foundleft/procedure.h"

/* Returns from the function with the status of `call` unless it is FL_OK. */
#define TRY(call)                      \
	do {                               \
		fl_status try_status = (call); \
		if (try_status != FL_OK)       \
			return try_status;         \
	} while (0)

/* Letters, digits and hyphens, at most 60 of them. */
bool fl_procedure_is_id(const char *text);
/* map["unit"]. */
fl_status fl_procedure_read_unit(const fl_node *map, fl_unit *unit, fl_error *err) FL_MUST_USE;
/* map[key] as "0 to 60 °C", "at most 60 °C" or "at least 5 °C" in `unit`; infinite where it is open or absent. */
fl_status fl_procedure_read_limits(const fl_node *map, const char *key, fl_unit unit, double *low, double *high,
                                   fl_error *err) FL_MUST_USE;
/* FL_E_VALUE if map[key] is there. */
fl_status fl_procedure_refuse_field(const fl_node *map, const char *key, const char *why, fl_error *err) FL_MUST_USE;
/* Function checks. After the questions, whose ids they may not take. */
fl_status fl_procedure_read_checks(const fl_node *root, fl_procedure *p, fl_error *err) FL_MUST_USE;
/* Gates, conditions and restoring steps; ids unique over all three. */
fl_status fl_procedure_read_questions(const fl_node *root, fl_procedure *p, fl_error *err) FL_MUST_USE;

#endif
