// What cannot be in a train's definition.
#include "tacet/train.h"
#include "train/internal.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define PATH 160

typedef struct {
    const tacet_train_def *d;
    const tacet_reporter *r;
    const char *name[TRAIN_NODES_MOST]; // nodes, then damper rings; rings' texts live in `ring`
    size_t n;
    size_t group[TRAIN_NODES_MOST]; // which nodes hang together
    char ring[TRAIN_NODES_MOST][TRAIN_NAME];
} check;

static bool same(const char *a, const char *b)
{
    return a && b && strcmp(a, b) == 0;
}

static void say(const check *c, bool warning, const char *list, size_t i, const char *key,
                const char *text)
{
    char path[PATH];
    tacet_report(c->r, warning, tacet_text(path, PATH, "train.%s[%zu].%s", list, i, key), "%s",
                 text);
}

static size_t find(const check *c, const char *name)
{
    for (size_t i = 0; i < c->n; i++)
        if (same(c->name[i], name)) return i;
    return SIZE_MAX;
}

// "ring, hub, throw1, .."
static const char *names(const check *c, char out[PATH])
{
    size_t used = 0;
    out[0] = '\0';
    for (size_t i = 0; i < c->n; i++) {
        if (!c->name[i]) continue;
        bool room = used + strlen(c->name[i]) + 8 < PATH;
        tacet_text(out + used, PATH - used, "%s%s", used ? ", " : "", room ? c->name[i] : "..");
        if (!room) break;
        used += strlen(out + used);
    }
    return out;
}

// Index of the node, or SIZE_MAX with a problem said at `path`.
static size_t resolve(const check *c, const char *name, const char *path)
{
    if (!name) return SIZE_MAX;
    size_t i = find(c, name);
    if (i != SIZE_MAX) return i;
    char list[PATH];
    const char *near = tacet_near_name(name, c->name, c->n);
    if (near)
        tacet_report(c->r, false, path, "'%.80s' is no node of the train; near is '%.80s'", name,
                     near);
    else if (strcmp(name, tacet_train_default().flywheel) == 0)
        tacet_report(c->r, false, path,
                     "there is no node '%s'; write flywheel: and the node that it is, one of %s",
                     name, names(c, list));
    else
        tacet_report(c->r, false, path, "'%.80s' is no node of the train; it has %s", name,
                     names(c, list));
    return SIZE_MAX;
}

// ---- names ------------------------------------------------------------------------------------

static void check_twins(const check *c)
{
    char path[PATH], text[PATH];
    for (size_t i = 0; i < c->n; i++)
        for (size_t k = 0; k < i; k++) {
            if (!same(c->name[i], c->name[k])) continue;
            if (i < c->d->n_nodes)
                tacet_text(path, PATH, "train.nodes[%zu].name", i);
            else
                tacet_text(path, PATH, "train.dampers[%zu].name", i - c->d->n_nodes);
            tacet_report(c->r, false, path, "a node '%.80s' is there already", c->name[i]);
            break;
        }
    for (size_t i = 0; i < c->d->n_links + c->d->n_dampers; i++)
        for (size_t k = 0; k < i; k++) {
            size_t n = c->d->n_links;
            const char *a = i < n ? c->d->links[i].name : c->d->dampers[i - n].name;
            const char *b = k < n ? c->d->links[k].name : c->d->dampers[k - n].name;
            if (!same(a, b)) continue;
            tacet_text(text, PATH, "a link '%.80s' is there already", a);
            say(c, false, i < n ? "links" : "dampers", i < n ? i : i - n, "name", text);
            break;
        }
}

// ---- values, for callers that fill a definition by hand ---------------------------------------

static bool positive(double x)
{
    return isfinite(x) && x > 0;
}

static bool not_negative(double x)
{
    return isfinite(x) && x >= 0;
}

