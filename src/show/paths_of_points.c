// What each path brings to a point: with S the spectrum that arrives and P_i that of path i,
//   share_i = sum Re(P_i conj S) / sum |S|^2   over the lines in question;
// S = sum P_i, so the shares sum to 1. A path at right angles to the sum has none.
#include "show/body_figures.h"
#include "show/text.h"
#include <complex.h>
#include <math.h>
#include <string.h>

#define ORDERS_DRAWN 4
#define PATHS_DRAWN  8
#define LEAST_LINE   1e-6 // of the total rms: less is rounding, what arrives there is spread alone

typedef struct {
    const tacet_figure_source *s;
    const tacet_point_condition *at;
    const tacet_band *band; // NULL: none
    size_t n_lines, n_paths;
    unsigned revolutions;
    size_t *path;          // [n_paths] indices into the body
    double complex *sum;   // [n_lines + 1]
    double complex *parts; // [n_paths * (n_lines + 1)]
} point_job;

static double line_order(const point_job *j, size_t h)
{
    return (double)h / j->revolutions;
}

static bool inside(const point_job *j, size_t h)
{
    double hz = tacet_order_hz(line_order(j, h), j->at->speed_rad_per_s);
    return !j->band || (hz >= j->band->counted_low_hz && hz <= j->band->counted_high_hz);
}

static double power_of(const point_job *j, bool everywhere)
{
    double sum = 0;
    for (size_t h = 1; h <= j->n_lines; h++)
        if (everywhere || inside(j, h)) sum += pow(cabs(j->sum[h]), 2);
    return sum;
}

static void copy_lines(const tacet_spectrum *x, size_t n, double complex *to)
{
    for (size_t h = 1; h <= n; h++)
        to[h] = h <= x->n_lines ? x->line[h] : 0;
}

static tacet_status read_lines(point_job *j)
{
    const tacet_body_def *d = tacet_body_def_of(tacet_model_body(j->s->model));
    const char *name = d->points[j->at->point].name;
    const tacet_spectrum *x;
    tacet_arena *a = j->s->arena;
    for (size_t i = 0; i < d->n_paths; i++)
        j->n_paths += strcmp(d->paths[i].to, name) == 0;
    j->path = tacet_arena_alloc(a, (j->n_paths + 1) * sizeof *j->path);
    j->sum = tacet_arena_alloc(a, (j->n_lines + 1) * sizeof *j->sum);
    j->parts = tacet_arena_alloc(a, (j->n_paths + 1) * (j->n_lines + 1) * sizeof *j->parts);
    if (!j->path || !j->sum || !j->parts) return TACET_NO_MEMORY;
    tacet_quantity_ref cab = {tacet_quantity_find("cab"), j->at->point};
    tacet_status status = tacet_workspace_quantity(j->s->work, cab, &x, NULL);
    if (status == TACET_OK) copy_lines(x, j->n_lines, j->sum);
    size_t used = 0;
    for (size_t i = 0; status == TACET_OK && i < d->n_paths; i++) {
        if (strcmp(d->paths[i].to, name) != 0) continue;
        status = tacet_workspace_path(j->s->work, i, &x);
        if (status == TACET_OK) copy_lines(x, j->n_lines, &j->parts[used * (j->n_lines + 1)]);
        j->path[used++] = i;
    }
    return status;
}

// Shares of all paths over the lines from..to; `banded`: those inside the band alone.
static void shares(const point_job *j, size_t from, size_t to, bool banded, double *share)
{
    double total = 0;
    for (size_t h = from; h <= to; h++)
        if (!banded || inside(j, h)) total += pow(cabs(j->sum[h]), 2);
    for (size_t i = 0; i < j->n_paths; i++) {
        double along = 0;
        for (size_t h = from; h <= to; h++)
            if (!banded || inside(j, h))
                along += creal(j->parts[i * (j->n_lines + 1) + h] * conj(j->sum[h]));
        share[i] = total > 0 ? along / total : NAN;
    }
}

