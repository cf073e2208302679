/* command_certify.c - certify and countersign: a certificate is issued as a line of its journal, and signed.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "book.h"
#include "derive.h"
#include "signing.h"

#define CERTIFICATE_MOST ((size_t)256 << 20)

/* ---- what is issued ---------------------------------------------------------------------------------------------- */

/* What the options, bench.yaml and the day say of a certificate to be issued. */
typedef struct fl_order {
	fl_arena arena;
	fl_session_issue entry;
	char day[FL_DAY_SIZE];
	bool day_given;
} fl_order;

/* "folder/2026-04-14-VT-1.flj" -> "2026-04-14-VT-1" */
static char *stem_of(fl_arena *arena, const char *path) {
	const char *slash = strrchr(path, '/');
	char *stem = fl_arena_strdup(arena, slash ? slash + 1 : path);
	char *dot = stem ? strrchr(stem, '.') : NULL;
	if (dot != NULL && dot != stem)
		*dot = '\0';
	return stem;
}

/* --number; else the latest one that was issued, unless it is to be amended; else the session's name. */
static fl_status number_of(const fl_cli *cli, const fl_case *one, fl_order *order, fl_error *err) {
	const fl_session *session = &one->session;
	order->entry.number = cli->values[FL_OPT_NUMBER];
	if (order->entry.number == NULL && session->issue_count > 0 && !order->entry.amends)
		order->entry.number = session->issues[session->issue_count - 1].number;
	if (order->entry.number == NULL && order->entry.amends)
		return fl_fail(err, FL_E_USAGE,
		               "--amends: give the certificate that replaces it a number of its own, --number");
	if (order->entry.number == NULL)
		order->entry.number = stem_of(&order->arena, one->path);
	return order->entry.number ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory");
}

static fl_status day_of(const fl_cli *cli, const fl_case *one, fl_order *order, fl_error *err) {
	order->entry.day = fl_day_of(fl_cli_now());
	order->day_given = cli->values[FL_OPT_DATE] != NULL;
	if (order->day_given) {
		fl_status status = fl_day_parse(cli->values[FL_OPT_DATE], &order->entry.day, err);
		if (status < 0)
			return status;
	}
	fl_day_format(order->entry.day, order->day);
	if (order->entry.day < one->session.day)
		return fl_fail(err, FL_E_VALUE, "%s lies before the day of the calibration",
		               order->day_given ? "--date" : "today, by this machine's clock,");
	return FL_OK;
}

static fl_status read_order(const fl_cli *cli, const fl_case *one, fl_order *order, fl_error *err) {
	const char *slash = strrchr(one->path, '/');
	*order = (fl_order){.entry = {.program = FOUNDLEFT_VERSION,
	                              .amends = cli->values[FL_OPT_AMENDS],
	                              .reason = cli->values[FL_OPT_REASON],
	                              .authorised_by = cli->values[FL_OPT_AUTHORISED_BY]}};
	order->entry.journal_name = fl_arena_strdup(&order->arena, slash ? slash + 1 : one->path);
	if (!order->entry.journal_name)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	if (!order->entry.amends != !order->entry.reason)
		return fl_fail(err, FL_E_USAGE, "--amends NUMBER and --reason TEXT come together: what is replaced, and why");
	fl_status status = number_of(cli, one, order, err);
	if (status >= 0)
		status = day_of(cli, one, order, err);
	if (status >= 0)
		status = fl_place_issuer(cli, &order->arena, true, &order->entry.issuer, &order->entry.address, err);
	return status;
}

static bool differs(const char *given, const char *issued) {
	return given && strcmp(given, issued ? issued : "") != 0;
}

/* The same number for something else is refused: only what is said again in the same words is the same certificate. */
static fl_status refuse_other(const fl_cli *cli, const fl_order *order, const fl_session_issue *issued, fl_error *err) {
	char day[FL_DAY_SIZE];
	const char *what = order->day_given && order->entry.day != issued->day                 ? "--date"
	                   : differs(cli->values[FL_OPT_AUTHORISED_BY], issued->authorised_by) ? "--authorised-by"
	                   : differs(cli->values[FL_OPT_ISSUER], issued->issuer)               ? "--issuer"
	                   : differs(cli->values[FL_OPT_ISSUER_ADDRESS], issued->address)      ? "--issuer-address"
	                   : differs(order->entry.amends, issued->amends)                      ? "--amends"
	                   : differs(order->entry.reason, issued->reason)                      ? "--reason"
	                                                                                       : NULL;
	if (!what)
		return FL_OK;
	return fl_fail(err, FL_E_EXISTS,
	               "certificate %s was issued on %s with another %s: it stays as it is. For another one give --number, "
	               "--amends %s and --reason",
	               issued->number, fl_day_format(issued->day, day), what, issued->number);
}

