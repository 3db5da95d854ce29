# usage: awk -f tests/listing.awk FILES...
# What the house rules do not like, one line each: kind, file, name, place and reading, with tabs.
#   long-function     more than 60 lines between its braces
#   many-parameters   more than 7
#   no-comment        public prototype with no comment above or beside it
#   no-unit           public double or curve whose name does not end in a unit
#   not-si            the same, in a unit that only files and screens use (show.h draws in those)
#   key-without-unit  key of a study with a dimension, unit neither in its name nor its section's
#   long-file         more than 700 lines
#   long-line         more than 100 columns
# Reads C by its layout, which clang-format has checked before.

function say(kind, name, place, reading) {
    printf "%s\t%s\t%s\t%s:%d: %s\n", kind, file, name, file, place, reading
}

# Does a name end in a unit, as in torque_Nm, stiffness_Nm_per_rad, low_hz, guard_percent?
function has_unit(name,    part, n, i) {
    n = split(name, part, "_")
    i = n
    while (i > 2 && part[i - 1] == "per" && part[i] in unit) i -= 2
    return i < n || part[i] in unit
}

# Line of the statement under way that holds a name.
function line_of(name,    i) {
    for (i = began; i < FNR; i++)
        if ((" " text_at[i] " ") ~ ("[^A-Za-z0-9_]" name "[^A-Za-z0-9_]")) return i
    return FNR
}

function judge_name(name) {
    if (!has_unit(name)) say("no-unit", name, line_of(name), name)
    else if (file !~ /show\.h$/ && name ~ /_(rpm|krpm2?|deg|kPa|MPa|GPa|bar|mm2?|ms|percent|h)$/)
        say("not-si", name, line_of(name), name)
}

# The name before the first bracket of a declaration or definition.
function name_of(text) {
    sub(/[ ]*\(.*/, "", text)
    sub(/.*[ *]/, "", text)
    return text
}

# Parameters between the bracket after the name and its partner.
function parameters_of(text,    i, depth, c, n) {
    i = index(text, "(")
    if (substr(text, i) ~ /^\([ ]*(void)?[ ]*\)/) return 0
    n = 1
    for (; i <= length(text); i++) {
        c = substr(text, i, 1)
        if (c == "(") depth++
        if (c == ")" && --depth == 0) return n
        if (c == "," && depth == 1) n++
    }
    return n
}

# Doubles and curves that a declaration names: members, parameters, of functions' own callbacks too.
function doubles_of(text,    part, n, i, k, name, names) {
    gsub(/TACET_[A-Z]+\([^)]*\)/, "", text)
    gsub(/\[[^]]*\]/, "", text)
    while (match(text, double_word "[^;(){]*")) {
        names = substr(text, RSTART, RLENGTH)
        text = substr(text, RSTART + RLENGTH)
        if (text ~ /^\(/) { # a function that gives a double: its arguments come next
            if (names !~ /,/) continue
            sub(/,[^,]*$/, "", names)
        }
        sub(double_word, "", names)
        n = split(names, part, ",")
        for (i = 1; i <= n; i++) {
            name = part[i]
            gsub(/^[ *]+|[ ]+$/, "", name)
            gsub(/const |\*/, "", name)
            if (name ~ / /) { # the next parameter, of another type or of this one
                if (name !~ "^" double_word) continue
                sub(double_word, "", name)
            }
            if (name ~ /^[A-Za-z_]+[A-Za-z0-9_]*$/) judge_name(name)
        }
    }
}

function count_parameters(text, place,    n) {
    n = parameters_of(text)
    if (n > 7) say("many-parameters", name_of(text), place, name_of(text) " takes " n)
}

function function_ends(    lines) {
    lines = FNR - opened - 1
    if (lines > 60) say("long-function", name_of(head), opened, name_of(head) ", " lines " lines")
    count_parameters(head, opened)
    opened = 0
    head = ""
}

