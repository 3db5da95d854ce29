#include "pulses.h"
#include <math.h>
#include <string.h>

#define RATIO    12.0
#define EXPONENT 1.33

static double rise(double x)
{
    if (x <= 0) return 0;
    if (x >= 1) return 1;
    return x * x * x * (10 - 15 * x + 6 * x * x);
}

// Piston travel and its slope, m and m/rad.
static void slider(const pulses *p, double a, double *x, double *dx)
{
    double r = p->crank_m, l = p->rod_m, sn = sin(a), cs = cos(a);
    double q = sqrt(l * l - r * r * sn * sn);
    *x = r + l - r * cs - q;
    *dx = r * sn + r * r * sn * cs / q;
}

// Pressure above the crankcase at `deg` from firing top, Pa; burnt: what the burn adds, as a share
// of compression.
static double pressure(const pulses *p, bool fired, double deg, double burnt)
{
    double x, dx, stroke = 2 * p->crank_m, dead = stroke / (RATIO - 1);
    slider(p, deg * M_PI / 180, &x, &dx);
    double squeeze = pow((stroke + dead) / (x + dead), EXPONENT), exhaust = 1.1e5, intake = 1.2e5;
    double skipped = 0.4e5 * squeeze;
    if (!fired) return skipped - 1e5;
    double closed = intake * squeeze * (1 + burnt * rise((deg + 12) / 45));
    double blown = rise((deg - 130) / 50), filled = rise((deg + 355) / 60);
    double now = closed + blown * (exhaust - closed);
    if (deg < -180) now = skipped + filled * (intake - skipped);
    double last = rise((deg - 320) / 40); // into the next window
    return now + last * (skipped - now) - 1e5;
}

static double area(const pulses *p)
{
    return M_PI / 4 * p->bore_m * p->bore_m;
}

static double work(const pulses *p, double burnt)
{
    double sum = 0;
    for (int i = 0; i < PULSES_STEPS; i++) {
        double x, dx, deg = -360 + 720.0 * i / PULSES_STEPS;
        slider(p, deg * M_PI / 180, &x, &dx);
        sum += pressure(p, true, deg, burnt) * area(p) * dx * 4 * M_PI / PULSES_STEPS;
    }
    return sum;
}

static void fill(pulses *p, double work_J)
{
    double none = work(p, 0), burnt = (work_J - none) / (work(p, 1) - none);
    for (int fired = 0; fired < 2; fired++) {
        double *T = p->torque[fired], *d = p->slope[fired];
        for (int i = 0; i <= PULSES_STEPS; i++) {
            double x, dx, deg = -360 + 720.0 * i / PULSES_STEPS;
            slider(p, deg * M_PI / 180, &x, &dx);
            T[i] = i % PULSES_STEPS ? pressure(p, fired, deg, burnt) * area(p) * dx : 0;
        }
        for (int i = 1; i < PULSES_STEPS; i++)
            d[i] = (T[i + 1] - T[i - 1]) / 2;
        d[0] = d[PULSES_STEPS] = (T[1] - T[PULSES_STEPS - 1]) / 2;
    }
}

// J = m x'^2 and its slope per step, over a turn.
static void fill_inertia(pulses *p)
{
    double m = p->mass_kg, r = p->crank_m, l = p->rod_m;
    for (int i = 0; i <= PULSES_STEPS; i++) {
        double a = 2 * M_PI * i / PULSES_STEPS, sn = sin(a), cs = cos(a);
        double q = sqrt(l * l - r * r * sn * sn), v = r * sn * (1 + r * cs / q);
        double dv = r * cs + r * r * (cs * cs - sn * sn) / q +
                    r * r * r * r * sn * sn * cs * cs / (q * q * q);
        p->inertia[i] = m * v * v;
        p->rise[i] = 2 * m * v * dv * (2 * M_PI / PULSES_STEPS);
    }
}

