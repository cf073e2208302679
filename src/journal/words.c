/* words.c - the tables of verbs and fields, and checking an event against them.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "words.h"

#include <errno.h>
#include <limits.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

const char *const fl_words_runs[] = {"as-found", "as-left", NULL};
const char *const fl_words_passes[] = {"rising", "falling", NULL};
const char *const fl_words_sources[] = {"keyboard", "replay", "import", NULL};
const char *const fl_words_measures[] = {
#define MEASURE_WORD(name, word, meaning) word,
    FL_MEASURE_LIST(MEASURE_WORD)
#undef MEASURE_WORD
        NULL};
const char *const fl_words_decisions[] = {"undecided", "adjust", "leave", "repair", NULL};
static const char *const clocks[] = {"machine", "declared", NULL};
static const char *const kinds[] = {"procedure", "instrument", "oil", "equipment", NULL};
static const char *const roles[] = {"thermometer", "current-meter",     "pressure-gauge", "bath",
                                    "tachometer",  "pressure-standard", "timer",          NULL};

const fl_field_rule fl_field_rules[FL_FIELD_COUNT] = {
    [FL_F_FORMAT] = {FL_C_NAME, NULL},       [FL_F_PROGRAM] = {FL_C_NAME, NULL},
    [FL_F_DAY] = {FL_C_DAY, NULL},           [FL_F_SOURCE] = {FL_C_WORD, fl_words_sources},
    [FL_F_CLOCK] = {FL_C_WORD, clocks},      [FL_F_KIND] = {FL_C_WORD, kinds},
    [FL_F_NAME] = {FL_C_NAME, NULL},         [FL_F_BODY] = {FL_C_TEXT, NULL},
    [FL_F_ID] = {FL_C_NAME, NULL},           [FL_F_ROLE] = {FL_C_WORD, roles},
    [FL_F_ITEM] = {FL_C_NAME, NULL},         [FL_F_RUN] = {FL_C_WORD, fl_words_runs},
    [FL_F_CYCLE] = {FL_C_COUNT, NULL},       [FL_F_PASS] = {FL_C_WORD, fl_words_passes},
    [FL_F_POINT] = {FL_C_POINT, NULL},       [FL_F_OIL] = {FL_C_TEXT, NULL},
    [FL_F_LOT] = {FL_C_TEXT, NULL},          [FL_F_NUMBER] = {FL_C_COUNT, NULL},
    [FL_F_TYPED] = {FL_C_TEXT, NULL},        [FL_F_UNIT] = {FL_C_UNIT, NULL},
    [FL_F_VALUE] = {FL_C_REAL, NULL},        [FL_F_TEMP_TYPED] = {FL_C_NAME, NULL},
    [FL_F_TEMP_C] = {FL_C_REAL, NULL},       [FL_F_APPLIED_TYPED] = {FL_C_NAME, NULL},
    [FL_F_APPLIED_UNIT] = {FL_C_UNIT, NULL}, [FL_F_APPLIED_PA] = {FL_C_REAL, NULL},
    [FL_F_LINE_TYPED] = {FL_C_NAME, NULL},   [FL_F_LINE_PA] = {FL_C_REAL, NULL},
    [FL_F_OVER_TYPED] = {FL_C_NAME, NULL},   [FL_F_OVER_S] = {FL_C_REAL, NULL},
    [FL_F_TAKEN] = {FL_C_NAME, NULL}, /* a time, or "unknown" where only the day is known */
    [FL_F_TARGET] = {FL_C_COUNT, NULL},      [FL_F_ABOUT] = {FL_C_NAME, NULL},
    [FL_F_ANSWER] = {FL_C_NAME, NULL},       [FL_F_BEFORE] = {FL_C_NAME, NULL},
    [FL_F_AFTER] = {FL_C_NAME, NULL},        [FL_F_REASON] = {FL_C_NAME, NULL},
    [FL_F_BY] = {FL_C_NAME, NULL},
};

#define B(field) (UINT64_C(1) << (FL_F_##field))
#define PLACE (B(RUN) | B(CYCLE) | B(PASS) | B(POINT))
#define OUTPUT (B(TYPED) | B(UNIT) | B(VALUE))
#define APPLIED (B(APPLIED_TYPED) | B(APPLIED_UNIT) | B(APPLIED_PA))
#define AROUND                                                                                                     \
	(B(TEMP_TYPED) | B(TEMP_C) | B(APPLIED_TYPED) | B(APPLIED_UNIT) | B(APPLIED_PA) | B(LINE_TYPED) | B(LINE_PA) | \
	 B(TAKEN))
