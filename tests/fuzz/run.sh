#!/bin/bash
# usage: tests/fuzz/run.sh [SECONDS] [TARGET ..]
#        fuzzes each target for SECONDS (30), two at a time
#        tests/fuzz/run.sh keep [TARGET ..]        adds what the last runs reached anew to corpus/
# Builds with clang in ./build-fuzz, where new inputs gather; only `keep` changes the tree. Prints
# runs, coverage and findings; exit 1 on a finding, which stays in build-fuzz/found/TARGET/.
set -euo pipefail
cd "$(dirname "$0")/../.."
here=tests/fuzz build=build-fuzz
seed=1 # of libFuzzer's random numbers
mode=${1:-30}
shift || true
[ $# -gt 0 ] || set -- numbers words book traces study model options

# Faults that end a program, and divisions by zero and casts out of range, which do not.
checks=fuzzer-no-link,address,undefined,float-divide-by-zero,float-cast-overflow
if [ ! -f $build/build.ninja ]; then
    CC=clang meson setup $build -Dfuzz=true -Doptimization=1 -Db_lundef=false \
        -Dc_args="-fsanitize=$checks -fno-sanitize-recover=all -fno-omit-frame-pointer" \
        -Dc_link_args=-fsanitize=address,undefined >$build.log || { cat $build.log; exit 2; }
    rm $build.log
fi
ninja -C $build --quiet fuzz-targets tacet

# The keys of a study come from the program itself, the rest by hand.
{
    $build/tacet keys --csv |
        awk -F, 'NR > 1 { n = split($1, part, "."); sub(/\[\]/, "", part[n]); print part[n] }' |
        sort -u
    printf '%s\n' ': ' '- ' '[]' '{}' '&a ' '*a' '!!' '"' "'" '|' '>' '<<: ' '---' 1e3 0:10:1 null \
        roll-torque link-torque: node-angle: throw1 flywheel .words: x..x
} | sed 's/[\\"]/\\&/g; s/.*/"&"/' >$build/study.dict
cp $build/study.dict $build/model.dict
printf '"%s"\n' pressure_kpa :manifold_kpa= :rpm= :after= :next=fire :next=skip :fuel= :fuel_mg= \
    :run= forever angle_deg -360 360 '\x0a----\x0a' >$build/traces.dict
{
    printf '"--%s"\n' density pattern speed demand level referee json csv strict cylinders strokes \
        maker length dither seed longest-run response frequencies help output drawings
    printf '"%s"\n' point patterns keys modes screen necklaces sigma-delta-2 '\x0a'
} >$build/options.dict

seeds() { # folders whose files a target starts from
    ls -d $here/corpus/"$1" $here/found/"$1" 2>/dev/null || true
    case $1 in
    study | model) ls -d tests/study/good tests/study/broken patterns tests/cli/studies ;;
    esac
}
fuzz() {
    local target=$1 longest=400 old
    case $target in study | model) longest=8000 ;; traces) longest=12000 ;; book) longest=2000 ;; esac
    mkdir -p $build/corpus/"$target" $build/found/"$target"
    for old in "$build/found/$target"/*; do # findings that were mended since
        [ ! -f "$old" ] || ! $build/tests/fuzz/fuzz_"$target" "$old" >/dev/null 2>&1 || rm "$old"
    done
    # shellcheck disable=SC2046 # one word a folder
    $build/tests/fuzz/fuzz_"$target" -seed=$seed -max_total_time="$mode" -max_len=$longest \
        -timeout=60 -report_slow_units=60 -rss_limit_mb=1500 -malloc_limit_mb=256 -print_final_stats=1 \
        $([ -f $build/"$target".dict ] && echo -dict=$build/"$target".dict) \
        -artifact_prefix=$build/found/"$target"/ \
        $build/corpus/"$target" $(seeds "$target") >$build/"$target".log 2>&1 || true
}
report() {
    local log=$build/$1.log found
    printf '%-8s %9s runs %7s/s  coverage %s\n' "$1" \
        "$(awk '/number_of_executed_units/ { print $2 }' "$log")" \
        "$(awk '/average_exec_per_sec/ { print $2 }' "$log")" \
        "$(grep -aoE 'cov: [0-9]+ ft: [0-9]+ corp: [0-9]+' "$log" | tail -1)"
    for found in "$build/found/$1"/*; do
        [ -f "$found" ] || continue
        wrong=1
        found=$(grep -aE 'broken promise|runtime error|ERROR:|SUMMARY' "$log" | head -2)
        echo "FOUND by $1: $found"
        echo "  replay: $build/tests/fuzz/fuzz_$1 $found"
    done
    # a run that ended before its time without an input has its reason in the log
    grep -aq '^Done ' "$log" || [ -n "$(ls "$build/found/$1")" ] || { wrong=1; tail -20 "$log"; }
}

if [ "$mode" = keep ]; then
    for target; do
        mkdir -p $here/corpus/"$target"
        # shellcheck disable=SC2046 # one word a folder
        $build/tests/fuzz/fuzz_"$target" -merge=1 -use_counters=0 -set_cover_merge=1 \
            $here/corpus/"$target" $build/corpus/"$target" $(seeds "$target")
    done
    exit
fi
running=0 wrong=0
for target; do
    [ $running -lt 2 ] || { wait -n; running=$((running - 1)); }
    fuzz "$target" &
    running=$((running + 1))
done
wait
for target; do report "$target"; done
exit $wrong
