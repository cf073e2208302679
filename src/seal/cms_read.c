/* cms_read.c - takes a signature of the shape that cms.h states apart, and nothing else: any other structure, order,
 * length form or algorithm is refused before OpenSSL sees it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cms.h"
#include "cms_oid.h"

#include <stdio.h>
#include <string.h>

static fl_status refuse(fl_error *err, const char *what) {
	return fl_fail(err, FL_E_SYNTAX, "the signature is not built as one must be: %s", what);
}

/* ---- signed attributes --------------------------------------------------------------------------------------- */

/* Content of an attribute's only value of that tag. */
static bool only_value(fl_element values, unsigned tag, fl_element *out) {
	fl_der inside = fl_der_inside(values);
	return fl_der_take(&inside, tag, out) && inside.left == 0;
}

static bool two_digits(const unsigned char *at, char *to) {
	if (at[0] < '0' || at[0] > '9' || at[1] < '0' || at[1] > '9')
		return false;
	to[0] = (char)at[0];
	to[1] = (char)at[1];
	return true;
}

/* YYMMDDHHMMSSZ or YYYYMMDDHHMMSSZ. */
static bool read_time(fl_element values, fl_utc *out) {
	fl_element time;
	char iso[] = "2000-00-00T00:00:00Z";
	static const int places[] = {5, 8, 11, 14, 17};
	bool long_year = only_value(values, FL_DER_GENERAL_TIME, &time);
	if (!long_year && !only_value(values, FL_DER_UTC_TIME, &time))
		return false;
	size_t at = long_year ? 4 : 2;
	if (time.length != at + 11 || time.body[time.length - 1] != 'Z')
		return false;
	if (!two_digits(time.body + at - 2, iso + 2) || (long_year && !two_digits(time.body, iso)))
		return false;
	if (!long_year && iso[2] >= '5')
		memcpy(iso, "19", 2);
	for (size_t i = 0; i < 5; i++)
		if (!two_digits(time.body + at + 2 * i, iso + places[i]))
			return false;
	return fl_utc_parse(iso, out, NULL) == FL_OK;
}

/* SigningCertificateV2 whose first entry has a SHA-256 digest (the default, so that no algorithm is written). */
static bool read_certificate_digest(fl_element values, fl_cms *out) {
	fl_element outer, list, entry, digest;
	fl_der inside;
	if (!only_value(values, FL_DER_SEQUENCE, &outer))
		return false;
	inside = fl_der_inside(outer);
	if (!fl_der_take(&inside, FL_DER_SEQUENCE, &list) || inside.left != 0)
		return false;
	inside = fl_der_inside(list);
	if (!fl_der_take(&inside, FL_DER_SEQUENCE, &entry))
		return false;
	inside = fl_der_inside(entry);
	if (!fl_der_take(&inside, FL_DER_OCTET_STRING, &digest) || digest.length != FL_SHA256_SIZE)
		return false;
	out->certificate_digest = digest.body;
	return true;
}

static bool read_digest(fl_element values, fl_cms *out) {
	fl_element digest;
	if (!only_value(values, FL_DER_OCTET_STRING, &digest) || digest.length != FL_SHA256_SIZE)
		return false;
	out->message_digest = digest.body;
	return true;
}

static bool read_role(fl_element values, fl_cms *out) {
	out->has_role = only_value(values, FL_DER_UTF8, &out->role) && out->role.length < FL_NAME_SIZE &&
	                fl_utf8_valid((const char *)out->role.body, out->role.length);
	return out->has_role;
}

static bool read_content_type(fl_element values) {
	fl_element type;
	return only_value(values, FL_DER_OID, &type) && fl_element_is(type, FL_BYTES(FL_OID_DATA));
}

