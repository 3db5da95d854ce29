# usage: awk -f embed.awk study.yaml   the study as a C string, for tacet example
BEGIN {
    print "extern const char cli_example_study[];"
    print "const char cli_example_study[] ="
}
{
    gsub(/\\/, "&&")
    gsub(/"/, "\\\\&")
    printf "\"%s\\n\"\n", $0
}
END { print ";" }
