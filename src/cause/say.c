/* cause/say.c - the sentences of the findings, and the numbers in them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "cause_private.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

enum { SENTENCE_SIZE = 1024 };

#define FAULT_KIND(name, word, text, unit, prior, least, flow, healthy) \
	[name] = {word, text, unit, prior, least, flow, healthy},
static const fl_fault_kind faults[FL_FAULT_COUNT] = {FL_FAULT_LIST(FAULT_KIND)};

const fl_fault_kind *fl_cause_fault(fl_fault fault) {
	return &faults[fault];
}

#define FINDING_WORD(name, word, meaning) [name] = word,
static const char *const finding_words[FL_FINDING_KINDS] = {FL_FINDING_LIST(FINDING_WORD)};

const char *fl_cause_finding_word(fl_finding_kind kind) {
	return finding_words[kind];
}

const char *fl_cause_strength_word(fl_strength strength) {
	static const char *const words[] = {"", "a hint", "likely", "clear"};
	return words[strength];
}

fl_strength fl_cause_strength(double z) {
	return z >= 10.0  ? FL_STRENGTH_CLEAR
	       : z >= 5.0 ? FL_STRENGTH_LIKELY
	       : z >= 3.0 ? FL_STRENGTH_HINT
	                  : FL_STRENGTH_NONE;
}

const char *fl_cause_split_words(fl_split split) {
	static const char *const words[FL_SPLIT_COUNT] = {
	    "inject two or more differential pressures into the transmitter alone and read its output",
	    "count the revolutions at the pump shaft",
	    "time a volume through the capillary",
	    "flush a second time and read again; then wait longer and read again",
	    "read a second thermometer in the oil at the capillary",
	    "compare the dial density with the plate and the maker's papers",
	};
	return split < FL_SPLIT_COUNT ? words[split] : "";
}

static const char *keep(fl_search *s, const char *text) {
	const char *kept = fl_arena_strdup(s->arena, text);
	s->memory_failed = s->memory_failed || !kept;
	return kept ? kept : "?";
}

static const char *formatted(fl_search *s, const char *format, va_list args) {
	char text[SENTENCE_SIZE];
	vsnprintf(text, sizeof text, format, args);
	return keep(s, text);
}

const char *fl_cause_text(fl_search *s, const char *format, ...) {
	va_list args;
	va_start(args, format);
	const char *kept = formatted(s, format, args);
	va_end(args);
	return kept;
}

fl_finding *fl_cause_say(fl_search *s, fl_finding_kind kind, const char *id, const char *format, ...) {
	fl_cause *out = s->out;
	va_list args;
	va_start(args, format);
	const char *sentence = formatted(s, format, args);
	va_end(args);
	fl_finding *grown =
	    fl_arena_grow(s->arena, out->findings, out->finding_count, &out->finding_capacity, sizeof *grown);
	if (!grown) {
		s->memory_failed = true;
		return NULL;
	}
	out->findings = grown;
	fl_finding *finding = &grown[out->finding_count++];
	*finding = (fl_finding){.kind = kind, .id = keep(s, id), .sentence = sentence, .advice = "", .reason = ""};
	finding->z = NAN;
	finding->answered = "";
	return finding;
}

void fl_cause_advise(fl_search *s, fl_finding *finding, const char *advice, const char *format, ...) {
	va_list args;
	if (!finding)
		return;
	va_start(args, format);
	finding->reason = formatted(s, format, args);
	va_end(args);
	finding->advice = keep(s, advice);
}

void fl_cause_number_of(fl_search *s, fl_finding *finding, const char *name, double inside, double u, fl_unit unit) {
	if (!finding)
		return;
	size_t n = finding->number_count;
	fl_cause_number *numbers = fl_arena_alloc(s->arena, n + 1, sizeof *numbers);
	if (!numbers) {
		s->memory_failed = true;
		return;
	}
	if (n)
		memcpy(numbers, finding->numbers, n * sizeof *numbers);
	double zero = fl_from_inside(0.0, unit); /* u is a difference */
	numbers[n] = (fl_cause_number){name, fl_from_inside(inside, unit), fl_from_inside(u, unit) - zero, unit};
	finding->numbers = numbers;
	finding->number_count = n + 1;
}

const char *fl_cause_percent(fl_search *s, double fraction, int decimals) {
	char number[48];
	return fl_cause_text(s, "%s %%", fl_decimal_format_signed(100.0 * fraction, decimals, true, number, sizeof number));
}

const char *fl_cause_amount(fl_search *s, double inside, fl_unit unit, int significant) {
	char number[64];
	double value = fl_from_inside(inside, unit);
	int decimals = significant - 1;
	if (value != 0.0 && isfinite(value))
		decimals -= (int)floor(log10(fabs(value)));
	decimals = decimals < 0 ? 0 : decimals > 12 ? 12 : decimals;
	return fl_cause_text(s, "%s %s", fl_decimal_format(value, decimals, number, sizeof number), fl_unit_text(unit));
}
