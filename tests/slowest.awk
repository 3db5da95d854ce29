# usage: awk -f slowest.awk testlog.json   one line a test: seconds, suite and name
# A quote inside a text is escaped there, so what follows cannot match inside a test's output.
function text_of(key, from)
{
    if (!match($0, "\"" key "\": \"")) return ""
    from = substr($0, RSTART + RLENGTH)
    return substr(from, 1, index(from, "\"") - 1)
}
match($0, /"duration": [0-9.]+/) {
    printf "%7.1f  %s\n", substr($0, RSTART + 12, RLENGTH - 12), text_of("name")
}
