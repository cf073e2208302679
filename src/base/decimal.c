/* decimal.c - numbers as people type them and as we print them; both marks read, the point written, no locale.
 *
 *   number   = [ sign ] body [ exponent ]
 *   sign     = "+" | "-" | U+2212
 *   body     = digits | [ digits ] mark digits | group { mark1 triple } mark2 digits    (mark1 and mark2 differ)
 *   exponent = ( "e" | "E" ) [ sign ] digits
 *
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "foundleft/base.h"

#define DIGITS "0123456789"
#define MINUS "\u2212"
#define DECIMALS_MOST 60
#define PRINTED_SIZE 400 /* 309 digits of DBL_MAX, sign, mark, DECIMALS_MOST */

/* The parts of a number, found but not yet judged. All point into the trimmed text. */
typedef struct parts {
	bool negative;
	const char *body; /* digits and marks */
	size_t body_length;
	bool has_exponent;
	bool exponent_negative;
	const char *exponent; /* its digits */
	const char *rest;     /* what follows; "" for a whole number */
} parts;

static const char *skip_sign(const char *at, bool *negative) {
	*negative = *at == '-' || strncmp(at, MINUS, strlen(MINUS)) == 0;
	if (*at == '+' || *at == '-')
		return at + 1;
	return *negative ? at + strlen(MINUS) : at;
}

static parts split(const char *text) {
	parts p = {0};
	p.body = skip_sign(text, &p.negative);
	p.body_length = strspn(p.body, DIGITS ".,");
	p.rest = p.body + p.body_length;
	if (p.body_length > 0 && (*p.rest == 'e' || *p.rest == 'E')) {
		const char *at = skip_sign(p.rest + 1, &p.exponent_negative);
		size_t length = strspn(at, DIGITS);
		p.has_exponent = length > 0;
		p.exponent = at;
		p.rest = length > 0 ? at + length : p.rest;
	}
	return p;
}

static bool starts_with_word(const char *text, const char *word) {
	size_t length = strlen(word);
	return strncasecmp(text, word, length) == 0;
}

/* Says why a text is no number at all. */
static fl_status not_a_number(const char *text, const parts *p, fl_error *err) {
	const char *unsigned_text = p->body;
	if (text[0] == '\0')
		return fl_fail(err, FL_E_SYNTAX, "nothing was entered: a number is needed");
	if (starts_with_word(unsigned_text, "nan") || starts_with_word(unsigned_text, "inf"))
		return fl_fail(err, FL_E_SYNTAX, "\"%s\" is not a measured value: write a number such as 12.5", text);
	if (starts_with_word(unsigned_text, "0x"))
		return fl_fail(err, FL_E_SYNTAX, "\"%s\" is hexadecimal: write a decimal number such as 12.5", text);
	if (fl_text_has_control(text) || !fl_utf8_valid(text, strlen(text)))
		return fl_fail(err, FL_E_SYNTAX, "the number has bytes that are no text: write a number such as 12.5");
	if (p->body_length > 0 && (strchr(p->rest, ' ') || strstr(p->rest, "\u00A0") || strchr(p->rest, '\'')))
		return fl_fail(err, FL_E_SYNTAX, "\"%s\" is not one number: write it without spaces between the digits", text);
	return fl_fail(err, FL_E_SYNTAX, "\"%s\" is not a number: write digits with one decimal mark, such as 12.5", text);
}

static size_t count_char(const char *text, size_t length, char wanted) {
	size_t count = 0;
	for (size_t i = 0; i < length; i++)
		count += text[i] == wanted;
	return count;
}

/* True if text[length] is 1 to 3 digits, then groups of exactly three, each led by `mark`. */
static bool is_grouped(const char *text, size_t length, char mark) {
	size_t lead = length % 4;
	if (lead == 0)
		return false;
	for (size_t i = 0; i < length; i++)
		if ((text[i] == mark) != (i >= lead && (i - lead) % 4 == 0))
			return false;
	return true;
}

/* Finds the decimal mark in body (its length if there is none) and what the groups are led by ('\0' if none).
 * False if the marks make no sense. */
static bool find_mark(const char *body, size_t length, size_t *mark, char *group) {
	size_t points = count_char(body, length, '.'), commas = count_char(body, length, ',');
	*group = '\0';
	*mark = length;
	if (points + commas == 0)
		return length > 0;
	const char *last = body + length - 1;
	while (*last != '.' && *last != ',')
		last--;
	*mark = (size_t)(last - body);
	if (*mark + 1 == length || (*last == '.' ? points : commas) != 1)
		return false; /* nothing behind the mark, or the same mark twice */
	if (points + commas == 1)
		return true;
	*group = *last == '.' ? ',' : '.';
	return is_grouped(body, *mark, *group);
}

/* One to three digits not starting with 0, a mark, three digits: perhaps thousands. */
static bool may_be_thousands(const parts *p, size_t mark, char group) {
	return group == '\0' && !p->has_exponent && mark >= 1 && mark <= 3 && p->body_length - mark == 4 &&
	       p->body[0] != '0';
}

