#include "jet.h"
#include "tacet/order.h"
#include <math.h>

// Largest value of a signal of n_lines lines from n samples of it, n > 2 n_lines.
//
// A local maximum of the samples is no sure sign of where the signal is largest: there may be a
// maximum between two samples with the samples falling all the way past it. So bounds decide. With
// Mk >= |k-th derivative| and samples a step d apart (Lagrange's and Hermite's remainders):
//   chord between two samples            M2 d^2 / 8
//   cubic through four, middle interval  9/16 M4 d^4 / 24
//   polynomial through eight, likewise   (105/16)^2 M8 d^8 / 40320
//   quintic of value, slope, curvature   M6 d^6 / 46080
//     at both ends
// For a signal within c +- R of highest line H: Mk <= H^k R (Bernstein's inequality), and always
// Mk <= sum |line_h| h^k; R is at most half the range of the samples / cos(pi H / n) (Ehlich and
// Zeller, Math. Z. 86, 1964; all of this from memory, tried in tests/order/test_peaks.c).
//
// The first three bounds, each at more cost and of fewer intervals, leave those that could hold the
// largest value. Those get exact ends, are halved until the quintic is good to TOLERANCE of the
// range, and a maximum of the quintic that would beat the best by more than that is polished by
// Newton's method on the exact lines.

#define TOLERANCE      1e-6  // of the range; the header promises 1e-5
#define ROUNDING       1e-13 // of the largest value: differences below are noise of the sums
#define NEAR           8     // samples of the long polynomial
#define QUARTERS       5     // places in an interval where it is taken: -1/4, 1/4, 1/2, 3/4, 5/4
#define SCAN           8     // parts of an interval in which a quintic's slope is looked at
#define QUINTIC_PASSES 4
#define NEWTON_MOST    12
#define NEWTON_CLOSE   1e-7 // of the interval; the value is then right to its square
#define HALVINGS       6

typedef struct {
    const tacet_spectrum *s;
    double sign;      // +1 largest, -1 smallest: the signal is turned over
    double best, at;  // best so far, and the phase of line 1 where it is
    double tolerance; // absolute
    bool first;       // before there is a best to beat every maximum is polished
    const double *sample;
    size_t n;
    double step;           // between samples, phase of line 1
    double m2, m4, m6, m8; // bounds on the derivatives, already times step^k
    double weight[QUARTERS][NEAR];
} search;

static jet look(const search *f, double x)
{
    jet j = jet_at(f->s, x);
    return (jet){f->sign * j.value, f->sign * j.slope, f->sign * j.curvature};
}

static void offer(search *f, double value, double x)
{
    if (value <= f->best) return;
    f->best = value;
    f->at = x;
}

// ---- exact ------------------------------------------------------------------------------------

