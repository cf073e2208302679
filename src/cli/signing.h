/* signing.h - who signs, in which part, whom the user trusts: what certify, countersign, keys and check share.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_SIGNING_H
#define FOUNDLEFT_CLI_SIGNING_H

#include "cli.h"
#include "derive.h"
#include "foundleft/seal.h"

/* Opens the key HOME/keys/ID with its passphrase. */
fl_status fl_signing_open(const fl_cli *cli, const char *id, fl_signer **out, fl_error *err) FL_MUST_USE;
/* The certificates of HOME/trust; none where there is no such folder. *folder_missing may be NULL. */
fl_status fl_signing_trust(const fl_cli *cli, fl_trust **out, bool *folder_missing, fl_error *err) FL_MUST_USE;

/* One signing under way: signer, part, trust and the authority of timestamps. */
typedef struct fl_signing {
	fl_arena arena;
	fl_signer *signer;
	fl_part part;
	fl_utc at;
	fl_trust *trust;
	fl_stamp_server server;
	fl_timestamper stamper;
	bool stamped;
} fl_signing;

/* Reads --signer and --as (`otherwise` if absent) and asks for the passphrase. */
fl_status fl_signing_begin(const fl_cli *cli, fl_part otherwise, fl_signing *out, fl_error *err) FL_MUST_USE;
void fl_signing_end(fl_signing *signing);
/* May this person sign this certificate in this part: the performer as performer, another one otherwise. */
fl_status fl_signing_allowed(const fl_signing *signing, const fl_derived *derived, fl_error *err) FL_MUST_USE;
/* Signs bytes[length], which are the derived certificate with the signatures it has. *out is malloc'ed; NULL where this
 * person has signed it in this part already. */
fl_status fl_signing_pdf(const fl_cli *cli, const fl_signing *signing, const fl_derived *derived,
                         const unsigned char *bytes, size_t length, unsigned char **out, size_t *out_length,
                         fl_error *err) FL_MUST_USE;
/* Seals the journal up to the certificate's line; the path of the seal goes to *path (the arena's). A seal of this part
 * that holds is left as it is. */
fl_status fl_signing_journal(const fl_cli *cli, fl_signing *signing, const fl_derived *derived, const char **path,
                             fl_error *err) FL_MUST_USE;

#endif
