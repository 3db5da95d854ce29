// The keys of a study, laid out from the field tables. Private to cli.
#ifndef CLI_KEYS_H
#define CLI_KEYS_H
#include "tacet/base.h"

typedef struct {
    const char *path;  // "train.nodes[].name"
    const char *kind;  // "number", "curve", "count", "choice", "text", "name", "list", "section"
    const char *unit;  // NULL: none
    char fallback[96]; // "required", "none", or as the file could say it
    char range[160];   // "0.1 .. 50", "clockwise | counterclockwise", ""
    const char *doc;
    const char *section; // doc of the section that holds it
} cli_key;
// Calls tell for every key below `root`, sections before their own keys.
void cli_keys_walk(const tacet_section *root, void (*tell)(void *who, const cli_key *k), void *who);

#endif
