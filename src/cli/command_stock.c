/* command_stock.c - stock: add and renew by guided questions, list, check, import, export; the health of an oil's lot.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "book.h"
#include "foundleft/shelf.h"
#include "foundleft/trend.h"
#include "shelves.h"
#include "talk.h"

#define SOON_DAYS 60
#define ANSWERS_MOST ((size_t)1 << 20)

/* ---- add and renew ----------------------------------------------------------------------------------------------- */

static fl_status begin(const fl_shelves *s, const char *word, const char *name, fl_shelf **out, fl_error *err) {
	if (strcmp(word, "renew") == 0)
		return fl_shelf_renew(out, name, &s->stock, err);
	for (int kind = 0; kind < FL_SHELF_KINDS; kind++)
		if (strcmp(name, fl_shelf_kind_word((fl_shelf_kind)kind)) == 0)
			return fl_shelf_add(out, (fl_shelf_kind)kind, &s->stock, err);
	return fl_fail(err, FL_E_USAGE, "stock add takes oil, equipment or instrument, not `%.60s`", name);
}

static fl_status store(fl_cli *cli, const fl_shelves *s, fl_shelf *shelf, fl_error *err) {
	char path[FL_PATH_SIZE];
	if (!fl_shelf_agreed(shelf)) {
		fprintf(cli->out, "Nothing is written.\n");
		return FL_OK;
	}
	fl_status status = fl_shelf_store(cli->io, cli->stock, s->paths, s->count, fl_shelf_kind_of(shelf),
	                                  fl_shelf_block(shelf), path, err);
	if (status >= 0)
		fprintf(cli->out, "%s %s is in %s\n", fl_shelf_kind_word(fl_shelf_kind_of(shelf)), fl_shelf_name(shelf), path);
	return status;
}

static void show_refusal(const fl_cli *cli, fl_error *err) {
	char line[1400], text[1440];
	fl_text folded = {0};
	snprintf(text, sizeof text, "  not taken: %s\n", fl_error_line(err, line, sizeof line));
	fl_talk_fold(&folded, text, fl_cli_columns(cli));
	fputs(folded.data ? folded.data : "", cli->out);
	fl_text_free(&folded);
	*err = (fl_error){0};
}

static fl_status converse(fl_cli *cli, fl_shelf *shelf, fl_talk *talk, fl_error *err) {
	fl_text text = {0};
	fl_status status = FL_OK;
	const char *line;
	while (status >= 0 && !fl_shelf_finished(shelf)) {
		fl_text_clear(&text);
		fl_shelf_prompt(shelf, &text);
		if (!fl_talk_line(talk, text.data ? text.data : "> ", &line)) {
			fputc('\n', cli->out);
			break;
		}
		fl_text_clear(&text);
		status = fl_shelf_line(shelf, line, &text, err);
		fl_text folded = {0};
		fl_talk_fold(&folded, text.data ? text.data : "", fl_cli_columns(cli));
		fputs(folded.data ? folded.data : "", cli->out);
		fl_text_free(&folded);
		if (status < 0 && status != FL_E_MEMORY) {
			show_refusal(cli, err);
			status = FL_OK;
		}
	}
	fl_text_free(&text);
	return status;
}

static fl_status ask(fl_cli *cli, fl_error *err) {
	fl_shelves s;
	fl_shelf *shelf = NULL;
	fl_talk *talk = NULL;
	if (cli->argument_count != 2)
		return fl_fail(err, FL_E_USAGE,
		               "write stock add oil, equipment or instrument; or stock renew and a lot, id or tag");
	fl_status status = fl_shelves_load(cli, &s, err);
	if (status < 0)
		return status;
	status = begin(&s, cli->arguments[0], cli->arguments[1], &shelf, err);
	if (status >= 0)
		status = fl_talk_new(&talk, cli, err);
	if (status >= 0)
		status = converse(cli, shelf, talk, err);
	if (status >= 0)
		status = store(cli, &s, shelf, err);
	fl_talk_free(talk);
	fl_shelf_free(shelf);
	fl_shelves_free(&s);
	return status;
}

/* ---- replay ------------------------------------------------------------------------------------------------------ */

typedef struct fl_answers {
	fl_cli *cli;
	const char *file;
	int line;
	fl_shelves shelves;
	fl_shelf *shelf;
} fl_answers;

