// "mounts=15%, coupling=10%" against the links and mounts of a model.
#include "internal.h"
#include "rules.h"
#include <math.h>
#include <string.h>

#define ALL_MOUNTS "mounts"
#define NAMES_MOST 256

static size_t n_mounts(const tacet_model *m)
{
    const tacet_body *b = tacet_model_body(m);
    return b ? tacet_body_mounts(b) : 0;
}

static size_t mount_find(const tacet_model *m, const char *name)
{
    for (size_t i = 0; i < n_mounts(m); i++)
        if (strcmp(tacet_body_mount_name(tacet_model_body(m), i), name) == 0) return i;
    return SIZE_MAX;
}

// Near names, or what there is.
static tacet_status unknown(const tacet_model *m, const char *read, tacet_error *e)
{
    const char *names[NAMES_MOST];
    const tacet_train *t = tacet_model_train(m);
    char all[160] = "";
    size_t n = 0;
    if (n_mounts(m)) names[n++] = ALL_MOUNTS;
    for (size_t i = 0; i < n_mounts(m); i++)
        names[n++] = tacet_body_mount_name(tacet_model_body(m), i);
    for (size_t i = 0; i < tacet_train_links(t) && n < NAMES_MOST; i++)
        names[n++] = tacet_train_link_name(t, i);
    const char *near = tacet_near_name(read, names, n);
    if (near)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "no mount and no link is called '%.40s'; did you mean '%s'?", read, near);
    for (size_t i = 0; i < n; i++) {
        size_t used = strlen(all);
        bool fits = used + strlen(names[i]) + 8 < sizeof all;
        tacet_text(all + used, sizeof all - used, "%s%s", i ? ", " : "", fits ? names[i] : "..");
        if (!fits) break;
    }
    return tacet_fail(e, TACET_BAD_INPUT, "no mount and no link is called '%.40s'; allowed: %s",
                      read, n ? all : "none, the study has no such thing");
}

static tacet_status find(const tacet_model *m, tacet_scatter_entry *out, tacet_error *e)
{
    out->link = tacet_train_link_find(tacet_model_train(m), out->name);
    out->mount = mount_find(m, out->name);
    bool all = strcmp(out->name, ALL_MOUNTS) == 0 && n_mounts(m) > 0;
    if ((out->link != SIZE_MAX) + (out->mount != SIZE_MAX) + all > 1)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "'%.40s' may mean more than one thing: all mounts, a mount or a link",
                          out->name);
    if (out->link == SIZE_MAX && out->mount == SIZE_MAX && !all) return unknown(m, out->name, e);
    return TACET_OK;
}

static char *trimmed(char *text)
{
    size_t n = strlen(text);
    while (n > 0 && text[n - 1] == ' ')
        text[--n] = '\0';
    return text + strspn(text, " ");
}

static tacet_status read_width(char *text, tacet_scatter_entry *out, tacet_error *e)
{
    double percent;
    size_t n = strlen(text);
    bool sign = n > 0 && text[n - 1] == '%';
    if (sign) text[n - 1] = '\0';
    if (!sign || !tacet_number_parse(trimmed(text), &percent) || percent < 1 || percent > 50)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "'%.40s=%.40s%s': a share from 1%% to 50%% is allowed, as in %.40s=15%%",
                          out->name, text, sign ? "%" : "", out->name);
    out->half_width = percent / 100;
    return TACET_OK;
}

// One entry of the text, which is written to.
static tacet_status read_entry(char *text, const tacet_model *m, tacet_scatter_entry *out,
                               tacet_error *e)
{
    char *equals = strrchr(text, '=');
    if (!equals)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "'%.40s': NAME=PERCENT%% is allowed, as in mounts=15%%,coupling=10%%",
                          trimmed(text));
    *equals = '\0';
    out->name = trimmed(text);
    tacet_status status = find(m, out, e);
    return status == TACET_OK ? read_width(trimmed(equals + 1), out, e) : status;
}

tacet_status tacet_scatter_parse(const char *text, const tacet_model *m, tacet_arena *a,
                                 tacet_scatter_entry **out, size_t *n, tacet_error *e)
{
    tacet_scatter_entry *list = tacet_arena_alloc(a, SCATTER_ENTRIES_MOST * sizeof *list);
    char *rest = tacet_arena_text(a, text);
    *n = 0;
    *out = list;
    if (!list || !rest) return tacet_fail(e, TACET_NO_MEMORY, "no memory for the scatter");
    while (rest) {
        char *entry = rest, *comma = strchr(rest, ',');
        rest = comma ? comma + 1 : NULL;
        if (comma) *comma = '\0';
        if (*n == SCATTER_ENTRIES_MOST)
            return tacet_fail(e, TACET_BAD_INPUT, "at most %d stiffnesses scatter",
                              SCATTER_ENTRIES_MOST);
        tacet_status status = read_entry(entry, m, &list[*n], e);
        if (status != TACET_OK) return status;
        for (size_t i = 0; i < *n; i++)
            if (strcmp(list[i].name, list[*n].name) == 0)
                return tacet_fail(e, TACET_BAD_INPUT, "'%.40s' is given twice", list[i].name);
        ++*n;
    }
    return TACET_OK;
}
