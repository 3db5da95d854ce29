// Sigma-delta modulation of a constant density u in 0..1 into fires y in {0, 1}, in the form that
// feeds the quantisation error e = v - y back (J. C. Candy & G. C. Temes (eds.), Oversampling
// Delta-Sigma Data Converters, IEEE Press 1992):
//   first order   v = u + e1                y = u - (1 - z^-1) e
//   second order  v = u + 2 e1 - e2         y = u - (1 - z^-1)^2 e
// First order fires when a whole fire is owed, v >= 1, which without dither is the even word of a
// rational density; second order fires at v >= 1/2, the middle of its two levels. Its errors stay
// bounded for 0 < u < 1 (S. Hein, K. Ibraham & A. Zakhor, IEEE Trans. Circuits Syst. II 39 (1992)
// 796) and are zero at 0 and 1. Dither is added before the decision only, uniform over `dither`
// times the step of 1 around 0.
#include "sigma_delta.h"
#include <math.h>

// Sums of a density that is not exact in binary fall short of a whole fire by rounding, below 2^-46
// in 64 steps; this much less than one counts as one.
#define WHOLE_FIRE (1 - 0x1p-40)

// SplitMix64 (G. L. Steele, D. Lea & C. H. Flood, OOPSLA 2014, doi 10.1145/2660193.2660195): a
// bijective mix of a counter that steps by the golden ratio.
uint64_t dither_word(uint64_t seed, uint64_t n)
{
    uint64_t z = seed + (n + 1) * UINT64_C(0x9e3779b97f4a7c15);
    z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
    z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
    return z ^ (z >> 31);
}

// The high 53 bits as an exact double in [-1/2, 1/2).
static double dither_at(uint64_t seed, uint64_t n)
{
    return (double)(dither_word(seed, n) >> 11) * 0x1p-53 - 0.5;
}

bool sigma_delta_step(sigma_delta *m)
{
    double v = m->density + (m->order == 1 ? m->error : 2 * m->error - m->error_before);
    double seen = m->dither > 0 ? v + m->dither * dither_at(m->seed, m->steps) : v;
    bool fires = seen >= (m->order == 1 ? WHOLE_FIRE : 0.5);
    m->error_before = m->error;
    m->error = fires ? v - 1 : v;
    m->steps++;
    return fires;
}

static tacet_status check(const tacet_maker_def *d, tacet_error *e)
{
    tacet_status status = check_length(d->length, e);
    if (status != TACET_OK) return status;
    if (!(d->density >= 0 && d->density <= 1))
        return tacet_fail(e, TACET_BAD_INPUT, "density %g; 0 to 1 is allowed", d->density);
    if (!(d->dither >= 0 && d->dither <= 1))
        return tacet_fail(e, TACET_BAD_INPUT, "dither %g; 0 to 1 is allowed", d->dither);
    return TACET_OK;
}

tacet_status sigma_delta_make(int order, const tacet_maker_def *d, tacet_arena *a, tacet_words *out,
                              tacet_error *e)
{
    tacet_status status = check(d, e);
    if (status == TACET_OK) status = words_init(out, 1, a, e);
    if (status != TACET_OK) return status;
    sigma_delta m = {.order = order, .density = d->density, .dither = d->dither, .seed = d->seed};
    tacet_pattern *p = out->pattern;
    p->length = d->length;
    for (unsigned i = 0; i < d->length; i++)
        p->tenths[i] = sigma_delta_step(&m) ? 10 : 0;
    return TACET_OK;
}
