#!/bin/sh
# Budgets, explanations and trials through the program as built. Arguments: source folder, program.
set -eu
root=${1:?source folder}
program=${2:?program}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export FOUNDLEFT_HOME=$work/home TZ=UTC
bad=0
say() { echo "depth: $*"; bad=1; }
has() { grep -q -- "$2" "$work/$1" || say "$1 does not say: $2"; }

"$program" import "$root/tests/analysis/data/asfound_2026.csv" --stock "$root/sample-sessions/stock" --journal "$work/s.flj" \
	--procedure workshop-calibration --instrument VT-1 --performed-by "Ida Fenwick (invented)" --as-found S26F >"$work/said" 2>&1 ||
	{ cat "$work/said"; exit 1; }

# The same seed gives the same bytes on one, two and three threads; without a seed too; another seed others.
for threads in 1 2 3; do
	"$program" assess "$work/s.flj" --json --trials 30000 --seed 20260414 --threads $threads >"$work/json$threads"
done
for threads in 1 2; do
	"$program" assess "$work/s.flj" --trials auto --threads $threads >"$work/text$threads"
done
cmp "$work/json1" "$work/json2" && cmp "$work/json1" "$work/json3" || say "the threads change the JSON"
cmp "$work/text1" "$work/text2" || say "the threads change the text"
"$program" assess "$work/s.flj" --json --trials 30000 --seed 1 >"$work/other"
! cmp -s "$work/json1" "$work/other" || say "another seed gives the same"
tr '\n' ' ' <"$work/text1" | tr -s ' ' >"$work/line1"
has line1 'trials of the whole model, seed [0-9]'
has line1 'two digits of every u are stable'
has line1 'JCGM 101 clause 8'

python3 - "$work" <<'PY' || bad=1
import json, sys
run = json.load(open(f"{sys.argv[1]}/json1"))["runs"][0]
bad = []
def want(what, ok):
    if not ok: bad.append(what)
t = run["trials"]
want("seed", t["seed"] == 20260414)
want("trials done", 30000 <= t["done"] < 30008)
lk50 = next(v for v in t["values"] if v["oil"] == "LK-50" and v["direction"] is None)
half = (lk50["high_pct_span"] - lk50["low_pct_span"]) / 2
# one independent computation of the invented session, less the resolutions: 2.535, 0.176
want(f"mean {lk50['mean_pct_span']}", abs(lk50["mean_pct_span"] - 2.535) < 0.005)
want(f"u {lk50['standard_uncertainty_pct_span']}", abs(lk50["standard_uncertainty_pct_span"] - 0.176) < 0.005)
want(f"half width {half} below U {lk50['gum_expanded_uncertainty_pct_span']}", half < lk50["gum_expanded_uncertainty_pct_span"])
for p in run["points"] + run["combined"]:
    names = [n["name"] for n in p["explained"]]
    want("explained in full", names[-1] == "verdict" and "error" in names and "expanded uncertainty" in names)
    want("shares", abs(sum(l["share"] for l in p["budget"]) - 1) < 1e-9)
    want("sources", all(l["source"] and l["rule"] for l in p["budget"]))
n = len(run["combined"])
want("covariance", len(run["covariance_of_combined_pct_span_squared"]) == n)
want("true values", [v["at"] for v in run["true_values"]] == ["set point", "alarm low", "alarm high"])
want("generalised line", run["generalised_line"]["computed"])
for b in bad: print("depth:", b)
sys.exit(bool(bad))
PY

"$program" assess "$work/s.flj" --budget >"$work/budget"
has budget 'Budget of LK-50, rising and falling together'
has budget 'combined'
[ "$(grep -c '^Budget of ' "$work/budget")" = 6 ] || say "not six budgets"
"$program" assess "$work/s.flj" --explain lk-50 >"$work/explain"
has explain 'ASTM D341'
has explain 'rising and falling together: every number'
"$program" assess "$work/s.flj" --explain 'zero falling' >"$work/explain"
has explain 'zero, falling: every number'
for width in 60 80 132; do
	"$program" assess "$work/s.flj" --budget --trials 10000 --width $width | python3 -c "
import sys
for line in sys.stdin.read().splitlines():
    if len(line) > $width: print('depth: wider than $width:', line); sys.exit(1)" || bad=1
done

refused() { # what it must say, arguments
	part=$1
	shift
	if "$program" assess "$work/s.flj" "$@" >/dev/null 2>"$work/refusal"; then say "takes $*"; fi
	grep -q -- "$part" "$work/refusal" || say "$*: $(cat "$work/refusal")"
}
refused 'no run has a point' --explain LK-99
refused 'whole number' --trials many
refused 'whole number' --trials 10
refused 'whole number' --trials auto --threads 0
refused 'add --trials' --seed 5

# Interrupted: one clear line, nothing on standard output.
"$program" assess "$work/s.flj" --trials 4000000000 >"$work/out" 2>"$work/refusal" &
running=$!
sleep 2
kill -INT $running
wait $running && say "an interrupted run ends well" || true
has refusal 'stopped after [0-9]* trials'
[ ! -s "$work/out" ] || say "an interrupted run prints a result"

[ $bad = 0 ] && echo "depth: budgets, explanations and trials hold"
exit $bad
