#!/bin/sh
# usage: page.sh TESTS-FOLDER
# The page of witnesses (published/README.md) keeps up with the tests and with the program:
# - every file and test function that it names exists: `folder/file: function, function` between
#   backquotes. Functions of a C file must stand in it twice, defined and run, so that the page
#   cannot lean on a test that is never called;
# - every number in the JSON (json_paths of cli/json), every column and every quantity stands in it,
#   between backquotes.
set -eu
cd "$1"
page=published/README.md
status=0

tr '\n' ' ' <"$page" |
    grep -o '`[a-z_]*/[a-z_./0-9]*\.[a-z]*\(:[a-z_0-9, ]*\)\{0,1\}`' | tr -d '`' |
    awk -F': *' '
        function count(file, name,   line, n) {
            while ((getline line < file) > 0)
                if (line ~ "(^|[^a-z_0-9])" name "([^a-z_0-9]|$)") n++
            close(file)
            return n
        }
        {
            files++
            if ((getline line < $1) < 0) { print "no such file: " $1; wrong++; next }
            close($1)
            n = split($2, name, /, */)
            for (i = 1; i <= n; i++) {
                names++
                sub(/ *$/, "", name[i])
                if (count($1, name[i]) >= ($1 ~ /\.c$/ ? 2 : 1)) continue
                print $1 ": no test " name[i]
                wrong++
            }
        }
        END {
            print files + 0 " files, " names + 0 " tests named, " wrong + 0 " wrong"
            exit wrong > 0 || names == 0
        }' || status=1

# JSON: the last word of each path of a number; nodes and links of the studies stand for all
{
    awk '$2 ~ /number/ && $1 !~ /^tacet\./ && $1 !~ /^problems/ {
        gsub(/\[\]/, "", $1)
        if ($1 ~ /\.shape\./) { print "shape"; next }
        n = split($1, part, ".")
        sub(/^.*_nm_per_nm$/, "LINK_nm_per_nm", part[n])
        print part[n]
    }' cli/json/*.paths
    sed -n 's/^ *\(NUMBER\|COUNT\)(\([a-z_]*\), .*/\2/p' ../src/condition/columns.c
    sed -n 's/^ *{\.name = "\([a-z-]*\)",$/\1/p' ../src/judge/quantities.c
} | sort -u | while read -r name; do
    grep -q "\`$name\`" "$page" || echo "no row for \`$name\`"
done >"${TMPDIR:-/tmp}/page-rows.$$"
if [ -s "${TMPDIR:-/tmp}/page-rows.$$" ]; then
    cat "${TMPDIR:-/tmp}/page-rows.$$"
    status=1
fi
rm -f "${TMPDIR:-/tmp}/page-rows.$$"
exit $status
