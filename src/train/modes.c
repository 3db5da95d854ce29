// Undamped modes.
//
// K y = w^2 J y, symmetric, with the rigid mode y = 1, w = 0. A tree has as many elastic modes as
// links, so they are found in the links: with D the incidence matrix (u = D y the twists, K = D^T k
// D), q = sqrt(k) u solves
//   sqrt(k) D J^-1 D^T sqrt(k) q = w^2 q,   y = J^-1 D^T sqrt(k) q / w^2,
// an ordinary symmetric problem without the rigid mode: low modes keep their digits and sum J y = 0
// comes out of D^T. q_e^2 is the share of link e in the mode's strain energy, with |q| = 1.
#include "train/internal.h"
#include <gsl/gsl_eigen.h>
#include <gsl/gsl_errno.h>
#include <math.h>

typedef struct {
    size_t n; // links
    gsl_matrix *m, *vector;
    gsl_vector *value;
    gsl_eigen_symmv_workspace *work;
} solver;

static void release(solver *s)
{
    if (s->work) gsl_eigen_symmv_free(s->work);
    if (s->m) gsl_matrix_free(s->m);
    if (s->vector) gsl_matrix_free(s->vector);
    if (s->value) gsl_vector_free(s->value);
}

static bool reserve(solver *s, size_t n)
{
    *s = (solver){.n = n};
    s->m = gsl_matrix_calloc(n, n);
    s->vector = gsl_matrix_alloc(n, n);
    s->value = gsl_vector_alloc(n);
    s->work = gsl_eigen_symmv_alloc(n);
    return s->m && s->vector && s->value && s->work;
}

// Stiffness of link e referred to the crank.
static double stiffness(const tacet_train *t, size_t e)
{
    double ratio = t->ratio[t->link[e].to];
    return t->link[e].stiffness_Nm_per_rad * ratio * ratio;
}

static double inertia(const tacet_train *t, size_t j)
{
    return t->inertia[j] * t->ratio[j] * t->ratio[j];
}

// D_ej: +1 at `from`, -1 at `to`.
static double incidence(const tacet_train *t, size_t e, size_t j)
{
    return (double)(t->link[e].from == j) - (double)(t->link[e].to == j);
}

static void fill(const tacet_train *t, gsl_matrix *m)
{
    for (size_t e = 0; e < t->n_links; e++)
        for (size_t f = 0; f <= e; f++) {
            double sum = 0;
            size_t end[2] = {t->link[e].from, t->link[e].to};
            for (int k = 0; k < 2; k++)
                sum += incidence(t, e, end[k]) * incidence(t, f, end[k]) / inertia(t, end[k]);
            sum *= sqrt(stiffness(t, e) * stiffness(t, f));
            gsl_matrix_set(m, e, f, sum);
            gsl_matrix_set(m, f, e, sum);
        }
}

// Largest |element| 1 and positive there; the first of equal ones decides, whatever their last bit.
static void scale(double *shape, size_t n)
{
    size_t largest = 0;
    for (size_t j = 1; j < n; j++)
        if (fabs(shape[j]) > fabs(shape[largest]) * (1 + 1e-9)) largest = j;
    double top = shape[largest];
    for (size_t j = 0; j < n; j++)
        shape[j] /= top;
}

static void take_mode(tacet_train *t, const solver *s, size_t column, size_t mode)
{
    double w2 = gsl_vector_get(s->value, column), *shape = &t->mode_shape[mode * t->n];
    t->mode_hz[mode] = sqrt(w2) / (2 * M_PI);
    for (size_t e = 0; e < t->n_links; e++) {
        double q = gsl_matrix_get(s->vector, e, column), k = sqrt(stiffness(t, e));
        t->energy_share[mode * t->n_links + e] = q * q;
        shape[t->link[e].from] += k * q;
        shape[t->link[e].to] -= k * q;
    }
    for (size_t j = 0; j < t->n; j++)
        shape[j] *= t->ratio[j] / (inertia(t, j) * w2);
    scale(shape, t->n);
}

tacet_status train_modes_solve(tacet_train *t, tacet_error *e)
{
    for (size_t j = 0; j < t->n; j++)
        t->mode_shape[j] = t->ratio[j];
    scale(t->mode_shape, t->n);
    if (t->n_links == 0) return TACET_OK;
    solver s;
    tacet_status status = TACET_NO_MEMORY;
    if (!reserve(&s, t->n_links)) goto done;
    fill(t, s.m);
    status = TACET_NOT_CONVERGED;
    if (gsl_eigen_symmv(s.m, s.value, s.vector, s.work) != GSL_SUCCESS) goto done;
    if (gsl_eigen_symmv_sort(s.value, s.vector, GSL_EIGEN_SORT_VAL_ASC) != GSL_SUCCESS) goto done;
    status = TACET_NOT_FINITE;
    for (size_t i = 0; i < t->n_links; i++) {
        double w2 = gsl_vector_get(s.value, i);
        if (!isfinite(w2) || w2 <= 0) goto done;
        take_mode(t, &s, i, i + 1);
    }
    status = TACET_OK;
done:
    release(&s);
    return status == TACET_OK
               ? TACET_OK
               : tacet_fail(e, status, "the modes of the train: %s", tacet_status_text(status));
}
