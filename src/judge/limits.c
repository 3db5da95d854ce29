// Scalar limits: one number of a condition against one of the study.
#include "judge/quantities.h"
#include "judge/verdict.h"
#include <math.h>

static const char *const statistic_text[] = {"pp",  "half_range", "rms",   "mean",
                                             "max", "reversed",   "damage"};
#define STATISTICS (int)(sizeof statistic_text / sizeof *statistic_text)

tacet_status tacet_limit_create(const tacet_limit_def *d, const tacet_train *t,
                                const tacet_body_def *body, tacet_limit *out, tacet_error *e)
{
    tacet_quantity_ref of;
    tacet_status status = tacet_quantity_parse(d->quantity, t, body, &of, e);
    if (status != TACET_OK) return status;
    int only = of.what->statistic, statistic = d->statistic;
    if (statistic < 0) statistic = only;
    if (statistic < 0 || statistic >= STATISTICS)
        return tacet_fail(
            e, TACET_BAD_INPUT,
            "a limit on %s needs a statistic: pp, half_range, rms, mean, max, or of a "
            "link-stress reversed or damage",
            of.what->name);
    if (only >= 0 && statistic != only)
        return tacet_fail(e, TACET_BAD_INPUT, "the statistic of %s is %s; read %s", of.what->name,
                          statistic_text[only], statistic_text[statistic]);
    bool counts = statistic == TACET_STAT_DAMAGE || statistic == TACET_STAT_REVERSED;
    if (counts && (of.what->spectrum != link_stress ||
                   isnan(tacet_train_link_info(t, of.target).fatigue.amplitude_MPa)))
        return tacet_fail(e, TACET_BAD_INPUT,
                          "%s is a statistic of a link-stress, of a link that states its fatigue",
                          statistic_text[statistic]);
    if (!(d->value > 0 && isfinite(d->value)))
        return tacet_fail(e, TACET_BAD_INPUT, "a limit is a number above 0; read %g", d->value);
    *out = (tacet_limit){.name = d->name, .of = of, .statistic = statistic, .value = d->value};
    return TACET_OK;
}

bool tacet_limit_counts_cycles(const tacet_limit *l)
{
    return l->statistic == TACET_STAT_DAMAGE || l->statistic == TACET_STAT_REVERSED;
}

// Puts what lies between two samples into the higher, or lower, one of them: the vertex of the
// parabola through it and its neighbours.
static void raise_turns(size_t n, double *y)
{
    double first = y[0], before = y[n - 1];
    for (size_t i = 0; i < n; i++) {
        double here = y[i], after = i + 1 < n ? y[i + 1] : first;
        double bend = before + after - 2 * here;
        if ((here - before) * (after - here) < 0)
            y[i] = here - (after - before) * (after - before) / (8 * bend);
        before = here;
    }
}

// Rainflow of the closed repeat.
static tacet_status of_cycles(const tacet_limit *l, const tacet_response *r,
                              const tacet_limit_scratch *q, double *out)
{
    size_t n = tacet_transform_samples(q->transform);
    if (!q->cycles) return TACET_BAD_INPUT;
    double *series = q->cycles, *stack = series + n + 1;
    tacet_rain *rain = (tacet_rain *)(void *)(stack + n + 1);
    tacet_link_info link = tacet_train_link_info(r->train, l->of.target);
    tacet_transform_samples_of(q->transform, q->spectrum, q->buffer);
    raise_turns(n, q->buffer);
    size_t cycles = tacet_rainflow_repeat(n, q->buffer, series, stack, rain);
    double repeats_per_h = 3600 * r->speed_rad_per_s / (2 * M_PI * r->revolutions), largest = 0;
    for (size_t i = 0; i < cycles; i++) {
        double a = tacet_reversed_amplitude(&link.fatigue, 0.5 * rain[i].range, rain[i].mean);
        if (!(a <= largest)) largest = a; // NAN stays to be seen
        if (isnan(a)) break;
    }
    *out = l->statistic == TACET_STAT_REVERSED
               ? largest
               : repeats_per_h * tacet_miner_sum(&link.fatigue, cycles, rain);
    return TACET_OK;
}

static double of_signal(int statistic, const tacet_limit_scratch *q)
{
    const tacet_spectrum *s = q->spectrum;
    if (statistic == TACET_STAT_RMS) return tacet_spectrum_rms(s, 1, s->n_lines);
    if (statistic == TACET_STAT_MEAN) return fabs(s->mean);
    tacet_peaks p;
    tacet_spectrum_peaks(s, q->transform, q->buffer, &p);
    if (statistic == TACET_STAT_MAX) return fmax(fabs(p.max), fabs(p.min));
    return statistic == TACET_STAT_PP ? p.max - p.min : 0.5 * (p.max - p.min);
}

tacet_status tacet_limit_judge(const tacet_limit *l, const tacet_response *r, double reserve_db,
                               const tacet_limit_scratch *scratch, tacet_limit_result *out)
{
    double value;
    tacet_status status;
    if (l->of.what->scalar) {
        status = l->of.what->value(r, l->of.target, &value);
    } else {
        status = l->of.what->spectrum(r, l->of.target, scratch->spectrum);
        if (status == TACET_OK && tacet_limit_counts_cycles(l))
            status = of_cycles(l, r, scratch, &value);
        else if (status == TACET_OK)
            value = of_signal(l->statistic, scratch);
    }
    if (status != TACET_OK) return status;
    if (!isfinite(value)) return TACET_NOT_FINITE;
    *out = (tacet_limit_result){.value = value, .margin_db = NAN, .verdict = TACET_CLEAR};
    if (value > 0) {
        out->margin_db = 20 * log10(l->value / value);
        out->verdict = verdict_of(out->margin_db, reserve_db);
    }
    return TACET_OK;
}

void tacet_limit_no_verdict(tacet_why why, tacet_limit_result *out)
{
    *out = (tacet_limit_result){
        .value = NAN, .margin_db = NAN, .verdict = TACET_NO_VERDICT, .why = why};
}
