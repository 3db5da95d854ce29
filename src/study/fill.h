// Fills structs from the tree by the field tables: kinds, units, ranges, choices, defaults. Every
// fault is reported at its place, and reading goes on.
#ifndef STUDY_FILL_H
#define STUDY_FILL_H
#include "tree.h"

#define FILL_LONGEST_PATH 256
#define FILL_MOST_VALUES  100000 // of one list of numbers
#define FILL_MOST_THINGS  10000  // of one list of sections, or points of a curve

typedef struct {
    int line, column;
} place;

typedef struct {
    tacet_arena *arena;
    tacet_problems *problems;
    const char *file;
    const tacet_section *root; // to say where a misplaced key belongs
    char path[FILL_LONGEST_PATH];
    char **wrong; // paths with errors, for checks that need sound values
    size_t n_wrong, size_wrong;
    bool no_memory;
} filler;

void filler_clear(filler *f);

// Fills `into` (struct of section s) from a node, NULL where the file has none. `at`: where missing
// keys are reported. f->path names the section.
void fill_section(filler *f, const tacet_section *s, const tree_node *node, place at, void *into);
// One value; node is not NULL. What cannot be read is left absent (NAN, NULL, none, -1).
void fill_value(filler *f, const tacet_field *field, const tree_node *node, void *into);
void fill_absent(const tacet_field *field, void *into);
// Two things of a list with one name.
void fill_check_names(filler *f, const tacet_section *s, const tree_node *list, const void *things,
                      size_t n);

// An error or warning about the key that f->path names.
void fill_say(filler *f, bool warning, place at, const char *format, ...) TACET_PRINTF(4, 5);
void fill_mark(filler *f, const char *path); // an error about this path
// Was there an error about this path, above it or in it?
bool fill_is_wrong(const filler *f, const char *path);
bool fill_was_wrong(const filler *f, const char *path, size_t first_n); // among the first n errors
bool fill_is_busy(const filler *f); // so many errors that near names are not worth the time

// f->path gains ".key" or "[index]"; returns the length to which fill_leave cuts it back.
size_t fill_enter(filler *f, const char *key);
size_t fill_enter_item(filler *f, size_t index);
void fill_leave(filler *f, size_t length);

// The node of a key of a section: from its map, or the whole node by the section's shorthand.
const tree_node *section_child(const tacet_section *s, const tree_node *node, const char *key);
// Left out, or written without a value where that means the same.
bool node_is_nothing(const tree_node *node);
place node_place(const tree_node *node);

// Where a path from the root lies in the file, as deep as the file goes. *whole: all of it is
// there.
place place_of_path(const tacet_tree *tree, const char *path, bool *whole, const tree_node **out);

// ---- words for messages
#define SHOWN_TEXT 64
// 'text' in quotes, cut short, without control characters; or "a list", "a map", "nothing".
const char *shown_node(const tree_node *node, char out[SHOWN_TEXT]);
const char *shown_text(const char *text, char out[SHOWN_TEXT]);
#define RANGE_TEXT 96
// "20 to 1000 mm", or ""; for a value that is not in it, or NAN.
const char *range_text(const tacet_field *field, double value, char out[RANGE_TEXT]);
// " mm", or "" for a pure number
const char *unit_text(const char *unit, char out[32]);
// Names between commas into out, cut with ".." where it is full.
const char *joined(const char *const *names, size_t n, char *out, size_t bytes);
// "1.5" when a decimal comma seems to have split a number of this node in two, else NULL. A list of
// which it is not known that it holds too_many must have commas with and without blanks.
const char *decimal_comma(const tree_node *node, bool too_many, char out[SHOWN_TEXT]);
// The same for a number of digits that stands as a key: {mass_kg: 1,5}.
const char *decimal_comma_in_map(const tree_node *map, size_t key, char out[SHOWN_TEXT]);
#endif
