/* command_book.c - book: found it, put sessions in, copies, bundles, export, trace, numbers.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "book.h"
#include "report_parts.h"

/* Shown on a terminal while it lasts; "stopped" on an interrupt. */
static fl_status ended(fl_progress *progress, fl_status status) {
	fl_progress_end(progress);
	return status;
}

static const char *argument(const fl_cli *cli, int index) {
	return index < cli->argument_count ? cli->arguments[index] : NULL;
}

/* ---- found, add ---- */

static fl_status book_found(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	char path[FL_PATH_SIZE], folder[FL_PATH_SIZE], name[96], prefix[13];
	const char *given = argument(cli, 1);
	fl_store *store = NULL;
	fl_founding founding;
	fl_status status = fl_book_path(cli, path, err);
	if (status >= 0)
		status = fl_place_join(folder, cli->home, "book", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, folder, err);
	if (status < 0)
		return status;
	fl_book_names(given, name, prefix);
	const char *wanted = cli->values[FL_OPT_PREFIX] ? cli->values[FL_OPT_PREFIX] : prefix;
	status = fl_book_founding(given, wanted, &founding, err);
	if (status >= 0)
		status = fl_store_found(path, &founding, &store, err);
	if (status >= 0)
		fprintf(cli->out, "A record book begins: %s, for %s, numbers %s-...\n", path, given, wanted);
	fl_store_close(store);
	return status;
}

static fl_status book_add(fl_cli *cli, fl_exit *code, fl_error *err) {
	fl_status first = FL_OK;
	for (int i = 1; i < cli->argument_count && !fl_progress_stopped(); i++) {
		char path[FL_PATH_SIZE], line[1400];
		fl_book_entry entry;
		fl_error local = {0};
		fl_status status = fl_place_journal(cli, cli->arguments[i], path, &local);
		if (status >= 0)
			status = fl_book_add(cli, path, &entry, &local);
		if (status >= 0) {
			fprintf(cli->out, "%s: in the record book as %s%s\n", path, entry.number, entry.added ? "" : " already");
		} else if (first >= 0) {
			first = status;
			*err = local;
		} else {
			fprintf(cli->err, "foundleft: %s\n", fl_error_line(&local, line, sizeof line));
		}
	}
	(void)code;
	return first;
}

/* ---- copies ---- */

static fl_status book_backup(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_progress progress;
	char content[FL_DIGEST_HEX_SIZE] = "";
	fl_status status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status < 0)
		return status;
	fl_progress_begin(&progress, cli, "copying");
	status = ended(&progress, fl_store_backup(store, cli->io, argument(cli, 1), &progress.watch, err));
	if (status >= 0)
		status = fl_store_content(store, content, err);
	if (status >= 0)
		fprintf(cli->out, "%s: a copy of the whole record book\n  content %s\n", argument(cli, 1), content);
	fl_store_close(store);
	return status;
}

static fl_status own_name(const char *backup, char name[96], fl_error *err) {
	fl_store *store = NULL;
	fl_arena arena = {0};
	fl_origin *origins = NULL;
	size_t count = 0;
	fl_status status = fl_store_open(backup, FL_STORE_READ, 10000, &store, err);
	if (status >= 0)
		status = fl_store_origins(store, &arena, &origins, &count, err);
	snprintf(name, 96, "%s", status >= 0 && count > 0 ? origins[0].name : "record book");
	fl_arena_free(&arena);
	fl_store_close(store);
	return status;
}

