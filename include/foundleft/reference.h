/* foundleft/reference.h - one reading brought to its reference: corrected output and temperature, oil at that
 * temperature, ideal output, error.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The conversation shows a committed reading by it and the analysis computes from it, so that both say the same. Pure.
 * Error = output minus ideal output, over the output span; positive when the instrument shows too much. Errors are
 * fractions of the output span ("_span": 0.01 is 1 % of span); x is the ideal position on the scale likewise.
 */
#ifndef FOUNDLEFT_REFERENCE_H
#define FOUNDLEFT_REFERENCE_H

#include "foundleft/base.h"
#include "foundleft/journal.h"
#include "foundleft/physics.h"
#include "foundleft/procedure.h"
#include "foundleft/stock.h"

/* Up to a tenth of span an error or a tolerance in % of reading says nothing (common practice, no source). */
#define FL_LOWEST_X_FOR_READING 0.1

/* What the readings of a session are reduced with. Everything is borrowed, from instrument and stock. */
typedef struct fl_reference {
	fl_medium medium;
	const fl_instrument *instrument;
	const fl_signal_range *range;                              /* of the instrument's output */
	double low_m2_s, high_m2_s;                                /* the scale as equivalent viscosity */
	const fl_equipment *meter, *thermometer, *bath, *standard; /* NULL where the session names none. `meter` reads the
	                                                              output, `standard` gives the injected pressure */
	double dp_full_pa;                                         /* differential pressure at full scale; NAN if unknown */
} fl_reference;

/* Finds them: the items that `session` names, in `stock`. FL_E_RANGE for a scale that has no span, FL_E_VALUE where an
 * item is stated in a unit of another quantity than its role measures. */
fl_status fl_reference_of(const fl_session *session, const fl_procedure *procedure, const fl_stock *stock,
                          const fl_instrument *instrument, fl_reference *out, fl_error *err) FL_MUST_USE;
/* Differential pressure at full scale, Pa: as the plate states it, else by the geometry; NAN if neither is known. */
double fl_reference_dp_full(const fl_instrument *instrument);

/* The value in another unit of the same quantity; untouched where the units are one, so that no digit is lost. */
double fl_reference_in_unit(double value, fl_unit from, fl_unit to);
/* Indication plus the certificate's correction, both in `unit`, a unit of the item's quantity. Untouched where the
 * correction is zero and where `item` is NULL. */
double fl_reference_corrected(const fl_equipment *item, double indication, fl_unit unit);
/* Likewise for a temperature in °C and a thermometer in °C or, where only differences matter, in K. */
double fl_reference_corrected_temp_c(const fl_equipment *thermometer, double temp_c);

/* A differential pressure stands for the equivalent viscosity that would give it: proportional, dp_full at the upper
 * range value (Hagen-Poiseuille at the plate flow). So a scale that does not start at 0 needs a pressure at its lower
 * range value already. Position of a pressure (Pa) on the scale, and back. NAN without full-scale pressure. */
double fl_reference_x_of_pressure(const fl_reference *reference, double dp_pa);
double fl_reference_pressure_at(const fl_reference *reference, double x);

/* One reading brought to its reference. */
typedef struct fl_reading_result {
	const fl_reading *reading; /* borrowed from the session */
	bool used;                 /* false: struck; its numbers are given all the same */
	fl_oil_state oil;          /* oil at the corrected temperature; unused for zero and pressure */
	double applied_pa;         /* corrected injected pressure; NAN for oil */
	fl_ideal ideal;
	double output;   /* corrected, in the signal's unit */
	double output_x; /* fraction of span */
	double error_span;
	double error_dial;    /* dial units; NAN where a dial in seconds has no division */
	double error_reading; /* fraction of the ideal value above the lower range value; NAN where x <= 0.1 */
} fl_reading_result;

/* Reduces one reading. `oil` is that of its point; not looked at for the stopped zero and for a pressure. FL_E_VALUE
 * for an output of another quantity than the signal's and where oil, temperature, pressure or full-scale pressure is
 * missing; FL_E_RANGE far outside the oil's certified temperatures. On failure *out holds what was determined until
 * then and NAN for the rest. */
fl_status fl_reference_reading(const fl_reference *reference, const fl_oil *oil, const fl_reading *reading,
                               fl_reading_result *out, fl_error *err) FL_MUST_USE;

/* ---- function checks ---- */

typedef enum fl_function_state {
	FL_FUNCTION_NOT_TRIED,
	FL_FUNCTION_IN_ORDER,
	FL_FUNCTION_NOT_IN_ORDER,
	FL_FUNCTION_NOT_JUDGED /* found, but the instrument's record states nothing to hold it against */
} fl_function_state;
const char *fl_function_word(fl_function_state state); /* "not tried", "in order", "not in order", "not judged" */

/* One function check held against what is expected. Limits are inclusive. */
typedef struct fl_function_result {
	const fl_function_check *check;
	const fl_check_answer *answer; /* NULL where nothing is recorded */
	fl_function_state state;
	double found, expected, low, high; /* amount: in the check's unit; indication: dial units. NAN where none */
	double found_x, expected_x;        /* indication: place on the scale; NAN else */
	bool has_true;                     /* the viscosity that the indication stands for: filled in by the analysis */
	double true_value, true_u, true_U; /* dial units; U at the procedure's coverage probability */
	double true_low, true_high;        /* the interval; not symmetric on a dial in seconds */
} fl_function_result;

/* Place of a dial value on the scale, NAN where the dial has none; and the dial value of an indication given in the
 * dial's or the output's unit (through the ideal scale), NAN for another quantity. */
double fl_reference_x_of_dial(const fl_scale *scale, double dial);
double fl_reference_dial_of(const fl_scale *scale, double value, fl_unit unit);
/* `answer` may be NULL. */
void fl_reference_function(const fl_instrument *instrument, const fl_function_check *check,
                           const fl_check_answer *answer, fl_function_result *out);

#endif
