/* command_session.c - begin, resume, replay, import: the ways in which a journal comes to be.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "advise.h"
#include "book.h"
#include "case.h"
#include "cli.h"
#include "foundleft/entry.h"
#include "talk.h"

/* Everything that a conversation needs, owned in one place. */
typedef struct bench {
	fl_stock stock;
	fl_procedure procedure;
	const fl_instrument *instrument;
	fl_journal journal;
	bool journal_open;
	fl_entry *entry;
	fl_utc declared; /* replay: the clock of the file */
	int64_t pace_s;  /* replay: it goes on by this after each line */
	bool is_declared;
	char path[FL_PATH_SIZE];
	fl_adviser_context adviser;
} bench;

static void bench_free(bench *b) {
	fl_entry_free(b->entry);
	if (b->journal_open)
		fl_journal_close(&b->journal);
	fl_procedure_free(&b->procedure);
	fl_stock_free(&b->stock);
}

static fl_utc bench_clock(void *context) {
	const bench *b = context;
	return b->is_declared ? b->declared : fl_cli_now();
}

static fl_status load_stock(const fl_cli *cli, fl_stock *stock, fl_error *err) {
	fl_status status = fl_place_stock(cli, stock, err);
	if (status >= 0 && stock->oil_count + stock->equipment_count + stock->instrument_count == 0)
		status = fl_fail(
		    err, FL_E_NOT_FOUND,
		    "there are no stock files in %s: foundleft stock add asks for oils, equipment and instruments, foundleft "
		    "stock import takes files in; or give --stock DIR",
		    cli->stock);
	return status;
}

static fl_status load_procedure(const fl_cli *cli, const char *id, fl_procedure *procedure, fl_error *err) {
	char path[FL_PATH_SIZE];
	fl_status status = fl_place_procedure(cli, id, path, err);
	return status < 0 ? status : fl_procedure_load(cli->io, path, procedure, err);
}

static fl_status find_instrument(bench *b, const char *tag, fl_error *err) {
	b->instrument = fl_stock_instrument(&b->stock, tag);
	if (b->instrument == NULL)
		return fl_fail(err, FL_E_NOT_FOUND, "there is no instrument `%s` in the stock; foundleft list stock shows them",
		               tag);
	return FL_OK;
}

/* The offset of local time is part of the record: the certificate shows local time beside UTC. */
static fl_status record_offset(bench *b, int offset_min, fl_error *err) {
	char typed[8], value[8];
	int size = offset_min < 0 ? -offset_min : offset_min;
	snprintf(typed, sizeof typed, "%c%02d:%02d", offset_min < 0 ? '-' : '+', size / 60 % 24, size % 60);
	snprintf(value, sizeof value, "%d", offset_min % 1440);
	fl_event event = {.at = bench_clock(b), .verb = FL_V_SET};
	event.fields[FL_F_ID] = "utc-offset";
	event.fields[FL_F_TYPED] = typed;
	event.fields[FL_F_UNIT] = "min";
	event.fields[FL_F_VALUE] = value;
	return fl_journal_commit(&b->journal, &event, err);
}

/* Of the certificates of one thing only what counts on the session's day is there to choose from. */
static fl_status settle_stock(bench *b, fl_day day, fl_error *err) {
	const char *tag = b->instrument->tag;
	fl_stock_keep(&b->stock, day);
	return find_instrument(b, tag, err);
}

static fl_status open_session(const fl_cli *cli, bench *b, fl_source source, fl_day day, fl_error *err) {
	fl_status status = settle_stock(b, day, err);
	if (status >= 0)
		status = fl_place_new_journal(cli, day, b->instrument->tag, b->path, err);
	if (status < 0)
		return status;
	fl_utc now = bench_clock(b);
	status = fl_entry_begin(&b->journal, cli->io, b->path, source, b->is_declared, day, now, &b->procedure,
	                        b->instrument, FOUNDLEFT_VERSION, err);
	if (status < 0)
		return status;
	b->journal_open = true;
	return record_offset(b, b->is_declared ? 0 : fl_cli_utc_offset_min(now), err);
}

static fl_entry_setup setup_of(const fl_cli *cli, bench *b) {
	b->adviser = (fl_adviser_context){.shelf = &b->stock, .columns = fl_cli_columns(cli)};
	return (fl_entry_setup){.journal = &b->journal,
	                        .procedure = &b->procedure,
	                        .instrument = b->instrument,
	                        .stock = &b->stock,
	                        .clock = bench_clock,
	                        .clock_context = b,
	                        .advise = fl_cli_advise,
	                        .advise_context = &b->adviser,
	                        .utc_offset_min = b->is_declared ? 0 : fl_cli_utc_offset_min(bench_clock(b))};
}

