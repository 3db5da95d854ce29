// Undamped modes.
//
// K y = w^2 J y, symmetric, with the rigid mode y = 1, w = 0. A tree has as many elastic modes as
// links, so they are found in the links: with D the incidence matrix (u = D y the twists, K = D^T k
// D) and A = J^-1/2 D^T sqrt(k),
//   A q = w p,   A^T p = w q,   y = J^-1/2 p,
// so the w are the singular values of A, and the rigid mode is none of them. q_e^2 is the share of
// link e in the mode's strain energy, with |q| = 1.
//
// One-sided Jacobi rotations (M. R. Hestenes, J. SIAM 6, 1958) turn the columns of A until they are
// at right angles: A V = w p. They find small singular values beside large ones to their own last
// digits (Demmel & Veselic, SIAM J. Matrix Anal. Appl. 13, 1992), where the eigenproblem of A^T A,
// and GSL's decompositions, drown those of soft shafts in the rounding of stiff ones.
#include "train/internal.h"
#include <math.h>
#include <stdlib.h>

#define AT_RIGHT_ANGLES 1e-14 // cosine between columns; rounding of 256 terms is below that
#define SWEEPS_MOST     60    // usual: 6 to 12

typedef struct {
    size_t nodes, links;
    double *a, *v; // by columns: [links * nodes], [links * links]
    double *w;     // [links] length of each column
    size_t *place; // [links] of the columns, w rising
} solver;

static void release(solver *s)
{
    free(s->a);
    free(s->v);
    free(s->w);
    free(s->place);
}

static bool reserve(solver *s, size_t nodes, size_t links)
{
    *s = (solver){.nodes = nodes, .links = links};
    s->a = calloc(links * nodes, sizeof *s->a);
    s->v = calloc(links * links, sizeof *s->v);
    s->w = calloc(links, sizeof *s->w);
    s->place = calloc(links, sizeof *s->place);
    return s->a && s->v && s->w && s->place;
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

static void fill(const tacet_train *t, solver *s)
{
    for (size_t e = 0; e < t->n_links; e++) {
        size_t from = t->link[e].from, to = t->link[e].to;
        s->a[e * s->nodes + from] = sqrt(stiffness(t, e) / inertia(t, from));
        s->a[e * s->nodes + to] = -sqrt(stiffness(t, e) / inertia(t, to));
        s->v[e * s->links + e] = 1;
    }
}

static double dot(const double *x, const double *y, size_t n)
{
    double sum = 0;
    for (size_t i = 0; i < n; i++)
        sum += x[i] * y[i];
    return sum;
}

// x' = c x - s y, y' = s x + c y.
static void rotate(double *x, double *y, size_t n, double c, double s)
{
    for (size_t i = 0; i < n; i++) {
        double kept = x[i];
        x[i] = c * kept - s * y[i];
        y[i] = s * kept + c * y[i];
    }
}

// Columns e and f to right angles; false: they were.
static bool turn(solver *s, size_t e, size_t f)
{
    double *x = &s->a[e * s->nodes], *y = &s->a[f * s->nodes];
    double xy = dot(x, y, s->nodes);
    if (fabs(xy) <= AT_RIGHT_ANGLES * s->w[e] * s->w[f]) return false;
    double half = (s->w[f] * s->w[f] - s->w[e] * s->w[e]) / (2 * xy);
    double tangent = copysign(1 / (fabs(half) + sqrt(1 + half * half)), half);
    double c = 1 / sqrt(1 + tangent * tangent);
    rotate(x, y, s->nodes, c, c * tangent);
    rotate(&s->v[e * s->links], &s->v[f * s->links], s->links, c, c * tangent);
    s->w[e] = sqrt(dot(x, x, s->nodes));
    s->w[f] = sqrt(dot(y, y, s->nodes));
    return true;
}

static tacet_status decompose(solver *s)
{
    bool turned = true;
    for (size_t e = 0; e < s->links; e++)
        s->w[e] = sqrt(dot(&s->a[e * s->nodes], &s->a[e * s->nodes], s->nodes));
    for (int sweep = 0; turned && sweep < SWEEPS_MOST; sweep++) {
        turned = false;
        for (size_t e = 0; e + 1 < s->links; e++)
            for (size_t f = e + 1; f < s->links; f++)
                turned = turn(s, e, f) || turned;
    }
    for (size_t i = 0; i < s->links; i++) {
        size_t k = i;
        for (; k > 0 && s->w[s->place[k - 1]] > s->w[i]; k--)
            s->place[k] = s->place[k - 1];
        s->place[k] = i;
    }
    return turned ? TACET_NOT_CONVERGED : TACET_OK;
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
    double *shape = &t->mode_shape[mode * t->n];
    t->mode_hz[mode] = s->w[column] / (2 * M_PI);
    for (size_t e = 0; e < t->n_links; e++) {
        double q = s->v[column * s->links + e];
        t->energy_share[mode * t->n_links + e] = q * q;
    }
    for (size_t j = 0; j < t->n; j++)
        shape[j] = t->ratio[j] * s->a[column * s->nodes + j] / sqrt(inertia(t, j));
    scale(shape, t->n);
}

tacet_status train_modes_solve(tacet_train *t, tacet_error *e)
{
    for (size_t j = 0; j < t->n; j++)
        t->mode_shape[j] = t->ratio[j];
    scale(t->mode_shape, t->n);
    if (t->n_links == 0 || t->n < 2) return TACET_OK;
    solver s;
    tacet_status status = TACET_NO_MEMORY;
    if (!reserve(&s, t->n, t->n_links)) goto done;
    fill(t, &s);
    status = decompose(&s);
    for (size_t i = 0; i < t->n_links && status == TACET_OK; i++) {
        double w = s.w[s.place[i]];
        if (!isfinite(w) || w <= 0) status = TACET_NOT_FINITE;
        if (status == TACET_OK) take_mode(t, &s, s.place[i], i + 1);
    }
done:
    release(&s);
    return status == TACET_OK
               ? TACET_OK
               : tacet_fail(e, status, "the modes of the train: %s", tacet_status_text(status));
}
