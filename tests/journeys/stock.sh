#!/bin/sh
# The stock through the program: a new ship's stock by guided questions only, no YAML touched; renewing, days, lists,
# import and export; a session on the stock that was typed; refusals that write nothing. Arguments: source folder, program.
set -eu
root=${1:?source folder}
program=${2:?program}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export TZ=UTC FOUNDLEFT_HOME=$work/home
bad=0
complain() { echo "stock: $*"; bad=1; }
foundleft() { "$program" "$@"; }
code_of() { # wanted code, command...: its output goes to $work/said
	want=$1
	shift
	got=0
	"$@" >"$work/said" 2>&1 || got=$?
	[ "$got" = "$want" ] || { complain "exit $got instead of $want: $*"; cat "$work/said"; }
}
says() { tr -s "\n " " " <"$work/said" | grep -qF -- "$1" || { complain "not said: $1"; cat "$work/said"; }; }
stock=$root/sample-sessions/stock

# ---- typed at the keyboard -----------------------------------------------------------------------------------------
mkdir -p "$work/home"
printf '%s\n' VT-1 FL-0417 'Quillhaven (invented)' '' 'main engine booster unit, sensor 1' '' '0 to 50 mm2/s' 900 '4-20 mA' \
	60 1710 42,75 313.21 2.200 400 1.500 40.0 '' 2.0 1.5 0.5 12 13 0.6 9 20 yes |
	foundleft stock add instrument >"$work/said"
says "instrument VT-1 is in $work/home/stock/instruments.yaml"
# A slip is told at the field, and the right answer goes on from there.
printf '%s\n' LK-10 2511B Lanternmoor-2511B 'Lanternmoor oil bench (invented)' 2511C 2511B 2025-11-18 2026-11-18 '' 2 \
	20 17.43 0.2 841.8 0.4 20.71 20.71 '' '' '' 17.43 40 10.00 '' 828.9 '' '' 60 5.745 '' 815.8 '' 4.687 '' yes |
	foundleft stock add oil >"$work/said"
says "certificate lot: the certificate is for lot 2511C, the bottle is lot 2511B"
says "nu and mu are swapped"
says "oil 2511B is in"
foundleft stock list --on 2026-04-14 >"$work/said"
says "2511B"
says "every 12 months"
code_of 0 foundleft check "$work/home/stock/oils.yaml"

# ---- leaving writes nothing ----------------------------------------------------------------------------------------
cp -r "$work/home/stock" "$work/before"
printf 'LK-50\n2511E\nstop\n' | foundleft stock add oil >"$work/said"
says "Nothing is written."
printf 'LK-50\n2511E\n' | foundleft stock add oil >"$work/said"
says "Nothing is written."
printf '!add oil\nLK-50\n2511B\n' >"$work/answers"
code_of 5 foundleft stock replay "$work/answers"
says "$work/answers:3: lot: 2511B is in stock already"
printf '!add oil\nLK-50\n2511E\n' >"$work/answers"
code_of 3 foundleft stock replay "$work/answers"
says "end too early"
code_of 4 foundleft stock renew nothing
code_of 2 foundleft stock add bottle
code_of 2 foundleft stock burn
diff -r "$work/home/stock" "$work/before" || complain "a conversation that was left changed a file"

# ---- import: once, whole or not at all -----------------------------------------------------------------------------
sed 's/^  - id: TH-7/  # ours\n  - id: TH-7/' "$stock/equipment.yaml" >"$work/equipment.yaml"
code_of 0 foundleft stock import "$work/equipment.yaml"
says "equipment TH-7 is in"
code_of 0 foundleft stock import "$work/equipment.yaml" "$stock/equipment.yaml"
says "All of it is in stock already."
cp -r "$work/home/stock" "$work/before2"
printf 'equipment:\n  - id: XX-1\n    role: timer\n    certificate: a\n    issuer: b (invented)\n    calibrated on: 2026-01-01\n    due on: 2027-01-01\n    range: 0 to 100 s\n    resolution: 0.01 s\n    U: 0.1 s\n    k: 2\n    drift per year: 0 s\n  - id: TH-7\n    role: bath\n    certificate: a\n    issuer: b (invented)\n    calibrated on: 2026-01-01\n    due on: 2027-01-01\n    range: 0 to 100 °C\n    resolution: 0.01 K\n    uniformity: 0.1 K\n' >"$work/other.yaml"
code_of 3 foundleft stock import "$work/other.yaml"
says "TH-7 is a thermometer in its other certificate"
diff -r "$work/home/stock" "$work/before2" || complain "a refused import left something"

