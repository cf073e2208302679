/* advise.h - what the conversation shows at the decision.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_ADVISE_H
#define FOUNDLEFT_CLI_ADVISE_H

#include "cli.h"
#include "foundleft/entry.h"

typedef struct fl_adviser_context {
	const fl_stock *shelf; /* the bench's oils */
	int columns;
} fl_adviser_context;

/* An fl_adviser; its context is an fl_adviser_context. */
fl_status fl_cli_advise(void *context, const fl_session *session, fl_advice *out, fl_error *err);

#endif
