// Where a level can jump or peak between grid speeds: a significant line enters or leaves a counted
// band, or meets a mode.
#include "internal.h"
#include "rules.h"
#include <math.h>

static bool *marks_of(const line_marks *k, size_t band)
{
    return k->of_band + band * (k->n_lines + 1);
}

static void mark_comb(line_marks *k, size_t band)
{
    for (size_t h = k->cycles; h <= k->n_lines; h += k->cycles)
        marks_of(k, band)[h] = true;
}

tacet_status line_marks_init(line_marks *k, const tacet_model *m, const tacet_roll *r,
                             tacet_arena *a)
{
    size_t n_lines = tacet_model_lines(m, r->revolutions);
    size_t n_bands = tacet_model_bands(m), n_limits = tacet_model_limits(m);
    *k = (line_marks){.revolutions = r->revolutions, .cycles = r->cycles, .n_lines = n_lines};
    k->of_band = tacet_arena_alloc(a, n_bands * (n_lines + 1) * sizeof *k->of_band);
    k->of_limit = tacet_arena_alloc(a, n_limits * (n_lines + 1) * sizeof *k->of_limit);
    if (!k->of_band || !k->of_limit) return TACET_NO_MEMORY;
    for (size_t b = 0; b < n_bands; b++) // all-fire has those lines alone
        if (tacet_model_band(m, b)->reference == TACET_REFERENCE_SAME_SPEED) mark_comb(k, b);
    return TACET_OK;
}

void mark_lines(const tacet_spectrum *s, double least_peak, bool *mark)
{
    for (size_t h = 1; h <= s->n_lines; h++)
        if (cabs(s->line[h]) >= least_peak) mark[h] = true;
}

static double largest_line(const tacet_spectrum *s)
{
    double largest = 0;
    for (size_t h = 1; h <= s->n_lines; h++)
        largest = fmax(largest, cabs(s->line[h]));
    return largest;
}

static void mark_inside(line_marks *k, size_t b, const tacet_band *band, double speed)
{
    double line1_hz = tacet_order_hz(1.0 / k->revolutions, speed);
    for (size_t h = 1; h <= k->n_lines; h++) {
        double hz = line1_hz * (double)h;
        if (hz >= band->counted_low_hz && hz <= band->counted_high_hz) marks_of(k, b)[h] = true;
    }
}

// What unequal cylinders and cycles add.
static void take_uneven(line_marks *k, const tacet_model *m, size_t b,
                        const tacet_band_result *result, double speed)
{
    const tacet_band_level *level = &result->level;
    double added = level->dispersed * level->dispersed - level->nominal * level->nominal;
    double share = sqrt(fmax(added, 0)) / result->limit; // a NAN is below every share
    if (share >= COMB_SHARE_OF_LIMIT) mark_comb(k, b);
    if (share >= UNEVEN_SHARE_OF_LIMIT) mark_inside(k, b, tacet_model_band(m, b), speed);
    if (level->leading_peak >= LINE_SHARE_OF_LIMIT * sqrt(2) * result->limit)
        marks_of(k, b)[level->leading_line] = true;
}

static tacet_status take_band(line_marks *k, const tacet_model *m, size_t b, const tacet_row *row,
                              tacet_workspace *w)
{
    const tacet_spectrum *s;
    const tacet_band_result *result = &row->bands[b];
    tacet_status status = tacet_workspace_quantity(w, tacet_model_band(m, b)->of, &s, NULL);
    if (status != TACET_OK || s->n_lines > k->n_lines) return status;
    double least = LINE_SHARE_OF_LIMIT * sqrt(2) * result->limit;
    if (isnan(least)) least = LINE_SHARE_OF_LARGEST * largest_line(s);
    if (least > 0) mark_lines(s, least, marks_of(k, b));
    take_uneven(k, m, b, result, row->speed_rad_per_s);
    return TACET_OK;
}

static tacet_status take_limit(line_marks *k, const tacet_model *m, size_t i, tacet_workspace *w)
{
    const tacet_limit *limit = tacet_model_limit(m, i);
    const tacet_spectrum *s;
    if (limit->of.what->scalar || limit->statistic == TACET_STAT_MEAN) return TACET_OK;
    tacet_status status = tacet_workspace_quantity(w, limit->of, &s, NULL);
    if (status != TACET_OK || s->n_lines > k->n_lines) return status;
    double least = limit->statistic == TACET_STAT_DAMAGE ? LINE_SHARE_OF_LARGEST * largest_line(s)
                                                         : LINE_SHARE_OF_SCALAR * limit->value;
    mark_lines(s, least, k->of_limit + i * (k->n_lines + 1));
    return TACET_OK;
}

