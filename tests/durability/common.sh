# common.sh - what the scripts of this folder share. Sourced with the script's arguments: source folder, program.
# SPDX-License-Identifier: GPL-3.0-or-later
root=${1:?source folder}
program=${2:?program}
name=$(basename "$0" .sh)
stock=$root/sample-sessions/stock
answers=$root/sample-sessions/adjusted/answers
export TZ=UTC LC_ALL=C.UTF-8
work=$(mktemp -d)

fail() {
	echo "$name: $1" >&2
	exit 1
}

# expect CODE TEXT COMMAND...: its exit code, and one line on standard error that holds TEXT.
expect() {
	want=$1 text=$2
	shift 2
	code=0
	"$@" >"$work/out" 2>"$work/err" || code=$?
	[ "$code" = "$want" ] || fail "exit code $code, want $want: $* ($(cat "$work/err"))"
	[ "$(wc -l <"$work/err")" = 1 ] || fail "not one line on standard error: $(cat "$work/err")"
	grep -q -e "$text" "$work/err" || fail "\"$text\" is not said: $(cat "$work/err")"
}

replay() { # HOME JOURNAL
	"$program" replay "$answers" --home "$1" --stock "$stock" --journal "$2"
}

certify() { # JOURNAL PDF
	"$program" certify "$1" --stock "$stock" --number D-1 --date 2026-04-15 --out "$2"
}

# Where a test needs a disk of its own: runs the script again as root of a new mount namespace, or says that it can't.
own_mounts() {
	[ "${DURABILITY_MOUNTS:-}" = yes ] && return 0
	unshare --mount --map-root-user true 2>/dev/null || unshare --mount true 2>/dev/null || return 1
	flags=--mount
	[ "$(id -u)" = 0 ] || flags="--mount --map-root-user"
	rm -rf "$work"
	# shellcheck disable=SC2086
	DURABILITY_MOUNTS=yes exec unshare $flags sh "$0" "$root" "$program"
}
