/* recompute.c - measures recomputing a book: real sessions, varied, put in as records, then verified and recomputed.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * usage: recompute FOLDER RECORDS JOURNAL
 *
 * The journal is one that the program made from the invented readings. Each record of the book has it with other
 * outputs (each reading moved by up to 0.02 mA, typed so) and another serial number in 10,000, chained anew, so that no
 * two are alike, each computes to something of its own, and they pack like real ones.
 */
#include "foundleft/keep.h"
#include "sql.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <time.h>
#include <unistd.h>

enum { INSTRUMENTS = 10000, MOST_LINE = 1 << 20 };

static void die(const char *what, const fl_error *err) {
	fprintf(stderr, "recompute: %s: %s\n", what, err ? err->message : "");
	exit(1);
}

static double seconds(clockid_t clock) {
	struct timespec t;
	clock_gettime(clock, &t);
	return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static uint64_t next_random(uint64_t *state) {
	*state = *state * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
	return *state >> 33;
}

/* Copies a line's body (up to its digests) with another output and serial. */
static void vary(fl_text *out, const char *line, size_t length, int serial, uint64_t *random) {
	char copy[64];
	const char *typed = memmem(line, length, "\ttyped=", 7), *value = memmem(line, length, "\tvalue=", 7);
	const char *plate = memmem(line, length, "FL-0417", 7);
	if (memmem(line, length, "\tread\t", 6) && typed && value) {
		double ma = strtod(value + 7, NULL) + ((double)(next_random(random) % 41) - 20.0) / 1000.0;
		const char *after_typed = memchr(typed + 1, '\t', (size_t)(line + length - typed - 1));
		const char *after_value = memchr(value + 1, '\t', (size_t)(line + length - value - 1));
		snprintf(copy, sizeof copy, "%.3f", ma);
		fl_text_append(out, line, (size_t)(typed + 7 - line));
		fl_text_add(out, copy);
		fl_text_append(out, after_typed, (size_t)(value + 7 - after_typed));
		fl_text_add(out, copy);
		fl_text_append(out, after_value ? after_value : line + length,
		               after_value ? (size_t)(line + length - after_value) : 0);
	} else if (memmem(line, length, "kind=instrument", 15) && plate) {
		fl_text_append(out, line, (size_t)(plate - line));
		fl_text_printf(out, "FL-%d", serial);
		fl_text_append(out, plate + 7, (size_t)(line + length - plate - 7));
	} else {
		fl_text_append(out, line, length);
	}
}

static void make_journal(fl_text *out, fl_hasher *hasher, const char *bytes, size_t length, int serial,
                         uint64_t *random) {
	char head[FL_DIGEST_HEX_SIZE];
	memset(head, '0', sizeof head - 1);
	head[sizeof head - 1] = '\0';
	fl_text_clear(out);
	for (const char *at = bytes; at < bytes + length;) {
		const char *end = memchr(at, '\n', (size_t)(bytes + length - at));
		size_t size = (size_t)(end - at) - 2 * (6 + sizeof head - 1), start = out->length;
		vary(out, at, size, serial, random);
		fl_text_printf(out, "\tprev=%s", head);
		if (fl_seal_digest(hasher, out->data + start, out->length - start, head, NULL) < 0)
			die("digest", NULL);
		fl_text_printf(out, "\tself=%s\n", head);
		at = end + 1;
	}
}

static void build(const char *path, int64_t records, const char *bytes, size_t length) {
	fl_store *store = NULL;
	fl_error err = {0};
	fl_founding founding = {.name = "Quillhaven", .prefix = "QH", .at = 1};
	fl_hasher *hasher = NULL;
	fl_recomputer *recomputer = NULL;
	fl_text journal = {0};
	uint64_t random = 20260414;
	double start = seconds(CLOCK_MONOTONIC);
	if (fl_hasher_new(&hasher, &err) < 0 || fl_recomputer_new(&recomputer, &err) < 0 ||
	    fl_store_found(path, &founding, &store, &err) < 0)
		die("found", &err);
	sqlite3_exec(store->db, "PRAGMA synchronous = OFF", NULL, NULL, NULL); /* building is not what is measured */
	for (int64_t i = 0; i < records; i++) {
		char number[FL_NUMBER_SIZE];
		fl_arena arena = {0};
		fl_record record;
		make_journal(&journal, hasher, bytes, length, (int)(i % INSTRUMENTS), &random);
		if (fl_recomputer_record(recomputer, journal.data, journal.length, "bench", &arena, &record, &err) < 0)
			die("session", &err);
		if (fl_store_reserve(store, 2026, 1, "bench", number, &err) < 0)
			die("reserve", &err);
		record.number = number;
		record.program = "0.1.0";
		if (fl_store_add(store, &record, journal.data, journal.length, &err) < 0)
			die("add", &err);
		fl_arena_free(&arena);
	}
	fl_store_close(store);
	fl_recomputer_free(recomputer);
	fl_hasher_free(hasher);
	printf("built: %.1f s; journals of %.1f kB, readings varied\n", seconds(CLOCK_MONOTONIC) - start,
	       (double)journal.length / 1000.0);
	fl_text_free(&journal);
}

static double resident_mb(void) {
	struct rusage usage;
	getrusage(RUSAGE_SELF, &usage);
	return (double)usage.ru_maxrss / 1024.0;
}

/* Best of three, by the wall and by the processor. */
static void measure(const char *path, int threads) {
	double wall = INFINITY, cpu = INFINITY, before = resident_mb();
	fl_recomputed sum = {0};
	for (int i = 0; i < 3; i++) {
		fl_error err = {0};
		double w = seconds(CLOCK_MONOTONIC), c = seconds(CLOCK_PROCESS_CPUTIME_ID);
		if (fl_keep_recompute(path, threads, NULL, &sum, &err) < 0)
			die("recompute", &err);
		wall = fmin(wall, seconds(CLOCK_MONOTONIC) - w);
		cpu = fmin(cpu, seconds(CLOCK_PROCESS_CPUTIME_ID) - c);
	}
	double n = (double)sum.records;
	printf("recompute, %d thread%s: %.2f s, %.0f sessions/s by the wall, %.0f a second of processor time; most memory "
	       "%.1f MB before, %.1f MB after\n",
	       threads, threads == 1 ? "" : "s", wall, n / wall, n / cpu, before, resident_mb());
}

/* Where the time goes: the same journal, one part at a time. */
static void measure_parts(const char *bytes, size_t length) {
	enum { TIMES = 300 };
	fl_error err = {0};
	fl_hasher *hasher = NULL;
	fl_recomputer *recomputer = NULL;
	double best_replay = INFINITY, best_all = INFINITY;
	if (fl_hasher_new(&hasher, &err) < 0 || fl_recomputer_new(&recomputer, &err) < 0)
		die("parts", &err);
	for (int i = 0; i < TIMES; i++) {
		fl_session session = {0};
		fl_arena arena = {0};
		fl_record record;
		char head[FL_DIGEST_HEX_SIZE];
		double t0 = seconds(CLOCK_PROCESS_CPUTIME_ID);
		if (fl_journal_replay(bytes, length, "bench", hasher, &session, head, &err) < 0)
			die("replay", &err);
		fl_session_free(&session);
		double t1 = seconds(CLOCK_PROCESS_CPUTIME_ID);
		if (fl_recomputer_record(recomputer, bytes, length, "bench", &arena, &record, &err) < 0)
			die("record", &err);
		fl_arena_free(&arena);
		best_replay = fmin(best_replay, t1 - t0);
		best_all = fmin(best_all, seconds(CLOCK_PROCESS_CPUTIME_ID) - t1);
	}
	printf(
	    "one session of them: reading the journal and its chain %.0f µs, computing the result and the record %.0f µs\n",
	    1e6 * best_replay, 1e6 * (best_all - best_replay));
	fl_recomputer_free(recomputer);
	fl_hasher_free(hasher);
}

int main(int argc, char **argv) {
	char path[512];
	fl_arena arena = {0};
	char *bytes = NULL;
	size_t length = 0;
	fl_error err = {0};
	if (argc != 4) {
		fprintf(stderr, "usage: recompute FOLDER RECORDS JOURNAL\n");
		return 2;
	}
	int64_t records = atoll(argv[2]);
	if (fl_file_read(fl_io_system(), argv[3], MOST_LINE << 4, &arena, &bytes, &length, &err) < 0)
		die("journal", &err);
	snprintf(path, sizeof path, "%s/recompute-%lld", argv[1], (long long)records);
	printf("---- %lld records, recomputed ----\n", (long long)records);
	build(path, records, bytes, length);
	measure_parts(bytes, length);
	measure(path, 1);
	long cores = sysconf(_SC_NPROCESSORS_ONLN);
	if (cores > 1)
		measure(path, (int)cores);
	fl_arena_free(&arena);
	return 0;
}
