/* say.c - small things that every answer needs: checking a text, stamping an event, yes and no, names of points.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

static int count_points(const char *text) {
	int count = 0;
	while (*text) {
		fl_utf8_next(&text);
		count++;
	}
	return count;
}

fl_status fl_entry_check_text(const char *text, int most_points, bool required, const char *what, fl_error *err) {
	if (!fl_utf8_valid(text, strlen(text)))
		return fl_fail(err, FL_E_SYNTAX, "%s is not UTF-8 text", what);
	if (fl_text_has_control(text))
		return fl_fail(err, FL_E_SYNTAX, "%s has control characters in it: type letters, digits and signs", what);
	if (required && !*text)
		return fl_fail(err, FL_E_VALUE, "%s is needed", what);
	int points = count_points(text);
	if (points > most_points)
		return fl_fail(err, FL_E_RANGE, "%s has %d characters: at most %d are kept", what, points, most_points);
	return FL_OK;
}

const char *fl_entry_performer(const fl_entry *entry) {
	const fl_setting *name = fl_session_setting(entry->session, "performed-by");
	return name && *name->typed ? name->typed : "not yet named";
}

fl_status fl_entry_commit(fl_entry *entry, fl_event *event, fl_error *err) {
	event->at = entry->setup.clock(entry->setup.clock_context);
	return fl_journal_commit(entry->journal, event, err);
}

int fl_entry_yes(const char *text) {
	if (strcasecmp(text, "yes") == 0 || strcasecmp(text, "y") == 0)
		return 1;
	if (strcasecmp(text, "no") == 0 || strcasecmp(text, "n") == 0)
		return 0;
	return -1;
}

fl_status fl_entry_set(fl_entry *entry, const char *id, const char *typed, fl_error *err) {
	fl_event event = {.verb = FL_V_SET, .fields[FL_F_ID] = id, .fields[FL_F_TYPED] = typed};
	return fl_entry_commit(entry, &event, err);
}

char *fl_entry_point_name(const fl_entry *entry, int point, char *out, size_t size) {
	const fl_session *s = entry->session;
	if (point == FL_POINT_ZERO)
		snprintf(out, size, "stopped zero");
	else if (point < (int)s->point_count && s->points[point].oil[0])
		snprintf(out, size, "%.60s (%.60s)", s->points[point].oil, s->points[point].lot);
	else
		snprintf(out, size, "%g %% of span", entry->setup.procedure->points[point].position_pct_span);
	return out;
}
