#!/bin/sh
# A folder in which nothing can be written: one clear line and exit code 6; what only reads goes on working.
# SPDX-License-Identifier: GPL-3.0-or-later
set -eu
. "$(dirname "$0")/common.sh"
own_mounts && mounts=yes || mounts=no
shut=$work/shut
mkdir "$shut"
leave() {
	umount "$shut" 2>/dev/null || true
	chmod -R u+w "$work"
	rm -rf "$work"
}
trap leave EXIT
replay "$work" "$work/j.flj" >/dev/null
if [ "$mounts" = yes ]; then
	mount -t tmpfs -o size=2m shut "$shut"
	said="the place is read-only"
elif [ "$(id -u)" != 0 ]; then
	said="not permitted"
else
	echo "$name: root writes everywhere and no read-only disk can be mounted: nothing to try"
	exit 77
fi
cp "$work/j.flj" "$shut/j.flj"
certify "$work/j.flj" "$work/first.pdf" >/dev/null
cp "$work/j.flj" "$shut/issued.flj"
cp "$shut/j.flj" "$work/j.flj"
head -n 50 "$work/j.flj" >"$shut/open.flj"
if [ "$mounts" = yes ]; then mount -o remount,ro "$shut"; else chmod a-w "$shut" "$shut"/*; fi

expect 6 "$said" "$program" replay "$answers" --home "$work" --stock "$stock" --journal "$shut/new.flj"
expect 6 "$said" "$program" replay "$answers" --home "$shut" --stock "$stock"
expect 6 "$said" "$program" resume "$shut/open.flj" --home "$work" --stock "$stock"
expect 6 "$said" "$program" certify "$shut/j.flj" --stock "$stock" --number D-1 --date 2026-04-15
expect 6 "$said" "$program" certify "$shut/j.flj" --stock "$stock" --number D-1 --date 2026-04-15 --out "$shut/c.pdf"
"$program" assess "$shut/j.flj" >"$work/read" || fail "assess does not work in a read-only folder"
"$program" assess "$work/j.flj" | sed "s|$work/j.flj|$shut/j.flj|" | cmp -s - "$work/read" || fail "assess says something else there"
"$program" check "$shut/j.flj" "$shut/open.flj" >/dev/null || fail "check does not work in a read-only folder"
# What was issued can be had again without writing to its journal.
certify "$shut/issued.flj" "$work/c.pdf" >/dev/null || fail "no certificate beside a read-only journal"
[ "$(find "$shut" -type f | sort | tr '\n' ' ')" = "$shut/issued.flj $shut/j.flj $shut/open.flj " ] || fail "something was written"
echo "$name: replay, resume and certify refuse, assess and check read ($said)"