static fl_place answers_place(const fl_answers *a) {
	return (fl_place){.file = a->file, .line = a->line};
}

static fl_status answers_end(fl_answers *a, fl_error *err) {
	fl_status status = FL_OK;
	if (a->shelf && !fl_shelf_finished(a->shelf))
		status = fl_fail_at(err, FL_E_SYNTAX, answers_place(a),
		                    "the answers about %s end too early: nothing is written", fl_shelf_name(a->shelf));
	else if (a->shelf)
		status = store(a->cli, &a->shelves, a->shelf, err);
	fl_shelf_free(a->shelf);
	a->shelf = NULL;
	fl_shelves_free(&a->shelves);
	return status;
}

/* "!add oil", "!renew TH-7": what was asked about before is put into stock first. */
static fl_status answers_begin(fl_answers *a, const char *text, fl_error *err) {
	const char *name = text + strcspn(text, " ");
	bool adds = strncmp(text, "add ", 4) == 0;
	if (!adds && strncmp(text, "renew ", 6) != 0)
		return fl_fail_at(err, FL_E_SYNTAX, answers_place(a), "`!%.40s` is not known: !add, !renew and !empty are",
		                  text);
	fl_status status = answers_end(a, err);
	if (status >= 0)
		status = fl_shelves_load(a->cli, &a->shelves, err);
	return status < 0 ? status : begin(&a->shelves, adds ? "add" : "renew", name + strspn(name, " "), &a->shelf, err);
}

static fl_status feed(fl_answers *a, const char *answer, fl_error *err) {
	fl_text say = {0}, prompt = {0};
	fl_error inner = {0};
	char line[1400];
	if (!a->shelf)
		return fl_fail_at(err, FL_E_SYNTAX, answers_place(a), "an answer before !add or !renew: put one at the head");
	fl_shelf_prompt(a->shelf, &prompt);
	const char *question = prompt.data ? strrchr(prompt.data, '\n') : NULL;
	question = question ? question + 1 : prompt.data ? prompt.data : "";
	fl_status status = fl_shelf_finished(a->shelf) ? fl_fail(&inner, FL_E_STATE, "one line too many")
	                                               : fl_shelf_line(a->shelf, answer, &say, &inner);
	if (status < 0)
		fl_fail_at(err, status, answers_place(a), "%s (asked was: %.120s)", fl_error_line(&inner, line, 300), question);
	fl_text_free(&say);
	fl_text_free(&prompt);
	return status;
}

static fl_status answers_line(fl_answers *a, char *line, fl_error *err) {
	line[strcspn(line, "\r")] = '\0';
	if (*line == '\0' || *line == '#')
		return FL_OK;
	if (strcmp(line, "!empty") == 0)
		return feed(a, "", err);
	return *line == '!' ? answers_begin(a, line + 1, err) : feed(a, line, err);
}

static fl_status replay(fl_cli *cli, fl_error *err) {
	fl_arena arena = {0};
	char *text;
	size_t length;
	if (cli->argument_count != 2)
		return fl_fail(err, FL_E_USAGE, "stock replay takes one file of answers");
	fl_answers a = {.cli = cli, .file = cli->arguments[1]};
	fl_status status = fl_file_read(cli->io, a.file, ANSWERS_MOST, &arena, &text, &length, err);
	while (status >= 0 && text && *text) {
		char *end = text + strcspn(text, "\n"), *next = *end ? end + 1 : end;
		*end = '\0';
		a.line++;
		status = answers_line(&a, text, err);
		text = next;
	}
	if (status >= 0)
		status = answers_end(&a, err);
	fl_shelf_free(a.shelf);
	fl_shelves_free(&a.shelves);
	fl_arena_free(&arena);
	return status;
}

/* ---- list and check ---------------------------------------------------------------------------------------------- */

static fl_status day_of(const fl_cli *cli, fl_day *day, fl_error *err) {
	*day = fl_day_of(fl_cli_now());
	return cli->values[FL_OPT_ON] ? fl_day_parse(cli->values[FL_OPT_ON], day, err) : FL_OK;
}

