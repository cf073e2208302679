#!/bin/sh
# What goes wrong around a signature, and that each refusal says what to do: expired, not yet valid, unknown authority,
# wrong passphrase, lost key, clock far off, the same person, tampered record, timestamps. Arguments: source folder,
# program.
set -eu
. "$(dirname "$0")/seal_common.sh"
make_clock
make_authority "Lanternmoor Root"
make_authority "Quay Root"
certified ida "Ida Fenwick" "Lanternmoor Root"
certified mara "Mara Oduya (invented)" "Lanternmoor Root" --rsa
cp "Lanternmoor Root.pem" "$work/home/trust/root.pem"
replay_session s.flj
certify="certify s.flj --stock $stock --number TY-1 --date 2026-04-14 --passphrase-fd 3"
countersign="countersign s.pdf --passphrase-fd 3"

# ---- keys
says 5 "the passphrase does not open" sh -c 'printf "wrong horse\n" | "$@"' sh "$program" certify s.flj --stock "$stock" --number TY-1 --signer ida --passphrase-fd 0
grep -q "A lost passphrase cannot be recovered" "$work/said" || complain "a lost passphrase: it is not said what to do"
[ "$(tail -n 1 s.flj | cut -f 3)" = close ] || complain "a refused signer issued a certificate"
says 4 "A lost key cannot be made again" foundleft $certify --signer nobody
says 2 "there is no further line with a passphrase" sh -c '"$@" 3</dev/null' sh "$program" $certify --signer ida
chmod 640 "$work/home/keys/ida.key"
says 6 "chmod 600" foundleft $certify --signer ida
chmod 600 "$work/home/keys/ida.key"
says 3 "shorter than 8 characters" sh -c 'printf "short\n" | "$@"' sh "$program" keys make x --person X --self-signed --passphrase-fd 0
says 2 "either --request or --self-signed" foundleft keys make x --person X --passphrase-fd 3
says 5 "there is a key ida already" foundleft keys make ida --person X --self-signed --passphrase-fd 3
says 3 "belongs to this key" foundleft keys take ida mara.issued.pem --passphrase-fd 3
says 2 "none of make, take" foundleft keys burn ida
foundleft keys make young --person "Young Hand" --request --passphrase-fd 3 3<"$work/pass" >young.csr 2>/dev/null
says 5 "has no certificate yet" foundleft $certify --signer young
says 2 "--as takes performed" foundleft $certify --signer ida --as approved
[ "$(tail -n 1 s.flj | cut -f 3)" = close ] || complain "a refused signer issued a certificate"

# ---- the clock: certificates not valid then
says 5 "is valid from" shifted -100000000 "$program" $certify --signer ida
grep -q "check the clock" "$work/said" || complain "not yet valid: it is not said what to do"
says 5 "expired on" shifted 100000000 "$program" $certify --signer ida
grep -q "get a new one, or check the clock" "$work/said" || complain "expired: it is not said what to do"
# Sessions by the machine's clock: one written by a clock that was an hour ahead of the one it is signed by.
sed '/^!clock/d; /^!pace/d; /^!wait/d' "$samples/adjusted/answers" >answers
shifted 3600 "$program" replay answers --stock "$stock" --journal ahead.flj >/dev/null
says 5 "set the clock right, then sign" foundleft certify ahead.flj --stock "$stock" --number M-0 --signer ida --passphrase-fd 3
foundleft replay answers --stock "$stock" --journal m.flj >/dev/null

# ---- people
rm -f s.pdf
foundleft certify s.flj --stock "$stock" --number TY-1 --date 2026-04-14 --authorised-by "Mara Oduya (invented)" >/dev/null
says 5 "nobody has signed s.pdf yet" foundleft $countersign --signer mara
says 5 "only the performer signs as performed" foundleft $certify --signer mara
signed certify s.flj --stock "$stock" --number TY-1 --signer ida >/dev/null
says 5 "cannot sign as authorised too: that must be another person" foundleft $countersign --signer ida
# The performer again, by another key and a name written otherwise; and his old key under another name.
certified ida2 "FENWICK,  Ida" "Lanternmoor Root"
says 5 "that must be another person" foundleft $countersign --signer ida2
openssl req -new -key "$work/home/keys/ida.key" -passin "file:$work/pass" -subj "/O=Elsewhere/CN=Mara Oduya (invented)" -out alias.csr
issue alias.csr "Lanternmoor Root" alias.pem 900
cp "$work/home/keys/ida.key" "$work/home/keys/alias.key"
cp alias.pem "$work/home/keys/alias.crt"
says 5 "must be another person's" foundleft $countersign --signer alias
certified third "Third Person" "Lanternmoor Root"
says 5 "says that Mara Oduya (invented) authorises it" foundleft $countersign --signer third
signed countersign s.pdf --signer mara >/dev/null
says 0 "verdict: GOOD" foundleft check s.pdf

