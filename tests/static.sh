#!/bin/sh
# usage: sh tests/static.sh [C FILES..]
# gcc -fanalyzer with -Wall -Wextra and clang-tidy over src/; with files, over these. Prints the
# findings and their counts; exit 1 when there is one. .clang-tidy says which of its checks are on;
# of gcc's all but those below. Not over tests/: neither knows that an assertion of cmocka does not
# return, so that all that follows one is suspect to them; tests run under the sanitizers.
set -eu
flags="-std=c11 -D_GNU_SOURCE -DTACET_VERSION=\"0\" -Iinclude -Isrc"

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
    # shellcheck disable=SC2086
    nice clang-tidy --config-file=.clang-tidy --quiet "$3" -- $flags >"$out.tidy" 2>/dev/null ||
        echo "$3: error: clang-tidy ended with $?" >>"$out.tidy"
    exit 0
fi

cd "$(dirname "$0")/.."
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
if [ $# -gt 0 ]; then
    for file; do echo "$file"; done >"$work/files"
else
    find src -name '*.c' | sort >"$work/files"
    grep -q '^src/.*/' "$work/files"
fi
count() { cat "$1"/*."$2" | grep -cE ' (warning|error): ' || true; } # FOLDER TOOL

# both must see what is planted, or they look at nothing
mkdir "$work/planted" "$work/found"
cat >"$work/planted.c" <<'END'
#include <stdlib.h>
int planted(void);
int planted(void)
{
    int *p = malloc(sizeof *p), n;
    *p = n;
    return *p;
}
END
sh tests/static.sh --one "$work/planted" "$work/planted.c"
for tool in gcc tidy; do
    grep -q 'planted.c:6:.*warning' "$work/planted"/*.$tool || {
        echo "tests/static.sh: $tool does not see what is planted"
        exit 1
    }
done

xargs -P 2 -n 1 sh tests/static.sh --one "$work/found" <"$work/files"
cat "$work/found"/*.gcc "$work/found"/*.tidy
gcc=$(count "$work/found" gcc)
tidy=$(count "$work/found" tidy)
echo "$(wc -l <"$work/files") files; -fanalyzer $gcc, clang-tidy $tidy"
[ "$gcc" = 0 ] && [ "$tidy" = 0 ]
