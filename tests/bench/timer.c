/* timer.c - times whole processes, one after the other in turns, so that a slow moment of the machine meets all alike.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *	timer ROUNDS [-r FILE]... -- NAME PROGRAM ARGUMENT... [+ PROGRAM ARGUMENT...]... [-- NAME ...]
 *
 * Each round runs every NAME once, in the order given, and the next round the other way round. What follows a + is a
 * further process of the same measurement. Before each process every FILE is removed, outside the time taken. Standard
 * output goes to /dev/null. Prints one line a NAME, fields between tabs:
 *
 *	name, median wall ms, median user+sys ms, least wall ms, least user+sys ms, largest memory in KiB
 *
 * Processor time and memory are the kernel's (wait4): the largest resident set of any of its processes in any round.
 */
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

enum { MOST_CASES = 8, MOST_FILES = 8, MOST_ROUNDS = 2001 };

typedef struct measured {
	char *name;
	char **words; /* up to the next "--" or the end, NULL there; "+" parts processes */
	double wall_ms[MOST_ROUNDS], cpu_ms[MOST_ROUNDS];
	long memory_kib;
} measured;

static char *files[MOST_FILES];
static int file_count;

static void stop(const char *what, const char *which) {
	fprintf(stderr, "timer: %s%s\n", what, which);
	exit(2);
}

static double ms_of(struct timeval t) {
	return (double)t.tv_sec * 1e3 + (double)t.tv_usec / 1e3;
}

static double now_ms(void) {
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return (double)t.tv_sec * 1e3 + (double)t.tv_nsec / 1e6;
}

static void run_child(char **words) {
	int null = open("/dev/null", O_WRONLY);
	if (null < 0 || dup2(null, STDOUT_FILENO) < 0)
		_exit(126);
	execv(words[0], words);
	_exit(127);
}

/* One process from fork to the end of its wait; adds to the round's sums. */
static void run_process(measured *one, char **words, int round) {
	for (int i = 0; i < file_count; i++)
		unlink(files[i]);
	double start = now_ms();
	pid_t child = fork();
	if (child == 0)
		run_child(words);
	int status;
	struct rusage used;
	if (child < 0 || wait4(child, &status, 0, &used) != child)
		stop("cannot run ", words[0]);
	one->wall_ms[round] += now_ms() - start;
	if (!WIFEXITED(status) || WEXITSTATUS(status) != 0)
		stop("failed: ", words[0]);
	one->cpu_ms[round] += ms_of(used.ru_utime) + ms_of(used.ru_stime);
	if (used.ru_maxrss > one->memory_kib)
		one->memory_kib = used.ru_maxrss;
}

static void run_all(measured *one, int round) {
	for (char **words = one->words; *words;) {
		char **end = words;
		while (*end && strcmp(*end, "+") != 0)
			end++;
		char *kept = *end;
		*end = NULL;
		run_process(one, words, round);
		*end = kept;
		words = kept ? end + 1 : end;
	}
}

static int rising(const void *a, const void *b) {
	double x = *(const double *)a, y = *(const double *)b;
	return x < y ? -1 : x > y;
}

static void print(measured *one, int rounds) {
	qsort(one->wall_ms, (size_t)rounds, sizeof one->wall_ms[0], rising);
	qsort(one->cpu_ms, (size_t)rounds, sizeof one->cpu_ms[0], rising);
	printf("%s\t%.3f\t%.3f\t%.3f\t%.3f\t%ld\n", one->name, one->wall_ms[rounds / 2], one->cpu_ms[rounds / 2],
	       one->wall_ms[0], one->cpu_ms[0], one->memory_kib);
}

int main(int argc, char **argv) {
	static measured cases[MOST_CASES];
	int count = 0, rounds = argc > 1 ? atoi(argv[1]) : 0, at = 2;
	if (rounds < 1 || rounds > MOST_ROUNDS)
		stop("usage: timer ROUNDS [-r FILE]... -- NAME PROGRAM ARGUMENT... [-- NAME ...]", "");
	for (; at + 1 < argc && strcmp(argv[at], "-r") == 0 && file_count < MOST_FILES; at += 2)
		files[file_count++] = argv[at + 1];
	while (at + 2 < argc && strcmp(argv[at], "--") == 0 && count < MOST_CASES) {
		argv[at] = NULL;
		cases[count].name = argv[at + 1];
		cases[count++].words = argv + at + 2;
		for (at += 2; at < argc && strcmp(argv[at], "--") != 0;)
			at++;
	}
	if (count == 0 || at < argc)
		stop("not understood: ", at < argc ? argv[at] : "no case is given");
	for (int round = 0; round < rounds; round++)
		for (int i = 0; i < count; i++)
			run_all(&cases[round % 2 ? count - 1 - i : i], round);
	for (int i = 0; i < count; i++)
		print(&cases[i], rounds);
	return 0;
}
