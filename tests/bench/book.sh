#!/bin/sh
# Measures the record book at 10^3, 10^4 and 10^5 records (with --million also 10^6: about 15 GB of disk and half an
# hour). usage: book.sh BUILD-FOLDER [--million] [FOLDER FOR THE BOOKS]
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
