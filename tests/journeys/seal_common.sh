# seal_common.sh - what the journeys of the seal share: a session, an authority, keys of invented people. Sourced with
# the script's arguments: source folder, program.
# SPDX-License-Identifier: GPL-3.0-or-later
root=${1:?source folder}
program=${2:?program}
name=$(basename "$0" .sh)
samples=$root/sample-sessions
stock=$samples/stock
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export TZ=UTC LC_ALL=C.UTF-8 FOUNDLEFT_HOME=$work/home
unset http_proxy no_proxy
mkdir -p "$work/home/trust" "$work/desk"
cd "$work/desk"
printf 'correct horse\n' >"$work/pass"
bad=0
complain() { echo "$name: $*"; bad=1; }
fail() { echo "$name: $*"; exit 1; }

# says CODE TEXT COMMAND...: its exit code, and TEXT somewhere in what it says.
says() {
	want=$1 text=$2
	shift 2
	code=0
	"$@" >"$work/said" 2>&1 3<"$work/pass" || code=$?
	[ "$code" = "$want" ] || { cat "$work/said"; complain "exit code $code, want $want: $*"; return 0; }
	tr -s ' \n' '  ' <"$work/said" | grep -qF -e "$text" || { cat "$work/said"; complain "\"$text\" is not said: $*"; }
}

foundleft() { "$program" "$@"; }
signed() { "$program" "$@" --passphrase-fd 3 3<"$work/pass"; } # any command that asks for a passphrase

make_authority() { # NAME: NAME.key, NAME.pem
	openssl req -x509 -newkey ec -pkeyopt ec_paramgen_curve:P-256 -nodes -keyout "$1.key" -out "$1.pem" -days 3650 \
		-subj "/O=Lanternmoor Certification (invented)/CN=$1" -addext "keyUsage=critical,keyCertSign,cRLSign" 2>/dev/null
}
issue() { # REQUEST AUTHORITY OUT DAYS: what an authority does
	openssl x509 -req -in "$1" -CA "$2.pem" -CAkey "$2.key" -CAcreateserial -days "$4" -copy_extensions copy -out "$3" 2>/dev/null
}
certified() { # ID PERSON AUTHORITY OPTION...: a key with a certificate of the authority
	id=$1 person=$2 authority=$3
	shift 3
	signed keys make "$id" --person "$person" --organisation "Tallmere Yard (invented)" --request "$@" >"$id.csr" 2>/dev/null
	issue "$id.csr" "$authority" "$id.issued.pem" 900
	signed keys take "$id" "$id.issued.pem" >/dev/null
}
replay_session() { # JOURNAL
	foundleft replay "$samples/adjusted/answers" --stock "$stock" --journal "$1" >/dev/null
}

# A preloaded library that shifts the clock by CLOCK_SHIFT seconds: for what happens years later, or by a wrong clock.
make_clock() {
	cat >clock.c <<'C'
#define _GNU_SOURCE
#include <stdlib.h>
#include <sys/time.h>
#include <time.h>
time_t time(time_t *out) {
	struct timeval now;
	gettimeofday(&now, NULL);
	const char *shift = getenv("CLOCK_SHIFT");
	time_t at = now.tv_sec + (shift ? atoll(shift) : 0);
	if (out)
		*out = at;
	return at;
}
C
	cc -shared -fPIC -O1 clock.c -o clock.so
}
shifted() { # SECONDS COMMAND...
	shift_s=$1
	shift
	env LD_PRELOAD="$work/desk/clock.so" CLOCK_SHIFT="$shift_s" \
		ASAN_OPTIONS="verify_asan_link_order=0:${ASAN_OPTIONS:-}" "$@"
}
