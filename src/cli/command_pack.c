/* command_pack.c - report and pack: the years of one instrument, and all that a survey asks for, as PDF/A.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "book.h"
#include "derive.h"
#include "history.h"
#include "shelves.h"

#define PDF_MOST ((size_t)256 << 20)

/* ---- what both need ---------------------------------------------------------------------------------------------- */

/* Who issues, and for which day. */
typedef struct fl_letterhead {
	fl_arena arena;
	const char *issuer, *address;
	fl_day day;
} fl_letterhead;

static fl_status letterhead(const fl_cli *cli, fl_letterhead *head, fl_error *err) {
	*head = (fl_letterhead){.day = fl_day_of(fl_cli_now())};
	fl_status status = fl_place_issuer(cli, &head->arena, false, &head->issuer, &head->address, err);
	if (status >= 0 && cli->values[FL_OPT_DATE])
		status = fl_day_parse(cli->values[FL_OPT_DATE], &head->day, err);
	return status;
}

/* HOME/reports/<name>.pdf unless --out says where. */
static fl_status path_of(const fl_cli *cli, const char *what, const char *name, fl_day day, char path[FL_PATH_SIZE],
                         fl_error *err) {
	char folder[FL_PATH_SIZE], file[128], date[FL_DAY_SIZE], plain[64];
	const char *out = cli->values[FL_OPT_OUT];
	if (out) {
		if (strlen(out) >= FL_PATH_SIZE)
			return fl_fail(err, FL_E_VALUE, "the path of --out is longer than %d characters", FL_PATH_SIZE - 1);
		snprintf(path, FL_PATH_SIZE, "%s", out);
		return FL_OK;
	}
	size_t length = 0;
	for (const char *c = name; *c && length < sizeof plain - 1; c++)
		plain[length++] = (*c >= '0' && *c <= '9') || (*c >= 'A' && *c <= 'Z') || (*c >= 'a' && *c <= 'z') ? *c : '-';
	plain[length] = '\0';
	snprintf(file, sizeof file, "%s-%s-%s.pdf", what, plain, fl_day_format(day, date));
	fl_status status = fl_place_join(folder, cli->home, "reports", err);
	if (status >= 0)
		status = fl_folder_make(cli->io, folder, err);
	return status < 0 ? status : fl_place_join(path, folder, file, err);
}

/* The same bytes may stand there already; others are not overwritten. */
static fl_status write_pdf(const fl_cli *cli, const char *path, const unsigned char *bytes, size_t length,
                           fl_error *err) {
	fl_arena arena = {0};
	fl_error local = {0};
	char *old;
	size_t old_length;
	fl_status status = fl_file_read(cli->io, path, PDF_MOST, &arena, &old, &old_length, &local);
	if (status == FL_E_NOT_FOUND)
		status = fl_file_write(cli->io, path, bytes, length, false, err);
	else if (status >= 0 && (old_length != length || memcmp(old, bytes, length) != 0))
		status =
		    fl_fail(err, FL_E_EXISTS, "%s exists with other content and is not overwritten: give another --out", path);
	else if (status < 0)
		fl_fail(err, status, "%s", local.message);
	fl_arena_free(&arena);
	if (status >= 0)
		fprintf(cli->out, "%s\n", path);
	return status;
}

static fl_status faces_of(const fl_cli *cli, char folder[FL_PATH_SIZE], fl_error *err) {
	return fl_place_join(folder, cli->data, "faces", err);
}

/* ---- report ------------------------------------------------------------------------------------------------------ */

static fl_status trend_sheet(const fl_history *history, const fl_letterhead *head, fl_sheet **out, fl_error *err) {
	fl_trend_report report = {.records = history->list.records,
	                          .count = history->list.count,
	                          .fleet = history->has_fleet ? &history->proposals[FL_INTERVAL_RELIABILITY] : NULL,
	                          .made_on = head->day,
	                          .issuer = head->issuer,
	                          .issuer_address = head->address,
	                          .program_version = FOUNDLEFT_VERSION};
	return fl_certificate_trend(&report, out, err);
}

