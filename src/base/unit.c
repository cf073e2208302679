/* unit.c - units: the list of base.h as a table, the spellings people use, and an amount such as "10.42 mA".
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "foundleft/base.h"
#include "utf8.h"

#define SPELLING_SIZE 48

static const struct {
	const char *text;
	fl_quantity quantity;
	double factor, offset;
} units[FL_UNIT_COUNT] = {
#define FL_UNIT_ROW(name, text, quantity, factor, offset) {text, quantity, factor, offset},
    FL_UNIT_LIST(FL_UNIT_ROW)
#undef FL_UNIT_ROW
};

/* Spellings in the plain form of `plain_form`: powers as digits, products as points, the degree sign as "deg".
 * `exact`: capital and small letters mean different things (m and M, k and K, s and S), so they must fit.
 * "Redwood" or "Saybolt" alone is missing on purpose: Redwood No. 2 and Saybolt Furol exist. */
static const struct {
	const char *plain;
	fl_unit unit;
	bool exact;
} spellings[] = {
    {"", FL_U_NONE, true},
    {"mA", FL_U_MA, false},
    {"bar", FL_U_BAR, false},
    {"mbar", FL_U_MBAR, true},
    {"hPa", FL_U_MBAR, false},
    {"psi", FL_U_PSI, false},
    {"lbf/in2", FL_U_PSI, false},
    {"kPa", FL_U_KPA, false},
    {"Pa", FL_U_PA, false},
    {"degC", FL_U_CELSIUS, false},
    {"deg C", FL_U_CELSIUS, false},
    {"C", FL_U_CELSIUS, false},
    {"Celsius", FL_U_CELSIUS, false},
    {"degF", FL_U_FAHRENHEIT, false},
    {"deg F", FL_U_FAHRENHEIT, false},
    {"F", FL_U_FAHRENHEIT, false},
    {"Fahrenheit", FL_U_FAHRENHEIT, false},
    {"K", FL_U_KELVIN, true},
    {"kelvin", FL_U_KELVIN, false},
    {"mm2/s", FL_U_MM2_S, true},
    {"mm2 s-1", FL_U_MM2_S, true},
    {"cSt", FL_U_MM2_S, false},
    {"mPa.s", FL_U_MPA_S, true},
    {"mPa s", FL_U_MPA_S, true},
    {"mPas", FL_U_MPA_S, true},
    {"mpa.s", FL_U_MPA_S, true},
    {"mpas", FL_U_MPA_S, true},
    {"cP", FL_U_MPA_S, false},
    {"s Redwood No. 1", FL_U_REDWOOD_S, false},
    {"s Redwood No.1", FL_U_REDWOOD_S, false},
    {"s Redwood 1", FL_U_REDWOOD_S, false},
    {"Redwood No. 1 s", FL_U_REDWOOD_S, false},
    {"Redwood No. 1", FL_U_REDWOOD_S, false},
    {"Redwood No.1", FL_U_REDWOOD_S, false},
    {"Redwood 1", FL_U_REDWOOD_S, false},
    {"RW1", FL_U_REDWOOD_S, false},
    {"s RW1", FL_U_REDWOOD_S, false},
    {"s Saybolt Universal", FL_U_SAYBOLT_S, false},
    {"Saybolt Universal s", FL_U_SAYBOLT_S, false},
    {"Saybolt Universal", FL_U_SAYBOLT_S, false},
    {"SUS", FL_U_SAYBOLT_S, false},
    {"SSU", FL_U_SAYBOLT_S, false},
    {"kg/m3", FL_U_KG_M3, false},
    {"kg m-3", FL_U_KG_M3, false},
    {"mm", FL_U_MM, true},
    {"m", FL_U_M, true},
    {"cm3/rev", FL_U_CM3_REV, false},
    {"cm3/r", FL_U_CM3_REV, false},
    {"cc/rev", FL_U_CM3_REV, false},
    {"ml/rev", FL_U_CM3_REV, true},
    {"mL/rev", FL_U_CM3_REV, true},
    {"cm3", FL_U_CM3, false},
    {"ccm", FL_U_CM3, false},
    {"cc", FL_U_CM3, false},
    {"ml", FL_U_CM3, true},
    {"mL", FL_U_CM3, true},
    {"r/min", FL_U_R_MIN, false},
    {"rev/min", FL_U_R_MIN, false},
    {"rpm", FL_U_R_MIN, false},
    {"1/min", FL_U_R_MIN, false},
    {"min-1", FL_U_R_MIN, false},
    {"Hz", FL_U_HZ, false},
    {"V", FL_U_V, false},
    {"s", FL_U_S, true},
    {"sec", FL_U_S, false},
    {"min", FL_U_MIN, false},
    {"%", FL_U_PERCENT, false},
    {"percent", FL_U_PERCENT, false},
    {"% of span", FL_U_PERCENT_SPAN, false},
    {"% span", FL_U_PERCENT_SPAN, false},
    {"%span", FL_U_PERCENT_SPAN, false},
    {"percent of span", FL_U_PERCENT_SPAN, false},
    {"% of reading", FL_U_PERCENT_READING, false},
    {"% reading", FL_U_PERCENT_READING, false},
    {"%reading", FL_U_PERCENT_READING, false},
    {"percent of reading", FL_U_PERCENT_READING, false},
    {"%rh", FL_U_PERCENT_RH, false},
    {"% rh", FL_U_PERCENT_RH, false},
    {"% r.h.", FL_U_PERCENT_RH, false},
};
#define SPELLINGS (sizeof spellings / sizeof spellings[0])

