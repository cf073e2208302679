/* key_file.c - keys on the disk: PKCS#8 under a slow key derivation, certificates beside, and PKCS#12 files.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The key is encrypted with AES-256-CBC under scrypt with N = 2^14, r = 8, p = 1: 16 MiB and some 25 to 40 ms a guess.
 * r = 8 and p = 1 is what RFC 7914, section 2, finds to be good, and N = 2^14 with them is what OpenSSL's `pkcs8
 * -scrypt` takes. p = 5 costs five times as much each time a person signs and an attacker 2.3 bits more, which is less
 * than half a character of a passphrase. What it was made with stands in the file, so other values can be opened too.
 * The file is plain PKCS#8, so that OpenSSL alone can open it. */
#include "key.h"

#include <errno.h>
#include <fcntl.h>
#include <openssl/bio.h>
#include <openssl/crypto.h>
#include <openssl/err.h>
#include <openssl/pem.h>
#include <openssl/pkcs12.h>
#include <openssl/rand.h>
#include <openssl/x509.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#define SCRYPT_N 16384
#define SCRYPT_R 8
#define SCRYPT_P 1
#define KEY_FILE_MOST ((size_t)64 * 1024)
#define PASSPHRASE_MOST 1024

/* ---- encryption ---------------------------------------------------------------------------------------------- */

/* The PEM of the encrypted key in a new BIO. */
static BIO *encrypt(EVP_PKEY *key, const fl_secret *passphrase) {
	unsigned char salt[16], iv[16];
	BIO *bio = BIO_new(BIO_s_mem());
	PKCS8_PRIV_KEY_INFO *plain = EVP_PKEY2PKCS8(key);
	X509_ALGOR *how = NULL;
	if (RAND_bytes(salt, sizeof salt) == 1 && RAND_bytes(iv, sizeof iv) == 1)
		how = PKCS5_pbe2_set_scrypt(EVP_aes_256_cbc(), salt, sizeof salt, iv, SCRYPT_N, SCRYPT_R, SCRYPT_P);
	X509_SIG *sealed = NULL;
	if (bio && plain && how)
		sealed = PKCS8_set0_pbe((const char *)passphrase->bytes, (int)passphrase->length, plain, how);
	if (!sealed)
		X509_ALGOR_free(how);
	bool written = sealed && PEM_write_bio_PKCS8(bio, sealed) == 1;
	X509_SIG_free(sealed);
	PKCS8_PRIV_KEY_INFO_free(plain);
	if (written)
		return bio;
	BIO_free(bio);
	return NULL;
}

/* Only this form is taken: a key in the clear is refused. */
static EVP_PKEY *decrypt(const char *pem, size_t length, const fl_secret *passphrase, bool *is_sealed) {
	BIO *bio = BIO_new_mem_buf(pem, (int)length);
	X509_SIG *sealed = bio ? PEM_read_bio_PKCS8(bio, NULL, NULL, NULL) : NULL;
	*is_sealed = sealed != NULL;
	PKCS8_PRIV_KEY_INFO *plain =
	    sealed ? PKCS8_decrypt(sealed, (const char *)passphrase->bytes, (int)passphrase->length) : NULL;
	EVP_PKEY *key = plain ? EVP_PKCS82PKEY(plain) : NULL;
	PKCS8_PRIV_KEY_INFO_free(plain);
	X509_SIG_free(sealed);
	BIO_free(bio);
	ERR_clear_error();
	return key;
}

/* ---- files --------------------------------------------------------------------------------------------------- */

static fl_status refuse_name(const char *name, fl_error *err) {
	size_t length = strlen(name);
	if (length == 0 || length > 100 || name[0] == '.' || strchr(name, '/') || fl_text_has_control(name))
		return fl_fail(err, FL_E_VALUE,
		               "\"%.100s\" cannot name a key: 1 to 100 characters, no slash, no point in front", name);
	return FL_OK;
}

static fl_status make_path(fl_arena *arena, const char *folder, const char *name, const char *suffix, char **out,
                           fl_error *err) {
	fl_status status = refuse_name(name, err);
	if (status != FL_OK)
		return status;
	*out = fl_arena_printf(arena, "%s/%s%s", folder, name, suffix);
	return *out ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory for the name of a key file");
}

static int write_and_close(const fl_io *io, int fd, const char *bytes, size_t length) {
	int failed = 0;
	while (length > 0 && !failed) {
		long wrote = io->write(io->self, fd, bytes, length);
		if (wrote < 0 && errno == EINTR)
			continue;
		if (wrote == 0)
			errno = EIO;
		failed = wrote <= 0;
		bytes += failed ? 0 : wrote;
		length -= failed ? 0 : (size_t)wrote;
	}
	if (!failed)
		failed = io->sync(io->self, fd) != 0;
	int reason = errno;
	if (io->close(io->self, fd) != 0 && !failed)
		return -1;
	errno = reason;
	return failed ? -1 : 0;
}

