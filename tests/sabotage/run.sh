#!/bin/sh
# usage: sh tests/sabotage/run.sh BUILD SOURCE [NAME..]   all errors of the list, or those named
#        sh tests/sabotage/run.sh fits SOURCE             only: does the list fit the source?
# Each error of tests/sabotage/list is put into a copy of its file. The copy is compiled with the
# flags of the build and linked with a test program in front of the library, whose own object
# of that file is then not asked for. The tests named must fail by an assertion; before, the same
# link with untouched copies must pass. Nothing is written but in a scratch folder.
set -eu
[ "$1" = fits ] || build=$(cd "$1" && pwd)
source=$(cd "$2" && pwd)
shift 2
scratch=$(mktemp -d "${TMPDIR:-/tmp}/sabotage.XXXXXX")
trap 'rm -rf "$scratch"' EXIT
trap 'exit 1' HUP INT TERM
jobs=2
seconds=100 # for one test: far more than any needs, so that only an error without end meets it

command_of() { # OUTPUT of the build: the command that makes it
    ninja -C "$build" -t commands "$1" 2>&1 | tail -n 1
}

object_of() { # src/room/file.c: as the build calls its object
    echo "$1.o" | tr / _
}

compile() { # FILE COPY OBJECT
    case $1 in
    src/show/*) made=src/show/libtacet-show.a.p/${1##*/}.o ;;
    *) made=libtacet-core.a.p/$(object_of "$1") ;;
    esac
    command=$(command_of "$made")
    case $command in
    *" -MD "*) ;;
    *) echo "how is $1 compiled? $command" && return 1 ;;
    esac
    (cd "$build" && sh -c "${command%% -MD *} -w -iquote '$source/${1%/*}' -o '$3' -c '$2'")
}

# A test program with OBJECT first, and without the object of FILE where it has one of its own.
link() { # FILE OBJECT PROGRAM OUT
    command=$(command_of "tests/$3" |
        OUT="-o '$4' '$2'" OWN="_$(object_of "$1")" awk '{
            own = ENVIRON["OWN"]
            for (i = 1; i <= NF; i++) {
                if (substr($i, length($i) - length(own) + 1) == own) $i = ""
                if ($i != "-o") continue
                $i = ENVIRON["OUT"]
                $(++i) = ""
            }
            print
        }')
    (cd "$build" && sh -c "$command")
}

# red, green, or what else became of one test.
outcome() { # PROGRAM TEST LOG
    status=0
    (cd "$build" && TEST_ONLY="$2" timeout -k 5 "$seconds" "$1") >"$3" 2>&1 || status=$?
    if [ "$status" -eq 124 ] || [ "$status" -eq 137 ]; then
        echo "did not end in $seconds s"
    elif [ "$status" -gt 128 ] || grep -q 'failed with exception' "$3"; then
        echo "crashed"
    elif grep -qx "\[  FAILED  \] $2" "$3" && grep -q 'error: Failure!' "$3"; then
        echo red
    elif [ "$status" -eq 0 ] && grep -qx "\[       OK \] $2" "$3"; then
        echo green
    else
        echo "did not run"
    fi
}

say() { # FOLDER WORD TEXT; the end of the log where the word is a failure
    printf '%-6s %s\n' "$2" "$3"
    [ "$2" != red ] && [ "$2" != green ] && [ -s "$1/log" ] || return 0
    tail -n 12 "$1/log" | sed 's/^/    | /'
}

# The tests of a folder, linked with its copy: all must be WANTED.
try() { # FOLDER WANTED
    read -r file <"$1/file"
    read -r name <"$1/name"
    if ! compile "$file" "$1/copy.c" "$1/copy.o" >"$1/log" 2>&1; then
        say "$1" broken "$name does not compile"
        return
    fi
    while read -r program test; do
        exe=$1/${program##*/}
        if [ ! -x "$exe" ] && ! link "$file" "$1/copy.o" "$program" "$exe" >"$1/log" 2>&1; then
            say "$1" broken "$name does not link with $program"
            continue
        fi
        got=$(outcome "$exe" "$test" "$1/log")
        if [ "$got" = "$2" ]; then
            say "$1" "$got" "$name  $program: $test"
        elif [ "$got" = green ]; then
            say "$1" ALIVE "$name  $program: $test does not see it"
        else
            say "$1" WRONG "$name  $program: $test ${got}"
        fi
    done <"$1/tests"
    rm -f "$1"/copy.o "$1"/test_*
}

# All folders of a file, several at a time; their lines in order. Fails where one is not WANTED.
try_all() { # FILE WANTED
    job=0
    while [ "$job" -lt "$jobs" ]; do
        awk -v job="$job" -v jobs="$jobs" 'NR % jobs == job' "$1" | while read -r folder; do
            try "$folder" "$2" >"$folder/result"
        done &
        job=$((job + 1))
    done
    wait
    while read -r folder; do
        cat "$folder/result"
    done <"$1" >"$1.results"
    ! grep -v "^$2 " "$1.results" >/dev/null
}

SOURCE=$source SCRATCH=$scratch ONLY="$*" awk -f "$source/tests/sabotage/prepare.awk" \
    "$source/tests/sabotage/list"
[ "${build-}" ] || exit 0
try_all "$scratch/healthy" green || {
    grep -v '^green ' "$scratch/healthy.results"
    echo "sabotage: tests that do not pass without an error"
    exit 1
}
status=0
try_all "$scratch/errors" red || status=1
cat "$scratch/errors.results"
errors=0
caught=0
while read -r folder; do
    errors=$((errors + 1))
    grep -qv '^red ' "$folder/result" || caught=$((caught + 1))
done <"$scratch/errors"
echo "$errors errors, $caught caught, by $(grep -c . "$scratch/healthy") test programs"
exit "$status"
