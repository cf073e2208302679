#!/bin/sh
# Measures signing and checking beside OpenSSL alone: inside one process for an elliptic and an RSA key (seal.c), and
# whole commands, what signing adds to certify and what openssl itself takes from start to end. Not part of the tests.
# usage: seal.sh BUILD-FOLDER [ROUNDS]
# SPDX-License-Identifier: GPL-3.0-or-later
set -eu
here=$(cd "$(dirname "$0")" && pwd)
root=$(cd "$here/../.." && pwd)
build=$(cd "${1:?the folder of a finished build}" && pwd)
rounds=${2:-101}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
cd "$work"
export FOUNDLEFT_HOME=$work/home TZ=UTC
program=$build/foundleft
stock=$root/sample-sessions/stock
cc -std=c17 -O2 -D_GNU_SOURCE -Wall -Wextra -I"$root/include" "$here/seal.c" "$build/libfoundleft_certificate.a" \
	"$build/libfoundleft_seal.a" "$build/libfoundleft_base.a" -lhpdf -lcrypto -lm -o bench 2>cc.log || {
	libraries=$(ls "$build"/libfoundleft_*.a | grep -v cli)
	# shellcheck disable=SC2086
	cc -std=c17 -O2 -D_GNU_SOURCE -Wall -Wextra -I"$root/include" "$here/seal.c" -Wl,--start-group $libraries -Wl,--end-group \
		-lhpdf -lgsl -lgslcblas -lyaml -lcrypto -lsqlite3 -lz -lm -o bench
}
cc -std=c17 -O2 -D_GNU_SOURCE "$here/timer.c" -o timer
printf 'an invented passphrase\n' >pass
"$program" keys make ec --person "Ida Fenwick" --self-signed --passphrase-fd 3 3<pass >/dev/null
"$program" keys make rsa --rsa --person "Ida Fenwick" --self-signed --passphrase-fd 3 3<pass >/dev/null
cp home/keys/ec.crt home/trust/
"$program" replay "$root/sample-sessions/adjusted/answers" --stock "$stock" --journal s.flj >/dev/null
"$program" certify s.flj --stock "$stock" --number B-1 --date 2026-04-14 --out base.pdf >/dev/null
for kind in ec rsa; do
	printf '\n%s key, in one process, ms (median of %s; least)\n' "$kind" "$rounds"
	./bench "$rounds" home $kind base.pdf "$build/share/foundleft/faces" <pass | tee $kind.tsv | awk -F'\t' '{ printf "  %-16s %9.3f %9.3f\n", $1, $2, $3 }'
	awk -F'\t' '{ t[$1] = $3 } END {
		printf "  of the least: sign / raw signature %.2f (at most 3)   check / OpenSSL check %.2f (at most 2), / bare arithmetic %.2f\n", t["sign PDF"] / t["raw signature"], t["check PDF"] / t["OpenSSL\047s check"], t["check PDF"] / t["bare arithmetic"] }' $kind.tsv
done

# Whole commands. Every run of certify finds its number issued, so what differs is the signing.
cat >unsigned.sh <<S
exec "$program" certify s.flj --stock "$stock" --number B-1 --out c.pdf
S
cat >signed.sh <<S
exec "$program" certify s.flj --stock "$stock" --number B-1 --out c.pdf --signer ec --passphrase-fd 3 3<pass
S
"$program" certify s.flj --stock "$stock" --number B-1 --out k.pdf --signer ec --passphrase-fd 3 3<pass >/dev/null
seal=$(ls s.*.performed.fls)
head -n "$(wc -l <s.flj)" s.flj >sealed
cp "$seal" seal.der
python3 - <<'PY'
import re
data = open("k.pdf", "rb").read()
a, b, c = map(int, re.findall(rb"/ByteRange \[0 (\d+) (\d+) (\d+)", data)[0])
der = bytes.fromhex(data[a + 1:b - 1].decode())
open("k.der", "wb").write(der[:4 + int.from_bytes(der[2:4], "big")])
open("k.bytes", "wb").write(data[:a] + data[b:b + c])
PY
printf '\nwhole commands, ms (median of %s: wall; user and system; least of the latter)\n' "$rounds"
./timer "$rounds" -r c.pdf -r "$seal" -- "certify" /bin/sh unsigned.sh -- "certify --signer" /bin/sh signed.sh \
	-- "openssl opens the key" /usr/bin/openssl pkey -in home/keys/ec.key -passin file:pass -noout >commands.tsv
cp seal.der "$seal"
cat >check.sh <<S
"$program" check k.pdf
[ \$? = 1 ] # not complete: nobody has countersigned
S
./timer "$rounds" -- "check CERTIFICATE" /bin/sh check.sh \
	-- "openssl cms -verify" /usr/bin/openssl cms -verify -cades -binary -inform DER -in k.der -content k.bytes -CAfile home/trust/ec.crt -purpose any -out out \
	>>commands.tsv 2>/dev/null
awk -F'\t' '{ printf "  %-24s %9.2f %9.2f %9.2f\n", $1, $2, $3, $5; m[$1] = $2; c[$1] = $3; l[$1] = $5 }
	END { both = "certify --signer"; printf "  signing adds to certify, derivation of the passphrase included: wall %.1f, user and system %.1f (least %.1f)\n", m[both] - m["certify"], c[both] - c["certify"], l[both] - l["certify"] }' commands.tsv