static fl_status print_or_set(const fl_cli *cli, const fl_sheet *sheet, const char *what, const char *name, fl_day day,
                              fl_error *err) {
	char folder[FL_PATH_SIZE], path[FL_PATH_SIZE];
	unsigned char *bytes = NULL;
	size_t length;
	if (cli->values[FL_OPT_TEXT]) {
		fl_text text = {0};
		fl_sheet_text(sheet, &text);
		fputs(text.data ? text.data : "", cli->out);
		fl_text_free(&text);
		return FL_OK;
	}
	fl_status status = faces_of(cli, folder, err);
	if (status >= 0)
		status = fl_certificate_pdf(sheet, cli->io, &(fl_faces){folder}, &bytes, &length, err);
	if (status >= 0)
		status = path_of(cli, what, name, day, path, err);
	if (status >= 0)
		status = write_pdf(cli, path, bytes, length, err);
	free(bytes);
	return status;
}

fl_status fl_command_report(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_store *book = NULL;
	fl_arena arena = {0};
	fl_known_instrument instrument;
	fl_history history = {0};
	fl_letterhead head = {0};
	fl_sheet *sheet = NULL;
	const char *serial = cli->argument_count > 1 ? cli->arguments[1] : NULL;
	fl_status status = letterhead(cli, &head, err);
	if (status >= 0)
		status = fl_book_open(cli, FL_STORE_READ, &book, err);
	if (status >= 0)
		status = fl_book_instrument(book, cli->arguments[0], serial, &arena, &instrument, err);
	if (status >= 0)
		status = fl_history_load(book, &instrument, NULL, cli->values[FL_OPT_FLEET] != NULL, &history, err);
	if (status >= 0)
		status = trend_sheet(&history, &head, &sheet, err);
	if (status >= 0)
		status = print_or_set(cli, sheet, "trend", cli->arguments[0], head.day, err);
	fl_sheet_free(sheet);
	fl_history_free(&history);
	fl_arena_free(&head.arena);
	fl_arena_free(&arena);
	fl_store_close(book);
	return status;
}

/* ---- pack: certificates ------------------------------------------------------------------------------------------ */

/* Everything that goes into the pack. */
typedef struct fl_packing {
	fl_cli *cli;
	fl_store *book;
	fl_letterhead head;
	fl_arena arena;
	fl_shelves shelves;
	fl_survey_instrument *rows;
	size_t row_count;
	fl_pack_part *parts;
	size_t part_count, part_capacity;
	size_t *part_of_row, *trend_of_row; /* index into parts; 0: none (that is the status page) */
	const char **open;
	size_t open_count, open_capacity;
	fl_dated *dated;
	size_t dated_count;
} fl_packing;

static fl_status add_open(fl_packing *p, const char *sentence, fl_error *err) {
	const char **grown = fl_arena_grow(&p->arena, p->open, p->open_count, &p->open_capacity, sizeof *grown);
	if (!grown || !sentence)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the pack");
	p->open = grown;
	p->open[p->open_count++] = sentence;
	return FL_OK;
}

static fl_status add_part(fl_packing *p, const fl_sheet *sheet, const char *title, int level, fl_error *err) {
	fl_pack_part *grown = fl_arena_grow(&p->arena, p->parts, p->part_count, &p->part_capacity, sizeof *grown);
	if (!grown || !title)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the pack");
	p->parts = grown;
	p->parts[p->part_count++] = (fl_pack_part){.sheet = sheet, .title = title, .level = level};
	return FL_OK;
}

