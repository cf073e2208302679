/* pdf_check.c - checks every signature of a PDF, and that nothing but signatures was added.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"
#include "pdf_change.h"

#include <stdio.h>
#include <string.h>

#define TOLERANCE 0.02 /* points: places are written in hundredths */

/* One file under check. */
typedef struct fl_pdf_checking {
	fl_pdf pdf;
	const fl_trust *trust;
	fl_utc now;
	const fl_seal_place *places;
	size_t place_count;
	fl_arena *arena;
	fl_seal_report *report;
} fl_pdf_checking;

static void say(fl_pdf_checking *checking, fl_check_mark mark, const char *what, const char *sentence) {
	fl_report_line(checking->report, checking->arena, mark, what, "%s", sentence);
}

/* ---- byte range and contents ---------------------------------------------------------------------------------- */

static int64_t range_number(const fl_pdf_value *range, size_t index) {
	return range->items[index].kind == FL_PDF_INTEGER ? range->items[index].whole : -1;
}

/* The range is everything up to the revision's end but the Contents token. */
static bool check_range(fl_pdf_checking *checking, const fl_pdf_value *range, const fl_pdf_value *contents,
                        size_t end) {
	bool whole = range && contents && range->kind == FL_PDF_ARRAY && range->count == 4 && range_number(range, 0) == 0 &&
	             range_number(range, 1) == (int64_t)contents->begin &&
	             range_number(range, 2) == (int64_t)contents->end &&
	             range_number(range, 3) == (int64_t)(end - contents->end);
	if (whole)
		fl_report_line(checking->report, checking->arena, FL_CHECK_GOOD, "byte range",
		               "covers all %zu bytes up to its end, but for itself", end);
	else
		say(checking, FL_CHECK_BAD, "byte range", "leaves bytes out that could be changed unnoticed");
	return whole;
}

/* Lower-case hexadecimal between < and >, and nothing else. */
static bool is_strict_hex(const fl_pdf *pdf, const fl_pdf_value *contents) {
	if (contents->kind != FL_PDF_STRING || !contents->hex || (contents->end - contents->begin) % 2 != 0)
		return false;
	for (size_t at = contents->begin + 1; at < contents->end - 1; at++) {
		unsigned char c = pdf->bytes[at];
		if (!(c >= '0' && c <= '9') && !(c >= 'a' && c <= 'f'))
			return false;
	}
	return true;
}

static bool is_zero(const char *bytes, size_t length) {
	for (size_t i = 0; i < length; i++)
		if (bytes[i] != 0)
			return false;
	return true;
}

static bool check_contents(fl_pdf_checking *checking, const fl_pdf_value *contents, fl_cms *cms) {
	fl_element whole;
	fl_der der = {(const unsigned char *)contents->text, contents->length};
	if (!is_strict_hex(&checking->pdf, contents)) {
		say(checking, FL_CHECK_BAD, "contents", "the signature is not written in plain lower-case hexadecimal");
		return false;
	}
	if (!fl_der_next(&der, &whole) || !is_zero((const char *)der.at, der.left)) {
		say(checking, FL_CHECK_BAD, "contents",
		    "the signature is cut off, or something else than zeros stands behind it");
		return false;
	}
	fl_error why = {0};
	if (fl_cms_read(whole.whole, whole.whole_length, cms, &why) != FL_OK) {
		say(checking, FL_CHECK_BAD, "contents", why.message);
		return false;
	}
	if (cms->has_time || cms->has_role) {
		say(checking, FL_CHECK_BAD, "contents", "the signature states a time of its own beside the dictionary's");
		return false;
	}
	say(checking, FL_CHECK_GOOD, "contents", "strict DER, zeros behind it, no time of its own");
	return true;
}

/* ---- texts of the dictionary ----------------------------------------------------------------------------------- */

static void add_utf8(uint32_t point, char *out, size_t *used) {
	char one[4];
	size_t length = point < 0x80 ? 1 : point < 0x800 ? 2 : point < 0x10000 ? 3 : 4;
	static const unsigned char lead[] = {0, 0, 0xc0, 0xe0, 0xf0};
	for (size_t i = length; i-- > 1; point >>= 6)
		one[i] = (char)(0x80 | (point & 0x3f));
	one[0] = (char)(lead[length] | point);
	if (*used + length >= FL_NAME_SIZE)
		return;
	memcpy(out + *used, one, length);
	*used += length;
}

