#!/bin/sh
# usage: sh run.sh CASES TACET ROOT [JSON_PATHS]
# Runs the commands of a case file in a scratch folder and compares.
#   $ command      run by sh; `tacet` is TACET; the folder `studies` beside the cases' own is copied
#                  in, patterns/ and tests/cli/json are linked, `json-paths` is JSON_PATHS
#   = 2            its exit code (0 when not said)
#   > text         its standard output, line by line; none: must be empty
#   ! text         its standard error, line by line; none: must be empty
#   # comment
# In expected text `...` stands for any text, and a line of `...` alone for any number of lines.
set -eu
cases=$(realpath "$1")
tacet=$(realpath "$2")
root=$(realpath "$3")
scratch=$(mktemp -d)
trap 'chmod -R u+w "$scratch"; rm -rf "$scratch"' EXIT
mkdir "$scratch/bin" "$scratch/desk"
ln -s "$tacet" "$scratch/bin/tacet"
[ $# -lt 4 ] || ln -s "$(realpath "$4")" "$scratch/bin/json-paths"
cp "$(dirname "$cases")"/../studies/* "$scratch/desk/"
ln -s "$root/patterns" "$scratch/desk/patterns"
ln -s "$root/tests/cli/json" "$scratch/desk/json"
cd "$scratch/desk"
TACET=$tacet
PATH="$scratch/bin:$PATH"
TERM=dumb
LC_ALL=C
export TACET PATH TERM LC_ALL
unset NO_COLOR POSIXLY_CORRECT || true
awk -v out="$scratch" -f "$root/tests/cli/run.awk" "$cases"
