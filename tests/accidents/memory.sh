#!/bin/sh
# usage: sh memory.sh TACET FAIL_MEMORY.so   every allocation of every command fails once, and once with all later ones.
# A copy of the process goes on with the failure (see fail_memory.c), and must
#   end with exit code 4 and say on standard error that memory is lacking, or end as the whole run did: same bytes;
#   leave no file that differs from the whole run's, no part of one, no empty folder;
#   free what it holds.
. "$(dirname "$0")/help.sh"
shared=$(realpath "$2")

look_at() # NAME: the copies in $scratch/NAME, the whole run in $scratch/NAME-whole
{
    copies=$scratch/$1 whole=$scratch/$1-whole
    while read -r n ended code; do
        here=$copies/$n
        case "$ended $code" in
            "exit 0")
                for file in out err; do
                    cmp -s "$here/$file" "$whole/$file" || complain "$1, call $n: ends with 0, but $file differs"
                done
                if [ -d "$whole/result" ]; then
                    diff -r "$here/result" "$whole/result" >/dev/null || complain "$1, call $n: ends with 0, but files differ"
                fi
                ;;
            "exit 4")
                grep -q -i -e memory "$here/err" || complain "$1, call $n: no word about memory: $(head -1 "$here/err")"
                [ ! -d "$here/result" ] || for file in "$here"/result/*; do
                    [ -f "$file" ] || { complain "$1, call $n: leaves an empty folder"; break; }
                    [ "${file##*/}" = summary.txt.tmp ] && complain "$1, call $n: leaves $file"
                    cmp -s "$file" "$whole/result/${file##*/}" || complain "$1, call $n: ${file##*/} is not whole"
                done
                ;;
            *) complain "$1, call $n: $ended $code: $(head -1 "$here/err")" ;;
        esac
        read -r calls left <"$here/blocks" || calls=0 left=unknown
        [ "$left" = 0 ] || complain "$1, call $n: $left blocks left of $calls calls"
    done <"$copies/log"
    grep -q -v -e '^tacet: ' -e '^[^ ]*: error: ' "$copies"/*/err &&
        complain "$1: other words: $(grep -h -v -e '^tacet: ' -e '^[^ ]*: error: ' "$copies"/*/err | sort | uniq -c)"
    echo "$1: $(wc -l <"$copies/log") calls"
}

fail_each() # NAME "once"|"on" ARGUMENTS..
{
    name=$1-$2 on=
    [ "$2" = once ] || on="FAIL_ON=1"
    shift 2
    mkdir "$scratch/$name" "$scratch/$name-whole"
    cp ./*.yaml ./*.words "$scratch/$name-whole"
    cd "$scratch/$name-whole" || exit 1
    # shellcheck disable=SC2086 # no word or one
    env $on FAIL_COPIES="$scratch/$name" LD_PRELOAD="$shared" "$TACET" "$@" >out 2>err </dev/null ||
        complain "$name: the whole run ends with $?: $(head -1 err)"
    cd "$scratch/desk" || exit 1
    look_at "$name"
    rm -rf "${scratch:?}/$name" "$scratch/$name-whole"
}

for how in once on; do
    fail_each example $how example
    fail_each keys $how keys --json
    fail_each patterns $how patterns 3/7 --cylinders 6
    fail_each modes $how modes small.yaml --response flywheel
    fail_each check $how check small.yaml --values
    fail_each point $how point small.yaml --density 1/2 --speed 1500 --referee -o result
    fail_each screen $how screen small.yaml -o result
    fail_each screen-json $how screen small.yaml --json
done
finish
