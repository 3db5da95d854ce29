#!/bin/sh
# usage: sh tests/run.sh   installs what is missing, builds in ./build, runs every test
# last line: N passed, N failed
set -eu
cd "$(dirname "$0")/.."
sh tests/setup.sh test
[ -f build/build.ninja ] || meson setup build >build-setup.log 2>&1 || {
    cat build-setup.log
    exit 1
}
rm -f build-setup.log
ninja -C build --quiet || exit 1
status=0
meson test -C build --no-rebuild --print-errorlogs "$@" || status=$?
# meson writes one JSON object a test; a test that never ran is no pass
passed=$(grep -c '"result": "OK"' build/meson-logs/testlog.json || true)
failed=$(grep -vc '"result": "OK"' build/meson-logs/testlog.json || true)
[ "$passed" -gt 0 ] || status=1
echo "$passed passed, $failed failed"
exit $status
