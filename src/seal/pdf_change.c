/* pdf_change.c - a revision may bring a signature and nothing else.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A reader that only digests bytes calls an earlier signature valid although a later revision replaced the page under
 * it. So every object that a revision writes is held against the revision before:
 *   - an object that was there must be the catalog (only AcroForm added), the form (only a field added) or one page
 *     (only one annotation added), and otherwise equal value by value
 *   - the one field and the one annotation added are the same new object, a signature's widget of known keys
 *   - no object is freed; catalog and information dictionary stay the same objects */
#include "pdf_change.h"

#include <string.h>

typedef struct fl_change {
	fl_pdf *pdf;
	size_t revision;
	unsigned catalog, form, widget; /* object numbers; form 0 while there was none before */
	unsigned page;                  /* the page that changed, 0 while none */
	int page_number;
} fl_change;

static fl_status tampered(const fl_change *change, unsigned number, const char *what) {
	return fl_fail(change->pdf->err, FL_E_TAMPERED, "object %u %s", number, what);
}

/* Equal but for one key, whatever stands there. */
static bool equal_but(const fl_pdf_value *before, const fl_pdf_value *after, const char *key) {
	if (before->kind != FL_PDF_DICTIONARY || after->kind != FL_PDF_DICTIONARY)
		return false;
	for (size_t i = 0; i < before->count; i += 2) {
		const fl_pdf_value *other = fl_pdf_get(after, before->items[i].text);
		if (!fl_pdf_is_name(&before->items[i], key) && (!other || !fl_pdf_equal(&before->items[i + 1], other)))
			return false;
	}
	for (size_t i = 0; i < after->count; i += 2)
		if (!fl_pdf_is_name(&after->items[i], key) && !fl_pdf_get(before, after->items[i].text))
			return false;
	return true;
}

/* True if `after` is `before` with one reference more at its end, to *number. `before` may be NULL: an empty list. */
static bool one_more(const fl_pdf_value *before, const fl_pdf_value *after, unsigned *number) {
	size_t count = before ? before->count : 0;
	if ((before && before->kind != FL_PDF_ARRAY) || after->kind != FL_PDF_ARRAY || after->count != count + 1 ||
	    after->items[count].kind != FL_PDF_REFERENCE)
		return false;
	for (size_t i = 0; i < count; i++)
		if (!fl_pdf_equal(&before->items[i], &after->items[i]))
			return false;
	*number = (unsigned)after->items[count].whole;
	return true;
}

static bool is_new(const fl_change *change, unsigned number) {
	size_t at;
	return !fl_pdf_find(change->pdf, change->revision - 1, number, &at) &&
	       fl_pdf_find(change->pdf, change->revision, number, &at) &&
	       at >= change->pdf->revisions[change->revision].begin;
}

/* ---- catalog, form, page -------------------------------------------------------------------------------------- */

static bool same_entry(const fl_pdf_value *before, const fl_pdf_value *after, const char *key) {
	const fl_pdf_value *one = fl_pdf_get(before, key), *other = fl_pdf_get(after, key);
	return one && other ? fl_pdf_equal(one, other) : one == other;
}

static fl_status check_trailers(fl_change *change) {
	const fl_pdf_value *before = &change->pdf->revisions[change->revision - 1].trailer,
	                   *after = &change->pdf->revisions[change->revision].trailer;
	if (!same_entry(before, after, "Root") || !same_entry(before, after, "Info"))
		return fl_fail(change->pdf->err, FL_E_TAMPERED, "the document's catalog or its information was exchanged");
	return FL_OK;
}

/* The form of a revision, NULL-like (number 0) if it has none. */
static fl_status form_of(fl_change *change, size_t revision, fl_pdf_object *catalog, unsigned *number) {
	fl_status status = fl_pdf_catalog(change->pdf, revision, catalog);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *form = fl_pdf_get(&catalog->body, "AcroForm");
	*number = 0;
	if (!form)
		return FL_OK;
	if (form->kind != FL_PDF_REFERENCE || form->whole == 0)
		return fl_pdf_refuse(change->pdf, form->begin, "has a form that this program did not make");
	*number = (unsigned)form->whole;
	return FL_OK;
}

