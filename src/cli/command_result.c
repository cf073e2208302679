/* command_result.c - assess: the result of a journal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "case.h"
#include "cli.h"
#include "depth.h"
#include "report.h"

/* ---- assess ---------------------------------------------------------------------------------------------------- */

/* The run that leaves the bench: as-left where it was taken, else as-found. */
static fl_verdict last_verdict(const fl_result *result) {
	const fl_run_result *left = &result->runs[FL_RUN_AS_LEFT];
	return left->available ? left->verdict : result->runs[FL_RUN_AS_FOUND].verdict;
}

fl_status fl_command_assess(fl_cli *cli, fl_exit *code, fl_error *err) {
	char path[FL_PATH_SIZE];
	fl_case one;
	fl_text text = {0};
	int columns;
	fl_status status = fl_cli_width(cli, &columns, err);
	if (status >= 0)
		status = fl_place_journal(cli, cli->arguments[0], path, err);
	if (status < 0)
		return status;
	status = fl_case_load(cli->io, path, &one, err);
	if (status >= 0 && cli->values[FL_OPT_WHY])
		status = fl_case_look_for_causes(&one, err);
	if (status < 0)
		return status;
	status = fl_depth(cli, &one, err);
	if (status >= 0 && cli->values[FL_OPT_JSON])
		status = fl_report_json(&one, &text, err);
	else if (status >= 0)
		fl_report_text(&one, columns, &text);
	if (status >= 0 && text.failed)
		status = fl_fail(err, FL_E_MEMORY, "out of memory");
	if (status >= 0)
		fwrite(text.data, 1, text.length, cli->out);
	if (status >= 0 && cli->values[FL_OPT_STRICT] && last_verdict(&one.result) != FL_VERDICT_PASS)
		*code = FL_EXIT_NOT_PASS;
	fl_text_free(&text);
	fl_case_free(&one);
	return status;
}
