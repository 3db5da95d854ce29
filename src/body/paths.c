// Paths from mount forces to points.
//
// A resonance passes, per N with r = f / hz,
//   gain / (1 - r^2 + 2 i zeta r),   or   -r^2 / mass of the same (acceleration of a mass m on a
// spring: x = F / (k (1 - r^2 + 2 i zeta r)), a = -w^2 x, k = m w0^2).
// Limits: below resonance the first is its gain, far above it the second is 1 / mass.
// A table is read at straight lines between its rows and passes nothing outside them.
#include "internal.h"
#include "tacet/order.h"
#include <stdio.h>
#include <string.h>

static double complex resonance(const tacet_resonance_def *d, double f_hz)
{
    double r = f_hz / d->hz;
    double complex by = 1 - r * r + 2 * I * d->damping_ratio * r;
    return (isnan(d->gain) ? -r * r / d->mass_kg : d->gain) / by;
}

static double complex table_at(const body_table *t, double f_hz)
{
    size_t low = 0, k = t->n - 1;
    if (!(f_hz >= t->hz[0]) || f_hz > t->hz[t->n - 1]) return 0;
    if (t->n == 1) return t->value[0];
    while (k - low > 1) {
        size_t middle = low + (k - low) / 2;
        if (t->hz[middle] < f_hz)
            low = middle;
        else
            k = middle;
    }
    double part = (f_hz - t->hz[k - 1]) / (t->hz[k] - t->hz[k - 1]);
    return t->value[k - 1] + part * (t->value[k] - t->value[k - 1]);
}

double complex path_transfer(const tacet_body *b, size_t path, double f_hz)
{
    const tacet_path_def *d = &b->def->paths[path];
    double complex sum = 0;
    if (b->table[path].n) sum = table_at(&b->table[path], f_hz);
    for (size_t i = 0; i < d->n_resonances; i++)
        sum += resonance(&d->resonances[i], f_hz);
    return d->weight * sum;
}

double complex tacet_body_path_response(const tacet_body *b, size_t path, double w,
                                        const tacet_six_complex q)
{
    const tacet_path_def *d = &b->def->paths[path];
    double f_hz = w / (2 * M_PI);
    int weighting = b->def->points[b->path_point[path]].weighting;
    return tacet_weighting_at(weighting, f_hz) * path_transfer(b, path, f_hz) *
           tacet_body_mount_force(b, b->path_mount[path], d->axis, w, q);
}

double complex tacet_body_point_response(const tacet_body *b, size_t point, double w,
                                         const tacet_six_complex q)
{
    double complex sum = 0;
    for (size_t i = 0; i < b->def->n_paths; i++)
        if (b->path_point[i] == point) sum += tacet_body_path_response(b, i, w, q);
    return sum;
}

// ---- reading ------------------------------------------------------------------------------------

static tacet_status read_table(tacet_body *b, size_t path, tacet_error *e)
{
    const char *name = b->def->paths[path].table, *folder = b->def->folder;
    char whole[4096];
    bool own = name[0] == '/' || !folder;
    tacet_text(whole, sizeof whole, "%s%s%s", own ? "" : folder, own ? "" : "/", name);
    tacet_csv csv;
    tacet_status status = tacet_csv_read(whole, b->arena, &csv, e);
    if (status != TACET_OK) return status;
    body_table *t = &b->table[path];
    if (csv.columns != 3)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "%s: %zu columns; a path has three: hz, real, imaginary", name,
                          csv.columns);
    t->hz = tacet_arena_alloc(b->arena, csv.rows * sizeof *t->hz);
    t->value = tacet_arena_alloc(b->arena, csv.rows * sizeof *t->value);
    if (!t->hz || !t->value) return tacet_fail(e, TACET_NO_MEMORY, "no memory for %s", name);
    for (size_t i = 0; i < csv.rows; i++) {
        t->hz[i] = csv.value[3 * i];
        t->value[i] = csv.value[3 * i + 1] + I * csv.value[3 * i + 2];
        if (t->hz[i] >= 0 && (i == 0 || t->hz[i] > t->hz[i - 1])) continue;
        return tacet_fail(e, TACET_BAD_INPUT,
                          "%s: %.6g Hz in row %zu; frequencies rise from row "
                          "to row",
                          name, t->hz[i], i + 1);
    }
    t->n = csv.rows;
    return TACET_OK;
}

static size_t find_mount(const tacet_body_def *d, const char *name)
{
    size_t i = 0;
    while (i < d->n_mounts && strcmp(d->mounts[i].name, name) != 0)
        i++;
    return i;
}

static size_t find_point(const tacet_body_def *d, const char *name)
{
    size_t i = 0;
    while (i < d->n_points && strcmp(d->points[i].name, name) != 0)
        i++;
    return i;
}

tacet_status paths_assemble(tacet_body *b, tacet_error *e)
{
    const tacet_body_def *d = b->def;
    for (size_t i = 0; i < d->n_paths; i++) {
        b->path_mount[i] = find_mount(d, d->paths[i].mount);
        b->path_point[i] = find_point(d, d->paths[i].to);
        if (b->path_mount[i] == d->n_mounts || b->path_point[i] == d->n_points)
            return tacet_fail(e, TACET_BAD_INPUT,
                              "path %zu is from mount '%s' to point '%s'; one "
                              "is unknown",
                              i + 1, d->paths[i].mount, d->paths[i].to);
        tacet_status status = d->paths[i].table ? read_table(b, i, e) : TACET_OK;
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}
