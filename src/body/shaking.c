// Shaking forces and moments at constant speed.
//
// A piston that moves down its cylinder by x is accelerated by -x'' W^2 along the cylinder's
// direction c (outwards), so the housing feels +m x'' W^2 c, at the crank's axis: at top, where
// x'' = r (1 + lambda), outwards. A mass at the crank pin, and every other unbalance U that turns
// by beta from up, puts U w^2 (0, -sin beta, cos beta) on its bearings: turning about +x takes z to
// -y. With a pin offset e the piston's line passes the axis, and -m x'' W^2 e acts about it too.
//
// The rod counts as two masses, at pin and piston pin; the couple that this leaves out is not here
// (nor is it in any pattern's torque). Speed ripple is left out: shaking belongs to the mean speed.
#include "internal.h"
#include <string.h>

#define SAMPLES 256 // of a turn: harmonics of the slider-crank beyond 24 are below 1e-12

// x'' of the slider-crank on its harmonics, m/rad^2 (peak, complex).
static void piston_harmonics(const tacet_slider *s, size_t n, double complex *line)
{
    for (size_t h = 1; h <= n; h++)
        line[h] = 0;
    for (int k = 0; k < SAMPLES; k++) {
        double x, dx, ddx, angle = 2 * M_PI * k / SAMPLES;
        tacet_slider_at(s, angle, &x, &dx, &ddx);
        for (size_t h = 1; h <= n; h++)
            line[h] += ddx * cexp(-I * (double)h * angle) * (2.0 / SAMPLES);
    }
}

static void place_on_crank(const tacet_body *b, double at_m, double out[3])
{
    for (int i = 0; i < 3; i++)
        out[i] = b->def->n_crank_axis ? b->def->crank_axis_m[i] : 0;
    out[0] += at_m;
}

// An unbalance that points up + `beta` about x at crank angle 0 and turns `ratio` times as fast as
// the crank, about `sense` x.
static void add_rotating(tacet_body *b, const double at[3], double unbalance_kgm, double ratio,
                         double beta)
{
    double rate = b->direction * ratio, sense = rate < 0 ? -1 : 1;
    double square = unbalance_kgm * ratio * ratio;
    double complex at_zero = cexp(I * sense * beta);
    const double complex force[3] = {0, I * sense * square * at_zero, square * at_zero};
    size_t half = (size_t)lround(2 * fabs(ratio));
    if (half >= 1 && half <= TACET_SHAKING_HALVES) six_add_force(at, force, b->shaking[half]);
}

static void add_piston(tacet_body *b, const tacet_engine *en, unsigned slot,
                       const double complex *line)
{
    const tacet_slider *s = tacet_engine_slider(en);
    tacet_cylinder_def c = tacet_engine_cylinder(en, slot);
    double firing = tacet_engine_firing_angle(en, slot), at[3];
    place_on_crank(b, c.at_m, at);
    for (size_t h = 1; 2 * h <= TACET_SHAKING_HALVES; h++) {
        double complex f = s->mass_kg * line[h] * cexp(-I * (double)h * firing);
        const double complex force[3] = {0, sin(c.bank_rad) * f, cos(c.bank_rad) * f};
        six_add_force(at, force, b->shaking[2 * h]);
        b->shaking[2 * h][3] -= b->direction * s->offset_m * f;
    }
}

// Where the pin of a slot points at crank angle 0, from up about x; its piston is at top at the
// firing angle, with the pin beyond its cylinder's direction by what an offset makes.
static double pin_angle(const tacet_body *b, const tacet_engine *en, unsigned slot)
{
    const tacet_slider *s = tacet_engine_slider(en);
    double beyond = asin(s->offset_m / (s->crank_m + s->rod_m));
    return b->direction * (beyond - tacet_engine_firing_angle(en, slot)) -
           tacet_engine_cylinder(en, slot).bank_rad;
}

void shaking_assemble(tacet_body *b, const tacet_engine *en)
{
    const tacet_body_def *d = b->def;
    double complex line[TACET_SHAKING_HALVES / 2 + 1];
    double at[3];
    piston_harmonics(tacet_engine_slider(en), TACET_SHAKING_HALVES / 2, line);
    for (unsigned slot = 0; slot < tacet_engine_cylinders(en); slot++) {
        add_piston(b, en, slot, line);
        place_on_crank(b, tacet_engine_cylinder(en, slot).at_m, at);
        add_rotating(b, at, d->rotating_mass_kg * tacet_engine_slider(en)->crank_m, 1,
                     pin_angle(b, en, slot));
    }
    for (size_t i = 0; i < d->n_counterweights; i++) {
        const tacet_counterweight_def *w = &d->counterweights[i];
        place_on_crank(b, w->at_m, at);
        add_rotating(b, at, w->unbalance_kgm, 1, pin_angle(b, en, 0) + b->direction * w->angle_rad);
    }
    for (size_t i = 0; i < d->n_balance_shafts; i++) {
        const tacet_balance_shaft_def *s = &d->balance_shafts[i];
        double first = tacet_engine_firing_angle(en, 0);
        add_rotating(b, s->at_m, s->unbalance_kgm, s->ratio,
                     b->direction * (s->phase_rad - s->ratio * first));
    }
}

const tacet_six_complex *tacet_body_shaking(const tacet_body *b)
{
    return b->shaking;
}
