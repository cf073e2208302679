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
/* Gates, conditions and restoring steps; ids unique over all three. */
fl_status fl_procedure_read_questions(const fl_node *root, fl_procedure *p, fl_error *err) FL_MUST_USE;

#endif
