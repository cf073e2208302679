#!/bin/sh
# Every C file stands as clang-format writes it.
set -eu
cd "${1:?the source folder}"
find src include tests -name '*.[ch]' -print0 | xargs -0 clang-format --dry-run --Werror
echo "format: every file stands as clang-format writes it"