static void say_what_next(const fl_cli *cli, const bench *b) {
	if (b->journal.session.closed) {
		fl_book_after_close(cli, b->path);
		fprintf(cli->out, "The session is closed: %s\nNext: foundleft assess %s, then foundleft certify %s\n", b->path,
		        b->path, b->path);
	} else {
		fprintf(cli->out, "The session stays open; everything entered is kept. Go on with: foundleft resume %s\n",
		        b->path);
	}
}

/* ---- the blocking loop --------------------------------------------------------------------------------------- */

static bool ends_the_talk(fl_status status) {
	return status == FL_E_IO || status == FL_E_DISK_FULL || status == FL_E_READ_ONLY || status == FL_E_MEMORY ||
	       status == FL_E_INTERNAL;
}

static void show_folded(const fl_cli *cli, const char *text) {
	fl_text folded = {0};
	fl_talk_fold(&folded, text, fl_cli_columns(cli));
	fputs(folded.data ? folded.data : "", cli->out);
	fl_text_free(&folded);
}

static void show_refusal(const fl_cli *cli, fl_error *err) {
	char line[1400], text[1440];
	snprintf(text, sizeof text, "  not taken: %s\n", fl_error_line(err, line, sizeof line));
	show_folded(cli, text);
	*err = (fl_error){0};
}

static fl_status converse(fl_cli *cli, bench *b, fl_talk *talk, fl_error *err) {
	fl_entry_setup setup = setup_of(cli, b);
	fl_status status = fl_entry_new(&b->entry, &setup, err);
	fl_text text = {0};
	const char *line;
	while (status >= 0 && !fl_entry_finished(b->entry)) {
		fl_text_clear(&text);
		fl_entry_prompt(b->entry, &text);
		if (!fl_talk_line(talk, text.data ? text.data : "> ", &line)) {
			fputc('\n', cli->out);
			break;
		}
		fl_text_clear(&text);
		status = fl_entry_line(b->entry, line, &text, err);
		show_folded(cli, text.data ? text.data : "");
		if (status < 0 && !ends_the_talk(status)) {
			show_refusal(cli, err);
			status = FL_OK;
		}
	}
	fl_text_free(&text);
	if (status >= 0)
		say_what_next(cli, b);
	return status;
}

/* ---- begin ----------------------------------------------------------------------------------------------------- */

/* Shows numbered names, takes a number or a name; NULL at the end of input. */
static const char *choose(fl_cli *cli, fl_talk *talk, const char *what, const char *const *names,
                          const char *const *notes, size_t count) {
	char prompt[80];
	const char *line;
	for (size_t i = 0; i < count; i++)
		fprintf(cli->out, "  %zu  %-24s %s\n", i + 1, names[i], notes[i]);
	snprintf(prompt, sizeof prompt, "%s, number or name > ", what);
	while (fl_talk_line(talk, prompt, &line)) {
		char answer[128], *rest;
		if (!fl_text_trim(line, answer, sizeof answer))
			continue;
		unsigned long number = strtoul(answer, &rest, 10);
		if (*answer && *rest == '\0' && number >= 1 && number <= count)
			return names[number - 1];
		for (size_t i = 0; i < count; i++)
			if (strcmp(names[i], answer) == 0)
				return names[i];
		fprintf(cli->out, "  not taken: type a number from 1 to %zu, or a name as it stands in the list\n", count);
	}
	return NULL;
}

static fl_status choose_instrument(fl_cli *cli, bench *b, fl_talk *talk, fl_error *err) {
	if (cli->values[FL_OPT_INSTRUMENT])
		return find_instrument(b, cli->values[FL_OPT_INSTRUMENT], err);
	const char *names[64], *notes[64];
	size_t count = b->stock.instrument_count < 64 ? b->stock.instrument_count : 64;
	if (count == 0)
		return fl_fail(err, FL_E_NOT_FOUND, "the stock in %s has no instrument: foundleft stock add instrument",
		               cli->stock);
	for (size_t i = 0; i < count; i++) {
		names[i] = b->stock.instruments[i].tag;
		notes[i] = b->stock.instruments[i].serial;
	}
	const char *tag = choose(cli, talk, "Instrument", names, notes, count);
	return tag == NULL ? fl_fail(err, FL_E_STATE, "no instrument was chosen") : find_instrument(b, tag, err);
}

/* Names to choose a procedure from. */
typedef struct menu {
	fl_arena arena;
	const char *ids[64], *titles[64];
	size_t count;
} menu;