static fl_status read_attribute(fl_der inside, fl_cms *out, bool *has_type, fl_error *err) {
	fl_element type, values;
	if (!fl_der_take(&inside, FL_DER_OID, &type) || !fl_der_take(&inside, FL_DER_SET, &values) || inside.left != 0)
		return refuse(err, "a signed attribute is damaged");
	if (fl_element_is(type, FL_BYTES(FL_OID_CONTENT_TYPE)))
		return (*has_type = read_content_type(values)) ? FL_OK : refuse(err, "it signs something else than data");
	if (fl_element_is(type, FL_BYTES(FL_OID_MESSAGE_DIGEST)))
		return read_digest(values, out) ? FL_OK : refuse(err, "its digest is no SHA-256");
	if (fl_element_is(type, FL_BYTES(FL_OID_SIGNING_CERTIFICATE)))
		return read_certificate_digest(values, out) ? FL_OK
		                                            : refuse(err, "it does not bind its certificate by SHA-256");
	if (fl_element_is(type, FL_BYTES(FL_OID_SIGNING_TIME)))
		return (out->has_time = read_time(values, &out->time)) ? FL_OK : refuse(err, "its time cannot be read");
	if (fl_element_is(type, FL_BYTES(FL_OID_DESCRIPTION)))
		return read_role(values, out) ? FL_OK : refuse(err, "the role in it cannot be read");
	return refuse(err, "it has a signed attribute of a kind that does not belong there");
}

/* Rising order of X.690, 11.6, which also rules out the same attribute written twice alike. */
static bool rises(fl_element before, fl_element after) {
	size_t least = before.whole_length < after.whole_length ? before.whole_length : after.whole_length;
	int order = memcmp(before.whole, after.whole, least);
	return order < 0 || (order == 0 && before.whole_length < after.whole_length);
}

static fl_status read_attributes(fl_cms *out, fl_error *err) {
	fl_der inside = fl_der_inside(out->attributes);
	fl_element attribute, before = {0}, type, seen[8];
	bool has_type = false;
	size_t count = 0;
	for (; inside.left > 0; before = attribute) {
		if (!fl_der_take(&inside, FL_DER_SEQUENCE, &attribute) || (before.whole && !rises(before, attribute)))
			return refuse(err, "its signed attributes are damaged or out of order");
		fl_der within = fl_der_inside(attribute);
		if (count == 8 || !fl_der_next(&within, &type))
			return refuse(err, "a signed attribute is damaged");
		for (size_t i = 0; i < count; i++)
			if (fl_element_is(type, seen[i].whole, seen[i].whole_length))
				return refuse(err, "a signed attribute stands twice in it");
		seen[count++] = type;
		fl_status status = read_attribute(fl_der_inside(attribute), out, &has_type, err);
		if (status != FL_OK)
			return status;
	}
	if (!has_type || !out->message_digest)
		return refuse(err, "it lacks the digest of what is signed");
	if (!out->certificate_digest)
		return refuse(err, "its certificate is not bound to it (signing-certificate-v2 is missing)");
	return FL_OK;
}

/* ---- frame ---------------------------------------------------------------------------------------------------- */

/* [1] { SEQUENCE { timestamp, SET { token } } } and nothing else. */
static bool read_unsigned(fl_element attributes, fl_cms *out) {
	fl_der inside = fl_der_inside(attributes);
	fl_element attribute, values;
	if (!fl_der_take(&inside, FL_DER_SEQUENCE, &attribute) || inside.left != 0)
		return false;
	inside = fl_der_inside(attribute);
	if (!fl_der_skip(&inside, FL_BYTES(FL_OID_TIMESTAMP)) || !fl_der_take(&inside, FL_DER_SET, &values) ||
	    inside.left != 0)
		return false;
	out->has_timestamp = only_value(values, FL_DER_SEQUENCE, &out->timestamp);
	return out->has_timestamp;
}

