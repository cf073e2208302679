/* pdf_sign.c - signs a PDF: an incremental update with the signature's dictionary, its widget and its visible block
 * (ISO 32000-1, 12.8; ETSI EN 319 142-1). An approval signature: it forbids nothing, so that a second person can sign.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"
#include "pdf_update.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define RANGE_WIDTH 40 /* room for three numbers of the byte range */

/* One signing under way. */
typedef struct fl_pdf_work {
	fl_pdf pdf;
	fl_pdf_update update;
	const fl_signer *signer;
	const fl_pdf_signing *signing;
	fl_seal_report before; /* signatures that are there already */
	fl_pdf_object catalog, page;
	size_t range_at, contents_at; /* in the update: behind "[0 ", and the "<" */
	size_t room;                  /* bytes of CMS */
	fl_error *err;
} fl_pdf_work;

static size_t last_revision(const fl_pdf_work *work) {
	return work->pdf.revision_count - 1;
}

/* ---- what stands in the way ----------------------------------------------------------------------------------- */

static fl_status refuse_place(const fl_pdf_work *work) {
	const fl_seal_place *place = &work->signing->place;
	bool sane = place->left >= 0 && place->bottom >= 0 && place->width >= 40 && place->height >= 16 &&
	            place->left + place->width <= 14400 && place->bottom + place->height <= 14400;
	return sane ? FL_OK
	            : fl_fail(work->err, FL_E_VALUE, "the place of the visible block is too small or not on a page");
}

/* Earlier signatures must hold, and none may be of the same person. */
static fl_status refuse_earlier(fl_pdf_work *work) {
	fl_status status = fl_pdf_check(work->pdf.bytes, work->pdf.length, NULL, work->signing->at, NULL, 0,
	                                work->pdf.arena, &work->before, work->err);
	if (status != FL_OK)
		return status;
	if (work->before.verdict == FL_SEAL_BROKEN)
		return fl_fail(work->err, FL_E_TAMPERED,
		               "the PDF carries a signature that does not hold; check it, and do not add another");
	for (size_t i = 0; i < work->before.signature_count; i++)
		if (fl_identity_same_person(&work->before.signatures[i].signer, &work->signer->identity))
			return fl_fail(work->err, FL_E_STATE,
			               "%s has signed it already: a second signature must be another person's",
			               work->signer->identity.name);
	return FL_OK;
}

static fl_status refuse_form(const fl_pdf_work *work) {
	bool has_form = fl_pdf_get(&work->catalog.body, "AcroForm") != NULL;
	if (has_form != (work->before.signature_count > 0))
		return fl_fail(work->err, FL_E_SYNTAX, "the PDF has a form that this program did not make");
	if (work->pdf.revision_count == FL_PDF_REVISIONS_MOST)
		return fl_fail(work->err, FL_E_STATE, "the PDF was signed too many times");
	return FL_OK;
}

static fl_status open_file(fl_pdf_work *work, const unsigned char *bytes, size_t length, fl_arena *arena) {
	fl_status status = fl_pdf_open(&work->pdf, bytes, length, arena, work->err);
	if (status == FL_OK && bytes[length - 1] != '\n')
		status = fl_pdf_refuse(&work->pdf, length, "does not end with a line end");
	if (status == FL_OK)
		status = refuse_place(work);
	if (status == FL_OK)
		status = refuse_earlier(work);
	if (status == FL_OK)
		status = fl_pdf_catalog(&work->pdf, last_revision(work), &work->catalog);
	if (status == FL_OK)
		status = refuse_form(work);
	if (status == FL_OK)
		status = fl_pdf_page(&work->pdf, last_revision(work), work->signing->place.page, &work->page, NULL);
	return status;
}

/* ---- objects --------------------------------------------------------------------------------------------------- */

/* Bytes from..to of the file as it was. */
static void copy_range(fl_pdf_work *work, size_t from, size_t to) {
	fl_text_append(&work->update.bytes, (const char *)work->pdf.bytes + from, to - from);
}

/* The dictionary again as it stands, with an entry more at its end. */
static void copy_with(fl_pdf_work *work, const fl_pdf_object *object, const char *key, unsigned number) {
	fl_update_begin(&work->update, object->number);
	copy_range(work, object->body.begin, object->body.end - 2);
	fl_text_printf(&work->update.bytes, "%s%u 0 R\n>>", key, number);
	fl_update_end(&work->update);
}

