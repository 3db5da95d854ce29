// Torque, pressure and reciprocating inertia at crank angles.
#include "internal.h"
#include <complex.h>

#define PER_RAD (180 / M_PI)
// No repeat turns that far, but a march that runs away does; beyond it rounding would step over the
// ends of the tables.
#define MOST_DEG 1e9

typedef struct { // the half in which the last angle lay; angles in degrees after the firing top of
                 // cycle 0
    const engine_piece *piece;
    double first, end;
    unsigned from_top; // degrees from the piston top before it to where the half starts
} cursor;

// False: the angle is not finite, or out of all reach.
static bool find_half(const tacet_engine *en, const tacet_engine_work *w, unsigned slot, double deg,
                      cursor *at)
{
    double half = en->half_degrees, repeat = half * 2 * w->cycles;
    if (!(fabs(deg) <= MOST_DEG)) return false;
    double within = deg - repeat * floor(deg / repeat);
    unsigned k = (unsigned)(within / half);
    if (k >= 2 * w->cycles) k = 2 * w->cycles - 1;
    at->piece = w->sequence[2 * (size_t)slot * w->cycles + k];
    at->first = deg - (within - k * half);
    at->end = at->first + half;
    at->from_top = k * en->half_degrees % 360;
    return true;
}

// The degree below and the place in it of an angle of the cursor's half. Rounding may give the last
// degree with place 0; the tables hold one entry more for it.
static inline int cell(const cursor *at, double deg, double *place)
{
    double within = deg - at->first;
    int i = (int)within;
    *place = within - i;
    return i;
}

// Cubic through value and slope at both ends of a degree.
static inline double torque_in(const engine_node *a, double y)
{
    const engine_node *b = a + 1;
    double rise = b->torque_Nm - a->torque_Nm;
    double c2 = 3 * rise - 2 * a->slope_Nm_per_deg - b->slope_Nm_per_deg;
    double c3 = a->slope_Nm_per_deg + b->slope_Nm_per_deg - 2 * rise;
    return a->torque_Nm + y * (a->slope_Nm_per_deg + y * (c2 + y * c3));
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
        int i = cell(&at, deg, &y);
        torque_Nm[k] = torque_in(at.piece->node + i, y);
    }
}

// Cubic through the four nearest degrees of the half.
static double pressure_in(const tacet_engine *en, const engine_wave *wave, int i, double y)
{
    int first = i == 0 ? 0 : i - 1, last = (int)en->half_degrees - 3;
    if (first > last) first = last;
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
        int i = cell(&at, deg, &y);
        pressure_Pa[k] = pressure_in(en, at.piece->wave, i, y);
    }
}

// J = m x'^2 and its slope dJ/da = 2 m x' x''. Within a degree J is the polynomial of fifth degree
// that has J, J' and J'' of the exact slider-crank at both ends (geometry.c): exact to rounding, as
// the next term is h^6 / 46080 of its sixth derivative, and without a sine or a root. Horner's
// scheme gives value and slope (per degree) together.
static inline double inertia_in(const double c[6], double y, double *slope)
{
    double value = c[5], rise = 0;
    for (int k = 4; k >= 0; k--) {
        rise = rise * y + value;
        value = value * y + c[k];
    }
    *slope = rise;
    return value;
}

void tacet_engine_inertia(const tacet_engine *en, unsigned slot, size_t n, const double *angle_rad,
                          double *inertia_kgm2, double *slope_kgm2_per_rad)
{
    double top = en->slot[slot].firing_rad * PER_RAD, first = 0;
    for (size_t k = 0; k < n; k++) {
        double deg = angle_rad[k] * PER_RAD - top, within = deg - first, slope;
        if (!(within >= 0 && within < 360)) {
            if (!(fabs(deg) <= MOST_DEG)) {
                inertia_kgm2[k] = slope_kgm2_per_rad[k] = NAN;
                continue;
            }
            first = 360 * floor(deg / 360);
            within = deg - first;
        }
        int i = (int)within;
        inertia_kgm2[k] = inertia_in(en->inertia[i], within - i, &slope);
        slope_kgm2_per_rad[k] = slope * PER_RAD;
    }
}

void tacet_engine_drive(const tacet_engine *en, const tacet_engine_work *w, unsigned slot, size_t n,
                        const double *angle_rad, double *torque_Nm, double *inertia_kgm2,
                        double *slope_kgm2_per_rad)
{
    cursor at = {.first = 0, .end = 0};
    double top = en->slot[slot].firing_rad * PER_RAD;
    const double(*inertia)[6] = en->inertia;
    for (size_t k = 0; k < n; k++) {
        double deg = angle_rad[k] * PER_RAD - top, y, slope;
        if (!(deg >= at.first && deg < at.end)) {
            if (!w->loaded || !find_half(en, w, slot, deg, &at)) {
                torque_Nm[k] = inertia_kgm2[k] = slope_kgm2_per_rad[k] = NAN;
                continue;
            }
            inertia = en->inertia + at.from_top;
        }
        int i = cell(&at, deg, &y);
        torque_Nm[k] += torque_in(at.piece->node + i, y);
        inertia_kgm2[k] += inertia_in(inertia[i], y, &slope);
        slope_kgm2_per_rad[k] += slope * PER_RAD;
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