/* From the journal that issued the paper: exactly the pages that were issued. FL_E_NOT_FOUND where it is not here. */
static fl_status sheet_of_paper(const fl_packing *p, const fl_paper *paper, fl_sheet **out, fl_error *err) {
	char journal[FL_PATH_SIZE], *bytes;
	size_t length;
	int sequence;
	fl_arena arena = {0};
	fl_derived derived;
	fl_status status = fl_store_bytes(p->book, paper->digest, &arena, &bytes, &length, err);
	if (status >= 0)
		status = fl_derive_find(p->cli, paper->file, (unsigned char *)bytes, length, journal, &sequence, err);
	if (status >= 0)
		status = fl_derive(p->cli, journal, sequence, &derived, err);
	if (status >= 0) {
		status = fl_derive_sheet(&derived.one, &derived.issue, out, err);
		fl_derived_free(&derived);
	}
	fl_arena_free(&arena);
	return status;
}

/* From the journal that the book keeps; who issued and when is then the record's. */
static fl_status sheet_of_record(const fl_packing *p, const fl_record *record, fl_sheet **out, fl_error *err) {
	char *bytes;
	size_t length;
	fl_arena arena = {0};
	fl_case one;
	fl_status status = fl_store_bytes(p->book, record->digest, &arena, &bytes, &length, err);
	if (status >= 0)
		status = fl_case_replay(bytes, length, record->number, &one, err);
	if (status >= 0) {
		const fl_setting *offset = fl_session_setting(&one.session, "utc-offset");
		fl_day kept_on = fl_day_of(record->kept_at);
		fl_issue issue = {.number = record->number,
		                  .issued_on = kept_on,
		                  .issued_at = (fl_utc)kept_on * 86400,
		                  .utc_offset_min = offset ? (int)offset->value : 0,
		                  .issuer = p->head.issuer,
		                  .issuer_address = p->head.address,
		                  .journal_digest = one.head,
		                  .journal_name = record->number,
		                  .program_version = record->program,
		                  .amends = *record->replaces_number ? record->replaces_number : NULL,
		                  .amends_reason = *record->replaces_number ? record->reason : NULL};
		status = fl_derive_sheet(&one, &issue, out, err);
		fl_case_free(&one);
	}
	fl_arena_free(&arena);
	return status;
}

static void mark_copy(fl_packing *p, fl_sheet *sheet, const fl_record *record, const fl_paper *paper) {
	char *mark = paper ? fl_arena_printf(&p->arena, "Copy: the %s original rules, SHA-256 %.16s…", paper->stage,
	                                     paper->paper_digest)
	                   : fl_arena_printf(&p->arena, "From the record book: no certificate was issued");
	char *where =
	    paper ? fl_arena_printf(&p->arena,
	                            "They stand on the original, %s (%s), which rules. It is kept in the record book; "
	                            "its digest (SHA-256) is %s.",
	                            paper->file, paper->stage, paper->paper_digest)
	          : fl_arena_printf(&p->arena,
	                            "None: the book holds the closed session but no certificate. Digest of its "
	                            "journal (SHA-256): %s.",
	                            record->journal_digest);
	fl_certificate_mark_copy(sheet, mark ? mark : "Copy", where ? where : "On the original.");
}

/* "TY-2026-0430.pdf" -> "TY-2026-0430": the certificate's number, which may be another than the record's. */
static const char *number_of(fl_packing *p, const fl_record *record, const fl_paper *paper) {
	size_t length = paper ? strlen(paper->file) : 0;
	if (length > 4 && strcmp(paper->file + length - 4, ".pdf") == 0)
		return fl_arena_strndup(&p->arena, paper->file, length - 4);
	return fl_arena_strdup(&p->arena, record->number);
}

