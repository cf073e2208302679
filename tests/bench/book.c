/* book.c - measures the record book: adding one record, the history of one instrument, what is due, verifying.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * usage: book FOLDER RECORDS TEMPLATE
 *
 * The sessions are generated: journals of the size and make of a shipboard session (a template's text, then about
 * ninety chained lines with real digests, so that they pack like real ones), with invented readings. They are not
 * sessions that anybody held, and are not recomputed here. Ten thousand instruments; fifty of them have exactly ten
 * records in every book, spread over all of it, so that their history is the same work whatever the size.
 *
 * Building the book writes without waiting for the disk (the private header of the store gives the connection); what is
 * measured runs with the book opened anew, as the program opens it.
 */
#include "foundleft/store.h"
#include "sql.h"

#include <math.h>
#include <openssl/evp.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <time.h>

enum { INSTRUMENTS = 10000, PROBES = 50, PROBE_RECORDS = 10, LINES = 90, REPEATS = 200, POINTS = 4, ITEMS = 7 };

static void die(const char *what, const fl_error *err) {
	fprintf(stderr, "book: %s: %s\n", what, err ? err->message : "");
	exit(1);
}

static double now(void) {
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static int by_value(const void *a, const void *b) {
	double x = *(const double *)a, y = *(const double *)b;
	return x < y ? -1 : x > y;
}

static double median(double *v, int n) {
	qsort(v, (size_t)n, sizeof *v, by_value);
	return v[n / 2];
}

static uint64_t next_random(uint64_t *state) {
	*state = *state * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
	return *state >> 33;
}

/* ---- one generated session -------------------------------------------------------------------------------------- */

static void journal_line(fl_text *out, fl_hasher *hasher, int n, uint64_t *random, char head[FL_DIGEST_HEX_SIZE]) {
	size_t start = out->length;
	double ma = 4.0 + (double)(next_random(random) % 16000) / 1000.0;
	fl_text_printf(out,
	               "%d\t2026-04-14T%02d:%02d:%02dZ\t%s\trun=as-found\tcycle=1\tpass=%s\tpoint=%d\ttyped=%.3f\tunit=mA\t"
	               "value=%.3f\ttemp=%.2f\ttemp-c=%.2f\tprev=%s",
	               n, 6 + n / 60, n % 60, (int)(next_random(random) % 60), n % 3 ? "watch" : "read",
	               n % 8 < 4 ? "rising" : "falling", n % 4, ma, ma, 40.0 + (double)(next_random(random) % 20) / 100.0,
	               40.0, head);
	if (fl_seal_digest(hasher, out->data + start, out->length - start, head, NULL) < 0)
		die("digest", NULL);
	fl_text_printf(out, "\tself=%s\n", head);
}

static void make_journal(fl_text *out, fl_hasher *hasher, const char *body, size_t length, uint64_t *random) {
	char head[FL_DIGEST_HEX_SIZE];
	memset(head, '0', sizeof head - 1);
	head[sizeof head - 1] = '\0';
	fl_text_clear(out);
	fl_text_add(out, "1\t2026-04-14T06:00:00Z\ttext\tkind=procedure\tbody=");
	fl_text_append(out, body, length);
	fl_text_add(out, "\n");
	for (int n = 2; n < LINES; n++)
		journal_line(out, hasher, n, random, head);
}

typedef struct session {
	fl_record record;
	fl_kept_point found[POINTS], left[POINTS];
	fl_kept_item items[ITEMS];
	char tag[32], lots[ITEMS][16];
} session;

static void make_points(fl_kept_point *points, uint64_t *random) {
	static const char *const oils[POINTS] = {"", "LK-2", "LK-20", "LK-50"};
	for (int i = 0; i < POINTS; i++)
		points[i] = (fl_kept_point){
		    i - 1, oils[i], i ? "2511A" : "", 0.31 * i, (double)(next_random(random) % 40000) * 1e-6, 0.00352, 2.0,
		    0.02,  "pass"};
}

static void make_session(session *s, int instrument, int64_t i, const char *number, uint64_t *random) {
	static const char *const kinds[ITEMS] = {"oil",           "oil",  "oil",           "thermometer",
	                                         "current meter", "bath", "pressure gauge"};
	fl_day day = fl_day_from_civil(2010, 1, 1) + (fl_day)(i / 200);
	memset(s, 0, sizeof *s);
	make_points(s->found, random);
	make_points(s->left, random);
	snprintf(s->tag, sizeof s->tag, "VT-%d", instrument);
	for (int k = 0; k < ITEMS; k++) {
		snprintf(s->lots[k], sizeof s->lots[k], "%s-%d", k < 3 ? "lot" : "id",
		         (int)(i / (k < 3 ? 2000 : 20000)) * 8 + k);
		s->items[k] = (fl_kept_item){kinds[k], s->lots[k], "certificate"};
	}
	s->record =
	    (fl_record){.kept_at = (fl_utc)day * 86400,
	                .number = number,
	                .replaces = "",
	                .replaces_number = "",
	                .reason = "",
	                .site = "Quillhaven",
	                .tag = s->tag,
	                .serial = "FL-0417",
	                .day = day,
	                .closed_at = (fl_utc)day * 86400 + 3600,
	                .due = day + 365,
	                .interval_months = 12,
	                .running_hours = 100.0 + (double)i,
	                .due_hours = NAN,
	                .position = "booster module",
	                .owner = "Tallmere Yard",
	                .procedure = "shipboard-check 1.0",
	                .program = "0.1.0",
	                .performed_by = "Ada Brook",
	                .scale_high = 50.0,
	                .set_point = 13.0,
	                .dial_unit = "mm²/s",
	                .adjust_limit_span = 0.015,
	                .as_found = {FL_KEPT_TAKEN, 0.00249, 0.0004, 0.0249, 0.0009, 0.0015, "pass", s->found, POINTS},
	                .as_left = {FL_KEPT_TAKEN, 0.00123, 0.0004, -0.0008, 0.0009, 0.0014, "pass", s->left, POINTS},
	                .items = s->items,
	                .item_count = ITEMS};
}

/* ---- building --------------------------------------------------------------------------------------------------- */

/* Every so many records one of a probe, until each probe has its ten. */
static int instrument_of(int64_t i, int64_t records) {
	int64_t step = records / (PROBES * PROBE_RECORDS);
	int64_t turn = i / step;
	if (i % step == 0 && turn < PROBES * PROBE_RECORDS)
		return (int)(turn % PROBES);
	return PROBES + (int)((uint64_t)i * UINT64_C(2654435761) % (INSTRUMENTS - PROBES));
}

static double build(const char *path, int64_t records, const char *body, size_t length) {
	fl_store *store = NULL;
	fl_error err = {0};
	fl_founding founding = {.name = "Quillhaven", .prefix = "QH", .at = 1};
	fl_hasher *hasher = NULL;
	fl_text journal = {0};
	uint64_t random = 20260414, bytes = 0;
	double start = now();
	if (fl_hasher_new(&hasher, &err) < 0 || fl_store_found(path, &founding, &store, &err) < 0)
		die("found", &err);
	sqlite3_exec(store->db, "PRAGMA synchronous = OFF", NULL, NULL, NULL);
	for (int64_t i = 0; i < records; i++) {
		char number[FL_NUMBER_SIZE];
		session s;
		make_journal(&journal, hasher, body, length, &random);
		bytes += journal.length;
		if (fl_store_reserve(store, 2010 + (int)(i / 73000), 1, "bench", number, &err) < 0)
			die("reserve", &err);
		make_session(&s, instrument_of(i, records), i, number, &random);
		if (fl_store_add(store, &s.record, journal.data, journal.length, &err) < 0)
			die("add", &err);
	}
	fl_store_close(store);
	fl_hasher_free(hasher);
	fl_text_free(&journal);
	printf("built: %.1f s, journals of %.1f kB on average\n", now() - start, (double)bytes / (double)records / 1000.0);
	return now() - start;
}

/* ---- measuring -------------------------------------------------------------------------------------------------- */

static fl_store *open_book(const char *path) {
	fl_store *store = NULL;
	fl_error err = {0};
	double start = now();
	if (fl_store_open(path, FL_STORE_WRITE, 5000, &store, &err) < 0)
		die("open", &err);
	printf("open, head verified: %.2f ms\n", 1e3 * (now() - start));
	return store;
}

static void measure_add(fl_store *store, int64_t records, const char *body, size_t length) {
	double reserve[REPEATS], add[REPEATS];
	fl_error err = {0};
	fl_hasher *hasher = NULL;
	fl_text journal = {0};
	uint64_t random = 7;
	if (fl_hasher_new(&hasher, &err) < 0)
		die("digest", &err);
	for (int i = 0; i < REPEATS; i++) {
		char number[FL_NUMBER_SIZE];
		session s;
		make_journal(&journal, hasher, body, length, &random);
		double t0 = now();
		if (fl_store_reserve(store, 2199, 1, "bench", number, &err) < 0)
			die("reserve", &err);
		double t1 = now();
		make_session(&s, PROBES + (int)(next_random(&random) % (INSTRUMENTS - PROBES)), records + i, number, &random);
		double t2 = now();
		if (fl_store_add(store, &s.record, journal.data, journal.length, &err) < 0)
			die("add", &err);
		add[i] = now() - t2;
		reserve[i] = t1 - t0;
	}
	printf("reserve a number, durable: median %.3f ms\n", 1e3 * median(reserve, REPEATS));
	printf("add one record, durable: median %.3f ms\n", 1e3 * median(add, REPEATS));
	fl_text_free(&journal);
	fl_hasher_free(hasher);
}

static void measure_history(fl_store *store) {
	double times[REPEATS];
	fl_error err = {0};
	for (int i = 0; i < REPEATS; i++) {
		char tag[32];
		fl_arena arena = {0};
		fl_known_instrument *known = NULL;
		fl_record_list list = {0};
		size_t count = 0;
		snprintf(tag, sizeof tag, "VT-%d", i % PROBES);
		double start = now();
		if (fl_store_instruments(store, tag, &arena, &known, &count, &err) < 0 || count != 1 ||
		    fl_store_history(store, known[0].id, false, &list, &err) < 0 || list.count != PROBE_RECORDS)
			die("history", &err);
		times[i] = now() - start;
		fl_record_list_free(&list);
		fl_arena_free(&arena);
	}
	printf("history of one instrument (%d records): median %.3f ms\n", PROBE_RECORDS, 1e3 * median(times, REPEATS));
}

/* The same query, its columns read, nothing kept. */
static double bare_due(const char *path, int64_t *rows) {
	sqlite3 *db = NULL;
	sqlite3_stmt *statement = NULL;
	static const char *const texts[] = {
#define SQL_TEXT(name, text) text,
	    SQL_LIST(SQL_TEXT)
#undef SQL_TEXT
	};
	uint64_t sum = 0;
	*rows = 0;
	if (sqlite3_open_v2(path, &db, SQLITE_OPEN_READONLY | SQLITE_OPEN_NOMUTEX, NULL) != SQLITE_OK)
		die("bare query", NULL);
	double best = INFINITY;
	for (int i = 0; i < 5; i++) {
		*rows = 0;
		double start = now();
		if (sqlite3_prepare_v2(db, texts[SQL_DUE], -1, &statement, NULL) != SQLITE_OK)
			die("bare query", NULL);
		while (sqlite3_step(statement) == SQLITE_ROW) {
			for (int c = 0; c < 7; c++)
				sum += (uint64_t)sqlite3_column_bytes(statement, c);
			++*rows;
		}
		sqlite3_finalize(statement);
		best = fmin(best, now() - start);
	}
	sqlite3_close(db);
	return sum ? best : NAN;
}

static void measure_due(fl_store *store, const char *path) {
	fl_error err = {0};
	double best = INFINITY;
	int64_t rows = 0;
	size_t count = 0;
	for (int i = 0; i < 5; i++) {
		fl_arena arena = {0};
		fl_due *due = NULL;
		double start = now();
		if (fl_store_due(store, &arena, &due, &count, &err) < 0)
			die("due", &err);
		best = fmin(best, now() - start);
		fl_arena_free(&arena);
	}
	double bare = bare_due(path, &rows);
	if (rows != (int64_t)count)
		die("due: other rows than the bare query", NULL);
	printf("due, %zu instruments: %.2f ms; bare query %.2f ms; ratio %.2f\n", count, 1e3 * best, 1e3 * bare,
	       best / bare);
}

static double resident_mb(void) {
	struct rusage usage;
	getrusage(RUSAGE_SELF, &usage);
	return (double)usage.ru_maxrss / 1024.0;
}

/* Hashing as many bytes in pieces of the same size, from memory, with one context. */
static double hash_alone(uint64_t bytes, int64_t pieces) {
	static unsigned char room[1 << 20];
	unsigned char digest[EVP_MAX_MD_SIZE];
	size_t piece = (size_t)(bytes / (uint64_t)pieces);
	EVP_MD *algorithm = EVP_MD_fetch(NULL, "SHA2-256", NULL);
	EVP_MD_CTX *context = EVP_MD_CTX_new();
	uint64_t random = 3;
	for (size_t i = 0; i < sizeof room; i++)
		room[i] = (unsigned char)next_random(&random);
	double start = now();
	for (int64_t i = 0; i < pieces; i++) {
		EVP_DigestInit_ex2(context, algorithm, NULL);
		EVP_DigestUpdate(context, room + (size_t)(i * 4096) % (sizeof room - piece), piece);
		EVP_DigestFinal_ex(context, digest, NULL);
	}
	double taken = now() - start;
	EVP_MD_CTX_free(context);
	EVP_MD_free(algorithm);
	return taken;
}

static void measure_verify(fl_store *store) {
	fl_error err = {0};
	fl_verified v;
	double before = resident_mb(), best = INFINITY, alone = INFINITY;
	for (int i = 0; i < 3; i++) {
		double start = now();
		if (fl_store_verify(store, false, NULL, &v, &err) < 0)
			die("verify", &err);
		best = fmin(best, now() - start);
	}
	double after = resident_mb();
	for (int i = 0; i < 3; i++)
		alone = fmin(alone, hash_alone(v.bytes, 2 * v.entries));
	printf("verify, not recomputed: %.3f s for %.1f MB, %.0f MB/s; hashing alone %.3f s, %.0f MB/s; speed %.2f of it\n",
	       best, (double)v.bytes / 1e6, (double)v.bytes / 1e6 / best, alone, (double)v.bytes / 1e6 / alone,
	       alone / best);
	printf("most memory: %.1f MB before, %.1f MB after verifying\n", before, after);
}

int main(int argc, char **argv) {
	char path[512];
	fl_arena arena = {0};
	char *body = NULL;
	size_t length = 0;
	fl_error err = {0};
	if (argc != 4) {
		fprintf(stderr, "usage: book FOLDER RECORDS TEMPLATE\n");
		return 2;
	}
	int64_t records = atoll(argv[2]);
	if (records < PROBES * PROBE_RECORDS)
		die("at least 500 records", NULL);
	if (fl_file_read(fl_io_system(), argv[3], 1 << 20, &arena, &body, &length, &err) < 0)
		die("template", &err);
	snprintf(path, sizeof path, "%s/book-%lld", argv[1], (long long)records);
	printf("---- %lld records, generated shipboard-size sessions ----\n", (long long)records);
	build(path, records, body, length);
	fl_store *store = open_book(path);
	measure_history(store);
	measure_due(store, path);
	measure_verify(store);
	measure_add(store, records, body, length);
	fl_store_close(store);
	fl_arena_free(&arena);
	return 0;
}
