#!/bin/sh
# From a session to a certificate signed by two people, through the program as built; then programs that know nothing of
# it are asked: pdfsig, openssl cms, qpdf, PDF/A-1b validation. Arguments: source folder, program.
set -eu
. "$(dirname "$0")/seal_common.sh"

# ---- an authority, two people certified by it, a third who certified himself
make_authority "Lanternmoor Root"
certified ida "Ida Fenwick" "Lanternmoor Root" --role-title "instrument bench"
# Mara's key comes from the authority as PKCS#12, with a passphrase of its own.
openssl req -newkey rsa:3072 -nodes -keyout mara.plain -out mara.csr -subj "/O=Tallmere Yard (invented)/CN=Mara Oduya (invented)" \
	-addext "keyUsage=critical,digitalSignature,nonRepudiation" 2>/dev/null
issue mara.csr "Lanternmoor Root" mara.pem 900
openssl pkcs12 -export -inkey mara.plain -in mara.pem -certfile "Lanternmoor Root.pem" -out mara.p12 -passout pass:theirs
printf 'theirs\ncorrect horse\n' >two
"$program" keys import mara mara.p12 --passphrase-fd 3 3<two >/dev/null
signed keys make jonas --person "Jonas Pell" --self-signed --days 400 >/dev/null
cp "Lanternmoor Root.pem" "$work/home/trust/"
[ "$(stat -c %a "$work/home/keys/ida.key" "$work/home/keys/mara.key" "$work/home/keys/jonas.key" | sort -u)" = 600 ] || complain "keys that others may read"
[ "$(stat -c %a "$work/home/keys")" = 700 ] || complain "a folder of keys that others may read"
grep -q 'BEGIN ENCRYPTED PRIVATE KEY' "$work/home/keys/ida.key" || complain "a key in the clear"
openssl pkey -in "$work/home/keys/mara.key" -passin "file:$work/pass" -noout || complain "OpenSSL alone does not open the key"
openssl asn1parse -in "$work/home/keys/ida.key" | grep -q scrypt || complain "no slow key derivation"
foundleft keys list >list
grep -q 'Ida Fenwick, Tallmere Yard (invented), instrument bench' list || complain "keys list does not say whose key it is"
grep -q "$(openssl x509 -in "$work/home/keys/jonas.crt" -noout -fingerprint -sha256 | sed 's/.*=//; s/://g' | tr A-F a-f)" list ||
	complain "keys list shows another fingerprint than openssl"
foundleft keys show jonas | openssl x509 -noout -subject | grep -q 'Jonas Pell' || complain "keys show gives no certificate"

# ---- issued, signed, countersigned
replay_session s.flj
lines=$(wc -l <s.flj)
foundleft certify s.flj --stock "$stock" --number TY-1 --date 2026-04-14 --authorised-by "Mara Oduya (invented)" >said
grep -q 'counts as issued only with signatures' said || complain "it is not said that signatures are missing"
[ "$(wc -l <s.flj)" = $((lines + 1)) ] || complain "the issue is not one line of the journal"
cp s.pdf base.pdf
cp s.flj issued.flj
foundleft certify s.flj --stock "$stock" --number TY-1 --out again.pdf >/dev/null
cmp -s again.pdf base.pdf || complain "the same number gives other bytes"
cmp -s s.flj issued.flj || complain "the same number was issued twice"
says 1 "a signature as performed, and there is none" foundleft check s.pdf
signed certify s.flj --stock "$stock" --number TY-1 --signer ida >/dev/null
says 1 "a signature as authorised, and there is none" foundleft check s.pdf
cp s.pdf once.pdf
signed countersign s.pdf --signer mara >/dev/null
cmp -s s.flj issued.flj || complain "signing changed the journal"
head -c "$(wc -c <base.pdf)" s.pdf | cmp -s - base.pdf || complain "signing changed the certificate instead of adding to it"
head -c "$(wc -c <once.pdf)" s.pdf | cmp -s - once.pdf || complain "the second signature changed the first"
says 0 "verdict: GOOD" foundleft check s.pdf
for text in "signature 1: Ida Fenwick, Tallmere Yard (invented), as performed" "signature 2: Mara Oduya (invented), Tallmere Yard (invented), as authorised" \
	"certified by Lanternmoor Root" "the content is what s.flj gives, byte for byte" "all signatures are there" \
	"another person than the one who signed before" "leads to one in your folder of trust and was valid then" "covers lines 1 to $((lines + 1))"; do
	tr -s ' \n' '  ' <"$work/said" | grep -qF "$text" || complain "check does not say: $text"
done
says 0 "verdict: GOOD" foundleft check s.flj
says 0 "verdict: GOOD" foundleft check "s.$((lines + 1)).authorised.fls"
# Signing again adds nothing; a seal that was lost is made again.
cp s.pdf twice.pdf
rm "s.$((lines + 1)).performed.fls"
signed certify s.flj --stock "$stock" --number TY-1 --signer ida >said
grep -q 'signed already as performed' said || complain "a second signature of the same person"
cmp -s s.pdf twice.pdf || complain "signing again changed the certificate"
says 0 "verdict: GOOD" foundleft check s.flj
# The journal is found among the sessions too, and by --journal.
mkdir elsewhere "$work/home/sessions"
cp s.pdf elsewhere/
says 1 "neither beside it nor in" foundleft check elsewhere/s.pdf
says 0 "verdict: GOOD" foundleft check elsewhere/s.pdf --journal s.flj
cp s.flj s.*.fls "$work/home/sessions/"
says 0 "verdict: GOOD" foundleft check elsewhere/s.pdf