/* The certificate of a record as a part; a journal that stayed on the ship leaves an open point instead. */
static fl_status add_certificate(fl_packing *p, const fl_record *record, fl_survey_instrument *row, fl_error *err) {
	fl_paper *papers;
	size_t count;
	fl_sheet *sheet = NULL;
	fl_error passed_over = {0}, why = {0};
	fl_status status = fl_store_papers(p->book, record->digest, &p->arena, &papers, &count, err);
	if (status < 0)
		return status;
	const fl_paper *last = count ? &papers[count - 1] : NULL;
	row->number = number_of(p, record, last);
	if (!row->number)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the pack");
	status = last ? sheet_of_paper(p, last, &sheet, &passed_over) : FL_E_NOT_FOUND;
	if (status < 0)
		status = sheet_of_record(p, record, &sheet, &why);
	if (status == FL_E_NOT_FOUND)
		return add_open(p,
		                fl_arena_printf(&p->arena,
		                                "the journal of %s, certificate %s, is not in this book: ask the ship",
		                                record->tag, record->number),
		                err);
	if (status < 0)
		return fl_fail(err, status, "%s", why.message);
	mark_copy(p, sheet, record, last);
	if (!last)
		status = add_open(p,
		                  fl_arena_printf(&p->arena, "no certificate of the session %s of %s is in the book",
		                                  record->number, record->tag),
		                  err);
	return status < 0
	           ? status
	           : add_part(p, sheet, fl_arena_printf(&p->arena, "%s %s", last ? "Certificate" : "Session", row->number),
	                      1, err);
}

/* ---- pack: instruments ------------------------------------------------------------------------------------------- */

static fl_status note_open(fl_packing *p, const fl_record *last, fl_error *err) {
	char day[FL_DAY_SIZE];
	const fl_kept_run *left = last->as_left.state != FL_KEPT_NONE ? &last->as_left : &last->as_found;
	fl_status status = FL_OK;
	if (last->due != FL_NO_DAY && last->due < p->head.day)
		status = add_open(p,
		                  fl_arena_printf(&p->arena, "%s (%s) is overdue since %s", last->tag, last->serial,
		                                  fl_day_format(last->due, day)),
		                  err);
	if (status >= 0 && last->due == FL_NO_DAY)
		status = add_open(
		    p, fl_arena_printf(&p->arena, "no calibration interval is agreed for %s (%s)", last->tag, last->serial),
		    err);
	if (status >= 0 && strcmp(left->verdict, "pass") != 0)
		status = add_open(p,
		                  fl_arena_printf(&p->arena, "%s was left on %s with the verdict \"%s\"", last->tag,
		                                  fl_day_format(last->day, day), *left->verdict ? left->verdict : "none"),
		                  err);
	if (status >= 0 && strcmp(last->as_found.verdict, "fail") == 0)
		status = add_open(p,
		                  fl_arena_printf(&p->arena,
		                                  "%s was found out of tolerance on %s: the look-back in its trend report "
		                                  "needs a disposition",
		                                  last->tag, fl_day_format(last->day, day)),
		                  err);
	return status;
}

static fl_status add_instrument(fl_packing *p, const fl_known_instrument *instrument, fl_error *err) {
	fl_history history = {0};
	fl_sheet *trend = NULL;
	fl_status status = fl_history_load(p->book, instrument, NULL, false, &history, err);
	if (status < 0 || history.list.count == 0) {
		fl_history_free(&history);
		return status;
	}
	const fl_record *last = &history.list.records[history.list.count - 1];
	const fl_kept_run *left = last->as_left.state != FL_KEPT_NONE ? &last->as_left : &last->as_found;
	size_t row = p->row_count++, group = p->part_count;
	p->rows[row] = (fl_survey_instrument){.tag = instrument->tag,
	                                      .serial = instrument->serial,
	                                      .site = instrument->site,
	                                      .position = fl_arena_strdup(&p->arena, last->position),
	                                      .number = "",
	                                      .verdict = fl_arena_strdup(&p->arena, left->verdict),
	                                      .last = last->day,
	                                      .due = last->due};
	if (!p->rows[row].position || !p->rows[row].verdict)
		status = fl_fail(err, FL_E_MEMORY, "out of memory for the pack");
	if (status >= 0)
		status = add_part(p, NULL, fl_arena_printf(&p->arena, "%s, %s", instrument->tag, instrument->serial), 0, err);
	if (status >= 0)
		status = note_open(p, last, err);
	if (status >= 0)
		status = add_certificate(p, last, &p->rows[row], err);
	p->part_of_row[row] = p->part_count > group + 1 ? group + 1 : 0;
	if (status >= 0)
		status = trend_sheet(&history, &p->head, &trend, err);
	if (status >= 0) {
		p->trend_of_row[row] = p->part_count;
		status = add_part(p, trend, fl_arena_printf(&p->arena, "Trend of %s", instrument->tag), 1, err);
	}
	fl_history_free(&history);
	return status;
}