# One statement of a header, whole: a prototype, or a type with its members.
function statement(    text) {
    text = said
    said = ""
    if (!is_header) return
    if (text !~ /^[ ]*typedef/ && text ~ /\(/ && text !~ /{/) {
        if (!commented) say("no-comment", name_of(text), began, name_of(text))
        count_parameters(text, began)
    }
    if (public) doubles_of(text)
}

function file_ends() {
    if (file != "" && lines > 700) say("long-file", "-", lines, lines " lines")
}

BEGIN {
    n = split("rad deg s ms h rpm krpm krpm2 hz m mm m2 mm2 m3 m4 s2 kg g mg kgm kgmm kgm2 " \
        "N Nm Nms W J mj K k Pa kPa MPa GPa pa kpa mpa gpa db percent nm nms", u, " ")
    for (i = 1; i <= n; i++) unit[u[i]] = 1
    double_word = "(^|[ (,]+)(const )?(double|tacet_curve)( complex)? +"
}

FNR == 1 {
    file_ends()
    file = FILENAME
    sub(/^\.\//, "", file)
    public = file ~ /(^|\/)include\/tacet\//
    is_header = public
    is_c = file ~ /\.[ch]$/
    is_keys = file ~ /keys\.c$/
    opened = depth = above = commented = 0
    head = said = key = table = section = ""
    split("", macro)
    split("", bare)
}

{ lines = FNR }

length($0) > 100 { say("long-line", "-", FNR, length($0) " columns") }

!is_c { next }

{
    line = $0
    remark = line ~ /\/\//
    alone = line ~ /^[ ]*\/\//
    gsub(/\\"/, "", line)
    gsub(/"[^"]*"/, "\"\"", line)
    sub(/[ ]*\/\/.*/, "", line)
}

# ---- keys: a row with .unit has a unit in .key, or in the name of its section
is_keys {
    if ($0 ~ /^#define .*\.unit = "/) macro[$2] = 1
    if (match($0, /tacet_field [a-z_]+\[\]/)) table = substr($0, RSTART + 12, RLENGTH - 14)
    if (match($0, /\.key = "[a-z0-9_]+"/)) {
        key = substr($0, RSTART + 8, RLENGTH - 9)
        key_at = FNR
    }
    dimension = $0 ~ /\.unit = "/ && $0 !~ /^#define/
    n = split(line, word, /[^A-Za-z_0-9]+/)
    for (i = 1; i <= n && $0 !~ /^#define/; i++) if (word[i] in macro) dimension = 1
    if (dimension && key != "" && !has_unit(key)) {
        bare[table, key] = key_at
        key = ""
    }
    if ($0 ~ /tacet_section [a-z_]+ =/) section = "?"
    if (section == "?" && match($0, /\.name = "[a-z0-9_]+"/))
        section = substr($0, RSTART + 9, RLENGTH - 10)
    if (section != "" && match($0, /\.fields = [a-z_]+/)) {
        fields = substr($0, RSTART + 10, RLENGTH - 10)
        for (b in bare) {
            split(b, half, SUBSEP)
            if (half[1] != fields) continue
            if (!has_unit(section))
                say("key-without-unit", half[2], bare[b], section ": " half[2])
            delete bare[b]
        }
        section = ""
    }
}

# ---- functions of C files
!is_header {
    if (opened) {
        if (line ~ /^}/) function_ends()
        next
    }
    if (line ~ /^#/ || line ~ /^$/ || line ~ /^}/ || line ~ /^[ ]*\/\//) {
        if (line !~ /^$/ || head !~ /\(/) head = ""
        next
    }
    if (line ~ /^{/) {
        if (head ~ /\)[ ]*$/) opened = FNR
        else head = ""
        next
    }
    head = head " " line
    if (line ~ /[;{]$/) head = ""
    next
}

# ---- statements of public headers
{
    if (line ~ /^#/ || line ~ /^[ ]*$/) {
        if (!alone) above = 0
        else above = 1
        next
    }
    if (said == "") {
        began = FNR
        commented = above
    }
    if (remark) commented = 1
    said = said " " line
    text_at[FNR] = line
    depth += gsub(/{/, "{", line) - gsub(/}/, "}", line)
    if (depth == 0 && line ~ /;[ ]*$/) {
        statement()
        above = 0
    }
}

END { file_ends() }
