/* command_check.c - check: what a file is, who vouches for it, whether every byte fits.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * One table of kinds, told apart by content: a further kind of file is one row. Each kind prints what it is, a line for
 * each thing checked, and one verdict; its exit code is 0 (good), 1 (unchanged, but somebody is not vouched for or
 * something is missing) or 7 (changed, added to, or not as it must be).
 */
#include <stdlib.h>
#include <string.h>

#include "book.h"
#include "derive.h"
#include "foundleft/document.h"
#include "report_parts.h"
#include "signing.h"

#define HEAD_SIZE 64
#define FILE_MOST ((size_t)256 << 20)

/* ---- findings ---------------------------------------------------------------------------------------------------- */

/* What was found of one file so far. */
typedef struct fl_findings {
	const fl_cli *cli;
	int columns;
	bool broken, doubtful; /* a line said so */
	fl_text why;           /* the first sentences that did */
} fl_findings;

static void because(fl_findings *found, const char *sentence) {
	if (found->why.data && strstr(found->why.data, sentence))
		return;
	if (found->why.length > 0)
		fl_text_add(&found->why, "; ");
	fl_text_add(&found->why, sentence);
}

static void print_wrapped(const fl_findings *found, const char *lead, const char *text) {
	fl_text out = {0};
	fl_report_wrap(&out, lead, text, found->columns);
	fputs(out.data ? out.data : "", found->cli->out);
	fl_text_free(&out);
}

#define OPEN ((fl_check_mark)(FL_CHECK_BAD + 1)) /* nothing was changed, but nobody vouches or something is missing */

static void print_line(const fl_findings *found, fl_check_mark mark, const char *what, const char *sentence) {
	static const char *const leads[] = {"  good  ", "  note  ", "  BAD   ", "  OPEN  "};
	char text[700];
	snprintf(text, sizeof text, "%.60s: %.600s", what, sentence);
	print_wrapped(found, leads[mark], text);
}

/* A line of our own that leaves a doubt. */
static void doubt(fl_findings *found, const char *what, const char *sentence, const char *why) {
	print_line(found, OPEN, what, sentence);
	found->doubtful = true;
	because(found, why);
}

static void breaks(fl_findings *found, const char *what, const char *sentence, const char *why) {
	print_line(found, FL_CHECK_BAD, what, sentence);
	found->broken = true;
	because(found, why);
}

static void print_signature(const fl_findings *found, const char *kind, int number, const fl_seal_signature *one) {
	const fl_identity *who = &one->signer;
	char lead[40], text[900];
	snprintf(lead, sizeof lead, "  %s %d: ", kind, number);
	snprintf(text, sizeof text, "%s%s%s%s%s", *who->name ? who->name : "nobody that can be named",
	         *who->organisation ? ", " : "", who->organisation, *one->role ? ", as " : "", one->role);
	print_wrapped(found, lead, text);
}

/* Lines of the report, under a heading for each signature. `first` numbers the first of them. */
static void print_report(fl_findings *found, const fl_seal_report *report, const char *kind, int first) {
	for (int index = 0; index <= (int)report->signature_count; index++) {
		if (index > 0)
			print_signature(found, kind, first + index - 1, &report->signatures[index - 1]);
		for (size_t i = 0; i < report->line_count; i++) {
			const fl_check_line *line = &report->lines[i];
			bool only_trust = line->mark == FL_CHECK_BAD && report->verdict == FL_SEAL_UNTRUSTED;
			if (line->signature == index)
				print_line(found, only_trust ? OPEN : line->mark, line->what, line->sentence);
		}
	}
}

static void weigh(fl_findings *found, const fl_seal_report *report) {
	if (report->verdict == FL_SEAL_BROKEN) {
		found->broken = true;
		because(found, "something was changed, added, or is not as a signature must be");
	} else if (report->verdict == FL_SEAL_UNTRUSTED) {
		found->doubtful = true;
		because(found, "not everybody who signed is vouched for");
	}
}

