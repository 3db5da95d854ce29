// Words and what they come to, as tacet patterns writes them. Private to cli.
#ifndef CLI_PATTERNS_H
#define CLI_PATTERNS_H
#include "cli/cli.h"

typedef struct {
    const char *name; // NULL: none
    const tacet_roll *roll;
    size_t placements;
} pattern_entry;

typedef struct {
    const cli_call *call;
    tacet_arena *arena;
    const tacet_study *study; // NULL: none
    pattern_entry *entry;
    size_t n;
} pattern_list;

// Table of all, and the own spectrum of a single one; or CSV, or JSON.
int patterns_write(const pattern_list *l);
// From a density, a word or a book with --cylinders and the other makers' options.
int patterns_of_text(const cli_call *call, const char *text, tacet_arena *a);

#endif