static void check_nodes(const check *c)
{
    const tacet_train_def *d = c->d;
    for (size_t i = 0; i < d->n_nodes; i++) {
        if (!positive(d->nodes[i].inertia_kgm2))
            say(c, false, "nodes", i, "inertia_kgm2", "finite and above 0");
        if (!not_negative(d->nodes[i].damping_Nms_per_rad))
            say(c, false, "nodes", i, "damping_nms_per_rad", "finite and not below 0");
        if (d->added_inertia_kgm2 && !not_negative(d->added_inertia_kgm2[i]))
            say(c, false, "nodes", i, "inertia_kgm2",
                "with a reciprocating share that is negative or not finite");
    }
    for (size_t i = 0; i < d->n_dampers; i++) {
        if (!positive(d->dampers[i].ring_inertia_kgm2))
            say(c, false, "dampers", i, "ring_inertia_kgm2", "finite and above 0");
        if (!positive(d->dampers[i].tuned_hz))
            say(c, false, "dampers", i, "tuned_hz", "finite and above 0");
        if (!not_negative(d->dampers[i].loss_factor))
            say(c, false, "dampers", i, "loss_factor", "finite and not below 0");
    }
}

static void check_values(const check *c, size_t i, const tacet_link_def *l)
{
    double k;
    tacet_error e;
    bool plain = isnan(l->length_m) && !link_throw_stated(l); // dimensions are named one by one
    if (plain && link_stiffness_ways(l) == 1 && tacet_link_stiffness(l, &k, &e) != TACET_OK)
        say(c, false, "links", i, "name", e.text);
    if (!isnan(l->damping_Nms_per_rad) && !not_negative(l->damping_Nms_per_rad))
        say(c, false, "links", i, "damping_nms_per_rad", "finite and not below 0");
    if (!isnan(l->damping_ratio) && !not_negative(l->damping_ratio))
        say(c, false, "links", i, "damping_ratio", "finite and not below 0");
    if (!isnan(l->loss_factor) && !not_negative(l->loss_factor))
        say(c, false, "links", i, "loss_factor", "finite and not below 0");
    if (!isnan(l->at_hz) && !positive(l->at_hz))
        say(c, false, "links", i, "at_hz", "finite and above 0");
}

// ---- one link ---------------------------------------------------------------------------------

static void check_throw(const check *c, size_t i, const tacet_throw_def *t)
{
    static const char *const key[] = {"throw.journal_length_mm", "throw.journal_outer_mm",
                                      "throw.pin_length_mm",     "throw.pin_outer_mm",
                                      "throw.throw_mm",          "throw.web_thickness_mm",
                                      "throw.web_width_mm"};
    const double value[] = {t->journal_length_m, t->journal_outer_m, t->pin_length_m,
                            t->pin_outer_m,      t->throw_m,         t->web_thickness_m,
                            t->web_width_m};
    if (t->formula < 0) say(c, false, "links", i, "throw.formula", "missing; carter or ker-wilson");
    for (int k = 0; k < 7; k++)
        if (isnan(value[k])) say(c, false, "links", i, key[k], "missing; the formula needs it");
    if (t->journal_inner_m >= t->journal_outer_m)
        say(c, false, "links", i, "throw.journal_inner_mm", "not below journal_outer_mm");
    if (t->pin_inner_m >= t->pin_outer_m)
        say(c, false, "links", i, "throw.pin_inner_mm", "not below pin_outer_mm");
}

static void check_stiffness(const check *c, size_t i, const tacet_link_def *l)
{
    unsigned ways = link_stiffness_ways(l);
    if (ways == 0)
        say(c, false, "links", i, "name",
            "no stiffness; stiffness_nm_per_rad, stiffness_nm_per_deg, length_mm with outer_mm, or "
            "throw");
    if (ways > 1)
        say(c, false, "links", i, "name",
            "more than one stiffness; one of stiffness_nm_per_rad, stiffness_nm_per_deg, length_mm "
            "with outer_mm, throw");
    if (!isnan(l->length_m) && isnan(l->outer_m))
        say(c, false, "links", i, "length_mm", "a plain shaft needs outer_mm too");
    if (!isnan(l->outer_m) && l->inner_m >= l->outer_m)
        say(c, false, "links", i, "inner_mm", "not below outer_mm");
    if (link_throw_stated(l)) check_throw(c, i, &l->throw_);
}