/* A new file that only its owner may read. fl_file_write is not used because its files are for everyone. */
static fl_status write_private(const fl_io *io, const char *path, const char *bytes, size_t length, fl_error *err) {
	int fd = io->open(io->self, path, O_WRONLY | O_CREAT | O_EXCL | O_NOFOLLOW | O_CLOEXEC, 0600);
	if (fd < 0)
		return fl_io_fail(err, "write", path, errno);
	if (write_and_close(io, fd, bytes, length) == 0)
		return FL_OK;
	int reason = errno;
	io->unlink(io->self, path);
	return fl_io_fail(err, "write", path, reason);
}

/* Makes the entry of the new key in its folder durable. A network disk that cannot sync a folder is let pass. */
static fl_status sync_folder(const fl_io *io, const char *folder, fl_error *err) {
	int fd = io->open(io->self, folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC, 0);
	if (fd < 0)
		return fl_io_fail(err, "make durable", folder, errno);
	int failed = io->sync(io->self, fd) != 0 && errno != EINVAL && errno != ENOTSUP, reason = errno;
	io->close(io->self, fd);
	return failed ? fl_io_fail(err, "make durable", folder, reason) : FL_OK;
}

static fl_status save_key(const fl_signer *signer, const fl_io *io, const char *path, const fl_secret *passphrase,
                          fl_error *err) {
	if (passphrase->length < FL_PASSPHRASE_LEAST)
		return fl_fail(err, FL_E_VALUE, "the passphrase is shorter than %d characters; choose a longer one",
		               FL_PASSPHRASE_LEAST);
	if (passphrase->length > PASSPHRASE_MOST)
		return fl_fail(err, FL_E_VALUE, "the passphrase is longer than %d bytes", PASSPHRASE_MOST);
	BIO *sealed = encrypt(signer->key, passphrase);
	if (!sealed)
		return fl_crypto_fail(err, "encrypt the key");
	char *bytes;
	long length = BIO_get_mem_data(sealed, &bytes);
	fl_status status = write_private(io, path, bytes, (size_t)length, err);
	BIO_free(sealed);
	return status;
}

