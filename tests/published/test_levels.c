// Levels and both kinds of dispersion on a rigid train, in closed form.
//
// Two cylinders, 360 degrees apart, turn one inertia J, so that the acceleration is T / J at every
// frequency. A fire is T = tau sin^2 a over one cycle, -2 pi .. 2 pi about its top, of which the
// content is
//   P(q) = tau/2 (S(q) - (S(q - 2) + S(q + 2)) / 2),  S(x) = 2 sin(2 pi x) / x,  S(0) = 4 pi,
// and a cylinder that fires once in R revolutions has lines P(h / R) / (pi R). A word of R letters
// takes R revolutions.
#include "formula.h"
#include <complex.h>
#include <math.h>
#include <stdio.h>

#define INERTIA 2e4
#define RPM     600.0
#define SIGMA   0.2
#define LOW_HZ  0.02

static double S(double x)
{
    return fabs(x) < 1e-9 ? 4 * M_PI : 2 * sin(2 * M_PI * x) / x;
}

static double content(double tau, double q)
{
    return tau / 2 * (S(q) - 0.5 * (S(q - 2) + S(q + 2)));
}

static void open_rigid(formula *f, const char *dispersion)
{
    char rest[1200];
    snprintf(rest, sizeof rest,
             "  nodes: [{name: crank, inertia_kgm2: %g}]\n  flywheel: crank\n"
             "bands:\n"
             "  - {name: low, kind: cab, guard_percent: 0, low_hz: 1, high_hz: 9, "
             "quantity: 'node-acceleration:crank', limit_rms: 1}\n"
             "  - {name: one, kind: cab, guard_percent: 0, low_hz: 1.2, high_hz: 2.1, "
             "quantity: 'node-acceleration:crank', limit_rms: 1}\n"
             "  - {name: all, kind: cab, guard_percent: 0, low_hz: %g, high_hz: 240, "
             "quantity: 'node-acceleration:crank', limit_rms: 1}\n"
             "screen: {speeds_rpm: [600, 700], brake_torque_nm: 9, densities: [1], "
             "highest_order: 28, referee: 0}\n",
             INERTIA, LOW_HZ);
    formula_open(f, 2, dispersion, rest);
}

// Mean squares of the lines in a band of a repeat of R revolutions, in which opportunities 0 and,
// when n is 2, 3 fire: as they add up, and as each one's own.
static void squares(double tau, int R, int n, double low_hz, double high_hz, double out[2])
{
    out[0] = out[1] = 0;
    for (int h = 1; h <= 28 * R; h++) {
        double q = (double)h / R, hz = q * RPM / 60, one = content(tau, q) / (M_PI * R) / INERTIA;
        if (hz < low_hz || hz > high_hz) continue;
        double complex sum = 1;
        if (n == 2) sum += cexp(-I * q * 2 * M_PI * 3);
        out[0] += one * one * creal(sum * conj(sum)) / 2;
        out[1] += one * one * n / 2;
    }
}

static void check_level(const tacet_band_result *b, const double sums[2])
{
    double nominal = sqrt(sums[0]), level = sqrt(sums[0] + SIGMA * SIGMA * sums[1]);
    assert_true(level > 1e-6);
    assert_near(b->level.nominal, nominal, 1e-4 * level, 1e-4);
    assert_near(b->level.dispersed, level, 0, 1e-4);
    assert_near(b->margin_db, -20 * log10(level), 1e-3, 0);
}

// One cylinder fires: what it adds is sigma times its own level, which grows by sqrt(1 + sigma^2).
static void test_one_cylinder_that_differs(void **state)
{
    (void)state;
    formula f;
    double tau = 32, sums[2];
    open_rigid(&f, "{cylinder_percent: 20, cyclic_percent: 0}");
    tacet_row row = formula_row(&f, "x...", RPM, tau / 4, TACET_LEVEL_RIPPLE);
    squares(tau, 4, 1, 1, 9, sums);
    check_level(&row.bands[0], sums);
    assert_near(row.bands[0].level.dispersed / row.bands[0].level.nominal, sqrt(1 + SIGMA * SIGMA),
                0, 1e-9);
    assert_false(row.bands[1].level.has_line);
    formula_close(&f);
}

