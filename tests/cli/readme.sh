#!/bin/sh
# Runs every command of README.md's sh blocks, in order, from the project's root. The one that runs the tests is
# left to the caller.
set -eu
cd "$(dirname "$0")/../.."
awk '/^```sh$/ { on = 1; next } /^```$/ { on = 0 } on && NF' README.md | grep -v '^sh tests/run\.sh' >readme-commands.tmp
count=0
while IFS= read -r command; do
    echo "\$ $command"
    status=0
    sh -c "$command" >readme-output.tmp 2>&1 </dev/null || status=$?
    if [ "$status" != 0 ]; then
        cat readme-output.tmp
        echo "README.md: '$command' ended with $status" >&2
        rm -f readme-commands.tmp readme-output.tmp
        exit 1
    fi
    count=$((count + 1))
done <readme-commands.tmp
rm -f readme-commands.tmp readme-output.tmp
echo "$count commands of README.md ran"
[ "$count" -gt 3 ]
