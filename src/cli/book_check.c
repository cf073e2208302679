/* book_check.c - long work on the book: progress, interrupts, and verifying all of it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "book.h"

/* ---- progress and interrupts ----------------------------------------------------------------------------------- */

/* The only place that a signal can reach. */
static volatile sig_atomic_t stop_asked;
static struct sigaction before_int, before_term;

static void ask_to_stop(int signal_number) {
	(void)signal_number;
	stop_asked = 1;
}

static void clear_line(const fl_cli *cli) {
	fputs("\r\033[K", cli->err);
	fflush(cli->err);
}

static bool go_on(void *self, uint64_t done, uint64_t total) {
	fl_progress *p = self;
	int percent = total ? (int)(100 * done / total) : 0;
	if (p->cli->terminal && percent != p->shown) {
		p->shown = percent;
		fprintf(p->cli->err, "\r%s, %d %%; Ctrl-C stops without harm ", p->doing, percent);
		fflush(p->cli->err);
	}
	return !stop_asked;
}

void fl_progress_begin(fl_progress *p, const fl_cli *cli, const char *doing) {
	struct sigaction action = {.sa_handler = ask_to_stop};
	sigemptyset(&action.sa_mask);
	*p = (fl_progress){.cli = cli, .doing = doing, .shown = -1, .watch = {go_on, p}};
	stop_asked = 0;
	sigaction(SIGINT, &action, &before_int);
	sigaction(SIGTERM, &action, &before_term);
}

void fl_progress_end(fl_progress *p) {
	sigaction(SIGINT, &before_int, NULL);
	sigaction(SIGTERM, &before_term, NULL);
	if (p->shown >= 0)
		clear_line(p->cli);
}

bool fl_progress_stopped(void) {
	return stop_asked != 0;
}

/* ---- what a file is ---------------------------------------------------------------------------------------------- */

bool fl_book_is_book(const char *head, size_t length) {
	return length >= 16 && memcmp(head, "SQLite format 3", 16) == 0;
}

bool fl_book_is_bundle(const char *head, size_t length) {
	static const char first[] = "foundleft-bundle\t";
	return length >= sizeof first - 1 && memcmp(head, first, sizeof first - 1) == 0;
}

/* ---- a book --------------------------------------------------------------------------------------------------------
 */

static int cores(void) {
	long count = sysconf(_SC_NPROCESSORS_ONLN);
	return count < 1 ? 1 : (int)count;
}

static void print_chains(const fl_cli *cli, fl_store *store) {
	fl_arena arena = {0};
	fl_origin *origins;
	size_t count;
	if (fl_store_origins(store, &arena, &origins, &count, NULL) >= 0)
		for (size_t i = 0; i < count; i++)
			fprintf(cli->out, "  chain of %s, numbers %s-..., %lld entries%s\n    origin %s\n    head   %s\n",
			        origins[i].name, origins[i].prefix, (long long)origins[i].entries,
			        origins[i].own ? "" : ", taken in", origins[i].digest, origins[i].head);
	fl_arena_free(&arena);
}

static void print_sums(const fl_cli *cli, fl_store *store, const fl_verified *v, const fl_recomputed *r) {
	char content[FL_DIGEST_HEX_SIZE];
	fprintf(cli->out, "  %lld entries, every digest, link, number and rule fits (%.1f MB hashed)\n",
	        (long long)v->entries, (double)v->bytes / 1e6);
	fprintf(cli->out, "  %llu records recomputed from their journals, bit for bit as they were kept\n",
	        (unsigned long long)r->records);
	if (r->without_journal > 0)
		fprintf(cli->out, "  %llu records of other ships whose journals stayed on board: not recomputed\n",
		        (unsigned long long)r->without_journal);
	if (fl_store_content(store, content, NULL) >= 0)
		fprintf(cli->out, "  content %s\n", content);
	fputs("  verdict: GOOD. Compare the content with a note of it kept elsewhere: only that\n"
	      "  shows a book that was written anew as a whole.\n",
	      cli->out);
}

