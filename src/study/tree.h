// The study file as read: a small tree of texts, lists and maps, every one with its place. Nothing
// has a type yet: the field tables decide what a text means.
#ifndef STUDY_TREE_H
#define STUDY_TREE_H
#include "tacet/base.h"

#define TREE_MOST_BYTES   ((size_t)64 << 20)
#define TREE_MOST_NODES   1000000 // after every alias is written out
#define TREE_MOST_DEPTH   64
#define TREE_MOST_ANCHORS 1024

typedef enum { TREE_TEXT, TREE_LIST, TREE_MAP } tree_kind;
typedef struct tree_node tree_node;
struct tree_node {
    tree_kind kind;
    bool quoted;      // of a text: in quotes or a block
    int line, column; // from 1, in characters
    unsigned weight;  // nodes in it, aliases written out
    const char *text; // TREE_TEXT; never NULL, no zero byte inside
    size_t n;         // children
    tree_node **child;
    tree_node **key; // of a map: texts, [n]
};

typedef struct tacet_tree {
    const char *file;
    tree_node *root; // NULL: the file holds nothing
} tacet_tree;

// Reads one YAML document. Everything that is wrong goes to `problems` with its place; after a
// fault in the writing the rest cannot be read, repeated keys are all reported. TACET_BAD_INPUT
// when anything was.
TACET_USE tacet_status tree_read(const char *bytes, size_t n, const char *file, tacet_arena *a,
                                 tacet_problems *problems, tacet_tree **out);

// Child of a map by key, NULL if it has none or is no map; *key (may be NULL) gets the key's node.
tree_node *tree_find(const tree_node *map, const char *key, tree_node **key_node);

// What a libyaml message means to somebody who writes a study.
const char *tree_yaml_words(const char *problem);
#endif
