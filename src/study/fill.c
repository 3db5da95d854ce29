#include "fill.h"
#include "tacet/base.h"
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define MOST_KEYS  64  // of one section, in messages about near names
#define BUSY       100 // errors after which near names are not sought
#define MOST_WRONG 2000

void filler_clear(filler *f)
{
    for (size_t i = 0; i < f->n_wrong; i++)
        free(f->wrong[i]);
    free(f->wrong);
    f->wrong = NULL;
    f->n_wrong = f->size_wrong = 0;
}

// ---- the path of what is being read
static size_t append(filler *f, const char *text)
{
    size_t length = strlen(f->path), n = strlen(text);
    if (length + n < sizeof f->path) memcpy(f->path + length, text, n + 1);
    return length;
}

size_t fill_enter(filler *f, const char *key)
{
    size_t length = append(f, *f->path ? "." : "");
    append(f, key);
    return length;
}

size_t fill_enter_item(filler *f, size_t index)
{
    char text[24];
    return append(f, tacet_text(text, sizeof text, "[%zu]", index));
}

void fill_leave(filler *f, size_t length)
{
    f->path[length] = '\0';
}

// ---- reporting
bool fill_is_busy(const filler *f)
{
    return tacet_problems_errors(f->problems) > BUSY;
}

void fill_mark(filler *f, const char *path)
{
    if (f->n_wrong == MOST_WRONG) return;
    if (f->n_wrong == f->size_wrong) {
        size_t size = f->size_wrong ? f->size_wrong * 2 : 16;
        char **wrong = realloc(f->wrong, size * sizeof *wrong);
        if (!wrong) {
            f->no_memory = true;
            return;
        }
        f->wrong = wrong;
        f->size_wrong = size;
    }
    char *copy = strdup(path);
    if (copy)
        f->wrong[f->n_wrong++] = copy;
    else
        f->no_memory = true;
}

static bool begins(const char *path, const char *above)
{
    size_t n = strlen(above);
    return strncmp(path, above, n) == 0 && (!path[n] || path[n] == '.' || path[n] == '[' || !n);
}

bool fill_was_wrong(const filler *f, const char *path, size_t first_n)
{
    if (f->n_wrong == MOST_WRONG) return true;
    for (size_t i = 0; i < first_n; i++)
        if (begins(f->wrong[i], path) || begins(path, f->wrong[i])) return true;
    return false;
}

bool fill_is_wrong(const filler *f, const char *path)
{
    return fill_was_wrong(f, path, f->n_wrong);
}

void fill_say(filler *f, bool warning, place at, const char *format, ...)
{
    char text[768];
    va_list args;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args); // texts and whole numbers only
    va_end(args);
    tacet_problems_add(f->problems, warning, f->file, at.line, at.column, "%s", text);
    if (!warning) fill_mark(f, f->path);
}

// What a section is called in messages: its path, or the name of a thing in a list.
static const char *owner(const filler *f, const tree_node *node, char *out, size_t bytes)
{
    const char *open = strrchr(f->path, '[');
    if (!*f->path) return "the study";
    if (!open || strchr(open, '.')) return tacet_text(out, bytes, "%s", f->path);
    char name_text[SHOWN_TEXT];
    const tree_node *name = tree_find(node, "name", NULL);
    int list = (int)(open - f->path);
    if (name && name->kind == TREE_TEXT && *name->text)
        return tacet_text(out, bytes, "%s of %.*s", shown_text(name->text, name_text), list,
                          f->path);
    return tacet_text(out, bytes, "item %lu of %.*s", strtoul(open + 1, NULL, 10) + 1, list,
                      f->path);
}

// ---- unknown keys
static size_t keys_of(const tacet_section *s, const char *names[MOST_KEYS])
{
    size_t n = 0;
    for (const tacet_field *field = s->fields; field->key && n < MOST_KEYS; field++)
        names[n++] = field->key;
    return n;
}

static const tacet_field *find_field(const tacet_section *s, const char *key)
{
    for (const tacet_field *field = s->fields; field->key; field++)
        if (strcmp(field->key, key) == 0) return field;
    return NULL;
}

