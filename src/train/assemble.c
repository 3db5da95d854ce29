// From a definition to a train: names to indices, damper rings, the tree, ratios.
#include "train/internal.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

const char *damper_ring_name(const tacet_damper_def *d, char out[TRAIN_NAME])
{
    return tacet_text(out, TRAIN_NAME, "%.100s-ring", d->name);
}

// ---- first problem of a definition as an error ------------------------------------------------

static void keep_first(void *who, bool warning, const char *path, const char *text)
{
    tacet_error *e = who;
    if (!warning && e->status == TACET_OK)
        (void)tacet_fail(e, TACET_BAD_INPUT, "%s: %s", path, text);
}

static tacet_status check(const tacet_train_def *d, tacet_error *e)
{
    tacet_error first = {.status = TACET_OK};
    tacet_train_def_check(d, &(tacet_reporter){keep_first, &first});
    if (first.status != TACET_OK && e) *e = first;
    return first.status;
}

// ---- memory -----------------------------------------------------------------------------------

static void *take(tacet_train *t, size_t n, size_t bytes)
{
    return tacet_arena_alloc(t->arena, n * bytes);
}

static bool take_all(tacet_train *t)
{
    size_t n = t->n, m = t->n_links;
    t->node_name = take(t, n, sizeof *t->node_name);
    t->link_name = take(t, m, sizeof *t->link_name);
    t->inertia = take(t, n, sizeof *t->inertia);
    t->added = take(t, n, sizeof *t->added);
    t->damping = take(t, n, sizeof *t->damping);
    t->ratio = take(t, n, sizeof *t->ratio);
    t->housed = take(t, n, sizeof *t->housed);
    t->link = take(t, m, sizeof *t->link);
    t->leaf = take(t, m, sizeof *t->leaf);
    t->parent = take(t, n, sizeof *t->parent);
    t->up = take(t, n, sizeof *t->up);
    t->sign = take(t, n, sizeof *t->sign);
    t->law = take(t, m, sizeof *t->law);
    t->constant_loss = take(t, m, sizeof *t->constant_loss);
    t->mode_hz = take(t, n, sizeof *t->mode_hz);
    t->mode_shape = take(t, n * n, sizeof *t->mode_shape);
    t->energy_share = take(t, n * m, sizeof *t->energy_share);
    return t->node_name && t->link_name && t->inertia && t->added && t->damping && t->ratio &&
           t->housed && t->link && t->leaf && t->parent && t->up && t->sign && t->law &&
           t->constant_loss && t->mode_hz && t->mode_shape && t->energy_share;
}

// ---- nodes and links --------------------------------------------------------------------------

static bool fill_nodes(tacet_train *t, const tacet_train_def *d)
{
    for (size_t i = 0; i < d->n_nodes; i++) {
        const tacet_node_def *node = &d->nodes[i];
        t->node_name[i] = tacet_arena_text(t->arena, node->name);
        t->added[i] = d->added_inertia_kgm2 ? d->added_inertia_kgm2[i] : 0;
        t->inertia[i] = node->inertia_kgm2 + t->added[i];
        t->damping[i] = node->damping_Nms_per_rad;
        t->housed[i] = node->on == TACET_ON_POWERTRAIN;
        if (!t->node_name[i]) return false;
    }
    for (size_t i = 0; i < d->n_dampers; i++) {
        char name[TRAIN_NAME];
        size_t ring = d->n_nodes + i;
        t->node_name[ring] = tacet_arena_text(t->arena, damper_ring_name(&d->dampers[i], name));
        t->inertia[ring] = d->dampers[i].ring_inertia_kgm2;
        if (!t->node_name[ring]) return false;
    }
    return true;
}

static double section_modulus(const tacet_link_def *l)
{
    double d = isnan(l->inner_m) ? 0 : l->inner_m, ratio = d / l->outer_m;
    return M_PI / 16 * l->outer_m * l->outer_m * l->outer_m * (1 - ratio * ratio * ratio * ratio);
}