/* Catalog and form before and after; finds the widget. */
static fl_status check_form(fl_change *change) {
	fl_pdf_object before, after, form, form_before;
	unsigned number;
	fl_status status = form_of(change, change->revision - 1, &before, &change->form);
	if (status == FL_OK)
		status = form_of(change, change->revision, &after, &number);
	if (status != FL_OK)
		return status;
	change->catalog = before.number;
	if (!equal_but(&before.body, &after.body, "AcroForm") || (change->form != 0 && number != change->form))
		return tampered(change, before.number, "(the catalog) was changed");
	if (number == 0)
		return fl_fail(change->pdf->err, FL_E_TAMPERED, "it brings no signature");
	status = fl_pdf_object_of(change->pdf, change->revision, number, &form);
	if (status == FL_OK && change->form != 0)
		status = fl_pdf_object_of(change->pdf, change->revision - 1, number, &form_before);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *fields = fl_pdf_get(&form.body, "Fields");
	const fl_pdf_value *fields_before = change->form ? fl_pdf_get(&form_before.body, "Fields") : NULL;
	if (fields && fields_before && fl_pdf_equal(fields, fields_before))
		return fl_fail(change->pdf->err, FL_E_TAMPERED, "it brings no signature");
	if ((change->form && (!fields_before || !equal_but(&form_before.body, &form.body, "Fields"))) ||
	    (!change->form && form.body.count != 4) || !fields || !one_more(fields_before, fields, &change->widget) ||
	    !fl_pdf_get(&form.body, "SigFlags"))
		return tampered(change, number, "(the form) was changed by more than one signature");
	return FL_OK;
}

static fl_status check_page(fl_change *change, unsigned number) {
	fl_pdf_object before, after;
	fl_pdf_value list = {0}, list_before = {0};
	unsigned added = 0;
	if (change->page != 0 || !fl_pdf_page_of(change->pdf, change->revision - 1, number, &change->page_number))
		return tampered(change, number, "was replaced: what the file shows is no longer what was signed");
	fl_status status = fl_pdf_object_of(change->pdf, change->revision - 1, number, &before);
	if (status == FL_OK)
		status = fl_pdf_object_of(change->pdf, change->revision, number, &after);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *annotations = fl_pdf_get(&after.body, "Annots"),
	                   *annotations_before = fl_pdf_get(&before.body, "Annots");
	if (annotations)
		status = fl_pdf_resolve(change->pdf, change->revision, annotations, &list);
	if (status == FL_OK && annotations_before)
		status = fl_pdf_resolve(change->pdf, change->revision - 1, annotations_before, &list_before);
	if (status != FL_OK)
		return status;
	if (!equal_but(&before.body, &after.body, "Annots") || !annotations ||
	    !one_more(annotations_before ? &list_before : NULL, &list, &added) || added != change->widget)
		return tampered(change, number, "(a page) was changed by more than a signature's block");
	change->page = number;
	return FL_OK;
}

static fl_status check_written(fl_change *change) {
	unsigned number;
	size_t at;
	fl_status status = FL_OK;
	for (size_t i = 0; status == FL_OK && fl_pdf_written(change->pdf, change->revision, i, &number, &at); i++) {
		if (at == 0)
			return tampered(change, number, "was deleted");
		if (is_new(change, number) || number == change->catalog || (number == change->form && number != 0))
			continue;
		status = check_page(change, number);
	}
	if (status == FL_OK && change->page == 0)
		status = fl_fail(change->pdf->err, FL_E_TAMPERED, "the signature has no visible block on a page");
	return status;
}

/* ---- widget and dictionary ------------------------------------------------------------------------------------ */

