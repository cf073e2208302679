/* fields.c - typed readers of a map's fields. Each refuses with place and field, and says what would be right.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/document.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { MAX_TEXT_COLUMNS = 1000, NAME_SIZE = 96, LIST_SIZE = 360, NUMBER_SIZE = 32 };

/* ---- words for errors -------------------------------------------------------------------------------------------- */

static const char *quantity_words(fl_quantity quantity) {
	switch (quantity) {
	case FL_Q_NONE:
		return "a plain number";
	case FL_Q_CURRENT:
		return "a current";
	case FL_Q_PRESSURE:
		return "a pressure";
	case FL_Q_TEMPERATURE:
		return "a temperature";
	case FL_Q_TEMPERATURE_DIFFERENCE:
		return "a temperature difference";
	case FL_Q_KINEMATIC_VISCOSITY:
		return "a kinematic viscosity";
	case FL_Q_DYNAMIC_VISCOSITY:
		return "a dynamic viscosity";
	case FL_Q_REDWOOD:
	case FL_Q_SAYBOLT:
		return "a viscosity in seconds";
	case FL_Q_DENSITY:
		return "a density";
	case FL_Q_LENGTH:
		return "a length";
	case FL_Q_VOLUME_PER_REV:
		return "a volume per revolution";
	case FL_Q_VOLUME:
		return "a volume";
	case FL_Q_ROTATION:
		return "a speed of rotation";
	case FL_Q_FREQUENCY:
		return "a frequency";
	case FL_Q_VOLTAGE:
		return "a voltage";
	case FL_Q_TIME:
		return "a time";
	case FL_Q_RATIO:
		return "a percentage";
	case FL_Q_HUMIDITY:
		return "a relative humidity";
	}
	return "another quantity";
}

/* A percentage stands for a fraction; "of span" and "of reading" are bands, which other readers take. */
static bool unit_fits(fl_unit unit, fl_quantity quantity) {
	return fl_unit_quantity(unit) == quantity && unit != FL_U_PERCENT_SPAN && unit != FL_U_PERCENT_READING;
}

static const char *unit_words(fl_unit unit) {
	return unit == FL_U_PERCENT_SPAN      ? "a part of the span"
	       : unit == FL_U_PERCENT_READING ? "a part of the reading"
	                                      : quantity_words(fl_unit_quantity(unit));
}

/* Adds `word` to a list in a text: "a", "a or b", "a, b or c". */
static void add_word(char *out, size_t size, const char *word, bool first, bool last) {
	size_t used = strlen(out);
	snprintf(out + used, size - used, "%s%s", first ? "" : last ? " or " : ", ", word);
}

static void join_words(const char *const *words, char *out, size_t size) {
	out[0] = '\0';
	for (size_t i = 0; words[i]; i++)
		add_word(out, size, words[i], i == 0, words[i + 1] == NULL);
}

char *fl_document_units(fl_quantity quantity, char *out, size_t size) {
	const char *words[FL_UNIT_COUNT + 1] = {NULL};
	size_t count = 0;
	for (int unit = FL_U_NONE + 1; unit < FL_UNIT_COUNT; unit++)
		if (unit_fits((fl_unit)unit, quantity))
			words[count++] = fl_unit_text((fl_unit)unit);
	join_words(words, out, size);
	return out;
}

static void field_of(const fl_node *map, const char *key, char out[NAME_SIZE]) {
	snprintf(out, NAME_SIZE, "%s%s%s", map->path, map->path[0] ? "." : "", key);
}

static fl_status missing(const fl_node *map, const char *key, const char *needed, fl_error *err) {
	char field[NAME_SIZE];
	field_of(map, key, field);
	fl_place place = {map->file, map->line, map->column, field};
	return fl_fail_at(err, FL_E_VALUE, place, "missing: %s is needed", needed);
}

