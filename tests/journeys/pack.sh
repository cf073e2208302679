#!/bin/sh
# Trend report and survey pack of the invented VT-1 of five years: valid PDF/A-1b by a program that is not ours, the same
# bytes for the same book and date, what the pages say, the outline; the health of its oils. Arguments: source folder,
# program.
set -eu
root=${1:?source folder}
program=${2:?program}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export TZ=UTC
bad=0
complain() { echo "pack: $*"; bad=1; }
foundleft() { "$program" "$@"; }
code_of() { # wanted code, command...: its output goes to $work/said
	want=$1
	shift
	got=0
	"$@" >"$work/said" 2>&1 || got=$?
	[ "$got" = "$want" ] || { complain "exit $got instead of $want: $*"; cat "$work/said"; }
}
valid() { # PDF
	sh "$root/tests/support/preflight.sh" "$1" >"$work/preflight" 2>&1 || { cat "$work/preflight"; complain "$1: not valid PDF/A-1b"; }
	qpdf --check "$1" >"$work/qpdf" 2>&1 || { cat "$work/qpdf"; complain "$1: qpdf finds faults"; }
	pages=$(pdfinfo "$1" | sed -n 's/^Pages: *//p')
	pdftotext -layout "$1" "$work/text"
	[ "$(grep -c "page [0-9]* of $pages\$" "$work/text")" = "$pages" ] || complain "$1: not every page says which it is"
	pdffonts "$1" | tail -n +3 | grep -v 'CID TrueType *Identity-H *yes yes yes' && complain "$1: a face is not embedded"
	tr -s '\n ' ' ' <"$work/text" >"$work/flat"
	pdftoppm -r 40 -gray "$1" "$work/page"
	for picture in "$work"/page*.pgm; do
		dark=$(tail -c +16 "$picture" | tr -d '\200-\377' | wc -c)
		[ "$dark" -gt $(($(wc -c <"$picture") / 500)) ] || complain "$1: $picture is blank"
		rm "$picture"
	done
}
says() { for text; do grep -qF -- "$text" "$work/flat" || complain "the page does not say: $text"; done; }

here=$root/sample-sessions
out=$work/years
mkdir -p "$out"
(. "$here/years/story") >"$work/said" 2>&1 || { cat "$work/said"; complain "the story stops"; }
ship="--home $out/home --stock $here/stock"

# ---- the trend report ----------------------------------------------------------------------------------------------
code_of 0 foundleft report VT-1 $ship --date 2026-04-20 --fleet --out "$work/trend.pdf"
valid "$work/trend.pdf"
[ "$pages" -le 2 ] || complain "the trend report has $pages pages"
# 0.81 and, naive, 0.41 % of span a year; crossed about 2025-08-28: the invented history's own figures.
says "+0.81 % of span a year" "would say +0.41 %" "2025-08-28" "Disposition" "Every session" "reliability of the fleet" \
	"End of trend report VT-1"
code_of 0 foundleft report VT-1 $ship --date 2026-04-20 --fleet --out "$work/again.pdf"
cmp "$work/trend.pdf" "$work/again.pdf" || complain "another trend report from the same book and date"
code_of 0 foundleft report VT-1 $ship --date 2026-04-20 --fleet --out "$work/trend.pdf"
code_of 5 foundleft report VT-1 $ship --date 2026-04-21 --fleet --out "$work/trend.pdf"
code_of 0 foundleft report VT-1 $ship --date 2026-04-20
[ -f "$out/home/reports/trend-VT-1-2026-04-20.pdf" ] || complain "the report is not under HOME/reports"
code_of 4 foundleft report VT-9 $ship
code_of 4 foundleft report VT-1 --home "$work/nowhere"

# ---- the survey pack -----------------------------------------------------------------------------------------------
code_of 0 foundleft pack Quillhaven $ship --date 2026-04-20 --out "$work/pack.pdf"
valid "$work/pack.pdf"
says "1 of 2 instruments and 10 of 11 standards are in date on 2026-04-20" "never calibrated" "OUT OF DATE" \
	"Tachometer TC-1 may not be used since 2026-03-02" "TY-2026-0430" "Survey pack" "Trend report" "needs a disposition"
