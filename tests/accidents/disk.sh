#!/bin/sh
# usage: sh disk.sh TACET
# The n-th write, open, fsync, rename of a run fails as on a full disk; then a file system is really
# full (as root, where mounting is allowed). The run must
#   end with exit code 4, name the file (or standard output) and the reason;
#   leave whole files only, no *.tmp, no empty folder.
# EVERY=1: every call; otherwise in steps. Skipped (77) where processes may not be traced.
. "$(dirname "$0")/help.sh"
strace -qq -o /dev/null true 2>/dev/null || { echo "processes may not be traced here"; exit 77; }

tacet screen small.yaml -o whole >out 2>err || complain "the whole run ends with $?"
tacet point small.yaml --density 1/2 --speed 1500 -o point-whole >out 2>err ||
    complain "the point ends with $?"

look_at() # WHAT CODE WHOLE: the run's folder `result`, words in `err`
{
    reason='No space left on device'
    if [ "$2" = 0 ]; then
        grep -q "$reason" err && complain "$1: ends with 0 and says: $(grep "$reason" err)"
    elif [ "$2" = 4 ]; then
        grep -q "^tacet: cannot [a-z ]*\(result\|standard output\|small\|own\).*$reason" err ||
            complain "$1: no word about file and reason: $(cat err)"
    else
        complain "$1: ends with $2: $(head -2 err)"
    fi
    [ ! -d result ] || for file in result/*; do
        [ -f "$file" ] || { complain "$1: leaves an empty folder"; break; }
        cmp -s "$file" "$3/${file##*/}" || complain "$1: leaves $file"
    done
    rm -rf result
}

paths="-P $PWD/out"
for name in summary.txt runs.csv summary.csv ranking.csv no-go.csv agreement.csv levels.csv \
    lines.csv screen.json point.json map.gnuplot orders.gnuplot bars.gnuplot repeat.gnuplot; do
    paths="$paths -P $PWD/result/$name.tmp"
done

# The n-th of each kind of call fails, from the first on in steps, until a run does not get as far.
fail_each() # STEP WHOLE "CALLS" ARGUMENTS..
{
    step=$1 whole=$2 calls=$3
    [ -z "${EVERY:-}" ] || step=1
    shift 3
    for call in $calls; do
        n=1 count=0 only='' on=''
        # a disk that is full stays so; not for standard error
        [ "$call" != write ] || only=$paths on=+
        while :; do
            # shellcheck disable=SC2086 # options or none
            strace -qq -o trace $only -e trace="$call" \
                -e inject="$call:error=ENOSPC:when=$n$on" "$TACET" "$@" >out 2>err </dev/null
            code=$?
            grep -q INJECTED trace || break
            # opening for reading is no matter of room
            grep INJECTED trace | grep -q O_RDONLY ||
                look_at "$call $n of $*: $(grep -m1 INJECTED trace | cut -c1-60)" "$code" "$whole"
            count=$((count + 1))
            n=$((n + step))
        done
        rm -rf result
        echo "$count calls of $call failed in: $*"
    done
}

fail_each 4 whole "fsync renameat mkdir" screen small.yaml -o result --drawings svg
fail_each 8 whole "write openat" screen small.yaml -o result --drawings svg
fail_each 4 point-whole "write fsync renameat" point small.yaml --density 1/2 --speed 1500 -o result
fail_each 1 whole write keys --json
fail_each 1 whole write example

# a file system of so many pages that is really full, with drawings and all
if [ "$(id -u)" = 0 ] && mkdir tight && mount -t tmpfs -o size=4k none tight 2>/dev/null; then
    umount tight
    for pages in 1 3 8 20 40 80; do
        mount -t tmpfs -o size=$((pages * 4))k none tight
        tacet screen small.yaml -o tight/result --drawings svg >out 2>err
        code=$?
        sed 's|tight/result|result|' err >err2 && mv err2 err
        [ ! -d tight/result ] || cp -r tight/result result
        look_at "a file system of $pages pages" "$code" whole
        umount tight
    done
    echo "small file systems were filled"
else
    echo "no file system may be mounted here"
fi
finish
