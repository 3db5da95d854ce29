#!/bin/sh
# usage: sh tests/run.sh [what meson test takes]
# Installs what is missing, builds in ./build, runs every test.
# Prints the ten slowest tests; last line: N passed, N failed (test programs)
set -eu
cd "$(dirname "$0")/.."
sh tests/setup.sh test
if [ -f build/build.ninja ]; then
    meson configure build -Dtests=true # patterns/demo.sh builds without
else
    meson setup build >build-setup.log 2>&1 || {
        cat build-setup.log
        exit 1
    }
    rm -f build-setup.log
fi
ninja -C build --quiet
rm -f build/meson-logs/testlog.json
status=0
meson test -C build --no-rebuild --print-errorlogs "$@" || status=$?
# one JSON object a test; a test that never ran is no pass
log=build/meson-logs/testlog.json
[ -f "$log" ] || { echo "tests/run.sh: no test ran" >&2; : >"$log"; status=1; }
passed=$(grep -c '"result": "OK"' "$log" || true)
failed=$(grep -vc '"result": "OK"' "$log" || true)
[ "$passed" -gt 0 ] || status=1
echo "the ten slowest tests, s:"
awk -f tests/slowest.awk "$log" | sort -rn | sed 10q
echo "$passed passed, $failed failed"
exit "$status"
