#!/bin/sh
# The record book through the program: sessions go in by themselves and once, the years of the invented VT-1, due dates,
# look-back; certificates and amendments; bundles of two ships in either order; damage, forgery, tampering; backup and
# restore; export; interrupts and kills. Arguments: source folder, program.
set -eu
root=${1:?source folder}
program=${2:?program}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export TZ=UTC FOUNDLEFT_HOME=$work/default
bad=0
complain() { echo "book: $*"; bad=1; }
foundleft() { "$program" "$@"; }
code_of() { # wanted code, command...: its output goes to $work/said
	want=$1
	shift
	got=0
	"$@" >"$work/said" 2>&1 || got=$?
	[ "$got" = "$want" ] || { complain "exit $got instead of $want: $*"; cat "$work/said"; }
}
says() { grep -qF -- "$1" "$work/said" || { complain "not said: $1"; cat "$work/said"; }; }
content() { foundleft book check --home "$1" | sed -n 's/^  content //p'; }
data=$root/tests/analysis/data

# ---- the story of VT-1 ---------------------------------------------------------------------------------------------
here=$root/sample-sessions
out=$work/years
mkdir -p "$out"
(. "$here/years/story") >"$work/said" 2>&1 || { cat "$work/said"; complain "the story stops"; }
ship=$out/home
foundleft history VT-1 --home "$ship" >"$work/said"
says "+0.81"
[ "$(stat -c %a "$ship/book/records.flb")" = 600 ] || complain "others may read the book"
python3 - "$work/said" <<'PY' || complain "history is wider than 80 columns"
import sys
wide = [line for line in open(sys.argv[1], encoding="utf-8") if len(line.rstrip("\n")) > 80]
print("".join(wide), end="")
sys.exit(bool(wide))
PY
foundleft history VT-1 --home "$ship" --json >"$work/history.json"
foundleft due --home "$ship" --on 2027-04-20 --json >"$work/due.json"
foundleft lookback VT-1 --home "$ship" --json >"$work/lookback.json"
# Slopes 0.81 and, naive, 0.41 % of span a year, crossed about 2025-08-28: the invented history's own figures. Errors at
# LK-50: computed by a script that shares no code with the program (tests/trend/data). The line: recomputed here.
python3 - "$work" <<'PY' || complain "other numbers than the invented history has"
import datetime, json, sys
work = sys.argv[1]
history, due, back = (json.load(open(f"{work}/{n}.json")) for n in ("history", "due", "lookback"))
top = next(f for f in history["followed"] if f["name"] == "LK-50")
assert top["chosen"] and len(history["records"]) == 6
teeth = top["teeth"]
want = [-0.0319763998, 0.9176210535, 1.5962834573, 0.9119341320, 1.6860511530, 2.5352293753]
for tooth, error in zip(teeth, want, strict=True):
    got = tooth["as_left_pct_span"] if tooth["as_found_pct_span"] is None else tooth["as_found_pct_span"]
    assert abs(got - error) < 1e-9, (got, error)
days = [datetime.date.fromisoformat(t["day"]).toordinal() for t in teeth]
x = [(d - days[0]) / 365.25 for d in days]
y = [t["chained_pct_span"] or 0.0 for t in teeth]
w = [t["expanded_uncertainty_pct_span"] ** -2 for t in teeth]
mean = lambda v: sum(a * b for a, b in zip(w, v)) / sum(w)
sxx = mean([(a - mean(x)) ** 2 for a in x])
slope = mean([(a - mean(x)) * b for a, b in zip(x, y)]) / sxx
assert abs(top["drift"]["slope_pct_span_per_year"] - slope) < 1e-4 * slope, (top["drift"], slope)
assert abs(slope - 0.81) < 0.005
assert abs(top["drift"]["naive_slope_pct_span_per_year"] - 0.41) < 0.005
assert not top["drift"]["accelerates"] and top["forecast"]["determined"]
assert [i["method"] for i in history["intervals"]] == ["staircase", "control chart", "time in use"]
assert history["due"] == "2027-04-14"
(one,) = due["instruments"]
assert (one["due"], one["days_left"], one["last"]) == ("2027-04-14", -6, "2026-04-14"), one
crossed = datetime.date.fromisoformat(back["crossed"])
assert abs((crossed - datetime.date(2025, 8, 28)).days) <= 1, crossed
assert (back["from"], back["to"]) == ("2025-04-15", "2026-04-14")
assert 12.4 < back["days"][-1]["true_value"] < back["days"][0]["true_value"] < 13.0
PY
foundleft due --home "$ship" --on 2027-04-20 >"$work/said"
says "OVERDUE 6 days"
foundleft lookback VT-1 --home "$ship" >"$work/said"
says "Disposition"
says "2025-08-28"
foundleft history VT-1 --home "$ship" --follow zero --fleet >"$work/said"
says "reliability of the fleet"
code_of 2 foundleft history VT-1 --home "$ship" --follow nothing
code_of 4 foundleft history VT-9 --home "$ship"
code_of 4 foundleft history VT-1 --home "$work/nowhere"
says "there is no record book"

