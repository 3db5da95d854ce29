#include "fill.h"
#include <stdlib.h>
#include <string.h>

place node_place(const tree_node *node)
{
    return (place){node->line, node->column};
}

bool node_is_nothing(const tree_node *node)
{
    return !node || (node->kind == TREE_TEXT && !node->quoted && !*node->text);
}

const tree_node *section_child(const tacet_section *s, const tree_node *node, const char *key)
{
    if (node_is_nothing(node)) return NULL;
    if (node->kind == TREE_MAP) return tree_find(node, key, NULL);
    return s->shorthand && strcmp(s->shorthand, key) == 0 ? node : NULL;
}

// One step of a path: "key" and any number of "[index]". False: the file does not go so far.
static bool step(const char *word, size_t letters, const tree_node **node, place *at)
{
    char key[FILL_LONGEST_PATH];
    size_t n = strcspn(word, "[");
    if (n > letters) n = letters;
    if (n >= sizeof key) return false;
    memcpy(key, word, n);
    key[n] = '\0';
    tree_node *key_node = NULL;
    const tree_node *child = tree_find(*node, key, &key_node);
    if (!child && (*node)->kind == TREE_MAP) return false; // otherwise a shorthand: the same node
    if (child) {
        *node = child;
        bool beside = child->line == key_node->line;
        *at = node_place(beside && !node_is_nothing(child) ? child : key_node);
    }
    for (const char *open = word + n; open < word + letters && *open == '[';) {
        size_t index = (size_t)strtoul(open + 1, NULL, 10);
        if ((*node)->kind == TREE_LIST) {
            if (index >= (*node)->n) return false;
            *node = (*node)->child[index];
            *at = node_place(*node);
        }
        open += strcspn(open, "]") + 1;
    }
    return true;
}

place place_of_path(const tacet_tree *tree, const char *path, bool *whole, const tree_node **out)
{
    const tree_node *node = tree->root;
    place at = {1, 1};
    *whole = node != NULL;
    while (*whole && *path) {
        size_t letters = strcspn(path, ".");
        *whole = step(path, letters, &node, &at);
        path += letters + (path[letters] == '.');
    }
    *out = node;
    return at;
}