static fl_status book_restore(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	char path[FL_PATH_SIZE], folder[FL_PATH_SIZE], name[96];
	fl_store *store = NULL;
	fl_founding founding;
	fl_progress progress;
	const char *prefix = cli->values[FL_OPT_PREFIX];
	if (prefix == NULL)
		return fl_fail(err, FL_E_USAGE,
		               "restore needs --prefix: numbers may have been given out after the backup was made, so the book "
		               "goes on with a prefix of its own, such as QHB");
	fl_status status = fl_book_path(cli, path, err);
	if (status >= 0 && access(path, F_OK) == 0)
		return fl_fail(err, FL_E_EXISTS,
		               "%s is there: move it away first, it may hold sessions that the backup has not got", path);
	if (status >= 0)
		status = fl_place_join(folder, cli->home, "book", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, folder, err);
	if (status >= 0)
		status = own_name(argument(cli, 1), name, err);
	if (status >= 0)
		status = fl_book_founding(name, prefix, &founding, err);
	if (status < 0)
		return status;
	fl_progress_begin(&progress, cli, "restoring");
	status =
	    ended(&progress, fl_store_restore(argument(cli, 1), cli->io, path, &founding, &progress.watch, &store, err));
	if (status >= 0)
		fprintf(
		    cli->out,
		    "%s: restored and verified; it goes on with numbers %s-...\nSessions closed since the backup: foundleft "
		    "book add HOME/sessions/*.flj puts in what is missing.\n",
		    path, prefix);
	fl_store_close(store);
	return status;
}

/* ---- bundles ---- */

static fl_status book_bundle(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_progress progress;
	fl_day since = FL_NO_DAY;
	fl_status status = FL_OK;
	if (cli->values[FL_OPT_SINCE])
		status = fl_day_parse(cli->values[FL_OPT_SINCE], &since, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status < 0)
		return status;
	fl_progress_begin(&progress, cli, "bundling");
	status = ended(&progress, fl_store_bundle(store, cli->io, argument(cli, 1), since, &progress.watch, err));
	fl_arena arena = {0};
	fl_origin *origins;
	size_t count;
	if (status >= 0)
		status = fl_store_origins(store, &arena, &origins, &count, err);
	if (status >= 0)
		fprintf(cli->out,
		        "%s: records of %s for an office\n  origin %s\n  tell the office the origin by another way "
		        "than the bundle\n",
		        argument(cli, 1), origins[0].name, origins[0].digest);
	fl_arena_free(&arena);
	fl_store_close(store);
	return status;
}

/* Is that the origin which the person was told? Eight digits of it at least. */
static bool is_accepted(const fl_cli *cli, const char *origin) {
	const char *said = cli->values[FL_OPT_ACCEPT];
	return said && strlen(said) >= 8 && strncmp(origin, said, strlen(said)) == 0;
}

static fl_status open_office(const fl_cli *cli, fl_store **store, fl_error *err) {
	fl_error local = {0};
	fl_status status = fl_book_open(cli, FL_STORE_WRITE, store, &local);
	if (status == FL_E_NOT_FOUND)
		return fl_fail(err, status,
		               "there is no record book to take the bundle into: found one with foundleft book found NAME");
	if (status < 0 && err)
		*err = local;
	return status;
}

static fl_status book_take(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_progress progress;
	fl_intake intake = {0};
	fl_status status = open_office(cli, &store, err);
	if (status < 0)
		return status;
	fl_progress_begin(&progress, cli, "taking in");
	status = fl_store_take_in(store, argument(cli, 1), false, &progress.watch, &intake, err);
	if (status == FL_ASK && is_accepted(cli, intake.origin)) {
		*err = (fl_error){0};
		status = fl_store_take_in(store, argument(cli, 1), true, &progress.watch, &intake, err);
	} else if (status == FL_ASK) {
		*err = (fl_error){0};
		status = fl_fail(err, FL_E_STATE,
		                 "%s was never seen here, nothing was changed. Its origin is %s: ask the ship by another way, "
		                 "and if it says the same, take it with --accept %.12s",
		                 intake.name, intake.origin, intake.origin);
	}
	fl_progress_end(&progress);
	if (status >= 0)
		fprintf(cli->out, "%s: from %s; %lld new entries, %lld known already, %lld journals and papers new\n",
		        argument(cli, 1), intake.name, (long long)intake.entries_new, (long long)intake.entries_known,
		        (long long)intake.bytes_new);
	fl_store_close(store);
	return status;
}

