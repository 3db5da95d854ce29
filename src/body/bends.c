// Where the answer over frequency may have a peak or a corner.
#include "internal.h"
#include <stdlib.h>
#include <string.h>

static size_t of_mounts(const tacet_body_def *d, double *out_hz)
{
    size_t n = 0;
    for (size_t m = 0; m < d->n_mounts; m++) {
        const tacet_mount_def *mount = &d->mounts[m];
        const tacet_curve *curve[] = {&mount->x_N_per_m, &mount->y_N_per_m, &mount->z_N_per_m,
                                      &mount->loss_factor};
        for (int i = 0; i < 4; i++)
            for (size_t k = 0; curve[i]->n > 1 && k < curve[i]->n; k++, n++)
                if (out_hz) out_hz[n] = curve[i]->x[k];
    }
    return n;
}

static size_t of_paths(const tacet_body *b, double *out_hz)
{
    size_t n = 0;
    for (size_t i = 0; i < b->def->n_paths; i++) {
        const tacet_path_def *d = &b->def->paths[i];
        for (size_t k = 0; k < d->n_resonances; k++, n++)
            if (out_hz) out_hz[n] = d->resonances[k].hz;
        for (size_t k = 0; k < b->table[i].n; k++, n++)
            if (out_hz) out_hz[n] = b->table[i].hz[k];
    }
    return n;
}

static int rising(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

tacet_status tacet_body_bends(const tacet_body *b, tacet_arena *a, double **out_hz, size_t *n)
{
    tacet_body_modes modes;
    tacet_status status = tacet_body_modes_of(b, &modes);
    if (status != TACET_OK) return status;
    size_t mounts = of_mounts(b->def, NULL), paths = of_paths(b, NULL);
    double *hz = tacet_arena_alloc(a, (6 + mounts + paths) * sizeof *hz);
    if (!hz) return TACET_NO_MEMORY;
    memcpy(hz, modes.hz, 6 * sizeof *hz);
    (void)of_mounts(b->def, hz + 6);
    (void)of_paths(b, hz + 6 + mounts);
    qsort(hz, 6 + mounts + paths, sizeof *hz, rising);
    *n = 0;
    for (size_t i = 0; i < 6 + mounts + paths; i++)
        if (*n == 0 || hz[i] > hz[*n - 1]) hz[(*n)++] = hz[i];
    *out_hz = hz;
    return TACET_OK;
}
