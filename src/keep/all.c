/* all.c - every record of a book recomputed from its journal, in several threads.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Each thread opens the book for itself and takes every n-th entry, so that reading, unpacking and computing all go
 * side by side and nothing is handed over. A thread that finds a record that does not come out notes its place; the
 * others go on until they are past it, so that the first of the book is named whatever the threads' pace.
 */
#include "foundleft/keep.h"

#include <pthread.h>
#include <stdatomic.h>
#include <stdio.h>
#include <stdlib.h>

enum { MOST_THREADS = 64 };

/* What the threads share. */
typedef struct shared {
	const char *path;
	const fl_store_watch *watch;
	atomic_uint_fast64_t done, first; /* place of the first misfit known, UINT64_MAX if none */
	atomic_bool stop;
} shared;

typedef struct worker {
	pthread_t thread;
	shared *all;
	fl_store_part part;
	fl_recomputer *recomputer;
	fl_recomputed sum;
	fl_status status;
	fl_error err;
	uint64_t failed_at;
} worker;

static fl_status misfit(const fl_record *record, const char *where, fl_error *err) {
	return fl_fail_at(err, FL_E_TAMPERED, (fl_place){.field = record->number},
	                  "recomputing the journal of entry %lld (chain %.12s) gives something else than the book keeps: "
	                  "%.200s%s%s%s",
	                  (long long)record->sequence, record->origin, where,
	                  *record->program ? " (computed by version " : "", record->program, *record->program ? ")" : "");
}

static fl_status recompute_one(worker *w, const fl_record *record, const char *journal, size_t length, fl_error *err) {
	fl_arena arena = {0};
	fl_record computed;
	fl_error inner = {0};
	char where[FL_KEEP_WHERE_SIZE];
	fl_status status = fl_recomputer_record(w->recomputer, journal, length, record->number, &arena, &computed, &inner);
	if (status == FL_E_MEMORY)
		fl_fail(err, status, "%s", inner.message);
	else if (status < 0)
		status = misfit(record, inner.message, err);
	else if (!fl_keep_same(record, &computed, where))
		status = misfit(record, where, err);
	fl_arena_free(&arena);
	return status;
}

static fl_status visit(void *self, const fl_record *record, const char *journal, size_t length, fl_error *err) {
	worker *w = self;
	if (w->part.place >= atomic_load(&w->all->first))
		return fl_fail(err, FL_E_STATE, "an earlier one does not fit");
	atomic_fetch_add(&w->all->done, 1);
	if (!journal) {
		w->sum.without_journal++;
		return FL_OK;
	}
	w->sum.records++;
	return recompute_one(w, record, journal, length, err);
}

/* The first thread tells how far all are; the others only ask whether to go on. */
static bool go_on(void *self, uint64_t done, uint64_t total) {
	worker *w = self;
	(void)done;
	if (w->part.index == 0 && w->all->watch &&
	    !w->all->watch->go_on(w->all->watch->self, atomic_load(&w->all->done), total))
		atomic_store(&w->all->stop, true);
	return !atomic_load(&w->all->stop);
}

static void note_misfit(worker *w) {
	w->failed_at = w->part.place;
	uint64_t known = atomic_load(&w->all->first);
	while (w->failed_at < known && !atomic_compare_exchange_weak(&w->all->first, &known, w->failed_at))
		;
}

static void *work(void *self) {
	worker *w = self;
	fl_store *store = NULL;
	const fl_store_watch watch = {go_on, w};
	w->failed_at = UINT64_MAX;
	w->status = fl_recomputer_new(&w->recomputer, &w->err);
	if (w->status >= 0)
		w->status = fl_store_open(w->all->path, FL_STORE_READ, 10000, &store, &w->err);
	if (w->status >= 0)
		w->status = fl_store_each_of(store, &w->part, true, visit, w, &watch, &w->err);
	if (w->status == FL_E_TAMPERED)
		note_misfit(w);
	else if (w->status < 0 && w->status != FL_E_STATE)
		atomic_store(&w->all->stop, true);
	fl_store_close(store);
	fl_recomputer_free(w->recomputer);
	return NULL;
}

/* The first misfit of the book; else what kept a thread from its work. */
static fl_status outcome(worker *workers, int count, fl_recomputed *out, fl_error *err) {
	const worker *worst = NULL;
	*out = (fl_recomputed){0};
	for (int i = 0; i < count; i++) {
		const worker *w = &workers[i];
		out->records += w->sum.records;
		out->without_journal += w->sum.without_journal;
		if (w->status >= 0)
			continue;
		if (!worst || w->failed_at < worst->failed_at ||
		    (worst->failed_at == UINT64_MAX && worst->status == FL_E_STATE && w->status != FL_E_STATE))
			worst = w;
	}
	if (!worst)
		return FL_OK;
	if (err && err->status == FL_OK)
		*err = worst->err;
	return worst->status;
}

fl_status fl_keep_recompute(const char *path, int threads, const fl_store_watch *watch, fl_recomputed *out,
                            fl_error *err) {
	int wanted = threads < 1 ? 1 : threads > MOST_THREADS ? MOST_THREADS : threads, started = 0;
	worker *workers = calloc((size_t)wanted, sizeof *workers);
	if (!workers)
		return fl_fail(err, FL_E_MEMORY, "out of memory for recomputing");
	shared all = {.path = path, .watch = watch};
	atomic_store(&all.first, UINT64_MAX);
	for (int i = 0; i < wanted; i++)
		workers[i] = (worker){.all = &all, .part = {.index = i, .parts = wanted}};
	for (; started < wanted; started++)
		if (pthread_create(&workers[started].thread, NULL, work, &workers[started]) != 0)
			break;
	if (started < wanted)
		atomic_store(&all.stop, true);
	for (int i = 0; i < started; i++)
		pthread_join(workers[i].thread, NULL);
	fl_status status = started < wanted ? fl_fail(err, FL_E_MEMORY, "the system gives no more threads")
	                                    : outcome(workers, wanted, out, err);
	free(workers);
	return status;
}