/* ---- export ---- */

static fl_status write_out(void *self, const char *bytes, size_t length, fl_error *err) {
	FILE *file = self;
	return fwrite(bytes, 1, length, file) == length ? FL_OK : fl_io_fail(err, "writing", "the export", errno);
}

/* --out, written beside and renamed when it is whole; else standard output. */
static fl_status open_out(const fl_cli *cli, char beside[FL_PATH_SIZE + 8], FILE **out, fl_error *err) {
	const char *path = cli->values[FL_OPT_OUT];
	*out = cli->out;
	if (path == NULL)
		return FL_OK;
	if (strlen(path) >= FL_PATH_SIZE)
		return fl_fail(err, FL_E_VALUE, "the path of --out is longer than %d characters", FL_PATH_SIZE - 1);
	if (access(path, F_OK) == 0)
		return fl_fail(err, FL_E_EXISTS, "%s exists and is not overwritten: give another --out", path);
	snprintf(beside, FL_PATH_SIZE + 8, "%s.part", path);
	*out = fopen(beside, "wx");
	return *out ? FL_OK : fl_io_fail(err, "creating", beside, errno);
}

static fl_status close_out(const fl_cli *cli, const char *beside, FILE *out, fl_status status, fl_error *err) {
	const char *path = cli->values[FL_OPT_OUT];
	if (path == NULL || out == NULL)
		return status;
	bool good = fflush(out) == 0 && fsync(fileno(out)) == 0;
	good = fclose(out) == 0 && good;
	if (status >= 0 && !good)
		status = fl_io_fail(err, "writing", path, errno);
	if (status >= 0 && rename(beside, path) != 0)
		status = fl_io_fail(err, "renaming to", path, errno);
	if (status < 0)
		unlink(beside);
	else
		fprintf(cli->out, "%s: every record; the columns stand in docs/book.md\n", path);
	return status;
}

static fl_status book_export(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_progress progress;
	char beside[FL_PATH_SIZE + 8] = "";
	FILE *out = NULL;
	const char *form = argument(cli, 1);
	if (strcmp(form, "csv") != 0 && strcmp(form, "json") != 0)
		return fl_fail(err, FL_E_USAGE, "export takes csv or json, not `%s`", form);
	fl_status status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status >= 0)
		status = open_out(cli, beside, &out, err);
	if (status >= 0) {
		fl_sink sink = {write_out, out};
		fl_progress_begin(&progress, cli, "exporting");
		status = ended(&progress, strcmp(form, "csv") == 0 ? fl_store_export_csv(store, &sink, &progress.watch, err)
		                                                   : fl_store_export_json(store, &sink, &progress.watch, err));
	}
	if (out)
		status = close_out(cli, beside, out, status, err);
	fl_store_close(store);
	return status;
}

/* ---- trace ---- */

static fl_status print_fed(const fl_cli *cli, fl_store *store, const char *name, const fl_record_list *list,
                           fl_error *err) {
	fl_arena arena = {0};
	fl_status status = FL_OK;
	for (size_t i = 0; status >= 0 && i < list->count; i++) {
		const fl_record *r = &list->records[i];
		fl_paper *papers;
		size_t count;
		char day[FL_DAY_SIZE], site[FL_CELL_SIZE];
		status = fl_store_papers(store, r->digest, &arena, &papers, &count, err);
		fprintf(cli->out, "  %s  %-16s %-10s %-12s %s\n", fl_day_format(r->day, day), r->number, r->tag, r->serial,
		        fl_report_fit(r->site, 26, site));
		for (size_t k = 0; k < r->item_count; k++)
			if (strcmp(r->items[k].name, name) == 0)
				fprintf(cli->out, "      as %s, %s\n", r->items[k].kind, r->items[k].detail);
		for (size_t p = 0; status >= 0 && p < count; p++)
			fprintf(cli->out, "      certificate %s (%s)\n", papers[p].file, papers[p].stage);
	}
	fl_arena_free(&arena);
	return status;
}

