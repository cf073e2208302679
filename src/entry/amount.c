/* amount.c - numbers with units as people type them on one line, and which of two readings of a number is possible.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

char *fl_entry_number(double value, char out[32]) {
	for (int digits = 15; digits <= 17; digits++) {
		snprintf(out, 32, "%.*g", digits, value);
		if (strtod(out, NULL) == value)
			break;
	}
	return out;
}

static bool is_possible(const fl_wanted *wanted, fl_unit unit, double typed) {
	double value = unit == wanted->unit ? typed : fl_from_inside(fl_to_inside(typed, unit), wanted->unit);
	return value >= wanted->low && value <= wanted->high;
}

static fl_status refuse_quantity(const fl_wanted *wanted, fl_unit unit, fl_error *err) {
	return fl_fail(err, FL_E_VALUE, "%s does not fit here: %s is wanted in %s", fl_unit_text(unit), wanted->what,
	               fl_unit_text(wanted->unit));
}

static fl_status refuse_range(const fl_wanted *wanted, const fl_decimal *number, fl_unit unit, fl_error *err) {
	if (isinf(wanted->low) || isinf(wanted->high))
		return fl_fail(err, FL_E_RANGE, "%s %s is not possible for %s: %s %g %s is needed", number->typed,
		               fl_unit_text(unit), wanted->what, isinf(wanted->high) ? "at least" : "at most",
		               isinf(wanted->high) ? wanted->low : wanted->high, fl_unit_text(wanted->unit));
	return fl_fail(err, FL_E_RANGE, "%s %s is not possible for %s: it lies from %g to %g %s", number->typed,
	               fl_unit_text(unit), wanted->what, wanted->low, wanted->high, fl_unit_text(wanted->unit));
}

fl_status fl_entry_amount(const char *text, const fl_wanted *wanted, fl_decimal *number, fl_unit *unit, double *value,
                          fl_error *err) {
	double thousands = NAN;
	fl_status status = fl_amount_parse(text, wanted->unit, number, unit, &thousands, err);
	if (status < 0)
		return status;
	if (fl_unit_quantity(*unit) != fl_unit_quantity(wanted->unit))
		return refuse_quantity(wanted, *unit, err);
	bool decimal_fits = is_possible(wanted, *unit, number->value);
	bool thousands_fits = status == FL_ASK && is_possible(wanted, *unit, thousands);
	if (decimal_fits && thousands_fits)
		return fl_fail(err, FL_ASK, "\"%s\" can mean %g or %.0f: type it again as %.4f or as %.0f", number->typed,
		               number->value, thousands, number->value, thousands);
	if (thousands_fits) {
		number->value = thousands;
		number->decimals = 0;
	} else if (!decimal_fits) {
		return refuse_range(wanted, number, *unit, err);
	}
	*value = *unit == wanted->unit ? number->value : fl_from_inside(fl_to_inside(number->value, *unit), wanted->unit);
	return FL_OK;
}

/* ---- several amounts on one line ---- */

static bool begins_number(const char *token) {
	if (strncmp(token, "\u2212", 3) == 0)
		token += 3;
	else if (*token == '+' || *token == '-')
		token++;
	if (*token == '.' || *token == ',')
		token++;
	return *token >= '0' && *token <= '9';
}

/* The next token between spaces; a comma or semicolon at its end is not part of it, and *ended tells of it. */
static size_t next_token(const char **at, const char **token, bool *ended) {
	while (**at == ' ' || **at == ';')
		(*at)++;
	*token = *at;
	size_t length = strcspn(*at, " ;");
	*at += length;
	*ended = **at == ';';
	while (length > 0 && (*token)[length - 1] == ',') {
		length--;
		*ended = true;
	}
	return length;
}

static bool is_filler(const char *token, size_t length) {
	return (length == 1 && *token == '@') || (length == 2 && strncmp(token, "at", 2) == 0);
}

static void add_token(char part[96], const char *token, size_t length) {
	size_t used = strlen(part);
	snprintf(part + used, 96 - used, "%s%.*s", used ? " " : "", (int)(length > 90 ? 90 : length), token);
}

int fl_entry_split(const char *line, char parts[][96], int most) {
	int count = 0;
	bool fresh = true, ended;
	const char *token;
	for (size_t length; (length = next_token(&line, &token, &ended)) > 0 || *line;) {
		if (length == 0)
			continue;
		if (is_filler(token, length)) {
			fresh = true;
			continue;
		}
		if (fresh || begins_number(token)) {
			if (count == most)
				return most + 1;
			parts[count++][0] = '\0';
		}
		add_token(parts[count - 1], token, length);
		fresh = ended;
	}
	return count;
}