static fl_event event_of(const fl_order *order) {
	const fl_session_issue *e = &order->entry;
	return (fl_event){.at = fl_cli_now(),
	                  .verb = FL_V_ISSUE,
	                  .fields = {[FL_F_ID] = e->number,
	                             [FL_F_DAY] = order->day,
	                             [FL_F_PROGRAM] = e->program,
	                             [FL_F_ITEM] = e->journal_name,
	                             [FL_F_NAME] = e->issuer && *e->issuer ? e->issuer : NULL,
	                             [FL_F_BODY] = e->address,
	                             [FL_F_ABOUT] = e->amends,
	                             [FL_F_REASON] = e->reason,
	                             [FL_F_BY] = e->authorised_by && *e->authorised_by ? e->authorised_by : NULL}};
}

/* ---- issuing ----------------------------------------------------------------------------------------------------- */

/* The pages are made before the line is written: what cannot be set is not issued. */
static fl_status write_entry(const fl_cli *cli, fl_journal *journal, fl_order *order, fl_derived *out, fl_error *err) {
	fl_event event = event_of(order);
	if (strcmp(journal->head, out->one.head) != 0)
		return fl_fail(err, FL_E_STATE, "the journal was written to meanwhile: do it again");
	fl_status status = fl_journal_foresee(journal, &event, out->one.head, err);
	if (status >= 0) {
		out->issue = fl_derive_issue(&out->one.session, &order->entry, out->one.head);
		out->sequence = event.sequence;
		status = fl_derive_pages(cli, out, err);
	}
	return status < 0 ? status : fl_journal_commit(journal, &event, err);
}

/* Reads the lines that a seal is made over, the certificate's being the last. */
static fl_status read_lines(const fl_cli *cli, fl_derived *out, fl_error *err) {
	return fl_file_read(cli->io, out->one.path, FL_JOURNAL_LIMIT, &out->arena, &out->journal, &out->journal_length,
	                    err);
}

/* Takes `one` over, whatever comes of it. */
static fl_status issue_new(const fl_cli *cli, fl_case *one, fl_order *order, fl_derived *out, fl_error *err) {
	fl_journal journal;
	*out = (fl_derived){.one = *one};
	*one = (fl_case){0};
	fl_status status = fl_case_compute(&out->one, err);
	if (status >= 0)
		status = fl_journal_resume(&journal, cli->io, out->one.path, fl_cli_now(), err);
	if (status >= 0) {
		if (out->one.torn) /* resuming cut it off, by a line of its own */
			memcpy(out->one.head, journal.head, sizeof journal.head);
		status = write_entry(cli, &journal, order, out, err);
		if (status >= 0)
			status = read_lines(cli, out, err);
		fl_journal_close(&journal);
	}
	if (status < 0)
		fl_derived_free(out);
	return status;
}

/* Takes `one` over, whatever comes of it: the journal as read ends with the line of the certificate. */
static fl_status take_latest(const fl_cli *cli, fl_case *one, fl_derived *out, fl_error *err) {
	*out = (fl_derived){.one = *one, .sequence = one->session.last_sequence};
	*one = (fl_case){0};
	const fl_session *session = &out->one.session;
	fl_status status = fl_case_compute(&out->one, err);
	if (status >= 0) {
		out->issue = fl_derive_issue(session, &session->issues[session->issue_count - 1], out->one.head);
		status = fl_derive_pages(cli, out, err);
	}
	if (status >= 0)
		status = read_lines(cli, out, err);
	if (status < 0)
		fl_derived_free(out);
	return status;
}

/* ---- the file ---------------------------------------------------------------------------------------------------- */

/* A certificate on the disk: what is there, and whether it has to be written. */
typedef struct fl_kept {
	fl_arena arena;
	unsigned char *bytes; /* base, and the signatures it has */
	size_t length;
	bool exists;
} fl_kept;

/* A file that begins with the certificate has at most signatures behind it, and only grows. Any other is left alone. */
static fl_status read_kept(const fl_cli *cli, const char *path, const fl_derived *derived, fl_kept *out,
                           fl_error *err) {
	fl_error local = {0};
	char *bytes = NULL;
	*out = (fl_kept){0};
	fl_status status = fl_file_read(cli->io, path, CERTIFICATE_MOST, &out->arena, &bytes, &out->length, &local);
	out->exists = status >= 0;
	out->bytes = out->exists ? (unsigned char *)bytes : derived->bytes;
	if (status == FL_E_NOT_FOUND) {
		out->length = derived->length;
		return FL_OK;
	}
	if (status < 0)
		return fl_fail(err, status, "%s", local.message);
	if (out->length < derived->length || memcmp(bytes, derived->bytes, derived->length) != 0)
		return fl_fail(err, FL_E_EXISTS,
		               "%s exists with other content and is never overwritten: give another --number or --out", path);
	return FL_OK;
}

