// Worst mount forces of a screen: the largest of each mount, axis and order over all conditions.
//
// Of each mount and axis a list keeps the orders with the largest worst forces. An order that falls
// out of a full list has a worst force below all that are kept, which only grow: it comes back when
// a later condition brings one that belongs there. So what is left does not depend on the order of
// the conditions, and memory is bounded whatever words are screened.
#include "internal.h"
#include "rules.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// All-fire lies on its own lines, all of them kept; line 0 is the static force.
struct mount_forces {
    size_t n_forces; // mounts times axes
    worst_list *all; // [n_forces]
    unsigned all_fire_revolutions;
    size_t all_fire_lines;
    worst_line *all_fire; // [n_forces * (all_fire_lines + 1)]; square < 0: never solved
};

static bool same_order(const worst_line *a, const worst_line *b)
{
    return (uint64_t)a->line * b->revolutions == (uint64_t)b->line * a->revolutions;
}

// Total, so that equal forces leave the same condition whichever comes first.
static bool is_worse(const worst_line *a, const worst_line *b)
{
    if (a->square != b->square) return a->square > b->square;
    if (!same_order(a, b))
        return (uint64_t)a->line * b->revolutions < (uint64_t)b->line * a->revolutions;
    if (a->candidate != b->candidate) return a->candidate < b->candidate;
    if (a->speed != b->speed) return a->speed < b->speed;
    return a->placement < b->placement;
}

void worst_take(worst_list *l, const worst_line *x)
{
    size_t at = 0;
    if (l->n == MOUNT_ORDERS_MOST && !is_worse(x, &l->at[l->n - 1])) return;
    while (at < l->n && !same_order(&l->at[at], x))
        at++;
    if (at < l->n && !is_worse(x, &l->at[at])) return;
    if (at == l->n && l->n < MOUNT_ORDERS_MOST) l->n++;
    if (at == l->n) at--; // the list is full: the least goes
    for (; at > 0 && is_worse(x, &l->at[at - 1]); at--)
        l->at[at] = l->at[at - 1];
    l->at[at] = *x;
}

tacet_status mounts_create(mount_forces **out, const tacet_model *m, tacet_arena *a)
{
    const tacet_body *body = tacet_model_body(m);
    *out = NULL;
    if (!body || tacet_body_mounts(body) == 0) return TACET_OK;
    mount_forces *f = tacet_arena_alloc(a, sizeof *f);
    if (!f) return TACET_NO_MEMORY;
    f->n_forces = 3 * tacet_body_mounts(body);
    f->all_fire_revolutions = tacet_model_all_fire(m)->revolutions;
    f->all_fire_lines = tacet_model_lines(m, f->all_fire_revolutions);
    size_t n = f->n_forces * (f->all_fire_lines + 1);
    f->all = tacet_arena_alloc(a, f->n_forces * sizeof *f->all);
    f->all_fire = tacet_arena_alloc(a, n * sizeof *f->all_fire);
    if (!f->all || !f->all_fire) return TACET_NO_MEMORY;
    for (size_t i = 0; i < f->n_forces; i++) {
        f->all[i].n = 0;
        f->all[i].at_rest.square = -1;
    }
    for (size_t i = 0; i < n; i++)
        f->all_fire[i].square = -1;
    *out = f;
    return TACET_OK;
}

static double square(double complex z)
{
    return creal(z) * creal(z) + cimag(z) * cimag(z);
}

tacet_status mounts_take(mount_forces *f, const worst_line *where, bool all_fire,
                         tacet_workspace *w)
{
    for (size_t i = 0; f && i < f->n_forces; i++) {
        const tacet_spectrum *s;
        tacet_quantity_ref q = {tacet_quantity_find("mount-force"), i};
        tacet_status status = tacet_workspace_quantity(w, q, &s, NULL);
        if (status != TACET_OK) return status;
        worst_line x = *where, *own = &f->all_fire[i * (f->all_fire_lines + 1)];
        x.revolutions = s->revolutions;
        for (size_t h = 0; h <= s->n_lines; h++) {
            x.line = (unsigned)h;
            x.square = h ? square(s->line[h]) : s->mean * s->mean;
            if (!isfinite(x.square)) continue; // at rest, on mounts that do not hold the body
            if (all_fire && h <= f->all_fire_lines && is_worse(&x, &own[h])) own[h] = x;
            if (where->candidate == SIZE_MAX) continue;
            if (h)
                worst_take(&f->all[i], &x);
            else if (is_worse(&x, &f->all[i].at_rest))
                f->all[i].at_rest = x;
        }
    }
    return TACET_OK;
}

static unsigned divisor(unsigned a, unsigned b)
{
    while (b) {
        unsigned rest = a % b;
        a = b;
        b = rest;
    }
    return a ? a : 1;
}

static tacet_mount_worst finished(const mount_forces *f, size_t force, const worst_line *x)
{
    unsigned by = divisor(x->line, x->revolutions);
    tacet_mount_worst out = {.mount = force / 3,
                             .axis = (int)(force % 3),
                             .line = x->line / by,
                             .revolutions = x->revolutions / by,
                             .peak_N = sqrt(x->square),
                             .candidate = x->candidate,
                             .placement = x->placement,
                             .speed_rad_per_s = x->speed,
                             .demand_Nm = x->demand,
                             .all_fire_N = NAN,
                             .all_fire_speed_rad_per_s = NAN};
    const worst_line *own = &f->all_fire[force * (f->all_fire_lines + 1)];
    uint64_t line = (uint64_t)x->line * f->all_fire_revolutions;
    if (own[1].square < 0) return out; // never solved
    out.all_fire_N = 0;
    if (line % x->revolutions != 0 || line / x->revolutions > f->all_fire_lines) return out;
    own += line / x->revolutions;
    if (own->square < 0) return out;
    out.all_fire_N = sqrt(own->square);
    out.all_fire_speed_rad_per_s = own->speed;
    return out;
}

// Orders of one mount below a share of its largest force are left out.
tacet_status mounts_finish(const mount_forces *f, tacet_screen *s)
{
    if (!f) return TACET_OK;
    s->mounts =
        tacet_arena_alloc(s->arena, f->n_forces * (MOUNT_ORDERS_MOST + 1) * sizeof *s->mounts);
    if (!s->mounts) return TACET_NO_MEMORY;
    for (size_t i = 0; i < f->n_forces; i++) {
        double largest = 0;
        for (size_t k = i - i % 3; k < i - i % 3 + 3; k++)
            if (f->all[k].n) largest = fmax(largest, f->all[k].at[0].square);
        for (size_t k = 0; k < f->all[i].n; k++)
            if (f->all[i].at[k].square >= MOUNT_SHARE * MOUNT_SHARE * largest && largest > 0)
                s->mounts[s->n_mounts++] = finished(f, i, &f->all[i].at[k]);
        if (f->all[i].at_rest.square >= 0)
            s->mounts[s->n_mounts++] = finished(f, i, &f->all[i].at_rest);
    }
    return TACET_OK;
}