#define RULE(needs, may) \
	{ (needs), (needs) | (may) }

const fl_verb_rule fl_verb_rules[FL_VERB_COUNT] = {
    [FL_V_OPEN] = RULE(B(FORMAT) | B(PROGRAM) | B(DAY) | B(SOURCE) | B(CLOCK), 0),
    [FL_V_TEXT] = RULE(B(KIND) | B(NAME) | B(BODY), 0),
    [FL_V_SET] = RULE(B(ID) | B(TYPED), B(UNIT) | B(VALUE)),
    [FL_V_GATE] = RULE(B(ID) | B(ANSWER), B(REASON)),
    [FL_V_POINT] = RULE(B(POINT) | B(OIL) | B(LOT), 0),
    [FL_V_EQUIP] = RULE(B(ROLE) | B(ID), 0),
    [FL_V_INDICATIVE] = RULE(B(ITEM) | B(REASON) | B(BY), 0),
    [FL_V_RUN] = RULE(B(RUN), 0),
    [FL_V_MISSING] = RULE(B(RUN) | B(REASON), 0),
    [FL_V_WATCH] = RULE(PLACE | OUTPUT, AROUND),
    [FL_V_READ] = RULE(PLACE | B(NUMBER) | OUTPUT, AROUND),
    [FL_V_STRIKE] = RULE(B(TARGET) | B(REASON) | B(BY), 0),
    [FL_V_UNDO] = RULE(B(TARGET) | B(REASON) | B(BY), 0),
    [FL_V_QUESTION] = RULE(B(ABOUT) | B(ANSWER), 0),
    [FL_V_CLOSE_RUN] = RULE(B(RUN) | B(BY), 0),
    [FL_V_DECIDE] = RULE(B(ANSWER) | B(REASON) | B(BY), 0),
    [FL_V_ADJUST] = RULE(B(ITEM) | B(BEFORE) | B(AFTER), 0),
    [FL_V_REMARK] = RULE(B(TYPED), 0),
    [FL_V_TORN] = RULE(B(BODY), 0),
    [FL_V_RESUME] = RULE(B(PROGRAM) | B(SOURCE), 0),
    [FL_V_MEASURE] =
        RULE(B(RUN) | B(ID) | OUTPUT, APPLIED | B(OVER_TYPED) | B(OVER_S) | B(TEMP_TYPED) | B(TEMP_C) | B(ITEM)),
    [FL_V_FINDING] = RULE(B(ID) | B(ANSWER) | B(REASON) | B(BY), 0),
    [FL_V_CHECK] = RULE(B(ID), OUTPUT | B(ANSWER) | B(REASON)),
    [FL_V_CLOSE] = RULE(B(BY), 0),
    [FL_V_ISSUE] = RULE(B(ID) | B(DAY) | B(PROGRAM) | B(ITEM), B(NAME) | B(BODY) | B(ABOUT) | B(REASON) | B(BY)),
};

static const char *const verb_words[FL_VERB_COUNT] = {
#define VERB_WORD(name, word, meaning) [name] = (word),
    FL_VERB_LIST(VERB_WORD)
#undef VERB_WORD
};

static const char *const field_words[FL_FIELD_COUNT] = {
#define FIELD_WORD(name, word) [name] = (word),
    FL_FIELD_LIST(FIELD_WORD)
#undef FIELD_WORD
};

const char *fl_verb_word(fl_verb verb) {
	return (unsigned)verb < FL_VERB_COUNT ? verb_words[verb] : "?";
}

const char *fl_field_word(fl_field field) {
	return (unsigned)field < FL_FIELD_COUNT ? field_words[field] : "?";
}

const char *fl_run_word(fl_run_kind run) {
	return (unsigned)run < FL_RUN_KINDS ? fl_words_runs[run] : "?";
}

const char *fl_pass_word(fl_pass pass) {
	return fl_words_passes[pass == FL_PASS_FALLING];
}

const char *fl_source_word(fl_source source) {
	return (unsigned)source <= FL_SOURCE_IMPORT ? fl_words_sources[source] : "?";
}

