#!/bin/sh
# Sample certificates read back by programs that know nothing of this one: PDF/A-1b by PDFBox Preflight, structure by
# qpdf, text and pages by poppler. Use: readback.sh MAKE-SAMPLE FACES
set -eu
make_sample=$1
faces=$2
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT

say() {
	echo "readback: $story: $*" >&2
	exit 1
}

for program in java qpdf pdftotext pdffonts pdfinfo pdftoppm; do
	command -v "$program" >/dev/null || { echo "readback: $program is missing" >&2; exit 1; }
done
support=$(cd "$(dirname "$0")/../support" && pwd)

# Every number and every word of the sheet's text, one a line.
tokens() {
	tr -s ' |\n\t()[]:;,/' '\n\n\n\n\n\n\n\n\n\n\n\n' | sed 's/[.?]$//' | grep -v '^$' | sort -u
}

for story in adjusted left indicative missing imported shipboard transmitter names; do
	pdf=$work/$story.pdf
	"$make_sample" "$story" "$faces" "$pdf" "$work/$story.txt"

	sh "$support/preflight.sh" "$pdf" >"$work/a1b" 2>&1 ||
		{ cat "$work/a1b" >&2; say "is not valid PDF/A-1b"; }
	qpdf --check "$pdf" >"$work/qpdf" 2>&1 || { cat "$work/qpdf" >&2; say "qpdf finds faults"; }

	# Faces: all embedded, all subset, all with their Unicode.
	pdffonts "$pdf" | tail -n +3 >"$work/fonts"
	[ "$(wc -l <"$work/fonts")" -ge 2 ] || say "has fewer than two faces"
	grep -v 'CID TrueType *Identity-H *yes yes yes' "$work/fonts" && say "a face is not embedded, subset and searchable"

	# Size of the page, and every page says which it is and carries the number.
	pdfinfo "$pdf" | grep -q '595.276 x 841.89 pts (A4)' || say "is not A4"
	pages=$(pdfinfo "$pdf" | sed -n 's/^Pages: *//p')
	# Three pages of results and record, and a fourth since function checks and risks are stated too.
	[ "$pages" -le 4 ] || say "has $pages pages"
	page=1
	while [ "$page" -le "$pages" ]; do
		pdftotext -f "$page" -l "$page" -layout "$pdf" "$work/page"
		grep -q "page $page of $pages" "$work/page" || say "page $page does not say which it is"
		grep -q 'TY-2026-0417' "$work/page" || say "page $page lacks the number"
		if [ "$story" = indicative ]; then
			grep -q 'Indicative, not traceable' "$work/page" || say "page $page lacks its mark"
		else
			! grep -q 'Indicative, not traceable' "$work/page" || say "page $page is marked without reason"
		fi
		page=$((page + 1))
	done
	pdftotext "$pdf" - | grep -q 'End of certificate TY-2026-0417' || say "lacks its end mark"

	# All that the sheet says can be found in the pages, and nothing was turned into another character.
	pdftotext -layout "$pdf" - | tokens >"$work/shown"
	grep -v -e '^On every page' -e '^  \[chart' "$work/$story.txt" | sed 's/ (struck)$//; s/^  – //' | tokens >"$work/meant"
	comm -23 "$work/meant" "$work/shown" >"$work/lost"
	# words broken over two lines, and labels that are only shapes or lines on the page, may differ; numbers may not
	if grep -q '[0-9]' "$work/lost"; then
		grep '[0-9]' "$work/lost" >&2
		say "these numbers of the sheet cannot be found"
	fi
	[ "$(wc -l <"$work/lost")" -le 12 ] || { cat "$work/lost" >&2; say "these words of the sheet cannot be found"; }

	# Pages as pictures: neither blank (head and foot alone ink less than a four-hundredth) nor black.
	pdftoppm -r 40 -gray "$pdf" "$work/$story"
	for picture in "$work/$story"-*.pgm; do
		dark=$(tail -c +16 "$picture" | tr -d '\200-\377' | wc -c)
		all=$(wc -c <"$picture")
		[ "$dark" -gt $((all / 400)) ] || say "$(basename "$picture") is blank"
		[ "$dark" -lt $((all / 3)) ] || say "$(basename "$picture") is black"
	done
done

story=names
for name in 'Ναυτιλιακή Εταιρεία' 'Щербакова' 'Łódź Żegluga' 'Åstrøm & Søn' 'Юлия Щербакова' 'Γιώργος Αναγνώστου'; do
	pdftotext "$work/names.pdf" - | tr '\n' ' ' | grep -q "$name" || say "$name cannot be found"
done
pdfinfo "$work/names.pdf" | grep -q '^CreationDate: *Wed Apr 15 ' || say "its date is not that of the issue"

# The same record, the same bytes.
"$make_sample" adjusted "$faces" "$work/again.pdf" "$work/again.txt"
story=adjusted
cmp -s "$work/adjusted.pdf" "$work/again.pdf" || say "differs when it is made again"
