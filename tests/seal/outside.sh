#!/bin/sh
# Asks independent programs about the files that test_outside.c made in a folder.
set -eu
cd "${1:?the folder}"
bad=0
complain() { echo "outside: $*"; bad=1; }

# A trust store with the root alone.
mkdir nss
certutil -N -d sql:nss --empty-password
certutil -A -d sql:nss -n root -t CT,C,C -i root.pem

# pdfsig exits with 0 on a bad signature too, so its lines count: all three good ones for each signature, nothing on
# standard error. "Total document signed" is said of the newest one only.
ask_pdfsig() { # file, number of signatures
	pdfsig -nssdir sql:nss "$1" >out 2>err || complain "$1: pdfsig failed"
	[ ! -s err ] || { complain "$1: pdfsig is not silent"; cat err; }
	[ "$(grep -c 'Signature Validation: Signature is Valid\.' out)" = "$2" ] || { complain "$1: not $2 valid"; cat out; }
	[ "$(grep -c 'Certificate Validation: Certificate is Trusted\.' out)" = "$2" ] || { complain "$1: not $2 trusted"; cat out; }
	[ "$(grep -c 'Total document signed' out)" = 1 ] || { complain "$1: not wholly signed"; cat out; }
	[ "$(grep -c 'Signature Type: ETSI.CAdES.detached' out)" = "$2" ] || { complain "$1: not PAdES"; cat out; }
}
ask_pdfsig once.pdf 1
ask_pdfsig twice.pdf 2
pdfsig -nssdir sql:nss broken.pdf 2>/dev/null | grep -q 'Signature is Valid' && complain "broken.pdf is called valid"

# OpenSSL over the bytes that the range names, with the attributes of CAdES checked.
for name in once twice journal; do
	openssl cms -verify -cades -binary -inform DER -in $name.der -content $name.bytes -CAfile root.pem -purpose any \
		-out verified 2>err || { complain "$name: openssl cms refuses it"; cat err; }
	cmp -s verified $name.bytes || complain "$name: openssl cms gives other bytes"
done
openssl cms -cmsout -print -inform DER -in once.der >out
grep -q 'signingTime' out && complain "a PDF's signature holds a time of its own"
grep -q 'id-smime-aa-signingCertificateV2' out || complain "the certificate is not bound"
openssl cms -cmsout -print -inform DER -in journal.der | grep -q signingTime || complain "a journal's seal lacks its time"

for file in plain.pdf once.pdf twice.pdf; do
	qpdf --check $file >out 2>&1 || { complain "$file: qpdf --check"; cat out; }
	grep -q WARNING out && { complain "$file: qpdf warns"; cat out; }
done

jars=/usr/share/java
path=$jars/preflight2.jar:$jars/preflight.jar:$jars/pdfbox2.jar:$jars/fontbox2.jar:$jars/xmpbox2.jar:$jars/xmpbox.jar
path=$path:$jars/commons-logging.jar:$jars/commons-io.jar:$jars/jaxb-api.jar:$jars/javax.activation.jar:$jars/bcprov.jar
for file in plain.pdf once.pdf twice.pdf; do
	java -cp "$path" org.apache.pdfbox.preflight.Validator_A1b $file >out 2>&1 ||
		{ complain "$file does not fit PDF/A-1b"; cat out; }
done

pdftotext -layout twice.pdf text
for words in 'Ann Marlow, Tallmere Yard' 'performed, 2026-04-14' '43,7 mm²/s at 50 °C: “as-left”' 'Çato Rùud'; do
	grep -q "$words" text || { complain "the visible blocks do not say: $words"; cat text; }
done
[ $bad = 0 ] && echo "outside: pdfsig, openssl, qpdf and PDF/A-1b validation agree"
exit $bad
