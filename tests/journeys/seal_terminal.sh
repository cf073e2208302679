#!/bin/sh
# Passphrases typed on a real terminal: not shown, asked for twice for a new key, refused when too short or different, and
# the echo comes back after an interrupt. Arguments: source folder, program.
set -eu
. "$(dirname "$0")/seal_common.sh"
socket=foundleft-seal-$$
unset TMUX
trap 'tmux -L "$socket" kill-server 2>/dev/null || true; rm -rf "$work"' EXIT
screen() { tmux -L "$socket" capture-pane -p -J -S -200 -t t; }
wait_for() {
	tries=0
	until screen | grep -qF -- "$1"; do
		tries=$((tries + 1))
		[ $tries -lt 200 ] || { screen | grep -v '^$' | tail -20; fail "never saw: $1"; }
		sleep 0.05
	done
}
type_line() { tmux -L "$socket" send-keys -t t -l -- "$1"; tmux -L "$socket" send-keys -t t Enter; }
clear_screen() { type_line clear; sleep 0.2; tmux -L "$socket" clear-history -t t; }

replay_session s.flj
tmux -L "$socket" new-session -d -s t -x 110 -y 24 "cd '$work/desk' && PS1='desk> ' exec sh"
wait_for "desk>"
type_line "'$program' keys make ida --person 'Ida Fenwick' --self-signed"
wait_for "Passphrase of the key ida (new, not shown):"
type_line "short"
wait_for "Too short"
type_line "correct horse"
wait_for "The same again"
type_line "correct house"
wait_for "The two differ"
type_line "correct horse"
tries=0
until [ "$(screen | grep -c 'The same again')" -ge 2 ]; do tries=$((tries + 1)); [ $tries -lt 200 ] || fail "not asked again"; sleep 0.05; done
type_line "correct horse"
wait_for "certified by itself"
screen | grep -q "horse\|house\|short$" && fail "a passphrase is shown"

cp "$work/home/keys/ida.crt" "$work/home/trust/"
clear_screen
type_line "'$program' certify s.flj --stock '$stock' --number T-1 --signer ida"
wait_for "Passphrase of the key ida (not shown):"
type_line "wrong horse"
wait_for "the passphrase does not open"
clear_screen
# An interrupt while it asks: nothing is done, and the terminal shows again what is typed.
type_line "'$program' certify s.flj --stock '$stock' --number T-1 --signer ida"
wait_for "Passphrase of the key ida (not shown):"
tmux -L "$socket" send-keys -t t C-c
sleep 0.3
type_line "echo back again"
wait_for "echo back again"
[ "$(tail -n 1 s.flj | cut -f 3)" = close ] || fail "an interrupted signing issued a certificate"
clear_screen
type_line "'$program' certify s.flj --stock '$stock' --number T-1 --signer ida"
wait_for "Passphrase of the key ida (not shown):"
type_line "correct horse"
wait_for "signed as performed by Ida Fenwick"
screen | grep -q "horse" && fail "a passphrase is shown"
# Without a terminal and without a descriptor it is said how.
says 2 "give it with --passphrase-fd" setsid -w "$program" certify s.flj --stock "$stock" --number T-1 --signer ida
[ $bad = 0 ] && echo "seal_terminal: passphrases are asked for and never shown"
exit $bad