static fl_status soon_of(const fl_cli *cli, int *days, fl_error *err) {
	const char *text = cli->values[FL_OPT_SOON];
	char *rest;
	*days = SOON_DAYS;
	if (!text)
		return FL_OK;
	long value = strtol(text, &rest, 10);
	if (rest == text || *rest || value < 0 || value > 3660)
		return fl_fail(err, FL_E_USAGE, "--soon takes a number of days from 0 to 3660, not `%s`", text);
	*days = (int)value;
	return FL_OK;
}

static void print_item(const fl_cli *cli, const fl_dated *item, fl_day today, int soon) {
	char day[FL_DAY_SIZE];
	int left = item->last - today;
	fprintf(cli->out, "  %-18s %-12s %-20s %s  ", item->what, item->name, item->detail, fl_day_format(item->last, day));
	if (left < 0)
		fprintf(cli->out, "OUT OF DATE for %d days\n", -left);
	else if (left <= soon)
		fprintf(cli->out, "soon: %d days left\n", left);
	else
		fprintf(cli->out, "in date\n");
}

static void print_instruments(const fl_cli *cli, const fl_stock *stock) {
	fprintf(cli->out, "Instruments\n");
	for (size_t i = 0; i < stock->instrument_count; i++) {
		const fl_instrument *one = &stock->instruments[i];
		fprintf(cli->out, "  %-10s %-14s %s", one->tag, one->serial, one->site);
		if (one->interval_months > 0)
			fprintf(cli->out, ", every %d months", one->interval_months);
		fputc('\n', cli->out);
	}
}

static fl_status list(fl_cli *cli, fl_exit *code, fl_error *err) {
	fl_shelves s;
	fl_dated *items = NULL;
	fl_day today;
	size_t count = 0, past = 0, before, over = 0;
	int soon;
	fl_status status = day_of(cli, &today, err);
	if (status >= 0)
		status = soon_of(cli, &soon, err);
	if (status >= 0)
		status = fl_shelves_load(cli, &s, err);
	if (status < 0)
		return status;
	before = s.stock.oil_count + s.stock.equipment_count + s.stock.instrument_count;
	fl_stock_keep(&s.stock, today);
	before -= s.stock.oil_count + s.stock.equipment_count + s.stock.instrument_count;
	status = fl_shelves_dated(&s.stock, today, &s.arena, &items, &count, &past, err);
	if (status >= 0) {
		fprintf(cli->out, "Reference oils and measuring equipment, last day of use, soonest first\n");
		for (size_t i = 0; i < count; i++) {
			print_item(cli, &items[i], today, soon);
			over += items[i].last < today;
		}
		print_instruments(cli, &s.stock);
		if (before)
			fprintf(cli->out, "%zu earlier or later certificate%s kept for other days\n", before,
			        before == 1 ? " is" : "s are");
		if (past)
			fprintf(cli->out,
			        "%zu older lot%s kept for the sessions of their days: a newer one of the oil is in stock\n", past,
			        past == 1 ? " is" : "s are");
		if (over && cli->values[FL_OPT_STRICT])
			*code = FL_EXIT_NOT_PASS;
	}
	fl_shelves_free(&s);
	return status;
}

static fl_status check(fl_cli *cli, fl_exit *code, fl_error *err) {
	fl_shelves s;
	fl_dated *items = NULL;
	fl_day today;
	size_t count = 0, past = 0;
	int soon;
	fl_status status = day_of(cli, &today, err);
	if (status >= 0)
		status = soon_of(cli, &soon, err);
	if (status >= 0)
		status = fl_shelves_load(cli, &s, err);
	if (status < 0)
		return status;
	fprintf(cli->out,
	        "%zu stock files, %zu oil certificates, %zu equipment certificates, %zu instruments: all consistent\n",
	        s.count, s.stock.oil_count, s.stock.equipment_count, s.stock.instrument_count);
	fl_stock_keep(&s.stock, today);
	status = fl_shelves_dated(&s.stock, today, &s.arena, &items, &count, &past, err);
	for (size_t i = 0; status >= 0 && i < count; i++) {
		if (items[i].last - today <= soon)
			print_item(cli, &items[i], today, soon);
		if (items[i].last < today && cli->values[FL_OPT_STRICT])
			*code = FL_EXIT_NOT_PASS;
	}
	fl_shelves_free(&s);
	return status;
}

/* ---- import and export ------------------------------------------------------------------------------------------- */