/* True if every key is among the words of `keys`, which are divided by one space. */
static bool only_keys(const fl_pdf_value *dictionary, const char *keys) {
	if (dictionary->kind != FL_PDF_DICTIONARY)
		return false;
	for (size_t i = 0; i < dictionary->count; i += 2) {
		const char *key = dictionary->items[i].text;
		size_t length = dictionary->items[i].length;
		bool known = false;
		for (const char *word = keys; *word && !known;) {
			size_t word_length = strcspn(word, " ");
			known = word_length == length && memcmp(word, key, length) == 0;
			word += word_length + (word[word_length] == ' ');
		}
		if (!known)
			return false;
	}
	return true;
}

static bool read_place(const fl_change *change, const fl_pdf_value *rectangle, fl_seal_place *out) {
	if (!rectangle || rectangle->kind != FL_PDF_ARRAY || rectangle->count != 4)
		return false;
	double at[4];
	for (size_t i = 0; i < 4; i++) {
		if (rectangle->items[i].kind != FL_PDF_INTEGER && rectangle->items[i].kind != FL_PDF_REAL)
			return false;
		at[i] = rectangle->items[i].number;
	}
	*out = (fl_seal_place){change->page_number, at[0], at[1], at[2] - at[0], at[3] - at[1]};
	return out->width > 0 && out->height > 0;
}

static bool refers_to(const fl_pdf_value *value, unsigned number) {
	return value && value->kind == FL_PDF_REFERENCE && value->whole == (int64_t)number;
}

static fl_status check_widget(fl_change *change, fl_pdf_signature *out) {
	if (!is_new(change, change->widget))
		return tampered(change, change->widget, "stands as a signature but was there before");
	fl_status status = fl_pdf_object_of(change->pdf, change->revision, change->widget, &out->widget);
	if (status != FL_OK)
		return status;
	const fl_pdf_value *widget = &out->widget.body, *appearance = fl_pdf_get(widget, "AP"),
	                   *value = fl_pdf_get(widget, "V"), *flags = fl_pdf_get(widget, "F");
	if (!only_keys(widget, "Type Subtype FT T TU F Rect P V AP") ||
	    !fl_pdf_is_name(fl_pdf_get(widget, "Subtype"), "Widget") || !fl_pdf_is_name(fl_pdf_get(widget, "FT"), "Sig") ||
	    !flags || flags->whole != 132 || !refers_to(fl_pdf_get(widget, "P"), change->page) ||
	    !read_place(change, fl_pdf_get(widget, "Rect"), &out->place) || !appearance || !only_keys(appearance, "N"))
		return tampered(change, change->widget, "is not built as a signature's block must be");
	if (!value || value->kind != FL_PDF_REFERENCE || !is_new(change, (unsigned)value->whole))
		return tampered(change, change->widget, "has no signature of its own");
	return fl_pdf_object_of(change->pdf, change->revision, (unsigned)value->whole, &out->dictionary);
}

static fl_status check_dictionary(const fl_change *change, const fl_pdf_signature *signature) {
	const fl_pdf_value *dictionary = &signature->dictionary.body;
	if (!only_keys(dictionary, "Type Filter SubFilter Name Reason M ByteRange Contents") ||
	    signature->dictionary.is_stream || !fl_pdf_is_name(fl_pdf_get(dictionary, "Type"), "Sig") ||
	    !fl_pdf_is_name(fl_pdf_get(dictionary, "SubFilter"), "ETSI.CAdES.detached"))
		return tampered(change, signature->dictionary.number, "is not built as a PAdES signature must be");
	return FL_OK;
}

fl_status fl_pdf_change(fl_pdf *pdf, size_t revision, fl_pdf_signature *out) {
	fl_change change = {.pdf = pdf, .revision = revision};
	fl_status status = check_trailers(&change);
	if (status == FL_OK)
		status = check_form(&change);
	if (status == FL_OK)
		status = check_written(&change);
	if (status == FL_OK)
		status = check_widget(&change, out);
	if (status == FL_OK)
		status = check_dictionary(&change, out);
	return status;
}
