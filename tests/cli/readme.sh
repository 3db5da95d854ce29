#!/bin/sh
# Runs every command of README.md's sh blocks, in order, from the project's root. The one that runs
# the tests is left to the caller.
set -eu
cd "$(dirname "$0")/../.."
left="my.yaml my-screen forwarder-screen brush-truck-screen" # what the commands leave behind
for name in $left; do
    [ ! -e "$name" ] || {
        echo "tests/cli/readme.sh: $name is in the way; move it first" >&2
        exit 1
    }
done
tidy()
{
    # shellcheck disable=SC2086 # one word a name
    rm -rf readme-commands.tmp readme-output.tmp $left
}
trap tidy EXIT
awk '/^```sh$/ { on = 1; next } /^```$/ { on = 0 } on && NF' README.md |
    grep -v '^sh tests/run\.sh' >readme-commands.tmp
count=0
while IFS= read -r command; do
    echo "\$ $command"
    status=0
    sh -c "$command" >readme-output.tmp 2>&1 </dev/null || status=$?
    if [ "$status" != 0 ]; then
        cat readme-output.tmp
        echo "README.md: '$command' ended with $status" >&2
        exit 1
    fi
    count=$((count + 1))
done <readme-commands.tmp
echo "$count commands of README.md ran"
[ "$count" -gt 3 ]
