#!/bin/sh
# usage: sh patterns/demo.sh   installs what is missing, builds in ./build, screens both demo studies
set -eu
cd "$(dirname "$0")/.."
sh tests/setup.sh build
[ -f build/build.ninja ] || meson setup build -Dtests=false >/dev/null
ninja -C build --quiet
for study in forwarder brush-truck; do
    echo
    echo "== patterns/$study.yaml"
    build/tacet screen patterns/$study.yaml -o "$study-screen"
done
cat <<'TEXT'

Look first at the drawing map.svg in forwarder-screen/ and brush-truck-screen/: density over speed, worst
margin, what limits, the recommended densities outlined. Then summary.csv; every condition is in levels.csv.
TEXT
