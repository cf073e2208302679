/* command_result.c - assess, certify, check: what follows from a journal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "case.h"
#include "cli.h"
#include "foundleft/certificate.h"
#include "foundleft/document.h"
#include "report.h"

/* ---- assess ---------------------------------------------------------------------------------------------------- */

static fl_status width_of(const fl_cli *cli, int *columns, fl_error *err) {
	*columns = fl_cli_columns(cli);
	const char *text = cli->values[FL_OPT_WIDTH];
	if (text == NULL)
		return FL_OK;
	char *rest;
	long value = strtol(text, &rest, 10);
	if (rest == text || *rest || value < 60 || value > 200)
		return fl_fail(err, FL_E_USAGE, "--width takes a number of columns from 60 to 200, not `%s`", text);
	*columns = (int)value;
	return FL_OK;
}

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
	fl_status status = width_of(cli, &columns, err);
	if (status >= 0)
		status = fl_place_journal(cli, cli->arguments[0], path, err);
	if (status < 0)
		return status;
	status = fl_case_load(cli->io, path, &one, err);
	if (status < 0)
		return status;
	if (cli->values[FL_OPT_JSON])
		status = fl_report_json(&one, &text, err);
	else
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

/* ---- certify --------------------------------------------------------------------------------------------------- */

/* Name and address of the issuer from bench.yaml, unless the options say them. */
static fl_status issuer_of(const fl_cli *cli, fl_arena *arena, fl_issue *issue, fl_error *err) {
	static const char *const KNOWN[] = {"issuer", "address", NULL};
	char path[FL_PATH_SIZE], *text;
	size_t length;
	const fl_node *root;
	fl_error local = {0};
	issue->issuer = cli->values[FL_OPT_ISSUER];
	issue->issuer_address = cli->values[FL_OPT_ISSUER_ADDRESS];
	fl_status status = fl_place_join(path, cli->stock, "bench.yaml", err);
	if (status < 0)
		return status;
	status = fl_file_read(cli->io, path, 1 << 20, arena, &text, &length, &local);
	if (status == FL_E_NOT_FOUND)
		return FL_OK;
	if (status < 0)
		return fl_fail(err, status, "%s", local.message);
	status = fl_document_parse(arena, text, path, &root, err);
	if (status >= 0)
		status = fl_node_only(root, KNOWN, err);
	if (status >= 0 && issue->issuer == NULL)
		status = fl_node_text(root, "issuer", true, &issue->issuer, err);
	if (status >= 0 && issue->issuer_address == NULL)
		status = fl_node_text(root, "address", true, &issue->issuer_address, err);
	return status;
}

/* "folder/2026-04-14-VT-1.flj" -> "2026-04-14-VT-1" */
static void stem_of(const char *path, char out[FL_PATH_SIZE]) {
	const char *slash = strrchr(path, '/');
	snprintf(out, FL_PATH_SIZE, "%s", slash ? slash + 1 : path);
	char *dot = strrchr(out, '.');
	if (dot != NULL && dot != out)
		*dot = '\0';
}

static fl_status issue_of(const fl_cli *cli, const fl_case *one, fl_arena *arena, fl_issue *issue, fl_error *err) {
	char stem[FL_PATH_SIZE];
	*issue = (fl_issue){.authorised_by = cli->values[FL_OPT_AUTHORISED_BY],
	                    .journal_digest = one->head,
	                    .program_version = FOUNDLEFT_VERSION,
	                    .number = cli->values[FL_OPT_NUMBER],
	                    .issued_on = fl_day_of(fl_cli_now())};
	const char *slash = strrchr(one->path, '/');
	issue->journal_name = slash ? slash + 1 : one->path;
	if (issue->number == NULL) {
		stem_of(one->path, stem);
		issue->number = fl_arena_strdup(arena, stem);
		if (issue->number == NULL)
			return fl_fail(err, FL_E_MEMORY, "out of memory");
	}
	const fl_setting *offset = fl_session_setting(&one->session, "utc-offset");
	issue->utc_offset_min = offset ? (int)offset->value : 0;
	if (cli->values[FL_OPT_DATE]) {
		fl_status status = fl_day_parse(cli->values[FL_OPT_DATE], &issue->issued_on, err);
		if (status < 0)
			return status;
	}
	if (issue->issued_on < one->session.day)
		return fl_fail(err, FL_E_VALUE, "--date lies before the day of the calibration");
	/* Midnight of the day of issue: the same date gives the same bytes. */
	issue->issued_at = (fl_utc)issue->issued_on * 86400;
	return issuer_of(cli, arena, issue, err);
}

/* An existing certificate with the same bytes is fine; with others it is never overwritten. */
static fl_status write_certificate(const fl_cli *cli, const char *path, const unsigned char *bytes, size_t length,
                                   fl_error *err) {
	fl_arena arena = {0};
	fl_error local = {0};
	char *old;
	size_t old_length;
	fl_status status = fl_file_read(cli->io, path, 256 << 20, &arena, &old, &old_length, &local);
	if (status == FL_E_NOT_FOUND)
		status = fl_file_write(cli->io, path, bytes, length, false, err);
	else if (status >= 0 && (old_length != length || memcmp(old, bytes, length) != 0))
		status = fl_fail(err, FL_E_EXISTS,
		                 "%s exists with other content and is never overwritten: give another --number or --out", path);
	else if (status < 0)
		fl_fail(err, status, "%s", local.message);
	fl_arena_free(&arena);
	return status;
}

