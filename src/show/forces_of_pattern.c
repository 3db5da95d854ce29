// Order lines of a mount's force over speed, with the modes of the body on its mounts.
#include "show/body_figures.h"

static tacet_status body_modes(const tacet_figure_source *s, tacet_figure_orders *out)
{
    tacet_body_modes m;
    tacet_figure_mode *mode = tacet_arena_alloc(s->arena, 6 * sizeof *mode);
    if (!mode) return TACET_NO_MEMORY;
    tacet_status status = tacet_body_modes_of(tacet_model_body(s->model), &m);
    if (status != TACET_OK) return status;
    for (size_t i = 0; i < 6; i++) {
        mode[i] = (tacet_figure_mode){body_mode_name(m.share[i], s->arena), m.hz[i]};
        if (!mode[i].name) return TACET_NO_MEMORY;
    }
    out->mode = mode;
    out->n_modes = 6;
    return TACET_OK;
}

// Those that mounts reach; none of these: all.
static tacet_status mount_bands(const tacet_figure_source *s, tacet_figure_orders *out)
{
    size_t n = 0, n_all;
    tacet_figure_band *band = figure_bands(s, &n_all);
    if (!band) return TACET_NO_MEMORY;
    for (size_t i = 0; i < n_all; i++) {
        int kind = tacet_model_band(s->model, i)->kind;
        if (band[i].judged || kind == TACET_BAND_MOUNT || kind == TACET_BAND_CAB)
            band[n++] = band[i];
    }
    if (n == 0) return TACET_OK;
    out->band = band;
    out->n_bands = n;
    return TACET_OK;
}

tacet_status tacet_forces_of_pattern(const tacet_figure_source *s, tacet_figure_orders *out,
                                     tacet_error *e)
{
    if (!body_on_mounts(s->model)) return tacet_fail(e, TACET_BAD_INPUT, "no body on mounts");
    tacet_status status = tacet_orders_of_pattern(s, out, e);
    if (status != TACET_OK) return status;
    status = body_modes(s, out);
    if (status == TACET_OK) status = mount_bands(s, out);
    if (status != TACET_OK)
        return tacet_fail(e, status, "modes of the body: %s", tacet_status_text(status));
    const char *pattern = figure_pattern_text(s);
    out->subtitle = pattern ? screen_text(s->arena,
                                          "Force of a mount on the frame over speed, %s, at the "
                                          "study's torque; modes of the powertrain on its mounts",
                                          pattern)
                            : NULL;
    return out->subtitle ? TACET_OK : figure_no_memory(e);
}
