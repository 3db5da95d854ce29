// Damping of links.
//
// Loss factor. K* = k (i w / w_m)^alpha, alpha = (2/pi) atan eta, has Im K / Re K = eta at every
// frequency and is causal (constant-Q law: E. Kjartansson, J. Geophys. Res. 84, 1979, eq. 10-12).
// Since (i w)^alpha = sin(pi alpha)/pi * integral of r^alpha i w / (r + i w) d(ln r) over all rates
// r > 0, equally spaced ln r make a sum of Maxwell arms g = r^alpha, each a spring behind a
// dashpot, which a march can carry as states. Ripple of the sum's imaginary part: 2 / cosh(pi^2 /
// ln q) of it, q the ratio of neighbouring rates: 0.3 % for q = 4.
//
// Rates stand from 2 w_low to w_high / 2. All the rates further down and up, without end, are a
// geometric series, and what it does within the range is matched by one arm on each side:
//   down  sum g (1 - r/(i w) + ..):      a rest spring and an arm with the same sum g and sum g r
//   up    sum g (i w/r + w^2/r^2 - ..):  a viscous damper and an arm with the same sum g/r, g/r^2
// (and at alpha = 0 the moment after that). Tests state how well eta is met.
//
// Scale: Re K* = k at w_m, the mode with most strain energy in the link (or at_hz). Where w_m is
// outside the range the law itself carries the scale to the nearer end.
#include "train/internal.h"
#include <math.h>

#define RATE_RATIO_MOST 4.0 // of neighbouring rates
#define RANGE_LEAST     64.0
#define NO_LOSS         1e-15 // a loss factor below is rounding

// Rates in rad/s that hold between two frequencies: down, between.., up.
static tacet_status place_rates(tacet_train *t, double low, double high, tacet_error *e)
{
    if (high < RANGE_LEAST * low) high = RANGE_LEAST * low;
    double first = 2 * low, last = high / 2;
    size_t steps = (size_t)ceil(log(last / first) / log(RATE_RATIO_MOST) - 1e-9);
    double q = pow(last / first, 1.0 / (double)steps);
    t->n_arms = steps + 3;
    t->rate = tacet_arena_alloc(t->arena, t->n_arms * sizeof *t->rate);
    if (!t->rate) return tacet_fail(e, TACET_NO_MEMORY, "no memory for the train");
    for (size_t i = 0; i <= steps; i++)
        t->rate[i + 1] = first * pow(q, (double)i);
    t->rate_ratio = q;
    double square = q * q;
    t->rate[0] = first / q / (1 + 1 / q);
    t->rate[steps + 2] = last * q * (1 - 1 / (square * q)) / (1 - 1 / square);
    return TACET_OK;
}

// Sum of (r q^-i)^power over i = 0, 1, 2, ..; power > 0, however small: a loss factor of 1e-17 is a
// power whose q^-power is 1.
static double series(double r, double q, double power)
{
    return pow(r, power) / -expm1(-power * log(q));
}

static void weigh(const tacet_train *t, double alpha, link_law *law, double *weight)
{
    size_t top = t->n_arms - 1;
    double q = t->rate_ratio, below = t->rate[1] / q, above = t->rate[top - 1] * q;
    for (size_t i = 1; i < top; i++)
        weight[i] = pow(t->rate[i], alpha);
    weight[0] = series(below, q, 1 + alpha) / t->rate[0];
    law->rest = series(below, q, alpha) - weight[0];
    double first = series(1 / above, q, 1 - alpha), second = series(1 / above, q, 2 - alpha);
    weight[top] = second * t->rate[top] * t->rate[top];
    law->viscous = first - second * t->rate[top];
    law->weight = weight;
}

// The mode with most strain energy in link e; of equal ones, whatever their last bits, the lowest.
static double main_mode(const tacet_train *t, size_t e)
{
    size_t best = 1;
    for (size_t mode = 2; mode < t->n; mode++)
        if (t->energy_share[mode * t->n_links + e] >
            t->energy_share[best * t->n_links + e] * (1 + 1e-9))
            best = mode;
    return t->mode_hz[best];
}

static tacet_status resolve_loss(tacet_train *t, size_t e, double loss, double at_hz,
                                 const tacet_train_def *d, tacet_error *error)
{
    link_law *law = &t->law[e];
    double alpha = 2 / M_PI * atan(loss), low = d->lowest_hz, high = d->highest_hz;
    double *weight = tacet_arena_alloc(t->arena, t->n_arms * sizeof *weight);
    if (!weight) return tacet_fail(error, TACET_NO_MEMORY, "no memory for the train");
    weigh(t, alpha, law, weight);
    double inside = fmin(fmax(at_hz, low), fmax(high, RANGE_LEAST * low));
    double wanted = t->link[e].stiffness_Nm_per_rad * pow(inside / at_hz, alpha);
    double scale = wanted / creal(tacet_train_link_impedance(t, e, 2 * M_PI * inside));
    law->rest *= scale;
    law->viscous *= scale;
    for (size_t i = 0; i < t->n_arms; i++)
        weight[i] *= scale;
    return TACET_OK;
}

static tacet_status resolve(tacet_train *t, size_t e, const tacet_link_def *l,
                            const tacet_train_def *d, tacet_error *error)
{
    tacet_link_info *info = &t->link[e];
    double k = info->stiffness_Nm_per_rad;
    info->main_mode_hz = main_mode(t, e);
    t->law[e] = (link_law){.rest = k};
    if (!isnan(l->damping_Nms_per_rad)) info->damping_Nms_per_rad = l->damping_Nms_per_rad;
    if (!isnan(l->damping_ratio))
        info->damping_Nms_per_rad = l->damping_ratio * k / (M_PI * info->main_mode_hz);
    t->law[e].viscous = info->damping_Nms_per_rad;
    if (isnan(l->loss_factor) || l->loss_factor < NO_LOSS) return TACET_OK;
    info->loss_factor = l->loss_factor;
    t->constant_loss[e] = l->loss_law == TACET_LOSS_CONSTANT;
    if (t->constant_loss[e]) return TACET_OK;
    return resolve_loss(t, e, l->loss_factor, isnan(l->at_hz) ? info->main_mode_hz : l->at_hz, d,
                        error);
}

tacet_status train_damping_resolve(tacet_train *t, const tacet_train_def *d, tacet_error *e)
{
    if (!(d->lowest_hz > 0 && d->highest_hz > d->lowest_hz && isfinite(d->highest_hz)))
        return tacet_fail(
            e, TACET_BAD_INPUT,
            "loss factors between %g and %g Hz; a lowest above 0 and a higher highest",
            d->lowest_hz, d->highest_hz);
    tacet_status status = place_rates(t, 2 * M_PI * d->lowest_hz, 2 * M_PI * d->highest_hz, e);
    for (size_t i = 0; i < d->n_links && status == TACET_OK; i++)
        status = resolve(t, i, &d->links[i], d, e);
    for (size_t i = 0; i < d->n_dampers && status == TACET_OK; i++) {
        tacet_link_def l = tacet_link_default();
        l.loss_factor = d->dampers[i].loss_factor;
        l.at_hz = d->dampers[i].tuned_hz;
        status = resolve(t, d->n_links + i, &l, d, e);
    }
    return status;
}