# ---- once, and only from HOME/sessions -----------------------------------------------------------------------------
take() { # home, csv, run options...: a session of VT-1
	home=$1 csv=$2
	shift 2
	foundleft import "$csv" --home "$home" --stock "$here/stock" --procedure single-cycle --instrument VT-1 \
		--performed-by "Ida Fenwick (invented)" "$@"
}
other=$work/other
mkdir -p "$other"
take "$other" "$data/history.csv" --as-found H1 --journal "$work/apart.flj" >"$work/said"
if grep -q "record book" "$work/said"; then complain "a journal elsewhere went into the book by itself"; fi
[ ! -e "$other/book" ] || complain "a book was begun for a journal elsewhere"
code_of 0 foundleft book add "$work/apart.flj" --home "$other"
says "QUI-2022-0001"
code_of 0 foundleft book add "$work/apart.flj" --home "$other"
says "already"
take "$other" "$data/history.csv" --as-found H3 --journal "$work/race.flj" >/dev/null
for n in 1 2 3 4 5 6; do foundleft book add "$work/race.flj" --home "$other" >>"$work/race" 2>&1 & done
wait
[ "$(grep -cv already "$work/race")" = 1 ] || { complain "six programs at once put one session in other than once"; cat "$work/race"; }
head -c 20000 "$work/apart.flj" >"$work/open.flj"
code_of 5 foundleft book add "$work/open.flj" --home "$other"
says "still open"
# Fewer than three intervals: no line, and said so.
foundleft history VT-1 --home "$other" >"$work/said"
says "fewer than"

# ---- the book fails, the session does not ---------------------------------------------------------------------------
broken=$work/broken
mkdir -p "$broken"
echo "no folder" >"$broken/book"
code_of 0 take "$broken" "$data/history.csv" --as-found H1
says "The session is closed"
says "the session is safe, but the record book has not got it"
says "foundleft book add"
foundleft check 2022-04-20-VT-1 --home "$broken" >/dev/null || complain "the session was lost with the book"
rm "$broken/book"
code_of 0 foundleft book add 2022-04-20-VT-1 --home "$broken"