/* Characters that have a plain way of writing. */
static const struct {
	const char *text, *plain;
} plain_writing[] = {
    {"²", "2"},         {"³", "3"},      {"^", ""},       {"⁻", "-"},   {"¹", "1"},   {"\u2212", "-"},
    {"·", "."},         {"\u22C5", "."}, {"*", "."},      {"°", "deg"}, {"º", "deg"}, {"\u2103", "degC"},
    {"\u2109", "degF"}, {"\u00A0", " "}, {"\u202F", " "}, {"\t", " "},
};

static bool known(fl_unit unit) {
	return (int)unit >= 0 && unit < FL_UNIT_COUNT;
}

const char *fl_unit_text(fl_unit unit) {
	return known(unit) ? units[unit].text : "";
}

fl_quantity fl_unit_quantity(fl_unit unit) {
	return known(unit) ? units[unit].quantity : FL_Q_NONE;
}

double fl_to_inside(double value, fl_unit unit) {
	/* The two factors of the Fahrenheit scale are no short binary numbers: 212 has to give 100 exactly. */
	if (unit == FL_U_FAHRENHEIT)
		return (value - 32.0) * 5.0 / 9.0;
	return known(unit) ? units[unit].factor * value + units[unit].offset : value;
}

double fl_from_inside(double inside, fl_unit unit) {
	if (unit == FL_U_FAHRENHEIT)
		return inside * 9.0 / 5.0 + 32.0;
	return known(unit) ? (inside - units[unit].offset) / units[unit].factor : inside;
}

/* Letters, digits and most marks of ASCII are plain already. */
static bool is_plain(char letter) {
	return (unsigned char)letter < 0x80 && letter != '^' && letter != '*' && letter != '\t';
}

/* One character of text in its plain writing; moves *text behind it. */
static const char *next_plain(const char **text, char single[5]) {
	size_t count = is_plain(**text) ? 0 : sizeof plain_writing / sizeof plain_writing[0];
	for (size_t i = 0; i < count; i++) {
		size_t length = strlen(plain_writing[i].text);
		if (strncmp(*text, plain_writing[i].text, length) == 0) {
			*text += length;
			return plain_writing[i].plain;
		}
	}
	const char *start = *text;
	fl_utf8_next(text);
	size_t length = (size_t)(*text - start); /* at most 4 */
	memcpy(single, start, length);
	single[length] = '\0';
	return single;
}

/* The text in plain writing with single spaces; false if it does not fit. */
static bool plain_form(const char *text, char out[SPELLING_SIZE]) {
	char trimmed[SPELLING_SIZE * 2];
	if (!fl_text_trim(text, trimmed, sizeof trimmed))
		return false;
	size_t used = 0;
	for (const char *at = trimmed; *at;) {
		char single[5];
		const char *piece = next_plain(&at, single);
		if (strcmp(piece, " ") == 0 && used > 0 && out[used - 1] == ' ')
			continue;
		if (used + strlen(piece) >= SPELLING_SIZE)
			return false;
		memcpy(out + used, piece, strlen(piece));
		used += strlen(piece);
	}
	out[used] = '\0';
	return true;
}

/* Letters of ASCII only, so that no locale can change what is equal. */
static char fold(char letter) {
	return letter >= 'A' && letter <= 'Z' ? (char)(letter - 'A' + 'a') : letter;
}

static bool equal_folded(const char *a, const char *b) {
	while (*a && fold(*a) == fold(*b)) {
		a++;
		b++;
	}
	return fold(*a) == fold(*b);
}

/* Index of the spelling, or SPELLINGS. */
static size_t find_spelling(const char *plain) {
	for (size_t i = 0; i < SPELLINGS; i++)
		if (strcmp(plain, spellings[i].plain) == 0)
			return i;
	for (size_t i = 0; i < SPELLINGS; i++)
		if (!spellings[i].exact && equal_folded(plain, spellings[i].plain))
			return i;
	return SPELLINGS;
}

