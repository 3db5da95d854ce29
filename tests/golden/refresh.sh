#!/bin/sh
# usage: sh tests/golden/refresh.sh [REASON]   writes the golden values anew, by hand only
# Refuses while a published, closed-form or cross test fails, and without a reason of a few words,
# which is appended to CHANGES. To add a condition, write its line into a .rows file first; a new
# column first needs a line in `tolerance`.
set -eu
cd "$(dirname "$0")/../.."
here=tests/golden
sh tests/setup.sh test
[ -f build/build.ninja ] || meson setup build >/dev/null
meson configure build -Dtests=true
ninja -C build --quiet

stop() {
    echo "refresh.sh: $*; nothing was written" >&2
    exit 1
}
differ=no
for name in forwarder brush-truck; do
    build/tests/golden/golden check $here patterns/$name.yaml $name || differ=yes
done
[ $differ = yes ] || sh $here/kept.sh $here || differ=yes
[ $differ = yes ] || stop "every value is as kept"

meson test -C build --no-rebuild --suite quick --suite cross -t 6 --print-errorlogs ||
    stop "published and cross tests come first: golden values keep what those have shown"

reason=${1-}
if [ -z "$reason" ] && [ -t 0 ]; then
    printf 'Why do the values change? ' >&2
    read -r reason
fi
# shellcheck disable=SC2086 # split into words to count them
set -- $reason
[ $# -ge 3 ] || stop "give the reason in a line of three words or more"

for name in forwarder brush-truck; do
    build/tests/golden/golden write $here patterns/$name.yaml $name
    build/tests/golden/golden check $here patterns/$name.yaml $name ||
        stop "the new values of $name do not stand; mend that, or take the old ones from git"
done
{
    printf '%s %s\n' "$(date -u +%F)" "$*"
    (cd $here && cksum -- *.rows *.screen | awk '{ print "    " $3, $1 }')
} >>$here/CHANGES
echo "written; look at 'git diff --stat $here' and commit it with the change"
