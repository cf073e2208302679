#!/bin/sh
# cmake --install puts binary, manual page, completion, templates and faces in place, and the installed program finds
# them there; CPack makes a .deb that names its libraries. Arguments: build folder.
set -eu
build=${1:?build folder}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
fail() { echo "install: $*"; exit 1; }
cmake --install "$build" --prefix "$work/prefix" >"$work/log" 2>&1 || { cat "$work/log"; fail "cmake --install stops"; }
for file in bin/foundleft share/man/man1/foundleft.1 share/bash-completion/completions/foundleft \
	share/foundleft/templates/workshop-calibration.yaml share/foundleft/templates/shipboard-check.yaml \
	share/foundleft/templates/transmitter-alone.yaml share/foundleft/faces/regular.ttf share/foundleft/faces/srgb.icc; do
	[ -s "$work/prefix/$file" ] || fail "$file is not there"
done
FOUNDLEFT_HOME=$work/home "$work/prefix/bin/foundleft" list procedures >"$work/list"
grep -q '^  workshop-calibration ' "$work/list" || fail "the installed program does not find its templates"
(cd "$build" && cpack -G DEB -B "$work/deb" >"$work/log" 2>&1) || { cat "$work/log"; fail "cpack stops"; }
deb=$(ls "$work"/deb/*.deb)
dpkg-deb -c "$deb" >"$work/contents"
for file in bin/foundleft man/man1/foundleft.1 completions/foundleft templates/workshop-calibration.yaml faces/regular.ttf; do
	grep -q "$file" "$work/contents" || fail "the package lacks $file"
done
dpkg-deb -f "$deb" Depends | grep -q libgsl || fail "the package does not name its libraries"
dpkg-deb -f "$deb" Depends | grep -q libhpdf || fail "the package does not name libharu"
echo "install: in place, and packed as $(basename "$deb")"