# No room for the book at one moment or another: the session is whole, and its number is never given to another one.
failed=0
for blocks in 80 250 330 400 460 520 600; do
	full=$work/full-$blocks
	mkdir -p "$full"
	take "$full" "$data/history.csv" --as-found H1 >/dev/null
	code_of 0 sh -c 'trap "" XFSZ; ulimit -f "$1"; shift; exec "$@"' sh $blocks "$program" import "$data/history.csv" \
		--home "$full" --stock "$here/stock" --procedure single-cycle --instrument VT-1 --performed-by "Ida Fenwick" \
		--as-found H3
	says "The session is closed"
	grep -q "has not got it" "$work/said" && failed=$((failed + 1))
	code_of 0 foundleft book add "$full"/sessions/*.flj --home "$full"
	code_of 0 foundleft book check --home "$full"
	says "2 records recomputed"
done
[ $failed -ge 1 ] || complain "the disk was never full"

# ---- certificates and amendments -----------------------------------------------------------------------------------
certify() { foundleft certify 2026-04-14-VT-1 --home "$ship" --stock "$here/stock" "$@"; }
code_of 0 certify --number TY-2026-0431 --date 2026-04-20 --amends TY-2026-0430 --reason "customer's name"
says "QUI-2026-0002"
code_of 0 foundleft book trace TB-NONE --home "$ship"
says "fed 0 records"
code_of 0 foundleft book trace TH-7 --home "$ship" --since 2026-01-01
says "TY-2026-0430.pdf"
says "TY-2026-0431.pdf"
says "fed 2 records"
code_of 0 foundleft book trace 2511E --home "$ship" --until 2025-12-31
says "fed 0 records"
foundleft history VT-1 --home "$ship" --json | python3 -c '
import json, sys
last = json.load(sys.stdin)["records"][-1]
assert (last["number"], last["amends"]) == ("QUI-2026-0002", "QUI-2026-0001"), last' || complain "the amendment does not count in the history"
code_of 0 foundleft book numbers --home "$ship"
says "Every number given out stands for a record"
code_of 0 foundleft check "$ship/book/records.flb"
says "7 records recomputed"

# ---- two ships, one office -----------------------------------------------------------------------------------------
second=$work/second
mkdir -p "$second/stock"
sed 's/Quillhaven (invented), Tallmere Yard, Port Hesper/Ravensfoot (invented), at sea/; s/FL-0417/FL-0517/; s/position: main engine booster unit, sensor 1/position: "=HYPERLINK(1;2)"/' \
	"$here/stock/instruments.yaml" >"$second/stock/instruments.yaml"
cp "$here/stock/oils.yaml" "$here/stock/equipment.yaml" "$here/stock/bench.yaml" "$second/stock"
for run in H1 H3 H4; do
	foundleft import "$data/history.csv" --home "$second" --procedure single-cycle --instrument VT-1 \
		--performed-by "Jonas Pell (invented)" --as-found $run >/dev/null
done
foundleft book bundle "$work/one.bundle" --home "$ship" >"$work/said"
origin_one=$(sed -n 's/^  origin //p' "$work/said")
foundleft book bundle "$work/two.bundle" --home "$second" --since 2099-01-01 >"$work/said"
origin_two=$(sed -n 's/^  origin //p' "$work/said")
for office in a b; do foundleft book found "Harbour Office (invented)" --prefix OFF --home "$work/$office" >/dev/null; done
code_of 5 foundleft book take "$work/one.bundle" --home "$work/a"
says "was never seen here"
code_of 5 foundleft book take "$work/one.bundle" --home "$work/a" --accept "$origin_two"
code_of 5 foundleft book take "$work/one.bundle" --home "$work/a" --accept "$(echo "$origin_one" | cut -c1-4)"
code_of 0 foundleft book take "$work/one.bundle" --home "$work/a" --accept "$origin_one"
code_of 0 foundleft book take "$work/two.bundle" --home "$work/a" --accept "$origin_two"
code_of 0 foundleft book take "$work/two.bundle" --home "$work/b" --accept "$origin_two"
code_of 0 foundleft book take "$work/one.bundle" --home "$work/b" --accept "$origin_one"
before=$(content "$work/a")
code_of 0 foundleft book take "$work/one.bundle" --home "$work/a"
says "0 new entries"
[ "$before" = "$(content "$work/a")" ] || complain "taking a bundle in twice changed the book"
heads() { foundleft book check --home "$1" | grep -A2 "taken in" | grep -e origin -e head; }
[ "$(heads "$work/a")" = "$(heads "$work/b")" ] && [ "$(heads "$work/a" | wc -l)" = 4 ] || complain "two orders of two ships gave other chains"
code_of 0 foundleft check "$work/a/book/records.flb"
says "3 records of other ships whose journals stayed on board"
code_of 2 foundleft history VT-1 --home "$work/a"
says "FL-0517"
foundleft history VT-1 FL-0517 --home "$work/a" >"$work/said"
says "Ravensfoot"
[ "$(foundleft due --home "$work/a" --json | grep -o '"tag"' | wc -l)" = 2 ] || complain "due does not list both ships"
# Every damaged byte is found, and nothing of it taken in.
size=$(stat -c %s "$work/one.bundle")
for at in 3 40 200 $((size / 3)) $((size / 2)) $((size - 20)) $((size - 1)); do
	cp "$work/one.bundle" "$work/damaged.bundle"
	python3 - "$work/damaged.bundle" "$at" <<'PY'
import sys
path, at = sys.argv[1], int(sys.argv[2])
data = bytearray(open(path, "rb").read())
data[at] ^= 1
open(path, "wb").write(data)
PY
	before=$(content "$work/b")
	got=0
	foundleft book take "$work/damaged.bundle" --home "$work/b" >"$work/said" 2>&1 || got=$?
	[ $got != 0 ] || complain "a bundle damaged at byte $at was taken in"
	[ "$before" = "$(content "$work/b")" ] || complain "a refused bundle changed the book (byte $at)"
done
head -c $((size - 5)) "$work/one.bundle" >"$work/short.bundle"
code_of 7 foundleft check "$work/short.bundle"
code_of 0 foundleft check "$work/one.bundle"
says "verdict: GOOD"
[ -z "$(ls "$FOUNDLEFT_HOME")" ] || complain "checking a bundle left something behind"

# ---- export --------------------------------------------------------------------------------------------------------
foundleft book export csv --home "$second" --out "$work/all.csv" >/dev/null
foundleft book export json --home "$second" >"$work/all.json"
code_of 5 foundleft book export csv --home "$second" --out "$work/all.csv"
code_of 2 foundleft book export xml --home "$second"
python3 - "$work/all.csv" "$work/all.json" <<'PY' || complain "the export is not as it should be"
import csv, json, sys
rows = list(csv.DictReader(open(sys.argv[1], newline="", encoding="utf-8")))
records = json.load(open(sys.argv[2], encoding="utf-8"))
assert len(records) == 3 and {row["number"] for row in rows} == {r["number"] for r in records}
for row in rows:
    assert row["position"] == "'=HYPERLINK(1;2)", row["position"]
    for name, cell in row.items():
        if cell[:1] in "=+-@\t\r" and cell:
            float(cell)  # only numbers may begin so
PY

# ---- tampered with -------------------------------------------------------------------------------------------------
tamper() { # name, Python that has `db`
	mkdir -p "$work/$1/book"
	foundleft book backup "$work/$1/book/records.flb" --home "$ship" >/dev/null
	printf 'import hashlib, sqlite3, sys\ndb = sqlite3.connect(sys.argv[1])\nfor (name,) in db.execute("SELECT name FROM sqlite_master WHERE type = '"'trigger'"'").fetchall():\n    db.execute(f"DROP TRIGGER {name}")\n%s\ndb.commit()\n' "$2" >"$work/tamper.py"
	python3 "$work/tamper.py" "$work/$1/book/records.flb"
	code_of 7 foundleft book check --home "$work/$1"
	says "the first thing that does not fit"
}
tamper rules 'pass'
tamper removed 'db.execute("DELETE FROM entry WHERE sequence = 3")'
# The triggers are put back, so that nothing but the digests can tell.
python3 - "$work" <<'PY'
import sys
open(sys.argv[1] + "/edit.py", "w").write('''
import hashlib, sqlite3, sys
path, what = sys.argv[1:]
db = sqlite3.connect(path)
triggers = db.execute("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'").fetchall()
for name, sql in triggers:
    db.execute(f"DROP TRIGGER {name}")
db.execute("PRAGMA foreign_keys = OFF")
def change(sequence, edit, anew):
    ((row, facts, old),) = db.execute("SELECT id, facts, digest FROM entry WHERE sequence = ?", (sequence,)).fetchall()
    text = facts if isinstance(facts, str) else facts.decode()
    new = edit(text)
    assert new != text
    db.execute("UPDATE entry SET facts = ? WHERE id = ?", (new if isinstance(facts, str) else new.encode(), row))
    if anew:
        digest = hashlib.sha256(new.encode()).hexdigest()
        db.execute("UPDATE entry SET digest = ? WHERE id = ?", (digest, row))
        db.execute("UPDATE session SET digest = ? WHERE entry = ?", (digest, row))
if what == "facts":
    change(2, lambda t: t.replace("Ida Fenwick", "Ida Fenwich"), False)
elif what == "whole":  # the last entry written anew, with its digest: only recomputing can tell
    last = db.execute("SELECT max(sequence) FROM entry").fetchone()[0]
    def edit(text):
        lines = text.split("\\n")
        at = next(i for i, line in enumerate(lines) if line.startswith("point\\t4\\t"))
        parts = lines[at].split("\\t")
        parts[5] = "0.0101"
        lines[at] = "\\t".join(parts)
        return "\\n".join(lines)
    change(last, edit, True)
elif what == "journal":
    ((row, packed),) = db.execute("SELECT entry, packed FROM bytes ORDER BY entry LIMIT 1").fetchall()
    data = bytearray(packed)
    data[len(data) // 2] ^= 1
    db.execute("UPDATE bytes SET packed = ? WHERE entry = ?", (bytes(data), row))
for name, sql in triggers:
    db.execute(sql)
db.commit()
''')
PY
# The ship whose last entry is a session, so that writing it anew breaks no link behind it.
for what in facts whole journal; do
	mkdir -p "$work/edited-$what/book"
	foundleft book backup "$work/edited-$what/book/records.flb" --home "$second" >/dev/null
	sed -i 's/Ida Fenwick", "Ida Fenwich/Jonas Pell", "Jonas Bell/' "$work/edit.py"
	python3 "$work/edit.py" "$work/edited-$what/book/records.flb" $what || complain "the test could not edit the book: $what"
	code_of 7 foundleft book check --home "$work/edited-$what"
	[ $what != whole ] || says "recomputing the journal of entry 3"
	[ $what != whole ] || says "error: kept 0.0101"
	[ $what != facts ] || says "2"
done

# ---- backup and restore ---------------------------------------------------------------------------------------------
foundleft book backup "$work/backup.flb" --home "$second" >"$work/said"
code_of 5 foundleft book backup "$work/backup.flb" --home "$second"
foundleft import "$data/history.csv" --home "$second" --procedure single-cycle --instrument VT-1 \
	--performed-by "Jonas Pell (invented)" --as-left H0 >/dev/null
code_of 5 foundleft book restore "$work/backup.flb" --home "$second" --prefix RAB
mv "$second/book" "$second/lost"
code_of 2 foundleft book restore "$work/backup.flb" --home "$second"
code_of 0 foundleft book restore "$work/backup.flb" --home "$second" --prefix RAB
code_of 0 foundleft book add "$second"/sessions/*.flj --home "$second"
says "RAB-2021-0001"
[ "$(grep -c already "$work/said")" = 3 ] || complain "after restoring, what was there went in again"
code_of 0 foundleft book check --home "$second"
says "4 records recomputed"
head -c 9000 "$work/backup.flb" >"$work/cut.flb"
got=0
foundleft book restore "$work/cut.flb" --home "$work/cut" --prefix C >"$work/said" 2>&1 || got=$?
[ $got != 0 ] && [ ! -e "$work/cut/book/records.flb" ] || complain "a damaged backup was restored"

# ---- interrupted and killed -----------------------------------------------------------------------------------------
many=$work/many
mkdir -p "$many/sessions"
foundleft book found "Many (invented)" --prefix MA --home "$many" >/dev/null
python3 - "$data/history.csv" "$work" <<'PY'
import datetime, sys
lines = open(sys.argv[1], encoding="utf-8").read().splitlines()
rows = [line for line in lines[1:] if line.startswith("H1,")]
for day in range(120):
    date = datetime.date(2022, 1, 3) + datetime.timedelta(days=day)
    with open(f"{sys.argv[2]}/day-{day}.csv", "w", encoding="utf-8") as file:
        file.write("\n".join([lines[0]] + [row.replace("2022-04-20", str(date)) for row in rows]) + "\n")
PY
(for day in $(seq 0 119); do
	foundleft import "$work/day-$day.csv" --home "$many" --stock "$here/stock" --procedure single-cycle --instrument VT-1 \
		--performed-by "Ida Fenwick (invented)" --as-found H1 >/dev/null 2>&1 || true
done) &
loop=$!
for n in 1 2 3 4 5 6 7 8; do # programs die while they put sessions in
	sleep 0.07
	for child in $(pgrep -P $loop); do kill -9 "$child" 2>/dev/null || true; done
done
wait $loop || true
code_of 0 foundleft book check --home "$many"
closed=0
for journal in "$many"/sessions/*.flj; do
	if grep -q "	close	" "$journal"; then
		closed=$((closed + 1))
		foundleft book add "$journal" --home "$many" >/dev/null || complain "not put in after the kill: $journal"
	fi
done
code_of 0 foundleft book check --home "$many"
says "$closed records recomputed"
stopped=0
for delay in 0.005 0.01 0.02 0.03 0.04 0.05 0.06 0.08 0.1 0.15; do
	"$program" book check --home "$many" >"$work/said" 2>&1 &
	child=$!
	sleep $delay
	kill -INT $child 2>/dev/null || true
	got=0
	wait $child || got=$?
	case $got in
	0) ;;
	5 | 130) stopped=1 ;; # 130: before the program was ready for it
	*) complain "an interrupted check ends with $got" && cat "$work/said" ;;
	esac
done
[ $stopped = 1 ] || complain "no check could be interrupted"
code_of 0 foundleft book check --home "$many"

[ $bad = 0 ] && echo "book: kept, followed through the years, bundled, tampered with, restored, interrupted"
exit $bad