/* Signs the certificate and seals the journal; says so. */
static fl_status sign_both(const fl_cli *cli, fl_signing *signing, const fl_derived *derived, const char *path,
                           const fl_kept *kept, fl_error *err) {
	unsigned char *bytes;
	size_t length;
	const char *seal = "";
	fl_status status = fl_signing_pdf(cli, signing, derived, kept->bytes, kept->length, &bytes, &length, err);
	bool signs = status >= 0 && bytes != NULL;
	if (signs)
		status = fl_file_write(cli->io, path, bytes, length, kept->exists, err);
	free(bytes);
	if (status >= 0)
		status = fl_signing_journal(cli, signing, derived, &seal, err);
	if (status >= 0)
		fprintf(cli->out, "%s as %s by %s%s\nseal of the journal: %s\n", signs ? "signed" : "signed already",
		        fl_part_word(signing->part), fl_signer_identity(signing->signer)->name,
		        signing->stamped ? ", with a timestamp" : "", seal);
	return status;
}

static void say_missing(const fl_cli *cli, const fl_derived *derived) {
	if (derived->one.procedure.signatures != 0)
		fputs("not signed: by its procedure it counts as issued only with signatures (--signer, then countersign)\n",
		      cli->out);
	else
		fputs("not signed (--signer ID signs it)\n", cli->out);
}

/* ---- certify ------------------------------------------------------------------------------------------------------
 */

/* --out; else beside the journal, a further certificate of the same session with a number behind its name. */
static fl_status certificate_path(const fl_cli *cli, const fl_derived *derived, char path[FL_PATH_SIZE],
                                  fl_error *err) {
	const char *out = cli->values[FL_OPT_OUT], *journal = derived->one.path;
	size_t length = strlen(journal), before = 0;
	if (length > 4 && strcmp(journal + length - 4, ".flj") == 0)
		length -= 4;
	const fl_session *session = &derived->one.session;
	while (before < session->issue_count && session->issues[before].sequence < derived->sequence)
		before++;
	int written = out           ? snprintf(path, FL_PATH_SIZE, "%s", out)
	              : before == 0 ? snprintf(path, FL_PATH_SIZE, "%.*s.pdf", (int)length, journal)
	                            : snprintf(path, FL_PATH_SIZE, "%.*s-%zu.pdf", (int)length, journal, before + 1);
	return written < FL_PATH_SIZE ? FL_OK : fl_fail(err, FL_E_VALUE, "the path of the certificate is too long");
}

static fl_status print_text(const fl_cli *cli, const fl_case *one, const fl_issue *issue, fl_error *err) {
	fl_sheet *sheet = NULL;
	fl_text text = {0};
	fl_status status = fl_derive_sheet(one, issue, &sheet, err);
	if (status >= 0) {
		fl_sheet_text(sheet, &text);
		fputs(text.data ? text.data : "", cli->out);
	}
	fl_text_free(&text);
	fl_sheet_free(sheet);
	return status;
}

/* Writes the certificate, signed if there is somebody to sign. */
static fl_status put_out(const fl_cli *cli, fl_signing *signing, const fl_derived *derived, fl_error *err) {
	char path[FL_PATH_SIZE];
	fl_kept kept = {0};
	fl_status status = certificate_path(cli, derived, path, err);
	if (status >= 0)
		status = read_kept(cli, path, derived, &kept, err);
	if (status >= 0 && signing)
		status = sign_both(cli, signing, derived, path, &kept, err);
	else if (status >= 0 && !kept.exists)
		status = fl_file_write(cli->io, path, derived->bytes, derived->length, false, err);
	if (status >= 0 && !signing && kept.length == derived->length)
		say_missing(cli, derived);
	if (status >= 0) {
		fprintf(cli->out, "certificate: %s\n", path);
		fl_book_after_certificate(cli, derived->one.path, derived->issue.number, signing ? "signed" : "issued", path);
	}
	fl_arena_free(&kept.arena);
	return status;
}

/* Finds the certificate among those issued, or issues it. `signing` NULL: nobody signs. */
static fl_status certify(const fl_cli *cli, fl_case *one, fl_order *order, fl_signing *signing, fl_error *err) {
	fl_derived derived = {0};
	const fl_session_issue *issued = fl_session_issue_of(&one->session, order->entry.number);
	fl_status status = issued ? refuse_other(cli, order, issued, err) : FL_OK;
	if (status >= 0 && signing) {
		/* Who may not sign is told before anything is written. */
		fl_derived asked = {.one = *one, .issue.authorised_by = (issued ? issued : &order->entry)->authorised_by};
		status = fl_signing_allowed(signing, &asked, err);
	}
	if (status >= 0 && !issued)
		status = issue_new(cli, one, order, &derived, err);
	else if (status >= 0 && issued->sequence == one->session.last_sequence && !one->torn)
		status = take_latest(cli, one, &derived, err);
	else if (status >= 0)
		status = fl_derive(cli, one->path, issued->sequence, &derived, err);
	if (status >= 0) {
		status = put_out(cli, signing, &derived, err);
		fl_derived_free(&derived);
	}
	return status;
}