static fl_status put_on_menu(void *context, const fl_procedure *procedure, fl_error *err) {
	menu *m = context;
	if (m->count == sizeof m->ids / sizeof m->ids[0])
		return FL_OK;
	m->ids[m->count] = fl_arena_strdup(&m->arena, procedure->id);
	m->titles[m->count] = fl_arena_strdup(&m->arena, procedure->title);
	if (m->ids[m->count] == NULL || m->titles[m->count] == NULL)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	m->count++;
	return FL_OK;
}

static fl_status choose_procedure(fl_cli *cli, bench *b, fl_talk *talk, fl_error *err) {
	if (cli->values[FL_OPT_PROCEDURE])
		return load_procedure(cli, cli->values[FL_OPT_PROCEDURE], &b->procedure, err);
	menu m = {0};
	fl_status status = fl_place_each_procedure(cli, put_on_menu, &m, err);
	if (status >= 0 && m.count == 0)
		status = fl_fail(err, FL_E_NOT_FOUND, "no procedure is installed in %s/templates nor in %s/templates",
		                 cli->home, cli->data);
	if (status >= 0) {
		const char *id = choose(cli, talk, "Procedure", m.ids, m.titles, m.count);
		status = id == NULL ? fl_fail(err, FL_E_STATE, "no procedure was chosen")
		                    : load_procedure(cli, id, &b->procedure, err);
	}
	fl_arena_free(&m.arena);
	return status;
}

fl_status fl_command_begin(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	bench b = {0};
	fl_talk *talk = NULL;
	fl_status status = load_stock(cli, &b.stock, err);
	if (status >= 0)
		status = fl_talk_new(&talk, cli, err);
	if (status >= 0)
		status = choose_instrument(cli, &b, talk, err);
	if (status >= 0)
		status = choose_procedure(cli, &b, talk, err);
	if (status >= 0)
		status = open_session(cli, &b, FL_SOURCE_KEYBOARD, fl_day_of(fl_cli_now()), err);
	if (status >= 0)
		status = converse(cli, &b, talk, err);
	fl_talk_free(talk);
	bench_free(&b);
	return status;
}

/* ---- resume ---------------------------------------------------------------------------------------------------- */

static fl_status find_open_session(const fl_cli *cli, char path[FL_PATH_SIZE], fl_error *err) {
	fl_arena arena = {0};
	char folder[FL_PATH_SIZE], **paths;
	size_t count, open = 0;
	fl_text names = {0};
	fl_status status = fl_place_join(folder, cli->home, "sessions", err);
	if (status >= 0)
		status = fl_place_files(folder, ".flj", &arena, &paths, &count, err);
	for (size_t i = 0; status >= 0 && i < count; i++) {
		fl_session session = {0};
		fl_error local = {0};
		char head[FL_DIGEST_HEX_SIZE];
		bool torn;
		if (fl_journal_read(cli->io, paths[i], &session, head, &torn, &local) >= 0 && !session.closed) {
			snprintf(path, FL_PATH_SIZE, "%s", paths[i]);
			fl_text_printf(&names, "%s%s", open++ ? ", " : "", strrchr(paths[i], '/') + 1);
		}
		fl_session_free(&session);
	}
	if (status >= 0 && open == 0)
		status = fl_fail(err, FL_E_NOT_FOUND, "there is no open session in %s", folder);
	if (status >= 0 && open > 1)
		status = fl_fail(err, FL_E_USAGE, "several sessions are open, name one: %s", names.data ? names.data : "");
	fl_text_free(&names);
	fl_arena_free(&arena);
	return status;
}

static fl_status record_resume(bench *b, fl_error *err) {
	if (b->journal.session.closed)
		return fl_fail_at(err, FL_E_STATE, (fl_place){.file = b->path},
		                  "the session is closed: there is nothing to go on with; assess and certify work from it");
	fl_event event = {.at = bench_clock(b), .verb = FL_V_RESUME};
	event.fields[FL_F_PROGRAM] = FOUNDLEFT_VERSION;
	event.fields[FL_F_SOURCE] = fl_source_word(FL_SOURCE_KEYBOARD);
	return fl_journal_commit(&b->journal, &event, err);
}

