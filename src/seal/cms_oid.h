/* cms_oid.h - the elements of a signature that are always the same bytes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_SEAL_CMS_OID_H
#define FOUNDLEFT_SEAL_CMS_OID_H

/* Object identifiers with tag and length. */
#define FL_OID_DATA "\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x07\x01"                        /* 1.2.840.113549.1.7.1 */
#define FL_OID_SIGNED_DATA "\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x07\x02"                 /* 1.2.840.113549.1.7.2 */
#define FL_OID_CONTENT_TYPE "\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x09\x03"                /* 1.2.840.113549.1.9.3 */
#define FL_OID_MESSAGE_DIGEST "\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x09\x04"              /* 1.2.840.113549.1.9.4 */
#define FL_OID_SIGNING_TIME "\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x09\x05"                /* 1.2.840.113549.1.9.5 */
#define FL_OID_DESCRIPTION "\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x09\x0d"                 /* 1.2.840.113549.1.9.13 */
#define FL_OID_SIGNING_CERTIFICATE "\x06\x0b\x2a\x86\x48\x86\xf7\x0d\x01\x09\x10\x02\x2f" /* ....9.16.2.47 */
#define FL_OID_TIMESTAMP "\x06\x0b\x2a\x86\x48\x86\xf7\x0d\x01\x09\x10\x02\x0e" /* 1.2.840.113549.1.9.16.2.14 */

/* Algorithm identifiers: SHA-256 without parameters (RFC 5754, 2), ecdsa-with-SHA256, sha256WithRSAEncryption. */
#define FL_ALGORITHM_SHA256 "\x30\x0b\x06\x09\x60\x86\x48\x01\x65\x03\x04\x02\x01"
#define FL_ALGORITHM_ECDSA "\x30\x0a\x06\x08\x2a\x86\x48\xce\x3d\x04\x03\x02"
#define FL_ALGORITHM_RSA "\x30\x0d\x06\x09\x2a\x86\x48\x86\xf7\x0d\x01\x01\x0b\x05\x00"

#define FL_VERSION_1 "\x02\x01\x01"
#define FL_DETACHED_DATA "\x30\x0b" FL_OID_DATA

/* Bytes and their number without the zero byte behind. */
#define FL_BYTES(text) (text), sizeof(text) - 1

#endif
