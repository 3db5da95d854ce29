// What whole-body vibration is to people (ISO 2631-1).
#include "tacet/judge.h"
#include <math.h>

#define CREST_MOST  9.0  // 6.2.1: above, rms alone says too little
#define FOURTH_MOST 1.75 // 6.3.3: VDV / (a_w T^(1/4)) above which the dose counts

void tacet_comfort_of(const tacet_spectrum *s, const tacet_transform *transform, double *buffer,
                      tacet_comfort *out)
{
    size_t n = tacet_transform_samples(transform);
    tacet_peaks p;
    double fourth = 0;
    tacet_spectrum_peaks(s, transform, buffer, &p);
    tacet_transform_samples_of(transform, s, buffer);
    for (size_t i = 0; i < n; i++) {
        double square = (buffer[i] - s->mean) * (buffer[i] - s->mean);
        fourth += square * square / (double)n;
    }
    double rms = tacet_spectrum_rms(s, 1, s->n_lines);
    double peak = fmax(fabs(p.max - s->mean), fabs(p.min - s->mean));
    *out = (tacet_comfort){.weighted_rms = rms,
                           .crest_factor = rms > 0 ? peak / rms : 0,
                           .fourth_power = sqrt(sqrt(fourth))};
    out->rms_says_enough =
        out->crest_factor <= CREST_MOST && out->fourth_power <= FOURTH_MOST * rms;
}

double tacet_vibration_dose(const tacet_comfort *c, double time_s)
{
    return c->fourth_power * sqrt(sqrt(time_s));
}

const char *tacet_comfort_words(double total, const char **second)
{
    static const struct {
        double low, high;
        const char *words;
    } range[] = {
        {0, 0.315, "not uncomfortable"},   {0.315, 0.63, "a little uncomfortable"},
        {0.5, 1, "fairly uncomfortable"},  {0.8, 1.6, "uncomfortable"},
        {1.25, 2.5, "very uncomfortable"}, {2, INFINITY, "extremely uncomfortable"},
    };
    const char *found[2] = {NULL, NULL};
    int n = 0;
    for (size_t i = 0; i < sizeof range / sizeof *range && n < 2; i++)
        if (total >= range[i].low && total < range[i].high) found[n++] = range[i].words;
    if (second) *second = found[1];
    return found[0] ? found[0] : "";
}

double tacet_total_value(const double k[3], const double weighted_rms[3])
{
    double sum = 0;
    for (int i = 0; i < 3; i++)
        sum += k[i] * weighted_rms[i] * k[i] * weighted_rms[i];
    return sqrt(sum);
}