static fl_status read_signer_info(fl_der inside, fl_cms *out, fl_error *err) {
	fl_element more;
	if (!fl_der_skip(&inside, FL_BYTES(FL_VERSION_1)))
		return refuse(err, "its signer's part has another version than 1");
	if (!fl_der_take(&inside, FL_DER_SEQUENCE, &out->issuer_and_serial))
		return refuse(err, "it does not name its signer by issuer and serial number");
	if (!fl_der_skip(&inside, FL_BYTES(FL_ALGORITHM_SHA256)))
		return refuse(err, "the signer's digest is another than SHA-256");
	if (!fl_der_take(&inside, FL_DER_CONTEXT_0, &out->attributes))
		return refuse(err, "it has no signed attributes");
	out->rsa = fl_der_skip(&inside, FL_BYTES(FL_ALGORITHM_RSA));
	if (!out->rsa && !fl_der_skip(&inside, FL_BYTES(FL_ALGORITHM_ECDSA)))
		return refuse(err, "its algorithm is neither ECDSA nor RSA with SHA-256");
	if (!fl_der_take(&inside, FL_DER_OCTET_STRING, &out->signature) || out->signature.length == 0)
		return refuse(err, "it holds no signature");
	if (inside.left > 0 &&
	    (!fl_der_take(&inside, FL_DER_CONTEXT_1, &more) || !read_unsigned(more, out) || inside.left > 0))
		return refuse(err, "it has an unsigned part that is no timestamp");
	return read_attributes(out, err);
}

static fl_status read_certificates(fl_der inside, fl_cms *out, fl_error *err) {
	while (inside.left > 0) {
		if (out->certificate_count == FL_CHAIN_MOST)
			return refuse(err, "it holds too many certificates");
		if (!fl_der_take(&inside, FL_DER_SEQUENCE, &out->certificates[out->certificate_count++]))
			return refuse(err, "a certificate in it is damaged");
	}
	return out->certificate_count > 0 ? FL_OK : refuse(err, "it holds no certificate");
}

static fl_status read_signed_data(fl_der inside, fl_cms *out, fl_error *err) {
	fl_element part, info;
	if (!fl_der_skip(&inside, FL_BYTES(FL_VERSION_1)))
		return refuse(err, "it has another version than 1");
	if (!fl_der_take(&inside, FL_DER_SET, &part) || part.length != sizeof FL_ALGORITHM_SHA256 - 1 ||
	    memcmp(part.body, FL_BYTES(FL_ALGORITHM_SHA256)) != 0)
		return refuse(err, "its digest is another than SHA-256");
	if (!fl_der_skip(&inside, FL_BYTES(FL_DETACHED_DATA)))
		return refuse(err, "it carries content of its own or signs something else than data");
	if (!fl_der_take(&inside, FL_DER_CONTEXT_0, &part))
		return refuse(err, "it holds no certificate");
	fl_status status = read_certificates(fl_der_inside(part), out, err);
	if (status != FL_OK)
		return status;
	if (!fl_der_take(&inside, FL_DER_SET, &part) || inside.left != 0)
		return refuse(err, "its signer's part is missing, or something stands around it");
	inside = fl_der_inside(part);
	if (!fl_der_take(&inside, FL_DER_SEQUENCE, &info) || inside.left != 0)
		return refuse(err, "it must have exactly one signer");
	return read_signer_info(fl_der_inside(info), out, err);
}

fl_status fl_cms_read(const unsigned char *bytes, size_t length, fl_cms *out, fl_error *err) {
	fl_der all = {bytes, length};
	fl_element content, data;
	*out = (fl_cms){0};
	if (!fl_der_take(&all, FL_DER_SEQUENCE, &content))
		return refuse(err, "it is cut off or no DER");
	if (all.left != 0)
		return refuse(err, "something stands behind its end");
	fl_der inside = fl_der_inside(content);
	if (!fl_der_skip(&inside, FL_BYTES(FL_OID_SIGNED_DATA)) || !fl_der_take(&inside, FL_DER_CONTEXT_0, &data) ||
	    inside.left != 0)
		return refuse(err, "it is no signed data");
	inside = fl_der_inside(data);
	if (!fl_der_take(&inside, FL_DER_SEQUENCE, &content) || inside.left != 0)
		return refuse(err, "it is no signed data");
	return read_signed_data(fl_der_inside(content), out, err);
}
