#include "train/work.h"
#include <stdlib.h>

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
    if (!w->arena || !reserve(w)) {
        tacet_train_work_destroy(w);
        return TACET_NO_MEMORY;
    }
    *out = w;
    return TACET_OK;
}

void tacet_train_work_destroy(tacet_train_work *w)
{
    if (!w) return;
    tacet_arena_destroy(w->arena);
    free(w);
}
