/* passphrase.c - asks on the controlling terminal with the echo off. A signal that comes meanwhile first gets the
 * terminal its echo back.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "passphrase.h"

#include <errno.h>
#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <sys/signalfd.h>
#include <termios.h>
#include <unistd.h>

/* ---- from a file descriptor ------------------------------------------------------------------------------------ */

/* Byte by byte, so that the next line is left to the next who reads from the descriptor. */
static fl_status read_line(int fd, fl_passphrase *out, fl_error *err) {
	size_t used = 0;
	for (;;) {
		unsigned char byte;
		ssize_t got = read(fd, &byte, 1);
		if (got < 0 && errno == EINTR)
			continue;
		if (got < 0)
			return fl_io_fail(err, "reading the passphrase from", "--passphrase-fd", errno);
		if (got == 0 && used == 0)
			return fl_fail(err, FL_E_USAGE, "--passphrase-fd: there is no further line with a passphrase");
		if (got == 0 || byte == '\n')
			break;
		if (used == sizeof out->bytes)
			return fl_fail(err, FL_E_VALUE, "--passphrase-fd: a line is longer than %d bytes", FL_PASSPHRASE_SIZE);
		out->bytes[used++] = byte;
	}
	out->secret = (fl_secret){out->bytes, used};
	return FL_OK;
}

static fl_status from_descriptor(const char *text, fl_passphrase *out, fl_error *err) {
	char *rest;
	long fd = strtol(text, &rest, 10);
	if (rest == text || *rest || fd < 0 || fd > 1023)
		return fl_fail(err, FL_E_USAGE, "--passphrase-fd takes the number of an open file descriptor, not `%s`", text);
	return read_line((int)fd, out, err);
}

/* ---- from the terminal ----------------------------------------------------------------------------------------- */

/* A terminal with its echo off. */
typedef struct fl_quiet {
	int fd, signals;
	struct termios before;
	sigset_t mask;
} fl_quiet;

static void say(const fl_quiet *quiet, const char *text) {
	ssize_t wrote = write(quiet->fd, text, strlen(text));
	(void)wrote; /* a terminal that is gone shows when reading */
}

static fl_status hush(fl_quiet *quiet, fl_error *err) {
	*quiet = (fl_quiet){.fd = open("/dev/tty", O_RDWR | O_NOCTTY | O_CLOEXEC), .signals = -1};
	if (quiet->fd < 0 || tcgetattr(quiet->fd, &quiet->before) != 0) {
		if (quiet->fd >= 0)
			close(quiet->fd);
		return fl_fail(err, FL_E_USAGE,
		               "there is no terminal to ask for the passphrase on: give it with --passphrase-fd N");
	}
	sigset_t wanted;
	sigemptyset(&wanted);
	static const int which[] = {SIGINT, SIGTERM, SIGHUP, SIGQUIT};
	for (size_t i = 0; i < sizeof which / sizeof *which; i++)
		sigaddset(&wanted, which[i]);
	sigprocmask(SIG_BLOCK, &wanted, &quiet->mask);
	quiet->signals = signalfd(-1, &wanted, SFD_CLOEXEC);
	struct termios silent = quiet->before;
	silent.c_lflag &= ~(tcflag_t)(ECHO | ECHONL);
	tcsetattr(quiet->fd, TCSAFLUSH, &silent);
	return FL_OK;
}

/* A signal that waited takes effect here. */
static void unhush(fl_quiet *quiet) {
	tcsetattr(quiet->fd, TCSAFLUSH, &quiet->before);
	if (quiet->signals >= 0)
		close(quiet->signals);
	close(quiet->fd);
	sigprocmask(SIG_SETMASK, &quiet->mask, NULL);
}

/* One line; false where a signal came or the terminal is gone. */
static bool quiet_line(const fl_quiet *quiet, fl_passphrase *out) {
	struct pollfd watched[2] = {{.fd = quiet->fd, .events = POLLIN}, {.fd = quiet->signals, .events = POLLIN}};
	if (poll(watched, 2, -1) < 0 || watched[1].revents != 0)
		return false;
	ssize_t got = read(quiet->fd, out->bytes, sizeof out->bytes);
	if (got <= 0)
		return false;
	size_t length = (size_t)got;
	while (length > 0 && (out->bytes[length - 1] == '\n' || out->bytes[length - 1] == '\r'))
		length--;
	out->secret = (fl_secret){out->bytes, length};
	return true;
}

static bool ask(const fl_quiet *quiet, const char *question, const char *after, fl_passphrase *out) {
	say(quiet, question);
	say(quiet, after);
	bool got = quiet_line(quiet, out);
	say(quiet, "\n");
	return got;
}

/* Until two lines are the same and long enough. */
static bool ask_new(const fl_quiet *quiet, const char *question, fl_passphrase *out) {
	fl_passphrase again;
	for (bool same = false; !same;) {
		if (!ask(quiet, question, " (new, not shown): ", out))
			return false;
		if (out->secret.length < FL_PASSPHRASE_LEAST) {
			say(quiet, "Too short: 8 characters at least, better several words.\n");
			continue;
		}
		if (!ask(quiet, "The same again", ": ", &again))
			return false;
		same = again.secret.length == out->secret.length && memcmp(again.bytes, out->bytes, out->secret.length) == 0;
		fl_secret_wipe(&again.secret);
		if (!same)
			say(quiet, "The two differ: once more.\n");
	}
	return true;
}

fl_status fl_passphrase_get(const fl_cli *cli, const char *question, bool is_new, fl_passphrase *out, fl_error *err) {
	out->secret = (fl_secret){out->bytes, 0};
	const char *descriptor = cli->values[FL_OPT_PASSPHRASE_FD];
	if (descriptor != NULL)
		return from_descriptor(descriptor, out, err);
	fl_quiet quiet;
	fl_status status = hush(&quiet, err);
	if (status < 0)
		return status;
	bool got = is_new ? ask_new(&quiet, question, out) : ask(&quiet, question, " (not shown): ", out);
	unhush(&quiet);
	if (got)
		return FL_OK;
	fl_secret_wipe(&out->secret);
	return fl_fail(err, FL_E_STATE, "no passphrase was entered: nothing was done");
}