# ---- trust
mv "$work/home/trust/root.pem" kept.pem
says 1 "nobody in your folder of trust vouches for the signer" foundleft check s.pdf
says 1 "put that certificate there" foundleft check s.flj
cp "Quay Root.pem" "$work/home/trust/root.pem"
says 1 "NOT COMPLETE" foundleft check s.pdf
echo nonsense >"$work/home/trust/root.pem"
says 3 "holds no certificate" foundleft check s.pdf
cp kept.pem "$work/home/trust/root.pem"
# Years later: the signers' certificates have expired since, the seal stands; a clock before the signature is told.
says 0 "the seal stands if it was made before" shifted 100000000 "$program" check s.pdf
says 0 "which lies in the future: this clock or the signer's is off" shifted -7200 "$program" check s.pdf
# Signed by a certificate that had expired then: as the machine of a cheat would do it, with its clock set back.
issue ida.csr "Lanternmoor Root" brief.pem 1
cp "$work/home/keys/ida.key" "$work/home/keys/brief.key"
cp brief.pem "$work/home/keys/brief.crt"
says 5 "expired on" shifted 200000 "$program" certify m.flj --stock "$stock" --number M-1 --signer brief --passphrase-fd 3

# ---- what was changed or added
broken() { # WHAT
	says 7 "verdict: BROKEN" foundleft check x.pdf --journal s.flj
	grep -q 'BAD' "$work/said" || complain "$1: no line says what is wrong"
}
{ cat s.pdf; echo; } >x.pdf
broken "a line end behind"
{ cat s.pdf; printf '%%%%EOF\n'; } >x.pdf
broken "a comment behind"
python3 - s.pdf x.pdf <<'PY' # an update as an editor writes it: the last page gets another content, appended
import re, sys
data = open(sys.argv[1], "rb").read()
start = int(re.findall(rb"startxref\s+(\d+)", data)[-1])
size = int(re.findall(rb"/Size (\d+)", data)[-1])
root = re.findall(rb"/Root (\d+) 0 R", data)[-1].decode()
number = size
body = f"{number} 0 obj\n<< /Type /Annot /Subtype /Square /Rect [100 100 400 700] /F 4 >>\nendobj\n".encode()
table = len(data) + len(body)
update = body + f"xref\n{number} 1\n{len(data):010d} 00000 n \ntrailer\n<< /Size {size + 1} /Root {root} 0 R /Prev {start} >>\nstartxref\n{table}\n%%EOF\n".encode()
open(sys.argv[2], "wb").write(data + update)
PY
broken "an update behind"
head -c "$(wc -c <s.pdf | awk '{ print $1 - 1 }')" s.pdf >x.pdf
broken "the last byte is missing"
qpdf s.pdf x.pdf 2>/dev/null || true
broken "written anew by another program"
# The whole chain of the journal written again with another reading: every digest fits, the seal does not.
mkdir forged
cp s.pdf s.*.fls forged/
python3 - s.flj forged/s.flj <<'PY'
import hashlib, sys
prev, out, changed = "0" * 64, [], 0
for line in open(sys.argv[1], "rb").read().decode().splitlines():
    body = line[:line.index("\tprev=")]
    if "\tread\t" in body and "18.9" in body and not changed:
        body, changed = body.replace("18.9", "18.8"), 1
    body += "\tprev=" + prev
    prev = hashlib.sha256(body.encode()).hexdigest()
    out.append(body + "\tself=" + prev)