static tacet_status fill_links(tacet_train *t, const tacet_train_def *d, tacet_error *e)
{
    for (size_t i = 0; i < d->n_links; i++) {
        const tacet_link_def *l = &d->links[i];
        tacet_link_info *info = &t->link[i];
        *info = (tacet_link_info){.from = tacet_train_node_find(t, l->from),
                                  .to = tacet_train_node_find(t, l->to),
                                  .gear_ratio = l->gear_ratio,
                                  .section_modulus_m3 = section_modulus(l),
                                  .stress_concentration =
                                      isnan(l->outer_m) ? NAN : l->stress_concentration,
                                  .fatigue = l->fatigue};
        tacet_status status = tacet_link_stiffness(l, &info->stiffness_Nm_per_rad, e);
        if (status != TACET_OK) return status;
        t->link_name[i] = tacet_arena_text(t->arena, l->name);
        if (!t->link_name[i]) return TACET_NO_MEMORY;
    }
    for (size_t i = 0; i < d->n_dampers; i++) {
        const tacet_damper_def *damper = &d->dampers[i];
        size_t link = d->n_links + i, ring = d->n_nodes + i;
        double w = 2 * M_PI * damper->tuned_hz;
        t->link[link] = (tacet_link_info){.from = ring,
                                          .to = tacet_train_node_find(t, damper->node),
                                          .stiffness_Nm_per_rad = damper->ring_inertia_kgm2 * w * w,
                                          .gear_ratio = 1,
                                          .section_modulus_m3 = NAN,
                                          .stress_concentration = NAN,
                                          .fatigue = {.amplitude_MPa = NAN}};
        t->housed[ring] = t->housed[t->link[link].to];
        t->link_name[link] = tacet_arena_text(t->arena, damper->name);
        if (!t->link_name[link]) return TACET_NO_MEMORY;
    }
    return TACET_OK;
}

// ---- the tree ---------------------------------------------------------------------------------

// Hangs `node` from the other end of `link`.
static void hang(tacet_train *t, size_t node, size_t above, size_t link)
{
    const tacet_link_info *l = &t->link[link];
    t->parent[node] = above;
    t->up[node] = link;
    t->sign[node] = l->from == node ? 1 : -1;
    t->ratio[node] =
        l->from == node ? l->gear_ratio * t->ratio[above] : t->ratio[above] / l->gear_ratio;
}

// From the flywheel outwards; nearest nodes come last in leaf[].
static void grow(tacet_train *t)
{
    size_t free_place = t->n_links, next = t->n_links, at = t->flywheel;
    t->ratio[t->flywheel] = 1;
    t->parent[t->flywheel] = t->up[t->flywheel] = SIZE_MAX;
    for (;;) {
        for (size_t link = 0; link < t->n_links; link++) {
            const tacet_link_info *l = &t->link[link];
            if (l->from != at && l->to != at) continue;
            if (at != t->flywheel && t->up[at] == link) continue;
            size_t child = l->from == at ? l->to : l->from;
            hang(t, child, at, link);
            t->leaf[--free_place] = child;
        }
        if (next == 0) return;
        at = t->leaf[--next];
    }
}

static tacet_status assemble(tacet_train *t, const tacet_train_def *d, tacet_error *e)
{
    t->n = d->n_nodes + d->n_dampers;
    t->n_links = d->n_links + d->n_dampers;
    if (!take_all(t) || !fill_nodes(t, d))
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for the train");
    t->flywheel = tacet_train_node_find(t, d->flywheel);
    t->load = d->load ? tacet_train_node_find(t, d->load) : t->flywheel;
    tacet_status status = fill_links(t, d, e);
    if (status == TACET_NO_MEMORY) return tacet_fail(e, status, "no memory for the train");
    if (status != TACET_OK) return status;
    grow(t);
    status = train_modes_solve(t, e);
    if (status == TACET_OK) status = train_damping_resolve(t, d, e);
    return status;
}

tacet_status tacet_train_create(const tacet_train_def *d, tacet_train **out, tacet_error *e)
{
    tacet_status status = check(d, e);
    if (status != TACET_OK) return status;
    tacet_train *t = calloc(1, sizeof *t);
    if (!t || !(t->arena = tacet_arena_create()))
        status = tacet_fail(e, TACET_NO_MEMORY, "no memory for the train");
    else
        status = assemble(t, d, e);
    if (status == TACET_OK)
        *out = t;
    else
        tacet_train_destroy(t);
    return status;
}

void tacet_train_destroy(tacet_train *t)
{
    if (!t) return;
    tacet_arena_destroy(t->arena);
    free(t);
}