fl_status fl_command_resume(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	bench b = {0};
	fl_stock own = {0};
	fl_talk *talk = NULL;
	fl_status status = cli->argument_count ? fl_place_journal(cli, cli->arguments[0], b.path, err)
	                                       : find_open_session(cli, b.path, err);
	if (status >= 0)
		status = load_stock(cli, &b.stock, err);
	if (status >= 0)
		status = fl_journal_resume(&b.journal, cli->io, b.path, fl_cli_now(), err);
	b.journal_open = status >= 0;
	if (status >= 0)
		fl_stock_keep(&b.stock, b.journal.session.day);
	if (status >= 0)
		status = record_resume(&b, err);
	if (status >= 0)
		status = fl_session_procedure(&b.journal.session, &b.procedure, err);
	if (status >= 0)
		status = fl_session_stock(&b.journal.session, &own, err);
	if (status >= 0 && own.instrument_count == 0)
		status = fl_fail_at(err, FL_E_VALUE, (fl_place){.file = b.path}, "the journal names no instrument");
	if (status >= 0) {
		b.instrument = &own.instruments[0];
		status = fl_talk_new(&talk, cli, err);
	}
	if (status >= 0)
		status = converse(cli, &b, talk, err);
	fl_talk_free(talk);
	bench_free(&b);
	fl_stock_free(&own);
	return status;
}

/* ---- replay ---------------------------------------------------------------------------------------------------- */

typedef struct replay {
	fl_cli *cli;
	bench *b;
	const char *file;
	int line;
	fl_day day;
	bool has_procedure;
	size_t answers;
} replay;

static fl_place replay_place(const replay *r) {
	return (fl_place){.file = r->file, .line = r->line};
}

static fl_status start_entry(replay *r, fl_error *err) {
	bench *b = r->b;
	if (!r->has_procedure || b->instrument == NULL)
		return fl_fail_at(err, FL_E_SYNTAX, replay_place(r),
		                  "an answer before !procedure ID and !instrument TAG: put both at the head of the file");
	if (r->day == FL_NO_DAY)
		r->day = fl_day_of(bench_clock(b));
	fl_status status = open_session(r->cli, b, FL_SOURCE_REPLAY, r->day, err);
	if (status < 0)
		return status;
	fl_entry_setup setup = setup_of(r->cli, b);
	return fl_entry_new(&b->entry, &setup, err);
}

static fl_status seconds_of(const replay *r, const char *text, int64_t *seconds, fl_error *err) {
	char *rest;
	long value = strtol(text, &rest, 10);
	if (rest == text || *rest || value < 0 || value > 86400 * 31)
		return fl_fail_at(err, FL_E_SYNTAX, replay_place(r), "`%s` is no number of seconds", text);
	*seconds = value;
	return FL_OK;
}

static fl_status feed_answer(replay *r, const char *answer, fl_error *err) {
	bench *b = r->b;
	fl_text say = {0}, prompt = {0};
	fl_error inner = {0};
	if (b->entry == NULL) {
		fl_status status = start_entry(r, err);
		if (status < 0)
			return status;
	}
	if (fl_entry_finished(b->entry))
		return fl_fail_at(err, FL_E_STATE, replay_place(r), "the session is closed already: `%s` is one line too many",
		                  answer);
	fl_status status = fl_entry_line(b->entry, answer, &say, &inner);
	r->answers++;
	b->declared += b->pace_s;
	if (status < 0) {
		char line[1400];
		fl_entry_prompt(b->entry, &prompt);
		const char *question = prompt.data ? strrchr(prompt.data, '\n') : NULL;
		question = question ? question + 1 : prompt.data ? prompt.data : "";
		fl_fail_at(err, status, replay_place(r), "%s (asked was: %s)", fl_error_line(&inner, line, 300), question);
	}
	fl_text_free(&say);
	fl_text_free(&prompt);
	return status;
}

static fl_status direct(replay *r, char *text, fl_error *err) {
	char *argument = text + strcspn(text, " \t");
	if (*argument)
		*argument++ = '\0';
	argument += strspn(argument, " \t");
	bench *b = r->b;
	int64_t seconds = 0;
	fl_error inner = {0};
	fl_status status = FL_OK;
	if (strcmp(text, "procedure") == 0) {
		if (r->has_procedure)
			return fl_fail_at(err, FL_E_SYNTAX, replay_place(r), "a second !procedure");
		status = load_procedure(r->cli, argument, &b->procedure, err);
		r->has_procedure = status >= 0;
	} else if (strcmp(text, "instrument") == 0) {
		status = find_instrument(b, argument, &inner);
	} else if (strcmp(text, "day") == 0) {
		status = fl_day_parse(argument, &r->day, &inner);
	} else if (strcmp(text, "clock") == 0) {
		status = fl_utc_parse(argument, &b->declared, &inner);
		b->is_declared = status >= 0;
	} else if (strcmp(text, "pace") == 0) {
		status = seconds_of(r, argument, &b->pace_s, err);
	} else if (strcmp(text, "wait") == 0) {
		status = seconds_of(r, argument, &seconds, err);
		b->declared += seconds;
	} else if (strcmp(text, "empty") == 0) {
		status = feed_answer(r, "", err);
	} else {
		return fl_fail_at(err, FL_E_SYNTAX, replay_place(r),
		                  "`!%s` is not known: !procedure, !instrument, !day, !clock, !pace, !wait, !empty are", text);
	}
	return inner.status < 0 ? fl_fail_at(err, status, replay_place(r), "%s", inner.message) : status;
}

