// Order bars of one condition against all cylinders firing at the same demand.
#include "show/figure_source.h"
#include <complex.h>
#include <math.h>

#define BARS_DRAWN 20

// Amplitudes of all-fire on the grid of the pattern's repeat; NAN where it cannot reach the demand.
static tacet_status reference_peaks(const tacet_figure_source *s, double speed_rad_per_s,
                                    double demand_Nm, size_t n_lines, double *peak, bool *reached,
                                    tacet_error *e)
{
    const tacet_roll *all = tacet_model_all_fire(s->model);
    const tacet_spectrum *x;
    tacet_row row;
    tacet_status status = figure_solve(s, all, speed_rad_per_s, demand_Nm, &row, e);
    *reached = status == TACET_OK;
    if (status == TACET_OK) status = tacet_workspace_quantity(s->work, s->of, &x, NULL);
    if (status == TACET_NO_MEMORY) return status;
    for (size_t h = 1; h <= n_lines; h++) {
        size_t g = h * all->revolutions / s->roll->revolutions;
        bool on_grid = h * all->revolutions % s->roll->revolutions == 0;
        peak[h - 1] = status != TACET_OK ? NAN : on_grid && g <= x->n_lines ? cabs(x->line[g]) : 0;
    }
    return TACET_OK;
}

tacet_status tacet_bars_of_condition(const tacet_figure_source *s, double speed_rad_per_s,
                                     double demand_Nm, tacet_figure_bars *out, tacet_error *e)
{
    size_t n_lines = tacet_model_lines(s->model, s->roll->revolutions), n_bands, used = 0;
    double *value[2], *weight = tacet_arena_alloc(s->arena, (n_lines + 1) * sizeof *weight);
    double *shown = tacet_arena_alloc(s->arena, 3 * BARS_DRAWN * sizeof *shown);
    bool *picked = tacet_arena_alloc(s->arena, (n_lines + 1) * sizeof *picked), reached;
    const char *pattern = figure_pattern_text(s);
    const char *quantity = screen_quantity_name(s->model, s->of, s->arena);
    tacet_figure_band *band = figure_bands(s, &n_bands);
    const tacet_spectrum *x;
    tacet_row row;
    for (int k = 0; k < 2; k++)
        value[k] = tacet_arena_alloc(s->arena, (n_lines + 1) * sizeof *value[k]);
    if (!weight || !shown || !picked || !pattern || !quantity || !band || !value[0] || !value[1])
        return figure_no_memory(e);
    tacet_status status = figure_solve(s, s->roll, speed_rad_per_s, demand_Nm, &row, e);
    if (status == TACET_OK) status = tacet_workspace_quantity(s->work, s->of, &x, NULL);
    if (status != TACET_OK) return status;
    for (size_t h = 1; h <= n_lines; h++)
        value[0][h - 1] = h <= x->n_lines ? cabs(x->line[h]) : 0;
    status = reference_peaks(s, speed_rad_per_s, demand_Nm, n_lines, value[1], &reached, e);
    if (status != TACET_OK) return status;
    for (size_t i = 0; i < n_lines; i++)
        weight[i] = fmax(value[0][i], reached ? value[1][i] : 0);
    figure_pick_largest(n_lines, weight, BARS_DRAWN, picked);
    for (size_t i = 0; i < n_lines; i++) {
        if (!picked[i]) continue;
        shown[used] = (double)(i + 1) / s->roll->revolutions;
        shown[BARS_DRAWN + used] = value[0][i];
        shown[2 * BARS_DRAWN + used++] = value[1][i];
    }
    *out = (tacet_figure_bars){.title = screen_title(s->model),
                               .subtitle = figure_at_text(s, pattern, speed_rad_per_s, demand_Nm),
                               .quantity = quantity,
                               .unit = tacet_model_quantity_unit(s->model, s->of),
                               .name = pattern,
                               .reference_name = reached ? "all cylinders firing"
                                                         : "all cylinders: not reachable",
                               .speed_rpm = screen_rpm(speed_rad_per_s),
                               .order = shown,
                               .peak = shown + BARS_DRAWN,
                               .reference_peak = shown + 2 * BARS_DRAWN,
                               .n_orders = used,
                               .n_lines = n_lines,
                               .band = band,
                               .n_bands = n_bands};
    return out->subtitle ? TACET_OK : figure_no_memory(e);
}
