#!/bin/sh
# usage: sh tests/house.sh [ROOT]   of another tree, its own tests/house.reasons counts
# Lists what breaks the house rules (tests/listing.awk says which), and the includes that go the
# wrong way (tests/house.awk). Each entry is mended, or has its reason in tests/house.reasons; a
# reason whose entry is gone is wrong as well. Prints the counts; exit 1 when anything is left.
set -eu
here=$(dirname "$0")
here=$(cd "$here" && pwd)
cd "${1:-$here/..}"
lists=$(mktemp -d)
trap 'rm -rf "$lists"' EXIT
files()
{
    find "$@" -type f \( -name '*.c' -o -name '*.h' -o -name '*.sh' -o -name '*.awk' \) | sort
}
for part in src include tests; do
    [ -n "$(files $part)" ] || { echo "house.sh: no files in $part" >&2; exit 1; }
done
files src include tests | xargs awk -f "$here/listing.awk" >"$lists/found"
files src include | xargs awk -f "$here/house.awk" >"$lists/includes"

# a reason: kind, files and names with commas between, then words; carried on where a line begins
# with a blank
awk -F '\t' '
function take_reason(    word, file, name, m, n, i, k) {
    if (reason == "") return
    gsub(/, +/, ",", reason)
    split(reason, word, " ")
    m = split(word[2], file, ",")
    n = split(word[3], name, ",")
    for (i = 1; i <= m; i++)
        for (k = 1; k <= n; k++) excused[word[1], file[i], name[k]] = at
    for (i = 1; i <= 3; i++) sub(/^[^ ]+ */, "", reason)
    if (reason !~ /[a-z]+ [a-z]+/) print "tests/house.reasons:" at ": gives no reason"
    reason = ""
}
FILENAME == reasons {
    if ($0 ~ /^ /) { reason = reason $0; next }
    take_reason()
    if ($0 !~ /^(#|$)/) { reason = $0; at = FNR }
    next
}
FNR == 1 { take_reason() }
{
    if (($1, $2, $3) in excused) { used[$1, $2, $3]; n_used++ }
    else { print $4 " (" $1 ")"; left[$1]++ }
}
END {
    take_reason()
    for (e in excused) if (!(e in used)) {
        split(e, part, SUBSEP)
        printf "tests/house.reasons:%d: nothing to excuse: %s %s %s\n", excused[e], part[1],
            part[2], part[3]
    }
    n = split("long-function many-parameters no-comment no-unit not-si key-without-unit " \
        "long-file long-line", kinds, " ")
    for (i = 1; i <= n; i++)
        printf "%s %d%s", kinds[i], left[kinds[i]], i < n ? ", " : "; " >counts
    printf "%d with a reason\n", n_used >counts
}' reasons=tests/house.reasons counts="$lists/counts" tests/house.reasons "$lists/found" \
    >"$lists/left"
cat "$lists/includes" "$lists/left"
cat "$lists/counts"
[ ! -s "$lists/includes" ] && [ ! -s "$lists/left" ]