/* Near enough to be offered: equal but for capitals, one the start of the other, or one letter different. */
static bool is_near(const char *typed, const char *plain) {
	size_t typed_length = strlen(typed), plain_length = strlen(plain);
	size_t shorter = typed_length < plain_length ? typed_length : plain_length;
	size_t longer = typed_length > plain_length ? typed_length : plain_length;
	size_t head = 0, tail = 0;
	while (head < shorter && fold(typed[head]) == fold(plain[head]))
		head++;
	if (shorter < 2)
		return head == longer;
	while (tail < shorter - head && fold(typed[typed_length - 1 - tail]) == fold(plain[plain_length - 1 - tail]))
		tail++;
	return head == shorter || longer - head - tail <= 1;
}

/* Adds the name of `unit` to a list of units for a sentence. */
static void add_name(char *list, size_t size, fl_unit unit) {
	size_t used = strlen(list);
	snprintf(list + used, size - used, "%s%s", used ? ", " : "", fl_unit_text(unit));
}

static fl_status unknown_unit(const char *plain, fl_error *err) {
	char list[320] = "";
	bool listed[FL_UNIT_COUNT] = {false};
	for (size_t i = 0; i < SPELLINGS; i++) {
		fl_unit unit = spellings[i].unit;
		if (!listed[unit] && is_near(plain, spellings[i].plain)) {
			add_name(list, sizeof list, unit);
			listed[unit] = true;
		}
	}
	if (list[0])
		return fl_fail(err, FL_E_VALUE, "unknown unit \"%s\": perhaps %s", plain, list);
	for (int unit = FL_U_NONE + 1; unit < FL_UNIT_COUNT; unit++)
		add_name(list, sizeof list, (fl_unit)unit);
	return fl_fail(err, FL_E_VALUE, "unknown unit \"%s\": write one of %s", plain, list);
}

fl_status fl_unit_parse(const char *text, fl_unit *out, fl_error *err) {
	char plain[SPELLING_SIZE];
	if (!plain_form(text, plain))
		return fl_fail(err, FL_E_VALUE, "too long for a unit: write one such as mA, bar, °C or mm²/s");
	size_t found = find_spelling(plain);
	if (found == SPELLINGS)
		return unknown_unit(plain, err);
	*out = spellings[found].unit;
	return FL_OK;
}

/* Length of the number that text starts with; 0 if it starts with none. */
static size_t number_length(const char *text) {
	size_t length = strncmp(text, "\u2212", 3) == 0 ? 3 : *text == '+' || *text == '-';
	size_t body = strspn(text + length, "0123456789.,");
	if (body == 0)
		return 0;
	length += body;
	if (text[length] == 'e' || text[length] == 'E') {
		const char *at = text + length + 1;
		at += strncmp(at, "\u2212", 3) == 0 ? 3 : *at == '+' || *at == '-';
		size_t exponent = strspn(at, "0123456789");
		if (exponent > 0)
			length = (size_t)(at - text) + exponent;
	}
	return length;
}

/* What follows the number is no unit but more of it: "1 234", "0x1F". */
static bool number_goes_on(const char *rest) {
	bool hexadecimal = *rest == 'x' || *rest == 'X';
	size_t space;
	while ((space = fl_utf8_space_length(rest)) > 0)
		rest += space;
	return hexadecimal || (*rest && strchr("0123456789'.,+-", *rest));
}

fl_status fl_amount_parse(const char *text, fl_unit fallback, fl_decimal *number, fl_unit *unit, double *thousands,
                          fl_error *err) {
	char whole[FL_TYPED_SIZE + 2 * SPELLING_SIZE];
	if (!fl_text_trim(text, whole, sizeof whole))
		return fl_fail(err, FL_E_SYNTAX, "too long for a number with its unit: write it such as 10.42 mA");
	size_t length = number_length(whole);
	const char *rest = whole + length;
	fl_unit found = fallback;
	fl_status unit_status = FL_OK;
	fl_error unit_error = {0};
	if (*rest)
		unit_status = fl_unit_parse(rest, &found, &unit_error);
	if (length == 0 || (unit_status < 0 && number_goes_on(rest)))
		return fl_decimal_parse(whole, number, thousands, err);
	if (unit_status < 0)
		return fl_fail(err, unit_status, "%s", unit_error.message);
	char digits[sizeof whole];
	memcpy(digits, whole, length);
	digits[length] = '\0';
	fl_status status = fl_decimal_parse(digits, number, thousands, err);
	if (status >= 0)
		*unit = found;
	return status;
}
