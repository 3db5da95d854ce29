#include "tree.h"
#include <string.h>

// libyaml's messages name its own grammar; these name what to look at.
static const struct {
    const char *said, *meant;
} words[] = {
    {"mapping values are not allowed in this context",
     "a ':' that cannot stand here: a text with ': ' inside needs quotes, and keys of one section "
     "start in one column"},
    {"found unexpected ':'", "a ':' that cannot stand here: a key and its ':' are followed by a "
                             "blank and a value"},
    {"did not find expected key",
     "a key was expected here: keys of one section start in one column, and a text that begins "
     "with a quote ends with it"},
    {"could not find expected ':'", "a key without ':' and a blank after it"},
    {"found character that cannot start any token",
     "a character that cannot stand here: indent with blanks, not tabs, and put quotes around a "
     "text that begins with @ ` or %"},
    {"found a tab character that violates indentation",
     "a tab at the start of a line; indent with blanks"},
    {"found a tab character where an indentation space is expected",
     "a tab at the start of a line; indent with blanks"},
    {"did not find expected ',' or ']'", "a list that began with '[' needs ',' or ']' here"},
    {"did not find expected ',' or '}'", "a map that began with '{' needs ',' or '}' here"},
    {"did not find expected '-' indicator",
     "an item of the list that begins with '- ' was expected "
     "here: items start in one column"},
    {"block sequence entries are not allowed in this context",
     "'- ' cannot stand here: a list begins on the line after its key"},
    {"found unexpected end of stream", "the file ends inside a quoted text"},
    {"found unknown escape character",
     "'\\' before a letter that it gives no meaning: use single quotes around a text with '\\'"},
    {"did not find expected <document start>", "only one study may stand in a file"},
    {"did not find expected node content", "a value was expected here"},
    {"did not find expected alphabetic or numeric character",
     "& names a value and * repeats it, the name (letters, digits, - and _) close behind; a text "
     "that begins with one of them needs quotes"},
    {"control characters are not allowed", "a control character; a study is plain text in UTF-8"},
};

const char *tree_yaml_words(const char *problem)
{
    if (!problem) return "this cannot be read as YAML";
    for (size_t i = 0; i < sizeof words / sizeof *words; i++)
        if (strcmp(words[i].said, problem) == 0) return words[i].meant;
    return problem;
}