/* An item's excerpt with its first field in the first column. */
static char *dedent(fl_arena *arena, const char *text) {
	size_t column = strspn(text, " ");
	fl_text out = {0};
	while (*text) {
		size_t length = strcspn(text, "\n"), blank = strspn(text, " "), skip = blank < column ? blank : column;
		if (skip > length)
			skip = length;
		fl_text_append(&out, text + skip, length - skip);
		fl_text_add(&out, "\n");
		text += length + (text[length] == '\n');
	}
	while (out.length > 1 && out.data[out.length - 1] == '\n' && out.data[out.length - 2] == '\n')
		out.data[--out.length] = '\0';
	char *copy = out.failed ? NULL : fl_arena_strdup(arena, out.data ? out.data : "");
	fl_text_free(&out);
	return copy;
}

typedef struct fl_piece {
	fl_shelf_kind kind;
	const char *name, *text;
	fl_day day;
} fl_piece;

/* Item `i` of all items of a stock. */
static bool piece_of(const fl_stock *stock, size_t i, fl_piece *out) {
	if (i < stock->oil_count) {
		const fl_oil *oil = &stock->oils[i];
		*out = (fl_piece){FL_SHELF_OIL, oil->lot, oil->text, oil->certified_on};
		return true;
	}
	i -= stock->oil_count;
	if (i < stock->equipment_count) {
		const fl_equipment *item = &stock->equipment[i];
		*out = (fl_piece){FL_SHELF_EQUIPMENT, item->id, item->text, item->calibrated_on};
		return true;
	}
	i -= stock->equipment_count;
	if (i >= stock->instrument_count)
		return false;
	const fl_instrument *one = &stock->instruments[i];
	*out = (fl_piece){FL_SHELF_INSTRUMENT, one->tag, one->text, one->since};
	return true;
}

/* Is the very same item there already? */
static bool is_there(fl_arena *arena, const fl_stock *stock, const fl_piece *piece) {
	fl_piece other;
	const char *text = dedent(arena, piece->text);
	for (size_t i = 0; piece_of(stock, i, &other); i++)
		if (other.kind == piece->kind && other.day == piece->day && strcmp(other.name, piece->name) == 0) {
			const char *theirs = dedent(arena, other.text);
			return text && theirs && strcmp(text, theirs) == 0;
		}
	return false;
}

static fl_status join(fl_stock *stock, const fl_piece *piece, const char *file, fl_error *err) {
	switch (piece->kind) {
	case FL_SHELF_OIL:
		return fl_stock_parse_oil(stock, piece->text, file, err);
	case FL_SHELF_EQUIPMENT:
		return fl_stock_parse_equipment(stock, piece->text, file, err);
	default:
		return fl_stock_parse_instrument(stock, piece->text, file, err);
	}
}

/* Whatever does not fit is found before anything is written. */
static fl_status try_import(fl_cli *cli, fl_shelves *s, fl_stock *taken, fl_error *err) {
	fl_piece piece;
	fl_status status = FL_OK;
	for (int i = 1; status >= 0 && i < cli->argument_count; i++) {
		fl_stock one = {0};
		status = fl_stock_load(&one, cli->io, cli->arguments[i], err);
		for (size_t n = 0; status >= 0 && piece_of(&one, n, &piece); n++)
			if (!is_there(&s->arena, &s->stock, &piece) && !is_there(&s->arena, taken, &piece)) {
				fl_error inner = {0};
				status = join(&s->stock, &piece, cli->arguments[i], &inner);
				if (status >= 0)
					status = join(taken, &piece, cli->arguments[i], &inner);
				if (status < 0)
					fl_fail_at(err, status, (fl_place){.file = cli->arguments[i]}, "%s %.60s: %s",
					           fl_shelf_kind_word(piece.kind), piece.name, inner.message);
			}
		fl_stock_free(&one);
	}
	return status;
}

