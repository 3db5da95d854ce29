#!/bin/sh
# usage: sh disk.sh TACET   the n-th write, open, fsync, rename of a run fails as on a full disk, for every n; then
# a file system that is really full (as root, where mounting is allowed). The run must
#   end with exit code 4, name the file (or standard output) and the reason;
#   leave whole files only, no *.tmp, no empty folder.
# A call that standard error needs is left alone. Skipped (77) where processes may not be traced.
. "$(dirname "$0")/help.sh"
strace -qq -o /dev/null true 2>/dev/null || { echo "processes may not be traced here"; exit 77; }

tacet screen small.yaml -o whole --drawings svg >whole.out 2>whole.err || complain "the whole run ends with $?"
tacet point small.yaml --density 1/2 --speed 1500 -o point-whole >point-whole.out 2>/dev/null || complain "the point ends with $?"

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

# The n-th of each kind of call fails, until a run does not get as far. FILES narrows it to calls on one of them.
fail_each() # WHOLE "CALLS" FILES ARGUMENTS..
{
    whole=$1 calls=$2 files=$3
    shift 3
    for call in $calls; do
        n=1
        while :; do
            # shellcheck disable=SC2086 # FILES is -P options, or none
            strace -qq -o trace $files -e trace="$call" -e inject="$call:error=ENOSPC:when=$n" \
                "$TACET" "$@" >out 2>err </dev/null
            code=$?
            grep -q INJECTED trace || break
            look_at "$call $n of $1" "$code" "$whole"
            n=$((n + ${STEP:-1}))
        done
        echo "$1: $((n - 1)) calls of $call"
    done
}

# paths of the folder are relative to it, so -P cannot name them: standard error is closed off by a pipe instead
fail_each whole "fsync renameat openat" "" screen small.yaml -o result --drawings svg
finish
