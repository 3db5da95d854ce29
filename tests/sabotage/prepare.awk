# The list of errors -> a folder an entry below SCRATCH with name, file, tests (program and test a
# line) and copy.c, the file with its error; and a folder healthy-<n> for each program, with an
# untouched copy and all tests of that program. Folders go to SCRATCH/errors and SCRATCH/healthy.
# Environment: SOURCE, SCRATCH, ONLY (names between blanks; empty: all). Fails when the list does
# not fit the source.

function fail(text) {
    print "sabotage: " (entry["name"] == "" ? "line " NR : entry["name"]) ": " text
    failed = 1
}

function wanted() {
    return ENVIRON["ONLY"] == "" || index(" " ENVIRON["ONLY"] " ", " " entry["name"] " ")
}

# Copies a file with `old` replaced by `new`; how often it was there.
function copy(file, to, old, new,   line, at, n, found, status) {
    while ((status = (getline line < file)) > 0) {
        if (old != "" && (at = index(line, old))) {
            found++
            if (index(substr(line, at + 1), old)) found++
            line = substr(line, 1, at - 1) new substr(line, at + length(old))
        }
        print line > to
        n++
    }
    close(file)
    close(to)
    if (status < 0 || n == 0) fail("no file " file)
    return found + 0
}

function folder(name, list,   path) {
    path = ENVIRON["SCRATCH"] "/" name
    if (system("mkdir '" path "'") != 0) exit 1
    print path > (ENVIRON["SCRATCH"] "/" list)
    return path
}

function note(path, what, text) {
    print text > (path "/" what)
    close(path "/" what)
}

function finish(   i, key, path, source, found, program) {
    if (entry["name"] == "") return
    for (i = 1; i <= n_keys; i++)
        if (entry[key_at[i]] == "") fail("no " key_at[i])
    if (known[entry["name"]]++) fail("stands twice in the list")
    if (entry["old"] == entry["new"]) fail("changes nothing")
    if (!failed && wanted()) {
        path = folder(sprintf("%03d", ++entries), "errors")
        source = ENVIRON["SOURCE"] "/" entry["file"]
        found = copy(source, path "/copy.c", entry["old"], entry["new"])
        if (found != 1)
            fail("'" entry["old"] "' stands " found " times in " entry["file"] ", not once; " \
                 "the list must follow the code")
        note(path, "name", entry["name"])
        note(path, "file", entry["file"])
        for (i = 1; i <= n_red; i++) {
            print red[i] > (path "/tests")
            split(red[i], word, " ")
            program = word[1]
            if (!(program in healthy)) {
                healthy[program] = folder("healthy-" ++programs, "healthy")
                copy(source, healthy[program] "/copy.c")
                note(healthy[program], "name", "without-error")
                note(healthy[program], "file", entry["file"])
            }
            if (!tried[red[i]]++) print red[i] > (healthy[program] "/tests")
        }
        close(path "/tests")
    }
    for (i in entry) entry[i] = ""
    n_red = 0
}

BEGIN {
    n_keys = split("name file old new red why", key_at, " ")
    for (i = 1; i <= n_keys; i++) is_key[key_at[i]] = 1
}

/^#/ { next }
/^[ \t]*$/ { finish(); next }
{
    text = $0
    sub(/^[a-z]+[ \t]+/, "", text)
    if (!is_key[$1] || text == "") fail("'" $0 "' is no " "name, file, old, new, red or why")
    else if ($1 == "red" && NF != 3) fail("red takes a program and a test")
    else if ($1 != "red" && entry[$1] != "") fail("two of " $1)
    if ($1 == "red") red[++n_red] = $2 " " $3
    entry[$1] = text
}

END {
    finish()
    if (!entries) fail(ENVIRON["ONLY"] == "" ? "an empty list" : "no error of that name")
    exit failed
}
