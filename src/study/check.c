#include "check.h"
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

void check_say(checker *c, bool warning, const char *path, const char *format, ...)
{
    char text[512], point[SHOWN_TEXT];
    va_list args;
    bool whole;
    const tree_node *node;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args); // texts and whole numbers only
    va_end(args);
    place at = place_of_path(c->tree, path, &whole, &node);
    const char *meant = whole && !warning ? decimal_comma(node, false, point) : NULL;
    tacet_text(c->f->path, sizeof c->f->path, "%s", path);
    fill_say(c->f, warning, at, "%s%s%s", text, meant ? "; numbers take a decimal point: " : "",
             meant ? meant : "");
    c->f->path[0] = '\0';
}

// Does this follow from an error that was already said? Things of lists that could not be read are
// checked no further, and nodes hang together only when all links are sound.
static bool follows(const checker *c, const char *path)
{
    char thing[FILL_LONGEST_PATH];
    const char *item = strrchr(path, ']');
    tacet_text(thing, sizeof thing, "%.*s", item ? (int)(item - path + 1) : 0, path);
    bool linked = strncmp(path, "train.nodes[", 12) == 0;
    return (item && fill_was_wrong(c->f, thing, c->n_filled)) ||
           (linked && (fill_is_wrong(c->f, "train.links") || fill_is_wrong(c->f, "train.dampers")));
}

// A room says what is wrong with a value; the key goes before it, or the name of the thing, or the
// whole path of a key that the file does not have.
static void say_of_room(void *who, bool warning, const char *path, const char *text)
{
    checker *c = who;
    const char *key = strrchr(path, '.');
    char name[SHOWN_TEXT];
    bool whole;
    const tree_node *node;
    if (follows(c, path)) return;
    key = key ? key + 1 : path;
    (void)place_of_path(c->tree, path, &whole, &node);
    if (strcmp(key, "name") == 0 && whole && node->kind == TREE_TEXT)
        check_say(c, warning, path, "%s: %s", shown_text(node->text, name), text);
    else if (!whole && !strchr(path, '['))
        check_say(c, warning, path, "%s: %s", path, text);
    else
        check_say(c, warning, path, "%.*s: %s", (int)strcspn(key, "["), key, text);
}

void check_rooms(checker *c)
{
    const tacet_study *s = c->study;
    tacet_reporter reporter = {say_of_room, c};
    bool engine = !fill_is_wrong(c->f, "engine") && !fill_is_wrong(c->f, "cycle") &&
                  !fill_is_wrong(c->f, "skip");
    if (engine) tacet_engine_def_check(&s->engine, &reporter);
    if (s->train.n_nodes) tacet_train_def_check(&s->train, &reporter);
    if (!fill_is_wrong(c->f, "body")) tacet_body_def_check(&s->body, &reporter);
    for (size_t i = 0; i < s->n_bands; i++) {
        char path[32];
        tacet_text(path, sizeof path, "bands[%zu]", i);
        if (!fill_is_wrong(c->f, path)) tacet_band_def_check(&s->bands[i], path, &reporter);
    }
}

void check_study(checker *c)
{
    check_rooms(c);
    check_nodes(c);
    check_quantities(c);
    check_screen(c);
    check_files(c);
    check_sense(c);
}

char *study_path(const tacet_study *s, const char *path, tacet_arena *a)
{
    if (path[0] == '/' || !s->folder || strcmp(s->folder, ".") == 0)
        return tacet_arena_text(a, path);
    size_t bytes = strlen(s->folder) + strlen(path) + 2;
    char *out = tacet_arena_alloc(a, bytes);
    return out ? tacet_text(out, bytes, "%s/%s", s->folder, path) : NULL;
}

bool tacet_study_place(const tacet_study *s, const char *path, int *line, int *column)
{
    bool whole;
    const tree_node *node;
    if (!s->tree || !s->tree->root) return false;
    place at = place_of_path(s->tree, path, &whole, &node);
    *line = at.line;
    *column = at.column;
    return true;
}