/* The content of the certificate that was issued under the number, or a draft of it. */
static fl_status show_text(const fl_cli *cli, fl_case *one, const fl_order *order, fl_error *err) {
	const fl_session_issue *issued = fl_session_issue_of(&one->session, order->entry.number);
	fl_derived derived;
	if (!issued) {
		fl_issue draft = fl_derive_issue(&one->session, &order->entry, NULL);
		fl_status computed = fl_case_compute(one, err);
		return computed < 0 ? computed : print_text(cli, one, &draft, err);
	}
	fl_status status = refuse_other(cli, order, issued, err);
	if (status >= 0)
		status = fl_derive(cli, one->path, issued->sequence, &derived, err);
	if (status >= 0) {
		status = print_text(cli, &derived.one, &derived.issue, err);
		fl_derived_free(&derived);
	}
	return status;
}

fl_status fl_command_certify(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	char path[FL_PATH_SIZE];
	fl_case one;
	fl_order order = {0};
	fl_signing signing = {0};
	fl_status status = fl_place_journal(cli, cli->arguments[0], path, err);
	if (status >= 0)
		status = fl_case_read(cli->io, path, &one, err);
	if (status < 0)
		return status;
	bool signs = cli->values[FL_OPT_SIGNER] != NULL;
	if (!one.session.closed)
		status = fl_fail_at(err, FL_E_STATE, (fl_place){.file = path},
		                    "the session is still open: finish it with foundleft resume, then certify");
	if (status >= 0)
		status = read_order(cli, &one, &order, err);
	if (status >= 0 && cli->values[FL_OPT_TEXT]) {
		status = show_text(cli, &one, &order, err);
	} else if (status >= 0) {
		if (signs)
			status = fl_signing_begin(cli, FL_PART_PERFORMED, &signing, err);
		if (status >= 0)
			status = certify(cli, &one, &order, signs ? &signing : NULL, err);
		fl_signing_end(&signing);
	}
	fl_arena_free(&order.arena);
	fl_case_free(&one);
	return status;
}

/* ---- countersign --------------------------------------------------------------------------------------------------
 */

/* The certificate must be the record's own, and somebody must have signed it. */
static fl_status derive_kept(const fl_cli *cli, const char *path, const fl_kept *kept, fl_derived *derived,
                             fl_error *err) {
	char journal[FL_PATH_SIZE];
	int sequence;
	fl_status status = fl_derive_find(cli, path, kept->bytes, kept->length, journal, &sequence, err);
	if (status >= 0)
		status = fl_derive(cli, journal, sequence, derived, err);
	if (status < 0)
		return status;
	if (kept->length < derived->length || memcmp(kept->bytes, derived->bytes, derived->length) != 0)
		status = fl_fail(err, FL_E_TAMPERED, "%s is not what its record gives: do not sign it, and see foundleft check",
		                 path);
	else if (kept->length == derived->length)
		status = fl_fail(err, FL_E_STATE, "nobody has signed %s yet: foundleft certify %s --signer ID comes first",
		                 path, derived->one.path);
	if (status < 0)
		fl_derived_free(derived);
	return status;
}

fl_status fl_command_countersign(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	const char *path = cli->arguments[0];
	fl_kept kept = {.exists = true};
	fl_derived derived;
	fl_signing signing;
	char *bytes = NULL;
	fl_status status = fl_file_read(cli->io, path, CERTIFICATE_MOST, &kept.arena, &bytes, &kept.length, err);
	kept.bytes = (unsigned char *)bytes;
	if (status >= 0)
		status = derive_kept(cli, path, &kept, &derived, err);
	if (status >= 0) {
		status = fl_signing_begin(cli, FL_PART_AUTHORISED, &signing, err);
		if (status >= 0) {
			status = fl_signing_allowed(&signing, &derived, err);
			if (status >= 0)
				status = sign_both(cli, &signing, &derived, path, &kept, err);
			if (status >= 0)
				fl_book_after_certificate(cli, derived.one.path, derived.issue.number, "countersigned", path);
			fl_signing_end(&signing);
		}
		fl_derived_free(&derived);
	}
	fl_arena_free(&kept.arena);
	return status;
}