static void lay_out(pulses *p, const char *word, const unsigned *slot_throw)
{
    p->word = word;
    p->length = (unsigned)strlen(word);
    for (p->revolutions = 2; p->revolutions * p->cylinders / 2 % p->length; p->revolutions += 2)
        ;
    for (unsigned slot = 0; slot < p->cylinders; slot++) {
        unsigned t = p->slot_throw[slot] = slot_throw[slot];
        p->throw_slot[t][p->throw_slots[t]++] = slot;
        if (t >= p->throws) p->throws = t + 1;
    }
}

void pulses_six(pulses *p, const char *word, double work_J)
{
    static const unsigned slot_throw[] = {0, 4, 2, 5, 1, 3};
    *p =
        (pulses){.cylinders = 6, .crank_m = 0.065, .rod_m = 0.215, .mass_kg = 2.7, .bore_m = 0.108};
    lay_out(p, word, slot_throw);
    fill(p, work_J);
    fill_inertia(p);
}

void pulses_eight(pulses *p, const char *word, double work_J)
{
    static const unsigned slot_throw[] = {0, 3, 1, 1, 2, 2, 3, 0};
    *p = (pulses){
        .cylinders = 8, .crank_m = 0.046, .rod_m = 0.155, .mass_kg = 0.62, .bore_m = 0.100};
    lay_out(p, word, slot_throw);
    fill(p, work_J);
    fill_inertia(p);
}

double pulses_mean_inertia(const pulses *p)
{
    double sum = 0;
    for (int i = 0; i < 720; i++) {
        double x, dx;
        slider(p, 2 * M_PI * i / 720, &x, &dx);
        sum += p->mass_kg * dx * dx / 720;
    }
    return p->massless ? 0 : sum;
}

// Cubic between two values and their slopes per step, at u = 0..1; its slope per step.
static double between(const double *y, const double *d, double u, double *slope)
{
    double bend = 3 * (y[1] - y[0]) - 2 * d[0] - d[1], twist = 2 * (y[0] - y[1]) + d[0] + d[1];
    *slope = d[0] + u * (2 * bend + u * 3 * twist);
    return y[0] + u * (d[0] + u * (bend + u * twist));
}

static double gas_torque(const pulses *p, unsigned slot, double angle)
{
    double at = angle * (PULSES_STEPS / (4 * M_PI)) - slot * ((double)PULSES_STEPS / p->cylinders) +
                PULSES_STEPS / 2;
    double turn = floor(at / PULSES_STEPS);
    long opportunity = ((long)p->cylinders * (long)turn + (long)slot) % (long)p->length;
    if (opportunity < 0) opportunity += p->length;
    at -= turn * PULSES_STEPS;
    int i = (int)at, fired = p->word[opportunity] == 'x';
    double slope;
    return between(&p->torque[fired][i], &p->slope[fired][i], at - i, &slope);
}

// Adds a piston's inertia and its slope; the slope is that of what interpolates the inertia.
static void add_inertia(const pulses *p, double angle, double *inertia, double *slope)
{
    double at = angle * (PULSES_STEPS / (2 * M_PI)), per_step;
    at -= PULSES_STEPS * floor(at / PULSES_STEPS);
    int i = at < PULSES_STEPS ? (int)at : 0;
    *inertia += between(&p->inertia[i], &p->rise[i], at - i, &per_step);
    *slope += per_step * (PULSES_STEPS / (2 * M_PI));
}

tacet_status pulses_drive(const void *who, size_t throw_index, size_t n, const double *angle_rad,
                          double *torque_Nm, double *inertia_kgm2, double *slope_kgm2_per_rad)
{
    const pulses *p = who;
    for (size_t k = 0; k < n; k++) {
        torque_Nm[k] = inertia_kgm2[k] = slope_kgm2_per_rad[k] = 0;
        for (unsigned i = 0; i < p->throw_slots[throw_index]; i++) {
            unsigned slot = p->throw_slot[throw_index][i];
            torque_Nm[k] += gas_torque(p, slot, angle_rad[k]);
            if (p->massless) continue;
            double a = angle_rad[k] - slot * (4 * M_PI / p->cylinders);
            add_inertia(p, a, &inertia_kgm2[k], &slope_kgm2_per_rad[k]);
        }
    }
    return TACET_OK;
}
