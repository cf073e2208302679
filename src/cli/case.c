/* case.c - journal -> session -> procedure and stock -> result, in one go.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "case.h"

#include <stdio.h>
#include <string.h>

static fl_status set_path(fl_case *one, const char *path, fl_error *err) {
	*one = (fl_case){0};
	if (strlen(path) >= sizeof one->path)
		return fl_fail(err, FL_E_VALUE, "the path is longer than %zu characters", sizeof one->path - 1);
	snprintf(one->path, sizeof one->path, "%s", path);
	return FL_OK;
}

/* An opinion that cannot be formed stands in nobody's way: it says why, and the result is the same. */
fl_status fl_case_causes(const fl_case *one, fl_cause causes[FL_RUN_KINDS], fl_error *err) {
	for (fl_run_kind run = FL_RUN_AS_FOUND; run < FL_RUN_KINDS; run++) {
		fl_error why = {0};
		fl_cause *cause = &causes[run];
		if (!one->result.runs[run].available || one->result.runs[run].same_as_found)
			continue;
		fl_status status = fl_cause_find(&one->session, &one->procedure, &one->stock, &one->result, run, NULL,
		                                 one->shelf, cause, &why);
		if (status == FL_E_MEMORY)
			return fl_fail(err, status, "%s", why.message);
		if (status >= 0)
			continue;
		*cause = (fl_cause){.run = run};
		cause->unavailable_reason = fl_arena_strdup(&cause->arena, why.message);
	}
	return FL_OK;
}

fl_status fl_case_compute(fl_case *one, fl_error *err) {
	fl_status status = fl_session_procedure(&one->session, &one->procedure, err);
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

/* With the opinions about it, which take several times as long as everything else. */
fl_status fl_case_look_for_causes(fl_case *one, fl_error *err) {
	one->has_causes = true;
	return fl_case_causes(one, one->causes, err);
}

fl_status fl_case_read(const fl_io *io, const char *path, fl_case *out, fl_error *err) {
	fl_status status = set_path(out, path, err);
	return status < 0 ? status : fl_journal_read(io, path, &out->session, out->head, &out->torn, err);
}

fl_status fl_case_load(const fl_io *io, const char *path, fl_case *out, fl_error *err) {
	fl_status status = fl_case_read(io, path, out, err);
	if (status >= 0)
		status = fl_case_compute(out, err);
	if (status < 0)
		fl_case_free(out);
	return status;
}

fl_status fl_case_replay(const char *bytes, size_t length, const char *name, fl_case *out, fl_error *err) {
	fl_hasher *hasher = NULL;
	fl_status status = set_path(out, name, err);
	if (status >= 0)
		status = fl_hasher_new(&hasher, err);
	if (status >= 0)
		status = fl_journal_replay(bytes, length, name, hasher, &out->session, out->head, err);
	fl_hasher_free(hasher);
	if (status >= 0)
		status = fl_case_compute(out, err);
	if (status < 0)
		fl_case_free(out);
	return status;
}

fl_status fl_case_load_to(const fl_io *io, const char *path, int sequence, fl_arena *arena, char **bytes,
                          size_t *length, fl_case *out, fl_error *err) {
	fl_status status = set_path(out, path, err);
	if (status >= 0)
		status = fl_journal_read_to(io, path, sequence, &out->session, out->head, arena, bytes, length, err);
	if (status >= 0)
		status = fl_case_compute(out, err);
	if (status < 0)
		fl_case_free(out);
	return status;
}

fl_status fl_case_of(const fl_session *session, const fl_stock *shelf, fl_case *out, fl_error *err) {
	*out = (fl_case){.session = *session, .shelf = shelf, .borrowed = true};
	fl_status status = fl_case_compute(out, err);
	if (status >= 0)
		status = fl_case_look_for_causes(out, err);
	if (status < 0)
		fl_case_free(out);
	return status;
}

void fl_case_free(fl_case *one) {
	for (int run = 0; run < FL_RUN_KINDS; run++)
		fl_cause_free(&one->causes[run]);
	fl_arena_free(&one->beyond.arena);
	fl_result_free(&one->result);
	fl_stock_free(&one->stock);
	fl_procedure_free(&one->procedure);
	if (!one->borrowed)
		fl_session_free(&one->session);
	*one = (fl_case){0};
}