static bool is_aboard(const char *site, const char *ship) {
	return strcmp(ship, "all") == 0 || strncasecmp(site, ship, strlen(ship)) == 0;
}

/* Instruments of the stock that were never calibrated. */
static fl_status add_never(fl_packing *p, const char *ship, size_t known, fl_error *err) {
	fl_status status = FL_OK;
	for (size_t i = 0; status >= 0 && i < p->shelves.stock.instrument_count; i++) {
		const fl_instrument *one = &p->shelves.stock.instruments[i];
		bool there = !is_aboard(one->site, ship);
		for (size_t n = 0; n < known; n++)
			there = there || (strcmp(p->rows[n].tag, one->tag) == 0 && strcmp(p->rows[n].serial, one->serial) == 0);
		if (there)
			continue;
		p->rows[p->row_count++] = (fl_survey_instrument){.tag = one->tag,
		                                                 .serial = one->serial,
		                                                 .site = one->site,
		                                                 .position = one->position,
		                                                 .number = "",
		                                                 .verdict = "",
		                                                 .last = FL_NO_DAY,
		                                                 .due = FL_NO_DAY};
		status = add_open(
		    p, fl_arena_printf(&p->arena, "no calibration of %s (%s) is in the book", one->tag, one->serial), err);
	}
	return status;
}

static fl_status add_instruments(fl_packing *p, const char *ship, fl_error *err) {
	fl_known_instrument *known;
	size_t count;
	fl_status status = fl_store_instruments(p->book, NULL, &p->arena, &known, &count, err);
	if (status < 0)
		return status;
	size_t room = count + p->shelves.stock.instrument_count + 1;
	p->rows = fl_arena_alloc(&p->arena, room, sizeof *p->rows);
	p->part_of_row = fl_arena_alloc(&p->arena, room, sizeof *p->part_of_row);
	p->trend_of_row = fl_arena_alloc(&p->arena, room, sizeof *p->trend_of_row);
	if (!p->rows || !p->part_of_row || !p->trend_of_row)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the pack");
	for (size_t i = 0; status >= 0 && i < count; i++)
		if (is_aboard(known[i].site, ship))
			status = add_instrument(p, &known[i], err);
	if (status >= 0)
		status = add_never(p, ship, p->row_count, err);
	if (status >= 0 && p->row_count == 0)
		status = fl_fail(err, FL_E_NOT_FOUND,
		                 "neither the book nor the stock has an instrument of `%.80s`: write how its "
		                 "site begins, or all",
		                 ship);
	return status;
}

static fl_status add_standards(fl_packing *p, fl_error *err) {
	char day[FL_DAY_SIZE];
	size_t past;
	fl_status status =
	    fl_shelves_dated(&p->shelves.stock, p->head.day, &p->arena, &p->dated, &p->dated_count, &past, err);
	for (size_t i = 0; status >= 0 && i < p->dated_count; i++)
		if (p->dated[i].last < p->head.day)
			status = add_open(p,
			                  fl_arena_printf(&p->arena, "%s %s may not be used since %s", p->dated[i].what,
			                                  p->dated[i].name, fl_day_format(p->dated[i].last + 1, day)),
			                  err);
	return status;
}

/* ---- pack: pages ------------------------------------------------------------------------------------------------- */

