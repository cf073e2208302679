#!/bin/sh
# A disk that becomes full: one clear line, exit code 6, every committed line kept, no half certificate; and with room
# again the work goes on. On a small disk of its own (tmpfs) where the system lets us mount one, and always with a limit
# on the size of a file.
# SPDX-License-Identifier: GPL-3.0-or-later
set -eu
. "$(dirname "$0")/common.sh"
own_mounts && mounts=yes || mounts=no
disk=$work/disk
mkdir "$disk"
leave() {
	umount "$disk" 2>/dev/null || true
	rm -rf "$work"
}
trap leave EXIT

replay "$work" "$work/whole.flj" >/dev/null
certify "$work/whole.flj" "$work/whole.pdf" >/dev/null
size=$(wc -c <"$work/whole.flj")

# The journal is a beginning of the whole, ends with a whole line, and its chain fits.
kept() { # JOURNAL LEAST-LINES
	lines=$(wc -l <"$1")
	[ "$lines" -ge "$2" ] || fail "only $lines lines were kept"
	head -n "$lines" "$work/whole.flj" | cmp -s - "$1" || fail "what was kept is not the beginning of the session"
	"$program" check "$1" | grep -q "$lines lines, every digest fits, still open" || fail "check refuses what was kept"
}

# Limits in blocks of 512 bytes. Without the signal a write beyond the limit fails with EFBIG.
for blocks in 24 61 130; do
	rm -f "$work/limited.flj"
	expect 6 "limited.flj" sh -c 'trap "" XFSZ; ulimit -f "$1"; shift; exec "$@"' sh "$blocks" \
		"$program" replay "$answers" --home "$work" --stock "$stock" --journal "$work/limited.flj"
	kept "$work/limited.flj" 5
done
expect 6 "limited.pdf" sh -c 'trap "" XFSZ; ulimit -f 12; exec "$@"' sh \
	"$program" certify "$work/whole.flj" --stock "$stock" --number D-1 --date 2026-04-15 --out "$work/limited.pdf"
[ "$(find "$work" -name 'limited.pdf*' | wc -l)" = 0 ] || fail "a half certificate was left"

[ "$mounts" = yes ] || {
	echo "$name: this system lets us mount no small disk; only the limit on a file's size was tried"
	exit 0
}
for pages in 4 9 14; do
	mount -t tmpfs -o "size=$((pages * 4))k" small "$disk"
	expect 6 "the disk is full" "$program" replay "$answers" --home "$work" --stock "$stock" --journal "$disk/j.flj"
	grep -q "The session stays open" "$work/out" || fail "it is not said that the session stays"
	kept "$disk/j.flj" 3
	[ "$(wc -c <"$disk/j.flj")" -ge $((pages * 4096 - 4096)) ] || fail "lines that had room are missing"
	mount -o remount,size=2m "$disk"
	printf 'stop\n' | "$program" resume "$disk/j.flj" --home "$work" --stock "$stock" >/dev/null || fail "no going on"
	umount "$disk"
done

# Room for the journal and a part of the certificate.
mount -t tmpfs -o "size=$((size / 1024 + 16))k" small "$disk"
cp "$work/whole.flj" "$disk/j.flj"
expect 6 "the disk is full" "$program" certify "$disk/j.flj" --stock "$stock" --number D-1 --date 2026-04-15 --out "$disk/c.pdf"
[ "$(find "$disk" -type f)" = "$disk/j.flj" ] || fail "something was left: $(find "$disk" -type f)"
cmp -s "$disk/j.flj" "$work/whole.flj" || fail "certify changed the journal"
mount -o remount,size=2m "$disk"
certify "$disk/j.flj" "$disk/c.pdf" >/dev/null || fail "no certificate with room again"
# The journal's name stands on the page, so the bytes differ; the whole page is there.
tail -c 6 "$disk/c.pdf" | grep -q EOF || fail "the certificate has no end"
echo "$name: limits and small disks, replay and certify"