// The paths with the largest shares keep their place in the file; the others become one row.
static bool lump(const point_job *j, tacet_figure_point *p, double *share, size_t n_sums)
{
    const tacet_body_def *d = tacet_body_def_of(tacet_model_body(j->s->model));
    tacet_arena *a = j->s->arena;
    size_t n = j->n_paths, most = n > PATHS_DRAWN ? PATHS_DRAWN - 1 : n, used = 0;
    const char **name = tacet_arena_alloc(a, (PATHS_DRAWN + 1) * sizeof *name);
    bool *keep = tacet_arena_alloc(a, (n + 1) * sizeof *keep);
    double *weight = tacet_arena_alloc(a, (n + 1) * sizeof *weight);
    if (!name || !keep || !weight) return false;
    for (size_t i = 0; i < n; i++) {
        keep[i] = false;
        weight[i] = 0;
        for (size_t k = 0; k < n_sums; k++)
            weight[i] = fmax(weight[i], fabs(share[k * n + i]));
    }
    for (size_t round = 0; round < most; round++) {
        size_t best = n;
        for (size_t i = 0; i < n; i++)
            if (!keep[i] && (best == n || weight[i] > weight[best])) best = i;
        keep[best] = true;
    }
    for (size_t k = 0; k < n_sums; k++) { // in place: a row is never longer than it was
        double *to = &share[k * n], others = 0;
        used = 0;
        for (size_t i = 0; i < n; i++)
            if (keep[i])
                to[used++] = share[k * n + i];
            else
                others += share[k * n + i];
        if (most < n) to[used] = others;
    }
    used = 0;
    for (size_t i = 0; i < n; i++) {
        const tacet_path_def *path = &d->paths[j->path[i]];
        if (keep[i]) name[used++] = screen_text(a, "%s %c", path->mount, "xyz"[path->axis]);
    }
    if (most < n) name[used++] = screen_text(a, "%zu other paths", n - most);
    for (size_t i = 0; i < used; i++)
        if (!name[i]) return false;
    p->path = name;
    p->n_paths = used;
    return true;
}

// The sum over all lines first, then the largest lines in rising order.
static size_t fill_sums(const point_job *j, tacet_figure_sum *sum, double *share)
{
    double inner = power_of(j, false), total = power_of(j, true);
    bool banded = j->band && inner > LEAST_LINE * LEAST_LINE * total;
    size_t used = 0;
    if (!(total > 0)) return 0;
    shares(j, 1, j->n_lines, banded, &share[0]);
    sum[used++] = (tacet_figure_sum){NAN, NAN, sqrt((banded ? inner : total) / 2), share};
    bool *picked = tacet_arena_alloc(j->s->arena, (j->n_lines + 1) * sizeof *picked);
    double *weight = tacet_arena_alloc(j->s->arena, (j->n_lines + 1) * sizeof *weight);
    if (!picked || !weight) return SIZE_MAX;
    for (size_t h = 1; h <= j->n_lines; h++)
        weight[h - 1] = banded && !inside(j, h) ? 0 : cabs(j->sum[h]);
    figure_pick_largest(j->n_lines, weight, ORDERS_DRAWN, picked);
    for (size_t h = 1; h <= j->n_lines; h++) {
        if (!picked[h - 1]) continue;
        double *to = &share[used * j->n_paths], order = line_order(j, h);
        shares(j, h, h, false, to);
        sum[used++] = (tacet_figure_sum){order, tacet_order_hz(order, j->at->speed_rad_per_s),
                                         cabs(j->sum[h]) / sqrt(2), to};
    }
    return used;
}

