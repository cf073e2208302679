/* stamp_server.c - a timestamp authority asked by HTTP, with OpenSSL's own client (RFC 3161, 3.4).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "key.h"

#include <openssl/bio.h>
#include <openssl/err.h>
#include <openssl/http.h>
#include <string.h>

#define RESPONSE_MOST 65536

/* Takes what came into the arena. */
static fl_status take(BIO *came, fl_arena *arena, unsigned char **response, size_t *length, fl_error *err) {
	*response = fl_arena_alloc(arena, RESPONSE_MOST, 1);
	*length = 0;
	if (!*response)
		return fl_fail(err, FL_E_MEMORY, "out of memory for a timestamp");
	for (int got; *length < RESPONSE_MOST; *length += (size_t)got) {
		got = BIO_read(came, *response + *length, (int)(RESPONSE_MOST - *length));
		if (got <= 0)
			break;
	}
	return FL_OK;
}

static fl_status transfer(const fl_stamp_server *server, BIO *request, const char *host, const char *port,
                          const char *path, fl_arena *arena, unsigned char **response, size_t *length, fl_error *err) {
	char reason[120];
	BIO *came = OSSL_HTTP_transfer(NULL, host, port, path, 0, server->proxy ? server->proxy : "",
	                               server->no_proxy ? server->no_proxy : "", NULL, NULL, NULL, NULL, 0, NULL,
	                               "application/timestamp-query", request, "application/timestamp-reply", 1,
	                               RESPONSE_MOST, server->timeout_s, 0);
	if (!came)
		return fl_fail(err, FL_E_IO,
		               "the timestamp authority %s gave no answer (%s): try again later, or take timestamp out of "
		               "seal.yaml and sign without one",
		               server->url, fl_crypto_reason(reason, sizeof reason));
	fl_status status = take(came, arena, response, length, err);
	BIO_free_all(came);
	return status;
}

static fl_status ask(void *self, const unsigned char *request, size_t length, fl_arena *arena, unsigned char **response,
                     size_t *response_length, fl_error *err) {
	const fl_stamp_server *server = self;
	char *host = NULL, *port = NULL, *path = NULL;
	BIO *bio = BIO_new_mem_buf(request, (int)length);
	fl_status status = FL_OK;
	if (!bio || OSSL_HTTP_parse_url(server->url, NULL, NULL, &host, &port, NULL, &path, NULL, NULL) != 1)
		status = fl_crypto_fail(err, "ask for a timestamp");
	else
		status = transfer(server, bio, host, port, path, arena, response, response_length, err);
	OPENSSL_free(host);
	OPENSSL_free(port);
	OPENSSL_free(path);
	BIO_free(bio);
	ERR_clear_error();
	return status;
}

fl_status fl_stamp_server_timestamper(fl_stamp_server *server, const fl_trust *trust, fl_timestamper *out,
                                      fl_error *err) {
	int ssl = 0;
	bool good = strncmp(server->url, "http://", 7) == 0 &&
	            OSSL_HTTP_parse_url(server->url, &ssl, NULL, NULL, NULL, NULL, NULL, NULL, NULL) == 1 && !ssl;
	ERR_clear_error();
	if (!good)
		return fl_fail(err, FL_E_VALUE, "\"%.200s\" is no address of a timestamp authority: http://host/path is needed",
		               server->url);
	*out = (fl_timestamper){.self = server, .ask = ask, .trust = trust};
	return FL_OK;
}
