/* people.h - invented people, an authority that certifies them, a tiny PDF/A-1b file and a face: what the tests of the
 * seal stand on. The world of Quillhaven and Tallmere Yard is invented.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_SEAL_PEOPLE_H
#define FOUNDLEFT_TEST_SEAL_PEOPLE_H

#include "check.h"
#include "foundleft/seal.h"
#include "scratch.h"

#include <openssl/bio.h>
#include <openssl/pem.h>
#include <openssl/rand.h>
#include <openssl/x509v3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* The face code of the certificate stage serves as the visible block's face. */
#include "../../src/certificate/face.c"
#include "../../src/certificate/face_subset.c"

#define NOW 1776153612 /* 2026-04-14T08:00:12Z */
#define DAY 86400
#define must(call)                                          \
	do {                                                    \
		fl_error must_err = {0};                            \
		fl_error *err = &must_err;                          \
		fl_status must_status = (call);                     \
		if (must_status != FL_OK)                           \
			print_message("%s: %s\n", #call, err->message); \
		assert_int_equal(must_status, FL_OK);               \
	} while (0)

/* ---- authority ------------------------------------------------------------------------------------------------- */

typedef struct authority {
	EVP_PKEY *key;
	X509 *certificate;
} authority;

static inline void set_name(X509_NAME *name, const char *common, const char *organisation) {
	X509_NAME_add_entry_by_txt(name, "O", MBSTRING_UTF8, (const unsigned char *)organisation, -1, -1, 0);
	X509_NAME_add_entry_by_txt(name, "CN", MBSTRING_UTF8, (const unsigned char *)common, -1, -1, 0);
}

static inline void add_extension(X509 *certificate, X509 *issuer, int nid, const char *value) {
	X509V3_CTX context;
	X509V3_set_ctx(&context, issuer, certificate, NULL, NULL, 0);
	X509_EXTENSION *extension = X509V3_EXT_conf_nid(NULL, &context, nid, value);
	assert_non_null(extension);
	assert_int_equal(X509_add_ext(certificate, extension, -1), 1);
	X509_EXTENSION_free(extension);
}

/* A certificate over `key`, signed by `by` (NULL: by itself). */
static inline X509 *issue(EVP_PKEY *key, X509_NAME *subject, const authority *by, EVP_PKEY *signing_key,
                          bool is_authority, const char *purpose, fl_utc from, int days) {
	static long serial = 1000;
	X509 *made = X509_new();
	X509_set_version(made, X509_VERSION_3);
	ASN1_INTEGER_set(X509_get_serialNumber(made), ++serial);
	ASN1_TIME_adj(X509_getm_notBefore(made), (time_t)from, 0, 0);
	ASN1_TIME_adj(X509_getm_notAfter(made), (time_t)from, days, 0);
	X509_set_subject_name(made, subject);
	X509_set_issuer_name(made, by ? X509_get_subject_name(by->certificate) : subject);
	X509_set_pubkey(made, key);
	X509 *issuer = by ? by->certificate : made;
	add_extension(made, issuer, NID_basic_constraints, is_authority ? "critical,CA:TRUE" : "critical,CA:FALSE");
	add_extension(made, issuer, NID_key_usage,
	              is_authority ? "critical,keyCertSign,cRLSign" : "critical,digitalSignature,nonRepudiation");
	add_extension(made, issuer, NID_subject_key_identifier, "hash");
	if (by)
		add_extension(made, issuer, NID_authority_key_identifier, "keyid:always");
	if (purpose)
		add_extension(made, issuer, NID_ext_key_usage, purpose);
	assert_true(X509_sign(made, signing_key, EVP_sha256()) > 0);
	return made;
}

/* `by` NULL: a root. */
static inline authority new_authority(const char *name, const authority *by, fl_utc from, int days) {
	authority made = {.key = EVP_EC_gen("P-256")};
	X509_NAME *subject = X509_NAME_new();
	set_name(subject, name, "Quillhaven Metrology (invented)");
	made.certificate = issue(made.key, subject, by, by ? by->key : made.key, true, NULL, from, days);
	X509_NAME_free(subject);
	return made;
}

static inline void free_authority(authority *it) {
	EVP_PKEY_free(it->key);
	X509_free(it->certificate);
}

static inline void add_pem(fl_text *out, X509 *certificate) {
	BIO *bio = BIO_new(BIO_s_mem());
	char *data;
	PEM_write_bio_X509(bio, certificate);
	long length = BIO_get_mem_data(bio, &data);
	fl_text_append(out, data, (size_t)length);
	BIO_free(bio);
}

/* What an authority does with a request; appends the certificate. */
static inline void answer_request(const fl_text *request, const authority *by, fl_utc from, int days, fl_text *out) {
	BIO *bio = BIO_new_mem_buf(request->data, (int)request->length);
	X509_REQ *read = PEM_read_bio_X509_REQ(bio, NULL, NULL, NULL);
	assert_non_null(read);
	EVP_PKEY *key = X509_REQ_get_pubkey(read);
	assert_int_equal(X509_REQ_verify(read, key), 1);
	X509 *made = issue(key, X509_REQ_get_subject_name(read), by, by->key, false, NULL, from, days);
	add_pem(out, made);
	X509_free(made);
	EVP_PKEY_free(key);
	X509_REQ_free(read);
	BIO_free(bio);
}

/* A person certified by an authority, with the authority's own certificate handed along. */
static inline fl_signer *new_person(fl_key_kind kind, const char *name, const char *role, const authority *by,
                                    fl_utc from, int days) {
	fl_person person = {.name = name, .organisation = "Tallmere Yard (invented)", .role = role};
	fl_signer *signer = NULL;
	fl_text request = {0}, answer = {0};
	must(fl_signer_new(kind, &signer, err));
	must(fl_signer_request(signer, &person, &request, err));
	answer_request(&request, by, from, days, &answer);
	add_pem(&answer, by->certificate);
	must(fl_signer_take(signer, answer.data, answer.length, "answer.pem", err));
	fl_text_free(&request);
	fl_text_free(&answer);
	return signer;
}

static inline fl_trust *trust_in(const authority *it) {
	fl_trust *trust = NULL;
	fl_text pem = {0};
	must(fl_trust_new(&trust, err));
	add_pem(&pem, it->certificate);
	must(fl_trust_add(trust, pem.data, pem.length, "authority.pem", NULL, err));
	fl_text_free(&pem);
	return trust;
}

/* ---- a face and a file ------------------------------------------------------------------------------------------ */

static inline char *read_file(const char *path, size_t *length) {
	FILE *file = fopen(path, "rb");
	assert_non_null(file);
	char *bytes = malloc((size_t)4 << 20);
	assert_non_null(bytes);
	*length = fread(bytes, 1, (size_t)4 << 20, file);
	fclose(file);
	return bytes;
}

static inline void write_file(const char *folder, const char *name, const void *bytes, size_t length) {
	char path[SCRATCH_SIZE];
	FILE *file = fopen(scratch_path(folder, name, path), "wb");
	assert_non_null(file);
	assert_int_equal(fwrite(bytes, 1, length, file), length);
	assert_int_equal(fclose(file), 0);
}

typedef struct open_face {
	fl_face face;
	char *bytes;
	fl_seal_face seal;
} open_face;

static inline unsigned face_glyph(const void *self, uint32_t point) {
	return fl_face_glyph(self, point);
}
static inline double face_advance(const void *self, unsigned glyph) {
	return fl_face_advance(self, glyph);
}
static inline fl_status face_subset(const void *self, const uint16_t *glyphs, size_t count, fl_arena *arena,
                                    unsigned char **out, size_t *length, size_t *glyph_count, fl_error *err) {
	return fl_face_subset(self, glyphs, count, arena, out, length, glyph_count, err);
}

static inline void open_a_face(open_face *it) {
	size_t length;
	it->bytes = read_file("/usr/share/fonts/truetype/dejavu/DejaVuSans.ttf", &length);
	must(fl_face_open(&it->face, (unsigned char *)it->bytes, length, "DejaVuSans.ttf", err));
	const fl_face *face = &it->face;
	it->seal = (fl_seal_face){.self = face,
	                          .name = face->name,
	                          .ascent = face->ascent,
	                          .descent = face->descent,
	                          .cap_height = face->cap_height,
	                          .x_height = face->x_height,
	                          .glyph = face_glyph,
	                          .advance = face_advance,
	                          .subset = face_subset};
	memcpy(it->seal.box, face->box, sizeof it->seal.box);
}

static const char metadata[] =
    "<?xpacket begin=\"\xef\xbb\xbf\" id=\"W5M0MpCehiHzreSzNTczkc9d\"?>\n"
    "<x:xmpmeta xmlns:x=\"adobe:ns:meta/\"><rdf:RDF xmlns:rdf=\"http://www.w3.org/1999/02/22-rdf-syntax-ns#\">\n"
    "<rdf:Description rdf:about=\"\" xmlns:pdfaid=\"http://www.aiim.org/pdfa/ns/id/\"><pdfaid:part>1</pdfaid:part>"
    "<pdfaid:conformance>B</pdfaid:conformance></rdf:Description>\n</rdf:RDF></x:xmpmeta>\n<?xpacket end=\"w\"?>";

/* Objects of a file and their places. */
typedef struct sample {
	fl_text bytes;
	size_t at[16];
	unsigned count;
} sample;

static inline void sample_object(sample *it, const char *body) {
	it->at[++it->count] = it->bytes.length;
	fl_text_printf(&it->bytes, "%u 0 obj\n%s\nendobj\n", it->count, body);
}

static inline void sample_stream(sample *it, const char *entries, const void *bytes, size_t length) {
	it->at[++it->count] = it->bytes.length;
	fl_text_printf(&it->bytes, "%u 0 obj\n<< %s/Length %zu >>\nstream\n", it->count, entries, length);
	fl_text_append(&it->bytes, bytes, length);
	fl_text_add(&it->bytes, "\nendstream\nendobj\n");
}

static inline void sample_end(sample *it) {
	size_t table = it->bytes.length;
	fl_text_printf(&it->bytes, "xref\n0 %u\n0000000000 65535 f \n", it->count + 1);
	for (unsigned i = 1; i <= it->count; i++)
		fl_text_printf(&it->bytes, "%010zu 00000 n \n", it->at[i]);
	fl_text_printf(&it->bytes,
	               "trailer\n<< /Size %u /Root 1 0 R /ID [<00112233445566778899aabbccddeeff> "
	               "<00112233445566778899aabbccddeeff>] >>\nstartxref\n%zu\n%%%%EOF\n",
	               it->count + 1, table);
}

/* One page with a grey bar; PDF/A-1b when the colour profile is put in. */
static inline fl_text sample_pdf(bool with_profile) {
	sample it = {0};
	const char bar[] = "0.8 g 40 760 500 30 re f";
	fl_text_add(&it.bytes, "%PDF-1.4\n%\xe2\xe3\xcf\xd3\n");
	sample_object(&it, with_profile
	                       ? "<< /Type /Catalog /Pages 2 0 R /Metadata 5 0 R /OutputIntents [<< /Type /OutputIntent "
	                         "/S /GTS_PDFA1 /OutputConditionIdentifier (sRGB) /DestOutputProfile 6 0 R >>] >>"
	                       : "<< /Type /Catalog /Pages 2 0 R >>");
	sample_object(&it, "<< /Type /Pages /Kids [3 0 R] /Count 1 >>");
	sample_object(&it, "<< /Type /Page /Parent 2 0 R /MediaBox [0 0 595 842] /Contents 4 0 R /Resources << >> >>");
	sample_stream(&it, "", bar, sizeof bar - 1);
	if (with_profile) {
		size_t length;
		char *profile = read_file("/usr/share/color/icc/sRGB.icc", &length);
		sample_stream(&it, "/Type /Metadata /Subtype /XML ", metadata, sizeof metadata - 1);
		sample_stream(&it, "/N 3 ", profile, length);
		free(profile);
	}
	sample_end(&it);
	return it.bytes;
}

/* ---- signing and checking --------------------------------------------------------------------------------------- */

static inline fl_pdf_signing signing_of(const open_face *face, const char *role, double left, const char *const *text,
                                        size_t count) {
	return (fl_pdf_signing){.role = role,
	                        .at = NOW,
	                        .place = {0, left, 60, 220, 56},
	                        .text = text,
	                        .text_count = count,
	                        .face = &face->seal};
}

static inline void print_report(const fl_seal_report *report) {
	static const char *const marks[] = {"good", "note", "BAD "};
	for (size_t i = 0; i < report->line_count; i++)
		print_message("  %s %d %s: %s\n", marks[report->lines[i].mark], report->lines[i].signature,
		              report->lines[i].what, report->lines[i].sentence);
}

/* True if a line of that mark and subject holds those words. */
static inline bool reports(const fl_seal_report *report, fl_check_mark mark, const char *what, const char *words) {
	for (size_t i = 0; i < report->line_count; i++)
		if (report->lines[i].mark == mark && strcmp(report->lines[i].what, what) == 0 &&
		    strstr(report->lines[i].sentence, words))
			return true;
	print_message("no line \"%s: ... %s\" among\n", what, words);
	print_report(report);
	return false;
}

#endif