static fl_exit print_verdict(fl_findings *found, const char *good) {
	if (found->broken)
		print_wrapped(found, "  verdict: ", "BROKEN. Do not rely on it.");
	else if (found->doubtful)
		print_wrapped(found, "  verdict: ", "NOT COMPLETE. Nothing was changed, but not everything is vouched for.");
	else
		print_wrapped(found, "  verdict: ", good);
	if (found->why.length > 0)
		print_wrapped(found, "  because: ", found->why.data);
	fl_text_free(&found->why);
	return found->broken ? FL_EXIT_TAMPERED : found->doubtful ? FL_EXIT_NOT_PASS : FL_EXIT_FINE;
}

/* ---- journals and their seals ------------------------------------------------------------------------------------ */

/* Bytes up to and with line `number`. */
static size_t length_of_lines(const char *bytes, size_t length, int number) {
	const char *at = bytes, *end = bytes + length;
	for (int i = 0; i < number && at; i++) {
		at = memchr(at, '\n', (size_t)(end - at));
		at = at ? at + 1 : NULL;
	}
	return at ? (size_t)(at - bytes) : 0;
}

/* Checks a seal against the lines that it was made over: those up to one of the journal's certificates. *line gets the
 * last of them. Where none fits, the report is that of the last one tried. */
static fl_status check_seal(const fl_session *session, const char *bytes, size_t length, const char *seal,
                            size_t seal_length, const fl_trust *trust, fl_arena *arena, fl_seal_report *report,
                            int *line, fl_error *err) {
	fl_status status = fl_fail(err, FL_E_TAMPERED, "no certificate was issued of this journal, so nothing was sealed");
	for (size_t i = session->issue_count; i-- > 0;) {
		*line = session->issues[i].sequence;
		status = fl_seal_check(bytes, length_of_lines(bytes, length, *line), seal, seal_length, trust, fl_cli_now(),
		                       arena, report, err);
		if (status < 0 || report->verdict != FL_SEAL_BROKEN)
			break;
	}
	return status;
}

static void check_person(fl_findings *found, const fl_session *session, const fl_seal_signature *signature) {
	const fl_setting *performer = fl_session_setting(session, "performed-by");
	bool named = performer && fl_identity_is_named(&signature->signer, performer->typed);
	fl_part part = fl_part_find(signature->role);
	if (!signature->fits || !performer)
		return;
	if (part == FL_PART_PERFORMED && !named)
		doubt(found, "performer", "the session names another person as the performer",
		      "the performer is another person");
	else if (part != FL_PART_PERFORMED && named)
		doubt(found, "two people", "it is of the performer, who cannot vouch for the own work",
		      "the performer signed in another part too");
}

/* The seals beside a journal. */
typedef struct fl_seals {
	fl_findings *found;
	const char *path; /* of the journal */
	const fl_session *session;
	const fl_trust *trust;
	int only_line; /* 0: all; else those of this line's certificate, and what does not hold */
	int count;     /* seals reported */
	fl_arena arena;
	char *bytes; /* of the journal */
	size_t length;
} fl_seals;

static fl_status judge_seal(fl_seals *seals, const char *path, fl_error *err) {
	const char *name = strrchr(path, '/') + 1;
	char *bytes, sentence[300];
	size_t length;
	int line = 0;
	fl_seal_report report = {0};
	fl_error why = {0};
	fl_status status = fl_file_read(seals->found->cli->io, path, 1 << 20, &seals->arena, &bytes, &length, err);
	if (status < 0)
		return status;
	if (check_seal(seals->session, seals->bytes, seals->length, bytes, length, seals->trust, &seals->arena, &report,
	               &line, &why) < 0) {
		seals->count++;
		snprintf(sentence, sizeof sentence, "%.80s: %.200s", name, why.message);
		breaks(seals->found, "seal", sentence, "a seal of the journal does not hold");
		return FL_OK;
	}
	if (report.verdict != FL_SEAL_BROKEN && seals->only_line && line != seals->only_line)
		return FL_OK;
	bool brief = seals->only_line && report.verdict == FL_SEAL_GOOD; /* with a certificate: in full with the journal */
	seals->count++;
	if (!brief)
		print_report(seals->found, &report, "seal", seals->count);
	weigh(seals->found, &report);
	if (report.verdict == FL_SEAL_BROKEN)
		return FL_OK;
	if (brief)
		snprintf(sentence, sizeof sentence, "%.80s holds: of %.80s, as %.20s, covers lines 1 to %d", name,
		         report.signatures[0].signer.name, report.signatures[0].role, line);
	else
		snprintf(sentence, sizeof sentence, "%.80s covers lines 1 to %d of the journal%s", name, line,
		         line < seals->session->last_sequence ? "; what stands behind was added later and is not under it"
		                                              : "");
	print_line(seals->found, FL_CHECK_GOOD, brief ? "seal of the journal" : "covers", sentence);
	check_person(seals->found, seals->session, &report.signatures[0]);
	return FL_OK;
}

