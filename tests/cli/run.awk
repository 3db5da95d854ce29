# The comparing half of run.sh.

function inline(expected, actual,    part, n, i, at) {
    n = split_dots(expected, part)
    if (n == 1) return expected == actual
    if (substr(actual, 1, length(part[1])) != part[1]) return 0
    actual = substr(actual, length(part[1]) + 1)
    for (i = 2; i < n; i++) {
        at = index(actual, part[i])
        if (!at) return 0
        actual = substr(actual, at + length(part[i]))
    }
    at = length(actual) - length(part[n]) + 1
    return at >= 1 && substr(actual, at) == part[n]
}

function split_dots(text, part,    n, at) {
    n = 0
    while ((at = index(text, "...")) > 0) {
        part[++n] = substr(text, 1, at - 1)
        text = substr(text, at + 3)
    }
    part[++n] = text
    return n
}

# Can expected lines from e on match actual lines from a on?  Table filled from the end.
function matches(expected, n_expected, actual, n_actual,    e, a, ok) {
    for (e = n_expected + 1; e >= 1; e--)
        for (a = n_actual + 1; a >= 1; a--) {
            if (e > n_expected) ok[e, a] = a > n_actual
            else if (expected[e] == "...")
                ok[e, a] = ok[e + 1, a] || (a <= n_actual && ok[e, a + 1])
            else ok[e, a] = a <= n_actual && ok[e + 1, a + 1] && inline(expected[e], actual[a])
        }
    return ok[1, 1]
}

function compare(name, file, expected, n_expected,    line, n, actual, i) {
    n = 0
    while ((getline line < file) > 0) actual[++n] = line
    close(file)
    if (matches(expected, n_expected, actual, n)) return 1
    printf "%s:%d: %s differs\n", FILENAME, at_line, name
    for (i = 1; i <= n_expected; i++) printf "  expected: %s\n", expected[i]
    for (i = 1; i <= n; i++) printf "  actual:   %s\n", actual[i]
    return 0
}

function finish(    status, good) {
    if (command == "") return
    print command > (out "/command")
    close(out "/command")
    status = system("sh " out "/command >" out "/stdout 2>" out "/stderr </dev/null")
    if (status > 255) status = int(status / 256)
    good = compare("standard output", out "/stdout", wanted_out, n_out)
    good = compare("standard error", out "/stderr", wanted_err, n_err) && good
    if (status != wanted_status) {
        printf "%s:%d: exit code %d, expected %d\n", FILENAME, at_line, status, wanted_status
        good = 0
    }
    if (!good) printf "  of:       %s\n", command
    count++
    failed += !good
    command = ""
}

/^\$ / {
    finish()
    command = substr($0, 3)
    at_line = FNR
    n_out = n_err = wanted_status = 0
    next
}
/^= / { wanted_status = $2 + 0; next }
/^>/ { wanted_out[++n_out] = substr($0, 3); next }
/^!/ { wanted_err[++n_err] = substr($0, 3); next }
/^#/ || /^$/ { next }
{ printf "%s:%d: not understood: %s\n", FILENAME, FNR, $0; failed++ }
END {
    finish()
    printf "%d commands, %d wrong\n", count, failed
    exit failed > 0 || count == 0
}
