// A copy of a study in which some links and mounts are stiffer or softer.
#include "scatter.h"
#include <math.h>
#include <string.h>

static void *copy(tacet_arena *a, const void *from, size_t bytes)
{
    void *to = tacet_arena_alloc(a, bytes + 1);
    if (to && bytes) memcpy(to, from, bytes);
    return to;
}

// Every link as the assembled train has it: a stiffness, a loss factor with the frequency where it
// holds, a damping coefficient. What is then scaled leaves the damping of all links alone, though
// modes move.
static void resolve(const tacet_train *t, size_t link, tacet_link_def *l)
{
    tacet_link_info info = tacet_train_link_info(t, link);
    l->stiffness_Nm_per_rad = info.stiffness_Nm_per_rad;
    l->stiffness_catalogue_Nm_per_rad = l->length_m = NAN;
    l->throw_ = tacet_link_default().throw_;
    if (isnan(l->at_hz) && info.loss_factor > 0) l->at_hz = info.main_mode_hz;
    if (isnan(l->damping_ratio)) return;
    l->damping_ratio = NAN;
    l->damping_Nms_per_rad = info.damping_Nms_per_rad;
}

static void scale_link(tacet_train_def *d, size_t link, double factor)
{
    if (link < d->n_links)
        d->links[link].stiffness_Nm_per_rad *= factor;
    else
        d->dampers[link - d->n_links].tuned_hz *= sqrt(factor);
}

static tacet_status scale_curve(tacet_curve *c, double factor, tacet_arena *a)
{
    c->y = copy(a, c->y, c->n * sizeof *c->y);
    if (!c->y) return TACET_NO_MEMORY;
    for (size_t i = 0; i < c->n; i++)
        c->y[i] *= factor;
    return TACET_OK;
}

static tacet_status scale_mount(tacet_mount_def *d, double factor, tacet_arena *a)
{
    tacet_status status = scale_curve(&d->x_N_per_m, factor, a);
    if (status == TACET_OK) status = scale_curve(&d->y_N_per_m, factor, a);
    if (status == TACET_OK) status = scale_curve(&d->z_N_per_m, factor, a);
    d->static_x_N_per_m *= factor; // NAN, the dynamic one, stays so
    d->static_y_N_per_m *= factor;
    d->static_z_N_per_m *= factor;
    return status;
}

tacet_status scatter_study(const tacet_model *m, const tacet_scatter_entry *entries, size_t n,
                           const double *factor, tacet_arena *a, tacet_study *out)
{
    *out = *tacet_model_study(m);
    tacet_train_def *train = &out->train;
    tacet_body_def *body = &out->body;
    train->links = copy(a, train->links, train->n_links * sizeof *train->links);
    train->dampers = copy(a, train->dampers, train->n_dampers * sizeof *train->dampers);
    body->mounts = copy(a, body->mounts, body->n_mounts * sizeof *body->mounts);
    out->bands = copy(a, out->bands, out->n_bands * sizeof *out->bands);
    if (!train->links || !train->dampers || !body->mounts || !out->bands) return TACET_NO_MEMORY;
    for (size_t i = 0; i < train->n_links; i++)
        resolve(tacet_model_train(m), i, &train->links[i]);
    for (size_t i = 0; i < out->n_bands; i++) // limits are those as stated: none is solved for
        out->bands[i].reference = TACET_REFERENCE_WORST;
    for (size_t i = 0; i < n; i++) {
        const tacet_scatter_entry *e = &entries[i];
        bool all = e->link == SIZE_MAX && e->mount == SIZE_MAX;
        if (e->link != SIZE_MAX) scale_link(train, e->link, factor[i]);
        for (size_t k = 0; k < body->n_mounts; k++) {
            if (!all && e->mount != k) continue;
            tacet_status status = scale_mount(&body->mounts[k], factor[i], a);
            if (status != TACET_OK) return status;
        }
    }
    return TACET_OK;
}