code_of 0 foundleft pack quillhaven $ship --date 2026-04-20 --out "$work/again-pack.pdf"
cmp "$work/pack.pdf" "$work/again-pack.pdf" || complain "another pack from the same book and date"
# The pages of the certificate are those of the original, marked on each, which is named with its digest.
digest=$(sha256sum "$out/session.pdf" | cut -c1-64)
says "$digest" "TY-2026-0430.pdf"
originals=$(pdfinfo "$out/session.pdf" | sed -n 's/^Pages: *//p')
[ "$(grep -c "Copy: the issued original rules, SHA-256 $(echo "$digest" | cut -c1-16)" "$work/text")" = "$originals" ] ||
	complain "not every page of the copy says that the original rules"
words() { tr -cs '0-9A-Za-z.' '\n' | grep '[0-9]' | sort -u; }
pdftotext -layout "$out/session.pdf" - | sed '/page [0-9]* of/d' | words >"$work/original"
words <"$work/text" >"$work/copied"
[ -z "$(comm -23 "$work/original" "$work/copied")" ] || { comm -23 "$work/original" "$work/copied"; complain "numbers of the original are not in the copy"; }
# The outline leads to the pages that the first page names.
qpdf --json --json-key=outlines "$work/pack.pdf" >"$work/outline.json"
python3 - "$work" "$originals" <<'PY' || complain "the outline is another"
import json, re, sys
work, originals = sys.argv[1], int(sys.argv[2])
top = json.load(open(f"{work}/outline.json"))["outlines"]
assert [o["title"] for o in top] == ["State on 2026-04-20", "VT-1, FL-0417"], top
assert [(k["title"], k["destpageposfrom1"]) for k in top[1]["kids"]] == [
    ("Certificate TY-2026-0430", 2), ("Trend of VT-1", 2 + originals)], top
row = next(line for line in open(f"{work}/text") if line.startswith("VT-1"))
assert re.search(rf"in date +2 +{2 + originals}$", row.rstrip()), row
PY
code_of 0 foundleft pack all $ship --date 2026-04-20 --out "$work/all.pdf"
valid "$work/all.pdf"
code_of 4 foundleft pack Lanternmoor $ship --date 2026-04-20 --out "$work/none.pdf"
[ ! -e "$work/none.pdf" ] || complain "a pack of no instrument was written"
# A year on nothing is in date, and the page says so.
code_of 0 foundleft pack Quillhaven $ship --date 2027-06-01 --out "$work/later.pdf"
valid "$work/later.pdf"
says "0 of 2 instruments" "OVERDUE" "VT-1 (FL-0417) is overdue since 2027-04-14"
# An office has the journals from bundles only: pages are set from the book.
foundleft book bundle "$work/ship.flbundle" --home "$out/home" >"$work/said"
foundleft book found Office --prefix OFF --home "$work/office" >"$work/said" 2>&1 || { cat "$work/said"; complain "no office"; }
origin=$(foundleft book take "$work/ship.flbundle" --home "$work/office" 2>&1 | grep -o '[0-9a-f]\{64\}' | head -n 1)
code_of 0 foundleft book take "$work/ship.flbundle" --home "$work/office" --accept "$origin"
code_of 0 foundleft pack all --home "$work/office" --stock "$here/stock" --date 2026-04-20 --out "$work/office.pdf"
valid "$work/office.pdf"
says "$digest" "+2.54"

# ---- the health of an oil ------------------------------------------------------------------------------------------
code_of 0 foundleft stock health 2511E $ship
grep -q "can't be told from" "$work/said" || complain "one instrument is enough to accuse an oil"
code_of 1 foundleft stock health 2511E $ship --strict
code_of 4 foundleft stock health 9999X $ship
# The same oils on a sister instrument: now it can be told.
foundleft import "$here/years/2026.csv" $ship --procedure workshop-calibration --instrument VT-2 \
	--performed-by "Ida Fenwick (invented)" --as-found S26F --as-left S26L >"$work/import"
code_of 0 foundleft stock health 2511E $ship --strict
tr -s '\n ' ' ' <"$work/said" | grep -q "lot 2511E agrees with its certificate; 4 readings on 2 instruments" ||
	{ cat "$work/said"; complain "a sound oil is not called sound"; }
[ $bad = 0 ] && echo "pack: trend report and survey pack, valid and the same again"
exit $bad
