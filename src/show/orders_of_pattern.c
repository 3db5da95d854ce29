// Order lines of one pattern over speed, solved at every speed of the study.
#include "show/figure_source.h"
#include <complex.h>
#include <math.h>
#include <string.h>

#define ORDERS_DRAWN 24

// The link with most strain energy in a mode, k (th_from / ratio - th_to)^2.
static size_t strained_link(const tacet_train *t, const double *shape)
{
    size_t most = 0;
    double largest = -1;
    for (size_t l = 0; l < tacet_train_links(t); l++) {
        tacet_link_info link = tacet_train_link_info(t, l);
        double twist = shape[link.from] / link.gear_ratio - shape[link.to];
        double energy = link.stiffness_Nm_per_rad * twist * twist;
        if (energy > largest) largest = energy, most = l;
    }
    return most;
}

// Elastic modes, named by the link that is strained most.
static tacet_status modes_of(const tacet_figure_source *s, tacet_figure_mode **out, size_t *n)
{
    const tacet_train *t = tacet_model_train(s->model);
    size_t nodes = tacet_train_nodes(t);
    double *hz = tacet_arena_alloc(s->arena, nodes * sizeof *hz);
    double *shape = tacet_arena_alloc(s->arena, nodes * nodes * sizeof *shape);
    *out = tacet_arena_alloc(s->arena, nodes * sizeof **out);
    *n = 0;
    if (!hz || !shape || !*out) return TACET_NO_MEMORY;
    tacet_status status = tacet_train_modes(t, hz, shape);
    for (size_t m = 1; status == TACET_OK && m < nodes; m++)
        (*out)[(*n)++] = (tacet_figure_mode){
            tacet_train_link_name(t, strained_link(t, &shape[m * nodes])), hz[m]};
    return status;
}

// rms of every line at every speed, lines first; NAN where the demand is not reached.
static tacet_status levels_over_speed(const tacet_figure_source *s, size_t n_lines, double *level,
                                      tacet_error *e)
{
    const tacet_study *study = tacet_model_study(s->model);
    size_t n = study->screen.n_speeds;
    for (size_t i = 0; i < n; i++) {
        double speed = study->screen.speeds_rad_per_s[i];
        const tacet_spectrum *x = NULL;
        tacet_row row;
        tacet_status status =
            figure_solve(s, s->roll, speed, tacet_model_demand(s->model, speed), &row, NULL);
        if (status == TACET_OK) status = tacet_workspace_quantity(s->work, s->of, &x, NULL);
        if (status == TACET_NO_MEMORY) return figure_no_memory(e);
        for (size_t h = 1; h <= n_lines; h++)
            level[(h - 1) * n + i] =
                status == TACET_OK && h <= x->n_lines ? cabs(x->line[h]) / sqrt(2) : NAN;
    }
    return TACET_OK;
}

static double largest_below(const double *level, const tacet_screen_def *d, double order,
                            double highest_hz)
{
    double most = 0;
    for (size_t i = 0; i < d->n_speeds; i++)
        if (tacet_order_hz(order, d->speeds_rad_per_s[i]) <= highest_hz && level[i] > most)
            most = level[i];
    return most;
}

// Up to 12 % past the highest band, as the drawing shows it; without bands everything.
static double drawn_hz(const tacet_model *m)
{
    double high = 0;
    for (size_t b = 0; b < tacet_model_bands(m); b++)
        high = fmax(high, 1.12 * tacet_model_band(m, b)->counted_high_hz);
    return high > 0 ? high : INFINITY;
}

// Past the place of the largest line of all.
static double largest_hz(const tacet_figure_source *s, size_t n_lines, const double *level)
{
    const tacet_screen_def *d = &tacet_model_study(s->model)->screen;
    double most = 0, hz = 0;
    for (size_t h = 1; h <= n_lines; h++)
        for (size_t i = 0; i < d->n_speeds; i++)
            if (level[(h - 1) * d->n_speeds + i] > most) {
                most = level[(h - 1) * d->n_speeds + i];
                hz = tacet_order_hz((double)h / s->roll->revolutions, d->speeds_rad_per_s[i]);
            }
    return 1.12 * hz;
}

