// Scatter of stiffness: margins of a condition over models beside the study's own.
#include "scatter.h"
#include <math.h>

typedef struct {
    const tacet_model *m;
    const tacet_scatter_ask *ask;
    const tacet_watch *watch;
    tacet_error *e;
    size_t n_points;
    double limit_rms[TACET_BANDS_MOST]; // of each band as stated; NAN: none
} scattering;

// Margin of a band against a limit that does not scatter.
static double band_margin(const scattering *g, size_t b, const tacet_band_result *result)
{
    if (result->verdict == TACET_NO_VERDICT && result->why != TACET_WHY_NO_REFERENCE) return NAN;
    if (!result->level.has_line) return INFINITY;
    return 20 * log10(g->limit_rms[b] / result->level.dispersed);
}

static double limit_margin(const tacet_limit_result *result)
{
    if (result->verdict == TACET_NO_VERDICT) return NAN;
    return isnan(result->margin_db) ? INFINITY : result->margin_db;
}

// Keeps the worse of two margins; what is not known stays so.
static void keep(double *margin_db, double found_db)
{
    *margin_db = isnan(*margin_db) || isnan(found_db) ? NAN : fmin(*margin_db, found_db);
}

// Margins of the worst placement, bands first, with a model that is this study's or one beside it.
static tacet_status solve(scattering *g, const tacet_model *m, bool stated, double *margin_db)
{
    const tacet_scatter_ask *ask = g->ask;
    size_t n_bands = tacet_model_bands(m), n_limits = tacet_model_limits(m);
    tacet_workspace *w = NULL;
    tacet_status status = tacet_workspace_create(m, &w);
    for (size_t i = 0; i < n_bands + n_limits; i++)
        margin_db[i] = INFINITY;
    for (size_t p = 0; status == TACET_OK && p < ask->candidate->n_placements; p++) {
        tacet_row row;
        tacet_condition c = {.id = p,
                             .speed_rad_per_s = ask->speed_rad_per_s,
                             .demand_Nm = ask->demand_Nm,
                             .roll = ask->candidate->roll[p]};
        status = tacet_solve(m, &c, ask->level, w, &row);
        for (size_t b = 0; status == TACET_OK && b < n_bands; b++) {
            if (stated && !isnan(row.bands[b].limit)) g->limit_rms[b] = row.bands[b].limit;
            keep(&margin_db[b], band_margin(g, b, &row.bands[b]));
        }
        for (size_t i = 0; status == TACET_OK && i < n_limits; i++)
            keep(&margin_db[n_bands + i], limit_margin(&row.limits[i]));
    }
    tacet_workspace_destroy(w);
    return status;
}

static tacet_status probe_beside(scattering *g, const double *factor, tacet_arena *a,
                                 double *margin_db)
{
    tacet_study study;
    tacet_model *m = NULL;
    tacet_status status =
        scatter_study(g->m, g->ask->entries, g->ask->n_entries, factor, a, &study);
    if (status == TACET_OK) status = tacet_model_create_beside(g->m, &study, &m, g->e);
    if (status == TACET_OK) status = solve(g, m, false, margin_db);
    tacet_model_destroy(m);
    return status;
}

static tacet_status probe(void *who, const double *factor, double *margin_db)
{
    scattering *g = who;
    if (g->watch && g->watch->stop && *g->watch->stop)
        return tacet_fail(g->e, TACET_STOPPED, "stopped in the scatter");
    tacet_arena *a = tacet_arena_create();
    tacet_status status = TACET_NO_MEMORY;
    if (a)
        status = g->n_points++ == 0 ? solve(g, g->m, true, margin_db)
                                    : probe_beside(g, factor, a, margin_db);
    tacet_arena_destroy(a);
    return status;
}

// As the bands and limits themselves judge: near inside the reserve.
static tacet_verdict verdict_of(double margin_db, double reserve_db)
{
    if (isnan(margin_db)) return TACET_NO_VERDICT;
    return margin_db < 0 ? TACET_OVER : margin_db < reserve_db ? TACET_NEAR : TACET_CLEAR;
}

tacet_status tacet_scatter_run(const tacet_model *m, const tacet_scatter_ask *ask,
                               const tacet_watch *watch, tacet_arena *a, tacet_scatter *out,
                               tacet_error *e)
{
    scattering g = {.m = m, .ask = ask, .watch = watch, .e = e};
    size_t n_bands = tacet_model_bands(m), n = n_bands + tacet_model_limits(m);
    double reserve_db = tacet_model_study(m)->screen.reserve_db;
    double *half_width = tacet_arena_alloc(a, (ask->n_entries + 1) * sizeof *half_width);
    scatter_least *least = tacet_arena_alloc(a, (n + 1) * sizeof *least);
    *out = (tacet_scatter){.entries = ask->entries, .n_entries = ask->n_entries, .n_margins = n};
    out->margins = tacet_arena_alloc(a, (n + 1) * sizeof *out->margins);
    if (!half_width || !least || !out->margins)
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for the scatter");
    for (size_t i = 0; i < ask->n_entries; i++)
        half_width[i] = ask->entries[i].half_width;
    for (size_t b = 0; b < n_bands; b++)
        g.limit_rms[b] = NAN;
    const scatter_space q = {ask->n_entries, n, half_width, probe, &g, a};
    tacet_status status = scatter_search(&q, least, &out->n_points, &out->n_failed);
    if (status == TACET_NO_MEMORY) return tacet_fail(e, status, "no memory for the scatter");
    for (size_t i = 0; status == TACET_OK && i < n; i++)
        out->margins[i] =
            (tacet_scatter_margin){.band = i < n_bands ? (int)i : -1,
                                   .limit = i < n_bands ? -1 : (int)(i - n_bands),
                                   .stated_db = least[i].stated_db,
                                   .least_db = least[i].least_db,
                                   .stated = verdict_of(least[i].stated_db, reserve_db),
                                   .least = verdict_of(least[i].least_db, reserve_db),
                                   .at = least[i].at,
                                   .slope_db = least[i].slope_db,
                                   .governs = least[i].governs};
    return status;
}

const char *tacet_scatter_text(const tacet_scatter *s, const tacet_scatter_margin *m)
{
    if (m->stated == TACET_NO_VERDICT) return "not known";
    if (m->stated == TACET_OVER) return "is over";
    if (m->least == TACET_OVER) return "may become over";
    if (s->n_failed > 0) return "not known"; // it was not seen everywhere
    if (m->least == TACET_NEAR) return m->stated == TACET_NEAR ? "is near" : "may become near";
    return "stays clear";
}
