#include "condition/internal.h"
#include <math.h>
#include <string.h>

static bool disperses(const tacet_model *m)
{
    return m->study->engine.cylinder_dispersion > 0 || m->study->engine.cyclic_dispersion > 0;
}

tacet_status levels_solve(tacet_workspace *w, const tacet_condition *c, tacet_band_level *out)
{
    const tacet_model *m = w->m;
    double W = c->speed_rad_per_s;
    tacet_dispersion d = {.cylinder_sigma = m->study->engine.cylinder_dispersion,
                          .n_slots = c->roll->cylinders,
                          .transfer = w->slot_transfer,
                          .fired = w->fired};
    tacet_status status = TACET_OK;
    if (disperses(m) && m->n_bands > 0) {
        status = dispersion_transfers(w, W, c->roll->revolutions);
        if (status != TACET_OK) return status;
        dispersion_fired(w, w->transfers.n_lines);
    }
    for (size_t b = 0; b < m->n_bands; b++) {
        const tacet_band *band = &m->bands[b];
        workspace_shape(w, w->response.revolutions, w->response.n_lines);
        status = band->of.what->spectrum(&w->response, band->of.target, &w->quantity);
        if (status != TACET_OK) return status;
        for (unsigned slot = 0; slot < c->roll->cylinders && disperses(m); slot++)
            w->slot_transfer[slot] = &w->transfers.transfer[b * m->n_throws + m->slot_throw[slot]];
        d.cyclic_mean_square = disperses(m) ? dispersion_cyclic(w, b, W) : 0;
        tacet_band_level_of(band, &w->quantity, W, disperses(m) ? &d : NULL, &out[b]);
        if (!isfinite(out[b].dispersed)) return TACET_NOT_FINITE;
    }
    return TACET_OK;
}

tacet_status condition_levels(tacet_workspace *w, const tacet_condition *c, tacet_level level,
                              tacet_duty *duty, tacet_solver_note *note, tacet_band_level *levels)
{
    const tacet_model *m = w->m;
    w->has_response = false;
    tacet_status status =
        tacet_engine_duty(m->engine, c->roll, c->speed_rad_per_s, c->demand_Nm, w->engine, duty);
    if (status != TACET_OK || !duty->reachable) return status;
    status = tacet_engine_load(m->engine, c->roll, duty, c->speed_rad_per_s, w->engine);
    if (status != TACET_OK) return status;
    w->friction_Nm = duty->friction_Nm;
    w->roll = c->roll;
    status = motion_solve(w, c, level, note);
    if (status != TACET_OK) return status;
    w->response.peak_pressure_Pa = duty->peak_pressure_Pa;
    return levels_solve(w, c, levels);
}

static bool same(double a, double b)
{
    return memcmp(&a, &b, sizeof a) == 0;
}

// Fuel of the same engine firing on all cylinders at this speed and demand; what fails of it is no
// reference, not a failure of the condition.
static tacet_status all_fire_duty(tacet_workspace *w, const tacet_condition *c)
{
    all_fire_memo *memo = &w->all_fire;
    if (memo->valid && same(memo->speed, c->speed_rad_per_s) && same(memo->demand, c->demand_Nm))
        return TACET_OK;
    tacet_duty duty;
    memo->valid = false;
    tacet_status status = tacet_engine_duty(w->m->engine, w->m->all_fire, c->speed_rad_per_s,
                                            c->demand_Nm, w->engine, &duty);
    if (status == TACET_NO_MEMORY) return status;
    *memo = (all_fire_memo){.valid = true,
                            .speed = c->speed_rad_per_s,
                            .demand = c->demand_Nm,
                            .reachable = status == TACET_OK && duty.reachable,
                            .fuel_kg_per_s = duty.fuel_kg_per_s};
    return TACET_OK;
}

// Levels of all-fire at the same speed, for bands that ask for them. Solves another condition:
// before the condition's own.
static tacet_status all_fire_levels(tacet_workspace *w, const tacet_condition *c)
{
    all_fire_memo *memo = &w->all_fire;
    bool wanted = false;
    for (size_t b = 0; b < w->m->n_bands; b++)
        wanted |= w->m->bands[b].reference == TACET_REFERENCE_SAME_SPEED;
    if (!wanted || memo->levels_valid) return TACET_OK;
    tacet_condition all = *c;
    all.roll = w->m->all_fire;
    tacet_duty duty;
    tacet_solver_note note;
    tacet_band_level level[TACET_BANDS_MOST] = {0};
    tacet_status status = condition_levels(w, &all, TACET_LEVEL_RIPPLE, &duty, &note, level);
    if (status == TACET_NO_MEMORY) return status;
    memo->levels_solved = status == TACET_OK && duty.reachable;
    for (size_t b = 0; b < w->m->n_bands; b++)
        memo->level[b] = memo->levels_solved ? level[b].dispersed : NAN;
    memo->levels_valid = true;
    return TACET_OK;
}

