// Rainflow counting, mean stress, Miner's sum.
#include "tacet/judge.h"
#include <math.h>

typedef struct {
    double *stack;
    size_t depth, n;
    tacet_rain *out;
} rain;

static void count(rain *r, double a, double b, double times)
{
    r->out[r->n++] = (tacet_rain){fabs(a - b), 0.5 * (a + b), times};
}

// A reversal is read. X: range of the last two, Y: of the two before. Y with the first reversal in
// it counts half and that one goes; any other Y counts whole and both its reversals go.
static void close_ranges(rain *r)
{
    while (r->depth >= 3) {
        double *top = r->stack + r->depth;
        double x = fabs(top[-1] - top[-2]), y = fabs(top[-2] - top[-3]);
        if (x < y) return;
        bool first = r->depth == 3;
        count(r, top[-3], top[-2], first ? 0.5 : 1);
        if (first) {
            r->stack[0] = r->stack[1];
            r->stack[1] = r->stack[2];
            r->depth = 2;
        } else {
            top[-3] = top[-1];
            r->depth -= 2;
        }
    }
}

size_t tacet_rainflow(size_t n, const double *series, double *stack, tacet_rain *out)
{
    rain r = {.stack = stack, .out = out};
    if (n == 0) return 0;
    double last = series[0], at = series[0]; // last reversal read; where the series has gone since
    stack[r.depth++] = last;
    for (size_t i = 1; i < n; i++) {
        if ((series[i] - at) * (at - last) < 0) { // it turned at `at`
            stack[r.depth++] = last = at;
            close_ranges(&r);
        }
        at = series[i];
    }
    if (at != last) {
        stack[r.depth++] = at;
        close_ranges(&r);
    }
    for (size_t i = 1; i < r.depth; i++)
        count(&r, stack[i - 1], stack[i], 0.5);
    return r.n;
}

size_t tacet_rainflow_repeat(size_t n, const double *samples, double *series, double *stack,
                             tacet_rain *out)
{
    size_t top = 0;
    for (size_t i = 1; i < n; i++)
        if (samples[i] > samples[top]) top = i;
    for (size_t i = 0; i <= n; i++)
        series[i] = samples[(top + i) % n];
    return tacet_rainflow(n + 1, series, stack, out);
}

double tacet_reversed_amplitude(const tacet_fatigue_def *f, double amplitude, double mean)
{
    double part = fabs(mean) / f->ultimate_MPa;
    if (f->mean_rule == TACET_MEAN_NONE) return amplitude;
    double left = 1 - (f->mean_rule == TACET_MEAN_GERBER ? part * part : part);
    return left > 0 ? amplitude / left : INFINITY;
}

double tacet_miner_sum(const tacet_fatigue_def *f, size_t n, const tacet_rain *cycles)
{
    double sum = 0;
    for (size_t i = 0; i < n; i++) {
        double a = tacet_reversed_amplitude(f, 0.5 * cycles[i].range, cycles[i].mean);
        sum += cycles[i].count / f->at_cycles * pow(a / f->amplitude_MPa, f->exponent);
    }
    return sum;
}