/* A text string as UTF-8: ASCII, or UTF-16BE with its mark. False for anything else. */
static bool read_text(const fl_pdf_value *value, char out[FL_NAME_SIZE]) {
	size_t used = 0;
	out[0] = '\0';
	if (!value || value->kind != FL_PDF_STRING)
		return false;
	const unsigned char *at = (const unsigned char *)value->text, *end = at + value->length;
	bool wide = value->length >= 2 && at[0] == 0xfe && at[1] == 0xff;
	if (wide && value->length % 2 != 0)
		return false;
	for (at += wide ? 2 : 0; at < end; at += wide ? 2 : 1) {
		uint32_t point = wide ? (uint32_t)at[0] << 8 | at[1] : at[0];
		if (point >= 0xd800 && point < 0xdc00 && end - at >= 4 && (at[2] & 0xfc) == 0xdc) {
			point = 0x10000 + ((point & 0x3ff) << 10) + ((uint32_t)(at[2] & 3) << 8 | at[3]);
			at += 2;
		}
		if (point < 0x20 || (point >= 0xd800 && point < 0xe000) || (!wide && point > 0x7e))
			return false;
		add_utf8(point, out, &used);
	}
	out[used] = '\0';
	return fl_utf8_valid(out, used) && !fl_text_has_control(out);
}

/* "D:20260414083000Z" */
static bool read_date(const fl_pdf_value *value, fl_utc *out) {
	if (!value || value->kind != FL_PDF_STRING || value->length != 17 || memcmp(value->text, "D:", 2) != 0)
		return false;
	char iso[FL_UTC_SIZE];
	const char *at = value->text + 2;
	snprintf(iso, sizeof iso, "%.4s-%.2s-%.2sT%.2s:%.2s:%.2s%.1s", at, at + 4, at + 6, at + 8, at + 10, at + 12,
	         at + 14);
	return fl_utc_parse(iso, out, NULL) == FL_OK;
}

static bool check_texts(fl_pdf_checking *checking, const fl_pdf_value *dictionary, fl_seal_signature *signature,
                        fl_utc *at) {
	const fl_pdf_value *reason = fl_pdf_get(dictionary, "Reason");
	if (!read_date(fl_pdf_get(dictionary, "M"), at)) {
		say(checking, FL_CHECK_BAD, "time", "the signature does not state its time as it must");
		return false;
	}
	if (reason && !read_text(reason, signature->role)) {
		say(checking, FL_CHECK_BAD, "role", "the signer's role cannot be read");
		return false;
	}
	return true;
}

/* ---- one signature ---------------------------------------------------------------------------------------------- */

static bool inside(const fl_seal_place *place, const fl_seal_place *allowed, int page_count) {
	int page = allowed->page == 0 ? page_count : allowed->page;
	return place->page == page && place->left >= allowed->left - TOLERANCE &&
	       place->bottom >= allowed->bottom - TOLERANCE &&
	       place->left + place->width <= allowed->left + allowed->width + TOLERANCE &&
	       place->bottom + place->height <= allowed->bottom + allowed->height + TOLERANCE;
}

/* A block that stands elsewhere could cover what was signed. */
static bool check_place(fl_pdf_checking *checking, const fl_seal_place *place, size_t revision) {
	fl_pdf_object page;
	int page_count = 0;
	if (checking->place_count == 0)
		return true;
	if (fl_pdf_page(&checking->pdf, revision, 0, &page, &page_count) == FL_OK)
		for (size_t i = 0; i < checking->place_count; i++)
			if (inside(place, &checking->places[i], page_count)) {
				say(checking, FL_CHECK_GOOD, "visible block", "stands where a signature's block belongs");
				return true;
			}
	fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, "visible block",
	               "stands on page %d where it may cover what the page says", place->page);
	return false;
}

/* Two signatures of one person are worth one. */
static void check_people(fl_pdf_checking *checking, size_t index) {
	fl_seal_signature *all = checking->report->signatures;
	for (size_t i = 0; i < index; i++)
		if (fl_identity_same_person(&all[i].signer, &all[index].signer)) {
			say(checking, FL_CHECK_BAD, "two people", "it is of the same person as an earlier signature");
			all[index].trusted = false;
			return;
		}
	if (index > 0)
		say(checking, FL_CHECK_GOOD, "two people", "another person than the one who signed before");
}

