#!/bin/sh
# usage: sh tests/installed.sh PREFIX   what `meson install` left there serves a stranger's program
set -eu
prefix=$1
library=$(find "$prefix" -name 'libtacet.so.*.*.*')
config=$(dirname "$(find "$prefix" -name tacet.pc)")
foreign=$(nm -D --defined-only "$library" | awk '{ print $3 }' | grep -v '^tacet_' || true)
[ -z "$foreign" ] || { echo "libtacet exports other names: $foreign"; exit 1; }
cat >"$prefix/stranger.c" <<'C'
#include <stdio.h>
#include <tacet/choose.h>
int main(void)
{
    tacet_pattern p;
    tacet_error e;
    if (tacet_pattern_parse("x..x.x", &p, &e) != TACET_OK) return 1;
    return tacet_pattern_fires(&p) == 3 ? 0 : 1;
}
C
# shellcheck disable=SC2046 # flags are words
gcc -std=c11 -Wall -Wextra -Werror "$prefix/stranger.c" -o "$prefix/stranger" \
    $(PKG_CONFIG_PATH="$config" pkg-config --cflags --libs tacet)
LD_LIBRARY_PATH=$(dirname "$library") "$prefix/stranger"
man=$(find "$prefix" -name tacet.1)
[ -s "$man" ] || { echo "no man page was installed"; exit 1; }
"$prefix/bin/tacet" --version >/dev/null