/* Distance in single-letter edits between two short names, capitals and separators aside; at most `limit` + 1. */
static size_t edit_distance(const char *a, const char *b, size_t limit) {
	size_t n = strlen(a), m = strlen(b), row[NAME_SIZE];
	if (n >= NAME_SIZE || m >= NAME_SIZE || n > m + limit || m > n + limit)
		return limit + 1;
	for (size_t j = 0; j <= m; j++)
		row[j] = j;
	for (size_t i = 1; i <= n; i++) {
		size_t diagonal = row[0];
		row[0] = i;
		for (size_t j = 1; j <= m; j++) {
			size_t above = row[j], best = diagonal + ((a[i - 1] | 0x20) != (b[j - 1] | 0x20));
			best = above + 1 < best ? above + 1 : best;
			row[j] = row[j - 1] + 1 < best ? row[j - 1] + 1 : best;
			diagonal = above;
		}
	}
	return row[m];
}

static const char *nearest_word(const char *word, const char *const *known) {
	const char *nearest = NULL;
	size_t best = strlen(word) / 3 + 1;
	for (size_t i = 0; known[i]; i++) {
		size_t distance = edit_distance(word, known[i], best);
		if (distance < best || (distance == best && !nearest)) {
			best = distance;
			nearest = known[i];
		}
	}
	return nearest;
}

static fl_status unknown_field(const fl_node *map, size_t index, const char *const *known, fl_error *err) {
	const fl_node *value = map->items[index];
	const char *key = map->keys[index];
	fl_place place = {value->file, value->key_line, value->key_column, value->path};
	if (key[0] >= '0' && key[0] <= '9')
		return fl_fail_at(err, FL_E_VALUE, place,
		                  "a decimal comma splits a value between { and }: write a decimal point");
	const char *nearest = nearest_word(key, known);
	if (nearest)
		return fl_fail_at(err, FL_E_VALUE, place, "unknown field: perhaps \"%s\"", nearest);
	char list[LIST_SIZE];
	join_words(known, list, sizeof list);
	return fl_fail_at(err, FL_E_VALUE, place, "unknown field: here stand %s", list);
}

fl_status fl_node_only(const fl_node *map, const char *const *known, fl_error *err) {
	if (map->kind != FL_NODE_MAP)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(map), "a group of fields \"name: value\" is needed here");
	for (size_t i = 0; i < map->count; i++) {
		size_t k = 0;
		while (known[k] && strcmp(known[k], map->keys[i]) != 0)
			k++;
		if (!known[k])
			return unknown_field(map, i, known, err);
	}
	return FL_OK;
}

/* ---- finding the value ------------------------------------------------------------------------------------------- */

/* The scalar under key; *out NULL where it is absent and may be. `needed` completes "... is needed". */
static fl_status find_scalar(const fl_node *map, const char *key, bool required, const char *needed,
                             const fl_node **out, fl_error *err) {
	*out = fl_node_get(map, key);
	if (!*out)
		return required ? missing(map, key, needed, err) : FL_OK;
	if ((*out)->kind != FL_NODE_SCALAR)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(*out), "one value is needed here, not a list or a group: %s",
		                  needed);
	char trimmed[8];
	bool empty = fl_text_trim((*out)->text, trimmed, sizeof trimmed) && trimmed[0] == '\0';
	if (empty && required)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(*out), "empty: %s is needed", needed);
	if (empty)
		*out = NULL;
	return FL_OK;
}

fl_status fl_node_list(const fl_node *map, const char *key, bool required, const fl_node **list, fl_error *err) {
	*list = fl_node_get(map, key);
	if (!*list)
		return required ? missing(map, key, "a list", err) : FL_OK;
	if ((*list)->kind != FL_NODE_LIST)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(*list), "a list is needed here: lines that begin with \"- \"");
	if ((*list)->count == 0 && required)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(*list), "the list is empty: at least one entry is needed");
	return FL_OK;
}

/* ---- text, choices, yes and no, dates ------------------------------------------------------------------------------
 */

fl_status fl_node_text(const fl_node *map, const char *key, bool required, const char **out, fl_error *err) {
	const fl_node *scalar;
	fl_status status = find_scalar(map, key, required, "a text", &scalar, err);
	if (status != FL_OK || !scalar)
		return status;
	if (fl_utf8_columns(scalar->text) > MAX_TEXT_COLUMNS)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "longer than %d characters: shorten it",
		                  (int)MAX_TEXT_COLUMNS);
	if (fl_text_has_control(scalar->text))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
		                  "a line break or control character in the text: write one line, or fold it with \">\"");
	*out = scalar->text;
	return FL_OK;
}

