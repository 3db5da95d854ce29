// Free modes, static deflection, torque-roll axis.
#include "internal.h"
#include <gsl/gsl_eigen.h>
#include <gsl/gsl_errno.h>
#include <stdlib.h>
#include <string.h>

#define PASSES  60
#define SETTLED 1e-9 // change of a frequency over itself
#define FREE    1e-12

typedef struct {
    gsl_matrix *k, *m, *vector;
    gsl_vector *value;
    gsl_eigen_gensymmv_workspace *work;
} eigen;

static bool eigen_create(eigen *q)
{
    q->k = gsl_matrix_alloc(6, 6);
    q->m = gsl_matrix_alloc(6, 6);
    q->vector = gsl_matrix_alloc(6, 6);
    q->value = gsl_vector_alloc(6);
    q->work = gsl_eigen_gensymmv_alloc(6);
    return q->k && q->m && q->vector && q->value && q->work;
}

static void eigen_destroy(eigen *q)
{
    if (q->k) gsl_matrix_free(q->k);
    if (q->m) gsl_matrix_free(q->m);
    if (q->vector) gsl_matrix_free(q->vector);
    if (q->value) gsl_vector_free(q->value);
    if (q->work) gsl_eigen_gensymmv_free(q->work);
}

// All six with the stiffness of one frequency, values (rad2/s2) ascending.
static tacet_status eigen_solve(eigen *q, const tacet_body *b, double f_hz)
{
    double complex k[36];
    tacet_body_stiffness(b, f_hz, k);
    for (size_t i = 0; i < 6; i++)
        for (size_t j = 0; j < 6; j++) {
            gsl_matrix_set(q->k, i, j, creal(k[6 * i + j]));
            gsl_matrix_set(q->m, i, j, b->mass[6 * i + j]);
        }
    if (gsl_eigen_gensymmv(q->k, q->m, q->value, q->vector, q->work)) return TACET_NOT_CONVERGED;
    if (gsl_eigen_gensymmv_sort(q->value, q->vector, GSL_EIGEN_SORT_VAL_ASC))
        return TACET_NOT_CONVERGED;
    for (size_t i = 0; i < 6; i++)
        if (!isfinite(gsl_vector_get(q->value, i))) return TACET_NOT_FINITE;
    return TACET_OK;
}

// A value below this share of the largest is rounding of a zero.
static double hz_of(const eigen *q, size_t mode)
{
    double value = gsl_vector_get(q->value, mode), largest = gsl_vector_get(q->value, 5);
    return value <= 1e-12 * fabs(largest) ? 0 : sqrt(value) / (2 * M_PI);
}

static void take_shape(const eigen *q, const tacet_body *b, size_t mode, size_t to,
                       tacet_body_modes *out)
{
    double v[6], whole = 0, largest = 0;
    for (int i = 0; i < 6; i++)
        v[i] = gsl_matrix_get(q->vector, (size_t)i, mode);
    for (int i = 0; i < 6; i++) {
        double momentum = 0;
        for (int j = 0; j < 6; j++)
            momentum += b->mass[6 * i + j] * v[j];
        out->share[to][i] = v[i] * momentum;
        whole += v[i] * momentum;
        double gyration = i < 3 ? 1 : sqrt(b->mass[7 * i] / b->mass[0]);
        if (fabs(v[i] * gyration) > fabs(largest)) largest = v[i] * gyration;
    }
    for (int i = 0; i < 6; i++) {
        out->share[to][i] /= whole;
        out->shape[to][i] = v[i] / largest;
    }
}

static double loss_of(const tacet_body *b, const double v[6], double f_hz)
{
    double complex k[36], sum = 0;
    tacet_body_stiffness(b, f_hz, k);
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++)
            sum += v[i] * k[6 * i + j] * v[j];
    return creal(sum) > 0 ? cimag(sum) / creal(sum) : 0;
}

// Mode n with the stiffness of its own frequency.
static tacet_status settle(eigen *q, const tacet_body *b, size_t n, tacet_body_modes *out)
{
    double hz = n > 0 && out->hz[n - 1] > 0 ? out->hz[n - 1] : 1, before = -1;
    tacet_status status = TACET_OK;
    for (int pass = 0; pass < PASSES && !(fabs(hz - before) <= SETTLED * hz); pass++) {
        before = hz;
        status = eigen_solve(q, b, before > 0 ? before : 1e-3);
        if (status != TACET_OK) return status;
        hz = hz_of(q, n);
        // halfway: a stiffness that rises steeply would send the frequency to and fro
        if (pass > PASSES / 2) hz = (hz + before) / 2;
    }
    out->settled = out->settled && fabs(hz - before) <= SETTLED * hz;
    out->hz[n] = hz;
    take_shape(q, b, n, n, out);
    out->loss[n] = hz > 0 ? loss_of(b, out->shape[n], hz) : 0;
    return TACET_OK;
}

tacet_status tacet_body_modes_of(const tacet_body *b, tacet_body_modes *out)
{
    eigen q = {0};
    tacet_body_modes modes = {.settled = true};
    tacet_status status = eigen_create(&q) ? TACET_OK : TACET_NO_MEMORY;
    for (size_t n = 0; n < 6 && status == TACET_OK; n++)
        status = settle(&q, b, n, &modes);
    eigen_destroy(&q);
    if (status == TACET_OK) *out = modes;
    return status;
}

// Gauss on a symmetric matrix of ones along the diagonal, b -> x. A pivot is what is left of a
// stiffness when the members before it are free to give way: rounding of 0, some motion is free.
static bool solve_held(double a[6][6], double b[6])
{
    for (int i = 0; i < 6; i++) {
        if (!(a[i][i] > FREE)) return false;
        for (int k = i + 1; k < 6; k++) {
            double by = a[k][i] / a[i][i];
            for (int j = i; j < 6; j++)
                a[k][j] -= by * a[i][j];
            b[k] -= by * b[i];
        }
    }
    for (int i = 5; i >= 0; i--) {
        for (int j = i + 1; j < 6; j++)
            b[i] -= a[i][j] * b[j];
        b[i] /= a[i][i];
    }
    return true;
}

tacet_status tacet_body_static(const tacet_body *b, const tacet_six load, tacet_six q)
{
    double complex k[36];
    double a[6][6], scale[6], x[6];
    tacet_body_stiffness(b, 0, k);
    for (int i = 0; i < 6; i++) {
        if (!(creal(k[7 * i]) > 0)) return TACET_BAD_INPUT;
        scale[i] = 1 / sqrt(creal(k[7 * i]));
    }
    for (int i = 0; i < 6; i++) {
        x[i] = load[i] * scale[i];
        for (int j = 0; j < 6; j++)
            a[i][j] = creal(k[6 * i + j]) * scale[i] * scale[j];
    }
    if (!solve_held(a, x)) return TACET_BAD_INPUT;
    for (int i = 0; i < 6; i++)
        q[i] = x[i] * scale[i];
    return TACET_OK;
}

// I a = e_x by Cramer's rule.
void tacet_body_torque_roll_axis(const tacet_body *b, double axis[3])
{
    const tacet_inertia_def *i = &b->def->inertia_kgm2;
    axis[0] = i->yy * i->zz - i->yz * i->yz;
    axis[1] = i->xz * i->yz - i->xy * i->zz;
    axis[2] = i->xy * i->yz - i->xz * i->yy;
    double length = sqrt(axis[0] * axis[0] + axis[1] * axis[1] + axis[2] * axis[2]);
    for (int k = 0; k < 3; k++)
        axis[k] /= length;
}