// The lines that are drawn: the largest within the drawing, rising.
static size_t pick_lines(const tacet_figure_source *s, size_t n_lines, const double *level,
                         double highest_hz, double *order, double *drawn)
{
    const tacet_screen_def *d = &tacet_model_study(s->model)->screen;
    size_t n = d->n_speeds, used = 0;
    double *weight = tacet_arena_alloc(s->arena, (n_lines + 1) * sizeof *weight);
    bool *picked = tacet_arena_alloc(s->arena, (n_lines + 1) * sizeof *picked);
    if (!weight || !picked) return SIZE_MAX;
    for (size_t h = 1; h <= n_lines; h++)
        weight[h - 1] =
            largest_below(&level[(h - 1) * n], d, (double)h / s->roll->revolutions, highest_hz);
    figure_pick_largest(n_lines, weight, ORDERS_DRAWN, picked);
    for (size_t h = 1; h <= n_lines; h++) {
        if (!picked[h - 1]) continue;
        memcpy(&drawn[used * n], &level[(h - 1) * n], n * sizeof *drawn);
        order[used++] = (double)h / s->roll->revolutions;
    }
    return used;
}

tacet_status tacet_orders_of_pattern(const tacet_figure_source *s, tacet_figure_orders *out,
                                     tacet_error *e)
{
    return figure_orders_below(s, drawn_hz(s->model), false, out, e);
}

tacet_status figure_orders_below(const tacet_figure_source *s, double hz, bool largest,
                                 tacet_figure_orders *out, tacet_error *e)
{
    const tacet_screen_def *d = &tacet_model_study(s->model)->screen;
    size_t n_lines = tacet_model_lines(s->model, s->roll->revolutions), n = d->n_speeds;
    double *level = tacet_arena_alloc(s->arena, (n_lines * n + 1) * sizeof *level);
    double *order = tacet_arena_alloc(s->arena, ORDERS_DRAWN * sizeof *order);
    double *drawn = tacet_arena_alloc(s->arena, (ORDERS_DRAWN * n + 1) * sizeof *drawn);
    double *rpm = tacet_arena_alloc(s->arena, (n + 1) * sizeof *rpm);
    const char *pattern = figure_pattern_text(s);
    tacet_figure_mode *mode;
    if (!level || !order || !drawn || !rpm || !pattern) return figure_no_memory(e);
    *out = (tacet_figure_orders){.title = screen_title(s->model),
                                 .unit = tacet_model_quantity_unit(s->model, s->of),
                                 .speed_rpm = rpm,
                                 .n_speeds = n,
                                 .order = order,
                                 .level_rms = drawn};
    tacet_status status = modes_of(s, &mode, &out->n_modes);
    if (status != TACET_OK) return tacet_fail(e, status, "modes: %s", tacet_status_text(status));
    status = levels_over_speed(s, n_lines, level, e);
    if (status != TACET_OK) return status;
    if (largest) hz = fmax(hz, largest_hz(s, n_lines, level));
    out->highest_hz = isfinite(hz) ? hz : 0;
    for (size_t i = 0; i < n; i++)
        rpm[i] = screen_rpm(d->speeds_rad_per_s[i]);
    out->mode = mode;
    out->band = figure_bands(s, &out->n_bands);
    out->quantity = screen_quantity_name(s->model, s->of, s->arena);
    out->subtitle =
        screen_text(s->arena, "Order lines of %s over speed, at the study's torque", pattern);
    out->n_orders = pick_lines(s, n_lines, level, hz, order, drawn);
    bool whole = out->band && out->quantity && out->subtitle && out->n_orders != SIZE_MAX;
    return whole ? TACET_OK : figure_no_memory(e);
}
