// Bands: counted range, level with dispersion, verdict, order windows.
#include "judge/verdict.h"
#include <math.h>

// Lines on an edge count. A speed computed from an edge, or an edge from a speed, is off by a few
// roundings: this is 4,000 of them, and far below what any frequency is known to.
#define EDGE_SLACK 1e-12

// Below this part of the quantity's total rms a level is what is left of lines that cancel.
#define NO_LINE 1e-9

const char *tacet_verdict_text(tacet_verdict v)
{
    static const char *const text[] = {"clear", "near", "over", "none"};
    return (unsigned)v < sizeof text / sizeof *text ? text[v] : "unknown";
}

tacet_verdict verdict_of(double margin_db, double reserve_db)
{
    if (margin_db < 0) return TACET_OVER;
    return margin_db < reserve_db ? TACET_NEAR : TACET_CLEAR;
}

tacet_status tacet_band_create(const tacet_band_def *d, double reserve_db, const tacet_train *t,
                               const tacet_body_def *body, tacet_band *out, tacet_error *e)
{
    tacet_quantity_ref of;
    tacet_status status = tacet_quantity_parse(d->quantity, t, body, &of, e);
    if (status != TACET_OK) return status;
    if (of.what->scalar)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "%s is one number and has no lines; limit it under limits",
                          of.what->name);
    if (!(d->low_hz > 0 && d->low_hz < d->high_hz && isfinite(d->high_hz)))
        return tacet_fail(e, TACET_BAD_INPUT,
                          "a band runs from low_hz up to high_hz; read %g and %g", d->low_hz,
                          d->high_hz);
    if (isnan(d->limit_rms) && isnan(d->over_all_fire_db))
        return tacet_fail(e, TACET_BAD_INPUT, "a band needs limit_rms or over_all_fire_db");
    double guard = tacet_band_guard(d);
    *out = (tacet_band){
        .name = d->name,
        .kind = d->kind,
        .low_hz = d->low_hz,
        .high_hz = d->high_hz,
        .counted_low_hz = d->low_hz * (1 - guard),
        .counted_high_hz = d->high_hz * (1 + guard),
        .of = of,
        .limit_rms = d->limit_rms,
        .over_all_fire_db = d->over_all_fire_db,
        .floor_rms = d->floor_rms,
        .reference = d->reference,
        .reserve_db = reserve_db,
    };
    return TACET_OK;
}

// ---- level --------------------------------------------------------------------------------------

static double square(double complex z)
{
    return creal(z) * creal(z) + cimag(z) * cimag(z);
}

// First and last line inside the counted band; last < first: none.
static void lines_inside(const tacet_band *b, double line1_hz, size_t n_lines, size_t *first,
                         size_t *last)
{
    double low = ceil(b->counted_low_hz / line1_hz * (1 - EDGE_SLACK));
    double high = floor(b->counted_high_hz / line1_hz * (1 + EDGE_SLACK));
    *first = low < 1 ? 1 : low > (double)n_lines ? n_lines + 1 : (size_t)low;
    *last = high > (double)n_lines ? n_lines : (size_t)high;
}

// What unequal cylinders add to |line h|^2.
static double cylinder_square(const tacet_dispersion *d, size_t h)
{
    double sum = 0;
    if (!d || !d->transfer || !d->fired || d->cylinder_sigma == 0) return 0;
    for (size_t i = 0; i < d->n_slots; i++)
        if (h <= d->transfer[i]->n_lines && h <= d->fired[i].n_lines)
            sum += square(d->transfer[i]->line[h]) * square(d->fired[i].line[h]);
    return d->cylinder_sigma * d->cylinder_sigma * sum;
}

void tacet_band_level_of(const tacet_band *b, const tacet_spectrum *s, double speed_rad_per_s,
                         const tacet_dispersion *d, tacet_band_level *out)
{
    size_t first, last;
    double nominal = 0, added = 0, largest = 0;
    *out = (tacet_band_level){0};
    lines_inside(b, tacet_order_hz(1.0 / s->revolutions, speed_rad_per_s), s->n_lines, &first,
                 &last);
    for (size_t h = first; h <= last; h++) {
        double own = square(s->line[h]), unequal = cylinder_square(d, h);
        nominal += own;
        added += unequal;
        if (own + unequal <= largest) continue;
        largest = own + unequal;
        out->leading_line = h;
    }
    out->nominal = sqrt(nominal / 2);
    out->dispersed = sqrt((nominal + added) / 2 + (d ? d->cyclic_mean_square : 0));
    double total = tacet_spectrum_rms(s, 1, s->n_lines);
    out->has_line = out->dispersed > 0 && out->dispersed >= NO_LINE * total;
    if (sqrt(largest / 2) < NO_LINE * total) out->leading_line = 0;
    if (out->leading_line == 0) return;
    out->leading_order = (double)out->leading_line / s->revolutions;
    out->leading_peak = sqrt(largest);
}