# ---- programs that know nothing of ours
mkdir nss
certutil -N -d sql:nss --empty-password
certutil -A -d sql:nss -n root -t CT,C,C -i "Lanternmoor Root.pem"
ask_pdfsig() { # FILE COUNT
	pdfsig -nssdir sql:nss "$1" >out 2>err || complain "$1: pdfsig failed"
	[ ! -s err ] || { cat err; complain "$1: pdfsig is not silent"; }
	for line in "Signature Validation: Signature is Valid." "Certificate Validation: Certificate is Trusted." "Signature Type: ETSI.CAdES.detached"; do
		[ "$(grep -cF "$line" out)" = "$2" ] || { cat out; complain "$1: not $2 times: $line"; }
	done
	[ "$(grep -c 'Total document signed' out)" = 1 ] || { cat out; complain "$1: not wholly signed"; }
}
ask_pdfsig once.pdf 1
ask_pdfsig s.pdf 2
python3 - s.pdf <<'PY' # the signatures and what they are over, by the byte ranges
import re, sys
data = open(sys.argv[1], "rb").read()
ranges = re.findall(rb"/ByteRange \[0 (\d+) (\d+) (\d+) *\]", data)
assert len(ranges) == 2, ranges
for i, (a, b, c) in enumerate([tuple(map(int, r)) for r in ranges]):
    der = bytes.fromhex(data[a + 1:b - 1].decode())
    open(f"{i}.der", "wb").write(der[:4 + int.from_bytes(der[2:4], "big")])
    open(f"{i}.bytes", "wb").write(data[:a] + data[b:b + c])
PY
head -n $((lines + 1)) s.flj >journal.bytes
for part in performed authorised; do cp "s.$((lines + 1)).$part.fls" $part.der; done
ask_cms() { # DER BYTES
	openssl cms -verify -cades -binary -inform DER -in "$1" -content "$2" -CAfile "Lanternmoor Root.pem" -purpose any -out verified 2>err ||
		{ cat err; complain "$1: openssl cms refuses it"; }
	cmp -s verified "$2" || complain "$1: openssl cms gives other bytes"
}
ask_cms 0.der 0.bytes
ask_cms 1.der 1.bytes
ask_cms performed.der journal.bytes
ask_cms authorised.der journal.bytes
for file in base.pdf once.pdf s.pdf; do
	qpdf --check $file >out 2>&1 || { cat out; complain "$file: qpdf finds faults"; }
	grep -q WARNING out && { cat out; complain "$file: qpdf warns"; }
	sh "$root/tests/support/preflight.sh" $file >out 2>&1 || { cat out; complain "$file: not valid PDF/A-1b"; }
done
pdftotext -layout s.pdf text
for words in "signed as performed on" "signed as authorised on" "certified by Lanternmoor Root" "counts as issued only with the"; do
	grep -q "$words" text || complain "the page does not say: $words"
done

# ---- amendments: what is replaced and why stands on both
says 5 "another one must amend it" foundleft certify s.flj --stock "$stock" --number TY-2
says 5 "was issued on 2026-04-14 with another --date" foundleft certify s.flj --stock "$stock" --number TY-1 --date 2026-04-15
says 5 "with another --authorised-by" foundleft certify s.flj --stock "$stock" --number TY-1 --authorised-by "Somebody Else"
says 2 "come together" foundleft certify s.flj --stock "$stock" --number TY-2 --amends TY-1
says 0 "certificate: s-2.pdf" signed certify s.flj --stock "$stock" --number TY-2 --date 2026-04-20 --authorised-by "Mara Oduya (invented)" \
	--amends TY-1 --reason "the customer's name was misspelt" --signer ida
signed countersign s-2.pdf --signer mara >/dev/null
says 0 "verdict: GOOD" foundleft check s-2.pdf
says 1 "certificate TY-2 amends this one and replaces it" foundleft check s.pdf
pdftotext s-2.pdf - | tr '\n' ' ' >text
for words in "amends certificate TY-1, issued on 2026-04-14, and replaces it" "The customer's name was misspelt."; do
	grep -qF "$words" text || complain "the amendment does not say: $words"
done
# A remark after the seal is seen, and breaks nothing.
says 0 "was added later and is not under it" foundleft check s.flj
says 0 "verdict: GOOD" foundleft check s.flj

# ---- a procedure that wants no signature; a part for which there is no place
foundleft replay "$samples/in-tolerance/answers" --stock "$stock" --journal q.flj >/dev/null
says 0 "not signed (--signer ID signs it)" foundleft certify q.flj --stock "$stock" --number Q-1
says 1 "nobody vouches for it" foundleft check q.pdf
says 0 "signed as performed" signed certify q.flj --stock "$stock" --number Q-1 --signer jonas
says 1 "if you know Jonas Pell otherwise, put that certificate there" foundleft check q.pdf
cp "$work/home/keys/jonas.crt" "$work/home/trust/"
says 0 "verdict: GOOD" foundleft check q.pdf
says 5 "no place for a signature as reviewed" signed countersign q.pdf --signer ida --as reviewed
[ $bad = 0 ] && echo "seal: signed by two, amended, and read by pdfsig, openssl, qpdf and PDF/A-1b validation"
exit $bad
