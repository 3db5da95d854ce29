#!/bin/sh
# usage: sh tests/setup.sh build|test
# Installs what is missing of tests/packages.txt (root, or sudo).
set -eu
here=$(dirname "$0")
wanted=$(awk -v all="$1" '/^#/ || NF < 2 { next } all == "test" || $2 == "build" { print $1 }' \
    "$here/packages.txt")
missing=
for name in $wanted; do
    state=$(dpkg-query -W -f '${Status}' "$name" 2>/dev/null || true)
    [ "$state" = "install ok installed" ] || missing="$missing $name"
done
[ -n "$missing" ] || exit 0
command -v apt-get >/dev/null || {
    echo "tests/setup.sh: these packages are missing, and there is no apt-get:$missing" >&2
    exit 1
}
root=
if [ "$(id -u)" != 0 ]; then
    command -v sudo >/dev/null || {
        echo "tests/setup.sh: run as root, or install sudo; missing:$missing" >&2
        exit 1
    }
    root=sudo
fi
echo "installing:$missing" >&2
$root apt-get update -qq
# shellcheck disable=SC2086 # one word a package
$root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends $missing \
    >/dev/null
