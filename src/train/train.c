// What a train tells about itself.
#include "train/internal.h"
#include <math.h>
#include <string.h>

size_t tacet_train_nodes(const tacet_train *t)
{
    return t->n;
}

size_t tacet_train_links(const tacet_train *t)
{
    return t->n_links;
}

const char *tacet_train_node_name(const tacet_train *t, size_t node)
{
    return t->node_name[node];
}

const char *tacet_train_link_name(const tacet_train *t, size_t link)
{
    return t->link_name[link];
}

static size_t find(const char *const *names, size_t n, const char *name)
{
    for (size_t i = 0; i < n; i++)
        if (strcmp(names[i], name) == 0) return i;
    return SIZE_MAX;
}

size_t tacet_train_node_find(const tacet_train *t, const char *name)
{
    return find(t->node_name, t->n, name);
}

size_t tacet_train_link_find(const tacet_train *t, const char *name)
{
    return find(t->link_name, t->n_links, name);
}

size_t tacet_train_flywheel(const tacet_train *t)
{
    return t->flywheel;
}

size_t tacet_train_load(const tacet_train *t)
{
    return t->load;
}

double tacet_train_node_ratio(const tacet_train *t, size_t node)
{
    return t->ratio[node];
}

double tacet_train_node_inertia(const tacet_train *t, size_t node)
{
    return t->inertia[node];
}

double tacet_train_node_damping(const tacet_train *t, size_t node)
{
    return t->damping[node];
}

bool tacet_train_node_housed(const tacet_train *t, size_t node)
{
    return t->housed[node];
}

double tacet_train_total_inertia(const tacet_train *t)
{
    double sum = 0;
    for (size_t i = 0; i < t->n; i++)
        sum += t->inertia[i] * t->ratio[i] * t->ratio[i];
    return sum;
}

tacet_link_info tacet_train_link_info(const tacet_train *t, size_t link)
{
    return t->link[link];
}

double complex tacet_train_link_impedance(const tacet_train *t, size_t link, double w)
{
    const link_law *law = &t->law[link];
    const tacet_link_info *info = &t->link[link];
    if (t->constant_loss[link]) return info->stiffness_Nm_per_rad * (1 + I * info->loss_factor);
    double re = law->rest, im = law->viscous * w;
    for (size_t a = 0; law->weight && a < t->n_arms; a++) {
        // g i w / (r + i w) = g (w^2 + i w r) / (r^2 + w^2)
        double r = t->rate[a], share = law->weight[a] * w / (r * r + w * w);
        re += share * w;
        im += share * r;
    }
    return w == 0 ? info->stiffness_Nm_per_rad : re + I * im;
}

tacet_status tacet_train_modes(const tacet_train *t, double *frequency_hz, double *shape)
{
    memcpy(frequency_hz, t->mode_hz, t->n * sizeof *frequency_hz);
    memcpy(shape, t->mode_shape, t->n * t->n * sizeof *shape);
    return TACET_OK;
}

tacet_status tacet_train_motion_init(tacet_train_motion *m, const tacet_train *t, size_t n_lines,
                                     tacet_arena *a)
{
    tacet_train_motion made = {.n_nodes = t->n, .n_links = t->n_links};
    made.angle_rad = tacet_arena_alloc(a, t->n * sizeof *made.angle_rad);
    made.link_torque_Nm = tacet_arena_alloc(a, t->n_links * sizeof *made.link_torque_Nm);
    tacet_status status = made.angle_rad && made.link_torque_Nm ? TACET_OK : TACET_NO_MEMORY;
    for (size_t i = 0; i < t->n && status == TACET_OK; i++)
        status = tacet_spectrum_init(&made.angle_rad[i], n_lines, a);
    for (size_t i = 0; i < t->n_links && status == TACET_OK; i++)
        status = tacet_spectrum_init(&made.link_torque_Nm[i], n_lines, a);
    if (status == TACET_OK) *m = made;
    return status;
}
