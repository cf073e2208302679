#!/bin/sh
# Holds the includes to the table of stages in CMakeLists.txt: src/<stage> may include foundleft/<other>.h only where
# the table lists <other>, private headers only of its own folder, and foreign libraries only where the table links them.
set -eu
root=${1:?the source folder}
cd "$root"
table=$(mktemp)
trap 'rm -f "$table"' EXIT
# "foundleft_stage(name STAGES a b LIBRARIES ...)" -> "name a b"
tr '\n' ' ' <CMakeLists.txt | grep -o 'foundleft_stage([^)]*)' |
	sed 's/foundleft_stage(//; s/)//; s/STAGES//; s/LIBRARIES.*//' | tr -s ' \t' ' ' >"$table"
[ "$(wc -l <"$table")" -ge 10 ] || { echo "layout: the table of stages was not found"; exit 1; }

bad=0
complain() { echo "layout: $*"; bad=1; }

allowed() { # stage other
	[ "$1" = "$2" ] || grep -q "^$1 .*\b$2\b" "$table"
}

for folder in src/*/; do
	stage=$(basename "$folder")
	grep -q "^$stage\b" "$table" || { complain "src/$stage is not in the table of CMakeLists.txt"; continue; }
	for file in "$folder"*.c "$folder"*.h "include/foundleft/$stage.h"; do
		[ -f "$file" ] || continue
		for other in $(sed -n 's|^#include "foundleft/\([a-z_]*\)\.h".*|\1|p' "$file"); do
			allowed "$stage" "$other" || complain "$file includes foundleft/$other.h, which $stage may not"
		done
		for private in $(sed -n 's|^#include "\([a-z_0-9]*\.h\)".*|\1|p' "$file"); do
			[ -f "$folder$private" ] || complain "$file includes $private, which is not in src/$stage"
		done
		sed -n 's|^#include <\([a-z_0-9]*\)[/.].*|\1|p' "$file" | sort -u | while read -r library; do
			case $library in
			gsl) owner=numeric ;;
			hpdf*) owner=certificate ;;
			openssl) owner=seal ;;
			yaml) owner=document ;;
			sqlite3 | zlib) owner=store ;;
			jansson | histedit) owner=cli ;;
			*) continue ;;
			esac
			[ "$stage" = "$owner" ] || echo "layout: $file uses $library, which belongs to $owner"
		done | grep . && bad=1
		grep -q 'SPDX-License-Identifier: GPL-3.0-or-later' "$file" || complain "$file lacks its licence line"
	done
	# Every public function carries the prefix of its stage's program.
	[ -f "include/foundleft/$stage.h" ] || [ "$stage" = cli ] || complain "include/foundleft/$stage.h is missing"
done
# Only the command line prints, exits, or reads clock, environment and locale.
for word in 'printf' 'fputs' 'exit' 'getenv' 'setlocale' 'gettimeofday' 'clock_gettime' 'localtime' 'localtime_r'; do
	grep -nE "(^|[^_a-zA-Z>.])$word *[(]" -r src --include='*.c' --include='*.h' | grep -v '^src/cli/' |
		grep -vE '^[^:]*:[0-9]+: *(\*|//|/\*)' | sed 's/^/layout: only src\/cli may do this: /' | grep . && bad=1
done
# The order of the table is the direction of dependency: a stage lists only stages above it.
seen=" "
while read -r stage others; do
	for other in $others; do
		case $seen in *" $other "*) ;; *) complain "$stage lists $other before it is defined: a circle or a wrong order" ;; esac
	done
	seen="$seen$stage "
done <"$table"
[ $bad = 0 ] && echo "layout: $(wc -l <"$table") stages keep to the table"
exit $bad
