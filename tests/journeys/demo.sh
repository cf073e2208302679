#!/bin/sh
# The invented scenario's readings, imported with the program as built, against one independent computation of the same
# (expected_summary.csv, expected_budget.csv): invented data, which only shows that two computations agree.
# Arguments: source folder, program.
set -eu
root=${1:?source folder}
program=${2:?program}
data=$root/tests/analysis/data
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export FOUNDLEFT_HOME=$work/home TZ=UTC

take() { # session, csv, procedure
	"$program" import "$data/$2" --stock "$root/sample-sessions/stock" --journal "$work/$1.flj" --procedure "$3" \
		--instrument VT-1 --performed-by "Ida Fenwick (invented)" --as-found "$1" >"$work/said" 2>&1 || { cat "$work/said"; exit 1; }
	"$program" assess "$work/$1.flj" --json >"$work/$1.json"
}
for session in H0 H1 H2 H2L H3 H4; do take $session history.csv single-cycle; done
take S26F asfound_2026.csv workshop-calibration
take S26L asleft_2026.csv workshop-calibration

python3 - "$data" "$work" <<'PY'
import csv, json, sys
data, work = sys.argv[1:]
bad = compared = 0

def compare(what, want, got, tolerance):
    global bad, compared
    compared += 1
    if got is None or not abs(float(want) - got) <= tolerance:
        bad += 1
        print(f"demo: {what}: want {want}, got {got}, tolerance {tolerance}")

for row in csv.DictReader(open(f"{data}/expected_summary.csv")):
    name = row["session"]
    run = json.load(open(f"{work}/{name}.json"))["runs"][0]
    points = [p for p in run["points"] if p["oil"]]
    worst = max(points, key=lambda p: abs(p["error_pct_span"]))
    direction = {"up": "rising", "down": "falling"}[row["worst_dir"]]
    if (worst["oil"], worst["direction"]) != (row["worst_oil"], direction):
        bad += 1
        print(f"demo: {name}: worst at {worst['oil']} {worst['direction']}, want {row['worst_oil']} {direction}")
    half = 0.00051  # three printed decimals
    compare(f"{name} worst error", row["worst_mean_error_pct_span"], worst["error_pct_span"], half)
    for key, column in (("zero_error_pct_span", "ls_zero_error_pct"), ("span_error_pct_span", "ls_span_error_pct"),
                        ("independent_linearity_pct_span", "independent_linearity_pct"),
                        ("terminal_linearity_pct_span", "terminal_linearity_pct"),
                        ("zero_based_linearity_pct_span", "zero_based_linearity_pct"),
                        ("hysteresis_pct_span", "max_hysteresis_pct")):
        compare(f"{name} {key}", row[column], run[key], half)

combined = {p["oil"]: p for p in json.load(open(f"{work}/S26F.json"))["runs"][0]["combined"] if p["oil"]}
for row in csv.DictReader(open(f"{data}/expected_budget.csv")):
    if row["contribution"].startswith("EXPANDED"):
        compare(f"S26F {row['oil']} U", row["contribution_pct_span"],
                combined[row["oil"]]["expanded_uncertainty_pct_span"], 0.01)
    if row["contribution"] == "COMBINED":
        compare(f"S26F {row['oil']} uc", row["contribution_pct_span"],
                combined[row["oil"]]["expanded_uncertainty_pct_span"] / combined[row["oil"]]["coverage_factor"], 0.01)
print(f"demo: {compared} numbers compared, {bad} differ")
sys.exit(bad > 0 or compared < 60)
PY
