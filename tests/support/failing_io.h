/* failing_io.h - file calls of which the n-th fails, so that a test can walk n upward until nothing fails any more.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *	for (long n = 1;; n++) {
 *		failing_io disk;
 *		failing_io_start(&disk, n, ENOSPC, FAILING_TORN);
 *		... run the code under test with &disk.io, then check what the real files hold ...
 *		if (!disk.failed)
 *			break;
 *	}
 */
#ifndef FOUNDLEFT_TEST_FAILING_IO_H
#define FOUNDLEFT_TEST_FAILING_IO_H

#include "foundleft/base.h"

typedef enum failing_mode {
	FAILING_CLEAN, /* the n-th call does nothing and fails; later calls work */
	FAILING_TORN,  /* the same, but a write, and a close, does half or all of its work before it says that it failed */
	FAILING_SHORT, /* a write as n-th call takes half its bytes, and every write from then on fails: a full disk */
	FAILING_DEAD   /* torn, and every later call fails without effect: the machine lost power at the n-th call */
} failing_mode;

typedef struct failing_io {
	fl_io io;          /* hand out its address */
	long calls;        /* made so far */
	long fail_at;      /* number of the call that fails, from 1; 0 for none */
	int error_number;  /* errno of the failure */
	failing_mode mode; /* what the failure looks like */
	size_t write_most; /* most bytes a single write takes; 0 for any number. Set it after failing_io_start */
	bool failed;       /* the n-th call was reached */
	const char *what;  /* name of the call that failed; NULL if none */
} failing_io;

/* Calls of the system of which the `fail_at`-th fails with `error_number`. */
void failing_io_start(failing_io *disk, long fail_at, int error_number, failing_mode mode);

#endif