static fl_status replay_lines(replay *r, char *text, fl_error *err) {
	fl_status status = FL_OK;
	for (char *next; status >= 0 && text != NULL; text = next) {
		next = strchr(text, '\n');
		if (next != NULL)
			*next++ = '\0';
		r->line++;
		text[strcspn(text, "\r")] = '\0';
		text += strspn(text, " \t");
		if (*text == '\0' || *text == '#')
			continue;
		status = *text == '!' ? direct(r, text + 1, err) : feed_answer(r, text, err);
	}
	return status;
}

fl_status fl_command_replay(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	bench b = {0};
	fl_arena arena = {0};
	char *text;
	size_t length;
	replay r = {.cli = cli, .b = &b, .file = cli->arguments[0], .day = FL_NO_DAY};
	fl_status status = fl_file_read(cli->io, r.file, 16 << 20, &arena, &text, &length, err);
	if (status >= 0 && !fl_utf8_valid(text, length))
		status = fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = r.file}, "the file is not UTF-8 text");
	if (status >= 0)
		status = load_stock(cli, &b.stock, err);
	if (status >= 0)
		status = replay_lines(&r, text, err);
	if (b.journal_open) {
		fprintf(cli->out, "%zu answers replayed, %d journal lines\n", r.answers, b.journal.session.last_sequence);
		say_what_next(cli, &b);
	}
	bench_free(&b);
	fl_arena_free(&arena);
	return status;
}

/* ---- import ---------------------------------------------------------------------------------------------------- */

static fl_status import_rows(fl_cli *cli, bench *b, const char *csv, const char *file, fl_error *err) {
	fl_day day;
	fl_import_options options = {.as_found = cli->values[FL_OPT_AS_FOUND],
	                             .as_left = cli->values[FL_OPT_AS_LEFT],
	                             .performed_by = cli->values[FL_OPT_PERFORMED_BY],
	                             .decision_reason = cli->values[FL_OPT_REASON]};
	fl_text say = {0};
	fl_status status = fl_entry_import_day(csv, file, &options, &day, err);
	if (status >= 0)
		status = open_session(cli, b, FL_SOURCE_IMPORT, day, err);
	if (status >= 0) {
		fl_entry_setup setup = setup_of(cli, b);
		status = fl_entry_import(&setup, csv, file, &options, &say, err);
	}
	if (say.length)
		fputs(say.data, cli->out);
	fl_text_free(&say);
	/* Half a table is no session, and the table still has everything. */
	if (status < 0 && b->journal_open)
		cli->io->unlink(cli->io->self, b->path);
	return status;
}

fl_status fl_command_import(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	if (cli->values[FL_OPT_PROCEDURE] == NULL || cli->values[FL_OPT_INSTRUMENT] == NULL ||
	    cli->values[FL_OPT_PERFORMED_BY] == NULL)
		return fl_fail(
		    err, FL_E_USAGE,
		    "import needs --procedure ID, --instrument TAG and --performed-by NAME; see foundleft help import");
	bench b = {0};
	fl_arena arena = {0};
	char *csv;
	size_t length;
	const char *file = cli->arguments[0];
	fl_status status = fl_file_read(cli->io, file, 16 << 20, &arena, &csv, &length, err);
	if (status >= 0 && (!fl_utf8_valid(csv, length) || memchr(csv, '\0', length) != NULL))
		status = fl_fail_at(err, FL_E_SYNTAX, (fl_place){.file = file}, "the file is not UTF-8 text");
	if (status >= 0)
		status = load_stock(cli, &b.stock, err);
	if (status >= 0)
		status = load_procedure(cli, cli->values[FL_OPT_PROCEDURE], &b.procedure, err);
	if (status >= 0)
		status = find_instrument(&b, cli->values[FL_OPT_INSTRUMENT], err);
	if (status >= 0)
		status = import_rows(cli, &b, csv, file, err);
	if (status >= 0)
		say_what_next(cli, &b);
	bench_free(&b);
	fl_arena_free(&arena);
	return status;
}
