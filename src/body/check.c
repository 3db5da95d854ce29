// What cannot be in a body's definition.
#include "internal.h"
#include <stdlib.h>
#include <string.h>

#define PATH 160

typedef struct {
    const tacet_body_def *d;
    const tacet_reporter *r;
} check;

static const char *item(char path[PATH], const char *list, size_t i, const char *key)
{
    return tacet_text(path, PATH, "body.%s[%zu]%s%s", list, i, key[0] ? "." : "", key);
}

// ---- inertia ------------------------------------------------------------------------------------

// Leading minors positive: the tensor of a body that resists every turn.
static bool positive(const tacet_inertia_def *i)
{
    double second = i->xx * i->yy - i->xy * i->xy;
    double third = i->xx * (i->yy * i->zz - i->yz * i->yz) -
                   i->xy * (i->xy * i->zz - i->yz * i->xz) +
                   i->xz * (i->xy * i->yz - i->yy * i->xz);
    return i->xx > 0 && second > 0 && third > 0;
}

// Masses are positive: E = tr(I)/2 - I, the integral of r r^T dm, has no negative direction. In the
// principal axes: no moment is more than the other two together.
static bool of_masses(const tacet_inertia_def *i)
{
    double half = (i->xx + i->yy + i->zz) / 2, slack = 1e-9 * half;
    tacet_inertia_def e = {
        half - i->xx + slack, half - i->yy + slack, half - i->zz + slack, -i->xy, -i->xz, -i->yz};
    return positive(&e);
}

static void check_inertia(const check *c)
{
    const tacet_inertia_def *i = &c->d->inertia_kgm2;
    if (!positive(i))
        tacet_report(c->r, false, "body.inertia_kgm2",
                     "no body has this tensor: about some axis its moment of inertia is not above "
                     "0; products of inertia must stay below the moments about their axes");
    else if (!of_masses(i))
        tacet_report(c->r, false, "body.inertia_kgm2",
                     "no body has this tensor: about one of its principal axes the moment is more "
                     "than about the other two together");
}

// ---- lists of three, names ----------------------------------------------------------------------

static void check_three(const check *c, const char *path, size_t n, bool may_lack)
{
    if (n == 3 || (n == 0 && may_lack)) return;
    tacet_report(c->r, false, path, "%zu number%s; three are needed: [x, y, z]", n,
                 n == 1 ? "" : "s");
}

static void check_many(const check *c, const char *list, size_t n, size_t most)
{
    char path[PATH];
    if (n > most)
        tacet_report(c->r, false, tacet_text(path, PATH, "body.%s", list), "%zu; at most %zu", n,
                     most);
}

static void unknown(const check *c, const char *path, const char *what, const char *name,
                    const char *const *names, size_t n)
{
    char list[PATH] = "";
    const char *near = tacet_near_name(name, names, n);
    if (near) {
        tacet_report(c->r, false, path, "'%.60s' is no %s; near is '%.60s'", name, what, near);
        return;
    }
    for (size_t i = 0; i < n && strlen(list) + strlen(names[i]) + 3 < sizeof list; i++)
        tacet_text(list + strlen(list), sizeof list - strlen(list), "%s%s", i ? ", " : "",
                   names[i]);
    if (n)
        tacet_report(c->r, false, path, "'%.60s' is no %s; there are %s", name, what, list);
    else
        tacet_report(c->r, false, path, "'%.60s' is no %s; the body has none", name, what);
}

// ---- mounts -------------------------------------------------------------------------------------

static void check_mount(const check *c, size_t i)
{
    const tacet_mount_def *m = &c->d->mounts[i];
    char path[PATH];
    check_three(c, item(path, "mounts", i, "at_mm"), m->n_at, false);
    check_three(c, item(path, "mounts", i, "turned_deg"), m->n_turned, true);
}

static void check_shaft(const check *c, size_t i)
{
    const tacet_balance_shaft_def *s = &c->d->balance_shafts[i];
    char path[PATH];
    double halves = 2 * s->ratio;
    check_three(c, item(path, "balance_shafts", i, "at_mm"), s->n_at, false);
    if (halves != floor(halves) || halves == 0)
        tacet_report(c->r, false, item(path, "balance_shafts", i, "ratio"),
                     "%.6g; a shaft that repeats with the engine turns a multiple of 0.5 times as "
                     "fast as the crank, and not 0",
                     s->ratio);
}

