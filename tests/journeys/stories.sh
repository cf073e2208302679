#!/bin/sh
# Every sample session from its readings to the certificate, with the program as built; the certificate is read back by
# independent tools. Arguments: source folder, program.
set -eu
root=${1:?source folder}
program=${2:?program}
here=$root/sample-sessions
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export TZ=UTC
foundleft() { "$program" "$@"; }
export FOUNDLEFT_HOME=$work/home
bad=0
complain() { echo "stories: $*"; bad=1; }


read_back() { # story: the certificate by tools that know nothing of us
	pdf=$work/$1/session.pdf
	qpdf --check "$pdf" >"$work/qpdf" 2>&1 || { cat "$work/qpdf"; complain "$1: qpdf finds faults"; }
	sh "$root/tests/support/preflight.sh" "$pdf" >"$work/preflight" 2>&1 || { cat "$work/preflight"; complain "$1: not valid PDF/A-1b"; }
	pdffonts "$pdf" | tail -n +3 | awk '{ if ($(NF-4) != "yes" || $(NF-3) != "yes" || $(NF-2) != "yes") { print; exit 1 } }' ||
		complain "$1: a face is not embedded, subset and readable as text"
	[ "$(pdffonts "$pdf" | tail -n +3 | wc -l)" -ge 1 ] || complain "$1: no face at all"
	pages=$(pdfinfo "$pdf" | awk '/^Pages:/ { print $2 }')
	pdftotext -layout "$pdf" "$work/$1/text"
	[ "$(grep -c "page [0-9]* of $pages" "$work/$1/text")" = "$pages" ] || complain "$1: not every page says which of how many it is"
	pdftoppm -r 40 -gray "$pdf" "$work/$1/page"
	for picture in "$work/$1"/page*.pgm; do
		python3 - "$picture" <<'PY' || complain "$1: $picture is blank or black"
import sys
data = open(sys.argv[1], "rb").read().split(b"\n", 3)[3]
dark = sum(b < 128 for b in data) / len(data)
sys.exit(not 0.002 < dark < 0.3)
PY
	done
}

says() { # story text...
	story=$1
	shift
	for text in "$@"; do
		grep -qF -- "$text" "$work/$story/text" || complain "$story: the certificate does not say: $text"
	done
}

count_pages_with() { # story text: on every page
	pages=$(pdfinfo "$work/$1/session.pdf" | awk '/^Pages:/ { print $2 }')
	for page in $(seq "$pages"); do
		pdftotext -f "$page" -l "$page" "$work/$1/session.pdf" - | tr '\n' ' ' | grep -qiF -- "$2" || complain "$1: page $page does not say: $2"
	done
}

verdicts() { # story as-found as-left
	"$program" assess "$work/$1/session.flj" --json >"$work/$1/json"
	python3 - "$work/$1/json" "$2" "$3" <<'PY' || complain "$1: other verdicts than $2 / $3"
import json, sys
runs = {run["kind"]: run["verdict"] for run in json.load(open(sys.argv[1]))["runs"]}
want = {"as-found": sys.argv[2], "as-left": sys.argv[3]}
print(sys.argv[1].split("/")[-2], runs)
sys.exit(any((runs.get(kind) or "none") != word for kind, word in want.items()))
PY
}

for story in adjusted in-tolerance out-of-tolerance interrupted expired-oil; do
	out=$work/$story
	mkdir -p "$out"
	(. "$here/$story/story") >"$out/said" 2>&1 || { cat "$out/said"; complain "$story: the story stops"; continue; }
	"$program" check "$out/session.flj" --home "$out/home" >/dev/null || complain "$story: check finds a fault"
	read_back "$story"
	# The same journal, date and number give the same bytes; a signature stands behind them and changes none (ECDSA gives
	# another signature each time, so what is compared is the certificate that was signed).
	cp "$out/session.pdf" "$out/first.pdf"
	rm "$out/session.pdf"
	grep '^foundleft certify' "$here/$story/story" | sed 's/ --signer [a-z]*//; s/ --passphrase-fd .*//' >"$out/again"
	. "$out/again" >/dev/null
	if grep -q -e --signer "$here/$story/story"; then
		head -c "$(wc -c <"$out/session.pdf")" "$out/first.pdf" >"$out/base.pdf"
		"$program" check "$out/first.pdf" --home "$out/home" | grep -q 'verdict: GOOD' || complain "$story: the signed certificate does not hold"
	else
		cp "$out/first.pdf" "$out/base.pdf"
	fi
	cmp "$out/base.pdf" "$out/session.pdf" || complain "$story: other bytes for the same journal, date and number"
done

verdicts adjusted fail pass
verdicts in-tolerance pass pass
verdicts out-of-tolerance fail fail
verdicts interrupted pass pass
verdicts expired-oil pass pass
says adjusted "TY-2026-0417" "FL-0417" "+2.54" "0.36" "as-found" "as-left" "conditional pass" "2511E" "Lanternmoor-2511E" \
	"TB-6603" "Ida Fenwick" "Mara Oduya" "900 kg/m³" "End of certificate"
says in-tolerance "QH-2026-007" "As-left = as-found"
says interrupted "TY-2026-0421" "mbar"
count_pages_with expired-oil "indicative, not traceable"
says expired-oil "2411E" "no oil in date on board"
[ $bad = 0 ] && echo "stories: 5 sessions to their certificates, read back"
exit $bad