/* Value of digits with a point as decimal mark, whatever the locale of the process. */
static double value_of(const char *normal) {
	locale_t plain = newlocale(LC_ALL_MASK, "C", (locale_t)0); /* the C locale is static: this allocates nothing */
	if (plain == (locale_t)0)
		return NAN;
	double value = strtod_l(normal, NULL, plain);
	freelocale(plain);
	return value;
}

/* Writes the number without groups, with a point, for strtod. Never longer than the text it came from. */
static void normalise(const parts *p, size_t mark, char group, char *out) {
	if (p->negative)
		*out++ = '-';
	for (size_t i = 0; i < p->body_length; i++)
		if (i == mark)
			*out++ = '.';
		else if (p->body[i] != group)
			*out++ = p->body[i];
	if (p->has_exponent) {
		*out++ = 'e';
		*out++ = p->exponent_negative ? '-' : '+';
		for (const char *at = p->exponent; at < p->rest; at++)
			*out++ = *at;
	}
	*out = '\0';
}

static bool has_nonzero_digit(const char *text, size_t length) {
	for (size_t i = 0; i < length; i++)
		if (text[i] >= '1' && text[i] <= '9')
			return true;
	return false;
}

/* Places needed to show the number again without exponent. */
static int places_of(const parts *p, size_t mark) {
	long places = mark < p->body_length ? (long)(p->body_length - mark - 1) : 0;
	if (p->has_exponent) {
		long exponent = strtol(p->exponent, NULL, 10);
		if (exponent > 999)
			exponent = 999;
		places += p->exponent_negative ? exponent : -exponent;
	}
	return (int)(places < 0 ? 0 : places > DECIMALS_MOST ? DECIMALS_MOST : places);
}

fl_status fl_decimal_parse(const char *text, fl_decimal *out, double *thousands, fl_error *err) {
	fl_decimal number = {0};
	if (!fl_text_trim(text, number.typed, sizeof number.typed))
		return fl_fail(err, FL_E_SYNTAX, "too long for a number: at most %d characters", FL_TYPED_SIZE - 1);
	parts p = split(number.typed);
	if (p.body_length == 0 || *p.rest != '\0')
		return not_a_number(number.typed, &p, err);
	size_t mark;
	char group, normal[FL_TYPED_SIZE + 2];
	if (!find_mark(p.body, p.body_length, &mark, &group))
		return fl_fail(err, FL_E_SYNTAX, "\"%s\" has its decimal marks in the wrong places: write it such as 1234.5",
		               number.typed);
	normalise(&p, mark, group, normal);
	number.value = value_of(normal);
	bool nonzero = has_nonzero_digit(p.body, p.body_length);
	if (!isfinite(number.value))
		return fl_fail(err, FL_E_RANGE, "\"%s\" is too large for a number", number.typed);
	if (nonzero && !isnormal(number.value))
		return fl_fail(err, FL_E_RANGE, "\"%s\" is too close to zero for a number", number.typed);
	if (!nonzero)
		number.value = 0.0; /* -0 is zero */
	number.decimals = places_of(&p, mark);
	*out = number;
	if (!may_be_thousands(&p, mark, group))
		return FL_OK;
	normalise(&p, p.body_length, p.body[mark], normal);
	if (thousands)
		*thousands = value_of(normal);
	return FL_ASK;
}

/* Copies text into out[size]; a number that does not fit becomes "#", because a cut number is a wrong number. */
static char *put_whole(const char *text, char *out, size_t size) {
	if (strlen(text) < size)
		memcpy(out, text, strlen(text) + 1);
	else if (size > 0)
		snprintf(out, size, "#");
	return out;
}

/* Magnitude with `decimals` places into out[PRINTED_SIZE]; true if a digit other than 0 is left. printf rounds the
 * exact binary value half to even; only its decimal mark follows the locale, so the mark is put in here. */
static bool print_magnitude(double value, int decimals, char *out) {
	char raw[PRINTED_SIZE];
	decimals = decimals < 0 ? 0 : decimals > DECIMALS_MOST ? DECIMALS_MOST : decimals;
	size_t length = (size_t)snprintf(raw, sizeof raw, "%.*f", decimals, fabs(value));
	size_t whole = strspn(raw, DIGITS), places = (size_t)decimals;
	memcpy(out, raw, whole);
	if (decimals > 0) {
		out[whole++] = '.';
		memcpy(out + whole, raw + length - places, places);
		whole += places;
	}
	out[whole] = '\0';
	return has_nonzero_digit(out, whole);
}

static char *format_with(double value, int decimals, const char *plus, const char *minus, char *out, size_t size) {
	char digits[PRINTED_SIZE], whole[PRINTED_SIZE + 8] = "";
	if (isnan(value))
		return put_whole("nan", out, size);
	bool nonzero = true;
	if (isinf(value))
		memcpy(digits, "inf", 4);
	else
		nonzero = print_magnitude(value, decimals, digits);
	if (nonzero)
		strcpy(whole, value < 0 ? minus : plus); /* at most three bytes */
	strcat(whole, digits);
	return put_whole(whole, out, size);
}

char *fl_decimal_format(double value, int decimals, char *out, size_t size) {
	return format_with(value, decimals, "", "-", out, size);
}

char *fl_decimal_format_signed(double value, int decimals, bool typographic, char *out, size_t size) {
	return format_with(value, decimals, "+", typographic ? MINUS : "-", out, size);
}
