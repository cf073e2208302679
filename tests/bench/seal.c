/* seal.c - signing and checking a certificate beside what OpenSSL alone takes for the same arithmetic, in turns.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *	seal ROUNDS HOME SIGNER CERTIFICATE FACES
 *
 * HOME/keys/SIGNER is opened with the passphrase on standard input; CERTIFICATE is an unsigned one. Prints one line a
 * measurement: name, median ms, least ms, between tabs.
 *
 *   open key            the derivation of the passphrase and the key file (in rounds of their own: what it takes of the
 *                       processor's caches would be counted with the next)
 *   sign PDF            fl_pdf_sign: places, face, update, CMS
 *   raw signature       SHA-256 over the signed file and EVP_DigestSign over it, with a key of the same kind
 *   check PDF           fl_pdf_check of the certificate signed by one: reading the PDF, all that docs/seal.md says
 *   OpenSSL's check     d2i_CMS and CMS_verify of the same signature over the same bytes, with the chain: hashing and
 *                       verifying as OpenSSL alone does it
 *   bare arithmetic     SHA-256 over the file, EVP_DigestVerify, X509_verify_cert at two times, with key and
 *certificate read beforehand: less than anybody can check a file with
 */
#include <openssl/cms.h>
#include <openssl/evp.h>
#include <openssl/pem.h>
#include <openssl/x509.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "foundleft/certificate.h"

enum { MOST_ROUNDS = 2001, CASES = 6 };

static const char *const NAMES[CASES] = {"open key",  "sign PDF",        "raw signature",
                                         "check PDF", "OpenSSL's check", "bare arithmetic"};
static double took[CASES][MOST_ROUNDS];

static void must(int good, const char *what) {
	if (good)
		return;
	fprintf(stderr, "seal: %s\n", what);
	exit(1);
}

static double now_ms(void) {
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return (double)t.tv_sec * 1e3 + (double)t.tv_nsec / 1e6;
}

/* What all measurements work on. */
static struct {
	const char *home, *name;
	char passphrase[200], folder[400];
	char *bytes;
	size_t length;
	fl_signer *signer;
	fl_seal_face face;
	fl_trust *trust;
	X509_STORE *store;
	X509 *certificate;
	EVP_PKEY *key; /* of the raw signature: the same kind */
	unsigned char *signed_bytes, raw[600];
	size_t signed_length, raw_length;
	unsigned char cms[8000], *content; /* the signature of the signed file, and the bytes that it is over */
	size_t cms_length, content_length;
	fl_utc at;
} bench;

static void open_key(void) {
	char copy[200];
	fl_error err = {0};
	fl_signer *signer;
	memcpy(copy, bench.passphrase, sizeof copy);
	fl_secret secret = {(unsigned char *)copy, strlen(copy)};
	must(fl_signer_open(fl_io_system(), bench.folder, bench.name, &secret, &signer, &err) == FL_OK, err.message);
	fl_signer_free(bench.signer);
	bench.signer = signer;
}

static void sign_pdf(void) {
	static const char *const lines[] = {"An invented person, an invented yard", "signed as performed",
	                                    "electronic signature"};
	fl_error err = {0};
	fl_pdf_signing how = {.role = "performed",
	                      .at = bench.at,
	                      .place = {0, 60, 60, 220, 36},
	                      .text = lines,
	                      .text_count = 3,
	                      .face = &bench.face};
	free(bench.signed_bytes);
	must(fl_pdf_sign((unsigned char *)bench.bytes, bench.length, bench.signer, &how, &bench.signed_bytes,
	                 &bench.signed_length, &err) == FL_OK,
	     err.message);
}

static void raw_sign(void) {
	unsigned char digest[32];
	unsigned size;
	EVP_MD_CTX *context = EVP_MD_CTX_new();
	bench.raw_length = sizeof bench.raw;
	must(EVP_Digest(bench.signed_bytes, bench.signed_length, digest, &size, EVP_sha256(), NULL) == 1 &&
	         EVP_DigestSignInit(context, NULL, EVP_sha256(), NULL, bench.key) == 1 &&
	         EVP_DigestSign(context, bench.raw, &bench.raw_length, digest, size) == 1,
	     "OpenSSL does not sign");
	EVP_MD_CTX_free(context);
}

static void check_pdf(void) {
	fl_error err = {0};
	fl_arena arena = {0};
	fl_seal_report report;
	must(fl_pdf_check(bench.signed_bytes, bench.signed_length, bench.trust, bench.at, NULL, 0, &arena, &report, &err) ==
	             FL_OK &&
	         report.verdict == FL_SEAL_GOOD,
	     "the certificate does not hold");
	fl_arena_free(&arena);
}

static void raw_chain(void) {
	X509_STORE_CTX *context = X509_STORE_CTX_new();
	must(X509_STORE_CTX_init(context, bench.store, bench.certificate, NULL) == 1, "OpenSSL has no memory");
	X509_VERIFY_PARAM_set_time(X509_STORE_CTX_get0_param(context), (time_t)bench.at);
	must(X509_verify_cert(context) == 1, "OpenSSL does not trust the certificate");
	X509_STORE_CTX_free(context);
}