assert changed
open(sys.argv[2], "w").write("\n".join(out) + "\n")
PY
says 7 "every digest fits" foundleft check forged/s.flj
says 7 "verdict: BROKEN" foundleft check forged/s.flj
says 7 "the content is not what forged/s.flj gives" foundleft check forged/s.pdf --journal forged/s.flj
sed 's/18\.9/18.8/' s.flj >forged/s.flj
says 7 "its digest does not fit" foundleft check forged/s.flj
says 7 "its digest does not fit" foundleft check forged/s.pdf --journal forged/s.flj
# Of several files the worst decides.
says 7 "verdict: GOOD" foundleft check s.pdf x.pdf --journal s.flj
# An existing file is never overwritten.
cp x.pdf y.pdf
says 5 "never overwritten" foundleft certify s.flj --stock "$stock" --number TY-1 --out y.pdf
cmp -s x.pdf y.pdf || complain "a file was overwritten"

# ---- timestamps: an authority of our own, asked by HTTP
make_authority "Stamp Root"
openssl req -newkey ec -pkeyopt ec_paramgen_curve:P-256 -nodes -keyout tsa.key -out tsa.csr -subj "/O=Lanternmoor Certification (invented)/CN=Stamp Office" \
	-addext "keyUsage=critical,digitalSignature" -addext "extendedKeyUsage=critical,timeStamping" 2>/dev/null
issue tsa.csr "Stamp Root" tsa.pem 900
echo 01 >serial
cat >tsa.conf <<'CONF'
[tsa]
default_tsa = office
[office]
serial = serial
signer_cert = tsa.pem
signer_key = tsa.key
signer_digest = sha256
default_policy = 1.3.6.1.4.1.99999.1
digests = sha256
ess_cert_id_alg = sha256
CONF
cat >server.py <<'PY'
import http.server, subprocess, sys
class Office(http.server.BaseHTTPRequestHandler):
    def do_POST(self):
        assert self.headers["Content-Type"] == "application/timestamp-query"
        open("query", "wb").write(self.rfile.read(int(self.headers["Content-Length"])))
        subprocess.run(["openssl", "ts", "-reply", "-config", "tsa.conf", "-queryfile", "query", "-out", "reply"], check=True, stderr=subprocess.DEVNULL)
        reply = open("reply", "rb").read()
        self.send_response(200)
        self.send_header("Content-Type", "application/timestamp-reply")
        self.send_header("Content-Length", str(len(reply)))
        self.end_headers()
        self.wfile.write(reply)
    def log_message(self, *words): pass
server = http.server.HTTPServer(("127.0.0.1", 0), Office)
open("port.part", "w").write(str(server.server_port))
import os; os.rename("port.part", "port")
server.serve_forever()
PY
python3 server.py &
office=$!
trap 'kill $office 2>/dev/null || true; rm -rf "$work"' EXIT
while [ ! -s port ]; do sleep 0.05; done
echo "timestamp: http://127.0.0.1:$(cat port)/stamp" >"$work/home/seal.yaml"
mkdir t && cp m.flj t/
says 3 "does not hold" signed certify t/m.flj --stock "$stock" --number M-1 --signer ida
cp "Stamp Root.pem" "$work/home/trust/stamps.pem"
says 0 "with a timestamp" signed certify t/m.flj --stock "$stock" --number M-1 --signer ida
signed countersign t/m.pdf --signer mara >/dev/null
says 0 "Stamp Office vouches that it existed at" foundleft check t/m.pdf
says 0 "verdict: GOOD" foundleft check t/m.pdf t/m.flj
says 0 "which its timestamp shows" shifted 80000000 "$program" check t/m.pdf
mkdir nss
certutil -N -d sql:nss --empty-password
certutil -A -d sql:nss -n root -t CT,C,C -i "Lanternmoor Root.pem"
pdfsig -nssdir sql:nss t/m.pdf >out 2>err
[ "$(grep -c 'Signature is Valid' out)" = 2 ] && [ ! -s err ] || { cat out err; complain "pdfsig refuses the stamped certificate"; }
sh "$root/tests/support/preflight.sh" t/m.pdf >out 2>&1 || { cat out; complain "the stamped certificate is not valid PDF/A-1b"; }
kill $office
cp m.flj n.flj
says 6 "take timestamp out of seal.yaml" signed certify n.flj --stock "$stock" --number M-2 --signer ida
echo "timestamp: https://stamps.example/x" >"$work/home/seal.yaml"
says 3 "http://host/path is needed" signed certify n.flj --stock "$stock" --number M-2 --signer ida
rm "$work/home/seal.yaml"
says 0 "signed as performed" signed certify n.flj --stock "$stock" --number M-2 --signer ida
[ $bad = 0 ] && echo "seal_refusals: keys, clocks, people, trust, changes and timestamps, each with what to do"
exit $bad
