#!/bin/sh
# usage: sh tests/coverage.sh [FOLDER]   what quick, cross and cli tests run of src/
# Builds in FOLDER (build-coverage, removed afterwards; a given one is kept), prints lines and
# branches a room, then each stretch that no test runs and that tests/uncovered gives no reason
# for. Fails when such a stretch is a whole function.
set -eu
cd "$(dirname "$0")/.."
sh tests/setup.sh test
build=${1-build-coverage}
[ $# -gt 0 ] || trap 'rm -rf build-coverage' EXIT
[ -f "$build/build.ninja" ] || meson setup "$build" -Db_coverage=true -Doptimization=1 >/dev/null
ninja -C "$build" --quiet
find "$build" -name '*.gcda' -delete
# tests run as nobody count too: what one user wrote, another adds to
umask 0
chmod -R a+rwX "$build"
meson test -C "$build" --no-rebuild --suite quick --suite cross --suite cli -t 6 --print-errorlogs \
    >"$build/coverage.log" || {
    cat "$build/coverage.log"
    exit 1
}
gcovr "$build" --root . --filter src/ --csv | awk -F, '
    function row(name) {
        printf "%-10s %6d lines %5.1f %%  %6d branches %5.1f %%\n", name, lines[name],
            100 * ran[name] / lines[name], branches[name], 100 * taken[name] / branches[name]
    }
    NR == 1 { for (i = 1; i <= NF; i++) at[$i] = i; next }
    {
        split($1, part, "/")
        for (k = 1; k <= 2; k++) {
            name = k == 1 ? part[2] : "in all"
            if (!(name in lines)) order[++n] = name
            lines[name] += $at["line_total"]; ran[name] += $at["line_covered"]
            branches[name] += $at["branch_total"]; taken[name] += $at["branch_covered"]
        }
    }
    END { for (i = 1; i <= n; i++) if (order[i] != "in all") row(order[i]); row("in all") }'
root=$PWD
cd "$build"
find . -name '*.gcda' \( -path '*src_*' -o -path './src/*' \) | LC_ALL=C sort |
    xargs -n 1 gcov -b -t 2>/dev/null |
    awk -f "$root/tests/uncovered.awk" "$root/tests/uncovered" -
