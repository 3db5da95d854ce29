// Torque, pressure and reciprocating inertia at crank angles.
#include "internal.h"
#include <complex.h>

#define PER_RAD (180 / M_PI)

typedef struct { // the half in which the last angle lay; angles in degrees after the firing top of
                 // cycle 0
    const engine_piece *piece;
    double first, end;
} cursor;

// False: the angle is not finite.
static bool find_half(const tacet_engine *en, const tacet_engine_work *w, unsigned slot, double deg,
                      cursor *at)
{
    double half = en->half_degrees, repeat = half * 2 * w->cycles;
    if (!isfinite(deg)) return false;
    double within = deg - repeat * floor(deg / repeat);
    unsigned k = (unsigned)(within / half);
    if (k >= 2 * w->cycles) k = 2 * w->cycles - 1;
    at->piece = w->sequence[2 * (size_t)slot * w->cycles + k];
    at->first = deg - (within - k * half);
    at->end = at->first + half;
    return true;
}

// The degree below and the place in it of an angle of the cursor's half.
static inline unsigned cell(const tacet_engine *en, const cursor *at, double deg, double *place)
{
    double within = deg - at->first;
    unsigned i = within > 0 ? (unsigned)within : 0;
    if (i >= en->half_degrees) i = en->half_degrees - 1;
    *place = within - i;
    return i;
}

void tacet_engine_gas_torque(const tacet_engine *en, const tacet_engine_work *w, unsigned slot,
                             size_t n, const double *angle_rad, double *torque_Nm)
{
    cursor at = {.first = 0, .end = 0};
    double top = en->slot[slot].firing_rad * PER_RAD;
    for (size_t k = 0; k < n; k++) {
        double deg = angle_rad[k] * PER_RAD - top;
        if (!(deg >= at.first && deg < at.end)) {
            if (!w->loaded || !find_half(en, w, slot, deg, &at)) {
                torque_Nm[k] = NAN;
                continue;
            }
        }
        double y;
        const engine_node *a = at.piece->node + cell(en, &at, deg, &y), *b = a + 1;
        double rise = b->torque_Nm - a->torque_Nm;
        double c2 = 3 * rise - 2 * a->slope_Nm_per_deg - b->slope_Nm_per_deg;
        double c3 = a->slope_Nm_per_deg + b->slope_Nm_per_deg - 2 * rise;
        torque_Nm[k] = a->torque_Nm + y * (a->slope_Nm_per_deg + y * (c2 + y * c3));
    }
}

// Cubic through the four nearest degrees of the half.
static double pressure_in(const tacet_engine *en, const engine_wave *wave, unsigned i, double y)
{
    unsigned first = i == 0 ? 0 : i - 1;
    if (first + 3 > en->half_degrees) first = en->half_degrees - 3;
    const double *p = wave->pressure_Pa + first;
    double x = y + i - first;
    return -p[0] * (x - 1) * (x - 2) * (x - 3) / 6 + p[1] * x * (x - 2) * (x - 3) / 2 -
           p[2] * x * (x - 1) * (x - 3) / 2 + p[3] * x * (x - 1) * (x - 2) / 6;
}

void tacet_engine_pressure(const tacet_engine *en, const tacet_engine_work *w, unsigned slot,
                           size_t n, const double *angle_rad, double *pressure_Pa)
{
    cursor at = {.first = 0, .end = 0};
    double top = en->slot[slot].firing_rad * PER_RAD;
    for (size_t k = 0; k < n; k++) {
        double deg = angle_rad[k] * PER_RAD - top, y;
        if (!w->loaded || !find_half(en, w, slot, deg, &at)) {
            pressure_Pa[k] = NAN;
            continue;
        }
        unsigned i = cell(en, &at, deg, &y);
        pressure_Pa[k] = pressure_in(en, at.piece->wave, i, y);
    }
}

// J = m x'^2 and dJ/da = 2 m x' x''. Within a degree x' is the polynomial of fifth degree that has
// x', x'' and x''' of the exact slider-crank at both ends (engine.c): exact to rounding, as the
// next term is h^6 / 46080 of its sixth derivative, 6e-16, and without a sine or a root.
void tacet_engine_inertia(const tacet_engine *en, unsigned slot, size_t n, const double *angle_rad,
                          double *inertia_kgm2, double *slope_kgm2_per_rad)
{
    double mass = en->cyl.slider.mass_kg, top = en->slot[slot].firing_rad * PER_RAD, first = 0;
    for (size_t k = 0; k < n; k++) {
        double deg = angle_rad[k] * PER_RAD - top, within = deg - first;
        if (!(within >= 0 && within < 360)) {
            if (!isfinite(deg)) {
                inertia_kgm2[k] = slope_kgm2_per_rad[k] = NAN;
                continue;
            }
            first = 360 * floor(deg / 360);
            within = deg - first;
        }
        unsigned i = (unsigned)within;
        if (i > 359) i = 359;
        double y = within - i;
        const double *c = en->lever_in[i];
        double dx = c[0] + y * (c[1] + y * (c[2] + y * (c[3] + y * (c[4] + y * c[5]))));
        double ddx = c[1] + y * (2 * c[2] + y * (3 * c[3] + y * (4 * c[4] + y * 5 * c[5])));
        inertia_kgm2[k] = mass * dx * dx;
        slope_kgm2_per_rad[k] = 2 * mass * dx * ddx * PER_RAD;
    }
}

// Sum of samples[0..n] exp(-i w k), both ends halved, w per sample, by Goertzel's recurrence for a
// block of w at a time.
#define BLOCK 16
static void goertzel(const double *x, unsigned n, const double w[BLOCK], double complex out[BLOCK])
{
    double twice[BLOCK], s1[BLOCK] = {0}, s2[BLOCK] = {0};
    for (int j = 0; j < BLOCK; j++)
        twice[j] = 2 * cos(w[j]);
    for (unsigned k = 0; k <= n; k++) {
        double in = k == 0 || k == n ? x[k] / 2 : x[k];
        for (int j = 0; j < BLOCK; j++) {
            double s = (in - s2[j]) + twice[j] * s1[j];
            s2[j] = s1[j];
            s1[j] = s;
        }
    }
    for (int j = 0; j < BLOCK; j++) // y = s1 - exp(-iw) s2 = sum x_k exp(iw(n-k))
        out[j] = (s1[j] - cexp(-I * w[j]) * s2[j]) * cexp(-I * w[j] * n);
}

void tacet_engine_fired_pulse(const tacet_engine *en, const tacet_engine_work *w, size_t n,
                              const double *order, double complex *pulse)
{
    unsigned half = en->half_degrees;
    double h = M_PI / 180;
    for (size_t k = 0; k < n; k += BLOCK) {
        double per_sample[BLOCK] = {0};
        double complex sum[BLOCK];
        for (size_t j = 0; j < BLOCK && k + j < n; j++)
            per_sample[j] = order[k + j] * h;
        goertzel(w->fired_Nm, 2 * half, per_sample, sum);
        for (size_t j = 0; j < BLOCK && k + j < n; j++) // from the firing top in the middle
            pulse[k + j] = w->loaded ? h * sum[j] * cexp(I * order[k + j] * (half * h)) : NAN;
    }
}