/* "folder/session.flj": "folder/" (or "."), and "session." */
static void split_path(const char *path, char folder[FL_PATH_SIZE], char stem[FL_PATH_SIZE]) {
	const char *slash = strrchr(path, '/');
	snprintf(folder, FL_PATH_SIZE, "%.*s", slash ? (int)(slash - path) + 1 : 1, slash ? path : ".");
	snprintf(stem, FL_PATH_SIZE, "%.500s.", slash ? slash + 1 : path);
	size_t length = strlen(stem);
	if (length > 5 && strcmp(stem + length - 5, ".flj.") == 0)
		stem[length - 4] = '\0';
}

/* Those named STEM.LINE.PART.fls. */
static fl_status check_seals(fl_seals *seals, fl_error *err) {
	char **paths, folder[FL_PATH_SIZE], stem[FL_PATH_SIZE];
	size_t count = 0;
	split_path(seals->path, folder, stem);
	fl_status status = fl_place_files(folder, FL_SEAL_SUFFIX, &seals->arena, &paths, &count, err);
	if (status >= 0 && count > 0)
		status = fl_file_read(seals->found->cli->io, seals->path, FL_JOURNAL_LIMIT, &seals->arena, &seals->bytes,
		                      &seals->length, err);
	for (size_t i = 0; status >= 0 && i < count; i++)
		if (strncmp(strrchr(paths[i], '/') + 1, stem, strlen(stem)) == 0)
			status = judge_seal(seals, paths[i], err);
	fl_arena_free(&seals->arena);
	return status;
}

static fl_status check_journal(fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	fl_case one;
	char opened[FL_DAY_SIZE];
	fl_trust *trust = NULL;
	fl_findings found = {.cli = cli, .columns = fl_cli_columns(cli)};
	fl_status status = fl_case_read(cli->io, path, &one, err);
	if (status < 0)
		return status;
	status = fl_case_compute(&one, err);
	if (status < 0) {
		fl_case_free(&one);
		return status;
	}
	fprintf(cli->out, "%s: journal of %s, %s, %d lines, every digest fits, %s%s\n  digest %s\n", path,
	        one.instrument->tag, fl_day_format(one.session.day, opened), one.session.last_sequence,
	        one.session.closed ? "closed" : "still open",
	        one.torn ? "; an unfinished last line is ignored (resume cuts it off)" : "", one.head);
	for (size_t i = 0; i < one.session.issue_count; i++)
		fprintf(cli->out, "  certificate %s issued on %s\n", one.session.issues[i].number,
		        fl_day_format(one.session.issues[i].day, opened));
	status = fl_signing_trust(cli, &trust, NULL, err);
	fl_seals seals = {.found = &found, .path = path, .session = &one.session, .trust = trust};
	if (status >= 0)
		status = check_seals(&seals, err);
	if (status >= 0 && seals.count > 0)
		*code = print_verdict(&found, "GOOD. Every line fits, and everybody who sealed it is vouched for.");
	else if (status >= 0)
		fputs("  no seal beside it: the chain shows a change of a line, but not who wrote it\n", cli->out);
	fl_text_free(&found.why);
	fl_trust_free(trust);
	fl_case_free(&one);
	return status;
}