static fl_status import(fl_cli *cli, fl_error *err) {
	fl_shelves s;
	fl_stock taken = {0};
	fl_piece piece;
	size_t written = 0;
	if (cli->argument_count < 2)
		return fl_fail(err, FL_E_USAGE, "stock import takes one or more stock files");
	fl_status status = fl_shelves_load(cli, &s, err);
	if (status < 0)
		return status;
	status = try_import(cli, &s, &taken, err);
	for (size_t i = 0; status >= 0 && piece_of(&taken, i, &piece); i++) {
		char path[FL_PATH_SIZE];
		char *block = dedent(&s.arena, piece.text), **paths;
		size_t count;
		status = block ? fl_place_files(cli->stock, ".yaml", &s.arena, &paths, &count, err)
		               : fl_fail(err, FL_E_MEMORY, "out of memory");
		size_t kept = 0;
		for (size_t n = 0; status >= 0 && n < count; n++)
			if (!fl_shelves_is_bench(paths[n]))
				paths[kept++] = paths[n];
		if (status >= 0)
			status = fl_shelf_store(cli->io, cli->stock, paths, kept, piece.kind, block, path, err);
		if (status >= 0)
			fprintf(cli->out, "%s %s is in %s\n", fl_shelf_kind_word(piece.kind), piece.name, path);
		written += status >= 0;
	}
	if (status >= 0 && written == 0)
		fprintf(cli->out, "All of it is in stock already.\n");
	fl_stock_free(&taken);
	fl_shelves_free(&s);
	return status;
}

static fl_status export_kind(const fl_cli *cli, fl_shelves *s, const char *folder, fl_shelf_kind kind, fl_error *err) {
	char path[FL_PATH_SIZE], file[32];
	fl_piece piece;
	fl_text text = {0}, next = {0};
	fl_status status = FL_OK;
	size_t items = 0;
	for (size_t i = 0; status >= 0 && piece_of(&s->stock, i, &piece); i++) {
		const char *block = piece.kind == kind ? dedent(&s->arena, piece.text) : "";
		if (!block)
			status = fl_fail(err, FL_E_MEMORY, "out of memory");
		if (status < 0 || !*block)
			continue;
		fl_text_clear(&next);
		status = fl_shelf_insert(text.data ? text.data : "", fl_shelf_kind_list(kind), kind, block, &next, err);
		fl_text swap = text;
		text = next;
		next = swap;
		items++;
	}
	snprintf(file, sizeof file, "%s.yaml", fl_shelf_kind_list(kind));
	if (status >= 0 && items)
		status = fl_place_join(path, folder, file, err);
	if (status >= 0 && items)
		status = fl_file_write(cli->io, path, text.data, text.length, false, err);
	if (status >= 0 && items)
		fprintf(cli->out, "%s: %zu\n", path, items);
	fl_text_free(&text);
	fl_text_free(&next);
	return status;
}

static fl_status export(fl_cli *cli, fl_error *err) {
	fl_shelves s;
	if (cli->argument_count != 2)
		return fl_fail(err, FL_E_USAGE, "stock export takes one folder");
	fl_status status = fl_shelves_load(cli, &s, err);
	if (status < 0)
		return status;
	status = fl_folder_make(cli->io, cli->arguments[1], err);
	for (int kind = 0; status >= 0 && kind < FL_SHELF_KINDS; kind++)
		status = export_kind(cli, &s, cli->arguments[1], (fl_shelf_kind)kind, err);
	fl_shelves_free(&s);
	return status;
}

/* ---- health of a lot --------------------------------------------------------------------------------------------- */

/* Records that an amendment replaced count no more. */
typedef struct fl_health_visit {
	fl_arena arena;
	const char **replaced;
	size_t count, capacity;
	fl_lot_looks looks;
} fl_health_visit;

static fl_status note_replaced(void *self, const fl_record *record, const char *journal, size_t length, fl_error *err) {
	fl_health_visit *v = self;
	(void)journal;
	(void)length;
	if (!*record->replaces)
		return FL_OK;
	const char **grown = fl_arena_grow(&v->arena, v->replaced, v->count, &v->capacity, sizeof *grown);
	const char *digest = fl_arena_strdup(&v->arena, record->replaces);
	if (!grown || !digest)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	v->replaced = grown;
	v->replaced[v->count++] = digest;
	return FL_OK;
}

static fl_status look(void *self, const fl_record *record, const char *journal, size_t length, fl_error *err) {
	fl_health_visit *v = self;
	(void)journal;
	(void)length;
	for (size_t i = 0; i < v->count; i++)
		if (strcmp(v->replaced[i], record->digest) == 0)
			return FL_OK;
	return fl_trend_look(&v->looks, record, err);
}

