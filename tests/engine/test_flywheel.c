// Flywheels from torque curves, E19 to E22: energy over the mean is the integral of torque, so line
// h of it is T_h / (i order); its peaks give the inertia for a coefficient of fluctuation.
#include "near.h"
#include "tacet/order.h"
#include <math.h>

#define RPM (2 * M_PI / 60)

// Largest minus smallest energy, J, of a torque with the given lines over a repeat.
static double energy_range(const tacet_spectrum *torque, tacet_arena *a)
{
    tacet_spectrum energy;
    assert_int_equal(tacet_spectrum_init(&energy, torque->n_lines, a), TACET_OK);
    energy.revolutions = torque->revolutions;
    for (size_t h = 1; h <= torque->n_lines; h++)
        energy.line[h] = torque->line[h] / (I * (double)h / torque->revolutions);
    tacet_transform *t;
    assert_int_equal(tacet_transform_create(tacet_transform_length(torque->n_lines, 8), &t),
                     TACET_OK);
    double *buffer = tacet_transform_buffer(t);
    assert_non_null(buffer);
    tacet_peaks peaks;
    tacet_spectrum_peaks(&energy, t, buffer, &peaks);
    tacet_transform_release(buffer);
    tacet_transform_destroy(t);
    return peaks.max - peaks.min;
}

static tacet_spectrum lines(size_t n, unsigned revolutions, tacet_arena *a)
{
    tacet_spectrum s;
    assert_int_equal(tacet_spectrum_init(&s, n, a), TACET_OK);
    s.revolutions = revolutions;
    return s;
}

// E19: Khurmi and Gupta ex. 16.3: 300 kW at 90 rpm, energy fluctuation 0.1 of the work of a
// revolution, C_S = 0.01, radius of gyration 2 m: 5628.95 kg.
static void test_flywheel_e19(void **state)
{
    (void)state;
    double w = 90 * RPM, range = 0.1 * 300e3 * 60 / 90, inertia = range / (0.01 * w * w);
    assert_near(inertia / 4, 5628.95, 5e-3, 0);
}

// E20: ex. 16.11: T = 20000 + 9500 sin 2a - 5700 cos 2a N m, 180 rpm, C_S = 0.01: 376.99 kW,
// 11078.81 J (closed form sqrt(9500^2 + 5700^2)), 3118.106 kg m2 (printed 377, 11078, 3121).
static void test_flywheel_e20(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum t = lines(4, 1, a);
    double w = 180 * RPM;
    t.mean = 20000;
    t.line[2] = -5700 - 9500 * I;
    double range = energy_range(&t, a);
    assert_near(t.mean * w, 376.99e3, 10, 0);
    assert_near(range, 11078.81, 0, 1e-6);
    assert_near(range / (0.01 * w * w), 3118.106, 0, 1e-6);
    tacet_arena_destroy(a);
}

// E21: ex. 16.9: single 4-stroke, 20 kW, 300 rpm, triangular torque over the expansion stroke with
// 1.5 times the net work, the rest spread evenly over the other strokes; C_S = 0.04. Work 8000 J,
// largest torque 7639.437, mean 636.620 N m, energy 10083.33 J, inertia 255.414 kg m2 (closed form:
// similar triangles over the mean line; the other strokes count only as their sum).
static void test_flywheel_e21(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    size_t n = 1 << 14;
    tacet_transform *fft;
    assert_int_equal(tacet_transform_create(n, &fft), TACET_OK);
    double *x = tacet_transform_buffer(fft), w = 300 * RPM, work = 20e3 / (300 / 120.0);
    assert_non_null(x);
    double peak = 1.5 * work / (M_PI / 2), mean = work / (4 * M_PI);
    for (size_t i = 0; i < n; i++) { // expansion over the first quarter of two revolutions
        double turn = 4 * M_PI * (double)i / (double)n;
        double rise = turn < M_PI / 2 ? turn / (M_PI / 2) : 2 - turn / (M_PI / 2);
        x[i] = turn < M_PI ? peak * rise : -0.5 * work / (3 * M_PI);
    }
    tacet_spectrum t = lines(2000, 2, a);
    tacet_transform_lines(fft, x, &t);
    assert_near(work, 8000, 1e-9, 0);
    assert_near(peak, 7639.437, 1e-3, 0);
    assert_near(mean, 636.620, 1e-3, 0);
    assert_near(t.mean, mean, 0, 1e-3);
    double range = energy_range(&t, a);
    assert_near(range, 10083.33, 0, 1e-3);
    assert_near(range / (0.04 * w * w), 255.414, 0, 1e-3);
    tacet_transform_release(x);
    tacet_transform_destroy(fft);
    tacet_arena_destroy(a);
}

// E22: ex. 16.13, first part: T = 5000 + 1500 sin 3a N m, I = 1000 kg m2, 300 rpm: 157.08 kW,
// 1000 J, C_S = 0.10132 %.
static void test_flywheel_e22(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum t = lines(5, 1, a);
    double w = 300 * RPM;
    t.mean = 5000;
    t.line[3] = -1500 * I;
    double range = energy_range(&t, a);
    assert_near(t.mean * w, 157.08e3, 1, 0);
    assert_near(range, 1000, 0, 1e-6);
    assert_near(range / (1000 * w * w), 0.10132e-2, 5e-8, 0);
    tacet_arena_destroy(a);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_flywheel_e19),
        cmocka_unit_test(test_flywheel_e20),
        cmocka_unit_test(test_flywheel_e21),
        cmocka_unit_test(test_flywheel_e22),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
