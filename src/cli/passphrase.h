/* passphrase.h - passphrases: from the terminal without echo, or from a file descriptor; never from an option.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_PASSPHRASE_H
#define FOUNDLEFT_CLI_PASSPHRASE_H

#include "cli.h"
#include "foundleft/seal.h"

#define FL_PASSPHRASE_SIZE 1024

/* Memory for one passphrase. */
typedef struct fl_passphrase {
	unsigned char bytes[FL_PASSPHRASE_SIZE];
	fl_secret secret; /* the part of `bytes` that is in use */
} fl_passphrase;

/* Asks `question` ("Passphrase of ida") on the terminal; twice, until both are the same and long enough, where
 * `is_new`. With --passphrase-fd the next line of that descriptor is taken instead. Whoever uses the secret wipes it.
 */
fl_status fl_passphrase_get(const fl_cli *cli, const char *question, bool is_new, fl_passphrase *out,
                            fl_error *err) FL_MUST_USE;

#endif