/* The page again with the widget among its annotations. */
static fl_status write_page(fl_pdf_work *work, unsigned widget) {
	const fl_pdf_value *annotations = fl_pdf_get(&work->page.body, "Annots");
	fl_text *out = &work->update.bytes;
	fl_pdf_value list;
	size_t cut = work->page.body.end - 2;
	fl_update_begin(&work->update, work->page.number);
	copy_range(work, work->page.body.begin, annotations ? annotations->begin : cut);
	fl_text_add(out, annotations ? "[" : "/Annots [");
	if (annotations) {
		fl_status status = fl_pdf_resolve(&work->pdf, last_revision(work), annotations, &list);
		if (status != FL_OK)
			return status;
		if (list.kind != FL_PDF_ARRAY)
			return fl_pdf_refuse(&work->pdf, annotations->begin, "has a page whose annotations are no list");
		copy_range(work, list.begin + 1, list.end - 1);
	}
	fl_text_printf(out, " %u 0 R]", widget);
	copy_range(work, annotations ? annotations->end : cut, work->page.body.end);
	fl_update_end(&work->update);
	return FL_OK;
}

/* A form with one field, known to the catalog. */
static void write_new_form(fl_pdf_work *work, unsigned widget) {
	unsigned form = fl_update_new(&work->update);
	fl_update_begin(&work->update, form);
	fl_text_printf(&work->update.bytes, "<< /Fields [%u 0 R] /SigFlags 3 >>", widget);
	fl_update_end(&work->update);
	copy_with(work, &work->catalog, "/AcroForm ", form);
}

/* The form that the first signature made, with one field more. */
static fl_status write_longer_form(fl_pdf_work *work, unsigned widget) {
	const fl_pdf_value *reference = fl_pdf_get(&work->catalog.body, "AcroForm");
	fl_pdf_object form;
	if (reference->kind != FL_PDF_REFERENCE)
		return fl_pdf_refuse(&work->pdf, reference->begin, "has a form that this program did not make");
	fl_status status = fl_pdf_object_of(&work->pdf, last_revision(work), (unsigned)reference->whole, &form);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *fields = fl_pdf_get(&form.body, "Fields");
	if (!fields || fields->kind != FL_PDF_ARRAY)
		return fl_pdf_refuse(&work->pdf, form.begin, "has a form that this program did not make");
	fl_update_begin(&work->update, form.number);
	copy_range(work, form.body.begin, fields->end - 1);
	fl_text_printf(&work->update.bytes, " %u 0 R", widget);
	copy_range(work, fields->end - 1, form.body.end);
	fl_update_end(&work->update);
	return FL_OK;
}

static void write_widget(fl_pdf_work *work, unsigned widget, unsigned signature, unsigned block) {
	const fl_seal_place *place = &work->signing->place;
	fl_text *out = &work->update.bytes;
	fl_update_begin(&work->update, widget);
	fl_text_printf(out, "<< /Type /Annot /Subtype /Widget /FT /Sig /T (Seal%zu) /TU ",
	               work->before.signature_count + 1);
	fl_update_string(out, work->signing->text[0]);
	fl_text_add(out, " /F 132 /Rect [");
	fl_update_number(out, place->left);
	fl_update_number(out, place->bottom);
	fl_update_number(out, place->left + place->width);
	fl_update_number(out, place->bottom + place->height);
	fl_text_printf(out, "] /P %u 0 R /V %u 0 R /AP << /N %u 0 R >> >>", work->page.number, signature, block);
	fl_update_end(&work->update);
}

/* "D:20260414083000Z" */
static void write_date(fl_text *out, fl_utc at) {
	char iso[FL_UTC_SIZE];
	fl_text_add(out, "(D:");
	for (const char *from = fl_utc_format(at, iso); *from; from++)
		if ((*from >= '0' && *from <= '9') || *from == 'Z')
			fl_text_append(out, from, 1);
	fl_text_add(out, ")");
}

/* The dictionary with room for what is known only at the end. */
static void write_dictionary(fl_pdf_work *work, unsigned signature) {
	fl_text *out = &work->update.bytes;
	fl_update_begin(&work->update, signature);
	fl_text_add(out, "<< /Type /Sig /Filter /Adobe.PPKLite /SubFilter /ETSI.CAdES.detached\n/Name ");
	fl_update_string(out, work->signer->identity.name);
	if (work->signing->role) {
		fl_text_add(out, " /Reason ");
		fl_update_string(out, work->signing->role);
	}
	fl_text_add(out, " /M ");
	write_date(out, work->signing->at);
	fl_text_add(out, "\n/ByteRange [0 ");
	work->range_at = out->length;
	fl_text_printf(out, "%*s]\n/Contents ", RANGE_WIDTH, "");
	work->contents_at = out->length;
	fl_text_add(out, "<");
	for (size_t i = 0; i < work->room; i++)
		fl_text_append(out, "00", 2);
	fl_text_add(out, ">\n>>");
	fl_update_end(&work->update);
}

