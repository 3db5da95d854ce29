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

// A room says what is wrong with a value; the key goes before it.
static void say_of_room(void *who, bool warning, const char *path, const char *text)
{
    const char *key = strrchr(path, '.');
    key = key ? key + 1 : path;
    check_say(who, warning, path, "%.*s: %s", (int)strcspn(key, "["), key, text);
}

void check_rooms(checker *c)
{
    const tacet_study *s = c->study;
    tacet_reporter reporter = {say_of_room, c};
    bool engine = !fill_is_wrong(c->f, "engine") && !fill_is_wrong(c->f, "cycle") &&
                  !fill_is_wrong(c->f, "skip");
    if (engine) tacet_engine_def_check(&s->engine, &reporter);
    if (!fill_is_wrong(c->f, "train")) tacet_train_def_check(&s->train, &reporter);
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
