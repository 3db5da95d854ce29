#!/bin/sh
# usage: sh memory.sh TACET FAIL_MEMORY.so
# Every allocation of every command fails once, and once with all later ones. A copy of the process
# goes on with the failure (see fail_memory.c), and must
#   end with exit code 4 and say on standard error that memory is lacking, or end as the whole run
#   did: same bytes;
#   leave no file that differs from the whole run's, no part of one, no empty folder;
#   free what it holds.
# EVERY=1: every call of every command; otherwise reading the study once, and samples of the rest.
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
                    cmp -s "$here/$file" "$whole/$file" ||
                        complain "$1, call $n: ends with 0, but $file differs"
                done
                if [ -d "$whole/result" ]; then
                    diff -r "$here/result" "$whole/result" >/dev/null ||
                        complain "$1, call $n: ends with 0, but files differ"
                fi
                ;;
            "exit 4")
                grep -q -i memory "$here/err" ||
                    complain "$1, call $n: no word about memory: $(head -1 "$here/err")"
                [ ! -d "$here/result" ] || for file in "$here"/result/*; do
                    [ -f "$file" ] || { complain "$1, call $n: leaves an empty folder"; break; }
                    cmp -s "$file" "$whole/result/${file##*/}" ||
                        complain "$1, call $n: ${file##*/} is not whole"
                done
                ;;
            *) complain "$1, call $n: $ended $code: $(head -1 "$here/err")" ;;
        esac
        read -r calls left <"$here/blocks" || calls=0 left=unknown
        [ "$left" = 0 ] || complain "$1, call $n: $left blocks left of $calls calls"
    done <"$copies/log"
    grep -h -v -e '^tacet: ' -e '^[^ ]*: error: ' "$copies"/*/err >"$scratch/others" &&
        complain "$1: other words: $(sort "$scratch/others" | uniq -c)"
    echo "$1: $(wc -l <"$copies/log") calls"
}

fail_each() # NAME "once"|"on" FROM STEP ARGUMENTS..
{
    name=$1-$2 on='' which="FAIL_FROM=$3 FAIL_STEP=$4"
    [ "$2" = once ] || on="FAIL_ON=1"
    [ -z "${EVERY:-}" ] || which=''
    shift 4
    mkdir "$scratch/$name" "$scratch/$name-whole"
    cp ./*.yaml ./*.words "$scratch/$name-whole"
    cd "$scratch/$name-whole" || exit 1
    # shellcheck disable=SC2086 # variables, or none
    env $on $which FAIL_COPIES="$scratch/$name" LD_PRELOAD="$shared" \
        "$TACET" "$@" >out 2>err </dev/null ||
        complain "$name: the whole run ends with $?: $(head -1 err)"
    cd "$scratch/desk" || exit 1
    look_at "$name"
    rm -rf "${scratch:?}/$name" "$scratch/$name-whole"
}

fail_each example once 1 1 example
fail_each keys once 1 1 keys --json
fail_each patterns once 1 1 patterns 3/7 --cylinders 6
fail_each check once 1 1 check small.yaml --values
fail_each modes once 530 3 modes small.yaml --response flywheel
fail_each point once 650 5 point small.yaml --density 1/2 --speed 1500 --referee -o result
fail_each screen once 532 5 screen small.yaml -o result
fail_each screen-json once 1500 7 screen small.yaml --json
fail_each check-all on 2 4 check small.yaml --values
fail_each point-all on 641 8 point small.yaml --density 1/2 --speed 1500 --referee -o result
fail_each screen-all on 534 8 screen small.yaml -o result
finish