// Newton's method on the slope between lo and hi, where it changes from rising to falling; steps
// that leave the bracket are replaced by halving it.
static void polish(search *f, double lo, double hi, double x)
{
    double width = hi - lo;
    for (int pass = 0; pass < NEWTON_MOST; pass++) {
        jet j = look(f, x);
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

// Value of the quintic's maximum between u = from and to, where its slope changes from rising to
// falling, and where it is: secant steps kept inside the bracket.
static double quintic_top(const double p[6], double from, double to, double *at)
{
    double rising = quintic_slope(p, from), falling = quintic_slope(p, to), u = to;
    for (int pass = 0; pass < QUINTIC_PASSES; pass++) {
        u = from + (to - from) * rising / (rising - falling);
        double slope = quintic_slope(p, u);
        if (slope > 0)
            from = u, rising = slope;
        else
            to = u, falling = slope;
    }
    *at = u;
    return quintic_at(p, u);
}

static double enough(const search *f)
{
    return f->first ? f->best : f->best + f->tolerance;
}

// All maxima of the signal within lo..hi that can beat the best, by way of the quintic.
static void look_into(search *f, double lo, double hi, const jet *a, const jet *b, double error)
{
    double p[6], width = hi - lo, slope = a->slope * width;
    quintic(a, b, width, p);
    for (int k = 1; k <= SCAN; k++) {
        double u = (double)k / SCAN, from = u - 1.0 / SCAN, before = slope, top;
        slope = quintic_slope(p, u);
        if (!(before > 0 && slope <= 0)) continue;
        if (quintic_top(p, from, u, &top) + error <= enough(f)) continue;
        polish(f, lo + from * width, lo + u * width, lo + top * width);
    }
}

// Interval of samples j and j+1, halved until the quintics are good enough.
static void refine(search *f, size_t j)
{
    size_t parts = 1;
    double error = f->m6 / 46080;
    for (int i = 0; error > f->tolerance && i < HALVINGS; i++) {
        parts *= 2;
        error /= 64;
    }
    double x = (double)j * f->step;
    jet a = look(f, x);
    offer(f, a.value, x);
    for (size_t part = 1; part <= parts; part++) {
        double next = ((double)j + (double)part / (double)parts) * f->step;
        jet b = look(f, next);
        offer(f, b.value, next);
        look_into(f, x, next, &a, &b, error);
        x = next;
        a = b;
    }
}

// ---- which intervals --------------------------------------------------------------------------

// No value of the cubic through four equally spaced values is higher between the middle two: the
// chord and the parabola of the sharper bend.
static double roof(double before, double here, double next, double after)
{
    double bend = fmax(2 * here - before - next, 2 * next - here - after), rise = next - here;
    if (2 * fabs(rise) >= bend) return fmax(here, next);
    return 0.5 * (here + next) + bend / 8 + rise * rise / (2 * bend);
}

// Lagrange's weights of samples -3..4 for a value at u.
static void weights(double u, double w[NEAR])
{
    for (int i = 0; i < NEAR; i++) {
        w[i] = 1;
        for (int k = 0; k < NEAR; k++)
            if (k != i) w[i] *= (u + 3 - k) / (i - k);
    }
}

// The same bound from four times as many values. A roof moves by 1.5 of an error of its values: the
// chord by one, an eighth of the bend by half.
static double fine_roof(const search *f, size_t j)
{
    double value[QUARTERS], high = -INFINITY;
    double near[NEAR];
    for (size_t i = 0; i < NEAR; i++)
        near[i] = f->sign * f->sample[(j + f->n - 3 + i) % f->n];
    for (size_t q = 0; q < QUARTERS; q++) {
        value[q] = 0;
        for (size_t i = 0; i < NEAR; i++)
            value[q] += f->weight[q][i] * near[i];
    }
    double v[QUARTERS + 2] = {value[0], near[3], value[1], value[2], value[3], near[4], value[4]};
    for (size_t q = 0; q < 4; q++)
        high = fmax(high, roof(v[q], v[q + 1], v[q + 2], v[q + 3]));
    double eighth = 105.0 / 16 * 105.0 / 16 / 40320 * f->m8;
    return high + 9.0 / 16 / 24 / 256 * f->m4 + 1.5 * eighth;
}

static bool could_beat(const search *f, size_t j)
{
    size_t n = f->n;
    const double *x = f->sample;
    double here = f->sign * x[j], next = f->sign * x[j + 1 < n ? j + 1 : 0];
    double beaten = f->best + f->tolerance;
    if (fmax(here, next) + f->m2 / 8 <= beaten) return false;
    double before = f->sign * x[j ? j - 1 : n - 1], after = f->sign * x[(j + 2) % n];
    if (roof(before, here, next, after) + 9.0 / 16 / 24 * f->m4 <= beaten) return false;
    return n < NEAR || fine_roof(f, j) > beaten;
}

static void search_all(search *f, size_t first)
{
    size_t last = (first + f->n - 1) % f->n;
    f->at = (double)first * f->step;
    f->best = -INFINITY;
    f->first = true;
    refine(f, first);
    refine(f, last);
    f->first = false;
    for (size_t j = 0; j < f->n; j++)
        if (could_beat(f, j) && j != first && j != last) refine(f, j);
}

// Bounds on the derivatives over the phase of line 1, times step^k.
static void bound_derivatives(search *f, double half_range)
{
    const tacet_spectrum *s = f->s;
    double sum2 = 0, sum4 = 0, sum6 = 0, sum8 = 0, top = 0;
    for (size_t h = 1; h <= s->n_lines; h++) {
        double re = creal(s->line[h]), im = cimag(s->line[h]);
        double q = (double)h * f->step, q2 = q * q, a = sqrt(re * re + im * im);
        sum2 += a * q2;
        sum4 += a * q2 * q2;
        sum6 += a * q2 * q2 * q2;
        sum8 += a * q2 * q2 * q2 * q2;
        if (a > 0) top = q;
    }
    double radius = half_range / cos(top / 2), top2 = top * top, top4 = top2 * top2;
    f->m2 = fmin(sum2, top2 * radius);
    f->m4 = fmin(sum4, top4 * radius);
    f->m6 = fmin(sum6, top4 * top2 * radius);
    f->m8 = fmin(sum8, top4 * top4 * radius);
}

static double crank_angle(const search *f)
{
    return fmod(f->at, 2 * M_PI) * f->s->revolutions;
}

static bool all_finite(const tacet_spectrum *s)
{
    double zero = 0 * s->mean;
    for (size_t h = 1; h <= s->n_lines; h++)
        zero += 0 * creal(s->line[h]) + 0 * cimag(s->line[h]);
    return zero == 0;
}

void tacet_spectrum_peaks(const tacet_spectrum *s, const tacet_transform *t, double *buffer,
                          tacet_peaks *out)
{
    size_t n = tacet_transform_samples(t), high = 0, low = 0;
    if (!all_finite(s) || s->n_lines >= n / 2) {
        *out = (tacet_peaks){NAN, NAN, NAN, NAN};
        return;
    }
    tacet_transform_samples_of(t, s, buffer);
    for (size_t j = 1; j < n; j++) {
        if (buffer[j] > buffer[high]) high = j;
        if (buffer[j] < buffer[low]) low = j;
    }
    double half_range = 0.5 * (buffer[high] - buffer[low]);
    search f = {.s = s, .sign = 1, .sample = buffer, .n = n, .step = 2 * M_PI / (double)n};
    f.tolerance =
        TOLERANCE * 2 * half_range + ROUNDING * fmax(fabs(buffer[high]), fabs(buffer[low]));
    bound_derivatives(&f, half_range);
    static const double place[QUARTERS] = {-0.25, 0.25, 0.5, 0.75, 1.25};
    for (int q = 0; q < QUARTERS; q++)
        weights(place[q], f.weight[q]);
    search_all(&f, high);
    *out = (tacet_peaks){.max = f.best, .max_angle_rad = crank_angle(&f)};
    f.sign = -1;
    search_all(&f, low);
    out->min = -f.best;
    out->min_angle_rad = crank_angle(&f);
}