// Random pulse strengths, one by one and independent, each 1 + sigma xi: Campbell's theorem gives
// the variance of the sum of pulses at rate lambda as lambda sigma^2 int p^2 dt, by Parseval
// 2 lambda sigma^2 int_0^inf |P|^2 df, and behind a filter |H P|^2 (S. O. Rice, Bell Syst. Tech. J.
// 23, 1944, sec. 1.2 to 1.5; from memory). Held against a simulation in tests/judge/test_bands.c.
double tacet_cyclic_mean_square(size_t n, const double *f_hz, size_t n_slots,
                                const double complex *H, const double complex *P,
                                const double *fires_per_s, double sigma)
{
    double sum = 0;
    for (size_t i = 0; i < n_slots; i++) {
        const double complex *h = H + i * n;
        double integral = 0;
        for (size_t k = 1; k < n; k++)
            integral += 0.5 * (f_hz[k] - f_hz[k - 1]) *
                        (square(h[k]) * square(P[k]) + square(h[k - 1]) * square(P[k - 1]));
        sum += 2 * fires_per_s[i] * sigma * sigma * integral;
    }
    return sum;
}

// ---- verdict ------------------------------------------------------------------------------------

void tacet_band_no_verdict(tacet_why why, tacet_band_result *out)
{
    *out = (tacet_band_result){
        .level = {.nominal = NAN, .dispersed = NAN},
        .limit = NAN,
        .reference = NAN,
        .margin_db = NAN,
        .verdict = TACET_NO_VERDICT,
        .why = why,
    };
}

void tacet_band_judge(const tacet_band *b, const tacet_band_level *level,
                      const double *all_fire_level, tacet_band_result *out)
{
    if (!isfinite(level->dispersed)) {
        tacet_band_no_verdict(TACET_WHY_FAILED, out);
        return;
    }
    double limit = isnan(b->limit_rms) ? INFINITY : b->limit_rms, reference = NAN, allowed = NAN;
    bool wanted = !isnan(b->over_all_fire_db), missing = false;
    if (wanted) {
        missing = !all_fire_level || !isfinite(*all_fire_level);
        if (!missing) {
            reference = *all_fire_level;
            // fmax, fmin: a term that is NAN drops out
            allowed = reference * pow(10, b->over_all_fire_db / 20);
            limit = fmin(limit, fmax(b->floor_rms, allowed));
        }
    }
    *out = (tacet_band_result){.level = *level, .reference = reference, .margin_db = NAN};
    bool certain = !missing || (isfinite(limit) && level->dispersed > limit);
    out->limit = certain ? limit : NAN;
    if (!level->has_line) {
        out->verdict = TACET_CLEAR;
    } else if (!certain) {
        out->verdict = TACET_NO_VERDICT;
        out->why = TACET_WHY_NO_REFERENCE;
    } else {
        // from the reference itself, all-fire has over_all_fire_db to the last bit
        out->margin_db = limit == allowed
                             ? b->over_all_fire_db + 20 * log10(reference / level->dispersed)
                             : 20 * log10(limit / level->dispersed);
        out->verdict = verdict_of(out->margin_db, b->reserve_db);
    }
}

// ---- order windows ------------------------------------------------------------------------------

void tacet_order_window(const tacet_band *b, double order, bool counted, double *low_rad_per_s,
                        double *high_rad_per_s)
{
    double low_hz = counted ? b->counted_low_hz : b->low_hz;
    double high_hz = counted ? b->counted_high_hz : b->high_hz;
    *low_rad_per_s = order > 0 ? tacet_order_speed(order, low_hz) : NAN; // order 0 is in no band
    *high_rad_per_s = order > 0 ? tacet_order_speed(order, high_hz) : NAN;
}