static fl_status write_identity(fl_pdf_work *work) {
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces all = {work->pdf.bytes, work->pdf.length, work->update.bytes.data, work->update.bytes.length};
	if (!fl_pieces_digest(&all, digest))
		return fl_crypto_fail(work->err, "compute a SHA-256");
	fl_update_finish(&work->update, digest);
	return FL_OK;
}

static fl_status write_objects(fl_pdf_work *work) {
	unsigned signature = fl_update_new(&work->update), widget = fl_update_new(&work->update), block = 0;
	fl_status status = fl_update_block(&work->update, work->signing, &block);
	if (status != FL_OK)
		return status;
	write_dictionary(work, signature);
	write_widget(work, widget, signature, block);
	status = write_page(work, widget);
	if (status == FL_OK && work->before.signature_count > 0)
		status = write_longer_form(work, widget);
	else if (status == FL_OK)
		write_new_form(work, widget);
	if (status == FL_OK)
		status = write_identity(work);
	if (status == FL_OK && work->update.bytes.failed)
		status = fl_fail(work->err, FL_E_MEMORY, "out of memory while signing");
	return status;
}

/* ---- signature ------------------------------------------------------------------------------------------------- */

static void write_hex(const fl_text *cms, unsigned char *to) {
	static const char digits[] = "0123456789abcdef";
	for (size_t i = 0; i < cms->length; i++) {
		to[2 * i] = (unsigned char)digits[(unsigned char)cms->data[i] >> 4];
		to[2 * i + 1] = (unsigned char)digits[cms->data[i] & 15];
	}
}

/* Fills byte range and contents of the finished file. */
static fl_status sign_file(fl_pdf_work *work, unsigned char *file, size_t length) {
	size_t first = work->pdf.length + work->contents_at, second = first + 2 * work->room + 2;
	char range[RANGE_WIDTH + 1];
	int used = snprintf(range, sizeof range, "%zu %zu %zu", first, second, length - second);
	memcpy(file + work->pdf.length + work->range_at, range, (size_t)used);
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces pieces = {file, first, file + second, length - second};
	fl_cms_signing how = {.at = work->signing->at, .timestamper = work->signing->timestamper};
	fl_text cms = {0};
	fl_status status = fl_pieces_digest(&pieces, digest) ? fl_cms_sign(work->signer, digest, &how, &cms, work->err)
	                                                     : fl_crypto_fail(work->err, "compute a SHA-256");
	if (status == FL_OK && cms.length > work->room)
		status = fl_fail(work->err, FL_E_INTERNAL, "the signature is larger than the room for it");
	if (status == FL_OK)
		write_hex(&cms, file + first + 1);
	fl_text_free(&cms);
	return status;
}

static fl_status build(fl_pdf_work *work, unsigned char **out, size_t *out_length) {
	const fl_pdf_value *size = fl_pdf_get(&work->pdf.revisions[last_revision(work)].trailer, "Size");
	if (!size || size->kind != FL_PDF_INTEGER || size->whole < 1 || size->whole > FL_PDF_OBJECTS_MOST - 100)
		return fl_pdf_refuse(&work->pdf, work->pdf.length, "does not say how many objects it has");
	work->update = (fl_pdf_update){.pdf = &work->pdf, .next = (unsigned)size->whole, .err = work->err};
	work->room = fl_cms_room(work->signer, work->signing->timestamper != NULL);
	fl_status status = write_objects(work);
	size_t length = work->pdf.length + work->update.bytes.length;
	unsigned char *file = status == FL_OK ? malloc(length) : NULL;
	if (status == FL_OK && !file)
		status = fl_fail(work->err, FL_E_MEMORY, "out of memory while signing");
	if (status == FL_OK) {
		memcpy(file, work->pdf.bytes, work->pdf.length);
		memcpy(file + work->pdf.length, work->update.bytes.data, work->update.bytes.length);
		status = sign_file(work, file, length);
	}
	if (status == FL_OK) {
		*out = file;
		*out_length = length;
	} else {
		free(file);
	}
	fl_text_free(&work->update.bytes);
	return status;
}

fl_status fl_pdf_sign(const unsigned char *bytes, size_t length, const fl_signer *signer, const fl_pdf_signing *signing,
                      unsigned char **out, size_t *out_length, fl_error *err) {
	fl_arena arena = {0};
	fl_pdf_work work = {.signer = signer, .signing = signing, .err = err};
	if (!signer->certificate)
		return fl_fail(err, FL_E_STATE, "the key has no certificate yet; make one or send its request to an authority");
	fl_status status = open_file(&work, bytes, length, &arena);
	if (status == FL_OK)
		status = build(&work, out, out_length);
	fl_arena_free(&arena);
	return status;
}
