// Drawings of a body on its mounts: its modes, the force of one mount over speed, and what paths
// bring to each point where its margin is smallest.
#include "show/body_figures.h"
#include "show/save.h"
#include <complex.h>
#include <math.h>
#include <string.h>

static double rms_of(const tacet_spectrum *x)
{
    double sum = 0;
    for (size_t h = 1; h <= x->n_lines; h++)
        sum += pow(cabs(x->line[h]), 2) / 2;
    return sqrt(sum);
}

// The mount and axis of the band on a mount's force with the smallest margin; no such band: the
// largest force.
static tacet_status pick_mount(const save_job *b, tacet_figure_source *src, const tacet_row *at,
                               tacet_error *e)
{
    size_t best = SIZE_MAX, n = 3 * tacet_body_mounts(tacet_model_body(b->m));
    src->of.what = tacet_quantity_find("mount-force");
    for (size_t i = 0; i < at->n_bands; i++)
        if (tacet_model_band(b->m, i)->of.what == src->of.what &&
            isfinite(at->bands[i].margin_db) &&
            (best == SIZE_MAX || at->bands[i].margin_db < at->bands[best].margin_db))
            best = i;
    if (best != SIZE_MAX) {
        src->of = tacet_model_band(b->m, best)->of;
        return TACET_OK;
    }
    tacet_row row;
    double most = -1;
    tacet_status status = figure_solve(src, src->roll, at->speed_rad_per_s, at->demand_Nm, &row, e);
    for (size_t i = 0; status == TACET_OK && i < n; i++) {
        const tacet_spectrum *x;
        status =
            tacet_workspace_quantity(src->work, (tacet_quantity_ref){src->of.what, i}, &x, NULL);
        if (status == TACET_OK && rms_of(x) > most) most = rms_of(x), src->of.target = i;
    }
    return status;
}

static bool arrives(const save_job *b, size_t point)
{
    const tacet_body_def *d = tacet_body_def_of(tacet_model_body(b->m));
    for (size_t i = 0; i < d->n_paths; i++)
        if (strcmp(d->paths[i].to, d->points[point].name) == 0) return true;
    return false;
}

// Where the bands on a point have their smallest margin, over all speeds of the cell's candidate;
// no band with a margin: the cell itself. Returns the margin, INFINITY for none.
static double pick_condition(const save_job *b, size_t cell, size_t point,
                             tacet_point_condition *out)
{
    const tacet_quantity *cab = tacet_quantity_find("cab");
    double least = INFINITY;
    size_t at = cell, band = SIZE_MAX;
    for (size_t k = 0; k < b->s->n_cells; k++) {
        const tacet_cell *c = &b->s->cells[k];
        if (c->candidate != b->s->cells[cell].candidate || c->row.outcome != TACET_SOLVED) continue;
        for (size_t i = 0; i < c->row.n_bands; i++) {
            tacet_quantity_ref of = tacet_model_band(b->m, i)->of;
            if (of.what == cab && of.target == point && c->row.bands[i].margin_db < least)
                least = c->row.bands[i].margin_db, at = k, band = i;
        }
    }
    *out = (tacet_point_condition){.point = point,
                                   .band = band,
                                   .roll = screen_roll(b->s, at),
                                   .speed_rad_per_s = b->s->cells[at].row.speed_rad_per_s,
                                   .demand_Nm = b->s->cells[at].row.demand_Nm};
    return least;
}

// Points with paths, the smallest margin first.
static size_t pick_points(const save_job *b, size_t cell, tacet_point_condition *at)
{
    double margin[TACET_BODY_POINTS_MOST];
    size_t n = 0;
    for (size_t p = 0; p < tacet_body_points(tacet_model_body(b->m)); p++) {
        tacet_point_condition c;
        if (n == TACET_BODY_POINTS_MOST || !arrives(b, p)) continue;
        double m = pick_condition(b, cell, p, &c);
        size_t k = n++;
        for (; k > 0 && margin[k - 1] > m; k--)
            margin[k] = margin[k - 1], at[k] = at[k - 1];
        margin[k] = m, at[k] = c;
    }
    return n;
}

static void draw_modes(const save_job *b, save_drawing *d)
{
    tacet_figure_modes modes;
    tacet_error e = {.status = TACET_OK};
    tacet_status status = tacet_modes_of_body(b->m, b->a, &modes, &e);
    save_note_failure(d, status, &e);
    if (status == TACET_OK)
        save_draw(b, d, "modes", &(tacet_figure){TACET_FIGURE_MODES, {.modes = &modes}});
}

void save_body_drawings(const save_job *b, tacet_workspace *w, save_drawing *d, size_t cell)
{
    tacet_figure_orders forces;
    tacet_figure_paths paths;
    tacet_point_condition at[TACET_BODY_POINTS_MOST];
    tacet_error e = {.status = TACET_OK};
    if (!body_on_mounts(b->m)) return;
    draw_modes(b, d);
    if (cell == SIZE_MAX) return;
    tacet_figure_source src = {.model = b->m,
                               .work = w,
                               .arena = b->a,
                               .roll = screen_roll(b->s, cell),
                               .name = screen_candidate(b->s, cell)->name};
    tacet_status status = pick_mount(b, &src, &b->s->cells[cell].row, &e);
    if (status == TACET_OK) status = tacet_forces_of_pattern(&src, &forces, &e);
    save_note_failure(d, status, &e);
    if (status == TACET_OK)
        save_draw(b, d, "forces", &(tacet_figure){TACET_FIGURE_ORDERS, {.orders = &forces}});
    size_t n = pick_points(b, cell, at);
    if (n == 0) return;
    status = tacet_paths_of_points(&src, at, n, &paths, &e);
    save_note_failure(d, status, &e);
    if (status == TACET_OK)
        save_draw(b, d, "paths", &(tacet_figure){TACET_FIGURE_PATHS, {.paths = &paths}});
}
