#!/bin/sh
# Bytes of a certificate signed by two, of the sealed journal and of its seals, each changed in turn and asked for through
# `check`: every change must be found. The small files whole, the large ones sampled (FOUNDLEFT_FLIPS of each kind, 200);
# in C every byte of small ones is changed in tests/seal. Arguments: source folder, program.
set -eu
. "$(dirname "$0")/seal_common.sh"
make_authority "Lanternmoor Root"
certified ida "Ida Fenwick" "Lanternmoor Root"
certified mara "Mara Oduya (invented)" "Lanternmoor Root"
cp "Lanternmoor Root.pem" "$work/home/trust/"
replay_session s.flj
signed certify s.flj --stock "$stock" --number TY-1 --date 2026-04-14 --signer ida >/dev/null
signed countersign s.pdf --signer mara >/dev/null
says 0 "verdict: GOOD" foundleft check s.pdf s.flj
[ $bad = 0 ] || exit 1
python3 - "$program" "${FOUNDLEFT_FLIPS:-200}" <<'PY'
import glob, os, random, re, subprocess, sys
program, most = sys.argv[1], int(sys.argv[2])
random.seed(20260414)

def check(*files):
    run = subprocess.run([program, "check", *files], stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    return run.returncode, run.stdout + run.stderr

def flips(path, wanted, asked, regions=()):
    """Changes one bit of one byte at a time, at `wanted` places of the file and of each region."""
    good = open(path, "rb").read()
    places = set(random.sample(range(len(good)), min(wanted, len(good))))
    for begin, end in regions:
        places |= set(random.sample(range(begin, end), min(wanted // 4, end - begin)))
    missed, codes = [], {}
    for place in sorted(places):
        changed = bytearray(good)
        changed[place] ^= 1 << random.randrange(8)
        open(path, "wb").write(changed)
        code, said = check(*asked)
        codes[code] = codes.get(code, 0) + 1
        if code != 7:
            missed.append((place, bytes(good[place:place + 1]), bytes(changed[place:place + 1]), code, said[-200:]))
    open(path, "wb").write(good)
    print(f"seal_flips: {path}: {len(places)} of {len(good)} bytes changed, {len(places) - len(missed)} found, exit codes {codes}")
    return missed

pdf = open("s.pdf", "rb").read()
contents = [m.span() for m in re.finditer(rb"/Contents <[0-9a-f]+>", pdf)]
ranges = [m.span() for m in re.finditer(rb"/ByteRange \[[^]]*\]", pdf)]
tables = [m.span() for m in re.finditer(rb"xref\n.*?%%EOF\n", pdf, re.S)]
missed = flips("s.pdf", most, ["s.pdf"], contents + ranges + tables)
missed += flips("s.flj", most, ["s.flj"])
seals = sorted(glob.glob("s.*.fls"))
for seal in seals:
    missed += flips(seal, most // 2, ["s.flj"])
code, said = check("s.pdf", "s.flj")
assert code == 0, said
for one in missed:
    print("seal_flips: NOT FOUND:", *one)
sys.exit(bool(missed))
PY