tacet_status line_marks_take(line_marks *k, const tacet_model *m, const tacet_row *row,
                             tacet_workspace *w)
{
    tacet_status status = TACET_OK;
    if (row->outcome != TACET_SOLVED) return status;
    for (size_t b = 0; status == TACET_OK && b < row->n_bands; b++)
        status = take_band(k, m, b, row, w);
    for (size_t i = 0; status == TACET_OK && i < row->n_limits; i++)
        status = take_limit(k, m, i, w);
    return status;
}

static bool has_grid_speed(double low, double high, const double *grid, size_t n_grid)
{
    for (size_t i = 0; i < n_grid; i++)
        if (grid[i] >= low && grid[i] <= high) return true;
    return false;
}

void line_marks_unseen(line_marks *k, const tacet_model *m, const double *grid, size_t n_grid)
{
    if (!(tacet_model_study(m)->engine.cylinder_dispersion > 0)) return;
    for (size_t b = 0; b < tacet_model_bands(m); b++)
        for (size_t h = 1; h <= k->n_lines; h++) {
            double low, high;
            tacet_order_window(tacet_model_band(m, b), (double)h / k->revolutions, true, &low,
                               &high);
            if (low > grid[0] && high < grid[n_grid - 1] &&
                !has_grid_speed(low, high, grid, n_grid))
                marks_of(k, b)[h] = true;
        }
}

static tacet_status add_inside(speeds *out, double speed, const double range[2], tacet_arena *a)
{
    return speed > range[0] && speed < range[1] ? speeds_add(out, speed, a) : TACET_OK;
}

tacet_status lines_enter_and_leave(const marked_lines *l, const tacet_band *b, speeds *out,
                                   tacet_arena *a)
{
    for (size_t h = 1; h <= l->n_lines; h++) {
        if (!l->mark[h]) continue;
        double low, high;
        tacet_order_window(b, (double)h / l->revolutions, true, &low, &high);
        tacet_status status = add_inside(out, low, l->range, a);
        if (status == TACET_OK) status = add_inside(out, high, l->range, a);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

tacet_status lines_cross(const marked_lines *l, const double *hz, size_t n_hz, double low_hz,
                         double high_hz, speeds *out, tacet_arena *a)
{
    for (size_t i = 0; i < n_hz; i++) {
        if (hz[i] < low_hz || hz[i] > high_hz) continue;
        for (size_t h = 1; h <= l->n_lines; h++) {
            if (!l->mark[h]) continue;
            double speed = tacet_order_speed((double)h / l->revolutions, hz[i]);
            tacet_status status = add_inside(out, speed, l->range, a);
            if (status != TACET_OK) return status;
        }
    }
    return TACET_OK;
}

// Both sides of each break.
static tacet_status step_aside(const speeds *breaks, const double range[2], speeds *out,
                               tacet_arena *a)
{
    const double aside = STEP_ASIDE_RPM * RAD_PER_S_OF_RPM;
    tacet_status status = TACET_OK;
    for (size_t i = 0; status == TACET_OK && i < breaks->n; i++) {
        status = add_inside(out, breaks->at[i] - aside, range, a);
        if (status == TACET_OK) status = add_inside(out, breaks->at[i] + aside, range, a);
    }
    return status;
}

static void drop_grid(speeds *s, const double *grid, size_t n_grid)
{
    size_t n = 0, g = 0;
    for (size_t i = 0; i < s->n; i++) {
        while (g < n_grid && grid[g] < s->at[i] * (1 - SAME_SPEED))
            g++;
        if (g == n_grid || grid[g] > s->at[i] * (1 + SAME_SPEED)) s->at[n++] = s->at[i];
    }
    s->n = n;
}

tacet_status extra_speeds(const line_marks *k, const tacet_model *m, const double *grid,
                          size_t n_grid, speeds *out, tacet_arena *a)
{
    marked_lines l = {k->revolutions, k->n_lines, NULL, {grid[0], grid[n_grid - 1]}};
    const double *hz = tacet_model_mode_hz(m) + 1; // the rigid mode is no resonance
    size_t n_hz = tacet_train_nodes(tacet_model_train(m)) - 1, stride = k->n_lines + 1;
    tacet_status status = TACET_OK;
    for (size_t b = 0; status == TACET_OK && b < tacet_model_bands(m); b++) {
        const tacet_band *band = tacet_model_band(m, b);
        speeds breaks = {0};
        l.mark = marks_of(k, b);
        status = lines_enter_and_leave(&l, band, &breaks, a);
        if (status == TACET_OK) status = step_aside(&breaks, l.range, out, a);
        if (status == TACET_OK)
            status = lines_cross(&l, hz, n_hz, band->counted_low_hz, band->counted_high_hz, out, a);
    }
    for (size_t i = 0; status == TACET_OK && i < tacet_model_limits(m); i++) {
        l.mark = k->of_limit + i * stride;
        status = lines_cross(&l, hz, n_hz, 0, INFINITY, out, a);
    }
    speeds_sort(out);
    drop_grid(out, grid, n_grid);
    return status;
}