/* A seal is checked with its journal. "session.401.performed.fls" -> "session.flj" */
static fl_status check_seal_file(fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	char journal[FL_PATH_SIZE];
	size_t length = strlen(path);
	if (length >= FL_PATH_SIZE - 4)
		return fl_fail(err, FL_E_VALUE, "the path is longer than %d characters", FL_PATH_SIZE - 5);
	memcpy(journal, path, length + 1);
	for (int dots = 0; dots < 3; dots++) {
		char *dot = strrchr(journal, '.');
		if (!dot || strchr(dot, '/'))
			return fl_fail(err, FL_E_NOT_FOUND,
			               "%s: a seal is named after its journal, as session.401.performed.fls is after session.flj",
			               path);
		*dot = '\0';
	}
	strcat(journal, ".flj");
	return check_journal(cli, journal, code, err);
}

/* ---- certificates ------------------------------------------------------------------------------------------------ */

/* A certificate under check. */
typedef struct fl_checked_paper {
	fl_findings found;
	fl_arena arena;
	unsigned char *bytes;
	size_t length;
	fl_trust *trust;
	fl_derived derived;
	bool has_record; /* derived is there */
	fl_seal_report report;
} fl_checked_paper;

static void print_title(const fl_checked_paper *paper, const char *path) {
	char day[FL_DAY_SIZE];
	const fl_derived *derived = &paper->derived;
	if (paper->has_record)
		fprintf(paper->found.cli->out, "%s: certificate %s of %s, issued on %s\n", path, derived->issue.number,
		        derived->one.instrument->tag, fl_day_format(derived->issue.issued_on, day));
	else
		fprintf(paper->found.cli->out, "%s: PDF\n", path);
}

static size_t places_of(const fl_checked_paper *paper, fl_seal_place places[FL_PARTS]) {
	size_t count = 0;
	for (int part = 0; paper->has_record && part < FL_PARTS; part++)
		if (paper->derived.places.of[part].width > 0)
			places[count++] = paper->derived.places.of[part];
	return count;
}

static void check_signatures(fl_checked_paper *paper) {
	fl_error why = {0};
	fl_seal_place places[FL_PARTS];
	size_t count = places_of(paper, places);
	fl_status status = fl_pdf_check(paper->bytes, paper->length, paper->trust, fl_cli_now(), places, count,
	                                &paper->arena, &paper->report, &why);
	if (status < 0) {
		paper->report = (fl_seal_report){.verdict = FL_SEAL_BROKEN};
		breaks(&paper->found, "structure", why.message, "it is not a file that this program made, or it was damaged");
		return;
	}
	print_report(&paper->found, &paper->report, "signature", 1);
	weigh(&paper->found, &paper->report);
}

/* Is the content the one that the record gives? Another version of the program may set the same record otherwise. */
static void check_content(fl_checked_paper *paper) {
	const fl_derived *derived = &paper->derived;
	size_t base = paper->report.base_length, same = 0;
	char sentence[300];
	if (!paper->has_record)
		return;
	while (same < derived->length && same < paper->length && derived->bytes[same] == paper->bytes[same])
		same++;
	if (base == derived->length && same == base) {
		snprintf(sentence, sizeof sentence, "the content is what %.200s gives, byte for byte", derived->one.path);
		print_line(&paper->found, FL_CHECK_GOOD, "record", sentence);
	} else if (strcmp(derived->issue.program_version, FOUNDLEFT_VERSION) != 0) {
		snprintf(sentence, sizeof sentence,
		         "made by foundleft %.40s, whose pages this version, " FOUNDLEFT_VERSION
		         ", cannot make again: check it with that one",
		         derived->issue.program_version);
		doubt(&paper->found, "record", sentence, "the content was not compared with its record");
	} else {
		snprintf(sentence, sizeof sentence, "the content is not what %.200s gives: they differ from byte %zu on",
		         derived->one.path, same + 1);
		breaks(&paper->found, "record", sentence, "the content is not what the record gives");
	}
	if (derived->amended_by) {
		snprintf(sentence, sizeof sentence, "certificate %.60s amends this one and replaces it", derived->amended_by);
		doubt(&paper->found, "amended", sentence, "a later certificate replaces it");
	}
}

