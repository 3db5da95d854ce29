# usage: gcov -b -t .. | awk -f uncovered.awk tests/uncovered -
# Lists stretches of lines that no test runs and that have no reason; 1: one is a whole function.
# A source that several programs hold counts as run where one of them ran it.
FNR == NR {
    if (/^#/ || NF == 0) next
    if (/^"/) text[++n_texts] = substr($0, 2, index(substr($0, 2), "\"") - 1)
    else if (NF > 2) reason[$1 " " $2] = 1
    else {
        print "tests/uncovered: '" $0 "' gives no reason"
        wrong = 1
    }
    next
}
/^ *-: *0:Source:/ {
    file = $0
    sub(/.*Source:/, "", file)
    sub(/^.*\/src\//, "src/", file)
    name = ""
    next
}
file !~ /^src\// { next }
/^function / {
    name = $2
    if (!((file " " name) in calls)) functions[++n_functions] = file " " name
    calls[file " " name] += $4
    next
}
/^ *([0-9]+|#####|=====)[*]?: *[0-9]+:/ {
    split($0, part, ":")
    key = file ":" (part[2] + 0)
    if (!(key in of)) {
        of[key] = file " " name
        at[++n_lines] = key
        code[key] = $0
        sub(/^[^:]*:[^:]*:[ \t]*/, "", code[key])
    }
    if (part[1] ~ /[0-9]/) ran[key] = 1
}
function explained(stretch, i)
{
    if (place in reason) {
        used[place] = 1
        return 1
    }
    for (i = 1; i <= n_texts; i++)
        if (index(stretch, text[i])) {
            used[text[i]] = 1
            return 1
        }
    return 0
}
function end_stretch()
{
    if (stretch == "") return
    if (explained(stretch)) n_explained++
    else {
        n_open++
        split(place, part, " ")
        printf "%s %s: %s\n", from, part[2], substr(stretch, 1, 70)
    }
    stretch = ""
}
END {
    for (i = 1; i <= n_lines; i++) {
        key = at[i]
        if ((key in ran) || of[key] != place) end_stretch()
        if (key in ran) continue
        place = of[key]
        if (stretch == "") from = key
        stretch = stretch code[key] " "
    }
    end_stretch()
    for (i = 1; i <= n_functions; i++) {
        if (calls[functions[i]] > 0) continue
        n_never++
        if (functions[i] in reason) used[functions[i]] = 1
        else {
            print "no test enters: " functions[i]
            wrong = 1
        }
    }
    printf "%d stretches without a reason, %d with one; %d of %d functions never entered\n",
        n_open, n_explained, n_never, n_functions
    for (key in reason)
        if (!(key in used)) print "tests/uncovered: tests run " key " by now: take its line out"
    for (i = 1; i <= n_texts; i++)
        if (!(text[i] in used))
            print "tests/uncovered: no stretch holds \"" text[i] "\": take its line out"
    exit wrong
}
