/* entry.c - beginning a session, making a conversation, feeding it a line.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "entry_private.h"

#include <stdlib.h>
#include <string.h>

fl_status fl_entry_new(fl_entry **out, const fl_entry_setup *setup, fl_error *err) {
	fl_entry *entry = calloc(1, sizeof *entry);
	if (!entry)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the conversation");
	entry->setup = *setup;
	entry->journal = setup->journal;
	entry->session = &setup->journal->session;
	entry->shown_part = -1;
	entry->shown_place = -1;
	fl_status status = fl_session_stock(entry->session, &entry->used, err);
	if (status >= 0 && !entry->session->closed)
		status = fl_entry_plain_points(entry, err);
	if (status < 0) {
		fl_entry_free(entry);
		return status;
	}
	*out = entry;
	return FL_OK;
}

void fl_entry_free(fl_entry *entry) {
	if (entry) {
		fl_stock_free(&entry->used);
		fl_arena_free(&entry->advice.arena);
	}
	free(entry);
}

bool fl_entry_finished(const fl_entry *entry) {
	return entry->stopped || entry->session->closed;
}

/* The line without its surroundings: tabs as spaces, no blanks at the ends. */
static fl_status tidy(const char *line, char *out, size_t size, fl_error *err) {
	size_t length = strlen(line);
	if (length >= size)
		return fl_fail(err, FL_E_RANGE, "the line has %zu bytes: at most %zu are read", length, size - 1);
	if (!fl_utf8_valid(line, length))
		return fl_fail(err, FL_E_SYNTAX, "the line is not UTF-8 text: type it again");
	char spaced[FL_LINE_SIZE];
	memcpy(spaced, line, length + 1);
	for (char *at = spaced; (at = strpbrk(at, "\t\r")) != NULL;)
		*at = ' ';
	if (fl_text_has_control(spaced))
		return fl_fail(err, FL_E_SYNTAX, "the line has control characters in it: type it again");
	return fl_text_trim(spaced, out, size) ? FL_OK : fl_fail(err, FL_E_RANGE, "the line is too long");
}

fl_status fl_entry_line(fl_entry *entry, const char *line, fl_text *say, fl_error *err) {
	char clean[FL_LINE_SIZE];
	fl_error inner = {0};
	fl_status status = tidy(line, clean, sizeof clean, err);
	if (status < 0)
		return status;
	if (!fl_entry_command(entry, clean, say, &status, &inner)) {
		if (entry->form.kind != FL_FORM_NONE)
			status = fl_entry_form_answer(entry, clean, say, &inner);
		else
			status = fl_entry_answer(entry, clean, say, &inner);
	}
	if (say->failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the answer");
	if (status > 0) {
		fl_text_printf(say, "  %s\n", inner.message);
		status = FL_OK;
	}
	if (status < 0)
		return fl_fail(err, status, "%s", inner.message);
	return FL_OK;
}

/* ---- a new session ---- */

static fl_status put_text(fl_journal *journal, fl_utc now, const char *kind, const char *name, const char *body,
                          fl_error *err) {
	fl_event event = {
	    .at = now, .verb = FL_V_TEXT, .fields[FL_F_KIND] = kind, .fields[FL_F_NAME] = name, .fields[FL_F_BODY] = body};
	return fl_journal_commit(journal, &event, err);
}

/* The signal's unit stands as a setting, so that the step is a function of the session alone. */
static fl_status put_signal(fl_journal *journal, fl_utc now, const fl_instrument *instrument, fl_error *err) {
	const fl_signal_range *range = fl_physics_signal_range(instrument->scale.signal);
	fl_event event = {.at = now,
	                  .verb = FL_V_SET,
	                  .fields[FL_F_ID] = "signal",
	                  .fields[FL_F_TYPED] = range->text,
	                  .fields[FL_F_UNIT] = fl_unit_text(range->unit)};
	return fl_journal_commit(journal, &event, err);
}

fl_status fl_entry_begin(fl_journal *journal, const fl_io *io, const char *path, fl_source source, bool declared_clock,
                         fl_day day, fl_utc now, const fl_procedure *procedure, const fl_instrument *instrument,
                         const char *program, fl_error *err) {
	char day_text[FL_DAY_SIZE];
	fl_event open = {.at = now,
	                 .fields[FL_F_FORMAT] = FL_JOURNAL_FORMAT,
	                 .fields[FL_F_PROGRAM] = program,
	                 .fields[FL_F_DAY] = fl_day_format(day, day_text),
	                 .fields[FL_F_SOURCE] = fl_source_word(source),
	                 .fields[FL_F_CLOCK] = declared_clock ? "declared" : "machine"};
	fl_status status = fl_journal_create(journal, io, path, &open, err);
	if (status < 0)
		return status;
	status = put_text(journal, now, "procedure", procedure->id, procedure->text, err);
	if (status >= 0)
		status = put_text(journal, now, "instrument", instrument->tag, instrument->text, err);
	if (status >= 0)
		status = put_signal(journal, now, instrument, err);
	if (status < 0) {
		fl_journal_close(journal);
		io->unlink(io->self, path); /* nothing that a person entered is in it */
	}
	return status;
}
