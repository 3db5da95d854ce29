// References between sections: nodes of cylinders, targets of quantities.
#include "check.h"
#include <math.h>
#include <string.h>

// Names of all nodes (or links) with those that dampers add.
static const char **names_with_dampers(const checker *c, bool nodes, size_t *n)
{
    const tacet_train_def *t = &c->study->train;
    size_t own = nodes ? t->n_nodes : t->n_links;
    *n = 0;
    const char **names = tacet_arena_alloc(c->f->arena, (own + t->n_dampers + 1) * sizeof *names);
    if (!names) {
        c->f->no_memory = true;
        return NULL;
    }
    for (size_t i = 0; i < own; i++) {
        const char *name = nodes ? t->nodes[i].name : t->links[i].name;
        if (name) names[(*n)++] = name;
    }
    for (size_t i = 0; i < t->n_dampers; i++) {
        const char *name = t->dampers[i].name;
        size_t bytes = name ? strlen(name) + sizeof "-ring" : 0;
        char *ring = name && nodes ? tacet_arena_alloc(c->f->arena, bytes) : NULL;
        if (ring) name = tacet_text(ring, bytes, "%s-ring", name);
        if (name) names[(*n)++] = name;
    }
    return names;
}

static bool holds(const char *const *names, size_t n, const char *name)
{
    for (size_t i = 0; i < n; i++)
        if (strcmp(names[i], name) == 0) return true;
    return false;
}

// "there is no node 'x' in the train; did you mean ..?"
static void say_unknown(checker *c, const char *path, const char *kind, const char *name,
                        const char *const *names, size_t n)
{
    char text[SHOWN_TEXT], list[200];
    const char *near = tacet_near_name(name, names, n), *key = strrchr(path, '.') + 1;
    shown_text(name, text);
    if (near)
        check_say(c, false, path, "%s: there is no %s %s in the train; did you mean %s?", key, kind,
                  text, near);
    else
        check_say(c, false, path, "%s: there is no %s %s in the train; it has %s", key, kind, text,
                  joined(names, n, list, sizeof list));
}

// ---- nodes
static const tacet_cylinder_def *stated(const tacet_engine_def *e, unsigned number, size_t *index)
{
    for (*index = 0; *index < e->n_cylinder_defs; ++*index)
        if (e->cylinders[*index].number == number) return &e->cylinders[*index];
    return NULL;
}

static void check_cylinders(checker *c, const char *const *names, size_t n)
{
    const tacet_engine_def *e = &c->study->engine;
    char path[64], node[32];
    unsigned first = 0, lacking = 0;
    for (size_t i = 0; i < e->n_cylinders; i++) {
        size_t index;
        const tacet_cylinder_def *d = stated(e, e->firing_order[i], &index);
        tacet_text(path, sizeof path, "engine.cylinders[%zu].node", index);
        if (d && d->node) {
            if (!holds(names, n, d->node)) say_unknown(c, path, "node", d->node, names, n);
            continue;
        }
        tacet_text(node, sizeof node, "throw%u", e->firing_order[i]);
        if (holds(names, n, node)) continue;
        lacking++;
        if (!first || e->firing_order[i] < first) first = e->firing_order[i];
    }
    if (!lacking) return;
    char more[48] = "";
    if (lacking > 1)
        tacet_text(more, sizeof more, " (and %u other cylinders lack theirs)", lacking - 1);
    check_say(c, false, "train.nodes",
              "cylinder %u drives throw%u when nothing else is said, and there is no such node%s; "
              "name nodes throw1, throw2, .. or state engine.cylinders: [{number: %u, node: ..}]",
              first, first, more, first);
}

void check_nodes(checker *c)
{
    size_t n;
    static const char *const needed[] = {"train.nodes", "train.dampers", "engine.firing_order",
                                         "engine.cylinders"};
    for (size_t i = 0; i < sizeof needed / sizeof *needed; i++)
        if (fill_is_wrong(c->f, needed[i])) return;
    const char **names = names_with_dampers(c, true, &n);
    if (names) check_cylinders(c, names, n);
}

// ---- quantities
#define MOST_QUANTITIES 40

static const tacet_quantity *find_quantity(checker *c, const char *path, const char *text,
                                           size_t letters)
{
    const char *names[MOST_QUANTITIES];
    char name[64], shown[SHOWN_TEXT], list[200];
    size_t n = 0;
    for (const tacet_quantity *q = tacet_quantities(); q->name && n < MOST_QUANTITIES; q++) {
        if (strlen(q->name) == letters && memcmp(q->name, text, letters) == 0) return q;
        names[n++] = q->name;
    }
    tacet_text(name, sizeof name, "%.*s", (int)(letters < 60 ? letters : 60), text);
    const char *near = tacet_near_name(name, names, n);
    check_say(c, false, path, "quantity: %s is none; allowed are %s%s%s%s", shown_text(name, shown),
              joined(names, n, list, sizeof list), near ? "; did you mean " : "", near ? near : "",
              near ? "?" : "");
    return NULL;
}

// Stress needs a section to be computed on.
static void check_section(checker *c, const char *path, const tacet_quantity *q, const char *target)
{
    const tacet_train_def *t = &c->study->train;
    if (strcmp(q->name, "link-stress") != 0) return;
    for (size_t i = 0; i < t->n_links; i++)
        if (t->links[i].name && strcmp(t->links[i].name, target) == 0 && isnan(t->links[i].outer_m))
            check_say(c, false, path,
                      "quantity: link-stress:%.63s needs outer_mm of that link, the diameter of "
                      "its section",
                      target);
}

