/* pdf.c - a sheet to PDF/A-1b bytes: faces from their folder, pages set, document written. Knows no calibration word.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "press.h"

#include <stdlib.h>

#define FACE_MAX ((size_t)16 * 1024 * 1024)

static fl_status load(fl_press *press, const fl_io *io, const char *folder, const char *name, unsigned char **bytes,
                      size_t *length, fl_error *err) {
	char *path = fl_arena_printf(&press->arena, "%s/%s", folder, name);
	char *read;
	if (!path)
		return fl_fail(err, FL_E_MEMORY, "out of memory while loading the certificate's faces");
	fl_status status = fl_file_read(io, path, FACE_MAX, &press->arena, &read, length, err);
	if (status == FL_OK)
		*bytes = (unsigned char *)read;
	return status;
}

/* Number 0 of every face is its "not defined" glyph, which is never set. */
static fl_status load_face(fl_press *press, const fl_io *io, const char *folder, const char *name, fl_typeface *type,
                           fl_error *err) {
	unsigned char *bytes = NULL;
	size_t length = 0;
	fl_status status = load(press, io, folder, name, &bytes, &length, err);
	if (status == FL_OK)
		status = fl_face_open(&type->face, bytes, length, name, err);
	if (status != FL_OK)
		return status;
	type->number_of = fl_arena_alloc(&press->arena, 65536, sizeof *type->number_of);
	type->glyphs = fl_arena_grow(&press->arena, NULL, 0, &type->glyph_capacity, sizeof *type->glyphs);
	type->points = fl_arena_grow(&press->arena, NULL, 0, &type->point_capacity, sizeof *type->points);
	type->count = 1;
	if (!type->number_of || !type->glyphs || !type->points)
		return fl_fail(err, FL_E_MEMORY, "out of memory while loading the certificate's faces");
	return FL_OK;
}

static fl_status load_all(fl_press *press, const fl_io *io, const char *folder, fl_error *err) {
	static const char *const names[FL_WEIGHTS] = {"regular.ttf", "bold.ttf"};
	fl_status status = FL_OK;
	for (int i = 0; i < FL_WEIGHTS && status == FL_OK; i++)
		status = load_face(press, io, folder, names[i], &press->faces[i], err);
	if (status == FL_OK)
		status = load(press, io, folder, "srgb.icc", &press->profile, &press->profile_length, err);
	return status;
}

static fl_status check_pages(fl_press *press, fl_error *err) {
	for (size_t i = 0; i < press->page_count && press->status == FL_OK; i++)
		if (press->pages[i].failed)
			press->status = fl_fail(err, FL_E_MEMORY, "out of memory while setting the certificate");
	return press->status;
}

/* Texts that are written into the file but not set on a page. */
static fl_status check_unset_texts(const fl_sheet *sheet, fl_error *err) {
	const char *texts[] = {sheet->title, sheet->number, sheet->author, sheet->subject, sheet->program};
	for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
		const char *end = texts[i];
		while (*end)
			end++;
		if (!fl_utf8_valid(texts[i], (size_t)(end - texts[i])))
			return fl_fail(err, FL_E_VALUE, "a text of the certificate is not valid UTF-8");
		if (fl_text_has_control(texts[i]))
			return fl_fail(err, FL_E_VALUE, "\"%s\" holds a control character; write it without", texts[i]);
	}
	return FL_OK;
}

/* Bookmarks only where there is more than one part. */
static fl_status bookmarks_of(fl_press *press, const fl_pack_part *parts, size_t count, fl_error *err) {
	if (count < 2)
		return FL_OK;
	fl_bookmark *marks = fl_arena_alloc(&press->arena, count, sizeof *marks);
	if (!marks)
		return fl_fail(err, FL_E_MEMORY, "out of memory while setting the certificate");
	for (size_t i = 0; i < count; i++)
		marks[i] = (fl_bookmark){parts[i].title, parts[i].level, parts[i].page};
	press->bookmarks = marks;
	press->bookmark_count = count;
	return FL_OK;
}

static fl_status set_document(fl_pack_part *parts, size_t count, const fl_io *io, const fl_faces *faces,
                              unsigned char **bytes, size_t *length, fl_sign_places *places, fl_error *err) {
	fl_error own = {0};
	fl_press press = {.sheet = parts[0].sheet, .err = err ? err : &own};
	fl_status status = check_unset_texts(parts[0].sheet, err);
	if (status == FL_OK)
		status = load_all(&press, io, faces->folder, err);
	if (status == FL_OK) {
		fl_set_parts(&press, parts, count);
		status = check_pages(&press, err);
	}
	if (status == FL_OK)
		status = bookmarks_of(&press, parts, count, err);
	if (status == FL_OK)
		status = fl_press_bytes(&press, bytes, length, err);
	for (size_t i = 0; i < press.page_count; i++)
		fl_text_free(&press.pages[i]);
	*places = press.places;
	fl_arena_free(&press.arena);
	return status;
}

fl_status fl_certificate_pdf_places(const fl_sheet *sheet, const fl_io *io, const fl_faces *faces,
                                    unsigned char **bytes, size_t *length, fl_sign_places *places, fl_error *err) {
	fl_pack_part one = {.sheet = sheet};
	return set_document(&one, 1, io, faces, bytes, length, places, err);
}

fl_status fl_certificate_pack_pdf(fl_pack_part *parts, size_t count, const fl_io *io, const fl_faces *faces,
                                  unsigned char **bytes, size_t *length, fl_error *err) {
	fl_sign_places places;
	if (count == 0 || !parts[0].sheet)
		return fl_fail(err, FL_E_VALUE, "a collection begins with a sheet");
	return set_document(parts, count, io, faces, bytes, length, &places, err);
}

fl_status fl_certificate_pdf(const fl_sheet *sheet, const fl_io *io, const fl_faces *faces, unsigned char **bytes,
                             size_t *length, fl_error *err) {
	fl_sign_places places;
	return fl_certificate_pdf_places(sheet, io, faces, bytes, length, &places, err);
}
