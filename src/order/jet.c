#include "jet.h"
#include <math.h>

// Four lines side by side, two in each register, so that the phasors' products overlap; the sums
// are added up in one fixed order, the same on every host.
typedef double lanes __attribute__((vector_size(16)));
#define GROUPS  2
#define STRANDS (2 * GROUPS)

typedef struct {
    lanes zr, zi, q;   // phasors exp(i q x) of a group's lines q
    lanes sum, d1, d2; // value, -slope, -curvature
} group;

static void add_lines(group *g, const double *line)
{
    lanes a = {line[0], line[2]}, b = {line[1], line[3]};
    lanes re = a * g->zr - b * g->zi, im = a * g->zi + b * g->zr;
    g->sum += re;
    g->d1 += g->q * im;
    g->d2 += g->q * g->q * re;
}

jet jet_at(const tacet_spectrum *s, double x)
{
    const double *line = (const double *)(const void *)s->line;
    size_t n = s->n_lines, h = 1;
    group g[GROUPS];
    for (size_t k = 0; k < GROUPS; k++) {
        double q = (double)(2 * k + 1);
        g[k] = (group){.zr = {cos(q * x), cos((q + 1) * x)},
                       .zi = {sin(q * x), sin((q + 1) * x)},
                       .q = {q, q + 1}};
    }
    double turn_r = cos(STRANDS * x), turn_i = sin(STRANDS * x);
    for (; h + STRANDS <= n + 1; h += STRANDS) {
        for (size_t k = 0; k < GROUPS; k++) {
            add_lines(&g[k], line + 2 * (h + 2 * k));
            lanes r = g[k].zr * turn_r - g[k].zi * turn_i;
            g[k].zi = g[k].zr * turn_i + g[k].zi * turn_r;
            g[k].zr = r;
            g[k].q += STRANDS;
        }
    }
    double rest[2 * STRANDS] = {0}; // the last lines, filled up with zeros
    for (size_t i = 0; i < 2 * (n + 1 - h); i++)
        rest[i] = line[2 * h + i];
    lanes sum = {0}, d1 = {0}, d2 = {0};
    for (size_t k = 0; k < GROUPS; k++) {
        add_lines(&g[k], rest + 4 * k);
        sum += g[k].sum;
        d1 += g[k].d1;
        d2 += g[k].d2;
    }
    return (jet){s->mean + (sum[0] + sum[1]), -(d1[0] + d1[1]), -(d2[0] + d2[1])};
}
