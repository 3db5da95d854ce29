// Order lines of a mount's force over speed, with the modes of the body on its mounts.
#include "show/body_figures.h"
#include <math.h>

static tacet_figure_mode *body_modes(const tacet_figure_source *s, const tacet_body_modes *m)
{
    tacet_figure_mode *mode = tacet_arena_alloc(s->arena, 6 * sizeof *mode);
    for (size_t i = 0; mode && i < 6; i++) {
        mode[i] = (tacet_figure_mode){body_mode_name(m->share[i], s->arena), m->hz[i]};
        if (!mode[i].name) return NULL;
    }
    return mode;
}

// Those that mounts reach.
static tacet_figure_band *mount_bands(const tacet_figure_source *s, size_t *n)
{
    size_t n_all;
    tacet_figure_band *band = figure_bands(s, &n_all);
    *n = 0;
    for (size_t i = 0; band && i < n_all; i++) {
        int kind = tacet_model_band(s->model, i)->kind;
        if (band[i].judged || kind == TACET_BAND_MOUNT || kind == TACET_BAND_CAB)
            band[(*n)++] = band[i];
    }
    return band;
}

tacet_status tacet_forces_of_pattern(const tacet_figure_source *s, tacet_figure_orders *out,
                                     tacet_error *e)
{
    if (!body_on_mounts(s->model)) return tacet_fail(e, TACET_BAD_INPUT, "no body on mounts");
    tacet_body_modes modes;
    size_t n_bands;
    tacet_status status = tacet_body_modes_of(tacet_model_body(s->model), &modes);
    if (status != TACET_OK)
        return tacet_fail(e, status, "modes of the body: %s", tacet_status_text(status));
    tacet_figure_mode *mode = body_modes(s, &modes);
    tacet_figure_band *band = mount_bands(s, &n_bands);
    if (!mode || !band) return figure_no_memory(e);
    double hz = 1.3 * modes.hz[5];
    for (size_t i = 0; i < n_bands; i++)
        hz = fmax(hz, 1.12 * band[i].high_hz);
    status = figure_orders_below(s, hz, true, out, e);
    if (status != TACET_OK) return status;
    out->mode = mode, out->n_modes = 6;
    out->band = band, out->n_bands = n_bands;
    const char *pattern = figure_pattern_text(s);
    out->subtitle = pattern ? screen_text(s->arena,
                                          "Force of a mount on the frame over speed, %s, at the "
                                          "study's torque; modes of the powertrain on its mounts",
                                          pattern)
                            : NULL;
    return out->subtitle ? TACET_OK : figure_no_memory(e);
}
