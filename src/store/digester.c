/* digester.c - hashes in a thread of its own what another thread reads, in order.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The reader fills a batch of jobs without a lock and hands it over when it is full; a few batches go round, so memory
 * stays flat however long the book is, and the threads meet once in many jobs. Jobs are hashed in the order in which
 * they were put: the first that does not fit is the first of the book.
 */
#include "digester.h"

#include <pthread.h>
#include <stdatomic.h>
#include <stdlib.h>
#include <string.h>

enum { BATCHES = 4, JOBS = 64, BATCH_BYTES = 512 * 1024 };

typedef struct job {
	size_t at, length; /* in the batch's bytes */
	char digest[FL_DIGEST_HEX_SIZE];
	fl_digested what;
} job;

typedef struct batch {
	char *bytes;
	size_t used, room;
	job jobs[JOBS];
	int count;
} batch;

struct fl_digester {
	pthread_t thread;
	pthread_mutex_t lock;
	pthread_cond_t changed;
	fl_hasher *hasher;
	batch batches[BATCHES];
	size_t filled, hashed; /* batches, counted on for ever; the place is the rest by BATCHES */
	bool no_more;
	atomic_bool failed;
	fl_digested first;
};

/* ---- the other thread ------------------------------------------------------------------------------------------- */

static bool fits(fl_digester *d, const batch *b, const job *j) {
	char found[FL_DIGEST_HEX_SIZE];
	return fl_seal_digest(d->hasher, b->bytes + j->at, j->length, found, NULL) >= 0 && strcmp(found, j->digest) == 0;
}

static void hash_batch(fl_digester *d, const batch *b) {
	for (int i = 0; i < b->count && !atomic_load(&d->failed); i++) {
		if (fits(d, b, &b->jobs[i]))
			continue;
		d->first = b->jobs[i].what;
		atomic_store(&d->failed, true);
	}
}

static void *hash_all(void *self) {
	fl_digester *d = self;
	pthread_mutex_lock(&d->lock);
	for (;;) {
		while (d->filled == d->hashed && !d->no_more)
			pthread_cond_wait(&d->changed, &d->lock);
		if (d->filled == d->hashed)
			break;
		batch *b = &d->batches[d->hashed % BATCHES];
		pthread_mutex_unlock(&d->lock);
		hash_batch(d, b);
		pthread_mutex_lock(&d->lock);
		b->used = 0;
		b->count = 0;
		d->hashed++;
		pthread_cond_signal(&d->changed);
	}
	pthread_mutex_unlock(&d->lock);
	return NULL;
}

/* ---- the reader ---------------------------------------------------------------------------------------------------
 */

fl_status fl_digester_new(fl_digester **out, fl_error *err) {
	fl_digester *d = calloc(1, sizeof *d);
	if (!d)
		return fl_fail(err, FL_E_MEMORY, "out of memory for verifying");
	fl_status status = fl_hasher_new(&d->hasher, err);
	if (status < 0) {
		free(d);
		return status;
	}
	pthread_mutex_init(&d->lock, NULL);
	pthread_cond_init(&d->changed, NULL);
	if (pthread_create(&d->thread, NULL, hash_all, d) != 0) {
		fl_hasher_free(d->hasher);
		free(d);
		return fl_fail(err, FL_E_MEMORY, "the system gives no second thread for verifying");
	}
	*out = d;
	return FL_OK;
}

/* Hands the batch over and waits until the next one is free. */
static void hand_over(fl_digester *d) {
	pthread_mutex_lock(&d->lock);
	d->filled++;
	pthread_cond_signal(&d->changed);
	while (d->filled - d->hashed == BATCHES)
		pthread_cond_wait(&d->changed, &d->lock);
	pthread_mutex_unlock(&d->lock);
}

static bool make_room(batch *b, size_t length) {
	size_t room = b->used + length > BATCH_BYTES ? b->used + length : BATCH_BYTES;
	if (b->bytes && b->room >= room)
		return true;
	char *bytes = realloc(b->bytes, room);
	if (!bytes)
		return false;
	b->bytes = bytes;
	b->room = room;
	return true;
}

fl_status fl_digester_put(fl_digester *d, const void *bytes, size_t length, const char *digest, size_t digest_length,
                          const fl_digested *what, fl_error *err) {
	batch *b = &d->batches[d->filled % BATCHES]; /* only the reader counts `filled` */
	if (b->count == JOBS || (b->count && b->used + length > BATCH_BYTES)) {
		hand_over(d);
		b = &d->batches[d->filled % BATCHES];
	}
	if (!make_room(b, length))
		return fl_fail(err, FL_E_MEMORY, "out of memory for verifying");
	job *j = &b->jobs[b->count++];
	*j = (job){.at = b->used, .length = length, .what = *what};
	if (length)
		memcpy(b->bytes + b->used, bytes, length);
	if (digest && digest_length < sizeof j->digest)
		memcpy(j->digest, digest, digest_length);
	b->used += length;
	return FL_OK;
}

bool fl_digester_failed(const fl_digester *d) {
	return atomic_load(&d->failed);
}

bool fl_digester_finish(fl_digester *d, fl_digested *out) {
	hand_over(d);
	pthread_mutex_lock(&d->lock);
	d->no_more = true;
	pthread_cond_signal(&d->changed);
	pthread_mutex_unlock(&d->lock);
	pthread_join(d->thread, NULL);
	bool failed = atomic_load(&d->failed);
	if (failed)
		*out = d->first;
	for (int i = 0; i < BATCHES; i++)
		free(d->batches[i].bytes);
	pthread_cond_destroy(&d->changed);
	pthread_mutex_destroy(&d->lock);
	fl_hasher_free(d->hasher);
	free(d);
	return failed;
}
