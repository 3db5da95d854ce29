// Lever and reciprocating inertia at whole degrees and within them.
#include "internal.h"
#include <string.h>

// x', x'' and x''' at an angle, with g = sqrt(l^2 - b^2) and its derivatives (slider.c for b).
static void lever_at(const tacet_slider *s, double angle_rad, double out[3])
{
    double r = s->crank_m, l = s->rod_m, e = s->offset_m, phi = angle_rad + asin(e / (l + r));
    double b = r * sin(phi) - e, b1 = r * cos(phi), b2 = -r * sin(phi), b3 = -b1;
    double g = sqrt(l * l - b * b), g1 = -b * b1 / g, g2 = -(b1 * b1 + b * b2 + g1 * g1) / g;
    double g3 = -(3 * b1 * b2 + b * b3 + 3 * g1 * g2) / g;
    out[0] = -b2 - g1;
    out[1] = b1 - g2;
    out[2] = b2 - g3;
}

// Polynomial of fifth degree over 0..1 with value, slope and bend (per unit) at both ends.
static void between(const double a[3], const double b[3], double c[6])
{
    double d0 = b[0] - a[0] - a[1] - a[2] / 2, d1 = b[1] - a[1] - a[2], d2 = b[2] - a[2];
    c[0] = a[0], c[1] = a[1], c[2] = a[2] / 2;
    c[3] = 10 * d0 - 4 * d1 + d2 / 2;
    c[4] = -15 * d0 + 7 * d1 - d2;
    c[5] = 6 * d0 - 3 * d1 + d2 / 2;
}

void engine_geometry(tacet_engine *en)
{
    const tacet_slider *s = &en->cyl.slider;
    double sum = 0, h = M_PI / 180, at[3] = {0}, m = s->mass_kg;
    en->half_degrees = en->def.strokes == 4 ? 360 : 180;
    en->displacement_m3 = en->n_slots * en->cyl.swept_m3;
    for (unsigned i = 0; i <= 360; i++) {
        double x[3];
        lever_at(s, i * h, x);
        en->lever_m[i] = x[0];
        en->lever_slope_m[i] = x[1];
        double next[3] = {m * x[0] * x[0], 2 * m * x[0] * x[1] * h,
                          2 * m * (x[1] * x[1] + x[0] * x[2]) * h * h};
        if (i > 0) between(at, next, en->inertia[i - 1]);
        if (i > 0) sum += next[0]; // trapezoid over a period: exact to rounding
        memcpy(at, next, sizeof at);
    }
    memcpy(en->inertia[360], en->inertia[0], sizeof en->inertia[0]);
    en->mean_inertia_kgm2 = sum / 360;
}
