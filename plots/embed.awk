# usage: awk -f embed.awk *.gnuplot   the templates as a C table, for show
BEGIN {
    print "#include \"show/canvas.h\""
    print "const canvas_template canvas_templates[] = {"
}
FNR == 1 {
    if (NR > 1) print "},"
    name = FILENAME
    sub(/.*\//, "", name)
    sub(/\.gnuplot$/, "", name)
    printf "{\"%s\",\n", name
}
/^#/ { next }
{
    gsub(/\\/, "&&")
    gsub(/"/, "\\\\&")
    printf "\"%s\\n\"\n", $0
}
END { print "},\n{NULL, NULL}};" }
