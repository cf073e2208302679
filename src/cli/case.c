/* case.c - journal -> session -> procedure and stock -> result, in one go.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "case.h"

#include <stdio.h>
#include <string.h>

static fl_status load_parts(const fl_io *io, fl_case *one, fl_error *err) {
	fl_status status = fl_journal_read(io, one->path, &one->session, one->head, &one->torn, err);
	if (status < 0)
		return status;
	status = fl_session_procedure(&one->session, &one->procedure, err);
	if (status < 0)
		return status;
	status = fl_session_stock(&one->session, &one->stock, err);
	if (status < 0)
		return status;
	if (one->stock.instrument_count == 0)
		return fl_fail_at(err, FL_E_VALUE, (fl_place){.file = one->path}, "the journal names no instrument");
	one->instrument = &one->stock.instruments[0];
	return fl_analysis_session(&one->session, &one->procedure, &one->stock, &one->result, err);
}

fl_status fl_case_load(const fl_io *io, const char *path, fl_case *out, fl_error *err) {
	*out = (fl_case){0};
	if (strlen(path) >= sizeof out->path)
		return fl_fail(err, FL_E_VALUE, "the path is longer than %zu characters", sizeof out->path - 1);
	snprintf(out->path, sizeof out->path, "%s", path);
	fl_status status = load_parts(io, out, err);
	if (status < 0)
		fl_case_free(out);
	return status;
}

void fl_case_free(fl_case *one) {
	fl_result_free(&one->result);
	fl_stock_free(&one->stock);
	fl_procedure_free(&one->procedure);
	fl_session_free(&one->session);
	*one = (fl_case){0};
}