static void raw_check(void) {
	unsigned char digest[32];
	unsigned size;
	EVP_MD_CTX *context = EVP_MD_CTX_new();
	must(EVP_Digest(bench.signed_bytes, bench.signed_length, digest, &size, EVP_sha256(), NULL) == 1 &&
	         EVP_DigestVerifyInit(context, NULL, EVP_sha256(), NULL, bench.key) == 1 &&
	         EVP_DigestVerify(context, bench.raw, bench.raw_length, digest, size) == 1,
	     "OpenSSL does not verify");
	EVP_MD_CTX_free(context);
	raw_chain();
	raw_chain();
}

/* Takes the signature out by the byte range, as anyone can. */
static void take_out(void) {
	size_t first = 0, second = 0, rest = 0;
	const char *range = memmem(bench.signed_bytes, bench.signed_length, "/ByteRange [0 ", 14);
	must(range && sscanf(range + 14, "%zu %zu %zu", &first, &second, &rest) == 3, "the file has no byte range");
	for (size_t i = first + 1; i + 1 < second && bench.cms_length < sizeof bench.cms; i += 2) {
		unsigned byte = 0;
		must(sscanf((char *)bench.signed_bytes + i, "%2x", &byte) == 1, "the signature is no hexadecimal");
		bench.cms[bench.cms_length++] = (unsigned char)byte;
	}
	bench.content_length = first + rest;
	bench.content = malloc(bench.content_length);
	memcpy(bench.content, bench.signed_bytes, first);
	memcpy(bench.content + first, bench.signed_bytes + second, rest);
}

static void openssl_check(void) {
	const unsigned char *at = bench.cms;
	if (!bench.content)
		take_out();
	CMS_ContentInfo *cms = d2i_CMS_ContentInfo(NULL, &at, (long)bench.cms_length);
	BIO *content = BIO_new_mem_buf(bench.content, (int)bench.content_length);
	must(cms && content && CMS_verify(cms, NULL, bench.store, content, NULL, CMS_BINARY | CMS_DETACHED) == 1,
	     "OpenSSL does not verify the file's signature");
	BIO_free(content);
	CMS_ContentInfo_free(cms);
}

static int rising(const void *a, const void *b) {
	double x = *(const double *)a, y = *(const double *)b;
	return x < y ? -1 : x > y;
}

static void prepare(char **argv, fl_arena *arena) {
	char path[500];
	fl_error err = {0};
	bench.home = argv[2];
	bench.name = argv[3];
	must(fgets(bench.passphrase, sizeof bench.passphrase, stdin) != NULL, "no passphrase on standard input");
	bench.passphrase[strcspn(bench.passphrase, "\n")] = '\0';
	snprintf(bench.folder, sizeof bench.folder, "%s/keys", bench.home);
	bench.at = (fl_utc)time(NULL);
	must(fl_file_read(fl_io_system(), argv[4], 1 << 26, arena, &bench.bytes, &bench.length, &err) == FL_OK,
	     err.message);
	must(fl_certificate_face(fl_io_system(), &(fl_faces){argv[5]}, arena, &bench.face, &err) == FL_OK, err.message);
	snprintf(path, sizeof path, "%s/%s.crt", bench.folder, bench.name);
	FILE *file = fopen(path, "r");
	bench.certificate = file ? PEM_read_X509(file, NULL, NULL, NULL) : NULL;
	must(bench.certificate != NULL, "the signer has no certificate");
	fclose(file);
	bench.store = X509_STORE_new();
	X509_STORE_add_cert(bench.store, bench.certificate);
	X509_STORE_set_purpose(bench.store, X509_PURPOSE_ANY);
	bool rsa = EVP_PKEY_get_base_id(X509_get0_pubkey(bench.certificate)) == EVP_PKEY_RSA;
	bench.key = rsa ? EVP_RSA_gen((size_t)3072) : EVP_EC_gen("P-256");
	open_key();
	fl_text pem = {0};
	must(fl_signer_pem(bench.signer, &pem, &err) == FL_OK && fl_trust_new(&bench.trust, &err) == FL_OK &&
	         fl_trust_add(bench.trust, pem.data, pem.length, "signer", NULL, &err) == FL_OK,
	     err.message);
	fl_text_free(&pem);
}

int main(int argc, char **argv) {
	static void (*const run[CASES])(void) = {open_key, sign_pdf, raw_sign, check_pdf, openssl_check, raw_check};
	fl_arena arena = {0};
	int rounds = argc == 6 ? atoi(argv[1]) : 0;
	must(rounds > 0 && rounds <= MOST_ROUNDS, "usage: seal ROUNDS HOME SIGNER CERTIFICATE FACES");
	prepare(argv, &arena);
	for (int i = 0; i < 2 * rounds; i++) {
		int from = i < rounds ? 0 : 1, to = i < rounds ? 1 : CASES;
		for (int one = from; one < to; one++) {
			double start = now_ms();
			run[one]();
			took[one][i % rounds] = now_ms() - start;
		}
	}
	for (int i = 0; i < CASES; i++) {
		qsort(took[i], (size_t)rounds, sizeof took[i][0], rising);
		printf("%s\t%.3f\t%.3f\n", NAMES[i], took[i][rounds / 2], took[i][0]);
	}
	return 0;
}