/* Who signed in which part, and who is still to. */
static void check_parts(fl_checked_paper *paper) {
	unsigned there = 0;
	char sentence[300];
	const fl_seal_report *report = &paper->report;
	for (size_t i = 0; i < report->signature_count; i++) {
		const fl_seal_signature *one = &report->signatures[i];
		fl_part part = fl_part_find(one->role);
		if (paper->has_record)
			check_person(&paper->found, &paper->derived.whole, one);
		if (part != FL_PARTS && one->fits)
			there |= 1U << part;
	}
	unsigned wanted = paper->has_record ? paper->derived.one.procedure.signatures : 0;
	for (int part = 0; part < FL_PARTS; part++)
		if (wanted & ~there & 1U << part) {
			snprintf(sentence, sizeof sentence, "the procedure wants a signature as %s, and there is none",
			         fl_part_word((fl_part)part));
			doubt(&paper->found, "missing", sentence, "a signature that the procedure wants is missing");
		}
	if (wanted && !(wanted & ~there))
		print_line(&paper->found, FL_CHECK_GOOD, "parts", "all signatures are there that the procedure wants");
	if (report->signature_count == 0 && !paper->found.broken && !wanted)
		doubt(&paper->found, "unsigned", "nobody vouches for it: anybody could have made it", "nobody has signed it");
}

static fl_status find_record(fl_checked_paper *paper, const char *path, fl_error *why) {
	char journal[FL_PATH_SIZE];
	int sequence;
	fl_status status = fl_derive_find(paper->found.cli, path, paper->bytes, paper->length, journal, &sequence, why);
	if (status >= 0)
		status = fl_derive(paper->found.cli, journal, sequence, &paper->derived, why);
	paper->has_record = status >= 0;
	return status;
}

static void say_no_record(fl_checked_paper *paper, const fl_error *why) {
	char line[1400], sentence[300];
	snprintf(sentence, sizeof sentence, "%.290s", fl_error_line(why, line, sizeof line));
	if (why->status == FL_E_TAMPERED)
		breaks(&paper->found, "record", sentence, "its journal does not fit");
	else
		doubt(&paper->found, "record", sentence, "its content was not compared with the record");
}

static fl_status check_certificate(fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	fl_checked_paper paper = {.found = {.cli = cli, .columns = fl_cli_columns(cli)}};
	fl_error why = {0};
	char *bytes;
	bool no_trust = false;
	fl_status status = fl_file_read(cli->io, path, FILE_MOST, &paper.arena, &bytes, &paper.length, err);
	if (status >= 0)
		status = fl_signing_trust(cli, &paper.trust, &no_trust, err);
	if (status >= 0) {
		paper.bytes = (unsigned char *)bytes;
		fl_status found = find_record(&paper, path, &why);
		print_title(&paper, path);
		if (found < 0)
			say_no_record(&paper, &why);
		check_signatures(&paper);
		check_content(&paper);
		check_parts(&paper);
		if (no_trust)
			fprintf(cli->out, "  note  trust: there is no folder %s/trust yet: nobody is vouched for\n", cli->home);
		fl_seals seals = {.found = &paper.found,
		                  .path = paper.derived.one.path,
		                  .session = &paper.derived.whole,
		                  .trust = paper.trust,
		                  .only_line = paper.derived.sequence};
		if (paper.has_record)
			status = check_seals(&seals, err);
		*code = print_verdict(&paper.found, "GOOD. Every byte fits, everybody who signed is vouched for, and the "
		                                    "content is what the record gives.");
	}
	if (paper.has_record)
		fl_derived_free(&paper.derived);
	fl_trust_free(paper.trust);
	fl_arena_free(&paper.arena);
	return status;
}

/* ---- stock and procedures -----------------------------------------------------------------------------------------
 */

static bool has_key(const fl_node *root, const char *key) {
	return root->kind == FL_NODE_MAP && fl_node_get(root, key) != NULL;
}