// Path of the section that has this key, "" for the root; NULL: none has.
static bool home_of(const tacet_section *s, const char *key, char *path, size_t bytes)
{
    if (find_field(s, key)) return true;
    size_t length = strlen(path);
    for (const tacet_field *field = s->fields; field->key; field++) {
        if (!field->section) continue;
        tacet_text(path + length, bytes - length, "%s%s", length ? "." : "", field->key);
        if (home_of(field->section, key, path, bytes)) return true;
        path[length] = '\0';
    }
    return false;
}

// Reports a key that the section has not, and returns the one that was probably meant.
static const char *unknown_key(filler *f, const tacet_section *s, const tree_node *node, size_t i)
{
    const tree_node *key = node->key[i];
    const char *names[MOST_KEYS];
    char text[SHOWN_TEXT], point[SHOWN_TEXT], who[128], home[FILL_LONGEST_PATH] = "", list[160];
    const char *of = owner(f, node, who, sizeof who);
    shown_text(key->text, text);
    place at = node_place(key);
    size_t n = keys_of(s, names), length = fill_enter(f, key->text);
    const char *near = fill_is_busy(f) ? NULL : tacet_near_name(key->text, names, n);
    const char *meant = decimal_comma_in_map(node, i, point);
    if (meant)
        fill_say(f, false, at, "%s is no key of %s; numbers take a decimal point: %s", text, of,
                 meant);
    else if (near)
        fill_say(f, false, at, "%s is no key of %s; did you mean %s?", text, of, near);
    else if (!fill_is_busy(f) && f->root && home_of(f->root, key->text, home, sizeof home))
        fill_say(f, false, at, "%s is no key of %s; it belongs to %s", text, of,
                 *home ? home : "the study itself");
    else
        fill_say(f, false, at, "%s is no key of %s; it has %s", text, of,
                 joined(names, n, list, sizeof list));
    fill_leave(f, length);
    return near;
}

// ---- sections
static void fill_missing(filler *f, const tacet_field *field, const tree_node *section, place at)
{
    char who[128], unit[32];
    bool number = *unit_text(field->unit, unit);
    fill_say(f, false, at, "%s: %s is missing: %s%s%s", owner(f, section, who, sizeof who),
             field->key, field->doc ? field->doc : "", number ? ", in" : "", number ? unit : "");
}

static bool asks_for_keys(const tacet_section *s)
{
    for (const tacet_field *field = s->fields; field->key; field++)
        if (!field->fallback) return true;
    return false;
}

// A section that asks for keys and may be left out is absent as a whole.
static void fill_default(filler *f, const tacet_field *field, place at, void *into)
{
    if (field->kind == TACET_FIELD_SECTION && asks_for_keys(field->section)) {
        fill_absent(field, into);
        return;
    }
    if (field->kind == TACET_FIELD_SECTION) {
        fill_section(f, field->section, NULL, at, (char *)into + field->offset);
        return;
    }
    fill_absent(field, into);
    if (!*field->fallback || field->kind == TACET_FIELD_SECTIONS) return;
    tree_node text = {
        .kind = TREE_TEXT, .line = at.line, .column = at.column, .text = field->fallback};
    const tree_node *node = &text;
    if (*field->fallback == '[') {
        tacet_tree *tree = NULL;
        tacet_status status = tree_read(field->fallback, strlen(field->fallback), f->file, f->arena,
                                        f->problems, &tree);
        if (status == TACET_NO_MEMORY) f->no_memory = true;
        if (status) return;
        node = tree->root;
    }
    fill_value(f, field, node, into);
}

static bool is_section(const tacet_field *field)
{
    return field->kind == TACET_FIELD_SECTION || field->kind == TACET_FIELD_SECTIONS;
}

static void fill_field(filler *f, const tacet_section *s, const tacet_field *field,
                       const tree_node *section, place at, bool excused, void *into)
{
    tree_node *key = NULL;
    const tree_node *node = section_child(s, section, field->key);
    if (section && section->kind == TREE_MAP) (void)tree_find(section, field->key, &key);
    bool nothing = !node || (is_section(field) && node_is_nothing(node) && field->fallback);
    size_t length = fill_enter(f, field->key);
    place here = key ? node_place(key) : at;
    if (nothing && field->fallback) {
        fill_default(f, field, here, into);
    } else if (!nothing && field->kind == TACET_FIELD_SECTION) {
        fill_section(f, field->section, node, here, (char *)into + field->offset);
    } else if (!nothing) {
        fill_absent(field, into);
        fill_value(f, field, node, into);
    } else {
        fill_absent(field, into);
        fill_mark(f, f->path);
        fill_leave(f, length);
        if (!excused) fill_missing(f, field, section, at);
    }
    fill_leave(f, length);
}