/* Whose name the dictionary states must be the certificate's. */
static bool check_name(fl_pdf_checking *checking, const fl_pdf_value *dictionary, const fl_identity *signer) {
	char name[FL_NAME_SIZE];
	if (read_text(fl_pdf_get(dictionary, "Name"), name) && strcmp(name, signer->name) == 0)
		return true;
	say(checking, FL_CHECK_BAD, "name", "the name that a reader shows is not the certificate's");
	return false;
}

static void check_signature(fl_pdf_checking *checking, size_t revision, const fl_pdf_signature *found) {
	const fl_pdf_value *dictionary = &found->dictionary.body, *contents = fl_pdf_get(dictionary, "Contents");
	size_t end = checking->pdf.revisions[revision].end, index = checking->report->signature_count - 1;
	fl_seal_signature *signature = &checking->report->signatures[index];
	unsigned char digest[FL_SHA256_SIZE];
	fl_cms cms;
	fl_utc at;
	signature->covers = end;
	if (!check_range(checking, fl_pdf_get(dictionary, "ByteRange"), contents, end) ||
	    !check_contents(checking, contents, &cms) || !check_texts(checking, dictionary, signature, &at))
		return;
	fl_pieces pieces = {checking->pdf.bytes, contents->begin, checking->pdf.bytes + contents->end, end - contents->end};
	if (!fl_pieces_digest(&pieces, digest)) {
		say(checking, FL_CHECK_BAD, "content", "its SHA-256 could not be computed");
		return;
	}
	fl_cms_check(&cms, digest, at, checking->trust, checking->now, checking->arena, checking->report);
	if (!signature->fits)
		return;
	signature->fits =
	    check_name(checking, dictionary, &signature->signer) && check_place(checking, &found->place, revision);
	check_people(checking, index);
}

/* A revision without signature, or with more than one: everything from its beginning on is vouched for by nobody. */
static void check_revision(fl_pdf_checking *checking, size_t revision) {
	fl_pdf_signature found;
	fl_error why = {0}, *before = checking->pdf.err;
	checking->pdf.err = &why;
	fl_status status = fl_pdf_change(&checking->pdf, revision, &found);
	if (status != FL_OK) {
		fl_report_line(checking->report, checking->arena, FL_CHECK_BAD, "added content",
		               "bytes %zu to %zu were added and are not just a signature: %s",
		               checking->pdf.revisions[revision].begin, checking->pdf.revisions[revision].end, why.message);
		for (size_t i = 0; i < checking->report->signature_count; i++)
			checking->report->signatures[i].fits = false;
	} else if (fl_report_signature(checking->report, checking->arena)) {
		check_signature(checking, revision, &found);
	}
	checking->pdf.err = before;
}

/* The file before the first signature must be without form, or nobody knows what the first signature added. */
static fl_status check_base(fl_pdf_checking *checking) {
	fl_pdf_object catalog;
	fl_status status = fl_pdf_catalog(&checking->pdf, 0, &catalog);
	if (status == FL_OK && fl_pdf_get(&catalog.body, "AcroForm"))
		status = fl_pdf_refuse(&checking->pdf, catalog.begin, "has a form or signature that this program did not make");
	return status;
}

fl_status fl_pdf_check(const unsigned char *bytes, size_t length, const fl_trust *trust, fl_utc now,
                       const fl_seal_place *places, size_t place_count, fl_arena *arena, fl_seal_report *report,
                       fl_error *err) {
	fl_error own = {0}, *why = err ? err : &own;
	fl_pdf_checking checking = {
	    .trust = trust, .now = now, .places = places, .place_count = place_count, .arena = arena, .report = report};
	*report = (fl_seal_report){0};
	fl_status status = fl_pdf_open(&checking.pdf, bytes, length, arena, why);
	if (status == FL_OK)
		status = check_base(&checking);
	if (status != FL_OK)
		return status;
	report->base_length = checking.pdf.revisions[0].end;
	for (size_t revision = 1; revision < checking.pdf.revision_count; revision++)
		check_revision(&checking, revision);
	if (checking.pdf.revision_count == 1)
		say(&checking, FL_CHECK_NOTE, "signature", "nobody has signed it");
	fl_report_finish(report);
	return report->failed ? fl_fail(err, FL_E_MEMORY, "out of memory while checking a PDF") : FL_OK;
}