fl_status fl_node_choice(const fl_node *map, const char *key, bool required, const char *const *words, int *out,
                         fl_error *err) {
	char list[LIST_SIZE], needed[LIST_SIZE + NAME_SIZE];
	join_words(words, list, sizeof list);
	snprintf(needed, sizeof needed, "one of %s", list);
	const fl_node *scalar;
	fl_status status = find_scalar(map, key, required, needed, &scalar, err);
	if (status != FL_OK || !scalar)
		return status;
	char word[NAME_SIZE];
	bool fits = fl_text_trim(scalar->text, word, sizeof word);
	for (int i = 0; fits && words[i]; i++)
		if (strcmp(words[i], word) == 0) {
			*out = i;
			return FL_OK;
		}
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" is not possible here: write %s", scalar->text,
	                  list);
}

fl_status fl_node_bool(const fl_node *map, const char *key, bool required, bool *out, fl_error *err) {
	static const char *const words[] = {"yes", "no", "true", "false", NULL};
	const fl_node *scalar;
	fl_status status = find_scalar(map, key, required, "yes or no", &scalar, err);
	if (status != FL_OK || !scalar)
		return status;
	for (int i = 0; words[i]; i++)
		if (strcmp(words[i], scalar->text) == 0) {
			*out = i % 2 == 0;
			return FL_OK;
		}
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" is not possible here: write yes or no",
	                  scalar->text);
}

fl_status fl_node_day(const fl_node *map, const char *key, bool required, fl_day *out, fl_error *err) {
	const fl_node *scalar;
	fl_status status = find_scalar(map, key, required, "a date such as 2026-04-14", &scalar, err);
	if (status != FL_OK || !scalar)
		return status;
	fl_error inner = {0};
	status = fl_day_parse(scalar->text, out, &inner);
	return status == FL_OK ? FL_OK : fl_fail_at(err, status, fl_node_place(scalar), "%s", inner.message);
}

/* ---- numbers and amounts ---- */

/* In a file a point is the decimal mark ("2.968"); a comma with three digits behind it may be either, so: refused. */
static fl_status settle_mark(const fl_node *scalar, fl_status status, const fl_decimal *number, fl_error *err) {
	if (status != FL_ASK || !strchr(number->typed, ','))
		return FL_OK;
	char with_point[FL_TYPED_SIZE];
	snprintf(with_point, sizeof with_point, "%s", number->typed);
	*strchr(with_point, ',') = '.';
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
	                  "\"%s\" may mean thousands or decimals: write %s, or the thousands without a mark", number->typed,
	                  with_point);
}

/* A unit that is unknown: the ones of the quantity wanted are the help, not those that look alike. */
static fl_status refuse_unit(const fl_node *scalar, fl_quantity wanted, const char *otherwise, fl_error *err) {
	char units[LIST_SIZE];
	if (wanted == FL_Q_NONE)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "%s", otherwise);
	fl_document_units(wanted, units, sizeof units);
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" has an unknown unit: write it with %s",
	                  scalar->text, units);
}

/* `wanted` only helps to word an error; FL_Q_NONE where any quantity will do. */
static fl_status parse_measure(const fl_node *scalar, const char *text, fl_quantity wanted, double *value,
                               fl_unit *unit, fl_error *err) {
	fl_decimal number = {0};
	fl_error inner = {0};
	fl_unit found = FL_U_NONE;
	fl_status status = fl_amount_parse(text, FL_U_NONE, &number, &found, NULL, &inner);
	if (status == FL_E_VALUE)
		return refuse_unit(scalar, wanted, inner.message, err);
	if (status < 0)
		return fl_fail_at(err, status, fl_node_place(scalar), "%s", inner.message);
	status = settle_mark(scalar, status, &number, err);
	if (status != FL_OK)
		return status;
	*value = number.value;
	*unit = found;
	return FL_OK;
}

static fl_status measure(const fl_node *scalar, fl_quantity wanted, double *value, fl_unit *unit, fl_error *err) {
	if (scalar->kind != FL_NODE_SCALAR)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "a number is needed here, not a list or a group");
	return parse_measure(scalar, scalar->text, wanted, value, unit, err);
}

