// Torque of a throw at its own angles, for ripple.
//
// Sampling a drive is most of a pass's cost. Where it was sampled on the same grid before, at
// angles that differ by little (e, in steps of the grid), the samples are moved instead:
//   T(a + e) = T + T1 e + T2 e^2 / 2,  J(a + e) = J + J' e,  J'(a + e) = J' + J'1 e,
// T1, T2 and J'1 differences of neighbouring samples. Good to the third power of e; only passes
// that another one on more samples follows do this.
#include "train/ripple.h"
#include <math.h>
#include <string.h>

// Samples of a throw's angle and of its first two derivatives in time.
static void angle_samples(ripple *r, size_t i, double *angle, double *rate, double *bend)
{
    ripple_work *m = &r->w->ripple;
    double base = r->speed / r->how->revolutions;
    const double *restrict line = (const double *)(const void *)m->angle[i].line;
    double *restrict signal = (double *)(void *)m->signal.line;
    size_t n = r->n_lines;
    m->signal.n_lines = n;
    m->signal.mean = 0;
    memcpy(signal, line, 2 * (n + 1) * sizeof *signal);
    tacet_transform_samples_of(r->grid, &m->signal, angle);
    for (size_t h = 1; h <= n; h++) { // i w
        double w = base * (double)h;
        signal[2 * h] = -w * line[2 * h + 1];
        signal[2 * h + 1] = w * line[2 * h];
    }
    tacet_transform_samples_of(r->grid, &m->signal, rate);
    for (size_t h = 1; h <= n; h++) { // (i w)^2
        double w = base * (double)h;
        signal[2 * h] = -w * w * line[2 * h];
        signal[2 * h + 1] = -w * w * line[2 * h + 1];
    }
    tacet_transform_samples_of(r->grid, &m->signal, bend);
}

// What a drive gave for throw i, and where; the last two samples stand before the first ones, the
// first two behind the last, as the repeat closes.
#define PAD 2
enum { TORQUE, INERTIA, SLOPE, ANGLE, SPEED, KEPT };

size_t ripple_kept_bytes(size_t most_samples)
{
    return KEPT * (most_samples + 2 * PAD) * sizeof(double);
}

static double *kept(const ripple *r, size_t i, int what)
{
    size_t stride = r->w->most_samples + 2 * PAD;
    return r->w->ripple.kept + (i * KEPT + (size_t)what) * stride + PAD;
}

static void keep(const ripple *r, size_t i, int what, const double *samples)
{
    size_t n = tacet_transform_samples(r->grid);
    double *to = kept(r, i, what);
    memcpy(to, samples, n * sizeof *to);
    for (size_t k = 0; k < PAD; k++) {
        to[n + k] = samples[k];
        *(to - 1 - k) = samples[n - 1 - k];
    }
}

// Moves the samples of throw i to the angles in w->at_angle.
static void move(const ripple *r, size_t i)
{
    const tacet_train_work *w = r->w;
    size_t n = tacet_transform_samples(r->grid);
    const double *restrict T = kept(r, i, TORQUE), *restrict J = kept(r, i, INERTIA);
    const double *restrict s = kept(r, i, SLOPE), *restrict a = kept(r, i, ANGLE);
    const double *restrict v = kept(r, i, SPEED), *restrict to = w->at_angle;
    double *restrict torque = w->at_torque, *restrict inertia = w->at_inertia;
    double *restrict slope = w->at_slope;
    double step = 2 * M_PI * r->how->revolutions / ((double)n * r->speed); // s a sample
    for (ptrdiff_t k = 0; k < (ptrdiff_t)n; k++) {
        double moved = to[k] - a[k], e = moved / (step * v[k]);
        double T1 = (8 * (T[k + 1] - T[k - 1]) - (T[k + 2] - T[k - 2])) / 12;
        double T2 = T[k + 1] - 2 * T[k] + T[k - 1];
        torque[k] = T[k] + e * (T1 + 0.5 * e * T2);
        inertia[k] = J[k] + s[k] * moved;
        slope[k] = s[k] + 0.5 * e * (s[k + 1] - s[k - 1]);
    }
}

static tacet_status sample(ripple *r, size_t i, const double *speed)
{
    tacet_train_work *w = r->w;
    size_t n = tacet_transform_samples(r->grid);
    tacet_status status =
        r->drive(r->who, i, n, w->at_angle, w->at_torque, w->at_inertia, w->at_slope);
    r->note->evaluations += (unsigned)n;
    keep(r, i, TORQUE, w->at_torque);
    keep(r, i, INERTIA, w->at_inertia);
    keep(r, i, SLOPE, w->at_slope);
    keep(r, i, ANGLE, w->at_angle);
    keep(r, i, SPEED, speed);
    return status;
}

tacet_status ripple_torque(ripple *r, size_t i, tacet_spectrum *out)
{
    tacet_train_work *w = r->w;
    size_t n = tacet_transform_samples(r->grid);
    double *F = w->buffer[0], *speed = w->buffer[1], *bend = w->buffer[2];
    double turn = 2 * M_PI * r->how->revolutions / (double)n;
    double offset = w->ripple.offset[r->node[i]], mean = w->t->added[r->node[i]];
    tacet_status status = TACET_OK;
    angle_samples(r, i, F, speed, bend);
    for (size_t k = 0; k < n; k++) {
        w->at_angle[k] = turn * (double)k + offset + F[k];
        speed[k] += r->speed;
    }
    if (r->again)
        move(r, i);
    else
        status = sample(r, i, speed);
    for (size_t k = 0; k < n; k++)
        F[k] = w->at_torque[k] - 0.5 * w->at_slope[k] * speed[k] * speed[k] -
               (w->at_inertia[k] - mean) * bend[k];
    tacet_transform_lines(r->grid, F, out);
    return status;
}
