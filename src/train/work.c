#include "train/work.h"
#include <math.h>
#include <stdlib.h>

#define MOST_OVERSAMPLING 24 // samples of a march per period of the highest line

static double *numbers(tacet_train_work *w, size_t n)
{
    return tacet_arena_alloc(w->arena, n * sizeof(double));
}

static bool splits(tacet_train_work *w, split *s, size_t n)
{
    s->re = numbers(w, n);
    s->im = numbers(w, n);
    return s->re && s->im;
}

static bool reserve(tacet_train_work *w)
{
    const tacet_train *t = w->t;
    size_t links = t->n_links * w->stride, nodes = t->n * w->stride;
    factor_memo *f = &w->factor;
    w->arm_re = numbers(w, t->n_arms * w->stride);
    w->arm_im = numbers(w, t->n_arms * w->stride);
    w->mean = numbers(w, t->n);
    w->driven = tacet_arena_alloc(w->arena, t->n * sizeof *w->driven);
    return splits(w, &f->share, links) && splits(w, &f->carried, links) &&
           splits(w, &f->softness, links) && splits(w, &f->root, w->stride) &&
           splits(w, &w->stiffness, w->stride) && splits(w, &w->dynamic, nodes) &&
           splits(w, &w->force, t->n * CHUNK) && splits(w, &w->angle, t->n * CHUNK) && w->arm_re &&
           w->arm_im && w->mean && w->driven;
}

static bool spectra(tacet_train_work *w, tacet_spectrum *s, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (tacet_spectrum_init(&s[i], w->most_lines, w->arena) != TACET_OK) return false;
    return true;
}

static double complex *lines(tacet_train_work *w)
{
    return tacet_arena_alloc(w->arena, (w->most_lines + 1) * sizeof(double complex));
}

static bool reserve_ripple(tacet_train_work *w)
{
    ripple_work *r = &w->ripple;
    r->angle = tacet_arena_alloc(w->arena, w->n_throws * sizeof *r->angle);
    r->torque = tacet_arena_alloc(w->arena, w->n_throws * sizeof *r->torque);
    r->offset = numbers(w, w->t->n);
    r->transfer = lines(w);
    r->rest = lines(w);
    r->step = lines(w);
    for (size_t i = 0; i <= KRYLOV_MOST; i++)
        if (!(r->basis[i] = lines(w))) return false;
    return r->angle && r->torque && r->offset && r->transfer && r->rest && r->step &&
           spectra(w, r->angle, w->n_throws) && spectra(w, r->torque, w->n_throws) &&
           spectra(w, &r->fresh, 1) && spectra(w, &r->signal, 1);
}

static size_t transform_samples(size_t kind)
{
    return (size_t)(kind % 2 ? 24 : 16) << kind / 2;
}

// Transforms up to the length that steady needs, and buffers of the longest.
static bool reserve_transforms(tacet_train_work *w)
{
    w->most_samples = tacet_transform_length(w->most_lines, MOST_OVERSAMPLING);
    for (size_t i = 0; i < TRANSFORM_KINDS; i++) {
        size_t n = transform_samples(i);
        if (n > w->most_samples) break;
        if (tacet_transform_create(n, &w->transform[i]) != TACET_OK) return false;
    }
    const tacet_transform *longest = work_transform(w, w->most_samples);
    if (tacet_transform_samples(longest) < w->most_samples) return false;
    for (size_t i = 0; i < sizeof w->buffer / sizeof *w->buffer; i++)
        if (!(w->buffer[i] = tacet_transform_buffer(longest))) return false;
    w->at_angle = numbers(w, w->most_samples);
    w->at_torque = numbers(w, w->most_samples);
    w->at_inertia = numbers(w, w->most_samples);
    w->at_slope = numbers(w, w->most_samples);
    w->ripple.kept = malloc(w->n_throws * ripple_kept_bytes(w->most_samples));
    return w->at_angle && w->at_torque && w->at_inertia && w->at_slope && w->ripple.kept;
}

const tacet_transform *work_transform(const tacet_train_work *w, size_t n_samples)
{
    size_t i = 0;
    while (transform_samples(i) < n_samples && i + 1 < TRANSFORM_KINDS && w->transform[i + 1])
        i++;
    return w->transform[i];
}

void spectra_shape(tacet_spectrum *s, size_t n, unsigned revolutions, size_t n_lines)
{
    for (size_t i = 0; i < n; i++) {
        s[i].revolutions = revolutions;
        s[i].n_lines = n_lines;
        s[i].line[0] = 0;
    }
}

// Ripple and steady hang torque on angle: throws turn at crank speed.
tacet_status periodic_check(const tacet_train *t, double speed, size_t n_throws,
                            const size_t *throw_node, const tacet_periodic *how,
                            const tacet_train_work *w)
{
    if (w->t != t || !(speed > 0) || !isfinite(speed)) return TACET_BAD_INPUT;
    if (n_throws == 0 || n_throws > w->n_throws) return TACET_BAD_INPUT;
    if (how->revolutions == 0 || how->n_lines == 0 || how->n_lines > w->most_lines)
        return TACET_BAD_INPUT;
    if (!(how->tolerance >= 0) || how->most_passes == 0) return TACET_BAD_INPUT;
    for (size_t i = 0; i < n_throws; i++) {
        if (throw_node[i] >= t->n || fabs(t->ratio[throw_node[i]] - 1) > 1e-12)
            return TACET_BAD_INPUT;
        for (size_t k = 0; k < i; k++) // the reciprocating share of a node is known as a whole
            if (throw_node[k] == throw_node[i]) return TACET_BAD_INPUT;
    }
    return TACET_OK;
}

tacet_periodic tacet_periodic_default(void)
{
    return (tacet_periodic){.revolutions = 2, .n_lines = 48, .most_passes = 8};
}

tacet_status tacet_train_work_create(const tacet_train *t, size_t most_lines, size_t n_throws,
                                     tacet_train_work **out)
{
    if (most_lines == 0 || n_throws == 0 || most_lines > (size_t)1 << 24) return TACET_BAD_INPUT;
    tacet_train_work *w = calloc(1, sizeof *w);
    if (!w) return TACET_NO_MEMORY;
    w->t = t;
    w->most_lines = most_lines;
    w->n_throws = n_throws;
    w->stride = (most_lines + 7) / 8 * 8;
    w->arena = tacet_arena_create();
    if (!w->arena || !reserve(w) || !reserve_ripple(w) || !reserve_transforms(w) ||
        !steady_reserve(w)) {
        tacet_train_work_destroy(w);
        return TACET_NO_MEMORY;
    }
    *out = w;
    return TACET_OK;
}

void tacet_train_work_destroy(tacet_train_work *w)
{
    if (!w) return;
    steady_release(w);
    free(w->ripple.kept);
    for (size_t i = 0; i < TRANSFORM_KINDS; i++)
        tacet_transform_destroy(w->transform[i]);
    for (size_t i = 0; i < sizeof w->buffer / sizeof *w->buffer; i++)
        tacet_transform_release(w->buffer[i]);
    tacet_arena_destroy(w->arena);
    free(w);
}