/* The status page, with the pages as the parts say them. */
static fl_status status_sheet(fl_packing *p, const char *ship, fl_sheet **out, fl_error *err) {
	char content[FL_DIGEST_HEX_SIZE];
	fl_survey_standard *standards = fl_arena_alloc(&p->arena, p->dated_count + 1, sizeof *standards);
	fl_status status = fl_store_content(p->book, content, err);
	if (!standards)
		return fl_fail(err, FL_E_MEMORY, "out of memory for the pack");
	if (status < 0)
		return status;
	for (size_t i = 0; i < p->dated_count; i++)
		standards[i] = (fl_survey_standard){p->dated[i].what, p->dated[i].name, p->dated[i].detail, p->dated[i].last};
	for (size_t i = 0; i < p->row_count; i++) {
		p->rows[i].page = p->part_of_row[i] ? p->parts[p->part_of_row[i]].page : 0;
		p->rows[i].trend_page = p->trend_of_row[i] ? p->parts[p->trend_of_row[i]].page : 0;
	}
	fl_survey survey = {.ship = strcmp(ship, "all") == 0 ? "all ships and sites of the book" : p->rows[0].site,
	                    .instruments = p->rows,
	                    .instrument_count = p->row_count,
	                    .standards = standards,
	                    .standard_count = p->dated_count,
	                    .open = p->open,
	                    .open_count = p->open_count,
	                    .content = content,
	                    .made_on = p->head.day,
	                    .issuer = p->head.issuer,
	                    .issuer_address = p->head.address,
	                    .program_version = FOUNDLEFT_VERSION};
	return fl_certificate_survey(&survey, out, err);
}

/* Set twice: the first time says on which pages the parts come to stand. */
static fl_status set_pack(fl_packing *p, const char *ship, unsigned char **bytes, size_t *length, fl_error *err) {
	char folder[FL_PATH_SIZE];
	fl_status status = faces_of(p->cli, folder, err);
	for (int turn = 0; status >= 0 && turn < 2; turn++) {
		fl_sheet *sheet = NULL;
		free(*bytes);
		*bytes = NULL;
		status = status_sheet(p, ship, &sheet, err);
		p->parts[0].sheet = sheet;
		if (status >= 0)
			status =
			    fl_certificate_pack_pdf(p->parts, p->part_count, p->cli->io, &(fl_faces){folder}, bytes, length, err);
		fl_sheet_free(sheet);
		p->parts[0].sheet = NULL;
	}
	return status;
}

static fl_status gather(fl_packing *p, const char *ship, fl_error *err) {
	char day[FL_DAY_SIZE];
	fl_status status = letterhead(p->cli, &p->head, err);
	if (status >= 0)
		status = fl_shelves_load(p->cli, &p->shelves, err);
	if (status >= 0) {
		fl_stock_keep(&p->shelves.stock, p->head.day);
		status = fl_book_open(p->cli, FL_STORE_READ, &p->book, err);
	}
	if (status >= 0)
		status = add_part(p, NULL, fl_arena_printf(&p->arena, "State on %s", fl_day_format(p->head.day, day)), 0, err);
	if (status >= 0)
		status = add_instruments(p, ship, err);
	return status < 0 ? status : add_standards(p, err);
}

fl_status fl_command_pack(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	fl_packing p = {.cli = cli};
	const char *ship = cli->arguments[0];
	char path[FL_PATH_SIZE];
	unsigned char *bytes = NULL;
	size_t length = 0;
	fl_status status = gather(&p, ship, err);
	if (status >= 0)
		status = set_pack(&p, ship, &bytes, &length, err);
	if (status >= 0)
		status = path_of(cli, "pack", ship, p.head.day, path, err);
	if (status >= 0)
		status = write_pdf(cli, path, bytes, length, err);
	free(bytes);
	for (size_t i = 0; i < p.part_count; i++)
		fl_sheet_free((fl_sheet *)(uintptr_t)p.parts[i].sheet);
	fl_store_close(p.book);
	fl_shelves_free(&p.shelves);
	fl_arena_free(&p.head.arena);
	fl_arena_free(&p.arena);
	return status;
}
