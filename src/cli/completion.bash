# bash completion for foundleft; asks the program itself for each command's options.
# SPDX-License-Identifier: GPL-3.0-or-later
_foundleft() {
	local word=${COMP_WORDS[COMP_CWORD]} previous=${COMP_WORDS[COMP_CWORD - 1]} command=${COMP_WORDS[1]}
	COMPREPLY=()
	if [ "$COMP_CWORD" -eq 1 ]; then
		mapfile -t COMPREPLY < <(compgen -W "begin resume replay import assess certify countersign keys check history due lookback book stock report pack list help version" -- "$word")
		return
	fi
	case $previous in
	--procedure)
		mapfile -t COMPREPLY < <(compgen -W "$(foundleft list procedures 2>/dev/null | awk 'NR > 1 { print $1 }')" -- "$word")
		return
		;;
	--signer)
		mapfile -t COMPREPLY < <(compgen -W "$(foundleft keys list 2>/dev/null | grep -o '^[^ ]*$')" -- "$word")
		return
		;;
	--as)
		mapfile -t COMPREPLY < <(compgen -W "performed reviewed authorised" -- "$word")
		return
		;;
	--home | --stock)
		mapfile -t COMPREPLY < <(compgen -d -- "$word")
		return
		;;
	help)
		mapfile -t COMPREPLY < <(compgen -W "begin resume replay import assess certify countersign keys check history due lookback book stock report pack list" -- "$word")
		return
		;;
	esac
	case $word in
	-*)
		mapfile -t COMPREPLY < <(compgen -W "$(foundleft help "$command" 2>/dev/null | grep -o -- '--[a-z-]*' | sort -u)" -- "$word")
		;;
	*)
		case $command in
		resume | assess | certify)
			mapfile -t COMPREPLY < <(compgen -W "$(foundleft list sessions 2>/dev/null | awk 'NR > 1 { print $1 }')" -- "$word")
			;;
		keys)
			[ "$COMP_CWORD" -eq 2 ] && mapfile -t COMPREPLY < <(compgen -W "make take import list show" -- "$word")
			;;
		history | lookback | report)
			[ "$COMP_CWORD" -eq 2 ] && mapfile -t COMPREPLY < <(compgen -W "$(foundleft due --json 2>/dev/null | grep -o '"tag":"[^"]*"' | cut -d'"' -f4)" -- "$word")
			;;
		book)
			[ "$COMP_CWORD" -eq 2 ] && mapfile -t COMPREPLY < <(compgen -W "found add check backup restore export bundle take trace numbers" -- "$word")
			;;
		stock)
			[ "$COMP_CWORD" -eq 2 ] && mapfile -t COMPREPLY < <(compgen -W "add renew replay list check import export health" -- "$word")
			[ "$COMP_CWORD" -eq 3 ] && [ "$previous" = add ] && mapfile -t COMPREPLY < <(compgen -W "oil equipment instrument" -- "$word")
			;;
		list)
			mapfile -t COMPREPLY < <(compgen -W "procedures stock sessions" -- "$word")
			;;
		esac
		[ ${#COMPREPLY[@]} -gt 0 ] || mapfile -t COMPREPLY < <(compgen -f -- "$word")
		;;
	esac
}
complete -F _foundleft foundleft