# ---- renewing: the old certificate serves its days, the new one its own --------------------------------------------
printf '!renew TH-7\nTB-7700\n!empty\n2026-08-20\n2027-08-20\n!empty\n!empty\n!empty\n0.02\n2\n!empty\nyes\n' >"$work/answers"
printf '# said by hand\n' >>"$work/home/stock/equipment.yaml"
code_of 0 foundleft stock replay "$work/answers"
[ "$(grep -c 'id: TH-7' "$work/home/stock/equipment.yaml")" = 2 ] || complain "renewing replaced the old certificate"
tail -n 1 "$work/home/stock/equipment.yaml" | grep -q '^# said by hand$' || complain "a comment was lost or moved"
foundleft stock list --on 2026-04-14 >"$work/said"
says "TB-6603"
foundleft stock list --on 2026-09-14 >"$work/said"
says "TB-7700"
code_of 3 foundleft stock replay "$work/answers"
says "the new one has to be later"
foundleft stock list --on 2026-08-19 --soon 20 >"$work/said"
says "soon: 14 days left"
code_of 1 foundleft stock check --on 2027-10-01 --strict
says "OUT OF DATE"
code_of 0 foundleft stock check --on 2026-02-20 --strict --soon 0

# ---- what was typed and renewed serves a session -------------------------------------------------------------------
code_of 0 foundleft stock import "$stock/oils.yaml" --home "$work/bench"
code_of 0 foundleft stock import "$stock/equipment.yaml" --home "$work/bench"
code_of 0 foundleft stock import "$work/home/stock/instruments.yaml" --home "$work/bench"
code_of 0 foundleft stock replay "$work/answers" --home "$work/bench"
code_of 0 foundleft import "$root/sample-sessions/years/2026.csv" --home "$work/bench" --procedure workshop-calibration \
	--instrument VT-1 --performed-by "Ida Fenwick (invented)" --as-found S26F --as-left S26L --journal "$work/session.flj"
grep -q 'certificate: TB-6603' "$work/session.flj" || complain "the session of April did not use April's certificate"
if grep -q 'certificate: TB-7700' "$work/session.flj"; then complain "the session of April used August's certificate"; fi

# ---- export and back -----------------------------------------------------------------------------------------------
code_of 0 foundleft stock export "$work/out"
code_of 0 foundleft stock check --stock "$work/out" --on 2026-04-01
says "all consistent"
code_of 0 foundleft stock import "$work"/out/*.yaml --home "$work/third"
foundleft stock list --on 2026-09-14 --home "$work/third" >"$work/a"
foundleft stock list --on 2026-09-14 >"$work/b"
cmp "$work/a" "$work/b" || complain "the stock is another after export and import"
code_of 5 foundleft stock export "$work/out"

# ---- two programs at once ------------------------------------------------------------------------------------------
for n in 1 2 3 4 5 6; do
	printf '!add equipment\nTI-%d\ntimer\nTB-90%d\nTallmere bench (invented)\n2026-01-10\n2027-01-10\n0 to 100 s\n0.01\n0 s\n0.1\n2\n!empty\nyes\n' $n $n >"$work/timer-$n"
	foundleft stock replay "$work/timer-$n" >>"$work/race" 2>&1 &
done
wait
took=$(grep -c 'is in ' "$work/race")
there=$(grep -c 'id: TI-' "$work/home/stock/equipment.yaml")
[ "$took" = "$there" ] || { complain "$took programs said it was written, $there items are there"; cat "$work/race"; }
[ "$took" -ge 1 ] || complain "none of six programs could write"

# ---- a full disk or a folder that can't be written -----------------------------------------------------------------
if [ "$(id -u)" != 0 ]; then
	chmod 500 "$work/home/stock"
	code_of 6 foundleft stock replay "$work/timer-1"
	chmod 700 "$work/home/stock"
fi
[ $bad = 0 ] && echo "stock: typed, renewed, imported, exported"
exit $bad
