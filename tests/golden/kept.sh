#!/bin/sh
# usage: sh kept.sh FOLDER   are the golden files those of the last entry of CHANGES, by their sums?
cd "$1" || exit 2
cksum -- *.rows *.screen | awk '
    FNR == NR { if (/^[^ #]/) split("", kept); else if (!/^#/) kept[$1] = $2; next }
    kept[$3] != $1 {
        print $3 " is not as refresh.sh wrote it: run sh tests/golden/refresh.sh"
        wrong = 1
    }
    { delete kept[$3] }
    END { for (name in kept) { print name " is missing"; wrong = 1 }; exit wrong }' CHANGES -