static const char *at_text(const point_job *j, const tacet_row *row, const char *unit)
{
    char rpm[TACET_NUMBER_TEXT], torque[TACET_NUMBER_TEXT], level[TACET_NUMBER_TEXT];
    char limit[TACET_NUMBER_TEXT], margin[TACET_NUMBER_TEXT];
    tacet_number_format_short(screen_rpm(j->at->speed_rad_per_s), 5, rpm);
    tacet_number_format_short(j->at->demand_Nm, 4, torque);
    if (!j->band || !isfinite(row->bands[j->at->band].margin_db))
        return screen_text(j->s->arena, "at %s rpm and %s N m", rpm, torque);
    const tacet_band_result *b = &row->bands[j->at->band];
    return screen_text(j->s->arena, "at %s rpm and %s N m: margin %s dB in %s (%s of %s %s rms)",
                       rpm, torque, text_fixed(b->margin_db, 1, margin), j->band->name,
                       tacet_number_format_short(b->level.dispersed, 3, level),
                       tacet_number_format_short(b->limit, 3, limit), unit);
}

static tacet_status one_point(point_job *j, tacet_figure_point *out, tacet_error *e)
{
    tacet_row row;
    tacet_arena *a = j->s->arena;
    tacet_quantity_ref cab = {tacet_quantity_find("cab"), j->at->point};
    tacet_status status =
        figure_solve(j->s, j->at->roll, j->at->speed_rad_per_s, j->at->demand_Nm, &row, e);
    if (status != TACET_OK) return status;
    j->revolutions = j->at->roll->revolutions;
    j->n_lines = tacet_model_lines(j->s->model, j->revolutions);
    status = read_lines(j);
    if (status != TACET_OK)
        return tacet_fail(e, status, "paths of a point: %s", tacet_status_text(status));
    tacet_figure_sum *sum = tacet_arena_alloc(a, (ORDERS_DRAWN + 1) * sizeof *sum);
    double *share = tacet_arena_alloc(a, (ORDERS_DRAWN + 1) * (j->n_paths + 1) * sizeof *share);
    if (!sum || !share) return figure_no_memory(e);
    const char *unit = tacet_model_quantity_unit(j->s->model, cab);
    *out = (tacet_figure_point){
        .name = tacet_body_point_name(tacet_model_body(j->s->model), j->at->point),
        .at = at_text(j, &row, unit),
        .unit = unit,
        .sum = sum,
        .n_sums = fill_sums(j, sum, share)};
    bool banded = j->band && power_of(j, false) > LEAST_LINE * LEAST_LINE * power_of(j, true);
    out->all = banded ? screen_text(a, "all of %s", j->band->name) : "all orders";
    if (out->n_sums == SIZE_MAX || !lump(j, out, share, out->n_sums) || !out->at || !out->all)
        return figure_no_memory(e);
    return TACET_OK;
}

tacet_status tacet_paths_of_points(const tacet_figure_source *s, const tacet_point_condition *at,
                                   size_t n_points, tacet_figure_paths *out, tacet_error *e)
{
    size_t n = n_points < TACET_FIGURE_POINTS_MOST ? n_points : TACET_FIGURE_POINTS_MOST;
    tacet_figure_point *point = tacet_arena_alloc(s->arena, (n + 1) * sizeof *point);
    const char *left_out = "";
    if (!point) return figure_no_memory(e);
    for (size_t i = 0; i < n; i++) {
        point_job j = {.s = s,
                       .at = &at[i],
                       .band =
                           at[i].band == SIZE_MAX ? NULL : tacet_model_band(s->model, at[i].band)};
        tacet_status status = one_point(&j, &point[i], e);
        if (status != TACET_OK) return status;
    }
    if (n < n_points)
        left_out = screen_text(s->arena, " (%zu of %zu points, smallest margins)", n, n_points);
    const char *pattern = figure_pattern_text(s);
    *out = (tacet_figure_paths){.title = screen_title(s->model), .point = point, .n_points = n};
    if (!pattern || !left_out) return figure_no_memory(e);
    out->subtitle =
        screen_text(s->arena,
                    "What each path from the mounts brings to people, where the margin of %s is "
                    "smallest%s",
                    pattern, left_out);
    return out->subtitle ? TACET_OK : figure_no_memory(e);
}