// Two cylinders fire three opportunities apart: order 1/6 cancels between them, and all of its
// level comes from their difference.
static void test_two_cylinders_that_differ(void **state)
{
    (void)state;
    formula f;
    double tau = 32, sums[2];
    open_rigid(&f, "{cylinder_percent: 20, cyclic_percent: 0}");
    tacet_row row = formula_row(&f, "x..x........", RPM, tau * 2 / 12, TACET_LEVEL_RIPPLE);
    squares(tau, 12, 2, 1, 9, sums);
    check_level(&row.bands[0], sums);
    squares(tau, 12, 2, 1.2, 2.1, sums);
    check_level(&row.bands[1], sums);
    const tacet_band_level *l = &row.bands[1].level;
    double one = content(tau, 1. / 6) / (M_PI * 12) / INERTIA;
    assert_true(l->nominal < 1e-3 * l->dispersed);
    assert_near(l->dispersed, SIGMA * one * sqrt(2. / 2), 0, 1e-4);
    assert_near(l->leading_order, 1. / 6, 0, 1e-12);
    assert_near(l->leading_peak, SIGMA * one * sqrt(2), 0, 1e-4);
    formula_close(&f);
}

// Cycle to cycle at rate lambda: mean square lambda sigma^2 int T^2 dt / J^2 over all frequencies
// (Campbell's theorem; Rice 1944, from memory), int sin^4 = 3/8 of the window; less what lies below
// the band, 2 lambda sigma^2 |P(0)|^2 low. Above it 1e-7 is left (P falls with q^-3). 1e-3 is what
// the program's own integral is good for.
static void test_unequal_cycles(void **state)
{
    (void)state;
    static const char *const word[] = {"x...", "xx..", "x"};
    static const int fires[] = {1, 2, 4};
    formula f;
    open_rigid(&f, "{cylinder_percent: 0, cyclic_percent: 20}");
    for (int i = 0; i < 3; i++) {
        double tau = 8, W = RPM * M_PI / 30, lambda = fires[i] * RPM / 60 / 4;
        double square =
            lambda * SIGMA * SIGMA / (INERTIA * INERTIA) *
            (tau * tau * 3 / 8 * 4 * M_PI / W - 2 * LOW_HZ * pow(tau / 2 * 4 * M_PI / W, 2));
        tacet_row row = formula_row(&f, word[i], RPM, tau * fires[i] / 4, TACET_LEVEL_RIPPLE);
        const tacet_band_level *l = &row.bands[2].level;
        assert_near(l->dispersed * l->dispersed - l->nominal * l->nominal, square, 0, 1e-3);
    }
    formula_close(&f);
}

// Every line is counted in a band exactly when its frequency is inside: 2.5, 5 and 7.5 Hz of the
// repeat of four revolutions, of which 5 Hz is half an order, where a pulse of two revolutions has
// no content.
static void test_lines_in_the_band(void **state)
{
    (void)state;
    formula f;
    open_rigid(&f, "{cylinder_percent: 0, cyclic_percent: 0}");
    tacet_row row = formula_row(&f, "x...", RPM, 8, TACET_LEVEL_RIPPLE);
    double first = content(32, 0.25) / (M_PI * 4) / INERTIA,
           third = content(32, 0.75) / (M_PI * 4) / INERTIA;
    assert_near(row.bands[0].level.nominal, sqrt((first * first + third * third) / 2), 0, 1e-4);
    assert_near(row.bands[0].level.dispersed, sqrt((first * first + third * third) / 2), 0, 1e-4);
    assert_near(row.bands[0].level.leading_peak, first, 0, 1e-4);
    assert_near(row.bands[0].level.leading_order, 0.25, 0, 1e-12);
    formula_close(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_one_cylinder_that_differs),
        cmocka_unit_test(test_two_cylinders_that_differ),
        cmocka_unit_test(test_unequal_cycles),
        cmocka_unit_test(test_lines_in_the_band),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