fl_status fl_node_measure(const fl_node *scalar, double *value, fl_unit *unit, fl_error *err) {
	return measure(scalar, FL_Q_NONE, value, unit, err);
}

/* The quantity fits, or the sentence that says which one would. `written` is what stands in the file. */
static fl_status check_quantity(const fl_node *scalar, const char *written, fl_quantity quantity, fl_unit unit,
                                fl_error *err) {
	if (unit_fits(unit, quantity))
		return FL_OK;
	char units[LIST_SIZE];
	fl_document_units(quantity, units, sizeof units);
	if (quantity == FL_Q_NONE)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" has a unit: a number alone is needed",
		                  written);
	if (unit == FL_U_NONE)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" has no unit: write it with %s", written,
		                  units);
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "\"%.60s\" is %s: %s in %s is needed", written,
	                  unit_words(unit), quantity_words(quantity), units);
}

/* The sentence for a value that is not there: what would be right, with its units. */
static fl_status refuse_absent(const fl_node *map, const char *key, fl_quantity quantity, fl_error *err) {
	const fl_node *scalar;
	char units[LIST_SIZE], needed[LIST_SIZE + NAME_SIZE];
	fl_document_units(quantity, units, sizeof units);
	snprintf(needed, sizeof needed, "%s%s%s", quantity_words(quantity), units[0] ? " in " : "", units);
	return find_scalar(map, key, true, needed, &scalar, err);
}

static fl_status find_measure(const fl_node *map, const char *key, bool required, fl_quantity quantity,
                              const fl_node **scalar, double *value, fl_unit *unit, fl_error *err) {
	if (find_scalar(map, key, required, "", scalar, NULL) != FL_OK)
		return refuse_absent(map, key, quantity, err);
	if (!*scalar)
		return FL_OK;
	fl_status status = measure(*scalar, quantity, value, unit, err);
	return status == FL_OK ? check_quantity(*scalar, (*scalar)->text, quantity, *unit, err) : status;
}

fl_status fl_node_amount(const fl_node *map, const char *key, bool required, fl_quantity quantity, double *inside,
                         fl_unit *unit, fl_error *err) {
	const fl_node *scalar;
	double value = 0.0;
	fl_unit found = FL_U_NONE;
	fl_status status = find_measure(map, key, required, quantity, &scalar, &value, &found, err);
	if (status != FL_OK || !scalar)
		return status;
	*inside = fl_to_inside(value, found);
	if (unit)
		*unit = found;
	return FL_OK;
}

fl_status fl_node_amount_within(const fl_node *map, const char *key, bool required, fl_quantity quantity, double low,
                                double high, double *inside, fl_unit *unit, fl_error *err) {
	double value = NAN;
	fl_unit found = FL_U_NONE;
	fl_status status = fl_node_amount(map, key, required, quantity, &value, &found, err);
	if (status != FL_OK || isnan(value))
		return status;
	if (value < low || value > high) {
		const fl_node *scalar = fl_node_get(map, key);
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(scalar),
		                  "%.60s is not possible: from %.4g to %.4g %s would be", scalar->text,
		                  fl_from_inside(low, found), fl_from_inside(high, found), fl_unit_text(found));
	}
	*inside = value;
	if (unit)
		*unit = found;
	return FL_OK;
}

fl_status fl_node_number(const fl_node *map, const char *key, bool required, double low, double high, double *out,
                         fl_error *err) {
	const fl_node *scalar;
	double value = 0.0;
	fl_unit unit = FL_U_NONE;
	fl_status status = find_measure(map, key, required, FL_Q_NONE, &scalar, &value, &unit, err);
	if (status != FL_OK || !scalar)
		return status;
	if (value < low || value > high)
		return fl_fail_at(err, FL_E_RANGE, fl_node_place(scalar), "%s is not possible: from %g to %g would be",
		                  scalar->text, low, high);
	*out = value;
	return FL_OK;
}

fl_status fl_node_integer(const fl_node *map, const char *key, bool required, int low, int high, int *out,
                          fl_error *err) {
	double value = *out;
	const fl_node *scalar = fl_node_get(map, key);
	fl_status status = fl_node_number(map, key, required, low, high, &value, err);
	if (status != FL_OK || !scalar)
		return status;
	if (value != floor(value))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "%s is not a whole number: from %d to %d is needed",
		                  scalar->text, low, high);
	*out = (int)value;
	return FL_OK;
}