// ---- paths --------------------------------------------------------------------------------------

static void check_resonance(const check *c, size_t path_index, size_t i)
{
    const tacet_resonance_def *r = &c->d->paths[path_index].resonances[i];
    char path[PATH];
    bool gain = !isnan(r->gain), mass = !isnan(r->mass_kg);
    const tacet_path_def *p = &c->d->paths[path_index];
    tacet_text(path, PATH, "body.paths[%zu].resonances[%zu]", path_index, i);
    if (gain == mass)
        tacet_report(c->r, false, path, "%s gain %s mass_kg; one of them says how much it passes",
                     gain ? "both" : "neither", gain ? "and" : "nor");
    for (size_t k = 0; mass && k < c->d->n_points; k++)
        if (p->to && strcmp(c->d->points[k].name, p->to) == 0 &&
            c->d->points[k].sense != TACET_POINT_ACCELERATION)
            tacet_report(c->r, false, path,
                         "mass_kg gives an acceleration, and point '%.60s' senses another thing; "
                         "state a gain",
                         p->to);
}

static void check_path(const check *c, size_t i, const char **mounts, const char **points)
{
    const tacet_path_def *p = &c->d->paths[i];
    char path[PATH];
    size_t m = 0, k = 0;
    while (m < c->d->n_mounts && p->mount && strcmp(mounts[m], p->mount) != 0)
        m++;
    while (k < c->d->n_points && p->to && strcmp(points[k], p->to) != 0)
        k++;
    if (p->mount && m == c->d->n_mounts)
        unknown(c, item(path, "paths", i, "mount"), "mount", p->mount, mounts, c->d->n_mounts);
    if (p->to && k == c->d->n_points)
        unknown(c, item(path, "paths", i, "to"), "point", p->to, points, c->d->n_points);
    if (!p->table == (p->n_resonances == 0))
        tacet_report(c->r, false, item(path, "paths", i, ""),
                     "%s resonances %s table; one of them says what it passes",
                     p->table ? "both" : "neither", p->table ? "and" : "nor");
    for (size_t r = 0; r < p->n_resonances; r++)
        check_resonance(c, i, r);
}

static void check_paths(const check *c)
{
    const tacet_body_def *d = c->d;
    const char *mounts[TACET_BODY_MOUNTS_MOST], *points[TACET_BODY_POINTS_MOST];
    if (d->n_mounts > TACET_BODY_MOUNTS_MOST || d->n_points > TACET_BODY_POINTS_MOST) return;
    for (size_t i = 0; i < d->n_mounts; i++)
        mounts[i] = d->mounts[i].name;
    for (size_t i = 0; i < d->n_points; i++)
        points[i] = d->points[i].name;
    for (size_t i = 0; i < d->n_paths; i++)
        check_path(c, i, mounts, points);
    for (size_t k = 0; k < d->n_points; k++) {
        size_t n = 0;
        char path[PATH];
        for (size_t i = 0; i < d->n_paths; i++)
            n += d->paths[i].to && strcmp(d->paths[i].to, points[k]) == 0;
        if (n == 0)
            tacet_report(c->r, true, item(path, "points", k, "name"),
                         "no path leads to it: nothing is felt there");
    }
}

void tacet_body_def_check(const tacet_body_def *d, const tacet_reporter *r)
{
    const check c = {d, r};
    char path[PATH];
    if (!tacet_body_def_given(d)) return;
    check_inertia(&c);
    check_three(&c, "body.crank_axis_mm", d->n_crank_axis, true);
    check_many(&c, "mounts", d->n_mounts, TACET_BODY_MOUNTS_MOST);
    check_many(&c, "points", d->n_points, TACET_BODY_POINTS_MOST);
    check_many(&c, "paths", d->n_paths, TACET_BODY_PATHS_MOST);
    for (size_t i = 0; i < d->n_mounts; i++)
        check_mount(&c, i);
    for (size_t i = 0; i < d->n_balance_shafts; i++)
        check_shaft(&c, i);
    for (size_t i = 0; i < d->n_places; i++)
        check_three(&c, item(path, "places", i, "at_mm"), d->places[i].n_at, false);
    check_paths(&c);
}