const char *fl_measure_word(fl_measure what) {
	return (unsigned)what < FL_MEASURE_COUNT ? fl_words_measures[what] : "?";
}

const char *fl_decision_word(fl_decision decision) {
	return (unsigned)decision <= FL_DECISION_REPAIR ? fl_words_decisions[decision] : "?";
}

static int find_word(const char *const *words, int from, int count, const char *word, size_t length) {
	for (int i = from; i < count; i++)
		if (strncmp(words[i], word, length) == 0 && words[i][length] == '\0')
			return i;
	return count;
}

fl_verb fl_verb_find(const char *word, size_t length) {
	return (fl_verb)find_word(verb_words, 0, FL_VERB_COUNT, word, length);
}

fl_field fl_field_find(int after, const char *word, size_t length) {
	fl_field ahead = (fl_field)find_word(field_words, after + 1, FL_FIELD_COUNT, word, length);
	return ahead != FL_FIELD_COUNT ? ahead : (fl_field)find_word(field_words, 0, FL_FIELD_COUNT, word, length);
}

int fl_words_index(const char *const *words, const char *text) {
	for (int i = 0; words[i]; i++)
		if (strcmp(words[i], text) == 0)
			return i;
	return -1;
}

/* 0 if the text is no integer from 1 to 999 999 999 in plain digits. */
int fl_words_count(const char *text) {
	size_t length = strlen(text);
	if (length == 0 || length > 9 || text[0] == '0' || strspn(text, "0123456789") != length)
		return 0;
	return (int)strtol(text, NULL, 10);
}

int fl_words_point(const char *text) {
	return strcmp(text, "zero") == 0 ? FL_POINT_ZERO : fl_words_count(text) - 1;
}

/* NAN unless the text is one finite number with a point as decimal mark. */
double fl_words_real(const char *text) {
	fl_decimal number;
	if (strchr(text, ',') || fl_decimal_parse(text, &number, NULL, NULL) < 0)
		return NAN;
	return number.value;
}

static bool content_fits(const fl_field_rule *rule, const char *text) {
	fl_unit unit;
	fl_day day;
	fl_utc utc;
	switch (rule->content) {
	case FL_C_TEXT:
		return true;
	case FL_C_NAME:
		return text[0] != '\0';
	case FL_C_DAY:
		return fl_day_parse(text, &day, NULL) >= 0;
	case FL_C_UTC:
		return fl_utc_parse(text, &utc, NULL) >= 0;
	case FL_C_COUNT:
		return fl_words_count(text) > 0;
	case FL_C_POINT:
		return fl_words_point(text) >= 0 || strcmp(text, "zero") == 0;
	case FL_C_REAL:
		return isfinite(fl_words_real(text));
	case FL_C_UNIT:
		return fl_unit_parse(text, &unit, NULL) >= 0;
	case FL_C_WORD:
		return fl_words_index(rule->words, text) >= 0;
	}
	return false;
}

fl_status fl_words_check(const fl_event *event, fl_error *err) {
	if ((unsigned)event->verb >= FL_VERB_COUNT)
		return fl_fail(err, FL_E_VALUE, "unknown kind of entry");
	const fl_verb_rule *rule = &fl_verb_rules[event->verb];
	const char *verb = fl_verb_word(event->verb);
	for (int f = 0; f < FL_FIELD_COUNT; f++) {
		const char *text = event->fields[f];
		bool needed = (rule->required >> f) & 1, may = (rule->allowed >> f) & 1;
		if (!text && !needed)
			continue;
		if (!text)
			return fl_fail(err, FL_E_VALUE, "an entry \"%s\" needs the field \"%s\"", verb, field_words[f]);
		if (!may)
			return fl_fail(err, FL_E_VALUE, "an entry \"%s\" has no field \"%s\"", verb, field_words[f]);
		if (!fl_utf8_valid(text, strlen(text)))
			return fl_fail(err, FL_E_VALUE, "the field \"%s\" of \"%s\" is not UTF-8 text", field_words[f], verb);
		if (!content_fits(&fl_field_rules[f], text))
			return fl_fail(err, FL_E_VALUE, "the field \"%s\" of \"%s\" cannot be \"%.60s\"", field_words[f], verb,
			               text);
	}
	return FL_OK;
}
