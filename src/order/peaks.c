#include "tacet/order.h"
#include <math.h>

// Largest value of a signal of n_lines lines from n samples of it, n > 2 n_lines.
//
// Between two samples a step d apart the signal differs from the cubic through the four nearest
// samples by at most 9/16 M4 d^4 / 24, and from the quintic that matches value, slope and curvature
// at both ends by at most M6 d^6 / 46080, where Mk bounds the k-th derivative (remainders of
// Lagrange's and Hermite's interpolation). For a signal within c +- R, Mk <= (highest line)^k R
// (Bernstein's inequality) and Mk <= sum |line_h| h^k; R follows from the half range Rs of the
// samples: R <= Rs / cos(pi n_lines / n) (Ehlich and Zeller, Math. Z. 86, 1964).
// (all three from memory; the bounds are tried in tests/order/test_peaks.c)
//
// So: the cubic bound names every interval that could hold the largest value; each of those gets
// exact ends, is halved until its quintic is good to TOLERANCE of the range, and every maximum of
// the quintic that could beat the best so far is polished by Newton's method on the exact lines.
// A local maximum of samples is no sure sign: between two samples there may be a maximum with the
// samples falling all the way past it.

#define TOLERANCE    1e-6  // of the range; what a maximum may be missed by. The header says 1e-5.
#define ROUNDING     1e-13 // of the largest value: differences below are noise of the sums
#define STRANDS      4     // phasors that advance side by side, so that their products overlap
#define SCAN         8     // parts of an interval in which a quintic's slope is looked at
#define NEWTON_MOST  12
#define HALVINGS     6
#define NEWTON_CLOSE 1e-7 // of the interval; the value is then right to its square

typedef struct {
    double value, slope, curvature; // over the phase x of line 1
} jet;

typedef struct {
    const tacet_spectrum *s;
    double sign;      // +1 largest, -1 smallest: the signal is turned over
    double best, at;  // best so far, and the phase of line 1 where it is
    double tolerance; // absolute
    double step;      // between samples, phase of line 1
    double m4, m6;    // bounds on derivatives over the phase of line 1
    const double *sample;
    size_t n;
} search;

// Value and two derivatives at phase x of line 1, all lines.
static jet jet_at(const search *f, double x)
{
    double zr[STRANDS], zi[STRANDS], v[STRANDS] = {0}, d[STRANDS] = {0}, c[STRANDS] = {0};
    const double *line = (const double *)(const void *)f->s->line;
    size_t n = f->s->n_lines, h = 1;
    double turn_r = cos(STRANDS * x), turn_i = sin(STRANDS * x);
    for (size_t k = 0; k < STRANDS; k++) {
        zr[k] = cos((double)(k + 1) * x);
        zi[k] = sin((double)(k + 1) * x);
    }
    for (; h + STRANDS <= n + 1; h += STRANDS) {
        for (size_t k = 0; k < STRANDS; k++) {
            double a = line[2 * (h + k)], b = line[2 * (h + k) + 1], q = (double)(h + k);
            double re = a * zr[k] - b * zi[k], im = a * zi[k] + b * zr[k];
            v[k] += re;
            d[k] -= q * im;
            c[k] -= q * q * re;
            double r = zr[k] * turn_r - zi[k] * turn_i;
            zi[k] = zr[k] * turn_i + zi[k] * turn_r;
            zr[k] = r;
        }
    }
    for (size_t k = 0; h <= n; h++, k++) {
        double a = line[2 * h], b = line[2 * h + 1], q = (double)h;
        double re = a * zr[k] - b * zi[k], im = a * zi[k] + b * zr[k];
        v[k] += re;
        d[k] -= q * im;
        c[k] -= q * q * re;
    }
    jet j = {.value = f->s->mean};
    for (size_t k = 0; k < STRANDS; k++) {
        j.value += v[k];
        j.slope += d[k];
        j.curvature += c[k];
    }
    return (jet){f->sign * j.value, f->sign * j.slope, f->sign * j.curvature};
}

static void offer(search *f, double value, double x)
{
    if (value <= f->best) return;
    f->best = value;
    f->at = x;
}

// Newton's method on the slope between lo and hi, where it changes from rising to falling; steps
// that leave the bracket are replaced by halving it.
static void polish(search *f, double lo, double hi, double x)
{
    double width = hi - lo;
    for (int pass = 0; pass < NEWTON_MOST; pass++) {
        jet j = jet_at(f, x);
        offer(f, j.value, x);
        if (j.slope > 0)
            lo = x;
        else
            hi = x;
        double next = j.curvature < 0 ? x - j.slope / j.curvature : lo;
        if (!(next > lo && next < hi)) next = 0.5 * (lo + hi);
        if (fabs(next - x) <= NEWTON_CLOSE * width) return;
        x = next;
    }
}

// Coefficients of the quintic over u = 0..1 that matches both jets of an interval `width` wide.
static void quintic(const jet *a, const jet *b, double width, double p[6])
{
    double s0 = a->slope * width, s1 = b->slope * width;
    double k0 = a->curvature * width * width, k1 = b->curvature * width * width;
    double rise = b->value - a->value;
    p[0] = a->value;
    p[1] = s0;
    p[2] = 0.5 * k0;
    p[3] = 10 * rise - 6 * s0 - 4 * s1 - 1.5 * k0 + 0.5 * k1;
    p[4] = -15 * rise + 8 * s0 + 7 * s1 + 1.5 * k0 - k1;
    p[5] = 6 * rise - 3 * s0 - 3 * s1 - 0.5 * k0 + 0.5 * k1;
}