/* Largest relative standard uncertainty of the lot's certificate; NAN where it is not in stock. */
static double certificate_u(const fl_stock *stock, const char *lot) {
	const fl_oil *oil = fl_stock_oil(stock, lot);
	double u = NAN;
	for (size_t i = 0; oil && i < oil->table.count; i++)
		u = fmax(isnan(u) ? 0 : u, oil->table.points[i].u_nu_rel);
	return u;
}

static void print_health(const fl_cli *cli, const char *lot, const fl_lot_looks *looks, const fl_lot_health *h) {
	char a[32], b[32], day[FL_DAY_SIZE];
	fprintf(cli->out, "  %-20s %-18s %-12s %10s %10s\n", "instrument", "record", "day", "residual", "u");
	for (size_t i = 0; i < looks->count; i++) {
		const fl_lot_look *one = &looks->looks[i];
		if (strcmp(one->lot, lot) == 0)
			fprintf(cli->out, "  %-20s %-18s %-12s %8s %% %8s %%\n", one->unit, one->number,
			        fl_day_format(one->day, day), fl_decimal_format_signed(100 * one->residual, 3, false, a, sizeof a),
			        fl_decimal_format(100 * one->u, 3, b, sizeof b));
	}
	fprintf(cli->out, "Residuals are percent of span against the line through the other oils of the run.\n");
	fprintf(cli->out, "Mean %s %%, standard uncertainty %s %%",
	        fl_decimal_format_signed(100 * h->mean, 3, false, a, sizeof a),
	        fl_decimal_format(100 * h->u_mean, 3, b, sizeof b));
	if (h->dof > 0)
		fprintf(cli->out, "; chi-squared of the instruments %s with %d degree%s of freedom",
		        fl_decimal_format(h->chi_squared, 1, a, sizeof a), h->dof, h->dof == 1 ? "" : "s");
	fputc('\n', cli->out);
}

static fl_status health(fl_cli *cli, fl_exit *code, fl_error *err) {
	fl_shelves s = {0};
	fl_health_visit v = {0};
	fl_lot_health h;
	fl_store *book = NULL;
	fl_text folded = {0};
	if (cli->argument_count != 2)
		return fl_fail(err, FL_E_USAGE, "stock health takes one lot");
	const char *lot = cli->arguments[1];
	fl_status status = fl_shelves_load(cli, &s, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &book, err);
	if (status >= 0)
		status = fl_store_each(book, false, note_replaced, &v, NULL, err);
	if (status >= 0)
		status = fl_store_each(book, false, look, &v, NULL, err);
	if (status >= 0)
		status = fl_trend_lot_health(&v.looks, lot, certificate_u(&s.stock, lot), &v.arena, &h, err);
	if (status >= 0) {
		print_health(cli, lot, &v.looks, &h);
		fl_talk_fold(&folded, h.sentence, fl_cli_columns(cli));
		fprintf(cli->out, "%s\n", folded.data ? folded.data : h.sentence);
		bool fine = h.state == FL_LOT_SOUND || h.state == FL_LOT_SHAPE;
		if (cli->values[FL_OPT_STRICT] && !fine)
			*code = FL_EXIT_NOT_PASS;
	}
	fl_text_free(&folded);
	fl_store_close(book);
	fl_lot_looks_free(&v.looks);
	fl_arena_free(&v.arena);
	fl_shelves_free(&s);
	return status;
}

/* ------------------------------------------------------------------------------------------------------------------ */

fl_status fl_command_stock(fl_cli *cli, fl_exit *code, fl_error *err) {
	const char *word = cli->arguments[0];
	if (strcmp(word, "add") == 0 || strcmp(word, "renew") == 0)
		return ask(cli, err);
	if (strcmp(word, "replay") == 0)
		return replay(cli, err);
	if (strcmp(word, "list") == 0)
		return list(cli, code, err);
	if (strcmp(word, "check") == 0)
		return check(cli, code, err);
	if (strcmp(word, "import") == 0)
		return import(cli, err);
	if (strcmp(word, "export") == 0)
		return export(cli, err);
	if (strcmp(word, "health") == 0)
		return health(cli, code, err);
	return fl_fail(err, FL_E_USAGE,
	               "stock takes add, renew, replay, list, check, import, export or health, not `%.60s`", word);
}