static fl_status verify_all(const fl_cli *cli, fl_store *store, const char *path, fl_verified *v, fl_recomputed *r,
                            fl_error *err) {
	fl_progress progress;
	fl_progress_begin(&progress, cli, "verifying digests");
	fl_status status = fl_store_verify(store, true, &progress.watch, v, err);
	fl_progress_end(&progress);
	if (status < 0)
		return status;
	fl_progress_begin(&progress, cli, "recomputing records");
	status = fl_keep_recompute(path, cores(), &progress.watch, r, err);
	fl_progress_end(&progress);
	return status;
}

fl_status fl_book_check(const fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	fl_store *store = NULL;
	fl_verified v = {0};
	fl_recomputed r = {0};
	fl_error local = {0};
	fl_status status = fl_store_open(path, FL_STORE_READ, 10000, &store, &local);
	if (status >= 0)
		status = verify_all(cli, store, path, &v, &r, &local);
	if (status >= 0) {
		fprintf(cli->out, "%s: record book\n", path);
		print_chains(cli, store);
		print_sums(cli, store, &v, &r);
	} else if (status == FL_E_TAMPERED) {
		char line[1400];
		fprintf(cli->out,
		        "%s: record book\n  BAD   the first thing that does not fit: %s\n  verdict: BROKEN. Do not "
		        "rely on it; restore a backup (foundleft book restore).\n",
		        path, fl_error_line(&local, line, sizeof line));
		*code = FL_EXIT_TAMPERED;
		status = FL_OK;
	} else if (err) {
		*err = local;
	}
	fl_store_close(store);
	return status;
}

/* ---- a bundle ------------------------------------------------------------------------------------------------------
 */

/* Taken into a scratch book beside HOME's own, which is then verified as a book and removed. */
static fl_status open_scratch(const fl_cli *cli, char folder[FL_PATH_SIZE], char path[FL_PATH_SIZE], fl_store **out,
                              fl_error *err) {
	fl_founding founding;
	fl_status status = fl_folder_make(cli->io, cli->home, err);
	if (status >= 0)
		status = fl_place_join(folder, cli->home, "checking-XXXXXX", err);
	if (status >= 0 && mkdtemp(folder) == NULL) {
		status = fl_io_fail(err, "making the folder", folder, errno);
		folder[0] = '\0';
	}
	if (status >= 0)
		status = fl_place_join(path, folder, "scratch.flb", err);
	if (status >= 0)
		status = fl_book_founding("scratch", "X", &founding, err);
	if (status >= 0)
		status = fl_store_found(path, &founding, out, err);
	return status;
}

static void remove_scratch(const char *folder, const char *path) {
	static const char *const tails[] = {"", "-wal", "-shm", "-journal"};
	char file[FL_PATH_SIZE + 16];
	if (!*folder)
		return;
	for (size_t i = 0; i < sizeof tails / sizeof *tails; i++) {
		snprintf(file, sizeof file, "%s%s", path, tails[i]);
		unlink(file);
	}
	rmdir(folder);
}

fl_status fl_bundle_check(const fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	char folder[FL_PATH_SIZE] = "", scratch[FL_PATH_SIZE] = "", line[1400];
	fl_store *store = NULL;
	fl_intake intake = {0};
	fl_verified v = {0};
	fl_recomputed r = {0};
	fl_error local = {0};
	fl_status status = open_scratch(cli, folder, scratch, &store, &local);
	if (status >= 0)
		status = fl_store_take_in(store, path, true, NULL, &intake, &local);
	if (status >= 0)
		status = verify_all(cli, store, scratch, &v, &r, &local);
	fl_store_close(store);
	remove_scratch(folder, scratch);
	if (status == FL_E_TAMPERED || status == FL_E_SYNTAX) {
		fprintf(cli->out, "%s: bundle of records\n  BAD   %s\n  verdict: BROKEN. Do not take it in.\n", path,
		        fl_error_line(&local, line, sizeof line));
		*code = FL_EXIT_TAMPERED;
		return FL_OK;
	}
	if (status < 0) {
		if (err)
			*err = local;
		return status;
	}
	fprintf(
	    cli->out,
	    "%s: bundle of %s, %lld entries, every digest and link fits\n  %llu records recomputed, bit for bit as they "
	    "were kept; %llu came without journal\n  origin %s\n  verdict: GOOD. Compare the origin with what the ship "
	    "says before taking it in.\n",
	    path, intake.name, (long long)intake.entries_new, (unsigned long long)r.records,
	    (unsigned long long)r.without_journal, intake.origin);
	return FL_OK;
}