static void judge_none(const tacet_model *m, tacet_why why, tacet_row *out)
{
    for (size_t b = 0; b < m->n_bands; b++)
        tacet_band_no_verdict(why, &out->bands[b]);
    for (size_t i = 0; i < m->n_limits; i++)
        tacet_limit_no_verdict(why, &out->limits[i]);
    out->worst = TACET_NO_VERDICT;
    out->worst_margin_db = NAN;
    out->limiting_band = out->limiting_limit = -1;
}

// over is worse than no verdict, that is worse than near, near worse than clear.
static int badness(tacet_verdict v)
{
    static const int rank[] = {
        [TACET_CLEAR] = 0, [TACET_NEAR] = 1, [TACET_OVER] = 3, [TACET_NO_VERDICT] = 2};
    return rank[v];
}

static void take_worst(tacet_row *out, tacet_verdict v, double margin_db, int band, int limit)
{
    if (badness(v) > badness(out->worst)) out->worst = v;
    if (isnan(margin_db) || margin_db >= out->worst_margin_db) return;
    out->worst_margin_db = margin_db;
    out->limiting_band = band;
    out->limiting_limit = limit;
}

static tacet_status judge_all(tacet_workspace *w, const tacet_band_level *levels, tacet_row *out)
{
    const tacet_model *m = w->m;
    out->worst = TACET_CLEAR;
    out->worst_margin_db = INFINITY;
    for (size_t b = 0; b < m->n_bands; b++) {
        const tacet_band *band = &m->bands[b];
        double ref =
            band->reference == TACET_REFERENCE_SAME_SPEED ? w->all_fire.level[b] : m->reference[b];
        tacet_band_judge(band, &levels[b], isnan(ref) ? NULL : &ref, &out->bands[b]);
        take_worst(out, out->bands[b].verdict, out->bands[b].margin_db, (int)b, -1);
    }
    const tacet_limit_scratch scratch = {&w->quantity,
                                         model_transform(m, w->response.n_lines, PEAK_OVERSAMPLE),
                                         w->samples, w->cycles};
    for (size_t i = 0; i < m->n_limits; i++) {
        workspace_shape(w, w->response.revolutions, w->response.n_lines);
        tacet_status status = tacet_limit_judge(
            &m->limits[i], &w->response, m->study->screen.reserve_db, &scratch, &out->limits[i]);
        if (status != TACET_OK) return status;
        take_worst(out, out->limits[i].verdict, out->limits[i].margin_db, -1, (int)i);
    }
    if (isinf(out->worst_margin_db)) out->worst_margin_db = NAN;
    return TACET_OK;
}

// A condition that fails is a row that says why; only running out of memory is the call's own
// failure.
static tacet_status row_failed(tacet_workspace *w, tacet_status status, tacet_row *out)
{
    w->has_response = false;
    out->outcome = TACET_FAILED;
    out->why = status;
    judge_none(w->m, TACET_WHY_FAILED, out);
    return status == TACET_NO_MEMORY ? status : TACET_OK;
}

tacet_status tacet_solve(const tacet_model *m, const tacet_condition *c, tacet_level level,
                         tacet_workspace *w, tacet_row *out)
{
    if (!(c->speed_rad_per_s > 0) || !isfinite(c->speed_rad_per_s) || !isfinite(c->demand_Nm) ||
        c->roll->cylinders != tacet_engine_cylinders(m->engine) ||
        c->roll->strokes != tacet_engine_strokes(m->engine) || w->m != m)
        return TACET_BAD_INPUT;
    *out = (tacet_row){.id = c->id,
                       .speed_rad_per_s = c->speed_rad_per_s,
                       .demand_Nm = c->demand_Nm,
                       .fuel_to_all_fire = NAN,
                       .worst_margin_db = NAN,
                       .limiting_band = -1,
                       .limiting_limit = -1,
                       .n_bands = m->n_bands,
                       .n_limits = m->n_limits,
                       .solver = {.method = "none"}};
    tacet_band_level levels[TACET_BANDS_MOST];
    tacet_status status = all_fire_duty(w, c);
    if (status == TACET_OK) status = all_fire_levels(w, c);
    if (status == TACET_OK)
        status = condition_levels(w, c, level, &out->duty, &out->solver, levels);
    if (status != TACET_OK) return row_failed(w, status, out);
    if (!out->duty.reachable) {
        out->outcome = TACET_UNREACHABLE;
        judge_none(m, TACET_WHY_UNREACHABLE, out);
        return TACET_OK;
    }
    if (w->all_fire.reachable && w->all_fire.fuel_kg_per_s > 0)
        out->fuel_to_all_fire = out->duty.fuel_kg_per_s / w->all_fire.fuel_kg_per_s;
    status = judge_all(w, levels, out);
    return status == TACET_OK ? TACET_OK : row_failed(w, status, out);
}