static fl_status certificate_path(const fl_cli *cli, const fl_case *one, char path[FL_PATH_SIZE], fl_error *err) {
	const char *out = cli->values[FL_OPT_OUT];
	size_t length = strlen(one->path);
	if (out == NULL && length > 4 && strcmp(one->path + length - 4, ".flj") == 0)
		length -= 4;
	int written = out ? snprintf(path, FL_PATH_SIZE, "%s", out)
	                  : snprintf(path, FL_PATH_SIZE, "%.*s.pdf", (int)length, one->path);
	return written < FL_PATH_SIZE ? FL_OK : fl_fail(err, FL_E_VALUE, "the path of the certificate is too long");
}

static fl_status set_certificate(const fl_cli *cli, const fl_case *one, const fl_sheet *sheet, fl_error *err) {
	char folder[FL_PATH_SIZE], path[FL_PATH_SIZE];
	unsigned char *bytes = NULL;
	size_t length;
	fl_status status = certificate_path(cli, one, path, err);
	if (status >= 0)
		status = fl_place_join(folder, cli->data, "faces", err);
	if (status >= 0)
		status = fl_certificate_pdf(sheet, cli->io, &(fl_faces){folder}, &bytes, &length, err);
	if (status >= 0)
		status = write_certificate(cli, path, bytes, length, err);
	if (status >= 0)
		fprintf(cli->out, "certificate: %s\n", path);
	free(bytes);
	return status;
}

fl_status fl_command_certify(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	char path[FL_PATH_SIZE];
	fl_case one;
	fl_arena arena = {0};
	fl_issue issue;
	fl_sheet *sheet = NULL;
	fl_status status = fl_place_journal(cli, cli->arguments[0], path, err);
	if (status >= 0)
		status = fl_case_load(cli->io, path, &one, err);
	if (status < 0)
		return status;
	if (!one.session.closed)
		status = fl_fail_at(err, FL_E_STATE, (fl_place){.file = path},
		                    "the session is still open: finish it with foundleft resume, then certify");
	if (status >= 0)
		status = issue_of(cli, &one, &arena, &issue, err);
	if (status >= 0)
		status = fl_certificate_content(&one.session, &one.procedure, &one.stock, &one.result, &issue, &sheet, err);
	if (status >= 0 && cli->values[FL_OPT_TEXT]) {
		fl_text text = {0};
		fl_sheet_text(sheet, &text);
		fputs(text.data ? text.data : "", cli->out);
		fl_text_free(&text);
	} else if (status >= 0) {
		status = set_certificate(cli, &one, sheet, err);
	}
	fl_sheet_free(sheet);
	fl_arena_free(&arena);
	fl_case_free(&one);
	return status;
}

/* ---- check ------------------------------------------------------------------------------------------------------ */

static fl_status check_journal(const fl_cli *cli, const char *path, fl_error *err) {
	fl_case one;
	char opened[FL_DAY_SIZE];
	fl_status status = fl_case_load(cli->io, path, &one, err);
	if (status < 0)
		return status;
	fprintf(cli->out, "%s: journal of %s, %s, %d lines, every digest fits, %s%s\n  digest %s\n", path,
	        one.instrument->tag, fl_day_format(one.session.day, opened), one.session.last_sequence,
	        one.session.closed ? "closed" : "still open",
	        one.torn ? "; an unfinished last line is ignored (resume cuts it off)" : "", one.head);
	fl_case_free(&one);
	return FL_OK;
}

static bool has_key(const fl_node *root, const char *key) {
	return root->kind == FL_NODE_MAP && fl_node_get(root, key) != NULL;
}

static fl_status check_yaml(const fl_cli *cli, const char *path, fl_error *err) {
	fl_arena arena = {0};
	char *text;
	size_t length;
	const fl_node *root;
	fl_stock stock = {0};
	fl_procedure procedure = {0};
	fl_status status = fl_file_read(cli->io, path, 4 << 20, &arena, &text, &length, err);
	if (status >= 0)
		status = fl_document_parse(&arena, text, path, &root, err);
	if (status >= 0 && (has_key(root, "oils") || has_key(root, "equipment") || has_key(root, "instruments"))) {
		status = fl_stock_parse(&stock, text, path, err);
		if (status >= 0)
			fprintf(cli->out, "%s: stock, %zu oil lots, %zu measuring equipment, %zu instruments, all consistent\n",
			        path, stock.oil_count, stock.equipment_count, stock.instrument_count);
	} else if (status >= 0) {
		status = fl_procedure_load(cli->io, path, &procedure, err);
		if (status >= 0)
			fprintf(cli->out, "%s: procedure %s, version %s, consistent\n", path, procedure.id, procedure.version);
	}
	fl_procedure_free(&procedure);
	fl_stock_free(&stock);
	fl_arena_free(&arena);
	return status;
}

static bool ends_with(const char *text, const char *tail) {
	size_t length = strlen(text), size = strlen(tail);
	return length >= size && strcmp(text + length - size, tail) == 0;
}

fl_status fl_command_check(fl_cli *cli, fl_exit *code, fl_error *err) {
	fl_status first = FL_OK;
	for (int i = 0; i < cli->argument_count; i++) {
		char path[FL_PATH_SIZE], line[1400];
		fl_error local = {0};
		fl_status status;
		if (ends_with(cli->arguments[i], ".yaml") || ends_with(cli->arguments[i], ".yml")) {
			status = check_yaml(cli, cli->arguments[i], &local);
		} else {
			status = fl_place_journal(cli, cli->arguments[i], path, &local);
			if (status >= 0)
				status = check_journal(cli, path, &local);
		}
		if (status >= 0)
			continue;
		if (first == FL_OK) {
			first = status;
			*err = local;
		} else {
			fprintf(cli->err, "foundleft: %s\n", fl_error_line(&local, line, sizeof line));
		}
	}
	(void)code;
	return first;
}
