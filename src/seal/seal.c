/* seal.c - the seal beside a file: a signature over all of its bytes, and nothing else in the file that holds it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"

fl_status fl_seal_bytes(const fl_signer *signer, const void *bytes, size_t length, const char *role, fl_utc at,
                        const fl_timestamper *timestamper, fl_text *seal, fl_error *err) {
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces whole = {bytes, length, "", 0};
	fl_cms_signing signing = {.with_time = true, .at = at, .role = role, .timestamper = timestamper};
	if (!fl_pieces_digest(&whole, digest))
		return fl_crypto_fail(err, "compute a SHA-256");
	return fl_cms_sign(signer, digest, &signing, seal, err);
}

fl_status fl_seal_check(const void *bytes, size_t length, const void *seal, size_t seal_length, const fl_trust *trust,
                        fl_utc now, fl_arena *arena, fl_seal_report *report, fl_error *err) {
	unsigned char digest[FL_SHA256_SIZE];
	fl_pieces whole = {bytes, length, "", 0};
	fl_cms cms;
	*report = (fl_seal_report){0};
	fl_status status = fl_cms_read(seal, seal_length, &cms, err);
	if (status == FL_OK && !cms.has_time)
		status = fl_fail(err, FL_E_SYNTAX, "the seal lacks its time: it was not made for a file of its own");
	if (status != FL_OK)
		return status;
	if (!fl_pieces_digest(&whole, digest))
		return fl_crypto_fail(err, "compute a SHA-256");
	fl_seal_signature *signature = fl_report_signature(report, arena);
	if (!signature)
		return fl_fail(err, FL_E_MEMORY, "out of memory while checking a seal");
	signature->covers = length;
	fl_cms_check(&cms, digest, cms.time, trust, now, arena, report);
	fl_report_finish(report);
	return report->failed ? fl_fail(err, FL_E_MEMORY, "out of memory while checking a seal") : FL_OK;
}