fl_status fl_signer_save_certificate(const fl_signer *signer, const fl_io *io, const char *folder, const char *name,
                                     fl_error *err) {
	fl_arena arena = {0};
	fl_text pem = {0};
	char *path;
	fl_status status = make_path(&arena, folder, name, ".crt", &path, err);
	if (status == FL_OK)
		status = fl_signer_pem(signer, &pem, err);
	if (status == FL_OK)
		status = fl_file_write(io, path, pem.data, pem.length, true, err);
	fl_text_free(&pem);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_signer_save(const fl_signer *signer, const fl_io *io, const char *folder, const char *name,
                         fl_secret *passphrase, fl_error *err) {
	fl_arena arena = {0};
	char *path;
	fl_status status = make_path(&arena, folder, name, ".key", &path, err);
	if (status == FL_OK)
		status = save_key(signer, io, path, passphrase, err);
	fl_secret_wipe(passphrase);
	if (status == FL_OK)
		status = sync_folder(io, folder, err);
	if (status == FL_OK && signer->certificate)
		status = fl_signer_save_certificate(signer, io, folder, name, err);
	fl_arena_free(&arena);
	return status;
}

static fl_status refuse_readable(const char *path, fl_error *err) {
	struct stat info;
	if (stat(path, &info) != 0)
		return fl_io_fail(err, "open the key", path, errno);
	if (info.st_mode & (S_IRWXG | S_IRWXO))
		return fl_fail(err, FL_E_READ_ONLY,
		               "others than you may read the key %s: take that right away (chmod 600) first", path);
	return FL_OK;
}

static fl_status read_key(const fl_io *io, const char *path, const fl_secret *passphrase, fl_signer *signer,
                          fl_error *err) {
	fl_arena arena = {0};
	char *bytes;
	size_t length;
	bool sealed = false;
	fl_status status = refuse_readable(path, err);
	if (status == FL_OK)
		status = fl_file_read(io, path, KEY_FILE_MOST, &arena, &bytes, &length, err);
	if (status == FL_OK) {
		signer->key = decrypt(bytes, length, passphrase, &sealed);
		if (!sealed)
			status = fl_fail(err, FL_E_SYNTAX, "%s is no encrypted key; make or import one first", path);
		else if (!signer->key)
			status =
			    fl_fail(err, FL_E_STATE,
			            "the passphrase does not open %s; try again. A lost passphrase cannot be recovered: make a "
			            "new key then",
			            path);
	}
	fl_arena_free(&arena);
	return status;
}

static fl_status read_certificate(const fl_io *io, const char *path, fl_signer *signer, fl_error *err) {
	struct stat info;
	if (stat(path, &info) != 0 && errno == ENOENT)
		return FL_OK;
	fl_arena arena = {0};
	char *bytes;
	size_t length;
	fl_status status = fl_file_read(io, path, KEY_FILE_MOST, &arena, &bytes, &length, err);
	if (status == FL_OK)
		status = fl_signer_take(signer, bytes, length, path, err);
	fl_arena_free(&arena);
	return status;
}

fl_status fl_signer_open(const fl_io *io, const char *folder, const char *name, fl_secret *passphrase, fl_signer **out,
                         fl_error *err) {
	fl_arena arena = {0};
	char *key_path, *certificate_path;
	fl_signer *signer = calloc(1, sizeof *signer);
	fl_status status = signer ? FL_OK : fl_fail(err, FL_E_MEMORY, "out of memory for a key");
	if (status == FL_OK)
		status = make_path(&arena, folder, name, ".key", &key_path, err);
	if (status == FL_OK)
		status = make_path(&arena, folder, name, ".crt", &certificate_path, err);
	if (status == FL_OK)
		status = read_key(io, key_path, passphrase, signer, err);
	fl_secret_wipe(passphrase);
	if (status == FL_OK)
		status = read_certificate(io, certificate_path, signer, err);
	fl_arena_free(&arena);
	if (status == FL_OK)
		*out = signer;
	else
		fl_signer_free(signer);
	return status;
}

/* ---- PKCS#12 ------------------------------------------------------------------------------------------------- */

/* Key and certificates of the file. The passphrase is ended with a zero byte in a copy that is wiped. */
static fl_status open_pkcs12(PKCS12 *file, const fl_secret *passphrase, EVP_PKEY **key, X509 **certificate,
                             STACK_OF(X509) * *others, fl_place place, fl_error *err) {
	char text[PASSPHRASE_MOST + 1] = "";
	if (passphrase->length >= sizeof text ||
	    (passphrase->length > 0 && memchr(passphrase->bytes, 0, passphrase->length)))
		return fl_fail_at(err, FL_E_VALUE, place, "the passphrase is too long or holds a zero byte");
	if (passphrase->length > 0)
		memcpy(text, passphrase->bytes, passphrase->length);
	int verified = PKCS12_verify_mac(file, text, (int)passphrase->length);
	if (!verified && passphrase->length == 0)
		verified = PKCS12_verify_mac(file, NULL, 0);
	int parsed = verified ? PKCS12_parse(file, text, key, certificate, others) : 0;
	OPENSSL_cleanse(text, sizeof text);
	if (!verified) {
		ERR_clear_error();
		return fl_fail_at(err, FL_E_STATE, place,
		                  "the passphrase does not open it; try again or ask who sent the file");
	}
	char reason[120];
	if (!parsed)
		return fl_fail_at(err, FL_E_SYNTAX, place,
		                  "cannot be read (%s); ask for a file with AES and SHA-256, or convert it with OpenSSL",
		                  fl_crypto_reason(reason, sizeof reason));
	if (!*key || !*certificate)
		return fl_fail_at(err, FL_E_VALUE, place, "holds no key with its certificate");
	return FL_OK;
}

static fl_status import(PKCS12 *file, const fl_secret *passphrase, fl_signer **out, fl_place place, fl_error *err) {
	EVP_PKEY *key = NULL;
	X509 *certificate = NULL;
	STACK_OF(X509) *others = NULL;
	fl_signer *signer = calloc(1, sizeof *signer);
	fl_status status = signer ? open_pkcs12(file, passphrase, &key, &certificate, &others, place, err)
	                          : fl_fail_at(err, FL_E_MEMORY, place, "out of memory for a key");
	if (status == FL_OK) {
		signer->key = key;
		key = NULL;
		status = fl_signer_adopt(signer, certificate, others, err);
	}
	EVP_PKEY_free(key);
	X509_free(certificate);
	sk_X509_pop_free(others, X509_free);
	if (status == FL_OK)
		*out = signer;
	else
		fl_signer_free(signer);
	return status;
}

fl_status fl_signer_import(const unsigned char *bytes, size_t length, const char *file, fl_secret *passphrase,
                           fl_signer **out, fl_error *err) {
	fl_place place = {.file = file};
	const unsigned char *at = bytes;
	PKCS12 *parsed = length <= KEY_FILE_MOST ? d2i_PKCS12(NULL, &at, (long)length) : NULL;
	fl_status status;
	if (parsed) {
		status = import(parsed, passphrase, out, place, err);
	} else {
		ERR_clear_error();
		status = fl_fail_at(err, FL_E_SYNTAX, place, "is not a PKCS#12 file (.p12, .pfx)");
	}
	fl_secret_wipe(passphrase);
	PKCS12_free(parsed);
	return status;
}
