// Newton's step for the angle that all throws have in common.
//
// With d the throws' common angle, F(d) the sum of their torques and H the train's response to a
// torque that they share, ripple solves d = H F(d). Plain repetition fails at low lines: H grows as
// 1/w^2, and torque that is late by d changes by F' d. So the step x from a pass whose result
// differs from its start by e = H F(d) - d is taken from the linearised equation
//   x - H [k x] = e,   k(t) = dF/dd = (dF/dt) / (d theta/dt),
// the torque of a throw being a function of its angle. [k x] is a product in time, so lines are
// coupled; GMRES (Saad & Schultz, SIAM J. Sci. Stat. Comput. 7, 1986) with a handful of products
// suffices, as H falls off with the square of the line. Only the lowest lines take part; the rest
// contract by themselves.
#include "train/work.h"
#include <math.h>
#include <string.h>

#define ENOUGH       1e-2 // residual of the linear equation, relative
#define SLOWEST      0.05 // crank speed over mean speed below which there is no sense in a step
#define OVERSAMPLING 6

typedef struct {
    tacet_train_work *w;
    const tacet_transform *grid;
    size_t n;               // lines
    double *product, *gain; // buffers of the grid: scratch, k(t)
} newton;

static double dot(const newton *s, const double complex *a, const double complex *b)
{
    double sum = 0;
    for (size_t h = 1; h <= s->n; h++)
        sum += creal(a[h]) * creal(b[h]) + cimag(a[h]) * cimag(b[h]);
    return sum;
}

// y = x - H [k x].
static void apply(const newton *s, const double complex *x, double complex *y)
{
    tacet_spectrum *signal = &s->w->ripple.signal;
    const double complex *transfer = s->w->ripple.transfer;
    size_t samples = tacet_transform_samples(s->grid);
    signal->n_lines = s->n;
    signal->mean = 0;
    memcpy(signal->line + 1, x + 1, s->n * sizeof *x);
    tacet_transform_samples_of(s->grid, signal, s->product);
    for (size_t k = 0; k < samples; k++)
        s->product[k] *= s->gain[k];
    tacet_transform_lines(s->grid, s->product, signal);
    for (size_t h = 1; h <= s->n; h++)
        y[h] = x[h] - transfer[h] * signal->line[h];
}

typedef struct {
    double h[KRYLOV_MOST + 1][KRYLOV_MOST], g[KRYLOV_MOST + 1];
    double c[KRYLOV_MOST], s[KRYLOV_MOST]; // rotations
} hessenberg;

// Column j of the Hessenberg matrix by modified Gram-Schmidt; the next basis vector.
static void orthogonalise(const newton *s, double complex **basis, hessenberg *q, size_t j)
{
    double complex *next = basis[j + 1];
    apply(s, basis[j], next);
    for (size_t i = 0; i <= j; i++) {
        q->h[i][j] = dot(s, next, basis[i]);
        for (size_t h = 1; h <= s->n; h++)
            next[h] -= q->h[i][j] * basis[i][h];
    }
    q->h[j + 1][j] = sqrt(dot(s, next, next));
    for (size_t h = 1; h <= s->n && q->h[j + 1][j] > 0; h++)
        next[h] /= q->h[j + 1][j];
}

// Makes column j triangular; returns the size of the residual.
static double rotate(hessenberg *q, size_t j)
{
    for (size_t i = 0; i < j; i++) {
        double t = q->c[i] * q->h[i][j] + q->s[i] * q->h[i + 1][j];
        q->h[i + 1][j] = q->c[i] * q->h[i + 1][j] - q->s[i] * q->h[i][j];
        q->h[i][j] = t;
    }
    double r = hypot(q->h[j][j], q->h[j + 1][j]);
    q->c[j] = q->h[j][j] / r;
    q->s[j] = q->h[j + 1][j] / r;
    q->h[j][j] = r;
    q->g[j + 1] = -q->s[j] * q->g[j];
    q->g[j] *= q->c[j];
    return fabs(q->g[j + 1]);
}

static void combine(const newton *s, double complex **basis, hessenberg *q, size_t m,
                    double complex *x)
{
    memset(x, 0, (s->n + 1) * sizeof *x);
    for (size_t i = m; i-- > 0;) {
        for (size_t k = i + 1; k < m; k++)
            q->g[i] -= q->h[i][k] * q->g[k];
        q->g[i] /= q->h[i][i];
        for (size_t h = 1; h <= s->n; h++)
            x[h] += q->g[i] * basis[i][h];
    }
}

static void gmres(const newton *s, const double complex *e, double complex *x)
{
    double complex **basis = s->w->ripple.basis;
    hessenberg q = {.g = {sqrt(dot(s, e, e))}};
    double enough = ENOUGH * q.g[0];
    size_t m = 0;
    for (size_t h = 1; h <= s->n && q.g[0] > 0; h++)
        basis[0][h] = e[h] / q.g[0];
    if (q.g[0] > 0) {
        double residual = q.g[0];
        for (; m < KRYLOV_MOST && residual > enough; m++) {
            orthogonalise(s, basis, &q, m);
            residual = rotate(&q, m);
        }
    }
    combine(s, basis, &q, m, x);
}

// Samples of the derivative in time of the sum of n spectra on the grid.
static void rate_of(const newton *s, const tacet_spectrum *of, size_t n, double base, double *out)
{
    tacet_spectrum *signal = &s->w->ripple.signal;
    signal->n_lines = 2 * s->n < of->n_lines ? 2 * s->n : of->n_lines;
    signal->mean = 0;
    for (size_t h = 1; h <= signal->n_lines; h++) {
        double complex sum = 0;
        for (size_t i = 0; i < n; i++)
            sum += of[i].line[h];
        signal->line[h] = I * (base * (double)h) * sum;
    }
    tacet_transform_samples_of(s->grid, signal, out);
}

bool common_step(tacet_train_work *w, double speed, unsigned revolutions, size_t n_throws, size_t n)
{
    newton s = {.w = w, .n = n, .product = w->buffer[0], .gain = w->buffer[1]};
    s.grid = work_transform(w, tacet_transform_length(n, OVERSAMPLING));
    double base = speed / revolutions, *turn = w->buffer[2];
    rate_of(&s, w->ripple.torque, n_throws, base, s.gain);
    rate_of(&s, w->ripple.angle, n_throws, base, turn);
    for (size_t k = 0; k < tacet_transform_samples(s.grid); k++) {
        double theta_rate = speed + turn[k] / (double)n_throws;
        if (!(theta_rate > SLOWEST * speed)) return false;
        s.gain[k] /= theta_rate;
    }
    gmres(&s, w->ripple.rest, w->ripple.step);
    return true;
}