static void check_damping(const check *c, size_t i, const tacet_link_def *l)
{
    bool loss = !isnan(l->loss_factor);
    if (!isnan(l->damping_Nms_per_rad) + !isnan(l->damping_ratio) + loss > 1)
        say(c, false, "links", i, "name",
            "more than one damping; one of damping_nms_per_rad, damping_ratio, loss_factor");
    if (!loss && !isnan(l->at_hz))
        say(c, true, "links", i, "at_hz", "does nothing without loss_factor");
    if (!loss && l->loss_law == TACET_LOSS_CONSTANT)
        say(c, true, "links", i, "loss_law", "does nothing without loss_factor");
}

static size_t group_of(const check *c, size_t i)
{
    while (c->group[i] != i)
        i = c->group[i];
    return i;
}

static void check_link(check *c, size_t i)
{
    const tacet_link_def *l = &c->d->links[i];
    char path[PATH];
    check_stiffness(c, i, l);
    check_damping(c, i, l);
    check_values(c, i, l);
    if (l->gear_ratio == 0 || !isfinite(l->gear_ratio))
        say(c, false, "links", i, "gear_ratio",
            "0 or not finite; the speed of `from` over that of `to`");
    size_t a = resolve(c, l->from, tacet_text(path, PATH, "train.links[%zu].from", i));
    size_t b = resolve(c, l->to, tacet_text(path, PATH, "train.links[%zu].to", i));
    if (a == SIZE_MAX || b == SIZE_MAX) return;
    size_t from = group_of(c, a), to = group_of(c, b);
    if (a == b)
        say(c, false, "links", i, "to", "the node that `from` names; a link ties two nodes");
    else if (from == to)
        say(c, false, "links", i, "to", "closes a loop; a train is a tree");
    c->group[to] = from;
}

// ---- the whole --------------------------------------------------------------------------------

static void check_connected(const check *c, size_t flywheel)
{
    for (size_t i = 0; i < c->d->n_nodes; i++) {
        char text[PATH];
        if (!c->name[i] || group_of(c, i) == group_of(c, flywheel)) continue;
        tacet_text(text, PATH, "no links lead from '%.60s' to the flywheel '%.60s'", c->name[i],
                   c->name[flywheel]);
        say(c, false, "nodes", i, "name", text);
        return; // one unlinked shaft is one mistake
    }
}

static void gather(check *c)
{
    const tacet_train_def *d = c->d;
    c->n = d->n_nodes + d->n_dampers;
    for (size_t i = 0; i < d->n_nodes; i++)
        c->name[i] = d->nodes[i].name;
    for (size_t i = 0; i < d->n_dampers; i++)
        if (d->dampers[i].name)
            c->name[d->n_nodes + i] = damper_ring_name(&d->dampers[i], c->ring[i]);
    for (size_t i = 0; i < c->n; i++)
        c->group[i] = i;
}

static void check_all(check *c)
{
    const tacet_train_def *d = c->d;
    char path[PATH];
    check_twins(c);
    check_nodes(c);
    for (size_t i = 0; i < d->n_dampers; i++) {
        size_t on =
            resolve(c, d->dampers[i].node, tacet_text(path, PATH, "train.dampers[%zu].node", i));
        if (on == d->n_nodes + i)
            say(c, false, "dampers", i, "node", "the damper's own ring");
        else if (on != SIZE_MAX)
            c->group[group_of(c, d->n_nodes + i)] = group_of(c, on);
    }
    for (size_t i = 0; i < d->n_links; i++)
        check_link(c, i);
    size_t flywheel = resolve(c, d->flywheel, "train.flywheel");
    (void)resolve(c, d->load, "train.load");
    if (flywheel != SIZE_MAX) check_connected(c, flywheel);
}

void tacet_train_def_check(const tacet_train_def *d, const tacet_reporter *r)
{
    check c = {.d = d, .r = r};
    if (d->n_nodes == 0) {
        tacet_report(r, false, "train.nodes", "none; a train has one or more");
    } else if (d->n_nodes + d->n_dampers > TRAIN_NODES_MOST) {
        tacet_report(r, false, "train.nodes", "%zu with damper rings; at most %d",
                     d->n_nodes + d->n_dampers, TRAIN_NODES_MOST);
    } else {
        gather(&c);
        check_all(&c);
    }
}
