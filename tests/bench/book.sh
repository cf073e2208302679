#!/bin/sh
# Measures the record book at 10^3, 10^4 and 10^5 records (with --million also 10^6: about 15 GB of disk and half an
# hour), and recomputing every record at 10^3 and 10^4. usage: book.sh BUILD-FOLDER [--million] [FOLDER FOR THE BOOKS]
# SPDX-License-Identifier: GPL-3.0-or-later
set -eu
here=$(cd "$(dirname "$0")" && pwd)
root=$(cd "$here/../.." && pwd)
build=${1:?the folder of a finished build}
shift
sizes="1000 10000 100000"
[ "${1:-}" = --million ] && { sizes="$sizes 1000000"; shift; }
folder=$(mktemp -d "${1:-${TMPDIR:-/tmp}}/foundleft-book.XXXXXX")
trap 'rm -rf "$folder"' EXIT
cc -std=c17 -O2 -D_GNU_SOURCE -Wall -Wextra -I"$root/include" -I"$root/src/store" "$here/book.c" \
	"$build/libfoundleft_store.a" "$build/libfoundleft_seal.a" "$build/libfoundleft_base.a" \
	-lsqlite3 -lz -lcrypto -lm -o "$folder/book"
for size in $sizes; do
	"$folder/book" "$folder" "$size" "$root/templates/shipboard-check.yaml"
	rm -f "$folder"/book-*
done

# A three-cycle session of shipboard size, from the invented readings: three oils, one reading at each point, left alone.
sed 's/^id: .*/id: three-cycles/; s/^cycles: 1$/cycles: 3/' "$root/templates/shipboard-check.yaml" >"$folder/three-cycles.yaml"
awk -F, 'NR == 1 || ($6 == 1 && $7 ~ /^(ZERO|LK-2|LK-20|LK-50)$/)' "$root/tests/analysis/data/asfound_2026.csv" >"$folder/three.csv"
"$build/foundleft" import "$folder/three.csv" --home "$folder" --stock "$root/sample-sessions/stock" \
	--journal "$folder/three.flj" --procedure "$folder/three-cycles.yaml" --instrument VT-1 \
	--performed-by "Ida Fenwick (invented)" --as-found S26F >/dev/null
libraries=
for stage in keep cause analysis reference trend store journal stock procedure document physics numeric seal base; do
	libraries="$libraries $build/libfoundleft_$stage.a"
done
# shellcheck disable=SC2086
cc -std=c17 -O2 -D_GNU_SOURCE -Wall -Wextra -I"$root/include" -I"$root/src/store" "$here/recompute.c" -o "$folder/recompute" \
	-Wl,--start-group $libraries -Wl,--end-group -lgsl -lgslcblas -lsqlite3 -lz -lcrypto -lyaml -lpthread -lm
for size in 1000 10000; do
	"$folder/recompute" "$folder" "$size" "$folder/three.flj"
	rm -f "$folder"/recompute-*
done
