#include "tacet/order.h"
#include <math.h>

tacet_status tacet_spectrum_init(tacet_spectrum *s, size_t n_lines, tacet_arena *a)
{
    if (n_lines > SIZE_MAX / sizeof *s->line - 1) return TACET_NO_MEMORY;
    double complex *line = tacet_arena_alloc(a, (n_lines + 1) * sizeof *line);
    if (!line) return TACET_NO_MEMORY;
    *s = (tacet_spectrum){.revolutions = 1, .n_lines = n_lines, .line = line};
    return TACET_OK;
}

void tacet_spectrum_zero(tacet_spectrum *s)
{
    s->mean = 0;
    for (size_t h = 0; h <= s->n_lines; h++)
        s->line[h] = 0;
}

void tacet_spectrum_add(tacet_spectrum *s, double complex factor, const tacet_spectrum *x)
{
    size_t n = s->n_lines < x->n_lines ? s->n_lines : x->n_lines;
    double complex *restrict to = s->line;
    const double complex *restrict from = x->line;
    s->mean += creal(factor) * x->mean;
    for (size_t h = 1; h <= n; h++)
        to[h] += factor * from[h];
}

double tacet_spectrum_rms(const tacet_spectrum *s, size_t first, size_t last)
{
    double sum = 0;
    if (first < 1) first = 1;
    if (last > s->n_lines) last = s->n_lines;
    for (size_t h = first; h <= last; h++) {
        double re = creal(s->line[h]), im = cimag(s->line[h]);
        sum += re * re + im * im;
    }
    return sqrt(sum / 2);
}

double tacet_spectrum_at(const tacet_spectrum *s, double angle_rad)
{
    double sum = s->mean, step = angle_rad / s->revolutions;
    for (size_t h = 1; h <= s->n_lines; h++) {
        double a = (double)h * step;
        sum += creal(s->line[h]) * cos(a) - cimag(s->line[h]) * sin(a);
    }
    return sum;
}

double tacet_order_hz(double order, double speed_rad_per_s)
{
    return order * speed_rad_per_s / (2 * M_PI);
}

double tacet_order_speed(double order, double hz)
{
    return 2 * M_PI * hz / order;
}
