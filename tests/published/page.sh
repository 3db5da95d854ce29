#!/bin/sh
# usage: page.sh TESTS-FOLDER   every file and test function that published/README.md names must
# exist: `folder/file: function, function` between backquotes. Functions of a C file must also be
# run (stand in
# its list of tests), so that a page cannot lean on a test that is never called.
set -eu
cd "$1"
grep -o '`[a-z_]*/[a-z_./0-9]*\.[a-z]*\(:[a-z_0-9, ]*\)\{0,1\}`' published/README.md | tr -d '`' |
    awk -F': *' '
        function ran(file, name,   line, n) {
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
                found = ran($1, name[i])
                if (found < ($1 ~ /\.c$/ ? 2 : 1)) { print $1 ": no test " name[i]; wrong++ }
            }
        }
        END {
            print files + 0 " files, " names + 0 " tests named, " wrong + 0 " wrong"
            exit wrong > 0
        }'