/* ---- "from to" ------------------------------------------------------------------------------------------------------
 */

static bool skip_word(const char **text, const char *word) {
	size_t length = strlen(word);
	if (strncmp(*text, word, length) != 0)
		return false;
	*text += length;
	return true;
}

static fl_status read_open_end(const fl_node *scalar, const char *text, bool upward, fl_quantity wanted, double *low,
                               double *high, fl_unit *unit, fl_error *err) {
	double value = 0.0;
	fl_status status = parse_measure(scalar, text, wanted, &value, unit, err);
	*low = upward ? value : -INFINITY;
	*high = upward ? INFINITY : value;
	return status;
}

static fl_status read_both_ends(const fl_node *scalar, const char *text, const char *middle, fl_quantity wanted,
                                double *low, double *high, fl_unit *unit, fl_error *err) {
	char first[NAME_SIZE];
	fl_unit low_unit = FL_U_NONE;
	size_t length = (size_t)(middle - text);
	if (length >= sizeof first)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "too long for a number with its unit");
	memcpy(first, text, length);
	first[length] = '\0';
	fl_status status = parse_measure(scalar, first, wanted, low, &low_unit, err);
	if (status == FL_OK)
		status = parse_measure(scalar, middle + strlen(" to "), wanted, high, unit, err);
	if (status != FL_OK)
		return status;
	if (low_unit != FL_U_NONE && low_unit != *unit)
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
		                  "both ends need one unit, written once at the end, such as \"0 to 50 mm²/s\"");
	if (!(*low < *high))
		return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar), "the first number has to be below the second");
	return FL_OK;
}

static fl_status refuse_range(const fl_node *scalar, bool open, fl_quantity wanted, fl_error *err) {
	const char *unit = "mm²/s";
	for (int u = FL_UNIT_COUNT - 1; u > FL_U_NONE; u--)
		if (wanted != FL_Q_NONE && unit_fits((fl_unit)u, wanted))
			unit = fl_unit_text((fl_unit)u);
	if (open)
		return fl_fail_at(
		    err, FL_E_VALUE, fl_node_place(scalar),
		    "\"%.60s\" is not a range: write it such as \"0 to 60 °C\", \"at least 0 bar\" or \"at most 60 "
		    "°C\"",
		    scalar->text);
	return fl_fail_at(err, FL_E_VALUE, fl_node_place(scalar),
	                  "\"%.60s\" is not a range: write it such as \"0 to 50 %s\"", scalar->text, unit);
}

static fl_status read_span(const fl_node *scalar, bool open, fl_quantity wanted, double *low, double *high,
                           fl_unit *unit, fl_error *err) {
	const char *text = scalar->text;
	const char *middle = strstr(text, " to ");
	if (open && skip_word(&text, "at least "))
		return read_open_end(scalar, text, true, wanted, low, high, unit, err);
	if (open && skip_word(&text, "at most "))
		return read_open_end(scalar, text, false, wanted, low, high, unit, err);
	if (middle)
		return read_both_ends(scalar, text, middle, wanted, low, high, unit, err);
	return refuse_range(scalar, open, wanted, err);
}

fl_status fl_node_span(const fl_node *map, const char *key, bool required, fl_quantity quantity, bool open, double *low,
                       double *high, fl_unit *unit, fl_error *err) {
	const fl_node *scalar;
	fl_status status = find_scalar(map, key, required, "a range such as \"0 to 50 mm²/s\"", &scalar, err);
	if (status != FL_OK || !scalar)
		return status;
	double found_low = 0.0, found_high = 0.0;
	fl_unit found = FL_U_NONE;
	status = read_span(scalar, open, quantity, &found_low, &found_high, &found, err);
	if (status == FL_OK && quantity != FL_Q_NONE)
		status = check_quantity(scalar, scalar->text, quantity, found, err);
	if (status != FL_OK)
		return status;
	*low = found_low;
	*high = found_high;
	*unit = found;
	return FL_OK;
}
