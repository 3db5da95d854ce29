#!/bin/sh
# usage: sh tests/static.sh [C FILES..]
# gcc -fanalyzer with -Wall -Wextra over src/ and tests/, clang-tidy over src/; with files, over
# these. Prints the findings and their counts; exit 1 when there is one. .clang-tidy says which of
# its checks are on; of gcc's all but those below.
set -eu
flags="-std=c11 -D_GNU_SOURCE -DTACET_VERSION=\"0\" -Iinclude -Isrc -Itests/support"

# Of -fanalyzer is off, by file:
without()
{
    case $1 in
    # loses sight of a copied text as soon as it lies in a list at a computed place; what is freed
    # is counted by tests/study/test_memory.c and the sanitizers
    src/base/problems.c | src/study/fill*.c) echo -Wno-analyzer-malloc-leak ;;
    esac
}

# one process a file: this clang-tidy loses track of va_list from the second file on
if [ "${1:-}" = --one ]; then # WORK FILE, in the project's root
    out=$2/$(echo "$3" | tr / _)
    # shellcheck disable=SC2086 # one word a flag
    nice gcc -O2 -Wall -Wextra -fanalyzer $(without "$3") $flags -c -o /dev/null "$3" \
        >"$out.gcc" 2>&1 ||
        echo "$3: error: gcc ended with $?" >>"$out.gcc"
    case $3 in
    src/*)
        # shellcheck disable=SC2086
        nice clang-tidy --quiet "$3" -- $flags >"$out.tidy" 2>/dev/null ||
            echo "$3: error: clang-tidy ended with $?" >>"$out.tidy"
        ;;
    esac
    exit 0
fi

cd "$(dirname "$0")/.."
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
if [ $# -gt 0 ]; then
    for file; do echo "$file"; done >"$work/files"
else
    find src tests -name '*.c' | sort >"$work/files"
    grep -q '^src/.*/' "$work/files"
fi
xargs -P 2 -n 1 sh tests/static.sh --one "$work" <"$work/files"
count() { cat "$work"/*."$1" | grep -cE ' (warning|error): ' || true; }
cat "$work"/*.gcc "$work"/*.tidy
gcc=$(count gcc)
tidy=$(count tidy)
echo "$(wc -l <"$work/files") files; -fanalyzer $gcc, clang-tidy $tidy"
[ "$gcc" = 0 ] && [ "$tidy" = 0 ]
