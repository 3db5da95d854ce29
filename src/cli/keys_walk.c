// Every key of a study, from the field tables.
#include "cli/keys.h"
#include <stdio.h>
#include <string.h>

#define PATH_MOST  200
#define DEPTH_MOST 8
#define HUGE       1e11 // a bound beyond this is none that anybody would want to read

static const char *kind_text(tacet_field_kind kind)
{
    switch (kind) {
    case TACET_FIELD_NUMBER:
        return "number";
    case TACET_FIELD_CURVE:
        return "curve";
    case TACET_FIELD_COUNT:
        return "count";
    case TACET_FIELD_CHOICE:
        return "choice";
    case TACET_FIELD_TEXT:
        return "text";
    case TACET_FIELD_NAME:
        return "name";
    case TACET_FIELD_NUMBERS:
    case TACET_FIELD_COUNTS:
    case TACET_FIELD_TEXTS:
        return "list";
    case TACET_FIELD_SECTION:
        return "section";
    case TACET_FIELD_SECTIONS:
        return "sections";
    }
    return "";
}

static void append(char *to, size_t size, const char *text)
{
    size_t used = strlen(to);
    snprintf(to + used, size - used, "%s", text);
}

static void range_text(const tacet_field *f, char *out, size_t size)
{
    char low[TACET_NUMBER_TEXT], high[TACET_NUMBER_TEXT];
    *out = '\0';
    for (size_t i = 0; f->choices && f->choices[i]; i++) {
        if (i) append(out, size, " | ");
        append(out, size, f->choices[i]);
    }
    bool bounded = f->low != 0 || f->high != 0;
    bool numbers = f->kind <= TACET_FIELD_COUNT || f->kind == TACET_FIELD_NUMBERS ||
                   f->kind == TACET_FIELD_COUNTS;
    if (!bounded || !numbers || f->choices) {
        if (f->word) append(out, size, f->word);
        return;
    }
    tacet_number_format_short(f->low, 6, low);
    if (f->high > HUGE)
        snprintf(out, size, "%s and more", low);
    else
        snprintf(out, size, "%s .. %s", low, tacet_number_format_short(f->high, 6, high));
    if (f->word || f->kind == TACET_FIELD_CURVE) append(out, size, ", or ");
    if (f->kind == TACET_FIELD_CURVE) {
        append(out, size, "a curve over ");
        append(out, size, f->x_unit ? f->x_unit : "x");
    }
    if (f->word) append(out, size, f->word);
}

static const char *fallback_text(const tacet_field *f)
{
    bool section = f->kind == TACET_FIELD_SECTION || f->kind == TACET_FIELD_SECTIONS;
    if (!f->fallback) return "required";
    if (*f->fallback) return f->fallback;
    if (f->word) return f->word;
    return section ? "" : "none";
}

typedef struct {
    void (*tell)(void *who, const cli_key *k);
    void *who;
} walk;

// The path grows in place; `used` is what the parents hold of it.
static void walk_section(const walk *w, const tacet_section *s, char *path, size_t used, int depth)
{
    for (const tacet_field *f = s->fields; f->key; f++) {
        bool many = f->kind == TACET_FIELD_SECTIONS;
        int n = snprintf(path + used, PATH_MOST - used, "%s%s%s", used ? "." : "", f->key,
                         many ? "[]" : "");
        cli_key k = {.path = path,
                     .kind = kind_text(f->kind),
                     .unit = f->unit,
                     .doc = f->doc ? f->doc : "",
                     .section = s->doc};
        range_text(f, k.range, sizeof k.range);
        snprintf(k.fallback, sizeof k.fallback, "%s", fallback_text(f));
        w->tell(w->who, &k);
        if (f->section && depth < DEPTH_MOST && n > 0 && used + (size_t)n < PATH_MOST)
            walk_section(w, f->section, path, used + (size_t)n, depth + 1);
        path[used] = '\0';
    }
}

void cli_keys_walk(const tacet_section *root, void (*tell)(void *who, const cli_key *k), void *who)
{
    char path[PATH_MOST] = "";
    walk w = {tell, who};
    walk_section(&w, root, path, 0, 0);
}