static fl_status days_of(const fl_cli *cli, fl_day *from, fl_day *to, fl_error *err) {
	*from = fl_day_from_civil(1900, 1, 1);
	*to = fl_day_from_civil(2200, 12, 31);
	fl_status status = FL_OK;
	if (cli->values[FL_OPT_SINCE])
		status = fl_day_parse(cli->values[FL_OPT_SINCE], from, err);
	if (status >= 0 && cli->values[FL_OPT_UNTIL])
		status = fl_day_parse(cli->values[FL_OPT_UNTIL], to, err);
	return status;
}

static fl_status book_trace(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_record_list list = {0};
	fl_day from, to;
	const char *name = argument(cli, 1);
	fl_status status = days_of(cli, &from, &to, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status >= 0)
		status = fl_store_fed_by(store, NULL, name, from, to, &list, err);
	if (status >= 0) {
		fprintf(cli->out, "%s fed %zu record%s\n", name, list.count, list.count == 1 ? "" : "s");
		status = print_fed(cli, store, name, &list, err);
	}
	fl_record_list_free(&list);
	fl_store_close(store);
	return status;
}

/* ---- numbers, and the book as a whole -------------------------------------------------------------------------------
 */

static fl_status book_numbers(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *store = NULL;
	fl_arena arena = {0};
	fl_unused_number *unused;
	size_t count;
	fl_status status = fl_book_open(cli, FL_STORE_READ, &store, err);
	if (status >= 0)
		status = fl_store_unused(store, &arena, &unused, &count, err);
	if (status >= 0 && count == 0)
		fprintf(cli->out, "Every number given out stands for a record.\n");
	else if (status >= 0)
		fprintf(cli->out, "Given out and never used (the work that wanted them failed; nobody else gets them)\n");
	for (size_t i = 0; status >= 0 && i < count; i++) {
		char at[FL_UTC_SIZE];
		fprintf(cli->out, "  %-18s %s  for %s\n", unused[i].number, fl_utc_format(unused[i].at, at), unused[i].purpose);
	}
	fl_arena_free(&arena);
	fl_store_close(store);
	return status;
}

static fl_status book_check(fl_cli *cli, fl_exit *code, fl_error *err) {
	char path[FL_PATH_SIZE];
	fl_status status = fl_book_path(cli, path, err);
	return status < 0 ? status : fl_book_check(cli, path, code, err);
}

/* ---- the words ---- */

typedef struct word {
	const char *name, *needs; /* what stands behind it */
	int least, most;
	fl_status (*run)(fl_cli *cli, fl_exit *code, fl_error *err);
} word;

static const word words[] = {
    {"found", "NAME", 1, 1, book_found},      {"add", "JOURNAL...", 1, 10000, book_add},
    {"check", "", 0, 0, book_check},          {"backup", "FILE", 1, 1, book_backup},
    {"restore", "FILE", 1, 1, book_restore},  {"export", "csv or json", 1, 1, book_export},
    {"bundle", "FILE", 1, 1, book_bundle},    {"take", "FILE", 1, 1, book_take},
    {"trace", "LOT-OR-ID", 1, 1, book_trace}, {"numbers", "", 0, 0, book_numbers},
};

fl_status fl_command_book(fl_cli *cli, fl_exit *code, fl_error *err) {
	for (size_t i = 0; i < sizeof words / sizeof *words; i++) {
		int count = cli->argument_count - 1;
		if (strcmp(words[i].name, cli->arguments[0]) != 0)
			continue;
		if (count < words[i].least || count > words[i].most)
			return fl_fail(err, FL_E_USAGE, "book %s takes %s; see foundleft help book", words[i].name,
			               *words[i].needs ? words[i].needs : "nothing else");
		return words[i].run(cli, code, err);
	}
	return fl_fail(err, FL_E_USAGE, "book takes one of the words that foundleft help book shows, not `%s`",
	               cli->arguments[0]);
}