// Mounts, places, points: of the body alone.
static void check_body_target(checker *c, const char *path, const tacet_quantity *q,
                              const char *target)
{
    const tacet_body_def *body = &c->study->body;
    size_t n = tacet_target_count(q->target, NULL, body);
    if (fill_is_wrong(c->f, "body")) return;
    if (!tacet_body_def_given(body)) {
        check_say(c, false, path,
                  "quantity: %s needs the powertrain's body, and the study has no "
                  "section body",
                  q->name);
        return;
    }
    const char **names = tacet_arena_alloc(c->f->arena, (n + 1) * sizeof *names);
    char(*text)[TACET_QUANTITY_TEXT] = tacet_arena_alloc(c->f->arena, (n + 1) * sizeof *text);
    if (!names || !text) {
        c->f->no_memory = true;
        return;
    }
    for (size_t i = 0; i < n; i++)
        names[i] = tacet_target_text(q->target, i, NULL, body, text[i]);
    if (holds(names, n, target)) return;
    char shown[SHOWN_TEXT], list[200];
    const char *near = tacet_near_name(target, names, n);
    check_say(c, false, path, "quantity: there is no %s %s in the body; %s %s",
              tacet_target_kind(q->target), shown_text(target, shown),
              near ? "did you mean"
              : n  ? "it has"
                   : "it has none",
              near ? near : joined(names, n, list, sizeof list));
}

static void check_target(checker *c, const char *path, const tacet_quantity *q, const char *target)
{
    bool node = q->target == TACET_TARGET_NODE, train = node || q->target == TACET_TARGET_LINK;
    const char *kind = tacet_target_kind(q->target), *list = node ? "train.nodes" : "train.links";
    size_t n;
    if (q->target == TACET_TARGET_NONE) {
        if (target)
            check_say(c, false, path, "quantity: %s stands alone, without ':' and a name", q->name);
        return;
    }
    if (!target || !*target) {
        check_say(c, false, path, "quantity: %s needs the name of a %s behind ':', as %s:NAME",
                  q->name, kind, q->name);
        return;
    }
    if (!train) {
        check_body_target(c, path, q, target);
        return;
    }
    if (fill_is_wrong(c->f, list) || fill_is_wrong(c->f, "train.dampers")) return;
    const char **names = names_with_dampers(c, node, &n);
    if (!names) return;
    if (!holds(names, n, target))
        say_unknown(c, path, kind, target, names, n);
    else
        check_section(c, path, q, target);
}

static const tacet_quantity *check_quantity(checker *c, const char *path, const char *text)
{
    if (!text || fill_is_wrong(c->f, path)) return NULL;
    size_t letters = strcspn(text, ":");
    const tacet_quantity *q = find_quantity(c, path, text, letters);
    if (q) check_target(c, path, q, text[letters] ? text + letters + 1 : NULL);
    return q;
}

static void check_statistic(checker *c, const char *path, const tacet_quantity *q, int statistic)
{
    const tacet_field *field = tacet_limit_keys()->fields;
    while (field->key && strcmp(field->key, "statistic") != 0)
        field++;
    if (!field->key || fill_is_wrong(c->f, path)) return;
    const char *const *names = field->choices;
    size_t n = 0;
    char list[120];
    bool stress = strcmp(q->name, "link-stress") == 0; // alone has cycles to count
    while (names[n] && (stress || n < TACET_STAT_REVERSED))
        n++;
    if (statistic < 0 && q->statistic < 0)
        check_say(c, false, path, "statistic is missing: a limit on %s needs one of %s", q->name,
                  joined(names, n, list, sizeof list));
    else if (statistic >= 0 && q->statistic >= 0 && statistic != q->statistic)
        check_say(c, false, path, "statistic: %s of %s; it has %s only", names[statistic], q->name,
                  names[q->statistic]);
}

// Counting cycles needs a stress and what it does to the shaft.
static void check_fatigue(checker *c, const char *path, const tacet_limit_def *d)
{
    const tacet_train_def *t = &c->study->train;
    bool counts = d->statistic == TACET_STAT_DAMAGE || d->statistic == TACET_STAT_REVERSED;
    static const char stress[] = "link-stress:";
    if (!counts || fill_is_wrong(c->f, path)) return;
    if (strncmp(d->quantity, stress, sizeof stress - 1) != 0) {
        check_say(c, false, path, "statistic: reversed and damage are of link-stress alone");
        return;
    }
    for (size_t i = 0; i < t->n_links; i++)
        if (t->links[i].name && strcmp(t->links[i].name, d->quantity + sizeof stress - 1) == 0 &&
            isnan(t->links[i].fatigue.amplitude_MPa))
            check_say(c, false, path,
                      "statistic: link '%.63s' must state fatigue: {amplitude_mpa, ultimate_mpa}",
                      t->links[i].name);
}

void check_quantities(checker *c)
{
    const tacet_study *s = c->study;
    char path[64];
    for (size_t i = 0; i < s->n_bands; i++) {
        tacet_text(path, sizeof path, "bands[%zu].quantity", i);
        const tacet_quantity *q = check_quantity(c, path, s->bands[i].quantity);
        if (q && q->scalar)
            check_say(c, false, path,
                      "quantity: %s is one number a condition and has no lines; judge it under "
                      "limits",
                      q->name);
    }
    for (size_t i = 0; i < s->n_limits; i++) {
        tacet_text(path, sizeof path, "limits[%zu].quantity", i);
        const tacet_quantity *q = check_quantity(c, path, s->limits[i].quantity);
        tacet_text(path, sizeof path, "limits[%zu].statistic", i);
        if (q) check_statistic(c, path, q, s->limits[i].statistic);
        if (q) check_fatigue(c, path, &s->limits[i]);
    }
}
