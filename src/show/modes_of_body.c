// Rigid-body modes with their kinetic energy, over the bands of kind mount.
#include "show/body_figures.h"

bool body_on_mounts(const tacet_model *m)
{
    const tacet_body *b = tacet_model_body(m);
    return b && tacet_body_mounts(b) > 0;
}

const char *body_mode_name(const double share[6], tacet_arena *a)
{
    static const char *const member[] = {"x", "y", "z", "roll", "pitch", "yaw"};
    size_t first = 0, second = 1;
    for (size_t k = 1; k < 6; k++)
        if (share[k] > share[first])
            second = first, first = k;
        else if (k == 1 || share[k] > share[second])
            second = k;
    return share[second] < BODY_MODE_SECOND
               ? member[first]
               : screen_text(a, "%s with %s", member[first], member[second]);
}

tacet_status tacet_modes_of_body(const tacet_model *m, tacet_arena *a, tacet_figure_modes *out,
                                 tacet_error *e)
{
    if (!body_on_mounts(m)) return tacet_fail(e, TACET_BAD_INPUT, "no body on mounts");
    size_t n = tacet_model_bands(m);
    tacet_body_modes *modes = tacet_arena_alloc(a, sizeof *modes);
    tacet_figure_band *band = tacet_arena_alloc(a, (n + 1) * sizeof *band);
    if (!modes || !band) return figure_no_memory(e);
    tacet_status status = tacet_body_modes_of(tacet_model_body(m), modes);
    if (status != TACET_OK)
        return tacet_fail(e, status, "modes of the body: %s", tacet_status_text(status));
    *out = (tacet_figure_modes){.title = screen_title(m), .modes = modes, .band = band};
    for (size_t i = 0; i < n; i++) {
        const tacet_band *b = tacet_model_band(m, i);
        if (b->kind != TACET_BAND_MOUNT) continue;
        band[out->n_bands++] =
            (tacet_figure_band){b->name, b->counted_low_hz, b->counted_high_hz, true};
    }
    out->subtitle = screen_text(
        a, "Modes of the powertrain on its mounts: kinetic energy in each direction%s%s",
        out->n_bands ? ", and the bands of kind mount" : "",
        modes->settled ? "" : " (the stiffness of one did not settle)");
    return out->subtitle ? TACET_OK : figure_no_memory(e);
}
