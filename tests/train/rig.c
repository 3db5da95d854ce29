#include "rig.h"
#include "near.h"
#include <math.h>
#include <stdlib.h>

rig *rig_new(bench_train *b, size_t n, const size_t *node, unsigned revolutions, size_t n_lines)
{
    rig *r = calloc(1, sizeof *r);
    assert_non_null(r);
    r->t = bench_create(b);
    r->n = n;
    r->lines = n_lines;
    r->arena = tacet_arena_create();
    assert_non_null(r->arena);
    size_t most = n_lines > 24 * revolutions ? n_lines : 24 * revolutions;
    assert_int_equal(tacet_train_work_create(r->t, most, n, &r->w), TACET_OK);
    r->m = rig_motion(r);
    for (size_t i = 0; i < n; i++) {
        r->node[i] = node[i];
        assert_int_equal(tacet_spectrum_init(&r->torque[i], n_lines, r->arena), TACET_OK);
        r->torque[i].revolutions = revolutions;
    }
    r->how = tacet_periodic_default();
    r->how.revolutions = revolutions;
    r->how.n_lines = n_lines;
    return r;
}

void rig_free(rig *r)
{
    for (size_t i = 0; i < RIG_THROWS; i++)
        free(r->table[i]);
    tacet_train_work_destroy(r->w);
    tacet_train_destroy(r->t);
    tacet_arena_destroy(r->arena);
    free(r);
}

tacet_train_motion rig_motion(rig *r)
{
    tacet_train_motion m;
    assert_int_equal(tacet_train_motion_init(&m, r->t, r->lines, r->arena), TACET_OK);
    return m;
}

static double rad_per_s(double rpm)
{
    return rpm * 2 * M_PI / 60;
}

tacet_status rig_harmonic(rig *r, double rpm, tacet_train_motion *m)
{
    return tacet_train_harmonic(r->t, rad_per_s(rpm), r->n, r->node, r->torque, r->w, m);
}

tacet_status rig_ripple(rig *r, double rpm, tacet_drive *drive, const void *who,
                        tacet_train_motion *m)
{
    return tacet_train_ripple(r->t, rad_per_s(rpm), r->n, r->node, drive, who, &r->how, r->w, m,
                              r->torque, &r->note);
}

tacet_status rig_steady(rig *r, double rpm, tacet_drive *drive, const void *who,
                        tacet_train_motion *m)
{
    return tacet_train_steady(r->t, rad_per_s(rpm), r->n, r->node, drive, who, &r->how, r->w, m,
                              &r->note);
}

#define TABLE  32768
#define POINTS 10

void rig_tabulate(rig *r)
{
    tacet_transform *t = NULL;
    assert_int_equal(tacet_transform_create(TABLE, &t), TACET_OK);
    double *x = tacet_transform_buffer(t);
    assert_non_null(x);
    for (size_t i = 0; i < r->n; i++) {
        free(r->table[i]);
        r->table[i] = malloc((TABLE + POINTS) * sizeof(double));
        assert_non_null(r->table[i]);
        tacet_transform_samples_of(t, &r->torque[i], x);
        for (size_t k = 0; k < TABLE + POINTS; k++)
            r->table[i][k] = x[k % TABLE];
    }
    tacet_transform_release(x);
    tacet_transform_destroy(t);
}

tacet_status rig_drive(const void *who, size_t i, size_t n, const double *angle_rad,
                       double *torque_Nm, double *inertia_kgm2, double *slope_kgm2_per_rad)
{
    const rig *r = who;
    for (size_t k = 0; k < n; k++) {
        double x = angle_rad[k] / (2 * M_PI * r->how.revolutions);
        x = (x - floor(x)) * TABLE + TABLE - (POINTS / 2 - 1); // of the leftmost point used
        size_t at = (size_t)x % TABLE;
        double u = x - floor(x) + POINTS / 2 - 1, sum = 0;
        for (int a = 0; a < POINTS; a++) {
            double weight = 1;
            for (int b = 0; b < POINTS; b++)
                if (b != a) weight *= (u - b) / (a - b);
            sum += weight * r->table[i][at + (size_t)a];
        }
        torque_Nm[k] = sum;
        inertia_kgm2[k] = slope_kgm2_per_rad[k] = 0;
    }
    return TACET_OK;
}

double lines_apart(const tacet_spectrum *a, const tacet_spectrum *b, size_t n, int power)
{
    double apart = 0, largest = 0;
    for (size_t i = 0; i < n; i++)
        for (size_t h = 1; h <= a[i].n_lines && h <= b[i].n_lines; h++) {
            double weight = power ? (double)h : 1;
            apart = fmax(apart, weight * cabs(a[i].line[h] - b[i].line[h]));
            largest = fmax(largest, weight * cabs(b[i].line[h]));
        }
    return apart / largest;
}

double lines_apart_db(const tacet_spectrum *a, const tacet_spectrum *b, size_t n, double range_db)
{
    double worst = 0;
    for (size_t i = 0; i < n; i++) {
        double largest = 0;
        for (size_t h = 1; h <= b[i].n_lines; h++)
            largest = fmax(largest, cabs(b[i].line[h]));
        for (size_t h = 1; h <= b[i].n_lines; h++) {
            double x = cabs(a[i].line[h]), y = cabs(b[i].line[h]);
            if (y < largest * pow(10, -range_db / 20)) continue;
            worst = fmax(worst, fabs(20 * log10(x / y)));
        }
    }
    return worst;
}