// A section that is required and missing is said by its owner alone; its members are left absent.
static void all_absent(const tacet_section *s, void *into)
{
    for (const tacet_field *field = s->fields; field->key; field++)
        fill_absent(field, into);
}

void fill_section(filler *f, const tacet_section *s, const tree_node *node, place at, void *into)
{
    if (node && !node_is_nothing(node) && node->kind != TREE_MAP && !s->shorthand) {
        char text[SHOWN_TEXT], list[100], who[128];
        const char *names[MOST_KEYS];
        fill_say(f, false, node_place(node), "%s is %s; a map of keys is needed: %s",
                 owner(f, node, who, sizeof who), shown_node(node, text),
                 joined(names, keys_of(s, names), list, sizeof list));
        all_absent(s, into);
        return;
    }
    bool meant[MOST_KEYS] = {false}; // keys that a mistyped one stands for
    for (size_t i = 0; node && node->kind == TREE_MAP && i < node->n; i++) {
        if (find_field(s, node->key[i]->text)) continue;
        const char *near = unknown_key(f, s, node, i);
        const tacet_field *field = near ? find_field(s, near) : NULL;
        if (field && field - s->fields < MOST_KEYS) meant[field - s->fields] = true;
    }
    for (const tacet_field *field = s->fields; field->key; field++) {
        ptrdiff_t i = field - s->fields;
        fill_field(f, s, field, node, at, i < MOST_KEYS && meant[i], into);
    }
}

// ---- absent values
void fill_absent(const tacet_field *field, void *into)
{
    char *at = (char *)into + field->offset, *count = (char *)into + field->count_offset;
    switch (field->kind) {
    case TACET_FIELD_NUMBER:
        *(double *)(void *)at = NAN;
        break;
    case TACET_FIELD_CURVE:
        *(tacet_curve *)(void *)at = (tacet_curve){0};
        break;
    case TACET_FIELD_COUNT:
        *(unsigned *)(void *)at = 0;
        break;
    case TACET_FIELD_CHOICE:
        *(int *)(void *)at = -1;
        break;
    case TACET_FIELD_TEXT:
    case TACET_FIELD_NAME:
        *(const char **)(void *)at = NULL;
        break;
    case TACET_FIELD_SECTION:
        all_absent(field->section, at);
        break;
    default: // lists
        *(void **)(void *)at = NULL;
        *(size_t *)(void *)count = 0;
    }
}

// ---- names of the things in a list
typedef struct {
    const char *name;
    size_t at;
} named;

static int by_name(const void *a, const void *b)
{
    const named *left = a, *right = b;
    int c = strcmp(left->name, right->name);
    return c ? c : (left->at > right->at) - (left->at < right->at);
}

void fill_check_names(filler *f, const tacet_section *s, const tree_node *list, const void *things,
                      size_t n)
{
    const tacet_field *field = s->fields;
    while (field->key && field->kind != TACET_FIELD_NAME)
        field++;
    if (!field->key || n < 2) return;
    named *names = malloc(n * sizeof *names);
    if (!names) {
        f->no_memory = true;
        return;
    }
    size_t m = 0;
    for (size_t i = 0; i < n; i++) {
        const char *thing = (const char *)things + i * s->size + field->offset;
        const char *name = *(const char *const *)(const void *)thing;
        if (name) names[m++] = (named){name, i};
    }
    qsort(names, m, sizeof *names, by_name);
    for (size_t i = 1, first = 0; i < m; i++) {
        if (strcmp(names[first].name, names[i].name) != 0) {
            first = i;
            continue;
        }
        const tree_node *item = list->child[names[i].at],
                        *before = section_child(s, list->child[names[first].at], field->key);
        const tree_node *node = section_child(s, item, field->key);
        char text[SHOWN_TEXT];
        size_t length = fill_enter_item(f, names[i].at);
        fill_say(f, false, node_place(node ? node : item),
                 "%s %s a second time; the first is at line %d", field->key,
                 shown_text(names[i].name, text), before ? before->line : list->line);
        fill_leave(f, length);
    }
    free(names);
}
