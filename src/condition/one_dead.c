// One cylinder dead: the levels that the same engine would have with a cylinder that never fires.
#include "condition/internal.h"
#include <math.h>

static tacet_status take(tacet_workspace *w, const tacet_condition *c, tacet_level level,
                         unsigned slot, tacet_one_dead *out)
{
    tacet_duty duty;
    tacet_solver_note note;
    tacet_band_level bands[TACET_BANDS_MOST];
    tacet_condition dead = *c;
    dead.roll = w->m->one_dead[slot];
    tacet_status status = condition_levels(w, &dead, level, &duty, &note, bands);
    w->has_response = false;
    if (status == TACET_NO_MEMORY) return status;
    if (status != TACET_OK || !duty.reachable) return TACET_OK;
    out->n_solved++;
    for (size_t b = 0; b < w->m->n_bands; b++) {
        if (out->level[b] >= bands[b].dispersed) continue; // false for the first one
        out->level[b] = bands[b].dispersed;
        out->slot[b] = slot;
    }
    return TACET_OK;
}

tacet_status tacet_solve_one_dead(const tacet_model *m, const tacet_condition *c, tacet_level level,
                                  tacet_workspace *w, tacet_one_dead *out)
{
    if (w->m != m || !(c->speed_rad_per_s > 0) || !isfinite(c->speed_rad_per_s) ||
        !isfinite(c->demand_Nm))
        return TACET_BAD_INPUT;
    *out = (tacet_one_dead){.n_cylinders = tacet_engine_cylinders(m->engine)};
    for (size_t b = 0; b < TACET_BANDS_MOST; b++)
        out->level[b] = NAN;
    for (unsigned slot = 0; m->one_dead && slot < out->n_cylinders; slot++) {
        tacet_status status = take(w, c, level, slot, out);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}