static fl_status check_yaml(fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	(void)code;
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

/* ---- which kind it is ---------------------------------------------------------------------------------------------
 */

static bool ends_with(const char *text, const char *tail) {
	size_t length = strlen(text), size = strlen(tail);
	return length >= size && strcmp(text + length - size, tail) == 0;
}

static bool is_yaml(const char *path, const unsigned char *head, size_t length) {
	(void)head, (void)length;
	return ends_with(path, ".yaml") || ends_with(path, ".yml");
}

static bool is_pdf(const char *path, const unsigned char *head, size_t length) {
	(void)path;
	return length >= 5 && memcmp(head, "%PDF-", 5) == 0;
}

static bool is_seal(const char *path, const unsigned char *head, size_t length) {
	(void)head, (void)length;
	return ends_with(path, FL_SEAL_SUFFIX);
}

/* Whatever is nothing else is read as a journal, which says what is wrong with it. */
static bool is_anything(const char *path, const unsigned char *head, size_t length) {
	(void)path, (void)head, (void)length;
	return true;
}

static bool is_book(const char *path, const unsigned char *head, size_t length) {
	(void)path;
	return fl_book_is_book((const char *)head, length);
}

static bool is_bundle(const char *path, const unsigned char *head, size_t length) {
	(void)path;
	return fl_book_is_bundle((const char *)head, length);
}

static fl_status check_book(fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	return fl_book_check(cli, path, code, err);
}

static fl_status check_bundle(fl_cli *cli, const char *path, fl_exit *code, fl_error *err) {
	return fl_bundle_check(cli, path, code, err);
}

/* The first row that fits counts. */
static const struct {
	bool (*is)(const char *path, const unsigned char *head, size_t length);
	fl_status (*check)(fl_cli *cli, const char *path, fl_exit *code, fl_error *err);
} KINDS[] = {
    {is_pdf, check_certificate}, {is_seal, check_seal_file}, {is_yaml, check_yaml},
    {is_book, check_book},       {is_bundle, check_bundle},  {is_anything, check_journal},
};

static size_t read_head(const char *path, unsigned char head[HEAD_SIZE]) {
	FILE *file = fopen(path, "rb");
	size_t length = file ? fread(head, 1, HEAD_SIZE, file) : 0;
	if (file)
		fclose(file);
	return length;
}

/* A file by its path, or a journal by the name of its session. */
static fl_status check_one(fl_cli *cli, const char *name, fl_exit *code, fl_error *err) {
	char path[FL_PATH_SIZE];
	unsigned char head[HEAD_SIZE];
	fl_status status = fl_place_journal(cli, name, path, err);
	if (status == FL_E_NOT_FOUND)
		*err = (fl_error){0};
	if (status == FL_E_NOT_FOUND)
		return fl_fail(err, status, "there is no file `%s`, nor a session of that name in %s/sessions", name,
		               cli->home);
	if (status < 0)
		return status;
	size_t length = read_head(path, head), kind = 0;
	while (!KINDS[kind].is(path, head, length))
		kind++;
	return KINDS[kind].check(cli, path, code, err);
}

/* Of several files the worst decides: what was tampered with, then what went wrong, then what is not complete. */
static int gravity(fl_exit code) {
	return code == FL_EXIT_TAMPERED ? 3 : code == FL_EXIT_FINE ? 0 : code == FL_EXIT_NOT_PASS ? 1 : 2;
}

fl_status fl_command_check(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)err;
	for (int i = 0; i < cli->argument_count; i++) {
		char line[1400];
		fl_error local = {0};
		fl_exit one = FL_EXIT_FINE;
		fl_status status = check_one(cli, cli->arguments[i], &one, &local);
		if (status < 0) {
			fflush(cli->out);
			fprintf(cli->err, "foundleft: %s\n", fl_error_line(&local, line, sizeof line));
			one = fl_cli_exit_code(status);
		}
		if (gravity(one) > gravity(*code))
			*code = one;
	}
	return FL_OK;
}
