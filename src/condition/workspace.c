#include "condition/internal.h"
#include <stdlib.h>

#define MARCH_ORDER 24

static tacet_status spectra_create(tacet_spectrum **out, size_t n, size_t n_lines, tacet_arena *a)
{
    *out = tacet_arena_alloc(a, n * sizeof **out);
    if (!*out) return TACET_NO_MEMORY;
    for (size_t i = 0; i < n; i++) {
        tacet_status status = tacet_spectrum_init(&(*out)[i], n_lines, a);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

static tacet_status create_spectra(tacet_workspace *w)
{
    const tacet_model *m = w->m;
    size_t n_slots = tacet_engine_cylinders(m->engine), lines = m->most_lines;
    tacet_status status = tacet_train_motion_init(&w->motion, m->train, lines, w->arena);
    if (status == TACET_OK)
        status = tacet_train_motion_init(&w->unit_motion, m->train, lines, w->arena);
    if (status == TACET_OK) status = spectra_create(&w->torque, m->n_throws, lines, w->arena);
    if (status == TACET_OK) status = spectra_create(&w->piston, m->n_throws, lines, w->arena);
    if (status == TACET_OK) status = spectra_create(&w->unit_piston, m->n_throws, lines, w->arena);
    if (status == TACET_OK) status = spectra_create(&w->fired, n_slots, lines, w->arena);
    if (status == TACET_OK)
        status =
            spectra_create(&w->transfers.transfer, (m->n_bands + 1) * m->n_throws, lines, w->arena);
    if (status == TACET_OK && m->body)
        status = tacet_body_response_init(&w->mounts, lines, w->arena);
    if (status == TACET_OK && m->body) status = tacet_body_response_init(&w->one_line, 1, w->arena);
    if (status == TACET_OK) status = tacet_spectrum_init(&w->unit, lines, w->arena);
    if (status == TACET_OK) status = tacet_spectrum_init(&w->quantity, lines, w->arena);
    return status;
}

static tacet_status create_scratch(tacet_workspace *w)
{
    const tacet_model *m = w->m;
    const tacet_transform *longest = model_transform(m, m->most_lines, PEAK_OVERSAMPLE);
    size_t n = tacet_transform_samples(longest);
    size_t most = m->most_lines + CYCLIC_MOST + 2;
    w->samples = tacet_transform_buffer(longest);
    w->angle = tacet_arena_alloc(w->arena, n * sizeof(double));
    w->torque_at = tacet_arena_alloc(w->arena, n * sizeof(double));
    w->inertia_at = tacet_arena_alloc(w->arena, n * sizeof(double));
    w->slope_at = tacet_arena_alloc(w->arena, n * sizeof(double));
    w->order = tacet_arena_alloc(w->arena, most * sizeof *w->order);
    w->pulse = tacet_arena_alloc(w->arena, most * sizeof *w->pulse);
    w->twist = tacet_arena_alloc(w->arena, tacet_train_nodes(m->train) * sizeof(double));
    w->slot_transfer = tacet_arena_alloc(w->arena, tacet_engine_cylinders(m->engine) *
                                                       sizeof(const tacet_spectrum *));
    bool counts = false;
    for (size_t i = 0; i < m->n_limits; i++)
        counts |= tacet_limit_counts_cycles(&m->limits[i]);
    if (counts)
        w->cycles = tacet_arena_alloc(w->arena, TACET_RAIN_SCRATCH * (n + 1) * sizeof(double));
    return (!counts || w->cycles) && w->samples && w->angle && w->torque_at && w->inertia_at &&
                   w->slope_at && w->order && w->pulse && w->twist && w->slot_transfer
               ? TACET_OK
               : TACET_NO_MEMORY;
}

// The march samples a turn finely however few lines are asked for: memory for as many lines as its
// samples take.
static size_t march_lines(const tacet_model *m)
{
    size_t least = (size_t)MARCH_ORDER * m->most_revolutions;
    return m->most_lines > least ? m->most_lines : least;
}

tacet_status workspace_build(const tacet_model *m, tacet_workspace **out)
{
    tacet_workspace *w = calloc(1, sizeof *w);
    if (!w) return TACET_NO_MEMORY;
    w->m = m;
    tacet_status status = (w->arena = tacet_arena_create()) ? TACET_OK : TACET_NO_MEMORY;
    if (status == TACET_OK) status = create_spectra(w);
    if (status == TACET_OK) status = create_scratch(w);
    if (status == TACET_OK) status = tacet_engine_work_create(m->engine, &w->engine);
    if (status == TACET_OK)
        status = tacet_train_work_create(m->train, march_lines(m), m->n_throws, &w->train);
    if (status == TACET_OK)
        status = tacet_train_work_create(m->train, m->most_lines, 1, &w->train_unit);
    if (status != TACET_OK) {
        tacet_workspace_destroy(w);
        return status;
    }
    *out = w;
    return TACET_OK;
}

tacet_status tacet_workspace_create(const tacet_model *m, tacet_workspace **out)
{
    return m->prepared ? workspace_build(m, out) : TACET_BAD_INPUT;
}

void tacet_workspace_destroy(tacet_workspace *w)
{
    if (!w) return;
    tacet_train_work_destroy(w->train_unit);
    tacet_train_work_destroy(w->train);
    tacet_engine_work_destroy(w->engine);
    tacet_transform_release(w->samples);
    tacet_arena_destroy(w->arena);
    free(w);
}

static void shape(tacet_spectrum *s, size_t n, unsigned revolutions, size_t n_lines)
{
    for (size_t i = 0; i < n; i++) {
        s[i].revolutions = revolutions;
        s[i].n_lines = n_lines;
    }
}

void workspace_shape(tacet_workspace *w, unsigned revolutions, size_t n_lines)
{
    shape(w->motion.angle_rad, w->motion.n_nodes, revolutions, n_lines);
    shape(w->motion.link_torque_Nm, w->motion.n_links, revolutions, n_lines);
    shape(w->torque, w->m->n_throws, revolutions, n_lines);
    shape(w->piston, w->m->n_throws, revolutions, n_lines);
    shape(&w->quantity, 1, revolutions, n_lines);
}

tacet_status workspace_mounts(tacet_workspace *w, double speed, unsigned revolutions,
                              size_t n_lines, const tacet_body_response **out)
{
    tacet_body_response *memo = n_lines == 1 ? &w->one_line : &w->mounts;
    *out = NULL;
    if (!w->m->body) return TACET_OK;
    if (memo->speed_rad_per_s != speed || memo->revolutions != revolutions ||
        memo->n_lines < n_lines) {
        tacet_status status = tacet_body_respond(w->m->body, speed, revolutions, n_lines, memo);
        if (status != TACET_OK) {
            memo->n_lines = 0;
            return status;
        }
    }
    *out = memo;
    return TACET_OK;
}

const tacet_response *tacet_workspace_response(const tacet_workspace *w)
{
    return w->has_response ? &w->response : NULL;
}

const tacet_engine_work *tacet_workspace_engine(const tacet_workspace *w)
{
    return w->engine;
}

tacet_status tacet_workspace_quantity(tacet_workspace *w, tacet_quantity_ref q,
                                      const tacet_spectrum **out, tacet_peaks *peaks)
{
    if (!w->has_response || q.what->scalar) return TACET_BAD_INPUT;
    const tacet_response *r = &w->response;
    workspace_shape(w, r->revolutions, r->n_lines);
    tacet_status status = q.what->spectrum(r, q.target, &w->quantity);
    if (status != TACET_OK) return status;
    if (peaks)
        tacet_spectrum_peaks(&w->quantity, model_transform(w->m, r->n_lines, PEAK_OVERSAMPLE),
                             w->samples, peaks);
    *out = &w->quantity;
    return TACET_OK;
}

tacet_status tacet_workspace_path(tacet_workspace *w, size_t path, const tacet_spectrum **out)
{
    if (!w->has_response || !w->m->body) return TACET_BAD_INPUT;
    workspace_shape(w, w->response.revolutions, w->response.n_lines);
    *out = &w->quantity;
    return tacet_path_share(&w->response, path, &w->quantity);
}

tacet_status tacet_workspace_comfort(tacet_workspace *w, size_t point, tacet_comfort *out)
{
    const tacet_spectrum *s;
    tacet_quantity_ref q = {tacet_quantity_find("cab"), point};
    if (!w->m->body || point >= tacet_body_points(w->m->body)) return TACET_BAD_INPUT;
    tacet_status status = tacet_workspace_quantity(w, q, &s, NULL);
    if (status == TACET_OK)
        tacet_comfort_of(s, model_transform(w->m, s->n_lines, PEAK_OVERSAMPLE), w->samples, out);
    return status;
}
