#!/bin/sh
# The table of commands, the manual page and the shell completion say the same.
set -eu
root=${1:?source folder}
program=${2:?the program}
bad=0
commands=$("$program" help | sed -n 's/^  \([a-z]*\) .*/\1/p')
[ "$(echo "$commands" | wc -w)" -ge 8 ] || { echo "manual: help lists too few commands"; exit 1; }
for command in $commands; do
	grep -q "^\.It Cm $command" "$root/src/cli/foundleft.1" || { echo "manual: foundleft.1 lacks the command $command"; bad=1; }
	grep -o 'compgen -W "begin [^"]*"' "$root/src/cli/completion.bash" | grep -qw -- "$command" || { echo "manual: the completion lacks $command"; bad=1; }
	case $command in help | version) continue ;; esac
	for option in $("$program" help "$command" | sed -n 's/^  \(--[a-z-]*\).*/\1/p'); do
		grep -q "Fl $(echo "$option" | sed 's/^-//')\b" "$root/src/cli/foundleft.1" ||
			{ echo "manual: foundleft.1 lacks $option of $command"; bad=1; }
	done
done
mandoc -Tlint -Wwarning "$root/src/cli/foundleft.1" || bad=1
bash -n "$root/src/cli/completion.bash" || bad=1
[ $bad = 0 ] && echo "manual: commands, options, manual page and completion agree"
exit $bad
