#!/bin/sh
# tests/bench/monte_carlo.sh PROGRAM [TRIALS] - the trials of a run beside numpy doing the same, in one go.
# SPDX-License-Identifier: GPL-3.0-or-later
#
# To reach: 5 times as fast as numpy in its best chunk size on one core, 1.8 times more on two, within 1.5 times of the
# time that drawing the same numbers alone takes, and memory that does not grow with the trials. Needs a quiet machine
# with two cores and numpy. Fails where one of these is missed or the two don't find the same.
set -eu
program=${1:?the program bench_monte_carlo}
trials=${2:-1000000}
here=$(dirname "$0")
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
# numpy's matrix products on one thread, with the kernel that suits the processor.
env -u OPENBLAS_CORETYPE -u OPENBLAS_L2_SIZE OPENBLAS_NUM_THREADS=1 OMP_NUM_THREADS=1 \
	taskset -c 0 /usr/bin/python3 "$here/monte_carlo.py" "$trials" 2 >"$work/numpy"
taskset -c 0 "$program" "$trials" 1 15 >"$work/one"
# Two threads need both cores at once: the best of many, should another program want one now and then.
"$program" "$trials" 2 40 >"$work/two"
"$program" $((trials * 10)) 1 1 >"$work/ten"
grep chunk "$work/numpy"
awk -v work="$work" '
function read_file(name,   line, part) {
	while ((getline line < (work "/" name)) > 0) {
		split(line, part, " ")
		if (part[1] == "output") { mean[name, part[2]] = part[3]; u[name, part[2]] = part[4]; outputs = part[2] + 1 }
		else value[name, part[1]] = part[2]
	}
}
function judge(what, got, sign, want) {
	fine = sign == ">=" ? got >= want : got <= want
	printf "%-46s %8.3f  (%s %s) %s\n", what, got, sign, want, fine ? "reached" : "MISSED"
	missed += !fine
}
BEGIN {
	read_file("numpy"); read_file("one"); read_file("two"); read_file("ten")
	printf "numpy, best chunk, one core              %10.3f s, %7d kB\n", value["numpy", "trials"], value["numpy", "memory_kb"]
	printf "foundleft, one core                      %10.3f s, %7d kB\n", value["one", "trials"], value["one", "memory_kb"]
	printf "foundleft, two threads                   %10.3f s, %7d kB\n", value["two", "trials"], value["two", "memory_kb"]
	printf "drawing the same numbers alone           %10.3f s\n", value["one", "drawing"]
	printf "foundleft, one core, ten times the trials%10.3f s, %7d kB\n", value["ten", "trials"], value["ten", "memory_kb"]
	judge("times as fast as numpy", value["numpy", "trials"] / value["one", "trials"], ">=", 5)
	judge("times as fast on two threads as on one", value["one", "trials"] / value["two", "trials"], ">=", 1.8)
	judge("times as long as drawing alone", value["one", "trials"] / value["one", "drawing"], "<=", 1.5)
	judge("memory for ten times the trials, ratio", value["ten", "memory_kb"] / value["one", "memory_kb"], "<=", 1.05)
	for (j = 0; j < outputs; j++) {
		d = mean["numpy", j] - mean["one", j]
		z = (d < 0 ? -d : d) / u["one", j]
		largest = z > largest ? z : largest
		r = u["numpy", j] / u["one", j] - 1
		r = r < 0 ? -r : r
		apart = r > apart ? r : apart
		differ += mean["one", j] != mean["two", j] || u["one", j] != u["two", j]
	}
	judge("largest difference of a mean from numpy, in u", largest, "<=", 0.008)
	judge("largest relative difference of a u from numpy", apart, "<=", 0.008)
	judge("outputs that depend on the number of threads", differ, "<=", 0)
	exit missed > 0
}'