static double quintic_at(const double p[6], double u)
{
    return ((((p[5] * u + p[4]) * u + p[3]) * u + p[2]) * u + p[1]) * u + p[0];
}

static double quintic_slope(const double p[6], double u)
{
    return (((5 * p[5] * u + 4 * p[4]) * u + 3 * p[3]) * u + 2 * p[2]) * u + p[1];
}

static double quintic_error(const search *f, double width)
{
    double w3 = width * width * width;
    return f->m6 * w3 * w3 / 46080;
}

// All maxima of the signal within lo..hi that can beat the best, by way of the quintic.
static void look_into(search *f, double lo, double hi, const jet *a, const jet *b)
{
    double p[6], width = hi - lo, slope = a->slope * width;
    quintic(a, b, width, p);
    double error = quintic_error(f, width);
    for (int k = 1; k <= SCAN; k++) {
        double u = (double)k / SCAN, from = u - 1.0 / SCAN, before = slope;
        slope = quintic_slope(p, u);
        if (!(before > 0 && slope <= 0)) continue;
        // no higher than either end's tangent lets it climb
        double roof = fmin(quintic_at(p, from) + before / SCAN, quintic_at(p, u) - slope / SCAN);
        if (roof + error <= f->best) continue;
        double top = from + before / (before - slope) / SCAN;
        polish(f, lo + from * width, lo + u * width, lo + top * width);
    }
}

// Interval of samples j and j+1, halved until the quintics are good enough.
static void refine(search *f, size_t j)
{
    size_t parts = 1;
    double width = f->step;
    while (quintic_error(f, width) > f->tolerance && parts < (size_t)1 << HALVINGS) {
        width /= 2;
        parts *= 2;
    }
    double x = (double)j * f->step;
    jet a = jet_at(f, x);
    offer(f, a.value, x);
    for (size_t part = 1; part <= parts; part++) {
        double next = ((double)j + (double)part / (double)parts) * f->step;
        jet b = jet_at(f, next);
        offer(f, b.value, next);
        look_into(f, x, next, &a, &b);
        x = next;
        a = b;
    }
}

// Every interval whose cubic bound is above the best.
static void search_all(search *f, size_t first)
{
    size_t n = f->n, last = (first + n - 1) % n;
    double step2 = f->step * f->step, error = 9.0 / 16 / 24 * f->m4 * step2 * step2;
    f->at = (double)first * f->step;
    f->best = -INFINITY;
    refine(f, first);
    refine(f, last);
    for (size_t j = 0; j < n; j++) {
        if (j == first || j == last) continue;
        double here = f->sign * f->sample[j], next = f->sign * f->sample[j + 1 < n ? j + 1 : 0];
        double high = fmax(here, next) + error;
        double before = f->sign * f->sample[j ? j - 1 : n - 1];
        double after = f->sign * f->sample[(j + 2) % n];
        double bend = fmax(2 * here - before - next, 2 * next - here - after);
        if (high + fmax(bend, 0) / 8 > f->best + f->tolerance) refine(f, j);
    }
}

// Bounds on the fourth and sixth derivative over the phase of line 1.
static void bound_derivatives(search *f, double half_range)
{
    const tacet_spectrum *s = f->s;
    double sum4 = 0, sum6 = 0, top = 0;
    for (size_t h = 1; h <= s->n_lines; h++) {
        double re = creal(s->line[h]), im = cimag(s->line[h]), q = (double)h;
        double a = sqrt(re * re + im * im) * q * q * q * q;
        sum4 += a;
        sum6 += a * q * q;
        if (a > 0) top = q;
    }
    double radius = half_range / cos(M_PI * top / (double)f->n), top2 = top * top;
    f->m4 = fmin(sum4, top2 * top2 * radius);
    f->m6 = fmin(sum6, top2 * top2 * top2 * radius);
}

static double crank_angle(const search *f)
{
    return fmod(f->at, 2 * M_PI) * f->s->revolutions;
}

void tacet_spectrum_peaks(const tacet_spectrum *s, const tacet_transform *t, double *buffer,
                          tacet_peaks *out)
{
    size_t n = tacet_transform_samples(t), high = 0, low = 0;
    double checked = 0;
    tacet_transform_samples_of(t, s, buffer);
    for (size_t j = 0; j < n; j++) {
        checked += 0 * buffer[j];
        if (buffer[j] > buffer[high]) high = j;
        if (buffer[j] < buffer[low]) low = j;
    }
    if (checked != 0) { // a line was not finite
        *out = (tacet_peaks){NAN, NAN, NAN, NAN};
        return;
    }
    double half_range = 0.5 * (buffer[high] - buffer[low]);
    search f = {.s = s, .sign = 1, .sample = buffer, .n = n, .step = 2 * M_PI / (double)n};
    f.tolerance =
        TOLERANCE * 2 * half_range + ROUNDING * fmax(fabs(buffer[high]), fabs(buffer[low]));
    bound_derivatives(&f, half_range);
    search_all(&f, high);
    *out = (tacet_peaks){.max = f.best, .max_angle_rad = crank_angle(&f)};
    f.sign = -1;
    search_all(&f, low);
    out->min = -f.best;
    out->min_angle_rad = crank_angle(&f);
}
