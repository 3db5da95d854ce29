// Lists every path of a JSON document on standard input with its types, for the kept lists: one
// line a path, sorted; list elements share the path "..[]".
#include <jansson.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define PATHS_MOST 4096
#define PATH_MOST  512

enum { NUMBER = 1, STRING = 2, BOOL = 4, NONE = 8, OBJECT = 16, ARRAY = 32 };
static const char *const type_text[] = {"number", "string", "bool", "null", "object", "array"};

typedef struct {
    char *path;
    unsigned types;
} entry;
typedef struct {
    entry at[PATHS_MOST];
    size_t n;
} list;

static unsigned type_of(const json_t *v)
{
    switch (json_typeof(v)) {
    case JSON_OBJECT:
        return OBJECT;
    case JSON_ARRAY:
        return ARRAY;
    case JSON_STRING:
        return STRING;
    case JSON_INTEGER:
    case JSON_REAL:
        return NUMBER;
    case JSON_TRUE:
    case JSON_FALSE:
        return BOOL;
    case JSON_NULL:
        break;
    }
    return NONE;
}

static void note(list *l, const char *path, unsigned type)
{
    for (size_t i = 0; i < l->n; i++)
        if (strcmp(l->at[i].path, path) == 0) {
            l->at[i].types |= type;
            return;
        }
    if (l->n == PATHS_MOST) exit(2);
    l->at[l->n].path = strdup(path);
    if (!l->at[l->n].path) exit(2);
    l->at[l->n++].types = type;
}

static void walk(list *l, json_t *v, char *path)
{
    size_t used = strlen(path);
    note(l, *path ? path : ".", type_of(v));
    const char *key;
    json_t *child;
    size_t i;
    if (json_is_object(v)) {
        json_object_foreach(v, key, child)
        {
            snprintf(path + used, PATH_MOST - used, "%s%s", used ? "." : "", key);
            walk(l, child, path);
            path[used] = '\0';
        }
    }
    if (json_is_array(v)) {
        snprintf(path + used, PATH_MOST - used, "[]");
        json_array_foreach(v, i, child) walk(l, child, path);
        path[used] = '\0';
    }
}

static int by_path(const void *a, const void *b)
{
    return strcmp(((const entry *)a)->path, ((const entry *)b)->path);
}

int main(void)
{
    static list l;
    char path[PATH_MOST] = "";
    json_error_t e;
    json_t *root = json_loadf(stdin, JSON_REJECT_DUPLICATES, &e);
    if (!root) {
        fprintf(stderr, "no JSON: line %d: %s\n", e.line, e.text);
        return 1;
    }
    walk(&l, root, path);
    qsort(l.at, l.n, sizeof *l.at, by_path);
    for (size_t i = 0; i < l.n; i++) {
        printf("%s ", l.at[i].path);
        bool first = true;
        for (unsigned t = 0; t < 6; t++)
            if (l.at[i].types & 1u << t) {
                printf("%s%s", first ? "" : "|", type_text[t]);
                first = false;
            }
        printf("\n");
        free(l.at[i].path);
    }
    json_decref(root);
    return 0;
}
